"""The sheet Summary: counts by state, what fails and why, what has no answer, what is wrong with the list."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter, quote_sheetname
from openpyxl.worksheet.hyperlink import Hyperlink

from lowpoint.problems import counted
from lowpoint.styling import style
from lowpoint.styling.strings import clean
from lowpoint.survey.best import best_words
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.items import ORDER, verdict
from lowpoint.survey.model import Item, Survey, absent
from lowpoint.survey.output.cells import SHARE, band, number, put, sentence, wide_text
from lowpoint.survey.result_columns import NO_ANSWER

__all__ = ["WORST", "failing", "write"]

TITLE = "Summary"
WIDTHS = (17.0, 22.0, 13.0, 21.0, 9.0, 42.0, 44.0, 16.0)
LAST = len(WIDTHS)
WORST = 10
"""How many items are named as the worst."""
LISTED = 1000
"""Problems and unanswered cases that are listed; more are counted."""


def failing(survey: Survey) -> list[Item]:
    """The failing items, the worst first."""
    items = [item for item in survey.items if item.fails]
    return sorted(items, key=lambda item: (item.regime != "flashing", _or_infinite(item.margin)))


def _or_infinite(margin: float) -> float:
    return math.inf if math.isnan(margin) else margin


def write(book: Any, survey: Survey, pages: Mapping[str, str], most: int) -> None:
    """Add the sheet; ``pages`` are the names of the pages by tag, ``most`` how many there may be."""
    sheet = book.create_sheet(TITLE)
    for place, width in enumerate(WIDTHS, 1):
        sheet.column_dimensions[get_column_letter(place)].width = width
    items, cases = counted(len(survey.items), "item"), counted(survey.cases.count, "case")
    style.title(sheet, f"Summary of {clean(Path(survey.reading.path).name)}", f"{items}, {cases}. An item is judged by "
                "its worst case. A case without an answer is never counted as one that keeps its limit.")  # fmt: skip
    row = _glance(sheet, 4, survey)
    row = _states(sheet, row, survey)
    row = _worst(sheet, row, survey, pages)
    row = _pages(sheet, row, survey, pages, most)
    row = _unanswered(sheet, row, survey)
    row = _columns(sheet, row, survey)
    _problems(sheet, row, survey)
    sheet.freeze_panes = "A3"
    style.print_setup(sheet)


def _table_heads(sheet: Any, row: int, heads: Sequence[str], spans: Mapping[int, int] | None = None) -> None:
    """Headings from column A on; ``spans`` says where one reaches over more columns: place -> last column."""
    for place, text in enumerate(heads, 1):
        style.heading(put(sheet, row, place, text or None))
    for first, last in (spans or {}).items():
        for place in range(first + 1, last + 1):
            style.heading(sheet.cell(row, place))
        sheet.merge_cells(start_row=row, start_column=first, end_row=row, end_column=last)


def _underline(sheet: Any, row: int, last: int = LAST) -> None:
    for place in range(1, last + 1):
        sheet.cell(row, place).border = style.LINE_BELOW


# --- counts -----------------------------------------------------------------------------------------------------


def _glance(sheet: Any, row: int, survey: Survey) -> int:
    findings, items = survey.findings, survey.items
    unanswered = absent(findings.regime)
    estimated = int(np.sum((findings.basis == "estimated") & ~unanswered))
    counts = (
        ("Items", len(items), False), ("Cases", survey.cases.count, False),
        ("Items that fail", sum(item.fails for item in items), True),
        ("Cases that fail", int(findings.fails.sum()), True),
        ("Cases unjudged (no incipient limit)", int(np.sum(findings.regime == "unjudged")), True),
        ("Cases whose verdict rests on estimates", estimated, True),
        ("Cases without an answer", int(unanswered.sum()), True),
        ("Problems of the list", len(survey.reading.problems), True),
    )  # fmt: skip
    row = band(sheet, row, "At a glance", LAST)
    for text, count, watched in counts:
        put(sheet, row, 1, text)
        cell = put(sheet, row, 3, count, "#,##0")
        cell.font = style.font("ink", 10, bold=True)
        if watched and count:
            cell.fill = style.fill("watch")
        _underline(sheet, row, 3)
        row += 1
    return row + 1


def _states(sheet: Any, row: int, survey: Survey) -> int:
    cases = Counter(survey.findings.regime.tolist())
    items = Counter(item.regime for item in survey.items)
    row = band(sheet, row, "By state of the flow, worst first", LAST)
    _table_heads(sheet, row, ("State", "Items, by their worst case", "Cases"))
    for word in (*ORDER, None):
        row += 1
        cell = put(sheet, row, 1, word or NO_ANSWER)
        if items[word] or cases[word]:
            colour, ink = style.verdict_colours(word or NO_ANSWER)
            cell.fill, cell.font = style.fill(colour), style.font(ink, 9, bold=True)
        put(sheet, row, 2, items[word], "#,##0")
        put(sheet, row, 3, cases[word], "#,##0")
        _underline(sheet, row, 3)
    return row + 2


# --- items ------------------------------------------------------------------------------------------------------


def _worst(sheet: Any, row: int, survey: Survey, pages: Mapping[str, str]) -> int:
    items = failing(survey)
    row = band(sheet, row, f"The worst {counted(min(WORST, len(items)), 'item')} of {len(items)} that fail", LAST)
    if not items:
        put(sheet, row, 1, "None fails.")
        return row + 2
    _table_heads(sheet, row, ("Tag", "Service", "Worst case", "Verdict", "Margin", "Why", "Best remedy", "Page"))
    for item in items[:WORST]:
        row += 1
        case = survey.cases.case[item.worst] or f"row {survey.cases.row[item.worst]}"
        wide_text(sheet, row, 1, 1, item.tag)
        wide_text(sheet, row, 2, 2, item.service)
        wide_text(sheet, row, 3, 3, str(case))
        cell = put(sheet, row, 4, verdict(item.regime, item.basis))
        colour, ink = style.verdict_colours(str(item.regime))
        cell.fill, cell.font = style.fill(colour), style.font(ink, 9, bold=True)
        put(sheet, row, 5, number(item.margin), SHARE)
        wide_text(sheet, row, 6, 6, item.why)
        remedies = survey.remedies.get(item.tag, ())
        wide_text(sheet, row, 7, 7, best_words(item, remedies))
        _link(put(sheet, row, 8, pages.get(item.tag)), pages.get(item.tag))
        _underline(sheet, row)
    return row + 2


def _link(cell: Any, page: str | None) -> None:
    """A link to a page of the same book; nothing outside it is ever linked."""
    if page is not None:
        cell.hyperlink = Hyperlink(ref=cell.coordinate, location=f"{quote_sheetname(page)}!A1", display=page)
        cell.font = style.font("typed", 9, underline="single")


def _pages(sheet: Any, row: int, survey: Survey, pages: Mapping[str, str], most: int) -> int:
    """Where the pages are, and why some items have none."""
    items = failing(survey)
    if not items:
        return row
    row = band(sheet, row, "Pages of the failing items", LAST)
    without = len(items) - len(pages)
    text = f"{counted(len(pages), 'failing item')} of {len(items)} have a page of their own, the worst first."
    if without:
        text += f" {counted(without, 'item')} have none: at most {most} pages were asked for. Their results are on " \
            "sheet Results."  # fmt: skip
    wide_text(sheet, row, 1, LAST, text)
    row += 1
    for place, item in enumerate([item for item in items if item.tag in pages][WORST:]):
        column = 1 + place % LAST
        _link(put(sheet, row + place // LAST, column, pages[item.tag]), pages[item.tag])
    return row + 1 + -(-max(len(pages) - WORST, 0) // LAST)


# --- what is missing --------------------------------------------------------------------------------------------


def _unanswered(sheet: Any, row: int, survey: Survey) -> int:
    places = [place for place, said in enumerate(survey.findings.errors) if said]
    row = band(sheet, row, f"Cases without an answer, and why ({len(places)})", LAST)
    if not places:
        put(sheet, row, 1, "None.")
        return row + 2
    _table_heads(sheet, row, ("Tag", "Sheet and row", "Case", "Why", "", "", "", ""), {4: LAST})
    cases = survey.cases
    for place in places[:LISTED]:
        row += 1
        put(sheet, row, 1, cases.tag[place])
        put(sheet, row, 2, f"{cases.sheet[place]}, row {cases.row[place]}")
        put(sheet, row, 3, cases.case[place])
        wide_text(sheet, row, 4, LAST, "; ".join(survey.findings.errors[place]))
        _underline(sheet, row)
    return _rest(sheet, row + 1, len(places), "each row on sheet Results says why") + 1


def _rest(sheet: Any, row: int, count: int, where: str) -> int:
    if count > LISTED:
        put(sheet, row, 1, f"... and {count - LISTED} more: {where}", look="note").alignment = style.LEFT
        row += 1
    return row


def _columns(sheet: Any, row: int, survey: Survey) -> int:
    """Columns that are missing, unknown, or not there; and notes on how the list was read."""
    reading = survey.reading
    unknown = [f"{column.sheet}!{column.cell} '{' '.join(column.heading.split())}'" for column in reading.unknown()]
    unused = [f"{column.sheet}!{column.cell} '{' '.join(column.heading.split())}' ({column.status})"
              for column in reading.columns if column.status in ("twice", "no unit", "wrong unit")]  # fmt: skip
    lines: Iterable[tuple[str, Sequence[str]]] = (
        ("Required and not there", reading.missing),
        ("Not usable", unused),
        ("Unknown and not used", unknown),
        ("Optional and not there", [BY_KEY[key].heading for key in reading.absent if key in BY_KEY]),
        ("How the list was read", reading.notes),
    )
    row = band(sheet, row, "Columns of the list", LAST)
    for title, texts in lines:
        put(sheet, row, 1, title)
        wide_text(sheet, row, 3, LAST, "; ".join(texts) or "none")
        _underline(sheet, row)
        row += 1
    return row + 1


def _problems(sheet: Any, row: int, survey: Survey) -> int:
    problems = survey.reading.problems
    row = band(sheet, row, f"Problems of the list, cell by cell ({len(problems)})", LAST)
    if not problems:
        put(sheet, row, 1, "None.")
        return row + 2
    _table_heads(sheet, row, ("Sheet", "Cell", "Value", "What is wrong", "", "", "Remedy", "Used all the same"), {4: 6})
    for problem in problems[:LISTED]:
        row += 1
        wide_text(sheet, row, 1, 1, problem.sheet)
        put(sheet, row, 2, problem.cell)
        wide_text(sheet, row, 3, 3, problem.value)
        wide_text(sheet, row, 4, 6, sentence(problem.text))
        wide_text(sheet, row, 7, 7, problem.remedy)
        put(sheet, row, 8, "no" if problem.spoils else "yes")
        _underline(sheet, row)
    return _rest(sheet, row + 1, len(problems), "lowpoint survey --json names them all")
