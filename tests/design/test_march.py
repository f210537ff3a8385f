"""Plate after plate with choking in force: mass, pressures, and what happens when the back-pressure falls."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings

from design.lines import HOT, WATER, plates, random_sets, served
from lowpoint.design import Cases, Liquid, PlateSet, Rating, rate
from lowpoint.physics.orifices import orifice_flow


def flow_through_each(rating: Rating) -> np.ndarray:
    """What each plate passes between its own pressures, by the kernel that knows nothing of sets: (plates, cases)."""
    cases, liquid = rating.cases, rating.cases.liquid
    found = []
    for number, plate in enumerate(rating.plates.plates):
        full = [np.full(cases.count, x) for x in (plate.bore, rating.plates.pipe)]
        length = None if plate.bore_length is None else np.full(cases.count, plate.bore_length)
        found.append(orifice_flow(
            rating.pressures[number], rating.pressures[number + 1], *full, liquid.density, liquid.pv, liquid.pc,
            liquid.viscosity, length,
        ))  # fmt: skip
    return np.array(found)


@given(random_sets())
@settings(max_examples=150)
def test_every_plate_passes_the_same_flow_and_the_pressures_fall(drawn: tuple[PlateSet, Cases]) -> None:
    built, cases = drawn
    rating = rate(built, cases)
    assert (np.diff(rating.pressures, axis=0) < 0.0).all()
    assert flow_through_each(rating) == pytest.approx(np.tile(rating.flow, (built.count, 1)), rel=1e-7)
    assert (rating.pressures[0] <= cases.p1 * (1 + 1e-12)).all()
    assert (rating.pressures[-1] >= cases.p2 * (1 - 1e-12)).all()


@given(random_sets())
@settings(max_examples=100)
def test_what_is_held(drawn: tuple[PlateSet, Cases]) -> None:
    """The wanted flow is never exceeded where something else rules it, and its end of the line keeps its pressure."""
    built, cases = drawn
    rating = rate(built, cases)
    if cases.held == "both":
        assert rating.flow.tolist() == rating.passed.tolist()
    else:
        assert (rating.flow <= cases.flow * (1 + 1e-9)).all()
        assert (rating.flow <= rating.passed * (1 + 1e-9)).all()
    limited = rating.flow >= rating.passed * (1 - 1e-9)
    at_inlet = np.isclose(rating.pressures[0], cases.p1, rtol=1e-9)
    at_outlet = np.isclose(rating.pressures[-1], cases.p2, rtol=1e-9)
    assert (at_inlet | (cases.held == "outlet")).all()
    assert (at_outlet | (cases.held == "inlet")).all()
    assert (at_inlet & at_outlet)[limited].all()
    assert rating.left == pytest.approx(cases.p1 - cases.p2 - rating.net_drop.sum(axis=0), rel=1e-9, abs=1e-3)


def test_choked_flow_of_one_plate() -> None:
    """54.504 kg/s: water at 20 C, 50 mm in 102.26 mm, from 10 bar (reference value, own derivation with FF of IEC
    60534-2-1 and the library fluids; checks the coding). A lower back-pressure gives no more."""
    rating = rate(plates(50.0), served(flow=1.0, p1=10.0, p2=[2.0, 1.0, 0.5, 0.1], held="both"))
    assert rating.choked.all()
    assert rating.flow * 998.2 == pytest.approx([54.504] * 4, rel=1e-3)
    assert rating.flow == pytest.approx(rating.flow[0], rel=1e-12)
    assert rating.regime[0].tolist() == ["choked"] * 4
    assert (rating.net_drop[0] > rating.fl[0] ** 2 * 10e5 * 0.99).all()


def test_the_back_pressure_falls() -> None:
    """Three plates: the flow rises until the last one chokes; from then on only the last drop grows."""
    p2 = np.array([9.0, 7.0, 5.0, 3.0, 2.0, 1.0, 0.5, 0.1])
    rating = rate(plates(40.0, 42.0, 45.0), served(flow=1.0, p1=12.0, p2=p2, held="both"))
    assert (np.diff(rating.flow) >= -1e-15).all()
    choked = rating.choked[2]
    assert not choked[0]
    assert choked[-1]
    assert choked.tolist() == sorted(choked.tolist())
    assert rating.flow[choked] == pytest.approx(rating.flow[-1], rel=1e-12)
    assert not rating.choked[:2].any()
    assert rating.pressures[2][choked] == pytest.approx(rating.pressures[2, -1], rel=1e-12)
    assert rating.net_drop[2][choked] == pytest.approx(rating.pressures[2, -1] - p2[choked] * 1e5, rel=1e-12)


def test_a_choked_plate_in_the_middle() -> None:
    """Tight, then wide: the first chokes and takes whatever the wide one leaves it; the flow is the first one's."""
    set_of_two = rate(plates(25.0, 80.0), served(flow=1.0, p1=30.0, p2=1.0, held="both"))
    alone = rate(plates(25.0), served(flow=1.0, p1=30.0, p2=1.0, held="both"))
    assert set_of_two.choked.tolist() == [[True], [False]]
    assert set_of_two.flow == pytest.approx(alone.flow, rel=1e-12)
    second = set_of_two.k[1] * 0.5 * 998.2 * (set_of_two.flow / (np.pi / 4 * 0.10226**2)) ** 2
    assert set_of_two.pressures[1] == pytest.approx(1e5 + second, rel=1e-9)


def test_hot_water_chokes_earlier_and_passes_less() -> None:
    """39.166 kg/s at 150 C where cold water passes 54.504 kg/s (reference value, as above)."""
    rating = rate(plates(50.0), served(HOT, flow=1.0, p1=10.0, p2=1.0, held="both"))
    assert rating.flow * 917.0 == pytest.approx([39.166], rel=2e-3)  # density and pv are rounded here
    assert rating.regime.tolist() == [["flashing"]]
    assert rating.choked.all()


def test_viscosity_left_out_is_a_turbulent_flow() -> None:
    """The loss is then that of a pipe Reynolds number of 1e6."""
    without = Liquid(WATER.density, WATER.pv, WATER.pc)
    area, at = np.pi / 4 * 0.10226**2, 1e6
    speed = at * WATER.viscosity[0] / 998.2 / 0.10226  # type: ignore[index]
    one = rate(plates(50.0), served(flow=speed * area * 3600.0, p1=90.0, p2=1.0))
    other = rate(plates(50.0), served(without, flow=speed * area * 3600.0, p1=90.0, p2=1.0))
    assert one.k == pytest.approx(other.k, rel=1e-12)
