"""The inputs of cases as somebody gave them: each field with its unit for the eye, and as plain values and back.

A value that was worked out (a property of a named liquid, the pressure of a place) is none of them; a value that
stands in another row of the item is.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from lowpoint.physics.names import resolve
from lowpoint.survey.assembling import blank_cases, given_words
from lowpoint.survey.fields import BY_KEY, ESTIMATE, TYPICAL
from lowpoint.survey.model import Cases, Numbers, TravelTable, Words, absent, number_fields, word_fields
from lowpoint.survey.travel_tables import COLUMNS
from lowpoint.units import POUND, Dimension, Unit, dimension

__all__ = ["NUMBERS", "WORDS", "as_cases", "given_inputs", "given_numbers", "given_words_of", "heading_of",
           "tables_as_data", "unit_of", "value_text"]  # fmt: skip

NUMBERS = number_fields()
WORDS = tuple(name for name in word_fields() if name not in ("tag", "case", "sheet"))
ASKED = {"fl": TYPICAL, "fd": TYPICAL, "incipient": ESTIMATE}
"""The word that may stand for a number, by field."""
_MEANT = {"kind": "valve", "form": "upstream", "method": "isa", "fl_basis": "tested", "limits_basis": "tested"}
"""What a blank means, in columns of words where it means something."""
_GIVEN = frozenset({"given", "item"})
_OWN = {
    "mass_flow": ("Mass flow", Dimension("mass flow", Unit("t/h", 1 / 3.6), Unit("lb/h", POUND / 3600.0))),
    "kinematic": ("Kinematic viscosity", Dimension("kinematic viscosity", Unit("mm2/s", 1e-6), Unit("cSt", 1e-6))),
}
"""Fields that share a column of the list with another: heading and dimension."""
ABSOLUTE = frozenset({"atmosphere", "p1", "p2", "pv", "pc", "outlet_pressure"})
"""Pressures; the others of that kind are differences."""
_ABSOLUTE = {"bar": "bar a", "psi": "psia"}
_TABLE_KINDS = {"travel": "travel", "coefficient": "coefficient"}


def heading_of(field: str) -> str:
    """A field as the list's form calls it."""
    return _OWN[field][0] if field in _OWN else BY_KEY[field].heading


def unit_of(field: str, system: str) -> Unit:
    """The unit that a number (or a set of bores) is shown in; no label for plain ratios."""
    if field in _OWN:
        return _OWN[field][1].unit(system)
    quantity = BY_KEY[field].quantity
    return dimension(quantity.dimension if quantity else "pressure").unit(system)


# --- what was given ---------------------------------------------------------------------------------------------


def given_numbers(cases: Cases, field: str) -> Numbers:
    """The numbers of a field that were given, NaN where it is blank, was worked out, or a word stands for it."""
    column: Numbers = getattr(cases, field)
    words = cases.source.get(field)
    if words is None:
        return column
    given = np.array([word in _GIVEN for word in words.tolist()], np.bool_)
    return np.where(given, column, np.nan)


def given_words_of(cases: Cases, field: str) -> Words:
    """The words of a field; what a blank means where it means one, and the usual name of a liquid."""
    column: Words = getattr(cases, field)
    if field in ASKED:
        return _asked(cases, field)
    if field in _MEANT:
        return np.where(absent(column), np.array(_MEANT[field], object), column)
    if field == "fluid":
        names = {name: _liquid(name) for name in {*column.tolist()} - {None}}
        return np.array([names.get(name) for name in column.tolist()], object)
    return column


def _asked(cases: Cases, field: str) -> Words:
    """The word that stands for a number of this field, None where none does."""
    words = cases.source.get(field, given_words(getattr(cases, field)))
    asked = words == ASKED[field]
    if field == "incipient":
        asked = asked | cases.estimate
    return np.where(asked, np.array(ASKED[field], object), np.array(None, object))


def _liquid(name: str) -> str:
    try:
        return resolve(name)
    except ValueError:
        return name


