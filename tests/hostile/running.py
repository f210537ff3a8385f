"""The command as a process of its own, for tests of what a user meets: kills, full disks, permissions."""

from __future__ import annotations

import ctypes
import os
import signal
import subprocess
import sys
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path

__all__ = ["command", "common", "run", "started", "unstuck"]


def command(*words: object) -> list[str]:
    """The words of a call of ``lowpoint``."""
    return [sys.executable, "-m", "lowpoint", *map(str, words)]


def _environment() -> dict[str, str]:
    return os.environ | {"PYTHONDONTWRITEBYTECODE": "1"}


def run(
    *words: object, folder: Path, before: Callable[[], None] | None = None, limit: float = 60.0
) -> subprocess.CompletedProcess[str]:
    """Run the command to its end, in a folder; ``before`` is called in the new process."""
    return subprocess.run(
        command(*words), cwd=folder, capture_output=True, text=True, errors="replace", timeout=limit,
        preexec_fn=before, env=_environment(), check=False,
    )  # fmt: skip


def common() -> None:
    """For ``before``: let permissions bite the superuser too, who otherwise may read and write everything.

    The new process loses the capabilities to override them (prctl PR_CAPBSET_DROP of Linux; source: capabilities(7),
    from memory); its files are its own all the same, so that the interpreter can be read.
    """
    if os.geteuid() == 0 and sys.platform == "linux":
        drop, override, read_search = 24, 1, 2
        library = ctypes.CDLL(None)
        if library.prctl(drop, override, 0, 0, 0) or library.prctl(drop, read_search, 0, 0, 0):
            raise OSError("the capabilities could not be dropped")


def started(words: Sequence[object], folder: Path) -> subprocess.Popen[bytes]:
    """Start the command and do not wait."""
    quiet = subprocess.DEVNULL
    return subprocess.Popen(command(*words), cwd=folder, stdout=quiet, stderr=quiet, env=_environment())


class StuckError(Exception):
    """The code under test waited for something that never comes, or goes round in circles."""


@contextmanager
def unstuck(seconds: int) -> Iterator[None]:
    """StuckError where the block hangs: ``seconds`` are many times what it may need on any machine."""

    def ring(*_: object) -> None:
        raise StuckError

    before = signal.signal(signal.SIGALRM, ring)
    signal.alarm(seconds)
    try:
        yield
    finally:
        signal.alarm(0)
        signal.signal(signal.SIGALRM, before)
