"""The sheet Summary: counts by state and by area, the worst ten items, the cases without an answer and why."""

from __future__ import annotations

from typing import Any

from openpyxl.chart import BarChart, Reference
from openpyxl.chart.label import DataLabelList
from openpyxl.chart.shapes import GraphicalProperties

from lowpoint.starter.frame import LAST, Head, put_table
from lowpoint.starter.list_sheet import LETTERS
from lowpoint.starter.list_sheet import TITLE as LIST
from lowpoint.starter.plant import Plant
from lowpoint.styling import style

__all__ = ["STATES", "WORST", "write"]

STATES = ("flashing", "choked", "vibration", "damage", "constant", "cavitating", "incipient", "unjudged", "clear")
"""The words of LP_REGIME, from worst to best."""
WORST = 10
"""How many items are named as the worst."""
UNANSWERED = 30
"""How many cases without an answer are listed."""

_HEADLINES = (
    ("Items", "=COUNTA(Items_tag)"),
    ("Cases", "=COUNTA(List_tag)"),
    ("Cases that keep their limit", '=COUNTIF(List_kept,"yes")'),
    ("Cases at or below their limit", '=COUNTIF(List_kept,"no")'),
    ("Cases without an answer", '=COUNTIF(List_errors,">0")'),
    ("Cells with errors", "=SUM(List_errors)"),
)
_TOP = 5


def write(book: Any, plant: Plant) -> None:
    """Add the sheet; everything on it is counted from the sheets List and Items by ordinary formulas."""
    sheet = book.create_sheet("Summary")
    style.title(sheet, f"{plant.name}: summary", "Counted from the sheets List and Items. A case without an answer is "
                "never counted as one that keeps its limit.")  # fmt: skip
    formats = style.FORMATS[plant.system] | {"text": "General"}
    _headlines(sheet, formats)
    row = _states(sheet, formats)
    row = _areas(sheet, max(row, 20), plant, formats)
    row = _worst(sheet, row + 1, formats)
    _unanswered(sheet, row + 1, formats)
    sheet.freeze_panes = "A4"
    style.print_setup(sheet, paper=9 if plant.system == "metric" else 1)


def _section(sheet: Any, row: int, text: str) -> None:
    cell = sheet.cell(row, 1, text)
    cell.font = style.BAND


def _headlines(sheet: Any, formats: dict[str, str]) -> None:
    _section(sheet, 4, "At a glance")
    put_table(sheet, _TOP, [Head("Count", 29), Head("Number", 11, "whole")], _HEADLINES, formats)
    for row in range(_TOP + 1, _TOP + 1 + len(_HEADLINES)):
        sheet.cell(row, 2).font = style.font("ink", 11, bold=True)
    for row in (_TOP + 4, _TOP + 5, _TOP + 6):
        cell = f"B{row}"
        sheet.conditional_formatting.add(cell, style.rule(f"{cell}>0", "watch", ink="ink"))


def _states(sheet: Any, formats: dict[str, str]) -> int:
    """Cases and items by the state of their flow, with a chart beside."""
    column = 4
    cell = sheet.cell(4, column, "By state of the flow, worst first")
    cell.font = style.BAND
    first, last = _TOP + 1, _TOP + len(STATES)
    rows: list[tuple[str, Any, str]] = [
        (state, f"=COUNTIF(List_regime,D{row})", f"=COUNTIF(Items_regime,D{row})")
        for row, state in enumerate(STATES, start=first)
    ]
    rows += [
        ("incomplete", 0, f"=COUNTIF(Items_regime,D{last + 1})"),
        ("no answer", f"=COUNTA(List_tag)-SUM(E{first}:E{last})", f"=COUNTIF(Items_regime,D{last + 2})"),
    ]
    heads = [Head("State", 13), Head("Cases", 11, "whole"), Head("Items, worst case", 11, "whole")]
    last = put_table(sheet, _TOP, heads, rows, formats, column) - 1
    sheet.row_dimensions[_TOP].height = 30
    style.mark_verdicts(sheet, f"D{_TOP + 1}:D{last}", f"D{_TOP + 1}")
    sheet.add_chart(_chart(sheet, last), "H4")
    return last + 2


