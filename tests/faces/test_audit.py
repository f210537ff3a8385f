"""``lowpoint audit``: exit codes, what is printed, what is written, and every bad input with its remedy."""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from audit.outputs import planted, small, small_csv
from lowpoint.faces import cli

Streams = pytest.CaptureFixture[str]


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def audit(*words: str) -> int:
    return cli.main(["audit", *words])


# --- one sheet --------------------------------------------------------------------------------------------------


def test_a_right_sheet(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path)
    assert audit("sheet.xlsx") == 0
    out = capsys.readouterr().out
    assert "sheet.xlsx, sheet 'Data'" in out
    assert "2 claims: 2 agree." in out
    assert "Differs" not in out


def test_a_wrong_sheet(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path, sigma=3.25)
    assert audit("sheet.xlsx") == 1
    out = capsys.readouterr().out
    # By hand: (6.0 - 0.5)/(6.0 - 4.0) = 2.75; 3.25/2.75 = 1.182.
    assert "  sigma (Data!B8)" in out
    assert "3.25 stated, 2.75 computed, +18.2 %" in out
    assert "tolerance" in out
    assert max(map(len, out.splitlines())) <= 100


def test_all_lists_what_agrees(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path)
    assert audit("sheet.xlsx", "--all") == 0
    assert "Agrees\n------" in capsys.readouterr().out


def test_suspects_are_hypotheses(tmp_path: Path, capsys: Streams) -> None:
    path = planted(tmp_path, "ledger", "gauge_as_absolute_p1")
    assert audit(path.name) == 1
    out = capsys.readouterr().out
    assert "would follow if p1 was read as gauge and used as absolute" in out


def test_show_stops_before_judging(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path, sigma=3.25)
    assert audit("sheet.xlsx", "--show") == 0
    out = capsys.readouterr().out
    assert "Data!B8" in out
    assert "confidence" in out
    assert "differs" not in out


def test_json_of_one_sheet_is_its_list(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path, sigma=3.25)
    assert audit("sheet.xlsx", "--json") == 1
    claims = json.loads(capsys.readouterr().out)
    assert [claim["quantity"] for claim in claims] == ["dp", "sigma"]
    assert claims[1]["verdict"] == "differs"


def test_show_as_json(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path)
    assert audit("sheet.xlsx", "--show", "--json") == 0
    assert json.loads(capsys.readouterr().out)["sheets"][0]["tag"] == "21-FCV-110"


@pytest.mark.parametrize("words", [["--atmosphere", "0.9"], ["--elevation", "1000"]])
def test_the_site_matters_for_gauge_pressures(tmp_path: Path, words: list[str], capsys: Streams) -> None:
    """ISO 2533: 0.8988 bar at 1000 m. The index of 6 bar g falls with the atmosphere."""
    path = small_csv(tmp_path)
    path.write_text(path.read_text().replace("6.0;bar a", "6.0;bar g").replace("4.0;bar a", "4.0;bar g"))
    computed = []
    for more in ([], words):
        audit(path.name, "--json", *more)
        claims = json.loads(capsys.readouterr().out)
        computed.append(next(claim["computed"] for claim in claims if claim["quantity"] == "sigma"))
    # By hand: (6 + 1.01325 - 0.5)/2 = 3.2566; (6 + 0.9 - 0.5)/2 = 3.2; (6 + 0.8988 - 0.5)/2 = 3.1994.
    assert computed[0] == pytest.approx(3.2566, abs=1e-4)
    assert computed[1] == pytest.approx(3.2 if words[0] == "--atmosphere" else 3.1994, abs=1e-4)


# --- what is written --------------------------------------------------------------------------------------------


def test_the_workbook(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path, sigma=3.25)
    assert audit("sheet.xlsx", "-o", "out.xlsx") == 1
    assert "Written: out.xlsx" in capsys.readouterr().out
    book = openpyxl.load_workbook("out.xlsx")
    assert book.sheetnames == ["Data", "Findings", "Questions", "Working", "Read"]
    assert audit("sheet.xlsx", "-o", "out.xlsx") == 2
    assert "is there already" in capsys.readouterr().err
    assert audit("sheet.xlsx", "-o", "out.xlsx", "--overwrite") == 1


