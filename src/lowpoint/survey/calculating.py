"""The numbers of every case at once: coefficient, opening, index, limits, regime and margins, valves and plates alike.

Vectorised kernels only, no texts: the way for draws of uncertain inputs and for trial remedies. NaN, and no regime,
where an input is missing or impossible; :mod:`lowpoint.survey.judging` says why.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.physics.indices import from_upstream
from lowpoint.physics.regime import regime_word
from lowpoint.physics.sizing import choked_drop, required_coefficient, throat_pressure
from lowpoint.physics.travel import operating_travel, valve_travel
from lowpoint.survey.limiting import LIMITS, form_of, limits_of, weakest
from lowpoint.survey.model import Cases, Findings, Flags, absent, number_fields, word_fields
from lowpoint.survey.plating import plate_findings
from lowpoint.survey.setting import set_findings

__all__ = ["FULLY_OPEN", "at_opening", "calculate", "filled_pipes", "possible", "valve_findings"]

LOW_TRAVEL, HIGH_TRAVEL = 0.1, 0.9
ROUNDING = 1.0 + 1e-12
FULLY_OPEN = 1.0 - 1e-9
"""Travel from which on the last row of a table is the open valve."""


def calculate(cases: Cases) -> Findings:
    """The numbers of ``cases``, which must be complete (:func:`lowpoint.survey.completing.complete`)."""
    with np.errstate(all="ignore"):
        columns = _blank(cases.count)
        for kind, found in (("valve", valve_findings), ("orifice", plate_findings), ("plates", set_findings)):
            rows = np.flatnonzero((cases.kind == kind) & possible(cases))
            if not len(rows):
                continue
            part = found(cases if len(rows) == cases.count else cases.take(rows))
            for name, values in part.items():
                columns[name][rows] = values
        return _verdicts(cases, columns)


def possible(cases: Cases) -> Flags:
    """Cases whose pressures and flow are there and in order: p2 < p1, pv < p1, pv < pc."""
    in_order = (cases.p2 < cases.p1) & (cases.pv < cases.p1) & (cases.pv < cases.pc) & (cases.p2 > 0.0)
    return np.asarray(in_order & (cases.flow > 0.0) & (cases.density > 0.0), np.bool_)


def _blank(count: int) -> dict[str, Any]:
    columns: dict[str, Any] = {name: np.full(count, np.nan) for name in number_fields(Findings)}
    columns |= {name: np.full(count, None, object) for name in word_fields(Findings)}
    flags = ("choked", "flashing", "over_capacity", "low_travel", "high_travel", "fails")
    columns |= {name: np.zeros(count, np.bool_) for name in flags}
    columns["plate"] = np.zeros(count, np.int64)
    return columns


# --- valves -----------------------------------------------------------------------------------------------------


def filled_pipes(cases: Cases) -> tuple[Any, Any, Any]:
    """Valve size and pipes, with the defaults: pipe before it of line size, pipe after it like the one before."""
    pipe_in = np.where(np.isnan(cases.pipe_in), cases.valve_size, cases.pipe_in)
    return cases.valve_size, pipe_in, np.where(np.isnan(cases.pipe_out), pipe_in, cases.pipe_out)


def valve_findings(cases: Cases) -> dict[str, Any]:
    """Columns of ``Findings`` for valves."""
    sizes = filled_pipes(cases)
    travel, fl, basis = at_opening(cases, sizes)
    usable = ~np.isnan(cases.viscosity) & ~np.isnan(sizes[0]) & ~np.isnan(cases.fd) & ~absent(cases.trim)
    viscous = (np.where(usable, cases.viscosity, np.nan), cases.fd, cases.trim.astype(str)) if usable.any() else ()
    state = (cases.flow, cases.p1, cases.p2, cases.pv, cases.pc, cases.density, fl)
    coefficient = required_coefficient(*state, *sizes, *viscous)
    travel = np.where(np.isnan(travel), _by_characteristic(cases, coefficient), travel)
    limits = limits_of(cases, coefficient, travel, fl, sizes)
    return {
        "coefficient": coefficient, "travel": travel, "fl": fl, "fl_basis": basis,
        "capacity": coefficient / _rated(cases),
        "choked_drop": choked_drop(cases.p1, cases.pv, cases.pc, fl, coefficient, *sizes),
        "drop": cases.p1 - cases.p2,
        "throat_pressure": throat_pressure(cases.p1, cases.p2, fl, cases.pv, cases.pc),
        "sigma": np.where(np.isnan(coefficient), np.nan, (cases.p1 - cases.pv) / (cases.p1 - cases.p2)),
        "incipient_basis": limits.incipient_basis, "limits_basis": limits.basis,
        **{f"{name}_scaled": limits.scaled[name] for name in LIMITS}, **limits.installed,
    }  # fmt: skip


def _rated(cases: Cases) -> Any:
    """The coefficient fully open; of a valve with a table the smaller of the two, where both say one."""
    rated = cases.rated
    for name, table in cases.tables.items():
        if table.coefficient is not None:
            whole = np.isnan(rated) | (table.travel[-1] >= FULLY_OPEN)
            last = np.fmin(rated, table.coefficient[-1])
            rated = np.where((cases.table == name) & whole, last, rated)
    return rated


def at_opening(cases: Cases, sizes: tuple[Any, Any, Any]) -> tuple[Any, Any, Any]:
    """Opening and FL of valves whose table gives FL by travel; the given FL, its basis and no opening for others."""
    travel, fl = np.full(cases.count, np.nan), cases.fl.copy()
    basis = np.where(absent(cases.fl_basis), "tested", cases.fl_basis)
    for name, table in cases.tables.items():
        rows = np.flatnonzero((cases.table == name) & np.isnan(cases.fl))
        if table.fl is None or table.coefficient is None or not len(rows):
            continue
        keys = ("flow", "p1", "p2", "pv", "pc", "density")
        state: dict[str, Any] = {key: getattr(cases, key)[rows] for key in keys}
        state |= {key: x[rows] for key, x in zip(("valve_size", "pipe_in", "pipe_out"), sizes, strict=True)}
        opening = operating_travel(travels=table.travel, coefficients=table.coefficient, fls=table.fl, **state)
        travel[rows] = opening
        # Too small a valve is fully open; one that would be less open than the table begins keeps its first FL.
        first = np.full(len(rows), table.fl[0])
        small = np.isnan(opening) & (required_coefficient(fl=first, **state) > table.coefficient[0])
        fl[rows] = np.where(np.isnan(opening), np.where(small, table.fl[-1], table.fl[0]),
                            np.interp(opening, table.travel, table.fl))  # fmt: skip
    return travel, fl, basis


def _by_characteristic(cases: Cases, coefficient: Any) -> Any:
    """Opening for a coefficient, by the table of the valve or the characteristic's formula."""
    travel = np.full(cases.count, np.nan)
    tabled = np.zeros(cases.count, np.bool_)
    for name, table in cases.tables.items():
        rows = np.flatnonzero(cases.table == name)
        if table.coefficient is None or not len(rows):
            continue
        tabled[rows] = True
        both = np.column_stack([table.travel * 100.0, table.coefficient])
        travel[rows] = valve_travel(coefficient[rows], cases.rated[rows], both)
    for word in ("linear", "equal percentage"):
        rows = np.flatnonzero((cases.characteristic == word) & ~tabled)
        if len(rows):
            travel[rows] = valve_travel(coefficient[rows], cases.rated[rows], word, cases.rangeability[rows])
    return travel


