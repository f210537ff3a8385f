"""What all helper functions share: cells in, cells out, ranges as rows; how each is entered in the table of them."""

from __future__ import annotations

import functools
import itertools
import unicodedata
from collections.abc import Callable, Iterator, Sequence
from typing import Any

from lowpoint.problems import CellError

from .engine import Unrefreshable

__all__ = [
    "HELPERS", "PREFIX", "WRONG", "Grid", "broadcast", "cells_of", "collated", "each", "flipped", "fold", "grid_of",
    "helper", "number_of", "text_of",
]  # fmt: skip

PREFIX = "LOWPOINT."
Grid = list[list[Any]]
HELPERS: dict[str, Callable[..., Any]] = {}
WRONG = (CellError, Unrefreshable)  # an error goes through, and so does what the engine cannot vouch for


def grid_of(value: Any) -> Grid:
    """A range as it is, a single value as a range of one cell."""
    return value if isinstance(value, list) else [[value]]


def cells_of(value: Any) -> Iterator[Any]:
    """The cells of a range, row by row."""
    return itertools.chain.from_iterable(grid_of(value))


def flipped(grid: Grid) -> Grid:
    """Rows made columns."""
    return [list(line) for line in zip(*grid, strict=True)]


def helper(function: Callable[..., Any]) -> Callable[..., Any]:
    """Enter a function in the table under its own name, without underscores and in capitals."""
    HELPERS[function.__name__.strip("_").upper()] = function
    return function


def each(function: Callable[..., Any]) -> Callable[..., Any]:
    """A helper of single values: an error in comes out, ranges are gone through cell by cell."""

    @functools.wraps(function)
    def spread(*arguments: Any) -> Any:
        if not any(isinstance(argument, list) for argument in arguments):
            wrong = next((a for a in arguments if isinstance(a, WRONG)), None)
            return function(*arguments) if wrong is None else wrong
        return [[spread(*row) for row in line] for line in broadcast(arguments)]

    return helper(spread)


def broadcast(arguments: Sequence[Any]) -> list[list[tuple[Any, ...]]]:
    """Arguments matched cell by cell; one row or one column is repeated, what is missing is #N/A."""
    grids = [grid_of(argument) for argument in arguments]
    rows, columns = max(map(len, grids)), max(len(grid[0]) for grid in grids)
    return [[tuple(_at(grid, r, c) for grid in grids) for c in range(columns)] for r in range(rows)]


def _at(grid: Grid, row: int, column: int) -> Any:
    line = grid[0] if len(grid) == 1 else grid[row] if row < len(grid) else []
    return line[0] if len(line) == 1 else line[column] if column < len(line) else CellError.NA


def number_of(value: Any) -> float | None:
    """A number or the number that a text stands for; None for other text."""
    if isinstance(value, (int, float)):
        return float(value)
    if value is None:
        return 0.0
    try:
        return float(value)
    except ValueError:
        return None


def text_of(value: Any) -> str:
    """A cell as text, numbers with at most 15 digits."""
    if isinstance(value, bool):
        return str(value).upper()
    if value is None:
        return ""
    if not isinstance(value, float):
        return str(value)
    digits, _, power = f"{value:.14e}".partition("e")
    if abs(value) >= 1e15 or value == int(value):
        return str(int(float(f"{value:.15g}"))) if abs(value) < 1e21 else f"{digits.rstrip('0').rstrip('.')}E{power}"
    return f"{value:.{max(0, 14 - int(power))}f}".rstrip("0").rstrip(".")


def fold(cell: Any) -> Any:
    """What two cells must share to count as equal: text without case, a logical is no number."""
    return (type(cell), cell.casefold() if isinstance(cell, str) else cell)


def collated(cell: Any) -> tuple[int, Any]:
    """A key that sorts as spreadsheets do: numbers, text (accents after the plain letter), logicals, errors, blanks."""
    if cell is None:
        return 4, 0
    if isinstance(cell, WRONG):
        return 3, 0
    if isinstance(cell, bool):
        return 2, cell
    if isinstance(cell, str):
        folded = cell.casefold()
        plain = "".join(c for c in unicodedata.normalize("NFD", folded) if not unicodedata.combining(c))
        return 1, (plain, folded)
    return 0, cell
