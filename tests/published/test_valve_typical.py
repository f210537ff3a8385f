"""Typical FL and Fd against the table of IEC 60534-2-1 (most rows from memory)."""

from __future__ import annotations

import csv
from importlib import resources

import numpy as np
import pytest

from lowpoint import functions
from published.rows import Row, parameters, read

ROWS = read("valve_typical")
# xT belongs to gases, which are not sized here; the Fd of a tapered needle is a formula of its seat bore.
USED = [row for row in ROWS.values() if row.quantity in ("FL", "Fd") and row.id != "TB-19-Fd"]

_TRIMS = {"contoured plug (lin & eq%)": "contoured plug"}
_EITHER = ("open or close", "outward or inward", "either", None)
_DIRECTIONS = ("open", "close", "inward", "outward", "between seats", "either")


def _style(row: Row) -> str:
    kind, trim = row.inputs["type"], row.inputs.get("trim")
    if trim is None:
        return f"{kind[:-2]}, {kind[-1]} stages"
    return f"{kind}, {_TRIMS.get(trim, trim).replace('deg', ' degrees')}"


def _words(row: Row) -> list[str | None]:
    """Every way to give the flow direction of a row."""
    flow = row.inputs.get("flow")
    if flow in _EITHER:
        return [None, *_DIRECTIONS]
    return ["between seats"] if flow == "inlet between seats" else [flow]


def test_every_row_is_used() -> None:
    assert len(ROWS) == 101
    quantities = [row.quantity for row in ROWS.values()]
    assert [quantities.count(q) for q in ("FL", "Fd", "xT")] == [36, 29, 36]
    assert len(USED) == 36 + 29 - 1


@pytest.mark.parametrize("row", parameters(USED))
def test_row(row: Row) -> None:
    for word in _words(row):
        got = functions["LP_TYPICAL"](style=_style(row), property=row.quantity, direction=word)
        assert got == row.value, (row.source, word)


def test_styles_are_those_of_the_table_and_keep_its_marks() -> None:
    """Nothing is served that the published table does not have, and each value is marked as it is known."""
    text = resources.files("lowpoint").joinpath("tables/valve_typical.csv").read_text("utf-8")
    served = {}
    for row in csv.DictReader(text.splitlines()):
        for name in ("fl", "fd"):
            if row[name]:
                served[row["style"], row["direction"], name] = row[f"mark_{name}"]
    published = {}
    for row in USED:
        flow = row.inputs.get("flow")
        word = "either" if flow in _EITHER else "between seats" if flow == "inlet between seats" else flow
        published[_style(row), word, row.quantity.lower()] = row.how_known
    assert served == published


def test_the_needles_fd_is_refused_and_not_invented() -> None:
    row = ROWS["TB-19-Fd"]
    assert not row.expected.replace(".", "").isdigit()
    assert np.isnan(functions["LP_TYPICAL"](style=_style(row), property="fd", direction="open"))
    said = functions["LP_TYPICAL"].why(style=_style(row), property="fd", direction="open")
    assert "the table has no such value for this style" in said
