"""Flashing: saturated inlets, no flash, all vapour, and inlets that are no liquid."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.cells import call, reason
from lowpoint.physics.flashing import flash_sound_speed
from lowpoint.problems import CellError

BOTH = ("LP_FLASH", "LP_FLASH_DENSITY")


def boils(fluid: str, t: float) -> float:
    return float(functions["LP_VAPOUR_PRESSURE"](fluid, t))


@pytest.mark.parametrize("off", [-9e-5, -1e-6, 0.0, 1e-9, 1e-6, 9e-5])
def test_a_saturated_inlet_within_a_ten_thousandth(off: float) -> None:
    """Condensate at its boiling point, the reading of pressure a little off either way, flashes all the same."""
    for fluid, t in (("water", 150.0), ("propane", 30.0), ("ammonia", 10.0)):
        pv = boils(fluid, t)
        x = call("LP_FLASH", [fluid, t, pv * (1.0 + off), 0.5 * pv])
        assert x == call("LP_FLASH", [fluid, t, pv, 0.5 * pv]) > 0.04


@pytest.mark.parametrize("name", BOTH)
@pytest.mark.parametrize(
    ("args", "words"),
    [
        (["water", 181.0, 10.0, 2.0], "above the boiling temperature at p1"),
        (["propane", 30.0, 10.0, 2.0], "above the boiling temperature at p1"),
        (["water", 150.0, boils("water", 150.0) * (1.0 - 2e-4), 1.0], "above the boiling temperature at p1"),
        (["water", 375.0, 300.0, 2.0], "above the critical temperature"),
        (["water", -1.0, 10.0, 2.0], "below the freezing point"),
        (["water", 20.0, 10.0, 0.006], "below the triple point"),
        (["carbon dioxide", 0.0, 60.0, 5.0], "below the triple point"),
        (["cyclohexane", 8.0, 200.0, 5.0], "frozen"),
        (["water", 20.0, 2.0, 10.0], "outlet pressure must be the lower one"),
        (["water", 20.0, 2.0, 2.0], "outlet pressure must be the lower one"),
    ],
)
def test_no_answer(name: str, args: list[Any], words: str) -> None:
    assert call(name, args) is CellError.NUM
    assert words in reason(name, args)


@pytest.mark.parametrize("name", BOTH)
def test_salt_is_not_covered(name: str) -> None:
    assert call(name, ["sea water", 110.0, 3.0, 1.0]) is CellError.NUM
    said = reason(name, ["sea water", 110.0, 3.0, 1.0])
    assert "salt" in said
    assert "'water'" in said


def test_sea_water_that_does_not_flash_has_no_vapour() -> None:
    assert call("LP_FLASH", ["sea water", 20.0, 5.0, 2.0]) == 0.0
    assert call("LP_FLASH_DENSITY", ["sea water", 20.0, 5.0, 2.0]) == call("LP_DENSITY", ["sea water", 20.0, 2.0])
    assert "35 g/kg" in reason("LP_FLASH", ["sea water", 20.0, 5.0, 2.0])


def test_no_flash_is_exactly_none() -> None:
    for args in (["water", 20.0, 10.0, 2.0], ["water", 99.0, 3.0, 1.02], ["propane", -45.0, 10.0, 1.0],
                 ["water", 350.0, 400.0, 300.0], ["water", 300.0, 300.0, 100.0]):  # fmt: skip
        assert call("LP_FLASH", args) == 0.0, args
        assert reason("LP_FLASH", args) == "ok"


def test_without_vapour_the_density_is_that_of_the_liquid() -> None:
    """Isenthalpic, so a little warmer than before: some 0.02 K a bar (water, from memory)."""
    before = call("LP_DENSITY", ["water", 20.0, 10.0])
    after = call("LP_FLASH_DENSITY", ["water", 20.0, 10.0, 2.0])
    assert after == pytest.approx(call("LP_DENSITY", ["water", 20.0 + 8.0 * 0.022, 2.0]), rel=1e-5)
    assert after < before


def test_a_flash_says_what_it_assumes() -> None:
    assert "isenthalpic" in reason("LP_FLASH", ["water", 150.0, 10.0, 2.0])


@pytest.mark.parametrize(("fluid", "t"), [("decamethyltetrasiloxane", 250.0), ("n-dodecane", 300.0)])
def test_a_liquid_of_large_molecules_may_evaporate_wholly(fluid: str, t: float) -> None:
    """Their heat capacity is so large that the heat of the liquid suffices (retrograde fluids, common practice)."""
    pv = boils(fluid, t)
    args = [fluid, t, pv, 0.005 * pv]
    assert call("LP_FLASH", args) == 1.0
    assert "all of the liquid evaporates" in reason("LP_FLASH", args)
    # An ideal gas, no hotter than the liquid was: density above p M/(R T).
    mass = {"decamethyltetrasiloxane": 0.31069, "n-dodecane": 0.17034}[fluid]
    ideal = 0.005 * pv * 1e5 * mass / (8.314462618 * (t + 273.15))
    assert ideal * 0.99 < call("LP_FLASH_DENSITY", args) < ideal * 1.4


@pytest.mark.parametrize("t, p1, p2", [(453.15, 15e5, 2e5), (403.15, 5e5, 1.2e5), (513.15, 60e5, 20e5)])
def test_sound_of_the_mixture(t: float, p1: float, p2: float) -> None:
    """Against CoolProp's own density along the isentrope from the state of its own enthalpy, with another step."""
    from CoolProp.CoolProp import PropsSI

    h = PropsSI("H", "P", p1, "T", t, "Water")
    s = PropsSI("S", "P", p2, "H", h, "Water")
    step = 0.01 * p2
    slope = (PropsSI("D", "P", p2 + step, "S", s, "Water") - PropsSI("D", "P", p2 - step, "S", s, "Water")) / step / 2
    speed = flash_sound_speed(np.array(["water"]), np.array([t]), np.array([p1]), np.array([p2]))
    assert speed == pytest.approx(slope**-0.5, rel=2e-3)


def test_no_sound_of_a_mixture_that_is_none() -> None:
    speed = flash_sound_speed(np.array(["water", "sea water"]), np.array([300.0, 380.0]), np.array([5e5, 5e5]),
                              np.array([2e5, 1e5]))  # fmt: skip
    assert np.isnan(speed).all()
