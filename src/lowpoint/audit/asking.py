"""The claims of a sheet that can be computed again, and their numbers for any rows of hypotheses, side by side."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from lowpoint.audit.equations import KINDS, PHYSICAL, State, base_state, bores, is_slow, predict
from lowpoint.audit.inputs import Inputs, slope
from lowpoint.audit.model import Value
from lowpoint.audit.tolerances import rounding
from lowpoint.physics.indices import from_upstream

__all__ = ["FORMS", "Asked", "Asking", "asking"]

FORMS = ("upstream", "downstream", "xf")
INDICES = ("sigma", "sigma_choked")
VALVE_VELOCITY = "velocity_in_valve"
BOTH = ("pv", "density", "pc", "dp")
"""Inputs that are claims too; they are asked only where the sheet gives what they follow from."""


@dataclass(frozen=True, eq=False)
class Asked:
    """One number of the sheet that is computed again."""

    value: Value
    kind: str
    place: int
    """Column of the case that it is compared in."""
    form: str
    """Of an index, as stated or as agrees best; ``upstream`` for all else."""
    slope: float
    """SI over shown unit."""

    def shown(self, si: float) -> float:
        """A number in SI in the unit of the claim."""
        return self.value.number + (si - self.value.si) / self.slope


@dataclass(frozen=True, eq=False)
class Asking:
    """A sheet's inputs with its numeric claims, and how to compute them."""

    inputs: Inputs
    claims: tuple[Asked, ...]
    claimed: Any
    """SI, one element a claim."""
    rounding: Any
    """SI, of the claim itself."""
    places: Any
    perturbed: tuple[str, ...]
    """Inputs whose shown digits leave room."""
    coefficients: Any
    slow: bool

    def state(self, rows: int) -> State:
        return base_state(self.inputs, self.coefficients, rows)

    def numbers(self, state: State, forms: Any = None) -> Any:
        """(rows, claims) in SI; indices in the form of each claim, or in the one that the row says."""
        return self.numbers_in(state, forms)[0]

    def numbers_in(self, state: State, forms: Any = None) -> tuple[Any, Any]:
        """The numbers, and of each row the place in :data:`FORMS` of the form that the indices without a stated one
        are taken in: the one that they fit best over the sheet, or the given one."""
        found = predict(state, self.inputs, self.slow)
        if any(claim.kind == "bore" for claim in self.claims):
            found["bore"] = bores(state, self.inputs)
        columns = [self._column(found[claim.kind][:, claim.place], claim, state) for claim in self.claims]
        numbers = np.stack(columns, axis=1) if columns else np.zeros((len(state["p1"]), 0))
        places = [k for k, claim in enumerate(self.claims) if claim.kind in INDICES and claim.value.form is None]
        if not places:
            return numbers, None
        upstream = np.stack([found[self.claims[k].kind][:, self.claims[k].place] for k in places], axis=1)
        every = [from_upstream(upstream, form) for form in FORMS]
        if forms is None:
            forms = np.argmin([_misfit(self.claimed[places], one) for one in every], axis=0)
        best = np.choose(forms[:, None], every)
        told = np.stack([state["index_form"][:, self.claims[k].place] > 0.0 for k in places], axis=1)
        numbers[:, places] = np.where(told, numbers[:, places], best)
        return numbers, forms

    def _column(self, numbers: Any, claim: Asked, state: State) -> Any:
        if claim.kind not in INDICES:
            return numbers
        own = from_upstream(numbers, claim.form)
        code = state["index_form"][:, claim.place]
        if claim.kind != "sigma" or not code.any():
            return own
        return np.select([code == k for k in (1.0, 2.0, 3.0)], [from_upstream(numbers, form) for form in FORMS], own)

    def nudged(self, state: State) -> State:
        """Every row once for each input with rounding, that input half of its last digit up."""
        halves, names = self.inputs.halves, self.perturbed
        rows = len(state["p1"])
        many = {name: np.tile(x, (len(names), 1)) for name, x in state.items()}
        for place, name in enumerate(names):
            many[name][place * rows : (place + 1) * rows] += halves[name]
        return many

    def spread(self, numbers: Any, nudged: Any) -> Any:
        """What the rounding of the inputs can move each number by: the sum over the inputs."""
        if not self.perturbed:
            return np.zeros(numbers.shape)
        moved = np.abs(nudged.reshape(len(self.perturbed), *numbers.shape) - numbers)
        return np.nan_to_num(moved).sum(axis=0)


