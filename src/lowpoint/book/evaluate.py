"""Running a plan: the engine for ordinary formulas, the vectorised core for LP_ calls, level by level."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Hashable, Mapping, Sequence
from itertools import groupby
from typing import TYPE_CHECKING, Any

from lowpoint import cells
from lowpoint.cells import OMITTED, CellError, Same
from lowpoint.registry import functions

from .curing import instance
from .plan import Entry, Plan
from .sites import FIT, Arg, Cells, Computed, Literal, Result, Site, formula_of, text_of
from .stale import Place

if TYPE_CHECKING:
    from .engine import Engine

__all__ = ["Run"]

MOST_PASSES = 20
_PLAIN = {float, str, bool, type(None)}

Call = tuple[Entry, Site]


class Run:
    """One evaluation of a plan on a loaded engine. Afterwards: values of every entry, and the calls that failed."""

    def __init__(
        self,
        engine: Engine,
        plan: Plan,
        titles: Mapping[str, str],
        bottom: Callable[[], int],
        constants: Mapping[Place, CellError],
    ) -> None:
        self.engine, self.plan, self.titles = engine, plan, titles
        self.bottom = bottom  # the last row with a stored cell
        self.constants = constants  # errors in cells that the engine's load could not take
        self.results: dict[int, list[Any]] = {}  # by site, in the order of the group's rows
        self.failed: dict[tuple[int, int], tuple[list[Any], CellError]] = {}  # (site, row): arguments and error
        self.shortened: set[tuple[int, int]] = set()  # (site, row): of several answers the cell shows the first
        self.settled = True
        self.plan_sites = plan.sites
        self._last: int | None = None
        self._columns: dict[tuple[str, int, int, int], list[Any]] = {}
        self._own: dict[tuple[str, int], list[Entry]] = defaultdict(list)
        for entry in plan.entries:
            if entry.own is not None:
                self._own[entry.group.sheet, entry.group.column].append(entry)
        for name in {site.name for _, site in self.plan_sites.values() if site.args is None}:
            engine.register(name, self._called)
        engine.register(FIT, _fitted)

    def go(self) -> None:
        """Evaluate everything."""
        self.engine.evaluate()
        for (sheet, row, column), error in self.constants.items():
            self.engine.set_values(sheet, row, column, [[error]])
        if self.constants:
            self.engine.evaluate()
        for _ in range(MOST_PASSES):
            before = dict(self.results)
            for level in self.plan.levels:
                self._level(level)
            if not self.plan.uncertain or before == self.results:
                break
        else:
            self.settled = False
        self._confirm()

    def values(self, entry: Entry) -> list[Any]:
        """The final values of an entry's cells, in the order of its rows."""
        group, own = entry.group, entry.own
        if own is not None:
            return self.results[own.number]
        rows = group.rows
        first = min(rows)
        column = self.engine.column(group.sheet, group.column, first, max(rows))
        return column if len(column) == len(rows) and rows[0] == first else [column[r - first] for r in rows]

    def made(self, site: Site, row: int) -> bool:
        """Whether a call was really made, or stands in a branch that was not taken."""
        guard = site.guard
        return guard is None or self.engine.value(guard.slot.sheet, row, guard.slot.column) not in (0.0, False, None)

    def _confirm(self) -> None:
        """Work out the formulas of failed callbacks once more: an earlier round may have made a call in a branch that
        is not taken by now."""
        cells = {(site, row) for site, row in self.failed if self.plan_sites[site][1].args is None}
        before = {key: self.failed.pop(key) for key in cells}
        for entry, row in {(self.plan_sites[site][0], row) for site, row in cells}:
            pieces = formula_of(entry.work)
            if pieces is not None:
                formula = "=" + instance(text_of(pieces), row)
                if not self.engine.renew(entry.group.sheet, row, entry.group.column, formula):
                    sites = {site.number for site in entry.work.sites}
                    self.failed |= {key: why for key, why in before.items() if key[0] in sites and key[1] == row}
        if cells:
            self.engine.evaluate()

    # Batches

    def _level(self, level: Sequence[Call]) -> None:
        self._columns.clear()
        self._last = None
        for batch in _batches(level):
            self._batch(batch)
        self._columns.clear()
        self.engine.evaluate()

    def _batch(self, batch: Sequence[Call]) -> None:
        name = batch[0][1].name
        width = len(batch[0][1].args or ())
        sizes = [len(entry.group.rows) for entry, _ in batch]
        columns = [self._column(batch, sizes, place) for place in range(width)]
        results = cells.call_many(name, columns, sum(sizes))
        begin = 0
        for (entry, site), size in zip(batch, sizes, strict=True):
            part = results[begin : begin + size]
            if any(type(r) is CellError for r in part) or self.failed:
                self._note_failures(entry, site, part, columns, begin)
            self.results[site.number] = part
            self._put(entry, site, part)
            begin += size

    def _column(self, batch: Sequence[Call], sizes: Sequence[int], place: int) -> Any:
        args = [(site.args or [])[place] for _, site in batch]
        first = args[0]
        if isinstance(first, Literal) and all(
            isinstance(a, Literal) and type(a.value) is type(first.value) and a.value == first.value for a in args
        ):
            return Same(first.value)
        if isinstance(first, Cells) and _fixed(first):
            # A batch holds calls over one and the same fixed range only.
            return Same(self._range(first, batch[0][0].group.rows[0]))
        column: list[Any] = []
        for (entry, _), arg, size in zip(batch, args, sizes, strict=True):
            column += self._argument(entry, arg, size)
        return column

    def _argument(self, entry: Entry, arg: Arg, size: int) -> list[Any]:
        rows = entry.group.rows
        if isinstance(arg, Literal):
            return [arg.value] * size
        if isinstance(arg, Result):
            return self.results[arg.site.number]
        if isinstance(arg, Computed):
            return self._picked(arg.slot.sheet, arg.slot.column, rows)
        if arg.whole:
            return [self._range(arg, row) for row in rows]
        sheet, row = arg.ref.sheet or entry.group.sheet, arg.ref.r1
        if not row.relative:
            return self._picked(sheet, arg.ref.c1, [row.n]) * size
        return self._picked(sheet, arg.ref.c1, rows if row.n == 0 else [r + row.n for r in rows])

    def _range(self, arg: Cells, row: int) -> list[list[Any]]:
        self.engine.check_time()  # a range as long as a column, read anew for every row, takes its time
        place = arg.ref.at(row)
        if arg.cut:
            place = place._replace(r2=self._last_row())
        columns = [self._read(arg.ref.sheet or "", c, place.r1, place.r2) for c in range(place.c1, place.c2 + 1)]
        return [list(line) for line in zip(*columns, strict=True)]

    def _last_row(self) -> int:
        """The last row with a cell, on any sheet, stored or filled by an array."""
        if self._last is None:
            filled = (
                row + self.engine.spill(entry.group.sheet, row, entry.group.column)[0] - 1
                for entry in self.plan.entries
                if entry.group.kind == "dynamic" and entry.own is None and not entry.work.single
                for row in entry.group.rows
            )
            self._last = max(self.bottom(), *filled, 1)
        return self._last

    def _picked(self, sheet: str, column: int, rows: Sequence[int]) -> list[Any]:
        first, last = min(rows), max(rows)
        if first < 1:
            return [CellError.REF if r < 1 else self._picked(sheet, column, [r])[0] for r in rows]
        values = self._read(sheet, column, first, last)
        return values if len(values) == len(rows) and rows[0] == first else [values[r - first] for r in rows]

    def _read(self, sheet: str, column: int, first: int, last: int) -> list[Any]:
        """Part of a column as it stands now: the engine's cells, and results that it was not told."""
        key = (sheet, column, first, last)
        if key in self._columns:
            return self._columns[key]
        title = self.titles.get(sheet.casefold(), sheet)
        own = [e for e in self._own.get((title, column), ()) if e.own and e.own.number in self.results]
        if len(own) == 1 and own[0].group.rows == list(range(first, last + 1)):
            values = self.results[own[0].own.number] if own[0].own else []
        else:
            values = self.engine.column(title, column, first, last)
            if not set(map(type, values)) <= _PLAIN:
                values = [_vouched(value) for value in values]
            for entry in own:
                _overlay(values, first, entry.group.rows, self.results[entry.own.number] if entry.own else [])
        self._columns[key] = values
        return values

    def _put(self, entry: Entry, site: Site, values: list[Any]) -> None:
        """Tell the engine the results that it reads."""
        sheet, column = entry.group.sheet, entry.group.column
        if site.slot is not None:
            sheet, column = site.slot.sheet, site.slot.column
        elif not entry.needed:
            return
        for first, part in _runs(entry.group.rows, values):
            self.engine.set_column(sheet, first, column, part)

    def _note_failures(self, entry: Entry, site: Site, part: list[Any], columns: list[Any], begin: int) -> None:
        for i, (row, value) in enumerate(zip(entry.group.rows, part, strict=True)):
            key = (site.number, row)
            if isinstance(value, CellError):
                self.failed[key] = [c.argument if isinstance(c, Same) else c[begin + i] for c in columns], value
            else:
                self.failed.pop(key, None)

    # Callbacks

    def _called(self, number: float, row: float, *given: Any) -> Any:
        self.engine.check_time()
        _, site = self.plan_sites[int(number)]
        args = [_vouched(a) if present else OMITTED for a, present in zip(given, site.given, strict=True)]
        _even_out(args, site.columns)
        result = cells.call(site.name, args)
        key = (int(number), int(row))
        self.shortened.discard(key)
        error = _first_error(result[0][0] if site.first and _several(result) else result)
        if site.first and _several(result) and not functions[site.name].column:
            self.shortened.add(key)
        if error is not None:
            self.failed[key] = args, error
        else:
            self.failed.pop(key, None)
        return result


