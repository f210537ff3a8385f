"""The verdict against a straight reading of its rules, over all combinations of limits."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.cells import CellError, call, call_many

NAMES = ("incipient", "constant", "damage", "vibration", "choked")
LEVELS = (None, 0.9, 1.0, 1.2, 1.5, 2.0)
SIGMAS = (0.5, 1.0, 1.1, 1.2, 1.3, 1.5, 1.7, 2.0, 2.5)


def by_the_rules(
    sigma: float,
    incipient: float | None,
    constant: float | None,
    damage: float | None,
    vibration: float | None,
    choked: float | None,
) -> str | CellError:
    """One rule a line, in the order in which they are promised; at a limit counts as crossed."""
    if any(limit is not None and limit <= 1 for limit in (incipient, constant, damage)):
        return CellError.NUM
    if all(limit is None for limit in (incipient, constant, damage, vibration, choked)):
        return CellError.NA
    if sigma <= 1:
        return "flashing"
    if choked is not None and sigma <= choked:
        return "choked"
    if vibration is not None and sigma <= vibration:
        return "vibration"
    if damage is not None and sigma <= damage:
        return "damage"
    if constant is not None and sigma <= constant:
        return "constant" if damage is not None else "cavitating"
    if incipient is not None and sigma <= incipient:
        return "incipient" if constant is not None or damage is not None else "cavitating"
    if incipient is not None:
        return "clear"
    return "unjudged"


COMBINATIONS = list(itertools.product(SIGMAS, *[LEVELS] * 5))
EXPECTED = [by_the_rules(*case) for case in COMBINATIONS]


def test_every_word_is_reached() -> None:
    promised = {"flashing", "choked", "vibration", "damage", "constant", "cavitating", "incipient", "clear", "unjudged"}
    assert set(EXPECTED) == promised | {CellError.NUM, CellError.NA}
    assert len(COMBINATIONS) == 9 * 6**5


def test_all_combinations_in_one_column() -> None:
    columns = [list(column) for column in zip(*COMBINATIONS, strict=True)]
    got = call_many("LP_REGIME", columns, len(COMBINATIONS))
    wrong = [(case, a, b) for case, a, b in zip(COMBINATIONS, got, EXPECTED, strict=True) if a != b]
    assert wrong == []


def test_one_by_one() -> None:
    for case, expected in list(zip(COMBINATIONS, EXPECTED, strict=True))[::17]:
        assert call("LP_REGIME", case) == expected, case


@pytest.mark.parametrize("present", list(itertools.product([False, True], repeat=5)))
def test_limits_left_out_altogether(present: tuple[bool, ...]) -> None:
    """A limit that no row gives, in arrays from Python: None where there is no word."""
    kept = [
        (case, expected)
        for case, expected in zip(COMBINATIONS, EXPECTED, strict=True)
        if all((limit is not None) == there for limit, there in zip(case[1:], present, strict=True))
    ]
    given = {name: np.array([case[1 + i] for case, _ in kept]) for i, name in enumerate(NAMES) if present[i]}
    got = functions["LP_REGIME"](sigma=np.array([case[0] for case, _ in kept]), **given)
    assert got.tolist() == [expected if type(expected) is str else None for _, expected in kept]


def test_clear_needs_an_incipient_limit_below_the_index() -> None:
    columns = [list(column) for column in zip(*COMBINATIONS, strict=True)]
    for case, word in zip(COMBINATIONS, call_many("LP_REGIME", columns, len(COMBINATIONS)), strict=True):
        if word == "clear":
            assert case[1] is not None
            assert case[0] > max(limit for limit in case[1:] if limit is not None)


def test_reasons() -> None:
    why = functions["LP_REGIME"].why
    assert "at least one limit must be given" in why(sigma=2.0)
    assert "must be above 1 in upstream form: another form was meant" in why(sigma=2.0, damage=0.8)
    assert "not judged clear however high the index" in why(sigma=9.0, damage=1.3)
    assert "not judged" not in why(sigma=9.0, incipient=1.3)
    assert "not in their usual order" in why(sigma=9.0, incipient=1.3, constant=1.5)
    assert "not in their usual order" in why(sigma=9.0, constant=1.3, damage=1.5)
    assert "not in their usual order" not in why(sigma=9.0, incipient=2.0, constant=1.7, damage=1.5)
    assert "tested, published or estimated" in why(sigma=9.0, incipient=2.0)
    mixed = why(sigma=np.array([9.0, 9.0, 9.0]), incipient=np.array([math.nan, 1.5, 0.7]), damage=1.6)
    assert "not judged clear" in mixed[0]
    assert "usual order" in mixed[1]
    assert "another form" in mixed[2]
