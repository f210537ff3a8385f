"""A copy of a vendor's workbook with notes and added sheets; every part that need not change keeps its bytes.

What changes: the list of sheets and its relations, the list of content types, the styles (ours stand behind his), and
of a sheet with notes the mark of its drawing of notes, its relations, and its own notes where it has some.
"""

from __future__ import annotations

import io
import posixpath
import re
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any
from xml.sax.saxutils import quoteattr

from lowpoint.audit.output.comments import boxes, comments, more_boxes, more_comments
from lowpoint.audit.output.marks import Edits, Mark, UnfitError, marks
from lowpoint.audit.output.styles import grafted, restyled
from lowpoint.book.package import Package, Sheet
from lowpoint.book.parts import CONTENT_TYPES

__all__ = ["copied", "unfit"]

OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
RELATIONS = "http://schemas.openxmlformats.org/package/2006/relationships"
_SHEET = "application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"
_COMMENTS = "application/vnd.openxmlformats-officedocument.spreadsheetml.comments+xml"
_DRAWING = "application/vnd.openxmlformats-officedocument.vmlDrawing"
_BEHIND = frozenset({"legacyDrawingHF", "drawingHF", "picture", "oleObjects", "controls", "webPublishItems",
                     "tableParts", "extLst", "AlternateContent"})  # fmt: skip
"""What stands behind the drawing of notes in a sheet."""


def unfit(package: Package) -> str:
    """Why a book cannot be copied with additions; empty for one that can."""
    if package.signed:
        return "it is signed, and no signature outlives a change"
    if package.has_macros or package.macro_enabled:
        return "it holds macros, which are not handed on"
    if package.template:
        return "it is a template"
    if package.strict:
        return "it is of the strict variant"
    if any(name.lower().startswith("xl/revisions/") for name in package.names):
        return "it is shared, with a log of its changes"
    return ""


def copied(package: Package, book: Any, notes: Mapping[str, Mapping[str, str]]) -> bytes:
    """The package with the sheets of an openpyxl book behind its own, and notes by title of the sheet and cell.

    UnfitError where it is built in a way that nothing can be added to with certainty.
    """
    reason = unfit(package)
    if reason:
        raise UnfitError(reason)
    copy = _Copy(package)
    copy.take_sheets(book)
    for title, cells in notes.items():
        copy.take_notes(package.sheet(title), cells)
    return copy.packed()


