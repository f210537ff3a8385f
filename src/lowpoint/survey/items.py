"""Items by their worst case, and why it is the worst."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from lowpoint.survey.model import Cases, Findings, Item
from lowpoint.survey.worded import amount, said

__all__ = ["ORDER", "items_of", "verdict"]

ORDER = ("flashing", "choked", "vibration", "damage", "constant", "cavitating", "incipient", "unjudged", "clear")
"""Regimes from worst to best."""


def verdict(regime: str | None, basis: str | None) -> str:
    """Regime and basis as they are shown: ``clear (tested)``."""
    if regime is None:
        return "no answer"
    return f"{regime} ({basis})" if basis else regime


def items_of(cases: Cases, findings: Findings) -> tuple[Item, ...]:
    """One item a tag, in the order of the list."""
    rows: dict[str, list[int]] = {}
    for place, tag in enumerate(cases.tag.tolist()):
        rows.setdefault(tag, []).append(place)
    return tuple(_item(tag, places, cases, findings) for tag, places in rows.items())


def _rank(place: int, findings: Findings) -> tuple[bool, bool, float, int]:
    """Worst first: a failure, then flashing, then the least margin, then the worst regime."""
    margin = float(findings.margin[place])
    return (not findings.fails[place], not findings.flashing[place], math.inf if math.isnan(margin) else margin,
            ORDER.index(findings.regime[place]))  # fmt: skip


def _item(tag: str, places: Sequence[int], cases: Cases, findings: Findings) -> Item:
    answered = [place for place in places if findings.regime[place] is not None]
    worst = min(answered, key=lambda place: _rank(place, findings)) if answered else -1
    fails = bool(np.any(findings.fails[list(places)]))
    # A case without an answer may be the worst: only a failure is certain beside it.
    known = fails or len(answered) == len(places)
    why = _why(worst, places, answered, cases, findings)
    return Item(
        tag=tag, kind=str(cases.kind[places[0]]), service=str(cases.service[places[0]] or ""), rows=tuple(places),
        worst=worst, why=said(why), template=why,
        regime=findings.regime[worst] if known else None,
        margin=float(findings.margin[worst]) if answered else math.nan,
        basis=findings.basis[worst] if known else None,
        fails=fails, unanswered=len(places) - len(answered),
    )  # fmt: skip


def _why(worst: int, places: Sequence[int], answered: Sequence[int], cases: Cases, findings: Findings) -> str:
    if worst < 0:
        return "no case has an answer"
    case = cases.case[worst]
    name = f"case '{case}'" if case else f"row {cases.row[worst]}"
    parts = [_state(worst, cases, findings)]
    if findings.over_capacity[worst]:
        needed = f"{100.0 * findings.capacity[worst]:.0f} % of the rated coefficient is needed"
        valve = cases.kind[worst] == "valve"
        parts.append(f"the flow does not pass: {needed}" if valve else "the plates do not pass the flow")
    if len(answered) > 1:
        parts.append(f"the worst of {len(answered)} cases")
    if len(answered) < len(places):
        parts.append(f"{len(places) - len(answered)} without an answer")
    return f"{name}: {'; '.join(parts)}"


def _state(place: int, cases: Cases, findings: Findings) -> str:
    """How the case stands to what its verdict hangs on; a template."""
    index, limit, margin = (float(x[place]) for x in (findings.sigma, findings.limit, findings.margin))
    if findings.flashing[place]:
        p2, pv = (amount(float(x[place]), "absolute pressure") for x in (cases.p2, cases.pv))
        return f"flashing: p2 {p2} is not above pv {pv}"
    plate = f"plate {findings.plate[place]}: " if findings.plate[place] else ""
    kept = findings.keep[place]
    if math.isnan(margin):
        return f"{plate}{findings.regime[place]}: index {index:.4g}, no limit to count a margin to"
    side = "above" if margin > 0.0 else "not above"
    state = f"{verdict(findings.regime[place], findings.basis[place])}:"
    choking = float(findings.choked_limit[place])
    if findings.choked[place] and margin > 0.0 and kept != "choked" and not math.isnan(choking):
        state += f" the flow chokes at an index of {choking:.4g} and below;"
    return (f"{plate}{state} index {index:.4g} is {side} the {kept} limit {limit:.4g}, "
            f"margin {100.0 * margin:+.1f} %")  # fmt: skip
