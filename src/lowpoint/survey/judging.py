"""The verdicts with their words: what is missing or impossible, the cautions, and what only some cases have.

``judge`` completes the cases, calculates, and says why a case has no answer and what a reader of an answer must know.
Flashing share, outlet velocity and noise are added here: no verdict rests on them.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.physics.flashing import flash_density, flash_share
from lowpoint.physics.names import resolve
from lowpoint.physics.noise import valve_noise
from lowpoint.survey.calculating import calculate, filled_pipes, without
from lowpoint.survey.cautioning import add_cautions
from lowpoint.survey.checking import add_errors
from lowpoint.survey.completing import complete
from lowpoint.survey.model import Cases, Findings, absent
from lowpoint.survey.speaking import Lines

__all__ = ["judge"]


def judge(cases: Cases, *, completed: bool = False) -> tuple[Cases, Findings]:
    """The completed cases and all that was found for each, errors and cautions included."""
    cases = cases if completed else complete(cases)
    findings = calculate(cases)
    lines = Lines(cases)
    lines.errors += cases.problems
    lines.cautions += cases.remarks
    add_errors(cases, findings, lines)
    failed = sorted({place for place, _ in lines.errors})
    findings = without(findings, failed)
    answered = np.ones(cases.count, np.bool_)
    answered[failed] = False
    with np.errstate(all="ignore"):
        findings = _extras(cases, findings, answered)
    add_cautions(cases, findings, answered, lines)
    return cases, replace(findings, errors=_by_case(lines.errors, cases.count),
                          cautions=_by_case(lines.cautions, cases.count))  # fmt: skip


def _by_case(said: list[tuple[int, str]], count: int) -> list[list[str]]:
    found: list[list[str]] = [[] for _ in range(count)]
    for place, sentence in said:
        if sentence not in found[place]:
            found[place].append(sentence)
    return found


def _extras(cases: Cases, findings: Findings, answered: Any) -> Findings:
    share, density = _flash(cases, findings, answered)
    _, pipe_in, pipe_out = filled_pipes(cases)
    bore = np.where(np.isnan(pipe_out), pipe_in, pipe_out)
    velocity = cases.flow * cases.density / density / (0.25 * np.pi * bore * bore)
    return replace(findings, flash_share=share, outlet_velocity=np.where(answered, velocity, np.nan),
                   noise=_noise(cases, findings, answered))  # fmt: skip


def _flash(cases: Cases, findings: Findings, answered: Any) -> tuple[Any, Any]:
    """Vapour share and density of what leaves; the inlet's density where nothing flashes."""
    share = np.where(answered & ~findings.flashing, 0.0, np.nan)
    density = np.where(findings.flashing, np.nan, cases.density)
    known = {name: _canonical(name) for name in {*cases.fluid.tolist()} - {None}}
    names = np.array([known.get(name) for name in cases.fluid.tolist()], object)
    rows = np.flatnonzero(answered & findings.flashing & ~absent(names) & ~np.isnan(cases.t))
    if len(rows):
        state = (names[rows].astype(str), cases.t[rows], cases.p1[rows], cases.p2[rows])
        share[rows], density[rows] = flash_share(*state), flash_density(*state)
    return share, density


def _canonical(name: str) -> str | None:
    try:
        return resolve(name)
    except ValueError:
        return None


def noise_rows(cases: Cases, findings: Findings, answered: Any) -> Any:
    """Places of the valves whose data allow a noise level."""
    data = (cases.sound_speed, cases.fd, cases.valve_size, cases.pipe_wall, findings.coefficient, findings.fl)
    mask = answered & (cases.kind == "valve") & ~findings.flashing
    for x in data:
        mask = mask & ~np.isnan(x)
    return np.flatnonzero(mask)


def _noise(cases: Cases, findings: Findings, answered: Any) -> Any:
    levels = np.full(cases.count, np.nan)
    rows = noise_rows(cases, findings, answered)
    if len(rows):
        _, _, pipe = filled_pipes(cases)
        names = ("flow", "p1", "p2", "pv", "density", "sound_speed")
        state: tuple[Any, ...] = tuple(getattr(cases, name)[rows] for name in names)
        valve = (findings.coefficient, findings.fl, cases.fd, cases.valve_size, pipe, cases.pipe_wall, cases.xfz)
        levels[rows] = valve_noise(*state, *(x[rows] for x in valve))
    return levels
