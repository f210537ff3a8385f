"""Nominal sizes and rated coefficients to choose from."""

from __future__ import annotations

from typing import Any

import numpy as np

__all__ = ["NOMINAL", "SERIES", "larger", "next_multiple", "smaller"]

NOMINAL = 1e-3 * np.array([15, 20, 25, 32, 40, 50, 65, 80, 100, 125, 150, 200, 250, 300, 350, 400, 450, 500, 600])
"""m. Source: DN of ISO 6708 as valves are made in (common practice)."""
SERIES = np.array([1.0, 1.12, 1.25, 1.4, 1.6, 1.8, 2.0, 2.24, 2.5, 2.8, 3.15, 3.55, 4.0, 4.5, 5.0, 5.6, 6.3, 7.1, 8.0,
                   9.0])  # fmt: skip
"""Preferred numbers R20 of ISO 3 (from memory): steps of 12 %."""
_NEAR = 0.05
"""Share by which a size in inches may differ from its DN."""


def smaller(size: Any) -> Any:
    """The next smaller nominal size, the same where there is none; NaN stays NaN."""
    place = np.searchsorted(NOMINAL, size * (1.0 - _NEAR)) - 1
    return np.where(np.isnan(size), np.nan, np.where(place >= 0, NOMINAL[np.maximum(place, 0)], size))


def larger(size: Any) -> Any:
    """The next larger nominal size, the same where there is none; NaN stays NaN."""
    place = np.searchsorted(NOMINAL, size * (1.0 + _NEAR))
    there = place < len(NOMINAL)
    return np.where(np.isnan(size), np.nan, np.where(there, NOMINAL[np.minimum(place, len(NOMINAL) - 1)], size))


def next_multiple(ratio: Any) -> Any:
    """The next preferred number at or above a ratio."""
    decade = 10.0 ** np.floor(np.log10(ratio))
    place = np.searchsorted(SERIES, ratio / decade * (1.0 - 1e-9))
    return decade * np.append(SERIES, 10.0)[place]
