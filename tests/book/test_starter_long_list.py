"""The sheet Long list: one array formula a column; every row as single calls and as an independent route give it."""

from __future__ import annotations

import re
from collections import Counter
from typing import Any

import pytest
from openpyxl.worksheet.formula import ArrayFormula

from book import independent
from book.starters import made
from lowpoint import cells
from lowpoint.starter.frame import FIRST, HEADINGS
from lowpoint.starter.long_list_sheet import COLUMNS, LETTERS, TITLE, VALVE
from lowpoint.starter.plant import Item, Readings

COMPUTED = [column.key for column in COLUMNS if not column.is_input]


def readings() -> Readings:
    given = made("metric").plant.readings
    assert given is not None
    return given


def last() -> int:
    return FIRST + len(readings().rows) - 1


def valve() -> Item:
    return next(item for item in made("metric").plant.items if item.tag == readings().tag)


def row(at: int) -> dict[str, Any]:
    """The stored values of a row by key."""
    sheet = made("metric").values[TITLE]
    return {key: sheet[f"{letter}{at}"].value for key, letter in LETTERS.items()}


def beside() -> dict[str, Any]:
    """The stored values of what is the same in every row."""
    sheet = made("metric").values[TITLE]
    (heading,) = (cell for cell in sheet[HEADINGS] if cell.value == "The valve")
    return {key: sheet.cell(at, heading.column + 1).value for at, key in enumerate(VALVE, start=FIRST)}


def test_one_array_formula_serves_a_whole_column() -> None:
    assert len(readings().rows) == 200
    sheet = made("metric").formulas[TITLE]
    found = {c.coordinate: c.value for line in sheet.iter_rows() for c in line if isinstance(c.value, ArrayFormula)}
    assert {place: formula.ref for place, formula in found.items()} == {
        f"{LETTERS[key]}{FIRST}": f"{LETTERS[key]}{FIRST}:{LETTERS[key]}{last()}" for key in COMPUTED
    }
    # Ranges of a formula are as long as the column, or it would answer for the wrong rows; the valve is one cell each.
    for formula in found.values():
        for one, other in re.findall(r"\$[A-N]\$(\d+)(?::\$[A-N]\$(\d+))?", formula.text):
            assert (one, other) == (str(FIRST), str(last()))
        assert "LP_" in formula.text
    # In no other book: US customary units have none.
    assert TITLE not in made("us").formulas.sheetnames


def test_headings_have_notes_and_the_readings_are_those_given() -> None:
    sheet = made("metric").formulas[TITLE]
    for column in COLUMNS:
        assert len(sheet[f"{LETTERS[column.key]}{HEADINGS}"].comment.text) > 20, column.key
    for at, reading in enumerate(readings().rows, start=FIRST):
        assert [row(at)[key] for key in ("hour", "flow", "p1", "p2", "t")] == [
            reading.hour, reading.flow, reading.p1, reading.p2, reading.t,
        ]  # fmt: skip


def test_each_row_is_what_single_calls_give() -> None:
    """The same double from a range as from one cell, a promise of the functions."""
    b = beside()
    sizes = [b[key] for key in ("valve_size", "pipe_in", "pipe_out")]
    for at in range(FIRST, last() + 1):
        r = row(at)
        state = [r[key] for key in ("flow", "p1", "p2", "pv")]
        assert r["pv"] == cells.call("LP_VAPOUR_PRESSURE", [b["fluid"], r["t"]])
        assert r["density"] == cells.call("LP_DENSITY", [b["fluid"], r["t"], r["p1"]])
        assert r["coefficient"] == cells.call("LP_COEFFICIENT", [*state, b["pc"], r["density"], b["fl"], *sizes])
        assert r["sigma"] == cells.call("LP_SIGMA", [r["p1"], r["p2"], r["pv"]])
        for name in ("incipient", "constant", "damage"):
            to, head = (b["valve_size"], b["size_ref"]), (r["p1"] - r["pv"], b["head_ref"])
            scaled = cells.call("LP_SIGMA_SCALED", [b[f"{name}_ref"], *to, *head, b["size_exponent"],
                                                    b["head_exponent"], "isa"])  # fmt: skip
            assert r[name] == cells.call("LP_LIMIT_INSTALLED", [scaled, r["coefficient"], *sizes])
        choked = cells.call("LP_SIGMA_CHOKED", [r["p1"], r["pv"], b["pc"], b["fl"], r["coefficient"], *sizes])
        limits = [r["incipient"], r["constant"], r["damage"], cells.OMITTED, choked]
        assert r["regime"] == cells.call("LP_REGIME", [r["sigma"], *limits])
        assert r["margin"] == cells.call("LP_MARGIN", [r["sigma"], r["damage"]])


def test_rows_worked_out_a_second_way() -> None:
    """IEC 60534-2-1 by bisection, IAPWS by another library, from what is typed (C: checks the coding)."""
    item = valve()
    trim, (d, d1, d2), (b, a) = item.trim, item.sizes, item.trim.exponents
    limits = dict(zip(("incipient", "constant", "damage"), trim.limits, strict=True))
    for at, reading in list(enumerate(readings().rows, start=FIRST))[::9]:
        typed = {
            "t": reading.t, "p1": reading.p1, "p2": reading.p2, "flow": reading.flow, "fl": trim.fl, "d": d, "d1": d1,
            "d2": d2, "rated": item.rated, "characteristic": trim.characteristic, "rangeability": trim.rangeability,
            "size_ref": trim.size_ref, "head_ref": trim.head_ref, "b": b, "a": a,
        }  # fmt: skip
        answer, shown = independent.worked_out(typed, limits, "damage"), row(at)
        for key in ("pv", "density", "coefficient", "sigma", "incipient", "constant", "damage"):
            # Two equations of state of water (0.02 %).
            assert shown[key] == pytest.approx(answer[key], rel=1e-3), f"{key} of row {at}"
        assert 1.0 + shown["margin"] == pytest.approx(1.0 + answer["margin"], rel=2e-3)


def test_hours_are_counted_by_state() -> None:
    sheet = made("metric").values[TITLE]
    (heading,) = (c for line in sheet.iter_rows() for c in line if c.value == "Hours in it")
    shown = {}
    for at in range(heading.row + 1, heading.row + 8):
        shown[sheet.cell(at, heading.column - 1).value] = sheet.cell(at, heading.column).value
    rows = [row(at) for at in range(FIRST, last() + 1)]
    assert shown.pop("least margin to damage") == min(r["margin"] for r in rows)
    hours = Counter(r["regime"] for r in rows)
    assert {state: number for state, number in shown.items() if number} == hours
    # The list would show little if the valve stayed in one state.
    assert len(hours) >= 4
    assert sum(shown.values()) == len(rows)
