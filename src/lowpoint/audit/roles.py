"""What each cell of a sheet may be: a label, a number, a unit, the name of a case, or just text."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass, replace
from functools import lru_cache

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.matching import FORM_WORDS, OTHER, UNSURE, Label, read_label
from lowpoint.audit.numbers import Number, decimal_sign, numbers_of
from lowpoint.audit.unitsigns import PLAIN, Sign, unit_sign
from lowpoint.audit.vocabulary import BY_KEY, fits
from lowpoint.audit.words import folded

__all__ = ["DASHES", "HEADS", "WORDS", "Role", "Roles", "context_of", "takes"]

DASHES = frozenset({"-", "–", "—", "--", "---", "n/a", "N/A", "n.a.", "NA", "tbd", "TBD", "*", "/", "...", "…", "none"})
"""Texts in place of a value that is not given."""
HEADS = re.compile(
    r"(?P<unit>units?|uom|units? of measure|einheit(?:en)?|unit[eé]s?|unidad(?:es)?|eng\.? units?)"
    r"|(?P<symbol>symbols?|sym\.?|sign|zeichen)|(?P<value>values?|data|wert|valeur|valor)"
    r"|(?P<remark>remarks?|notes?|comments?|rev\.?|no\.?|#|pos\.?|item no\.?|line|nr\.?|bemerkung(?:en)?)",
    re.IGNORECASE,
)
_ALONE = re.compile(r"[A-Za-zΔσρηνμ][A-Za-z0-9_]{0,3}(?:,[A-Za-z]+)?")
_FORMULA = re.compile(r"[A-Za-z][A-Za-z0-9]{0,2}\s?[-–−/]\s?[A-Za-z][A-Za-z0-9]{0,2}")
_CONTEXT = frozenset(
    [
        "inlet",
        "outlet",
        "valve",
        "body",
        "pipe",
        "line",
        "pressure",
        "temperature",
        "density",
        "velocity",
        "noise",
        "rated",
        "required",
        "calculated",
        "sigma",
        "orifice",
        "plate",
        "cavitation",
        "limit",
        "vapour",
        "critical",
        "drop",
        "recovery",
        "factor",
        "connection",
        "flow",
        "viscosity",
        "@sigma",
        "incipient",
        "choked",
        "maximum",
    ]
)
_SENTENCE = re.compile(r"\w+\s+\w+\s+\w+\s+\w+\s+\w+\s+\w+\s+\w+\s+\w+")


WORDS = frozenset({"word", "text"})
"""Kinds of quantity whose values are words."""


def takes(label: Label, sign: Sign) -> bool:
    """May a label's values have this unit?"""
    if not label.known:
        return True
    kind = BY_KEY[label.key].kind
    if sign.level:
        return kind == "level"
    return fits(kind, sign.meaning) or (kind == "coefficient" and sign.meaning.dimension == "m3 s-1")


@dataclass(slots=True, eq=False)
class Role:
    """One cell with all that it may be."""

    cell: Cell
    label: Label
    numbers: tuple[Number, ...] = ()
    sign: Sign | None = None
    dash: bool = False
    index: bool = False
    """A number that only counts lines."""
    inline: Cell | None = None
    """The value that stands behind the label in the same cell."""

    @property
    def numeric(self) -> bool:
        return bool(self.numbers) and not self.index


@lru_cache(2048)
def context_of(text: str) -> frozenset[str]:
    """The words of a heading that may make a short label clear."""
    return folded(FORM_WORDS.sub(" ", text)).tokens & _CONTEXT if len(text) < 60 else frozenset()