def test_the_layout_of_a_vendor(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path, sigma=3.25)
    assert audit("sheet.xlsx", "--write-layout", "v.toml") == 1
    small(tmp_path, "next.xlsx")
    capsys.readouterr()
    assert audit("next.xlsx", "--layout", "v.toml") == 0
    assert "2 claims: 2 agree." in capsys.readouterr().out


# --- several ----------------------------------------------------------------------------------------------------


def test_one_bad_file_never_stops_the_others(tmp_path: Path, capsys: Streams) -> None:
    folder = tmp_path / "offers"
    folder.mkdir()
    small(folder, "a.xlsx", sigma=3.25)
    (folder / "b.xlsx").write_bytes(b"no workbook at all")
    small_csv(folder, "c.csv")
    assert audit("offers", "-o", "done") == 1
    streams = capsys.readouterr()
    assert "3 data sheets: 1 without findings, 2 written, 1 failed." in streams.out
    assert "b.xlsx: must be an .xlsx" in streams.out
    assert sorted(path.name for path in (tmp_path / "done").iterdir()) == ["a-audit.xlsx", "c-audit.xlsx"]


def test_json_of_several(tmp_path: Path, capsys: Streams) -> None:
    small(tmp_path, "a.xlsx", sigma=3.25)
    (tmp_path / "b.xlsx").write_bytes(b"no workbook at all")
    assert audit("a.xlsx", "b.xlsx", "--json") == 1
    streams = capsys.readouterr()
    found = json.loads(streams.out)
    assert [list(entry) for entry in found] == [["file", "sheet", "claims", "error"]] * 2
    assert [(entry["file"], entry["sheet"]) for entry in found] == [("a.xlsx", "Data"), ("b.xlsx", None)]
    assert found[0]["error"] is None
    assert "b.xlsx" in found[1]["error"]
    assert streams.err == ""


def test_a_book_with_two_data_sheets(tmp_path: Path, capsys: Streams) -> None:
    def more(book: Any) -> None:
        other = book.copy_worksheet(book["Data"])
        other.title = "Second"
        other["B8"] = 3.25

    small(tmp_path, more=more)
    assert audit("sheet.xlsx", "--json") == 1
    found = json.loads(capsys.readouterr().out)
    assert [entry["sheet"] for entry in found] == ["Data", "Second"]
    assert [[c["verdict"] for c in entry["claims"]] for entry in found] == [["agrees"] * 2, ["agrees", "differs"]]


def test_nothing_but_bad_files(tmp_path: Path, capsys: Streams) -> None:
    for name in ("a.xlsx", "b.xlsx"):
        (tmp_path / name).write_bytes(b"no workbook at all")
    assert audit("a.xlsx") == 2
    assert audit("a.xlsx", "b.xlsx") == 2  # nothing at all could be read
    small_csv(tmp_path)
    assert audit("a.xlsx", "b.xlsx", "sheet.csv") == 1  # failed items of a batch


# --- bad input --------------------------------------------------------------------------------------------------


def test_a_sheet_without_inputs(tmp_path: Path, capsys: Streams) -> None:
    book = openpyxl.Workbook()
    book.active.append(["Minutes of a meeting", "see below"])
    book.save("sheet.xlsx")
    assert audit("sheet.xlsx") == 2
    out = capsys.readouterr().out
    assert "no data sheet was found" in out
    assert "--layout" in out


def test_claims_without_what_they_rest_on(tmp_path: Path, capsys: Streams) -> None:
    text = "Tag;21-FCV-110\nRequired Kv;120.5\nOpening %;63.0\nCavitation index;2.1\n"
    Path("sheet.csv").write_text(text)
    audit("sheet.csv")
    out = capsys.readouterr().out
    assert "Not checked" in out
    assert "missing" in out


