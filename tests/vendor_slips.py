"""Every usual mistake of a data sheet as a vendor would make it on a whole sheet, in plain arithmetic.

Extends :data:`audit_arithmetic.MISTAKES`, which works on one case, by those that need the other cases, the site or the
unit printed. Nothing of the package is used for a number. Viscosities (cSt for cP) are left out: they move no claim of
turbulent flow.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from audit_arithmetic import MISTAKES, Case, Claims, saturation, sums

__all__ = ["SEA_LEVEL", "SLIPS", "Item", "Printed", "Slip", "able", "printed"]

SEA_LEVEL = 1.01325
PSI, GPM, CV, POUNDS = 14.503774, 4.402868, 1.156, 16.01846
"""psi in a bar, US gal/min in m3/h, Cv in Kv, kg/m3 in lb/ft3 (exact definitions, rounded)."""
IMPERIAL = 4.54609 / 3.785411784
CASES = ("minimum", "normal", "maximum")


@dataclass(frozen=True)
class Item:
    """A valve with its cases, and how its sheet prints them."""

    cases: tuple[Case, ...]
    names: tuple[str, ...] = CASES
    """Canonical names of the cases; one empty name for a sheet of one case."""
    tag: str = "LV-101"
    service: str = "feed water"
    style: str = ""
    us: bool = False
    gauge: bool = False
    atmosphere: float = SEA_LEVEL
    """bar, as printed."""
    pressure_unit: str = "bar"
    """bar, kPa, MPa, psi or kgf/cm2."""


@dataclass(frozen=True)
class Printed:
    """What the sheet prints of one case besides its inputs."""

    claims: Claims
    ff: float
    flp: float
    sigma_choked: float
    velocity_out: float
    drop: float
    """p1 - p2 as printed."""
    pv: float


@dataclass(frozen=True)
class Slip:
    """A mistake: what the vendor computed with, on which sheets he can make it, and its name in an audit."""

    make: Callable[[Item], list[Case]]
    possible: Callable[[Item], bool] = lambda item: True
    first: bool = False
    """A unit misread: it comes before whatever else is done."""
    prints: Callable[[Item, list[Printed]], list[Printed]] | None = None
    """A mistake of printing: the sums are right."""


def _each(change: Callable[[Case], Case]) -> Callable[[Item], list[Case]]:
    return lambda item: [change(case) for case in item.cases]


def _shifted(shift: Callable[[Item], float], *names: str) -> Callable[[Item], list[Case]]:
    def make(item: Item) -> list[Case]:
        return [replace(c, **{name: getattr(c, name) + shift(item) for name in names}) for c in item.cases]

    return make


def _scaled(factor: float) -> Callable[[Item], list[Case]]:
    """All pressures in another unit, each from the zero that it is printed with; pv is printed absolute."""

    def make(item: Item) -> list[Case]:
        zero = item.atmosphere if item.gauge else 0.0
        return [replace(c, p1=(c.p1 - zero) * factor + zero, p2=(c.p2 - zero) * factor + zero, pv=c.pv * factor)
                for c in item.cases]  # fmt: skip

    return make


def _taken(name: str, place: int) -> Callable[[Item], list[Case]]:
    return lambda item: [replace(c, **{name: getattr(item.cases[place], name)}) for c in item.cases]


def _pv_of_temperature(place: int) -> Callable[[Item], list[Case]]:
    return lambda item: [replace(c, pv=saturation(item.cases[place].t)) for c in item.cases]


def _has(place: int, *names: str) -> Callable[[Item], bool]:
    def possible(item: Item) -> bool:
        if place >= len(item.cases) or len(item.cases) < 2:
            return False
        given = item.cases[place]
        return any(getattr(c, n) != getattr(given, n) for c in item.cases for n in names)

    return possible


def _stated_drop(item: Item, lines: list[Printed]) -> list[Printed]:
    return [replace(line, drop=1.12 * line.drop) for line in lines]


def _all_slips() -> dict[str, Slip]:
    found = {name: Slip(_each(make), first=name in ("gpm_as_m3h",)) for name, make in MISTAKES.items()}
    del found["bar_as_kgfcm2"]
    for which, names in (("both", ("p1", "p2")), ("p1", ("p1",)), ("p2", ("p2",))):
        found[f"gauge_as_absolute_{which}"] = Slip(_shifted(lambda item: -item.atmosphere, *names))
        found[f"atmosphere_twice_{which}"] = Slip(_shifted(lambda item: item.atmosphere, *names))
    found["atmosphere_of_sea_level"] = Slip(
        _shifted(lambda item: SEA_LEVEL - item.atmosphere, "p1", "p2"),
        lambda item: item.gauge and item.atmosphere < 0.95,
    )
    for unit, other, factor in (("kgf/cm2", "bar", 1.0 / 0.980665), ("bar", "kgf/cm2", 0.980665),
                                ("bar", "psi", 1.0 / PSI), ("psi", "bar", PSI)):  # fmt: skip
        key = f"{unit}_as_{other}".replace("/", "")
        found[key] = Slip(_scaled(factor), lambda item, unit=unit: item.pressure_unit == unit, first=True)
    for key, factor in (("m3h_as_gpm", 1.0 / GPM), ("us_as_imperial", IMPERIAL), ("imperial_as_us", 1.0 / IMPERIAL)):
        found[key] = Slip(_each(lambda c, factor=factor: replace(c, flow=c.flow * factor)), first=True)
    found["lb_ft3_as_kg_m3"] = Slip(_each(lambda c: replace(c, density=c.density / POUNDS)), lambda item: item.us)
    for celsius in (15, 25):
        found[f"pv_at_{celsius}_c"] = Slip(_each(lambda c, t=float(celsius): replace(c, pv=saturation(t))))
    found["pv_at_t_as_deg_F"] = Slip(
        _each(lambda c: replace(c, pv=saturation((c.t - 32.0) / 1.8))),
        lambda item: not item.us and all(c.t > 40.0 for c in item.cases),
    )
    found["pv_at_t_as_deg_C"] = Slip(
        _each(lambda c: replace(c, pv=saturation(1.8 * c.t + 32.0))),
        lambda item: item.us and all(c.t < 90.0 for c in item.cases),
    )
    found["pv_psi_taken_as_bar"] = Slip(_each(lambda c: replace(c, pv=c.pv * PSI)))
    found["pv_bar_taken_as_psi"] = Slip(_each(lambda c: replace(c, pv=c.pv / PSI)))
    found["ff_cold"] = Slip(_each(lambda c: replace(c, ff=0.96)))
    found["choking_without_pv"] = Slip(_each(lambda c: replace(c, ff=0.0)))
    found["nominal_pipe_in"] = Slip(lambda item: [
        replace(c, d1=n.d1) for c, n in zip(item.cases, _each(MISTAKES["nominal_pipe_in_pipe_out"])(item), strict=True)
    ])  # fmt: skip
    found["nominal_pipe_out"] = Slip(lambda item: [
        replace(c, d2=n.d2) for c, n in zip(item.cases, _each(MISTAKES["nominal_pipe_in_pipe_out"])(item), strict=True)
    ])  # fmt: skip
    found["density_at_15_c"] = Slip(_each(lambda c: replace(c, density=999.1)))
    found["cv_over_kvs"] = Slip(_each(lambda c: replace(c, rated_in_travel=c.rated / CV)))
    found["kv_over_cvs"] = Slip(_each(lambda c: replace(c, rated_in_travel=c.rated * CV)))
    found["rangeability_30"] = Slip(_each(lambda c: replace(c, rangeability=30.0)))
    for place, case in enumerate(CASES):
        for name in ("flow", "p1", "p2", "density", "fl"):
            found[f"{name}_of_{case}"] = Slip(_taken(name, place), _has(place, name))
        found[f"pv_at_t_of_{case}"] = Slip(_pv_of_temperature(place), _has(place, "t"))
    found["cold_index_at_choking"] = Slip(_each(lambda c: c), prints=lambda item, lines: [
        replace(line, sigma_choked=1.0 / c.fl**2) for c, line in zip(item.cases, lines, strict=True)
    ])  # fmt: skip
    found["stated_drop"] = Slip(
        lambda item: [replace(c, p2=c.p1 - 1.12 * (c.p1 - c.p2)) for c in item.cases], prints=_stated_drop
    )
    return found


SLIPS: dict[str, Slip] = _all_slips()
"""By the name that the audit gives it."""


def able(item: Item, names: Sequence[str]) -> bool:
    """Can these mistakes be made on this sheet?"""
    return all(SLIPS[name].possible(item) for name in names)


def printed(item: Item, names: Sequence[str] = ()) -> list[Printed] | None:
    """What the vendor prints with these mistakes; None where his sums have no answer, or none that anyone would print
    (an opening beyond 120 %, a choked drop below 0)."""
    wrong = item
    for name in sorted(names, key=lambda name: not SLIPS[name].first):
        wrong = replace(wrong, cases=tuple(SLIPS[name].make(wrong)))
    try:
        lines = [_printed(right, case) for right, case in zip(item.cases, wrong.cases, strict=True)]
    except (ArithmeticError, ValueError):
        return None
    for name in names:
        change = SLIPS[name].prints
        lines = lines if change is None else change(item, lines)
    return lines if all(_is_printable(line) for line in lines) else None


def _is_printable(line: Printed) -> bool:
    return (math.isfinite(line.claims.travel) and line.claims.sigma > 0.0 and line.claims.dp_choked > 0.0
            and line.claims.travel < 150.0)  # fmt: skip


def _printed(right: Case, case: Case) -> Printed:
    claims = sums(case)
    kv = claims.kv / case.printed_coefficient
    b1 = case.d / case.d1
    inlet = 0.5 * (1.0 - b1**2) ** 2 + (1.0 - b1**4) if case.fittings else 0.0
    fl = case.fl ** (case.fl_power / 2.0)
    at = case.rated if case.factors_at_rated else kv
    flp = fl / math.sqrt(1.0 + fl**2 * inlet * (at / case.d**2) ** 2 / 0.0016)
    ff = 0.96 - 0.28 * math.sqrt(case.pv / case.pc) if case.ff is None else case.ff
    speed = case.flow / 3600.0 / (math.pi / 4.0 * (case.d2 / 1000.0) ** 2)
    return Printed(claims, ff, flp, (case.p1 - case.pv) / claims.dp_choked, speed, right.p1 - right.p2, right.pv)
