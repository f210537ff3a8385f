"""Inputs: units at the rim, one number or one a case, and whole messages for what is wrong."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from lowpoint.design import Cases, Construction, Criteria, Line, Liquid, Plate, PlateSet, Valve
from lowpoint.errors import LowpointError

BRINE = Liquid.in_units(density=1046, pv=0.026, pc=220.64, viscosity=1.1)


def two_cases(**changes: Any) -> Cases:
    return Cases.in_units(**{"flow": [60, 85], "p1": [51, 57], "p2": [3.4, 4.2], "liquid": BRINE,
                             "names": ("start-up", "normal"), **changes})  # fmt: skip


def test_units_of_both_sets() -> None:
    """1 US gal = 231 in3, 1 lbf/in2 = 6894.757 Pa, 1 lb/ft3 = 16.01846 kg/m3 (exact definitions, rounded)."""
    metric = Cases.in_units(flow=36.0, p1=10.0, p2=5.0, liquid=BRINE)
    assert (metric.flow[0], metric.p1[0], metric.p2[0]) == pytest.approx((0.01, 1e6, 5e5), rel=1e-12)
    assert (BRINE.viscosity, BRINE.pc) == pytest.approx((1.1e-3, 220.64e5), rel=1e-12)
    liquid = Liquid.in_units("us", density=62.4, pv=0.34, pc=3200.0)
    us = Cases.in_units("us", flow=100.0, p1=100.0, p2=50.0, liquid=liquid)
    assert us.flow[0] == pytest.approx(100 * 231 * 0.0254**3 / 60, rel=1e-12)
    assert us.p1[0] == pytest.approx(689475.7, rel=1e-6)
    assert liquid.density[0] == pytest.approx(62.4 * 16.01846, rel=1e-6)
    assert Construction.in_units(stress=120, support_diameter=180, step=0.5).step == pytest.approx(5e-4)
    assert Valve.in_units(fl=0.9, rated=1.0).rated == pytest.approx(0.1 * np.sqrt(0.9991) / 3600.0, rel=1e-12)


def test_one_value_serves_all_cases() -> None:
    cases = Cases.in_units(flow=[60, 85, 95], p1=57, p2=4.2, liquid=BRINE)
    assert cases.p1.tolist() == [57e5] * 3
    assert cases.liquid.density.tolist() == [1046.0] * 3
    assert cases.names == ("case 1", "case 2", "case 3")


def test_inputs_are_not_changed_and_cannot_be() -> None:
    flow = np.array([0.01, 0.02])
    cases = Cases(flow=flow, p1=np.array([5e6]), p2=np.array([3e5]), liquid=BRINE)
    flow[0] = 5.0
    assert cases.flow[0] == 0.01
    with pytest.raises(ValueError, match="read-only"):
        cases.flow[0] = 1.0


def test_governing_case() -> None:
    """The one that the plates must be most open for: least (p1 - p2)/(rho Q^2)."""
    cases = two_cases(flow=[60, 85], p1=[51, 57], p2=[3.4, 4.2])
    assert cases.governing(None) == 1  # 47.6/3600 = 0.0132 against 52.8/7225 = 0.0073 bar/(m3/h)2
    assert cases.governing("start-up") == 0


SPECIFIC_GRAVITY = "A relative density (specific gravity) was typed: multiply it by 999 kg/m3 (62.4 lb/ft3)."
WRONG: list[tuple[Callable[[], object], str]] = [
    (lambda: two_cases(flow=[60, -85]), "case 'normal': flow must be above 0 m3/h, got -85 m3/h."),
    (lambda: two_cases(p1=[51, float("nan")]),
     "case 'normal': p1 must be a finite number, got nan bar. Pressures are absolute: add the site's atmosphere to a "
     "gauge reading."),
    (lambda: two_cases(p2=[3.4, 58.0]),
     "case 'normal': p2 must be below p1 = 57 bar, got 58 bar. Check that the two are not swapped."),
    (lambda: two_cases(p2=[3.4, 57.0]),
     "case 'normal': p2 must be below p1 = 57 bar, got 57 bar. Check that the two are not swapped."),
    (lambda: two_cases(liquid=Liquid.in_units(density=900, pv=[1.0, 60.0], pc=220.64)),
     "case 'normal': pv must be below p1 = 57 bar, got 60 bar. The liquid would boil before the plates: check "
     "temperature and pressure, and gauge against absolute."),
    (lambda: two_cases(p1=[51, 57, 60]),
     "cases: flow must have one value, or one for each of the 3 cases, got 2 values."),
    (lambda: two_cases(liquid=Liquid.in_units(density=[900, 910, 920], pv=1.0, pc=220.64)),
     "liquid: density must have one value, or one for each of the 2 cases, got 3 values."),
    (lambda: two_cases(names=("a", "a")), "cases: names must be 2 different names, one a case, got a, a."),
    (lambda: two_cases(held="middle"), "cases: held must be one of inlet, outlet, both, got 'middle'."),
    (lambda: two_cases().governing("hot"), "cases: the governing case must be one of start-up, normal, got 'hot'."),
    (lambda: Liquid.in_units(density=0.998, pv=0.02, pc=220),
     f"liquid: density must be at least 100 kg/m3, got 0.998 kg/m3. {SPECIFIC_GRAVITY}"),
    (lambda: Liquid.in_units("us", density=[62, 5], pv=0.3, pc=3200),
     f"liquid, case 2: density must be at least 6 lb/ft3, got 5 lb/ft3. {SPECIFIC_GRAVITY}"),
    (lambda: Liquid.in_units(density="9,98", pv=0.02, pc=220),
     "liquid: density must be a number in kg/m3, got '9,98'."),
    (lambda: Liquid.in_units(density=998, pv=220, pc=0.02),
     "liquid: pv must be below pc = 0.02 bar, got 220 bar. Check that the two are not swapped."),
    (lambda: Liquid.in_units("si", density=998, pv=1, pc=2),
     "liquid: the set of units must be one of metric, us, got 'si'."),
    (lambda: Line.in_units(pipe=0), "line: pipe must be above 0 mm, got 0 mm."),
    (lambda: Line.in_units(pipe=[100, 150]), "line: pipe must be one number, got 2 numbers."),
    (lambda: Plate(bore=None),  # type: ignore[arg-type]
     "plate: bore (diameter of the bore (of each hole)) must be given, got nothing. Sizes are in mm (in)."),
    (lambda: Plate.in_units(bore=20, holes=2.5), "plate: holes must be a whole number, got 2.5."),
    (lambda: PlateSet(Line.in_units(pipe=102.3), (Plate.in_units(bore=20), Plate.in_units(bore=102.3))),
     "plate 2: bore must be below the pipe's inside diameter = 102.3 mm, got 102.3 mm. Check that bore and pipe are "
     "not swapped, and the wear."),
    (lambda: PlateSet(Line.in_units(pipe=100), (Plate.in_units(bore=25, holes=16),)),
     "plate 1: bore must be below the pipe's inside diameter over the root of 16 holes = 25 mm, got 25 mm. Check that "
     "bore and pipe are not swapped, and the wear."),
    (lambda: PlateSet(Line.in_units(pipe=100), ()), "plate set: there must be at least one plate, got none."),
    (lambda: PlateSet(Line.in_units(pipe=100), (Plate.in_units(bore=98),)).worn(0.03),
     "plate 1: bore must be below the pipe's inside diameter = 100 mm, got 100.94 mm. Check that bore and pipe are not "
     "swapped, and the wear."),
    (lambda: PlateSet(Line.in_units(pipe=100), (Plate.in_units(bore=50),)).worn(3.0),
     "plate set: wear must be a share of the bore between -0.5 and 1 (0.03 for 3 %), got 3."),
    (lambda: Construction.in_units(stress=120),
     "construction: support_diameter must be given where stress is, got nothing."),
    (lambda: Construction.in_units(support_diameter=120),
     "construction: stress must be given where support_diameter is, got nothing."),
    (lambda: Construction.in_units(thickness=6, edge=2),
     "construction: edge must be left out of a plate that is not bevelled, got 2 mm. Set bevelled, or leave edge out."),
    (lambda: Construction(bevelled=True),
     "construction: thickness, or stress and support_diameter, must be given where bevelled is, got nothing."),
    (lambda: Construction(support="welded"), "construction: support must be one of simple, clamped, got 'welded'."),
    (lambda: Construction(ligament=1.5), "construction: ligament must be at most 1, got 1.5."),
    (lambda: Criteria(margin=-0.1),
     "criteria: margin must be at least 0, got -0.1. A margin of 0.1 keeps the index 10 % above the limit."),
    (lambda: Criteria(kind="damage"), "criteria: kind must be one of incipient, constant, choked, got 'damage'."),
    (lambda: Criteria(rounding="up"), "criteria: rounding must be one of nearest, down, none, got 'up'."),
    (lambda: Criteria(taps="pipe"), "criteria: taps must be one of corner, flange, radius, got 'pipe'."),
    (lambda: Valve(fl=[0.9, 1.2]),  # type: ignore[arg-type]
     "valve, case 2: fl must be at most 1, got 1.2. Use FL at the real opening, from the vendor; LP_TYPICAL gives a "
     "screening value."),
    (lambda: Valve(fl=0.9, constant=0.8),  # type: ignore[arg-type]
     "valve: constant must be above 1, in upstream form, got 0.8. Was another form meant?"),
    (lambda: Valve(fl=0.9, kind="damage"),  # type: ignore[arg-type]
     "valve: damage must be given where the margin counts to it, got nothing. Give the vendor's limit, or count the "
     "margin to choked."),
    (lambda: Valve(fl=0.9, pipe_in=0.1),  # type: ignore[arg-type]
     "valve: valve_size must be given where pipe_in is, got nothing."),
    (lambda: Valve(fl=0.9, kind="noise"),  # type: ignore[arg-type]
     "valve: kind must be one of incipient, constant, damage, choked, got 'noise'."),
]  # fmt: skip


@pytest.mark.parametrize(("make", "message"), WRONG, ids=[message[:50] for _, message in WRONG])
def test_what_is_wrong_is_said_whole(make: Callable[[], object], message: str) -> None:
    with pytest.raises(LowpointError) as error:
        make()
    assert str(error.value) == message
    assert error.value.subject
    assert error.value.must
    assert error.value.got is not None


def test_messages_in_the_units_of_the_input() -> None:
    liquid = Liquid.in_units("us", density=62.4, pv=0.34, pc=3200.0)
    with pytest.raises(LowpointError) as error:
        Cases.in_units("us", flow=100.0, p1=50.0, p2=100.0, liquid=liquid)
    assert str(error.value) == (
        "case 'case 1': p2 must be below p1 = 50 psi, got 100 psi. Check that the two are not swapped."
    )
