"""Checks of a working: each step against Python's own arithmetic, its results against the survey's."""

from __future__ import annotations

import math
import re
from typing import Any

import pytest

from lowpoint.survey import Survey
from lowpoint.survey.outcome import Step, Working
from lowpoint.survey.working import working
from lowpoint.survey.workings.arithmetic import printed, substituted
from lowpoint.survey.workings.paper import CONSTANTS

__all__ = ["check_working", "step_of"]

KEY = ("coefficient", "sigma", "choked_drop", "choked_limit", "drop", "throat_pressure", "travel", "capacity",
       "incipient", "constant", "damage", "vibration", "margin_incipient", "margin_constant", "margin_damage",
       "margin_vibration", "margin_choked", "allowed_drop", "allowed_outlet", "flash_share", "outlet_velocity",
       "passed")  # fmt: skip
"""What a working must come to wherever the survey found it."""


def by_python(numbers: str) -> Any:
    """What an expression comes to, by Python itself: no code of the package."""
    names = {"sqrt": math.sqrt, "ln": math.log, "log10": math.log10, "min": min, "max": max}
    return eval(numbers.replace("^", "**"), {"__builtins__": {}}, names)


def half_last_figure(value: str, figures: int) -> float:
    x = float(value)
    return 0.0 if x == 0.0 else 0.5 * 10.0 ** (math.floor(math.log10(abs(x))) - figures + 1)


def check(step: Step, figures: int) -> None:
    """A step comes to its printed value; a small share of a rounding more, for the sum of floating point."""
    if step.value == "no answer":
        with pytest.raises((ValueError, ZeroDivisionError)):
            by_python(step.numbers)
        return
    found = by_python(step.numbers)
    if step.value in ("yes", "no"):
        assert found is (step.value == "yes"), step
        return
    slack = half_last_figure(step.value, figures) * (1.0 + 1e-6) + 1e-15
    assert abs(found - float(step.value)) <= slack, (step, found)


def check_working(survey: Survey, place: int) -> Working:
    """Every step recomputes, equations and numbers say the same, results are the survey's."""
    made = working(survey, place)
    worth: dict[str, str] = {**CONSTANTS, "pi": printed(math.pi, made.figures)}
    for step in made.steps():
        assert bool(step.equation) == bool(step.numbers)
        assert step.meaning
        assert step.source
        assert step.value != "no answer" or made.errors, step
        if step.numbers:
            symbols = set(re.findall(r"(?<![\w.])[A-Za-z]\w*", step.equation)) - {"sqrt", "ln", "log10", "min", "max"}
            assert symbols <= set(worth), f"{step.symbol} uses what no step before it gives: {symbols - set(worth)}"
            assert step.numbers == substituted(step.equation, worth)
            check(step, made.figures)
        worth[step.symbol] = step.value
        if step.symbol in ("L", "holes"):  # of each plate of a set
            worth |= {f"{step.symbol}_{plate}": step.value for plate in range(1, 9)}
    assert not [caution for caution in made.cautions if "please report" in caution]
    for name, value in made.results.items():
        expected = float(getattr(survey.findings, name)[place])
        allowed = 1e-4 * (1.0 + abs(expected) if name.startswith("margin") else abs(expected))
        assert math.isnan(expected) or abs(value - expected) <= allowed, (name, value, expected)
    if survey.findings.regime[place] is not None:
        there = {name for name in KEY if not math.isnan(float(getattr(survey.findings, name)[place]))}
        if not survey.findings.flashing[place]:
            there.discard("flash_share")  # 0, without a step
        assert there <= set(made.results), there - set(made.results)
    return made


def step_of(made: Working, symbol: str) -> Step:
    """The first step of a symbol."""
    return next(step for step in made.steps() if step.symbol == symbol)
