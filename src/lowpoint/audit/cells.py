"""A sheet as cells with a place: one abstraction for workbooks, text and pages.

A cell lies in a row and covers an interval from ``left`` to ``right``: columns of a workbook (a merged cell covers
several), points of a page. Left, right, above and below mean the same for all three.
"""

from __future__ import annotations

from bisect import bisect_left
from collections import defaultdict
from dataclasses import dataclass, field
from functools import cached_property

__all__ = ["MOST_CELLS", "Cell", "Page"]

MOST_CELLS = 3000
"""Filled cells of one sheet that are read; a data sheet has a few hundred."""


@dataclass(slots=True, eq=False)
class Cell:
    """One filled cell."""

    row: int
    left: float
    right: float
    address: str
    text: str
    """As shown."""
    number: float | None = None
    """The stored number of a number cell; None for texts, which may still hold a number."""
    half: float = float("nan")
    """Half of the last digit shown, of a number cell."""
    unit: str = ""
    """The unit or sign that the cell's own number format writes."""
    factor: float = 1.0
    """100 for a number shown in per cent."""
    bottom: int = 0
    """Last row that it covers."""
    hidden: bool = False
    kind: str = ""
    """``date``, ``logical``, ``error``, ``formula`` (one without a stored value), else empty."""

    def over(self, other: Cell) -> float:
        """Length of the part of the interval that both cover."""
        return min(self.right, other.right) - max(self.left, other.left)

    @property
    def middle(self) -> float:
        return (self.left + self.right) / 2.0


@dataclass(eq=False)
class Page:
    """One sheet, or one page of a document, as its filled cells."""

    name: str
    cells: list[Cell]
    exact: bool = True
    """Are intervals those of columns (True), or of places on a page, where cells of a column need not align?"""
    state: str = "visible"
    merged: int = 0
    hidden: int = 0
    """How many filled cells are hidden."""
    notes: list[tuple[str, str, str, str]] = field(default_factory=list)
    """Of the reader: kind, cell, text, remedy."""

    def add(self, cell: Cell) -> bool:
        """Take a cell; False where the sheet is full, which is told once."""
        if len(self.cells) >= MOST_CELLS:
            text = f"the sheet has more than {MOST_CELLS} filled cells; the rest was not read"
            self.notes.append(("unread", self.name, text, "Send the data sheet alone."))
            return False
        self.cells.append(cell)
        return True

    @cached_property
    def rows(self) -> dict[int, list[Cell]]:
        """The cells of each row from left to right; a cell over several rows stands in each."""
        found: dict[int, list[Cell]] = defaultdict(list)
        for cell in self.cells:
            for row in range(cell.row, min(max(cell.bottom, cell.row), cell.row + 60) + 1):
                found[row].append(cell)
        for cells in found.values():
            cells.sort(key=lambda cell: (cell.left, cell.row))
        return dict(found)

    @cached_property
    def order(self) -> list[int]:
        """Numbers of the filled rows, from the top."""
        return sorted(self.rows)

    def right_of(self, cell: Cell) -> list[Cell]:
        """Cells of the same row (the first that it covers) to the right, nearest first."""
        return [
            c
            for c in self.rows.get(cell.row, ())
            if c.left >= cell.right - (0 if self.exact else 1.0) and c is not cell
        ]

    def below(self, cell: Cell, rows: int = 60) -> list[Cell]:
        """The nearest cell of each following row that lies under this one, from the top."""
        found: list[Cell] = []
        start = bisect_left(self.order, max(cell.bottom, cell.row) + 1)
        for row in self.order[start : start + rows]:
            under = [c for c in self.rows[row] if c.over(cell) > 0 and c.row == row]
            if under:
                found.append(max(under, key=lambda c: c.over(cell)))
        return found

    def row_after(self, row: int) -> int | None:
        place = bisect_left(self.order, row + 1)
        return self.order[place] if place < len(self.order) else None
