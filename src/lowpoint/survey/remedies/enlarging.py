"""A larger valve, where the flow does not pass: the rated coefficient that it takes, in a size that can have it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.physics.fittings import large_capacity
from lowpoint.survey import worded
from lowpoint.survey.calculating import calculate
from lowpoint.survey.model import Cases, TravelTable, absent
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing
from lowpoint.survey.remedies.searching import rounded_up
from lowpoint.survey.remedies.sizes import larger, next_multiple
from lowpoint.survey.remedies.trying import Trial, fully_open, tried
from lowpoint.units import KV

__all__ = ["larger_valves"]

SIZES_UP = 3
WIDEST = 1.1
"""Valve size over pipe that still counts as line size."""
_SAME_STYLE = "a valve of the same style was taken: same FL, characteristic and limits, scaled to its size as stated"
_TABLE = "the vendor's table was scaled with the coefficient: ask for that of the larger valve"
_LOW = "at the least flow it is then less than 10 % open: choose a wider rangeability, or two valves"


def larger_valves(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy, for valves that are too small and pass every case once they are not."""
    short = failing.found.over_capacity
    wanted = failing.any(short) & ~failing.any(failing.found.flashing | (failing.cases.kind != "valve"))
    numbers, failing = np.flatnonzero(wanted), failing.only(wanted)
    if not failing.count:
        return
    trials = [_tried(failing, steps) for steps in range(SIZES_UP + 1)]
    rank = np.array([_rank(trial) for trial in trials])
    best = np.argmax(rank, axis=0)  # the first, so smallest, of the best rank
    for item in np.flatnonzero(rank.max(axis=0) > 0).tolist():
        yield int(numbers[item]), _remedy(trials[int(best[item])], failing, item)


def _rank(trial: Trial) -> Any:
    """2: passes, within the standard's assurance for its size; 1: passes; 0: does not."""
    fair = ~large_capacity(trial.cases.rated, trial.cases.valve_size)
    return trial.cures * (1 + trial.by_item(np.logical_and, fair))


def _remedy(trial: Trial, failing: Failing, item: int) -> Remedy:
    rows = trial.rows_of(item)
    row = rows.start
    rated, size = float(_full(trial.cases)[row]), float(trial.cases.valve_size[row])
    before = float(_full(failing.cases)[failing.rows_of(item).start])
    text = f"a rated coefficient of at least {wording.kv(rated, 'up')} (now {wording.kv(before)})"
    figures = {"rated coefficient": (rated, "coefficient")}
    if size > failing.cases.valve_size[failing.rows_of(item).start]:
        text += f", nominal size {worded.amount(size, 'nominal size', '.5g')}"
        figures["valve size"] = (size, "size")
    cautions = [_SAME_STYLE]
    cautions += [] if absent(trial.cases.table[rows]).all() else [_TABLE]
    cautions += [_LOW] if (trial.found.travel[rows] < 0.1).any() else []
    return trial.remedy(item, "larger valve", text, figures, cautions)


def _full(cases: Cases) -> Any:
    """Rated coefficients, those of tables included."""
    rated = cases.rated
    for name, table in cases.tables.items():
        if table.coefficient is not None:
            rated = np.where((cases.table == name) & np.isnan(rated), table.coefficient[-1], rated)
    return rated


def _tried(failing: Failing, steps: int) -> Trial:
    """Some nominal sizes larger, within the pipe, and with the rated coefficient that the flows then ask for."""
    size = failing.cases.valve_size
    for _ in range(steps):
        next_ = larger(size)
        fits = ~(next_ > WIDEST * np.fmin(failing.cases.pipe_in, failing.cases.pipe_out))
        size = np.where(fits, next_, size)
    cases = failing.cases.changed(valve_size=size)
    needed = failing.by_item(np.fmax, fully_open(cases, calculate(cases).coefficient))[failing.owner]
    tabled = ~absent(cases.table)
    multiple = next_multiple(np.fmax(needed / _full(cases), 1.0))
    rated = np.where(tabled, cases.rated * multiple, rounded_up(needed, KV, 3))
    return tried(failing, _scaled(replace(cases, rated=rated), np.where(tabled, multiple, np.nan)))


def _scaled(cases: Cases, multiple: Any) -> Cases:
    """Vendors' tables with their coefficients multiplied, one for each multiple that is needed."""
    tables, names = dict(cases.tables), cases.table.copy()
    for row in np.flatnonzero(~np.isnan(multiple)).tolist():
        table: TravelTable | None = cases.tables.get(cases.table[row])
        if table is None or table.coefficient is None:
            continue
        name = f"{table.name} times {multiple[row]:.3g}"
        tables.setdefault(name, replace(table, name=name, coefficient=table.coefficient * multiple[row]))
        names[row] = name
    return replace(cases, tables=tables, table=names)
