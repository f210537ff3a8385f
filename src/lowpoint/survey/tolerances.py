"""How far the inputs of a case may be off: the sizes taken where nobody states any, and how stated ones are read.

A tolerance is stated for all cases at once: above the table of a list or on its sheet ``Tolerances`` (*Tolerance p1 |
1 %*), or on the command line (``p1=1%``). It is a share of the value or an amount with its unit; a bare number could
be either and is refused.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from lowpoint.errors import LowpointError
from lowpoint.physics.unitnames import meaning
from lowpoint.problems import shown
from lowpoint.survey.fields import BY_KEY, FIELDS
from lowpoint.survey.grids import Grid, cell_name
from lowpoint.survey.headers import LOOKED_AT, Place, read_heading, text_of
from lowpoint.survey.model import Problem
from lowpoint.survey.outcome import Tolerance

__all__ = ["DEFAULTS", "NAMES", "SHEET", "WHY", "combined", "listed_tolerances", "parse_tolerance"]

DEFAULTS = (
    Tolerance("t", 1.0, False, "default"),
    Tolerance("pv", 0.02, True, "default"),
    Tolerance("fl", 0.05, True, "default"),
    Tolerance("p1", 0.01, True, "default"),
    Tolerance("p2", 0.01, True, "default"),
    Tolerance("flow", 0.02, True, "default"),
    Tolerance("limits", 0.0, True, "default"),
)
"""Every input that can move, in the order of the draws. Sizes: common practice, see :data:`WHY`."""

WHY = {
    "t": "an industrial thermometer in its pocket, and the steadiness of the process (common practice)",
    "pv": "a vapour pressure read from a table or a chart (common practice); a computed one moves with the temperature",
    "fl": "spread of the recovery factor between valves of one model, and of its test (common practice)",
    "p1": "a pressure gauge of class 1 near full scale, and its static head, of the absolute pressure (common "
          "practice)",
    "p2": "as the inlet pressure, and independent of it",
    "flow": "an industrial flow meter, and the estimate of the case (common practice)",
    "limits": "the limits stand as stated; give their spread where the test or the vendor states one",
}  # fmt: skip
"""What each size stands for, to be shown beside it."""

NAMES = {
    "t": "temperature", "pv": "vapour pressure", "fl": "recovery factor", "p1": "inlet pressure",
    "p2": "outlet pressure", "flow": "flow", "limits": "limits",
}  # fmt: skip
"""What each input is called in a sentence."""

SHEET = "tolerances"
"""A sheet of this name holds nothing but tolerances, an input and its size in each row."""

HEATED = "t"
LARGEST_SHARE, LEAST_SHARE, LARGEST_SPAN = 0.5, 0.0005, 20.0
_SIZE = re.compile(r"(?:\+/-|\+-|±)?\s*(?P<number>\d+(?:[.,]\d*)?|[.,]\d+)\s*(?P<unit>.*)", re.DOTALL)
_WRITTEN = re.compile(
    r"tolerances?\b\s*(?:of|on|in|for)?(?:\s+the)?\b\s*(?P<name>.+?)(?:\s*[:=]\s*(?P<size>.+))?", re.I | re.S
)
_UNIT_BEHIND = re.compile(r"(?P<name>.*?)\s*[\[(](?P<unit>[^\[\]()]+)[\])]\s*", re.DOTALL)
EXAMPLES = 'Write it like p1=1%, t=2K or p2="0.1 bar".'


def parse_tolerance(text: str) -> Tolerance:
    """The tolerance of ``NAME=SIZE``, as the command line has it: ``p1=1%``, ``t=2K``, ``p2=0.1 bar``.

    ``NAME`` is one of :data:`NAMES`, as a column may be headed. LowpointError for what is none.
    """
    name, sign, size = text.partition("=")
    if not sign or not name.strip() or not size.strip():
        raise LowpointError("tolerance", "must be NAME=SIZE", f"'{text}'", EXAMPLES)
    return _tolerance(name.strip(), size.strip(), "command line")


def combined(*groups: Iterable[Tolerance]) -> tuple[Tolerance, ...]:
    """Every input's tolerance: the default, or what the last of the groups that names it says."""
    stated = {tolerance.field: tolerance for group in groups for tolerance in group}
    return tuple(stated.get(default.field, default) for default in DEFAULTS)


# --- one tolerance ----------------------------------------------------------------------------------------------------


def _field_of(name: str) -> str:
    """The input behind a name; LowpointError where none is."""
    if name.casefold() in ("limits", "limit"):
        return "limits"
    field = read_heading(name, FIELDS).field
    if field is None or field.key not in NAMES:
        known = ", ".join("limits" if key == "limits" else BY_KEY[key].heading for key in NAMES)
        raise LowpointError("tolerance", f"must name an input that can move: {known}", f"'{name}'", EXAMPLES)
    return field.key


