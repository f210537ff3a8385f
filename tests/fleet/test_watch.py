"""``--watch``: books are recomputed as they land; half-written and open ones, and our own outputs, are left alone."""

from __future__ import annotations

import json
import signal
import sys
import time
from pathlib import Path

import pytest

from fleet.helping import Command, Running, book, index, leftovers, wait_for
from lowpoint.faces import cli
from lowpoint.fleet.finding import Looking
from lowpoint.fleet.watching import Landings

Streams = pytest.CaptureFixture[str]
STOP = signal.SIGTERM if sys.platform != "win32" else signal.CTRL_BREAK_EVENT  # type: ignore[attr-defined]


@pytest.fixture
def inbox(tmp_path: Path) -> Path:
    folder = tmp_path / "inbox"
    folder.mkdir()
    return folder


def watching(command: Command, inbox: Path, *words: str) -> Running:
    running = command("recalc", "--watch", inbox, "-o", inbox.parent / "done", *words)
    wait_for(lambda: "watching" in running.err or running.process.poll() is not None, "the watch")
    assert running.process.poll() is None, running.err
    return running


def stop(running: Running) -> int:
    running.process.send_signal(STOP)
    return running.end()


def test_books_are_recomputed_as_they_land(command: Command, inbox: Path) -> None:
    done = inbox.parent / "done"
    book(inbox / "early.xlsx")  # there before the watch began
    trail = inbox.parent / "trail.jsonl"
    running = watching(command, inbox, "--trail", str(trail))
    wait_for((done / "early.xlsx").exists, "the book that was there")
    book(inbox / "late.xlsx", p1=12.0)
    wait_for((done / "late.xlsx").exists, "the book that landed")
    # By hand: (12 - 0.02)/(12 - 5).
    assert index(done / "late.xlsx") == pytest.approx(11.98 / 7, rel=1e-14)
    book(inbox / "late.xlsx", p1=9.0)  # saved once more
    wait_for(lambda: index(done / "late.xlsx") == pytest.approx(8.98 / 4, rel=1e-14), "the newer one")
    wait_for(lambda: running.out.count("Written") == 3, "what is told of it")
    assert stop(running) == 0
    assert "3 books: 3 without findings, 3 written, 0 failed." in running.out
    assert f"no longer watching {inbox}" in running.err
    assert "Traceback" not in running.err
    lines = [json.loads(line) for line in trail.read_text(encoding="utf-8").splitlines()]
    assert [Path(line["book"]).name for line in lines] == ["early.xlsx", "late.xlsx", "late.xlsx"]
    assert leftovers(inbox.parent) == []


