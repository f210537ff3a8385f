"""Reducers and expanders beside a valve: their loss coefficients and the factors FP and FLP.

All lengths in m, flow coefficients as Av in m2. ``d`` is the nominal valve size, ``D1`` and ``D2`` the inside
diameters of the pipes. A pipe left out is of line size; a valve a little larger than its pipe's bore (up to 1.1 times:
a nominal size against an inside diameter) counts as line size, beyond that there is no answer.
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics.constants import N2, N18

__all__ = ["Pair", "fitting_losses", "piping_geometry_factor", "recovery_with_fittings"]

OVERSIZE = 1.1 * (1.0 + 1e-12)
"""Largest d/D that still counts as line size: 1.1, and what a change of units may round it up to."""

Pair = tuple[Any, Any]


def bore_ratio2(valve_size: Any, pipe: Any) -> Any:
    """``(d/D)^2``, 1 for line size and for a valve a little larger than its pipe, NaN beyond 1.1 d/D."""
    ratio = valve_size / pipe
    return np.where(ratio > 1.0, np.where(ratio <= OVERSIZE, 1.0, np.nan), ratio * ratio)


def fitting_losses(valve_size: Any, pipe_in: Any, pipe_out: Any) -> Pair:
    """``(sumK, K1+KB1)/(N2 d^4)``, 1/m4: each times Av^2 is a loss in the valve's own measure ``c``.

    K1 = 0.5 (1-(d/D1)^2)^2, K2 = (1-(d/D2)^2)^2, KB = 1-(d/D)^4, sumK = K1+K2+KB1-KB2. Rows without a valve size
    have no fittings: zero, or the plain 0.0 where no row has one.
    """
    if valve_size is None:
        return 0.0, 0.0
    if _one(valve_size) and _one(pipe_in) and _one(pipe_out):
        return _losses_of_one(valve_size.item(0), pipe_in.item(0), pipe_out.item(0))
    return _losses(valve_size, pipe_in, pipe_out)


def _one(x: Any) -> bool:
    """Is a column one value for all its rows?"""
    return len(x) == 1 or x.strides == (0,)


@lru_cache(4096)
def _losses_of_one(valve_size: float, pipe_in: float, pipe_out: float) -> Pair:
    """The losses of one set of fittings, as arrays of one element; a plant has few sets, and each in many rows."""
    found = _losses(*(np.array((x,)) for x in (valve_size, pipe_in, pipe_out)))
    for part in found:
        part.setflags(write=False)
    return found


def _losses(valve_size: Any, pipe_in: Any, pipe_out: Any) -> Pair:
    b1 = bore_ratio2(valve_size, pipe_in)
    b2 = b1 if pipe_out is pipe_in else bore_ratio2(valve_size, pipe_out)
    inlet = 0.5 * (1.0 - b1) ** 2 + (1.0 - b1 * b1)
    outlet = (1.0 - b2) ** 2 - (1.0 - b2 * b2)
    d2 = valve_size * valve_size
    scale = 1.0 / (N2 * d2 * d2)
    absent = np.isnan(valve_size)
    if absent.any():
        return np.where(absent, 0.0, (inlet + outlet) * scale), np.where(absent, 0.0, inlet * scale)
    return (inlet + outlet) * scale, inlet * scale


def too_large(valve_size: Any, pipe_in: Any, pipe_out: Any) -> Any:
    """Where the valve is larger than 1.1 times a pipe beside it."""
    if valve_size is None:
        return False
    return (valve_size / pipe_in > OVERSIZE) | (valve_size / pipe_out > OVERSIZE)


def a_little_larger(valve_size: Any, pipe_in: Any, pipe_out: Any) -> Any:
    """Where the valve is larger than a pipe beside it, but counts as line size."""
    if valve_size is None:
        return False
    return ((valve_size > pipe_in) | (valve_size > pipe_out)) & ~too_large(valve_size, pipe_in, pipe_out)


def large_capacity(coefficient: Any, valve_size: Any) -> Any:
    """Where C/(N18 d^2) is above 0.047, the largest for which the standard gives its assurance."""
    if valve_size is None or coefficient is None:
        return False
    return coefficient / (N18 * valve_size * valve_size) > 0.047


def result_too_large(result: Any, valve_size: Any) -> Any:
    """As :func:`large_capacity`, for a function whose answer is the coefficient."""
    return large_capacity(result, valve_size)


TOO_LARGE = NoAnswer(
    "the valve is more than 1.1 times as large as a pipe beside it; check valve_size against pipe_in and pipe_out "
    "(inside diameters)", too_large,
)  # fmt: skip
LINE_SIZE = Caution(
    "the valve is a little larger than the pipe's inside diameter and was taken as line size", a_little_larger
)
_CAPACITY = (
    "C/(N18 d^2) is above 0.047, beyond which the sizing standard gives no assurance (limit from memory); ask for "
    "the vendor's test"
)
LARGE_CAPACITY = Caution(_CAPACITY, large_capacity)
LARGE_RESULT = Caution(_CAPACITY, result_too_large)


def _expander_gain_too_large(coefficient: Any, valve_size: Any, pipe_in: Any, pipe_out: Any) -> Any:
    if coefficient is None or valve_size is None:
        return False
    total, _ = fitting_losses(valve_size, pipe_in, pipe_out)
    return 1.0 + total * coefficient * coefficient <= 0.0


GAIN = NoAnswer(
    "the pressure regained in the outlet expander exceeds all losses (1 + sumK c is not positive); the coefficient "
    "is too large for this valve size", _expander_gain_too_large,
)  # fmt: skip


def geometry_factor2(coefficient: Any, total: Any) -> Any:
    """``FP^2 = 1/(1 + sumK c)``; NaN where the bracket is not positive."""
    bracket = 1.0 + total * coefficient * coefficient
    return 1.0 / np.where(bracket > 0.0, bracket, np.nan)


@function(
    "FP", group="valves", gives="piping geometry factor", source_key="IEC 60534-2-1",
    equation="1/sqrt(1 + sumK (C/d^2)^2/N2)", no_answer=(TOO_LARGE, GAIN), cautions=(LINE_SIZE, LARGE_CAPACITY),
)  # fmt: skip
def piping_geometry_factor(
    coefficient: q.Coefficient, valve_size: q.ValveSize, pipe_in: q.PipeIn, pipe_out: q.PipeOut
) -> q.Ratio:
    """Piping geometry factor, ``FP = 1/sqrt(1 + sumK (C/d^2)^2/N2)``.

    Arrays of one length, SI (C as Av in m2). Above 1 with only an outlet expander, which is legitimate. NaN where
    1 + sumK c is not positive or d is above 1.1 D.
    Source: IEC 60534-2-1, with concentric reducers as in its equations for K1, K2 and KB.
    """
    total, _ = fitting_losses(valve_size, pipe_in, pipe_out)
    return np.sqrt(geometry_factor2(coefficient, total))


@function(
    "FLP", group="valves", gives="combined recovery and piping geometry factor", source_key="IEC 60534-2-1",
    equation="FL/sqrt(1 + FL^2 (K1+KB1) (C/d^2)^2/N2)",
    no_answer=(NoAnswer("the valve is more than 1.1 times as large as the pipe before it; check valve_size against "
                        "pipe_in (inside diameter)",
                        lambda valve_size, pipe_in: too_large(valve_size, pipe_in, pipe_in)),),
    cautions=(Caution(LINE_SIZE.text, lambda valve_size, pipe_in: a_little_larger(valve_size, pipe_in, pipe_in)),
              LARGE_CAPACITY),
)  # fmt: skip
def recovery_with_fittings(fl: q.FL, coefficient: q.Coefficient, valve_size: q.ValveSize, pipe_in: q.PipeIn) -> q.Ratio:
    """Combined factor, ``FLP = FL/sqrt(1 + FL^2 (K1+KB1) (C/d^2)^2/N2)``.

    Arrays of one length, SI (C as Av in m2). Only the inlet fitting enters. NaN where d is above 1.1 D.
    Source: IEC 60534-2-1.
    """
    _, inlet = fitting_losses(valve_size, pipe_in, pipe_in)
    return fl / np.sqrt(1.0 + fl * fl * inlet * coefficient * coefficient)
