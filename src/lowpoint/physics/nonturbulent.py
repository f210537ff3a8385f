"""Non-turbulent (laminar and transitional) flow: the valve Reynolds number and the factor FR.

For it the standard considers neither fittings nor choking; the callers take the larger coefficient, or the smaller
flow, of this branch and the turbulent one, so that viscosity never makes an answer smaller than choking does.
The factor depends on the unknown itself, so a root is searched: upward from the turbulent coefficient (downward from
the turbulent flow) in steps of 6 % to the first change of sign, then by bisection. Trim class is an input and never
switched on the way.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics.constants import N2, N4, N32
from lowpoint.quantities import Floats

__all__ = ["coefficient_for", "drop_for", "flow_through", "valve_reynolds"]

TURBULENT = 10_000.0
STEP, STEPS, HALVINGS = 1.06, 160, 60
"""The search goes up to 1.06^160, some 11 000 times the turbulent coefficient; 60 halvings end below a rounding."""


def reynolds(flow: Any, coefficient: Any, nu: Any, fl: Any, fd: Any, pipe_in: Any) -> Any:
    """``Rev = N4 Fd Q/(nu sqrt(C FL)) (FL^2 C^2/(N2 D^4) + 1)^(1/4)``, C as Av in m2."""
    head = fl * coefficient / (pipe_in * pipe_in)
    return N4 * fd * flow / (nu * np.sqrt(coefficient * fl)) * np.sqrt(np.sqrt(head * head / N2 + 1.0))


def trim_number(coefficient: Any, valve_size: Any, reduced: Any) -> Any:
    """``n = N2/(C/d^2)^2`` for full-size trim, ``1 + N32 (C/d^2)^(2/3)`` for reduced trim."""
    relative = coefficient / (valve_size * valve_size)
    return np.where(reduced, 1.0 + N32 * np.cbrt(relative * relative), N2 / (relative * relative))


def reynolds_factor(rev: Any, n: Any, fl: Any) -> Any:
    """``FR``: the smallest of the transitional curve (from Rev 10), the laminar curve, and 1."""
    laminar = 0.026 / fl * np.sqrt(n * rev)
    transitional = 1.0 + 0.33 * np.sqrt(fl) / np.sqrt(np.sqrt(n)) * np.log10(rev / TURBULENT)
    return np.minimum(np.where(rev >= 10.0, np.minimum(transitional, laminar), laminar), 1.0)


def _first_root(excess: Callable[[Any], Any], start: Any, step: float) -> Any:
    """First root of ``excess`` from ``start`` on (geometric steps), where it begins negative; NaN where none."""
    low, high = start.copy(), np.full_like(start, np.nan)
    found = np.zeros(start.shape, np.bool_)
    x = start
    for _ in range(STEPS):
        x = x * step
        crossed = ~found & (excess(x) >= 0.0)
        high = np.where(crossed, x, high)
        found = found | crossed
        if found.all():
            break
        low = np.where(found, low, x)
    for _ in range(HALVINGS):
        middle = np.sqrt(low * high)
        beyond = excess(middle) >= 0.0
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    return high


def coefficient_for(
    flow: Any, dp: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, viscosity: Any, fd: Any, reduced: Any
) -> Any:
    """Required coefficient of this branch on the actual drop: the first C with ``C FR(C) = Q sqrt(rho/dp)``."""
    nu = viscosity / density
    turbulent = flow * np.sqrt(density / dp)

    def factor(c: Any, at: Any) -> Any:
        rev = reynolds(flow[at], c, nu[at], fl[at], fd[at], pipe_in[at])
        return reynolds_factor(rev, trim_number(c, valve_size[at], reduced[at]), fl[at])

    answer = turbulent.copy()
    everywhere = np.arange(len(flow))
    slow = np.flatnonzero(~(factor(turbulent, everywhere) >= 1.0))
    if len(slow):
        target = turbulent[slow]
        answer[slow] = _first_root(lambda c: c * factor(c, slow) - target, target, STEP)
    return answer


def flow_through(
    coefficient: Any, dp: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, viscosity: Any, fd: Any,
    reduced: Any,
) -> Any:  # fmt: skip
    """Flow of this branch: the largest Q with ``Q = C FR(Q) sqrt(dp/rho)``."""
    nu = viscosity / density
    turbulent = coefficient * np.sqrt(dp / density)
    n = trim_number(coefficient, valve_size, reduced)

    def lacking(flow: Any, at: Any) -> Any:
        rev = reynolds(flow, coefficient[at], nu[at], fl[at], fd[at], pipe_in[at])
        return turbulent[at] * reynolds_factor(rev, n[at], fl[at]) - flow

    answer = turbulent.copy()
    slow = np.flatnonzero(~(lacking(turbulent, np.arange(len(turbulent))) >= 0.0))
    if len(slow):
        answer[slow] = _first_root(lambda flow: lacking(flow, slow), turbulent[slow], 1.0 / STEP)
    return answer


def drop_for(
    flow: Any, coefficient: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, viscosity: Any, fd: Any,
    reduced: Any,
) -> Any:  # fmt: skip
    """Drop of this branch, explicit since flow and coefficient fix Rev: ``dp = rho (Q/(C FR))^2``."""
    rev = reynolds(flow, coefficient, viscosity / density, fl, fd, pipe_in)
    factor = reynolds_factor(rev, trim_number(coefficient, valve_size, reduced), fl)
    velocity = flow / (coefficient * np.where(factor > 0.0, factor, np.nan))
    return density * velocity * velocity


def rows_with(viscosity: Any) -> Any:
    """Which rows give a viscosity; None where none does."""
    return None if viscosity is None else np.flatnonzero(~np.isnan(viscosity))


def picked(rows: Any, trim: Any, *arrays: Floats) -> list[Any]:
    """The arguments of the chosen rows, with the trim class as a last mask."""
    reduced = np.broadcast_to(np.asarray(trim == "reduced"), len(arrays[0]))
    return [x[rows] for x in arrays] + [reduced[rows]]


def not_turbulent(flow: Any, coefficient: Any, density: Any, fl: Any, pipe_in: Any, viscosity: Any, fd: Any) -> Any:
    """Where a viscosity is given and Rev is below 10 000."""
    if viscosity is None:
        return False
    return reynolds(flow, coefficient, viscosity / density, fl, fd, pipe_in) < TURBULENT


SLOW = Caution(
    "the flow is not turbulent (valve Reynolds number below 10 000): fittings and choking are outside the standard's "
    "method there; which trim class uses which equation is from memory",
    lambda flow, result, density, fl, pipe_in, viscosity, fd: not_turbulent(
        flow, result, density, fl, pipe_in, viscosity, fd),
)  # fmt: skip
SLOW_FLOW = Caution(
    SLOW.text,
    lambda result, coefficient, density, fl, pipe_in, viscosity, fd: not_turbulent(
        result, coefficient, density, fl, pipe_in, viscosity, fd),
)  # fmt: skip
SLOW_DROP = Caution(SLOW.text, not_turbulent)
NO_ROOT = NoAnswer(
    "the search for the non-turbulent branch found no root within 10 000 times the turbulent value; the flow is too "
    "viscous for this valve size",
    lambda viscosity: False if viscosity is None else ~np.isnan(viscosity),
)  # fmt: skip


@function(
    "VALVE_REYNOLDS", group="valves", gives="valve Reynolds number", source_key="IEC 60534-2-1",
    equation="N4 Fd Q/(nu sqrt(C FL)) (FL^2 C^2/(N2 D^4) + 1)^(1/4), nu = viscosity/density",
    cautions=(Caution("below 10 000 the flow is not turbulent", lambda result: result < TURBULENT),),
)  # fmt: skip
def valve_reynolds(
    flow: q.Flow, coefficient: q.Coefficient, viscosity: q.Viscosity, density: q.Density, fl: q.FL, fd: q.Fd,
    pipe_in: q.PipeIn,
) -> q.Ratio:  # fmt: skip
    """Valve Reynolds number, ``Rev = N4 Fd Q/(nu sqrt(C FL)) (FL^2 C^2/(N2 D^4) + 1)^(1/4)``.

    Arrays of one length, SI (C as Av in m2), ``nu = viscosity/density``. Turbulent from 10 000 up.
    Source: IEC 60534-2-1.
    """
    return reynolds(flow, coefficient, viscosity / density, fl, fd, pipe_in)
