"""Conversion of units as the trade writes them, gauge and absolute pressure kept apart.

The factors are those of the library pint, imported when a unit is first asked for; the words of the trade that it
does not know, or reads otherwise (C, gpm, bar g), are put into its language here.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from functools import cache
from typing import Any, NamedTuple

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.units import CV_PER_KV

__all__ = ["Meaning", "convert", "meaning", "unit_words"]

_TRADE = {
    "m3/hr": "m**3/hour", "cmh": "m**3/hour", "l/min": "liter/minute", "lpm": "liter/minute", "l/s": "liter/second",
    "l/h": "liter/hour", "us gal/min": "gallon/minute", "usgpm": "gallon/minute", "us gpm": "gallon/minute",
    "gpm": "gallon/minute", "gal/min": "gallon/minute", "us gal": "gallon", "gpd": "gallon/day",
    "mgd": "1e6*gallon/day", "imp gal/min": "imperial_gallon/minute", "igpm": "imperial_gallon/minute",
    "imp gal": "imperial_gallon", "bbl/d": "oil_bbl/day", "bpd": "oil_bbl/day", "bbl/h": "oil_bbl/hour",
    "cfm": "ft**3/minute", "cfs": "ft**3/second",
    "k": "kelvin", "deg r": "degR", "degr": "degR",
    "kg/cm2": "kgf/cm**2", "kgf/cm2": "kgf/cm**2", "mmh2o": "mmH2O", "mmwc": "mmH2O", "mm wc": "mmH2O",
    "mh2o": "mH2O", "mwc": "mH2O", "m wc": "mH2O", "inh2o": "inH2O", "inwc": "inH2O", "in wc": "inH2O",
    "fth2o": "ftH2O", "ft wc": "ftH2O", "ft h2o": "ftH2O", "mmhg": "mmHg", "inhg": "inHg", "torr": "torr",
    "psi": "psi", "ksi": "ksi", "psf": "lbf/ft**2", "lb/in2": "psi", "lbf/in2": "psi", "at": "kgf/cm**2",
    "in": "inch", '"': "inch", "inches": "inch", "lb/ft3": "lb/ft**3", "lbm/ft3": "lb/ft**3",
    "lb/gal": "lb/gallon", "sg": "999.1*kg/m**3", "cp": "centipoise", "cst": "centistokes",
}  # fmt: skip
"""Words of the trade, without regard to case, in the language of the unit library."""
LONGEST = 40
"""Longer texts are no units."""

_REFERENCE = re.compile(r"(?P<unit>.*?[A-Za-z0-9])[ _]?[(\[]?(?P<what>a|abs|absolute|g|ga|gauge)[)\]]?", re.IGNORECASE)
_PRESSURE = "[mass] / [length] / [time] ** 2"
_LISTED = (
    "bar", "bar a", "bar g", "mbar", "Pa", "kPa", "kPa g", "MPa", "psi", "psia", "psig", "kgf/cm2", "atm", "mmHg",
    "inHg", "mH2O", "ftH2O", "deg C", "deg F", "K", "m3/h", "m3/s", "l/s", "l/min", "US gal/min", "imp gal/min",
    "bbl/d",
    "kg/h", "t/h", "lb/h", "mm", "cm", "m", "in", "ft", "kg/m3", "g/cm3", "lb/ft3", "lb/gal", "mPa.s", "Pa.s", "cP",
    "mm2/s", "cSt", "m2/s", "m/s", "ft/s", "Kv", "Cv", "kJ/kg", "kW", "%",
)  # fmt: skip


class Meaning(NamedTuple):
    """A unit: ``SI = (value + zero) factor`` (plus the atmosphere where ``gauge``), and its dimension in words."""

    dimension: str
    factor: float
    zero: float = 0.0
    gauge: bool = False


_COEFFICIENT, _TEMPERATURE = "flow coefficient", "[temperature]"
# The library would give the offset scales to fewer digits than these exact definitions; it has no flow coefficient.
_WITHOUT_LIBRARY = {
    "kv": Meaning(_COEFFICIENT, 1.0), "cv": Meaning(_COEFFICIENT, 1.0 / CV_PER_KV), "%": Meaning("dimensionless", 0.01),
    **dict.fromkeys(("c", "deg c", "degc", "\N{DEGREE SIGN}c"), Meaning(_TEMPERATURE, 1.0, 273.15)),
    **dict.fromkeys(("f", "deg f", "degf", "\N{DEGREE SIGN}f"), Meaning(_TEMPERATURE, 5.0 / 9.0, 459.67)),
}  # fmt: skip


def unit_words() -> Iterable[str]:
    """The commonest units; any unit that the library knows will do, with powers and quotients (``kg/m3``)."""
    return _LISTED


@cache
def _library() -> Any:
    import pint

    return pint.UnitRegistry(cache_folder=None)


def _expression(text: str) -> str:
    """A unit in the library's language: ``kg/m3`` becomes ``kg/m**3``, ``mPa.s`` becomes ``mPa*s``."""
    trade = _TRADE.get(" ".join(text.split()).casefold())
    if trade is not None:
        return trade
    text = text.replace("\N{MIDDLE DOT}", "*").replace("\N{SUPERSCRIPT TWO}", "2").replace("\N{SUPERSCRIPT THREE}", "3")
    text = re.sub(r"(?<=[A-Za-z])\.(?=[A-Za-z])", "*", text)
    return re.sub(r"(?<=[A-Za-z])\^?([234])(?![0-9A-Za-z])", r"**\1", text)


