"""Properties of travel: characteristics inverted, tables read without extrapolation, opening and FL solved together."""

from __future__ import annotations

import math
from typing import Any

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from lowpoint import functions
from properties import standard
from properties.cases import piping, services
from properties.standard import Piping, Service

TRAVEL, AT_TRAVEL, OPERATING = (functions[f"LP_{name}"] for name in ("TRAVEL", "AT_TRAVEL", "OPERATING_TRAVEL"))
shares = st.floats(0.0, 1.0)


@given(shares, st.floats(5.0, 200.0), st.floats(1.0, 5000.0))
def test_characteristics_are_inverted(h: float, rangeability: float, rated: float) -> None:
    """phi = R^(h-1), and phi = 1/R + (1-1/R) h (IEC 60534-2-4, from memory); without R a linear one starts at 0."""
    equal = rated * rangeability ** (h - 1.0)
    assert TRAVEL(equal, rated, "equal percentage", rangeability) == pytest.approx(100 * h, abs=1e-9)
    linear = rated * (1.0 / rangeability + (1.0 - 1.0 / rangeability) * h)
    assert TRAVEL(linear, rated, "linear", rangeability) == pytest.approx(100 * h, abs=1e-9)
    assume(h > 0)
    assert TRAVEL(rated * h, rated, "linear") == pytest.approx(100 * h, abs=1e-9)


@given(st.floats(5.0, 200.0), st.floats(1.0, 5000.0), st.floats(1e-9, 0.5))
def test_beyond_the_ends_there_is_no_opening(rangeability: float, rated: float, beyond: float) -> None:
    for word in ("equal percentage", "linear"):
        assert math.isnan(TRAVEL(rated * (1 + beyond), rated, word, rangeability))
        assert "above what the valve has fully open" in TRAVEL.why(rated * (1 + beyond), rated, word, rangeability)
        below = rated / rangeability * (1 - beyond)
        assert math.isnan(TRAVEL(below, rated, word, rangeability))
        assert "below what the valve controls" in TRAVEL.why(below, rated, word, rangeability)
        # The ends themselves are openings, whatever the rounding.
        assert TRAVEL(rated / rangeability, rated, word, rangeability) == pytest.approx(0.0, abs=1e-9)
        assert TRAVEL(rated, rated, word, rangeability) == pytest.approx(100.0, abs=1e-9)


@st.composite
def tables(draw: st.DrawFn) -> tuple[list[float], list[float], list[float]]:
    """Openings (%), coefficients rising with them, recovery factors that need not."""
    rows = draw(st.integers(2, 8))
    steps = draw(st.lists(st.floats(1.0, 10.0), min_size=rows, max_size=rows))
    rises = draw(st.lists(st.floats(0.5, 60.0), min_size=rows, max_size=rows))
    fls = draw(st.lists(st.floats(0.4, 1.0), min_size=rows, max_size=rows))
    travels = [sum(steps[: i + 1]) for i in range(rows)]
    return travels, [sum(rises[: i + 1]) for i in range(rows)], fls


def _read(x: float, xs: list[float], ys: list[float]) -> float:
    """Linear between rows, by hand."""
    for x0, x1, y0, y1 in zip(xs, xs[1:], ys, ys[1:], strict=False):
        if x0 <= x <= x1:
            return y0 + (y1 - y0) * (x - x0) / (x1 - x0)
    return math.nan


def _column(values: list[float]) -> list[list[float]]:
    return [[value] for value in values]


@given(tables(), st.floats(0.0, 100.0))
def test_a_value_at_an_opening(table: tuple[list[float], list[float], list[float]], travel: float) -> None:
    travels, values, _ = table
    got = AT_TRAVEL(travel, _column(travels), _column(values))
    # The ends of the table are rows of it; one digit beyond is outside.
    if travel < travels[0] * (1 - 1e-12) or travel > travels[-1] * (1 + 1e-12):
        assert math.isnan(got)
        assert "nothing is extrapolated" in AT_TRAVEL.why(travel, _column(travels), _column(values))
    elif travels[0] <= travel <= travels[-1]:
        assert got == pytest.approx(_read(travel, travels, values), rel=1e-9)
    for x, y in zip(travels, values, strict=True):
        assert AT_TRAVEL(x, _column(travels), _column(values)) == pytest.approx(y, rel=1e-12)


@given(tables(), shares)
def test_a_table_as_characteristic(table: tuple[list[float], list[float], list[float]], share: float) -> None:
    travels, coefficients, _ = table
    both = [[h, c] for h, c in zip(travels, coefficients, strict=True)]
    c = coefficients[0] + share * (coefficients[-1] - coefficients[0])
    assert TRAVEL(c, 1.0, both) == pytest.approx(_read(c, coefficients, travels), rel=1e-9)
    assert math.isnan(TRAVEL(coefficients[-1] * 1.001, 1.0, both))
    assert "above what the valve has fully open" in TRAVEL.why(coefficients[-1] * 1.001, 1.0, both)
    assert math.isnan(TRAVEL(coefficients[0] * 0.999, 1.0, both))
    assert "below what the valve controls" in TRAVEL.why(coefficients[0] * 0.999, 1.0, both)


