"""What the commands for many books share: options, pools, what is printed, how a run ends."""

from __future__ import annotations

import argparse
import json
import sys
from collections.abc import Callable, Iterable, Sequence
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint.errors import LowpointError
from lowpoint.faces.progress import Bar, progress_bar
from lowpoint.problems import counted

if TYPE_CHECKING:
    from lowpoint.fleet.pools import Pool
    from lowpoint.fleet.running import Result
    from lowpoint.fleet.stopping import Stopper
    from lowpoint.fleet.summary import Summary
    from lowpoint.fleet.tasks import Task

__all__ = ["BOOKS", "Kind", "add_options", "check_options", "pool_of", "run_fleet", "wants_fleet"]

INTERRUPTED = 130


def _whole(result: Result) -> list[Any]:
    return [result.outcome.data]


@dataclass(frozen=True, slots=True)
class Kind:
    """What a command works on: its noun, and what ``--json`` tells of a result, as elements of the list of all."""

    noun: str
    told: Callable[[Result], list[Any]] = _whole
    none_read: int = 1
    """The exit code where there are several, and none of them could be read."""


BOOKS = Kind("book")


def add_options(parser: argparse.ArgumentParser, noun: str = BOOKS.noun) -> None:
    """The options of a fleet of such things."""
    add = parser.add_argument_group(f"many {noun}s").add_argument
    add("--recursive", action="store_true", help="open the sub-folders of folders too")
    add("--jobs", type=int, default=1, metavar="N", help=f"how many {noun}s are worked on at once, each by a process "
        "of its own (default 1)")  # fmt: skip
    add("--dask", metavar="ADDRESS", help=f"work on a Dask cluster, as tcp://host:8786, one {noun} a worker at a time; "
        f"the {noun}s are sent there and back, no shared folder is needed (extra [cluster])")  # fmt: skip
    add("--since-last", action="store_true", help=f"skip {noun}s that are as they were at the last run with this "
        "option, and their outputs too; remembered in .lowpoint-state.json beside the outputs")  # fmt: skip
    add("--trail", type=Path, metavar="FILE", help=f"add a line of JSON for each {noun} to a file, as each is finished")
    add("--watch", type=Path, metavar="DIR", help=f"work on the {noun}s of a folder as they land there, until a signal "
        "ends it (extra [watch])")  # fmt: skip


def check_options(options: argparse.Namespace) -> None:
    """LowpointError where the options contradict."""
    if options.jobs < 1:
        raise LowpointError("--jobs", "must be at least 1", str(options.jobs))
    if options.dask is not None and options.jobs != 1:
        raise LowpointError("--dask", "must stand without --jobs", "both", "The cluster's workers are all used.")


def wants_fleet(options: argparse.Namespace) -> bool:
    """Does an option ask for the machinery of fleets, even for a single book?"""
    return bool(options.dask or options.since_last or options.trail)


def pool_of(options: argparse.Namespace, books: int | None) -> Pool:
    """Who works on the books; ``books`` is how many there are, None where more may come."""
    if options.dask is not None:
        from lowpoint.fleet.cluster import Cluster

        return Cluster(options.dask, options.json)
    if books == 1:
        from lowpoint.fleet.pools import Here

        return Here(options.json)
    from lowpoint.fleet.processes import Processes

    # One worker too is better than none: a book that brings it down does not end the run.
    return Processes(options.jobs if books is None else min(options.jobs, books), options.json)


def run_fleet(tasks: Sequence[Task], options: argparse.Namespace, kind: Kind = BOOKS) -> int:
    """Do all tasks, print what came of each in their order, then a summary; the exit code of all."""
    from lowpoint.fleet.running import Records, results
    from lowpoint.fleet.stopping import Stopper
    from lowpoint.fleet.summary import Summary

    summary = Summary(len(tasks), kind.noun)
    with Stopper() as stopper, progress_bar() as bar, Records(options.trail, options.since_last, _warn(bar)) as records:
        pool = pool_of(options, len(tasks))
        found = results(tasks, pool, records, stopper, lambda done: bar(f"{kind.noun}s", done, len(tasks)))
        try:
            with closing(pool), closing(found):
                _print_all(found, summary, kind if options.json else None, bar, stopper)
        except KeyboardInterrupt:
            with stopper.held():
                bar.close()
                _end(summary, options.json)
                left = counted(len(tasks) - summary.books, kind.noun)
                print(f"lowpoint: interrupted; {left} not done; no file is half written", file=sys.stderr)
                return INTERRUPTED
        bar.close()
    _end(summary, options.json)
    code = kind.none_read if summary.none_read else summary.exit_code
    return max(code, int(records.broken))


def _print_all(
    found: Iterable[Result], summary: Summary, as_json: Kind | None, bar: Bar, stopper: Stopper
) -> None:  # fmt: skip
    """One value alone for ``--json``: a list that grows as the books are finished, and is closed whatever happens."""
    elements = 0
    if as_json:
        _print("[")
    try:
        for result in found:
            with stopper.held():
                for data in as_json.told(result) if as_json else ():
                    _print(("," if elements else "") + "\n" + json.dumps(data, indent=2, ensure_ascii=False))
                    elements += 1
                if not as_json:
                    bar.aside()
                    _print(result.outcome.text + "\n")
                summary.add(result)
    finally:
        if as_json:
            _print("\n]\n")


def _print(text: str) -> None:
    sys.stdout.write(text)
    sys.stdout.flush()


def _end(summary: Summary, as_json: bool) -> None:
    if not as_json:
        for line in summary.lines():
            print(line)


def _warn(bar: Bar) -> Callable[[str], None]:
    def warn(text: str) -> None:
        bar.aside()
        print(f"lowpoint: {text}", file=sys.stderr)

    return warn
