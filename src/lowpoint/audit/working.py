"""The working behind an audit: each case of a sheet step by step, every input with the cell that it stands in.

The steps are those of a survey's working, written from the sheet's own inputs as plain arithmetic in the units of the
standard, whatever the sheet's; what a library computes is taken, with its source. Each claim stands at the end beside
the step that it is compared with.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import replace

import numpy as np

from lowpoint.audit import water
from lowpoint.audit.asking import FORMS, INDICES, Asking, asking
from lowpoint.audit.checking import WORDS
from lowpoint.audit.inputs import ASSUMED, COMPUTED, CONSTANT, ON_SHEET, Inputs, inputs_of, slope
from lowpoint.audit.model import Claim, SheetReading, Value
from lowpoint.audit.telling import atmosphere_words
from lowpoint.physics.indices import from_upstream
from lowpoint.survey.assembling import blank_cases
from lowpoint.survey.calculating import calculate
from lowpoint.survey.completing import complete
from lowpoint.survey.model import Cases, Reading
from lowpoint.survey.outcome import Step, Working
from lowpoint.survey.workings.arithmetic import printed
from lowpoint.survey.workings.closing import write_index
from lowpoint.survey.workings.opening import write_opening
from lowpoint.survey.workings.paper import UNITS as KINDS
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.row import Row
from lowpoint.survey.workings.slow import write_final
from lowpoint.survey.workings.stated import metric, write_inputs
from lowpoint.survey.workings.valve import write_coefficient, write_drop, write_fittings, write_geometry
from lowpoint.units import dimension

__all__ = ["SYMBOLS", "sheet_workings"]

NUMBERS = ("t", "p1", "p2", "pv", "pc", "density", "flow", "salinity", "valve_size", "pipe_in", "pipe_out", "rated",
           "rangeability", "fl", "fd", "viscosity")  # fmt: skip
WORDS_OF = ("fluid", "style", "direction", "characteristic", "trim")
INPUTS = {"t": "t", "p1": "p1", "p2": "p2", "Q": "flow", "d": "valve_size", "D1": "pipe_in", "D2": "pipe_out",
          "C_rated": "rated", "R": "rangeability", "FL": "fl", "Fd": "fd", "S_salt": "salinity", "pv": "pv", "pc": "pc",
          "rho": "density", "mu": "viscosity", "trim": "trim"}  # fmt: skip
"""Symbol of an input's step, and the quantity that it shows."""
SYMBOLS = {"coefficient": "C", "fp": "FP", "flp": "FLP", "ff": "FF", "dp": "dp", "dp_choked": "dp_choked",
           "sigma": "sigma", "sigma_choked": "sigma_choked", "travel": "h", "velocity_in": "v_1", "velocity_out": "v_2",
           "velocity_in_valve": "v_d", "pv": "pv_t", "density": "rho_t"}  # fmt: skip
"""Symbol of the step that a claim is compared with."""
VELOCITIES = (("v_1", "mean velocity in the inlet pipe", "D1"), ("v_2", "mean velocity in the outlet pipe", "D2"),
              ("v_d", "mean velocity in the valve's nominal bore", "d"))  # fmt: skip
LIBRARY = {"noise": "IEC 60534-8-4", "flash_share": "CoolProp", "viscosity": "CoolProp", "pc": "CoolProp",
           "bore": "ISO 5167-2"}  # fmt: skip
"""Claims whose number no step redoes by hand."""
UNITS = {"C": "Kv", "dp": "bar", "dp_choked": "bar", "h": "%", "v_1": "m/s", "v_2": "m/s", "v_d": "m/s",
         "pv_t": "bar", "rho_t": "kg/m3"}  # fmt: skip
FIGURES = (7, 10, 13)
"""Significant figures, the first that do: where p1 is next to p2 or pv, seven are too few."""
AGREES = 1e-4
"""How far, relative, a step may lie from the number that the claim was compared with."""
DIFFERS = (
    "Step {symbol} comes to {worked:.6g} and the comparison of {cell} rests on {used:.6g} (SI): one of the two is "
    "wrong, please report it."
)


