"""The whole output workbook, sheet by sheet."""

from __future__ import annotations

from datetime import date
from pathlib import Path
from typing import Any

import openpyxl

from lowpoint.styling.packing import Filler
from lowpoint.styling.strings import Strings, clean
from lowpoint.survey.model import Survey
from lowpoint.survey.output import assumptions, item_page, results, summary, vendor_tables
from lowpoint.survey.output.naming import sheet_names
from lowpoint.survey.result_columns import RESULT_COLUMNS, result_values

__all__ = ["assembled"]

FIXED = ("Summary", vendor_tables.TITLE, "Assumptions")


def assembled(
    survey: Survey, system: str, pages: int, today: date, strings: Strings
) -> tuple[Any, dict[str, Filler]]:  # fmt: skip
    """An openpyxl workbook, and what writes the rows of its long sheets, by their titles.

    The texts of these rows go to ``strings``.
    """
    book = openpyxl.Workbook()
    book.remove(book.worksheets[0])
    columns = [(column, result_values(column, survey, system)) for column in RESULT_COLUMNS]
    values = {column.key: cells for column, cells in columns}
    lists = survey.reading.lists
    names = sheet_names(["Results"] * len(lists), FIXED)
    failing = summary.failing(survey)[: max(pages, 0)]
    page_names = sheet_names([item.tag for item in failing], (*FIXED, *names))
    summary.write(book, survey, {item.tag: name for item, name in zip(failing, page_names, strict=True)}, pages)
    fillers: dict[str, Filler] = {}
    start = 0
    for table, name in zip(lists, names, strict=True):
        fillers[name] = results.write(book, survey, table, start, name, columns, system, strings)
        start += len(table.rows)
    for item, name in zip(failing, page_names, strict=True):
        item_page.write(book, survey, item, name, values, system)
    vendor_tables.write(book, survey)
    assumptions.write(book, survey, system, today)
    book.properties.title = f"Survey of {clean(Path(survey.reading.path).name)}"
    return book, fillers
