"""What holds for a whole site or item: the lines above the table of a list, and blanks filled from the item's rows."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeAlias

import numpy as np

from lowpoint.physics.unitnames import meaning
from lowpoint.problems import shown
from lowpoint.survey import values
from lowpoint.survey.grids import Grid, cell_name
from lowpoint.survey.headers import Heading, Place, read_heading, text_of, with_unit
from lowpoint.survey.model import Numbers

__all__ = ["SITE", "above_table", "of_its_item"]

SITE = ("elevation", "atmosphere")
Tell: TypeAlias = Callable[[str, str, str, str], None]
"""Told (cell, value, what is wrong, remedy)."""


def of_its_item(x: Numbers, tags: Any) -> Numbers:
    """Blanks filled from the first row of the same tag that has a value."""
    known: dict[Any, float] = {}
    for tag, value in zip(tags, x.tolist(), strict=True):
        if tag is not None and value == value:
            known.setdefault(tag, value)
    return np.array(
        [known.get(tag, value) if value != value else value for tag, value in zip(tags, x.tolist(), strict=True)]
    )


def above_table(grid: Grid, place: Place, tell: Tell) -> dict[str, float]:
    """Elevation and atmosphere written above the table, SI: a heading, and its number in the next filled cell.

    Whatever cannot be used is told, a second value of the same thing too.
    """
    found: dict[str, float] = {}
    for number, cells in grid.rows:
        if number >= place.row:
            break
        for column, cell in enumerate(cells):
            heading = read_heading(text_of(cell), place.catalogue) if isinstance(cell, str) and cell else None
            if heading is None or heading.field is None or heading.field.key not in SITE:
                continue
            after = next((at for at in range(column + 1, len(cells)) if cells[at] not in (None, "")), None)
            if after is None or not _is_meant(cells[after]):
                continue
            names = cell_name(number, column), cell_name(number, after)
            value = _value(grid, with_unit(heading), cells[after], names, tell)
            key = heading.field.key
            if value is not None and found.setdefault(key, value) != value:
                tell(names[1], shown(cells[after]), f"{heading.field.heading} stands above the table twice; the first "
                     "was used", "Keep one of the two.")  # fmt: skip
    return found


def _is_meant(cell: Any) -> bool:
    """Whether the cell behind the heading is meant as its number; a title that stands there is not."""
    return not isinstance(cell, str) or any(sign.isdigit() for sign in cell)


def _value(grid: Grid, heading: Heading, cell: Any, names: tuple[str, str], tell: Tell) -> float | None:
    field = heading.field
    assert field is not None
    assert field.quantity is not None
    if heading.problem:
        tell(names[0], shown(heading.text), heading.problem, heading.remedy)
        return None
    typed = values.numbers(field, [cell], grid.decimal, grid.all_text)
    for fault in typed.faults:
        tell(names[1], shown(fault.value), fault.text, fault.remedy)
    si = values.to_si(typed.values, meaning(heading.unit or ""))
    bad, clause = values.out_of_bounds(field.quantity, si)
    if bad[0]:
        tell(names[1], shown(float(typed.values[0]), heading.unit or ""), f"{field.heading} {clause(0)}",
             field.quantity.remedy)  # fmt: skip
    return None if bad[0] or np.isnan(si[0]) else float(si[0])
