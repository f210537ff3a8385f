"""Hourly readings of one valve of Kestrel Bay, invented and the same on every run: the load of the town over the day.

At night the town takes little: the inlet pressure rises, the pressure after the valve falls and the water is cooler,
so that the index of the same valve wanders through its limits within a day.
"""

from __future__ import annotations

from collections.abc import Iterator

from lowpoint.starter.plant import Reading, Readings

__all__ = ["HILL_TOP"]

HOURS = 200
LOAD = (52, 50, 50, 52, 58, 70, 86, 98, 100, 94, 86, 80, 76, 74, 74, 76, 82, 92, 98, 96, 88, 76, 66, 58)
"""Per cent of the largest load, hour by hour."""


def _hourly() -> Iterator[Reading]:
    """Straight lines over the load with a ripple that never repeats within a day; rounded as instruments show them."""
    for hour in range(HOURS):
        load, day, ripple = LOAD[hour % 24], hour // 24, hour * 17 % 11 - 5
        yield Reading(
            hour=hour,
            flow=round(3.05 * load + 0.6 * ripple, 1),
            p1=round(9.20 - 0.016 * load - 0.01 * ripple, 2),
            p2=round(1.10 + 0.028 * load + 0.05 * (day * 3 % 7 - 3) + 0.01 * (hour * 5 % 7 - 3), 2),
            t=round(71.0 + 0.34 * load + 0.4 * (day % 3) - 0.1 * ripple, 1),
        )


HILL_TOP = Readings("25-PCV-504", tuple(_hourly()))
