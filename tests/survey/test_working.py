"""The working of a case: every step recomputes from its printed numbers, and comes to what the survey found."""

from __future__ import annotations

import math
import re
import tempfile
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lowpoint.survey import Survey, survey_list
from lowpoint.survey.assembling import blank_cases
from lowpoint.survey.model import Reading
from lowpoint.survey.outcome import Working
from lowpoint.survey.surveying import surveyed
from lowpoint.survey.working import working
from lowpoint.survey.workings.arithmetic import evaluate, printed, substituted
from lowpoint.survey.workings.layout import WIDTH, markdown, text_lines
from lowpoint.units import KV
from published.rows import read
from survey_lists import GOOD, HEADINGS, kestrel_rows, write_xlsx

from .working_cases import OTHER_HEADINGS, PLATES, VALVES, list_of
from .working_checks import check_working
from .working_checks import step_of as _step


@cache
def _survey(which: str) -> Survey:
    lists = {"valves": VALVES, "plates": PLATES} | {name: {name: row} for name, row in OTHER_HEADINGS.items()}
    with tempfile.TemporaryDirectory() as folder:
        if which == "bay":
            return survey_list(write_xlsx(Path(folder) / "list.xlsx", *kestrel_rows()))
        return survey_list(list_of(Path(folder) / "list.xlsx", lists[which]))


def _of(which: str, case: str) -> Working:
    survey = _survey(which)
    assert not survey.reading.problems
    return check_working(survey, survey.cases.case.tolist().index(case))


# --- every branch ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("case", VALVES)
def test_valves(case: str) -> None:
    made = _of("valves", case)
    assert made.verdict != "no answer"
    assert made.errors == ()
    assert _step(made, "verdict").value == made.verdict.split(", margin")[0]


@pytest.mark.parametrize("case", PLATES)
def test_plates(case: str) -> None:
    made = _of("plates", case)
    assert made.verdict != "no answer"
    assert _step(made, "verdict").value == made.verdict.split(", margin")[0]


@pytest.mark.parametrize("case", OTHER_HEADINGS)
def test_other_headings(case: str) -> None:
    assert _of(case, case).verdict != "no answer"


def test_kestrel_bay() -> None:
    survey = _survey("bay")
    assert survey.cases.count >= 100
    verdicts = {re.split("[ ,]", check_working(survey, place).verdict)[0] for place in range(survey.cases.count)}
    assert {"clear", "choked", "flashing"} <= verdicts


def test_the_branches_are_gone_through() -> None:
    """Symbols that only one branch writes."""
    for which, case, symbol in (
        ("valves", "reducers", "sumK"), ("valves", "viscous", "C_n"), ("valves", "laminar", "C_proof"),
        ("valves", "by table, choked", "w_choked"), ("valves", "by table", "FL_a"), ("valves", "estimate", "Cv"),
        ("valves", "table of xfz", "xFz_a"), ("valves", "noise", "L_pA"), ("valves", "flashing", "X"),
        ("valves", "submerged", "p_loss"), ("valves", "falling leg", "H_z"), ("valves", "tullis", "SSE"),
        ("plates", "thick and choked", "tau"), ("plates", "between the ranges", "w"), ("plates", "outside", "s0"),
        ("plates", "viscous", "Cd_v"), ("plates", "set", "p_after_2"), ("plates", "set, viscous", "K_thin_2_v"),
    ):  # fmt: skip
        assert _step(_of(which, case), symbol).value


def test_the_viscous_coefficient_meets_its_demand() -> None:
    """C FR(C) is the coefficient that the flow needs on the drop, by the equation that the search solves."""
    for case in ("viscous", "viscous, full trim", "laminar"):
        made = _of("valves", case)
        assert float(_step(made, "C_proof").value) == pytest.approx(float(_step(made, "C_t").value), rel=1e-6)


def test_the_proof_gives_the_flow_of_the_case() -> None:
    for case in ("line size", "reducers", "choked", "by table, choked"):
        made = _of("valves", case)
        assert float(_step(made, "Q_proof").value) == pytest.approx(float(_step(made, "Q").value), rel=1e-5)


def test_more_figures_where_pressures_nearly_cancel() -> None:
    assert _of("valves", "line size").figures == 7
    assert _of("valves", "saturated inlet").figures > 7


