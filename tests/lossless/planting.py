"""An LP_ formula put into free cells of any writer's workbook, and parts that no writer here makes, in the package."""

from __future__ import annotations

import re
import zipfile
from collections.abc import Mapping
from pathlib import Path

from book.makers import PACKAGE, REL
from lowpoint.book.package import Package

__all__ = ["INPUTS", "SIGMA", "Planted", "altered", "plant", "with_more_parts"]

INPUTS = (10.0, 4.0, 0.03)
SIGMA = (10.0 - 0.03) / (10.0 - 4.0)
"""(p1 - pv) / (p1 - p2), the definition of the upstream cavitation index."""

_ROW = re.compile(rb'<row\b[^>]*?\sr="(\d+)"')


class Planted:
    """A workbook with formulas planted: its path, the sheet's part, and the row they stand in, in columns A to H."""

    def __init__(self, path: Path, part: str, title: str, row: int) -> None:
        self.path, self.part, self.title, self.row = path, part, title, row


def plant(source: Path, target: Path) -> Planted:
    """Put a call, a formula that reads it a text, and two arrays that fill two cells each into the first sheet."""
    sheet = next(sheet for sheet in Package.open(source).sheets if sheet.kind == "worksheet")
    with zipfile.ZipFile(source) as old, zipfile.ZipFile(target, "w") as new:
        for info in old.infolist():
            content = old.read(info)
            if info.filename == sheet.path:
                content, row = _planted(content)
            new.writestr(info, content, zipfile.ZIP_DEFLATED)
    return Planted(target, sheet.path, sheet.title, row)


def _planted(part: bytes) -> tuple[bytes, int]:
    taken = {int(number) for number in _ROW.findall(part)}
    # Below everything, and below the empty rows of tables and merged cells; else in a gap.
    top = max(taken, default=0)
    row = max(top, 200) + 1 if top < 1_000_000 else next(r for r in range(201, top) if {r, r + 1}.isdisjoint(taken))
    cells = "".join(f'<c r="{column}{row}"><v>{value}</v></c>' for column, value in zip("ABC", INPUTS, strict=True))
    cells += f'<c r="D{row}"><f>LP_SIGMA(A{row},B{row},C{row})</f><v>7</v></c>'
    cells += f'<c r="E{row}"><f>D{row}*2+1</f><v>7</v></c><c r="F{row}" t="str"><f>IF(E{row}&gt;4,"rest","act")</f>'
    cells += "<v>?</v></c>"
    for column, text in (("G", f"{{2;3}}*D{row}"), ("H", f"LP_MARGIN({{2;3}},D{row})")):
        cells += f'<c r="{column}{row}"><f t="array" ref="{column}{row}:{column}{row + 1}">{text}</f><v>7</v></c>'
    below = "".join(f'<c r="{column}{row + 1}"><v>7</v></c>' for column in "GH")
    rows = f'<row r="{row}">{cells}</row><row r="{row + 1}">{below}</row>'.encode()
    if b"<sheetData/>" in part:
        return part.replace(b"<sheetData/>", b"<sheetData>" + rows + b"</sheetData>"), row
    after = next((found.start() for found in _ROW.finditer(part) if int(found[1]) > row), part.index(b"</sheetData>"))
    return part[:after] + rows + part[after:], row


def altered(source: Path, target: Path, part: str, old: bytes, new: bytes) -> Path:
    """The workbook with some bytes of a part replaced once."""
    with zipfile.ZipFile(source) as before, zipfile.ZipFile(target, "w") as after:
        for info in before.infolist():
            content = before.read(info)
            if info.filename == part:
                assert old in content, (part, old)
                content = content.replace(old, new, 1)
            after.writestr(info, content, zipfile.ZIP_DEFLATED)
    return target


def with_more_parts(source: Path, target: Path) -> Path:
    """The workbook with custom XML, a package signature, a picture of its first page and a part nobody knows."""
    office = "application/vnd.openxmlformats"
    parts = {
        "customXml/item1.xml": b'<plant xmlns="urn:kestrel-bay"><site>jetty</site></plant>',
        "customXml/itemProps1.xml": b'<ds:datastoreItem ds:itemID="{6D2C3A1E-0000-4000-8000-00000000C0DE}" '
        b'xmlns:ds="http://schemas.openxmlformats.org/officeDocument/2006/customXml"/>',
        "customXml/_rels/item1.xml.rels": _list(("rId1", f"{REL}/customXmlProps", "itemProps1.xml")),
        "_xmlsignatures/origin.sigs": b"",
        "_xmlsignatures/_rels/origin.sigs.rels": _list(
            ("rId1", f"{PACKAGE}/relationships/digital-signature/signature", "sig1.xml")
        ),
        "_xmlsignatures/sig1.xml": b'<Signature xmlns="http://www.w3.org/2000/09/xmldsig#"/>',
        "docProps/thumbnail.bin": bytes(range(256)),
        "odd/unknown.bin": b"\0\1\2" * 99,
    }
    types = (
        '<Default Extension="sigs" ContentType="application/vnd.openxmlformats-package.digital-signature-origin"/>'
        '<Default Extension="bin" ContentType="application/octet-stream"/>'
        '<Override PartName="/customXml/itemProps1.xml" '
        f'ContentType="{office}-officedocument.customXmlProperties+xml"/>'
        f'<Override PartName="/_xmlsignatures/sig1.xml" '
        f'ContentType="{office}-package.digital-signature-xmlsignature+xml"/>'
    )
    links = {
        "_rels/.rels": (f"{PACKAGE}/relationships/digital-signature/origin", "_xmlsignatures/origin.sigs"),
        "xl/_rels/workbook.xml.rels": (f"{REL}/customXml", "../customXml/item1.xml"),
    }
    with zipfile.ZipFile(source) as old, zipfile.ZipFile(target, "w") as new:
        for info in old.infolist():
            new.writestr(info, _linked(info.filename, old.read(info), types, links), zipfile.ZIP_DEFLATED)
        for name, content in parts.items():
            new.writestr(zipfile.ZipInfo(name, (2024, 5, 17, 8, 30, 0)), content, zipfile.ZIP_DEFLATED)
    return target


def _linked(name: str, content: bytes, types: str, links: Mapping[str, tuple[str, str]]) -> bytes:
    if name == "[Content_Types].xml":
        known = b'Extension="bin"' in content  # a type is given once
        more = (
            types.replace('<Default Extension="bin" ContentType="application/octet-stream"/>', "") if known else types
        )
        return content.replace(b"</Types>", more.encode() + b"</Types>")
    if name in links:
        kind, target = links[name]
        link = f'<Relationship Id="rLP9" Type="{kind}" Target="{target}"/>'
        return content.replace(b"</Relationships>", link.encode() + b"</Relationships>")
    return content


def _list(*links: tuple[str, str, str]) -> bytes:
    items = "".join(f'<Relationship Id="{key}" Type="{kind}" Target="{target}"/>' for key, kind, target in links)
    return f'<Relationships xmlns="{PACKAGE}/relationships">{items}</Relationships>'.encode()
