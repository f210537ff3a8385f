"""What holds for a whole site or item: the lines above the table of a list, and blanks filled from the item's rows."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from lowpoint.physics.unitnames import meaning
from lowpoint.survey import values
from lowpoint.survey.grids import Grid
from lowpoint.survey.headers import Place, read_heading, text_of
from lowpoint.survey.model import Numbers

__all__ = ["SITE", "above_table", "of_its_item"]

SITE = ("elevation", "atmosphere")


def of_its_item(x: Numbers, tags: Any) -> Numbers:
    """Blanks filled from the first row of the same tag that has a value."""
    known: dict[Any, float] = {}
    for tag, value in zip(tags, x.tolist(), strict=True):
        if tag is not None and value == value:
            known.setdefault(tag, value)
    return np.array(
        [known.get(tag, value) if value != value else value for tag, value in zip(tags, x.tolist(), strict=True)]
    )


def above_table(grid: Grid, place: Place) -> Iterator[tuple[str, float]]:
    """Elevation or atmosphere written above the table: a heading, and its number in the next filled cell."""
    for number, cells in grid.rows:
        if number >= place.row:
            return
        for column, cell in enumerate(cells):
            heading = read_heading(text_of(cell), place.catalogue) if isinstance(cell, str) and cell else None
            if heading is None or heading.field is None or heading.field.key not in SITE or not heading.unit:
                continue
            following = next((c for c in cells[column + 1 :] if c not in (None, "")), None)
            typed = values.numbers(heading.field, [following], grid.decimal, grid.all_text)
            if typed.faults or np.isnan(typed.values[0]):
                continue
            yield heading.field.key, float(values.to_si(typed.values, meaning(heading.unit))[0])
