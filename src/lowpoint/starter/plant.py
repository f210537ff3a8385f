"""What a valve list is made of: areas, kinds of trim, vendor tables, items and their operating cases."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

__all__ = ["Area", "Case", "Item", "Plant", "Reading", "Readings", "Table", "Trim", "maximum", "minimum", "normal",
           "start_up"]  # fmt: skip


@dataclass(frozen=True, slots=True)
class Area:
    """A part of the plant; its elevation (m or ft) decides the barometric pressure there."""

    name: str
    elevation: float


@dataclass(frozen=True, slots=True)
class Table:
    """A vendor's table of one valve: travel (%), coefficient, FL and incipient index at it, row by row."""

    name: str
    rows: Sequence[tuple[float, float, float, float]]


@dataclass(frozen=True, slots=True)
class Trim:
    """A kind of valve: style and direction as LP_TYPICAL spells them, FL, and limits as its vendor would state them.

    ``limits`` are incipient, constant and damage index in upstream form, None where none is stated, for the valve of
    size ``size_ref`` at a head ``head_ref`` (p1 - pv); ``exponents`` carry them to other sizes and heads.
    """

    style: str
    direction: str
    fl: float
    limits: tuple[float | None, float | None, float | None]
    basis: str
    size_ref: float
    head_ref: float
    exponents: tuple[float, float]
    fl_basis: str = "tested"
    fd: float | None = None
    characteristic: str = "equal percentage"
    rangeability: float | None = 50.0


@dataclass(frozen=True, slots=True)
class Case:
    """One operating case in the units of its list; pressures as they were read, in the item's pressure unit.

    ``instead`` replaces cells by column key: the FL at this case's opening, or a mistake, which ``remark`` then owns.
    """

    name: str
    flow: float
    p1: float
    p2: float
    t: float
    instead: Mapping[str, Any] = field(default_factory=dict)
    remark: str | None = None

    def at(self, fl: float) -> Case:
        """The same case with the FL of its opening."""
        return replace(self, instead={**self.instead, "fl": fl})

    def wrong(self, remark: str, **cells: Any) -> Case:
        """The same case with a planted mistake."""
        return replace(self, instead={**self.instead, **cells}, remark=f"planted: {remark}")

    def noting(self, remark: str, **cells: Any) -> Case:
        """The same case with something to note, or other cells, which is no mistake."""
        return replace(self, instead={**self.instead, **cells}, remark=remark)


def minimum(flow: float, p1: float, p2: float, t: float) -> Case:
    """The minimum case."""
    return Case("minimum", flow, p1, p2, t)


def normal(flow: float, p1: float, p2: float, t: float) -> Case:
    """The normal case."""
    return Case("normal", flow, p1, p2, t)


def maximum(flow: float, p1: float, p2: float, t: float) -> Case:
    """The maximum case."""
    return Case("maximum", flow, p1, p2, t)


def start_up(flow: float, p1: float, p2: float, t: float) -> Case:
    """The start-up case."""
    return Case("start-up", flow, p1, p2, t)


@dataclass(frozen=True, slots=True)
class Item:
    """A control valve: ``sizes`` are valve size and the inside diameters of the pipes before and after it.

    ``keep`` is the limit above which its index must stay; ``table`` the vendor's table that gives its FL and
    incipient limit at the opening; ``estimate`` asks for the incipient limit by formula instead of the trim's.
    """

    tag: str
    area: Area
    service: str
    fluid: str
    trim: Trim
    sizes: tuple[float, float, float]
    rated: float
    keep: str
    cases: tuple[Case, Case, Case]
    salinity: float | None = None
    unit: str | None = None
    table: Table | None = None
    estimate: bool = False


@dataclass(frozen=True, slots=True)
class Reading:
    """What the instruments at one valve showed in one hour; pressures absolute, in the units of the list."""

    hour: int
    flow: float
    p1: float
    p2: float
    t: float


@dataclass(frozen=True, slots=True)
class Readings:
    """A long list of readings of the item with this tag."""

    tag: str
    rows: Sequence[Reading]


@dataclass(frozen=True, slots=True)
class Plant:
    """Everything that a sample book shows, in one set of units; ``readings`` where it has a long list too."""

    name: str
    system: str
    areas: Sequence[Area]
    tables: Sequence[Table]
    items: Sequence[Item]
    readings: Readings | None = None
