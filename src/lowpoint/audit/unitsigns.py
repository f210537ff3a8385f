"""Units as data sheets write them, with what they say of gauge and absolute kept apart from saying nothing."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import NamedTuple

from lowpoint.physics.unitnames import PRESSURE, Meaning, meaning
from lowpoint.units import KV

__all__ = ["PLAIN", "Sign", "to_si", "unit_sign"]

PLAIN = frozenset({"", "-", "–", "—", "−", "1", "ratio", "none", "n/a", "dimensionless", "--", "---"})
"""What stands for no unit."""


class Sign(NamedTuple):
    """A unit as read: its canonical label, meaning, and whether gauge (True), absolute (False) or neither was said."""

    label: str
    meaning: Meaning
    gauge: bool | None
    level: bool = False
    nominal: bool = False


_LEVEL = re.compile(r"dB ?\(? ?A? ?\)?|dBA", re.IGNORECASE)
_REFERENCE = re.compile(
    r"(?P<unit>.+?)[ _.,*-]?[(\[]?\s*(?P<what>absolute|abs|a|gauge|gage|ga|g|r|ü)\s*[)\]]?\.?", re.IGNORECASE
)
_NOMINAL = {"dn": ("DN", "mm"), "nps": ("NPS", "in")}
_SPELLED = {
    "masl": "m", "m asl": "m", "m amsl": "m", "m a.s.l.": "m", "ft asl": "ft", "ft amsl": "ft",
    "lb/cu ft": "lb/ft3", "cuft": "ft3", "lb/cu.ft": "lb/ft3", "lbm/cu ft": "lb/ft3", "ppt": "g/kg", "psu": "g/kg",
    "deg": "", "degrees": "", "bar(d)": "bar", "psid": "psi", "psi d": "psi", "bard": "bar", "psi(d)": "psi",
    "bar d": "bar", "kpad": "kPa", "kpa(d)": "kPa", "kpa d": "kPa", "s.g.": "SG", "kg/l": "kg/dm3", "cum/h": "m3/h",
    "cu.m/h": "m3/h", "cu m/h": "m3/h", "pct": "%", "per cent": "%", "% open": "%", "% of travel": "%",
    "% travel": "%", "wt%": "%", "wt %": "%", "% wt": "%", "mass %": "%", "% mass": "%", "‰": "g/kg",
    "degc": "deg C", "degf": "deg F", "lb/gal (us)": "lb/gal", "gpm(us)": "gpm", "gpm (us)": "gpm",
    "gal/min (us)": "gpm", "us gal/mn": "gpm", "usgal/min": "gpm", "m3/hour": "m3/h", "m³/hour": "m3/h",
    "cu.m/hr": "m3/h", "lit/s": "l/s", "lps": "l/s",
}  # fmt: skip


@lru_cache(4096)
def unit_sign(text: str) -> Sign | None:
    """The unit that a whole text is, in brackets or not; None where it is none."""
    text = " ".join(text.split()).strip()
    if len(text) > 24 or not text or (len(text) == 2 and text[1] in "1234" and text[0] not in "mM"):
        return None  # P1 is a pressure, not a poise
    if text[0] in "[(" and text[-1] in ")]" and _closed(text):
        return unit_sign(text[1:-1])
    if _LEVEL.fullmatch(text):
        return Sign("dB(A)" if "a" in text.lower() else "dB", Meaning("level", 1.0), None, level=True)
    nominal = _NOMINAL.get(text.lower())
    if nominal:
        return Sign(nominal[0], meaning(nominal[1]), None, nominal=True)
    text = _SPELLED.get(text.lower(), text)
    return _pressure(text) or _plain_unit(text)


def _closed(text: str) -> bool:
    """Are the first and the last bracket of a text a pair?"""
    depth = 0
    for place, sign in enumerate(text):
        depth += (sign in "[(") - (sign in ")]")
        if depth == 0 and place < len(text) - 1:
            return False
    return depth == 0


def _pressure(text: str) -> Sign | None:
    found = _REFERENCE.fullmatch(text)
    if found is None:
        return None
    base = _plain_unit(found["unit"].strip())
    if base is None or base.meaning.dimension != PRESSURE:
        return None
    gauge = found["what"].lower()[0] in "grü"
    return Sign(f"{base.label} {'g' if gauge else 'a'}", base.meaning._replace(gauge=gauge), gauge)


_LABELS = {
    "kg/cm2": "kgf/cm2", "gpm": "US gal/min", "usgpm": "US gal/min", "us gpm": "US gal/min", "m3/hr": "m3/h",
    "c": "deg C", "°c": "deg C", "f": "deg F", "°f": "deg F", '"': "in", "inch": "in", "inches": "in",
    "kg/hr": "kg/h", "lb/hr": "lb/h", "lbs/h": "lb/h", "in.": "in",
}  # fmt: skip


def _plain_unit(text: str) -> Sign | None:
    try:
        found = meaning(text)
    except ValueError:
        return None
    label = text.replace("³", "3").replace("²", "2").replace("º", "°")
    label = _LABELS.get(label.lower(), label)
    if re.fullmatch(r"(?:°|deg\.? ?)[CF]", label, re.IGNORECASE):
        label = f"deg {label[-1].upper()}"
    return Sign(label, found, None)


def to_si(number: float, sign: Sign, atmosphere: float) -> float:
    """A number of this unit in coherent SI, absolute where the unit says gauge; flow coefficients as Av in m2."""
    si = (number + sign.meaning.zero) * sign.meaning.factor
    if sign.meaning.dimension == "flow coefficient":
        return si * KV
    return si + atmosphere if sign.meaning.gauge else si
