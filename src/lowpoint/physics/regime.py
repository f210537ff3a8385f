"""The verdict: one word for an index among its limits, from worst to best."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function

__all__ = ["regime_word"]


def _given(*limits: Any) -> Any:
    """Where at least one of the limits is given."""
    return np.logical_or.reduce([np.asarray(False) if x is None else ~np.isnan(x) for x in limits])


def _at_or_below(sigma: Any, limit: Any) -> Any:
    return np.asarray(False) if limit is None else sigma <= limit


def _of_another_form(incipient: Any, constant: Any, damage: Any) -> Any:
    given = [x for x in (incipient, constant, damage) if x is not None]
    return np.logical_or.reduce([x <= 1.0 for x in given] or [False])


def _no_limit_at_all(incipient: Any, constant: Any, damage: Any, vibration: Any, choked: Any) -> Any:
    return ~_given(incipient, constant, damage, vibration, choked)


def _out_of_order(incipient: Any, constant: Any, damage: Any) -> Any:
    """Where a milder limit lies below a more severe one."""
    order = [x for x in (incipient, constant, damage) if x is not None]
    return np.logical_or.reduce(
        [milder < severe for i, milder in enumerate(order) for severe in order[i + 1 :]] or [False]
    )


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
    incipient_known = _given(constant, damage)
    word = np.select(
        [
            sigma <= 1.0,
            _at_or_below(sigma, choked),
            _at_or_below(sigma, vibration),
            _at_or_below(sigma, damage),
            _at_or_below(sigma, constant) & worse_known,
            _at_or_below(sigma, constant),
            _at_or_below(sigma, incipient) & incipient_known,
            _at_or_below(sigma, incipient),
            _given(incipient),
        ],
        ["flashing", "choked", "vibration", "damage", "constant", "cavitating", "incipient", "cavitating", "clear"],
        "unjudged",
    )
    wrong = _of_another_form(incipient, constant, damage)
    unlimited = _no_limit_at_all(incipient, constant, damage, vibration, choked)
    return np.where(wrong | unlimited, "", word)
