"""Flashing: how much of the liquid leaves a valve as vapour, and the density of what leaves."""

from __future__ import annotations

import math
from typing import Any

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics import fluids, seawater
from lowpoint.physics.fluids import Split
from lowpoint.physics.liquids import NORMAL_SALINITY, SALT_IS_FIXED, TOO_COLD, TOO_HOT, each, is_liquid, pure
from lowpoint.physics.names import is_salty, known_names, resolve
from lowpoint.physics.sizing import OUTLET

__all__ = ["flash_density", "flash_share", "flash_sound_speed"]


def _split(name: str, t: float, p1: float, p2: float) -> Split:
    """What leaves the valve; of sea water only where none of it flashes, for the salt would stay in the liquid."""
    if not is_salty(name):
        return fluids.flash(name, t, p1, p2)
    if is_liquid(name, t, p1) and is_liquid(name, t, p2):
        return Split(0.0, seawater.density(t, p2, NORMAL_SALINITY / 1000.0))
    return Split(math.nan, math.nan)


def _boiled(fluid: Any, t: Any, p1: Any) -> Any:
    return each(lambda name, x, y: not is_liquid(name, x, y), fluid, t, p1)


def _freezes(fluid: Any, p2: Any) -> Any:
    return each(lambda name, x: x < fluids.span(pure(name)).p_low, fluid, p2)


def _salt_stays(fluid: Any, t: Any, p2: Any) -> Any:
    return each(lambda name, x, y: is_salty(name) and not is_liquid(name, x, y), fluid, t, p2)


def _all_vapour(fluid: Any, t: Any, p1: Any, p2: Any) -> Any:
    return each(lambda *state: _split(*state).quality >= 1.0, fluid, t, p1, p2)


_NO_ANSWER = (
    TOO_COLD,
    TOO_HOT,
    NoAnswer("t is above the boiling temperature at p1: what enters is vapour, not liquid; check t and p1", _boiled),
    NoAnswer("p2 is below the triple point: the liquid would freeze", _freezes),
    NoAnswer(
        "sea water flashes here and leaves its salt in the liquid, which is not covered; ask for 'water' where that "
        "will do as an estimate",
        _salt_stays,
    ),
    NoAnswer("the inlet is frozen, or p1 is beyond the range of the equation of state"),
)
_CAUTIONS = (
    Caution("isenthalpic, phases in equilibrium and at one velocity; the real share lags behind in short valves",
            lambda fluid, t, p1, p2: each(lambda *state: _split(*state).quality > 0.0, fluid, t, p1, p2)),
    Caution("all of the liquid evaporates", _all_vapour),
    SALT_IS_FIXED,
)  # fmt: skip
_FLUID = {"fluid": resolve}
_WORDS = {"fluid": known_names}


@function(
    "FLASH", group="valves", gives="mass fraction of vapour after the valve, 0 where none", source_key="CoolProp",
    equation="(h(t, p1) - hf(p2))/hfg(p2), within 0 and 1", must=(OUTLET,), no_answer=_NO_ANSWER, cautions=_CAUTIONS,
    resolve=_FLUID, words=_WORDS,
)  # fmt: skip
def flash_share(fluid: q.Fluid, t: q.T, p1: q.P1, p2: q.P2) -> q.Share:
    """Vapour share after an isenthalpic drop, ``x = (h(t, p1) - hf(p2))/hfg(p2)``, within 0 and 1.

    Arrays of one length, SI; velocities before and after are taken as equal. Within 0.01 % of the vapour pressure
    the inlet counts as saturated. NaN where the inlet is no liquid, the outlet would freeze,
    or sea water (35 g/kg) flashes.
    Source: CoolProp and the equations of state that it cites (water IAPWS-95).
    """
    return each(lambda *state: _split(*state).quality, fluid, t, p1, p2)


@function(
    "FLASH_DENSITY", group="valves", gives="homogeneous density after the valve", source_key="CoolProp",
    equation="1/((1-x)/rho_f + x/rho_g) at p2", must=(OUTLET,), no_answer=_NO_ANSWER, cautions=_CAUTIONS,
    resolve=_FLUID, words=_WORDS,
)  # fmt: skip
def flash_density(fluid: q.Fluid, t: q.T, p1: q.P1, p2: q.P2) -> q.Density:
    """Density of the homogeneous mixture after an isenthalpic drop, ``1/((1-x)/rho_f + x/rho_g)``.

    Arrays of one length, SI; without vapour that of the liquid at p2. NaN as for :func:`flash_share`.
    Source: CoolProp and the equations of state that it cites (water IAPWS-95).
    """
    return each(lambda *state: _split(*state).density, fluid, t, p1, p2)


def flash_sound_speed(fluid: q.Fluid, t: q.T, p1: q.P1, p2: q.P2) -> Any:
    """Speed of sound in the homogeneous mixture after an isenthalpic drop, ``sqrt((dp/drho)_s)``, m/s.

    Arrays of one length, SI. Where the mixture would leave faster, the outlet chokes and p2 is not reached there
    (homogeneous equilibrium, as in any text on two-phase flow). NaN where nothing
    flashes, where all does, and for sea water.
    Source: CoolProp and the equations of state that it cites.
    """
    return each(lambda name, *state: math.nan if is_salty(name) else fluids.flash_sound_speed(name, *state),
                fluid, t, p1, p2)  # fmt: skip
