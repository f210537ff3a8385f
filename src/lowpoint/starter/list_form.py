"""The blank list for ``lowpoint survey``: headings with notes, dropdowns, an example, vendors' tables, help.

The sheet List is empty and yours. The sheet Example shows filled rows under the same headings; a survey leaves it
alone, and so it does with Help and Words.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby
from typing import Any

from openpyxl import Workbook
from openpyxl.comments import Comment
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation

from lowpoint.physics.names import known_names
from lowpoint.physics.typical import styles
from lowpoint.starter.list_example import TABLE, example_rows, table_rows
from lowpoint.starter.list_units import heading_of
from lowpoint.starter.notes import AUTHOR
from lowpoint.styling import style
from lowpoint.styling.packing import packed
from lowpoint.survey.fields import FIELDS, GROUPS, TABLE_FIELDS, ListField

__all__ = ["ROWS", "list_bytes"]

BANDS, HEADINGS, ROWS = 4, 5, 2000
"""Rows of the bands and the headings; rows down to which cells offer their words."""
CASES = ("start-up", "minimum", "normal", "maximum", "upset")
_WIDE = {"tag": 14, "service": 26, "fluid": 18, "style": 34, "direction": 14, "table": 14, "characteristic": 16}


def list_bytes(*, us: bool = False) -> bytes:
    """The book as bytes, the same on every run."""
    system = "us" if us else "metric"
    book = Workbook()
    sheet = book.active
    sheet.title = "List"
    _list(sheet, system, "Items and operating cases", ())
    _list(book.create_sheet("Example"), system, "Example: items of Kestrel Bay (a survey leaves this sheet alone)",
          example_rows(us=us))  # fmt: skip
    _tables(book.create_sheet("Tables"), system)
    _help(book.create_sheet("Help"), system)
    _words(book.create_sheet("Words"))
    return packed(book)


def _list(sheet: Any, system: str, title: str, rows: Sequence[dict[str, Any]]) -> None:
    style.title(sheet, title, "One row an item and case. What belongs to the item needs to stand in one of its rows "
                "only. Leave blank what is not known: nothing is assumed without a word.")  # fmt: skip
    _headings(sheet, FIELDS, system, HEADINGS)
    for place, field in enumerate(FIELDS, 1):
        sheet.cell(HEADINGS, place).comment = _note(field)
    _bands(sheet)
    for number, row in enumerate(rows, HEADINGS + 1):
        for place, field in enumerate(FIELDS, 1):
            value = row.get(field.key)
            if value is not None:
                cell = sheet.cell(number, place, value)
                cell.font, cell.fill, cell.border = style.INPUT, style.fill("sand"), style.LINE_BELOW
    _dropdowns(sheet)
    sheet.freeze_panes = sheet.cell(HEADINGS + 1, 3)
    style.print_setup(sheet, wide=3, rows=f"{HEADINGS}:{HEADINGS}", columns="A:B")


def _headings(sheet: Any, fields: Sequence[ListField], system: str, row: int) -> None:
    for place, field in enumerate(fields, 1):
        cell = sheet.cell(row, place, heading_of(field, system))
        style.heading(cell)
        sheet.column_dimensions[get_column_letter(place)].width = _WIDE.get(field.key, 12)
    sheet.row_dimensions[row].height = 48


def _bands(sheet: Any) -> None:
    place = 1
    for group, members in groupby(FIELDS, key=lambda field: field.group):
        count = len(list(members))
        for column in range(place, place + count):
            sheet.cell(BANDS, column).fill = style.fill("mist")
        cell = sheet.cell(BANDS, place, GROUPS[group])
        cell.font, cell.alignment = style.BAND, style.LEFT
        place += count


def _note(field: ListField) -> Comment:
    lines = [field.help]
    if field.words:
        lines.append("One of: " + ", ".join(field.words) + ".")
    if field.asks:
        lines.append(f"Or {field.asks}.")
    if field.scope == "item" and field.what != "text":
        lines.append("Of the item: one of its rows is enough.")
    text = "\n".join(lines)
    return Comment(text, AUTHOR, width=320, height=30 + 17 * sum(1 + len(line) // 45 for line in lines))


def _dropdowns(sheet: Any) -> None:
    named = {"case": f'"{",".join(CASES)}"', "fluid": f"Words!$A$2:$A${1 + len(known_names())}",
             "style": f"Words!$B$2:$B${1 + len(_styles())}"}  # fmt: skip
    for place, field in enumerate(FIELDS, 1):
        source = named.get(field.key) or (f'"{",".join(field.words)}"' if field.words else "")
        if not source:
            continue
        choice = DataValidation("list", formula1=source, allow_blank=True, showErrorMessage=field.what == "word")
        choice.error, choice.errorTitle = f"One of: {', '.join(field.words)}", field.heading
        letter = get_column_letter(place)
        choice.add(f"{letter}{HEADINGS + 1}:{letter}{ROWS}")
        sheet.add_data_validation(choice)


def _tables(sheet: Any, system: str) -> None:
    style.title(sheet, "Vendors' tables by opening", f"Name a table in column Table of the list. '{TABLE}' is an "
                "example. Limits here are in the upstream form. Leave out what the vendor does not give.")  # fmt: skip
    _headings(sheet, TABLE_FIELDS, system, HEADINGS)
    for number, row in enumerate(table_rows(), HEADINGS + 1):
        for place, value in enumerate(row, 1):
            cell = sheet.cell(number, place, value)
            cell.font, cell.fill, cell.border = style.INPUT, style.fill("sand"), style.LINE_BELOW
    sheet.freeze_panes = sheet.cell(HEADINGS + 1, 1)


_HELP = (
    "Columns may stand in any order, and those that are not needed may go. The unit stands in the heading: any unit of "
    "the trade will do, such as p1 [psig], Flow, US gal/min, or Temperature (K).",
    "Gauge pressures need the site's atmosphere: a column Site elevation or Atmosphere, a line 'Site elevation [m]' "
    "with its number above the table, or --elevation on the command line.",
    "The outlet may be given as a place instead of p2; p2 then follows from the pressure there, the rise and the "
    "friction, and is shown.",
    "A liquid that is known by name needs no pv, pc and density; what is given goes before what is computed.",
    "Without an incipient limit no case is ever called clear.",
    "See how a list is understood with 'lowpoint survey LIST --show'.",
)


def _help(sheet: Any, system: str) -> None:
    style.title(sheet, "Help", "What each column means, and what else it may be called.")
    row = 4
    for text in _HELP:
        sheet.cell(row, 1, text)
        row += 1
    row += 1
    for place, (text, width) in enumerate((("Column", 26), ("Other names", 60), ("Meaning", 90)), 1):
        style.heading(sheet.cell(row, place, text))
        sheet.column_dimensions[get_column_letter(place)].width = width
    for field in FIELDS:
        row += 1
        others = ", ".join((*field.others, *(name for name, _ in field.inherent)))
        for place, text in enumerate((heading_of(field, system), others, field.help), 1):
            cell = sheet.cell(row, place, text)
            cell.alignment, cell.border = style.TOP, style.LINE_BELOW
    style.print_setup(sheet)


def _styles() -> list[str]:
    return [name.partition("  (")[0] for name in styles()]


def _words(sheet: Any) -> None:
    for place, (text, words) in enumerate((("Known liquids", known_names()), ("Known styles", _styles())), 1):
        style.heading(sheet.cell(1, place, text))
        sheet.column_dimensions[get_column_letter(place)].width = 44
        for number, word in enumerate(words, 2):
            sheet.cell(number, place, word)
