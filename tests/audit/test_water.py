"""Water of the audit against other libraries: IAPWS-IF97 of ``iapws``, and IAPWS-95 of the property library."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from iapws import IAPWS97

from lowpoint.audit import water
from lowpoint.audit.inputs import property_of
from lowpoint.physics.liquids import liquid_density, vapour_pressure_of
from lowpoint.sources import source

SHEETS = Path(__file__).parents[2] / "workbooks" / "datasheets"


def test_the_saturation_line() -> None:
    """IAPWS R7-97(2012), table 35: the release's own verification values (from memory; the library iapws agrees)."""
    found = water.vapour_pressure(np.array([300.0, 500.0, 600.0]))
    assert found == pytest.approx([0.353658941e4, 0.263889776e7, 0.123443146e8], rel=1e-8)


def test_density_of_the_formulation() -> None:
    """IAPWS R7-97(2012), table 5: specific volumes of region 1 (from memory; the library iapws agrees)."""
    found = water.density(np.array([300.0, 300.0, 500.0]), np.array([3e6, 80e6, 3e6]))
    assert 1.0 / found == pytest.approx([0.100215168e-2, 0.971180894e-3, 0.120241800e-2], rel=1e-8)


def test_the_formulation_is_cited() -> None:
    assert "R7-97" in source(water.SOURCE).citation


@pytest.mark.parametrize("kelvin", [300.0, 500.0, 600.0])
def test_against_coolprop_by_the_same_formulation(kelvin: float) -> None:
    """The property library has IF97 of its own, beside IAPWS-95."""
    from CoolProp.CoolProp import PropsSI

    t = np.array([kelvin])
    assert water.vapour_pressure(t)[0] == pytest.approx(PropsSI("P", "T", kelvin, "Q", 0, "IF97::Water"), rel=1e-9)
    found = water.density(t, np.array([30e6]))[0]
    assert found == pytest.approx(PropsSI("D", "T", kelvin, "P", 30e6, "IF97::Water"), rel=1e-9)


def test_ice_has_neither() -> None:
    """Below 0 deg C there is no answer, and nothing is loaded to find that out."""
    for name in ("pv", "density"):
        found = property_of(name, "water", np.array([269.0, 300.0]), np.full(2, 5e5), np.full(2, np.nan))
        assert np.isnan(found).tolist() == [True, False]


@pytest.mark.parametrize("celsius", [0.5, 15.0, 60.0, 104.0, 180.0, 260.0, 330.0])
def test_against_the_library_iapws(celsius: float) -> None:
    state = IAPWS97(T=celsius + 273.15, P=20.0)
    found = water.density(np.array([celsius + 273.15]), np.array([20e6]))
    assert found == pytest.approx(state.rho, rel=1e-9)


@pytest.mark.parametrize("celsius", [0.5, 15.0, 60.0, 104.0, 180.0, 260.0])
@pytest.mark.parametrize("bar", [None, 60.0, 400.0])
def test_near_enough_to_iapws_95(celsius: float, bar: float | None) -> None:
    """A tenth of the least tolerance that a claim of a property has (0.5 %)."""
    t, p = np.array([celsius + 273.15]), np.array([np.nan if bar is None else bar * 1e5])
    assert water.vapour_pressure(t)[0] == pytest.approx(vapour_pressure_of("water", float(t[0])), rel=2.5e-4)
    assert water.density(t, p) == pytest.approx(liquid_density(np.array(["water"]), t, p, np.array([0.0])), rel=2e-4)


def test_below_the_vapour_pressure_there_is_no_liquid() -> None:
    t = np.array([373.15, 373.15])
    found = property_of("density", "water", t, np.array([0.9e5, 1.5e5]), np.full(2, np.nan))
    assert np.isnan(found).tolist() == [True, False]


def test_beyond_the_range_the_property_library_answers() -> None:
    """365 deg C lies beyond region 1 (up to 350 deg C)."""
    t, p = np.array([638.15]), np.array([250e5])
    assert not water.covers("water", t, p)
    assert property_of("pv", "water", t, p, np.array([np.nan]))[0] == pytest.approx(
        vapour_pressure_of("water", 638.15), rel=1e-12
    )
    assert not water.covers("sea water", np.array([300.0]), p)


@pytest.mark.parametrize("name", ["district-return.xlsx", "brine-let-down.csv"])
def test_a_sheet_of_water_is_audited_without_the_property_library(name: str) -> None:
    """Loading it would take longer than all the rest."""
    code = ("import sys; from lowpoint.audit.auditing import audit_document; "
            "from lowpoint.audit.reading import read_sheet; "
            "print(audit_document(read_sheet(sys.argv[1])).exit_code, 'CoolProp' in sys.modules)")  # fmt: skip
    done = subprocess.run([sys.executable, "-c", code, str(SHEETS / name)], capture_output=True, text=True, check=True)
    assert done.stdout.split() == ["1", "False"]
