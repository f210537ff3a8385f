"""The trail: a line of JSON for each book, written when it is finished, so that a stopped run leaves what it did."""

from __future__ import annotations

import json
import os
from contextlib import suppress
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from lowpoint.errors import BookError
from lowpoint.fleet.state import tools
from lowpoint.fleet.tasks import Outcome, Task

__all__ = ["Trail", "line_of"]


MOST = 1000
"""Errors and turned verdicts of one book that a line names; all are counted."""


def line_of(task: Task, outcome: Outcome, skipped: bool) -> dict[str, Any]:
    """What the trail says of one book."""
    return {
        "time": datetime.now(UTC).isoformat(timespec="milliseconds"),
        "command": task.kind,
        "book": str(task.source),
        "result": "unchanged" if skipped else "failed" if outcome.failed else "findings" if outcome.code else "done",
        "exit_code": outcome.code,
        "fingerprint": outcome.fingerprint,
        "written": outcome.written,
        "options": dict(task.options),
        "versions": tools(),
        "counts": outcome.counts,
        "turned": outcome.turned[:MOST],
        "turned_in_all": len(outcome.turned),
        "errors": outcome.errors[:MOST],
        "errors_in_all": len(outcome.errors),
        "seconds": round(outcome.seconds, 4),
    }


class Trail:
    """A file that lines are added to; BookError where it cannot be opened or written."""

    def __init__(self, path: Path) -> None:
        self.path = path
        flags = os.O_RDWR | os.O_APPEND | os.O_CREAT | getattr(os, "O_BINARY", 0)
        try:
            self._file = os.open(path, flags, 0o666)
            torn = self._torn()
        except OSError as problem:
            raise self._refused(problem) from None
        if torn:
            self._write(b"\n")

    def add(self, line: dict[str, Any]) -> None:
        """Add a line, in one piece: two runs may share a trail."""
        self._write(json.dumps(line, ensure_ascii=False, default=str).encode() + b"\n")

    def close(self) -> None:
        """Ask the system to put the lines on the disk."""
        with suppress(OSError):  # a pipe or a device has no disk
            os.fsync(self._file)
        os.close(self._file)

    def _torn(self) -> bool:
        """Was the last line cut short by the end of an earlier run?"""
        size = os.fstat(self._file).st_size
        if not size:
            return False
        os.lseek(self._file, size - 1, os.SEEK_SET)
        return os.read(self._file, 1) != b"\n"

    def _write(self, data: bytes) -> None:
        try:
            while data:
                data = data[os.write(self._file, data) :]
        except OSError as problem:
            raise self._refused(problem) from None

    def _refused(self, problem: OSError) -> BookError:
        return BookError(str(self.path), f"the trail cannot be written ({problem.strerror})",
                         remedy="Free some space, or name another file with --trail.")  # fmt: skip
