"""User units and coherent SI: the two sets of cell units and the factors between, used at the rim only.

Inside, a flow coefficient is the SI coefficient ``Av`` in m2, with ``Q = Av sqrt(dp/rho)``. The constant N1 of
IEC 60534-2-1 (0.1 for Kv, m3/h, kPa and rho0 = 999.1 kg/m3) fixes ``Av = Kv N1 sqrt(rho0/1000)/3600``.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

__all__ = ["DIMENSIONS", "SYSTEMS", "Dimension", "Unit", "dimension"]

RHO0 = 999.1
"""Reference density of the flow coefficient, water at 15 C, kg/m3."""
KV = 0.1 * math.sqrt(RHO0 / 1000.0) / 3600.0
"""One Kv as the SI coefficient Av, m2."""
CV_PER_KV = 1.156
"""Cv of a valve whose Kv is one."""

INCH = 0.0254
POUND = 0.45359237
GRAVITY = 9.80665
PSI = POUND * GRAVITY / INCH**2
US_GALLON = 231.0 * INCH**3

SYSTEMS = ("metric", "us")
"""The two sets of units: of the functions LP_ and of their twins LPU_."""


@dataclass(frozen=True, slots=True)
class Unit:
    """``SI = value * factor + offset``; ``label`` is how the unit is written to the user."""

    label: str
    factor: float = 1.0
    offset: float = 0.0

    def to_si(self, value: float) -> float:
        return value * self.factor + self.offset

    def from_si(self, value: float) -> float:
        return (value - self.offset) / self.factor

    @property
    def plain(self) -> bool:
        """Is the unit the SI unit itself?"""
        return self.factor == 1.0 and self.offset == 0.0


@dataclass(frozen=True, slots=True)
class Dimension:
    """A kind of quantity with its unit in each set."""

    name: str
    metric: Unit
    us: Unit

    def unit(self, system: str) -> Unit:
        """The unit in ``system``: one of :data:`SYSTEMS`, or ``any``, where every unit cancels and none is named."""
        if system == "any":
            return self.metric if self.same else Unit("")
        return self.metric if system == "metric" else self.us

    @property
    def same(self) -> bool:
        """Do both sets use one unit?"""
        return self.metric == self.us


def _same(name: str, label: str = "", factor: float = 1.0) -> Dimension:
    return Dimension(name, Unit(label, factor), Unit(label, factor))


DIMENSIONS: dict[str, Dimension] = {
    item.name: item
    for item in (
        Dimension("pressure", Unit("bar", 1e5), Unit("psi", PSI)),
        Dimension("temperature", Unit("deg C", 1.0, 273.15), Unit("deg F", 1 / 1.8, 459.67 / 1.8)),
        Dimension("flow", Unit("m3/h", 1 / 3600.0), Unit("US gal/min", US_GALLON / 60.0)),
        Dimension("size", Unit("mm", 1e-3), Unit("in", INCH)),
        Dimension("density", Unit("kg/m3"), Unit("lb/ft3", POUND / 0.3048**3)),
        Dimension("coefficient", Unit("Kv", KV), Unit("Cv", KV / CV_PER_KV)),
        Dimension("elevation", Unit("m"), Unit("ft", 0.3048)),
        Dimension("velocity", Unit("m/s"), Unit("ft/s", 0.3048)),
        Dimension("stress", Unit("MPa", 1e6), Unit("psi", PSI)),
        _same("viscosity", "mPa.s", 1e-3),
        _same("salinity", "g/kg", 1e-3),
        _same("ratio"),
        _same("travel", "%", 1e-2),
        _same("level", "dB(A)"),
        # The value of a unit conversion and the members of a free table carry whatever unit their user means.
        _same("free"),
    )
}


def dimension(name: str) -> Dimension:
    """The dimension of this name; KeyError for an unknown one."""
    return DIMENSIONS[name]
