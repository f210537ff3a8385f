"""The reference of the worksheet functions, made from the registry: as data, as text and as a page."""

from __future__ import annotations

import inspect
from collections.abc import Iterable
from typing import Any

from lowpoint.declare import GROUPS, Parameter, SameAs
from lowpoint.errors import LowpointError
from lowpoint.quantities import Quantity, Table, Text, Word
from lowpoint.registry import Function, canonical, functions, nearest

__all__ = ["as_data", "as_page", "as_text", "find", "overview"]


def find(name: str) -> Function:
    """The function of this name, with or without its prefix; an unknown name gets the nearest ones."""
    for spelling in (name, f"LP_{name}"):
        known = canonical(spelling)
        if known is not None:
            return functions[known]
    near = meaning(name) or nearest(name)
    remedy = f"Nearest: {', '.join(near)}." if near else "'lowpoint functions' lists them all."
    raise LowpointError("functions", "NAME must be the name of a function", f"'{name}'", remedy)


def meaning(words: str) -> list[str]:
    """The functions whose summary holds all the words, those in one set of units only."""
    wanted = words.casefold().split()
    return [
        f.name for f in functions.values() if f.system != "us" and all(word in f.summary.casefold() for word in wanted)
    ]


def signature(function: Function) -> str:
    """The call as a cell shows it, optional arguments in brackets."""
    if function.variadic:
        return f"{function.name}(function, arguments...)"
    return f"{function.name}({', '.join(p.name if p.required else f'[{p.name}]' for p in function.parameters)})"


def unit_of(function: Function, parameter: Parameter) -> str:
    """The unit of an argument as the user types it."""
    if not isinstance(parameter.kind, Quantity | Table) or function.variadic:
        return ""
    label = function.checked.units[parameter.name].label
    return label or _any_unit(parameter.kind.dimension, function.system)


def _any_unit(dimension: str, system: str) -> str:
    return f"any one {dimension} unit" if system == "any" and dimension not in ("ratio", "free") else ""


def default_of(parameter: Parameter) -> str:
    """What an omitted argument stands for, in words."""
    if parameter.required:
        return "required"
    if isinstance(parameter.default, SameAs):
        return f"default: {parameter.default.symbol}"
    if parameter.default is None:
        return "optional"
    default = parameter.default
    return f"default: {default:g}" if isinstance(default, float) else f"default: {default}"


def words_of(function: Function, parameter: Parameter) -> list[str]:
    """The vocabulary of a word argument."""
    kind = parameter.kind
    if isinstance(kind, Word):
        return list(kind.words)
    if isinstance(kind, Table):
        return list(kind.or_words)
    if isinstance(kind, Text) and not function.variadic:
        listed: Iterable[str] = function.declaration.words.get(parameter.name, tuple)()
        return list(listed)
    return []


def _bounds(function: Function, parameter: Parameter) -> str:
    if not isinstance(parameter.kind, Quantity):
        return ""
    low, high = function.checked.bounds(parameter.name)
    parts = []
    if low != float("-inf"):
        parts.append(f"{'at least' if parameter.kind.closed_low else 'above'} {low:g}")
    if high != float("inf"):
        parts.append(f"{'at most' if parameter.kind.closed_high else 'below'} {high:g}")
    return ", ".join(parts)


def _argument(function: Function, parameter: Parameter) -> dict[str, Any]:
    return {
        "name": parameter.name,
        "meaning": parameter.kind.meaning,
        "unit": unit_of(function, parameter),
        "bounds": _bounds(function, parameter) if not function.variadic else "",
        "default": default_of(parameter),
        "kind": "table" if parameter.is_table else "text" if parameter.is_text else "number",
        "words": words_of(function, parameter),
    }


def as_data(function: Function) -> dict[str, Any]:
    """Everything the registry knows of one function, as plain data."""
    data: dict[str, Any] = {
        "name": function.name,
        "call": signature(function),
        "group": function.group,
        "gives": function.summary,
        "arguments": [_argument(function, p) for p in function.parameters],
    }
    if function.variadic:
        return data | {"result": "text"}
    declaration = function.declaration
    result = "text" if function.checked.returns_text else function.checked.unit.label
    if not result and isinstance(declaration.returns, Quantity):
        result = _any_unit(declaration.returns.dimension, function.system)
    return data | {
        "result": result,
        "equation": declaration.equation,
        "source": declaration.source.citation,
        "source_mark": declaration.source.mark,
        "basis": declaration.basis,
        "no_answer": [n.text for n in declaration.no_answer],
        "cautions": [c.text for c in declaration.cautions if c.label == "caution"],
        "told": [f"{c.label}: {c.text}" for c in declaration.cautions if c.label != "caution"],
        "twin": _twin(function),
        "notes": inspect.cleandoc(declaration.kernel.__doc__ or ""),
    }


