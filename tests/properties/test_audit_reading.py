"""Whatever stands in the cells, a sheet is read or refused: no crash, no value from nowhere."""

from __future__ import annotations

import math

from hypothesis import given, settings
from hypothesis import strategies as st

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.finding import find
from lowpoint.audit.matching import read_label
from lowpoint.audit.numbers import decimal_sign, numbers_of, shown_number
from lowpoint.audit.unitsigns import unit_sign
from lowpoint.audit.valuing import si_of, values_of
from lowpoint.audit.vocabulary import BY_KEY, STATEMENTS

WORDS = ["p1", "P2", "Inlet pressure", "Outlet pressure [bar g]", "Flow", "m3/h", "bar a", "psig", "Minimum", "Normal",
         "Maximum", "Case", "Case 1", "Kv", "Cv", "Kvs", "FL", "σ", "Size", "DN 100", "Unit", "Inlet", "Outlet", "6.8",
         "1,234", "12.5 bar g", "2.6 bar g / 37.7 psig", "-", "Cavitation", "No", "Flashing", "Travel", "%", "Tag",
         "LV-1", "Valve", "Pressure", "T", "W", "d", "Shut-off", "Temperature", "°C", "p1 = 6.8 bar a",
         "10-20"]  # fmt: skip
"""What data sheets are made of, in any order."""
TEXTS = st.one_of(st.sampled_from(WORDS), st.sampled_from(WORDS), st.text(max_size=25).filter(lambda t: t.strip()))


@st.composite
def pages(draw: st.DrawFn) -> Page:
    """Cells at any places, some over several columns or rows, as columns or as places on a page."""
    exact = draw(st.booleans())
    cells = []
    for row, column in sorted(draw(st.sets(st.tuples(st.integers(1, 9), st.integers(1, 7)), max_size=40))):
        number = draw(st.none() | st.floats(allow_nan=False, allow_infinity=False, width=32))
        width = draw(st.integers(1, 3)) if exact else draw(st.floats(0.5, 2.5))
        text, half = (draw(TEXTS), math.nan) if number is None else shown_number(number, "0.0##")[:2]
        bottom = row + draw(st.integers(0, 1))
        cells.append(Cell(row, column, column + width, f"{row},{column}", text, number, half, bottom=bottom))
    return Page("page", cells, exact=exact)


@settings(max_examples=150, deadline=None)
@given(pages())
def test_any_page_is_read(page: Page) -> None:
    found = find(page)
    places = {cell.address for cell in page.cells}
    for value, sign in values_of(found).values:
        assert value.quantity in BY_KEY
        assert value.cell in places
        assert 0.0 <= value.confidence <= 1.0
        si = si_of(value, sign, 101325.0)
        assert isinstance(si, float)
        if value.quantity == "statement":
            assert value.word in STATEMENTS


@settings(max_examples=200, deadline=None)
@given(st.text(max_size=60))
def test_any_text_is_a_label_or_not(text: str) -> None:
    label = read_label(text)
    assert label.key in BY_KEY or label.key in ("", "-", "?")
    assert 0.0 <= label.score <= 1.0
    unit_sign(text)
    for decimal in (".", ",", "?", ""):
        assert len(numbers_of(text, decimal)) <= 30
    assert decimal_sign([text]) in (".", ",", "?", "")


@settings(max_examples=200, deadline=None)
@given(st.floats(-1e9, 1e9), st.sampled_from(["0", "0.0", "0.00", "#,##0.0", "General", "0%", '0.0" bar"', "0.00E+00"]))
def test_a_number_is_shown_within_half_of_its_last_digit(value: float, number_format: str) -> None:
    text, half, _, factor = shown_number(value, number_format)
    # The definition of rounding; a little more for the binary form of the decimal number.
    assert abs(float(text) - value * factor) <= half * (1.0 + 1e-6) + 1e-9 * abs(value)


@settings(max_examples=200, deadline=None)
@given(st.floats(0.001, 1e6).map(lambda x: round(x, 2)), st.sampled_from([".", ","]))
def test_a_number_written_with_either_sign_is_read_back(value: float, decimal: str) -> None:
    text = f"{value:.2f}".replace(".", decimal)
    (number,) = numbers_of(text, decimal)
    assert number.value == value
    assert number.half == 0.005
