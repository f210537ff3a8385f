"""The kinds of argument a worksheet function can have: a number, a word of a list, a free word, a table."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

__all__ = ["Floats", "Quantity", "Table", "Text", "Word", "Words"]

Floats: TypeAlias = npt.NDArray[np.float64]
Words: TypeAlias = Any  # a word (one str for all rows) or an array of words


@dataclass(frozen=True, slots=True)
class Quantity:
    """A number: ``low < value < high`` (``low`` itself allowed where ``closed``), in metric cell units.

    ``us_low`` replaces the converted low bound in the US set where the promise names a round figure.
    ``zero_is_blank``: 0 is impossible, so an optional 0 is an omitted one. ``working`` is the range (metric cell
    units) in which the property tests and the examples move. ``remedy`` follows every complaint.
    """

    symbol: str
    meaning: str
    dimension: str
    low: float = -math.inf
    high: float = math.inf
    closed_low: bool = False
    closed_high: bool = False
    us_low: float | None = None
    zero_is_blank: bool = False
    working: tuple[float, float] = (0.5, 2.0)
    remedy: str = ""


@dataclass(frozen=True, slots=True)
class Word:
    """A word out of a closed list; upper and lower case are the same."""

    symbol: str
    meaning: str
    words: tuple[str, ...]
    remedy: str = ""


@dataclass(frozen=True, slots=True)
class Text:
    """A free word that the function itself resolves (a fluid, a unit, a style)."""

    symbol: str
    meaning: str
    working: tuple[str, ...] = ()
    remedy: str = ""


@dataclass(frozen=True, slots=True)
class Table:
    """A column of numbers taken whole; ``or_words`` are accepted in its place, ``width`` is 1 or 2 columns."""

    symbol: str
    meaning: str
    dimension: str
    width: int = 1
    or_words: tuple[str, ...] = ()
    low: float = -math.inf
    increasing: bool = False
    working: tuple[float, ...] = field(default=())
    remedy: str = ""
