"""Orifice plates: vectorised rows against a scalar loop of the reference library's solver for the same answer.

The library's ``differential_pressure_meter_solver`` knows drops between taps only. For the drop both answer with the
one between corner taps; for the bore it gets the tap drop of the plate that Lowpoint finds from the net drop, which
spares the loop the search from one to the other. That both give the same answers is checked before anything is timed.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
from figures import Figure, best_of
from fluids.flow_meter import differential_pressure_meter_solver

from lowpoint import functions
from lowpoint.cells import call

BAR = 1e5
SOLVER = "fluids' differential_pressure_meter_solver"
DROP, BORE = functions["LP_ORIFICE_DROP"], functions["LP_ORIFICE_BORE"]


def _cases(rows: int) -> dict[str, np.ndarray]:
    """Random plates inside ISO 5167-2 in water-like liquids, in cell units; not choked."""
    rng = np.random.default_rng(20261202)
    pipe = rng.uniform(60.0, 400.0, rows)
    cases = {
        "pipe": pipe, "bore": pipe * rng.uniform(0.25, 0.7, rows), "density": rng.uniform(850.0, 1000.0, rows),
        "viscosity": rng.uniform(0.3, 1.5, rows),
        "flow": rng.uniform(0.5, 3.0, rows) * math.pi / 4.0 * (pipe / 1e3) ** 2 * 3600.0,
    }  # fmt: skip
    cases["net"], cases["tapped"] = DROP(**cases), DROP(**cases, taps="corner")
    cases["p1"] = 2.0 * cases["tapped"] + 5.0
    return cases


def _loop(cases: dict[str, np.ndarray], rows: int, **wanted: str) -> list[float]:
    """The library's answer for each of so many rows, SI; ``wanted`` says what it is given besides, by its names."""
    taken = {name: column[:rows].tolist() for name, column in _in_si(cases).items()}
    answers = []
    for i in range(rows):
        answers.append(differential_pressure_meter_solver(
            D=taken["pipe"][i], rho=taken["density"][i], mu=taken["viscosity"][i], k=1e20, P1=taken["p1"][i],
            m=taken["mass"][i], meter_type="ISO 5167 orifice", taps="corner",
            **{name: taken[column][i] for name, column in wanted.items()},
        ))  # fmt: skip
    return answers


def _in_si(cases: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    return {
        "pipe": cases["pipe"] / 1e3, "bore": cases["bore"] / 1e3, "density": cases["density"],
        "viscosity": cases["viscosity"] / 1e3, "mass": cases["flow"] / 3600.0 * cases["density"],
        "p1": cases["p1"] * BAR, "after": (cases["p1"] - cases["tapped"]) * BAR,
    }  # fmt: skip


def _agree(name: str, ours: np.ndarray, theirs: np.ndarray, tolerance: float) -> None:
    worst = float(np.max(np.abs(ours / theirs - 1.0)))
    if not worst <= tolerance:
        raise AssertionError(f"{name}: the two disagree by {worst:.2g}, so that their times cannot be compared")


def figures(quick: bool) -> Iterator[Figure]:
    rows, loop = (20_000, 200) if quick else (100_000, 2_000)
    cases = _cases(rows)
    drop = {k: cases[k] for k in ("flow", "bore", "pipe", "density", "viscosity")}
    bore = {k: cases[k] for k in ("flow", "p1", "pipe", "density", "viscosity")}
    bore |= {"p2": cases["p1"] - cases["net"], "pv": 0.02, "pc": 220.64}

    # The library stops its search for a pressure early: 1e-3 of the drop is what it is good for.
    theirs = np.array(_loop(cases, loop, D2="bore"))
    _agree("drop", cases["tapped"][:loop], cases["p1"][:loop] - theirs / BAR, 1e-3)
    _agree("bore", BORE(**bore)[:loop], np.array(_loop(cases, loop, P2="after")) * 1e3, 1e-6)

    measured = (
        ("LP_ORIFICE_DROP", lambda: DROP(**drop, taps="corner"), {"D2": "bore"}),
        ("LP_ORIFICE_BORE", lambda: BORE(**bore), {"P2": "after"}),
    )
    for name, ours, wanted in measured:
        each = best_of(5, ours) / rows
        scalar = best_of(2, lambda wanted=wanted: _loop(cases, loop, **wanted)) / loop
        yield Figure(f"{name}, {rows} rows, against a scalar loop of {SOLVER}", scalar / each, "times", at_least=30.0)
        yield Figure(f"{name}, each row", each * 1e9, "ns")
    yield from _scalar_calls(200 if quick else 2_000)


def _scalar_calls(times: int) -> Iterator[Figure]:
    for name, given in (
        ("LP_ORIFICE_DROP", (100.0, 50.0, 150.0, 998.0, 1.0)),
        ("LP_ORIFICE_FLOW", (10.0, 5.0, 50.0, 150.0, 998.0, 0.02, 220.0, 1.0)),
        ("LP_ORIFICE_BORE", (100.0, 10.0, 5.0, 150.0, 998.0, 0.02, 220.0, 1.0)),
    ):
        call(name, given)
        per_call = best_of(3, lambda name=name, given=given: [call(name, given) for _ in range(times)]) / times
        yield Figure(f"one checked scalar call of {name}", per_call * 1e6, "us")
