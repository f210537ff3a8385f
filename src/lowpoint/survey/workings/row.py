"""One case of a survey as plain numbers, and where each of them stands in the list."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.physics.names import resolve
from lowpoint.physics.site import barometric_pressure
from lowpoint.physics.unitnames import Meaning, meaning
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.limiting import form_of
from lowpoint.survey.model import Cases, Findings, ReadColumn, Reading, Survey, TravelTable
from lowpoint.survey.workings.arithmetic import printed
from lowpoint.units import KV

__all__ = ["Row", "there"]

OTHER_FIELD = {"mass_flow": "flow", "kinematic": "viscosity"}
"""Columns of cases that stand under another field's heading."""


def there(*numbers: float) -> bool:
    """Is every one a number?"""
    return not any(math.isnan(x) for x in numbers)


@dataclass(frozen=True, eq=False)
class Row:
    """One case: its inputs by field, its findings, and its row in the list."""

    cases: Cases
    findings: Findings
    reading: Reading
    place: int

    @classmethod
    def of(cls, survey: Survey, place: int) -> Row:
        return cls(survey.cases, survey.findings, survey.reading, place)

    def number(self, field: str) -> float:
        """An input in SI; NaN where there is none."""
        return float(getattr(self.cases, field)[self.place])

    def word(self, field: str) -> str | None:
        """An input that is a word; None where there is none."""
        word: str | None = getattr(self.cases, field)[self.place]
        return word

    def found(self, finding: str) -> Any:
        """A finding: a plain number (NaN for none), word (None for none) or flag."""
        value = getattr(self.findings, finding)[self.place]
        return value.item() if hasattr(value, "item") else value

    def has(self, *fields: str) -> bool:
        """Is every one of these inputs given or completed?"""
        return there(*(self.number(field) for field in fields))

    @property
    def form(self) -> str:
        """Form of the stated limits and of the index shown."""
        form = form_of(self.cases)
        return form if isinstance(form, str) else str(form[self.place])

    @property
    def table(self) -> TravelTable | None:
        """The vendor's table of this valve."""
        name = self.word("table")
        return None if name is None else self.cases.tables.get(name)

    def liquid(self) -> str | None:
        """The canonical name of the liquid; None where none is given, or none that is known."""
        fluid = self.word("fluid")
        try:
            return None if fluid is None else resolve(fluid)
        except ValueError:
            return None

    def origin(self, field: str) -> str | None:
        """Where a value came from, in a word; ``given`` for a field that is only ever given."""
        words = self.cases.source.get(field)
        return "given" if words is None else words[self.place]

    def alone(self) -> bool:
        """Is this the only row of its tag?"""
        return int((self.cases.tag == self.cases.tag[self.place]).sum()) == 1

    def column(self, field: str) -> ReadColumn | None:
        """The heading that gave a field on the sheet of this row."""
        key, sheet = OTHER_FIELD.get(field, field), self.cases.sheet[self.place]
        used = (c for c in self.reading.columns if c.field == key and c.sheet == sheet and c.status == "used")
        return next(used, None)

    def where(self, field: str) -> str:
        """Where a given value stands: ``given, List!F7: 4.8 bar g``."""
        column = self.column(field)
        if column is None:
            return "given"
        letters = re.sub(r"\d", "", column.cell)
        exact = (BY_KEY[column.field].scope == "case" or self.alone()) and self.origin(field) != "item"
        sheet = self.cases.sheet[self.place]
        place = f"{sheet}!{letters}{self.cases.row[self.place]}" if exact else f"{sheet}, column {letters} of the item"
        return f"given, {place}{self._typed(field, column)}"

    def unit(self, field: str) -> Meaning | None:
        """What the unit in the heading of a field means."""
        column = self.column(field)
        if column is None or not column.unit:
            return None
        try:
            return meaning(column.unit)
        except ValueError:
            return None

    def _typed(self, field: str, column: ReadColumn) -> str:
        """The number as it was typed, in the unit of its heading; empty where the heading has none."""
        unit = self.unit(field)
        known = BY_KEY[column.field]
        if unit is None or known.what != "number" or not known.reference or not self.has(field):
            return ""
        value = self.number(field)
        if unit.gauge:
            value -= self.number("atmosphere")
        if BY_KEY[column.field].reference == "Kv":
            value /= KV
        return f": {printed(float(f'{value / unit.factor - unit.zero:.10g}'))} {column.unit}"

    def by_elevation(self) -> bool:
        """Does the atmosphere of the site follow from its elevation?"""
        height, atmosphere = self.number("elevation"), self.number("atmosphere")
        return there(height, atmosphere) and math.isclose(
            float(barometric_pressure(np.array([height]))[0]), atmosphere, rel_tol=1e-12)  # fmt: skip
