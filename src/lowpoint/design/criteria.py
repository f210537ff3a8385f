"""What a design is held to: the limit and margin, and how bores are rounded and read."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Annotated, ClassVar

from lowpoint import quantities as q
from lowpoint.design.checks import Inputs
from lowpoint.design.drills import series

__all__ = ["KINDS", "ROUNDINGS", "Criteria"]

KINDS = ("incipient", "constant", "choked")
ROUNDINGS = ("nearest", "down", "none")
TAPS = ("corner", "flange", "radius")

Margin = Annotated[
    float,
    q.Quantity("margin", "least sigma/limit - 1 of every plate", "ratio", low=0.0, closed_low=True, high=100.0,
               remedy="A margin of 0.1 keeps the index 10 % above the limit."),
]  # fmt: skip
Plugging = Annotated[float, q.Quantity("plugging", "bore below which a hole is easily plugged", "size", low=0.0)]


@dataclass(frozen=True)
class Criteria(Inputs):
    """Every plate's index stays above its own limit of ``kind`` by ``margin``: ``sigma/limit - 1 >= margin``.

    ``rounding`` to the ``drills`` series (metric, inch): ``nearest`` to the wanted flow that keeps the verdict,
    ``down`` (never more flow than wanted), ``none``. ``taps`` (corner, flange, radius) for the drop that an instrument
    shows. Bores below ``plugging`` (m; 3 mm, common practice) get a caution.
    """

    subject: ClassVar[str] = "criteria"

    kind: str = "constant"
    margin: Margin = 0.0
    drills: str = "metric"
    rounding: str = "nearest"
    taps: str = "flange"
    plugging: Plugging = 3e-3
    system: str = "metric"

    @property
    def limit_name(self) -> str:
        """The limit that margins count to, in words."""
        return "choking" if self.kind == "choked" else f"{self.kind} cavitation"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._word("kind", KINDS)
        self._word("rounding", ROUNDINGS)
        self._word("taps", TAPS)
        series(self.drills)
