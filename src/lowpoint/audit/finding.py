"""From the cells of one page to its quantities: every label, its values, their cases and units.

Nothing here is computed from hydraulics: the sense of a number never decides what it is. What is not sure is told.
"""

from __future__ import annotations

import re
from dataclasses import replace

from lowpoint.audit.cases import case_name, find_cases
from lowpoint.audit.cells import Page
from lowpoint.audit.found import Claimed, Found
from lowpoint.audit.matching import OTHER, UNSURE, Label, read_label
from lowpoint.audit.preparing import Prepared
from lowpoint.audit.roles import WORDS, Role
from lowpoint.audit.runs import Taken, along_row, down_column, texts_along, texts_below
from lowpoint.audit.settling import settle
from lowpoint.audit.statements import is_answer, statement_of
from lowpoint.audit.unitsigns import unit_sign
from lowpoint.audit.vocabulary import BY_KEY

__all__ = ["find"]

GIVEN_ONCE = frozenset({"t", "pv", "density", "viscosity", "kinematic", "fl", "xfz", "sound_speed"})
"""Given once, below the first of several cases, they hold for all of them."""
INLET_ONLY = frozenset({"t", "density", "pv", "viscosity", "kinematic", "sound_speed", "flow", "mass_flow"})
"""What the method knows at the inlet only."""


def find(page: Page, decimal: str | None = None) -> Found:
    """The quantities of a page; ``decimal`` is the sign of numbers in texts where that is known."""
    return _Finder(page, decimal).run()


def _with_coefficients(label: Label, taken: list[Taken]) -> list[Taken]:
    """Two numbers of one label that names both coefficients (``Kv / Cv``) are one in each."""
    named = re.findall(r"\b[KC]vs?\b", label.text, re.IGNORECASE)
    if len(taken) == len(named) == 2 and named[0].lower()[0] != named[1].lower()[0]:
        for one, word in zip(taken, named, strict=True):
            one.sign, one.unit_from = unit_sign(word[:2].capitalize()), "quantity"
    return taken


def _sizes_only(label: Label, taken: list[Taken]) -> list[Taken]:
    """Of a size and what else its cell holds (``3" / 150#``, ``DN 80 / PN 16``), the size."""
    if not label.key.startswith(("valve_size", "pipe_")) and label.key != UNSURE:
        return taken
    shared = [t for t in taken if sum(u.cell is t.cell for u in taken) > 1]
    sized = [t for t in shared if t.number is not None and t.number.sign is not None]
    return [t for t in taken if t not in shared or t in sized] if sized else taken


def _on_side(label: Label, side: str) -> Label | None:
    """What a label names in the column of the inlet or the outlet; None for what the method knows at the inlet only."""
    sided = read_label(f"{side} {label.text}")
    if sided.known and sided.score >= 0.9:
        return replace(sided, text=label.text, unit=label.unit or sided.unit)
    return None if side == "outlet" and label.known and label.key in INLET_ONLY else label


SURE = 0.9
"""A text below this score may as well be a value in words: ``return line``."""


