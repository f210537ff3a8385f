"""The rows of a list as they were read, for whoever shows results beside them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.headers import Heading, Place, read_heading
from lowpoint.survey.result_columns import is_result

__all__ = ["ListRows", "listed_rows"]

ABOVE = (("elevation", "m", 1.0), ("atmosphere", "bar", 1e5))
"""What may hold for all rows, with the unit it is written in."""


@dataclass(frozen=True, eq=False)
class ListRows:
    """The rows of one sheet of a list as they were read, for whoever shows results beside them."""

    sheet: str
    headings: tuple[str, ...]
    """By column from A on, with the unit that stood in a row below them; empty where a column has none."""
    fields: tuple[str, ...]
    """Field of each column; empty for one that was not used."""
    rows: Sequence[Sequence[Any]]
    """Values, one row a case, in the order of the cases; may be shorter than the headings."""
    above: tuple[tuple[str, float], ...] = ()
    """What holds for all rows: a heading with its unit, and its number."""


def listed_rows(
    sheet: str, place: Place, data: Sequence[tuple[int, list[Any]]], letters: Mapping[str, int],
    site: Mapping[str, float],
) -> tuple[ListRows, list[str]]:  # fmt: skip
    """The rows of a sheet without the results of an earlier survey, and a note where there were any.

    ``data`` holds (row number, values), ``letters`` the column of each field that was read, ``site`` what holds for
    all rows, SI.
    """
    width = max([*place.headings, *(len(cells) - 1 for _, cells in data)], default=-1) + 1
    heads = [place.headings.get(column) for column in range(width)]
    keep = [column for column, head in enumerate(heads) if head is None or not is_result(head.text)]
    results = width - len(keep)
    while keep and heads[keep[-1]] is None and _blank(data, keep[-1]):
        keep.pop()
    rows: list[list[Any]] = [cells for _, cells in data]
    if results:
        rows = [[cells[column] if column < len(cells) else None for column in keep] for cells in rows]
    own = {column: key for key, column in letters.items()}
    above = tuple((f"{BY_KEY[key].heading} [{unit}]", site[key] / factor) for key, unit, factor in ABOVE if key in site)
    note = f"{results} columns of {sheet} hold results of an earlier survey and were left alone"
    table = ListRows(sheet, tuple(_heading(heads[column]) for column in keep),
                     tuple(own.get(column, "") for column in keep), rows, above)  # fmt: skip
    return table, [note] if results else []


def _blank(data: Sequence[tuple[int, list[Any]]], column: int) -> bool:
    return all(column >= len(cells) or cells[column] in (None, "") for _, cells in data)


def _heading(heading: Heading | None) -> str:
    """The text of a heading, with its unit where that stood apart from it."""
    if heading is None:
        return ""
    apart = heading.field is not None and heading.unit and read_heading(heading.text, (heading.field,)).unit is None
    return f"{heading.text} [{heading.unit}]" if apart else heading.text
