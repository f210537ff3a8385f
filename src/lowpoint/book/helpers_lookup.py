"""Helper functions that look something up."""

from __future__ import annotations

from typing import Any

from lowpoint.problems import CellError

from .helping import WRONG, Grid, cells_of, collated, flipped, fold, grid_of, helper, number_of


@helper
def _xlookup(wanted: Any, keys: Any, results: Any, missing: Any, mode: Any, search: Any = 1.0) -> Any:
    """XLOOKUP with the next smaller (-1) or next larger (1) key; the keys need no order."""
    wrong = next((given for given in (wanted, mode, search) if isinstance(given, WRONG)), None)
    if wrong is not None:
        return wrong
    if mode not in (-1.0, 0.0, 1.0) or search not in (-2.0, -1.0, 1.0, 2.0) or isinstance(wanted, list):
        return CellError.VALUE
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
    if len(cells) not in (len(grid), len(grid[0])):
        return CellError.VALUE
    down = len(grid_of(keys)) > 1 or len(grid) == len(cells)
    if down and place >= len(grid):
        return CellError.VALUE
    line = [grid[place]] if down else [[row[place]] for row in grid]
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
    if isinstance(wanted, (list, *WRONG)):
        return CellError.VALUE if isinstance(wanted, list) else wanted
    place = _halved(0.0 if wanted is None else wanted, cells)
    return CellError.NA if place is None else float(place + 1)


@helper
def _match(wanted: Any, keys: Any) -> Any:
    return _nearest(wanted, list(cells_of(keys)))


@helper
def _lookup(wanted: Any, keys: Any, results: Any = None) -> Any:
    """LOOKUP: in a vector, or in the first row or column of a table (the longer side) with the answer in the last."""
    grid = grid_of(keys)
    if results is None and min(len(grid), len(grid[0])) > 1:
        lines = flipped(grid) if len(grid[0]) > len(grid) else grid
        searched, found = [line[0] for line in lines], [line[-1] for line in lines]
    else:
        searched = list(cells_of(keys))
        found = searched if results is None else list(cells_of(results))
    place = _nearest(wanted, searched)
    if not isinstance(place, float):
        return place
    return found[int(place) - 1] if place <= len(found) else CellError.NA


@helper
def _vlookup(wanted: Any, table: Any, column: Any) -> Any:
    return _beside(wanted, flipped(grid_of(table)), column)


@helper
def _hlookup(wanted: Any, table: Any, row: Any) -> Any:
    return _beside(wanted, grid_of(table), row)


def _beside(wanted: Any, lines: Grid, which: Any) -> Any:
    """What stands in the asked-for line where the first line has the nearest key."""
    number = None if isinstance(which, (list, *WRONG)) else number_of(which)
    place = _nearest(wanted, lines[0])
    if number is None or not isinstance(place, float):
        return which if isinstance(which, WRONG) else CellError.VALUE if number is None else place
    if not 1 <= number < len(lines) + 1:
        return CellError.VALUE if number < 1 else CellError.REF
    return lines[int(number) - 1][int(place) - 1]
