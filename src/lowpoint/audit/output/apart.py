"""A workbook of its own with a sheet as it was read: of a csv, a PDF, or a workbook that nothing can be added to."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from openpyxl.comments import Comment
from openpyxl.utils import get_column_letter

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.output.noting import AUTHOR
from lowpoint.audit.output.sheets import Place
from lowpoint.styling import style
from lowpoint.survey.output.cells import put
from lowpoint.survey.output.naming import sheet_names

__all__ = ["add_note", "as_read"]

NEAR = 14.0
"""Points between the beginnings of two columns of a page, at least."""
WIDEST = 44.0
NOTE_WIDTH, NOTE_LINE, NOTE_CHARACTERS = 380, 15, 58
"""Points of a note's box, and characters of its lines."""


def as_read(book: Any, pages: Sequence[Page], kind: str) -> dict[str, Place]:
    """Add a sheet for each page with its texts in their places; gives where each address came to stand."""
    names = sheet_names([_title(page, kind) for page in pages])
    found: dict[str, Place] = {}
    for page, name in zip(pages, names, strict=True):
        sheet = book.create_sheet(name)
        sheet.sheet_state = "visible"
        for cell, row, column in _placed(page, kind):
            plain = cell.number is not None and not cell.unit and cell.factor == 1.0
            put(sheet, row, column, cell.number if plain else cell.text)
            _widen(sheet, column, cell.text)
            found[cell.address] = Place(name, f"{get_column_letter(column)}{row}")
        style.print_setup(sheet)
    return found


def add_note(book: Any, place: Place, text: str) -> None:
    """Note a cell."""
    note = Comment(f"{AUTHOR}\n{text}", AUTHOR)
    lines = sum(1 + len(line) // NOTE_CHARACTERS for line in text.splitlines()) + 2
    note.width, note.height = NOTE_WIDTH, NOTE_LINE * lines
    book[place.sheet][place.cell].comment = note


def _title(page: Page, kind: str) -> str:
    return page.name if kind != "csv" else "As read"


def _placed(page: Page, kind: str) -> list[tuple[Cell, int, int]]:
    """The cells of a page with row and column of a sheet."""
    if kind != "pdf":
        return [(cell, cell.row, int(cell.left)) for cell in page.cells]
    starts = _starts(page)
    taken: dict[int, int] = {}
    placed = []
    for cell in sorted(page.cells, key=lambda cell: (cell.row, cell.left)):
        column = 1 + max(place for place, start in enumerate(starts) if start <= cell.left + 1e-6)
        column = max(column, taken.get(cell.row, 0) + 1)
        taken[cell.row] = column
        placed.append((cell, cell.row, column))
    return placed


def _starts(page: Page) -> list[float]:
    """Where the columns of a page begin: places that begin near each other are one."""
    starts: list[float] = []
    for left in sorted({cell.left for cell in page.cells}):
        if not starts or left - starts[-1] >= NEAR:
            starts.append(left)
    return starts


def _widen(sheet: Any, column: int, text: str) -> None:
    letter = get_column_letter(column)
    before = sheet.column_dimensions[letter].width if letter in sheet.column_dimensions else 9.0
    sheet.column_dimensions[letter].width = max(before, min(len(text) + 2.0, WIDEST))
