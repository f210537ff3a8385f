"""Recalculated ordinary formulas agree with LibreOffice where it knows them, newer ones with their documentation."""

from __future__ import annotations

import datetime
import math
import zipfile
from pathlib import Path
from typing import Any, NamedTuple

import openpyxl
import pytest
import xlsxwriter
from openpyxl.utils.datetime import to_excel
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.formula import ArrayFormula

from book.formulas import (
    DOCUMENTED,
    KEPT,
    NAMES,
    OFFICE_DIFFERS,
    OFFICE_ERRORS,
    ORDINARY,
    SHEETS,
    Documented,
    Ordinary,
)
from book.office import needs_office, recalculated
from lowpoint.book.probes import KNOWN, met
from lowpoint.book.recalc import recalculate
from lowpoint.book.report import Report

_APART = 20  # rows from one documented formula to the next: room for what spills
# The file format has no #CALC!: a cell that shows it stores #VALUE! (from memory).
_STORED = {"#CALC!": "#VALUE!"}


class Recalculated(NamedTuple):
    """What became of a book: the values of sheet Calc by row and column, and the report."""

    values: dict[tuple[int, int], Any]
    report: Report


def _ordinary_book(path: Path) -> Path:
    """The list and the ordinary formulas in Calc!B1 downwards, by openpyxl, without stored values."""
    book = openpyxl.Workbook()
    del book["Sheet"]
    for name, rows in SHEETS.items():
        sheet = book.create_sheet(name)
        for row in rows:
            sheet.append(row)
    sheet = book.create_sheet("Calc")
    for number, item in enumerate(ORDINARY, start=1):
        array = item.formula.startswith("{")
        sheet.cell(number, 2).value = ArrayFormula(f"B{number}", item.formula[1:-1]) if array else item.formula
    for name, place in NAMES.items():
        book.defined_names[name] = DefinedName(name, attr_text=place)
    book.save(path)
    return path


def _documented_book(path: Path) -> Path:
    """The list and the documented formulas as dynamic arrays, by XlsxWriter."""
    with xlsxwriter.Workbook(str(path)) as book:
        for name in ("List", "Table"):
            sheet, rows = book.add_worksheet(name), SHEETS[name]
            for number, row in enumerate(rows):
                for column, value in enumerate(row):
                    write = sheet.write_string if isinstance(value, str) else sheet.write
                    write(number, column, value)
        sheet = book.add_worksheet("Calc")
        for number, item in enumerate(DOCUMENTED):
            row = number * _APART
            sheet.write_dynamic_array_formula(row, 1, row, 1, item.formula)
        for name, place in NAMES.items():
            book.define_name(name, f"={place}")
    return path


def _read(path: Path) -> dict[tuple[int, int], Any]:
    sheet = openpyxl.load_workbook(path, data_only=True)["Calc"]
    cells = (cell for row in sheet.iter_rows() for cell in row)
    return {(cell.row, cell.column): _plain(cell.value) for cell in cells}


def _plain(value: Any) -> Any:
    """A value as openpyxl reads it from a saved cell, as a cell value."""
    if isinstance(value, datetime.timedelta):
        return value / datetime.timedelta(days=1)
    if isinstance(value, (datetime.datetime, datetime.date, datetime.time)):
        return to_excel(value)
    return float(value) if isinstance(value, int) and not isinstance(value, bool) else value


def _agree(found: Any, wanted: Any) -> bool:
    """Numbers to 1e-12, text to the letter (a blank is the empty text), a logical only with a logical."""
    if isinstance(found, float) and isinstance(wanted, float):
        return math.isclose(found, wanted, rel_tol=1e-12)
    if isinstance(found, bool) is not isinstance(wanted, bool):
        return False
    return bool((found or None) == (wanted or None)) if isinstance(found, (str, type(None))) else bool(found == wanted)


def _ours(source: Path) -> Recalculated:
    out = source.with_name("recalculated.xlsx")
    report = recalculate(source, out)
    return Recalculated(_read(out), report)


