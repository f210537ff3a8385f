"""The log of the add-in: one sentence a failure, each written once in a while, in a file that does not grow forever."""

from __future__ import annotations

import time
from contextlib import suppress
from pathlib import Path

__all__ = ["Journal"]

LARGEST = 200_000
"""Bytes; a log that has become larger is begun anew."""
QUIET = 60.0
"""Seconds for which a sentence is not repeated: a column of 10 000 cells may fail alike."""


class Journal:
    """Writes sentences to ``path``; a log that cannot be written is no reason to fail."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self._last: dict[str, float] = {}

    def write(self, sentence: str) -> None:
        """One line with the time before it, unless the same was said a moment ago."""
        now = time.monotonic()
        if now - self._last.get(sentence, -QUIET) < QUIET:
            return
        if len(self._last) > 1000:
            self._last.clear()
        self._last[sentence] = now
        with suppress(OSError):
            self.path.parent.mkdir(parents=True, exist_ok=True)
            mode = "w" if self.path.exists() and self.path.stat().st_size > LARGEST else "a"
            with self.path.open(mode, encoding="utf-8") as log:
                log.write(f"{time.strftime('%Y-%m-%d %H:%M:%S')} {' '.join(sentence.split())}\n")
