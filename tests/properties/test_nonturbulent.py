"""Properties of the non-turbulent branch, compared with a dense scan in plain Python."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from lowpoint import functions
from properties import standard
from properties.standard import RHO0, Piping, Service, Slow

COEFFICIENT, FLOW, DROP = (functions[f"LP_{name}"] for name in ("COEFFICIENT", "FLOW", "DROP"))
HIGHEST = 1.06**160
"""The search ends about 11 000 times above the turbulent coefficient."""

# A cold oil far from choking, so that the branch is seen alone.
PV, PC = 0.01, 3000.0


@st.composite
def slow_valves(draw: st.DrawFn) -> tuple[Slow, Service, float]:
    """A valve, its liquid, and a flow that a turbulent C/d2 of 0.00002 to 0.04 Kv/mm2 would pass."""
    d = draw(st.sampled_from((15.0, 25.0, 50.0, 100.0, 200.0)))
    service = Service(draw(st.floats(300.0, 3000.0)), 200.0, PV, PC, draw(st.floats(600.0, 1300.0)))
    nu = 10.0 ** draw(st.floats(-6.5, -1.0))
    pipe = d * draw(st.sampled_from((1.0, 1.5, 2.0)))
    slow = Slow(draw(st.floats(0.5, 1.0)), draw(st.floats(0.05, 1.0)), d, pipe, nu, draw(st.booleans()))
    turbulent = d * d * 10.0 ** draw(st.floats(-4.7, -1.4))
    return slow, service, standard.flow(turbulent, slow.fl, service, Piping())


def _viscous(slow: Slow, service: Service) -> dict[str, object]:
    # A wide pipe enters Rev; its fittings enter the turbulent branch alone.
    return {
        "fl": slow.fl, "valve_size": slow.d, "pipe_in": slow.D, "pipe_out": slow.D,
        "viscosity": slow.nu * service.density * 1e3, "fd": slow.fd, "trim": "reduced" if slow.reduced else "full",
    }  # fmt: skip


def _turbulent(flow: float, slow: Slow, service: Service) -> float:
    sizes = {"valve_size": slow.d, "pipe_in": slow.D, "pipe_out": slow.D}
    return COEFFICIENT(flow=flow, fl=slow.fl, **service.cells(), **sizes)


def _plain(flow: float, service: Service) -> float:
    """``Q/(N1 sqrt(dp rho0/rho))``."""
    return flow / (standard.N1 * math.sqrt(service.dp * RHO0 / service.density))


def _excess(slow: Slow, flow: float, target: float, c: float) -> float:
    return c * slow.factor(flow, c) - target


def _first_by_scan(slow: Slow, flow: float, target: float, step: float = 1.002) -> float:
    """The first C from the target upward at which C FR(C) has come up to it; NaN where it never does."""
    c = target
    if _excess(slow, flow, target, c) >= 0:
        return c
    while c < target * HIGHEST:
        low, c = c, c * step
        if _excess(slow, flow, target, c) >= 0:
            high = c
            for _ in range(60):
                middle = math.sqrt(low * high)
                low, high = (low, middle) if _excess(slow, flow, target, middle) >= 0 else (middle, high)
            return high
    return math.nan


@settings(max_examples=150)
@given(slow_valves())
def test_coefficient_is_the_first_root_upward(case: tuple[Slow, Service, float]) -> None:
    slow, service, flow = case
    answer = COEFFICIENT(flow=flow, **service.cells(), **_viscous(slow, service))
    target, turbulent = _plain(flow, service), _turbulent(flow, slow, service)
    assume(not math.isnan(turbulent))
    if slow.factor(flow, target) >= 1.0:
        assert answer == turbulent, "turbulent flow: viscosity changes nothing"
        return
    scanned = _first_by_scan(slow, flow, target)
    if math.isnan(scanned):
        assert math.isnan(answer)
        return
    assert answer == pytest.approx(max(turbulent, scanned), rel=1e-9)
    if answer > turbulent * (1 + 1e-9):
        at_jump = slow.rev(flow, answer) == pytest.approx(10.0, rel=1e-9)
        assert at_jump or answer * slow.factor(flow, answer) == pytest.approx(target, rel=1e-9)


@settings(max_examples=100)
@given(slow_valves())
def test_flow_is_the_least_of_both_and_comes_back(case: tuple[Slow, Service, float]) -> None:
    slow, service, flow = case
    coefficient = COEFFICIENT(flow=flow, **service.cells(), **_viscous(slow, service))
    assume(not math.isnan(coefficient))
    got = FLOW(coefficient=coefficient, **service.cells(), **_viscous(slow, service))
    ceiling = FLOW(
        coefficient=coefficient, fl=slow.fl, **service.cells(), valve_size=slow.d, pipe_in=slow.D, pipe_out=slow.D
    )
    assert got <= ceiling
    if got < ceiling:
        # It is a flow of the branch: Q = C N1 FR sqrt(dp/(rho/rho0)), by the plain reading.
        assert _plain(got, service) == pytest.approx(coefficient * slow.factor(got, coefficient), rel=1e-9) or (
            slow.rev(got, coefficient) == pytest.approx(10.0, rel=1e-6)
        )
    # Two flows may belong to one coefficient where FR falls steeply; then the larger is given.
    assert got >= flow * (1 - 1e-9) or _past_the_peak(slow, service, flow, coefficient)
    if got == pytest.approx(flow, rel=1e-6):
        assert got == pytest.approx(flow, rel=1e-8)


def _past_the_peak(slow: Slow, service: Service, flow: float, coefficient: float) -> bool:
    """Is more coefficient less flow by the FR equations here (full-size trim, very slow), or is Rev at its jump?"""
    rising = coefficient * slow.factor(flow, coefficient) < 1.01 * coefficient * slow.factor(flow, 1.01 * coefficient)
    return not rising or slow.rev(flow, coefficient) == pytest.approx(10.0, rel=1e-6)


@settings(max_examples=60)
@given(slow_valves())
def test_flow_is_the_largest_root(case: tuple[Slow, Service, float]) -> None:
    """Scanned downward from the turbulent flow in fine steps."""
    slow, service, flow = case
    c = _plain(flow, service)
    rate = standard.N1 * math.sqrt(service.dp * RHO0 / service.density)
    answer = FLOW(coefficient=c, **service.cells(), **_viscous(slow, service))
    sizes = {"valve_size": slow.d, "pipe_in": slow.D, "pipe_out": slow.D}
    turbulent = FLOW(coefficient=c, fl=slow.fl, **service.cells(), **sizes)

    def lacking(q: float) -> float:
        return c * rate * slow.factor(q, c) - q

    q = c * rate
    if lacking(q) >= 0:
        assert answer == turbulent
        return
    while q > c * rate / HIGHEST:
        high, q = q, q / 1.002
        if lacking(q) >= 0:
            low = q
            for _ in range(60):
                middle = math.sqrt(low * high)
                low, high = (middle, high) if lacking(middle) >= 0 else (low, middle)
            assert answer == pytest.approx(min(turbulent, low), rel=1e-9)
            return
    assert math.isnan(answer)


@settings(max_examples=100)
@given(slow_valves())
def test_drop_is_explicit_and_fits_flow_and_coefficient(case: tuple[Slow, Service, float]) -> None:
    slow, service, flow = case
    c = 3.0 * _plain(flow, service)
    pressures = service.cells()
    del pressures["p2"]
    answer = DROP(flow=flow, coefficient=c, **pressures, **_viscous(slow, service))
    turbulent = DROP(
        flow=flow, coefficient=c, fl=slow.fl, **pressures, valve_size=slow.d, pipe_in=slow.D, pipe_out=slow.D
    )
    assume(not math.isnan(turbulent))
    factor = slow.factor(flow, c)
    own = service.density / RHO0 * (flow / (standard.N1 * c * factor)) ** 2 / 100.0 if factor > 0 else math.inf
    expected = turbulent if factor >= 1.0 else max(turbulent, own)
    assert math.isnan(answer) if expected >= pressures["p1"] else answer == pytest.approx(expected, rel=1e-11)


@settings(max_examples=40)
@given(slow_valves(), st.floats(0.05, 0.7))
def test_choking_is_never_undercut(case: tuple[Slow, Service, float], hot: float) -> None:
    """Required C is the larger, flow the smaller of both branches, for a liquid that chokes too."""
    slow, cold, flow = case
    service = Service(cold.p1, cold.p2, cold.p1 * hot, PC * 5.0, cold.density)
    with_viscosity = COEFFICIENT(flow=flow, **service.cells(), **_viscous(slow, service))
    turbulent = _turbulent(flow, slow, service)
    alone = COEFFICIENT(flow=flow, **cold.cells(), **_viscous(slow, cold))
    if not math.isnan(with_viscosity):
        assert with_viscosity >= turbulent
        assert with_viscosity == pytest.approx(max(turbulent, alone), rel=1e-12)


@settings(max_examples=10)
@given(st.floats(1e-9, 1e-3), st.floats(0.014, 0.03))
@example(1e-9, 0.02)
def test_a_pair_of_roots_within_one_step_is_not_missed(close: float, relative: float) -> None:
    """Full-size trim: C FR(C) has a top. For a liquid just thin enough the top passes the flow, between two roots."""
    service = Service(1000.0, 200.0, PV, PC, 900.0)
    target = relative * 100.0**2
    flow = standard.flow(target, 0.9, service, Piping())
    thickest = _thickest(flow, target)
    slow, thicker = (Slow(0.9, 0.46, 100.0, 100.0, thickest * x, reduced=False) for x in (1 - close, 1 + close))
    answer = COEFFICIENT(flow=flow, **service.cells(), **_viscous(slow, service))
    assert answer * slow.factor(flow, answer) == pytest.approx(target, rel=1e-9)
    assert slow.factor(flow, answer) < 0.99
    # Nothing below it passes the flow: it is the first root.
    assert all(_excess(slow, flow, target, target + (answer - target) * i / 500) < 0 for i in range(499))
    assert math.isnan(COEFFICIENT(flow=flow, **service.cells(), **_viscous(thicker, service)))


def _thickest(flow: float, target: float) -> float:
    """The largest kinematic viscosity at which some C passes the flow, by halving; the top of C FR(C) by thirds."""

    def exists(nu: float) -> bool:
        slow = Slow(0.9, 0.46, 100.0, 100.0, nu, reduced=False)
        low, high = math.log(target), math.log(target * 8.0)
        for _ in range(70):
            third = (high - low) / 3.0
            left, right = (_excess(slow, flow, target, math.exp(low + k * third)) for k in (1, 2))
            low, high = (low, high - third) if left >= right else (low + third, high)
        return _excess(slow, flow, target, math.exp(0.5 * (low + high))) >= 0

    low, high = 1e-6, 1.0
    for _ in range(60):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if exists(middle) else (low, middle)
    return low


def test_one_row_and_many_give_the_same_bits() -> None:
    """The search works on whatever rows are left; none may feel its neighbours."""
    rng = np.random.default_rng(3)
    rows = 150
    d = rng.choice([25.0, 50.0, 100.0], rows)
    case = {
        "flow": rng.uniform(1.0, 60.0, rows), "p1": rng.uniform(4.0, 20.0, rows), "p2": np.full(rows, 2.0),
        "pv": np.full(rows, 0.1), "pc": np.full(rows, 40.0), "density": rng.uniform(700.0, 1200.0, rows),
        "fl": rng.uniform(0.6, 1.0, rows), "valve_size": d, "pipe_in": 1.5 * d, "pipe_out": 2.0 * d,
        "viscosity": 10.0 ** rng.uniform(-0.5, 5.5, rows), "fd": rng.uniform(0.1, 1.0, rows),
        "trim": rng.choice(["full", "reduced"], rows),
    }  # fmt: skip
    for function in (COEFFICIENT, FLOW):
        given = dict(case)
        if function is FLOW:
            given = {"coefficient": given.pop("flow"), **given}
        together = function(**given)
        assert 5 < np.isnan(together).sum() < 140 or function is FLOW
        for i in range(rows):
            one = function(**{k: (str(v[i]) if k == "trim" else float(v[i])) for k, v in given.items()})
            assert np.float64(one).tobytes() == together[i].tobytes() or (np.isnan(one) and np.isnan(together[i]))
