"""Stored cells that the engine's load cannot take: newer errors, dates in words, links; precision as displayed."""

from __future__ import annotations

from pathlib import Path

import pytest

from book.lists import bare, both, expected, formula, number
from book.makers import parts
from lowpoint.book.stored import serial_of
from lowpoint.problems import CellError

# The errors that are younger than the file format's first edition. Source: from memory.
NEWER = [
    "#GETTING_DATA", "#SPILL!", "#CALC!", "#FIELD!", "#BLOCKED!", "#CONNECT!", "#UNKNOWN!", "#BUSY!", "#PYTHON!",
    "#EXTERNAL!",
]  # fmt: skip


@pytest.mark.parametrize("error", NEWER)
def test_a_newer_error_stops_nothing(tmp_path: Path, error: str) -> None:
    cells = {
        "A1": f't="e"|<v>{error}</v>',
        "B1": number(3.0),
        "C1": formula("LP_MARGIN(A1,2)", "1"),
        "D1": f't="e"|<f>LP_MARGIN(B1,2)</f><v>{error}</v>',
        "E1": f't="e"|<f>B1+1</f><v>{error}</v>',
        "F1": formula("IF(ISERROR(A1),7,8)", "1"),
        "G1": 't="str"|<v>#BUSY!</v>',
        "H1": formula("LEN(G1)", "6"),
    }
    done = both(bare(tmp_path / "list.xlsx", cells))
    named = {e.value: e for e in CellError}.get(error, CellError.VALUE)
    assert next(c.new for c in done.report.changed if c.cell == "C1") is named
    assert done["Intake!D1"] == expected("LP_MARGIN", 3.0, 2.0)
    assert (done["Intake!E1"], done["Intake!F1"], done["Intake!H1"]) == (4.0, 7.0, 6.0)
    assert f'<c r="A1" t="e"><v>{error}</v></c>'.encode() in done.part("xl/worksheets/sheet1.xml")
    assert {f.cell for f in done.report.failed} == {"C1"}
    assert done.kept == {}


def test_an_error_among_a_spill_that_was_blocked_is_no_constant(tmp_path: Path) -> None:
    cells = {
        "A2": number(10.0), "A3": number(20.0),
        "C2": 't="e" cm="1"|<f t="array" ref="C2:C3">LP_SIGMA(A2:A3,4,0.03)</f><v>#CALC!</v>',
        "C3": 't="e"|<v>#CALC!</v>',
    }  # fmt: skip
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert [done[f"Intake!C{row}"] for row in (2, 3)] == [expected("LP_SIGMA", p1, 4.0, 0.03) for p1 in (10.0, 20.0)]
    assert done.report.exit_code == 0


# 15 March 2024 is day 45366 of the system of 1900, which starts 1462 days before that of 1904.
# Source: ISO/IEC 29500-1, 18.17.4 (dates; its day 60 of 1900 never was).
@pytest.mark.parametrize("date1904, serial", [(False, 45366.0), (True, 45366.0 - 1462.0)])
def test_dates_in_words_are_serial_numbers(tmp_path: Path, date1904: bool, serial: float) -> None:
    cells = {
        "A1": 't="d"|<v>2024-03-15</v>', "A2": 't="d"|<v>2024-03-15T12:00:00</v>',
        "B1": formula("YEAR(A1)"), "B2": formula("SUM(A1:A2)"), "C1": formula("LP_MARGIN(A1,2)"),
        "C2": formula("LP_MARGIN(A2,2)"),
    }  # fmt: skip
    frame = parts()["xl/workbook.xml"]
    system = b'<workbookPr date1904="1"/><sheets>' if date1904 else b"<sheets>"
    more = {"xl/workbook.xml": frame.replace(b"<sheets>", system)}
    done = both(bare(tmp_path / "list.xlsx", cells, parts=more))
    assert (done["Intake!B1"], done["Intake!B2"]) == (2024.0, 2 * serial + 0.5)
    assert done["Intake!C1"] == expected("LP_MARGIN", serial, 2.0)
    assert done["Intake!C2"] == expected("LP_MARGIN", serial + 0.5, 2.0)
    assert b'<c r="A1" t="d"><v>2024-03-15</v></c>' in done.part("xl/worksheets/sheet1.xml")


@pytest.mark.parametrize(
    "text, serial", [("1900-01-01", 1.0), ("1900-02-28", 59.0), ("1900-03-01", 61.0), ("12:00:00", None), ("", None)]
)
def test_the_first_days_of_1900(text: str, serial: float | None) -> None:
    assert serial_of(text) == serial


def test_a_link_keeps_the_kind_of_what_it_shows(tmp_path: Path) -> None:
    sigma = expected("LP_SIGMA", 10.0, 4.0, 0.03)
    cells = {
        "A1": number(10.0), "B1": number(4.0), "C1": number(0.03),
        "D1": formula('HYPERLINK("#Trim",LP_SIGMA(A1,B1,C1))'), "E1": formula("LP_MARGIN(D1,2)"),
        "F1": formula('IF(HYPERLINK("#Trim",A1)>11,"high","low")'), "G1": formula('LP_MARGIN(HYPERLINK("#Trim",A1),2)'),
        "H1": formula('HYPERLINK("#Trim","trim")'), "I1": formula('HYPERLINK("#Trim",Z9)'),
        "J1": formula('IF(LP_SIGMA(A1,B1,C1)>0,HYPERLINK("#"&A1,B1*2),0)'), "K1": formula('HYPERLINK("#Trim",NA())'),
        "L1": formula('HYPERLINK("#Trim")'),
    }  # fmt: skip
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert done["Intake!D1"] == sigma
    assert done["Intake!E1"] == expected("LP_MARGIN", sigma, 2.0)
    assert done["Intake!G1"] == expected("LP_MARGIN", 10.0, 2.0)
    assert [done[f"Intake!{c}1"] for c in "FHIJ"] == ["low", "trim", 0.0, 8.0]
    assert done["Intake!K1"] is CellError.NA
    assert done["Intake!L1"] == "#Trim"
    assert done.kept == {}


@pytest.mark.parametrize("said, warned", [('fullPrecision="0"', True), ('fullPrecision="1"', False), ("", False)])
def test_precision_as_displayed_is_warned_of(tmp_path: Path, said: str, warned: bool) -> None:
    cells = {"A1": number(3.0), "B1": formula("LP_MARGIN(A1,2)")}
    done = both(bare(tmp_path / "list.xlsx", cells, frame=f"<calcPr {said}/>"))
    assert any("precision as displayed" in w for w in done.report.warnings) is warned
    assert done.report.exit_code == 0
