"""Arrays of unequal size between operators, and in IF: spreadsheet programs fill the shorter up with #N/A.

The engine gives #VALUE! for the whole instead. Where the sizes cannot be known to fit, each array is handed to the
helper ``LOWPOINT.PAD`` together with the others. Arrays other than LP_ answers whose size the text does not tell
(FILTER, UNIQUE, ...) are taken to fit.
Source: OASIS ODF 1.3 part 4, 3.3 (array calculation; from memory): one row or column is repeated, what is missing is
#N/A.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace

from .expression import Piece, is_range
from .helping import PREFIX
from .refs import LAST_COLUMN, LAST_ROW, column_number

__all__ = ["ELEMENTWISE", "FIRST_STAND_IN", "answered", "common", "padded", "sizes_matter"]

Size = tuple[int, int]

FIRST_STAND_IN = 1_040_000
"""Rows that no workbook fills stand for the rows of a formula whose ranges are all equally high."""

ELEMENTWISE = frozenset({"IF", "IFERROR", "IFNA"})
"""Functions of the engine that go through arrays cell by cell."""

_END = re.compile(r"\$?([A-Za-z]*)\$?(\d*)")
_RANGE = re.compile(r"[A-Za-z]\$?(\d{1,7}):\$?[A-Za-z]{1,3}\$?(\d{1,7})(?!\d)")
_QUOTED = re.compile(r'"(?:[^"]|"")*"')


def _size(piece: Piece) -> Size | None:
    """Rows and columns of a piece; None where the text does not tell."""
    if not piece.array:
        return 1, 1
    if piece.size is not None:
        return piece.size
    if piece.text.startswith("{") and piece.text.endswith("}"):
        first, *rest = _QUOTED.sub("", piece.text).split(";")
        return 1 + len(rest), 1 + first.count(",")
    return _extent(piece.text) if is_range(piece.text) else None


def _extent(text: str) -> Size | None:
    one, two = (_END.fullmatch(end) for end in text.rpartition("!")[2].split(":"))
    if one is None or two is None:
        return None
    rows = abs(int(one[2]) - int(two[2])) + 1 if one[2] and two[2] else LAST_ROW
    if rows != LAST_ROW and one[2] and int(one[2]) >= FIRST_STAND_IN:
        rows = min(rows, 2)
    columns = abs(column_number(one[1]) - column_number(two[1])) + 1 if one[1] and two[1] else LAST_COLUMN
    return rows, columns


def sizes_matter(formula: str) -> bool:
    """Whether a formula must be prepared with its true rows: its ranges are not all equally high."""
    heights = {abs(int(one) - int(two)) for one, two in _RANGE.findall(formula)} - {0}
    return len(heights) > 1 or "{" in formula


def common(pieces: Iterable[Piece | None]) -> tuple[Size | None, bool]:
    """Rows and columns of what comes out cell by cell (None: unknown), and whether it is an LP_ answer of unknown
    size, or holds one."""
    given = [piece for piece in pieces if piece is not None]
    sizes = [_size(piece) for piece in given]
    loose = any(piece.loose for piece in given)
    known = [size for size in sizes if size is not None]
    if len(known) < len(sizes):
        return None, loose
    return (max((r for r, _ in known), default=1), max((c for _, c in known), default=1)), loose


def answered(pieces: Sequence[Piece | None], text: str, column: bool) -> Piece:
    """An LP_ call: an array where its arguments are, or where its answer is a column by nature."""
    array = column or any(piece is not None and piece.array for piece in pieces)
    size, _ = common(pieces)
    size = None if column or not array else size
    return Piece(text, array, "any", size, array and size is None)


def _fit(pieces: Sequence[Piece]) -> bool:
    sizes = [_size(piece) for piece in pieces]
    known = [size for size in sizes if size is not None]
    wide = any(LAST_ROW in size or LAST_COLUMN in size for size in known)  # the engine cuts these as it likes
    if any(piece.loose for piece in pieces):
        return False
    return wide or all(len({size[side] for size in known} - {1}) <= 1 for side in (0, 1))


def padded(pieces: Sequence[Piece], write: Callable[[Sequence[Piece]], str]) -> str | None:
    """What ``write`` makes of the pieces of one operation, their arrays made fit; None where they are fit already."""
    arrays = [piece for piece in pieces if piece.array]
    if len(arrays) < 2 or _fit(arrays):
        return None
    names: list[str] = []
    for number, piece in enumerate(arrays):
        names.append(piece.text if is_range(piece.text) else f"lp_p{number}")
    bound = [f"{name},{piece.text}," for name, piece in zip(names, arrays, strict=True) if name != piece.text]
    running = iter(names)
    written = write([replace(p, text=_pad(next(running), names)) if p.array else p for p in pieces])
    return f"LET({''.join(bound)}{written})" if bound else written


def _pad(name: str, names: Sequence[str]) -> str:
    return f"{PREFIX}PAD({','.join([name, *dict.fromkeys(n for n in names if n != name)])})"
