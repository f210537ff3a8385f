"""The sample books as tests look at them: made once, read by key of the column, by tag and case."""

from __future__ import annotations

import sys
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path
from typing import Any

import openpyxl

from lowpoint.starter.frame import FIRST
from lowpoint.starter.list_sheet import LETTERS
from lowpoint.starter.plant import Case, Item, Plant

ROOT = Path(__file__).parents[2]
WORKBOOKS = ROOT / "workbooks"
NAMES = {"metric": "kestrel-bay.xlsx", "us": "kestrel-bay-us.xlsx"}
SYSTEMS = tuple(NAMES)


@dataclass
class Sample:
    """One book with its formulas and, beside, its stored values; the plant that it was made from."""

    path: Path
    plant: Plant
    formulas: Any = field(init=False)
    values: Any = field(init=False)

    def __post_init__(self) -> None:
        self.formulas = openpyxl.load_workbook(self.path)
        self.values = openpyxl.load_workbook(self.path, data_only=True)

    def rows(self) -> Iterator[tuple[int, Item, Case]]:
        """Row number, item and case, as the list has them."""
        row = FIRST
        for item in self.plant.items:
            for case in item.cases:
                yield row, item, case
                row += 1

    def value(self, row: int, key: str) -> Any:
        """The stored value of a cell of the list."""
        return self.values["List"][f"{LETTERS[key]}{row}"].value

    def column(self, key: str) -> list[Any]:
        """The stored values of a column of the list."""
        return [self.value(row, key) for row, *_ in self.rows()]

    def row_of(self, tag: str, case: str) -> int:
        """The row of an item's case."""
        return next(row for row, item, given in self.rows() if (item.tag, given.name) == (tag, case))


@cache
def fresh_folder() -> Path:
    """A folder with the books as ``workbooks/build.py`` writes them now."""
    sys.path.insert(0, str(WORKBOOKS))
    try:
        from build import build
    finally:
        sys.path.remove(str(WORKBOOKS))
    # The folder lives as long as the run: the object that would remove it stays referenced by this cache.
    _kept.append(tempfile.TemporaryDirectory(prefix="starters-"))
    folder = Path(_kept[-1].name)
    build(folder)
    return folder


_kept: list[tempfile.TemporaryDirectory[str]] = []


@cache
def made(system: str) -> Sample:
    """A book made anew."""
    from lowpoint.starter import sample

    return Sample(fresh_folder() / NAMES[system], sample(us=system == "us"))


def committed(system: str) -> Path:
    """The book in the repository."""
    return WORKBOOKS / NAMES[system]


def formula_of(cell: Any) -> str:
    """The text of a formula; an array formula stands as an object in its first cell."""
    return str(getattr(cell.value, "text", cell.value))


def is_error(value: Any) -> bool:
    """Is a stored value a true error of a cell? (As text it would be one too: no cell holds such a word.)"""
    return isinstance(value, str) and value.startswith("#")
