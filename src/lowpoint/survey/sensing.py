"""How sure a verdict is: the margin, and the share of draws that pass, when the inputs move within their tolerances.

Draws are uniform within the tolerances and independent of one another, every input for itself. All cases share the
same draws (common random numbers, one seed): what a case comes to depends on nothing but the case, the tolerances, the
number of draws and the seed, and two cases are compared under equal luck. The range of the margin is that of the two
corners where every input is at its adverse, or favourable, end.

Where it can be shown (:mod:`lowpoint.survey.proving`) that a case passes, or fails, within all tolerances, nothing is
drawn for it.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import Any

import numpy as np

from lowpoint.errors import LowpointError
from lowpoint.survey.model import Cases, Findings, absent
from lowpoint.survey.moving import Movable, movable
from lowpoint.survey.outcome import Sensitivity, Tolerance
from lowpoint.survey.proving import proof
from lowpoint.survey.staying import stay_words
from lowpoint.survey.tolerances import DEFAULTS
from lowpoint.survey.trying import Tried, needed, tried

__all__ = ["DRAWS", "SEED", "draws_of", "sense", "stay_words"]

DRAWS, MOST_DRAWS = 200, 100_000
SEED = 20_000
"""Any fixed number would do."""
BLOCK = 20_000
"""Moved cases at a time: what fits the cache, and bounds the memory."""
INPUTS = tuple(tolerance.field for tolerance in DEFAULTS)


def sense(
    cases: Cases, findings: Findings, tolerances: Sequence[Tolerance] | None = None, draws: int = DRAWS,
    seed: int = SEED, progress: Callable[[int, int], None] | None = None, *, every: bool = False,
) -> Sensitivity:  # fmt: skip
    """The sensitivity of completed cases (``Survey.cases``) with their findings.

    ``tolerances``: of every input, as :func:`~lowpoint.survey.tolerances.combined` makes them; the defaults without.
    ``every``: draw for all cases, shown or not. ``progress`` is told (cases drawn, cases to draw).
    LowpointError for a number of draws or a seed that cannot be.
    """
    if not 1 <= draws <= MOST_DRAWS:
        raise LowpointError("draws", f"must be from 1 to {MOST_DRAWS}", str(draws))
    if seed < 0:
        raise LowpointError("seed", "must not be negative", str(seed))
    stated = tuple(DEFAULTS if tolerances is None else tolerances)
    answered = np.flatnonzero(~absent(findings.regime))
    sensing = _Sensing(cases.count, draws)
    if len(answered):
        part = needed(cases.take(answered), findings.keep[answered])
        sensing.fill(movable(part, stated), findings, answered, draws_of(draws, seed), progress, every)
    return Sensitivity(stated, draws, seed, sensing.low, sensing.high, sensing.stays, sensing.dominant, sensing.swing,
                       sensing.proven, sensing.unanswered)  # fmt: skip


def draws_of(draws: int, seed: int) -> dict[str, Any]:
    """The moves of every draw, from -1 to 1, by input; the first n of more draws are those of n draws."""
    found = 2.0 * np.random.Generator(np.random.PCG64(seed)).random((draws, len(INPUTS))) - 1.0
    return {name: found[None, :, column] for column, name in enumerate(INPUTS)}


class _Sensing:
    """The columns of a sensitivity as they fill up; a class only to keep them together."""

    def __init__(self, count: int, draws: int) -> None:
        self.draws = draws
        self.low, self.high, self.stays, self.swing, self.unanswered = (np.full(count, np.nan) for _ in range(5))
        self.dominant = np.full(count, None, object)
        self.proven = np.zeros(count, np.bool_)

    def fill(self, moving: Movable, findings: Findings, places: Any, draws: dict[str, Any],
             progress: Callable[[int, int], None] | None, every: bool) -> None:  # fmt: skip
        keep, nominal = findings.keep[places], findings.margin[places]
        for rows, part in _blocks(moving, keep, np.arange(len(places)), 2 * len(INPUTS) + 2):
            self._range(part, keep[rows], nominal[rows], places[rows])
        shown = proof(moving, keep)
        proven = (shown.passes | shown.fails) & (not every)
        self.proven[places] = proven
        self.stays[places] = np.where(proven, shown.passes, np.nan)
        self.unanswered[places] = np.where(proven, 0.0, np.nan)
        wanted = np.flatnonzero(~proven)
        done = 0
        for rows, part in _blocks(moving, keep, wanted, self.draws):
            self._drawn(part, keep[rows], draws, places[rows])
            done += len(rows)
            if progress:
                progress(done, len(wanted))

    def _range(self, part: Movable, keep: Any, nominal: Any, places: Any) -> None:
        """One input at a time to both its ends; then all of them, each to its worse and to its better end."""
        ends = _single_ends(part, keep)
        least, most = (np.fmin(nominal[:, None], np.fmin(*ends)), np.fmax(nominal[:, None], np.fmax(*ends)))
        swings = most - least
        first = np.argmax(np.nan_to_num(swings), axis=1)
        swing = swings[np.arange(len(places)), first]
        self.swing[places] = swing
        self.dominant[places] = np.where(swing > 0.0, np.array(INPUTS, object)[first], np.array(None, object))
        better = np.where(_is_better(ends[1], ends[0], nominal[:, None]), 1.0, -1.0)
        corners = np.stack([-better, better], axis=2)
        margin = _margin(part, keep, {name: corners[:, i] for i, name in enumerate(INPUTS)})
        self.low[places] = np.fmin(np.fmin(margin[:, 0], margin[:, 1]), least.min(axis=1))
        self.high[places] = np.fmax(np.fmax(margin[:, 0], margin[:, 1]), most.max(axis=1))

    def _drawn(self, part: Movable, keep: Any, draws: dict[str, Any], places: Any) -> None:
        found = _tried(part, keep, draws)
        margin, passes = (x.reshape(len(places), -1) for x in found)
        self.stays[places] = passes.mean(axis=1)
        self.unanswered[places] = np.isnan(margin).mean(axis=1)
        self.low[places] = np.fmin(self.low[places], np.fmin.reduce(margin, axis=1))
        self.high[places] = np.fmax(self.high[places], np.fmax.reduce(margin, axis=1))


def _is_better(up: Any, down: Any, nominal: Any) -> Any:
    """Whether an input's upper end is the favourable one; an end without an answer is told by the other."""
    return np.where(np.isnan(up), down < nominal, np.where(np.isnan(down), up > nominal, up > down))


