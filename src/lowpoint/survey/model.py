"""What a survey is made of: the cases as they were read, what was found for each, the items, and the whole.

``Cases`` and ``Findings`` are tables of columns: one NumPy array a field, one element a case (a row of the list),
in the list's order. Numbers are coherent SI (pressures Pa absolute, temperatures K, flow m3/s, lengths m, flow
coefficients as Av in m2, travel and salinity as shares), NaN where there is none. Words are object arrays of str,
None where there is none. Every index and limit of ``Findings`` is in the upstream form.

The way of a list: ``reading`` makes ``Cases``; ``complete`` fills in properties and outlet pressures; ``calculate``
gives the numbers of ``Findings`` (vectorised, no texts: the way for draws and trial remedies); ``judge`` does all this
and adds cautions and errors.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, fields, replace
from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np
import numpy.typing as npt

from lowpoint.survey.travel import Numbers, TravelTable

if TYPE_CHECKING:
    from lowpoint.survey.listed_rows import ListRows
    from lowpoint.survey.outcome import Remedy, Sensitivity, Tolerance

__all__ = ["Cases", "Findings", "Flags", "Item", "Numbers", "Problem", "ReadColumn", "Reading", "Survey", "TravelTable",
           "Words", "absent", "number_fields", "word_fields"]  # fmt: skip

Words: TypeAlias = npt.NDArray[np.object_]
Flags: TypeAlias = npt.NDArray[np.bool_]
Rows: TypeAlias = npt.NDArray[Any]


@dataclass(frozen=True, eq=False)
class Cases:
    """The rows of a list, one element a case. See the module for units; a field says what a blank means."""

    # --- which row ---
    tag: Words
    case: Words
    kind: Words
    """``valve``, ``orifice`` (one plate) or ``plates`` (several in series)."""
    service: Words
    sheet: Words
    """Name of the sheet that the row stands on (a csv: its file name)."""
    row: npt.NDArray[np.int64]
    """Row of the sheet, counted from 1."""
    # --- site and liquid ---
    elevation: Numbers
    atmosphere: Numbers
    """Barometric pressure; from the elevation where only that is given."""
    fluid: Words
    """As written; None where the properties are given instead."""
    salinity: Numbers
    t: Numbers
    p1: Numbers
    p2: Numbers
    """At the outlet; found from ``outlet`` where that is given instead."""
    pv: Numbers
    pc: Numbers
    density: Numbers
    viscosity: Numbers
    """Dynamic; blank: turbulent flow."""
    sound_speed: Numbers
    flow: Numbers
    mass_flow: Numbers
    """kg/s, where the list gives a mass flow; ``flow`` follows from it."""
    kinematic: Numbers
    """m2/s, where the list gives a kinematic viscosity; ``viscosity`` follows from it."""
    # --- place of the outlet, instead of p2 ---
    outlet: Words
    """``pipe``, ``submerged``, ``free jet``, ``falling leg``; None: p2 is given."""
    outlet_pressure: Numbers
    """Pressure in the place: of the pipe or the gas space over the liquid; blank: the atmosphere."""
    outlet_rise: Numbers
    """Upward from the valve (downward negative) to the place: level of the liquid, end of the leg, pipe."""
    outlet_loss: Numbers
    """Friction between the valve and the place, a pressure; blank: none, with a caution."""
    # --- valve ---
    style: Words
    direction: Words
    valve_size: Numbers
    pipe_in: Numbers
    """Inside diameter of the pipe before it; blank: line size. The pipe of a plate."""
    pipe_out: Numbers
    pipe_wall: Numbers
    rated: Numbers
    characteristic: Words
    """``linear``, ``equal percentage``, or None; a table goes before it."""
    rangeability: Numbers
    table: Words
    """Name of the travel table, a key of ``tables``."""
    trim: Words
    """``full`` or ``reduced``, for non-turbulent flow."""
    fl: Numbers
    fl_basis: Words
    """``tested``, ``published``, ``estimated``."""
    fd: Numbers
    xfz: Numbers
    """xF of incipient cavitation at 6 bar."""
    # --- limits as stated ---
    form: Words
    """Form of the stated limits and of the index shown: ``upstream`` (blank), ``downstream``, ``xf``."""
    incipient: Numbers
    constant: Numbers
    damage: Numbers
    vibration: Numbers
    """As stated, in ``form``; limits of the bare valve at the test size and head."""
    estimate: Flags
    """Whether the list asks for an estimated incipient limit (xFz by formula)."""
    limits_basis: Words
    size_ref: Numbers
    head_ref: Numbers
    size_exponent: Numbers
    head_exponent: Numbers
    method: Words
    """``isa`` (blank), ``upstream``, ``tullis``."""
    keep: Words
    """Limit above which the index must stay: ``incipient``, ``constant``, ``damage``, ``vibration``, ``choked``."""
    # --- plates ---
    bore: Numbers
    """Of one plate; NaN for a set."""
    bore_length: Numbers
    holes: Numbers
    bores: Words
    """Of a set: a tuple of bores from the first plate to the last, m; else None."""
    spacing: Numbers
    """Distance from plate to plate."""
    # --- the rest ---
    tables: Mapping[str, TravelTable] = field(default_factory=dict)
    source: Mapping[str, Words] = field(default_factory=dict)
    """Field -> where each value came from: ``given``, ``item`` (another row of the tag), ``computed``, ``place``,
    ``typical``, ``table``; None where there is none. Fields that are only ever given are left out."""
    problems: tuple[tuple[int, str], ...] = ()
    """What is wrong with rows, found while reading: (place in these arrays, sentence). Such rows have no verdict."""
    remarks: tuple[tuple[int, str], ...] = ()
    """What a reader should know of rows (cautions found while reading)."""

    @property
    def count(self) -> int:
        """How many cases."""
        return len(self.tag)

    def take(self, rows: Rows) -> Cases:
        """The cases at these places (any index array; repeats allowed); problems and remarks do not come along."""
        columns = {name: getattr(self, name)[rows] for name in (*number_fields(), *word_fields(), "row", "estimate")}
        source = {name: words[rows] for name, words in self.source.items()}
        return replace(self, **columns, source=source, problems=(), remarks=())

    def changed(self, **columns: Any) -> Cases:
        """The same cases with some columns replaced (numbers or words, one a case, or one for all)."""
        spread: dict[str, Any] = {name: np.broadcast_to(value, self.count).copy() if name not in _OTHERS else value
                  for name, value in columns.items()}  # fmt: skip
        return replace(self, **spread)


_OTHERS = frozenset({"tables", "source", "problems", "remarks"})


def absent(words: Any) -> Any:
    """Where a column of words has none, or a column of numbers no number."""
    return np.isnan(words) if words.dtype.kind == "f" else np.equal(words, np.array(None, object)).astype(np.bool_)


def number_fields(of: type = Cases) -> tuple[str, ...]:
    """Names of the number columns of :class:`Cases` or :class:`Findings`."""
    return tuple(f.name for f in fields(of) if f.type == "Numbers")


def word_fields(of: type = Cases) -> tuple[str, ...]:
    """Names of the word columns."""
    return tuple(f.name for f in fields(of) if f.type == "Words")


@dataclass(frozen=True, eq=False)
class Findings:
    """What was found for each case, one element a case; NaN or None where there is no answer."""

    coefficient: Numbers
    """Required flow coefficient, Av in m2, fittings and choking included (a plate: of the plate in its pipe)."""
    travel: Numbers
    """Opening, share of the travel; NaN for plates."""
    capacity: Numbers
    """Required over rated coefficient (a plate: over its own); above 1 it does not pass the flow."""
    fl: Numbers
    """Recovery factor used (at the opening where a table gives it; of the plate)."""
    fl_basis: Words
    drop: Numbers
    """p1 - p2 (a set: of the plate that decides)."""
    choked_drop: Numbers
    throat_pressure: Numbers
    """In the vena contracta, not below FF pv; no evidence of no cavitation."""
    sigma: Numbers
    """Index, upstream form (a set: of the plate that decides)."""
    index: Numbers
    """The same in the form of the row."""
    incipient_scaled: Numbers
    constant_scaled: Numbers
    damage_scaled: Numbers
    vibration_scaled: Numbers
    """Limits of the bare valve at this size and head."""
    incipient: Numbers
    constant: Numbers
    damage: Numbers
    vibration: Numbers
    """Limits at this size and head, between these reducers: what the index is compared with."""
    choked_limit: Numbers
    """Index at choking, exact."""
    incipient_basis: Words
    limits_basis: Words
    """Of the other limits."""
    keep: Words
    """The limit that the margin counts to: the one to keep, else the mildest that is given."""
    limit: Numbers
    """Its value."""
    margin: Numbers
    """sigma/limit - 1; at or below 0 it is crossed."""
    margin_incipient: Numbers
    margin_constant: Numbers
    margin_damage: Numbers
    margin_vibration: Numbers
    margin_choked: Numbers
    allowed_drop: Numbers
    """Largest drop that keeps the limit, (p1-pv)/limit."""
    allowed_outlet: Numbers
    """Outlet pressure at that drop."""
    regime: Words
    """The word of LP_REGIME; None where there is no verdict."""
    basis: Words
    """Weakest basis that the regime rests on: ``tested``, ``published``, ``estimated``; None for flashing."""
    choked: Flags
    flashing: Flags
    """p2 at or below pv; both flags may stand together."""
    flash_share: Numbers
    """Mass fraction of vapour after the valve; 0 where p2 is above pv."""
    outlet_velocity: Numbers
    """In the outlet pipe (valve outlet where no pipe is given), homogeneous mixture where it flashes."""
    noise: Numbers
    """dB(A) at 1 m; NaN where data do not allow it."""
    over_capacity: Flags
    """Coefficient above rated: the flow does not pass."""
    low_travel: Flags
    high_travel: Flags
    """Opening below 10 %, above 90 %."""
    passed: Numbers
    """Plates: flow that they pass between p1 and p2; NaN for valves."""
    plate: npt.NDArray[np.int64]
    """Sets: number of the plate that decides, from 1; 0 otherwise."""
    fails: Flags
    """Flashing, choked, at or below the limit to keep, or too small; never from an estimate of safety."""
    cautions: Sequence[Sequence[str]] = ()
    errors: Sequence[Sequence[str]] = ()
    """Sentences, one list a case; where there is an error there is no verdict. Empty after ``calculate``."""

    @property
    def count(self) -> int:
        return len(self.sigma)

    def limits(self) -> dict[str, Numbers]:
        """The five limits, installed, by name."""
        names = ("incipient", "constant", "damage", "vibration")
        return {**{name: getattr(self, name) for name in names}, "choked": self.choked_limit}


@dataclass(frozen=True)
class Problem:
    """Something wrong with the list, named so that it can be found and cured."""

    sheet: str
    cell: str
    """``C7``, ``B4:B6``, or empty for a whole sheet."""
    value: str
    """What stands there, as a message shows it."""
    text: str
    """What is wrong: a clause, without place and value."""
    remedy: str
    row: int = -1
    """Place of the case in ``Cases`` that it spoils; -1 where no single one."""
    spoils: bool = True
    """Whether what it names could not be used; False for what was used all the same."""

    def sentence(self) -> str:
        """``List!C7: flow must be a number, got the text '11,0'. Type ...``"""
        place = f"{self.sheet}!{self.cell}" if self.cell else self.sheet
        got = f", got {self.value}" if self.value else ""
        return f"{place}: {self.text}{got}. {self.remedy}".rstrip()


@dataclass(frozen=True)
class ReadColumn:
    """One heading of the list and what was made of it."""

    sheet: str
    cell: str
    heading: str
    field: str
    """Field of the catalogue (:mod:`lowpoint.survey.fields`), empty for an unknown one."""
    unit: str
    """As written, or what the heading itself means (DN: mm); empty for words and plain ratios."""
    status: str
    """``used``, ``carried`` (a remark, not used), ``result`` (of an earlier survey, not used), ``unknown``, ``twice``,
    ``no unit``, ``wrong unit``."""


@dataclass(frozen=True)
class Reading:
    """How the list was read, before anything was computed."""

    path: str
    format: str
    """``xlsx``, ``csv``, ``ods``."""
    sheets: tuple[str, ...]
    """Sheets that held a list."""
    columns: tuple[ReadColumn, ...]
    missing: tuple[str, ...]
    """Required fields that no column gives, in words."""
    absent: tuple[str, ...]
    """Optional fields that no column gives (keys)."""
    problems: tuple[Problem, ...]
    notes: tuple[str, ...] = ()
    """What was read in a way worth telling (decimal comma, elevation from above the table, ...)."""
    elevation: float | None = None
    """Site elevation from the command line or above the table, m."""
    fingerprint: str = ""
    """SHA-256 of the file."""
    lists: tuple[ListRows, ...] = field(default=(), repr=False)
    """The sheets of ``sheets`` as they were read; columns of an earlier survey's results are left out."""
    tolerances: tuple[Tolerance, ...] = ()
    """How far inputs may be off, where the list states it."""

    def unknown(self) -> tuple[ReadColumn, ...]:
        return tuple(c for c in self.columns if c.status == "unknown")


