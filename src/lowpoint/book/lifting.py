"""Helpers that let an engine of their own evaluate something: functions of single values over whole ranges.

In ``LEN(A2:A9)``, ``VLOOKUP({25;80},...)`` or ``COUNTIF(range,{"a","b"})`` the engine takes only the first cell (or
gives an error). The call-back here matches the arguments cell by cell, puts them into a scratch book, and lets the
engine evaluate the plain function for each.
Source of the broadcasting: ISO/IEC 29500-1, 18.17; OASIS ODF 1.3 part 4 (array calculation).
"""

from __future__ import annotations

from typing import Any

from lowpoint.problems import CellError

from .cures import prepare
from .engine import Engine
from .helping import HELPERS, PREFIX, WRONG, broadcast, cells_of
from .kinds import scalar_places
from .refs import column_letters

__all__ = ["error_if", "lift", "register"]


def lift(function: Any, *arguments: Any) -> Any:
    """The function for every combination of its single values; ranges elsewhere are passed whole."""
    places, _ = scalar_places(function, len(arguments))
    singles = broadcast([arguments[place] for place in places])
    sheets = [f"R{place}" for place in range(len(arguments)) if place not in places]
    engine = Engine.empty("A", *sheets)
    texts = {}
    for place, argument in enumerate(arguments):
        if place not in places:
            grid = argument if isinstance(argument, list) else [[argument]]
            engine.set_values(f"R{place}", 1, 1, grid)
            texts[place] = f"R{place}!$A$1:${column_letters(len(grid[0]))}${len(grid)}"
    rows = [cells for line in singles for cells in line]
    engine.set_values("A", 1, 2, [list(cells) for cells in rows])
    letters = {place: column_letters(2 + i) for i, place in enumerate(places)}
    formulas = []
    for row in range(1, len(rows) + 1):
        written = ",".join(texts.get(place) or f"{letters[place]}{row}" for place in range(len(arguments)))
        formulas.append([prepare(f"={function}({written})").text])
    if any(PREFIX in formula for (formula,) in formulas):
        register(engine)
    engine.set_formulas("A", 1, 1, formulas)
    engine.evaluate()
    found = [line[0] for line in engine.values("A", 1, 1, len(rows), 1)]
    found = [CellError.VALUE if isinstance(cell, list) else cell for cell in found]
    wide = len(singles[0])
    return [found[i : i + wide] for i in range(0, len(found), wide)]


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
    for name, function in HELPERS.items():
        engine.register(PREFIX + name, function)
    engine.register(PREFIX + "LIFT", lift)
    engine.register(PREFIX + "ERRORIF", error_if)
