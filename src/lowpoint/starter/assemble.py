"""The whole book, sheet by sheet."""

from __future__ import annotations

from typing import Any

import openpyxl

from lowpoint.starter import (
    chart_sheet,
    items_sheet,
    list_sheet,
    long_list_sheet,
    readme_sheet,
    site_sheets,
    summary_sheet,
)
from lowpoint.starter.plant import Plant

__all__ = ["assembled"]


def assembled(plant: Plant) -> Any:
    """An openpyxl workbook of a plant's valves."""
    book = openpyxl.Workbook()
    book.remove(book.worksheets[0])
    readme_sheet.write(book, plant)
    summary_sheet.write(book, plant)
    items_sheet.write(book, plant)
    list_sheet.write(book, plant)
    chart_sheet.write(book, plant)
    if plant.readings is not None:
        long_list_sheet.write(book, plant, plant.readings)
    site_sheets.write_valves(book, plant)
    site_sheets.write_site(book, plant)
    site_sheets.write_words(book, plant)
    book.properties.title = f"{plant.name}: control valves in liquid service"
    book.active = book.sheetnames.index("Summary")
    return book