def _batches(level: Sequence[Call]) -> list[list[Call]]:
    """The calls of a level by function; those over different fixed ranges, or with other arguments given, apart."""

    def key(call: Call) -> Hashable:
        args = call[1].args or []
        ranges = tuple((n, a.ref) for n, a in enumerate(args) if isinstance(a, Cells) and _fixed(a))
        omitted = {n for n, a in enumerate(args) if isinstance(a, Literal) and a.value is OMITTED}
        return call[1].name, len(args), frozenset(omitted), ranges

    batches: dict[Any, list[Call]] = defaultdict(list)
    for call in level:
        batches[key(call)].append(call)
    return list(batches.values())


def _fixed(arg: Cells) -> bool:
    return arg.whole and not arg.ref.r1.relative and not arg.ref.r2.relative


def _runs(rows: Sequence[int], values: Sequence[Any]) -> list[tuple[int, list[Any]]]:
    """Values in unbroken runs of rows: first row and values of each."""
    if len(rows) == len(values) and list(rows) == list(range(rows[0], rows[0] + len(rows))):
        return [(rows[0], list(values))]
    pairs = sorted(zip(rows, values, strict=True), key=lambda pair: pair[0])
    numbered = enumerate(pairs)
    parts = [[pair for _, pair in part] for _, part in groupby(numbered, key=lambda item: item[1][0] - item[0])]
    return [(part[0][0], [value for _, value in part]) for part in parts]


