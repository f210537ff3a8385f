"""A process of the user's Python that computes for the office where the office's own Python cannot."""

from __future__ import annotations

import json
import os
import subprocess
import tempfile
import threading
import time
from collections.abc import Callable
from contextlib import suppress
from typing import Any

from .settings import REMEDY, Settings
from .values import from_line

__all__ = ["Helper", "HelperError"]

MODULE = "lowpoint.faces.calc_addin.serve"
STARTING, ANSWERING = 60.0, 30.0
"""Seconds that a helper may take to start, and for one call; then it is ended."""
MOST_DEATHS = 3
"""After so many in a row without an answer between them nothing is started for a while."""


class HelperError(Exception):
    """The helper does not answer; the text is a sentence. ``lasting``: another try now would end alike."""

    def __init__(self, sentence: str, lasting: bool = False) -> None:
        super().__init__(sentence)
        self.lasting = lasting


class Helper:
    """One process, started with the first call and again after it died; lines of JSON go over its pipes.

    ``check`` looks at what each new process says of itself, and raises HelperError where that will not do.
    """

    def __init__(self, settings: Settings, check: Callable[[dict[str, Any]], None]) -> None:
        self._settings = settings
        self._check = check
        self._deaths = 0
        self._process: subprocess.Popen[bytes] | None = None
        self._complaints: Any = None
        self._until = 0.0
        self.greeting: dict[str, Any] = {}

    def start(self) -> None:
        """Make sure that a process runs and has said what it is."""
        if self._process is not None and self._process.poll() is None:
            return
        self.stop()
        self._complaints = tempfile.TemporaryFile()  # noqa: SIM115 - it lives as long as the process
        pipe = subprocess.PIPE
        try:
            self._process = subprocess.Popen(
                [self._settings.python, "-u", "-m", MODULE], stdin=pipe, stdout=pipe, stderr=self._complaints,
                env=self._environment(), creationflags=getattr(subprocess, "CREATE_NO_WINDOW", 0),
            )  # fmt: skip
        except OSError as problem:
            what = problem.strerror or problem
            raise HelperError(
                f"The Python at {self._settings.python} cannot be started ({what}). {REMEDY}", True
            ) from None
        threading.Thread(target=self._watch, args=(self._process,), daemon=True).start()
        try:
            self.greeting = self._receive(STARTING)
        except HelperError:
            said = self._last_complaint()
            sentence = f"The Python at {self._settings.python} cannot load Lowpoint ({said}). {REMEDY}"
            self.stop()
            raise HelperError(sentence, True) from None
        try:
            self._check(self.greeting)
        except HelperError:
            self.stop()
            raise

    def call(self, name: str, arguments: tuple[Any, ...]) -> Any:
        """The answer to one call, as the office takes it."""
        self.start()
        assert self._process is not None
        assert self._process.stdin is not None
        try:
            self._process.stdin.write(json.dumps([name, arguments]).encode() + b"\n")
            self._process.stdin.flush()
            answer = self._receive(ANSWERING)
        except (OSError, HelperError):
            raise self._died(name) from None
        self._deaths = 0
        if "bug" in answer:
            raise HelperError(f"{name}: {answer['bug']}")
        return from_line(answer["value"])

    def stop(self) -> None:
        """End the process, if one runs, and close what was opened for it."""
        process, self._process = self._process, None
        if process is not None:
            with suppress(OSError):
                process.kill()
            for stream in (process.stdin, process.stdout):
                if stream is not None:
                    with suppress(OSError):
                        stream.close()
            process.wait()
        if self._complaints is not None:
            self._complaints.close()
            self._complaints = None

    def _environment(self) -> dict[str, str]:
        """The office sets variables that would lead another Python to the office's library."""
        kept = {name: value for name, value in os.environ.items() if not name.startswith(("PYTHON", "LD_LIBRARY"))}
        return {**kept, "PYTHONPATH": os.pathsep.join(self._settings.paths), "PYTHONUTF8": "1"}

    def _receive(self, seconds: float) -> Any:
        assert self._process is not None
        assert self._process.stdout is not None
        self._until = time.monotonic() + seconds
        try:
            line = self._process.stdout.readline()
        finally:
            self._until = 0.0
        if not line.endswith(b"\n"):
            raise HelperError("no answer")
        return json.loads(line)

    def _watch(self, process: subprocess.Popen[bytes]) -> None:
        """Ends a process that takes too long, so that the office never waits for ever."""
        while process.poll() is None:
            if 0.0 < self._until < time.monotonic():
                with suppress(OSError):
                    process.kill()
            time.sleep(0.5)

    def _died(self, name: str) -> HelperError:
        said = self._last_complaint()
        self.stop()
        self._deaths += 1
        what = f"The helper process ended during a call of {name} ({said})"
        if self._deaths < MOST_DEATHS:
            return HelperError(f"{what}; the next call starts another.")
        self._deaths = 0
        return HelperError(f"{what}, as others before it; nothing is computed for some seconds.", True)

    def _last_complaint(self) -> str:
        """The last line the process wrote to its standard error, or how it ended."""
        code = None
        if self._process is not None:
            with suppress(subprocess.TimeoutExpired):
                code = self._process.wait(2)
        self._complaints.seek(0)
        lines = self._complaints.read().decode("utf-8", "replace").strip().splitlines()
        return lines[-1].strip() if lines else f"exit code {code}" if code is not None else "it closed its answers"
