"""The sheets that an audit adds: findings, questions to the vendor, the working, and what was read where.

Every number stands as a value, every text as a text; cells of the vendor's sheet are linked to.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from openpyxl.utils import get_column_letter
from openpyxl.worksheet.hyperlink import Hyperlink

from lowpoint.audit.explaining import Explanation, explanations, letters_of
from lowpoint.audit.model import Audit, Claim, Finding, SheetReading, Value
from lowpoint.audit.own_sheets import FINDINGS, QUESTIONS, READ, WORKING
from lowpoint.audit.telling import EXPLAINS, GROUPS, atmosphere_words, explaining_lines, statement, tally
from lowpoint.audit.working import sheet_workings
from lowpoint.styling import style
from lowpoint.survey.output.cells import band, lines_of, number, put, wide_text
from lowpoint.survey.output.steps import WIDE, WIDTHS, put_steps

__all__ = ["Place", "add_sheets"]

_COLOURS = {"differs": ("bad", "white"), "contradicts": ("bad", "white"), "look at": ("watch", "ink"),
            "unchecked": ("watch", "ink"), "agrees": ("good", "ink")}  # fmt: skip
_WORDS = {"differs": "differs", "contradicts": "contradicts", "unchecked": "not checked", "agrees": "agrees"}
_TALL = 12.0
"""Points of a line."""
A3 = 8


@dataclass(frozen=True, slots=True)
class Place:
    """Where a cell of the vendor's sheet stands in the workbook that is written."""

    sheet: str
    cell: str

    @property
    def link(self) -> str:
        quoted = self.sheet.replace("'", "''")
        return f"'{quoted}'!{self.cell}"


Places = Callable[[str], "Place | None"]
"""From an address of the audit to its place; None for what is no cell of the workbook."""


@dataclass(frozen=True, slots=True)
class _Column:
    text: str
    width: float
    kind: str = "text"
    """``text`` (wrapped), ``number``, ``cell`` (linked), ``verdict``, else the format of a number."""


def add_sheets(book: Any, audit: Audit, names: Mapping[str, str], places: Places, said: Sequence[str] = ()) -> None:
    """Add the four sheets to a book, under ``names``; ``said`` is what is to be told of the copy itself."""
    _findings(book.create_sheet(names["Findings"]), audit, places, said)
    _questions(book.create_sheet(names["Questions"]), audit)
    _working(book.create_sheet(names["Working"]), audit)
    _read(book.create_sheet(names["Read"]), audit, places)


# --- findings ---------------------------------------------------------------------------------------------------
_FINDINGS = (
    _Column("Verdict", 12.0, "verdict"),
    _Column("Quantity", 15.0),
    _Column("Case", 10.0),
    _Column("Cell", 19.0, "cell"),
    _Column("Stated", 12.0, "General"),
    _Column("Computed", 12.0, "number"),
    _Column("Unit", 9.0),
    _Column("Off by, %", 8.0, "0.0"),
    _Column("Tolerance", 10.0, "number"),
    _Column("What was found", 60.0),
    _Column("Suspects, by the letters above", 18.0),
    _Column("What the comparison rests on", 60.0),
)


def _findings(sheet: Any, audit: Audit, places: Places, said: Sequence[str]) -> None:
    row = _begin(sheet, f"Audit of {_name(audit)}", FINDINGS, _FINDINGS)
    for sentence in said:
        wide_text(sheet, row, 1, len(_FINDINGS), sentence)
        row += 1
    row += 1
    for reading, claims in zip(audit.document.sheets, audit.claims, strict=True):
        row = band(sheet, row, f"{_item(reading)}: {tally(claims)}", len(_FINDINGS))
        explained = explanations(claims)
        row = _explaining(sheet, row, explaining_lines(claims, explained))
        rows = [_claim_row(claim, explained) for verdict in GROUPS for claim in claims if claim.verdict == verdict]
        row = _table(sheet, row, _FINDINGS, [*map(_finding_row, reading.findings), *rows], places) + 1
    whole = audit.document.findings
    if whole:
        row = band(sheet, row, "Of the file", len(_FINDINGS))
        _table(sheet, row, _FINDINGS, [_finding_row(finding) for finding in whole], places)
    sheet.freeze_panes = "A3"
    style.print_setup(sheet, paper=A3)


