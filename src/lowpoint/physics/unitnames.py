"""Units as the trade writes them: what a text such as ``m3/h``, ``kg/cm2 g`` or ``US gal/min`` means.

A closed vocabulary with exact factors instead of a general unit library: such a library reads ``C`` as coulomb,
``bbl`` as a barrel of 31.5 gallons, ``Nm3`` as newton metre, and computes any power that it is given.
"""

from __future__ import annotations

import re
import unicodedata
from collections import defaultdict
from fractions import Fraction
from functools import lru_cache
from typing import NamedTuple

from lowpoint.units import CV_PER_KV, GRAVITY, INCH, POUND, RHO0

__all__ = ["LISTED", "PRESSURE", "RELATIVE_DENSITY", "TEMPERATURE", "Meaning", "meaning", "names_reference"]

LONGEST = 40
"""Longer texts are no units."""

Dimension = tuple[int, int, int, int]
"""Exponents of kilogram, metre, second and kelvin."""


class Meaning(NamedTuple):
    """A unit: ``SI = (value + zero) factor`` (plus the atmosphere where ``gauge``), and its dimension."""

    dimension: str
    factor: float
    zero: float = 0.0
    gauge: bool = False


class _Word(NamedTuple):
    factor: Fraction
    dimension: Dimension


class _UnclearError(ValueError):
    """A text that could mean two things."""


def _exact(decimal: float) -> Fraction:
    return Fraction(str(decimal))


_G0, _INCH, _POUND = _exact(GRAVITY), _exact(INCH), _exact(POUND)
_FOOT = 12 * _INCH
_US_GALLON, _IMPERIAL_GALLON = 231 * _INCH**3, Fraction("0.00454609")
_BARREL = 42 * _US_GALLON
_MINUTE, _HOUR, _DAY = 60, 3600, 86400
_PSI = _POUND * _G0 / _INCH**2
_MERCURY, _WATER = Fraction("13595.1"), 1000
"""kg/m3 of the conventional columns of mercury (0 C) and water (4 C)."""

_MASS, _LENGTH, _TIME, _KELVIN, _NONE = (1, 0, 0, 0), (0, 1, 0, 0), (0, 0, 1, 0), (0, 0, 0, 1), (0, 0, 0, 0)
_VOLUME, _FLOW, _MASS_FLOW, _SPEED = (0, 3, 0, 0), (0, 3, -1, 0), (1, 0, -1, 0), (0, 1, -1, 0)
_FORCE, _PRESSURE, _ENERGY, _POWER = (1, 1, -2, 0), (1, -1, -2, 0), (1, 2, -2, 0), (1, 2, -3, 0)
_VISCOUS, _KINEMATIC, _AREA_DENSITY = (1, -1, -1, 0), (0, 2, -1, 0), (1, -2, 0, 0)

_PREFIXES = {"G": Fraction(10**9), "M": Fraction(10**6), "k": Fraction(1000), "h": Fraction(100), "d": Fraction(1, 10),
             "c": Fraction(1, 100), "m": Fraction(1, 1000), "u": Fraction(1, 10**6),
             "\N{GREEK SMALL LETTER MU}": Fraction(1, 10**6)}  # fmt: skip

