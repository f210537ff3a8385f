"""A sheet as it was read, whatever the file: rows of plain values, and what else the reader of a list must know."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from lowpoint.book.refs import address

__all__ = ["Grid", "Sheets", "cell_name"]


@dataclass(eq=False)
class Grid:
    """One sheet. ``rows`` holds (row number from 1, values from column A on); wholly blank rows may be left out."""

    sheet: str
    rows: list[tuple[int, list[Any]]] = field(default_factory=list)
    hidden_rows: frozenset[int] = frozenset()
    hidden_columns: frozenset[int] = frozenset()
    merged: tuple[tuple[int, int, int, int], ...] = ()
    """First row, first column, last row, last column."""
    unvalued: frozenset[tuple[int, int]] = frozenset()
    """(row, column) of formulas that hold no value."""
    percent: frozenset[tuple[int, int]] = frozenset()
    """(row, column) of cells that show a share as per cent, where a heading asks for per cent."""
    state: str = "visible"
    all_text: bool = False
    """Whether every cell is text, as in a csv."""
    decimal: str = "."
    separator: str = ""
    """Of a csv: what sets its values apart."""

    @property
    def empty(self) -> bool:
        return not any(value not in (None, "") for _, values in self.rows for value in values)


@dataclass(frozen=True)
class Sheets:
    """A file's sheets, and what was noticed about the file."""

    format: str
    grids: tuple[Grid, ...]
    notes: tuple[str, ...] = ()


def cell_name(row: int, column: int) -> str:
    """Name of a cell, column from 0."""
    return address(row, column + 1)