def sheet_workings(reading: SheetReading, claims: Iterable[Claim]) -> tuple[Working, ...]:
    """A working for each case of a sheet; ``claims`` are those of the sheet, as they were judged."""
    with np.errstate(all="ignore"):
        inputs = inputs_of(reading)
        asked = asking(inputs)
        cases = complete(_cases(inputs, asked))
        findings = calculate(cases)
    about = Reading(reading.name, "", (), (), (), (), ())
    told = tuple(claims)
    return tuple(_working(Row(cases, findings, about, place), inputs, told) for place in range(inputs.count))


def _cases(inputs: Inputs, asked: Asking) -> Cases:
    """The inputs as cases of a list, one a case of the sheet."""
    count = inputs.count
    numbers = {name: inputs.columns[name] for name in NUMBERS}
    if not asked.slow:
        numbers["viscosity"] = np.full(count, math.nan)
    words = {name: np.full(count, inputs.words[name], object) for name in WORDS_OF}
    if inputs.words["characteristic"] not in ("linear", "equal percentage"):
        words["characteristic"] = np.full(count, None, object)
    tag = np.full(count, inputs.reading.tag or "the item", object)
    return blank_cases(count).changed(tag=tag, case=np.array(inputs.cases, object), **numbers, **words)


def _working(row: Row, inputs: Inputs, claims: Sequence[Claim]) -> Working:
    here = [claim for claim in claims if _of_case(claim, inputs, row.place)]
    for figures in FIGURES:
        paper = _written(row, inputs, figures)
        wrong = [text for claim in here if (text := _difference(claim, inputs, paper))]
        if not wrong:
            break
    sections = [(title, tuple(_placed(step, inputs, row.place) for step in steps)) for title, steps in paper.sections]
    if here:
        sections.append(("Claims of the sheet", tuple(_compared(claim, paper, inputs) for claim in here)))
    case = inputs.cases[row.place]
    title = f"{inputs.reading.tag or 'item'}" + (f", case {case}" if case else "")
    return Working(title, tuple(sections), "", cautions=tuple(wrong), figures=paper.figures,
                   citations=paper.citations(), results=dict(paper.results))  # fmt: skip


def _written(row: Row, inputs: Inputs, figures: int) -> Paper:
    us = any(value.unit.startswith("psi") for value in inputs.reading.values)
    paper = Paper(us, figures)
    with np.errstate(all="ignore"):
        write_inputs(paper, row)
        write_drop(paper)
        write_geometry(paper, row)
        write_coefficient(paper, row)
        write_final(paper, row)
        write_fittings(paper, row)
        write_opening(paper, row)
        write_index(paper, row)
    _velocities(paper)
    _properties(paper, inputs, row.place)
    return paper


def _difference(claim: Claim, inputs: Inputs, paper: Paper) -> str:
    """A step that does not come to the number that its claim was compared with: a fault of ours, told."""
    symbol = _symbol(claim, paper, inputs)
    value = next((v for v in inputs.reading.values if (v.quantity, v.cell) == (claim.quantity, claim.cell)), None)
    if not symbol or value is None or not math.isfinite(claim.computed) or claim.verdict == "contradicts":
        return ""
    used = value.si + (claim.computed - value.number) * slope(value)
    worked = _si(paper, symbol)
    forms = [from_upstream(worked, form) for form in FORMS] if claim.quantity in INDICES else [worked]
    if claim.quantity.startswith("velocity"):
        forms.append(_si(paper, "v_d"))
    if any(abs(number - used) <= AGREES * (abs(used) + (claim.quantity in INDICES)) for number in forms):
        return ""
    return DIFFERS.format(symbol=symbol, worked=worked, cell=claim.cell, used=used)


def _si(paper: Paper, symbol: str) -> float:
    unit, number = UNITS.get(symbol, ""), paper.number(symbol)
    return 0.01 * number if unit == "%" else dimension(KINDS[unit]).metric.to_si(number) if unit in KINDS else number


def _symbol(claim: Claim, paper: Paper, inputs: Inputs) -> str:
    """The step that a claim is compared with; empty where there is none, or where it is that of another case."""
    symbol = SYMBOLS.get(claim.quantity, "")
    known = claim.case in inputs.cases or inputs.count == 1
    return symbol if symbol and known and paper.has(symbol) else ""


