"""Ranges where LP_ calls meet them: no room, a range for one value, whole columns, unequal arrays, joined cells."""

from __future__ import annotations

import tracemalloc
from pathlib import Path

import pytest

from book.lists import bare, both, expected, formula, number, recalculated
from lowpoint.book import padding
from lowpoint.book.cures import prepare
from lowpoint.book.report import MOST_CELLS
from lowpoint.problems import CellError

PRESSURES = {f"A{row}": number(p1) for row, p1 in enumerate((10.0, 12.5, 7.0), start=2)}
SIGMAS = [expected("LP_SIGMA", p1, 4.0, 0.03) for p1 in (10.0, 12.5, 7.0)]


def _array(text: str, reach: str, dynamic: bool = False) -> str:
    inside = text.replace("&", "&amp;").replace(">", "&gt;").replace("<", "&lt;")
    return f'{"cm=" + chr(34) + "1" + chr(34) + "|" if dynamic else ""}<f t="array" ref="{reach}">{inside}</f><v>0</v>'


def test_an_answer_with_no_room_is_named(tmp_path: Path) -> None:
    cells = PRESSURES | {
        "C2": _array("LP_SIGMA(A2:A4,4,0.03)", "C2", dynamic=True), "C3": number(5.0),
        "E2": _array("LP_SIGMA(A2:A4,4,0.03)", "E2", dynamic=True),
        "G2": _array("LP_STAGE_PRESSURES(60,8,0.03,3)*1", "G2", dynamic=True), "G5": number(1.0),
        "I2": formula("C2+1"),
    }  # fmt: skip
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert [(f.cell, f.function, f.error) for f in done.report.failed] == [
        ("C2", "LP_SIGMA", "#SPILL!"), ("G2", "LP_STAGE_PRESSURES", "#SPILL!"),
    ]  # fmt: skip
    assert "one of them is not empty" in done.failed["Intake!C2"]
    assert done.report.exit_code == 1
    assert "LP_SIGMA: the answer fills several cells" in done.report.text()
    assert done["Intake!E4"] == SIGMAS[2]
    assert done["Intake!C3"] == 5.0


def test_a_range_for_one_value_in_a_plain_cell_is_noted_once(tmp_path: Path) -> None:
    cells = PRESSURES | {f"C{row}": formula("LP_SIGMA(A$2:A$4,4,0.03)") for row in range(2, 11)}
    cells |= {"D2": formula("SUM(LP_SIGMA(A2:A4,4,0.03))"), "E2": formula("LP_SIGMA(A2:A2,4,0.03)")}
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert {done[f"Intake!C{row}"] for row in range(2, 11)} == {SIGMAS[0]}
    assert done["Intake!D2"] == pytest.approx(sum(SIGMAS), rel=1e-15)
    (note,) = (w for w in done.report.warnings if "takes one value" in w)
    assert f"Intake!C2, Intake!C3, Intake!C4, Intake!C5, Intake!C6, Intake!C7 and {9 - MOST_CELLS} more" in note
    assert "D2" not in note
    assert "E2" not in note
    assert done.report.exit_code == 0


@pytest.mark.parametrize(
    "text, failed",
    [
        ("LP_SIGMA(A2:A5,4,0.03)", False),
        ("1+IF(A2>0,LP_SIGMA(A2:A5,4,0.03),0)", False),
        ("LP_MARGIN(LP_SIGMA(A2:A5,4,0.03),2)", False),
        ("ROUND(LP_SIGMA(A2:A5,4,0.03),2)", False),
        ("SUM(LP_SIGMA(A2:A5,4,0.03))", True),
        ("LP_SIGMA(A5:A6,4,0.03)", True),
    ],
)
def test_other_rows_of_a_range_do_not_fail_a_plain_cell(tmp_path: Path, text: str, failed: bool) -> None:
    done = both(bare(tmp_path / "list.xlsx", PRESSURES | {"A5": number(2.0), "A6": number(9.0), "C2": formula(text)}))
    assert bool(done.report.failed) is failed
    assert isinstance(done["Intake!C2"], CellError) is failed
    assert done.report.exit_code == int(failed)


def test_a_whole_column_in_a_plain_cell(tmp_path: Path) -> None:
    cells = {"A1": number(10.0), "A2": number(1.0), "C2": formula("LP_SIGMA(A:A,4,0.02)")}
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert done["Intake!C2"] == expected("LP_SIGMA", 10.0, 4.0, 0.02)
    assert done.failed == {}
    assert any("Intake!C2" in w for w in done.report.warnings)


