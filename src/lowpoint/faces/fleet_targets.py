"""Where the outputs of several lists or data sheets go: a folder, each under the name of its source with a mark."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from lowpoint.errors import LowpointError
from lowpoint.faces.fleet_options import wants_fleet

if TYPE_CHECKING:
    from lowpoint.fleet.finding import Looking
    from lowpoint.fleet.tasks import Task

__all__ = ["check_absent", "check_folder", "check_watch", "looking_for", "means_many"]


def means_many(options: argparse.Namespace, given: Sequence[Path], noun: str) -> bool:
    """Do the words mean several, or ask for what fleets have? LowpointError where they mean nothing."""
    from lowpoint.fleet.finding import several

    if options.watch is not None:
        return True
    if not given:
        must = f"must be given a {noun}"
        raise LowpointError(options.command, must, "none", f"Name a {noun}, a folder, or --watch DIR.")
    return wants_fleet(options) or several(given)


def looking_for(suffixes: Sequence[str], mark: str, recursive: bool, outputs: Path | None) -> Looking:
    """What to look for in folders; ``outputs`` is the folder of outputs, which is no place to look."""
    from lowpoint.fleet.finding import Looking

    return Looking(suffixes, mark, recursive, outputs)


def check_folder(out: Path, ending: str, nouns: str, option: str = "-o") -> None:
    """LowpointError where ``out``, given with ``option``, is no folder for the outputs of several."""
    if not out.is_dir() and (out.exists() or out.suffix.lower() == ending):
        raise LowpointError(str(out), f"must be a folder, for several {nouns}", "a file",
                            f"Name a folder with {option}.")  # fmt: skip


def check_absent(tasks: Sequence[Task], overwrite: bool, since_last: bool) -> None:
    """LowpointError where an output is there already, unless it may be replaced or need not be written again."""
    if overwrite:
        return
    from lowpoint.fleet.state import States

    states = States()
    for task in tasks:
        there = next((target for target in task.targets if target.exists()), None)
        if there is not None and not (since_last and states.of(task).known(task)):
            must = "is there already and was left as it is"
            raise LowpointError(str(there), must, remedy="Name another folder, or ask for --overwrite.")


def check_watch(given: Sequence[Path], outputs: bool, overwrite: bool) -> None:
    """LowpointError where the words do not go together with ``--watch``."""
    if given:
        raise LowpointError("--watch", "must stand without other files", str(given[0]), "Name one or other.")
    if outputs and not overwrite:
        must = "must stand with --overwrite: what lands once more is written once more"
        raise LowpointError("--watch", must, remedy="Ask for --overwrite.")
