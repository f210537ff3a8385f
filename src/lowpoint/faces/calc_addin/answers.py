"""The functions as the office calls them: tuples of the office's values in, its values out."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

from lowpoint import __version__, cells
from lowpoint.errors import LowpointError
from lowpoint.faces.calc_addin.inside.link import PLAIN_NAMES
from lowpoint.faces.calc_addin.inside.values import to_office
from lowpoint.faces.calc_addin.signatures import fingerprint
from lowpoint.registry import Function, functions

__all__ = ["calls", "cell_of", "greeting"]

Call = Callable[[tuple[Any, ...]], Any]


def greeting() -> dict[str, Any]:
    """What this package is, for the add-in to compare with what it was made from."""
    return {"version": __version__, "fingerprint": fingerprint(), "names": [*functions, PLAIN_NAMES]}


def calls() -> dict[str, Call]:
    """Each function bound once: good plain values take the short way, everything else the long one."""
    bound = {name: _bound(function) for name, function in functions.items()}
    return {**bound, PLAIN_NAMES: lambda arguments: cell_of(PLAIN_NAMES, arguments)}


def _bound(function: Function) -> Call:
    name, scalar = function.name, function.scalar

    def long_way(arguments: tuple[Any, ...]) -> Any:
        return to_office(cell_of(name, arguments))

    def short_way(arguments: tuple[Any, ...]) -> Any:
        assert scalar is not None
        quick = scalar(arguments)
        return quick if quick is not None else long_way(arguments)

    return long_way if scalar is None else short_way


def cell_of(name: str, arguments: Any) -> Any:
    """The answer of one call as a cell, or a grid of cells."""
    if name == PLAIN_NAMES:
        return _plain_names(Path(arguments[0]))
    if name == "LP_WHY":
        arguments = (arguments[0], *arguments[1])  # the arguments asked about come in a sequence of their own
    return cells.call(name, [_argument(one) for one in arguments])


def _argument(given: Any) -> Any:
    """An argument of the office as a cell: what is left out comes as None, a range as rows."""
    if given is None:
        return cells.OMITTED
    if isinstance(given, tuple | list):
        return [list(row) for row in given]
    return given


def _plain_names(book: Path) -> float | str:
    """How many formulas of a saved book were respelled, or why none could be."""
    from lowpoint.faces.calc_addin.plain import restore

    try:
        return float(restore(book))
    except LowpointError as problem:
        return str(problem)
