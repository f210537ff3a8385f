"""The reading of a vendor's sheet: file in, quantities with their cells out, and what could not be read, said."""

from __future__ import annotations

import hashlib
import math
import os
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lowpoint.audit.cells import Page
from lowpoint.audit.finding import find
from lowpoint.audit.found import Found
from lowpoint.audit.model import Document, Finding, SheetReading, Value
from lowpoint.audit.own_sheets import is_own
from lowpoint.audit.parting import parts_of, tags_of
from lowpoint.audit.references import at_flowing_temperature
from lowpoint.audit.unitsigns import Sign
from lowpoint.audit.valuing import Valued, si_of, values_of
from lowpoint.book import guard
from lowpoint.errors import LowpointError
from lowpoint.physics.site import barometric_pressure

if TYPE_CHECKING:
    from lowpoint.audit.layout import Layout

__all__ = ["FORMATS", "pages_of", "read_sheet"]

FORMATS = (".xlsx", ".xlsm", ".xltx", ".xltm", ".csv", ".txt", ".tsv", ".pdf")
STANDARD = 101325.0
"""Pa; taken where neither sheet nor caller tells the site's pressure."""
LEAST = 3
"""Quantities in number that make a sheet a data sheet."""
TWO_WAYS = "may have a decimal comma or one between thousands"
MOST_UNREAD = 12
"""Unread numbers that are named one by one."""
Note = tuple[str, str, str, str]


def pages_of(path: str | os.PathLike[str]) -> tuple[str, str, list[Page], list[Note]]:
    """Format, SHA-256, pages and remarks of a file; LowpointError for what is none of the formats or cannot be read."""
    name = str(path)
    suffix = Path(path).suffix.lower()
    if suffix not in FORMATS:
        must = "a data sheet must be .xlsx, .xlsm, .csv or .pdf"
        raise LowpointError(name, must, suffix or "no ending", "Ask for it in one of these, or save it so.")
    data = guard.load(path)
    fingerprint = hashlib.sha256(data).hexdigest()
    if suffix == ".pdf":
        from lowpoint.audit.documents import read_document

        return "pdf", fingerprint, *read_document(data, name)
    if suffix in (".csv", ".txt", ".tsv"):
        from lowpoint.audit.texts import read_text

        return "csv", fingerprint, *read_text(data, name)
    from lowpoint.audit.workbooks import read_workbook

    return "xlsx", fingerprint, *read_workbook(data, name)


def read_sheet(
    path: str | os.PathLike[str],
    *,
    layout: Layout | None = None,
    elevation: float | None = None,
    atmosphere: float | None = None,
) -> Document:
    """The quantities of a vendor's sheet (xlsx, csv, text PDF), each with its cell, unit, case and confidence.

    ``layout`` pins or overrides cells; ``elevation`` (m) or ``atmosphere`` (Pa) are of the site, where the sheet gives
    neither. Nothing is computed, no formula, macro or link is followed. LowpointError (exit code 2) where the file
    cannot be opened or holds no text; a sheet without quantities is said in the document's findings.
    """
    kind, fingerprint, pages, notes = pages_of(path)
    joined = _joined(pages) if kind == "pdf" else pages
    readings: list[SheetReading] = []
    misfits: list[SheetReading] = []
    told: list[Finding] = [Finding(*note) for note in notes if note[0] in ("link",)]
    said: list[Finding] = [Finding(*note) for note in notes if note[0] not in ("link",)]
    for number, page in enumerate(joined, 1):
        if is_own(page):
            said.append(Finding("unread", page.name, "a sheet of an earlier audit was left alone"))
            continue
        reading, parts = _reading(page, number, layout, elevation, atmosphere)
        items = [_reading(part, number, None, elevation, atmosphere)[0] for part in parts]
        if items and all(map(_is_item, items)):
            readings += [replace(item, part_of=page.name) for item in items]
            named = ", ".join(item.tag or "" for item in items)
            said.append(
                Finding("several", page.name, f"{len(items)} items stand there ({named}); each is read by itself")
            )
        elif _is_data(reading):
            readings.append(reading)
        elif any(finding.kind == "layout" for finding in reading.findings):
            misfits.append(reading)
        elif page.cells:
            said.append(Finding("unread", page.name, "no quantities of a data sheet were found there", ""))
    if len(readings) > 1:
        names = ", ".join(reading.name for reading in readings)
        said.append(Finding("several", "", f"{len(readings)} sheets have quantities ({names}); each is read by itself"))
    readings = readings or misfits  # a layout that fits no sheet is told where it does not
    if not readings:
        told.append(Finding(
            "unread", "", "no data sheet was found: fewer than three quantities are named in the file",
            "Check that it is the sheet itself; a layout file (--layout) can name the cells."))  # fmt: skip
    return Document(str(path), kind, fingerprint, tuple(readings), tuple(told), tuple(said))


