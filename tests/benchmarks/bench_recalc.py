"""Headless recalculation of a long list, against openpyxl's bare load and save of the same book in the same run.

Each runs in a process of its own, imports included, by turns. Seconds are those of the processor, of which both keep
one busy: other work on the machine would disturb runs as long as these. Compiled modules are at hand for both, as after
an installation. Only the start to the first result is told by the clock on the wall, as its user sees it.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path

from figures import Figure, best_of

ROWS = 10_000
LONG = 100_000
GIB = 2**30


def write_book(path: Path, rows: int) -> None:
    """``rows`` rows of five inputs, seven LP_ calls and three ordinary formulas."""
    import random

    import openpyxl

    rng = random.Random(7)
    book = openpyxl.Workbook(write_only=True)
    sheet = book.create_sheet("List")
    sheet.append(["flow", "p1", "p2", "pv", "fl", "sigma", "kv", "drop", "choked", "margin", "regime", "throat",
                  "share", "flag", "sum"])  # fmt: skip
    for row in range(2, rows + 2):
        p1 = round(rng.uniform(8, 30), 3)
        sheet.append([
            round(rng.uniform(20, 200), 2), p1, round(p1 * rng.uniform(0.3, 0.9), 3), round(rng.uniform(0.02, 0.5), 4),
            round(rng.uniform(0.6, 0.95), 3),
            f"=LP_SIGMA(B{row},C{row},D{row})",
            f"=LP_COEFFICIENT(A{row},B{row},C{row},D{row},220.64,990,E{row})",
            f"=LP_CHOKED_DROP(B{row},D{row},220.64,E{row})",
            f"=LP_SIGMA_CHOKED(B{row},D{row},220.64,E{row})",
            f"=LP_MARGIN(F{row},I{row})",
            f"=LP_REGIME(F{row},2.5,1.8,,,I{row})",
            f"=LP_THROAT_PRESSURE(B{row},C{row},E{row},D{row},220.64)",
            f"=(B{row}-C{row})/H{row}",
            f'=IF(J{row}>0.1,"spare","near")',
            f"=SUM(F{row}:I{row})",
        ])  # fmt: skip
    book.save(path)


_OPENPYXL = "import openpyxl, sys; b = openpyxl.load_workbook(sys.argv[1]); b.save(sys.argv[2])"
_RECALC = """
from pathlib import Path
from lowpoint.book.recalc import recalculate
begun = time.process_time()
r = recalculate(Path(sys.argv[1]), Path(sys.argv[2]), per_cell='per_cell' in sys.argv)
more['evaluating'], more['working'] = r.evaluation_seconds, time.process_time() - begun
"""
_MEASURED = """
import json, resource, sys, time
more = {}
start = time.process_time()
%s
more['seconds'] = time.process_time() - start
more['peak'] = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * (1 if sys.platform == 'darwin' else 1024)
print(json.dumps(more))
"""


def _compiled(folder: str) -> dict[str, str]:
    """The environment in which Python keeps compiled modules in this folder, whatever it is told otherwise."""
    kept = {name: value for name, value in os.environ.items() if name != "PYTHONDONTWRITEBYTECODE"}
    return kept | {"PYTHONPYCACHEPREFIX": folder}


class _Runner:
    """Runs pieces of work in processes of their own; compiled modules and books in one folder."""

    def __init__(self, folder: Path) -> None:
        self.folder, self.out = folder, str(folder / "out.xlsx")
        self.environment = _compiled(str(folder / "compiled"))
        for code in (_OPENPYXL, _RECALC):  # compiles
            self.measured(code, 10)

    def book(self, rows: int) -> str:
        """A list of so many rows."""
        path = self.folder / f"{rows}.xlsx"
        if not path.exists():
            write_book(path, rows)
        return str(path)

    def measured(self, code: str, rows: int, *words: str) -> dict[str, float]:
        """Seconds of the processor, imports included, and peak memory in bytes."""
        command = [sys.executable, "-c", _MEASURED % code, self.book(rows), self.out, *words]
        done = subprocess.run(command, check=True, capture_output=True, text=True, env=self.environment)
        found: dict[str, float] = json.loads(done.stdout.splitlines()[-1])
        return found

    def first_result(self) -> None:
        """The whole command on a small book."""
        command = [sys.executable, "-m", "lowpoint", "recalc", self.book(10), "-o", self.out]
        subprocess.run(command, check=True, stdout=subprocess.DEVNULL, env=self.environment)


def _best(runs: list[dict[str, float]]) -> dict[str, float]:
    return {key: min(run[key] for run in runs) for key in runs[0]}


def figures(quick: bool) -> Iterator[Figure]:
    rows, times = (2_000, 1) if quick else (ROWS, 5)
    with tempfile.TemporaryDirectory() as folder:
        runner = _Runner(Path(folder))
        turns = [[runner.measured(code, rows) for code in (_OPENPYXL, _RECALC)] for _ in range(times)]
        bare, ours = (_best([turn[place] for turn in turns]) for place in (0, 1))
        label = f"recalc of {rows} rows x 7 LP_ calls"
        yield Figure(f"{label}, seconds", ours["seconds"], "s")
        yield Figure(f"{label}, against openpyxl load and save", ours["seconds"] / bare["seconds"], "", at_most=0.6)
        yield Figure(f"{label}, peak memory against openpyxl", ours["peak"] / bare["peak"], "", at_most=1.5)
        cells = runner.measured(_RECALC, rows, "per_cell")
        yield Figure(f"{label}, evaluation by levels against a callback a cell",
                     cells["evaluating"] / ours["evaluating"], "times", at_least=10.0)  # fmt: skip
        yield from _growth(runner, quick)
        long = 5_000 if quick else LONG
        yield Figure(f"recalc of {long} rows x 7 LP_ calls, peak memory", runner.measured(_RECALC, long)["peak"] / GIB,
                     "GiB", at_most=3.0)  # fmt: skip
        yield Figure("start to first result, `lowpoint recalc` of 10 rows", best_of(5, runner.first_result), "s",
                     at_most=1.0)  # fmt: skip


def _growth(runner: _Runner, quick: bool) -> Iterator[Figure]:
    """Seconds a row at 50 000 rows over seconds a row at 1 000 rows, what ten rows take taken off both."""
    small, large = (500, 2_000) if quick else (1_000, 50_000)
    # The small books take a tenth of a second: the best of many runs, lest the noise of it be taken for growth.
    runs = {10: 10, small: 10, large: 1 if quick else 3}
    seconds = {
        rows: _best([runner.measured(_RECALC, rows) for _ in range(times)])["working"] for rows, times in runs.items()
    }
    per_row = {rows: (seconds[rows] - seconds[10]) / (rows - 10) for rows in (small, large)}
    yield Figure(f"growth: seconds a row at {large} rows over the same at {small}", per_row[large] / per_row[small],
                 "", at_most=1.1)  # fmt: skip
