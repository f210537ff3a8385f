"""Conversion factors against exact definitions, and against a general library of units as an independent oracle."""

from __future__ import annotations

from fractions import Fraction
from functools import cache

import pint
import pytest

from lowpoint import functions
from lowpoint.physics.unitnames import LISTED, meaning

# Exact definitions: international yard and pound (1959), standard gravity (CGPM 1901), gallons by law, SI brochure.
INCH, POUND, G0 = Fraction("0.0254"), Fraction("0.45359237"), Fraction("9.80665")
FOOT = 12 * INCH
US_GALLON, IMPERIAL_GALLON = 231 * INCH**3, Fraction("4.54609") / 1000
PSI = POUND * G0 / INCH**2
EXACT: dict[tuple[str, str], Fraction] = {
    ("psi", "Pa"): PSI, ("ksi", "MPa"): PSI / 1000, ("psf", "Pa"): PSI / 144, ("lbf/in2", "psi"): Fraction(1),
    ("lb/in2", "psi"): Fraction(1), ("kgf/cm2", "Pa"): G0 * 10**4, ("kg/cm2", "Pa"): G0 * 10**4,
    ("at", "Pa"): G0 * 10**4, ("atm", "Pa"): Fraction(101325), ("bar", "kPa"): Fraction(100),
    ("mbar", "Pa"): Fraction(100), ("MPa", "bar"): Fraction(10), ("torr", "Pa"): Fraction(101325, 760),
    # Conventional columns: mercury 13 595.1 kg/m3, water 1000 kg/m3 (ISO 80000-4 and NIST SP 811).
    ("mmHg", "Pa"): Fraction("13.5951") * G0, ("inHg", "Pa"): INCH * Fraction("13595.1") * G0,
    ("mmH2O", "Pa"): G0, ("mH2O", "Pa"): 1000 * G0, ("inH2O", "Pa"): INCH * 1000 * G0,
    ("ftH2O", "Pa"): FOOT * 1000 * G0, ("m WC", "mH2O"): Fraction(1),
    ("in", "mm"): Fraction("25.4"), ("ft", "m"): FOOT, ("yd", "m"): 3 * FOOT, ("um", "mm"): Fraction(1, 1000),
    ("US gal", "l"): 1000 * US_GALLON, ("gal", "l"): 1000 * US_GALLON, ("imp gal", "l"): 1000 * IMPERIAL_GALLON,
    ("bbl", "US gal"): Fraction(42), ("barrels", "gal"): Fraction(42),
    ("US gal/min", "m3/h"): US_GALLON * 60, ("gpm", "m3/h"): US_GALLON * 60, ("gpd", "m3/d"): US_GALLON,
    ("mgd", "m3/d"): US_GALLON * 10**6, ("imp gal/min", "m3/h"): IMPERIAL_GALLON * 60,
    ("igpm", "l/min"): IMPERIAL_GALLON * 1000, ("bbl/d", "m3/d"): 42 * US_GALLON, ("bpd", "bbl/day"): Fraction(1),
    ("bbl/h", "bbl/d"): Fraction(24), ("cfm", "m3/min"): FOOT**3, ("cfs", "m3/s"): FOOT**3,
    ("l/s", "m3/h"): Fraction("3.6"), ("l/min", "m3/h"): Fraction("0.06"), ("l/h", "m3/h"): Fraction(1, 1000),
    ("m3/d", "m3/h"): Fraction(1, 24), ("ML/d", "m3/d"): Fraction(1000), ("cmh", "m3/h"): Fraction(1),
    ("lb", "kg"): POUND, ("t", "kg"): Fraction(1000), ("t/h", "kg/s"): Fraction(1000, 3600), ("lb/h", "kg/h"): POUND,
    ("klb/h", "lb/h"): Fraction(1000), ("tph", "kg/h"): Fraction(1000),
    ("lb/ft3", "kg/m3"): POUND / FOOT**3, ("lb/gal", "kg/m3"): POUND / US_GALLON, ("g/cm3", "kg/m3"): Fraction(1000),
    ("kg/l", "kg/m3"): Fraction(1000), ("SG", "kg/m3"): Fraction("999.1"),  # water at 15 C (IEC 60534)
    ("cP", "Pa.s"): Fraction(1, 1000), ("P", "Pa.s"): Fraction(1, 10), ("mPa.s", "cP"): Fraction(1),
    ("N.s/m2", "Pa.s"): Fraction(1), ("cSt", "m2/s"): Fraction(1, 10**6), ("St", "cSt"): Fraction(100),
    ("mm2/s", "cSt"): Fraction(1), ("ft/s", "m/s"): FOOT, ("km/h", "m/s"): Fraction(1000, 3600),
    ("lbf", "N"): POUND * G0, ("kgf", "N"): G0, ("kp", "N"): G0, ("dyn", "N"): Fraction(1, 10**5),
    ("Btu/lb", "kJ/kg"): Fraction("2.326"), ("kWh", "MJ"): Fraction("3.6"), ("%", "ppm"): Fraction(10**4),
    ("K", "deg R"): Fraction(9, 5),
    ("Cv", "Kv"): 1 / Fraction("1.156"),  # the ratio that this package states
}  # fmt: skip


