"""Hydrodynamic noise of a control valve, outside the pipe."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from lowpoint import quantities as q
from lowpoint.declare import Caution, NoAnswer, function
from lowpoint.physics.limits import inception_estimate
from lowpoint.physics.sizing import BOILS, OUTLET
from lowpoint.units import KV

__all__ = ["valve_noise"]


def _level(
    flow: float, p1: float, p2: float, pv: float, density: float, sound_speed: float, coefficient: float, fl: float,
    fd: float, bore: float, pipe_bore: float, pipe_wall: float, xfz: float,
) -> float:  # fmt: skip
    from fluids import control_valve

    # Declared there for a whole number of kg/s, which it does not ask for.
    predicted: Any = control_valve.control_valve_noise_l_2015
    try:
        level = predicted(
            m=flow * density, P1=p1, P2=p2, Psat=pv, rho=density, c=sound_speed, Kv=coefficient / KV, d=bore,
            Di=pipe_bore, FL=fl, Fd=fd, t_pipe=pipe_wall, rho_pipe=7800.0, c_pipe=5000.0, rho_air=1.293, c_air=343.0,
            xFz=xfz, An=-4.6,
        )  # fmt: skip
    except (ValueError, ZeroDivisionError, OverflowError):
        return math.nan
    return float(level) if isinstance(level, float) and math.isfinite(level) else math.nan


def _flashes(p2: Any, pv: Any) -> Any:
    return p2 <= pv


@function(
    "NOISE", group="indices and limits",
    gives="A-weighted sound level 1 m from a steel pipe in air, hydrodynamic", source_key="IEC 60534-8-4",
    must=(OUTLET, BOILS),
    no_answer=(NoAnswer("the liquid flashes (xF at or above 1), where the method does not hold", _flashes),
               NoAnswer("the method has no answer for these values")),
    cautions=(
        Caution("xfz was estimated: 0.05 in it moves the level by 5 dB",
                lambda xfz: True if xfz is None else np.isnan(xfz)),
        Caution("for a globe valve (noise correction -4.6), steel pipe (7800 kg/m3, 5000 m/s) and still air; site and "
                "vendor data come first, 5 dB is the usual spread", lambda flow: np.ones(len(flow), np.bool_)),
    ),
    basis="estimated", basis_text="IEC 60534-8-4:2015, a prediction",
)  # fmt: skip
def valve_noise(
    flow: q.Flow, p1: q.P1, p2: q.P2, pv: q.PV, density: q.Density, sound_speed: q.SoundSpeed,
    coefficient: q.Coefficient, fl: q.FL, fd: q.Fd, valve_size: q.ValveSize, pipe_bore: q.PipeBore,
    pipe_wall: q.PipeWall, xfz: q.Xfz = None, outlet_size: q.OutletSize = None,  # type: ignore[assignment]
) -> q.Level:  # fmt: skip
    """Hydrodynamic noise ``LpAe,1m`` of IEC 60534-8-4:2015, dB(A).

    Arrays of one length, SI (C as Av in m2); one row at a time, by the library fluids. ``xfz`` at 6 bar, carried to p1
    by the method; estimated where omitted. The outlet's bore is the valve size where omitted. NaN where the liquid
    flashes.
    Source: IEC 60534-8-4:2015.
    """
    estimate = inception_estimate(coefficient, fl, fd)
    inception = estimate if xfz is None else np.where(np.isnan(xfz), estimate, xfz)
    outlet = valve_size if outlet_size is None else np.where(np.isnan(outlet_size), valve_size, outlet_size)
    columns = (flow, p1, p2, pv, density, sound_speed, coefficient, fl, fd, outlet, pipe_bore, pipe_wall, inception)
    rows = np.flatnonzero(~_flashes(p2, pv))
    levels = np.full(len(flow), np.nan)
    levels[rows] = [_level(*row) for row in zip(*(np.asarray(x)[rows].tolist() for x in columns), strict=True)]
    return levels
