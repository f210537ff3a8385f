"""The headings of the blank list in each set of units, and the words that its cells are chosen from."""

from __future__ import annotations

from lowpoint.survey.fields import ListField

__all__ = ["heading_of", "unit_of"]

_ABSOLUTE = {"metric": "bar a", "us": "psia"}
_DIFFERENCE = {"metric": "bar", "us": "psi"}
_UNITS = {
    "bar": {"metric": "bar g", "us": "psig"}, "K": {"metric": "deg C", "us": "deg F"},
    "m3/h": {"metric": "m3/h", "us": "US gal/min"}, "mm": {"metric": "mm", "us": "in"},
    "m": {"metric": "m", "us": "ft"}, "kg/m3": {"metric": "kg/m3", "us": "lb/ft3"},
    "mPa.s": {"metric": "mPa.s", "us": "cP"}, "m/s": {"metric": "m/s", "us": "ft/s"},
    "Kv": {"metric": "Kv", "us": "Cv"}, "g/kg": {"metric": "g/kg", "us": "g/kg"}, "%": {"metric": "%", "us": "%"},
}  # fmt: skip
_OTHER = {"pv": _ABSOLUTE, "pc": _ABSOLUTE, "atmosphere": _ABSOLUTE, "head_ref": _DIFFERENCE,
          "outlet_loss": _DIFFERENCE}  # fmt: skip


def unit_of(field: ListField, system: str) -> str:
    """The unit of a field's heading in the form; empty for a ratio and for words."""
    if not field.reference:
        return ""
    return _OTHER.get(field.key, _UNITS[field.reference])[system]


def heading_of(field: ListField, system: str) -> str:
    """The heading as the form has it, unit in brackets."""
    unit = unit_of(field, system)
    return f"{field.heading} [{unit}]" if unit else field.heading
