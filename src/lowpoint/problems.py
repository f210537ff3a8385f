"""What can be wrong with one answer: the error that a cell shows, and the sentence that says why."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import numpy.typing as npt

__all__ = ["PASSED_ON", "CellError", "Fault", "Ledger", "counted", "shown"]

PASSED_ON = "passed on unchanged"
"""How the sentence ends where an error only came through."""


class CellError(StrEnum):
    """A true error value of a worksheet cell."""

    NULL = "#NULL!"
    DIV0 = "#DIV/0!"
    VALUE = "#VALUE!"
    REF = "#REF!"
    NAME = "#NAME?"
    NUM = "#NUM!"
    NA = "#N/A"
    SPILL = "#SPILL!"
    CALC = "#CALC!"


@dataclass(frozen=True, slots=True)
class Fault:
    """An error and the sentence for it; the sentence is made only when someone asks, for the row asked about."""

    error: CellError
    sentence: Callable[[int], str]


class Ledger:
    """Which rows failed and why: the first fault entered for a row stays."""

    def __init__(self, rows: int) -> None:
        self.rows = rows
        self.faults: list[Fault] = []
        self._codes: npt.NDArray[np.int32] | None = None

    @property
    def clean(self) -> bool:
        return self._codes is None

    def codes(self) -> npt.NDArray[np.int32]:
        """0 for a good row, else the fault's place in ``faults`` counted from 1."""
        return np.zeros(self.rows, np.int32) if self._codes is None else self._codes

    def blame(self, mask: npt.NDArray[np.bool_], error: CellError, sentence: Callable[[int], str]) -> None:
        """Enter a fault for the rows of ``mask`` (one element, or one a row) that have none yet."""
        if not mask.any():
            return
        if self._codes is None:
            self._codes = np.zeros(self.rows, np.int32)
        self.faults.append(Fault(error, sentence))
        self._codes[np.broadcast_to(mask, self.rows) & (self._codes == 0)] = len(self.faults)

    def good(self) -> npt.NDArray[np.intp]:
        """Indices of the rows without a fault."""
        return np.arange(self.rows) if self._codes is None else np.flatnonzero(self._codes == 0)

    def error(self, row: int) -> CellError | None:
        """The error of one row, None for a good one."""
        code = 0 if self._codes is None else int(self._codes[row])
        return self.faults[code - 1].error if code else None

    def sentence(self, row: int) -> str | None:
        """Why one row failed, None for a good one."""
        code = 0 if self._codes is None else int(self._codes[row])
        return self.faults[code - 1].sentence(row) if code else None


def shown(value: object, unit: str = "") -> str:
    """A value as a message shows it: six significant digits and the unit, text in quotation marks."""
    if value is None:
        return "a blank cell"
    if isinstance(value, CellError):
        return str(value)
    if isinstance(value, str):
        text = value if len(value) <= 40 else value[:37] + "..."
        # A no-break space or another sign that nobody sees is shown by its code.
        seen = "".join(x if x.isprintable() else x.encode("unicode_escape").decode() for x in text)
        return f"the text '{seen}'"
    if isinstance(value, bool):
        return str(value).upper()
    if isinstance(value, int | float | np.floating | np.integer):
        number = float(value)
        if np.isnan(number):
            return "a blank cell"
        return f"{number:.6g}" + (f" {unit}" if unit else "")
    return f"a {type(value).__name__}"


def counted(number: int, noun: str) -> str:
    """A number with its noun, in the plural where it is not one."""
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"
