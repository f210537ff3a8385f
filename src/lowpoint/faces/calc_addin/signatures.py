"""The add-in's methods, from the registry: names, arguments and texts as the office and its wizard see them."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

from lowpoint import reference
from lowpoint.declare import Parameter
from lowpoint.faces.calc_addin.typelib import ANY, MANY, Method
from lowpoint.quantities import Quantity
from lowpoint.registry import Function, functions

__all__ = ["INTERFACE", "MODULES", "RAISES", "SERVICE", "Signature", "fingerprint", "methods", "signatures"]

MODULES = ("org", "lowpoint")
INTERFACE = "XFunctions"
SERVICE = "org.lowpoint.Functions"
"""In its own files Calc stores a call as this service in capitals, a stop, and the method."""
RAISES = ("com.sun.star.lang.IllegalArgumentException",)

_MOST_WORDS = 12
"""A longer vocabulary does not fit into the wizard; the reference lists it."""


@dataclass(frozen=True, slots=True)
class Argument:
    """One argument: its name, its IDL type and the help that the wizard shows."""

    name: str
    kind: str
    text: str


@dataclass(frozen=True, slots=True)
class Signature:
    """One function: the method that the office calls and what the wizard says of it."""

    method: str
    name: str
    text: str
    arguments: tuple[Argument, ...]


def signatures() -> list[Signature]:
    """Every function of the registry, by name: its own order depends on which module was imported first."""
    return [_signature(functions[name]) for name in sorted(functions)]


def methods() -> list[Method]:
    """The same as the type library wants them."""
    return [Method(s.method, tuple((a.name, a.kind) for a in s.arguments), RAISES) for s in signatures()]


def fingerprint() -> str:
    """Names and argument orders in one word: two sets of functions with one word are called alike."""
    calls = "\n".join(sorted(f"{f.name}({', '.join(p.name for p in f.parameters)})" for f in functions.values()))
    return hashlib.sha256(calls.encode()).hexdigest()[:16]


def _signature(function: Function) -> Signature:
    method = function.name.removeprefix("LP_")
    data = reference.as_data(function)
    unit = f" [{data['result']}]" if data["result"] not in ("", "text") else ""
    text = f"{function.group.capitalize()}: {function.summary}{unit}."
    if function.variadic:
        return Signature(method, function.name, text, _variadic(function))
    described = zip(function.parameters, data["arguments"], strict=True)
    return Signature(method, function.name, text, tuple(_argument(p, told) for p, told in described))


def _variadic(function: Function) -> tuple[Argument, ...]:
    first, rest = function.parameters
    return (
        Argument(first.name, ANY, f'{first.kind.meaning}, for example "LP_SIGMA" (required)'),
        Argument(rest.name, MANY, rest.kind.meaning),
    )


def _zero_is_a_value(kind: object) -> bool:
    """Calc shows an add-in a single blank cell as 0; where 0 is impossible it is refused or stands for omitted."""
    if not isinstance(kind, Quantity) or kind.zero_is_blank:
        return False
    return kind.low < 0.0 < kind.high or (kind.low == 0.0 and kind.closed_low)


def _argument(parameter: Parameter, told: dict[str, object]) -> Argument:
    """What the wizard shows under the argument: meaning, unit, possible values, and what an omission means."""
    unit, bounds, words = told["unit"], told["bounds"], told["words"]
    assert isinstance(words, list)
    text = str(told["meaning"]) + (f" [{unit}]" if unit else "")
    if 0 < len(words) <= _MOST_WORDS:
        text += ": " + ", ".join(words)
    text += f"; {bounds}" if bounds else ""
    text += "; a blank cell counts as 0" if _zero_is_a_value(parameter.kind) else ""
    return Argument(parameter.name, ANY, f"{text} ({told['default']})")
