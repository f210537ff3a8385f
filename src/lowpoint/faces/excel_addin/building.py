"""The add-in as a file: the container that xlwings ships, its VBA replaced by ours, the same bytes each time."""

from __future__ import annotations

import io
import tempfile
import zipfile
from collections.abc import Mapping
from importlib.resources import files
from pathlib import Path

from lowpoint import __version__
from lowpoint.errors import LowpointError
from lowpoint.faces.excel_addin.outline import NAME, maker
from lowpoint.faces.excel_addin.vba import OPENING, modules
from lowpoint.faces.excel_addin.wants import Versions, installed, need

__all__ = ["build", "made_with"]

_TEMPLATE = "quickstart_addin.xlam"
_PROPERTIES = "docProps/core.xml"
_BOOK_MODULE = "ThisWorkbook"
_LONG_AGO = (1980, 1, 1, 0, 0, 0)


def build(python: str, versions: Versions = installed) -> bytes:
    """The bytes of the add-in that asks ``python``, a path on the machine it is meant for."""
    found = need(versions)
    template = files("xlwings") / _TEMPLATE
    if not template.is_file():
        must = f"must have the add-in template {_TEMPLATE}"
        raise LowpointError("xlwings", must, found["xlwings"], "Install xlwings again, and retry.")
    with tempfile.TemporaryDirectory(prefix="lowpoint-") as scratch:
        path = Path(scratch) / f"{NAME}.xlam"
        path.write_bytes(template.read_bytes())
        _replace_vba(path, modules(python, found["xlwings"]))
        return _packed(path.read_bytes(), found["xlwings"])


def made_with(content: bytes) -> str | None:
    """What made the add-in and for which xlwings, as :func:`build` noted it; None for another file."""
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as archive:
            text = archive.read(_PROPERTIES).decode("utf-8", "replace")
    except (zipfile.BadZipFile, KeyError):
        return None
    _, found, rest = text.partition("<cp:keywords>")
    return rest.partition("</cp:keywords>")[0] if found else None


def _replace_vba(path: Path, ours: Mapping[str, str]) -> None:
    """Nothing of the template's own VBA stays: some of it could be called from the cells of any book."""
    from pyopenvba import ExcelFile, VBAModuleKind, check_file

    with ExcelFile(path) as book:
        project = book.vba_project()
        for module in list(project.modules):
            if module.kind is VBAModuleKind.standard or module.name == "Dictionary":
                project.delete_module(module.name)
        for name, text in ours.items():
            project.add_module(name, text.replace("\n", "\r\n"))
        opening = project.get_module(_BOOK_MODULE)
        opening.body = OPENING.replace("\n", "\r\n")
        book.save()
    problems = [str(issue) for issue in check_file(path).issues]
    if problems:
        raise LowpointError("the add-in", "must be a whole project of VBA", "; ".join(problems))


def _packed(content: bytes, xlwings: str) -> bytes:
    """The same parts with our properties and no times; uncompressed, for a compressor's bytes depend on its version."""
    sink = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(content)) as source, zipfile.ZipFile(sink, "w", zipfile.ZIP_STORED) as target:
        for member in source.infolist():
            data = source.read(member)
            entry = zipfile.ZipInfo(member.filename, _LONG_AGO)
            entry.create_system = 3
            entry.external_attr = 0o644 << 16
            target.writestr(entry, _properties(xlwings).encode() if member.filename == _PROPERTIES else data)
    return sink.getvalue()


def _properties(xlwings: str) -> str:
    """What Excel's list of add-ins shows, and what `lowpoint excel status` reads."""
    return (
        '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'
        '<cp:coreProperties xmlns:cp="http://schemas.openxmlformats.org/package/2006/metadata/core-properties"'
        ' xmlns:dc="http://purl.org/dc/elements/1.1/">'
        "<dc:title>Lowpoint functions</dc:title><dc:creator>The Lowpoint developers</dc:creator>"
        f"<cp:keywords>{maker()} xlwings {xlwings}</cp:keywords>"
        f"<dc:description>The LP_ functions of Lowpoint {__version__}.</dc:description></cp:coreProperties>"
    )
