"""All remedies of the failing items of a survey, best first.

Verified cures go before everything else. Among them the order is that of practical ease: what changes least in the
plant, costs least and is most certain to work as reckoned stands first (common practice; a user's own plant may well
say otherwise)::

    a small change of operation   back-pressure by at most a tenth of the drop, or cooling by at most 5 K
    larger valve                  named for capacity alone, where nothing else helps
    higher recovery factor        another valve or trim between the same flanges
    plate downstream              a cheap passive part, whose drop falls away at low flow
    plates in series              the same for plates
    staged trim                   between the same flanges often, but dear, and for clean liquids
    back-pressure                 the plant behind must bear it
    split                         a second valve with its piping
    lower location                piping is moved
    lower temperature             a cooler, and its duty for good
    what is hard to have          a valve with FL above 0.95 or a limit below nine tenths of the present one, which has
                                  yet to be found; a place more than 30 m lower; a back-pressure that takes more than
                                  a quarter of the drop, or any behind a free jet

Where a case flashes, the advice on flashing stands first: a higher back-pressure may end it on paper, and what practice
does is to live with it. What does not cure alone follows in the same order, what was tried before what cannot be.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import Any

import numpy as np

from lowpoint.survey.model import Survey
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies.cooling import lower_temperatures
from lowpoint.survey.remedies.downstream import plates_downstream
from lowpoint.survey.remedies.enlarging import larger_valves
from lowpoint.survey.remedies.failing import Failing, failing_items
from lowpoint.survey.remedies.flashing import flashing_advice
from lowpoint.survey.remedies.in_series import plates_in_series
from lowpoint.survey.remedies.pressures import DEEP, back_pressures, lower_locations
from lowpoint.survey.remedies.recovering import other_valves
from lowpoint.survey.remedies.splitting import splits
from lowpoint.survey.remedies.staging import staged_trims

__all__ = ["EASE", "remedies_of"]

EASE = ("larger valve", "higher recovery factor", "plate downstream", "plates in series", "staged trim",
        "back-pressure", "split", "lower location", "lower temperature")  # fmt: skip
SMALL_RAISE, SMALL_COOLING = 0.1, 5.0
"""Share of the drop, and K, up to which a change of operation counts as small."""
LARGE_RAISE = 0.25
"""Share of the drop above which a plant behind seldom bears a higher back-pressure (common practice)."""
HIGH_FL, FAR_LIMIT = 0.95, 0.9
"""FL that single-stage trims seldom have; share of the present limit that another valve of the kind may reach."""

Maker = Callable[[Failing], Iterator[tuple[int, Remedy]]]
MAKERS: tuple[tuple[str, Maker], ...] = (
    ("flashing", flashing_advice), ("larger valves", larger_valves), ("other valves", other_valves),
    ("staged trims", staged_trims), ("back-pressures", back_pressures), ("two valves", splits),
    ("lower places", lower_locations), ("lower temperatures", lower_temperatures),
)  # fmt: skip


def remedies_of(
    survey: Survey, progress: Callable[[str], None] | None = None, *, plates_for: int = 100
) -> dict[str, tuple[Remedy, ...]]:
    """The remedies of every failing item by its tag, best first, each tried on all its cases.

    All failing items are tried at once, kind by kind. Plates are designed one by one, so they are tried for the
    ``plates_for`` worst valves and as many plates only (flashing ones aside); the others' remedies say so.
    ``progress`` is told what comes next.
    """
    tell = progress or (lambda text: None)
    with np.errstate(all="ignore"):
        failing = failing_items(survey)
        found: list[list[Remedy]] = [[] for _ in failing.items]
        for name, maker in MAKERS:
            tell(f"remedies: {name}")
            for item, remedy in maker(failing):
                found[item].append(remedy)
        tell("remedies: plates")
        for maker in (plates_downstream, plates_in_series):
            for item, remedy in maker(failing, plates_for):
                found[item].append(remedy)
        drop = failing.cases.p1 - failing.cases.p2
        drops = np.stack([failing.by_item(how, drop) for how in (np.fmin, np.fmax)], axis=1).tolist()
        jets = failing.any(failing.cases.outlet == "free jet").tolist()
    return {item.tag: tuple(sorted(own, key=lambda remedy: _rank(remedy, least_most, jet)))
            for item, own, least_most, jet in zip(failing.items, found, drops, jets, strict=True)}  # fmt: skip


def _rank(remedy: Remedy, drops: Sequence[float], jet: bool) -> tuple[Any, ...]:
    """Advice on flashing, then cures, the easier first, then what comes out with the greater margin.

    ``drops``: the least and the largest of the item's cases. ``jet``: does a case end in a free jet?
    """
    advice = remedy.kind == "flashing"
    tried = not np.isnan(remedy.margin)
    ease = EASE.index(remedy.kind) if remedy.kind in EASE else -1
    figures = {name: value for name, (value, _) in remedy.figures.items()}
    if figures.get("lower by", 0.0) > DEEP or figures.get("FL at least", 0.0) > HIGH_FL:
        ease = len(EASE)
    if figures.get("limit at most", np.inf) < FAR_LIMIT * figures.get("limit now", 1.0):
        ease = len(EASE)
    raised = figures.get("back-pressure raised by", np.nan)
    if raised > LARGE_RAISE * drops[1] or (jet and not np.isnan(raised)):
        ease = len(EASE)
    if raised <= SMALL_RAISE * drops[0] and not jet:
        ease = -1
    if figures.get("cooler by", np.inf) <= SMALL_COOLING:
        ease = -1
    return (not advice, not remedy.cures, not tried, ease, -np.nan_to_num(remedy.margin))