def _is_data(reading: SheetReading) -> bool:
    """Does a sheet give quantities? A cover names a tag and a service at most."""
    numbers = {v.quantity for v in reading.values if v.word is None}
    two_ways = sum(TWO_WAYS in finding.text for finding in reading.findings)
    return len(numbers) + two_ways >= LEAST or any(
        v.unit_from == "layout" or (v.confidence == 1.0 and not v.label_cell) for v in reading.values
    )


def _is_item(reading: SheetReading) -> bool:
    """Does a part of a sheet give an item of its own?"""
    return _is_data(reading) and any(value.quantity in ("p1", "flow", "mass_flow") for value in reading.values)


def _joined(pages: Sequence[Page]) -> list[Page]:
    """Pages of one item as one page: a following page belongs to it unless it names another tag."""
    if len(pages) == 1:
        return list(pages)
    groups: list[list[Page]] = []
    tags: list[str | None] = []
    for page in pages:
        tag = _tag(find(page))
        if groups and (tag is None or tag == tags[-1]):
            groups[-1].append(page)
        else:
            groups.append([page])
            tags.append(tag)
    return [group[0] if len(group) == 1 else _one_page(group) for group in groups]


def _one_page(group: list[Page]) -> Page:
    cells, shift = [], 0
    for page in group:
        for cell in page.cells:
            cells.append(replace(cell, row=cell.row + shift, bottom=cell.bottom + shift))
        shift = max(c.row for c in cells) + 3
    name = f"pages {group[0].name.removeprefix('page ')} to {group[-1].name.removeprefix('page ')}"
    return Page(name, cells, exact=False, notes=[note for page in group for note in page.notes])


def _tag(found: Found) -> str | None:
    best = [c for c in found.values if c.label.key == "tag" and c.word]
    return max(best, key=lambda c: c.label.score).word if best else None


def _reading(page: Page, number: int, layout: Layout | None, elevation: float | None, atmosphere: float | None,
             ) -> tuple[SheetReading, list[Page]]:  # fmt: skip
    """What a page gives, and the pages of its items where there are several."""
    pinned: list[tuple[Value, Sign | None]] = []
    told: list[Finding] = []
    search, decimal, parts = True, None, list[Page]()
    if layout is not None:
        decimal, search = layout.decimal, layout.search
        pinned, told = layout.pinned(page, number)
    if search:
        found = find(page, decimal)
        valued = values_of(found)
        kept = valued.values if layout is None else layout.without_pinned(valued.values, pinned)
        pins = {value.cell for value, _ in pinned}
        findings = [*told, *(f for f in _findings(found, valued, layout) if f.cell not in pins)]
        heads = tags_of(found)
        notes, names, tags = _notes(found), found.cases.names, [(tag.address, tag.text.strip()) for _, tag in heads]
        parts = parts_of(page, heads) if layout is None else []
    else:
        kept, findings, notes, names, tags = [], told, [], [], []
    values = [*pinned, *kept]
    ambient, source = _atmosphere(values, elevation, atmosphere)
    every = [replace(value, si=si_of(value, sign, ambient)) for value, sign in values]
    done, elsewhere = at_flowing_temperature(every)
    findings = [*findings, *elsewhere]
    cases = _cases(done, names)
    tag = next((v.word or v.raw for v in done if v.quantity == "tag"), None)
    if len(tags) > 1:
        named = ", ".join(name for _, name in tags[:6])
        findings.append(Finding("several", tags[0][0], f"{len(tags)} tags stand on the sheet ({named})",
                                "One sheet of one item is audited at a time: split it."))  # fmt: skip
    return SheetReading(
        page.name, tag, cases, tuple(done), tuple(_distinct(findings)), tuple(_distinct(notes)), ambient, source
    ), parts


def _distinct(findings: Sequence[Finding]) -> list[Finding]:
    return list(dict.fromkeys(findings))


