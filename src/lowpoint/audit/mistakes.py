"""The usual mistakes of data sheets, each a formula for what the vendor would have computed with.

A mistake changes inputs (a pressure without the atmosphere), an equation (FF left out) or only what is printed (Kv
under the name Cv). :func:`catalogue` gives those that a sheet allows, likeliest first: the order is that of common
practice, from memory. Which pairs are one and the same number is for :mod:`lowpoint.audit.suspecting` to find.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from lowpoint.audit.equations import State
from lowpoint.audit.inputs import Inputs, property_of, typical
from lowpoint.kinds import Floats
from lowpoint.physics.fittings import fitting_losses
from lowpoint.physics.site import SEA_LEVEL
from lowpoint.physics.typical import resolve_style
from lowpoint.units import CV_PER_KV, GRAVITY, POUND, PSI, RHO0, US_GALLON

__all__ = ["Mistake", "catalogue"]

Apply = Callable[[State, Any], None]
"""Changes the rows of a state that make the mistake."""


PROPERTIES = frozenset({"pv", "density", "pc", "dp"})
"""Printed right as often as not on a sheet that was computed with another."""


@dataclass(frozen=True, eq=False)
class Mistake:
    """One mistake, defined by its formula."""

    key: str
    phrase: str
    """What was done, to follow "if"."""
    formula: str
    family: str
    """What it is about; two that share a word here are the same thing done twice, and never made together."""
    apply: Apply = field(repr=False)
    spares: frozenset[str] = PROPERTIES
    """Claims that may be right all the same: a sheet often shows the right property and was computed with another."""
    turn: int = 1
    """Which comes first when two are made: 0 a reading in the wrong unit, 1 most, 2 what follows from other inputs."""

    def goes_with(self, other: Mistake) -> bool:
        """Can both be made on one sheet?"""
        return not set(self.family.split()) & set(other.family.split())


PRESSURES = ("p1", "p2")
GRAVITY_BAR = GRAVITY * 1e4  # kgf/cm2
IMPERIAL_GALLON = 0.00454609
NOMINAL_BORES = (15, 20, 25, 32, 40, 50, 65, 80, 100, 125, 150, 200, 250, 300, 350, 400, 450, 500, 600, 700, 800, 900,
                 1000, 1200)  # fmt: skip
"""mm, of the usual nominal sizes (ISO 6708)."""


def catalogue(inputs: Inputs) -> tuple[Mistake, ...]:
    """The mistakes that this sheet allows, likeliest first."""
    makers = (_references, _printed, _vapour, _recovery, _fittings, _liquid, _equations, _readings, _units, _openings)
    return tuple(mistake for maker in makers for mistake in maker(inputs))


# --- what a mistake does ------------------------------------------------------------------------------------------
def _adds(names: tuple[str, ...], amount: Any) -> Apply:
    def apply(state: State, rows: Any) -> None:
        for name in names:
            state[name][rows] += amount

    return apply


def _times(names: tuple[str, ...], factor: Any) -> Apply:
    def apply(state: State, rows: Any) -> None:
        for name in names:
            state[name][rows] *= factor

    return apply


def _sets(**values: Any) -> Apply:
    def apply(state: State, rows: Any) -> None:
        for name, value in values.items():
            state[name][rows] = value

    return apply


def _copied(name: str, place: int) -> Apply:
    """The value of one case in all of them, with the rounding that it is shown with."""

    def apply(state: State, rows: Any) -> None:
        state[name][rows] = state[name][rows][:, [place]]

    return apply


def _scaled(inputs: Inputs, factor: float) -> Apply:
    """All pressures in another unit, each from the zero that it is shown with."""
    shown = {name: inputs.reading.of(name, inputs.cases[0]) for name in (*PRESSURES, "pv")}
    zeros = {name: inputs.reading.atmosphere if value is not None and value.gauge else 0.0
             for name, value in shown.items()}  # fmt: skip

    def apply(state: State, rows: Any) -> None:
        for name, zero in zeros.items():
            state[name][rows] = (state[name][rows] - zero) * factor + zero

    return apply


# --- gauge and absolute -------------------------------------------------------------------------------------------
def _references(inputs: Inputs) -> Iterator[Mistake]:
    atmosphere = inputs.reading.atmosphere
    both = "zero_of_p1 zero_of_p2"
    which = (("both", PRESSURES, both, "p1 and p2"), ("p1", ("p1",), "zero_of_p1", "p1"),
             ("p2", ("p2",), "zero_of_p2", "p2"))  # fmt: skip
    for key, names, family, words in which:
        were = "were" if len(names) > 1 else "was"
        yield Mistake(f"gauge_as_absolute_{key}", f"{words} {were} read as gauge and used as absolute",
                      "p - atmosphere", family, _adds(names, -atmosphere))  # fmt: skip
    for key, names, family, words in which:
        yield Mistake(f"atmosphere_twice_{key}", f"the atmosphere was added to {words} once more", "p + atmosphere",
                      family, _adds(names, atmosphere))  # fmt: skip
    if abs(atmosphere - SEA_LEVEL) > 0.001 * SEA_LEVEL:
        yield Mistake("atmosphere_of_sea_level", "the atmosphere of sea level was taken instead of the site's",
                      "p - atmosphere + 101 325 Pa", both, _adds(PRESSURES, SEA_LEVEL - atmosphere))  # fmt: skip
    if abs(atmosphere - 1e5) > 100.0:
        yield Mistake("atmosphere_of_one_bar", "the atmosphere was taken as 1 bar", "p - atmosphere + 1 bar", both,
                      _adds(PRESSURES, 1e5 - atmosphere))  # fmt: skip


# --- right, but printed under another name ------------------------------------------------------------------------
def _printed(inputs: Inputs) -> Iterator[Mistake]:
    yield Mistake("cv_printed_as_kv", "the number is Cv, printed as Kv", "coefficient 1.156", "printed_coefficient",
                  _times(("coefficient_times",), CV_PER_KV))  # fmt: skip
    yield Mistake("kv_printed_as_cv", "the number is Kv, printed as Cv", "coefficient/1.156", "printed_coefficient",
                  _times(("coefficient_times",), 1.0 / CV_PER_KV))  # fmt: skip
    for code, form, formula in ((1.0, "upstream", "(p1-pv)/(p1-p2)"), (2.0, "downstream", "(p2-pv)/(p1-p2)"),
                                (3.0, "xf", "(p1-p2)/(p1-pv)")):  # fmt: skip
        yield Mistake(f"index_{form}", f"the index is {formula}", formula, "form", _sets(index_form=code))
    yield Mistake("pv_printed_gauge", "pv was printed as gauge", "pv - atmosphere", "printed_pv",
                  _adds(("pv_shown",), -inputs.reading.atmosphere))  # fmt: skip


# --- vapour pressure ----------------------------------------------------------------------------------------------
def _vapour(inputs: Inputs) -> Iterator[Mistake]:
    for key, phrase, t, share in _other_temperatures(inputs):
        pv = _pv_at(inputs, t)
        if np.isfinite(pv).any():
            yield Mistake(f"pv_at_{key}", f"pv was taken at {phrase}", f"pv at {phrase}", "pv",
                          _boils(pv, inputs.columns["pv_fluid"], share))  # fmt: skip
    if inputs.count > 1:
        for place, case in enumerate(inputs.cases):
            pv = inputs.columns["pv"][place]
            if np.isfinite(pv) and not np.isfinite(inputs.columns["t"]).all():
                yield Mistake(f"pv_of_{case}", f"pv was taken from case {case}", f"pv of {case}", "pv",
                              _copied("pv", place))  # fmt: skip
    for unit, factor in (("psi taken as bar", 1e5 / PSI), ("bar taken as psi", PSI / 1e5)):
        yield Mistake(f"pv_{unit.replace(' ', '_')}", f"pv in {unit}", f"pv {factor:.4g}", "pv",
                      _times(("pv", "pv_fluid"), factor))  # fmt: skip
    yield Mistake("pv_left_out", "pv was left out", "pv = 0", "pv", _sets(pv=0.0))


def _boils(pv: Floats, right: Floats, share: float) -> Apply:
    """Another vapour pressure, with ``share`` of the rounding that the temperature shown gives to the right one."""

    def apply(state: State, rows: Any) -> None:
        wrong = pv * (state["pv_fluid"][rows] / right) ** share
        state["pv"][rows], state["pv_fluid"][rows] = wrong, wrong

    return apply


def _pv_at(inputs: Inputs, t: Floats) -> Floats:
    if inputs.fluid is None:
        return np.full(inputs.count, np.nan)
    return property_of("pv", inputs.fluid, t, inputs.columns["p1"], inputs.columns["salinity"])


def _other_temperatures(inputs: Inputs) -> Iterator[tuple[str, str, Floats, float]]:
    """Temperatures that are taken by mistake: round ones of a cold liquid, other cases', other scales; each with how
    many degrees it moves by where the right one does by one."""
    t = inputs.columns["t"]
    if np.isnan(t).all():
        return
    for celsius in (20.0, 15.0, 25.0):
        if not np.allclose(t, celsius + 273.15, atol=0.5):
            yield f"{celsius:.0f}_c", f"{celsius:.0f} deg C", np.full(len(t), celsius + 273.15), 0.0
    for place, case in enumerate(inputs.cases):
        if np.isfinite(t[place]) and np.nanmax(np.abs(t - t[place])) > 0.05:
            yield f"t_of_{case}", f"the temperature of case {case}", np.full(len(t), t[place]), 1.0
    shown = {"deg F": (t - 459.67 / 1.8) * 1.8, "K": t}.get(inputs.units.get("t", ""), t - 273.15)
    degree = 1.8 if inputs.units.get("t", "") == "deg F" else 1.0
    scales = {"deg C": (shown + 273.15, 1.0), "deg F": ((shown + 459.67) / 1.8, 1.0 / 1.8), "K": (shown, 1.0)}
    for unit, (read, step) in scales.items():
        if np.nanmax(np.abs(read - t)) > 0.05 and np.nanmin(read) > 250.0:
            yield f"t_as_{unit.replace(' ', '_')}", f"the temperature read in {unit}", read, degree * step


# --- recovery -----------------------------------------------------------------------------------------------------
def _recovery(inputs: Inputs) -> Iterator[Mistake]:
    for key, phrase, value in _other_recoveries(inputs):
        fl = inputs.columns["fl"]
        if math.isfinite(value) and not np.allclose(fl, value, atol=1e-6):
            yield Mistake(f"fl_{key}", f"FL was taken as {phrase}", f"FL = {value:g}", "FL", _sets(fl=value))
    yield Mistake("ratio_not_squared", "the ratio FLP/FP was not squared", "(FLP/FP)^1 (p1 - FF pv)", "power",
                  _sets(recovery_power=1.0))  # fmt: skip
    yield Mistake("fl_not_squared", "FL was not squared", "FL in place of FL^2", "power", _unsquared,
                  PROPERTIES | {"flp"})  # fmt: skip
    yield Mistake("cold_index_at_choking", "the index at choking was taken as 1/FL^2", "1/FL^2", "choking",
                  _sets(cold_recovery=1.0))  # fmt: skip


def _unsquared(state: State, rows: Any) -> None:
    """FL for FL^2 is the root of FL in the standard's equations; the fittings' part is as it was."""
    state["fl"][rows] = np.sqrt(state["fl"][rows])


def _other_recoveries(inputs: Inputs) -> Iterator[tuple[str, str, float]]:
    fl = inputs.columns["fl"]
    for place, case in enumerate(inputs.cases):
        yield f"of_{case}", f"that of case {case}, {fl[place]:g}", float(fl[place])
    style = inputs.words["style"]
    if style:
        try:
            known = resolve_style(style)
        except ValueError:
            known = ""
        ways = ("open", "close", "inward", "outward", "either") if known else ()
        values = {typical(inputs.words, "fl", way): way for way in reversed(ways)}
        for value, way in values.items():
            yield f"typical_{way}", f"the typical {value:g} of the style at rated travel", value
    yield "default_0.9", "0.90, the usual catalogue value of globe valves", 0.9


# --- fittings and sizes -------------------------------------------------------------------------------------------
def _fittings(inputs: Inputs) -> Iterator[Mistake]:
    c = inputs.columns
    if not np.isnan(c["valve_size"]).all():
        yield Mistake("no_fittings", "the reducers were left out (FP = 1)", "FP = 1, FLP = FL", "fittings",
                      _sets(bare=1.0))  # fmt: skip
        if not np.isnan(c["rated"]).all():
            yield Mistake("rated_in_fp", "FP and FLP were taken at the rated coefficient", "FP(C_rated)",
                          "fittings", _rated_in_factors)  # fmt: skip
        yield Mistake("p2_before_expander", "p2 was taken before the expander", "p2 - (KB2 - K2) rho v^2/2",
                      "place_of_p2", _before_expander, turn=2)  # fmt: skip
    for names, phrase in ((("pipe_in", "pipe_out"), "the pipes"), (("pipe_in",), "the inlet pipe"),
                          (("pipe_out",), "the outlet pipe")):  # fmt: skip
        nominal = [_nominal(c[name]) for name in names]
        if any(np.nanmax(np.abs(n / c[x] - 1.0), initial=0.0) > 1e-4 for n, x in zip(nominal, names, strict=True)):
            yield Mistake(f"nominal_{'_'.join(names)}", f"the nominal size of {phrase} was taken for the bore",
                          "D = DN", "bore", _sets(**dict(zip(names, nominal, strict=True))))  # fmt: skip


def _nominal(bore: Floats) -> Floats:
    """The nominal size next to a bore, m."""
    sizes = np.array(NOMINAL_BORES) / 1000.0
    nearest = sizes[np.argmin(np.abs(np.log(np.nan_to_num(bore, nan=1.0)[:, None] / sizes)), axis=1)]
    return np.where(np.isnan(bore) | (np.abs(nearest / bore - 1.0) > 0.15), bore, nearest)


def _rated_in_factors(state: State, rows: Any) -> None:
    state["fitted_coefficient"][rows] = state["rated"][rows]


def _before_expander(state: State, rows: Any) -> None:
    """The static pressure in the valve's outlet: what the expander regains is not there yet."""
    flat = [state[name][rows].ravel() for name in ("valve_size", "pipe_in", "pipe_out")]
    total, inlet = fitting_losses(*flat)
    outlet = np.reshape(total - inlet, state["p2"][rows].shape)
    state["p2"][rows] += outlet * state["flow"][rows] ** 2 * state["density"][rows]


