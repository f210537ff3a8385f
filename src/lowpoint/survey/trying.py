"""The verdict of moved cases in numbers alone: margin to the limit to keep, and whether the case passes."""

from __future__ import annotations

from dataclasses import replace
from typing import Any, NamedTuple

import numpy as np

from lowpoint.survey.calculating import ROUNDING, possible, valve_findings
from lowpoint.survey.limiting import LIMITS
from lowpoint.survey.model import Cases, Flags, Numbers, Words
from lowpoint.survey.plating import plate_findings
from lowpoint.survey.setting import set_findings

__all__ = ["Tried", "needed", "tried"]

WAYS = {"valve": valve_findings, "orifice": plate_findings, "plates": set_findings}
NEEDED = ("sigma", "choked_drop", "drop", "capacity")


class Tried(NamedTuple):
    """Margin (NaN without an answer), and whether the case does not fail; without an answer it does."""

    margin: Numbers
    passes: Flags


def needed(cases: Cases, keep: Words) -> Cases:
    """The cases without what cannot change their verdict: a valve's limits that are not to be kept, its opening."""
    others = {name: (cases.kind == "valve") & (keep != name) for name in LIMITS}
    columns: dict[str, Any] = {name: np.where(other, np.nan, getattr(cases, name)) for name, other in others.items()}
    acoustic = others["incipient"]
    return replace(cases, **columns, xfz=np.where(acoustic, np.nan, cases.xfz), estimate=cases.estimate & ~acoustic,
                   characteristic=np.full(cases.count, None, object))  # fmt: skip


def tried(cases: Cases, keep: Words, factor: Any) -> Tried:
    """Moved cases against the limit that their margin counts to (``Findings.keep``), times ``factor``.

    The rule of ``Findings.fails``: flashing, choked, at or below that limit, or over capacity.
    """
    with np.errstate(all="ignore"):
        columns = {name: np.full(cases.count, np.nan) for name in (*NEEDED, "choked_limit", *LIMITS)}
        answerable = possible(cases)
        for kind in dict.fromkeys(cases.kind.tolist()):
            rows = np.flatnonzero((cases.kind == kind) & answerable)
            if not len(rows):
                continue
            part = WAYS[kind](cases if len(rows) == cases.count else cases.take(rows))
            for name, column in columns.items():
                if name in part:
                    column[rows] = part[name]
        choked = (cases.p1 - cases.pv) / columns["choked_drop"]
        choked = np.where(cases.kind == "plates", columns["choked_limit"], choked)
        limit = choked
        for name in LIMITS:
            limit = np.where(keep == name, columns[name] * factor, limit)
        margin = columns["sigma"] / limit - 1.0
        passes = (margin > 0.0) & (columns["sigma"] > choked) & (cases.p2 > cases.pv)
        return Tried(margin, passes & ~(columns["capacity"] > ROUNDING))
