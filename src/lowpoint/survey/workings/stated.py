"""The inputs of a case: what the list gives, what follows from the liquid's name, from the site and from the place."""

from __future__ import annotations

from typing import NamedTuple

from lowpoint.physics.names import is_salty
from lowpoint.survey.workings.paper import UNITS, Paper
from lowpoint.survey.workings.row import Row, there
from lowpoint.units import dimension

__all__ = ["write_inputs", "write_outlet"]

LIMIT_SYMBOLS = {"incipient": "sigma_i", "constant": "sigma_c", "damage": "sigma_d", "vibration": "sigma_v"}


class Input(NamedTuple):
    field: str
    symbol: str
    meaning: str
    unit: str


VALVE = (
    Input("valve_size", "d", "nominal valve size", "mm"),
    Input("pipe_in", "D1", "inside diameter of the pipe before it", "mm"),
    Input("pipe_out", "D2", "inside diameter of the pipe after it", "mm"),
    Input("rated", "C_rated", "flow coefficient fully open", "Kv"),
    Input("rangeability", "R", "inherent rangeability", ""),
    Input("fl", "FL", "recovery factor", ""),
    Input("fd", "Fd", "valve style modifier", ""),
)
PLATE = (
    Input("pipe_in", "D", "inside diameter of the pipe", "mm"),
    Input("bore", "bore", "diameter of the bore, or of each hole", "mm"),
    Input("bore_length", "L", "parallel length of the bore", "mm"),
    Input("holes", "holes", "number of holes", ""),
)


def metric(value: float, unit: str) -> float:
    """A number in SI in the unit of the working."""
    return dimension(UNITS[unit]).metric.from_si(value) if unit in UNITS else value


def write_inputs(paper: Paper, row: Row) -> None:
    """Everything that the case starts from, but p2 where a place gives it."""
    paper.section("Inputs")
    _state(paper, row)
    for entry in VALVE if row.cases.kind[row.place] == "valve" else PLATE:
        value = row.number(entry.field)
        if there(value):
            paper.take(entry.symbol, entry.meaning, metric(value, entry.unit), entry.unit, _origin(row, entry.field))
    paper.section("Properties of the liquid")
    _properties(paper, row)


def _state(paper: Paper, row: Row) -> None:
    if row.has("t"):
        paper.take("t", "temperature at the inlet", metric(row.number("t"), "deg C"), "deg C", row.where("t"))
    gauge = any(unit is not None and unit.gauge for unit in map(row.unit, ("p1", "p2", "pv", "pc", "outlet_pressure")))
    if gauge or row.word("outlet") is not None:
        _atmosphere(paper, row)
    _pressure(paper, row, Input("p1", "p1", "inlet pressure, absolute", "bar"))
    if row.origin("p2") == "given":
        _pressure(paper, row, Input("p2", "p2", "outlet pressure, absolute", "bar"))
    if row.origin("flow") != "computed" and row.has("flow"):
        paper.take("Q", "flow", metric(row.number("flow"), "m3/h"), "m3/h", row.where("flow"))


def _atmosphere(paper: Paper, row: Row) -> None:
    """The barometric pressure of the site, by its elevation where that was given."""
    if not row.has("atmosphere"):
        return
    if not row.by_elevation():
        source = row.where("atmosphere")
        paper.take("p_atm", "atmosphere of the site", metric(row.number("atmosphere"), "bar"), "bar", source)
        return
    column = row.column("elevation")
    source = row.where("elevation") if column else "given for the site"
    paper.take("z", "height of the site above sea level", row.number("elevation"), "m", source)
    paper.work("H_z", "geopotential height", "6356766*z/(6356766 + z)", "m", "ISO 2533")
    paper.work("p_atm", "atmosphere of the site", "1.01325*(1 - 0.0065*H_z/288.15)^5.25588", "bar", "ISO 2533")


def _pressure(paper: Paper, row: Row, entry: Input) -> None:
    """A pressure that the list gives, made absolute where it was given over the atmosphere."""
    value, unit = row.number(entry.field), row.unit(entry.field)
    if not there(value):
        return
    if unit is None or not unit.gauge or row.origin(entry.field) not in ("given", "item"):
        paper.take(entry.symbol, entry.meaning, metric(value, "bar"), "bar", _origin(row, entry.field))
        return
    over = f"{entry.symbol}_g"
    paper.take(over, entry.meaning.replace("absolute", "gauge"), metric(value - row.number("atmosphere"), "bar"), "bar",
               row.where(entry.field))  # fmt: skip
    paper.work(entry.symbol, entry.meaning, f"{over} + p_atm", "bar", "definition")


