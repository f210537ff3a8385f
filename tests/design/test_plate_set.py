"""A set of plates: least number, equal margin, drills, all cases, and what is said when no set will do."""

from __future__ import annotations

import itertools
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from design.lines import WATER, served
from lowpoint.design import (
    Cases,
    Construction,
    Criteria,
    Line,
    Liquid,
    Plate,
    PlateSet,
    SetDesign,
    design_set,
    rate,
    rate_plate,
)
from lowpoint.design.split import Duty
from lowpoint.errors import LowpointError

LINE = Line.in_units(pipe=154.05)
EXACT = {"rounding": "none"}
THICK = Construction.in_units(stress=120, support_diameter=180)


def let_down(**changes: Any) -> Cases:
    return served(**{"flow": 100.0, "p1": 50.0, "p2": 3.0, **changes})


def designed(cases: Cases | None = None, made: Construction | None = None, **criteria: Any) -> SetDesign:
    return design_set(cases or let_down(), LINE, made, Criteria(**{"margin": 0.1, **EXACT, **criteria}))


@st.composite
def duties(draw: st.DrawFn) -> tuple[Cases, Line, Construction, Criteria]:
    """Drops that one to a dozen plates can take."""
    pipe = draw(st.floats(50.0, 600.0))
    speed, p2 = draw(st.floats(0.8, 5.0)), draw(st.floats(1.0, 10.0))
    liquid = Liquid.in_units(density=draw(st.floats(600.0, 1080.0)), pv=draw(st.floats(0.01, 0.8)) * p2, pc=300.0,
                             viscosity=draw(st.one_of(st.none(), st.floats(0.2, 5.0))))  # fmt: skip
    cases = served(liquid, flow=speed * 0.785398 * (pipe * 1e-3) ** 2 * 3600.0,
                   p1=p2 * draw(st.floats(1.5, 15.0)), p2=p2, held="both")  # fmt: skip
    made = draw(st.sampled_from([
        Construction(),
        Construction.in_units(thickness=0.03 * pipe),
        Construction.in_units(stress=140, support_diameter=1.2 * pipe, step=0),
        Construction.in_units(stress=140, support_diameter=1.2 * pipe),
        Construction.in_units(stress=140, support_diameter=1.2 * pipe, bevelled=True),
    ]))  # fmt: skip
    kind = draw(st.sampled_from(["incipient", "constant", "choked"]))
    return cases, Line.in_units(pipe=pipe), made, Criteria(kind=kind, margin=draw(st.floats(0.0, 0.4)), **EXACT)


def design_or_none(drawn: tuple[Cases, Line, Construction, Criteria], **more: Any) -> SetDesign | None:
    try:
        return design_set(*drawn, **more)
    except LowpointError as error:
        if error.subject != "plate set":
            raise
        return None


@given(duties())
@settings(max_examples=80)
def test_equal_margins_and_the_least_number(drawn: tuple[Cases, Line, Construction, Criteria]) -> None:
    """Before rounding all margins are one; it is enough; one plate fewer is not; p1 and p2 are met."""
    found = design_or_none(drawn)
    if found is None:
        return
    rating = found.rating
    assert rating.margin[:, 0] == pytest.approx(found.sized.margin, abs=1e-6)
    assert found.sized.margin >= found.criteria.margin - 1e-9
    assert rating.flow[0] == pytest.approx(found.cases.flow[0], rel=1e-9)
    assert rating.pressures[-1, 0] == pytest.approx(found.cases.p2[0], rel=1e-9)
    assert not rating.choked.any()
    if found.count > 1:
        fewer = design_or_none(drawn, plates=found.count - 1)
        assert fewer is not None
        assert fewer.sized.margin < found.criteria.margin
        assert found.fewer is not None
        assert fewer.sized.margin == pytest.approx(found.fewer.margin, abs=1e-7)
        bores = [plate.bore for plate in found.plates.plates]
        assert bores == sorted(bores)


