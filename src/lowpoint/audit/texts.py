"""Data sheets as plain text: values apart by a sign that is found from the labels, one page a file."""

from __future__ import annotations

from pathlib import Path

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.matching import read_label
from lowpoint.audit.numbers import numbers_of
from lowpoint.audit.unitsigns import unit_sign
from lowpoint.survey.csvs import SEPARATORS, decoded, parsed

__all__ = ["read_text"]


def read_text(data: bytes, path: str) -> tuple[list[Page], list[tuple[str, str, str, str]]]:
    """The one page of a csv's bytes; BookError where it is no text."""
    text, said = decoded(data, path)
    rows = _separated(text, path)
    page = Page(Path(path).stem, [])
    filled = (
        Cell(number, column, column + 1, f"row {number}, column {column}", value.strip(), bottom=number)
        for number, values in enumerate(rows, 1) for column, value in enumerate(values, 1) if value.strip()
    )  # fmt: skip
    for cell in filled:
        if not page.add(cell):
            break
    return [page], [("text", "", note, "") for note in said]


def _separated(text: str, path: str) -> list[list[str]]:
    """The values under the sign that lets most labels be known; ``sep=;`` decides where it stands."""
    first, _, rest = text.partition("\n")
    line = first.strip("\ufeff \r").lower()
    if line.startswith("sep=") and len(line) == 5:
        return [[], *parsed(rest, line[4], path)]
    best: list[list[str]] = []
    most = -1
    for separator in SEPARATORS:
        if separator != "," and separator not in text:
            continue
        rows = parsed(text, separator, path)
        known = sum(_speaks(value.strip()) for row in rows[:200] for value in row[:20])
        if known > most:
            best, most = rows, known
    return best


def _speaks(text: str) -> bool:
    """Is a value a whole label, a unit or a number?"""
    return bool(text) and (read_label(text).score >= 0.95 or unit_sign(text) is not None or bool(numbers_of(text, "")))