@dataclass(frozen=True)
class Item:
    """One tag with all its cases, judged by the worst."""

    tag: str
    kind: str
    service: str
    rows: tuple[int, ...]
    """Places of its cases in ``Cases`` and ``Findings``."""
    worst: int
    """Place of its worst case; -1 where no case has an answer."""
    why: str
    """Why that is the worst, in a sentence."""
    regime: str | None
    """Of the worst case; None where no case fails and one has no answer, since that one may be the worst."""
    margin: float
    """Of the worst case that has an answer."""
    basis: str | None
    fails: bool
    """Does a case fail?"""
    unanswered: int
    """Cases without a verdict."""
    template: str = ""
    """``why`` as a template of :mod:`lowpoint.survey.worded`."""


@dataclass(frozen=True, eq=False)
class Survey:
    """A whole list, judged."""

    cases: Cases
    findings: Findings
    items: tuple[Item, ...]
    reading: Reading
    sets: Mapping[str, Any] = field(default_factory=dict)
    """Tag of a set of plates -> its ``design.Rating`` over the item's cases that could be rated."""
    set_rows: Mapping[str, tuple[int, ...]] = field(default_factory=dict)
    """Tag -> the places in ``Cases`` of the columns of that rating."""
    sensitivity: Sensitivity | None = None
    """None where it was not asked for."""
    remedies: Mapping[str, tuple[Remedy, ...]] = field(default_factory=dict)
    """Tag of a failing item -> its remedies, the best first."""

    @property
    def exit_code(self) -> int:
        """0 all judged and kept, 1 something is wrong: with the list, or with an item."""
        wrong = self.reading.problems or self.reading.missing or any(i.fails or i.unanswered for i in self.items)
        return 1 if wrong else 0
