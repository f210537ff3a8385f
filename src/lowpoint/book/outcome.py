"""What came out of a run: every formula cell's value, what keeps its old one, what spills, which calls failed."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from lowpoint.cells import CellError, reason

from .evaluate import Run
from .plan import Entry, Plan
from .refs import Area, address
from .report import Failure, Kept
from .sheet import Group
from .spills import Spill
from .stale import Place, stale_cells

if TYPE_CHECKING:
    from .engine import Engine

__all__ = ["Outcome", "outcome_of"]

_NOT_STILL = "its array results push each other about without end"
_UNSEEN = "it reads, by a reference worked out on the way, a cell that was not refreshed"


@dataclass(slots=True)
class Outcome:
    """Values by group in the order of its rows, cells that keep their old value with the reason, spills by sheet."""

    values: dict[Group, list[Any]] = field(default_factory=dict)
    stale: dict[Place, str] = field(default_factory=dict)
    spills: dict[str, list[Spill]] = field(default_factory=dict)
    fed: set[Group] = field(default_factory=set)
    failed: list[Failure] = field(default_factory=list)

    @property
    def kept(self) -> list[Kept]:
        """The stale cells for the report."""
        return [Kept(sheet, address(row, column), why) for (sheet, row, column), why in sorted(self.stale.items())]


def outcome_of(engine: Engine, run: Run, plan: Plan, groups: Sequence[Group], titles: Mapping[str, str]) -> Outcome:
    """Collect the results of a finished run."""
    result = Outcome()
    doubtful: dict[Place, str] = {}
    full = any(_no_room(engine, entry) for entry in plan.entries)
    for entry in plan.entries:
        group = entry.group
        values = run.values(entry)
        if not run.settled:
            doubtful |= {(group.sheet, row, group.column): _NOT_STILL for row in group.rows}
        clean = [_cell(value, full) for value in values]
        result.values[group] = clean
        for row, value in zip(group.rows, clean, strict=True):
            if hasattr(value, "reason"):
                doubtful[group.sheet, row, group.column] = _why(value, entry)
        if entry.fed:
            result.fed.add(group)
    blocked = [group for group in groups if group.reason]
    result.stale = stale_cells(blocked, plan.entries, doubtful, titles)
    for entry in plan.entries:
        for spill in _spills(engine, entry, result):
            result.spills.setdefault(entry.group.sheet, []).append(spill)
    result.failed = list(_failures(run, result.stale))
    return result


def _no_room(engine: Engine, entry: Entry) -> bool:
    """Whether a dynamic array finds data in its way: then #SPILL! is the true answer, there and in what reads it."""
    group = entry.group
    if group.kind != "dynamic" or entry.own is not None:
        return False
    return any(getattr(engine.value(group.sheet, row, group.column), "kind", "") == "spill" for row in group.rows)


def _cell(value: Any, full: bool) -> Any:
    if value is None:
        return 0.0
    return CellError.SPILL if full and getattr(value, "kind", "") == "spill" else value


def _why(value: Any, entry: Entry) -> str:
    if entry.formula.dynamic and value.kind == "name":
        return _UNSEEN
    return f"it {value.reason}"


def _spills(engine: Engine, entry: Entry, result: Outcome) -> Iterator[Spill]:
    group = entry.group
    if group.kind == "plain" or (group.area is None and _single(entry)):
        return
    for row, value in zip(group.rows, result.values[group], strict=True):
        if (group.sheet, row, group.column) in result.stale:
            continue
        height, width = 1, 1
        if group.kind == "array" and group.area is not None:
            height, width = group.area.r2 - group.area.r1 + 1, group.area.c2 - group.area.c1 + 1
        elif not _single(entry) and value is not CellError.SPILL:
            height, width = engine.spill(group.sheet, row, group.column)
        new = Area(row, group.column, row + height - 1, group.column + width - 1)
        old = group.area or Area(row, group.column, row, group.column)
        if old == new == Area(row, group.column, row, group.column):
            continue
        values = [[value]] if (height, width) == (1, 1) else engine.values(group.sheet, *new)
        yield Spill(row, group.column, old, new, values, entry.fed)


def _single(entry: Entry) -> bool:
    """Whether the formula surely fills one cell."""
    return entry.own is not None or entry.formula.scalar((0, len(entry.formula.tokens)))


def _failures(run: Run, stale: Mapping[Place, str]) -> Iterator[Failure]:
    found = []
    for (number, row), args in run.failed.items():
        entry, site = run.plan_sites[number]
        place = (entry.group.sheet, row, entry.group.column)
        if place not in stale and run.made(site, row):
            found.append((place, site, args))
    for (sheet, row, column), site, args in sorted(found, key=lambda item: (item[0], item[1].number)):
        error = run.errors[site.number, row]
        yield Failure(sheet, address(row, column), site.name, error.value, reason(site.name, args))