def _explaining(sheet: Any, row: int, lines: Sequence[tuple[str, str]]) -> int:
    """The suspects of a sheet, each once, by the letters that the table below has."""
    if not lines:
        return row
    put(sheet, row, 1, EXPLAINS).font = style.font(bold=True)
    for letter, sentence in lines:
        row += 1
        put(sheet, row, 1, letter or None).font = style.font(bold=True)
        sheet.cell(row, 1).alignment = style.RIGHT
        wide_text(sheet, row, 2, len(_FINDINGS), sentence)
    return row + 2


def _claim_row(claim: Claim, explained: Sequence[Explanation]) -> tuple[Any, ...]:
    stated = claim.claimed if claim.claimed_word is None else claim.claimed_word
    computed = claim.computed if claim.claimed_word is None else claim.computed_word
    return (_WORDS[claim.verdict], claim.quantity, claim.case or "", claim.cell, stated, computed, claim.unit,
            _off(claim), claim.tolerance, statement(claim), _letters(claim, explained), claim.basis)  # fmt: skip


def _letters(claim: Claim, explained: Sequence[Explanation]) -> str:
    """The suspects of a claim by their letters, each with the number that would follow."""
    numbers = [f"{letter}: {suspect.text.partition(' follows if ')[0]}"
               for letter, suspect in letters_of(claim, explained)]  # fmt: skip
    return "\n".join(numbers) or ("none" if claim.verdict == "differs" and claim.tried else "")


def _off(claim: Claim) -> float:
    """Stated over computed less 1, in per cent."""
    if claim.verdict not in ("differs", "agrees") or not math.isfinite(claim.computed) or not claim.computed:
        return math.nan
    return 100.0 * (claim.claimed / claim.computed - 1.0)


def _finding_row(finding: Finding) -> tuple[Any, ...]:
    text = f"{finding.text}. {finding.remedy}".rstrip()
    return ("look at", finding.kind, "", finding.cell, *(None,) * 5, text, "", "of the sheet itself")


# --- questions --------------------------------------------------------------------------------------------------
_QUESTIONS = (_Column("No.", 6.0, "0"), _Column("Question", 110.0))


def _questions(sheet: Any, audit: Audit) -> None:
    row = _begin(sheet, "Questions to the vendor", QUESTIONS, _QUESTIONS)
    asked = [question for questions in audit.questions for question in questions]
    if not asked:
        put(sheet, row, 2, "There is nothing to ask: every claim that could be checked agrees.")
        return
    _table(sheet, row, _QUESTIONS, list(enumerate(asked, 1)), lambda _: None)


# --- working ----------------------------------------------------------------------------------------------------
def _working(sheet: Any, audit: Audit) -> None:
    for place, width in enumerate(WIDTHS, 1):
        sheet.column_dimensions[get_column_letter(place)].width = width
    style.title(sheet, "Working", WORKING)
    row = 4
    cited: dict[str, str] = {}
    for reading, claims in zip(audit.document.sheets, audit.claims, strict=True):
        for paper in sheet_workings(reading, claims):
            row = put_steps(sheet, band(sheet, row, f"{reading.name}: {paper.title}", WIDE), paper)
            cited |= dict(paper.citations)
            for caution in paper.cautions:
                wide_text(sheet, row, 1, WIDE, caution)
                row += 1
    if cited:
        row = band(sheet, row, "Sources", WIDE)
    for key, citation in cited.items():
        wide_text(sheet, row, 1, WIDE, f"{key}: {citation}.")
        row += 1
    style.print_setup(sheet)


# --- what was read ----------------------------------------------------------------------------------------------
_READ = (
    _Column("Quantity", 16.0), _Column("Case", 11.0), _Column("As shown", 18.0), _Column("Unit", 11.0),
    _Column("Unit from", 10.0), _Column("Cell", 19.0, "cell"), _Column("Label", 34.0),
    _Column("Label's cell", 19.0, "cell"), _Column("Confidence", 11.0, "0.00"), _Column("Remark", 40.0),
)  # fmt: skip


