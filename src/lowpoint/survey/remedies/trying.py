"""A remedy applied to all its items at once, judged by the same core, and handed over item by item."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np

from lowpoint.survey.calculating import calculate
from lowpoint.survey.items import ORDER
from lowpoint.survey.model import Cases, Findings, absent
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing, as_strict, index_fails
from lowpoint.survey.remedies.searching import rounded_up
from lowpoint.units import KV

__all__ = ["BARELY", "OPEN_TO", "Trial", "advice", "enlarged", "fully_open", "tried"]

OPEN_TO = 0.9
"""Opening up to which a valve is chosen: the tenth above it is kept in hand (common practice)."""
BARELY = "the bare least is named, which just keeps the limit: add what the tolerances of the inputs ask for"
"""Caution of remedies that are sought until the limit is kept, and no further."""
_TOO_SMALL = "the rated coefficient is too small with it: {} is needed, {} is rated"
_PASS_LESS = "the plates pass less than the flow wanted with it: they must be made anew"
_UNANSWERED = "{} of the item's cases {} no verdict and {} not tried: cure what is wrong with the list first"


@dataclass(frozen=True, eq=False)
class Trial:
    """Cases of failing items with a remedy applied (and those of what is added), and what was found for them."""

    failing: Failing
    cases: Cases
    of: Any
    """Row of ``failing`` that each case stands for; never falls from item to item."""
    found: Findings
    added: Any
    """Cases of what is added to the item (a plate): their limits are their own."""
    rated: Any
    """Rated coefficient that the item must be given along with the remedy, NaN where none."""

    @cached_property
    def good(self) -> Any:
        """Cases that pass, and whose margin counts to no severer limit than before."""
        return self.keeps & ~self.found.over_capacity

    @cached_property
    def keeps(self) -> Any:
        """The same, whatever the capacity."""
        kept = as_strict(self.found, self.failing.found.keep[self.of])
        return ~absent(self.found.regime) & ~index_fails(self.found) & (kept | self.added)

    @cached_property
    def owner(self) -> Any:
        return self.failing.owner[self.of]

    @cached_property
    def starts(self) -> Any:
        return np.searchsorted(self.owner, np.arange(self.failing.count))

    def by_item(self, how: np.ufunc, values: Any) -> Any:
        """``how`` over the trial's cases of each item; every item must have one."""
        return how.reduceat(values, self.starts) if self.failing.count else np.zeros(0, np.asarray(values).dtype)

    @cached_property
    def cures(self) -> Any:
        """Items all of whose answered cases pass."""
        return self.by_item(np.logical_and, self.good)

    @cached_property
    def cures_index(self) -> Any:
        """Items whose index is cured, be the valve large enough or not."""
        return self.by_item(np.logical_and, self.keeps)

    @cached_property
    def margin(self) -> Any:
        """Least margin of each item."""
        return self.by_item(np.fmin, self.found.margin)

    def rows_of(self, item: int) -> slice:
        last = self.starts[item + 1] if item + 1 < self.failing.count else len(self.of)
        return slice(int(self.starts[item]), int(last))

    def comes_to(self, item: int) -> str:
        """What comes of it: ``the damage limit is kept in all 3 cases, least margin +12 %, travel 38-77 %``."""
        rows = self.rows_of(item)
        own = ~self.added[rows]
        found, of = self.found, self.failing.items[item]
        words = f"the {wording.limit_words(found.keep[rows][own])} is kept "
        words += wording.in_cases(len(of.rows) - of.unanswered, of.unanswered)
        if np.isnan(self.rated[item]):
            more = ""
        else:
            more = f" with a rated coefficient of at least {wording.kv(float(self.rated[item]), 'up')}"
        margin = wording.share(float(self.margin[item]))
        return f"{words}{more}, least margin {margin}{wording.openings(found.travel[rows][own])}"

    def _verdicts(self, item: int) -> tuple[str | None, ...]:
        """Regime of each of the item's cases: the worst of the rows that stand for it."""
        rows = self.rows_of(item)
        worst: dict[int, str | None] = {}
        for of, regime in zip(self.of[rows].tolist(), self.found.regime[rows].tolist(), strict=True):
            place = int(self.failing.places[of])
            worst[place] = _worse(worst[place], regime) if place in worst else regime
        return tuple(worst.get(place) for place in self.failing.items[item].rows)

    def _too_small(self, rows: slice) -> list[str]:
        large = self.found.over_capacity[rows]
        if not large.any():
            return []
        needed, share = self.found.coefficient[rows], self.found.capacity[rows]
        worst = int(np.argmax(np.where(large, share, 0.0)))
        if self.cases.kind[rows][worst] != "valve":
            return [_PASS_LESS]
        return [_TOO_SMALL.format(wording.kv(float(needed[worst])), wording.kv(float(needed[worst] / share[worst])))]

    def remedy(
        self, item: int, kind: str, what: str, figures: Mapping[str, tuple[float, str]], cautions: Sequence[str] = (),
        *, text: str = "", brief: str = "",
    ) -> Remedy:  # fmt: skip
        """The remedy of one item; it cures where every case passed, and says why it does not where one did not.

        ``what`` must be done, with what comes of it, is its text, if that is not given; and its brief form.
        """
        rows = self.rows_of(item)
        said, numbers, whole = list(cautions), dict(figures), self.failing.items[item]
        if not np.isnan(self.rated[item]):
            numbers["rated coefficient"] = (float(self.rated[item]), "coefficient")
        said += self._too_small(rows)
        if whole.unanswered:
            one = whole.unanswered == 1
            said.append(_UNANSWERED.format(whole.unanswered, "has" if one else "have", "was" if one else "were"))
        cures = bool(self.cures[item]) and not whole.unanswered
        return worded(Remedy(kind, text or f"{what}: {self.comes_to(item)}", numbers, cures, float(self.margin[item]),
                             self._verdicts(item), tuple(said), self.cases.take(np.arange(rows.start, rows.stop)),
                             brief or what))  # fmt: skip


