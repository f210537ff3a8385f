"""Conversion of units as the trade writes them, gauge and absolute pressure kept apart."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from functools import lru_cache
from typing import Any, NamedTuple

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics.unitnames import LISTED, PRESSURE, RELATIVE_DENSITY, TEMPERATURE, Meaning, meaning

__all__ = ["convert", "unit_words"]

ICE_POINT = 273.15
"""K."""


class _Side(NamedTuple):
    """One of the two units, in columns of one element or one a row."""

    factor: Any
    zero: Any
    gauge: Any
    dimension: Any
    bottom: Any
    """Whether nothing lies below the absolute zero of this kind of quantity."""
    ice: Any
    """What the unit reads at the ice point, 0 for what is no temperature: scales are counted from there, so that whole
    degrees stay whole."""


def unit_words() -> Iterable[str]:
    """The commonest units; any product or quotient of known ones will do (``kg/m3``)."""
    return LISTED


def _resolver(symbol: str) -> Callable[[str], str]:
    def resolve(text: str) -> str:
        try:
            meaning(text)
        except ValueError as unknown:
            raise ValueError(f"{symbol}: {unknown}") from None
        return text

    return resolve


def _columns(words: Iterable[str]) -> _Side:
    known = [meaning(word) for word in words]
    rows = [(m.factor, m.zero, m.gauge, m.dimension, m.dimension in (PRESSURE, TEMPERATURE), _ice(m)) for m in known]
    return _Side(*map(np.array, zip(*rows, strict=True)))


def _ice(unit: Meaning) -> float:
    return round(ICE_POINT / unit.factor - unit.zero, 9) if unit.dimension == TEMPERATURE else 0.0


@lru_cache(512)
def _one_side(word: str) -> _Side:
    return _columns([word])


def _side(words: Any) -> _Side:
    return _one_side(words) if isinstance(words, str) else _columns(words.tolist())


def _of_two_kinds(from_: Any, to: Any) -> Any:
    return _side(from_).dimension != _side(to).dimension


def _lacking(one: _Side, other: _Side, atmosphere: Any) -> Any:
    return (one.gauge | other.gauge) & (True if atmosphere is None else np.isnan(atmosphere))


def _lacks_atmosphere(from_: Any, to: Any, atmosphere: Any) -> Any:
    return _lacking(_side(from_), _side(to), atmosphere)


def _relative(words: Any) -> Any:
    listed = [words] if isinstance(words, str) else words.tolist()
    return np.array([word.strip().casefold() == RELATIVE_DENSITY for word in listed])


def _absolute(value: Any, one: _Side, ambient: Any) -> Any:
    return (value + one.zero) * one.factor + one.gauge * ambient


def _below_zero(value: Any, from_: Any, atmosphere: Any) -> Any:
    """Whether a pressure or a temperature lies below absolute zero."""
    one = _side(from_)
    return one.bottom & (_absolute(value, one, 0.0 if atmosphere is None else atmosphere) < 0.0)


@function(
    "UNIT", group="liquids", gives="a value in another unit", source_key="SI brochure",
    equation="((value - zero_from) factor_from [+ atmosphere] [- atmosphere])/factor_to + zero_to, temperatures from "
    "the ice point",
    no_answer=(
        NoAnswer("from and to are units of different kinds of quantity (mass and volume flow differ by the density, "
                 "dynamic and kinematic viscosity too)", _of_two_kinds, value=True),
        NoAnswer("atmosphere (barometric pressure at the site) must be given where a unit is a gauge pressure; "
                 "LP_ATMOSPHERE finds it from the elevation", _lacks_atmosphere, missing=True),
        NoAnswer("the value is below absolute zero of pressure or temperature; a gauge pressure needs a g behind its "
                 "unit", _below_zero),
        NoAnswer("the result is larger than a number can be"),
    ),
    cautions=(Caution("a relative density was read on water of 999.1 kg/m3 (15 C)",
                      lambda from_, to: _relative(from_) | _relative(to)),),
    resolve={"from": _resolver("from"), "to": _resolver("to")}, words={"from": unit_words, "to": unit_words},
)  # fmt: skip
def convert(
    value: q.Value, from_: q.FromUnit, to: q.ToUnit, atmosphere: q.Atmosphere = None  # type: ignore[assignment]
) -> q.FreeValue:  # fmt: skip
    """The same quantity in another unit; a pressure unit without a suffix is absolute.

    Arrays of one length; units as the trade writes them, ``g`` behind a pressure unit for gauge (bar g, psig), which
    needs the atmosphere. NaN where the kinds of quantity differ, the atmosphere is missing, or an absolute pressure
    or temperature would be below zero. Kv and Cv convert by 1.156.
    Source: SI brochure and the exact definitions of the US units.
    """
    one, other = _side(from_), _side(to)
    ambient = 0.0 if atmosphere is None else np.nan_to_num(atmosphere)
    si = _absolute(value, one, ambient)
    from_ice = (value - one.ice) * one.factor + (one.gauge * ambient - other.gauge * ambient)
    answer = from_ice / other.factor + other.ice
    # One unit to itself gives the value itself, not a neighbour of it.
    same = (one.factor == other.factor) & (one.zero == other.zero) & (one.gauge == other.gauge)
    answer = np.where(same, value, answer)
    wrong = (one.dimension != other.dimension) | _lacking(one, other, atmosphere) | (one.bottom & (si < 0.0))
    return np.where(wrong | ~np.isfinite(answer), np.nan, answer)
