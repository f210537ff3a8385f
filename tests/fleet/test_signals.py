"""Real signals to a real ``lowpoint``: finished books stand, the others are as they were, nothing is left lying."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from fleet.helping import Command, Running, book, index, leftovers, wait_for
from lowpoint.fleet.stopping import Stopper

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="POSIX signals")

BOOKS = 40


@pytest.fixture(scope="module")
def many(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("many")
    first = book(folder / "in" / "000.xlsx", rows=800)
    for n in range(1, BOOKS):
        (folder / "in" / f"{n:03}.xlsx").write_bytes(first.read_bytes())
    return folder


def stopped(running: Running, out: Path, number: int, group: bool = True) -> int:
    """Signal a command once it has written a few books; its exit code."""
    wait_for(lambda: len(list(out.glob("*.xlsx"))) >= 3, "three books")
    (os.killpg if group else os.kill)(running.pid, number)
    return running.end()


def check_books(out: Path, folder: Path) -> int:
    """Every output is whole, every input is as it was; how many outputs there are."""
    written = sorted(out.glob("*.xlsx"))
    assert 3 <= len(written) < BOOKS
    # By hand: (10 - 0.02)/(10 - 5) = 1.996.
    assert all(index(path) == 1.996 for path in (written[0], written[-1]))
    assert len({path.read_bytes() for path in written}) == 1
    assert len({path.read_bytes() for path in (folder / "in").iterdir()}) == 1
    assert leftovers(folder) == []
    return len(written)


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
@pytest.mark.parametrize("group", [True, False], ids=["terminal", "alone"])
def test_a_signal_ends_a_run_cleanly(
    command: Command, many: Path, tmp_path: Path, number: int, group: bool
) -> None:  # fmt: skip
    out, trail = tmp_path / "out", tmp_path / "trail.jsonl"
    words = ("recalc", many / "in", "-o", out, "--jobs", "2", "--since-last", "--trail", trail)
    running = command(*words)
    assert stopped(running, out, number, group) == 130
    said, complained = running.out, running.err
    written = check_books(out, many)
    assert "Traceback" not in said + complained
    assert "lowpoint: interrupted; " in complained
    lines = [json.loads(line) for line in trail.read_text(encoding="utf-8").splitlines()]
    # A worker may have put a book into its place an instant before it was ended: whole, but on nobody's record.
    assert written - 2 <= len(lines) <= written
    assert f" of {BOOKS} books: {len(lines)} without findings, {len(lines)} written, 0 failed." in said
    assert said.count("\nWritten: ") == len(lines)
    again = command(*words)
    assert again.end() == 0, again.err
    assert f"{len(lines)} unchanged and skipped" in again.out


def test_json_stays_one_value(command: Command, many: Path, tmp_path: Path) -> None:
    out = tmp_path / "out"
    running = command("recalc", many / "in", "-o", out, "--json")
    assert stopped(running, out, signal.SIGINT) == 130
    assert len(json.loads(running.out)) >= 1


def test_a_killed_command_leaves_whole_books_and_its_workers_end(command: Command, many: Path, tmp_path: Path) -> None:
    out = tmp_path / "out"
    running = command("recalc", many / "in", "-o", out, "--jobs", "2", "--trail", tmp_path / "trail.jsonl")
    stopped(running, out, signal.SIGKILL, group=False)
    wait_for(lambda: not _group(running.pid), "the end of the workers")
    assert len({path.read_bytes() for path in out.glob("*.xlsx")}) == 1
    for line in (tmp_path / "trail.jsonl").read_text(encoding="utf-8").splitlines():
        assert json.loads(line)["result"] == "done"


def _group(leader: int) -> list[str]:
    """The living processes of a group."""
    listed = subprocess.run(["ps", "-eo", "pgid=,stat="], capture_output=True, text=True, check=True).stdout
    return [line for line in listed.splitlines() if line.split()[0] == str(leader) and "Z" not in line]


def test_a_signal_waits_for_what_is_held_and_a_third_does_not() -> None:
    steps = []
    with pytest.raises(KeyboardInterrupt), Stopper() as stopper:  # noqa: PT012
        with stopper.held():
            os.kill(os.getpid(), signal.SIGTERM)
            time.sleep(0.01)
            steps.append("held")
        steps.append("not yet")
        stopper.heed()
        steps.append("never")
    assert steps == ["held", "not yet"]
    with pytest.raises(KeyboardInterrupt), Stopper() as stopper, stopper.held():  # noqa: PT012
        for _ in range(3):
            steps.append("again")
            os.kill(os.getpid(), signal.SIGINT)
            time.sleep(0.01)
        steps.append("never")
    assert steps[2:] == ["again"] * 3
    assert signal.getsignal(signal.SIGTERM) is signal.SIG_DFL


def test_a_signal_that_was_set_aside_stays_so() -> None:
    before = signal.signal(signal.SIGHUP, signal.SIG_IGN)
    try:
        with Stopper() as stopper:
            os.kill(os.getpid(), signal.SIGHUP)
            time.sleep(0.01)
            assert stopper.asked == 0
    finally:
        signal.signal(signal.SIGHUP, before)
