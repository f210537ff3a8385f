"""What each case of a sheet gives to compute with: what stands on it, what was computed, what had to be assumed.

One element a case, coherent SI, NaN where there is nothing. A stated vapour pressure, density or critical pressure is
used as it stands (its own truth is a claim of its own), so that one wrong property is not charged to every result.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from lowpoint.audit import water
from lowpoint.audit.model import SheetReading, Value
from lowpoint.audit.words import folded
from lowpoint.kinds import Floats
from lowpoint.physics import liquids
from lowpoint.physics.names import is_salty, resolve
from lowpoint.physics.typical import resolve_style, typical_value
from lowpoint.physics.unitnames import meaning
from lowpoint.units import INCH, KV

__all__ = ["NUMBERS", "Inputs", "inputs_of", "is_possible", "property_of", "slope"]

NUMBERS = (
    "flow", "mass_flow", "p1", "p2", "dp", "pv", "pc", "density", "t", "viscosity", "kinematic", "fl", "fd", "xfz",
    "valve_size", "pipe_in", "pipe_out", "pipe_wall", "rated", "rangeability", "salinity", "sound_speed",
    "bore_length", "holes", "plates",
)  # fmt: skip
WORDS = ("fluid", "style", "direction", "characteristic", "trim")
ON_SHEET, COMPUTED, CONSTANT, ASSUMED, MISSING = "sheet", "computed", "constant", "assumed", ""
NOMINAL = {"DN": 1e-3, "NPS": INCH}
"""Sizes by name: exact, but not the inside diameter of a pipe."""
COARSEST = 0.005
"""No input is taken as rounded by more than this share of it: 13 bar is a round number to size with, not a rounding of
13.4. (Half of its last digit would be 4 %, and hide most mistakes.)"""
WATER_PC = 22.064e6
"""Critical pressure of water, Pa (IAPWS R2-83): spares the property library on the commonest sheet."""


@dataclass(frozen=True, eq=False)
class Inputs:
    """The inputs of all cases of one sheet."""

    reading: SheetReading
    cases: tuple[str, ...]
    columns: dict[str, Floats]
    halves: dict[str, Floats]
    """Half of the last digit shown, in SI; 0 for what is not shown."""
    source: dict[str, tuple[str, ...]]
    """Of each number in each case: ``sheet``, ``computed``, ``constant`` (of the named liquid), ``assumed``, or empty
    where it is missing."""
    words: dict[str, str | None]
    units: dict[str, str]
    """Unit in which the sheet shows a number; absent for what it does not show."""

    @property
    def count(self) -> int:
        return len(self.cases)

    @property
    def fluid(self) -> str | None:
        """Canonical name of the liquid, None for an unknown one."""
        return _resolved(self.words["fluid"])

    def case_of(self, value: Value) -> int | None:
        """Column of a value's case; None for one that holds for the item."""
        return self.cases.index(value.case) if value.case in self.cases else None

    def stated(self, name: str) -> bool:
        """Does the sheet give this number in every case?"""
        return all(source == ON_SHEET for source in self.source[name])


def slope(value: Value) -> float:
    """SI over shown unit: what one unit of the shown number is in SI; gauge and ice point drop out."""
    if not value.unit or value.unit in NOMINAL:
        return NOMINAL.get(value.unit, 1.0)
    try:
        known = meaning(value.unit)
    except ValueError:
        return 1.0  # dB(A) and the like are compared as shown
    return known.factor * (KV if known.dimension == "flow coefficient" else 1.0)


@lru_cache(512)
def _resolved(text: str | None) -> str | None:
    try:
        return None if text is None else resolve(text)
    except ValueError:
        return None


