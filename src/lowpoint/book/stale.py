"""Which cells keep their old value: those that cannot be evaluated, and everything that reads them."""

from __future__ import annotations

from collections import defaultdict, deque
from collections.abc import Iterable, Iterator, Mapping

from .plan import Entry
from .refs import Ref, address, quoted
from .sheet import Group

__all__ = ["Place", "stale_cells"]

Place = tuple[str, int, int]
"""Sheet title, row, column."""

WIDE = 200  # a reference over more columns than this is looked at for every stale cell of its sheet


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
            rows = self._rows.setdefault(entry, set(entry.group.rows))
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
    blocked: Iterable[Group], entries: Iterable[Entry], doubtful: Mapping[Place, str], titles: Mapping[str, str]
) -> dict[Place, str]:
    """Every formula cell that keeps its old value, with the reason.

    ``blocked`` groups were never evaluated; ``doubtful`` cells came out as something the engine cannot vouch for.
    """
    reasons: dict[Place, str] = {}
    queue: deque[Place] = deque()
    for group in blocked:
        for row in group.rows:
            reasons.setdefault((group.sheet, row, group.column), group.reason)
        queue.extend(_filled(group))
    readers = _Readers(entries, titles)
    queue.extend(doubtful)
    seen = set(queue)
    fed: dict[Place, str] = {}
    while queue:
        place = queue.popleft()
        for entry, row in readers.of(place):
            reader = (entry.group.sheet, row, entry.group.column)
            fed.setdefault(reader, f"it reads {_named(place)}, which was not refreshed")
            if reader not in seen:
                seen.add(reader)
                queue.append(reader)
                queue.extend(p for p in _filled(entry.group) if p not in seen and entry.group.area)
                seen.update(_filled(entry.group) if entry.group.area else ())
    for place, reason in doubtful.items():
        reasons.setdefault(place, reason if "circular" in reason or place not in fed else fed[place])
    for place, reason in fed.items():
        reasons.setdefault(place, reason)
    return reasons


def _filled(group: Group) -> Iterator[Place]:
    """Every cell whose value is the group's."""
    if group.area is None:
        yield from ((group.sheet, row, group.column) for row in group.rows)
        return
    a = group.area
    yield from ((group.sheet, r, c) for r in range(a.r1, a.r2 + 1) for c in range(a.c1, a.c2 + 1))


def _named(place: Place) -> str:
    return f"{quoted(place[0])}!{address(place[1], place[2])}"
