"""Sea water against IAPWS-08 as another library has it, rival formulas, and known values."""

from __future__ import annotations

import math

import pytest
from CoolProp.CoolProp import PT_INPUTS, AbstractState
from iapws import SeaWater

from lowpoint import functions
from published.rows import read

KELVIN = 273.15
M_WATER, M_SALT = 18.015268e-3, 31.4038218e-3
"""kg/mol, of water and of the salt of the reference sea water (IAPWS R13-08)."""
NORMAL = 35.16504
"""g/kg: what sea water of practical salinity 35 holds by the reference-composition scale."""


def ratio(t: float, salinity: float) -> float:
    return float(
        functions["LP_VAPOUR_PRESSURE"]("sea water", t, salinity) / functions["LP_VAPOUR_PRESSURE"]("water", t)
    )


# The library warns above 353 K, where IAPWS-08 ends, and has no sound speed, which it always asks for, in hot brine.
@pytest.mark.parametrize("t", [0.0, 10.0, 20.0, 30.0, 45.0, 60.0, 70.0])
@pytest.mark.parametrize("salinity", [1.0, 10.0, 35.0, 45.0, 70.0, 110.0])
def test_vapour_pressure_by_the_osmotic_coefficient(t: float, salinity: float) -> None:
    """``p/p_water = exp(-phi m Mw)`` with the osmotic coefficient phi of the library iapws."""
    other = SeaWater(T=t + KELVIN, P=0.101325, S=salinity / 1000.0)
    molality = salinity / (1000.0 - salinity) / M_SALT
    assert ratio(t, salinity) == pytest.approx(math.exp(-other.osm * molality * M_WATER), rel=2e-6)


@pytest.mark.parametrize("t", [2.0, 10.0, 20.0, 30.0, 40.0])
@pytest.mark.parametrize("salinity", [5.0, 35.0, 42.0])
@pytest.mark.parametrize("p", [1.01325, 10.0, 60.0])
def test_density_by_the_gibbs_function(t: float, salinity: float, p: float) -> None:
    """IAPWS-08 where that holds (to 40 C and 42 g/kg); the correlation used here states 0.1 %."""
    other = SeaWater(T=t + KELVIN, P=p / 10.0, S=salinity / 1000.0)
    assert functions["LP_DENSITY"]("sea water", t, p, salinity) == pytest.approx(other.rho, rel=1e-3)


@pytest.mark.parametrize("t", [3.0, 10.0, 20.0, 29.0])
@pytest.mark.parametrize("p", [1.01325, 60.0])
def test_sound_speed_by_the_gibbs_function(t: float, p: float) -> None:
    """Two independent sources: Mackenzie (1981) here, IAPWS-08 there."""
    other = SeaWater(T=t + KELVIN, P=p / 10.0, S=NORMAL / 1000.0)
    assert functions["LP_SOUND_SPEED"]("sea water", t, p) == pytest.approx(other.w, rel=7e-4)


def test_rival_formulas_for_the_vapour_pressure() -> None:
    """Rows of the reference file that are other people's formulas: ours lies where it should to them."""
    rows = read("liquids")
    assert ratio(20.0, 35.0) == pytest.approx(rows["seawater-006"].value, rel=2e-3)  # Sharqawy 2010 (from memory)
    assert ratio(20.0, 35.0) == pytest.approx(rows["seawater-007"].value, rel=3e-4)  # Nayar 2016 (from memory)
    low = rows["seawater-008"].value  # the library's correlation, known to be 0.5 % low
    ours = functions["LP_VAPOUR_PRESSURE"]("sea water", 20.0) * 1e5
    assert 0.003 < ours / low - 1.0 < 0.007


def test_raoult() -> None:
    """Dilute limit: the lowering is that of the ions' number, whatever the salt (van 't Hoff)."""
    molality = 0.1 / 999.9 / M_SALT
    assert 1.0 - ratio(25.0, 0.1) == pytest.approx(molality * M_WATER, rel=0.03)


def test_known_values() -> None:
    # From memory: EOS-80 check values at practical salinity 35 and one atmosphere, 1027.675 at 5 C, 1023.343 at 25 C.
    assert functions["LP_DENSITY"]("sea water", 5.0, 1.01325, NORMAL) == pytest.approx(1027.675, rel=2e-4)
    assert functions["LP_DENSITY"]("sea water", 25.0, 1.01325, NORMAL) == pytest.approx(1023.343, rel=4e-4)
    # From memory: viscosity of sea water of 35 g/kg about 1.08 mPa.s at 20 C, 0.96 at 25 C.
    assert functions["LP_VISCOSITY"]("sea water", 20.0) == pytest.approx(1.08, abs=0.015)
    assert functions["LP_VISCOSITY"]("sea water", 25.0) == pytest.approx(0.96, abs=0.015)
    # From memory: Mackenzie's own check value, 1550.744 m/s at 25 C, 35 g/kg, 1000 m depth.
    depth = 1.01325 + 1000.0 * 1025.0 * 9.80665 / 1e5
    assert functions["LP_SOUND_SPEED"]("sea water", 25.0, depth) == pytest.approx(1550.744, abs=0.001)
    # Common practice: sea water boils about half a degree above fresh water at one atmosphere.
    assert functions["LP_SATURATION_TEMPERATURE"]("sea water", 1.01325) == pytest.approx(100.5, abs=0.15)


@pytest.mark.parametrize("t", [0.0, 20.0, 40.0, 70.0, 100.0, 120.0])
@pytest.mark.parametrize("salinity", [0.0, 10.0, 35.0, 70.0, 120.0])
def test_density_and_viscosity_by_a_library_that_cites_the_same_paper(t: float, salinity: float) -> None:
    """Sharqawy et al. (2010) as fitted anew in CoolProp (MITSW); its fit of the viscosity strays by up to 1 %."""
    solution = AbstractState("INCOMP", "MITSW")
    solution.set_mass_fractions([salinity / 1000.0])
    solution.update(PT_INPUTS, 1e6, t + KELVIN)
    assert functions["LP_DENSITY"]("sea water", t, None, salinity) == pytest.approx(solution.rhomass(), rel=2e-4)
    viscosity = functions["LP_VISCOSITY"]("sea water", t, None, salinity) / 1000.0
    assert viscosity == pytest.approx(solution.viscosity(), rel=1.2e-2)


@pytest.mark.parametrize("t", [0.0, 10.0, 25.0, 50.0, 90.0, 120.0])
def test_without_salt_it_is_water(t: float) -> None:
    """IAPWS-95 and IAPWS R12-08 by CoolProp; the paper states 0.1 % for the density."""
    for name, close in (("LP_DENSITY", 3e-4), ("LP_VISCOSITY", 2e-3), ("LP_VAPOUR_PRESSURE", 1e-12)):
        args = (t, 0.0) if name == "LP_VAPOUR_PRESSURE" else (t, None, 0.0)
        assert functions[name]("sea water", *args) == pytest.approx(functions[name]("water", t), rel=close), name
