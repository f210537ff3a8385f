"""What must hold of any liquid: inverses, monotony, and the temperature that just keeps an index."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from lowpoint import functions
from lowpoint.physics import fluids
from lowpoint.physics.names import known_names

PURE = [name for name in known_names() if name not in ("sea water", "brine")]
TRADE = ["water", "propane", "n-butane", "isobutane", "n-pentane", "n-hexane", "n-heptane", "n-octane", "benzene",
         "toluene", "cyclohexane", "methanol", "ethanol", "acetone", "ammonia", "propylene", "ethylene", "ethane",
         "methane", "carbon dioxide", "nitrogen", "oxygen", "sulfur dioxide", "hydrogen sulfide", "R134a", "R32",
         "R1234yf", "R1234ze(E)", "vinyl chloride", "heavy water", "dimethyl ether", "chlorine"]  # fmt: skip
KELVIN = 273.15


def span(fluid: str, rows: int, low: float = 0.02, high: float = 0.98) -> np.ndarray:
    """Temperatures, deg C, over the liquid's whole range."""
    limits = fluids.span(fluid)
    return limits.t_low + np.linspace(low, high, rows) * (limits.t_critical - limits.t_low) - KELVIN


@pytest.mark.parametrize("fluid", TRADE)
def test_boiling_temperature_inverts_the_vapour_pressure(fluid: str) -> None:
    t = span(fluid, 25)
    p = functions["LP_VAPOUR_PRESSURE"](fluid, t)
    back = functions["LP_SATURATION_TEMPERATURE"](fluid, p)
    assert np.max(np.abs((back - t) / (t + KELVIN))) < 1e-7


def test_boiling_temperature_inverts_the_vapour_pressure_of_sea_water() -> None:
    t = np.array([0.0, 0.01, 0.2, 1.0, 20.0, 60.0, 80.0, 100.0, 119.0, 120.0])
    p = functions["LP_VAPOUR_PRESSURE"]("sea water", t)
    assert np.max(np.abs(functions["LP_SATURATION_TEMPERATURE"]("sea water", p) - t)) < 1e-4  # at 0 C, else 1e-9
    assert np.max(np.abs(functions["LP_SATURATION_TEMPERATURE"]("sea water", p[3:]) - t[3:])) < 1e-8


@pytest.mark.parametrize("fluid", PURE)
def test_along_saturation(fluid: str) -> None:
    """Vapour pressure rises and density falls with temperature; both are finite over the whole range."""
    t = span(fluid, 30)
    p, rho = functions["LP_VAPOUR_PRESSURE"](fluid, t), functions["LP_DENSITY"](fluid, t)
    assert (np.diff(p) > 0.0).all()
    # Water and heavy water are densest at 4 and 11 C, helium at 2.2 K.
    first = {"water": 1, "heavy water": 2, "helium": 1}.get(fluid, 0)
    assert (np.diff(rho[first:]) < 0.0).all()
    assert (functions["LP_SOUND_SPEED"](fluid, t) > 0.0).all()
    assert (p < functions["LP_CRITICAL_PRESSURE"](fluid)).all()


@pytest.mark.parametrize("fluid", PURE)
def test_pressure_compresses(fluid: str) -> None:
    t = span(fluid, 9, 0.2, 0.95)
    saturated = functions["LP_DENSITY"](fluid, t)
    last = saturated
    pv, pc = functions["LP_VAPOUR_PRESSURE"](fluid, t), functions["LP_CRITICAL_PRESSURE"](fluid)
    for share in (1e-7, 1e-3, 0.5, 1.0, 2.0):
        compressed = functions["LP_DENSITY"](fluid, t, pv * (1.0 + 1e-9) + share * pc)
        known = np.isfinite(compressed)  # some freeze under pressure
        assert known[4:].all()
        assert (compressed[known] >= last[known] * (1.0 - 1e-9)).all()
        assert (compressed[known] < 3.0 * saturated[known]).all()
        last = np.where(known, compressed, last)


VISCOUS = [name for name in TRADE if np.isfinite(functions["LP_VISCOSITY"](name, float(span(name, 1, 0.6, 0.6)[0])))]


