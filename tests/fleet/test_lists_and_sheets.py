"""``survey`` and ``audit`` over many: the same as one by one, outputs, trail, ``--since-last``, ``--watch``."""

from __future__ import annotations

import json
import signal
import sys
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from audit.outputs import small, small_csv
from fleet.helping import Command, leftovers, wait_for
from lowpoint.faces import cli
from lowpoint.fleet.finding import Found, Looking, find, marked_in
from survey_lists import GOOD, HEADINGS, write_csv, write_xlsx

Streams = pytest.CaptureFixture[str]
STOP = signal.SIGTERM if sys.platform != "win32" else signal.CTRL_BREAK_EVENT  # type: ignore[attr-defined]
QUICK = ("--draws", "0", "--no-remedies")
CHOKED = ("21-FCV-111", *GOOD[1:6], 0.3, *GOOD[7:])
"""p2 0.3 bar: x_F = (5.8 - 0.3)/(5.8 - 0.96 0.0234) = 0.95 > FL2 = 0.81, choked by the definition of FL."""


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


@pytest.fixture
def lists() -> Path:
    """A good list, one with an item that fails, and a file that is none; one more in a sub-folder."""
    folder = Path("lists")
    (folder / "unit").mkdir(parents=True)
    write_xlsx(folder / "a.xlsx", HEADINGS, [GOOD])
    write_csv(folder / "b.csv", HEADINGS, [GOOD, CHOKED])
    (folder / "c.ods").write_bytes(b"no list at all")
    write_csv(folder / "unit" / "d.csv", HEADINGS, [GOOD])
    return folder


@pytest.fixture
def offers() -> Path:
    """A right sheet, a wrong one, and a file that is none; one more in a sub-folder."""
    folder = Path("offers")
    (folder / "unit").mkdir(parents=True)
    small(folder, "a.xlsx")
    small_csv(folder, "b.csv", sigma="3.25")  # by hand 2.75
    (folder / "c.xlsx").write_bytes(b"no sheet at all")
    small(folder / "unit", "d.xlsx")
    return folder


def names(folder: str) -> list[str]:
    return sorted(path.relative_to(folder).as_posix() for path in Path(folder).rglob("*.*") if path.name[0] != ".")


def trail() -> list[dict[str, Any]]:
    lines = Path("trail.jsonl").read_text(encoding="utf-8").splitlines()
    return sorted((json.loads(line) for line in lines), key=lambda line: str(line["book"]))


def test_surveys_of_a_folder_by_two_processes(lists: Path, capsys: Streams) -> None:
    before = {path: path.read_bytes() for path in lists.rglob("*.*")}
    words = ["survey", "lists", "-o", "done", "--html", "pages", "--recursive", "--jobs", "2", "--trail", "trail.jsonl"]
    assert cli.main([*words, *QUICK]) == 1
    assert names("done") == ["a-survey.xlsx", "b-survey.xlsx", "unit/d-survey.xlsx"]
    assert names("pages") == ["a-survey.html", "b-survey.html", "unit/d-survey.html"]
    out = capsys.readouterr().out
    assert "4 lists: 2 without findings, 3 written, 1 failed." in out
    assert f"{lists / 'b.csv'}:\n2 items, 2 cases" in out
    assert "c.ods: " in out
    lines = trail()
    assert [(line["command"], line["result"], line["exit_code"]) for line in lines] == [
        ("survey", "done", 0), ("survey", "findings", 1), ("survey", "failed", 2), ("survey", "done", 0)]  # fmt: skip
    assert lines[1]["counts"] == {"choked": 1, "clear": 1, "cases": 2, "items": 2}
    assert {path: path.read_bytes() for path in lists.rglob("*.*")} == before
    assert leftovers(Path()) == []
    # One by one it is the same workbook.
    assert cli.main(["survey", "lists/b.csv", "-o", "alone.xlsx", *QUICK]) == 1
    alone, many = (openpyxl.load_workbook(name) for name in ("alone.xlsx", "done/b-survey.xlsx"))
    assert alone.sheetnames == many.sheetnames
    for title in alone.sheetnames:
        assert list(alone[title].values) == list(many[title].values)


