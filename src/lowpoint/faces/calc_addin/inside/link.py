"""The way from a method of the add-in to its function: in the office's own Python, or through a helper process."""

from __future__ import annotations

import sys
import threading
import time
from collections.abc import Callable
from importlib.util import find_spec
from pathlib import Path
from typing import Any

from .helper import Helper, HelperError
from .journal import Journal
from .settings import FILE, FOLDER, LOG, REMEDY, Settings, SettingsError
from .values import CRASHED

__all__ = ["PLAIN_NAMES", "Link", "shared_link"]

PLAIN_NAMES = "plain names"
"""Called like a function, with the path of a saved book."""

PAUSE = 10.0
"""Seconds until something that cannot work (no settings, no package) is tried again."""

Call = Callable[[tuple[Any, ...]], Any]


class Link:
    """Made once in the office; ``folder`` holds settings and log, ``version`` and ``fingerprint`` are the add-in's."""

    def __init__(self, folder: Path, version: str, fingerprint: str) -> None:
        self.journal = Journal(folder / LOG)
        self.calls: dict[str, Call] = {}
        self._folder = folder
        self._made_for = (version, fingerprint)
        self._problem = ""
        self._retry = 0.0
        self._helper: Helper | None = None
        self._lock = threading.Lock()

    def call(self, name: str, arguments: tuple[Any, ...]) -> Any:
        """One call: never raises. A crash is #VALUE! here and a sentence in the log."""
        try:
            answer = self.calls.get(name) or self._connect(name)
            if answer is None:
                return self._refusal(name)
            return answer(arguments)
        except HelperError as died:
            self.journal.write(str(died))
            if died.lasting:
                self._give_up(str(died))
                return self._refusal(name)
        except Exception as bug:
            self.journal.write(f"{name}: {type(bug).__name__}: {bug}")
        return CRASHED

    def close(self) -> None:
        """End the helper process, if there is one; the office ends it by closing its end of the pipe."""
        self.calls.clear()
        if self._helper is not None:
            self._helper.stop()
            self._helper = None

    def _refusal(self, name: str) -> Any:
        """Nothing is computed with the wrong package, or none: the cell shows #VALUE!, LP_WHY the reason."""
        return self._problem if name == "LP_WHY" else CRASHED

    def _give_up(self, sentence: str) -> None:
        self.calls.clear()
        self._problem, self._retry = sentence, time.monotonic() + PAUSE
        self.journal.write(sentence)

    def _connect(self, name: str) -> Call | None:
        """Find the functions, at the first call and a while after a failure."""
        with self._lock:
            if name not in self.calls and time.monotonic() >= self._retry:
                try:
                    self._open(Settings.read(self._folder / FILE))
                except (SettingsError, HelperError) as problem:
                    self._give_up(str(problem))
            return self.calls.get(name)

    def _open(self, settings: Settings) -> None:
        if settings.mode == "auto" and settings.release == sys.version_info[:2]:
            try:
                return self._open_here(settings)
            except ImportError as missing:
                self.journal.write(f"Lowpoint cannot be loaded into the office ({missing}); a helper process is used.")
        self.close()
        self._helper = helper = Helper(settings, lambda greeting: self._check(greeting, settings))
        helper.start()
        self.calls = {name: _through(helper, name, self._lock) for name in helper.greeting["names"]}

    def _open_here(self, settings: Settings) -> None:
        # At the end: the office's own modules stay the first to be found.
        sys.path += [path for path in settings.paths if path not in sys.path]
        _refuse_another_numpy(settings.paths)
        from lowpoint.faces.calc_addin import answers

        self._check(answers.greeting(), settings)
        self.calls = answers.calls()

    def _check(self, greeting: dict[str, Any], settings: Settings) -> None:
        """The add-in and the package must be of one making: arguments could have changed their places."""
        version = self._made_for[0]
        if (greeting["version"], greeting["fingerprint"]) == self._made_for:
            return
        other = greeting["version"] if greeting["version"] != version else f"another {version}"
        raise HelperError(
            f"The add-in was made by Lowpoint {version}, but the package of {settings.python} is {other}; "
            f"nothing is computed. {REMEDY}",
            lasting=True,
        )


def _refuse_another_numpy(paths: tuple[str, ...]) -> None:
    """The package and what it needs were installed with one NumPy; beside another, calls could fail one by one."""
    spec = find_spec("numpy")
    if spec is None or spec.origin is None:
        raise ImportError("there is no numpy in its paths")
    found = Path(spec.origin).resolve()
    if not any(found.is_relative_to(Path(path).resolve()) for path in paths):
        raise ImportError(f"the office has a numpy of its own in {found.parent}")


_shared: list[Link] = []


def shared_link(context: Any) -> Link:
    """The one link of this office, which its components share; settings and log are in its profile."""
    import uno  # type: ignore[import-not-found]  # there in the office alone, as is what the build makes

    from .generated import FINGERPRINT, VERSION  # type: ignore[import-not-found]

    if not _shared:
        paths = context.ServiceManager.createInstanceWithContext("com.sun.star.util.PathSubstitution", context)
        user = uno.fileUrlToSystemPath(paths.substituteVariables("$(user)", True))
        _shared.append(Link(Path(user) / FOLDER, VERSION, FINGERPRINT))
    return _shared[0]


def _through(helper: Helper, name: str, lock: threading.Lock) -> Call:
    def call(arguments: tuple[Any, ...]) -> Any:
        with lock:
            return helper.call(name, arguments)

    return call
