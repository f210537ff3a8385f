"""The cells of one column as numbers in SI or as words; every cell that is neither is named, none is guessed."""

from __future__ import annotations

import datetime
import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any

import numpy as np

from lowpoint.kinds import Quantity
from lowpoint.physics.unitnames import Meaning
from lowpoint.problems import shown
from lowpoint.survey.fields import ESTIMATE, KINDS, OUTLETS, TYPICAL, ListField
from lowpoint.survey.model import Numbers, Words
from lowpoint.units import dimension

__all__ = ["Fault", "NumberCells", "as_text", "bores", "is_formula_like", "numbers", "out_of_bounds",
           "without_controls", "words"]  # fmt: skip

RETYPE = "Type the number, and format the cell as one."
DATED = "A program may have made a date of a number such as 5.8: format the cell as a number, and type it again."
BLANKS = frozenset({"", "-", "–", "—"})
"""Texts that stand for a blank cell; dashes are how lists are filled up."""
_PLAIN = frozenset({float, int, type(None)})
_NUMBER = re.compile(r"[+-]?(?:\d+(?P<mark>[.,])?\d*|(?P<lead>[.,])\d+)(?:[eE][+-]?\d+)?")
_ERROR = re.compile(r"#(?:N/A|NUM!|VALUE!|REF!|NAME\?|DIV/0!|NULL!|SPILL!|CALC!)|Err:\d+")
_FORMULA = re.compile(r"[=@\t\r]|[+-](?=[^\d\s.,])|[+-][\d.,]+ *[-+*/^&(|=<>!]")
_CONTROL = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u202a-\u202e\u2066-\u2069\ud800-\udfff\ufffe\uffff]")
ASKED = {"fl": TYPICAL, "fd": TYPICAL, "incipient": ESTIMATE}
"""The word that may stand in place of a number, by field."""


@dataclass(frozen=True, slots=True)
class Fault:
    """A cell that cannot be used: its place among the rows, what it holds, what it must be, and the remedy."""

    place: int
    value: Any
    text: str
    remedy: str


@dataclass(slots=True)
class NumberCells:
    """A column of numbers as typed, NaN where there is none; ``asked`` where the field's own word stands."""

    values: Numbers
    asked: list[int] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)


def numbers(what: ListField, cells: Sequence[Any], decimal: str = ".", all_text: bool = False) -> NumberCells:
    """The numbers of a column; ``all_text``: the file knows only texts (csv), with this decimal sign."""
    if not all_text and set(map(type, cells)) <= _PLAIN:
        return NumberCells(np.array(cells, np.float64))
    column = NumberCells(np.full(len(cells), np.nan))
    for place, cell in enumerate(cells):
        if cell is None:
            continue
        if isinstance(cell, str):
            _take_text(what, column, place, cell.strip(), decimal if all_text else "")
        elif isinstance(cell, bool) or not isinstance(cell, int | float):
            dated = isinstance(cell, datetime.date | datetime.time | datetime.timedelta)
            must = f"{what.heading} must be a number and is {'a date or time' if dated else 'a logical value'}"
            column.faults.append(Fault(place, str(cell) if dated else cell, must, DATED if dated else RETYPE))
        else:
            column.values[place] = cell
    return column


def _take_text(what: ListField, column: NumberCells, place: int, text: str, decimal: str) -> None:
    if text in BLANKS:
        return
    if text.casefold() == ASKED.get(what.key):
        column.asked.append(place)
        return
    found = _NUMBER.fullmatch(text) if decimal else None
    mark = found and (found["mark"] or found["lead"])
    if found and (not mark or mark == decimal):
        column.values[place] = float(text.replace(",", "."))
        return
    column.faults.append(Fault(place, text, f"{what.heading} must be a number", _remedy_for(what, text, decimal)))


def _remedy_for(what: ListField, text: str, decimal: str) -> str:
    if _ERROR.fullmatch(text):
        return "The cell holds an error: cure its formula, or type the number."
    if decimal and _NUMBER.fullmatch(text):
        if decimal == "?":
            return "Points and commas are mixed in this file: write every number with a decimal point."
        return f"Numbers of this file have the decimal sign '{decimal}': write this one so too."
    if any(sign.isdigit() for sign in text):
        return "The cell holds text: type a number, with your program's own decimal sign and no unit."
    asked = ASKED.get(what.key)
    return f"Type a number, leave it blank, or write '{asked}'." if asked else "Type a number, or leave it blank."


