"""What flows: the liquid, and the operating cases that a plate, a set of plates or a valve with a plate must serve."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Annotated, Any, ClassVar

import numpy as np

from lowpoint import quantities as q
from lowpoint.design.checks import Inputs
from lowpoint.errors import LowpointError
from lowpoint.physics.sizing import critical_pressure_factor

__all__ = ["HELD", "Cases", "Liquid"]

GasPressure = Annotated[
    q.Floats,
    q.Quantity("gas_pressure", "pressure at which the liquid took up its dissolved gas, absolute", "pressure", low=0.0),
]
HELD = ("inlet", "outlet", "both")


@dataclass(frozen=True, eq=False)
class Liquid(Inputs):
    """A liquid; each field one number, or one a case (their temperatures differ). SI.

    ``density`` kg/m3, vapour pressure ``pv`` and critical pressure ``pc`` Pa absolute, ``viscosity`` Pa s (left out: a
    pipe Reynolds number of 1e6), ``gas_pressure`` Pa: where it took up its dissolved gas (left out: the atmosphere).

    >>> Liquid.in_units(density=998.2, pv=0.0234, pc=220.64, viscosity=1.0).pv
    array([2340.])
    """

    columns: ClassVar[bool] = True
    subject: ClassVar[str] = "liquid"

    density: q.Density
    pv: q.PV
    pc: q.PC
    viscosity: q.Viscosity | None = None
    gas_pressure: GasPressure | None = None
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._below("pv", self.pv, "pc", self.pc, "pressure", "Check that the two are not swapped.")

    def over(self, count: int) -> Liquid:
        """The same liquid with every field as long as the cases."""
        spread: dict[str, Any] = {
            f.name: None if getattr(self, f.name) is None else self._spread(f.name, count)
            for f in fields(self) if f.name != "system"
        }  # fmt: skip
        return Liquid(system=self.system, **spread)


@dataclass(frozen=True, eq=False)
class Cases(Inputs):
    """Operating cases: wanted ``flow`` (m3/s), pressures ``p1`` before and ``p2`` after everything (Pa absolute).

    ``held`` says what rules a case whose flow the plates do not need the whole drop for: ``inlet`` (p1 and the flow are
    held, something after the plates takes the rest), ``outlet`` (p2 and the flow are held, something before them does)
    or ``both`` (nothing else is in the line: the plates alone rule the flow, which may exceed the wanted one).
    A flow that the plates cannot pass is never assumed: then the flow is the one they pass from p1 to p2.

    Boiler blowdown of Kestrel Bay, two cases:

    >>> water = Liquid.in_units(density=[845, 832], pv=[13.8, 17.2], pc=220.64, viscosity=0.13)
    >>> Cases.in_units(flow=[6, 9], p1=[18.1, 22.3], p2=[15.0, 18.2], liquid=water, names=("normal", "maximum")).count
    2
    """

    columns: ClassVar[bool] = True
    subject: ClassVar[str] = "cases"

    flow: q.Flow
    p1: q.P1
    p2: q.P2
    liquid: Liquid
    names: tuple[str, ...] = ()
    held: str = "inlet"
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._word("held", HELD)
        count = max(len(self.names), *(len(getattr(self, name)) for name in ("flow", "p1", "p2")))
        for name in ("flow", "p1", "p2"):
            self._set(name, self._spread(name, count))
        self._set("names", self._named(count))
        self._set("liquid", self.liquid.over(count))
        self._below("p2", self.p2, "p1", self.p1, "pressure", "Check that the two are not swapped.")
        boils = "The liquid would boil before the plates: check temperature and pressure, and gauge against absolute."
        self._below("pv", self.liquid.pv, "p1", self.p1, "pressure", boils)

    def _named(self, count: int) -> tuple[str, ...]:
        names = tuple(str(name) for name in self.names) or tuple(f"case {i + 1}" for i in range(count))
        if len(names) != count or len(set(names)) != count:
            raise LowpointError(self.subject, f"names must be {count} different names, one a case", ", ".join(names))
        return names

    def _where(self, row: int, rows: int) -> str:
        return f"case '{self.names[row]}'" if row < len(self.names) else f"case {row + 1}"

    @property
    def count(self) -> int:
        return len(self.flow)

    @property
    def critical_floor(self) -> Any:
        """Pressure in the vena contracta of a choked flow, ``FF pv``."""
        return critical_pressure_factor(self.liquid.pv, self.liquid.pc) * self.liquid.pv

    def dynamic(self, pipe: float) -> Any:
        """Dynamic pressure of the wanted flow in a pipe, ``rho v^2/2``."""
        return 0.5 * self.liquid.density * (self.flow / (0.25 * np.pi * pipe * pipe)) ** 2

    def reynolds(self, flow: Any, pipe: float) -> Any:
        """Pipe Reynolds number, ``4 Q rho/(pi D mu)``; None where no viscosity is given."""
        if self.liquid.viscosity is None:
            return None
        return 4.0 * flow * self.liquid.density / (np.pi * pipe * self.liquid.viscosity)

    def governing(self, name: str | None) -> int:
        """The case of this name, or the one that the plates must be most open for (least ``(p1-p2)/(rho Q^2)``)."""
        if name is None:
            return int(np.argmin((self.p1 - self.p2) / (self.liquid.density * self.flow**2)))
        if name not in self.names:
            raise LowpointError(self.subject, f"the governing case must be one of {', '.join(self.names)}", repr(name))
        return self.names.index(name)
