"""The plain arithmetic that plants mistakes, itself checked against the outside."""

from __future__ import annotations

from typing import Any

import pytest

from audit_arithmetic import MISTAKES, Case, saturation, sums, water_density
from published.rows import read

ROWS = read("datasheet_mistakes")
PLANTED = {
    "ER-00": None, "ER-01": "gauge_as_absolute_both", "ER-02": "atmosphere_twice_both", "ER-03": "pv_at_20_c",
    "ER-07": "fl_default_0.9", "ER-08": "no_fittings", "ER-09": "relative_density_1", "ER-10": "flow_at_15_c",
}  # fmt: skip


@pytest.mark.parametrize("kelvin, mpa", [(300.0, 0.353658941e-2), (500.0, 0.263889776e1), (600.0, 0.123443146e2)])
def test_saturation(kelvin: float, mpa: float) -> None:
    """Verification values of IAPWS-IF97, table 35 (from memory)."""
    assert saturation(kelvin - 273.15) == pytest.approx(10.0 * mpa, rel=1e-8)


@pytest.mark.parametrize("t, density", [(4.0, 999.97), (15.0, 999.1), (20.0, 998.2), (90.0, 965.3)])
def test_density(t: float, density: float) -> None:
    """Density of water at one atmosphere as tables print it (common practice)."""
    assert water_density(t) == pytest.approx(density, abs=0.06)


@pytest.mark.parametrize("number", PLANTED)
def test_the_vendor_s_sums(number: str) -> None:
    """Kv, choked drop, index and choking of every row that has its mistake here (rows marked C, 0.1 %)."""
    given: dict[str, Any] = ROWS["ER-00-Kv"].inputs["base"]
    case = Case(given["Q"], given["p1"] / 100.0, given["p2"] / 100.0, given["pv"] / 100.0, given["pc"] / 100.0,
                given["rho"], given["FL"], given["d"], given["D1"], given["D2"], 320.0, 50.0, 90.0)  # fmt: skip
    name = PLANTED[number]
    found = sums(case if name is None else MISTAKES[name](case))
    for quantity, got in (("Kv", found.kv), ("dp_choked", 100.0 * found.dp_choked), ("sigma1", found.sigma)):
        row = ROWS[f"{number}-{quantity}"]
        assert abs(got - row.value) <= row.allowed, quantity
    assert found.choked == (ROWS[f"{number}-choked"].expected == "true")
