"""New cached values put into a sheet's bytes: nothing moves but what the format lets a calculation change."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from .refs import address
from .report import Change
from .sheet import Group, SheetPart, attribute
from .spills import Spill, spill_edits
from .stored import Edit, new_attributes, old_value, same, value_element, with_value

__all__ = ["Patched", "patch_sheet"]

_RANGE = re.compile(rb"""(\sref\s*=\s*["'])[^"']*""")


@dataclass(slots=True)
class Patched:
    """A sheet's new bytes (None when nothing changed), its changed cells, and how many were right already."""

    data: bytes | None = None
    changed: list[Change] = field(default_factory=list)
    unfed: list[Change] = field(default_factory=list)
    untouched: int = 0


def patch_sheet(
    sheet: SheetPart,
    values: Mapping[Group, Sequence[Any]],
    fed: Callable[[Group], bool],
    kept: set[tuple[int, int]],
    spills: Sequence[Spill],
    strings: Sequence[str],
) -> Patched:
    """Put results into a sheet. ``values`` by group, in the order of its rows; ``kept`` cells (row, column) stay."""
    result = Patched()
    edits: list[Edit] = []
    running: dict[Group, Iterator[Any]] = {group: iter(found) for group, found in values.items()}
    ranges = {(spill.row, spill.column): spill for spill in spills}
    feeding = {group: fed(group) for group in values}
    for i, group in enumerate(sheet.groups):
        if group not in running:
            continue
        new, row, column = next(running[group]), sheet.rows[i], sheet.columns[i]
        if kept and (row, column) in kept:
            continue
        cell = sheet.found.formula_cell.match(sheet.scanned, sheet.starts[i])
        if cell is None:
            raise AssertionError("a formula cell is not where it was found")
        spill = ranges.get((row, column)) if ranges else None
        if spill is not None and spill.old != spill.new:
            edits.append(_new_range(cell, spill))
        kind = attribute(cell[3], b"t") if b"t=" in cell[3] else b""
        old = old_value(kind, cell[7], cell[8], strings)
        if same(old, new, exact=feeding[group]):
            result.untouched += 1
            continue
        edits += _value_edits(sheet, cell, kind, new)
        change = Change(sheet.title, address(row, column), old, new)
        (result.changed if feeding[group] or old is None else result.unfed).append(change)
    if spills:
        found, changes = spill_edits(sheet, spills, strings)
        edits += found
        for spill, change in changes:
            (result.changed if spill.fed or change.old is None else result.unfed).append(change)
    if edits:
        result.data = sheet.encoded(_applied(sheet.data, edits))
    return result


def _new_range(cell: re.Match[bytes], spill: Spill) -> Edit:
    a = spill.new
    name = address(a.r1, a.c1) + ("" if (a.r1, a.c1) == (a.r2, a.c2) else f":{address(a.r2, a.c2)}")
    return cell.start(4), cell.end(4), _RANGE.sub(lambda m: m[1] + name.encode(), cell[4], count=1)


def _value_edits(sheet: SheetPart, cell: re.Match[bytes], kind: bytes, new: Any) -> Iterable[Edit]:
    if b"<" in cell[8]:  # something stands after the value: an inline text that goes, an extension that stays
        return [(cell.start(), cell.end(), with_value(sheet.data[cell.start() : cell.end()], sheet.prefix, new))]
    wanted, element = value_element(sheet.prefix, new)
    place = cell.span(6) if cell[6] is not None else (cell.start(8), cell.start(8))
    edits = [(*place, element)]
    if wanted != kind or b"vm" in cell[3]:
        edits.append((*cell.span(3), new_attributes(cell[3], wanted)))
    return edits


def _applied(data: bytes, edits: list[Edit]) -> bytes:
    edits.sort(key=lambda edit: edit[:2])
    out: list[bytes] = []
    begin = 0
    for start, end, new in edits:
        out += (data[begin:start], new)
        begin = end
    return b"".join((*out, data[begin:]))
