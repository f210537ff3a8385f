"""The columns of a list as they were understood, for whoever is told of them before anything runs."""

from __future__ import annotations

from lowpoint.survey.grids import Grid, cell_name
from lowpoint.survey.headers import Place, is_carried
from lowpoint.survey.model import ReadColumn
from lowpoint.survey.result_columns import is_result

__all__ = ["listed"]


def listed(grid: Grid, place: Place) -> list[ReadColumn]:
    """The columns of a sheet as the reading reports them."""
    seen: dict[str, int] = {}
    for heading in place.headings.values():
        if heading.field is not None:
            seen[heading.field.key] = seen.get(heading.field.key, 0) + 1
    found = []
    for column, heading in place.headings.items():
        key = heading.field.key if heading.field else ""
        if not key:
            known = "result" if is_result(heading.text) else "carried"
            status = known if heading.left or is_carried(heading.text) or known == "result" else "unknown"
        elif seen[key] > 1:
            status = "twice"
        elif heading.problem:
            status = "no unit" if not heading.unit else "wrong unit"
        else:
            status = "used"
        found.append(
            ReadColumn(grid.sheet, cell_name(place.row, column), heading.text, key, heading.unit or "", status)
        )
    return found
