"""The notes on headings: meaning, unit, bounds, equation and source, as the registry knows them."""

from __future__ import annotations

from typing import Any

from openpyxl.comments import Comment

from lowpoint.reference import as_data
from lowpoint.registry import functions
from lowpoint.starter.columns import Column
from lowpoint.units import dimension

__all__ = ["PRETTY", "note", "note_text", "twin", "unit_label"]

PRETTY = {"m3/h": "m³/h", "kg/m3": "kg/m³", "deg C": "°C", "deg F": "°F", "lb/ft3": "lb/ft³"}
"""Units as headings show them; cells take the plain spelling."""
AUTHOR = "Lowpoint"


def twin(name: str, system: str) -> str:
    """The name of a function in a set of units: LPU_ where there is one of that name."""
    other = "LPU_" + name.removeprefix("LP_")
    return other if system == "us" and other in functions else name


def unit_label(dimension_name: str, system: str) -> str:
    """A unit as headings show it."""
    label = dimension(dimension_name).unit(system).label if dimension_name else ""
    return PRETTY.get(label, label)


def _of_argument(data: dict[str, Any], name: str) -> list[str]:
    argument = next(a for a in data["arguments"] if a["name"] == name)
    details = "; ".join(x for x in (argument["unit"], argument["bounds"], argument["default"]) if x)
    return [f"{argument['meaning'][:1].upper()}{argument['meaning'][1:]} ({details})."]


def _of_function(data: dict[str, Any]) -> list[str]:
    lines = [data["call"], f"Gives {data['gives']}" + (f" [{data['result']}]." if data.get("result") else ".")]
    if data.get("equation"):
        lines.append(f"Equation: {data['equation']}.")
    if data.get("source"):
        lines.append(f"Source: {data['source']}.")
    return lines


def note_text(column: Column, system: str) -> str:
    """The whole note of a column."""
    lines: list[str] = []
    if column.of:
        name, _, argument = column.of.partition(".")
        data = as_data(functions[twin(name, system)])
        lines += _of_argument(data, argument) if argument else _of_function(data)
    elif column.dimension:
        lines.append(f"In {unit_label(column.dimension, system)}." if unit_label(column.dimension, system) else "")
    lines.append(column.note)
    return "\n".join(line for line in lines if line)


def note(column: Column, system: str) -> Comment:
    """The note as a comment of the heading's cell, large enough for its text."""
    text = note_text(column, system)
    lines = sum(1 + len(line) // 52 for line in text.splitlines())
    return Comment(text, AUTHOR, width=340, height=26 + 17 * lines)
