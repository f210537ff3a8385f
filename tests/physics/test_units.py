"""What texts mean as units, what cells show for those that mean nothing, and how soon."""

from __future__ import annotations

import math

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.cells import call, reason
from lowpoint.physics.unitnames import LONGEST, PRESSURE, meaning
from lowpoint.problems import CellError

SAME = {
    # Spellings met in the trade (common practice), by what they mean.
    "kPa g": ["kPa(g)", "kPag", "kPaG", "kPa gauge", "kPa (g)", "kPa [g]", "kPa_g", "kPa.g", "kPa-g", "KPAG", "Kpa g"],
    "bar g": ["barg", "bar gauge", "Bar(g)", "BARG", "bar ga", "bar  g", "bar\tg", "bar (gauge)", "bars g"],
    "bar": ["bar a", "bara", "bar abs", "bar absolute", "bar(a)", "BAR", "Bar", "bars", " bar "],
    "psi": ["psia", "PSI", "psi a", "psi(abs)", "lb/in2", "lbf/in2", "lbf/in^2", "lbf/in\N{SUPERSCRIPT TWO}"],
    "kgf/cm2 g": ["kg/cm2 g", "kg/cm2(g)", "kg/cm2g", "kg/cm\N{SUPERSCRIPT TWO} g", "Kg/cm2 g", "atg", "at g"],
    "m3/h": ["m\N{SUPERSCRIPT THREE}/h", "m^3/h", "m**3/h", "m3/hr", "M3/H", "m3 / h", "cmh", "m3.h-1", "m3 h-1",
             "m3 per hour", "m3/hour", "m\N{SUPERSCRIPT THREE}\N{MIDDLE DOT}h\N{SUPERSCRIPT MINUS}\N{SUPERSCRIPT ONE}"],
    "l/h": ["L/h", "lph", "litre/hour", "l/hr", "liters/h"], "l/s": ["L/s", "L/S", "l/sec", "lps", "litres per second"],
    "t/h": ["T/H", "tonne/h", "tph", "te/h", "t/hr"], "kg/h": ["Kg/h", "KG/H", "kg/hr", "kilograms/hour"],
    "US gal/min": ["gpm", "GPM", "USGPM", "US gpm", "U.S. gal/min", "usgal/min", "gal/min", "gallons per minute"],
    "imp gal/min": ["igpm", "UK gal/min", "imperial gal/min", "imp. gal/min", "UK gpm"],
    "bbl/d": ["bpd", "BPD", "bbl/day", "barrels/day", "barrels per day"],
    "deg C": ["\N{DEGREE SIGN}C", "\N{DEGREE SIGN} C", "\N{MASCULINE ORDINAL INDICATOR}C", "\N{DEGREE CELSIUS}", "C",
              "c", "degC", "DEG C", "deg. C", "degree C", "degrees C", "Celsius"],
    "deg F": ["\N{DEGREE SIGN}F", "F", "degF", "Fahrenheit", "\N{DEGREE FAHRENHEIT}"],
    "K": ["kelvin", "deg K"], "deg R": ["R", "\N{DEGREE SIGN}R", "rankine"],
    "mPa.s": ["mPa s", "mPas", "mPa*s", "mPa\N{MIDDLE DOT}s", "cP", "CP", "cp", "centipoise"],
    "mm2/s": ["mm\N{SUPERSCRIPT TWO}/s", "cSt", "CST", "centistokes"],
    "kg/m3": ["kg/m\N{SUPERSCRIPT THREE}", "KG/M3", "kg/m^3", "g/l", "kg m-3"],
    "mH2O": ["mwc", "m WC", "mWC", "m H2O", "m w.c.", "m H\N{SUBSCRIPT TWO}O"], "mmHg": ["mm Hg", "MMHG"],
    "inHg": ["in Hg", "in. Hg", "inch Hg"], "in": ["inch", "inches", '"', "IN", "in."], "mm": ["MM"],
    "um": ["\N{MICRO SIGN}m", "\N{GREEK SMALL LETTER MU}m", "micron"], "Kv": ["kv", "KV", "Kvs"], "Cv": ["CV"],
    "kg/(m s)": ["Pa.s", "kg/m/s"],
}  # fmt: skip


@pytest.mark.parametrize(("plain", "spelled"), [(plain, other) for plain, others in SAME.items() for other in others])
def test_spellings(plain: str, spelled: str) -> None:
    assert meaning(spelled) == meaning(plain)


def test_what_a_general_library_reads_otherwise() -> None:
    """C is no coulomb, a barrel no 31.5 gallons, mPas no plural of mPa; kg/cm2 is a pressure, and `bar.g` gauge."""
    assert meaning("bbl/day") == meaning("bbl/d")
    assert meaning("mPas").factor == 1e-3
    assert meaning("kg/cm2").dimension == PRESSURE
    assert meaning("bar.g").gauge
    assert meaning("C").zero == 273.15


UNCLEAR = {
    "MPA": "MPa or mPa", "Mpa": "MPa or mPa", "mpa.s": "MPa or mPa", "MPAG": "MPa or mPa", "Mbar": "megabar",
    "ton": "short or long", "tons/h": "short or long", "kg/m s": "brackets",
    "Nm3/h": "volume of gas", "NM3/H": "volume of gas", "Nm\N{SUPERSCRIPT THREE}/h": "volume of gas",
    "Sm3/h": "volume of gas", "scfm": "volume of gas", "MMscfd": "volume of gas", "N m3/h": "volume of gas",
}  # fmt: skip


