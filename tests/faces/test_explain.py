"""``lowpoint explain``: the working on a terminal, in a file and for machines; names that are not there; exit codes."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from lowpoint.faces import cli
from survey_lists import GOOD, HEADINGS, write_csv, write_ods, write_xlsx

Streams = pytest.CaptureFixture[str]
ROWS = [GOOD, (GOOD[0], "Maximum", *GOOD[2:6], 1.6, *GOOD[7:]), ("22-FCV-220", "normal", *GOOD[2:])]
"""Index 3.61 and clear; (5.8 - 0.0234)/4.2 = 1.375, below the damage limit 1.42; and another item."""


@pytest.fixture(autouse=True)
def _at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    write_csv(Path("list.csv"), HEADINGS, ROWS)


def test_all_cases_of_an_item(capsys: Streams) -> None:
    assert cli.main(["explain", "list.csv", "21-FCV-110"]) == 1
    out = capsys.readouterr().out
    assert "21-FCV-110, case 'normal': control valve" in out
    assert "21-FCV-110, case 'Maximum': control valve" in out
    assert "Verdict: damage (tested), margin" in out
    assert "22-FCV-220" not in out
    assert max(map(len, out.splitlines())) <= 100


def test_one_case(capsys: Streams) -> None:
    assert cli.main(["explain", "list.csv", "21-fcv-110", "--case", "NORMAL"]) == 0
    out = capsys.readouterr().out
    # By hand: (5.8 - 0.02339)/1.6 = 3.6104 (pv of water at 20 C, steam tables).
    assert "= (p1 - pv)/dp\n" in out
    assert "= (5.8 - 0.02339318)/1.6\n" in out
    assert "3.610379" in out
    assert "Maximum" not in out


@pytest.mark.parametrize("suffix", ["xlsx", "ods"])
def test_other_formats_say_the_same(suffix: str, capsys: Streams) -> None:
    write = {"xlsx": write_xlsx, "ods": write_ods}[suffix]
    write(Path(f"list.{suffix}"), HEADINGS, ROWS)
    said = []
    for name in ("list.csv", f"list.{suffix}"):
        assert cli.main(["explain", name, "22-FCV-220"]) == 0
        said.append(capsys.readouterr().out.replace("list.csv!", "List!").replace("list!", "List!"))
    assert said[0] == said[1]


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (["list.csv", "21-FCV-11"], "has no item '21-FCV-11'. Did you mean '21-FCV-110'"),
        (["list.csv", "zzz"], "has no item 'zzz'. Its tags are '21-FCV-110', '22-FCV-220'."),
        (["list.csv", "21-FCV-110", "--case", "maximun"], "has no case 'maximun'. Did you mean 'Maximum'?"),
        (["list.csv", "21-FCV-110", "--elevation", "99999"], "--elevation: must be -5000 to 11000 m"),
        (["list.csv", "21-FCV-110", "-o", "note.pdf"], "the output of -o must be named .txt or .md"),
        (["list.csv", "21-FCV-110", "-o", "nowhere/note.md"], "must be a folder"),
        (["gone.csv", "21-FCV-110"], "gone.csv"),
    ],
)
def test_misuse(words: list[str], message: str, capsys: Streams) -> None:
    assert cli.main(["explain", *words]) == 2
    out = capsys.readouterr()
    assert message in out.err
    assert out.out == ""


def test_a_list_without_rows(capsys: Streams) -> None:
    write_csv(Path("empty.csv"), HEADINGS, [])
    assert cli.main(["explain", "empty.csv", "x"]) == 2
    assert "no item to explain" in capsys.readouterr().err


def test_a_case_without_an_answer_is_a_finding(capsys: Streams) -> None:
    write_csv(Path("odd.csv"), HEADINGS, [(*GOOD[:4], "much", *GOOD[5:]), ("other", *GOOD[1:4], "x", *GOOD[5:])])
    assert cli.main(["explain", "odd.csv", GOOD[0]]) == 1
    out = capsys.readouterr().out
    assert "Verdict: no answer" in out
    assert "No verdict, because:" in out
    assert "'much'" in out
    # What can be worked out all the same stands there.
    assert "= 0.96 - 0.28*sqrt(pv/pc)" in out


def test_problems_of_other_items_do_not_count(capsys: Streams) -> None:
    write_csv(Path("odd.csv"), HEADINGS, [("other", *GOOD[1:4], "x", *GOOD[5:]), GOOD])
    assert cli.main(["explain", "odd.csv", GOOD[0]]) == 0
    out = capsys.readouterr().out
    assert "Verdict: clear (tested)" in out
    assert "E3: 46 m3/h" in out


def test_files(capsys: Streams) -> None:
    assert cli.main(["explain", "list.csv", "22-FCV-220", "-o", "note.txt"]) == 0
    assert capsys.readouterr().out == "Written: note.txt\n"
    assert cli.main(["explain", "list.csv", "22-FCV-220"]) == 0
    assert Path("note.txt").read_text(encoding="utf-8") == capsys.readouterr().out
    assert cli.main(["explain", "list.csv", "22-FCV-220", "-o", "note.txt"]) == 2
    assert "is there already and was left as it is" in capsys.readouterr().err
    assert cli.main(["explain", "list.csv", "22-FCV-220", "-o", "note.txt", "--overwrite", "--us"]) == 0
    assert "84.122 psi" in Path("note.txt").read_text(encoding="utf-8")
    assert cli.main(["explain", "list.csv", "21-FCV-110", "-o", "note.md"]) == 1
    text = Path("note.md").read_text(encoding="utf-8")
    assert text.count("# 21-FCV-110, case ") == 2
    assert "| `sigma` | cavitation index, upstream form | `(p1 - pv)/dp`<br>`(5.8 - 0.02339318)/1.6` |" in text


def test_json(capsys: Streams) -> None:
    assert cli.main(["explain", "list.csv", "21-FCV-110", "--json", "--us"]) == 1
    said = json.loads(capsys.readouterr().out)
    assert (said["tag"], said["units"], said["exit_code"]) == ("21-FCV-110", "us", 1)
    assert [(case["case"], case["regime"], case["fails"]) for case in said["cases"]] == [
        ("normal", "clear", False), ("Maximum", "damage", True)]  # fmt: skip
    steps = {step["symbol"]: step for section in said["cases"][0]["sections"] for step in section["steps"]}
    assert steps["p1"]["also"] == "84.122 psi"  # 5.8 bar over 6894.757 Pa
    assert steps["sigma"]["equation"] == "(p1 - pv)/dp"
    assert said["cases"][0]["results_si"]["sigma"] == pytest.approx(3.6104, abs=1e-4)


def test_help_has_an_example(capsys: Streams) -> None:
    assert cli.main(["explain", "--help"]) == 0
    assert "lowpoint explain valves.xlsx 21-FCV-110" in capsys.readouterr().out
