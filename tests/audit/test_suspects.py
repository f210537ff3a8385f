"""Suspects: the planted mistake is named, coincidences and impossible explanations are not, and ties are said.

Every vendor's number comes from plain arithmetic (``audit_arithmetic``), never from the package.
"""

from __future__ import annotations

import random
from dataclasses import replace

import pytest

from audit_arithmetic import MISTAKES, Case, saturation
from audit_memory import drawn, planted, sheet, value, with_values
from audit_population import pairs, population, table
from lowpoint.audit.asking import asking
from lowpoint.audit.auditing import audit_sheet
from lowpoint.audit.checking import Checked, check
from lowpoint.audit.inputs import inputs_of
from lowpoint.audit.mistakes import catalogue
from lowpoint.audit.model import Claim, SheetReading
from lowpoint.audit.suspecting import alike, suspects

HOT = [
    Case(flow, 6.8, p2, float(f"{saturation(t):.4f}"), 221.2, 965.4, fl, 100.0, 154.1, 154.1, 320.0, 50.0, t)
    for flow, p2, fl, t in ((120.0, 5.2, 0.85, 90.0), (200.0, 4.6, 0.80, 88.0), (300.0, 4.0, 0.75, 91.0))
]
"""A hot-water valve of the boiler house; the case of ``datasheet_mistakes.csv`` and two below it."""


def audited(reading: SheetReading) -> Checked:
    return check(asking(inputs_of(reading)))


def with_mistakes(*names: str, cases: list[Case] = HOT) -> SheetReading:
    claims = planted(cases, names)
    assert claims is not None
    return sheet(cases, claims)


def claim(reading: SheetReading, quantity: str, case: str = "normal") -> Claim:
    return next(c for c in audit_sheet(reading) if (c.quantity, c.case) == (quantity, case))


def test_population_of_single_mistakes() -> None:
    """No false finding; the right one first wherever numbers can tell it (aim of the project: 95 %)."""
    trials = population(20, 8, [(), *((name,) for name in MISTAKES)])
    correct = [one for one in trials if not one.planted]
    wrong = [one for one in trials if one.planted and one.wrong]
    told = [one for one in wrong if not one.tied]
    assert len(correct) == 8
    assert not any(one.wrong for one in correct), table(trials)
    assert len(wrong) > 150
    assert len(told) > 0.8 * len(wrong)
    assert sum(one.first for one in told) >= 0.95 * len(told), table(trials)
    assert sum(one.in_three for one in wrong) >= 0.97 * len(wrong), table(trials)


def test_population_of_short_sheets() -> None:
    """One case and three significant digits: more ties, and still no false finding and the right one among three."""
    trials = population(31, 5, [(), *((name,) for name in MISTAKES)], digits=3, cases=("normal",))
    wrong = [one for one in trials if one.planted and one.wrong]
    told = [one for one in wrong if not one.tied]
    assert not any(one.wrong for one in trials if not one.planted), table(trials)
    assert len(told) > 70
    assert sum(one.first for one in told) >= 0.95 * len(told), table(trials)
    assert sum(one.in_three for one in wrong) >= 0.93 * len(wrong), table(trials)


def test_population_of_correct_sheets() -> None:
    """Nothing but agreement on correct sheets, in all units, whatever the digits shown."""
    trials = population(77, 80, [()])
    assert len(trials) == 80
    assert [one.wrong for one in trials] == [0] * 80


def test_population_of_pairs() -> None:
    trials = [one for one in population(3, 1, pairs(3, 80)) if one.wrong]
    told = [one for one in trials if not one.tied]
    assert len(trials) > 60
    assert sum(one.first for one in told) >= 0.85 * len(told), table(trials)
    assert sum(one.in_three for one in trials) >= 0.9 * len(trials), table(trials)


