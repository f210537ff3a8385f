"""Workbooks as grids: values by openpyxl, and what its fast way does not tell by a scan of the sheets' bytes."""

from __future__ import annotations

import io
import os
import re
import warnings
from typing import Any

from lowpoint.book import guard
from lowpoint.book.package import Package
from lowpoint.book.refs import area, column_number
from lowpoint.errors import BookError
from lowpoint.survey.grids import Grid, Sheets

__all__ = ["read_workbook"]

_ROW = re.compile(rb"<(?:\w+:)?row\b[^>]*>")
_HIDDEN = re.compile(rb"""\shidden\s*=\s*["'](?:1|true)["']""")
_NUMBER = re.compile(rb"""\sr\s*=\s*["'](\d+)["']""")
_COLUMN = re.compile(rb"<(?:\w+:)?col\b[^>]*>")
_SPAN = re.compile(rb"""\s(min|max)\s*=\s*["'](\d+)["']""")
_MERGED = re.compile(rb"""<(?:\w+:)?mergeCell\b[^>]*?\sref\s*=\s*["']([A-Z0-9:]+)["']""")
_FORMULA = re.compile(
    rb"""<(?:\w+:)?c\b[^>]*?\sr\s*=\s*["']([A-Z]+)(\d+)["'][^>]*>\s*"""
    rb"""<(?:\w+:)?f\b(?:[^>]*/>|[^>]*>[^<]*</(?:\w+:)?f\s*>)\s*(?!<(?:\w+:)?v>[^<])""",
    re.DOTALL,
)


def read_workbook(path: str | os.PathLike[str]) -> Sheets:
    """The sheets of a workbook; BookError where it cannot be read."""
    data = guard.load(path)
    package = Package(data, str(path))
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # it warns of styles and extensions that a list does not need
            return Sheets("xlsx", tuple(_grids(package, data)))
    except BookError:
        raise
    except Exception as problem:  # openpyxl raises whatever its parsers meet
        must = f"cannot be read as a list ({type(problem).__name__}: {problem})"
        raise BookError(str(path), must, remedy="Save it anew in a spreadsheet program.") from problem


def _grids(package: Package, data: bytes) -> list[Grid]:
    import openpyxl

    book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True, keep_links=False)
    grids = []
    try:
        for sheet in package.sheets:
            if sheet.kind != "worksheet":
                continue
            grids.append(_grid(book[sheet.title], sheet.title, sheet.state, package.read(sheet.path)))
    finally:
        book.close()
    return grids


def _grid(sheet: Any, title: str, state: str, raw: bytes) -> Grid:
    sheet.reset_dimensions()  # some programs declare fewer cells than there are
    rows = [(number, list(values)) for number, values in enumerate(sheet.iter_rows(values_only=True), 1)
            if any(value is not None for value in values)]  # fmt: skip
    hidden = [row for row in _ROW.findall(raw) if _HIDDEN.search(row)] if b"hidden" in raw else []
    return Grid(
        title, rows,
        hidden_rows=frozenset(int(found[1]) for row in hidden if (found := _NUMBER.search(row))),
        hidden_columns=frozenset(_hidden_columns(raw)),
        merged=tuple((a.r1, a.c1, a.r2, a.c2)
                     for ref in _MERGED.findall(raw) if (a := area(ref.decode()))),
        unvalued=frozenset((int(row), column_number(letters.decode())) for letters, row in _FORMULA.findall(raw)),
        state=state,
    )  # fmt: skip


def _hidden_columns(raw: bytes) -> list[int]:
    found: list[int] = []
    for column in _COLUMN.findall(raw):
        if _HIDDEN.search(column):
            ends = {name: int(value) for name, value in _SPAN.findall(column)}
            found += range(ends.get(b"min", 1), min(ends.get(b"max", 1), 16384) + 1)
    return found
