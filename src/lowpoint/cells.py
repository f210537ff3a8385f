"""The one table between results and cells: what a worksheet cell gives and gets, the same for every sheet.

A number is a float or int, text a str, a logical a bool, a blank cell ``None`` (the empty text counts as blank),
an argument left out :data:`OMITTED`, an error a :class:`CellError`, a range a list of rows.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.checked import Outcome
from lowpoint.columns import OMITTED, Column
from lowpoint.problems import PASSED_ON, CellError, shown
from lowpoint.registry import Function, canonical, functions, nearest

__all__ = ["OMITTED", "CellError", "Same", "call", "call_many", "reason", "reasons"]

Cell = Any
Grid = list[list[Any]]


@dataclass(frozen=True, slots=True)
class Same:
    """An argument that is equal in all rows of :func:`call_many`; a table argument's range may stand in it."""

    argument: Any


def call(name: str, args: Sequence[Any]) -> Any:
    """One call as a cell makes it: a cell value, or a grid where a range was given for a scalar argument.

    Ranges broadcast as a spreadsheet does it: one row or one column is repeated, and where a range is too short
    for another the result is #N/A. A function whose answer is a column gives a grid, and takes no ranges (#VALUE!).
    """
    if name == "LP_WHY":
        return _why(args)
    function = functions[name]
    if function.scalar is not None:
        quick = function.scalar(tuple(args)) if len(args) <= len(function.parameters) else None
        if quick is not None:
            return quick
    if len(args) > len(function.parameters):
        return CellError.VALUE
    if function.column:
        args = _singled(args)
        if any(isinstance(a, list) for a in args):
            return CellError.VALUE
    return _spread(function, args, lambda outcome: _cells(function, outcome))


def reason(name: str, args: Sequence[Any]) -> str:
    """The sentence that LP_WHY gives for one call; of a call over ranges that of the first error, else the first."""
    if name == "LP_WHY":
        return _why_not(args)
    said = _why([name, *args])
    if not isinstance(said, list):
        return str(said)
    sentences = [words for row in said for words in row]
    # The sentence of an error begins with the function's name; cautions and bases do not.
    failed = (words for words in sentences if words.startswith(f"{name}: "))
    return next(failed, next((words for words in sentences if words != "ok"), "ok"))


def call_many(name: str, columns: Sequence[Any], rows: int) -> list[Any]:
    """``rows`` independent calls in one go; a column is a list of ``rows`` cells, or :class:`Same`."""
    if name == "LP_WHY":
        return _why_many(columns, rows)
    function = functions[name]
    if len(columns) > len(function.parameters):
        return [CellError.VALUE] * rows
    outcome = _evaluate_many(function, columns, rows)
    return outcome if isinstance(outcome, list) else _cells(function, outcome)


def reasons(name: str, columns: Sequence[Any], rows: int) -> list[str]:
    """What LP_WHY says of each of ``rows`` independent calls."""
    function = functions[name]
    if len(columns) > len(function.parameters):
        return [_too_many(function, len(columns))] * rows
    outcome = _evaluate_many(function, columns, rows, explain=True)
    return outcome if isinstance(outcome, list) else function.checked.explain(outcome)


def _evaluate_many(function: Function, columns: Sequence[Any], rows: int, explain: bool = False) -> Outcome | list[Any]:
    """All rows at once; row by row where a table changes from row to row or a range stands for a scalar."""
    read: dict[str, Column] = {}
    tables: dict[str, Any] = {}
    for parameter, column in zip(function.parameters, columns, strict=False):
        argument = column.argument if isinstance(column, Same) else column
        if argument is OMITTED:
            continue
        same = isinstance(column, Same)
        if not (same if parameter.is_table else not _holds_ranges(column)):
            return _row_by_row(function, columns, rows, explain)
        if parameter.is_table:
            tables[parameter.name] = argument
        else:
            read[parameter.name] = function.checked.column(parameter, argument)
    return function.checked.evaluate(read, tables, rows)


def _holds_ranges(column: Any) -> bool:
    if isinstance(column, Same):
        return isinstance(column.argument, list)
    return list in set(map(type, column))


def _row_by_row(function: Function, columns: Sequence[Any], rows: int, explain: bool) -> list[Any]:
    one = reason if explain else call
    return [one(function.name, [c.argument if isinstance(c, Same) else c[row] for c in columns]) for row in range(rows)]


