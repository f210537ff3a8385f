"""The sizing equations of IEC 60534-2-1 written down once more in plain Python, as the standard prints them.

Kv, m3/h, kPa, mm, m2/s, with the constants of its table (as reproduced by the library fluids). Nothing of the package
is used here: the property tests compare with this reading.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

N1, N2, N4, N18, N32 = 0.1, 1.6e-3, 7.07e-2, 0.865, 140.0
RHO0 = 999.1


@dataclass(frozen=True)
class Service:
    """One operating case: pressures in kPa, density in kg/m3."""

    p1: float
    p2: float
    pv: float
    pc: float
    density: float

    @property
    def dp(self) -> float:
        return self.p1 - self.p2

    @property
    def relative_density(self) -> float:
        return self.density / RHO0

    def cells(self) -> dict[str, float]:
        """As cells give it: pressures in bar."""
        return {
            "p1": self.p1 / 100.0,
            "p2": self.p2 / 100.0,
            "pv": self.pv / 100.0,
            "pc": self.pc / 100.0,
            "density": self.density,
        }


@dataclass(frozen=True)
class Piping:
    """Nominal size and inside diameters of the pipes, mm; None for line size."""

    d: float | None = None
    D1: float | None = None
    D2: float | None = None

    def losses(self) -> tuple[float, float]:
        """``sumK`` and ``K1 + KB1``."""
        if self.d is None or self.D1 is None or self.D2 is None:
            return 0.0, 0.0
        k1 = 0.5 * (1 - (self.d / self.D1) ** 2) ** 2
        k2 = (1 - (self.d / self.D2) ** 2) ** 2
        kb1, kb2 = 1 - (self.d / self.D1) ** 4, 1 - (self.d / self.D2) ** 4
        return k1 + k2 + kb1 - kb2, k1 + kb1

    def c(self, coefficient: float) -> float:
        return 0.0 if self.d is None else (coefficient / self.d**2) ** 2 / N2

    def bracket(self, coefficient: float) -> float:
        return 1 + self.losses()[0] * self.c(coefficient)

    def cells(self) -> dict[str, float]:
        if self.d is None or self.D1 is None or self.D2 is None:
            return {}
        return {"valve_size": self.d, "pipe_in": self.D1, "pipe_out": self.D2}


def FP(coefficient: float, piping: Piping) -> float:
    return 1 / math.sqrt(piping.bracket(coefficient))


def FLP(fl: float, coefficient: float, piping: Piping) -> float:
    return fl / math.sqrt(1 + fl**2 * piping.losses()[1] * piping.c(coefficient))


def FF(service: Service) -> float:
    return 0.96 - 0.28 * math.sqrt(service.pv / service.pc)


def dp_choked(fl: float, coefficient: float, service: Service, piping: Piping) -> float:
    share = (FLP(fl, coefficient, piping) / FP(coefficient, piping)) ** 2
    return share * (service.p1 - FF(service) * service.pv)


def flow(coefficient: float, fl: float, service: Service, piping: Piping) -> float:
    """``Q = C N1 FP sqrt(min(dp, dp_choked)/(rho/rho0))``."""
    dp = min(service.dp, dp_choked(fl, coefficient, service, piping))
    return coefficient * N1 * FP(coefficient, piping) * math.sqrt(dp / service.relative_density)


# --- non-turbulent ---------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Slow:
    """What the non-turbulent branch knows of a valve and its liquid; nu in m2/s."""

    fl: float
    fd: float
    d: float
    D: float
    nu: float
    reduced: bool

    def rev(self, q: float, coefficient: float) -> float:
        wide = self.fl**2 * coefficient**2 / (N2 * self.D**4) + 1
        return N4 * self.fd * q / (self.nu * math.sqrt(coefficient * self.fl)) * wide**0.25

    def factor(self, q: float, coefficient: float) -> float:
        rev = self.rev(q, coefficient)
        relative = coefficient / self.d**2
        n = 1 + N32 * relative ** (2 / 3) if self.reduced else N2 / relative**2
        laminar = 0.026 / self.fl * math.sqrt(n * rev)
        if rev < 10:
            return min(laminar, 1.0)
        return min(1 + 0.33 * math.sqrt(self.fl) / n**0.25 * math.log10(rev / 10000), laminar, 1.0)
