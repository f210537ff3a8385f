"""Two valves in parallel, each with half the flow: a cure for capacity, and for the index only where size counts."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from lowpoint.survey import worded
from lowpoint.survey.model import Cases, absent
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing
from lowpoint.survey.remedies.sizes import smaller
from lowpoint.survey.remedies.trying import OPEN_TO, Trial, tried

__all__ = ["halved", "splits"]

LEAST_TRAVEL = 0.1
SIZES_DOWN = 4
_SIMILAR = (
    "the smaller valves were taken as like this one: same FL, characteristic and limits (without credit below the "
    "tested size), rated coefficient and pipes in proportion to their size"
)
_BOTH = "both valves must open together; with one shut the other sees the whole flow"


def splits(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy, where two valves pass: of the smallest size that does."""
    wanted = ~failing.any(failing.found.flashing | (failing.cases.kind != "valve"))
    numbers, failing = np.flatnonzero(wanted), failing.only(wanted)
    if not failing.count:
        return
    trials = [tried(failing, halved(failing.cases, steps)) for steps in range(SIZES_DOWN + 1)]
    rank = np.array([_rank(trial) for trial in trials])
    best = len(trials) - 1 - np.argmax(rank[::-1], axis=0)  # the smallest size of the best rank
    for item in np.flatnonzero(rank.max(axis=0) > 0).tolist():
        yield int(numbers[item]), _remedy(trials[int(best[item])], failing, item)


def _rank(trial: Trial) -> Any:
    """2: passes, well inside its travel; 1: passes; 0: does not."""
    travel = trial.found.travel
    inside = ~(travel > OPEN_TO) & ~(travel < LEAST_TRAVEL)
    return trial.cures * (1 + trial.by_item(np.logical_and, inside))


def _remedy(trial: Trial, failing: Failing, item: int) -> Remedy:
    rows = trial.rows_of(item)
    size, rated = (float(x[rows.start]) for x in (trial.cases.valve_size, trial.cases.rated))
    what = "two valves in parallel, each with half the flow"
    what += "" if np.isnan(size) else f", nominal size {worded.amount(size, 'nominal size', '.5g')}"
    what += "" if np.isnan(rated) else f", rated {wording.kv(rated)}"
    figures = {"valves": (2.0, "ratio")}
    figures |= {} if np.isnan(size) else {"valve size": (size, "size")}
    figures |= {} if np.isnan(rated) else {"rated coefficient": (rated, "coefficient")}
    cautions = [_BOTH] if size == failing.cases.valve_size[rows.start] or np.isnan(size) else [_SIMILAR, _BOTH]
    return trial.remedy(item, "split", what, figures, cautions)


def halved(cases: Cases, steps: int) -> Cases:
    """Each case with half its flow, in a valve some nominal sizes smaller; one with a vendor's table keeps its size."""
    size = cases.valve_size
    for _ in range(steps):
        size = np.where(absent(cases.table), smaller(size), size)
    return resized(cases.changed(flow=0.5 * cases.flow, mass_flow=0.5 * cases.mass_flow), size)


def resized(cases: Cases, size: Any) -> Cases:
    """Valves of another size with rated coefficients as its square and pipes in proportion."""
    ratio = np.where(np.isnan(size), 1.0, size / cases.valve_size)
    ratio = np.nan_to_num(ratio, nan=1.0)
    return cases.changed(valve_size=size, rated=cases.rated * ratio * ratio, pipe_in=cases.pipe_in * ratio,
                         pipe_out=cases.pipe_out * ratio)  # fmt: skip
