"""The verdict: one word for an index among its limits, from worst to best."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function

__all__ = ["regime_word"]


def _of(limit: Any) -> Any:
    """A limit as the kernel compares it: NaN, which nothing is at or below, where none is given."""
    return np.nan if limit is None else limit


def _given(limit: Any) -> Any:
    return ~np.isnan(_of(limit))


def _of_another_form(incipient: Any, constant: Any, damage: Any) -> Any:
    return (_of(incipient) <= 1.0) | (_of(constant) <= 1.0) | (_of(damage) <= 1.0)


def _no_limit_at_all(incipient: Any, constant: Any, damage: Any, vibration: Any, choked: Any) -> Any:
    return ~(_given(incipient) | _given(constant) | _given(damage) | _given(vibration) | _given(choked))


def _out_of_order(incipient: Any, constant: Any, damage: Any) -> Any:
    """Where a milder limit lies below a more severe one."""
    incipient, constant, damage = _of(incipient), _of(constant), _of(damage)
    return (incipient < constant) | (incipient < damage) | (constant < damage)


# Each thing that the verdict depends on is one bit; every combination has its word in a table made once.
FLASHES, AT_CHOKED, AT_VIBRATION, AT_DAMAGE, AT_CONSTANT, AT_INCIPIENT = (1 << bit for bit in range(6))
OTHER_LIMIT, DAMAGE, CONSTANT, INCIPIENT, WRONG_FORM = (1 << bit for bit in range(6, 11))


def _word(state: int) -> str:
    """The rules, from worst to best, for one combination of bits; empty where there is no verdict."""
    if state & WRONG_FORM or not state & (OTHER_LIMIT | DAMAGE | CONSTANT | INCIPIENT):
        return ""
    for bit, word in ((FLASHES, "flashing"), (AT_CHOKED, "choked"), (AT_VIBRATION, "vibration"), (AT_DAMAGE, "damage")):
        if state & bit:
            return word
    if state & AT_CONSTANT:
        return "constant" if state & DAMAGE else "cavitating"
    if state & AT_INCIPIENT:
        return "incipient" if state & (CONSTANT | DAMAGE) else "cavitating"
    return "clear" if state & INCIPIENT else "unjudged"


WORDS = np.array([_word(state) for state in range(1 << 11)])


def _bits(sigma: Any, limit: Any, crossed: int, given: int, must_exceed_one: bool) -> Any:
    """What one limit adds to the state: whether it is given, whether it is crossed, whether its form is wrong."""
    if limit is None:
        return 0
    bits = (sigma <= limit) * crossed + (limit == limit) * given
    return bits + (limit <= 1.0) * WRONG_FORM if must_exceed_one else bits


@function(
    "REGIME", group="indices and limits", gives="one word for the state of the flow among its limits",
    source_key="definition",
    equation="sigma <= 1 flashing; at or below a limit: choked, vibration, damage, constant (cavitating where no "
    "damage limit is given), incipient (cavitating where neither constant nor damage is given); above incipient clear; "
    "else unjudged",
    any_unit=True,
    no_answer=(
        NoAnswer("an incipient, constant or damage limit must be above 1 in upstream form: another form was meant "
                 "(LP_SIGMA_FORM carries it over)", _of_another_form),
        NoAnswer("at least one limit must be given; without a limit there is no verdict", _no_limit_at_all,
                 missing=True),
    ),
    cautions=(
        Caution("no incipient limit is given, so the state is not judged clear however high the index",
                lambda incipient: True if incipient is None else np.isnan(incipient)),
        Caution("the limits are not in their usual order (incipient above constant above damage): check their forms",
                _out_of_order),
    ),
    basis_text="that of the limits given; a bare number carries none: state beside each limit whether it is tested, "
    "published or estimated",
)  # fmt: skip
def regime_word(
    sigma: q.Sigma, incipient: q.Incipient = None, constant: q.Constant = None, damage: q.Damage = None,  # type: ignore[assignment]
    vibration: q.Vibration = None, choked: q.Choked = None,  # type: ignore[assignment]
) -> q.Regime:  # fmt: skip
    """The state of the flow, from worst to best; ``clear`` needs an incipient limit, at a limit counts as crossed.

    Arrays of one length, upstream form. Empty where an incipient, constant or damage limit is at or below 1, or no
    limit is given.
    Source: definition; the order of severity is common practice (ISA-RP75.23).
    """
    state = (
        (sigma <= 1.0) * FLASHES
        | _bits(sigma, choked, AT_CHOKED, OTHER_LIMIT, False)
        | _bits(sigma, vibration, AT_VIBRATION, OTHER_LIMIT, False)
        | _bits(sigma, damage, AT_DAMAGE, DAMAGE, True)
        | _bits(sigma, constant, AT_CONSTANT, CONSTANT, True)
        | _bits(sigma, incipient, AT_INCIPIENT, INCIPIENT, True)
    )
    return WORDS[state]