# --- where numbers come from -----------------------------------------------------------------------------------------


def test_inputs_name_their_cells_as_typed() -> None:
    made = _of("US units", "US units")
    assert re.fullmatch(r"given, List![A-Z]+2: 70 psi g", _step(made, "p1_g").source)
    assert re.fullmatch(r"given, List![A-Z]+2: 101000 lb/h", _step(made, "W").source)
    assert re.fullmatch(r"given, List![A-Z]+2: 110 Cv", _step(made, "C_rated").source)
    # 70 psi over the atmosphere of 900 ft: 4.826 + 0.981 bar (ISO 2533; 1 psi is 0.0689476 bar).
    assert float(_step(made, "p1").value) == pytest.approx(4.82633 + 0.98077, abs=2e-4)
    typical = _of("valves", "typical")
    assert _step(typical, "FL").source.startswith("typical value of the style 'globe single port")
    assert _step(typical, "pv").source == "IAPWS-95"
    assert dict(typical.citations)["IAPWS-95"].startswith("IAPWS R6-95")


def test_an_input_of_the_item_names_its_column() -> None:
    made = working(_survey("bay"), 0)
    assert re.fullmatch(r"given, List, column [A-Z]+ of the item: 400 mm", _step(made, "d").source)
    assert re.fullmatch(r"given, List![A-Z]+2: 500 m3/h", _step(made, "Q").source)


def test_us_units_stand_beside() -> None:
    survey = _survey("valves")
    made = working(survey, 0, "us")
    plain = working(survey, 0)
    assert [step.value for step in made.steps()] == [step.value for step in plain.steps()]
    # 5.8 bar are 84.12 psi (1 psi is 6894.757 Pa); 80 mm are 3.1496 in.
    assert _step(made, "p1").also == "84.122 psi"
    assert _step(made, "d").also == "3.1496 in"
    assert all(step.also == "" for step in plain.steps())


# --- errors ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changed", "reason", "has", "lacks"),
    [
        ({"Flow [m3/h]": None}, "Flow", "FF", "C"),
        ({"p2 [bar a]": 6.0}, "p2 must be below p1", "FF", "verdict"),
        ({"FL": None}, "FL", "C_free", "C"),
        ({"Incipient": 0.8}, "must be above 1", "C", ""),
        ({"D1 [mm]": 50}, "more than 1.1 times", "FF", "C"),
        ({"Liquid": "beer"}, "beer", "dp", "FF"),
        ({"Flow [m3/h]": 2000, "D1 [mm]": 300}, "no valve of this size passes the flow", "S", "C"),
    ],
)
def test_errors_are_told_and_what_can_be_worked_out_is(
    changed: dict[str, Any], reason: str, has: str, lacks: str, tmp_path: Path
) -> None:
    row = dict(zip(HEADINGS, GOOD, strict=True)) | changed
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())]))
    made = check_working(survey, 0)
    assert made.verdict == "no answer"
    assert any(reason in error for error in made.errors), made.errors
    symbols = {step.symbol for step in made.steps()}
    assert has in symbols
    assert lacks not in symbols
    assert "No verdict, because:" in list(text_lines(made))


def test_a_difference_from_the_survey_would_be_told() -> None:
    """The guard against ourselves works: a survey with another coefficient is contradicted by its working."""
    from dataclasses import replace

    survey = _survey("valves")
    wrong = replace(survey.findings, coefficient=survey.findings.coefficient * 1.01)
    said = working(replace(survey, findings=wrong), 0).cautions
    assert any("the working comes to coefficient" in caution for caution in said)


# --- published -------------------------------------------------------------------------------------------------------


