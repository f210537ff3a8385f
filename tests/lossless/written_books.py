"""Workbooks full of what a calculation must not touch, by several writers: the valve list of the sea-water intake."""

from __future__ import annotations

import io
import struct
import zlib
from pathlib import Path

import openpyxl
import xlsxwriter
from openpyxl.chart import BarChart, Reference, ScatterChart, Series
from openpyxl.comments import Comment
from openpyxl.formatting.rule import ColorScaleRule, FormulaRule, IconSetRule
from openpyxl.packaging.custom import StringProperty
from openpyxl.packaging.relationship import Relationship
from openpyxl.styles import Font, PatternFill, Protection
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.workbook.external_link.external import ExternalBook, ExternalLink, ExternalSheetNames
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.table import Table, TableStyleInfo

__all__ = ["FLAT_BOOK", "by_openpyxl", "by_xlsxwriter", "picture"]

HEADS = ("Item", "Duty", "Flow", "p1", "p2", "Drop")
ITEMS = (
    ("FCV-101", "intake", 120.0, 10.0, 4.0), ("FCV-102", "intake", 80.5, 12.5, 9.0),
    ("PCV-201", "boiler house", 35.25, 7.0, 6.0), ("TCV-301", "district heating", 210.0, 16.0, 5.5),
)  # fmt: skip


def picture(width: int = 4, height: int = 4) -> bytes:
    """A small picture. Source: ISO/IEC 15948 (PNG), 11.2."""

    def chunk(kind: bytes, data: bytes) -> bytes:
        return struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))

    lines = b"".join(b"\0" + bytes((20, 90, 160)) * width for _ in range(height))
    head = struct.pack(">2I5B", width, height, 8, 2, 0, 0, 0)
    return b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", head) + chunk(b"IDAT", zlib.compress(lines)) + chunk(b"IEND", b"")


def by_xlsxwriter(path: Path) -> Path:
    """Charts, a picture, notes, validations, conditional formats, sparklines, a table, shapes, links, an array; with
    a macro project where the file is a .xlsm."""
    book = xlsxwriter.Workbook(str(path))
    if path.suffix == ".xlsm":
        book.add_vba_project(io.BytesIO(b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(range(256)) * 8), is_stream=True)
    sheet, other = book.add_worksheet("List"), book.add_worksheet("Shapes")
    book.set_custom_property("Plant", "Kestrel Bay")
    book.define_name("Intake_Flow", "=List!$C$2:$C$5")
    head = book.add_format({"bold": True, "bg_color": "#DDEEFF", "border": 1, "text_wrap": True})
    sheet.write_row("A1", HEADS, head)
    for row, item in enumerate(ITEMS, start=1):
        sheet.write_row(row, 0, item)
        sheet.write_formula(row, 5, f"=D{row + 1}-E{row + 1}", book.add_format({"num_format": "0.00"}), 0)
    _xlsxwriter_marks(book, sheet)
    other.add_table("A1:C4", {"data": [[1, 2, 3], [4, 5, 6], [7, 8, 9]], "name": "Strokes", "total_row": False})
    other.write_dynamic_array_formula("E1:E3", "=A2:A4*2", None, 2)
    other.write_rich_string("G1", "at ", head, "choking", " only")
    other.insert_textbox("G3", "Check the trim", {"fill": {"color": "yellow"}})
    other.insert_image("G12", "mark.png", {"image_data": io.BytesIO(picture()), "description": "mark"})
    other.write_url("A8", "internal:'List'!A1", string="to the list")
    other.write_url("A9", "https://kestrel-bay.example/valves")
    other.set_header("&L&G", {"image_left": "mark.png", "image_data_left": io.BytesIO(picture())})
    _xlsxwriter_charts(book, sheet)
    book.close()
    return path


