"""A sheet of plates in the making: where its cells are, and how cells, labels, tables and words are written."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from openpyxl.utils import get_column_letter

from lowpoint.starter.columns import Column
from lowpoint.starter.frame import Head, put_headings, spelled
from lowpoint.starter.notes import note, unit_label
from lowpoint.starter.plates_data import Duty
from lowpoint.styling import style

__all__ = ["FORMATS", "WIDE", "Page", "letters_of", "with_unit"]

WIDE = 17
"""Columns of a sheet that are printed."""
FORMATS = style.FORMATS["metric"] | {"text": "General", "count": "#,##0"}


def with_unit(column: Column, between: str) -> str:
    """A heading with its unit."""
    unit = unit_label(column.dimension, "metric")
    return f"{column.heading}{between}{unit}" if unit else column.heading


def letters_of(columns: Sequence[Column]) -> dict[str, str]:
    """The letters of a table's columns by key."""
    return {column.key: get_column_letter(place) for place, column in enumerate(columns, start=1)}


class Page:
    """The sheet of a duty; ``places`` holds the addresses of its named cells, for formulas."""

    def __init__(self, sheet: Any, duty: Duty) -> None:
        self.sheet, self.duty = sheet, duty
        self.places: dict[str, str] = {}
        self.design_first = self.other_first = 0
        """Rows of plate 1 in the two tables."""
        self.flash_row: int | None = None
        """Row of the plate that flashes."""

    def put(self, row: int, column: int, value: Any, fmt: str = "text", *, typed: bool = False) -> str:
        """Write a cell, an input where ``typed``; gives its address, fixed."""
        cell = self.sheet.cell(row, column, value)
        cell.number_format, cell.font, cell.border = FORMATS[fmt], style.PLAIN, style.LINE_BELOW
        if typed:
            cell.font, cell.fill = style.INPUT, style.fill("sand")
        if fmt in ("text", "verdict") or column == 1:
            cell.alignment = style.INDENTED
        return f"${cell.column_letter}${row}"

    def formula(self, text: str, more: Mapping[str, str] | None = None) -> str:
        """A formula with its cells put in: named ones, and those of ``more``, which go before."""
        return spelled(text, self.places | dict(more or {}), "metric")

    def band(self, row: int, text: str, across: int = WIDE) -> int:
        """A title over a part of the sheet; gives the next row."""
        for column in range(1, across + 1):
            self.sheet.cell(row, column).fill = style.fill("mist")
        self.sheet.cell(row, 1, text).font = style.BAND
        return row + 1

    def label(self, row: int, column: Column) -> None:
        """The words before an input or a result, with unit and note."""
        self.put(row, 1, with_unit(column, ", "))
        if column.of or column.note:
            self.sheet.cell(row, 1).comment = note(column, "metric")

    def text(self, row: int, value: str, first: int = 1, lines: int | None = None) -> int:
        """Words across the sheet, wrapped; gives the next row."""
        self.sheet.merge_cells(start_row=row, start_column=first, end_row=row, end_column=WIDE)
        cell = self.sheet.cell(row, first, value)
        cell.font, cell.alignment = style.PLAIN, style.WRAP
        self.sheet.row_dimensions[row].height = 13 * (lines or 1 + len(value) // 230) + 2
        return row + 1

    def verdict(self, row: int, formula: str, bad: str) -> None:
        """A formula that answers in words, over two columns; marked where it begins with ``bad``."""
        self.sheet.merge_cells(start_row=row, start_column=2, end_row=row, end_column=4)
        self.put(row, 2, formula, "verdict")
        cell, test = f"B{row}", f'LEFT(B{row},{len(bad)})="{bad}"'
        self.sheet.conditional_formatting.add(cell, style.rule(test, "watch", ink="ink"))

    def headings(self, row: int, columns: Iterable[Column]) -> int:
        """Headings of a table with units and notes; gives the next row."""
        columns = list(columns)
        put_headings(self.sheet, row, [Head(with_unit(column, "\n"), column.width) for column in columns])
        self.sheet.row_dimensions[row].height = 52
        for place, column in enumerate(columns, start=1):
            if column.of or column.note:
                self.sheet.cell(row, place).comment = note(column, "metric")
        return row + 1

    def guarded(self, row: int, formula: str) -> str:
        """A formula that is empty in a row that has no plate."""
        return f'=IF($A{row}="","",{formula})'

    def row(
        self, columns: Sequence[Column], row: int, more: Mapping[str, str], *, guard: bool = True
    ) -> None:  # fmt: skip
        """The computed cells of a row of a table, but for those that are there already."""
        places = {key: f"${letter}{row}" for key, letter in letters_of(columns).items()} | dict(more)
        for place, column in enumerate(columns, start=1):
            if column.formula and self.sheet.cell(row, place).value is None:
                text = self.formula(column.formula, places)
                self.put(row, place, self.guarded(row, text) if guard else f"={text}", column.fmt)

    def mark(self, columns: Sequence[Column], first: int, last: int) -> None:
        """Conditional formats of a table: states by colour beside their word, margins that are crossed."""
        letters = letters_of(columns)
        for key, letter in letters.items():
            area, at = f"{letter}{first}:{letter}{last}", f"{letter}{first}"
            if key.startswith("state"):
                style.mark_verdicts(self.sheet, area, at)
            elif key.startswith("margin"):
                crossed = style.rule(f"AND(ISNUMBER({at}),{at}<=0)", ink="bad", bold=True)
                self.sheet.conditional_formatting.add(area, crossed)
