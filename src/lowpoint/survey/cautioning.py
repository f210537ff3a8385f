"""What a reader of an answer must know: the declared cautions of what was used, and those of the list itself."""

from __future__ import annotations

from itertools import combinations
from typing import Any

import numpy as np

from lowpoint.physics.flashing import flash_sound_speed
from lowpoint.physics.names import resolve
from lowpoint.survey.calculating import filled_pipes
from lowpoint.survey.judged_plates import caution_plates
from lowpoint.survey.limiting import LIMITS, scale_factors, stated
from lowpoint.survey.model import Cases, Findings, absent
from lowpoint.survey.speaking import Lines, cautions_of, why

__all__ = ["add_cautions"]

NOT_CARRIED = (
    "the limits were used as stated, without a {0} effect: test {0} or its exponent is not given, and a {0} above the "
    "tested one raises them"
)
NO_INCIPIENT = "no incipient limit is given, so the state is not judged clear however high the index"
NOT_KEPT = "the limit to keep is not given: the margin counts to the mildest one that is"
SWAPPED_ORDER = (
    "the limits are not in their usual order (incipient above constant above damage above vibration): check their "
    "forms and columns; the margin counts to the highest of the limit to keep and those more severe"
)
TOO_SMALL = (
    "the required coefficient is above the rated one: the flow does not pass, and the index is that of no opening"
)
LOW, HIGH = "the opening is below 10 per cent of travel", "the opening is above 90 per cent of travel"
NO_PURE = "how much flashes is not known: it can be computed for pure liquids of known name and temperature only"
BEYOND = (
    "the valve would be {} open than the {} row of its table: the limits there are not known, and FL is that row's "
    "where the list gives none"
)
SONIC = (
    "the flashing mixture would leave at {:.4g} m/s, faster than its own sound of {:.4g} m/s (homogeneous "
    "equilibrium): the outlet chokes there and p2 is not reached at the valve; a wider outlet, or a vessel behind it"
)


def add_cautions(cases: Cases, findings: Findings, answered: Any, lines: Lines) -> None:
    """Add the cautions of every case that has an answer."""
    valves = np.flatnonzero(answered & (cases.kind == "valve"))
    if len(valves):
        _of_valves(cases, findings, valves, lines)
    caution_plates(cases, findings, answered, lines)
    _of_limits(cases, findings, answered, lines)
    lines.caution(answered & findings.over_capacity & (cases.kind == "valve"), TOO_SMALL)
    lines.caution(answered & findings.low_travel, LOW)
    lines.caution(answered & findings.high_travel, HIGH)
    lines.caution(answered & findings.flashing & np.isnan(findings.flash_share), NO_PURE)
    _of_sound(cases, findings, lines)


def _of_sound(cases: Cases, findings: Findings, lines: Lines) -> None:
    """Where the mixture that leaves chokes its own outlet: a finding of its own, whatever the valve does."""
    rows = np.flatnonzero((findings.flash_share > 0.0) & (findings.flash_share < 1.0))
    if not len(rows):
        return
    names = np.array([resolve(name) for name in cases.fluid[rows].tolist()])
    sound = flash_sound_speed(names, cases.t[rows], cases.p1[rows], cases.p2[rows])
    for place, own, speed in zip(rows.tolist(), sound.tolist(), findings.outlet_velocity[rows].tolist(), strict=True):
        if speed > own:
            lines.cautions.append((place, SONIC.format(speed, own)))


def _of_valves(cases: Cases, findings: Findings, rows: Any, lines: Lines) -> None:
    sizes = filled_pipes(cases)
    state = {
        name: getattr(cases, name)[rows]
        for name in (
            "flow",
            "p1",
            "p2",
            "pv",
            "pc",
            "density",
            "viscosity",
            "fd",
            "rated",
            "rangeability",
            "sound_speed",
            "pipe_wall",
            "xfz",
        )
    }
    state |= {name: x[rows] for name, x in zip(("valve_size", "pipe_in", "pipe_out"), sizes, strict=True)}
    state |= {"fl": findings.fl[rows], "coefficient": findings.coefficient[rows]}
    cautions_of(lines, "COEFFICIENT", rows, {**state, "result": state["coefficient"], "trim": cases.trim[rows]})
    _of_travel(cases, findings, rows, state, lines)
    noisy = ~np.isnan(findings.noise[rows])
    if noisy.any():
        cautions_of(lines, "NOISE", rows, {**state, "result": findings.noise[rows]}, noisy)


