"""The sheet Chart: the cases with the least margins, their index against the limits that hold for each."""

from __future__ import annotations

from typing import Any

from openpyxl.chart import BarChart, LineChart, Reference
from openpyxl.chart.layout import Layout, ManualLayout
from openpyxl.chart.shapes import GraphicalProperties
from openpyxl.drawing.line import LineProperties
from openpyxl.worksheet.pagebreak import Break

from lowpoint.starter.frame import Head, put_table
from lowpoint.starter.plant import Plant
from lowpoint.styling import style

__all__ = ["CASES", "FIRST_ROW", "write"]

CASES = 20
"""How many cases the chart shows."""
_HEAD = 34
FIRST_ROW = _HEAD + 1
"""The first row of the chart's data."""
_MARKS = (
    ("incipient", "triangle", "E0A100", 7),
    ("constant", "diamond", "7B8F3A", 7),
    ("damage", "square", "C2571A", 7),
    ("choked", "dash", "1D2B36", 10),
)
"""Limits with the form, the colour and the size of their marks: told apart by form too."""


def write(book: Any, plant: Plant) -> None:
    """Add the sheet: a native chart over the range of its data."""
    sheet = book.create_sheet("Chart")
    style.title(sheet, f"{plant.name}: index against limits", f"The {CASES} cases with the least margin to the limit "
                "that their item must keep, worst first. A bar at or below a mark has crossed that limit.")  # fmt: skip
    formats = style.FORMATS[plant.system] | {"text": "General"}
    heads = [Head("Item and case", 24), Head("Index", 11, "index"), Head("Incipient", 11, "index"),
             Head("Constant", 11, "index"), Head("Damage", 11, "index"), Head("Choked", 11, "index"),
             Head("Margin", 11, "percent"), Head("Limit to keep", 13), Head("No.", 6, "whole"),
             Head("Place in the list (working)", 13, "whole")]  # fmt: skip
    put_table(sheet, _HEAD, heads, [_line(place) for place in range(1, CASES + 1)], formats)
    sheet.row_dimensions[_HEAD].height = 40
    note = (
        "A limit that is not given shows #N/A, and so do lines for which there is no case: the chart leaves them out."
    )
    sheet.cell(FIRST_ROW + CASES, 1, note).font = style.NOTE
    area = f"A{FIRST_ROW}:J{FIRST_ROW + CASES - 1}"
    sheet.conditional_formatting.add(area, style.rule(f"ISERROR(A{FIRST_ROW})", ink="quiet"))
    sheet.add_chart(_chart(sheet), "A4")
    sheet.row_breaks.append(Break(id=_HEAD - 1))
    for column in "KLM":
        sheet.column_dimensions[column].width = 11
    style.print_setup(sheet, paper=9 if plant.system == "metric" else 1)


def _line(place: int) -> list[Any]:
    row = FIRST_ROW + place - 1
    at = f"$J{row}"
    limits = [f"=IF(ISNUMBER(INDEX(List_{key},{at})),INDEX(List_{key},{at}),NA())" for key, *_ in _MARKS]
    return [
        f'=INDEX(List_tag,{at})&" "&INDEX(List_case,{at})', f"=INDEX(List_sigma,{at})", *limits,
        f"=INDEX(List_margin,{at})", f"=INDEX(List_keep,{at})", place,
        f"=MATCH(SMALL(List_rank,$I{row}),List_rank,0)",
    ]  # fmt: skip


def _chart(sheet: Any) -> Any:
    last = FIRST_ROW + CASES - 1
    labels = Reference(sheet, min_col=1, min_row=FIRST_ROW, max_row=last)
    bars = BarChart()
    bars.type, bars.gapWidth = "col", 60
    bars.add_data(Reference(sheet, min_col=2, min_row=_HEAD, max_row=last), titles_from_data=True)
    bars.set_categories(labels)
    bars.series[0].graphicalProperties = GraphicalProperties(solidFill="9DB9CC")
    marks = LineChart()
    marks.add_data(Reference(sheet, min_col=3, max_col=6, min_row=_HEAD, max_row=last), titles_from_data=True)
    marks.set_categories(labels)
    for series, (_, symbol, colour, size) in zip(marks.series, _MARKS, strict=True):
        series.marker.symbol, series.marker.size = symbol, size
        series.marker.graphicalProperties = GraphicalProperties(solidFill=colour)
        series.marker.graphicalProperties.line = LineProperties(solidFill=colour)
        series.graphicalProperties = GraphicalProperties(ln=LineProperties(noFill=True))
        series.smooth = False
    bars += marks
    _axes(bars)
    return bars


def _axes(chart: Any) -> None:
    chart.title = style.chart_title("Cavitation index sigma = (p1-pv)/(p1-p2) and its limits, case by case")
    chart.y_axis.title = chart.x_axis.title = None
    chart.y_axis.scaling.min = 0
    chart.y_axis.number_format, chart.y_axis.majorGridlines.spPr = (
        "0.0",
        GraphicalProperties(ln=LineProperties(solidFill=style.COLOURS["line"])),
    )
    chart.x_axis.delete = chart.y_axis.delete = False
    chart.legend.position = "t"
    chart.layout = Layout(manualLayout=ManualLayout(x=0.06, y=0.17, w=0.92, h=0.52))
    chart.width, chart.height = 30, 14.5
