"""The sheet Results: the list's own rows as they were read, and what was found beside them, ready to be read again."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import groupby
from pathlib import Path
from typing import Any

from openpyxl.styles import Alignment
from openpyxl.utils import get_column_letter

from lowpoint.styling import style
from lowpoint.styling.packing import Filler
from lowpoint.styling.strings import Strings, clean
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.listed_rows import ListRows
from lowpoint.survey.model import Survey
from lowpoint.survey.output.cells import format_of, put
from lowpoint.survey.output.fast_rows import Column, filler
from lowpoint.survey.result_columns import GROUPS, ResultColumn, result_heading

__all__ = ["write"]

SITE = 3
"""Row of what holds for all rows of the list."""
PAGE_CHARACTERS = 190.0
"""Width of columns that is printed on one page."""
AMOUNTS = {"t": "K", "pv": "Pa", "p1": "Pa", "p2": "Pa", "flow": "m3/s"}
"""Units of tolerances that are amounts, SI."""
Values = Sequence[tuple[ResultColumn, Sequence[Any]]]


@dataclass(frozen=True, slots=True)
class _Frame:
    """Where things are on one sheet: its rows from the bands on, and how many columns are the list's own."""

    bands: int
    own: int
    count: int
    system: str

    @property
    def headings(self) -> int:
        return self.bands + 1

    @property
    def first(self) -> int:
        return self.bands + 2


def write(book: Any, survey: Survey, table: ListRows, start: int, name: str, values: Values, system: str,
          strings: Strings) -> Filler:  # fmt: skip
    """Add the sheet of one sheet of the list; gives what writes its rows.

    ``start`` is the place of its first case, ``values`` every column of results over the whole survey.
    """
    sheet = book.create_sheet(name)
    style.title(sheet, f"Survey of {clean(Path(survey.reading.path).name)}", "The list as it was read, and the results "
                "beside it. A word stands beside every colour. This sheet can be surveyed again: its results are left "
                "alone then.")  # fmt: skip
    at = _Frame(_above(sheet, survey, table), len(table.headings), len(table.rows), system)
    _headings(sheet, at, table, [column for column, _ in values])
    columns = _list_columns(sheet, at, table)
    columns += [_styled(sheet, at, at.own + place, column.kind, part[start : start + at.count])
                for place, (column, part) in enumerate(values, 1)]  # fmt: skip
    last = at.own + len(values)
    if at.count:
        sheet.auto_filter.ref = f"A{at.headings}:{get_column_letter(last)}{at.first + at.count - 1}"
        _mark(sheet, at, [column.key for column, _ in values])
    _view(sheet, at, table, last)
    return filler(at.first, columns, strings) if at.count else _unfilled


def _above(sheet: Any, survey: Survey, table: ListRows) -> int:
    """What holds for all rows, as a reader of lists finds it above a table; gives the row of the bands."""
    for place, (heading, value) in enumerate(table.above):
        put(sheet, SITE, 1 + 2 * place, heading)
        put(sheet, SITE, 2 + 2 * place, value).alignment = style.LEFT
    row = SITE + 1
    for tolerance in survey.reading.tolerances:
        name = BY_KEY[tolerance.field].heading if tolerance.field in BY_KEY else tolerance.field
        put(sheet, row, 1, f"Tolerance {name}")
        size = (
            f"{100.0 * tolerance.size:g} %" if tolerance.relative else f"{tolerance.size:g} {AMOUNTS[tolerance.field]}"
        )
        put(sheet, row, 2, size)
        row += 1
    return row


def _view(sheet: Any, at: _Frame, table: ListRows, last: int) -> None:
    # Borders would need every blank cell written; lines of the grid cost nothing.
    sheet.sheet_view.showGridLines = sheet.print_options.gridLines = True
    frozen = _frozen(table)
    sheet.freeze_panes = f"{get_column_letter(frozen + 1)}{at.first}"
    titles = f"A:{get_column_letter(frozen)}" if frozen else None
    wide = sum(sheet.column_dimensions[get_column_letter(column)].width for column in range(1, last + 1))
    style.print_setup(sheet, wide=max(1, round(wide / PAGE_CHARACTERS)), rows=f"{at.bands}:{at.headings}",
                      columns=titles, paper=8 if at.system == "metric" else 3)  # fmt: skip


