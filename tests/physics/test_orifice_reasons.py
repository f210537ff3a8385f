"""What LP_WHY says of orifice plates, stages, plate thickness and noise: every sentence, and when it is not said."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.cells import CellError, call, reason
from lowpoint.reference import as_data, as_page, as_text
from physics.sentences import Case, arguments, check, untold

MODULES = ("orifices", "stages", "plate_strength", "noise")

_NUM = CellError.NUM
_PLATE = {"bore": 50.0, "pipe": 100.0}
_WATER = {"pv": 0.023, "pc": 220.6, "density": 998.0}
_PRESSED = {"p1": 6.0, "p2": 5.0, **_WATER}
_FLOW = {**_PLATE, **_PRESSED}
_BORE = {"flow": 40.0, "pipe": 100.0, **_PRESSED}
_DROP = {"flow": 40.0, "density": 998.0, **_PLATE}
_LIMIT = {"limit": "incipient", **_PLATE}
_SPLIT = {"p1": 50.0, "p2": 3.0, "pv": 0.023}
_THICK = {"drop": 10.0, "support_diameter": 150.0, "bore": 60.0, "stress": 120.0}
_VALVE = {"flow": 110.0, "p1": 10.0, "p2": 8.0, "pv": 0.023, "density": 997.0, "sound_speed": 1400.0,
          "coefficient": 77.85, "fl": 0.92, "fd": 0.42, "valve_size": 100.0, "pipe_bore": 107.1, "pipe_wall": 3.6,
          "xfz": 0.3}  # fmt: skip

OPEN = "must be smaller than the pipe"
WHOLE = "holes must be a whole number"
ISO = "is that of ISO 5167-2"
IDELCHIK = "is Idelchik's"
BETWEEN = "lies between ISO 5167-2 and Idelchik's"
BEYOND = "below 12.5 mm or the pipe above 1000 mm"
REATTACHES = "may attach to the wall"
LONG = "the bore is long"
PLUGS = "easily plugged"
SLOW = "the pipe Reynolds number is below 5000"
STEEP = "the drop is above 2.5 bar"
FLASHES = "the liquid flashes after the plate"
GASES = "dissolved air comes out"
FREE = "where the jet leaves into the open"
CHOKES = "the flow is choked"

_BY_PLATE: list[tuple[dict[str, Any], CellError | None, str]] = [
    ({"bore": 100.0}, _NUM, OPEN),
    ({"holes": 4.0}, _NUM, OPEN),
    ({"holes": 2.5, "bore": 10.0}, _NUM, WHOLE),
    ({}, None, ISO),
    ({"holes": 3.0, "bore": 20.0}, None, IDELCHIK),
    ({"bore": 7.0}, None, IDELCHIK),
    ({"bore": 30.0, "pipe": 40.0}, None, IDELCHIK),
    ({"bore": 78.0}, None, BETWEEN),
    ({"bore": 24.0, "pipe": 48.0}, None, BETWEEN),
    ({"bore": 12.0}, None, BEYOND),
    ({"bore": 500.0, "pipe": 1100.0}, None, BEYOND),
    ({"bore_length": 20.0}, None, REATTACHES),
    ({"bore_length": 45.0}, None, LONG),
    ({"bore": 2.0, "pipe": 20.0}, None, PLUGS),
]
"""Plates whose bore is given."""

_BY_PRESSURES: list[tuple[dict[str, Any], CellError | None, str]] = [
    ({"p1": 1.5, "p2": 0.5}, None, GASES),
    ({"p1": 2.0, "p2": 1.013}, None, FREE),
    ({"p1": 6.0, "p2": 0.02}, None, FLASHES),
    ({"p1": 9.0, "p2": 6.0}, None, STEEP),
    ({"p1": 9.0, "p2": 2.0}, None, CHOKES),
]

_BY_SIZED: list[tuple[dict[str, Any], CellError | None, str]] = [
    ({"holes": 2.5}, _NUM, WHOLE),
    ({"flow": 3000.0}, _NUM, "no plate passes this flow at this drop"),
    ({"flow": 1e-5}, _NUM, "the bore would be below a thousandth of the pipe"),
    ({}, None, ISO),
    ({"holes": 4.0}, None, IDELCHIK),
    ({"flow": 250.0}, None, BETWEEN),
    ({"flow": 3.0}, None, BEYOND),
    ({"bore_length": 20.0}, None, REATTACHES),
    ({"bore_length": 60.0}, None, LONG),
    ({"flow": 0.05, "pipe": 20.0}, None, PLUGS),
    ({"viscosity": 200.0}, None, SLOW),
]
"""Bores that are the answer."""

CASES: list[Case] = [
    *[
        (name, {**base, **more}, error, said)
        for name, base in (("ORIFICE_LOSS", _PLATE), ("ORIFICE_DROP", _DROP), ("ORIFICE_FLOW", _FLOW),
                           ("ORIFICE_FL", _PLATE), ("ORIFICE_LIMIT", _LIMIT))
        for more, error, said in _BY_PLATE
    ],
    *[
        (name, {**base, **more}, error, said)
        for name, base in (("ORIFICE_FLOW", _FLOW), ("ORIFICE_BORE", {**_BORE, "flow": 150.0}))
        for more, error, said in _BY_PRESSURES
    ],
    *[("ORIFICE_BORE", {**_BORE, **more}, error, said) for more, error, said in _BY_SIZED],
    ("ORIFICE_LOSS", {**_PLATE, "reynolds": 4000.0}, None, SLOW),
    ("ORIFICE_LOSS", {"bore": 75.0, "pipe": 100.0, "reynolds": 8000.0}, None, SLOW),
    ("ORIFICE_DROP", {**_DROP, "viscosity": 200.0}, None, SLOW),
    ("ORIFICE_FLOW", {**_FLOW, "viscosity": 200.0}, None, SLOW),
    ("ORIFICE_DROP", {**_DROP, "flow": 120.0}, None, STEEP),
    ("ORIFICE_DROP", {**_DROP, "taps": "corner", "holes": 2.0}, _NUM, "for one sharp hole inside ISO 5167-2 only"),
    ("ORIFICE_DROP", {**_DROP, "taps": "radius", "bore": 8.0}, _NUM, "for one sharp hole inside ISO 5167-2 only"),
    ("ORIFICE_DROP", {**_DROP, "taps": "flange", "bore_length": 2.1}, _NUM, "for one sharp hole inside ISO 5167-2"),
    ("ORIFICE_LIMIT", _LIMIT, None, "sources disagree"),
    ("ORIFICE_LIMIT", {**_LIMIT, "bore": 15.0}, None, "the fit holds for bore over pipe 0.2 to 0.6"),
    ("ORIFICE_LIMIT", {**_LIMIT, "bore": 65.0}, None, "the fit holds for bore over pipe 0.2 to 0.6"),
    ("ORIFICE_LIMIT", {**_LIMIT, "bore_length": 40.0}, None, "the fit is for thin plates"),
    ("ORIFICE_LIMIT", {**_LIMIT, "limit": "constant", "bore_length": 10.0}, None, "the fit is for thin plates"),
    ("ORIFICE_LIMIT", {**_LIMIT, "bore": 10.0, "holes": 9.0}, None, "the fit is for one hole"),
    ("ORIFICE_LIMIT", {**_LIMIT, "limit": "choked"}, None, "the choked index is that of a cold liquid"),
    ("STAGES", {**_SPLIT, "target": 1.0}, _NUM, "the target must be above 1 in upstream form"),
    ("STAGES", {**_SPLIT, "target": 0.9}, _NUM, "the target must be above 1 in upstream form"),
    ("STAGES", {**_SPLIT, "target": 1.2, "form": "xf"}, _NUM, "the target must be above 1 in upstream form"),
    ("STAGES", {**_SPLIT, "target": 6.0}, None, "a valve with staged trim, or a higher back-pressure"),
    ("STAGES", {**_SPLIT, "target": 2.0}, None, "plates closer than 6 pipe diameters"),
    ("STAGE_PRESSURES", {**_SPLIT, "stages": 2.5}, _NUM, "stages must be a whole number"),
    ("STAGE_PRESSURES", {**_SPLIT, "stages": 3.0, "rule": "drop"}, None, "equal drops leave the last stage"),
    ("STAGE_PRESSURES", {**_SPLIT, "stages": 3.0}, None, "plates closer than 6 pipe diameters"),
    ("PLATE_THICKNESS", {**_THICK, "bore": 150.0}, _NUM, "the bore must be smaller than the support diameter"),
    ("PLATE_THICKNESS", {**_THICK, "drop": 800.0}, _NUM, "no thin plate carries this drop at this stress"),
    ("PLATE_THICKNESS", {**_THICK, "support": "clamped"}, None, "a clamped rim is seldom that stiff"),
    ("PLATE_THICKNESS", {**_THICK, "drop": 80.0}, None, "thicker than a quarter of its support's radius"),
    ("PLATE_THICKNESS", _THICK, None, "for one hole in the middle"),
    ("NOISE", {**_VALVE, "p2": 0.023}, _NUM, "the liquid flashes (xF at or above 1)"),
    ("NOISE", {**_VALVE, "flow": 1e-320}, _NUM, "the method has no answer for these values"),
    ("NOISE", {**_VALVE, "xfz": None}, None, "xfz was estimated"),
    ("NOISE", _VALVE, None, "for a globe valve"),
]  # fmt: skip

NAMES = sorted({case[0] for case in CASES})
ALWAYS = {"for one hole in the middle", "for a globe valve"}
"""Sentences that come with every answer."""


def _id(case: Case) -> str:
    return f"{case[0]}: {case[3]}"


@pytest.mark.parametrize("case", CASES, ids=_id)
def test_sentence(case: Case) -> None:
    check(case)


def test_every_sentence_has_a_case() -> None:
    assert untold(CASES, MODULES) == []


@pytest.mark.parametrize("name", NAMES)
def test_each_sentence_stays_away_from_other_answers(name: str) -> None:
    words = [reason(f"LP_{name}", arguments(f"LP_{name}", given)) for bare, given, *_ in CASES if bare == name]
    for said in {said for bare, *_, said in CASES if bare == name} - ALWAYS:
        assert any(said not in text for text in words), said


@pytest.mark.parametrize("name", NAMES)
def test_a_column_tells_each_row_its_own(name: str) -> None:
    """All cases of a function in one column from Python: the same sentences, whatever the neighbours leave out."""
    function = functions[f"LP_{name}"]
    cases = [given for bare, given, *_ in CASES if bare == name]
    columns = {
        p.name: np.array([given.get(p.name) for given in cases], object)
        for p in function.parameters if any(p.name in given for given in cases)
    }  # fmt: skip
    expected = [reason(f"LP_{name}", arguments(f"LP_{name}", given)) for given in cases]
    assert function.why(**columns).tolist() == expected


# --- which rule gave the loss ---------------------------------------------------------------------------------------

PLATES = [name for name in NAMES if name.startswith("ORIFICE")]


@pytest.mark.parametrize("name", PLATES)
def test_the_rule_is_always_told_and_told_once(name: str) -> None:
    """ISO 5167-2, Idelchik, or between: every answer of a function of plates names its one rule."""
    for bare, given, error, _ in CASES:
        if bare == name and error is None:
            words = reason(f"LP_{name}", arguments(f"LP_{name}", given))
            assert [rule in words for rule in (ISO, IDELCHIK, BETWEEN)].count(True) == 1, given
            assert words.count("rule: the loss of the thin plate") == 1


@pytest.mark.parametrize(("bore", "pipe", "rule"), [
    (10.0, 100.0, ISO), (75.0, 100.0, ISO), (15.0, 150.0, ISO), (25.0, 50.0, ISO), (9.99, 100.0, BETWEEN),
    (75.01, 100.0, BETWEEN), (24.99, 49.98, BETWEEN), (8.0, 100.0, IDELCHIK), (80.0, 100.0, IDELCHIK),
    (22.5, 45.0, IDELCHIK),
])  # fmt: skip
def test_the_rule_at_its_ends(bore: float, pipe: float, rule: str) -> None:
    """The ends of ISO 5167-2 are inside; Idelchik alone from beta 0.08 and 0.8 and pipes of 45 mm."""
    assert rule in functions["LP_ORIFICE_LOSS"].why(bore=bore, pipe=pipe)


def test_the_notes_are_no_cautions() -> None:
    """An ordinary plate inside the standard has a rule and a basis, and nothing to be careful about."""
    words = functions["LP_ORIFICE_LOSS"].why(bore=50.0, pipe=100.0)
    assert "caution" not in words
    assert words.startswith("rule: ")
    assert "basis: published (ISO 5167-2" in words


def test_the_reference_tells_rules_apart_from_cautions() -> None:
    data = as_data(functions["LP_ORIFICE_LOSS"])
    assert [text.partition(":")[0] for text in data["told"]] == ["rule"] * 3
    assert all("of the thin plate" not in text for text in data["cautions"])
    assert "\nrule: the loss of the thin plate is that of ISO 5167-2" in as_text(functions["LPU_ORIFICE_LOSS"])
    assert "\n- Rule: the loss of the thin plate is that of ISO 5167-2" in as_page()


# --- what is wrong input and what is not ----------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "given", "said"), [
    ("ORIFICE_FLOW", {**_FLOW, "p2": 7.0}, "p2 must be below p1 = 6 bar, got 7 bar"),
    ("ORIFICE_FLOW", {**_FLOW, "p2": -1.0}, "p2 must be above 0 bar, got -1 bar"),  # a drop beyond the inlet pressure
    ("ORIFICE_BORE", {**_BORE, "p2": 0.0}, "p2 must be above 0 bar"),
    ("ORIFICE_BORE", {**_BORE, "pv": 6.5}, "pv must be below p1 = 6 bar, got 6.5 bar. The liquid would boil"),
    ("ORIFICE_FLOW", {**_FLOW, "pc": 0.02}, "pv must be below pc"),
    ("ORIFICE_LIMIT", {**_LIMIT, "p1": 1.0, "pv": 2.0, "pc": 220.0}, "The liquid would boil"),
    ("ORIFICE_LOSS", {**_PLATE, "holes": 0.5}, "holes must be at least 1"),
    ("ORIFICE_DROP", {**_DROP, "density": 0.998}, "density must be "),
    ("STAGES", {"p1": 5.0, "p2": 1.0, "pv": 1.0, "target": 2.0}, "The liquid flashes at the outlet"),
    ("STAGES", {"p1": 5.0, "p2": 1.0, "pv": 2.0, "target": 2.0}, "pv must be below p2 = 1, got 2"),
    ("STAGE_PRESSURES", {"p1": 5.0, "p2": 1.0, "pv": 1.5, "stages": 2.0}, "raise p2 or lower the temperature"),
    ("STAGE_PRESSURES", {**_SPLIT, "stages": 0.5}, "stages must be at least 1"),
    ("STAGE_PRESSURES", {**_SPLIT, "stages": 101.0}, "stages must be at most 100"),
    ("PLATE_THICKNESS", {**_THICK, "allowance": -1.0}, "allowance must be at least 0 mm"),
    ("NOISE", {**_VALVE, "p2": 11.0}, "p2 must be below p1"),
])  # fmt: skip
def test_bad_input_is_a_number_error_with_its_reason(name: str, given: dict[str, Any], said: str) -> None:
    args = arguments(f"LP_{name}", given)
    assert call(f"LP_{name}", args) is _NUM
    assert said in reason(f"LP_{name}", args)


@pytest.mark.parametrize(("given", "lacking"), [
    ({"p1": 5.0}, "pv"), ({"p1": 5.0, "pv": 0.02}, "pc"), ({"pv": 0.02, "pc": 220.0}, "p1"),
])  # fmt: skip
def test_pressures_of_a_limit_come_together(given: dict[str, Any], lacking: str) -> None:
    args = arguments("LP_ORIFICE_LIMIT", {**_LIMIT, **given})
    assert call("LP_ORIFICE_LIMIT", args) is CellError.NA
    assert f"{lacking} (" in reason("LP_ORIFICE_LIMIT", args)


@pytest.mark.parametrize("p2", [2.0, 0.5, 0.02])
def test_a_plate_that_chokes_or_flashes_is_no_error(p2: float) -> None:
    """It has a choked flow, the same at every lower outlet pressure, and says so; so does the bore sized on it."""
    case = {**_FLOW, "p1": 9.0, "p2": p2}
    flow = functions["LP_ORIFICE_FLOW"](**case)
    assert flow == functions["LP_ORIFICE_FLOW"](**{**case, "p2": 1.0})
    assert CHOKES in functions["LP_ORIFICE_FLOW"].why(**case)
    sized = {k: v for k, v in case.items() if k != "bore"}
    assert functions["LP_ORIFICE_BORE"](flow=flow, **sized) == pytest.approx(50.0, rel=1e-12)
    assert CHOKES in functions["LP_ORIFICE_BORE"].why(flow=flow, **sized)


def test_free_discharge_names_the_share_that_its_flow_is() -> None:
    """Into the open the whole fall to the vena contracta is p1 - p2: Q = A s0 sqrt(2 dp/(rho (1 - s0^2))), FL Q."""
    case = {**_PLATE, "p1": 2.0, "p2": 1.013, **_WATER}
    k = functions["LP_ORIFICE_LOSS"](**_PLATE)
    s0 = 1.0 / (1.0 + k**0.5)
    free = 0.25 * np.pi * 0.1**2 * s0 * np.sqrt(2.0 * 0.987e5 / (998.0 * (1.0 - s0**2))) * 3600.0
    told = functions["LP_ORIFICE_FLOW"](**case) * functions["LP_ORIFICE_FL"](**_PLATE)
    assert told == pytest.approx(free, rel=1e-10)
    assert "LP_ORIFICE_FL times" in functions["LP_ORIFICE_FLOW"].why(**case)


def test_a_row_without_an_answer_does_not_slow_or_change_its_neighbours() -> None:
    """An open plate in the column leaves the other rows' flow to the bit."""
    viscosity = np.array([1.0, 1.0, 50.0])
    flows = functions["LP_ORIFICE_FLOW"](
        **_PRESSED, bore=np.array([50.0, 120.0, 50.0]), pipe=100.0, viscosity=viscosity
    )
    assert np.isnan(flows).tolist() == [False, True, False]
    assert flows[0] == functions["LP_ORIFICE_FLOW"](**_FLOW, viscosity=1.0)


@pytest.mark.parametrize("length", [1e7, 1e9])
def test_a_bore_of_impossible_length_has_a_loss(length: float) -> None:
    """tau ends at 2.4 diameters; beyond it friction alone grows (0.02 a diameter), to whatever length."""
    k = functions["LP_ORIFICE_LOSS"](bore=50.0, pipe=100.0, bore_length=length)
    assert k == pytest.approx(0.02 * length / 50.0 / 1.8744 * 30.163, rel=1e-3)  # Kt(0) f^2 at b 0.5 by hand: 1.8744
