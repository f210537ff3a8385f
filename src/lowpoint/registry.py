"""The frozen registry: every worksheet function by name, ready to be called from Python, cells and commands."""

from __future__ import annotations

import difflib
import importlib
import re
from collections.abc import Mapping, Sequence
from types import MappingProxyType
from typing import Any

import numpy as np

from lowpoint.checked import Checked, Outcome
from lowpoint.columns import OMITTED, Column
from lowpoint.declare import Declaration, Parameter, declarations
from lowpoint.errors import LowpointError
from lowpoint.quantities import Text, Word
from lowpoint.scalar import bind_scalar

__all__ = ["Function", "canonical", "functions", "nearest"]

_KERNEL_MODULES = (
    "fittings", "nonturbulent", "sizing", "indices", "liquids", "site", "conversion", "travel", "typical", "flashing",
    "limits", "regime", "noise", "orifices", "stages", "plate_strength",
)  # fmt: skip
"""Modules of :mod:`lowpoint.physics` with worksheet functions, in the order of the reference."""


class Function:
    """One worksheet function as Python sees it: keyword or positional arguments in cell units, scalars or arrays.

    Arrays broadcast; tables are taken whole. Elements that are missing, wrong or impossible come back NaN (None
    for functions that give text); :meth:`why` says why, element by element. Where the answer of one call is a column,
    it is the last axis, filled up with NaN.
    """

    variadic = False
    column = False

    def __init__(self, declaration: Declaration, system: str) -> None:
        self.checked = Checked(declaration, system)
        self.declaration = declaration
        self.name = self.checked.name
        self.system = system
        self.group, self.summary = declaration.group, declaration.gives
        self.parameters: tuple[Parameter, ...] = declaration.parameters
        self.column = declaration.column
        self.scalar = None if declaration.column else bind_scalar(self.checked)
        self.__doc__ = f"{self.name}: {declaration.gives}."

    def __repr__(self) -> str:
        return f"<{self.name}({', '.join(p.name if p.required else f'[{p.name}]' for p in self.parameters)})>"

    def bind(self, args: Sequence[Any], named: Mapping[str, Any]) -> list[Any]:
        """Arguments in the order of declaration, OMITTED where none was given."""
        if len(args) > len(self.parameters):
            raise LowpointError(self.name, f"must have at most {len(self.parameters)} arguments", str(len(args)))
        given = dict(zip((p.name for p in self.parameters), args, strict=False))
        for name, value in named.items():
            if name not in {p.name for p in self.parameters}:
                known = ", ".join(p.name for p in self.parameters)
                raise LowpointError(self.name, f"arguments must be of {known}", f"'{name}'")
            if name in given:
                raise LowpointError(self.name, f"{name} must be given once", "two values")
            given[name] = value
        return [given.get(p.name, OMITTED) for p in self.parameters]

    def __call__(self, *args: Any, **named: Any) -> Any:
        bound = self.bind(args, named)
        if self.scalar is not None:
            quick = self.scalar(tuple(bound))
            if quick is not None:
                return quick
        outcome, shape = self._evaluate(bound)
        return _shaped(outcome.values, shape)

    def why(self, *args: Any, **named: Any) -> Any:
        """For every element the reason of its error, else its cautions and basis, else "ok"."""
        outcome, shape = self._evaluate(self.bind(args, named))
        return _shaped(np.array(self.checked.explain(outcome), object), shape)

    def _evaluate(self, bound: Sequence[Any]) -> tuple[Outcome, tuple[int, ...]]:
        scalars = {
            p.name: np.asarray(x, object if isinstance(x, list | tuple) else None)
            for p, x in zip(self.parameters, bound, strict=True)
            if not p.is_table and x is not OMITTED
        }
        try:
            shape = np.broadcast_shapes(*[x.shape for x in scalars.values()])
        except ValueError:
            shapes = ", ".join(f"{name} {x.shape}" for name, x in scalars.items())
            raise LowpointError(self.name, "arguments must have shapes that broadcast", shapes) from None
        columns = {name: self._column(name, x, shape) for name, x in scalars.items()}
        tables = {
            p.name: x for p, x in zip(self.parameters, bound, strict=True) if p.is_table and x is not OMITTED
        }  # fmt: skip
        return self.checked.evaluate(columns, tables, int(np.prod(shape, dtype=int))), shape

    def _column(self, name: str, x: Any, shape: tuple[int, ...]) -> Column:
        parameter = next(p for p in self.parameters if p.name == name)
        if x.size != 1:
            x = np.broadcast_to(x, shape)
        return self.checked.column(parameter, x if x.ndim else x.item())


class Why(Function):
    """LP_WHY as the reference and the faces see it: a name, then any arguments of that function."""

    variadic = True

    def __init__(self) -> None:
        names = Word("function", "name of the function that is asked about, as text", ())
        anything = Text("arguments", "the arguments of that function, in its order")
        self.name, self.system, self.group = "LP_WHY", "any", "working"
        self.summary = 'why a call errs, or its cautions and the basis of its answer, in words; "ok" otherwise'
        self.parameters = (Parameter("function", names, True), Parameter("arguments", anything, False))
        self.scalar = None
        self.__doc__ = f"LP_WHY: {self.summary}."

    def __call__(self, *args: Any, **named: Any) -> Any:
        if not args:
            raise LowpointError("LP_WHY", "must be given the name of a function", None)
        asked = canonical(str(args[0])) or canonical(f"LP_{args[0]}")
        if asked is None or asked == "LP_WHY":
            raise LowpointError("LP_WHY", "function must be the name of a function", f"'{args[0]}'")
        return functions[asked].why(*args[1:], **named)

    def why(self, *args: Any, **named: Any) -> Any:
        return self(*args, **named)


def _shaped(values: Any, shape: tuple[int, ...]) -> Any:
    return values[0] if shape == () else values.reshape(shape + values.shape[1:])


def _load() -> Mapping[str, Function]:
    names = [importlib.import_module(f"lowpoint.physics.{module}").__name__ for module in _KERNEL_MODULES]
    found: dict[str, Function] = {}
    # Whoever imported a kernel before the registry changes nothing: the order is that of the modules.
    for declaration in sorted(declarations.values(), key=lambda each: names.index(each.kernel.__module__)):
        single = "any" if declaration.any_unit else "metric"
        for system in (single,) if declaration.any_unit else (single, "us"):
            function = Function(declaration, system)
            found[function.name] = function
    found["LP_WHY"] = Why()
    return MappingProxyType(found)


functions: Mapping[str, Function] = _load()
"""Every worksheet function by its canonical name."""

_SPELLING = re.compile(r"(LPU?)[._](\w+)", re.IGNORECASE)


def canonical(name: str) -> str | None:
    """The canonical name of a spelling (``lp.sigma`` is LP_SIGMA), None where there is no such function."""
    match = _SPELLING.fullmatch(name.strip())
    if match is None:
        return None
    spelled = f"{match[1]}_{match[2]}".upper()
    if spelled in functions:
        return spelled
    # A function whose units cancel exists once; its name with the US prefix is a slip that must not pass.
    return None


def nearest(name: str, most: int = 3) -> list[str]:
    """The functions whose names are spelled most like a text."""
    return difflib.get_close_matches(name.upper().replace(".", "_"), functions, n=most, cutoff=0.5)
