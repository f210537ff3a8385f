"""One bracketed root a row, for a whole column at once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

__all__ = ["bracketed_root"]

STEPS = 100
"""No row takes more: from a bracket of any width a bisection is at the last bit by then."""


def bracketed_root(excess: Callable[[Any, Any], Any], low: Any, high: Any) -> Any:
    """The x between ``low`` and ``high`` with ``excess(x, rows) = 0``, NaN where the ends have one sign.

    ``excess`` is asked for the values of some rows only (their indices are the second argument), so rows that are
    done cost nothing. Inverse quadratic steps where they are safe, else bisection; to the last bits.
    Source: T. R. Chandrupatla, Adv. Eng. Softw. 28 (1997) 145-149.
    """
    rows = np.arange(len(low))
    root = np.full(len(low), np.nan)
    a, b = np.array(low, np.float64), np.array(high, np.float64)
    fa, fb = excess(a, rows), excess(b, rows)
    c, fc, t = a, fa, np.full(len(a), 0.5)
    root = np.where(fa == 0.0, a, np.where(fb == 0.0, b, root))
    live = np.sign(fa) * np.sign(fb) < 0.0
    rows, a, b, c, fa, fb, fc, t = (x[live] for x in (rows, a, b, c, fa, fb, fc, t))
    for _ in range(STEPS):
        if not len(rows):
            break
        x = a + t * (b - a)
        fx = excess(x, rows)
        same = np.sign(fx) == np.sign(fa)
        c, fc = np.where(same, a, b), np.where(same, fa, fb)
        b, fb = np.where(same, b, a), np.where(same, fb, fa)
        a, fa = x, fx
        best = np.where(np.abs(fa) < np.abs(fb), a, b)
        width = np.abs(b - a)
        least = 2.0 * np.finfo(np.float64).eps * np.abs(best)
        done = (fa == 0.0) | (width <= 2.0 * least) | ~np.isfinite(fx)
        root[rows[done]] = np.where(np.isfinite(fx), best, np.nan)[done]
        t = np.clip(_step(a, b, c, fa, fb, fc), least / width, 1.0 - least / width)
        live = ~done
        rows, a, b, c, fa, fb, fc, t = (x[live] for x in (rows, a, b, c, fa, fb, fc, t))
    root[rows] = a
    return root


def _step(a: Any, b: Any, c: Any, fa: Any, fb: Any, fc: Any) -> Any:
    """Where in the bracket to look next: inverse quadratic where its curve is monotone, else in the middle."""
    xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
    safe = (phi * phi < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
    quadratic = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
    return np.where(safe & np.isfinite(quadratic), quadratic, 0.5)