# --- verdicts ---------------------------------------------------------------------------------------------------


def _verdicts(cases: Cases, columns: dict[str, Any]) -> Findings:
    """What follows from index and limits, for every kind of item alike."""
    sigma = columns["sigma"]
    head = cases.p1 - cases.pv
    of_set = cases.kind == "plates"
    columns["choked_limit"] = np.where(of_set, columns["choked_limit"], head / columns["choked_drop"])
    head = np.where(of_set, sigma * columns["drop"], head)  # of the plate that decides
    limits = {name: columns[name] for name in LIMITS} | {"choked": columns["choked_limit"]}
    wrong = np.logical_or.reduce([limits[name] <= 1.0 for name in LIMITS])
    word = regime_word(sigma, *(limits[name] for name in (*LIMITS, "choked")))
    judged = ~np.isnan(sigma) & ~np.isnan(columns["choked_limit"]) & ~wrong
    columns["regime"] = np.where(judged & (word != ""), word.astype(object), np.array(None, object))
    columns["choked"] = judged & (sigma <= columns["choked_limit"])
    columns["flashing"] = possible(cases) & (cases.p2 <= cases.pv)
    for name, limit in limits.items():
        columns[f"margin_{name}"] = sigma / limit - 1.0
    _kept(cases, columns, limits)
    columns["allowed_drop"] = np.where((columns["limit"] > 1.0) & (head > 0.0), head / columns["limit"], np.nan)
    columns["allowed_outlet"] = cases.p1 - np.where(of_set, np.nan, columns["allowed_drop"])
    columns["index"] = from_upstream(sigma, form_of(cases))
    columns["basis"] = _basis(columns)
    columns["over_capacity"] = columns["capacity"] > ROUNDING
    columns["low_travel"] = columns["travel"] < LOW_TRAVEL
    columns["high_travel"] = columns["travel"] > HIGH_TRAVEL
    crossed = columns["margin"] <= 0.0
    columns["fails"] = columns["flashing"] | columns["choked"] | crossed | columns["over_capacity"]
    return Findings(**columns)


