"""More pressure at the outlet: a higher back-pressure, or a lower place, which raises both pressures.

Without reducers and travel tables the least outlet pressure is ``p2 = p1 - (p1 - pv)/limit`` by the definition of the
index. Where the limits move with the coefficient or the opening, it is found by search; the flow stays as it is.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from lowpoint.survey import worded
from lowpoint.survey.calculating import calculate
from lowpoint.survey.model import Cases
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.outlets import outlet_pressures
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing, as_strict, index_fails
from lowpoint.survey.remedies.searching import least, rounded_up
from lowpoint.survey.remedies.trying import BARELY, enlarged, tried
from lowpoint.units import GRAVITY

__all__ = ["DEEP", "back_pressures", "lower_locations", "raise_needed"]

MOST_SHARE = 0.98
"""Share of a drop that a higher back-pressure may take; a valve without a drop controls nothing."""
DEEP, DEEPEST = 30.0, 100.0
"""m: lower than the first is seldom practical, lower than the last is not named."""
STEP = 0.1
"""m, steps in which a lower place is named."""
_HOW = "who holds the outlet's pressure must be asked whether it can be raised; the flow was taken as it is"
_PLACE = "a free jet has the pressure of the open air behind it: only a line, a leg or a plate there can raise it"
_COLUMN = "the column of liquid alone was reckoned, both lines going on to where they go now"
_FAR = "a place this far down is seldom practical"


def back_pressures(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy: the least outlet pressure in every failing case."""
    raised = raise_needed(failing)
    ends = failing.any(failing.bad) & failing.all(~failing.bad | ~np.isnan(raised))
    raised, failing = raised[ends[failing.owner]], failing.only(ends)
    if not failing.count:
        return
    p2 = failing.cases.p2 + np.nan_to_num(raised)
    changed = ~np.isnan(raised)
    placed = np.where(changed, np.array(None, object), failing.cases.outlet)
    trial = enlarged(tried(failing, failing.cases.changed(p2=p2, outlet=placed)))
    numbers = np.flatnonzero(ends)
    for item in range(failing.count):
        rows = failing.rows_of(item)
        most = rows.start + int(np.nanargmax(raised[rows]))
        amount = float(raised[most])
        what = (f"back-pressure raised by {wording.pressure(amount, 'up')}, p2 at least "
                f"{wording.absolute(float(p2[most]), '.5g', 'up')} in {failing.name(most)}")  # fmt: skip
        what += f" and less in {_others(int(changed[rows].sum()) - 1)}" if changed[rows].sum() > 1 else ""
        figures = {"back-pressure raised by": (amount, "pressure"), "p2 at least": (float(p2[most]), "pressure")}
        cautions = [BARELY, _HOW, *([_PLACE] if (failing.cases.outlet[rows] == "free jet").any() else [])]
        yield int(numbers[item]), trial.remedy(item, "back-pressure", what, figures, cautions)


def _others(count: int) -> str:
    return "1 other case" if count == 1 else f"{count} other cases"


def raise_needed(failing: Failing) -> Any:
    """Least rise of p2 of every failing case, as printed; NaN where none below p1 does, and for cases that pass."""
    rows = np.flatnonzero(failing.bad)
    raised = np.full(len(failing.bad), np.nan)
    if not len(rows):
        return raised
    cases, kept = failing.cases.take(rows), failing.found.keep[rows]
    drop = cases.p1 - cases.p2

    def passes(share: Any) -> Any:
        return _keeps(cases.changed(p2=cases.p2 + share * drop), kept)

    needed = rounded_up(least(passes, 0.0, np.full(len(rows), MOST_SHARE)) * drop, 1e5)
    raised[rows] = np.where(needed < drop, needed, np.nan)
    return raised


def _keeps(cases: Cases, kept: Any) -> Any:
    """Where the index is above the same limit as before, neither choked nor flashing."""
    found = calculate(cases)
    return ~index_fails(found) & (found.margin > 0.0) & as_strict(found, kept)


def lower_locations(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy: how far down it must stand. A free jet has no line that could follow."""
    wanted = failing.any(failing.bad) & failing.all(failing.cases.outlet != "free jet")
    numbers, failing = np.flatnonzero(wanted), failing.only(wanted)
    if not failing.count:
        return

    def passes(depth: Any) -> Any:
        return failing.all(_keeps(_lowered(failing.cases, depth[failing.owner]), failing.found.keep))

    depth = least(passes, 0.0, np.full(failing.count, DEEPEST))
    near = ~np.isnan(depth)
    numbers, failing, depth = numbers[near], failing.only(near), np.ceil(depth[near] / STEP - 1e-9) * STEP
    if not failing.count:
        return
    trial = enlarged(tried(failing, _lowered(failing.cases, depth[failing.owner])))
    for item in range(failing.count):
        row = failing.rows_of(item).start
        gained = float(trial.cases.p1[row] - failing.cases.p1[row])
        fall = worded.amount(float(depth[item]), "elevation", ".1f", "up")
        what = f"{fall} lower, where p1 and p2 are {wording.pressure(gained)} higher"
        figures = {"lower by": (float(depth[item]), "elevation"), "pressures raised by": (gained, "pressure")}
        cautions = [BARELY, _COLUMN, *([_FAR] if depth[item] > DEEP else [])]
        yield int(numbers[item]), trial.remedy(item, "lower location", what, figures, cautions)


def _lowered(cases: Cases, depth: Any) -> Cases:
    """The same cases in a lower place: both pressures rise by the column; an outlet's place is then further up."""
    column = cases.density * GRAVITY * depth
    placed = np.flatnonzero(cases.source["p2"] == "place")
    rise = cases.outlet_rise.copy()
    p2 = cases.p2 + column
    rise[placed] = np.nan_to_num(rise[placed]) + depth[placed]
    if len(placed):
        # A falling leg that parts does not hand its whole column on.
        there = cases.take(placed).changed(outlet_rise=rise[placed], p2=np.nan)
        p2[placed] = outlet_pressures(there)[0]
    return cases.changed(p1=cases.p1 + column, p2=p2, outlet_rise=rise)
