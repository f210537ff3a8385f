"""What is said of every orifice plate: why one has no loss, which rule gave it, and where the rule ends."""

from __future__ import annotations

import inspect
from typing import Any

import numpy as np

from lowpoint.declare import Caution, NoAnswer
from lowpoint.physics.plate_loss import LEAST_REYNOLDS, in_iso, iso_weight, open_share

__all__ = ["ALL_OPEN", "LARGEST_DROP", "NOT_WHOLE", "PLATE_CAUTIONS", "PRESSURE_CAUTIONS", "SLOW_TEXT", "STEEP_TEXT",
           "fraction", "is_long", "may_reattach", "of_result", "slow"]  # fmt: skip

PLUGGING = 0.003
"""m, bores below it are easily plugged (common practice)."""
LEAST_BORE, WIDEST_PIPE, LARGEST_DROP = 0.0125, 1.0, 2.5e5
"""m, m and Pa: further ends of the range of ISO 5167-2 (as in the library fluids)."""
ATMOSPHERE = (0.9e5, 1.1e5)
"""Pa, outlet pressures at which a plate may well discharge into the open."""
DISSOLVED = 0.7e5
"""Pa, 0.7 of the pressure at which most liquids took up their air (common practice)."""
SHORT, LONG = 0.1, 0.8
"""Bore lengths over the bore between which the jet may or may not reattach."""


def _open(bore: Any, pipe: Any, holes: Any) -> Any:
    return open_share(bore, pipe, holes) >= 1.0


def fraction(holes: Any) -> Any:
    """Where a number of holes is given and is not whole."""
    return False if holes is None else (holes != np.floor(holes)) & ~np.isnan(holes)


def may_reattach(bore: Any, bore_length: Any) -> Any:
    return False if bore_length is None else (bore_length / bore > SHORT) & (bore_length / bore < LONG)


def is_long(bore: Any, bore_length: Any) -> Any:
    return False if bore_length is None else bore_length / bore >= LONG


def slow(reynolds: Any, bore: Any, pipe: Any) -> Any:
    """Where a pipe Reynolds number is given and below the range of ISO 5167-2 (5000, and 16000 beta^2)."""
    beta = bore / pipe
    return False if reynolds is None else reynolds < np.maximum(LEAST_REYNOLDS, 16000.0 * beta * beta)


def _outside_iso(bore: Any, pipe: Any, holes: Any) -> Any:
    """Where Idelchik alone gives the loss; a rounding at the end of the transition is outside."""
    return iso_weight(bore, pipe, holes) < 1e-9


def _beyond_iso(bore: Any, pipe: Any, holes: Any) -> Any:
    return ~_outside_iso(bore, pipe, holes) & ((bore < LEAST_BORE) | (pipe > WIDEST_PIPE))


def _between(bore: Any, pipe: Any, holes: Any) -> Any:
    return ~_outside_iso(bore, pipe, holes) & ~in_iso(bore, pipe, holes)


_RANGE = "(one hole, bore over pipe 0.1 to 0.75, pipe from 50 mm)"

ALL_OPEN = NoAnswer("the bore (all holes together) must be smaller than the pipe", _open)
NOT_WHOLE = NoAnswer("holes must be a whole number", fraction)

BY_ISO = Caution(
    f"the loss of the thin plate is that of ISO 5167-2 {_RANGE}",
    in_iso, label="rule",
)  # fmt: skip
BY_IDELCHIK = Caution(
    f"the loss of the thin plate is Idelchik's, since the plate is outside ISO 5167-2 {_RANGE}",
    _outside_iso, label="rule",
)  # fmt: skip
BY_BOTH = Caution(
    f"the loss of the thin plate lies between ISO 5167-2 and Idelchik's, since the plate is just outside ISO 5167-2 "
    f"{_RANGE}",
    _between, label="rule",
)  # fmt: skip
BEYOND_ISO = Caution(
    "the bore is below 12.5 mm or the pipe above 1000 mm, outside ISO 5167-2, whose equation was used all the same",
    _beyond_iso,
)
REATTACHING = Caution(
    "the bore is 0.1 to 0.8 diameters long: the jet may attach to the wall or not, and K is uncertain by 20 % and more",
    may_reattach,
)
THICK = Caution(
    "the bore is long: K is lower and the flow chokes at a smaller drop than with a thin plate (Idelchik, in part from "
    "memory)",
    is_long,
)
PLUGS = Caution("the bore is below 3 mm and easily plugged (common practice)", lambda bore: bore < PLUGGING)
STEEP_TEXT = "the drop is above 2.5 bar, outside ISO 5167-2: see that the plate is strong enough (LP_PLATE_THICKNESS)"
SLOW_TEXT = (
    "the pipe Reynolds number is below 5000 or 16000 (bore/pipe)^2, outside ISO 5167-2; below 5000 the loss at 5000 is "
    "taken"
)
STEEP = Caution(STEEP_TEXT, lambda p1, p2: p1 - p2 > LARGEST_DROP)

PLATE_CAUTIONS = (BY_ISO, BY_IDELCHIK, BY_BOTH, BEYOND_ISO, REATTACHING, THICK, PLUGS)
"""Of any plate whose bore, pipe, bore_length and holes are known."""

FLASHES = Caution("p2 is at or below pv: the liquid flashes after the plate", lambda p2, pv: p2 <= pv)
GASES = Caution(
    "p2 is below about 0.7 bar: dissolved air comes out after the plate, most in long runs at that pressure (common "
    "practice)",
    lambda p2, pv: (p2 < DISSOLVED) & (p2 > pv),
)
FREE = Caution(
    "p2 is near atmospheric pressure: where the jet leaves into the open, with no pipe of this size after the plate, "
    "nothing is recovered and the flow is only LP_ORIFICE_FL times as large",
    lambda p2: (p2 > ATMOSPHERE[0]) & (p2 < ATMOSPHERE[1]),
)
PRESSURE_CAUTIONS = (FLASHES, GASES, FREE, STEEP)
"""Of a plate between two pressures."""


def of_result(caution: Caution, argument: str = "bore") -> Caution:
    """The same caution for a function whose result is that argument."""
    names = ["result" if n == argument else n for n in inspect.signature(caution.when).parameters]

    def when(*values: Any) -> Any:
        return caution.when(*values)

    parameters = [inspect.Parameter(name, inspect.Parameter.POSITIONAL_OR_KEYWORD) for name in names]
    when.__signature__ = inspect.Signature(parameters)  # type: ignore[attr-defined]
    return Caution(caution.text, when, caution.label)
