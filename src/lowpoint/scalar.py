"""The short way for one row of good plain values, as a cell gives them; anything unusual goes the long way."""

from __future__ import annotations

from collections.abc import Callable
from math import isfinite
from typing import Any

import numpy as np

from lowpoint.checked import Checked
from lowpoint.columns import OMITTED
from lowpoint.declare import SameAs
from lowpoint.quantities import Quantity

__all__ = ["bind_scalar"]


def bind_scalar(checked: Checked) -> Callable[[tuple[Any, ...]], Any] | None:
    """A function of one tuple of cell values that answers a float or a word, or None for "go the long way".

    Bounds, conversions and relations are those of :class:`Checked`, with the same arithmetic, so both ways give
    the same bits; NumPy's cost is paid only inside the kernel. None where the function takes a table.
    """
    if any(p.is_table for p in checked.parameters):
        return None
    readers = [_reader(checked, place) for place in range(len(checked.parameters))]
    place = {p.name: i for i, p in enumerate(checked.parameters)}
    musts = [(place[m.low], place[m.high], m.equal) for m in checked.declaration.must]
    needs = [(place[g], [place[n] for n in needed]) for g, needed in checked.declaration.needs.items()]
    kernel, count = checked.declaration.kernel, len(readers)
    factor, offset, plain, text = (
        checked.unit.factor,
        checked.unit.offset,
        checked.unit.plain,
        checked.returns_text,
    )
    quiet = np.errstate

    def scalar(cells: tuple[Any, ...]) -> Any:
        if len(cells) < count:
            cells = cells + (OMITTED,) * (count - len(cells))
        si: list[Any] = []
        for read, cell in zip(readers, cells, strict=True):
            value = read(cell, si)
            if value is NotImplemented:
                return None
            si.append(value)
        for given, needed in needs:
            if _given(cells[given]) and not all(_given(cells[n]) for n in needed):
                return None
        for low, high, equal in musts:
            small, large = cells[low], cells[high]
            if _given(small) and _given(large) and not (small <= large if equal else small < large):
                return None
        with quiet(all="ignore"):
            answer = kernel(*[np.array((v,)) if type(v) is float else v for v in si])
        if text:
            return str(answer if isinstance(answer, str) else answer[0]) or None
        value = float(answer[0])
        if not isfinite(value):
            return None
        return value if plain else (value - offset) / factor

    return scalar


def _given(cell: Any) -> bool:
    return cell is not OMITTED and cell is not None and cell != "" and cell != 0


def _reader(checked: Checked, place: int) -> Callable[[Any, list[Any]], Any]:
    """What turns one cell into the kernel's value; NotImplemented for whatever the long way must judge."""
    parameter = checked.parameters[place]
    if parameter.is_text:
        return _word_reader(checked, place)
    kind, default = parameter.kind, parameter.default
    assert isinstance(kind, Quantity)
    unit, (low, high) = checked.units[parameter.name], checked.bounds(parameter.name)
    factor, offset, plain, required = unit.factor, unit.offset, unit.plain, parameter.required
    closed_low, closed_high, zero_is_blank = kind.closed_low, kind.closed_high, kind.zero_is_blank
    same = next((i for i, p in enumerate(checked.parameters) if isinstance(default, SameAs)
                 and p.name == default.symbol), None)  # fmt: skip
    fill = None if default is None or same is not None else unit.to_si(float(default))

    def read(cell: Any, si: list[Any]) -> Any:
        if type(cell) is float or type(cell) is int:
            if low < cell < high or (cell == low and closed_low) or (cell == high and closed_high):
                value = float(cell)
                return value if plain else value * factor + offset
            if not (cell == 0 and zero_is_blank and not required):
                return NotImplemented
        elif cell is not OMITTED and cell is not None:
            return NotImplemented
        if required:
            return NotImplemented
        return fill if same is None else si[same]

    return read


def _word_reader(checked: Checked, place: int) -> Callable[[Any, list[Any]], Any]:
    parameter = checked.parameters[place]
    resolve, required, default = checked.resolver(parameter.name), parameter.required, parameter.default

    def read(cell: Any, si: list[Any]) -> Any:
        if type(cell) is str and cell:
            try:
                return resolve(cell)
            except ValueError:
                return NotImplemented
        if required or not (cell is OMITTED or cell is None):
            return NotImplemented
        return default

    return read
