"""Temporary files that a killed process left behind: told from those that another one is writing now, and removed."""

from __future__ import annotations

import os
import re
import stat
import time
from contextlib import suppress
from pathlib import Path

__all__ = ["ABANDONED_AFTER", "OURS", "claim", "remove_abandoned"]

OURS = re.compile(r"\.lowpoint-[0-9a-f]{12}-[0-9a-f]{16}\.tmp")
"""Names that no one else gives: who wrote it, and which of its files it is."""
ABANDONED_AFTER = 5.0
"""Seconds without a change: a file that was made a moment ago may not have been claimed yet."""
_CLEARED: set[str] = set()


def claim(handle: int) -> None:
    """Mark an open temporary file as being written: the claim ends with the process, however it ends.

    Where the system has no such lock (Windows, some network drives) an open file cannot be removed, or is left alone.
    """
    with suppress(ImportError, OSError):
        import fcntl

        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)


def remove_abandoned(folder: Path) -> None:
    """Remove the temporary files of dead processes from a folder, until a look there has left none undecided."""
    if str(folder) in _CLEARED:
        return
    undecided = False
    with suppress(OSError), os.scandir(folder) as entries:
        for entry in entries:
            if OURS.fullmatch(entry.name):
                with suppress(OSError):  # its writer lives
                    undecided |= not _remove_if_dead(Path(entry.path))
    if not undecided:
        _CLEARED.add(str(folder))


def _remove_if_dead(left: Path) -> bool:
    """Remove a dead process's file; False for one that is too young to tell. OSError where its writer lives."""
    flags = os.O_RDWR | getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_NONBLOCK", 0)
    handle = os.open(left, flags)
    try:
        state = os.fstat(handle)
        if not stat.S_ISREG(state.st_mode):
            return True
        if time.time() - state.st_mtime < ABANDONED_AFTER:
            return False  # not even tried: its writer may be about to claim it
        if os.name != "nt":
            import fcntl

            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
            left.unlink()
            return True
    finally:
        os.close(handle)
    left.unlink()
    return True
