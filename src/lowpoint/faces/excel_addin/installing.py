"""Putting the add-in where Excel starts it, asking how it is there, taking it out again: one file, or nothing."""

from __future__ import annotations

from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import Any

from lowpoint import __version__
from lowpoint.book.saving import replace_file
from lowpoint.errors import BookError, LowpointError
from lowpoint.faces.excel_addin.building import build, made_with
from lowpoint.faces.excel_addin.machine import Machine
from lowpoint.faces.excel_addin.outline import NAME, maker
from lowpoint.faces.excel_addin.serving import log_path
from lowpoint.faces.excel_addin.wants import need

__all__ = ["install", "status", "uninstall"]

_AGAIN = "Run 'lowpoint excel install' again."


def install(machine: Machine, building: Callable[..., bytes] = build) -> dict[str, Any]:
    """Build the add-in for this Python and put it into Excel's start folder; nothing is written before all is well."""
    folder = _folder(machine)
    if machine.excel() is None:
        raise LowpointError("Excel", "must be installed on this machine", "none", "'lowpoint calc' is for LibreOffice.")
    found = need(machine.versions)
    _library(machine, found["xlwings"])
    content = building(str(machine.python), machine.versions)
    made = [one for one in (folder, *folder.parents) if not one.exists()]
    try:
        folder.mkdir(parents=True, exist_ok=True)
        replace_file(folder / f"{NAME}.xlam", lambda sink: sink.write(content))
    except (OSError, BookError) as problem:
        for one in made:
            with suppress(OSError):
                one.rmdir()
        raise _not_written(folder / f"{NAME}.xlam", problem) from problem
    return status(machine)


def uninstall(machine: Machine) -> bool:
    """Take the add-in out of Excel's start folder; False where it was not there."""
    path = _folder(machine) / f"{NAME}.xlam"
    try:
        path.unlink()
    except FileNotFoundError:
        return False
    except OSError as problem:
        raise _not_written(path, problem) from problem
    with suppress(OSError):
        log_path().unlink()
    return True


def status(machine: Machine) -> dict[str, Any]:
    """What stands in Excel's start folder, and what would keep it from working."""
    path = _folder(machine) / f"{NAME}.xlam"
    made = made_with(path.read_bytes()) if path.is_file() else None
    version, _, rest = (made or "").partition(" ")
    found: dict[str, Any] = {
        "file": str(path), "addin": version or None, "package": __version__, "excel": machine.excel(),
        "excel_bits": machine.excel_bits(), "python": str(machine.python), "xlwings": machine.versions("xlwings"),
        "log": str(log_path()),
    }  # fmt: skip
    return found | {"problem": _problem(machine, path.is_file(), made, rest)}


def _problem(machine: Machine, there: bool, made: str | None, rest: str) -> str | None:
    """The first thing that would keep the functions from being computed, in a sentence."""
    if not there:
        return None
    if made is None:
        return f"The file there is not an add-in of Lowpoint. {_AGAIN}"
    if machine.excel() is None:
        return "Excel is not installed on this machine."
    if not made.startswith(maker() + " "):
        return f"The add-in is of Lowpoint {made.partition(' ')[0]}, this package of {__version__}. {_AGAIN}"
    built_with = rest.rpartition(" ")[2]
    try:
        xlwings = need(machine.versions)["xlwings"]
        if built_with != xlwings:
            return f"The add-in was built with xlwings {built_with}, and {xlwings} is installed. {_AGAIN}"
        _library(machine, xlwings)
    except LowpointError as problem:
        return str(problem)
    if machine.macros_forbidden():
        return "The trusted folders of Excel are switched off (File, Options, Trust Center), so no add-in starts."
    return None


def _folder(machine: Machine) -> Path:
    if not machine.windows:
        raise LowpointError.plain(
            "excel: the add-in is installed on Windows only; here 'lowpoint excel build FILE.xlam' writes it for "
            "another machine, and 'lowpoint calc install' serves LibreOffice."
        )
    folder = machine.start_folder()
    if folder is None:
        must = "must name the folder of this user's settings"
        raise LowpointError("APPDATA", must, "nothing", "Run this from the user's own session.")
    return folder


def _library(machine: Machine, xlwings: str) -> Path:
    """The library through which Excel talks to Python; the VBA looks for it in the same two folders."""
    bits = machine.excel_bits()
    wanted = [f"xlwings{width}-{xlwings}.dll" for width in ((bits,) if bits else (64, 32))]
    folders = (machine.python.parent, machine.python.parent.parent)
    for folder in folders:
        if all((folder / name).is_file() for name in wanted):
            return folder
    remedy = (
        "Install Lowpoint into an environment of its own (python -m venv ...), with \"pip install 'lowpoint[excel]'\", "
        "and install the add-in from there."
    )
    places = f"beside {machine.python} or one folder up"
    raise LowpointError(" and ".join(wanted), f"must be {places}", "no such file", remedy)


def _not_written(path: Path, problem: Exception) -> LowpointError:
    cause = problem.__cause__ if isinstance(problem, BookError) else problem
    if isinstance(cause, PermissionError):
        return LowpointError(str(path), "is open in Excel or closed to this user", remedy="Close Excel and retry.")
    what = getattr(cause, "strerror", None) or str(problem)
    return LowpointError(str(path), f"cannot be changed ({what})", remedy="Nothing was changed.")
