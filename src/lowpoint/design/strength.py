"""The load that a plate must carry, and what is to be said of its thickness."""

from __future__ import annotations

import numpy as np

from lowpoint.design.cases import Cases
from lowpoint.design.checks import told
from lowpoint.design.notes import Note
from lowpoint.design.plates import Construction, PlateSet

__all__ = ["load_on", "strength_notes"]


def load_on(construction: Construction, cases: Cases) -> float:
    """The load of a plate, Pa: p1 - p2 of the worst case (any plate can be the blocked one), or more where stated."""
    return max(float(np.max(cases.p1 - cases.p2)), construction.differential or 0.0)


def strength_notes(construction: Construction, plates: PlateSet, load: float) -> list[Note]:
    """What is to be said of the thickness of plates: not checked, too thin, or with a caution of the method."""
    if construction.stress is None:
        return [
            Note("strength", "the strength of the plates was not checked: no stress and support_diameter are given")
        ]
    found = [Note("strength", "a clamped rim is seldom that stiff in service; simple is the safe choice")]
    found = found if construction.support == "clamped" else []
    for number, plate in enumerate(plates.plates, 1):
        needed = float(construction.needed_thickness(np.array([plate.bore]), load)[0])
        if plate.thickness is not None and plate.thickness < needed * (1.0 - 1e-9):
            has, must = (told(x, "size", construction.system) for x in (plate.thickness, needed))
            carries = told(load, "pressure", construction.system)
            found.append(Note("strength", f"the plate is {has} thick and must be {must} to carry {carries}", number))
        if needed > 0.125 * (construction.support_diameter or np.inf):
            text = "the plate is thicker than a quarter of its support's radius, where thin-plate theory overstates it"
            found.append(Note("strength", text, number))
        if plate.holes > 1.0 and construction.ligament == 1.0:
            found.append(Note("strength", "many holes weaken a plate: give their ligament efficiency", number))
    return found
