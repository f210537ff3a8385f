"""Drops in stages: the identities of equal index, and the bores of a worked set of five plates."""

from __future__ import annotations

import math

import pytest

from lowpoint import functions
from published.plates import Check, allowed, rows
from published.rows import Row, parameters

ROWS = rows("multistage")
STAGES, PRESSURES, SIGMA, BORE = (
    functions[f"LP_{name}"] for name in ("STAGES", "STAGE_PRESSURES", "SIGMA", "ORIFICE_BORE")
)


def _ends(row: Row) -> dict[str, float]:
    """The row's pressures in bar."""
    return {name: row.inputs[key] / 1e5 for name, key in (("p1", "P0"), ("p2", "Pn"), ("pv", "Pv"))}


def _real_count(row: Row) -> float:
    """The real number of stages, read off where the whole one turns: p2 is lowered until one stage more is needed."""
    ends, target = _ends(row), row.inputs["sigma2"]
    whole = STAGES(**ends, target=target, form="downstream")
    assert whole == math.ceil(row.value)
    # The outlet at which exactly `whole` stages do: head over head from there to the row's outlet is the rest.
    low, high = ends["pv"] * (1.0 + 1e-12), ends["p2"]
    for _ in range(200):
        p2 = 0.5 * (low + high)
        more = STAGES(**{**ends, "p2": p2}, target=target, form="downstream") > whole
        low, high = (p2, high) if more else (low, p2)
    rest = math.log((ends["p2"] - ends["pv"]) / (high - ends["pv"])) / math.log((ends["p1"] - ends["pv"]) / (
        high - ends["pv"])) * whole  # fmt: skip
    return whole - rest


def _indices(row: Row, rule: str) -> list[float]:
    """Downstream index of every stage."""
    ends, n = _ends(row), row.inputs["n"]
    p = PRESSURES(**ends, stages=n, rule=rule)
    assert len(p) == n + 1
    return [SIGMA(p1=p[i], p2=p[i + 1], pv=ends["pv"], form="downstream") for i in range(n)]


def _equal_index(row: Row) -> float:
    found = _indices(row, "index")
    assert found == pytest.approx([found[0]] * len(found), rel=1e-9)
    return found[0]


def _last_of_equal_drops(row: Row) -> float:
    found = _indices(row, "drop")
    assert found == sorted(found, reverse=True)
    return found[-1]


def _after_first(row: Row) -> float:
    return PRESSURES(**_ends(row), stages=row.inputs["n"])[1] * 1e5


def _bore(row: Row) -> float:
    """mm, of one stage of five with equal index; the third word of the quantity is its number."""
    i, ends = row.inputs, _ends(row)
    stage = int(row.quantity.split()[3])
    p = PRESSURES(**ends, stages=5)
    case = {"flow": i["q_m3h"], "p1": p[stage - 1], "p2": p[stage], "pipe": i["D"] * 1e3, "density": i["rho"],
            "pv": ends["pv"], "pc": 220.64, "viscosity": i["mu"] * 1e3}  # fmt: skip
    assert "the flow is choked" not in functions["LP_ORIFICE_BORE"].why(**case)
    return BORE(**case)


BY_QUANTITY: dict[str, Check] = {
    "real stage count": _real_count, "equal-sigma2": _equal_index, "pressure after stage 1": _after_first,
    "last-stage": _last_of_equal_drops, "bore of stage": _bore,
}  # fmt: skip


def _check(row: Row) -> Check:
    [found] = [check for begins, check in BY_QUANTITY.items() if row.quantity.startswith(begins)]
    return found


def test_every_row_is_used() -> None:
    assert len(ROWS) == 18
    assert {_check(row) for row in ROWS.values()} == set(BY_QUANTITY.values())


@pytest.mark.parametrize("row", parameters(ROWS.values()))
def test_row(row: Row) -> None:
    assert _check(row)(row) == pytest.approx(row.value, rel=0, abs=allowed(row)), row.source


@pytest.mark.parametrize(("n", "index"), [(1, 0.063), (2, 0.323), (3, 0.641), (4, 0.976), (5, 1.319)])
def test_index_of_each_number_of_stages(n: int, index: float) -> None:
    """50 to 3 bar, water of 20 C (pv 2339.32 Pa): r/(1-r) with r = (297660.68/4997660.68)^(1/n), by hand (C)."""
    p = PRESSURES(p1=50.0, p2=3.0, pv=0.0233932, stages=n)
    assert SIGMA(p1=p[0], p2=p[1], pv=0.0233932, form="downstream") == pytest.approx(index, abs=0.0005)
    # That index as the target is met by n stages; a hair above it needs one more.
    exact = SIGMA(p1=p[0], p2=p[1], pv=0.0233932)
    assert STAGES(p1=50.0, p2=3.0, pv=0.0233932, target=exact) == n
    assert STAGES(p1=50.0, p2=3.0, pv=0.0233932, target=exact * 1.0001) == n + 1
    assert STAGES(p1=50.0, p2=3.0, pv=0.0233932, target=1.0 / exact, form="xf") == n


def test_equal_drops_leave_the_last_of_five_worst() -> None:
    """Downstream (2.97661/9.4) = 0.3167 for the last: an identity, by hand."""
    p = PRESSURES(p1=50.0, p2=3.0, pv=0.0233932, stages=5, rule="drop")
    assert list(p) == pytest.approx([50.0, 40.6, 31.2, 21.8, 12.4, 3.0], rel=1e-14)
    assert SIGMA(p1=p[4], p2=p[5], pv=0.0233932, form="downstream") == pytest.approx(0.317, abs=0.0005)
