"""How the books look: colours that the colour-blind can tell apart, fonts, number formats, print set-up.

Blue and ochre carry the meaning, dark against light; a word stands beside every colour.
"""

from __future__ import annotations

from typing import Any

from openpyxl.chart.text import RichText, Text
from openpyxl.chart.title import Title
from openpyxl.drawing.text import CharacterProperties, Paragraph, ParagraphProperties, RegularTextRun
from openpyxl.formatting.rule import FormulaRule
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
from openpyxl.styles.differential import DifferentialStyle
from openpyxl.worksheet.page import PageMargins

__all__ = [
    "BAND", "CENTRE_TOP", "COLOURS", "FORMATS", "HEAD", "INDENTED", "INPUT", "LEFT", "LINE_BELOW", "NOTE", "PLAIN",
    "RIGHT", "SUBTITLE", "TITLE", "TOP", "TOP_NUMBER", "WRAP", "chart_title", "fill", "font", "heading", "mark_errors",
    "mark_verdicts", "mark_word", "print_setup", "rule", "title", "verdict_colours",
]  # fmt: skip

COLOURS = {
    "ink": "1D2B36",
    "deep": "17415C",
    "mid": "3F7396",
    "mist": "E6EEF4",
    "sand": "FFF9EA",
    "typed": "0B4A8F",
    "quiet": "8A959E",
    "line": "C3CED6",
    "good": "D3E6F5",
    "watch": "FBE3A6",
    "bad": "C2571A",
    "fault": "F6D9C6",
    "white": "FFFFFF",
}

NAME = "Arial"


def font(colour: str = "ink", size: float = 9, **more: Any) -> Font:
    """A font of the book's face."""
    return Font(name=NAME, size=size, color=COLOURS[colour], **more)


def fill(colour: str) -> PatternFill:
    """A plain fill."""
    return PatternFill("solid", start_color=COLOURS[colour], end_color=COLOURS[colour])


PLAIN, INPUT = font(), font("typed")
TITLE, SUBTITLE, NOTE = font("deep", 15, bold=True), font("mid", 10), font("quiet", 8, italic=True)
HEAD, BAND = font("white", 9, bold=True), font("deep", 9, bold=True)
LEFT = Alignment(horizontal="left", vertical="center")
RIGHT = Alignment(horizontal="right", vertical="center")
INDENTED = Alignment(horizontal="left", vertical="center", indent=1)
WRAP = Alignment(wrap_text=True, vertical="top", indent=1)
TOP = Alignment(horizontal="left", vertical="top", indent=1)
TOP_NUMBER = Alignment(horizontal="right", vertical="top")
CENTRE = Alignment(horizontal="center", vertical="center", wrap_text=True)
CENTRE_TOP = Alignment(horizontal="center", vertical="top", wrap_text=True)
LINE_BELOW = Border(bottom=Side(style="thin", color=COLOURS["line"]))

FORMATS = {
    "metric": {"pressure": "0.00", "fine": "0.0000", "flow": "#,##0.0", "density": "0.0", "size": "0.0",
               "coefficient": "#,##0.00"},
    "us": {"pressure": "0.0", "fine": "0.000", "flow": "#,##0.0", "density": "0.00", "size": "0.00",
           "coefficient": "#,##0.00"},
}  # fmt: skip
_COMMON = {"text": "@", "tag": "@", "verdict": "General", "one": "0.0", "typed": "0.0##", "whole": "0",
           "factor": "0.00", "index": "0.000", "percent": "0.0%", "working": "0.00"}  # fmt: skip
for _formats in FORMATS.values():
    _formats.update(_COMMON)

_WORST = ("flashing", "choked", "vibration", "damage")
_MIDDLE = ("constant", "cavitating", "incipient", "unjudged", "incomplete")


