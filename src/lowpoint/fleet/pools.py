"""Who works on the books: this process, other processes here (:mod:`processes`), or a cluster (:mod:`cluster`).

Every pool takes numbered tasks and gives them back finished, in whatever order they finish.
"""

from __future__ import annotations

import os
from collections import deque
from dataclasses import dataclass
from typing import Protocol

from lowpoint.fleet.tasks import Outcome, Task, attempt

__all__ = ["ATTEMPTS", "Finished", "Here", "Pool"]

ATTEMPTS = 2
"""How often a book is tried when its worker dies."""


@dataclass(frozen=True, slots=True)
class Finished:
    """A task that is done: its number, its outcome, how often it was tried, who did it last, and the most memory that
    this worker has held so far (bytes, 0 where unknown)."""

    number: int
    outcome: Outcome
    attempts: int
    worker: str
    memory: int = 0


class Pool(Protocol):
    """What :func:`lowpoint.fleet.running.results` asks of those who do the work."""

    @property
    def room(self) -> bool:
        """Should one more task be handed in?"""

    def submit(self, number: int, task: Task) -> None:
        """Hand in a task."""

    def collect(self, timeout: float) -> list[Finished]:
        """What is finished; waits up to ``timeout`` seconds for something."""

    def close(self) -> None:
        """Stop at once: unfinished books stay as they were, nothing half-written is left."""


class Here:
    """This process itself, one book after the other."""

    def __init__(self, full: bool) -> None:
        self.full = full
        self._queue: deque[tuple[int, Task]] = deque()

    @property
    def room(self) -> bool:
        return not self._queue

    def submit(self, number: int, task: Task) -> None:
        self._queue.append((number, task))

    def collect(self, timeout: float) -> list[Finished]:
        if not self._queue:
            return []
        number, task = self._queue.popleft()
        from lowpoint.fleet.working import peak_memory

        outcome = attempt(task, self.full)
        return [Finished(number, outcome, 1, f"process {os.getpid()}", peak_memory())]

    def close(self) -> None:
        self._queue.clear()
