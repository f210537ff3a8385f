"""The site: standard atmosphere and columns of liquid; the rows of ISO 2533 are checked in test_liquids.py."""

from __future__ import annotations

import pytest
from fluids.atmosphere import ATMOSPHERE_1976

from lowpoint import functions


@pytest.mark.parametrize("z", [-5000.0, -430.0, 0.0, 250.0, 1609.344, 2240.0, 3640.0, 8848.0, 11000.0])
def test_atmosphere_by_an_independent_library(z: float) -> None:
    """The US standard atmosphere 1976 is that of ISO 2533 up to here (library fluids)."""
    assert functions["LP_ATMOSPHERE"](z) * 1e5 == pytest.approx(ATMOSPHERE_1976(z).P, rel=5e-6)


def test_known_heights() -> None:
    # From memory: the standard atmosphere at 1500 m is 845.6 hPa, at 11 000 m 227 hPa; 12.2 psi in a city a mile up.
    assert functions["LP_ATMOSPHERE"](1500.0) == pytest.approx(0.8456, abs=5e-5)
    assert functions["LP_ATMOSPHERE"](11000.0) == pytest.approx(0.227, abs=5e-4)
    assert functions["LPU_ATMOSPHERE"](5280.0) == pytest.approx(12.1, abs=0.15)


def test_columns() -> None:
    # Definition: ten metres of water of 1000 kg/m3 weigh 0.980665 bar; 2.31 ft of water make a psi (common practice).
    assert functions["LP_COLUMN"](5.0, 10.0, 1000.0) == pytest.approx(4.019335, rel=1e-12)
    assert functions["LP_COLUMN"](5.0, -10.0, 1000.0) == pytest.approx(5.980665, rel=1e-12)
    assert 50.0 - functions["LPU_COLUMN"](50.0, 2.31, 62.4) == pytest.approx(1.0, abs=2e-3)
