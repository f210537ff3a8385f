"""The data sheet to begin with: one item, its operating cases side by side, as ``lowpoint audit`` reads it.

The sheet Data sheet shows an item of Kestrel Bay to type over; Blank is the same form with nothing in it.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from openpyxl import Workbook
from openpyxl.comments import Comment
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation

from lowpoint.audit.vocabulary import BY_KEY
from lowpoint.physics.names import known_names
from lowpoint.physics.typical import styles
from lowpoint.physics.unitnames import meaning
from lowpoint.starter.datasheet_lines import CASES, EXAMPLE, GROUPS, LINES, SheetLine
from lowpoint.starter.notes import AUTHOR, PRETTY
from lowpoint.styling import style
from lowpoint.styling.packing import packed
from lowpoint.survey.fields import FIELDS

__all__ = ["datasheet_bytes"]

LABEL, SYMBOL, UNIT, FIRST = 1, 2, 3, 4
LAST = FIRST + len(CASES) - 1
_WIDTHS = {LABEL: 38, SYMBOL: 9, UNIT: 12, **{FIRST + place: 16 for place in range(len(CASES))}}
_HELP = (
    "Type over the sheet Data sheet, or fill in Blank; clear what is not known: nothing is assumed without a word.",
    "Units may be changed in column Unit: any unit of the trade will do. A gauge pressure says so (bar g, psig), and "
    "needs the atmospheric pressure of the site.",
    "The factor FL is that of the opening in each case, not the one at rated travel, where the vendor gives both.",
    "The index is in the upstream form, as its label says; its limits are compared in the same form.",
    "A case that is not needed stays empty, and a heading of a case may be changed.",
    "What was read is shown by 'lowpoint audit FILE --show' before anything is computed.",
    "Lowpoint supports a qualified engineer: vendor test data, site rules, local codes and licensed practice come "
    "first.",
)


def datasheet_bytes(*, us: bool = False) -> bytes:
    """The book as bytes, the same on every run."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Data sheet"
    _form(sheet, us, filled=True)
    _form(book.create_sheet("Blank"), us, filled=False)
    _help(book.create_sheet("Help"))
    _words(book.create_sheet("Words"))
    book.properties.title = "Data sheet of a control valve"
    return packed(book)


def _form(sheet: Any, us: bool, *, filled: bool) -> None:
    what = "example: an item of Kestrel Bay, to type over" if filled else "to fill in; clear what is not known"
    style.title(sheet, "Control valve for liquid: data sheet", what)
    for column, width in _WIDTHS.items():
        sheet.column_dimensions[get_column_letter(column)].width = width
    row = 4
    for group, heading in GROUPS.items():
        lines = [line for line in LINES if line.group == group]
        _band(sheet, row, heading, cases=lines[0].by_case)
        for below, line in enumerate(lines, 1):
            _line(sheet, row + below, line, us, filled=filled)
        row += len(lines) + 2
    sheet.freeze_panes = "A4"
    style.print_setup(sheet)
    sheet.page_setup.orientation, sheet.page_setup.fitToHeight = "portrait", 1


def _band(sheet: Any, row: int, heading: str, *, cases: bool) -> None:
    texts = {LABEL: heading, SYMBOL: "Symbol", UNIT: "Unit", FIRST: "Value"}
    if cases:
        texts |= {FIRST + place: case for place, case in enumerate(CASES)}
    for column in range(LABEL, LAST + 1):
        cell = sheet.cell(row, column, texts.get(column))
        style.heading(cell)
    sheet.cell(row, LABEL).alignment = style.LEFT


def _line(sheet: Any, row: int, line: SheetLine, us: bool, *, filled: bool) -> None:
    unit = line.unit[us]
    label = sheet.cell(row, LABEL, line.label)
    label.comment = _note(line)
    sheet.cell(row, SYMBOL, line.symbol or None)
    sheet.cell(row, UNIT, PRETTY.get(unit, unit) or None)
    values = _shown(line, us) if filled else ()
    for place in range(len(CASES) if line.by_case else 1):
        cell = sheet.cell(row, FIRST + place, values[place] if place < len(values) else None)
        cell.fill, cell.font = style.fill("sand"), style.INPUT
        decimals = line.decimals[us]
        cell.number_format = "@" if line.words else f"0.{'0' * decimals}" if decimals else "General"
        _choices(sheet, line, cell.coordinate)
    for column in range(LABEL, LAST + 1):
        cell = sheet.cell(row, column)
        cell.border = style.LINE_BELOW
        if column < FIRST:
            cell.font = style.PLAIN
        cell.alignment = style.LEFT if column < FIRST or isinstance(cell.value, str) else style.RIGHT


def _note(line: SheetLine) -> Comment:
    term = BY_KEY[line.key]
    text = f"{term.meaning[:1].upper()}{term.meaning[1:]}."
    if line.group == "results":
        text += "\nThe audit computes it again from the conditions above."
    return Comment(text, AUTHOR, width=300, height=30 + 17 * (1 + len(text) // 42))


def _shown(line: SheetLine, us: bool) -> tuple[float | str, ...]:
    """The example's values as the form shows them."""
    given = EXAMPLE.get(line.key, ())
    if isinstance(given, str):
        return (given,)
    turned = _to_us(line) if us else float
    return tuple(round(turned(value), line.decimals[us]) for value in given)


def _to_us(line: SheetLine) -> Callable[[float], float]:
    """From the metric unit of a line to its customary one."""
    if not line.unit[0] or line.unit[0] == line.unit[1]:
        return float
    one, other = (meaning(unit) for unit in line.unit)
    return lambda value: (value + one.zero) * one.factor / other.factor - other.zero


def _choices(sheet: Any, line: SheetLine, cell: str) -> None:
    if not line.words:
        return
    source = {"fluid": f"Words!$A$2:$A${1 + len(known_names())}", "style": f"Words!$B$2:$B${1 + len(_styles())}"}
    words = {field.key: field.words for field in FIELDS}.get(line.words, ())
    offered = source.get(line.words) or f'"{",".join(words)}"'
    choice = DataValidation("list", formula1=offered, allow_blank=True, showErrorMessage=False)
    choice.add(cell)
    sheet.add_data_validation(choice)


def _help(sheet: Any) -> None:
    style.title(sheet, "Help", "How the data sheet is filled in.")
    sheet.column_dimensions["A"].width = 120
    for row, text in enumerate(_HELP, 4):
        cell = sheet.cell(row, 1, text)
        cell.alignment, cell.font = style.TOP, style.PLAIN
    style.print_setup(sheet)


def _styles() -> list[str]:
    return [name.partition("  (")[0] for name in styles()]


def _words(sheet: Any) -> None:
    for place, (text, words) in enumerate((("Known liquids", known_names()), ("Known styles", _styles())), 1):
        style.heading(sheet.cell(1, place, text))
        sheet.column_dimensions[get_column_letter(place)].width = 44
        for number, word in enumerate(words, 2):
            sheet.cell(number, place, word)
