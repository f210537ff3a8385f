"""Plate after plate: the flow that a set passes and the pressures between, with choking in force.

A plate takes ``K x`` of the dynamic pressure ``x = rho v^2/2`` in the pipe, and chokes where its lowest pressure is
``FF pv``, so where the pressure before it is ``FF pv + F x`` (F its fall to the vena contracta, ``FL^2 = K/F``). At a
flow the pressure before a plate is therefore the larger of::

    p_(i-1) = max(p_i + K_i x,  FF pv + F_i x)

from the last plate backwards, and the flow that a set passes between p1 and p2 is the one with ``p_0 = p1``::

    x = min((p1 - p2)/sum K,  min over i of (p1 - FF pv)/(F_i + K_1 + ... + K_(i-1)))

Whatever the pattern of choked plates, mass is conserved and the pressures fall. Arrays of (plates, cases), SI.
Source: derived; K and F by :mod:`lowpoint.physics.plate_loss`.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.design.cases import Cases
from lowpoint.design.plates import PlateSet
from lowpoint.physics.orifices import orifice_limit
from lowpoint.physics.plate_loss import Loss, losses

__all__ = ["Geometry", "March", "backward", "before_plate", "choking_index", "march", "passed"]

MOST_ROUNDS = 60


@dataclass(frozen=True, eq=False)
class Geometry:
    """The plates of a set as columns (plates, 1), for formulas over plates and cases."""

    pipe: float
    bore: Any
    bore_length: Any
    holes: Any

    @classmethod
    def of(cls, plates: PlateSet) -> Geometry:
        length = plates.column("bore_length")
        return cls(
            pipe=plates.pipe,
            bore=plates.column("bore")[:, None],
            bore_length=None if np.isnan(length).all() else length[:, None],
            holes=plates.column("holes")[:, None],
        )

    def loss(self, reynolds: Any) -> Loss:
        """What the plates do to a flow, (plates, cases)."""
        return losses(self.bore, np.full(self.bore.shape, self.pipe), self.bore_length, self.holes, reynolds)

    def limit(self, kind: str) -> Any:
        """Incipient or constant limit of the plates, (plates, 1), upstream form."""
        return orifice_limit(kind, self.bore, np.full(self.bore.shape, self.pipe), self.bore_length, self.holes)


@dataclass(frozen=True, eq=False)
class March:
    """Where the flow went: ``flow`` and ``passed`` (cases), ``pressures`` (plates + 1, cases), ``choked``, ``loss``."""

    flow: Any
    """The flow, m3/s: the wanted one, or what the set passes."""
    passed: Any
    """What the set passes between p1 and p2 with nothing else in the line, m3/s."""
    pressures: Any
    choked: Any
    loss: Loss


def before_plate(dynamic: Any, k: Any, fall: Any, after: Any, floor: Any) -> Any:
    """Pressure that a flow needs before a plate, ``max(p_after + K x, FF pv + F x)``: free, or choked."""
    return np.maximum(after + k * dynamic, floor + fall * dynamic)


def choking_index(loss: Loss, before: Any, pv: Any, floor: Any) -> Any:
    """Index at which a plate chokes, ``(p - pv)/(FL^2 (p - FF pv))`` with p before it."""
    return (before - pv) / (loss.recovery2 * (before - floor))


def backward(dynamic: Any, loss: Loss, p2: Any, floor: Any) -> Any:
    """Pressures before and between the plates that a flow needs, and p2: (plates + 1, cases)."""
    pressures = [p2]
    for k, fall in zip(loss.k[::-1], loss.fall[::-1], strict=True):
        pressures.append(before_plate(dynamic, k, fall, pressures[-1], floor))
    return np.array(pressures[::-1])


def _passing(loss: Loss, p1: Any, p2: Any, floor: Any) -> Any:
    """Dynamic pressure of the flow that plates of these losses pass, free or choked."""
    before = np.cumsum(loss.k, axis=0) - loss.k
    free = (p1 - p2) / np.sum(loss.k, axis=0)
    return np.minimum(free, np.min((p1 - floor) / (loss.fall + before), axis=0))


def passed(geometry: Geometry, cases: Cases) -> Any:
    """Flow that the set passes from p1 to p2, m3/s; with viscosity K follows the Reynolds number of the answer."""
    area = 0.25 * np.pi * geometry.pipe**2
    reynolds, flow = None, np.zeros(cases.count)
    for _ in range(MOST_ROUNDS):  # each round leaves a few hundredths of the last one's error
        x = _passing(geometry.loss(reynolds), cases.p1, cases.p2, cases.critical_floor)
        last, flow = flow, area * np.sqrt(2.0 * x / cases.liquid.density)
        reynolds = cases.reynolds(flow, geometry.pipe)
        if reynolds is None or (np.abs(flow - last) <= 1e-14 * flow).all():
            break
    return flow


def march(geometry: Geometry, cases: Cases) -> March:
    """The flow of each case and the pressures along the plates."""
    most = passed(geometry, cases)
    # A set that is sized for the wanted flow rules it, whichever way its roundings fell.
    limited = (most <= cases.flow * (1.0 + 1e-9)) | (cases.held == "both")
    flow = np.where(limited, most, cases.flow)
    loss = geometry.loss(cases.reynolds(flow, geometry.pipe))
    dynamic = 0.5 * cases.liquid.density * (flow / (0.25 * np.pi * geometry.pipe**2)) ** 2
    floor = cases.critical_floor
    pressures = backward(dynamic, loss, cases.p2, floor)
    if cases.held == "inlet":
        drops = np.broadcast_to(loss.k * dynamic, pressures[1:].shape)
        falling = np.concatenate([cases.p1[None], cases.p1 - np.cumsum(drops, axis=0)])
        pressures = np.where(limited, pressures, falling)
    pressures[0] = np.where(limited, cases.p1, pressures[0])
    choked = pressures[:-1] <= (loss.fall * dynamic + floor) * (1.0 + 1e-11)
    return March(flow, most, pressures, choked, loss)
