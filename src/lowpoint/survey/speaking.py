"""Sentences about cases: the reasons and cautions that the functions' declarations give, evaluated over columns."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from lowpoint.declare import declarations
from lowpoint.kinds import Quantity
from lowpoint.messages import argument_names
from lowpoint.registry import functions
from lowpoint.survey.model import Cases
from lowpoint.units import Unit, dimension

__all__ = ["Lines", "cautions_of", "why"]


class Lines:
    """Errors and cautions of cases as they gather: (place, sentence)."""

    def __init__(self, cases: Cases) -> None:
        self.count = cases.count
        self.errors: list[tuple[int, str]] = []
        self.cautions: list[tuple[int, str]] = []

    def error(self, mask: Any, sentence: str) -> None:
        self.errors += [(place, sentence) for place in np.flatnonzero(mask).tolist()]

    def caution(self, mask: Any, sentence: str) -> None:
        self.cautions += [(place, sentence) for place in np.flatnonzero(mask).tolist()]

    def caution_at(self, places: Any, sentence: str) -> None:
        self.cautions += [(place, sentence) for place in places.tolist()]


def cautions_of(lines: Lines, name: str, rows: Any, arguments: Mapping[str, Any], known: bool | Any = True) -> None:
    """The cautions that a function's declaration has for these SI arguments (one element a row of ``rows``)."""
    with np.errstate(all="ignore"):
        for caution in declarations[name].cautions:
            wanted = [arguments.get(argument.rstrip("_")) for argument in argument_names(caution.when)]
            mask = np.broadcast_to(np.asarray(caution.when(*wanted), np.bool_), len(rows)) & known
            if mask.any():
                lines.caution_at(rows[mask], caution.text)


def _metric(kind: Any) -> Unit | None:
    """The metric unit of a number, None of a word or a table."""
    return dimension(kind.dimension).metric if isinstance(kind, Quantity) else None


def why(lines: Lines, name: str, rows: Any, failed: Any, arguments: Mapping[str, Any], caution: bool = False) -> None:
    """Why a function has no answer for the rows marked in ``failed``, in the words of LP_WHY, in metric units."""
    if not failed.any():
        return
    function = functions[f"LP_{name}"]
    given: dict[str, Any] = {}
    for parameter in function.parameters:
        x = arguments.get(parameter.name)
        if x is None:
            continue
        if isinstance(x, np.ndarray) and not parameter.is_table:
            x = x[failed]
        unit = _metric(parameter.kind)
        given[parameter.name] = [None if np.isnan(v) else unit.from_si(v) for v in x.tolist()] if unit else x
    said = function.why(**given)
    into = lines.cautions if caution else lines.errors
    for place, sentence in zip(rows[failed].tolist(), np.atleast_1d(said).tolist(), strict=True):
        into.append((place, sentence))
