"""The sheet of paper that a working is written on: what each symbol is worth, and the steps so far, in sections."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType

from lowpoint.sources import SOURCES
from lowpoint.survey.outcome import Step
from lowpoint.survey.workings.arithmetic import FIGURES, evaluate, printed, substituted, symbols_of
from lowpoint.units import GRAVITY, RHO0, dimension

__all__ = ["CONSTANTS", "UNITS", "Paper"]

CONSTANTS: Mapping[str, str] = MappingProxyType({
    "N2": "0.0016", "N4": "0.0707", "N18": "0.865", "N32": "140", "rho0": f"{RHO0:g}", "g": f"{GRAVITY:g}",
})  # fmt: skip
"""Of IEC 60534-2-1 for Kv, m3/h, bar (N1 = 1), mm and m2/s; density of the reference water, kg/m3."""

_MEANINGS = (
    ("rho0", "density of the reference water, 15 deg C", "kg/m3", "IEC 60534-2-1"),
    ("N2", "constant of the fittings", "Kv^2/mm^4", "IEC 60534-2-1"),
    ("N4", "constant of the Reynolds number", "m2/s/(m3/h)*sqrt(Kv)", "IEC 60534-2-1"),
    ("N32", "constant of reduced trim", "(mm^2/Kv)^(2/3)", "IEC 60534-2-1"),
    ("g", "standard gravity", "m/s2", "hydrostatics"),
    ("pi", "circumference over diameter of a circle", "", "definition"),
)

UNITS: Mapping[str, str] = MappingProxyType({
    "bar": "pressure", "m3/h": "flow", "mm": "size", "kg/m3": "density", "Kv": "coefficient", "m/s": "velocity",
    "deg C": "temperature", "m": "elevation",
})  # fmt: skip
"""Kinds of quantity behind the units of a working, for the same number in US units."""


class Paper:
    """Writes steps; each symbol keeps the value as it was printed, and later steps use that."""

    def __init__(self, us: bool = False, figures: int = FIGURES) -> None:
        self.values: dict[str, str] = {**CONSTANTS, "pi": printed(math.pi, figures)}
        self.figures = figures
        self.results: dict[str, float] = {}
        """What the working comes to, in SI, by the name of the finding."""
        self.crossed = ""
        """The limit that the verdict's comparisons found crossed."""
        self._us = us
        self._sections: list[tuple[str, list[Step]]] = []

    def section(self, title: str) -> None:
        """Begin a section; one that stays empty is left out."""
        self._sections.append((title, []))

    @property
    def sections(self) -> tuple[tuple[str, tuple[Step, ...]], ...]:
        """The sections with at least one step, and the constants that they use."""
        written = tuple((title, tuple(steps)) for title, steps in self._sections if steps)
        used = {word for _, steps in written for step in steps for word in symbols_of(step.equation)}
        constants = tuple(Step(symbol, meaning, "", "", self.values[symbol], unit, source)
                          for symbol, meaning, unit, source in _MEANINGS if symbol in used)  # fmt: skip
        return (*written, ("Constants", constants)) if constants else written

    def has(self, *symbols: str) -> bool:
        """Does every one of these symbols have a number?"""
        return all(self.values.get(symbol, "no answer") != "no answer" for symbol in symbols)

    def number(self, symbol: str) -> float:
        """The number behind a symbol, as printed; NaN where it has none."""
        return float(self.values[symbol]) if self.has(symbol) else math.nan

    def take(self, symbol: str, meaning: str, value: float, unit: str, source: str, note: str = "") -> float:
        """A number that comes from outside: an input, a constant of the case, an answer of a library."""
        return self._write(symbol, meaning, "", "", value, unit, source, note)

    def work(self, symbol: str, meaning: str, equation: str, unit: str, source: str, note: str = "",
             finding: str = "") -> float:  # fmt: skip
        """A step: the equation with the printed numbers, and what that comes to; ``finding`` is what it finds.

        NaN, and no step, where a symbol of the equation has no number.
        """
        try:
            numbers = substituted(equation, self.values)
        except KeyError:
            return math.nan
        if "no answer" in numbers:
            return math.nan
        value = self._write(symbol, meaning, equation, numbers, float(evaluate(numbers)), unit, source, note)
        if finding:
            self.results[finding] = _si(value, unit)
        return value

    def ask(self, symbol: str, meaning: str, comparison: str, source: str, note: str = "") -> bool:
        """A step that compares two numbers and answers yes or no."""
        numbers = substituted(comparison, self.values)
        answer = bool(evaluate(numbers))
        self._add(Step(symbol, meaning, comparison, numbers, "yes" if answer else "no", "", source, note))
        return answer

    def say(self, symbol: str, meaning: str, value: str, source: str, note: str = "") -> None:
        """A step whose outcome is a word."""
        self._add(Step(symbol, meaning, "", "", value, "", source, note))

    def _write(self, symbol: str, meaning: str, equation: str, numbers: str, value: float, unit: str, source: str,
               note: str) -> float:  # fmt: skip
        text = printed(value, self.figures)
        self.values[symbol] = text
        self._add(Step(symbol, meaning, equation, numbers, text, unit, source, note, self._other(value, unit)))
        return float(text) if text != "no answer" else math.nan

    def _add(self, step: Step) -> None:
        self._sections[-1][1].append(step)

    def _other(self, value: float, unit: str) -> str:
        kind = UNITS.get(unit)
        if not self._us or kind is None or not math.isfinite(value):
            return ""
        us = dimension(kind).us
        return f"{us.from_si(dimension(kind).metric.to_si(value)):.5g} {us.label}"

    def citations(self) -> tuple[tuple[str, str], ...]:
        """Every source that a step names, in the order of the catalogue."""
        named = {step.source for _, steps in self.sections for step in steps}
        return tuple((key, source.citation) for key, source in SOURCES.items() if key in named)


def _si(value: float, unit: str) -> float:
    if unit == "%":
        return value * 0.01
    kind = UNITS.get(unit)
    return dimension(kind).metric.to_si(value) if kind else value
