"""``lowpoint recalc``: workbooks in, the same workbooks with new cached values out."""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint.errors import LowpointError
from lowpoint.faces import fleet_options

if TYPE_CHECKING:
    from lowpoint.fleet.finding import Found, Looking
    from lowpoint.fleet.tasks import Task

__all__ = ["fill", "run", "tasks_of"]

SUFFIXES = (".xlsx", ".xlsm", ".xltx", ".xltm")
MARK = "-recalc"


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("books", nargs="*", type=Path, metavar="BOOK",
        help="a workbook (.xlsx .xlsm .xltx .xltm), a folder of them, or a pattern: 'unit-*/*.xlsx'")  # fmt: skip
    add("-o", "--out", metavar="OUT", help="the file to write, for several books a folder (default: <stem>-recalc)")
    add("--in-place", action="store_true", help="write over the input, unless a lock file says that it is open")
    add("--values", action="store_true", help="write a copy with plain values in place of all formulas")
    add("--json", action="store_true", help="one JSON value on standard output")
    fleet_options.add_options(parser)
    parser.epilog = (
        "examples:\n  lowpoint recalc valves.xlsx                  writes valves-recalc.xlsx\n"
        "  lowpoint recalc nightly/ -o done/ --jobs 2   every workbook of a folder\n"
        "  lowpoint recalc nightly/ -o done/ --since-last --trail trail.jsonl\n"
        "  lowpoint recalc --watch inbox/ -o done/      each workbook as it lands\n\n"
        "exit code 1: an LP_ call gave an error, a cell could not be refreshed, or a book of several failed;\n"
        "130: stopped by a signal (finished books stand, the others are as they were)\n"
        "--json: an object for one book, a list for several books, a folder or a pattern; with --watch a line a book"
    )


def run(options: argparse.Namespace) -> int:
    fleet_options.check_options(options)
    if options.watch is not None:
        return _watch(options)
    if not options.books:
        raise LowpointError("recalc", "must be given workbooks", "none", "Name a workbook, a folder, or --watch DIR.")
    from lowpoint.fleet.finding import several

    tasks = tasks_of(options)
    if len(tasks) == 1 and not several(options.books) and not fleet_options.wants_fleet(options):
        return _one(tasks[0], options.json)
    return fleet_options.run_fleet(tasks, options)


# --- what to do -------------------------------------------------------------------------------------------------
def tasks_of(options: argparse.Namespace) -> list[Task]:
    """A task for each book asked for; LowpointError where the words contradict."""
    _check(options)
    from lowpoint.fleet.finding import check_targets, find, several

    many = several(options.books)
    found = find(options.books, _looking(options, many))
    tasks = [_task(one, options, many) for one in found]
    check_targets([(task.source, task.targets[0]) for task in tasks])
    return tasks


def _check(options: argparse.Namespace) -> None:
    if options.in_place and options.out is not None:
        raise LowpointError("--in-place", "must stand without -o", f"-o {options.out}", "Ask for one of the two.")
    if options.in_place and options.values:
        must = "must stand without --values, which would lose the formulas"
        raise LowpointError("--in-place", must, "both", "Name the copy with -o.")


def _looking(options: argparse.Namespace, many: bool) -> Looking:
    from lowpoint.fleet.finding import Looking

    outputs = Path(options.out) if many and options.out is not None else None
    return Looking(SUFFIXES, MARK, options.recursive, outputs)


def _task(found: Found, options: argparse.Namespace, many: bool) -> Task:
    from lowpoint.fleet.tasks import Task

    target = found.path if options.in_place else _target(found, options.out, options.values, many)
    home = Path(options.out) if many and options.out is not None else None
    return Task("recalc", found.path, (target,), {"values": True} if options.values else {}, home)


def _target(found: Found, out: str | None, values: bool, many: bool) -> Path:
    from lowpoint.fleet.finding import output_in

    book = found.path
    suffix = ".xlsx" if values else book.suffix
    if out is None:
        return book.with_name(f"{book.stem}{MARK}{suffix}")
    target = Path(out)
    if many:
        if target.suffix.lower() in SUFFIXES or (target.exists() and not target.is_dir()):
            raise LowpointError(out, "must be a folder, for several books", "a file", "Name a folder with -o.")
        return output_in(target, found, suffix)
    if target.is_dir() or out.endswith(("/", "\\")):
        return output_in(target, found, suffix)
    allowed = (".xlsx", ".xlsm") if values else (book.suffix.lower(),)
    if target.suffix.lower() not in allowed:
        must = f"the output must end with {' or '.join(allowed)}, as its content does"
        raise LowpointError(out, must, target.suffix or "no ending", "Programs refuse a file with another ending.")
    return target


# --- doing it ---------------------------------------------------------------------------------------------------
def _one(task: Task, as_json: bool) -> int:
    """A single book is told in full."""
    from lowpoint.fleet.recalculating import report_of

    try:
        report = report_of(task)
    except LowpointError as error:
        if as_json:
            from lowpoint.fleet.tasks import failure

            _print_json(failure(task, str(error), error.exit_code).data)
        raise
    if as_json:
        _print_json(report.to_json())
    else:
        print(report.text())
    return int(report.exit_code)


def _watch(options: argparse.Namespace) -> int:
    if options.books:
        raise LowpointError("--watch", "must stand without other books", str(options.books[0]), "Name one or other.")
    _check(options)
    from lowpoint.faces.fleet_watch import run_watch

    return run_watch(options.watch, _looking(options, True), lambda found: _task(found, options, True), options)


def _print_json(value: Any) -> None:
    print(json.dumps(value, indent=2, ensure_ascii=False))