def _published(row_id: str, tmp_path: Path, us: bool = False) -> Working:
    """A published example of valve sizing as a row of a list."""
    given = read("valve_sizing")[row_id].inputs
    if us:
        row = {"Tag": "x", "Flow [US gal/min]": given["Q_gpm"], "p1 [psi a]": given["p1_psia"],
               "p2 [psi a]": given["p2_psia"], "pv [psi a]": given["pv_psia"], "pc [psi a]": given["pc_psia"],
               "Density [lb/ft3]": given["rho_lb_ft3"], "FL": given["FL"], "Valve size [in]": given["d_in"],
               "D1 [in]": given["D_in"], "D2 [in]": given["D_in"]}  # fmt: skip
    else:
        row = {"Tag": "x", "Flow [m3/h]": given["Q_m3h"], "p1 [kPa a]": given["p1_kPa"], "p2 [kPa a]": given["p2_kPa"],
               "pv [kPa a]": given["pv_kPa"], "pc [kPa a]": given["pc_kPa"], "Density [kg/m3]": given["rho"],
               "FL": given["FL"], "Valve size [mm]": given["d_mm"], "D1 [mm]": given["D1_mm"],
               "D2 [mm]": given["D2_mm"]}  # fmt: skip
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())]))
    assert not survey.reading.problems
    return check_working(survey, 0)


def test_sizing_example_of_the_standard_free(tmp_path: Path) -> None:
    # IEC 60534-2-1, annex, example 1, as reproduced by the library fluids (mark L): FF 0.944, Kv 165.
    made = _published("SZ-002", tmp_path)
    table = read("valve_sizing")
    assert float(_step(made, "FF").value) == pytest.approx(table["SZ-001"].value, rel=1e-6)
    assert float(_step(made, "C").value) == pytest.approx(165.0, rel=0.003)
    assert float(_step(made, "C_free").value) > float(_step(made, "C_choked").value)


def test_reynolds_number_of_the_standards_example(tmp_path: Path) -> None:
    # The same example as reproduced by the library fluids (SZ-005, mark L): Rev 2.967e6, turbulent.
    given = read("valve_sizing")["SZ-005"]
    row = {"Tag": "x", "Flow [m3/h]": 360, "p1 [kPa a]": 680, "p2 [kPa a]": 220, "pv [kPa a]": 70.1, "FL": 0.9,
           "pc [kPa a]": 22120, "Density [kg/m3]": 965.4, "Valve size [mm]": 150, "D1 [mm]": 150, "Fd": 0.46,
           "Kinematic viscosity [mm2/s]": 0.326, "Trim": "full"}  # fmt: skip
    assert (given.inputs["nu_m2_s"], given.inputs["Fd"], given.value) == (3.26e-7, 0.46, 2967000.0)
    made = check_working(survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())])), 0)
    assert float(_step(made, "Rev_t").value) == pytest.approx(2.967e6, rel=0.002)
    assert _step(made, "FR_t").value == "1"
    assert float(_step(made, "C").value) == pytest.approx(165.0, rel=0.003)


@pytest.mark.parametrize(("form", "value"), [("upstream", 4.0), ("downstream", 3.0), ("xf", 0.25)])
def test_index_of_the_documented_example(form: str, value: float, tmp_path: Path) -> None:
    # p1 10, p2 8, pv 2 bar: 4 as in the library fluids citing ISA-RP75.23 (SG-001, mark L); the others by identity.
    row = {"Tag": "x", "Flow [m3/h]": 60, "p1 [bar a]": 10, "p2 [bar a]": 8, "pv [bar a]": 2, "pc [bar a]": 220.64,
           "Density [kg/m3]": 942, "FL": 0.9, "Form": form}  # fmt: skip
    made = check_working(survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())])), 0)
    assert float(_step(made, "sigma").value) == 4.0
    assert float(_step(made, "sigma" if form == "upstream" else "index").value) == value


def test_sizing_example_of_the_standard_choked(tmp_path: Path) -> None:
    # IEC 60534-2-1, annex, example 2, as reproduced by the library fluids (mark L): Kv 238, choked.
    made = _published("SZ-006", tmp_path)
    assert float(_step(made, "C").value) == pytest.approx(238.0, rel=0.003)
    assert _step(made, "choked?").value == "yes"


def test_sizing_example_with_reducers_in_us_units(tmp_path: Path) -> None:
    # Crane TP-410, examples 7.27 and 7.28, as in the documentation of the library fluids (mark L): Cv 79.94, chokes
    # at p2 = 20.8 psia.
    made = _published("SZ-020", tmp_path, us=True)
    assert 1.156 * float(_step(made, "C").value) == pytest.approx(79.94, rel=0.005)
    assert float(_step(made, "FP").value) < 1.0
    choked_at = 80.6 - float(_step(made, "dp_choked").value) * 1e5 / 6894.757
    assert choked_at == pytest.approx(20.8, abs=0.1)


