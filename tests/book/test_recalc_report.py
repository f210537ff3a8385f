"""What the report says: recomputed, changed, changed unfed, failed with the reason, untouched; warnings and codes."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from book.lists import bare, both, expected, formula, listed, number, recalculated, valves
from book.makers import book, parts
from lowpoint.book.report import Change, Failure, Kept, Report
from lowpoint.problems import CellError

INPUTS = {"A1": number(10.0), "B1": number(4.0), "C1": number(0.03)}
SIGMA = "LP_SIGMA(A1,B1,C1)"
VALUE = expected("LP_SIGMA", 10.0, 4.0, 0.03)
SWAPPED = (
    "LP_SIGMA: p2 must be below p1 = 4, got 10. The outlet pressure must be the lower one: check that the two are not "
    "swapped."
)


def test_changed_cells_untouched_ones_and_those_that_no_call_feeds(tmp_path: Path) -> None:
    cells = INPUTS | {
        "E1": formula(SIGMA, repr(VALUE)), "F1": formula("E1*2", "1"), "G1": formula("A1*2", "3"),
        "H1": formula("A1+B1", "14"),
        "I1": formula("A1-B1"), "J1": 't="str"|' + formula('"p"&A1', "p10"), "K1": 't="b"|' + formula("A1>1", "1"),
        "L1": formula("1/3", "0.333333333333333"), "M1": formula("E1/3", "0.55388888888888"),
    }  # fmt: skip
    done = both(bare(tmp_path / "list.xlsx", cells))
    report = done.report
    # A cell without a stored value is new, not a surprise; 15 digits are all that some programs store.
    assert done.changed == {"Intake!F1", "Intake!I1", "Intake!M1"}
    assert done.unfed == {"Intake!G1"}
    assert report.unfed == [Change("Intake", "G1", 3.0, 20.0)]
    assert (report.recomputed, report.calls, report.untouched) == (9, 1, 5)
    assert report.exit_code == 0
    assert report.parts == ["xl/worksheets/sheet1.xml"]


def test_a_second_run_changes_nothing_and_gives_the_same_bytes(tmp_path: Path) -> None:
    places = (
        valves()
        | {f"F{row}": f"=LP_SIGMA(A{row},B{row},C{row})" for row in (2, 3, 4)}
        | {"G2": "=SUM(F2:F4)", "G3": "=LP_SIGMA(B2,A2,C2)"}
    )
    first = recalculated(listed(tmp_path / "list.xlsx", places), tmp_path / "one.xlsx")
    second = recalculated(first.path, tmp_path / "two.xlsx")
    assert second.report.changed == second.report.unfed == []
    assert second.report.parts == []
    assert second.path.read_bytes() == first.path.read_bytes()
    assert second.report.exit_code == 1  # one call still fails


def test_failed_calls_come_with_cell_and_reason(tmp_path: Path) -> None:
    cells = INPUTS | {
        "E1": formula("LP_SIGMA(B1,A1,C1)"), "F1": formula("LP_MARGIN(E1,2)"),
        "G1": formula("IFERROR(LP_SIGMA(B1,A1,C1),0)"),
        "H1": formula("LP_MARGIN(LP_SIGMA(B1,A1,C1),LP_SIGMA(A1,,C1))"), "I1": formula(SIGMA),
    }  # fmt: skip
    report = both(bare(tmp_path / "list.xlsx", cells)).report
    assert report.failed[0] == Failure("Intake", "E1", "LP_SIGMA", "#NUM!", SWAPPED)
    assert [(f.cell, f.function) for f in report.failed] == [
        ("E1", "LP_SIGMA"), ("F1", "LP_MARGIN"), ("G1", "LP_SIGMA"), ("H1", "LP_SIGMA"), ("H1", "LP_SIGMA"), ("H1",
         "LP_MARGIN"),
    ] or {(f.cell, f.function) for f in report.failed} == {
        ("E1", "LP_SIGMA"), ("F1", "LP_MARGIN"), ("G1", "LP_SIGMA"), ("H1", "LP_SIGMA"), ("H1", "LP_MARGIN"),
    }  # fmt: skip
    assert next(f.reason for f in report.failed if f.cell == "F1") == "LP_MARGIN: sigma is #NUM!, passed on unchanged."
    assert report.exit_code == 1


@pytest.mark.parametrize(
    "text, value",
    [
        ("IF(A1>0,7,{bad})", 7.0), ("IF(A1<0,{bad},7)", 7.0), ("IFERROR(7,{bad})", 7.0), ("IFNA(7,{bad})", 7.0),
        ("_xlfn.IFS(A1>0,7,TRUE,{bad})", 7.0), ("CHOOSE(1,7,{bad})", 7.0), ("_xlfn.SWITCH(A1,10,7,{bad})", 7.0),
        ("_xlfn.SWITCH(A1,1,{bad},7)", 7.0), ("IF(A1>0,IF(B1>100,{bad},7),{bad})", 7.0), ("IF(ROW()=1,7,{bad})", 7.0),
        ("_xlfn.LET(_xlpm.x,A1,IF(_xlpm.x>0,7,{bad}))", 7.0), ("IF(INDIRECT(\"A1\")>0,7,{bad})", 7.0),
        ("IF(LP_SIGMA(A1,B1,C1)>0,7,{bad})", 7.0), ("SUM(IF(A1:B1>100,{bad},3.5))", 7.0),
        ("IF(A1>0,LP_MARGIN(4,0.5),LP_MARGIN({bad},2))", 7.0), ("IF(FALSE,{bad},7)+IF(TRUE,0,{bad})", 7.0),
    ],
)  # fmt: skip
def test_a_call_in_a_branch_that_is_not_taken_is_no_failure(tmp_path: Path, text: str, value: float) -> None:
    array = text.startswith("SUM(IF(")
    bad = "LP_SIGMA(B1,A1,C1)"
    inside = formula(text.format(bad=bad))
    taken = formula(text.format(bad=bad).replace("A1>0", "A1<0").replace("A1<0,LP", "A1>0,LP"))
    cells = INPUTS | {"E1": inside.replace("<f>", '<f t="array" ref="E1">') if array else inside}
    done = both(bare(tmp_path / "list.xlsx", cells))
    assert done["Intake!E1"] == value
    assert done.report.failed == []
    assert done.report.exit_code == 0
    if text.startswith("IF(A1>0,7"):
        other = both(bare(tmp_path / "other.xlsx", INPUTS | {"E1": taken}))
        assert other.failed == {"Intake!E1": SWAPPED}
        assert other["Intake!E1"] is CellError.NUM


def test_the_report_as_data_is_plain_json(tmp_path: Path) -> None:
    cells = INPUTS | {
        "E1": formula("LP_SIGMA(B1,A1,C1)", "1"),
        "E2": formula("LP_MARGIN(E1,2)", "1"),
        "F1": formula("NOSUCH(1)", "2"),
        "G1": formula("A1*2", "3"),
        "H1": formula("A1&B1=C1", "4"),
    }
    report = both(bare(tmp_path / "list.xlsx", cells)).report
    plain = json.loads(json.dumps(report.to_json()))
    assert plain["counts"] == {
        "recomputed": 4, "lp_calls": 2, "changed": 2, "changed_unfed": 2, "untouched": 0, "failed": 2,
        "failed_passed_on": 1, "not_refreshed": 1,
    }  # fmt: skip
    assert plain["changed"] == [
        {"sheet": "Intake", "cell": cell, "old": 1.0, "new": "#NUM!"} for cell in ("E1", "E2")
    ]  # fmt: skip
    passed_on = "LP_MARGIN: sigma is #NUM!, passed on unchanged."
    assert plain["failed"] == [
        {"sheet": "Intake", "cell": "E1", "function": "LP_SIGMA", "error": "#NUM!", "reason": SWAPPED,
         "passed_on": False},
        {"sheet": "Intake", "cell": "E2", "function": "LP_MARGIN", "error": "#NUM!", "reason": passed_on,
         "passed_on": True},
    ]  # fmt: skip
    assert plain["not_refreshed"][0]["cell"] == "F1"
    assert {d["id"] for d in plain["engine_differences"]} == {"number-text-15-digits", "unknown-function"}
    assert {d["treatment"] for d in plain["engine_differences"]} == {"cured", "blocks"}
    assert plain["exit_code"] == 1
    assert plain["seconds"] >= plain["evaluation_seconds"] > 0


def test_the_report_in_words(tmp_path: Path) -> None:
    report = Report("list.xlsx", "list-recalc.xlsx", recomputed=3, calls=1, untouched=1, seconds=0.12)
    report.changed = [
        Change("List", "F2", None, 1.5), Change("List", "E2", 2.0, 2.5), Change("List", "E3", "clear", "damage"),
        Change("List", "E4", 0.1 + 0.2, 0.3), Change("List", "E5", 1.0, 1.001),
    ]  # fmt: skip
    report.unfed = [Change("List", "G2", "old", CellError.NA)]
    report.failed = [Failure("List", f"F{row}", "LP_SIGMA", "#NUM!", SWAPPED) for row in range(2, 5)]
    report.kept = [Kept("List", "H2", "it uses NOSUCH")]
    report.warnings = ["mind the gap"]
    assert report.text(limit=2) == "\n".join((
        "list.xlsx: 3 formula cells worked out, 1 LP_ call in them; 6 changed (1 of them only behind the 14th digit), "
        "1 were right already (0.1 s).",
        '  List!E3  "clear" -> "damage"',
        "  List!E2  2.0 -> 2.5",
        "  ... and 1 more (--json lists all)",
        "3 LP_ calls gave an error:",
        f"  List!F2, F3, F4 #NUM!  {SWAPPED}",
        "1 cell could not be refreshed and kept the old value:",
        "  List!H2  it uses NOSUCH",
        "1 cell changed although no LP_ call feeds it (look at this):",
        '  List!G2  "old" -> #N/A',
        "Note: mind the gap",
        "Written: list-recalc.xlsx",
    ))  # fmt: skip


def test_a_book_that_asks_for_full_calculation_or_iteration_is_warned_of(tmp_path: Path) -> None:
    calm = recalculated(book(tmp_path, "calm.xlsx"))
    assert not any("fullCalcOnLoad" in w or "iteration" in w for w in calm.report.warnings)
    frame = parts(frame='<calcPr calcId="191029" fullCalcOnLoad="1" iterate="1"/>')["xl/workbook.xml"]
    done = recalculated(book(tmp_path, "full.xlsx", **{"xl/workbook.xml": frame}))
    assert any("fullCalcOnLoad" in w and "--values" in w for w in done.report.warnings)
    assert any("iteration over circular references" in w for w in done.report.warnings)
    assert done.part("xl/workbook.xml") == frame


def test_a_signature_does_not_survive_and_a_book_without_change_keeps_it(tmp_path: Path) -> None:
    signature = {"_xmlsignatures/origin.sigs": b"", "_xmlsignatures/sig1.xml": b"<Signature/>"}
    done = recalculated(book(tmp_path, "signed.xlsx", **signature, **{"xl/worksheets/sheet1.xml": _sheet("4")}))
    assert done.report.broken_signature
    assert done.report.exit_code == 1
    assert any("signature" in warning for warning in done.report.warnings)
    right = recalculated(book(tmp_path, "right.xlsx", **signature))
    assert not right.report.broken_signature
    assert right.path.read_bytes() == (tmp_path / "right.xlsx").read_bytes()


def _sheet(value: str) -> bytes:
    return parts()["xl/worksheets/sheet1.xml"].replace(b"<v>5</v>", f"<v>{value}</v>".encode())
