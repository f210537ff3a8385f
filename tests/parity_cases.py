"""Argument sets for every function, the same on every machine: good ones out of the working ranges, and bad ones.

Every face is given the same sets and must answer each with the same double, the same word or the same error.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from typing import Any

from lowpoint import reference
from lowpoint.declare import Parameter
from lowpoint.problems import CellError
from lowpoint.quantities import Quantity
from lowpoint.registry import Function, functions
from registry_cases import example, names

__all__ = ["ROWS", "argument_sets", "names", "same"]

ROWS = 240
"""Argument sets a function."""

_GOLDEN = 0.6180339887498949
_WHOLE = ("stages", "holes")
_ODD = (None, "no such word", CellError.NA, CellError.DIV0, 0.0, -3.0, True, 1e9, "", CellError.NUM)
"""Given in the place of one argument: a blank, texts, errors, numbers that many functions refuse, a logical."""


def argument_sets(name: str) -> list[list[Any]]:
    """``ROWS`` lists of arguments in cell units; three in four are good, tables are the example's."""
    function, base = functions[name], example(name)
    odd = _places_and_values(function)
    rows = []
    for row in range(ROWS):
        arguments = [_moved(function, p, base[i], row, i) for i, p in enumerate(function.parameters)]
        if row % 4 == 3:
            place, value = next(odd)
            arguments[place] = value
        elif row % 4 == 2:
            _leave_out(function, arguments, row)
        rows.append(arguments)
    return rows


def _places_and_values(function: Function) -> Iterator[tuple[int, Any]]:
    scalars = [i for i, p in enumerate(function.parameters) if not p.is_table]
    return itertools.cycle([(place, value) for value in _ODD for place in scalars])


def _leave_out(function: Function, arguments: list[Any], row: int) -> None:
    """Blanks for some of the optional arguments, another choice in each row."""
    for place, parameter in enumerate(function.parameters):
        if not parameter.required and not parameter.is_table and (row // 4 + place) % 3:
            arguments[place] = None


def _moved(function: Function, parameter: Parameter, base: Any, row: int, place: int) -> Any:
    """The example's argument, moved by up to a tenth; words of the vocabulary in turn, capitals now and then."""
    if isinstance(parameter.kind, Quantity):
        if parameter.name in _WHOLE:
            return float(1 + row % 7)
        share = (row * _GOLDEN + place * 0.37) % 1.0
        # As a person types numbers; openpyxl stores 16 digits, where a double has 17.
        return float(f"{base * (1.0 + 0.1 * (share - 0.5)):.9g}")
    if parameter.is_text and isinstance(base, str):
        return _word(function, parameter, base, row)
    return base


def _word(function: Function, parameter: Parameter, base: str, row: int) -> str:
    if parameter.name in ("from", "to"):
        return base.upper() if function.declaration.name == "SIGMA_FORM" and row % 5 == 0 else base
    words = reference.words_of(function, parameter) or [base]
    word = words[(row // 3) % len(words)] if row % 2 else base
    return word.upper() if row % 5 == 0 else word


def same(got: Any, expected: Any) -> bool:
    """The same double to the last bit, the same word, or the same error; grids cell by cell."""
    if isinstance(expected, list):
        return isinstance(got, list) and len(got) == len(expected) and all(map(same, got, expected))
    if isinstance(expected, float):
        return type(got) is float and got.hex() == expected.hex()
    return type(got) is type(expected) and bool(got == expected)