@given(duties(), st.lists(st.floats(-0.03, 0.03), min_size=12, max_size=12))
@settings(max_examples=40)
def test_no_other_bores_have_a_better_least_margin(
    drawn: tuple[Cases, Line, Construction, Criteria], moves: list[float]
) -> None:
    """Equal margin is the best split: any other bores that pass the same flow leave one plate worse."""
    cases, line, _, criteria = drawn
    found = design_or_none((cases, line, Construction(), criteria))
    if found is None or found.count == 1:
        return
    moved = [
        Plate(p.bore * (1.0 + m), p.bore_length) for p, m in zip(found.plates.plates, moves, strict=False)
    ]  # fmt: skip
    if max(p.bore for p in moved) >= line.pipe:
        return
    other = rate(PlateSet(line, tuple(moved)), cases, criteria)
    # The limits move with the bores too: judge at equal flow only.
    if np.isclose(other.passed[0], cases.flow[0], rtol=1e-3):
        assert other.margin[:, 0].min() <= found.sized.margin + 1e-3


@given(duties())
@settings(max_examples=40)
def test_thickness_and_bores_agree(drawn: tuple[Cases, Line, Construction, Criteria]) -> None:
    found = design_or_none(drawn)
    if found is None or found.construction.stress is None:
        return
    needed = found.construction.needed_thickness(found.sized.split.bores, found.load)
    step = found.construction.step
    if step == 0.0:
        assert found.sized.thickness == pytest.approx(needed, rel=1e-8)
    else:
        assert (found.sized.thickness >= needed - 1e-12).all()
        assert (found.sized.thickness <= needed + 2 * step).all()
    for plate in found.plates.plates:
        assert plate.thickness >= found.construction.needed_thickness(np.array([plate.bore]), found.load)[0] - 1e-12  # type: ignore[operator]


def test_more_plates_have_more_margin() -> None:
    margins = [
        design_set(let_down(), LINE, THICK, Criteria(**EXACT), plates=count).sized.margin for count in range(1, 13)
    ]
    assert margins == sorted(margins)
    assert len(set(margins)) == 12


def test_forced_number_of_plates() -> None:
    found = design_set(let_down(), LINE, None, Criteria(margin=0.1, **EXACT), plates=7)
    assert found.count == 7
    assert found.fewer is None
    assert found.sized.margin > designed().sized.margin


def test_spacing_is_six_diameters_unless_given() -> None:
    assert designed().length == pytest.approx(4 * 6 * 0.15405)
    close = design_set(let_down(), Line.in_units(pipe=154.05, spacing=500), None, Criteria(margin=0.1, **EXACT))
    assert close.length == pytest.approx(4 * 0.5)
    text = "the plates are 3.25 pipe diameters apart, less than 6: they interact, and their losses do not add up"
    assert [str(n) for n in close.notes if n.topic == "spacing"] == [text]
    assert not [n for n in designed().notes if n.topic == "spacing"]


def drills_around(bore: float) -> tuple[float, float]:
    """Steps of ISO 235 from memory; the bores here are from 14 mm."""
    step = 0.25e-3 if bore < 32e-3 else 0.5e-3 if bore < 50e-3 else 1e-3
    below = float(np.floor(bore / step))
    return step * below, step * (below + 1.0)


@pytest.mark.parametrize(("made", "margin", "kept"), [(THICK, 0.1, True), (None, 0.05, True), (None, 0.1, False)])
def test_drills_are_the_best_combination(made: Construction | None, margin: float, kept: bool) -> None:
    """Of all neighbouring drills no combination that keeps the margin comes nearer to the wanted flow.

    Where no combination keeps it, none has a better least margin, and a note says so.
    """
    cases = let_down(held="both")
    found, exact = (designed(cases, made, margin=margin, rounding=r) for r in ("nearest", "none"))
    assert found.count == exact.count
    ratings = [
        rate((made or Construction()).build(np.array(bores), found.load, LINE), cases, found.criteria)
        for bores in itertools.product(*(drills_around(bore) for bore in exact.sized.split.bores))
    ]
    away = [abs(float(np.log(r.flow[0] / cases.flow[0]))) for r in ratings]
    least = [float(r.margin.min()) for r in ratings]
    if kept:
        best = min(a for a, margin_ in zip(away, least, strict=True) if margin_ >= margin)
        assert found.rating.margin.min() >= margin - 1e-6
        assert abs(float(np.log(found.rating.flow[0] / cases.flow[0]))) == pytest.approx(best, rel=1e-4)
    else:
        assert max(least) < margin <= exact.sized.margin
        assert found.rating.margin.min() == pytest.approx(max(least), abs=1e-6)
    assert bool([note for note in found.notes if note.topic == "margin"]) is not kept


