"""The vocabulary of data sheets: every quantity by its key, and what kind of unit each takes."""

from __future__ import annotations

from lowpoint.audit.terms import OTHERS, TERMS, UNCLEAR, Term
from lowpoint.physics.unitnames import Meaning, meaning

__all__ = ["BY_KEY", "CLAIMS", "INPUTS", "LEVELS", "OTHERS", "PRESSURES", "STATEMENTS", "TERMS", "UNCLEAR", "UNITS",
           "Term", "becomes", "fits"]  # fmt: skip

BY_KEY: dict[str, Term] = {term.key: term for term in TERMS}
INPUTS: tuple[str, ...] = tuple(term.key for term in TERMS if term.role in ("input", "both"))
CLAIMS: tuple[str, ...] = tuple(term.key for term in TERMS if term.role in ("claim", "both"))
PRESSURES: frozenset[str] = frozenset(term.key for term in TERMS if term.kind in ("pressure", "pressures"))
"""Gauge or absolute matters for these."""
STATEMENTS: tuple[str, ...] = (
    "no cavitation", "incipient cavitation", "cavitating", "flashing", "no flashing", "choked", "not choked",
    "turbulent", "not turbulent",
)  # fmt: skip
"""Words of the quantity ``statement`` (``Value.word``)."""

LEVELS = frozenset({"dB(A)", "dB"})
_REFERENCES = {
    "pressure": ("bar",), "pressures": ("bar",), "drop": ("bar",), "temperature": ("K",), "flow": ("m3/h", "kg/s"),
    "mass_flow": ("kg/s", "m3/h"), "size": ("mm",), "sizes": ("mm",), "density": ("kg/m3",), "elevation": ("m",),
    "viscosity": ("mPa.s", "m2/s"), "kinematic": ("m2/s", "mPa.s"), "coefficient": ("Kv",), "velocity": ("m/s",),
    "salinity": ("%",), "share": ("%",), "ratio": ("%",), "count": (),
}  # fmt: skip
"""A unit of each kind of quantity; two where the density carries one over into the other."""
_KINDS = {kind: frozenset(meaning(unit).dimension for unit in units) for kind, units in _REFERENCES.items()}
UNITS = frozenset(dimension for kinds in _KINDS.values() for dimension in kinds)
"""Dimensions that some quantity has: any other text that could be a unit is none here."""
_CARRIED = {
    ("flow", meaning("kg/s").dimension): "mass_flow",
    ("mass_flow", meaning("m3/h").dimension): "flow",
    ("viscosity", meaning("m2/s").dimension): "kinematic",
    ("kinematic", meaning("mPa.s").dimension): "viscosity",
}


def fits(kind: str, unit: Meaning) -> bool:
    """Can a quantity of this kind be given in this unit?"""
    return unit.dimension in _KINDS.get(kind, frozenset())


def becomes(key: str, unit: Meaning) -> str:
    """The quantity that a value is once its unit is known: a flow in kg/h is ``mass_flow``, a viscosity in cSt
    ``kinematic``."""
    return _CARRIED.get((key, unit.dimension), key)
