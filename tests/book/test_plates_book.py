"""The book of plates: structure, sameness, every LP_ call, and other inputs typed into it."""

from __future__ import annotations

import re
import zipfile
from pathlib import Path
from typing import Any

import pytest
from openpyxl.formula import Tokenizer
from openpyxl.worksheet.formula import ArrayFormula

from book.office import needs_office, recalculated
from book.plates_sample import COMMITTED, DUTY_SHEETS, NAME, Plates, plates
from book.starters import is_error
from book.test_starter_values import split
from lowpoint import cells, registry
from lowpoint.book.recalc import recalculate
from lowpoint.cells import OMITTED, CellError
from lowpoint.starter.plates_book import plates_bytes, write_plates
from lowpoint.starter.plates_data import DUTIES, Duty

ORDINARY = {"AND", "COUNT", "IF", "INDEX", "ISBLANK", "LEFT", "MAX", "MIN", "PI", "SQRT", "SUM", "TEXT"}
WANTED = {
    "LP_VAPOUR_PRESSURE", "LP_DENSITY", "LP_STAGES", "LP_STAGE_PRESSURES", "LP_ORIFICE_BORE", "LP_ORIFICE_LOSS",
    "LP_ORIFICE_FL", "LP_ORIFICE_DROP", "LP_ORIFICE_FLOW", "LP_ORIFICE_LIMIT", "LP_SIGMA", "LP_MARGIN", "LP_REGIME",
    "LP_PLATE_THICKNESS", "LP_WHY", "LP_FLASH",
}  # fmt: skip
each = pytest.mark.parametrize("duty", DUTIES, ids=lambda duty: duty.tag)


def text_of(cell: Any) -> str:
    """A cell's formula, an array's too; empty where it has none."""
    value = cell.value.text if isinstance(cell.value, ArrayFormula) else cell.value
    return value if cell.data_type == "f" else ""


def functions_in(formula: str) -> list[str]:
    return [t.value[:-1] for t in Tokenizer(formula).items if t.type == "FUNC" and t.subtype == "OPEN"]


# --- structure --------------------------------------------------------------------------------------------------
def test_a_sheet_a_duty_and_what_it_is_for() -> None:
    book = plates().formulas
    assert book.sheetnames == ["Read me", "Pump minimum flow", "RO brine let-down", "Boiler blowdown"]
    words = " ".join(str(cell.value) for cell in book["Read me"]["B"])
    assert "Lowpoint supports a qualified engineer" in words
    assert "Net drop and drop between taps are two things" in words
    assert "invented" in words


def test_every_function_is_known_and_every_wanted_one_is_used_on_each_sheet() -> None:
    used: dict[str, set[str]] = {title: set() for title in plates().formulas.sheetnames}
    for title, cell, _ in plates().cells():
        if text_of(cell):
            used[title] |= set(functions_in(text_of(cell)))
            for asked in re.findall(r'LP_WHY\("(\w+)"', text_of(cell)):
                assert registry.canonical(asked) == asked
    for title in DUTY_SHEETS:
        assert WANTED - {"LP_FLASH"} <= used[title], title
        for name in used[title]:
            assert name in ORDINARY or registry.canonical(name) == name, name
    assert "LP_FLASH" in used["Boiler blowdown"]
    assert used["Read me"] <= ORDINARY


@each
def test_layout_for_reading_and_printing(duty: Duty) -> None:
    sheet = plates().formulas[duty.sheet]
    assert sheet.freeze_panes == "B4"
    assert sheet.page_setup.orientation == "landscape"
    assert sheet.sheet_properties.pageSetUpPr.fitToPage
    assert sheet.print_area
    assert len(sheet.row_breaks.brk) == 2
    assert len(sheet.conditional_formatting) > 5
    assert sheet.data_validations.dataValidation[0].formula1 == '"incipient,constant,choked"'
    for table in ("design", "other"):
        columns, head = plates().table(duty.sheet, table)[0], plates().head(duty.sheet, table)
        for name, column in columns.items():
            if name not in ("None", "Plate"):
                assert sheet.cell(head, column).comment is not None, name
        assert "Reader-Harris" in sheet.cell(head, columns["Loss coefficient K"]).comment.text


@each
def test_pressures_between_are_one_array_formula(duty: Duty) -> None:
    sheet = plates().formulas[duty.sheet]
    (array,) = (cell.value for row in sheet.iter_rows() for cell in row if isinstance(cell.value, ArrayFormula))
    assert "LP_STAGE_PRESSURES(" in array.text
    block = plates().values[duty.sheet][array.ref]
    shown = [row[0].value for row in block]
    count = plates().input(duty.sheet, "Plates in liquid, least number")
    assert [is_error(value) for value in shown] == [False] * (count + 1) + [True] * (8 - count)
    assert shown[0] == pytest.approx(duty.design.p1, rel=1e-12)
    assert shown[count] == pytest.approx(duty.design.p2, rel=1e-12)


