"""Which cells keep their old value: those that cannot be evaluated, and everything that reads them."""

from __future__ import annotations

from collections import defaultdict, deque
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

from .graph import components
from .plan import Entry
from .refs import Area, Ref, address, quoted
from .sheet import Group

__all__ = ["Doubts", "Place", "cells_of", "stale_cells"]

Place = tuple[str, int, int]
"""Sheet title, row, column."""

WIDE = 200  # a reference over more columns than this is looked at for every stale cell of its sheet
_IN_CIRCLE = "it is part of a circular reference"
_BY_CIRCLE = "it reads a circular reference, or is part of one"


@dataclass(slots=True)
class Doubts:
    """Cells whose result cannot be vouched for, with the reason; which of them met a circle; the areas of arrays."""

    cells: dict[Place, str] = field(default_factory=dict)
    circular: set[Place] = field(default_factory=set)
    areas: dict[Place, Area] = field(default_factory=dict)

    def add(self, place: Place, marker: Any, entry: Entry) -> None:
        """Note what the engine says of a cell."""
        if marker.kind == "circular":
            self.circular.add(place)
        unseen = entry.formula.dynamic and marker.kind == "name"
        self.cells[place] = "it reads a cell that was not refreshed" if unseen else f"it {marker.reason}"


class _Readers:
    """For a cell, the formula cells that read it."""

    def __init__(self, entries: Iterable[Entry], titles: Mapping[str, str]) -> None:
        self._narrow: dict[tuple[str, int], list[tuple[Entry, Ref]]] = defaultdict(list)
        self._wide: dict[str, list[tuple[Entry, Ref]]] = defaultdict(list)
        self._rows: dict[Entry, set[int]] = {}
        for entry in entries:
            for ref in set(entry.formula.refs):
                sheet = titles.get((ref.sheet or entry.group.sheet).casefold(), "")
                if abs(ref.c2 - ref.c1) > WIDE:
                    self._wide[sheet].append((entry, ref))
                    continue
                for column in range(min(ref.c1, ref.c2), max(ref.c1, ref.c2) + 1):
                    self._narrow[sheet, column].append((entry, ref))

    def of(self, place: Place) -> Iterator[tuple[Entry, int]]:
        """Entry and row of each reader."""
        sheet, row, column = place
        yield from self._among(self._narrow.get((sheet, column), ()), row)
        wide = [(e, r) for e, r in self._wide.get(sheet, ()) if min(r.c1, r.c2) <= column <= max(r.c1, r.c2)]
        yield from self._among(wide, row)

    def _among(self, readers: Iterable[tuple[Entry, Ref]], row: int) -> Iterator[tuple[Entry, int]]:
        for entry, ref in readers:
            rows = self._rows.get(entry)
            if rows is None:
                rows = self._rows[entry] = set(entry.group.rows)
            if ref.r1.relative and ref.r2.relative:
                low, high = sorted((row - ref.r1.n, row - ref.r2.n))
                reach = range(low, high + 1)
                near = reach if len(reach) < len(rows) else rows
                yield from ((entry, r) for r in near if r in rows and r in reach)
            elif ref.r1.relative or ref.r2.relative:
                yield from ((entry, r) for r in rows if ref.at(r).r1 <= row <= ref.at(r).r2)
            elif ref.at(0).r1 <= row <= ref.at(0).r2:
                yield from ((entry, r) for r in rows)


def stale_cells(
    blocked: Iterable[Group], entries: Iterable[Entry], doubts: Doubts, titles: Mapping[str, str]
) -> dict[Place, str]:
    """Every formula cell that keeps its old value, with the reason; ``blocked`` groups were never evaluated."""
    reasons: dict[Place, str] = {}
    start: list[Place] = list(doubts.cells)
    for group in blocked:
        reasons |= {(group.sheet, row, group.column): group.reason for row in group.rows}
        start += cells_of(group)
    if not start:
        return reasons
    readers = _Readers(entries, titles)
    fed = _fed(start, readers, doubts.areas)
    circles = _circles(doubts.circular, readers)
    for place, why in doubts.cells.items():
        if place in doubts.circular:
            why = _IN_CIRCLE if place in circles else fed.get(place, _BY_CIRCLE)
        else:
            why = fed.get(place, why)
        reasons.setdefault(place, why)
    return fed | reasons


def _fed(start: Iterable[Place], readers: _Readers, areas: Mapping[Place, Area]) -> dict[Place, str]:
    """Everything that reads one of the cells, directly or not, and what it reads."""
    queue: deque[Place] = deque()
    seen: set[Place] = set()

    def put(place: Place) -> None:
        for filled in (place, *_inside(place[0], areas.get(place))):
            if filled not in seen:
                seen.add(filled)
                queue.append(filled)

    for place in start:
        put(place)
    fed: dict[Place, Place] = {}  # of what a cell reads, the first by place is named
    while queue:
        place = queue.popleft()
        for entry, row in readers.of(place):
            reader = (entry.group.sheet, row, entry.group.column)
            if reader != place:
                fed[reader] = min(place, fed.get(reader, place))
                put(reader)
    return {reader: f"it reads {_named(place)}, which was not refreshed" for reader, place in fed.items()}


def _circles(places: set[Place], readers: _Readers) -> set[Place]:
    """Those of some cells that lead back to themselves."""
    order = sorted(places)
    numbers = {place: number for number, place in enumerate(order)}
    edges: list[set[int]] = [set() for _ in order]
    for number, place in enumerate(order):
        for entry, row in readers.of(place):
            reader = numbers.get((entry.group.sheet, row, entry.group.column))
            if reader is not None:
                edges[reader].add(number)
    rings = (ring for ring in components(edges) if len(ring) > 1 or ring[0] in edges[ring[0]])
    return {order[number] for ring in rings for number in ring}


def cells_of(group: Group) -> Iterator[Place]:
    """Every cell whose value is the group's."""
    if group.area is None:
        return ((group.sheet, row, group.column) for row in group.rows)
    return _inside(group.sheet, group.area)


def _inside(sheet: str, area: Area | None) -> Iterator[Place]:
    if area is not None:
        yield from ((sheet, r, c) for r in range(area.r1, area.r2 + 1) for c in range(area.c1, area.c2 + 1))


def _named(place: Place) -> str:
    return f"{quoted(place[0])}!{address(place[1], place[2])}"
