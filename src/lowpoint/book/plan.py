"""The plan of a recalculation: every group read and lowered, its LP_ calls in levels, scratch columns laid out."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from types import MappingProxyType

from .curing import Blocked, Cured
from .formula import Formula, read
from .formulas import Unreadable
from .graph import Block, components, dependencies
from .lowering import lower, stored_text
from .names import Names, Place
from .refs import Area, Ref
from .sheet import Group
from .sites import Computed, Setting, Site, Supply, Work, text_of
from .tables import Tables

__all__ = ["Context", "Entry", "Plan", "make_plan", "mark_fed", "span"]


@dataclass(frozen=True, slots=True)
class Context:
    """What reading a formula needs to know of the workbook: all sheets' titles, those of worksheets folded.

    ``cure`` makes a formula's text fit for the engine.
    """

    names: Names
    tables: Tables
    titles: tuple[str, ...]
    worksheets: frozenset[str]
    cure: Callable[[Sequence[str | int], Sequence[int]], Cured]


@dataclass(slots=True, eq=False)
class Entry:
    """A group of formulas that can be evaluated, and what becomes of it."""

    group: Group
    formula: Formula
    work: Work = field(default_factory=Work)
    fed: bool = False  # an LP_ call is in it or in something it reads, as far as can be told
    needed: bool = False  # the engine reads its cells
    met: set[str] = field(default_factory=set)

    @property
    def first(self) -> int:
        """The uppermost row."""
        return min(self.group.rows)

    @property
    def own(self) -> Site | None:
        """The batched call whose results are the cells' values."""
        return self.work.own


@dataclass(slots=True)
class Plan:
    """Entries with their batched calls by level, and the scratch sheets by name."""

    entries: list[Entry]
    levels: list[list[tuple[Entry, Site]]] = field(default_factory=list)
    scratch: dict[str, list[tuple[Entry, Computed]]] = field(default_factory=dict)
    met: set[str] = field(default_factory=set)  # the engine's known differences that formulas meet, blocked ones too
    uncertain: bool = False  # a result may spill to where nobody can foretell: go through the levels until all is still

    @property
    def sites(self) -> dict[int, tuple[Entry, Site]]:
        """Every LP_ call by its number."""
        return {site.number: (entry, site) for entry in self.entries for site in entry.work.sites}


def make_plan(groups: Iterable[Group], context: Context, per_cell: bool = False) -> Plan:
    """Read the groups (an unreadable one gets its reason), lower them, and order the calls."""
    supply = Supply(context.titles)
    read_ones = (_entry(group, context) for group in groups if not group.reason)
    readable = [e for e in read_ones if e is not None]
    plan = Plan([e for e in readable if _lower(e, supply, context, batch=not per_cell)])
    plan.met = set().union(*(e.met for e in readable))
    _order(plan, lambda entry: _lower(entry, supply, context, batch=False))
    plan.entries = [entry for entry in plan.entries if not entry.group.reason]
    spilling = any(entry.group.kind == "dynamic" and not entry.work.single for entry in plan.entries)
    plan.uncertain = spilling and bool(plan.levels)
    for entry in plan.entries:
        for slot in entry.work.slots:
            plan.scratch.setdefault(slot.sheet, [])
        for computed in entry.work.computed:
            plan.scratch[computed.slot.sheet].append((entry, computed))
    return plan


def _entry(group: Group, context: Context) -> Entry | None:
    places = [Place(group.sheet, row, group.column) for row in (group.rows[0], min(group.rows), max(group.rows))]
    try:
        if any(token.kind == "table" for token in group.tokens):
            for place in places[1:]:  # "this row" must be one of the table's for all the rows
                context.tables.expand(group.tokens, place)
        entry = Entry(group, read(group.tokens, places[0], context.names, context.tables))
        for ref in entry.formula.refs:
            _check_sheet(ref, context)
        return entry
    except Unreadable as problem:
        group.reason = str(problem)
        return None


def _check_sheet(ref: Ref, context: Context) -> None:
    """Raise Unreadable where a reference leads to no cells."""
    if ref.sheet is None or ref.sheet.casefold() in context.worksheets:
        return
    known = ref.sheet.casefold() in {title.casefold() for title in context.titles}
    why = "holds no cells that are calculated" if known else "is not in the workbook"
    raise Unreadable(f"it reads the sheet {ref.sheet!r}, which {why}")