def test_scale_example(tmp_path: Path) -> None:
    # A trade magazine of summer 2009 citing ISA-RP75.23.01 prints (2.59*1.29 - 1)*1.19 + 1; the equation gives 3.7859.
    row = dict(zip(HEADINGS, GOOD, strict=True)) | {
        "Incipient": 2.59, "Damage": None, "Test size [mm]": 80 / 1.29, "Size exponent": 1, "Pressure exponent": 1,
        "Test head [bar]": (5.8 - 0.0233932) / 1.19,
    }  # fmt: skip
    made = check_working(survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())])), 0)
    assert float(_step(made, "SSE").value) == pytest.approx(1.29, rel=1e-6)
    assert float(_step(made, "PSE").value) == pytest.approx(1.19, rel=1e-5)
    assert float(_step(made, "sigma_i_scaled").value) == pytest.approx(3.785909, rel=1e-5)


def test_pressure_effect_on_xfz(tmp_path: Path) -> None:
    # IEC 60534-8-4, as in the library fluids (SC-017, mark L): (6 bar/10 bar)^0.125 is 0.93814271.
    row = dict(zip(HEADINGS, GOOD, strict=True)) | {"p1 [bar a]": 10, "Incipient": None, "xFz": 0.4}
    made = check_working(survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())])), 0)
    assert float(_step(made, "xFz_p1").value) / 0.4 == pytest.approx(0.93814271, rel=1e-6)


def test_flashing_of_condensate(tmp_path: Path) -> None:
    # Steam tables (IAPWS-IF97, common practice): h(180 C) 763.2, hf 604.7, hfg 2133.4 kJ/kg at 4 bar.
    row = dict(zip(HEADINGS, GOOD, strict=True)) | {"Temperature [deg C]": 180, "p1 [bar a]": 12, "p2 [bar a]": 4.0}
    made = check_working(survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())])), 0)
    for symbol, value in (("h1", 763.2), ("hf", 604.7), ("hfg", 2133.4)):
        assert float(_step(made, symbol).value) == pytest.approx(value, abs=0.5), symbol
    assert float(_step(made, "X").value) == pytest.approx((763.2 - 604.7) / 2133.4, abs=3e-4)


# --- cases made at random --------------------------------------------------------------------------------------------

shares = st.floats(0.0, 1.0)


def _between(share: float, low: float, high: float) -> float:
    return low * (high / low) ** share


@settings(max_examples=150)
@given(
    st.tuples(*[shares] * 9),
    st.sampled_from(["upstream", "downstream", "xf"]),
    st.sampled_from(["isa", "upstream", "tullis"]),
    st.booleans(),
    st.booleans(),
)
def test_any_valve(share: tuple[float, ...], form: str, method: str, viscous: bool, reduced: bool) -> None:
    p1 = _between(share[0], 1.5e5, 2e7)
    pv = p1 * _between(share[1], 1e-4, 0.98)
    size = _between(share[4], 0.02, 0.6)
    limit = _between(share[6], 1.3, 6.0)
    stated = {"upstream": limit, "downstream": limit - 1.0, "xf": 1.0 / limit}[form]
    cases = blank_cases(1).changed(
        tag=np.array(["x"], object), sheet=np.array(["List"], object), p1=p1, pv=pv, pc=max(22.064e6, 1.2 * pv),
        p2=p1 * (1.0 - _between(share[2], 1e-3, 0.95)), density=_between(share[3], 500.0, 1300.0), valve_size=size,
        pipe_in=size * (1.0 + share[5]) if reduced else np.nan, pipe_out=size * (1.0 + share[3]) if reduced else np.nan,
        flow=size * size * _between(share[7], 0.03, 12.0), fl=_between(share[8], 0.45, 0.99), fd=0.46,
        trim=np.array(["reduced"], object), form=np.array([form], object), method=np.array([method], object),
        incipient=stated, size_ref=0.08, head_ref=4e5, size_exponent=0.1, head_exponent=0.12,
        viscosity=_between(share[1], 1e-4, 3.0) if viscous else np.nan, rated=size * size * 0.4,
        characteristic=np.array(["linear"], object), rangeability=50.0,
    )  # fmt: skip
    check_working(surveyed(cases, READING), 0)


