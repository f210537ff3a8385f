"""A valve and a plate in series: the pressure between them, both margins, and the plate that is best."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from design.lines import HOT, served
from design.plain import PlainPlate, Water, reynolds, velocity
from lowpoint.design import Cases, Construction, Criteria, Line, Plate, SeriesDesign, Valve, best_plate, rate_series
from lowpoint.errors import LowpointError
from lowpoint.units import KV

LINE = Line.in_units(pipe=102.26)
EXACT = Criteria(rounding="none")
NAMES = ("minimum", "normal", "maximum")


def bypass(**changes: Any) -> Cases:
    """Total drop over flow: the pump's curve falls and the line's back-pressure rises."""
    values = {"flow": [40.0, 70.0, 95.0], "p1": [22.0, 20.0, 17.0], "p2": [2.6, 3.0, 3.6], "names": NAMES}
    return served(**{**values, **changes})


def best(valve: Valve, cases: Cases | None = None, made: Construction | None = None, criteria: Criteria = EXACT,
         line: Line = LINE) -> SeriesDesign:  # fmt: skip
    return best_plate(valve, line, cases or bypass(), made, criteria)


GLOBE = Valve(fl=0.9)  # type: ignore[arg-type]


def test_a_plate_and_a_valve_by_hand() -> None:
    """Pressure between, both indices, the valve's Kv = Q/(0.1 sqrt(dp/kPa)) sqrt(rho/999.1) (IEC 60534-2-1) or that of
    its choked drop, and both margins, in plain floats."""
    water, pipe, bore, fl = Water(), 0.10226, 0.045, 0.9
    rating = rate_series(GLOBE, Plate(bore), LINE, bypass())
    for case, (flow, p1, p2) in enumerate(
        zip([40.0, 70.0, 95.0], [22e5, 20e5, 17e5], [2.6e5, 3e5, 3.6e5], strict=True)
    ):
        plate = PlainPlate(bore, pipe, 0.0, reynolds(flow / 3600.0, pipe, water))
        dynamic = 0.5 * water.density * velocity(flow / 3600.0, pipe) ** 2
        between = p2 + plate.k * dynamic
        assert between > plate.fall * dynamic + water.critical_floor  # the plate does not choke
        assert rating.between[case] == pytest.approx(between, rel=1e-9)
        choked_drop = fl**2 * (p1 - water.critical_floor)
        takes = min(p1 - between, choked_drop)
        kv = flow / (0.1 * math.sqrt(takes / 1e3)) * math.sqrt(water.density / 999.1)
        assert rating.coefficient[case] / KV == pytest.approx(kv, rel=1e-9)
        valve_sigma = (p1 - water.pv) / (p1 - between)
        plate_sigma = (between - water.pv) / (between - p2)
        valve_margin = valve_sigma * choked_drop / (p1 - water.pv) - 1.0
        plate_margin = plate_sigma / plate.limit("constant") - 1.0
        assert rating.margins[:, case] == pytest.approx([valve_margin, plate_margin], rel=1e-7)
        assert rating.valve_states.sigma[case] == pytest.approx(valve_sigma, rel=1e-9)
        assert rating.plate.sigma[0, case] == pytest.approx(plate_sigma, rel=1e-9)
        assert rating.valve_drop[case] == pytest.approx(p1 - between, rel=1e-9)
    assert rating.worst_margin == pytest.approx(rating.margins.min())


def test_a_choked_plate_backs_up() -> None:
    """At 95 m3/h through 33 mm the plate chokes: the pressure before it is FF pv + F x, whatever the back-pressure."""
    water, flow = Water(), 95.0 / 3600.0
    dynamic = 0.5 * water.density * velocity(flow, 0.10226) ** 2
    plate = PlainPlate(0.033, 0.10226, 0.0, reynolds(flow, 0.10226, water))
    cases = bypass(flow=95.0, p1=60.0, p2=[2.0, 1.0, 0.3])
    rating = rate_series(GLOBE, Plate(0.033), LINE, cases)
    assert rating.plate.choked.tolist() == [[False, True, True]]
    assert rating.between[1:] == pytest.approx(water.critical_floor + plate.fall * dynamic, rel=1e-9)


def test_the_best_plate_is_a_maximum() -> None:
    """Its neighbours are worse, and so is every bore of a scan; there the worst of valve and of plate are equal."""
    found = best(GLOBE)
    cases = bypass()
    for share in (-0.02, -1e-3, -1e-5, 1e-5, 1e-3, 0.02):
        bore = Plate(found.exact_bore * (1.0 + share))
        assert rate_series(GLOBE, bore, LINE, cases, EXACT).worst_margin < found.exact_margin
    for bore_ in np.linspace(0.02, 0.1, 161):
        assert rate_series(GLOBE, Plate(bore_), LINE, cases, EXACT).worst_margin <= found.exact_margin
    assert found.rating.worst_margin == pytest.approx(found.exact_margin, abs=1e-9)
    assert found.rating.margins[0].min() == pytest.approx(found.rating.margins[1].min(), abs=1e-7)
    assert found.exact_margin > found.alone_margin


@given(
    fl=st.floats(0.55, 0.97), steep=st.floats(0.2, 0.95), p2=st.floats(0.5, 6.0), pressure=st.floats(8.0, 60.0),
    flow=st.floats(30.0, 90.0), kind=st.sampled_from(["incipient", "constant", "choked"]), thick=st.booleans(),
    sized=st.booleans(),
)  # fmt: skip
@settings(max_examples=40)
def test_no_other_bore_is_better(
    fl: float, steep: float, p2: float, pressure: float, flow: float, kind: str, thick: bool, sized: bool
) -> None:
    sizes = {"valve_size": 80.0, "pipe_in": 102.26, "pipe_out": 102.26} if sized else {}
    valve = Valve.in_units(fl=fl, **sizes)
    cases = bypass(flow=[0.5 * flow, flow], p1=[pressure, pressure * steep + p2], p2=p2, names=("half", "full"))
    made = Construction.in_units(thickness=8) if thick else Construction()
    criteria = Criteria(kind=kind, rounding="none")
    try:
        found = best(valve, cases, made, criteria)
    except LowpointError as error:  # some valves of this size do not pass the flow at all
        if error.subject != "valve and plate":
            raise
        return
    for bore in np.geomspace(0.015, 0.1, 40):
        other = rate_series(valve, Plate(bore, 0.008 if thick else None), LINE, cases, criteria)
        assert other.worst_margin <= found.exact_margin + 1e-9


def test_drilled_plate_is_the_better_neighbour() -> None:
    exact = best(GLOBE)
    found = best(GLOBE, criteria=Criteria())
    step = 0.5e-3  # ISO 235 between 32 and 50 mm (from memory)
    assert 0.032 < exact.exact_bore < 0.05
    low = step * math.floor(exact.exact_bore / step)
    margins = {b: rate_series(GLOBE, Plate(b), LINE, bypass()).worst_margin for b in (low, low + step)}
    assert found.plate.bore == pytest.approx(max(margins, key=lambda b: margins[b]))
    assert best(GLOBE, criteria=Criteria(rounding="down")).plate.bore == pytest.approx(low)


def test_strength_goes_into_the_loss() -> None:
    made = Construction.in_units(stress=120, support_diameter=130)
    found = best(GLOBE, made=made)
    assert found.load == pytest.approx(19.4e5)
    needed = float(made.needed_thickness(np.array([found.plate.bore]), found.load)[0])
    assert found.plate.thickness == needed
    assert found.plate.bore_length == needed
    assert found.plate.bore != best(GLOBE).plate.bore


def test_limits_of_the_valve_between_its_reducers() -> None:
    """FP^2 (limit + (K1 + KB1) c) with c = (C/d^2)^2/N2: 80 mm in 100 mm, Kv and mm (IEC 60534-2-1, N2 1.6e-3)."""
    valve = Valve.in_units(fl=0.9, valve_size=80, pipe_in=100, pipe_out=100, constant=1.8, kind="constant")
    rating = rate_series(valve, Plate(0.045), LINE, bypass())
    for case in range(3):
        kv = rating.coefficient[case] / KV
        c, b = (kv / 80.0**2) ** 2 / 1.6e-3, 0.8**2
        inlet, total = 0.5 * (1 - b) ** 2 + 1 - b**2, 1.5 * (1 - b) ** 2
        limit = (1.8 + inlet * c) / (1 + total * c)
        assert rating.valve_states.constant[case] == pytest.approx(limit, rel=1e-9)
        assert rating.valve_states.margin[case] == pytest.approx(rating.valve_states.sigma[case] / limit - 1.0)
        choked = (1 / 0.81 + inlet * c) / (1 + total * c)  # cold water: FF pv is small
        assert rating.valve_states.choked_limit[case] == pytest.approx(choked, rel=2e-3)


def test_recovery_that_changes_with_the_opening() -> None:
    """FL of each case: the one that falls as the valve opens makes its case the worse one."""
    steady = rate_series(Valve(fl=0.9), Plate(0.05), LINE, bypass())  # type: ignore[arg-type]
    falling = rate_series(Valve(fl=[0.95, 0.9, 0.8]), Plate(0.05), LINE, bypass())  # type: ignore[arg-type]
    assert falling.margins[0, 0] > steady.margins[0, 0]
    assert falling.margins[0, 1] == steady.margins[0, 1]
    assert falling.margins[0, 2] < steady.margins[0, 2]
    assert falling.worst == ("valve", "maximum")


def test_the_rated_coefficient_bounds_the_plate() -> None:
    free = best(GLOBE)
    needed = float(free.rating.coefficient.max() / KV)
    bound = best(Valve.in_units(fl=0.9, rated=0.9 * needed))
    assert bound.exact_bore > free.exact_bore
    assert bound.rating.coefficient.max() / KV == pytest.approx(0.9 * needed, rel=1e-6)
    assert bound.exact_margin < free.exact_margin
    small = Valve.in_units(fl=0.9, rated=0.9 * needed)
    rating = rate_series(small, free.plate, LINE, bypass())
    assert rating.worst_margin == -np.inf
    assert "the valve must open beyond its rated coefficient, to " in " ".join(n.text for n in rating.notes)


def test_verdicts() -> None:
    valve = Valve.in_units(fl=0.9, incipient=2.4, constant=1.8, damage=1.5, kind="damage")
    rating = rate_series(valve, Plate(0.042), LINE, bypass(p1=[22.0, 12.0, 17.0], p2=[2.6, 3.0, 3.6]))
    words = rating.valve_states.regime.tolist()
    for word, sigma in zip(words, rating.valve_states.sigma, strict=True):
        choked = 1 / 0.81
        expected = ("choked" if sigma <= choked else "damage" if sigma <= 1.5 else "constant" if sigma <= 1.8
                    else "incipient" if sigma <= 2.4 else "clear")  # fmt: skip
        assert word == expected
    assert len(set(words)) > 1


def test_a_plate_that_is_too_tight() -> None:
    """It leaves the valve no drop at the largest flow: said so, no crash, and never the best."""
    rating = rate_series(GLOBE, Plate(0.02), LINE, bypass())
    assert np.isnan(rating.coefficient[2])
    assert rating.valve_states.regime[2] == ""
    assert rating.margins[:, 2].tolist() == [-np.inf, -np.inf]
    assert "no valve of this size passes the wanted flow with what the plate leaves it" in [
        n.text for n in rating.notes
    ]


def test_a_valve_that_passes_no_flow() -> None:
    with pytest.raises(LowpointError) as error:
        best(Valve.in_units(fl=0.9, rated=2.0))
    assert str(error.value) == (
        "valve and plate: the valve must pass the flow of every case, got a flow that it does not pass even without a "
        "plate. Choose a larger valve."
    )


def test_no_plate_leaves_a_drop() -> None:
    """The valve needs nearly everything: even a plate with hardly anything closed takes too much."""
    cases = served(flow=400.0, p1=3.0, p2=2.0)
    alone = rate_series(GLOBE, Plate(0.0599), Line.in_units(pipe=60), cases).coefficient[0]
    valve = Valve.in_units(fl=0.9, rated=400.0 / (0.1 * math.sqrt(100.0)) * math.sqrt(998.2 / 999.1) * (1 + 1e-6))
    assert np.isnan(alone) or alone / KV > 400.0
    with pytest.raises(LowpointError) as error:
        best(valve, cases, line=Line.in_units(pipe=60))
    assert str(error.value) == (
        "valve and plate: there must be a plate that leaves the valve a drop in every case, got none. Leave the plate "
        "out, or choose a larger pipe for it."
    )


def test_a_plate_that_does_not_help() -> None:
    """With the outlet below the vapour pressure the plate flashes whatever its bore."""
    found = best(GLOBE, served(HOT, flow=[40.0], p1=[12.0], p2=[3.0]))
    assert found.alone_margin >= found.rating.worst_margin
    assert found.notes[-1].text.startswith("a plate does not help: the valve alone has a least margin of ")
    assert "flashing" in {note.topic for note in found.notes}


def test_worn() -> None:
    new, worn = (rate_series(GLOBE, Plate(0.042), LINE, bypass(), worn=w) for w in (0.0, 0.05))
    assert (worn.between < new.between).all()
    assert (worn.margins[0] < new.margins[0]).all()
    assert worn.coefficient[2] < new.coefficient[2]  # at the smallest flow the valve is choked either way
