"""The decorator that turns an annotated kernel into a declared function, and returns the kernel unchanged.

A kernel is a function of bare arrays in coherent SI. An omitted argument arrives as NaN in its place, or as
``None`` where no row gives it. A kernel answers NaN (text: an empty string) where there is no answer, and never
raises on a value. What is wrong with a declaration is found here, at import.
"""

from __future__ import annotations

import inspect
import re
import typing
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from types import SimpleNamespace
from typing import Any, TypeAlias, TypeVar

from lowpoint import units
from lowpoint.errors import DeclarationError
from lowpoint.quantities import Quantity, Table, Text, Word
from lowpoint.sources import Source, source

__all__ = ["Caution", "Declaration", "Must", "NoAnswer", "Parameter", "SameAs", "declarations", "function"]

GROUPS = ("liquids", "valves", "indices and limits", "orifices", "working")
BASES = ("", "tested", "published", "estimated")
Kind: TypeAlias = Quantity | Word | Text | Table
Kernel = TypeVar("Kernel", bound=Callable[..., Any])

_meanings: dict[tuple[str, str], Any] = {}


@dataclass(frozen=True, slots=True)
class SameAs:
    """Default of an argument: the value of another, earlier one."""

    symbol: str


@dataclass(frozen=True, slots=True)
class Must:
    """A relation between two arguments, ``low < high`` (or ``<=`` where ``equal``)."""

    low: str
    high: str
    remedy: str
    equal: bool = False
    blame: str = ""
    """Which of the two the message names first; the low one unless said."""


@dataclass(frozen=True, slots=True)
class NoAnswer:
    """Why a kernel has no answer: ``when`` names arguments it looks at and gives a mask, ``text`` the words."""

    text: str
    when: Callable[..., Any] | None = None
    value: bool = False
    """Is it the fault of a word or text (#VALUE!) instead of a number (#NUM!)?"""
    missing: bool = False
    """Is an input missing that only this case needs (#N/A)?"""


@dataclass(frozen=True, slots=True)
class Caution:
    """A result to be read with care: ``when`` names arguments (and ``result``) in SI and gives a mask."""

    text: str
    when: Callable[..., Any]
    label: str = "caution"
    """The word before the text: another one where it only tells something, such as the rule that applied."""


@dataclass(frozen=True, slots=True)
class Parameter:
    """One argument of a declared function."""

    name: str
    kind: Kind
    required: bool
    default: Any = None

    @property
    def is_table(self) -> bool:
        return isinstance(self.kind, Table)

    @property
    def is_text(self) -> bool:
        return isinstance(self.kind, Word | Text)

    @property
    def is_number(self) -> bool:
        return isinstance(self.kind, Quantity)


@dataclass(frozen=True, slots=True)
class Declaration:
    """All that the faces, the reference and the contract tests know of one function."""

    name: str
    kernel: Callable[..., Any]
    group: str
    gives: str
    parameters: tuple[Parameter, ...]
    returns: Kind
    source: Source
    equation: str
    any_unit: bool
    needs: Mapping[str, tuple[str, ...]]
    must: tuple[Must, ...]
    no_answer: tuple[NoAnswer, ...]
    cautions: tuple[Caution, ...]
    basis: str
    basis_text: str
    resolve: Mapping[str, Callable[[str], str]]
    words: Mapping[str, Callable[[], Iterable[str]]]
    column: bool = False


declarations: dict[str, Declaration] = {}
"""Every declared function by its bare name (``SIGMA`` of LP_SIGMA), in the order of declaration."""


def function(
    name: str,
    *,
    group: str,
    gives: str,
    source_key: str,
    equation: str = "",
    any_unit: bool = False,
    needs: Mapping[str, tuple[str, ...]] | None = None,
    must: tuple[Must, ...] = (),
    no_answer: tuple[NoAnswer, ...] = (),
    cautions: tuple[Caution, ...] = (),
    basis: str = "",
    basis_text: str = "",
    resolve: Mapping[str, Callable[[str], str]] | None = None,
    words: Mapping[str, Callable[[], Iterable[str]]] | None = None,
    column: bool = False,
) -> Callable[[Kernel], Kernel]:
    """Declare the kernel below as the worksheet function ``LP_<name>``; returns the kernel unchanged.

    ``any_unit``: the answer depends on ratios alone, any one unit a dimension will do and there is no US twin.
    ``needs``: an argument given asks for others (#N/A). ``must``: relations between arguments (#NUM!).
    ``resolve``: what turns a free word into its canonical spelling, ValueError with a sentence for an unknown one
    (#VALUE!); ``words`` lists its vocabulary for the reference. ``basis`` is one of :data:`BASES`. ``column``: the
    answer of one call is a column of numbers; the kernel gives a row a call, NaN behind the last.
    """

    def declare(kernel: Kernel) -> Kernel:
        declaration = Declaration(
            name=name, kernel=kernel, group=group, gives=gives, parameters=_parameters(name, kernel),
            returns=_returns(name, kernel), source=source(source_key), equation=equation, any_unit=any_unit,
            needs=dict(needs or {}), must=must, no_answer=no_answer, cautions=cautions, basis=basis,
            basis_text=basis_text, resolve=dict(resolve or {}), words=dict(words or {}), column=column,
        )  # fmt: skip
        _check(declaration)
        declarations[name] = declaration
        return kernel

    return declare


