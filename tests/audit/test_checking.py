"""Verdicts: what agrees, differs, cannot be checked or contradicts itself, against plain arithmetic or a source."""

from __future__ import annotations

import math

import pytest

from audit_arithmetic import Case, saturation
from audit_memory import planted, sheet, value, with_cases, with_values
from lowpoint.audit.auditing import audit_document, audit_sheet
from lowpoint.audit.model import Claim, Document, SheetReading, Value

COLD = [
    Case(flow, p1, p2, float(f"{saturation(20.0):.4f}"), 220.64, 998.2, fl, 80.0, 102.3, 102.3, 90.0, 50.0, 20.0)
    for flow, p1, p2, fl in ((20.0, 9.2, 5.0, 0.90), (55.0, 9.0, 4.0, 0.88), (110.0, 8.6, 3.2, 0.85))
]
"""A sea-water-side make-up valve of fresh water, index 2.1 to 1.6, not choked."""


def base() -> SheetReading:
    claims = planted(COLD, [])
    assert claims is not None
    return sheet(COLD, claims)


def judged(reading: SheetReading, quantity: str, case: str | None = "normal") -> list[Claim]:
    return [c for c in audit_sheet(reading) if (c.quantity, c.case) == (quantity, case)]


def one(*more: Value, quantity: str = "", case: str | None = "normal", reading: SheetReading | None = None) -> Claim:
    """The one judgement of what was put on the sheet last."""
    found = judged(with_values(reading or base(), *more), quantity or more[-1].quantity, case)
    assert len(found) == 1, [c.text for c in found]
    return found[0]


def said(words: str, *more: Value) -> Claim:
    return one(*more, value("statement", "normal", math.nan, 0, word=words))


# --- numbers ------------------------------------------------------------------------------------------------------
def test_a_correct_sheet_agrees_throughout() -> None:
    claims = audit_sheet(base())
    assert len(claims) == 1 + 3 * 8
    assert {c.verdict for c in claims} == {"agrees"}
    assert all(c.basis.endswith("every input stands on the sheet") for c in claims)


@pytest.mark.parametrize("share", [1.003, 0.997, 1.012, 0.988])
@pytest.mark.parametrize("quantity, unit", [("coefficient", "Kv"), ("dp_choked", "bar"), ("sigma", "")])
def test_half_a_per_cent_of_practice(share: float, quantity: str, unit: str) -> None:
    """Common practice: 0.5 % beyond rounding where every input stands on the sheet; FL with four digits here."""
    right = base().of(quantity, "normal")
    assert right is not None
    form = "upstream" if quantity == "sigma" else None
    printed = value(quantity, "normal", right.number * share, 4, unit, form=form)
    claim = one(value("fl", "normal", 0.88, 4), printed)
    assert claim.verdict == ("agrees" if abs(share - 1.0) < 0.005 else "differs")


def test_two_digits_of_fl_give_the_choked_drop_more_room() -> None:
    """FL 0.88 may be 0.875: 1.1 % of the choked drop."""
    right = base().of("dp_choked", "normal")
    assert right is not None
    assert one(value("dp_choked", "normal", right.number * 1.012, 4, "bar")).verdict == "agrees"
    assert one(value("dp_choked", "normal", right.number * 1.03, 4, "bar")).verdict == "differs"


def test_an_assumed_input_gives_more_room() -> None:
    """Without the pipes the reducers are unknown: 5 % for the coefficient, and the sheet is told so."""
    reading = with_values(base(), without=[("pipe_in", None), ("pipe_out", None)])
    claim = judged(reading, "coefficient")[0]
    assert claim.verdict == "agrees"
    assert "pipe_in assumed" in claim.basis
    assert claim.tolerance > 0.05 * claim.computed


def test_coarse_digits_give_more_room() -> None:
    """An index printed as 1.8 says no more than 1.75 to 1.85."""
    right = base().of("sigma", "normal")
    assert right is not None
    assert right.number == pytest.approx((9.0 - 0.0234) / 5.0, abs=5e-4)
    assert one(value("sigma", "normal", 1.8, 1, form="upstream")).verdict == "agrees"
    assert one(value("sigma", "normal", 1.9, 1, form="upstream")).verdict == "differs"


@pytest.mark.parametrize("form, number", [("downstream", 1.7953 - 1.0), ("xf", 1.0 / 1.7953)])
def test_an_index_in_its_own_form(form: str, number: float) -> None:
    """(9 - 0.0234)/5 = 1.7953; downstream one less, xF its inverse (definitions)."""
    assert one(value("sigma", "normal", number, 3, form=form)).verdict == "agrees"


def test_an_index_without_a_form_says_which_fits() -> None:
    claim = one(value("sigma", "normal", 0.795, 3), reading=with_cases(base(), ("normal",)), case="normal")
    assert claim.verdict == "agrees"
    assert "(p2-pv)/(p1-p2)" in claim.text
    assert "does not say in which form" in claim.text


