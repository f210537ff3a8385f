"""The words of remedies: numbers as marks (:mod:`lowpoint.survey.worded`), and what comes of a remedy in one clause."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np

from lowpoint.survey.worded import amount

__all__ = ["absolute", "celsius", "kv", "pressure", "share", "size", "sizes", "span", "spoken"]


def pressure(x: float, rounding: str = "") -> str:
    """A drop or a difference, ``1.5 bar``."""
    return amount(x, "pressure", rounding=rounding)


def absolute(x: float, form: str = ".4g", rounding: str = "", *, bare: bool = False) -> str:
    """A pressure, ``1.5 bar a``; ``bare``: without its unit."""
    return amount(x, "absolute pressure", form, rounding, bare=bare)


def kv(x: float, rounding: str = "") -> str:
    """A flow coefficient, ``Kv 63``."""
    return amount(x, "coefficient", rounding=rounding)


def size(x: float) -> str:
    """A bore, ``42.5 mm``, without needless digits."""
    return amount(x, "size", ".5g")


def sizes(several: Sequence[float]) -> str:
    """Bores with one unit, ``42 and 51.5 mm``."""
    return spoken([amount(x, "size", ".5g", bare=True) for x in several[:-1]] + [size(several[-1])])


def celsius(t: float, rounding: str = "") -> str:
    """A temperature, ``80.5 deg C``."""
    return amount(t, "temperature", ".1f", rounding)


def share(x: float) -> str:
    """A share with its sign, ``+12 %``; small ones with a digit more."""
    return f"{100.0 * x:+.1f} %" if abs(x) < 0.1 else f"{100.0 * x:+.0f} %"


def span(low: float, high: float) -> str:
    """A range of openings, ``38-77 %``."""
    first, last = f"{100.0 * low:.0f}", f"{100.0 * high:.0f}"
    return f"{first} %" if first == last else f"{first}-{last} %"


def spoken(words: list[str]) -> str:
    """``a``, ``a and b``, ``a, b and c``."""
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


def limit_words(kept: Any) -> str:
    """The limits that margins count to, in words."""
    names = ["choking" if word == "choked" else str(word) for word in dict.fromkeys(kept.tolist())]
    return f"{spoken(names)} limit" + ("s" if len(names) > 1 else "")


def in_cases(count: int, unanswered: int) -> str:
    """``in all 3 cases``, and honest where some have no answer."""
    whole = "in its one case" if count == 1 else "in both cases" if count == 2 else f"in all {count} cases"
    return f"{whole} that {'has' if count == 1 else 'have'} an answer" if unanswered else whole


def openings(travel: Any) -> str:
    """``, travel 38-77 %`` where it is known."""
    if np.isnan(travel).any():
        return ""
    low, high = float(travel.min()), float(travel.max())
    return "" if math.isnan(low) else f", travel {span(low, high)}"
