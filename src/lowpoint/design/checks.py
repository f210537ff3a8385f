"""Inputs that check themselves: each field is annotated with its quantity, whose bounds, unit and remedy are used."""

from __future__ import annotations

import typing
from functools import cache
from typing import Any, ClassVar, Self

import numpy as np

from lowpoint.errors import LowpointError
from lowpoint.quantities import Quantity
from lowpoint.units import SYSTEMS, Unit, dimension

__all__ = ["Inputs", "of", "told"]


def of(annotation: Any) -> Quantity:
    """The quantity of one of the annotations of :mod:`lowpoint.quantities`, to annotate a plain float with."""
    return next(extra for extra in annotation.__metadata__ if isinstance(extra, Quantity))


def _kinds(cls: Any) -> dict[str, tuple[Quantity, bool]]:
    """The number fields of a class of inputs."""
    return _kinds_of(cls)


@cache
def _kinds_of(cls: Any) -> dict[str, tuple[Quantity, bool]]:
    """Each number field with its quantity, and whether it may be left out."""
    found = {}
    for name, hint in typing.get_type_hints(cls, include_extras=True).items():
        for option in (hint, *typing.get_args(hint)):
            for extra in getattr(option, "__metadata__", ()):
                if isinstance(extra, Quantity):
                    found[name] = (extra, option is not hint)
    return found


def told(value: Any, kind: str, system: str = "metric") -> str:
    """An SI value in the user's unit of its dimension, six significant digits."""
    return _shown(float(value), dimension(kind).unit(system))


def _shown(value: float, unit: Unit) -> str:
    return f"{unit.from_si(value):.6g} {unit.label}".rstrip()


class Inputs:
    """A frozen dataclass whose fields are numbers (floats) or columns of them (arrays of one length), in SI.

    ``system`` is the set of units, ``metric`` or ``us``, that messages are told in. Every fault raises
    :class:`~lowpoint.errors.LowpointError` with what must be, what came, and a remedy.
    """

    columns: ClassVar[bool] = False
    """Do the fields hold a number a case, instead of one?"""
    subject: ClassVar[str] = "input"
    system: str

    @classmethod
    def in_units(cls, system: str = "metric", **values: Any) -> Self:
        """The same inputs from user units: bar, m3/h, mm, mPa.s, Kv, MPa, or those of the set ``us``."""
        _known(cls.subject, system)
        for name, (kind, _) in _kinds(cls).items():
            if values.get(name) is not None:
                unit = dimension(kind.dimension).unit(system)
                values[name] = unit.to_si(_numbers(cls.subject, name, values[name], unit))
        make: Any = cls
        found: Self = make(system=system, **values)
        return found

    def __post_init__(self) -> None:
        _known(self.subject, self.system)
        for name, (kind, optional) in _kinds(type(self)).items():
            value = getattr(self, name)
            if value is not None or not optional:
                self._set(name, self._checked(name, value, kind))

    def _set(self, name: str, value: Any) -> None:
        if isinstance(value, np.ndarray):
            value.setflags(write=False)
        object.__setattr__(self, name, value)

    def _where(self, row: int, rows: int) -> str:
        """The subject of a complaint about one of several rows."""
        return f"{self.subject}, case {row + 1}" if rows > 1 else self.subject

    def _checked(self, name: str, value: Any, kind: Quantity) -> Any:
        unit = dimension(kind.dimension).unit(self.system)
        if value is None:
            raise LowpointError(self.subject, f"{name} ({kind.meaning}) must be given", "nothing", kind.remedy)
        numbers = np.atleast_1d(_numbers(self.subject, name, value, unit))
        if numbers.ndim > 1 or not (self.columns or numbers.size == 1) or not numbers.size:
            shape = "one number or a list of them" if self.columns else "one number"
            raise LowpointError(self.subject, f"{name} must be {shape}", f"{numbers.size} numbers")
        for relation, bad in _beyond(numbers, kind, self.system):
            if bad.any():
                row = int(np.argmax(bad))
                got = _shown(float(numbers[row]), unit)
                raise LowpointError(self._where(row, len(numbers)), f"{name} must be {relation}", got, kind.remedy)
        return numbers if self.columns else float(numbers[0])

    def _spread(self, name: str, count: int) -> Any:
        """A column as long as the cases."""
        value = getattr(self, name)
        if len(value) not in (1, count):
            must = f"{name} must have one value, or one for each of the {count} cases"
            raise LowpointError(self.subject, must, f"{len(value)} values")
        return np.broadcast_to(value, (count,)).copy()

    def _word(self, name: str, words: tuple[str, ...]) -> None:
        if getattr(self, name) not in words:
            raise LowpointError(self.subject, f"{name} must be one of {', '.join(words)}", repr(getattr(self, name)))

    def _below(self, low: str, small: Any, high: str, large: Any, kind: str, remedy: str) -> None:
        """One value must lie below another, row by row."""
        lows, highs = np.broadcast_arrays(small, large)
        bad = ~(lows < highs)
        if bad.any():
            row = int(np.argmax(bad))
            must = f"{low} must be below {high} = {told(highs[row], kind, self.system)}"
            raise LowpointError(self._where(row, len(bad)), must, told(lows[row], kind, self.system), remedy)


def _known(subject: str, system: str) -> None:
    if system not in SYSTEMS:
        raise LowpointError(subject, f"the set of units must be one of {', '.join(SYSTEMS)}", repr(system))


def _numbers(subject: str, name: str, value: Any, unit: Unit) -> Any:
    try:
        return np.array(value, np.float64)
    except (TypeError, ValueError):
        must = f"{name} must be a number" + (f" in {unit.label}" if unit.label else "")
        raise LowpointError(subject, must, repr(value)) from None


def _beyond(numbers: Any, kind: Quantity, system: str) -> list[tuple[str, Any]]:
    """Each bound in words, and where it is broken."""
    metric, mine = dimension(kind.dimension).metric, dimension(kind.dimension).unit(system)
    low, high = metric.to_si(kind.low), metric.to_si(kind.high)
    if system == "us" and kind.us_low is not None:
        low = mine.to_si(kind.us_low)
    below = numbers < low if kind.closed_low else numbers <= low
    above = numbers > high if kind.closed_high else numbers >= high
    return [
        ("a finite number", ~np.isfinite(numbers)),
        (f"{'at least' if kind.closed_low else 'above'} {_shown(low, mine)}", below),
        (f"{'at most' if kind.closed_high else 'below'} {_shown(high, mine)}", above),
    ]
