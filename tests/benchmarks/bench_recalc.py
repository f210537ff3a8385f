"""Headless recalculation of a long list, against openpyxl's bare load and save of the same book in the same run."""

from __future__ import annotations

import json
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path

from figures import Figure

ROWS = 10_000


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
_RECALC = (
    "import sys; from pathlib import Path; from lowpoint.book.recalc import recalculate; "
    "r = recalculate(Path(sys.argv[1]), Path(sys.argv[2]), per_cell='per_cell' in sys.argv); "
    "more['evaluating'] = r.evaluation_seconds"
)
_MEASURED = """
import json, resource, sys, time
more = {}
start = time.perf_counter()
%s
more['seconds'] = time.perf_counter() - start
more['peak'] = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
print(json.dumps(more))
"""


def _measured(code: str, *words: str) -> dict[str, float]:
    """Run one piece of work in a process of its own: seconds (imports included) and peak memory."""
    done = subprocess.run([sys.executable, "-c", _MEASURED % code, *words], check=True, capture_output=True, text=True)
    found: dict[str, float] = json.loads(done.stdout.splitlines()[-1])
    return found


def _best(code: str, *words: str, times: int = 3) -> dict[str, float]:
    runs = [_measured(code, *words) for _ in range(times)]
    return {key: min(run[key] for run in runs) for key in runs[0]}


def figures(quick: bool) -> Iterator[Figure]:
    rows, times = (2_000, 1) if quick else (ROWS, 3)
    with tempfile.TemporaryDirectory() as folder:
        book, out = Path(folder, "list.xlsx"), Path(folder, "out.xlsx")
        write_book(book, rows)
        bare = _best(_OPENPYXL, str(book), str(out), times=times)
        ours = _best(_RECALC, str(book), str(out), times=times)
        label = f"recalc of {rows} rows x 7 LP_ calls"
        yield Figure(f"{label}, seconds", ours["seconds"], "s")
        yield Figure(f"{label}, against openpyxl load and save", ours["seconds"] / bare["seconds"], "", at_most=1.0)
        yield Figure(f"{label}, peak memory against openpyxl", ours["peak"] / bare["peak"], "", at_most=1.5)
        cells = _measured(_RECALC, str(book), str(out), "per_cell")
        yield Figure(f"{label}, evaluation by levels against a callback a cell",
                     cells["evaluating"] / ours["evaluating"], "times", at_least=10.0)  # fmt: skip
        yield from _growth(Path(folder), quick)


def _growth(folder: Path, quick: bool) -> Iterator[Figure]:
    """Seconds a row at 50 000 rows over seconds a row at 1 000 rows, start-up taken off both."""
    small, large = (500, 2_000) if quick else (1_000, 50_000)
    seconds = {}
    for rows in (10, small, large):
        book = folder / f"{rows}.xlsx"
        write_book(book, rows)
        seconds[rows] = _best(_RECALC, str(book), str(folder / "out.xlsx"), times=1 if rows == large else 5)["seconds"]
    per_row = {rows: (seconds[rows] - seconds[10]) / (rows - 10) for rows in (small, large)}
    yield Figure(f"growth: seconds a row at {large} rows over the same at {small}", per_row[large] / per_row[small],
                 "", at_most=1.1)  # fmt: skip
