"""Two issues of a list side by side: what was added, what is gone, which inputs changed, and which verdicts turned.

Cases are matched by tag and case, one that stands several times in the order of its rows. No renaming is guessed: a
case under another name is gone here and added there.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from lowpoint.survey.inputs import ASKED, NUMBERS, WORDS, given_numbers, given_words_of
from lowpoint.survey.items import ORDER
from lowpoint.survey.model import Cases, absent
from lowpoint.survey.sides import Side, Verdicts
from lowpoint.survey.travel_tables import COLUMNS

__all__ = ["BETTER", "TURNS", "WORSE", "Change", "Comparison", "Drift", "Turn", "compare"]

TURNS = ("fails now", "without an answer now", "in a worse regime", "less margin", "on a weaker basis", "answered now",
         "better")  # fmt: skip
"""What a verdict can do between two issues, worst first."""
WORSE = TURNS[:3]
"""Those that are findings."""
BETTER = TURNS[5:]
SITE = ("elevation", "atmosphere")
PRESSURES = ("p1", "p2", "pv", "pc", "outlet_pressure")
ROUNDING = 1e-9
"""Share by which a number may differ and be the same: what converting units leaves."""
MARGIN = 1e-6
"""Margins nearer than this are the same."""
_BASES = (None, "tested", "published", "estimated")


@dataclass(frozen=True)
class Change:
    """One input of a case that changed; SI numbers, words, tuples of bores, None for a blank."""

    field: str
    old: Any
    new: Any


@dataclass(frozen=True)
class Turn:
    """A verdict that is another one now: its place among the pairs, in both issues, and what it did (one of TURNS)."""

    pair: int
    old: int
    new: int
    what: str


@dataclass(frozen=True)
class Drift:
    """A verdict that a survey gave and that the tool does not give today for the same inputs."""

    side: str
    """``old``, ``new``."""
    place: int


@dataclass(frozen=True, eq=False)
class Comparison:
    """Two sides and what differs; places count in the cases of their side."""

    old: Side
    new: Side
    pairs: tuple[tuple[int, int], ...]
    items_gone: tuple[str, ...]
    items_added: tuple[str, ...]
    gone: tuple[int, ...]
    """Cases of the old side that the new one has not, those of items that are gone included."""
    added: tuple[int, ...]
    changes: dict[int, list[Change]] = field(default_factory=dict)
    """Place among ``pairs`` -> its changed inputs."""
    turns: tuple[Turn, ...] = ()
    """Worst first."""
    drifts: tuple[Drift, ...] = ()
    notes: tuple[str, ...] = ()

    def changes_of(self, turn: Turn) -> list[Change]:
        """What changed in the inputs of a turned verdict."""
        return self.changes.get(turn.pair, [])

    @property
    def exit_code(self) -> int:
        """1 where a verdict turned for the worse, a case that fails or has no answer came in, or a list is faulty."""
        added = any(self.new.verdicts.fails[place] or self.new.verdicts.regime[place] is None for place in self.added)
        worse = any(turn.what in WORSE for turn in self.turns)
        return int(worse or added or bool(self.old.problems or self.new.problems))


def compare(old: Side, new: Side) -> Comparison:
    """What differs between two sides."""
    keys = [_keys(side.cases) for side in (old, new)]
    pairs = tuple((place, keys[1][key]) for key, place in keys[0].items() if key in keys[1])
    gone = tuple(place for key, place in keys[0].items() if key not in keys[1])
    added = tuple(place for key, place in keys[1].items() if key not in keys[0])
    tags = [dict.fromkeys(side.cases.tag.tolist()) for side in (old, new)]
    changes = _changes(old.cases, new.cases, pairs)
    return Comparison(
        old, new, pairs, tuple(t for t in tags[0] if t not in tags[1]), tuple(t for t in tags[1] if t not in tags[0]),
        gone, added, changes, tuple(_turns(old, new, pairs)), (*_drifts("old", old), *_drifts("new", new)),
        tuple(_twins(old, new, *keys)),
    )  # fmt: skip


Key = tuple[str, str, int]


def _keys(cases: Cases) -> dict[Key, int]:
    """Every case by tag, case (capitals aside) and how many of that name stood before it."""
    seen: dict[tuple[str, str], int] = {}
    found: dict[Key, int] = {}
    for place, (tag, case) in enumerate(zip(cases.tag.tolist(), cases.case.tolist(), strict=True)):
        name = (tag, (case or "").casefold())
        number = seen[name] = seen.get(name, 0) + 1
        found[(*name, number)] = place
    return found


def _twins(old: Side, new: Side, *keys: dict[Key, int]) -> Iterator[str]:
    """Cases that stand several times: how they were paired."""
    counts: list[dict[tuple[str, str], int]] = [{}, {}]
    for side, found in zip(counts, keys, strict=True):
        for tag, case, number in found:
            side[tag, case] = max(side.get((tag, case), 0), number)
    for name in dict.fromkeys((*counts[0], *counts[1])):
        times = [side.get(name, 0) for side in counts]
        if max(times) > 1:
            case = f"case '{name[1]}'" if name[1] else "no case"
            yield (f"{name[0]} with {case} stands {times[0]} times in {old.name} and {times[1]} times in {new.name}: "
                   "its rows were paired in order")  # fmt: skip


# --- inputs -----------------------------------------------------------------------------------------------------


def _changes(old: Cases, new: Cases, pairs: tuple[tuple[int, int], ...]) -> dict[int, list[Change]]:
    """Changed inputs of every pair that has some."""
    found: dict[int, list[Change]] = {}
    if not pairs:
        return found
    i, j = (np.array(column) for column in zip(*pairs, strict=True))
    for name in NUMBERS:
        a, b = given_numbers(old, name)[i], given_numbers(new, name)[j]
        differs = _numbers_differ(a, b)
        if name in SITE:
            differs &= ~_idle(name, old, new, i, j)
        for place in np.flatnonzero(differs).tolist():
            found.setdefault(place, []).append(Change(name, _number(a[place]), _number(b[place])))
    for name in (*ASKED, *WORDS):
        a, b = given_words_of(old, name)[i], given_words_of(new, name)[j]
        for place in np.flatnonzero(a != b).tolist():
            if not _alike(a[place], b[place]):
                _add(found.setdefault(place, []), Change(name, a[place], b[place]))
    _table_changes(old, new, i, j, found)
    return found


def _add(changes: list[Change], change: Change) -> None:
    """A word that came for a number, or a number for a word, is one change."""
    for place, other in enumerate(changes):
        if other.field == change.field:
            old = other.old if change.old is None else change.old
            new = other.new if change.new is None else change.new
            changes[place] = Change(change.field, old, new)
            return
    changes.append(change)


def _number(x: float) -> float | None:
    return None if math.isnan(x) else float(x)


def _numbers_differ(a: Any, b: Any) -> Any:
    same = np.abs(a - b) <= ROUNDING * np.maximum(np.abs(a), np.abs(b))
    return ~(same | (np.isnan(a) & np.isnan(b)))


def _idle(name: str, old: Cases, new: Cases, i: Any, j: Any) -> Any:
    """Where a blank in place of a site's value has no effect: absolute pressures that stayed, no place of an outlet."""
    a, b = getattr(old, name)[i], getattr(new, name)[j]
    moved = np.zeros(len(i), np.bool_)
    for pressure in PRESSURES:
        moved |= _numbers_differ(given_numbers(old, pressure)[i], given_numbers(new, pressure)[j])
    idle = (np.isnan(a) | np.isnan(b)) & ~moved & absent(old.outlet[i]) & absent(new.outlet[j])
    if name == "atmosphere":
        # It follows from the elevation, which is told.
        idle |= _numbers_differ(old.elevation[i], new.elevation[j])
    return idle