def inputs_of(reading: SheetReading) -> Inputs:
    """The inputs of every case of a sheet, completed as far as the sheet itself allows."""
    cases = reading.cases or ("",)
    blank = len(cases)
    columns = {name: np.full(blank, np.nan) for name in (*NUMBERS, "pv_fluid", "density_fluid")}
    halves = {name: np.zeros(blank) for name in columns}
    source = {name: [MISSING] * blank for name in columns}
    words = {name: _word(reading, name, cases) for name in WORDS}
    found = Inputs(reading, cases, columns, halves, {}, words, {})
    for name in NUMBERS:
        for place, case in enumerate(cases):
            value = reading.of(name, case)
            if value is not None and is_possible(value):
                columns[name][place] = value.si
                halves[name][place] = _room(value)
                found.units.setdefault(name, value.unit)
                source[name][place] = _certain(reading, value)
    for step in (_pressures, _properties, _flows, _viscosity, _valve):
        step(found, source)
    found.source.update({name: tuple(words) for name, words in source.items()})
    return found


def _room(value: Value) -> float:
    """Half of the last digit of an input, SI; none of a nominal size, and no more than :data:`COARSEST` of a number
    without a zero of its own scale."""
    if value.unit in NOMINAL:
        return 0.0
    half = value.half * slope(value)
    return half if value.quantity == "t" else min(half, COARSEST * abs(value.si))


def is_possible(value: Value) -> bool:
    """Can a number be an input at all? All but a salinity are above 0, temperatures and pressures on their absolute
    scales."""
    return math.isfinite(value.si) and (value.si > 0.0 or (value.quantity == "salinity" and value.si >= 0.0))


def _word(reading: SheetReading, name: str, cases: tuple[str, ...]) -> str | None:
    found = [value for case in cases if (value := reading.of(name, case)) is not None]
    return next((value.word or value.raw for value in found if value.word or value.raw), None)


def _certain(reading: SheetReading, value: Value) -> str:
    """A gauge pressure is as certain as the atmosphere, one that says neither is an assumption, and so is the inside
    diameter of a pipe of which only the nominal size is given."""
    if value.gauge and value.quantity in ("p1", "p2", "pv"):
        return ASSUMED if reading.atmosphere_from == "assumed" else ON_SHEET
    if value.gauge is None and value.quantity in ("p1", "p2"):
        return ASSUMED
    return ASSUMED if value.quantity in ("pipe_in", "pipe_out") and value.unit in NOMINAL else ON_SHEET


Source = dict[str, list[str]]


def _fill(found: Inputs, source: Source, name: str, numbers: Floats, word: str, halves: Floats | None = None) -> None:
    """Numbers where the sheet has none, and where they came from."""
    column = found.columns[name]
    for place in np.flatnonzero(np.isnan(column) & ~np.isnan(numbers)):
        column[place] = numbers[place]
        source[name][place] = word
        if halves is not None:
            found.halves[name][place] = halves[place]


def _pressures(found: Inputs, source: Source) -> None:
    c, h = found.columns, found.halves
    for name, other, sign in (("p2", "p1", -1.0), ("p1", "p2", 1.0)):
        where = np.isnan(c[name]) & ~np.isnan(c[other]) & ~np.isnan(c["dp"])
        c[name][where] = (c[other] + sign * c["dp"])[where]
        for place in np.flatnonzero(where):
            source[name][place] = source[other][place]
            h[name][place] = h["dp"][place]


def property_of(name: str, fluid: str, t: Floats, p: Floats, salinity: Floats) -> Floats:
    """Vapour pressure or density of a liquid, NaN where there is none; each distinct state is computed once."""
    if np.isnan(t).all():
        return np.full(len(t), np.nan)
    if fluid == liquids.WATER_LIKE and (t < water.COLDEST).any():
        liquid = np.where(t < water.COLDEST, np.nan, t)  # ice: loading a library to learn that would take seconds
        return property_of(name, fluid, liquid, p, salinity)
    if water.covers(fluid, t, p):
        return np.asarray(water.vapour_pressure(t) if name == "pv" else water.density(t, p))
    salt = np.where(np.isnan(salinity), liquids.NORMAL_SALINITY / 1000.0, salinity)
    one: Callable[..., float] = liquids.vapour_pressure_of
    if name == "pv":
        rows = [one(fluid, x, s) if x == x else math.nan for x, s in zip(t.tolist(), salt.tolist(), strict=True)]
        return np.array(rows, float)
    # The pressure enters the density only where it is known and keeps the liquid one.
    pressures = [None if x != x else x for x in p.tolist()]
    rows = [
        _density(fluid, x, y, s) if x == x else math.nan
        for x, y, s in zip(t.tolist(), pressures, salt.tolist(), strict=True)
    ]
    return np.array(rows, float)


