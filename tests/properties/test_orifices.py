"""Properties of orifice plates: round trips, monotonicity, continuity of the rule, choking, forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from lowpoint import functions
from properties.plates import Plate, Service, fall, loss, plates, services

DROP, FLOW, BORE, FL, LIMIT = (functions[f"LP_ORIFICE_{name}"] for name in ("DROP", "FLOW", "BORE", "FL", "LIMIT"))


def _flow(plate: Plate, service: Service) -> float:
    return FLOW(**plate.cells(), **service.cells())


def _reynolds(flow: float, plate: Plate, service: Service) -> float:
    """4 Q rho/(pi D mu), 1e6 without a viscosity."""
    if service.viscosity is None:
        return 1e6
    return 4.0 * flow / 3600.0 * service.density / (math.pi * plate.pipe / 1e3 * service.viscosity / 1e3)


def _choked_drop(plate: Plate, service: Service, reynolds: float) -> float:
    """Net drop at which the lowest pressure reaches FF pv, bar."""
    return loss(plate, reynolds) / fall(plate, reynolds) * service.head


# --- round trips ----------------------------------------------------------------------------------------------------


@given(plates(), services())
def test_flow_to_drop_and_back(plate: Plate, service: Service) -> None:
    """To 1e-10, thin and thick, one hole and many, with viscosity and without; choked, the drop is the choked one."""
    flow = _flow(plate, service)
    drop = DROP(flow=flow, **plate.cells(), **service.liquid())
    limit = _choked_drop(plate, service, _reynolds(flow, plate, service))
    assert drop == pytest.approx(min(service.p1 - service.p2, limit), rel=1e-10)


@given(plates(), services())
def test_flow_to_bore_and_back(plate: Plate, service: Service) -> None:
    flow = _flow(plate, service)
    bore = BORE(flow=flow, pipe=plate.pipe, **plate.rest(), **service.cells())
    assert bore == pytest.approx(plate.bore, rel=1e-10)


@given(services(), st.floats(20.0, 1000.0), st.floats(-6.0, 6.0), st.integers(1, 50), st.floats(0.0, 3.0))
def test_bore_to_flow_and_back(service: Service, pipe: float, power: float, holes: int, length: float) -> None:
    """Any flow has a bore that passes it, or none from a thousandth of the pipe to 0.2 % closed does."""
    share = 10.0**power
    flow = _flow(Plate(0.4 * pipe, pipe), service) * share
    rest = {"bore_length": length * pipe / 10.0 or None, "holes": holes}
    bore = BORE(flow=flow, pipe=pipe, **rest, **service.cells())
    if math.isnan(bore):
        ends = [k * pipe / math.sqrt(holes) for k in (1e-3 * (1 - 1e-9), math.sqrt(0.998) * (1 + 1e-12))]
        least, most = (FLOW(bore=end, pipe=pipe, **rest, **service.cells()) for end in ends)
        assert flow < least or flow > most * (1 - 1e-3)
    else:
        assert FLOW(bore=bore, pipe=pipe, **rest, **service.cells()) == pytest.approx(flow, rel=1e-10)


@given(plates(), services())
def test_a_column_gives_the_bits_of_each_row(plate: Plate, service: Service) -> None:
    """No row's answer depends on how soon its neighbours are done."""
    viscosity = np.array([np.nan, 0.3, 5.0, 80.0, 900.0])
    pressures = {k: v for k, v in service.cells().items() if k != "viscosity"}
    flows = FLOW(**plate.cells(), **pressures, viscosity=viscosity)
    bores = BORE(flow=flows, pipe=plate.pipe, **plate.rest(), **pressures, viscosity=viscosity)
    for flow, bore, mu in zip(flows, bores, viscosity, strict=True):
        assert FLOW(**plate.cells(), **pressures, viscosity=mu) == flow
        assert BORE(flow=flow, pipe=plate.pipe, **plate.rest(), **pressures, viscosity=mu) == bore


def test_four_hundred_rows_give_the_bits_of_each() -> None:
    """Rows that settle early stay as they are, however long others take."""
    rng = np.random.default_rng(5)
    n = 400
    columns = {
        "p1": rng.uniform(5.0, 50.0, n), "p2": rng.uniform(0.5, 4.5, n), "bore": rng.uniform(10.0, 90.0, n),
        "density": rng.uniform(700.0, 1000.0, n), "viscosity": 10.0 ** rng.uniform(-1.0, 3.0, n),
    }  # fmt: skip
    rest = {"pipe": 100.0, "pv": 0.1, "pc": 100.0}
    together = FLOW(**columns, **rest)
    assert [FLOW(**{k: v[i] for k, v in columns.items()}, **rest) for i in range(n)] == together.tolist()


