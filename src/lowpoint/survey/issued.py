"""The verdicts that stand in a survey's workbook: the result columns of its sheet of results, row by row."""

from __future__ import annotations

import re
from typing import Any

from lowpoint.errors import BookError
from lowpoint.survey.grids import Grid, Sheets
from lowpoint.survey.headers import LOOKED_AT, text_of
from lowpoint.survey.result_columns import result_of

__all__ = ["RESULTS", "is_survey", "issued_columns", "issued_verdict", "version_of"]

RESULTS = "Results"
"""The sheet of a survey's workbook that holds the list with the results beside it."""
NEEDED = ("verdict", "fails", "margin")
_VERDICT = re.compile(r"(\w+)(?: \((\w+)\))?")
_VERSION = re.compile(r"lowpoint (\d[\w.+-]*)", re.IGNORECASE)


def is_survey(sheets: Sheets) -> bool:
    """Is a file the workbook of a survey: a sheet of results with its columns?"""
    return any(grid.sheet == RESULTS and _heading_row(grid) is not None for grid in sheets.grids)


def _heading_row(grid: Grid) -> tuple[int, dict[str, int]] | None:
    """Place of the row of headings, and the columns of results by key."""
    for place, (_, values) in enumerate(grid.rows[:LOOKED_AT]):
        columns: dict[str, int] = {}
        for column, value in enumerate(values):
            found = result_of(text_of(value)) if isinstance(value, str) else None
            if found is not None:
                columns.setdefault(found.key, column)
        if columns.keys() >= {*NEEDED}:
            return place, columns
    return None


def issued_columns(grid: Grid, name: str) -> dict[str, dict[int, Any]]:
    """The results by key and row of the sheet; BookError where the sheet has no columns of results."""
    found = _heading_row(grid)
    if found is None:
        raise BookError(name, f"its sheet {RESULTS} must have the columns Verdict, Fails and Margin",
                        remedy="Write the survey anew with 'lowpoint survey LIST -o OUT'.")  # fmt: skip
    place, columns = found
    below = grid.rows[place + 1 :]
    return {key: {row: cells[column] for row, cells in below if column < len(cells)}
            for key, column in columns.items() if key in (*NEEDED, "errors")}  # fmt: skip


def issued_verdict(text: Any) -> tuple[str | None, str | None]:
    """Regime and basis out of ``clear (tested)``; the words are checked by whoever takes them."""
    found = _VERDICT.fullmatch(text.strip()) if isinstance(text, str) else None
    return (found[1], found[2]) if found else (None, None)


def version_of(sheets: Sheets) -> str:
    """The version that wrote the workbook, as one of its sheets tells it; empty where none does."""
    for grid in sheets.grids:
        for _, cells in grid.rows if grid.sheet != RESULTS else ():
            for place, cell in enumerate(cells):
                told = _told_version(cell, cells[place + 1 :]) if isinstance(cell, str) else ""
                if told:
                    return told
    return ""


def _told_version(cell: str, following: list[Any]) -> str:
    found = _VERSION.search(cell)
    if found:
        return found[1]
    value = next((c for c in following if c not in (None, "")), None)
    return str(value) if cell.strip().casefold() == "version" and value is not None else ""
