"""First-order lag and coloured noise over evenly spaced times, without a step in Python for each."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

_BLOCK = 128


def lagged(values: np.ndarray, start: float, dt: float, time_constant: float) -> np.ndarray:
    """What follows ``values`` with a first-order lag, from ``start`` at the first of them; 1-d, same length.

    Exact for values that run straight between the times: tau dy/dt = u - y. ``dt`` and
    ``time_constant`` [s], the values in any unit.

    >>> lagged(np.array([0.0, 0.0, 60.0, 60.0]), 30.0, 60.0, 60.0)
    array([30.  , 11.04, 26.13, 47.54])
    """
    decay = float(np.exp(-dt / time_constant))
    held = -np.expm1(-dt / time_constant) * time_constant / dt
    drive = np.empty(values.size)
    if values.size:
        drive[0] = start
        drive[1:] = (1.0 - held) * values[1:] + (held - decay) * values[:-1]
    return accumulated(drive, decay)


def accumulated(drive: np.ndarray, decay: float) -> np.ndarray:
    """y[k] = decay y[k-1] + drive[k], y[-1] = 0; a block of times is one product with a triangle of powers."""
    out, before = np.empty(drive.size), 0.0
    triangle, first = _powers(decay)
    for at in range(0, drive.size, _BLOCK):
        n = min(_BLOCK, drive.size - at)
        part = np.zeros(_BLOCK)  # always a whole block: the same digits however many times follow
        part[:n] = drive[at:at + n]
        block = triangle @ part + before * first
        out[at:at + n] = block[:n]
        before = block[n - 1]
    return out


@lru_cache(maxsize=32)
def _powers(decay: float) -> tuple[np.ndarray, np.ndarray]:
    behind = np.subtract.outer(np.arange(_BLOCK), np.arange(_BLOCK))
    triangle = np.where(behind >= 0, decay ** np.maximum(behind, 0), 0.0)
    return triangle, decay ** np.arange(1.0, _BLOCK + 1.0)


def coloured(noise: np.ndarray, dt: float, time_constant: float) -> np.ndarray:
    """Noise of unit variance that forgets itself over ``time_constant`` [s], from independent ``noise``.

    The first values do not depend on how many follow.
    """
    decay = float(np.exp(-dt / time_constant))
    drive = noise * np.sqrt(1.0 - decay * decay)
    if noise.size:
        drive[0] = noise[0]
    return accumulated(drive, decay)
