"""Cells that read, by INDIRECT or OFFSET, a cell that keeps its old value: their text does not tell.

They are found by trial: what is not refreshed is given other values, and what then changes has read it. An error in
place of the old value would not do alone: ``IFERROR(INDIRECT("B7"),0)`` takes it for an answer.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from .evaluate import Run
from .plan import Plan
from .stale import Place

if TYPE_CHECKING:
    from .engine import Engine

__all__ = ["unseen_readers"]

_STAND_INS = (0.739085133215, "?")  # a number and a text that no formula is likely to give of itself
_UNSEEN = "it reads, by a reference worked out on the way, a cell that was not refreshed"


def unseen_readers(engine: Engine, run: Run, plan: Plan, kept: Iterable[Place]) -> dict[Place, str]:
    """The cells with such references that depend on one of the ``kept`` cells, and the reason for the report.

    The engine's cells are changed: ask when all results are collected.
    """
    dynamic = [entry for entry in plan.entries if entry.formula.dynamic]
    places = list(kept)
    if not dynamic or not places:
        return {}
    before = [run.values(entry) for entry in dynamic]
    found: dict[Place, str] = {}
    for stand_in in _STAND_INS:
        for sheet, row, column in places:
            engine.set_values(sheet, row, column, [[stand_in]])
        engine.evaluate()
        for entry, old in zip(dynamic, before, strict=True):
            group = entry.group
            for row, was, now in zip(group.rows, old, run.values(entry), strict=True):
                if was != now or type(was) is not type(now):
                    found[group.sheet, row, group.column] = _UNSEEN
    return {place: why for place, why in found.items() if place not in set(places)}
