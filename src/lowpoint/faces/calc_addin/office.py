"""The office on this machine: where it is, which Python it carries, its profile, and its program for extensions."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from lowpoint.errors import LowpointError

__all__ = ["Office", "default_profile", "find_office", "give_to", "owner_of", "refuse_if_open"]

SECONDS = 180
_USUAL = (
    "/usr/lib/libreoffice/program", "/usr/lib64/libreoffice/program", "/opt/libreoffice*/program",
    "/Applications/LibreOffice.app/Contents/MacOS", "C:/Program Files/LibreOffice/program",
)  # fmt: skip
_NOBODY = 65534


@dataclass(frozen=True, slots=True)
class Office:
    """``program`` is the folder that holds ``soffice`` and ``unopkg``."""

    program: Path

    @property
    def python(self) -> tuple[int, int] | None:
        """The version of the Python that runs in the office, as its library names it; None where it has none."""
        for pattern in ("libpyuno.so", "libpyuno.dylib", "pyuno.dll", "pyuno.pyd", "../Frameworks/libpyuno.dylib"):
            library = self.program / pattern
            if library.is_file():
                found = re.search(rb"(?:libpython|Versions/)(3)\.(\d+)|python(3)(\d+)\.dll", library.read_bytes())
                if found:
                    major, minor = (part for part in found.groups() if part)
                    return int(major), int(minor)
        return None

    def unopkg(self, profile: Path, *words: str) -> str:
        """Run the office's own program for extensions on a profile; LowpointError with what it said if it fails."""
        if _is_root():
            return self._unopkg_as_root(profile, words)
        return _run(self._command(profile, words), dict(os.environ))

    def _command(self, profile: Path, words: Sequence[str]) -> list[str]:
        name = "unopkg.com" if sys.platform == "win32" else "unopkg"
        return [str(self.program / name), *words, f"-env:UserInstallation={profile.as_uri()}"]

    def _unopkg_as_root(self, profile: Path, words: Sequence[str]) -> str:
        """The program refuses root: a copy of the profile's extensions is worked on by nobody, and put back whole."""
        with tempfile.TemporaryDirectory(prefix="lowpoint-") as scratch:
            stage = Path(scratch)
            copy = stage / "profile"
            _copy_parts(profile / "user", copy / "user")
            inputs = [_brought(stage, word) for word in words]
            owner = owner_of(profile)
            give_to((_NOBODY, _NOBODY), [stage, *stage.rglob("*")])
            settings = {**os.environ, "HOME": scratch, "TMPDIR": scratch}
            said = _run(self._command(copy, inputs), settings, user=_NOBODY)
            give_to(owner, [copy, *copy.rglob("*")])
            with _replaced(profile / "user"):
                _copy_parts(copy / "user", profile / "user")
            return said


_PARTS = ("uno_packages", "extensions")
"""The folders of a profile that hold its extensions."""


def _copy_parts(source: Path, target: Path) -> None:
    target.mkdir(parents=True, exist_ok=True)
    for part in _PARTS:
        if (source / part).is_dir():
            shutil.copytree(source / part, target / part, symlinks=True, copy_function=_copy_with_owner)


def _copy_with_owner(source: str, target: str) -> None:
    shutil.copy2(source, target)
    state = os.stat(source)
    os.chown(target, state.st_uid, state.st_gid)


@contextmanager
def _replaced(user: Path) -> Iterator[None]:
    """Move the old folders aside, and back if what follows fails."""
    aside = {user / part: user / f"{part}.lowpoint-old" for part in _PARTS if (user / part).exists()}
    for now, old in aside.items():
        shutil.rmtree(old, ignore_errors=True)
        now.rename(old)
    try:
        yield
    except BaseException:
        for part in _PARTS:
            shutil.rmtree(user / part, ignore_errors=True)
        for now, old in aside.items():
            old.rename(now)
        raise
    for old in aside.values():
        shutil.rmtree(old, ignore_errors=True)


def _brought(stage: Path, word: str) -> str:
    """A file that nobody may not be able to reach, copied to where it can be."""
    if not os.path.isfile(word):
        return word
    return str(shutil.copy(word, stage))


def owner_of(profile: Path) -> tuple[int, int]:
    """User and group that a profile belongs to, or would belong to if it were made."""
    there = next(folder for folder in (profile, *profile.parents) if folder.exists())
    state = os.stat(there)
    return state.st_uid, state.st_gid


def give_to(owner: tuple[int, int], paths: Iterable[Path]) -> None:
    """What root makes in a profile belongs to whom the profile belongs to; others make nothing that is not theirs."""
    if _is_root():
        for path in paths:
            os.chown(path, *owner, follow_symlinks=False)


def _is_root() -> bool:
    return getattr(os, "geteuid", lambda: 1)() == 0


def _run(command: Sequence[str], environment: Mapping[str, str], user: int | None = None) -> str:
    as_user = {} if user is None else {"user": user, "group": user, "extra_groups": []}
    # A virtual environment's variables would lead the office's Python astray.
    clean = {name: value for name, value in environment.items() if not name.startswith("PYTHON")}
    try:
        done = subprocess.run(
            command, env=clean, capture_output=True, text=True, errors="replace", timeout=SECONDS, check=False,
            stdin=subprocess.DEVNULL, **as_user,  # type: ignore[call-overload]
        )  # fmt: skip
    except OSError as problem:
        raise LowpointError(command[0], f"cannot be started ({problem.strerror or problem})") from None
    except subprocess.TimeoutExpired:
        raise LowpointError(
            command[0], f"must end within {SECONDS} s", "no end", "Close the office and retry."
        ) from None
    if done.returncode:
        said = " ".join((done.stderr or done.stdout).split()) or f"exit code {done.returncode}"
        raise LowpointError.plain(f"the office refused the add-in: {said[:500]}", exit_code=1)
    return str(done.stdout)


def find_office() -> Office:
    """The LibreOffice of this machine, on the PATH or in a usual place."""
    for name in ("soffice", "libreoffice"):
        found = shutil.which(name)
        if found and _holds_unopkg(Path(found).resolve().parent):
            return Office(Path(found).resolve().parent)
    for pattern in _USUAL:
        root = Path(Path(pattern).anchor)
        if pattern.startswith(("C:",)) and sys.platform != "win32":
            continue
        for program in sorted(root.glob(str(Path(pattern).relative_to(root))), reverse=True):
            if _holds_unopkg(program):
                return Office(program)
    remedy = "Install LibreOffice Calc, or put the folder that holds 'soffice' on the PATH."
    raise LowpointError("calc", "there must be a LibreOffice on this machine", "none", remedy)


def _holds_unopkg(program: Path) -> bool:
    return any((program / name).is_file() for name in ("unopkg", "unopkg.com", "unopkg.bin"))


def default_profile() -> Path:
    """The profile that LibreOffice uses unless told otherwise."""
    if sys.platform == "win32":
        return Path(os.environ.get("APPDATA", Path.home() / "AppData/Roaming")) / "LibreOffice" / "4"
    if sys.platform == "darwin":
        return Path.home() / "Library/Application Support/LibreOffice/4"
    return Path(os.environ.get("XDG_CONFIG_HOME", Path.home() / ".config")) / "libreoffice" / "4"


def refuse_if_open(profile: Path) -> None:
    """An office at work on the profile would not see the change, or undo it."""
    if (profile / ".lock").exists():
        remedy = f"Close the office first; if none is open, delete {profile / '.lock'}."
        raise LowpointError(str(profile), "the profile must not be in use", "a lock file", remedy)
