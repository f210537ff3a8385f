"""Edge cases of the valve kernels, in SI: what has an answer, and what has none."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from lowpoint.physics import fittings, indices, limits, nonturbulent, sizing, travel
from lowpoint.units import KV


def arrays(*values: float) -> list[Any]:
    return [np.array([value]) for value in values]


def factor(coefficient: float, d: float, d1: float, d2: float) -> float:
    return float(fittings.piping_geometry_factor(*arrays(coefficient * KV, d, d1, d2))[0])


# Cold water, 10 bar and 6 bar, 100 m3/h, globe valve: p1, p2, pv, pc, density, FL.
WATER = (10e5, 6e5, 2.3e3, 220.64e5, 998.0, 0.9)
FLOW = 100.0 / 3600.0


def required(flow: float, *sizes: float) -> float:
    return float(sizing.required_coefficient(*arrays(flow, *WATER), *arrays(*sizes))[0])


@pytest.mark.parametrize("ratio", [1.0, 1.0000001, 1.05, 1.1])
def test_a_valve_a_little_larger_than_its_pipe_is_line_size(ratio: float) -> None:
    """A nominal size against an inside diameter, up to 1.1 (the rule of this package): no fitting is computed."""
    assert factor(150.0, 0.1 * ratio, 0.1, 0.1) == 1.0
    assert required(FLOW, 0.1 * ratio, 0.1, 0.1) == required(FLOW)
    caution = fittings.a_little_larger(*arrays(0.1 * ratio, 0.1, 0.1))
    assert bool(caution[0]) is (ratio > 1.0)


@pytest.mark.parametrize("inch", [1.0, 0.0254, 0.001])
def test_exactly_1_1_counts_as_line_size_in_any_unit(inch: float) -> None:
    """1.1 and 1.0 carried to metres may come out a rounding apart."""
    for pipe in (1.0, 2.0, 3.0, 4.026, 6.065, 10.02, 100.0, 154.1):
        assert factor(1e-3, 1.1 * pipe * inch, pipe * inch, pipe * inch) == 1.0


@pytest.mark.parametrize(("d1", "d2"), [(0.1, 0.2), (0.2, 0.1), (0.1, 0.1)])
def test_a_valve_much_larger_than_a_pipe_has_no_answer(d1: float, d2: float) -> None:
    d = 0.1 * 1.1001
    assert math.isnan(factor(50.0, d, d1, d2))
    assert math.isnan(required(FLOW, d, d1, d2))
    assert bool(fittings.too_large(*arrays(d, d1, d2))[0])
    case = arrays(50.0 * KV, *WATER, d, d1, d2)
    assert np.isnan(sizing.flow_through(*case)).all()
    drop = arrays(FLOW, 50.0 * KV, WATER[0], *WATER[2:], d, d1, d2)
    assert np.isnan(sizing.drop_for_flow(*drop)).all()


def test_one_oversized_row_does_not_spoil_its_neighbours() -> None:
    d1 = np.array([0.1, 0.09, 0.15, np.nan])
    d = np.array([0.1, 0.1, 0.1, np.nan])
    got = sizing.required_coefficient(*[np.full(4, x) for x in (FLOW, *WATER)], d, d1, d1)
    assert np.isnan(got).tolist() == [False, True, False, False]
    assert got[0] == got[3] == required(FLOW)
    assert got[2] == required(FLOW, 0.1, 0.15, 0.15)


def test_only_an_outlet_expander_gives_a_factor_above_one() -> None:
    """K2 - KB2 is negative: the expander gives back more pressure than it loses, which is legitimate."""
    assert factor(150.0, 0.1, 0.1, 0.15) > 1.0
    assert factor(150.0, 0.1, 0.15, 0.1) < 1.0
    assert required(FLOW, 0.1, 0.1, 0.15) < required(FLOW) < required(FLOW, 0.1, 0.15, 0.1)


def test_where_the_expander_gives_back_more_than_everything_loses_there_is_no_answer() -> None:
    """sumK = -0.5 at d/D2 = sqrt(1/2): 1 + sumK c is 0 at c = 2, C/d2 = sqrt(2 x 0.0016) Kv/mm2."""
    d, d2 = 0.1, 0.1 * math.sqrt(2.0)
    edge = math.sqrt(2.0 * 1.6e-3) * 100.0**2
    assert factor(0.999 * edge, d, d, d2) > 20.0
    assert math.isnan(factor(1.001 * edge, d, d, d2))
    beyond = arrays(1.001 * edge * KV, *WATER, d, d, d2)
    assert np.isnan(sizing.flow_through(*beyond)).all()
    p1, _, pv, pc, _, fl = WATER
    sizes = arrays(1.001 * edge * KV, d, d, d2)
    assert np.isnan(sizing.choked_drop(*arrays(p1, pv, pc, fl), *sizes)).all()
    assert np.isnan(indices.choked_index(*arrays(p1, pv, pc, fl), *sizes)).all()
    assert np.isnan(limits.installed_limit(*arrays(2.0), *sizes)).all()
    drop = arrays(0.01, 1.001 * edge * KV, p1, pv, pc, 998.0, fl, d, d, d2)
    assert np.isnan(sizing.drop_for_flow(*drop)).all()


def test_fittings_that_take_the_whole_drop_leave_no_valve() -> None:
    """d/D = 1/2 on both sides: sumK = 0.5 (3/4)^2 + (3/4)^2 = 0.84375, and Q^2 rho sumK/(N2 d^4) is the whole drop."""
    d, pipe = 0.05, 0.1
    kv_at_unit_drop = math.sqrt(1.6e-3 / 0.84375) * 50.0**2  # the coefficient of the fittings alone
    most = kv_at_unit_drop * KV * math.sqrt((WATER[0] - WATER[1]) / WATER[4])
    assert required(0.999 * most, d, pipe, pipe) > 20.0 * kv_at_unit_drop * KV
    assert math.isnan(required(1.000001 * most, d, pipe, pipe))
    assert required(1.000001 * most) > 0.0


def test_fittings_that_choke_the_flow_leave_no_valve() -> None:
    """An inlet reducer whose own loss brings the liquid to FF pv, while the drop over all is far larger."""
    p1, pv, pc, density, fl = 10e5, 9e5, 220.64e5, 890.0, 0.9
    head = p1 - (0.96 - 0.28 * math.sqrt(pv / pc)) * pv
    d, pipe = 0.05, 0.1
    inlet = 0.5 * 0.75**2 + 1.0 - 0.5**4
    most = math.sqrt(1.6e-3 / inlet) * 50.0**2 * KV * math.sqrt(head / density)

    def sized(flow: float) -> float:
        case = arrays(flow, p1, 0.5e5, pv, pc, density, fl, d, pipe, pipe)
        return float(sizing.required_coefficient(*case)[0])

    assert sized(0.999 * most) > 0.0
    assert math.isnan(sized(1.000001 * most))


def test_choked_exactly_at_the_choked_drop() -> None:
    """At dp = FL^2 (p1 - FF pv) both curves of the closed form meet; one step further the coefficient stays."""
    p1, _, pv, pc, density, fl = WATER
    dp = float(sizing.choked_drop(*arrays(p1, pv, pc, fl))[0])

    def sized(drop: float) -> float:
        return float(sizing.required_coefficient(*arrays(FLOW, p1, p1 - drop, pv, pc, density, fl))[0])

    assert sized(dp) == pytest.approx(FLOW * math.sqrt(density / dp), rel=1e-14)
    assert sized(1.1 * dp) == pytest.approx(sized(dp), rel=1e-14)
    assert sized(0.9 * dp) == pytest.approx(sized(dp) / math.sqrt(0.9), rel=1e-14)


def test_a_drop_that_is_not_below_the_inlet_pressure_is_none() -> None:
    small = arrays(FLOW, 5.0 * KV, *WATER[:1], *WATER[2:5], 1.0)
    assert np.isnan(sizing.drop_for_flow(*small)).all()


def test_throat_pressure_needs_pv_and_pc_once_the_flow_chokes() -> None:
    p1, p2, fl, pv, pc = arrays(10e5, 2e5, 0.8, 2.3e3, 220.64e5)
    assert np.isnan(sizing.throat_pressure(p1, p2, fl)).all()
    floor = (0.96 - 0.28 * math.sqrt(2.3e3 / 220.64e5)) * 2.3e3
    assert sizing.throat_pressure(p1, p2, fl, pv, pc)[0] == pytest.approx(floor, rel=1e-14)
    mixed = sizing.throat_pressure(
        *[np.full(3, x[0]) for x in (p1, p2, fl)], np.array([2.3e3, np.nan, 2.3e3]), np.full(3, pc[0])
    )
    assert np.isnan(mixed).tolist() == [False, True, False]


def test_turbulent_flow_with_a_viscosity_is_sized_as_without() -> None:
    """The standard's other branch holds below Rev 10 000 only: an outlet expander keeps its FP for thin liquids."""
    sizes = (0.1, 0.1, 0.15)
    thin = sizing.required_coefficient(*arrays(FLOW, *WATER, *sizes), *arrays(1e-3, 0.46), "full")
    assert thin[0] == required(FLOW, *sizes) < required(FLOW)
    kv = arrays(60.0 * KV, *WATER, *sizes)
    assert sizing.flow_through(*kv, *arrays(1e-3, 0.46), "full") == sizing.flow_through(*kv)
    case = arrays(FLOW, 60.0 * KV, WATER[0], *WATER[2:], *sizes)
    assert sizing.drop_for_flow(*case, *arrays(1e-3, 0.46), "full") == sizing.drop_for_flow(*case)
    thick = sizing.required_coefficient(*arrays(FLOW, *WATER, *sizes), *arrays(1.0, 0.46), "full")
    assert thick[0] > 1.05 * required(FLOW)