def test_json_of_several_lists_is_a_list(lists: Path, capsys: Streams) -> None:
    assert cli.main(["survey", "lists", "--json", "--us", *QUICK]) == 1
    first, second, bad = json.loads(capsys.readouterr().out)
    assert [case["regime"] for case in second["cases"]] == ["clear", "choked"]
    assert (first["list"], first["units"]["pressure"], first["exit_code"]) == ("a.xlsx", "psi", 0)
    assert "c.ods" in bad["error"]
    assert names("lists") == ["a.xlsx", "b.csv", "c.ods", "unit/d.csv"]


@pytest.mark.parametrize("command", ["survey", "audit"])
def test_since_last(lists: Path, offers: Path, command: str, capsys: Streams) -> None:
    folder, quick = (lists, QUICK) if command == "survey" else (offers, ())
    words = [command, str(folder), "-o", "done", "--since-last", *quick]
    assert cli.main(words) == 1
    assert cli.main(words) == 1  # nothing would be written over: --overwrite is not needed
    assert "1 failed, 2 unchanged and skipped." in capsys.readouterr().out
    source = folder / "b.csv"
    source.write_bytes(source.read_bytes() + b"\n")
    assert cli.main(words) == 2
    assert "b-" in (told := capsys.readouterr().err)
    assert "is there already and was left as it is. Name another folder, or ask for --overwrite." in told
    assert cli.main([*words, "--overwrite"]) == 1
    assert "1 written, 1 failed, 1 unchanged and skipped." in capsys.readouterr().out
    option = ["--pages", "3"] if command == "survey" else ["--elevation", "10"]
    assert cli.main([*words, "--overwrite", *option]) == 1
    assert "2 written, 1 failed." in capsys.readouterr().out


def test_a_single_list_and_sheet_with_a_trail(lists: Path, offers: Path, capsys: Streams) -> None:
    for words in (["survey", "lists/b.csv", *QUICK], ["audit", "offers/b.csv"]):
        more = ["-o", f"{words[0]}.xlsx", "--trail", "trail.jsonl", "--since-last"]
        assert cli.main([*words, *more]) == 1
        assert cli.main([*words, *more]) == 1
        assert Path(f"{words[0]}.xlsx").is_file()
    assert [(line["command"], line["result"]) for line in trail()] == [
        ("survey", "findings"), ("survey", "unchanged"), ("audit", "findings"), ("audit", "unchanged")]  # fmt: skip
    assert capsys.readouterr().out.count("unchanged since") == 2


def test_audits_of_a_folder_by_two_processes(offers: Path, capsys: Streams) -> None:
    words = ["audit", "offers", "-o", "done", "--recursive", "--jobs", "2", "--trail", "trail.jsonl", "--all"]
    assert cli.main(words) == 1
    assert names("done") == ["a-audit.xlsx", "b-audit.xlsx", "unit/d-audit.xlsx"]
    out = capsys.readouterr().out
    assert "4 data sheets: 2 without findings, 3 written, 1 failed." in out
    assert "3.25 stated, 2.75 computed, +18.2 %" in out
    assert "Agrees\n------" in out
    lines = trail()
    assert [line["result"] for line in lines] == ["done", "findings", "failed", "done"]
    assert lines[1]["counts"] == {"sheets": 1, "agrees": 1, "differs": 1}
    assert "3.25 stated, 2.75 computed" in lines[1]["errors"][0]


def test_json_of_several_sheets_keeps_its_form(offers: Path, capsys: Streams) -> None:
    assert cli.main(["audit", "offers", "--json", "--since-last"]) == 1
    found = json.loads(capsys.readouterr().out)
    assert [list(entry) for entry in found] == [["file", "sheet", "claims", "error"]] * 3
    assert [entry["error"] is None for entry in found] == [True, True, False]
    assert cli.main(["audit", "offers", "--json", "--since-last"]) == 1
    again = json.loads(capsys.readouterr().out)
    assert [("unchanged_since" in entry, entry["claims"]) for entry in again[:2]] == [(True, [])] * 2


def test_a_layout_goes_with_its_content(offers: Path, capsys: Streams) -> None:
    assert cli.main(["audit", "offers/a.xlsx", "--write-layout", "v.toml"]) == 0
    text = Path("v.toml").read_text(encoding="utf-8")
    assert (
        cli.main(["audit", "offers/a.xlsx", "offers/unit/d.xlsx", "--layout", "v.toml", "--trail", "trail.jsonl"]) == 0
    )
    assert [line["options"]["layout"] for line in trail()] == [text, text]
    assert capsys.readouterr().out.count("2 claims: 2 agree.") == 3
    Path("v.toml").write_text("search = 3")
    assert cli.main(["audit", "offers", "--layout", "v.toml"]) == 2
    assert "v.toml: search must be true or false" in capsys.readouterr().err


