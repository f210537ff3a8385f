"""The least number that does, in columns: a coarse scan for the first one that passes, then bisection."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

__all__ = ["least", "rounded_down", "rounded_up"]

SCANNED, HALVED = 12, 20
DIGITS = 4


def least(passes: Callable[[Any], Any], low: Any, high: Any) -> Any:
    """For each column the least number between ``low`` (which does not pass) and ``high`` that passes, NaN for none.

    ``passes`` judges a whole row of numbers at once. Found to a ten-millionth of the range; where passing comes and
    goes (limits that move with the opening), the least of the scanned twelfths decides which edge is found.
    """
    low, high = np.broadcast_arrays(np.asarray(low, np.float64), np.asarray(high, np.float64))
    below, above = low.copy(), np.full(low.shape, np.nan)
    for step in range(1, SCANNED + 1):
        trial = low + (high - low) * (step / SCANNED)
        looking = np.isnan(above)
        good = passes(trial) & looking
        above = np.where(good, trial, above)
        below = np.where(looking & ~good, trial, below)
        if not np.isnan(above).any():
            break
    for _ in range(HALVED):
        middle = 0.5 * (below + above)
        good = passes(middle)
        above, below = np.where(good, middle, above), np.where(good, below, middle)
    return above


def _steps(x: Any, unit: float, digits: int) -> Any:
    """The step of a number's last digit, in SI."""
    with np.errstate(all="ignore"):
        size = np.floor(np.log10(np.where(np.abs(x) > 0.0, np.abs(x) / unit, 1.0)))
    return unit * 10.0 ** (size - digits + 1)


def rounded_up(x: Any, unit: float, digits: int = DIGITS) -> Any:
    """SI numbers as they are printed in a unit to some digits, never less than they are."""
    step = _steps(x, unit, digits)
    return np.ceil(x / step - 1e-9) * step


def rounded_down(x: Any, unit: float, digits: int = DIGITS) -> Any:
    """The same, never more than they are."""
    step = _steps(x, unit, digits)
    return np.floor(x / step + 1e-9) * step
