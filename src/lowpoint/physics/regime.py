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
    worse_known = _given(damage)
    incipient_known = _given(constant) | worse_known
    word = np.select(
        [
            sigma <= 1.0,
            sigma <= _of(choked),
            sigma <= _of(vibration),
            sigma <= _of(damage),
            (sigma <= _of(constant)) & worse_known,
            sigma <= _of(constant),
            (sigma <= _of(incipient)) & incipient_known,
            sigma <= _of(incipient),
            np.broadcast_to(_given(incipient), sigma.shape),
        ],
        ["flashing", "choked", "vibration", "damage", "constant", "cavitating", "incipient", "cavitating", "clear"],
        "unjudged",
    )
    wrong = _of_another_form(incipient, constant, damage)
    unlimited = _no_limit_at_all(incipient, constant, damage, vibration, choked)
    return np.where(wrong | unlimited, "", word)
