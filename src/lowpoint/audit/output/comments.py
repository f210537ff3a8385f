"""Notes on the cells of a vendor's sheet: his own notes stay, ours stand beside them or below them.

A note has two halves in a package: its text in a part of comments, and its box in a drawing of the older kind (VML).
Source: ISO/IEC 29500-1 (comments), ISO/IEC 29500-4 (VML).
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from xml.sax.saxutils import escape, quoteattr

from lowpoint.audit.output.marks import Edits, Mark, UnfitError, marks
from lowpoint.audit.output.noting import AUTHOR
from lowpoint.book.refs import area
from lowpoint.styling.strings import clean

__all__ = ["boxes", "comments", "more_boxes", "more_comments"]

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_VML = 'xmlns:v="urn:schemas-microsoft-com:vml" xmlns:o="urn:schemas-microsoft-com:office:office" ' \
    'xmlns:x="urn:schemas-microsoft-com:office:excel"'  # fmt: skip
_KIND = (
    f'<v:shapetype {_VML} id="_x0000_t202" coordsize="21600,21600" o:spt="202" path="m,l,21600r21600,l21600,xe">'
    '<v:stroke joinstyle="miter"/><v:path gradientshapeok="t" o:connecttype="rect"/></v:shapetype>'
)
_SHAPE_ID = re.compile(rb"_x0000_s(\d{1,9})\b")
_END = re.compile(rb"</(?:\w+:)?xml\s*>\s*$")
FIRST = 1025
"""Number of the first shape of a sheet."""
WIDE, CHARACTERS, LEAST, MOST = 5, 46, 4, 24
"""Columns of a box, characters that a line of it holds, rows of it."""
LAST_COLUMN, LAST_ROW = 16_383, 1_048_575
"""Of a sheet, from 0."""


def comments(notes: Mapping[str, str]) -> bytes:
    """A new part with our notes, by cell (``C7``)."""
    items = "".join(_comment(cell, text, 0, "") for cell, text in _ordered(notes))
    return (f'<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n<comments xmlns="{MAIN}"><authors>'
            f"<author>{AUTHOR}</author></authors><commentList>{items}</commentList></comments>").encode()  # fmt: skip


def more_comments(part: bytes, notes: Mapping[str, str]) -> tuple[bytes, frozenset[str]]:
    """The vendor's part with our notes behind his, and the cells that had one of his: there ours follows his text."""
    root = marks(part, 4)
    authors, listed = root.child("authors"), root.child("commentList")
    if authors is None or listed is None:
        raise UnfitError("its part of comments has no authors, or no list")
    edits, prefix = Edits(part), root.prefix
    edits.append(authors, f"<{prefix}author>{AUTHOR}</{prefix}author>")
    his = {mark.attributes.get("ref", ""): mark for mark in listed.children if mark.name == "comment"}
    threads = _threads(part, authors)
    fresh = ""
    for cell, text in _ordered(notes):
        if cell in his:
            if his[cell].attributes.get("authorId") in threads:
                raise UnfitError(f"{cell} has a thread of comments, in which a note of ours would not be seen")
            _below(edits, his[cell], text, prefix)
        else:
            fresh += _comment(cell, text, len(authors.children), prefix)
    edits.append(listed, fresh)
    return edits.done(), frozenset(his) & frozenset(notes)


def _threads(part: bytes, authors: Mark) -> set[str]:
    """Numbers of the authors that stand for a thread of comments, whose text is kept elsewhere."""
    names = (part[mark.inner : mark.close].strip() for mark in authors.children)
    return {str(number) for number, name in enumerate(names) if name.startswith(b"tc=")}


def boxes(notes: Mapping[str, str]) -> bytes:
    """A new drawing with the boxes of our notes."""
    shapes = "".join(_box(cell, text, FIRST + step) for step, (cell, text) in enumerate(_ordered(notes)))
    layout = '<o:shapelayout v:ext="edit"><o:idmap v:ext="edit" data="1"/></o:shapelayout>'
    return f"<xml {_VML}>{layout}{_KIND}{shapes}</xml>".encode("ascii", "xmlcharrefreplace")


