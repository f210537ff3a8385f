"""The little language of a working: equations in symbols, the same with printed numbers, and what they come to.

An expression has numbers (``0.28``, ``3.26e-7``), symbols (a letter, then letters, figures and ``_``), the signs
``+ - * / ^`` and brackets, and the functions ``sqrt``, ``ln``, ``log10``, ``min`` and ``max``; ``^`` binds before a
sign, as on paper. A comparison (``<``, ``<=``, ``>``, ``>=``) of two expressions comes to ``yes`` or ``no``. Read
``^`` as ``**`` and ``ln`` as ``log``, and it is Python.

Every number is printed with the same significant figures (seven, more where pressures nearly cancel), and every step
is worked out from the numbers as printed, so that whoever redoes it with a pocket calculator comes to the value as
printed.
"""

from __future__ import annotations

import ast
import math
import operator
import re
from collections.abc import Callable, Mapping
from decimal import Decimal
from typing import Any

__all__ = ["FIGURES", "evaluate", "printed", "substituted", "symbols_of"]

FIGURES = 7
"""Significant figures of every number, where nothing calls for more."""
_PLAIN = range(-4, 12)
"""Powers of ten of numbers that are written without an exponent."""
_SYMBOL = re.compile(r"(?<![\w.])[A-Za-z]\w*")
_FUNCTIONS: dict[str, Callable[..., float]] = {
    "sqrt": math.sqrt, "ln": math.log, "log10": math.log10, "min": min, "max": max,
}  # fmt: skip
_SIGNS: dict[type[ast.AST], Callable[..., Any]] = {
    ast.Add: operator.add, ast.Sub: operator.sub, ast.Mult: operator.mul, ast.Div: operator.truediv,
    ast.Pow: math.pow, ast.USub: operator.neg,
    ast.Lt: operator.lt, ast.LtE: operator.le, ast.Gt: operator.gt, ast.GtE: operator.ge,
}  # fmt: skip


def printed(x: float, figures: int = FIGURES) -> str:
    """A number as every step shows it: that many significant figures, no zeros at the end."""
    if not math.isfinite(x):
        return "no answer"
    rounded = Decimal(f"{x:.{figures - 1}e}")
    if rounded == 0:
        return "0"
    rounded = rounded.normalize()
    if rounded.adjusted() in _PLAIN:
        return f"{rounded:f}"
    mantissa, exponent = f"{rounded:e}".split("e")
    return f"{mantissa}e{int(exponent)}"


def substituted(equation: str, values: Mapping[str, str]) -> str:
    """The equation with each symbol's printed value; a negative one in brackets. KeyError for an unknown symbol."""

    def number(found: re.Match[str]) -> str:
        word = found[0]
        if word in _FUNCTIONS:
            return word
        value = values[word]
        return f"({value})" if value.startswith("-") else value

    return _SYMBOL.sub(number, equation)


def symbols_of(equation: str) -> set[str]:
    """The symbols of an equation, without the functions."""
    return set(_SYMBOL.findall(equation)) - set(_FUNCTIONS)


def evaluate(numbers: str) -> float | bool:
    """What an expression of numbers comes to; NaN where it has no value (a root of a negative number)."""
    try:
        return _value(ast.parse(numbers.replace("^", "**"), mode="eval").body)
    except (ValueError, ZeroDivisionError, OverflowError):
        return math.nan


def _value(node: ast.AST) -> Any:
    match node:
        case ast.Constant(value=int() | float() as number):
            return float(number)
        case ast.BinOp(left=left, op=sign, right=right) if type(sign) in _SIGNS:
            return _SIGNS[type(sign)](_value(left), _value(right))
        case ast.UnaryOp(op=ast.USub(), operand=operand):
            return -_value(operand)
        case ast.Compare(left=left, ops=[sign], comparators=[right]) if type(sign) in _SIGNS:
            return _SIGNS[type(sign)](_value(left), _value(right))
        case ast.Call(func=ast.Name(id=name), args=arguments, keywords=[]) if name in _FUNCTIONS:
            return _FUNCTIONS[name](*map(_value, arguments))
    raise TypeError(f"not in the language of a working: {ast.dump(node)}")