# --- the loss -------------------------------------------------------------------------------------------------------


@given(plates(), st.floats(1.0001, 1.05), st.floats(1e3, 1e8))
def test_a_wider_bore_loses_less_and_passes_more(plate: Plate, wider: float, reynolds: float) -> None:
    assume(plate.open_share * wider**2 < 0.99)
    wide = Plate(plate.bore * wider, plate.pipe, plate.length, plate.holes)
    assert loss(wide, reynolds) < loss(plate, reynolds)
    assert fall(wide, reynolds) < fall(plate, reynolds)


@given(plates(), services(), st.floats(1.001, 1.05))
def test_flow_grows_with_the_bore(plate: Plate, service: Service, wider: float) -> None:
    assume(plate.open_share * wider**2 < 0.99)
    assert _flow(Plate(plate.bore * wider, plate.pipe, plate.length, plate.holes), service) > _flow(plate, service)


STEP = 1e-9


def _jump(low: Plate, high: Plate) -> float:
    return abs(math.log(loss(high) / loss(low)))


@given(st.sampled_from([0.08, 0.1, 0.75, 0.8]), st.floats(20.0, 1200.0), st.one_of(st.none(), st.floats(0.0, 4.0)))
def test_loss_is_continuous_over_the_ends_of_beta(beta: float, pipe: float, length: float | None) -> None:
    sides = [beta * (1 - STEP) * pipe, beta * (1 + STEP) * pipe]
    low, high = (Plate(bore, pipe, None if not length else length * beta * pipe) for bore in sides)
    assert 0.0 < _jump(low, high) < 1e-6


@given(st.sampled_from([45.0, 50.0, 71.12]), st.floats(0.05, 0.9))
def test_loss_is_continuous_over_the_ends_of_the_pipe(pipe: float, beta: float) -> None:
    """71.12 mm is where the discharge coefficient loses its term for small pipes."""
    low, high = (Plate(beta * d, d) for d in (pipe * (1 - STEP), pipe * (1 + STEP)))
    assert _jump(low, high) < 1e-6


@given(plates(thin=True), st.sampled_from([2.4, 0.1, 0.8]))
def test_loss_is_continuous_over_lengths(plate: Plate, ratio: float) -> None:
    sides = [ratio * (1 - STEP) * plate.bore, ratio * (1 + STEP) * plate.bore]
    assert _jump(*(Plate(plate.bore, plate.pipe, length, plate.holes) for length in sides)) < 1e-6
    # A bore that is nearly nothing long is a thin plate.
    assert _jump(plate, Plate(plate.bore, plate.pipe, 1e-9 * plate.bore, plate.holes)) < 1e-6


@given(plates(thin=True), st.floats(0.05, 2.4))
def test_a_long_bore_loses_less_but_the_vena_contracta_stays(plate: Plate, ratio: float) -> None:
    assume(plate.open_share < 0.8)
    thick = Plate(plate.bore, plate.pipe, ratio * plate.bore, plate.holes)
    assert loss(thick) < loss(plate)
    assert FL(**thick.cells()) < FL(**plate.cells())
    case = {"p1": 10.0, "p2": 0.01, "pv": 0.02, "pc": 220.64, "density": 998.0}
    assert FLOW(**thick.cells(), **case) == pytest.approx(FLOW(**plate.cells(), **case), rel=1e-12)


@given(plates(thin=True), st.floats(2.4, 100.0), st.floats(1.01, 10.0))
def test_beyond_the_last_length_friction_alone_grows(plate: Plate, ratio: float, more: float) -> None:
    """By 0.02 a diameter of the bore (Idelchik's lambda): equal steps of length, equal steps of loss."""
    k = [loss(Plate(plate.bore, plate.pipe, plate.bore * ratio * (1.0 + i * more), plate.holes)) for i in range(3)]
    assert k[2] - k[1] == pytest.approx(k[1] - k[0], rel=1e-9)
    assert k[1] > k[0]


@given(plates(), st.floats(1.0, 4999.0))
def test_below_a_reynolds_number_of_5000_the_loss_is_that_at_5000(plate: Plate, reynolds: float) -> None:
    assert loss(plate, reynolds) == loss(plate, 5000.0)
    if 0.1 < plate.bore / plate.pipe < 0.75 and plate.pipe > 50.0 and plate.holes == 1:
        assert loss(plate, 5000.0) != loss(plate, 5100.0)


@given(plates(), services())
def test_drop_goes_as_the_square_of_the_flow(plate: Plate, service: Service) -> None:
    """At one Reynolds number: dp = K rho v^2/2 with K of the loss."""
    flow = _flow(plate, service)
    speed = flow / 3600.0 / (math.pi / 4.0 * (plate.pipe / 1e3) ** 2)
    k = loss(plate, _reynolds(flow, plate, service))
    expected = k * service.density * speed**2 / 2.0 / 1e5
    assert DROP(flow=flow, **plate.cells(), **service.liquid()) == pytest.approx(expected, rel=1e-12)


