"""Sheets that hold several items, side by side or one below the other: parted, so that no number is judged by another
item's. Where the parts are not clear nothing is parted."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.found import Found

__all__ = ["SURE", "parts_of", "tags_of"]

SURE = 0.95
"""Score of a label that surely names the tag of the item."""
END = float("inf")


def tags_of(found: Found) -> list[tuple[Cell, Cell]]:
    """The tags of a page, each once: the cell of its label and its own. Further texts of the same make in the row of a
    tag (``21-FV-1 | 21-FV-2``) are tags too."""
    heads = [(c.role.cell, c.taken.cell) for c in found.values
             if c.label.key == "tag" and c.word and c.label.score >= SURE]  # fmt: skip
    for label, first in list(heads):
        behind = found.page.right_of(first)
        heads += [(label, cell) for cell in behind if _make(cell.text) == _make(first.text) != "9"]
    once = {tag.text.strip(): (label, tag) for label, tag in reversed(heads)}
    return sorted(once.values(), key=lambda head: (head[1].row, head[1].left))


def _make(text: str) -> str:
    """A tag with its numbers made equal."""
    return re.sub(r"\d+", "9", text.strip().upper())


def parts_of(page: Page, tags: Sequence[tuple[Cell, Cell]]) -> list[Page]:
    """One page for each of several items, named after its tag, with what stands above or at the left of all; empty
    where the items stand neither side by side nor one below the other."""
    if len(tags) < 2 or not page.exact:
        return []
    rows = [label.row for label, _ in tags]
    labels = {id(label) for label, _ in tags}
    if len(set(rows)) == len(rows) == len(labels):
        return [_part(page, tag, [c for c in page.cells if c.row < rows[0] or top <= c.row < end])
                for (_, tag), (top, end) in zip(tags, pairwise((*rows, END)), strict=True)]  # fmt: skip
    if len(set(rows)) > 1 or len(labels) not in (1, len(tags)):
        return []
    lefts = [(tag if len(labels) == 1 else label).left for label, tag in tags]
    return [_part(page, tag, [c for c in page.cells if _stands(c, rows[0], lefts[0], left, end)])
            for (_, tag), (left, end) in zip(tags, pairwise((*lefts, END)), strict=True)]  # fmt: skip


def _stands(cell: Cell, top: int, first: float, left: float, end: float) -> bool:
    """Does a cell belong to the columns of an item, or to all: above the tags, left of them, or over several?"""
    if cell.row < top or cell.right <= first + 0.5:
        return True
    return cell.left < end and cell.right > left


def _part(page: Page, tag: Cell, cells: list[Cell]) -> Page:
    name = f"{page.name}, {tag.text.strip()}"
    return Page(name, [replace(cell) for cell in cells], state=page.state, notes=list(page.notes))
