"""The settings that `lowpoint calc install` leaves in the office's profile: which Python has the package, and where."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

__all__ = ["FILE", "FOLDER", "LOG", "REMEDY", "Settings", "SettingsError"]

FOLDER, FILE, LOG = "lowpoint", "calc.json", "calc.log"
"""In the folder `user` of a profile."""
REMEDY = "Run 'lowpoint calc install' and start the office again."
MODES = ("auto", "helper")


class SettingsError(Exception):
    """The settings are missing or broken; the text is the whole sentence."""


@dataclass(frozen=True)
class Settings:
    """``python`` is the user's interpreter, ``release`` its version, ``paths`` where its packages are.

    ``mode``: ``auto`` computes in the office where the versions of Python match, ``helper`` never does.
    """

    python: str
    release: tuple[int, int]
    paths: tuple[str, ...]
    mode: str = "auto"

    def as_text(self) -> str:
        """What :meth:`read` reads."""
        data = {"python": self.python, "release": list(self.release), "paths": list(self.paths), "mode": self.mode}
        return json.dumps(data, indent=1) + "\n"

    @classmethod
    def read(cls, path: Path) -> Settings:
        """The settings in this file, or SettingsError with a sentence for the user."""
        try:
            data = json.loads(path.read_text(encoding="utf-8"))
        except FileNotFoundError:
            raise SettingsError(f"Lowpoint is not set up for this profile: {path} is missing. {REMEDY}") from None
        except (OSError, ValueError) as problem:
            raise SettingsError(f"The settings of Lowpoint in {path} cannot be read ({problem}). {REMEDY}") from None
        found = _checked(data)
        if found is None:
            raise SettingsError(f"The settings of Lowpoint in {path} are incomplete. {REMEDY}")
        return found


def _checked(data: Any) -> Settings | None:
    try:
        python, paths, mode = data["python"], data["paths"], data["mode"]
        major, minor = data["release"]
        fits = isinstance(python, str) and type(major) is type(minor) is int and mode in MODES
        fits = fits and isinstance(paths, list) and all(isinstance(one, str) for one in paths)
    except (TypeError, KeyError, ValueError):
        return None
    return Settings(python, (major, minor), tuple(paths), mode) if fits else None