@pytest.fixture(scope="module")
def ordinary(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return _ordinary_book(tmp_path_factory.mktemp("ordinary") / "ordinary.xlsx")


@pytest.fixture(scope="module")
def ours(ordinary: Path) -> Recalculated:
    """What our recalculation gives for the ordinary formulas."""
    return _ours(ordinary)


@pytest.fixture(scope="module")
def theirs(ordinary: Path) -> dict[tuple[int, int], Any]:
    """What LibreOffice gives for them, in one run."""
    return _read(recalculated(ordinary, ordinary.parent / "office"))


@pytest.fixture(scope="module")
def documented(tmp_path_factory: pytest.TempPathFactory) -> Recalculated:
    """What our recalculation gives for the newer functions."""
    return _ours(_documented_book(tmp_path_factory.mktemp("documented") / "documented.xlsx"))


_ROWS = [(row, item) for row, item in enumerate(ORDINARY, start=1) if item.formula not in KEPT]


@needs_office
@pytest.mark.parametrize("row, item", _ROWS, ids=[f"{item.group} {item.formula}" for _, item in _ROWS])
def test_agrees_with_libreoffice(
    row: int, item: Ordinary, ours: Recalculated, theirs: dict[tuple[int, int], Any]
) -> None:
    found, wanted = ours.values[row, 2], theirs[row, 2]
    if item.formula in OFFICE_DIFFERS:
        assert not _agree(OFFICE_DIFFERS[item.formula][0], wanted), (
            "LibreOffice agrees by now: take it out of the table"
        )
    elif item.formula in OFFICE_ERRORS:
        assert wanted == "#VALUE!", "LibreOffice gives another error by now: revise the table"
    else:
        assert wanted != "#NAME?", "LibreOffice does not know it: give it a documented value"
        assert _agree(found, wanted), (found, wanted)


@pytest.mark.parametrize("formula", [*OFFICE_DIFFERS, *OFFICE_ERRORS])
def test_the_reference_holds_where_libreoffice_differs(formula: str, ours: Recalculated) -> None:
    row = next(row for row, item in _ROWS if item.formula == formula)
    value, source = {**OFFICE_DIFFERS, **OFFICE_ERRORS}[formula]
    assert source
    assert _agree(ours.values[row, 2], value), ours.values[row, 2]


def test_what_cannot_be_recalculated_is_named_and_nothing_else(ours: Recalculated) -> None:
    formulas = {f"B{row}": item.formula for row, item in enumerate(ORDINARY, start=1)}
    assert {formulas[kept.cell] for kept in ours.report.kept} == KEPT
    assert all(kept.reason for kept in ours.report.kept)
    assert all(ours.values.get((row, 2)) is None for row, item in enumerate(ORDINARY, start=1) if item.formula in KEPT)


def test_a_kept_cell_keeps_the_very_value_it_had(tmp_path: Path) -> None:
    source = tmp_path / "kept.xlsx"
    with xlsxwriter.Workbook(str(source)) as book:
        sheet = book.add_worksheet("Calc")
        for row, formula in enumerate(sorted(KEPT)):
            sheet.write_formula(row, 1, formula.replace("List!", "").replace("Table!", ""), None, f"kept {row}")
    out = _ours(source)
    assert [out.values[row, 2] for row in range(1, len(KEPT) + 1)] == [f"kept {row}" for row in range(len(KEPT))]
    assert out.report.unfed == []


def test_the_report_lists_the_differences_that_a_book_meets(ours: Recalculated) -> None:
    listed = ours.report.to_json()["engine_differences"]
    names = [entry["id"] for entry in listed]
    wanted = met(item.formula.strip("{}") for item in ORDINARY)
    assert set(wanted) - set(names) <= {"unknown-function"}
    assert {"equality-15-digits", "intersection", "text-pattern", "whole-of-15-digits"} <= set(names)
    assert all((entry["treatment"], entry["difference"]) == KNOWN[entry["id"]] for entry in listed)


def test_subtotals_of_a_book_with_hidden_rows_are_kept(tmp_path: Path) -> None:
    source = tmp_path / "hidden.xlsx"
    with xlsxwriter.Workbook(str(source)) as book:
        sheet = book.add_worksheet("Calc")
        sheet.write_column(0, 0, [1, 2, 4])
        sheet.set_row(1, None, None, {"hidden": True})
        for row, formula in enumerate(("=SUBTOTAL(109,A1:A3)", "=SUBTOTAL(9,A1:A3)", "=SUM(A1:A3)")):
            sheet.write_formula(row, 1, formula, None, 5)
    out = _ours(source)
    assert [out.values[row, 2] for row in (1, 2, 3)] == [5.0, 7.0, 7.0]
    assert [kept.cell for kept in out.report.kept] == ["B1"]
    filtered = tmp_path / "filtered.xlsx"
    with zipfile.ZipFile(source) as old, zipfile.ZipFile(filtered, "w") as new:
        for name in old.namelist():
            mark = b'</sheetData><autoFilter ref="A1:A3"><filterColumn colId="0"/></autoFilter>'
            new.writestr(name, old.read(name).replace(b"</sheetData>", mark))
    assert [kept.cell for kept in _ours(filtered).report.kept] == ["B1", "B2"]


@pytest.mark.parametrize("place, item", list(enumerate(DOCUMENTED)), ids=[item.formula for item in DOCUMENTED])
def test_newer_functions_give_what_is_documented(place: int, item: Documented, documented: Recalculated) -> None:
    assert item.source
    wanted = item.value if isinstance(item.value, list) else [[item.value]]
    top = 1 + place * _APART
    expected = {
        (top + r, 2 + c): _STORED.get(cell, cell) for r, line in enumerate(wanted) for c, cell in enumerate(line)
    }
    for row in range(top, top + _APART):
        for column in range(2, 2 + 14):
            found = documented.values.get((row, column))
            assert _agree(found, expected.get((row, column))), (row - top, column - 2, found)


def test_there_are_enough_formulas() -> None:
    assert len(ORDINARY) - len(KEPT) >= 300
    assert all(item.group for item in ORDINARY)
    assert len(KEPT) <= 20
    assert len({item.formula for item in ORDINARY}) == len(ORDINARY)
    assert {*OFFICE_DIFFERS, *OFFICE_ERRORS} <= {item.formula for item in ORDINARY}
    assert sum(item.formula.startswith("{") for item in ORDINARY) >= 50


def test_newer_functions_are_all_recalculated(documented: Recalculated) -> None:
    assert documented.report.kept == []
    assert len(DOCUMENTED) >= 90
