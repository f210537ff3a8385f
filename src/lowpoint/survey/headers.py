"""Headings: which field of the catalogue one names, in which unit, and the row of a sheet that they stand in."""

from __future__ import annotations

import difflib
import re
import unicodedata
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache, lru_cache
from typing import Any

from lowpoint.physics.unitnames import Meaning, meaning
from lowpoint.survey.fields import CARRIED, FIELDS, TABLE_FIELDS, ListField
from lowpoint.survey.grids import Grid
from lowpoint.survey.own_sheet import LEFT_ALONE, first_line, is_own
from lowpoint.survey.values import without_controls

__all__ = ["Heading", "Place", "are_units", "find_headings", "read_heading"]

LOOKED_AT = 40
"""Rows from the top among which the headings are looked for."""
LEAST = 3
"""Headings that a row must have to be the heading of a list."""
OPERATING = frozenset({"flow", "p1", "p2"})
"""One of them must be there: a summary of items has tags and cases too."""
NEVER_GAUGE = {"atmosphere": "the atmosphere itself", "head_ref": "a difference of pressures",
               "outlet_loss": "a difference of pressures"}  # fmt: skip
"""Pressures that no gauge can count from the atmosphere, and why."""
_PLAIN_SIGNS = frozenset({"", "-", "–", "—", "1", "ratio"})
_UNIT_BEHIND = re.compile(r"(?P<name>.*?)\s*[\[(](?P<unit>[^\[\]]*)[\])]\s*", re.DOTALL)


@dataclass(frozen=True, slots=True)
class Heading:
    """One heading, understood. ``unit`` None where it names none; ``problem`` says why it cannot be used."""

    text: str
    field: ListField | None
    unit: str | None = None
    problem: str = ""
    remedy: str = ""
    left: bool = False
    """Whether it is known, and no input: a result, or what another column stands for."""


@dataclass(frozen=True)
class Place:
    """The headings of one sheet: their row, the first row of data, and each heading by column from 0."""

    row: int
    first: int
    headings: dict[int, Heading]
    catalogue: tuple[ListField, ...]
    own: bool = False
    """Whether it is a sheet with LP_ formulas, see :mod:`lowpoint.survey.own_sheet`."""


def _folded(text: str) -> str:
    return re.sub(r"[\W_]+", "", unicodedata.normalize("NFKC", text)).casefold()


@cache
def _names(catalogue: tuple[ListField, ...]) -> dict[str, tuple[ListField, str | None]]:
    found: dict[str, tuple[ListField, str | None]] = {}
    for field in catalogue:
        inherent = dict(field.inherent)
        for name in field.names:
            entry = (field, inherent.get(name))
            other = found.setdefault(_folded(name), entry)
            if other[0] is not field:
                raise AssertionError(f"'{name}' names both {other[0].key} and {field.key}")
    return found


@cache
def _carried() -> frozenset[str]:
    return frozenset(_folded(name) for name in CARRIED)


def is_carried(text: str) -> bool:
    """Is a heading one of those that say nothing about cavitation?"""
    return _folded(text) in _carried()


def nearest(text: str, catalogue: tuple[ListField, ...]) -> str:
    """The heading that is spelled most like a text, empty where none is."""
    names = _names(catalogue)
    close = difflib.get_close_matches(_folded(_split(text)[0]), names, n=1, cutoff=0.75)
    return names[close[0]][0].heading if close else ""


def _unit_of(text: str) -> Meaning | None:
    try:
        return meaning(text)
    except ValueError:
        return None


def _split(text: str) -> tuple[str, str | None]:
    """Name and unit of a heading that sets its unit apart by brackets, a comma or a line of its own."""
    behind = _UNIT_BEHIND.fullmatch(text)
    if behind and behind["name"]:
        return behind["name"], behind["unit"].strip()
    for mark in ("\n", ",", ";", " in "):
        name, sign, unit = text.rpartition(mark)
        if sign and name.strip() and (_unit_of(unit.strip()) or unit.strip() in _PLAIN_SIGNS):
            return name, unit.strip()
    return text, None


def _candidates(text: str) -> Iterator[tuple[str, str | None]]:
    """The ways to read a heading, best first: split at its signs, whole, split before its last words."""
    name, unit = _split(text)
    yield name, unit
    if unit is None or not _unit_of(unit):
        yield text, None
    words = text.split()
    for place in range(1, len(words)):
        unit = " ".join(words[place:])
        if _unit_of(unit):
            yield " ".join(words[:place]), unit


@lru_cache(4096)
def read_heading(text: str, catalogue: tuple[ListField, ...]) -> Heading:
    """One heading; its field is None where nobody knows it."""
    names = _names(catalogue)
    for name, unit in _candidates(text):
        found = names.get(_folded(name)) if _folded(name) else None
        if found:
            field, inherent = found
            return Heading(text, field, inherent if unit is None else unit)
    return Heading(text, None)


