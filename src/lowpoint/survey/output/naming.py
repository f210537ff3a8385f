"""Names of sheets from tags: legal in every program, unique in the book, as like the tag as can be."""

from __future__ import annotations

import re
from collections.abc import Iterable

__all__ = ["sheet_names"]

LONGEST = 31
_FORBIDDEN = re.compile(r"[\[\]:*?/\\\x00-\x1f\x7f\ud800-\udfff\ufffe\uffff]")
RESERVED = ("history", "example")
"""A name that spreadsheet programs keep for themselves, and one that a survey leaves alone."""


def sheet_names(tags: Iterable[str], taken: Iterable[str] = ()) -> list[str]:
    """A name a tag, none of them in ``taken``; upper and lower case are the same."""
    used = {name.casefold() for name in (*taken, *RESERVED)}
    return [_name(tag, used) for tag in tags]


def _name(tag: str, used: set[str]) -> str:
    plain = " ".join(_FORBIDDEN.sub("-", tag).split()).strip("'").strip() or "item"
    name, number = _cut(plain, LONGEST), 1
    while name.casefold() in used:
        number += 1
        end = f" ({number})"
        name = _cut(plain, LONGEST - len(end)) + end
    used.add(name.casefold())
    return name


def _cut(text: str, longest: int) -> str:
    """The beginning of a text, not longer in the units that spreadsheet files count (UTF-16)."""
    while len(text.encode("utf-16-le")) // 2 > longest:
        text = text[:-1]
    return text.rstrip(" '") or "item"
