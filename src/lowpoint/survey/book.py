"""The output workbook of a survey: results beside the list, a summary, a page a failing item, and what it rests on.

Formulas, macros and links to other files have no place in it: every number stands as a value. Two runs give the same
bytes but for the date.
"""

from __future__ import annotations

import os
from datetime import date, datetime, time
from pathlib import Path

from lowpoint.book.saving import replace_file
from lowpoint.survey.model import Survey

__all__ = ["book_bytes", "write_book"]

PAGES = 50


def write_book(
    survey: Survey, path: str | os.PathLike[str], *, system: str = "metric", pages: int = PAGES,
    today: date | None = None,
) -> None:  # fmt: skip
    """Write the workbook of a survey; a file of that name is replaced in one step, or left as it was.

    ``system``: units of the results, ``metric`` or ``us`` (the list keeps its own). ``pages``: failing items that get
    a page, the worst first. ``today``: the date that the book states. BookError where it cannot be written.
    """
    data = book_bytes(survey, system=system, pages=pages, today=today)
    replace_file(Path(path), lambda sink: sink.write(data))


def book_bytes(survey: Survey, *, system: str = "metric", pages: int = PAGES, today: date | None = None) -> bytes:
    """The same as bytes."""
    from lowpoint.styling.packing import packed
    from lowpoint.styling.strings import Strings
    from lowpoint.survey.output.assembling import assembled
    from lowpoint.survey.worded import in_system

    day = today or date.today()
    survey = in_system(survey, system)
    strings = Strings()
    book, fillers = assembled(survey, system, pages, day, strings)
    return packed(book, datetime.combine(day, time()), fillers, strings)
