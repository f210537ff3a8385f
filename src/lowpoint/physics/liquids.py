"""Vapour pressure, boiling and critical point, density, viscosity and speed of sound of a liquid known by name.

Kernels over columns; the values come one by one from :mod:`lowpoint.physics.fluids` and
:mod:`lowpoint.physics.seawater`, which compute each distinct one once.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from itertools import repeat
from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, Must, NoAnswer, function
from lowpoint.physics import fluids, seawater
from lowpoint.physics.indices import to_upstream
from lowpoint.physics.names import is_salty, known_names, resolve

__all__ = ["boiling_temperature", "critical_pressure", "hottest_allowed", "liquid_density", "liquid_viscosity",
           "saturation_pressure", "sound_speed"]  # fmt: skip

FLUID = {"fluid": resolve}
FLUID_WORDS = {"fluid": known_names}
NORMAL_SALINITY = 35.0
"""Standard sea water, g/kg."""
WATER_LIKE = "water"


def _names(fluid: Any, rows: int) -> Iterable[str]:
    names = [fluid] if isinstance(fluid, str) else fluid.tolist()
    return repeat(names[0], rows) if len(names) == 1 else names


def _numbers(x: Any, rows: int) -> Iterable[float | None]:
    """The numbers of a column, None where one is omitted; one number stands for all rows."""
    if x is None:
        return repeat(None, rows)
    numbers = [None if v != v else v for v in x.tolist()]
    return repeat(numbers[0], rows) if len(numbers) == 1 else numbers


def each(answer: Callable[..., Any], fluid: Any, *columns: Any) -> Any:
    """``answer(name, number...)`` row by row; a column may be None or hold one number for all rows."""
    lengths = [len(x) for x in (fluid, *columns) if x is not None and not isinstance(x, str)]
    rows = max(lengths, default=1)
    return np.array([*map(answer, _names(fluid, rows), *(_numbers(x, rows) for x in columns))])


def pure(name: str) -> str:
    """The pure substance behind a name: that of sea water is water."""
    return WATER_LIKE if is_salty(name) else name


def vapour_pressure_of(name: str, t: float, salinity: float = NORMAL_SALINITY / 1000.0) -> float:
    """Vapour pressure of one liquid, Pa."""
    return seawater.vapour_pressure(t, salinity) if is_salty(name) else fluids.vapour_pressure(name, t)


def boiling_temperature_of(name: str, p: float) -> float:
    """Boiling temperature of one liquid, K; sea water of normal salinity."""
    return (
        seawater.saturation_temperature(p, NORMAL_SALINITY / 1000.0)
        if is_salty(name)
        else fluids.saturation_temperature(name, p)
    )


def _temperatures(name: str) -> tuple[float, float]:
    if is_salty(name):
        return seawater.T_LOW, seawater.T_HIGH
    limits = fluids.span(name)
    return limits.t_low, limits.t_critical


# --- why there is no answer -------------------------------------------------------------------------------------
def _cold(fluid: Any, t: Any) -> Any:
    return each(lambda name, x: x < _temperatures(name)[0], fluid, t)


def _hot(fluid: Any, t: Any) -> Any:
    return each(lambda name, x: x > _temperatures(name)[1], fluid, t)


def is_liquid(name: str, t: float, p: float | None) -> bool:
    """Does a liquid stay one at a pressure?"""
    return seawater.is_liquid(t, p, NORMAL_SALINITY / 1000.0) if is_salty(name) else fluids.is_liquid(name, t, p)


def _boils(fluid: Any, t: Any, p: Any) -> Any:
    return each(lambda name, x, y: not is_liquid(name, x, y), fluid, t, p)


def _freezes(fluid: Any, t: Any, p: Any) -> Any:
    return each(lambda name, x, y: y is not None and fluids.is_frozen(pure(name), x, y), fluid, t, p)


def _beyond_state(fluid: Any, p: Any) -> Any:
    return each(lambda name, x: x is not None and x > fluids.span(pure(name)).p_high, fluid, p)


def _beyond_fit(fluid: Any, p: Any) -> Any:
    return each(lambda name, x: x is not None and x > fluids.span(pure(name)).p_fitted, fluid, p)


def _salty(fluid: Any) -> Any:
    return each(is_salty, fluid)


def _low_pressure(fluid: Any, p: Any) -> Any:
    return each(lambda name, x: x < fluids.span(pure(name)).p_low, fluid, p)


def _high_pressure(fluid: Any, p: Any) -> Any:
    return each(lambda name, x: x > fluids.span(pure(name)).p_critical, fluid, p)


TOO_COLD = NoAnswer("t is below the freezing point of the liquid, or below where its equation of state begins", _cold)
TOO_HOT = NoAnswer(
    "t is above the critical temperature: there is no liquid (sea water: above 120 C, where its equations end)", _hot
)
BOILS_AWAY = NoAnswer("the liquid boils at this temperature and pressure; check t, and whether p is absolute", _boils)
FROZEN = NoAnswer("the liquid is frozen at this temperature and pressure", _freezes)
OUT_OF_STATE = NoAnswer("the pressure is beyond the range of the equation of state", _beyond_state)
NO_STATE = NoAnswer("the equation of state has no answer here; it is weak next to the critical point")

SALT_IS_NORMAL = Caution(
    "a brine was taken at the salinity of normal sea water, 35 g/kg; give its own",
    lambda fluid, salinity: each(lambda name, s: name == "brine" and s == NORMAL_SALINITY / 1000.0, fluid, salinity),
)
SALT_IS_FIXED = Caution("sea water of 35 g/kg was taken", _salty)
SALT_NOT_USED = Caution(
    "salinity is used for sea water and its brines only, and was left aside",
    lambda fluid, salinity: each(
        lambda name, s: not is_salty(name) and s not in (None, 0.0, NORMAL_SALINITY / 1000.0), fluid, salinity
    ),
)
CONTINUED = Caution("the pressure is above those that the equation of state was fitted to", _beyond_fit)
EXTRAPOLATED = Caution(
    "the vapour pressure of sea water is extrapolated above 80 C",
    lambda fluid, t: each(lambda name, x: is_salty(name) and x > 353.15, fluid, t),
)
CORRELATION = Caution(
    "density and viscosity of sea water are correlations for atmospheric pressure (Sharqawy et al. 2010); the "
    "density was compressed as much as water is", _salty,
)  # fmt: skip


@function(
    "VAPOUR_PRESSURE", group="liquids", gives="saturation (vapour) pressure of a liquid", source_key="CoolProp",
    equation="equation of state of the pure liquid (water: IAPWS-95); sea water: that of water times "
    "exp(-phi m Mw), phi from IAPWS-08",
    no_answer=(TOO_COLD, TOO_HOT, NO_STATE), cautions=(SALT_IS_NORMAL, SALT_NOT_USED, EXTRAPOLATED),
    resolve=FLUID, words=FLUID_WORDS,
)  # fmt: skip
def saturation_pressure(fluid: q.Fluid, t: q.T, salinity: q.Salinity = NORMAL_SALINITY) -> q.Pressure:  # type: ignore[assignment]
    """Vapour pressure ``pv`` at a temperature, from the equation of state of the liquid.

    Arrays of one length, SI; salinity as a mass fraction, used for sea water and brines of it only. NaN below the
    freezing point (0 deg C counts as liquid water) and above the critical one.
    Source: CoolProp and the equations that it cites (water IAPWS-95); sea water IAPWS-08, valid to 80 C.
    """
    return each(vapour_pressure_of, fluid, t, salinity)


@function(
    "SATURATION_TEMPERATURE", group="liquids", gives="boiling temperature of a liquid", source_key="CoolProp",
    equation="inverse of the vapour pressure",
    no_answer=(NoAnswer("p is below the vapour pressure at the freezing point", _low_pressure),
               NoAnswer("p is above the critical pressure: the liquid does not boil", _high_pressure),
               NoAnswer("sea water would boil outside 0 to 120 C, where its equations hold", _salty), NO_STATE),
    cautions=(SALT_IS_FIXED,), resolve=FLUID, words=FLUID_WORDS,
)  # fmt: skip
def boiling_temperature(fluid: q.Fluid, p: q.P) -> q.Temperature:
    """Boiling temperature at a pressure, the inverse of the vapour pressure.

    Arrays of one length, SI; sea water at 35 g/kg. NaN outside the pressures of the triple and the critical point.
    Source: CoolProp and the equations that it cites (water IAPWS-95); sea water IAPWS-08.
    """
    return each(boiling_temperature_of, fluid, p)


@function(
    "CRITICAL_PRESSURE", group="liquids", gives="thermodynamic critical pressure of a liquid", source_key="CoolProp",
    cautions=(Caution("sea water was given the critical pressure of water", _salty),),
    resolve=FLUID, words=FLUID_WORDS,
)  # fmt: skip
def critical_pressure(fluid: q.Fluid) -> q.Pressure:
    """Critical pressure ``pc`` of the liquid's equation of state; that of water for sea water.

    One value a name. Those of methanol and ethanol lie up to 2 % above IUPAC's, which does not matter to FF.
    Source: CoolProp and the equations that it cites.
    """
    return each(lambda name: fluids.span(pure(name)).p_critical, fluid)


def _density_of(name: str, t: float, p: float | None, salinity: float) -> float:
    return seawater.density(t, p, salinity) if is_salty(name) else fluids.density(name, t, p)


def _viscosity_of(name: str, t: float, p: float | None, salinity: float) -> float:
    return seawater.viscosity(t, p, salinity) if is_salty(name) else fluids.viscosity(name, t, p)


def _sound_speed_of(name: str, t: float, p: float | None) -> float:
    return seawater.sound_speed(t, p) if is_salty(name) else fluids.sound_speed(name, t, p)


@function(
    "DENSITY", group="liquids", gives="density of the liquid", source_key="CoolProp",
    equation="equation of state at t and p; without p the saturated liquid",
    no_answer=(TOO_COLD, TOO_HOT, BOILS_AWAY, FROZEN, OUT_OF_STATE, NO_STATE),
    cautions=(SALT_IS_NORMAL, SALT_NOT_USED, CORRELATION, CONTINUED),
    resolve=FLUID, words=FLUID_WORDS,
)  # fmt: skip
def liquid_density(
    fluid: q.Fluid, t: q.T, p: q.P = None, salinity: q.Salinity = NORMAL_SALINITY  # type: ignore[assignment]
) -> q.Density:  # fmt: skip
    """Density of the liquid at temperature and pressure, saturated liquid where no pressure is given.

    Arrays of one length, SI; salinity as a mass fraction, for sea water only. NaN where the substance is solid,
    vapour or beyond its equation. Within 0.01 % of the vapour pressure it counts as saturated.
    Source: CoolProp and the equations that it cites (water IAPWS-95); sea water Sharqawy et al. (2010), 0 to 120 C.
    """
    return each(_density_of, fluid, t, p, salinity)


@function(
    "VISCOSITY", group="liquids", gives="dynamic viscosity of the liquid", source_key="CoolProp",
    equation="published correlation at t and p; without p the saturated liquid",
    no_answer=(TOO_COLD, TOO_HOT, BOILS_AWAY, FROZEN, OUT_OF_STATE,
               NoAnswer("no published equation gives the viscosity of this liquid here: take it from its data sheet")),
    cautions=(SALT_IS_NORMAL, SALT_NOT_USED, CORRELATION, CONTINUED), resolve=FLUID, words=FLUID_WORDS,
)  # fmt: skip
def liquid_viscosity(
    fluid: q.Fluid, t: q.T, p: q.P = None, salinity: q.Salinity = NORMAL_SALINITY  # type: ignore[assignment]
) -> q.Viscosity:  # fmt: skip
    """Dynamic viscosity of the liquid at temperature and pressure, saturated liquid where no pressure is given.

    Arrays of one length, SI; as for the density. NaN too for liquids without a published viscosity equation.
    Source: CoolProp and the equations that it cites (water IAPWS R12-08); sea water Sharqawy et al. (2010).
    """
    return each(_viscosity_of, fluid, t, p, salinity)


@function(
    "SOUND_SPEED", group="liquids", gives="speed of sound in the liquid", source_key="CoolProp",
    equation="equation of state at t and p; without p the saturated liquid",
    no_answer=(TOO_COLD, TOO_HOT, BOILS_AWAY,
               NoAnswer("the equation for the speed of sound in sea water holds from 2 to 30 C", _salty),
               FROZEN, OUT_OF_STATE, NO_STATE),
    cautions=(Caution("sea water of 35 g/kg by the equation of Mackenzie (1981), from memory", _salty), CONTINUED),
    resolve=FLUID, words=FLUID_WORDS,
)  # fmt: skip
def sound_speed(fluid: q.Fluid, t: q.T, p: q.P = None) -> q.SoundSpeed:  # type: ignore[assignment]
    """Speed of sound in the liquid, free of bubbles, at temperature and pressure.

    Arrays of one length, SI; without a pressure that of the saturated liquid. NaN as for the density; sea water at
    35 g/kg from 2 to 30 deg C.
    Source: CoolProp and the equations that it cites; sea water Mackenzie (1981), from memory.
    """
    return each(_sound_speed_of, fluid, t, p)


def _highest_vapour_pressure(p1: Any, p2: Any, limit: Any, form: Any) -> Any:
    """The vapour pressure at which the index is at its limit: ``p1 - limit (p1 - p2)``, limit in upstream form."""
    return p1 - to_upstream(limit, form) * (p1 - p2)


@function(
    "ALLOWED_TEMPERATURE", group="indices and limits",
    gives="highest temperature that keeps the index at or above the limit", source_key="CoolProp",
    equation="boiling temperature at pv = p1 - limit (p1-p2)",
    must=(Must("p2", "p1", "The outlet pressure must be the lower one: check that the two are not swapped."),),
    no_answer=(
        NoAnswer("the limit is impossible in its form: an index is above 0",
                 lambda limit, form: np.isnan(to_upstream(limit, form))),
        NoAnswer("the drop is too large for this limit at any temperature: lower the drop, or raise both pressures",
                 lambda p1, p2, limit, form: _highest_vapour_pressure(p1, p2, limit, form) <= 0.0),
        NoAnswer("the drop is too large for this limit even at the freezing point",
                 lambda fluid, p1, p2, limit, form: _low_pressure(
                     fluid, _highest_vapour_pressure(p1, p2, limit, form))),
        NoAnswer("the limit holds up to the critical point",
                 lambda fluid, p1, p2, limit, form: _high_pressure(
                     fluid, _highest_vapour_pressure(p1, p2, limit, form))),
        NoAnswer("the temperature lies outside 0 to 120 C, where the equations of sea water hold", _salty),
        NO_STATE,
    ),
    cautions=(SALT_IS_FIXED,
              Caution("at this limit the outlet is at or below the vapour pressure: the liquid flashes",
                      lambda limit, form: to_upstream(limit, form) <= 1.0)),
    resolve=FLUID, words=FLUID_WORDS,
)  # fmt: skip
def hottest_allowed(fluid: q.Fluid, p1: q.P1, p2: q.P2, limit: q.Limit, form: q.Form = "upstream") -> q.Temperature:
    """Highest temperature at which the index is still at its limit, where ``pv = p1 - limit (p1 - p2)``.

    Arrays of one length, SI; limit in the form named. NaN where no temperature of the liquid meets the limit, or
    every one does; sea water at 35 g/kg.
    Source: definition of the index, with the vapour pressure of :func:`saturation_pressure`.
    """
    return each(boiling_temperature_of, fluid, np.nan_to_num(_highest_vapour_pressure(p1, p2, limit, form), nan=-1.0))
