"""Recalculate or convert a workbook in headless LibreOffice, in a profile of its own that is thrown away."""

from __future__ import annotations

import shutil
import subprocess
import tempfile
from collections.abc import Sequence
from pathlib import Path

import pytest

SOFFICE = shutil.which("soffice") or shutil.which("libreoffice")

needs_office = pytest.mark.skipif(SOFFICE is None, reason="LibreOffice (soffice) is not installed on this machine")

_LOAD = "/org.openoffice.Office.Calc/Formula/Load"
_ALWAYS, _NEVER = 0, 1  # what the two ...RecalcMode settings mean


def _profile(folder: Path, mode: int) -> str:
    """Write a profile that recalculates on load always or never, and give its URL."""
    props = "".join(
        f'<item oor:path="{_LOAD}"><prop oor:name="{name}" oor:op="fuse"><value>{mode}</value></prop></item>'
        for name in ("OOXMLRecalcMode", "ODFRecalcMode")
    )
    settings = folder / "user" / "registrymodifications.xcu"
    settings.parent.mkdir(parents=True)
    settings.write_text(
        '<?xml version="1.0" encoding="UTF-8"?>'
        '<oor:items xmlns:oor="http://openoffice.org/2001/registry" '
        'xmlns:xs="http://www.w3.org/2001/XMLSchema" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">'
        f"{props}</oor:items>",
        encoding="utf-8",
    )
    return folder.as_uri()


def convert(source: Path, out: Path, *, recalculate: bool, kind: str = "xlsx", timeout: float = 120.0) -> Path:
    """Convert ``source`` into the folder ``out`` by LibreOffice, with or without a hard recalculation on load.

    ``kind`` is what follows ``--convert-to`` ("xlsx", "pdf", "csv:..."). Gives the path of the file written.
    """
    return convert_all([source], out, recalculate=recalculate, kind=kind, timeout=timeout)[0]


def convert_all(
    sources: Sequence[Path], out: Path, *, recalculate: bool, kind: str = "xlsx", timeout: float = 240.0
) -> list[Path]:
    """Convert many, whose names differ, in one run of the office. Gives the paths of the files written."""
    if SOFFICE is None:
        pytest.skip("LibreOffice (soffice) is not installed on this machine")
    out.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory(prefix="office-") as scratch:
        profile = _profile(Path(scratch) / "profile", _ALWAYS if recalculate else _NEVER)
        command = [SOFFICE, f"-env:UserInstallation={profile}", "--headless", "--norestore", "--nolockcheck"]
        command += ["--convert-to", kind, "--outdir", str(out), *map(str, sources)]
        done = subprocess.run(command, capture_output=True, text=True, timeout=timeout, check=False)
    targets = [out / f"{source.stem}.{kind.split(':')[0]}" for source in sources]
    missing = [target.name for target in targets if not target.is_file()]
    if missing:
        raise AssertionError(f"LibreOffice wrote no {', '.join(missing)}: {done.stdout[-500:]} {done.stderr[-500:]}")
    return targets


def recalculated(source: Path, out: Path) -> Path:
    """``source`` recalculated in full by LibreOffice and saved as .xlsx in the folder ``out``."""
    return convert(source, out, recalculate=True)
