"""A plate or a few behind a valve, which take a part of its drop: bores, their own verdict, what is left to the valve.

One plate is the one of :func:`lowpoint.design.best_plate`, whose least margin of both devices over all cases is
highest. Where that does not do, two and three plates are designed as sets that take, at the flow that asks most, the
pressure that the valve needs behind it. Every case then runs through both: a plate's drop falls with the square of the
flow, so at the least flow it leaves the valve alone.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint import design
from lowpoint.errors import LowpointError
from lowpoint.survey.model import Cases
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing
from lowpoint.survey.remedies.pressures import raise_needed
from lowpoint.survey.remedies.trying import Trial, advice, tried

__all__ = ["MOST_PLATES", "held_to", "plates_downstream", "worst_first"]

MOST_PLATES = 3
BEYOND = (1.25, 1.0)
"""How much more than the least a set of plates is tried with, so that the valve has a margin too."""
HEADROOM = 1.0 + 1e-9
"""The pressure before the plates above what they ask for: no digit of their flow is lost to rounding."""
_NOT_TRIED = "a plate behind the valve was not tried: it is designed for the {} worst items only"
_NO_PIPE = "a plate behind the valve was not tried: the pipe is not known (give the outlet pipe's bore or a valve size)"
_NONE = "a plate behind the valve does not do: none of up to {} leaves every case its drop and keeps its own limit"
_ESTIMATE = "loss and limits of plates are published fits: expect 10 % of the drop and 20 % of the limits against test"
_STRENGTH = "strength not checked; a blocked or started-up line loads a plate with more than its share"
_APART = "plates 6 pipe diameters apart (common practice)"


def held_to(kept: str) -> str:
    """The limit that plates are held to: incipient where the item is, else constant cavitation.

    A plate has no tested limits for damage or vibration; the constant one is milder than both.
    """
    return "incipient" if kept == "incipient" else "constant"


def worst_first(failing: Failing, wanted: Any, most: int) -> tuple[list[int], list[int]]:
    """Wanted items, the worst ones up to a number, and the rest."""
    margin = np.nan_to_num(failing.by_item(np.fmin, failing.found.margin))
    order = [int(item) for item in np.argsort(margin, kind="stable") if wanted[item]]
    return sorted(order[:most]), sorted(order[most:])


@dataclass(frozen=True, eq=False)
class _Job:
    """One item: its own table, the pipe, the pressure that each case needs behind the valve."""

    number: int
    failing: Failing
    line: design.Line
    duties: design.Cases
    kind: str
    between: Any


def plates_downstream(failing: Failing, plates_for: int = 100) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy, for valves that do not flash."""
    wanted = failing.any(failing.bad) & ~failing.any(failing.found.flashing | (failing.cases.kind != "valve"))
    served, rest = worst_first(failing, wanted, plates_for)
    for number in rest:
        yield number, advice(failing, number, "plate downstream", _NOT_TRIED.format(plates_for))
    raised = raise_needed(failing)
    jobs = []
    for number in served:
        job = _job(failing, number, raised)
        if job is None:
            yield number, advice(failing, number, "plate downstream", _NO_PIPE)
        else:
            jobs.append(job)
    for job in jobs:
        found = next((trial for trial in _attempts(job) if trial.cures[0]), None)
        if found is None:
            yield job.number, advice(failing, job.number, "plate downstream", _NONE.format(MOST_PLATES))
        else:
            yield job.number, _remedy(found)


def _job(failing: Failing, number: int, raised: Any) -> _Job | None:
    flags = np.arange(failing.count) == number
    part, rows = failing.only(flags), failing.rows_of(number)
    cases = part.cases
    pipe = next((float(x[0]) for x in (cases.pipe_out, cases.pipe_in, cases.valve_size) if not np.isnan(x[0])), None)
    if pipe is None:
        return None
    between = np.where(part.bad, cases.p2 + raised[rows], cases.p2)
    return _Job(number, part, design.Line(pipe=pipe), duties(cases, cases.p1, cases.p2, "outlet"),
                held_to(str(part.found.keep[0])), between)  # fmt: skip


def duties(cases: Cases, p1: Any, p2: Any, held: str) -> design.Cases:
    """The cases as the design of plates takes them."""
    viscosity: Any = None if np.isnan(cases.viscosity).any() else cases.viscosity
    liquid = design.Liquid(density=cases.density, pv=cases.pv, pc=cases.pc, viscosity=viscosity)
    names = tuple(str(place + 1) for place in range(cases.count))
    return design.Cases(flow=cases.flow, p1=p1, p2=p2, liquid=liquid, held=held, names=names)


def _attempts(job: _Job) -> Iterator[Trial]:
    """Trials of one plate, then of more."""
    try:
        found = design.best_plate(_valve(job.failing), job.line, job.duties, None, design.Criteria(kind=job.kind))
        yield _tried(job, found.rating.plate.plates)
    except LowpointError:
        pass
    if np.isnan(job.between).any():
        return
    for count in range(1, MOST_PLATES + 1):
        for beyond in BEYOND:
            plates = _set(job, count, beyond)
            if plates is not None:
                yield _tried(job, plates)


def _valve(failing: Failing) -> design.Valve:
    """The valve as it stands in each case; where its limits move with the opening, the trial has the last word."""
    found, cases = failing.found, failing.cases
    kept = str(found.keep[0])
    limits: dict[str, Any] = {}
    for name in ("incipient", "constant", "damage"):
        limit = getattr(found, f"{name}_scaled")
        limits[name] = None if np.isnan(limit).any() else limit
    kind = kept if kept == "choked" or limits.get(kept) is not None else "choked"
    sizes: dict[str, Any] = {name: None if np.isnan(getattr(cases, name)).any() else getattr(cases, name)
                             for name in ("valve_size", "pipe_in", "pipe_out", "rated")}  # fmt: skip
    return design.Valve(fl=found.fl, kind=kind, **limits, **sizes)