def test_a_book_that_is_written_in_pieces_is_done_once_and_whole(command: Command, inbox: Path) -> None:
    whole = book(inbox.parent / "whole.xlsx").read_bytes()
    running = watching(command, inbox)
    with open(inbox / "slow.xlsx", "wb") as sink:
        for begin in range(0, len(whole), len(whole) // 4):
            sink.write(whole[begin : begin + len(whole) // 4])
            sink.flush()
            time.sleep(0.5)
    wait_for((inbox.parent / "done" / "slow.xlsx").exists, "the book")
    wait_for(lambda: "Written" in running.out, "what is told of it")
    assert stop(running) == 0
    assert "1 book: 1 without findings, 1 written, 0 failed." in running.out


def test_in_place_does_not_go_round_in_circles(command: Command, inbox: Path) -> None:
    source = book(inbox / "a.xlsx")
    running = command("recalc", "--watch", inbox, "--in-place")
    wait_for(lambda: "Written" in running.out, "the book")
    time.sleep(2.0)  # twice the time in which a change settles
    assert running.out.count("Written") == 1
    assert index(source) == 1.996  # by hand: (10 - 0.02)/(10 - 5)
    book(inbox / "b.xlsx")
    wait_for(lambda: running.out.count("Written") == 2, "the next book")
    assert stop(running) == 0


def test_a_signal_amid_a_book_leaves_it_as_it_was(command: Command, inbox: Path) -> None:
    source = book(inbox / "large.xlsx", rows=20_000)
    before = source.read_bytes()
    running = command("recalc", "--watch", inbox, "--in-place")
    wait_for(lambda: "watching" in running.err, "the watch")
    time.sleep(2.0)
    code = stop(running)
    # A quick machine had finished, or a slow one not begun; and the worker may have put the book into its place an
    # instant before it was ended. Either way the book is whole.
    assert source.read_bytes() == before or index(source) == 1.996
    if code != 0:
        assert code == 130
        assert "1 book not done; no file is half written" in running.err
    assert leftovers(inbox) == []


class _Clock:
    """Time that passes when the test says so."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        self.now = 100.0
        monkeypatch.setattr("lowpoint.fleet.watching.time.monotonic", lambda: self.now)


@pytest.fixture
def clock(monkeypatch: pytest.MonkeyPatch) -> _Clock:
    return _Clock(monkeypatch)


def seen(landings: Landings, clock: _Clock, seconds: float) -> list[str]:
    """What is ready after these seconds."""
    clock.now += seconds
    landings.hear([landings.folder])
    return [found.path.name for found in landings.ready()]


def test_settling(inbox: Path, clock: _Clock) -> None:
    landings = Landings(inbox, Looking(mark="-recalc"), settle=1.0, patience=10.0)
    assert seen(landings, clock, 0.0) == []  # an empty folder is no fault
    whole = book(inbox.parent / "x.xlsx").read_bytes()
    path = inbox / "a.xlsx"
    path.write_bytes(whole[:1000])
    assert seen(landings, clock, 0.0) == []
    assert seen(landings, clock, 5.0) == []  # half a book, quiet for a while
    path.write_bytes(whole)
    assert seen(landings, clock, 0.5) == []  # whole, but only just
    assert seen(landings, clock, 0.9) == []
    (inbox / "~$a.xlsx").write_bytes(b"\x04Anna" + b" " * 49)
    assert seen(landings, clock, 20.0) == []  # somebody has it open
    (inbox / "~$a.xlsx").unlink()
    assert seen(landings, clock, 0.1) == ["a.xlsx"]
    assert seen(landings, clock, 100.0) == []  # done


def test_what_never_becomes_a_book_is_taken_for_what_it_is_at_last(inbox: Path, clock: _Clock) -> None:
    landings = Landings(inbox, Looking(), settle=1.0, patience=10.0)
    (inbox / "a.xlsx").write_bytes(b"PK\x03\x04 and no more")
    assert seen(landings, clock, 0.0) == []
    assert seen(landings, clock, 9.0) == []
    assert seen(landings, clock, 1.5) == ["a.xlsx"]


def test_what_is_taken_away_and_our_own_outputs(inbox: Path, clock: _Clock) -> None:
    landings = Landings(inbox, Looking(mark="-recalc"))
    path = book(inbox / "a.xlsx")
    landings.ours(book(inbox / "a-recalc.xlsx"))
    seen(landings, clock, 0.0)
    path.rename(inbox.parent / "a.xlsx")
    assert seen(landings, clock, 20.0) == []
    (inbox.parent / "a.xlsx").rename(path)
    assert seen(landings, clock, 0.0) == []
    assert seen(landings, clock, 20.0) == ["a.xlsx"]


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["--watch", "nowhere"], "--watch nowhere: must be a folder"),
        (["--watch", ".", "a.xlsx"], "must stand without other books"),
        (["--watch", ".", "-o", "."], "must be another folder than the watched one"),
        (["--watch", ".", "-o", "x", "--in-place"], "must stand without -o"),
        ([], "must be given workbooks"),
    ],
)
def test_words_that_contradict(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, words: list[str], told: str, capsys: Streams
) -> None:
    monkeypatch.chdir(tmp_path)
    assert cli.main(["recalc", *words]) == 2
    assert told in capsys.readouterr().err