def _hints(kernel: Callable[..., Any]) -> dict[str, Any]:
    return {symbol: _meaning(hint, kernel) for symbol, hint in kernel.__annotations__.items()}


def _meaning(hint: Any, kernel: Callable[..., Any]) -> Any:
    """What an annotation stands for. Kernels share a few of them by the hundred: each is read once a module."""
    if not isinstance(hint, str):
        return hint
    key = (kernel.__module__, hint)
    if key not in _meanings:
        lone = SimpleNamespace(__annotations__={"it": hint})
        _meanings[key] = typing.get_type_hints(lone, globalns=kernel.__globals__, include_extras=True)["it"]
    return _meanings[key]


def _kind(name: str, symbol: str, hint: Any) -> Kind:
    for extra in getattr(hint, "__metadata__", ()):
        if isinstance(extra, Quantity | Word | Text | Table):
            return extra
    raise DeclarationError(f"LP_{name}", f"{symbol} must be annotated with a quantity", repr(hint))


def _parameters(name: str, kernel: Callable[..., Any]) -> tuple[Parameter, ...]:
    hints = _hints(kernel)
    found = []
    for symbol, parameter in inspect.signature(kernel).parameters.items():
        kind = _kind(name, symbol, hints.get(symbol))
        required = parameter.default is inspect.Parameter.empty
        # `from` is a word of Python, so a kernel writes `from_`.
        found.append(Parameter(symbol.rstrip("_"), kind, required, None if required else parameter.default))
    return tuple(found)


def _returns(name: str, kernel: Callable[..., Any]) -> Kind:
    return _kind(name, "the result", _hints(kernel).get("return"))


def _check(item: Declaration) -> None:
    """Everything a declaration can get wrong; the first fault found is raised."""
    label, symbols = f"LP_{item.name}", [p.name for p in item.parameters]

    def wrong(must: str, got: object) -> DeclarationError:
        return DeclarationError(label, must, repr(got))

    # LP_ and letters only: no cell address (letters and digits) can be taken for it.
    if not re.fullmatch(r"(?=..)[A-Z]+(_[A-Z]+)*", item.name):
        raise wrong("must be upper-case words without digits, one underscore between two", item.name)
    if item.name in declarations or item.name == "WHY":
        raise wrong("must be declared once (LP_WHY is made by the registry)", item.name)
    kinds = {p.kind for p in inspect.signature(item.kernel).parameters.values()}
    if kinds & {inspect.Parameter.VAR_POSITIONAL, inspect.Parameter.VAR_KEYWORD}:
        raise wrong("must name every argument", "*args or **kwargs")
    if item.group not in GROUPS or item.basis not in BASES:
        raise wrong(f"must have a group of {GROUPS} and a basis of {BASES}", (item.group, item.basis))
    if not item.gives or not (item.kernel.__doc__ or "").strip():
        raise wrong("must say what it gives, and its kernel must have a docstring", item.gives)
    if len(symbols) > 60:
        raise wrong("must have at most 60 arguments, the spreadsheets' limit", len(symbols))
    seen_optional = False
    for parameter in item.parameters:
        _check_parameter(wrong, parameter)
        if parameter.required and seen_optional:
            raise wrong("must have its required arguments first", parameter.name)
        seen_optional = seen_optional or not parameter.required
    if isinstance(item.returns, Quantity):
        _check_dimension(wrong, item.returns)
    elif item.column:
        raise wrong("must give numbers where it gives a column", item.returns)
    for part, mentioned in _mentioned(item).items():
        for symbol in mentioned:
            if symbol not in symbols and symbol != "result":
                raise wrong(f"must name in {part} only its own arguments", symbol)


def _check_dimension(wrong: Callable[[str, object], DeclarationError], kind: Quantity | Table) -> None:
    if kind.dimension not in units.DIMENSIONS:
        raise wrong(f"{kind.symbol} must have a unit: one of {', '.join(units.DIMENSIONS)}", kind.dimension)


def _check_parameter(wrong: Callable[[str, object], DeclarationError], parameter: Parameter) -> None:
    kind = parameter.kind
    if kind.symbol != parameter.name:
        raise wrong(f"must use one name for one symbol: {kind.symbol}", parameter.name)
    if isinstance(kind, Quantity | Table):
        _check_dimension(wrong, kind)
    if isinstance(kind, Word) and not (parameter.default is None or parameter.default in kind.words):
        raise wrong(f"{kind.symbol} must default to one of {kind.words}", parameter.default)


def _mentioned(item: Declaration) -> dict[str, set[str]]:
    """Symbols named in the parts of a declaration that refer to arguments."""
    looked_at = [c.when for c in item.cautions] + [n.when for n in item.no_answer if n.when is not None]
    return {
        "needs": set(item.needs) | {s for needed in item.needs.values() for s in needed},
        "must": {s for m in item.must for s in (m.low, m.high)},
        "its defaults": {p.default.symbol for p in item.parameters if isinstance(p.default, SameAs)},
        "its cautions": {s.rstrip("_") for when in looked_at for s in inspect.signature(when).parameters},
        "resolve": set(item.resolve),
        "words": set(item.words),
    }
