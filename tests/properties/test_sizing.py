"""Properties of turbulent sizing: the closed form against the standard's implicit equations, round trips, scaling."""

from __future__ import annotations

import math

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from lowpoint import functions
from properties import standard
from properties.cases import Valve, services, valves
from properties.standard import Piping, Service

COEFFICIENT, FLOW, DROP = (functions[f"LP_{name}"] for name in ("COEFFICIENT", "FLOW", "DROP"))
CHOKED_DROP = functions["LP_CHOKED_DROP"]


def _flow(valve: Valve, service: Service) -> float:
    return FLOW(coefficient=valve.coefficient, fl=valve.fl, **service.cells(), **valve.piping.cells())


def _coefficient(flow: float, valve: Valve, service: Service) -> float:
    return COEFFICIENT(flow=flow, fl=valve.fl, **service.cells(), **valve.piping.cells())


def _drop(flow: float, valve: Valve, service: Service) -> float:
    case = service.cells()
    del case["p2"]
    return DROP(flow=flow, coefficient=valve.coefficient, fl=valve.fl, **case, **valve.piping.cells())


@given(valves(), services())
def test_closed_form_satisfies_the_implicit_equations(valve: Valve, service: Service) -> None:
    """IEC 60534-2-1: with FP and FLP taken at the answer, the standard's own equation gives the flow, to 1e-12."""
    flow = standard.flow(valve.coefficient, valve.fl, service, valve.piping)
    answer = _coefficient(flow, valve, service)
    assert standard.flow(answer, valve.fl, service, valve.piping) == pytest.approx(flow, rel=1e-12)
    assert answer == pytest.approx(valve.coefficient, rel=1e-11)


@given(valves(), services())
def test_iterating_as_the_standard_says_ends_at_the_closed_form(valve: Valve, service: Service) -> None:
    """FP and FLP of the last C give the next one; where that settles, it settles on the closed form."""
    flow = standard.flow(valve.coefficient, valve.fl, service, valve.piping)
    c, last = valve.coefficient * 0.97, 0.0
    for _ in range(2000):
        if valve.piping.bracket(c) <= 0:
            break
        last, c = c, flow / (standard.flow(c, valve.fl, service, valve.piping) / c)
        if c == last:
            break
    assume(abs(c - last) <= 1e-15 * c)
    assert _coefficient(flow, valve, service) == pytest.approx(c, rel=1e-12)


@given(valves(), services())
def test_factors_and_flow_are_those_of_the_standard(valve: Valve, service: Service) -> None:
    pipes = valve.piping
    assert _flow(valve, service) == pytest.approx(standard.flow(valve.coefficient, valve.fl, service, pipes), rel=1e-12)
    case = service.cells()
    sized = {"coefficient": valve.coefficient, **pipes.cells()} if pipes.d else {}
    assert CHOKED_DROP(case["p1"], case["pv"], case["pc"], valve.fl, **sized) == pytest.approx(
        standard.dp_choked(valve.fl, valve.coefficient, service, pipes) / 100.0, rel=1e-12
    )
    assert functions["LP_FF"](service.pv, service.pc) == pytest.approx(standard.FF(service), rel=1e-14)
    if pipes.d:
        assert functions["LP_FP"](valve.coefficient, pipes.d, pipes.D1, pipes.D2) == pytest.approx(
            standard.FP(valve.coefficient, pipes), rel=1e-13
        )
        assert functions["LP_FLP"](valve.fl, valve.coefficient, pipes.d, pipes.D1) == pytest.approx(
            standard.FLP(valve.fl, valve.coefficient, pipes), rel=1e-13
        )


@given(valves(), services())
def test_size_to_flow_to_drop_and_back(valve: Valve, service: Service) -> None:
    """Round trips to 1e-10, with and without fittings, choked and not."""
    flow = _flow(valve, service)
    assert _coefficient(flow, valve, service) == pytest.approx(valve.coefficient, rel=1e-10)
    limit = standard.dp_choked(valve.fl, valve.coefficient, service, valve.piping)
    drop = _drop(flow, valve, service)
    # Choked, the drop is the least that gives the flow: the choked one.
    assert drop == pytest.approx(min(service.dp, limit) / 100.0, rel=1e-10)


@given(valves(), services())
def test_choked_exactly_at_the_choked_drop(valve: Valve, service: Service) -> None:
    """Below the choked drop the flow still grows with it; from there on it does not."""
    limit = standard.dp_choked(valve.fl, valve.coefficient, service, valve.piping)
    assume(limit < 0.98 * service.p1)

    def at(dp: float) -> float:
        return _flow(valve, Service(service.p1, service.p1 - dp, service.pv, service.pc, service.density))

    assert at(limit * (1 - 1e-6)) < at(limit)
    assert at(limit * (1 + 1e-3)) == pytest.approx(at(limit), rel=1e-12)
    assert math.isnan(_drop(at(limit) * (1 + 1e-9), valve, service))
    assert _drop(at(limit), valve, service) == pytest.approx(limit / 100.0, rel=1e-10)


