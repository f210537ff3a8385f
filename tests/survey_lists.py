"""Lists for tests: rows of plain values as xlsx, csv or ods; the items of Kestrel Bay as such rows."""

from __future__ import annotations

import csv
import zipfile
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import Any
from xml.sax.saxutils import escape

import openpyxl

from lowpoint.starter import sample
from lowpoint.starter.list_sheet import inputs_of

__all__ = ["GOOD", "HEADINGS", "kestrel_rows", "write_csv", "write_ods", "write_xlsx"]

HEADINGS = ("Tag", "Case", "Liquid", "Temperature [deg C]", "Flow [m3/h]", "p1 [bar a]", "p2 [bar a]",
            "Valve size [mm]", "FL", "Incipient", "Damage")  # fmt: skip
GOOD = ("21-FCV-110", "normal", "water", 20, 46, 5.8, 4.2, 80, 0.9, 2.1, 1.42)
"""A row that is clear: index (5.8 - 0.0234)/1.6 = 3.6 above every limit."""

_KESTREL = {
    "tag": "Tag", "case": "Case", "service": "Service", "fluid": "Liquid", "salinity": "Salinity [g/kg]",
    "t": "Temperature [deg C]", "flow": "Flow, m3/h", "style": "Style", "direction": "Flow direction",
    "valve_size": "DN", "pipe_in": "D1 (mm)", "pipe_out": "D2 (mm)", "rated": "Kvs", "rangeability": "Rangeability",
    "characteristic": "Characteristic", "fl": "FL", "fl_basis": "FL basis", "fd": "Fd", "limits_basis": "Limits basis",
    "incipient_ref": "Incipient", "constant_ref": "Constant", "damage_ref": "Damage", "size_ref": "Test size [mm]",
    "head_ref": "Test head [bar]", "size_exponent": "Size exponent", "head_exponent": "Pressure exponent",
    "keep": "Limit to keep", "density_given": "Density [kg/m3]",
    "pv_given": "pv [bar a]", "pc_given": "pc [bar a]",
}  # fmt: skip


def kestrel_rows() -> tuple[list[str], list[list[Any]]]:
    """Headings and rows of the items of Kestrel Bay that are read in bar gauge and have no vendor's table."""
    headings = [*_KESTREL.values(), "p1 [bar g]", "p2 [bar g]", "Site elevation [m]"]
    rows = []
    for item in sample().items:
        if item.table or item.unit:
            continue
        for case in item.cases:
            cells = inputs_of(item, case, "metric")
            if item.estimate:
                cells |= {"incipient_ref": "estimate", "size_ref": None, "head_ref": None, "size_exponent": None,
                          "head_exponent": None}  # fmt: skip
            row = [cells.get(key) for key in _KESTREL]
            rows.append([*row, cells["p1_given"], cells["p2_given"], item.area.elevation])
    return headings, rows


def write_xlsx(path: Path, headings: Sequence[Any], rows: Iterable[Sequence[Any]], title: str = "List") -> Path:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = title
    sheet.append(list(headings))
    for row in rows:
        sheet.append(list(row))
    book.save(path)
    return path


def write_csv(path: Path, headings: Sequence[Any], rows: Iterable[Sequence[Any]], separator: str = ",") -> Path:
    with path.open("w", encoding="utf-8", newline="") as text:
        csv.writer(text, delimiter=separator).writerows([headings, *rows])
    return path


_HEAD = (
    '<?xml version="1.0" encoding="UTF-8"?><office:document-content '
    'xmlns:office="urn:oasis:names:tc:opendocument:xmlns:office:1.0" '
    'xmlns:table="urn:oasis:names:tc:opendocument:xmlns:table:1.0" '
    'xmlns:text="urn:oasis:names:tc:opendocument:xmlns:text:1.0"><office:body><office:spreadsheet>'
)


def _ods_cell(value: Any) -> str:
    if value is None:
        return "<table:table-cell/>"
    if isinstance(value, str) and value.startswith("<table:"):
        return value
    if isinstance(value, str):
        return f'<table:table-cell office:value-type="string"><text:p>{escape(value)}</text:p></table:table-cell>'
    kind = f'office:value-type="float" office:value="{value!r}"'
    return f"<table:table-cell {kind}><text:p>{value}</text:p></table:table-cell>"


def write_ods(
    path: Path, headings: Sequence[Any], rows: Iterable[Sequence[Any]], row_marks: Sequence[str] = ()
) -> Path:
    """An OpenDocument sheet named List; ``row_marks`` are attributes of its first rows, headings included."""
    marks = [*row_marks, *[""] * 100]
    lines = (
        f"<table:table-row {mark}>{''.join(map(_ods_cell, row))}</table:table-row>"
        for mark, row in zip(marks, [headings, *rows], strict=False)
    )
    content = f'{_HEAD}<table:table table:name="List">{"".join(lines)}</table:table></office:spreadsheet></office:body>'
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as package:
        package.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
        package.writestr("content.xml", content + "</office:document-content>")
    return path
