"""A lower temperature: the vapour pressure that every case bears, and the temperature at which the liquid has it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.physics import fluids, seawater
from lowpoint.physics.liquids import NORMAL_SALINITY, each
from lowpoint.physics.names import is_salty, resolve
from lowpoint.survey.calculating import calculate
from lowpoint.survey.completing import complete
from lowpoint.survey.model import Cases, absent
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing, as_strict, index_fails
from lowpoint.survey.remedies.searching import least
from lowpoint.survey.remedies.trying import BARELY, Trial, advice, enlarged, tried
from lowpoint.survey.worded import amount

__all__ = ["lower_temperatures"]

STEP = 0.1
"""K, in which temperatures are named."""
FOLLOWING = ("pv", "density", "viscosity", "sound_speed", "flow")
"""Fields that are computed again at the new temperature where they were computed before."""
NEARLY_NONE = 0.9999
"""Share by which a vapour pressure may fall in the search."""
_HOW = "density and vapour pressure were computed anew; what is given in the list was taken as it is"
_NEVER = (
    "cooling alone cannot help: in {} the drop is too large for the limit even with the liquid at its freezing point"
)


def lower_temperatures(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy, for liquids whose vapour pressure was computed from their temperature."""
    cases = failing.cases
    known = ~absent(cases.fluid) & ~np.isnan(cases.t) & (cases.source["pv"] == "computed")
    wanted = failing.any(failing.bad) & failing.all(~failing.bad | known)
    numbers, failing = np.flatnonzero(wanted), failing.only(wanted)
    if not failing.count:
        return
    allowed = _allowed(failing)
    for item in np.flatnonzero(failing.any(failing.bad & np.isnan(allowed))).tolist():
        rows = failing.rows_of(item)
        row = rows.start + int(np.argmax(failing.bad[rows] & np.isnan(allowed[rows])))
        yield int(numbers[item]), advice(failing, item, "lower temperature", _NEVER.format(failing.name(row)))
    possible = failing.all(~failing.bad | ~np.isnan(allowed))
    numbers, failing, allowed = numbers[possible], failing.only(possible), allowed[possible[failing.owner]]
    if failing.count:
        yield from _cooled(failing, numbers, failing.by_item(np.fmin, allowed))


def _cooled(failing: Failing, numbers: Any, highest: Any) -> Iterator[tuple[int, Remedy]]:
    trial, highest = _settled(failing, np.floor((highest - 273.15) / STEP + 1e-6) * STEP + 273.15)
    trial = enlarged(trial)
    for item in np.flatnonzero(~np.isnan(highest)).tolist():
        rows = failing.rows_of(item)
        fall = float((failing.cases.t[rows] - trial.cases.t[rows]).max())
        hottest = rows.start + int(np.argmax(failing.cases.t[rows] - trial.cases.t[rows]))
        less = amount(fall, "temperature difference", ".1f", "up")
        what = (f"at most {wording.celsius(float(highest[item]), 'down')} at the inlet, {less} less in "
                f"{failing.name(hottest)}")  # fmt: skip
        figures = {"temperature at most": (float(highest[item]), "temperature"), "cooler by": (fall, "ratio")}
        yield int(numbers[item]), trial.remedy(item, "lower temperature", what, figures, [BARELY, _HOW])


def _names(cases: Cases) -> Any:
    return np.array([resolve(name) for name in cases.fluid.tolist()], object)


def _freezing(name: str) -> float:
    return seawater.T_LOW if is_salty(name) else max(fluids.span(name).t_low, 0.0)


def _boiling(name: str, p: float, salinity: float | None) -> float:
    """Boiling temperature, of sea water at its own salinity."""
    if is_salty(name):
        return seawater.saturation_temperature(p, NORMAL_SALINITY / 1000.0 if salinity is None else salinity)
    return fluids.saturation_temperature(name, p)


def _allowed(failing: Failing) -> Any:
    """Temperature of every failing case at which its index is at the limit; NaN for none above freezing."""
    rows = np.flatnonzero(failing.bad)
    cases, kept = failing.cases.take(rows), failing.found.keep[rows]

    def passes(fall: Any) -> Any:
        found = calculate(cases.changed(pv=cases.pv * (1.0 - fall)))
        return ~index_fails(found) & (found.margin > 0.0) & as_strict(found, kept)

    pv = cases.pv * (1.0 - least(passes, 0.0, np.full(len(rows), NEARLY_NONE)))
    found = np.full(len(failing.bad), np.nan)
    there = np.flatnonzero(~np.isnan(pv))
    if len(there):
        found[rows[there]] = each(_boiling, _names(cases.take(there)), pv[there], cases.salinity[there])
    return found


def _settled(failing: Failing, highest: Any) -> tuple[Trial, Any]:
    """The trial at the highest temperatures, lowered a little where density and flow, which move too, ask for it."""
    freezing = failing.by_item(np.fmax, each(_freezing, _names_or_none(failing)))
    highest = np.where(highest >= freezing - 1e-6, highest, np.nan)
    trial = tried(failing, _at(failing.cases, failing.bad, highest[failing.owner]))
    for further in (STEP, 3.0 * STEP, 1.0, 2.0):
        short = ~trial.cures_index & ~np.isnan(highest)
        if not short.any():
            break
        highest = np.where(short, highest - further, highest)
        highest = np.where(highest >= freezing - 1e-6, highest, np.nan)
        part = failing.only(short)
        again = _at(part.cases, part.bad, highest[short][part.owner])
        trial = _put(trial, short[failing.owner], again)
    return trial, np.where(trial.cures_index, highest, np.nan)


def _names_or_none(failing: Failing) -> Any:
    """A name for every row: that of its item's first failing case stands for rows without one."""
    first = np.array([failing.rows_of(item).start + int(np.argmax(failing.bad[failing.rows_of(item)]))
                      for item in range(failing.count)])  # fmt: skip
    return _names(failing.cases.take(first))[failing.owner]


def _put(trial: Trial, rows: Any, part: Cases) -> Trial:
    columns = {name: getattr(trial.cases, name).copy() for name in ("t", *FOLLOWING)}
    for name, column in columns.items():
        column[rows] = getattr(part, name)
    return tried(trial.failing, replace(trial.cases, **columns))


def _at(cases: Cases, rows: Any, highest: Any) -> Cases:
    """The cases with some rows no warmer than ``highest``, and what follows from the temperature computed anew."""
    changed: dict[str, Any] = {"t": np.where(rows, np.fmin(cases.t, highest), cases.t)}
    for name in FOLLOWING:
        anew = rows & (cases.source[name] == "computed")
        changed[name] = np.where(anew, np.nan, getattr(cases, name))
    return replace(complete(cases.changed(**changed)), problems=(), remarks=())
