"""A soak: many books, some broken, recomputed by a fleet that is killed twice and loses a worker; nothing may be lost.

``python tests/soak/soak.py`` runs the long one (500 books) and prints its figures; the tests run a short one. What is
asked at the end: every input is the same to the byte; every output is whole and the same as from one process in one
go, or absent with its reason; no temporary file is left; and the trail has a line for every time a book was done,
which is counted apart from it, by the files that were replaced.
"""

from __future__ import annotations

import argparse
import hashlib
import json
import os
import random
import signal
import subprocess
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

if __name__ == "__main__":
    sys.path[0] = str(Path(__file__).parents[1])  # the makers of test books

from fleet.helping import Running, index, leftovers, wait_for
from soak.making import Made, make

__all__ = ["Soak"]

JOBS = 2
KILLED = getattr(signal, "SIGKILL", signal.SIGTERM)


@dataclass(slots=True)
class Run:
    """One run of the command: how it ended, its lines of the trail, and the outputs that it replaced."""

    what: str
    code: int
    seconds: float
    lines: list[dict[str, Any]]
    replaced: set[str]

    @property
    def done(self) -> Counter[str]:
        return Counter(Path(line["book"]).name for line in self.lines if line["result"] in ("done", "findings"))

    @property
    def killed(self) -> bool:
        return self.code < 0


class Soak:
    """The folders and the runs of a soak."""

    def __init__(self, folder: Path, count: int, most_rows: int, seed: int) -> None:
        self.folder, self.count, self.most_rows = folder, count, most_rows
        self.inputs, self.out, self.trail = folder / "in", folder / "out", folder / "trail.jsonl"
        self.chance = random.Random(seed)
        self.runs: list[Run] = []
        self.made: list[Made] = []
        self.marks: dict[str, str] = {}
        self.expected: dict[str, tuple[bytes | None, str]] = {}
        self.serial_seconds = 0.0

    def prepare(self) -> None:
        """The books, and what one process makes of them in one go."""
        self.made = make(self.inputs, self.count, self.most_rows, self.chance)
        self.marks = _marks(self.inputs)
        began = time.perf_counter()
        self.expected = dict(self._serial())
        self.serial_seconds = time.perf_counter() - began

    def _serial(self) -> Iterator[tuple[str, tuple[bytes | None, str]]]:
        """Name -> the output (None where there is none) and the reason."""
        from lowpoint.fleet.tasks import Task, attempt

        (self.folder / "serial").mkdir()
        for one in self.made:
            target = self.folder / "serial" / one.name
            outcome = attempt(Task("recalc", self.inputs / one.name, (target,)), False)
            yield one.name, (target.read_bytes() if target.exists() else None, "; ".join(outcome.errors))

    def endure(self) -> None:
        """Two runs that are killed, one that loses a worker, one that finds nothing left to do."""
        self._run("killed", (0.1, 0.4), self._kill_all)
        self._run("killed", (0.1, 0.4), self._kill_all)
        self._run("lost a worker", (0.1, 0.4), self._kill_worker)
        self._run("nothing changed", None, None)

    def _run(self, what: str, share: tuple[float, float] | None, harm: Any) -> None:
        """Run the command, and do it harm at a random moment: after a share of the outputs that lack, and a while."""
        before, at = _states(self.out), self.trail.stat().st_size if self.trail.exists() else 0
        said = self.folder / f"said{len(self.runs)}"
        said.mkdir()
        words = ("recalc", self.inputs, "-o", self.out, "--jobs", str(JOBS), "--since-last", "--trail", self.trail)
        began = time.perf_counter()
        with Running(words, said) as running:
            if share is not None:
                lacking = len(self.made) - self.broken - len(before)
                after = len(before) + max(1, round(lacking * self.chance.uniform(*share)))
                wait_for(lambda: len(list(self.out.glob("*.xlsx"))) >= after, f"{after} outputs", pause=0.002)
                time.sleep(self.chance.random() * 0.05)
                assert running.process.poll() is None, "the run ended before it could be harmed; give it more books"
                harm(running)
            code = running.end()
        seconds = time.perf_counter() - began
        now = _states(self.out)
        replaced = {name for name, state in now.items() if before.get(name) != state}
        lines = self.trail.read_bytes()[at:].splitlines()
        self.runs.append(Run(what, code, seconds, [json.loads(line) for line in lines], replaced))

    def _kill_all(self, running: Running) -> None:
        os.killpg(running.pid, KILLED)
        wait_for(lambda: not _workers(running.pid), "the end of the workers")

    def _kill_worker(self, running: Running) -> None:
        os.killpg(running.pid, signal.SIGSTOP)  # so that the moment does not pass while it is looked who works
        try:
            workers = _workers(running.pid)
            assert workers, "the run ended before it could be harmed; give it more books"
            os.kill(self.chance.choice(workers), KILLED)
        finally:
            os.killpg(running.pid, signal.SIGCONT)

    # What is asked at the end

    def check(self) -> None:
        """AssertionError for whatever is not as it should be."""
        assert _marks(self.inputs) == self.marks, "an input was changed"
        assert leftovers(self.folder) == [], "temporary files are left"
        self._check_outputs()
        for run in self.runs:
            self._check_trail(run)
        self._check_ends()

    def _check_outputs(self) -> None:
        found = {path.name for path in self.out.iterdir() if not path.name.startswith(".")}
        assert found == {one.name for one in self.made if not one.broken}
        for one in self.made:
            data, _ = self.expected[one.name]
            assert (data is None) == one.broken, f"{one.name} ({one.kind})"
            if data is None:
                continue
            assert (self.out / one.name).read_bytes() == data, f"{one.name} is another than from one process"
            assert one.kind != "right" or data == (self.inputs / one.name).read_bytes(), one.name
            if one.p1:
                # By hand: the index of the maker's valves, (p1 - 0.02)/(p1 - 5).
                value = index(self.out / one.name)
                assert isinstance(value, int | float), f"{one.name}: {value!r}"
                assert abs(value - (one.p1 - 0.02) / (one.p1 - 5)) < 1e-12, one.name

    def _check_trail(self, run: Run) -> None:
        """A line for every time a book was done: what a killed run was at may lack its own, one for each worker."""
        assert max(run.done.values(), default=1) == 1, f"{run.what}: a book is in the trail twice"
        recorded = set(run.done)
        assert recorded <= run.replaced, f"{run.what}: {sorted(recorded - run.replaced)} are only said to be done"
        unrecorded = run.replaced - recorded
        assert len(unrecorded) <= (JOBS if run.killed else 0), f"{run.what}: {sorted(unrecorded)} are not on record"
        for line in run.lines:
            name = Path(line["book"]).name
            data, reason = self.expected[name]
            assert (line["result"] == "failed") == (data is None), name
            if data is None:
                assert "; ".join(line["errors"]) == reason, name
            else:
                assert list(line["written"].values()) == [hashlib.sha256(data).hexdigest()], name
            assert line["fingerprint"] == self.marks[name]

    def _check_ends(self) -> None:
        first, second, third, last = self.runs
        assert (first.code, second.code, third.code, last.code) == (-KILLED, -KILLED, 1, 1)
        everything = sorted(one.name for one in self.made)
        for run in (third, last):
            assert sorted(Path(line["book"]).name for line in run.lines) == everything, run.what
        again = [line for line in third.lines if line["attempts"] > 1]
        assert len(again) <= 1, "one worker died, with one book"
        assert not last.done
        assert sum(line["result"] == "unchanged" for line in last.lines) == len(everything) - self.broken

    @property
    def broken(self) -> int:
        return sum(one.broken for one in self.made)

    def told(self) -> Iterator[str]:
        """The figures."""
        kinds = Counter(one.kind for one in self.made)
        yield f"{len(self.made)} books: " + ", ".join(f"{count} {kind}" for kind, count in kinds.most_common())
        yield f"one process in one go: {self.serial_seconds:.1f} s"
        for run in self.runs:
            results = Counter(line["result"] for line in run.lines)
            said = ", ".join(f"{count} {result}" for result, count in sorted(results.items()))
            tried = sum(line["attempts"] > 1 for line in run.lines)
            lacking = len(run.replaced) - len(run.done)
            yield (f"{run.what}, exit code {run.code}, {run.seconds:.1f} s: {len(run.replaced)} outputs put in place; "
                   f"trail: {said}; {tried} tried twice, {lacking} in place but not on record")  # fmt: skip
        times = Counter(sum((run.done for run in self.runs), Counter()).values())
        yield "books done once, twice, ...: " + ", ".join(f"{times[n]}" for n in range(1, max(times) + 1))


