"""Books that are worked on far away: read here before, written here after, with the care that a file here needs."""

from __future__ import annotations

import hashlib
import os
from dataclasses import dataclass
from pathlib import Path

from lowpoint.errors import BookError, LowpointError
from lowpoint.fleet.recalculating import make_folder
from lowpoint.fleet.remote import Sent
from lowpoint.fleet.tasks import Outcome, Task, failure

__all__ = ["Sent", "Source", "deliver", "load_source"]


@dataclass(frozen=True, slots=True)
class Source:
    """A book's bytes, and their SHA-256."""

    data: bytes
    mark: str


def load_source(task: Task) -> Source:
    """Read a task's book; BookError where that cannot be, or where an output is open or in the way."""
    from lowpoint.book.guard import load

    for target in task.targets:
        _check(task, target)
    data = load(task.source)
    return Source(data, hashlib.sha256(data).hexdigest())


def _check(task: Task, target: Path) -> None:
    from lowpoint.book.package import locked

    if target != task.source and os.path.realpath(target) == os.path.realpath(task.source):
        must = "the output must be another file than the input"
        raise BookError(str(target), must, remedy="Name another output, or ask for --in-place.")
    owner = locked(target)
    if owner is not None:
        must = f"is open: {owner} has it"
        raise BookError(str(target), must, remedy="Close it there, or name another output with -o.")


def deliver(task: Task, source: Source, sent: Sent) -> Outcome:
    """Write what came back; the outcome, of failure where that cannot be."""
    try:
        for place, data in sent.files.items():
            _write(task, task.targets[place], data, source)
    except LowpointError as error:
        return failure(task, str(error), error.exit_code)
    return sent.outcome


def _write(task: Task, target: Path, data: bytes, source: Source) -> None:
    from lowpoint.book.saving import replace_file
    from lowpoint.fleet.tasks import fingerprint

    _check(task, target)
    if target == task.source:
        if data == source.data:
            return
        if fingerprint(target) != source.mark:
            must = "was changed by someone else in the meantime and was left as it is"
            raise BookError(str(target), must, remedy="Run the command again.")
    make_folder(target.parent)
    replace_file(target, lambda sink: sink.write(data))