def _overlay(values: list[Any], first: int, rows: Sequence[int], results: Sequence[Any]) -> None:
    for row, result in zip(rows, results, strict=True):
        if first <= row < first + len(values):
            values[row - first] = result


def _vouched(value: Any) -> Any:
    """An argument; what the engine cannot vouch for counts as an unknown name (the report tells it apart later).

    An array with no room is no doubt but an error, which is passed on.
    """
    if isinstance(value, list):
        return [[_vouched(cell) for cell in row] for row in value]
    if not hasattr(value, "reason"):
        return value
    return CellError.SPILL if value.kind == "spill" else CellError.NAME


def _even_out(args: list[Any], columns: Sequence[int]) -> None:
    """Tables that are whole columns made equally long: the engine cuts each off behind its own last cell."""
    tables = [args[place] or [[None]] if isinstance(args[place], list) else [[args[place]]] for place in columns]
    most = max(map(len, tables), default=0)
    for place, table in zip(columns, tables, strict=True):
        args[place] = table + [[None] * len(table[0])] * (most - len(table))


def _several(result: Any) -> bool:
    return isinstance(result, list) and sum(map(len, result)) > 1


def _first_error(result: Any) -> CellError | None:
    grid = result if isinstance(result, list) else [[result]]
    return next((cell for row in grid for cell in row if isinstance(cell, CellError)), None)


def _fitted(height: float, width: float, result: Any) -> list[list[Any]]:
    """An array laid into the range of a legacy array formula: one row or column is repeated, the rest is #N/A."""
    grid = result if isinstance(result, list) else [[result]]
    rows, columns = len(grid), len(grid[0]) if grid else 0

    def at(r: int, c: int) -> Any:
        r, c = (0 if rows == 1 else r), (0 if columns == 1 else c)
        value = grid[r][c] if r < rows and c < columns else CellError.NA
        return 0.0 if value is None else value

    return [[at(r, c) for c in range(int(width))] for r in range(int(height))]
