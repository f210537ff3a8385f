"""What a list leaves out and a liquid's name or a place gives: properties, outlet pressure, volume flow, typical FL."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.physics import liquids
from lowpoint.physics.names import is_salty, resolve
from lowpoint.physics.typical import resolve_style, typical_value
from lowpoint.survey.assembling import given_words
from lowpoint.survey.fields import TYPICAL
from lowpoint.survey.model import Cases, absent
from lowpoint.survey.outlets import outlet_pressures
from lowpoint.survey.speaking import Lines, cautions_of, why

__all__ = ["complete"]

PROPERTIES = ("pv", "pc", "density")


def complete(cases: Cases) -> Cases:
    """The same cases with properties, flows and outlet pressures filled in, and what could not be among problems.

    What is given is never changed. ``source`` says of each value where it came from.
    """
    lines = Lines(cases)
    columns: dict[str, Any] = {
        name: getattr(cases, name).copy()
        for name in (*PROPERTIES, "flow", "viscosity", "p2", "sound_speed", "fl", "fd", "fl_basis")
    }
    source = {name: words.copy() for name, words in cases.source.items()}
    for name in ("p2", *PROPERTIES, "viscosity", "sound_speed", "flow", "fl", "fd"):
        source.setdefault(name, given_words(getattr(cases, name)))
    fluids = _fluids(cases, lines)
    _vapour(cases, fluids, columns, source, lines)
    _critical(cases, fluids, columns, source)
    _density(cases, fluids, columns, source, lines)
    _carried(cases, columns, source)
    _sound(cases, fluids, columns, source)
    _outlets(cases, columns, source, lines)
    _typical(cases, columns, source, lines)
    return replace(cases, **columns, source=source, problems=(*cases.problems, *lines.errors),
                   remarks=(*cases.remarks, *lines.cautions))  # fmt: skip


def _fluids(cases: Cases, lines: Lines) -> Any:
    """The canonical name of each liquid, None where it has none; told only where a property is wanted of it."""
    wanted = np.isnan(cases.pv) | np.isnan(cases.pc) | np.isnan(cases.density)
    known: dict[str, str | None] = {}
    unknown: dict[str, str] = {}
    for name in {fluid for fluid in cases.fluid.tolist() if fluid is not None}:
        try:
            known[name] = resolve(name)
        except ValueError as problem:
            known[name], unknown[name] = None, str(problem)
    for name, sentence in unknown.items():
        lines.error(wanted & (cases.fluid == name), sentence)
    return np.array([None if fluid is None else known[fluid] for fluid in cases.fluid.tolist()], object)


def _rows(cases: Cases, fluids: Any, column: Any, *needed: Any) -> Any:
    """Places of the cases whose property is wanted and can be asked for."""
    mask = np.isnan(column) & ~absent(fluids)
    for x in needed:
        mask &= ~np.isnan(x)
    return np.flatnonzero(mask)


def _salinity(cases: Cases, rows: Any) -> Any:
    return np.where(np.isnan(cases.salinity[rows]), liquids.NORMAL_SALINITY / 1000.0, cases.salinity[rows])


def _names(fluids: Any, rows: Any) -> Any:
    return fluids[rows].astype(str)


def _vapour(cases: Cases, fluids: Any, columns: dict[str, Any], source: Any, lines: Lines) -> None:
    rows = _rows(cases, fluids, cases.pv, cases.t)
    if not len(rows):
        return
    names, salinity = _names(fluids, rows), _salinity(cases, rows)
    found = liquids.saturation_pressure(names, cases.t[rows], salinity)
    columns["pv"][rows] = found
    source["pv"][rows] = "computed"
    given = {"fluid": names, "t": cases.t[rows], "salinity": salinity}
    why(lines, "VAPOUR_PRESSURE", rows, np.isnan(found), given)
    cautions_of(lines, "VAPOUR_PRESSURE", rows, {**given, "result": found})
    salty = np.array([is_salty(name) for name in names])
    lines.caution_at(rows[salty & np.isnan(cases.salinity[rows])], "the salinity is not given: sea water of 35 g/kg "
                     "was taken")  # fmt: skip


def _critical(cases: Cases, fluids: Any, columns: dict[str, Any], source: Any) -> None:
    rows = _rows(cases, fluids, cases.pc)
    if len(rows):
        columns["pc"][rows] = liquids.critical_pressure(_names(fluids, rows))
        source["pc"][rows] = "computed"


def _density(cases: Cases, fluids: Any, columns: dict[str, Any], source: Any, lines: Lines) -> None:
    rows = _rows(cases, fluids, cases.density, cases.t, cases.p1)
    if not len(rows):
        return
    given = {"fluid": _names(fluids, rows), "t": cases.t[rows], "p": cases.p1[rows],
             "salinity": _salinity(cases, rows)}  # fmt: skip
    found = liquids.liquid_density(**given)
    columns["density"][rows] = found
    source["density"][rows] = "computed"
    why(lines, "DENSITY", rows, np.isnan(found), given)


def _carried(cases: Cases, columns: dict[str, Any], source: Any) -> None:
    """Volume flow of a mass flow, dynamic viscosity of a kinematic one."""
    for key, given, value in (("flow", cases.mass_flow, cases.mass_flow / columns["density"]),
                              ("viscosity", cases.kinematic, cases.kinematic * columns["density"])):  # fmt: skip
        rows = np.isnan(columns[key]) & ~np.isnan(given)
        columns[key] = np.where(rows, value, columns[key])
        source[key][rows] = "computed"


def _sound(cases: Cases, fluids: Any, columns: dict[str, Any], source: Any) -> None:
    """Speed of sound, where a pipe wall says that the noise is wanted."""
    rows = _rows(cases, fluids, cases.sound_speed, cases.t, cases.p1, cases.pipe_wall)
    if len(rows):
        columns["sound_speed"][rows] = liquids.sound_speed(_names(fluids, rows), cases.t[rows], cases.p1[rows])
        source["sound_speed"][rows] = "computed"


def _outlets(cases: Cases, columns: dict[str, Any], source: Any, lines: Lines) -> None:
    if absent(cases.outlet).all():
        return
    known = replace(cases, pv=columns["pv"], density=columns["density"])
    found, faults, told = outlet_pressures(known)
    rows = np.isnan(cases.p2) & ~np.isnan(found)
    columns["p2"] = np.where(rows, found, cases.p2)
    source["p2"][rows] = "place"
    lines.errors += faults
    lines.cautions += told


def _typical(cases: Cases, columns: dict[str, Any], source: Any, lines: Lines) -> None:
    for key in ("fl", "fd"):
        for place in np.flatnonzero(source[key] == TYPICAL).tolist():
            style = cases.style[place]
            if style is None:
                lines.errors.append((place, f"Style must be given where {key.upper()} is '{TYPICAL}'"))
                continue
            try:
                name = resolve_style(style)
            except ValueError as problem:
                lines.errors.append((place, str(problem)))
                continue
            value = float(typical_value(name, key, cases.direction[place])[0])
            if np.isnan(value):
                lines.errors.append((place, f"the table of typical values has no {key.upper()} for '{name}' with this "
                                     "flow direction: give the vendor's, or the direction"))  # fmt: skip
                continue
            columns[key][place] = value
            lines.cautions.append((place, f"{key.upper()} {value:g} is a typical value of the style at rated travel"))
            if key == "fl" and columns["fl_basis"][place] is None:
                columns["fl_basis"][place] = "published"
