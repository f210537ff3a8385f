"""Loss of an orifice plate in a pipe: which published equation, for which plate, and its vena contracta.

``beta = sqrt(f)`` with f the share of the pipe's area that is open; one hole: bore over pipe. The loss coefficient K
is on the velocity in the pipe and on the net (permanent) drop. Arrays of one length, SI; None for what is omitted.

A thin sharp plate has the K of ISO 5167-2 with the Reader-Harris/Gallagher coefficient (corner taps) for one hole,
beta 0.1 to 0.75 and a pipe from 50 mm; else that of Idelchik. Between beta 0.08 and 0.1, 0.75 and 0.8, and pipes of 45
and 50 mm one passes into the other (their logarithms in proportion), so that no plate makes K jump. A thick plate has
the thin one's K times Idelchik's factor for its bore length.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

__all__ = ["Loss", "discharge_coefficient", "in_iso", "iso_weight", "losses", "open_share", "share_of",
           "thick_factor"]  # fmt: skip

TURBULENT = 1e6
"""Pipe Reynolds number taken where none is given."""
LEAST_REYNOLDS = 5000.0
"""End of the range of ISO 5167-2; below it the coefficient is taken there."""
SMALL_PIPE = 0.07112
"""m; below it the discharge coefficient has a term of its own."""
TAPS = {"corner": (0.0, 0.0), "radius": (1.0, 0.47)}
"""Distances of the taps over the pipe's diameter, before and after; flange taps are one inch away."""
LAST_LENGTH = 2.4
"""Bore length over bore from which the jet no longer knows of the sharp inlet (Idelchik)."""


@dataclass(frozen=True, slots=True)
class Loss:
    """What a plate does to the flow, in heads of the velocity in the pipe."""

    k: Any
    """Net loss of the plate as it is."""
    k_thin: Any
    """Net loss of the same plate with a sharp edge, which has the same vena contracta."""
    open_share: Any
    thin: bool = False
    """Is no plate of the column thick?"""

    @property
    def throat_share(self) -> Any:
        """Vena contracta over the pipe's area, ``s0 = 1/(1 + sqrt(K_thin))``, the same whatever the bore length."""
        return 1.0 / (1.0 + np.sqrt(self.k_thin))

    @property
    def fall(self) -> Any:
        """Fall of pressure from the pipe to the lowest point, ``1/s0^2 - 1 = K_thin + 2 sqrt(K_thin)``.

        The friction of a very long bore (tens of diameters) can take the pressure lower still at its outlet, whence
        the sudden expansion regains ``2 (1/f - 1)``: then ``K + 2 (1/f - 1)``.
        """
        contracted = self.k_thin + 2.0 * np.sqrt(self.k_thin)
        return contracted if self.thin else np.maximum(contracted, self.k + 2.0 / self.open_share - 2.0)

    @property
    def recovery2(self) -> Any:
        """``FL^2``: the net drop over the fall to the lowest pressure, always below 1."""
        return self.k / self.fall


def open_share(bore: Any, pipe: Any, holes: Any) -> Any:
    """Open share of the pipe's area, ``f = holes (bore/pipe)^2``."""
    single = (bore / pipe) ** 2
    return single if holes is None else np.where(np.isnan(holes), single, holes * single)


def discharge_coefficient(beta: Any, pipe: Any, reynolds: Any, taps: str = "corner") -> Any:
    """Reader-Harris/Gallagher discharge coefficient C of a sharp plate with one hole.

    Source: ISO 5167-2:2003 (5.3.2.1), as in the library fluids.
    """
    a = (19000.0 * beta / reynolds) ** 0.8
    b2 = beta * beta
    b4 = b2 * b2
    c = 0.5961 + 0.0261 * b2 - 0.216 * b4 * b4 + 0.000521 * (1e6 * beta / reynolds) ** 0.7
    c = c + (0.0188 + 0.0063 * a) * (b2 * beta * np.sqrt(beta)) * (1e6 / reynolds) ** 0.3
    if taps != "corner":  # at the corners both distances are nothing, and so are their terms
        c = c + _tap_terms(beta, a, *(TAPS.get(taps) or (0.0254 / pipe, 0.0254 / pipe)))
    return c + np.where(pipe < SMALL_PIPE, 0.011 * (0.75 - beta) * (2.8 - pipe / 0.0254), 0.0)


