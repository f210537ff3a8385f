"""Design of a set of plates in series: the fewest that keep a margin, of equal margin, strong enough, drilled, rated.

RO brine let-down of Kestrel Bay: brine from the membranes at 57 bar to the outfall line, three cases, plates bevelled.

>>> brine = Liquid.in_units(density=1046, pv=0.026, pc=220.64, viscosity=1.1)
>>> cases = Cases.in_units(flow=[60, 85, 95], p1=[51, 57, 60], p2=[3.4, 4.2, 5.0], liquid=brine,
...                        names=("start-up", "normal", "maximum"))
>>> made = Construction.in_units(stress=110, support_diameter=140, bevelled=True)
>>> found = design_set(cases, pipe=0.1071, construction=made, criteria=Criteria(kind="constant", margin=0.1))
>>> found.count, found.cases.names[found.governing], found.rating.margin[:, found.governing].min() >= 0.1
(6, 'maximum', True)
>>> [round(1e3 * plate.bore, 2) for plate in found.plates.plates] == sorted(round(1e3 * p.bore, 2)
...                                                                        for p in found.plates.plates)
True

A worn set passes more; with 3 % on every bore:

>>> worn = rate(found.plates, cases, found.criteria, worn=0.03)
>>> bool((worn.passed > found.rating.passed).all())
True
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.design.cases import Cases, Liquid
from lowpoint.design.checks import told
from lowpoint.design.criteria import Criteria
from lowpoint.design.notes import Note
from lowpoint.design.plates import Construction, PlateSet
from lowpoint.design.rating import Rating, rate
from lowpoint.design.sizing import Sized, drilled, size
from lowpoint.design.split import Duty, greedy
from lowpoint.errors import LowpointError
from lowpoint.physics.stages import LIQUID, MOST

__all__ = ["Cases", "Construction", "Criteria", "Liquid", "SetDesign", "design_set", "load_on", "rate"]


@dataclass(frozen=True)
class SetDesign:
    """A designed set: ``plates`` as built, ``rating`` of every case with them, ``sized`` before rounding to drills."""

    plates: PlateSet
    rating: Rating
    sized: Sized
    cases: Cases
    criteria: Criteria
    construction: Construction
    governing: int
    """The case (from 0) that the set is sized for."""
    load: float
    """Pressure difference that every plate must carry, Pa: of a blocked plate, start-up and shut-in included."""
    fewer: Sized | None
    """The best set of one plate fewer, which does not keep the margin; None where the number was given or is one."""

    @property
    def count(self) -> int:
        return self.plates.count

    @property
    def length(self) -> float:
        """From the first plate to the last, m."""
        return (self.count - 1) * float(self.plates.spacing or 0.0)

    @property
    def notes(self) -> tuple[Note, ...]:
        """The rating's cautions, and those of margin and strength."""
        return (*self.rating.notes, *_margin_notes(self), *strength_notes(self.construction, self.plates, self.load))


def load_on(construction: Construction, cases: Cases) -> float:
    """The load of a plate, Pa: p1 - p2 of the worst case (any plate can be the blocked one), or more where stated."""
    return max(float(np.max(cases.p1 - cases.p2)), construction.differential or 0.0)  # type: ignore[type-var]


def design_set(
    cases: Cases, pipe: float, construction: Construction | None = None, criteria: Criteria | None = None, *,
    governing: str | None = None, plates: int | None = None, holes: int = 1, spacing: float | None = None,
    free_discharge: bool = False,
) -> SetDesign:  # fmt: skip
    """The set of fewest plates that keeps the margin in the governing case, and every case rated with it. SI.

    Split by equal margin (:mod:`~lowpoint.design.split`), thickness and loss in agreement, bores rounded to drills, then
    all cases marched plate after plate with choking in force. ``governing`` names the case to size for, else the one
    that needs the set most open, so that every case's flow passes; the other cases show their margins in the rating.
    ``plates`` sets the number. ``pipe``: inside diameter, m; ``spacing`` m, six pipe diameters unless given.

    LowpointError where the liquid flashes after the last plate, or more than 12 plates were needed.
    """
    construction, criteria = construction or Construction(), criteria or Criteria()
    apart = 6.0 * pipe if spacing is None else spacing
    case = cases.governing(governing)
    duty = _duty(cases, case, pipe, holes, criteria)
    load = load_on(construction, cases)

    def sized(count: int) -> Sized:
        return size(duty, construction, load, count)

    if plates is None:
        found, fewer = _fewest(duty, sized, construction, criteria, cases, case)
    else:
        found, fewer = sized(_possible(plates)), None
    bores = drilled(found, duty, construction, load, criteria)
    thickness = construction.thickness_for(bores, load)
    built = PlateSet(pipe, construction.build(bores, thickness, pipe, holes), apart, free_discharge, cases.system)  # type: ignore[arg-type]
    return SetDesign(built, rate(built, cases, criteria), found, cases, criteria, construction, case, load, fewer)