def test_an_index_in_another_form_than_stated_differs() -> None:
    claim = one(value("sigma", "normal", 0.795, 3, form="upstream"), reading=with_cases(base(), ("normal",)))
    assert claim.verdict == "differs"
    assert claim.suspects[0].mistakes == ("index_downstream",)


def test_velocity_in_pipe_or_valve() -> None:
    """55 m3/h: 3.04 m/s in 80 mm, 1.859 m/s in 102.3 mm (continuity)."""
    in_valve, in_pipe = (55.0 / 3600.0 / (math.pi / 4.0 * d * d) for d in (0.080, 0.1023))
    assert one(value("velocity_in", "normal", in_pipe, 3, "m/s")).verdict == "agrees"
    claim = one(value("velocity_in", "normal", in_valve, 3, "m/s"))
    assert claim.verdict == "agrees"
    assert "in the valve's bore" in claim.text
    assert one(value("velocity_in", "normal", 2.4, 3, "m/s")).verdict == "differs"


def test_properties_are_claims_too() -> None:
    """Water at 90 C: 0.7018 bar (IAPWS-IF97), where the sheet says 20 C."""
    claim = one(value("pv", "normal", saturation(90.0), 4, "bar"))
    assert claim.verdict == "differs"
    assert claim.computed == pytest.approx(0.0234, abs=2e-4)
    rests = judged(with_values(base(), value("pv", "normal", saturation(90.0), 4, "bar")), "dp_choked")[0]
    assert "rests on the sheet's pv, which differs" in rests.basis


def test_pv_of_another_temperature_is_suspected() -> None:
    claim = one(value("t", "normal", 60.0, 1, "deg C"), value("pv", "normal", saturation(20.0), 4, "bar"))
    assert claim.verdict == "differs"
    assert ("pv_at_20_c",) in [s.mistakes for s in claim.suspects]


def test_beyond_fully_open() -> None:
    """Equal percentage: 1 + ln(C/C_rated)/ln R above 100 % where the valve is too small."""
    kv = base().of("coefficient", "maximum")
    assert kv is not None
    rated = value("rated", None, kv.number * 0.9, 2, "Kv")
    travel = 100.0 * (1.0 + math.log(1.0 / 0.9) / math.log(50.0))
    reading = with_values(base(), rated, value("travel", "maximum", travel, 1, "%"))
    verdicts = {c.verdict for c in judged(reading, "coefficient", "maximum")}
    assert verdicts == {"agrees", "contradicts"}
    assert judged(reading, "travel", "maximum")[0].verdict == "agrees"


def test_what_is_missing_is_named() -> None:
    reading = with_values(base(), without=[("flow", "normal"), ("coefficient", "normal")])
    claim = judged(reading, "velocity_in")[0]
    assert claim.verdict == "unchecked"
    assert "flow" in claim.missing
    assert math.isnan(claim.computed)


def test_a_number_for_all_cases_is_compared_where_it_fits() -> None:
    right = base().of("coefficient", "maximum")
    assert right is not None
    without = [("coefficient", case) for case in ("minimum", "normal", "maximum")]
    reading = with_values(base(), value("coefficient", None, right.number, 2, "Kv"), without=without)
    found = [c for c in audit_sheet(reading) if c.quantity == "coefficient"]
    assert [(c.case, c.verdict) for c in found] == [("maximum", "agrees")]


def test_noise_within_five_decibels() -> None:
    """Annex example 2 of IEC 60534-8-4:2015, 81.58 dB(A) (row NS-2-LpAe1m of ``valve_noise.csv``, marked L)."""
    values = [
        value("flow", "", 40.0 / 997.0 * 3600.0, 4, "m3/h"), value("p1", "", 10.0, 3, "bar"),
        value("p2", "", 6.5, 3, "bar"), value("pv", "", 0.0232, 5, "bar"), value("density", "", 997.0, 1, "kg/m3"),
        value("sound_speed", "", 1400.0, 0, "m/s"), value("coefficient", "", 90.0, 1, "Cv"), value("fl", "", 0.92, 2),
        value("fd", "", 0.42, 2), value("valve_size", None, 100.0, 0, "mm"), value("pipe_out", None, 107.1, 1, "mm"),
        value("pipe_wall", None, 3.6, 1, "mm"), value("xfz", "", 0.2543409, 7),
    ]  # fmt: skip
    for level, verdict in ((77.0, "agrees"), (87.0, "agrees"), (88.0, "differs"), (75.0, "differs")):
        reading = SheetReading("S", None, ("",), (*values, value("noise", "", level, 0, "dB(A)")))
        assert [c.verdict for c in audit_sheet(reading) if c.quantity == "noise"] == [verdict]


