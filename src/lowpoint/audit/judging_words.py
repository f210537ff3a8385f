"""What a sheet says in words - no cavitation, choked, flashing - judged by the index and the limits that it rests on.

``no cavitation`` is confirmed only by an incipient limit; that a flow is not choked, or its throat stays above the
vapour pressure, is no evidence of it.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Any

import numpy as np

from lowpoint.audit.asking import Asking
from lowpoint.audit.equations import predict
from lowpoint.audit.inputs import Inputs
from lowpoint.audit.model import Claim, Value
from lowpoint.physics.indices import to_upstream
from lowpoint.physics.limits import TEST_PRESSURE, inception_estimate, installed_limit
from lowpoint.physics.regime import regime_word

__all__ = ["check_statements"]

LIMITS = ("incipient", "constant", "damage", "vibration")
CAVITATES = ("incipient", "cavitating", "constant", "damage", "vibration", "choked")
SLOW = ("turbulent", "not turbulent")


def check_statements(asking: Asking) -> tuple[Claim, ...]:
    """Verdict of every statement of the sheet, in each case that it holds for."""
    inputs = asking.inputs
    values = [v for v in inputs.reading.values if v.quantity == "statement" and v.word]
    if not values:
        return ()
    states = _States(asking)
    return tuple(claim for value in values for claim in _of_value(value, inputs, states))


def _of_value(value: Value, inputs: Inputs, states: _States) -> Iterator[Claim]:
    place = inputs.case_of(value)
    for at in range(inputs.count) if place is None else (place,):
        yield states.claim(value, at)


class _States:
    """The state of the flow in every case of a sheet, with its limits and what they rest on."""

    def __init__(self, asking: Asking) -> None:
        inputs = asking.inputs
        found = {name: x[0] for name, x in predict(asking.state(1), inputs, asking.slow).items()}
        self.inputs = inputs
        self.sigma, self.choking = found["sigma"], found["sigma_choked"]
        self.drop, self.choked_drop = found["dp"], found["dp_choked"]
        self.limits = {name: _limit(inputs, name) for name in LIMITS}
        coefficient = np.where(np.isnan(found["coefficient"]), asking.coefficients, found["coefficient"])
        self.estimated = _estimate(inputs, coefficient)
        with np.errstate(invalid="ignore"):
            self.word = regime_word(self.sigma, **self.limits, choked=self.choking)
        self.installed = _installed(inputs, self.limits["incipient"], coefficient)

    def claim(self, value: Value, at: int) -> Claim:
        verdict, text, missing = self._judged(value.word or "", at)
        computed = str(self.word[at]) or None
        case = self.inputs.cases[at] if self.inputs.count > 1 else value.case
        return Claim("statement", case, value.cell, math.nan, math.nan, "", math.nan, self._basis(at), verdict,
                     f"{value.raw}: {text}", (), value.word, computed, missing)  # fmt: skip

    def _basis(self, at: int) -> str:
        given = [f"{name} {limit[at]:.3g}" for name, limit in self.limits.items() if np.isfinite(limit[at])]
        if np.isfinite(self.choking[at]):
            given.append(f"choking {self.choking[at]:.3g} computed")
        return f"index {self.sigma[at]:.3g} (upstream form) against: {', '.join(given) or 'no limit'}"

    def _judged(self, word: str, at: int) -> tuple[str, str, tuple[str, ...]]:
        sigma = self.sigma[at]
        if word in SLOW:
            return "unchecked", "the sheet gives no valve Reynolds number to judge by", ("viscosity",)
        if not np.isfinite(sigma):
            missing = tuple(n for n in ("p1", "p2", "pv") if np.isnan(self.inputs.columns[n][at]))
            return "unchecked", "the index cannot be computed", missing
        if word in ("flashing", "no flashing"):
            return _told(sigma <= 1.0, word == "flashing", "p2 is at or below pv", "p2 is above pv")
        if word in ("choked", "not choked"):
            return self._choked(word == "choked", at)
        return self._cavitation(word, at)

    def _choked(self, said: bool, at: int) -> tuple[str, str, tuple[str, ...]]:
        if np.isnan(self.choked_drop[at]):
            missing = tuple(n for n in ("p1", "pv", "pc", "fl") if np.isnan(self.inputs.columns[n][at]))
            return "unchecked", "the choked drop cannot be computed", missing
        numbers = f"drop {self.drop[at] / 1e5:.4g} bar, choked drop {self.choked_drop[at] / 1e5:.4g} bar"
        return _told(self.drop[at] >= self.choked_drop[at], said, numbers, numbers)

    def _cavitation(self, word: str, at: int) -> tuple[str, str, tuple[str, ...]]:
        state = str(self.word[at])
        if word == "no cavitation":
            return self._none(state, at)
        if state == "clear":
            return "differs", f"the index {self.sigma[at]:.3g} is above the incipient limit", ()
        if state in ("unjudged", ""):
            return "unchecked", "no limit says where cavitation begins", ("sigma_incipient",)
        if word == "incipient cavitation" and state not in ("incipient", "cavitating"):
            return "differs", f"the state is {state}", ()
        return "agrees", f"the state is {state}", ()

    def _none(self, state: str, at: int) -> tuple[str, str, tuple[str, ...]]:
        sigma = self.sigma[at]
        if state == "flashing" or state in CAVITATES:
            return "differs", f"the state is {state}, index {sigma:.3g}", ()
        if state == "clear":
            return self._clear(at)
        text = "not confirmed: the sheet gives no incipient limit, and a flow that is not choked may still cavitate"
        estimate = self.estimated[at]
        if np.isfinite(estimate):
            side = "at or below" if sigma <= estimate else "above"
            text += f"; the index {sigma:.3g} is {side} the estimate {estimate:.3g} (estimated, acoustic)"
        return "unchecked", text, ("sigma_incipient",)

    def _clear(self, at: int) -> tuple[str, str, tuple[str, ...]]:
        sigma, limit, installed = self.sigma[at], self.limits["incipient"][at], self.installed[at]
        if sigma > installed or np.isnan(installed):
            return (
                "agrees",
                f"the index {sigma:.3g} is above the incipient limit {limit:.3g}, as the sheet states it",
                (),
            )
        return "unchecked", (
            f"the index {sigma:.3g} is above the incipient limit {limit:.3g}, but not above {installed:.3g}, which "
            "that of the bare valve becomes between its reducers: ask for which of the two it holds"
        ), ("sigma_incipient",)  # fmt: skip


def _told(true: bool, said: bool, if_true: str, if_not: str) -> tuple[str, str, tuple[str, ...]]:
    return ("agrees" if bool(true) == said else "differs"), (if_true if true else if_not), ()


def _limit(inputs: Inputs, name: str) -> Any:
    """A limit of the sheet in every case, upstream form; the incipient one from xFz where only that is given."""
    found = np.full(inputs.count, np.nan)
    for at, case in enumerate(inputs.cases):
        value = inputs.reading.of(f"sigma_{name}", case)
        if value is not None and math.isfinite(value.si):
            found[at] = float(to_upstream(value.si, value.form or "upstream"))
    if name == "incipient":
        at_pressure = inputs.columns["xfz"] * (TEST_PRESSURE / inputs.columns["p1"]) ** 0.125
        found = np.where(np.isnan(found), 1.0 / at_pressure, found)
    return np.where(found > 1.0, found, np.nan)


def _installed(inputs: Inputs, limit: Any, coefficient: Any) -> Any:
    """A limit of the bare valve between the sheet's reducers; NaN where there is none to carry over."""
    c = inputs.columns
    with np.errstate(all="ignore"):
        return installed_limit(limit, coefficient, c["valve_size"], c["pipe_in"], c["pipe_out"])


def _estimate(inputs: Inputs, coefficient: Any) -> Any:
    """The acoustic estimate of inception, upstream form."""
    c = inputs.columns
    with np.errstate(all="ignore"):
        return 1.0 / inception_estimate(coefficient, c["fl"], c["fd"], c["p1"])