@pytest.mark.parametrize(("there", "back"), EXACT)
def test_exact_definitions(there: str, back: str) -> None:
    factor = EXACT[there, back]
    assert functions["LP_UNIT"](1.0, there, back) == pytest.approx(float(factor), rel=1e-14)
    assert functions["LP_UNIT"](float(factor), back, there) == pytest.approx(1.0, rel=1e-14)


KNOWN_OTHERWISE = {
    # What the library does not know, or means otherwise by the same word.
    "bar a", "bar g", "kPa g", "psia", "psig", "deg C", "deg F", "Kv", "Cv", "%", "US gal/min", "imp gal/min", "bbl/d",
    "kgf/cm2", "mPa.s", "Pa.s", "mH2O", "inHg", "SG", "cSt", "cP",
}  # fmt: skip


@cache
def _library() -> pint.UnitRegistry:
    return pint.UnitRegistry(cache_folder=None)


@pytest.mark.parametrize("unit", [unit for unit in LISTED if unit not in KNOWN_OTHERWISE])
def test_listed_units_by_an_independent_library(unit: str) -> None:
    spelled = unit.replace("m3", "m**3").replace("m2", "m**2").replace("ft3", "ft**3")
    quantity = _library().parse_expression(spelled).to_base_units()
    assert meaning(unit).factor == pytest.approx(quantity.magnitude, rel=1e-12)


def test_every_listed_unit_converts_to_itself_and_back() -> None:
    for unit in LISTED:
        assert functions["LP_UNIT"](7.25, unit, unit, 1.01325) == 7.25


@pytest.mark.parametrize(
    ("value", "one", "other", "expected"),
    [
        # Definition: F = 1.8 C + 32, K = C + 273.15, R = F + 459.67.
        (20.0, "deg C", "deg F", 68.0), (68.0, "deg F", "deg C", 20.0), (-40.0, "C", "F", -40.0),
        (100.0, "degC", "degF", 212.0), (0.0, "deg C", "K", 273.15), (25.0, "\N{DEGREE SIGN}C", "K", 298.15),
        (0.0, "K", "deg C", -273.15), (32.0, "deg F", "K", 273.15), (0.0, "deg R", "deg F", -459.67),
        (491.67, "R", "deg C", 0.0), (180.0, "celsius", "fahrenheit", 356.0),
    ],
)  # fmt: skip
def test_temperature_scales(value: float, one: str, other: str, expected: float) -> None:
    assert functions["LP_UNIT"](value, one, other) == pytest.approx(expected, rel=1e-12, abs=1e-10)


@pytest.mark.parametrize(
    ("value", "one", "other", "atmosphere", "expected"),
    [
        # Definition: gauge is absolute less the atmosphere.
        (3.0, "bar g", "bar", 1.01325, 4.01325), (4.01325, "bar a", "bar g", 1.01325, 3.0),
        (3.0, "bar g", "kPa g", 1.01325, 300.0), (-0.5, "bar g", "bar", 1.0, 0.5), (0.0, "psig", "atm", 1.01325, 1.0),
        (100.0, "psig", "psia", 101325.0 / 1e5, 100.0 + 101325.0 / float(PSI)),
        (2.0, "kg/cm2 g", "kPa", 0.95, 2.0 * 98.0665 + 95.0), (1.0, "bar", "mbar g", 1.0, 0.0),
    ],
)  # fmt: skip
def test_gauge_on_either_side(value: float, one: str, other: str, atmosphere: float, expected: float) -> None:
    assert functions["LP_UNIT"](value, one, other, atmosphere) == pytest.approx(expected, rel=1e-12, abs=1e-12)


def test_the_us_twin_takes_the_atmosphere_in_psia() -> None:
    # Definition: 100 psig at 14.2 psia is 114.2 psia.
    assert functions["LPU_UNIT"](100.0, "psig", "psia", 14.2) == pytest.approx(114.2, rel=1e-12)
    assert functions["LPU_UNIT"](3.0, "bar", "kPa") == functions["LP_UNIT"](3.0, "bar", "kPa")


def test_known_conversions() -> None:
    # Common practice: 1 US gal/min is 0.2271 m3/h, 1 psi is 6.895 kPa, 1 bar is 14.504 psi, 1 m of water is 9.807 kPa.
    for one, other, expected in (("US gal/min", "m3/h", 0.2271), ("psi", "kPa", 6.895), ("bar", "psi", 14.504),
                                 ("mH2O", "kPa", 9.807), ("imp gal/min", "l/min", 4.546), ("kg/cm2", "bar", 0.9807),
                                 ("bbl/d", "m3/h", 0.006624), ("lb/ft3", "kg/m3", 16.018)):  # fmt: skip
        assert functions["LP_UNIT"](1.0, one, other) == pytest.approx(expected, rel=2e-4), (one, other)
