"""What the property tests of plates draw, and the loss of a plate written down once more in plain Python."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any

from hypothesis import strategies as st

from lowpoint import functions

__all__ = ["Plate", "Service", "fall", "loss", "plates", "services"]


@dataclass(frozen=True)
class Plate:
    """Sizes in mm."""

    bore: float
    pipe: float
    length: float | None = None
    holes: int = 1

    @property
    def open_share(self) -> float:
        return self.holes * (self.bore / self.pipe) ** 2

    @property
    def thin(self) -> Plate:
        return replace(self, length=None)

    def cells(self) -> dict[str, Any]:
        return {"bore": self.bore, "pipe": self.pipe, **self.rest()}

    def rest(self) -> dict[str, Any]:
        """All that is known before the bore is."""
        return {"bore_length": self.length, "holes": None if self.holes == 1 else self.holes}


@dataclass(frozen=True)
class Service:
    """Pressures in bar, density in kg/m3, viscosity in mPa.s."""

    p1: float
    p2: float
    pv: float
    pc: float
    density: float
    viscosity: float | None

    def cells(self) -> dict[str, Any]:
        return {"p1": self.p1, "p2": self.p2, "pv": self.pv, "pc": self.pc, **self.liquid()}

    def liquid(self) -> dict[str, Any]:
        return {"density": self.density, "viscosity": self.viscosity}

    @property
    def head(self) -> float:
        """p1 - FF pv."""
        return self.p1 - (0.96 - 0.28 * math.sqrt(self.pv / self.pc)) * self.pv


@st.composite
def plates(draw: st.DrawFn, thin: bool = False) -> Plate:
    """From a pinhole to hardly a plate, thin or thick, one hole or many."""
    pipe = draw(st.floats(20.0, 1200.0))
    holes = draw(st.one_of(st.just(1), st.integers(2, 200)))
    bore = pipe * draw(st.floats(0.02, 0.97)) / math.sqrt(holes)
    length = None if thin else draw(st.one_of(st.none(), st.floats(1e-4, 8.0)))
    return Plate(bore, pipe, None if length is None else length * bore, holes)


@st.composite
def services(draw: st.DrawFn) -> Service:
    """A liquid at the inlet, from far from choking to flashing, from turbulent to below the range of ISO 5167-2."""
    p1 = draw(st.floats(1.5, 200.0))
    pc = draw(st.floats(30.0, 220.64))
    pv = min(p1, pc) * draw(st.floats(1e-4, 0.9))
    viscosity = draw(st.one_of(st.none(), st.floats(0.1, 500.0)))
    return Service(p1, p1 * draw(st.floats(0.02, 0.999)), pv, pc, draw(st.floats(400.0, 1500.0)), viscosity)


def loss(plate: Plate, reynolds: float = 1e6) -> float:
    return functions["LP_ORIFICE_LOSS"](**plate.cells(), reynolds=reynolds)


def fall(plate: Plate, reynolds: float = 1e6) -> float:
    """Heads of the pipe's velocity from the pipe to the vena contracta, ``(1 + sqrt(K_thin))^2 - 1``."""
    return (1.0 + math.sqrt(loss(plate.thin, reynolds))) ** 2 - 1.0
