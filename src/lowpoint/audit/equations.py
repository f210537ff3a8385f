"""Every claim of a valve's sheet from its inputs: rows of hypotheses by columns of cases, one call a kernel.

A *state* maps names to arrays (rows, cases): the inputs in SI, and switches by which an equation is written another
way than the standard's (NaN or 0: as the standard has it). The kernels are those that size valves elsewhere.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint.audit.inputs import Inputs
from lowpoint.physics.fittings import fitting_losses, geometry_factor2
from lowpoint.physics.nonturbulent import not_turbulent
from lowpoint.physics.sizing import choked_drop_of, critical_pressure_factor, required_coefficient, velocity
from lowpoint.physics.travel import valve_travel

__all__ = ["KINDS", "State", "base_state", "bores", "is_slow", "predict"]

State = dict[str, Any]

PHYSICAL = (
    "flow", "p1", "p2", "dp", "pv", "pc", "density", "viscosity", "fl", "fd", "xfz", "valve_size", "pipe_in",
    "pipe_out", "pipe_wall", "rated", "rangeability", "bore_length", "holes", "pv_fluid", "density_fluid",
    "claimed_coefficient",
)  # fmt: skip
SWITCHES = {
    "ff": np.nan,  # instead of FF
    "recovery_power": 2.0,  # of FLP/FP in the choked drop
    "fitted_coefficient": np.nan,  # instead of the required one in FP and FLP
    "bare": 0.0,  # 1: fittings left out
    "coefficient_times": 1.0,  # of the coefficient that is printed
    "travel_ratio_times": 1.0,
    "other_characteristic": 0.0,
    "cold_recovery": 0.0,  # 1: index at choking as 1/FL^2
    "index_form": 0.0,  # 1 upstream, 2 downstream, 3 xf: printed in this form
    "pv_shown": 0.0,  # Pa added to the vapour pressure that is printed
}
KINDS = ("coefficient", "fp", "flp", "ff", "dp", "dp_choked", "sigma", "sigma_choked", "travel", "velocity_in",
         "velocity_out", "pv", "density", "pc", "bore")  # fmt: skip
STEPS = 40
"""Of the fixed point below, whose error falls by 1 - FP^2 a step."""


def base_state(inputs: Inputs, claimed_coefficient: Any, rows: int = 1) -> State:
    """``rows`` equal rows of a sheet's inputs, all equations as the standard has them."""
    columns = {**inputs.columns, "claimed_coefficient": claimed_coefficient}
    state: State = {name: np.tile(columns[name], (rows, 1)) for name in PHYSICAL}
    shape = (rows, inputs.count)
    state |= {name: np.full(shape, usual) for name, usual in SWITCHES.items()}
    return state


def is_slow(inputs: Inputs, coefficient: Any) -> bool:
    """Is the flow of any case anywhere near the end of turbulence, so that the viscosity matters?"""
    c = inputs.columns
    if inputs.words["trim"] not in ("full", "reduced") or np.isnan(c["viscosity"]).all():
        return False
    with np.errstate(all="ignore"):
        slow = not_turbulent(
            c["flow"], coefficient, c["density"], c["fl"], c["pipe_in"], c["viscosity"] * 10.0, c["fd"]
        )
    return bool(np.any(slow))


def predict(state: State, inputs: Inputs, slow: bool) -> dict[str, Any]:
    """Every claim in SI, (rows, cases), NaN where an input is missing or impossible; indices in upstream form."""
    shape = state["p1"].shape
    v = {name: np.ascontiguousarray(x).ravel() for name, x in state.items()}
    with np.errstate(all="ignore"):
        found = _predicted(v, inputs, slow)
    return {name: x.reshape(shape) for name, x in found.items()}


def bores(state: State, inputs: Inputs) -> Any:
    """Bore of one plate that takes the whole drop, (rows, cases); NaN for several plates in series."""
    from lowpoint.physics.orifices import orifice_bore

    names = ("flow", "p1", "p2", "pipe_in", "density", "pv", "pc")
    v = {name: state[name].ravel() for name in (*names, "viscosity", "bore_length", "holes")}
    found = np.full(v["p1"].shape, np.nan)
    whole = np.all([v[name] > 0.0 for name in names], axis=0) & (v["p2"] < v["p1"]) & (v["pv"] < v["p1"])
    rows = np.flatnonzero(whole & (v["pv"] < v["pc"]))
    if len(rows) and not (inputs.columns["plates"] > 1.0).any():
        with np.errstate(all="ignore"):
            found[rows] = orifice_bore(*(x[rows] for x in v.values()))
    return found.reshape(state["p1"].shape)


