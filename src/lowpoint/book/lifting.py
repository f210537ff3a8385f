"""Functions of single values over whole ranges: ``LEN(A2:A9)``, ``VLOOKUP({25;80},...)``, ``COUNTIF(range,{"a","b"})``.

The engine takes only the first cell there (or gives an error). The call-back here matches the arguments cell by cell,
puts them into a scratch book, and lets the engine evaluate the plain function for each.
Source of the broadcasting: ISO/IEC 29500-1, 18.17; OASIS ODF 1.3 part 4 (array calculation).
"""

from __future__ import annotations

from typing import Any

from lowpoint.problems import CellError

from .cures import prepare
from .engine import Engine
from .helpers import HELPERS, PREFIX, broadcast
from .kinds import scalar_places
from .refs import column_letters

__all__ = ["lift", "register"]


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


def register(engine: Engine) -> None:
    """Make every helper a function of the book; prepared formulas call them as ``LOWPOINT.NAME``."""
    for name, function in HELPERS.items():
        engine.register(PREFIX + name, function)
    engine.register(PREFIX + "LIFT", lift)
