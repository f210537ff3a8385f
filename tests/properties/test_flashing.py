"""What must hold of any flash: shares within bounds, monotony, continuity where vapour begins."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from lowpoint import functions
from lowpoint.physics import fluids

LIQUIDS = ["water", "propane", "n-butane", "n-hexane", "ammonia", "methanol", "R134a", "toluene", "carbon dioxide",
           "propylene", "nitrogen", "benzene"]  # fmt: skip
CASES = st.tuples(st.sampled_from(LIQUIDS), st.floats(0.3, 0.97), st.floats(1.0, 3.0), st.floats(0.02, 0.98))


def inlet(fluid: str, share: float, above: float) -> tuple[float, float, float]:
    """Temperature, deg C, inlet and boiling pressure, bar."""
    limits = fluids.span(fluid)
    t = limits.t_low + share * (limits.t_critical - limits.t_low) - 273.15
    pv = float(functions["LP_VAPOUR_PRESSURE"](fluid, t))
    return t, pv * above, pv


def both(*args: object) -> tuple[float, float]:
    return float(functions["LP_FLASH"](*args)), float(functions["LP_FLASH_DENSITY"](*args))


@given(CASES, st.floats(0.02, 0.98))
def test_a_deeper_flash_makes_more_vapour_and_a_thinner_mixture(
    case: tuple[str, float, float, float], other: float
) -> None:
    fluid, share, above, depth = case
    t, p1, pv = inlet(fluid, share, above)
    lowest = max(0.1 * pv, fluids.span(fluid).p_low * 1e-5 * 1.01)
    deep, shallow = (lowest + (p1 - lowest) * x for x in sorted((depth, other)))
    (x_deep, rho_deep), (x_shallow, rho_shallow) = both(fluid, t, p1, deep), both(fluid, t, p1, shallow)
    assert 0.0 <= x_shallow <= x_deep <= 1.0
    assert rho_deep <= rho_shallow * (1.0 + 1e-9)
    assert rho_deep > 0.0


@given(CASES)
def test_density_is_continuous_where_vapour_begins(case: tuple[str, float, float, float]) -> None:
    """Either side of the outlet pressure at which the first bubble appears."""
    fluid, share, above, _ = case
    t, p1, pv = inlet(fluid, share, 1.0 + 1e-3 + (above - 1.0))
    low, high = 0.5 * pv, p1 * (1.0 - 1e-12)
    # Throttling near the critical point moves it out of this bracket.
    assume(functions["LP_FLASH"](fluid, t, p1, low) > 0.0 == functions["LP_FLASH"](fluid, t, p1, high))
    for _ in range(60):
        middle = 0.5 * (low + high)
        low, high = (low, middle) if functions["LP_FLASH"](fluid, t, p1, middle) == 0.0 else (middle, high)
    (x, wet), (none, dry) = both(fluid, t, p1, low), both(fluid, t, p1, high)
    assert none == 0.0 < x < 1e-9
    assert wet == pytest.approx(dry, rel=1e-6)
    # Isenthalpic expansion of a liquid changes its temperature little: it boils near its boiling pressure.
    assert math.isclose(low, pv, rel_tol=0.25 if share < 0.9 else 0.6)


@pytest.mark.parametrize("fluid", LIQUIDS)
def test_the_mixture_lies_between_its_phases(fluid: str) -> None:
    """1/rho is the mean of the specific volumes: the same vapour density comes from any share at one pressure."""
    found = []
    t2, p2, _ = inlet(fluid, 0.4, 1.0)
    liquid = functions["LP_DENSITY"](fluid, t2)
    for share in (0.5, 0.6, 0.7):
        t, _, pv = inlet(fluid, share, 1.0)
        x, rho = both(fluid, t, pv, p2)
        found.append(x / (1.0 / rho - (1.0 - x) / liquid))
        assert rho < liquid
    assert np.ptp(found) < 1e-6 * found[0]


@given(CASES)
def test_heat_is_conserved_from_stage_to_stage(case: tuple[str, float, float, float]) -> None:
    """Throttled first to a pressure at which nothing boils, then on, gives what one step gives."""
    fluid, share, above, depth = case
    t, p1, pv = inlet(fluid, share, above + 0.2)
    p2 = max(depth * pv, fluids.span(fluid).p_low * 1.01e-5)
    between = 0.5 * (p1 + 1.1 * pv)
    x, rho = both(fluid, t, p1, between)
    assume(x == 0.0)
    then = temperature_of(fluid, rho, between, t)
    assert both(fluid, then, between, p2)[0] == pytest.approx(both(fluid, t, p1, p2)[0], abs=1e-6)


def temperature_of(fluid: str, rho: float, p: float, near: float) -> float:
    """Temperature at which a liquid has a density at a pressure, by halving within 25 K."""
    cooler, hotter = near - 25.0, near + 25.0
    for _ in range(60):
        middle = 0.5 * (cooler + hotter)
        # Denser means cooler; NaN means that it boils there.
        cooler, hotter = (middle, hotter) if functions["LP_DENSITY"](fluid, middle, p) > rho else (cooler, middle)
    return cooler
