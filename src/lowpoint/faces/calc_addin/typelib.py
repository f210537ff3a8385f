"""The binary type library of the add-in: one interface, written without a development kit.

The layout is that of UNOIDL registry files: a head, then each interface with its methods, then the maps of names
that lead to it, innermost first; a string is written out where it first stands and pointed to afterwards.
Source: the comment on the file format in ``unoidl/source/unoidlprovider.cxx`` of LibreOffice (from memory); the
tests let the office itself read the result.
"""

from __future__ import annotations

import struct
from collections.abc import Sequence
from dataclasses import dataclass

__all__ = ["Method", "type_library"]

ANY = "any"
MANY = "sequence< any >"
"""Types of the add-in's arguments as IDL writes them; with two closing brackets in a row IDL wants a space."""

_MAGIC = b"UNOIDL\xff\0"
_ROOT_FIELDS = 8  # where the root map's offset and size stand
_INTERFACE, _MODULE, _IN = 5, 0, 0
_SEEN = 0x80000000


@dataclass(frozen=True, slots=True)
class Method:
    """One method of the interface: its result is always ``any``."""

    name: str
    arguments: tuple[tuple[str, str], ...]
    raises: tuple[str, ...] = ()


class _Writer:
    def __init__(self) -> None:
        self.bytes = bytearray(_MAGIC + bytes(8))
        self._places: dict[str, int] = {}

    def number(self, value: int) -> None:
        self.bytes += struct.pack("<I", value)

    def text(self, text: str) -> None:
        """A shared string: its length and letters at first, later the place of those."""
        if text in self._places:
            self.number(self._places[text] | _SEEN)
            return
        self._places[text] = len(self.bytes)
        self.number(len(text))
        self.bytes += text.encode("ascii")

    def name(self, text: str) -> int:
        """A name for a map, ended by a zero; gives its place."""
        place = len(self.bytes)
        self.bytes += text.encode("ascii") + b"\0"
        return place


def type_library(modules: Sequence[str], interface: str, methods: Sequence[Method]) -> bytes:
    """The bytes of a registry that holds ``interface`` in nested ``modules``; equal input gives equal bytes."""
    writer = _Writer()
    payload = len(writer.bytes)
    _interface(writer, methods)
    place = writer.name(interface)
    entry = struct.pack("<II", place, payload)
    for module in reversed(modules):
        payload = len(writer.bytes)
        writer.bytes.append(_MODULE)
        writer.number(1)
        writer.bytes += entry
        entry = struct.pack("<II", writer.name(module), payload)
    root = len(writer.bytes)
    writer.bytes += entry
    struct.pack_into("<II", writer.bytes, _ROOT_FIELDS, root, 1)
    return bytes(writer.bytes)


def _interface(writer: _Writer, methods: Sequence[Method]) -> None:
    writer.bytes.append(_INTERFACE)
    writer.number(1)  # one mandatory base
    writer.text("com.sun.star.uno.XInterface")
    writer.number(0)  # no optional bases
    writer.number(0)  # no attributes
    writer.number(len(methods))
    for method in methods:
        writer.text(method.name)
        writer.text(_stored(ANY))
        writer.number(len(method.arguments))
        for name, kind in method.arguments:
            writer.bytes.append(_IN)
            writer.text(name)
            writer.text(_stored(kind))
        writer.number(len(method.raises))
        for exception in method.raises:
            writer.text(exception)


def _stored(kind: str) -> str:
    """A type as the library stores it: ``[]any`` for a sequence of any."""
    kind = kind.replace(" ", "")
    depth = kind.count("sequence<")
    return "[]" * depth + kind[len("sequence<") * depth : len(kind) - depth]
