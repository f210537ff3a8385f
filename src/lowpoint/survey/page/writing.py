"""The page as one file: template, style, script and data put together, closed to the network, written in one step."""

from __future__ import annotations

import base64
import datetime
import hashlib
import json
import os
import re
from functools import cache
from importlib import resources
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint import __version__
from lowpoint.book.saving import replace_file
from lowpoint.survey.items import ORDER
from lowpoint.survey.model import Survey
from lowpoint.survey.page.contents import foundations, numbered_notes, problems_of, summary_of, worst_first
from lowpoint.survey.page.rows import Column, Mark, columns_of, marks_of
from lowpoint.survey.page.sections import item_pages
from lowpoint.survey.taken import CAUTION
from lowpoint.survey.worded import in_system

if TYPE_CHECKING:
    from jinja2 import Environment

__all__ = ["page_text", "write_page"]

STATIC = 1500
"""Rows that stand in the page itself, for a reader without script; the script takes them all from the data."""


def write_page(survey: Survey, path: str | os.PathLike[str], *, system: str = "metric", pages: int = 50,
               today: datetime.date | None = None) -> None:  # fmt: skip
    """Write a survey as one page that needs no network: verdicts, filter and sort, pictures, remedies, workings.

    ``system`` is the set of units (``metric``, ``us``), ``pages`` how many failing items get a page of their own,
    worst first; every case is in the table. The same survey gives the same bytes but for ``today``. BookError where
    the file cannot be written; the file of before is then as it was.
    """
    text = page_text(survey, system=system, pages=pages, today=today)
    # A lone surrogate, which a damaged list may hold, is no character: it is shown as the sign for one.
    data = text.encode("utf-8", errors="xmlcharrefreplace")
    replace_file(Path(path), lambda sink: sink.write(data))


def page_text(survey: Survey, *, system: str = "metric", pages: int = 50, today: datetime.date | None = None) -> str:
    """The whole page as text."""
    survey = in_system(survey, system)
    failing = [item for item in worst_first(survey) if item.fails]
    notes = numbered_notes(survey)
    sections = {item.tag: number for number, item in enumerate(failing[:pages], start=1)}
    columns = columns_of(survey, system, {note.text: note.number for note in notes})
    marks = marks_of(survey, sections)
    style, script = _part("style.css"), _part("script.js")
    problems, more_problems = problems_of(survey)
    return _environment().get_template("page.html").render(
        name=Path(survey.reading.path).name, date=(today or datetime.date.today()).isoformat(), version=__version__,
        reading=survey.reading, summary=summary_of(survey), columns=columns, order=(*ORDER, "no answer"),
        rows=_static_rows(columns, marks), count=len(marks), static=STATIC, notes=notes,
        items=item_pages(survey, failing[:pages], system), without_page=failing[pages:], problems=problems,
        more_problems=more_problems, foundations=foundations(survey, system), caution=CAUTION,
        sections=sections, style=style, script=script, style_hash=_hash(style), script_hash=_hash(script),
        data=_data(columns, marks),
    )  # fmt: skip


def _static_rows(columns: list[Column], marks: list[Mark]) -> list[tuple[Mark, list[str]]]:
    """The rows that stand in the page: all of a usual list; of a very long one those that fail or have no answer."""
    places = range(len(marks))
    if len(marks) > STATIC:
        places = [n for n, mark in enumerate(marks) if mark.fails or mark.regime == len(ORDER)][:STATIC]  # type: ignore[assignment]
    return [(marks[n], [column.cells[n] for column in columns]) for n in places]


def _data(columns: list[Column], marks: list[Mark]) -> str:
    """The table for the script. Every ``<`` is written by its code, so that no text of a list can end the block."""
    table = {
        "columns": [{"heading": c.heading, "sort": c.sort, "look": c.look, "cells": c.cells} for c in columns],
        "order": [*ORDER, "no answer"], "regimes": [mark.regime for mark in marks],
        "fails": [int(mark.fails) for mark in marks], "sections": [mark.section for mark in marks],
    }  # fmt: skip
    return json.dumps(table, separators=(",", ":")).replace("<", "\\u003c").replace(">", "\\u003e")


def _part(name: str) -> str:
    return resources.files(__package__).joinpath("parts", name).read_text(encoding="utf-8")


def _hash(text: str) -> str:
    """What the page's own rule for content knows its script and its style by."""
    return "sha256-" + base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()


@cache
def _environment() -> Environment:
    from jinja2 import Environment, PackageLoader, StrictUndefined
    from markupsafe import Markup

    made = Environment(loader=PackageLoader(__package__ or "", "parts"), autoescape=True, undefined=StrictUndefined,
                       trim_blocks=True, lstrip_blocks=True, keep_trailing_newline=True)  # fmt: skip
    made.filters["own"] = Markup  # for the page's own style, script, data and drawings only
    made.filters["first_up"] = _first_up
    return made


def _first_up(text: Any) -> str:
    """A sentence with a capital letter, unless a symbol stands first: p2 is not P2."""
    words = str(text)
    symbol = re.match(r"(?:p[1-9vc]|dp|t|x[fF]z?)\b", words)
    return words if symbol else words[:1].upper() + words[1:]
