"""What is said at the end of a run, the bar on a terminal, and surveys as work of a fleet."""

from __future__ import annotations

import os
import re
import sys
from pathlib import Path

import pytest

from fleet.helping import book, index
from lowpoint.faces import cli
from lowpoint.fleet.running import Result
from lowpoint.fleet.summary import ALL, Summary
from lowpoint.fleet.surveying import survey
from lowpoint.fleet.tasks import Outcome, Task, attempt, failure

Streams = pytest.CaptureFixture[str]


def result(name: str, code: int = 0, attempts: int = 1, turned: int = 0, failed: bool = False) -> Result:
    task = Task("recalc", Path(name), (Path(name),))
    outcome = failure(task, f"{name}: is damaged.") if failed else Outcome(code, turned=[{}] * turned, seconds=1.25)
    return Result(task, outcome, attempts, "process 1")


def said(*results: Result, total: int | None = None) -> list[str]:
    summary = Summary(total)
    for one in results:
        summary.add(one)
    return list(summary.lines())


def test_few_books_are_all_in_the_table() -> None:
    lines = said(result("a.xlsx"), result("b.xlsx", 1, turned=3), result("c.xlsx", failed=True, attempts=2))
    assert lines == [
        "",
        "  turned  errors    s  result           book",
        "                  1.2  done             a.xlsx",
        "       3          1.2  findings         b.xlsx",
        "               1  0.0  failed, 2 tries  c.xlsx",
        "",
        "3 books: 1 without findings, 2 written, 1 failed; 3 verdicts turned.",
    ]


def test_of_many_only_those_that_need_a_look() -> None:
    lines = said(*[result(f"{n}.xlsx") for n in range(200)], result("odd.xlsx", 1))
    assert [line.split()[-1] for line in lines[2:-2]] == ["odd.xlsx"]
    assert lines[-1] == "201 books: 200 without findings, 201 written, 0 failed."
    lines = said(*[result(f"{n}.xlsx", 1) for n in range(200)])
    assert "the trail (--trail) has all of 200 books" in lines[-3]
    assert len(lines) < 3 * ALL


def test_an_interrupted_run_says_how_many_there_were() -> None:
    assert said(result("a.xlsx"), total=9)[-1] == "1 of 9 books: 1 without findings, 1 written, 0 failed."


@pytest.mark.parametrize("codes, code", [((), 0), ((0, 0), 0), ((0, 2), 1), ((1, 2), 1), ((2, 70, 0), 70)])
def test_the_exit_code_is_the_worst_of_all(codes: tuple[int, ...], code: int) -> None:
    summary = Summary(None)
    for one in codes:
        summary.add(result("a.xlsx", one))
    assert summary.exit_code == code


def test_patterns_and_sub_folders_from_the_command(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Streams
) -> None:
    monkeypatch.chdir(tmp_path)
    for name in ("north/a.xlsx", "north/deep/c.xlsx", "south/b.xlsx"):
        book(tmp_path / name)
    assert cli.main(["recalc", "*th/*.xlsx", "-o", "out"]) == 0
    assert sorted(path.name for path in Path("out").iterdir()) == ["a.xlsx", "b.xlsx"]
    assert cli.main(["recalc", ".", "-o", "all", "--recursive", "--jobs", "2"]) == 0
    outputs = ["all/north/a.xlsx", "all/north/deep/c.xlsx", "all/out/a.xlsx", "all/out/b.xlsx", "all/south/b.xlsx"]
    assert sorted(path.as_posix() for path in Path("all").rglob("*.xlsx")) == outputs
    assert index(Path("all/north/deep/c.xlsx")) == 1.996  # by hand: (10 - 0.02)/(10 - 5)
    assert cli.main(["recalc", "nothing-*.xlsx"]) == 2
    assert "nothing-*.xlsx: must match files, got none" in capsys.readouterr().err


@pytest.mark.skipif(sys.platform == "win32", reason="a POSIX terminal")
def test_a_bar_on_a_terminal_and_none_elsewhere(tmp_path: Path) -> None:
    import pty
    import subprocess
    import termios

    first = book(tmp_path / "in" / "000.xlsx", rows=300)
    for n in range(1, 60):
        (tmp_path / "in" / f"{n:03}.xlsx").write_bytes(first.read_bytes())
    ours, theirs = pty.openpty()
    termios.tcsetwinsize(theirs, (24, 100))
    words = [sys.executable, "-m", "lowpoint", "recalc", str(tmp_path / "in"), "-o", str(tmp_path / "out")]
    with open(tmp_path / "out.txt", "wb") as out:
        done = subprocess.Popen(words, stdout=out, stderr=theirs)
    os.close(theirs)
    shown = b""
    try:
        while piece := os.read(ours, 4096):
            shown += piece
    except OSError:  # how Linux tells the end of a terminal
        pass
    os.close(ours)
    assert done.wait(30) == 0
    text = shown.decode("utf-8", "replace")
    assert re.search(r"books: .*\d+/60 \[\d\d:\d\d<\d\d:\d\d", text), text
    assert "books:" not in (tmp_path / "out.txt").read_text(encoding="utf-8").split("60 books: ")[0]


def test_a_survey_is_work_for_a_fleet_too(tmp_path: Path) -> None:
    source = tmp_path / "list.csv"
    source.write_text(
        "tag,p1 [bar a],p2 [bar a],t [deg C],fluid,flow [m3/h],FL,size [mm]\n"
        "V-1,10,5,20,water,50,0.9,80\nV-2,,5,20,water,50,0.9,80\n", encoding="utf-8")  # fmt: skip
    targets = (tmp_path / "out" / "list.xlsx", tmp_path / "out" / "list.html")
    task = Task("survey", source, targets, {"draws": 0, "remedies": False, "elevation": 10.0})
    outcome = attempt(task, full=True)
    assert not outcome.failed, outcome.errors
    assert outcome.code == 1  # V-2 has no inlet pressure
    assert sorted(outcome.written) == sorted(map(str, targets))
    assert all(target.stat().st_size > 1000 for target in targets)
    assert outcome.counts["items"] == 2
    assert outcome.data["exit_code"] == 1
    assert survey(Task("survey", source), False).written == {}
