"""The valve of a valve and a plate in series: what it must pass, and its index among its limits."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any, ClassVar

import numpy as np

from lowpoint import quantities as q
from lowpoint.design.cases import Cases
from lowpoint.design.checks import Inputs
from lowpoint.errors import LowpointError
from lowpoint.physics.indices import choked_index
from lowpoint.physics.limits import installed_limit
from lowpoint.physics.regime import regime_word
from lowpoint.physics.sizing import required_coefficient

__all__ = ["Valve", "ValveStates", "valve_states"]

VALVE_KINDS = ("incipient", "constant", "damage", "choked")


@dataclass(frozen=True, eq=False)
class Valve(Inputs):
    """A control valve, SI; each number one, or one a case: FL falls and limits move as it opens.

    ``fl``; ``valve_size`` and the pipes' inside diameters ``pipe_in``, ``pipe_out`` (m; left out: line size, no
    fittings); limits ``incipient``, ``constant``, ``damage`` of the bare valve at its size and pressure, upstream form;
    ``rated`` coefficient (Av, m2; in user units Kv or Cv), the most that it can open. Its margin counts to the limit of
    ``kind`` (incipient, constant, damage, choked).
    """

    columns: ClassVar[bool] = True
    subject: ClassVar[str] = "valve"

    fl: q.FL
    valve_size: q.ValveSize | None = None
    pipe_in: q.PipeIn | None = None
    pipe_out: q.PipeOut | None = None
    incipient: q.Incipient | None = None
    constant: q.Constant | None = None
    damage: q.Damage | None = None
    rated: q.Rated | None = None
    kind: str = "choked"
    system: str = "metric"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._word("kind", VALVE_KINDS)
        if self.kind != "choked" and getattr(self, self.kind) is None:
            raise LowpointError(self.subject, f"{self.kind} must be given where the margin counts to it", "nothing",
                                "Give the vendor's limit, or count the margin to choked.")  # fmt: skip
        for name in ("incipient", "constant", "damage"):
            limit = getattr(self, name)
            if limit is not None and (limit <= 1.0).any():
                must, got = f"{name} must be above 1, in upstream form", f"{limit.min():.6g}"
                raise LowpointError(self.subject, must, got, "Was another form meant?")
        for name in ("pipe_in", "pipe_out"):
            if getattr(self, name) is not None and self.valve_size is None:
                raise LowpointError(self.subject, f"valve_size must be given where {name} is", "nothing")
        if self.valve_size is not None and self.pipe_in is None:
            self._set("pipe_in", self.valve_size)
        if self.valve_size is not None and self.pipe_out is None:
            self._set("pipe_out", self.pipe_in)

    def over(self, count: int, times: int = 1) -> dict[str, Any]:
        """Every number as long as the cases, ``times`` over; None for what is left out."""
        numbers = [f.name for f in fields(self) if f.name not in ("kind", "system")]
        return {
            name: None if getattr(self, name) is None else np.tile(self._spread(name, count), times) for name in numbers
        }


@dataclass(frozen=True, eq=False)
class ValveStates:
    """The valve in each case: ``coefficient`` it must have (Av, m2), index, limits between its reducers, margin."""

    coefficient: Any
    sigma: Any
    incipient: Any
    constant: Any
    damage: Any
    choked_limit: Any
    margin: Any
    """NaN where the plate leaves it no drop, or no valve of that size passes the flow."""

    @property
    def regime(self) -> Any:
        """One word a case; empty where there is no answer."""
        word = regime_word(self.sigma, self.incipient, self.constant, self.damage, choked=self.choked_limit)
        return np.where(np.isnan(self.margin), "", word)


def valve_states(valve: Valve, cases: Cases, p_between: Any) -> ValveStates:
    """The valve between p1 and ``p_between`` (Pa; as long as the cases, or a whole number of times as long)."""
    times = len(p_between) // cases.count
    v = valve.over(cases.count, times)
    flow, p1, pv, pc, density = (
        np.tile(x, times) for x in (cases.flow, cases.p1, cases.liquid.pv, cases.liquid.pc, cases.liquid.density)
    )
    outlet = np.where(p_between < p1, p_between, np.nan)
    sizes = (v["valve_size"], v["pipe_in"], v["pipe_out"])
    coefficient = required_coefficient(flow, p1, outlet, pv, pc, density, v["fl"], *sizes)
    choked = choked_index(p1, pv, pc, v["fl"], *((coefficient, *sizes) if sizes[0] is not None else ()))
    limits = {name: _installed(v[name], coefficient, sizes) for name in ("incipient", "constant", "damage")}
    sigma = (p1 - pv) / (p1 - outlet)
    limit = choked if valve.kind == "choked" else limits[valve.kind]
    return ValveStates(coefficient, sigma, **limits, choked_limit=choked,
                       margin=np.where(np.isnan(coefficient), np.nan, sigma / limit - 1.0))  # fmt: skip


def _installed(limit: Any, coefficient: Any, sizes: tuple[Any, Any, Any]) -> Any:
    return limit if limit is None or sizes[0] is None else installed_limit(limit, coefficient, *sizes)
