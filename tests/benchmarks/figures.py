"""One measured figure with its goal, and the ways to measure."""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

__all__ = ["Figure", "best_of", "median_of"]


@dataclass(frozen=True)
class Figure:
    """A measured value; ``at_least`` or ``at_most`` is the goal, None for a figure that is only told."""

    name: str
    value: float
    unit: str
    at_least: float | None = None
    at_most: float | None = None

    @property
    def met(self) -> bool:
        above = self.at_least is None or self.value >= self.at_least
        return above and (self.at_most is None or self.value <= self.at_most)

    def line(self) -> str:
        goal = "" if self.at_least is None else f"goal at least {self.at_least:g}"
        goal = goal if self.at_most is None else f"goal at most {self.at_most:g}"
        verdict = ("met" if self.met else "MISSED") if goal else ""
        return f"{self.name:<72} {self.value:>10.4g} {self.unit:<10} {goal:<20} {verdict}"

    def as_data(self) -> dict[str, Any]:
        return {
            "name": self.name, "value": float(f"{self.value:.4g}"), "unit": self.unit,
            "at_least": self.at_least, "at_most": self.at_most, "met": self.met,
        }  # fmt: skip


def _seconds(work: Callable[[], Any]) -> float:
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def best_of(times: int, work: Callable[[], Any]) -> float:
    """The shortest of several runs, seconds: the one that other work on the machine disturbed least."""
    return min(_seconds(work) for _ in range(times))


def median_of(times: int, work: Callable[[], Any]) -> float:
    """The middle of several runs, seconds."""
    return statistics.median(_seconds(work) for _ in range(times))
