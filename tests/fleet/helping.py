"""Small books and texts for the tests of fleets, and the running of tasks in a pool."""

from __future__ import annotations

import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any, Protocol

import openpyxl

from lowpoint.fleet.pools import Finished, Pool
from lowpoint.fleet.tasks import Task

TESTS = Path(__file__).parents[1]
PATIENCE = 60.0


def book(path: Path, p1: float = 10.0, rows: int = 1) -> Path:
    """Valves at p1 bar before and 5 bar after: by hand sigma = (p1 - 0.02)/(p1 - 5)."""
    made = openpyxl.Workbook()
    sheet = made.active
    assert sheet is not None
    sheet.title = "List"
    for row in range(1, rows + 1):
        sheet.append([p1, 5, 0.02, f"=LP_SIGMA(A{row},B{row},C{row})", f'=LP_REGIME(D{row},"",1.5)'])
    made.calculation.fullCalcOnLoad = False
    path.parent.mkdir(parents=True, exist_ok=True)
    made.save(path)
    return path


def index(path: Path) -> object:
    """The first index that a recomputed book holds."""
    return openpyxl.load_workbook(path, data_only=True)["List"]["D1"].value


def text_tasks(folder: Path, texts: Sequence[str]) -> list[Task]:
    """Texts as sources of the test's own kind of work, each with a target."""
    tasks = []
    for number, text in enumerate(texts):
        source = folder / f"{number:03}.txt"
        source.write_text(text)
        tasks.append(Task("fleet.kinds:upper", source, (folder / "out" / f"{number:03}.txt",)))
    (folder / "out").mkdir(exist_ok=True)
    return tasks


def all_done(pool: Pool, tasks: Sequence[Task]) -> dict[int, Finished]:
    """Every task through a pool; fails where that takes far too long."""
    found: dict[int, Finished] = {}
    waiting = list(enumerate(tasks))
    until = time.monotonic() + PATIENCE
    while len(found) < len(tasks):
        assert time.monotonic() < until, f"only {sorted(found)} finished"
        while waiting and pool.room:
            pool.submit(*waiting.pop(0))
        found.update((done.number, done) for done in pool.collect(0.5))
    return found


def wait_for(what: Callable[[], Any], why: str, pause: float = 0.05) -> Any:
    """The first truthy answer; fails where none comes."""
    until = time.monotonic() + PATIENCE
    while time.monotonic() < until:
        found = what()
        if found:
            return found
        time.sleep(pause)
    raise AssertionError(f"waited in vain for {why}")


class Running:
    """A real ``lowpoint`` in a process, and a group of processes, of its own; what it says goes to files."""

    def __init__(self, words: Sequence[str | Path], said: Path, module: str = "lowpoint", **options: Any) -> None:
        self._out, self._err = said / "out.txt", said / "err.txt"
        with open(self._out, "wb") as out, open(self._err, "wb") as err:
            self.process = subprocess.Popen(
                [sys.executable, "-m", module, *map(str, words)], stdout=out, stderr=err, start_new_session=True,
                **options,
            )  # fmt: skip

    def __enter__(self) -> Running:
        return self

    def __exit__(self, *_: object) -> None:
        self.process.kill()
        self.process.wait()

    @property
    def pid(self) -> int:
        return self.process.pid

    @property
    def out(self) -> str:
        """What it said by now."""
        return self._out.read_text(encoding="utf-8")

    @property
    def err(self) -> str:
        return self._err.read_text(encoding="utf-8")

    def end(self) -> int:
        """Wait for the end; the exit code."""
        return self.process.wait(PATIENCE)


def leftovers(folder: Path) -> list[str]:
    """Files of ours that should not be there."""
    return [path.name for path in folder.rglob(".lowpoint-*.tmp")]


class Command(Protocol):
    """Starts ``lowpoint`` with these words."""

    def __call__(self, *words: str | Path, **options: Any) -> Running: ...
