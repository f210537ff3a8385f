"""The sheet List of a book with LP_ formulas, read as a list: its computed pressures and properties are the inputs.

What its formulas made of them is left alone, and so are the readings that they made absolute: the survey works out the
results itself. Values are needed; a formula without one is told like any other.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Any

import numpy as np

from lowpoint.survey.fields import METHODS
from lowpoint.survey.grids import Grid
from lowpoint.survey.model import Problem

__all__ = ["LEFT_ALONE", "REMARK", "first_line", "is_own", "is_remark", "note_for", "put_method"]

LEFT_ALONE = frozenset({
    "Verdict (basis)", "Margin to the limit to keep", "Area", "Inlet pressure, as read", "Outlet pressure, as read",
    "Pressure unit", "Vapour pressure, if given", "Critical pressure, if given", "Density, if given",
    "Required coefficient", "Opening", "Velocity in valve size", "Typical FL", "Drop p1-p2", "Choked drop",
    "Index sigma", "Choked", "Incipient, scaled", "Constant, scaled", "Damage, scaled", "Incipient, installed",
    "Constant, installed", "Damage, installed", "State of the flow", "Limit to keep, value", "Kept?",
    "Largest drop that keeps it", "Vapour after the valve", "Why (LP_WHY)", "Remark", "Cells with errors",
    "Order (working)", "No answer (working)",
})  # fmt: skip
"""Headings of that sheet, without units, that are no inputs of a survey."""
MARKS = frozenset({"Index sigma", "Incipient, installed", "State of the flow"})
"""Headings by which the sheets of such a book are known."""
METHOD_LINE = "method that carries limits"
_TABLE = re.compile(r"table\s+(\S.*)", re.IGNORECASE)
REMARK = (
    "the row reads its valve's table '{}' by formulas: FL and limit at the opening were taken from its cells, and the "
    "opening was not worked out"
)


def first_line(text: str) -> str:
    """A heading of such a sheet without its unit, which stands in a line of its own."""
    return text.partition("\n")[0].strip()


def is_own(headings: Sequence[str]) -> bool:
    """Do these headings stand in a book with LP_ formulas?"""
    return {first_line(text) for text in headings} >= MARKS


def is_remark(cell: Any) -> str:
    """The name of the table that the characteristic of a row names; empty where it names none."""
    found = _TABLE.fullmatch(cell.strip()) if isinstance(cell, str) else None
    return found[1] if found else ""


def note_for(sheet: str) -> str:
    """What to tell of such a sheet."""
    return (f"{sheet} is a sheet with LP_ formulas: its absolute pressures, its properties and what is typed there "
            "were taken, its own results were left alone")  # fmt: skip


def put_method(words: dict[str, Any], count: int, grids: Sequence[Grid], sheet: str) -> Problem | None:
    """The scale method of such a book, which stands on a sheet of its own, into the words of its list."""
    for grid in grids:
        for _, cells in grid.rows:
            if cells and isinstance(cells[0], str) and cells[0].casefold().startswith(METHOD_LINE):
                value = next((cell for cell in cells[1:] if cell not in (None, "")), None)
                word = value.strip().casefold() if isinstance(value, str) else None
                if word in METHODS:
                    words["method"] = np.full(count, word, object)
                    return None
    return Problem(sheet, "", "", "the method that carries the limits to another size and pressure is not named in the "
                   "book; isa was taken", "Keep its line on sheet Site, or add a column 'Scale method'.",
                   spoils=False)  # fmt: skip
