"""What must hold of any conversion: there and back, by way of a third unit, gauge and absolute."""

from __future__ import annotations

from itertools import groupby

import pytest
from hypothesis import given
from hypothesis import strategies as st

from lowpoint import functions
from lowpoint.physics.unitnames import LISTED, meaning

KINDS = {
    kind: list(units)
    for kind, units in groupby(sorted(LISTED, key=lambda unit: meaning(unit).dimension), lambda u: meaning(u).dimension)
}
ALIKE = st.sampled_from(sorted(KINDS)).flatmap(lambda kind: st.tuples(*[st.sampled_from(KINDS[kind])] * 3))


@given(ALIKE, st.floats(400.0, 5000.0), st.floats(0.6, 1.1))
def test_there_and_back_and_by_way_of_a_third(units: tuple[str, str, str], value: float, atmosphere: float) -> None:
    one, two, three = units
    unit = functions["LP_UNIT"]
    there = unit(value, one, two, atmosphere)
    assert unit(there, two, one, atmosphere) == pytest.approx(value, rel=1e-11, abs=1e-9)
    by_way = unit(unit(value, one, three, atmosphere), three, two, atmosphere)
    assert by_way == pytest.approx(there, rel=1e-11, abs=1e-9 * abs(unit(1.0, one, two, atmosphere) or 1.0) + 1e-9)


@given(st.floats(0.0, 400.0), st.floats(0.6, 1.1), st.sampled_from(["bar", "kPa", "psi", "kgf/cm2", "mH2O", "MPa"]))
def test_gauge_is_absolute_less_the_atmosphere(value: float, atmosphere: float, word: str) -> None:
    unit = functions["LP_UNIT"]
    ambient = unit(atmosphere, "bar", word)
    assert unit(value, f"{word} g", word, atmosphere) == pytest.approx(value + ambient, rel=1e-12)
    assert unit(value + ambient, word, f"{word} g", atmosphere) == pytest.approx(value, rel=1e-12, abs=1e-12 * ambient)


@given(st.floats(-200.0, 1000.0), st.floats(-200.0, 1000.0))
def test_temperature_differences_scale_by_1_8(one: float, other: float) -> None:
    unit = functions["LP_UNIT"]
    step = unit(one, "deg C", "deg F") - unit(other, "deg C", "deg F")
    assert step == pytest.approx(1.8 * (one - other), abs=1e-9)


def test_several_units_of_most_kinds_are_listed() -> None:
    assert sum(len(units) > 1 for units in KINDS.values()) >= 8