def test_round_inputs_are_not_taken_for_rounded_ones() -> None:
    """13 to 10 bar: 19.05 Kv for 33 m3/h of water, 33 sqrt(0.9991 0.9982/(0.9991 3)); 10 % more is no rounding."""
    values = [
        value("flow", "", 33.0, 0, "m3/h"), value("p1", "", 13.0, 0, "bar"), value("p2", "", 10.0, 0, "bar"),
        value("pv", "", 0.0234, 4, "bar"), value("pc", "", 220.64, 2, "bar"), value("density", "", 998.2, 1, "kg/m3"),
        value("fl", "", 0.9, 1), value("valve_size", None, 50.0, 0, "mm"), value("pipe_in", None, 50.0, 0, "mm"),
        value("pipe_out", None, 50.0, 0, "mm"),
    ]  # fmt: skip
    for kv, verdict in ((19.05, "agrees"), (20.96, "differs")):
        reading = SheetReading("S", None, ("",), (*values, value("coefficient", "", kv, 2, "Kv")))
        claim = next(c for c in audit_sheet(reading) if c.quantity == "coefficient")
        assert claim.computed == pytest.approx(33.0 * math.sqrt(998.2 / 999.1 / 3.0), rel=1e-4)
        assert claim.verdict == verdict


def test_one_plate_and_its_bore() -> None:
    """Net loss K rho v^2/2 with K of a thin sharp edge by Idelchik, in plain sums (1 % of bore is 4 % of drop)."""
    pipe, bore, density, flow = 0.1023, 0.04, 998.2, 60.0 / 3600.0
    f = (bore / pipe) ** 2
    loss = ((1.0 - f) + 0.707 * (1.0 - f) ** 0.375) ** 2 / f**2
    drop = loss * density * (flow / (math.pi / 4.0 * pipe**2)) ** 2 / 2.0 / 1e5
    values = [
        value("flow", "", 60.0, 3, "m3/h"), value("p1", "", 20.0, 3, "bar"), value("p2", "", 20.0 - drop, 4, "bar"),
        value("pv", "", 0.0234, 4, "bar"), value("pc", "", 220.64, 2, "bar"), value("density", "", 998.2, 1, "kg/m3"),
        value("pipe_in", None, 102.3, 2, "mm"),
    ]  # fmt: skip
    for stated, verdict in ((40.0, "agrees"), (43.0, "differs"), (37.0, "differs")):
        reading = SheetReading("S", None, ("",), (*values, value("bore", None, stated, 2, "mm")))
        claim = next(c for c in audit_sheet(reading) if c.quantity == "bore")
        assert claim.verdict == verdict, claim.text


# --- a change of verdict ------------------------------------------------------------------------------------------
def test_a_number_within_tolerance_that_turns_the_verdict() -> None:
    """Index 1.795: a limit of 1.798 lies between it and a stated 1.801, 0.3 % off."""
    limit = value("sigma_incipient", None, 1.798, 3, form="upstream")
    claim = one(limit, value("sigma", "normal", 1.801, 3, form="upstream"))
    assert claim.verdict == "differs"
    assert "incipient limit 1.798 lies between" in claim.text
    assert one(value("sigma", "normal", 1.801, 3, form="upstream")).verdict == "agrees"


# --- statements ---------------------------------------------------------------------------------------------------
def test_no_cavitation_needs_an_incipient_limit() -> None:
    claim = said("no cavitation")
    assert claim.verdict == "unchecked"
    assert claim.missing == ("sigma_incipient",)
    assert "not choked may still cavitate" in claim.text


@pytest.mark.parametrize("limit, verdict", [(1.5, "agrees"), (2.2, "differs")])
def test_no_cavitation_by_the_limit(limit: float, verdict: str) -> None:
    claim = said("no cavitation", value("sigma_incipient", None, limit, 2, form="upstream"))
    assert claim.verdict == verdict
    assert f"incipient {limit:.3g}" in claim.basis


def test_no_cavitation_by_a_limit_in_downstream_form() -> None:
    """0.9 downstream is 1.9 upstream, above the index 1.795."""
    assert said("no cavitation", value("sigma_incipient", None, 0.9, 2, form="downstream")).verdict == "differs"


def test_a_damage_limit_does_not_clear() -> None:
    assert said("no cavitation", value("sigma_damage", None, 1.2, 2, form="upstream")).verdict == "unchecked"


@pytest.mark.parametrize(
    "words, verdict",
    [("choked", "differs"), ("not choked", "agrees"), ("flashing", "differs"), ("no flashing", "agrees"),
     ("turbulent", "unchecked"), ("cavitating", "unchecked")],
)  # fmt: skip
def test_other_statements(words: str, verdict: str) -> None:
    """Drop 5.0 bar below the choked drop 0.88^2 (9 - 0.957 0.0234) = 6.95 bar; p2 = 4 bar far above pv."""
    assert said(words).verdict == verdict


