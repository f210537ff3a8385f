"""The site: barometric pressure, and columns of liquid."""

from __future__ import annotations

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import NoAnswer, function
from lowpoint.units import GRAVITY

__all__ = ["barometric_pressure", "pressure_after_rise"]

EARTH = 6356766.0
"""Nominal radius of the earth of the standard atmosphere, m."""
SEA_LEVEL = 101325.0


@function(
    "ATMOSPHERE", group="liquids", gives="barometric pressure at a site, standard atmosphere", source_key="ISO 2533",
    equation="101325 (1 - 0.0065 H/288.15)^5.25588 Pa, H = 6356766 z/(6356766 + z)",
    basis_text="the standard atmosphere; weather moves the pressure of a site by up to 5 %",
)  # fmt: skip
def barometric_pressure(elevation: q.Elevation) -> q.Pressure:
    """Standard barometric pressure, ``101325 (1 - 0.0065 H/288.15)^5.25588`` at geopotential height H.

    Array, SI; ``H = 6356766 z/(6356766 + z)`` from the geometric elevation z, -5000 to 11 000 m.
    Source: ISO 2533:1975.
    """
    height = EARTH * elevation / (EARTH + elevation)
    return SEA_LEVEL * (1.0 - 0.0065 * height / 288.15) ** 5.25588


@function(
    "COLUMN", group="liquids", gives="pressure after a change of elevation, liquid at rest", source_key="hydrostatics",
    equation="p - density g rise",
    no_answer=(NoAnswer("the column is higher than the pressure can carry: the liquid would part, no absolute "
                        "pressure is left", lambda rise: rise > 0.0),
               NoAnswer("the pressure is larger than a number can be")),
)  # fmt: skip
def pressure_after_rise(p: q.P, rise: q.Rise, density: q.Density) -> q.Pressure:
    """Pressure at another elevation, ``p - density g rise``; upward lowers it.

    Arrays of one length, SI; standard gravity, no friction. NaN where no absolute pressure is left.
    Source: hydrostatics.
    """
    after = p - density * GRAVITY * rise
    return np.where((after > 0.0) & np.isfinite(after), after, np.nan)
