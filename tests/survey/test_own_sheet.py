"""The book with LP_ formulas is a list too: its sheet List is judged as its own formulas judge it."""

from __future__ import annotations

import math
from functools import cache
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from lowpoint.starter.columns import COLUMNS
from lowpoint.survey import Survey, survey_list
from lowpoint.survey.fields import FIELDS
from lowpoint.survey.headers import read_heading
from lowpoint.survey.own_sheet import LEFT_ALONE

WORKBOOKS = Path(__file__).parents[2] / "workbooks"
BOOKS = ("kestrel-bay.xlsx", "kestrel-bay-us.xlsx")


@cache
def _survey(name: str) -> Survey:
    return survey_list(WORKBOOKS / name)


def _own_results(path: Path) -> list[dict[str, Any]]:
    """The cells of the sheet List by heading without its unit, row by row."""
    sheet = openpyxl.load_workbook(path, data_only=True)["List"]
    rows = [row for row in sheet.iter_rows(values_only=True) if row[0] is not None]
    start = next(i for i, row in enumerate(rows) if row[0] == "Tag")
    names = [str(name).partition("\n")[0] for name in rows[start]]
    return [dict(zip(names, row, strict=True)) for row in rows[start + 1 :]]


def test_every_heading_of_the_form_is_an_input_or_left_alone() -> None:
    for column in COLUMNS:
        known = read_heading(column.heading, FIELDS).field is not None
        assert known is not (column.heading in LEFT_ALONE), column.heading
    assert {column.heading for column in COLUMNS} >= LEFT_ALONE


@pytest.mark.parametrize("name", BOOKS)
def test_verdicts_are_those_of_the_formulas(name: str) -> None:
    """The cells were computed by the functions, whose tests are elsewhere: here the two ways must agree."""
    survey, own = _survey(name), _own_results(WORKBOOKS / name)
    assert survey.cases.count == len(own)
    agreed = 0
    for place, cells in enumerate(own):
        regime, where = survey.findings.regime[place], (cells["Tag"], cells["Case"])
        if regime is None:
            assert str(cells["Why (LP_WHY)"]) != "ok", where
            continue
        assert cells["State of the flow"] == regime, where
        margin = cells["Margin to the limit to keep"]
        if isinstance(margin, float) and survey.findings.keep[place] == cells["Limit to keep"]:
            assert math.isclose(survey.findings.margin[place], margin, rel_tol=1e-9, abs_tol=1e-12), where
            agreed += 1
    assert agreed > len(own) / 2


@pytest.mark.parametrize("name", BOOKS)
def test_what_is_told_of_the_sheet(name: str) -> None:
    reading = _survey(name).reading
    assert reading.sheets == ("List",)
    assert reading.missing == ()
    assert not reading.unknown()
    assert any(note.startswith("List is a sheet with LP_ formulas") for note in reading.notes)
    assert any("Long list has no column Tag" in note for note in reading.notes) is ("us" not in name)
    cautions = [text for texts in _survey(name).findings.cautions for text in texts]
    assert any("the row reads its valve's table" in text for text in cautions)


def test_formulas_without_values(tmp_path: Path) -> None:
    """A book that another program wrote anew holds no values: each is named, with the remedy, and nothing is judged."""
    book = openpyxl.load_workbook(WORKBOOKS / BOOKS[0])
    book.save(tmp_path / "list.xlsx")
    survey = survey_list(tmp_path / "list.xlsx")
    assert survey.cases.count == _survey(BOOKS[0]).cases.count
    assert set(survey.findings.regime.tolist()) == {None}
    first = survey.reading.problems[0].sentence()
    assert "is a formula without a value. Open the book in a spreadsheet program and save it there" in first
    assert "or recompute it with 'lowpoint recalc'." in first


@pytest.mark.parametrize(("word", "method"), [("tullis", "tullis"), ("upstream", "upstream"), (None, None)])
def test_the_method_stands_on_another_sheet(word: str | None, method: str | None, tmp_path: Path) -> None:
    book = openpyxl.load_workbook(WORKBOOKS / BOOKS[0], data_only=True)
    for row in book["Site"].iter_rows():
        if str(row[0].value).startswith("Method that carries"):
            next(cell for cell in row[1:] if cell.value).value = word
    book.save(tmp_path / "list.xlsx")
    survey = survey_list(tmp_path / "list.xlsx")
    assert set(survey.cases.method.tolist()) == {method}
    told = [p.sentence() for p in survey.reading.problems if "isa was taken" in p.sentence()]
    assert len(told) == (word is None)
