"""Small makers of workbooks, sound and hostile, for the tests of the input and output layer."""

from __future__ import annotations

import os
import struct
import zipfile
from collections.abc import Callable, Iterator, Mapping
from pathlib import Path

import pytest

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
REL = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006"
XLSX = "application/vnd.openxmlformats-officedocument.spreadsheetml"

CORPUS = Path(os.environ.get("LOWPOINT_CORPUS", os.devnull))
"""The folder of workbooks that a spreadsheet program made: not ours to hand on, so named from outside."""


def corpus() -> list[Path]:
    """The workbooks made by a spreadsheet program; the test skips where they are not at hand."""
    books = sorted(path for path in CORPUS.glob("*.xls*") if path.suffix in (".xlsx", ".xlsm"))
    if not books:
        pytest.skip("the folder of workbooks made elsewhere is not here (set LOWPOINT_CORPUS)")
    return books


def corpus_book(name: str) -> Path:
    """One of them."""
    corpus()
    return CORPUS / name


def sheet_xml(cells: str) -> bytes:
    """A worksheet part around these rows."""
    return f'<?xml version="1.0"?>\n<worksheet xmlns="{MAIN}"><sheetData>{cells}</sheetData></worksheet>'.encode()


def relation_list(*links: tuple[str, str, str]) -> bytes:
    """A list of relationships: (id, last word of the type or a whole type, target)."""
    items = "".join(
        f'<Relationship Id="{key}" Type="{kind if "/" in kind else f"{REL}/{kind}"}" Target="{target}"'
        f"{' TargetMode=' + chr(34) + 'External' + chr(34) if target.startswith('file:') else ''}/>"
        for key, kind, target in links
    )
    return f'<Relationships xmlns="{PACKAGE}/relationships">{items}</Relationships>'.encode()


def parts(main_type: str = f"{XLSX}.sheet.main+xml", frame: str = "") -> dict[str, bytes]:
    """The parts of a small sound workbook: sheet Intake with a number, a formula, a text; ``frame`` goes after it."""
    types = (
        f'<Types xmlns="{PACKAGE}/content-types"><Default Extension="rels" '
        f'ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
        f'<Override PartName="/xl/workbook.xml" ContentType="{main_type}"/>'
        f'<Override PartName="/xl/worksheets/sheet1.xml" ContentType="{XLSX}.worksheet+xml"/></Types>'
    )
    workbook = (
        f'<workbook xmlns="{MAIN}" xmlns:r="{REL}"><sheets><sheet name="Intake" sheetId="1" r:id="rId1"/></sheets>'
        f"{frame}</workbook>"
    )
    row = '<row r="1"><c r="A1"><v>2.5</v></c><c r="B1"><f>A1*2</f><v>5</v></c>'
    row += '<c r="C1" t="inlineStr"><is><t>pump</t></is></c></row>'
    return {
        "[Content_Types].xml": types.encode(),
        "_rels/.rels": relation_list(("rId1", "officeDocument", "xl/workbook.xml")),
        "xl/workbook.xml": workbook.encode(),
        "xl/_rels/workbook.xml.rels": relation_list(("rId1", "worksheet", "worksheets/sheet1.xml")),
        "xl/worksheets/sheet1.xml": sheet_xml(row),
    }


def pack(path: Path, members: Mapping[str, bytes], method: int = zipfile.ZIP_DEFLATED, comment: bytes = b"") -> Path:
    """A zip of these members."""
    with zipfile.ZipFile(path, "w", method) as archive:
        for name, content in members.items():
            archive.writestr(zipfile.ZipInfo(name, (2024, 5, 17, 8, 30, 0)), content, method)
        archive.comment = comment
    return path


def book(folder: Path, name: str = "list.xlsx", **more: bytes) -> Path:
    """A small sound workbook in a folder; ``more`` parts or replacements by name."""
    return pack(folder / name, {**parts(), **more})


def headers(path: Path) -> Iterator[tuple[str, int, int]]:
    """Name, offset of the local header and offset of the central record of every member."""
    with zipfile.ZipFile(path) as archive:
        data, place = path.read_bytes(), archive.start_dir
        for info in archive.infolist():
            yield info.filename, info.header_offset, place
            place += 46 + sum(struct.unpack_from("<3H", data, place + 28))


def patched(path: Path, member: str, edit: Callable[[bytearray, int, int], None]) -> Path:
    """The file with bytes changed by ``edit(data, local offset, central offset)`` for one member."""
    data = bytearray(path.read_bytes())
    local, central = next((at, record) for name, at, record in headers(path) if name == member)
    edit(data, local, central)
    path.write_bytes(data)
    return path


def put(form: str, value: int, *, local: int | None = None, central: int | None = None) -> Callable[..., None]:
    """An edit for :func:`patched`: write a number at these offsets inside the local and the central header."""

    def edit(data: bytearray, at: int, record: int) -> None:
        if local is not None:
            struct.pack_into(form, data, at + local, value)
        if central is not None:
            struct.pack_into(form, data, record + central, value)

    return edit


def compound(*streams: str) -> bytes:
    """What begins like an OLE compound file and lists these streams in its directory."""
    names = b"".join(stream.encode("utf-16-le").ljust(128, b"\0") for stream in streams)
    return b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(504) + names + bytes(512)
