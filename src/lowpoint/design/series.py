"""A valve and a plate in series: the pressure between them, both indices, and the plate that makes the worst case best.

The valve stands upstream and rules the flow; the plate takes what it takes at that flow, and the valve the rest::

    p_between = max(p2 + K x, FF pv + F x)      (x = rho v^2/2 in the plate's pipe; the second where the plate chokes)

A tighter plate spares the valve and strains itself: the best bore is where the least margin of the two devices over
all cases is highest.

Bypass of the reverse-osmosis energy recovery at Kestrel Bay, a four-stage trim relieved by a plate:

>>> brine = Liquid.in_units(density=1046, pv=0.026, pc=220.64, viscosity=1.1)
>>> cases = Cases.in_units(flow=[38, 52, 66], p1=[47, 58, 62], p2=[3.2, 5.2, 6.1], liquid=brine,
...                        names=("start-up", "normal", "maximum"))
>>> valve = Valve.in_units(fl=0.98, valve_size=50, pipe_in=70.3, pipe_out=70.3, rated=16)
>>> found = best_plate(valve, Line.in_units(pipe=70.3), cases)
>>> wider = rate_series(valve, Plate.in_units(bore=50), Line.in_units(pipe=70.3), cases)
>>> found.rating.worst_margin > wider.worst_margin > found.alone_margin
True
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from lowpoint.design.bores import drill_choices
from lowpoint.design.cases import Cases, Liquid
from lowpoint.design.checks import told
from lowpoint.design.criteria import Criteria
from lowpoint.design.march import Geometry, before_plate, choking_index
from lowpoint.design.notes import Note
from lowpoint.design.plates import Construction, Line, Plate, PlateSet
from lowpoint.design.rating import Rating, rate
from lowpoint.design.split import CLOSED, OPEN
from lowpoint.design.strength import load_on, strength_notes
from lowpoint.design.valve import Valve, ValveStates, valve_states
from lowpoint.errors import LowpointError
from lowpoint.physics.fittings import LARGE_CAPACITY, large_capacity

__all__ = [
    "Cases",
    "Criteria",
    "Line",
    "Liquid",
    "Plate",
    "SeriesDesign",
    "SeriesRating",
    "Valve",
    "best_plate",
    "rate_series",
]

ROUNDS, FIRST, NEXT = 9, 160, 33
"""Scans for the best bore, and bores in the first and in each later one, which looks 16 times as closely."""


@dataclass(frozen=True, eq=False)
class SeriesRating:
    """A valve and a plate in each case. Arrays over cases, SI; indices and limits in upstream form."""

    valve: Valve
    cases: Cases
    criteria: Criteria
    valve_states: ValveStates
    plate: Rating
    """Of the plate alone, between the two devices and p2."""

    @property
    def between(self) -> Any:
        """Pa: between valve and plate."""
        return self.plate.pressures[0]

    @property
    def valve_drop(self) -> Any:
        return self.cases.p1 - self.between

    @property
    def coefficient(self) -> Any:
        """Av (m2) that the valve must have; NaN where the plate leaves it no drop."""
        return self.valve_states.coefficient

    @property
    def margins(self) -> Any:
        """(2, cases): of the valve and of the plate, each to its own limit; -inf where the flow does not pass."""
        both = np.array([self.valve_states.margin, self.plate.margin[0]])
        return np.where(_passes(self.valve, self.cases, self.valve_states)[None, :], both, -np.inf)

    @property
    def worst_margin(self) -> float:
        return float(self.margins.min())

    @property
    def worst(self) -> tuple[str, str]:
        """The device (valve, plate) and the case of the least margin."""
        device, case = np.unravel_index(int(np.argmin(self.margins)), self.margins.shape)
        return ("valve", "plate")[int(device)], self.cases.names[int(case)]

    @property
    def notes(self) -> tuple[Note, ...]:
        """The plate's cautions and the valve's."""
        # That something else takes a part of the drop is what the valve is there for.
        return (*(n for n in self.plate.notes if n.topic != "flow"), *_valve_notes(self))


@dataclass(frozen=True, eq=False)
class SeriesDesign:
    """The plate that makes the worst case of a valve and a plate best, drilled, with the rating of every case."""

    rating: SeriesRating
    exact_bore: float
    """m, before rounding to a drill."""
    exact_margin: float
    """Least margin with the exact bore."""
    alone_margin: float
    """Least margin of the valve without any plate; -inf where it does not pass a flow."""
    construction: Construction
    load: float

    @property
    def plate(self) -> Plate:
        return self.rating.plate.plates.plates[0]

    @property
    def notes(self) -> tuple[Note, ...]:
        """The rating's cautions, those of strength, and whether the plate is worth its place."""
        useless = Note(
            "margin", f"a plate does not help: the valve alone has a least margin of {self.alone_margin:.3g}"
        )
        found = (*self.rating.notes, *strength_notes(self.construction, self.rating.plate.plates, self.load))
        return (*found, useless) if self.alone_margin >= self.rating.worst_margin else found


def rate_series(
    valve: Valve, plate: Plate, line: Line, cases: Cases, criteria: Criteria | None = None, worn: float = 0.0
) -> SeriesRating:
    """Every case through a valve and then a plate in a line.

    Margins: of the plate to the limit of ``criteria.kind``, of the valve to that of ``valve.kind``.
    """
    criteria = criteria or Criteria()
    rating = rate(PlateSet(line, (plate,)), replace(cases, held="outlet"), criteria, worn)
    return SeriesRating(valve, cases, criteria, valve_states(valve, cases, rating.pressures[0]), rating)


