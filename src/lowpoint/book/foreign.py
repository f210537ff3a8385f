"""Stored cells that the engine's load cannot take as they are: errors it does not know, dates in words (``t="d"``).

Source: ISO/IEC 29500-1, 18.18.11 (types of cells); the newer errors: common practice.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import NamedTuple

from lowpoint.cells import CellError

from .attributes import attribute
from .sheet import SheetPart
from .stale import Place
from .stored import serial_of

__all__ = ["LOADABLE", "Foreign", "foreign_cells", "late_errors"]

LOADABLE = frozenset({"#NULL!", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NUM!", "#N/A"})
_KNOWN = b"|".join(re.escape(error.encode()) for error in sorted(LOADABLE))
_STRANGE = re.compile(rb"#(?!(?:%b)\s*<)[^<#]*</(?:[\w.-]+:)?v\s*>" % _KNOWN)
_VALUE = re.compile(rb"<(?:[\w.-]+:)?v\b[^>]*>([^<]*)</")


class Foreign(NamedTuple):
    """Such a cell: its place, its span in the sheet's bytes, and what it means."""

    row: int
    column: int
    start: int
    end: int
    value: float | CellError


def foreign_cells(sheet: SheetPart, date1904: bool) -> list[Foreign]:
    """A sheet's cells of that kind; an error without a name of ours counts as #VALUE!."""
    # Most sheets hold neither: a quick look over the bytes spares the look at every cell.
    data = sheet.scanned
    if b'"d"' in data or b"'d'" in data or _STRANGE.search(data, *sheet.body):
        return list(_found(sheet, date1904))
    return []


def _found(sheet: SheetPart, date1904: bool) -> Iterator[Foreign]:
    for (row, column), start, end in sheet.every_cell():
        cell = sheet.scanned[start:end]
        kind = attribute(cell[: cell.index(b">")], b"t")
        stored = _VALUE.search(cell) if kind in (b"e", b"d") else None
        text = stored[1].decode("utf-8").strip() if stored else ""
        if kind == b"d" and (day := serial_of(text, date1904)) is not None:
            yield Foreign(row, column, start, end, day)
        elif kind == b"e" and stored and text not in LOADABLE:
            named = text in {error.value for error in CellError}
            yield Foreign(row, column, start, end, CellError(text) if named else CellError.VALUE)


def late_errors(sheets: Iterable[SheetPart], foreign: Mapping[str, Sequence[Foreign]]) -> dict[Place, CellError]:
    """The constants among such errors that the engine has a word for once the book is loaded, by place."""
    late: dict[Place, CellError] = {}
    for sheet in sheets:
        found = [cell for cell in foreign[sheet.title] if isinstance(cell.value, CellError)]
        areas = [group.area for group in sheet.distinct if group.area is not None] if found else []
        for row, column, _, _, value in found:
            filled = any(a.r1 <= row <= a.r2 and a.c1 <= column <= a.c2 for a in areas)
            own = filled or (row, column) in sheet.formula_places
            if isinstance(value, CellError) and value not in LOADABLE and not own:
                late[sheet.title, row, column] = value
    return late
