"""``lowpoint starter``: where the book goes, what is refused, and that the book works at once."""

from __future__ import annotations

import json
from pathlib import Path

import openpyxl
import pytest

from lowpoint.faces import cli

Streams = pytest.CaptureFixture[str]


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def test_default_name_and_values_at_once(capsys: Streams) -> None:
    assert cli.main(["starter", "sheet"]) == 0
    assert "Written: valves.xlsx, 65 items with 195 cases" in capsys.readouterr().out
    book = openpyxl.load_workbook("valves.xlsx", data_only=True)
    assert book["Summary"]["B7"].value == 195
    assert book["List"]["C6"].value == "clear (tested)"
    assert [path.name for path in Path().iterdir()] == ["valves.xlsx"]


def test_us_units_into_a_folder_as_json(capsys: Streams) -> None:
    Path("lists").mkdir()
    assert cli.main(["starter", "sheet", "--us", "-o", "lists", "--json"]) == 0
    out = str(Path("lists", "valves-us.xlsx"))
    assert json.loads(capsys.readouterr().out) == {"out": out, "items": 12, "cases": 36}
    formulas = [
        cell.value for row in openpyxl.load_workbook(out)["List"].iter_rows(min_row=6, max_row=6) for cell in row
    ]
    assert any("LPU_COEFFICIENT(" in str(formula) for formula in formulas)
    assert not any("LP_COEFFICIENT(" in str(formula) for formula in formulas)


def test_an_existing_file_stays_unless_asked(capsys: Streams) -> None:
    Path("mine.xlsx").write_bytes(b"a year of work")
    assert cli.main(["starter", "sheet", "-o", "mine.xlsx"]) == 2
    said = capsys.readouterr().err
    assert said == (
        "lowpoint: mine.xlsx: is there already and was left as it is. Choose another name with -o, or ask for "
        "--overwrite.\n"
    )
    assert Path("mine.xlsx").read_bytes() == b"a year of work"
    assert cli.main(["starter", "sheet", "--us", "-o", "mine.xlsx", "--overwrite"]) == 0
    assert openpyxl.load_workbook("mine.xlsx").sheetnames[0] == "Read me"


def test_a_book_that_is_open_is_not_replaced(capsys: Streams) -> None:
    Path("mine.xlsx").write_bytes(b"a year of work")
    Path("~$mine.xlsx").write_bytes(b"\x05Petra" + b"\x00" * 159)
    assert cli.main(["starter", "sheet", "-o", "mine.xlsx", "--overwrite"]) == 2
    assert "mine.xlsx: is open: Petra has it" in capsys.readouterr().err
    assert Path("mine.xlsx").read_bytes() == b"a year of work"


def test_an_unknown_kind_gets_the_list_of_kinds(capsys: Streams) -> None:
    assert cli.main(["starter", "shet"]) == 2
    said = capsys.readouterr().err
    assert "'sheet', 'list', 'datasheet'" in said


@pytest.mark.parametrize(
    ("out", "words"),
    [
        ("valves.csv", "valves.csv: the book must be named .xlsx, got .csv."),
        ("valves", "valves: the book must be named .xlsx, got no ending."),
        ("nowhere/valves.xlsx", "nowhere: must be a folder, got none of that name. Make it first."),
    ],
)
def test_places_where_no_book_can_go(out: str, words: str, capsys: Streams) -> None:
    assert cli.main(["starter", "sheet", "-o", out]) == 2
    assert words in capsys.readouterr().err
    assert not list(Path().iterdir())


def test_recalc_finds_every_value_right_already(capsys: Streams) -> None:
    assert cli.main(["starter", "sheet", "--us"]) == 0
    capsys.readouterr()
    assert cli.main(["recalc", "valves-us.xlsx", "--json"]) == 1
    report = json.loads(capsys.readouterr().out)
    assert report["counts"]["changed"] == report["counts"]["changed_unfed"] == 0
    assert report["counts"]["not_refreshed"] == 0
    assert report["counts"]["recomputed"] > 1000
    assert report["warnings"] == []
    assert Path("valves-us-recalc.xlsx").read_bytes() == Path("valves-us.xlsx").read_bytes()
    reasons = " ".join(failure["reason"] for failure in report["failed"])
    for words in ("got a blank cell", "p2 must be below p1", "relative density", "the fittings alone take"):
        assert words in reasons
