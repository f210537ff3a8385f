"""Thickness of plates against the table of annular plates, the solid plate, and other published rules."""

from __future__ import annotations

import math

import pytest

from lowpoint import functions
from published.plates import Check, Gap, allowed, rows
from published.rows import Row, parameters

ROWS = rows("plate")
THICKNESS = functions["LP_PLATE_THICKNESS"]
SUPPORT = 200.0

_SOLID = "a plate without a hole, which no orifice has"
UNUSABLE = {"plate-013": _SOLID, "plate-027": _SOLID, "plate-029": _SOLID}


def _k(bore_ratio: float, support: str) -> float:
    """``k`` of ``stress = k drop (a/t)^2``, back from a thickness."""
    drop, stress = 2.0, 120.0  # bar, MPa
    t = THICKNESS(drop=drop, support_diameter=SUPPORT, bore=SUPPORT * bore_ratio, stress=stress, support=support)
    return (t / (SUPPORT / 2.0)) ** 2 * stress / (drop / 10.0)


def _stress_factor(row: Row) -> float:
    return _k(1.0 / row.inputs["a_over_b"], "clamped" if "clamped" in row.quantity else "simple")


def _half_root(row: Row) -> float:
    return 0.5 * math.sqrt(_k(row.inputs["beta"], "clamped" if "clamped" in row.quantity else "simple"))


def _without_hole(row: Row) -> float:
    """The smallest hole doubles the stress in the middle of the solid plate (Kirsch's factor for even tension)."""
    return 0.5 * _k(1e-7, "simple")


BY_QUANTITY: dict[str, Check] = {
    "annular plate": _stress_factor, "same, outer clamped": _stress_factor, "0.5*sqrt(k)": _half_root,
    "solid simply supported": _without_hole,
}  # fmt: skip


def _beside(row: Row) -> float:
    """The thickness here for a row of Miller's rule, t/D = sqrt((0.681 - 0.651 beta) dp/yield)."""
    i = row.inputs
    if "dP" not in i:
        return 0.5 * math.sqrt(_k(i["beta"], "simple"))
    return THICKNESS(drop=i["dP"] / 1e5, support_diameter=i["D"] * 1e3, bore=i["beta"] * i["D"] * 1e3,
                     stress=i["Sy"] / 1e6)  # fmt: skip


_MILLER = "Miller's straight line against the plate solved here"
DISAGREE = {"plate-021": Gap(0.007, _MILLER), "plate-024": Gap(-0.011, _MILLER), "plate-028": Gap(0.005, _MILLER)}
CHECKED = [id_ for id_ in ROWS if id_ not in {**UNUSABLE, **DISAGREE}]


def _check(row: Row) -> Check:
    [found] = [check for begins, check in BY_QUANTITY.items() if row.quantity.startswith(begins)]
    return found


def test_every_row_is_used_or_says_why_not() -> None:
    assert len(ROWS) == 19
    assert len(CHECKED) == 19 - len(UNUSABLE) - len(DISAGREE) == 13
    assert {*UNUSABLE, *DISAGREE} < set(ROWS)
    assert {_check(ROWS[id_]) for id_ in CHECKED} == set(BY_QUANTITY.values())


@pytest.mark.parametrize("row", parameters(ROWS[id_] for id_ in CHECKED))
def test_row(row: Row) -> None:
    assert _check(row)(row) == pytest.approx(row.value, rel=0, abs=allowed(row)), row.source


@pytest.mark.parametrize("row", parameters(ROWS[id_] for id_ in DISAGREE))
def test_two_sources_and_their_gap(row: Row) -> None:
    assert _beside(row) / row.value - 1.0 == pytest.approx(DISAGREE[row.id].gap, abs=0.0006), DISAGREE[row.id].between


