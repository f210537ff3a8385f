"""Running a fleet: tasks to a pool, results back in the order of the tasks, every finished one put on record."""

from __future__ import annotations

from collections.abc import Callable, Generator, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import TracebackType
from typing import Any

from lowpoint.errors import BookError
from lowpoint.fleet.pools import Pool
from lowpoint.fleet.state import States
from lowpoint.fleet.stopping import Stopper
from lowpoint.fleet.tasks import Outcome, Task
from lowpoint.fleet.trail import Trail, line_of

__all__ = ["Records", "Result", "results", "unchanged"]

BEAT = 0.5
"""Seconds between two looks at the pool."""


@dataclass(frozen=True, slots=True)
class Result:
    """A task with what came of it; ``skipped`` where nothing had changed since the last run."""

    task: Task
    outcome: Outcome
    attempts: int
    worker: str
    memory: int = 0
    skipped: bool = False


class Records:
    """The trail and the state files of a run, whichever are wanted; ``warn`` is told what is wrong with them."""

    def __init__(self, trail: Path | None, since_last: bool, warn: Callable[[str], None]) -> None:
        self.trail = None if trail is None else Trail(trail)
        self.states = States() if since_last else None
        self.warn = warn
        self.broken = False
        """Could the trail not be written to its end?"""

    def __enter__(self) -> Records:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        if self.states is not None:
            self.states.save()
            self._tell()
        if self.trail is not None:
            self.trail.close()

    def known(self, task: Task) -> dict[str, Any] | None:
        """What the last run left of a task that need not be done again."""
        if self.states is None:
            return None
        entry = self.states.of(task).known(task)
        self._tell()
        return entry

    def add(self, result: Result) -> None:
        """Put a finished task on record."""
        if self.trail is not None and not self.broken:
            more = {"attempts": result.attempts, "worker": result.worker, "worker_memory": result.memory}
            try:
                self.trail.add(line_of(result.task, result.outcome, result.skipped) | more)
            except BookError as error:  # the disk is full, perhaps: the books are done all the same
                self.broken = True
                self.warn(f"{error} The books are done all the same, without a trail from here on.")
        if self.states is not None and not result.skipped:
            self.states.of(result.task).note(result.task, result.outcome)

    def _tell(self) -> None:
        for trouble in [] if self.states is None else self.states.troubles():
            self.warn(trouble)


def results(
    tasks: Sequence[Task], pool: Pool, records: Records, stopper: Stopper, progress: Callable[[int], None]
) -> Generator[Result, None, None]:
    """The results in the order of the tasks, each as soon as those before it are there.

    ``progress`` is told how many are finished. An interrupt closes the pool; what was finished by then is still
    given, then KeyboardInterrupt is raised. The consumer should hold the stopper while it deals with a result.
    """
    ready: dict[int, Result] = {}
    run = _Run(tasks, pool, records, stopper, ready)
    told = 0
    try:
        while told < len(tasks):
            stopper.heed()
            run.hand_out(told)
            # Whoever has something to tell does not wait for more.
            run.collect(0.0 if told in ready else BEAT)
            progress(run.finished)
            while told in ready:
                yield ready.pop(told)
                told += 1
                stopper.heed()
    except KeyboardInterrupt:
        with stopper.held():
            pool.close()
            yield from (ready.pop(number) for number in sorted(ready))
        raise
    finally:
        pool.close()


class _Run:
    """The state of a run: what is handed out, and what is finished (put into ``ready`` and on record in one go)."""

    def __init__(
        self, tasks: Sequence[Task], pool: Pool, records: Records, stopper: Stopper, ready: dict[int, Result]
    ) -> None:
        self.tasks, self.pool, self.records, self.stopper, self.ready = tasks, pool, records, stopper, ready
        self.handed = self.finished = 0

    def hand_out(self, told: int) -> None:
        """Tasks to the pool while it has room; those that need not be done again are finished at once."""
        while self.handed < len(self.tasks) and self.pool.room and told not in self.ready:
            task = self.tasks[self.handed]
            entry = self.records.known(task)
            if entry is None:
                self.pool.submit(self.handed, task)
            else:
                self._finish(self.handed, unchanged(task, entry))
            self.handed += 1

    def collect(self, timeout: float) -> None:
        """Take what the pool has finished."""
        for done in self.pool.collect(timeout):
            task = self.tasks[done.number]
            self._finish(done.number, Result(task, done.outcome, done.attempts, done.worker, done.memory))

    def _finish(self, number: int, result: Result) -> None:
        with self.stopper.held():
            self.ready[number] = result
            self.finished += 1
            self.records.add(result)


def unchanged(task: Task, entry: dict[str, Any]) -> Result:
    """The result of a task that was skipped: it carries the exit code of the time when it was done."""
    code = int(entry.get("code", 0))
    since = str(entry.get("time", "an earlier run"))
    target = str(task.targets[0]) if task.targets else None
    data = {"book": str(task.source), "output": target, "unchanged_since": since, "exit_code": code}
    found = ", with findings then" if code else ""
    text = f"{task.source}: unchanged since {since}{found}; not done again."
    written = {str(task.place / name): mark for name, mark in entry["written"].items()}
    outcome = Outcome(code, text, data, fingerprint=entry.get("fingerprint"), written=written)
    return Result(task, outcome, 0, "", skipped=True)
