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

__all__ = ["Heats", "Span", "Split", "density", "flash", "flash_sound_speed", "heats", "is_frozen", "is_liquid",
           "saturation_temperature", "sound_speed", "span", "vapour_pressure", "viscosity"]  # fmt: skip

MEMORY = 1 << 16
"""Values remembered of each property: a list of valves repeats the same few states over and over."""
SATURATED = 1e-4
"""A pressure this near to the vapour pressure, relative, is the saturated liquid."""
P_HIGHEST = 1e8
"""Pa up to which an equation of state is continued beyond its own range."""
_FREEZING_SLACK = 0.02
"""K below the freezing point that still count as liquid: 0 deg C is 0.01 K below the triple point of water."""
_CRITICAL_SLACK = 1e-9

_local = threading.local()


class Span(NamedTuple):
    """Where a substance can be liquid, K and Pa; up to which pressure its equation was fitted, and is used."""

    t_low: float
    t_critical: float
    p_low: float
    p_critical: float
    p_fitted: float
    p_high: float


class Split(NamedTuple):
    """What leaves a valve: vapour mass fraction and density of the homogeneous mixture."""

    quality: float
    density: float


class Heats(NamedTuple):
    """What an isenthalpic expansion is reckoned from: J/kg before it, and of both phases behind it; kg/m3 of these."""

    inlet: float
    liquid: float
    vapour: float
    liquid_density: float
    vapour_density: float


_NOTHING = Split(math.nan, math.nan)


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
    fitted = state.pmax()
    return Span(t_low, state.T_critical(), state.p(), state.p_critical(), fitted, max(fitted, P_HIGHEST))


def _value(fluid: str, inputs: str, one: float, two: float, read: Callable[[Any], float], phase: str = "") -> float:
    """One property at one state, of the phase named; NaN where the library has no state or no model there."""
    from CoolProp import CoolProp

    state = _state(fluid)
    if phase:
        state.specify_phase(getattr(CoolProp, phase))
    try:
        state.update(getattr(CoolProp, inputs), one, two)
        answer = float(read(state))
    except ValueError:
        return math.nan
    finally:
        if phase:
            state.unspecify_phase()
    return answer if math.isfinite(answer) else math.nan


@lru_cache(MEMORY)
def vapour_pressure(fluid: str, t: float) -> float:
    """Saturation pressure at a temperature between the triple and the critical point."""
    limits = span(fluid)
    if not limits.t_low - _FREEZING_SLACK <= t <= limits.t_critical * (1.0 + _CRITICAL_SLACK):
        return math.nan
    if t >= limits.t_critical * (1.0 - _CRITICAL_SLACK):
        return limits.p_critical
    return _value(fluid, "QT_INPUTS", 0.0, t, lambda state: state.p())


@lru_cache(MEMORY)
def saturation_temperature(fluid: str, p: float) -> float:
    """Boiling temperature at a pressure between that of the freezing point and the critical one."""
    limits = span(fluid)
    if limits.p_low <= p < limits.p_critical * (1.0 - _CRITICAL_SLACK):
        t = _value(fluid, "PQ_INPUTS", p, 0.0, lambda state: state.T())
        # Far below 1 Pa the library settles on temperatures that belong to other pressures.
        return t if p > 1.0 or abs(vapour_pressure(fluid, t) / p - 1.0) < 1e-6 else math.nan
    if p < limits.p_low:
        return _just_below_triple(fluid, p)
    return limits.t_critical if p <= limits.p_critical * (1.0 + _CRITICAL_SLACK) else math.nan


def _just_below_triple(fluid: str, p: float) -> float:
    """The boiling temperature within the slack below the triple point, where ln p is a straight line in 1/T."""
    limits = span(fluid)
    t_end = limits.t_low - _FREEZING_SLACK
    p_end = vapour_pressure(fluid, t_end)
    if not p_end <= p:
        return math.nan
    share = math.log(p / p_end) / math.log(limits.p_low / p_end)
    return 1.0 / (1.0 / t_end + share * (1.0 / limits.t_low - 1.0 / t_end))


def is_liquid(fluid: str, t: float, p: float | None) -> bool:
    """Is the substance above its boiling pressure at this temperature, between its triple and critical point?"""
    pv = vapour_pressure(fluid, t)
    return pv == pv and (p is None or p >= pv * (1.0 - SATURATED))


def _melting(fluid: str, p: float) -> float:
    """Melting temperature at a pressure, NaN where no melting line is known for it."""
    from CoolProp.CoolProp import iP, iT

    state = _state(fluid)
    if not state.has_melting_line():
        return math.nan
    try:
        return float(state.melting_line(iT, iP, p))
    except ValueError:
        return math.nan


@lru_cache(512)
def _has_true_melting_line(fluid: str) -> bool:
    """Does the melting line begin at the triple point? That of deuterium lies a kelvin above it."""
    limits = span(fluid)
    lowest = _melting(fluid, max(2.0 * limits.p_low, 1e5))
    return abs(lowest - limits.t_low) < 0.1 + 0.005 * limits.t_low


