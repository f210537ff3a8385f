"""The equations of plates in plain floats, one plate at a time, written from the publications and not from the package.

Sources: Reader-Harris/Gallagher coefficient, ISO 5167-2:2003 (5.3.2.1), checked against the library fluids in
``test_hand_calculation``; pressure loss, ISO 5167-2 (5.4); thick plates, Idelchik diagram 4-15 (form read, tau from
memory); vena contracta, Bernoulli and momentum (derived); limits, Kuroda et al. 1978 (abstract, form assumed) with the
size exponent 0.3 K^-0.25 (from memory); annular plate, Timoshenko and Woinowsky-Krieger; FF, IEC 60534-2-1.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True)
class Water:
    density: float = 998.2
    pv: float = 2339.32
    pc: float = 22.064e6
    viscosity: float = 1.0016e-3

    @property
    def critical_floor(self) -> float:
        """FF pv."""
        return (0.96 - 0.28 * math.sqrt(self.pv / self.pc)) * self.pv


def bisect(f: Callable[[float], float], low: float, high: float) -> float:
    """Where a rising function crosses zero."""
    for _ in range(90):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if f(middle) < 0.0 else (low, middle)
    return 0.5 * (low + high)


def velocity(flow: float, pipe: float) -> float:
    return flow / (math.pi / 4.0 * pipe**2)


def reynolds(flow: float, pipe: float, liquid: Water) -> float:
    return liquid.density * velocity(flow, pipe) * pipe / liquid.viscosity


def discharge(beta: float, pipe: float, re: float) -> float:
    """Corner taps: L1 = L2' = 0."""
    a = (19000.0 * beta / re) ** 0.8
    c = 0.5961 + 0.0261 * beta**2 - 0.216 * beta**8 + 0.000521 * (1e6 * beta / re) ** 0.7
    c += (0.0188 + 0.0063 * a) * beta**3.5 * (1e6 / re) ** 0.3
    return c + (0.011 * (0.75 - beta) * (2.8 - pipe / 0.0254) if pipe < 0.07112 else 0.0)


def k_iso(beta: float, c: float) -> float:
    return (math.sqrt(1.0 - beta**4 * (1.0 - c**2)) / (c * beta**2) - 1.0) ** 2


def k_thick(f: float, t_over_d: float) -> float:
    """Idelchik, diagram 4-15, friction factor 0.02."""
    power = 0.25 + 0.535 * t_over_d**8 / (0.05 + t_over_d**7)
    tau = (2.4 - t_over_d) * 10.0**-power if t_over_d < 2.4 else 0.0
    return (0.5 * (1 - f) ** 0.75 + tau * (1 - f) ** 1.375 + (1 - f) ** 2 + 0.02 * t_over_d) / f**2


@dataclass(frozen=True)
class PlainPlate:
    """One plate with one hole inside the range of ISO 5167-2, at a pipe Reynolds number."""

    bore: float
    pipe: float
    length: float
    re: float

    @property
    def beta(self) -> float:
        return self.bore / self.pipe

    @property
    def k_thin(self) -> float:
        return k_iso(self.beta, discharge(self.beta, self.pipe, self.re))

    @property
    def k(self) -> float:
        f, ratio = self.beta**2, self.length / self.bore
        return self.k_thin * k_thick(f, ratio) / k_thick(f, 0.0)

    @property
    def throat(self) -> float:
        """Vena contracta over the pipe's area, from the loss of the thin plate: K = (1/s - 1)^2."""
        return 1.0 / (1.0 + math.sqrt(self.k_thin))

    @property
    def fall(self) -> float:
        """Pressure from pipe to vena contracta, in dynamic pressures of the pipe (Bernoulli)."""
        return 1.0 / self.throat**2 - 1.0

    @property
    def fl2(self) -> float:
        return self.k / self.fall

    def turbulent(self) -> PlainPlate:
        """At the Reynolds number of 1e6, for which limits are stated."""
        return PlainPlate(self.bore, self.pipe, self.length, 1e6)

    def limit(self, kind: str) -> float:
        """Incipient or constant, upstream form."""
        at = self.turbulent()
        incipient = max(1.2, 4.5 * self.beta + 0.5)
        constant = max(3.3 * self.beta, 2.0 / math.sqrt(at.k_thin) + 0.9 / (1.0 - at.throat) ** 2)
        downstream = incipient if kind == "incipient" else min(constant, incipient)
        downstream *= max(self.pipe / 0.1, 1.0) ** (0.3 * at.k_thin**-0.25)
        return 1.0 + max(downstream, 1.0 / at.fl2 - 1.0)


def thickness(load: float, support: float, bore: float, stress: float) -> float:
    """Simply supported rim, free bore, Poisson's ratio 0.3."""
    a, b, nu = support / 2.0, bore / 2.0, 0.3
    k = 3.0 / (4.0 * (a**2 - b**2) * a**2)
    k *= (3 + nu) * a**4 + (1 - nu) * b**4 - 4 * a**2 * b**2 - 4 * (1 + nu) * a**2 * b**2 * math.log(a / b)
    return a * math.sqrt(k * load / stress)
