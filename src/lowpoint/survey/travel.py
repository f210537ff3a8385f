"""A vendor's table of one valve by opening, as a list gives it on a sheet of its own."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

__all__ = ["Numbers", "TravelTable"]

Numbers: TypeAlias = npt.NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class TravelTable:
    """A vendor's table of one valve by opening; every column as long as ``travel``, increasing. SI, limits upstream.

    A column that the table does not have is None.
    """

    name: str
    travel: Numbers
    """Openings, shares of the travel, increasing."""
    coefficient: Numbers | None = None
    fl: Numbers | None = None
    xfz: Numbers | None = None
    incipient: Numbers | None = None
    constant: Numbers | None = None
    damage: Numbers | None = None
    vibration: Numbers | None = None

    def at(self, name: str, travel: Any) -> Any:
        """A column read at openings, linear between rows, NaN outside the table or where it has no such column."""
        values = getattr(self, name)
        if values is None:
            return np.full(np.shape(travel), np.nan)
        inside = (travel >= self.travel[0]) & (travel <= self.travel[-1])
        return np.where(inside, np.interp(travel, self.travel, values), np.nan)
