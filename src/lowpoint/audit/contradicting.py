"""Where a sheet contradicts itself: two units of one number, a drop that is not p1 - p2, an order that cannot be."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from itertools import combinations, pairwise

import numpy as np

from lowpoint.audit.inputs import NUMBERS, Inputs, is_possible, slope
from lowpoint.audit.model import Claim, Value
from lowpoint.audit.tolerances import FINEST

__all__ = ["contradictions"]

TWICE = 0.002
"""Two printings of one number may differ by this share beyond rounding: constants of conversion are rounded too."""
SIZES = ("pipe_in", "pipe_out", "valve_size")
NOMINAL = 0.15
"""A bore lies within this share of its nominal size, from the heaviest wall to the lightest (ASME B36.10M, from
memory)."""
ABSOLUTE = re.compile(r"( a|ia|\(a\)|abs\.?)$")
"""``bar a``, ``psia``, ``kPa (abs)``; not ``Pa``."""
ORDER = ("min", "norm", "max")


def contradictions(inputs: Inputs) -> tuple[Claim, ...]:
    """Every contradiction of the sheet with itself, one claim for each."""
    makers = (_twice, _difference, _drop, _mass, _pressures, _case_order, _travel_order, _rated, _share, _impossible)
    return tuple(claim for maker in makers for claim in maker(inputs))


def _claim(value: Value, case: str | None, computed: float, text: str) -> Claim:
    return Claim(value.quantity, case, value.cell, value.number, computed, value.unit, math.nan,
                 "the sheet against itself", "contradicts", text)  # fmt: skip


def _half(value: Value) -> float:
    return max(value.half * slope(value), FINEST * abs(value.si))


def _said(value: Value) -> str:
    """A number as it stands there, with its unit; once, where both share a cell."""
    alone = (value.unit_from != "cell" or value.raw[-1:].isdigit()) and not value.raw.startswith(value.unit or " ")
    return f"{value.raw} {value.unit}".strip() if alone else value.raw


def _twice(inputs: Inputs) -> Iterator[Claim]:
    """The same quantity of one case in two places or units."""
    groups: dict[tuple[str, str | None], list[Value]] = {}
    for value in inputs.reading.values:
        if math.isfinite(value.si) and math.isfinite(value.number) and value.quantity not in ("bores",):
            groups.setdefault((value.quantity, value.case), []).append(value)
    for (quantity, case), values in groups.items():
        for one, other in combinations(values, 2):
            if (quantity == "sigma" and one.form != other.form) or _names_it(one, other):
                continue
            if abs(one.si - other.si) > _half(one) + _half(other) + TWICE * abs(one.si):
                hint = " (1 Kv = 1.156 Cv)" if {one.unit, other.unit} == {"Kv", "Cv"} else ""
                yield _claim(other, case, other.number + (one.si - other.si) / slope(other),
                             f"{_said(one)} in {one.cell} and {_said(other)} in {other.cell} are not "
                             f"the same {quantity}{hint}")  # fmt: skip


def _names_it(one: Value, other: Value) -> bool:
    """Is one of two sizes the nominal one of the other (DN 100 of 102.3 mm)?"""
    if one.quantity not in SIZES or one.nominal == other.nominal:
        return False
    return abs(one.si - other.si) <= NOMINAL * abs(other.si)


def _difference(inputs: Inputs) -> Iterator[Claim]:
    """A difference of pressures has no zero: neither absolute nor gauge."""
    for value in inputs.reading.values:
        if value.quantity not in ("dp", "dp_choked"):
            continue
        word = "gauge" if value.gauge else "absolute" if ABSOLUTE.search(value.unit) else ""
        if word:
            yield _claim(value, value.case, math.nan, f"a pressure difference is labelled {word} ({value.unit})")


def _drop(inputs: Inputs) -> Iterator[Claim]:
    for case in inputs.cases:
        p1, p2, dp = (inputs.reading.of(name, case) for name in ("p1", "p2", "dp"))
        if p1 is None or p2 is None or dp is None or not all(math.isfinite(v.si) for v in (p1, p2, dp)):
            continue
        room = dp.half * slope(dp) + p1.half * slope(p1) + p2.half * slope(p2) + 0.001 * abs(dp.si)
        if abs(p1.si - p2.si - dp.si) > room:
            computed = (p1.si - p2.si) / slope(dp)
            yield _claim(dp, case, computed, f"the drop {_said(dp)} is not p1 - p2, {computed:.4g} {dp.unit}")


def _mass(inputs: Inputs) -> Iterator[Claim]:
    for at, case in enumerate(inputs.cases):
        flow, mass = inputs.reading.of("flow", case), inputs.reading.of("mass_flow", case)
        density = inputs.columns["density"][at]
        if flow is None or mass is None or not np.isfinite(density):
            continue
        expected = flow.si * density
        if abs(mass.si - expected) > _half(mass) + _half(flow) * density + 0.005 * expected:
            computed = expected / slope(mass)
            yield _claim(mass, case, computed, f"{_said(mass)} is not {_said(flow)} at the "
                         f"sheet's density, which is {computed:.4g} {mass.unit}")  # fmt: skip


def _pressures(inputs: Inputs) -> Iterator[Claim]:
    rules = (("p2", "p1", "the outlet pressure is not below the inlet pressure"),
             ("pv", "pc", "the vapour pressure is not below the critical pressure"),
             ("pv", "p1", "the vapour pressure is not below the inlet pressure: boiling ahead of it"))  # fmt: skip
    for low, high, text in rules:
        for case in inputs.cases:
            one, other = inputs.reading.of(low, case), inputs.reading.of(high, case)
            if one is not None and other is not None and one.si >= other.si:
                yield _claim(one, case, math.nan, f"{text} ({_said(one)} against {_said(other)})")


def _ranked(inputs: Inputs) -> list[str]:
    """The cases whose names say which is less: minimum, normal, maximum."""
    found = [(k, case) for case in inputs.cases for k, word in enumerate(ORDER) if word in case.casefold()]
    return [case for _, case in sorted(found)] if len({k for k, _ in found}) == len(found) else []


def _case_order(inputs: Inputs) -> Iterator[Claim]:
    for quantity in ("flow", "mass_flow"):
        yield from _falling(inputs, quantity)


def _falling(inputs: Inputs, quantity: str) -> Iterator[Claim]:
    ranked = [(case, inputs.reading.of(quantity, case)) for case in _ranked(inputs)]
    stated = [(case, v) for case, v in ranked if v is not None and v.case is not None and math.isfinite(v.si)]
    for (less, one), (more, other) in pairwise(stated):
        if one.si > other.si + _half(one) + _half(other):
            yield _claim(one, less, math.nan, f"the flow of case {less}, {one.raw}, is above that of case {more}, "
                         f"{other.raw}")  # fmt: skip


def _travel_order(inputs: Inputs) -> Iterator[Claim]:
    """A larger coefficient needs a larger opening of the same valve."""
    pairs = []
    for case in inputs.cases:
        c, h = inputs.reading.of("coefficient", case), inputs.reading.of("travel", case)
        if c is not None and h is not None and c.case is not None and h.case is not None:
            pairs.append((c, h))
    told: set[int] = set()
    for (c1, h1), (c2, h2) in combinations(sorted(pairs, key=lambda pair: pair[0].si), 2):
        if id(h1) not in told and c2.si - c1.si > _half(c1) + _half(c2) and h1.si - h2.si > _half(h1) + _half(h2):
            told.add(id(h1))
            yield _claim(h1, h1.case, math.nan, f"the smaller coefficient {c1.raw} has the larger opening, {h1.raw} "
                         f"against {h2.raw} at {c2.raw}")  # fmt: skip


def _rated(inputs: Inputs) -> Iterator[Claim]:
    for case in inputs.cases:
        needed, rated = inputs.reading.of("coefficient", case), inputs.reading.of("rated", case)
        if needed is None or rated is None or not needed.si - rated.si > _half(needed) + _half(rated):
            continue
        yield _claim(needed, case, math.nan, f"the required coefficient {_said(needed)} is above the rated "
                     f"one, {_said(rated)}: the valve is too small")  # fmt: skip


def _impossible(inputs: Inputs) -> Iterator[Claim]:
    for value in inputs.reading.values:
        if value.quantity in NUMBERS and math.isfinite(value.si) and not is_possible(value):
            yield _claim(value, value.case, math.nan, f"{_said(value)} is impossible: a {value.quantity} is "
                         "above 0 on its absolute scale; it was not used")  # fmt: skip


def _share(inputs: Inputs) -> Iterator[Claim]:
    for value in inputs.reading.values:
        if (value.quantity in ("fl", "xfz") and value.si > 1.0) or (value.quantity == "fd" and value.si > 1.0):
            yield _claim(value, value.case, math.nan, f"{value.quantity} is above 1 ({value.raw}), which is impossible")
