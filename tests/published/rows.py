"""Rows of check values from outside: id, quantity, inputs (the unit stands in each key), expected, tolerance, source.

``how_known``: ``S`` read in the named source, ``L`` reproduced by a general-purpose library that cites it, ``C``
computed independently from the stated equation (checks the coding, not the method), ``M`` from memory.
"""

from __future__ import annotations

import csv
import json
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

__all__ = ["Row", "half_digit", "parameters", "read"]

DATA = Path(__file__).parent / "data"


@dataclass(frozen=True, slots=True)
class Row:
    """One published or independently computed value."""

    id: str
    quantity: str
    inputs: dict[str, Any]
    expected: str
    tolerance: str
    source: str
    how_known: str

    @property
    def value(self) -> float:
        return float(self.expected)

    @property
    def allowed(self) -> float:
        """Absolute tolerance that the row states, never finer than the digits of a long number; exact: a rounding."""
        kind, _, size = self.tolerance.partition(":")
        if kind not in ("rel", "abs"):
            return 1e-9 * max(abs(self.value), 1.0)
        stated = float(size) * (abs(self.value) if kind == "rel" else 1.0)
        long = sum(letter.isdigit() for letter in self.expected) >= 7
        return max(stated, half_digit(self.expected)) if long else stated


def read(name: str) -> dict[str, Row]:
    """The rows of one file by id."""
    with (DATA / f"{name}.csv").open(encoding="utf-8", newline="") as text:
        rows = [
            Row(r["id"], r["quantity"], json.loads(r["inputs"]), r["expected"], r["tolerance"], r["source"],
                r["how_known"])
            for r in csv.DictReader(text)
        ]  # fmt: skip
    found = {row.id: row for row in rows}
    assert len(found) == len(rows), f"{name}.csv uses an id twice"
    return found


def half_digit(printed: str) -> float:
    """Half of the last digit of a number as it is printed."""
    mantissa, _, exponent = printed.casefold().partition("e")
    decimals = len(mantissa.partition(".")[2])
    return 0.5 * 10.0 ** (int(exponent or 0) - decimals)


def parameters(rows: Iterable[Row]) -> list[Any]:
    """Rows as test cases; what is known from memory alone says so in its name."""
    return [pytest.param(row, id=f"{row.id}{' from memory' if row.how_known == 'M' else ''}") for row in rows]
