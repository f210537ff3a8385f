"""Restriction orifices: loss, drop, flow, bore, recovery and limits of a plate in a pipe."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics.indices import from_upstream
from lowpoint.physics.plate_loss import (
    LEAST_REYNOLDS,
    TURBULENT,
    discharge_coefficient,
    iso_weight,
    losses,
    open_share,
    recovery2,
    throat_share,
)
from lowpoint.physics.roots import bracketed_root
from lowpoint.physics.sizing import BOILS, CRITICAL, OUTLET, critical_pressure_factor

__all__ = ["orifice_bore", "orifice_drop", "orifice_flow", "orifice_limit", "orifice_loss", "orifice_recovery"]

REFERENCE_PIPE = 0.1
"""m, the pipe up to which the published limits hold as they stand."""
PLUGGING = 0.003
"""m, bores below it are easily plugged (common practice)."""


# --- cautions and reasons that several functions share -----------------------------------------------------------
def _open(bore: Any, pipe: Any, holes: Any) -> Any:
    return open_share(bore, pipe, holes) >= 1.0


def _fraction(holes: Any) -> Any:
    return False if holes is None else (holes != np.floor(holes)) & ~np.isnan(holes)


def _outside_iso(bore: Any, pipe: Any, holes: Any) -> Any:
    return iso_weight(bore, pipe, holes) < 1.0


def _reattaching(bore: Any, bore_length: Any) -> Any:
    return False if bore_length is None else (bore_length / bore > 0.1) & (bore_length / bore < 0.8)


def _thick(bore: Any, bore_length: Any) -> Any:
    return False if bore_length is None else bore_length / bore >= 0.8


ALL_OPEN = NoAnswer("the bore (all holes together) must be smaller than the pipe", _open)
NOT_WHOLE = NoAnswer("holes must be a whole number", _fraction)
BY_IDELCHIK = Caution(
    "the plate is outside ISO 5167-2 (one hole, bore over pipe 0.1 to 0.75, pipe from 50 mm): Idelchik's loss was used, "
    "near the ends of the range a mean of both", _outside_iso,
)  # fmt: skip
REATTACHING = Caution(
    "the bore is 0.1 to 0.8 diameters long: the jet may attach to the wall or not, and K is uncertain by 20 % and more",
    _reattaching,
)
THICK = Caution(
    "the bore is long: K is lower and the flow chokes earlier than with a thin plate (Idelchik, in part from memory)",
    _thick,
)
SMALL = Caution("the bore is below 3 mm and easily plugged (common practice)", lambda bore: bore < PLUGGING)
SMALL_BORE = Caution(SMALL.text, lambda result: result < PLUGGING)
PLATE_CAUTIONS = (BY_IDELCHIK, REATTACHING, THICK, SMALL)
PLATE_BASIS = (
    "ISO 5167-2 (thin, one hole, inside its range), else Idelchik; a restriction plate is not a flow meter: expect "
    "10 % of the drop, 20 % of the choked flow against test"
)


def _area(diameter: Any) -> Any:
    return 0.25 * math.pi * diameter * diameter


def _reynolds(flow: Any, pipe: Any, density: Any, viscosity: Any) -> Any:
    """Pipe Reynolds number, ``4 Q rho/(pi D mu)``; the usual turbulent one where no viscosity is given."""
    if viscosity is None:
        return None
    return np.nan_to_num(4.0 * flow * density / (math.pi * pipe * viscosity), nan=TURBULENT)


@function(
    "ORIFICE_LOSS", group="orifices", gives="loss coefficient K of a plate, on the velocity in the pipe, net drop",
    source_key="ISO 5167-2",
    equation="(sqrt(1 - b^4 (1-C^2))/(C b^2) - 1)^2, C of Reader-Harris/Gallagher; Idelchik outside the range; thick "
    "K = K_thin Kt(t/d)/Kt(0)",
    no_answer=(ALL_OPEN, NOT_WHOLE), cautions=PLATE_CAUTIONS, basis="published", basis_text=PLATE_BASIS,
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
    whole = holes is None or ~_fraction(holes)
    return np.where(whole, losses(bore, pipe, bore_length, holes, reynolds)[0], np.nan)


def _tap_drop(flow: Any, bore: Any, pipe: Any, density: Any, reynolds: Any, taps: str) -> Any:
    """``rho/2 (Q/(C A))^2 (1 - b^4)``: what an instrument between the taps shows."""
    beta = bore / pipe
    at = np.maximum(TURBULENT if reynolds is None else reynolds, LEAST_REYNOLDS)
    velocity = flow / (discharge_coefficient(beta, pipe, at, taps) * _area(bore))
    return 0.5 * density * velocity * velocity * (1.0 - beta**4)


def _no_tap_drop(bore: Any, pipe: Any, bore_length: Any, holes: Any, taps: Any) -> Any:
    several = False if holes is None else holes > 1.0
    long = False if bore_length is None else bore_length > 0.02 * pipe * (1.0 + 1e-9)
    return (np.asarray(taps) != "net") & (several | long | (iso_weight(bore, pipe, None) < 1.0))


@function(
    "ORIFICE_DROP", group="orifices", gives="pressure drop of a plate, net (permanent) or between taps",
    source_key="ISO 5167-2", equation="net K rho v^2/2, v in the pipe; between taps rho/2 (Q/(C A))^2 (1-b^4)",
    no_answer=(ALL_OPEN, NOT_WHOLE,
               NoAnswer("a drop between taps is defined for one sharp hole inside ISO 5167-2 only (bore over pipe 0.1 to "
                        "0.75, pipe from 50 mm, bore_length up to 0.02 pipe); ask for the net drop", _no_tap_drop)),
    cautions=(*PLATE_CAUTIONS,
              Caution("the drop is above 2.5 bar, outside ISO 5167-2; check too whether the flow chokes "
                      "(LP_ORIFICE_FLOW)", lambda result: result > 2.5e5),
              Caution("the pipe Reynolds number is below 5000, where ISO 5167-2 ends",
                      lambda flow, pipe, density, viscosity:
                      False if viscosity is None else _reynolds(flow, pipe, density, viscosity) < LEAST_REYNOLDS)),
    basis="published", basis_text=PLATE_BASIS,
)  # fmt: skip
def orifice_drop(
    flow: q.Flow, bore: q.OrificeBore, pipe: q.Pipe, density: q.Density, viscosity: q.Viscosity = None,  # type: ignore[assignment]
    bore_length: q.BoreLength = None, holes: q.Holes = None, taps: q.Taps = "net",  # type: ignore[assignment]
) -> q.Drop:  # fmt: skip
    """Drop of a plate, net ``dp = K rho v^2/2``, or the larger one between corner, flange or radius taps.

    Arrays of one length, SI; without viscosity a pipe Reynolds number of 1e6. Not limited by choking: see
    :func:`orifice_flow`. NaN where nothing is closed, or for taps that the plate cannot have.
    Source: ISO 5167-2:2003; Idelchik.
    """
    reynolds = _reynolds(flow, pipe, density, viscosity)
    velocity = flow / _area(pipe)
    net = 0.5 * density * velocity * velocity * orifice_loss(bore, pipe, bore_length, holes, reynolds)
    if isinstance(taps, str) and taps == "net":
        return net
    drop = net
    for kind in ("corner", "flange", "radius"):
        drop = np.where(taps == kind, _tap_drop(flow, bore, pipe, density, reynolds, kind), drop)
    return np.where(_no_tap_drop(bore, pipe, bore_length, holes, taps) | np.isnan(net), np.nan, drop)


def _flow_of(
    dp: Any, head: Any, bore: Any, pipe: Any, density: Any, bore_length: Any, holes: Any, reynolds: Any
) -> Any:
    """``A_pipe sqrt(2 min(dp, dp_choked)/(rho K))`` at a Reynolds number."""
    k, k_thin = losses(bore, pipe, bore_length, holes, reynolds)
    return _area(pipe) * np.sqrt(2.0 * np.minimum(dp, recovery2(k, k_thin) * head) / (density * k))


def _choked(p1: Any, p2: Any, bore: Any, pipe: Any, pv: Any, pc: Any, bore_length: Any, holes: Any) -> Any:
    k, k_thin = losses(bore, pipe, bore_length, holes, None)
    return p1 - p2 >= recovery2(k, k_thin) * (p1 - critical_pressure_factor(pv, pc) * pv)


CHOKED = Caution("the flow is choked: a lower outlet pressure gives no more flow", _choked)
FLASHING = Caution("p2 is at or below pv: the liquid flashes after the plate", lambda p2, pv: p2 <= pv)


@function(
    "ORIFICE_FLOW", group="orifices", gives="flow through a plate, choked or not", source_key="ISO 5167-2",
    equation="A_pipe sqrt(2 min(p1-p2, FL^2 (p1 - FF pv))/(rho K))", must=(OUTLET, BOILS, CRITICAL),
    no_answer=(ALL_OPEN, NOT_WHOLE), cautions=(CHOKED, FLASHING, *PLATE_CAUTIONS),
    basis="published", basis_text=PLATE_BASIS,
)  # fmt: skip
def orifice_flow(
    p1: q.P1, p2: q.P2, bore: q.OrificeBore, pipe: q.Pipe, density: q.Density, pv: q.PV, pc: q.PC,
    viscosity: q.Viscosity = None, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
) -> q.Flow:  # fmt: skip
    """Flow through a plate, ``Q = A_pipe sqrt(2 min(dp, dp_choked)/(rho K))`` with ``dp_choked = FL^2 (p1 - FF pv)``.

    Arrays of one length, SI; p1 and p2 before the plate and after recovery. With viscosity K follows the Reynolds
    number of the answer, to 1e-12. NaN where nothing is closed.
    Source: ISO 5167-2:2003; Idelchik; choking at the vena contracta derived, FF by IEC 60534-2-1.
    """
    dp, head = p1 - p2, p1 - critical_pressure_factor(pv, pc) * pv
    flow = _flow_of(dp, head, bore, pipe, density, bore_length, holes, None)
    if viscosity is not None:
        for _ in range(40):
            last = flow
            reynolds = _reynolds(flow, pipe, density, viscosity)
            flow = _flow_of(dp, head, bore, pipe, density, bore_length, holes, reynolds)
            if (np.abs(flow - last) <= 1e-13 * flow).all():
                break
    return flow if holes is None else np.where(_fraction(holes), np.nan, flow)


@function(
    "ORIFICE_BORE", group="orifices", gives="bore of a plate for a flow and a net drop", source_key="ISO 5167-2",
    equation="the bore with Q(bore) = flow, Q of LP_ORIFICE_FLOW", must=(OUTLET, BOILS, CRITICAL),
    no_answer=(NOT_WHOLE,
               NoAnswer("no plate takes this drop at this flow: even with hardly anything closed the flow needs more, or "
                        "the bore would be below a thousandth of the pipe")),
    cautions=(Caution("the flow is choked: the bore is sized on the choked drop, and the outlet pressure does not "
                      "rule the flow", lambda result, p1, p2, pipe, pv, pc, bore_length, holes: _choked(
                          p1, p2, result, pipe, pv, pc, bore_length, holes)),
              FLASHING, SMALL_BORE,
              Caution(BY_IDELCHIK.text, lambda result, pipe, holes: _outside_iso(result, pipe, holes)),
              Caution(REATTACHING.text, lambda result, bore_length: _reattaching(result, bore_length)),
              Caution(THICK.text, lambda result, bore_length: _thick(result, bore_length))),
    basis="published", basis_text=PLATE_BASIS,
)  # fmt: skip
def orifice_bore(
    flow: q.Flow, p1: q.P1, p2: q.P2, pipe: q.Pipe, density: q.Density, pv: q.PV, pc: q.PC,
    viscosity: q.Viscosity = None, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
) -> q.OrificeBore:  # fmt: skip
    """Bore (of each hole) whose flow at these pressures is the one wanted, choked or not; a root search to the last bits.

    Arrays of one length, SI; between a thousandth of the pipe and all but 0.2 % of its area, NaN outside.
    Source: ISO 5167-2:2003; Idelchik; as for :func:`orifice_flow`.
    """
    dp, head = p1 - p2, p1 - critical_pressure_factor(pv, pc) * pv
    reynolds = _reynolds(flow, pipe, density, viscosity)
    number = np.ones(len(flow)) if holes is None else np.where(np.isnan(holes), 1.0, holes)
    columns = (dp, head, pipe, density, bore_length, holes, reynolds)

    def excess(log_bore: Any, rows: Any) -> Any:
        a, b, d, rho, length, n, re = (None if x is None else x[rows] for x in columns)
        return np.log(_flow_of(a, b, np.exp(log_bore), d, rho, length, n, re) / flow[rows])

    widest = np.log(pipe * np.sqrt(0.998 / number))
    bore = np.exp(bracketed_root(excess, np.log(1e-3 * pipe / np.sqrt(number)), widest))
    return np.where(_fraction(number), np.nan, bore)


@function(
    "ORIFICE_FL", group="orifices", gives="liquid pressure recovery factor of a plate", source_key="vena contracta",
    equation="sqrt(K/(1/s0^2 - 1)), s0 = 1/(1 + sqrt(K_thin))",
    no_answer=(ALL_OPEN, NOT_WHOLE), cautions=PLATE_CAUTIONS, basis="estimated",
    basis_text="derived from the loss and the momentum after the vena contracta; expect 20 % of the choked flow",
)  # fmt: skip
def orifice_recovery(
    bore: q.OrificeBore, pipe: q.Pipe, bore_length: q.BoreLength = None, holes: q.Holes = None  # type: ignore[assignment]
) -> q.Ratio:  # fmt: skip
    """Recovery factor, ``FL^2 = K/(1/s0^2 - 1)``; for a thin plate the loss ratio of ISO 5167-2.

    Arrays of one length, SI, at a pipe Reynolds number of 1e6. A thick plate has the thin one's vena contracta, so it
    recovers more and chokes earlier. NaN where nothing is closed.
    Source: derived from Bernoulli to the vena contracta and momentum after it.
    """
    k, k_thin = losses(bore, pipe, bore_length, holes, None)
    whole = holes is None or ~_fraction(holes)
    return np.where(whole, np.sqrt(recovery2(k, k_thin)), np.nan)


def _fit(bore: Any, pipe: Any, holes: Any, k_thin: Any) -> tuple[Any, Any]:
    """Incipient and constant index of a thin plate, downstream form, with the effect of size."""
    b = np.sqrt(open_share(bore, pipe, holes))
    s0 = throat_share(k_thin)
    incipient = np.maximum(1.2, 4.5 * b + 0.5)
    constant = np.minimum(np.maximum(3.3 * b, 2.0 / np.sqrt(k_thin) + 0.9 / (1.0 - s0) ** 2), incipient)
    size = np.maximum(pipe / REFERENCE_PIPE, 1.0) ** (0.3 * k_thin**-0.25)
    return incipient * size, constant * size


def _choked_limit(k: Any, k_thin: Any, p1: Any, pv: Any, pc: Any) -> Any:
    """``(p1-pv)/(FL^2 (p1 - FF pv))``, cold liquid (1/FL^2) where no pressures are given."""
    cold = 1.0 / recovery2(k, k_thin)
    if p1 is None:
        return cold
    exact = cold * (p1 - pv) / (p1 - critical_pressure_factor(pv, pc) * pv)
    return np.where(np.isnan(p1), cold, exact)


_SPREAD = (
    "sources disagree: incipient about 1.0 to 1.2 for bore over pipe 0.1 to 0.33 in a 100 mm pipe (form not stated), "
    "about 0.93 downstream form elsewhere (from memory); the form of the fit used is assumed downstream"
)


@function(
    "ORIFICE_LIMIT", group="orifices", gives="limit of the index of a plate", source_key="Kuroda 1978",
    equation="downstream form: incipient max(1.2, 4.5 b + 0.5), constant max(3.3 b, 2/sqrt(K) + 0.9/(1-s0)^2), both times "
    "(D/0.1 m)^(0.3 K^-0.25) above 0.1 m; choked (p1-pv)/(FL^2 (p1 - FF pv))",
    needs={"p1": ("pv", "pc"), "pv": ("p1", "pc"), "pc": ("p1", "pv")}, must=(BOILS, CRITICAL),
    no_answer=(ALL_OPEN, NOT_WHOLE),
    cautions=(
        Caution(_SPREAD, lambda limit: np.asarray(limit != "choked")),
        Caution("the fit holds for bore over pipe 0.2 to 0.6; its end rule was continued",
                lambda bore, pipe, holes, limit: np.asarray(limit != "choked") & (
                    (open_share(bore, pipe, holes) < 0.04) | (open_share(bore, pipe, holes) > 0.36))),
        Caution("the fit is for thin plates; with a long bore cavitation begins at a higher index, most at 0.5 to 1 "
                "diameters: an estimate", lambda bore, bore_length, limit: np.asarray(limit != "choked") & (
                    _thick(bore, bore_length) | _reattaching(bore, bore_length))),
        Caution("the fit is for one hole", lambda holes, limit: np.asarray(limit != "choked") & (
            False if holes is None else holes > 1.0)),
        Caution("without p1, pv and pc the choked index is that of a cold liquid",
                lambda limit, p1: np.asarray(limit == "choked") & (True if p1 is None else np.isnan(p1))),
    ),
    basis="published", basis_text="published, form assumed: Kuroda, Fukuda and Cho 1978 for thin plates; choked derived",
)  # fmt: skip
def orifice_limit(
    limit: q.LimitKind, bore: q.OrificeBore, pipe: q.Pipe, bore_length: q.BoreLength = None, holes: q.Holes = None,  # type: ignore[assignment]
    p1: q.P1 = None, pv: q.PV = None, pc: q.PC = None, form: q.Form = "upstream",  # type: ignore[assignment]
) -> q.Ratio:  # fmt: skip
    """Incipient, constant or choked index of a plate; in downstream form incipient is ``max(1.2, 4.5 b + 0.5)``.

    Arrays of one length, SI, in the form named. Incipient and constant grow with pipes above 0.1 m, not with pressure;
    choking never scales. NaN where nothing is closed.
    Source: Kuroda et al. (1978), read in its abstract, form assumed; size exponent from memory; choked derived.
    """
    k, k_thin = losses(bore, pipe, bore_length, holes, None)
    incipient, constant = _fit(bore, pipe, holes, k_thin)
    choked = _choked_limit(k, k_thin, p1, pv, pc)
    value = np.where(limit == "incipient", incipient + 1.0, np.where(limit == "constant", constant + 1.0, choked))
    whole = holes is None or ~_fraction(holes)
    return np.where(whole, from_upstream(value, form), np.nan)
