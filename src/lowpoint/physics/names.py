"""Liquids by the names that the trade uses: what each word means, without loading any property library.

The table ``tables/fluid_names.csv`` holds every name with its aliases. Spelling is compared without case, spaces,
hyphens and dots, so that ``R-134a`` and ``r134A`` are one.
"""

from __future__ import annotations

import csv
import difflib
import re
from functools import cache
from importlib import resources
from typing import NamedTuple

__all__ = ["Name", "is_salty", "key_of", "known_names", "resolve", "resolve_pure"]

GIVE_PV = "give pv, pc and density yourself from its data sheet"


class Name(NamedTuple):
    """One entry: its canonical name, what kind of liquid it is, and the registry number of the pure substance."""

    name: str
    kind: str
    key: str


def _folded(text: str) -> str:
    return re.sub(r"[\s\-_.,()']+", "", text).casefold()


@cache
def _rows() -> tuple[tuple[Name, tuple[str, ...]], ...]:
    table = resources.files("lowpoint").joinpath("tables/fluid_names.csv").read_text("utf-8")
    return tuple(
        (Name(row["name"], row["kind"], row["key"]), tuple(a for a in row["aliases"].split("|") if a))
        for row in csv.DictReader(table.splitlines())
    )


@cache
def _by_spelling() -> dict[str, Name]:
    found: dict[str, Name] = {}
    for entry, aliases in _rows():
        for spelling in (entry.name, *aliases, *([entry.key] if entry.kind == "pure" else [])):
            other = found.setdefault(_folded(spelling), entry)
            if other is not entry:
                raise AssertionError(f"'{spelling}' names both {other.name} and {entry.name}")
    return found


@cache
def _by_name() -> dict[str, Name]:
    return {entry.name: entry for entry, _ in _rows()}


def known_names() -> list[str]:
    """Every liquid whose properties are known, by its canonical name, water first."""
    return [entry.name for entry, _ in _rows() if entry.kind in ("pure", "sea water")]


def key_of(name: str) -> str:
    """The registry number under which the property library knows a canonical name; sea water has that of water."""
    return _by_name()[name].key


def is_salty(name: str) -> bool:
    """Is a canonical name sea water or a brine of it?"""
    return _by_name()[name].kind == "sea water"


def resolve(text: str) -> str:
    """The canonical name of a liquid whose properties are known; ValueError with the sentence for any other."""
    entry = _by_spelling().get(_folded(text))
    if entry is None:
        raise ValueError(_unknown(text))
    if entry.kind == "mixture":
        raise ValueError(f"fluid '{text}' is a mixture whose vapour pressure depends on its composition: {GIVE_PV}")
    if entry.kind == "ambiguous":
        raise ValueError(
            f"fluid '{text}' may be the pure substance ('pure {entry.name}') or its mixture with water: name the pure "
            f"one, or for a mixture {GIVE_PV}"
        )
    if entry.kind == "not covered":
        raise ValueError(f"fluid '{text}' has no equation of state at hand: {GIVE_PV}")
    return entry.name


def resolve_pure(text: str) -> str:
    """As :func:`resolve`, for what is defined for pure liquids only."""
    name = resolve(text)
    if is_salty(name):
        raise ValueError(
            f"fluid '{text}' leaves its salt in the liquid as it boils, which is not covered; ask for 'water' where "
            "that will do as an estimate"
        )
    return name


def _unknown(text: str) -> str:
    if "%" in text or re.search(r"\bsolution\b|\bmix(ture)?\b|\bblend\b|\boil\b", text, re.IGNORECASE):
        return f"fluid '{text}' looks like a mixture, for which no vapour pressure is known: {GIVE_PV}"
    near = nearest(text)
    hint = f"; nearest: {', '.join(near)}" if near else ""
    return f"fluid must be a known liquid, got '{text}'{hint}. For another liquid {GIVE_PV}"


def nearest(text: str, most: int = 3) -> list[str]:
    """The known liquids whose names or aliases are spelled most like a text."""
    table = {spelling: entry.name for spelling, entry in _by_spelling().items() if entry.kind in ("pure", "sea water")}
    close = difflib.get_close_matches(_folded(text), table, n=3 * most, cutoff=0.6)
    return list(dict.fromkeys(table[spelling] for spelling in close))[:most]
