"""Rating of plates as they stand: every case marched through them, with index, limits, margin and verdict a plate."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any, ClassVar

import numpy as np

from lowpoint.design.cases import Cases
from lowpoint.design.criteria import Criteria
from lowpoint.design.march import Geometry, choking_index, march
from lowpoint.design.notes import Note, notes, rules
from lowpoint.design.plates import PlateSet
from lowpoint.physics.orifices import orifice_drop
from lowpoint.physics.regime import regime_word

__all__ = ["Rating", "State", "rate"]


@dataclass(frozen=True)
class State:
    """One plate in one case, plain numbers in SI: a line of a calculation note."""

    plate: int
    case: str
    flow: float
    p_in: float
    p_out: float
    net_drop: float
    tap_drop: float
    k: float
    fl: float
    sigma: float
    incipient: float
    constant: float
    choked_limit: float
    margin: float
    choked: bool
    regime: str


@dataclass(frozen=True, eq=False)
class Rating:
    """What plates do in each case. Arrays of (plates, cases) unless said; SI; indices and limits in upstream form.

    ``net_drop`` is the permanent drop, ``tap_drop`` what an instrument between the taps shows: never the same thing.
    ``margin`` is ``sigma/limit - 1`` to the limit that the criteria name, 0 and below crossed.
    """

    basis: ClassVar[str] = "published, form assumed (Kuroda, Fukuda and Cho 1978, thin plates); choked derived"
    """Where the limits come from."""

    plates: PlateSet
    cases: Cases
    criteria: Criteria
    flow: Any
    """m3/s (cases): the wanted flow, or the one that the plates pass where that rules."""
    passed: Any
    """m3/s (cases): what the plates pass between p1 and p2 with nothing else in the line."""
    pressures: Any
    """Pa (plates + 1, cases): before the first plate, between them, after the last."""
    k: Any
    fl: Any
    sigma: Any
    incipient: Any
    constant: Any
    choked_limit: Any
    choked: Any
    regime: Any
    tap_drop: Any
    """Pa; NaN where a plate has no tap drop (several holes, a long bore, outside ISO 5167-2)."""

    @property
    def net_drop(self) -> Any:
        return self.pressures[:-1] - self.pressures[1:]

    @property
    def limit(self) -> Any:
        """Each plate's own limit, of the kind that the criteria name."""
        kind = self.criteria.kind
        return self.choked_limit if kind == "choked" else getattr(self, kind)

    @property
    def margin(self) -> Any:
        return self.sigma / self.limit - 1.0

    @property
    def short(self) -> Any:
        """Cases whose wanted flow the plates do not pass."""
        return self.passed < self.cases.flow * (1.0 - 1e-9)

    @property
    def left(self) -> Any:
        """Pa (cases): the part of p1 - p2 that something else in the line takes."""
        return (self.cases.p1 - self.pressures[0]) + (self.pressures[-1] - self.cases.p2)

    @property
    def beta(self) -> Any:
        """(plates): root of the open share of the pipe's area; bore over pipe for one hole."""
        return self.plates.column("bore") / self.plates.pipe * np.sqrt(self.plates.column("holes"))

    @property
    def worst(self) -> tuple[int, int]:
        """Plate and case (from 0) of the least margin."""
        plate, case = np.unravel_index(int(np.argmin(self.margin)), self.margin.shape)
        return int(plate), int(case)

    @cached_property
    def rules(self) -> tuple[str, ...]:
        """(plates): which published equation gave the loss, in words."""
        return rules(self)

    @cached_property
    def notes(self) -> tuple[Note, ...]:
        """The cautions."""
        return notes(self)

    def at(self, plate: int, case: int | str = 0) -> State:
        """One plate (from 0) in one case (from 0, or its name) as plain numbers."""
        column = self.cases.names.index(case) if isinstance(case, str) else case
        named = ("net_drop", "tap_drop", "k", "fl", "sigma", "incipient", "constant", "choked_limit", "margin")
        return State(
            plate=plate + 1, case=self.cases.names[column], flow=float(self.flow[column]),
            p_in=float(self.pressures[plate, column]), p_out=float(self.pressures[plate + 1, column]),
            choked=bool(self.choked[plate, column]), regime=str(self.regime[plate, column]),
            **{name: float(getattr(self, name)[plate, column]) for name in named},
        )  # fmt: skip


def rate(plates: PlateSet, cases: Cases, criteria: Criteria | None = None, worn: float = 0.0) -> Rating:
    """Every case through plates as they stand, or with every bore ``worn`` by a share (0.03 for 3 %).

    Flashing and choking are findings, not errors.
    """
    criteria = criteria or Criteria()
    plates = plates.worn(worn) if worn else plates
    geometry = Geometry.of(plates)
    gone = march(geometry, cases)
    shape = (plates.count, cases.count)
    p_in, p_out = gone.pressures[:-1], gone.pressures[1:]
    pv = cases.liquid.pv
    incipient, constant = (np.broadcast_to(geometry.limit(kind), shape) for kind in ("incipient", "constant"))
    choking = choking_index(gone.loss, p_in, pv, cases.critical_floor)
    sigma = (p_in - pv) / (p_in - p_out)
    # A choked plate is at its limit, on whichever side of it the last bit fell.
    judged = np.where(gone.choked, np.minimum(sigma, choking), sigma)
    return Rating(
        plates=plates, cases=cases, criteria=criteria, flow=gone.flow, passed=gone.passed, pressures=gone.pressures,
        k=np.broadcast_to(gone.loss.k, shape), fl=np.broadcast_to(np.sqrt(gone.loss.recovery2), shape), sigma=sigma,
        incipient=incipient, constant=constant, choked_limit=choking, choked=gone.choked,
        regime=regime_word(judged, incipient, constant, choked=choking),
        tap_drop=_tap_drop(geometry, cases, gone.flow, criteria.taps),
    )  # fmt: skip


def _tap_drop(geometry: Geometry, cases: Cases, flow: Any, taps: str) -> Any:
    viscosity: Any = cases.liquid.viscosity
    pipe = np.full(geometry.bore.shape, geometry.pipe)
    return orifice_drop(
        flow, geometry.bore, pipe, cases.liquid.density, viscosity, geometry.bore_length, geometry.holes, taps
    )
