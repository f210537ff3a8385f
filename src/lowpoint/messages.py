"""The sentences of the checks: ``<function>: <symbol> must be <relation> <limit> <unit>, got <value> <unit>``."""

from __future__ import annotations

import inspect
from collections.abc import Callable, Mapping, Sequence
from functools import cache
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from lowpoint.declare import Declaration, Must, Parameter
from lowpoint.problems import PASSED_ON, CellError, shown
from lowpoint.quantities import Quantity, Word

if TYPE_CHECKING:
    from lowpoint.checked import Checked
    from lowpoint.columns import Column

__all__ = ["argument_names", "basis", "blank", "needed", "no_answer", "not_understood", "out_of_bounds", "out_of_order",
           "passed_on", "sentence"]  # fmt: skip

Sentence = Callable[[int], str]


def _at(values: Any, row: int) -> Any:
    return values[row if len(values) > 1 else 0]


def _with_remedy(text: str, remedy: str) -> str:
    end = "" if text.endswith("?") else "."
    return f"{text}{end} {remedy}" if remedy else f"{text}{end}"


def sentence(function: Checked, words: str, remedy: str = "") -> Sentence:
    """A finished sentence, the same for every row."""
    text = f"{function.name}: {words.removesuffix('.')}"
    return lambda row: _with_remedy(text, remedy)


def no_answer(function: Checked, words: str, names: Sequence[str], given: Mapping[str, Any], good: Any) -> Sentence:
    """A reason with the values that it looks at, in the user's units; ``given`` holds those of the rows in ``good``."""
    numbers = [p for p in function.parameters if p.is_number and p.name in names and given.get(p.name) is not None]

    def text(row: int) -> str:
        place = int(np.searchsorted(good, row))
        got = [(p.name, float(_at(given[p.name], place)), function.units[p.name].label) for p in numbers]
        shown_values = [f"{name} = {shown(value, unit)}" for name, value, unit in got if not np.isnan(value)]
        return sentence(function, words + (f"; got {', '.join(shown_values)}" if shown_values else ""))(row)

    return text


def passed_on(function: Checked, parameter: Parameter, error: CellError) -> Sentence:
    return sentence(function, f"{parameter.name} is {error}, {PASSED_ON}")


def blank(function: Checked, parameter: Parameter) -> Sentence:
    words = f"{parameter.name} ({parameter.kind.meaning}) must be given, got a blank cell"
    return sentence(function, words, parameter.kind.remedy)


def needed(function: Checked, given: str, name: str) -> Sentence:
    meaning = next(p.kind.meaning for p in function.parameters if p.name == name)
    return sentence(function, f"{name} ({meaning}) must be given where {given} is, got a blank cell")


def not_understood(function: Checked, parameter: Parameter, column: Column) -> Sentence:
    kind = parameter.kind

    def text(row: int) -> str:
        got = column.texts[row if column.size > 1 else 0]
        if isinstance(got, ValueError):
            return _with_remedy(f"{function.name}: {got}".rstrip("."), kind.remedy)
        if isinstance(kind, Quantity):
            unit = function.units[parameter.name].label
            must = "a number" + (f" in {unit}" if unit else "")
        else:
            must = "one of " + ", ".join(kind.words) if isinstance(kind, Word) else "a word"
        remedy = kind.remedy
        if isinstance(kind, Quantity) and isinstance(got, str) and any(character.isdigit() for character in got):
            remedy = f"The cell holds text: type a number, with your program's own decimal sign. {remedy}".rstrip()
        return _with_remedy(f"{function.name}: {parameter.name} must be {must}, got {shown(got)}", remedy)

    return text


def out_of_bounds(
    function: Checked, parameter: Parameter, x: npt.NDArray[np.float64], low: float, high: float
) -> Sentence:
    kind = parameter.kind
    assert isinstance(kind, Quantity)
    unit = function.units[parameter.name].label

    def text(row: int) -> str:
        value = float(_at(x, row))
        if np.isinf(value):
            relation = "finite"
        elif value <= low:
            relation = f"{'at least' if kind.closed_low else 'above'} {shown(low, unit)}"
        else:
            relation = f"{'at most' if kind.closed_high else 'below'} {shown(high, unit)}"
        return _with_remedy(
            f"{function.name}: {parameter.name} must be {relation}, got {shown(value, unit)}", kind.remedy
        )

    return text


def out_of_order(function: Checked, must: Must, low: Any, high: Any) -> Sentence:
    unit = function.units[must.low].label
    high_first = must.blame == must.high

    def text(row: int) -> str:
        small, large = float(_at(low, row)), float(_at(high, row))
        at_most, at_least = ("at most", "at least") if must.equal else ("below", "above")
        if high_first:
            words = f"{must.high} must be {at_least} {must.low} = {shown(small, unit)}, got {shown(large, unit)}"
        else:
            words = f"{must.low} must be {at_most} {must.high} = {shown(large, unit)}, got {shown(small, unit)}"
        return _with_remedy(f"{function.name}: {words}", must.remedy)

    return text


def basis(declaration: Declaration) -> str:
    """The basis of a function's answers, in words."""
    if not declaration.basis:
        return f"basis: {declaration.basis_text}"
    return f"basis: {declaration.basis} ({declaration.basis_text or declaration.source.citation})"


@cache
def argument_names(when: Callable[..., Any]) -> tuple[str, ...]:
    """Which arguments a predicate looks at."""
    return tuple(inspect.signature(when).parameters)
