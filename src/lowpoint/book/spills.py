"""Cells that array results fill: those of the stored range, those of the new one, cells and rows put in for them."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from .attributes import attribute
from .refs import Area, address, area
from .report import Change
from .sheet import SheetPart
from .stored import Edit, new_attributes, old_value, same, value_element, with_value

__all__ = ["Spill", "spill_edits"]


@dataclass(frozen=True, slots=True)
class Spill:
    """An array result: its first cell, the stored and the new range, the new range's values by row."""

    row: int
    column: int
    old: Area
    new: Area
    values: Sequence[Sequence[Any]]
    fed: bool

    def value(self, row: int, column: int) -> Any:
        """The new value of a cell; None for one that is no longer filled."""
        a = self.new
        if not (a.r1 <= row <= a.r2 and a.c1 <= column <= a.c2):
            return None
        value = self.values[row - a.r1][column - a.c1]
        return 0.0 if value is None else value

    def cells(self) -> Iterable[tuple[int, int]]:
        """Every cell but the first that the old or the new range fills."""
        places = {(r, c) for a in (self.old, self.new) for r in range(a.r1, a.r2 + 1) for c in range(a.c1, a.c2 + 1)}
        return sorted(places - {(self.row, self.column)})


def spill_edits(
    sheet: SheetPart, spills: Sequence[Spill], strings: Sequence[str]
) -> tuple[list[Edit], list[tuple[Spill, Change]]]:
    """The edits that give the cells of a sheet's spills their values, and the cells whose value changed."""
    edits: list[Edit] = []
    changes: list[tuple[Spill, Change]] = []
    missing: dict[int, list[tuple[int, bytes]]] = defaultdict(list)
    for spill in spills:
        for row, column in spill.cells():
            new, place = spill.value(row, column), sheet.index.get((row, column))
            if place is None and new is not None:
                missing[row].append((column, _fresh_cell(sheet.prefix, row, column, new)))
                changes.append((spill, Change(sheet.title, address(row, column), None, new)))
            elif place is not None and (row, column) not in sheet.formula_places:
                cell = sheet.data[place[0] : place[1]]
                old = _stored(cell, strings)
                if old != new and not same(old, new, exact=True):
                    edits.append((*place, with_value(cell, sheet.prefix, new)))
                    changes.append((spill, Change(sheet.title, address(row, column), old, new)))
    if missing:
        edits += _inserted(sheet, missing)
        edits += _dimension(sheet, [spill.new for spill in spills])
    return edits, changes


def _stored(cell: bytes, strings: Sequence[str]) -> Any:
    value = re.search(rb"<(?:[\w.-]+:)?v\b[^>]*>([^<]*)</", cell)
    return old_value(attribute(cell[: cell.index(b">")], b"t"), value[1] if value else None, cell, strings)


def _fresh_cell(prefix: bytes, row: int, column: int, value: Any) -> bytes:
    kind, element = value_element(prefix, value)
    head = new_attributes(b' r="%b"' % address(row, column).encode(), kind)
    return b"<%bc%b>%b</%bc>" % (prefix, head, element, prefix)


def _inserted(sheet: SheetPart, missing: dict[int, list[tuple[int, bytes]]]) -> list[Edit]:
    """New cells in their rows, by column; new rows where the sheet has none."""
    rows = sheet.row_spans
    edits: list[Edit] = []
    for row, cells in sorted(missing.items()):
        if row in rows:
            edits += _into_row(sheet, row, cells)
            continue
        after = min((start for number, (start, _, _) in rows.items() if number > row), default=sheet.body[1])
        inside = b"".join(cell for _, cell in sorted(cells))
        new = b'<%brow r="%d">%b</%brow>' % (sheet.prefix, row, inside, sheet.prefix)
        edits.append((after, after, new))
    return edits


def _into_row(sheet: SheetPart, row: int, cells: list[tuple[int, bytes]]) -> list[Edit]:
    start, opened, closed = sheet.row_spans[row]
    if closed is None:  # an empty row in one tag
        head = sheet.data[start:opened].rstrip()[:-2].rstrip()
        inside = b"".join(cell for _, cell in sorted(cells))
        return [(start, opened, b"%b>%b</%brow>" % (head, inside, sheet.prefix))]
    here = sorted((column, place[0]) for (r, column), place in sheet.index.items() if r == row)
    return [(next((at for c, at in here if c > column), closed),) * 2 + (cell,) for column, cell in sorted(cells)]


def _dimension(sheet: SheetPart, filled: Sequence[Area]) -> list[Edit]:
    """The sheet's stated extent, widened where the new cells lie outside it."""
    found = re.search(rb"<%bdimension\b[^>]*?\sref\s*=\s*[\"']([^\"']*)[\"']" % re.escape(sheet.prefix), sheet.scanned)
    stated = area(found[1].decode("ascii", "replace")) if found else None
    if found is None or stated is None:
        return []
    every = [stated, *filled]
    wide = Area(min(a.r1 for a in every), min(a.c1 for a in every), max(a.r2 for a in every), max(a.c2 for a in every))
    text = f"{address(wide.r1, wide.c1)}:{address(wide.r2, wide.c2)}".encode()
    return [] if wide == stated else [(*found.span(1), text)]
