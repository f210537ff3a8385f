"""Headless recalculation of a workbook: LP_ functions and all that depends on them, new cached values, nothing else."""

from __future__ import annotations

import os
import re
import time
from collections.abc import Iterator, Sequence
from functools import partial
from pathlib import Path
from typing import Any

from lowpoint.errors import BookError

from .curing import cure
from .foreign import foreign_cells, late_errors
from .garbage import uncollected
from .guard_cells import CellCount
from .guard_limits import Limits, in_force, limiting
from .guard_memory import enough_memory
from .hiding import hiding_of
from .names import names_of
from .outcome import Outcome, outcome_of
from .package import Package, Sheet, locked
from .patch import patch_sheet
from .plan import Context, make_plan
from .refs import address, quoted
from .report import MOST_CELLS, Report
from .sheet import Group, SheetPart
from .stored import strings_of
from .tables import tables_of

__all__ = ["output_path", "recalculate"]

_FORMULA = re.compile(rb"<(?:[\w.-]+:)?f[\s>]")
_OURS = re.compile(r"(?<![A-Za-z0-9_])LPU?[_.][A-Za-z]|ORG\.LOWPOINT\.", re.IGNORECASE)

PathLike = str | os.PathLike[str]


def recalculate(
    path: PathLike,
    out: PathLike | None = None,
    *,
    in_place: bool = False,
    values: bool = False,
    limits: Limits | None = None,
    per_cell: bool = False,
) -> Report:
    """Recompute a workbook's LP_ functions and everything else in it, and write a copy with the new cached values.

    Without ``out`` the copy is ``<stem>-recalc`` beside the input; ``in_place`` writes over the input, unless a lock
    file says that somebody has it open; ``values`` writes plain numbers instead of formulas. Only cached values of
    formula cells, and of cells that arrays fill, are changed; a book in which none changes is copied byte for byte.
    ``per_cell`` makes every LP_ call by itself, as a spreadsheet program does: slower, the same answers. ``limits``
    are those in force unless given. Raises BookError where the book cannot be read or written.

    >>> recalculate("kestrel-bay.xlsx").exit_code  # doctest: +SKIP
    0
    """
    with limiting(limits or in_force()), enough_memory(path), uncollected():
        return _recalculated(path, output_path(path, out, in_place), in_place, values, per_cell)


def _recalculated(path: PathLike, target: Path, in_place: bool, values: bool, per_cell: bool) -> Report:
    began, limits = time.perf_counter(), in_force()
    package = Package.open(path, limits)
    report = Report(str(path), str(target))
    book = Book(package, limits)
    outcome = _evaluated(book, report, per_cell)
    changed = _patched(book, outcome, report)
    _warn(book, report, values, bool(changed))
    if values:
        from .values import write_values_copy

        for lost in write_values_copy(package, target, _plain_values(book, outcome), limits):
            report.warnings.append(f"the copy lacks {lost}")
    elif changed or not in_place:
        package.write(target, changed)
    report.parts = sorted(changed)
    report.seconds = time.perf_counter() - began
    return report


def output_path(path: PathLike, out: PathLike | None, in_place: bool) -> Path:
    """Where the result goes. Raises BookError where that would be the input unasked, or a book that is open."""
    source = Path(path)
    target = source if in_place else _copy_path(source, out)
    owner = locked(target)
    if owner is not None:
        must = f"is open: {owner} has it"
        raise BookError(str(target), must, remedy="Close it there, or name another output with -o.")
    return target


def _copy_path(source: Path, out: PathLike | None) -> Path:
    target = Path(out) if out is not None else source.with_name(f"{source.stem}-recalc{source.suffix}")
    if os.path.realpath(source) == os.path.realpath(target):
        must = "the output must be another file than the input"
        raise BookError(str(target), must, remedy="Name another output, or ask for --in-place.")
    return target


class Book:
    """A workbook read for recalculation: its sheets of cells and what reading their formulas needs."""

    def __init__(self, package: Package, limits: Limits | None = None) -> None:
        self.package, self.limits = package, limits or in_force()
        counted = CellCount(package.name, self.limits)
        self.sheets = [self._part(sheet, counted) for sheet in package.sheets if sheet.kind == "worksheet"]
        self.titles = {sheet.title.casefold(): sheet.title for sheet in self.sheets}
        self.groups: list[Group] = [group for sheet in self.sheets for group in sheet.distinct]

    def _part(self, sheet: Sheet, counted: CellCount) -> SheetPart:
        raw = self.package.read(sheet.path)
        counted.add_part(raw)
        return SheetPart(sheet.title, sheet.path, raw, self.package.name, self.limits)

    @property
    def context(self) -> Context:
        """Names, tables, titles, and the cure of formulas for the engine."""
        titles = tuple(sheet.title for sheet in self.package.sheets)
        fit = partial(cure, hiding=hiding_of(self.package, self.sheets))
        return Context(names_of(self.package), tables_of(self.package), titles, frozenset(self.titles), fit)

    def last_row(self) -> int:
        """The last row of any sheet that holds a cell."""
        return max((max(sheet.row_spans, default=1) for sheet in self.sheets), default=1)

    def strings(self) -> list[str]:
        """The shared strings."""
        links = self.package.relations(self.package.main)
        part = next((link.target for link in links if link.kind == "sharedStrings"), "")
        return strings_of(self.package.read(part)) if part in self.package else []


