"""Round numbers for an axis."""

from __future__ import annotations

import math
from collections.abc import Iterable

__all__ = ["axis", "ticks"]

_STEPS = (1.0, 2.0, 2.5, 5.0, 10.0)


def ticks(low: float, high: float, about: int = 5) -> tuple[float, ...]:
    """Round numbers that span low to high, some ``about`` of them, the first at or below, the last at or above.

    Finite numbers only; where both are one value, around it.

    >>> ticks(0.3, 9.1)
    (0.0, 2.0, 4.0, 6.0, 8.0, 10.0)
    """
    span = high - low
    if not span > 1e-9 * max(abs(low), abs(high)):  # one value: some room on both sides
        room = 0.5 * max(abs(low), abs(high)) or 0.5
        low, high, span = low - room, high + room, 2.0 * room
    rough = span / about
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(s * power for s in _STEPS if s * power >= rough * (1.0 - 1e-9))
    first, last = math.floor(low / step + 1e-9), math.ceil(high / step - 1e-9)
    return tuple(round(n * step, 12) for n in range(first, last + 1))


def axis(values: Iterable[float], about: int = 5) -> tuple[float, ...]:
    """Ticks for these numbers; from zero where none is negative and zero is near enough to show them well."""
    known = [x for x in values if math.isfinite(x)] or [0.0, 1.0]
    low, high = min(known), max(known)
    if 0.0 < low < 0.6 * high:
        low = 0.0
    return ticks(low, high, about)