@lru_cache(MEMORY)
def is_frozen(fluid: str, t: float, p: float) -> bool:
    """Is the substance solid because of its pressure, although above its triple point?"""
    return _has_true_melting_line(fluid) and t < _melting(fluid, p) - _FREEZING_SLACK


def _phase(fluid: str, p: float) -> str:
    """The phase to look for: told so, the library neither misses the liquid nor stops short of saturation."""
    return "iphase_liquid" if p < span(fluid).p_critical else "iphase_supercritical_liquid"


def _of_liquid(fluid: str, t: float, p: float | None, read: Callable[[Any], float]) -> float:
    if not is_liquid(fluid, t, p):
        return math.nan
    if p is None or p <= vapour_pressure(fluid, t) * (1.0 + 2e-6):
        return _value(fluid, "QT_INPUTS", 0.0, t, read)
    if p > span(fluid).p_high or is_frozen(fluid, t, p):
        return math.nan
    return _value(fluid, "PT_INPUTS", p, t, read, _phase(fluid, p))


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
    if not is_liquid(fluid, t, p):
        return math.nan
    # A saturated inlet is the commonest condensate case: there the enthalpy is that of the boiling liquid.
    saturated = p <= vapour_pressure(fluid, t) * (1.0 + SATURATED)
    return _of_liquid(fluid, t, None if saturated else p, lambda state: state.hmass())


@lru_cache(MEMORY)
def flash(fluid: str, t: float, p1: float, p2: float) -> Split:
    """Isenthalpic expansion of the liquid from ``t, p1`` to ``p2``: quality within 0 and 1, homogeneous density."""
    limits, h = span(fluid), _enthalpy(fluid, t, p1)
    if not (h == h and limits.p_low <= p2):
        return _NOTHING
    x = _quality(fluid, h, p2) if p2 < limits.p_critical else 0.0
    if x <= 0.0:
        # From the boiling temperature downward Newton's steps close in from one side.
        start = min(t, saturation_temperature(fluid, p2)) if p2 < limits.p_critical else t
        return Split(0.0, _expanded_liquid(fluid, h, start, p2))
    if x >= 1.0:
        return Split(1.0, _value(fluid, "HmassP_INPUTS", h, p2, lambda state: state.rhomass()))
    if x != x:
        return _NOTHING
    v_liquid, v_vapour = (1.0 / _saturated(fluid, p2, q, lambda state: state.rhomass()) for q in (0.0, 1.0))
    return Split(x, 1.0 / ((1.0 - x) * v_liquid + x * v_vapour))


@lru_cache(MEMORY)
def flash_sound_speed(fluid: str, t: float, p1: float, p2: float) -> float:
    """Speed of sound in the mixture that :func:`flash` gives, m/s: both phases in equilibrium and at one velocity.

    ``sqrt((dp/drho)_s)`` by a difference over 0.1 % of the pressure; NaN where nothing, or all, is vapour.
    """
    x = flash(fluid, t, p1, p2).quality
    if not 0.0 < x < 1.0:
        return math.nan
    entropy = [_saturated(fluid, p2, q, lambda state: state.smass()) for q in (0.0, 1.0)]
    s = entropy[0] + x * (entropy[1] - entropy[0])
    low, high = (_value(fluid, "PSmass_INPUTS", p2 * k, s, lambda state: state.rhomass()) for k in (0.9995, 1.0005))
    return math.sqrt(1e-3 * p2 / (high - low)) if high > low else math.nan


def heats(fluid: str, t: float, p1: float, p2: float) -> Heats:
    """The terms of :func:`flash`; NaN where there is no such state."""
    h, d = (tuple(_saturated(fluid, p2, q, read) for q in (0.0, 1.0))
            for read in (lambda state: state.hmass(), lambda state: state.rhomass()))  # fmt: skip
    return Heats(_enthalpy(fluid, t, p1), *h, *d)


def _quality(fluid: str, h: float, p: float) -> float:
    """Vapour share at a pressure, below 0 for a liquid and above 1 for a superheated vapour."""
    h_liquid, h_vapour = (_saturated(fluid, p, q, lambda state: state.hmass()) for q in (0.0, 1.0))
    return (h - h_liquid) / (h_vapour - h_liquid)


def _saturated(fluid: str, p: float, quality: float, read: Callable[[Any], float]) -> float:
    """A property of the boiling liquid (0) or the dry vapour (1)."""
    return _value(fluid, "PQ_INPUTS", p, quality, read)


def _expanded_liquid(fluid: str, h: float, t: float, p: float) -> float:
    """Density of the liquid of an enthalpy at a pressure, by Newton's steps in the temperature from ``t``."""
    # The library's own search for it misses by up to 0.05 % next to saturation.
    for _ in range(30):
        excess = _value(fluid, "PT_INPUTS", p, t, lambda state: (state.hmass() - h) / state.cpmass(), _phase(fluid, p))
        if not abs(excess) < 0.5 * t:
            return math.nan
        t -= excess
        if abs(excess) <= 1e-9 * t:
            break
    return _value(fluid, "PT_INPUTS", p, t, lambda state: state.rhomass(), _phase(fluid, p))
