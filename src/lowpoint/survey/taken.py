"""What a survey took where the list is silent, and what its answers rest on: defaults, definitions, sources."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from lowpoint.physics.liquids import NORMAL_SALINITY
from lowpoint.physics.names import is_salty, resolve
from lowpoint.problems import counted
from lowpoint.registry import functions
from lowpoint.sources import SOURCES
from lowpoint.survey.limiting import LIMITS, stated
from lowpoint.survey.model import Survey, absent
from lowpoint.units import dimension

__all__ = ["CAUTION", "DEFINITIONS", "atmospheres", "citations", "defaults"]

CAUTION = (
    "Lowpoint supports a qualified engineer. Vendor test data, site rules, local codes and licensed practice come "
    "first. Typical values and estimates are screening values, and say so. Pressures are absolute. A throat pressure "
    "above the vapour pressure is never evidence of no cavitation: only the limits judge."
)
SITES = 20
"""Elevations that are shown one by one."""

DEFINITIONS = (
    ("Index, upstream form", "sigma = (p1-pv)/(p1-p2). Every index and limit of the results is in this form, but for "
     "the one column in the form of the list."),
    ("Index, downstream form", "(p2-pv)/(p1-p2) = sigma - 1"),
    ("Index, form xF", "xF = (p1-p2)/(p1-pv) = 1/sigma"),
    ("Incipient limit", "Index at which cavitation begins to be heard or measured. Without it no case is clear."),
    ("Constant limit", "Index at which cavitation is steady."),
    ("Damage limit", "Index at which damage begins."),
    ("Vibration limit", "Index of the strongest vibration."),
    ("Choked limit", "Index at the choked drop: (p1-pv) over that drop. Never scaled."),
    ("Limit here", "A stated limit carried to the size and pressure of the case where its test size and head and its "
     "exponents are given, then to the valve between its reducers."),
    ("Margin", "Index over the limit to keep, less one. At or below 0 the limit is crossed."),
    ("Limit kept", "The one that the list names where it is given; else the mildest that is given."),
    ("Fails", "Flashing, choked, at or below the limit kept, or the flow does not pass the valve or the plates."),
    ("Unjudged", "No incipient limit is given: the state is not judged clear however high the index."),
    ("Basis", "tested (somebody gave it), published (a cited source), estimated (a formula). A verdict bears the "
     "weakest one that it rests on."),
    ("Throat pressure", "In the vena contracta by the recovery factor, not below FF pv."),
    ("Vapour after it, by mass", "Equilibrium at the outlet pressure and the inlet's enthalpy; 0 with p2 above pv."),
    ("Outlet velocity", "In the pipe behind, of the homogeneous mixture where it flashes."),
)  # fmt: skip


def atmospheres(survey: Survey, system: str) -> list[tuple[str, str]]:
    """Barometric pressure by elevation, where one was used; the highest number of cases first."""
    cases = survey.cases
    pairs: dict[tuple[float, float], int] = {}
    for height, pressure in zip(cases.elevation.tolist(), cases.atmosphere.tolist(), strict=True):
        if pressure == pressure:
            pairs[height, pressure] = pairs.get((height, pressure), 0) + 1
    metres, bars = dimension("elevation").unit(system), dimension("pressure").unit(system)
    found = []
    for (height, pressure), count in sorted(pairs.items(), key=lambda pair: -pair[1])[:SITES]:
        where = "as given" if height != height else \
            f"of the standard atmosphere at {metres.from_si(height):,.0f} {metres.label}"  # fmt: skip
        found.append((f"{bars.from_si(pressure):.4f} {bars.label} absolute", f"{where}, {counted(count, 'case')}"))
    if len(pairs) > SITES:
        found.append(("...", f"and {len(pairs) - SITES} other pressures"))
    return found


def defaults(survey: Survey) -> list[tuple[str, str, int]]:
    """What was taken where a cell is blank: (what, what was taken, in how many cases); only what was needed."""
    rows = ((what, taken, int(np.sum(mask))) for what, taken, mask in _silent(survey))
    return [row for row in rows if row[2]]


def _silent(survey: Survey) -> Iterator[tuple[str, str, Any]]:
    cases = survey.cases
    valve, plates = cases.kind == "valve", cases.kind != "valve"
    limits = np.any([~np.isnan(limit) for limit in stated(cases, survey.findings.travel).values()], axis=0)
    sized = valve & ~np.isnan(cases.valve_size)
    yield "Inlet pipe bore", "line size: no reducer before the valve", sized & np.isnan(cases.pipe_in)
    yield "Outlet pipe bore", "as before the valve", sized & np.isnan(cases.pipe_out)
    yield "Valve size", "no fittings were reckoned with", valve & np.isnan(cases.valve_size)
    yield "Viscosity", "turbulent flow", valve & np.isnan(cases.viscosity)
    yield "Basis of FL", "tested", valve & absent(cases.fl_basis) & ~np.isnan(cases.fl)
    yield "Basis of the limits", "tested", limits & absent(cases.limits_basis)
    yield "Form", "upstream", limits & absent(cases.form)
    yield "Scale method", "isa", limits & absent(cases.method)
    yield "Limit to keep", "the mildest limit that is given", absent(cases.keep)
    yield "Outlet", "friction to the place: none", ~absent(cases.outlet) & np.isnan(cases.outlet_loss)
    yield "Bore length", "a thin sharp edge", plates & np.isnan(cases.bore_length)
    yield "Holes", "one", plates & np.isnan(cases.holes)
    yield "Spacing", "six pipe diameters", (cases.kind == "plates") & np.isnan(cases.spacing)
    yield "Salinity", f"{NORMAL_SALINITY:g} g/kg", _salty(survey) & np.isnan(cases.salinity)
    for key, name in (("pv", "pv"), ("pc", "pc"), ("density", "Density"), ("viscosity", "Viscosity")):
        yield name, "computed for the named liquid", _came(survey, key, "computed")
    yield "p2", "computed from the place of the outlet", _came(survey, "p2", "place")
    yield "FL", "typical value of the style", _came(survey, "fl", "typical")
    yield "Fd", "typical value of the style", _came(survey, "fd", "typical")


def _came(survey: Survey, key: str, source: str) -> Any:
    return survey.cases.source.get(key, np.full(survey.cases.count, None, object)) == source


def _salty(survey: Survey) -> Any:
    known: dict[Any, bool] = {None: False}
    for name in {*survey.cases.fluid.tolist()} - {None}:
        try:
            known[name] = is_salty(resolve(name))
        except ValueError:
            known[name] = False
    return np.array([known[name] for name in survey.cases.fluid.tolist()], np.bool_)


# --- sources ----------------------------------------------------------------------------------------------------


def citations(survey: Survey) -> list[tuple[str, str]]:
    """The sources behind this survey's answers, (key, citation), in the order of the catalogue."""
    used = {_source_of(name) for name in ("SIGMA", "REGIME", "UNIT")}
    used |= {key for names, extra, mask in _methods(survey) if bool(np.any(mask))
             for key in (*map(_source_of, names), *extra)}  # fmt: skip
    return [(key, source.citation) for key, source in SOURCES.items() if key in used]


