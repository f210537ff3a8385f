"""One sheet a duty: inputs, chart, plates of equal index, other case marched, design of equal margin, cautions."""

from __future__ import annotations

from typing import Any

from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.formula import ArrayFormula
from openpyxl.worksheet.pagebreak import Break

from lowpoint.starter import plates_chart, plates_march, plates_margin
from lowpoint.starter.frame import Head, put_headings
from lowpoint.starter.plates_columns import (
    CASES,
    DESIGN,
    FLASHED,
    GIVEN,
    MOST,
    OTHER,
    WHY_BORE,
    WHY_FLOW,
    WHY_LIMIT,
    WHY_THICKNESS,
)
from lowpoint.starter.plates_data import KEEP, PLANT, Duty
from lowpoint.starter.plates_page import FORMATS, WIDE, Page, letters_of
from lowpoint.styling import style

__all__ = ["write"]

_CASES_ROW = 6
_TABLE_ROW = 33
"""Row of the headings of the first table; the chart stands beside the inputs above it."""
_FIELDS = {"case": "name"}
"""Fields of a flow case that are not named as their row."""


def write(book: Any, duty: Duty) -> Page:
    """Add the sheet of a duty; gives where its cells are."""
    sheet = book.create_sheet(duty.sheet)
    words = "Blue on sand: type here. Black: computed. Pressures are absolute; index and limits in upstream form "
    words += "(p1-pv)/(p1-p2). Thin plates, bevelled on the outlet side."
    style.title(sheet, f"{PLANT} {duty.tag}: {duty.title}", words)
    page = Page(sheet, duty)
    _typed(page)
    row = _design(page)
    sheet.row_breaks.append(Break(id=row - 1))
    row = page.band(row, "What practice does")
    for line in duty.advice:
        row = page.text(row, line)
    row = plates_march.write(page, row + 1)
    _computed(page)
    row = plates_margin.write(page, row + 1)
    sheet.row_breaks.append(Break(id=row - 1))
    row = _why(page, row)
    printed = row
    last = plates_chart.write(page, row + 1)
    style.mark_errors(sheet, f"A{_CASES_ROW}:{get_column_letter(WIDE)}{last}", f"A{_CASES_ROW}")
    sheet.column_dimensions["A"].width = 40
    sheet.freeze_panes = "B4"
    sheet.print_area = f"A1:{get_column_letter(WIDE)}{printed - 1}"
    style.print_setup(sheet)
    return page


def _typed(page: Page) -> None:
    """Labels and typed cells of both blocks of inputs; the computed ones of them get their places."""
    duty = page.duty
    page.band(4, "Cases", 3)
    put_headings(page.sheet, 5, [Head("", 40), Head("Design case", 12), Head("Other case", 12)])
    cases = [column for column in CASES if column.key != "vessel" or duty.design.vessel is not None]
    for row, column in enumerate(cases, start=_CASES_ROW):
        page.label(row, column)
        for letter, flow, tail in (("B", duty.design, ""), ("C", duty.other, "_other")):
            page.places[column.key + tail] = f"${letter}${row}"
            if not column.formula:
                value = getattr(flow, _FIELDS.get(column.key, column.key))
                page.put(row, 2 + bool(tail), value, column.fmt, typed=value is not None)
    for cell in page.sheet[_CASES_ROW][1:3]:
        cell.alignment = style.CENTRE
    page.sheet.row_dimensions[_CASES_ROW].height = 40
    end = "p2" if duty.design.vessel is None else "vessel"
    page.places |= {"end": page.places[end], "end_other": page.places[f"{end}_other"]}
    row = page.band(_CASES_ROW + len(cases) + 1, "Plates and liquid", 3)
    typed = {"fluid": duty.fluid, "salinity": duty.salinity, "pipe": duty.pipe, "edge": duty.edge,
             "target": duty.target, "keep": KEEP, "support": duty.support, "stress": duty.stress}  # fmt: skip
    for at, column in enumerate(GIVEN, start=row):
        page.label(at, column)
        page.places[column.key] = f"$B${at}"
        if not column.formula:
            page.put(at, 2, typed[column.key], column.fmt, typed=True)
    row += len(GIVEN)
    page.put(row, 1, "Room in the tables")
    page.verdict(row, page.formula(f'=IF({{plates}}>{MOST},"no: more than {MOST} plates","enough")'), "no")
    choice = DataValidation(type="list", formula1='"incipient,constant,choked"', showErrorMessage=True,
                            error="The limit must be incipient, constant or choked.")  # fmt: skip
    page.sheet.add_data_validation(choice)
    choice.add(page.places["keep"].replace("$", ""))


