"""A vendor's sums, written plainly for the tests: sizing by bisection on the standard's equations, with or without a
mistake. Nothing of the package is used for a number; only ``math``.

Kv, m3/h, bar absolute, mm, kg/m3, deg C. Equations of IEC 60534-2-1 and 60534-2-4; water by IAPWS-IF97 region 4
(saturation) and Kell (1975, density at one atmosphere), both with coefficients from memory.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace

__all__ = ["MISTAKES", "Case", "Claims", "saturation", "sums", "water_density"]

ATMOSPHERE = 1.01325


def saturation(t: float) -> float:
    """Saturation pressure of water, bar (IAPWS-IF97, equation 30)."""
    n = (
        0.11670521452767e4, -0.72421316703206e6, -0.17073846940092e2, 0.12020824702470e5, -0.32325550322333e7,
        0.14915108613530e2, -0.48232657361591e4, 0.40511340542057e6, -0.23855557567849, 0.65017534844798e3,
    )  # fmt: skip
    kelvin = t + 273.15
    theta = kelvin + n[8] / (kelvin - n[9])
    a = theta * theta + n[0] * theta + n[1]
    b = n[2] * theta * theta + n[3] * theta + n[4]
    c = n[5] * theta * theta + n[6] * theta + n[7]
    return 10.0 * (2.0 * c / (-b + math.sqrt(b * b - 4.0 * a * c))) ** 4


def water_density(t: float) -> float:
    """Density of water at one atmosphere, kg/m3 (Kell 1975)."""
    top = (999.83952 + 16.945176 * t - 7.9870401e-3 * t**2 - 46.170461e-6 * t**3 + 105.56302e-9 * t**4
           - 280.54253e-12 * t**5)  # fmt: skip
    return top / (1.0 + 16.879850e-3 * t)


@dataclass(frozen=True)
class Case:
    """What one case is computed with."""

    flow: float
    p1: float
    p2: float
    pv: float
    pc: float
    density: float
    fl: float
    d: float
    d1: float
    d2: float
    rated: float
    rangeability: float
    t: float
    # how the sums are done
    fittings: bool = True
    ff: float | None = None
    fl_power: float = 2.0
    ratio_power: float = 2.0
    factors_at_rated: bool = False
    printed_coefficient: float = 1.0
    form: str = "upstream"
    linear: bool = False
    bore_1: float | None = None
    rated_in_travel: float | None = None


@dataclass(frozen=True)
class Claims:
    """What the sheet then prints."""

    kv: float
    fp: float
    dp_choked: float
    sigma: float
    travel: float
    velocity: float
    choked: bool


def _sums_of_losses(case: Case) -> tuple[float, float]:
    if not case.fittings:
        return 0.0, 0.0
    b1, b2 = case.d / case.d1, case.d / case.d2
    k1, k2 = 0.5 * (1.0 - b1**2) ** 2, (1.0 - b2**2) ** 2
    return k1 + k2 + (1.0 - b1**4) - (1.0 - b2**4), k1 + (1.0 - b1**4)


def _factors(case: Case, kv: float) -> tuple[float, float]:
    total, inlet = _sums_of_losses(case)
    c = (kv / case.d**2) ** 2 / 0.0016
    fl = case.fl ** (case.fl_power / 2.0)
    fp = 1.0 / math.sqrt(1.0 + total * c)
    return fp, fl / math.sqrt(1.0 + fl**2 * inlet * c)


def _choked_drop(case: Case, kv: float) -> float:
    fp, flp = _factors(case, kv)
    ff = 0.96 - 0.28 * math.sqrt(case.pv / case.pc) if case.ff is None else case.ff
    return (flp / fp) ** case.ratio_power * (case.p1 - ff * case.pv)


def _flow(case: Case, kv: float) -> float:
    at = case.rated if case.factors_at_rated else kv
    drop = min(case.p1 - case.p2, _choked_drop(case, at))
    return 0.1 * kv * _factors(case, at)[0] * math.sqrt(drop * 100.0 / (case.density / 999.1))


def _required(case: Case) -> float:
    """The smallest Kv that passes the flow, by bisection."""
    low = case.flow * math.sqrt(case.density / 999.1 / (case.p1 - case.p2)) * 0.2
    high = low
    while _flow(case, high) < case.flow:
        low, high = high, high * 1.2
        if high > 1e6:
            raise ArithmeticError("no valve of this size passes the flow")
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (low, middle) if _flow(case, middle) >= case.flow else (middle, high)
    return high


def sums(case: Case) -> Claims:
    """All claims of one case."""
    kv = _required(case)
    at = case.rated if case.factors_at_rated else kv
    upstream = (case.p1 - case.pv) / (case.p1 - case.p2)
    sigma = {"upstream": upstream, "downstream": upstream - 1.0, "xf": 1.0 / upstream}[case.form]
    share = kv / (case.rated_in_travel or case.rated)
    least = 1.0 / case.rangeability
    travel = (share - least) / (1.0 - least) if case.linear else 1.0 + math.log(share) / math.log(case.rangeability)
    area = math.pi / 4.0 * ((case.bore_1 or case.d1) / 1000.0) ** 2
    drop = _choked_drop(case, at)
    return Claims(kv * case.printed_coefficient, _factors(case, at)[0], drop, sigma, 100.0 * travel,
                  case.flow / 3600.0 / area, case.p1 - case.p2 >= drop)  # fmt: skip


def _before_expander(case: Case) -> Case:
    """The pressure in the valve's outlet: lower by what the expander regains, (KB2 - K2) rho v^2/2."""
    b2 = case.d / case.d2
    v = case.flow / 3600.0 / (math.pi / 4.0 * (case.d / 1000.0) ** 2)
    gain = ((1.0 - b2**4) - (1.0 - b2**2) ** 2) * case.density * v * v / 2.0 / 1e5
    return replace(case, p2=case.p2 - gain)