def _read(sheet: Any, audit: Audit, places: Places) -> None:
    document = audit.document
    row = _begin(sheet, "What was read", READ, _READ)
    wide_text(sheet, row, 1, len(_READ), f"File: {_name(audit)}, SHA-256 {document.fingerprint}")
    row += 2
    for reading in document.sheets:
        row = band(sheet, row, _item(reading), len(_READ))
        wide_text(sheet, row, 1, len(_READ), f"Gauge pressures count from {atmosphere_words(reading)}.")
        row = _table(sheet, row + 1, _READ, [_value_row(value) for value in reading.values], places) + 1
        row = _notes(sheet, row, reading.notes)
    _notes(sheet, row, document.notes)
    sheet.freeze_panes = "A3"


def _value_row(value: Value) -> tuple[Any, ...]:
    form = f" ({value.form} form)" if value.form else ""
    meant = f"read as '{value.word}'" if value.word is not None and value.word != value.raw else ""
    remark = "; ".join(part for part in (meant, value.note) if part)
    return (value.quantity, value.case or "", value.raw, f"{value.unit}{form}".strip(), value.unit_from, value.cell,
            value.label, value.label_cell, round(value.confidence, 2), remark)  # fmt: skip


def _notes(sheet: Any, row: int, notes: Sequence[Finding]) -> int:
    if not notes:
        return row
    row = band(sheet, row, "Not read, or read with care", len(_READ))
    for note in notes:
        wide_text(sheet, row, 1, len(_READ), note.sentence())
        row += 1
    return row + 1


# --- tables -----------------------------------------------------------------------------------------------------
def _begin(sheet: Any, title: str, subtitle: str, columns: Sequence[_Column]) -> int:
    for place, column in enumerate(columns, 1):
        sheet.column_dimensions[get_column_letter(place)].width = column.width
    style.title(sheet, "", "")
    put(sheet, 1, 1, title).font = style.TITLE
    put(sheet, 2, 1, subtitle).font = style.SUBTITLE
    sheet.cell(1, 1).alignment = sheet.cell(2, 1).alignment = style.LEFT
    style.print_setup(sheet)
    return 3


def _table(sheet: Any, row: int, columns: Sequence[_Column], rows: Sequence[Sequence[Any]], places: Places) -> int:
    for place, column in enumerate(columns, 1):
        style.heading(put(sheet, row, place, column.text))
    sheet.row_dimensions[row].height = 28
    for values in rows:
        row += 1
        for place, (column, value) in enumerate(zip(columns, values, strict=True), 1):
            _cell(sheet, row, place, column, value, places)
        tallest = max(lines_of(value, column.width - 2.0) for column, value in zip(columns, values, strict=True)
                      if isinstance(value, str))  # fmt: skip
        sheet.row_dimensions[row].height = min(_TALL * tallest + 4.0, 409.0)
    return row + 1


def _cell(sheet: Any, row: int, place: int, column: _Column, value: Any, places: Places) -> None:
    if isinstance(value, str) or value is None:
        cell = put(sheet, row, place, value or None, look="wrap")
    else:
        cell = put(sheet, row, place, number(value), _format(value) if column.kind == "number" else column.kind)
    cell.border = style.LINE_BELOW
    if column.kind == "verdict":
        colour, ink = next(found for word, found in _colours() if word == value)
        cell.fill, cell.font = style.fill(colour), style.font(ink, bold=True)
    there = places(value) if column.kind == "cell" and isinstance(value, str) else None
    if there is not None:
        cell.hyperlink = Hyperlink(ref=cell.coordinate, location=there.link)
        cell.font = style.font("typed", underline="single")


def _colours() -> Iterator[tuple[str, tuple[str, str]]]:
    for verdict, colours in _COLOURS.items():
        yield _WORDS.get(verdict, verdict), colours


def _format(value: float) -> str:
    """Decimals by the size of a number: five significant figures, and one behind the point."""
    if not math.isfinite(value) or value == int(value):
        return "General"
    return "0." + "0" * max(1, min(8, 4 - math.floor(math.log10(abs(value)))))


def _item(reading: SheetReading) -> str:
    return f"{reading.name}: {reading.tag}" if reading.tag else reading.name


def _name(audit: Audit) -> str:
    return Path(audit.document.path).name