def title(sheet: Any, text: str, subtitle: str) -> None:
    """The first two rows of a sheet."""
    sheet["A1"], sheet["A2"] = text, subtitle
    sheet["A1"].font, sheet["A2"].font = TITLE, SUBTITLE
    sheet.row_dimensions[1].height = 24
    sheet.sheet_view.showGridLines = False


def chart_title(text: str, size: int = 1100) -> Any:
    """A title of a chart or of its axis; ``size`` in hundredths of a point, by default that of the book's headings."""
    run = RegularTextRun(rPr=CharacterProperties(sz=size, b=True, solidFill=COLOURS["deep"]), t=text)
    paragraph = Paragraph(pPr=ParagraphProperties(defRPr=CharacterProperties(sz=size, b=True)), r=[run])
    return Title(tx=Text(rich=RichText(p=[paragraph])), overlay=False)


def heading(cell: Any) -> None:
    """A heading over a column."""
    cell.font, cell.fill, cell.alignment = HEAD, fill("deep"), CENTRE
    cell.border = Border(left=Side(style="thin", color=COLOURS["mid"]))


def rule(formula: str, colour: str | None = None, *, ink: str | None = None, bold: bool = False) -> Any:
    """A conditional format: the cells where the formula is true."""
    look = DifferentialStyle(
        font=Font(color=COLOURS[ink], bold=bold) if ink else None,
        fill=PatternFill(bgColor=COLOURS[colour]) if colour else None,
    )
    made = FormulaRule(formula=[formula])
    made.dxf = look
    return made


def mark_verdicts(sheet: Any, area: str, first: str) -> None:
    """Colour cells that hold a verdict word (the word stays), or an error; ``first`` is the area's first cell."""
    add = sheet.conditional_formatting.add
    add(area, rule(f"ISERROR({first})", "fault", ink="bad", bold=True))
    add(area, rule(_holds(first, _WORST), "bad", ink="white", bold=True))
    add(area, rule(_holds(first, ("no answer",)), "fault", ink="bad", bold=True))
    add(area, rule(_holds(first, _MIDDLE), "watch", ink="ink"))
    add(area, rule(_holds(first, ("clear",)), "good", ink="ink"))


def verdict_colours(text: str) -> tuple[str, str]:
    """Fill and ink of a cell that holds this verdict, as :func:`mark_verdicts` has them."""
    for words, colours in ((_WORST, ("bad", "white")), (("no answer",), ("fault", "bad")), (_MIDDLE, ("watch", "ink"))):
        if any(word in text for word in words):
            return colours
    return "good", "ink"


def mark_errors(sheet: Any, area: str, first: str) -> None:
    """Colour cells that hold an error; ``first`` is the area's first cell."""
    sheet.conditional_formatting.add(area, rule(f"ISERROR({first})", "fault", ink="bad", bold=True))


def mark_word(sheet: Any, area: str, first: str, word: str) -> None:
    """Colour cells that hold this word, a finding; ``first`` is the area's first cell."""
    sheet.conditional_formatting.add(area, rule(f'{first}="{word}"', "bad", ink="white", bold=True))


def _holds(cell: str, words: tuple[str, ...]) -> str:
    tests = ",".join(f'ISNUMBER(SEARCH("{word}",{cell}))' for word in words)
    return f"OR({tests})"


def print_setup(
    sheet: Any, *, wide: int = 1, rows: str | None = None, columns: str | None = None, paper: int = 9
) -> None:
    """Landscape, so many pages wide, with title rows and columns; paper 9 is A4, 8 A3, 1 letter, 3 tabloid."""
    sheet.page_setup.orientation, sheet.page_setup.paperSize = "landscape", paper
    sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight = wide, 0
    sheet.sheet_properties.pageSetUpPr.fitToPage = True
    sheet.page_margins = PageMargins(left=0.4, right=0.4, top=0.5, bottom=0.6, header=0.25, footer=0.3)
    sheet.oddFooter.left.text, sheet.oddFooter.right.text = "&A", "page &P of &N"
    sheet.print_title_rows, sheet.print_title_cols = rows, columns
