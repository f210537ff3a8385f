"""Sea water and its brines: vapour pressure by the osmotic route of IAPWS-08, density and viscosity by Sharqawy et al.

``salinity`` is a mass fraction, kg salt per kg sea water. All functions take and give single SI numbers.
"""

from __future__ import annotations

import math
from functools import lru_cache

from lowpoint.physics import fluids

__all__ = [
    "density",
    "is_liquid",
    "saturation_temperature",
    "sound_speed",
    "vapour_pressure",
    "viscosity",
    "water_activity",
]

T_LOW, T_HIGH = 273.15, 393.15
"""K, the range of use: what density and viscosity would do to 180 C, the vapour pressure does to 120 C."""

_R = 8.314472
_M_WATER = 18.015268e-3
_S_NORMAL = 0.04 * 35.16504 / 35.0

# IAPWS R13-08 table 2 at atmospheric pressure, J/kg: rows are the powers of the root of the reduced salinity (the
# first one the logarithmic term; its square drops out of the activity of water), columns those of the temperature.
_LOGARITHMIC = (5812.81456626732, 851.226734946706)
_POWERS = {
    3: (-2432.14662381794, -493.407510141682, -43.0664675978042, -10.0227370861875, 0.875600661808945),
    4: (2025.80115603697, 543.835333000098, -68.5572509204491, 49.3667694856254, -17.1397577419788, 2.49697009569508),
    5: (-1091.66841042967, -196.028306689776),
    6: (374.601237877840, 36.7571622995805),
    7: (-48.5891069025409,),
}

# Sharqawy et al. (2010), equations 8 and 23: powers of the temperature in deg C, the salinity in kg/kg.
_WATER_DENSITY = (9.999e2, 2.034e-2, -6.162e-3, 2.261e-5, -4.657e-8)
_SALT_DENSITY = (8.020e2, -2.001, 1.677e-2, -3.060e-5)
_SALT_DENSITY_SQUARE = -1.613e-5
_VISCOUS_A = (1.541, 1.998e-2, -9.52e-5)
_VISCOUS_B = (7.974, -7.561e-2, 4.724e-4)


def _polynomial(coefficients: tuple[float, ...], x: float) -> float:
    value = 0.0
    for coefficient in reversed(coefficients):
        value = value * x + coefficient
    return value


def water_activity(t: float, salinity: float) -> float:
    """Vapour pressure of sea water over that of water, ``exp(M_w (g - S dg/dS)/(R T))``.

    With g the saline part of the Gibbs function, a polynomial in the root of S; the term in S itself drops out.
    Valid to 0.12 kg/kg and 80 C; extrapolated to 120 C, where it lies 0.3 % above Nayar's fit (from memory) at 70 g/kg.
    Source: IAPWS R13-08.
    """
    if salinity == 0.0:
        return 1.0
    tau, x = (t - 273.15) / 40.0, math.sqrt(salinity / _S_NORMAL)
    potential = -0.5 * _polynomial(_LOGARITHMIC, tau) * x * x
    for power, coefficients in _POWERS.items():
        potential += (1.0 - 0.5 * power) * _polynomial(coefficients, tau) * x**power
    return math.exp(_M_WATER * potential / (_R * t))


def vapour_pressure(t: float, salinity: float) -> float:
    """Vapour pressure of sea water: that of water times its activity."""
    if not T_LOW <= t <= T_HIGH:
        return math.nan
    return fluids.vapour_pressure("water", t) * water_activity(t, salinity)


@lru_cache(fluids.MEMORY)
def saturation_temperature(p: float, salinity: float) -> float:
    """Boiling temperature of sea water; the activity hardly moves with temperature, so a few steps settle it."""
    t = 320.0
    for _ in range(5):
        t = fluids.saturation_temperature("water", p / water_activity(t, salinity))
        if not T_LOW - 1.0 <= t <= T_HIGH + 1.0:
            return math.nan
    # The ends themselves belong to the range, whatever the last digit of their pressure.
    return min(max(t, T_LOW), T_HIGH) if T_LOW - 1e-6 <= t <= T_HIGH + 1e-6 else math.nan


def is_liquid(t: float, p: float | None, salinity: float) -> bool:
    """Is sea water above its boiling pressure at this temperature?"""
    return p is None or p >= vapour_pressure(t, salinity) * (1.0 - fluids.SATURATED)


def _at_rest(t: float, salinity: float) -> float:
    """Density at atmospheric pressure, or that of boiling where higher."""
    c = t - 273.15
    return _polynomial(_WATER_DENSITY, c) + salinity * (
        _polynomial(_SALT_DENSITY, c) + _SALT_DENSITY_SQUARE * salinity * c * c
    )


@lru_cache(fluids.MEMORY)
def density(t: float, p: float | None, salinity: float) -> float:
    """Density of sea water, kg/m3: the correlation at low pressure, compressed as much as water is.

    Source: Sharqawy et al. (2010), equation 8, to 0.1 %, 0 to 120 C; compressibility of water by IAPWS-95, which
    overstates that of sea water by a tenth (0.02 % of the density at 60 bar).
    """
    if not (T_LOW <= t <= T_HIGH and is_liquid(t, p, salinity)):
        return math.nan
    low = _at_rest(t, salinity)
    if p is None:
        return low
    boiling = fluids.vapour_pressure("water", t)
    at_rest = max(101325.0, 1.001 * boiling)
    return low * fluids.density("water", t, max(p, boiling)) / fluids.density("water", t, at_rest)


@lru_cache(fluids.MEMORY)
def viscosity(t: float, p: float | None, salinity: float) -> float:
    """Dynamic viscosity of sea water, Pa.s; the effect of pressure is left out.

    Source: Sharqawy et al. (2010), equations 22 and 23, to 1.5 %, 0 to 120 C.
    """
    if not (T_LOW <= t <= T_HIGH and is_liquid(t, p, salinity)):
        return math.nan
    c = t - 273.15
    water = 4.2844e-5 + 1.0 / (0.157 * (c + 64.993) ** 2 - 91.296)
    return water * (1.0 + salinity * (_polynomial(_VISCOUS_A, c) + salinity * _polynomial(_VISCOUS_B, c)))


def sound_speed(t: float, p: float | None, salinity: float = 0.035) -> float:
    """Speed of sound in sea water, m/s; the depth of the equation is taken from the pressure above atmosphere.

    Source: K. V. Mackenzie, J. Acoust. Soc. Am. 70 (1981) 807-812, nine terms, 2 to 30 C, 25 to 40 g/kg (from memory).
    """
    c, s = t - 273.15, 1000.0 * salinity - 35.0
    if not (2.0 <= c <= 30.0 and -10.0 <= s <= 5.0 and is_liquid(t, p, salinity)):
        return math.nan
    depth = 0.0 if p is None else max(p - 101325.0, 0.0) / (1025.0 * 9.80665)
    return (
        1448.96 + 4.591 * c - 5.304e-2 * c**2 + 2.374e-4 * c**3 + 1.340 * s + 1.630e-2 * depth
        + 1.675e-7 * depth**2 - 1.025e-2 * c * s - 7.139e-13 * c * depth**3
    )  # fmt: skip
