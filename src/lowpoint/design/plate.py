"""Design of one plate for its flow cases, and rating of a plate that exists.

Pump minimum-flow line of Kestrel Bay: sea water from the intake pump back to its pit, under a head:

>>> sea = Liquid.in_units(density=1025, pv=0.024, pc=220.64, viscosity=1.05)
>>> cases = Cases.in_units(flow=[480, 620], p1=[4.9, 4.6], p2=[3.2, 3.1], liquid=sea, names=("normal", "start-up"))
>>> found = design_plate(cases, Line.in_units(pipe=206.5), Construction.in_units(thickness=4))
>>> state = found.rating.at(0, "start-up")
>>> state.regime, state.choked, state.net_drop < state.tap_drop
('cavitating', False, True)

Boiler blowdown flashes after its plate, which is a finding and not an error:

>>> boiler = Liquid.in_units(density=845, pv=13.8, pc=220.64, viscosity=0.13)
>>> blowdown = Cases.in_units(flow=6, p1=14.6, p2=2.0, liquid=boiler)
>>> rate_plate(Plate.in_units(bore=14), Line.in_units(pipe=52.5), blowdown).at(0).regime
'flashing'
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from lowpoint.design.bores import AGREED, MOST_ROUNDS, drill_choices, settled
from lowpoint.design.cases import Cases, Liquid
from lowpoint.design.checks import told
from lowpoint.design.criteria import Criteria
from lowpoint.design.notes import Note
from lowpoint.design.plates import Construction, Line, Plate, PlateSet
from lowpoint.design.rating import Rating, rate
from lowpoint.design.strength import load_on, strength_notes
from lowpoint.errors import LowpointError
from lowpoint.physics.orifices import orifice_bore

__all__ = ["Cases", "Construction", "Criteria", "Line", "Liquid", "Plate", "PlateDesign", "design_plate", "rate_plate"]


@dataclass(frozen=True, eq=False)
class PlateDesign:
    """A designed plate: as built, every case rated with it, and the bore before rounding to a drill."""

    rating: Rating
    exact_bore: float
    """m: passes the governing case's flow exactly, choked or not."""
    thickness: float
    """m, of the plate with the exact bore; NaN for a sharp edge of no known thickness."""
    rounds: int
    """Bores worked out until bore and thickness agreed."""
    cases: Cases
    criteria: Criteria
    construction: Construction
    governing: int
    load: float

    @property
    def plate(self) -> Plate:
        return self.rating.plates.plates[0]

    @property
    def notes(self) -> tuple[Note, ...]:
        """The rating's cautions, and those of strength."""
        return (*self.rating.notes, *strength_notes(self.construction, self.rating.plates, self.load))


def rate_plate(
    plate: Plate, line: Line, cases: Cases, criteria: Criteria | None = None, worn: float = 0.0
) -> Rating:  # fmt: skip
    """Every case with one plate as it stands, or with its bore ``worn`` by a share (0.03 for 3 %)."""
    return rate(PlateSet(line, (plate,)), cases, criteria, worn)


def design_plate(
    cases: Cases, line: Line, construction: Construction | None = None, criteria: Criteria | None = None, *,
    governing: str | None = None,
) -> PlateDesign:  # fmt: skip
    """The plate whose net drop at the governing case's flow is p1 - p2, choked or not, and every case rated with it.

    Bore and thickness are worked out in turn until they agree, the bore is rounded to a drill, and all cases are
    marched through it. ``governing`` names the case to size for, else the one that needs the plate most open. A plate
    that cavitates, chokes or flashes is a finding: its rating says so.
    LowpointError where no bore passes the flow.
    """
    construction, criteria = construction or Construction(), criteria or Criteria()
    case, load = cases.governing(governing), load_on(construction, cases)
    bore, thickness, rounds = _size(cases, case, line.pipe, construction, load)

    def rated(size: float, served: Cases) -> Rating:
        return rate(construction.build(np.array([size]), load, line), served, criteria)

    rating = rated(_rounded(bore, cases, case, line.pipe, construction, criteria, rated), cases)
    return PlateDesign(rating, bore, thickness, rounds, cases, criteria, construction, case, load)


def _bore(cases: Cases, case: int, pipe: float, length: Any, holes: float) -> Any:
    liquid, one = cases.liquid, slice(case, case + 1)
    viscosity: Any = None if liquid.viscosity is None else liquid.viscosity[one]
    sharp: Any = None if length[0] == 0.0 else length
    bore = orifice_bore(
        cases.flow[one], cases.p1[one], cases.p2[one], np.array([pipe]), liquid.density[one], liquid.pv[one],
        liquid.pc[one], viscosity, sharp, np.array([holes]),
    )  # fmt: skip
    if np.isnan(bore).any():
        drop, flow = cases.p1[case] - cases.p2[case], told(cases.flow[case], "flow", cases.system)
        must = f"a bore must pass {flow} at a drop of {told(drop, 'pressure', cases.system)}"
        remedy = "Choose a larger pipe or a smaller drop; a smaller pipe where the bore would be a pinhole."
        raise LowpointError(
            f"case '{cases.names[case]}'", must, f"none in a pipe of {told(pipe, 'size', cases.system)}", remedy
        )
    return bore


def _size(cases: Cases, case: int, pipe: float, construction: Construction, load: float) -> tuple[float, float, int]:
    """Bore, thickness and rounds: a sharp edge first, then the thickness it needs, until the two agree."""
    thickness = np.array([np.nan])
    for rounds in range(1, MOST_ROUNDS + 1):
        length = construction.bore_length(thickness, pipe)
        bore = _bore(cases, case, pipe, length, construction.holes)
        thickness = settled(thickness, construction.thickness_for(bore, load), rounds)
        if abs(float(construction.bore_length(thickness, pipe)[0] - length[0])) <= AGREED * pipe:
            return float(bore[0]), float(thickness[0]), rounds
    raise LowpointError("plate", "bore and thickness must agree", f"none that do in {MOST_ROUNDS} rounds",
                        "Give the thickness, or bevel the plate.")  # fmt: skip


def _rounded(
    bore: float, cases: Cases, case: int, pipe: float, construction: Construction, criteria: Criteria,
    rated: Callable[[float, Cases], Rating],
) -> float:  # fmt: skip
    """The drill whose flow between the pressures is nearest to the wanted one and whose verdict is that of the bore."""
    if criteria.rounding == "none":
        return bore
    small, large = drill_choices(np.array([bore]), pipe, construction.holes, criteria)[:, 0].tolist()
    if criteria.rounding == "down" or small == large:
        return float(small)
    alone = replace(cases, held="both")
    verdict = rated(bore, alone).regime[0, case]

    def fault(size: float) -> tuple[bool, float]:
        rating = rated(size, alone)
        return bool(rating.regime[0, case] != verdict), abs(float(np.log(rating.passed[case] / cases.flow[case])))

    return min(small, large, key=fault)
