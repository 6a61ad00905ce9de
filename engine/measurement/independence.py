"""How many independent readings is a series worth?

Readings that follow one another faster than the process forgets repeat each other: logging faster
adds rows, not knowledge. The scatter of the mean is that of ``n_eff`` independent readings.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.measurement.given import series as numbers
from engine.steam.errors import Fault, InputError

_LONG = 50  # readings from which the whole correlation function can be trusted beside its first value


class Independence(NamedTuple):
    """Worth of ``n`` readings, by two estimates.

    ``r1`` is the correlation of each reading with the next. ``by_first`` supposes that the
    correlation fades in proportion from there (a first-order process): n (1 - r1)/(1 + r1).
    ``by_sum`` adds up the correlations as they are found, n/(1 + 2 Σ ρ), and sees slow swings that
    noise hides from r1. ``n_eff`` is the smaller of the two in a series of 50 or more, else
    ``by_first``.

    All lie from 1 to n. Not above n: readings that alternate would make the mean better than that of
    independent ones, but so few logs really do that it is taken for chance. Not below 1: a series
    that never changes (a stuck channel, a coarse display) has still been read once.
    """

    n: int
    r1: float
    by_first: float
    by_sum: float
    n_eff: float


def effective_number(series) -> Independence:
    """Effective number of independent readings of an evenly logged series, shape (n,).

    Missing readings (NaN) are left out. A series should be settled: a trend looks like correlation
    without end. Raises InputError for fewer than three readings.

    r1 is corrected for its bias in short series, E(r) = ρ - (1 + 4 ρ)/n (Kendall 1954, from memory);
    the sum stops at the first pair of correlations that is not positive (initial positive sequence,
    Geyer 1992, from memory).

    >>> y = np.sin(np.arange(200) / 10)  # smooth: far from 200 independent readings
    >>> bool(effective_number(y).n_eff < 10)
    True
    """
    y = numbers("series", series).ravel()
    y = y[np.isfinite(y)]
    n = len(y)
    if n < 3:
        raise InputError(Fault("number of readings", n, "", "3 or more",
                               why="a shorter series says nothing about its correlation", hint="take more readings"))
    largest = np.abs(y).max()
    y = y - y.mean()
    if np.abs(y).max() <= 1e-12 * largest:
        return Independence(n, 1.0, 1.0, 1.0, 1.0)
    rho = _correlations(y)
    r1 = float(np.clip(rho[1] + (1 + 4 * rho[1]) / n, -1.0, 1.0))
    by_first = _within(n * (1 - r1) / (1 + r1) if r1 > -1 else n, n)
    by_sum = _within(n / _integrated(rho), n)
    return Independence(n, r1, by_first, by_sum, min(by_first, by_sum) if n >= _LONG else by_first)


def _correlations(y: np.ndarray) -> np.ndarray:
    """Correlation at every lag of a series with mean zero, by its power spectrum."""
    size = 1 << (2 * len(y) - 1).bit_length()
    spectrum = np.fft.rfft(y, size)
    covariance = np.fft.irfft(spectrum.real**2 + spectrum.imag**2, size)[:len(y)]
    return covariance / covariance[0]


def _integrated(rho: np.ndarray) -> float:
    """1 + 2 Σ ρ up to where neighbouring pairs stop being positive."""
    even = len(rho) // 2 * 2
    pairs = rho[:even].reshape(-1, 2).sum(axis=1)
    ended = np.flatnonzero(pairs <= 0)
    return max(2 * float(pairs[:ended[0] if len(ended) else None].sum()) - 1, 1e-9)


def _within(value: float, n: int) -> float:
    return float(min(max(value, 1.0), n))
