"""What is built: the line, the plates in it, and how plates are made."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Annotated, Any, ClassVar

import numpy as np

from lowpoint import quantities as q
from lowpoint.design.checks import Inputs, of, told
from lowpoint.errors import LowpointError
from lowpoint.physics.plate_strength import plate_thickness

__all__ = ["CLEAR_OF_EACH_OTHER", "Construction", "Line", "Plate", "PlateSet"]

CLEAR_OF_EACH_OTHER = 6.0
"""Pipe diameters between two plates from which their losses add up (common practice)."""
LONGEST_EDGE = 0.02
"""Cylindrical part of the bore over the pipe up to which ISO 5167-2 calls a plate thin (from memory)."""
NO_THICKNESS = (
    "Use a stronger material, a smaller support diameter or a clamped rim, or give the thickness that a finer "
    "calculation finds."
)

Bore = Annotated[float, of(q.OrificeBore)]
BoreLength = Annotated[float, of(q.BoreLength)]
Holes = Annotated[float, of(q.Holes)]
Pipe = Annotated[float, of(q.Pipe)]
Stress = Annotated[float, of(q.Stress)]
SupportDiameter = Annotated[float, of(q.SupportDiameter)]
Allowance = Annotated[float, of(q.Allowance)]
Differential = Annotated[float, of(q.PlateDrop)]
Edge = Annotated[float, q.Quantity("edge", "cylindrical part of a bevelled bore", "size", low=0.0)]
Thickness = Annotated[float, q.Quantity("thickness", "thickness of the plate", "size", low=0.0)]
Spacing = Annotated[float, q.Quantity("spacing", "distance from plate to plate", "size", low=0.0)]
Step = Annotated[float, q.Quantity("step", "steps in which thicknesses come", "size", low=0.0, closed_low=True)]
Ligament = Annotated[
    float,
    q.Quantity("ligament", "ligament efficiency, what many holes leave of the strength", "ratio", low=0.0, high=1.0,
               closed_high=True),
]  # fmt: skip


def _whole(subject: str, holes: float) -> None:
    if holes != math.floor(holes):
        raise LowpointError(subject, "holes must be a whole number", f"{holes:g}")


@dataclass(frozen=True)
class Line(Inputs):
    """The pipe that plates stand in, SI: inside diameter ``pipe`` (m), ``spacing`` from plate to plate (m).

    ``spacing`` left out is six pipe diameters. ``free_discharge``: the last plate blows into the open or a tank.

    >>> Line.in_units(pipe=102.3).apart
    0.6138
    """

    subject: ClassVar[str] = "line"

    pipe: Pipe
    spacing: Spacing | None = None
    free_discharge: bool = False
    system: str = "metric"

    @property
    def apart(self) -> float:
        """Distance from plate to plate, m."""
        return CLEAR_OF_EACH_OTHER * self.pipe if self.spacing is None else self.spacing


@dataclass(frozen=True)
class Plate(Inputs):
    """One plate as built, SI (m): ``bore`` of each hole, ``bore_length`` (left out: a thin sharp edge), ``holes``.

    ``bore_length`` is the parallel part of the bore: the thickness of a plain plate, less where it is bevelled.
    """

    subject: ClassVar[str] = "plate"

    bore: Bore
    bore_length: BoreLength | None = None
    holes: Holes = 1.0
    thickness: Thickness | None = None
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        _whole(self.subject, self.holes)


@dataclass(frozen=True)
class PlateSet:
    """Plates one after another in a line, first to last."""

    line: Line
    plates: tuple[Plate, ...]

    def __post_init__(self) -> None:
        object.__setattr__(self, "plates", tuple(self.plates))
        if not self.plates:
            raise LowpointError("plate set", "there must be at least one plate", "none")
        for number, plate in enumerate(self.plates, 1):
            self._inside(number, plate)

    def _inside(self, number: int, plate: Plate) -> None:
        widest = self.pipe / math.sqrt(plate.holes)
        if not plate.bore < widest:
            over = "" if plate.holes == 1.0 else f" over the root of {plate.holes:g} holes"
            must = f"bore must be below the pipe's inside diameter{over} = {told(widest, 'size', plate.system)}"
            remedy = "Check that bore and pipe are not swapped, and the wear."
            raise LowpointError(f"plate {number}", must, told(plate.bore, "size", plate.system), remedy)

    @property
    def pipe(self) -> float:
        return self.line.pipe

    @property
    def count(self) -> int:
        return len(self.plates)

    def column(self, name: str) -> Any:
        """One field of all plates, NaN where it is left out."""
        return np.array([np.nan if getattr(p, name) is None else getattr(p, name) for p in self.plates])

    def worn(self, share: float) -> PlateSet:
        """The same set with every bore larger by this share: 0.03 for 3 %."""
        if not -0.5 < share < 1.0:
            must = "wear must be a share of the bore between -0.5 and 1 (0.03 for 3 %)"
            raise LowpointError("plate set", must, f"{share:g}")
        return PlateSet(self.line, tuple(replace(p, bore=p.bore * (1.0 + share)) for p in self.plates))


@dataclass(frozen=True)
class Construction(Inputs):
    """How plates are made, SI. One of: ``thickness`` (m) given, or found from strength, or neither: a thin sharp edge.

    Strength: allowable ``stress`` (Pa), ``support_diameter`` (m, gasket mean), ``support`` (``simple``, the safe
    choice, or ``clamped``), ``allowance`` (m, wear and corrosion), ``ligament`` efficiency where ``holes`` are many,
    ``differential`` (Pa): start-up or shut-in where that is more than p1 - p2 of any case, the load of a blocked
    plate, which is always taken. Thicknesses are rounded up to ``step`` (m; 1 mm unless given, 0 for any).
    ``bevelled`` downstream, the bore's parallel part is only ``edge`` long (m, 0.02 pipe unless given).
    """

    subject: ClassVar[str] = "construction"

    stress: Stress | None = None
    support_diameter: SupportDiameter | None = None
    support: str = "simple"
    allowance: Allowance = 0.0
    ligament: Ligament = 1.0
    differential: Differential | None = None
    thickness: Thickness | None = None
    step: Step = 1e-3
    bevelled: bool = False
    edge: Edge | None = None
    holes: Holes = 1.0
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._word("support", ("simple", "clamped"))
        _whole(self.subject, self.holes)
        for given, needed in (("stress", "support_diameter"), ("support_diameter", "stress")):
            if getattr(self, given) is not None and getattr(self, needed) is None:
                raise LowpointError(self.subject, f"{needed} must be given where {given} is", "nothing")
        if self.edge is not None and not self.bevelled:
            raise LowpointError(self.subject, "edge must be left out of a plate that is not bevelled",
                                told(self.edge, "size", self.system), "Set bevelled, or leave edge out.")  # fmt: skip
        if self.bevelled and self.thickness is None and self.stress is None:
            must = "thickness, or stress and support_diameter, must be given where bevelled is"
            raise LowpointError(self.subject, must, "nothing")

    def needed_thickness(self, bore: Any, load: float) -> Any:
        """Thickness that strength asks for, rounded up to the step, at bores (any shape); NaN where none is asked for.

        LowpointError where no plate that thin-plate theory covers carries the load.
        """
        bore = np.asarray(bore)
        found = self._strong_enough(bore, load)
        if self.stress is not None and self.support_diameter is not None and np.isnan(found).any():
            self._refuse(float(bore[np.isnan(found)].flat[0]), load, self.support_diameter, self.stress * self.ligament)
        return found

    def _strong_enough(self, bore: Any, load: float) -> Any:
        """As :meth:`needed_thickness`, NaN where no plate carries the load."""
        if self.stress is None:
            return np.full(bore.shape, np.nan)
        values = (load, self.support_diameter, self.stress * self.ligament, self.allowance)
        drop, support, stress, allowance = (np.full(bore.shape, value, np.float64) for value in values)
        found = plate_thickness(drop, support, bore, stress, self.support, allowance)
        # A thickness that is a whole step but for a rounding is that step.
        return found if self.step == 0.0 else np.ceil(found / self.step - 1e-9) * self.step

    def _refuse(self, bore: float, load: float, support: float, stress: float) -> None:
        size, rim = told(bore, "size", self.system), told(support, "size", self.system)
        if bore >= support:
            raise LowpointError(self.subject, f"support_diameter must be above the bore = {size}", rim)
        must = f"a plate with a bore of {size} must carry {told(load, 'pressure', self.system)} at a thickness of at "
        must += "most half its support diameter"
        got = f"none on {rim} at {told(stress, 'stress', self.system)}"
        raise LowpointError(self.subject, must, got, NO_THICKNESS)

    def thickness_for(self, bore: Any, load: float) -> Any:
        """Thickness as made: the one given, else the one needed, else NaN."""
        if self.thickness is not None:
            return np.full(np.shape(bore), self.thickness)
        return self.needed_thickness(bore, load)

    def likely_length(self, bore: Any, load: float, pipe: float) -> Any:
        """Bore length of plates made for a load; 0 where no plate carries it."""
        given = self.thickness is not None
        thickness = np.full(bore.shape, self.thickness) if given else self._strong_enough(bore, load)
        return self.bore_length(thickness, pipe)

    def bore_length(self, thickness: Any, pipe: float) -> Any:
        """Parallel part of the bore of plates of this thickness; 0, a sharp edge, where no thickness is known."""
        thickness = np.nan_to_num(np.asarray(thickness))
        if not self.bevelled:
            return thickness
        return np.minimum(thickness, LONGEST_EDGE * pipe if self.edge is None else self.edge)

    def build(self, bores: Any, load: float, line: Line) -> PlateSet:
        """Plates of these bores, made for a load."""
        thickness = self.thickness_for(bores, load)
        lengths = self.bore_length(thickness, line.pipe)
        plates = []
        for bore, length, thick in zip(bores.tolist(), lengths.tolist(), thickness.tolist(), strict=True):
            plates.append(Plate(bore, length or None, self.holes, None if np.isnan(thick) else thick, self.system))
        return PlateSet(line, tuple(plates))