@given(valves(), services(), st.floats(1.001, 1.5))
def test_monotone(valve: Valve, service: Service, more: float) -> None:
    flow = _flow(valve, service)
    base = _coefficient(flow, valve, service)
    bigger = _coefficient(flow * more, valve, service)
    assert math.isnan(bigger) or bigger > base
    denser = Service(service.p1, service.p2, service.pv, service.pc, service.density * more)
    heavier = _coefficient(flow, valve, denser)
    assert math.isnan(heavier) or heavier > base
    assert _flow(valve, denser) < flow
    lower = Service(service.p1, service.p2 / more, service.pv, service.pc, service.density)
    assert _flow(valve, lower) >= flow * (1 - 1e-14)
    assert _coefficient(flow, valve, lower) <= base * (1 + 1e-14)
    if valve.fl * more <= 1:
        kinder = Valve(valve.coefficient, valve.fl * more, valve.piping)
        assert _flow(kinder, service) >= flow * (1 - 1e-14)
        assert _coefficient(flow, kinder, service) <= base * (1 + 1e-14)


@given(valves(), services(), st.floats(0.2, 5.0))
def test_scaling(valve: Valve, service: Service, k: float) -> None:
    """Dimensional analysis: C goes as Q, as sqrt(rho/p), and as the square of all lengths."""
    flow = _flow(valve, service)
    base = _coefficient(flow, valve, service)
    pressed = Service(*(k * p for p in (service.p1, service.p2, service.pv, service.pc)), service.density)
    assert _coefficient(flow * math.sqrt(k), valve, pressed) == pytest.approx(base, rel=1e-12)
    assume(service.density * k > 100.0)
    denser = Service(service.p1, service.p2, service.pv, service.pc, service.density * k)
    assert _coefficient(flow / math.sqrt(k), valve, denser) == pytest.approx(base, rel=1e-12)
    pipes = valve.piping
    if pipes.d and pipes.D1 and pipes.D2:
        wide = Valve(valve.coefficient * k * k, valve.fl, Piping(pipes.d * k, pipes.D1 * k, pipes.D2 * k))
        assert _coefficient(flow * k * k, wide, service) == pytest.approx(base * k * k, rel=1e-12)
    else:
        assert _coefficient(flow * k, valve, service) == pytest.approx(base * k, rel=1e-12)


PSI, GPM, LB_FT3, INCH = 6.894757293168361, 0.22712470704, 16.018463373960142, 25.4


@given(valves(), services())
def test_twins_in_us_units(valve: Valve, service: Service) -> None:
    """psi, US gal/min, lb/ft3 and inches by their exact definitions; 1 Kv = 1.156 Cv."""
    case = {name: x * 100.0 / PSI for name, x in service.cells().items()}
    case["density"] = service.density / LB_FT3
    sizes = {name: x / INCH for name, x in valve.piping.cells().items()}
    flow = _flow(valve, service)
    cv = functions["LPU_COEFFICIENT"](flow=flow / GPM, fl=valve.fl, **case, **sizes)
    assert cv == pytest.approx(1.156 * _coefficient(flow, valve, service), rel=1e-11)
    assert functions["LPU_FLOW"](coefficient=cv, fl=valve.fl, **case, **sizes) == pytest.approx(flow / GPM, rel=1e-11)
    del case["p2"]
    drop = functions["LPU_DROP"](flow=flow / GPM, coefficient=cv, fl=valve.fl, **case, **sizes)
    assert math.isnan(drop) or drop == pytest.approx(_drop(flow, valve, service) * 100.0 / PSI, rel=1e-10)


@given(st.floats(1.0, 1e4), st.floats(10.0, 1000.0))
def test_velocity_is_flow_over_area(flow: float, bore: float) -> None:
    area = math.pi * (bore / 2000.0) ** 2
    assert functions["LP_VELOCITY"](flow, bore) == pytest.approx(flow / 3600.0 / area, rel=1e-14)


@given(services(), st.floats(0.3, 1.0))
def test_throat_pressure(service: Service, fl: float) -> None:
    """``p1 - dp/FL^2``; with pv and pc never below FF pv, which it reaches where the flow chokes; no answer below 0."""
    case = service.cells()
    throat = case["p1"] - (case["p1"] - case["p2"]) / fl**2
    floor = standard.FF(service) * case["pv"]
    bare = functions["LP_THROAT_PRESSURE"](case["p1"], case["p2"], fl)
    assert (
        math.isnan(bare) if throat < -1e-12 * case["p1"] else throat < 1e-9 or bare == pytest.approx(throat, rel=1e-9)
    )
    known = functions["LP_THROAT_PRESSURE"](case["p1"], case["p2"], fl, case["pv"], case["pc"])
    assert known == pytest.approx(max(throat, floor), rel=1e-9)
    choked = service.dp >= standard.dp_choked(fl, 1.0, service, Piping()) * (1 + 1e-9)
    if choked:
        assert known == pytest.approx(floor, rel=1e-9)