def _duty(cases: Cases, case: int, pipe: float, holes: int, criteria: Criteria) -> Duty:
    p2, pv = float(cases.p2[case]), float(cases.liquid.pv[case])
    if p2 <= pv:
        must = f"p2 must be above pv = {told(pv, 'pressure', cases.system)}"
        raise LowpointError(f"case '{cases.names[case]}'", must, told(p2, "pressure", cases.system), LIQUID.remedy)
    return Duty.of(cases, case, pipe, float(holes), criteria.kind)


def _possible(plates: int) -> int:
    if not 1 <= plates <= MOST:
        raise LowpointError("plate set", f"the number of plates must be 1 to {MOST}", f"{plates}")
    return plates


def _fewest(
    duty: Duty, sized: Any, construction: Construction, criteria: Criteria, cases: Cases, case: int
) -> tuple[Sized, Sized | None]:
    """The set of fewest plates that keeps the margin, and the best of one fewer, which does not."""
    thin = float(construction.bore_length(np.array([construction.thickness or np.nan]), duty.pipe)[0])
    reached = greedy(duty, thin, criteria.margin)
    count = max(len(reached), 1)
    if count > MOST + 1:
        raise _too_many(criteria, cases, case, count, float(reached[MOST - 1]))
    count = min(count, MOST)
    found, fewer = sized(count), None
    enough = criteria.margin - 1e-9
    while found.margin >= enough and count > 1:
        fewer = sized(count - 1)
        if fewer.margin < enough:
            return found, fewer
        found, count = fewer, count - 1
    while found.margin < enough:
        if count == MOST:
            raise _too_many(criteria, cases, case, count + 1, float(reached[min(len(reached), MOST) - 1]))
        fewer, count = found, count + 1
        found = sized(count)
    return found, fewer if count > 1 else None


def _too_many(criteria: Criteria, cases: Cases, case: int, count: int, after: float) -> LowpointError:
    drop = f"{told(cases.p1[case], 'pressure', cases.system)} to {told(cases.p2[case], 'pressure', cases.system)}"
    name = f"'{cases.names[case]}'"
    got = f"{count}{' or more' if count >= 100 else ''} for {drop} in case {name}, margin {criteria.margin:g} to "
    remedy = (
        f"Choose a valve with staged trim instead, or raise the back-pressure to about "
        f"{told(after, 'pressure', cases.system)}, which {MOST} plates reach with that margin."
    )
    return LowpointError("plate set", f"at most {MOST} plates must do", f"{got}{criteria.kind} cavitation", remedy)


def _margin_notes(design: SetDesign) -> list[Note]:
    rating, wanted = design.rating, design.criteria.margin
    found = []
    for plate in range(design.count):
        below = rating.margin[plate] < wanted - 1e-9
        if below.any():
            worst = int(np.argmin(rating.margin[plate]))
            cases = tuple(name for name, short in zip(design.cases.names, below, strict=True) if short)
            text = f"the margin to its {design.criteria.kind} limit is {rating.margin[plate, worst]:.3g} in "
            text += f"{design.cases.names[worst]}, below the {wanted:g} asked for"
            found.append(Note("margin", text, plate + 1, cases))
    return found


def strength_notes(construction: Construction, plates: PlateSet, load: float) -> list[Note]:
    """What is to be said of the thickness of plates: not checked, too thin, or with a caution of the method."""
    if construction.stress is None:
        return [Note("strength", "the strength of the plates was not checked: no stress and support_diameter are given")]
    found = [Note("strength", "a clamped rim is seldom that stiff in service; simple is the safe choice")]
    found = found if construction.support == "clamped" else []
    for number, plate in enumerate(plates.plates, 1):
        needed = float(construction.needed_thickness(np.array([plate.bore]), load)[0])
        if plate.thickness is not None and plate.thickness < needed * (1.0 - 1e-9):
            has, must = (told(x, "size", plates.system) for x in (plate.thickness, needed))
            carries = told(load, "pressure", plates.system)
            found.append(Note("strength", f"the plate is {has} thick and must be {must} to carry {carries}", number))
        if needed > 0.125 * construction.support_diameter:  # type: ignore[operator]
            found.append(Note("strength", "the plate is thicker than a quarter of its support's radius, where thin-plate "
                              "theory overstates it", number))  # fmt: skip
        if plate.holes > 1.0 and construction.ligament == 1.0:
            found.append(Note("strength", "many holes weaken a plate: give their ligament efficiency", number))
    return found
