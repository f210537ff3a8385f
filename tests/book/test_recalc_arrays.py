"""Array results: legacy arrays, dynamic arrays and their spills, implicit intersection of plain formulas."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import pytest
import xlsxwriter

from book.lists import ITEMS, Done, bare, both, expected, formula, number
from lowpoint.problems import CellError

SIGMAS = [expected("LP_SIGMA", *item[:3]) for item in ITEMS]
RANGES = "A2:A4,B2:B4,C2:C4"


def _written(path: Path, fill: Callable[[Any], None]) -> Done:
    """A book by XlsxWriter with the items in A2:D4, filled further, recalculated both ways."""
    book = xlsxwriter.Workbook(path)
    sheet = book.add_worksheet("List")
    for row, item in enumerate(ITEMS, start=1):
        sheet.write_row(row, 0, item)
    fill(sheet)
    book.close()
    return both(path)


def _column(done: Done, letter: str, first: int, last: int) -> list[Any]:
    return [done[f"{letter}{row}"] for row in range(first, last + 1)]


def _dynamic(places: Mapping[str, str]) -> dict[str, str]:
    """Bare cells with dynamic array formulas; a stored range may follow the formula behind a blank and a bar."""
    cells = {}
    for place, text in places.items():
        text, _, reach = text.partition(" |")
        cells[place] = f'cm="1"|<f t="array" ref="{reach or place}">{text}</f><v>0</v>'
    return cells


def _inputs() -> dict[str, str]:
    return {
        f"{column}{row}": number(value)
        for row, item in enumerate(ITEMS, start=2)
        for column, value in zip("ABCD", item, strict=True)
    }


def _ranges(done: Done) -> dict[str, str]:
    """The stored range of every array formula."""
    part = done.part("xl/worksheets/sheet1.xml").decode()
    return dict(re.findall(r'<c r="(\w+)"[^>]*><f t="array" ref="([\w:]+)"', part))


def test_legacy_arrays_fill_their_range(tmp_path: Path) -> None:
    def fill(sheet: Any) -> None:
        sheet.write_array_formula("F2:F4", f"{{=LP_SIGMA({RANGES})}}")
        sheet.write_array_formula("G2:G5", f"{{=LP_SIGMA({RANGES})*2}}")
        sheet.write_array_formula("H2:H3", f"{{=LP_SIGMA({RANGES})}}")
        sheet.write_array_formula("I2:J4", "{=LP_SIGMA(A2:A4,B2:B4,C2)}")
        sheet.write_array_formula("K2", f"{{=SUM(LP_SIGMA({RANGES}))}}")
        sheet.write_array_formula("L2:L4", "{=LP_FF(0.03,220)}")
        sheet.write_array_formula("M2", f"{{=LP_SIGMA({RANGES})}}")

    done = _written(tmp_path / "list.xlsx", fill)
    assert _column(done, "F", 2, 4) == SIGMAS
    assert _column(done, "G", 2, 5) == [*(2 * s for s in SIGMAS), CellError.NA]  # beyond the result: #N/A
    assert _column(done, "H", 2, 4) == [*SIGMAS[:2], None]
    assert _column(done, "I", 2, 4) == _column(done, "J", 2, 4)  # one column is repeated
    assert done["K2"] == pytest.approx(sum(SIGMAS), rel=1e-15)
    assert _column(done, "L", 2, 4) == [expected("LP_FF", 0.03, 220.0)] * 3
    assert done["M2"] == SIGMAS[0]
    assert _ranges(done)["G2"] == "G2:G5"
    assert done.report.kept == []


def test_dynamic_arrays_spill_and_say_so_in_their_range(tmp_path: Path) -> None:
    def fill(sheet: Any) -> None:
        sheet.write_dynamic_array_formula("F2", f"=LP_SIGMA({RANGES})")
        sheet.write_dynamic_array_formula("G2", "=_xlfn._xlws.SORT(_xlfn.ANCHORARRAY(F2),1,-1)")
        sheet.write_formula("H2", "=SUM(_xlfn.ANCHORARRAY(F2))")
        sheet.write_formula("H3", "=F3*2")
        sheet.write_formula("H4", "=LP_MARGIN(F4,2)")
        sheet.write_dynamic_array_formula("I2", "=LP_SIGMA(A2,B2,C2)")
        sheet.write_dynamic_array_formula("J2", f"=_xlfn._xlws.FILTER(A2:A4,LP_SIGMA({RANGES})>3)")
        sheet.write_dynamic_array_formula("L2", "=TRANSPOSE(LP_MARGIN(F2:F4,2))")

    done = _written(tmp_path / "list.xlsx", fill)
    assert _column(done, "F", 2, 5) == [*SIGMAS, None]
    assert _column(done, "G", 2, 4) == sorted(SIGMAS, reverse=True)
    assert done["H2"] == pytest.approx(sum(SIGMAS), rel=1e-15)
    assert done["H3"] == 2 * SIGMAS[1]
    assert done["H4"] == expected("LP_MARGIN", SIGMAS[2], 2.0)
    assert _column(done, "J", 2, 4) == [12.5, 7.0, None]
    assert [done[f"{c}2"] for c in "LMN"] == [expected("LP_MARGIN", s, 2.0) for s in SIGMAS]
    reach = _ranges(done)
    assert [reach[place] for place in ("F2", "G2", "I2", "J2", "L2")] == ["F2:F4", "G2:G4", "I2", "J2:J3", "L2:N2"]
    assert {"List!F3", "List!F4", "List!H3", "List!L2", "List!N2"} <= done.changed
    assert done.unfed == set()


def test_new_cells_rows_and_the_dimension_of_a_spill(tmp_path: Path) -> None:
    cells = _dynamic({"C2": "LP_SIGMA({10;20;30},4,0.03)", "F9": "LP_SIGMA({10,20},4,0.03)"})
    cells |= {"D4": number(1.0), "E9": number(2.0), "H9": number(3.0), "C9": number(5.0)}
    xml = bare(tmp_path / "list.xlsx", cells)
    done = both(xml)
    part = done.part("xl/worksheets/sheet1.xml").decode()
    wanted = [expected("LP_SIGMA", p1, 4.0, 0.03) for p1 in (10.0, 20.0, 30.0)]
    assert [done[f"Intake!C{row}"] for row in (2, 3, 4)] == wanted
    assert [done[f"Intake!{column}9"] for column in "EFGH"] == [2.0, *wanted[:2], 3.0]
    assert re.findall(r'<row r="(\d+)"', part) == ["2", "3", "4", "9"]
    assert re.findall(r'<c r="(\w+)"', part) == ["C2", "C3", "C4", "D4", "C9", "E9", "F9", "G9", "H9"]


@pytest.mark.parametrize("stated, wanted", [("A1:C9", "A1:C9"), ("C2", "C2:C4"), ("C2:D3", "C2:D4")])
def test_the_stated_extent_grows_with_a_spill(tmp_path: Path, stated: str, wanted: str) -> None:
    from book.lists import cells_xml
    from book.makers import MAIN, pack, parts

    inside = cells_xml(_dynamic({"C2": "LP_SIGMA({10;20;30},4,0.03)"}))
    sheet = f'<worksheet xmlns="{MAIN}"><dimension ref="{stated}"/><sheetData>{inside}</sheetData></worksheet>'
    done = both(pack(tmp_path / "list.xlsx", {**parts(), "xl/worksheets/sheet1.xml": sheet.encode()}))
    assert f'<dimension ref="{wanted}"/>'.encode() in done.part("xl/worksheets/sheet1.xml")


def test_a_spill_that_shrinks_leaves_its_old_cells_empty(tmp_path: Path) -> None:
    cells = {"A2": number(10.0), "A3": number(20.0)} | _dynamic({"C2": "LP_SIGMA(A2:A3,4,0.03) |C2:C5"})
    cells |= {
        "C3": 's="0"|<v>7</v>',
        "C4": 's="0"|<v>8</v>',
        "C5": 't="str"|<v>old</v>',
        "D2": formula("SUM(C2:C5)", "1"),
    }
    done = both(bare(tmp_path / "list.xlsx", cells))
    part = done.part("xl/worksheets/sheet1.xml")
    assert _ranges(done)["C2"] == "C2:C3"
    assert b'<c r="C4" s="0"/>' in part
    assert b'<c r="C5"/>' in part
    values = [expected("LP_SIGMA", p1, 4.0, 0.03) for p1 in (10.0, 20.0)]
    assert done["Intake!C3"] == values[1]
    assert done["Intake!D2"] == pytest.approx(sum(values), rel=1e-15)


@pytest.mark.parametrize(
    "blocker",
    ["<v>5</v>", 't="inlineStr"|<is><t>in the way</t></is>', formula("1+1", "2"), formula("LP_FF(0.03,220)", "1")],
)
def test_a_spill_with_something_in_its_way(tmp_path: Path, blocker: str) -> None:
    cells = _inputs() | _dynamic({"F2": f"LP_SIGMA({RANGES})"})
    cells |= {
        "F4": blocker,
        "G2": formula("F2+1", "1"),
        "G3": formula("LP_MARGIN(F2,2)", "1"),
        "G4": formula("IFERROR(F2,-1)", "1"),
    }
    done = both(bare(tmp_path / "list.xlsx", cells))
    # The file format has no word for it: programs write #VALUE! and keep the rest in parts of their own.
    assert done["Intake!F2"] is done["Intake!G2"] is done["Intake!G3"] is CellError.VALUE
    assert done["Intake!G4"] == -1.0
    assert done["Intake!F3"] is None
    assert {c.cell: c.new for c in done.report.changed}["F2"] is CellError.SPILL
    assert done.report.kept == []
    assert _ranges(done)["F2"] == "F2"


def test_spills_that_depend_on_spills_come_to_rest(tmp_path: Path) -> None:
    cells = _inputs() | _dynamic(
        {
            "F2": "_xlfn.SEQUENCE(LP_AT_TRAVEL(G2,{0;100},{2;4}))", "G2": "COUNT(A2:A4)*0", "H2": "LP_MARGIN(F2:F3,1)",
            "I2": "_xlfn.ANCHORARRAY(H2)*LP_FF(0.03,220)",
        }
    )  # fmt: skip
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert [done[f"Intake!F{row}"] for row in (2, 3, 4)] == [1.0, 2.0, None]
    assert [done[f"Intake!H{row}"] for row in (2, 3)] == [0.0, 1.0]
    assert done["Intake!I3"] == expected("LP_FF", 0.03, 220.0)


def test_a_plain_formula_takes_the_cell_of_its_own_row(tmp_path: Path) -> None:
    def fill(sheet: Any) -> None:
        sheet.write_formula("F2", "=A2:A4*2+LP_FF(0.03,220)*0")
        sheet.write_formula("F4", "=A2:A4*2")
        sheet.write_formula("F6", "=A2:A4*2")
        sheet.write_formula("G3", "=_xlfn.SINGLE(A2:A4)+LP_FF(0.03,220)*0")
        sheet.write_formula("H3", f"=LP_SIGMA({RANGES})")
        sheet.write_formula("I3", "=LP_SIGMA(_xlfn.SINGLE(A2:A4),@B2:B4,C3)")
        sheet.write_formula("J3", '=IF(A2:A4>10,"high","low")')
        sheet.write_formula("J4", "=ROUND(A2:A4,0)")

    done = _written(tmp_path / "list.xlsx", fill)
    assert done["F2"] == 20.0
    assert done["F4"] == 14.0
    assert done["F6"] is CellError.VALUE
    assert done["G3"] == 12.5
    # A function of an add-in is given the whole range, and the cell shows the first of its results.
    assert done["H3"] == SIGMAS[0]
    assert done["I3"] == SIGMAS[1]
    assert done["J3"] == "high"
    assert done["J4"] == 7.0


def test_array_constants_and_broadcasting(tmp_path: Path) -> None:
    cells = _dynamic({"F2": "LP_MARGIN({2;3;4},{1,2})"})
    done = both(bare(tmp_path / "list.xlsx", cells))
    for r, sigma in enumerate((2.0, 3.0, 4.0)):
        for c, limit in enumerate((1.0, 2.0)):
            assert done[f"Intake!{'FG'[c]}{2 + r}"] == expected("LP_MARGIN", sigma, limit)


def test_an_array_of_pressures_between_stages(tmp_path: Path) -> None:
    cells = _dynamic({"F2": "LP_STAGE_PRESSURES(60,8,0.03,3)"}) | {
        "H2": '<f t="array" ref="H2:H5">LP_STAGE_PRESSURES(60,8,0.03,3)</f><v>0</v>',
        "J2": formula("LP_STAGE_PRESSURES(60,8,0.03,3)", "0"),
        "K2": formula("INDEX(LP_STAGE_PRESSURES(60,8,0.03,3),2)", "0"),
    }  # fmt: skip
    done = both(bare(tmp_path / "list.xlsx", cells))
    column = [row[0] for row in expected("LP_STAGE_PRESSURES", 60.0, 8.0, 0.03, 3.0)]
    assert len(column) == 4
    assert (column[0], column[-1]) == (60.0, 8.0)
    for letter in "FH":
        assert [done[f"Intake!{letter}{row}"] for row in range(2, 6)] == column
    assert done["Intake!J2"] == column[0]
    assert done["Intake!K2"] == column[1]
    assert _ranges(done) == {"F2": "F2:F5", "H2": "H2:H5"}