# --- liquid and flow ----------------------------------------------------------------------------------------------
def _liquid(inputs: Inputs) -> Iterator[Mistake]:
    c = inputs.columns
    yield Mistake("relative_density_1", "the relative density was taken as 1", "density = 999.1 kg/m3", "density",
                  _sets(density=RHO0, density_fluid=RHO0))  # fmt: skip
    cold = _cold_density(inputs)
    if not np.isnan(c["mass_flow"]).all():
        yield Mistake("mass_as_volume", "the mass flow was taken as volume (t/h as m3/h)", "Q = W/1000 kg/m3", "flow",
                      _times(("flow",), c["density"] / 1000.0))  # fmt: skip
    yield Mistake("flow_at_15_c", "the flow was taken at 15 deg C instead of flowing", "Q density/density(15 C)",
                  "flow", _times(("flow",), c["density"] / cold))  # fmt: skip
    yield Mistake("density_at_15_c", "the density was taken at 15 deg C", "density(15 C)", "density",
                  _sets(density=cold, density_fluid=cold))  # fmt: skip
    if not np.isnan(c["viscosity"]).all():
        yield Mistake("cst_as_cp", "the viscosity in cSt was taken as cP", "mu 1000/density", "viscosity",
                      _times(("viscosity",), 1000.0 / c["density"]))  # fmt: skip
        yield Mistake("cp_as_cst", "the viscosity in cP was taken as cSt", "mu density/1000", "viscosity",
                      _times(("viscosity",), c["density"] / 1000.0))  # fmt: skip


