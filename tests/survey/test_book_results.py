"""The output workbook: its cells are the survey's findings, the list stands beside them, and it can be read again."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import openpyxl
import pytest

from lowpoint.survey import Survey, survey_list
from lowpoint.survey.fields import FIELDS, TABLE_FIELDS
from lowpoint.survey.headers import read_heading
from lowpoint.survey.model import number_fields
from lowpoint.survey.own_sheet import LEFT_ALONE
from lowpoint.survey.result_columns import RESULT_COLUMNS, RESULT_HEADINGS, is_result, result_heading, result_of
from lowpoint.units import dimension
from survey.books import bay, listed, opened, sheet_rows, written
from survey_lists import GOOD, HEADINGS, kestrel_rows, write_csv, write_xlsx


def _results(survey: Survey, folder: Path, **options: Any) -> tuple[list[Any], list[list[Any]]]:
    return sheet_rows(opened(survey, folder, pages=0, **options)["Results"], "Fails")


def _column(headings: list[Any], rows: list[list[Any]], heading: str) -> list[Any]:
    return [row[headings.index(heading)] for row in rows]


# --- headings ---------------------------------------------------------------------------------------------------


def test_headings_of_results_are_told_from_those_of_a_list() -> None:
    for column in RESULT_COLUMNS:
        for system in ("metric", "us"):
            text = result_heading(column, system)
            assert result_of(text) is column
            assert all(read_heading(text, catalogue).field is None for catalogue in (FIELDS, TABLE_FIELDS)), text
    assert len({heading.casefold() for heading in RESULT_HEADINGS}) == len(RESULT_COLUMNS)
    assert not any(is_result(name) for field in FIELDS for name in field.names)
    assert not {heading for heading in LEFT_ALONE if is_result(heading)}  # the columns of a book with LP_ formulas


# --- cells ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("system", ["metric", "us"])
def test_the_cells_are_the_findings(system: str, tmp_path: Path) -> None:
    survey = bay()
    headings, rows = _results(survey, tmp_path, system=system)
    assert len(rows) == survey.cases.count
    pressure = dimension("pressure").unit(system)
    pairs = (
        ("Margin", survey.findings.margin), ("Index here", survey.findings.sigma),
        ("Damage limit here", survey.findings.damage), ("Travel needed", survey.findings.travel),
        (f"Drop at choking [{pressure.label}]", survey.findings.choked_drop / pressure.factor),
        (f"p1 used [{'bar a' if system == 'metric' else 'psia'}]", survey.cases.p1 / pressure.factor),
    )  # fmt: skip
    for heading, values in pairs:
        cells = [math.nan if cell is None else cell for cell in _column(headings, rows, heading)]
        np.testing.assert_allclose(cells, values, rtol=1e-14)
    verdicts = [f"{r} ({b})" if b else r or "no answer"
                for r, b in zip(survey.findings.regime, survey.findings.basis, strict=True)]  # fmt: skip
    assert _column(headings, rows, "Verdict") == verdicts
    fails = ["no answer" if regime is None else "yes" if fails else "no"
             for regime, fails in zip(survey.findings.regime, survey.findings.fails, strict=True)]  # fmt: skip
    assert _column(headings, rows, "Fails") == fails
    errors = [cell is not None for cell in _column(headings, rows, "Why there is no answer")]
    assert errors == [bool(said) for said in survey.findings.errors]


def test_the_list_stands_as_it_was_read(tmp_path: Path) -> None:
    own, listed_rows = kestrel_rows()
    headings, rows = _results(bay(), tmp_path)
    assert headings[: len(own)] == own
    assert [row[: len(own)] for row in rows] == listed_rows


def test_the_sheet_can_be_filtered_scrolled_and_printed(tmp_path: Path) -> None:
    sheet = opened(bay(), tmp_path, pages=0)["Results"]
    headings, _ = sheet_rows(sheet, "Fails")
    last = openpyxl.utils.get_column_letter(len(headings))
    assert sheet.auto_filter.ref == f"A5:{last}{5 + bay().cases.count}"
    assert sheet.freeze_panes == "C6"
    assert (sheet.page_setup.orientation, sheet.print_title_rows, sheet.print_title_cols) == (
        "landscape", "$4:$5", "$A:$B")  # fmt: skip
    assert sheet.dimensions == f"A1:{last}{5 + bay().cases.count}"
    cell = sheet.cell(6, headings.index("Margin") + 1)
    assert cell.number_format == "0.0%"


# --- read again -------------------------------------------------------------------------------------------------


def _same(first: Survey, again: Survey) -> None:
    assert again.cases.tag.tolist() == first.cases.tag.tolist()
    assert again.findings.regime.tolist() == first.findings.regime.tolist()
    for name in number_fields(type(first.findings)):
        np.testing.assert_allclose(getattr(again.findings, name), getattr(first.findings, name), rtol=1e-12, atol=1e-12,
                                   err_msg=name)  # fmt: skip
    assert [problem.text for problem in again.reading.problems] == [p.text for p in first.reading.problems]


def test_the_workbook_is_a_list_again(tmp_path: Path) -> None:
    book = written(bay(), tmp_path / "out.xlsx")
    again = survey_list(book)
    _same(bay(), again)
    assert again.reading.sheets == ("Results",)
    assert not again.reading.unknown()
    assert sum(column.status == "result" for column in again.reading.columns) == len(RESULT_COLUMNS)
    headings, _ = _results(again, tmp_path)
    assert headings == _results(bay(), tmp_path)[0]  # results never pile up


def test_a_csv_with_decimal_commas_comes_back_as_numbers(tmp_path: Path) -> None:
    row = [str(value).replace(".", ",") for value in GOOD]
    first = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, [row], ";"))
    again = survey_list(written(first, tmp_path / "out.xlsx"))
    _same(first, again)
    assert _results(first, tmp_path)[1][0][: len(GOOD)] == list(GOOD)


def test_what_holds_for_all_rows_comes_along(tmp_path: Path) -> None:
    """The elevation of the command line, a line above the table, a unit in a row of its own, a tolerance."""
    headings = [heading.replace("bar a", "bar g") for heading in HEADINGS]
    first = survey_list(write_xlsx(tmp_path / "list.xlsx", headings, [GOOD]), elevation=845.0)
    assert first.findings.regime[0] == "clear"
    _same(first, survey_list(written(first, tmp_path / "out.xlsx")))

    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for row in (["Atmosphere [bar]", 0.95], ["Tolerance p1", "3 %"], ["Tolerance temperature", "2 K"], [],
                [heading.partition(" [")[0] for heading in headings],
                [heading.partition("[")[2].rstrip("]") or None for heading in headings], list(GOOD)):  # fmt: skip
        sheet.append(row)
    book.save(tmp_path / "above.xlsx")
    first = survey_list(tmp_path / "above.xlsx")
    assert first.cases.p1[0] == pytest.approx((5.8 + 0.95) * 1e5)
    again = survey_list(written(first, tmp_path / "out.xlsx"))
    _same(first, again)
    assert [(t.field, t.size) for t in again.reading.tolerances] == [("p1", 0.03), ("t", 2.0)]


def test_vendors_tables_come_along(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "List"
    row = dict(zip(HEADINGS, GOOD, strict=True)) | {"FL": None, "Table": "T1"}
    sheet.append(list(row))
    sheet.append(list(row.values()))
    tables = book.create_sheet("Vendor")
    for line in (("Table", "Travel [%]", "Kv", "FL"), ("T1", 10, 8, 0.95), ("T1", 50, 40, 0.9), ("T1", 100, 98, 0.8)):
        tables.append(line)
    book.save(tmp_path / "list.xlsx")
    first = survey_list(tmp_path / "list.xlsx")
    assert first.findings.regime[0] == "clear"
    _same(first, survey_list(written(first, tmp_path / "out.xlsx")))


def test_two_lists_in_one_file(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    for name, tag in (("North", "21-FCV-1"), ("South", "22-FCV-1")):
        sheet = book.create_sheet(name)
        sheet.append([*HEADINGS, "Site elevation [m]"] if name == "North" else list(HEADINGS))
        sheet.append([tag, *GOOD[1:]])
    book.save(tmp_path / "list.xlsx")
    first = survey_list(tmp_path / "list.xlsx")
    out = opened(first, tmp_path)
    assert [name for name in out.sheetnames if name.startswith("Results")] == ["Results", "Results (2)"]
    assert sheet_rows(out["Results (2)"], "Fails")[1][0][0] == "22-FCV-1"
    _same(first, survey_list(tmp_path / "out.xlsx"))


def test_a_file_without_a_list_still_gives_a_book(tmp_path: Path) -> None:
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", ["Tag", "Colour"], [["21-FCV-1", "red"]]))
    book = opened(survey, tmp_path)
    assert book.sheetnames == ["Summary", "Assumptions"]
    said = " ".join(str(cell) for row in book["Summary"].iter_rows(values_only=True) for cell in row if cell)
    assert "No row has the headings of a list" in said


def test_rows_without_an_answer_keep_their_place(tmp_path: Path) -> None:
    survey = listed(tmp_path, {}, {"FL": None}, {"p2 [bar a]": 9.0}, {})
    headings, rows = _results(survey, tmp_path)
    assert [row[1] for row in rows] == ["case 0", "case 1", "case 2", "case 3"]
    verdicts = _column(headings, rows, "Verdict")
    assert verdicts == ["clear (tested)", "no answer", "no answer", "clear (tested)"]
    assert "FL" in _column(headings, rows, "Why there is no answer")[1]
