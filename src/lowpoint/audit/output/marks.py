"""Where the elements of an XML part begin and end in its bytes, so that something can be put between them.

What is not touched keeps every byte: a part that is parsed and written anew would lose the order of its attributes,
its prefixes and whatever its first writer put there for itself.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from xml.etree.ElementTree import Element
from xml.parsers import expat
from xml.sax.saxutils import escape, quoteattr

from lowpoint.book.parts import local_name

__all__ = ["Edits", "Mark", "UnfitError", "ascii_xml", "marks", "with_prefix"]

_TAG = re.compile(rb"<[^>\"']*(?:(?:\"[^\"]*\"|'[^']*')[^>\"']*)*>")


class UnfitError(Exception):
    """A package that is built in a way that nothing can be added to with certainty; the text says in what way."""


@dataclass(slots=True)
class Mark:
    """One element: its name without prefix, and the places of its start tag and its end tag."""

    name: str
    prefix: str
    """With its colon; empty where there is none."""
    attributes: dict[str, str]
    start: int
    inner: int
    """Behind the start tag."""
    close: int = -1
    """Where the end tag begins; ``inner`` of an empty-element tag."""
    end: int = -1
    children: list[Mark] = field(default_factory=list)

    @property
    def empty(self) -> bool:
        """Is it written as one tag?"""
        return self.close == self.end

    def child(self, name: str) -> Mark | None:
        """The first child of a name."""
        return next((child for child in self.children if child.name == name), None)

    def walk(self) -> Iterator[Mark]:
        """The element and all that are marked in it."""
        yield self
        for child in self.children:
            yield from child.walk()


def marks(data: bytes, depth: int) -> Mark:
    """The root of a part, its elements marked down to ``depth`` levels below it; UnfitError where that cannot be."""
    if data[:4].startswith((b"\xff\xfe", b"\xfe\xff", b"<\0", b"\0<")):
        raise UnfitError("it is written in UTF-16")
    reader = expat.ParserCreate()
    stack: list[Mark] = []
    level = [0]
    roots: list[Mark] = []

    def begin(name: str, attributes: dict[str, str]) -> None:
        level[0] += 1
        if level[0] > depth + 1:
            return
        place = reader.CurrentByteIndex
        tag = _TAG.match(data, place)
        if tag is None:
            raise UnfitError("an element was not found in its bytes")
        prefix, _, local = name.rpartition(":")
        mark = Mark(local, f"{prefix}:" if prefix else "", attributes, place, tag.end())
        (stack[-1].children if stack else roots).append(mark)
        stack.append(mark)

    def finish(name: str) -> None:
        level[0] -= 1
        if level[0] > depth:
            return
        mark, place = stack.pop(), reader.CurrentByteIndex
        if data[mark.inner - 2 : mark.inner] == b"/>":
            mark.close = mark.end = mark.inner
            return
        mark.close, mark.end = place, data.index(b">", place) + 1

    reader.StartElementHandler, reader.EndElementHandler = begin, finish
    try:
        reader.Parse(data, True)
    except expat.ExpatError as problem:
        raise UnfitError(f"it is no well-formed XML ({problem})") from None
    return roots[0]


class Edits:
    """Insertions and replacements in a part, written in one go; those at one place keep their order."""

    def __init__(self, data: bytes) -> None:
        self.data = data
        self._edits: list[tuple[int, int, bytes]] = []

    def insert(self, place: int, text: str) -> None:
        """Put a text in front of the byte at this place."""
        self.replace(place, place, text)

    def replace(self, start: int, end: int, text: str) -> None:
        """Put a text in the place of these bytes."""
        self._edits.append((start, end, ascii_xml(text)))

    def append(self, mark: Mark, text: str) -> None:
        """Put a text behind the last child of an element."""
        if not mark.empty:
            self.insert(mark.close, text)
            return
        name = f"{mark.prefix}{mark.name}"
        self.replace(mark.inner - 2, mark.inner, f">{text}</{name}>")

    def attribute(self, mark: Mark, name: str, value: str) -> None:
        """Give an attribute of an element another value; one that is not there is left away."""
        tag = self.data[mark.start : mark.inner]
        found = re.search(rb"\s" + name.encode() + rb"\s*=\s*(\"[^\"]*\"|'[^']*')", tag)
        if found:
            self.replace(mark.start + found.start(1) + 1, mark.start + found.end(1) - 1, escape(value))

    def done(self) -> bytes:
        """The new bytes."""
        pieces, place = [], 0
        for start, end, text in sorted(self._edits, key=lambda edit: edit[0]):
            pieces += [self.data[place:start], text]
            place = end
        return b"".join([*pieces, self.data[place:]])


def ascii_xml(text: str) -> bytes:
    """Bytes that mean the same in every encoding that a part may have."""
    return text.encode("ascii", "xmlcharrefreplace")


def with_prefix(element: Element, prefix: str) -> str:
    """An element of one namespace as text, its names under the prefix that the namespace has where it goes."""
    name = f"{prefix}{local_name(element.tag)}"
    attributes = "".join(f" {key}={quoteattr(value)}" for key, value in element.attrib.items())
    inner = escape(element.text or "") if not len(element) else ""
    inner += "".join(with_prefix(child, prefix) for child in element)
    return f"<{name}{attributes}>{inner}</{name}>" if inner else f"<{name}{attributes}/>"
