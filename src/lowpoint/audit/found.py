"""What a search of one page found, before units and SI: values with their labels, and what was not clear."""

from __future__ import annotations

from dataclasses import dataclass, field

from lowpoint.audit.cases import Cases
from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.matching import Label
from lowpoint.audit.roles import Role
from lowpoint.audit.runs import Taken
from lowpoint.audit.unitsigns import Sign

__all__ = ["Claimed", "Found"]


@dataclass(slots=True, eq=False)
class Claimed:
    """A value with the label that it belongs to."""

    label: Label
    role: Role
    taken: Taken
    case: str | None = None
    below: bool = False
    word: str | None = None
    head: Sign | None = None
    """Unit of a head of the column or row."""
    factor: float = 1.0
    """What the way of finding it takes from the confidence."""


@dataclass(eq=False)
class Found:
    """All that was found on a page."""

    page: Page
    cases: Cases
    values: list[Claimed] = field(default_factory=list)
    unsure: list[Claimed] = field(default_factory=list)
    unread: list[tuple[Cell, str]] = field(default_factory=list)
    """Numbers that no label explains, with the text beside them."""
    nameless: list[Claimed] = field(default_factory=list)
    """Several values side by side without the name of a case."""
    tables: list[Cell] = field(default_factory=list)
    """Labels of the rows or columns of a table by travel, which is not read."""
    ambiguous_numbers: list[Cell] = field(default_factory=list)
    decimal: str = "."
    gauge: bool | None = None
    """What a sentence on the sheet says of all its pressures."""
    gauge_from: str = ""
