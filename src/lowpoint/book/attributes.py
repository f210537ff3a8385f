"""The attributes of one element in a sheet's bytes, read where they stand: nothing there is parsed twice.

Source: Extensible Markup Language 1.0, 3.1 (tags, attributes, blanks around the equals sign).
"""

from __future__ import annotations

import re
from functools import lru_cache

__all__ = ["attribute", "place_of"]

_AT = re.compile(rb"""\sr\s*=\s*["']([A-Z]{1,3})([0-9]{1,7})["']""")
_ADDRESS = re.compile(rb"([A-Z]{1,3})([0-9]{1,7})")


def attribute(attributes: bytes, name: bytes) -> bytes:
    """The value of an attribute, b"" without it. What looks like one inside another's value is none.

    >>> attribute(b' s="1" t = "str"', b"t")
    b'str'
    """
    if name not in attributes:
        return b""
    found = _attribute_pattern(name).match(attributes)
    return (found[1] if found[1] is not None else found[2]) if found else b""


@lru_cache(maxsize=64)
def _attribute_pattern(name: bytes) -> re.Pattern[bytes]:
    """Whole attributes are stepped over, from the beginning, up to the one of this name."""
    value = rb"""\s*=\s*(?:"([^"]*)"|'([^']*)')"""
    others = rb"""(?:[^\s=]++\s*=\s*(?:"[^"]*"|'[^']*')\s*)*?"""
    return re.compile(rb"(?:<[^\s>/]++)?\s*%b%b%b" % (others, re.escape(name), value))


def place_of(attributes: bytes) -> tuple[bytes, bytes] | None:
    """Column and row that a cell states; None where it states none, or none that there is."""
    found = _AT.match(attributes) or _ADDRESS.fullmatch(attribute(attributes, b"r"))
    return (found[1], found[2]) if found else None