def _computed(page: Page) -> None:
    """The computed cells of the inputs, once every place is known."""
    for column in (*CASES, *GIVEN):
        for tail in ("", "_other"):
            place = page.places.get(column.key + tail)
            if place and column.formula:
                own = {c.key: page.places[c.key + tail] for c in CASES if c.key + tail in page.places}
                cell = page.sheet[place.replace("$", "")]
                page.put(cell.row, cell.column, page.formula(column.formula, own), column.fmt)


def _design(page: Page) -> int:
    """Plates of equal index by LP_STAGES, in the design case; the plate that flashes, if any, below them."""
    page.band(_TABLE_ROW - 1, "Plates of equal index, design case")
    inlet = page.headings(_TABLE_ROW, DESIGN)
    working = _staged(page, inlet)
    page.design_first = inlet + 1
    page.put(inlet, 1, "before plate 1")
    page.put(inlet, 2, f"=${working}{inlet}", "pressure")
    for number, row in enumerate(range(inlet + 1, inlet + 1 + MOST), start=1):
        page.put(row, 1, page.formula(f'=IF({number}>{{plates}},"",{number})'), "whole")
        page.row(DESIGN, row, {"staged": f"${working}{row}", "before": f"$B{row - 1}"})
    row = inlet + MOST + 1
    page.mark(DESIGN, inlet + 1, row)
    if page.duty.design.vessel is not None:
        page.flash_row = row
        page.put(row, 1, "plate at the flash vessel")
        page.row(DESIGN, row, {"before": page.places["p2"], "staged": page.places["vessel"]}, guard=False)
        for at, column in enumerate(FLASHED, start=row + 1):
            page.label(at, column)
            page.put(at, 2, page.formula(column.formula), column.fmt)
        row += len(FLASHED) + 1
    return row + 1


def _staged(page: Page, inlet: int) -> str:
    """The working column: one array formula, as long as the table; gives its letter."""
    sheet, last = page.sheet, inlet + MOST
    put_headings(sheet, inlet - 1, [Head("Pressures, one array of LP_STAGE_PRESSURES (working)", 18)], WIDE + 1)
    letter = get_column_letter(WIDE + 1)
    area = f"{letter}{inlet}:{letter}{last}"
    sheet[f"{letter}{inlet}"] = ArrayFormula(area, page.formula("=LP_STAGE_PRESSURES({p1},{p2},{pv},{plates})"))
    for row in range(inlet, last + 1):
        cell = sheet.cell(row, WIDE + 1)
        cell.number_format, cell.font = FORMATS["pressure"], style.PLAIN
    sheet.conditional_formatting.add(area, style.rule(f"ISERROR({letter}{inlet})", ink="quiet"))
    sheet.cell(last + 1, WIDE + 1, "beyond the last plate: #N/A").font = style.NOTE
    return letter


def _why(page: Page, row: int) -> int:
    """What the functions say of each plate, in both tables."""
    row = page.band(row, "What LP_WHY says of each plate of equal index, design case (LP_ORIFICE_BORE)")
    used = len(page.duty.bores) - (page.flash_row is not None)
    for number, at in enumerate(range(page.design_first, page.design_first + MOST), start=1):
        row = _reason(page, row, at, WHY_BORE, {"before": f"$B{at - 1}", "row": str(at)}, tall=number <= used)
    if page.flash_row is not None:
        row = _reason(page, row, page.flash_row, WHY_BORE, {"before": page.places["p2"], "row": str(page.flash_row)})
    row = page.band(row + 1, "What LP_WHY says of each plate as drilled, other case (LP_ORIFICE_FLOW)")
    letters = letters_of(OTHER)
    for number, at in enumerate(range(page.other_first, page.other_first + MOST), start=1):
        cells = {key: f"${letters[key]}{at}" for key in ("before", "after", "bore")}
        row = _reason(page, row, at, WHY_FLOW, cells, tall=number <= len(page.duty.bores))
    return _of_first(page, row + 1)


def _of_first(page: Page, row: int) -> int:
    """What the functions say of limits and thickness: much the same for all plates, so of the first only."""
    places = {key: f"${letter}{page.design_first}" for key, letter in letters_of(DESIGN).items()}
    places["before"] = f"$B{page.design_first - 1}"
    row = page.band(row, "What LP_WHY says of the limits and the thickness of plate 1, design case")
    for label, call in (("limits", WHY_LIMIT), ("thickness", WHY_THICKNESS)):
        page.put(row, 1, label)
        page.sheet.cell(row, 1).alignment = style.TOP
        row = page.text(row, page.formula(f"={call}", places), 2, lines=4)
    return row


def _reason(page: Page, row: int, at: int, formula: str, more: dict[str, str], *, tall: bool = True) -> int:
    page.put(row, 1, f"=$A{at}", "whole")
    page.sheet.cell(row, 1).alignment = style.TOP
    return page.text(row, page.guarded(at, page.formula(formula, more)), 2, lines=3 if tall else 1)
