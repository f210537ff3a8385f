"""One book's work as a plain record that any process can take, and its outcome as another."""

from __future__ import annotations

import hashlib
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from pkgutil import resolve_name
from typing import Any

from lowpoint.book.guard_limits import Limits, in_force, limiting
from lowpoint.errors import LowpointError

__all__ = ["KINDS", "Outcome", "Task", "attempt", "failure", "fingerprint"]

KINDS = {
    "recalc": "lowpoint.fleet.recalculating:recalc",
    "survey": "lowpoint.fleet.surveying:survey",
    "audit": "lowpoint.fleet.auditing:audit",
}
"""Kind of work -> the function that does it, as ``module:name``. It takes the task and whether the full record for
``--json`` is wanted, and gives an :class:`Outcome`; it may raise LowpointError. A kind may also be written as
``module:name`` itself: workers elsewhere need nothing but the module."""

_PIECE = 1 << 20


@dataclass(frozen=True, slots=True)
class Task:
    """One book to work on. Options are plain values; what they name is content, never a path: workers may be far."""

    kind: str
    source: Path
    targets: tuple[Path, ...] = ()
    """The files to write; the source itself where it is worked on in place."""
    options: Mapping[str, Any] = field(default_factory=dict)
    home: Path | None = None
    """The folder whose state file remembers this task; None for the folder of the first target, or of the source."""
    limits: Limits = field(default_factory=in_force)
    """How much the book may hold and take: those in force where the task is made, wherever it is done."""

    @property
    def place(self) -> Path:
        """The folder whose state file remembers this task."""
        return self.home or (self.targets[0] if self.targets else self.source).parent


@dataclass(slots=True)
class Outcome:
    """What came of a task, in plain values."""

    code: int = 0
    """Exit code: 0 done, 1 findings, 2 could not be done, 70 our bug."""
    text: str = ""
    """For a terminal."""
    data: dict[str, Any] = field(default_factory=dict)
    """For ``--json``; only told in full where it was asked for."""
    counts: dict[str, int] = field(default_factory=dict)
    turned: list[dict[str, Any]] = field(default_factory=list)
    """Verdicts that changed: place, old, new."""
    errors: list[str] = field(default_factory=list)
    failed: bool = False
    """Nothing was written, for the reason in ``errors``."""
    fingerprint: str | None = None
    """SHA-256 of the source as it was read."""
    written: dict[str, str] = field(default_factory=dict)
    """File -> SHA-256 of what stands in it now."""
    seconds: float = 0.0


def attempt(task: Task, full: bool) -> Outcome:
    """Do a task; whatever goes wrong is in the outcome, so that one book never stops the others."""
    began = time.perf_counter()
    mark = fingerprint(task.source)
    try:
        work: Callable[[Task, bool], Outcome] = resolve_name(KINDS.get(task.kind, task.kind))
        with limiting(task.limits):
            outcome = work(task, full)
        outcome.written = {str(path): now for path in task.targets if (now := fingerprint(path)) is not None}
    except LowpointError as error:
        outcome = failure(task, str(error), error.exit_code)
    except MemoryError:
        outcome = failure(task, f"{task.source}: needs more memory than there is. Use fewer --jobs, or split the book.")
    except Exception as bug:
        said = f"{task.source}: this is our bug ({type(bug).__name__}: {bug})."
        outcome = failure(task, f"{said} Please report it.", 70)
    outcome.fingerprint = mark
    outcome.seconds = time.perf_counter() - began
    return outcome


def failure(task: Task, sentence: str, code: int = 2) -> Outcome:
    """The outcome of a task that could not be done."""
    data = {"book": str(task.source), "output": None, "error": sentence, "exit_code": code}
    return Outcome(code, f"{sentence}\n  nothing was written", data, errors=[sentence], failed=True)


def fingerprint(path: Path) -> str | None:
    """SHA-256 of a file's content; None where it cannot be read."""
    digest = hashlib.sha256()
    try:
        with open(path, "rb") as source:
            while piece := source.read(_PIECE):
                digest.update(piece)
    except (OSError, ValueError):  # ValueError: a name that the system cannot hold
        return None
    return digest.hexdigest()
