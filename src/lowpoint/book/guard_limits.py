"""How much one workbook or list may hold and take, under names that a command line can set.

The limits in force are set once around a command's work (:func:`limiting`); whoever reads a file asks for them.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import dataclass, replace
from typing import Any, NamedTuple, NoReturn

from lowpoint.errors import BookError, LowpointError

__all__ = ["DEFAULT_LIMITS", "NAMES", "Limits", "in_force", "limiting", "size_text", "too_much", "with_limit"]

MB = 1 << 20
LONGEST_FORMULA = 32_768
DEEPEST_FORMULA = 100
"""Bounds of the reader of formulas itself: a limit may be lower, not higher."""


@dataclass(frozen=True, slots=True)
class Limits:
    """How much a workbook may hold and take. A list of 100 000 rows and fifteen columns fits in several times.

    ``ratio`` (unpacked to packed) is asked of parts above ``ratio_from`` bytes only: small parts may be as
    repetitive as they like, and a large sheet of equal rows packs 30 to 100 times, where an attack comes near
    the 1 030 times that deflate allows. ``cells`` counts the cells of all sheets. ``seconds`` is the time for
    evaluating one book, ``memory`` (bytes) what a worker process may take, 0 for as much as there is; a system
    bounds a process's memory on Linux only. Source of the figures: common practice, checked in the tests on books
    made there.
    """

    file_bytes: int = 256 * MB
    unpacked_bytes: int = 1024 * MB
    part_bytes: int = 512 * MB
    entries: int = 10_000
    ratio: float = 250.0
    ratio_from: int = 16 * MB
    cells: int = 5_000_000
    formula_length: int = LONGEST_FORMULA
    formula_depth: int = DEEPEST_FORMULA
    seconds: float = 120.0
    memory: int = 0

    @property
    def whole_seconds(self) -> float:
        """When a worker is ended that still has not finished its book: reading and writing have their time too."""
        return 2 * self.seconds + 60.0


class Name(NamedTuple):
    """One limit on the command line: the field it sets, what it is, its unit, its bounds."""

    field: str
    says: str
    unit: str
    least: float
    most: float


HUGE = 1 << 50
NAMES = {
    "file": Name("file_bytes", "size of the file", "bytes", 1, HUGE),
    "unpacked": Name("unpacked_bytes", "size of all its parts unpacked", "bytes", 1, HUGE),
    "part": Name("part_bytes", "size of one part unpacked", "bytes", 1, HUGE),
    "parts": Name("entries", "number of parts", "", 1, 0xFFFF),
    "ratio": Name("ratio", "unpacked to packed size of a large part", "", 1, 2000),
    "cells": Name("cells", "cells of all sheets", "", 1, 1 << 34),
    "length": Name("formula_length", "characters of a formula; longer ones are kept as they are", "", 1,
                   LONGEST_FORMULA),
    "depth": Name("formula_depth", "nesting of a formula; deeper ones are kept as they are", "", 1, DEEPEST_FORMULA),
    "seconds": Name("seconds", "time for evaluating one book", "s", 0.001, 86_400),
    "memory": Name("memory", "memory of the process that works on a book (Linux only)", "bytes", 0, HUGE),
}  # fmt: skip
"""The limits by the name that stands on a command line."""

DEFAULT_LIMITS = Limits()
_IN_FORCE: ContextVar[Limits] = ContextVar("limits", default=DEFAULT_LIMITS)
_VALUE = re.compile(r"([0-9]+(?:\.[0-9]+)?)\s*(|B|kB|MB|GB|s)", re.IGNORECASE)
_TIMES = {"": 1, "b": 1, "kb": 1 << 10, "mb": MB, "gb": 1 << 30, "s": 1}


def in_force() -> Limits:
    """The limits that hold here and now."""
    return _IN_FORCE.get()


@contextmanager
def limiting(limits: Limits) -> Iterator[None]:
    """Within the block these limits hold, wherever none are named."""
    token = _IN_FORCE.set(limits)
    try:
        yield
    finally:
        _IN_FORCE.reset(token)


def with_limit(limits: Limits, text: str) -> Limits:
    """The limits with one set, from text such as ``cells=2000000``, ``unpacked=2GB`` or ``seconds=30``.

    LowpointError names what may be set, or what the value must be.

    >>> with_limit(DEFAULT_LIMITS, "part=64 MB").part_bytes
    67108864
    """
    name, sign, value = (piece.strip() for piece in text.partition("="))
    known = NAMES.get(name.lower())
    if known is None or not sign:
        must = "must be NAME=VALUE with one of the names " + ", ".join(NAMES)
        raise LowpointError("--limit", must, repr(text), "An example: --limit cells=2000000.")
    number = _number(value, known.unit)
    if number is None or not known.least <= number <= known.most:
        raise LowpointError(f"--limit {name.lower()}", _range(known), repr(value))
    whole = known.field not in ("ratio", "seconds")
    changes: dict[str, Any] = {known.field: int(number) if whole else number}
    return replace(limits, **changes)


def _number(text: str, unit: str) -> float | None:
    found = _VALUE.fullmatch(text)
    suffix = found[2].lower() if found else ""
    if found is None or (suffix == "s" and unit != "s") or (suffix.endswith("b") and unit != "bytes"):
        return None
    return float(found[1]) * _TIMES[suffix]


def _range(name: Name) -> str:
    if name.unit == "bytes":
        return "must be a size, such as 500000 or 64 MB" + (", 0 for none" if name.least == 0 else "")
    return f"must be a number from {name.least:g} to {name.most:.15g}" + (f" {name.unit}" if name.unit else "")


def too_much(book: str, must: str, got: str, name: str) -> NoReturn:
    """Raise BookError for a book beyond a limit; ``name`` is the limit's own."""
    remedy = (
        "Split the workbook, or take out what it does not need, such as pictures and unused sheets. If it comes from "
        f"someone you trust, raise the limit: --limit {name}=..."
    )
    raise BookError(book, f"must {must}", got, remedy)


def size_text(count: int) -> str:
    """A number of bytes for a message."""
    if count >= 1 << 30:
        return f"{count / (1 << 30):.3g} GB"
    return f"{count / MB:.3g} MB" if count >= MB else f"{count} bytes"
