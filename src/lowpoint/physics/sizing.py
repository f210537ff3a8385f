"""Turbulent liquid sizing: choking, required coefficient, flow and drop, in closed form with fittings.

With ``A = Q^2 rho/dp`` and ``B = Q^2 rho/(p1 - FF pv)`` (Av in m2, so no N1 stands here) and the losses of the
fittings ``S = sumK/(N2 d^4)``, ``S1 = (K1+KB1)/(N2 d^4)`` the standard's implicit equations become::

    C_free = sqrt(A/(1 - A S))      C_choked = (1/FL) sqrt(B/(1 - B S1))      C = max(C_free, C_choked)

A denominator that is not positive means that no valve of that size passes the flow. The non-turbulent branch of
:mod:`lowpoint.physics.nonturbulent` enters only for rows that give a viscosity.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, Must, NoAnswer, SameAs, function
from lowpoint.physics import fittings, nonturbulent
from lowpoint.physics.fittings import fitting_losses, geometry_factor2

__all__ = ["choked_drop", "critical_pressure_ratio", "drop_for_flow", "flow_through", "required_coefficient"]

NEEDS = {
    "pipe_in": ("valve_size",), "pipe_out": ("valve_size",), "viscosity": ("valve_size", "fd", "trim"),
}  # fmt: skip
OUTLET = Must("p2", "p1", "The outlet pressure must be the lower one: check that the two are not swapped.")
BOILS = Must(
    "pv", "p1",
    "The liquid would boil before the valve: check temperature and inlet pressure, and gauge against absolute.",
)  # fmt: skip
CRITICAL = Must("pv", "pc", "A vapour pressure lies below the critical pressure: check that the two are not swapped.")


def critical_pressure_factor(pv: Any, pc: Any) -> Any:
    """``FF = 0.96 - 0.28 sqrt(pv/pc)``."""
    return 0.96 - 0.28 * np.sqrt(pv / pc)


@function(
    "FF", group="valves", gives="liquid critical pressure ratio factor", source_key="IEC 60534-2-1",
    equation="0.96 - 0.28 sqrt(pv/pc)", any_unit=True, must=(CRITICAL,),
)  # fmt: skip
def critical_pressure_ratio(pv: q.PV, pc: q.PC) -> q.Ratio:
    """Liquid critical pressure ratio factor, ``FF = 0.96 - 0.28 sqrt(pv/pc)``.

    Arrays of one length, any one pressure unit. From 0.96 for a cold liquid to 0.68 at the critical point.
    Source: IEC 60534-2-1.
    """
    return critical_pressure_factor(pv, pc)


def choked_drop_of(head: Any, fl: Any, coefficient: Any, total: Any, inlet: Any) -> Any:
    """``(FLP/FP)^2 head`` with ``head = p1 - FF pv``; without a coefficient ``FL^2 head``."""
    fl2 = fl * fl
    if coefficient is None:
        return fl2 * head
    c2 = coefficient * coefficient
    with_fittings = fl2 * (1.0 + total * c2) / (1.0 + fl2 * inlet * c2) * head
    drop = np.where(np.isnan(coefficient), fl2 * head, with_fittings)
    return np.where(drop > 0.0, drop, np.nan)


@function(
    "CHOKED_DROP", group="valves", gives="pressure drop at which the flow chokes, fittings included",
    source_key="IEC 60534-2-1", equation="(FLP/FP)^2 (p1 - FF pv); FL^2 (p1 - FF pv) without fittings",
    needs={"coefficient": ("valve_size",), "valve_size": ("coefficient",), "pipe_in": ("valve_size",),
           "pipe_out": ("valve_size",)},
    must=(BOILS, CRITICAL), no_answer=(fittings.TOO_LARGE, fittings.GAIN),
    cautions=(fittings.LINE_SIZE, fittings.LARGE_CAPACITY),
)  # fmt: skip
def choked_drop(
    p1: q.P1, pv: q.PV, pc: q.PC, fl: q.FL, coefficient: q.Coefficient = None, valve_size: q.ValveSize = None,  # type: ignore[assignment]
    pipe_in: q.PipeIn = SameAs("valve_size"), pipe_out: q.PipeOut = SameAs("pipe_in"),  # type: ignore[assignment]
) -> q.Drop:  # fmt: skip
    """Choked drop, ``dp_choked = (FLP/FP)^2 (p1 - FF pv)``.

    Arrays of one length, SI. Without coefficient and valve size the bare valve's ``FL^2 (p1 - FF pv)``.
    NaN where d is above 1.1 D or 1 + sumK c is not positive.
    Source: IEC 60534-2-1.
    """
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    return choked_drop_of(p1 - critical_pressure_factor(pv, pc) * pv, fl, coefficient, total, inlet)


def _for_both(a: Any, b: Any, fl: Any, total: Any, inlet: Any) -> Any:
    """``max(sqrt(a/(1 - a total)), sqrt(b/(1 - b inlet))/fl)``, NaN where the fittings alone take the whole drop."""
    if isinstance(total, float):  # no fittings at all
        return np.maximum(np.sqrt(a), np.sqrt(b) / fl)
    rest, rest_choked = 1.0 - a * total, 1.0 - b * inlet
    passes = np.minimum(rest, rest_choked) > 0.0
    if not passes.all():
        rest, rest_choked = np.where(passes, rest, np.nan), np.where(passes, rest_choked, np.nan)
    return np.maximum(np.sqrt(a / rest), np.sqrt(b / rest_choked) / fl)


def no_valve_passes(
    flow: Any, p1: Any, p2: Any, pv: Any, pc: Any, density: Any, valve_size: Any, pipe_in: Any, pipe_out: Any
) -> Any:
    """Where the fittings alone take the whole drop, or choke the flow, whatever the valve."""
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    energy = flow * flow * density
    head = p1 - critical_pressure_factor(pv, pc) * pv
    return (energy / (p1 - p2) * total >= 1.0) | (energy / head * inlet >= 1.0)


def _gain_too_large(
    flow: Any, p1: Any, p2: Any, pv: Any, pc: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, pipe_out: Any
) -> Any:
    """Where the valve that would pass the flow regains more in its expander than all losses are."""
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    energy = flow * flow * density
    c = _for_both(energy / (p1 - p2), energy / (p1 - critical_pressure_factor(pv, pc) * pv), fl, total, inlet)
    return 1.0 + total * c * c <= 0.0


def _sized_choked(
    result: Any, p1: Any, p2: Any, pv: Any, pc: Any, fl: Any, valve_size: Any, pipe_in: Any, pipe_out: Any
) -> Any:
    """Where the required coefficient is that of the choked drop."""
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    head = p1 - critical_pressure_factor(pv, pc) * pv
    coefficient = None if valve_size is None else np.where(np.isnan(valve_size), np.nan, result)
    return p1 - p2 >= choked_drop_of(head, fl, coefficient, total, inlet) * (1.0 - 1e-12)


FLASHES = Caution("p2 is at or below pv: the liquid flashes", lambda p2, pv: p2 <= pv)
SIZED_CHOKED = Caution(
    "the flow is choked: the valve is sized on the choked drop, and the outlet pressure does not rule the flow",
    _sized_choked,
)


@function(
    "COEFFICIENT", group="valves", gives="required flow coefficient", source_key="closed form",
    equation="max(C_free, C_choked), C_free = sqrt(A/(1 - A S)), C_choked = sqrt(B/(1 - B S1))/FL; with viscosity "
    "max with the root of C FR(C) = Q sqrt(rho/dp)/N1",
    needs=NEEDS, must=(OUTLET, BOILS, CRITICAL),
    no_answer=(
        fittings.TOO_LARGE,
        NoAnswer("no valve of this size passes the flow: the fittings alone take the whole drop; choose a larger "
                 "valve_size", no_valve_passes),
        NoAnswer(fittings.GAIN.text, _gain_too_large),
        nonturbulent.NO_ROOT,
    ),
    cautions=(FLASHES, SIZED_CHOKED, fittings.LINE_SIZE, fittings.LARGE_RESULT, nonturbulent.SLOW),
)  # fmt: skip
def required_coefficient(
    flow: q.Flow, p1: q.P1, p2: q.P2, pv: q.PV, pc: q.PC, density: q.Density, fl: q.FL,
    valve_size: q.ValveSize = None, pipe_in: q.PipeIn = SameAs("valve_size"),  # type: ignore[assignment]
    pipe_out: q.PipeOut = SameAs("pipe_in"), viscosity: q.Viscosity = None, fd: q.Fd = None,  # type: ignore[assignment]
    trim: q.Trim = None,
) -> q.Coefficient:  # fmt: skip
    """Required flow coefficient, ``C = max(C_free, C_choked)`` and, with viscosity, the non-turbulent C.

    Arrays of one length, SI; the closed form of this module, exact for the standard's implicit equations.
    NaN where no valve of that size passes the flow, or d is above 1.1 D.
    Source: derived from IEC 60534-2-1; non-turbulent branch by its FR equations on the actual drop.
    """
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    energy = flow * flow * density
    dp = p1 - p2
    head = p1 - critical_pressure_factor(pv, pc) * pv
    c = _for_both(energy / dp, energy / head, fl, total, inlet)
    if not isinstance(total, float) and (total < 0.0).any():
        # Only an expander larger than its reducer gives back more than it takes.
        c = np.where(1.0 + total * c * c > 0.0, c, np.nan)
    rows = nonturbulent.rows_with(viscosity)
    if rows is not None:
        slow = nonturbulent.picked(rows, trim, flow, dp, density, fl, valve_size, pipe_in, viscosity, fd)
        c[rows] = np.maximum(c[rows], nonturbulent.coefficient_for(*slow))
    return c


def _turbulent_flow(coefficient: Any, dp: Any, head: Any, density: Any, fl: Any, total: Any, inlet: Any) -> Any:
    """``C min(FP sqrt(dp/rho), FLP sqrt(head/rho))``."""
    c2 = coefficient * coefficient
    fl2 = fl * fl
    free = dp * geometry_factor2(coefficient, total)
    choked = fl2 * head / (1.0 + fl2 * inlet * c2)
    return coefficient * np.sqrt(np.minimum(free, choked) / density)


@function(
    "FLOW", group="valves", gives="flow through a given valve, choked or not", source_key="closed form",
    equation="min(C FP sqrt(dp/rho), C FLP sqrt((p1 - FF pv)/rho)); with viscosity min with C FR sqrt(dp/rho)",
    needs=NEEDS, must=(OUTLET, BOILS, CRITICAL),
    no_answer=(fittings.TOO_LARGE, fittings.GAIN, nonturbulent.NO_ROOT),
    cautions=(
        fittings.LINE_SIZE, fittings.LARGE_CAPACITY, nonturbulent.SLOW_FLOW,
        Caution("the flow is choked: a lower outlet pressure gives no more flow",
                lambda result, coefficient, p1, pv, pc, density, fl, valve_size, pipe_in, pipe_out:
                result * (1.0 + 1e-12)
                >= choked_flow(coefficient, p1, pv, pc, density, fl, valve_size, pipe_in, pipe_out)),
    ),
)  # fmt: skip
def flow_through(
    coefficient: q.Coefficient, p1: q.P1, p2: q.P2, pv: q.PV, pc: q.PC, density: q.Density, fl: q.FL,
    valve_size: q.ValveSize = None, pipe_in: q.PipeIn = SameAs("valve_size"),  # type: ignore[assignment]
    pipe_out: q.PipeOut = SameAs("pipe_in"), viscosity: q.Viscosity = None, fd: q.Fd = None,  # type: ignore[assignment]
    trim: q.Trim = None,
) -> q.Flow:  # fmt: skip
    """Volume flow, ``Q = min(C FP sqrt(dp/rho), C FLP sqrt((p1 - FF pv)/rho))``.

    Arrays of one length, SI (C as Av in m2). With viscosity the smaller of this and the non-turbulent flow.
    NaN where 1 + sumK c is not positive or d is above 1.1 D.
    Source: IEC 60534-2-1.
    """
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    dp = p1 - p2
    head = p1 - critical_pressure_factor(pv, pc) * pv
    flow = _turbulent_flow(coefficient, dp, head, density, fl, total, inlet)
    rows = nonturbulent.rows_with(viscosity)
    if rows is not None:
        slow = nonturbulent.picked(rows, trim, coefficient, dp, density, fl, valve_size, pipe_in, viscosity, fd)
        flow[rows] = np.minimum(flow[rows], nonturbulent.flow_through(*slow))
    return flow


def choked_flow(
    coefficient: Any, p1: Any, pv: Any, pc: Any, density: Any, fl: Any, valve_size: Any, pipe_in: Any, pipe_out: Any
) -> Any:
    """The largest turbulent flow of a valve, ``C FLP sqrt((p1 - FF pv)/rho)``."""
    _, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    head = p1 - critical_pressure_factor(pv, pc) * pv
    return coefficient * fl * np.sqrt(head / (1.0 + fl * fl * inlet * coefficient * coefficient) / density)


@function(
    "DROP", group="valves", gives="pressure drop that a flow needs; no answer past choking", source_key="closed form",
    equation="Q^2 rho (1/C^2 + S); with viscosity max with rho (Q/(C FR))^2",
    needs=NEEDS, must=(BOILS, CRITICAL),
    no_answer=(
        fittings.TOO_LARGE,
        NoAnswer("the flow is more than the valve passes choked; no drop gives it: choose a larger coefficient",
                 lambda flow, coefficient, p1, pv, pc, density, fl, valve_size, pipe_in, pipe_out:
                 flow > choked_flow(coefficient, p1, pv, pc, density, fl, valve_size, pipe_in, pipe_out)),
        fittings.GAIN,
        NoAnswer("the drop that this flow needs is not below the inlet pressure: choose a larger coefficient"),
    ),
    cautions=(fittings.LINE_SIZE, fittings.LARGE_CAPACITY, nonturbulent.SLOW_DROP),
)  # fmt: skip
def drop_for_flow(
    flow: q.Flow, coefficient: q.Coefficient, p1: q.P1, pv: q.PV, pc: q.PC, density: q.Density, fl: q.FL,
    valve_size: q.ValveSize = None, pipe_in: q.PipeIn = SameAs("valve_size"),  # type: ignore[assignment]
    pipe_out: q.PipeOut = SameAs("pipe_in"), viscosity: q.Viscosity = None, fd: q.Fd = None,  # type: ignore[assignment]
    trim: q.Trim = None,
) -> q.Drop:  # fmt: skip
    """Drop for a flow, ``dp = Q^2 rho (1/C^2 + sumK/(N2 d^4))``, over the test sections.

    Arrays of one length, SI (C as Av in m2). With viscosity the larger of this and the non-turbulent drop.
    NaN past choking, where the drop would not be positive, or not below p1.
    Source: IEC 60534-2-1, solved for dp.
    """
    total, inlet = fitting_losses(valve_size, pipe_in, pipe_out)
    head = p1 - critical_pressure_factor(pv, pc) * pv
    energy = flow * flow * density
    dp = energy * (1.0 / (coefficient * coefficient) + total)
    # The flow that a choked valve passes is still a flow at the choked drop: a rounding above it is no crossing.
    within = energy * (1.0 / (fl * coefficient) ** 2 + inlet) <= head * (1.0 + 1e-12)
    rows = nonturbulent.rows_with(viscosity)
    if rows is not None:
        slow = nonturbulent.picked(rows, trim, flow, coefficient, density, fl, valve_size, pipe_in, viscosity, fd)
        dp[rows] = np.maximum(dp[rows], nonturbulent.drop_for(*slow))
    return np.where(within & (dp > 0.0) & (dp < p1), dp, np.nan)


@function(
    "VELOCITY", group="valves", gives="mean velocity in a bore", source_key="definition", equation="Q/(pi/4 bore^2)",
)  # fmt: skip
def velocity(flow: q.Flow, bore: q.Bore) -> q.Speed:
    """Mean velocity, ``v = Q/(pi/4 bore^2)``.

    Arrays of one length, SI.
    Source: definition.
    """
    return flow / (np.pi / 4.0 * bore * bore)


@function(
    "THROAT_PRESSURE", group="valves", gives="pressure in the vena contracta", source_key="IEC 60534-2-1",
    equation="p1 - (p1-p2)/FL^2; with pv and pc not below FF pv", any_unit=True,
    needs={"pv": ("pc",), "pc": ("pv",)}, must=(OUTLET, BOILS, CRITICAL),
    no_answer=(NoAnswer("the throat pressure would be negative: the flow is choked; give pv and pc for the choked "
                        "value"),),
    cautions=(
        Caution("a throat pressure above the vapour pressure is no evidence of no cavitation; only the limits judge",
                lambda result: result > 0.0),
        Caution("the flow is choked: the throat stays at FF pv",
                lambda result, pv, pc: False if pv is None or pc is None
                else result <= critical_pressure_factor(pv, pc) * pv),
    ),
)  # fmt: skip
def throat_pressure(p1: q.P1, p2: q.P2, fl: q.FL, pv: q.PV = None, pc: q.PC = None) -> q.Pressure:  # type: ignore[assignment]
    """Pressure in the vena contracta, ``p_vc = p1 - (p1 - p2)/FL^2``, not below FF pv where pv and pc are given.

    Arrays of one length, any one pressure unit. NaN where it would not be positive and pv and pc are not given.
    Source: the definition of FL in IEC 60534-2-1.
    """
    throat = p1 - (p1 - p2) / (fl * fl)
    if pv is not None and pc is not None:
        floor = critical_pressure_factor(pv, pc) * pv
        throat = np.where(np.isnan(floor), throat, np.maximum(throat, floor))
    return np.where(throat > 0.0, throat, np.nan)
