"""The constants of IEC 60534-2-1 in coherent SI: with Av in m2, m3/s, Pa, m and m2/s they have no dimension.

Derived from the standard's rounded values of the Kv set (m3/h, kPa, mm, m2/s), so that every result is the
standard's own: ``Av = Kv units.KV`` and ``d = d_mm/1000``.
"""

from __future__ import annotations

import math

from lowpoint.units import KV

__all__ = ["N2", "N4", "N18", "N32"]

_KV_PER_MM2 = KV / 1e-6
"""Av/d2 of a valve with one Kv a square millimetre."""

N2 = 1.6e-3 * _KV_PER_MM2**2
"""``c = (Av/d2)^2/N2``: velocity head in the valve's nominal bore; the exact value would be pi^2/8."""
N4 = 7.07e-2 * 3600.0 * math.sqrt(KV)
"""``Rev = N4 Fd Q/(nu sqrt(Av FL)) (...)^(1/4)``."""
N18 = 0.865 * _KV_PER_MM2
"""``Av/(N18 d2)`` is the relative capacity C/(N18 d^2)."""
N32 = 140.0 * _KV_PER_MM2 ** (-2.0 / 3.0)
"""``n = 1 + N32 (Av/d2)^(2/3)`` for reduced trim."""
