"""Watching a folder: each book is worked on as it lands, until a signal ends it."""

from __future__ import annotations

import argparse
import json
import sys
from collections.abc import Callable, Iterable, Iterator
from contextlib import closing
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint.errors import LowpointError
from lowpoint.faces.fleet_options import BOOKS, INTERRUPTED, Kind, pool_of
from lowpoint.problems import counted

if TYPE_CHECKING:
    from lowpoint.fleet.finding import Found, Looking
    from lowpoint.fleet.pools import Pool
    from lowpoint.fleet.running import Records
    from lowpoint.fleet.stopping import Stopper
    from lowpoint.fleet.summary import Summary
    from lowpoint.fleet.tasks import Task
    from lowpoint.fleet.watching import Landings

__all__ = ["run_watch"]

BEAT = 0.25
"""Seconds between two looks at what is still being written."""


def run_watch(
    folder: Path, looking: Looking, task_of: Callable[[Found], Task], options: argparse.Namespace, kind: Kind = BOOKS
) -> int:  # fmt: skip
    """Work on the books that are there, then on each as it lands.

    A signal is the way to end it: 0, or 1 after findings; 130 only where it left a book undone.
    """
    beats = _beats(folder, looking.recursive)
    _check(folder, looking)
    from lowpoint.fleet.running import Records
    from lowpoint.fleet.stopping import Stopper
    from lowpoint.fleet.summary import Summary
    from lowpoint.fleet.watching import Landings

    summary = Summary(None, kind.noun)
    with Stopper() as stopper, Records(options.trail, options.since_last, _warn) as records:
        with closing(pool_of(options, None)) as pool:
            watch = _Watch(Landings(folder, looking), task_of, pool, records, stopper, summary,
                           kind if options.json else None)  # fmt: skip
            try:
                print(f"lowpoint: watching {folder}; a signal (Ctrl-C) ends it", file=sys.stderr, flush=True)
                for paths in beats:
                    watch.beat(paths)
            except KeyboardInterrupt:
                pass
        with stopper.held():
            left = len(watch.open)
            if not options.json:
                print("\n".join(summary.lines()))
            undone = f"; {counted(left, kind.noun)} not done; no file is half written" if left else ""
            print(f"lowpoint: no longer watching {folder}{undone}", file=sys.stderr)
            return INTERRUPTED if left else max(summary.exit_code, int(records.broken))


class _Watch:
    def __init__(
        self, landings: Landings, task_of: Callable[[Found], Task], pool: Pool, records: Records, stopper: Stopper,
        summary: Summary, as_json: Kind | None,
    ) -> None:  # fmt: skip
        self.landings, self.task_of, self.pool, self.records = landings, task_of, pool, records
        self.stopper, self.summary, self.as_json = stopper, summary, as_json
        self.open: dict[int, Task] = {}
        self._number = 0

    def beat(self, paths: list[Path]) -> None:
        """What has settled is worked on, all of it, before the folder is looked at again."""
        self.landings.hear(paths)
        waiting = [self.task_of(found) for found in self.landings.ready()]
        while waiting or self.open:
            while waiting and self.pool.room:
                self._begin(waiting.pop(0))
            self._collect()

    def _begin(self, task: Task) -> None:
        from lowpoint.fleet.running import unchanged

        entry = self.records.known(task)
        if entry is not None:
            self._told(unchanged(task, entry))
            return
        self._number += 1
        self.open[self._number] = task
        self.pool.submit(self._number, task)

    def _collect(self) -> None:
        from lowpoint.fleet.running import Result

        for done in self.pool.collect(BEAT) if self.open else []:
            with self.stopper.held():
                task = self.open.pop(done.number)
                for target in task.targets:
                    self.landings.ours(target)
                self._told(Result(task, done.outcome, done.attempts, done.worker, done.memory))
        self.stopper.heed()

    def _told(self, result: object) -> None:
        from lowpoint.fleet.running import Result

        assert isinstance(result, Result)
        with self.stopper.held():
            self.records.add(result)
            self.summary.add(result)
            if self.as_json is None:
                print(result.outcome.text, flush=True)
                return
            for data in self.as_json.told(result):
                print(json.dumps(data, ensure_ascii=False), flush=True)


def _check(folder: Path, looking: Looking) -> None:
    if not folder.is_dir():
        raise LowpointError(f"--watch {folder}", "must be a folder", "none of that name", "Make it first.")
    if looking.outputs is not None and looking.outputs.resolve() == folder.resolve():
        must = "must be another folder than the watched one"
        raise LowpointError(f"-o {looking.outputs}", must, remedy="Name another folder, or ask for --in-place.")


def _beats(folder: Path, recursive: bool) -> Iterator[list[Path]]:
    """The paths that something happened to, again and again; an empty list when nothing did for a while."""
    try:
        from watchfiles import watch
    except ImportError:
        remedy = "Install it with: pip install 'lowpoint[watch]'."
        raise LowpointError("--watch", "needs the library watchfiles", "none", remedy) from None
    pause = round(1000 * BEAT)
    return _heard(watch(folder, recursive=recursive, debounce=pause, step=50, rust_timeout=pause, yield_on_timeout=True,
                        watch_filter=None))  # fmt: skip


def _heard(changes: Iterable[Iterable[tuple[Any, str]]]) -> Iterator[list[Path]]:
    for change in changes:
        yield [Path(name) for _, name in change]


def _warn(text: str) -> None:
    print(f"lowpoint: {text}", file=sys.stderr)