def _of_library(text: str) -> Meaning | None:
    import pint

    library = _library()
    try:
        quantity = library.parse_expression(_expression(text))
        if not isinstance(quantity, library.Quantity):
            return None
        base = quantity.to_base_units()
        factor = float(base.magnitude)
    except (pint.PintError, ValueError, TypeError, AttributeError, SyntaxError, ArithmeticError, AssertionError):
        return None
    except Exception as error:  # the library parses with Python's tokenizer, whose own errors come through
        if type(error).__module__ == "tokenize":
            return None
        raise
    return Meaning(str(quantity.dimensionality), factor) if 0.0 < factor < math.inf else None


@cache
def meaning(text: str) -> Meaning:
    """What a unit means; ValueError with the sentence for an unknown one."""
    plain = " ".join(text.split())
    if plain.casefold() in _WITHOUT_LIBRARY:
        return _WITHOUT_LIBRARY[plain.casefold()]
    if len(plain) <= LONGEST:
        # Before the library, which would read `bar g` as bar times gram.
        reference = _REFERENCE.fullmatch(plain)
        base = _of_library(reference["unit"]) if reference is not None else None
        if reference is not None and base is not None and base.dimension == _PRESSURE:
            return base._replace(gauge=reference["what"].casefold().startswith("g"))
        found = _of_library(plain)
        if found is not None:
            return found
    raise ValueError(f"'{text}' is not a unit that is known; examples are bar, bar g, psi, m3/h, US gal/min, deg C")


def _resolver(symbol: str) -> Any:
    def resolve(text: str) -> str:
        try:
            meaning(text)
        except ValueError as unknown:
            raise ValueError(f"{symbol}: {unknown}") from None
        return text

    return resolve


def _per_row(words: Any, rows: int) -> list[Meaning]:
    return [meaning(words)] * rows if isinstance(words, str) else [meaning(word) for word in words.tolist()]


def _pairs(value: Any, from_: Any, to: Any) -> tuple[Any, ...]:
    """Columns of the two meanings: factors, zeros, gauge flags, and whether the dimensions are equal."""
    rows = len(value)
    ones, others = _per_row(from_, rows), _per_row(to, rows)
    one, other = (np.array([(m.factor, m.zero, m.gauge) for m in side]).T for side in (ones, others))
    return one, other, np.array([a.dimension == b.dimension for a, b in zip(ones, others, strict=True)])


def _of_two_kinds(value: Any, from_: Any, to: Any) -> Any:
    return ~_pairs(value, from_, to)[2]


def _lacks_atmosphere(value: Any, from_: Any, to: Any, atmosphere: Any) -> Any:
    one, other, _ = _pairs(value, from_, to)
    return ((one[2] > 0) | (other[2] > 0)) & (True if atmosphere is None else np.isnan(atmosphere))


@function(
    "UNIT", group="liquids", gives="a value in another unit", source_key="SI brochure",
    equation="((value + zero_from) factor_from [+ atmosphere] [- atmosphere])/factor_to - zero_to",
    no_answer=(
        NoAnswer("from and to are units of different kinds of quantity", _of_two_kinds, value=True),
        NoAnswer("atmosphere (barometric pressure at the site) must be given where a unit is a gauge pressure; "
                 "LP_ATMOSPHERE finds it from the elevation", _lacks_atmosphere, missing=True),
        NoAnswer("the value is below absolute zero of pressure or temperature"),
    ),
    cautions=(Caution("a relative density was read on water of 999.1 kg/m3 (15 C)",
                      lambda from_, to: np.asarray((from_ == "SG") | (to == "SG"))),),
    resolve={"from": _resolver("from"), "to": _resolver("to")}, words={"from": unit_words, "to": unit_words},
)  # fmt: skip
def convert(
    value: q.Value, from_: q.FromUnit, to: q.ToUnit, atmosphere: q.Atmosphere = None  # type: ignore[assignment]
) -> q.FreeValue:  # fmt: skip
    """The same quantity in another unit; a pressure unit without a suffix is absolute.

    Arrays of one length; units as the trade writes them, ``g`` behind a pressure unit for gauge (bar g, psig), which
    needs the atmosphere. NaN where the kinds of quantity differ, the atmosphere is missing, or an absolute pressure
    or temperature would be below zero. Kv and Cv convert by 1.156.
    Source: SI brochure and the exact definitions of the US units, by the library pint.
    """
    one, other, alike = _pairs(value, from_, to)
    gauge = one[2] - other[2]
    ambient = np.zeros(len(value)) if atmosphere is None else atmosphere
    si = (value + one[1]) * one[0] + np.where(one[2] > 0, ambient, 0.0)
    answer = (si - np.where(other[2] > 0, ambient, 0.0)) / other[0] - other[1]
    # One unit to itself gives the value itself, not a neighbour of it.
    answer = np.where((one == other).all(axis=0) & (gauge == 0), value, answer)
    below_zero = (si < 0.0) & ((one[2] > 0) | (other[2] > 0) | (one[1] > 0) | (other[1] > 0))
    lacking = _lacks_atmosphere(value, from_, to, atmosphere)
    return np.where(alike & ~lacking & ~below_zero, answer, np.nan)
