"""The page of one failing item: verdict, pictures, cases, remedies, sensitivity and the working of the worst case."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from openpyxl.utils import get_column_letter
from openpyxl.worksheet.pagebreak import Break

from lowpoint.styling import style
from lowpoint.survey.items import verdict
from lowpoint.survey.model import Item, Survey
from lowpoint.survey.outcome import Remedy, Working
from lowpoint.survey.output.cells import SHARE, band, format_of, number, put, sentence, wide_text
from lowpoint.survey.output.charts import Area, index_chart, pressure_chart
from lowpoint.survey.output.steps import WIDE, WIDTHS, put_heads, put_steps, underline
from lowpoint.survey.pictures import index_picture, pressure_picture
from lowpoint.survey.result_columns import RESULT_COLUMNS, result_heading
from lowpoint.survey.sensed import sensed_words
from lowpoint.survey.working import working

__all__ = ["CASES", "write"]

CASES = 10
"""Cases that the table has room for: the worst ones."""
CHART_ROWS, CHART_POINTS = 20, 15.0
SHOWN = (
    "verdict", "fails", "reasons", "margin", "keep_here", "limit", "flow_used", "p1_used", "p2_used", "pv_used",
    "density_used", "fl_used", "sigma", "index", "index_form", "incipient_here", "constant_here", "damage_here",
    "vibration_here", "choked_here", "choked", "flashing", "coefficient", "capacity", "travel", "choked_drop",
    "throat_pressure", "flash_share", "outlet_velocity", "noise", "plate", "margin_low", "margin_high", "stays",
    "dominant",
)  # fmt: skip
"""Columns of results that the table of cases shows, one a row, where any case has a value."""
_COLUMNS = {column.key: column for column in RESULT_COLUMNS}
Values = Mapping[str, Sequence[Any]]


def write(book: Any, survey: Survey, item: Item, name: str, values: Values, system: str) -> None:
    """Add the page; ``values`` are the columns of results by key over the whole survey."""
    sheet = book.create_sheet(name)
    for place, width in enumerate(WIDTHS, 1):
        sheet.column_dimensions[get_column_letter(place)].width = width
    style.title(sheet, "", "")
    put(sheet, 1, 1, f"{item.tag}: {verdict(item.regime, item.basis)}").font = style.TITLE
    put(sheet, 2, 1, " · ".join(x for x in (KINDS.get(item.kind, item.kind), item.service) if x)).font = style.SUBTITLE
    sheet.cell(1, 1).alignment = sheet.cell(2, 1).alignment = style.LEFT
    wide_text(sheet, 3, 1, WIDE, f"Worst: {item.why}.")
    charts = 5
    row = charts + CHART_ROWS + 1
    row = _cases(sheet, row, survey, item, values, system)
    row = _sensed(sheet, row, survey, item, system)
    row = _remedies(sheet, row, survey.remedies.get(item.tag, ()))
    row = _said(sheet, row, "Cautions of the worst case", survey.findings.cautions, item.worst)
    sheet.row_breaks.append(Break(id=row - 1))
    row = _working(sheet, row, working(survey, item.worst, system))
    row = band(sheet, row, "Points of the charts", WIDE)
    middle, bottom = 6, charts - 1 + CHART_ROWS
    for place in range(charts, charts + CHART_ROWS):
        sheet.row_dimensions[place].height = CHART_POINTS
    picture = pressure_picture(survey, item.worst, system)
    row = pressure_chart(sheet, picture, row, Area(0, charts - 1, middle, bottom)) + 1
    row = index_chart(sheet, index_picture(survey, item, system), row, Area(middle, charts - 1, WIDE, bottom))
    put(sheet, row, 1, picture.alternative, look="note").alignment = style.LEFT
    style.print_setup(sheet, paper=9 if system == "metric" else 1)


KINDS = {"valve": "control valve", "orifice": "orifice plate", "plates": "set of orifice plates"}


# --- cases ------------------------------------------------------------------------------------------------------


def _cases(sheet: Any, row: int, survey: Survey, item: Item, values: Values, system: str) -> int:
    places = _shown_cases(survey, item)
    more = f"; the {len(places)} worst of {len(item.rows)}, the others are on sheet Results" \
        if len(places) < len(item.rows) else ""  # fmt: skip
    row = band(sheet, row, f"Cases{more}", WIDE)
    names = [survey.cases.case[place] or f"row {survey.cases.row[place]}" for place in places]
    heads = [f"{name}\n(worst)" if place == item.worst and len(places) > 1 else str(name)
             for name, place in zip(names, places, strict=True)]  # fmt: skip
    for column, text in enumerate(["What", "Unit", *heads], 1):
        style.heading(put(sheet, row, column, text))
    sheet.row_dimensions[row].height = 28
    for key in SHOWN:
        cells = [values[key][place] for place in places]
        if any(cell is not None for cell in cells):
            row += 1
            _case_row(sheet, row, key, cells, system)
    return row + 2


def _shown_cases(survey: Survey, item: Item) -> list[int]:
    """Cases in the order of the list; where there are too many, those with the least margins."""
    if len(item.rows) <= CASES:
        return list(item.rows)
    rest = sorted((place for place in item.rows if place != item.worst), key=lambda place: _order(survey, place))
    return sorted([item.worst, *rest[: CASES - 1]])


def _order(survey: Survey, place: int) -> tuple[bool, float]:
    margin = float(survey.findings.margin[place])
    return not survey.findings.fails[place], margin if margin == margin else float("inf")


def _case_row(sheet: Any, row: int, key: str, cells: Sequence[Any], system: str) -> None:
    column = _COLUMNS[key]
    text, _, unit = result_heading(column, system).partition(" [")
    put(sheet, row, 1, text)
    put(sheet, row, 2, unit.rstrip("]"))
    longest = 1
    for place, value in enumerate(cells, 3):
        cell = put(sheet, row, place, value, format_of(column.kind, system))
        cell.alignment = style.CENTRE_TOP if isinstance(value, str) else style.TOP_NUMBER
        longest = max(longest, -(-len(value) // 12) if isinstance(value, str) else 1)
        if key == "verdict" and value is not None:
            _coloured(cell, str(value))
        if (key == "fails" and value == "yes") or (key == "margin" and isinstance(value, float) and value <= 0.0):
            cell.font = style.font("bad", 9, bold=True)
    for place in range(1, len(cells) + 3):
        sheet.cell(row, place).border = style.LINE_BELOW
    sheet.row_dimensions[row].height = 12.0 * longest + 2.0


def _coloured(cell: Any, word: str) -> None:
    colour, ink = style.verdict_colours(word)
    cell.fill, cell.font = style.fill(colour), style.font(ink, 9, bold=True)


# --- what is said -----------------------------------------------------------------------------------------------


def _sensed(sheet: Any, row: int, survey: Survey, item: Item, system: str) -> int:
    if survey.sensitivity is None:
        return row
    row = band(sheet, row, "When the inputs move within their tolerances", WIDE)
    wide_text(sheet, row, 1, WIDE, sensed_words(survey, item.worst, system))
    return row + 2


def _said(sheet: Any, row: int, title: str, lists: Sequence[Sequence[str]], place: int) -> int:
    sentences = lists[place] if len(lists) else ()
    if not sentences:
        return row
    row = band(sheet, row, title, WIDE)
    for text in sentences:
        wide_text(sheet, row, 1, WIDE, sentence(text))
        row += 1
    return row + 1


def _remedies(sheet: Any, row: int, remedies: Sequence[Remedy]) -> int:
    row = band(sheet, row, "Remedies, the best first; each was tried on every case by the same calculation", WIDE)
    if not remedies:
        wide_text(sheet, row, 1, WIDE, "None was worked out in this survey.")
        return row + 2
    put_heads(sheet, row, (("Remedy", 1, 1), ("Cures", 2, 2), ("What must be done", 3, 7), ("Least margin", 8, 8),
                        ("Cautions", 9, WIDE)))  # fmt: skip
    for remedy in remedies:
        row += 1
        put(sheet, row, 1, remedy.title)
        put(sheet, row, 2, "yes" if remedy.cures else "no")
        put(sheet, row, 8, number(remedy.margin), SHARE)
        wide_text(sheet, row, 3, 7, sentence(remedy.text))
        wide_text(sheet, row, 9, WIDE, " ".join(map(sentence, remedy.cautions)))
        underline(sheet, row)
    return row + 2


# --- the working ------------------------------------------------------------------------------------------------


def _working(sheet: Any, row: int, paper: Working) -> int:
    row = put_steps(sheet, band(sheet, row, f"Working of {paper.title}", WIDE), paper)
    wide_text(sheet, row, 1, WIDE, f"Verdict: {paper.verdict}.")
    return row + 2