def test_the_sentence_names_number_and_mistake() -> None:
    reading = with_mistakes("gauge_as_absolute_both")
    judged = claim(reading, "dp_choked", "maximum")
    first = judged.suspects[0]
    assert first.mistakes == ("gauge_as_absolute_both",)
    assert first.text == f"{judged.claimed:.3f} follows if p1 and p2 were read as gauge and used as absolute"
    assert abs(first.value - judged.claimed) < 0.002
    assert first.text in judged.text
    # In all three cases the index and the choked drop.
    assert set(first.explains) == {(q, c) for q in ("dp_choked", "sigma") for c in ("minimum", "normal", "maximum")}


def test_one_mistake_in_one_case_only() -> None:
    right, wrong = planted(HOT, []), planted(HOT, ["atmosphere_twice_both"])
    assert right is not None
    assert wrong is not None
    reading = sheet(HOT, [right[0], wrong[1], right[2]])
    found = {(c.quantity, c.case): c for c in audit_sheet(reading) if c.verdict == "differs"}
    assert set(found) == {("dp_choked", "normal"), ("sigma", "normal")}
    for judged in found.values():
        assert judged.suspects[0].mistakes == ("atmosphere_twice_both",)
        assert judged.suspects[0].text.endswith(", in case normal only")


def test_a_mistake_in_all_cases_ranks_above_one_in_each() -> None:
    judged = claim(with_mistakes("no_fittings"), "coefficient", "maximum")
    assert judged.suspects[0].mistakes == ("no_fittings",)
    assert not judged.suspects[0].text.endswith(" only")


def test_what_agrees_speaks_against_a_mistake() -> None:
    """A choked drop without the atmosphere beside a right index: the pressures were not read as gauge throughout."""
    right, wrong = planted(HOT, []), planted(HOT, ["gauge_as_absolute_both"])
    assert right is not None
    assert wrong is not None
    mixed = [type(r)(r.kv, r.fp, w.dp_choked, r.sigma, r.travel, r.velocity, r.choked)
             for r, w in zip(right, wrong, strict=True)]  # fmt: skip
    named = [s.mistakes for s in claim(sheet(HOT, mixed), "dp_choked").suspects]
    assert ("gauge_as_absolute_both",) not in named[:1]


def test_no_mistake_explains_a_number_out_of_nowhere() -> None:
    reading = with_mistakes()
    odd = value("coefficient", "normal", 117.31, 2, "Kv")
    judged = claim(with_values(reading, odd), "coefficient")
    assert judged.verdict == "differs"
    assert judged.suspects == ()
    assert judged.text.endswith("none of the usual mistakes, alone or in pairs, gives this number")


def test_two_mistakes_are_not_offered_for_one_number() -> None:
    """More mistakes than claims explained is no explanation."""
    rng = random.Random(8)
    reading = with_mistakes()
    for _ in range(20):
        odd = value("dp_choked", "normal", 3.0 * rng.uniform(0.5, 2.0), 3, "bar")
        for suspect in claim(with_values(reading, odd), "dp_choked").suspects:
            assert len(suspect.mistakes) <= len(suspect.explains)


def test_ties_are_said() -> None:
    """Relative density 1 and the density at 15 deg C are one number (999.1 kg/m3)."""
    judged = claim(with_mistakes("relative_density_1"), "coefficient", "maximum")
    named = {s.mistakes: s.equal for s in judged.suspects}
    assert named[("relative_density_1",)] == named[("density_at_15_c",)] == 1
    assert "1 more would explain it as well" in judged.text


@pytest.mark.parametrize("group", [{"relative_density_1", "density_at_15_c"}, {"fl_not_squared", "ratio_not_squared"}])
def test_what_numbers_cannot_tell_apart(group: set[str]) -> None:
    """Without reducers FLP/FP is FL; the definitions of the others coincide for water."""
    line_size = [replace(case, d1=case.d, d2=case.d) for case in HOT]
    groups = alike(audited(with_mistakes(cases=line_size)))
    assert any(group <= set(names) for names in groups), groups


