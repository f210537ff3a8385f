"""``lowpoint starter datasheet``: a form whose example an audit reads without a doubt and finds right."""

from __future__ import annotations

import json
from pathlib import Path

import openpyxl
import pytest

from audit_arithmetic import Case, saturation
from lowpoint.audit.auditing import audit_document
from lowpoint.audit.reading import read_sheet
from lowpoint.audit.vocabulary import BY_KEY
from lowpoint.faces import cli
from lowpoint.starter.datasheet_lines import CASES, EXAMPLE, LINES
from vendor_slips import Item, printed

Streams = pytest.CaptureFixture[str]


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


@pytest.mark.parametrize("us", [False, True])
def test_the_example_is_read_whole_and_agrees(us: bool, capsys: Streams) -> None:
    name = "datasheet-us.xlsx" if us else "datasheet.xlsx"
    assert cli.main(["starter", "datasheet", *(["--us"] if us else [])]) == 0
    assert f"Written: {name}. Type over its sheet Data sheet; 'lowpoint audit {name}'" in capsys.readouterr().out
    document = read_sheet(name)
    (sheet,) = document.sheets
    assert (sheet.name, sheet.cases, sheet.findings, document.findings) == ("Data sheet", CASES, (), ())
    by_case = {line.key for line in LINES if line.by_case}
    expected = {(key, case) for key in EXAMPLE for case in (CASES if key in by_case else (None,))}
    assert {(value.quantity, value.case) for value in sheet.values} == expected
    assert min(value.confidence for value in sheet.values) >= 0.95
    audit = audit_document(document)
    assert audit.exit_code == 0
    (claims,) = audit.claims
    assert {claim.quantity for claim in claims if claim.verdict != "agrees"} == {
        "sigma_incipient", "sigma_constant", "sigma_damage"
    }  # fmt: skip
    assert sum(claim.verdict == "agrees" for claim in claims) == 37


def test_the_example_s_results_are_those_of_plain_arithmetic() -> None:
    """Bisection on the equations of IEC 60534-2-1 (``audit_arithmetic``), apart from the kernels."""
    e = {key: values for key, values in EXAMPLE.items() if not isinstance(values, str)}
    site = e["atmosphere"][0]
    cases = tuple(
        Case(e["flow"][k], e["p1"][k] + site, e["p2"][k] + site, e["pv"][k], e["pc"][0], e["density"][k], e["fl"][k],
             e["valve_size"][0], e["pipe_in"][0], e["pipe_out"][0], e["rated"][0], e["rangeability"][0], e["t"][k])
        for k in range(3)
    )  # fmt: skip
    lines = printed(Item(cases, atmosphere=site, gauge=True))
    assert lines is not None
    for k, line in enumerate(lines):
        assert e["pv"][k] == pytest.approx(saturation(cases[k].t), rel=2e-4)
        found = {"coefficient": line.claims.kv, "travel": line.claims.travel, "ff": line.ff, "fp": line.claims.fp,
                 "flp": line.flp, "dp_choked": line.claims.dp_choked, "sigma": line.claims.sigma, "dp": line.drop,
                 "velocity_in": line.claims.velocity, "velocity_out": line.velocity_out}  # fmt: skip
        for key, number in found.items():
            assert e[key][k] == pytest.approx(number, rel=2e-5), (key, k)


def test_the_blank_form_has_the_same_lines_and_no_values() -> None:
    assert cli.main(["starter", "datasheet", "-o", "form.xlsx", "--json"]) == 0
    book = openpyxl.load_workbook("form.xlsx")
    assert book.sheetnames == ["Data sheet", "Blank", "Help", "Words"]
    filled, blank = book["Data sheet"], book["Blank"]
    for row in range(3, filled.max_row + 1):
        assert [filled.cell(row, c).value for c in (1, 2, 3)] == [blank.cell(row, c).value for c in (1, 2, 3)]
        if filled.cell(row, 4).value not in ("Value", "minimum"):
            assert [blank.cell(row, c).value for c in (4, 5, 6)] == [None] * 3


def test_a_blank_form_filled_in_is_read() -> None:
    """Whoever fills in Blank and deletes the example is understood as well."""
    cli.main(["starter", "datasheet", "-o", "form.xlsx"])
    book = openpyxl.load_workbook("form.xlsx")
    filled, blank = book["Data sheet"], book["Blank"]
    for row in filled.iter_rows(min_row=4):
        for cell in row[3:]:
            blank[cell.coordinate] = cell.value
    del book["Data sheet"]
    book.save("mine.xlsx")
    (sheet,) = read_sheet("mine.xlsx").sheets
    assert len(sheet.values) == sum(1 if isinstance(values, str) else len(values) for values in EXAMPLE.values())
    assert audit_document(read_sheet("mine.xlsx")).exit_code == 0


def test_every_line_is_of_the_vocabulary_with_a_note() -> None:
    assert {line.key for line in LINES} <= set(BY_KEY)
    cli.main(["starter", "datasheet", "-o", "form.xlsx"])
    sheet = openpyxl.load_workbook("form.xlsx")["Data sheet"]
    noted = [cell.comment.text for cell in sheet["A"] if cell.comment]
    assert len(noted) == len(LINES)
    assert all(text.endswith((".", "above.")) for text in noted)


def test_json_and_equal_bytes(capsys: Streams) -> None:
    cli.main(["starter", "datasheet", "-o", "a.xlsx", "--json"])
    assert json.loads(capsys.readouterr().out) == {"out": "a.xlsx", "items": 1, "cases": 3}
    cli.main(["starter", "datasheet", "-o", "b.xlsx"])
    assert Path("a.xlsx").read_bytes() == Path("b.xlsx").read_bytes()