def _cold_density(inputs: Inputs) -> Floats:
    """Density at 15 deg C and no pressure to speak of; of an unknown liquid none."""
    fluid = inputs.fluid
    if fluid in (None, "water"):
        return np.full(inputs.count, RHO0 if fluid else np.nan)
    no_pressure = np.full(inputs.count, np.nan)
    cold = np.full(inputs.count, 288.15)
    return property_of("density", str(fluid), cold, no_pressure, inputs.columns["salinity"])


# --- equations ----------------------------------------------------------------------------------------------------
def _equations(inputs: Inputs) -> Iterator[Mistake]:
    yield Mistake("ff_left_out", "FF was left out", "FF = 1", "FF", _sets(ff=1.0), PROPERTIES | {"ff"})
    yield Mistake("choking_without_pv", "pv was left out of the choked drop", "p1 in place of p1 - FF pv", "FF",
                  _sets(ff=0.0), PROPERTIES | {"ff"})  # fmt: skip
    yield Mistake("ff_cold", "FF was taken as 0.96, its value for cold liquids", "FF = 0.96", "FF", _sets(ff=0.96))


# --- readings -----------------------------------------------------------------------------------------------------
def _readings(inputs: Inputs) -> Iterator[Mistake]:
    c = inputs.columns
    drop = c["p1"] - c["p2"]
    if np.nanmax(np.abs(c["dp"] / drop - 1.0), initial=0.0) > 1e-3:
        yield Mistake("stated_drop", "the stated drop was used instead of p1 - p2", "p2 = p1 - dp", "drop",
                      _by_stated_drop)  # fmt: skip
    if inputs.count > 1:
        for name, phrase in (("flow", "the flow"), ("p1", "p1"), ("p2", "p2"), ("density", "the density")):
            for place, case in enumerate(inputs.cases):
                value = c[name][place]
                if np.isfinite(value) and np.nanmax(np.abs(c[name] / value - 1.0)) > 1e-3:
                    yield Mistake(f"{name}_of_{case}", f"{phrase} was taken from case {case}", f"{name} of {case}",
                                  f"case_{name}", _copied(name, place))  # fmt: skip


