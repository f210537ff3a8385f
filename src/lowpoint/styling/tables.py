"""Tables of the books: headings with the widths of their columns, and rows below them in the house's look."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from openpyxl.utils import get_column_letter

from lowpoint.styling import style

__all__ = ["Head", "put_headings", "put_table"]


@dataclass(frozen=True, slots=True)
class Head:
    """A heading with the width of its column and the number format under it."""

    text: str
    width: float = 10.0
    fmt: str = "text"


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
