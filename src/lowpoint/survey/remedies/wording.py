"""The words of remedies: numbers in metric units, and what comes of a remedy in one clause."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from lowpoint.units import KV, dimension

__all__ = ["bar", "kv", "mm", "share", "span", "spoken"]


def bar(x: float) -> str:
    """A pressure or a drop, in bar."""
    return f"{x / 1e5:.4g}"


def kv(x: float) -> str:
    """A flow coefficient, ``Kv 63``."""
    return f"Kv {x / KV:.4g}"


def mm(x: float) -> str:
    """A size in mm, without needless digits."""
    return f"{1e3 * x:.5g}"


def celsius(t: float) -> str:
    return f"{dimension('temperature').metric.from_si(t):.1f} deg C"


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
