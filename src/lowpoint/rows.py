"""Rows as kernels take them: defaults filled in, converted to SI a block at a time, words and tables made plain."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import numpy.typing as npt

from lowpoint.declare import Parameter, SameAs
from lowpoint.problems import CellError
from lowpoint.quantities import Table
from lowpoint.units import Unit

__all__ = ["from_si", "numbers_block", "table_fault", "to_si", "with_default", "words_block"]


def to_si(x: npt.NDArray[np.float64], unit: Unit) -> npt.NDArray[np.float64]:
    """Values in a user's unit as SI; the same array where the unit is the SI unit."""
    return x if unit.plain else x * unit.factor + unit.offset


def from_si(x: Any, unit: Unit) -> Any:
    """SI values in a user's unit."""
    return x if unit.plain else (x - unit.offset) / unit.factor


def with_default(parameter: Parameter, x: Any, filled: Mapping[str, Any]) -> Any:
    """A column with its blanks filled: with a constant, or with another argument's value of that row."""
    default = parameter.default
    if default is None:
        return x
    fill = filled[default.symbol] if isinstance(default, SameAs) else np.array([float(default)])
    if x is None or fill is None:
        return fill if x is None else x
    absent = np.isnan(x)
    return np.where(absent, fill, x) if absent.any() else x


def numbers_block(x: npt.NDArray[np.float64], unit: Unit, start: int, stop: int, count: int) -> Any:
    """One argument's rows of a block in SI, of the block's length; None where all are blank.

    A value for all rows stays one in memory (a stride of 0), so that kernels can tell and compute with it once.
    """
    if len(x) == 1 and count > 1:
        one = to_si(x, unit)
        return None if np.isnan(one[0]) else np.ndarray((stop - start,), np.float64, one, 0, (0,))
    part = to_si(x[start:stop], unit)
    return None if np.isnan(part[0]) and np.isnan(part).all() else part


def words_block(x: npt.NDArray[Any], start: int, stop: int, count: int) -> Any:
    """One argument's words of a block, one str where all are equal."""
    if len(x) == 1 and count > 1:
        return str(x[0])
    part = x[start:stop]
    return str(part[0]) if (part == part[0]).all() else part


def table_fault(parameter: Parameter, table: npt.NDArray[np.float64]) -> tuple[CellError | None, str]:
    """What is wrong with a table argument: the error and the words, or (None, '')."""
    kind, name = parameter.kind, parameter.name
    assert isinstance(kind, Table)
    if len(table) < 2:
        return CellError.NA, f"{name} must hold at least two rows"
    if np.isnan(table).any():
        return CellError.NA, f"{name} must have no blank between its rows"
    if (table < kind.low).any() or not np.isfinite(table).all():
        return CellError.NUM, f"{name} must hold finite numbers from {kind.low:g} up"
    if kind.increasing and not (np.diff(table, axis=0) > 0).all():
        return CellError.NUM, f"{name} must increase from row to row"
    return None, ""
