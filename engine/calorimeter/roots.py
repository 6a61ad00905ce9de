"""One bracketed root search over arrays, for the few inverse questions that have no Newton start."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np


def bracketed_root(f: Callable[[np.ndarray], np.ndarray], low: np.ndarray, high: np.ndarray,
                   tolerance: float = 1e-11) -> np.ndarray:
    """Roots of ``f`` between ``low`` and ``high`` (1-d arrays), to ``tolerance`` relative.

    False position with the Anderson-Björck weighting (N. Anderson, A. Björck, BIT 13, 1973): a handful
    of steps where bisection needs forty. A bracket that has not halved in three steps is halved, so that
    no function takes much longer than by bisection. Elements without a change of sign end at whichever
    end is nearer zero; callers ask about that before.
    """
    a, b = low.astype(float), high.astype(float)
    fa, fb = f(a), f(b)
    best = np.where(np.abs(fa) < np.abs(fb), a, b)
    settled, width = np.zeros(a.shape, dtype=bool), np.abs(b - a)
    for step in range(1, 150):
        spread = fb - fa
        c = np.where(spread != 0, b - fb * (b - a) / np.where(spread != 0, spread, 1.0), 0.5 * (a + b))
        c = np.clip(c, np.minimum(a, b), np.maximum(a, b))
        if step % 3 == 0:
            slow = (np.abs(b - a) > 0.5 * width) & (np.sign(fa) * np.sign(fb) < 0)
            c, width = np.where(slow, 0.5 * (a + b), c), np.abs(b - a)
        c = np.where(settled, best, c)
        fc = f(c)
        swap = np.sign(fc) * np.sign(fb) < 0
        weight = 1.0 - fc / np.where(fb != 0, fb, 1.0)
        fa = np.where(swap, fb, fa * np.where(weight > 0, weight, 0.5))
        a, b, fb = np.where(swap, b, a), c, fc
        settled |= (np.abs(c - best) <= tolerance * np.abs(c)) | (fc == 0)
        best = c
        if settled.all():
            break
    return best