@lru_cache(4096)
def _density(fluid: str, t: float, p: float | None, salt: float) -> float:
    pressure = np.array([math.nan if p is None else p])
    return float(np.asarray(liquids.liquid_density(np.array([fluid]), np.array([t]), pressure, np.array([salt])))[0])


def _properties(found: Inputs, source: Source) -> None:
    fluid = found.fluid
    if fluid is None:
        return
    c, h = found.columns, found.halves
    for name, own in (("pv", "pv_fluid"), ("density", "density_fluid")):
        state = (c["p1"], c["salinity"])
        c[own] = property_of(name, fluid, c["t"], *state)
        warmer = property_of(name, fluid, c["t"] + h["t"], *state)
        h[own] = np.nan_to_num(np.abs(warmer - c[own]))
        source[own] = [COMPUTED] * found.count
        _fill(found, source, name, c[own], COMPUTED, h[own])
    if np.isnan(c["pc"]).any():
        _fill(found, source, "pc", np.full(found.count, _critical(fluid)), CONSTANT)


def _critical(fluid: str) -> float:
    if fluid == liquids.WATER_LIKE or is_salty(fluid):
        return WATER_PC
    return float(np.asarray(liquids.critical_pressure(np.array([fluid])))[0])


def _flows(found: Inputs, source: Source) -> None:
    c, h = found.columns, found.halves
    lacking = np.isnan(c["flow"])
    _fill(found, source, "flow", c["mass_flow"] / c["density"], ON_SHEET, h["mass_flow"] / c["density"])
    for place in np.flatnonzero(lacking & ~np.isnan(c["flow"])):
        source["flow"][place] = source["density"][place]


def _viscosity(found: Inputs, source: Source) -> None:
    """The dynamic viscosity from the kinematic one."""
    c, h = found.columns, found.halves
    _fill(found, source, "viscosity", c["kinematic"] * c["density"], ON_SHEET, h["kinematic"] * c["density"])


def _valve(found: Inputs, source: Source) -> None:
    """Line size where the sheet names no pipe, and typical FL and Fd of the style where it gives none."""
    c, h = found.columns, found.halves
    if "valve_size" in found.units:
        _fill(found, source, "pipe_in", c["valve_size"], ASSUMED)
        _fill(found, source, "pipe_out", c["pipe_in"], ON_SHEET if _both_pipes(found) else ASSUMED, h["pipe_in"])
    for name in ("pipe_in", "pipe_out"):
        size = found.reading.of(name, None)
        if size is not None and size.nominal:  # it names a pipe; the bore depends on the wall
            source[name] = [ASSUMED] * found.count
    for name in ("fl", "fd"):
        if np.isnan(c[name]).any() and found.words["style"]:
            _fill(found, source, name, np.full(found.count, typical(found.words, name)), ASSUMED)


def _both_pipes(found: Inputs) -> bool:
    """Does the sheet give one bore of the pipe, and not that of the inlet?"""
    stated = found.reading.of("pipe_in", None)
    return stated is not None and not stated.nominal and not folded(stated.label).tokens & {"inlet", "@d1"}


def typical(words: dict[str, str | None], name: str, direction: str | None = None) -> float:
    """Typical FL or Fd of the sheet's style, NaN where the style is unknown or its direction decides and is not."""
    try:
        style = resolve_style(words["style"] or "")
    except ValueError:
        return math.nan
    return float(np.asarray(typical_value(style, name, direction or words["direction"]))[0])