def _set(job: _Job, count: int, beyond: float) -> design.PlateSet | None:
    """Plates that raise the pressure behind the valve to what every case needs, times ``beyond``; None for none."""
    cases = job.failing.cases
    dynamic = job.duties.dynamic(job.line.pipe)
    loss = beyond * float(np.max((job.between - cases.p2) / dynamic))
    before = cases.p2 + loss * dynamic
    if not loss > 0.0 or (before >= cases.p1).any():
        return None
    worst = int(np.argmax(cases.flow))
    one = cases.take(np.array([worst]))
    wanted = duties(one, before[[worst]], one.p2, "both")
    try:
        made = design.design_set(wanted, job.line, None, design.Criteria(kind=job.kind, rounding="down"), plates=count)
    except LowpointError:
        return None
    return made.plates


def _tried(job: _Job, plates: design.PlateSet) -> Trial:
    """The valve before these plates, and the plates, in every case."""
    failing, cases = job.failing, job.failing.cases
    rating = design.rate(plates, job.duties, design.Criteria(kind=job.kind))
    between = rating.pressures[0] * HEADROOM
    rows = np.arange(cases.count)
    valve = cases.changed(p2=between, outlet=None)
    set_ = plate_cases(cases, plates, job.kind).changed(p1=between)
    both = joined(valve, set_)
    order = np.argsort(np.concatenate([rows, rows]), kind="stable")
    return tried(failing, both.take(order), np.concatenate([rows, rows])[order],
                 np.concatenate([np.zeros(len(rows), np.bool_), np.ones(len(rows), np.bool_)])[order])  # fmt: skip


def plate_cases(cases: Cases, plates: design.PlateSet, kind: str) -> Cases:
    """Cases of a set of plates (or of one) with the liquids, flows and pressures of other cases."""
    bores = tuple(float(bore) for bore in plates.column("bore"))
    alone = len(bores) == 1
    sizes: dict[str, Any] = {"pipe_in": plates.pipe, "bore": bores[0] if alone else np.nan, "holes": np.nan,
                             "bore_length": np.nan, "spacing": plates.line.apart}  # fmt: skip
    first = plates.plates[0]  # all are made alike
    sizes |= {"holes": first.holes} if first.holes != 1.0 else {}
    sizes |= {"bore_length": first.bore_length} if first.bore_length else {}
    nothing = ("valve_size", "pipe_out", "pipe_wall", "rated", "rangeability", "fl", "fd", "xfz", "incipient",
               "constant", "damage", "vibration", "size_ref", "head_ref")  # fmt: skip
    words = ("style", "direction", "characteristic", "table", "trim", "form", "limits_basis", "fl_basis", "outlet")
    columns: dict[str, Any] = dict.fromkeys(nothing, np.nan) | dict.fromkeys(words)
    set_of = np.empty(cases.count, object)
    for place in range(cases.count):
        set_of[place] = None if alone else bores
    source = {name: np.full(cases.count, None, object) if name in ("fl", "fd", "incipient") else words_
              for name, words_ in cases.source.items()}  # fmt: skip
    suffix = "plate" if alone else "plates"
    tag = np.array([f"{tag} {suffix}" for tag in cases.tag], object)
    changed = cases.changed(**columns, **sizes, kind="orifice" if alone else "plates", keep=kind, tag=tag,
                            estimate=False)  # fmt: skip
    return changed.changed(bores=set_of, source=source)


def joined(*parts: Cases) -> Cases:
    """Cases one after another; tables and the like are those of the first."""
    columns: dict[str, Any] = {}
    for name, value in vars(parts[0]).items():
        if isinstance(value, np.ndarray):
            columns[name] = np.concatenate([getattr(part, name) for part in parts])
    source = {name: np.concatenate([part.source[name] for part in parts]) for name in parts[0].source}
    return Cases(**columns, tables=parts[0].tables, source=source)


def bores_words(bores: Sequence[float]) -> str:
    """``one plate, bore 42 mm`` or ``two plates, bores 42 and 51.5 mm``."""
    number = ("one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve")
    if len(bores) == 1:
        return f"one plate, bore {wording.size(bores[0])}"
    return f"{number[len(bores) - 1]} plates, bores {wording.sizes(bores)}"


def _remedy(trial: Trial) -> Remedy:
    cases, found, added = trial.cases, trial.found, trial.added
    plate = int(np.flatnonzero(added)[0])
    bores = cases.bores[plate] or (float(cases.bore[plate]),)
    least = float(np.nanmin(found.margin[added]))
    coefficient = float(np.nanmax(found.coefficient[~added]))
    of = wording.limit_words(found.keep[added])
    pipe = float(cases.pipe_in[plate])
    what = f"{bores_words(bores)} behind the valve in the pipe of {wording.size(pipe)}"
    text = (f"{what}, with a least margin to the {of} of {wording.share(least)}; of the valve {trial.comes_to(0)}, "
            f"at most {wording.kv(coefficient, 'up')}")  # fmt: skip
    figures = {f"bore {i}": (float(bore), "size") for i, bore in enumerate(bores, 1)}
    figures |= {"margin of the plates": (least, "ratio"), "greatest coefficient of the valve": (coefficient,
                "coefficient"), "pipe": (pipe, "size")}  # fmt: skip
    cautions = [_ESTIMATE, _STRENGTH] + ([_APART] if len(bores) > 1 else [])
    return trial.remedy(0, "plate downstream", what, figures, cautions, text=text)
