"""The failing items of a survey with their cases as one table: what every remedy is tried on, all items at once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from lowpoint.survey.calculating import calculate
from lowpoint.survey.model import Cases, Findings, Item, Survey, absent

__all__ = ["Failing", "as_strict", "failing_items", "index_fails"]


@dataclass(frozen=True, eq=False)
class Failing:
    """Items that fail, and their cases that have an answer: rows of one table, item after item."""

    items: tuple[Item, ...]
    cases: Cases
    found: Findings
    """Of ``cases``, as they are."""
    owner: Any
    """Number of the item of each row; never falls."""
    places: Any
    """Place of each row among the cases of the survey."""

    @property
    def count(self) -> int:
        """How many items."""
        return len(self.items)

    @cached_property
    def starts(self) -> Any:
        """First row of each item."""
        return np.searchsorted(self.owner, np.arange(self.count))

    @cached_property
    def bad(self) -> Any:
        """Rows that fail by their index: flashing, choked, or at the limit to keep."""
        return index_fails(self.found)

    def by_item(self, how: np.ufunc, values: Any) -> Any:
        """``how`` (np.logical_or, np.fmin ...) over the rows of each item."""
        return how.reduceat(values, self.starts) if self.count else np.zeros(0, np.asarray(values).dtype)

    def any(self, rows: Any) -> Any:
        """Items with such a row."""
        return self.by_item(np.logical_or, rows)

    def all(self, rows: Any) -> Any:
        """Items all of whose rows are such."""
        return self.by_item(np.logical_and, rows)

    def rows_of(self, item: int) -> slice:
        """Rows of one item."""
        last = self.starts[item + 1] if item + 1 < self.count else len(self.owner)
        return slice(int(self.starts[item]), int(last))

    def only(self, wanted: Any) -> Failing:
        """These items alone (flags, one an item)."""
        if wanted.all():
            return self
        rows = np.flatnonzero(wanted[self.owner])
        numbers = np.cumsum(wanted) - 1
        return Failing(tuple(item for item, keep in zip(self.items, wanted.tolist(), strict=True) if keep),
                       self.cases.take(rows), taken(self.found, rows), numbers[self.owner[rows]],
                       self.places[rows])  # fmt: skip

    def name(self, row: int) -> str:
        """How a case is called in a sentence."""
        case = self.cases.case[row]
        return f"case '{case}'" if case else f"row {self.cases.row[row]}"


def index_fails(found: Findings) -> Any:
    """Where the index is the failure, not the capacity."""
    return found.flashing | found.choked | (found.margin <= 0.0)


_ORDER = ("incipient", "constant", "damage", "vibration", "choked")


def _order(kept: Any) -> Any:
    return np.select([kept == word for word in _ORDER], range(len(_ORDER)), len(_ORDER))


def as_strict(found: Findings, kept: Any) -> Any:
    """Where margins count to the limit that they counted to before, or to a milder one.

    A valve that leaves its vendor's table has no limits there, and its margin counts to choking: no cure.
    """
    return _order(found.keep) <= _order(kept)


def taken(found: Findings, rows: Any) -> Findings:
    """Findings at some places; without texts, as :func:`~lowpoint.survey.calculating.calculate` leaves them."""
    columns = {name: value[rows] for name, value in vars(found).items() if isinstance(value, np.ndarray)}
    return Findings(**columns)


def failing_items(survey: Survey) -> Failing:
    """The failing items of a survey."""
    items: Sequence[Item] = [item for item in survey.items if item.fails]
    answered = ~absent(survey.findings.regime)
    rows = [[place for place in item.rows if answered[place]] for item in items]
    places = np.array([place for part in rows for place in part], np.int64)
    owner = np.repeat(np.arange(len(items)), [len(part) for part in rows])
    cases = survey.cases.take(places)
    return Failing(tuple(items), cases, calculate(cases), owner, places)