def _cases(values: Sequence[Value], names: Sequence[str]) -> tuple[str, ...]:
    """The names of cases that have values, in the sheet's order; one empty name for a sheet of one column."""
    used = list(dict.fromkeys(v.case for v in values if v.case is not None))
    ordered = [name for name in names if name in used]
    return tuple(ordered + [name for name in used if name not in ordered]) or ("",)


def _atmosphere(
    values: Sequence[tuple[Value, Sign | None]], elevation: float | None, given: float | None
) -> tuple[float, str]:
    """The pressure that gauge pressures count from, Pa, and who tells it: the sheet before the caller."""
    for value, sign in values:
        if value.quantity == "atmosphere" and sign is not None and value.gauge is not True:
            si = si_of(value, sign, 0.0)
            if 3e4 < si < 1.2e5:
                return si, "sheet"
    for value, sign in values:
        if value.quantity == "elevation" and sign is not None:
            si = si_of(value, sign, 0.0)
            if -5000.0 <= si <= 11000.0:
                return float(barometric_pressure(np.array([si]))[0]), "elevation"
    if given is not None:
        return given, "option"
    if elevation is not None:
        return float(barometric_pressure(np.array([elevation]))[0]), "option"
    return STANDARD, "assumed"


def _findings(found: Found, valued: Valued, layout: Layout | None) -> list[Finding]:
    page = found.page
    findings = [Finding(*note) for note in page.notes if note[0] == "formula"]
    told: set[int] = set()
    for unsure in found.unsure:
        if id(unsure.role) in told or (layout is not None and layout.names(unsure.taken.cell.address)):
            continue
        told.add(id(unsure.role))
        may, remedy = unsure.label.choices or ("several quantities", "say which")
        findings.append(Finding("ambiguous", unsure.taken.cell.address,
                                f"'{unsure.label.text}' may be {may}; {unsure.taken.cell.text} was not read as either",
                                f"Ask the vendor to {remedy}, or name the cell in a layout."))  # fmt: skip
    for cell in found.ambiguous_numbers:
        findings.append(Finding("ambiguous", cell.address,
                                f"'{cell.text}' {TWO_WAYS}, and was not read",
                                "Ask the vendor; a layout can say decimal = ',' or '.'."))  # fmt: skip
    if found.nameless:
        first, *others = found.nameless
        more = f" and {len(others)} more" if others else ""
        verb = "have" if others else "has"
        findings.append(Finding("case", first.taken.cell.address,
                                f"'{first.label.text}'{more} {verb} several values and no names of cases above them",
                                "Ask which case each belongs to; they are called value 1, value 2 here."))  # fmt: skip
    findings += valued.findings
    hidden = [c for c in found.values if c.taken.cell.hidden]
    if hidden or (page.state != "visible" and found.values):
        whole = page.state != "visible"
        what = "values of a hidden sheet" if whole else f"values in hidden rows or columns ({len(hidden)})"
        place = page.name if whole else hidden[0].taken.cell.address
        findings.append(Finding("hidden", place, f"{what} were read all the same", "Ask whether they hold."))
    return findings


def _notes(found: Found) -> list[Finding]:
    notes = [Finding(*note) for note in found.page.notes if note[0] != "formula"]
    for cell, beside in found.unread[:MOST_UNREAD]:
        text = f"'{beside}' {cell.text}" if beside else cell.text
        notes.append(Finding("unread", cell.address, f"{text} was not read: no known label stands by it", ""))
    if len(found.unread) > MOST_UNREAD:
        more = f"{len(found.unread) - MOST_UNREAD} more numbers have no known label"
        notes.append(Finding("unread", found.page.name, more, ""))
    if found.tables:
        named = ", ".join(dict.fromkeys(cell.text for cell in found.tables))
        notes.append(Finding("unread", found.tables[0].address, f"a table by travel was left alone ({named})", ""))
    if found.decimal == ",":
        notes.append(
            Finding("text", found.page.name, "numbers in texts were read with a decimal comma, as they are written", "")
        )
    if found.decimal == "?":
        notes.append(
            Finding(
                "text",
                found.page.name,
                "numbers in texts have decimal points and decimal commas; each was read by itself",
                "",
            )
        )
    if found.gauge is not None:
        which = "gauge" if found.gauge else "absolute"
        notes.append(
            Finding(
                "text", found.gauge_from, f"pressures without a reference were read as {which}, as is said there", ""
            )
        )
    return notes


def finite(value: Value) -> bool:
    """Has a value a number in SI?"""
    return math.isfinite(value.si)
