"""Restriction orifices: loss, drop, flow, bore, recovery and limits of a plate in a pipe."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics.indices import from_upstream
from lowpoint.physics.plate_cautions import (
    ALL_OPEN,
    LARGEST_DROP,
    NOT_WHOLE,
    PLATE_CAUTIONS,
    PRESSURE_CAUTIONS,
    SLOW_TEXT,
    STEEP_TEXT,
    fraction,
    is_long,
    may_reattach,
    of_result,
    slow,
)
from lowpoint.physics.plate_loss import (
    LEAST_REYNOLDS,
    TURBULENT,
    Loss,
    discharge_coefficient,
    in_iso,
    losses,
    open_share,
    share_of,
    thick_factor,
)
from lowpoint.physics.roots import bracketed_root
from lowpoint.physics.sizing import BOILS, CRITICAL, OUTLET, critical_pressure_factor

__all__ = ["orifice_bore", "orifice_drop", "orifice_flow", "orifice_limit", "orifice_loss", "orifice_recovery"]

REFERENCE_PIPE = 0.1
"""m, the pipe up to which the published limits hold as they stand."""
NARROWEST, WIDEST = 1e-3, math.sqrt(0.998)
"""Root of the open share between which a bore is looked for."""
DROPS = ("net", "corner", "flange", "radius")
"""What the words of ``taps`` ask for."""
NEAR = 0.03
"""How far the logarithm of the first guess of a bore may lie off, most often."""

PLATE_BASIS = (
    "ISO 5167-2 (thin, one hole, inside its range), else Idelchik; pipe Reynolds number 1e6 where none is given; a "
    "restriction plate is not a flow meter: expect 10 % of the drop, 20 % of the choked flow against test"
)


def _area(diameter: Any) -> Any:
    return 0.25 * math.pi * diameter * diameter


def _reynolds(flow: Any, pipe: Any, density: Any, viscosity: Any) -> Any:
    """Pipe Reynolds number, ``4 Q rho/(pi D mu)``; the usual turbulent one where no viscosity is given."""
    if viscosity is None:
        return None
    return np.nan_to_num(4.0 * flow * density / (math.pi * pipe * viscosity), nan=TURBULENT)


def _is_slow(flow: Any, bore: Any, pipe: Any, density: Any, viscosity: Any) -> Any:
    return slow(_reynolds(flow, pipe, density, viscosity), bore, pipe)


@function(
    "ORIFICE_LOSS", group="orifices", gives="loss coefficient K of a plate, on the velocity in the pipe, net drop",
    source_key="ISO 5167-2",
    equation="(sqrt(1 - b^4 (1-C^2))/(C b^2) - 1)^2, C of Reader-Harris/Gallagher; Idelchik outside the range; thick "
    "K = K_thin Kt(t/d)/Kt(0)",
    no_answer=(ALL_OPEN, NOT_WHOLE), cautions=(*PLATE_CAUTIONS, Caution(SLOW_TEXT, slow)),
    basis="published", basis_text=PLATE_BASIS,
)  # fmt: skip
def orifice_loss(
    bore: q.OrificeBore, pipe: q.Pipe, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
    reynolds: q.Reynolds = None,  # type: ignore[assignment]
) -> q.Ratio:  # fmt: skip
    """Loss coefficient, ``K = (sqrt(1 - b^4 (1-C^2))/(C b^2) - 1)^2`` for a thin sharp plate inside ISO 5167-2.

    Arrays of one length, SI; see :mod:`lowpoint.physics.plate_loss` for plates outside it, thick ones and several
    holes. Reynolds number of the pipe, 1e6 where omitted. NaN where nothing is closed.
    Source: ISO 5167-2:2003; Idelchik, diagrams 4-14 and 4-15.
    """
    return np.where(fraction(holes), np.nan, losses(bore, pipe, bore_length, holes, reynolds).k)


def _tap_drop(flow: Any, bore: Any, pipe: Any, density: Any, reynolds: Any, taps: str) -> Any:
    """``rho/2 (Q/(C A))^2 (1 - b^4)``: what an instrument between the taps shows."""
    beta = bore / pipe
    at = np.maximum(TURBULENT if reynolds is None else reynolds, LEAST_REYNOLDS)
    velocity = flow / (discharge_coefficient(beta, pipe, at, taps) * _area(bore))
    return 0.5 * density * velocity * velocity * (1.0 - beta**4)


def _no_tap_drop(bore: Any, pipe: Any, bore_length: Any, holes: Any, taps: Any) -> Any:
    long = False if bore_length is None else bore_length > 0.02 * pipe * (1.0 + 1e-9)
    return (np.asarray(taps) != "net") & (long | ~in_iso(bore, pipe, holes))


@function(
    "ORIFICE_DROP", group="orifices", gives="pressure drop of a plate, net (permanent) or between taps",
    source_key="ISO 5167-2", equation="net K rho v^2/2, v in the pipe; between taps rho/2 (Q/(C A))^2 (1-b^4)",
    no_answer=(ALL_OPEN, NOT_WHOLE,
               NoAnswer("a drop between taps is defined for one sharp hole inside ISO 5167-2 only (bore over pipe 0.1 "
                        "to 0.75, pipe from 50 mm, bore_length up to 0.02 pipe); ask for the net drop", _no_tap_drop)),
    cautions=(*PLATE_CAUTIONS, Caution(SLOW_TEXT, _is_slow),
              Caution(f"{STEEP_TEXT}, and check whether the flow chokes first (LP_ORIFICE_FLOW)",
                      lambda result: result > LARGEST_DROP)),
    basis="published", basis_text=PLATE_BASIS,
)  # fmt: skip
def orifice_drop(
    flow: q.Flow, bore: q.OrificeBore, pipe: q.Pipe, density: q.Density,
    viscosity: q.Viscosity = None, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
    taps: q.Taps = "net",
) -> q.Drop:  # fmt: skip
    """Drop of a plate, net ``dp = K rho v^2/2``, or the larger one between corner, flange or radius taps.

    Arrays of one length, SI; without viscosity a pipe Reynolds number of 1e6. Not limited by choking: see
    :func:`orifice_flow`. NaN where nothing is closed, or for taps that the plate cannot have.
    Source: ISO 5167-2:2003; Idelchik.
    """
    reynolds = _reynolds(flow, pipe, density, viscosity)

    def between(kind: str) -> Any:
        if kind != "net":
            return _tap_drop(flow, bore, pipe, density, reynolds, kind)
        velocity = flow / _area(pipe)
        return 0.5 * density * velocity * velocity * orifice_loss(bore, pipe, bore_length, holes, reynolds)

    if isinstance(taps, str):
        drop = between(taps)
        if taps == "net":
            return drop
    else:
        drop = np.select([taps == kind for kind in DROPS], [between(kind) for kind in DROPS], np.nan)
    return np.where(_no_tap_drop(bore, pipe, bore_length, holes, taps), np.nan, drop)


def _heads(p1: Any, p2: Any, pv: Any, pc: Any) -> tuple[Any, Any]:
    """``(p1 - p2, p1 - FF pv)``: what drives the flow free and choked."""
    return p1 - p2, p1 - critical_pressure_factor(pv, pc) * pv


def _driving(dp: Any, head: Any, loss: Loss) -> Any:
    """Dynamic pressure in the pipe, ``min(dp/K, head/fall)``: the flow is free, or chokes at its lowest pressure."""
    return np.minimum(dp / loss.k, head / loss.fall)


def _chokes(
    flow: Any, bore: Any, p1: Any, p2: Any, pipe: Any, density: Any, pv: Any, pc: Any, viscosity: Any,
    bore_length: Any, holes: Any,
) -> Any:  # fmt: skip
    loss = losses(bore, pipe, bore_length, holes, _reynolds(flow, pipe, density, viscosity))
    dp, head = _heads(p1, p2, pv, pc)
    return dp >= loss.recovery2 * head * (1.0 - 1e-12)


def _picked(rows: Any, *columns: Any) -> list[Any]:
    return [None if column is None else column[rows] for column in columns]


@function(
    "ORIFICE_FLOW", group="orifices", gives="flow through a plate, choked or not", source_key="ISO 5167-2",
    equation="A_pipe sqrt(2 min(p1-p2, FL^2 (p1 - FF pv))/(rho K))", must=(OUTLET, BOILS, CRITICAL),
    no_answer=(ALL_OPEN, NOT_WHOLE),
    cautions=(
        Caution("the flow is choked: a lower outlet pressure gives no more flow",
                lambda result, bore, p1, p2, pipe, density, pv, pc, viscosity, bore_length, holes: _chokes(
                    result, bore, p1, p2, pipe, density, pv, pc, viscosity, bore_length, holes)),
        *PRESSURE_CAUTIONS, *PLATE_CAUTIONS, of_result(Caution(SLOW_TEXT, _is_slow), "flow"),
    ),
    basis="published", basis_text=PLATE_BASIS,
)  # fmt: skip
def orifice_flow(
    p1: q.P1, p2: q.P2, bore: q.OrificeBore, pipe: q.Pipe, density: q.Density, pv: q.PV, pc: q.PC,
    viscosity: q.Viscosity = None, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
) -> q.Flow:  # fmt: skip
    """Flow through a plate, ``Q = A_pipe sqrt(2 min(dp, dp_choked)/(rho K))`` with ``dp_choked = FL^2 (p1 - FF pv)``.

    Arrays of one length, SI; p1 and p2 before the plate and after recovery. With viscosity K follows the Reynolds
    number of the answer, to 1e-13. NaN where nothing is closed.
    Source: ISO 5167-2:2003; Idelchik; choking at the vena contracta derived, FF by IEC 60534-2-1.
    """
    dp, head = _heads(p1, p2, pv, pc)
    driving = _driving(dp, head, losses(bore, pipe, bore_length, holes, None))
    flow = np.where(fraction(holes), np.nan, _area(pipe) * np.sqrt(2.0 * driving / density))
    if viscosity is None:
        return flow
    rows = np.flatnonzero(~np.isnan(viscosity) & np.isfinite(flow))
    for _ in range(40):  # each step leaves a few hundredths of the last one's error
        if not len(rows):
            break
        a, b, d, w, rho, mu, length, n = _picked(rows, dp, head, bore, pipe, density, viscosity, bore_length, holes)
        driving = _driving(a, b, losses(d, w, length, n, _reynolds(flow[rows], w, rho, mu)))
        last, flow[rows] = flow[rows], _area(w) * np.sqrt(2.0 * driving / rho)
        rows = rows[np.abs(flow[rows] - last) > 1e-14 * last]
    return flow


def _number(flow: Any, holes: Any) -> Any:
    return np.ones(len(flow)) if holes is None else np.where(np.isnan(holes), 1.0, holes)


def _too_small_a_pipe(
    flow: Any, p1: Any, p2: Any, pipe: Any, density: Any, pv: Any, pc: Any, viscosity: Any, bore_length: Any,
    holes: Any,
) -> Any:  # fmt: skip
    bore = WIDEST * pipe / np.sqrt(_number(flow, holes))
    loss = losses(bore, pipe, bore_length, holes, _reynolds(flow, pipe, density, viscosity))
    return _area(pipe) * np.sqrt(2.0 * _driving(*_heads(p1, p2, pv, pc), loss) / density) < flow


def _guess(free: Any, choked: Any, pipe: Any, bore_length: Any, number: Any) -> Any:
    """Root of the open share that should give these heads of pipe velocity, ``K = free`` or ``fall = choked``."""
    share = share_of(np.minimum(free + 2.0 * np.sqrt(free), choked))
    if bore_length is None:
        return np.sqrt(share)
    thin = free / thick_factor(share, np.nan_to_num(bore_length / pipe * np.sqrt(number / share)))
    return np.sqrt(share_of(np.minimum(thin + 2.0 * np.sqrt(thin), choked)))


@function(
    "ORIFICE_BORE", group="orifices", gives="bore of a plate for a flow and a net drop", source_key="ISO 5167-2",
    equation="the bore with Q(bore) = flow, Q of LP_ORIFICE_FLOW", must=(OUTLET, BOILS, CRITICAL),
    no_answer=(NOT_WHOLE,
               NoAnswer("no plate passes this flow at this drop, not even one with hardly anything closed; choose a "
                        "larger pipe, or a smaller flow", _too_small_a_pipe),
               NoAnswer("the bore would be below a thousandth of the pipe; choose a smaller pipe, or several stages")),
    cautions=(
        Caution("the flow is choked: the bore is sized on the choked drop, and the outlet pressure does not rule the "
                "flow", lambda result, flow, p1, p2, pipe, density, pv, pc, viscosity, bore_length, holes: _chokes(
                    flow, result, p1, p2, pipe, density, pv, pc, viscosity, bore_length, holes)),
        *PRESSURE_CAUTIONS, *map(of_result, (*PLATE_CAUTIONS, Caution(SLOW_TEXT, _is_slow))),
    ),
    basis="published", basis_text=PLATE_BASIS,
)  # fmt: skip
def orifice_bore(
    flow: q.Flow, p1: q.P1, p2: q.P2, pipe: q.Pipe, density: q.Density, pv: q.PV, pc: q.PC,
    viscosity: q.Viscosity = None, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
) -> q.OrificeBore:  # fmt: skip
    """Bore (of each hole) whose flow at these pressures is the one wanted, choked or not; to the last bits.

    Arrays of one length, SI; a root search between a millionth and all but 0.2 % of the pipe's area, NaN outside.
    Source: ISO 5167-2:2003; Idelchik; as for :func:`orifice_flow`.
    """
    dynamic = 0.5 * density * (flow / _area(pipe)) ** 2
    free, choked = (head / dynamic for head in _heads(p1, p2, pv, pc))
    number = _number(flow, holes)
    each = pipe / np.sqrt(number)
    columns = (free, choked, each, pipe, bore_length, holes, _reynolds(flow, pipe, density, viscosity))

    def excess(log_share: Any, rows: Any) -> Any:
        a, b, one, w, length, n, re = columns if len(rows) == len(flow) else _picked(rows, *columns)
        return np.log(_driving(a, b, losses(one * np.exp(log_share), w, length, n, re)))

    low, high = (np.full(len(flow), math.log(end)) for end in (NARROWEST, WIDEST))
    guess = np.log(_guess(free, choked, pipe, bore_length, number))
    root = bracketed_root(excess, low, high, guess, NEAR)
    return np.where(fraction(holes), np.nan, each * np.exp(root))


@function(
    "ORIFICE_FL", group="orifices", gives="liquid pressure recovery factor of a plate", source_key="vena contracta",
    equation="sqrt(K/(1/s0^2 - 1)), s0 = 1/(1 + sqrt(K_thin))",
    no_answer=(ALL_OPEN, NOT_WHOLE), cautions=PLATE_CAUTIONS, basis="estimated",
    basis_text="derived from the loss and the momentum after the vena contracta; expect 20 % of the choked flow",
)  # fmt: skip
def orifice_recovery(
    bore: q.OrificeBore, pipe: q.Pipe, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
) -> q.Ratio:  # fmt: skip
    """Recovery factor, ``FL^2 = K/(1/s0^2 - 1)``; for a thin plate the loss ratio of ISO 5167-2.

    Arrays of one length, SI, at a pipe Reynolds number of 1e6. A thick plate has the thin one's vena contracta, so it
    recovers more and chokes at a smaller drop. NaN where nothing is closed.
    Source: derived from Bernoulli to the vena contracta and momentum after it.
    """
    loss = losses(bore, pipe, bore_length, holes, None)
    return np.where(fraction(holes), np.nan, np.sqrt(loss.recovery2))


def _fit(loss: Loss, pipe: Any) -> tuple[Any, Any]:
    """Incipient and constant index of a plate, downstream form, with the effect of size.

    The fit is for thin plates with b up to 0.6. Where it falls below the index at choking (thick plates, or b near 1)
    that index takes its place: no flow chokes before it cavitates.
    """
    b, s0 = np.sqrt(loss.open_share), loss.throat_share
    incipient = np.maximum(1.2, 4.5 * b + 0.5)
    constant = np.maximum(3.3 * b, 2.0 / np.sqrt(loss.k_thin) + 0.9 / (1.0 - s0) ** 2)
    size = np.maximum(pipe / REFERENCE_PIPE, 1.0) ** (0.3 * loss.k_thin**-0.25)
    choking = 1.0 / loss.recovery2 - 1.0
    return np.maximum(incipient * size, choking), np.maximum(np.minimum(constant, incipient) * size, choking)


def _choked_limit(loss: Loss, p1: Any, pv: Any, pc: Any) -> Any:
    """``(p1-pv)/(FL^2 (p1 - FF pv))``, cold liquid (1/FL^2) where no pressures are given."""
    cold = 1.0 / loss.recovery2
    if p1 is None:
        return cold
    exact = cold * (p1 - pv) / (p1 - critical_pressure_factor(pv, pc) * pv)
    return np.where(np.isnan(p1), cold, exact)


_SPREAD = (
    "sources disagree: incipient about 1.0 to 1.2 for bore over pipe 0.1 to 0.33 in a 100 mm pipe (form not stated), "
    "about 0.93 downstream form elsewhere (from memory); the form of the fit used is assumed downstream"
)


def _fitted(limit: Any) -> Any:
    return np.asarray(np.asarray(limit) != "choked")


@function(
    "ORIFICE_LIMIT", group="orifices", gives="limit of the index of a plate", source_key="Kuroda 1978",
    equation="downstream form: incipient max(1.2, 4.5 b + 0.5), constant max(3.3 b, 2/sqrt(K) + 0.9/(1-s0)^2), both "
    "times (D/0.1 m)^(0.3 K^-0.25) above 0.1 m; choked (p1-pv)/(FL^2 (p1 - FF pv))",
    needs={"p1": ("pv", "pc"), "pv": ("p1", "pc"), "pc": ("p1", "pv")}, must=(BOILS, CRITICAL),
    no_answer=(ALL_OPEN, NOT_WHOLE),
    cautions=(
        Caution(_SPREAD, _fitted),
        Caution("the fit holds for bore over pipe 0.2 to 0.6; its end rule was continued",
                lambda bore, pipe, holes, limit: _fitted(limit) & (
                    (open_share(bore, pipe, holes) < 0.04 * (1.0 - 1e-9))
                    | (open_share(bore, pipe, holes) > 0.36 * (1.0 + 1e-9)))),
        Caution("the fit is for thin plates; with a long bore cavitation begins at a higher index, most at 0.5 to 1 "
                "diameters: an estimate", lambda bore, bore_length, limit: _fitted(limit) & (
                    is_long(bore, bore_length) | may_reattach(bore, bore_length))),
        Caution("the fit is for one hole", lambda holes, limit: _fitted(limit) & (
            False if holes is None else holes > 1.0)),
        Caution("without p1, pv and pc the choked index is that of a cold liquid",
                lambda limit, p1: ~_fitted(limit) & (True if p1 is None else np.isnan(p1))),
        *PLATE_CAUTIONS,
    ),
    basis="published",
    basis_text="published, form assumed: Kuroda, Fukuda and Cho 1978 for thin plates; choked derived",
)  # fmt: skip
def orifice_limit(
    limit: q.LimitKind, bore: q.OrificeBore, pipe: q.Pipe,
    bore_length: q.BoreLength = None, holes: q.Holes = None, p1: q.P1 = None, pv: q.PV = None,  # type: ignore[assignment]
    pc: q.PC = None, form: q.Form = "upstream",  # type: ignore[assignment]
) -> q.Ratio:  # fmt: skip
    """Incipient, constant or choked index of a plate; in downstream form incipient is ``max(1.2, 4.5 b + 0.5)``.

    Arrays of one length, SI, in the form named. Incipient and constant grow with pipes above 0.1 m, not with pressure,
    and are never below the index at choking, which never scales. NaN where nothing is closed.
    Source: Kuroda et al. (1978), read in its abstract, form assumed; size exponent from memory; choked derived.
    """
    loss = losses(bore, pipe, bore_length, holes, None)
    incipient, constant = _fit(loss, pipe)
    choked = _choked_limit(loss, p1, pv, pc)
    value = np.where(limit == "incipient", incipient + 1.0, np.where(limit == "constant", constant + 1.0, choked))
    return np.where(fraction(holes), np.nan, from_upstream(value, form))
