"""Properties of pure liquids from their equations of state, one call a value, each distinct one computed once.

CoolProp is imported when the first property is asked for. One state object a fluid and thread is kept: making it
costs far more than using it. Every function takes a canonical name of :mod:`lowpoint.physics.names` and SI numbers,
and gives NaN where there is no liquid or no equation; ``p`` None means the saturated liquid.
"""

from __future__ import annotations

import math
import threading
from collections.abc import Callable
from functools import lru_cache
from typing import Any, NamedTuple

from lowpoint.physics.names import key_of

__all__ = ["Span", "Split", "density", "flash", "is_liquid", "saturation_temperature", "sound_speed", "span",
           "vapour_pressure", "viscosity"]  # fmt: skip

MEMORY = 1 << 16
"""Values remembered of each property: a list of valves repeats the same few states over and over."""
SATURATED = 1e-4
"""A pressure this near to the vapour pressure, relative, is the saturated liquid."""
_FREEZING_SLACK = 0.02
"""K below the triple point that still count as liquid: 0 deg C is 0.01 K below that of water."""

_local = threading.local()


class Span(NamedTuple):
    """Where a substance can be liquid: K and Pa."""

    t_low: float
    t_critical: float
    p_low: float
    p_critical: float


class Split(NamedTuple):
    """What leaves a valve: vapour mass fraction and density of the homogeneous mixture."""

    quality: float
    density: float


def _state(fluid: str) -> Any:
    """This thread's state object of a fluid."""
    states: dict[str, Any] = _local.__dict__.setdefault("states", {})
    state = states.get(fluid)
    if state is None:
        from CoolProp.CoolProp import AbstractState

        state = states[fluid] = AbstractState("HEOS", key_of(fluid))
    return state


@lru_cache(512)
def span(fluid: str) -> Span:
    """The range of the liquid, from its triple point (or the lowest temperature of its equation) to critical."""
    from CoolProp.CoolProp import QT_INPUTS

    state = _state(fluid)
    t_low = max(state.Ttriple(), state.Tmin())
    state.update(QT_INPUTS, 0.0, t_low)
    return Span(t_low, state.T_critical(), state.p(), state.p_critical())


def _value(fluid: str, inputs: str, one: float, two: float, read: Callable[[Any], float]) -> float:
    """One property at one state; NaN where the library has no state or no model there."""
    from CoolProp import CoolProp

    state = _state(fluid)
    try:
        state.update(getattr(CoolProp, inputs), one, two)
        answer = float(read(state))
    except ValueError:
        return math.nan
    return answer if math.isfinite(answer) else math.nan


@lru_cache(MEMORY)
def vapour_pressure(fluid: str, t: float) -> float:
    """Saturation pressure at a temperature between the triple and the critical point."""
    limits = span(fluid)
    if not limits.t_low - _FREEZING_SLACK <= t <= limits.t_critical:
        return math.nan
    return _value(fluid, "QT_INPUTS", 0.0, t, lambda state: state.p())


@lru_cache(MEMORY)
def saturation_temperature(fluid: str, p: float) -> float:
    """Boiling temperature at a pressure between that of the triple point and the critical one."""
    limits = span(fluid)
    if not limits.p_low <= p <= limits.p_critical:
        return math.nan
    return _value(fluid, "PQ_INPUTS", p, 0.0, lambda state: state.T())


def is_liquid(fluid: str, t: float, p: float | None) -> bool:
    """Is the substance liquid at this temperature and pressure?"""
    pv = vapour_pressure(fluid, t)
    return pv == pv and (p is None or p >= pv * (1.0 - SATURATED))


def _of_liquid(fluid: str, t: float, p: float | None, read: Callable[[Any], float]) -> float:
    if not is_liquid(fluid, t, p):
        return math.nan
    # Close to saturation the library refuses temperature and pressure together.
    if p is None or p <= vapour_pressure(fluid, t) * (1.0 + 2e-6):
        return _value(fluid, "QT_INPUTS", 0.0, t, read)
    return _value(fluid, "PT_INPUTS", p, t, read)


@lru_cache(MEMORY)
def density(fluid: str, t: float, p: float | None) -> float:
    """Density of the liquid, kg/m3."""
    return _of_liquid(fluid, t, p, lambda state: state.rhomass())


@lru_cache(MEMORY)
def viscosity(fluid: str, t: float, p: float | None) -> float:
    """Dynamic viscosity of the liquid, Pa.s; NaN for a fluid without a published equation."""
    return _of_liquid(fluid, t, p, lambda state: state.viscosity())


@lru_cache(MEMORY)
def sound_speed(fluid: str, t: float, p: float | None) -> float:
    """Speed of sound in the liquid, m/s."""
    return _of_liquid(fluid, t, p, lambda state: state.speed_sound())


def _enthalpy(fluid: str, t: float, p: float) -> float:
    # A saturated inlet is the commonest condensate case: there the enthalpy is that of the boiling liquid.
    saturated = p <= vapour_pressure(fluid, t) * (1.0 + SATURATED)
    return _of_liquid(fluid, t, None if saturated else p, lambda state: state.hmass())


@lru_cache(MEMORY)
def flash(fluid: str, t: float, p1: float, p2: float) -> Split:
    """Isenthalpic expansion of the liquid from ``t, p1`` to ``p2``: quality within 0 and 1, homogeneous density."""
    limits, h = span(fluid), _enthalpy(fluid, t, p1)
    if not (h == h and limits.p_low <= p2):
        return Split(math.nan, math.nan)
    if p2 < limits.p_critical:
        h_liquid, v_liquid = _saturated(fluid, p2, 0.0)
        h_vapour, v_vapour = _saturated(fluid, p2, 1.0)
        x = (h - h_liquid) / (h_vapour - h_liquid)
        if 0.0 < x < 1.0:
            return Split(x, 1.0 / ((1.0 - x) * v_liquid + x * v_vapour))
        if x != x:
            return Split(x, x)
    else:
        x = 0.0
    return Split(min(max(x, 0.0), 1.0), _value(fluid, "HmassP_INPUTS", h, p2, lambda state: state.rhomass()))


def _saturated(fluid: str, p: float, quality: float) -> tuple[float, float]:
    """Enthalpy and specific volume of the boiling liquid (0) or the dry vapour (1)."""
    h = _value(fluid, "PQ_INPUTS", p, quality, lambda state: state.hmass())
    return h, 1.0 / _state(fluid).rhomass() if h == h else math.nan