def _nominal(bore: float) -> float:
    return min((50, 65, 80, 100, 125, 150, 200, 250, 300, 350, 400), key=lambda size: abs(math.log(size / bore)))


Plant = Callable[[Case], Case]
MISTAKES: dict[str, Plant] = {
    "gauge_as_absolute_both": lambda c: replace(c, p1=c.p1 - ATMOSPHERE, p2=c.p2 - ATMOSPHERE),
    "gauge_as_absolute_p1": lambda c: replace(c, p1=c.p1 - ATMOSPHERE),
    "gauge_as_absolute_p2": lambda c: replace(c, p2=c.p2 - ATMOSPHERE),
    "atmosphere_twice_both": lambda c: replace(c, p1=c.p1 + ATMOSPHERE, p2=c.p2 + ATMOSPHERE),
    "atmosphere_twice_p1": lambda c: replace(c, p1=c.p1 + ATMOSPHERE),
    "atmosphere_twice_p2": lambda c: replace(c, p2=c.p2 + ATMOSPHERE),
    "cv_printed_as_kv": lambda c: replace(c, printed_coefficient=c.printed_coefficient * 1.156),
    "kv_printed_as_cv": lambda c: replace(c, printed_coefficient=c.printed_coefficient / 1.156),
    "index_downstream": lambda c: replace(c, form="downstream"),
    "index_xf": lambda c: replace(c, form="xf"),
    "pv_at_20_c": lambda c: replace(c, pv=saturation(20.0)),
    "pv_left_out": lambda c: replace(c, pv=0.0),
    "fl_default_0.9": lambda c: replace(c, fl=0.9),
    "fl_not_squared": lambda c: replace(c, fl_power=1.0),
    "ratio_not_squared": lambda c: replace(c, ratio_power=1.0),
    "no_fittings": lambda c: replace(c, fittings=False),
    "rated_in_fp": lambda c: replace(c, factors_at_rated=True),
    "relative_density_1": lambda c: replace(c, density=999.1),
    "flow_at_15_c": lambda c: replace(c, flow=c.flow * c.density / 999.1),
    "ff_left_out": lambda c: replace(c, ff=1.0),
    "p2_before_expander": _before_expander,
    "nominal_pipe_in_pipe_out": lambda c: replace(c, d1=_nominal(c.d1), d2=_nominal(c.d2)),
    "gpm_as_m3h": lambda c: replace(c, flow=c.flow / (231.0 * 0.0254**3 * 60.0)),
    "bar_as_kgfcm2": lambda c: replace(c, p1=c.p1 * 0.980665, p2=c.p2 * 0.980665, pv=c.pv * 0.980665),
    "other_characteristic": lambda c: replace(c, linear=not c.linear),
}
"""Each mistake as a vendor would make it, in plain arithmetic."""