def test_rows_without_a_viscosity_are_turbulent_rows() -> None:
    viscosity, fd = np.array([1.0, np.nan, 1.0]), np.full(3, 0.46)
    rows = [np.full(3, x) for x in (FLOW, *WATER, 0.1, 0.15, 0.15)]
    mixed = sizing.required_coefficient(*rows, viscosity, fd, np.array(["full", "None", "reduced"]))
    assert mixed[1] == required(FLOW, 0.1, 0.15, 0.15)
    assert mixed[0] != mixed[2]
    assert min(mixed[0], mixed[2]) > mixed[1]


def test_trim_class_is_an_input() -> None:
    """n by each class at C/d2 = 0.01 Kv/mm2: 0.0016/0.01^2 = 16, and 1 + 140 x 0.01^(2/3) = 7.4983."""
    both = nonturbulent.trim_number(np.full(2, 100.0 * KV), np.full(2, 0.1), np.array([False, True]))
    assert both == pytest.approx([16.0, 1.0 + 140.0 * 0.01 ** (2.0 / 3.0)], rel=1e-12)


def test_reynolds_factor_by_its_three_parts() -> None:
    """Below Rev 10 the laminar curve alone; from 10 the smaller of both; never above 1 (IEC 60534-2-1)."""
    n, fl = np.full(4, 4.0), np.full(4, 0.9)
    rev = np.array([1.0, 9.999999, 500.0, 1e6])
    laminar = [0.026 / 0.9 * math.sqrt(4.0 * r) for r in rev]
    transitional = 1.0 + 0.33 * math.sqrt(0.9) / 4.0**0.25 * math.log10(500.0 / 1e4)
    got = nonturbulent.reynolds_factor(rev, n, fl)
    assert got == pytest.approx([laminar[0], laminar[1], min(transitional, laminar[2]), 1.0], rel=1e-12)
    # For n = 1 the transitional curve lies below the laminar one at Rev 10, so FR jumps there.
    at = nonturbulent.reynolds_factor(np.array([9.999999, 10.0]), np.ones(2), np.full(2, 0.9))
    jump = [0.026 / 0.9 * math.sqrt(9.999999), 1.0 - 0.33 * math.sqrt(0.9) * 3.0]
    assert at == pytest.approx(jump, rel=1e-12)
    assert jump[0] > 1.4 * jump[1]