class _Finder:
    def __init__(self, page: Page, decimal: str | None) -> None:
        self.page = page
        self.ready = Prepared(page, decimal)
        self.roles = self.ready.roles
        self.owner: dict[int, list[Claimed]] = {}
        """What each cell (by id) is the value of: one label's numbers."""
        self.aside: set[int] = set()
        """Cells that are understood and not used."""
        numeric = {key for key, role in self.roles.of.items() if role.numeric}
        others = frozenset(key for key, role in self.roles.of.items() if role.label.key == OTHER)
        labelled = {key: self._has_values(role) for key, role in self.roles.of.items() if role.label.key}
        self.found = Found(page, find_cases(page, labelled, numeric, others), decimal=self.roles.decimal,
                           gauge=self.ready.gauge, gauge_from=self.ready.gauge_from)  # fmt: skip
        self.roles.names = self.found.cases.used
        self._over_rows()

    def _over_rows(self) -> None:
        """A label beside a column of cases holds for their rows below it, as long as its own column is blank there."""
        for left, _, _, names in self.found.cases.columns:
            for role in self.roles.of.values():
                cell = role.cell
                if not role.label.key or cell.right > left + 0.5 or cell.row not in names:
                    continue
                while cell.bottom + 1 in names and not any(
                    c.right <= left + 0.5 and c is not cell for c in self.page.rows.get(cell.bottom + 1, ())
                ):
                    cell.bottom += 1

    def _has_values(self, role: Role) -> bool:
        """Does a number stand right of a label (or in its cell), so that the text is no name of a case?"""
        if role.inline is not None:
            return True
        if role.label.key == OTHER:
            return case_name(role.cell.text) is None
        if not role.label.known and role.label.key != UNSURE:
            return False
        if case_name(role.cell.text) is None:
            return True
        return any(self.roles.of[id(c)].numeric for c in self.page.right_of(role.cell)[:3])

    def run(self) -> Found:
        cases = self.found.cases
        labels = [role for role in self.roles.of.values() if role.label.key and id(role.cell) not in cases.used]
        words = [r for r in labels if r.label.known and BY_KEY[r.label.key].kind in WORDS]
        for role in words:
            if not self._is_statement(role):
                self._words(role)
        for role in labels:
            if role in words or id(role.cell) in self.owner:
                continue
            self._numbers(role)
        settle([one for claims in self.owner.values() for one in claims], self.found)
        self._free_statements()
        self._rest()
        return self.found

    def _claim(self, claimed: Claimed) -> None:
        """A cell belongs to one label: the surer, then the nearer."""
        key = id(claimed.taken.cell)
        old = self.owner.get(key)
        if old and old[0].role is claimed.role:
            old.append(claimed)  # a second number of the same cell
        elif not old or self._rank(old[0]) < self._rank(claimed):
            self.owner[key] = [claimed]

    def _rank(self, claimed: Claimed) -> tuple[int, int]:
        known = 2 if claimed.label.known else 1 if claimed.label.key == UNSURE else 0
        return known - 1 if claimed.below and known else known, -claimed.taken.steps

    def _words(self, role: Role) -> None:
        term = BY_KEY[role.label.key]
        several = term.key == "statement"
        if several and self._heads_answers(role):
            taken, below = texts_below(self.roles, role, several), True
        elif role.inline is not None:
            taken = [Taken(role.inline, None)]
            below = False
        else:
            taken = texts_along(self.roles, role, role.cell.row, several)
            below = not taken
            if below and not self._is_section(role):
                taken = texts_below(self.roles, role, several)
            if not taken:
                return
        if term.key == "statement":
            cases = self._cases_of_words(taken, below)
            for t, case in zip(taken, cases, strict=True):
                word = statement_of(t.cell.text, role.label.words)
                if word:
                    self._claim(Claimed(role.label, role, t, case, below, word))
            return
        for t in taken:
            if self.roles.of[id(t.cell)].numbers and term.key in ("fluid", "direction", "characteristic", "style"):
                continue
            self._claim(Claimed(role.label, role, t, None, below, t.cell.text.strip()))

    def _is_statement(self, role: Role) -> bool:
        """Is what reads like a label a further statement in a row of them (``Flow regime | choked | cavitating``)?"""
        owners = self.owner.get(id(role.cell), ())
        return any(one.label.key == "statement" and not one.below and one.word for one in owners)

    def _heads_answers(self, role: Role) -> bool:
        """Does a label head a column of bare answers?"""
        if role.inline is not None:
            return False
        below, right = self.page.below(role.cell), self.page.right_of(role.cell)
        return bool(below) and is_answer(below[0].text) and not (right and is_answer(right[0].text))

    def _cases_of_words(self, taken: list[Taken], below: bool) -> list[str | None]:
        """The case of each statement of a label; where there are as many as names of cases, and they stand beside the
        names (a row without the cell of the unit), they are theirs in this order."""
        cases = [self._case(t, "statement", below, len(taken)) for t in taken]
        header = None if below else self.found.cases.header_of(taken[0].cell)
        if header is None or len(header.names) != len(taken) or len(set(cases)) == 1:
            return cases
        return [name for _, name in header.names]

    def _is_section(self, role: Role) -> bool:
        """A label alone in its row with a known label right below is the heading of a block."""
        below = self.page.below(role.cell)
        label = self.roles.of[id(below[0])].label if below else None
        return label is not None and label.key != "" and label.score >= SURE

    def _numbers(self, role: Role) -> None:
        if role.inline is not None:
            numbers = self.roles.numbers(role.inline)
            taken = [Taken(role.inline, n, n.sign, "cell" if n.sign else "") for n in numbers]
            more = along_row(self.roles, role, role.cell.row) if numbers and role.label.known else []
            self._emit(role, taken + [m for m in more if self.found.cases.of_column(m.cell)[0]], False)
            return
        right = [t for row in range(role.cell.row, max(role.cell.bottom, role.cell.row) + 1)
                 for t in along_row(self.roles, role, row)]  # fmt: skip
        right = [
            t for n, t in enumerate(right) if not any(t.cell is u.cell and t.number is u.number for u in right[:n])
        ]
        down = down_column(self.roles, role) if not right or self._heads_a_column(role) else []
        if down and (not right or self._heads_a_column(role)):
            self._emit(role, down, True)
        elif right:
            self._emit(role, right, False)

    def _heads_a_column(self, role: Role) -> bool:
        """Does a row of labels stand here, with numbers below?"""
        row = [c for c in self.page.rows.get(role.cell.row, ()) if c.row == role.cell.row]
        labels = sum(bool(self.roles.of[id(c)].label.key) for c in row)
        numbers = sum(self.roles.of[id(c)].numeric for c in row)
        return labels >= 3 and numbers == 0

    def _emit(self, role: Role, taken: list[Taken], below: bool) -> None:
        label = role.label
        head = self.ready.head_unit(role, below)
        taken = _sizes_only(label, taken)
        for t in _with_coefficients(label, taken):
            side = "" if below or not self.ready.sides else self.ready.side_of(t.cell)
            if side:
                sided = _on_side(role.label, side)
                if sided is None:
                    self.aside.add(id(t.cell))
                    continue
                label = sided
            claimed = Claimed(label, role, t, self._case(t, label.key, below, len(taken)), below, head=head)
            self._claim(claimed)

    def _case(self, taken: Taken, key: str, below: bool, count: int) -> str | None:
        cases = self.found.cases
        scope = BY_KEY[key].scope if key in BY_KEY else "case"
        if below:
            return cases.of_row(taken.cell) or (cases.of_section(taken.cell) if scope == "case" else None)
        name, spread = cases.of_column(taken.cell)
        if spread:
            return None
        if name is not None:
            header = cases.header_of(taken.cell)
            if count == 1 and header is not None and len(header.names) > 1:
                first = header.names[0][1] == name
                if scope == "item" or self._apart(header.row, taken.cell.row) or (first and key in GIVEN_ONCE):
                    return None
            return name
        name = cases.of_row(taken.cell)
        if name is not None:
            return name
        return cases.of_section(taken.cell) if scope == "case" else None

    def _apart(self, top: int, row: int) -> bool:
        """Does a heading that stands alone part a row from the names of cases above it?"""
        for between in [r for r in self.page.order if top < r < row]:
            cells = [c for c in self.page.rows[between] if c.row == between and not self.roles.of[id(c)].index]
            if (
                len(cells) == 1
                and not self.roles.of[id(cells[0])].numeric
                and self.roles.of[id(cells[0])].inline is None
            ):
                return True
        return False

    def _free_statements(self) -> None:
        """Short texts that say by themselves whether it cavitates, flashes or chokes."""
        for cell in self.page.cells:
            if id(cell) in self.owner or id(cell) in self.found.cases.used:
                continue
            role = self.roles.of[id(cell)]
            if role.numbers or role.inline is not None or (role.label.key not in ("", "statement")):
                continue
            if role.label.key == "statement" and self._answered(role):
                continue
            word = statement_of(cell.text)
            if word and not (role.label.key == "statement" and len(cell.text.split()) == 1 and self._is_section(role)):
                label = Label(cell.text, "statement", 0.8, words=frozenset({"statement"}))
                case = self.found.cases.of_column(cell)[0] or self.found.cases.of_row(cell)
                self.found.values.append(Claimed(label, role, Taken(cell, None), case, word=word))

    def _answered(self, role: Role) -> bool:
        return any(c.role is role for claims in self.owner.values() for c in claims)

    def _rest(self) -> None:
        """Numbers that nobody claimed, with what stands beside them."""
        for role in self.roles.of.values():
            if (
                not role.numeric
                or id(role.cell) in self.owner
                or id(role.cell) in self.aside
                or id(role.cell) in self.found.cases.used
            ):
                continue
            left = [c for c in self.page.rows.get(role.cell.row, ()) if c.right <= role.cell.left + 0.5]
            texts = [c for c in left if not (self.roles.of[id(c)].numbers or self.roles.of[id(c)].dash)]
            texts = [c for c in texts if self.roles.of[id(c)].sign is None] or texts
            beside = texts[-1] if texts else None
            if beside is not None and (
                self.roles.of[id(beside)].label.key == OTHER or id(beside) in self.found.cases.used
            ):
                continue
            self.found.unread.append((role.cell, beside.text if beside is not None else ""))
