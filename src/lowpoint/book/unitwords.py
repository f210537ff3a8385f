"""The unit words of the worksheet function CONVERT, each with its factor to the SI unit of its family.

Source: the words are those of OpenFormula (OASIS ODF 1.3 part 4, CONVERT); factors by definition, NIST SP 811 app. B.
"""

from __future__ import annotations

__all__ = ["convert"]

_INCH, _FOOT, _YARD, _MILE, _NAUTICAL = 0.0254, 0.3048, 0.9144, 1609.344, 1852.0
_POUND, _GRAVITY, _LITRE, _GALLON = 0.45359237, 9.80665, 1e-3, 3.785411784e-3
_LENGTH = {"m": 1.0, "mi": _MILE, "Nmi": _NAUTICAL, "in": _INCH, "ft": _FOOT, "yd": _YARD, "ang": 1e-10}
_LENGTH |= {"Pica": _INCH / 72, "Picapt": _INCH / 72, "pica": _INCH / 6, "ell": 45 * _INCH}
_LENGTH |= {"survey_mi": 5280 * 1200 / 3937, "ly": 9460730472580800.0, "pc": 3.0856775814913673e16}
_LENGTH |= {"parsec": _LENGTH["pc"]}
_FAMILIES: dict[str, dict[str, float]] = {
    "length": _LENGTH,
    "mass": {
        "g": 1e-3, "lbm": _POUND, "ozm": _POUND / 16, "grain": _POUND / 7000, "stone": 14 * _POUND,
        "cwt": 100 * _POUND, "uk_cwt": 112 * _POUND, "ton": 2000 * _POUND, "uk_ton": 2240 * _POUND,
        "sg": _POUND * _GRAVITY / _FOOT, "shweight": 100 * _POUND, "lcwt": 112 * _POUND, "hweight": 112 * _POUND,
        "LTON": 2240 * _POUND, "brton": 2240 * _POUND, "u": 1.66053906660e-27,
    },
    "time": {
        "yr": 31557600.0, "day": 86400.0, "d": 86400.0, "hr": 3600.0, "mn": 60.0, "min": 60.0, "s": 1.0, "sec": 1.0,
    },
    "pressure": {
        "Pa": 1.0, "p": 1.0, "atm": 101325.0, "at": 101325.0, "mmHg": 133.322387415, "Torr": 101325.0 / 760,
        "psi": _POUND * _GRAVITY / _INCH**2,
    },
    "force": {"N": 1.0, "dyn": 1e-5, "dy": 1e-5, "lbf": _POUND * _GRAVITY, "pond": _GRAVITY * 1e-3},
    "energy": {
        "J": 1.0, "e": 1e-7, "c": 4.184, "cal": 4.1868, "eV": 1.602176634e-19, "ev": 1.602176634e-19, "Wh": 3600.0,
        "wh": 3600.0, "flb": _POUND * _GRAVITY * _FOOT, "BTU": 1055.05585262, "btu": 1055.05585262,
        "HPh": 550 * _POUND * _GRAVITY * _FOOT * 3600, "hh": 550 * _POUND * _GRAVITY * _FOOT * 3600,
    },
    "power": {
        "W": 1.0, "w": 1.0, "HP": 550 * _POUND * _GRAVITY * _FOOT, "h": 550 * _POUND * _GRAVITY * _FOOT,
        "PS": 75 * _GRAVITY,
    },
    "volume": {
        "l": _LITRE, "L": _LITRE, "lt": _LITRE, "gal": _GALLON, "qt": _GALLON / 4, "pt": _GALLON / 8,
        "us_pt": _GALLON / 8, "cup": _GALLON / 16, "oz": _GALLON / 128, "tbs": _GALLON / 256, "tsp": _GALLON / 768,
        "tspm": 5e-6, "uk_gal": 4.54609e-3, "uk_qt": 4.54609e-3 / 4, "uk_pt": 4.54609e-3 / 8, "barrel": 42 * _GALLON,
        "bushel": 2150.42 * _INCH**3, "regton": 100 * _FOOT**3, "GRT": 100 * _FOOT**3, "MTON": 40 * _FOOT**3,
    },
    "area": {"ha": 1e4, "uk_acre": 4840 * _YARD**2, "us_acre": 4046.872609874252, "ar": 100.0, "Morgen": 2500.0},
    "speed": {
        "m/s": 1.0, "m/sec": 1.0, "m/h": 1 / 3600, "m/hr": 1 / 3600, "mph": _MILE / 3600, "kn": _NAUTICAL / 3600,
        "admkn": 6080 * _FOOT / 3600,
    },
    "induction": {"T": 1.0, "ga": 1e-4},
    "information": {"bit": 1.0, "byte": 8.0},
}  # fmt: skip
for _family, _power in (("area", 2), ("volume", 3)):
    for _unit in ("m", "mi", "Nmi", "in", "ft", "yd", "ang"):
        _FAMILIES[_family] |= {
            f"{_unit}{_power}": _LENGTH[_unit] ** _power,
            f"{_unit}^{_power}": _LENGTH[_unit] ** _power,
        }
_TEMPERATURES = {  # factor and offset to kelvin
    "C": (1.0, 273.15), "cel": (1.0, 273.15), "K": (1.0, 0.0), "kel": (1.0, 0.0), "F": (5 / 9, 459.67 * 5 / 9),
    "fah": (5 / 9, 459.67 * 5 / 9), "Rank": (5 / 9, 0.0), "Reau": (1.25, 273.15),
}  # fmt: skip
_METRICS = "m g s sec Pa p N J e c cal eV ev Wh wh W w PS l L lt m2 m^2 m3 m^3 m/s m/sec m/h m/hr ang dyn dy pond ar "
_METRICS += "T ga bit byte u pc ly"
_METRIC = frozenset(_METRICS.split())
_PREFIXES = {"Y": 24, "Z": 21, "E": 18, "P": 15, "T": 12, "G": 9, "M": 6, "k": 3, "h": 2, "e": 1, "da": 1, "d": -1}
_PREFIXES |= {"c": -2, "m": -3, "u": -6, "n": -9, "p": -12, "f": -15, "a": -18, "z": -21, "y": -24}


def _found(word: str) -> tuple[str, float] | None:
    """Family and factor of a unit word, with a decimal prefix where it may have one."""
    for family, units in _FAMILIES.items():
        if word in units:
            return family, units[word]
    for size in (2, 1):
        power, rest = _PREFIXES.get(word[:size]), word[size:]
        if power is not None and rest in _METRIC:
            family, factor = _found(rest) or ("", 0.0)
            dimension = int(rest[-1]) if rest[-1:] in {"2", "3"} else 1
            return family, factor * 10.0 ** (power * dimension)
    return None


def convert(number: float, given: str, wanted: str) -> float | None:
    """``number`` in another unit; ``None`` for an unknown word or units of two families (a cell shows #N/A).

    >>> convert(1.0, "atm", "kPa")
    101.325
    """
    if given in _TEMPERATURES and wanted in _TEMPERATURES:
        (factor, offset), (to_factor, to_offset) = _TEMPERATURES[given], _TEMPERATURES[wanted]
        return (number * factor + offset - to_offset) / to_factor
    before, after = _found(given), _found(wanted)
    if before is None or after is None or before[0] != after[0]:
        return None
    return number * before[1] / after[1]
