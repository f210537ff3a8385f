"""What the writers of the sheets share: where the rows of a sheet are, names for its columns, formulas of a row."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName

from lowpoint.starter.notes import twin
from lowpoint.styling.tables import Head, put_headings, put_table

__all__ = ["FIRST", "HEADINGS", "ITEMS_LAST", "LAST", "Head", "name_column", "put_headings", "put_table", "spelled",
           "words_of_set"]  # fmt: skip

HEADINGS = 5
"""The row of the headings on the sheets List and Items."""
FIRST = HEADINGS + 1
LAST, ITEMS_LAST = 1500, 500
"""How far the names reach: rows added below the last one, up to here, are counted on sheet Summary."""

_FUNCTION = re.compile(r"\bLP_[A-Z]+(?:_[A-Z]+)*\b")


def words_of_set(system: str) -> dict[str, str]:
    """The pressure units of a set, in the words that cells hold."""
    metric = {"bar": "bar a", "gauge": "bar g"}
    return metric if system == "metric" else {"bar": "psia", "gauge": "psig"}


def spelled(formula: str, places: Mapping[str, str], system: str) -> str:
    """A formula with its cells put in, and its LP_ functions in the set of units of the book."""
    return _FUNCTION.sub(lambda match: twin(match[0], system), formula.format_map(places))


def name_column(book: Any, name: str, sheet: str, column: int, last: int, first: int = FIRST) -> None:
    """Name the cells of a column: ``List_tag`` and the like."""
    letter = get_column_letter(column)
    book.defined_names[name] = DefinedName(name, attr_text=f"{sheet}!${letter}${first}:${letter}${last}")
