"""Numbers and units as the page shows them: a few figures, never in powers of ten where it can be helped."""

from __future__ import annotations

import math

from lowpoint.units import dimension

__all__ = ["figure", "measured", "pretty"]

_PRETTY = (("m3/h", "m³/h"), ("kg/m3", "kg/m³"), ("lb/ft3", "lb/ft³"), ("deg C", "°C"), ("deg F", "°F"))


def pretty(text: str) -> str:
    """A heading with its unit as print has it."""
    for plain, shown in _PRETTY:
        text = text.replace(plain, shown)
    return text


def figure(x: float, digits: int = 4) -> str:
    """To so many significant figures, empty where there is no number.

    >>> figure(12345.6), figure(0.0123456), figure(3.0)
    ('12346', '0.01235', '3')
    """
    if not math.isfinite(x):
        return ""
    if x == 0.0 or not 1e-5 <= abs(x) < 1e9:
        return f"{x:.{digits}g}"
    places = max(0, digits - 1 - math.floor(math.log10(abs(x))))
    text = f"{x:.{places}f}"
    return text.rstrip("0").rstrip(".") if places else text


def measured(x: float, kind: str, system: str) -> str:
    """An SI number with its unit: ``12.5 bar``."""
    unit = dimension(kind).unit(system)
    return f"{figure(unit.from_si(x))} {pretty(unit.label)}".strip()