def _xlsxwriter_marks(book: xlsxwriter.Workbook, sheet: xlsxwriter.worksheet.Worksheet) -> None:
    sheet.write_comment("A2", "Noisy since March", {"author": "Operations"})
    sheet.data_validation("B2:B5", {"validate": "list", "source": ["intake", "boiler house", "district heating"]})
    sheet.data_validation("C2:C5", {"validate": "decimal", "criteria": ">", "value": 0, "error_message": "above 0"})
    sheet.conditional_format("F2:F5", {"type": "data_bar", "data_bar_2010": True})
    sheet.conditional_format("C2:C5", {"type": "icon_set", "icon_style": "3_traffic_lights"})
    red = book.add_format({"font_color": "red"})
    sheet.conditional_format("D2:D5", {"type": "formula", "criteria": "=$F2>5", "format": red})
    for row in range(2, 6):
        sheet.add_sparkline(f"H{row}", {"range": f"List!C{row}:F{row}", "markers": True})
    sheet.freeze_panes(1, 1)
    sheet.autofilter("A1:F5")
    sheet.set_column("A:A", 14)
    sheet.merge_range("I1:J1", "Trend", book.add_format({"align": "center"}))
    sheet.protect("", {"sort": True})


def _xlsxwriter_charts(book: xlsxwriter.Workbook, sheet: xlsxwriter.worksheet.Worksheet) -> None:
    chart = book.add_chart({"type": "column"})
    chart.add_series({"name": "=List!$F$1", "categories": "=List!$A$2:$A$5", "values": "=List!$C$2:$C$5"})
    sheet.insert_chart("K2", chart)
    alone = book.add_chart({"type": "scatter", "subtype": "smooth"})
    alone.add_series({"categories": "=List!$D$2:$D$5", "values": "=List!$E$2:$E$5", "trendline": {"type": "linear"}})
    book.add_chartsheet("Chart").set_chart(alone)


def by_openpyxl(path: Path) -> Path:
    """Charts, notes, validations, conditional formats, a table, names, an external link, print settings, protection."""
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "List"
    sheet.append(HEADS)
    for row, item in enumerate(ITEMS, start=2):
        sheet.append([*item, f"=D{row}-E{row}"])
    for cell in sheet[1]:
        cell.font, cell.fill = Font(bold=True), PatternFill("solid", fgColor="FFDDEEFF")
    sheet["A2"].comment = Comment("Noisy since March", "Operations")
    sheet["F2"].protection = Protection(locked=False)
    sheet["J1"], sheet["J2"] = "elsewhere", "=[1]Trim!$A$1+1"
    choice = DataValidation(type="list", formula1='"intake,boiler house"', allow_blank=True)
    choice.add("B2:B5")
    sheet.add_data_validation(choice)
    scale = ColorScaleRule(start_type="min", start_color="FFFFFF", end_type="max", end_color="FF0000")
    sheet.conditional_formatting.add("C2:C5", scale)
    sheet.conditional_formatting.add("D2:D5", FormulaRule(["$F2>5"], font=Font(color="FFFF0000")))
    sheet.conditional_formatting.add("E2:E5", IconSetRule("3Arrows", "num", [0, 5, 9]))
    table = Table(displayName="Valves", ref="A1:F5", tableStyleInfo=TableStyleInfo(name="TableStyleLight9"))
    sheet.add_table(table)
    _openpyxl_charts(sheet, book.create_chartsheet("Chart"))
    book.defined_names["Intake_Flow"] = DefinedName("Intake_Flow", attr_text="List!$C$2:$C$5")
    book.custom_doc_props.append(StringProperty(name="Plant", value="Kestrel Bay"))
    link = ExternalLink(externalBook=ExternalBook(sheetNames=ExternalSheetNames(sheetName=["Trim"]), id="rId1"))
    link.file_link = Relationship(type="externalLinkPath", Target="trim.xlsx", TargetMode="External", Id="rId1")
    book._external_links.append(link)
    sheet.print_title_rows, sheet.print_area = "1:1", "A1:F5"
    sheet.oddHeader.center.text = "&A"
    sheet.freeze_panes = "B2"
    sheet.protection.enable()
    book.calculation.fullCalcOnLoad = False
    book.save(path)
    return path


