"""The sheet Assumptions: what was taken where the list is silent, definitions, sources, cautions, which file."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from datetime import date
from pathlib import Path
from typing import Any

from openpyxl.utils import get_column_letter

from lowpoint import __version__
from lowpoint.problems import counted
from lowpoint.styling import style
from lowpoint.survey.model import Survey
from lowpoint.survey.output.cells import band, put, sentence, wide_text
from lowpoint.survey.taken import CAUTION, DEFINITIONS, atmospheres, citations, defaults
from lowpoint.survey.tolerances import NAMES, WHY

__all__ = ["write"]

WIDTHS = (34.0, 96.0, 16.0)
LAST = len(WIDTHS)
CAUTIONS = 60
"""Different cautions that are listed, the commonest first."""
UNITS = {"metric": "metric: bar, m3/h, mm, Kv", "us": "US customary: psi, US gal/min, in, Cv"}


def write(book: Any, survey: Survey, system: str, today: date) -> None:
    """Add the sheet."""
    sheet = book.create_sheet("Assumptions")
    for place, width in enumerate(WIDTHS, 1):
        sheet.column_dimensions[get_column_letter(place)].width = width
    style.title(sheet, "Assumptions, definitions and sources", "What the results rest on, for whoever checks them.")
    wide_text(sheet, 3, 1, LAST, CAUTION)
    row = _pairs(sheet, 5, "This survey", _survey(survey, system, today))
    row = _pairs(sheet, row, "Atmosphere", atmospheres(survey, system) or [("none", "no gauge pressure needed one")])
    silent = [(what, f"{taken} ({counted(count, 'case')})") for what, taken, count in defaults(survey)]
    row = _pairs(sheet, row, "Taken where the list is silent", silent)
    row = _pairs(sheet, row, "Tolerances of the inputs", _tolerances(survey, system))
    row = _pairs(sheet, row, "Definitions", DEFINITIONS)
    row = _pairs(sheet, row, "Sources", citations(survey))
    _cautions(sheet, row, survey)
    sheet.freeze_panes = "A3"
    style.print_setup(sheet)


def _survey(survey: Survey, system: str, today: date) -> Iterable[tuple[str, str]]:
    reading = survey.reading
    yield "List", Path(reading.path).name
    yield "Fingerprint of the list (SHA-256)", reading.fingerprint
    yield "Sheets read", ", ".join(reading.sheets) or "none"
    yield "Items and cases", f"{counted(len(survey.items), 'item')}, {counted(survey.cases.count, 'case')}"
    if reading.elevation is not None:
        yield "Site elevation", f"{reading.elevation:g} m"
    methods = {word or "isa" for word in survey.cases.method.tolist()}
    if len(methods) == 1:
        # A list of LP_ formulas names its method in such a line: the workbook, surveyed again, needs it.
        yield "Method that carries limits to another size and pressure", methods.pop()
    yield "Units of the results", UNITS[system]
    yield "Version", __version__
    yield "Date", today.isoformat()


def _tolerances(survey: Survey, system: str) -> Iterable[tuple[str, str]]:
    found = survey.sensitivity
    if found is None:
        return [("None", "no sensitivity was worked out in this survey")]
    rows = [(NAMES[t.field].capitalize(), f"{t.words(system)} ({t.basis}): {WHY[t.field]}") for t in found.tolerances]
    drawn = f"{found.draws} draws a case, uniform within the tolerances and independent, seed {found.seed}"
    return [*rows, ("Draws", drawn)]


def _pairs(sheet: Any, row: int, title: str, pairs: Iterable[tuple[str, str]]) -> int:
    row = band(sheet, row, title, LAST)
    for name, text in list(pairs) or [("None", "every value was given")]:
        wide_text(sheet, row, 1, 1, name)
        wide_text(sheet, row, 2, LAST, text)
        for column in range(1, LAST + 1):
            sheet.cell(row, column).border = style.LINE_BELOW
        row += 1
    return row + 1


def _cautions(sheet: Any, row: int, survey: Survey) -> None:
    """The cautions of the cases, each once, with how many cases bear it."""
    counts = Counter(caution for said in survey.findings.cautions for caution in said)
    listed = counts.most_common(CAUTIONS)
    row = band(sheet, row, f"Cautions of the cases ({counted(len(counts), 'different one')})", LAST)
    for caution, count in listed:
        wide_text(sheet, row, 1, 2, sentence(caution))
        put(sheet, row, 3, counted(count, "case"))
        row += 1
    if len(counts) > len(listed):
        rest = f"... and {len(counts) - len(listed)} rarer ones: sheet Results has them all"
        put(sheet, row, 1, rest, look="note").alignment = style.LEFT
