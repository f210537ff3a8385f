"""Plates worked out a second way, from typed inputs alone: nothing of the package under test is imported here.

The discharge coefficient is that of the library fluids (ISO 5167-2), water is IAPWS-IF97 and brine IAPWS-08 by the
library iapws; bores and flows are found by bisection. Pressures bar, sizes mm, flow m3/h, kg/m3, deg C.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from fluids.flow_meter import C_Reader_Harris_Gallagher
from iapws import IAPWS97

from book.independent import bisect, state

REYNOLDS = 1e6  # taken throughout, as the sheets say


@dataclass(frozen=True)
class Line:
    """A pipe with plates whose bores are ``edge`` long, and the liquid in it."""

    pipe: float
    edge: float
    rho: float
    pv: float
    pc: float

    @classmethod
    def of(cls, t: float, p1: float, salinity: float | None, pipe: float, edge: float) -> Line:
        found = state(t, p1, salinity)
        return cls(pipe, edge, found["rho"], found["pv"], found["pc"])

    @property
    def floor(self) -> float:
        """FF pv, IEC 60534-2-1."""
        return (0.96 - 0.28 * math.sqrt(self.pv / self.pc)) * self.pv

    def head(self, flow: float) -> float:
        """rho v^2/2 in the pipe, bar."""
        velocity = flow / 3600.0 / (math.pi / 4.0 * (self.pipe / 1000.0) ** 2)
        return 0.5e-5 * self.rho * velocity**2

    def coefficient(self, bore: float, taps: str = "corner") -> float:
        """C of ISO 5167-2 by the library fluids, at a mass flow with the Reynolds number that is taken."""
        d, mu = self.pipe / 1000.0, 1e-3
        mass = REYNOLDS * math.pi / 4.0 * d * mu
        return float(C_Reader_Harris_Gallagher(d, bore / 1000.0, self.rho, mu, mass, taps))

    def thin(self, bore: float) -> float:
        """Net loss over rho v^2/2 from C and beta (ISO 5167-2, pressure loss)."""
        c, b2 = self.coefficient(bore), (bore / self.pipe) ** 2
        return (math.sqrt(1.0 - b2 * b2 * (1.0 - c * c)) / (c * b2) - 1.0) ** 2

    def loss(self, bore: float) -> float:
        """The thin plate's loss times Idelchik's factor for the length of the bore (closed form from memory)."""

        def kt(length: float) -> float:
            phi = 0.25 + 0.535 * length**8 / (0.05 + length**7)
            closed = 1.0 - (bore / self.pipe) ** 2
            tau = (2.4 - length) * 10.0**-phi
            return 0.5 * closed**0.75 + tau * closed**1.375 + closed**2 + 0.02 * length

        return self.thin(bore) * kt(self.edge / bore) / kt(0.0)

    def fall(self, bore: float) -> float:
        """Fall to the vena contracta over rho v^2/2, Bernoulli; contraction from the sudden expansion after it."""
        return (1.0 + math.sqrt(self.thin(bore))) ** 2 - 1.0

    def fl(self, bore: float) -> float:
        return math.sqrt(self.loss(bore) / self.fall(bore))

    def bore(self, flow: float, p1: float, p2: float) -> float:
        """The bore whose net drop at the flow is p1 - p2, or the drop at which it chokes."""

        def short(bore: float) -> float:
            drop = min(p1 - p2, self.fl(bore) ** 2 * (p1 - self.floor))
            return drop - self.loss(bore) * self.head(flow)

        return bisect(short, 0.1 * self.pipe, 0.75 * self.pipe)

    def tap_drop(self, flow: float, bore: float) -> float:
        """Between flange taps: Q = C A sqrt(2 dp/(rho (1 - beta^4)))."""
        area = math.pi / 4.0 * (bore / 1000.0) ** 2
        speed = flow / 3600.0 / (self.coefficient(bore, "flange") * area)
        return 0.5e-5 * self.rho * speed**2 * (1.0 - (bore / self.pipe) ** 4)

    def before(self, flow: float, bores: Sequence[float], p2: float) -> list[float]:
        """Pressures before each plate that a flow needs, from the last plate backwards; a choked one holds its own."""
        found = [p2]
        for bore in reversed(bores):
            free, choked = (found[0] + self.loss(bore) * self.head(flow),
                            self.floor + self.fall(bore) * self.head(flow))  # fmt: skip
            found.insert(0, max(free, choked))
        return found

    def passed(self, bores: Sequence[float], p1: float, p2: float) -> float:
        """The flow at which the march backwards ends at p1."""
        return bisect(lambda flow: self.before(flow, bores, p2)[0] - p1, 1e-3, 1e3)


def staged(p1: float, p2: float, pv: float, target: float) -> tuple[int, list[float]]:
    """Fewest stages of one index that is at least the target, by trial; pressures between them."""
    count = 1
    while 1.0 / (1.0 - ((p2 - pv) / (p1 - pv)) ** (1.0 / count)) < target:
        count += 1
    ratio = ((p2 - pv) / (p1 - pv)) ** (1.0 / count)
    return count, [pv + (p1 - pv) * ratio**i for i in range(count + 1)]


def constant_limit(line: Line, bore: float) -> float:
    """Kuroda, Fukuda and Cho 1978, taken in downstream form, carried upstream (+1); size effect above 100 mm."""
    beta, k = bore / line.pipe, line.thin(bore)
    s0 = 1.0 / (1.0 + math.sqrt(k))
    downstream = max(3.3 * beta, 2.0 / math.sqrt(k) + 0.9 / (1.0 - s0) ** 2)
    return 1.0 + downstream * max(line.pipe / 100.0, 1.0) ** (0.3 * k**-0.25)


def thickness(load: float, support: float, bore: float, stress: float) -> float:
    """t = a sqrt(6 M/(stress a^2)), M the moment at the free bore of a plate on a simple support, nu 0.3.

    Slope phi = -q r^3/16D + q b^2 (2 r ln r - r)/8D + A r + B/r (classical plate theory); A and B from no radial moment
    at bore and rim, by two linear equations. Bar, mm, MPa.
    """
    nu, a, b = 0.3, 0.5 * support, 0.5 * bore

    def moments(r: float) -> Any:
        """(phi/r, dphi/dr) of the particular slope, of A r and of B/r."""
        particular = -(r**2) / 16.0 + b**2 * (2.0 * math.log(r / a) - 1.0) / 8.0
        derived = -3.0 * r**2 / 16.0 + b**2 * (2.0 * math.log(r / a) + 1.0) / 8.0
        return np.array([[particular, 1.0, r**-2], [derived, 1.0, -(r**-2)]])

    radial = np.array([moments(r)[1] + nu * moments(r)[0] for r in (a, b)])
    constants = np.linalg.solve(radial[:, 1:], -radial[:, 0])
    turn, derived = moments(b) @ np.array([1.0, *constants])
    moment = abs(turn + nu * derived) * 0.1 * load  # N/mm2 mm2
    return math.sqrt(6.0 * moment / stress)


def vapour(t: float, p1: float, p2: float) -> float:
    """Share of vapour after an isenthalpic drop, water, IAPWS-IF97."""
    inlet = IAPWS97(T=t + 273.15, P=p1 / 10.0).h
    liquid, steam = (IAPWS97(P=p2 / 10.0, x=x).h for x in (0.0, 1.0))
    return float((inlet - liquid) / (steam - liquid))
