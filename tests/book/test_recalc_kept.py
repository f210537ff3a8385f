"""What cannot be evaluated keeps the value it had, and is named; so does everything that reads it."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from book.lists import Done, bare, both, expected, formula, number
from book.makers import XLSX, parts, relation_list, sheet_xml
from lowpoint.problems import CellError

INPUTS = {"A1": number(10.0), "B1": number(4.0), "C1": number(0.03)}
SIGMA = "LP_SIGMA(A1,B1,C1)"


def _done(tmp_path: Path, cells: dict[str, str], **more: Any) -> Done:
    return both(bare(tmp_path / "list.xlsx", INPUTS | cells, **more))


@pytest.mark.parametrize(
    "text, reason",
    [
        ("NOSUCH(1)", "it uses NOSUCH, which the recalculator's engine does not have"),
        ("IFERROR(NOSUCH(1),7)", "it uses NOSUCH, which the recalculator's engine does not have"),
        ("_xlfn.LAMBDA(_xlpm.x,_xlpm.x+1)(2)", "it uses LAMBDA, which the recalculator's engine does not have"),
        ("CELL(\"filename\")", "it asks CELL for what only the program that shows the workbook knows"),
        ("GETPIVOTDATA(\"Flow\",A1)", "it uses GETPIVOTDATA, which the recalculator's engine does not have"),
        ("SUM(A1:B1 B1:C1)", "it uses the intersection of two ranges"),
        ("[1]Other!A1*2", "it reads [1]Other!A1, which lies in another workbook or on several sheets at once"),
        ("'C:\\lists\\[old.xlsx]Sheet 1'!A1", None), ("SUM(Intake:Other!A1)", None),
        ("Elsewhere!A1", "it reads the sheet 'Elsewhere', which is not in the workbook"),
        ("nobody_named_this", "the name 'nobody_named_this' is not defined"),
        ("A1+", None), ("SUM(A1", "the formula has an open parenthesis too many"),
        ("A1)", "the formula has a closing parenthesis too many"), ("A1 ~ 2", "the formula cannot be read at '~ 2'"),
        ("Valves[kv]", "there is no table 'Valves' in the workbook"),
    ],
)  # fmt: skip
def test_a_formula_beyond_us_keeps_its_value_and_says_why(tmp_path: Path, text: str, reason: str | None) -> None:
    cells = {
        "E1": formula(text, "41"), "F1": formula(f"E1+{SIGMA}", "42"), "G1": formula("IFERROR(F1,0)*2", "43"),
        "H1": formula(SIGMA, "0"), "E2": formula(f"IF(TRUE,{SIGMA},{text})",
        "44") if text[-1] not in "+~" else number(44.0),
    }  # fmt: skip
    done = _done(tmp_path, cells)
    assert [done[f"Intake!{place}"] for place in ("E1", "F1", "G1")] == [41.0, 42.0, 43.0]
    assert done["Intake!H1"] == expected("LP_SIGMA", 10.0, 4.0, 0.03)
    assert done.kept["Intake!F1"] == "it reads Intake!E1, which was not refreshed"
    assert done.kept["Intake!G1"] == "it reads Intake!F1, which was not refreshed"
    assert reason is None or done.kept["Intake!E1"] == reason
    assert len(done.kept["Intake!E1"]) > 10
    assert done.report.exit_code == 1


def test_circular_references_keep_their_values(tmp_path: Path) -> None:
    cells = {
        "E1": formula("E2+1", "5"), "E2": formula("E1+1", "6"), "F1": formula("E1*2", "7"), "G1": formula("G1+1", "8"),
        "H1": formula("LP_MARGIN(H2,2)", "9"), "H2": formula("LP_MARGIN(H1,3)", "10"),
        "I1": formula(f"IF(TRUE,{SIGMA},I1)", "1"),
        "J1": formula("LP_MARGIN(E2,1)", "11"), "K1": formula("IFERROR(E1,0)", "12"),
    }  # fmt: skip
    done = _done(tmp_path, cells)
    old = {"E1": 5.0, "E2": 6.0, "F1": 7.0, "G1": 8.0, "H1": 9.0, "H2": 10.0, "J1": 11.0, "K1": 12.0}
    assert {place: done[f"Intake!{place}"] for place in old} == old
    circle = "it is part of a circular reference"
    assert {place for place, why in done.kept.items() if why == circle} == {
        f"Intake!{c}" for c in ("E1", "E2", "G1", "H1", "H2")
    }
    assert done.kept["Intake!F1"] == "it reads Intake!E1, which was not refreshed"
    assert done.kept["Intake!J1"] == "it reads Intake!E2, which was not refreshed"
    # A circle in a branch that is not taken is none: spreadsheet programs calculate it (common practice).
    assert done["Intake!I1"] == expected("LP_SIGMA", 10.0, 4.0, 0.03)


def test_data_tables_keep_all_their_cells(tmp_path: Path) -> None:
    cells = {
        "A3": '<f t="dataTable" ref="A3:A5" dt2D="0" dtr="0" r1="B1"/><v>1.5</v>', "A4": number(2.5), "A5": number(3.5),
        "B3": formula("A4+1", "20"), "B4": formula(f"SUM(A3:A5)+{SIGMA}", "21"), "B5": formula("LP_MARGIN(A5,2)", "22"),
        "B6": formula('IFERROR(INDIRECT("A4"),0)', "23"), "B7": formula('INDIRECT("B1")', "0"),
    }  # fmt: skip
    done = _done(tmp_path, cells)
    assert [done[f"Intake!A{row}"] for row in (3, 4, 5)] == [1.5, 2.5, 3.5]
    assert [done[f"Intake!B{row}"] for row in (3, 4, 5, 6)] == [20.0, 21.0, 22.0, 23.0]
    assert done.kept["Intake!A3"] == "it belongs to a data table, which is not calculated here"
    assert done.kept["Intake!B3"] == "it reads Intake!A4, which was not refreshed"
    assert done.kept["Intake!B6"] == "it reads, by a reference worked out on the way, a cell that was not refreshed"
    assert done["Intake!B7"] == 4.0


@pytest.mark.parametrize(
    "text",
    [
        'IFERROR(INDIRECT("E1"),7)',
        "COUNT(OFFSET(E2,-1,0))",
        'ISTEXT(INDIRECT("E"&1))',
        'IF(ISERROR(INDIRECT("Intake!E1")),1,2)',
    ],
)
def test_what_reads_a_kept_cell_in_a_roundabout_way_is_kept(tmp_path: Path, text: str) -> None:
    for stuck in ("NOSUCH(1)", "E1+1"):
        cells = {
            "E1": formula(stuck, "3"),
            "F1": formula(text, "44"),
            "G1": formula("F1*2", "45"),
            "F2": formula(SIGMA, "0"),
        }
        done = _done(tmp_path, cells | {"F3": formula('IFERROR(INDIRECT("F2"),7)', "0")})
        assert (done["Intake!F1"], done["Intake!G1"]) == (44.0, 45.0)
        assert "Intake!F1" in done.kept
        assert done.kept["Intake!G1"] == "it reads Intake!F1, which was not refreshed"
        assert done["Intake!F3"] == expected("LP_SIGMA", 10.0, 4.0, 0.03)


def test_arrays_that_read_a_kept_cell_keep_every_cell(tmp_path: Path) -> None:
    cells = {
        "E1": formula("NOSUCH(1)", "3"), "E2": number(5.0), "E3": number(6.0),
        "F1": '<f t="array" ref="F1:F3">LP_MARGIN(E1:E3,2)</f><v>71</v>', "F2": number(72.0), "F3": number(73.0),
        "G1": formula("F3+1", "80"), "H1": 'cm="1"|<f t="array" ref="H1:H3">E1:E3*2</f><v>81</v>', "H2": number(82.0),
        "H3": number(83.0), "I1": formula("SUM(H2:H3)", "90"), "J1": formula("E2+E3", "0"),
    }  # fmt: skip
    done = _done(tmp_path, cells)
    assert [done[f"Intake!F{row}"] for row in (1, 2, 3)] == [71.0, 72.0, 73.0]
    assert [done[f"Intake!H{row}"] for row in (1, 2, 3)] == [81.0, 82.0, 83.0]
    assert (done["Intake!G1"], done["Intake!I1"], done["Intake!J1"]) == (80.0, 90.0, 11.0)
    assert done.kept["Intake!G1"] == "it reads Intake!F3, which was not refreshed"


def test_one_row_of_a_column_may_be_stuck(tmp_path: Path) -> None:
    cells: dict[str, str] = {}
    for row in range(2, 30):
        cells |= {
            f"A{row}": number(10.0 + row), f"B{row}": formula("NOSUCH(1)", "3") if row == 9 else number(4.0),
            f"C{row}": number(0.03), f"D{row}": formula(f"LP_SIGMA(A{row},B{row},C{row})", "77"),
            f"E{row}": formula(f"D{row}*2", "78"),
        }  # fmt: skip
    done = _done(tmp_path, cells)
    assert set(done.kept) == {"Intake!B9", "Intake!D9", "Intake!E9"}
    assert (done["Intake!D9"], done["Intake!E9"]) == (77.0, 78.0)
    assert done["Intake!D8"] == expected("LP_SIGMA", 18.0, 4.0, 0.03)
    assert done["Intake!E10"] == 2 * expected("LP_SIGMA", 20.0, 4.0, 0.03)


def test_an_error_that_is_stored_as_a_constant_is_no_doubt(tmp_path: Path) -> None:
    cells = {
        "E1": 't="e"|<v>#N/A</v>',
        "F1": formula("LP_SIGMA(E1,B1,C1)", "1"),
        "G1": formula("IFERROR(E1,5)+A1", "1"),
    }
    done = _done(tmp_path, cells)
    assert done["Intake!F1"] is CellError.NA
    assert done["Intake!G1"] == 15.0
    assert done.kept == {}


def test_sheets_that_are_no_worksheets_are_left_alone(tmp_path: Path) -> None:
    types = parts()["[Content_Types].xml"].decode().replace(
        "</Types>",
        f'<Override PartName="/xl/dialogsheets/sheet1.xml" ContentType="{XLSX}.dialogsheet+xml"/></Types>',
    )  # fmt: skip
    workbook = parts()["xl/workbook.xml"].decode().replace(
        "</sheets>", '<sheet name="Panel" sheetId="2" r:id="rId2"/></sheets>'
    )  # fmt: skip
    panel = sheet_xml('<row r="1"><c r="A1"><f>LP_FF(0.03,220)</f><v>5</v></c></row>').replace(
        b"worksheet", b"dialogsheet"
    )
    more = {
        "[Content_Types].xml": types.encode(), "xl/workbook.xml": workbook.encode(),
        "xl/dialogsheets/sheet1.xml": panel,
        "xl/_rels/workbook.xml.rels": relation_list(
            ("rId1", "worksheet", "worksheets/sheet1.xml"), ("rId2", "dialogsheet", "dialogsheets/sheet1.xml")
        ),
    }  # fmt: skip
    done = _done(tmp_path, {"E1": formula(SIGMA, "1"), "F1": formula("Panel!A1+1", "6")}, parts=more)
    assert done.part("xl/dialogsheets/sheet1.xml") == panel
    assert done["Intake!F1"] == 6.0
    assert done.kept == {"Intake!F1": "it reads the sheet 'Panel', which holds no cells that are calculated"}
    assert done["Intake!E1"] == expected("LP_SIGMA", 10.0, 4.0, 0.03)
    assert any("'Panel'" in warning and "not recalculated" in warning for warning in done.report.warnings)


def test_a_workbook_without_any_call_is_recalculated_and_says_so(tmp_path: Path) -> None:
    done = _done(tmp_path, {"E1": formula("A1*2", "1"), "F1": formula("A1+B1", "14")})
    assert done["Intake!E1"] == 20.0
    assert "there is no LP_ function in this workbook" in done.report.warnings
    assert done.unfed == {"Intake!E1"}
    assert done.report.untouched == 1


def test_a_call_that_is_stuck_still_counts_as_a_call(tmp_path: Path) -> None:
    done = _done(tmp_path, {"E1": formula("LP_SIGMA(NOSUCH(1),B1,C1)", "1")})
    assert "there is no LP_ function in this workbook" not in done.report.warnings
    assert done["Intake!E1"] == 1.0
