"""Worksheet functions that the engine lacks or gets wrong, as call-backs: cells in, cells out, ranges as rows.

Meanings follow OASIS ODF 1.3 part 4 (OpenFormula) and, for the functions that it does not have, the function
reference of the program that brought them; where both are silent, common practice.
"""

from __future__ import annotations

import functools
import itertools
import math
import re
from collections.abc import Callable, Iterator, Sequence
from typing import Any

from lowpoint.problems import CellError

from .engine import Unrefreshable
from .unitwords import convert

__all__ = ["HELPERS", "PREFIX", "broadcast"]

PREFIX = "LOWPOINT."
Grid = list[list[Any]]
HELPERS: dict[str, Callable[..., Any]] = {}
_WRONG = (CellError, Unrefreshable)  # an error goes through, and so does what the engine cannot vouch for


def _grid(value: Any) -> Grid:
    return value if isinstance(value, list) else [[value]]


def _cells(value: Any) -> Iterator[Any]:
    return itertools.chain.from_iterable(_grid(value))


def _helper(function: Callable[..., Any]) -> Callable[..., Any]:
    HELPERS[function.__name__.strip("_").upper()] = function
    return function


def _each(function: Callable[..., Any]) -> Callable[..., Any]:
    """A helper of single values: an error in comes out, ranges are gone through cell by cell."""

    @functools.wraps(function)
    def spread(*arguments: Any) -> Any:
        if not any(isinstance(argument, list) for argument in arguments):
            return next((a for a in arguments if isinstance(a, _WRONG)), None) or function(*arguments)
        return [[spread(*row) for row in line] for line in broadcast(arguments)]

    return _helper(spread)


def broadcast(arguments: Sequence[Any]) -> list[list[tuple[Any, ...]]]:
    """Arguments matched cell by cell; one row or one column is repeated, what is missing is #N/A."""
    grids = [_grid(argument) for argument in arguments]
    rows, columns = max(map(len, grids)), max(len(grid[0]) for grid in grids)
    return [[tuple(_at(grid, r, c) for grid in grids) for c in range(columns)] for r in range(rows)]


def _at(grid: Grid, row: int, column: int) -> Any:
    line = grid[0] if len(grid) == 1 else grid[row] if row < len(grid) else []
    return line[0] if len(line) == 1 else line[column] if column < len(line) else CellError.NA


def _number(value: Any) -> float | None:
    """A number or the number that a text stands for; None for other text."""
    if isinstance(value, (int, float)):
        return float(value)
    if value is None:
        return 0.0
    try:
        return float(value)
    except ValueError:
        return None


def _text(value: Any) -> str:
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


@_each
def _text15(value: Any) -> Any:
    return _text(value)


@_each
def _upper(value: Any) -> Any:
    return _text(value).upper()


@_each
def _lower(value: Any) -> Any:
    return _text(value).lower()


@_each
def _proper(value: Any) -> Any:
    return re.sub(r"[^\W\d_]+", lambda word: word[0][0].upper() + word[0][1:].lower(), _text(value))


@_each
def _value(value: Any) -> Any:
    """Text with thousands commas, a currency sign or a percent sign as a number."""
    found = re.fullmatch(r"\s*([-+]?)\s*\$?(\d{1,3}(?:,\d{3})+|\d+)(\.\d*)?([Ee][-+]?\d+)?\s*(%?)\s*", _text(value))
    if found is None:
        return CellError.VALUE
    number = float(found[1] + found[2].replace(",", "") + (found[3] or "") + (found[4] or ""))
    return number / 100 if found[5] else number


@_each
def _scientific(value: Any, decimals: Any, sign: Any, width: Any) -> Any:
    """TEXT with a pattern such as 0.00E+00."""
    number = _number(value)
    if number is None:
        return value
    digits, _, power = f"{number:.{int(decimals)}e}".partition("e")
    mark = "-" if power[0] == "-" else "+" if sign == "+" else ""
    return f"{digits}E{mark}{abs(int(power)):0{int(width)}d}"


@_each
def _ceiling(value: Any, step: Any) -> Any:
    return _stepped(value, step, math.ceil)