def test_namesakes_keep_apart_and_our_own_outputs_are_no_sources(offers: Path) -> None:
    small(offers, "b.xlsx")
    assert cli.main(["audit", "offers", "-o", "offers"]) == 1
    outputs = ["a-audit.xlsx", "b-csv-audit.xlsx", "b-xlsx-audit.xlsx"]
    assert [name for name in names("offers") if "-audit" in name] == outputs
    looking = Looking((".xlsx", ".csv"), "-audit")
    assert [one.path.name for one in find([offers], looking)] == ["a.xlsx", "b.csv", "b.xlsx", "c.xlsx"]
    assert marked_in(Path("x"), Found(offers / "a.xlsx", Path("a.xlsx")), looking, ".xlsx") == Path("x/a-audit.xlsx")


@pytest.mark.parametrize(
    ("command", "words", "told"),
    [
        ("survey", ["lists", "-o", "out.xlsx"], "out.xlsx: must be a folder, for several lists"),
        ("survey", ["lists", "--html", "out.html"], "Name a folder with --html."),
        ("survey", ["lists", "--show"], "--show: must be asked for with one list"),
        ("survey", ["lists", "--tolerance", "p1=much"], "tolerance of p1: must be a number"),
        ("survey", ["lists", "--draws", "-1"], "--draws: must be 0 or more"),
        ("survey", [], "survey: must be given a list, got none."),
        ("survey", ["lists", "--watch", "lists"], "--watch: must stand without other files"),
        ("survey", ["--watch", "lists", "-o", "out"], "--watch: must stand with --overwrite"),
        ("survey", ["lists", "--jobs", "0"], "--jobs: must be at least 1"),
        ("survey", ["none-*.csv"], "none-*.csv: must match files"),
        ("audit", ["offers", "-o", "out.xlsx"], "out.xlsx: must be a folder, for several sheets"),
        ("audit", ["offers", "--write-layout", "v.toml"], "--write-layout: must be asked for with one sheet"),
        ("audit", ["--watch", "offers", "--show"], "--show: must stand without --watch"),
        ("audit", [], "audit: must be given a data sheet, got none."),
    ],
)  # fmt: skip
def test_words_that_contradict(
    lists: Path, offers: Path, command: str, words: list[str], told: str, capsys: Streams
) -> None:
    assert cli.main([command, *words]) == 2
    assert told in capsys.readouterr().err
    assert not list(Path().glob("out*"))


def test_lists_and_sheets_are_done_as_they_land(command: Command, lists: Path, offers: Path, tmp_path: Path) -> None:
    running = []
    for word, folder in (("survey", lists), ("audit", offers)):
        (folder / "c.ods").unlink(missing_ok=True)
        (folder / "c.xlsx").unlink(missing_ok=True)
        more = QUICK if word == "survey" else ()
        running.append(command(word, "--watch", folder, "-o", f"{word}ed", "--overwrite", "--json", *more))
    for one, name in zip(running, ("surveyed/a-survey.xlsx", "audited/a-audit.xlsx"), strict=True):
        wait_for(lambda one=one, name=name: Path(name).exists() or one.process.poll() is not None, name)
    write_xlsx(lists / "late.xlsx", HEADINGS, [GOOD])
    small(offers, "late.xlsx", sigma=3.25)
    for name in ("surveyed/late-survey.xlsx", "audited/late-audit.xlsx"):
        wait_for(Path(name).exists, name)
    wait_for(lambda: all('late.xlsx"' in one.out for one in running), "what is told")
    for one in running:
        one.process.send_signal(STOP)
    assert [one.end() in (0, 1) for one in running] == [True, True], [one.err for one in running]
    said = [[json.loads(line) for line in one.out.splitlines()] for one in running]
    assert {"a.xlsx", "late.xlsx"} <= {entry["list"] for entry in said[0]}
    assert {Path(entry["file"]).name for entry in said[1]} >= {"a.xlsx", "late.xlsx"}
    assert leftovers(tmp_path) == []
