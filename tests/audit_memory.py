"""Vendor sheets in memory for the audit's tests: inputs and claims printed as a sheet prints them, nothing to read."""

from __future__ import annotations

import math
import random
from collections.abc import Iterable, Sequence
from dataclasses import replace

from audit_arithmetic import ATMOSPHERE, MISTAKES, Case, Claims, saturation, sums, water_density
from lowpoint.audit.model import SheetReading, Value
from lowpoint.physics.unitnames import meaning
from lowpoint.units import KV

__all__ = ["CASES", "drawn", "planted", "sheet", "value", "with_cases", "with_values"]

CASES = ("minimum", "normal", "maximum")
PSI, GPM, POUNDS = 14.503774, 4.402868, 16.01846
"""psi in a bar, US gal/min in m3/h, kg/m3 in lb/ft3 (exact definitions, rounded)."""


def value(
    quantity: str, case: str | None, number: float, decimals: int, unit: str = "", *, form: str | None = None,
    word: str | None = None, gauge: bool | None = False,
) -> Value:  # fmt: skip
    """A number as printed, read back as a reader would."""
    raw = word if word is not None else f"{number:.{decimals}f}"
    shown = math.nan if word is not None else float(raw)
    return Value(
        quantity=quantity, case=case, cell="Sheet1!C7", label=quantity, label_cell="Sheet1!A7", raw=raw, number=shown,
        unit=unit, unit_from="label" if unit else "", gauge=gauge, half=0.5 * 10.0**-decimals, si=_si(shown, unit),
        confidence=1.0, word=word, form=form,
    )  # fmt: skip


def _si(shown: float, unit: str) -> float:
    """SI by the plain meaning of the unit."""
    if not unit or math.isnan(shown) or unit == "dB(A)":
        return shown
    known = meaning(unit)
    ambient = 1e5 * ATMOSPHERE if known.gauge else 0.0
    factor = known.factor * (KV if unit in ("Kv", "Cv") else 1.0)
    return (shown + known.zero) * factor + ambient


def drawn(rng: random.Random, *, choked_share: float = 0.35) -> list[Case]:
    """A valve in water with three cases that a plant could have."""
    while True:
        d = rng.choice([50.0, 80.0, 100.0, 150.0, 200.0])
        pipe = max(rng.choice([1.0, 1.25, 1.5, 2.0]) * d * rng.uniform(0.955, 1.03), d)
        base = rng.uniform(60.0, 130.0) if rng.random() < 0.75 else rng.uniform(5.0, 45.0)
        p1 = rng.uniform(6.0, 25.0)
        rated = round(0.02 * d * d * rng.uniform(0.5, 1.0), 1)
        cases = []
        for share, lift, warmer in ((0.25, 1.04, -3.0), (0.5, 1.0, 0.0), (0.8, 0.95, 4.0)):
            t = round(base + warmer * rng.uniform(0.3, 1.0), 1)
            inlet = round(p1 * lift, 2)
            fl = round(rng.uniform(0.6, 0.92), 2)
            pv = saturation(t)
            part = rng.uniform(0.15, 0.65) * (1.6 if rng.random() < choked_share else 1.0)
            outlet = round(inlet - part * fl * fl * (inlet - pv), 2)
            density = round(water_density(min(t, 99.0)) - 0.8 * max(t - 99.0, 0.0), 1)
            flow = round(0.1 * share * rated * math.sqrt(max(inlet - outlet, 0.1) * 100.0 / density * 999.1), 1)
            cases.append(Case(flow, inlet, outlet, float(f"{pv:.4f}"), 220.64, density, fl, d, round(pipe, 1),
                              round(pipe, 1), rated, 50.0, t))  # fmt: skip
        if all(c.p2 > 1.3 and c.p2 > c.pv * 1.02 and c.p1 - c.p2 > 0.3 for c in cases) and _computes(cases):
            return cases


def _computes(cases: Iterable[Case]) -> bool:
    try:
        return all(0.0 < sums(case).travel <= 100.0 for case in cases)
    except (ArithmeticError, ValueError):
        return False


