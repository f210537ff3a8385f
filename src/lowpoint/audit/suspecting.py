"""Which mistakes would give the vendor's numbers: every usual one, alone and in pairs, tried by the same equations.

A hypothesis is a mistake, or two, made in all cases or in one. It *explains* a claim that differs where it gives the
vendor's number within rounding (of the claim, and of the inputs carried through); a claim that agrees *speaks against*
it where it would have moved that one away. Score: claims explained, less claims against it, less mistakes needed.
More mistakes than claims explained is no explanation, and two are none where one of them, or one that gives the same
numbers, explains as much alone. No suspect is ever stated as fact.
"""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Any

import numpy as np

from lowpoint.audit.checking import Checked, number_text
from lowpoint.audit.equations import State
from lowpoint.audit.mistakes import Mistake, catalogue
from lowpoint.audit.model import Suspect

__all__ = ["alike", "suspects"]

MOST = 3
"""Suspects named for a claim; of equal ones beyond them the number is told."""
ROUND = re.compile(r"(?<=pv_at_)\d+(?=_c$)")
"""The degrees of a key."""
STILL = 1e-9
"""A number that moves by no more than this share is not moved."""
ROOMY = 3.0
"""Pairs are looked at closely where they come within this many times the usual rounding."""


@dataclass(frozen=True, eq=False)
class _Tried:
    """Hypotheses with their numbers: one row each."""

    members: tuple[tuple[int, ...], ...]
    numbers: Any
    room: Any
    """Rounding of claim and inputs."""
    explains: Any
    against: Any
    matches: Any


@dataclass(frozen=True, eq=False)
class _Candidate:
    row: int
    members: tuple[int, ...]
    place: int | None
    """The one case in which it is made, None for all."""
    explained: frozenset[int]
    score: int
    against: int
    rank: tuple[float, ...]
    numbers: Any
    matched: frozenset[int]
    """Claims of its cases that it gives within rounding, those that agree included."""


def suspects(checked: Checked) -> dict[int, tuple[Suspect, ...]]:
    """The suspects of every claim that differs, likeliest first, by the claim's place in ``checked.claims``."""
    differs = np.array([claim.verdict == "differs" for claim in checked.claims], bool)
    if not differs.any():
        return {}
    mistakes = catalogue(checked.asking.inputs)
    singles = _tried(checked, mistakes, tuple((k,) for k in range(len(mistakes))), differs, near=1)
    found = _candidates(checked, singles, differs, {})
    if not _settled(found, differs):
        pairs = _tried(checked, mistakes, _pairs(mistakes, checked), differs, near=2)
        found += _candidates(checked, pairs, differs, _alone(found, len(differs)))
    needed = _simplest(found, checked.asking.rounding)
    return {int(k): _named(checked, mistakes, needed, int(k)) for k in np.flatnonzero(differs)}


def alike(checked: Checked) -> tuple[tuple[str, ...], ...]:
    """Single mistakes of this sheet that no number of it can tell apart, in groups; the first group, which begins with
    an empty name, holds those that move nothing beyond rounding."""
    mistakes = catalogue(checked.asking.inputs)
    none = np.zeros(len(checked.claims), bool)
    tried = _tried(checked, mistakes, tuple((k,) for k in range(len(mistakes))), none)
    # A vendor's rounded number may lie between two that are one rounding further apart.
    own = checked.asking.rounding
    rows = [("", checked.computed, 2.0 * own + checked.spread)]
    rows += [(m.key, tried.numbers[k], tried.room[k] + own) for k, m in enumerate(mistakes)]
    groups: list[list[tuple[str, Any, Any]]] = []
    for row in rows:
        home = next((group for group in groups if _same(group[0][1], row[1], row[2])), None)
        groups.append([row]) if home is None else home.append(row)
    return tuple(tuple(name for name, _, _ in group) for group in groups if len(group) > 1 or group[0][0] == "")


def _same(one: Any, other: Any, room: Any) -> bool:
    """Do two rows of numbers coincide within rounding?"""
    both = np.isnan(one) & np.isnan(other)
    return bool((both | (np.abs(one - other) <= room)).all())


