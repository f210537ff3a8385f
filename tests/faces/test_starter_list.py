"""``lowpoint starter list``: a blank form that a survey reads back, with choices, help and an example."""

from __future__ import annotations

import json
from pathlib import Path

import openpyxl
import pytest

from lowpoint.faces import cli
from lowpoint.survey import survey_list
from lowpoint.survey.fields import FIELDS

Streams = pytest.CaptureFixture[str]


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


@pytest.mark.parametrize("us", [False, True])
def test_every_heading_of_the_form_is_understood(us: bool, capsys: Streams) -> None:
    name = "list-us.xlsx" if us else "list.xlsx"
    assert cli.main(["starter", "list", *(["--us"] if us else [])]) == 0
    assert f"Written: {name}. Fill its sheet List" in capsys.readouterr().out
    survey = survey_list(name)
    listed = [column for column in survey.reading.columns if column.sheet == "List"]
    assert [column.field for column in listed] == [field.key for field in FIELDS]
    assert {column.status for column in survey.reading.columns} == {"used"}
    assert [p.sentence() for p in survey.reading.problems] == [
        "List: the list has headings and no rows below them. Fill in a row for each case."
    ]


@pytest.mark.parametrize("us", [False, True])
def test_the_example_is_a_good_list(us: bool) -> None:
    """The sheet Example, taken for the list: no fault, a verdict for every case, valves and plates."""
    cli.main(["starter", "list", "-o", "form.xlsx", *(["--us"] if us else [])])
    book = openpyxl.load_workbook("form.xlsx")
    del book["List"]
    book["Example"].title = "List"
    book.save("filled.xlsx")
    survey = survey_list("filled.xlsx")
    assert survey.reading.problems == ()
    assert survey.cases.count >= 10
    assert None not in survey.findings.regime.tolist()
    assert {"valve", "orifice"} <= set(survey.cases.kind.tolist())
    if not us:
        assert "place" in survey.cases.source["p2"].tolist()
        assert "plates" in survey.cases.kind.tolist()
        assert "estimated" in survey.findings.basis.tolist()


def test_help_and_choices() -> None:
    cli.main(["starter", "list"])
    book = openpyxl.load_workbook("list.xlsx")
    assert book.sheetnames == ["List", "Example", "Tables", "Help", "Words"]
    sheet = book["List"]
    headings = {cell.value: cell for cell in sheet[5]}
    assert all(cell.comment is not None for cell in headings.values())
    choices = {str(v.sqref).split(":")[0]: v.formula1 for v in sheet.data_validations.dataValidation}
    kept = headings["Limit to keep"]
    assert choices[f"{kept.column_letter}6"] == '"incipient,constant,damage,vibration,choked"'
    assert "One of: incipient, constant" in kept.comment.text
    assert choices[f"{headings['Liquid'].column_letter}6"].startswith("Words!$A$2")
    assert book["Words"]["A2"].value == "water"
    told = {str(row[0].value): row[2].value for row in book["Help"].iter_rows(min_col=1, max_col=3)}
    assert all(field.help == told[next(h for h in told if h.split(" [")[0] == field.heading)] for field in FIELDS)


def test_the_same_bytes_on_every_run() -> None:
    assert cli.main(["starter", "list", "-o", "a.xlsx"]) == cli.main(["starter", "list", "-o", "b.xlsx"]) == 0
    assert Path("a.xlsx").read_bytes() == Path("b.xlsx").read_bytes()


def test_an_existing_list_stays_unless_asked(capsys: Streams) -> None:
    Path("list.xlsx").write_bytes(b"a year of work")
    assert cli.main(["starter", "list"]) == 2
    assert "list.xlsx: is there already and was left as it is." in capsys.readouterr().err
    assert Path("list.xlsx").read_bytes() == b"a year of work"
    assert cli.main(["starter", "list", "--overwrite", "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == {"out": "list.xlsx", "items": 0, "cases": 0}
    Path("~$list.xlsx").write_bytes(b"\x05Petra" + b"\x00" * 159)
    assert cli.main(["starter", "list", "--overwrite"]) == 2
    assert "list.xlsx: is open: Petra has it" in capsys.readouterr().err