@_each
def _floor(value: Any, step: Any) -> Any:
    return _stepped(value, step, math.floor)


def _stepped(value: Any, step: Any, towards: Callable[[float], int]) -> Any:
    number, size = _number(value), _number(step)
    if number is None or size is None:
        return CellError.VALUE
    if size == 0:
        return 0.0 if towards is math.ceil or number == 0 else CellError.DIV0
    if number > 0 > size:
        return CellError.NUM
    ratio = number / size
    near = round(ratio)
    return float((near if math.isclose(ratio, near, rel_tol=1e-14) else towards(ratio)) * size)


@_each
def _convert(value: Any, given: Any, wanted: Any) -> Any:
    number = _number(value)
    if number is None:
        return CellError.VALUE
    result = convert(number, _text(given), _text(wanted))
    return CellError.NA if result is None else result


@_helper
def _type(value: Any) -> Any:
    if isinstance(value, Unrefreshable):
        return value
    kinds = {bool: 4, str: 2, list: 64, CellError: 16}
    return float(kinds.get(type(value), 1))


@_helper
def _mode(*arguments: Any) -> Any:
    """The commonest number; of several the one met first."""
    numbers: dict[float, int] = {}
    for cell in itertools.chain.from_iterable(map(_cells, arguments)):
        if isinstance(cell, _WRONG):
            return cell
        if isinstance(cell, float):
            numbers[cell] = numbers.get(cell, 0) + 1
    most = max(numbers.values(), default=1)
    return CellError.NA if most < 2 else next(number for number, times in numbers.items() if times == most)


@_helper
def _concat(*arguments: Any) -> Any:
    return _textjoin("", False, *arguments)


@_helper
def _textjoin(between: Any, skip_blank: Any, *arguments: Any) -> Any:
    cells = list(itertools.chain.from_iterable(map(_cells, arguments)))
    wrong = next((cell for cell in [between, *cells] if isinstance(cell, _WRONG)), None)
    if wrong is not None:
        return wrong
    parts = [part for part in map(_text, cells) if part or not skip_blank]
    marks = [_text(mark) for mark in _cells(between)]
    joined = "".join(part + marks[i % len(marks)] for i, part in enumerate(parts[:-1])) + "".join(parts[-1:])
    return joined if len(joined) <= 32767 else CellError.VALUE


def _matrix(value: Any) -> Any:
    grid = _grid(value)
    for cell in _cells(grid):
        if isinstance(cell, _WRONG):
            return cell
        if not isinstance(cell, float):
            return CellError.VALUE
    return grid


@_helper
def _mmult(left: Any, right: Any) -> Any:
    first, second = _matrix(left), _matrix(right)
    if not isinstance(first, list) or not isinstance(second, list):
        return second if isinstance(first, list) else first
    if len(first[0]) != len(second):
        return CellError.VALUE
    return [
        [sum(a * b for a, b in zip(row, column, strict=True)) for column in zip(*second, strict=True)] for row in first
    ]


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


@_helper
def _mdeterm(value: Any) -> Any:
    solved = _solved(value)
    return solved[0] if isinstance(solved, tuple) else solved


@_helper
def _minverse(value: Any) -> Any:
    solved = _solved(value)
    return (solved[1] or CellError.NUM) if isinstance(solved, tuple) else solved


@_helper
def _expand(array: Any, rows: Any, columns: Any, pad: Any = CellError.NA) -> Any:
    grid = _grid(array)
    high, wide = int(rows or len(grid)), int(columns or len(grid[0]))
    if high < len(grid) or wide < len(grid[0]):
        return CellError.VALUE
    lines = [line + [pad] * (wide - len(line)) for line in grid]
    return lines + [[pad] * wide for _ in range(high - len(grid))]


@_helper
def _wraprows(vector: Any, count: Any, pad: Any = CellError.NA) -> Any:
    cells, size = list(_cells(vector)), int(count)
    if size < 1 or min(len(_grid(vector)), len(_grid(vector)[0])) > 1:
        return CellError.NUM if size < 1 else CellError.VALUE
    cells += [pad] * (-len(cells) % size)
    return [cells[i : i + size] for i in range(0, len(cells), size)]


