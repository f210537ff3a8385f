"""Helper functions that look something up."""

from __future__ import annotations

from typing import Any

from lowpoint.problems import CellError

from .helping import WRONG, cells_of, collated, fold, grid_of, helper


@helper
def _xlookup(wanted: Any, keys: Any, results: Any, missing: Any, mode: Any, search: Any = 1.0) -> Any:
    """XLOOKUP with the next smaller (-1) or next larger (1) key; the keys need no order."""
    if isinstance(wanted, WRONG):
        return wanted
    cells = list(cells_of(keys))
    order = range(len(cells)) if search > 0 else range(len(cells) - 1, -1, -1)
    place = next((i for i in order if fold(cells[i]) == fold(wanted)), None)
    if place is None and mode:
        beyond = [i for i in order if _beyond(cells[i], wanted, mode)]
        nearest = min if mode > 0 else max
        place = nearest(beyond, key=lambda i: collated(cells[i]), default=None)
    if place is None:
        return missing
    grid = grid_of(results)
    line = grid[place : place + 1] if len(grid_of(keys)) > 1 or len(grid) == len(cells) else [[r[place]] for r in grid]
    return line[0][0] if len(line) == 1 and len(line[0]) == 1 else line


def _beyond(cell: Any, wanted: Any, mode: float) -> bool:
    """Whether a key of the same type lies on the asked-for side of the wanted value."""
    if type(cell) is not type(wanted) or isinstance(cell, WRONG):
        return False
    return collated(cell) > collated(wanted) if mode > 0 else collated(cell) < collated(wanted)


def _halved(wanted: Any, cells: list[Any]) -> int | None:
    """The place that halving finds for the last key not above ``wanted``; keys of other types are passed over.

    This is what a spreadsheet program does with keys out of order too, which is why LOOKUP of a number larger than
    all others finds the last number. From memory; LibreOffice 7.4 agrees.
    """
    low, high, found = 0, len(cells) - 1, None
    while low <= high:
        middle = (low + high) // 2
        place = next((k for k in range(middle, high + 1) if type(cells[k]) is type(wanted)), None)
        if place is None:
            high = middle - 1
        elif collated(cells[place]) <= collated(wanted):
            found, low = place, place + 1
        else:
            high = middle - 1
    return found


def _nearest(wanted: Any, cells: list[Any]) -> Any:
    """The place of an approximate match, counted from 1, or the error."""
    if isinstance(wanted, WRONG):
        return wanted
    place = _halved(0.0 if wanted is None else wanted, cells)
    return CellError.NA if place is None else float(place + 1)


@helper
def _match(wanted: Any, keys: Any) -> Any:
    return _nearest(wanted, list(cells_of(keys)))


@helper
def _lookup(wanted: Any, keys: Any, results: Any = None) -> Any:
    """LOOKUP: in a vector, or in the first row or column of a table (the longer side) with the answer in the last."""
    grid = grid_of(keys)
    across = len(grid[0]) > len(grid)
    if results is None and min(len(grid), len(grid[0])) > 1:
        keys = grid[0] if across else [line[0] for line in grid]
        results = [grid[-1] if across else [line[-1] for line in grid]]
    place = _nearest(wanted, list(cells_of(keys if isinstance(keys, list) and isinstance(keys[0], list) else [keys])))
    if not isinstance(place, float):
        return place
    found = list(cells_of(keys if results is None else results))
    return found[int(place) - 1] if place <= len(found) else CellError.NA


@helper
def _vlookup(wanted: Any, table: Any, column: Any) -> Any:
    grid = grid_of(table)
    place = _nearest(wanted, [line[0] for line in grid])
    return grid[int(place) - 1][int(column) - 1] if isinstance(place, float) else place


@helper
def _hlookup(wanted: Any, table: Any, row: Any) -> Any:
    grid = grid_of(table)
    place = _nearest(wanted, grid[0])
    return grid[int(row) - 1][int(place) - 1] if isinstance(place, float) else place