def test_no_cell_has_an_error_but_the_array_beyond_its_last_plate() -> None:
    found = [
        (title, cell.column_letter, value.value) for title, cell, value in plates().cells() if is_error(value.value)
    ]
    assert found
    assert {(column, error) for _, column, error in found} == {("R", "#N/A")}


@each
def test_the_chart_is_native_and_shows_pressures_and_vapour_pressure(duty: Duty) -> None:
    book = plates()
    (chart,) = book.formulas[duty.sheet]._charts
    assert len(chart.series) == 5
    sheet = book.values[duty.sheet]
    drawn = {}
    for series in chart.series:
        title = series.tx.strRef.f.rpartition("!")[2].replace("$", "")
        xs, ys = (
            [row[0].value for row in sheet[ref.numRef.f.rpartition("!")[2].replace("$", "")]]
            for ref in (series.xVal, series.yVal)
        )
        assert len(xs) == len(ys)
        assert all(isinstance(value, int | float) for value in xs + ys)
        drawn[sheet[title].value] = list(zip(xs, ys, strict=True))
    assert {y for _, y in drawn["Vapour pressure, design case"]} == {book.input(duty.sheet, "Vapour pressure pv")}
    for name, first, last in (
        ("Equal index, design case", duty.design.p1, duty.design.end),
        ("As drilled, other case", duty.other.p1, duty.other.end),
    ):
        line = drawn[name]
        assert line[0][1] == pytest.approx(first, rel=1e-9)
        assert line[-1] == (len(duty.bores) + 0.5, pytest.approx(last))
        assert [y for _, y in line] == sorted((y for _, y in line), reverse=True)
        assert [x for x, _ in line] == sorted(x for x, _ in line)
    pressures = set(book.column(duty.sheet, "other", "Pressure after the plate"))
    assert pressures <= {y for _, y in drawn["As drilled, other case"]}
    jets = dict(drawn["Lowest in the jet, design case"])
    assert sorted(jets) == list(range(1, len(duty.bores) + 1))


# --- sameness ---------------------------------------------------------------------------------------------------
def test_the_same_bytes_on_every_run(tmp_path: Path) -> None:
    first = plates_bytes()
    write_plates(tmp_path / NAME)
    assert (tmp_path / NAME).read_bytes() == first
    with zipfile.ZipFile(plates().path) as package:
        assert {entry.date_time for entry in package.infolist()} == {(2025, 1, 1, 0, 0, 0)}


def test_programs_are_not_told_to_compute_it_anew() -> None:
    with zipfile.ZipFile(COMMITTED) as package:
        workbook = package.read("xl/workbook.xml").decode()
    assert 'fullCalcOnLoad="1"' not in workbook
    assert 'calcId="191029"' in workbook


def test_the_committed_book_is_what_the_script_writes() -> None:
    stale = "stale: run python workbooks/build.py"
    with zipfile.ZipFile(COMMITTED) as old, zipfile.ZipFile(plates().path) as new:
        assert old.namelist() == new.namelist(), stale
        for name in old.namelist():
            if not name.startswith("xl/worksheets/sheet"):
                assert old.read(name) == new.read(name), f"{name} is {stale}"
    kept, fresh = Plates(COMMITTED), plates()
    for title, cell, value in fresh.cells():
        old_cell = kept.formulas[title][cell.coordinate]
        place = f"{title}!{cell.coordinate} is {stale}"
        assert (text_of(old_cell), old_cell.number_format) == (text_of(cell), cell.number_format), place
        old_value = kept.values[title][cell.coordinate].value
        wanted = value.value
        assert old_value == (pytest.approx(wanted, rel=1e-9, abs=1e-9) if isinstance(wanted, float) else wanted), place


# --- every LP_ call, as the functions answer it when they are called from Python ---------------------------------
CALL = re.compile(r"LP_[A-Z_]+\(")


def calls_in(formula: str) -> list[tuple[str, list[str]]]:
    """The LP_ calls of a formula and their arguments, innermost ones too."""
    found = []
    for match in CALL.finditer(formula):
        depth, end = 1, match.end()
        while depth:
            depth += {"(": 1, ")": -1}.get(formula[end], 0)
            end += 1
        found.append((match[0][:-1], split(formula[match.end() : end - 1])))
    return found


def operand(sheet: Any, text: str) -> Any:
    """A literal, or a cell of the sheet; KeyError for anything else."""
    if text == "":
        return OMITTED
    if text.startswith('"'):
        return text[1:-1]
    if not re.fullmatch(r"\$?[A-Z]+\$?\d+", text):
        raise KeyError(text)
    cell = sheet[text.replace("$", "")]
    return CellError(cell.value) if cell.data_type == "e" else cell.value


