"""How far the margin of a case moves with its inputs, in words."""

from __future__ import annotations

import math

from lowpoint.survey.model import Survey
from lowpoint.survey.staying import stay_words

__all__ = ["sensed_words"]


def sensed_words(survey: Survey, place: int, system: str = "metric") -> str:
    """The share of draws, the input that matters most and the range of the margin; empty where there is no answer."""
    found = survey.sensitivity
    if found is None:
        return ""
    said = stay_words(found, place, survey.findings, system)
    low, high = float(found.low[place]), float(found.high[place])
    sentences = [f"The case {said}."] if said else []
    if math.isfinite(low) and math.isfinite(high):
        sentences.append(f"The margin runs from {100.0 * low:+.1f} % with every input at its adverse end to "
                         f"{100.0 * high:+.1f} % with every input at its favourable end.")  # fmt: skip
    return " ".join(sentences) or "The case has no margin to move."