@dataclass
class _Copy:
    """The changes to a package as they gather."""

    package: Package
    changed: dict[str, bytes] = field(default_factory=dict)
    added: dict[str, bytes] = field(default_factory=dict)
    kinds: dict[str, str] = field(default_factory=dict)
    """Content types of added parts."""

    def packed(self) -> bytes:
        self._declare()
        return self.package.packed(self.changed, added=self.added)

    # --- sheets

    def take_sheets(self, book: Any) -> None:
        raw = io.BytesIO()
        book.save(raw)
        with zipfile.ZipFile(raw) as ours:
            styles, by = grafted(self.package.read(self._styles()), ours.read("xl/styles.xml"))
            self.changed[self._styles()] = styles
            parts = [ours.read(f"xl/worksheets/sheet{place}.xml") for place in range(1, len(book.worksheets) + 1)]
        lines = []
        number = max(sheet.sheet_id for sheet in self.package.sheets) + 1
        for step, (sheet, part) in enumerate(zip(book.worksheets, parts, strict=True)):
            name = self._add("xl/worksheets/sheet{}.xml", restyled(part, by), _SHEET)
            link = self._relate(self.package.main, "worksheet", name)
            lines.append((sheet.title, number + step, link))
        self._list_sheets(lines)

    def _styles(self) -> str:
        for relation in self.package.relations(self.package.main):
            if relation.kind == "styles" and relation.target in self.package:
                return relation.target
        raise UnfitError("it has no styles")

    def _list_sheets(self, lines: list[tuple[str, int, str]]) -> None:
        part = self.package.read(self.package.main)
        root = marks(part, 2)
        home = root.child("sheets")
        if home is None:
            raise UnfitError("its list of sheets was not found")
        edits, p = Edits(part), root.prefix
        edits.append(home, "".join(
            f'<{p}sheet xmlns:r="{OFFICE}" name={quoteattr(title)} sheetId="{number}" r:id="{link}"/>'
            for title, number, link in lines))  # fmt: skip
        self.changed[self.package.main] = edits.done()

    # --- notes

    def take_notes(self, sheet: Sheet, notes: Mapping[str, str]) -> None:
        relations = self.package.relations(sheet.path)
        texts = next((r.target for r in relations if r.kind == "comments" and r.target in self.package), None)
        root = marks(self.package.read(sheet.path), 1)
        drawing = self._drawing(sheet, root)
        had: frozenset[str] = frozenset()
        if texts is None:
            name = self._add("xl/comments{}.xml", comments(notes), _COMMENTS)
            self._relate(sheet.path, "comments", name)
        else:
            self.changed[texts], had = more_comments(self.package.read(texts), notes)
        fresh = {cell: text for cell, text in notes.items() if cell not in had}
        if drawing is not None:
            self.changed[drawing] = more_boxes(self.package.read(drawing), fresh)
            return
        name = self._add("xl/drawings/vmlDrawing{}.vml", boxes(notes), _DRAWING)
        link = self._relate(sheet.path, "vmlDrawing", name)
        part = self.package.read(sheet.path)
        edits = Edits(part)
        edits.insert(_behind(root), f'<{root.prefix}legacyDrawing xmlns:r="{OFFICE}" r:id="{link}"/>')
        self.changed[sheet.path] = edits.done()

    def _drawing(self, sheet: Sheet, root: Mark) -> str | None:
        """The part of the vendor's drawing of notes; None where the sheet has none."""
        mark = root.child("legacyDrawing")
        if mark is None:
            return None
        wanted = next((value for key, value in mark.attributes.items() if key.rpartition(":")[2] == "id"), "")
        for relation in self.package.relations(sheet.path):
            if relation.id == wanted and relation.target in self.package:
                return relation.target
        raise UnfitError(f"the drawing of notes of sheet '{sheet.title}' is missing")

    # --- parts, relations, types

    def _add(self, pattern: str, content: bytes, kind: str) -> str:
        """A new part under the first free number."""
        taken = {name.casefold() for name in (*self.package.names, *self.added)}
        number = next(n for n in range(1, len(taken) + 2) if pattern.format(n).casefold() not in taken)
        name = pattern.format(number)
        self.added[name], self.kinds[name] = content, kind
        return name

    def _relate(self, source: str, kind: str, target: str) -> str:
        """A relation from a part to a new one; gives its id."""
        folder, base = posixpath.split(source)
        name = posixpath.join(folder, "_rels", f"{base}.rels")
        blank = (
            f'<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n<Relationships xmlns="{RELATIONS}"/>'.encode()
        )
        held = self._in_package(name)
        home = name if held is None else held
        part = self._now(home) or blank
        used = set(re.findall(rb"""\bId\s*=\s*["']([^"']*)["']""", part))
        link = next(f"rIdAudit{n}" for n in range(1, len(used) + 2) if f"rIdAudit{n}".encode() not in used)
        edits, root = Edits(part), marks(part, 1)
        edits.append(root, f'<{root.prefix}Relationship Id="{link}" Type="{OFFICE}/{kind}" Target="/{target}"/>')
        (self.added if held is None else self.changed)[home] = edits.done()
        return link

    def _in_package(self, name: str) -> str | None:
        return next((n for n in self.package.names if n.casefold() == name.casefold()), None)

    def _now(self, name: str) -> bytes:
        """A part as it stands after the changes so far; empty where there is none."""
        for parts in (self.changed, self.added):
            if name in parts:
                return parts[name]
        return self.package.read(name) if name in self.package else b""

    def _declare(self) -> None:
        part = self.package.read(CONTENT_TYPES)
        root = marks(part, 1)
        edits, p = Edits(part), root.prefix
        known = {name: kind for name, kind in self.kinds.items() if self.package.types.of(name) != kind}
        edits.append(root, "".join(f'<{p}Override PartName="/{name}" ContentType="{kind}"/>'
                                   for name, kind in known.items()))  # fmt: skip
        self.changed[CONTENT_TYPES] = edits.done()


def _behind(root: Mark) -> int:
    """Where the mark of a drawing of notes belongs in a sheet: in front of what must follow it."""
    data = next((place for place, mark in enumerate(root.children) if mark.name == "sheetData"), None)
    if data is None or root.empty:
        raise UnfitError("a sheet without rows has nothing to note")
    following = (mark for mark in root.children[data + 1 :] if mark.name in _BEHIND)
    return next((mark.start for mark in following), root.close)
