"""Opening of a valve from its coefficient, and values read at an opening; openings are shares of travel inside."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, SameAs, function
from lowpoint.physics import fittings
from lowpoint.physics.fittings import fitting_losses
from lowpoint.physics.sizing import BOILS, CRITICAL, FLASHES, OUTLET, critical_pressure_factor, no_valve_passes
from lowpoint.quantities import Floats

__all__ = ["operating_travel", "value_at_travel", "valve_travel"]

PERCENT = 0.01
ROUNDING = 1e-12
"""What passes an end of the travel, or of a table, by no more than this is at the end."""


def between(x: Any, xs: Floats, ys: Floats) -> Any:
    """Linear interpolation, NaN outside the table."""
    return np.where((x >= xs[0]) & (x <= xs[-1]), np.interp(x, xs, ys), np.nan)


def _by_table(coefficient: Any, rated: Any, characteristic: Any, rangeability: Any) -> Any:
    return between(coefficient, characteristic[:, 1], characteristic[:, 0] * PERCENT)


def _linear(coefficient: Any, rated: Any, characteristic: Any, rangeability: Any) -> Any:
    least = 0.0 if rangeability is None else np.where(np.isnan(rangeability), 0.0, 1.0 / rangeability)
    return (coefficient / rated - least) / (1.0 - least)


def _equal_percentage(coefficient: Any, rated: Any, characteristic: Any, rangeability: Any) -> Any:
    ratio = np.nan if rangeability is None else rangeability
    return 1.0 + np.log(coefficient / rated) / np.log(ratio)


def _no_rangeability(characteristic: Any, rangeability: Any) -> Any:
    if not isinstance(characteristic, str) or characteristic != "equal percentage":
        return False
    return True if rangeability is None else np.isnan(rangeability)


@function(
    "TRAVEL", group="valves", gives="opening of the valve", source_key="IEC 60534-2-4",
    equation="linear h = (C/C_rated - 1/R)/(1 - 1/R), 1/R = 0 without R; equal percentage h = 1 + ln(C/C_rated)/ln R; "
    "a table is read between its rows",
    any_unit=True,
    no_answer=(
        NoAnswer("rangeability must be given for the equal percentage characteristic", _no_rangeability, missing=True),
        NoAnswer("the coefficient is above what the valve has fully open; a larger valve or trim is needed",
                 lambda coefficient, rated, characteristic:
                 coefficient > (rated if isinstance(characteristic, str) else characteristic[-1, 1])),
        NoAnswer("the coefficient is below what the valve controls; a smaller valve or trim is needed"),
    ),
    cautions=(
        Caution("below 5 % opening a real characteristic leaves its formula", lambda result: result < 0.05),
        Caution("an inherent characteristic may deviate by 10 (1/phi)^0.2 per cent (IEC 60534-2-4, from memory); use "
                "the vendor's table", lambda result, characteristic: (result > 0) & isinstance(characteristic, str)),
        Caution("the opening is outside 10 to 90 per cent of travel", lambda result: (result < 0.1) | (result > 0.9)),
    ),
)  # fmt: skip
def valve_travel(
    coefficient: q.Coefficient, rated: q.Rated, characteristic: q.Characteristic, rangeability: q.Rangeability = None  # type: ignore[assignment]
) -> q.Travel:  # fmt: skip
    """Opening for a coefficient, by the inverse of the inherent characteristic.

    Arrays of one length; coefficient and rated in one unit, the table's second column too (rated is not used then).
    NaN outside the valve's range, or without rangeability for equal percentage.
    Source: IEC 60534-2-4 (from memory).
    """
    if isinstance(characteristic, str):
        inverse = _linear if characteristic == "linear" else _equal_percentage
    else:
        inverse = _by_table
    opening = inverse(coefficient, rated, characteristic, rangeability)
    within = (opening >= -ROUNDING) & (opening <= 1.0 + ROUNDING)
    return np.where(within, np.clip(opening, 0.0, 1.0), np.nan)


@function(
    "AT_TRAVEL", group="valves", gives="a value read at an opening, without extrapolation", source_key="definition",
    equation="linear interpolation between the rows of the table", any_unit=True,
    no_answer=(NoAnswer("the travel is outside the table; nothing is extrapolated"),),
)  # fmt: skip
def value_at_travel(travel: q.Travel, travels: q.Travels, values: q.Values) -> q.FreeValue:
    """FL, xFz or a limit at an opening, linear between the rows.

    Travel an array, the tables 1-D. NaN outside the table.
    Source: interpolation.
    """
    return between(travel, travels, values)


def _lacking(
    flow: Any, p1: Any, p2: Any, pv: Any, pc: Any, density: Any, valve_size: Any, pipe_in: Any, pipe_out: Any
) -> tuple[Any, Any]:
    """What the valve must have at its opening: C at least the first, C FL at least the second."""
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    energy = flow * flow * density
    a, b = energy / (p1 - p2), energy / (p1 - critical_pressure_factor(pv, pc) * pv)
    free, choked = 1.0 - a * total, 1.0 - b * inlet
    return (
        np.sqrt(a / np.where(free > 0.0, free, np.nan)),
        np.sqrt(b / np.where(choked > 0.0, choked, np.nan)),
    )


def _opening(travels: Floats, coefficients: Floats, fls: Floats, free: Any, choked: Any) -> Any:
    """Smallest opening of the table with ``C >= free`` and ``C FL >= choked``, both linear between rows; NaN if none.

    ``C FL`` is a quadratic of the opening in each segment, so its roots are written down and nothing is missed where
    it is largest between two rows.
    """
    opening = np.full(free.shape, np.nan)
    for i in range(len(travels) - 1):
        c, f = coefficients[i], fls[i]
        dc, df = coefficients[i + 1] - c, fls[i + 1] - f
        first, last = _not_negative(dc * df, c * df + f * dc, c * f - choked)
        first = np.maximum(np.maximum(first, (free - c) / dc), 0.0)
        passes = np.isnan(opening) & (first <= np.minimum(last, 1.0) + ROUNDING)
        opening = np.where(passes, travels[i] + np.minimum(first, 1.0) * (travels[i + 1] - travels[i]), opening)
    return opening


def _not_negative(a: float, b: float, c: Any) -> tuple[Any, Any]:
    """First and last t of the one stretch from t = 0 on where ``a t^2 + b t + c`` is not negative; NaN for none.

    The product of a rising and any other positive line: where it curves upward it rises (``b > 0``).
    """
    inside = b * b - 4.0 * a * c
    root = np.sqrt(np.where(inside >= 0.0, inside, np.nan))
    # The root on the rising side is written so that nothing cancels; with b <= 0 it lies before t = 0.
    first = -2.0 * c / (b + root) if b > 0.0 else np.where(root >= 0.0, 0.0, np.nan)
    if a >= 0.0:
        return first, np.inf
    return first, (b + root) / (-2.0 * a)


def _impossible_fl(fls: Floats) -> bool:
    return bool((fls <= 0.0).any() or (fls > 1.0).any())


def _too_small(
    flow: Any, p1: Any, p2: Any, pv: Any, pc: Any, density: Any, travels: Any, coefficients: Any, fls: Any,
    valve_size: Any, pipe_in: Any, pipe_out: Any,
) -> Any:  # fmt: skip
    needs = _lacking(flow, p1, p2, pv, pc, density, valve_size, pipe_in, pipe_out)
    return np.isnan(_opening(travels, coefficients, fls, *needs))


@function(
    "OPERATING_TRAVEL", group="valves",
    gives="opening at which coefficient and FL, both read at that opening, pass the flow", source_key="closed form",
    equation="smallest h with C(h) >= C_free and C(h) FL(h) >= FL C_choked, on the valve's table",
    needs={"pipe_in": ("valve_size",), "pipe_out": ("valve_size",)},
    must=(OUTLET, BOILS, CRITICAL),
    no_answer=(
        NoAnswer("a recovery factor in fls is 0 or above 1: check the column", lambda fls: _impossible_fl(fls)),
        fittings.TOO_LARGE,
        NoAnswer("no valve of this size passes the flow: the fittings alone take the whole drop; choose a larger "
                 "valve_size", no_valve_passes),
        NoAnswer("the valve is too small: at no opening of the table does it pass the flow", _too_small),
        NoAnswer("the valve would have to be less open than the table's first row; nothing is extrapolated"),
    ),
    cautions=(
        FLASHES,
        fittings.LINE_SIZE,
        Caution("the opening is outside 10 to 90 per cent of travel", lambda result: (result < 0.1) | (result > 0.9)),
    ),
)  # fmt: skip
def operating_travel(
    flow: q.Flow, p1: q.P1, p2: q.P2, pv: q.PV, pc: q.PC, density: q.Density, travels: q.Travels,
    coefficients: q.Coefficients, fls: q.FLs, valve_size: q.ValveSize = None,  # type: ignore[assignment]
    pipe_in: q.PipeIn = SameAs("valve_size"), pipe_out: q.PipeOut = SameAs("pipe_in"),  # type: ignore[assignment]
) -> q.Travel:  # fmt: skip
    """Opening at which the valve passes the flow with the FL that it has there.

    Arrays of one length, the tables 1-D, SI; linear between rows, the roots of each segment in closed form. NaN where
    the valve is too small, or would be less open than the table's first row.
    Source: derived from IEC 60534-2-1; coefficient and FL at the same travel.
    """
    free, choked = _lacking(flow, p1, p2, pv, pc, density, valve_size, pipe_in, pipe_out)
    opening = _opening(travels, coefficients, fls, free, choked)
    least = coefficients[0] * (1.0 - ROUNDING)
    less_open = (least > free) & (least * fls[0] > choked)
    return np.where(less_open | _impossible_fl(fls), np.nan, opening)
