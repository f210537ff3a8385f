"""What differs between a workbook and its recalculated copy: part by part, and as an office shows the two.

Nothing of the product is used here: masks and comparisons are of bytes and of XML as the formats define them.
Source: ISO/IEC 29500-1, 18.3.1.4 (c), 18.3.1.40 (f), 18.3.1.96 (v); OASIS ODF 1.3 part 3, 9.1.4 (cells).
"""

from __future__ import annotations

import re
import zipfile
from pathlib import Path

from lxml import etree

__all__ = ["Shown", "changed_parts", "masked"]

_CELL = re.compile(rb"<c(\s[^>]*?)?(/>|>(.*?)</c>)", re.DOTALL)
_REF = re.compile(rb'<f\b[^>]*?\sref="([A-Z]+)(\d+)(?::([A-Z]+)(\d+))?"')
_AT = re.compile(rb'\sr="([A-Z]+)(\d+)"')
_TABLE = "{urn:oasis:names:tc:opendocument:xmlns:table:1.0}"
_STYLE = "{urn:oasis:names:tc:opendocument:xmlns:style:1.0}"
_OFFICE = "{urn:oasis:names:tc:opendocument:xmlns:office:1.0}"
_PARAGRAPH = "{urn:oasis:names:tc:opendocument:xmlns:text:1.0}p"
_VALUES = ("}value", "}value-type", "-value")  # the ends of the attributes that hold a value


def changed_parts(before: Path, after: Path) -> set[str]:
    """The parts whose content, or whose mark in the package (date, attributes), differs; order must be the same."""
    with zipfile.ZipFile(before) as old, zipfile.ZipFile(after) as new:
        assert new.namelist() == old.namelist()
        assert new.comment == old.comment
        return {name for name in old.namelist() if _content(old, name) != _content(new, name)}


def _content(package: zipfile.ZipFile, name: str) -> tuple[object, ...]:
    info = package.getinfo(name)
    return package.read(name), info.date_time, info.external_attr, info.extra, info.comment


def masked(sheet: bytes) -> bytes:
    """A worksheet's bytes without what a calculation may change: ``v``, ``t`` and ``vm`` of the cells that hold a
    formula or that an array fills."""
    areas = [
        (_column(c1), int(r1), _column(c2 or c1), int(r2 or r1)) for c1, r1, c2, r2 in _REF.findall(sheet)
    ]  # fmt: skip

    def put(cell: re.Match[bytes]) -> bytes:
        place = _AT.search(cell[1] or b"")
        inside = place is not None and any(
            c1 <= _column(place[1]) <= c2 and r1 <= int(place[2]) <= r2 for c1, r1, c2, r2 in areas
        )
        if b"<f" not in cell[2] and not inside:
            return cell[0]
        head = re.sub(rb'\s(?:t|vm)="[^"]*"', b"", cell[1] or b"")
        return b"<c%b>%b</c>" % (head, re.sub(rb"<v(?:\s[^>]*)?(?:/>|>[^<]*</v>)", b"", cell[3] or b""))

    return _CELL.sub(put, sheet)


def _column(letters: bytes) -> int:
    number = 0
    for letter in letters:
        number = number * 26 + letter - 64
    return number


class Shown:
    """An office's flat file of a workbook: ``lines``, one an element, the results of formulas masked, and ``results``,
    what those cells show, by sheet, row and column from 1.

    The office writes styles and page layouts in another order, with other numbers, each time it opens one and the same
    file, and takes any of the sheets for the base of a validation's address: none of that counts.
    """

    def __init__(self, path: Path) -> None:
        root = etree.parse(str(path), etree.XMLParser(huge_tree=True)).getroot()
        for part in list(root.iter(f"{_OFFICE}meta")):  # dates of saving, and who wrote it
            part.getparent().remove(part)
        self.results: dict[tuple[str, int, int], float | str] = {}
        for table in root.iter(f"{_TABLE}table"):
            if table.getparent().tag == f"{_OFFICE}spreadsheet":
                self._read(table)
        _settle(root)
        self.lines = [_line(item) for item in root.iter(etree.Element)]

    def _read(self, table: etree._Element) -> None:
        """Take the results out of a sheet's cells: of those with a formula, and those that an array fills."""
        row, areas = 1, []
        for line in table.iter(f"{_TABLE}table-row"):
            if next(line.iterancestors(f"{_TABLE}table")) is not table:  # a chart's own copy of its numbers
                continue
            column = 1
            for cell in line:
                high, wide = (
                    int(cell.get(f"{_TABLE}number-matrix-{side}-spanned", "0")) for side in ("rows", "columns")
                )
                if high:
                    areas.append((row, column, row + high, column + wide))
                filled = any(r1 <= row < r2 and c1 <= column < c2 for r1, c1, r2, c2 in areas)
                if filled or cell.get(f"{_TABLE}formula") is not None:
                    self.results[table.get(f"{_TABLE}name"), row, column] = _taken(cell)
                column += int(cell.get(f"{_TABLE}number-columns-repeated", "1"))
            row += int(line.get(f"{_TABLE}number-rows-repeated", "1"))


def _taken(cell: etree._Element) -> float | str:
    """The value of a cell, taken out of it."""
    value: float | str = "".join("".join(p.itertext()) for p in cell.findall(_PARAGRAPH))
    for name in [name for name in cell.attrib if name.endswith(_VALUES)]:
        text = cell.attrib.pop(name)
        value = float(text) if name == f"{_OFFICE}value" else value
    for paragraph in cell.findall(_PARAGRAPH):
        cell.remove(paragraph)
    return value


def _settle(root: etree._Element) -> None:
    """Styles in one order, page layouts at the pages that use them, addresses of validations without their sheet."""
    layouts = {}
    for layout in list(root.iter(f"{_STYLE}page-layout")):
        name = layout.attrib.pop(f"{_STYLE}name")
        layouts[name] = _text(layout)
        layout.getparent().remove(layout)
    for page in root.iter(f"{_STYLE}master-page"):
        page.set(f"{_STYLE}page-layout-name", layouts[page.get(f"{_STYLE}page-layout-name")])
    for styles in root.iter(*(f"{_OFFICE}{kind}styles" for kind in ("", "automatic-", "master-"))):
        styles[:] = sorted(styles, key=_text)
    for validation in root.iter(f"{_TABLE}content-validation"):
        address = validation.get(f"{_TABLE}base-cell-address", "")
        validation.set(f"{_TABLE}base-cell-address", address.rpartition(".")[2])


def _text(element: etree._Element) -> str:
    return "\n".join(_line(item) for item in element.iter(etree.Element))


def _line(item: etree._Element) -> str:
    return f"{item.tag} {sorted(item.attrib.items())} {(item.text or '').strip()} {(item.tail or '').strip()}"
