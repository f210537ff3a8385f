"""The sheet Tables: vendors' tables by opening as the survey used them, ready to be read again beside the results."""

from __future__ import annotations

from typing import Any

from openpyxl.utils import get_column_letter

from lowpoint.styling import style
from lowpoint.survey.fields import TABLE_FIELDS
from lowpoint.survey.model import Survey, TravelTable
from lowpoint.survey.output.cells import put
from lowpoint.units import KV

__all__ = ["TITLE", "write"]

TITLE = "Tables"
HEADINGS = 4
UNITS = {"travel": (" [%]", 0.01), "coefficient": (" [Kv]", KV)}
"""Unit of a column, as its heading has it, and in SI."""


def write(book: Any, survey: Survey) -> None:
    """Add the sheet, where the list came with tables."""
    tables = list(survey.cases.tables.values())
    if not tables:
        return
    sheet = book.create_sheet(TITLE)
    style.title(sheet, "Vendors' tables by opening", "As the list gave them; limits in upstream form.")
    for column, field in enumerate(TABLE_FIELDS, 1):
        style.heading(put(sheet, HEADINGS, column, field.heading + UNITS.get(field.key, ("", 1.0))[0]))
        sheet.column_dimensions[get_column_letter(column)].width = 20.0 if column == 1 else 12.0
    row = HEADINGS
    for table in tables:
        for place in range(len(table.travel)):
            row += 1
            _row(sheet, row, table, place)
    sheet.freeze_panes = f"A{HEADINGS + 1}"
    style.print_setup(sheet, rows=f"{HEADINGS}:{HEADINGS}")


def _row(sheet: Any, row: int, table: TravelTable, place: int) -> None:
    put(sheet, row, 1, table.name)
    for column, field in enumerate(TABLE_FIELDS[1:], 2):
        values = getattr(table, field.key)
        factor = UNITS.get(field.key, ("", 1.0))[1]
        put(sheet, row, column, None if values is None else float(values[place]) / factor)