# --- trying -------------------------------------------------------------------------------------------------------
def _tried(
    checked: Checked, mistakes: Sequence[Mistake], members: tuple[tuple[int, ...], ...], differs: Any, near: int = 0
) -> _Tried:
    """The numbers of these hypotheses; with ``near`` only of those that come near to that many claims that differ."""
    asking = checked.asking
    state = _made(checked, mistakes, members)
    numbers, forms = asking.numbers_in(state)
    if near:
        roomy = asking.rounding + ROOMY * checked.spread
        close = ((np.abs(numbers - asking.claimed) <= roomy) & differs).sum(axis=1) >= near
        keep = np.flatnonzero(close)
        members, numbers = tuple(members[k] for k in keep), numbers[keep]
        forms = None if forms is None else forms[keep]
    nudged = _made(checked, mistakes, members, nudged=True)
    forms = None if forms is None else np.tile(forms, len(asking.perturbed))
    spread = asking.spread(numbers, asking.numbers(nudged, forms))
    room = asking.rounding + spread
    return _judged(checked, mistakes, members, numbers, room, differs)


def _made(
    checked: Checked, mistakes: Sequence[Mistake], members: tuple[tuple[int, ...], ...], nudged: bool = False
) -> State:
    """The state with every hypothesis carried out: each mistake once, on all rows that make it."""
    state = checked.asking.state(len(members))
    copies = 1
    if nudged:
        state = checked.asking.nudged(state)
        copies = len(checked.asking.perturbed)
    rows: dict[int, list[int]] = {}
    for row, pair in enumerate(members):
        for k in pair:
            rows.setdefault(k, []).append(row)
    size = len(members)
    for k in sorted(rows, key=lambda k: (mistakes[k].turn, k)):
        every = np.add.outer(np.arange(copies) * size, np.array(rows[k])).ravel()
        if len(every):
            mistakes[k].apply(state, every)
    return state


def _judged(
    checked: Checked, mistakes: Sequence[Mistake], members: tuple[tuple[int, ...], ...], numbers: Any, room: Any,
    differs: Any,
) -> _Tried:  # fmt: skip
    claimed, computed = checked.asking.claimed, checked.computed
    with np.errstate(all="ignore"):
        miss = np.abs(numbers - claimed)
        matches = miss <= room
        moved = ~(np.abs(numbers - computed) <= STILL * np.abs(computed)) & ~np.isnan(computed)
        away = ~(miss <= room) & ~(miss <= np.abs(computed - claimed) + checked.asking.rounding * 1e-3)
    agrees = np.array([claim.verdict == "agrees" for claim in checked.claims], bool)
    spared = _spared(checked, mistakes, members)
    return _Tried(members, numbers, room, matches & moved & differs, moved & away & agrees & ~spared, matches & ~spared)


def _spared(checked: Checked, mistakes: Sequence[Mistake], members: tuple[tuple[int, ...], ...]) -> Any:
    kinds = [claim.kind for claim in checked.asking.claims]
    single = np.array([[kind in mistake.spares for kind in kinds] for mistake in mistakes], bool)
    spared = [single[list(pair)].any(axis=0) for pair in members]
    return np.array(spared, bool).reshape(len(members), len(kinds))


def _pairs(mistakes: Sequence[Mistake], checked: Checked) -> tuple[tuple[int, ...], ...]:
    """Pairs of mistakes that both move something and are not the same thing twice."""
    numbers = checked.asking.numbers(_made(checked, mistakes, tuple((k,) for k in range(len(mistakes)))))
    with np.errstate(all="ignore"):
        moving = ~(np.abs(numbers - checked.computed) <= checked.asking.rounding) & ~np.isnan(checked.computed)
    able = np.flatnonzero(moving.any(axis=1)).tolist()
    return tuple((a, b) for a, b in combinations(able, 2) if mistakes[a].goes_with(mistakes[b]))


# --- weighing -----------------------------------------------------------------------------------------------------
def _candidates(checked: Checked, tried: _Tried, differs: Any, alone: dict[int, Any]) -> list[_Candidate]:
    """Hypotheses that explain at least as many claims as they need mistakes, over all cases or in one."""
    places = checked.asking.places
    scopes: list[int | None] = [None]
    if checked.asking.inputs.count > 1:
        scopes += sorted({int(place) for place in places[differs]})
    found = []
    for row in np.flatnonzero(tried.explains.any(axis=1)).tolist():
        members = tried.members[row]
        whole: _Candidate | None = None
        for place in scopes:
            within = np.ones(len(places), bool) if place is None else places == place
            explained = tried.explains[row] & within
            against = int((tried.against[row] & within).sum())
            count = int(explained.sum())
            if count < len(members) or count <= against or not _needed(members, explained, alone):
                continue
            if whole is not None and place is not None and not int(tried.against[row].sum()):
                continue  # made in all cases it explains this too
            rank = (-(count - against - len(members)), len(members), place is not None, against,
                    -int((tried.matches[row] & within).sum()), sum(members))  # fmt: skip
            candidate = _Candidate(row, members, place, frozenset(np.flatnonzero(explained).tolist()),
                                   count - against - len(members), against, rank, tried.numbers[row],
                                   frozenset(np.flatnonzero(tried.matches[row] & within).tolist()))  # fmt: skip
            whole = candidate if place is None else whole
            found.append(candidate)
    return found


