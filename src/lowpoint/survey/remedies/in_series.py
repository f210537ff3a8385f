"""Plates that fail, as a set: the fewest plates that keep the limit between the same pressures and pass every flow."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from lowpoint import design
from lowpoint.errors import LowpointError
from lowpoint.physics.stages import MOST
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.downstream import bores_words, duties, plate_cases, worst_first
from lowpoint.survey.remedies.failing import Failing
from lowpoint.survey.remedies.trying import Trial, advice, tried

__all__ = ["plates_in_series"]

MARGINS = (0.02, 0.06, 0.12, 0.25)
"""Asked of the governing case in turn, until the others keep their limit too."""
LARGER = (1.0, 1.01, 1.03)
"""Flows that are designed for, over the wanted: drills may fall on the small side."""
_NOT_TRIED = "plates in series were not tried: they are designed for the {} worst items only"
_NONE = f"plates in series do not do: no set of up to {MOST} keeps the limit in every case between these pressures"
_FIT = "the limits are the published fit for thin plates, estimates for others; given limits of the old plate were left"
_MARCH = "plates 6 pipe diameters apart (common practice); strength, start-up and blocked plates not checked"
_REST = "in cases with less flow the plates pass more than is wanted: something else must take the rest"


def plates_in_series(failing: Failing, plates_for: int = 100) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy, for plates and sets that do not flash."""
    wanted = ~failing.any(failing.found.flashing | (failing.cases.kind == "valve"))
    served, rest = worst_first(failing, wanted, plates_for)
    for number in rest:
        yield number, advice(failing, number, "plates in series", _NOT_TRIED.format(plates_for))
    for number in served:
        trial = _designed(failing.only(np.arange(failing.count) == number))
        if trial is None:
            yield number, advice(failing, number, "plates in series", _NONE)
        else:
            yield number, _remedy(trial)


def _designed(failing: Failing) -> Trial | None:
    cases, kept = failing.cases, str(failing.found.keep[0])
    # A fit for plates has these three; constant cavitation is milder than damage and vibration.
    kind = kept if kept in ("incipient", "choked") else "constant"
    line = design.Line(pipe=float(cases.pipe_in[0]))
    length, holes = float(cases.bore_length[0]), float(cases.holes[0])
    made = design.Construction(thickness=None if np.isnan(length) or length == 0.0 else length,
                               holes=1.0 if np.isnan(holes) else holes)  # fmt: skip
    added = np.ones(cases.count, np.bool_)
    for margin in MARGINS:
        for more in LARGER:
            wanted = duties(cases.changed(flow=cases.flow * more), cases.p1, cases.p2, "both")
            try:
                found = design.design_set(wanted, line, made, design.Criteria(kind=kind, margin=margin))
            except LowpointError:
                break
            trial = tried(failing, plate_cases(cases, found.plates, kind).changed(tag=cases.tag), None, added)
            if trial.cures[0]:
                return trial
    return None


def _remedy(trial: Trial) -> Remedy:
    bores = trial.cases.bores[0] or (float(trial.cases.bore[0]),)
    what = f"{bores_words(bores)}, in place of the present"
    text = (f"{what}: the {wording.limit_words(trial.found.keep)} is kept "
            f"{wording.in_cases(len(trial.of), trial.failing.items[0].unanswered)}, least margin "
            f"{wording.share(float(trial.margin[0]))}")  # fmt: skip
    figures = {f"bore {i}": (float(bore), "size") for i, bore in enumerate(bores, 1)}
    cautions = [_FIT, _MARCH, *([_REST] if len(trial.of) > 1 else [])]
    return trial.remedy(0, "plates in series", what, figures, cautions, text=text)
