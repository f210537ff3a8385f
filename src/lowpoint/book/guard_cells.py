"""How many cells a book holds and how long its formulas are, asked before anything is done with them."""

from __future__ import annotations

import re
from collections.abc import Iterable

from lowpoint.book.guard_limits import Limits, too_much
from lowpoint.book.refs import Area

__all__ = ["CellCount", "area_size", "cells_of", "formula_refusal"]

_AFTER = (b" ", b">", b"/", b"\t", b"\n", b"\r", b"\f", b"\v")  # counting fixed words takes half the time of a pattern
_PREFIXED = re.compile(rb"<[\w.-]+:c[\s>/]")


class CellCount:
    """Counts the cells of a book while it is read; BookError at the first too many."""

    def __init__(self, book: str, limits: Limits) -> None:
        self.book, self.most, self.found = book, limits.cells, 0

    def add(self, cells: int) -> None:
        """So many more cells, those between and before filled ones included where the reader holds them too."""
        self.found += cells
        if self.found > self.most:
            too_much(self.book, f"hold at most {self.most} cells", f"{self.found} or more", "cells")

    def add_part(self, part: bytes) -> None:
        """The cells of a worksheet's bytes; they are looked at one by one only where there might be too many."""
        most = part.count(b"<c") + part.count(b":c")
        self.add(most if self.found + most <= self.most else cells_of(part))


def cells_of(part: bytes) -> int:
    """The cells that a worksheet's bytes hold.

    >>> cells_of(b'<row><c r="A1"/><x:c><x:v>1</x:v></x:c><col min="1"/></row>')
    2
    """
    plain = sum(part.count(b"<c" + after) for after in _AFTER)
    return plain + (sum(1 for _ in _PREFIXED.finditer(part)) if b":c" in part else 0)


def area_size(area: Area) -> int:
    """The cells that an array fills, all of which are made."""
    return (area.r2 - area.r1 + 1) * (area.c2 - area.c1 + 1)


def formula_refusal(length: int, kinds: Iterable[str], limits: Limits) -> str:
    """Why a formula is beyond the limits, "" where it is not; ``kinds`` are those of its tokens, in order."""
    if length > limits.formula_length:
        return f"the formula has {length} characters; at most {limits.formula_length} are read (--limit length)"
    depth = 0
    for kind in kinds:
        if kind in ("call", "open"):
            depth += 1
            if depth > limits.formula_depth:
                most = limits.formula_depth
                return f"the formula is nested more than {most} levels deep (--limit depth)"
        elif kind == "close":
            depth -= 1
    return ""
