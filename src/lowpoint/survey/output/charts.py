"""Native charts of an item, drawn from cells of its page: pressure through it, and index against its limits."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from openpyxl.chart import LineChart, Reference, ScatterChart, Series
from openpyxl.chart.data_source import AxDataSource, StrRef
from openpyxl.chart.label import DataLabelList
from openpyxl.chart.layout import Layout, ManualLayout
from openpyxl.chart.legend import LegendEntry
from openpyxl.chart.marker import Marker
from openpyxl.chart.series import SeriesLabel
from openpyxl.chart.shapes import GraphicalProperties
from openpyxl.drawing.line import LineProperties
from openpyxl.drawing.spreadsheet_drawing import AnchorMarker, TwoCellAnchor
from openpyxl.utils import absolute_coordinate, quote_sheetname

from lowpoint.styling import style
from lowpoint.survey.outcome import Line, Picture
from lowpoint.survey.output.cells import put

__all__ = ["Area", "index_chart", "pressure_chart"]

NEARLY = 820_000
"""How far a chart reaches into its last column, in EMU: short of its end, where printing would cut the frame."""
NAMED = 12
"""Cases whose points bear their names; more would cover one another."""
STRETCHED = 6.0
"""Largest over smallest value from which the scale of the index is logarithmic."""
DASHES = {"line": "solid", "dashed": "dash", "dotted": "sysDot"}
MARKERS = {"circle": "circle", "triangle": "triangle", "diamond": "diamond", "square": "square", "cross": "x",
           "plus": "plus"}  # fmt: skip
COLOURS = ("17415C", "C2571A", "7B8F3A", "E0A100", "5B4B8A", "1D2B36")
"""Of the lines in their order; dash and marker tell them apart without colour."""
POINTS = {"pressure": "0.000", "flow": "#,##0.0", "index": "0.000"}


@dataclass(frozen=True, slots=True)
class Area:
    """Where a chart stands: the corners, cells counted from 0."""

    left: int
    top: int
    right: int
    bottom: int

    def anchor(self) -> Any:
        end = AnchorMarker(col=self.right - 1, colOff=NEARLY, row=self.bottom)
        return TwoCellAnchor(_from=AnchorMarker(col=self.left, row=self.top), to=end)


# --- pressure ---------------------------------------------------------------------------------------------------


def pressure_chart(sheet: Any, picture: Picture, row: int, area: Area) -> int:
    """Write the points of a picture with named places from ``row`` on, and the chart over them; gives the next row."""
    heads = ["Place", *(line.name for line in picture.lines)]
    for column, text in enumerate(heads, 1):
        style.heading(put(sheet, row, column, text))
    sheet.row_dimensions[row].height = 40
    places = np.array([x for x, _ in picture.x_ticks], float)
    for offset, (_, name) in enumerate(picture.x_ticks, 1):
        put(sheet, row + offset, 1, name)
    for column, line in enumerate(picture.lines, 2):
        for offset, value in enumerate(_at(line, places), 1):
            put(sheet, row + offset, column, value, POINTS["pressure"])
    last = row + len(places)
    chart = LineChart()
    for place, line in enumerate(picture.lines):
        cells = Reference(sheet, min_col=place + 2, min_row=row, max_row=last)
        series = Series(cells, title_from_data=True)
        _look(series, line, COLOURS[place % len(COLOURS)])
        series.cat = AxDataSource(strRef=StrRef(str(Reference(sheet, min_col=1, min_row=row + 1, max_row=last))))
        chart.series.append(series)
    _frame(chart, picture, area)
    chart.y_axis.scaling.min = 0
    sheet.add_chart(chart)
    return last + 1


def _at(line: Line, places: Any) -> list[float | None]:
    """A line at the named places, straight between its points; None beyond its ends."""
    x, y = np.array(line.x), np.array(line.y)
    values = np.interp(places, x, y).tolist()
    return [value if x[0] <= place <= x[-1] else None for place, value in zip(places.tolist(), values, strict=True)]


# --- index ------------------------------------------------------------------------------------------------------


def index_chart(sheet: Any, picture: Picture, row: int, area: Area) -> int:
    """Write the points of a picture with two scales from ``row`` on, and the chart over them; gives the next row."""
    for column, text in enumerate(("Line", picture.x_title, picture.y_title, "Name"), 1):
        style.heading(put(sheet, row, column, text))
    sheet.row_dimensions[row].height = 40
    chart = ScatterChart()
    chart.style, chart.scatterStyle = 2, "lineMarker"
    row += 1
    named: list[tuple[Line, int]] = []
    for place, line in enumerate(picture.lines):
        _put_points(sheet, row, line)
        series = _scatter(sheet, row, len(line.x), f"A{row}")
        _look(series, line, COLOURS[place % len(COLOURS)])
        chart.series.append(series)
        named += [(line, row)] if line.labels and len(line.labels) <= NAMED else []
        row += len(line.x)
    for line, first in named:
        _name_points(sheet, chart, line, first)
    _frame(chart, picture, area)
    chart.x_axis.title = _axis_title(picture.x_title)
    _scales(chart, picture)
    sheet.add_chart(chart)
    return row


def _put_points(sheet: Any, row: int, line: Line) -> None:
    for offset, (x, y) in enumerate(zip(line.x, line.y, strict=True)):
        put(sheet, row + offset, 1, line.name)
        put(sheet, row + offset, 2, x, POINTS["flow"])
        put(sheet, row + offset, 3, y, POINTS["index"])
        if line.labels:
            put(sheet, row + offset, 4, line.labels[offset])


def _scatter(sheet: Any, row: int, count: int, title: str) -> Any:
    x = Reference(sheet, min_col=2, min_row=row, max_row=row + count - 1)
    y = Reference(sheet, min_col=3, min_row=row, max_row=row + count - 1)
    series = Series(y, x)
    series.tx = SeriesLabel(strRef=StrRef(f"{quote_sheetname(sheet.title)}!{absolute_coordinate(title)}"))
    series.smooth = False
    return series


def _name_points(sheet: Any, chart: Any, line: Line, first: int) -> None:
    """A series of one point each, without a mark, that bears the point's name; the legend leaves them out."""
    for offset in range(len(line.x)):
        series = _scatter(sheet, first + offset, 1, f"D{first + offset}")
        series.marker = Marker(symbol="none")
        series.graphicalProperties = GraphicalProperties(ln=LineProperties(noFill=True))
        series.dLbls = DataLabelList(showSerName=True, showVal=False, showCatName=False, showLegendKey=False,
                                     showPercent=False, showBubbleSize=False, dLblPos="t")  # fmt: skip
        chart.legend.legendEntry.append(LegendEntry(idx=len(chart.series), delete=True))
        chart.series.append(series)


