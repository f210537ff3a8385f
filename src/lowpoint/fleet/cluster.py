"""An existing Dask cluster: the books' bytes go to its workers, the results' bytes come back and are written here.

No folder need be shared, and a worker that dies can leave no half-written file. Every task is bound to the one worker
that it is given to: so its death is this module's to deal with, and a book that brings workers down takes two of them
and no more, whatever the cluster's own number of retries. A worker gets one book at a time, however many threads it
has.
"""

from __future__ import annotations

import os
import queue
import secrets
import time
import warnings
from collections import deque
from dataclasses import dataclass, field
from typing import Any

from lowpoint import __version__
from lowpoint.errors import LowpointError
from lowpoint.fleet.delivering import Sent, Source, deliver, load_source
from lowpoint.fleet.pools import ATTEMPTS, Finished
from lowpoint.fleet.remote import Errand, run_errand
from lowpoint.fleet.tasks import Task, failure

__all__ = ["Cluster"]

CONNECT = 10.0
"""Seconds for the scheduler to answer,"""
NO_WORKERS = 60.0
"""for a first worker to be there, or a new one when all have died,"""
FETCH = 60.0
"""and for a result to come home."""
LOOK = 0.5
"""Seconds between two looks at who is there."""
LARGE = "1 GB"


@dataclass(slots=True)
class _Job:
    number: int
    task: Task
    attempts: int = 0
    worker: str = ""
    began: float = 0.0
    future: Any = None
    source: Source | None = field(default=None, repr=False)