@_helper
def _wrapcols(vector: Any, count: Any, pad: Any = CellError.NA) -> Any:
    lines = _wraprows(vector, count, pad)
    return lines if isinstance(lines, CellError) else [list(line) for line in zip(*lines, strict=True)]


@_helper
def _vstack(*arrays: Any) -> Any:
    grids = [_grid(array) for array in arrays]
    wide = max(len(grid[0]) for grid in grids)
    return [line + [CellError.NA] * (wide - len(line)) for grid in grids for line in grid]


@_helper
def _hstack(*arrays: Any) -> Any:
    flipped = _vstack(*[[list(line) for line in zip(*_grid(array), strict=True)] for array in arrays])
    return [list(line) for line in zip(*flipped, strict=True)]


def _fold(cell: Any) -> Any:
    """What two cells must share to count as equal: text without case, a logical is no number."""
    return (type(cell), cell.casefold() if isinstance(cell, str) else cell)


@_helper
def _unique(array: Any, by_column: Any = False, once: Any = False) -> Any:
    lines = [list(line) for line in zip(*_grid(array), strict=True)] if by_column else _grid(array)
    seen: dict[tuple[Any, ...], list[list[Any]]] = {}
    for line in lines:
        seen.setdefault(tuple(map(_fold, line)), []).append(line)
    kept = [group[0] for group in seen.values() if not once or len(group) == 1]
    if not kept:
        return CellError.CALC
    return [list(line) for line in zip(*kept, strict=True)] if by_column else kept


@_helper
def _xlookup(wanted: Any, keys: Any, results: Any, missing: Any, mode: Any, search: Any = 1.0) -> Any:
    """XLOOKUP with the next smaller (-1) or next larger (1) key; the keys need no order."""
    if isinstance(wanted, _WRONG):
        return wanted
    cells = list(_cells(keys))
    order = range(len(cells)) if search > 0 else range(len(cells) - 1, -1, -1)
    place = next((i for i in order if _fold(cells[i]) == _fold(wanted)), None)
    if place is None and mode:
        sign = 1 if mode > 0 else -1
        beyond = [i for i in order if _beyond(cells[i], wanted, sign)]
        place = min(beyond, key=lambda i: _Ordered(cells[i], sign), default=None)
    if place is None:
        return missing
    grid = _grid(results)
    line = grid[place : place + 1] if len(_grid(keys)) > 1 or len(grid) == len(cells) else [[r[place]] for r in grid]
    return line[0][0] if len(line) == 1 and len(line[0]) == 1 else line


def _beyond(cell: Any, wanted: Any, sign: int) -> bool:
    """Whether a key of the same type lies on the asked-for side of the wanted value."""
    if type(cell) is not type(wanted) or isinstance(cell, _WRONG):
        return False
    return bool(_fold(cell)[1] > _fold(wanted)[1] if sign > 0 else _fold(cell)[1] < _fold(wanted)[1])


@functools.total_ordering
class _Ordered:
    """A key that sorts upwards or downwards."""

    def __init__(self, cell: Any, sign: int) -> None:
        self.key, self.sign = _fold(cell)[1], sign

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Ordered) and bool(self.key == other.key)

    def __lt__(self, other: _Ordered) -> bool:
        return bool(self.key < other.key if self.sign > 0 else self.key > other.key)


@_helper
def _lookup(wanted: Any, keys: Any, results: Any = None) -> Any:
    """LOOKUP in a computed vector: the last number not above the wanted one; errors and other types are passed over."""
    cells = list(_cells(keys))
    fitting = [i for i, cell in enumerate(cells) if type(cell) is type(wanted) and _fold(cell)[1] <= _fold(wanted)[1]]
    if isinstance(wanted, _WRONG) or not fitting:
        return wanted if isinstance(wanted, _WRONG) else CellError.NA
    found = list(_cells(keys if results is None else results))
    return found[fitting[-1]] if fitting[-1] < len(found) else CellError.NA
