"""The uncertainty drawn along the process: the paths of a quality smaller and larger by U."""

from __future__ import annotations

import numpy as np

from engine.calorimeter import Path, isenthalpic_path_at
from engine.job.assessment import Assessment
from engine.job.assessment.assessment import POINTS
from engine.job.assessment.heating import heating_path
from engine.steam import T_MAX, saturated, vapour


def band_of(a: Assessment, U: float) -> tuple[Path, Path]:
    """Paths of the wetter and of the drier steam, by U of the quality in the line; never wetter than water nor
    hotter than the property formulation goes.

    Behind a separator they are paths of the throttled steam, as the assessment's own is; with a heater
    both are heated by the same power.

    >>> from engine.job.assessment import assess
    >>> from engine.job.case.demo import DEMO
    >>> wetter, drier = band_of(assess(DEMO), 0.004)
    >>> round(float(drier.x[0] - wetter.x[0]), 4)
    0.008
    """
    p, h = float(a.path.p[0]), float(a.path.h[0])
    half = U / a.in_quality(1.0)
    ends = np.array([max(h - half, saturated(p).h_f), min(h + half, vapour(p, T_MAX).h)])
    if a.heating is not None:
        wetter, drier = (heating_path(p, float(end), a.heating) for end in ends)
        return wetter, drier
    both = isenthalpic_path_at(p, ends, float(a.path.p[-1]), points=POINTS)
    return both.row(0), both.row(1)