def _origin(row: Row, field: str) -> str:
    word = row.origin(field)
    if word == "typical":
        return f"typical value of the style '{row.word('style')}' at rated travel"
    return row.where(field)


def _library(row: Row) -> str:
    """The source of a property that was computed, by the liquid."""
    name = row.liquid()
    if name is None:
        return "CoolProp"
    return "IAPWS-08" if is_salty(name) else "IAPWS-95" if name == "water" else "CoolProp"


def _properties(paper: Paper, row: Row) -> None:
    liquid = f"{row.word('fluid') or 'the liquid'}"
    if row.has("salinity"):
        paper.take("S_salt", "salinity", 1000.0 * row.number("salinity"), "g/kg", row.where("salinity"))
    library = _library(row)
    salty = library == "IAPWS-08"
    at_t = f"{liquid} at t, by the library"
    at_inlet = f"{liquid} at t and p1, by the library"
    for entry, source, how in (
        (Input("pv", "pv", "vapour pressure at the inlet temperature", "bar"), library, at_t),
        (Input("pc", "pc", "critical pressure", "bar"), "CoolProp", f"{liquid}, by the library"),
        (Input("density", "rho", "density at the inlet", "kg/m3"), "Sharqawy" if salty else library, at_inlet),
        (Input("sound_speed", "c_F", "speed of sound in the liquid", "m/s"), "CoolProp", at_inlet),
    ):  # fmt: skip
        value = row.number(entry.field)
        if not there(value):
            continue
        if row.origin(entry.field) == "computed":
            paper.take(entry.symbol, entry.meaning, metric(value, entry.unit), entry.unit, source, how)
        elif entry.unit == "bar":
            _pressure(paper, row, entry)
        else:
            paper.take(entry.symbol, entry.meaning, metric(value, entry.unit), entry.unit, row.where(entry.field))
    _flow(paper, row)
    _viscosity(paper, row)


def _flow(paper: Paper, row: Row) -> None:
    """The volume flow of a mass flow."""
    if row.origin("flow") == "computed" and row.has("mass_flow", "flow"):
        paper.take("W", "mass flow", 3600.0 * row.number("mass_flow"), "kg/h", row.where("mass_flow"))
        paper.work("Q", "flow", "W/rho", "m3/h", "definition")


def _viscosity(paper: Paper, row: Row) -> None:
    """The kinematic viscosity that the Reynolds number needs."""
    if not row.has("viscosity"):
        return
    if row.origin("viscosity") == "computed" and row.has("kinematic"):
        paper.take("nu", "kinematic viscosity", row.number("kinematic"), "m2/s", row.where("kinematic"))
        return
    paper.take("mu", "dynamic viscosity", 1000.0 * row.number("viscosity"), "mPa.s", row.where("viscosity"))
    paper.work("nu", "kinematic viscosity", "mu/(1000*rho)", "m2/s", "definition")


def write_outlet(paper: Paper, row: Row) -> None:
    """The outlet pressure where the list gives a place instead: what is over it, the column up to it, and friction."""
    if row.origin("p2") != "place" or not row.has("p2", "density"):
        return
    paper.section(f"Outlet: {row.word('outlet')}")
    if row.has("outlet_pressure"):
        _pressure(paper, row, Input("outlet_pressure", "p_place", "pressure in the place, absolute", "bar"))
    else:
        paper.work("p_place", "pressure in the place: the atmosphere", "p_atm", "bar", "definition")
    terms = ["p_place"]
    if row.has("outlet_rise"):
        paper.take("rise", "from the outlet up to the place", row.number("outlet_rise"), "m", row.where("outlet_rise"))
        terms.append("rho*g*rise/100000")
    if row.has("outlet_loss"):
        loss = metric(row.number("outlet_loss"), "bar")
        paper.take("p_loss", "friction on the way", loss, "bar", row.where("outlet_loss"))
        terms.append("p_loss")
    leg = row.word("outlet") == "falling leg"
    equation = " + ".join(terms)
    note = "not below pv: a leg that would be drawn below it parts (common practice)" if leg else ""
    paper.work("p2", "outlet pressure, absolute", f"max({equation}, pv)" if leg else equation, "bar", "hydrostatics",
               note)  # fmt: skip