@given(st.floats(0.1, 0.75), st.floats(50.0, 1000.0), st.floats(1e4, 1e8))
def test_net_and_tap_drop_of_iso(beta: float, pipe: float, reynolds: float) -> None:
    """ISO 5167-2 (7): net over corner drop is (r - C b^2)/(r + C b^2), which is FL^2; D and D/2 taps show more too."""
    case = {"flow": reynolds * math.pi * pipe / 1e3 * 1e-6 / 4.0 * 3600.0, "bore": beta * pipe, "pipe": pipe,
            "density": 1000.0, "viscosity": 1.0}  # fmt: skip
    net, corner, radius, flange = (DROP(**case, taps=taps) for taps in ("net", "corner", "radius", "flange"))
    plate = Plate(beta * pipe, pipe)
    assume(not math.isnan(corner))  # a rounding outside the range
    assert net / corner == pytest.approx(loss(plate, reynolds) / fall(plate, reynolds), rel=1e-12)
    assert net < radius
    assert net < flange


@given(plates(), services())
def test_taps_and_forms_row_by_row(plate: Plate, service: Service) -> None:
    """A column of words gives each row what the word alone gives, blanks the default."""
    case = {"flow": _flow(plate, service), **plate.cells(), **service.liquid()}
    taps = np.array(["net", "corner", None, "radius", "flange"], object)
    alone = [DROP(**case, taps=word) for word in taps]
    assert DROP(**case, taps=taps) == pytest.approx(alone, rel=0, abs=0, nan_ok=True)
    assert alone[0] == alone[2]
    limits, forms = np.array(["incipient", "constant", "choked"] * 3, object), np.repeat(["upstream", "xf", None], 3)
    alone = [LIMIT(limit=limit, **plate.cells(), form=form) for limit, form in zip(limits, forms, strict=True)]
    assert LIMIT(limit=limits, **plate.cells(), form=forms) == pytest.approx(alone, rel=0, abs=0)


# --- recovery, choking, limits --------------------------------------------------------------------------------------


@given(plates(), st.floats(1.0, 1000.0))
def test_fl_lies_between_nothing_and_one(plate: Plate, lengths: float) -> None:
    """Also for a bore of a thousand diameters, which is a pipe."""
    assert 0.0 < FL(**plate.cells()) < 1.0
    long = Plate(plate.bore, plate.pipe, lengths * plate.bore, plate.holes)
    assert 0.0 < FL(**long.cells()) < 1.0


@given(plates(), services())
def test_choking_is_one_thing(plate: Plate, service: Service) -> None:
    """Flow, recovery factor, index at choking and LP_CHOKED_DROP of that FL tell of the same drop."""
    fl = FL(**plate.cells())
    pressures = {"p1": service.p1, "pv": service.pv, "pc": service.pc}
    limit = functions["LP_CHOKED_DROP"](**pressures, fl=fl)
    assert limit == pytest.approx(_choked_drop(plate, service, 1e6), rel=1e-9)
    index = LIMIT(limit="choked", **plate.cells(), **pressures)
    assert index == pytest.approx((service.p1 - service.pv) / limit, rel=1e-11)
    assert index == pytest.approx(functions["LP_SIGMA_CHOKED"](**pressures, fl=fl), rel=1e-11)
    assert LIMIT(limit="choked", **plate.cells()) == pytest.approx(1.0 / fl**2, rel=1e-11)
    case = {**plate.cells(), **pressures, "density": service.density}
    assume(limit < 0.99 * service.p1)
    below, at, beyond = (FLOW(p2=service.p1 - limit * k, **case) for k in (1 - 1e-6, 1 + 1e-6, 1.005))
    assert below < at == pytest.approx(beyond, rel=1e-14)
    said = [functions["LP_ORIFICE_FLOW"].why(p2=service.p1 - limit * k, **case) for k in (1 - 1e-6, 1 + 1e-6)]
    assert ["the flow is choked" in words for words in said] == [False, True]


@given(plates(), services())
def test_lp_why_tells_of_choking_where_the_flow_is_choked(plate: Plate, service: Service) -> None:
    """With viscosity too, and for the bore sized on the same flow."""
    flow = _flow(plate, service)
    limit = _choked_drop(plate, service, _reynolds(flow, plate, service))
    assume(abs((service.p1 - service.p2) / limit - 1.0) > 1e-6)
    choked = service.p1 - service.p2 > limit
    assert ("the flow is choked" in functions["LP_ORIFICE_FLOW"].why(**plate.cells(), **service.cells())) is choked
    sized = functions["LP_ORIFICE_BORE"].why(flow=flow, pipe=plate.pipe, **plate.rest(), **service.cells())
    assert ("the flow is choked" in sized) is choked