# Timoshenko and Woinowsky-Krieger, Theory of Plates and Shells, table of k for nu 0.3 (from memory).
TABLE = {
    "simple": {1.25: 0.592, 1.5: 0.976, 2.0: 1.440, 3.0: 1.880, 4.0: 2.08, 5.0: 2.19},
    "clamped": {1.25: 0.105, 1.5: 0.259, 2.0: 0.480, 3.0: 0.657, 4.0: 0.710, 5.0: 0.730},
}


@pytest.mark.parametrize("support", TABLE)
def test_the_whole_table(support: str) -> None:
    for ratio, k in TABLE[support].items():
        assert _k(1.0 / ratio, support) == pytest.approx(k, rel=0.003), ratio


def test_a_bore_hole_turns_the_clamped_plates_worst_place() -> None:
    """At a/b 10 the bore's edge is worse than the rim: 0.869 (worked out apart, C), above the solid rim's 0.75."""
    assert _k(0.1, "clamped") == pytest.approx(0.869, abs=0.001)
    assert _k(0.1, "clamped") > 0.75 > _k(0.3, "clamped")


def test_stress_by_numbers() -> None:
    """The equation of the bent plate integrated step by step, no closed form used: both rims, three bores (C).

    (r M_r)' - M_t = -r Q with Q = q (r^2 - b^2)/2r, moments D (w'' + nu w'/r); free at the bore, a slope there that
    brings the rim to rest (clamped) or its moment to nothing (simple).
    """
    nu = 0.3
    for b in (0.2, 0.45, 0.8):
        for support in ("simple", "clamped"):
            first, second = _shot(b, nu, 0.0), _shot(b, nu, 1.0)
            end = 1 if support == "clamped" else 2
            share = -first[0][end] / (second[0][end] - first[0][end])
            stresses = [6.0 * abs(x + share * (y - x)) for x, y in zip(first[1], second[1], strict=True)]
            assert _k(b, support) == pytest.approx(max(stresses), rel=2e-4), (b, support)


def _shot(b: float, nu: float, slope: float) -> tuple[tuple[float, float, float], list[float]]:
    """From the bore (no radial moment) to the rim at r = 1 with q = D = 1: the end, and moments at bore and rim."""
    steps = 4000
    h = (1.0 - b) / steps

    def rate(r: float, phi: float, m: float) -> tuple[float, float]:
        # phi = -w'; m radial moment, with phi' = m - nu phi/r and m' = (mt - m)/r - Q.
        bend = m - nu * phi / r
        hoop = phi / r + nu * bend
        return bend, (hoop - m) / r - (r * r - b * b) / (2.0 * r)

    r, phi, m = b, slope, 0.0
    hoop_bore = slope / b * (1.0 - nu * nu)
    for _ in range(steps):
        k1 = rate(r, phi, m)
        k2 = rate(r + h / 2, phi + h / 2 * k1[0], m + h / 2 * k1[1])
        k3 = rate(r + h / 2, phi + h / 2 * k2[0], m + h / 2 * k2[1])
        k4 = rate(r + h, phi + h * k3[0], m + h * k3[1])
        phi += h / 6 * (k1[0] + 2 * k2[0] + 2 * k3[0] + k4[0])
        m += h / 6 * (k1[1] + 2 * k2[1] + 2 * k3[1] + k4[1])
        r += h
    hoop_rim = phi * (1.0 - nu * nu) + nu * m
    return (r, phi, m), [hoop_bore, m, hoop_rim]


def test_thickness_goes_as_the_root_of_the_drop_and_the_allowance_is_added() -> None:
    case = {"support_diameter": 154.05, "bore": 60.0, "stress": 138.0}
    one = THICKNESS(drop=10.0, **case)
    assert THICKNESS(drop=40.0, **case) == pytest.approx(2.0 * one, rel=1e-13)
    assert THICKNESS(drop=10.0, **case, allowance=1.5) == pytest.approx(one + 1.5, rel=1e-14)
    assert THICKNESS(drop=10.0, **case, support="clamped") < one
