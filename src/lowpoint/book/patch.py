"""New cached values put into a sheet's bytes: nothing moves but what the format lets a calculation change."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from .attributes import attribute
from .refs import Area, address, column_letters
from .report import Change
from .sheet import Group, SheetPart
from .spills import Spill, spill_edits
from .stored import Edit, new_attributes, number_elements, old_value, same, value_element, with_value

__all__ = ["Patched", "patch_sheet"]

_RANGE = re.compile(rb"""(\sref\s*=\s*["'])[^"']*""")


@dataclass(slots=True)
class Patched:
    """A sheet's new bytes (None when nothing changed), its changed cells, and how many were right already."""

    data: bytes | None = None
    changed: list[Change] = field(default_factory=list)
    unfed: list[Change] = field(default_factory=list)
    untouched: int = 0

    def note(self, change: Change, fed: bool) -> None:
        """Enter a changed cell where it belongs."""
        (self.changed if fed or change.old is None else self.unfed).append(change)


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
    found, spilled = spill_edits(sheet, spills, strings) if spills else ([], [])
    out = _Output(sheet.data, sorted(found))
    running = {group: _Column(group, results, fed(group), sheet.prefix) for group, results in values.items()}
    ranges = {(spill.row, spill.column): spill.new for spill in spills if spill.old != spill.new}
    _formula_cells(sheet, running, kept, ranges, strings, result, out)
    if spilled:
        for spill, change in spilled:
            result.note(change, spill.fed)
        for changes in (result.changed, result.unfed):
            changes.sort(key=_by_row)
    data = out.finished()
    result.data = sheet.encoded(data) if data is not None else None
    return result


class _Column:
    """The results of one group on their way into the cells, from the first row of the file to the last."""

    def __init__(self, group: Group, results: Sequence[Any], fed: bool, prefix: bytes) -> None:
        self.letters, self.fed = column_letters(group.column), fed
        self.coming = zip(results, _elements(prefix, results), strict=True)


def _elements(prefix: bytes, results: Sequence[Any]) -> Iterable[bytes]:
    """The value elements of numbers and texts; nothing for other results, which are rare."""
    numbers = iter(number_elements(prefix, [r for r in results if type(r) is float]))
    texts = {text: value_element(prefix, text)[1] for text in {r for r in results if type(r) is str}}
    return [next(numbers) if type(r) is float else texts[r] if type(r) is str else b"" for r in results]


class _Output:
    """The sheet's bytes while they are written anew: edits come in order, those known ``ahead`` are slipped in."""

    def __init__(self, data: bytes, ahead: Sequence[Edit]) -> None:
        self._data, self._view, self._ahead = data, memoryview(data), list(reversed(ahead))
        self._out = bytearray()
        self._begin = 0
        self._any = bool(ahead)

    def put(self, start: int, end: int, new: bytes) -> None:
        """Replace the bytes from ``start`` to ``end``."""
        while self._ahead and self._ahead[-1][0] <= start:
            self._write(*self._ahead.pop())
        self._write(start, end, new)

    def _write(self, start: int, end: int, new: bytes) -> None:
        self._any = True
        self._out += self._view[self._begin : start]
        self._out += new
        self._begin = end

    def finished(self) -> bytes | None:
        """All bytes; None when there was no edit."""
        while self._ahead:
            self._write(*self._ahead.pop())
        if not self._any:
            return None
        self._out += self._view[self._begin :]
        return bytes(self._out)


def _formula_cells(
    sheet: SheetPart,
    running: Mapping[Group, _Column],
    kept: set[tuple[int, int]],
    ranges: Mapping[tuple[int, int], Area],
    strings: Sequence[str],
    result: Patched,
    out: _Output,
) -> None:
    """The edits of formula cells in file order, and the changes into the result."""
    scanned, title, put = sheet.scanned, sheet.title, out.put
    ending = len(b"</%bc>" % sheet.prefix)
    cells = zip(sheet.starts, sheet.ends, sheet.plain, sheet.rows, sheet.columns, sheet.groups, strict=True)
    for start, end, plain, row, column, group in cells:
        results = running.get(group)
        if results is None:
            continue
        new, element = next(results.coming)
        if kept and (row, column) in kept:
            continue
        if plain and element and not ranges:
            # Most cells: there was a number.
            stored = scanned[plain : end - ending]
            old = new if stored == element and type(new) is float else _plain_value(stored, len(sheet.prefix))
            right = old is not None and same(old, new, exact=results.fed)
            edit = None if right else _replacing(sheet, start, plain, end - ending, new, element)
        else:
            old, edit = _edited(sheet, start, new, results.fed, ranges.get((row, column)), strings)
            right = same(old, new, exact=results.fed)
        if right:
            result.untouched += 1
        else:
            result.note(Change(title, f"{results.letters}{row}", old, new), results.fed)
        if edit is not None:
            put(*edit)


def _plain_value(element: bytes, prefix: int) -> Any:
    """What the value element of a plain number holds; None where it is empty. ``prefix`` is the length of its own."""
    if len(element) <= len(b"<v></v>") + 2 * prefix:
        return None
    try:
        return float(element[3 + prefix : -4 - prefix])
    except ValueError:  # nothing in it, attributes, or no number
        return old_value(b"", element[element.find(b">") + 1 : element.rfind(b"<")], b"", ())


def _replacing(sheet: SheetPart, start: int, first: int, last: int, new: Any, element: bytes) -> Edit | None:
    """A number or text in the place of a number, whose value element is from ``first`` to ``last``."""
    if type(new) is float:
        return first, last, element
    head = sheet.scanned.find(b"><%bf" % sheet.prefix, start, first)
    if head < 0 or sheet.scanned[head - 1 : head].isspace():
        return _edited(sheet, start, new, True, None, ())[1]
    return head, last, b' t="str"%b%b' % (sheet.data[head:first], element)


def _edited(
    sheet: SheetPart, start: int, new: Any, exact: bool, area: Area | None, strings: Sequence[str]
) -> tuple[Any, Edit | None]:
    """Any formula cell: its old value, and the edit that it needs, if any."""
    cell = sheet.found.formula_cell.match(sheet.scanned, start)
    if cell is None:
        raise AssertionError("a formula cell is not where it was found")
    kind = attribute(cell[3], b"t")
    old = old_value(kind, cell[7], cell[8], strings)
    if not same(old, new, exact=exact):
        return old, _with_new_value(sheet, cell, kind, new, area)
    return old, (*cell.span(4), _new_range(cell[4], area)) if area is not None else None


def _new_range(attributes: bytes, area: Area) -> bytes:
    """A formula element's attributes with another range."""
    name = address(area.r1, area.c1)
    if (area.r1, area.c1) != (area.r2, area.c2):
        name += f":{address(area.r2, area.c2)}"
    return _RANGE.sub(lambda m: m[1] + name.encode(), attributes, count=1)


def _with_new_value(sheet: SheetPart, cell: re.Match[bytes], kind: bytes, new: Any, area: Area | None) -> Edit:
    """One edit that gives a formula cell its value, its type, and its array's range."""
    data, (start, end) = sheet.data, cell.span()
    if b"<" in cell[8]:  # something stands after the value: an inline text that goes, an extension that stays
        whole = data[start:end]
        if area is not None:
            first, last = (place - start for place in cell.span(4))
            whole = whole[:first] + _new_range(cell[4], area) + whole[last:]
        return start, end, with_value(whole, sheet.prefix, new)
    wanted, element = value_element(sheet.prefix, new)
    first, last = cell.span(6) if cell[6] is not None else (cell.start(8), cell.start(8))
    begin, place = first, first
    parts: list[bytes] = []
    if wanted != kind or b"vm" in cell[3]:
        begin, place = cell.span(3)
        parts.append(new_attributes(cell[3], wanted))
    if area is not None:
        begin = min(begin, cell.start(4))
        parts += (data[place : cell.start(4)] if parts else b"", _new_range(cell[4], area))
        place = cell.end(4)
    if parts:
        parts += (data[place:first], element)
        return begin, last, b"".join(parts)
    return first, last, element


def _by_row(change: Change) -> tuple[int, int, str]:
    letters = change.cell.rstrip("0123456789")
    return int(change.cell[len(letters) :]), len(letters), letters
