"""What leaves: flashing share, velocity in the outlet pipe, and the noise, which is not redone by hand."""

from __future__ import annotations

import math

from lowpoint.physics import fluids
from lowpoint.physics.names import is_salty
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.row import Row, there
from lowpoint.survey.workings.stated import metric

__all__ = ["write_leaving", "write_noise"]


def write_leaving(paper: Paper, row: Row) -> None:
    """Flashing share, density behind the item, and the velocity of what leaves."""
    flashes = bool(row.found("flashing"))
    if flashes:
        paper.section("Flashing")
        _flash(paper, row)
    if not paper.has("Q"):
        return
    bore = next((field for field in ("pipe_out", "pipe_in", "valve_size") if row.has(field)), None)
    if bore is None or not there(row.found("outlet_velocity")):
        return
    paper.section("Outlet velocity")
    symbol = {"pipe_out": "D2", "pipe_in": "D1" if paper.has("D1") else "D", "valve_size": "d"}[bore]
    flow = "Q*rho/rho_out" if paper.has("rho_out") else "Q"
    paper.work("v_out", "mean velocity in the outlet pipe", f"{flow}/3600/(pi/4*({symbol}/1000)^2)", "m/s",
               "definition", "homogeneous mixture" if flashes else "", "outlet_velocity")  # fmt: skip


def _flash(paper: Paper, row: Row) -> None:
    name = row.liquid()
    if name is None or is_salty(name) or not row.has("t", "p1", "p2"):
        return
    heats = fluids.heats(name, row.number("t"), row.number("p1"), row.number("p2"))
    source = "IAPWS-95" if name == "water" else "CoolProp"
    for symbol, meaning, value, unit in (
        ("h1", "enthalpy of what enters, at t and p1", heats.inlet / 1000.0, "kJ/kg"),
        ("hf", "enthalpy of the boiling liquid at p2", heats.liquid / 1000.0, "kJ/kg"),
        ("hg", "enthalpy of the dry vapour at p2", heats.vapour / 1000.0, "kJ/kg"),
        ("rho_f", "density of the boiling liquid at p2", heats.liquid_density, "kg/m3"),
        ("rho_g", "density of the dry vapour at p2", heats.vapour_density, "kg/m3"),
    ):
        if not math.isfinite(value):
            return
        paper.take(symbol, meaning, value, unit, source, "by the library")
    paper.work("hfg", "heat of evaporation at p2", "hg - hf", "kJ/kg", "definition")
    paper.work("X", "share that evaporates, by mass", "min(max((h1 - hf)/hfg, 0), 1)", "", "definition",
               "isenthalpic, phases in equilibrium", "flash_share")  # fmt: skip
    if 0.0 < paper.number("X") < 1.0:
        paper.work("rho_out", "density of the mixture", "1/((1 - X)/rho_f + X/rho_g)", "kg/m3", "definition")


def write_noise(paper: Paper, row: Row) -> None:
    """The sound level with what it was predicted from."""
    level = row.found("noise")
    if not there(level):
        return
    paper.section("Noise")
    if row.has("pipe_wall"):
        paper.take("t_wall", "wall of the pipe after it", metric(row.number("pipe_wall"), "mm"), "mm",
                   row.where("pipe_wall"))  # fmt: skip
    paper.take("L_pA", "sound level 1 m from the pipe", level, "dB(A)", "IEC 60534-8-4",
               "predicted from Q, p1, p2, pv, rho, c_F, C, FL, Fd, xFz, d, the pipe and its wall by the library; not "
               "redone by hand")  # fmt: skip
