"""Non-turbulent (laminar and transitional) flow: the valve Reynolds number and the factor FR.

For it the standard considers neither fittings nor choking; the callers take the larger coefficient, or the smaller
flow, of this branch and the turbulent one, so that viscosity never makes an answer smaller than choking does. Where
FR is 1 the flow is turbulent and this branch has no say: water in a valve with an outlet expander keeps its FP.
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
GOLDEN, TOP_STEPS = (5.0**0.5 - 1.0) / 2.0, 40


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


def _first_root(excess: Callable[[Any, Any], Any], start: Any, step: float) -> Any:
    """First root of ``excess(x, rows)`` from ``start`` on (geometric steps), where it is negative; NaN where none.

    ``rows`` says which elements of ``start`` the values ``x`` belong to. Where the excess steps over zero without a
    root (FR jumps at Rev 10) the answer is the first value at which it is not negative.
    """
    answer = np.full(start.shape, np.nan)
    rows = np.arange(len(start))
    x = np.stack([start / step, start])
    y = np.stack([excess(x[0], rows), excess(x[1], rows)])
    for _ in range(STEPS):
        x_next = x[1] * step
        y_next = excess(x_next, rows)
        # The excess may rise above zero and fall again within a step: look at the top of every peak.
        peak = np.flatnonzero((y[1] > y[0]) & (y[1] >= y_next) & (y_next < 0.0))
        high, found = x_next.copy(), y_next >= 0.0
        if len(peak):
            top = _top(excess, x[0][peak], x_next[peak], rows[peak])
            above = excess(top, rows[peak]) >= 0.0
            high[peak[above]], found[peak[above]] = top[above], True
        if found.any():
            # A top may lie before the middle one of the three points.
            low = np.where(high > x[1], x[1], x[0]) if step > 1.0 else np.where(high < x[1], x[1], x[0])
            answer[rows[found]] = _halve(excess, low[found], high[found], rows[found])
        kept = ~found
        if not kept.any():
            break
        x, y = np.stack([x[1][kept], x_next[kept]]), np.stack([y[1][kept], y_next[kept]])
        rows = rows[kept]
    return answer


def _top(excess: Callable[[Any, Any], Any], low: Any, high: Any, rows: Any) -> Any:
    """Where a single peak between ``low`` and ``high`` has its top, by the golden section."""
    for _ in range(TOP_STEPS):
        ratio = (high / low) ** GOLDEN
        near, far = high / ratio, low * ratio
        left = excess(near, rows) >= excess(far, rows)
        low, high = np.where(left, low, near), np.where(left, far, high)
    return np.sqrt(low * high)


def _halve(excess: Callable[[Any, Any], Any], low: Any, high: Any, rows: Any) -> Any:
    """Bisection on a logarithmic scale; the end at which the excess is not negative."""
    for _ in range(HALVINGS):
        middle = np.sqrt(low * high)
        beyond = excess(middle, rows) >= 0.0
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    return high


def coefficient_for(
    flow: Any, dp: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, viscosity: Any, fd: Any, reduced: Any
) -> Any:
    """Required coefficient of this branch on the actual drop: the first C with ``C FR(C) = Q sqrt(rho/dp)``.

    0 where the flow is turbulent: the branch then asks for nothing.
    """
    nu = viscosity / density
    turbulent = flow * np.sqrt(density / dp)

    def factor(c: Any, at: Any) -> Any:
        rev = reynolds(flow[at], c, nu[at], fl[at], fd[at], pipe_in[at])
        return reynolds_factor(rev, trim_number(c, valve_size[at], reduced[at]), fl[at])

    answer = np.zeros(turbulent.shape)
    slow = np.flatnonzero(~(factor(turbulent, slice(None)) >= 1.0))
    if len(slow):
        target = turbulent[slow]
        answer[slow] = _first_root(lambda c, rows: c * factor(c, slow[rows]) - target[rows], target, STEP)
    return answer


def flow_through(
    coefficient: Any, dp: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, viscosity: Any, fd: Any,
    reduced: Any,
) -> Any:  # fmt: skip
    """Flow of this branch: the largest Q with ``Q = C FR(Q) sqrt(dp/rho)``; infinite where the flow is turbulent."""
    nu = viscosity / density
    turbulent = coefficient * np.sqrt(dp / density)
    n = trim_number(coefficient, valve_size, reduced)

    def lacking(flow: Any, at: Any) -> Any:
        rev = reynolds(flow, coefficient[at], nu[at], fl[at], fd[at], pipe_in[at])
        return turbulent[at] * reynolds_factor(rev, n[at], fl[at]) - flow

    answer = np.full(turbulent.shape, np.inf)
    slow = np.flatnonzero(~(lacking(turbulent, slice(None)) >= 0.0))
    if len(slow):
        answer[slow] = _first_root(lambda flow, rows: lacking(flow, slow[rows]), turbulent[slow], 1.0 / STEP)
    return answer


def drop_for(
    flow: Any, coefficient: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, viscosity: Any, fd: Any,
    reduced: Any,
) -> Any:  # fmt: skip
    """Drop of this branch, explicit since flow and coefficient fix Rev: ``dp = rho (Q/(C FR))^2``.

    0 where the flow is turbulent, NaN where FR is not positive.
    """
    rev = reynolds(flow, coefficient, viscosity / density, fl, fd, pipe_in)
    factor = reynolds_factor(rev, trim_number(coefficient, valve_size, reduced), fl)
    velocity = flow / (coefficient * np.where(factor > 0.0, factor, np.nan))
    return np.where(factor >= 1.0, 0.0, density * velocity * velocity)


def rows_with(viscosity: Any) -> Any:
    """Which rows give a viscosity; None where none does."""
    return None if viscosity is None else np.flatnonzero(~np.isnan(viscosity))


def picked(rows: Any, trim: Any, *arrays: Floats) -> list[Any]:
    """The arguments of the chosen rows, with the trim class as a last mask."""
    reduced = np.broadcast_to(np.asarray(trim == "reduced"), len(arrays[0]))
    return [x[rows] for x in arrays] + [reduced[rows]]


def not_turbulent(flow: Any, coefficient: Any, density: Any, fl: Any, pipe_in: Any, viscosity: Any, fd: Any) -> Any:
    """Where a viscosity is given and Rev is below 10 000."""
    if viscosity is None or fd is None or pipe_in is None:
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
