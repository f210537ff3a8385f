"""Helper functions that make, join and sort arrays."""

from __future__ import annotations

import functools
import itertools
from typing import Any

from lowpoint.problems import CellError

from .helping import WRONG, Grid, cells_of, collated, flipped, fold, grid_of, helper, number_of

_MOST_ROWS = 1_048_576  # the rows of a worksheet
_MOST_CELLS = 10_000_000


def _matrix(value: Any) -> Any:
    grid = grid_of(value)
    for cell in cells_of(grid):
        if isinstance(cell, WRONG):
            return cell
        if not isinstance(cell, float):
            return CellError.VALUE
    return grid


@helper
def _mmult(left: Any, right: Any) -> Any:
    first, second = _matrix(left), _matrix(right)
    if not isinstance(first, list) or not isinstance(second, list):
        return second if isinstance(first, list) else first
    if len(first[0]) != len(second):
        return CellError.VALUE
    columns = flipped(second)
    return [[sum(a * b for a, b in zip(row, column, strict=True)) for column in columns] for row in first]


def _solved(value: Any) -> Any:
    """Determinant and inverse by Gauss-Jordan elimination with pivots."""
    grid = _matrix(value)
    if not isinstance(grid, list):
        return grid
    size, determinant = len(grid), 1.0
    if any(len(row) != size for row in grid):
        return CellError.VALUE
    work = [[*row, *(float(i == j) for j in range(size))] for i, row in enumerate(grid)]
    for k in range(size):
        pivot = max(range(k, size), key=lambda i: abs(work[i][k]))
        if work[pivot][k] == 0.0:
            return 0.0, []
        if pivot != k:
            work[k], work[pivot], determinant = work[pivot], work[k], -determinant
        determinant *= work[k][k]
        work[k] = [cell / work[k][k] for cell in work[k]]
        for i in range(size):
            if i != k:
                work[i] = [a - work[i][k] * b for a, b in zip(work[i], work[k], strict=True)]
    return determinant, [row[size:] for row in work]


@helper
def _mdeterm(value: Any) -> Any:
    solved = _solved(value)
    return solved[0] if isinstance(solved, tuple) else solved


@helper
def _minverse(value: Any) -> Any:
    solved = _solved(value)
    return (solved[1] or CellError.NUM) if isinstance(solved, tuple) else solved


def _wrong_count(*values: Any) -> Any:
    """The error that a number of rows or columns is; beyond a worksheet's rows is #NUM!, None where all are right."""
    for value in values:
        if isinstance(value, WRONG):
            return value
        number = None if isinstance(value, list) else number_of(value)
        if number is None or abs(number) > _MOST_ROWS:
            return CellError.VALUE if number is None else CellError.NUM
    return None


def _count(value: Any) -> int:
    return int(number_of(value) or 0.0)


@helper
def _pad(array: Any, *others: Any) -> Any:
    """An array filled up with #N/A to the size of the largest; one row or one column is left for repeating."""
    grid = grid_of(array)
    grids = [grid, *map(grid_of, others)]
    rows = max(map(len, grids)) if len(grid) > 1 else 1
    columns = max(len(each[0]) for each in grids) if len(grid[0]) > 1 else 1
    filled = [[*line, *[CellError.NA] * (columns - len(line))] for line in grid]
    return filled + [[CellError.NA] * columns for _ in range(rows - len(grid))]


@helper
def _expand(array: Any, rows: Any, columns: Any, pad: Any = CellError.NA) -> Any:
    grid = grid_of(array)
    wrong = _wrong_count(rows, columns)
    if wrong is not None or isinstance(pad, list):
        return wrong or CellError.VALUE
    high, wide = _count(rows) or len(grid), _count(columns) or len(grid[0])
    if high < len(grid) or wide < len(grid[0]) or high * wide > _MOST_CELLS:
        return CellError.NUM if high * wide > _MOST_CELLS else CellError.VALUE
    lines = [line + [pad] * (wide - len(line)) for line in grid]
    return lines + [[pad] * wide for _ in range(high - len(grid))]


@helper
def _wraprows(vector: Any, count: Any, pad: Any = CellError.NA) -> Any:
    wrong, cells = _wrong_count(count), list(cells_of(vector))
    if wrong is not None or isinstance(pad, list):
        return wrong or CellError.VALUE
    size = _count(count)
    if size < 1 or min(len(grid_of(vector)), len(grid_of(vector)[0])) > 1:
        return CellError.NUM if size < 1 else CellError.VALUE
    if size < len(cells):  # a single line is not filled up
        cells += [pad] * (-len(cells) % size)
    return [cells[i : i + size] for i in range(0, len(cells), size)]