def _scales(chart: Any, picture: Picture) -> None:
    values = [y for line in picture.lines for y in line.y]
    flows = [x for line in picture.lines for x in line.x]
    chart.y_axis.number_format, chart.x_axis.number_format = "0.0", "#,##0"
    if not values:
        return
    least, most = min(values), max(values)
    if least > 0.0 and most / least > STRETCHED:
        chart.y_axis.scaling.logBase = 10
        chart.y_axis.number_format = "General"
        chart.y_axis.scaling.min = 10.0 ** math.floor(math.log10(least))
        chart.y_axis.title = _axis_title(f"{picture.y_title}, logarithmic")
    else:
        chart.y_axis.scaling.min = 1.0 if least >= 1.0 else math.floor(least)
    chart.x_axis.scaling.min, chart.x_axis.scaling.max, chart.x_axis.majorUnit = _round_range(min(flows), max(flows))
    if chart.x_axis.majorUnit < 1.0:
        chart.x_axis.number_format = "General"


def _round_range(least: float, most: float) -> tuple[float, float, float]:
    """Round ends that leave air on both sides, and a round step: about six steps between them."""
    span = (most - least) or abs(most) or 1.0
    raw = 1.3 * span / 6.0
    power = 10.0 ** math.floor(math.log10(raw))
    step = next(power * factor for factor in (1.0, 2.0, 5.0, 10.0) if power * factor >= raw)
    low = step * math.floor((least - 0.08 * span) / step)
    return max(0.0, low), step * math.ceil((most + 0.08 * span) / step), step


# --- look -------------------------------------------------------------------------------------------------------


def _look(series: Any, line: Line, colour: str) -> None:
    drawn = line.style != "points"
    stroke = LineProperties(solidFill=colour, w=22000, prstDash=DASHES[line.style]) if drawn else \
        LineProperties(noFill=True)  # fmt: skip
    series.graphicalProperties = GraphicalProperties(ln=stroke)
    series.smooth = False
    series.marker = Marker(symbol=MARKERS.get(line.marker, "none"))
    if line.marker:
        series.marker.size = 9 if not drawn else 7
        series.marker.graphicalProperties = GraphicalProperties(solidFill=colour)
        series.marker.graphicalProperties.line = LineProperties(solidFill=colour)


def _axis_title(text: str) -> Any:
    return style.chart_title(text, 900)


def _frame(chart: Any, picture: Picture, area: Area) -> None:
    chart.title = style.chart_title(picture.title)
    chart.y_axis.title = _axis_title(picture.y_title)
    chart.x_axis.title = None
    chart.y_axis.number_format = "General"
    chart.y_axis.majorGridlines.spPr = GraphicalProperties(ln=LineProperties(solidFill=style.COLOURS["line"]))
    chart.x_axis.majorGridlines = None
    chart.x_axis.delete = chart.y_axis.delete = False
    chart.legend.position = "b"
    chart.legend.overlay = False
    chart.layout = Layout(manualLayout=ManualLayout(x=0.07, y=0.12, w=0.9, h=0.62))
    chart.anchor = area.anchor()
