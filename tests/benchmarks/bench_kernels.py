"""Sizing: vectorised rows against a scalar loop of the reference library, and the cost of one checked call."""

from __future__ import annotations

import warnings
from collections.abc import Iterator

import fluids.control_valve
import numpy as np
from figures import Figure, best_of

from lowpoint import functions
from lowpoint.cells import call

BAR = 1e5


def _cases(rows: int) -> dict[str, np.ndarray]:
    """Random water cases, mostly unchoked, in cell units."""
    rng = np.random.default_rng(20261201)
    p1 = rng.uniform(6.0, 30.0, rows)
    return {
        "flow": rng.uniform(20.0, 200.0, rows),
        "p1": p1,
        "p2": p1 * rng.uniform(0.35, 0.9, rows),
        "pv": rng.uniform(0.02, 0.7, rows),
        "pc": np.full(rows, 220.64),
        "density": rng.uniform(940.0, 999.0, rows),
        "fl": rng.uniform(0.6, 0.95, rows),
    }


_FITTINGS = {"valve_size": 100.0, "pipe_in": 150.0, "pipe_out": 200.0}


def _scalar_loop(cases: dict[str, np.ndarray], rows: int, fittings: bool) -> None:
    more = {"D1": 0.150, "D2": 0.200, "d": 0.100, "FL": None, "Fd": 0.46} if fittings else {}
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        for i in range(rows):
            if fittings:
                more["FL"] = float(cases["fl"][i])
            fluids.control_valve.size_control_valve_l(
                rho=float(cases["density"][i]), Psat=float(cases["pv"][i]) * BAR, Pc=float(cases["pc"][i]) * BAR,
                mu=3e-4, P1=float(cases["p1"][i]) * BAR, P2=float(cases["p2"][i]) * BAR,
                Q=float(cases["flow"][i]) / 3600.0, **more,
            )  # fmt: skip


def figures(quick: bool) -> Iterator[Figure]:
    rows, loop = (20_000, 500) if quick else (100_000, 5_000)
    coefficient = functions["LP_COEFFICIENT"]
    cases = _cases(rows)
    for fittings, goal in ((True, 100.0), (False, 30.0)):
        more = _FITTINGS if fittings else {}
        ours = best_of(5, lambda more=more: coefficient(**cases, **more)) / rows
        theirs = best_of(2, lambda fittings=fittings: _scalar_loop(cases, loop, fittings)) / loop
        label = "with" if fittings else "without"
        yield Figure(f"LP_COEFFICIENT {label} fittings, {rows} rows, against a scalar fluids loop", theirs / ours,
                     "times", at_least=goal)  # fmt: skip
        yield Figure(f"LP_COEFFICIENT {label} fittings, each row", ours * 1e9, "ns")
    yield from _scalar_calls(2_000 if quick else 20_000)


def _scalar_calls(times: int) -> Iterator[Figure]:
    args = (360.0, 6.8, 2.2, 0.701, 221.2, 965.4, 0.9, 100.0, 150.0, 200.0)
    for name, given in (
        ("LP_COEFFICIENT", args),
        ("LP_SIGMA", (10.0, 5.0, 0.02)),
        ("LP_VAPOUR_PRESSURE", ("water", 60.0)),
    ):
        call(name, given)
        per_call = best_of(3, lambda name=name, given=given: [call(name, given) for _ in range(times)]) / times
        yield Figure(f"one checked scalar call of {name}", per_call * 1e6, "us", at_most=30.0)
    temperatures = np.linspace(5.0, 95.0, 10_000).tolist()
    per_call = best_of(1, lambda: [call("LP_VAPOUR_PRESSURE", ("water", t)) for t in temperatures]) / 10_000
    yield Figure("LP_VAPOUR_PRESSURE over 10 000 distinct temperatures, each call", per_call * 1e6, "us", at_most=60.0)
