"""Properties of drops in stages: the least number that does, equal indices, exact ends, units."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from lowpoint import functions

STAGES, PRESSURES, SIGMA = (functions[f"LP_{name}"] for name in ("STAGES", "STAGE_PRESSURES", "SIGMA"))

ends = st.tuples(st.floats(2.0, 400.0), st.floats(0.01, 0.99), st.floats(1e-4, 0.98)).map(
    lambda x: {"p1": x[0], "p2": x[0] * x[1], "pv": x[0] * x[1] * x[2]}
)
"""Inlet, outlet and vapour pressure, a liquid that stays liquid."""
targets = st.floats(1.02, 12.0)


def _worst(case: dict[str, float], stages: float) -> float:
    """Lowest index of so many stages of equal index, each by the definition."""
    p = PRESSURES(**case, stages=stages)
    return min(SIGMA(p1=p[i], p2=p[i + 1], pv=case["pv"]) for i in range(int(stages)))


@given(ends, targets)
def test_the_number_is_the_least_that_does(case: dict[str, float], target: float) -> None:
    """n stages hold the target, n - 1 do not."""
    n = STAGES(**case, target=target)
    assume(n <= 100)
    assert n == int(n) >= 1
    assert _worst(case, n) >= target * (1 - 1e-8)
    if n > 1:
        assert _worst(case, n - 1) < target


@given(ends, st.integers(1, 100))
def test_pressures_from_end_to_end(case: dict[str, float], n: int) -> None:
    p = PRESSURES(**case, stages=n)
    assert (p[0], p[-1]) == (case["p1"], case["p2"])
    assert len(p) == n + 1
    assert (np.diff(p) < 0.0).all()
    heads = (p - case["pv"]) / (case["p1"] - case["pv"])
    ratio = ((case["p2"] - case["pv"]) / (case["p1"] - case["pv"])) ** (1.0 / n)
    assert heads[1:] / heads[:-1] == pytest.approx([ratio] * n, rel=1e-10)
    even = PRESSURES(**case, stages=n, rule="drop")
    assert (even[0], even[-1]) == (case["p1"], case["p2"])
    assert -np.diff(even) == pytest.approx([(case["p1"] - case["p2"]) / n] * n, rel=1e-9)
    if n > 1:
        last = SIGMA(p1=even[-2], p2=even[-1], pv=case["pv"])
        assert last < _worst(case, n)


@given(ends, st.integers(1, 60))
def test_the_index_of_n_stages_as_target_gives_n(case: dict[str, float], n: int) -> None:
    """Equal-index identity: sigma of each is 1/(1-r); as the target it is met by n stages, and no rounding adds one."""
    r = ((case["p2"] - case["pv"]) / (case["p1"] - case["pv"])) ** (1.0 / n)
    assert STAGES(**case, target=1.0 / (1.0 - r)) == n
    assert STAGES(**case, target=r / (1.0 - r), form="downstream") == n
    assert STAGES(**case, target=1.0 - r, form="xf") == n


@given(ends, targets)
def test_number_by_numbers(case: dict[str, float], target: float) -> None:
    """Stage after stage with the target index itself, until the outlet is passed."""
    head, wanted, n = case["p1"] - case["pv"], case["p2"] - case["pv"], 0
    while head > wanted * (1 + 1e-9):
        head, n = head * (1.0 - 1.0 / target), n + 1
    assert STAGES(**case, target=target) in (max(n, 1), max(n, 1) + (abs(head / wanted - 1.0) < 1e-7))


@given(ends, targets, st.floats(1.001, 2.0))
def test_a_higher_target_or_a_lower_outlet_needs_no_fewer(case: dict[str, float], target: float, more: float) -> None:
    n = STAGES(**case, target=target)
    assert STAGES(**case, target=target * more) >= n
    lower = {**case, "p2": case["pv"] + (case["p2"] - case["pv"]) / more}
    assert STAGES(**lower, target=target) >= n


@pytest.mark.parametrize("target", [1e3, 1e6, 1e9, 1e12])
def test_high_targets_keep_their_number(target: float) -> None:
    """ln(10)/ln(target/(target-1)) is ln(10) (target - 1/2) to far below one part in a million (series)."""
    n = STAGES(p1=11.0, p2=2.0, pv=1.0, target=target)
    assert n == pytest.approx(math.ceil(math.log(10.0) * (target - 0.5)), rel=1e-12, abs=1.0)


def test_columns_of_different_lengths_in_one_call() -> None:
    p = PRESSURES(p1=10.0, p2=2.0, pv=1.0, stages=np.array([1.0, 3.0, 2.5]))
    assert p.shape == (3, 4)
    assert p[0, :2].tolist() == [10.0, 2.0]
    assert np.isnan(p[0, 2:]).all()
    assert p[1, 3] == 2.0
    assert np.isnan(p[2]).all()