def _tried(part: Movable, keep: Any, moves: dict[str, Any]) -> Tried:
    cases, factor = part.moved(moves)
    return tried(cases, np.repeat(keep, len(factor) // len(keep)), factor)


def _margin(part: Movable, keep: Any, moves: dict[str, Any]) -> Any:
    return _tried(part, keep, moves).margin.reshape(len(keep), -1)


def _single_ends(part: Movable, keep: Any) -> tuple[Any, Any]:
    """Margin with each input alone at its lower, and at its upper, end; (cases, inputs) each."""
    one = np.eye(len(INPUTS))
    found = _margin(part, keep, {name: np.concatenate([-one[i], one[i]])[None] for i, name in enumerate(INPUTS)})
    return found[:, : len(INPUTS)], found[:, len(INPUTS) :]


def _blocks(moving: Movable, keep: Any, rows: Any, variants: int) -> Iterator[tuple[Any, Movable]]:
    """The rows in blocks of bounded size; those of one kind, limit, table or set of plates stand together."""
    cases = moving.cases
    groups: dict[Any, list[int]] = {}
    columns = (cases.kind[rows], keep[rows], cases.table[rows], cases.bores[rows])
    for row, *words in zip(rows.tolist(), *(column.tolist() for column in columns), strict=True):
        groups.setdefault(tuple(map(str, words)), []).append(row)
    ordered = np.array([row for _, members in sorted(groups.items()) for row in members], int)
    size = max(1, BLOCK // variants)
    for start in range(0, len(ordered), size):
        block = ordered[start : start + size]
        yield block, moving.take(block)
