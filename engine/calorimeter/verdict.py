"""From an enthalpy found for the line to what may be said of it: the end that all modes share."""

from __future__ import annotations

import numpy as np

from engine.calorimeter.status import Status
from engine.steam import saturated, state_ph

_ROUNDING = 1e-9  # a quality this little above 1 is the rounding of a dry line, not superheat


def verdict(p_line, h, wet, superheat, least_superheat, missing, usable) -> tuple[np.ndarray, ...]:
    """x, h_line, superheat, line_superheat, x_bound and status over equally shaped 1-d arrays.

    ``h`` is the line's enthalpy [J/kg]; where ``wet`` (the steam at the thermometer was not
    superheated) it is an upper bound, and so is the quality. Elements not ``usable`` must carry
    harmless values. The order of the questions is that of ``Status`` from the end: what is missing
    or out of range first, then wet, then a superheated line, then a thin margin.
    """
    line = saturated(p_line)
    x = (h - line.h_f) / (line.h_g - line.h_f)
    hot = usable & ~wet & (x > 1 + _ROUNDING)
    T_hot = state_ph(p_line, np.where(hot, h, line.h_g)).T  # NaN beyond the range of the steam equations
    status = np.select(
        [missing, ~usable | ~(x >= 0) | np.isnan(T_hot), wet, hot, superheat < least_superheat],
        [Status.MISSING, Status.OUT_OF_RANGE, Status.NOT_SUPERHEATED, Status.LINE_SUPERHEATED, Status.THIN_MARGIN],
        Status.OK)
    answered, within = status <= Status.THIN_MARGIN, status < Status.OUT_OF_RANGE
    return (np.where(answered, x, np.nan), np.where(within & ~wet, h, np.nan), np.where(within, superheat, np.nan),
            np.where(within, np.where(hot, T_hot - line.T, 0.0), np.nan),
            np.where(status == Status.NOT_SUPERHEATED, x, np.nan), status)
