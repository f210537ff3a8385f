"""Another valve in the same place: with a higher recovery factor where the flow chokes, with a lower limit elsewhere.

FL rules choking alone. A tested limit cannot be had from an FL, so where one of those is crossed the remedy says what
limit the vendor must state; choking is seen to beside it.
"""

from __future__ import annotations

import csv
from collections.abc import Iterator
from functools import cache
from importlib.resources import files
from typing import Any

import numpy as np

from lowpoint.physics.indices import from_upstream
from lowpoint.survey.calculating import calculate
from lowpoint.survey.limiting import LIMITS, form_of, stated
from lowpoint.survey.model import Cases
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing, as_strict, index_fails
from lowpoint.survey.remedies.searching import least
from lowpoint.survey.remedies.trying import BARELY, enlarged, tried

__all__ = ["other_valves"]

HIGHEST_FL = 0.99
"""FL of trims with three stages and more (IEC 60534-2-1, table of typical values, from memory)."""
LOWEST_LIMIT = 1.001
CLEARLY = 0.01
"""Margin above which a remedy does more than just keep the limit."""
FL_STEP, LIMIT_STEP = 0.001, 0.001
STAGED = 1.25
"""Limits below this (upstream form) are those of staged trims rather than of one throttling place (common practice)."""
_VENDOR = "a valve to be found and tested: ask its vendor for FL and limits at the openings of every case"
_LOW = "so low a limit is that of a staged trim rather than of one throttling place (common practice)"
_TYPICAL = (
    "typical FL at rated travel that reach it: {} (table of IEC 60534-2-1, mostly from memory; screening values, lower "
    "as rotary valves open)"
)


