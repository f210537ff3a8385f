"""What is known of earlier runs: one state file a folder of outputs, so that unchanged books need not be done again.

The file is JSON, written in one step under a lock, and only ever added to: two runs at once keep each other's
entries. It is a convenience and no record: without it, or when it cannot be read, books are merely done again.
"""

from __future__ import annotations

import json
import time
from dataclasses import asdict
from datetime import UTC, datetime
from functools import lru_cache
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

from lowpoint import __version__
from lowpoint.book.saving import replace_file
from lowpoint.errors import LowpointError
from lowpoint.fleet.tasks import Outcome, Task, fingerprint

__all__ = ["NAME", "State", "States", "tools"]

NAME = ".lowpoint-state.json"
FORMAT = 1
EVERY = 1.0
"""Seconds between two writings, at least."""
WAIT = 30.0
"""Seconds to wait for the lock of another run."""


@lru_cache(maxsize=1)
def tools() -> dict[str, str]:
    """The version of everything that the numbers hang on."""
    found = {"lowpoint": __version__}
    for name in ("formualizer", "CoolProp", "fluids", "numpy"):
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            found[name] = "none"
    return found


class State:
    """The state file of one folder."""

    def __init__(self, folder: Path) -> None:
        self.path = folder / NAME
        self.trouble: str | None = None
        self._books = self._read()
        self._new: dict[str, dict[str, Any]] = {}
        self._saved = time.monotonic()

    def known(self, task: Task) -> dict[str, Any] | None:
        """The entry of a task that need not be done again: content, options, tools and outputs are what they were."""
        entry = self._books.get(self._key(task))
        if entry is None or entry.get("asked") != _asked(task) or entry.get("tools") != tools():
            return None
        written = entry.get("written")
        if not isinstance(written, dict) or set(written) != {self._name(target) for target in task.targets}:
            return None
        if any(fingerprint(target) != written[self._name(target)] for target in task.targets):
            return None
        # A book that is worked on in place holds its own output by now.
        if task.source not in task.targets and fingerprint(task.source) != entry.get("fingerprint"):
            return None
        return entry

    def note(self, task: Task, outcome: Outcome) -> None:
        """Remember a finished task; a failed one is to be tried again."""
        key = self._key(task)
        if outcome.failed:
            self._new[key] = {}
        else:
            self._new[key] = {
                "source": str(task.source), "fingerprint": outcome.fingerprint, "asked": _asked(task),
                "tools": tools(), "written": {self._name(Path(p)): mark for p, mark in outcome.written.items()},
                "code": outcome.code, "time": datetime.now(UTC).isoformat(timespec="seconds"),
            }  # fmt: skip
        if time.monotonic() - self._saved > EVERY:
            self.save()

    def save(self) -> None:
        """Add what is new to the file, under the lock; a file that cannot be written is told, nothing more."""
        if not self._new or not self.path.parent.is_dir():
            return
        from filelock import FileLock, Timeout

        try:
            with FileLock(f"{self.path}.lock", timeout=WAIT):
                self._books = self._read() | self._new
                books = {key: entry for key, entry in self._books.items() if entry}
                data = json.dumps({"format": FORMAT, "books": books}, indent=1, ensure_ascii=False).encode()
                replace_file(self.path, lambda sink: sink.write(data))
            self._new = {}
        except (OSError, Timeout, LowpointError) as problem:
            self.trouble = f"{self.path}: cannot be written ({problem}); these books will be done again the next time."
        self._saved = time.monotonic()

    def _read(self) -> dict[str, dict[str, Any]]:
        try:
            data = json.loads(self.path.read_text(encoding="utf-8"))
            books = data["books"]
            if data["format"] != FORMAT or not all(isinstance(entry, dict) for entry in books.values()):
                raise ValueError("of another form")
        except FileNotFoundError:
            return {}
        except (OSError, ValueError, KeyError, TypeError, AttributeError, RecursionError):
            self.trouble = f"{self.path}: cannot be understood and is made anew; every book is done again."
            return {}
        return dict(books)

    def _key(self, task: Task) -> str:
        names = [self._name(target) for target in task.targets] or [str(task.source.absolute())]
        return " ".join([task.kind, *names])

    def _name(self, target: Path) -> str:
        """A target as seen from the folder: the folder may move."""
        try:
            return target.relative_to(self.path.parent).as_posix()
        except ValueError:
            return str(target.absolute())


class States:
    """The state files of all folders that a run writes to."""

    def __init__(self) -> None:
        self._states: dict[Path, State] = {}

    def of(self, task: Task) -> State:
        """The state file that remembers a task."""
        if task.place not in self._states:
            self._states[task.place] = State(task.place)
        return self._states[task.place]

    def save(self) -> None:
        """Write every state file."""
        for state in self._states.values():
            state.save()

    def troubles(self) -> list[str]:
        """What went wrong with state files, each told once."""
        told = [state.trouble for state in self._states.values() if state.trouble]
        for state in self._states.values():
            state.trouble = None
        return told


def _asked(task: Task) -> Any:
    """What was asked for, as JSON gives it back: the options, and the limits, which decide what is kept as it is."""
    return json.loads(json.dumps({"options": dict(task.options), "limits": asdict(task.limits)}, sort_keys=True))
