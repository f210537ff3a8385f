"""Vendors' tables by opening: a sheet with the columns Table, Travel, and any of coefficient, FL, xFz and limits."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from lowpoint.problems import shown
from lowpoint.survey.grids import Grid, cell_name
from lowpoint.survey.headers import Place
from lowpoint.survey.model import Problem, TravelTable
from lowpoint.survey.sheet import SheetColumns, read_sheet

__all__ = ["read_tables"]

SMALLEST = 0.01
"""A table that ends at no more than this share of the travel is none."""
COLUMNS = ("coefficient", "fl", "xfz", "incipient", "constant", "damage", "vibration")


def read_tables(
    sheets: Sequence[tuple[Grid, Place]], problems: list[Problem], notes: list[str]
) -> dict[str, TravelTable]:
    """Every table by its name; one that cannot be used is told and left out; notes are added."""
    found: dict[str, TravelTable] = {}
    for grid, place in sheets:
        part = read_sheet(grid, place, None, problems)
        notes += part.notes
        if "table" not in part.words or "travel" not in part.numbers:
            continue
        names = part.words["table"]
        spoiled = {i for i, _ in part.spoiled}
        for name in dict.fromkeys(n for n in names if n is not None):
            rows = [i for i, other in enumerate(names) if other == name]
            table = _table(name, part, rows)
            fault = "some of its cells cannot be used" if spoiled & set(rows) else _fault(table)
            if name in found:
                fault = "another sheet has a table of that name"
            if fault:
                cell = cell_name(part.rows[rows[0]], part.letters["table"])
                problems.append(Problem(grid.sheet, cell, shown(name), f"the table cannot be used: {fault}",
                                        "Give its rows by increasing travel, each filled."))  # fmt: skip
            else:
                found[name] = table
    return found


def _table(name: str, part: SheetColumns, rows: Sequence[int]) -> TravelTable:
    at = np.array(rows)
    columns: dict[str, Any] = {}
    for key in COLUMNS:
        values = part.numbers.get(key)
        if values is not None and not np.isnan(values[at]).all():
            columns[key] = values[at]
    return TravelTable(name, part.numbers["travel"][at], **columns)


def _fault(table: TravelTable) -> str:
    if len(table.travel) < 2:
        return "it needs two rows or more"
    if np.isnan(table.travel).any() or not (np.diff(table.travel) > 0.0).all():
        return "its travel must increase from row to row"
    for key in COLUMNS:
        values = getattr(table, key)
        if values is not None and np.isnan(values).any():
            return f"{key} is blank in some of its rows"
    if table.travel[-1] <= SMALLEST:
        return "its travel ends at 1 % or less, as shares do that are written under a heading in per cent"
    if table.coefficient is not None and not (np.diff(table.coefficient) > 0.0).all():
        return "its coefficient must increase with travel"
    return ""