def other_valves(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy: the least FL, the highest limit, or both. Nothing of it helps flashing."""
    wanted = failing.any(failing.bad) & ~failing.any(failing.found.flashing | (failing.cases.kind != "valve"))
    numbers, failing = np.flatnonzero(wanted), failing.only(wanted)
    if not failing.count:
        return
    needed = _factors(failing)
    reached = ~np.isnan(needed)
    numbers, failing, needed = numbers[reached], failing.only(reached), needed[reached]
    if not failing.count:
        return
    cases = _with_factor(failing, needed)
    limit = _limits(failing, cases)
    reached = ~np.isnan(limit)
    numbers, failing, needed, limit = numbers[reached], failing.only(reached), needed[reached], limit[reached]
    if not failing.count:
        return
    trial = enlarged(tried(failing, _with_limit(failing, _with_factor(failing, needed), limit)))
    bare = failing.by_item(np.fmax, _bare(failing))
    for item in range(failing.count):
        now = float(bare[item])
        text, figures, cautions = _said(failing, item, float(needed[item]), float(limit[item]), now)
        barely = [] if np.isinf(limit[item]) and trial.margin[item] > CLEARLY else [BARELY]
        yield int(numbers[item]), trial.remedy(item, "higher recovery factor", text, figures,
                                               [*barely, _VENDOR, *cautions])  # fmt: skip


def _said(
    failing: Failing, item: int, fl: float, limit: float, limit_now: float
) -> tuple[str, dict[str, tuple[float, str]], list[str]]:
    rows = failing.rows_of(item)
    words, figures, cautions = [], {}, []
    if fl > 0.0:
        now = float(failing.found.fl[rows].min())
        words.append(f"FL of at least {fl:.3f} at every opening (now {now:.3g})")
        figures["FL at least"] = (fl, "ratio")
        names = styles_with(fl)
        if names:
            cautions.append(_TYPICAL.format("; ".join(names)))
    if np.isfinite(limit):
        kept = failing.found.keep[rows]
        of = wording.limit_words(kept[kept != "choked"])
        of = of if of.endswith("s") else f"{'an' if of.startswith('i') else 'a'} {of}"
        words.append(f"{of} (upstream form, bare, at this size and pressure) of at most {limit:.3f} "
                     f"(now {limit_now:.4g})")  # fmt: skip
        figures |= {"limit at most": (limit, "ratio"), "limit now": (limit_now, "ratio")}
        cautions += [_LOW] if limit < STAGED else []
    return f"a valve with {wording.spoken(words)}", figures, cautions


# --- the recovery factor ------------------------------------------------------------------------------------------


def _factors(failing: Failing) -> Any:
    """Least FL of each item with which no case chokes; 0 where FL is not the matter, NaN where 0.99 does not do."""
    counted = failing.found.keep == "choked"
    hurt = failing.found.choked | (counted & (failing.found.margin <= 0.0))
    concerned = failing.any(hurt)
    needed = np.zeros(failing.count)
    if not concerned.any():
        return needed
    part = failing.only(concerned)

    def passes(fl: Any) -> Any:
        found = calculate(part.cases.changed(**_factor(part, fl)))
        return part.all(~found.choked & (found.sigma > found.choked_limit))

    low = part.by_item(np.fmin, part.found.fl)
    found = least(passes, np.minimum(low, HIGHEST_FL - FL_STEP), np.full(part.count, HIGHEST_FL))
    needed[concerned] = np.ceil(found / FL_STEP - 1e-6) * FL_STEP
    return np.where(needed > HIGHEST_FL + 1e-9, np.nan, needed)


def _factor(failing: Failing, fl: Any) -> dict[str, Any]:
    """Columns of the cases with FL no lower than these (one an item); those that need no more keep theirs."""
    wanted = fl[failing.owner]
    lower = ~(failing.found.fl >= wanted)
    return {"fl": np.where(lower, wanted, failing.cases.fl)}


def _with_factor(failing: Failing, fl: Any) -> Cases:
    columns = _factor(failing, fl)
    given = columns["fl"] != failing.cases.fl
    given &= ~np.isnan(columns["fl"])
    source = {**failing.cases.source, "fl": np.where(given, np.array("given", object), failing.cases.source["fl"])}
    return failing.cases.changed(**columns, source=source)


# --- the limit ----------------------------------------------------------------------------------------------------


def _limits(failing: Failing, cases: Cases) -> Any:
    """Highest limit of each item that every case keeps; inf where none is crossed, NaN where none above 1 is kept."""
    found = calculate(cases)
    concerned = failing.any((failing.found.keep != "choked") & (found.margin <= 0.0))
    limit = np.full(failing.count, np.inf)
    if not concerned.any():
        return limit
    part = failing.only(concerned)
    own = cases.take(np.flatnonzero(concerned[failing.owner]))
    top = part.by_item(np.fmax, part.found.sigma) * 1.5

    def passes(fall: Any) -> Any:
        with_it = calculate(_with_limit(part, own, top - fall))
        return part.all(~index_fails(with_it) & (with_it.margin > 0.0) & as_strict(with_it, part.found.keep))

    lowest = least(passes, 0.0, top - LOWEST_LIMIT)
    limit[concerned] = np.floor((top - lowest) / LIMIT_STEP + 1e-6) * LIMIT_STEP
    return np.where(limit < LOWEST_LIMIT - 1e-9, np.nan, limit)


def _bare(failing: Failing) -> Any:
    """The limit to keep of the bare valve at its size and head, NaN for choking."""
    values = np.full(len(failing.owner), np.nan)
    for name in LIMITS:
        values = np.where(failing.found.keep == name, getattr(failing.found, f"{name}_scaled"), values)
    return values


def _with_limit(failing: Failing, cases: Cases, limit: Any) -> Cases:
    """The cases with the limit to keep at most this (one an item), as it holds at the size and head of each case.

    Limits that stand above it come down with it: a valve with a milder limit this low has no severer one above it.
    """
    wanted = limit[failing.owner]
    rows = np.isfinite(wanted) & (failing.found.keep != "choked")
    form = form_of(cases)
    own = stated(cases, failing.found.travel)
    columns: dict[str, Any] = {}
    for name in LIMITS:
        stands = getattr(failing.found, f"{name}_scaled")
        lowered = rows & ~np.isnan(stands) & ((failing.found.keep == name) | (stands > wanted))
        lowered &= _order(name) >= _orders(failing.found.keep)
        # An acoustic estimate that is not lowered stays one: as a given number it would pass for a tested limit.
        carried = rows & ~np.isnan(own[name])
        bare = np.where(lowered, wanted, stands)
        columns[name] = np.where(lowered | carried, from_upstream(bare, form), getattr(cases, name))
    for name in ("size_ref", "head_ref"):
        columns[name] = np.where(rows, np.nan, getattr(cases, name))
    return cases.changed(**columns)


def _order(name: str) -> int:
    return LIMITS.index(name)


def _orders(kept: Any) -> Any:
    return np.array([LIMITS.index(word) if word in LIMITS else len(LIMITS) for word in kept.tolist()])


@cache
def _typical() -> list[tuple[str, float]]:
    text = files("lowpoint").joinpath("tables/valve_typical.csv").read_text(encoding="utf-8")
    return [(f"{row['style']} ({row['direction'].replace('|', ' or ')})", float(row["fl"]))
            for row in csv.DictReader(text.splitlines()) if row["fl"]]  # fmt: skip


def styles_with(fl: float, most: int = 3) -> list[str]:
    """A few styles of the published table with at least this FL, the nearest first."""
    found = sorted((value, name) for name, value in _typical() if value >= fl)
    return [f"{name} {value:g}" for value, name in found[:most]]
