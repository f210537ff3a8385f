"""Killed at any moment, the command leaves the file of before or the whole new one, and nothing that stays for good.

The kills are real (SIGKILL cannot be caught). Half of them come after a random time, half as soon as the temporary
file is seen, which is when a torn file could come about. More of them: set LOWPOINT_KILLS to their number.
"""

from __future__ import annotations

import contextlib
import os
import random
import subprocess
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from book.lists import ITEMS, listed
from hostile.running import run, started
from lowpoint.book import guard
from lowpoint.book.saving import replace_file
from lowpoint.book.saving_claims import _CLEARED, ABANDONED_AFTER, OURS
from survey_lists import GOOD, HEADINGS, write_xlsx

KILLS = int(os.environ.get("LOWPOINT_KILLS", "40"))
ROWS = 400
LONGEST = 30.0


def _valves(path: Path) -> Path:
    places = {}
    for row in range(1, ROWS + 1):
        up, down, vapour, recovery = ITEMS[row % 3]
        places |= {f"A{row}": up + row / 1000, f"B{row}": down, f"C{row}": vapour, f"D{row}": recovery}
        places |= {f"E{row}": f"=LP_SIGMA(A{row},B{row},C{row})", f"F{row}": f"=LP_MARGIN(E{row},1.2)"}
    return listed(path, places)


def _cases(folder: Path) -> dict[str, tuple[list[object], Path, bytes]]:
    """The commands, the file each of them writes, and what stands there before."""
    valves, other = _valves(folder / "valves.xlsx"), folder / "other.xlsx"
    items = write_xlsx(folder / "items.xlsx", HEADINGS, [GOOD])
    old = b"PK what stood here before" * 2000
    return {
        "in place": (["recalc", valves, "--in-place"], valves, valves.read_bytes()),
        "over a file": (["recalc", valves, "-o", other], other, old),
        "survey": (["survey", items, "-o", folder / "verdicts.xlsx", "--overwrite", "--draws", "0"],
                   folder / "verdicts.xlsx", old),
        "starter": (["starter", "list", "-o", folder / "form.xlsx", "--overwrite"], folder / "form.xlsx", old),
    }  # fmt: skip


SHARES = {"in place": 0.45, "over a file": 0.3, "survey": 0.08, "starter": 0.17}


@pytest.mark.skipif(os.name == "nt", reason="SIGKILL is a signal of POSIX systems")
@pytest.mark.parametrize("name", SHARES)
def test_a_kill_at_any_moment_leaves_the_old_file_or_the_new_one(tmp_path: Path, name: str) -> None:
    words, target, old = _cases(tmp_path)[name]
    target.write_bytes(old)
    began = time.monotonic()
    assert run(*words, folder=tmp_path).returncode in (0, 1)
    usual, new = time.monotonic() - began, target.read_bytes()
    assert new != old
    assert run(*words, folder=tmp_path).returncode in (0, 1)
    assert target.read_bytes() == new, "the command must give the same bytes again, or nothing can be told"
    chance = random.Random(7)
    found = {"old": 0, "new": 0}
    for number in range(max(2, round(KILLS * SHARES[name]))):
        target.write_bytes(old)
        process = started(words, tmp_path)
        if number % 2:
            _wait_for_writing(process, tmp_path)
            time.sleep(chance.random() ** 3 * 0.05)
        else:
            with contextlib.suppress(subprocess.TimeoutExpired):
                process.wait(chance.random() * usual * 1.1)
        process.kill()
        process.wait()
        is_now = target.read_bytes()
        assert is_now in (old, new), f"{len(is_now)} bytes are neither the old nor the new file"
        found["old" if is_now == old else "new"] += 1
        for left in tmp_path.glob(".*"):
            assert OURS.fullmatch(left.name), f"{left.name} is no name of ours"
            os.utime(left, (time.time() - 3600,) * 2)
    assert found["old"]
    assert run(*words, folder=tmp_path).returncode in (0, 1)
    assert list(tmp_path.glob(".*")) == [], "the next run clears away what killed ones left"
    guard.check(target)


def _wait_for_writing(process: subprocess.Popen[bytes], folder: Path) -> None:
    until = time.monotonic() + LONGEST
    while process.poll() is None and time.monotonic() < until:
        if any(name.startswith(".lowpoint-") for name in os.listdir(folder)):
            return


@contextlib.contextmanager
def _left(folder: Path, name: str = ".lowpoint-0123456789ab-0123456789abcdef.tmp") -> Iterator[Path]:
    """A temporary file of a process that is gone, an hour old."""
    _CLEARED.clear()
    path = folder / name
    path.write_bytes(b"half")
    os.utime(path, (time.time() - 3600,) * 2)
    yield path
    _CLEARED.clear()


def test_leftovers_go_with_the_next_writing_and_nothing_else_does(tmp_path: Path) -> None:
    with _left(tmp_path) as left, _left(tmp_path, ".lowpoint-notes.tmp") as others:
        replace_file(tmp_path / "list.xlsx", lambda sink: sink.write(b"new"))
        assert not left.exists()
        assert others.read_bytes() == b"half"


def test_a_file_that_is_young_or_being_written_stays(tmp_path: Path) -> None:
    fcntl = pytest.importorskip("fcntl", reason="locks of POSIX systems")
    with _left(tmp_path) as left, left.open("rb") as writer:
        fcntl.flock(writer, fcntl.LOCK_EX)
        replace_file(tmp_path / "list.xlsx", lambda sink: sink.write(b"new"))
        assert left.exists()
    with _left(tmp_path) as left:
        os.utime(left, (time.time() - ABANDONED_AFTER / 5,) * 2)
        replace_file(tmp_path / "list.xlsx", lambda sink: sink.write(b"new"))
        assert left.exists()
        os.utime(left, (time.time() - 3600,) * 2)  # the same process looks again until it can tell
        replace_file(tmp_path / "list.xlsx", lambda sink: sink.write(b"new"))
        assert not left.exists()


def test_a_link_under_such_a_name_is_not_followed(tmp_path: Path) -> None:
    mine = tmp_path / "mine.txt"
    mine.write_bytes(b"mine")
    link = tmp_path / ".lowpoint-0123456789ab-0123456789abcdef.tmp"
    link.symlink_to(mine)
    _CLEARED.clear()
    replace_file(tmp_path / "list.xlsx", lambda sink: sink.write(b"new"))
    assert mine.read_bytes() == b"mine"
    assert link.is_symlink()
