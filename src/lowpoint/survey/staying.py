"""How sure a verdict is, in a sentence."""

from __future__ import annotations

import math

from lowpoint.survey.model import Findings
from lowpoint.survey.outcome import Sensitivity
from lowpoint.survey.tolerances import NAMES

__all__ = ["share_words", "stay_words"]


def stay_words(sensitivity: Sensitivity, place: int, findings: Findings, system: str = "metric") -> str:
    """``stays clear in 97 % of draws; the inlet pressure matters most (± 1 % moves ...)``; empty without an answer.

    What it stays is said by the limit that the margin counts to: only above the incipient limit it is clear.
    """
    if math.isnan(sensitivity.stays[place]):
        return ""
    said = [_failing(sensitivity, place) if findings.fails[place] else _passing(sensitivity, place, findings)]
    unanswered = float(sensitivity.unanswered[place])
    if unanswered > 0.0:
        said.append(f"{_percent(unanswered, up=True)} of draws had no answer, such as an outlet pressure not below the "
                    "inlet's, and count as failing")  # fmt: skip
    dominant = sensitivity.dominant[place]
    if dominant is not None:
        size = next(t.words(system) for t in sensitivity.tolerances if t.field == dominant)
        verb = "matter" if dominant == "limits" else "matters"
        swing = float(f"{100.0 * sensitivity.swing[place]:.2g}")
        unit = "percentage point" if swing == 1.0 else "percentage points"
        said.append(f"the {NAMES[dominant]} {verb} most ({size} moves the margin by {swing:g} {unit} from end to end)")
    return "; ".join(said)


def share_words(share: float, draws: int) -> str:
    """``in 97 % of draws``, rounded down, so that a draw that failed is never rounded away; ``in all 200 draws``."""
    if share >= 1.0:
        return f"in all {draws} draws"
    return "in none of the draws" if share <= 0.0 else f"in {_percent(share)} of draws"


def _percent(share: float, *, up: bool = False) -> str:
    """In whole per cent, in tenths near both ends; never 0 or 100."""
    steps = 1000.0 if min(share, 1.0 - share) < 0.02 else 100.0
    scaled = math.ceil(share * steps - 1e-9) if up else math.floor(share * steps + 1e-9)
    if scaled < 1:
        return f"less than {100.0 / steps:g} %"
    if scaled >= steps:
        return f"more than {100.0 - 100.0 / steps:g} %"
    return f"{100.0 * scaled / steps:.4g} %"


def _passing(sensitivity: Sensitivity, place: int, findings: Findings) -> str:
    keep = findings.keep[place]
    state = {"incipient": "clear", "choked": "free of choking"}.get(keep, f"above the {keep} limit")
    if sensitivity.proven[place]:
        return f"stays {state} whatever the inputs are within their tolerances"
    return f"stays {state} {share_words(float(sensitivity.stays[place]), sensitivity.draws)}"


def _failing(sensitivity: Sensitivity, place: int) -> str:
    share = float(sensitivity.stays[place])
    if sensitivity.proven[place]:
        return "fails whatever the inputs are within their tolerances"
    if share <= 0.0:
        return f"fails, and so it does in all {sensitivity.draws} draws"
    return f"fails with the inputs as given, and that stands, though it passes {share_words(share, sensitivity.draws)}"
