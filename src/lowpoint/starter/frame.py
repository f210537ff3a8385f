"""What the writers of the sheets share: where the rows of a sheet are, names for its columns, formulas of a row."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName

from lowpoint.starter import style
from lowpoint.starter.notes import twin

__all__ = ["FIRST", "HEADINGS", "ITEMS_LAST", "LAST", "Head", "name_column", "put_headings", "put_table", "spelled",
           "words_of_set"]  # fmt: skip

HEADINGS = 5
"""The row of the headings on the sheets List and Items."""
FIRST = HEADINGS + 1
LAST, ITEMS_LAST = 1500, 500
"""How far the names reach: rows added below the last one, up to here, are counted on sheet Summary."""

_FUNCTION = re.compile(r"\bLP_[A-Z]+(?:_[A-Z]+)*\b")


@dataclass(frozen=True, slots=True)
class Head:
    """A heading with the width of its column and the number format under it."""

    text: str
    width: float = 10.0
    fmt: str = "text"


def words_of_set(system: str) -> dict[str, str]:
    """The pressure units of a set, in the words that cells hold."""
    metric = {"bar": "bar a", "gauge": "bar g"}
    return metric if system == "metric" else {"bar": "psia", "gauge": "psig"}


def spelled(formula: str, places: Mapping[str, str], system: str) -> str:
    """A formula with its cells put in, and its LP_ functions in the set of units of the book."""
    return _FUNCTION.sub(lambda match: twin(match[0], system), formula.format_map(places))


def name_column(book: Any, name: str, sheet: str, column: int, last: int, first: int = FIRST) -> None:
    """Name the cells of a column: ``List_tag`` and the like."""
    letter = get_column_letter(column)
    book.defined_names[name] = DefinedName(name, attr_text=f"{sheet}!${letter}${first}:${letter}${last}")


def put_headings(sheet: Any, row: int, heads: Sequence[Head], column: int = 1) -> None:
    """A row of headings; column widths are set where none is wider yet."""
    for place, head in enumerate(heads, start=column):
        cell = sheet.cell(row, place, head.text)
        style.heading(cell)
        letter = get_column_letter(place)
        before = sheet.column_dimensions[letter].width if letter in sheet.column_dimensions else 0.0
        sheet.column_dimensions[letter].width = max(head.width, before)


def put_table(
    sheet: Any, row: int, heads: Sequence[Head], rows: Iterable[Sequence[Any]], formats: Mapping[str, str],
    column: int = 1, typed: Sequence[int] = (),
) -> int:  # fmt: skip
    """Headings and rows below them; the places in ``typed`` are inputs. Gives the row after the last."""
    put_headings(sheet, row, heads, column)
    for values in rows:
        row += 1
        for place, (head, value) in enumerate(zip(heads, values, strict=True)):
            cell = sheet.cell(row, column + place, value)
            cell.number_format = formats[head.fmt]
            cell.font = style.INPUT if place in typed else style.PLAIN
            if place in typed:
                cell.fill = style.fill("sand")
            cell.border = style.LINE_BELOW
            if head.fmt in ("text", "tag", "verdict"):
                cell.alignment = style.INDENTED
    return row + 1
