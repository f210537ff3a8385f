"""The chart of a duty, pressure along the plates beside the vapour pressure, and the table of its points."""

from __future__ import annotations

from typing import Any

from openpyxl.chart import Reference, ScatterChart, Series
from openpyxl.chart.layout import Layout, ManualLayout
from openpyxl.chart.marker import Marker
from openpyxl.chart.shapes import GraphicalProperties
from openpyxl.drawing.line import LineProperties
from openpyxl.drawing.spreadsheet_drawing import AnchorMarker, TwoCellAnchor

from lowpoint.starter.frame import Head, put_headings
from lowpoint.starter.plates_columns import DESIGN, MOST, OTHER
from lowpoint.starter.plates_page import WIDE, Page, letters_of
from lowpoint.styling import style

__all__ = ["HEADINGS", "STEPS", "write"]

STEPS = 2 * MOST + 4
"""Points of a line of steps: two a plate, one more plate that may flash, and one before and after them all."""
_LEFT, _TOP = 4, 3
"""Where the chart begins: column and row, counted from 0. It ends with the cells, whatever their font makes of them."""
HEADINGS = (
    "Point", "Place, design case", "Equal index, design case", "Place, other case", "As drilled, other case",
    "Vapour pressure, design case", "Vapour pressure, other case", "Plate", "Lowest in the jet, design case",
)  # fmt: skip
_LINES = (
    # column of the places, column of the pressures, colour, dash, width in points
    (2, 3, "17415C", None, 2.0),
    (4, 5, "C2571A", "dash", 1.5),
    (2, 6, "7B8F3A", "sysDot", 1.75),
    (2, 7, "E0A100", "lgDashDot", 1.5),
)
"""Told apart by dash too."""


def write(page: Page, row: int) -> int:
    """Add the points below and the chart beside the inputs; gives the last row."""
    row = page.band(
        row,
        "Points of the chart (working): a place is the number of the plate; beyond the last one the end is repeated",
    )
    put_headings(page.sheet, row, [Head(text, 11.0) for text in HEADINGS])
    page.sheet.row_dimensions[row].height = 52
    first = row + 1
    for point in range(STEPS):
        _point(page, first + point, point)
    _jets(page, first)
    chart = _chart(page, row)
    chart.anchor = TwoCellAnchor(_from=_corner(_LEFT, _TOP), to=_corner(WIDE, page.design_first - 4))
    page.sheet.add_chart(chart)
    return first + STEPS - 1


def _corner(column: int, row: int) -> AnchorMarker:
    """The upper left corner of a cell, counted from 0."""
    return AnchorMarker(col=column, row=row)


def _point(page: Page, row: int, point: int) -> None:
    """One point of the steps: before (odd) or after (even) a plate."""
    plate, side = (point + 1) // 2, (point + 1) // 2 - point % 2
    flash = "+1" if page.flash_row is not None else ""
    inlet, letters = page.design_first - 1, letters_of(OTHER)
    steps = f"({_shown(page)}{flash})"
    bores = f"COUNT(${letters['bore']}${page.other_first}:${letters['bore']}${page.other_first + MOST - 1})"
    page.put(row, 1, point, "whole")
    for column, count in ((2, steps), (4, bores)):
        page.put(row, column, f"=IF({plate}>{count},{count}+0.5,{max(plate, 0.5)})", "working")
    design = f"INDEX($B${inlet}:$B${inlet + MOST},{side + 1})" if side <= MOST else page.places["end"]
    page.put(row, 3, f"=IF({side}>{_shown(page)},{page.places['end']},{design})", "pressure")
    after = f"${letters['after']}{page.other_first + side - 1}" if side else page.places["p1_other"]
    after = after if side <= MOST else page.places["end_other"]
    page.put(row, 5, f"=IF({side}>{bores},{page.places['end_other']},{after})", "pressure")
    page.put(row, 6, f"={page.places['pv']}", "fine")
    page.put(row, 7, f"={page.places['pv_other']}", "fine")


def _shown(page: Page) -> str:
    """Plates of equal index that the table shows."""
    return f"MIN({page.places['plates']},{MOST})"


def _jets(page: Page, first: int) -> None:
    """The lowest pressure in the jet of each plate; beyond the last plate the last one again."""
    jet, top = letters_of(DESIGN)["jet"], page.design_first
    for number in range(1, MOST + 2):
        row = first + number - 1
        beyond = f"{number}>{_shown(page)}"
        if page.flash_row is None:
            place, pressure = (
                page.places["plates"],
                f"INDEX(${jet}${top}:${jet}${top + MOST - 1},{_shown(page)})",
            )
        else:
            place, pressure = f"{_shown(page)}+1", f"${jet}${page.flash_row}"
        own = f"${jet}{top + number - 1}" if number <= MOST else pressure
        page.put(row, 8, f"=IF({beyond},{place},{number})", "whole")
        page.put(row, 9, f"=IF({beyond},{pressure},{own})", "pressure")


def _chart(page: Page, heads: int) -> Any:
    chart = ScatterChart()
    chart.style, chart.scatterStyle = 2, "lineMarker"
    for places, pressures, colour, dash, points in _LINES:
        series = _series(page, heads, places, pressures, STEPS)
        line = LineProperties(solidFill=colour, w=int(12700 * points), prstDash=dash)
        series.graphicalProperties, series.marker = GraphicalProperties(ln=line), Marker(symbol="none")
        chart.series.append(series)
    jets = _series(page, heads, 8, 9, MOST + 1)
    jets.graphicalProperties = GraphicalProperties(ln=LineProperties(noFill=True))
    jets.marker = Marker(symbol="triangle", size=7, spPr=GraphicalProperties(solidFill="17415C"))
    chart.series.append(jets)
    _axes(chart, page)
    return chart


def _series(page: Page, heads: int, places: int, pressures: int, points: int) -> Any:
    def cells(column: int, start: int) -> Any:
        return Reference(page.sheet, min_col=column, min_row=start, max_row=heads + points)

    series = Series(cells(pressures, heads), cells(places, heads + 1), title_from_data=True)
    series.smooth = False
    return series


def _axes(chart: Any, page: Page) -> None:
    chart.title = style.chart_title("Pressure along the plates, bar absolute")
    chart.x_axis.title = style.chart_title("Plate")
    chart.y_axis.title = None
    chart.x_axis.scaling.min, chart.x_axis.majorUnit, chart.x_axis.number_format = 0, 1, "0"
    chart.x_axis.majorGridlines = None
    grid = GraphicalProperties(ln=LineProperties(solidFill=style.COLOURS["line"]))
    chart.y_axis.majorGridlines.spPr, chart.y_axis.number_format = grid, "0"
    chart.y_axis.scaling.min = 1 if page.duty.logarithmic else 0
    if page.duty.logarithmic:
        chart.y_axis.scaling.logBase = 10
    chart.x_axis.delete = chart.y_axis.delete = False
    chart.legend.position = "b"
    chart.layout = Layout(manualLayout=ManualLayout(x=0.04, y=0.09, w=0.94, h=0.7))
