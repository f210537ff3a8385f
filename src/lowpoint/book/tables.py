"""Tables, and structured references rewritten to plain ones.

The engine's load knows no tables, and calculated columns are the commonest form of a valve list.
Source: ISO/IEC 29500-1, 18.5 (tables) and 18.17.2 (structured references).
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from .formulas import Token, Unreadable
from .names import Place
from .package import Package
from .refs import Area, Ref, Row, area

__all__ = ["Table", "Tables", "tables_of"]

_NAMED = re.compile(r"(?P<table>[^\[\]]*)\[(?P<inside>.*)\]", re.DOTALL)
_PIECE = re.compile(r"\[((?:[^\[\]']|'.)*)\]|([,:])|\s+|((?:[^\[\]',:\s]|'.)(?:[^\[\]',:]|'.)*)", re.DOTALL)
_ESCAPED = re.compile(r"_x([0-9A-Fa-f]{4})_")
_ITEMS = {"#all", "#data", "#headers", "#totals", "#this row"}


@dataclass(frozen=True, slots=True)
class Table:
    """One table: its place, how many header and totals rows it has, its columns' names folded."""

    name: str
    sheet: str
    area: Area
    headers: int
    totals: int
    columns: tuple[str, ...]

    def rows(self, items: set[str], own_row: int) -> tuple[Row, Row]:
        """First and last row that the bracketed items name. Raises Unreadable where the table has no such row."""
        top, bottom = self.area.r1 + self.headers, self.area.r2 - self.totals
        if "#this row" in items:
            if not top <= own_row <= bottom:
                raise Unreadable(
                    f"it asks for its own row of the table {self.name}, but stands outside that table's rows"
                )
            return Row(True, 0), Row(True, 0)
        wanted = {"#headers", "#data", "#totals"} if "#all" in items else items or {"#data"}
        bands = {"#headers": (self.area.r1, top - 1), "#data": (top, bottom), "#totals": (bottom + 1, self.area.r2)}
        chosen = [bands[item] for item in wanted if bands[item][0] <= bands[item][1]]
        if not chosen:
            raise Unreadable(f"the table {self.name} has no {' or '.join(sorted(wanted))} rows")
        return Row(False, min(first for first, _ in chosen)), Row(False, max(last for _, last in chosen))

    def column(self, name: str) -> int:
        """The sheet's column that a column's name stands for."""
        try:
            return self.area.c1 + self.columns.index(_folded(name))
        except ValueError:
            raise Unreadable(f"the table {self.name} has no column {name!r}") from None


def tables_of(package: Package) -> Tables:
    """Every table of a workbook that lies in a usable place."""
    found = []
    for sheet in package.sheets:
        for table in package.tables(sheet):
            place = area(table.ref)
            if place is not None:
                columns = tuple(_folded(name) for name in table.columns)
                found.append(Table(table.name, sheet.title, place, table.header_rows, table.totals_rows, columns))
    return Tables(found)


class Tables:
    """The tables of a workbook."""

    def __init__(self, tables: Sequence[Table] = ()) -> None:
        self._by_name = {t.name.casefold(): t for t in tables}

    def expand(self, tokens: Sequence[Token], place: Place) -> list[Token]:
        """The tokens with every structured reference, and every bare table name, as a plain reference."""
        return [self._plain(t, place) for t in tokens]

    def _plain(self, token: Token, place: Place) -> Token:
        if token.kind == "name" and token.text.casefold() in self._by_name:
            return self._ref(self._by_name[token.text.casefold()], set(), [], place)
        if token.kind != "table":
            return token
        found = _NAMED.fullmatch(token.text)
        if not found:  # the scanner lets nothing else through
            raise Unreadable(f"the table reference {token.text!r} cannot be read")
        items, columns = _specified(found["inside"])
        return self._ref(self._table(found["table"], place), items, columns, place)

    def _table(self, name: str, place: Place) -> Table:
        if name:
            if name.casefold() in self._by_name:
                return self._by_name[name.casefold()]
            raise Unreadable(f"there is no table {name!r} in the workbook")
        for table in self._by_name.values():
            a = table.area
            if table.sheet == place.sheet and a.r1 <= place.row <= a.r2 and a.c1 <= place.column <= a.c2:
                return table
        raise Unreadable("it names a table's column without the table, and stands in none")

    @staticmethod
    def _ref(table: Table, items: set[str], columns: list[str], place: Place) -> Token:
        first, last = table.rows(items, place.row)
        c1, c2 = table.area.c1, table.area.c2
        if columns:
            c1, c2 = table.column(columns[0]), table.column(columns[-1])
        sheet = None if table.sheet == place.sheet else table.sheet
        return Token("ref", "", Ref(sheet, c1, first, c2, last))


def _specified(inside: str) -> tuple[set[str], list[str]]:
    """The items (#Data ...) and the columns (none, one, or the two ends of several) between a table's brackets."""
    text = inside.strip()
    items = set()
    if text.startswith("@"):
        items.add("#this row")
        text = text[1:].strip()
    if not text:
        return items, []
    if not text.startswith("["):
        return (items | {text.casefold()}, []) if text.casefold() in _ITEMS else (items, [_unescaped(text)])
    columns = []
    place = 0
    while place < len(text):
        piece = _PIECE.match(text, place)
        if not piece:
            raise Unreadable(f"the table reference [{inside}] cannot be read")
        inner = piece[1] if piece[1] is not None else piece[3]  # some writers leave the column's own brackets out
        if inner is not None:
            word = inner.strip().casefold()
            if word in _ITEMS:
                items.add(word)
            else:
                columns.append(_unescaped(inner))
        place = piece.end()
    return items, columns


def _unescaped(name: str) -> str:
    return re.sub(r"'(.)", r"\1", name, flags=re.DOTALL)


def _folded(name: str) -> str:
    return _ESCAPED.sub(lambda m: chr(int(m[1], 16)), name).replace("\r\n", "\n").casefold()
