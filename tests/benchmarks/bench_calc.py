"""Cells in real LibreOffice Calc with the add-in: a hard recalculation, and what opening a list costs more."""

from __future__ import annotations

import contextlib
import io
import shutil
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path

from figures import Figure

from lowpoint.errors import LowpointError
from lowpoint.faces import cli
from lowpoint.faces.calc_addin.office import find_office

TESTS = Path(__file__).parents[1]
sys.path.insert(0, str(TESTS))
from calc_office import Office, office_python  # noqa: E402

SAMPLE = TESTS.parent / "workbooks" / "kestrel-bay.xlsx"
FORMULAS = {
    "LP_LIMIT_INSTALLED, 5 arguments": "=LP_LIMIT_INSTALLED({a};{b};80;100;150)",
    "LP_REGIME, 5 arguments": "=LP_REGIME({b};2.5;{a};1.4;1.2)",
    "LP_VAPOUR_PRESSURE, distinct temperatures": '=LP_VAPOUR_PRESSURE("water";{b})',
}


def figures(quick: bool) -> Iterator[Figure]:
    try:
        program = find_office().program
    except LowpointError:
        return
    python = office_python(program)
    if python is None:
        return
    tools = (python, str(program / "soffice"))
    with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as folder:
        with_addin, without = Path(folder, "with"), Path(folder, "without")
        for profile in (with_addin, without):
            profile.mkdir()
        with contextlib.redirect_stdout(io.StringIO()):
            if cli.main(["calc", "install", "--profile", str(with_addin)]) != 0:
                raise RuntimeError("the add-in could not be installed")
        sample = shutil.copy(SAMPLE, folder)  # the office locks what it opens
        added = [
            _opening(tools, with_addin, sample) - _opening(tools, without, sample) for _ in range(1 if quick else 3)
        ]
        yield Figure("Calc: the first opening of the sample list, more than without the add-in", min(added), "s",
                     at_most=3.0)  # fmt: skip
        yield from _cells(Office(*tools, with_addin), 2_000 if quick else 10_000)


def _opening(tools: tuple[str, str], profile: Path, path: str) -> float:
    office = Office(*tools, profile)
    book, seconds = office.open(path)
    office.close(book)
    office.end()
    return float(seconds)


def _cells(office: Office, rows: int) -> Iterator[Figure]:
    book = office.new()
    office.put_values(book, f"A1:B{rows}", [[1.5 + row * 1e-5, 20.0 + row * 5e-3] for row in range(rows)])
    for name, formula in FORMULAS.items():
        office.put(book, f"C1:C{rows}", [[formula.format(a=f"A{row + 1}", b=f"B{row + 1}")] for row in range(rows)])
        best = min(office.recalculate(book) for _ in range(3)) / rows * 1e6
        yield Figure(f"Calc: hard recalculation of {rows} cells of {name}, each", best, "us", at_most=60.0)
    office.close(book)
    office.end()
