"""Every spelling under which a file may store a Lowpoint function is that function, and stays as it is spelled."""

from __future__ import annotations

import re
from html import unescape
from pathlib import Path

import pytest

from book.lists import ITEMS, both, expected, formula, listed, number, rows, valves
from book.makers import pack, parts
from lowpoint.book.formulas import lp_name, unknown_lp_name

# Source of the spellings: the table in spreadsheets.md, found by trial with the programs that write them.
SIGMA = (
    "LP_SIGMA(A2,B2,C2)", "lp_sigma(A2,B2,C2)", "Lp_Sigma( A2 , B2 , C2 )", "LP.SIGMA(A2,B2,C2)", "lp.sigma(A2,B2,C2)",
    "[1]!LP_SIGMA(A2,B2,C2)", "[12]!lp_sigma(A2,B2,C2)", "'C:\\Tools\\add in\\lowpoint.xlam'!LP_SIGMA(A2,B2,C2)",
    "lowpoint.xlam!LP_SIGMA(A2,B2,C2)", "'it''s here\\lowpoint.xlam'!LP_SIGMA(A2,B2,C2)",
    "_xll.LP_SIGMA(A2,B2,C2)", "_xludf.LP_SIGMA(A2,B2,C2)", "_xlfn._xll.LP_SIGMA(A2,B2,C2)",
    "ORG.LOWPOINT.FUNCTIONS.SIGMA(A2,B2,C2)", "org.lowpoint.functions.sigma(A2,B2,C2)",
    "ORG.LOWPOINT.FUNCTIONS.LP_SIGMA(A2,B2,C2)", "_xlfn.SINGLE(LP_SIGMA(A2,B2,C2))", "@LP_SIGMA(A2,B2,C2)",
    "_xlfn.SINGLE([1]!LP_SIGMA(A2,B2,C2))", "(LP_SIGMA(A2,B2,C2))", "+LP_SIGMA(A2,B2,C2)", "LP_SIGMA($A$2,$B2,C$2)",
    "LP_SIGMA(List!A2,'List'!B2,list!C2)", "LP_SIGMA(A2,B2,C2,)", 'LP_SIGMA(A2,B2,C2," UPSTREAM ")',
)  # fmt: skip
CHOKED = (
    "LPU_CHOKED_DROP(A3,C3,220,D3)", "lpu.choked_drop(A3,C3,220,D3)", "[1]!LPU_CHOKED_DROP(A3,C3,220,D3)",
    "_xll.LPU_CHOKED_DROP(A3,C3,220,D3)", "ORG.LOWPOINT.FUNCTIONS.LPU_CHOKED_DROP(A3,C3,220,D3)",
)  # fmt: skip


def _formulas(part: bytes) -> dict[str, str]:
    """The formula texts of a sheet as they stand in it."""
    cells = re.findall(r'<c r="(\w+)"[^>]*><f[^>]*>([^<]*)</f>', part.decode())
    return {place: unescape(text) for place, text in cells}


def test_every_spelling_is_one_function_and_stays_as_it_was(tmp_path: Path) -> None:
    metric = {f"F{row}": f"={text}" for row, text in enumerate(SIGMA, start=2)}
    us = {f"G{row}": f"={text}" for row, text in enumerate(CHOKED, start=2)}
    done = both(listed(tmp_path / "list.xlsx", valves() | metric | us))
    # Definition: (p1 - pv)/(p1 - p2) = (10 - 0.03)/(10 - 4).
    assert {done[place] for place in metric} == {expected("LP_SIGMA", *ITEMS[0][:3])} == {(10.0 - 0.03) / (10.0 - 4.0)}
    wanted = expected("LPU_CHOKED_DROP", ITEMS[1][0], ITEMS[1][2], 220.0, ITEMS[1][3])
    assert isinstance(wanted, float)
    assert {done[place] for place in us} == {wanted}
    assert done.report.calls == len(SIGMA) + len(CHOKED)
    assert done.report.exit_code == 0
    stored = _formulas(done.part("xl/worksheets/sheet1.xml"))
    assert {place: "=" + text for place, text in stored.items()} == metric | us


@pytest.mark.parametrize(
    "nested", ["LP_MARGIN({},1.5)", "_xlfn.SINGLE(_xll.LP_MARGIN({},1.5))", "[1]!LP_MARGIN(({}),1.5)"]
)
def test_every_spelling_works_nested(tmp_path: Path, nested: str) -> None:
    places = {f"F{row}": "=" + nested.format(text) for row, text in enumerate(SIGMA, start=2)}
    done = both(listed(tmp_path / "list.xlsx", valves() | places))
    assert {done[place] for place in places} == {expected("LP_MARGIN", expected("LP_SIGMA", *ITEMS[0][:3]), 1.5)}