# --- contradictions -----------------------------------------------------------------------------------------------
def contradiction(*more: Value, case: str | None = "normal", quantity: str = "") -> Claim:
    found = [c for c in audit_sheet(with_values(base(), *more)) if c.verdict == "contradicts"]
    found = [c for c in found if c.quantity == (quantity or more[-1].quantity) and c.case == case]
    assert len(found) == 1, [c.text for c in found]
    return found[0]


def added(*more: Value) -> list[Claim]:
    """Contradictions of a sheet on which these stand beside what is there."""
    reading = base()
    extended = SheetReading(reading.name, reading.tag, reading.cases, (*reading.values, *more),
                            atmosphere=reading.atmosphere, atmosphere_from="sheet")  # fmt: skip
    return [c for c in audit_sheet(extended) if c.verdict == "contradicts"]


def test_kv_and_cv_in_another_ratio_than_1_156() -> None:
    right = base().of("coefficient", "normal")
    assert right is not None
    assert added(value("coefficient", "normal", right.number * 1.156, 2, "Cv")) == []
    wrong = added(value("coefficient", "normal", right.number / 1.156, 2, "Cv"))
    assert [c.quantity for c in wrong] == ["coefficient"]
    assert "1.156" in wrong[0].text


def test_two_units_of_one_pressure() -> None:
    """9.0 bar is 130.5 psi."""
    assert added(value("p1", "normal", 130.5, 1, "psi")) == []
    assert [c.quantity for c in added(value("p1", "normal", 116.0, 1, "psi"))] == ["p1"]


def test_a_drop_that_is_not_the_difference() -> None:
    claim = contradiction(value("dp", "normal", 4.5, 2, "bar"))
    assert claim.computed == pytest.approx(5.0)
    assert added(value("dp", "normal", 5.0, 2, "bar")) == []


@pytest.mark.parametrize("unit, gauge, word", [("bar a", False, "absolute"), ("psia", False, "absolute"),
                                              ("bar g", True, "gauge")])  # fmt: skip
def test_a_difference_with_a_reference(unit: str, gauge: bool, word: str) -> None:
    number = 5.0 if "bar" in unit else 72.5
    found = [c for c in added(value("dp", "normal", number, 2, unit, gauge=gauge)) if "labelled" in c.text]
    assert [word in c.text for c in found] == [True]


def test_outlet_above_inlet() -> None:
    assert "not below the inlet pressure" in contradiction(value("p2", "normal", 9.5, 2, "bar")).text


def test_minimum_flow_above_normal() -> None:
    assert "above that of case normal" in contradiction(value("flow", "minimum", 70.0, 1, "m3/h"), case="minimum").text


def test_opening_that_falls_with_the_coefficient() -> None:
    assert "larger opening" in contradiction(value("travel", "minimum", 93.0, 1, "%"), case="minimum").text


def test_mass_and_volume_flow_that_do_not_match() -> None:
    """55 m3/h of 998.2 kg/m3 is 54.9 t/h."""
    assert added(value("mass_flow", "normal", 54.9, 1, "t/h")) == []
    assert [c.quantity for c in added(value("mass_flow", "normal", 60.0, 1, "t/h"))] == ["mass_flow"]


def test_a_negative_number_is_not_computed_with() -> None:
    claim = contradiction(value("p2", "normal", -4.0, 2, "bar"))
    assert "impossible" in claim.text or "absolute scale" in claim.text


# --- the document -------------------------------------------------------------------------------------------------
def test_a_document_with_its_questions_and_exit_codes() -> None:
    wrong = with_values(base(), value("coefficient", "normal", 40.0, 2, "Kv"))
    empty = SheetReading("Empty", None, ("",), ())
    right = audit_document(Document("a.xlsx", "xlsx", "", (base(),)))
    audit = audit_document(Document("a.xlsx", "xlsx", "", (base(), wrong, empty)))
    assert (right.exit_code, audit.exit_code) == (0, 1)
    assert right.questions == ((),)
    assert audit_document(Document("a.xlsx", "xlsx", "", (empty,))).exit_code == 2
    assert [len(claims) for claims in audit.claims] == [25, 25, 0]
    assert len(audit.questions[1]) == 1
    assert "You state for the required flow coefficient 40 Kv (Sheet1!C7; case normal)" in audit.questions[1][0]


def test_what_is_missing_is_asked_for_once() -> None:
    statements = [value("statement", case, math.nan, 0, word="no cavitation") for case in ("minimum", "normal")]
    audit = audit_document(Document("a.xlsx", "xlsx", "", (with_values(base(), *statements),)))
    asked = [q for q in audit.questions[0] if "Please give" in q]
    assert asked == ["LV-101: Please give, so that the sheet can be checked: the index at which cavitation begins."]