def test_a_flow_too_viscous_for_full_size_trim_has_no_root() -> None:
    """In full-size trim C FR(C) has a top, and for a thick enough liquid that top lies below the flow."""
    honey = sizing.required_coefficient(*arrays(FLOW, *WATER, 0.1, 0.1, 0.1), *arrays(50.0, 0.46), "full")
    assert np.isnan(honey).all()
    reduced = sizing.required_coefficient(*arrays(FLOW, *WATER, 0.1, 0.1, 0.1), *arrays(50.0, 0.46), "reduced")
    assert reduced[0] > required(FLOW)


def test_a_table_is_not_extrapolated() -> None:
    xs, ys = np.array([0.1, 0.5, 0.9]), np.array([0.95, 0.9, 0.7])
    x = np.array([0.0999999, 0.1, 0.3, 0.9, 0.9000001])
    got = travel.value_at_travel(x, xs, ys)
    assert np.isnan(got).tolist() == [True, False, False, False, True]
    assert got[1:4] == pytest.approx([0.95, 0.925, 0.7], rel=1e-12)


def test_the_first_row_that_passes_exactly_is_an_opening_even_where_c_times_fl_falls() -> None:
    """C FL is 25 at the first row and falls from there; needs in C FL of 25, 24.999 and 25.001."""
    xs, cs, fls = np.array([0.1, 0.9]), np.array([50.0, 60.0]), np.array([0.5, 0.25])
    got = travel._opening(xs, cs, fls, np.zeros(3), np.array([25.0, 24.999, 25.001]))
    assert got[:2].tolist() == [0.1, 0.1]
    assert np.isnan(got[2])
