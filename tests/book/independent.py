"""Valve rows worked out a second way, from typed inputs alone: nothing of the package under test is imported here.

Sizing is solved as the standard states it, implicitly, by bisection on its flow equation, not by a closed form. Water
is IAPWS-IF97 and sea water IAPWS-08, by the library iapws. Pressures bar, sizes mm, flow m3/h, Kv, kg/m3, deg C.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from iapws import IAPWS97, SeaWater
from iapws._iapws import Pc
from iapws.iapws97 import _PSat_T

N1, N2 = 0.1, 1.6e-3  # IEC 60534-2-1: Kv, m3/h, kPa, mm
RHO0 = 999.1  # kg/m3, water at 15 C, the reference of the flow coefficient (IEC 60534-2-1)
SALT = 0.0314038218  # kg/mol, mean molar mass of sea salt (IAPWS-08)
WATER = 0.01801528  # kg/mol


def atmosphere(elevation: float) -> float:
    """ISO 2533, m -> bar."""
    geopotential = 6356766.0 * elevation / (6356766.0 + elevation)
    return 1.01325 * (1.0 - 0.0065 * geopotential / 288.15) ** 5.25588


def water(t: float, p: float) -> tuple[float, float]:
    """Vapour pressure (bar) and density at t and p of water, IAPWS-IF97."""
    return 10.0 * _PSat_T(t + 273.15), IAPWS97(T=t + 273.15, P=p / 10.0).rho


def sea_water(t: float, p: float, salinity: float) -> tuple[float, float]:
    """Vapour pressure (bar), by the osmotic coefficient, and density of sea water of a salinity in g/kg, IAPWS-08.

    ValueError above 80 C, where those equations end.
    """
    if t > 79.8:
        raise ValueError(f"{t} C is beyond IAPWS-08")
    share = salinity / 1000.0
    state = SeaWater(T=t + 273.15, P=p / 10.0, S=share)
    molality = share / (1.0 - share) / SALT
    return 10.0 * _PSat_T(t + 273.15) * math.exp(-state.osm * molality * WATER), state.rho


def bisect(function: Callable[[float], float], low: float, high: float) -> float:
    """The root of a rising function."""
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if function(middle) < 0.0 else (low, middle)
    return 0.5 * (low + high)


def fitting_factors(c: float, fl: float, d: float, d1: float, d2: float) -> tuple[float, float, float]:
    """FP, FLP and K1 + KB1 of concentric reducers, IEC 60534-2-1; a valve a little larger than its pipe: line size."""
    b1, b2 = min(d / d1, 1.0), min(d / d2, 1.0)
    inlet = 0.5 * (1.0 - b1**2) ** 2 + 1.0 - b1**4
    total = inlet + (1.0 - b2**2) ** 2 - (1.0 - b2**4)
    share = (c / d**2) ** 2 / N2
    return 1.0 / math.sqrt(1.0 + total * share), fl / math.sqrt(1.0 + fl**2 * inlet * share), inlet


def choked_drop(c: float, row: Mapping[str, float]) -> float:
    """(FLP/FP)^2 (p1 - FF pv), bar."""
    fp, flp, _ = fitting_factors(c, row["fl"], row["d"], row["d1"], row["d2"])
    ff = 0.96 - 0.28 * math.sqrt(row["pv"] / row["pc"])
    return (flp / fp) ** 2 * (row["p1"] - ff * row["pv"])


def flow(c: float, row: Mapping[str, float]) -> float:
    """The standard's flow equation, drop limited to the choked one; m3/h."""
    fp, _, _ = fitting_factors(c, row["fl"], row["d"], row["d1"], row["d2"])
    drop = 100.0 * min(row["p1"] - row["p2"], choked_drop(c, row))
    return c * N1 * fp * math.sqrt(drop * RHO0 / row["rho"])


def coefficient(row: Mapping[str, float]) -> float:
    """The Kv at which the flow equation gives the flow wanted; the flow rises with Kv, here up to Kv/d^2 = 0.06."""
    return bisect(lambda c: flow(c, row) - row["flow"], 1e-4, 0.06 * row["d"] ** 2)


def scaled(limit: float, row: Mapping[str, float]) -> float:
    """(limit SSE - 1) PSE + 1, no credit below the test (ISA-RP75.23)."""
    sse = max((row["d"] / row["size_ref"]) ** row["b"], 1.0)
    pse = max(((row["p1"] - row["pv"]) / row["head_ref"]) ** row["a"], 1.0)
    return (limit * sse - 1.0) * pse + 1.0


