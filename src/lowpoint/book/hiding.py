"""Hidden rows, which SUBTOTAL and AGGREGATE leave out and the engine does not see.

Source: ISO/IEC 29500-1, 18.17.7.304 (SUBTOTAL): 101 to 111 leave out rows hidden by any means, 1 to 11 only those
that a filter hides (from memory).
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from enum import IntEnum

from .package import Package
from .sheet import SheetPart

__all__ = ["Hiding", "has_hidden_rows", "hiding_of"]

_HIDDEN = re.compile(rb"""<(?:[\w.-]+:)?row\b[^>]*\bhidden=["'](?:1|true)["']""")


class Hiding(IntEnum):
    """Whether rows of a workbook are hidden, and whether a filter hides some."""

    NONE = 0
    ROWS = 1
    FILTER = 2


def has_hidden_rows(sheet: bytes) -> bool:
    """Whether rows of a worksheet part are hidden, by hand, by a filter or by an outline.

    >>> has_hidden_rows(b'<row r="2" hidden="1"/>'), has_hidden_rows(b'<col min="2" hidden="1"/>')
    (True, False)
    """
    return b"hidden=" in sheet and _HIDDEN.search(sheet) is not None


def hiding_of(package: Package, sheets: Iterable[SheetPart]) -> Hiding:
    """The worst that is found in the worksheets and their tables."""
    worst = Hiding.NONE
    for sheet in sheets:
        if has_hidden_rows(sheet.data):
            tables = (link.target for link in package.relations(sheet.path) if link.kind == "table")
            parts = [sheet.data, *(package.read(part) for part in tables if part in package)]
            filtered = any(b"filterColumn" in part for part in parts)
            worst = max(worst, Hiding.FILTER if filtered else Hiding.ROWS)
    return worst