_Row = tuple[str, "Fraction | int", Dimension, str]
_ROWS: tuple[_Row, ...] = (
    # words, factor to SI, dimension, prefixes that occur with the first word
    ("m metre metres meter meters", 1, _LENGTH, "kdcmu\N{GREEK SMALL LETTER MU}"),
    ("micron microns", Fraction(1, 10**6), _LENGTH, ""),
    ("in inch inches \"", _INCH, _LENGTH, ""), ("ft foot feet '", _FOOT, _LENGTH, ""),
    ("yd yard yards", 3 * _FOOT, _LENGTH, ""), ("mile miles", 5280 * _FOOT, _LENGTH, ""),
    ("g gram grams", Fraction(1, 1000), _MASS, "kmu\N{GREEK SMALL LETTER MU}"),
    ("kilogram kilograms", 1, _MASS, ""), ("t te tonne tonnes", 1000, _MASS, ""),
    ("lb lbs lbm pound pounds", _POUND, _MASS, "k"), ("oz", _POUND / 16, _MASS, ""),
    ("s sec secs second seconds", 1, _TIME, "m"), ("min mins minute minutes", _MINUTE, _TIME, ""),
    ("h hr hrs hour hours", _HOUR, _TIME, ""), ("d day days", _DAY, _TIME, ""),
    ("K kelvin", 1, _KELVIN, ""), ("R degR rankine", Fraction(5, 9), _KELVIN, ""),
    ("l litre litres liter liters", Fraction(1, 1000), _VOLUME, "Mhdcm"), ("L", Fraction(1, 1000), _VOLUME, "Mm"),
    ("cc ccm", Fraction(1, 10**6), _VOLUME, ""),
    ("gal gals gallon gallons USgal USgals USgallon USgallons", _US_GALLON, _VOLUME, ""),
    ("impgal impgals impgallon impgallons", _IMPERIAL_GALLON, _VOLUME, ""),
    ("bbl bbls barrel barrels", _BARREL, _VOLUME, ""),
    ("lps", Fraction(1, 1000), _FLOW, ""), ("lpm", Fraction(1, 1000 * _MINUTE), _FLOW, ""),
    ("lph", Fraction(1, 1000 * _HOUR), _FLOW, ""), ("cmh", Fraction(1, _HOUR), _FLOW, ""),
    ("cfs", _FOOT**3, _FLOW, ""), ("cfm", _FOOT**3 / _MINUTE, _FLOW, ""),
    ("gpm USgpm", _US_GALLON / _MINUTE, _FLOW, ""), ("gph USgph", _US_GALLON / _HOUR, _FLOW, ""),
    ("gpd USgpd", _US_GALLON / _DAY, _FLOW, ""), ("mgd", 10**6 * _US_GALLON / _DAY, _FLOW, ""),
    ("igpm impgpm", _IMPERIAL_GALLON / _MINUTE, _FLOW, ""), ("bpd", _BARREL / _DAY, _FLOW, ""),
    ("bph", _BARREL / _HOUR, _FLOW, ""), ("tph", Fraction(1000, _HOUR), _MASS_FLOW, ""),
    ("pph", _POUND / _HOUR, _MASS_FLOW, ""), ("fps", _FOOT, _SPEED, ""),
    ("N newton", 1, _FORCE, "kM"), ("kgf kp", _G0, _FORCE, ""), ("lbf", _POUND * _G0, _FORCE, ""),
    ("dyn", Fraction(1, 10**5), _FORCE, ""),
    ("Pa pascal", 1, _PRESSURE, "GMkhdmu\N{GREEK SMALL LETTER MU}"),
    ("bar bars", 10**5, _PRESSURE, "dmu\N{GREEK SMALL LETTER MU}"),
    ("psi", _PSI, _PRESSURE, "k"), ("ksi", 1000 * _PSI, _PRESSURE, ""), ("psf", _PSI / 144, _PRESSURE, ""),
    ("atm", 101325, _PRESSURE, ""), ("at", _G0 * 10**4, _PRESSURE, ""), ("torr", Fraction(101325, 760), _PRESSURE, ""),
    *((f"{length}Hg", size * _MERCURY * _G0, _PRESSURE, "")
      for length, size in (("mm", Fraction(1, 1000)), ("cm", Fraction(1, 100)), ("in", _INCH))),
    *((f"{length}WC", size * _WATER * _G0, _PRESSURE, "")
      for length, size in (("mm", Fraction(1, 1000)), ("cm", Fraction(1, 100)), ("m", Fraction(1)), ("in", _INCH),
                           ("ft", _FOOT))),
    ("P poise", Fraction(1, 10), _VISCOUS, "c"), ("centipoise", Fraction(1, 1000), _VISCOUS, ""),
    ("Pas", 1, _VISCOUS, "m"), ("St stokes", Fraction(1, 10**4), _KINEMATIC, "c"),
    ("centistokes", Fraction(1, 10**6), _KINEMATIC, ""),
    ("J joule", 1, _ENERGY, "GMk"), ("Wh", _HOUR, _ENERGY, "GMk"), ("Btu", Fraction("1055.05585262"), _ENERGY, ""),
    ("W watt", 1, _POWER, "GMk"), ("% percent", Fraction(1, 100), _NONE, ""), ("ppm", Fraction(1, 10**6), _NONE, ""),
)  # fmt: skip


def _vocabulary() -> dict[str, _Word]:
    """Every word as it is spelled, with the prefixes that occur in the trade."""
    words: dict[str, _Word] = {}
    for spellings, factor, dimension, prefixes in _ROWS:
        first, *others = spellings.split()
        entries = [(first, Fraction(1)), *((other, Fraction(1)) for other in others)]
        entries += [(prefix + first, _PREFIXES[prefix]) for prefix in prefixes]
        for spelling, multiple in entries:
            words[spelling] = _Word(factor * multiple, dimension)
    return words


