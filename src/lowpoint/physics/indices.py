"""Cavitation indices: their forms, the index at choking, and the solutions backwards from a limit.

Every index and limit is in the upstream form ``(p1-pv)/(p1-p2)`` unless a form is named: ``downstream`` is
``(p2-pv)/(p1-p2)``, one less; ``xf`` is ``(p1-p2)/(p1-pv)``, its inverse. All pressures in any one unit.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, Must, NoAnswer, SameAs, function
from lowpoint.physics import fittings
from lowpoint.physics.fittings import fitting_losses
from lowpoint.physics.sizing import BOILS, CRITICAL, OUTLET, choked_drop_of, critical_pressure_factor

__all__ = ["allowed_drop", "allowed_inlet", "allowed_outlet", "choked_index", "index_form", "margin", "sigma_index"]

_FLASHES = Caution("p2 is at or below pv: the liquid flashes, and no index makes that better", lambda p2, pv: p2 <= pv)


def from_upstream(sigma: Any, form: Any) -> Any:
    """An upstream index in another form."""
    if isinstance(form, str):
        return sigma if form == "upstream" else sigma - 1.0 if form == "downstream" else 1.0 / sigma
    return np.where(form == "upstream", sigma, np.where(form == "downstream", sigma - 1.0, 1.0 / sigma))


def to_upstream(value: Any, form: Any) -> Any:
    """An index of some form as the upstream one, NaN where that is not positive."""
    if isinstance(form, str):
        sigma = value if form == "upstream" else value + 1.0 if form == "downstream" else 1.0 / value
    else:
        sigma = np.where(form == "upstream", value, np.where(form == "downstream", value + 1.0, 1.0 / value))
    return np.where((sigma > 0.0) & np.isfinite(sigma), sigma, np.nan)


@function(
    "SIGMA", group="indices and limits", gives="cavitation index", source_key="definition",
    equation="(p1-pv)/(p1-p2); downstream (p2-pv)/(p1-p2); xf (p1-p2)/(p1-pv)", any_unit=True,
    must=(OUTLET, BOILS), cautions=(_FLASHES,),
)  # fmt: skip
def sigma_index(p1: q.P1, p2: q.P2, pv: q.PV, form: q.Form = "upstream") -> q.Ratio:
    """Cavitation index, ``sigma = (p1 - pv)/(p1 - p2)``, or the form asked for.

    Arrays of one length, any one pressure unit, absolute. At or below 1 (upstream) the liquid flashes.
    Source: definition; ISA-RP75.23 for the upstream form, IEC 60534-8 for xF.
    """
    return from_upstream((p1 - pv) / (p1 - p2), form)


@function(
    "SIGMA_FORM", group="indices and limits", gives="one form of the index from another", source_key="definition",
    equation="upstream = downstream + 1 = 1/xf", any_unit=True,
    no_answer=(NoAnswer("the value is impossible in its form: an index is above 0, in downstream form above -1"),),
)  # fmt: skip
def index_form(value: q.IndexValue, from_: q.FromForm, to: q.ToForm) -> q.Ratio:
    """The same state in another form, ``upstream = downstream + 1 = 1/xf``.

    Arrays of one length. NaN where the value cannot be an index of its form.
    Source: identity of the definitions.
    """
    sigma = to_upstream(value, from_)
    # A value that stays in its form comes back to the bit.
    return np.where((from_ == to) & ~np.isnan(sigma), value, from_upstream(sigma, to))


@function(
    "SIGMA_CHOKED", group="indices and limits", gives="cavitation index at which the flow chokes, exact",
    source_key="IEC 60534-2-1", equation="(p1-pv)/((FLP/FP)^2 (p1 - FF pv))",
    needs={"coefficient": ("valve_size",), "valve_size": ("coefficient",), "pipe_in": ("valve_size",),
           "pipe_out": ("valve_size",)},
    must=(BOILS, CRITICAL), no_answer=(fittings.TOO_LARGE, fittings.GAIN),
    cautions=(fittings.LINE_SIZE, fittings.LARGE_CAPACITY),
)  # fmt: skip
def choked_index(
    p1: q.P1, pv: q.PV, pc: q.PC, fl: q.FL, coefficient: q.Coefficient = None, valve_size: q.ValveSize = None,  # type: ignore[assignment]
    pipe_in: q.PipeIn = SameAs("valve_size"), pipe_out: q.PipeOut = SameAs("pipe_in"),  # type: ignore[assignment]
) -> q.Ratio:  # fmt: skip
    """Index at choking, ``sigma = (p1 - pv)/dp_choked``; 1/FL^2 holds only for pv far below p1.

    Arrays of one length, SI; fittings enter with coefficient and valve size. NaN where d is above 1.1 D.
    Source: IEC 60534-2-1 and the definition of sigma.
    """
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    head = p1 - critical_pressure_factor(pv, pc) * pv
    return (p1 - pv) / choked_drop_of(head, fl, coefficient, total, inlet)


LOW_LIMIT = Caution(
    "the limit is at or below 1, which only a choking limit of a liquid close to boiling can be: was another form "
    "meant (LP_SIGMA_FORM carries it over)?", lambda limit: limit <= 1.0,
)  # fmt: skip


@function(
    "MARGIN", group="indices and limits", gives="margin of an index to a limit, both in upstream form",
    source_key="definition", equation="sigma/limit - 1", any_unit=True,
    cautions=(
        Caution("sigma is at or below 1: the liquid flashes, whatever the margin", lambda sigma: sigma <= 1.0),
        LOW_LIMIT,
        Caution("the index is at or beyond the limit", lambda result: result <= 0.0),
    ),
)  # fmt: skip
def margin(sigma: q.Sigma, limit: q.Limit) -> q.Ratio:
    """Margin, ``sigma/limit - 1 = dp_allowed/dp - 1``; 0 and below is crossed.

    Arrays of one length, both in upstream form.
    Source: definition.
    """
    return sigma / limit - 1.0


def no_limit(limit: Any, form: Any) -> Any:
    """Where a limit, in its form, is no limit of a liquid that stays liquid: upstream at or below 1."""
    return ~(to_upstream(limit, form) > 1.0)


ABOVE_ONE = (
    "must be above 1 in upstream form (above 0 downstream, below 1 as xf), else the outlet would be at or below the "
    "vapour pressure; was another form meant?"
)
_ABOVE_ONE = NoAnswer(f"the limit {ABOVE_ONE}", no_limit)


def upstream_limit(limit: Any, form: Any) -> Any:
    sigma = to_upstream(limit, form)
    return np.where(sigma > 1.0, sigma, np.nan)


@function(
    "ALLOWED_DROP", group="indices and limits", gives="largest drop that keeps the index at the limit",
    source_key="definition", equation="(p1-pv)/limit, limit in upstream form", any_unit=True, must=(BOILS,),
    no_answer=(_ABOVE_ONE,),
)  # fmt: skip
def allowed_drop(p1: q.P1, pv: q.PV, limit: q.Limit, form: q.Form = "upstream") -> q.Drop:
    """Largest drop, ``dp = (p1 - pv)/limit``.

    Arrays of one length, any one pressure unit. NaN for a limit at or below 1 (upstream), which would allow an outlet
    at or below the vapour pressure.
    Source: definition of sigma, solved.
    """
    return (p1 - pv) / upstream_limit(limit, form)


@function(
    "ALLOWED_OUTLET", group="indices and limits", gives="lowest outlet pressure that keeps the index at the limit",
    source_key="definition", equation="p1 - (p1-pv)/limit, limit in upstream form", any_unit=True, must=(BOILS,),
    no_answer=(_ABOVE_ONE,),
)  # fmt: skip
def allowed_outlet(p1: q.P1, pv: q.PV, limit: q.Limit, form: q.Form = "upstream") -> q.Pressure:
    """Lowest outlet pressure, ``p2 = p1 - (p1 - pv)/limit``; always above pv.

    Arrays of one length, any one pressure unit. NaN for a limit at or below 1 (upstream).
    Source: definition of sigma, solved.
    """
    return p1 - (p1 - pv) / upstream_limit(limit, form)


@function(
    "ALLOWED_INLET", group="indices and limits", gives="highest inlet pressure that keeps the index at the limit",
    source_key="definition", equation="(limit p2 - pv)/(limit - 1), limit in upstream form", any_unit=True,
    must=(Must("pv", "p2", "With p2 at or below pv the liquid flashes at any inlet pressure."),),
    no_answer=(_ABOVE_ONE,),
)  # fmt: skip
def allowed_inlet(p2: q.P2, pv: q.PV, limit: q.Limit, form: q.Form = "upstream") -> q.Pressure:
    """Highest inlet pressure, ``p1 = p2 + (p2 - pv)/(limit - 1)`` with the outlet held.

    Arrays of one length, any one pressure unit. NaN for a limit at or below 1 (upstream).
    Source: definition of sigma, solved.
    """
    return p2 + (p2 - pv) / (upstream_limit(limit, form) - 1.0)