@pytest.mark.parametrize("fluid", VISCOUS)
def test_viscosity_falls_with_temperature(fluid: str) -> None:
    mu = functions["LP_VISCOSITY"](fluid, span(fluid, 20, 0.25, 0.97))
    assert (np.diff(mu) < 0.0).all()
    assert 5e-3 < mu[-1] < mu[0] < 100.0  # mPa.s


def test_most_of_the_trade_has_a_viscosity() -> None:
    assert len(VISCOUS) >= 24


@given(st.floats(0.1, 117.0), st.floats(0.0, 120.0), st.floats(0.0, 120.0))
def test_salt_lowers_pressure_and_raises_density(t: float, one: float, other: float) -> None:
    little, much = sorted((one, other))
    pv, rho, mu = (functions[f"LP_{name}"] for name in ("VAPOUR_PRESSURE", "DENSITY", "VISCOSITY"))
    assert pv("sea water", t, little) >= pv("sea water", t, much) * (1.0 - 1e-12)
    assert rho("sea water", t, None, little) <= rho("sea water", t, None, much) * (1.0 + 1e-12)
    assert mu("sea water", t, None, little) <= mu("sea water", t, None, much) * (1.0 + 1e-12)


FORMS = {"upstream": lambda s: s, "downstream": lambda s: s - 1.0, "xf": lambda s: 1.0 / s}


@given(
    st.sampled_from([*TRADE, "sea water"]),
    st.floats(0.25, 0.9),
    st.floats(1.02, 20.0),
    st.floats(1.05, 6.0),
    st.sampled_from(sorted(FORMS)),
)
def test_allowed_temperature_brings_the_index_to_its_limit(
    fluid: str, share: float, above: float, sigma: float, form: str
) -> None:
    """For a case whose index at some temperature is the limit, that temperature is found; and it is met exactly."""
    t = 5.0 + share * 100.0 if fluid == "sea water" else float(span(fluid, 1, share, share)[0])
    pv = float(functions["LP_VAPOUR_PRESSURE"](fluid, t))
    p1 = pv * above
    p2 = p1 - (p1 - pv) / sigma
    limit = FORMS[form](sigma)
    hottest = functions["LP_ALLOWED_TEMPERATURE"](fluid, p1, p2, limit, form)
    assert hottest == pytest.approx(t, abs=1e-6 * (t + KELVIN) * above)
    there = functions["LP_VAPOUR_PRESSURE"](fluid, hottest)
    assert functions["LP_SIGMA"](p1, p2, there, form) == pytest.approx(limit, rel=1e-7 * above, abs=1e-9)


@given(st.floats(10.0, 100.0), st.floats(0.1, 0.9), st.floats(1.1, 3.0), st.floats(1.001, 1.5))
def test_hotter_is_worse(p1: float, drop: float, sigma: float, more: float) -> None:
    p2 = p1 * (1.0 - drop * 0.3)
    one = functions["LP_ALLOWED_TEMPERATURE"]("water", p1, p2, sigma)
    other = functions["LP_ALLOWED_TEMPERATURE"]("water", p1, p2, sigma * more)
    assert np.isnan(other) or other < one


# --- columns and site ---------------------------------------------------------------------------------------------
@given(st.floats(5.0, 100.0), st.floats(-20.0, 20.0), st.floats(-20.0, 20.0), st.floats(400.0, 1400.0))
def test_columns_add(p: float, one: float, other: float, density: float) -> None:
    column = functions["LP_COLUMN"]
    assert column(column(p, one, density), other, density) == pytest.approx(column(p, one + other, density), rel=1e-12)
    assert column(column(p, one, density), -one, density) == pytest.approx(p, rel=1e-13)


@given(st.floats(-5000.0, 11000.0), st.floats(-5000.0, 11000.0))
def test_the_air_thins_upward(one: float, other: float) -> None:
    low, high = sorted((one, other))
    assert functions["LP_ATMOSPHERE"](low) >= functions["LP_ATMOSPHERE"](high)
