"""Margins and shares under uncertain inputs, against plain loops over the draws; tolerances as they are read."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from itertools import product
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lowpoint import functions
from lowpoint.errors import LowpointError
from lowpoint.survey import survey_list
from lowpoint.survey.assembling import blank_cases
from lowpoint.survey.calculating import calculate
from lowpoint.survey.completing import complete
from lowpoint.survey.model import Cases, Survey, TravelTable
from lowpoint.survey.moving import movable
from lowpoint.survey.outcome import Sensitivity
from lowpoint.survey.proving import proof, provable
from lowpoint.survey.sensing import INPUTS, SEED, draws_of, sense
from lowpoint.survey.staying import share_words, stay_words
from lowpoint.survey.tolerances import DEFAULTS, combined, parse_tolerance
from lowpoint.survey.trying import tried
from lowpoint.units import KV
from survey_lists import write_csv

BASE = {"Tag": "21-FCV-110", "Flow [m3/h]": 46, "p1 [bar a]": 5.8, "p2 [bar a]": 4.2, "FL": 0.9}
GIVEN = {"pv [bar a]": 0.0234, "pc [bar a]": 220.64, "Density [kg/m3]": 998}
WATER = {"Liquid": "water", "Temperature [deg C]": 80}


def _survey(tmp_path: Path, *rows: dict[str, Any]) -> Survey:
    headings = list(dict.fromkeys(key for row in rows for key in row))
    cells = [[row.get(key) for key in headings] for row in rows]
    survey = survey_list(write_csv(tmp_path / "list.csv", headings, cells))
    assert survey.reading.problems == ()
    assert all(regime is not None for regime in survey.findings.regime)
    return survey


def _sense(survey: Survey, *texts: str, **options: Any) -> Sensitivity:
    tolerances = combined(parse_tolerance(text) for text in texts)
    return sense(survey.cases, survey.findings, tolerances, **options)


def _cell(name: str, **values: Any) -> float:
    """One worksheet function of plain numbers."""
    return float(np.asarray(functions[name](**values)).item())


# --- against a plain loop over the draws ------------------------------------------------------------------------------


def _plain_valve(moves: dict[str, float], limit: float | None) -> tuple[float, bool]:
    """Margin and verdict of BASE and GIVEN at line size; sigma and FL^2 (p1 - FF pv) of IEC 60534-2-1 by hand."""
    p1, p2 = 5.8 * (1 + 0.01 * moves["p1"]), 4.2 * (1 + 0.01 * moves["p2"])
    pv, fl = 0.0234 * (1 + 0.02 * moves["pv"]), 0.9 * (1 + 0.05 * moves["fl"])
    sigma = (p1 - pv) / (p1 - p2)
    choking = (p1 - pv) / (fl * fl * (p1 - (0.96 - 0.28 * math.sqrt(pv / 220.64)) * pv))
    against = choking if limit is None else limit
    return sigma / against - 1.0, sigma > max(against, choking)


@pytest.mark.parametrize("limit", [3.5, 3.6, 3.7])
def test_a_plain_loop_over_the_draws_gives_the_same(limit: float, tmp_path: Path) -> None:
    survey = _survey(tmp_path, BASE | GIVEN | {"Incipient": limit})
    found = sense(survey.cases, survey.findings, every=True)
    draws = draws_of(200, SEED)
    plain = [_plain_valve({name: float(draws[name][0, i]) for name in INPUTS}, limit) for i in range(200)]
    assert 0.0 < found.stays[0] < 1.0
    assert found.stays[0] == pytest.approx(np.mean([passes for _, passes in plain]), abs=1e-12)
    corners = [_plain_valve(dict(zip(INPUTS, ends, strict=True)), limit)[0] for ends in product((-1.0, 1.0), repeat=7)]
    assert found.low[0] == pytest.approx(min(corners), rel=1e-9)
    assert found.high[0] == pytest.approx(max(corners), rel=1e-9)
    still = dict.fromkeys(INPUTS, 0.0)
    spans = {name: abs(_plain_valve(still | {name: 1.0}, limit)[0] - _plain_valve(still | {name: -1.0}, limit)[0])
             for name in INPUTS}  # fmt: skip
    largest = max(spans, key=lambda name: spans[name])
    assert found.dominant[0] == largest
    assert largest in ("p1", "p2")
    assert found.swing[0] == pytest.approx(spans[largest], rel=1e-9)


FITTED = {
    "Tag": "33-TCV-204", "Flow [t/h]": 88, "p1 [bar a]": 3.4, "p2 [bar a]": 1.6, "FL": 0.8, "DN": 80, "D1 [mm]": 150,
    "D2 [mm]": 150, "Kvs": 80, "Test size [mm]": 50, "Size exponent": 0.1, "Test head [bar]": 2,
    "Pressure exponent": 0.2, "Method": "upstream",
}  # fmt: skip


def _fitted_draw(moves: dict[str, float], damage: float) -> bool:
    """FITTED under one draw, by worksheet functions on plain numbers: hot water, mass flow, reducers, scaled limit."""
    t = 80.0 + moves["t"]
    pv, pc = _cell("LP_VAPOUR_PRESSURE", fluid="water", t=t), _cell("LP_CRITICAL_PRESSURE", fluid="water")
    density = _cell("LP_DENSITY", fluid="water", t=t, p=3.4)
    p1, p2 = 3.4 * (1 + 0.01 * moves["p1"]), 1.6 * (1 + 0.01 * moves["p2"])
    flow, fl = 88e3 * (1 + 0.02 * moves["flow"]) / density, 0.8 * (1 + 0.05 * moves["fl"])
    fittings = {"valve_size": 80.0, "pipe_in": 150.0, "pipe_out": 150.0}
    state = {"p1": p1, "pv": pv, "pc": pc, "fl": fl}
    kv = _cell("LP_COEFFICIENT", flow=flow, p2=p2, density=density, **state, **fittings)
    sigma = _cell("LP_SIGMA", p1=p1, p2=p2, pv=pv)
    drop = _cell("LP_CHOKED_DROP", coefficient=kv, **state, **fittings)
    scaled = _cell("LP_SIGMA_SCALED", limit=damage, size=80.0, size_ref=50.0, head=p1 - pv, head_ref=2.0,
                   size_exponent=0.1, head_exponent=0.2, method="upstream")  # fmt: skip
    limit = _cell("LP_LIMIT_INSTALLED", limit=scaled, coefficient=kv, **fittings)
    return sigma > limit and p1 - p2 < drop and p2 > pv and kv <= 80.0


@pytest.mark.parametrize("damage", [1.4, 1.42])
def test_worksheet_functions_draw_by_draw_give_the_same(damage: float, tmp_path: Path) -> None:
    survey = _survey(tmp_path, FITTED | WATER | {"Damage": damage})
    found = sense(survey.cases, survey.findings, draws=60, every=True)
    draws = draws_of(60, SEED)
    plain = [_fitted_draw({name: float(draws[name][0, i]) for name in INPUTS}, damage) for i in range(60)]
    assert 0.02 < np.mean(plain) < 0.98
    assert found.stays[0] == pytest.approx(np.mean(plain), abs=1e-12)


def test_pv_and_density_follow_the_temperature(tmp_path: Path) -> None:
    """Direct calls of the properties against the parabolas between the ends of the tolerance."""
    for t, liquid, span in ((1.0, "water", 1.0), (80.0, "water", 1.0), (150.0, "water", 20.0),
                            (35.0, "sea water", 5.0), (20.0, "toluene", 10.0)):  # fmt: skip
        row = BASE | {"p1 [bar a]": 20, "p2 [bar a]": 18, "Liquid": liquid, "Temperature [deg C]": t,
                      "Salinity [g/kg]": 40}  # fmt: skip
        if liquid != "sea water":
            row.pop("Salinity [g/kg]")
        survey = _survey(tmp_path, row)
        moving = movable(survey.cases, combined([parse_tolerance(f"t={span}K")]))
        u = np.linspace(-1.0, 1.0, 17)
        drawn, _ = moving.moved({"t": u[None]})
        more = {"salinity": np.full(17, 40.0)} if liquid == "sea water" else {}
        kind: Any = {"fluid": np.full(17, liquid, object), "t": t + span * u, **more}
        # ln pv as promised by the module: 1e-6 for 1 K, 1e-4 for 20 K; the density leaves out its pressure's part.
        allowed = 1e-5 if span == 1.0 else 3e-4
        inside = kind["t"] > 0.05
        pv = np.asarray(functions["LP_VAPOUR_PRESSURE"](**kind)) * 1e5
        density = np.asarray(functions["LP_DENSITY"](**kind, p=np.full(17, 20.0)))
        assert drawn.pv[inside] == pytest.approx(pv[inside], rel=allowed)
        assert drawn.density[inside] == pytest.approx(density[inside], rel=allowed)


def test_below_freezing_the_vapour_pressure_goes_on(tmp_path: Path) -> None:
    survey = _survey(tmp_path, BASE | {"Liquid": "water", "Temperature [deg C]": 0.4, "Incipient": 2.1})
    found = sense(survey.cases, survey.findings, every=True)
    assert (found.stays[0], found.unanswered[0]) == (1.0, 0.0)


# --- every kind of item: the lean verdict of draws is that of the survey ----------------------------------------------


def _mixed(count: int = 40, seed: int = 5) -> Cases:
    rng = np.random.default_rng(seed)
    kind = np.array(["valve", "orifice", "plates", "valve", "valve"], object)[np.arange(count) % 5]
    p1 = rng.uniform(3e5, 2e6, count)
    cases = blank_cases(count).changed(
        tag=np.array([f"T{i}" for i in range(count)], object), kind=kind, p1=p1, p2=p1 * rng.uniform(0.2, 0.9, count),
        pv=np.nan, fluid="water", t=293.15 + rng.integers(0, 40, count), flow=rng.uniform(5, 60, count) / 3600,
        fl=np.where((kind == "valve"), rng.uniform(0.6, 0.95, count), np.nan), valve_size=0.08, pipe_in=0.1,
        rated=90 * KV, incipient=np.where(rng.random(count) < 0.4, 1.9, np.nan), constant=np.where(kind == "valve", 1.5,
        np.nan), keep=rng.choice(np.array(["incipient", "choked", None], object), count),
    )  # fmt: skip
    third = (np.arange(count) % 5) == 3
    bores = np.full(count, None, object)
    for place in np.flatnonzero(kind == "plates"):
        bores[place] = (0.042, 0.048, 0.056)
    travel = np.linspace(0.1, 1.0, 7)
    table = TravelTable("A", travel, coefficient=90 * KV * 40 ** (travel - 1), fl=0.95 - 0.2 * travel)
    return complete(replace(
        cases, bores=bores, bore=np.where(kind == "orifice", 0.045, np.nan), fl=np.where(third, np.nan, cases.fl),
        table=np.where(third, "A", np.array(None, object)), tables={"A": table}, source={},
        viscosity=np.where(np.arange(count) % 5 == 4, 0.05, np.nan), fd=np.full(count, 0.46),
        trim=np.full(count, "full", object),
    ))  # fmt: skip


def test_the_verdict_of_a_draw_is_that_of_the_survey_for_every_kind() -> None:
    cases = _mixed()
    findings = calculate(cases)
    moving = movable(cases, combined([parse_tolerance("fl=0")]))
    draws = draws_of(30, 1)
    drawn, factor = moving.moved(draws)
    assert np.all(factor == 1.0)
    lean = tried(drawn, np.repeat(findings.keep, 30), factor)
    full = calculate(drawn)
    answered = np.array([word is not None for word in full.regime]) & (full.keep == np.repeat(findings.keep, 30))
    assert answered.mean() > 0.9
    assert np.array_equal(lean.passes[answered], ~full.fails[answered])
    assert lean.margin[answered] == pytest.approx(full.margin[answered], rel=1e-9, abs=1e-9, nan_ok=True)


def test_without_tolerances_nothing_moves() -> None:
    cases = _mixed()
    findings = calculate(cases)
    still = combined(parse_tolerance(f"{name}=0") for name in INPUTS)
    found = sense(cases, findings, still, draws=3, every=True)
    answered = np.array([word is not None for word in findings.regime])
    assert answered.mean() > 0.9
    assert found.stays[answered] == pytest.approx(1.0 - findings.fails[answered])
    for margin in (found.low, found.high):
        assert margin[answered] == pytest.approx(findings.margin[answered], rel=1e-9, abs=1e-9)
    assert all(word is None for word in found.dominant)


def test_a_table_by_travel_scales_its_recovery_factor() -> None:
    cases = _mixed().take(np.array([3]))
    moving = movable(cases, DEFAULTS)
    drawn, _ = moving.moved({"fl": np.array([[-1.0, 0.0, 1.0]])})
    # The opening is that of the stated table; its FL moves by the default 5 %.
    assert drawn.fl / drawn.fl[1] == pytest.approx([0.95, 1.0, 1.05])
    assert drawn.fl[1] == pytest.approx(calculate(cases).fl[0])


def test_a_parted_leg_keeps_its_outlet_at_the_vapour_pressure(tmp_path: Path) -> None:
    place = {"p2 [bar a]": None, "Outlet into": "falling leg", "Rise to the place [m]": -12, "Atmosphere [bar]": 1.0}
    survey = _survey(tmp_path, BASE | WATER | place)
    assert survey.cases.p2[0] == survey.cases.pv[0]
    found = sense(survey.cases, survey.findings, every=True)
    assert survey.findings.fails[0]
    assert found.stays[0] == 0.0


def test_the_outlet_of_a_place_moves_like_any_pressure(tmp_path: Path) -> None:
    place = {"p2 [bar a]": None, "Outlet into": "submerged", "Rise to the place [m]": 6, "Atmosphere [bar]": 1.0}
    survey = _survey(tmp_path, BASE | WATER | place)
    drawn, _ = movable(survey.cases, DEFAULTS).moved({"p2": np.array([[-1.0, 1.0]])})
    assert drawn.p2 / survey.cases.p2[0] == pytest.approx([0.99, 1.01])


def test_draws_whose_pressures_contradict_count_as_failing(tmp_path: Path) -> None:
    survey = _survey(tmp_path, BASE | GIVEN | {"p2 [bar a]": 5.77, "Incipient": 2.1})
    found = sense(survey.cases, survey.findings)
    draws = draws_of(200, SEED)
    turned = np.mean(5.77 * (1 + 0.01 * draws["p2"][0]) >= 5.8 * (1 + 0.01 * draws["p1"][0]))
    assert found.unanswered[0] == pytest.approx(turned)
    assert 0.2 < turned < 0.6
    assert found.stays[0] == pytest.approx(1.0 - turned)
    assert "of draws had no answer" in stay_words(found, 0, survey.findings)


# --- the same numbers whatever else is in the list --------------------------------------------------------------------


def _columns(found: Sensitivity) -> list[Any]:
    return [found.low, found.high, found.stays, found.swing, found.unanswered, found.proven]


def test_a_case_is_the_same_in_any_company() -> None:
    cases = _mixed(60)
    whole = sense(cases, calculate(cases), every=True, draws=50)
    order = np.random.default_rng(2).permutation(60)[:37]
    part = cases.take(order)
    found = sense(part, calculate(part), every=True, draws=50)
    for mine, others in zip(_columns(found), _columns(whole), strict=True):
        assert np.array_equal(mine, others[order], equal_nan=mine.dtype.kind == "f")
    assert found.dominant.tolist() == whole.dominant[order].tolist()


def test_a_seed_gives_the_same_and_another_does_not() -> None:
    cases = _random_cases(7, 100)
    findings = calculate(cases)
    first, again, other = (sense(cases, findings, every=True, draws=40, seed=seed) for seed in (3, 3, 4))
    assert np.array_equal(first.stays, again.stays, equal_nan=True)
    assert not np.array_equal(first.stays, other.stays, equal_nan=True)
    assert np.array_equal(draws_of(20, 3)["p1"], draws_of(40, 3)["p1"][:, :20])
    wrong: tuple[dict[str, Any], ...] = ({"draws": 0}, {"draws": 10**6}, {"seed": -1})
    for options in wrong:
        with pytest.raises(LowpointError, match="must"):
            sense(cases, findings, **options)


def test_progress_counts_to_the_end() -> None:
    cases = _mixed()
    told: list[tuple[int, int]] = []
    sense(cases, calculate(cases), progress=lambda done, of: told.append((done, of)), every=True)
    assert told[-1] == (40, 40)


# --- what is shown without drawing ------------------------------------------------------------------------------------


def _random_cases(seed: int, count: int = 60) -> Cases:
    """Valves and plates of every sort that a proof takes, many of them close to a limit."""
    rng = np.random.default_rng(seed)

    def some(values: Any, share: float = 0.5) -> Any:
        return np.where(rng.random(count) < share, values, np.nan)

    kind = np.where(rng.random(count) < 0.8, "valve", "orifice").astype(object)
    size = rng.choice([0.05, 0.08, 0.15], count)
    p1 = rng.uniform(2e5, 3e6, count)
    fitted = np.where(kind == "valve", some(size * rng.uniform(0.95, 2.0, count)), 0.1)
    hot = rng.random(count) < 0.5
    cases = blank_cases(count).changed(
        kind=kind, p1=p1, p2=p1 * rng.uniform(0.1, 0.95, count), flow=rng.uniform(5, 150, count) / 3600,
        fl=np.where(kind == "valve", rng.uniform(0.5, 0.99, count), np.nan), valve_size=size, pipe_in=fitted,
        rated=some(rng.uniform(40, 200, count) * KV), fluid=np.where(hot, "water", np.array(None, object)),
        pv=np.where(hot, np.nan, p1 * rng.uniform(0.0, 0.6, count)), pc=np.where(hot, np.nan, 2.2064e7),
        t=np.where(hot, rng.uniform(274.0, 390.0, count), np.nan), density=np.where(hot, np.nan, 950.0),
        incipient=some(rng.uniform(1.2, 4.0, count)), constant=some(rng.uniform(1.1, 2.5, count)),
        damage=some(rng.uniform(1.1, 2.0, count)), size_ref=some(0.05), size_exponent=0.1, head_ref=some(4e5),
        head_exponent=some(rng.uniform(0.0, 0.4, count)), xfz=some(0.4, 0.2), fd=some(0.4),
        estimate=rng.random(count) < 0.3, bore=np.where(kind == "orifice", rng.uniform(0.02, 0.07, count), np.nan),
        method=rng.choice(np.array(["isa", "upstream", "tullis", None], object), count),
        keep=rng.choice(np.array(["incipient", "constant", "damage", "choked", None], object), count),
    )  # fmt: skip
    return complete(replace(cases, source={}))


@settings(max_examples=40, deadline=None)
@given(st.integers(0, 2**32 - 1), st.sampled_from([0.5, 1.0, 3.0]))
def test_what_is_shown_holds_at_every_corner_and_inside(seed: int, scale: float) -> None:
    cases = _random_cases(seed)
    findings = calculate(cases)
    answered = np.array([word is not None for word in findings.regime])
    cases = cases.take(np.flatnonzero(answered))
    findings = calculate(cases)
    wider = tuple(replace(t, size=scale * t.size) for t in combined([parse_tolerance("limits=2%")]))
    moving = movable(cases, wider)
    shown = proof(moving, findings.keep)
    assert not (shown.passes & shown.fails).any()
    assert not (shown.passes & findings.fails).any()
    assert not (shown.fails & ~findings.fails).any()
    inside = np.random.default_rng(seed).uniform(-1, 1, (100, len(INPUTS)))
    points = [*product((-1.0, 1.0), repeat=len(INPUTS)), *inside]
    moves = {name: np.array([point[i] for point in points])[None] for i, name in enumerate(INPUTS)}
    drawn, factor = moving.moved(moves)
    passes = tried(drawn, np.repeat(findings.keep, len(points)), factor).passes.reshape(cases.count, -1)
    assert passes[shown.passes].all()
    assert not passes[shown.fails].any()


def test_most_cases_need_no_draws_and_the_share_is_the_same() -> None:
    cases = _random_cases(11, 400)
    findings = calculate(cases)
    short, drawn = (sense(cases, findings, every=every) for every in (False, True))
    assert np.array_equal(short.stays, drawn.stays, equal_nan=True)
    answered = ~np.isnan(short.stays)
    assert short.proven[answered].mean() > 0.7
    assert not drawn.proven.any()
    # The corners of a case that was not drawn are no narrower than its draws.
    close = 1e-9 + 1e-9 * np.abs(drawn.low)
    assert (short.low <= drawn.low + close)[answered].all()
    assert (short.high >= drawn.high - close)[answered].all()


def test_what_hangs_on_the_opening_is_never_shown_without_draws() -> None:
    cases = _mixed()
    kinds = np.arange(40) % 5
    assert provable(cases).tolist() == [kind in (0, 1) for kind in kinds]


# --- the input that matters most --------------------------------------------------------------------------------------


def test_near_boiling_the_temperature_matters_most(tmp_path: Path) -> None:
    row = {"p1 [bar a]": 2.0, "p2 [bar a]": 1.3, "Liquid": "water", "Temperature [deg C]": 100, "Incipient": 1.2}
    survey = _survey(tmp_path, BASE | row)
    found = _sense(survey, "t=3K", "p1=0.2%", "p2=0.2%")
    assert found.dominant[0] == "t"
    # Saturation at 97 and 103 C, IAPWS-IF97 tables: 0.9098 and 1.1272 bar; sigma by hand.
    ends = [(2.0 - pv) / 0.7 / 1.2 for pv in (0.9098, 1.1272)]
    assert found.swing[0] == pytest.approx(ends[0] - ends[1], rel=2e-3)


def test_of_a_case_kept_to_choking_the_recovery_factor_matters_most(tmp_path: Path) -> None:
    survey = _survey(tmp_path, BASE | GIVEN | {"Limit to keep": "choked"})
    found = _sense(survey, "fl=10%")
    # At line size the margin to choking is FL^2 (p1 - FF pv)/dp - 1 (IEC 60534-2-1): it goes with the square of FL.
    # FL stops at 1, not at 0.99 here.
    free = 5.8 - (0.96 - 0.28 * math.sqrt(0.0234 / 220.64)) * 0.0234
    assert found.dominant[0] == "fl"
    assert found.swing[0] == pytest.approx((0.99**2 - 0.81**2) * free / 1.6, rel=1e-9)


def test_a_recovery_factor_does_not_pass_one(tmp_path: Path) -> None:
    survey = _survey(tmp_path, BASE | GIVEN | {"FL": 0.98, "Limit to keep": "choked"})
    drawn, _ = movable(survey.cases, DEFAULTS).moved({"fl": np.array([[-1.0, 1.0]])})
    assert drawn.fl == pytest.approx([0.931, 1.0])


def test_limits_move_where_their_spread_is_given(tmp_path: Path) -> None:
    survey = _survey(tmp_path, BASE | GIVEN | {"Incipient": 3.0})
    found = _sense(survey, "limits=20%", every=True)
    sigma = (5.8 - 0.0234) / 1.6
    assert found.dominant[0] == "limits"
    assert found.swing[0] == pytest.approx(sigma / 2.4 - sigma / 3.6, rel=1e-9)


# --- in words ---------------------------------------------------------------------------------------------------------


def test_the_sentence_says_what_the_case_stays(tmp_path: Path) -> None:
    rows = [BASE | GIVEN | extra for extra in (
        {"Incipient": 3.55}, {"Incipient": 2.0}, {"Damage": 3.55},
        {"Incipient": 4.5, "Damage": 1.5, "Limit to keep": "damage"}, {}, {"Incipient": 3.65}, {"Incipient": 6.0},
    )]  # fmt: skip
    survey = _survey(tmp_path, *({**row, "Tag": f"V{i}"} for i, row in enumerate(rows)))
    found = sense(survey.cases, survey.findings)
    said = [stay_words(found, place, survey.findings) for place in range(len(rows))]
    starts = (
        ("clear", f"stays clear in {math.floor(100 * found.stays[0])} % of draws; the "),
        ("clear", "stays clear whatever the inputs are within their tolerances; the "),
        ("unjudged", "stays above the damage limit in "),
        ("incipient", "stays above the damage limit whatever the inputs are within their tolerances; "),
        ("unjudged", "stays free of choking whatever the inputs are within their tolerances; "),
        ("cavitating", "fails with the inputs as given, and that stands, though it passes in "),
        ("cavitating", "fails whatever the inputs are within their tolerances; "),
    )
    for place, (regime, start) in enumerate(starts):
        assert survey.findings.regime[place] == regime
        assert said[place].startswith(start)
        assert survey.findings.fails[place] == start.startswith("fails")
    assert not any("clear" in text for text in said[2:])
    words = r"the (inlet|outlet) pressure matters most \(± 1 % moves the margin by 5\.\d percentage points from end"
    assert re.search(words, said[0])


def test_a_case_without_an_answer_says_nothing(tmp_path: Path) -> None:
    path = write_csv(tmp_path / "list.csv", list(BASE | GIVEN), [list((BASE | GIVEN | {"FL": None}).values())])
    survey = survey_list(path)
    found = sense(survey.cases, survey.findings)
    assert np.isnan([found.stays[0], found.low[0], found.swing[0]]).all()
    assert found.dominant[0] is None
    assert stay_words(found, 0, survey.findings) == ""


@pytest.mark.parametrize(
    ("share", "words"),
    [(1.0, "in all 200 draws"), (0.0, "in none of the draws"), (0.995, "in 99.5 % of draws"),
     (0.97, "in 97 % of draws"), (0.29, "in 29 % of draws"), (0.976, "in 97 % of draws"), (0.005, "in 0.5 % of draws"),
     (0.99999, "in 99.9 % of draws"), (0.00001, "in less than 0.1 % of draws")],
)  # fmt: skip
def test_a_share_is_never_rounded_up(share: float, words: str) -> None:
    assert share_words(share, 200) == words


# --- tolerances as they are written -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "field", "size", "relative"),
    [("p1=1%", "p1", 0.01, True), ("t=2K", "t", 2.0, False), ("fl=3%", "fl", 0.03, True),
     ("Temperature = ±3.6 deg F", "t", 2.0, False), ("t=2 deg C", "t", 2.0, False), ("p2=0,1 bar", "p2", 1e4, False),
     ("Inlet pressure=10 kPa", "p1", 1e4, False), ("pv=0", "pv", 0.0, True), ("flow=3.6 m3/h", "flow", 1e-3, False),
     ("limits=20 %", "limits", 0.2, True), ("FL=.5 %", "fl", 0.005, True), ("t=0", "t", 0.0, False)],
)  # fmt: skip
def test_a_tolerance_of_the_command_line(text: str, field: str, size: float, relative: bool) -> None:
    found = parse_tolerance(text)
    assert (found.field, found.relative, found.basis) == (field, relative, "command line")
    assert found.size == pytest.approx(size, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "said"),
    [("p1", "NAME=SIZE"), ("=1%", "NAME=SIZE"), ("p1=", "NAME=SIZE"), ("tag=1%", "an input that can move"),
     ("bore=1%", "an input that can move"), ("p1=1", "must say its unit"), ("p1=-1%", "not negative"),
     ("p1=one", "a number with its unit"), ("t=2%", "must be an amount"), ("fl=0.02 bar", "must be a share"),
     ("p1=1 furlong", "not understood"), ("p1=0.1 bar g", "not gauge"), ("p1=2 K", "another kind of quantity"),
     ("flow=2 kg/s", "another kind of quantity"), ("p1=60%", "below 50 %"), ("p1=0.01%", "from 0.05 %"),
     ("t=50 K", "at most 20 K"), ("p1=nan%", "a number with its unit"), ("p1=1e999%", "not understood")],
)  # fmt: skip
def test_a_tolerance_that_cannot_be_says_why(text: str, said: str) -> None:
    with pytest.raises(LowpointError, match=said):
        parse_tolerance(text)


def test_the_last_word_holds_and_every_input_is_listed() -> None:
    listed = [replace(parse_tolerance("p1=2%"), basis="list"), replace(parse_tolerance("t=3K"), basis="list")]
    found = {t.field: t for t in combined(listed, [parse_tolerance("p1=0.5%")])}
    assert list(found) == [t.field for t in DEFAULTS]
    assert (found["p1"].size, found["p1"].basis) == (0.005, "command line")
    assert (found["t"].size, found["t"].basis) == (3.0, "list")
    assert (found["flow"].size, found["flow"].basis) == (0.02, "default")
    assert [t.words() for t in (found["t"], found["p1"])] == ["± 3 K", "± 0.5 %"]
    assert found["t"].words("us") == "± 5.4 deg F"
    assert parse_tolerance("p2=1 psi").words("us") == "± 1 psi"


HEAD = ["Tag", "Flow [m3/h]", "p1 [bar a]", "p2 [bar a]", "FL", "pv [bar a]", "pc [bar a]", "Density [kg/m3]"]
ROW = ["V1", 46, 5.8, 4.2, 0.9, 0.0234, 220.64, 998]


def _read(tmp_path: Path, above: list[list[Any]], own: list[list[Any]] | None = None) -> Survey:
    import openpyxl

    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for row in [*above, HEAD, ROW]:
        sheet.append(row)
    if own is not None:
        page = book.create_sheet("Tolerances")
        for row in own:
            page.append(row)
    book.save(tmp_path / "list.xlsx")
    return survey_list(tmp_path / "list.xlsx")


def _listed(survey: Survey) -> dict[str, Any]:
    assert all(t.basis == "list" for t in survey.reading.tolerances)
    return {t.field: pytest.approx(t.size) for t in survey.reading.tolerances}


def test_lines_above_the_table_state_tolerances(tmp_path: Path) -> None:
    above: list[list[Any]] = [
        ["Valves of the boiler house"], ["Tolerance p1", "2 %", None, "Tolerance of the flow", "5 %"],
        ["Tolerance temperature [K]", 2], ["Tolerance on p2 [bar]", 0.1], ["tolerance FL: 3 %"],
    ]  # fmt: skip
    survey = _read(tmp_path, above)
    assert survey.reading.problems == ()
    assert survey.findings.regime[0] is not None
    assert _listed(survey) == {"p1": 0.02, "flow": 0.05, "t": 2.0, "p2": 1e4, "fl": 0.03}


def test_a_sheet_of_its_own_states_tolerances(tmp_path: Path) -> None:
    survey = _read(tmp_path, [], [["Input", "Tolerance"], ["p1", "2 %"], ["Temperature [K]", 1.5], [None, None],
                                  ["Tolerance FL", "3 %"]])  # fmt: skip
    assert survey.reading.problems == ()
    assert survey.reading.notes == ()
    assert _listed(survey) == {"p1": 0.02, "t": 1.5, "fl": 0.03}


def test_a_csv_states_tolerances_above_its_table(tmp_path: Path) -> None:
    path = tmp_path / "list.csv"
    row = ";".join(map(str, ROW)).replace(".", ",")
    lines = ["Tolerance p1;1,5 %", "Tolerance colour;2 K", ";".join(HEAD), row]
    path.write_text("\n".join(lines), encoding="utf-8")
    survey = survey_list(path)
    assert survey.findings.regime[0] is not None
    assert {t.field: t.size for t in survey.reading.tolerances} == {"p1": 0.015}
    assert [p.cell for p in survey.reading.problems] == ["B2"]


@pytest.mark.parametrize(
    ("lines", "cell", "said"),
    [([["Tolerance p1", 0.01]], "B1", "must say its unit"), ([["Tolerance p1 [%]", 0.01]], "B1", "from 0.05 %"),
     ([["Tolerance colour", "1 %"]], "B1", "an input that can move"), ([["Tolerance p1 [K]", 1]], "B1", "another kind"),
     ([["Tolerance p1", "1 %"], ["Tolerance p1", "2 %"]], "B2", "stated before as ± 1 %"),
     ([["Tolerance p1", "plenty"]], "B1", "a number with its unit")],
)  # fmt: skip
def test_a_listed_tolerance_that_cannot_be_is_named(
    lines: list[list[Any]], cell: str, said: str, tmp_path: Path
) -> None:
    survey = _read(tmp_path, lines)
    assert survey.findings.regime[0] is not None
    (problem,) = survey.reading.problems
    assert (problem.sheet, problem.cell, problem.spoils) == ("Sheet", cell, False)
    assert said in problem.sentence()
