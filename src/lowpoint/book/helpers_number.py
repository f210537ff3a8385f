"""Helper functions of numbers and statistics."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable
from typing import Any

from lowpoint.problems import CellError

from .engine import Unrefreshable
from .helping import WRONG, cells_of, each, grid_of, helper, number_of, text_of
from .unitwords import convert

_MOST_ROWS = 1_048_576


@each
def _int(value: Any) -> Any:
    """The whole number below the 15 digits of a number: 434.99999999999994 counts as 435."""
    number = number_of(value)
    return CellError.VALUE if number is None else float(math.floor(float(f"{number:.15g}")))


@each
def _ceiling(value: Any, step: Any) -> Any:
    return _stepped(value, step, math.ceil)


@each
def _floor(value: Any, step: Any) -> Any:
    return _stepped(value, step, math.floor)


def _stepped(value: Any, step: Any, towards: Callable[[float], int]) -> Any:
    number, size = number_of(value), number_of(step)
    if number is None or size is None:
        return CellError.VALUE
    if size == 0:
        return 0.0 if towards is math.ceil or number == 0 else CellError.DIV0
    if number > 0 > size:
        return CellError.NUM
    return _multiple(number, size, towards)


def _multiple(number: float, size: float, towards: Callable[[float], int]) -> float:
    """The next multiple, a ratio that is whole in 15 digits counting as whole."""
    ratio = number / size
    near = round(ratio)
    return float((near if math.isclose(ratio, near, rel_tol=1e-14) else towards(ratio)) * size)


@each
def _ceilingmath(value: Any, step: Any, mode: Any) -> Any:
    return _turned(value, step, mode, math.ceil, math.floor)


@each
def _floormath(value: Any, step: Any, mode: Any) -> Any:
    return _turned(value, step, mode, math.floor, math.ceil)


def _turned(value: Any, step: Any, mode: Any, up: Callable[[float], int], down: Callable[[float], int]) -> Any:
    """CEILING.MATH and FLOOR.MATH: a mode other than 0 turns the direction of negative numbers round."""
    number, size = number_of(value), number_of(step)
    if number is None or size is None:
        return CellError.VALUE
    return _multiple(number, abs(size), down if mode and number < 0 else up) if size else 0.0


@each
def _convert(value: Any, given: Any, wanted: Any) -> Any:
    number = number_of(value)
    if number is None:
        return CellError.VALUE
    result = convert(number, text_of(given), text_of(wanted))
    return CellError.NA if result is None else result


@helper
def _gcd(*arguments: Any) -> Any:
    return _whole(arguments, math.gcd)


@helper
def _lcm(*arguments: Any) -> Any:
    return _whole(arguments, math.lcm)


def _whole(arguments: tuple[Any, ...], combine: Callable[..., int]) -> Any:
    """Over all cells, cut to whole numbers; negative ones are #NUM!, text is #VALUE!."""
    numbers: list[int] = []
    for cell in itertools.chain.from_iterable(map(cells_of, arguments)):
        if isinstance(cell, WRONG):
            return cell
        number = None if isinstance(cell, bool) else number_of(cell)
        if number is None:
            return CellError.VALUE
        if not 0 <= number < 2**53:
            return CellError.NUM
        if cell is not None:
            numbers.append(int(number))
    return float(combine(*numbers))


@helper
def _type(value: Any) -> Any:
    if isinstance(value, Unrefreshable):
        return value
    kinds = {bool: 4, str: 2, list: 64, CellError: 16}
    return float(kinds.get(type(value), 1))


@helper
def _mode(*arguments: Any) -> Any:
    """The commonest number; of several the one met first."""
    numbers: dict[float, int] = {}
    for cell in itertools.chain.from_iterable(map(cells_of, arguments)):
        if isinstance(cell, WRONG):
            return cell
        if isinstance(cell, float):
            numbers[cell] = numbers.get(cell, 0) + 1
    most = max(numbers.values(), default=1)
    return CellError.NA if most < 2 else next(number for number, times in numbers.items() if times == most)


@helper
def _sumproduct(*arrays: Any) -> Any:
    """Cells that are no numbers, logicals among them, count as 0; arrays of different sizes are #VALUE!."""
    grids = [grid_of(array) for array in arrays]
    if len({(len(grid), len(grid[0])) for grid in grids}) > 1:
        return CellError.VALUE
    total = 0.0
    for cells in zip(*map(cells_of, grids), strict=True):
        wrong = next((cell for cell in cells if isinstance(cell, WRONG)), None)
        if wrong is not None:
            return wrong
        total += math.prod(cell if type(cell) is float else 0.0 for cell in cells)
    return total


@helper
def _counterror(cells: Any, name: Any) -> Any:
    """How many cells hold the error of this name."""
    return float(sum(isinstance(cell, CellError) and cell == text_of(name).upper() for cell in cells_of(cells)))


def _sorted_numbers(array: Any, skip_errors: bool) -> Any:
    found = []
    for cell in cells_of(array):
        if isinstance(cell, Unrefreshable) or (isinstance(cell, CellError) and not skip_errors):
            return cell
        if isinstance(cell, float):
            found.append(cell)
    return sorted(found)


@helper
def _aggregate(function: Any, option: Any, array: Any, place: Any) -> Any:
    """AGGREGATE 14 to 19: LARGE, SMALL, PERCENTILE and QUARTILE, each over what the option leaves."""
    if isinstance(place, list):
        return [[_aggregate(function, option, array, cell) for cell in line] for line in place]
    numbers = _sorted_numbers(array, option == 6.0)
    wrong = next((cell for cell in (numbers, place) if isinstance(cell, WRONG)), None)
    at = None if wrong is not None else number_of(place)
    if at is None or abs(at) > _MOST_ROWS:
        return wrong or (CellError.VALUE if at is None else CellError.NUM)
    if function not in (14.0, 15.0):
        return _quantile(numbers, at if function in (16.0, 18.0) else int(at) / 4.0, function < 18.0)
    rank = math.ceil(at)
    if not 1 <= rank <= len(numbers):
        return CellError.NUM
    return numbers[-rank] if function == 14.0 else numbers[rank - 1]


def _quantile(numbers: list[float], share: float, inclusive: bool) -> Any:
    """Source: OASIS ODF 1.3 part 4, PERCENTILE and PERCENTILE.EXC: linear between the neighbours."""
    position = share * (len(numbers) - 1) if inclusive else share * (len(numbers) + 1) - 1
    if not numbers or not 0 <= position <= len(numbers) - 1:
        return CellError.NUM
    below = int(position)
    above = min(below + 1, len(numbers) - 1)
    return numbers[below] + (position - below) * (numbers[above] - numbers[below])
