"""One bracketed root a row, for a whole column at once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

__all__ = ["bracketed_root"]

CLEVER = 40
"""Steps in which a curve may be followed; the few rows that are not done by then are halved."""
HALVINGS = 64
"""More than a bracket needs down to the last bit, unless it is 2000 times as wide as its root is large."""


@np.errstate(all="ignore")
def bracketed_root(
    excess: Callable[[Any, Any], Any], low: Any, high: Any, guess: Any = None, reach: float = 0.0
) -> Any:
    """The x between ``low`` and ``high`` with ``excess(x, rows) = 0``, NaN where the ends have one sign.

    ``excess`` is asked for the values of some rows only (their indices are the second argument), so rows that are
    done cost nothing, and no row's answer depends on its neighbours. ``guess`` and ``reach`` save steps where the
    root is known to lie near; where it does not, the whole bracket is searched all the same. Inverse quadratic
    steps where they are safe, else bisection; to the last bits.
    Source: T. R. Chandrupatla, Adv. Eng. Softw. 28 (1997) 145-149.
    """
    a, b, fa, fb = _ends(excess, np.array(low, np.float64), np.array(high, np.float64), guess, reach)
    root = np.where(fa == 0.0, a, np.where(fb == 0.0, b, np.nan))
    rows = np.flatnonzero(np.sign(fa) * np.sign(fb) < 0.0)
    a, b, fa, fb = (x[rows] for x in (a, b, fa, fb))
    t = _secant(fa, fb)
    for step in range(CLEVER + HALVINGS):
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
        root[rows] = np.where(np.isfinite(fx), best, np.nan)
        wanted = _step(a, b, c, fa, fb, fc) if step < CLEVER else np.full(len(rows), 0.5)
        t = np.clip(wanted, least / width, 1.0 - least / width)
        if done.any():
            live = ~done
            rows, a, b, fa, fb, t = (y[live] for y in (rows, a, b, fa, fb, t))
    return root


def _ends(excess: Any, low: Any, high: Any, guess: Any, reach: float) -> tuple[Any, Any, Any, Any]:
    """The bracket's ends and the excess there: around the guess where the root lies there, else the whole."""
    rows = np.arange(len(low))
    if guess is None:
        return low, high, excess(low, rows), excess(high, rows)
    # A guess that is no number leaves the whole bracket.
    a, b = np.fmin(np.fmax(guess - reach, low), high), np.fmax(np.fmin(guess + reach, high), low)
    fa, fb = excess(a, rows), excess(b, rows)
    away = rows[~(np.sign(fa) * np.sign(fb) <= 0.0)]
    if len(away):
        a[away], b[away] = low[away], high[away]
        fa[away], fb[away] = excess(low[away], away), excess(high[away], away)
    return a, b, fa, fb


def _secant(fa: Any, fb: Any) -> Any:
    """Where the straight line between the ends of a bracket crosses zero; the middle where it has none to offer."""
    t = fa / (fa - fb)
    return np.where((t > 0.0) & (t < 1.0), t, 0.5)


def _step(a: Any, b: Any, c: Any, fa: Any, fb: Any, fc: Any) -> Any:
    """Where in the bracket to look next: inverse quadratic where its curve is monotone, else in the middle."""
    xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
    safe = (phi * phi < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
    quadratic = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
    return np.where(safe & np.isfinite(quadratic), quadratic, 0.5)
