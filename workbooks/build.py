"""Writes the sample books of this folder, with computed values: ``python workbooks/build.py [FOLDER]``."""

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


if __name__ == "__main__":
    build(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE)
