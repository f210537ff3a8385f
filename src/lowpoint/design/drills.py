"""Standard drills: the sizes that a bore can be drilled to without a special tool.

Sizes in m. ``metric``: steps of 0.05 mm up to 3 mm, 0.1 mm up to 14 mm, 0.25 mm up to 32 mm, 0.5 mm up to 50 mm and
1 mm above, where holes are bored. ``inch``: 1/64 in up to 1 3/4 in, 1/32 in up to 2 1/4 in, 1/16 in above.
Source: preferred diameters of ISO 235, and of ASME B94.11M for fractional inches (both from memory; common practice).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from lowpoint.errors import LowpointError
from lowpoint.units import INCH

__all__ = ["SERIES", "DrillSeries", "series"]


@dataclass(frozen=True, slots=True)
class DrillSeries:
    """A series of sizes: steps, each up to an end, in ``unit`` (m)."""

    name: str
    unit: float
    first: float
    steps: tuple[tuple[float, float], ...]
    """``(up to, step)``; the ends are whole numbers of steps."""

    def around(self, bore: Any) -> tuple[Any, Any]:
        """The largest size not above a bore and the smallest not below it; a size within 1e-9 is that size.

        Any shape, m; NaN where the series has none.

        >>> [sizes.round(5).tolist() for sizes in SERIES["metric"].around(np.array([0.01234, 0.0302, 0.07]))]
        [[0.0123, 0.03, 0.07], [0.0124, 0.03025, 0.07]]
        """
        sizes = _sizes(self)
        bore = np.asarray(bore, np.float64)
        at_or_below = np.searchsorted(sizes, bore * (1.0 + 1e-9), side="right") - 1
        at_or_above = np.searchsorted(sizes, bore * (1.0 - 1e-9), side="left")
        ended = np.append(sizes, np.nan)
        return ended[at_or_below], ended[at_or_above]


@cache
def _sizes(drills: DrillSeries) -> Any:
    """All sizes of a series; from counts of steps, so that 0.3 mm is not three times 0.1 mm but nearly."""
    sizes, start = [np.array([drills.first])], drills.first
    for end, step in drills.steps:
        counts = np.arange(round(start / step) + 1, round(end / step) + 1)
        sizes.append(counts * step)
        start = end
    return np.concatenate(sizes) * drills.unit


SERIES = {
    item.name: item
    for item in (
        DrillSeries("metric", 1e-3, 0.5, ((3.0, 0.05), (14.0, 0.1), (32.0, 0.25), (50.0, 0.5), (3000.0, 1.0))),
        DrillSeries("inch", INCH, 1 / 32, ((1.75, 1 / 64), (2.25, 1 / 32), (120.0, 1 / 16))),
    )
}


def series(name: str) -> DrillSeries:
    """The series of this name."""
    if name not in SERIES:
        raise LowpointError("drills", f"must be one of {', '.join(SERIES)}", repr(name))
    return SERIES[name]