def _openpyxl_charts(sheet: object, alone: object) -> None:
    bars = BarChart()
    bars.add_data(Reference(sheet, min_col=3, min_row=1, max_row=5), titles_from_data=True)
    sheet.add_chart(bars, "L2")  # type: ignore[attr-defined]
    points = ScatterChart()
    axes = [Reference(sheet, min_col=column, min_row=2, max_row=5) for column in (4, 5)]
    points.series.append(Series(axes[1], axes[0]))
    alone.add_chart(points)  # type: ignore[attr-defined]


_SPACES = " ".join(
    f'xmlns:{short}="urn:oasis:names:tc:opendocument:xmlns:{name}"'
    for short, name in (("office", "office:1.0"), ("table", "table:1.0"), ("text", "text:1.0"), ("of", "of:1.2"))
)


def _flat_row(*cells: str | float) -> str:
    made = (
        f'<table:table-cell office:value-type="float" office:value="{cell}"/>' if isinstance(cell, float)
        else f'<table:table-cell office:value-type="string"><text:p>{cell}</text:p></table:table-cell>'
        for cell in cells
    )  # fmt: skip
    return f"<table:table-row>{''.join(made)}</table:table-row>"


FLAT_BOOK = f"""<?xml version="1.0" encoding="UTF-8"?>
<office:document {_SPACES} xmlns:xlink="http://www.w3.org/1999/xlink" xmlns:dc="http://purl.org/dc/elements/1.1/"
 office:version="1.3" office:mimetype="application/vnd.oasis.opendocument.spreadsheet"><office:body>
<office:spreadsheet><table:content-validations><table:content-validation table:name="v1"
 table:condition="of:cell-content-is-decimal-number() and cell-content()&gt;0"
 table:base-cell-address="List.C2"/></table:content-validations>
<table:table table:name="List">{_flat_row(*HEADS[:5])}{"".join(_flat_row(*item) for item in ITEMS)}
<table:table-row><table:table-cell office:value-type="string"><office:annotation><dc:creator>Operations</dc:creator>
<text:p>Noisy since March</text:p></office:annotation><text:p>total</text:p></table:table-cell><table:table-cell/>
<table:table-cell table:content-validation-name="v1" table:formula="of:=SUM([.C2:.C5])" office:value-type="float"
 office:value="445.75"/><table:table-cell table:formula="of:=['file:///nowhere/trim.ods'#$Trim.A1]"
 office:value-type="float" office:value="3"/></table:table-row></table:table>
<table:table table:name="Pivot"><table:table-row><table:table-cell/></table:table-row></table:table>
<table:table table:name="'file:///nowhere/trim.ods'#Trim"><table:table-source xlink:type="simple"
 xlink:href="file:///nowhere/trim.ods" table:table-name="Trim" table:mode="copy-results-only"/>
<table:table-row><table:table-cell office:value-type="float" office:value="3"/></table:table-row></table:table>
<table:data-pilot-tables><table:data-pilot-table table:name="Duties" table:target-range-address="Pivot.A1:Pivot.B6">
<table:source-cell-range table:cell-range-address="List.A1:List.E5"/>
<table:data-pilot-field table:source-field-name="Duty" table:orientation="row" table:function="auto"/>
<table:data-pilot-field table:source-field-name="Flow" table:orientation="data" table:function="sum"/>
</table:data-pilot-table></table:data-pilot-tables></office:spreadsheet></office:body></office:document>
"""
"""A flat OpenDocument book with a pivot table, an external link, a note and a validation, for an office to convert.

Source: OASIS ODF 1.3 part 3, 9.6 (data pilots), 9.4.5 (validations), 9.3.1 (sources of tables).
"""
