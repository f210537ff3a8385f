"""How the sheets of the output workbook write their cells: text never becomes a formula, numbers have their format."""

from __future__ import annotations

import math
import re
from typing import Any

from openpyxl.styles import Alignment
from openpyxl.utils import get_column_letter

from lowpoint.styling import style
from lowpoint.styling.strings import clean
from lowpoint.survey.values import is_formula_like

__all__ = ["SHARE", "band", "format_of", "lines_of", "number", "put", "sentence", "wide_text"]

SHARE = "0.0%"
WRAPPED = Alignment(horizontal="left", vertical="top", wrap_text=True, indent=1)
BREADTH = 1.22
"""Characters of the book's face in a unit of a column's width, a little less than it holds of ordinary text."""
FORMATS = {
    "metric": {"pressure": "0.00", "absolute": "0.00", "flow": "#,##0.0", "density": "0.0", "coefficient": "#,##0.00",
               "size": "0.0", "temperature": "0.0", "velocity": "0.0", "level": "0", "viscosity": "0.000"},
    "us": {"pressure": "0.0", "absolute": "0.0", "flow": "#,##0.0", "density": "0.00", "coefficient": "#,##0.00",
           "size": "0.00", "temperature": "0.0", "velocity": "0.0", "level": "0", "viscosity": "0.000"},
}  # fmt: skip
_COMMON = {"share": SHARE, "ratio": "0.000", "count": "0", "": "General", "travel": "0.0"}
SMALL = {"metric": 0.1, "us": 1.0}
"""Pressure below which a cell by itself shows four digits behind the point: vapour pressures of cold water."""


def format_of(kind: str, system: str) -> str:
    """Number format of a kind of quantity."""
    if kind in ("pressure", "absolute"):
        few, many = FORMATS[system][kind], "0.0000" if system == "metric" else "0.000"
        return f"[<{SMALL[system]:g}]{many};{few}"
    return {**FORMATS[system], **_COMMON}.get(kind, "General")


def number(x: Any) -> float | None:
    """A plain number, None where there is none."""
    return float(x) if x is not None and math.isfinite(x) else None


def put(sheet: Any, row: int, column: int, value: Any, fmt: str = "General", *, look: str = "plain") -> Any:
    """Write a cell; ``look`` is ``plain``, ``label``, ``wrap`` (text over several lines), ``note`` or ``bold``."""
    cell = sheet.cell(row, column)
    if isinstance(value, str):
        text = clean(value)
        cell.value, cell.data_type = text, "s"
        if is_formula_like(text):
            cell.quotePrefix = True
    elif value is not None:
        cell.value = value if not isinstance(value, float) or math.isfinite(value) else None
    cell.number_format = fmt
    cell.font = {"note": style.NOTE, "bold": style.BAND}.get(look, style.PLAIN)
    if look in ("wrap", "note"):
        cell.alignment = WRAPPED
    elif look == "label" or isinstance(value, str):
        cell.alignment = style.TOP
    else:
        cell.alignment = style.TOP_NUMBER
    return cell


def band(sheet: Any, row: int, text: str, last: int) -> int:
    """A title over a part of a sheet; gives the next row."""
    for column in range(1, last + 1):
        sheet.cell(row, column).fill = style.fill("mist")
    cell = put(sheet, row, 1, text, look="bold")
    cell.fill = style.fill("mist")
    cell.alignment = style.LEFT
    sheet.row_dimensions[row].height = 15
    return row + 1


_SYMBOL = re.compile(r"(?:p[12vc]|FL?|Fd|xFz?|sigma|t)\b")


def sentence(text: str) -> str:
    """A clause as a sentence; a symbol at its beginning keeps its letters."""
    first = text[:1] if _SYMBOL.match(text) else text[:1].upper()
    return f"{first}{text[1:]}".rstrip(".") + "."


def lines_of(text: Any, width: float) -> int:
    """How many lines a text takes in cells of this width, in characters."""
    return sum(max(1, math.ceil(len(line) / max(width * BREADTH, 1.0))) for line in str(text).splitlines() or [""])


def wide_text(sheet: Any, row: int, first: int, last: int, text: str, look: str = "wrap") -> int:
    """Wrapped text over columns ``first`` to ``last``; the row grows with it. Gives how many lines it takes."""
    put(sheet, row, first, text, look=look)
    if last > first:
        sheet.merge_cells(start_row=row, start_column=first, end_row=row, end_column=last)
    width = sum(sheet.column_dimensions[get_column_letter(column)].width for column in range(first, last + 1))
    lines = lines_of(text, width - 2.5)
    tall = 12.0 * lines + 3.0
    sheet.row_dimensions[row].height = max(tall, sheet.row_dimensions[row].height or 0.0)
    return lines