def installed(limit: float, c: float, row: Mapping[str, float]) -> float:
    """A limit of the bare valve between reducers: the energy balance over the inlet reducer, and FP for the drop.

    Index of the bare valve (its own inlet pressure p1' = p1 - (K1+KB1) w, own drop dp FP^2, w the velocity head in d):
    sigma' = (p1' - pv)/(dp FP^2); solved for sigma = (p1 - pv)/dp where sigma' is at the limit. With Kv and FP the drop
    is dp = (Q/(N1 FP Kv))^2 rho/rho0 and w = rho v^2/2 with v in d.
    """
    fp, _, inlet = fitting_factors(c, 1.0, row["d"], row["d1"], row["d2"])
    velocity = row["flow"] / 3600.0 / (math.pi / 4.0 * (row["d"] / 1000.0) ** 2)
    head = row["rho"] * velocity**2 / 2.0 / 1e5  # bar
    drop = (row["flow"] / (N1 * fp * c)) ** 2 * row["rho"] / RHO0 / 100.0  # bar, unchoked
    return (limit * drop * fp**2 + inlet * head) / drop


def travel(c: float, rated: float, characteristic: str, rangeability: float) -> float:
    """Opening in per cent by bisection on the inherent characteristic (IEC 60534-2-4, from memory)."""
    if characteristic == "linear":
        return 100.0 * bisect(lambda h: 1.0 / rangeability + (1.0 - 1.0 / rangeability) * h - c / rated, 0.0, 1.0)
    return 100.0 * bisect(lambda h: rangeability ** (h - 1.0) - c / rated, 0.0, 1.0)


def read(x: float, xs: Sequence[float], ys: Sequence[float]) -> float:
    """Straight line between the rows of a table."""
    for (x0, y0), (x1, y1) in zip(zip(xs, ys, strict=True), list(zip(xs, ys, strict=True))[1:], strict=False):
        if x0 <= x <= x1:
            return y0 + (y1 - y0) * (x - x0) / (x1 - x0)
    raise ValueError(x)


def table_travel(table: Sequence[Sequence[float]], row: dict[str, float]) -> float:
    """The opening at which the valve, with Kv and FL of that opening, passes the flow."""
    hs, cs, fls = ([line[i] for line in table] for i in range(3))
    return bisect(lambda h: flow(read(h, hs, cs), {**row, "fl": read(h, hs, fls)}) - row["flow"], hs[0], hs[-1])


def state(t: float, p1: float, salinity: float | None) -> dict[str, float]:
    """pv, pc and rho of water or sea water."""
    pv, rho = water(t, p1) if salinity is None else sea_water(t, p1, salinity)
    return {"pv": pv, "rho": rho, "pc": 10.0 * Pc}


def worked_out(row: dict[str, Any], limits: Mapping[str, float | None], keep: str) -> dict[str, float]:
    """Every computed number of a row by the key of its column; ``row`` holds what is typed, p1 and p2 absolute."""
    row = row | state(row["t"], row["p1"], row.get("salinity"))
    if row.get("table"):
        row["travel"] = table_travel(row["table"], row)
        hs = [line[0] for line in row["table"]]
        row["fl"] = read(row["travel"], hs, [line[2] for line in row["table"]])
        limits = dict(limits) | {"incipient": read(row["travel"], hs, [line[3] for line in row["table"]])}
    c = coefficient(row)
    answer = {
        "p1": row["p1"], "p2": row["p2"], "pv": row["pv"], "pc": row["pc"], "density": row["rho"], "coefficient": c,
        "fl": row["fl"], "velocity": row["flow"] / 3600.0 / (math.pi / 4.0 * (row["d"] / 1000.0) ** 2),
        "choked_drop": choked_drop(c, row), "sigma": (row["p1"] - row["pv"]) / (row["p1"] - row["p2"]),
    }  # fmt: skip
    answer["choked"] = (row["p1"] - row["pv"]) / answer["choked_drop"]
    answer["travel"] = row.get("travel") or travel(c, row["rated"], row["characteristic"], row["rangeability"])
    for name, limit in limits.items():
        if limit is not None:
            answer[f"{name}_scaled"] = scaled(limit, row)
            answer[name] = installed(answer[f"{name}_scaled"], c, row)
    answer["limit"] = answer[keep]
    answer["margin"] = answer["sigma"] / answer["limit"] - 1.0
    answer["allowed_drop"] = (row["p1"] - row["pv"]) / answer["limit"]
    return answer
