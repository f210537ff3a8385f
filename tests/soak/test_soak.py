"""The short soak; the long one is ``python tests/soak/soak.py``."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from soak.making import BROKEN
from soak.soak import Soak

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="SIGKILL and groups of processes are POSIX")


def test_a_fleet_that_is_killed_and_loses_a_worker_loses_no_book(tmp_path: Path) -> None:
    soak = Soak(tmp_path, count=80, most_rows=800, seed=7)
    soak.prepare()
    assert {one.kind for one in soak.made} == {"good", "right", "findings", *BROKEN}
    soak.endure()
    soak.check()
    for spoil in (_input, _output, _lost, _left, _line_lost, _line_twice, _line_made_up):
        undo = spoil(soak)
        with pytest.raises(AssertionError):
            soak.check()
        undo()
    soak.check()


# --- ways of spoiling the result, each with its undoing: every check can fail -----------------------------------
def _changed(path: Path, data: bytes) -> Callable[[], object]:
    before = path.read_bytes()
    path.write_bytes(data)
    return lambda: path.write_bytes(before)


def _input(soak: Soak) -> Callable[[], object]:
    path = soak.inputs / soak.made[0].name
    return _changed(path, path.read_bytes() + b" ")


def _good(soak: Soak) -> Path:
    return next(soak.out / one.name for one in soak.made if not one.broken)


def _output(soak: Soak) -> Callable[[], object]:
    return _changed(_good(soak), _good(soak).read_bytes()[:-1])


def _lost(soak: Soak) -> Callable[[], object]:
    path, data = _good(soak), _good(soak).read_bytes()
    path.unlink()
    return lambda: path.write_bytes(data)


def _left(soak: Soak) -> Callable[[], object]:
    path = soak.out / ".lowpoint-0123456789ab-0123456789abcdef.tmp"
    path.write_bytes(b"half")
    return path.unlink


def _lines(
    soak: Soak, change: Callable[[list[dict[str, Any]]], list[dict[str, Any]]], place: int = 2
) -> Callable[[], object]:  # fmt: skip
    run = soak.runs[place]
    before, run.lines = run.lines, change(run.lines)

    def undo() -> None:
        run.lines = before

    return undo


def _line_lost(soak: Soak) -> Callable[[], object]:
    return _lines(soak, lambda lines: lines[1:])


def _line_twice(soak: Soak) -> Callable[[], object]:
    return _lines(soak, lambda lines: [*lines, next(line for line in lines if line["result"] == "done")])


def _line_made_up(soak: Soak) -> Callable[[], object]:
    """Books that were skipped, told as done."""
    return _lines(soak, lambda lines: [{**line, "result": "done"} if line["result"] == "unchanged" else line
                                       for line in lines], place=3)  # fmt: skip
