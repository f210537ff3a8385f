"""Workbooks as grids: values by openpyxl, and what its fast way does not tell by a scan of the sheets' bytes."""

from __future__ import annotations

import io
import os
import re
import warnings
from collections.abc import Callable, Iterator
from typing import Any, TypeAlias

from lowpoint.book import guard
from lowpoint.book.attributes import attribute
from lowpoint.book.guard_cells import CellCount
from lowpoint.book.guard_limits import in_force
from lowpoint.book.package import Package
from lowpoint.book.parts import blanked
from lowpoint.book.refs import area, column_number
from lowpoint.errors import BookError
from lowpoint.survey.grids import Grid, Sheets
from lowpoint.survey.headers import LOOKED_AT

__all__ = ["read_workbook"]

Progress: TypeAlias = Callable[[int, int], None]
OFTEN = 500
"""Rows between two tellings of how far the reading is."""

_ROW = re.compile(rb"<(?:\w+:)?row\b[^>]*>")
_HIDDEN = re.compile(rb"""\shidden\s*=\s*["'](?:1|true)["']""")
_NUMBER = re.compile(rb"""\sr\s*=\s*["'](\d+)["']""")
_COLUMN = re.compile(rb"<(?:\w+:)?col\b[^>]*>")
_SPAN = re.compile(rb"""\s(min|max)\s*=\s*["'](\d+)["']""")
_MERGED = re.compile(rb"""<(?:\w+:)?mergeCell\b[^>]*?\sref\s*=\s*["']([A-Z0-9:]+)["']""")
_PER_CENT = re.compile(r"(^|[\s,;\[(])%[\])]?$")
_QUOTED = rb"""(?:[^>"'/]|/(?!>)|"[^"]*"|'[^']*')*+"""
_FORMULA = re.compile(
    rb"<(?:\w+:)?c(?=\s)(%b)>\s*+" % _QUOTED
    + rb"<(?:\w+:)?f\b%b(?:/>|>[^<]*+</(?:\w+:)?f\s*>)\s*+(?!<(?:\w+:)?v>[^<])" % _QUOTED
)
_PLACE = re.compile(rb"([A-Z]{1,3})([0-9]{1,7})")


def read_workbook(path: str | os.PathLike[str], progress: Progress | None = None) -> Sheets:
    """The sheets of a workbook; BookError where it cannot be read. ``progress`` is told (rows read, rows in all)."""
    data = guard.load(path)
    package = Package(data, str(path))
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # it warns of styles and extensions that a list does not need
            return Sheets("xlsx", tuple(_grids(package, data, progress)))
    except BookError:
        raise
    except Exception as problem:  # openpyxl raises whatever its parsers meet
        must = f"cannot be read as a list ({type(problem).__name__}: {problem})"
        raise BookError(str(path), must, remedy="Save it anew in a spreadsheet program.") from problem


def _grids(package: Package, data: bytes, progress: Progress | None) -> list[Grid]:
    import openpyxl

    book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True, keep_links=False)
    grids, counted = [], CellCount(package.name, in_force())
    try:
        for sheet in package.sheets:
            if sheet.kind != "worksheet":
                continue
            grids.append(
                _grid(book[sheet.title], sheet.title, sheet.state, package.read(sheet.path), counted, progress)
            )
    finally:
        book.close()
    return grids


def _grid(
    sheet: Any, title: str, state: str, raw: bytes, counted: CellCount, progress: Progress | None
) -> Grid:  # fmt: skip
    sheet.reset_dimensions()  # some programs declare fewer cells than there are
    rows = []
    for number, values in enumerate(_told(sheet.iter_rows(values_only=True), raw, progress), 1):
        if any(value is not None for value in values):
            counted.add(len(values))  # blank ones before a filled one are held too
            rows.append((number, list(values)))
    raw = blanked(raw)
    hidden = [row for row in _ROW.findall(raw) if _HIDDEN.search(row)] if b"hidden" in raw else []
    return Grid(
        title, rows,
        hidden_rows=frozenset(int(found[1]) for row in hidden if (found := _NUMBER.search(row))),
        hidden_columns=frozenset(_hidden_columns(raw)),
        merged=tuple((a.r1, a.c1, a.r2, a.c2)
                     for ref in _MERGED.findall(raw) if (a := area(ref.decode()))),
        unvalued=frozenset(_unvalued(raw)),
        percent=frozenset(_percent(sheet, rows)), state=state,
    )  # fmt: skip


def _unvalued(raw: bytes) -> Iterator[tuple[int, int]]:
    """Cells with a formula and no stored value; an empty text is a value."""
    for attributes in _FORMULA.findall(raw):
        place = _PLACE.fullmatch(attribute(attributes, b"r"))
        if place and attribute(attributes, b"t") != b"str":
            yield int(place[2]), column_number(place[1].decode())


def _told(rows: Iterator[Any], raw: bytes, progress: Progress | None) -> Iterator[Any]:
    """The same rows; whoever waits is told now and then."""
    return rows if progress is None else _telling(rows, len(_ROW.findall(raw)), progress)


def _telling(rows: Iterator[Any], total: int, progress: Progress) -> Iterator[Any]:
    for done, row in enumerate(rows):
        if done % OFTEN == 0:
            progress(done, max(done, total))
        yield row


def _percent(sheet: Any, rows: list[tuple[int, list[Any]]]) -> Iterator[tuple[int, int]]:
    """Cells formatted as per cent, in columns under a heading with that sign; no other columns are looked at.

    Formats cost a second pass over the sheet: one, however many columns, and none without such a heading.
    """
    columns = sorted({place for _, cells in rows[:LOOKED_AT] for place, cell in enumerate(cells)
                      if isinstance(cell, str) and _PER_CENT.search(cell)})  # fmt: skip
    if not columns:
        return
    first = columns[0]
    for row in sheet.iter_rows(min_col=first + 1, max_col=columns[-1] + 1):
        for column in columns:
            cell = row[column - first]
            if isinstance(cell.value, int | float) and "%" in cell.number_format:
                yield cell.row, column + 1


def _hidden_columns(raw: bytes) -> list[int]:
    found: list[int] = []
    for column in _COLUMN.findall(raw):
        if _HIDDEN.search(column):
            ends = {name: int(value) for name, value in _SPAN.findall(column)}
            found += range(ends.get(b"min", 1), min(ends.get(b"max", 1), 16384) + 1)
    return found
