"""Readings that lie apart: flagged by two tests, deleted by neither.

The modified Thompson tau test asks of each reading whether it lies too far out at the given risk,
so on long clean runs it nearly always flags something. Grubbs' test asks whether the farthest
reading is too far out for the whole run. Both suppose normal scatter about a constant mean: apply
them to a settled window. Removing a reading takes a person and a physical reason.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from scipy.special import stdtrit

from engine.measurement.given import number, series, shown
from engine.steam.arrays import give_back
from engine.steam.errors import Fault, InputError

SIDES = ("both", "high", "low")
MOST_READINGS = 1e9


class Outliers(NamedTuple):
    """Both tests of one run.

    ``distance`` is |reading - mean|/s for each reading, zero where it is missing (``used`` is False)
    or where all are equal. ``tau`` and ``grubbs`` are the critical distances; ``by_tau`` and
    ``by_grubbs`` mark what lies beyond (Grubbs: the farthest reading, or none). ``mean`` and ``s``
    are of all readings used, ``mean_kept`` and ``s_kept`` without those that are marked by either.
    """

    distance: np.ndarray
    used: np.ndarray
    tau: float
    grubbs: float
    by_tau: np.ndarray
    by_grubbs: np.ndarray
    mean: float
    s: float
    mean_kept: float
    s_kept: float


def thompson_tau(n, risk: float = 0.05):
    """Critical distance of the modified Thompson tau test, in standard deviations, for ``n`` readings.

    tau = t (n - 1)/(√n √(n - 2 + t²)) with Student's t at n - 2 degrees of freedom and risk/2 in
    each tail (ASME PTC 19.1). ``risk`` is for each reading, not for the run.

    >>> round(thompson_tau(10), 4)
    1.7984
    """
    n, scalar = _counts(n, risk)
    t = -stdtrit(n - 2, risk / 2)
    return give_back(t * (n - 1) / np.sqrt(n * (n - 2 + t * t)), scalar)


def grubbs_critical(n, risk: float = 0.05, *, side: str = "both"):
    """Critical distance of Grubbs' test, in standard deviations, for ``n`` readings.

    G = (n - 1)/√n · √(t²/(n - 2 + t²)) with Student's t at n - 2 degrees of freedom and
    risk/(2n) in the tail, or risk/n when only the ``side`` "high" or "low" is tested
    (NIST/SEMATECH e-Handbook, 1.3.5.17.1). ``risk`` is for the whole run.

    >>> round(grubbs_critical(8, side="high"), 3)
    2.032
    """
    n, scalar = _counts(n, risk)
    _check_side(side)
    t = -stdtrit(n - 2, risk / (2 * n if side == "both" else n))
    return give_back((n - 1) / np.sqrt(n) * np.sqrt(t * t / (n - 2 + t * t)), scalar)


def flag_outliers(readings, risk: float = 0.05, *, side: str = "both") -> Outliers:
    """Test a run of readings, shape (n,), once. Missing readings (NaN) are passed over.

    ``side`` is for Grubbs' test. Raises InputError for fewer than three readings: of two, neither
    can be called the wrong one.

    >>> got = flag_outliers([199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57])
    >>> got.by_grubbs.nonzero()[0], round(float(got.distance.max()), 6)
    (array([7]), 2.468765)
    """
    y = series("readings", readings).ravel()
    used = np.isfinite(y)
    n = int(used.sum())
    tau, grubbs = thompson_tau(n, risk), grubbs_critical(n, risk, side=side)
    mean, s = float(y[used].mean()), float(y[used].std(ddof=1))
    apart = np.where(used, y - mean, 0.0)
    if s <= 4 * np.finfo(float).eps * abs(mean):  # all equal but for rounding
        apart[:] = 0.0
        s = 0.0
    distance = np.abs(apart) / (s or 1.0)
    tested = {"both": distance, "high": apart / (s or 1.0), "low": -apart / (s or 1.0)}[side]
    by_tau = distance > tau
    by_grubbs = np.zeros(len(y), dtype=bool)
    farthest = int(tested.argmax())
    by_grubbs[farthest] = tested[farthest] > grubbs
    kept = y[used & ~(by_tau | by_grubbs)]  # never empty: not all readings can lie far from their mean
    return Outliers(distance, used, tau, grubbs, by_tau, by_grubbs, mean, s, float(kept.mean()),
                    float(kept.std(ddof=1)) if len(kept) > 1 else 0.0)


def _counts(n, risk: float) -> tuple[np.ndarray, bool]:
    n = series("number of readings", n)
    faults, enough = [], (n >= 3) & (n <= MOST_READINGS)
    if not enough.all():
        few = float(n[~enough].flat[0])
        limit = "3 or more" if few < 3 else f"3 to {MOST_READINGS:g}"
        faults.append(Fault("number of readings", int(few) if few.is_integer() else few, "", limit,
                            why="of two readings neither can be called the wrong one", hint="take more readings"))
    if not 1e-12 <= number(risk) < 1:
        faults.append(Fault("risk", shown(risk), "", "a number between 0 and 1, such as 0.05; 1e-12 at least"))
    if faults:
        raise InputError(*faults)
    return n, n.ndim == 0


def _check_side(side: str) -> None:
    if not isinstance(side, str) or side not in SIDES:
        raise InputError(Fault("side", shown(side), "", "one of: " + ", ".join(SIDES)))