def _alike(a: Any, b: Any) -> bool:
    """Are two words, or two sets of bores, the same?"""
    if isinstance(a, tuple) and isinstance(b, tuple):
        return len(a) == len(b) and not _numbers_differ(np.array(a), np.array(b)).any()
    if isinstance(a, str) and isinstance(b, str):
        return " ".join(a.split()).casefold() == " ".join(b.split()).casefold()
    return a is None and b is None


def _table_changes(old: Cases, new: Cases, i: Any, j: Any, found: dict[int, list[Change]]) -> None:
    """Rows whose vendor's table has the same name and other numbers."""
    for name in old.tables.keys() & new.tables.keys():
        differing = [key for key in ("travel", *COLUMNS)
                     if not _same_column(getattr(old.tables[name], key), getattr(new.tables[name], key))]  # fmt: skip
        if differing:
            text = f"{name} with other numbers of {', '.join(differing)}"
            for place in np.flatnonzero((old.table[i] == name) & (new.table[j] == name)).tolist():
                found.setdefault(place, []).append(Change("table", name, text))


def _same_column(a: Any, b: Any) -> bool:
    if a is None or b is None:
        return a is b
    return len(a) == len(b) and not _numbers_differ(a, b).any()


# --- verdicts ---------------------------------------------------------------------------------------------------


def _turns(old: Side, new: Side, pairs: tuple[tuple[int, int], ...]) -> list[Turn]:
    found = []
    for pair, (i, j) in enumerate(pairs):
        what = _turn(old.verdicts, i, new.verdicts, j)
        if what:
            found.append(Turn(pair, i, j, what))

    def rank(turn: Turn) -> tuple[int, int, float]:
        regime, margin = new.verdicts.regime[turn.new], float(new.verdicts.margin[turn.new])
        return (TURNS.index(turn.what), ORDER.index(regime) if regime else -1,
                math.inf if math.isnan(margin) else margin)  # fmt: skip

    return sorted(found, key=rank)


def _turn(old: Verdicts, i: int, new: Verdicts, j: int) -> str:
    """What one verdict did; empty where it is the same."""
    before, after = old.regime[i], new.regime[j]
    if new.fails[j] and not old.fails[i]:
        return TURNS[0]
    if after is None or before is None:
        return "" if after is before else TURNS[1] if after is None else TURNS[5]
    if old.fails[i] and not new.fails[j]:
        return TURNS[6]
    step = ORDER.index(after) - ORDER.index(before)
    if step:
        return TURNS[2] if step < 0 else TURNS[6]
    more = float(new.margin[j]) - float(old.margin[i])
    weaker = _BASES.index(new.basis[j]) - _BASES.index(old.basis[i])
    if abs(more) > MARGIN and more < 0.0:
        return TURNS[3]
    if weaker > 0:
        return TURNS[4]
    return TURNS[6] if more > MARGIN or weaker < 0 else ""


def _drifts(name: str, side: Side) -> Iterator[Drift]:
    """Cases whose issued verdict is not the one that the tool gives today for the same inputs."""
    if side.today is None:
        return
    issued, today = side.verdicts, side.today
    for place in range(side.cases.count):
        if issued.regime[place] is None:
            continue
        other = issued.regime[place] != today.regime[place] or issued.fails[place] != today.fails[place]
        a, b = float(issued.margin[place]), float(today.margin[place])
        if other or math.isnan(a) != math.isnan(b) or abs(a - b) > MARGIN * max(1.0, abs(a)):
            yield Drift(name, place)
