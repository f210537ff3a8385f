"""Indices and scale effects against published examples, identities and the velocity exponents of Miller."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.units import CV_PER_KV
from published.rows import Row, half_digit, parameters, read

ROWS = read("indices")

_EXPONENT = "exponents are inputs that come with a test; no function computes one"
_PLATE = "about orifice plates, whose limits are not part of these functions"
UNUSABLE = {
    **{f"SC-{letter}-{n}": _EXPONENT for letter in "Yb" for n in (5, 10, 20, 30)},
    "SC-002": "the page's printed 3.69 contradicts its own inputs; a test of its own says so",
    "SC-010": _PLATE, "SC-011": _PLATE,
}  # fmt: skip


def _sigma(form: str) -> Callable[[Row], float]:
    def index(row: Row) -> float:
        i = row.inputs
        return functions["LP_SIGMA"](p1=i["p1"] / 1e5, p2=i["p2"] / 1e5, pv=i["pv"] / 1e5, form=form)

    return index


def _over_outlet(row: Row) -> float:
    """(p1-p2)/(p2-pv), the inverse of the downstream form, by way of xF/(1-xF)."""
    xf = _sigma("xf")(row)
    assert 1.0 / _sigma("downstream")(row) == pytest.approx(xf / (1.0 - xf), rel=1e-12)
    return 1.0 / _sigma("downstream")(row)


def _cold_choking(row: Row) -> float:
    """1/FL^2 is the index at choking of a liquid whose vapour pressure is nothing."""
    return functions["LP_SIGMA_CHOKED"](p1=10.0, pv=1e-9, pc=220.0, fl=row.inputs["FL"])


def _exact_choking(row: Row) -> float:
    i = row.inputs
    return functions["LP_SIGMA_CHOKED"](
        p1=i["p1_kPa"] / 100.0, pv=i["pv_kPa"] / 100.0, pc=i["pc_kPa"] / 100.0, fl=i["FL"]
    )


def _flashing_limit(row: Row) -> float:
    return functions["LP_SIGMA"](p1=9.0, p2=2.0, pv=2.0)


def _scaled(method: str) -> Callable[[Row], float]:
    """Factors given outright: the ratio is the factor and the exponent 1."""

    def limit(row: Row) -> float:
        i = row.inputs
        return functions["LP_SIGMA_SCALED"](
            limit=i["sigma_R"], size=100.0 * i["SSE"], size_ref=100.0, head=10.0 * i["PSE"], head_ref=10.0,
            size_exponent=1.0, head_exponent=1.0, method=method,
        )  # fmt: skip

    return limit


def _velocity_exponent(row: Row) -> float:
    """Velocity at the limit goes as (p1-pv)^n: sigma = (p1-pv)/dp and v as sqrt(dp), so PSE has the exponent 1-2n."""
    pressure_exponent = 1.0 - 2.0 * row.value

    def flow_at_limit(head: float) -> float:
        limit = functions["LP_SIGMA_SCALED"](
            limit=3.0, size=100.0, size_ref=100.0, head=head, head_ref=5.0, size_exponent=0.0,
            head_exponent=pressure_exponent, method="upstream",
        )  # fmt: skip
        p2 = functions["LP_ALLOWED_OUTLET"](p1=head + 0.02, pv=0.02, limit=limit)
        return functions["LP_FLOW"](coefficient=50.0, p1=head + 0.02, p2=p2, pv=0.02, pc=220.0, density=998.0, fl=0.95)

    return float(np.log(flow_at_limit(40.0) / flow_at_limit(5.0)) / np.log(8.0))


def _equivalent_exponent(row: Row) -> float:
    """The exponent that carries a limit so that the velocity at it goes as head^n, read back from the answer."""
    n = row.inputs["n"]
    wanted = 8.0 ** (1.0 - 2.0 * n)
    scaled = functions["LP_SIGMA_SCALED"](
        limit=2.0, size=1.0, size_ref=1.0, head=8.0, head_ref=1.0, size_exponent=0.0, head_exponent=row.value,
        method="upstream",
    )  # fmt: skip
    assert scaled == pytest.approx(2.0 * wanted, rel=1e-12)
    return float(np.log(scaled / 2.0) / np.log(8.0))


def _inlet_pressure(row: Row) -> float:
    valve = {"coefficient": 90.0 / CV_PER_KV, "fl": 0.92, "fd": 0.42}
    return functions["LP_XFZ"](**valve, p1=row.inputs["p1_Pa"] / 1e5) / functions["LP_XFZ"](**valve)


CHECKS: dict[str, Callable[[Row], float]] = {
    "SG-001": _sigma("upstream"), "SG-002": _sigma("downstream"), "SG-003": _sigma("xf"), "SG-004": _over_outlet,
    "SG-005": _cold_choking, "SG-006": _exact_choking, "SG-007": _flashing_limit, "SC-001": _scaled("isa"),
    "SC-003": _scaled("tullis"), "SC-012": _velocity_exponent, "SC-013": _velocity_exponent,
    "SC-014": _velocity_exponent, "SC-015": _equivalent_exponent, "SC-016": _equivalent_exponent,
    "SC-017": _inlet_pressure,
}  # fmt: skip


def test_every_row_is_used_or_says_why_not() -> None:
    assert len(ROWS) == 26
    assert set(CHECKS) | set(UNUSABLE) == set(ROWS)
    assert not set(CHECKS) & set(UNUSABLE)


@pytest.mark.parametrize("row", parameters(ROWS[id_] for id_ in CHECKS))
def test_row(row: Row) -> None:
    assert CHECKS[row.id](row) == pytest.approx(row.value, rel=0, abs=row.allowed), row.source


def test_the_printed_scale_example_contradicts_its_own_inputs() -> None:
    """Valve Magazine, summer 2009: 2.59, 1.29 and 1.19 give 3.7859; the page prints 3.69, no form of it gives that."""
    printed = ROWS["SC-002"]
    answers = [_scaled(method)(printed) for method in ("isa", "upstream", "tullis")]
    assert answers[0] == pytest.approx(3.7859, rel=0, abs=half_digit("3.7859"))
    assert all(abs(answer - printed.value) > half_digit("3.69") for answer in answers)


# IEC 60534-8-4 as reproduced by fluids: its two annex valves, and the formula of the estimate (library's own source).
@pytest.mark.parametrize(("cv", "fl", "fd"), [(90.0, 0.92, 0.42), (40.0, 0.9, 0.3), (500.0, 0.6, 0.98)])
def test_inception_estimate_is_the_one_that_the_noise_method_uses(cv: float, fl: float, fd: float) -> None:
    """At the drop at which the library begins to add cavitation noise, xF is the estimate at that inlet pressure."""
    from fluids.control_valve import Cv_to_Kv, control_valve_noise_l_2015

    p1, pv = 10e5, 2.3e3
    xfzp1 = functions["LPU_XFZ"](coefficient=cv, fl=fl, fd=fd, p1=p1 / 6894.757293168)
    xfz = functions["LPU_XFZ"](coefficient=cv, fl=fl, fd=fd)

    def level(share: float, given: float | None) -> float:
        dp = share * xfzp1 * (p1 - pv)
        return control_valve_noise_l_2015(
            m=30.0, P1=p1, P2=p1 - dp, Psat=pv, rho=997.0, c=1400.0, Kv=Cv_to_Kv(cv), d=0.1, Di=0.1071, FL=fl, Fd=fd,
            t_pipe=0.0036, xFz=given,
        )  # fmt: skip

    for share in (0.9, 1.1, 1.4):
        assert level(share, None) == pytest.approx(level(share, xfz), rel=0, abs=1e-6)
    assert abs(level(1.4, None) - level(1.4, 0.9 * xfz)) > 0.1