def worded(remedy: Remedy) -> Remedy:
    """A remedy whose sentences are templates, put into metric words; the templates go with it."""
    return replace(remedy, templates=(remedy.text, remedy.brief, *remedy.cautions)).in_units("metric")


def _worse(one: str | None, other: str | None) -> str | None:
    if one is None or other is None:
        return None
    return min(one, other, key=ORDER.index)


def tried(failing: Failing, cases: Cases, of: Any = None, added: Any = None) -> Trial:
    """Judge cases with a remedy applied; ``of``: which row of ``failing`` each stands for (each its own, if None)."""
    of = np.arange(cases.count) if of is None else of
    added = np.zeros(cases.count, np.bool_) if added is None else added
    return Trial(failing, cases, of, calculate(cases), added, np.full(failing.count, np.nan))


def fully_open(cases: Cases, coefficient: Any, travel: float = OPEN_TO) -> Any:
    """Rated coefficient with which a valve passes a coefficient at this opening, by its characteristic.

    Linear ``phi = 1/R + (1 - 1/R) h``, equal percentage ``phi = R^(h-1)`` (IEC 60534-2-4, from memory); a tenth more
    than the coefficient where the characteristic is not given (common practice).
    """
    least = np.nan_to_num(1.0 / cases.rangeability)
    linear = least + (1.0 - least) * travel
    equal = np.nan_to_num(cases.rangeability ** (travel - 1.0), nan=travel)
    return coefficient / np.where(cases.characteristic == "linear", linear, np.where(
        cases.characteristic == "equal percentage", equal, travel))  # fmt: skip


def enlarged(trial: Trial) -> Trial:
    """Give items whose index is cured but whose valve is now too small the rated coefficient that they need.

    A higher back-pressure or a smaller drop asks for a larger coefficient. Valves with a vendor's table are left: their
    limits belong to that very valve.
    """
    short = trial.found.over_capacity & (trial.cases.kind == "valve") & absent(trial.cases.table)
    wanted = trial.cures_index & ~trial.cures & trial.by_item(np.logical_or, short)
    if not wanted.any():
        return trial
    needed = trial.by_item(np.fmax, np.where(short, fully_open(trial.cases, trial.found.coefficient), np.nan))
    needed = np.where(wanted, rounded_up(needed, KV, 3), np.nan)
    rows = wanted[trial.owner] & (trial.cases.kind == "valve")
    rated = np.where(rows, needed[trial.owner], trial.cases.rated)
    again = tried(trial.failing, trial.cases.changed(rated=rated), trial.of, trial.added)
    return Trial(again.failing, again.cases, again.of, again.found, again.added, needed)


def advice(failing: Failing, item: int, kind: str, text: str, cautions: Sequence[str] = (), brief: str = "") -> Remedy:
    """Words without a trial: what cannot help, and why, or what practice does."""
    rows = failing.rows_of(item)
    regimes = dict(zip(failing.places[rows].tolist(), failing.found.regime[rows].tolist(), strict=True))
    verdicts = tuple(regimes.get(place) for place in failing.items[item].rows)
    return worded(Remedy(kind, text, {}, False, float("nan"), verdicts, tuple(cautions), brief=brief))
