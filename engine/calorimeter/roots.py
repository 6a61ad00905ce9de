"""One bracketed root search over arrays, for the few inverse questions that have no Newton start."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np


def bracketed_root(f: Callable[[np.ndarray], np.ndarray], low: np.ndarray, high: np.ndarray,
                   tolerance: float = 1e-11) -> np.ndarray:
    """Roots of ``f`` between ``low`` and ``high`` (1-d arrays), to ``tolerance`` relative.

    False position with the Anderson-Björck weighting (N. Anderson, A. Björck, BIT 13, 1973): as
    safe as bisection, and a handful of steps where bisection needs forty. Elements without a
    change of sign end at whichever end is nearer zero; callers ask about that before.
    """
    a, b = low.astype(float), high.astype(float)
    fa, fb = f(a), f(b)
    best = np.where(np.abs(fa) < np.abs(fb), a, b)
    for _ in range(100):
        spread = fb - fa
        c = np.where(spread != 0, b - fb * (b - a) / np.where(spread != 0, spread, 1.0), 0.5 * (a + b))
        c = np.clip(c, np.minimum(a, b), np.maximum(a, b))
        fc = f(c)
        swap = np.sign(fc) * np.sign(fb) < 0
        weight = 1.0 - fc / np.where(fb != 0, fb, 1.0)
        fa = np.where(swap, fb, fa * np.where(weight > 0, weight, 0.5))
        a, b, fb = np.where(swap, b, a), c, fc
        moved, best = np.abs(c - best), c
        if not (moved > tolerance * np.abs(c)).any() or not fc.any():
            break
    return best
