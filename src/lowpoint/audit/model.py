"""What an audit is made of: what was read of a vendor's sheet, what each claim came to, and who is suspected.

A *value* is one number or word of the sheet with its place; a *claim* is a value that the sheet's other values allow
to compute again. Numbers carry both what the sheet shows and coherent SI (pressures Pa absolute, flow coefficients
as Av in m2, travel as a share), NaN where a unit or the atmosphere is missing.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

__all__ = ["Audit", "Claim", "Document", "Finding", "SheetReading", "Suspect", "Value"]


@dataclass(frozen=True)
class Value:
    """One quantity of the sheet, in one case, as it stands there."""

    quantity: str
    """Key of :mod:`lowpoint.audit.vocabulary`."""
    case: str | None
    """Name of the case; None for what holds for the item."""
    cell: str
    """``Sheet1!C7``; of a PDF ``page 1, line 12, part 3`` (parts from left to right); of a csv ``row 7, column 3``."""
    label: str
    """As it stands there."""
    label_cell: str
    raw: str
    """The value as shown."""
    number: float
    """The number in ``unit``, NaN for a word: of a workbook as stored, of which ``raw`` and ``half`` tell the digits
    shown; a number shown in per cent is the number of per cents."""
    unit: str
    """Canonical label of the unit as read, with `` g`` or `` a`` only where the sheet says so (``bar g``); ``DN`` and
    ``NPS`` for nominal sizes; empty for plain ratios and words."""
    unit_from: str
    """``label``, ``cell``, ``beside``, ``head`` (of the column, row or block), ``quantity`` (Kv, DN: the name says it),
    ``layout``; empty where there is none."""
    gauge: bool | None
    """Of a pressure: gauge (True), absolute (False) or not said (None)."""
    half: float
    """Half of the last digit shown, in the unit shown."""
    si: float
    """In SI, absolute; NaN where that cannot be said."""
    confidence: float
    """0 to 1: how surely the label means this quantity and the cell is its value. 0.95 and more: a standard label with
    all its words known, the value right by it, a fitting unit; unknown words of the label, a missing unit, a meaning
    found by a heading or by elimination take from it; 1 is a pinned cell of a layout."""
    word: str | None = None
    """A value in words: a style, a characteristic, ``no cavitation``."""
    form: str | None = None
    """Of an index or limit: the form that its label states, None where it states none."""
    note: str = ""

    @property
    def nominal(self) -> bool:
        """Is it a nominal size, which names a pipe and does not measure it?"""
        return self.unit in ("DN", "NPS")

    @property
    def coarse(self) -> float:
        """Half of the last digit shown, as a share; 0 of a word."""
        return self.half / abs(self.number) if self.half > 0.0 and self.number else 0.0


@dataclass(frozen=True)
class Finding:
    """Something about the sheet itself that the engineer should know: named, with its remedy."""

    kind: str
    """``ambiguous``, ``unread``, ``unit``, ``gauge``, ``case``, ``contradiction``, ``layout``, ``several``,
    ``hidden``, ``link``, ``formula``; of notes also ``text`` (how texts were taken)."""
    cell: str
    text: str
    remedy: str = ""

    def sentence(self) -> str:
        place = f"{self.cell}: " if self.cell else ""
        return f"{place}{self.text}. {self.remedy}".rstrip()


@dataclass(frozen=True, eq=False)
class SheetReading:
    """What was found on one sheet (one item), before anything was computed."""

    name: str
    """Of the sheet or the pages."""
    tag: str | None
    cases: tuple[str, ...]
    """Names of the cases in the sheet's order; one empty name for a sheet of one column."""
    values: tuple[Value, ...]
    findings: tuple[Finding, ...] = ()
    """What the engineer must look at: each is a reason for exit code 1."""
    notes: tuple[Finding, ...] = ()
    """What else was or was not read: numbers without a known label, hidden cells; no reason for an exit code."""
    atmosphere: float = 101325.0
    """Pa; what gauge pressures were counted from."""
    atmosphere_from: str = "assumed"
    """``sheet``, ``elevation``, ``option``, ``assumed``."""
    part_of: str = ""
    """Of one of several items on a sheet: the name of the sheet."""

    def of(self, quantity: str, case: str | None) -> Value | None:
        """The value of a quantity in a case, or for the item where no case has its own; a measure before a nominal
        size, the surer before the less sure, the finer before the coarser."""
        found = [v for v in self.values if v.quantity == quantity and v.case in (case, None)]
        return max(found, key=lambda v: (v.case is not None, not v.nominal, v.confidence, -v.coarse), default=None)


@dataclass(frozen=True, eq=False)
class Document:
    """A file with all its sheets."""

    path: str
    format: str
    """``xlsx``, ``csv``, ``pdf``."""
    fingerprint: str
    """SHA-256 of the file."""
    sheets: tuple[SheetReading, ...]
    findings: tuple[Finding, ...] = ()
    """About the file as a whole."""
    notes: tuple[Finding, ...] = ()
    """What else was or was not read of it, such as covers."""


@dataclass(frozen=True)
class Suspect:
    """Mistakes that, if made, would give the vendor's number. A hypothesis, never a fact."""

    mistakes: tuple[str, ...]
    """Keys of :mod:`lowpoint.audit.mistakes`, one or two."""
    text: str
    """``143.1 follows if p1 was read as gauge``."""
    value: float
    """The number that follows, in the unit of the claim."""
    explains: tuple[tuple[str, str | None], ...]
    """Claims (quantity, case) that these mistakes explain together."""
    equal: int = 0
    """How many other suspects explain as well as this one and cannot be told from it by the numbers."""
    numbers: tuple[str, ...] = ()
    """The number that follows for each of ``explains``, with the digits of that claim."""


@dataclass(frozen=True)
class Claim:
    """One number or statement of the vendor, judged."""

    quantity: str
    case: str | None
    cell: str
    claimed: float
    """In ``unit``, as shown; NaN for words."""
    computed: float
    """In ``unit``."""
    unit: str
    tolerance: float
    """Of the comparison, in ``unit``: share of practice and rounding together."""
    basis: str
    """Of the tolerance and of the computation: which inputs stood on the sheet, which were computed or assumed."""
    verdict: str
    """``agrees``, ``differs``, ``unchecked``, ``contradicts``."""
    text: str
    """One sentence: what was compared, what is missing, or what contradicts."""
    suspects: tuple[Suspect, ...] = ()
    claimed_word: str | None = None
    computed_word: str | None = None
    missing: tuple[str, ...] = ()
    """Keys of what is missing for an ``unchecked`` one."""
    tried: bool = True
    """Of one that differs: were the usual mistakes tried on it?"""


@dataclass(frozen=True, eq=False)
class Audit:
    """A document, judged."""

    document: Document
    claims: Sequence[tuple[Claim, ...]]
    """One tuple a sheet."""
    questions: Sequence[tuple[str, ...]] = field(default=())
    """To the vendor, in plain sentences; one tuple a sheet."""

    @property
    def exit_code(self) -> int:
        """0 every checked claim agrees, 1 findings, 2 nothing could be read."""
        if not any(sheet.values for sheet in self.document.sheets):
            return 2
        wrong = any(c.verdict in ("differs", "contradicts") for claims in self.claims for c in claims)
        found = self.document.findings or any(sheet.findings for sheet in self.document.sheets)
        return 1 if wrong or found else 0