def _folded() -> dict[str, list[str]]:
    """The spellings behind each one written without regard to case; one for all that mean the same."""
    folded: dict[str, dict[_Word, str]] = defaultdict(dict)
    for spelling, word in _WORDS.items():
        folded[spelling.casefold()].setdefault(word, spelling)
    return {text: list(meanings.values()) for text, meanings in folded.items()}


_WORDS = _vocabulary()
_FOLDED = _folded()
_UNCLEAR = {
    "Mbar": "a megabar, or mbar with a wrong capital; write mbar or bar",
    "ton": "a metric, short or long ton; write t for the metric one, or lb",
    "tons": "a metric, short or long ton; write t for the metric one, or lb",
}
_COEFFICIENT = "flow coefficient"


def _named(dimension: Dimension) -> str:
    return " ".join(f"{unit}{power}" for unit, power in zip(("kg", "m", "s", "K"), dimension, strict=True) if power)


PRESSURE, TEMPERATURE = _named(_PRESSURE), _named(_KELVIN)
RELATIVE_DENSITY = "sg"

_CELSIUS, _FAHRENHEIT = Meaning(TEMPERATURE, 1.0, 273.15), Meaning(TEMPERATURE, 5.0 / 9.0, 459.67)
_KV, _CV = Meaning(_COEFFICIENT, 1.0), Meaning(_COEFFICIENT, 1.0 / CV_PER_KV)
_WHOLE = {
    # What stands alone: scales with a zero of their own, and what has no dimension of the SI.
    "c": _CELSIUS, "degc": _CELSIUS, "celsius": _CELSIUS, "f": _FAHRENHEIT, "degf": _FAHRENHEIT,
    "fahrenheit": _FAHRENHEIT, "kv": _KV, "kvs": _KV, "cv": _CV, "cvs": _CV,
    RELATIVE_DENSITY: Meaning(_named((1, -3, 0, 0)), RHO0),
}  # fmt: skip

LISTED = (
    "bar", "bar a", "bar g", "mbar", "Pa", "kPa", "kPa g", "MPa", "psi", "psia", "psig", "kgf/cm2", "atm", "mmHg",
    "inHg", "mH2O", "ftH2O", "deg C", "deg F", "K", "m3/h", "m3/s", "l/s", "l/min", "US gal/min", "imp gal/min",
    "bbl/d", "kg/h", "t/h", "lb/h", "mm", "cm", "m", "in", "ft", "kg/m3", "g/cm3", "SG", "lb/ft3", "lb/gal", "mPa.s",
    "Pa.s", "cP", "mm2/s", "cSt", "m2/s", "m/s", "ft/s", "Kv", "Cv", "kJ/kg", "kW", "%",
)  # fmt: skip
"""The commonest units; any product or quotient of known words will do."""

_REFERENCE = re.compile(
    r"(?P<unit>.*?[A-Za-z0-9])[ _.*-]?(?:[(\[] ?)?(?P<what>absolute|abs|a|gauge|ga|g)(?: ?[)\]])?\.?", re.IGNORECASE
)
_GAS = re.compile(r"[NS] ?m3\b.*|m+?scf.*|scf.*", re.IGNORECASE)
_SPELLINGS = (
    # Names of several words become one; points are signs of a product or of an abbreviation.
    (r"\bper\b", "/"),
    (r"H2O|\bW\.C\.?", "WC"),
    (r"\bU\.?S\.? ?(?=ga|gp)", "US"),
    (r"\b(?:imp(?:erial)?\.?|UK) ?(?=ga|gp)", "imp"),
    (r"\b(mm|cm|m|in|ft)(?:ch|ches)?\.? ?(?=(?:Hg|WC)\b)", r"\1"),
    (r"(?:\bdeg(?:ree)?s?\.?|\N{DEGREE SIGN}) ?(?=(?:[CFKR]|celsius|fahrenheit|kelvin|rankine)\b)", ""),
    (r"\*\*", "^"),
    (r"[\N{MIDDLE DOT}\N{DOT OPERATOR}\N{BULLET}]", "*"),
    (r"\.(?=[A-Za-z])", "*"),
    (r"\.(?=$|[/ )])", ""),
)
_FACTOR = re.compile(r"(?P<word>[^\W\d_]+|[%\"'])\^?(?P<power>-?[1-4])?")


