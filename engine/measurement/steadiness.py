"""Is it settled? A trend test and a scatter test for each channel, over windows of a log.

Two tests are needed, because each is blind to what the other sees: a long slow ramp scatters little,
and a wild swing about a constant mean has no slope. All statistics come from cumulative sums, so a
million windows cost little more than a million readings. The sums are taken about local means, a
stretch of the log at a time: this keeps both their accuracy and the memory.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import IntFlag
from typing import NamedTuple

import numpy as np
from scipy.special import stdtr

from engine.measurement.given import number, series, shown
from engine.steam.errors import Fault, InputError

_MOST_CORRELATED = 0.95  # a larger lag-1 correlation cannot be told from a trend in one window


class Unsettled(IntFlag):
    """Why a window of a channel is not settled; several can hold at once."""

    TOO_FEW = 1  # readings missing, or fewer than asked
    GAP = 2  # a pause in the log
    DRIFT = 4  # the change over the window exceeds its limit
    SLOPE = 8  # the rate of change exceeds its limit
    SIGNIFICANT = 16  # the trend is real, and not negligible
    SCATTER = 32  # the standard deviation exceeds its limit


@dataclass(frozen=True)
class SteadyLimits:
    """What counts as settled for one channel, in its own SI unit. A limit that is None is not tested.

    Attributes:
        change: largest change over the window, |slope| times its duration
        slope: largest rate of change, unit per second
        scatter: largest standard deviation about the mean
        risk: also refuse a trend that is significant at this risk (Student's t, allowing for
            readings that follow one another); None leaves this test out
        negligible: change over the window that is too small to matter however significant; by
            default half of the tighter of ``change`` and ``slope``, or 0 without either
    """

    change: float | None = None
    slope: float | None = None
    scatter: float | None = None
    risk: float | None = 0.05
    negligible: float | None = None

    def __post_init__(self):
        faults = [Fault(f"limit of {name}", shown(value), "", "a number above 0, or None")
                  for name in ("change", "slope", "scatter") if (value := getattr(self, name)) is not None
                  and not 0 < number(value) < np.inf]
        if self.risk is not None and not 0 < number(self.risk) < 1:
            faults.append(Fault("risk", shown(self.risk), "", "a number between 0 and 1, or None"))
        if self.negligible is not None and not 0 <= number(self.negligible) < np.inf:
            faults.append(Fault("negligible change", shown(self.negligible), "", "a finite number, zero or more"))
        if faults:
            raise InputError(*faults)

    def too_small(self, duration):
        """Change over ``duration`` [s] below which a significant trend is let pass."""
        if self.negligible is not None:
            return self.negligible + 0 * duration
        allowed = [limit for limit in (self.change, None if self.slope is None else self.slope * duration)
                   if limit is not None]
        return 0.5 * np.minimum.reduce(np.broadcast_arrays(*allowed)) if allowed else 0 * duration


class Trend(NamedTuple):
    """Straight-line fit and scatter of one channel: floats for one window, arrays for many.

    ``n`` readings are present; ``slope`` [unit/s] has the standard uncertainty ``u_slope`` of
    independent readings (JCGM 100, H.3); ``change`` = |slope| ``duration``; ``scatter`` is the
    standard deviation about the mean; ``r1`` the correlation of each residual with the next;
    ``p_value`` the probability of so steep a slope by chance, allowing for ``r1``. Where fewer than
    three readings are present all but ``n`` and ``duration`` are NaN.
    """

    n: float | np.ndarray
    duration: float | np.ndarray
    mean: float | np.ndarray
    slope: float | np.ndarray
    u_slope: float | np.ndarray
    change: float | np.ndarray
    scatter: float | np.ndarray
    r1: float | np.ndarray
    p_value: float | np.ndarray


class Reason(NamedTuple):
    """One failed test: ``value`` against ``limit``, both in the channel's SI unit (for GAP in seconds,
    for TOO_FEW in readings, for SIGNIFICANT the change and what would be negligible)."""

    channel: str
    test: Unsettled
    value: float
    limit: float


def trend(time, values) -> Trend:
    """Fit one window: ``time`` [s] and ``values``, both shape (n,); missing values (NaN) are passed over.

    Raises InputError for fewer than three readings and for a time that does not run forward.

    >>> fit = trend([0, 60, 120, 180, 240], [400.0, 400.1, 400.0, 400.2, 400.2])
    >>> f"{fit.slope * 60:.3f} K/min, u = {fit.u_slope * 60:.3f} K/min"
    '0.050 K/min, u = 0.022 K/min'
    """
    time, channels = checked_log(time, {"values": values})
    y = channels["values"]
    if np.isfinite(y).sum() < 3:
        raise InputError(Fault("number of readings", int(np.isfinite(y).sum()), "", "3 or more",
                               why="two readings always lie on a straight line", hint="take more readings"))
    return Trend(*(float(a[0]) for a in window_trends(time, y, np.array([0]), np.array([len(y)]))))


def window_trends(time: np.ndarray, values: np.ndarray, first: np.ndarray, stop: np.ndarray) -> Trend:
    """Fit many windows of rows first:stop of one channel; arrays of the shape of ``first``.

    Accurate while the rows given are not very many more than those of the shortest window; over a
    whole log, ``windows.settled_windows`` sees to that.
    """
    there = np.isfinite(values)
    w = there.astype(float)
    t = np.where(there, time - time[len(time) // 2], 0.0)
    middle = values[there].mean() if there.any() else 0.0
    y = np.where(there, values - middle, 0.0)

    def total(terms: np.ndarray, last: np.ndarray = stop) -> np.ndarray:
        sums = np.concatenate(([0.0], np.cumsum(terms)))
        return sums[last] - sums[first]

    n = total(w)
    enough = n >= 3
    m = np.where(enough, n, 1.0)
    t_mean, y_mean = total(t) / m, total(y) / m
    tt = total(t * t) - m * t_mean**2
    ty = total(t * y) - m * t_mean * y_mean
    yy = np.maximum(total(y * y) - m * y_mean**2, 0.0)
    slope = np.divide(ty, tt, out=np.zeros_like(ty), where=enough & (tt > 0))
    rest = np.maximum(yy - slope * ty, 0.0)
    rest[rest <= 1e-12 * yy] = 0.0  # a perfect line, but for rounding
    variance = np.divide(rest, tt * (m - 2), out=np.zeros_like(rest), where=enough & (tt > 0))
    r1 = _lag_one(w, t, y, t_mean, y_mean, slope, rest, m, lambda terms: total(terms, np.maximum(stop - 1, first)))
    duration = time[stop - 1] - time[first]
    p_value = _p_value(np.abs(slope), np.sqrt(variance), m, r1)
    change, scatter = np.abs(slope) * duration, np.sqrt(yy / np.maximum(m - 1, 1.0))
    found = (y_mean + middle, slope, np.sqrt(variance), change, scatter, r1, p_value)
    return Trend(n, duration, *(np.where(enough, x, np.nan) for x in found))


def failed_tests(fit: Trend, limits: SteadyLimits, least: int) -> np.ndarray:
    """The ``Unsettled`` flags of each window, as integers: the tests of one channel.

    A window with fewer than ``least`` readings is TOO_FEW and otherwise untested.
    """
    few = ~(np.asarray(fit.n) >= least)
    flags = np.where(few, int(Unsettled.TOO_FEW), 0)

    def mark(test: Unsettled, failed) -> None:
        flags[~few & failed] |= int(test)

    if limits.change is not None:
        mark(Unsettled.DRIFT, ~(fit.change <= limits.change))
    if limits.slope is not None:
        mark(Unsettled.SLOPE, ~(np.abs(fit.slope) <= limits.slope))
    if limits.risk is not None:
        mark(Unsettled.SIGNIFICANT, (fit.p_value < limits.risk) & (fit.change > limits.too_small(fit.duration)))
    if limits.scatter is not None:
        mark(Unsettled.SCATTER, ~(fit.scatter <= limits.scatter))
    return flags


def measured(fit: Trend, limits: SteadyLimits, test: Unsettled, least: int) -> tuple[np.ndarray, np.ndarray]:
    """What a test compared: the value and its limit, for each window."""
    value, limit = {
        Unsettled.TOO_FEW: (fit.n, least),
        Unsettled.DRIFT: (fit.change, limits.change),
        Unsettled.SLOPE: (np.abs(fit.slope), limits.slope),
        Unsettled.SIGNIFICANT: (fit.change, limits.too_small(fit.duration)),
        Unsettled.SCATTER: (fit.scatter, limits.scatter),
    }[test]
    return np.broadcast_arrays(np.asarray(value, dtype=float), np.asarray(limit, dtype=float))


def checked_log(time, channels: Mapping[str, object]) -> tuple[np.ndarray, dict[str, np.ndarray]]:
    """Time and channels as arrays of one length; time finite and running forward, else InputError."""
    time = series("time", time)
    columns = {name: series(f"channel '{name}'", values) for name, values in channels.items()}
    faults = [Fault(f"channel '{name}'", f"shape {a.shape}", "", f"one value for each of the {time.size} times")
              for name, a in columns.items() if a.shape != time.shape]
    if time.ndim != 1:
        faults.append(Fault("time", f"shape {time.shape}", "", "one dimension"))
    elif len(time) and not (np.isfinite(time[0]) and (np.diff(time) > 0).all()):
        row = int(np.argmin(np.diff(time) > 0)) + 1 if np.isfinite(time[0]) else 0
        faults.append(Fault("time", float(time[row]), "s", "a time after the one before it", index=(row,),
                            hint="sort the log, and leave out stamps that are missing or doubled"))
    if faults:
        raise InputError(*faults)
    return time, columns


def _lag_one(w, t, y, t_mean, y_mean, slope, rest, m, total) -> np.ndarray:
    """Correlation of each residual with the next, within each window; 0 for a perfect line.

    Corrected for its bias in short series about a fitted line, E(r) = ρ - 2 (1 + 2 ρ)/n (from memory;
    the tests simulate it).
    """
    w0, w1 = w[:-1], w[1:]
    pairs = total(w0 * w1)

    def products(a, b, a_mean, b_mean):
        a0, b1 = a[:-1] * w1, b[1:] * w0
        return total(a[:-1] * b[1:]) - b_mean * total(a0) - a_mean * total(b1) + pairs * a_mean * b_mean

    lagged = (products(y, y, y_mean, y_mean) + slope**2 * products(t, t, t_mean, t_mean)
              - slope * (products(y, t, y_mean, t_mean) + products(t, y, t_mean, y_mean)))
    r = np.divide(lagged, rest, out=np.zeros_like(rest), where=rest > 0) * m / np.maximum(pairs, 1.0)
    return np.where(rest > 0, np.clip(r + 2 * (1 + 2 * r) / m, -1.0, 1.0), 0.0)


def _p_value(slope: np.ndarray, u: np.ndarray, n: np.ndarray, r1: np.ndarray) -> np.ndarray:
    """Two-sided, with the number of readings and the spread of the slope both corrected for ``r1``."""
    r = np.clip(r1, 0.0, _MOST_CORRELATED)
    worth = (1 - r) / (1 + r)
    dof = np.maximum(n * worth - 2, 1.0)
    wide = u / np.sqrt(worth)
    t = np.divide(slope, wide, out=np.where(slope > 0, np.inf, 0.0), where=wide > 0)
    return 2 * stdtr(dof, -t)
