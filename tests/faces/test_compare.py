"""``lowpoint compare``: two issues on a terminal and for machines, exit codes, misuse."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from lowpoint.faces import cli
from survey_lists import GOOD, HEADINGS, write_csv, write_ods

Streams = pytest.CaptureFixture[str]
WORSE = (*GOOD[:6], 1.6, *GOOD[7:])
"""Index 1.375 (by hand: 5.777/4.2), below the damage limit 1.42."""


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def test_nothing_changed(capsys: Streams) -> None:
    write_csv(Path("old.csv"), HEADINGS, [GOOD])
    write_ods(Path("new.ods"), HEADINGS, [GOOD])
    assert cli.main(["compare", "old.csv", "new.ods"]) == 0
    out = capsys.readouterr().out
    assert "old: old.csv, a list judged now" in out
    assert "1 case in both, 0 with changed inputs, 0 worse" in out


def test_a_verdict_that_turned_is_a_finding(capsys: Streams) -> None:
    write_csv(Path("old.csv"), HEADINGS, [GOOD])
    write_csv(Path("new.csv"), HEADINGS, [WORSE])
    assert cli.main(["compare", "old.csv", "new.csv"]) == 1
    assert "fails now (1):\n  21-FCV-110 normal: clear (tested) +71.9 % -> damage (tested)" in capsys.readouterr().out
    # The other way round it is better, and no finding.
    assert cli.main(["compare", "new.csv", "old.csv"]) == 0
    assert "better (1):\n  21-FCV-110 normal: damage (tested)" in capsys.readouterr().out
    assert cli.main(["compare", "old.csv", "new.csv", "--us"]) == 1
    assert "p2 60.9158 psia -> 23.206 psia" in capsys.readouterr().out


def test_json_is_one_value_alone(capsys: Streams) -> None:
    write_csv(Path("old.csv"), HEADINGS, [GOOD])
    write_csv(Path("new.csv"), HEADINGS, [WORSE])
    assert cli.main(["compare", "old.csv", "new.csv", "--json"]) == 1
    data = json.loads(capsys.readouterr().out)
    assert (data["turned"][0]["what"], data["exit_code"], data["units"]) == ("fails now", 1, "metric")


def test_a_survey_as_it_was_issued(capsys: Streams) -> None:
    write_csv(Path("list.csv"), HEADINGS, [GOOD])
    assert cli.main(["survey", "list.csv", "--json"]) == 0
    Path("issued.json").write_text(capsys.readouterr().out, encoding="utf-8")
    assert cli.main(["compare", "issued.json", "list.csv"]) == 0
    assert "old: issued.json, a survey issued by version" in capsys.readouterr().out


def test_gauge_needs_the_elevation(capsys: Streams) -> None:
    gauge = tuple(name.replace("bar a", "bar g") for name in HEADINGS)
    write_csv(Path("list.csv"), gauge, [GOOD])
    assert cli.main(["compare", "list.csv", "list.csv"]) == 1
    assert "p1 is a gauge pressure, and no atmosphere of the site is given" in capsys.readouterr().out
    assert cli.main(["compare", "list.csv", "list.csv", "--elevation", "145"]) == 0


def test_misuse(capsys: Streams) -> None:
    write_csv(Path("list.csv"), HEADINGS, [GOOD])
    assert cli.main(["compare", "list.csv"]) == 2
    assert cli.main(["compare", "list.csv", "nowhere.xlsx"]) == 2
    assert "nowhere.xlsx: must be an existing file" in capsys.readouterr().err
    Path("other.json").write_text("{}", encoding="utf-8")
    assert cli.main(["compare", "other.json", "list.csv"]) == 2
    assert "other.json: must be the JSON of lowpoint survey, got another JSON." in capsys.readouterr().err
    assert cli.main(["compare", "list.csv", "list.csv", "--elevation", "99999"]) == 2
