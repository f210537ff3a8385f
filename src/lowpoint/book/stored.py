"""Stored values: reading what a cell holds, judging whether it is the same as a result, writing a result.

Source: ISO/IEC 29500-1, 18.3.1.4 (cells), 18.18.11 (cell types), 22.9.2.19 (escapes in strings).
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Sequence
from html import escape, unescape
from typing import Any

from lowpoint.cells import CellError

__all__ = [
    "FILE_SPELLING",
    "Edit",
    "new_attributes",
    "number_elements",
    "number_text",
    "old_value",
    "same",
    "serial_of",
    "strings_of",
    "value_element",
    "with_value",
]

Edit = tuple[int, int, bytes]
"""Bytes from one place to another, and what takes their place."""

_ESCAPED = re.compile(r"_x([0-9A-Fa-f]{4})_")
_UNWRITABLE = re.compile("[\x00-\x08\x0b\x0c\x0d\x0e-\x1f\ufffe\uffff]|_(?=x[0-9A-Fa-f]{4}_)")
_TEXTS = re.compile(rb"<(?:[\w.-]+:)?t\b[^>]*>([^<]*)</")
_ATTRIBUTE = re.compile(rb"""\s+([^\s=]+)\s*=\s*("[^"]*"|'[^']*')""")
_ERRORS = {e.value: e for e in CellError}

# How the file format itself spells the errors that are younger than it: programs say more in parts of their own.
FILE_SPELLING = {"#SPILL!": "#VALUE!", "#CALC!": "#VALUE!"}


def decoded(text: bytes) -> str:
    """Character data as a program reads it."""
    return _ESCAPED.sub(lambda m: chr(int(m[1], 16)), unescape(text.decode("utf-8")))


def strings_of(part: bytes) -> list[str]:
    """The shared strings, plain."""
    item = re.compile(rb"<(?:[\w.-]+:)?si\b[^>]*?(?:/>|>(.*?)</(?:[\w.-]+:)?si>)", re.DOTALL)
    phonetic = re.compile(rb"<(?:[\w.-]+:)?rPh\b.*?</(?:[\w.-]+:)?rPh>", re.DOTALL)
    return ["".join(decoded(t) for t in _TEXTS.findall(phonetic.sub(b"", m[1] or b""))) for m in item.finditer(part)]


def old_value(kind: bytes, value: bytes | None, rest: bytes, strings: Sequence[str]) -> Any:
    """What a cell's type, its value's text and what follows it say; None where no value is stored."""
    if kind == b"inlineStr":
        return "".join(decoded(t) for t in _TEXTS.findall(rest))
    if kind == b"str":
        return decoded(value) if value is not None else None
    if not value:
        return None
    text = value.decode("utf-8").strip()
    if kind == b"b":
        return text in ("1", "true")
    if kind == b"e":
        return _ERRORS.get(text, text)
    if kind == b"s":
        return strings[int(text)] if text.isdecimal() and int(text) < len(strings) else None
    try:
        return float(text)
    except ValueError:
        return text


def serial_of(text: str, date1904: bool = False) -> float | None:
    """The serial number of a date, or a date and time, in the words of ISO 8601; None for other text.

    The system of 1900 counts a 29 February 1900 that never was: days before it have one less.

    >>> serial_of("2024-03-15"), serial_of("2024-03-15T12:00:00", date1904=True)
    (45366.0, 43904.5)
    """
    try:
        moment = datetime.datetime.fromisoformat(text).replace(tzinfo=None)
    except ValueError:
        return None
    if date1904:
        return (moment - datetime.datetime(1904, 1, 1)) / datetime.timedelta(days=1)
    serial = (moment - datetime.datetime(1899, 12, 30)) / datetime.timedelta(days=1)
    return serial if serial > 60 else serial - 1.0


def same(old: Any, new: Any, exact: bool) -> bool:
    """Whether a stored value may stay; not ``exact``, when it agrees in the 15 digits that a spreadsheet shows."""
    if type(new) is float or type(new) is int:
        if type(old) is not float:
            return False
        return old == new or (not exact and f"{old:.15g}" == f"{new:.15g}")
    if isinstance(new, CellError):
        return isinstance(old, CellError) and _spelled(old) == _spelled(new)
    return type(old) is type(new) and bool(old == new)