def _predicted(v: State, inputs: Inputs, slow: bool) -> dict[str, Any]:
    possible = (v["p2"] < v["p1"]) & ~(v["pv"] >= v["p1"]) & (v["p2"] > 0.0)
    p1, p2 = np.where(possible, v["p1"], np.nan), np.where(possible, v["p2"], np.nan)
    sizes = (np.where(v["bare"] > 0.0, np.nan, v["valve_size"]), v["pipe_in"], v["pipe_out"])
    losses = fitting_losses(*sizes)
    ff = critical_pressure_factor(v["pv"], v["pc"])
    ff = np.where(np.isnan(v["ff"]), ff, v["ff"])
    head = p1 - ff * v["pv"]
    coefficient = _coefficient(v, p1, p2, head, sizes, losses, inputs, slow)
    fitted = np.where(np.isnan(v["fitted_coefficient"]), coefficient, v["fitted_coefficient"])
    fitted = np.where(np.isnan(fitted), v["claimed_coefficient"], fitted)
    total, inlet = losses
    choked = _choked(v, head, fitted, total, inlet)
    fp2 = geometry_factor2(fitted, total)
    shown = coefficient * v["coefficient_times"]
    cold = np.where(v["cold_recovery"] > 0.0, 1.0 / v["fl"] ** 2, (p1 - v["pv"]) / choked)
    return {
        "coefficient": shown,
        "fp": np.where(np.isnan(fitted) & (total != 0.0), np.nan, np.sqrt(fp2)),
        "flp": v["fl"] / np.sqrt(1.0 + v["fl"] ** 2 * inlet * fitted * fitted),
        "ff": ff, "dp": p1 - p2, "dp_choked": choked, "sigma": (p1 - v["pv"]) / (p1 - p2), "sigma_choked": cold,
        "choked": np.where(np.isnan(choked) | np.isnan(p2), np.nan, p1 - p2 >= choked),
        "travel": _travel(v, coefficient, inputs),
        "velocity_in": velocity(v["flow"], v["pipe_in"]), "velocity_out": velocity(v["flow"], v["pipe_out"]),
        "velocity_in_valve": velocity(v["flow"], v["valve_size"]),
        "pv": v["pv_fluid"] + v["pv_shown"], "density": v["density_fluid"], "pc": v["pc"],
    }  # fmt: skip


def _coefficient(
    v: State, p1: Any, p2: Any, head: Any, sizes: Any, losses: Any, inputs: Inputs, slow: bool
) -> Any:  # fmt: skip
    """The required coefficient: the closed form, or the equations stepped through where one is written another way."""
    viscous = (v["viscosity"], v["fd"], str(inputs.words["trim"])) if slow else ()
    pv, pc, fl = v["pv"], v["pc"], v["fl"]
    # Without pv, pc and FL nothing is known of choking: the free flow, which the check's tolerance allows for.
    free = np.isnan(pv) | np.isnan(pc) | np.isnan(fl)
    if free.any():
        pv, pc, fl = np.where(free, 0.0, pv), np.where(free, 1.0, pc), np.where(free, 1.0, fl)
    c = required_coefficient(v["flow"], p1, p2, pv, pc, v["density"], fl, *sizes, *viscous)
    odd = ~np.isnan(v["ff"]) | (v["recovery_power"] != 2.0) | ~np.isnan(v["fitted_coefficient"])
    rows = np.flatnonzero(odd)
    if len(rows):
        part = {name: x[rows] for name, x in v.items()}
        total, inlet = (np.broadcast_to(x, c.shape)[rows] for x in losses)
        c[rows] = _stepped(part, (p1 - p2)[rows], head[rows], c[rows], total, inlet)
    return c


def _stepped(v: State, dp: Any, head: Any, start: Any, total: Any, inlet: Any) -> Any:
    """``C = Q sqrt(rho/min(dp, dp_choked))/FP`` with both factors at the last C, step by step."""
    energy = v["flow"] ** 2 * v["density"]
    c = start
    for _ in range(STEPS):
        fitted = np.where(np.isnan(v["fitted_coefficient"]), c, v["fitted_coefficient"])
        drop = np.fmin(dp, _choked(v, head, fitted, total, inlet))
        c = np.sqrt(energy / (drop * geometry_factor2(fitted, total)))
    return c


def _choked(v: State, head: Any, fitted: Any, total: Any, inlet: Any) -> Any:
    """The choked drop, with the recovery factors squared or to the power that the switch says."""
    choked = choked_drop_of(head, v["fl"], fitted, total, inlet)
    power = v["recovery_power"]
    return choked if (power == 2.0).all() else head * (choked / head) ** (power / 2.0)


def _travel(v: State, coefficient: Any, inputs: Inputs) -> Any:
    word = inputs.words["characteristic"]
    if word not in ("linear", "equal percentage") or np.isnan(v["rated"]).all():
        return np.full(coefficient.shape, np.nan)
    ratio = coefficient * v["travel_ratio_times"] / v["rated"]
    one = _opening(ratio, word, v["rangeability"])
    if not (v["other_characteristic"] > 0.0).any():
        return one
    other = "linear" if word == "equal percentage" else "equal percentage"
    return np.where(v["other_characteristic"] > 0.0, _opening(ratio, other, v["rangeability"]), one)


def _opening(ratio: Any, word: str, rangeability: Any) -> Any:
    """Opening of a characteristic; beyond fully open its line goes on, as a vendor's 104 per cent does."""
    within = np.minimum(ratio, 1.0)
    opening = valve_travel(within, np.ones(ratio.shape), word, rangeability)
    if word == "linear":
        least = np.where(np.isnan(rangeability), 0.0, 1.0 / rangeability)
        return opening + (ratio - within) / (1.0 - least)
    return opening + np.log(ratio / within) / np.log(rangeability)