def value_text(field: str, value: Any, system: str) -> str:
    """A value as a message shows it: ``3.1 bar a``, ``'linear'``, ``no value``."""
    if value is None:
        return "no value"
    if isinstance(value, str):
        return f"'{value}'"
    unit = unit_of(field, system)
    if isinstance(value, tuple):
        return "; ".join(f"{unit.from_si(x):.6g}" for x in value) + f" {unit.label}"
    label = _ABSOLUTE[unit.label] if field in ABSOLUTE else unit.label
    return f"{unit.from_si(float(value)):.6g} {label}".rstrip()


# --- as plain values --------------------------------------------------------------------------------------------


def given_inputs(cases: Cases, system: str) -> list[dict[str, Any]]:
    """For every case its inputs as given, by field, in the set's units; a blank is left out."""
    found: list[dict[str, Any]] = [{} for _ in range(cases.count)]
    for field in NUMBERS:
        column = given_numbers(cases, field)
        unit = unit_of(field, system)
        shown = ((column - unit.offset) / unit.factor).tolist()
        for place in np.flatnonzero(np.isfinite(column)).tolist():
            found[place][field] = shown[place]
    for field in (*WORDS, *ASKED):
        words: Words = _asked(cases, field) if field in ASKED else getattr(cases, field)
        for place in np.flatnonzero(~absent(words)).tolist():
            value = words[place]
            if isinstance(value, tuple):
                unit = unit_of(field, system)
                value = [unit.from_si(x) for x in value]
            found[place][field] = value
    return found


def tables_as_data(tables: Mapping[str, TravelTable], system: str) -> dict[str, dict[str, list[float]]]:
    """Vendors' tables by name: each column in the set's units."""
    return {name: {key: [_table_unit(key, system).from_si(x) for x in values.tolist()]
                   for key in ("travel", *COLUMNS) if (values := getattr(table, key)) is not None}
            for name, table in tables.items()}  # fmt: skip


def _table_unit(key: str, system: str) -> Unit:
    return dimension(_TABLE_KINDS.get(key, "ratio")).unit(system)


def as_cases(objects: Sequence[Mapping[str, Any]], tables: Mapping[str, Mapping[str, Sequence[float]]]) -> Cases:
    """Cases out of the objects of a survey's JSON, each with its ``given``; the way back of :func:`given_inputs`."""
    cases = blank_cases(len(objects))
    numbers = {field: getattr(cases, field) for field in NUMBERS}
    words = {field: getattr(cases, field) for field in ("tag", "case", "sheet", *WORDS)}
    asked: dict[str, list[int]] = {field: [] for field in ASKED}
    row = cases.row.copy()
    for place, data in enumerate(objects):
        for field in ("tag", "case", "sheet"):
            words[field][place] = data[field]
        row[place] = data["row"]
        for field, value in data["given"].items():
            if field in asked and isinstance(value, str):
                asked[field].append(place)
            elif field in numbers:
                numbers[field][place] = unit_of(field, data["units"]).to_si(value)
            elif isinstance(value, list):
                words[field][place] = tuple(unit_of(field, data["units"]).to_si(x) for x in value)
            elif field in words:
                words[field][place] = value
    source = {field: given_words(numbers[field]) for field in ASKED}
    for field, places in asked.items():
        source[field][places] = ASKED[field]
    estimate = np.zeros(len(objects), np.bool_)
    estimate[asked["incipient"]] = True
    system = objects[0]["units"] if objects else "metric"
    return cases.changed(**numbers, **words, row=row, estimate=estimate, source=source,
                         tables={name: _table(name, data, system) for name, data in tables.items()})  # fmt: skip


def _table(name: str, data: Mapping[str, Sequence[float]], system: str) -> TravelTable:
    columns: dict[str, Any] = {key: np.array([_table_unit(key, system).to_si(x) for x in values])
                               for key, values in data.items()}  # fmt: skip
    return TravelTable(name, **columns)