def test_drills_down_never_pass_more() -> None:
    cases = let_down(held="both")
    found, exact = designed(cases, rounding="down"), designed(cases)
    assert found.rating.flow[0] < cases.flow[0]
    for plate, bore in zip(found.plates.plates, exact.sized.split.bores, strict=True):
        assert plate.bore <= bore < plate.bore + 1e-3


def test_worn_set_passes_more_and_takes_less_at_the_same_flow() -> None:
    cases = let_down(flow=[100.0, 60.0])
    found = designed(cases)
    worn = rate(found.plates, cases, found.criteria, worn=0.03)
    assert (worn.passed > 1.05 * found.rating.passed).all()
    assert (worn.net_drop[:, 1] < found.rating.net_drop[:, 1]).all()


def test_one_worn_plate_is_the_ruin_of_the_others() -> None:
    """The first plate worn, with nothing else in the line: the others take more of the drop, at lower margins."""
    cases = let_down(held="both")
    found = designed(cases)
    worn = PlateSet(LINE, (*found.plates.worn(0.05).plates[:1], *found.plates.plates[1:]))
    rating = rate(worn, cases, found.criteria)
    assert (rating.margin[1:, 0] < found.rating.margin[1:, 0] - 0.01).all()
    assert rating.margin[0, 0] > found.rating.margin[0, 0]


def test_holes() -> None:
    made = Construction(holes=9)
    found = designed(made=made)
    assert [plate.holes for plate in found.plates.plates] == [9.0] * found.count
    assert found.rating.beta.max() < 1.0
    assert found.rating.margin[:, 0] == pytest.approx(found.sized.margin, abs=1e-6)


def test_governing_case_and_the_others() -> None:
    cases = let_down(flow=[100.0, 70.0], p1=[50.0, 50.0], p2=[3.0, 1.2], names=("full", "low sea"))
    full = designed(cases)
    assert full.cases.names[full.governing] == "full"
    low = design_set(cases, LINE, None, Criteria(margin=0.1, **EXACT), governing="low sea")
    assert low.count > full.count
    assert low.rating.flow[1] == pytest.approx(cases.flow[1], rel=1e-9)
    assert low.rating.short.tolist() == [True, False]


def test_a_case_that_falls_short_is_named() -> None:
    """Sized for the wide case; in the other one the plates take more than they should for its low inlet pressure."""
    cases = let_down(flow=[100.0, 99.0], p1=[50.0, 47.3], p2=[3.0, 0.4], names=("full", "low sea"))
    found = designed(cases)
    notes = [note for note in found.notes if note.topic == "margin"]
    assert notes
    assert all(note.cases == ("low sea",) for note in notes)
    last = found.count - 1
    worst = f"{found.rating.margin[last, 1]:.3g} in low sea"
    assert str(notes[-1]) == (
        f"plate {last + 1}: the margin to constant cavitation is {worst}, below the 0.1 asked for [low sea]"
    )


def test_flashing_after_the_last_plate() -> None:
    with pytest.raises(LowpointError) as error:
        designed(let_down(p1=50.0, p2=0.02))
    assert str(error.value) == (
        "case 'case 1': p2 must be above pv = 0.0233932 bar, got 0.02 bar. The liquid flashes at the outlet: staging "
        "cannot help; raise p2 or lower the temperature."
    )
    with pytest.raises(LowpointError, match="p2 must be above pv"):
        designed(let_down(p2=0.0233932))


def test_another_case_may_flash_and_says_so() -> None:
    cases = let_down(flow=[100.0, 99.9], p1=[50.0, 47.0], p2=[3.0, 0.02], names=("full", "broken vacuum"), held="both")
    found = designed(cases)
    flashing = [note for note in found.notes if note.topic == "flashing"]
    assert [str(note) for note in flashing] == [
        "the liquid flashes after the last plate: no plate cures that; raise the back-pressure or cool the liquid "
        "[broken vacuum]"
    ]
    assert found.rating.regime[-1, 1] == "flashing"