def _source_of(name: str) -> str:
    return functions[f"LP_{name}"].declaration.source.key


def _methods(survey: Survey) -> Iterator[tuple[tuple[str, ...], tuple[str, ...], Any]]:
    """Functions, further sources, and the cases that they stand behind."""
    cases, findings = survey.cases, survey.findings
    valve, answered = cases.kind == "valve", ~absent(findings.regime)
    computed = np.any([_came(survey, key, "computed") for key in ("pv", "pc", "density")], axis=0)
    scaled = np.any([getattr(findings, f"{name}_scaled") != getattr(cases, name) for name in LIMITS], axis=0)
    estimated = findings.incipient_basis == "estimated"
    yield ("COEFFICIENT", "CHOKED_DROP", "FP"), (), answered & valve
    yield ("TRAVEL",), (), answered & ~np.isnan(findings.travel)
    yield ("SIGMA_SCALED",), (), answered & valve & scaled & (cases.method != "tullis")
    yield (), ("Tullis",), answered & valve & (cases.method == "tullis")
    yield ("LIMIT_INSTALLED",), (), answered & valve & ~np.isnan(cases.pipe_in)
    yield ("XFZ",), (), answered & (estimated | ~np.isnan(cases.xfz))
    yield ("NOISE",), (), ~np.isnan(findings.noise)
    yield ("VAPOUR_PRESSURE", "DENSITY"), ("IAPWS-95",), computed
    yield (), ("IAPWS-08", "Sharqawy"), computed & _salty(survey)
    yield ("ATMOSPHERE",), (), ~np.isnan(cases.elevation)
    yield ("COLUMN",), (), _came(survey, "p2", "place")
    yield ("TYPICAL",), (), _came(survey, "fl", "typical") | _came(survey, "fd", "typical")
    yield ("FLASH",), (), findings.flash_share > 0.0
    yield ("ORIFICE_LOSS", "ORIFICE_FL", "ORIFICE_LIMIT"), (), answered & ~valve
