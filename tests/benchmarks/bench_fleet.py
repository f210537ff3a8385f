"""A fleet of 200 books: two worker processes against one, and the memory that a worker takes."""

from __future__ import annotations

import subprocess
import sys
import tempfile
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path

from bench_recalc import write_book
from figures import Figure, best_of

from lowpoint.fleet.pools import Finished
from lowpoint.fleet.processes import Processes
from lowpoint.fleet.tasks import Task

BOOKS, ROWS = 200, 200
"""A list of two hundred rows is a usual one."""


def figures(quick: bool) -> Iterator[Figure]:
    books = 20 if quick else BOOKS
    with tempfile.TemporaryDirectory() as folder:
        inbox = Path(folder) / "in"
        inbox.mkdir()
        write_book(inbox / "000.xlsx", ROWS)
        data = (inbox / "000.xlsx").read_bytes()
        for number in range(1, books):
            (inbox / f"{number:03}.xlsx").write_bytes(data)
        # By turns, so that whatever else the machine does meets both.
        turns = [[best_of(1, lambda jobs=jobs: _run(inbox, jobs)) for jobs in (1, 2)] for _ in range(1 if quick else 3)]
        one, two = (min(turn[place] for turn in turns) for place in (0, 1))
        yield Figure(f"fleet of {books} books of {ROWS} rows, one process", one, "s")
        yield Figure("the same with two processes: times as fast", one / two, "", at_least=1.8)
        memory = list(_memory(inbox, books))
        yield Figure("memory of a worker after 3 books", memory[2] / 2**20, "MB")
        yield Figure(
            f"memory of a worker after {books} books, over that after 3", memory[-1] / memory[2], "", at_most=1.1
        )
        skipped = best_of(1 if quick else 3, lambda: _run(inbox, 2, "--since-last"))
        yield Figure("the same fleet with --since-last, nothing changed", skipped, "s")


def _run(inbox: Path, jobs: int, *more: str) -> None:
    """The whole command, start included. The call with ``--since-last`` that finds nothing known is not the best."""
    words = ["recalc", str(inbox), "-o", str(inbox.parent / "out"), "--jobs", str(jobs), *more]
    subprocess.run([sys.executable, "-m", "lowpoint", *words], check=True, stdout=subprocess.DEVNULL)


def _memory(inbox: Path, books: int) -> Iterator[int]:
    """The most that one worker has held, after each book (0 where the system does not tell)."""
    with closing(Processes(1, full=False, most_books=books + 1)) as pool:
        for number in range(books):
            pool.submit(number, Task("recalc", inbox / f"{number:03}.xlsx", (inbox.parent / "memory.xlsx",)))
            done: list[Finished] = []
            while not done:
                done = pool.collect(1.0)
            yield done[0].memory