def _kept(cases: Cases, columns: dict[str, Any], limits: dict[str, Any]) -> None:
    """The limit that the margin counts to: the one asked for where it is given, else the mildest that is.

    Where a more severe one lies above it, that one: a case at the damage limit never passes by its incipient one.
    """
    names = np.array([*limits], object)
    values = np.array([limits[name] for name in limits])
    given = ~np.isnan(values)
    mildest = np.where(given.any(axis=0), np.argmax(given, axis=0), len(names) - 1)
    asked = np.array([cases.keep == name for name in limits], np.bool_)
    possible_ask = (asked & given).any(axis=0)
    place = np.where(possible_ask, np.argmax(asked, axis=0), mildest)
    scaling = np.arange(len(LIMITS))[:, None]
    counted = np.where(given[:-1] & (scaling >= place), values[:-1], -np.inf)
    place = np.where(place < len(LIMITS), np.argmax(counted, axis=0), place)
    columns["keep"] = np.where(given.any(axis=0), names[place], np.array(None, object))
    columns["limit"] = np.take_along_axis(values, place[None], axis=0)[0] if cases.count else values[0]
    columns["margin"] = columns["sigma"] / columns["limit"] - 1.0


def _basis(columns: dict[str, Any]) -> Any:
    """The weakest basis among the limits that a regime's word compares; FL's where choking decides."""
    regime, incipient, others = columns["regime"], columns["incipient_basis"], columns["limits_basis"]
    above = ~np.isnan(columns["constant"]) | ~np.isnan(columns["damage"])
    by_incipient = np.where((regime == "clear") | ~above, incipient, weakest(incipient, others))
    crossed_constant = columns["sigma"] <= columns["constant"]
    by_cavitating = np.where(crossed_constant, others, by_incipient)
    return np.select(
        [regime == word for word in ("clear", "incipient", "cavitating", "constant", "damage", "vibration", "choked",
                                     "unjudged")],
        [by_incipient, by_incipient, by_cavitating, others, others, others, columns["fl_basis"], columns["fl_basis"]],
        np.full(len(regime), None, object),
    )  # fmt: skip


def without(findings: Findings, rows: Any) -> Findings:
    """The same findings without regime, margin and failure for some rows: those with errors."""
    mask = np.zeros(findings.count, np.bool_)
    mask[rows] = True
    changed: dict[str, Any] = {name: np.where(mask, np.array(None, object), getattr(findings, name))
                               for name in ("regime", "basis")}  # fmt: skip
    changed |= {name: np.where(mask, np.nan, getattr(findings, name)) for name in number_fields(Findings)
               if name.startswith("margin")}  # fmt: skip
    return replace(findings, **changed, fails=findings.fails & ~mask, choked=findings.choked & ~mask,
                   flashing=findings.flashing & ~mask)  # fmt: skip
