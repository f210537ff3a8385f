"""What a formula's LP_ calls become: sites in batches or callbacks, their arguments, scratch columns, engine text."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from itertools import count
from typing import Any

from .refs import Ref, column_letters

__all__ = [
    "FIT",
    "Arg",
    "Cells",
    "Computed",
    "Literal",
    "Pieces",
    "Result",
    "Setting",
    "Site",
    "Slot",
    "Supply",
    "Work",
    "formula_of",
    "text_of",
]

FIT = "LPFIT_"
WIDEST = 16_000  # columns of a scratch sheet


@dataclass(frozen=True, slots=True)
class Slot:
    """A scratch column: the formula's row of it belongs to the formula."""

    sheet: str
    column: int


Pieces = list[str | int | Slot]
"""Formula text: text, row numbers as offsets from the formula's row, and scratch cells."""


@dataclass(frozen=True, slots=True)
class Literal:
    """An argument that is the same in every row, or omitted."""

    value: Any


@dataclass(frozen=True, slots=True)
class Cells:
    """An argument read from one cell a row, or from a ``whole`` range where the parameter is a table.

    ``cut`` marks whole columns that need no blank rows behind the last cell of the workbook.
    """

    ref: Ref
    whole: bool = False
    cut: bool = False


@dataclass(slots=True, eq=False)
class Computed:
    """An argument, or a guard, that the engine works out in a scratch column."""

    slot: Slot
    pieces: Pieces


@dataclass(frozen=True, slots=True)
class Result:
    """An argument that is another batched call of the same formula."""

    site: Site


Arg = Literal | Cells | Computed | Result


@dataclass(slots=True, eq=False)
class Site:
    """One LP_ call of a group of formulas. ``args`` is None for a callback; ``given`` marks arguments not omitted."""

    name: str
    number: int
    args: list[Arg] | None
    given: tuple[bool, ...]
    own: bool = False  # its result is the cell's own value
    slot: Slot | None = None  # scratch column of a nested batched call
    first: bool = False  # a plain cell shows only the first value of an array answer
    columns: tuple[int, ...] = ()  # places of tables, where all of them are whole columns
    guard: Computed | None = None  # of a batched call: 1 where it is really made; None when it always is
    inner: list[Site] = field(default_factory=list)  # the calls inside this one
    level: int = 0


@dataclass(slots=True, eq=False)
class Work:
    """What becomes of a group: its sites and the engine's formula (None: a value cell, or the stored text as it is)."""

    sites: list[Site] = field(default_factory=list)
    pieces: Pieces | None = None
    fit: tuple[int, int] | None = None  # lay the result out over so many rows and columns
    single: bool = True  # the formula surely gives one value

    @property
    def own(self) -> Site | None:
        """The site whose results are the cells' values."""
        return next((s for s in self.sites if s.own), None)

    @property
    def slots(self) -> list[Slot]:
        """All scratch columns."""
        return [s.slot for s in self.sites if s.slot is not None] + [c.slot for c in self.computed]

    @property
    def computed(self) -> list[Computed]:
        """Scratch columns with formulas."""
        found = [a for s in self.sites for a in s.args or () if isinstance(a, Computed)]
        return found + [s.guard for s in self.sites if s.guard]


@dataclass(frozen=True, slots=True)
class Setting:
    """How a formula is stored: its sheet, its kind (see sheet.Group), the rows and columns a legacy array fills."""

    sheet: str
    kind: str = "plain"
    size: tuple[int, int] = (1, 1)


class Supply:
    """Site numbers and scratch columns, each given out once."""

    def __init__(self, titles: Iterable[str]) -> None:
        self._taken = {title.casefold() for title in titles}
        self._site, self._sheet, self._column = 0, "", WIDEST

    def number(self) -> int:
        """A new site's number."""
        self._site += 1
        return self._site

    def slot(self) -> Slot:
        """A free scratch column."""
        if self._column == WIDEST:
            names = (f"LP_SCRATCH_{n}" for n in count(1))
            self._sheet = next(name for name in names if name.casefold() not in self._taken)
            self._taken.add(self._sheet.casefold())
            self._column = 0
        self._column += 1
        return Slot(self._sheet, self._column)


def formula_of(work: Work) -> Pieces | None:
    """The engine's formula with its array laid into the stored range; None where there is none, or the stored one."""
    if work.pieces is None or work.fit is None:
        return work.pieces
    return [f"{FIT}({work.fit[0]},{work.fit[1]},", *work.pieces, ")"]


def text_of(pieces: Pieces) -> list[str | int]:
    """Pieces with the scratch columns written out and neighbouring text joined."""
    flat: list[str | int] = []
    for piece in pieces:
        parts: list[str | int] = (
            [f"{piece.sheet}!{column_letters(piece.column)}", 0] if isinstance(piece, Slot) else [piece]
        )
        for part in parts:
            if isinstance(part, str) and flat and isinstance(flat[-1], str):
                flat[-1] += part
            else:
                flat.append(part)
    return flat