@given(plates(), st.sampled_from(["incipient", "constant", "choked"]))
def test_limits_in_other_forms(plate: Plate, limit: str) -> None:
    upstream, downstream, xf = (LIMIT(limit=limit, **plate.cells(), form=f) for f in ("upstream", "downstream", "xf"))
    assert downstream == pytest.approx(upstream - 1.0, rel=1e-12, abs=1e-12)
    assert xf == pytest.approx(1.0 / upstream, rel=1e-12)
    assert upstream > 1.0


@given(plates())
def test_limits_stand_in_their_order(plate: Plate) -> None:
    """No flow chokes before it cavitates, and none cavitates steadily before it begins to."""
    incipient, constant, choked = (LIMIT(limit=x, **plate.cells()) for x in ("incipient", "constant", "choked"))
    assert incipient >= constant >= choked


@pytest.mark.parametrize(("b", "t_over_d"), [(0.97, None), (0.98, None), (0.93, 1.0), (0.95, 2.0)])
def test_no_plate_chokes_before_it_cavitates(b: float, t_over_d: float | None) -> None:
    """Where the fit would fall below the index at choking, all three limits are that index."""
    plate = Plate(100.0 * b, 100.0, None if t_over_d is None else 100.0 * b * t_over_d)
    choked = LIMIT(limit="choked", **plate.cells(), form="downstream")
    assert choked > max(1.2, 4.5 * b + 0.5)
    assert LIMIT(limit="incipient", **plate.cells(), form="downstream") == pytest.approx(choked, rel=1e-12)
    assert LIMIT(limit="constant", **plate.cells(), form="downstream") == pytest.approx(choked, rel=1e-12)


@given(st.floats(0.2, 0.6), st.floats(20.0, 1000.0), st.floats(1.01, 3.0), st.sampled_from(["incipient", "constant"]))
def test_limits_grow_with_pipes_above_100_mm_only(b: float, pipe: float, larger: float, limit: str) -> None:
    """By (D/0.1 m)^(0.3 K^-0.25) in downstream form; K changes a little with the pipe itself."""
    small, large = (LIMIT(limit=limit, bore=b * d, pipe=d, form="downstream") for d in (pipe, pipe * larger))
    if pipe >= 100.0:
        k = loss(Plate(b * pipe, pipe))  # above 71.12 mm the same for both
        assert large / small == pytest.approx(larger ** (0.3 * k**-0.25), rel=1e-9)
    elif pipe * larger <= 100.0 and limit == "incipient":
        assert large == pytest.approx(small, rel=1e-12)


@given(plates(), st.floats(1.0, 60.0), st.floats(2.0, 5.0))
def test_fitted_limits_do_not_change_with_pressure(plate: Plate, p1: float, more: float) -> None:
    low, high = (LIMIT(limit="incipient", **plate.cells(), p1=p, pv=0.02, pc=220.64) for p in (p1, p1 * more))
    assert low == high


PSI, GPM, LB_FT3, INCH = 6.894757293168361e-2, 0.22712470704, 16.018463373960142, 25.4


@given(plates(), services())
def test_twins_in_us_units(plate: Plate, service: Service) -> None:
    """psi, US gal/min, lb/ft3 and inches by their exact definitions; viscosity stays in mPa.s (cP)."""
    pressures = {k: getattr(service, k) / PSI for k in ("p1", "p2", "pv", "pc")}
    liquid = {"density": service.density / LB_FT3, "viscosity": service.viscosity}
    length = None if plate.length is None else plate.length / INCH
    rest = {"pipe": plate.pipe / INCH, "bore_length": length, "holes": plate.holes}
    flow = functions["LPU_ORIFICE_FLOW"](bore=plate.bore / INCH, **rest, **pressures, **liquid)
    assert flow * GPM == pytest.approx(_flow(plate, service), rel=1e-10)
    bore = functions["LPU_ORIFICE_BORE"](flow=flow, **rest, **pressures, **liquid)
    assert bore * INCH == pytest.approx(plate.bore, rel=1e-10)
    drop = functions["LPU_ORIFICE_DROP"](flow=flow, bore=bore, **rest, **liquid)
    assert drop * PSI == pytest.approx(DROP(flow=flow * GPM, **plate.cells(), **service.liquid()), rel=1e-9)
    assert functions["LPU_ORIFICE_FL"](bore=bore, **rest) == pytest.approx(FL(**plate.cells()), rel=1e-9)