def _tap_terms(beta: Any, a: Any, l1: Any, l2: Any) -> Any:
    """What distances of the taps from the plate, over the pipe's diameter, add to the discharge coefficient."""
    b4 = beta**4
    m2 = 2.0 * l2 / (1.0 - beta)
    upstream = (0.043 + 0.080 * np.exp(-10.0 * l1) - 0.123 * np.exp(-7.0 * l1)) * (1.0 - 0.11 * a) * b4 / (1.0 - b4)
    return upstream - 0.031 * (m2 - 0.8 * m2**1.1) * beta**1.3


def _iso(beta: Any, pipe: Any, reynolds: Any) -> Any:
    """``K = (sqrt(1 - b^4 (1-C^2))/(C b^2) - 1)^2``."""
    c = discharge_coefficient(beta, pipe, np.maximum(reynolds, LEAST_REYNOLDS))
    b2 = beta * beta
    root = np.sqrt(1.0 - b2 * b2 * (1.0 - c * c)) / (c * b2) - 1.0
    return root * root


def _idelchik(f: Any) -> Any:
    """``K = ((1-f) + 0.707 (1-f)^0.375)^2/f^2``, sharp edge, one hole or many."""
    closed = 1.0 - f
    root = (closed + 0.707 * closed**0.375) / f
    return root * root


def _ramp(x: Any, zero: float, one: float) -> Any:
    return np.clip((x - zero) / (one - zero), 0.0, 1.0)


def iso_weight(bore: Any, pipe: Any, holes: Any) -> Any:
    """How much of ISO 5167-2 is in the loss of a thin plate: 1 inside its range, 0 well outside."""
    beta = bore / pipe
    weight = _ramp(beta, 0.08, 0.1) * _ramp(beta, 0.8, 0.75) * _ramp(pipe, 0.045, 0.05)
    return weight if holes is None else np.where(np.isnan(holes) | (holes == 1.0), weight, 0.0)


def in_iso(bore: Any, pipe: Any, holes: Any) -> Any:
    """Where ISO 5167-2 alone gives the loss; a rounding at an end of its range is inside."""
    return iso_weight(bore, pipe, holes) > 1.0 - 1e-9


def _thin(f: Any, bore: Any, pipe: Any, holes: Any, reynolds: Any) -> Any:
    weight = iso_weight(bore, pipe, holes)
    inside = weight > 0.0
    if not inside.any():
        return _idelchik(f)
    at = TURBULENT if reynolds is None else np.nan_to_num(reynolds, nan=TURBULENT)
    if (weight == 1.0).all():
        return _iso(bore / pipe, pipe, at)
    # Outside its range the coefficient may be anything, so it is not worked out there.
    k, iso = _idelchik(f), _iso(np.where(inside, bore / pipe, 0.5), np.maximum(pipe, 0.045), at)
    return np.where(weight == 1.0, iso, np.where(inside, k ** (1.0 - weight) * iso**weight, k))


def share_of(fall: Any) -> Any:
    """Open share of a thin sharp plate with this fall to the vena contracta, within a few hundredths: with C 0.6."""
    return 1.0 / np.sqrt(1.0 + 0.36 * fall)


def thick_factor(f: Any, length_ratio: Any) -> Any:
    """``Kt(t/d)/Kt(0)`` with ``Kt = 0.5 (1-f)^0.75 + tau (1-f)^1.375 + (1-f)^2 + 0.02 t/d``.

    ``tau = (2.4 - t/d) 10^-(0.25 + 0.535 (t/d)^8/(0.05 + (t/d)^7))``, 0 beyond 2.4. Source: Idelchik, diagram 4-15;
    the closed form of tau is from memory.
    """
    closed = 1.0 - f
    fixed = 0.5 * closed**0.75 + closed * closed
    part = closed**1.375
    short = np.minimum(length_ratio, LAST_LENGTH)
    tau = (LAST_LENGTH - short) * 10.0 ** -(0.25 + 0.535 * short**8 / (0.05 + short**7))
    return (fixed + tau * part + 0.02 * length_ratio) / (fixed + LAST_LENGTH * 10.0**-0.25 * part)


def losses(bore: Any, pipe: Any, bore_length: Any, holes: Any, reynolds: Any) -> Loss:
    """The loss of a plate as it is and with a sharp edge; NaN where nothing is closed."""
    f = open_share(bore, pipe, holes)
    f = np.where(f < 1.0, f, np.nan)
    thin = _thin(f, bore, pipe, holes, reynolds)
    if bore_length is None:
        return Loss(thin, thin, f, thin=True)
    ratio = np.nan_to_num(bore_length / bore)
    return Loss(np.where(ratio > 0.0, thin * thick_factor(f, ratio), thin), thin, f)
