"""After the search: cases named in labels, unclear labels settled by elimination, values without the name of a case."""

from __future__ import annotations

import re
from itertools import pairwise

from lowpoint.audit.cases import case_name
from lowpoint.audit.found import Claimed, Found
from lowpoint.audit.matching import UNSURE, Label
from lowpoint.audit.vocabulary import BY_KEY

__all__ = ["settle"]


def settle(claims: list[Claimed], found: Found) -> None:
    """Put the claims of a page into its findings; what stays unclear goes into ``unsure``."""
    claims.sort(key=lambda c: (c.taken.cell.row, c.taken.cell.left))
    _coefficients_of_cases(claims)
    _inline_cases(claims)
    known = {c.label.key for c in claims if c.label.known}
    for one in claims:
        if one.taken.number is not None and one.taken.number.ambiguous:
            found.ambiguous_numbers.append(one.taken.cell)
        if one.label.key == UNSURE:
            key = _by_elimination(one, known, claims)
            if not key:
                found.unsure.append(one)
                continue
            _rename(one, key, claims)
        if one.label.known:
            found.values.append(one)
    _name_cases(found)


def _coefficients_of_cases(claims: list[Claimed]) -> None:
    """``Min. Cv``, ``Normal Cv``, ``Max. Cv`` are what the cases need, though ``Max. Cv`` alone is the rated one."""
    named = [c for c in claims if c.case is None and c.label.cases and c.label.key in (UNSURE, "rated")
             and c.label.words <= {"@kv", "@cv", *c.label.cases}]  # fmt: skip
    if {c.label.cases[0] for c in named} >= {"normal", "maximum"}:
        for one in named:
            _rename(one, "coefficient", claims)


def _inline_cases(claims: list[Claimed]) -> None:
    """Labels that name their case (``Max. flow``): taken where one quantity has two and more of them."""
    single: dict[str, set[str]] = {}
    for one in claims:
        if one.label.known and one.label.cases and one.case is None and not one.word:
            single.setdefault(one.label.key, set()).add(one.label.cases[0])
    accepted = {word for words in single.values() if len(words) >= 2 for word in words}
    for one in claims:
        if one.label.known and one.label.cases and one.case is None and one.label.cases[0] in accepted:
            one.case = one.label.cases[0].capitalize()


def _by_elimination(one: Claimed, known: set[str], claims: list[Claimed]) -> str:
    """What an unclear label must mean, as the sheet names its other meaning elsewhere; empty where that is open."""
    words = one.label.words
    if one.case is None and {"minimum", "maximum"} & set(one.label.cases):
        return ""  # the least of the valve, or what the least flow needs
    if words & {"@kv", "@cv"} or words >= {"flow", "coefficient"}:
        if "rated" in known and "coefficient" not in known:
            return "coefficient"
        if "coefficient" in known and "rated" not in known:
            return "rated"
        cases = [c for c in claims if c.role is one.role and c.case is not None]
        return "coefficient" if len(cases) >= 2 and "coefficient" not in known else ""
    if words & {"@dn", "@nps", "size"} and {"pipe_in", "pipe_out"} & known and "valve_size" not in known:
        return "valve_size"
    return ""


def _rename(one: Claimed, key: str, claims: list[Claimed]) -> None:
    label = one.label
    one.label = Label(label.text, key, label.score, label.unit, label.gauge, label.cases, None, (), label.words,
                      label.inherent)  # fmt: skip
    one.factor = 0.75
    if BY_KEY[key].scope == "item" and sum(c.role is one.role for c in claims) == 1:
        one.case = None


# --- several values of one label ------------------------------------------------------------------------------------


def _place(one: Claimed) -> float:
    return float(one.taken.cell.row) if one.below else one.taken.cell.left


def _places(group: list[Claimed]) -> list[float]:
    return sorted({_place(one) for one in group})


def _is_nameless(group: list[Claimed]) -> bool:
    """Do several values in the same unit stand beside each other?"""
    units = [one.taken.sign.label if one.taken.sign else "" for one in group]
    apart = len(set(units)) == len(units) and all(units)
    return not apart and len(group) > 1 and BY_KEY[group[0].label.key].kind not in ("pressures", "sizes")


def _rises(group: list[Claimed]) -> bool:
    """Are four openings and more in rising order the head of a table by travel?"""
    numbers = [one.taken.number.value for one in sorted(group, key=_place) if one.taken.number is not None]
    return len(numbers) >= 4 and all(a < b for a, b in pairwise(numbers))


def _names_in(text: str) -> list[str]:
    """The cases that a label names for the numbers of one cell: ``Flow (min / norm / max)``."""
    for part in re.findall(r"[A-Za-z.\-]+(?:\s*/\s*[A-Za-z.\-]+)+", text):
        names = [name.strip() for name in part.split("/")]
        if all(case_name(name) for name in names):
            return names
    return []


def _name_cases(found: Found) -> None:
    """Several values of one label without the names of cases: two units of one number, or cases without names."""
    groups: dict[tuple[int, str], list[Claimed]] = {}
    for one in found.values:
        if one.case is None and one.taken.number is not None:
            groups.setdefault((id(one.role), one.label.key), []).append(one)
    nameless = [group for group in groups.values() if _is_nameless(group)]
    table = next((_places(g) for g in nameless if g[0].label.key == "travel" and _rises(g)), None)
    for group in nameless:
        places = _places(group)
        if table is not None and (set(places) <= set(table) or (not found.page.exact and len(places) == len(table))):
            found.tables.append(group[0].role.cell)
            gone = {id(one) for one in group}
            found.values = [one for one in found.values if id(one) not in gone]
            continue
        named = _names_in(group[0].label.text) if len(places) == 1 else []
        if len(named) != len(group):
            found.nameless.append(group[0])
            named = [f"value {n}" for n in range(1, len(group) + 1)]
        for one, name in zip(sorted(group, key=_place), named, strict=True):
            one.case = name
