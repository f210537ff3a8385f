"""The pages of the output workbook: summary, failing items with native charts, assumptions."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from openpyxl.utils import range_boundaries

from lowpoint import __version__
from lowpoint.survey.items import ORDER
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.output.summary import failing
from lowpoint.survey.pictures import index_picture, pressure_picture
from lowpoint.survey.sensing import sense
from survey.books import DAY, bay, listed, opened


def _texts(sheet: Any) -> list[str]:
    return [str(cell) for row in sheet.iter_rows(values_only=True) for cell in row if cell is not None]


def _beside(sheet: Any, label: str, steps: int = 1) -> Any:
    """The value some cells to the right of a label."""
    for row in sheet.iter_rows():
        for cell in row:
            if cell.value == label:
                return sheet.cell(cell.row, cell.column + steps).value
    raise AssertionError(f"no cell holds {label}")


# --- summary ----------------------------------------------------------------------------------------------------


def test_the_summary_counts_what_the_survey_found(tmp_path: Path) -> None:
    survey = bay()
    sheet = opened(survey, tmp_path, pages=0)["Summary"]
    items = Counter(item.regime for item in survey.items)
    cases = Counter(survey.findings.regime.tolist())
    for word in ORDER:
        assert (_beside(sheet, word), _beside(sheet, word, 2)) == (items[word], cases[word])
    assert (_beside(sheet, "no answer"), _beside(sheet, "no answer", 2)) == (items[None], cases[None])
    assert _beside(sheet, "Items that fail", 2) == sum(item.fails for item in survey.items)
    assert _beside(sheet, "Cases unjudged (no incipient limit)", 2) == cases["unjudged"]
    told = _texts(sheet)
    for item in failing(survey)[:10]:
        assert item.tag in told
        assert item.why in told
    for problem in survey.reading.problems:
        assert problem.cell in told
        assert problem.remedy in told


def test_the_summary_says_how_many_items_have_no_page(tmp_path: Path) -> None:
    survey = bay()
    count = len(failing(survey))
    book = opened(survey, tmp_path, pages=3)
    assert book.sheetnames == ["Summary", "Results", *(item.tag for item in failing(survey)[:3]), "Assumptions"]
    told = " ".join(_texts(book["Summary"]))
    assert f"3 failing items of {count} have a page of their own" in told
    assert f"{count - 3} items have none: at most 3 pages were asked for" in told


def test_the_summary_links_to_the_pages_and_nowhere_else(tmp_path: Path) -> None:
    survey = bay()
    sheet = opened(survey, tmp_path)["Summary"]
    links = [cell.hyperlink for row in sheet.iter_rows() for cell in row if cell.hyperlink]
    assert [link.location for link in links] == [f"'{item.tag}'!A1" for item in failing(survey)]
    assert not any(link.target for link in links)


def test_unknown_and_missing_columns_are_named(tmp_path: Path) -> None:
    survey = listed(tmp_path, {}, headings=("Tag", "Case", "Flow [m3/h]", "p1 [bar a]", "Colour of paint"))
    told = " ".join(_texts(opened(survey, tmp_path)["Summary"]))
    assert "'Colour of paint'" in told
    assert "p2, or Outlet into" in told


# --- items ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("system", ["metric", "us"])
def test_a_page_has_the_cases_and_the_working(system: str, tmp_path: Path) -> None:
    survey = bay()
    item = next(i for i in failing(survey) if i.kind == "valve" and i.regime == "damage")
    sheet = opened(survey, tmp_path, system=system)[item.tag]
    assert sheet["A1"].value.startswith(f"{item.tag}: damage")
    told = _texts(sheet)
    assert any(item.why in text for text in told)
    for steps, place in enumerate(item.rows, 2):
        assert _beside(sheet, "Index here", steps) == pytest.approx(survey.findings.sigma[place], rel=1e-12)
        assert _beside(sheet, "Margin", steps) == pytest.approx(survey.findings.margin[place], rel=1e-12)
    assert "With its numbers" in told
    assert any("p1 - pv" in text for text in told)


def test_the_worst_cases_of_many_are_shown(tmp_path: Path) -> None:
    survey = listed(tmp_path, *({"p2 [bar a]": 1.0 + 0.2 * number} for number in range(14)))
    sheet = opened(survey, tmp_path)[survey.items[0].tag]
    heads = [cell.value for cell in next(row for row in sheet.iter_rows() if row[0].value == "What")]
    assert heads[2] == "case 0\n(worst)"
    assert [head for head in heads if head and head.startswith("case")][-1] == "case 9"
    assert any("the 10 worst of 14" in text for text in _texts(sheet))


def test_remedies_and_sensitivity_are_told(tmp_path: Path) -> None:
    survey = listed(tmp_path, {"p2 [bar a]": 1.0})
    tag = survey.items[0].tag
    good = Remedy(
        "back-pressure", "Hold 3.1 bar a at the outlet.", {}, True, 0.05, ("incipient",), ("Check the pipe.",)
    )
    bad = Remedy("staged trim", "Four stages.", {}, False, -0.2, ("damage",), ())
    sensed = sense(survey.cases, survey.findings)
    book = opened(replace(survey, remedies={tag: (good, bad)}, sensitivity=sensed), tmp_path)
    told = _texts(book[tag])
    assert told.index(good.text) < told.index(bad.text)
    assert {"yes", "no", "Check the pipe."} <= set(told)
    assert any("every input at its adverse end" in text for text in told)
    assert good.text in _texts(book["Summary"])
    assert good.text in _texts(book["Results"])
    assert any("±" in text for text in _texts(book["Assumptions"]))


# --- charts -----------------------------------------------------------------------------------------------------


def _cells(book: Any, formula: str) -> list[Any]:
    """The values of the cells that a chart refers to."""
    name, _, area = formula.rpartition("!")
    sheet = book[name.strip("'").replace("''", "'")]
    left, top, right, bottom = range_boundaries(area.replace("$", ""))
    return [sheet.cell(row, column).value for row in range(top, bottom + 1) for column in range(left, right + 1)]


def test_the_charts_draw_the_pictures(tmp_path: Path) -> None:
    survey = bay()
    book = opened(survey, tmp_path)
    for item in failing(survey):
        pressure, index = book[item.tag]._charts
        picture = pressure_picture(survey, item.worst)
        assert [_cells(book, s.tx.strRef.f) for s in pressure.series] == [[line.name] for line in picture.lines]
        assert _cells(book, pressure.series[0].cat.strRef.f) == [name for _, name in picture.x_ticks]
        np.testing.assert_allclose(_cells(book, pressure.series[0].val.numRef.f), picture.lines[0].y, rtol=1e-12)
        vapour = _cells(book, pressure.series[1].val.numRef.f)
        np.testing.assert_allclose(vapour, survey.cases.pv[item.worst] / 1e5, rtol=1e-12)
        picture = index_picture(survey, item)
        for line, series in zip(picture.lines, index.series, strict=False):
            assert _cells(book, series.tx.strRef.f) == [line.name]
            np.testing.assert_allclose(_cells(book, series.xVal.numRef.f), line.x, rtol=1e-12)
            np.testing.assert_allclose(_cells(book, series.yVal.numRef.f), line.y, rtol=1e-12)
        names = [_cells(book, series.tx.strRef.f)[0] for series in index.series[len(picture.lines) :]]
        assert tuple(names) == picture.lines[0].labels


def test_lines_differ_by_dash_or_marker(tmp_path: Path) -> None:
    survey = bay()
    for chart in opened(survey, tmp_path)[failing(survey)[3].tag]._charts:
        looks = [(s.graphicalProperties.line.prstDash, s.marker.symbol) for s in chart.series
                 if s.dLbls is None]  # fmt: skip
        assert len(set(looks)) == len(looks) > 2


# --- assumptions ------------------------------------------------------------------------------------------------


def test_the_assumptions_say_what_was_taken_and_from_where(tmp_path: Path) -> None:
    survey = bay()
    sheet = opened(survey, tmp_path, pages=0)["Assumptions"]
    assert _beside(sheet, "Fingerprint of the list (SHA-256)") == survey.reading.fingerprint
    assert _beside(sheet, "Version") == __version__
    assert _beside(sheet, "Date") == DAY.isoformat()
    told = " ".join(_texts(sheet))
    for words in ("IEC 60534-2-1", "IAPWS", "licensed practice", "(p1-pv)/(p1-p2)", "of the standard atmosphere at"):
        assert words in told
    assert "Kuroda" not in told  # there are no plates in the list


def test_plates_have_pages_with_their_sources(tmp_path: Path) -> None:
    headings = ("Tag", "Case", "Kind", "Liquid", "Temperature [deg C]", "Flow [m3/h]", "p1 [bar a]", "p2 [bar a]",
                "Inlet pipe bore [mm]", "Bore [mm]", "Bores [mm]")  # fmt: skip
    single = {"Tag": "21-RO-119", "Kind": "orifice", "Inlet pipe bore [mm]": 154.05, "Bore [mm]": 60, "p1 [bar a]": 20,
              "p2 [bar a]": 1}  # fmt: skip
    several = single | {"Tag": "21-RO-120", "Kind": "plates", "Bore [mm]": None, "Bores [mm]": "55; 60; 70"}
    survey = listed(tmp_path, single, several, headings=headings)
    assert [item.fails for item in survey.items] == [True, True]
    book = opened(survey, tmp_path)
    assert "Kuroda" in " ".join(_texts(book["Assumptions"]))
    chart = book["21-RO-120"]._charts[0]
    assert _cells(book, chart.series[0].cat.strRef.f)[:3] == ["inlet", "plate 1", "after 1"]
    assert "plate 3" in _cells(book, chart.series[0].cat.strRef.f)