def _tolerance(name: str, size: str, basis: str) -> Tolerance:
    key = _field_of(name)
    subject = f"tolerance of {'limits' if key == 'limits' else BY_KEY[key].heading}"
    remedy = "Write it like 2 K." if key == HEATED else "Write it like 1 %, or 0 to hold it still."
    found = _SIZE.fullmatch(size)
    if not found:
        raise LowpointError(subject, "must be a number with its unit, not negative", f"'{size}'", remedy)
    number = float(found["number"].replace(",", "."))
    unit = found["unit"].strip()
    if not unit and number:
        raise LowpointError(subject, "must say its unit", f"'{size}'", remedy)
    if not unit or unit in ("%", "percent", "per cent"):
        share = _share(subject, key, number / 100.0 if unit else 0.0, size, remedy)
        return Tolerance(key, share, key != HEATED, basis)
    return Tolerance(key, _amount(subject, key, number, unit, size, remedy), False, basis)


def _share(subject: str, key: str, share: float, size: str, remedy: str) -> float:
    if key == HEATED and share:
        raise LowpointError(subject, "must be an amount, as a share of a temperature depends on its scale",
                            f"'{size}'", remedy)  # fmt: skip
    if share and not LEAST_SHARE <= share < LARGEST_SHARE:
        raise LowpointError(subject, f"must be 0, or from {100 * LEAST_SHARE:g} % to below {100 * LARGEST_SHARE:g} %",
                            f"'{size}'", remedy)  # fmt: skip
    return share


def _amount(subject: str, key: str, number: float, unit: str, size: str, remedy: str) -> float:
    if key in ("fl", "limits"):
        raise LowpointError(subject, "must be a share, in %", f"'{size}'", remedy)
    try:
        found = meaning(unit)
    except ValueError as problem:
        raise LowpointError(subject, f"has a unit that is not understood: {problem}", f"'{size}'", remedy) from None
    if found.gauge:
        raise LowpointError(subject, "is a difference of pressures, which is not gauge", f"'{size}'", remedy)
    if found.dimension != meaning(BY_KEY[key].reference).dimension:
        raise LowpointError(subject, "has a unit of another kind of quantity", f"'{size}'", remedy)
    amount = number * found.factor
    if (key == HEATED and amount > LARGEST_SPAN) or not math.isfinite(amount):
        raise LowpointError(subject, f"must be at most {LARGEST_SPAN:g} K", f"'{size}'", remedy)
    return amount


# --- from a list ------------------------------------------------------------------------------------------------------


def listed_tolerances(
    lists: Sequence[tuple[Grid, Place]], others: Iterable[Grid], problems: list[Problem]
) -> tuple[Tolerance, ...]:
    """The tolerances above the tables of a list and on its sheet ``Tolerances``.

    One that cannot be used is told and its default holds; so is one that says otherwise than an earlier one.
    """
    lines = [(grid, place.row) for grid, place in lists]
    lines += [(grid, LOOKED_AT + 1) for grid in others if grid.sheet.strip().casefold() == SHEET]
    found: dict[str, Tolerance] = {}
    for grid, last in lines:
        for cell, value, name, size in _written(grid, last):
            try:
                tolerance = _tolerance(name, size, "list")
            except LowpointError as problem:
                text = f"{problem.subject} {problem.must}; the default was taken"
                problems.append(Problem(grid.sheet, cell, shown(value), text, problem.remedy, spoils=False))
                continue
            first = found.setdefault(tolerance.field, tolerance)
            if first != tolerance:
                problems.append(Problem(grid.sheet, cell, shown(value), f"the tolerance of {NAMES[first.field]} is "
                                        f"stated before as {first.words()}, which was taken", "Keep one of the two.",
                                        spoils=False))  # fmt: skip
    return tuple(found.values())


def _written(grid: Grid, last: int) -> Iterator[tuple[str, Any, str, str]]:
    """Cell, its value, name and size of every tolerance in the rows before ``last``."""
    own_sheet = grid.sheet.strip().casefold() == SHEET
    for number, cells in grid.rows:
        if number >= last:
            return
        for column, cell in enumerate(cells):
            text = text_of(cell) if isinstance(cell, str) else ""
            match = _WRITTEN.fullmatch(text)
            name, inside = (match["name"], match["size"]) if match else (text, None)
            if not text or not (match or own_sheet):
                continue
            at, value = column, inside
            if inside is None:
                at, value = next(
                    ((i, c) for i, c in enumerate(cells) if i > column and c not in (None, "")), (-1, None)
                )
            unit = _UNIT_BEHIND.fullmatch(name)
            if value is None or (own_sheet and not match and not _is_size(value)):
                break
            yield cell_name(number, at), value, unit["name"] if unit else name, _with_unit(value, unit)
            if own_sheet:
                break


def _is_size(value: Any) -> bool:
    """Could a cell be a size, and not a heading over sizes?"""
    return not isinstance(value, str) or _SIZE.fullmatch(value.strip()) is not None


def _with_unit(value: Any, unit: re.Match[str] | None) -> str:
    size = f"{value:g}" if isinstance(value, float) else str(value).strip()
    return f"{size} {unit['unit']}" if unit and not re.search(r"[^\d.,+\-±\s/]", size) else size