@pytest.mark.parametrize(("unit", "words"), UNCLEAR.items())
def test_what_is_unclear_is_refused_with_the_reason(unit: str, words: str) -> None:
    assert call("LP_UNIT", [1.0, unit, "bar"]) is CellError.VALUE
    said = reason("LP_UNIT", [1.0, unit, "bar"])
    assert said.startswith("LP_UNIT: from:")
    assert words in said


HOSTILE = [
    "9**9**9**9", "10**10**10**10", "m**99999999", "m^9^9^9", "__import__('os').system('x')", "1e400", "lambda: 0",
    "(" * 40, "m" + "(" * 30, "a*" * 19 + "a", "/" * 40, "m/" * 20, " " * 40, "\x00", "\n", "bar\x00g", "%s%s%s", "{0}",
    "=1+1", "m" * 100_000, "m*" * 100_000, "\N{GREEK CAPITAL LETTER OMEGA}", "\u202ebar", "0", "1", "-", "g g",
    "10 bar",
    "bar/", "/bar", "bar//s", "m3/h g", "m0", "m9", "Nm3" * 13, "degree_Celsius", "delta_degC", "dB", "pH", "rad",
    "coulomb", "bar+g", "bar;g", "'bar'",
]  # fmt: skip


@pytest.mark.parametrize("text", HOSTILE, ids=range(len(HOSTILE)))
def test_hostile_texts_give_a_value_error_and_do_not_hang(text: str) -> None:
    meaning.cache_clear()
    assert call("LP_UNIT", [1.0, text, "bar"]) is CellError.VALUE
    assert call("LP_UNIT", [1.0, "bar", text]) is CellError.VALUE
    said = reason("LP_UNIT", [1.0, "bar", text])
    assert said.startswith("LP_UNIT: ")
    assert len(said) < 250
    assert len(text) <= LONGEST or "..." in said


def test_kinds_that_differ() -> None:
    for one, other in (("bar", "m3/h"), ("m3/h", "kg/h"), ("cP", "cSt"), ("K", "bar"), ("Kv", "m3/h"), ("%", "Kv"),
                       ("m", "m2/s"), ("kW", "kJ/kg")):  # fmt: skip
        assert call("LP_UNIT", [1.0, one, other]) is CellError.VALUE
        assert "different kinds" in reason("LP_UNIT", [1.0, one, other])


@pytest.mark.parametrize(("one", "other"), [("bar g", "bar"), ("bar", "psig"), ("kPa g", "bar g")])
def test_a_gauge_unit_needs_the_atmosphere(one: str, other: str) -> None:
    assert call("LP_UNIT", [3.0, one, other]) is CellError.NA
    assert call("LP_UNIT", [3.0, one, other, None]) is CellError.NA
    assert "LP_ATMOSPHERE" in reason("LP_UNIT", [3.0, one, other])
    assert isinstance(call("LP_UNIT", [3.0, one, other, 1.0]), float)


@pytest.mark.parametrize(
    ("value", "one", "other"),
    [(-1.2, "bar g", "kPa"), (-0.3, "bar", "kPa"), (-300.0, "deg C", "K"), (-1.0, "K", "deg C"), (-500.0, "F", "R")],
)
def test_below_absolute_zero(value: float, one: str, other: str) -> None:
    assert call("LP_UNIT", [value, one, other, 1.0]) is CellError.NUM
    assert "absolute zero" in reason("LP_UNIT", [value, one, other, 1.0])


def test_negative_values_of_other_kinds_are_fine() -> None:
    assert call("LP_UNIT", [-2.0, "m", "mm"]) == -2000.0
    assert call("LP_UNIT", [-0.2, "bar g", "mbar g", 1.0]) == pytest.approx(-200.0, rel=1e-12)


def test_too_large_for_a_number() -> None:
    assert call("LP_UNIT", [1e308, "bar", "Pa"]) is CellError.NUM
    assert "larger than a number" in reason("LP_UNIT", [1e308, "bar", "Pa"])


@pytest.mark.parametrize("word", ["SG", "sg", " Sg "])
def test_a_relative_density_says_on_which_water(word: str) -> None:
    assert call("LP_UNIT", [0.8, word, "kg/m3"]) == pytest.approx(799.28, rel=1e-12)  # 0.8 times 999.1
    assert "999.1" in reason("LP_UNIT", [0.8, word, "kg/m3"])
    assert reason("LP_UNIT", [1.0, "kg/m3", "g/l"]) == "ok"


def test_units_may_change_from_row_to_row() -> None:
    values = functions["LP_UNIT"](
        np.array([1.0, 1.0, 1.0, 1.0, 1.0]), np.array(["bar", "psi", "m3/h", "nonsense", "bar g"], object), "kPa",
        np.array([np.nan, np.nan, 1.0, 1.0, 1.0]),
    )  # fmt: skip
    assert values[0] == 100.0
    assert values[1] == pytest.approx(6.894757293168, rel=1e-12)
    assert values[4] == pytest.approx(200.0)
    assert [math.isnan(v) for v in values] == [False, False, True, True, False]
    said = functions["LP_UNIT"].why(np.array([1.0, 1.0]), np.array(["m3/h", "bar"], object), "kPa")
    assert "different kinds" in said[0]
    assert said[1] == "ok"


@pytest.mark.parametrize(("value", "from_", "to", "expected"), [
    (0, "deg C", "deg F", 32), (212, "deg F", "deg C", 100), (20, "deg C", "deg F", 68), (-40, "deg F", "deg C", -40),
    (0, "deg C", "K", 273.15), (32, "deg F", "K", 273.15),
])  # fmt: skip
def test_whole_degrees_stay_whole(value: float, from_: str, to: str, expected: float) -> None:
    """A cell that is compared with = must meet its number (definitions of the scales)."""
    assert functions["LP_UNIT"](value, from_, to) == expected