@settings(max_examples=80)
@given(st.tuples(*[shares] * 6), st.integers(1, 4), st.booleans(), st.booleans())
def test_any_plates(share: tuple[float, ...], count: int, long: bool, viscous: bool) -> None:
    p1 = _between(share[0], 2e5, 1e7)
    pipe = _between(share[1], 0.03, 0.5)
    bores = [pipe * (0.12 + 0.75 * share[2]) * (1.0 + 0.04 * plate) for plate in range(count)]
    cases = blank_cases(1).changed(
        tag=np.array(["x"], object), kind=np.array(["plates" if count > 1 else "orifice"], object),
        sheet=np.array(["List"], object), p1=p1, p2=p1 * (1.0 - _between(share[3], 0.02, 0.95)),
        pv=p1 * _between(share[4], 1e-4, 0.7), pc=22.064e6, density=950.0, pipe_in=pipe,
        flow=pipe * pipe * _between(share[5], 0.1, 8.0), bore=bores[0] if count == 1 else np.nan,
        bore_length=0.6 * bores[0] if long else np.nan, viscosity=_between(share[5], 1e-4, 0.05) if viscous else np.nan,
    )  # fmt: skip
    if count > 1:
        words = np.empty(1, object)
        words[0] = tuple(bores)
        cases = cases.changed(bores=words)
    check_working(surveyed(cases, READING), 0)


READING = Reading("", "csv", (), (), (), (), ())


# --- the language and the layout -------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("x", "text"),
    [(5.8, "5.8"), (0.1 + 0.2, "0.3"), (12345678.0, "12345680"), (3.26e-7, "3.26e-7"), (-1.5, "-1.5"), (0.0, "0"),
     (1e13, "1e13"), (math.nan, "no answer"), (0.00012345678, "0.0001234568")],
)  # fmt: skip
def test_printed(x: float, text: str) -> None:
    assert printed(x) == text


def test_the_language() -> None:
    values = {"a": "2", "b": "-3", "K1": "0.5"}
    assert substituted("a^2 + b*sqrt(K1) + 1e-3", values) == "2^2 + (-3)*sqrt(0.5) + 1e-3"
    assert evaluate("-2^2") == -4.0
    assert evaluate("ln(10)/log10(10)") == pytest.approx(2.302585, rel=1e-6)  # common practice
    assert evaluate("2 <= 1.9") is False
    assert math.isnan(evaluate("sqrt(0 - 1)"))
    with pytest.raises(TypeError, match="not in the language"):
        evaluate("abs(1)")


@pytest.mark.parametrize("which", ["valves", "plates"])
def test_lines_fit_a_terminal(which: str) -> None:
    survey = _survey(which)
    for place in range(survey.cases.count):
        made = working(survey, place, "us")
        lines = list(text_lines(made))
        assert max(map(len, lines)) <= WIDTH
        text = "\n".join(lines)
        assert all(step.value in text for step in made.steps())
        assert next(iter(markdown(made))).startswith("# ")


def test_markdown_is_inert(tmp_path: Path) -> None:
    row = dict(zip(HEADINGS, GOOD, strict=True)) | {"Service": "a | b <img src=x> `c`"}
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", list(row), [list(row.values())]))
    title = next(iter(markdown(working(survey, 0))))
    assert "a \\| b \\<img src=x\\> \\`c\\`" in title


def test_constants_are_named() -> None:
    # IEC 60534-2-1 for Kv, m3/h, mm, m2/s, as in the library fluids: N2 1.6e-3, N4 7.07e-2, N32 140; rho0 999.1 kg/m3.
    made = _of("valves", "viscous")
    assert [(step.symbol, step.value) for step in dict(made.sections)["Constants"]] == [
        ("rho0", "999.1"), ("N2", "0.0016"), ("N4", "0.0707"), ("N32", "140"), ("pi", "3.141593")]  # fmt: skip
    assert "N2" not in {step.symbol for step in _of("valves", "line size").steps()}


def test_kv_is_the_unit_of_the_coefficient() -> None:
    made = _of("valves", "reducers")
    survey = _survey("valves")
    place = survey.cases.case.tolist().index("reducers")
    assert float(_step(made, "C").value) == pytest.approx(float(survey.findings.coefficient[place]) / KV, rel=1e-6)
