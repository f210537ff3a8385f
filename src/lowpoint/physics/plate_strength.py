"""Thickness of an orifice plate: an annular plate under even pressure, its hole's edge free."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function

__all__ = ["plate_thickness", "stress_factor"]

POISSON = 0.3


def _clamped(b: Any) -> Any:
    """``k`` of a plate with a clamped rim: the larger of the bending stresses at rim and bore; radii over the rim's.

    From ``w' = q (r^3 - 2 b^2 (2 r ln r + r))/16D + C2/r + 2 C3 r`` with ``w'(1) = 0`` and no radial moment at the
    bore.
    """
    nu, b2 = POISSON, b * b
    load, slope = 1.0 / 16.0, -b2 / 8.0
    curved = 3.0 * load * b2 + slope * (2.0 * np.log(b) + 3.0) + nu * (load * b2 + slope * (2.0 * np.log(b) + 1.0))
    rim = load + slope
    # w'(1) = rim + C2 + 2 C3 = 0 and curved + C2 (nu - 1)/b^2 + 2 C3 (1 + nu) = 0
    c2 = ((1.0 + nu) * rim - curved) / ((nu - 1.0) / b2 - (1.0 + nu))
    c3 = 0.5 * (-rim - c2)
    at_rim = np.abs(3.0 * load + slope * 3.0 - c2 + 2.0 * c3)
    turn = load * b2 + slope * (2.0 * np.log(b) + 1.0) + c2 / b2 + 2.0 * c3
    bend = 3.0 * load * b2 + slope * (2.0 * np.log(b) + 3.0) - c2 / b2 + 2.0 * c3
    return 6.0 * np.maximum(at_rim, np.abs(turn + nu * bend))


def _simple(b: Any) -> Any:
    """``k = 3/(4 (1-b^2)) ((3+nu) + (1-nu) b^4 - 4 b^2 + 4 (1+nu) b^2 ln b)``, radii over the rim's."""
    b2, nu = b * b, POISSON
    return 0.75 / (1.0 - b2) * ((3.0 + nu) + (1.0 - nu) * b2 * b2 - 4.0 * b2 + 4.0 * (1.0 + nu) * b2 * np.log(b))


def stress_factor(bore_ratio: Any, support: Any) -> Any:
    """``k`` of ``stress = k drop (a/t)^2``, a the support's radius; ``bore_ratio`` is bore over support diameter."""
    if isinstance(support, str):
        return _simple(bore_ratio) if support == "simple" else _clamped(bore_ratio)
    return np.where(support == "simple", _simple(bore_ratio), _clamped(bore_ratio))


@function(
    "PLATE_THICKNESS", group="orifices", gives="thickness of an orifice plate", source_key="annular plate",
    equation="a sqrt(k drop/stress) + allowance, a half the support diameter, k of an annular plate (nu 0.3)",
    no_answer=(NoAnswer("the bore must be smaller than the support diameter",
                        lambda bore, support_diameter: bore >= support_diameter),
               NoAnswer("no thin plate carries this drop at this stress: it would be thicker than half its support's "
                        "diameter; use a stronger material or a smaller support")),
    cautions=(
        Caution("a clamped rim is seldom that stiff in service; simple is the safe choice",
                lambda support: np.asarray(support == "clamped")),
        Caution("the plate is thicker than a quarter of its support's radius, where thin-plate theory overstates it",
                lambda result, support_diameter: result > 0.125 * support_diameter),
        Caution("for one hole in the middle; with many holes multiply the allowable stress by their ligament "
                "efficiency; the drop is the largest of any case, blockage and start-up included; local codes rule",
                lambda bore: np.ones(len(bore), np.bool_)),
    ),
)  # fmt: skip
def plate_thickness(
    drop: q.PlateDrop, support_diameter: q.SupportDiameter, bore: q.OrificeBore, stress: q.Stress,
    support: q.Support = "simple", allowance: q.Allowance = 0.0,  # type: ignore[assignment]
) -> q.Thickness:  # fmt: skip
    """Thickness, ``t = a sqrt(k drop/stress) + allowance``, a half the support diameter (gasket mean).

    Arrays of one length, SI. ``k`` for a simply supported or clamped rim and a free bore, Poisson's ratio 0.3. NaN
    where the bore is not below the support, or the plate would be thicker than its support's radius.
    Source: theory of thin plates, solved anew.
    """
    ratio = np.where(bore < support_diameter, bore / support_diameter, np.nan)
    radius = 0.5 * support_diameter
    thickness = radius * np.sqrt(stress_factor(ratio, support) * drop / stress)
    return np.where(thickness <= radius, thickness, np.nan) + allowance