def _of_travel(cases: Cases, findings: Findings, rows: Any, state: dict[str, Any], lines: Lines) -> None:
    travel = findings.travel[rows]
    tables = [name for name, table in cases.tables.items() if table.coefficient is not None]
    by_word = ~np.isin(cases.table[rows].astype(str), tables)
    for word in ("linear", "equal percentage"):
        there = by_word & (cases.characteristic[rows] == word)
        known = there & ~np.isnan(travel)
        if known.any():
            lines.caution_at(
                rows[known & (travel < 0.05)], "below 5 % opening a real characteristic leaves its formula"
            )
        lost = there & np.isnan(travel) & ~np.isnan(state["rated"]) & ~findings.over_capacity[rows]
        if lost.any():
            arguments = {"coefficient": state["coefficient"], "rated": state["rated"], "characteristic": word,
                         "rangeability": state["rangeability"]}  # fmt: skip
            why(lines, "TRAVEL", rows, lost, arguments, caution=True)
    _beyond_table(cases, findings, rows[~by_word & np.isnan(travel) & ~findings.over_capacity[rows]], lines)


def _beyond_table(cases: Cases, findings: Findings, rows: Any, lines: Lines) -> None:
    """Valves whose table has no opening for the flow, at either end."""
    last = {name: table.coefficient[-1] for name, table in cases.tables.items() if table.coefficient is not None}
    more = findings.coefficient[rows] > np.array([last[name] for name in cases.table[rows].tolist()], float)
    lines.caution_at(rows[~more], BEYOND.format("less", "first"))
    lines.caution_at(rows[more], BEYOND.format("more", "last"))


def _of_limits(cases: Cases, findings: Findings, answered: Any, lines: Lines) -> None:
    given = {name: ~np.isnan(limit) for name, limit in stated(cases, findings.travel).items()}
    some = answered & np.any(list(given.values()), axis=0)
    valve = some & (cases.kind == "valve")
    by_size, by_head = scale_factors(cases, cases.valve_size)
    lines.caution(valve & ~by_size, NOT_CARRIED.format("size"))
    lines.caution(valve & ~by_head, NOT_CARRIED.format("head"))
    scaled = valve & (by_size | by_head)
    no_credit = (by_size & (cases.valve_size < cases.size_ref)) | (by_head & (cases.p1 - cases.pv < cases.head_ref))
    lines.caution(scaled & no_credit, "the size or head is below the tested one: no credit is given for it")
    own = some & (cases.kind != "plates")  # a set has those of its plates
    lines.caution(own & (cases.method == "tullis"), "the form of the scale method tullis is from memory")
    lines.caution(own & absent(cases.limits_basis), "the basis of the limits is not stated: taken as tested")
    of_fl = answered & (cases.kind == "valve") & absent(cases.fl_basis)
    lines.caution(of_fl, "the basis of FL is not stated: taken as tested")
    lines.caution(answered & np.isnan(findings.incipient), NO_INCIPIENT)
    order = np.fmax.reduce([getattr(findings, severe) - getattr(findings, mild)
                            for mild, severe in combinations(LIMITS, 2)])  # fmt: skip
    lines.caution(answered & (order > 0.0), SWAPPED_ORDER)
    asked = ~absent(cases.keep)
    not_given = [(cases.keep == name) & np.isnan(getattr(findings, name)) for name in LIMITS]
    lines.caution(answered & asked & np.any(not_given, axis=0), NOT_KEPT)
    acoustic = np.isnan(stated(cases, findings.travel)["incipient"]) & ~np.isnan(findings.incipient)
    lines.caution(answered & acoustic & (cases.kind == "valve"), "the incipient limit is 1/xFz, acoustic: a screening "
                  "value, never a damage limit")  # fmt: skip