def _twin(function: Function) -> str | None:
    other = ("LP_" if function.system == "us" else "LPU_") + function.declaration.name
    return other if function.system != "any" and other in functions else None


def overview() -> str:
    """One line a function, by group."""
    lines = []
    for group in GROUPS:
        members = [f for f in functions.values() if f.group == group and f.system != "us"]
        if not members:
            continue
        lines += ["", group.capitalize()]
        for function in members:
            us = "  (and LPU_)" if function.system == "metric" else ""
            lines.append(f"  {signature(function)}{us}\n      {function.summary}")
    lines += ["", "'lowpoint functions NAME' tells one function's units, bounds, equation and source."]
    return "\n".join(lines[1:])


def _argument_lines(argument: dict[str, Any]) -> list[str]:
    details = "; ".join(x for x in (argument["unit"], argument["bounds"], argument["default"]) if x)
    lines = [f"  {argument['name']:<15} {argument['meaning']} ({details})"]
    if any("," in word for word in argument["words"]):
        lines += [f"  {'':<15} one of:", *(f"  {'':<17} {word}" for word in argument["words"])]
    elif argument["words"]:
        lines.append(f"  {'':<15} words: " + ", ".join(argument["words"]))
    return lines


def as_text(function: Function) -> str:
    """One function for the terminal."""
    data = as_data(function)
    lines = [data["call"], f"  gives {data['gives']}" + (f" [{data['result']}]" if data["result"] else ""), ""]
    for argument in data["arguments"]:
        lines += _argument_lines(argument)
    for title, key in (("equation", "equation"), ("source", "source"), ("basis", "basis"), ("US twin", "twin")):
        if data.get(key):
            lines.append(f"{title}: {data[key]}")
    lines += [f"no answer where: {text}" for text in data.get("no_answer", ())]
    lines += [*data.get("told", ()), *(f"caution: {text}" for text in data.get("cautions", ()))]
    return "\n".join(lines)


def _page_entry(function: Function) -> list[str]:
    data = as_data(function)
    lines = [f"### `{data['call']}`", "", data["gives"][:1].upper() + data["gives"][1:] + "."]
    lines += ["", "| argument | meaning | unit | bounds | default |", "|---|---|---|---|---|"]
    for a in data["arguments"]:
        words = f" ({', '.join(a['words'])})" if 0 < len(a["words"]) <= 12 else ""
        lines.append(f"| {a['name']} | {a['meaning']}{words} | {a['unit']} | {a['bounds']} | {a['default']} |")
    lines += [""] + [f"Result: {data['result']}." if data["result"] else "Result: a plain number."]
    if data.get("equation"):
        lines += ["", f"Equation: `{data['equation']}`"]
    for title, key in (("Source", "source"), ("Basis", "basis"), ("Twin in US units", "twin")):
        if data.get(key):
            lines.append(f"{title}: {data[key]}.  ")
    lines += [f"- No answer: {text}" for text in data.get("no_answer", ())]
    lines += [f"- {text[:1].upper()}{text[1:]}" for text in data.get("told", ())]
    lines += [f"- Caution: {text}" for text in data.get("cautions", ())]
    return [*lines, ""]


def as_page() -> str:
    """The whole reference as one Markdown page; LPU_ twins are named, not repeated."""
    lines = [
        "# Worksheet functions",
        "",
        "Made from the registry by `lowpoint functions --page`; do not edit. Pressures are absolute. Every index and",
        "limit is in the upstream form (p1-pv)/(p1-p2) unless a `form` argument says otherwise. Results support a",
        "qualified engineer; vendor tests, site rules, local codes and licensed practice come first.",
        "",
    ]
    for group in GROUPS:
        members = [f for f in functions.values() if f.group == group and f.system != "us"]
        if members:
            lines += [f"## {group.capitalize()}", ""]
        for function in members:
            lines += _page_entry(function)
    return "\n".join(lines)