TRAVELS = {"A1": 0.0, "B1": 2.0, "A2": 50.0, "B2": 3.0, "A3": 100.0, "B3": 4.0}


def test_tables_of_whole_columns_are_small(tmp_path: Path) -> None:
    cells = {place: number(value) for place, value in TRAVELS.items()}
    cells |= {f"D{row}": formula(f"LP_AT_TRAVEL({row},A:A,$B:$B)") for row in range(1, 21)}
    book = bare(tmp_path / "list.xlsx", cells)
    both(book)
    tracemalloc.start()
    done = recalculated(book)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    table = [[[TRAVELS[f"{c}{row}"]] for row in (1, 2, 3)] for c in "AB"]
    assert [done[f"Intake!D{row}"] for row in range(1, 21)] == [
        expected("LP_AT_TRAVEL", float(row), *table) for row in range(1, 21)
    ]
    # A column has 1 048 576 cells: as Python lists two of them take some 150 MB and seconds.
    assert peak < 50_000_000


def test_a_whole_column_reaches_to_the_end_of_an_array_result(tmp_path: Path) -> None:
    cells = {"D1": formula("LP_AT_TRAVEL(150,A:A,B:B)")}
    cells |= {
        "A1": _array("_xlfn.SEQUENCE(6,1,0,50)", "A1", dynamic=True),
        "B1": _array("_xlfn.SEQUENCE(6)+LP_MARGIN(2,1)", "B1", dynamic=True),
    }
    done = both(bare(tmp_path / "list.xlsx", cells))
    travels, values = [[50.0 * k] for k in range(6)], [[k + 1.0 + expected("LP_MARGIN", 2.0, 1.0)] for k in range(6)]
    assert done["Intake!B6"] == values[5][0]
    assert done["Intake!D1"] == expected("LP_AT_TRAVEL", 150.0, travels, values)


def test_columns_of_unequal_filling_are_equally_long_tables(tmp_path: Path) -> None:
    cells = {place: number(value) for place, value in TRAVELS.items()} | {"A4": number(120.0)}
    done = both(bare(tmp_path / "list.xlsx", cells | {"D1": formula("LP_AT_TRAVEL(25,A:A,B:B)")}))
    assert "must have no blank between its rows" in done.failed["Intake!D1"]  # not that one were longer


STAGES = [row[0] for row in expected("LP_STAGE_PRESSURES", 60.0, 8.0, 0.03, 3.0)]
CALL = "LP_STAGE_PRESSURES(60,8,0.03,3)"


def test_a_short_answer_is_filled_up_to_the_other_arrays(tmp_path: Path) -> None:
    # OASIS ODF 1.3 part 4, 3.3 (from memory): what an array lacks beside a longer one is #N/A.
    cells = {f"A{row}": number(float(row)) for row in range(2, 11)} | {"E4": number(7.0)}
    cells |= {
        "F2": _array(f'IF(A2:A10>E4,"high",{CALL})', "F2:F10"),
        "G2": _array(f"{CALL}*A2:A10", "G2:G10"),
        "H2": _array(f"IFERROR({CALL}/A2:A10,-1)", "H2:H10"),
        "I2": _array(f"{CALL}-A2:A10", "I2", dynamic=True),
        "J2": _array(f'ROUND({CALL},1)&" bar "&A2:A10', "J2:J10"),
        "K2": _array("LP_SIGMA(A8:A10,4,0.03)+A2:A10", "K2:K10"),
        "L2": formula(f"SUMPRODUCT(({CALL}>9)*1)"),
    }
    done = both(bare(tmp_path / "list.xlsx", cells))

    def column(letter: str) -> list[object]:
        return [done[f"Intake!{letter}{row}"] for row in range(2, 11)]

    missing = [CellError.NA] * 5
    rows = [float(row) for row in range(2, 11)]
    assert column("F") == [*STAGES, *missing[:2], "high", "high", "high"]
    assert column("G") == [*(p * row for p, row in zip(STAGES, rows, strict=False)), *missing]
    assert column("H") == [*(p / row for p, row in zip(STAGES, rows, strict=False)), *[-1.0] * 5]
    assert column("I") == [*(p - row for p, row in zip(STAGES, rows, strict=False)), *missing]
    assert column("J")[:2] == ["60 bar 2", f"{round(STAGES[1], 1):g} bar 3"]
    assert column("J")[4:] == missing
    wanted = [expected("LP_SIGMA", p1, 4.0, 0.03) + row for p1, row in zip((8.0, 9.0, 10.0), rows, strict=False)]
    assert column("K") == [*wanted, *[CellError.NA] * 6]
    assert done["Intake!L2"] == float(sum(p > 9 for p in STAGES))
    assert {d["id"] for d in done.report.differences} >= {"arrays-of-unequal-size"}