def test_names_that_are_near_a_function_are_none(tmp_path: Path) -> None:
    assert lp_name("LPSIGMA") is None
    assert lp_name("XLP_SIGMA") is None
    assert lp_name("LP_SIGMAS") is None
    assert lp_name("ORG.LOWPOINT.FUNCTIONS.SIGMAS") is None
    assert unknown_lp_name("SUM") is None
    assert unknown_lp_name("LP_SIGMA") is None
    near = "there is no function LP_SIGMAS in this version of Lowpoint; near are LP_SIGMA, "
    assert str(unknown_lp_name("lp.sigmas")).startswith(near)
    done = both(
        listed(tmp_path / "list.xlsx", valves() | {"F2": "=LPSIGMA(A2,B2,C2)", "F3": "=[1]!LP_SIGMAS(A3,B3,C3)",
                                                   "F4": "=LPU_SIGMA(A4,B4,C4)", "G4": "=[1]!OTHER(A4)"})
    )  # fmt: skip
    assert done["F2"] is done["F3"] is done["F4"] is None
    assert done.kept["List!F2"] == "it uses LPSIGMA, which the recalculator's engine does not have"
    assert done.kept["List!F3"].startswith("there is no function LP_SIGMAS in this version of Lowpoint; near are")
    assert "LP_SIGMA" in done.kept["List!F4"]
    assert done.kept["List!G4"] == "the function [1]!OTHER belongs to another workbook or add-in"


def test_a_text_that_looks_like_a_call_is_a_text(tmp_path: Path) -> None:
    done = both(listed(tmp_path / "list.xlsx", valves() | {"F2": '="LP_SIGMA("&A2&")"', "F3": '=LEN("[1]!LP_SIGMA(")'}))
    assert done["F2"] == "LP_SIGMA(10)"
    assert done["F3"] == 13.0


def test_a_defined_name_may_hold_a_call(tmp_path: Path) -> None:
    names = {
        "first_sigma": "LP_SIGMA(List!$A$2,List!$B$2,pv)",
        "pv": "List!$C$2",
        "limit": "1.5",
        "own": "LP_SIGMA(List!$A1,List!$B1,pv)",
    }
    places = valves() | {"F2": "=LP_MARGIN(first_sigma,limit)", "F3": "=First_Sigma", "F4": "=own"}
    done = both(listed(tmp_path / "list.xlsx", places, names=names))
    sigma = expected("LP_SIGMA", *ITEMS[0][:3])
    assert done["F3"] == sigma
    assert done["F2"] == expected("LP_MARGIN", sigma, 1.5)
    # A relative row of a name counts from the first row of the sheet: in row 4 it means row 4.
    assert done["F4"] == expected("LP_SIGMA", ITEMS[2][0], ITEMS[2][1], 0.03)


def test_shared_formulas_are_read_from_their_first_cell(tmp_path: Path) -> None:
    cells = {
        f"{column}{row}": number(value)
        for row, item in enumerate(ITEMS, 1)
        for column, value in zip("ABC", item, strict=False)
    }
    cells["E1"] = '<f t="shared" ref="E1:F3" si="0">LP_MARGIN(LP_SIGMA($A1,$B1,$C1),A1)</f>'
    cells |= dict.fromkeys(("E2", "E3", "F1", "F2", "F3"), '<f t="shared" si="0"/>')
    cells["G2"] = '<f t="shared" si="9"/><v>4</v>'
    book = pack(tmp_path / "list.xlsx", {**parts(), "xl/worksheets/sheet1.xml": rows(cells)})
    done = both(book)
    for row, item in enumerate(ITEMS, start=1):
        sigma = expected("LP_SIGMA", *item[:3])
        assert done[f"Intake!E{row}"] == expected("LP_MARGIN", sigma, item[0])
        assert done[f"Intake!F{row}"] == expected("LP_MARGIN", sigma, item[1])
    assert done.kept == {"Intake!G2": "it shares a formula that is not there"}
    assert done.part("xl/worksheets/sheet1.xml").count(b'si="0"') == 6


def test_line_breaks_and_blanks_in_a_formula_do_no_harm(tmp_path: Path) -> None:
    text = "LP_SIGMA(\n  A1 ,\n\tB1,\r\n C1\n)"
    cells = {
        "A1": number(10.0),
        "B1": number(4.0),
        "C1": number(0.03),
        "D1": formula(text),
        "E1": formula(f" {text} + 0 "),
    }
    done = both(pack(tmp_path / "list.xlsx", {**parts(), "xl/worksheets/sheet1.xml": rows(cells)}))
    assert done["Intake!D1"] == done["Intake!E1"] == expected("LP_SIGMA", 10.0, 4.0, 0.03)
