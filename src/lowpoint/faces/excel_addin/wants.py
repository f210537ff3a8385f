"""What the add-in is built with: xlwings and pyOpenVBA, and the versions it was proved with."""

from __future__ import annotations

from collections.abc import Callable
from importlib import metadata

from lowpoint.errors import LowpointError

__all__ = ["TESTED", "WANTED", "installed", "need"]

TESTED = "0.37.8"
"""The version of xlwings that the tests run with."""
WANTED = {"xlwings": ((0, 37, 8), (0, 38)), "pyOpenVBA": ((6, 5), (6, 6))}
"""From (included) and up to (excluded): the call path and the writer of VBA are proved for these."""

Versions = Callable[[str], str | None]


def installed(distribution: str) -> str | None:
    """The version of an installed distribution, None where it is not there."""
    try:
        return metadata.version(distribution)
    except metadata.PackageNotFoundError:
        return None


def need(versions: Versions = installed) -> dict[str, str]:
    """The versions of all that is wanted; LowpointError names the first that is missing or another."""
    return {name: _needed(name, versions(name)) for name in WANTED}


def _needed(name: str, version: str | None) -> str:
    low, high = WANTED[name]
    remedy = "Run \"python -m pip install 'lowpoint[excel]'\" with this Python, and retry."
    if version is None:
        raise LowpointError(name, "must be installed", "no such package", remedy)
    if not low <= _numbers(version) < high:
        asked = f"must be of version {_dotted(low)} or later and before {_dotted(high)}"
        raise LowpointError(name, asked, version, remedy)
    return version


def _numbers(version: str) -> tuple[int, ...]:
    """The leading numbers of a version; what follows them (a1, .dev0) does not matter here."""
    found = []
    for part in version.split("."):
        if not part.isdecimal():
            break
        found.append(int(part))
    return tuple(found)


def _dotted(numbers: tuple[int, ...]) -> str:
    return ".".join(map(str, numbers))
