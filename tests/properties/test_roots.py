"""The bracketed root search against plain bisection."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lowpoint.physics.roots import bracketed_root

CURVES: dict[str, Callable[[Any, Any], Any]] = {
    "straight": lambda x, c: x - c,
    "cubic": lambda x, c: x**3 - c**3,
    "flat": lambda x, c: (x - c) ** 9,
    "steep": lambda x, c: np.exp(40.0 * (x - c)) - 1.0,
    "kinked": lambda x, c: np.where(x > c, 1e6 * (x - c), 1e-6 * (x - c)),
    "step": lambda x, c: np.where(x >= c, 1.0, -1.0),
    "falling": lambda x, c: 1.0 / (1.0 + np.exp(np.minimum(30.0 * (x - c), 700.0))) - 0.5,
    "wavy": lambda x, c: (x - c) * (1.1 + np.sin(60.0 * x)),
}
roots = st.lists(st.floats(0.06, 7.9), min_size=1, max_size=8)


def _bisected(curve: Callable[[Any, Any], Any], c: float, low: float, high: float) -> float:
    rising = curve(np.float64(low), c) < 0.0
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if (curve(np.float64(middle), c) < 0.0) == rising else (low, middle)
    return high


def _found(curve: Callable[[Any, Any], Any], c: Any, **more: Any) -> tuple[Any, int]:
    """The roots, and how often the curve was asked for a value."""
    asked = 0

    def excess(x: Any, rows: Any) -> Any:
        nonlocal asked
        asked += 1
        assert len(x) == len(rows)
        return curve(x, c[rows])

    return bracketed_root(excess, np.full(len(c), 0.05), np.full(len(c), 8.0), **more), asked


@pytest.mark.parametrize("name", CURVES)
@given(c=roots)
def test_the_root_is_that_of_bisection(name: str, c: list[float]) -> None:
    """To the last bits of x where the curve has them; never more steps than its caps."""
    curve = CURVES[name]
    found, asked = _found(curve, np.array(c))
    plain = [_bisected(curve, x, 0.05, 8.0) for x in c]
    # Beside a flat root and a difference of near cubes the curve itself has a width of rounding.
    assert found == pytest.approx(plain, rel=1e-9 if name in ("flat", "cubic") else 1e-12)
    assert found == pytest.approx(c, rel=1e-9)
    assert asked <= 106


@pytest.mark.parametrize("name", CURVES)
@given(c=roots, off=st.floats(-0.5, 0.5), reach=st.floats(1e-6, 0.3))
def test_a_guess_changes_the_steps_and_not_the_root(name: str, c: list[float], off: float, reach: float) -> None:
    """Good guesses, bad ones and none at all (NaN) end at the same root."""
    guess = np.array(c) + off
    guess[::3] = np.nan
    found, _ = _found(CURVES[name], np.array(c), guess=guess, reach=reach)
    assert found == pytest.approx(c, rel=1e-9)


@given(c=roots)
@settings(max_examples=20)
def test_a_row_does_not_know_its_neighbours(c: list[float]) -> None:
    for curve in CURVES.values():
        together, _ = _found(curve, np.array(c))
        alone = [_found(curve, np.array([x]))[0][0] for x in c]
        assert together.tolist() == alone


def test_few_steps_on_a_smooth_curve() -> None:
    """Bisection would need more than 50; a guess saves some."""
    c = np.array([0.3, 2.0, 7.5])
    _, asked = _found(CURVES["cubic"], c)
    assert asked < 20
    _, near = _found(CURVES["cubic"], c, guess=c * 1.001, reach=0.01)
    assert near < asked


def test_no_root_is_nan_and_an_end_may_be_one() -> None:
    found, _ = _found(CURVES["straight"], np.array([0.01, 0.05, 3.0, 8.0, 9.0, np.nan]))
    assert np.isnan(found).tolist() == [True, False, False, False, True, True]
    assert found[[1, 3]].tolist() == [0.05, 8.0]


def test_a_hole_in_the_curve_is_no_root() -> None:
    """A curve that has no value where it would cross has no root there."""
    found = bracketed_root(lambda x, rows: np.where(np.abs(x - 3.0) < 2.0, np.nan, x - 3.0), [0.1], [8.0])
    assert np.isnan(found).all()
