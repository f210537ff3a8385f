"""Books that land in a folder: which of them are whole by now, and not yet done as they are."""

from __future__ import annotations

import os
import time
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from lowpoint.errors import LowpointError
from lowpoint.fleet.finding import Found, Looking, find

__all__ = ["Landings"]

SETTLE = 1.0
"""Seconds for which a file must not have changed,"""
PATIENCE = 10.0
"""and for one that is no whole workbook, before it is taken for what it is: damaged."""
RESCAN = 60.0
"""Seconds between two looks at the whole folder: some file systems lose events."""

_Mark = tuple[int, int, int]


@dataclass(slots=True)
class _Landing:
    mark: _Mark
    since: float


class Landings:
    """The books of a folder as they come. Half-written ones, and those that a lock file says are open, are left
    alone until they have settled; a book that was done is done again only when it changes."""

    def __init__(self, folder: Path, looking: Looking, settle: float = SETTLE, patience: float = PATIENCE) -> None:
        self.folder, self.looking, self.settle, self.patience = folder, looking, settle, patience
        self._coming: dict[Path, _Landing] = {}
        self._done: dict[Path, _Mark] = {}
        self._below: dict[Path, Path] = {}
        self._scanned = float("-inf")

    def hear(self, paths: Sequence[Path]) -> None:
        """Something happened to these paths; after a while the whole folder is looked at too."""
        if paths or time.monotonic() - self._scanned > RESCAN:
            self._scan()

    def ready(self) -> list[Found]:
        """The books to be done now."""
        found = []
        for path, landing in list(self._coming.items()):
            mark = _mark(path)
            if mark is None:  # taken away again
                del self._coming[path]
            elif mark != landing.mark:
                self._coming[path] = _Landing(mark, time.monotonic())
            elif self._whole(path, time.monotonic() - landing.since):
                del self._coming[path]
                self._done[path] = mark
                found.append(Found(path, self._below[path]))
        return found

    def ours(self, path: Path) -> None:
        """A file was written by us: that is no new landing."""
        mark = _mark(path)
        if mark is not None:
            self._done[path] = mark

    def _scan(self) -> None:
        self._scanned = time.monotonic()
        for one in _books(self.folder, self.looking):
            self._below[one.path] = one.below
            mark = _mark(one.path)
            if mark is not None and mark != self._done.get(one.path) and one.path not in self._coming:
                self._coming[one.path] = _Landing(mark, time.monotonic())

    def _whole(self, path: Path, quiet: float) -> bool:
        from lowpoint.book.guard import check
        from lowpoint.book.package import locked

        if quiet < self.settle or locked(path) is not None:
            return False
        if quiet >= self.patience:
            return True
        try:
            check(path)
        except LowpointError:  # still being written, perhaps
            return False
        return True


def _books(folder: Path, looking: Looking) -> list[Found]:
    try:
        return find([folder], looking)
    except LowpointError:
        if not folder.is_dir():
            must = "the watched folder is not there any more"
            raise LowpointError(str(folder), must, remedy="Make it again, then start anew.") from None
        return []  # empty as yet


def _mark(path: Path) -> _Mark | None:
    """What tells one state of a file from another; None where there is none."""
    try:
        state = os.stat(path)
    except OSError:
        return None
    return (state.st_ino, state.st_size, state.st_mtime_ns)