def _unfilled(part: bytes) -> tuple[bytes]:
    return (part,)


def _frozen(table: ListRows) -> int:
    """How many columns stay in view: up to the tag and the case, where these come first."""
    places = [table.fields.index(key) + 1 for key in ("tag", "case") if key in table.fields[:4]]
    return max(places, default=0)


def _headings(sheet: Any, at: _Frame, table: ListRows, results: Sequence[ResultColumn]) -> None:
    texts = [*table.headings, *(result_heading(column, at.system) for column in results)]
    for place, text in enumerate(texts, 1):
        cell = put(sheet, at.headings, place, text)
        style.heading(cell)
    for column in range(1, at.own + len(results) + 1):
        sheet.cell(at.bands, column).fill = style.fill("mist")
    _band(sheet, at.bands, 1, "The list")
    place = at.own + 1
    for group, members in groupby(column.group for column in results):
        _band(sheet, at.bands, place, GROUPS[group])
        place += len(list(members))
    sheet.row_dimensions[at.headings].height = 52
    for number, result in enumerate(results, at.own + 1):
        sheet.column_dimensions[get_column_letter(number)].width = result.width


def _band(sheet: Any, row: int, column: int, text: str) -> None:
    cell = put(sheet, row, column, text, look="bold")
    cell.fill, cell.alignment = style.fill("mist"), style.LEFT


def _list_columns(sheet: Any, at: _Frame, table: ListRows) -> list[Column]:
    found = []
    for place, (heading, key) in enumerate(zip(table.headings, table.fields, strict=True), 1):
        cells = [row[place - 1] if place <= len(row) else None for row in table.rows]
        cells = [None if cell == "" else cell for cell in cells]
        words = key in BY_KEY and BY_KEY[key].what != "number"
        width = _width(heading, cells, words)
        sheet.column_dimensions[get_column_letter(place)].width = width
        found.append(_styled(sheet, at, place, "" if words else "cell", cells))
    return found


def _width(heading: str, cells: Sequence[Any], words: bool) -> float:
    """Wide enough for most of the first values, and for the words of the heading."""
    seen = [len(str(cell)) for cell in cells[:300] if cell is not None] if words else []
    longest = max((len(word) for word in heading.split()), default=6)
    return float(min(max(9.0, longest + 2.0, *(length + 2.0 for length in seen[:1] + sorted(seen)[-3:])), 34.0))


def _styled(sheet: Any, at: _Frame, place: int, kind: str, cells: Sequence[Any]) -> Column:
    """The column with the numbers of its styles; the blank cells that make them give way to the rows."""
    return Column(cells, *(_style(sheet.cell(at.first + step, place), kind, at.system, change)
                           for step, change in enumerate(_CHANGES)))  # fmt: skip


def _plain(cell: Any) -> None:
    cell.quotePrefix = False


def _quoted(cell: Any) -> None:
    cell.quotePrefix = True


def _dated(cell: Any) -> None:
    cell.quotePrefix, cell.number_format = False, "yyyy-mm-dd"


_CHANGES: tuple[Callable[[Any], None], ...] = (_plain, _quoted, _dated)


def _style(cell: Any, kind: str, system: str, change: Callable[[Any], None]) -> int:
    cell.font, cell.number_format = style.PLAIN, format_of(kind, system)
    cell.alignment = {"": style.TOP, "cell": _AS_IT_IS}.get(kind, style.TOP_NUMBER)
    change(cell)
    number: int = cell.style_id
    return number


_AS_IT_IS = Alignment(vertical="top")
"""Numbers to the right and texts to the left, as a reader of lists expects."""


def _mark(sheet: Any, at: _Frame, keys: Sequence[str]) -> None:
    """Colours beside the words: verdicts, failures, crossed margins, what is choked or flashing."""

    def area(key: str) -> tuple[str, str]:
        letter = get_column_letter(at.own + keys.index(key) + 1)
        return f"{letter}{at.first}:{letter}{at.first + at.count - 1}", f"{letter}{at.first}"

    style.mark_verdicts(sheet, *area("verdict"))
    for key in ("fails", "choked", "flashing"):
        style.mark_word(sheet, *area(key), "yes")
    cells, first = area("margin")
    sheet.conditional_formatting.add(cells, style.rule(f"AND(ISNUMBER({first}),{first}<=0)", ink="bad", bold=True))
