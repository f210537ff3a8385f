"""The outlet as a place instead of a pressure: into a pipe, submerged, a free jet, down a falling leg.

The pressure at the outlet is that of the place, plus the column of liquid up to it and the friction on the way::

    p2 = p_place + density g rise + loss

``rise`` counts from the outlet upward to the place: the level of a tank above a submerged outlet, a point in a pipe,
the end of a filled leg (below it, so negative). The place's pressure is the gauge in the pipe, else that of the gas
over the liquid, the atmosphere where none is given. A leg whose column would be drawn below the vapour pressure parts:
then that pressure stands behind the valve. Source: hydrostatics; the parted leg: common practice.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint.survey.model import Cases, absent
from lowpoint.units import GRAVITY

__all__ = ["outlet_pressures"]

PIPE, LEG = "pipe", "falling leg"
FRICTIONLESS = "p2 follows from the place of the outlet without friction on the way: give it where it is known"
PARTED = (
    "the falling leg would draw its liquid below the vapour pressure: it parts, and the vapour pressure stands behind "
    "the valve"
)
TWO_WAYS = "p2 is given and so is the place of the outlet, which would make it {:.4g} bar a: the given one was used"


def outlet_pressures(cases: Cases) -> tuple[Any, list[tuple[int, str]], list[tuple[int, str]]]:
    """p2 of every case whose outlet is a place (NaN elsewhere); then faults and cautions as (place, sentence)."""
    placed = ~absent(cases.outlet)
    in_pipe, leg = cases.outlet == PIPE, cases.outlet == LEG
    over = np.where(in_pipe, cases.outlet_pressure, np.where(
        np.isnan(cases.outlet_pressure), cases.atmosphere, cases.outlet_pressure))  # fmt: skip
    needs_rise = leg | (cases.outlet == "submerged")
    rise = np.where(needs_rise, cases.outlet_rise, np.nan_to_num(cases.outlet_rise))
    p2 = over + cases.density * GRAVITY * rise + np.nan_to_num(cases.outlet_loss)
    parts = placed & leg & (p2 < cases.pv)
    p2 = np.where(parts, cases.pv, np.where(placed, p2, np.nan))
    wanted = placed & np.isnan(cases.p2)
    faults = [
        *_said(wanted & in_pipe & np.isnan(over), "Pressure there must be given for an outlet into a pipe"),
        *_said(wanted & ~in_pipe & np.isnan(over), "the outlet is under the atmosphere, which is not known: give the "
               "site's elevation or atmosphere, or the pressure there"),
        *_said(wanted & needs_rise & np.isnan(rise), "Rise to the place must be given for an outlet that is submerged "
               "(the level above it) or has a falling leg (its end, below: negative)"),
        *_said(wanted & leg & (rise > 0.0), "Rise to the place must be negative for a falling leg, whose end lies "
               "below the valve"),
        *_said(wanted & ~np.isnan(over) & ~np.isnan(rise) & (p2 <= 0.0), "no absolute pressure is left at the outlet: "
               "check the rise to its place"),
    ]  # fmt: skip
    bad = np.zeros(cases.count, np.bool_)
    bad[[place for place, _ in faults]] = True
    p2 = np.where(bad, np.nan, p2)
    told = [*_said(wanted & ~bad & np.isnan(cases.outlet_loss) & (cases.outlet != "free jet"), FRICTIONLESS),
            *_said(wanted & parts, PARTED)]  # fmt: skip
    differs = placed & (np.abs(p2 - cases.p2) > 0.01 * cases.p2)
    told += [(place, TWO_WAYS.format(p2[place] / 1e5)) for place in np.flatnonzero(differs).tolist()]
    return p2, faults, told


def _said(mask: Any, sentence: str) -> list[tuple[int, str]]:
    return [(place, sentence) for place in np.flatnonzero(mask).tolist()]