def _by_stated_drop(state: State, rows: Any) -> None:
    state["p2"][rows] = state["p1"][rows] - state["dp"][rows]


# --- units --------------------------------------------------------------------------------------------------------
def _units(inputs: Inputs) -> Iterator[Mistake]:
    us, metric = US_GALLON * 60.0, 1.0
    for key, phrase, factor in (
        ("gpm_as_m3h", "the flow in US gal/min was taken as m3/h", metric / us),
        ("m3h_as_gpm", "the flow in m3/h was taken as US gal/min", us / metric),
        ("us_as_imperial", "US gallons were taken as imperial ones", IMPERIAL_GALLON / US_GALLON),
        ("imperial_as_us", "imperial gallons were taken as US ones", US_GALLON / IMPERIAL_GALLON),
    ):
        yield Mistake(key, phrase, f"Q {factor:.4g}", "unit_of_flow", _times(("flow",), factor), turn=0)
    shown = inputs.units.get("p1", "")
    for unit, other, factor in (("kgf/cm2", "bar", 1e5 / GRAVITY_BAR), ("bar", "kgf/cm2", GRAVITY_BAR / 1e5),
                                ("psi", "bar", 1e5 / PSI), ("bar", "psi", PSI / 1e5)):  # fmt: skip
        if shown.replace(" ", "").startswith(unit):
            yield Mistake(f"{unit}_as_{other}".replace("/", ""), f"pressures in {unit} were taken as {other}",
                          f"p {factor:.4g}", "unit_of_pressure", _scaled(inputs, factor), turn=0)  # fmt: skip
    if inputs.units.get("density", "") == "lb/ft3":
        factor = 0.3048**3 / POUND
        yield Mistake("lb_ft3_as_kg_m3", "the density in lb/ft3 was taken as kg/m3", f"density {factor:.4g}",
                      "density", _times(("density",), factor))  # fmt: skip


# --- openings -----------------------------------------------------------------------------------------------------
def _openings(inputs: Inputs) -> Iterator[Mistake]:
    yield Mistake("other_characteristic", "the other inherent characteristic was used", "linear for equal percentage, "
                  "or the reverse", "characteristic", _sets(other_characteristic=1.0))  # fmt: skip
    for key, phrase, factor in (("cv_over_kvs", "required Cv was set against rated Kv", CV_PER_KV),
                                ("kv_over_cvs", "required Kv was set against rated Cv", 1.0 / CV_PER_KV)):  # fmt: skip
        yield Mistake(key, phrase, f"C/C_rated {factor:.4g}", "ratio", _times(("travel_ratio_times",), factor))
    for value in (30.0, 50.0):
        if not np.allclose(inputs.columns["rangeability"], value):
            yield Mistake(f"rangeability_{value:.0f}", f"the rangeability was taken as {value:.0f}", f"R = {value:.0f}",
                          "rangeability", _sets(rangeability=value))  # fmt: skip