def test_a_scanned_page(capsys: Streams) -> None:
    pytest.importorskip("pypdfium2")
    from reportlab.pdfgen.canvas import Canvas

    canvas = Canvas("scan.pdf")
    canvas.rect(50, 50, 300, 300, fill=1)
    canvas.save()
    assert audit("scan.pdf") == 2
    assert "scan.pdf" in capsys.readouterr().err


def test_an_unknown_unit_is_a_finding(tmp_path: Path, capsys: Streams) -> None:
    path = small_csv(tmp_path)
    path.write_text(path.read_text().replace("6.0;bar a", "6.0;furlong"))
    assert audit(path.name) == 1
    out = " ".join(capsys.readouterr().out.split())
    assert "- unit: row 3, column 2: " in out
    # p1 has no number now: a drop cannot be checked against itself, and is no claim.
    assert "1 claim: 1 agrees" in out


def test_without_the_optional_part_for_pdf(monkeypatch: pytest.MonkeyPatch, capsys: Streams) -> None:
    monkeypatch.setitem(sys.modules, "pypdfium2", None)
    Path("sheet.pdf").write_bytes(b"%PDF-1.4\n")
    assert audit("sheet.pdf") == 2
    assert "pip install 'lowpoint[pdf]'" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (["none.xlsx"], "none.xlsx"),
        (["sheet.docx"], "must be .xlsx, .xlsm, .csv or .pdf, got .docx"),
        (["sheet.xlsx", "-o", "out.pdf"], "must be named .xlsx, got .pdf"),
        (["sheet.xlsx", "-o", "sheet.xlsx"], "must not be the sheet itself"),
        (["sheet.xlsx", "--elevation", "20000"], "--elevation: must be -5000 to 11000 m, got 20000"),
        (["sheet.xlsx", "--atmosphere", "14.7"], "--atmosphere: must be 0.3 to 1.2 bar, got 14.7"),
        (["sheet.xlsx", "--atmosphere", "1", "--elevation", "10"], "must stand without --elevation"),
        (["sheet.xlsx", "--show", "-o", "out.xlsx"], "--show: must stand without -o"),
        (["sheet.xlsx", "--layout", "none.toml"], "none.toml: must be an existing file"),
        (["sheet.xlsx", "--write-layout", "v.txt"], "must be named .toml, got .txt"),
        (["sheet.xlsx", "sheet.csv", "--write-layout", "v.toml"], "must be asked for with one sheet"),
        (["sheet.xlsx", "sheet.csv", "-o", "out.xlsx"], "must be a folder, for several sheets"),
    ],
)  # fmt: skip
def test_misuse(tmp_path: Path, words: list[str], message: str, capsys: Streams) -> None:
    small(tmp_path)
    small_csv(tmp_path)
    Path("sheet.docx").write_bytes(b"")
    assert audit(*words) == 2
    assert message in capsys.readouterr().err


def test_texts_cannot_steer_the_terminal(tmp_path: Path, capsys: Streams) -> None:
    path = small_csv(tmp_path, extra="Service;\x1b[31mred;\nOdd label\x1b]0;17.3;\n")
    audit(path.name, "--show")
    audit(path.name, "--all")
    assert "\x1b" not in capsys.readouterr().out


def test_many_of_which_none_can_be_read(tmp_path: Path, capsys: Streams) -> None:
    """2 says that nothing was read; as soon as one of them is, what is wrong with the others is a finding."""
    folder = tmp_path / "offers"
    folder.mkdir()
    (folder / "junk.xlsx").write_bytes(b"\0\1\2 no book")
    (folder / "letter.csv").write_text("Dear sir;\nyours;\n", encoding="utf-8")
    assert audit("offers") == 2
    assert audit("offers", "--json") == 2
    assert audit("offers", "--show") == 2
    capsys.readouterr()
    small(folder)
    assert audit("offers") == 1
    assert "1 without findings" in capsys.readouterr().out
