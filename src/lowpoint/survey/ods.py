"""OpenDocument spreadsheets as grids, read only: one safe parse of their content."""

from __future__ import annotations

import os
from collections.abc import Iterator
from datetime import datetime
from typing import Any
from xml.etree import ElementTree

from lowpoint.book import guard
from lowpoint.book.archive import DEFLATED, STORED, Archive, DamageError, Entry, ExcessError
from lowpoint.book.guard_cells import CellCount
from lowpoint.book.guard_limits import in_force, size_text, too_much
from lowpoint.book.parts import local_name, parse
from lowpoint.errors import BookError
from lowpoint.survey.grids import Grid, Sheets

__all__ = ["read_open_document"]

MUST = "must be an OpenDocument spreadsheet"
_NUMBERS = frozenset({"float", "percentage", "currency"})
WIDEST = 1024
"""Columns that are read; a list has far fewer, and empty cells are declared to the edge of the sheet."""
MOST_EQUAL = 10_000
"""Equal rows that one element may stand for."""


class _Share(float):
    """A share that its cell shows as per cent."""


def read_open_document(path: str | os.PathLike[str]) -> Sheets:
    """The sheets of an .ods file; BookError where it cannot be read."""
    name = str(path)
    data = guard.load(path)
    if not data.startswith(b"PK"):
        raise BookError(name, MUST, guard.looks_like(data), "Save it as .ods or .xlsx.")
    try:
        archive = Archive(data, in_force().entries)
        if "content.xml" not in archive:
            raise BookError(name, MUST, "a package without content.xml", "Save it as .ods or .xlsx.")
        entry = archive.entry("content.xml")
        _check(entry, name)
        root = parse(archive.read(entry), "content.xml")
    except ExcessError as excess:
        too_much(name, f"hold at most {in_force().entries} parts", f"{excess.args[0]}", "parts")
    except DamageError as damage:
        raise BookError(name, f"{guard.DAMAGED}: {damage}", remedy=guard.FETCH) from None
    body = next((item for item in root.iter() if local_name(item.tag) == "spreadsheet"), None)
    if body is None:
        raise BookError(name, MUST, "another kind of document", "Save it as .ods or .xlsx.")
    counted = CellCount(name, in_force())
    return Sheets("ods", tuple(_grid(table, counted) for table in body if local_name(table.tag) == "table"))


def _check(entry: Entry, name: str) -> None:
    if entry.encrypted or entry.method not in (STORED, DEFLATED):
        raise BookError(name, "is protected with a password", remedy="Save it without a password first.")
    limits = in_force()
    if entry.size > min(limits.part_bytes, limits.unpacked_bytes):
        too_much(name, f"hold no part above {size_text(limits.part_bytes)}", size_text(entry.size), "part")
    if entry.size > limits.ratio_from and entry.size > limits.ratio * entry.packed:
        times = f"{entry.size / max(entry.packed, 1):.0f} times"
        too_much(name, f"hold no large part packed more than {limits.ratio:.0f} times", times, "ratio")


def _get(item: ElementTree.Element, name: str, default: str = "") -> str:
    """An attribute by its local name."""
    return next((value for key, value in item.attrib.items() if local_name(key) == name), default)


def _count(item: ElementTree.Element, name: str) -> int:
    text = _get(item, name, "1")
    return int(text) if text.isdecimal() and len(text) < 10 else 1


def _rows(parent: ElementTree.Element) -> Iterator[ElementTree.Element]:
    """The rows in order, out of their groups, however deep these are nested."""
    open_groups = [iter(parent)]
    while open_groups:
        item = next(open_groups[-1], None)
        kind = "" if item is None else local_name(item.tag)
        if item is None:
            open_groups.pop()
        elif kind == "table-row":
            yield item
        elif kind in ("table-header-rows", "table-row-group", "table-rows"):
            open_groups.append(iter(item))


def _grid(table: ElementTree.Element, counted: CellCount) -> Grid:
    grid = Grid(_get(table, "name"))
    hidden: set[int] = set()
    merged: list[tuple[int, int, int, int]] = []
    unvalued: set[tuple[int, int]] = set()
    percent: set[tuple[int, int]] = set()
    number = 1
    for item in _rows(table):
        repeats = _count(item, "number-rows-repeated")
        values: list[Any] = []
        for cell in item:
            _take_cell(cell, number, values, merged, unvalued)
        shares = [column for column, value in enumerate(values) if isinstance(value, _Share)]
        values = [float(value) if isinstance(value, _Share) else value for value in values]
        while values and values[-1] is None:
            values.pop()
        if values:
            counted.add(len(values) * min(repeats, MOST_EQUAL))
            for row in range(number, number + min(repeats, MOST_EQUAL)):
                grid.rows.append((row, list(values)))
                percent.update((row, column + 1) for column in shares)
                if _get(item, "visibility", "visible") != "visible":
                    hidden.add(row)
        number += repeats
    grid.hidden_rows, grid.merged, grid.unvalued = frozenset(hidden), tuple(merged), frozenset(unvalued)
    grid.percent = frozenset(percent)
    return grid


def _take_cell(
    cell: ElementTree.Element, row: int, values: list[Any], merged: list[tuple[int, int, int, int]],
    unvalued: set[tuple[int, int]],
) -> None:  # fmt: skip
    kind = local_name(cell.tag)
    if kind not in ("table-cell", "covered-table-cell") or len(values) >= WIDEST:
        return
    column = len(values) + 1
    value = _value(cell)
    if value is None and _get(cell, "formula") and not _get(cell, "value-type"):
        unvalued.add((row, column))
    down, across = _count(cell, "number-rows-spanned"), _count(cell, "number-columns-spanned")
    if (down > 1 or across > 1) and kind == "table-cell":
        merged.append((row, column, row + down - 1, column + across - 1))
    values.extend([value] * min(_count(cell, "number-columns-repeated"), WIDEST - len(values)))


def _value(cell: ElementTree.Element) -> Any:
    kind = _get(cell, "value-type")
    if kind in _NUMBERS:
        try:
            return (_Share if kind == "percentage" else float)(_get(cell, "value"))
        except ValueError:
            return None
    if kind == "boolean":
        return _get(cell, "boolean-value") == "true"
    if kind == "date":
        try:
            return datetime.fromisoformat(_get(cell, "date-value"))
        except ValueError:
            pass  # the text that the cell shows is left
    text = "\n".join("".join(p.itertext()) for p in cell if local_name(p.tag) == "p")
    return text or None
