"""A drop in stages: how many, and the pressures between them."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, Must, NoAnswer, function
from lowpoint.physics.indices import ABOVE_ONE, no_limit, upstream_limit
from lowpoint.physics.sizing import OUTLET

__all__ = ["stage_count", "stage_pressures"]

MOST = 12
"""More stages than this are not built as plates."""
ROUNDING = 1e-9
"""A number of stages that is whole but for this much is that whole number."""
LIQUID = Must("pv", "p2", "The liquid flashes at the outlet: staging cannot help; raise p2 or lower the temperature.")
TOO_MANY = Caution(
    "more than 12 stages are needed: consider a valve with staged trim, or a higher back-pressure",
    lambda result: result > MOST,
)
_SPACING = "plates closer than 6 pipe diameters interact: their losses do not add up (common practice)"


@function(
    "STAGES", group="orifices", source_key="definition", any_unit=True,
    gives="least whole number of stages that keeps every stage at or above the target index",
    equation="ceil(ln((p1-pv)/(p2-pv))/ln(target/(target-1)))", must=(OUTLET, LIQUID),
    no_answer=(NoAnswer(f"the target {ABOVE_ONE}", lambda target, form: no_limit(target, form)),),
    cautions=(TOO_MANY, Caution(_SPACING, lambda result: result > 1.0)),
)  # fmt: skip
def stage_count(p1: q.P1, p2: q.P2, pv: q.PV, target: q.Target, form: q.Form = "upstream") -> q.Ratio:
    """Number of stages of equal index, ``n = ln((p1-pv)/(p2-pv))/ln(target/(target-1))`` rounded up.

    Arrays of one length, any one pressure unit; target in the form named. Each stage then has an index of at least the
    target. NaN where the target is at or below 1 in upstream form.
    Source: identity of the definition: equal indices share the ratio of the pressures above pv.
    """
    sigma = upstream_limit(target, form)
    # log1p: a high target needs many stages of nearly one pressure, and their number exactly.
    return np.maximum(np.ceil(np.log((p1 - pv) / (p2 - pv)) / -np.log1p(-1.0 / sigma) - ROUNDING), 1.0)


def _not_whole(stages: Any) -> Any:
    return stages != np.floor(stages)


@function(
    "STAGE_PRESSURES", group="orifices", gives="column of the pressures from inlet to outlet, stages + 1 of them",
    source_key="definition", column=True, any_unit=True,
    equation="index p_i - pv = r (p_(i-1) - pv), r = ((p2-pv)/(p1-pv))^(1/n); drop p_i = p1 - i (p1-p2)/n",
    must=(OUTLET, LIQUID), no_answer=(NoAnswer("stages must be a whole number", _not_whole),),
    cautions=(Caution("equal drops leave the last stage with the lowest index: equal index is the better split",
                      lambda stages, rule: np.asarray(rule == "drop") & (stages > 1.0)),
              Caution(_SPACING, lambda stages: stages > 1.0)),
)  # fmt: skip
def stage_pressures(p1: q.P1, p2: q.P2, pv: q.PV, stages: q.Stages, rule: q.StageRule = "index") -> q.PressureColumn:
    """Pressures between stages, ``p_i - pv = (p1 - pv) ((p2-pv)/(p1-pv))^(i/n)`` for equal index.

    One row a case and a column a pressure (a cell shows them as a column), NaN behind the last; any one pressure unit.
    Rule ``drop`` splits the drop evenly. NaN throughout where ``stages`` is no whole number.
    Source: identity of the definition of the index.
    """
    most = int(np.nanmax(stages)) if len(stages) else 0
    share = np.arange(most + 1) / np.asarray(stages)[:, None]
    first, last, vapour = (np.asarray(x)[:, None] for x in (p1, p2, pv))
    by_index = vapour + (first - vapour) * ((last - vapour) / (first - vapour)) ** share
    by_drop = first - share * (first - last)
    pressures = np.where(np.asarray(rule == "drop").reshape(-1, 1), by_drop, by_index)
    # The ends are given, not worked out.
    pressures = np.where(share == 0.0, first, np.where(share == 1.0, last, pressures))
    return np.where((share <= 1.0) & ~_not_whole(stages)[:, None], pressures, np.nan)
