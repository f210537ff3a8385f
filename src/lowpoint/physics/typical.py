"""Typical FL and Fd of valve styles: screening values out of the published table, never a substitute for a test."""

from __future__ import annotations

import csv
import difflib
from collections.abc import Iterable
from functools import cache
from importlib.resources import files
from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import NoAnswer, function

__all__ = ["styles", "typical_value"]

Row = dict[str, str]


@cache
def _table() -> dict[str, list[Row]]:
    """The rows of each style, by its spelling."""
    text = files("lowpoint").joinpath("tables/valve_typical.csv").read_text(encoding="utf-8")
    found: dict[str, list[Row]] = {}
    for row in csv.DictReader(text.splitlines()):
        found.setdefault(row["style"], []).append(row)
    return found


def styles() -> Iterable[str]:
    """Every style, as it is spelled in cells, with its flow directions in brackets (which may be typed or not)."""
    return [_listed(style) for style in _table()]


def _listed(style: str) -> str:
    return f"{style}  ({' / '.join(d for row in _table()[style] for d in _directions(row))})"


def _key(text: str) -> str:
    return "".join(letter for letter in text.casefold() if letter.isalnum() or letter == "-")


@cache
def _spellings() -> dict[str, str]:
    return {_key(spelling): style for style in _table() for spelling in (style, _listed(style))}


def resolve_style(text: str) -> str:
    """The table's spelling of a style; case, spaces and commas do not matter."""
    style = _spellings().get(_key(text))
    if style is None:
        begun = [known for known in _table() if text.strip() and known.casefold().startswith(text.strip().casefold())]
        near = begun or difflib.get_close_matches(text.casefold(), _table(), n=3, cutoff=0.3)
        nearest = f"; nearest: {' / '.join(near)}" if near else ""
        raise ValueError(f"style must be one that 'lowpoint functions LP_TYPICAL' lists, got '{text}'{nearest}")
    return style


def _row(style: str, direction: str | None) -> Row | None:
    """The table's row, None where the direction decides and is missing or unknown."""
    rows = _table()[style]
    if len(rows) == 1 and (direction is None or _directions(rows[0]) == ["either"]):
        return rows[0]
    return next((row for row in rows if direction in _directions(row)), None)


def _directions(row: Row) -> list[str]:
    return row["direction"].split("|")


def _value(style: str, wanted: str, direction: str | None) -> float:
    row = _row(style, direction)
    return float(row[wanted]) if row is not None and row[wanted] else np.nan


def _each(words: Any, *others: Any) -> list[tuple[Any, ...]]:
    """The words of every row side by side, one row where all are uniform."""
    columns = [words, *others]
    size = max((len(x) for x in columns if isinstance(x, np.ndarray)), default=1)
    spread = [x.tolist() if isinstance(x, np.ndarray) else [x] * size for x in columns]
    return list(zip(*spread, strict=True))


def _undirected(style: Any, direction: Any) -> Any:
    """Where the style's value depends on a direction that is not given."""
    return np.array([_absent(d) and len(_table()[s]) > 1 for s, d in _each(style, direction)])


def _misdirected(style: Any, direction: Any) -> Any:
    """Where the style has no row for the direction that is given."""
    return np.array([not _absent(d) and _row(s, d) is None for s, d in _each(style, direction)])


def _absent(word: str | None) -> bool:
    """Is a word of a column left out? (An array of words holds the text None for it.)"""
    return not word or word == "None"


@function(
    "TYPICAL", group="valves", gives="typical FL or Fd of a valve style, a screening value",
    source_key="IEC 60534-2-1", equation="table of typical values at rated travel", any_unit=True,
    resolve={"style": resolve_style}, words={"style": styles}, basis="published",
    basis_text="typical values at rated travel of IEC 60534-2-1, most of them from memory; a screening value: use "
    "the vendor's, at the real opening (FL of rotary valves rises as they close)",
    no_answer=(
        NoAnswer("direction must be given for this style: its value depends on the flow direction; 'lowpoint "
                 "functions LP_TYPICAL' lists the words", _undirected, missing=True),
        NoAnswer("direction must be one that the style has; 'lowpoint functions LP_TYPICAL' lists them beside it",
                 _misdirected, value=True),
        NoAnswer("the table has no such value for this style; ask the vendor for it"),
    ),
)  # fmt: skip
def typical_value(style: q.Style, property: q.Property, direction: q.Direction = None) -> q.Ratio:
    """Typical FL or Fd of a style at rated travel.

    Words, one or an array. NaN where the direction decides and is missing, or the table has no such value.
    Source: IEC 60534-2-1, table of typical values; the mark of each row stands in ``tables/valve_typical.csv``.
    """
    rows = _each(style, property, direction)
    return np.array([_value(s, p, None if _absent(d) else d) for s, p, d in rows])