def more_boxes(part: bytes, notes: Mapping[str, str]) -> bytes:
    """The vendor's drawing with the boxes of our notes behind his. It need not be XML: programs write it loosely."""
    end = _END.search(part)
    if end is None:
        raise UnfitError("its drawing of notes has no end")
    first = max([FIRST - 1, *(int(found) for found in _SHAPE_ID.findall(part))]) + 1
    shapes = "".join(_box(cell, text, first + step) for step, (cell, text) in enumerate(_ordered(notes)))
    kind = "" if b'"_x0000_t202"' in part else _KIND
    return part[: end.start()] + f"{kind}{shapes}".encode("ascii", "xmlcharrefreplace") + part[end.start() :]


def _ordered(notes: Mapping[str, str]) -> list[tuple[str, str]]:
    """By row and column."""
    return sorted(notes.items(), key=lambda note: _place(note[0]))


def _place(cell: str) -> tuple[int, int]:
    found = area(cell)
    if found is None:
        raise ValueError(f"{cell} is no cell")
    return found.r1, found.c1


def _comment(cell: str, text: str, author: int, prefix: str) -> str:
    runs = _runs(f"{AUTHOR}\n", text, prefix)
    p = prefix
    return f'<{p}comment ref={quoteattr(cell)} authorId="{author}"><{p}text>{runs}</{p}text></{p}comment>'


def _runs(head: str, text: str, prefix: str) -> str:
    """The text of a note under its author, in the house's face."""
    return _run(head, prefix, bold=True) + _run(text, prefix)


def _run(text: str, p: str, *, bold: bool = False) -> str:
    look = f'<{p}rPr>{f"<{p}b/>" if bold else ""}<{p}sz val="9"/><{p}rFont val="Arial"/></{p}rPr>'
    return f'<{p}r>{look}<{p}t xml:space="preserve">{escape(clean(text))}</{p}t></{p}r>'


def _below(edits: Edits, his: Mark, text: str, prefix: str) -> None:
    """Put our text below his in one note; a plain text of his becomes a run, word for word."""
    home = his.child("text")
    if home is None:
        raise UnfitError(f"its note on {his.attributes.get('ref', '')} has no text")
    plain = home.child("t")
    if plain is not None:
        edits.insert(plain.start, f"<{prefix}r>")
        edits.insert(plain.end, f"</{prefix}r>")
    runs = _runs(f"\n\n{AUTHOR}\n", text, prefix)
    tail = next((mark for mark in home.children if mark.name in ("rPh", "phoneticPr")), None)
    if tail is None:
        edits.append(home, runs)
    else:
        edits.insert(tail.start, runs)


def _box(cell: str, text: str, number: int) -> str:
    row, column = (x - 1 for x in _place(cell))
    lines = sum(1 + len(line) // CHARACTERS for line in text.splitlines()) + 1
    tall = min(max(LEAST, lines), MOST)
    left, top = min(column + 1, LAST_COLUMN - WIDE), min(max(0, row - 1), LAST_ROW - tall)
    anchor = f"{left}, 15, {top}, 4, {left + WIDE}, 15, {top + tall}, 4"
    return (
        f'<v:shape {_VML} id="_x0000_s{number}" type="#_x0000_t202" '
        "style='position:absolute;margin-left:60pt;margin-top:2pt;width:300pt;height:90pt;z-index:1;visibility:hidden' "
        'fillcolor="#fff9ea" o:insetmode="auto"><v:fill color2="#fff9ea"/><v:shadow on="t" color="black" '
        'obscured="t"/><v:path o:connecttype="none"/><v:textbox style=\'mso-direction-alt:auto\'>'
        "<div style='text-align:left'></div></v:textbox>"
        f'<x:ClientData ObjectType="Note"><x:MoveWithCells/><x:SizeWithCells/><x:Anchor>{anchor}</x:Anchor>'
        f"<x:AutoFill>False</x:AutoFill><x:Row>{row}</x:Row><x:Column>{column}</x:Column></x:ClientData></v:shape>"
    )
