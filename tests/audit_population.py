"""A generated population of vendor sheets, and how the audit does on it: for the tests, and as a table for a benchmark.

Mistakes are planted by :mod:`audit_arithmetic`, which shares nothing with the package. What cannot be told from the
right mistake by any number of the sheet (``tied``) is counted apart: no audit can rank that first but by luck.
"""

from __future__ import annotations

import random
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from audit_arithmetic import MISTAKES
from audit_memory import CASES, drawn, planted, sheet, with_cases
from lowpoint.audit.asking import asking
from lowpoint.audit.checking import check
from lowpoint.audit.inputs import inputs_of
from lowpoint.audit.model import SheetReading, Suspect
from lowpoint.audit.suspecting import suspects

__all__ = ["ONE_THING", "Trial", "graded", "pairs", "population", "table", "trial"]

ABSOLUTE_BAR = ("bar_as_kgfcm2",)
"""Defined for sheets in bar absolute only."""
ONE_THING = (
    {"cv_printed_as_kv", "kv_printed_as_cv"}, {"index_downstream", "index_xf"}, {"pv_at_20_c", "pv_left_out"},
    {f"gauge_as_absolute_{which}" for which in ("p1", "p2", "both")},
    {f"atmosphere_twice_{which}" for which in ("p1", "p2", "both")},
    {"no_fittings", "nominal_pipe_in_pipe_out", "rated_in_fp"}, {"fl_not_squared", "ratio_not_squared"},
    {name for name in MISTAKES if name.startswith(("gauge_as", "atmosphere_twice"))} - {"gauge_as_absolute_p2",
     "atmosphere_twice_p2"},
    {name for name in MISTAKES if name.endswith(("_both", "_p2")) and not name.startswith("p2")},
)  # fmt: skip
"""Two out of one of these undo, replace or contain one another: no two mistakes."""


@dataclass(frozen=True)
class Trial:
    """One sheet: what was planted, and what was found."""

    planted: tuple[str, ...]
    wrong: int
    """Claims that differ."""
    first: bool
    """Is the right suspect named first at every claim that it explains, and does it explain one?"""
    in_three: bool
    tied: bool
    """Do others give every number of the sheet as well, one of them being named first?"""


def trial(reading: SheetReading, names: Sequence[str]) -> Trial:
    """Audit one sheet, and compare with what was planted."""
    checked = check(asking(inputs_of(reading)))
    found = suspects(checked)
    wrong = sum(claim.verdict == "differs" for claim in checked.claims)
    if not names:
        return Trial((), wrong, not wrong, not wrong, False)
    return Trial(tuple(names), wrong, *graded(found, names))


def graded(found: dict[int, tuple[Suspect, ...]], names: Sequence[str]) -> tuple[bool, bool, bool]:
    """Right first, right among the first three, tied: of the suspects of every claim that differs."""
    return _of_one(found, names[0]) if len(names) == 1 else _of_two(found, set(names))


def _of_one(found: dict[int, tuple[Suspect, ...]], name: str) -> tuple[bool, bool, bool]:
    lists = list(found.values())
    first = bool(lists) and all(named and named[0].mistakes == (name,) for named in lists)
    three = bool(lists) and all(any(s.mistakes == (name,) for s in named[:3]) for named in lists)
    return first, three, not first and bool(lists) and all(_tied(named, {name}) for named in lists)


def _tied(named: tuple[Suspect, ...], names: set[str]) -> bool:
    """Is the right one among those that explain as well as the first?"""
    return bool(named) and named[0].equal > 0 and any(
        set(s.mistakes) == names and s.equal > 0 and s.explains == named[0].explains for s in named
    )  # fmt: skip


def _of_two(found: dict[int, tuple[Suspect, ...]], names: set[str]) -> tuple[bool, bool, bool]:
    """Two mistakes that touch different claims are named one by one; together where they meet."""
    lists = [named for named in found.values() if named]
    told = all(found.values()) and bool(found)
    first = told and {m for named in lists for m in named[0].mistakes} == names
    three = told and all(any(set(s.mistakes) <= names for s in named[:3]) for named in lists)
    tied = told and not first and all(
        set(named[0].mistakes) <= names or (named[0].equal > 0 and any(
            set(s.mistakes) <= names and s.explains == named[0].explains for s in named))
        for named in lists
    )  # fmt: skip
    return first, three, tied


def population(
    seed: int, each: int, mistakes: Iterable[Sequence[str]], *, digits: int = 0, cases: tuple[str, ...] = CASES
) -> list[Trial]:
    """``each`` sheets with each of these sets of mistakes, metric and US, absolute and gauge.

    ``digits`` significant digits of the claims (0: the usual decimals), and only some of the cases.
    """
    rng = random.Random(seed)
    trials = []
    for names in mistakes:
        for k in range(each):
            item = drawn(rng)
            claims = planted(item, names)
            if claims is None:
                continue
            plain = any(name in ABSOLUTE_BAR for name in names)
            reading = sheet(item, claims, us=k % 2 == 1 and not plain, gauge=k % 3 == 0 and not plain, digits=digits)
            trials.append(trial(with_cases(reading, cases), names))
    return trials


def pairs(seed: int, count: int) -> list[tuple[str, str]]:
    """Pairs of mistakes drawn at random, none of which is one thing twice."""
    rng = random.Random(seed)
    found: list[tuple[str, str]] = []
    while len(found) < count:
        one, other = rng.sample(sorted(MISTAKES), 2)
        if not any({one, other} <= things for things in ONE_THING):
            # Units are read before anything is done with them.
            found.append((other, one) if other in ("bar_as_kgfcm2", "gpm_as_m3h") else (one, other))
    return found


def table(trials: Sequence[Trial]) -> str:
    """One line a set of mistakes: sheets, of which with a finding, right first, in the first three, not to be told."""
    rows: dict[tuple[str, ...], list[Trial]] = {}
    for one in trials:
        rows.setdefault(one.planted if len(one.planted) < 2 else ("two mistakes",), []).append(one)
    lines = [f"{'planted':32s} {'sheets':>6s} {'found':>6s} {'first':>6s} {'three':>6s} {'tied':>6s}"]
    for names, several in rows.items():
        seen = [one for one in several if one.wrong or not names]
        counts = (len(several), sum(one.wrong > 0 for one in several), sum(one.first for one in seen),
                  sum(one.in_three for one in seen), sum(one.tied for one in seen))  # fmt: skip
        lines.append(f"{' + '.join(names) or 'nothing':32s} " + " ".join(f"{count:6d}" for count in counts))
    return "\n".join(lines)