def _lower(entry: Entry, supply: Supply, context: Context, batch: bool) -> bool:
    """Lower an entry and cure its formulas; False, and a reason, where one of them must not be evaluated."""
    group = entry.group
    size = (group.area.r2 - group.area.r1 + 1, group.area.c2 - group.area.c1 + 1) if group.area else (1, 1)
    work = entry.work = lower(entry.formula, Setting(group.sheet, group.kind, size), supply, batch)
    stored = work.pieces is None and entry.own is None
    pieces = stored_text(entry.formula) if stored else work.pieces
    try:
        if pieces is not None:
            cured = context.cure(text_of(pieces), group.rows)
            if not stored or cured.changed or group.kind != "plain" or group.shared:
                work.pieces = list(cured.parts)
            entry.met.update(cured.met)
        for computed in work.computed:
            cured = context.cure(text_of(computed.pieces), group.rows)
            computed.pieces = list(cured.parts)
            entry.met.update(cured.met)
    except Blocked as problem:
        group.reason = f"it {problem}"
        entry.met.update(problem.met)
    return not group.reason


def span(ref: Ref, rows: Sequence[int]) -> Area:
    """Everything that a reference means from the first to the last of some rows."""
    one, two = ref.at(min(rows)), ref.at(max(rows))
    return Area(min(one.r1, two.r1), one.c1, max(one.r2, two.r2), one.c2)


def _block(entry: Entry, more: Sequence[Area] = ()) -> Block:
    rows, group = entry.group.rows, entry.group
    place = group.area or Area(min(rows), group.column, max(rows), group.column)
    # A reference's sheet may be spelled in another case than the sheet's own title.
    reads = {((ref.sheet or group.sheet).casefold(), span(ref, rows)) for ref in entry.formula.refs}
    return Block(group.sheet.casefold(), (place, *more), tuple(reads))


def mark_fed(plan: Plan, filled: Mapping[Entry, Sequence[Area]] = MappingProxyType({})) -> None:
    """Set which entries an LP_ call is in or may feed; ``filled`` are areas that arrays turned out to fill."""
    edges = dependencies([_block(entry, filled.get(entry, ())) for entry in plan.entries])
    _mark_fed(plan, edges, components(edges))


def _mark_fed(plan: Plan, edges: list[set[int]], order: list[list[int]]) -> None:
    if any(entry.formula.lp for entry in plan.entries):
        seeds = {n for n, entry in enumerate(plan.entries) if entry.formula.lp or entry.formula.dynamic}
        for number in _downstream(edges, order, seeds):
            if number < len(plan.entries):
                plan.entries[number].fed = True


def _order(plan: Plan, as_callbacks: Callable[[Entry], bool]) -> None:
    """Set the levels; calls that feed themselves or that hang on unknown references become callbacks."""
    edges = dependencies([_block(entry) for entry in plan.entries])
    order = components(edges)
    _mark_fed(plan, edges, order)
    unknown = _downstream(edges, order, {n for n, e in enumerate(plan.entries) if e.formula.dynamic})
    level_after = [0] * len(edges)
    levels: dict[int, list[tuple[Entry, Site]]] = defaultdict(list)
    for members in order:
        before = max((level_after[d] for m in members for d in edges[m]), default=0)
        circle = len(members) > 1 or members[0] in edges[members[0]]
        for number in members:
            level_after[number] = before
            if number < len(plan.entries):
                entry = plan.entries[number]
                if (circle or number in unknown) and any(s.args is not None for s in entry.work.sites):
                    as_callbacks(entry)
                level_after[number] = _set_levels(entry, before, levels)
    plan.levels = [levels[n] for n in sorted(levels)]
    _mark_needed(plan, edges)


def _set_levels(entry: Entry, before: int, levels: dict[int, list[tuple[Entry, Site]]]) -> int:
    top = before
    for site in reversed(entry.work.sites):  # inner calls first
        if site.args is not None:
            site.level = 1 + max((s.level for s in site.inner), default=0)
            site.level = max(site.level, before + 1)
            levels[site.level].append((entry, site))
            top = max(top, site.level)
    return top


def _mark_needed(plan: Plan, edges: list[set[int]]) -> None:
    """Which cells the engine reads: all of them, where some references are unknown."""
    everything = any(entry.formula.dynamic for entry in plan.entries)
    for number, entry in enumerate(plan.entries):
        entry.needed = entry.needed or everything
        if entry.own is None or len(entry.work.sites) > 1 or entry.work.computed:
            for target in edges[number]:
                for one in edges[target] if target >= len(plan.entries) else (target,):
                    plan.entries[one].needed = True


def _downstream(edges: list[set[int]], order: list[list[int]], seeds: set[int]) -> set[int]:
    """The seeds and all that depends on them."""
    reached = set(seeds)
    for members in order:
        if any(m in reached or not reached.isdisjoint(edges[m]) for m in members):
            reached.update(members)
    return reached