def test_arrays_that_fit_are_left_as_they_are() -> None:
    for text in ("=IF(A2:A9>1,B2:B9*LP_SIGMA(C2:C9,4,0.03),0)", "=SUMPRODUCT((A:A>1)*(B:B<2))", "=A2:A9*B$1:D$1",
                 "=SUMPRODUCT((A2:A9>1)*(C12:C19<2))", "=A2:A4*{1;2;3}*{1,2}"):  # fmt: skip
        assert "PAD" not in prepare(text).text, text
    for text in ("=A2:A9*B2:B8", "=A2:A4*{1;2}", f"={CALL}*A2:A5"):
        assert prepare(text).text.count("PAD(") == 2, text


def test_rows_that_stand_in_for_others_have_no_height() -> None:
    assert padding.sizes_matter("=SUM(A2:A9*B2:B8)")
    assert not padding.sizes_matter("=SUM(A2:A9*B$12:B19)+A2*SUM(C2:D2)")
    # Between A2, A9 and A4 the stand-ins of A2:A4 and B9:B11 would be unequally far apart.
    assert "PAD" not in prepare("=SUM(A2,A9,A4,A2:A4*B6:B8*B9:B11)").text


@pytest.mark.parametrize(
    "text, value",
    [
        ("SUM(Intake!A2:Intake!A4)", 29.5), ("SUM('Intake'!A2:'Intake'!$A$3)", 22.5),
        ("SUM(intake!A2:Intake!A4,1)", 30.5),
        ("LP_AT_TRAVEL(2,Intake!B2:Intake!B3,Intake!C2:Intake!C3)", 6.0), ("SUM(first:A4)", 29.5),
        ("SUM(first:last)", 29.5), ("SUM(Intake!A2:INDEX(Intake!A2:A4,2))", 22.5),
    ],
)  # fmt: skip
def test_two_cells_with_their_sheet_make_one_range(tmp_path: Path, text: str, value: float) -> None:
    cells = PRESSURES | {"B2": number(1.0), "B3": number(3.0), "C2": number(5.0), "C3": number(7.0)}
    names = "".join(
        f'<definedName name="{name}">Intake!$A${row}</definedName>' for name, row in (("first", 2), ("last", 4))
    )
    done = both(
        bare(
            tmp_path / "list.xlsx",
            cells | {"E9": formula(text), "F9": formula("LP_MARGIN(E9,2)")},
            frame=f"<definedNames>{names}</definedNames>",
        )
    )
    assert done.kept == {}
    assert done["Intake!E9"] == value
    assert done["Intake!F9"] == expected("LP_MARGIN", value, 2.0)


def test_the_corner_of_a_range_moves_with_its_row(tmp_path: Path) -> None:
    cells = PRESSURES | {f"C{row}": formula(f"SUM(Intake!$A$2:Intake!A{row})") for row in (2, 3, 4)}
    cells |= {"D2": '<f t="shared" ref="D2:E2" si="0">SUM(Intake!A2:Intake!A4)</f>', "E2": '<f t="shared" si="0"/>'}
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert [done[f"Intake!C{row}"] for row in (2, 3, 4)] == [10.0, 22.5, 29.5]
    assert (done["Intake!D2"], done["Intake!E2"]) == (29.5, 0.0)


def test_a_blank_before_the_bracket_of_a_call(tmp_path: Path) -> None:
    cells = PRESSURES | {
        "C2": formula("LP_SIGMA (A2,4,0.03)"), "D2": formula("IF(A2>0,lp.sigma  (A2,4,0.03)*2,0)"),
        "E2": formula("_xll.LP_SIGMA (A2,4,0.03)"), "F2": formula("twice+1"),
    }  # fmt: skip
    names = '<definedNames><definedName name="twice">2*LP_SIGMA (Intake!$A$2,4,0.03)</definedName></definedNames>'
    done = both(bare(tmp_path / "list.xlsx", cells, frame=names))
    assert [done[f"Intake!{c}2"] for c in "CDEF"] == [SIGMAS[0], 2 * SIGMAS[0], SIGMAS[0], 2 * SIGMAS[0] + 1]
    assert done.report.calls == 4
    assert b"LP_SIGMA (A2,4,0.03)" in done.part("xl/worksheets/sheet1.xml")
