"""The texts that cells of a workbook share: one copy each, referred to by number.

A text that stands in many cells is read many times as fast from such a table as from the cells themselves.
"""

from __future__ import annotations

import re
from xml.sax.saxutils import escape

__all__ = ["LONGEST", "PART", "Strings", "clean"]

PART = "xl/sharedStrings.xml"
_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_KIND = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/sharedStrings"
_TYPE = "application/vnd.openxmlformats-officedocument.spreadsheetml.sharedStrings+xml"
_FORBIDDEN = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")
LONGEST = 32_767
"""Characters that a cell can hold."""


def clean(text: str) -> str:
    """A text that a cell can hold: signs that no file may have are spelled out, what is too long is cut."""
    text = _FORBIDDEN.sub(lambda found: f"_x{ord(found[0]):04X}_", text)
    return text if len(text) <= LONGEST else text[: LONGEST - 4] + " ..."


class Strings:
    """The table while a book is written: cells ask for the number of their text, then the part is written."""

    def __init__(self) -> None:
        self._numbers: dict[str, int] = {}

    def number(self, text: str) -> int:
        """The number of a clean text in the table."""
        return self._numbers.setdefault(text, len(self._numbers))

    def part(self) -> bytes:
        """The table as the part of a package."""
        items = "".join(f'<si><t xml:space="preserve">{escape(text)}</t></si>' for text in self._numbers)
        return f'<?xml version="1.0" encoding="UTF-8"?><sst xmlns="{_MAIN}" uniqueCount="{len(self._numbers)}">' \
            f"{items}</sst>".encode()  # fmt: skip

    @staticmethod
    def declared(name: str, part: bytes) -> bytes:
        """A part of the package with the table declared in it, where that is its task."""
        if name == "[Content_Types].xml":
            more = f'<Override PartName="/{PART}" ContentType="{_TYPE}"/></Types>'
            return part.replace(b"</Types>", more.encode())
        if name == "xl/_rels/workbook.xml.rels":
            more = f'<Relationship Type="{_KIND}" Target="/{PART}" Id="rIdStrings"/></Relationships>'
            return part.replace(b"</Relationships>", more.encode())
        return part