def _marks(folder: Path) -> dict[str, str]:
    return {path.name: hashlib.sha256(path.read_bytes()).hexdigest() for path in folder.iterdir()}


def _states(folder: Path) -> dict[str, tuple[int, int]]:
    """What changes whenever a file is replaced."""
    if not folder.exists():
        return {}
    states = {path.name: path.stat() for path in folder.glob("*.xlsx")}
    return {name: (state.st_ino, state.st_mtime_ns) for name, state in states.items()}


def _workers(leader: int) -> list[int]:
    """The living workers of a command, which leads its own group."""
    listed = subprocess.run(
        ["ps", "-ww", "-eo", "pid=,pgid=,stat=,args="], capture_output=True, text=True, check=True
    ).stdout
    rows = [line.split(None, 3) for line in listed.splitlines()]
    return [int(pid) for pid, group, state, *args in rows
            if group == str(leader) and "Z" not in state and args and "spawn_main" in args[0]]  # fmt: skip


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.partition("\n")[0])
    parser.add_argument("--books", type=int, default=500)
    parser.add_argument("--rows", type=int, default=2000, help="of the largest book")
    parser.add_argument("--seed", type=int, default=time.time_ns() % 10_000, help="(default: another each time)")
    options = parser.parse_args()
    with tempfile.TemporaryDirectory(prefix="soak-") as folder:
        soak = Soak(Path(folder), options.books, options.rows, options.seed)
        print(f"seed {options.seed}", flush=True)
        soak.prepare()
        soak.endure()
        print("\n".join(soak.told()), flush=True)
        soak.check()
    print("nothing lost; inputs unchanged; outputs whole and right; no temporary files; the trail is correct")


if __name__ == "__main__":
    main()
