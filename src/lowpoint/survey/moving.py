"""Cases with their inputs moved within tolerances: what depends on a moved input moves along.

A move is a number from -1 to 1 of each input, a whole tolerance down or up:

* temperature: vapour pressure and density follow where they were computed from the liquid. ln pv is a parabola in
  ``s = 1 - t0/t`` through its values at both ends and in the middle (ln pv is all but linear in 1/t, Clausius and
  Clapeyron, so that this is exact to 1e-6 for 1 K and 1e-4 for 20 K); the density is one too, of the saturated liquid,
  as a share of that in the middle, the pressure's part in which is left out;
* pv, where it is given; FL of valves, not above 1 (one read from a table by travel as it comes out at the opening);
* p1, p2 and flow, each for itself; a mass flow is divided by the moved density. A falling leg that has parted keeps
  its outlet at the vapour pressure;
* limits: what the margin counts to, unless that is choking, which moves with FL.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any, NamedTuple

import numpy as np

from lowpoint.physics import liquids
from lowpoint.physics.names import resolve
from lowpoint.survey.calculating import at_opening, filled_pipes
from lowpoint.survey.model import Cases, Numbers, absent, number_fields, word_fields
from lowpoint.survey.outcome import Tolerance

__all__ = ["Movable", "Parabolas", "movable"]

COMPUTED, PLACE, LEG = "computed", "place", "falling leg"


class Parabolas(NamedTuple):
    """``s (a + b s)`` row by row, held between ``low`` and ``high``."""

    a: Numbers
    b: Numbers
    low: Numbers
    high: Numbers

    def at(self, s: Any) -> Any:
        """The parabolas of rows, ``s`` (rows, moves)."""
        return np.clip(s * (self.a[:, None] + self.b[:, None] * s), self.low[:, None], self.high[:, None])

    def take(self, rows: Any) -> Parabolas:
        return Parabolas(*(x[rows] for x in self))


@dataclass(frozen=True, eq=False)
class Movable:
    """Completed cases, ready to be moved again and again."""

    cases: Cases
    sizes: Mapping[str, Numbers]
    """Half-width of each input, SI, one a case; 0 where it does not move."""
    log_pv: Parabolas
    """ln(pv/pv0) of the part of pv that follows the temperature."""
    density: Parabolas
    """rho/rho0 - 1."""
    by_mass: Any
    parted: Any
    tabled: Any
    """Whether FL is read from a table by travel."""

    def take(self, rows: Any) -> Movable:
        """The same of some cases; of the tables only those that they name come along."""
        cases = self.cases.take(rows)
        tables = {name: self.cases.tables[name] for name in {*cases.table.tolist()} if name in self.cases.tables}
        return Movable(replace(cases, tables=tables), {name: x[rows] for name, x in self.sizes.items()},
                       self.log_pv.take(rows), self.density.take(rows), self.by_mass[rows], self.parted[rows],
                       self.tabled[rows])  # fmt: skip

    def moved(self, moves: Mapping[str, Any]) -> tuple[Cases, Any]:
        """The cases under moves, case after case with all its moves; and the factor of their limits.

        ``moves``: input -> array (1 or cases, moves); an input left out stays.
        """
        cases, count = self.cases, max(np.shape(x)[1] for x in moves.values())
        still = np.zeros((1, count))
        by = {name: moves.get(name, still) * size[:, None] for name, size in self.sizes.items()}
        columns: dict[str, Any] = {name: getattr(cases, name)[:, None] + by[name] for name in ("p1", "p2")}
        t = cases.t[:, None] + by["t"]
        s = np.where(by["t"] == 0.0, 0.0, by["t"] / t)
        columns["pv"] = np.maximum(cases.pv[:, None] * np.exp(self.log_pv.at(s)) + by["pv"], 0.0)
        columns["density"] = cases.density[:, None] * (1.0 + self.density.at(s))
        slower = np.where(self.by_mass[:, None], cases.density[:, None] / columns["density"], 1.0)
        columns["flow"] = (cases.flow[:, None] + by["flow"]) * slower
        columns["p2"] = np.where(self.parted[:, None], columns["pv"], columns["p2"])
        columns["fl"] = np.minimum(cases.fl[:, None] + by["fl"], np.fmax(cases.fl, 1.0)[:, None])
        flat: dict[str, Any] = {name: np.broadcast_to(x, (cases.count, count)).ravel() for name, x in columns.items()}
        drawn = replace(_spread(cases, count), **flat)
        if self.tabled.any():
            drawn = self._with_table_fl(drawn, by["fl"], count)
        return drawn, (1.0 + np.broadcast_to(by["limits"], (cases.count, count))).ravel()

    def _with_table_fl(self, drawn: Cases, by: Any, count: int) -> Cases:
        """FL as the table gives it at the opening of the moved case, times its own move."""
        tabled = np.repeat(self.tabled, count)
        share = 1.0 + np.broadcast_to(by, (self.cases.count, count)).ravel()
        _, fl, _ = at_opening(drawn, filled_pipes(drawn))
        return replace(drawn, fl=np.where(tabled, np.minimum(fl * share, np.fmax(fl, 1.0)), drawn.fl))


def _spread(cases: Cases, count: int) -> Cases:
    """Every case ``count`` times in a row; what is the same in all of them is one value, seen many times."""
    columns: dict[str, Any] = {}
    for name in (*number_fields(), *word_fields(), "row", "estimate"):
        column = getattr(cases, name)
        blank = column.dtype.kind in "fO" and absent(column).all()
        one = blank or (column.dtype.kind == "f" and (column == column[0]).all())
        columns[name] = np.broadcast_to(column[:1], cases.count * count) if one else np.repeat(column, count)
    return replace(cases, **columns, source={}, problems=(), remarks=())


def movable(cases: Cases, tolerances: Sequence[Tolerance]) -> Movable:
    """``cases`` (completed) with what each can move by."""
    tolerance = {t.field: t for t in tolerances}
    sizes = {name: _half_width(cases, t) for name, t in tolerance.items()}
    valve = cases.kind == "valve"
    tabled = valve & np.isnan(cases.fl)
    sizes["fl"] = np.where(tabled, tolerance["fl"].size, np.where(valve, sizes["fl"], 0.0))
    sizes["limits"] = np.full(cases.count, tolerance["limits"].size)
    follows = {name: (cases.source[name] == COMPUTED) & ~np.isnan(cases.t) if name in cases.source else
               np.zeros(cases.count, np.bool_) for name in ("pv", "density")}  # fmt: skip
    sizes["pv"] = np.where(follows["pv"], 0.0, sizes["pv"])
    sizes["t"] = np.where(follows["pv"] | follows["density"], sizes["t"], 0.0)
    by_mass = ~np.isnan(cases.mass_flow) & (cases.source["flow"] == COMPUTED) if "flow" in cases.source else \
        np.zeros(cases.count, np.bool_)  # fmt: skip
    parted = (cases.outlet == LEG) & (cases.p2 == cases.pv)
    if "p2" in cases.source:
        parted &= cases.source["p2"] == PLACE
    log_pv, density = _by_temperature(cases, sizes["t"], follows)
    sizes = {name: np.nan_to_num(x) for name, x in sizes.items()}
    return Movable(cases, sizes, log_pv, density, by_mass, parted.astype(np.bool_), tabled)


def _half_width(cases: Cases, tolerance: Tolerance) -> Any:
    if tolerance.field == "limits":
        return np.full(cases.count, tolerance.size)
    value = getattr(cases, tolerance.field)
    return np.where(np.isnan(value), 0.0, tolerance.size * value if tolerance.relative else tolerance.size)


def _by_temperature(cases: Cases, span: Any, follows: Mapping[str, Any]) -> tuple[Parabolas, Parabolas]:
    """How ln pv and density follow the temperature; each distinct liquid, temperature and salinity is asked once."""
    none = np.zeros(cases.count)
    rows = np.flatnonzero((span > 0.0) & (follows["pv"] | follows["density"]))
    if not len(rows):
        still = Parabolas(none, none, none, none)
        return still, still
    salinity = np.where(np.isnan(cases.salinity[rows]), liquids.NORMAL_SALINITY / 1000.0, cases.salinity[rows])
    keys = list(zip(cases.fluid[rows].tolist(), cases.t[rows].tolist(), salinity.tolist(), span[rows].tolist(),
                    strict=True))  # fmt: skip
    known = {key: place for place, key in enumerate(dict.fromkeys(keys))}
    names, t, salt, dt = (np.array(x) for x in zip(*((resolve(key[0]), *key[1:]) for key in known), strict=True))
    ends = [(names, t + dt * u, salt) for u in (-1.0, 0.0, 1.0)]
    log_pv = [np.log(liquids.saturation_pressure(name, at, s)) for name, at, s in ends]
    saturated: Any = None
    density = [liquids.liquid_density(name, at, saturated, s) for name, at, s in ends]
    place = np.array([known[key] for key in keys])
    curves = (_parabolas(t, dt, *log_pv), _parabolas(t, dt, *(x / density[1] for x in density)))
    found = []
    for curve, name in zip(curves, ("pv", "density"), strict=True):
        columns = []
        for part in curve:
            column = none.copy()
            column[rows] = np.where(follows[name][rows], part[place], 0.0)
            columns.append(column)
        found.append(Parabolas(*columns))
    return found[0], found[1]


def _parabolas(t: Any, dt: Any, below: Any, middle: Any, above: Any) -> Parabolas:
    """Through the values at t - dt, t, t + dt, less that in the middle; beyond the liquid's range a straight line."""
    down, up = -dt / (t - dt), dt / (t + dt)
    left, right = (below - middle) / down, (above - middle) / up
    b = np.nan_to_num((right - left) / (up - down))
    a = np.nan_to_num(np.where(np.isnan(right), left, np.where(np.isnan(left), right, right - b * up)))
    ends = [s * (a + b * s) for s in (down, up)]
    return Parabolas(a, b, np.minimum(np.minimum(*ends), 0.0), np.maximum(np.maximum(*ends), 0.0))
