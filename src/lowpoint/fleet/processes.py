"""Worker processes on this machine, each on a pipe of its own.

Why no library: the pools at hand (concurrent.futures, loky, pebble, multiprocessing.Pool) let all workers read one
shared pipe under one shared lock, so that a worker killed at the wrong moment takes the lock or half a message with
it, and either breaks the pool or leaves it waiting. With a pipe a worker nothing is shared: whoever dies, at whatever
moment, only its own book is in doubt, and which one that is, is known.
"""

from __future__ import annotations

import math
import signal
import sys
import time
from collections import deque
from contextlib import suppress
from dataclasses import dataclass
from multiprocessing import connection, get_context
from multiprocessing.connection import Connection
from multiprocessing.process import BaseProcess

from lowpoint.errors import LowpointError
from lowpoint.fleet.pools import ATTEMPTS, Finished
from lowpoint.fleet.tasks import Task, failure
from lowpoint.fleet.working import Answer, Hello, serve

__all__ = ["MOST_BOOKS", "MOST_MEMORY", "Processes"]

MOST_BOOKS = 200
"""A worker is replaced after so many books,"""
MOST_MEMORY = 1 << 30
"""or once it has held so many bytes: what libraries keep cannot pile up over a night."""
PATIENCE = 5.0
FALSE_STARTS = 3


@dataclass(slots=True)
class _Job:
    number: int
    task: Task
    attempts: int = 0


@dataclass(slots=True)
class _Worker:
    process: BaseProcess
    pipe: Connection
    owner: str = ""
    job: _Job | None = None
    began: float = 0.0
    done: int = 0

    @property
    def name(self) -> str:
        return f"process {self.process.pid}"


class Processes:
    """A pool of worker processes.

    A book that takes longer than its limits allow, or than ``limit`` seconds where that is given, is given up.
    """

    def __init__(
        self, count: int, full: bool, limit: float | None = None, most_books: int = MOST_BOOKS,
        most_memory: int = MOST_MEMORY,
    ) -> None:  # fmt: skip
        self.count, self.full, self.limit = count, full, limit
        self.most_books, self.most_memory = most_books, most_memory
        self._context = get_context("spawn")  # forking a process that holds threads and libraries is not safe
        self._queue: deque[_Job] = deque()
        self._workers: list[_Worker] = []
        self._false_starts = 0
        for _ in range(count):
            self._start()

    @property
    def room(self) -> bool:
        return len(self._queue) < self.count

    def submit(self, number: int, task: Task) -> None:
        self._queue.append(_Job(number, task))
        self._hand_out()

    def collect(self, timeout: float) -> list[Finished]:
        self._hand_out()
        finished: list[Finished] = []
        pipes = [worker.pipe for worker in self._workers]
        pause = max(0.0, min([timeout, *map(self._left, self._workers)]))
        ready = connection.wait(pipes, pause) if pipes else []
        for worker in [worker for worker in self._workers if worker.pipe in ready]:
            finished += self._heard(worker)
        for worker in [worker for worker in self._workers if self._left(worker) <= 0.0]:
            finished += self._given_up(worker)
        self._hand_out()
        return finished

    def close(self) -> None:
        self._queue.clear()
        for worker in self._workers:
            worker.process.kill()
        for worker in self._workers:
            self._buried(worker)
        self._workers.clear()

    # Workers

    def _start(self) -> None:
        ours, theirs = self._context.Pipe()
        process = self._context.Process(target=serve, args=(theirs, self.full), daemon=True)
        try:
            process.start()
        except OSError as problem:
            must = "worker processes must start"
            raise LowpointError("--jobs", must, problem.strerror, "Try fewer, or without --jobs.") from None
        theirs.close()  # so that the end of the worker is the end of the pipe
        self._workers.append(_Worker(process, ours))

    def _hand_out(self) -> None:
        """A task to every idle worker; a new worker for every one that is missing while there is work."""
        while self._queue and len(self._workers) < self.count:
            self._start()
        for worker in self._workers:
            if self._queue and worker.owner and worker.job is None:
                self._give(worker, self._queue.popleft())

    def _give(self, worker: _Worker, job: _Job) -> None:
        worker.job, worker.began = job, time.monotonic()
        job.attempts += 1
        try:
            worker.pipe.send(job.task)
        except OSError:  # it died while idle: it never saw the task, which is heard of at the next collect
            job.attempts -= 1

    def _heard(self, worker: _Worker) -> list[Finished]:
        try:
            message = worker.pipe.recv()
        except (EOFError, OSError):
            return self._died(worker)
        if isinstance(message, Hello):
            worker.owner, self._false_starts = message.owner, 0
            return []
        assert isinstance(message, Answer)
        assert worker.job is not None
        job, worker.job = worker.job, None
        worker.done += 1
        if worker.done >= self.most_books or message.memory >= self.most_memory:
            self._retire(worker)
        return [Finished(job.number, message.outcome, job.attempts, worker.name, message.memory)]

    def _retire(self, worker: _Worker) -> None:
        self._workers.remove(worker)
        with suppress(OSError):
            worker.pipe.send(None)
        worker.process.join(PATIENCE)
        worker.process.kill()
        self._buried(worker)

    def _died(self, worker: _Worker) -> list[Finished]:
        """Its book is tried once more, by another worker, before the others; then it is reported."""
        self._workers.remove(worker)
        worker.process.join(PATIENCE)
        how = _how(worker.process.exitcode)
        self._buried(worker)
        job = worker.job
        if job is None:
            self._false_starts += not worker.owner
            if self._false_starts >= FALSE_STARTS:
                must = "worker processes must start, but ended before they had begun"
                raise LowpointError("--jobs", must, how, "Try without --jobs.")
            return []
        if job.attempts < ATTEMPTS:
            self._queue.appendleft(job)
            return []
        said = (
            f"{job.task.source}: the worker process that had it ended without an answer ({how}), "
            f"{ATTEMPTS} times. If memory ran out, use fewer --jobs, or split the book."
        )
        return [Finished(job.number, failure(job.task, said), job.attempts, worker.name)]

    def _left(self, worker: _Worker) -> float:
        """Seconds until the book of a worker is given up; infinite for an idle one."""
        if worker.job is None:
            return math.inf
        limit = self.limit or worker.job.task.limits.whole_seconds
        return worker.began + limit - time.monotonic()

    def _given_up(self, worker: _Worker) -> list[Finished]:
        self._workers.remove(worker)
        worker.process.kill()
        self._buried(worker)
        assert worker.job is not None
        job = worker.job
        limit = self.limit or job.task.limits.whole_seconds
        said = f"{job.task.source}: took longer than {limit:g} s and was given up. Allow more: --limit seconds=..."
        return [Finished(job.number, failure(job.task, said), job.attempts, worker.name)]

    def _buried(self, worker: _Worker) -> None:
        """Take the end of a process that was killed to the end, and clear away what it was writing."""
        worker.process.join(PATIENCE)
        worker.pipe.close()
        if worker.job is not None and worker.owner:
            from lowpoint.book.saving import remove_leftovers

            for target in worker.job.task.targets:
                remove_leftovers(target, worker.owner)


def _how(code: int | None) -> str:
    """How a process ended, in words."""
    if code is None:
        return "it does not answer"
    if code >= 0 or sys.platform == "win32":
        return f"exit code {code}"
    try:
        name = signal.Signals(-code).name
    except ValueError:
        name = "unknown"
    return f"signal {-code}, {name}"