def test_stored_values_are_what_the_functions_give() -> None:
    """Cells that are one LP_ call, guarded or not, whose arguments are cells and literals."""
    counts: dict[str, int] = {}
    for title, cell, value in plates().cells():
        formula = text_of(cell)
        found = calls_in(formula)
        bare = re.sub(r'^=(IF\(\$A\d+="","",)?', "", formula)
        if len(found) != 1 or not bare.startswith(found[0][0]) or is_error(value.value) or value.value is None:
            continue
        name, arguments = found[0]
        if name in ("LP_STAGE_PRESSURES", "LP_MARGIN"):  # an array, and one that chooses its limit: tested elsewhere
            continue
        sheet = plates().values[title]
        assert value.value == cells.call(name, [operand(sheet, x) for x in arguments]), f"{title}!{cell.coordinate}"
        counts[name] = counts.get(name, 0) + 1
    total = sum(len(duty.bores) for duty in DUTIES)
    assert counts["LP_WHY"] == 2 * total + 2 * len(DUTIES)
    assert {name: counts[name] for name in ("LP_ORIFICE_BORE", "LP_ORIFICE_FLOW", "LP_PLATE_THICKNESS")} == {
        "LP_ORIFICE_BORE": total, "LP_ORIFICE_FLOW": total, "LP_PLATE_THICKNESS": total,
    }  # fmt: skip
    assert counts["LP_SIGMA"] == counts["LP_REGIME"] == counts["LP_ORIFICE_FL"] == 2 * total
    assert counts["LP_ORIFICE_LIMIT"] == 6 * total
    assert counts["LP_ORIFICE_DROP"] == 4 * total


@needs_office
def test_ordinary_formulas_as_libreoffice_computes_them(tmp_path: Path) -> None:
    """With the cells of LP_ calls as plain values, LibreOffice recomputes all the rest to the same values."""
    copy = Plates(plates().path)  # of its own, since cells are overwritten
    ordinary = []
    for title, cell, value in copy.cells():
        if not text_of(cell):
            if is_error(value.value):
                cell.value = "=NA()"
            continue
        if "LP_" in text_of(cell):
            cell.value = value.value if value.value is not None else '=""'
        else:
            ordinary.append((title, cell.coordinate))
    copy.formulas.save(tmp_path / "plain.xlsx")
    theirs = Plates(recalculated(tmp_path / "plain.xlsx", tmp_path / "out"))
    assert len(ordinary) > 300
    for title, place in ordinary:
        ours, other = (book.values[title][place].value for book in (plates(), theirs))
        number = isinstance(ours, int | float)
        assert (other or None) == (pytest.approx(ours, rel=1e-11) if number and ours else ours or None), (title, place)


# --- alive ------------------------------------------------------------------------------------------------------
def changed(tmp_path: Path, sheet: str, **typed: Any) -> Plates:
    """The book with other inputs, recalculated."""
    book = Plates(plates().path)
    for words, value in typed.items():
        (row,) = (c.row for c in book.values[sheet]["A"] if str(c.value).startswith(words.replace("_", " ")))
        book.formulas[sheet].cell(row, 2).value = value
    book.formulas.save(tmp_path / "typed.xlsx")
    report = recalculate(tmp_path / "typed.xlsx", tmp_path / "new.xlsx")
    assert not report.failed
    return Plates(tmp_path / "new.xlsx")


def test_another_target_gives_other_plates_and_the_plain_values_say_that_they_still_hold(tmp_path: Path) -> None:
    # ln(61.79/1.991)/ln(2.8/1.8) = 7.77: eight plates; the design of equal margin does not depend on the target.
    book, sheet = changed(tmp_path, DUTY_SHEETS[0], Least_index=2.8), DUTY_SHEETS[0]
    assert book.column(sheet, "design", "Plate") == list(range(1, 9))
    assert book.column(sheet, "design", "Pressure after the plate")[-1] == pytest.approx(3.2)
    assert book.input(sheet, "Room in the tables") == "enough"
    assert book.input(sheet, "Do these values still hold?") == "yes: computed for the inputs above"


def test_another_pipe_makes_the_plain_values_stale_and_too_many_plates_are_told(tmp_path: Path) -> None:
    # ln(61.79/1.991)/ln(3.2/2.2) = 9.17: ten plates, for which there is no room.
    book, sheet = changed(tmp_path, DUTY_SHEETS[0], Least_index=3.2, Inside_diameter=90.0), DUTY_SHEETS[0]
    assert book.input(sheet, "Plates in liquid, least number") == 10
    assert book.input(sheet, "Room in the tables") == "no: more than 8 plates"
    assert book.input(sheet, "Do these values still hold?") == "no: the inputs have changed"
    wrong = [(title, cell.coordinate) for title, cell, value in book.cells() if is_error(value.value)]
    assert sheet not in {title for title, _ in wrong}
