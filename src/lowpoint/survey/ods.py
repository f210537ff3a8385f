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
_LOGICAL = ("of:=TRUE()", "of:=FALSE()")
WIDEST = 16_384
"""Columns of the widest sheet that programs write."""


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
    unseen = _unseen_styles(root)
    tables = [table for table in body if local_name(table.tag) == "table"]
    return Sheets("ods", tuple(_grid(table, counted, unseen) for table in tables))


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


def _unseen_styles(root: ElementTree.Element) -> frozenset[str]:
    """Names of the styles of hidden sheets."""
    styles = (style for style in root.iter() if local_name(style.tag) == "style")
    return frozenset(_get(style, "name") for style in styles
                     if any(_get(part, "display", "true") == "false" for part in style))  # fmt: skip


def _hidden_columns(table: ElementTree.Element) -> Iterator[int]:
    """Numbers of the columns that are hidden or filtered away, out of their groups."""
    first = 1
    for item in table.iter():
        if local_name(item.tag) == "table-column":
            after = first + _count(item, "number-columns-repeated")
            if _get(item, "visibility", "visible") != "visible":
                yield from range(first, min(after, WIDEST + 1))
            first = after


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


def _grid(table: ElementTree.Element, counted: CellCount, unseen: frozenset[str]) -> Grid:
    grid = Grid(_get(table, "name"), hidden_columns=frozenset(_hidden_columns(table)))
    grid.state = "hidden" if _get(table, "style-name") in unseen else "visible"
    hidden: set[int] = set()
    merged: list[tuple[int, int, int, int]] = []
    unvalued: set[tuple[int, int]] = set()
    percent: set[tuple[int, int]] = set()
    number = 1
    for item in _rows(table):
        repeats = _count(item, "number-rows-repeated")
        values: list[Any] = []
        for cell in _to_the_last(item):
            _take_cell(cell, number, values, merged, unvalued)
        shares = [column for column, value in enumerate(values) if isinstance(value, _Share)]
        values = [float(value) if isinstance(value, _Share) else value for value in values]
        while values and values[-1] is None:
            values.pop()
        if values:
            counted.add(len(values) * repeats)
            for row in range(number, number + repeats):
                grid.rows.append((row, list(values)))
                percent.update((row, column + 1) for column in shares)
                if _get(item, "visibility", "visible") != "visible":
                    hidden.add(row)
        number += repeats
    grid.hidden_rows, grid.merged, grid.unvalued = frozenset(hidden), tuple(merged), frozenset(unvalued)
    grid.percent = frozenset(percent)
    return grid


def _to_the_last(row: ElementTree.Element) -> list[ElementTree.Element]:
    """The cells of a row without the blank ones that fill it up to the edge of the sheet."""
    cells = list(row)
    while cells and _is_filling(cells[-1]):
        cells.pop()
    return cells


def _is_filling(cell: ElementTree.Element) -> bool:
    told = ("formula", "value-type", "number-rows-spanned", "number-columns-spanned")
    return not len(cell) and not any(_get(cell, name) for name in told)


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
    if _get(cell, "formula") in _LOGICAL:  # how a program keeps a logical value: as a number, which it is not
        return _get(cell, "formula") == _LOGICAL[0]
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
