"""A formula as a small tree: what it adds, compares, calls; enough to judge and rewrite it, no more.

The grammar is that of ISO/IEC 29500-1, 18.17; the words come from the engine's own tokenizer, so that both read a
formula alike.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

from .engine import Word, words

__all__ = [
    "Atom",
    "BlockedError",
    "Call",
    "Expression",
    "Group",
    "Item",
    "Operator",
    "Piece",
    "bare_name",
    "is_cell",
    "is_range",
    "parse",
    "spans",
]

_CELL = re.compile(r"\$?[A-Za-z]{1,3}\$?\d{1,7}")
_AREA = re.compile(r"\$?[A-Za-z]{0,3}\$?\d{0,7}:\$?[A-Za-z]{0,3}\$?\d{0,7}")
_PREFIXES = re.compile(r"^(?:_xlfn\.|_xlws\.|_xlpm\.)+", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Atom:
    """A reference, a name or a constant; ``kind`` is range, number, text, logical, error or array."""

    text: str
    kind: str


@dataclass(frozen=True, slots=True)
class Operator:
    """An operator; ``place`` is prefix, infix or postfix."""

    text: str
    place: str


@dataclass(frozen=True, slots=True)
class Group:
    """Something in parentheses."""

    inside: Expression


@dataclass(frozen=True, slots=True)
class Call:
    """A function call; ``name`` as the file spells it, an argument left out is an empty expression."""

    name: str
    arguments: tuple[Expression, ...]


Item = Atom | Operator | Group | Call
Expression = tuple[Item, ...]


@dataclass(frozen=True, slots=True)
class Piece:
    """Part of a formula written anew: whether it is an array, and what kind of value it is sure to give.

    Kinds: text, logical, zero, literal, whole (a whole number), rounded, number, reference, any. ``size`` are an
    array's rows and columns where they are known; ``loose`` marks the answer of an LP_ call where they are not.
    """

    text: str
    array: bool = False
    kind: str = "any"
    size: tuple[int, int] | None = None
    loose: bool = False


class BlockedError(Exception):
    """The formula must keep its value; arguments: id of the difference, reason."""


def bare_name(stored: str) -> str:
    """A function's own name: ``_xlfn._xlws.SORT`` is ``SORT``."""
    return _PREFIXES.sub("", stored).upper()


def _body(text: str) -> str:
    """The part of a reference behind its sheet."""
    return text.rpartition("!")[2]


def is_cell(text: str) -> bool:
    """Whether a range word is one cell."""
    return _CELL.fullmatch(_body(text)) is not None


def is_range(text: str) -> bool:
    """Whether a range word is an area of cells (one or more), not a name or a single cell."""
    return _AREA.fullmatch(_body(text)) is not None


_END = re.compile(r"\$?([A-Za-z]{0,3})\$?(\d{0,7})")


def spans(text: str) -> tuple[bool, bool]:
    """Whether a range word, or an array constant, has more than one row, and more than one column.

    >>> spans("List!$A$2:B2"), spans("A:A"), spans("{1,2;3,4}")
    ((False, True), (True, False), (True, True))
    """
    if text.startswith("{"):
        return ";" in text, "," in text
    if not is_range(text):
        return False, False
    one, two = (_END.fullmatch(end) for end in _body(text).split(":"))
    if one is None or two is None:
        return False, False
    return one[2] != two[2] or not one[2], one[1].upper() != two[1].upper() or not one[1]


class _Reader:
    """Reads words from left to right; the engine has already found the formula well formed."""

    def __init__(self, found: Iterator[Word]) -> None:
        self._words = [word for word in found if word.type != "Whitespace"]
        self._at = 0

    def expression(self) -> Expression:
        """Items up to a separator, a closing bracket or the end."""
        items: list[Item] = []
        while self._at < len(self._words):
            word = self._words[self._at]
            if word.type == "Sep" or word.subtype == "Close":
                break
            self._at += 1
            items.append(self._item(word))
        return tuple(items)

    def _item(self, word: Word) -> Item:
        if word.type == "Operand":
            return Atom(word.text, word.subtype.lower())
        if word.type.startswith("Op"):
            return Operator(word.text, word.type[2:].lower())
        if word.type == "Array":
            return Atom("{" + self._array() + "}", "array")
        if word.type == "Paren":
            inside = self.expression()
            self._at += 1
            return Group(inside)
        return Call(word.text[:-1], self._arguments())

    def _array(self) -> str:
        parts = []
        while (word := self._words[self._at]).subtype != "Close":
            parts.append(word.text)
            self._at += 1
        self._at += 1
        return "".join(parts)

    def _arguments(self) -> tuple[Expression, ...]:
        arguments = [self.expression()]
        while self._at < len(self._words) and self._words[self._at].type == "Sep":
            self._at += 1
            arguments.append(self.expression())
        self._at += 1
        return () if arguments == [()] else tuple(arguments)


def parse(formula: str) -> Expression:
    """The tree of ``formula`` (with its ``=``); raises ValueError with the engine's words where it is not one."""
    return _Reader(iter(words(formula))).expression()
