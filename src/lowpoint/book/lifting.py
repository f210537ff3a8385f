"""Helpers that let an engine of their own evaluate something: functions of single values over whole ranges.

In ``LEN(A2:A9)``, ``VLOOKUP({25;80},...)`` or ``COUNTIF(range,{"a","b"})`` the engine takes only the first cell (or
gives an error). The call-back here matches the arguments cell by cell, puts them into a scratch book, and lets the
engine evaluate the plain function for each.
Source of the broadcasting: ISO/IEC 29500-1, 18.17; OASIS ODF 1.3 part 4 (array calculation).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from lowpoint.problems import CellError

from .curing import cure, instance
from .engine import Engine, Unrefreshable
from .formulas import Unreadable
from .helpers import HELPERS, PREFIX, broadcast
from .helping import WRONG, Grid, cells_of, grid_of
from .kinds import scalar_places
from .refs import column_letters

__all__ = ["error_if", "lift", "register"]


_KNOWN: dict[tuple[str, str], Grid] = {}  # results of late: the rows of a list often ask for the same
_MOST = 32


def lift(function: Any, *arguments: Any) -> Any:
    """The function for every combination of its single values; ranges elsewhere are passed whole."""
    key = (function, repr(arguments))
    if key not in _KNOWN:
        if len(_KNOWN) >= _MOST:
            _KNOWN.clear()
        _KNOWN[key] = _lifted(function, arguments)
    return _KNOWN[key]


def _lifted(function: str, arguments: tuple[Any, ...]) -> Grid:
    places, _ = scalar_places(function, len(arguments))
    singles = broadcast([arguments[place] for place in places])
    kinds = [[tuple((type(cell), cell) for cell in cells) for cells in line] for line in singles]
    distinct = {
        kind: cells for line, row in zip(kinds, singles, strict=True) for kind, cells in zip(line, row, strict=True)
    }
    found = dict(zip(distinct, _evaluated(function, arguments, places, list(distinct.values())), strict=True))
    return [[found[kind] for kind in line] for line in kinds]


def _evaluated(
    function: str, arguments: tuple[Any, ...], places: Sequence[int], rows: list[tuple[Any, ...]]
) -> list[Any]:
    """The plain function of each row of single values, in a scratch book."""
    wholes = {place: grid_of(given) for place, given in enumerate(arguments) if place not in places}
    engine = Engine.empty("A", *(f"R{place}" for place in wholes))
    for place, grid in wholes.items():
        engine.set_values(f"R{place}", 1, 1, grid)
    engine.set_values("A", 1, 2, [list(cells) for cells in rows])
    written: list[str | int] = [f"{function}("]
    for place in range(len(arguments)):
        if place in wholes:
            wide, high = len(wholes[place][0]), len(wholes[place])
            written += [f"R{place}!$A$1:${column_letters(wide)}${high}", ","]
        else:
            written += [column_letters(2 + places.index(place)), 0, ","]
    parts = _fit([*written[:-1], ")"], len(rows))
    if any(PREFIX in part for part in parts if isinstance(part, str)):
        register(engine)
    engine.set_formulas("A", 1, 1, [[f"={instance(parts, row)}"] for row in range(1, len(rows) + 1)])
    engine.evaluate()
    results = (line[0] for line in engine.values("A", 1, 1, len(rows), 1))
    return [CellError.VALUE if isinstance(cell, list) else cell for cell in results]


def _fit(parts: list[str | int], rows: int) -> list[str | int]:
    """The formula of all rows, made fit for the engine where it needs to be; whether it may be was asked before."""
    try:
        return cure(parts, range(1, rows + 1)).parts
    except Unreadable:
        return parts


def error_if(cells: Any, *pairs: Any) -> Any:
    """The first error among ``cells`` whose places meet all criteria (range, criterion, range, ...); 0 for none."""
    ranges, criteria = [list(cells_of(given)) for given in pairs[::2]], list(pairs[1::2])
    places = [k for k, cell in enumerate(cells_of(cells)) if isinstance(cell, WRONG)]
    if not places or any(len(given) <= places[-1] for given in ranges):
        return 0.0
    engine = Engine.empty("A", "C")
    engine.set_values("C", 1, 1, [criteria])
    engine.set_values("A", 1, 2, [[given[k] for given in ranges] for k in places])
    columns = range(len(ranges))
    for row in range(1, len(places) + 1):
        asked = ",".join(f"{column_letters(2 + i)}{row},C!${column_letters(1 + i)}$1" for i in columns)
        engine.set_formulas("A", row, 1, [[f"=COUNTIFS({asked})"]])
    engine.evaluate()
    met = [line[0] for line in engine.values("A", 1, 1, len(places), 1)]
    return next((list(cells_of(cells))[k] for k, count in zip(places, met, strict=True) if count == 1.0), 0.0)


def register(engine: Engine) -> None:
    """Make every helper a function of the book; prepared formulas call them as ``LOWPOINT.NAME``."""
    for name, function in {**HELPERS, "LIFT": lift, "ERRORIF": error_if}.items():
        engine.register(PREFIX + name, _guarded(function))


def _guarded(function: Callable[..., Any]) -> Callable[..., Any]:
    """A helper that fails costs its own cell the refreshing, not the whole recalculation."""

    def guarded(*arguments: Any) -> Any:
        try:
            return function(*arguments)
        except (ArithmeticError, LookupError, TypeError, ValueError, MemoryError) as trouble:
            return Unrefreshable(f"could not be worked out ({type(trouble).__name__}); please report it", "missing")

    return guarded