def _cells(function: Function, outcome: Outcome) -> list[Any]:
    """Cell values of an outcome: plain floats and text, errors where a row failed."""
    if function.column:
        cells: list[Any] = [[[x] for x in row if x == x] for row in outcome.values.tolist()]
    else:
        cells = outcome.values.tolist()
    if not outcome.ledger.clean:
        for row in np.flatnonzero(outcome.ledger.codes()):
            cells[row] = outcome.ledger.error(int(row))
    return cells


def _singled(args: Sequence[Any]) -> list[Any]:
    """A range of one cell is that cell."""
    return [a[0][0] if isinstance(a, list) and _shape(a) == (1, 1) else a for a in args]


def _shape(argument: Any) -> tuple[int, int]:
    return (len(argument), max((len(row) for row in argument), default=0)) if isinstance(argument, list) else (1, 1)


def _spread(function: Function, args: Sequence[Any], answer: Any) -> Any:
    """Evaluate one call whose scalar arguments may be ranges; ``answer`` turns an outcome into a list of cells."""
    given = [(p, a) for p, a in zip(function.parameters, args, strict=False) if a is not OMITTED]
    scalars = [(p, a) for p, a in given if not p.is_table]
    shapes = [_shape(a) for _, a in scalars]
    shape = (max((s[0] for s in shapes), default=1), max((s[1] for s in shapes), default=1))
    read = {p.name: function.checked.column(p, _laid_out(a, shape)) for p, a in scalars}
    tables = {p.name: a for p, a in given if p.is_table}
    cells = answer(function.checked.evaluate(read, tables, shape[0] * shape[1]))
    if not any(isinstance(a, list) for _, a in scalars):
        return cells[0]
    return [cells[row * shape[1] : (row + 1) * shape[1]] for row in range(shape[0])]


def _laid_out(argument: Any, shape: tuple[int, int]) -> Any:
    """A range as one flat list of the result's size; what it does not reach is #N/A."""
    if not isinstance(argument, list):
        return argument
    height, width = _shape(argument)
    if (height, width) == (1, 1) and shape != (1, 1):
        return argument[0][0]
    flat = []
    for r in range(shape[0]):
        for c in range(shape[1]):
            row, column = (0 if height == 1 else r), (0 if width == 1 else c)
            inside = row < height and column < len(argument[row])
            flat.append(argument[row][column] if inside else CellError.NA)
    return flat


def _why_not(args: Sequence[Any]) -> str:
    """Why a call of LP_WHY itself errs."""
    asked = args[0] if args else None
    answer = _why(args)
    if not isinstance(answer, CellError):
        return "ok"
    if isinstance(asked, CellError):
        return f"LP_WHY: function is {asked}, {PASSED_ON}; ask about the call by its name, in quotation marks."
    must = "LP_WHY: function must be the name of a function in quotation marks"
    near = nearest(asked) if isinstance(asked, str) else []
    hint = f" Nearest: {', '.join(near)}." if near else ""
    return f"{must}, got {shown(asked if asked is not OMITTED else None)}.{hint}"


def _asked(text: Any) -> str | None:
    """The function that LP_WHY is asked about; its name may stand without LP_."""
    return (canonical(text) or canonical(f"LP_{text}")) if isinstance(text, str) else None


def _too_many(function: Function, got: int) -> str:
    return f"{function.name}: must have at most {len(function.parameters)} arguments, got {got}."


def _why(args: Sequence[Any]) -> Any:
    """LP_WHY of one call: a sentence, or a grid of sentences; an unknown function is #VALUE!, a blank #N/A."""
    asked = args[0] if args else None
    if isinstance(asked, CellError):
        return asked
    if asked is None or asked is OMITTED or asked == "":
        return CellError.NA
    name = _asked(asked)
    if name is None or name == "LP_WHY":
        return CellError.VALUE
    function = functions[name]
    if len(args) - 1 > len(function.parameters):
        return _too_many(function, len(args) - 1)
    if function.column:
        args = _singled(args)
        if any(isinstance(a, list) for a in args[1:]):
            return f"{name}: every argument must be one value, got a range; its answer is a column already."
    return _spread(function, args[1:], function.checked.explain)


def _why_many(columns: Sequence[Any], rows: int) -> list[Any]:
    first = columns[0] if columns else Same(None)
    name = _asked(first.argument) if isinstance(first, Same) else None
    if name is None or name == "LP_WHY":
        return [_why([c.argument if isinstance(c, Same) else c[row] for c in columns]) for row in range(rows)]
    return reasons(name, columns[1:], rows)