def _of_case(claim: Claim, inputs: Inputs, place: int) -> bool:
    """Is a claim compared in this case? One that holds for the item stands with the first."""
    return inputs.cases.index(claim.case) == place if claim.case in inputs.cases else place == 0


def _velocities(paper: Paper) -> None:
    paper.section("Velocities")
    for symbol, meaning, bore in VELOCITIES:
        if paper.has("Q", bore):
            paper.work(symbol, meaning, f"Q/3600/(pi/4*({bore}/1000)^2)", "m/s", "definition")


def _properties(paper: Paper, inputs: Inputs, place: int) -> None:
    """What the library says where the sheet states a property itself."""
    paper.section("Properties at the sheet's temperature, by the library")
    known = water.covers(inputs.fluid or "", inputs.columns["t"], inputs.columns["p1"])
    source = water.SOURCE if known else "CoolProp"
    for name, symbol, meaning, unit in (("pv", "pv_t", "vapour pressure", "bar"),
                                        ("density", "rho_t", "density", "kg/m3")):  # fmt: skip
        own = float(inputs.columns[f"{name}_fluid"][place])
        if math.isfinite(own) and inputs.source[name][place] == ON_SHEET:
            paper.take(symbol, f"{meaning} of {inputs.words['fluid']}", metric(own, unit), unit, source)


def _placed(step: Step, inputs: Inputs, place: int) -> Step:
    """A step of an input with the cell that it was read from, or what it was assumed by."""
    name = INPUTS.get(step.symbol)
    if step.equation or name is None:
        note = step.note.replace("no viscosity given: turbulent flow", "turbulent flow")
        return replace(step, note=note)
    return replace(step, source=_source(name, inputs, place), note=_assumed(name, inputs, place))


def _source(name: str, inputs: Inputs, place: int) -> str:
    value = inputs.reading.of(name, inputs.cases[place])
    if value is not None:
        return _cell(value, inputs.reading)
    word = inputs.source.get(name, ("",) * inputs.count)[place]
    if name in ("p1", "p2") and word in (ON_SHEET, ASSUMED):
        return "from the other pressure and the drop of the sheet"
    if name == "flow" and word:
        mass = inputs.reading.of("mass_flow", inputs.cases[place])
        return "mass flow over density" if mass is None else f"{_cell(mass, inputs.reading)}, over the density"
    if word in (COMPUTED, CONSTANT):
        return f"the library, for {inputs.words['fluid']}"
    return _typical(name, inputs)


def _typical(name: str, inputs: Inputs) -> str:
    if name in ("fl", "fd"):
        return f"typical value of the style '{inputs.words['style']}' at rated travel"
    return "line size" if name in ("pipe_in", "pipe_out") else "assumed"


def _cell(value: Value, reading: SheetReading) -> str:
    unit = f" {value.unit}" if value.unit else ""
    text = f"{value.cell}: {value.raw}{unit}"
    return f"{text}, over an atmosphere of {atmosphere_words(reading)}" if value.gauge else text


def _assumed(name: str, inputs: Inputs, place: int) -> str:
    """What an input that stands on the sheet was assumed to mean."""
    value = inputs.reading.of(name, inputs.cases[place])
    if value is None or inputs.source.get(name, ("",) * inputs.count)[place] != ASSUMED:
        return ""
    if name in ("pipe_in", "pipe_out"):
        return "nominal size taken as the inside diameter"
    return "read as absolute: the sheet does not say" if value.gauge is None else "the atmosphere is assumed"


def _compared(claim: Claim, paper: Paper, inputs: Inputs) -> Step:
    """A claim beside the step or the library's number that it is compared with."""
    what = WORDS.get(claim.quantity, claim.quantity)
    stated = claim.claimed_word or (printed(claim.claimed) if math.isfinite(claim.claimed) else "")
    computed = claim.computed_word or (printed(claim.computed, 5) if math.isfinite(claim.computed) else "no number")
    symbol = _symbol(claim, paper, inputs)
    where = f"step {symbol}" if symbol else LIBRARY.get(claim.quantity, "see the finding")
    note = f"stated in {claim.cell}: {stated} {claim.unit}".rstrip() + f"; {claim.verdict}"
    return Step(symbol or claim.quantity, f"{what}, computed", "", "", computed, claim.unit, where, note)