class Roles:
    """The roles of all cells of a page, and the decimal sign of its texts."""

    def __init__(self, page: Page, decimal: str | None = None) -> None:
        self.page = page
        self.decimal = decimal_sign(_likely(page)) if decimal is None else decimal
        self.of: dict[int, Role] = {}
        self.names: set[int] = set()
        """Cells (by id) that name a case; known once the cases were looked for."""
        extra: list[Cell] = []
        for cell in page.cells:
            role = self._role(cell)
            self.of[id(cell)] = role
            if role.inline is not None:
                extra.append(role.inline)
        for cell in extra:
            self.of[id(cell)] = Role(cell, Label(cell.text, "", 0.0), self.numbers(cell), None, cell.text in DASHES)
        self._mark_index()

    def numbers(self, cell: Cell) -> tuple[Number, ...]:
        if cell.kind in ("date", "error", "logical"):
            return ()
        if cell.number is not None:
            sign = unit_sign(cell.unit) if cell.unit else None
            return (Number(cell.number * cell.factor, cell.half, sign),)
        return numbers_of(cell.text, self.decimal)

    def _role(self, cell: Cell) -> Role:
        numbers = self.numbers(cell)
        none = Label(cell.text, "", 0.0)
        if numbers:
            return Role(cell, none, numbers)
        text = cell.text
        dash = text in DASHES
        sign = None if dash else unit_sign(text)
        label = read_label(text)
        inline = None
        if not sign:
            label, inline = self._inline(cell, label)
        return Role(cell, label, (), sign, dash, inline=inline)

    def _inline(self, cell: Cell, label: Label) -> tuple[Label, Cell | None]:
        """Label and value that share a cell: ``Inlet pressure: 12.5 bar g``, ``FL = 0.85``, ``Kvs 160``."""
        text = cell.text
        if len(text) > 120:
            return label, None
        for match in re.finditer(r"[:=]", text):
            name, value = text[: match.start()].strip(), text[match.end() :].strip()
            if name.count("(") != name.count(")"):
                continue
            found = read_label(name)
            if found.key and value and self._answers(found, value):
                return found, replace(cell, text=value, number=None, unit="")
        behind = re.search(r"\s[+-]?\d", text)
        if behind and label.score < 0.95:
            name, value = text[: behind.start()].strip(), text[behind.start() :].strip()
            found = read_label(name)
            if found.known and found.score >= 0.9 and self._stated(found, value):
                return found, replace(cell, text=value, number=None, unit="")
        return label, None

    def _stated(self, label: Label, value: str) -> bool:
        """Is a number right behind a label, without a sign between, its value? Its unit must fit, or none be needed."""
        kind = BY_KEY[label.key].kind
        numbers = numbers_of(value, self.decimal)
        if kind in WORDS or len(numbers) != 1 or numbers[0].rest:
            return False
        sign = numbers[0].sign
        return kind in ("ratio", "coefficient", "count") if sign is None else takes(label, sign)

    def _answers(self, label: Label, value: str) -> bool:
        """Is a text behind a label in its own cell its value?"""
        if value in PLAIN or value[0] in "([":
            return False
        if label.known and BY_KEY[label.key].kind in WORDS:
            return True
        numbers = numbers_of(value, self.decimal)
        return bool(numbers) and all(n.sign is None or not label.known or takes(label, n.sign) for n in numbers)

    def _mark_index(self) -> None:
        """Numbers that count lines: one more from each to the next, in one column, with text beside."""
        columns: dict[int, list[Role]] = {}
        for role in self.of.values():
            if (
                len(role.numbers) == 1
                and role.numbers[0].sign is None
                and role.numbers[0].value == role.numbers[0].value
            ):
                value = role.numbers[0].value
                if 0 < value < 1000 and role.cell.kind == "" and not role.cell.unit:
                    key = int(role.cell.left if self.page.exact else role.cell.middle // 12)
                    columns.setdefault(key, []).append(role)
        for roles in columns.values():
            roles.sort(key=lambda r: r.cell.row)
            run: list[Role] = []
            for role in roles:
                if run and not _follows(run, role):
                    self._close(run)
                    run = []
                run.append(role)
            self._close(run)

    def _close(self, run: list[Role]) -> None:
        if len(run) >= 4 and all(self._beside(role) for role in run):
            for role in run:
                role.index = True

    def _beside(self, role: Role) -> bool:
        """Is the next cell to the right a text that is no unit?"""
        right = self.page.right_of(role.cell)
        other = self.of.get(id(right[0])) if right else None
        return other is not None and not other.numbers and (other.sign is None or bool(other.label.key))

    def is_label(self, cell: Cell) -> bool:
        return bool(self.of[id(cell)].label.key)


def _follows(run: list[Role], role: Role) -> bool:
    """Does a number count on: by one, or within a section (1.9, 1.10, 2.1)?"""
    last, value = run[-1].numbers[0].value, role.numbers[0].value
    if last == int(last) and value == int(value):
        return value == last + 1
    parts = [tuple(int(p) for p in re.findall(r"\d+", r.cell.text)) for r in (run[-1], role)]
    return parts[0] < parts[1] and (parts[1][0] - parts[0][0] in (0, 1))


def _likely(page: Page) -> Iterable[str]:
    """Texts that may be numbers."""
    return (cell.text for cell in page.cells if cell.number is None and len(cell.text) < 40
            and any(c.isdigit() for c in cell.text) and not re.search(r"\d[./-]\d+[./-]\d", cell.text)
            and (cell.text[:1].isdigit() or cell.text[:1] in "+-<>≤≥~.," or re.search("[:=]", cell.text)))  # fmt: skip


def is_symbol(text: str) -> bool:
    """May a text be the symbol of the quantity beside it?"""
    return bool(_ALONE.fullmatch(text.strip("()[] ")))


def is_formula(text: str) -> bool:
    """Is a text two symbols with a sign between (``p1-p2``)?"""
    return bool(_FORMULA.fullmatch(text.strip("()[] ")))


def is_sentence(text: str) -> bool:
    return bool(_SENTENCE.search(text))


def ends_run(role: Role) -> bool:
    """Does a cell begin something else, so that what lies beyond belongs to it?"""
    return bool(role.label.key) or (not role.numbers and role.sign is None and not role.dash)


def unsure(label: Label) -> bool:
    return label.key == UNSURE


def other(label: Label) -> bool:
    return label.key == OTHER
