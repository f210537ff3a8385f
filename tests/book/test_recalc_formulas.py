"""Ordinary formulas around LP_ calls: arguments, nesting, branches, tables, names, several sheets."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
import xlsxwriter

from book.lists import ITEMS, Done, both, expected, listed, valves
from lowpoint.problems import CellError


def _done(tmp_path: Path, places: dict[str, Any], **more: Any) -> Done:
    return both(listed(tmp_path / "list.xlsx", valves() | places, **more))


def _sigma(item: int) -> Any:
    return expected("LP_SIGMA", *ITEMS[item][:3])


def test_omitted_arguments_take_the_declared_defaults(tmp_path: Path) -> None:
    places = {
        "F2": "=LP_REGIME(1.1,,,,1.2)", "F3": "=LP_REGIME(3,,2,)", "F4": "=LP_REGIME(1.1,,,,,1.2)",
        "G2": "=LP_REGIME(2,)",
        "G3": "=LP_SIGMA(A2,B2,)", "G4": "=LP_SIGMA(,B2,C2)", "H2": "=IF(1,LP_REGIME(1.1,,,,1.2))&\"!\"",
    }  # fmt: skip
    done = _done(tmp_path, places)
    # Source: the rules of LP_REGIME in product.md: at or below the fifth argument, vibration; the sixth, choked.
    assert done["F2"] == "vibration"
    assert done["F3"] == "unjudged"
    assert done["F4"] == "choked"
    assert done["G2"] is done["G3"] is done["G4"] is CellError.NA
    assert done["H2"] == "vibration!"


def test_blank_cells_text_logicals_and_errors_as_arguments(tmp_path: Path) -> None:
    places = {
        "E2": "n/a", "E3": True, "E4": "#DIV/0!", "F2": "=LP_SIGMA(A2,B2,Z9)", "F3": "=LP_SIGMA(A2,B2,E2)",
        "F4": "=LP_SIGMA(A2,B2,E3)", "G2": "=LP_SIGMA(A2,NA(),E4)", "G3": "=LP_SIGMA(A2,B2,E4)",
        "G4": "=LP_SIGMA(B2,A2,C2)",
        "H2": '=LP_SIGMA(A2,B2,"")', "H3": "=LP_SIGMA(A2,B2,IF(FALSE,1,Z9))", "H4": "=LP_SIGMA(A2,B2,+Z9)",
        "I2": "=LP_SIGMA(A2,B2,Z9+0)", "I3": "=LP_SIGMA(A2,B2,INDEX(Z1:Z9,2))", "I4": "=LP_SIGMA(A2,B2,1/0)",
    }  # fmt: skip
    done = _done(tmp_path, places)
    assert done["F2"] is done["H2"] is done["H3"] is done["H4"] is done["I3"] is CellError.NA
    assert done["F3"] is CellError.VALUE
    assert done["F4"] == expected("LP_SIGMA", 10.0, 4.0, 1.0)
    assert done["G2"] is CellError.NA  # the leftmost of two errors
    assert done["G3"] is done["I4"] is CellError.DIV0
    assert done["G4"] is CellError.NUM
    assert done["I2"] == expected("LP_SIGMA", 10.0, 4.0, 0.0)  # a blank in a sum is 0, as everywhere


@pytest.mark.parametrize(
    "text, wanted",
    [
        ("LP_SIGMA(A2,B2,C2)*2+1", _sigma(0) * 2 + 1), ("IF(LP_SIGMA(A2,B2,C2)>1.5,\"high\",\"low\")", "high"),
        ("IFERROR(LP_SIGMA(B2,A2,C2),-1)", -1.0), ("IFNA(LP_SIGMA(A2,B2,Z9),-2)", -2.0),
        ("ROUND(LP_SIGMA(A2,B2,C2),2)", 1.66), ("LP_MARGIN(LP_SIGMA(A2,B2,C2),LP_SIGMA(A3,B3,C3))", None),
        ("_xlfn.LET(_xlpm.s,LP_SIGMA(A2,B2,C2),_xlpm.s+_xlpm.s)", 2 * _sigma(0)),
        ("_xlfn.LET(_xlpm.p,A2,LP_SIGMA(_xlpm.p,B2,C2))", _sigma(0)),
        ("_xlfn.IFS(A2<0,1,TRUE,LP_SIGMA(A2,B2,C2))", _sigma(0)), ("CHOOSE(2,1,LP_SIGMA(A2,B2,C2))", _sigma(0)),
        ("_xlfn.SWITCH(D2,0.9,LP_SIGMA(A2,B2,C2),0)", _sigma(0)), ("MAX(LP_SIGMA(A2,B2,C2),LP_SIGMA(A3,B3,C3))",
         _sigma(1)),
        ("SUM(LP_SIGMA(A2,B2,C2),A2:A4)", _sigma(0) + 29.5), ("LP_SIGMA(SUM(A2),MIN(B2:B2),C2)", _sigma(0)),
        ("LP_SIGMA(INDEX(A2:A4,2),VLOOKUP(12.5,A2:B4,2,FALSE),C3)", _sigma(1)),
        ("LP_SIGMA(IF(D2>0.5,A2,A3),B2,C2)", _sigma(0)), ("LP_SIGMA(A2,B2,C2)&\" \"&LP_REGIME(3,2)", None),
        ("TEXT(LP_SIGMA(A2,B2,C2),\"0.00\")", "1.66"), ("-LP_SIGMA(A2,B2,C2)^2", _sigma(0) ** 2),
        ("SUMPRODUCT(LP_SIGMA(A2:A4,B2:B4,C2:C4)*(A2:A4>8))", _sigma(0) + _sigma(1)),
        ("LP_SIGMA(OFFSET(A1,1,0),INDIRECT(\"B2\"),C2)", _sigma(0)), ("LP_SIGMA(A2,B2,3%)", _sigma(0)),
        ("LP_SIGMA(A2,B2,C2)=LP_SIGMA(A2,B2,C2)", True), ("IF(ROW()=2,LP_SIGMA(A2,B2,C2),0)", _sigma(0)),
        ("LP_AT_TRAVEL(50,{0;100},{1;3})", 2.0), ("LP_SIGMA(--A2,B2*1,C2+0)", _sigma(0)), ("LP_SIGMA(A2,B2,\"0.03\")",
         None),
    ],
)  # fmt: skip
def test_formulas_around_calls(tmp_path: Path, text: str, wanted: object) -> None:
    done = _done(tmp_path, {"F2": f"={text}"})
    special = {
        "LP_MARGIN(LP_SIGMA(A2,B2,C2),LP_SIGMA(A3,B3,C3))": expected("LP_MARGIN", _sigma(0), _sigma(1)),
        # Source: a number becomes text with 15 significant digits (Microsoft support article 78113).
        'LP_SIGMA(A2,B2,C2)&" "&LP_REGIME(3,2)': "1.66166666666667 clear",
        'LP_SIGMA(A2,B2,"0.03")': CellError.VALUE,  # text where a number belongs
    }
    wanted = special.get(text, wanted)
    assert done.report.kept == []
    assert done["F2"] == (pytest.approx(wanted, rel=1e-15) if isinstance(wanted, float) else wanted)
    assert type(done["F2"]) is type(wanted)


def test_calls_that_read_calls_in_any_order(tmp_path: Path) -> None:
    places = {
        "F2": "=LP_MARGIN(G2,H2)", "G2": "=LP_SIGMA(A2,B2,C2)", "H2": "=I2*1.5", "I2": "=LP_FF(C2,J2)", "J2": "=200+K2",
        "K2": "=20.64", "F3": "=SUM(F2:K2)",
    }  # fmt: skip
    done = _done(tmp_path, places)
    assert done["I2"] == expected("LP_FF", 0.03, 220.64)
    assert done["F2"] == expected("LP_MARGIN", _sigma(0), done["I2"] * 1.5)
    assert done["F3"] == pytest.approx(sum(done[f"{c}2"] for c in "FGHIJK"), rel=1e-15)


def test_a_column_that_reads_the_row_above_itself(tmp_path: Path) -> None:
    places: dict[str, Any] = {"F2": 1.0} | {f"F{row}": f"=LP_MARGIN(A{row},F{row - 1}+10)" for row in (3, 4)}
    done = _done(tmp_path, places)
    assert done["F3"] == expected("LP_MARGIN", 12.5, 11.0)
    assert done["F4"] == expected("LP_MARGIN", 7.0, done["F3"] + 10)


def test_several_sheets_with_names_that_need_quotes(tmp_path: Path) -> None:
    places = {
        "'Fuel jetty'!A1": "=LP_SIGMA(List!A2,List!B2,'Kestrel''s bay'!A1)", "'Kestrel''s bay'!A1": 0.05,
        "R1C1!A1": 2.5,
        "F2": "='Fuel jetty'!A1*2", "F3": "=LP_MARGIN('FUEL JETTY'!A1,'R1C1'!A1)",
    }  # fmt: skip
    places = {place.replace("'Fuel jetty'", "Fuel jetty").replace("'Kestrel''s bay'!A1", "Kestrel's bay!A1"): value
              for place, value in places.items()}  # fmt: skip
    done = _done(tmp_path, places, sheets=("List", "Fuel jetty", "Kestrel's bay", "R1C1"))
    sigma = expected("LP_SIGMA", 10.0, 4.0, 0.05)
    assert done["Fuel jetty!A1"] == sigma
    assert done["F2"] == 2 * sigma
    assert done["F3"] == expected("LP_MARGIN", sigma, 2.5)


def test_why_tells_the_reason_in_a_cell(tmp_path: Path) -> None:
    places = {
        "F2": '=LP_WHY("LP_SIGMA",A2,B2,C2)', "F3": '=LP_WHY("LP_SIGMA",B2,A2,C2)', "F4": '=LP_WHY("lp.sigma",A2,B2,)',
        "G2": '=LP_WHY("SUM",1)', "G3": '=LEFT(LP_WHY("LP_SIGMA",B2,A2,C2),8)', "G4": '=LP_WHY("LP_COEFFICIENT",F2)',
        "H2": "LP_SIGMA", "H3": "=LP_WHY(H2,B2,A2,C2)", "H4": '=LP_WHY("LP_REGIME",1.1,,,,1.2)',
    }  # fmt: skip
    done = _done(tmp_path, places)
    assert done["F2"] == "ok"
    assert (
        done["F3"]
        == done["H3"]
        == (
            "LP_SIGMA: p2 must be below p1 = 4, got 10. The outlet pressure must be the lower one: check that the two "
            "are not swapped."
        )
    )
    assert "pv (vapour pressure" in done["F4"]
    assert "must be given, got a blank cell" in done["F4"]
    assert done["G2"] is CellError.VALUE
    assert done["G3"] == "LP_SIGMA"
    assert "flow" in done["G4"]
    assert isinstance(done["H4"], str)
    assert done.report.failed == [] or set(done.failed) == {"List!G2"}


def test_tables_and_their_columns(tmp_path: Path) -> None:
    path = tmp_path / "tables.xlsx"
    book = xlsxwriter.Workbook(path)
    sheet, other = book.add_worksheet("List"), book.add_worksheet("Sum")
    columns: list[dict[str, Any]] = [
        {"header": "p1"}, {"header": "p 2"}, {"header": "pv #"},
        {"header": "sigma", "formula": "=LP_SIGMA([@p1],[@[p 2]],[@[pv '#]])"},
        {"header": "margin", "formula": "=LP_MARGIN(Valves[[#This Row],[sigma]],MAX(Valves[sigma]))"},
    ]  # fmt: skip
    sheet.add_table("B3:F6", {"name": "Valves", "columns": columns, "data": [item[:3] for item in ITEMS]})
    other.write_formula("A1", "=SUM(Valves[sigma])")
    other.write_formula("A2", "=COUNT(valves[[p1]:[pv '#]])")
    other.write_formula("A3", "=ROWS(Valves[#All])&Valves[[#Headers],[p 2]]")
    other.write_formula("A4", "=LP_SIGMA(INDEX(Valves[p1],2),INDEX(Valves[p 2],2),INDEX(Valves[pv '#],2))")
    other.write_formula("A5", "=SUM(Valves[none])")
    other.write_formula("A6", "=SUM(Pumps[sigma])")
    book.close()
    done = both(path)
    sigmas = [_sigma(item) for item in range(3)]
    assert [done[f"E{row}"] for row in (4, 5, 6)] == sigmas
    assert [done[f"F{row}"] for row in (4, 5, 6)] == [expected("LP_MARGIN", s, max(sigmas)) for s in sigmas]
    assert done["Sum!A1"] == pytest.approx(sum(sigmas), rel=1e-15)
    assert done["Sum!A2"] == 9.0
    assert done["Sum!A3"] == "4p 2"
    assert done["Sum!A4"] == sigmas[1]
    assert done.kept == {
        "Sum!A5": "the table Valves has no column 'none'", "Sum!A6": "there is no table 'Pumps' in the workbook",
    }  # fmt: skip


def test_names_over_ranges_formulas_and_nothing(tmp_path: Path) -> None:
    names = {
        "inlets": "List!$A$2:$A$4", "moving": "OFFSET(List!$A$1,1,0,3,1)", "twice": "2*List!$A$2", "lost": "List!#REF!",
        "ring": "ring+1", "away": "[1]Other!$A$1",
    }  # fmt: skip
    places = {
        "F2": "=SUM(inlets)*LP_FF(0.03,220)", "F3": "=SUM(moving)+LP_FF(0.03,220)", "F4": "=LP_SIGMA(twice,B2,C2)",
        "G2": "=lost+LP_FF(0.03,220)", "G3": "=ring", "G4": "=away+1", "H2": "=unheard_of+1",
        "H3": "=LP_SIGMA(INDEX(inlets,2),B3,C3)",
    }  # fmt: skip
    done = _done(tmp_path, places, names=names)
    ff = expected("LP_FF", 0.03, 220.0)
    assert done["F2"] == 29.5 * ff
    assert done["F3"] == 29.5 + ff
    assert done["F4"] == expected("LP_SIGMA", 20.0, 4.0, 0.03)
    assert done["G2"] is CellError.REF
    assert done["H3"] == _sigma(1)
    assert done.kept == {
        "List!G3": "a defined name leads back to itself, or through too many others",
        "List!G4": "it reads [1]Other!$A$1, which lies in another workbook or on several sheets at once",
        "List!H2": "the name 'unheard_of' is not defined",
    }


def test_whole_columns_and_rows_are_read(tmp_path: Path) -> None:
    done = _done(
        tmp_path, {"F2": "=LP_SIGMA(MAX(A:A),SUM(B2:B2),C2)", "F3": "=SUM(F2:F2,2:2)-F2*2", "H5": "=COUNT(A:D)"}
    )
    assert done["F2"] == expected("LP_SIGMA", 12.5, 4.0, 0.03)
    assert done["H5"] == 12.0
    assert done["F3"] == pytest.approx(sum(ITEMS[0]), rel=1e-12)


def test_dates_follow_the_system_of_the_workbook(tmp_path: Path) -> None:
    # Source: ISO/IEC 29500-1, 18.17.4: 1 January 2024 is 45292 in the 1900 and 43830 in the 1904 system.
    for date1904, serial in ((False, 45292.0), (True, 43830.0)):
        path = tmp_path / f"{date1904}.xlsx"
        book = xlsxwriter.Workbook(path, {"date_1904": date1904})
        sheet = book.add_worksheet("List")
        sheet.write_number("A1", serial, book.add_format({"num_format": "yyyy-mm-dd"}))
        sheet.write_formula("B1", "=DATE(2024,1,1)+LP_FF(0.03,220)*0")
        sheet.write_formula("C1", "=YEAR(A1)")
        book.close()
        done = both(path)
        assert done["B1"] == serial
        assert done["C1"] == 2024.0
