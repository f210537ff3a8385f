"""The book of plates as tests look at it: cells by the words of their heading and the name of their row."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path
from typing import Any

import openpyxl

from book.starters import WORKBOOKS, fresh_folder
from lowpoint.starter.plates_data import DUTIES, Duty

NAME = "kestrel-bay-plates.xlsx"
COMMITTED = WORKBOOKS / NAME
BANDS = {
    "design": "Plates of equal index, design case", "other": "The plates as drilled, other case",
    "margin": "Plates of equal margin, from lowpoint.design",
}  # fmt: skip
NAMED = ("before plate 1", "plate at the flash vessel")
"""Rows of a table that are not named by a number."""
DUTY_SHEETS = tuple(duty.sheet for duty in DUTIES)


@dataclass
class Plates:
    """The book with its formulas and, beside, its stored values."""

    path: Path
    formulas: Any = field(init=False)
    values: Any = field(init=False)

    def __post_init__(self) -> None:
        self.formulas = openpyxl.load_workbook(self.path)
        self.values = openpyxl.load_workbook(self.path, data_only=True)

    def input(self, sheet: str, words: str, case: str = "design") -> Any:
        """The value beside a label of column A, unit left out."""
        found = [cell.row for cell in self.values[sheet]["A"] if str(cell.value).rpartition(", ")[0] == words]
        found = found or [cell.row for cell in self.values[sheet]["A"] if cell.value == words]
        assert len(found) == 1, (words, found)
        return self.values[sheet].cell(found[0], 3 if case == "other" and found[0] < 19 else 2).value

    def head(self, sheet: str, table: str) -> int:
        """The row of a table's headings."""
        page = self.values[sheet]
        (band,) = (c.row for c in page["A"] if isinstance(c.value, str) and c.value.startswith(BANDS[table]))
        return next(row for row in range(band, band + 8) if page.cell(row, 1).value == "Plate")

    def table(self, sheet: str, table: str) -> tuple[dict[str, int], dict[Any, int]]:
        """Columns by heading (unit left out) and rows by what stands in their first cell."""
        page, head = self.values[sheet], self.head(sheet, table)
        columns = {str(page.cell(head, c).value).partition("\nbar")[0].partition("\nm")[0]: c for c in range(1, 18)}
        rows = {}
        for row in range(head + 1, head + 12):
            first = page.cell(row, 1).value
            if isinstance(first, int | float) or first in NAMED:
                rows[first] = row
            elif first:
                break
        return columns, rows

    def column(self, sheet: str, table: str, heading: str) -> list[Any]:
        """The values of a table's column, the numbered plates only."""
        columns, rows = self.table(sheet, table)
        page = self.values[sheet]
        return [page.cell(row, columns[heading]).value for name, row in rows.items() if not isinstance(name, str)]

    def cells(self) -> Iterator[tuple[str, Any, Any]]:
        """Sheet, cell with its formula, cell with its value."""
        for sheet in self.formulas.worksheets:
            for row in sheet.iter_rows():
                for cell in row:
                    yield sheet.title, cell, self.values[sheet.title][cell.coordinate]


@cache
def plates() -> Plates:
    """The book made anew."""
    return Plates(fresh_folder() / NAME)


def duty_of(tag: str) -> Duty:
    return next(duty for duty in DUTIES if duty.tag == tag)
