"""What COM hands over, as cells; and cells as what COM hands back, errors marked for the add-in's VBA."""

from __future__ import annotations

from itertools import chain
from typing import Any

from lowpoint.cells import CellError

__all__ = ["MARK", "argument", "marked", "sent"]

MARK = "\x01"
"""Begins a text that stands for an error; its number follows. No sentence and no word of ours begins so."""

NUMBERS = {
    CellError.NULL: 2000, CellError.DIV0: 2007, CellError.VALUE: 2015, CellError.REF: 2023, CellError.NAME: 2029,
    CellError.NUM: 2036, CellError.NA: 2042, CellError.SPILL: 2045, CellError.CALC: 2050,
}  # fmt: skip
"""The numbers that CVErr takes."""

_AS_COM = -2146828288
"""Added to the number of an error, the integer that COM shows for it."""
_ERRORS = {_AS_COM + number: error for error, number in NUMBERS.items()}
_RANGE = range(_AS_COM + 2000, _AS_COM + 2300)
"""Errors that Excel may have and we have no word for (#FIELD!, #BUSY!, ...) are #VALUE!."""


def argument(given: Any) -> Any:
    """One argument as a cell or a range: rows in a list; a range of one cell is that cell, blank is None.

    Numbers of worksheets come as floats, so an integer in the range of the errors is one; the conversions of xlwings
    would make texts of the errors it knows, and leave the newer ones integers.
    """
    if type(given) is not tuple:
        return _ERRORS.get(given, CellError.VALUE) if type(given) is int and given in _RANGE else given
    rows = given if given and type(given[0]) is tuple else (given,)
    if len(rows) == 1 and len(rows[0]) == 1:
        return argument(rows[0][0])
    if int in set(map(type, chain.from_iterable(rows))):
        return [[argument(cell) for cell in row] for row in rows]
    return list(map(list, rows))


def marked(cell: Any) -> Any:
    """A cell for COM: an error as marked text, anything else as it is."""
    return f"{MARK}{NUMBERS[cell]}" if type(cell) is CellError else cell


def sent(answer: Any) -> list[list[Any]]:
    """An answer as the rows that xlwings hands to Excel."""
    if type(answer) is list:
        return [[marked(cell) for cell in row] for row in answer]
    return [[marked(answer)]]
