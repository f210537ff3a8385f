"""The split of a drop over plates so that every plate has the same margin to its own limit.

Plates later in a set have larger bores and so higher limits: equal indices would leave the last with the least margin.
With the drop of a plate ``dp(bore) = K x`` and its limit ``L(bore)`` the conditions for one margin m are::

    head_(i-1) = (1 + m) L(bore_i) dp(bore_i)      head_i = head_(i-1) - dp(bore_i)      head_n = p2 - base

with ``head = p - pv`` for the incipient and constant limits; for choking ``head = p - FF pv`` and ``L = 1/FL^2``, which
is the same condition. A root search in the logarithms of the n bores and of 1 + m, by Newton's method from a table.
Source: derived from the definition of the index.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.design.cases import Cases
from lowpoint.errors import LowpointError
from lowpoint.physics.orifices import NARROWEST, WIDEST, orifice_limit
from lowpoint.physics.plate_loss import losses

__all__ = ["Duty", "Split", "Table", "equal_margin"]

MOST_STEPS = 60
AGREED = 1e-12
"""By which the logarithms of the conditions may be off."""
NUDGE = 1e-6
"""Step of the logarithm of a bore in which slopes are taken."""
LONGEST_STEP = 0.5
"""Of the logarithm of a bore in one step of the search."""
CLOSED, OPEN = math.log(NARROWEST), math.log(WIDEST)
"""Logarithms of the root of the open share between which a bore is looked for."""


@dataclass(frozen=True)
class Duty:
    """What one case asks of a set: the governing case in a pipe, with plates of ``holes`` holes, and a limit."""

    pipe: float
    holes: float
    kind: str
    dynamic: float
    """``rho v^2/2`` in the pipe, Pa."""
    reynolds: float | None
    p1: float
    p2: float
    base: float
    """Pressure from which heads count: pv, or FF pv for choking."""

    @classmethod
    def of(cls, cases: Cases, case: int, pipe: float, holes: float, kind: str) -> Duty:
        reynolds = cases.reynolds(cases.flow, pipe)
        base = cases.critical_floor if kind == "choked" else cases.liquid.pv
        return cls(
            pipe, holes, kind, float(cases.dynamic(pipe)[case]), None if reynolds is None else float(reynolds[case]),
            float(cases.p1[case]), float(cases.p2[case]), float(base[case]),
        )  # fmt: skip

    def bore(self, log_share: Any) -> Any:
        """Bore from the logarithm of the root of the open share."""
        return self.pipe / math.sqrt(self.holes) * np.exp(log_share)

    @property
    def heads(self) -> tuple[float, float]:
        """Heads before the first plate and after the last."""
        return self.p1 - self.base, self.p2 - self.base

    def curves(self, bore: Any, bore_length: Any) -> tuple[Any, Any]:
        """Drop (Pa) and limit of plates with these bores."""
        bore_length = bore_length if np.any(bore_length) else None
        pipe, holes = np.full(len(bore), self.pipe), np.full(len(bore), self.holes)
        loss = losses(bore, pipe, bore_length, holes, self.reynolds)
        if self.kind == "choked":
            return loss.k * self.dynamic, 1.0 / loss.recovery2
        return loss.k * self.dynamic, orifice_limit(self.kind, bore, pipe, bore_length, holes)


@dataclass(frozen=True, eq=False)
class Split:
    """A drop over plates: ``bores`` (m), ``pressures`` (Pa, one more), ``drops`` (Pa), ``limits``, one ``margin``."""

    bores: Any
    pressures: Any
    drops: Any
    limits: Any
    margin: float


class Table:
    """The drop and the limit of a plate over its bore, read off 200 bores: for first guesses and for counting plates.

    ``bore_length`` gives the bore length (m) that strength asks for at bores.
    """

    def __init__(self, duty: Duty, bore_length: Callable[[Any], Any]) -> None:
        self._duty = duty
        self._shares = np.linspace(CLOSED, OPEN, 200)
        bores = duty.bore(self._shares)
        drops, limits = duty.curves(bores, bore_length(bores))
        self._drops = np.log(drops)
        self._needs = -np.log(limits * drops)  # rises with the bore

    def _head_after(self, head: Any, log_margin: Any) -> Any:
        """Head after the plate that takes the most of this head at a margin."""
        drop = np.exp(np.interp(log_margin - np.log(head), self._needs, self._drops))
        return np.maximum(head - drop, 1e-6 * head)

    def shares(self, count: int) -> Any:
        """Logarithms of the root of the open shares of ``count`` plates of equal margin, nearly."""
        head, last = self._duty.heads
        margins = np.linspace(math.log(0.02), math.log(50.0), 200)
        heads = np.full(len(margins), head)
        for _ in range(count):
            heads = self._head_after(heads, margins)
        log_margin = np.interp(math.log(last), np.log(heads), margins)
        found = []
        for _ in range(count):
            found.append(np.interp(log_margin - math.log(head), self._needs, self._shares))
            head = float(self._head_after(head, log_margin))
        return np.array(found)

    def greedy(self, margin: float, most: int = 100) -> Any:
        """Pressures after plates that each take the largest drop that keeps the margin, until p2 is reached.

        No set reaches p2 with fewer plates of that margin; as read off a table, the number may be one off.
        The march ends after ``most`` plates.
        """
        head, last = self._duty.heads
        pressures: list[float] = []
        while head > last * (1.0 + 1e-9) and len(pressures) < most:
            head = float(self._head_after(head, math.log1p(margin)))
            pressures.append(self._duty.base + head)
        return np.array(pressures)


@dataclass(frozen=True, eq=False)
class _Local:
    """Drops and limits of plates, and how they change with the logarithm of the bore."""

    drops: Any
    limits: Any
    slopes: Any
    """Of ln drop."""
    slopes_both: Any
    """Of ln(limit drop)."""

    @classmethod
    def at(cls, duty: Duty, log_shares: Any, bore_length: Any) -> _Local:
        nudged = np.concatenate([log_shares, log_shares + NUDGE])
        both = duty.curves(duty.bore(nudged), np.tile(bore_length, 2))
        (drops, near), (limits, near_limits) = (np.split(x, 2) for x in both)
        slopes = np.log(near / drops) / NUDGE
        return cls(drops, limits, slopes, slopes + np.log(near_limits / limits) / NUDGE)

    def heads(self, duty: Duty) -> Any:
        """Heads before the plates and after the last."""
        return duty.heads[0] - np.concatenate([[0.0], np.cumsum(self.drops)])

    def off(self, duty: Duty, log_margin: float) -> Any:
        """How far the conditions are from being met, as logarithms; the last one is the pressure after all plates."""
        heads = self.heads(duty)
        return np.append(np.log(heads[:-1] / (self.limits * self.drops)) - log_margin,
                         math.log(heads[-1] / duty.heads[1]))  # fmt: skip

    def jacobian(self, duty: Duty) -> Any:
        """How ``off`` changes with the logarithms of the bores and of 1 + m."""
        count = len(self.drops)
        matrix = np.zeros((count + 1, count + 1))
        # A head falls by the drops of all plates before it.
        before = np.tril(np.ones((count + 1, count)), -1)
        matrix[:, :count] = -before * (self.drops * self.slopes) / self.heads(duty)[:, None]
        matrix[np.arange(count), np.arange(count)] = -self.slopes_both
        matrix[:count, count] = -1.0
        return matrix


def equal_margin(duty: Duty, bore_length: Any, start: Any) -> Split:
    """The split of equal margin over as many plates as there are bore lengths (m; 0: sharp edge).

    ``start``: bores (m) to begin with. LowpointError where no bores take the drop.
    """
    bore_length = np.asarray(bore_length, np.float64)
    u = np.log(np.asarray(start) * (math.sqrt(duty.holes) / duty.pipe))
    log_margin = None
    for _ in range(MOST_STEPS):
        local = _Local.at(duty, u, bore_length)
        if not local.heads(duty)[-1] > 0.0:  # the plates take more than there is: open them all
            u = np.minimum(u + 0.1, OPEN)
            continue
        if log_margin is None:
            log_margin = float(np.median(local.off(duty, 0.0)[:-1]))
        off = local.off(duty, log_margin)
        if np.abs(off).max() < AGREED:
            pressures = duty.base + local.heads(duty)
            return Split(duty.bore(u), pressures, local.drops, local.limits, math.expm1(log_margin))
        move = np.linalg.solve(local.jacobian(duty), -off)
        move *= min(1.0, LONGEST_STEP / float(np.abs(move[:-1]).max()))
        u, log_margin = np.clip(u + move[:-1], CLOSED, OPEN), log_margin + float(move[-1])
    raise _no_split(u)


def _no_split(log_shares: Any) -> LowpointError:
    must = f"{len(log_shares)} plates must share the drop at equal margin"
    if (log_shares > OPEN - 1e-3).any():
        return LowpointError("plate set", must, "plates that take more than their share with hardly anything closed",
                             "The flow is too fast: choose a larger pipe.")  # fmt: skip
    return LowpointError("plate set", must, f"no bores that do in {MOST_STEPS} steps", "Choose another pipe size.")
