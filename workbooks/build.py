"""Writes the sample books of this folder, with computed values: ``python workbooks/build.py [FOLDER]``."""

from __future__ import annotations

import sys
from pathlib import Path

from lowpoint.faces.cli import main

HERE = Path(__file__).parent
BOOKS = {"kestrel-bay.xlsx": (), "kestrel-bay-us.xlsx": ("--us",)}
"""Each book with the words that ``lowpoint starter sheet`` needs for it."""


def build(folder: Path) -> list[Path]:
    """Write every book into a folder and give their paths; RuntimeError where one could not be written."""
    made = []
    for name, words in BOOKS.items():
        target = folder / name
        if main(["starter", "sheet", "-o", str(target), "--overwrite", *words]) != 0:
            raise RuntimeError(f"{target} could not be written")
        made.append(target)
    return made


if __name__ == "__main__":
    build(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE)
