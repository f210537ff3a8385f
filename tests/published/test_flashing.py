"""Flashing against published rows, and its energy balance against the industrial formulation IAPWS-IF97."""

from __future__ import annotations

import pytest
from iapws import IAPWS97

from lowpoint import functions
from published.rows import Row, parameters, read

ROWS = read("flashing")
QUANTITIES = {"outlet vapour quality isenthalpic": "LP_FLASH", "homogeneous outlet density": "LP_FLASH_DENSITY"}


@pytest.mark.parametrize("row", parameters(ROWS.values()))
def test_row(row: Row) -> None:
    i = row.inputs
    got = functions[QUANTITIES[row.quantity]](i["fluid"], i["t1_C"], i["p1_Pa"] / 1e5, i["p2_Pa"] / 1e5)
    assert got == pytest.approx(row.value, abs=row.allowed), (row.source, row.how_known)


def test_every_row_is_checked() -> None:
    assert len(ROWS) == 4
    assert {row.quantity for row in ROWS.values()} == set(QUANTITIES)


CASES = [
    # t C, p1 bar, p2 bar; None: saturated inlet
    (100.5, 1.5, 1.0), (120.0, None, 1.0), (150.0, None, 1.0), (150.0, 40.0, 2.0), (180.0, 12.0, 1.0),
    (200.0, None, 5.0), (250.0, 60.0, 10.0), (300.0, 100.0, 1.0), (60.0, 3.0, 0.05), (160.0, 100.0, 6.0),
]  # fmt: skip


@pytest.mark.parametrize(("t", "p1", "p2"), CASES)
def test_energy_balance_by_the_industrial_formulation(t: float, p1: float | None, p2: float) -> None:
    """h before = h after, both from IAPWS-IF97 as the library iapws has it; shares agree within 0.3 %."""
    kelvin = t + 273.15
    before = IAPWS97(T=kelvin, x=0) if p1 is None else IAPWS97(T=kelvin, P=p1 / 10.0)
    liquid, vapour = IAPWS97(P=p2 / 10.0, x=0), IAPWS97(P=p2 / 10.0, x=1)
    inlet = p1 or functions["LP_VAPOUR_PRESSURE"]("water", t)
    x = functions["LP_FLASH"]("water", t, inlet, p2)
    after = (1.0 - x) * liquid.h + x * vapour.h
    # The two formulations differ by some 0.1 kJ/kg at equal temperature.
    assert after == pytest.approx(before.h, abs=max(0.003 * x * (vapour.h - liquid.h), 0.15))
    volume = (1.0 - x) * liquid.v + x * vapour.v
    assert functions["LP_FLASH_DENSITY"]("water", t, inlet, p2) == pytest.approx(1.0 / volume, rel=3e-3)


def test_rule_of_thumb_of_condensate() -> None:
    # Common practice: condensate of 10 bar g flashed to atmosphere gives about 16 % steam.
    assert functions["LP_FLASH"]("condensate", 184.1, 11.1, 1.013) == pytest.approx(0.16, abs=0.004)
