"""Properties of indices and limits: forms, solutions backwards, reducers, scale."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import assume, example, given
from hypothesis import strategies as st

from lowpoint import functions
from properties import standard
from properties.cases import Valve, services, valves
from properties.standard import Piping, Service

FORMS = ("upstream", "downstream", "xf")
SIGMA, FORM = functions["LP_SIGMA"], functions["LP_SIGMA_FORM"]
limits = st.floats(1.01, 20.0)
forms = st.sampled_from(FORMS)


def _by_definition(p1: float, p2: float, pv: float, form: str) -> float:
    if form == "upstream":
        return (p1 - pv) / (p1 - p2)
    return (p2 - pv) / (p1 - p2) if form == "downstream" else (p1 - p2) / (p1 - pv)


@given(services(), forms, forms)
def test_forms(service: Service, one: str, other: str) -> None:
    """Each form by its definition, and carried to every other and back."""
    p1, p2, pv = service.p1, service.p2, service.pv
    value = SIGMA(p1, p2, pv, one)
    assert value == pytest.approx(_by_definition(p1, p2, pv, one), rel=1e-11, abs=1e-13)
    carried = FORM(value, one, other)
    assert carried == pytest.approx(_by_definition(p1, p2, pv, other), rel=1e-9, abs=1e-11)
    assert FORM(carried, other, one) == pytest.approx(value, rel=1e-9, abs=1e-11)
    assert FORM(value, one, one) == value


@given(st.floats(0.001, 50.0), forms)
@example(0.1, "downstream")
@example(49.0, "xf")
def test_a_value_that_stays_in_its_form_keeps_its_bits(value: float, form: str) -> None:
    assert FORM(value, form, form) == value


@given(st.floats(-10.0, 10.0), forms)
def test_a_value_that_no_state_has_is_refused(value: float, form: str) -> None:
    """An index is above 0; the downstream one above -1."""
    possible = value > (-1.0 if form == "downstream" else 0.0)
    # 1/value of a tiny xf is beyond what a number can hold.
    assume(abs(value) > 1e-300 and not 0 < abs(value + 1) < 1e-12)
    assert math.isnan(FORM(value, form, "upstream")) is not possible


@given(services())
def test_flashing_is_an_index_of_one(service: Service) -> None:
    assert (SIGMA(service.p1, service.p2, service.pv) <= 1.0) == (service.p2 <= service.pv)


@given(st.floats(0.5, 400.0), st.floats(0.001, 0.95), limits, forms)
def test_backward_solutions_invert_the_index(p1: float, share: float, limit: float, form: str) -> None:
    """At the allowed drop, outlet and inlet the index is the limit; beyond, it is worse."""
    pv = share * p1
    given_limit = FORM(limit, "upstream", form)
    drop = functions["LP_ALLOWED_DROP"](p1, pv, given_limit, form)
    assert SIGMA(p1, p1 - drop, pv) == pytest.approx(limit, rel=1e-9)
    p2 = functions["LP_ALLOWED_OUTLET"](p1, pv, given_limit, form)
    assert p2 == pytest.approx(p1 - drop, rel=1e-12)
    assert p2 > pv
    assert SIGMA(p1, p2, pv, form) == pytest.approx(given_limit, rel=1e-8)
    assert SIGMA(p1, 0.999 * p2, pv) < limit
    back = functions["LP_ALLOWED_INLET"](p2, pv, given_limit, form)
    assert back == pytest.approx(p1, rel=1e-8)
    assert SIGMA(1.001 * back, p2, pv) < limit
    # margin = sigma/limit - 1 = dp_allowed/dp - 1
    half = SIGMA(p1, p1 - 0.5 * drop, pv)
    assert functions["LP_MARGIN"](half, limit) == pytest.approx(1.0, rel=1e-9)


@given(st.floats(1e-3, 1.0), st.sampled_from(["LP_ALLOWED_DROP", "LP_ALLOWED_OUTLET", "LP_ALLOWED_INLET"]))
def test_a_limit_that_would_let_the_outlet_boil_is_refused(limit: float, name: str) -> None:
    assert math.isnan(functions[name](10.0, 1.0, limit))
    assert "the limit must be above 1 in upstream form" in functions[name].why(10.0, 1.0, limit)
    assert math.isnan(functions[name](10.0, 1.0, 1.0 / limit, "xf"))
    assert not math.isnan(functions[name](10.0, 1.0, limit, "downstream"))


@given(valves(), services())
def test_index_at_choking_is_the_index_of_the_choked_drop(valve: Valve, service: Service) -> None:
    pipes = valve.piping
    sized = {"coefficient": valve.coefficient, **pipes.cells()} if pipes.d else {}
    got = functions["LP_SIGMA_CHOKED"](service.p1, service.pv, service.pc, valve.fl, **sized)
    drop = standard.dp_choked(valve.fl, valve.coefficient, service, pipes)
    assert got == pytest.approx((service.p1 - service.pv) / drop, rel=1e-11)


def test_usual_choking_index_is_off_for_hot_water() -> None:
    """At 200 C and p1 = 1.5 pv the index at choking is 19 per cent from 1/FL^2 (pv 15.55 bar, IAPWS-IF97)."""
    exact = functions["LP_SIGMA_CHOKED"](p1=1.5 * 15.55, pv=15.55, pc=220.64, fl=0.9)
    assert abs(exact * 0.9**2 - 1.0) == pytest.approx(0.19, abs=0.005)


@given(valves(), limits)
def test_limit_between_reducers(valve: Valve, limit: float) -> None:
    """The drops and the heads at the valve's own inlet and outlet, from the losses of the fittings one by one.

    With sections at the valve itself the limit is (p1v - pv)/(p1v - p2v); the fittings change static pressure by
    (K1+KB1) before it and by sumK in all, in measures of rho v^2/2 in the valve's bore.
    """
    pipes = valve.piping
    assume(pipes.d is not None)
    total, inlet = pipes.losses()
    # dp of the valve alone 1: then rho v^2/2 = c, the inlet fitting takes (K1+KB1) c, all together sumK c.
    c = pipes.c(valve.coefficient)
    drop, head = 1.0 + total * c, limit + inlet * c
    got = functions["LP_LIMIT_INSTALLED"](limit, valve.coefficient, pipes.d, pipes.D1, pipes.D2)
    assert got == pytest.approx(head / drop, rel=1e-12)
    choking = functions["LP_LIMIT_INSTALLED"](1.0 / valve.fl**2, valve.coefficient, pipes.d, pipes.D1, pipes.D2)
    ratio = standard.FP(valve.coefficient, pipes) / standard.FLP(valve.fl, valve.coefficient, pipes)
    assert choking == pytest.approx(ratio**2, rel=1e-12)


def test_an_uncorrected_limit_is_unsafe() -> None:
    """1.30 becomes 1.46 at d/D = 2/3 and C/d2 = 0.03 (Kv, mm; computed independently from the fittings' losses)."""
    got = functions["LP_LIMIT_INSTALLED"](1.30, 0.03 * 100.0**2, 100.0, 150.0, 150.0)
    pipes = Piping(100.0, 150.0, 150.0)
    total, inlet = pipes.losses()
    assert got == pytest.approx((1.30 + inlet * 0.5625) / (1.0 + total * 0.5625), rel=1e-12)
    assert round(got, 2) == 1.46


ratios = st.floats(0.2, 8.0)


@given(limits, ratios, ratios, st.floats(0.0, 1.0), st.floats(0.0, 1.0))
def test_scaled_limits(limit: float, size: float, head: float, b: float, a: float) -> None:
    """The three methods by their formulas; no factor below 1, so never a milder limit than the tested one."""
    sse, pse = max(size**b, 1.0), max(head**a, 1.0)
    expected = {
        "isa": (limit * sse - 1.0) * pse + 1.0,
        "upstream": limit * sse * pse,
        "tullis": (limit - 1.0) * sse * pse + 1.0,
    }
    for method, value in expected.items():
        got = functions["LP_SIGMA_SCALED"](limit, 50.0 * size, 50.0, 4.0 * head, 4.0, b, a, method)
        assert got == pytest.approx(value, rel=1e-12)
        assert got >= limit * (1 - 1e-15)
    assert functions["LP_SIGMA_SCALED"](limit, 50.0 * size, 50.0, 4.0 * head, 4.0, b, a) == pytest.approx(
        expected["isa"], rel=1e-12
    )


@given(st.floats(1e-3, 1.0))
def test_a_limit_at_or_below_one_is_not_scaled(limit: float) -> None:
    for method in ("isa", "upstream", "tullis"):
        assert math.isnan(functions["LP_SIGMA_SCALED"](limit, 200.0, 100.0, 10.0, 5.0, 0.1, 0.2, method))


@given(limits, st.floats(1.0, 8.0), st.floats(0.01, 0.5))
def test_an_exponent_belongs_to_a_method(limit: float, head: float, exponent: float) -> None:
    """An exponent found for `upstream` is a_u sigma/(sigma-1) in the others, to first order in the head."""
    near = 1.0 + 1e-6 * head
    one = functions["LP_SIGMA_SCALED"](limit, 1.0, 1.0, near, 1.0, 0.0, exponent, "upstream")
    carried = exponent * limit / (limit - 1.0)
    assume(carried < 2.0)
    for method in ("isa", "tullis"):
        other = functions["LP_SIGMA_SCALED"](limit, 1.0, 1.0, near, 1.0, 0.0, carried, method)
        assert other - limit == pytest.approx(one - limit, rel=1e-4)


@given(st.floats(1.0, 5000.0), st.floats(0.3, 1.0), st.floats(0.05, 1.0), st.floats(1.0, 100.0))
def test_inception_estimate(cv: float, fl: float, fd: float, p1: float) -> None:
    """IEC 60534-8-4 in Cv, and in Kv by 1 Kv = 1.156 Cv."""
    plain = 0.90 / math.sqrt(1.0 + 3.0 * fd * math.sqrt(cv / (1.17 * fl)))
    assert functions["LP_XFZ"](cv / 1.156, fl, fd) == pytest.approx(plain, rel=1e-12)
    assert functions["LPU_XFZ"](cv, fl, fd) == pytest.approx(plain, rel=1e-12)
    assert functions["LP_XFZ"](cv / 1.156, fl, fd, p1) == pytest.approx(plain * (6.0 / p1) ** 0.125, rel=1e-12)
    mixed = functions["LP_XFZ"](cv / 1.156, fl, fd, np.array([np.nan, p1]))
    assert mixed[0] == functions["LP_XFZ"](cv / 1.156, fl, fd)
    assert mixed[1] == functions["LP_XFZ"](cv / 1.156, fl, fd, p1)
