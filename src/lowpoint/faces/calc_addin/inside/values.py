"""Values of the office, of the functions and of the line between two processes.

The office gives a number as float, text as str, a range as rows of a tuple, an argument left out as None. It takes
the same, and an error as a NaN whose low bits carry its code; plain float and str only.
"""

from __future__ import annotations

import struct
from typing import Any

__all__ = ["CRASHED", "error_value", "from_line", "to_line", "to_office"]

_CODES = {"#NUM!": 503, "#VALUE!": 519, "#NULL!": 521, "#REF!": 524, "#NAME?": 525, "#DIV/0!": 532, "#N/A": 32767}
_QUIET_NAN = 0x7FF8000000000000


def error_value(error: str) -> float:
    """The NaN that the office shows as this error; an error that it does not know is #VALUE!."""
    return float(struct.unpack("<d", struct.pack("<Q", _QUIET_NAN | _CODES.get(error, _CODES["#VALUE!"])))[0])


CRASHED = error_value("#VALUE!")
_VALUES = {error: error_value(error) for error in _CODES}


def to_office(cell: Any) -> Any:
    """A cell of a function's answer as the office takes it. An error is a str of a kind of its own."""
    kind = type(cell)
    if kind is float or kind is str:
        return cell
    if kind is list:
        return tuple(tuple(to_office(inner) for inner in row) for row in cell)
    if isinstance(cell, str):
        return _VALUES.get(str(cell), CRASHED)
    return float(cell)


def to_line(cell: Any) -> Any:
    """A cell of a function's answer as JSON holds it: an error is an object, to be told from text."""
    if isinstance(cell, list):
        return [[to_line(inner) for inner in row] for row in cell]
    if isinstance(cell, str) and type(cell) is not str:
        return {"error": str(cell)}
    return cell


def from_line(value: Any) -> Any:
    """What :func:`to_line` made, as the office takes it."""
    if isinstance(value, dict):
        return _VALUES.get(value.get("error", ""), CRASHED)
    if isinstance(value, list):
        return tuple(tuple(from_line(inner) for inner in row) for row in value)
    return value if isinstance(value, str) else float(value)