def _alone(found: list[_Candidate], claims: int) -> dict[int, Any]:
    """What each mistake explains by itself with nothing against it."""
    alone: dict[int, Any] = defaultdict(lambda: np.zeros(claims, bool))
    for candidate in found:
        if candidate.place is None and not candidate.against:
            alone[candidate.members[0]][list(candidate.explained)] = True
    return alone


def _needed(members: tuple[int, ...], explained: Any, alone: dict[int, Any]) -> bool:
    """Does a pair explain something that neither of the two explains cleanly alone?"""
    if len(members) < 2:
        return True
    return bool((explained & ~alone[members[0]] & ~alone[members[1]]).any())


def _simplest(found: list[_Candidate], rounding: Any) -> list[_Candidate]:
    """Without pairs that explain no more than a single mistake that is part of them, or that gives the same numbers."""
    singles = [one for one in found if len(one.members) == 1]
    return [
        pair for pair in found if len(pair.members) == 1 or not any(_as_much(one, pair, rounding) for one in singles)
    ]


def _as_much(one: _Candidate, pair: _Candidate, rounding: Any) -> bool:
    """Does a single mistake do all that a pair does, and is it part of it or the same thing?"""
    if not pair.explained <= one.explained or one.against > pair.against:
        return False
    explained = sorted(pair.explained)
    same = np.abs(one.numbers[explained] - pair.numbers[explained]) <= rounding[explained]
    return set(one.members) < set(pair.members) or bool(same.all())


def _settled(found: list[_Candidate], differs: Any) -> bool:
    """Do one or two single mistakes that nothing speaks against explain every claim that differs?

    Three could be a pair and a coincidence.
    """
    left = set(np.flatnonzero(differs).tolist())
    for _ in range(2):
        left -= max((c.explained for c in found if not c.against), key=lambda some: len(some & left), default=set())
    return not left


def _named(
    checked: Checked, mistakes: Sequence[Mistake], found: list[_Candidate], claim: int
) -> tuple[Suspect, ...]:  # fmt: skip
    ranked = _varied(mistakes, sorted((c for c in found if claim in c.explained), key=lambda c: c.rank))
    return tuple(_suspect(checked, mistakes, c, claim, ranked) for c in ranked[:MOST])


def _varied(mistakes: Sequence[Mistake], ranked: list[_Candidate]) -> list[_Candidate]:
    """Equal ones that differ in a degree only (pv at 15, 20 or 25 deg C) behind those of other kinds: few are named."""
    equal = [c for c in ranked if c is ranked[0] or _tied(c, ranked[0])]
    kinds: set[tuple[str, ...]] = set()
    first: list[_Candidate] = []
    again: list[_Candidate] = []
    for one in equal:
        kind = tuple(ROUND.sub("", mistakes[k].key) for k in one.members)
        (again if kind in kinds else first).append(one)
        kinds.add(kind)
    return [*first, *again, *(c for c in ranked if not any(c is one for one in equal))]


def _suspect(
    checked: Checked, mistakes: Sequence[Mistake], one: _Candidate, claim: int, ranked: list[_Candidate]
) -> Suspect:
    asked = checked.asking.claims[claim]
    equal = sum(_tied(one, other) for other in ranked if other is not one)
    phrase = " and ".join(mistakes[k].phrase for k in one.members)
    case = "" if one.place is None else f", in case {checked.asking.inputs.cases[one.place]} only"
    number = float(one.numbers[claim])
    explained = sorted(one.explained)
    named = tuple((checked.claims[k].quantity, checked.claims[k].case) for k in explained)
    numbers = tuple(number_text(checked.asking.claims[k], float(one.numbers[k])) for k in explained)
    return Suspect(
        tuple(mistakes[k].key for k in one.members), f"{number_text(asked, number)} follows if {phrase}{case}",
        asked.shown(number), named, equal, numbers,
    )  # fmt: skip


def _tied(one: _Candidate, other: _Candidate) -> bool:
    """Explain both the same claims as well, and give both the same of all the vendor's numbers?"""
    return (one.score, one.explained, one.matched) == (other.score, other.explained, other.matched)