def planted(cases: Sequence[Case], mistakes: Sequence[str]) -> list[Claims] | None:
    """What the vendor prints with these mistakes; None where his sums would have no answer."""
    try:
        wrong = list(cases)
        for name in mistakes:
            wrong = [MISTAKES[name](case) for case in wrong]
        claims = [sums(case) for case in wrong]
    except (ArithmeticError, ValueError):
        return None
    return claims if all(math.isfinite(c.travel) and c.sigma > 0.0 for c in claims) else None


def sheet(
    cases: Sequence[Case], claims: Sequence[Claims], *, us: bool = False, gauge: bool = False, digits: int = 0
) -> SheetReading:
    """A sheet with these inputs and claims, metric or US, its pressures absolute or gauge; the claims with so many
    significant digits, or with the usual decimals."""
    names = CASES[: len(cases)] if len(cases) > 1 else ("",)
    item = cases[0]
    size, inch = ("in", 25.4) if us else ("mm", 1.0)
    pressure, psi = ("psi", PSI) if us else ("bar", 1.0)
    coefficient, cv = ("Cv", 1.156) if us else ("Kv", 1.0)
    values = [value(key, None, number / inch, 3 if us else 1, size)
              for key, number in (("valve_size", item.d), ("pipe_in", item.d1), ("pipe_out", item.d2))]  # fmt: skip
    values += [
        value("rated", None, item.rated * cv, 2, coefficient), value("rangeability", None, item.rangeability, 0),
        value("pc", None, item.pc * psi, 2, pressure), value("fluid", None, math.nan, 0, word="water"),
        value("characteristic", None, math.nan, 0, word="equal percentage"),
    ]  # fmt: skip
    for name, case, claim in zip(names, cases, claims, strict=True):
        values += _inputs(name, case, us, gauge)
        for key, number, decimals, unit in (
            ("coefficient", claim.kv * cv, 2, coefficient),
            ("fp", claim.fp, 4, ""),
            ("dp_choked", claim.dp_choked * psi, 2 if us else 3, pressure),
            ("sigma", claim.sigma, 3, ""),
            ("travel", claim.travel, 1, "%"),
            ("velocity_in", claim.velocity / (0.3048 if us else 1.0), 3, "ft/s" if us else "m/s"),
        ):
            shown = decimals if not digits else max(0, digits - 1 - math.floor(math.log10(abs(number))))
            values.append(value(key, name, number, shown, unit, form="upstream" if key == "sigma" else None))
    return SheetReading("Sheet1", "LV-101", names, tuple(values), atmosphere=1e5 * ATMOSPHERE, atmosphere_from="sheet")


def _inputs(name: str, case: Case, us: bool, gauge: bool) -> list[Value]:
    shift = ATMOSPHERE if gauge else 0.0
    psi = PSI if us else 1.0
    pressure = {(False, False): "bar", (False, True): "bar g", (True, False): "psi", (True, True): "psig"}[us, gauge]
    return [
        value("flow", name, case.flow * (GPM if us else 1.0), 2, "US gal/min" if us else "m3/h"),
        value("p1", name, (case.p1 - shift) * psi, 3, pressure, gauge=gauge),
        value("p2", name, (case.p2 - shift) * psi, 3, pressure, gauge=gauge),
        value("pv", name, case.pv * psi, 4, "psi" if us else "bar"),
        value("t", name, case.t * 1.8 + 32.0 if us else case.t, 1, "deg F" if us else "deg C"),
        value("density", name, case.density / (POUNDS if us else 1.0), 3 if us else 1, "lb/ft3" if us else "kg/m3"),
        value("fl", name, case.fl, 2),
    ]  # fmt: skip


def with_cases(reading: SheetReading, cases: tuple[str, ...]) -> SheetReading:
    """Only some of the cases."""
    kept = tuple(v for v in reading.values if v.case is None or v.case in cases)
    return replace(reading, cases=cases, values=kept)


def with_values(reading: SheetReading, *more: Value, without: Sequence[tuple[str, str | None]] = ()) -> SheetReading:
    """A sheet with other values: ``more`` take the place of what they name, ``without`` is struck out."""
    gone = {(v.quantity, v.case) for v in more} | set(without)
    kept = tuple(v for v in reading.values if (v.quantity, v.case) not in gone)
    return replace(reading, values=(*kept, *more))
