"""A staged design worked out by hand: every intermediate in plain floats, found another way, against the design.

Brine let-down of Kestrel Bay taken with water at 20 C: 100 m3/h from 50 to 3 bar in a pipe of 154.05 mm, plates of
120 MPa on a gasket of 180 mm, margin 0.1 to constant cavitation. The hand calculation knows thickness as a function of
the bore, so it needs no rounds; it finds bores and margin by halving. Equations and their sources: ``design.plain``.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import fluids
import numpy as np
import pytest

from design.plain import PlainPlate, Water, bisect, reynolds, thickness, velocity
from lowpoint.design import Cases, Construction, Criteria, Line, Liquid, SetDesign, design_set, rate

WATER = Water()
PIPE, SUPPORT, STRESS = 0.15405, 0.180, 120e6
FLOWS = (100.0, 80.0, 92.0, 40.0, 97.0, 60.0)
INLETS = (50.0, 51.0, 48.0, 52.5, 50.0, 50.0)
OUTLETS = (3.0, 2.8, 2.5, 3.5, 4.0, 3.0)
NAMES = ("maximum", "normal", "hot", "start-up", "high sea", "half load")


def cases(held: str = "inlet") -> Cases:
    liquid = Liquid(density=WATER.density, pv=WATER.pv, pc=WATER.pc, viscosity=WATER.viscosity)
    return Cases.in_units(flow=FLOWS, p1=INLETS, p2=OUTLETS, liquid=liquid, names=NAMES, held=held)


def construction(step: float = 0.0) -> Construction:
    return Construction(stress=STRESS, support_diameter=SUPPORT, step=step)


def designed(**criteria: object) -> SetDesign:
    asked = {"kind": "constant", "margin": 0.1, "rounding": "none", **criteria}
    return design_set(cases(), Line(PIPE), construction(), Criteria(**asked), governing="maximum")  # type: ignore[arg-type]


@dataclass(frozen=True)
class Stage:
    """What the hand calculation knows of one plate in the governing case."""

    bore: float
    thickness: float
    k: float
    fl: float
    drop: float
    after: float
    limit: float
    sigma: float


LOAD = max(p1 - p2 for p1, p2 in zip(INLETS, OUTLETS, strict=True)) * 1e5
DYNAMIC = 0.5 * WATER.density * velocity(FLOWS[0] / 3600.0, PIPE) ** 2
RE = reynolds(FLOWS[0] / 3600.0, PIPE, WATER)


def plate_of(bore: float) -> PlainPlate:
    return PlainPlate(bore, PIPE, thickness(LOAD, SUPPORT, bore, STRESS), RE)


def stage_at(before: float, margin: float, kind: str) -> Stage:
    """The plate whose index at this pressure is (1 + margin) times its own limit."""

    def short(bore: float) -> float:
        plate = plate_of(bore)
        return (before - WATER.pv) / (plate.k * DYNAMIC) - (1.0 + margin) * plate.limit(kind)

    bore = bisect(short, 0.1 * PIPE, 0.75 * PIPE)
    plate = plate_of(bore)
    drop = plate.k * DYNAMIC
    return Stage(bore, plate.length, plate.k, math.sqrt(plate.fl2), drop, before - drop, plate.limit(kind),
                 (before - WATER.pv) / drop)  # fmt: skip


def by_hand(margin: float, count: int, kind: str) -> list[Stage]:
    """March from the inlet, every plate at the margin."""
    stages: list[Stage] = []
    for _ in range(count):
        stages.append(stage_at(stages[-1].after if stages else INLETS[0] * 1e5, margin, kind))
    return stages


def common_margin(count: int, kind: str) -> float:
    """The margin with which that many plates end at the outlet pressure."""
    return bisect(lambda margin: by_hand(margin, count, kind)[-1].after - OUTLETS[0] * 1e5, -0.5, 1.5)


@pytest.fixture(scope="module")
def hand() -> tuple[float, list[Stage]]:
    margin = common_margin(5, "constant")
    return margin, by_hand(margin, 5, "constant")


def test_the_coefficient_written_here_is_that_of_the_library() -> None:
    """Reader-Harris/Gallagher as in the library fluids, which cites ISO 5167-2."""
    for bore in (0.02, 0.03, 0.05, 0.1):
        mass = FLOWS[0] / 3600.0 * WATER.density
        library = fluids.C_Reader_Harris_Gallagher(PIPE, bore, WATER.density, WATER.viscosity, mass, taps="corner")
        plate = PlainPlate(bore, PIPE, 0.0, RE)
        beta = bore / PIPE
        assert plate.k_thin == pytest.approx(
            (math.sqrt(1 - beta**4 * (1 - library**2)) / (library * beta**2) - 1) ** 2, rel=1e-12
        )


def test_number_of_plates(hand: tuple[float, list[Stage]]) -> None:
    """Five plates end above 10 % margin, four below: by hand, and in the design."""
    found = designed()
    assert hand[0] > 0.1 > common_margin(4, "constant")
    assert found.count == 5
    assert found.fewer is not None
    assert found.fewer.margin == pytest.approx(common_margin(4, "constant"), abs=1e-9)


def test_every_intermediate_of_the_governing_case(hand: tuple[float, list[Stage]]) -> None:
    margin, stages = hand
    found = designed()
    assert found.cases.names[found.governing] == "maximum"
    assert found.load == pytest.approx(LOAD, rel=1e-12)
    assert found.sized.margin == pytest.approx(margin, abs=1e-9)
    before = INLETS[0] * 1e5
    for number, stage in enumerate(stages):
        state, plate = found.rating.at(number, "maximum"), found.plates.plates[number]
        assert plate.bore == pytest.approx(stage.bore, rel=1e-9)
        assert plate.thickness == pytest.approx(stage.thickness, rel=1e-9)
        assert plate.bore_length == plate.thickness
        assert state.k == pytest.approx(stage.k, rel=1e-8)
        assert state.fl == pytest.approx(stage.fl, rel=1e-8)
        assert state.p_in == pytest.approx(before, rel=1e-9)
        assert state.net_drop == pytest.approx(stage.drop, rel=1e-8)
        assert state.p_out == pytest.approx(stage.after, rel=1e-8)
        assert state.sigma == pytest.approx(stage.sigma, rel=1e-8)
        assert state.constant == pytest.approx(stage.limit, rel=1e-8)
        assert state.margin == pytest.approx(margin, abs=1e-8)
        choked = (before - WATER.pv) / (stage.fl**2 * (before - WATER.critical_floor))
        assert state.choked_limit == pytest.approx(choked, rel=1e-8)
        assert not state.choked
        assert state.regime == "incipient"  # between its constant and its incipient limit
        assert state.sigma < PlainPlate(stage.bore, PIPE, stage.thickness, RE).limit("incipient")
        before = stage.after
    assert before == pytest.approx(OUTLETS[0] * 1e5, rel=1e-9)


def test_the_equal_index_split_would_leave_the_last_plate_with_the_least_margin() -> None:
    """Later plates have larger bores and so higher limits; bores of equal index: tests/published (library fluids)."""
    equal = ((OUTLETS[0] * 1e5 - WATER.pv) / (INLETS[0] * 1e5 - WATER.pv)) ** (1 / 5)
    sigma, margins, head = 1.0 / (1.0 - equal), [], INLETS[0] * 1e5 - WATER.pv
    for _ in range(5):
        drop = head * (1.0 - equal)
        bore = bisect(lambda bore, drop=drop: drop - plate_of(bore).k * DYNAMIC, 0.1 * PIPE, 0.75 * PIPE)
        margins.append(sigma / plate_of(bore).limit("constant") - 1.0)
        head -= drop
    assert margins == sorted(margins, reverse=True)
    assert margins[-1] < designed().sized.margin < margins[0]


def marched(bores: list[float], case: int) -> tuple[float, list[float]]:
    """Flow and pressures of one case by hand, with p1 and the flow held, or the flow that the plates pass."""
    p1, p2 = INLETS[case] * 1e5, OUTLETS[case] * 1e5

    def inlet_for(flow: float) -> list[float]:
        """Pressures that this flow needs, from p2 backwards, each plate free or choked."""
        dynamic = 0.5 * WATER.density * velocity(flow, PIPE) ** 2
        pressures = [p2]
        for bore in reversed(bores):
            plate = PlainPlate(bore, PIPE, thickness(LOAD, SUPPORT, bore, STRESS), reynolds(flow, PIPE, WATER))
            choke = WATER.critical_floor + plate.fall * dynamic
            pressures.insert(0, max(pressures[0] + plate.k * dynamic, choke))
        return pressures

    most = bisect(lambda flow: inlet_for(flow)[0] - p1, 1e-6, 1.0)
    wanted = FLOWS[case] / 3600.0
    if most <= wanted * (1.0 + 1e-9):
        return most, inlet_for(most)
    dynamic = 0.5 * WATER.density * velocity(wanted, PIPE) ** 2
    pressures = [p1]
    for bore in bores:
        plate = PlainPlate(bore, PIPE, thickness(LOAD, SUPPORT, bore, STRESS), reynolds(wanted, PIPE, WATER))
        pressures.append(pressures[-1] - plate.k * dynamic)
    return wanted, pressures


@pytest.mark.parametrize("case", range(len(FLOWS)))
def test_every_case_with_the_final_geometry(case: int) -> None:
    """All cases marched plate after plate: flow, pressures, index and margin of each plate."""
    found = designed()
    flow, pressures = marched([plate.bore for plate in found.plates.plates], case)
    rating = found.rating
    assert rating.flow[case] == pytest.approx(flow, rel=1e-9)
    assert rating.pressures[:, case] == pytest.approx(pressures, rel=1e-8)
    re = reynolds(flow, PIPE, WATER)
    for number, plate in enumerate(found.plates.plates):
        before, after = pressures[number], pressures[number + 1]
        sigma = (before - WATER.pv) / (before - after)
        limit = PlainPlate(plate.bore, PIPE, plate.thickness or 0.0, re).limit("constant")
        assert rating.sigma[number, case] == pytest.approx(sigma, rel=1e-7)
        assert rating.margin[number, case] == pytest.approx(sigma / limit - 1.0, rel=1e-6)


def test_drilled_plates_by_hand() -> None:
    """Rounded up to whole millimetres thick and to drills, with p1 and p2 held: margins and flow by hand."""
    found = design_set(cases("both"), Line(PIPE), construction(step=1e-3), Criteria(margin=0.1), governing="maximum")
    load_thick = [thickness(LOAD, SUPPORT, p.bore, STRESS) for p in found.plates.plates]
    for plate, needed in zip(found.plates.plates, load_thick, strict=True):
        assert plate.thickness == pytest.approx(math.ceil(needed * 1e3) / 1e3, rel=1e-12)
        size = plate.bore * 1e3
        step = 0.25 if size < 32.0 else 0.5 if size < 50.0 else 1.0  # ISO 235 (from memory)
        assert size / step == pytest.approx(round(size / step), abs=1e-9)
    flow = bisect(lambda q: sum(drops(found, q)) - 47e5, 1e-3, 1.0)
    assert found.rating.flow[0] == pytest.approx(flow, rel=1e-9)
    assert flow == pytest.approx(FLOWS[0] / 3600.0, rel=0.005)  # a quarter millimetre moves the flow that little
    before, each = 50e5, drops(found, flow)
    for number, drop in enumerate(each):
        bore, thick = found.plates.plates[number].bore, found.plates.plates[number].thickness
        limit = PlainPlate(bore, PIPE, thick or 0.0, RE).limit("constant")
        margin = (before - WATER.pv) / drop / limit - 1.0
        assert found.rating.margin[number, 0] == pytest.approx(margin, abs=1e-8)
        assert margin >= 0.1 - 1e-4
        before -= drop


def drops(found: SetDesign, flow: float) -> list[float]:
    dynamic = 0.5 * WATER.density * velocity(flow, PIPE) ** 2
    re = reynolds(flow, PIPE, WATER)
    return [PlainPlate(p.bore, PIPE, p.thickness or 0.0, re).k * dynamic for p in found.plates.plates]


def test_worn_by_hand() -> None:
    """Bores 3 % larger: the loss falls by hand as in the rating."""
    found = designed()
    worn = rate(found.plates, cases(), found.criteria, worn=0.03)
    flow, _ = marched([plate.bore for plate in found.plates.plates], 0)
    re = reynolds(float(worn.flow[0]), PIPE, WATER)
    by_hand_k = [PlainPlate(1.03 * p.bore, PIPE, p.thickness or 0.0, re).k for p in found.plates.plates]
    assert worn.k[:, 0] == pytest.approx(by_hand_k, rel=1e-9)
    assert worn.passed[0] / flow == pytest.approx(math.sqrt(found.rating.k[:, 0].sum() / np.sum(by_hand_k)), rel=1e-3)
