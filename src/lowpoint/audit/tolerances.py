"""How far a claim may lie from the computed value: practice, and the rounding of what the sheet shows.

Shares of practice are from memory (common practice): two careful calculations on equal inputs differ by less than the
first number; where an input had to be computed or assumed, by less than the second.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.audit.inputs import ASSUMED, COMPUTED, MISSING, Inputs

__all__ = ["FINEST", "NEEDED", "PRACTICE", "Practice", "rests_on", "rounding", "uncertain"]

FINEST = 0.0005
"""No rounding counts as finer than this share of the number."""


@dataclass(frozen=True, slots=True)
class Practice:
    """Tolerance of one kind of claim: a share of the number, or points of it."""

    stated: float
    """Every input stands on the sheet."""
    assumed: float
    absolute: bool = False

    def of(self, computed: float, certain: bool) -> float:
        share = self.stated if certain else self.assumed
        return share if self.absolute else share * abs(computed)


PRACTICE = {
    "coefficient": Practice(0.005, 0.05), "dp_choked": Practice(0.005, 0.05), "fp": Practice(0.005, 0.03),
    "flp": Practice(0.005, 0.05), "ff": Practice(0.005, 0.01), "sigma": Practice(0.005, 0.03),
    "sigma_choked": Practice(0.005, 0.05), "travel": Practice(0.05, 0.05, absolute=True),
    "velocity_in": Practice(0.005, 0.05), "velocity_out": Practice(0.005, 0.05),
    "velocity_in_valve": Practice(0.005, 0.05), "dp": Practice(0.001, 0.001),
    "pv": Practice(0.02, 0.02), "density": Practice(0.005, 0.005), "pc": Practice(0.02, 0.02),
    "viscosity": Practice(0.05, 0.05), "noise": Practice(5.0, 5.0, absolute=True), "bore": Practice(0.01, 0.02),
    "flash_share": Practice(0.01, 0.01, absolute=True), "mass_flow": Practice(0.005, 0.01),
}  # fmt: skip

_DROP = ("flow", "dp", "density", "valve_size", "pipe_in", "pipe_out")
_HEAD = ("p1", "pv", "pc", "fl")
NEEDED: dict[str, tuple[str, ...]] = {
    "coefficient": _DROP, "fp": _DROP, "flp": (*_DROP[:5], "fl"), "ff": ("pv", "pc"), "dp": ("p1", "p2"),
    "dp_choked": (*_HEAD, *_DROP), "sigma_choked": (*_HEAD, *_DROP), "sigma": ("p1", "dp", "pv"),
    "travel": (*_DROP, "rated", "characteristic"), "velocity_in": ("flow", "pipe_in"),
    "velocity_out": ("flow", "pipe_out"), "velocity_in_valve": ("flow", "valve_size"), "pv": ("fluid", "t"),
    "density": ("fluid", "t"), "pc": ("fluid",),
    "viscosity": ("fluid", "t"), "flash_share": ("fluid", "t", "p1", "p2"),
    "noise": ("flow", "p1", "p2", "pv", "density", "sound_speed", "coefficient", "fl", "fd", "valve_size", "pipe_out",
              "pipe_wall"),
    "bore": ("flow", "p1", "p2", "pipe_in", "density", "pv", "pc"), "mass_flow": ("flow", "density"),
}  # fmt: skip
"""What each claim is computed from; ``dp`` stands for both pressures, from which a common atmosphere drops out."""
CHOKING = ("p1", "pv", "pc", "fl")


def rests_on(kind: str, choked: bool) -> tuple[str, ...]:
    """The inputs of a claim; those of choking only where the flow is choked."""
    needed = NEEDED[kind]
    return (*needed, *CHOKING) if choked and kind in ("coefficient", "fp", "flp", "travel") else needed


def uncertain(inputs: Inputs, names: tuple[str, ...], place: int) -> dict[str, str]:
    """Which of these inputs do not stand on the sheet in this case, and how they were come by.

    A constant of the named liquid (its critical pressure) counts as stated: 2 % of it moves FF by less than 0.1 %.
    """
    found: dict[str, str] = {}
    for name in names:
        for real in ("p1", "p2") if name == "dp" else (name,):
            word = inputs.source.get(real, ("sheet",) * inputs.count)[place]
            if name == "dp" and word == ASSUMED and _same_reference(inputs, place):
                continue
            if word in (ASSUMED, COMPUTED, MISSING):
                found[real] = word
    return found


def _same_reference(inputs: Inputs, place: int) -> bool:
    case = inputs.cases[place]
    one, other = inputs.reading.of("p1", case), inputs.reading.of("p2", case)
    return one is None or other is None or one.gauge == other.gauge


def rounding(claimed: Any, half: Any) -> Any:
    """Half of the last digit shown, never finer than 0.05 % of the number."""
    return np.maximum(half, FINEST * np.abs(claimed))