def _chart(sheet: Any, last: int) -> Any:
    chart = BarChart()
    chart.type, chart.title = "bar", style.chart_title("Cases by state of the flow")
    chart.add_data(Reference(sheet, min_col=5, min_row=_TOP, max_row=last), titles_from_data=True)
    chart.set_categories(Reference(sheet, min_col=4, min_row=_TOP + 1, max_row=last))
    chart.legend = None
    chart.gapWidth = 45
    chart.x_axis.scaling.orientation = "maxMin"
    chart.x_axis.delete = chart.y_axis.delete = False
    chart.y_axis.majorGridlines = None
    chart.y_axis.delete = True
    bars = chart.series[0]
    bars.graphicalProperties = GraphicalProperties(solidFill=style.COLOURS["mid"])
    bars.dLbls = DataLabelList(showVal=True, showSerName=False, showCatName=False, showLegendKey=False)
    chart.width, chart.height = 14.5, 8.2
    return chart


def _areas(sheet: Any, row: int, plant: Plant, formats: dict[str, str]) -> int:
    _section(sheet, row, "By area")
    heads = [Head("Area", 29), Head("Cases", 11, "whole"), Head("Items", 8, "whole"),
             Head("Keep their limit", 13, "whole"), Head("At or below it", 11, "whole"),
             Head("Without an answer", 11, "whole"), Head("Least margin", 11, "percent")]  # fmt: skip
    rows = [
        (area.name, f"=COUNTIF(List_area,A{at})", f"=COUNTIF(Items_area,A{at})",
         f'=COUNTIFS(List_area,A{at},List_kept,"yes")',
         f'=COUNTIFS(List_area,A{at},List_kept,"no")', f'=COUNTIFS(List_area,A{at},List_errors,">0")',
         f'=IF(COUNTIFS(List_area,A{at},List_rank,"<1E+99")=0,"",_xlfn.MINIFS(List_rank,List_area,A{at}))')
        for at, area in enumerate(plant.areas, start=row + 2)
    ]  # fmt: skip
    last = put_table(sheet, row + 1, heads, rows, formats)
    sheet.row_dimensions[row + 1].height = 30
    return last


def _worst(sheet: Any, row: int, formats: dict[str, str]) -> int:
    """The items with the least margins."""
    _section(sheet, row, f"The {WORST} items with the least margin to the limit that they must keep")
    heads = [Head("Service", 29), Head("Tag", 13), Head("No.", 8, "whole"), Head("Worst case", 13),
             Head("Margin", 11, "percent"), Head("Index", 11, "index"), Head("Limit", 11, "index"),
             Head("Verdict", 34)]  # fmt: skip
    first = row + 2
    rows = []
    for place, at in enumerate(range(first, first + WORST), start=1):
        found = f"MATCH(SMALL(Items_order,$C{at}),Items_order,0)"
        service, tag, *others = (
            f'=IF($C{at}>COUNT(Items_order),"",INDEX(Items_{key},{found}))'
            for key in ("service", "tag", "worst", "margin", "sigma", "limit", "verdict")
        )
        rows.append((service, tag, place, *others))
    last = put_table(sheet, row + 1, heads, rows, formats)
    style.mark_verdicts(sheet, f"H{first}:H{last - 1}", f"H{first}")
    return last


def _unanswered(sheet: Any, row: int, formats: dict[str, str]) -> None:
    """The cases with an error in a computed cell, and the reason."""
    _section(sheet, row, "Cases without an answer, and why")
    more = f'=IF(COUNT(List_unanswered)>{UNANSWERED},"and "&(COUNT(List_unanswered)-{UNANSWERED})&" more: see List","")'
    sheet.cell(row, 8, more).font = style.NOTE
    heads = [Head("Service", 29), Head("Tag", 13), Head("No.", 8, "whole"), Head("Case", 13), Head("Why", 11)]
    first = row + 2
    rows = []
    for place, at in enumerate(range(first, first + UNANSWERED), start=1):
        service, tag, case, why = (
            f'=IF($C{at}="","",INDEX({LIST}!${LETTERS[key]}$1:${LETTERS[key]}${LAST},SMALL(List_unanswered,$C{at})))'
            for key in ("service", "tag", "case", "why")
        )
        number = f'=IF(COUNT(List_unanswered)<{place},"",{place})'
        rows.append((service, tag, number, case, why))
    put_table(sheet, row + 1, heads, rows, formats)
    for at in range(first - 1, first + UNANSWERED):
        sheet.merge_cells(start_row=at, start_column=5, end_row=at, end_column=8)
        if at >= first:
            sheet.cell(at, 5).alignment = style.WRAP
            sheet.cell(at, 3).alignment = style.TOP_NUMBER
            sheet.row_dimensions[at].height = 26
            for column in (1, 2, 4):
                sheet.cell(at, column).alignment = style.TOP
