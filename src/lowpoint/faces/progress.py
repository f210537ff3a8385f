"""How far long work is: a bar with the remaining time on a terminal, nothing in a pipe or a file."""

from __future__ import annotations

import sys
from typing import Any, TextIO

__all__ = ["Bar", "progress_bar"]

SOON = 0.5
"""Seconds before a bar appears: short work shows none."""


class Bar:
    """Told of each step as (what, done, total); one line, which goes away at the end.

    A total of 0 means that nobody knows how much there is.
    """

    def __init__(self, stream: TextIO) -> None:
        self.stream = stream
        self.what = ""
        self.bar: Any = None

    def __call__(self, what: str, done: int = 0, total: int = 0) -> None:
        if what != self.what:
            self._begin(what, total)
        if self.bar.total != (total or None):
            self.bar.total = total or None
        self.bar.update(done - self.bar.n)

    def _begin(self, what: str, total: int) -> None:
        from tqdm import tqdm

        self.close()
        self.what = what
        self.bar = tqdm(desc=f"lowpoint: {what}", total=total or None, file=self.stream, leave=False, delay=SOON,
                        dynamic_ncols=True, miniters=1, unit="")  # fmt: skip

    def aside(self) -> None:
        """Make room for a line of something else; the next step shows the bar again."""
        if self.bar is not None:
            self.bar.clear()

    def close(self) -> None:
        """Take the line away."""
        if self.bar is not None:
            self.bar.close()
        self.bar, self.what = None, ""

    def __enter__(self) -> Bar:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()


class _Silent(Bar):
    """For a pipe: says nothing."""

    def __call__(self, what: str, done: int = 0, total: int = 0) -> None:
        pass


def progress_bar() -> Bar:
    """The bar for standard error: silent where that is no terminal."""
    return Bar(sys.stderr) if sys.stderr.isatty() else _Silent(sys.stderr)
