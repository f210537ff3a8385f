"""``--since-last`` and ``--trail``: what is skipped and why, what a line says, files that are torn or shared."""

from __future__ import annotations

import hashlib
import json
import os
import threading
from pathlib import Path
from typing import Any

import pytest

from fleet.helping import Command, book, index, leftovers
from lowpoint import __version__
from lowpoint.errors import BookError
from lowpoint.faces import cli
from lowpoint.fleet import state
from lowpoint.fleet.state import NAME, State
from lowpoint.fleet.tasks import Outcome, Task, attempt
from lowpoint.fleet.trail import Trail, line_of

Streams = pytest.CaptureFixture[str]


@pytest.fixture
def nightly(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Two books in a folder; the second has a call that errs (no p1)."""
    monkeypatch.chdir(tmp_path)
    book(tmp_path / "in" / "a.xlsx")
    book(tmp_path / "in" / "b.xlsx", p1=0.0)
    return tmp_path


def run(*words: str) -> int:
    return cli.main(["recalc", "in", "-o", "out", "--since-last", "--trail", "trail.jsonl", *words])


def results(folder: Path, last: int, books: int = 2) -> list[str]:
    """Of the last lines of the trail; lines stand as books were finished, here each run's are by book."""
    lines = trail(folder)[-last:]
    runs = [sorted(lines[n : n + books], key=lambda line: str(line["book"])) for n in range(0, last, books)]
    return [line["result"] for run in runs for line in run]


def trail(folder: Path) -> list[dict[str, Any]]:
    return [json.loads(line) for line in (folder / "trail.jsonl").read_text(encoding="utf-8").splitlines()]


def test_unchanged_books_are_skipped_and_keep_their_exit_code(nightly: Path, capsys: Streams) -> None:
    assert run() == 1
    before = (nightly / "out" / "a.xlsx").stat()
    assert run() == 1  # b had findings then, and has them still
    assert results(nightly, 4) == ["done", "findings", "unchanged", "unchanged"]
    assert (nightly / "out" / "a.xlsx").stat().st_mtime_ns == before.st_mtime_ns
    said = capsys.readouterr().out
    assert "2 books: 1 without findings, 0 written, 0 failed, 2 unchanged and skipped." in said
    assert f"{Path('in') / 'b.xlsx'}: unchanged since" in said
    assert "with findings then" in said


def test_whatever_changed_is_done_again(nightly: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    run()
    book(nightly / "in" / "a.xlsx", p1=12.0)  # the content
    run()
    assert results(nightly, 2) == ["done", "unchanged"]
    # By hand: (12 - 0.02)/(12 - 5) = 1.711428...
    assert index(nightly / "out" / "a.xlsx") == pytest.approx(11.98 / 7, rel=1e-14)
    (nightly / "out" / "a.xlsx").write_bytes(b"somebody else's")  # the output
    (nightly / "out" / "b.xlsx").unlink()
    run()
    assert results(nightly, 2) == ["done", "findings"]
    run("--limit", "depth=50")  # what was asked for
    assert results(nightly, 2) == ["done", "findings"]
    monkeypatch.setattr(state, "tools", lambda: {"lowpoint": "another"})  # the tool
    run("--limit", "depth=50")
    assert results(nightly, 2) == ["done", "findings"]


def test_a_touched_book_is_the_same_book(nightly: Path) -> None:
    run()
    os.utime(nightly / "in" / "a.xlsx", (1, 1))
    run()
    assert results(nightly, 2) == ["unchanged", "unchanged"]


def test_a_moved_folder_of_outputs_stays_known(nightly: Path) -> None:
    run()
    (nightly / "out").rename(nightly / "kept")
    assert cli.main(["recalc", "in", "-o", "kept", "--since-last", "--trail", "trail.jsonl"]) == 1
    assert results(nightly, 2) == ["unchanged", "unchanged"]


def test_in_place(nightly: Path) -> None:
    words = ["recalc", "in", "--in-place", "--since-last", "--trail", "trail.jsonl"]
    cli.main(words)
    cli.main(words)
    assert results(nightly, 4) == ["done", "findings", "unchanged", "unchanged"]
    book(nightly / "in" / "a.xlsx", p1=11.0)
    cli.main(words)
    assert results(nightly, 2) == ["done", "unchanged"]


def test_a_book_that_failed_is_tried_again(nightly: Path) -> None:
    run()
    (nightly / "in" / "a.xlsx").write_bytes(b"tag,p1,p2\n")
    run()
    run()
    assert results(nightly, 4) == ["failed", "unchanged", "failed", "unchanged"]
    assert index(nightly / "out" / "a.xlsx") == pytest.approx(1.996, rel=1e-14)  # the older output stands


@pytest.mark.parametrize("content", ["", "{", "[]", '{"format": 1, "books": {"x": 3}}', '{"format": 99, "books": {}}',
                                     '{"format": 1, "books": []}', "[" * 100_000])  # fmt: skip
def test_a_state_file_that_cannot_be_understood_is_told_and_made_anew(
    nightly: Path, content: str, capsys: Streams
) -> None:
    run()
    (nightly / "out" / NAME).write_text(content)
    run()
    assert results(nightly, 2) == ["done", "findings"]
    assert f"{NAME}: cannot be understood and is made anew" in capsys.readouterr().err
    run()
    assert results(nightly, 2) == ["unchanged", "unchanged"]


def test_two_states_at_once_keep_each_others_entries(tmp_path: Path) -> None:
    source = book(tmp_path / "a.xlsx")
    tasks = [Task("recalc", source, (tmp_path / f"{n}.xlsx",)) for n in range(8)]
    outcomes = [attempt(task, False) for task in tasks]
    barrier = threading.Barrier(8)

    def note(n: int) -> None:
        mine = State(tmp_path)
        barrier.wait()
        mine.note(tasks[n], outcomes[n])
        mine.save()

    threads = [threading.Thread(target=note, args=(n,)) for n in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    after = State(tmp_path)
    assert after.trouble is None
    assert all(after.known(task) for task in tasks)


def test_two_runs_at_once(command: Command, nightly: Path) -> None:
    for n in range(6):
        book(nightly / "in" / f"more{n}.xlsx", p1=9.0 + n)
    words = ("recalc", "in", "-o", "out", "--since-last", "--trail", "trail.jsonl")
    both = [command(*words, cwd=nightly) for _ in range(2)]
    for one in both:
        assert one.end() == 1, one.out + one.err
    assert len(trail(nightly)) == 16
    assert run() == 1
    assert results(nightly, 8, 8) == ["unchanged"] * 8
    assert leftovers(nightly) == []


def test_a_line_of_the_trail(nightly: Path) -> None:
    assert run("--jobs", "2") == 1
    lines = {Path(line["book"]).name: line for line in trail(nightly)}
    good, bad = lines["a.xlsx"], lines["b.xlsx"]

    def sha(path: str) -> str:
        return hashlib.sha256((nightly / path).read_bytes()).hexdigest()

    assert good["fingerprint"] == sha("in/a.xlsx")
    assert good["written"] == {str(Path("out/a.xlsx")): sha("out/a.xlsx")}
    assert good["versions"]["lowpoint"] == __version__
    assert good["counts"] == {"recomputed": 2, "lp_calls": 2, "failed": 0, "changed": 2, "not_refreshed": 0}
    assert (good["command"], good["exit_code"], good["attempts"], good["errors"]) == ("recalc", 0, 1, [])
    assert good["seconds"] > 0
    assert good["worker"].startswith("process ")
    assert good["time"].endswith("+00:00")
    assert bad["exit_code"] == 1
    assert bad["counts"]["failed"] == 2
    assert bad["errors"][0].startswith("List!D1 #NUM!")


def test_a_verdict_that_turns_is_in_the_trail(nightly: Path, capsys: Streams) -> None:
    """sigma = (p1 - 0.02)/(p1 - 5) at a constant-cavitation limit of 1.5: by hand 1.996 above, 1.19 (p1 = 30) below."""
    import openpyxl

    run()
    recomputed = nightly / "out" / "a.xlsx"
    again = nightly / "again"
    again.mkdir()
    # The recomputed book with another pressure typed in, but the verdict of before: as somebody sends it on.
    from lowpoint.book.package import Package

    package = Package.open(recomputed)
    part = package.sheets[0].path
    data = package.read(part)
    assert data.count(b"<v>10</v>") == 1
    package.write(again / "a.xlsx", {part: data.replace(b"<v>10</v>", b"<v>30</v>")})
    old = openpyxl.load_workbook(recomputed, data_only=True)["List"]["E1"].value
    capsys.readouterr()
    assert cli.main(["recalc", "again", "-o", "out2", "--trail", "turned.jsonl"]) == 0
    line = json.loads((nightly / "turned.jsonl").read_text(encoding="utf-8"))
    new = openpyxl.load_workbook(nightly / "out2" / "a.xlsx", data_only=True)["List"]["E1"].value
    assert old != new
    assert line["turned"] == [{"sheet": "List", "cell": "E1", "old": old, "new": new}]
    assert "1 verdict turned" in capsys.readouterr().out


def test_a_trail_that_ends_in_half_a_line_goes_on_with_whole_ones(tmp_path: Path) -> None:
    path = tmp_path / "trail.jsonl"
    path.write_bytes(b'{"a": 1}\n{"b": ')
    trail = Trail(path)
    trail.add({"c": "é"})
    trail.close()
    assert path.read_text(encoding="utf-8").splitlines() == ['{"a": 1}', '{"b": ', '{"c": "é"}']


def test_a_trail_that_cannot_be_written_is_told_before_anything_is_done(nightly: Path, capsys: Streams) -> None:
    with pytest.raises(BookError, match="the trail cannot be written"):
        Trail(nightly / "in")
    assert cli.main(["recalc", "in", "-o", "out", "--trail", "nowhere/trail.jsonl"]) == 2
    assert "nowhere" in capsys.readouterr().err
    assert not (nightly / "out").exists()


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="only Linux has a device that is always full")
def test_a_trail_on_a_full_disk_is_told_and_stops_no_book(nightly: Path, capsys: Streams) -> None:
    (nightly / "in" / "b.xlsx").unlink()
    assert cli.main(["recalc", "in", "-o", "out", "--trail", "/dev/full"]) == 1
    assert "the trail cannot be written" in capsys.readouterr().err
    assert index(nightly / "out" / "a.xlsx") == 1.996  # by hand: (10 - 0.02)/(10 - 5)


def test_a_state_file_that_cannot_be_written_is_told_and_stops_no_book(nightly: Path, capsys: Streams) -> None:
    (nightly / "out" / NAME).mkdir(parents=True)
    assert run() == 1
    assert "these books will be done again the next time" in capsys.readouterr().err
    assert index(nightly / "out" / "a.xlsx") == 1.996  # by hand, as above


def test_many_errors_are_counted_and_the_first_named(tmp_path: Path) -> None:
    line = line_of(Task("recalc", tmp_path / "a.xlsx"), Outcome(1, errors=[str(n) for n in range(5000)]), False)
    assert line["errors_in_all"] == 5000
    assert line["errors"] == [str(n) for n in range(1000)]
