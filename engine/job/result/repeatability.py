"""How several runs go together: do they differ by more than their own scatter explains?

Analysis of variance as in JCGM 100, H.5: where the runs agree within their scatter, that scatter
stands for all; where they do not, the spread between them does, with as many degrees of freedom as
there are runs less one. Differences between runs are then part of what is measured, whatever their
cause.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import inf, sqrt
from typing import NamedTuple

import numpy as np
from scipy.special import fdtrc

from engine.job.uncertainty import READINGS
from engine.measurement import Component

RISK = 0.05


class Repeatability(NamedTuple):
    """``within`` is the standard uncertainty of the mean by the runs' own scatter, ``between`` by their spread;
    ``p_value`` the chance of so much spread by scatter alone; ``component`` what enters the budget."""

    runs: int
    mean: float
    spread: float
    within: float
    between: float
    p_value: float
    differ: bool
    component: Component


def repeatability(runs: Sequence[tuple[float, Component | None]]) -> Repeatability | None:
    """Of runs as (quality, type A component of its mean); None for a single run.

    >>> from engine.measurement import type_a
    >>> runs = [(x, type_a("scatter", 0.0006, 30, 10)) for x in (0.9718, 0.9721, 0.9719)]
    >>> together = repeatability(runs)
    >>> together.differ, f"{together.within:.5f} {together.between:.5f}"
    (False, '0.00011 0.00009')
    """
    m = len(runs)
    if m < 2:
        return None
    x = np.array([value for value, _ in runs])
    own = [component for _, component in runs]
    spread = float(x.std(ddof=1))
    between = spread / sqrt(m)
    if any(component is None for component in own):  # single readings: their spread is all there is
        return _between(m, x, spread, 0.0, between, 0.0)
    variances = np.array([component.u**2 for component in own])
    dof = np.array([component.dof for component in own])
    within = float(sqrt(variances.sum())) / m
    if within == 0.0:
        return _between(m, x, spread, within, between, 0.0 if spread else 1.0)
    weighed = float(np.sum(variances**2 / dof))
    pooled = float(variances.sum()) ** 2 / weighed if weighed > 0 else inf  # Welch-Satterthwaite
    p_value = float(fdtrc(m - 1, min(pooled, 1e9), spread**2 / variances.mean()))
    if p_value < RISK:
        return _between(m, x, spread, within, between, p_value)
    component = Component("scatter within the runs", within, "t", pooled, group=READINGS)
    return Repeatability(m, float(x.mean()), spread, within, between, p_value, False, component)


def _between(m: int, x: np.ndarray, spread: float, within: float, between: float, p_value: float) -> Repeatability:
    component = Component("differences between the runs", between, "t", m - 1, group=READINGS)
    return Repeatability(m, float(x.mean()), spread, within, between, p_value, True, component)
