"""Sentences whose numbers can be shown in either set of units.

A template is a sentence in which each number stands as a mark: its SI value, its kind and its format. ``said`` puts
the marks into words, metric or US. A sentence without marks is a template too, and stays as it is.
"""

from __future__ import annotations

import math
import re
from dataclasses import replace

from lowpoint.survey.model import Survey
from lowpoint.units import INCH, Unit, dimension

__all__ = ["amount", "in_system", "said"]

_MARK = re.compile("\ue000([^\ue000\ue001]*)\ue001")
_ROUNDED = {"up": math.ceil, "down": math.floor}
_SLACK = 1e-9
"""Share of the last digit that is rounding of the arithmetic, and no reason to round up or down."""
_INCHES = {15: "1/2", 20: "3/4", 25: "1", 32: "1 1/4", 40: "1 1/2", 65: "2 1/2", 80: "3", 100: "4", 125: "5"}
"""Nominal sizes in inches of the DN that are no multiple of 25 above 125. Source: common practice (ISO 6708, ASME)."""


def amount(x: float, kind: str, form: str = ".4g", rounding: str = "", *, bare: bool = False) -> str:
    """The mark of an SI number.

    ``kind``: as ``units.dimension`` knows it, or ``absolute pressure``, ``temperature difference``, ``nominal size``.
    ``form``: how it is formatted in the unit. ``rounding``: ``up`` of what must be at least so much, ``down`` of what
    may be at most. ``bare``: without its unit.
    """
    return f"\ue000{kind}|{x!r}|{form}|{rounding}|{'bare' if bare else ''}\ue001"


def said(template: str, system: str = "metric") -> str:
    """The sentence with its numbers in a set of units."""
    return _MARK.sub(lambda mark: _shown(mark[1], system), template)


def in_system(survey: Survey, system: str) -> Survey:
    """The survey with the sentences about items and remedies in a set of units."""
    if system == "metric":
        return survey
    items = tuple(replace(item, why=said(item.template or item.why, system)) for item in survey.items)
    remedies = {tag: tuple(remedy.in_units(system) for remedy in found) for tag, found in survey.remedies.items()}
    return replace(survey, items=items, remedies=remedies)


def _shown(mark: str, system: str) -> str:
    kind, value, form, rounding, bare = mark.split("|")
    x = float(value)
    if kind == "nominal size" and system == "us":
        return f"{_nominal(x)} in"
    if kind == "size" and system == "us":
        form = ".4g"  # a bore is named in tenths of a millimetre: thousandths of an inch are as fine
    unit, label = _unit(kind, system)
    number = _formatted(unit.from_si(x), form, rounding)
    if bare:
        return number
    return f"{label} {number}" if kind == "coefficient" else f"{number} {label}"


def _unit(kind: str, system: str) -> tuple[Unit, str]:
    if kind == "temperature difference":
        unit = dimension("temperature").unit(system)
        return Unit(unit.label, unit.factor), "K" if system == "metric" else "deg F"
    if kind == "absolute pressure":
        unit = dimension("pressure").unit(system)
        return unit, "psia" if system == "us" else f"{unit.label} a"
    unit = dimension("size" if kind == "nominal size" else kind).unit(system)
    return unit, unit.label


def _formatted(x: float, form: str, rounding: str) -> str:
    if rounding and x != 0.0 and math.isfinite(x):
        digits = int(form[1:-1])
        places = digits if form[-1] == "f" else digits - 1 - math.floor(math.log10(abs(x)))
        scaled = x * 10.0**places
        slack = _SLACK * max(1.0, abs(scaled))
        x = _ROUNDED[rounding](scaled - slack if rounding == "up" else scaled + slack) / 10.0**places
    return format(x, form)


def _nominal(x: float) -> str:
    """A nominal size in inches: of a DN the one that goes with it, else the size itself."""
    dn = round(1e3 * x)
    if abs(1e3 * x - dn) < 1e-6:
        if dn in _INCHES:
            return _INCHES[dn]
        if dn % 25 == 0:
            return str(dn // 25)
    return f"{x / INCH:.4g}"
