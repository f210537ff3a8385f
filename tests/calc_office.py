"""A real office driven from outside, for the tests and the benchmark of the Calc add-in."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path
from typing import Any

__all__ = ["Office", "office_python"]

DRIVER = Path(__file__).parent / "faces" / "calc" / "driver.py"
ERRORS = {503: "#NUM!", 519: "#VALUE!", 524: "#REF!", 525: "#NAME?", 532: "#DIV/0!", 32767: "#N/A"}


class Office:
    """One office on a profile of its own, driven from outside: ``office.new()`` asks the driver for ``new``."""

    def __init__(self, python: str, soffice: str, profile: Path) -> None:
        self.profile = profile
        # The home is private too, and no variable of this Python reaches the office.
        kept = {name: value for name, value in os.environ.items() if not name.startswith("PYTHON")}
        self.log = profile / "driver.log"
        with self.log.open("wb") as log:
            self._driver = subprocess.Popen(
                [python, str(DRIVER)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=log, text=True,
                encoding="utf-8", env={**kept, "HOME": str(profile)},
            )  # fmt: skip
        self.seconds_to_start = self.start(soffice, str(profile))

    def __getattr__(self, action: str) -> Callable[..., Any]:
        if action.startswith("_"):
            raise AttributeError(action)

        def ask(*arguments: Any) -> Any:
            assert self._driver.stdin is not None
            assert self._driver.stdout is not None
            self._driver.stdin.write(json.dumps([action, arguments]) + "\n")
            self._driver.stdin.flush()
            line = self._driver.stdout.readline()
            assert line, f"the driver ended: {self.log.read_text(errors='replace')[-2000:]}"
            reply = json.loads(line)
            if "error" in reply:
                raise AssertionError(f"{action}: {reply['error']}")
            return reply["value"]

        return ask

    def end(self) -> None:
        """Close the office and wait for it."""
        if self._driver.poll() is None:
            self.stop()
        self._driver.wait(60)
        for stream in (self._driver.stdin, self._driver.stdout):
            if stream is not None:
                stream.close()

    def cells(self, book: int, place: str) -> list[list[Any]]:
        """What cells show: a float, a text, or an error as its name (its number where it has no name of ours)."""
        return [
            [ERRORS.get(error, f"Err:{error}") if error else value for value, error in row]
            for row in self.read(book, place)
        ]

    def addin_log(self) -> str:
        path = self.profile / "user" / "lowpoint" / "calc.log"
        return path.read_text(encoding="utf-8") if path.exists() else ""


def office_python(program: Path) -> str | None:
    """A Python that can talk to the office: the office's own, or the system's."""
    for name in (str(program / "python"), "/usr/bin/python3", "python3"):
        python = shutil.which(name)
        if python and subprocess.run([python, "-c", "import uno"], capture_output=True, check=False).returncode == 0:
            return python
    return None