class Cluster:
    """A pool of a cluster's workers, by the address of its scheduler.

    A book that takes longer than its limits allow, or than ``limit`` seconds where that is given, is given up.
    """

    def __init__(self, address: str, full: bool, limit: float | None = None) -> None:
        self.address, self.full, self.limit = address, full, limit
        self._client = _connected(address)
        self._run = secrets.token_hex(6)
        self._queue: deque[_Job] = deque()
        self._busy: dict[str, _Job] = {}
        self._events: queue.SimpleQueue[tuple[str, Any]] = queue.SimpleQueue()
        self._finished: list[Finished] = []
        self._workers: set[str] = set()
        self._stuck: set[str] = set()
        self._looked = 0.0
        self._lonely = time.monotonic()
        self._look()

    @property
    def room(self) -> bool:
        return len(self._queue) < max(1, len(self._workers))

    def submit(self, number: int, task: Task) -> None:
        self._queue.append(_Job(number, task))

    def collect(self, timeout: float) -> list[Finished]:
        self._look()
        self._hand_out()
        self._wait(0.0 if self._finished else timeout)
        self._missing()
        self._hand_out()
        finished, self._finished = self._finished, []
        return finished

    def close(self) -> None:
        self._queue.clear()
        futures = [job.future for job in self._busy.values() if job.future is not None]
        self._busy.clear()
        if self._client.status == "running":
            self._client.cancel(futures, force=True)
        self._client.close(timeout=CONNECT)

    # Work

    def _look(self) -> None:
        """Who is there; LowpointError where nobody has been for a while, or the scheduler is gone."""
        if time.monotonic() - self._looked < LOOK:
            return
        try:
            self._workers = set(self._client.nthreads()) - self._stuck
        except (OSError, TimeoutError, RuntimeError) as problem:
            raise self._gone(problem) from None
        self._looked = time.monotonic()
        if self._workers:
            self._lonely = time.monotonic()
        elif time.monotonic() - self._lonely > NO_WORKERS:
            must = "must have workers, but none has been there for a minute"
            raise LowpointError(f"--dask {self.address}", must, "none", "Start workers, then run the command again.")

    def _gone(self, problem: Exception) -> LowpointError:
        remedy = f"Finished books stand; run the command again ({type(problem).__name__})."
        return LowpointError(f"--dask {self.address}", "the scheduler does not answer any more", remedy=remedy)

    def _hand_out(self) -> None:
        for worker in sorted(self._workers - set(self._busy)):
            if not self._queue:
                return
            job = self._queue.popleft()
            try:
                job.source = load_source(job.task)
            except LowpointError as error:
                self._finish(job, failure(job.task, str(error), error.exit_code))
                continue
            job.attempts, job.worker, job.began = job.attempts + 1, worker, time.monotonic()
            self._busy[worker] = job
            job.future = self._sent(job, job.source.data)

    def _sent(self, job: _Job, data: bytes) -> Any:
        import dask

        errand = Errand(job.task, data, self.full, __version__)
        with dask.config.set({"distributed.admin.large-graph-warning-threshold": LARGE}):  # a book is meant to be sent
            future = self._client.submit(run_errand, errand, workers=[job.worker], pure=False, retries=0,
                                         key=f"lowpoint-{self._run}-{job.number}-{job.attempts}")  # fmt: skip
        worker = job.worker
        future.add_done_callback(lambda done: self._events.put((worker, done)))
        return future

    def _wait(self, timeout: float) -> None:
        """Deal with what is finished; wait for the first of it."""
        try:
            while True:
                worker, future = self._events.get(timeout=timeout) if timeout else self._events.get_nowait()
                timeout = 0.0
                job = self._busy.get(worker)
                if job is not None and job.future is future:
                    self._heard(job)
        except queue.Empty:
            return

    def _heard(self, job: _Job) -> None:
        assert job.future is not None
        assert job.source is not None
        try:
            sent: Sent = job.future.result(timeout=FETCH)
        except Exception as trouble:  # whatever the cluster has to say: it comes from far away
            self._troubled(job, trouble)
            return
        self._busy.pop(job.worker)
        self._finish(job, deliver(job.task, job.source, sent))

    def _troubled(self, job: _Job, trouble: Exception) -> None:
        if _worker_died(trouble):
            self._died(job)
            return
        self._busy.pop(job.worker)
        said = f"{job.task.source}: the cluster could not do it ({type(trouble).__name__}: {trouble})."
        remedy = f"Every worker needs lowpoint {__version__} installed."
        self._finish(job, failure(job.task, f"{said} {remedy}"))

    def _missing(self) -> None:
        """The jobs that take too long, and those whose worker is not there any more."""
        self._look()
        for job in [job for job in self._busy.values() if time.monotonic() - job.began > self._limit(job)]:
            self._given_up(job)
        for job in [job for worker, job in self._busy.items() if worker not in self._workers]:
            if job.future is not None and job.future.status == "finished":
                continue  # its result is on the way
            self._died(job)

    def _limit(self, job: _Job) -> float:
        return self.limit or job.task.limits.whole_seconds + FETCH

    def _given_up(self, job: _Job) -> None:
        """Nobody may end another's worker: it gets no more books from here, and its answer is not waited for."""
        self._busy.pop(job.worker)
        self._stuck.add(job.worker)
        self._workers.discard(job.worker)
        self._client.cancel([job.future], force=True)
        said = f"{job.task.source}: took longer than {self._limit(job):g} s and was given up. "
        self._finish(job, failure(job.task, said + "Allow more: --limit seconds=..."))

    def _died(self, job: _Job) -> None:
        """The book is tried once more, by another worker, before the others; then it is reported."""
        self._busy.pop(job.worker)
        self._workers.discard(job.worker)
        if job.future is not None:
            self._client.cancel([job.future], force=True)
        job.future = job.source = None
        if job.attempts < ATTEMPTS:
            self._queue.appendleft(job)
            return
        said = (
            f"{job.task.source}: the cluster's worker that had it ended without an answer, {ATTEMPTS} times. If memory "
            "ran out there, give the workers more, or split the book."
        )
        self._finish(job, failure(job.task, said))

    def _finish(self, job: _Job, outcome: Any) -> None:
        self._finished.append(Finished(job.number, outcome, job.attempts, job.worker or f"process {os.getpid()}"))
        job.future = job.source = None


def _connected(address: str) -> Any:
    try:
        import distributed
        from distributed.versions import VersionMismatchWarning
    except ImportError:
        remedy = "Install it with: pip install 'lowpoint[cluster]'."
        raise LowpointError("--dask", "needs the library distributed", "none", remedy) from None
    try:
        with warnings.catch_warnings():
            # What must be the same, Lowpoint itself, each worker tells with its answer.
            warnings.simplefilter("ignore", VersionMismatchWarning)
            client: Any = distributed.Client
            return client(address, timeout=CONNECT, set_as_default=False, name="lowpoint")
    except (OSError, TimeoutError, ValueError) as problem:
        must = "must be the address of a Dask scheduler that answers"
        remedy = f"Check that it runs and can be reached ({type(problem).__name__})."
        raise LowpointError(f"--dask {address}", must, "no answer", remedy) from None


def _worker_died(trouble: Exception) -> bool:
    """Is it about a worker that is gone, rather than about the work?"""
    from concurrent.futures import CancelledError

    from distributed import KilledWorker
    from distributed.comm.core import CommClosedError

    return isinstance(trouble, (KilledWorker, CancelledError, TimeoutError, CommClosedError))
