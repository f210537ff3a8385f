"""Sizes of the plates of a set for its governing case: bores with strength, and their rounding to drills."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.design.checks import told
from lowpoint.design.criteria import Criteria
from lowpoint.design.drills import series
from lowpoint.design.plates import Construction
from lowpoint.design.split import Duty, Split, equal_margin
from lowpoint.errors import LowpointError

__all__ = ["Sized", "drill_choices", "drilled", "settled", "size"]

MOST_ROUNDS = 40
PATIENCE = 10
"""Rounds after which a thickness no longer falls."""
AGREED = 1e-11
"""Share of the pipe by which two rounds may differ in a bore length."""


@dataclass(frozen=True, eq=False)
class Sized:
    """Bores of equal margin that agree with the thickness which strength asks of them, before any rounding."""

    split: Split
    thickness: Any
    """m; NaN where none was asked for."""
    bore_length: Any
    rounds: int
    """Splits made until bores and thickness agreed."""

    @property
    def margin(self) -> float:
        return self.split.margin


def size(duty: Duty, construction: Construction, load: float, start: Any) -> Sized:
    """Split the drop; find the thickness that the bores ask for; split again with it; until the two agree.

    ``start``: bores (m) to begin with, one a plate. A thickness that is rounded up could swing between two steps;
    after some rounds it never falls again, so that what comes out is enough and the loss belongs to it.
    """
    thickness = construction.thickness_for(start, load)
    for rounds in range(1, MOST_ROUNDS + 1):
        lengths = construction.bore_length(thickness, duty.pipe)
        split = equal_margin(duty, lengths, start)
        thickness, start = settled(thickness, construction.thickness_for(split.bores, load), rounds), split.bores
        if np.abs(construction.bore_length(thickness, duty.pipe) - lengths).max() <= AGREED * duty.pipe:
            return Sized(split, thickness, lengths, rounds)
    raise LowpointError("plate set", "bores and thickness must agree", f"none that do in {MOST_ROUNDS} rounds",
                        "Give the thickness, or bevel the plates.")  # fmt: skip


def settled(before: Any, now: Any, rounds: int) -> Any:
    """Thickness of the next round."""
    return now if rounds < PATIENCE else np.fmax(before, now)


def drill_choices(bores: Any, pipe: float, holes: float, criteria: Criteria) -> Any:
    """(2, plates): the next smaller and the next larger drill; one of them twice where only one can be used."""
    low, high = series(criteria.drills).around(bores)
    high = np.where(high < pipe / np.sqrt(holes), high, np.nan)
    choices = np.array([np.where(np.isnan(low), high, low), np.where(np.isnan(high), low, high)])
    lost = np.isnan(choices).any(axis=0)
    if lost.any():
        raise LowpointError("drills", "there must be a drill near the bore that is below the pipe",
                            told(float(bores[lost][0]), "size", criteria.system),
                            "Set rounding to none, or choose a larger pipe.")  # fmt: skip
    return choices


def drilled(sized: Sized, duty: Duty, construction: Construction, load: float, criteria: Criteria) -> Any:
    """Bores rounded to drills.

    ``nearest``: of all combinations of the two drills around each bore, those whose every plate keeps the margin, and
    of these the one whose flow is nearest to the wanted one. They are judged with nothing else in the line: the plates
    share p1 - p2 as their losses do. If none keeps the margin, the one with the best least margin.
    """
    bores = sized.split.bores
    if criteria.rounding == "none":
        return bores
    choices = drill_choices(bores, duty.pipe, duty.holes, criteria)
    if criteria.rounding == "down":
        return choices[0]
    count = len(bores)
    lengths = construction.bore_length(construction.thickness_for(choices, load), duty.pipe)
    drops, limits = (x.reshape(2, count) for x in duty.curves(choices.ravel(), lengths.ravel()))
    column = np.arange(count)
    pick = np.arange(2**count)[:, None] >> column & 1
    least, total = _least_margin(duty, drops[pick, column], limits[pick, column])
    # Where the margin is not kept to begin with (a given number of plates) there is none to keep.
    wanted = criteria.margin if sized.margin >= criteria.margin - 1e-9 else -np.inf
    keeps = least >= wanted - 1e-9
    away = np.abs(np.log(total / (duty.p1 - duty.p2)))
    best = int(np.argmin(np.where(keeps, away, np.inf))) if keeps.any() else int(np.argmax(least))
    return choices[pick[best], column]


def _least_margin(duty: Duty, drops: Any, limits: Any) -> tuple[Any, Any]:
    """Least margin of each combination with p1 and p2 held, and the whole drop it takes at the wanted flow."""
    total = drops.sum(axis=1)
    shares = drops * ((duty.p1 - duty.p2) / total)[:, None]
    heads = duty.p1 - duty.base - (np.cumsum(shares, axis=1) - shares)
    return (heads / (limits * shares)).min(axis=1) - 1.0, total
