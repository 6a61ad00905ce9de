"""Saturation both ways, saturated liquid and vapour, and the whole dome for a diagram."""

from __future__ import annotations

from functools import cache
from typing import NamedTuple

import numpy as np
from iapws import IAPWS97

from engine.steam import if97
from engine.steam.arrays import at_the_door, give_back, in_blocks, refuse_outside
from engine.steam.errors import InputError
from engine.steam.status import SteamStatus

T_TRIPLE, P_TRIPLE = 273.16, 611.657  # K, Pa: triple point (IAPWS R7-97, eq. 9 and section 8)
T_CRITICAL, P_CRITICAL = 647.096, 22.064e6  # K, Pa: critical point (IAPWS R7-97, eqs. 2 and 3)
T_SAT_MAX = 623.15  # K: above it saturation lies in region 3
P_SAT_MAX = float(if97.saturation_p(np.array([T_SAT_MAX]))[0])  # 16.529 MPa
_P_LIMIT = f"{P_TRIPLE:g} Pa to {P_SAT_MAX / 1e6:.5g} MPa absolute"


class Saturated(NamedTuple):
    """Saturated liquid (f) and vapour (g) at one pressure; ``status`` is WET where there is an answer."""

    T: float | np.ndarray
    h_f: float | np.ndarray
    h_g: float | np.ndarray
    s_f: float | np.ndarray
    s_g: float | np.ndarray
    v_f: float | np.ndarray
    v_g: float | np.ndarray
    status: SteamStatus | np.ndarray = SteamStatus.WET


def p_in_range(p: np.ndarray) -> np.ndarray:
    """Where saturation lies in regions 1 and 2 (False for NaN)."""
    return (p >= P_TRIPLE * (1 - 1e-12)) & (p <= P_SAT_MAX * (1 + 1e-12))


def refuse_p(p: np.ndarray, name: str = "p"):
    """Faults for pressures without a saturation state here."""
    return refuse_outside(name, p, p_in_range(p), _P_LIMIT, why="the saturation properties used here end there",
                          hint="check the unit, and that the pressure was meant absolute and not gauge")


def saturation_temperature(p):
    """Saturation temperature [K] at pressure ``p`` [Pa, absolute], any shape.

    IAPWS R7-97(2012) eq. (31). Raises InputError outside 611.657 Pa .. 16.529 MPa.

    >>> saturation_temperature(1e6)  # Table 36
    453.03563239
    """
    (p,), scalar = at_the_door(p=p)
    if faults := refuse_p(p):
        raise InputError(*faults)
    return give_back(in_blocks(lambda a: (if97.saturation_T(a),), 1, p)[0], scalar)


def saturation_pressure(T):
    """Saturation pressure [Pa, absolute] at temperature ``T`` [K], any shape.

    IAPWS R7-97(2012) eq. (30). Raises InputError outside 273.16 .. 623.15 K.

    >>> saturation_pressure(500.0)  # Table 35
    2638897.76
    """
    (T,), scalar = at_the_door(T=T)
    faults = refuse_outside("T", T, (T >= T_TRIPLE - 1e-9) & (T <= T_SAT_MAX + 1e-9), f"{T_TRIPLE} to {T_SAT_MAX} K",
                            why="the saturation properties used here end there", hint="check the unit")
    if faults:
        raise InputError(*faults)
    return give_back(in_blocks(lambda a: (if97.saturation_p(a),), 1, T)[0], scalar)


def saturated_kernel(p: np.ndarray) -> tuple[np.ndarray, ...]:
    """T, h_f, h_g, s_f, s_g, v_f, v_g over a 1-d block of pressures in range (unchecked)."""
    T = if97.saturation_T(p)
    h_f, s_f, v_f = if97.liquid_hsv(p, T)
    h_g, s_g, v_g = if97.vapour_hsv(p, T)
    return T, h_f, h_g, s_f, s_g, v_f, v_g


def saturated(p) -> Saturated:
    """Saturated liquid and vapour at ``p`` [Pa, absolute], any shape.

    Returns T [K], h_f, h_g [J/kg], s_f, s_g [J/(kg K)], v_f, v_g [m³/kg] and a status per element
    (values are NaN where it is not WET). A scalar outside 611.657 Pa .. 16.529 MPa raises InputError.
    Source: IAPWS R7-97(2012), regions 1, 2 and 4.

    >>> round(saturated(1e6).h_g / 1e3, 1)  # kJ/kg
    2777.1
    """
    (p,), scalar = at_the_door(p=p)
    if scalar and (faults := refuse_p(p)):
        raise InputError(*faults)
    *values, status = in_blocks(_saturated_block, 8, p)
    if scalar:
        return Saturated(*map(float, values))
    return Saturated(*values, status.astype(np.int8))


def _saturated_block(p: np.ndarray) -> tuple[np.ndarray, ...]:
    """The saturated states over a 1-d block, NaN out of range, and the status."""
    inside = p_in_range(p)
    values = saturated_kernel(np.where(inside, p, 1e5))
    status = np.select([inside, np.isnan(p)], [SteamStatus.WET, SteamStatus.MISSING], SteamStatus.OUT_OF_RANGE)
    return *(np.where(inside, v, np.nan) for v in values), status


class Dome(NamedTuple):
    """Saturation from the triple to the critical point, along one array of pressures."""

    p: np.ndarray
    T: np.ndarray
    h_f: np.ndarray
    h_g: np.ndarray
    s_f: np.ndarray
    s_g: np.ndarray
    v_f: np.ndarray
    v_g: np.ndarray


@cache
def dome() -> Dome:
    """The whole dome for a diagram: regions 1 and 2 here, region 3 (above 623.15 K) from ``iapws``."""
    T = np.linspace(T_TRIPLE, T_SAT_MAX, 160)
    p = np.clip(if97.saturation_p(T), P_TRIPLE, P_SAT_MAX)
    lower = np.vstack([p, *saturated_kernel(p)])
    upper = []
    # closer together towards the critical point, where the dome is flat
    for t in T_CRITICAL - (T_CRITICAL - T_SAT_MAX) * np.linspace(1, 0, 14)[1:-1] ** 2:
        f, g = IAPWS97(T=float(t), x=0), IAPWS97(T=float(t), x=1)
        upper.append((f.P * 1e6, float(t), f.h * 1e3, g.h * 1e3, f.s * 1e3, g.s * 1e3, f.v, g.v))
    top = IAPWS97(T=T_CRITICAL, x=0)
    upper.append((P_CRITICAL, T_CRITICAL, top.h * 1e3, top.h * 1e3, top.s * 1e3, top.s * 1e3, top.v, top.v))
    rows = np.hstack([lower, np.array(upper).T])
    rows.setflags(write=False)
    return Dome(*rows)
