"""The parts inside a workbook package: their types, their relations, and XML read without surprises.

Source: ISO/IEC 29500-1 and -2 (parts, content types, relationships).
"""

from __future__ import annotations

import codecs
import posixpath
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from urllib.parse import unquote
from xml.etree import ElementTree

from lowpoint.book.archive import Archive, DamageError

__all__ = [
    "CONTENT_TYPES",
    "Relation",
    "Types",
    "blanked",
    "local_name",
    "main_part",
    "parse",
    "prolog_verdict",
    "relations",
]

CONTENT_TYPES = "[Content_Types].xml"
PROLOG_LIMIT = 1 << 16

# Encodings in which "<!DOCTYPE" cannot hide from a scan; the packaging rules allow only UTF-8 and UTF-16.
_PLAIN_ENCODINGS = {"utf-8", "utf8", "us-ascii", "ascii", "iso-8859-1", "windows-1252"}
_WIDE_ENCODINGS = {"utf-16", "utf-16le", "utf-16be", "ucs-2", "iso-10646-ucs-2"}
_DECLARED = re.compile(r"""^<\?xml[^>]*?\sencoding\s*=\s*["']([^"']*)["']""")
_NO_ELEMENT = re.compile(rb"<!--.*?-->|<\?.*?\?>|<!\[CDATA\[.*?\]\]>", re.DOTALL)
_SKIPPED = re.compile(r"\s+|<\?.*?\?>|<!--.*?-->", re.DOTALL)


@dataclass(frozen=True, slots=True)
class Relation:
    """One relationship: its id, the last word of its type, the part (or outside place) it leads to."""

    id: str
    kind: str
    target: str
    external: bool


@dataclass(frozen=True, slots=True)
class Types:
    """The package's content types; ``of`` a name is "" when none is given."""

    overrides: Mapping[str, str]
    defaults: Mapping[str, str]

    def of(self, name: str) -> str:
        """The content type of a part; names and endings count without case."""
        ending = name.rpartition(".")[2].lower()
        return self.overrides.get(name.lower(), self.defaults.get(ending, ""))

    @classmethod
    def read(cls, archive: Archive) -> Types:
        """Read them from the package's list."""
        overrides, defaults = {}, {}
        for item in parse(archive.read(archive.entry(CONTENT_TYPES)), CONTENT_TYPES):
            kind = item.get("ContentType", "")
            if local_name(item.tag) == "Override":
                overrides[item.get("PartName", "").lstrip("/").lower()] = kind
            elif local_name(item.tag) == "Default":
                defaults[item.get("Extension", "").lower()] = kind
        return cls(overrides, defaults)


def local_name(tag: object) -> str:
    """A tag or attribute name without its namespace: transitional and strict files then read alike."""
    return tag.rpartition("}")[2] if isinstance(tag, str) else ""


def parse(data: bytes, name: str) -> ElementTree.Element:
    """A part's XML tree; document types, entities and odd encodings are refused before parsing."""
    refusal = prolog_verdict(data[: PROLOG_LIMIT + 1], complete=len(data) <= PROLOG_LIMIT)
    if refusal:
        raise DamageError(f"part {name} {refusal}")
    try:
        return ElementTree.fromstring(data)
    except (ElementTree.ParseError, ValueError, LookupError):
        raise DamageError(f"part {name} is not well-formed XML") from None


def blanked(data: bytes) -> bytes:
    """Well-formed XML with blanks for comments, instructions and CDATA, so that a scan for elements meets no others.

    Every other byte keeps its place. Text in which a comment is opened and never closed would take quadratic time:
    it is for whoever calls to have parsed the part before.
    """
    if b"<!" not in data and data.rfind(b"<?") <= 0:
        return data
    return _NO_ELEMENT.sub(lambda found: b" " * len(found[0]), data)


def prolog_verdict(head: bytes, *, complete: bool) -> str | None:
    """Why XML that begins like this is refused: "" when it is fine, None when more of it must be seen first.

    Only what stands before the first element matters: a document type can be declared nowhere else.
    """
    text = _as_text(head)
    if text is None:
        return "is in an encoding that workbooks may not use"
    place = 0
    while match := _SKIPPED.match(text, place):
        place = match.end()
    rest = text[place:]
    if rest[:9].upper() == "<!DOCTYPE":
        return "declares a document type or entities, which no workbook needs and a hostile one uses"
    if complete or (len(rest) >= 9 and not rest.startswith(("<?", "<!--"))):
        return ""
    return "has an endless header" if len(head) > PROLOG_LIMIT else None


def _as_text(head: bytes) -> str | None:
    """The beginning of an XML part as text, None when its encoding is not one we can look into."""
    if head.startswith((codecs.BOM_UTF32_LE, codecs.BOM_UTF32_BE, b"<\0\0\0", b"\0\0\0<")):
        return None
    for mark, codec in (
        (codecs.BOM_UTF16_LE, "utf-16-le"),
        (codecs.BOM_UTF16_BE, "utf-16-be"),
        (b"<\0", "utf-16-le"),
    ):
        if head.startswith(mark):
            return _declared_among(head.decode(codec, "ignore").lstrip("\ufeff"), _WIDE_ENCODINGS)
    if head.startswith(b"\0<"):
        return _declared_among(head.decode("utf-16-be", "ignore"), _WIDE_ENCODINGS)
    return _declared_among(head.removeprefix(codecs.BOM_UTF8).decode("latin-1"), _PLAIN_ENCODINGS)


def _declared_among(text: str, allowed: set[str]) -> str | None:
    declared = _DECLARED.match(text)
    return None if declared and declared[1].lower() not in allowed else text


def relations(archive: Archive, source: str) -> Iterator[Relation]:
    """The relationships of a part ("" for the package itself); none when it has no list of them."""
    folder, base = posixpath.split(source)
    name = posixpath.join(folder, "_rels", f"{base}.rels")
    if name not in archive:
        return
    for item in parse(archive.read(archive.entry(name)), name):
        external = item.get("TargetMode", "") == "External"
        target = item.get("Target", "")
        kind = item.get("Type", "").rpartition("/")[2]
        yield Relation(item.get("Id", ""), kind, target if external else _resolved(archive, folder, target), external)


def _resolved(archive: Archive, folder: str, target: str) -> str:
    """The member a target means, spelled as the archive spells it where only case or escapes differ."""
    name = posixpath.normpath(posixpath.join("/", folder, target.replace("\\", "/"))).lstrip("/")
    for spelling in (name, unquote(name)):
        if spelling in archive:
            return spelling
    same = (entry.name for entry in archive.entries if entry.name.lower() == name.lower())
    return next(same, name)


def main_part(archive: Archive) -> str | None:
    """The part the package says it is about; None when it says nothing or the part is missing."""
    for relation in relations(archive, ""):
        if relation.kind == "officeDocument" and relation.target in archive:
            return relation.target
    return None
