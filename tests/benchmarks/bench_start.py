"""Start-up: ``lowpoint --version`` against a bare interpreter."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Iterator

from figures import Figure, median_of


def figures(quick: bool) -> Iterator[Figure]:
    times = 5 if quick else 15
    bare = median_of(times, lambda: subprocess.run([sys.executable, "-c", "pass"], check=True))
    version = median_of(times, lambda: subprocess.run(
        [sys.executable, "-m", "lowpoint", "--version"], check=True, stdout=subprocess.DEVNULL))  # fmt: skip
    yield Figure("bare interpreter", bare * 1e3, "ms")
    yield Figure("lowpoint --version", version * 1e3, "ms", at_most=2 * bare * 1e3 + 100.0)
