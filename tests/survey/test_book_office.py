"""The output workbook in real LibreOffice: it opens, shows the same values, no error, and its charts are there."""

from __future__ import annotations

import zipfile
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from book.office import convert, needs_office, recalculated
from lowpoint.survey.output.summary import failing
from survey.books import bay, opened, written

ERRORS = ("#N/A", "#NUM!", "#VALUE!", "#REF!", "#NAME?", "#DIV/0!", "Err:")


def _cells(book: Any) -> dict[tuple[str, str], Any]:
    return {(sheet.title, cell.coordinate): cell.value for sheet in book.worksheets
            for row in sheet.iter_rows() for cell in row if cell.value is not None}  # fmt: skip


@needs_office
def test_libreoffice_shows_the_same_values(tmp_path: Path) -> None:
    survey = bay()
    ours = _cells(opened(survey, tmp_path, pages=4))
    shown = _cells(openpyxl.load_workbook(recalculated(tmp_path / "out.xlsx", tmp_path / "office")))
    assert shown.keys() == ours.keys()
    for place, value in ours.items():
        if isinstance(value, float):
            assert shown[place] == pytest.approx(value, rel=1e-13), place
        else:
            assert shown[place] == value, place
    assert not [place for place, value in shown.items() if str(value).startswith(ERRORS)]


@needs_office
def test_libreoffice_keeps_the_charts(tmp_path: Path) -> None:
    """Charts whose references were wrong would come back without their series."""
    survey = bay()
    again = recalculated(written(survey, tmp_path / "out.xlsx", pages=3), tmp_path / "office")
    charts = [chart for item in failing(survey)[:3] for chart in opened(survey, tmp_path, pages=3)[item.tag]._charts]
    with zipfile.ZipFile(again) as package:
        parts = [package.read(name) for name in package.namelist() if name.startswith("xl/charts/chart")]
    assert len(parts) == len(charts) == 6
    assert sorted(part.count(b"<c:ser>") for part in parts) == sorted(len(chart.series) for chart in charts)
    assert all(b"<c:pt idx=" in part for part in parts)  # it found numbers behind the references


@needs_office
def test_libreoffice_prints_it(tmp_path: Path) -> None:
    pdf = convert(written(bay(), tmp_path / "out.xlsx", pages=1), tmp_path / "office", recalculate=False, kind="pdf")
    assert pdf.read_bytes().startswith(b"%PDF")
