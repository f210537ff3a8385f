"""Single orifice plates: the plate's own flow, index and limits between its two pressures, as for a valve."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint.physics.orifices import orifice_flow, orifice_limit, orifice_recovery
from lowpoint.physics.plate_cautions import SHORT
from lowpoint.physics.sizing import critical_pressure_factor, throat_pressure
from lowpoint.survey.limiting import LIMITS, stated
from lowpoint.survey.model import Cases, absent

__all__ = ["plate_findings"]


def plate_findings(cases: Cases) -> dict[str, Any]:
    """Columns of ``Findings`` for plates between p1 and p2: what they pass, against the flow wanted.

    The required coefficient is that of a plate that would pass the flow at these pressures, ``Q sqrt(rho/dp)`` with
    the drop not above the choked one; ``passed`` the flow of the plate itself.
    """
    plate = (cases.bore, cases.pipe_in)
    more = (cases.bore_length, cases.holes)
    fl = orifice_recovery(*plate, *more)
    viscosity: Any = None if np.isnan(cases.viscosity).all() else cases.viscosity
    passed = orifice_flow(cases.p1, cases.p2, *plate, cases.density, cases.pv, cases.pc, viscosity, *more)
    choked = fl * fl * (cases.p1 - critical_pressure_factor(cases.pv, cases.pc) * cases.pv)
    drop = cases.p1 - cases.p2
    limits = _limits(cases, plate, more)
    return {
        "coefficient": cases.flow * np.sqrt(cases.density / np.minimum(drop, choked)), "passed": passed,
        "capacity": cases.flow / passed, "fl": fl, "fl_basis": np.full(cases.count, "estimated", object),
        "drop": drop, "choked_drop": choked,
        "throat_pressure": throat_pressure(cases.p1, cases.p2, fl, cases.pv, cases.pc),
        "sigma": np.where(np.isnan(fl), np.nan, (cases.p1 - cases.pv) / drop), **limits,
    }  # fmt: skip


def fit_basis(cases: Cases) -> Any:
    """Basis of the published limits: the fit is for thin plates with one hole, an estimate for others."""
    thick = cases.bore_length / cases.bore > SHORT
    return np.where(thick | (cases.holes > 1.0), "estimated", "published").astype(object)


def _limits(cases: Cases, plate: Any, more: Any) -> dict[str, Any]:
    """The limits given for the plate, else the published ones; a given one brings its basis."""
    own = stated(cases, np.full(cases.count, np.nan))
    fitted = {name: orifice_limit(name, *plate, *more) for name in ("incipient", "constant")}
    given = ~np.isnan(own["incipient"]) | ~np.isnan(own["constant"]) | ~np.isnan(own["damage"])
    basis = np.where(absent(cases.limits_basis), "tested", cases.limits_basis)
    found: dict[str, Any] = {}
    for name in LIMITS:
        value = np.where(given, own[name], fitted[name]) if name in fitted else own[name]
        found[name] = found[f"{name}_scaled"] = value
    found["limits_basis"] = np.where(given, basis, fit_basis(cases))
    found["incipient_basis"] = np.where(np.isnan(found["incipient"]), None, found["limits_basis"])
    return found
