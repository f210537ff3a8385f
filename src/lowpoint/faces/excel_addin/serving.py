"""The functions as xlwings calls them: made from the registry, never raising, computing for their own add-in only."""

from __future__ import annotations

import inspect
from collections.abc import Callable
from pathlib import Path
from typing import Any

from lowpoint import __version__, cells
from lowpoint.cells import CellError
from lowpoint.faces.calc_addin.inside.journal import Journal
from lowpoint.faces.excel_addin.outline import Outline, maker, outlines
from lowpoint.faces.excel_addin.values import argument, sent

__all__ = ["log_path", "responder", "udfs"]

Rows = list[list[Any]]


def log_path() -> Path:
    """Where a crash is told."""
    return Path.home() / ".lowpoint" / "excel.log"


_journal = Journal(log_path())


def responder(name: str) -> Callable[..., Rows]:
    """``name`` as a function of the add-in's maker and of what COM hands over."""
    ours = maker()

    def respond(addin: Any, *given: Any) -> Rows:
        if addin != ours:
            return _failed(name, _not_ours(addin))
        try:
            return sent(cells.call(name, [argument(one) for one in given]))
        except Exception as bug:
            told = f"{name}: {type(bug).__name__}: {bug}"
            _journal.write(told)
            return _failed(name, f"This is our bug ({told}); it is logged in {_journal.path}.")

    return respond


def _failed(name: str, why: str) -> Rows:
    """The cell shows #VALUE!; LP_WHY, which is asked anew and remembers nothing, tells why."""
    return sent(why if name == "LP_WHY" else CellError.VALUE)


def _not_ours(addin: Any) -> str:
    theirs = addin.partition(" ")[0] if isinstance(addin, str) and addin else "(unknown)"
    package = f"another {__version__}" if theirs == __version__ else __version__
    return (
        f"The add-in was made by Lowpoint {theirs}, but the package is {package}; nothing is computed. "
        "Run 'lowpoint excel install' and start Excel again."
    )


def udfs() -> dict[str, Callable[..., Rows]]:
    """Every function, with the decorators of xlwings: a hidden first argument tells what made the add-in."""
    return {outline.name: _decorated(outline) for outline in outlines()}


def _decorated(outline: Outline) -> Callable[..., Rows]:
    import xlwings

    function = responder(outline.name)
    function.__name__ = function.__qualname__ = outline.name
    function.__doc__ = outline.text
    function.__annotations__ = {}  # xlwings takes annotations for converters
    function.__signature__ = _signature(outline)  # type: ignore[attr-defined]
    # "raw": values as COM gives them. The other converters lose the shape of a column, and blank out errors.
    function = xlwings.arg("addin", "raw", vba="LpMaker")(function)
    for one in outline.arguments:
        function = xlwings.arg(one.name, "raw", doc=one.text)(function)
    function = xlwings.ret("raw")(function)
    # The last: each of the others would put xlwings' own category in its place.
    decorated: Callable[..., Rows] = xlwings.func(category=category(outline))(function)
    return decorated


def category(outline: Outline) -> str:
    """Where the function wizard lists a function."""
    return f"Lowpoint {outline.group}"


def _signature(outline: Outline) -> inspect.Signature:
    """All arguments optional, so that one left out is reported by the function and not by Excel."""
    kinds = inspect.Parameter
    variadic = any(one.rest for one in outline.arguments)
    parameters = [kinds("addin", kinds.POSITIONAL_OR_KEYWORD)]
    for one in outline.arguments:
        kind = kinds.VAR_POSITIONAL if one.rest else kinds.POSITIONAL_OR_KEYWORD
        # xlwings knows no function with both optional and any number of arguments.
        default = kinds.empty if variadic else None
        parameters.append(kinds(one.name, kind, default=default))
    return inspect.Signature(parameters)