def to_si(x: Any, unit: Meaning) -> Any:
    """Numbers of a unit in SI, gauge pressures still without the atmosphere."""
    return (x + unit.zero) * unit.factor


@lru_cache(256)
def _bounds(kind: Quantity) -> tuple[float, float]:
    metric = dimension(kind.dimension).metric
    return metric.to_si(kind.low), metric.to_si(kind.high)


def out_of_bounds(kind: Quantity, x: Numbers) -> tuple[Any, Callable[[int], str]]:
    """Which SI values are impossible, and for each the clause that says what it must be (metric units)."""
    low, high = _bounds(kind)
    above = (x >= low) if kind.closed_low else (x > low)
    below = (x <= high) if kind.closed_high else (x < high)
    bad = ~((above & below) | np.isnan(x)) | np.isinf(x)

    def clause(place: int) -> str:
        value = float(x[place])
        if math.isinf(value):
            return "must be finite"
        unit = dimension(kind.dimension).metric.label
        if value <= low:
            return f"must be {'at least' if kind.closed_low else 'above'} {shown(kind.low, unit)}"
        return f"must be {'at most' if kind.closed_high else 'below'} {shown(kind.high, unit)}"

    return bad, clause


_SPELLED = {"kind": KINDS, "outlet": OUTLETS}


def words(what: ListField, cells: Sequence[Any]) -> tuple[Words, list[Fault]]:
    """The canonical words of a column, None for blank; a text field keeps what it finds."""
    found = np.full(len(cells), None, object)
    faults: list[Fault] = []
    known = _spellings(what) if what.what == "word" else {}
    for place, cell in enumerate(cells):
        text = as_text(cell)
        if text is None:
            continue
        if _ERROR.fullmatch(text):
            faults.append(Fault(place, cell, f"{what.heading} holds an error", "Cure its formula, or type the text."))
            continue
        if what.what == "text":
            found[place] = " ".join(text.split())
            continue
        word = known.get(" ".join(text.split()).casefold())
        if word is None:
            must = f"{what.heading} must be one of {', '.join(what.words)}"
            faults.append(Fault(place, cell, must, "Choose one of these words."))
        found[place] = word
    return found, faults


def _spellings(what: ListField) -> dict[str, str]:
    spelled = _SPELLED.get(what.key, {word: (word,) for word in what.words})
    return {other: word for word, others in spelled.items() for other in (word, *others)}


def without_controls(text: str) -> str:
    """A text without the signs that steer a terminal or turn the reading direction; line ends made plain."""
    return _CONTROL.sub("", text.replace("\r\n", "\n").replace("\r", "\n"))


def as_text(cell: Any) -> str | None:
    """A cell as text; None for a blank one, whole numbers without a point."""
    if cell is None:
        return None
    if isinstance(cell, float) and cell.is_integer() and abs(cell) < 1e15:
        return str(int(cell))
    if isinstance(cell, datetime.datetime) and cell.time() == datetime.time():
        cell = cell.date()
    text = str(cell).strip()
    return None if text in BLANKS else text


def is_formula_like(text: str) -> bool:
    """Would a spreadsheet program take this text for a formula when it is typed or read from a csv?"""
    return len(text) > 1 and _FORMULA.match(text) is not None


def bores(what: ListField, cells: Sequence[Any], factor: float, decimal: str) -> tuple[Words, list[Fault]]:
    """Tuples of bores in m out of texts such as ``42; 48; 56``."""
    found = np.full(len(cells), None, object)
    faults: list[Fault] = []
    for place, cell in enumerate(cells):
        text = as_text(cell)
        if text is None:
            continue
        parts = [part for part in re.split(r"[;/|\s]+", text) if part]
        mark = decimal if decimal in ".," else "."
        values = [_one(part, mark) for part in parts]
        if parts and all(value is not None and value > 0.0 for value in values):
            found[place] = tuple(value * factor for value in values if value is not None)
        else:
            faults.append(Fault(place, cell, f"{what.heading} must be numbers above 0 with ; between",
                                "Write them as 42; 48; 56, from the first plate to the last."))  # fmt: skip
    return found, faults


def _one(text: str, decimal: str) -> float | None:
    found = _NUMBER.fullmatch(text)
    mark = found and (found["mark"] or found["lead"])
    return float(text.replace(",", ".")) if found and (not mark or mark == decimal) else None
