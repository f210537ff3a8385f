"""One plate: published bores and drops, tap drop against net drop, thickness, drills, findings."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from design.lines import HOT, WATER, served
from design.plain import thickness
from lowpoint.design import Construction, Criteria, Line, Liquid, Plate, PlateDesign, design_plate, rate_plate
from lowpoint.errors import LowpointError

EXACT = Criteria(rounding="none")


def designed(pipe: float = 102.26, construction: Construction | None = None, criteria: Criteria = EXACT,
             liquid: Liquid = WATER, governing: str | None = None, **case: Any) -> PlateDesign:  # fmt: skip
    return design_plate(served(liquid, **case), Line.in_units(pipe=pipe), construction, criteria, governing=governing)


def test_restriction_of_crane_7_12() -> None:
    """12 in schedule 40, water at 10 ft/s, K 5.06: 8.204 in by the ISO loss without a gas expansion factor (own solve;
    the book prints 7.94 in after three hand iterations)."""
    liquid = Liquid(density=998.98, pv=2000.0, pc=22e6, viscosity=1.1e-3)  # type: ignore[arg-type]
    pipe, speed = 11.938 * 0.0254, 3.048
    drop = 5.0588 * 0.5 * 998.98 * speed**2
    case = {"flow": speed * math.pi / 4 * pipe**2 * 3600.0, "p1": 10.0, "p2": 10.0 - drop * 1e-5}
    found = designed(pipe * 1e3, liquid=liquid, **case)
    assert found.exact_bore / 0.0254 == pytest.approx(8.204, rel=1e-3)
    assert found.rating.k[0, 0] == pytest.approx(5.0588, rel=1e-9)


@pytest.mark.parametrize(
    ("p1", "p2", "bore"),
    [
        # Five stages of equal index from 50 to 3 bar, 100 m3/h of water at 20 C in 154.05 mm: bores solved with the
        # Reader-Harris/Gallagher coefficient of the library fluids (reference values multistage-016 to -020).
        (0, 1, 29.67), (1, 2, 34.024), (2, 3, 38.965), (3, 4, 44.542), (4, 5, 50.796),
    ],
)  # fmt: skip
def test_bores_of_an_equal_index_split(p1: int, p2: int, bore: float) -> None:
    pv, ratio = 0.0233932, ((3.0 - 0.0233932) / (50.0 - 0.0233932)) ** (1 / 5)
    before, after = (pv + (50.0 - pv) * ratio**i for i in (p1, p2))
    found = designed(154.05, flow=100.0, p1=before, p2=after)
    assert found.exact_bore * 1e3 == pytest.approx(bore, rel=1e-3)


def test_tap_drop_of_crane_7_29() -> None:
    """0.05 m bore in 73.66 mm, 17 kPa between the taps: 478 L/min (Crane TP-410M, example 7.29 with its erratum). The
    net drop of that state is 9069.47 Pa (library fluids, ISO 5167-2 equation 7, with p1 2 bar and C 0.61512)."""
    liquid = Liquid(density=999.1, pv=1700.0, pc=22e6, viscosity=1.139e-3)  # type: ignore[arg-type]
    rating = rate_plate(Plate.in_units(bore=50.0), Line.in_units(pipe=73.66),
                        served(liquid, flow=0.478 * 60.0, p1=2.0, p2=1.0))  # fmt: skip
    assert rating.tap_drop[0, 0] == pytest.approx(17000.0, rel=0.02)  # 1 % of flow
    ratio = float(rating.net_drop[0, 0] / rating.tap_drop[0, 0])
    assert ratio == pytest.approx(9069.474705745388 / 17000.0, rel=0.02)  # net by corner taps, there flange


@pytest.mark.parametrize(
    "plate",
    [Plate.in_units(bore=50.0, holes=2), Plate.in_units(bore=50.0, bore_length=10.0), Plate.in_units(bore=8.0)],
    ids=["two holes", "long bore", "outside ISO 5167-2"],
)
def test_no_tap_drop_where_none_is_defined(plate: Plate) -> None:
    rating = rate_plate(plate, Line.in_units(pipe=102.26), served(flow=5.0, p1=50.0, p2=1.0))
    assert np.isnan(rating.tap_drop).all()
    assert rating.net_drop[0, 0] > 0.0


@given(st.floats(5.0, 60.0), st.floats(2.0, 30.0), st.floats(0.05, 0.95))
def test_the_exact_bore_passes_the_flow(flow: float, p1: float, share: float) -> None:
    """Choked or not, with nothing else in the line."""
    found = designed(flow=flow, p1=p1, p2=max(p1 * share, 0.1), held="both")
    assert found.rating.flow[0] == pytest.approx(flow / 3600.0, rel=1e-9)


def test_bore_and_thickness_agree() -> None:
    """The thickness is that of the bore by the plate formula, and the loss is that of a bore so long."""
    made = Construction.in_units(stress=120, support_diameter=130, step=0)
    found = designed(construction=made, flow=40.0, p1=30.0, p2=5.0)
    plate = found.plate
    assert plate.thickness == pytest.approx(thickness(25e5, 0.130, plate.bore, 120e6), rel=1e-9)
    assert plate.bore_length == plate.thickness
    assert found.rounds > 2
    thin = designed(flow=40.0, p1=30.0, p2=5.0)
    assert plate.bore < thin.plate.bore  # a long bore loses less, so it must be tighter


def test_a_bevelled_plate_stays_thin() -> None:
    made = Construction.in_units(stress=120, support_diameter=130, bevelled=True)
    found = designed(construction=made, flow=40.0, p1=30.0, p2=5.0)
    assert found.plate.thickness > 0.01  # type: ignore[operator]
    assert found.plate.bore_length == pytest.approx(0.02 * 0.10226)
    edge = Construction.in_units(stress=120, support_diameter=130, bevelled=True, edge=1)
    assert designed(construction=edge, flow=40.0, p1=30.0, p2=5.0).plate.bore_length == pytest.approx(1e-3)


def test_load_is_the_largest_of_all_cases_and_of_start_up() -> None:
    cases = {"flow": [40.0, 10.0], "p1": [30.0, 45.0], "p2": [5.0, 5.0]}
    assert designed(**cases).load == pytest.approx(40e5)
    assert designed(construction=Construction.in_units(differential=52), **cases).load == pytest.approx(52e5)
    assert designed(construction=Construction.in_units(differential=20), **cases).load == pytest.approx(40e5)


def test_drills() -> None:
    case = {"flow": 40.0, "p1": 30.0, "p2": 20.0}
    exact = designed(**case)
    nearest, down = (designed(criteria=Criteria(rounding=r), **case) for r in ("nearest", "down"))
    assert down.plate.bore <= exact.exact_bore < down.plate.bore + 0.25e-3
    assert nearest.plate.bore == pytest.approx(0.25e-3 * round(exact.exact_bore / 0.25e-3))
    assert nearest.rating.regime[0, 0] == exact.rating.regime[0, 0]
    inch = designed(criteria=Criteria(drills="inch"), **case).plate.bore / 0.0254 * 64
    assert inch == pytest.approx(round(inch), abs=1e-9)


def test_the_nearest_drill_that_would_change_the_verdict_is_not_taken() -> None:
    """Just clear of incipient cavitation: the larger drill, though nearer, would cavitate; the smaller one is taken."""

    def index_over_limit(bore: float) -> float:
        """With p1 and p2 held the index is fixed, and the limit rises with the bore."""
        cases = served(flow=1.0, p1=8.0, p2=p2, held="both")
        plate, line = Plate.in_units(bore=bore), Line.in_units(pipe=102.26)
        return float(rate_plate(plate, line, cases, Criteria(kind="incipient")).margin[0, 0])

    low, high = 36.0, 36.5
    p2 = 5.0
    for _ in range(60):  # the back-pressure at which a bore of 36.4 mm is just clear, and one of 36.5 mm is not
        p2 += 0.5 * (1e-4 - index_over_limit(36.4))
    assert index_over_limit(36.4) > 0.0 > index_over_limit(high)
    flow = rate_plate(Plate.in_units(bore=36.4), Line.in_units(pipe=102.26),
                      served(flow=1.0, p1=8.0, p2=p2, held="both")).flow[0] * 3600.0  # fmt: skip
    found = designed(criteria=Criteria(kind="incipient"), flow=flow, p1=8.0, p2=p2)
    assert found.exact_bore * 1e3 == pytest.approx(36.4, rel=1e-9)
    assert found.plate.bore * 1e3 == pytest.approx(low)


def test_choking_and_flashing_are_findings() -> None:
    """Boiler blowdown: the plate is sized on the choked drop and flashes after it; no error."""
    found = designed(52.5, liquid=HOT, flow=6.0, p1=14.6, p2=2.0, held="both")
    assert found.rating.regime.tolist() == [["flashing"]]
    assert found.rating.choked.all()
    assert {"flashing", "choked"} <= {note.topic for note in found.notes}
    assert found.rating.flow[0] * 3600 == pytest.approx(6.0, rel=1e-9)


def test_the_other_cases_take_a_different_drop() -> None:
    """With p1 and the flow held the drop goes with the square of the flow (K hardly moves with the Reynolds number)."""
    found = designed(flow=[40.0, 20.0], p1=[30.0, 30.0], p2=[20.0, 20.0], names=("full", "half"))
    drop = found.rating.net_drop[0]
    assert drop[0] == pytest.approx(10e5, rel=1e-9)
    assert drop[1] == pytest.approx(2.5e5, rel=0.01)
    assert found.rating.left[1] == pytest.approx(7.5e5, rel=0.01)
    assert found.rating.at(0, "half").p_out == pytest.approx(27.5e5, rel=0.01)


def test_governing_case_by_name() -> None:
    cases = {"flow": [40.0, 20.0], "p1": [30.0, 30.0], "p2": [20.0, 20.0], "names": ("full", "half")}
    half = designed(governing="half", **cases)
    assert half.rating.net_drop[0, 1] == pytest.approx(10e5, rel=1e-9)
    assert half.rating.short.tolist() == [True, False]
    assert half.rating.flow[0] == pytest.approx(half.rating.flow[1], rel=1e-9)


def test_worn_plate_passes_more() -> None:
    line, plate = Line.in_units(pipe=102.26), Plate.in_units(bore=40.0)
    new, worn = (rate_plate(plate, line, served(flow=1.0, p1=10.0, p2=8.0, held="both"), worn=w) for w in (0.0, 0.05))
    # 1 % of bore is 4 to 7 % of drop, so 2 to 3.5 % of flow (common practice).
    assert 1.10 < worn.flow[0] / new.flow[0] < 1.175


def test_no_bore_at_all() -> None:
    with pytest.raises(LowpointError) as error:
        designed(20.0, flow=40.0, p1=2.0, p2=1.99)
    assert str(error.value) == (
        "case 'case 1': a bore must pass 40 m3/h at a drop of 0.01 bar, got none in a pipe of 20 mm. Choose a larger "
        "pipe or a smaller drop; a smaller pipe where the bore would be a pinhole."
    )


def test_no_thickness_carries_the_load() -> None:
    made = Construction.in_units(stress=5, support_diameter=130)
    with pytest.raises(LowpointError) as error:
        designed(construction=made, flow=40.0, p1=60.0, p2=20.0)
    thin = designed(flow=40.0, p1=60.0, p2=20.0).exact_bore
    assert str(error.value) == (
        f"construction: a plate with a bore of {thin * 1e3:.6g} mm must carry 40 bar at a thickness of at most half "
        "its support diameter, got none on 130 mm at 5 MPa. Use a stronger material, a smaller support diameter or a "
        "clamped rim, or give the thickness that a finer calculation finds."
    )
    with pytest.raises(LowpointError, match="support_diameter must be above the bore") as error:
        designed(construction=Construction.in_units(stress=120, support_diameter=15), flow=40.0, p1=60.0, p2=20.0)
    assert error.value.got == "15 mm"
