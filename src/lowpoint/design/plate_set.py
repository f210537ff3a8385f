"""Design of a set of plates in series: the fewest that keep a margin, of equal margin, strong enough, drilled, rated.

RO brine let-down of Kestrel Bay: brine from the membranes at 57 bar to the outfall line, three cases, plates bevelled.

>>> brine = Liquid.in_units(density=1046, pv=0.026, pc=220.64, viscosity=1.1)
>>> cases = Cases.in_units(flow=[60, 85, 95], p1=[51, 57, 60], p2=[3.4, 4.2, 5.0], liquid=brine,
...                        names=("start-up", "normal", "maximum"))
>>> made = Construction.in_units(stress=110, support_diameter=140, bevelled=True)
>>> found = design_set(cases, Line.in_units(pipe=107.1), made, Criteria(kind="constant", margin=0.1))
>>> found.count, found.cases.names[found.governing], bool(found.rating.margin.min() >= 0.1)
(5, 'maximum', True)
>>> [round(1e3 * plate.bore, 2) for plate in found.plates.plates] == sorted(round(1e3 * p.bore, 2)
...                                                                        for p in found.plates.plates)
True

A worn set passes more; with 3 % on every bore:

>>> worn = rate(found.plates, cases, found.criteria, worn=0.03)
>>> bool((worn.passed > found.rating.passed).all())
True
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lowpoint.design.bores import Sized, drilled, size
from lowpoint.design.cases import Cases, Liquid
from lowpoint.design.checks import told
from lowpoint.design.criteria import Criteria
from lowpoint.design.notes import Note
from lowpoint.design.plates import Construction, Line, PlateSet
from lowpoint.design.rating import Rating, rate
from lowpoint.design.split import Duty, Table
from lowpoint.design.strength import load_on, strength_notes
from lowpoint.errors import LowpointError
from lowpoint.physics.stages import LIQUID, MOST

__all__ = ["Cases", "Construction", "Criteria", "Line", "Liquid", "SetDesign", "design_set", "rate"]

ENOUGH = 1e-4
"""By which a margin may fall short of what is asked for without a word: the flow's last digits move it that much."""


@dataclass(frozen=True, eq=False)
class SetDesign:
    """A designed set: ``rating`` of every case with the plates as built, ``sized`` before rounding to drills."""

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
    def plates(self) -> PlateSet:
        """As built."""
        return self.rating.plates

    @property
    def count(self) -> int:
        return self.plates.count

    @property
    def length(self) -> float:
        """From the first plate to the last, m."""
        return (self.count - 1) * self.plates.line.apart

    @property
    def notes(self) -> tuple[Note, ...]:
        """The rating's cautions, and those of margin and strength."""
        return (*self.rating.notes, *_margin_notes(self), *strength_notes(self.construction, self.plates, self.load))


def design_set(
    cases: Cases, line: Line, construction: Construction | None = None, criteria: Criteria | None = None, *,
    governing: str | None = None, plates: int | None = None,
) -> SetDesign:  # fmt: skip
    """The set of fewest plates that keeps the margin in the governing case, and every case rated with it.

    Split by equal margin (:mod:`~lowpoint.design.split`), thickness and loss in agreement, bores rounded to drills,
    then all cases marched plate after plate with choking in force. ``governing`` names the case to size for, else the
    one that needs the set most open, so that every case's flow passes; the other cases show their margins in the
    rating. ``plates`` sets the number.

    LowpointError where the liquid flashes after the last plate, or more than 12 plates were needed.
    """
    construction, criteria = construction or Construction(), criteria or Criteria()
    case, load = cases.governing(governing), load_on(construction, cases)
    duty = _duty(cases, case, line, construction, criteria)
    table = Table(duty, lambda bores: construction.likely_length(bores, load, line.pipe))

    def sized(count: int) -> Sized:
        return size(duty, construction, load, duty.bore(table.shares(count)))

    if plates is None:
        found, fewer = _fewest(sized, table, criteria, cases, case)
    else:
        found, fewer = sized(_possible(plates)), None
    built = construction.build(drilled(found, duty, construction, load, criteria), load, line)
    return SetDesign(rate(built, cases, criteria), found, cases, criteria, construction, case, load, fewer)


def _duty(cases: Cases, case: int, line: Line, construction: Construction, criteria: Criteria) -> Duty:
    p2, pv = float(cases.p2[case]), float(cases.liquid.pv[case])
    if p2 <= pv:
        must = f"p2 must be above pv = {told(pv, 'pressure', cases.system)}"
        raise LowpointError(f"case '{cases.names[case]}'", must, told(p2, "pressure", cases.system), LIQUID.remedy)
    return Duty.of(cases, case, line.pipe, construction.holes, criteria.kind)


def _possible(plates: int) -> int:
    if not 1 <= plates <= MOST:
        raise LowpointError("plate set", f"the number of plates must be 1 to {MOST}", f"{plates}")
    return plates


def _fewest(
    sized: Callable[[int], Sized], table: Table, criteria: Criteria, cases: Cases, case: int
) -> tuple[Sized, Sized | None]:
    """The set of fewest plates that keeps the margin, and the best of one fewer, which does not."""
    reached = table.greedy(criteria.margin)
    if len(reached) > MOST + 1:
        raise _too_many(criteria, cases, case, len(reached), float(reached[MOST - 1]))

    def enough(found: Sized) -> bool:
        return found.margin >= criteria.margin - 1e-9

    count = max(len(reached) - 1, 1)  # the table may be one off
    found = sized(count)
    while enough(found):
        if count == 1 or not enough(fewer := sized(count - 1)):
            return found, None if count == 1 else fewer
        found, count = fewer, count - 1
    while count < MOST:
        fewer, count = found, count + 1
        if enough(found := sized(count)):
            return found, fewer
    raise _too_many(criteria, cases, case, MOST + 1, float(reached[min(len(reached), MOST) - 1]))


def _too_many(criteria: Criteria, cases: Cases, case: int, count: int, after: float) -> LowpointError:
    before, behind = (told(pressure[case], "pressure", cases.system) for pressure in (cases.p1, cases.p2))
    got = f"{count}{' or more' if count >= 100 else ''} for {before} to {behind} in case '{cases.names[case]}', margin "
    got += f"{criteria.margin:g} to {criteria.limit_name}"
    # The table's pressure may fall a little short of one that needs a plate more.
    after = max(after, 1.01 * float(cases.p2[case]))
    remedy = (
        f"Choose a valve with staged trim instead, or raise the back-pressure to about "
        f"{told(after, 'pressure', cases.system)}, which {MOST} plates reach with that margin."
    )
    return LowpointError("plate set", f"at most {MOST} plates must do", got, remedy)


def _margin_notes(design: SetDesign) -> list[Note]:
    rating, wanted = design.rating, design.criteria.margin
    found = []
    for plate in range(design.count):
        below = rating.margin[plate] < wanted - ENOUGH
        if below.any():
            worst = int(np.argmin(rating.margin[plate]))
            cases = tuple(name for name, short in zip(design.cases.names, below, strict=True) if short)
            text = f"the margin to {design.criteria.limit_name} is {rating.margin[plate, worst]:.3g} in "
            text += f"{design.cases.names[worst]}, below the {wanted:g} asked for"
            found.append(Note("margin", text, plate + 1, cases))
    return found
