"""Properties and flows that a label states at another temperature: ``Density at 15 °C`` of a hot liquid."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence

from lowpoint.audit.model import Finding, Value

__all__ = ["at_flowing_temperature"]

DEPENDS = frozenset({"pv", "density", "flow", "viscosity", "kinematic", "sound_speed"})
"""Quantities that a temperature changes."""
NEAR = 1.0
"""K; a reference temperature this near to the flowing one is the same."""
_AT = re.compile(r"(?:\bat\b|@|\bbei\b)\s*T?\s*=?\s*(-?\d+(?:[.,]\d+)?)\s*(?:°\s*|deg\.?\s*)?([CFK])\b", re.IGNORECASE)


def at_flowing_temperature(values: Sequence[Value]) -> tuple[list[Value], list[Finding]]:
    """The values without those whose label says another temperature than the sheet has, and a finding for each."""
    flowing = [value for value in values if value.quantity == "t" and math.isfinite(value.si)]
    kept: list[Value] = []
    told: list[Finding] = []
    for value in values:
        stated = _stated(value)
        own = [t.si for t in flowing if value.case is None or t.case in (None, value.case)]
        if math.isnan(stated) or not own or min(abs(t - stated) for t in own) <= NEAR:
            kept.append(value)
            continue
        told.append(Finding(
            "ambiguous", value.cell, f"'{value.label}' {value.raw} holds at another temperature than the flow has, "
            "and was not used", "Ask for the value at flowing conditions."))  # fmt: skip
    return kept, told


def _stated(value: Value) -> float:
    """The temperature that a label says its value holds at, K; NaN where it says none."""
    found = _AT.search(value.label) if value.quantity in DEPENDS else None
    if found is None:
        return math.nan
    degrees = float(found[1].replace(",", "."))
    return {"C": degrees + 273.15, "F": (degrees + 459.67) / 1.8, "K": degrees}[found[2].upper()]