def test_more_than_twelve_plates() -> None:
    with pytest.raises(LowpointError) as error:
        designed(kind="incipient", margin=1.0)
    assert error.value.subject == "plate set"
    assert error.value.must == "at most 12 plates must do"
    assert error.value.got == "17 for 50 bar to 3 bar in case 'case 1', margin 1 to incipient cavitation"
    assert error.value.remedy.startswith(
        "Choose a valve with staged trim instead, or raise the back-pressure to about 5.4"
    )


def test_the_back_pressure_proposed_is_what_twelve_plates_reach() -> None:
    with pytest.raises(LowpointError) as error:
        designed(kind="incipient", margin=1.0)
    proposed = float(error.value.remedy.split("about ")[1].split(" bar")[0])
    assert designed(let_down(p2=proposed * 1.01), kind="incipient", margin=1.0).count == 12
    with pytest.raises(LowpointError, match="at most 12 plates"):
        designed(let_down(p2=proposed * 0.97), kind="incipient", margin=1.0)


def test_number_of_plates_out_of_range() -> None:
    for count in (0, 13):
        with pytest.raises(LowpointError) as error:
            design_set(let_down(), LINE, plates=count)
        assert str(error.value) == f"plate set: the number of plates must be 1 to 12, got {count}."


def test_a_pipe_too_small_for_the_flow() -> None:
    """At 60 m/s even a plate with hardly anything closed takes more than its share of a small drop."""
    with pytest.raises(LowpointError) as error:
        design_set(served(flow=4000.0, p1=3.0, p2=2.0), LINE, None, Criteria(kind="incipient", margin=0.1, **EXACT),
                   plates=12)  # fmt: skip
    assert str(error.value) == (
        "plate set: 12 plates must share the drop at equal margin, got plates that take more than their share with "
        "hardly anything closed. The flow is too fast: choose a larger pipe."
    )


def test_thickness_given_is_checked_where_stress_is_too() -> None:
    made = Construction.in_units(stress=120, support_diameter=180, thickness=12)
    found = designed(made=made)
    thin = [note for note in found.notes if "must be" in note.text and note.topic == "strength"]
    assert len(thin) == found.count
    needed = made.needed_thickness(np.array([found.plates.plates[0].bore]), 47e5)[0] * 1e3
    assert str(thin[0]) == f"plate 1: the plate is 12 mm thick and must be {needed:.6g} mm to carry 47 bar"


def test_the_split_is_that_of_the_rating() -> None:
    """The duty of the split and the march see one loss: the drops add up to p1 - p2."""
    found = designed(made=THICK)
    duty = Duty.of(found.cases, 0, 0.15405, 1.0, "constant")
    drops, _ = duty.curves(found.sized.split.bores, found.sized.bore_length)
    assert drops.sum() == pytest.approx(47e5, rel=1e-9)
    assert found.sized.split.drops == pytest.approx(drops, rel=1e-12)


def test_a_set_of_one_is_a_plate() -> None:
    cases = let_down(p1=3.4)
    one = designed(cases)
    assert one.count == 1
    assert one.fewer is None
    alone = rate_plate(one.plates.plates[0], LINE, cases, one.criteria)
    assert alone.margin.tolist() == one.rating.margin.tolist()


def test_saline_water_needs_the_same_plates_as_water() -> None:
    """Indices do not know the density; only the bores do: they follow flow times its root (for K of turbulent flow)."""
    heavy = Liquid(WATER.density * 1.21, WATER.pv, WATER.pc)
    light = Liquid(WATER.density, WATER.pv, WATER.pc)
    one = designed(served(light, flow=110.0, p1=50.0, p2=3.0))
    other = designed(served(heavy, flow=100.0, p1=50.0, p2=3.0))
    assert other.sized.split.bores == pytest.approx(one.sized.split.bores, rel=1e-9)
    assert other.sized.margin == pytest.approx(one.sized.margin, abs=1e-9)
