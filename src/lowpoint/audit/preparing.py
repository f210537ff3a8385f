"""A page made ready for the search: labels read with their surroundings, and what heads its columns."""

from __future__ import annotations

import re
from dataclasses import replace
from itertools import pairwise

from lowpoint.audit.cases import case_name
from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.matching import OTHER, Label, read_form, read_label
from lowpoint.audit.roles import HEADS, Role, Roles, context_of
from lowpoint.audit.unitsigns import Sign, unit_sign
from lowpoint.audit.words import folded

__all__ = ["Prepared"]


class Prepared:
    """The roles of a page's cells after broken labels were joined and short ones read with their headings."""

    def __init__(self, page: Page, decimal: str | None) -> None:
        self.page = page
        self.roles = Roles(page, decimal)
        self.unit_columns: list[tuple[float, float, int]] = []
        """Columns headed ``Unit``: left, right, row of the head."""
        self.sides: list[tuple[int, list[tuple[Cell, str]]]] = []
        """Rows that head one column ``Inlet`` and one ``Outlet``."""
        self.gauge: bool | None = None
        """What a sentence on the sheet says of all its pressures."""
        self.gauge_from = ""
        self._join()
        self._sides()
        self._context()
        self._forms()
        self._heads()
        self._reference()

    def _context(self) -> None:
        """Short labels get the words of the heading above or at their left, where they are not clear alone."""
        for role in list(self.roles.of.values()):
            text = role.cell.text
            if role.numbers or role.dash or role.label.key == OTHER or len(text) > 40:
                continue
            if role.label.known and not (role.label.key == "statement" and self.before_number(role)):
                continue
            if (role.sign is not None and not role.label.key) or self._is_head(role):
                continue
            for words in self._headings(role.cell):
                if not words:
                    continue
                label = read_label(text, words)
                if label.known and label.key != role.label.key:
                    role.label = label
                    break

    def _is_head(self, role: Role) -> bool:
        """Is the next cell to the right a label of its own, so that this one heads a block or a column?"""
        row = self.page.right_of(role.cell)
        if not row or self.page.order[0] > role.cell.row:
            return False
        other = self.roles.of[id(row[0])]
        before = [c for c in self.page.rows.get(role.cell.row, ()) if c.right <= role.cell.left + 0.5]
        return other.label.known and len(row[0].text) > 4 and not before and any(
            self.roles.of[id(c)].numeric for c in row)  # fmt: skip

    def before_number(self, role: Role) -> bool:
        """Is the next filled cell to the right a number?"""
        right = self.page.right_of(role.cell)
        return bool(right) and self.roles.of[id(right[0])].numeric

    def _join(self) -> None:
        """Labels that are broken over two rows: the row that has the numbers, or stands above them, keeps the whole."""
        rows = self.page.order
        for above, below in pairwise(rows):
            for cell in self.page.rows[above]:
                one = self.roles.of[id(cell)]
                if cell.row != above or cell.bottom != above or not self._joinable(one):
                    continue
                other = next((c for c in self.page.rows[below] if c.row == below and _aligned(c, cell)
                              and c is not cell and self._joinable(self.roles.of[id(c)])), None)  # fmt: skip
                if other is None:
                    continue
                two = self.roles.of[id(other)]
                joined = read_label(f"{cell.text} {other.text}")
                if not joined.known or joined.score < 0.85 or (one.label.known and two.label.known):
                    continue
                if joined.score < max(one.label.score, two.label.score) and (one.label.known or two.label.known):
                    continue
                numbers = [any(self.roles.of[id(c)].numeric for c in self.page.right_of(x)) for x in (cell, other)]
                if all(numbers):
                    continue
                keeper, left = (two, one) if numbers[1] else (one, two)
                keeper.label, left.label, left.dash = joined, Label(left.cell.text, "", 0.0), True

    def _joinable(self, role: Role) -> bool:
        if len(role.cell.text) < 2 or (role.sign and not role.label.key) or (len(role.cell.text) < 4 and not role.sign):
            return False
        return not (role.numbers or role.dash or role.inline) and len(role.cell.text) < 50 \
            and case_name(role.cell.text) is None and role.label.key != OTHER  # fmt: skip

    def _forms(self) -> None:
        """Indices that do not state their form take that of the heading above, else of the sheet's definition."""
        stated = {read_form(cell.text) for cell in self.page.cells if len(cell.text) < 120} - {None}
        for role in self.roles.of.values():
            label = role.label
            if not label.key.startswith("sigma") or label.form is not None or "@xf" in label.words:
                continue
            form = None
            for row in reversed([r for r in self.page.order if role.cell.row - 12 < r < role.cell.row]):
                cells = [c for c in self.page.rows[row] if c.row == row and not self.roles.of[id(c)].numbers]
                if len(cells) == 1 and not any(self.roles.of[id(c)].numeric for c in self.page.rows[row]):
                    form = read_form(cells[0].text)
                    break
            if form is None and len(stated) == 1:
                form = next(iter(stated))
            if form is not None:
                role.label = replace(label, form=form)

    def _headings(self, cell: Cell) -> list[frozenset[str]]:
        """Words of what stands left of a cell and above it, nearest first."""
        found = []
        left = [c for c in self.page.rows.get(cell.row, ()) if c.right <= cell.left + 0.5 and c is not cell]
        if left:
            other = self.roles.of[id(left[-1])]
            if not other.numbers and other.sign is None and not other.label.known:
                found.append(context_of(left[-1].text))
        else:
            found += self._beside_block(cell)
        seen = 0
        for row in reversed([r for r in self.page.order if r < cell.row]):
            over = [c for c in self.page.rows[row] if c.over(cell) > 0 and c.row == row]
            row_cells = [c for c in self.page.rows[row] if c.row == row and not self.roles.of[id(c)].numbers]
            if len(row_cells) == 1 and not over:
                over = row_cells
            elif not over and seen == 0:  # a head over several columns that is not merged
                over = [c for c in row_cells if c.right <= cell.left + 0.5][-1:]
            for c in over:
                other = self.roles.of[id(c)]
                if other.numbers or other.sign is not None or c.right - c.left > 1e9:
                    continue
                alone = not any(self.roles.of[id(x)].numeric for x in self.page.right_of(c)[:2])
                if alone and not other.inline:
                    words = context_of(c.text)
                    if words:
                        found.append(words)
            seen += 1
            if seen > 14 or len(found) > 2:
                break
        return found

    def _beside_block(self, cell: Cell) -> list[frozenset[str]]:
        """Words of the head at the left of a block whose further rows leave its column blank."""
        for row in reversed([r for r in self.page.order if cell.row - 6 <= r < cell.row]):
            left = [c for c in self.page.rows[row] if c.right <= cell.left + 0.5 and not self.roles.of[id(c)].numbers]
            if any(c.left < cell.left - 1.0 and c.right > cell.left + 0.5 for c in self.page.rows[row]):
                return []  # what stands there reaches over this column: no block
            if left:
                return [] if self.roles.of[id(left[-1])].label.known else [context_of(left[-1].text)]
        return []

    def _sides(self) -> None:
        """Rows that head one column ``Inlet`` and one ``Outlet``."""
        for row in self.page.order:
            cells = [c for c in self.page.rows[row] if c.row == row and len(c.text) < 30]
            words = [(c, "".join(folded(c.text).tokens - {"pipe", "side", "valve"})) for c in cells]
            named = [(c, word) for c, word in words if word in ("inlet", "outlet")]
            numbers = any(self.roles.of[id(c)].numeric for c in cells)
            if len(named) == 2 and named[0][1] != named[1][1] and not numbers:
                self.sides.append((row, named))

    def side_of(self, cell: Cell) -> str:
        """Under which of the heads ``Inlet`` and ``Outlet`` a value stands; empty where there are none."""
        for row, named in reversed(self.sides):
            if not row < cell.row <= row + 14:
                continue
            for head, word in named:
                if head.over(cell) > 0:
                    return word
            if not self.page.exact:
                head, word = min(named, key=lambda entry: abs(entry[0].middle - cell.middle))
                if abs(head.middle - cell.middle) < 0.4 * abs(named[0][0].middle - named[1][0].middle):
                    return word
        return ""

    def _heads(self) -> None:
        """Columns headed ``Unit``."""
        for cell in self.page.cells:
            match = HEADS.fullmatch(cell.text)
            if match and match["unit"]:
                self.unit_columns.append((cell.left, cell.right, cell.row))

    def _reference(self) -> None:
        """What a sentence such as ``All pressures are absolute`` says."""
        for cell in self.page.cells:
            low = cell.text.lower()
            if "pressures" not in low or len(low) > 200:
                continue
            gauge = re.search(r"\bgau?ge\b|\bbar\s?\(?g\)?\b|psig|kpa\s?\(?g\)?\b", low)
            absolute = re.search(r"\babs(?:olute)?\b|\bbar\s?\(?a\)?\b|psia|kpa\s?\(?a\)?\b", low)
            if bool(gauge) != bool(absolute) and re.search(r"\ball\b|\bpressures (?:are|in)\b|^pressures", low):
                self.gauge, self.gauge_from = bool(gauge), cell.address

    def head_unit(self, role: Role, below: bool) -> Sign | None:
        """The unit under a head ``Unit`` in the label's row, or of the heading above the label."""
        for left, right, row in self.unit_columns:
            if row < role.cell.row:
                for cell in self.page.rows.get(role.cell.row, ()):
                    if cell.left < right and cell.right > left:
                        sign = unit_sign(cell.text)
                        if sign:
                            return sign
        if below:
            return None
        for row in reversed([r for r in self.page.order if role.cell.row - 8 <= r < role.cell.row]):
            cells = [c for c in self.page.rows[row] if c.row == row]
            if len(cells) == 1 and not self.roles.of[id(cells[0])].numeric:
                match = re.search(r"[\[(,]\s*([^\[\](),]+(?:\([ag]\))?)\s*[\])]?$", cells[0].text)
                sign = unit_sign(match[1]) if match else None
                return sign
        return None


def _aligned(one: Cell, other: Cell) -> bool:
    """Do two cells stand flush with each other, left, right or centred?"""
    offs = (one.left - other.left, one.right - other.right, one.middle - other.middle)
    return min(abs(off) for off in offs) < 2.0 and one.over(other) > 0
