"""Stopping by a signal, at a moment that suits: never between a finished book and its line in the trail."""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType
from typing import Any

__all__ = ["Stopper"]

_NAMES = ("SIGINT", "SIGTERM", "SIGBREAK", "SIGHUP")
INSISTING = 3
"""So many signals end even what would rather be finished."""


class Stopper:
    """While entered, the signals that ask a program to end raise KeyboardInterrupt in the main thread.

    Inside :meth:`held` the interrupt waits until :meth:`heed` asks for it, unless somebody insists.
    """

    def __init__(self) -> None:
        self.asked = 0
        self._held = 0
        self._before: dict[int, Any] = {}

    def __enter__(self) -> Stopper:
        if threading.current_thread() is threading.main_thread():  # only there may handlers be set
            for name in _NAMES:
                number = getattr(signal, name, None)
                # A signal that was set aside (nohup, a job in the background) stays so.
                if number is not None and signal.getsignal(number) is not signal.SIG_IGN:
                    self._before[number] = signal.signal(number, self._hear)
        return self

    def __exit__(self, *_: object) -> None:
        for number, before in self._before.items():
            signal.signal(number, signal.SIG_DFL if before is None else before)
        self._before.clear()

    @contextmanager
    def held(self) -> Iterator[None]:
        """A piece of work that is finished before an interrupt is heeded."""
        self._held += 1
        try:
            yield
        finally:
            self._held -= 1

    def heed(self) -> None:
        """Raise the KeyboardInterrupt that came in the meantime, if any."""
        if self.asked and not self._held:
            raise KeyboardInterrupt

    def _hear(self, number: int, frame: FrameType | None) -> None:
        self.asked += 1
        if not self._held or self.asked >= INSISTING:
            raise KeyboardInterrupt