def _spelled(error: CellError) -> str:
    return FILE_SPELLING.get(error.value, error.value)


def _typed(value: Any) -> tuple[bytes, bytes]:
    """The type attribute and the text of a value."""
    if isinstance(value, CellError):
        return b"e", _spelled(value).encode()
    if isinstance(value, bool):
        return b"b", b"1" if value else b"0"
    if isinstance(value, str):
        text = _UNWRITABLE.sub(lambda m: f"_x{ord(m[0]):04X}_", value)
        return b"str", escape(text, quote=False).encode()
    return b"", number_text(float(value))


def number_text(number: float) -> bytes:
    """A number as a cell stores it: the shortest digits that give it back."""
    return repr(number).removesuffix(".0").encode()


def value_element(prefix: bytes, value: Any) -> tuple[bytes, bytes]:
    """A result's type attribute and its value element."""
    if type(value) is float:  # most of them
        return b"", b"<%bv>%b</%bv>" % (prefix, number_text(value), prefix)
    kind, text = _typed(value)
    edges = text[:1].isspace() or text[-1:].isspace()
    space = b' xml:space="preserve"' if edges else b""
    return kind, b"<%bv%b>%b</%bv>" % (prefix, space, text, prefix)


def number_elements(prefix: bytes, numbers: Sequence[float]) -> list[bytes]:
    """The value elements of many numbers, as :func:`value_element` makes them one by one.

    >>> number_elements(b"", [2.0, 0.1])
    [b'<v>2</v>', b'<v>0.1</v>']
    """
    # A list is written out in one go, in the same digits as its numbers one by one.
    digits = f"{list(numbers)!r},"[1:].replace("],", ",").replace(".0,", ",")[:-1].encode()
    between = b"</%bv>,<%bv>" % (prefix, prefix)
    return (b"<%bv>%b</%bv>" % (prefix, digits.replace(b", ", between), prefix)).split(b",")


def new_attributes(attributes: bytes, kind: bytes) -> bytes:
    """A cell's attributes with another type and no value metadata."""
    wanted = b' t="%b"' % kind if kind else b""
    typed = False

    def put(found: re.Match[bytes]) -> bytes:
        nonlocal typed
        if found[1] == b"vm":
            return b""
        if found[1] != b"t":
            return found[0]
        typed = True
        return found[0] if found[2][1:-1] == kind else wanted

    changed = _ATTRIBUTE.sub(put, attributes)
    return changed if typed or not wanted else changed.rstrip() + wanted


def with_value(cell: bytes, prefix: bytes, value: Any) -> bytes:
    """A cell's bytes with another value; None takes the value away (a cell that an array no longer fills)."""
    p = re.escape(prefix)
    opening = re.match(rb"""<%bc((?:[^>"'/]|/(?!>)|"[^"]*"|'[^']*')*)(/?)>""" % p, cell)
    if opening is None:
        raise AssertionError("a cell is not where it was found")
    kind, new = value_element(prefix, value) if value is not None else (b"", b"")
    end = len(cell) if opening[2] else cell.rindex(b"</")
    inside = _inside(cell[opening.end() : end], p, new)
    closing = cell[end:] or b"</%bc>" % prefix
    head = new_attributes(opening[1], kind)
    return b"<%bc%b>%b%b" % (prefix, head, inside, closing) if inside else b"<%bc%b/>" % (prefix, head)


def _inside(inside: bytes, p: bytes, new: bytes) -> bytes:
    """A cell's content with its value, or its inline text, replaced; a formula stays before it."""
    value = re.search(rb"<%b(v|is)\b[^>]*?(?:/>|>.*?</%b\1\s*>)" % (p, p), inside, re.DOTALL)
    if value:
        return inside[: value.start()] + new + inside[value.end() :]
    formula = re.search(rb"""<%bf\b(?:[^>"'/]|/(?!>)|"[^"]*"|'[^']*')*(?:/>|>[^<]*</%bf\s*>)""" % (p, p), inside)
    place = formula.end() if formula else 0
    return inside[:place] + new + inside[place:]
