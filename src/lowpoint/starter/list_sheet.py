"""The sheet List: one row an item and case, inputs as plain values, LP_ formulas beside them."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import groupby
from typing import Any

from openpyxl.styles import Border, Side
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation

from lowpoint.starter.columns import COLUMNS, GROUPS, Column, for_estimates, for_tables
from lowpoint.starter.frame import FIRST, HEADINGS, LAST, Head, name_column, put_headings, spelled, words_of_set
from lowpoint.starter.notes import note, unit_label
from lowpoint.starter.plant import Case, Item, Plant
from lowpoint.styling import style

__all__ = ["LETTERS", "TITLE", "inputs_of", "write"]

TITLE = "List"
LETTERS = {column.key: get_column_letter(place) for place, column in enumerate(COLUMNS, start=1)}
"""The column of the sheet by key."""
_OF_ITEM = (
    "area", "service", "fluid", "salinity", "p_unit", "style", "direction", "valve_size", "pipe_in", "pipe_out",
    "rated", "characteristic", "rangeability", "fl_basis", "fd", "limits_basis", "keep",
)  # fmt: skip
"""Repeated in every row of an item, so that each row is complete; shown faint from its second row on."""


def inputs_of(item: Item, case: Case, system: str) -> dict[str, Any]:
    """The cells of one row by column key: what is typed, and the formulas that a table or an estimate puts there."""
    trim, table = item.trim, item.table
    incipient, constant, damage = (None, None, None) if item.estimate else trim.limits
    cells: dict[str, Any] = {
        "tag": item.tag, "case": case.name, "area": item.area.name, "service": item.service,
        "fluid": item.fluid, "salinity": item.salinity, "t": case.t, "flow": case.flow,
        "p1_given": case.p1, "p2_given": case.p2, "p_unit": item.unit or words_of_set(system)["gauge"],
        "style": trim.style, "direction": trim.direction,
        "valve_size": item.sizes[0], "pipe_in": item.sizes[1], "pipe_out": item.sizes[2], "rated": item.rated,
        "characteristic": f"table {table.name}" if table else trim.characteristic,
        "rangeability": None if table else trim.rangeability, "fl": trim.fl, "fl_basis": trim.fl_basis, "fd": trim.fd,
        "incipient_ref": incipient, "constant_ref": constant, "damage_ref": damage,
        "limits_basis": "estimated" if item.estimate else trim.basis,
        "size_ref": trim.size_ref, "head_ref": trim.head_ref,
        "size_exponent": trim.exponents[0], "head_exponent": trim.exponents[1],
        "keep": item.keep, "remark": case.remark,
    }  # fmt: skip
    if table:
        cells |= for_tables(table.name)
    if item.estimate:
        cells |= for_estimates() | {"size_exponent": 0.0, "head_exponent": 0.0}
    return cells | dict(case.instead)


def write(book: Any, plant: Plant) -> None:
    """Add the sheet to a book whose sheets Site, Valves and Words give the names that its formulas use."""
    sheet = book.create_sheet(TITLE)
    style.title(sheet, f"{plant.name}: control valves in liquid service",
                "One row an item and case. Blue on sand: type here. Black: computed. Pressures are absolute where not "
                "said otherwise; every index and limit is in the upstream form (p1-pv)/(p1-p2).")  # fmt: skip
    _write_headings(sheet, plant.system)
    last = _write_rows(sheet, plant)
    _mark(sheet, last)
    _choose_from_lists(sheet)
    for place, key in enumerate(LETTERS, start=1):
        name_column(book, f"List_{key}", TITLE, place, LAST)
    sheet.freeze_panes = f"{LETTERS['area']}{FIRST}"
    sheet.auto_filter.ref = f"A{HEADINGS}:{LETTERS['unanswered']}{last}"
    sheet.print_area = f"A{HEADINGS - 1}:{LETTERS['remark']}{last}"
    style.print_setup(sheet, wide=4, rows=f"{HEADINGS - 1}:{HEADINGS}", columns="A:D",
                      paper=8 if plant.system == "metric" else 3)  # fmt: skip


def _write_headings(sheet: Any, system: str) -> None:
    heads = []
    for column in COLUMNS:
        unit = unit_label(column.dimension, system)
        heads.append(Head(f"{column.heading}\n{unit}" if unit else column.heading, column.width))
    put_headings(sheet, HEADINGS, heads)
    sheet.row_dimensions[HEADINGS].height = 52
    for place, column in enumerate(COLUMNS, start=1):
        sheet.cell(HEADINGS, place).comment = note(column, system)
    start = 1
    for group, members in groupby(COLUMNS, key=lambda column: column.group):
        count = len(list(members))
        for place in range(start, start + count):
            band = sheet.cell(HEADINGS - 1, place)
            band.fill, band.font, band.alignment = style.fill("mist"), style.BAND, style.LEFT
        sheet.cell(HEADINGS - 1, start, GROUPS[group])
        start += count


def _rows(plant: Plant) -> Iterator[tuple[Item, Case]]:
    for item in plant.items:
        for case in item.cases:
            yield item, case


def _write_rows(sheet: Any, plant: Plant) -> int:
    row = FIRST - 1
    for row, (item, case) in enumerate(_rows(plant), start=FIRST):
        typed = inputs_of(item, case, plant.system)
        places = {key: f"{letter}{row}" for key, letter in LETTERS.items()} | words_of_set(plant.system)
        for place, column in enumerate(COLUMNS, start=1):
            value = typed.get(column.key, column.formula or None)
            if isinstance(value, str) and value.startswith("="):
                value = spelled(value, places, plant.system)
            _write_cell(sheet.cell(row, place), column, value, plant.system)
    return row


def _write_cell(cell: Any, column: Column, value: Any, system: str) -> None:
    cell.value = value
    computed = isinstance(value, str) and value.startswith("=")
    fmt = style.FORMATS[system][column.fmt]
    # A text format would make a program show a formula instead of its value.
    cell.number_format = "General" if computed and fmt == "@" else fmt
    cell.font = style.PLAIN if computed else style.INPUT
    if column.is_input:
        cell.fill = style.fill("sand")
    if column.fmt in ("text", "tag", "verdict"):
        cell.alignment = style.INDENTED


def _mark(sheet: Any, last: int) -> None:
    """Conditional formats: findings, the first row of an item, what it repeats."""
    add = sheet.conditional_formatting.add
    everything = f"A{FIRST}:{LETTERS['unanswered']}{last}"
    for key in ("verdict", "regime"):
        cells = f"{LETTERS[key]}{FIRST}"
        style.mark_verdicts(sheet, f"{cells}:{LETTERS[key]}{last}", cells)
    style.mark_word(sheet, f"{LETTERS['kept']}{FIRST}:{LETTERS['kept']}{last}", f"{LETTERS['kept']}{FIRST}", "no")
    margin = f"{LETTERS['margin']}{FIRST}"
    add(f"{margin}:{LETTERS['margin']}{last}",
        style.rule(f"AND(ISNUMBER({margin}),{margin}<=0)", ink="bad", bold=True))  # fmt: skip
    style.mark_errors(sheet, everything, f"A{FIRST}")
    for key in _OF_ITEM:
        letter = LETTERS[key]
        again = f"AND($A{FIRST}=$A{FIRST - 1},{letter}{FIRST}={letter}{FIRST - 1})"
        add(f"{letter}{FIRST}:{letter}{last}", style.rule(again, ink="quiet"))
    # Last, since some programs apply only the first rule that is true.
    first_of_item = style.rule(f"$A{FIRST}<>$A{FIRST - 1}")
    first_of_item.dxf.border = Border(top=Side(style="thin", color=style.COLOURS["mid"]))
    add(everything, first_of_item)


def _choose_from_lists(sheet: Any) -> None:
    """Data validation that proposes words and lets others pass after a warning: a list cannot know every alias."""
    for column in COLUMNS:
        if not column.words:
            continue
        choice = DataValidation(
            type="list", formula1=f"Words_{column.words}", allow_blank=True, errorStyle="warning",
            showErrorMessage=True, errorTitle=column.heading,
            error=f"Not in the list {column.words.replace('_', ' ')} of sheet Words. Keep it all the same?",
        )  # fmt: skip
        sheet.add_data_validation(choice)
        letter = LETTERS[column.key]
        choice.add(f"{letter}{FIRST}:{letter}{LAST}")
