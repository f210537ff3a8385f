"""``lowpoint survey`` over many lists, or one with the machinery of many."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint.faces.fleet_options import Kind, run_fleet
from lowpoint.faces.fleet_targets import check_absent, check_folder, check_watch, looking_for
from lowpoint.faces.targets import checked_target

if TYPE_CHECKING:
    from lowpoint.fleet.finding import Found, Looking
    from lowpoint.fleet.tasks import Task

__all__ = ["LISTS", "MARK", "run"]

LISTS = Kind("list")
MARK = "-survey"
WORKBOOK, PAGE = ".xlsx", ".html"


def run(options: argparse.Namespace) -> int:
    """Survey all that is meant; the options of the command are checked already."""
    from lowpoint.fleet.finding import find, several

    outputs = _outputs(options)
    if options.watch is not None:
        check_watch(options.lists, bool(outputs), options.overwrite)
        from lowpoint.faces.fleet_watch import run_watch

        looking = _looking(options)
        _check_folders(outputs)
        return run_watch(options.watch, looking, lambda one: _task(one, looking, outputs, options), options, LISTS)
    many = several(options.lists)
    looking = _looking(options)
    found = find(options.lists, looking)
    if many:
        _check_folders(outputs)
        tasks = [_task(one, looking, outputs, options) for one in found]
        _check_apart(tasks, outputs)
    else:
        tasks = [_alone(found[0].path, outputs, options)]
    check_absent(tasks, options.overwrite, options.since_last)
    return run_fleet(tasks, options, LISTS)


def _outputs(options: argparse.Namespace) -> dict[str, Path]:
    """Ending -> the file, or for several lists the folder, that is asked for."""
    asked = {WORKBOOK: options.out, PAGE: options.html}
    return {ending: path for ending, path in asked.items() if path is not None}


def _looking(options: argparse.Namespace) -> Looking:
    from lowpoint.survey.reading import FORMATS

    return looking_for(FORMATS, MARK, options.recursive, options.out or options.html)


def _check_folders(outputs: dict[str, Path]) -> None:
    for ending, path in outputs.items():
        check_folder(path, ending, "lists", "-o" if ending == WORKBOOK else "--html")


def _check_apart(tasks: Sequence[Task], outputs: dict[str, Path]) -> None:
    from lowpoint.fleet.finding import check_targets

    for place in range(len(outputs)):
        check_targets([(task.source, task.targets[place]) for task in tasks])


def _task(found: Found, looking: Looking, outputs: dict[str, Path], options: argparse.Namespace) -> Task:
    from lowpoint.fleet.finding import marked_in
    from lowpoint.fleet.tasks import Task

    targets = tuple(marked_in(folder, found, looking, ending) for ending, folder in outputs.items())
    home = next(iter(outputs.values()), None)
    return Task("survey", found.path, targets, _wishes(options), home)


def _alone(source: Path, outputs: dict[str, Path], options: argparse.Namespace) -> Task:
    from lowpoint.fleet.tasks import Task

    targets = tuple(
        checked_target(path, source, True, [ending], "-o" if ending == WORKBOOK else "--html")
        for ending, path in outputs.items()
    )
    return Task("survey", source, targets, _wishes(options))


def _wishes(options: argparse.Namespace) -> dict[str, Any]:
    """What :func:`lowpoint.fleet.surveying.survey` takes: plain values, no path."""
    return {
        "elevation": options.elevation, "tolerances": list(options.tolerance), "draws": options.draws,
        "seed": options.seed, "remedies": not options.no_remedies, "system": "us" if options.us else "metric",
        "pages": options.pages,
    }  # fmt: skip
