"""Surveys written as workbooks, for the tests of the output."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import openpyxl

from lowpoint.survey import Survey, survey_list
from lowpoint.survey.book import book_bytes
from survey_lists import GOOD, HEADINGS, kestrel_rows, write_xlsx

__all__ = ["DAY", "bay", "listed", "opened", "sheet_rows", "written"]

DAY = date(2026, 3, 14)


@cache
def bay() -> Survey:
    """The items of Kestrel Bay, surveyed."""
    with TemporaryDirectory() as folder:
        return survey_list(write_xlsx(Path(folder) / "bay.xlsx", *kestrel_rows()))


def listed(folder: Path, *changes: dict[str, Any], headings: Sequence[str] = HEADINGS) -> Survey:
    """Rows like the good one, each with changes, surveyed."""
    rows = []
    for number, change in enumerate(changes):
        row = dict(zip(HEADINGS, GOOD, strict=True)) | {"Case": f"case {number}"} | change
        rows.append([row.get(heading) for heading in headings])
    return survey_list(write_xlsx(folder / "list.xlsx", headings, rows))


@cache
def _bay_bytes(**options: Any) -> bytes:
    return book_bytes(bay(), today=DAY, **options)


def written(survey: Survey, path: Path, **options: Any) -> Path:
    path.write_bytes(_bay_bytes(**options) if survey is bay() else book_bytes(survey, today=DAY, **options))
    return path


def opened(survey: Survey, folder: Path, **options: Any) -> Any:
    """The book of a survey as openpyxl reads it."""
    return openpyxl.load_workbook(written(survey, folder / "out.xlsx", **options))


def sheet_rows(sheet: Any, first: str) -> tuple[list[Any], list[list[Any]]]:
    """The headings of a sheet, in the row that holds ``first`` in some cell, and the rows below them."""
    rows = [list(row) for row in sheet.iter_rows(values_only=True)]
    at = next(place for place, row in enumerate(rows) if first in row)
    return rows[at], rows[at + 1 :]
