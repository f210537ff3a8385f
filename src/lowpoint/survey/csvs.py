"""Lists as plain text, values apart by comma, semicolon, tab or stroke: a grid of texts.

Which sign sets the values apart is seen from the headings; which one is the decimal sign from the numbers, where they
leave no doubt. Where they do, the numbers in question are named one by one and none is guessed.
"""

from __future__ import annotations

import csv
import io
import os
import re
from pathlib import Path

from lowpoint.book import guard
from lowpoint.book.guard_cells import CellCount
from lowpoint.book.guard_limits import in_force
from lowpoint.errors import BookError
from lowpoint.survey.fields import FIELDS, TABLE_FIELDS
from lowpoint.survey.grids import Grid, Sheets
from lowpoint.survey.headers import LOOKED_AT, read_heading, text_of

__all__ = ["SEPARATORS", "decoded", "parsed", "read_text"]

SEPARATORS = (",", ";", "\t", "|")
_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+(?:[eE][+-]?\d+)?")
_DECIMAL_POINT = re.compile(r"[+-]?\d*\.\d+(?:[eE][+-]?\d+)?")
_THOUSANDS = re.compile(r"[+-]?\d{1,3}[.,]\d{3}")
LOOKED_THROUGH = 20_000
"""Signs from the beginning of a file among which a separator must be."""
_LONGEST = 32_767
"""Longest single value: what the cell of a workbook holds. Longer ones are rows run together."""


def read_text(path: str | os.PathLike[str]) -> Sheets:
    """The list of a text file; BookError where it is none."""
    data = guard.load(path)
    text, notes = decoded(data, str(path))
    separator, lines = _separated(text, str(path))
    rows = [(number, [value.strip() or None for value in values]) for number, values in enumerate(lines, 1)]
    rows = [(number, values) for number, values in rows if any(values)]
    decimal = _decimal([value for _, values in rows for value in values if value], separator)
    if decimal == ",":
        notes.append("numbers were read with a decimal comma, as all of them are written")
    notes.append(f"values are set apart by {_NAMES[separator]}")
    return Sheets(
        "csv", (Grid(Path(path).name, rows, all_text=True, decimal=decimal, separator=separator),), tuple(notes)
    )


_NAMES = {",": "commas", ";": "semicolons", "\t": "tabs", "|": "strokes"}


def decoded(data: bytes, name: str) -> tuple[str, list[str]]:
    """A file's bytes as text, and what is to be said about its encoding."""
    if b"\0" in data[:4096] and not data.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise BookError(name, "must be a list as text", guard.looks_like(data), "Save it as .csv or .xlsx.")
    for codec in ("utf-16",) if data.startswith((b"\xff\xfe", b"\xfe\xff")) else ("utf-8-sig",):
        try:
            return data.decode(codec), []
        except UnicodeDecodeError:
            continue
    return data.decode("cp1252", "replace"), ["the file is not UTF-8: it was read as Windows text (code page 1252)"]


def _separated(text: str, name: str) -> tuple[str, list[list[str]]]:
    """The sign under which most headings are known, and the values; the line ``sep=;`` decides where it stands."""
    first, _, rest = text.partition("\n")
    declared = re.fullmatch(r"sep=(.)\r?", first.strip("\ufeff "))
    if declared:
        return declared[1], [[], *parsed(rest, declared[1], name)]
    found: tuple[int, str, list[list[str]]] | None = None
    failure: BookError | None = None
    for separator in [sign for sign in SEPARATORS if sign in text[:LOOKED_THROUGH]] or [","]:
        try:
            trial = parsed(text, separator, name)
        except BookError as problem:  # a wrong sign may run a whole file into one value
            failure = failure or problem
            continue
        known = max((_known(values) for values in trial[:LOOKED_AT]), default=0)
        if found is None or known > found[0]:
            found = known, separator, trial
    if found is None:
        assert failure is not None
        raise failure
    return found[1], found[2]


def _known(values: list[str]) -> int:
    texts = [text_of(value) for value in values]
    return sum(
        read_heading(t, c).field is not None for t in texts if t and len(t) < 120 for c in (FIELDS, TABLE_FIELDS)
    )


def parsed(text: str, separator: str, name: str) -> list[list[str]]:
    """The values of each line; BookError where one is longer than any list has, or there are too many."""
    csv.field_size_limit(_LONGEST)
    counted, lines, ended = CellCount(name, in_force()), [], 0
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator)
    try:
        for values in reader:
            counted.add(len(values))
            lines.append(values)
            ended = reader.line_num
        return lines
    except csv.Error:
        must = f"cannot be read as a list: a value of line {ended + 1} is longer than {_LONGEST} signs"
        raise BookError(name, must, remedy="See whether a quotation mark there has no partner.") from None


def _decimal(values: list[str], separator: str) -> str:
    """``,`` where numbers have a comma and none a point; ``?`` where both, or neither for certain, are seen."""
    commas = [v for v in values if _DECIMAL_COMMA.fullmatch(v)]
    points = any(_DECIMAL_POINT.fullmatch(v) for v in values)
    if not commas or separator == ",":
        return "."
    if points or all(_THOUSANDS.fullmatch(v) for v in commas):
        return "?"
    return ","
