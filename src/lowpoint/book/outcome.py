"""What came out of a run: every formula cell's value, what keeps its old one, what spills, which calls failed."""

from __future__ import annotations

from collections.abc import Container, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

from lowpoint.cells import CellError, reason

from .evaluate import Run
from .guard_cells import CellCount
from .guard_limits import in_force
from .plan import Entry, Plan, mark_fed
from .refs import Area, address
from .report import Failure, Kept
from .sheet import Group
from .spills import Spill
from .stale import Doubts, Place, cells_of, stale_cells
from .unseen import unseen_readers

if TYPE_CHECKING:
    from .engine import Engine

__all__ = ["Outcome", "outcome_of"]

_NO_ROOM = (
    "the answer fills several cells, and one of them is not empty. Clear the cells below and beside this one, or move "
    "the formula."
)
_NOT_STILL = "its array results push each other about without end"


@dataclass(slots=True)
class Outcome:
    """Values by group in the order of its rows, cells that keep their old value with the reason, spills by sheet."""

    values: dict[Group, list[Any]] = field(default_factory=dict)
    stale: dict[Place, str] = field(default_factory=dict)
    spills: dict[str, list[Spill]] = field(default_factory=dict)
    fed: set[Group] = field(default_factory=set)
    failed: list[Failure] = field(default_factory=list)
    shortened: list[Place] = field(default_factory=list)  # of a range's answers such a cell shows the first only

    @property
    def kept(self) -> list[Kept]:
        """The stale cells for the report."""
        return [Kept(sheet, address(row, column), why) for (sheet, row, column), why in sorted(self.stale.items())]


def outcome_of(engine: Engine, run: Run, plan: Plan, groups: Sequence[Group], titles: Mapping[str, str]) -> Outcome:
    """Collect the results of a finished run; afterwards the engine holds other values."""
    result = Outcome()
    doubts = Doubts()
    full = CellError.SPILL in run.constants.values() or any(_no_room(engine, entry) for entry in plan.entries)
    spills: list[tuple[Entry, Spill]] = []
    for entry in plan.entries:
        values = run.values(entry)
        if not run.settled:
            doubts.cells |= {(entry.group.sheet, row, entry.group.column): _NOT_STILL for row in entry.group.rows}
        result.values[entry.group] = [_cell(value, full) for value in values]
        spills += ((entry, spill) for spill in _spills(engine, entry, result.values[entry.group], full))
    failures = list(_failures(run))
    _doubt(doubts, plan.entries, result.values, spills)
    blocked = [group for group in groups if group.reason]
    kept = [*(place for group in blocked for place in cells_of(group)), *doubts.cells]
    doubts.cells |= unseen_readers(engine, run, plan, kept)
    result.stale = stale_cells(blocked, plan.entries, doubts, titles)
    _mark_fed(plan, spills)
    result.fed = {entry.group for entry in plan.entries if entry.fed}
    for entry, spill in spills:
        if (entry.group.sheet, spill.row, spill.column) not in result.stale:
            result.spills.setdefault(entry.group.sheet, []).append(replace(spill, fed=entry.fed))
    result.failed = _reported(run, failures, result.stale)
    result.failed += _with_no_room(plan, result.values, {place for place, _ in failures} | result.stale.keys())
    cut = ((run.plan_sites[site][0].group, row) for site, row in run.shortened)
    result.shortened = sorted({(group.sheet, row, group.column) for group, row in cut} - result.stale.keys())
    return result


def _with_no_room(plan: Plan, values: Mapping[Group, Sequence[Any]], known: Container[Place]) -> Iterator[Failure]:
    """The calls whose array answer has something in its way: the cell shows #SPILL!, which no call gave."""
    for entry in plan.entries:
        group, names = entry.group, list(entry.formula.lp.values())
        if group.kind == "dynamic" and names and entry.own is None:
            for row, value in zip(group.rows, values[group], strict=True):
                if value is CellError.SPILL and (group.sheet, row, group.column) not in known:
                    why = f"{names[0]}: {_NO_ROOM}"
                    yield Failure(group.sheet, address(row, group.column), names[0], CellError.SPILL.value, why)


def _mark_fed(plan: Plan, spills: Iterable[tuple[Entry, Spill]]) -> None:
    """Which entries a call feeds, new once more where arrays fill other cells than the file says."""
    areas: dict[Entry, list[Area]] = {}
    for entry, spill in spills:
        if spill.new != spill.old:
            areas.setdefault(entry, []).append(spill.new)
    if areas:
        mark_fed(plan, areas)


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


def _doubt(
    doubts: Doubts,
    entries: Iterable[Entry],
    values: Mapping[Group, Sequence[Any]],
    spills: Iterable[tuple[Entry, Spill]],
) -> None:
    """Note the cells whose result, or part of whose array, the engine cannot vouch for."""
    for entry in entries:
        group = entry.group
        for row, value in zip(group.rows, values[group], strict=True):
            if hasattr(value, "reason"):
                doubts.add((group.sheet, row, group.column), value, entry)
    for entry, spill in spills:
        place = (entry.group.sheet, spill.row, spill.column)
        doubts.areas[place] = spill.new
        wrong = next((value for line in spill.values for value in line if hasattr(value, "reason")), None)
        if wrong is not None:
            doubts.add(place, wrong, entry)


def _spills(engine: Engine, entry: Entry, values: Sequence[Any], full: bool) -> Iterator[Spill]:
    group = entry.group
    if group.kind == "plain" or (group.area is None and entry.work.single):
        return
    counted = CellCount(engine.name, in_force())
    for row, value in zip(group.rows, values, strict=True):
        height, width = 1, 1
        if group.kind == "array" and group.area is not None:
            height, width = group.area.r2 - group.area.r1 + 1, group.area.c2 - group.area.c1 + 1
        elif not entry.work.single and value is not CellError.SPILL:
            height, width = engine.spill(group.sheet, row, group.column)
            counted.add(height * width)
        new = Area(row, group.column, row + height - 1, group.column + width - 1)
        old = group.area or Area(row, group.column, row, group.column)
        if old == new == Area(row, group.column, row, group.column):
            continue
        grid = [[value]] if (height, width) == (1, 1) else engine.values(group.sheet, *new)
        yield Spill(row, group.column, old, new, [[_cell(v, full) for v in line] for line in grid], entry.fed)


def _failures(run: Run) -> Iterator[tuple[Place, int]]:
    """The calls that gave an error and were really made: their cells and the numbers of their sites."""
    for number, row in run.failed:
        entry, site = run.plan_sites[number]
        if run.made(site, row):
            yield (entry.group.sheet, row, entry.group.column), number


def _reported(run: Run, failures: Iterable[tuple[Place, int]], stale: Mapping[Place, str]) -> list[Failure]:
    found = []
    for place, number in sorted(failures):
        if place not in stale:
            (sheet, row, column), site = place, run.plan_sites[number][1]
            args, error = run.failed[number, row]
            found.append(Failure(sheet, address(row, column), site.name, error.value, reason(site.name, args)))
    return found
