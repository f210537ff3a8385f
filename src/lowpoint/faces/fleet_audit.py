"""``lowpoint audit`` over many data sheets, or one with the machinery of many."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint.errors import LowpointError
from lowpoint.faces.fleet_options import Kind, run_fleet
from lowpoint.faces.fleet_targets import check_absent, check_folder, check_watch, looking_for
from lowpoint.faces.targets import checked_target

if TYPE_CHECKING:
    from lowpoint.fleet.finding import Found, Looking
    from lowpoint.fleet.running import Result
    from lowpoint.fleet.tasks import Task

__all__ = ["MARK", "looking_of", "one_target", "run"]

MARK = "-audit"
ENDING = ".xlsx"


def run(options: argparse.Namespace, site: dict[str, float | None]) -> int:
    """Audit all that is meant; ``site`` as the tasks' options have it."""
    from lowpoint.fleet.finding import check_targets, find, several

    kind = Kind("data sheet", _told, none_read=2)
    if options.write_layout is not None:
        raise LowpointError("--write-layout", "must be asked for with one sheet, and nothing of many",
                            remedy="A layout is that of one vendor's form.")  # fmt: skip
    asked = {**site, "layout": _layout(options.layout), "every": options.all}
    looking = looking_of(options)
    many = options.watch is not None or several(options.sheets)
    if many and options.out is not None:
        check_folder(Path(options.out), ENDING, "sheets")
    if options.watch is not None:
        check_watch(options.sheets, options.out is not None, options.overwrite)
        from lowpoint.faces.fleet_watch import run_watch

        return run_watch(options.watch, looking, lambda one: _task(one, looking, options, asked, many), options, kind)
    tasks = [_task(one, looking, options, asked, many) for one in find(options.sheets, looking)]
    check_targets([(task.source, target) for task in tasks for target in task.targets])
    check_absent(tasks, options.overwrite, options.since_last)
    return run_fleet(tasks, options, kind)


def looking_of(options: argparse.Namespace) -> Looking:
    """What to look for in folders."""
    from lowpoint.audit.reading import FORMATS

    return looking_for(FORMATS, MARK, options.recursive, None if options.out is None else Path(options.out))


def one_target(options: argparse.Namespace, source: Path, overwrite: bool) -> Path | None:
    """Where the workbook of a sheet alone goes; None where none is asked for."""
    if options.out is None:
        return None
    out = Path(options.out)
    target = out / f"{source.stem}{MARK}{ENDING}" if out.is_dir() else out
    return checked_target(target, source, overwrite, [ENDING], what="sheet")


def _layout(path: Path | None) -> str | None:
    """The text of a layout that was found good."""
    if path is None:
        return None
    from lowpoint.audit.layout import read_layout

    read_layout(path)
    return path.read_text(encoding="utf-8")


def _task(found: Found, looking: Looking, options: argparse.Namespace, asked: dict[str, Any], many: bool) -> Task:
    from lowpoint.fleet.finding import marked_in
    from lowpoint.fleet.tasks import Task

    if not many:
        target = one_target(options, found.path, True)
        return Task("audit", found.path, () if target is None else (target,), asked)
    if options.out is None:
        return Task("audit", found.path, (), asked)
    home = Path(options.out)
    return Task("audit", found.path, (marked_in(home, found, looking, ENDING),), asked, home)


def _told(result: Result) -> list[Any]:
    from lowpoint.fleet.auditing import entries_of

    since = str(result.outcome.data["unchanged_since"]) if result.skipped else None
    return list(entries_of(result.outcome, str(result.task.source), since))