def _evaluated(book: Book, report: Report, per_cell: bool) -> Outcome:
    """Plan, load, run, collect; the counts of it go into the report."""
    from .engine import Engine
    from .evaluate import Run
    from .feed import engine_bytes
    from .lifting import register

    plan = make_plan(book.groups, book.context, per_cell)
    foreign = {sheet.title: foreign_cells(sheet, book.package.date1904) for sheet in book.sheets}
    data = engine_bytes(book.package, book.sheets, plan, foreign)
    seconds, name = book.limits.seconds, book.package.name
    engine = Engine.load(data, date1904=book.package.date1904, seconds=seconds, name=name)
    began = time.perf_counter()
    register(engine)
    run = Run(engine, plan, book.titles, book.last_row, late_errors(book.sheets, foreign))
    run.go()
    report.evaluation_seconds = time.perf_counter() - began
    outcome = outcome_of(engine, run, plan, book.groups, book.titles)
    cells = sum(len(entry.group.rows) for entry in plan.entries)
    blocked = _blocked(book)
    report.recomputed = cells - sum(1 for place in outcome.stale if place not in blocked)
    report.calls = sum(len(entry.formula.lp) * len(entry.group.rows) for entry in plan.entries)
    report.failed, report.kept = outcome.failed, outcome.kept
    report.differences = _differences(plan.met)
    if outcome.shortened:
        report.warnings.append(_shortened([f"{quoted(s)}!{address(r, c)}" for s, r, c in outcome.shortened]))
    return outcome


def _shortened(cells: Sequence[str]) -> str:
    """The note on plain cells with a range where a call takes one value."""
    named = ", ".join(cells[:MOST_CELLS])
    more = f" and {len(cells) - MOST_CELLS} more" if len(cells) > MOST_CELLS else ""
    return (
        f"in {named}{more} an LP_ call is given a range where it takes one value, and the cell shows the answer for "
        "the range's first cell: name the one cell that is meant, or enter an array formula"
    )


def _differences(met: set[str]) -> list[dict[str, Any]]:
    """The known differences of the engine that the formulas meet, in words."""
    from .probes import KNOWN

    return [{"id": name, "treatment": KNOWN[name][0], "difference": KNOWN[name][1]} for name in sorted(met)]


def _blocked(book: Book) -> set[tuple[str, int, int]]:
    return {(g.sheet, row, g.column) for g in book.groups if g.reason for row in g.rows}


def _patched(book: Book, outcome: Outcome, report: Report) -> dict[str, bytes]:
    """The parts that change, and the changes into the report."""
    strings = book.strings() if any(b't="s"' in sheet.data for sheet in book.sheets) else []
    changed: dict[str, bytes] = {}
    for sheet in book.sheets:
        values = {group: outcome.values[group] for group in sheet.distinct if group in outcome.values}
        kept = {(row, column) for title, row, column in outcome.stale if title == sheet.title}
        spills = outcome.spills.get(sheet.title, [])
        done = patch_sheet(sheet, values, outcome.fed.__contains__, kept, spills, strings)
        report.changed += done.changed
        report.unfed += done.unfed
        report.untouched += done.untouched
        if done.data is not None:
            changed[sheet.path] = done.data
    return changed


def _plain_values(book: Book, outcome: Outcome) -> dict[tuple[str, int, int], Any]:
    """Every refreshed cell's value, for the copy without formulas."""
    return dict(_all_values(outcome))


def _all_values(outcome: Outcome) -> Iterator[tuple[tuple[str, int, int], Any]]:
    for group, values in outcome.values.items():
        for row, value in zip(group.rows, values, strict=True):
            if (group.sheet, row, group.column) not in outcome.stale:
                yield (group.sheet, row, group.column), value
    for sheet, spills in outcome.spills.items():
        for spill in spills:
            yield from (((sheet, row, column), spill.value(row, column)) for row, column in spill.cells())


def _warn(book: Book, report: Report, values: bool, changed: bool) -> None:
    """What the reader of the report should know about the file."""
    package = book.package
    if package.full_calc_on_load and not values:
        report.warnings.append(
            "the workbook tells programs to calculate everything anew when it is opened (fullCalcOnLoad): one without "
            "the LP_ functions then shows errors; --values writes a copy with plain numbers"
        )
    if package.signed and (changed or values):
        report.broken_signature = True
        report.warnings.append("the digital signature of the workbook does not survive the new values: sign it anew")
    if package.iterates:
        report.warnings.append("the workbook asks for iteration over circular references; such cells keep their values")
    if package.rounds_as_shown:
        report.warnings.append(
            "the workbook calculates with the precision as displayed (fullPrecision): here every digit counts, so that "
            "its own program may give other values"
        )
    for sheet in package.sheets:
        if sheet.kind in ("dialogsheet", "macrosheet") and _FORMULA.search(package.read(sheet.path)):
            report.warnings.append(f"the sheet {sheet.title!r} is a {sheet.kind}, which is not recalculated")
    if not report.calls and not any(_OURS.search(group.text) for group in book.groups):
        report.warnings.append("there is no LP_ function in this workbook")
