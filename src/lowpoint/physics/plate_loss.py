"""Loss of an orifice plate in a pipe: which published equation, for which plate, and its vena contracta.

``beta = sqrt(f)`` with f the share of the pipe's area that is open; one hole: bore over pipe. The loss coefficient K
is on the velocity in the pipe and on the net (permanent) drop. Arrays of one length, SI; None for what is omitted.

A thin sharp plate has the K of ISO 5167-2 with the Reader-Harris/Gallagher coefficient (corner taps) for one hole,
beta 0.1 to 0.75 and a pipe from 50 mm; else that of Idelchik. Between beta 0.08 and 0.1, 0.75 and 0.8, and pipes of 45
and 50 mm one passes into the other (their logarithms in proportion), so that no plate makes K jump. A thick plate has
the thin one's K times Idelchik's factor for its bore length.
"""

from __future__ import annotations

from typing import Any

import numpy as np

__all__ = ["discharge_coefficient", "iso_weight", "losses", "open_share", "thick_factor", "throat_share"]

TURBULENT = 1e6
"""Pipe Reynolds number taken where none is given."""
LEAST_REYNOLDS = 5000.0
"""End of the range of ISO 5167-2; below it the coefficient is taken there."""
SMALL_PIPE = 0.07112
"""m; below it the discharge coefficient has a term of its own."""
TAPS = {"corner": (0.0, 0.0), "radius": (1.0, 0.47)}
"""Distances of the taps over the pipe's diameter, before and after; flange taps are one inch away."""


def open_share(bore: Any, pipe: Any, holes: Any) -> Any:
    """Open share of the pipe's area, ``f = holes (bore/pipe)^2``."""
    single = (bore / pipe) ** 2
    return single if holes is None else np.where(np.isnan(holes), single, holes * single)


def discharge_coefficient(beta: Any, pipe: Any, reynolds: Any, taps: str = "corner") -> Any:
    """Reader-Harris/Gallagher discharge coefficient C of a sharp plate with one hole.

    Source: ISO 5167-2:2003 (5.3.2.1), as in the library fluids.
    """
    l1, l2 = TAPS.get(taps) or (0.0254 / pipe, 0.0254 / pipe)
    a = (19000.0 * beta / reynolds) ** 0.8
    m2 = 2.0 * l2 / (1.0 - beta)
    b4 = beta**4
    upstream = (0.043 + 0.080 * np.exp(-10.0 * l1) - 0.123 * np.exp(-7.0 * l1)) * (1.0 - 0.11 * a) * b4 / (1.0 - b4)
    downstream = 0.031 * (m2 - 0.8 * m2**1.1) * beta**1.3
    c = 0.5961 + 0.0261 * beta**2 - 0.216 * b4**2 + 0.000521 * (1e6 * beta / reynolds) ** 0.7
    c = c + (0.0188 + 0.0063 * a) * beta**3.5 * (1e6 / reynolds) ** 0.3 + upstream - downstream
    return c + np.where(pipe < SMALL_PIPE, 0.011 * (0.75 - beta) * (2.8 - pipe / 0.0254), 0.0)


def _iso(beta: Any, pipe: Any, reynolds: Any) -> Any:
    """``K = (sqrt(1 - b^4 (1-C^2))/(C b^2) - 1)^2``."""
    c = discharge_coefficient(beta, pipe, np.maximum(reynolds, LEAST_REYNOLDS))
    b2 = beta * beta
    return (np.sqrt(1.0 - b2 * b2 * (1.0 - c * c)) / (c * b2) - 1.0) ** 2


def _idelchik(f: Any) -> Any:
    """``K = ((1-f) + 0.707 (1-f)^0.375)^2/f^2``, sharp edge, one hole or many."""
    closed = 1.0 - f
    return ((closed + 0.707 * closed**0.375) / f) ** 2


def _ramp(x: Any, zero: float, one: float) -> Any:
    return np.clip((x - zero) / (one - zero), 0.0, 1.0)


def iso_weight(bore: Any, pipe: Any, holes: Any) -> Any:
    """How much of ISO 5167-2 is in the loss of a thin plate: 1 inside its range, 0 well outside."""
    beta = bore / pipe
    weight = _ramp(beta, 0.08, 0.1) * _ramp(beta, 0.8, 0.75) * _ramp(pipe, 0.045, 0.05)
    return weight if holes is None else np.where(np.isnan(holes) | (holes == 1.0), weight, 0.0)


def _thin(f: Any, bore: Any, pipe: Any, holes: Any, reynolds: Any) -> Any:
    weight = iso_weight(bore, pipe, holes)
    k = _idelchik(f)
    inside = weight > 0.0
    if not inside.any():
        return k
    # Outside its range the coefficient may be anything, so it is not worked out there.
    beta = np.where(inside, bore / pipe, 0.5)
    at = TURBULENT if reynolds is None else np.nan_to_num(reynolds, nan=TURBULENT)
    iso = _iso(beta, np.maximum(pipe, 0.045), at)
    if (weight == 1.0).all():
        return iso
    return np.where(weight == 1.0, iso, np.where(inside, k ** (1.0 - weight) * np.abs(iso) ** weight, k))


def thick_factor(f: Any, length_ratio: Any) -> Any:
    """``Kt(t/d)/Kt(0)`` with ``Kt = 0.5 (1-f)^0.75 + tau (1-f)^1.375 + (1-f)^2 + 0.02 t/d``.

    ``tau = (2.4 - t/d) 10^-(0.25 + 0.535 (t/d)^8/(0.05 + (t/d)^7))``, 0 beyond 2.4. Source: Idelchik, diagram 4-15;
    the closed form of tau is from memory.
    """
    closed = 1.0 - f
    fixed = 0.5 * closed**0.75 + closed**2
    part = closed**1.375
    tau = np.maximum(2.4 - length_ratio, 0.0) * 10.0 ** -(
        0.25 + 0.535 * length_ratio**8 / (0.05 + length_ratio**7)
    )  # fmt: skip
    return (fixed + tau * part + 0.02 * length_ratio) / (fixed + 2.4 * 10.0**-0.25 * part)


def losses(bore: Any, pipe: Any, bore_length: Any, holes: Any, reynolds: Any) -> tuple[Any, Any]:
    """``(K, K_thin)``: of the plate as it is, and of the same plate with a sharp edge; NaN where nothing is closed."""
    f = open_share(bore, pipe, holes)
    f = np.where(f < 1.0, f, np.nan)
    thin = _thin(f, bore, pipe, holes, reynolds)
    if bore_length is None:
        return thin, thin
    ratio = np.nan_to_num(bore_length / bore)
    return np.where(ratio > 0.0, thin * thick_factor(f, ratio), thin), thin


def throat_share(k_thin: Any) -> Any:
    """Vena contracta over the pipe's area, ``s0 = 1/(1 + sqrt(K_thin))``, the same whatever the bore length."""
    return 1.0 / (1.0 + np.sqrt(k_thin))


def recovery2(k: Any, k_thin: Any) -> Any:
    """``FL^2 = K/(1/s0^2 - 1)``: the net drop over the fall to the vena contracta."""
    s0 = throat_share(k_thin)
    return k * s0 * s0 / (1.0 - s0 * s0)