def _operate(
    flow: float, service: Service, pipes: Piping, table: tuple[list[float], list[float], list[float]], why: bool = False
) -> Any:
    travels, coefficients, fls = (_column(column) for column in table)
    case = service.cells()
    ask = OPERATING.why if why else OPERATING
    return ask(
        flow, *(case[k] for k in ("p1", "p2", "pv", "pc", "density")), travels, coefficients, fls, **pipes.cells()
    )


def _passes(h: float, flow: float, service: Service, pipes: Piping, table: Any) -> bool:
    """Does the valve pass the flow at this opening, by the plain reading of the standard?"""
    c, fl = _read(h, table[0], table[1]), _read(h, table[0], table[2])
    return standard.flow(c, fl, service, pipes) >= flow


@given(tables(), services(), piping(), st.floats(0.02, 0.98))
def test_opening_and_recovery_factor_are_solved_together(
    table: tuple[list[float], list[float], list[float]], service: Service, pipes: Piping, share: float
) -> None:
    """At the answer the valve passes the flow exactly with the FL that it has there, and at no smaller opening."""
    travels, coefficients, fls = table
    assume(pipes.d is None or pipes.bracket(coefficients[-1]) > 1 / 3)
    assume(coefficients[-1] < 0.05 * (pipes.d or 1e3) ** 2)
    at = travels[0] + share * (travels[-1] - travels[0])
    flow = standard.flow(_read(at, travels, coefficients), _read(at, travels, fls), service, pipes)
    smaller = [travels[0] + (at - travels[0]) * i / 60 for i in range(60)]
    answer = _operate(flow, service, pipes, table)
    if _passes(travels[0], flow * (1 + 1e-9), service, pipes, table):
        assert math.isnan(answer)
        assert "less open than the table's first row" in _operate(flow, service, pipes, table, why=True)
        return
    assume(not _passes(travels[0], flow * (1 - 1e-9), service, pipes, table))
    assert answer <= at * (1 + 1e-9)
    c, fl = _read(answer, travels, coefficients), _read(answer, travels, fls)
    assert standard.flow(c, fl, service, pipes) == pytest.approx(flow, rel=1e-9)
    assert not any(_passes(h, flow * (1 + 1e-9), service, pipes, table) for h in smaller if h < answer * (1 - 1e-9))
    # The required coefficient for the FL read at that opening is the coefficient there.
    needed = functions["LP_COEFFICIENT"](flow=flow, fl=min(fl, 1.0), **service.cells(), **pipes.cells())
    assert needed == pytest.approx(c, rel=1e-8)


@given(tables(), services())
def test_a_valve_that_is_too_small(table: tuple[list[float], list[float], list[float]], service: Service) -> None:
    travels, coefficients, fls = table
    grid = [travels[0] + (travels[-1] - travels[0]) * i / 400 for i in range(401)]
    most = max(
        standard.flow(_read(h, travels, coefficients), _read(h, travels, fls), service, Piping())
        for h in [*grid[:-1], *travels]
    )
    assert math.isnan(_operate(most * 1.02, service, Piping(), table))
    assert "the valve is too small" in _operate(most * 1.02, service, Piping(), table, why=True)
    assert "the valve is too small" not in _operate(most * (1 - 1e-9), service, Piping(), table, why=True)


def test_the_largest_choked_flow_between_two_rows_is_found() -> None:
    """FL falls so fast that C FL is largest between the rows: no row passes what the valve passes half open."""
    table = ([10.0, 90.0], [50.0, 100.0], [0.9, 0.4])
    service = Service(1000.0, 110.0, 2.3, 22064.0, 998.0)
    # C FL = (50 + 50 t)(0.9 - 0.5 t) = 45 + 20 t - 25 t^2, largest at t = 0.4: 49 against 45 and 40 at the rows.
    rate = 0.1 * math.sqrt((service.p1 - standard.FF(service) * service.pv) * 999.1 / 998.0)
    for flow in (46.0 * rate, 48.99 * rate):
        t = (20.0 - math.sqrt(400.0 - 100.0 * (flow / rate - 45.0))) / 50.0
        assert _operate(flow, service, Piping(), table) == pytest.approx(10.0 + 80.0 * t, rel=1e-9)
    assert math.isnan(_operate(49.01 * rate, service, Piping(), table))


def test_fully_open_and_first_row_are_answers() -> None:
    table = ([10.0, 40.0, 70.0], [10.0, 33.0, 81.0], [0.95, 0.9, 0.8])
    service = Service(1000.0, 700.0, 2.3, 22064.0, 998.0)
    for row in range(3):
        flow = functions["LP_FLOW"](coefficient=table[1][row], fl=table[2][row], **service.cells())
        assert _operate(flow, service, Piping(), table) == pytest.approx(table[0][row], rel=1e-9)


@pytest.mark.parametrize("fl", [0.0, 1.2])
def test_a_recovery_factor_that_cannot_be(fl: float) -> None:
    table = ([10.0, 40.0, 70.0], [10.0, 33.0, 81.0], [0.95, fl, 0.8])
    service = Service(1000.0, 700.0, 2.3, 22064.0, 998.0)
    assert math.isnan(_operate(50.0, service, Piping(), table))
    assert "recovery factor in fls is 0 or above 1" in _operate(50.0, service, Piping(), table, why=True)
