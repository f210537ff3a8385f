"""Writes the sample books of this folder, with computed values: ``python workbooks/build.py [FOLDER]``.

The vendors' sheets in ``datasheets`` come from the tests' own arithmetic, which shares nothing with the package; they
need the optional part ``test``.
"""

from __future__ import annotations

import sys
import tempfile
from pathlib import Path

from lowpoint.book.recalc import recalculate
from lowpoint.faces.cli import main
from lowpoint.starter.plates_book import write_plates

HERE = Path(__file__).parent
BOOKS = {"kestrel-bay.xlsx": (), "kestrel-bay-us.xlsx": ("--us",)}
"""Each valve list with the words that ``lowpoint starter sheet`` needs for it."""
PLATES = "kestrel-bay-plates.xlsx"
DATASHEETS, EXPECTED = "datasheets", "expected.csv"


def build(folder: Path) -> list[Path]:
    """Write every book into a folder and give their paths; RuntimeError where one could not be written."""
    made = [build_plates(folder)]
    for name, words in BOOKS.items():
        target = folder / name
        if main(["starter", "sheet", "-o", str(target), "--overwrite", *words]) != 0:
            raise RuntimeError(f"{target} could not be written")
        made.append(target)
    return made


def build_plates(folder: Path) -> Path:
    """Write the book of plates into a folder; RuntimeError where a cell of it could not be computed."""
    target = folder / PLATES
    with tempfile.TemporaryDirectory(prefix="lowpoint-") as scratch:
        plain = Path(scratch, PLATES)
        write_plates(plain)
        report = recalculate(plain, target)
    if report.failed or report.unfed or report.kept:
        raise RuntimeError(f"{target}: {report.failed or report.unfed or report.kept}")
    return target


def build_datasheets(folder: Path) -> list[Path]:
    """Write the vendors' sheets into a folder, and beside them what is wrong with which."""
    sys.path.insert(0, str(HERE.parent / "tests"))
    try:
        from vendor_samples import SAMPLES, expected_csv, written
    finally:
        sys.path.pop(0)
    folder.mkdir(exist_ok=True)
    made = []
    for sample in SAMPLES:
        made.append(folder / sample.file)
        made[-1].write_bytes(written(sample))
    made.append(folder / EXPECTED)
    made[-1].write_text(expected_csv(), encoding="utf-8", newline="\n")
    return made


if __name__ == "__main__":
    target_folder = Path(sys.argv[1]) if len(sys.argv) > 1 else HERE
    build_datasheets(target_folder / DATASHEETS)
    build(target_folder)