@helper
def _wrapcols(vector: Any, count: Any, pad: Any = CellError.NA) -> Any:
    lines = _wraprows(vector, count, pad)
    return flipped(lines) if isinstance(lines, list) else lines


@helper
def _vstack(*arrays: Any) -> Any:
    grids = [grid_of(array) for array in arrays]
    wide = max(len(grid[0]) for grid in grids)
    return [line + [CellError.NA] * (wide - len(line)) for grid in grids for line in grid]


@helper
def _hstack(*arrays: Any) -> Any:
    return flipped(_vstack(*[flipped(grid_of(array)) for array in arrays]))


@helper
def _unique(array: Any, by_column: Any = False, once: Any = False) -> Any:
    lines = flipped(grid_of(array)) if by_column else grid_of(array)
    seen: dict[tuple[Any, ...], list[list[Any]]] = {}
    for line in lines:
        seen.setdefault(tuple(map(fold, line)), []).append(line)
    kept = [group[0] for group in seen.values() if not once or len(group) == 1]
    if not kept:
        return CellError.CALC
    return flipped(kept) if by_column else kept


@helper
def _filter(array: Any, include: Any, empty: Any = CellError.CALC) -> Any:
    """Rows or columns of an array, as the shape of ``include`` says."""
    grid, wanted = grid_of(array), grid_of(include)
    flags = list(cells_of(wanted))
    wrong = next((flag for flag in flags if isinstance(flag, WRONG)), None)
    if wrong is not None or any(isinstance(flag, str) for flag in flags):
        return wrong or CellError.VALUE
    if len(wanted[0]) == 1 and len(wanted) == len(grid):
        kept = [line for line, flag in zip(grid, flags, strict=True) if flag]
        return kept or empty
    if len(wanted) == 1 and len(wanted[0]) == len(grid[0]):
        kept = [list(itertools.compress(line, flags)) for line in grid]
        return kept if kept[0] else empty
    return CellError.VALUE


def _ordered(lines: Grid, keys: list[tuple[list[Any], bool]]) -> Grid:
    """Lines sorted by several keys, each upwards or downwards; blanks last either way, equal ones as they stood."""
    order = list(range(len(lines)))
    for cells, down in reversed(keys):
        ranks = [collated(cell) for cell in cells]
        order.sort(key=functools.cmp_to_key(lambda i, j, r=ranks, d=down: _against(r[i], r[j], d)))  # type: ignore[misc]
    return [lines[i] for i in order]


def _against(first: tuple[int, Any], second: tuple[int, Any], down: bool) -> int:
    blank = 4
    if first == second:
        return 0
    if blank in (first[0], second[0]):
        return 1 if first[0] == blank else -1
    return 1 if (first > second) is not down else -1


@helper
def _sort(array: Any, places: Any = 1.0, orders: Any = 1.0, by_column: Any = False) -> Any:
    grid = flipped(grid_of(array)) if by_column else grid_of(array)
    which, signs = list(cells_of(places)), list(cells_of(orders))
    signs *= len(which) if len(signs) == 1 else 1
    wrong = next((cell for cell in [*which, *signs] if isinstance(cell, WRONG)), None)
    fits = len(which) == len(signs) and all(isinstance(p, float) and 1 <= p < len(grid[0]) + 1 for p in which)
    if wrong is not None or not fits or any(sign not in (1.0, -1.0) for sign in signs):
        return wrong or CellError.VALUE
    keys = [([line[int(p) - 1] for line in grid], sign < 0) for p, sign in zip(which, signs, strict=True)]
    done = _ordered(grid, keys)
    return flipped(done) if by_column else done


@helper
def _sortby(array: Any, *pairs: Any) -> Any:
    """The array sorted by other ranges, each followed by 1 or -1."""
    grid = grid_of(array)
    across = (len(grid_of(pairs[0])) == 1 and len(grid) > 1) or len(grid) == 1
    lines = flipped(grid) if across else grid
    keys = []
    for cells, sign in itertools.zip_longest(pairs[::2], pairs[1::2], fillvalue=1.0):
        column = list(cells_of(cells))
        if isinstance(sign, WRONG):
            return sign
        if len(column) != len(lines) or sign not in (1.0, -1.0):
            return CellError.VALUE
        keys.append((column, sign < 0))
    done = _ordered(lines, keys)
    return flipped(done) if across else done
