"""Putting the add-in into a profile of the office, asking how it is there, and taking it out again."""

from __future__ import annotations

import errno
import os
import secrets
import sys
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from importlib.util import find_spec
from pathlib import Path
from typing import Any

from lowpoint import __version__
from lowpoint.errors import LowpointError
from lowpoint.faces.calc_addin.bundle import bundle
from lowpoint.faces.calc_addin.inside.settings import FILE, FOLDER, LOG, Settings, SettingsError
from lowpoint.faces.calc_addin.office import find_office, give_to, owner_of, refuse_if_open
from lowpoint.faces.calc_addin.texts import IDENTIFIER

__all__ = ["install", "own_settings", "status", "uninstall"]

PACKAGE_FILE = "lowpoint.oxt"


def own_settings(*, helper: bool = False) -> Settings:
    """This Python, and where it finds the package and what the package needs."""
    paths = [path for path in sys.path if Path(path).name in ("site-packages", "dist-packages") and Path(path).is_dir()]
    spec = find_spec("lowpoint")
    assert spec is not None
    assert spec.origin is not None
    home = str(Path(spec.origin).parent.parent.resolve())
    if home not in paths:
        paths.insert(0, home)
    return Settings(sys.executable, sys.version_info[:2], tuple(paths), "helper" if helper else "auto")


def install(profile: Path, *, helper: bool = False) -> dict[str, Any]:
    """Install or renew the add-in; the settings are put back as they were if the office refuses it."""
    office = find_office()
    if office.python is None:
        remedy = "Install the office's Python (on Debian and Ubuntu: python3-uno), and retry."
        raise LowpointError(str(office.program), "the office must be able to run Python", "none", remedy)
    refuse_if_open(profile)
    with _changed_settings(profile, own_settings(helper=helper)), _package() as package:
        office.unopkg(profile, "add", "--force", "--suppress-license", str(package))
    return status(profile)


def uninstall(profile: Path) -> bool:
    """Take the add-in and its settings out; False where it was not there."""
    office = find_office()
    refuse_if_open(profile)
    there = _installed_version(profile) is not None
    folder = profile / "user" / FOLDER
    left_over = folder.is_dir()
    with _denied(profile):
        # Asked first: an add-in must not be taken out whose settings then stay behind.
        if left_over and not os.access(folder, os.W_OK):
            raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))
        if there:
            office.unopkg(profile, "remove", IDENTIFIER)
        for name in (FILE, LOG):
            (folder / name).unlink(missing_ok=True)
        with suppress(OSError):
            folder.rmdir()
    return there or left_over


def status(profile: Path) -> dict[str, Any]:
    """What stands in the profile, and how the functions would be computed."""
    office = find_office()
    version = _installed_version(profile)
    found: dict[str, Any] = {
        "profile": str(profile), "office": str(office.program), "office_python": _dotted(office.python),
        "package": __version__, "addin": version, "python": None, "runs": None, "problem": None,
        "log": str(profile / "user" / FOLDER / LOG),
    }  # fmt: skip
    if version is None:
        return found
    try:
        settings = Settings.read(profile / "user" / FOLDER / FILE)
    except SettingsError as problem:
        return {**found, "problem": str(problem)}
    found["python"] = f"{settings.python} ({_dotted(settings.release)})"
    same = settings.mode == "auto" and settings.release == office.python
    found["runs"] = "in the office" if same else "in a helper process"
    if not Path(settings.python).exists():
        found["problem"] = f"There is no Python at {settings.python}. Run 'lowpoint calc install' again."
    elif version != __version__:
        found["problem"] = (
            f"The add-in is of Lowpoint {version}, this package of {__version__}. Run 'lowpoint calc install' again."
        )
    return found


def _dotted(release: tuple[int, int] | None) -> str | None:
    return None if release is None else f"{release[0]}.{release[1]}"


def _installed_version(profile: Path) -> str | None:
    """The version of the add-in that a profile holds, read from the office's list, so that an open office may stay."""
    listed = profile / "user" / "uno_packages" / "cache" / "uno_packages.pmap"
    try:
        lines = listed.read_bytes().removeprefix(b"Pmp1\xff").split(b"\n")
    except OSError:
        return None
    # An identifier a line, and a line of what is known of it: folder, file, kind, version, one more.
    for identifier, known in zip(lines[::2], lines[1::2], strict=False):
        if identifier.decode("utf-8", "replace") == IDENTIFIER:
            return known.split(b"\xff")[3].decode("utf-8", "replace") if known.count(b"\xff") > 3 else "unknown"
    return None


@contextmanager
def _package() -> Iterator[Path]:
    """The add-in as a file, for the office to read."""
    with tempfile.TemporaryDirectory(prefix="lowpoint-") as scratch:
        path = Path(scratch) / PACKAGE_FILE
        path.write_bytes(bundle())
        yield path


@contextmanager
def _changed_settings(profile: Path, settings: Settings) -> Iterator[None]:
    """Write the settings; what was there before comes back if the body fails."""
    path = profile / "user" / FOLDER / FILE
    with _denied(profile):
        made = [folder for folder in (path.parent, *path.parent.parents) if not folder.exists()]
        before = path.read_bytes() if path.exists() else None
    try:
        with _denied(profile):
            owner = owner_of(profile)
            path.parent.mkdir(parents=True, exist_ok=True)
            _write(path, settings.as_text().encode())
            give_to(owner, [path, *made])
            yield
    except BaseException:
        with suppress(OSError):
            if before is not None:
                _write(path, before)
            else:
                path.unlink(missing_ok=True)
        for folder in made:
            with suppress(OSError):
                folder.rmdir()
        raise


def _write(path: Path, content: bytes) -> None:
    temporary = path.with_name(f"{path.name}.{secrets.token_hex(4)}")
    try:
        temporary.write_bytes(content)
        os.replace(temporary, path)
    finally:
        temporary.unlink(missing_ok=True)


@contextmanager
def _denied(profile: Path) -> Iterator[None]:
    """What the system does not permit, in a sentence."""
    try:
        yield
    except OSError as problem:
        what = problem.strerror or str(problem)
        remedy = "Name a profile that you may write with --profile, or run this as the user whose office it is."
        raise LowpointError(str(profile), "the profile must be writable", what, remedy) from None
