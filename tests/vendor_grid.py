"""A sheet as a grid of cells with the place of every quantity noted, and the ways to write it: xlsx, csv, PDF.

The bytes are the same on every run.
"""

from __future__ import annotations

import io
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

__all__ = ["Grid", "Put"]

INK, PAPER, TINT, RULE = "26323A", "FFFFFF", "E4ECE7", "9FB0A8"
Key = tuple[str, str | None]


@dataclass(slots=True)
class Put:
    """One cell."""

    value: Any
    text: str
    """As shown."""
    fmt: str = "General"
    look: str = ""
    """``title``, ``band``, ``head``, ``label``, ``note``, ``unit``, ``value`` (a word) or empty for a number."""


@dataclass
class Grid:
    """Cells by row and column (from 1), merged areas, and where each quantity of each case stands."""

    name: str = "Data sheet"
    cells: dict[tuple[int, int], Put] = field(default_factory=dict)
    merged: list[tuple[int, int, int, int]] = field(default_factory=list)
    """First row, first column, last row, last column."""
    places: dict[Key, tuple[int, int]] = field(default_factory=dict)
    widths: dict[int, float] = field(default_factory=dict)
    landscape: bool = False
    wraps: bool = False

    def put(self, row: int, column: int, text: str, look: str = "label", across: int = 1) -> None:
        self.cells[row, column] = Put(text, text, "@" if look == "value" else "General", look)
        if across > 1:
            self.merged.append((row, column, row, column + across - 1))

    def number(
        self, row: int, column: int, key: Key, number: float, decimals: int, *, unit: str = "",
        as_text: bool = False, comma: bool = False, quoted_unit: bool = False, across: int = 1,
    ) -> None:  # fmt: skip
        """A number with so many decimals; ``unit`` in the cell itself, as text or by the format of the number."""
        shown = f"{number:.{decimals}f}"
        text = (shown.replace(".", ",") if comma else shown) + (f" {unit}" if unit else "")
        plain = f"0.{'0' * decimals}" if decimals else "0"
        fmt = f'{plain}" {unit}"' if quoted_unit and unit else plain
        value = text if as_text or comma or (unit and not quoted_unit) else float(shown)
        self.cells[row, column] = Put(value, text, "@" if isinstance(value, str) else fmt, "")
        self.places[key] = (row, column)
        if across > 1:
            self.merged.append((row, column, row, column + across - 1))

    def word(self, row: int, column: int, key: Key, text: str, across: int = 1) -> None:
        self.put(row, column, text, "value", across)
        self.places[key] = (row, column)

    # --- xlsx ---------------------------------------------------------------------------------------------------
    def xlsx(self, *, looks: bool = True) -> bytes:
        """A workbook; without looks (fonts, lines, widths) it is written twice as fast."""
        from openpyxl import Workbook

        from lowpoint.styling.packing import packed

        book = Workbook()
        sheet = book.active
        sheet.title = self.name
        for (row, column), one in self.cells.items():
            sheet.cell(row, column, one.value).number_format = one.fmt
        if looks:
            self._dress(sheet)
        for top, left, bottom, right in self.merged:
            sheet.merge_cells(start_row=top, start_column=left, end_row=bottom, end_column=right)
        return packed(book)

    def _dress(self, sheet: Any) -> None:
        from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
        from openpyxl.utils import get_column_letter

        thin = Side(style="thin", color=RULE)
        fonts = {"title": Font(name="Arial", size=13, bold=True, color=INK),
                 "band": Font(name="Arial", size=9, bold=True, color=INK),
                 "head": Font(name="Arial", size=9, bold=True, color=INK),
                 "note": Font(name="Arial", size=8, italic=True, color=INK)}  # fmt: skip
        usual = Font(name="Arial", size=9, color=INK)
        for (row, column), one in self.cells.items():
            cell = sheet.cell(row, column)
            cell.font = fonts.get(one.look, usual)
            if one.look in ("band", "head"):
                cell.fill = PatternFill("solid", start_color=TINT)
            if one.look != "title":
                cell.border = Border(bottom=thin)
            across = "left" if one.look in ("label", "note", "band", "title", "value") else "center"
            wrap = self.wraps and one.look != "title"
            cell.alignment = Alignment(horizontal=across, vertical="center", wrap_text=wrap)
            lines = 1 + int(len(one.text) * 1.05 // self.widths.get(column, 10.0)) if wrap else 1
            if lines > 1 and one.look != "band":
                sheet.row_dimensions[row].height = max(13.0 * lines, sheet.row_dimensions[row].height or 0.0)
        for column, width in self.widths.items():
            sheet.column_dimensions[get_column_letter(column)].width = width
        sheet.sheet_view.showGridLines = False
        sheet.page_setup.orientation = "landscape" if self.landscape else "portrait"
        sheet.page_setup.paperSize, sheet.page_setup.fitToHeight = 9, 0
        sheet.sheet_properties.pageSetUpPr.fitToPage = True

    # --- csv ----------------------------------------------------------------------------------------------------
    def csv(self, between: str = ",") -> bytes:
        import csv

        last_row, last_column = max(row for row, _ in self.cells), max(column for _, column in self.cells)
        out = io.StringIO()
        writer = csv.writer(out, delimiter=between, lineterminator="\r\n")
        for row in range(1, last_row + 1):
            cells = [self.cells.get((row, column)) for column in range(1, last_column + 1)]
            writer.writerow(["" if cell is None else cell.text for cell in cells])
        return out.getvalue().encode("utf-8")

    # --- pdf ----------------------------------------------------------------------------------------------------
    def pdf(self, stops: Sequence[float], *, leaders: bool = False) -> bytes:
        """One page of text, every column at its stop (points from the left edge), values flush right before it."""
        from reportlab.lib.pagesizes import A4
        from reportlab.pdfgen.canvas import Canvas

        out = io.BytesIO()
        canvas = Canvas(out, pagesize=A4, invariant=1, pageCompression=0)
        canvas.setTitle(self.name)
        last = max(row for row, _ in self.cells)
        step = min(14.0, (A4[1] - 90.0) / last)
        for (row, column), one in sorted(self.cells.items()):
            y = A4[1] - 45.0 - row * step
            bold = one.look in ("title", "band", "head")
            canvas.setFont("Helvetica-Bold" if bold else "Helvetica", 12 if one.look == "title" else 8.5)
            x = stops[column - 1]
            if one.look == "band":
                canvas.setFillGray(0.92)
                canvas.rect(stops[0] - 4, y - 3.5, A4[0] - 2 * stops[0] + 8, step - 1, stroke=0, fill=1)
                canvas.setFillGray(0)
            if one.look in ("", "head"):
                canvas.drawRightString(x + 44, y, one.text)
            else:
                canvas.drawString(x, y, one.text)
            if leaders and one.look == "label" and column == 1:
                start = x + canvas.stringWidth(one.text, "Helvetica", 8.5) + 3
                dots = int(max(0.0, stops[1] - 6 - start) / canvas.stringWidth(".", "Helvetica", 8.5))
                canvas.drawString(start, y, "." * dots)
        canvas.save()
        return out.getvalue()

    # --- where things stand -------------------------------------------------------------------------------------
    def addresses(self, kind: str) -> dict[Key, str]:
        """The place of every quantity as an audit names it."""
        if kind == "xlsx":
            from openpyxl.utils import get_column_letter

            return {key: f"{self.name}!{get_column_letter(c)}{r}" for key, (r, c) in self.places.items()}
        if kind == "csv":
            return {key: f"row {r}, column {c}" for key, (r, c) in self.places.items()}
        lines = {row: place for place, row in enumerate(sorted({row for row, _ in self.cells}), 1)}
        parts: dict[tuple[int, int], int] = {}
        for row in lines:
            columns = sorted(column for at, column in self.cells if at == row)
            parts |= {(row, column): place for place, column in enumerate(columns, 1)}
        return {key: f"page 1, line {lines[r]}, part {parts[r, c]}" for key, (r, c) in self.places.items()}