def asking(inputs: Inputs) -> Asking:
    """The claims of a sheet; those given once for several cases are compared where they fit best."""
    coefficients = _claimed_coefficients(inputs)
    slow = is_slow(inputs, coefficients)
    every = [
        claim
        for value in inputs.reading.values
        if value.quantity in KINDS and math.isfinite(value.number) and _is_claim(inputs, value)
        for claim in _placed(inputs, value)
    ]
    draft = _made(inputs, every, coefficients, slow)
    base = draft.numbers(draft.state(1), np.zeros(1, int))[0] if every else np.zeros(0)
    formed = _formed(_in_valve(inputs, every, base), base)
    return _made(inputs, _nearest(formed, base), coefficients, slow)


def _made(inputs: Inputs, claims: list[Asked], coefficients: Any, slow: bool) -> Asking:
    claimed = np.array([claim.value.si for claim in claims])
    halves = np.array([claim.value.half * claim.slope for claim in claims])
    perturbed = tuple(n for n in (*PHYSICAL[:-1],) if inputs.halves.get(n) is not None and inputs.halves[n].any())
    places = np.array([claim.place for claim in claims], int)
    return Asking(inputs, tuple(claims), claimed, rounding(claimed, halves), places, perturbed, coefficients, slow)


def _claimed_coefficients(inputs: Inputs) -> Any:
    found = [inputs.reading.of("coefficient", case) for case in inputs.cases]
    return np.array([math.nan if value is None else value.si for value in found])


def _is_claim(inputs: Inputs, value: Value) -> bool:
    """A property is a claim where liquid and temperature are known; a drop where both pressures are given."""
    if not math.isfinite(value.si):
        return False
    if value.quantity == "dp":
        # A pressure that was completed from the drop says nothing about it.
        given = [inputs.reading.of(name, value.case) for name in ("p1", "p2")]
        return all(pressure is not None and math.isfinite(pressure.si) for pressure in given)
    return value.quantity not in BOTH or inputs.fluid is not None


def _placed(inputs: Inputs, value: Value) -> list[Asked]:
    place = inputs.case_of(value)
    places = range(inputs.count) if place is None else (place,)
    form = value.form or "upstream"
    return [Asked(value, value.quantity, at, form, slope(value)) for at in places]


def _formed(claims: list[Asked], base: Any) -> list[Asked]:
    """An index without a stated form is taken in the form that its numbers fit best over the sheet."""
    open_ones = [k for k, claim in enumerate(claims) if claim.kind in INDICES and claim.value.form is None]
    if not open_ones:
        return claims
    claimed = np.array([claims[k].value.si for k in open_ones])
    misfit = [float(_misfit(claimed, from_upstream(base[open_ones], form)[None])[0]) for form in FORMS]
    form = FORMS[int(np.argmin(misfit))]
    return [replace(claim, form=form) if k in open_ones else claim for k, claim in enumerate(claims)]


def _in_valve(inputs: Inputs, claims: list[Asked], base: Any) -> list[Asked]:
    """A velocity that is right in the valve's bore, and not in the pipe's, is meant there."""
    bore = inputs.columns["valve_size"]
    speed = inputs.columns["flow"] / (np.pi / 4.0 * bore * bore)
    return [
        replace(claim, kind=VALVE_VELOCITY)
        if claim.kind in ("velocity_in", "velocity_out")
        and abs(claim.value.si - speed[claim.place]) < 0.01 * speed[claim.place] < abs(claim.value.si - number)
        else claim
        for claim, number in zip(claims, base.tolist(), strict=True)
    ]


def _misfit(claimed: Any, numbers: Any) -> Any:
    """How far rows of numbers lie from the claimed ones, in the middle; far off where a sign is wrong."""
    with np.errstate(all="ignore"):
        ratio = claimed / numbers
        off = np.abs(np.log(np.where((ratio > 0.0) & np.isfinite(ratio), ratio, 1e9)))
    return np.median(off, axis=1)


def _nearest(claims: list[Asked], base: Any) -> list[Asked]:
    """Of a claim that stands once for all cases, the case whose number is nearest."""
    best: dict[int, tuple[float, Asked]] = {}
    for claim, number in zip(claims, base.tolist(), strict=True):
        si = from_upstream(number, claim.form) if claim.kind in INDICES else number
        miss = abs(si - claim.value.si) if math.isfinite(si) else math.inf
        known = best.get(id(claim.value))
        if known is None or miss < known[0]:
            best[id(claim.value)] = (miss, claim)
    return [claim for _, claim in best.values()]
