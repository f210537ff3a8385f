"""Kinds of work for the tests of fleets: workers that die, hang or take their time. Named as ``fleet.kinds:NAME``."""

from __future__ import annotations

import os
import signal
import time
from pathlib import Path
from typing import BinaryIO

from lowpoint.book.saving import replace_file
from lowpoint.fleet.tasks import Outcome, Task

KILL = getattr(signal, "SIGKILL", signal.SIGTERM)


def upper(task: Task, full: bool) -> Outcome:
    """The source in capitals into every target. A source that says how, ends its worker first."""
    text = task.source.read_text()
    _die(text, task)
    for target in task.targets:
        replace_file(target, lambda sink: sink.write(text.upper().encode()))
    return Outcome(text=f"{task.source}: {text}", data={"book": str(task.source), "said": text, "pid": os.getpid()})


def _die(text: str, task: Task) -> None:
    if text == "die":
        os.kill(os.getpid(), KILL)
    if text.startswith("die once "):
        marker = Path(text.removeprefix("die once "))
        if not marker.exists():
            marker.write_text("died")
            os.kill(os.getpid(), KILL)
    if text.startswith("sleep once "):
        _nap(Path(text.removeprefix("sleep once ")))
    if text == "die writing":
        replace_file(task.targets[0], _half)
    if text == "sleep":
        time.sleep(60)
    if text == "sleep writing":
        replace_file(task.targets[0], _stuck)
    if text == "bug":
        raise ZeroDivisionError("by zero")
    if text == "leave":
        os._exit(3)


def _nap(marker: Path) -> None:
    """The first time: say which process this is, then sleep until the marker says otherwise."""
    if marker.exists():
        return
    marker.write_text(str(os.getpid()))
    while marker.read_text() != "wake":
        time.sleep(0.05)


def _half(sink: BinaryIO) -> None:
    sink.write(b"half of it")
    sink.flush()
    os.kill(os.getpid(), KILL)


def _stuck(sink: BinaryIO) -> None:
    sink.write(b"half of it")
    sink.flush()
    time.sleep(60)