def test_what_moves_nothing_is_in_the_first_group() -> None:
    """A line-size valve has no reducers to leave out."""
    line_size = [replace(case, d1=case.d, d2=case.d) for case in HOT]
    groups = alike(audited(with_mistakes(cases=line_size)))
    assert groups[0][0] == ""
    assert "no_fittings" in groups[0]
    assert "gauge_as_absolute_both" not in groups[0]


def test_mistakes_with_different_numbers_are_told_apart() -> None:
    groups = alike(audited(with_mistakes()))
    for names in groups:
        assert not {"gauge_as_absolute_both", "atmosphere_twice_both"} <= set(names)
        assert not {"cv_printed_as_kv", "kv_printed_as_cv"} <= set(names)


def test_every_mistake_has_its_own_key_and_phrase() -> None:
    rng = random.Random(2)
    for _ in range(5):
        cases = drawn(rng)
        claims = planted(cases, [])
        assert claims is not None
        found = catalogue(inputs_of(sheet(cases, claims)))
        keys = [mistake.key for mistake in found]
        assert len(set(keys)) == len(keys)
        assert all(mistake.phrase and mistake.formula for mistake in found)
        may_lack = {"bar_as_kgfcm2", "nominal_pipe_in_pipe_out", "pv_at_20_c", "fl_default_0.9"}
        assert set(MISTAKES) - may_lack <= set(keys)


def test_nothing_is_suspected_where_all_agrees() -> None:
    assert suspects(audited(with_mistakes())) == {}


def test_a_value_of_another_case_keeps_its_rounding() -> None:
    """p1 of one case, shown to 0.1 psi, is as uncertain in the others: the index of each follows."""
    cases = [replace(case, p1=p1) for case, p1 in zip(HOT, (6.84, 6.80, 6.71), strict=True)]
    claims = planted([replace(case, p1=6.80) for case in cases], [])
    assert claims is not None
    found = {(c.quantity, c.case): c for c in audit_sheet(sheet(cases, claims, us=True)) if c.verdict == "differs"}
    assert ("sigma", "minimum") in found
    assert all(judged.suspects[0].mistakes == ("p1_of_normal",) for judged in found.values())


def test_an_index_without_a_stated_form_is_no_mistake_of_form() -> None:
    """Beside another mistake too: the form that fits is taken with each hypothesis."""
    wrong = planted(HOT, ["gauge_as_absolute_p2"])
    assert wrong is not None
    reading = sheet(HOT, wrong)
    reading = replace(reading, values=tuple(replace(v, form=None) for v in reading.values))
    wrong_ones = [judged for judged in audit_sheet(reading) if judged.verdict == "differs"]
    assert {judged.quantity for judged in wrong_ones} >= {"sigma", "coefficient"}
    assert {judged.suspects[0].mistakes for judged in wrong_ones} == {("gauge_as_absolute_p2",)}


def test_a_pair_that_explains_no_more_than_one_of_it_is_not_offered() -> None:
    """p1 and p2 read as gauge, and each of them by itself, are one and the same."""
    for name in ("gauge_as_absolute_both", "no_fittings", "pv_left_out"):
        found = [c for c in audit_sheet(with_mistakes(name)) if c.suspects]
        assert found
        for judged in found:
            alone = [s for s in judged.suspects if len(s.mistakes) == 1]
            for pair in (s for s in judged.suspects if len(s.mistakes) == 2):
                assert not any(set(pair.explains) <= set(one.explains) for one in alone), (name, pair)


def test_few_are_named_and_of_different_kinds() -> None:
    """Hot water: vapour pressure at 15, 20 or 25 deg C and none at all are next to the same."""
    judged = claim(with_mistakes("pv_left_out"), "dp_choked", "maximum")
    assert len(judged.suspects) <= 3
    assert ("pv_left_out",) in [s.mistakes for s in judged.suspects]
    assert sum(s.mistakes[0].startswith("pv_at_") for s in judged.suspects[:2]) <= 1
    assert all(len(s.numbers) == len(s.explains) for s in judged.suspects)
