"""References: columns by number, rows fixed or counted from the row of the formula that holds them."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import NamedTuple

__all__ = [
    "LAST_COLUMN",
    "LAST_ROW",
    "Area",
    "Ref",
    "Row",
    "address",
    "area",
    "column_letters",
    "column_number",
    "quoted",
]

LAST_ROW = 1_048_576
LAST_COLUMN = 16_384
_AREA = re.compile(r"\$?([A-Za-z]{1,3})\$?(\d+)(?::\$?([A-Za-z]{1,3})\$?(\d+))?")
_PLAIN_SHEET = re.compile(r"[^\W\d][\w.]*")
_LIKE_A_CELL = re.compile(r"[A-Za-z]{1,3}\d+|[Rr]\d*[Cc]\d*|[Rr]|[Cc]")


class Row(NamedTuple):
    """A row: ``n`` below the formula's own (``relative``), or the sheet's row number ``n``."""

    relative: bool
    n: int

    def at(self, row: int) -> int:
        """The row number it means in a formula that stands in ``row``."""
        return row + self.n if self.relative else self.n


class Area(NamedTuple):
    """A rectangle of cells, rows and columns from 1, both ends included."""

    r1: int
    c1: int
    r2: int
    c2: int


class Ref(NamedTuple):
    """A cell or a rectangle, on the formula's own sheet when ``sheet`` is None."""

    sheet: str | None
    c1: int
    r1: Row
    c2: int
    r2: Row

    @property
    def single(self) -> bool:
        """One cell only."""
        return self.c1 == self.c2 and self.r1 == self.r2

    @property
    def whole(self) -> bool:
        """Whole columns."""
        return (self.r1, self.r2) == (Row(False, 1), Row(False, LAST_ROW))

    def at(self, row: int) -> Area:
        """The rectangle it means for a formula in ``row``."""
        first, last = self.r1.at(row), self.r2.at(row)
        return Area(min(first, last), min(self.c1, self.c2), max(first, last), max(self.c1, self.c2))

    def moved(self, rows: int, columns: int) -> Ref:
        """The reference of a formula that was copied: only relative rows and the given column shift change."""

        def row(r: Row) -> Row:
            return Row(True, r.n + rows) if r.relative else r

        return self._replace(c1=self.c1 + columns, c2=self.c2 + columns, r1=row(self.r1), r2=row(self.r2))


@lru_cache(maxsize=LAST_COLUMN)
def column_number(letters: str) -> int:
    """1 for A, 27 for AA.

    >>> column_number("AA")
    27
    """
    number = 0
    for letter in letters.upper():
        number = number * 26 + ord(letter) - 64
    return number


@lru_cache(maxsize=LAST_COLUMN)
def column_letters(number: int) -> str:
    """A for 1, AA for 27.

    >>> column_letters(27)
    'AA'
    """
    letters = ""
    while number:
        number, rest = divmod(number - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


def address(row: int, column: int) -> str:
    """The usual name of a cell.

    >>> address(5, 28)
    'AB5'
    """
    return f"{column_letters(column)}{row}"


def area(text: str) -> Area | None:
    """The rectangle that "B2" or "B2:D9" names; None when it is something else or beyond a sheet."""
    found = _AREA.fullmatch(text.strip())
    if not found:
        return None
    c1, r1 = column_number(found[1]), int(found[2])
    c2, r2 = (column_number(found[3]), int(found[4])) if found[3] else (c1, r1)
    inside = min(r1, r2) >= 1 and max(r1, r2) <= LAST_ROW and max(c1, c2) <= LAST_COLUMN
    return Area(min(r1, r2), min(c1, c2), max(r1, r2), max(c1, c2)) if inside else None


def quoted(sheet: str) -> str:
    """A sheet's name as a formula writes it.

    >>> quoted("Boiler house")
    "'Boiler house'"
    """
    if _PLAIN_SHEET.fullmatch(sheet) and not _LIKE_A_CELL.fullmatch(sheet):
        return sheet
    return "'" + sheet.replace("'", "''") + "'"