def _passes(valve: Valve, cases: Cases, states: ValveStates) -> Any:
    """Where the valve passes the flow: it has a drop to do it with and can open that far."""
    found = ~np.isnan(states.coefficient)
    if valve.rated is not None:
        rated = valve.over(cases.count, len(states.coefficient) // cases.count)["rated"]
        found = found & (states.coefficient <= rated * (1.0 + 1e-9))
    return found


def best_plate(
    valve: Valve, line: Line, cases: Cases, construction: Construction | None = None, criteria: Criteria | None = None
) -> SeriesDesign:
    """The plate after a valve with which the least margin of both, over all cases, is highest.

    All bores are scanned, then the neighbourhood of the best one ever more closely, so several maxima do no harm.
    Bores that leave the valve no drop, or ask more than its rated coefficient, are out. LowpointError where all are.
    """
    construction, criteria = construction or Construction(), criteria or Criteria()
    load = load_on(construction, cases)
    scan = _Scan(valve, cases, line.pipe, construction, criteria, load)
    bore, margin = scan.best()
    states = valve_states(valve, cases, cases.p2)
    alone = float(np.where(_passes(valve, cases, states), states.margin, -np.inf).min())
    if margin == -np.inf:
        raise _no_plate(alone)
    plates = construction.build(np.array([_rounded(bore, scan, criteria)]), load, line)
    rating = rate_series(valve, plates.plates[0], line, cases, criteria)
    return SeriesDesign(rating, bore, margin, alone, construction, load)


@dataclass(frozen=True, eq=False)
class _Scan:
    """Least margin of valve and plate over the bore of the plate."""

    valve: Valve
    cases: Cases
    pipe: float
    construction: Construction
    criteria: Criteria
    load: float

    def margins(self, bores: Any) -> Any:
        """Least margin at each bore, -inf where a flow does not pass."""
        cases, made = self.cases, self.construction
        length = made.likely_length(bores, self.load, self.pipe)
        sharp = None if not length.any() else length[:, None]
        geometry = Geometry(self.pipe, bores[:, None], sharp, np.full((len(bores), 1), made.holes))
        loss, pv, floor = geometry.loss(cases.reynolds(cases.flow, self.pipe)), cases.liquid.pv, cases.critical_floor
        between = before_plate(cases.dynamic(self.pipe), loss.k, loss.fall, cases.p2, floor)
        choked = self.criteria.kind == "choked"
        limit = choking_index(loss, between, pv, floor) if choked else geometry.limit(self.criteria.kind)
        plate = (between - pv) / (between - cases.p2) / limit - 1.0
        states = valve_states(self.valve, cases, between.ravel())
        both = np.fmin(states.margin, plate.ravel())
        least = np.where(_passes(self.valve, cases, states), both, -np.inf)
        return least.reshape(between.shape).min(axis=1)

    def bore(self, log_share: Any) -> Any:
        """Bore from the logarithm of the root of the open share."""
        return self.pipe / np.sqrt(self.construction.holes) * np.exp(log_share)

    def best(self) -> tuple[float, float]:
        """The best bore and its least margin."""
        low, high, count = CLOSED, OPEN, FIRST
        for _ in range(ROUNDS):
            shares = np.linspace(low, high, count)
            margins = self.margins(self.bore(shares))
            best = int(np.argmax(margins))
            low, high, count = shares[max(best - 1, 0)], shares[min(best + 1, count - 1)], NEXT
        return float(self.bore(shares[best])), float(margins[best])


def _rounded(bore: float, scan: _Scan, criteria: Criteria) -> float:
    """The drill beside the bore with the better least margin."""
    if criteria.rounding == "none":
        return bore
    choices = drill_choices(np.array([bore]), scan.pipe, scan.construction.holes, criteria)[:, 0]
    return float(choices[0] if criteria.rounding == "down" else choices[int(np.argmax(scan.margins(choices)))])


def _no_plate(alone: float) -> LowpointError:
    if alone == -np.inf:
        return LowpointError("valve and plate", "the valve must pass the flow of every case",
                             "a flow that it does not pass even without a plate", "Choose a larger valve.")  # fmt: skip
    return LowpointError("valve and plate", "there must be a plate that leaves the valve a drop in every case", "none",
                         "Leave the plate out, or choose a larger pipe for it.")  # fmt: skip


def _valve_notes(rating: SeriesRating) -> Iterator[Note]:
    """Cautions of the valve."""
    cases, valve, states = rating.cases, rating.valve, rating.valve_states
    numbers = valve.over(cases.count)

    def named(mask: Any) -> tuple[str, ...]:
        return tuple(name for name, holds in zip(cases.names, mask, strict=True) if holds)

    none_left = np.isnan(states.coefficient)
    if none_left.any():
        yield Note("flow", "no valve of this size passes the wanted flow with what the plate leaves it", 0,
                   named(none_left))  # fmt: skip
    if valve.rated is not None and (states.coefficient > numbers["rated"] * (1.0 + 1e-9)).any():
        beyond = states.coefficient > numbers["rated"] * (1.0 + 1e-9)
        most = told(float(np.nanmax(states.coefficient)), "coefficient", cases.system)
        yield Note("flow", f"the valve must open beyond its rated coefficient, to {most}", 0, named(beyond))
    if valve.valve_size is not None and (large := large_capacity(states.coefficient, numbers["valve_size"])).any():
        yield Note("valve", LARGE_CAPACITY.text, 0, named(large))
    flashing = rating.between <= cases.liquid.pv
    if flashing.any():
        yield Note("flashing", "the liquid flashes between valve and plate: the method ends here", 0, named(flashing))