def _plain(text: str) -> str:
    """Signs that look alike made equal: superscripts, minus signs, degree signs, spaces."""
    text = text.replace("\N{MASCULINE ORDINAL INDICATOR}", "\N{DEGREE SIGN}").replace("\N{DOUBLE PRIME}", '"')
    text = unicodedata.normalize("NFKC", text).replace("\N{MINUS SIGN}", "-")
    return " ".join(text.split())


def _one_word(name: str) -> _Word:
    """A single word; case counts only where it makes a difference."""
    if name in _UNCLEAR:
        raise _UnclearError(f"may be {_UNCLEAR[name]}")
    if name in _WORDS:
        return _WORDS[name]
    spellings = _FOLDED.get(name.casefold(), [])
    if len(spellings) > 1:
        raise _UnclearError(f"may be {' or '.join(spellings)}; mind upper and lower case")
    if not spellings:
        raise ValueError
    return _WORDS[spellings[0]]


def _product(part: str, sign: int) -> _Word:
    """The words between two strokes, multiplied; divided where ``sign`` is -1."""
    grouped = part.startswith("(") and part.endswith(")")
    tokens = re.split(r" ?\* ?| ", part[1:-1].strip() if grouped else part)
    if len(tokens) > 1 and sign < 0 and not grouped:
        raise _UnclearError("needs brackets round what it is divided by")
    factor, dimension = Fraction(1), _NONE
    for token in tokens:
        match = _FACTOR.fullmatch(token)
        if match is None:
            raise ValueError
        word, power = _one_word(match["word"]), sign * int(match["power"] or 1)
        factor *= word.factor**power
        dimension = _added(dimension, word.dimension, power)
    return _Word(factor, dimension)


def _added(one: Dimension, other: Dimension, times: int = 1) -> Dimension:
    mass, length, time, kelvin = (a + times * b for a, b in zip(one, other, strict=True))
    return mass, length, time, kelvin


def _compound(text: str) -> Meaning:
    """A unit without reference to the atmosphere; ValueError for what is none."""
    for pattern, spelling in _SPELLINGS:
        text = re.sub(pattern, spelling, text, flags=re.IGNORECASE)
    text = text.strip()
    if text.casefold() in _WHOLE:
        return _WHOLE[text.casefold()]
    factor, dimension = Fraction(1), _NONE
    for place, part in enumerate(text.split("/")):
        if part.strip() == "1" and place == 0:
            continue
        found = _product(part.strip(), -1 if place else 1)
        factor *= found.factor
        dimension = _added(dimension, found.dimension)
    if dimension == _AREA_DENSITY:  # kg/cm2, lb/in2: a mass per area is meant as a weight per area
        factor, dimension = factor * _G0, _PRESSURE
    return Meaning(_named(dimension), float(factor))


def _of_pressure(text: str) -> Meaning | None:
    """A pressure with its reference named behind it (bar g, psia); None for anything else."""
    reference = _REFERENCE.fullmatch(text)
    if reference is None:
        return None
    try:
        base = _compound(reference["unit"])
    except _UnclearError:
        raise
    except ValueError:
        return None
    return base._replace(gauge=reference["what"].casefold().startswith("g")) if base.dimension == PRESSURE else None


def names_reference(text: str) -> bool:
    """Whether a unit of pressure says what it counts from: ``bar a``, ``psig``; ``bar`` alone does not."""
    try:
        return _of_pressure(_plain(text)) is not None
    except ValueError:
        return False


@lru_cache(4096)
def meaning(text: str) -> Meaning:
    """What a unit means; ValueError with the sentence for an unknown or unclear one."""
    plain = _plain(text) if len(text) <= LONGEST else ""
    shown = plain if len(text) <= LONGEST else text[: LONGEST - 3] + "..."
    if _GAS.fullmatch(plain):
        raise ValueError(f"'{shown}' is a normal or standard volume of gas; a liquid flows in its own, such as m3/h")
    try:
        # The reference first: `bar g` is not bar times gram.
        return _of_pressure(plain) or _compound(plain)
    except _UnclearError as unclear:
        raise ValueError(f"unit '{shown}' is not clear: it {unclear}") from None
    except ValueError:
        examples = "bar, bar g, psi, m3/h, US gal/min, deg C"
        raise ValueError(f"'{shown}' is not a unit that is known; examples are {examples}") from None