def with_unit(heading: Heading) -> Heading:
    """The same heading after its unit was looked at: fit, missing, unknown, or of another kind."""
    field, unit = heading.field, heading.unit
    if field is None or field.what in ("word", "text"):
        return heading
    if not field.reference:
        if unit is None or unit in _PLAIN_SIGNS or (_unit_of(unit) or Meaning("?", 1.0)).dimension == "":
            return heading
        return _unfit(heading, f"'{unit}' is no unit of {field.heading}, which is a plain ratio",
                      "Take the unit out of the heading.")  # fmt: skip
    remedy = f"Write it behind the name, as in '{field.heading} [{_example(field)}]'."
    if unit is None or unit in _PLAIN_SIGNS:
        return _unfit(heading, f"the heading of {field.heading} must name its unit", remedy, "no unit")
    try:
        found = meaning(unit)
    except ValueError as unknown:
        return _unfit(heading, f"the unit of {field.heading} is not understood: {unknown}", remedy)
    if found.dimension not in allowed(field):
        return _unfit(heading, f"'{unit}' is a unit of another kind of quantity than {field.heading}", remedy)
    if found.gauge and field.key in NEVER_GAUGE:
        return _unfit(heading, f"{field.heading} is {NEVER_GAUGE[field.key]}, which is not gauge",
                      "Take the g out of its unit.")  # fmt: skip
    return heading


def allowed(field: ListField) -> tuple[str, ...]:
    """The dimensions that a field's unit may have: its own, and those that the density carries over."""
    own = meaning(field.reference).dimension
    if field.key == "flow":
        return own, meaning("kg/s").dimension
    if field.key == "viscosity":
        return own, meaning("m2/s").dimension
    return (own,)


def _example(field: ListField) -> str:
    return {"bar": "bar g", "K": "deg C"}.get(field.reference, field.reference)


def _unfit(heading: Heading, problem: str, remedy: str, status: str = "") -> Heading:
    return Heading(heading.text, heading.field, "" if status else heading.unit, problem, remedy)


def text_of(value: Any) -> str:
    """A heading's cell as text: spaces made plain, line ends kept."""
    if value is None:
        return ""
    return "\n".join(" ".join(line.split()) for line in without_controls(str(value)).splitlines()).strip()


def _known(values: Sequence[Any], catalogue: tuple[ListField, ...]) -> set[str]:
    """Fields that the cells of a row name."""
    texts = [text_of(value) for value in values if isinstance(value, str)]
    fields = [read_heading(text, catalogue).field for text in texts if text and len(text) < 120]
    return {field.key for field in fields if field}


def find_headings(grid: Grid) -> Place | None:
    """The row of headings of a list, or of vendors' tables; None where a sheet has neither."""
    best: tuple[int, int, tuple[ListField, ...]] | None = None
    for place, (_, values) in enumerate(grid.rows[:LOOKED_AT]):
        listed = _known(values, FIELDS)
        if len(listed) >= LEAST and listed & OPERATING and (best is None or len(listed) > best[0]):
            best = (len(listed), place, FIELDS)
        tabled = _known(values, TABLE_FIELDS)
        if {"table", "travel"} <= tabled and len(tabled) >= LEAST and (best is None or len(tabled) > best[0]):
            best = (len(tabled), place, TABLE_FIELDS)
    if best is None:
        return None
    _, place, catalogue = best
    row, values = grid.rows[place]
    units = _units_below(grid, place)
    headings = {}
    own = is_own([text_of(value) for value in values])
    for column, value in enumerate(values):
        text = text_of(value)
        if own and first_line(text) in LEFT_ALONE:
            headings[column] = Heading(text, None, left=True)
        elif text:
            headings[column] = _with_unit_below(read_heading(text, catalogue), units[column : column + 1])
    return Place(row, grid.rows[place + (2 if units else 1)][0] if _more(grid, place, units) else row + 1, headings,
                 catalogue, own)  # fmt: skip


def _with_unit_below(heading: Heading, below: list[str]) -> Heading:
    """The heading with the unit that stands below it, which must not be another one than its own."""
    unit = below[0] if below else ""
    if not unit or heading.field is None:
        return with_unit(heading)
    if heading.unit is None:
        return with_unit(Heading(heading.text, heading.field, unit))
    if heading.field.reference and _unit_of(heading.unit) != _unit_of(unit):
        return _unfit(heading, f"the heading of {heading.field.heading} says '{heading.unit}' and the cell below it "
                      f"'{unit}'", "Keep one of the two.")  # fmt: skip
    return with_unit(heading)


def _more(grid: Grid, place: int, units: list[str]) -> bool:
    return place + (2 if units else 1) < len(grid.rows)


def _units_below(grid: Grid, place: int) -> list[str]:
    """The texts of a row of units right below the headings; empty where the next row is none."""
    below = grid.rows[place + 1][1] if place + 1 < len(grid.rows) else []
    return [_unit_text(value) for value in below] if are_units(below) else []


def _unit_text(value: Any) -> str:
    return text_of(value).strip("[]()") if isinstance(value, str) else ""


def are_units(values: Sequence[Any]) -> bool:
    """Does a row hold units and signs of plain ratios, and nothing else?"""
    filled = [value for value in values if value not in (None, "")]
    if not filled or not all(isinstance(value, str) for value in filled):
        return False
    texts = [_unit_text(value) for value in filled]
    units = sum(_unit_of(text) is not None for text in texts)
    return units >= 2 and all(_unit_of(text) is not None or text in _PLAIN_SIGNS for text in texts)
