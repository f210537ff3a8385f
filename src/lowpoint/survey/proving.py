"""What holds for every set of inputs within their tolerances, so that nothing needs to be drawn.

Only in turbulent flow, for single plates and for valves whose values do not hang on the opening. Each of four
conditions is bounded by itself, over the box of all inputs, from what moves in one direction alone (C^2 as c, S and A
of :mod:`lowpoint.physics.sizing`; a plate has no fittings, and its loss, FL and limits stand still):

* the required coefficient, and the share that a plate needs of its own, rises with flow, density, p2 and pv, and falls
  with p1 and FL;
* the index falls with p1 (where p2 > pv) and pv, and rises with p2;
* the limit of the bare valve rises with p1, the head p1 - pv and the coefficient, and falls with FL; between reducers
  (limit + A c)/(1 + S c) rises with it, and moves one way with c, so that both ends of c bound it;
* choked drop less drop, FL^2 (1 + S c)/(1 + FL^2 A c) (p1 - FF pv) - (p1 - p2), rises with FL and p2, falls with pv,
  is linear in p1 and moves one way with c, so that both ends of p1 and c bound it.

The ends of one condition need not go together; a bound may be wider than what happens, never narrower.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from itertools import product
from typing import Any, NamedTuple

import numpy as np

from lowpoint.physics.limits import installed_limit
from lowpoint.physics.sizing import choked_drop, critical_pressure_factor, required_coefficient
from lowpoint.survey.calculating import ROUNDING, filled_pipes
from lowpoint.survey.limiting import LIMITS, limits_of
from lowpoint.survey.model import Cases, Flags, Words, absent
from lowpoint.survey.moving import Movable
from lowpoint.survey.plating import plate_findings

__all__ = ["Proof", "proof"]

SLACK = 1e-9
"""Room for rounding, as a share."""


class Proof(NamedTuple):
    """Cases that pass, and that fail, whatever their inputs within the tolerances."""

    passes: Flags
    fails: Flags


class _Box(NamedTuple):
    low: Mapping[str, Any]
    high: Mapping[str, Any]

    def case(self, cases: Cases, **ends: bool) -> Cases:
        """The cases with inputs at an end: True the high one."""
        return replace(cases, **{name: (self.high if end else self.low)[name] for name, end in ends.items()})


def provable(cases: Cases) -> Flags:
    """Cases to which the directions above apply."""
    ways_of_head = np.isnan(cases.head_exponent) | (cases.head_exponent >= 0.0)
    valve = (cases.kind == "valve") & absent(cases.table) & ways_of_head & ~np.isnan(cases.fl)
    return np.asarray((valve | (cases.kind == "orifice")) & np.isnan(cases.viscosity), np.bool_)


def proof(movable: Movable, keep: Words) -> Proof:
    """What can be shown of the cases without drawing."""
    count = movable.cases.count
    passes, fails = np.zeros(count, np.bool_), np.zeros(count, np.bool_)
    can = provable(movable.cases)
    for kind, bounds in (("valve", _valve_bounds), ("orifice", _plate_bounds)):
        rows = np.flatnonzero(can & (movable.cases.kind == kind))
        if len(rows):
            with np.errstate(all="ignore"):
                part = movable.take(rows)
                box = _box(part)
                passes[rows], fails[rows] = _proof(part, box, bounds(part.cases, box, keep[rows]), keep[rows])
    return Proof(passes, fails)


class _Bounds(NamedTuple):
    """What each condition can come to over the box, at the least and at the most."""

    needed: tuple[Any, Any]
    """Share of the capacity; NaN where there is no answer (least: or nothing to compare with)."""
    limit: tuple[Any, Any]
    """The limit to keep; NaN where that is choking."""
    free: Any
    """Least of choked drop less drop."""
    choked: Any
    """Largest of it."""
    answers: Any


def _proof(movable: Movable, box: _Box, bounds: _Bounds, keep: Words) -> Proof:
    low, high = box.low, box.high
    in_order = (high["p2"] < low["p1"]) & (low["p2"] > 0.0) & (high["pv"] < low["p1"]) & (high["pv"] < movable.cases.pc)
    liquid, flashes = low["p2"] > high["pv"], high["p2"] <= low["pv"]
    spread = movable.sizes["limits"]
    sigma_low = (high["p1"] - high["pv"]) / (high["p1"] - low["p2"])
    sigma_high = (low["p1"] - low["pv"]) / (low["p1"] - high["p2"])
    by_choking = keep == "choked"
    keeps = by_choking | (sigma_low > bounds.limit[1] * (1.0 + spread) * (1.0 + SLACK))
    crosses = ~by_choking & (sigma_high <= bounds.limit[0] * (1.0 - spread) * (1.0 - SLACK)) & in_order
    fits = bounds.answers & ~(bounds.needed[1] * (1.0 + SLACK) > ROUNDING)
    small = bounds.needed[0] * (1.0 - SLACK) > ROUNDING
    passes = in_order & liquid & keeps & (bounds.free > 0.0) & fits
    return Proof(passes, flashes | crosses | ((bounds.choked < 0.0) & in_order) | small)


def _valve_bounds(cases: Cases, box: _Box, keep: Words) -> _Bounds:
    sizes = filled_pipes(cases)
    most = _coefficient(box.case(cases, flow=True, density=True, p2=True, pv=True, p1=False, fl=False), sizes)
    least = _coefficient(box.case(cases, flow=False, density=False, p2=False, pv=False, p1=True, fl=True), sizes)
    worst = _limit(box.case(cases, p1=True, pv=False, fl=False), keep, most, (least, most), sizes).max(axis=0)
    best = _limit(box.case(cases, p1=False, pv=True, fl=True), keep, least, (least, most), sizes).min(axis=0)

    def choking(at: Cases) -> list[Any]:
        return [choked_drop(at.p1, at.pv, at.pc, at.fl, end, *sizes) for end in (least, most)]

    free, choked = _excesses(cases, box, choking)
    return _Bounds((least / cases.rated, most / cases.rated), (best, worst), free, choked, ~np.isnan(most))


def _plate_bounds(cases: Cases, box: _Box, keep: Words) -> _Bounds:
    most = plate_findings(box.case(cases, flow=True, density=True, p2=True, pv=True, p1=False))
    least = plate_findings(box.case(cases, flow=False, density=False, p2=False, pv=False, p1=True))
    limit = _kept(most, keep)
    free, choked = _excesses(cases, box, lambda at: [most["fl"] ** 2 * (
        at.p1 - critical_pressure_factor(at.pv, at.pc) * at.pv)])  # fmt: skip
    needed = least["capacity"], most["capacity"]
    return _Bounds(needed, (limit, limit), free, choked, ~np.isnan(needed[1]))


def _kept(limits: Mapping[str, Any], keep: Words) -> Any:
    """The limit to keep; NaN where that is choking."""
    found = np.full(len(keep), np.nan)
    for name in LIMITS:
        found = np.where(keep == name, limits[name], found)
    return found


def _box(movable: Movable) -> _Box:
    """Both ends of what the verdict hangs on."""
    cases, size = movable.cases, movable.sizes
    ends = []
    for sign, log_pv, density, heavy in (
        (-1.0, movable.log_pv.low, movable.density.low, movable.density.high),
        (1.0, movable.log_pv.high, movable.density.high, movable.density.low),
    ):
        end = {name: getattr(cases, name) + sign * size[name] for name in ("p1", "p2", "flow", "fl")}
        end["fl"] = np.minimum(end["fl"], np.fmax(cases.fl, 1.0))
        end["pv"] = np.maximum(cases.pv * np.exp(log_pv) + sign * size["pv"], 0.0)
        end["density"] = cases.density * (1.0 + density)
        end["flow"] = np.where(movable.by_mass, end["flow"] / (1.0 + heavy), end["flow"])
        ends.append(end)
    low, high = ends
    for end in ends:
        end["p2"] = np.where(movable.parted, end["pv"], end["p2"])
    return _Box(low, high)


def _coefficient(cases: Cases, sizes: Any) -> Any:
    state = (cases.flow, cases.p1, cases.p2, cases.pv, cases.pc, cases.density, cases.fl)
    return required_coefficient(*state, *sizes)


def _limit(cases: Cases, keep: Words, coefficient: Any, ends: tuple[Any, Any], sizes: Any) -> Any:
    """The limit to keep between the reducers, at both ends of the coefficient; NaN where that is choking."""
    bare = _kept(limits_of(cases, coefficient, np.full(cases.count, np.nan), cases.fl, sizes).scaled, keep)
    unfitted = np.isnan(sizes[0])
    return np.array([np.where(unfitted, bare, installed_limit(bare, end, *sizes)) for end in ends])


def _excesses(cases: Cases, box: _Box, choking: Callable[[Cases], list[Any]]) -> tuple[Any, Any]:
    """Least and largest of choked drop less drop, with room for rounding; ``choking`` gives the choked drops."""
    found: dict[bool, list[Any]] = {True: [], False: []}
    for adverse, p1_high in product((True, False), repeat=2):
        at = box.case(cases, p1=p1_high, p2=not adverse, pv=adverse, fl=not adverse)
        slack = 1.0 - SLACK if adverse else 1.0 + SLACK
        found[adverse] += [drop * slack - (at.p1 - at.p2) for drop in choking(at)]
    return np.min(found[True], axis=0), np.max(found[False], axis=0)
