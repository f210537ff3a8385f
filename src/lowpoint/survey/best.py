"""The remedy that is named where there is room for one, and what is said where none cures."""

from __future__ import annotations

from collections.abc import Sequence

from lowpoint.survey.model import Item
from lowpoint.survey.outcome import Remedy

__all__ = ["best_of", "best_words"]


def best_of(remedies: Sequence[Remedy]) -> Remedy | None:
    """The first that cures, or the advice on flashing; else the first that was tried; None for none."""
    for wanted in (lambda it: it.cures or it.kind == "flashing", lambda it: it.margin == it.margin):
        found = next(filter(wanted, remedies), None)
        if found is not None:
            return found
    return None


def best_words(item: Item, remedies: Sequence[Remedy], *, brief: bool = False) -> str:
    """The best remedy in words, honest where it is no cure. ``brief``: without what comes of it but the margin."""
    best = best_of(remedies)
    if best is None:
        return "no cure was found" if remedies else "none was worked out"
    text = _short(best) if brief else best.text
    if best.cures or best.kind == "flashing":
        return text
    if item.unanswered:
        one = item.unanswered == 1
        return f"not to be confirmed while {item.unanswered} {'case has' if one else 'cases have'} no answer: {text}"
    return f"no cure was found; nearest to it: {text}"


def _short(remedy: Remedy) -> str:
    margin = f", least margin {100.0 * remedy.margin:+.1f} %" if remedy.margin == remedy.margin else ""
    return f"{remedy.brief or remedy.text}{margin}"
