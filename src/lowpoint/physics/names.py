"""Liquids by the names that the trade uses: what each word means, without loading any property library.

The table ``tables/fluid_names.csv`` holds every name with its aliases. Spelling is compared without case, spaces,
hyphens, brackets and dots, so that ``R-134a`` and ``r134A`` are one.
"""

from __future__ import annotations

import csv
import difflib
import re
import unicodedata
from functools import cache
from importlib import resources
from typing import NamedTuple

__all__ = ["Name", "is_salty", "key_of", "known_names", "resolve"]

GIVE_PV = "give pv, pc and density yourself from its data sheet"
LONGEST = 60
"""Longer texts are no names, and are not compared with any."""


class Name(NamedTuple):
    """One entry: its canonical name, what kind of liquid it is, and the registry number of the pure substance."""

    name: str
    kind: str
    key: str


def _folded(text: str) -> str:
    """A spelling as it is compared: any dash, subscript digits as digits, no spaces and signs between."""
    return re.sub(r"[\W_]+", "", unicodedata.normalize("NFKC", text)).casefold()


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
    text = " ".join(text.split())
    entry = _by_spelling().get(_folded(text)) if len(text) <= LONGEST else None
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


def _unknown(text: str) -> str:
    if len(text) > LONGEST:
        return f"fluid must be the name of a liquid, got a text of {len(text)} letters ('{text[:20]}...')"
    if "%" in text or re.search(r"\b(solution|mix(ture)?|blend|oil)\b", text, re.IGNORECASE):
        return f"fluid '{text}' looks like a mixture, for which no vapour pressure is known: {GIVE_PV}"
    near = nearest(text)
    hint = f"; nearest: {', '.join(near)}" if near else ""
    return f"fluid must be a known liquid, got '{text}'{hint}. For another liquid {GIVE_PV}"


@cache
def _comparable() -> dict[str, tuple[Name, str]]:
    """Every spelling that a slip could have been meant for, with the way that it stands in the table."""
    return {
        _folded(spelling): (entry, spelling)
        for entry, aliases in _rows() if entry.kind in ("pure", "sea water", "mixture")
        for spelling in (entry.name, *aliases)
    }  # fmt: skip


def nearest(text: str, most: int = 3) -> list[str]:
    """The liquids whose names or aliases are spelled most like a text, or begin with it; mixtures say so."""
    spelled, table = _folded(text), _comparable()
    close = difflib.get_close_matches(spelled, table, n=4 * most, cutoff=0.6) if spelled else []
    begun = sorted((key for key in table if len(spelled) > 2 and key.startswith(spelled)), key=len)
    found: dict[Name, str] = {}
    for key in [*(key for key in close if _ratio(spelled, key) > 0.8), *begun, *close]:
        entry, spelling = table[key]
        shown = entry.name if spelling.isupper() else spelling
        found.setdefault(entry, f"{shown} (a mixture)" if entry.kind == "mixture" else shown)
    return list(found.values())[:most]


def _ratio(one: str, other: str) -> float:
    return difflib.SequenceMatcher(None, one, other).ratio()
