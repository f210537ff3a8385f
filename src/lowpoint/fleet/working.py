"""What a worker process does: takes one task after the other from its own pipe until there is no more."""

from __future__ import annotations

import signal
import sys
from multiprocessing.connection import Connection
from pathlib import Path
from typing import NamedTuple

from lowpoint.fleet.tasks import Outcome, attempt

__all__ = ["Answer", "Hello", "peak_memory", "serve"]


class Hello(NamedTuple):
    """A worker is ready; ``owner`` stands in the names of its temporary files."""

    owner: str


class Answer(NamedTuple):
    """A finished task, and the most memory that the worker has held so far, bytes (0 where unknown)."""

    outcome: Outcome
    memory: int


def serve(pipe: Connection, full: bool) -> None:
    """Work until the other end says None or is gone.

    An interrupt from the keyboard reaches every process of a terminal: what becomes of it is for the one in front to
    say. A termination ends this process at once, as a kill does: the one in front clears away what it was writing.
    """
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    from lowpoint.book.guard_memory import bound_memory
    from lowpoint.book.saving import OWNER

    try:
        pipe.send(Hello(OWNER))
        while (task := pipe.recv()) is not None:
            bound_memory(task.limits.memory)
            pipe.send(Answer(attempt(task, full), peak_memory()))
    except (EOFError, OSError):  # the one in front is gone: nobody is left to tell
        return


def peak_memory() -> int:
    """The most memory that this process has held, bytes; 0 where the system does not tell."""
    try:
        # Not getrusage here: it counts what the parent held when this process was started.
        lines = Path("/proc/self/status").read_text(encoding="ascii").splitlines()
        return next(int(line.split()[1]) * 1024 for line in lines if line.startswith("VmHWM"))
    except (OSError, StopIteration):
        pass
    if sys.platform == "win32":
        return 0
    import resource

    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * (1 if sys.platform == "darwin" else 1024)
