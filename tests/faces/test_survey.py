"""``lowpoint survey``: how the list was read, verdicts on a terminal and for machines, exit codes."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from lowpoint.faces import cli
from survey_lists import GOOD, HEADINGS, write_csv

Streams = pytest.CaptureFixture[str]
GAUGE = tuple(name.replace("bar a", "bar g") for name in HEADINGS)


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def test_a_list_that_is_kept(capsys: Streams) -> None:
    write_csv(Path("list.csv"), HEADINGS, [GOOD])
    assert cli.main(["survey", "list.csv"]) == 0
    out = capsys.readouterr().out
    assert "1 item, 1 case; by their worst case: 1 clear" in out
    assert "21-FCV-110  clear (tested)" in out


def test_failing_and_unanswered_items_are_findings(capsys: Streams, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", "200")  # lines are wrapped to the width
    rows = [GOOD, ("21-FCV-111", *GOOD[1:6], 0.3, *GOOD[7:]), ("21-FCV-112", *GOOD[1:8], None, *GOOD[9:])]
    write_csv(Path("list.csv"), HEADINGS, rows)
    assert cli.main(["survey", "list.csv"]) == 1
    out = capsys.readouterr().out
    assert "1 fail:\n  21-FCV-111  choked (tested)" in out
    assert "1 have cases without an answer:\n  21-FCV-112" in out
    assert "21-FCV-112 normal: FL (liquid pressure recovery factor FL at the operating travel) must be given" in out


def test_gauge_needs_the_elevation(capsys: Streams) -> None:
    write_csv(Path("list.csv"), GAUGE, [GOOD])
    assert cli.main(["survey", "list.csv"]) == 1
    assert "list.csv!F1: p1 is a gauge pressure, and no atmosphere" in capsys.readouterr().out
    assert cli.main(["survey", "list.csv", "--elevation", "145"]) == 0
    assert cli.main(["survey", "list.csv", "--elevation", "145000"]) == 2
    assert "--elevation: must be -5000 to 11000 m, got 145000." in capsys.readouterr().err


def test_show_tells_how_the_list_is_read_and_stops(capsys: Streams) -> None:
    write_csv(Path("list.csv"), (*GAUGE[:4], "Colour", *GAUGE[4:]), [(*GOOD[:4], "blue", *GOOD[4:])])
    assert cli.main(["survey", "list.csv", "--show", "--elevation", "145"]) == 1
    out = capsys.readouterr().out
    assert "      G1  p1 [bar g]\n" in out
    assert "unknown and not used (1): E1 'Colour'" in out
    assert "optional and not there: Kind, Service" in out
    assert "clear" not in out
    assert cli.main(["survey", "list.csv", "--show", "--json"]) == 1
    reading = json.loads(capsys.readouterr().out)
    assert [c["status"] for c in reading["columns"] if c["heading"] == "Colour"] == ["unknown"]


def test_required_columns_are_named_first(capsys: Streams) -> None:
    write_csv(Path("list.csv"), ("Tag", "Flow [m3/h]", "p1 [bar a]"), [("A", 1, 2)])
    assert cli.main(["survey", "list.csv"]) == 1
    assert capsys.readouterr().out.startswith("required columns that are not there: p2, or Outlet into; pv, or Liquid")


def test_json_is_one_value_alone(capsys: Streams) -> None:
    write_csv(Path("list.csv"), HEADINGS, [GOOD])
    assert cli.main(["survey", "list.csv", "--json", "--us"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert (data["list"], data["exit_code"], data["units"]["pressure"]) == ("list.csv", 0, "psi")
    assert data["cases"][0]["tag"] == "21-FCV-110"
    assert data["items"][0]["worst"] == "normal"


def test_misuse(capsys: Streams) -> None:
    assert cli.main(["survey", "nowhere.xlsx"]) == 2
    assert "nowhere.xlsx: must be an existing file, got nothing there." in capsys.readouterr().err
    Path("list.doc").write_text("Tag", encoding="utf-8")
    assert cli.main(["survey", "list.doc"]) == 2
    assert "a list must be .xlsx, .xlsm, .csv or .ods, got .doc." in capsys.readouterr().err


def test_the_list_is_only_read(capsys: Streams) -> None:
    path = write_csv(Path("list.csv"), HEADINGS, [GOOD])
    before = path.read_bytes()
    cli.main(["survey", "list.csv"])
    assert path.read_bytes() == before
    assert [p.name for p in Path().iterdir()] == ["list.csv"]


def test_items_are_wrapped_to_the_terminal_and_problems_stay_whole_in_a_pipe(
    capsys: Streams, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", "72")
    rows = [("21-FCV-111", *GOOD[1:6], 0.3, *GOOD[7:]), ("21-FCV-112", *GOOD[1:4], "4 6", *GOOD[5:])]
    write_csv(Path("list.csv"), HEADINGS, rows)
    assert cli.main(["survey", "list.csv"]) == 1
    lines = capsys.readouterr().out.splitlines()
    told = next(line for line in lines if "list.csv!E3: Flow must be a number" in line)
    assert len(told) > 72
    assert max(len(line) for line in lines if line != told) <= 72
    assert any(line.startswith("      remedy: ") for line in lines)
