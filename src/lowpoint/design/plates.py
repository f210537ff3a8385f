"""What is built: one plate, a set of plates in a pipe, and how thick a plate must be made."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Annotated, Any, ClassVar

import numpy as np

from lowpoint import quantities as q
from lowpoint.design.checks import Inputs, told
from lowpoint.errors import LowpointError
from lowpoint.physics.plate_strength import plate_thickness

__all__ = ["CLEAR_OF_EACH_OTHER", "Construction", "Plate", "PlateSet"]

CLEAR_OF_EACH_OTHER = 6.0
"""Pipe diameters between two plates from which their losses add up (common practice)."""
LONGEST_EDGE = 0.02
"""Cylindrical part of the bore over the pipe up to which ISO 5167-2 calls a plate thin (from memory)."""
NO_THICKNESS = (
    "Use a stronger material, a smaller support diameter or a clamped rim, or give the thickness that a finer "
    "calculation finds."
)

_SIZE = {"dimension": "size", "low": 0.0}
Edge = Annotated[q.Floats, q.Quantity("edge", "cylindrical part of a bevelled bore", **_SIZE)]
Thickness = Annotated[q.Floats, q.Quantity("thickness", "thickness of the plate", **_SIZE)]
Spacing = Annotated[q.Floats, q.Quantity("spacing", "distance from plate to plate", **_SIZE)]
Step = Annotated[
    q.Floats, q.Quantity("step", "steps in which thicknesses come, 0 for any", "size", low=0.0, closed_low=True)
]
Ligament = Annotated[
    q.Floats,
    q.Quantity(
        "ligament", "ligament efficiency, what many holes leave of the strength", "ratio", low=0.0, high=1.0,
        closed_high=True,
    ),
]  # fmt: skip


@dataclass(frozen=True)
class Plate(Inputs):
    """One plate as built, SI (m): ``bore`` of each hole, ``bore_length`` (left out: a thin sharp edge), ``holes``.

    ``bore_length`` is the parallel part of the bore: the thickness of a plain plate, less where it is bevelled.
    """

    subject: ClassVar[str] = "plate"

    bore: q.OrificeBore
    bore_length: q.BoreLength | None = None
    holes: q.Holes = 1.0  # type: ignore[assignment]
    thickness: Thickness | None = None
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        if self.holes != np.floor(self.holes):
            raise LowpointError(self.subject, "holes must be a whole number", f"{self.holes:g}")


@dataclass(frozen=True)
class PlateSet(Inputs):
    """Plates one after another in a pipe, first to last, SI (m): inside diameter ``pipe``, ``spacing`` plate to plate.

    ``spacing`` left out is six pipe diameters. ``free_discharge``: the last plate blows into the open or a tank.
    """

    subject: ClassVar[str] = "plate set"

    pipe: q.Pipe
    plates: tuple[Plate, ...]
    spacing: Spacing | None = None
    free_discharge: bool = False
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._set("plates", tuple(self.plates))
        if not self.plates:
            raise LowpointError(self.subject, "there must be at least one plate", "none")
        for number, plate in enumerate(self.plates, 1):
            self._inside(number, plate)

    def _inside(self, number: int, plate: Plate) -> None:
        widest = self.pipe / float(np.sqrt(plate.holes))
        if not plate.bore < widest:
            holes = "" if plate.holes == 1.0 else f" over the root of {plate.holes:g} holes"
            limit = f"bore must be below the pipe's inside diameter{holes}, {told(widest, 'size', self.system)}"
            remedy = "Check that bore and pipe are not swapped, and the worn bore."
            raise LowpointError(f"plate {number}", limit, told(plate.bore, "size", self.system), remedy)

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
            raise LowpointError(self.subject, must, f"{share:g}")
        plates = [Plate(p.bore * (1.0 + share), p.bore_length, p.holes, p.thickness, p.system) for p in self.plates]
        return PlateSet(self.pipe, tuple(plates), self.spacing, self.free_discharge, self.system)


@dataclass(frozen=True)
class Construction(Inputs):
    """How plates are made, SI. One of: ``thickness`` (m) given, or found from strength, or neither: a thin sharp edge.

    Strength: allowable ``stress`` (Pa), ``support_diameter`` (m, gasket mean), ``support`` (``simple``, the safe
    choice, or ``clamped``), ``allowance`` (m, wear and corrosion), ``ligament`` efficiency of many holes,
    ``differential`` (Pa): the largest of start-up and shut-in where that is more than p1 - p2 of any case, the load of a
    blocked plate, which is always taken. Thicknesses are rounded up to ``step`` (m, 1 mm unless given; 0: not rounded).
    ``bevelled`` downstream, the bore's parallel part is only ``edge`` long (m, 0.02 pipe unless given).
    """

    subject: ClassVar[str] = "construction"

    stress: q.Stress | None = None
    support_diameter: q.SupportDiameter | None = None
    support: str = "simple"
    allowance: q.Allowance = 0.0  # type: ignore[assignment]
    ligament: Ligament = 1.0  # type: ignore[assignment]
    differential: q.PlateDrop | None = None
    thickness: Thickness | None = None
    step: Step = 1e-3  # type: ignore[assignment]
    bevelled: bool = False
    edge: Edge | None = None
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._word("support", ("simple", "clamped"))
        for given, needed in (("stress", "support_diameter"), ("support_diameter", "stress")):
            if getattr(self, given) is not None and getattr(self, needed) is None:
                raise LowpointError(self.subject, f"{needed} must be given where {given} is", "nothing")
        if self.edge is not None and not self.bevelled:
            raise LowpointError(self.subject, "edge must be left out of a plate that is not bevelled",
                                told(self.edge, "size", self.system), "Set bevelled, or leave edge out.")  # fmt: skip
        if self.bevelled and self.thickness is None and self.stress is None:
            raise LowpointError(self.subject, "thickness, or stress and support_diameter, must be given where bevelled "
                                "is", "nothing")  # fmt: skip

    def needed_thickness(self, bore: Any, load: float) -> Any:
        """Thickness that strength asks for, rounded up to the step, at bores (any shape); NaN where none is asked for.

        LowpointError where no plate that thin-plate theory covers carries the load.
        """
        bore = np.asarray(bore)
        if self.stress is None:
            return np.full(bore.shape, np.nan)
        drop, support, stress = (np.full(bore.shape, x) for x in (load, self.support_diameter, self._allowable()))
        found = plate_thickness(drop, support, bore, stress, self.support, self.allowance)
        if np.isnan(found).any():
            self._refuse(float(bore[np.isnan(found)].flat[0]), load)
        # A thickness that is a whole step but for a rounding is that step.
        return found if self.step == 0.0 else np.ceil(found / self.step - 1e-9) * self.step

    def _allowable(self) -> float:
        return float(self.stress * self.ligament)  # type: ignore[operator]

    def _refuse(self, bore: float, load: float) -> None:
        size, support = told(bore, "size", self.system), told(self.support_diameter, "size", self.system)  # type: ignore[arg-type]
        if bore >= self.support_diameter:  # type: ignore[operator]
            raise LowpointError(self.subject, f"support_diameter must be above the bore, {size}", support)
        must = f"a plate with a bore of {size} must carry {told(load, 'pressure', self.system)} at a thickness below "
        must += "half its support diameter"
        raise LowpointError(self.subject, must, f"none on {support} at {told(self._allowable(), 'stress', self.system)}",
                            NO_THICKNESS)  # fmt: skip

    def thickness_for(self, bore: Any, load: float) -> Any:
        """Thickness as made: the one given, else the one needed, else NaN."""
        if self.thickness is not None:
            return np.full(np.shape(bore), self.thickness)
        return self.needed_thickness(bore, load)

    def bore_length(self, thickness: Any, pipe: float) -> Any:
        """Parallel part of the bore of plates of this thickness; 0, a sharp edge, where no thickness is known."""
        thickness = np.nan_to_num(np.asarray(thickness))
        if not self.bevelled:
            return thickness
        return np.minimum(thickness, LONGEST_EDGE * pipe if self.edge is None else self.edge)

    def build(self, bores: Sequence[float], thickness: Any, pipe: float, holes: float) -> tuple[Plate, ...]:
        """The plates of these bores and thicknesses."""
        lengths = self.bore_length(thickness, pipe)
        return tuple(
            Plate(bore, length or None, holes, None if np.isnan(thick) else thick, self.system)  # type: ignore[arg-type]
            for bore, length, thick in zip(bores, lengths, thickness, strict=True)
        )
