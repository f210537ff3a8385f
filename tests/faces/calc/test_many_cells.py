"""Many cells in real Calc at once; how long they take is measured by the benchmark command, not here."""

from __future__ import annotations

from typing import Any

import pytest

from lowpoint import cells

ROWS = 10_000


@pytest.mark.usefixtures("in_the_office")
@pytest.mark.parametrize(
    ("name", "formula"),
    [
        ("LP_LIMIT_INSTALLED", "=LP_LIMIT_INSTALLED({a};{b};80;100;150)"),
        ("LP_STAGES", '=LP_STAGES({b};5;0.5;{a};"upstream")'),
        ("LP_VAPOUR_PRESSURE", '=LP_VAPOUR_PRESSURE("water";{b})'),
        ("LP_VAPOUR_PRESSURE", '=LP_VAPOUR_PRESSURE("sea water";{b};38)'),
    ],
)
def test_a_hard_recalculation(office: Any, name: str, formula: str) -> None:
    book = office.new()
    office.put_values(book, f"A1:B{ROWS}", [[1.5 + row * 1e-5, 20.0 + row * 5e-3] for row in range(ROWS)])
    office.put(book, f"C1:C{ROWS}", [[formula.format(a=f"A{row + 1}", b=f"B{row + 1}")] for row in range(ROWS)])
    office.recalculate(book)
    shown = [row[0] for row in office.cells(book, f"C1:C{ROWS}")]
    office.close(book)
    assert all(isinstance(value, float) for value in shown)
    assert len(set(shown)) == (ROWS if name != "LP_STAGES" else len(set(shown)))
    row = ROWS - 1
    a, b = 1.5 + row * 1e-5, 20.0 + row * 5e-3
    arguments = {"{a};{b};80;100;150": [a, b, 80.0, 100.0, 150.0], '{b};5;0.5;{a};"upstream"': [b, 5.0, 0.5, a],
                 '"water";{b}': ["water", b], '"sea water";{b};38': ["sea water", b, 38.0]}  # fmt: skip
    assert shown[row] == cells.call(name, arguments[formula.partition("(")[2].rstrip(")")])
