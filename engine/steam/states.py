"""Steam states: vapour from (p, T), wet or superheated steam from (p, h) and from (p, s).

The phase is always decided by comparing with the saturated states of the forward equations; the
temperature of superheated steam is then searched on those same equations, so that a state found
from (p, h) gives back exactly that h.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np

from engine.steam import if97
from engine.steam.arrays import at_the_door, fault, in_blocks, refuse_outside
from engine.steam.errors import InputError
from engine.steam.saturation import p_in_range, refuse_p, saturated_kernel
from engine.steam.status import SteamStatus

T_MAX = 1073.15  # K, upper limit of region 2
# A reading typed as the saturation temperature itself must count as saturated: one part in 1e12 is
# the rounding of eq. (31), far below anything a thermometer can tell.
_ROUNDING = 1e-12


class Vapour(NamedTuple):
    """Vapour at (p, T): h [J/kg], s [J/(kg K)], v [m³/kg], cp [J/(kg K)], sound speed [m/s], status."""

    h: float | np.ndarray
    s: float | np.ndarray
    v: float | np.ndarray
    cp: float | np.ndarray
    sound_speed: float | np.ndarray
    status: SteamStatus | np.ndarray = SteamStatus.SUPERHEATED


class State(NamedTuple):
    """A state of wet or superheated steam. Superheated steam is all vapour, so its ``x`` is 1."""

    T: float | np.ndarray
    x: float | np.ndarray
    h: float | np.ndarray
    s: float | np.ndarray
    v: float | np.ndarray
    status: SteamStatus | np.ndarray


def vapour(p, T) -> Vapour:
    """Vapour properties at ``p`` [Pa, absolute] and ``T`` [K], broadcast together.

    Never answers below saturation: there the status is LIQUID and the values NaN, since a reading
    a microkelvin too low would turn 2675 kJ/kg into 419. A scalar call raises InputError instead.
    Valid from 611.657 Pa to 16.529 MPa and up to 1073.15 K. Source: IAPWS R7-97(2012), region 2.

    >>> round(vapour(3500.0, 300.0).h, 2)  # Table 15
    2549911.45
    """
    (p, T), scalar = at_the_door(p=p, T=T)
    p_ok = p_in_range(p)
    T_sat = in_blocks(lambda a: (if97.saturation_T(a),), 1, np.where(p_ok, p, 1e5))[0]
    T_ok, above = (T > 0) & (T <= T_MAX + 1e-9), T_sat * (1 - _ROUNDING) <= T
    usable = p_ok & T_ok & above
    if scalar and not usable.all():
        faults = refuse_p(p) + refuse_outside("T", T, T_ok, f"at most {T_MAX} K", why="the vapour equations end there")
        raise InputError(*faults or [_below_saturation(float(T), float(T_sat))])
    values = in_blocks(if97.vapour_properties, 5, np.where(usable, p, 1e5), np.where(usable, T, 400.0))
    if scalar:
        return Vapour(*(float(v) for v in values))
    status = np.select([np.isnan(p) | np.isnan(T), ~(p_ok & T_ok), ~above],
                       [SteamStatus.MISSING, SteamStatus.OUT_OF_RANGE, SteamStatus.LIQUID], SteamStatus.SUPERHEATED)
    return Vapour(*(np.where(usable, v, np.nan) for v in values), status)


def _below_saturation(T: float, T_sat: float):
    return fault("T", T, f"at least {T_sat:.7g} K, the saturation temperature",
                 why="below it there is liquid, and vapour properties do not exist",
                 hint="check the pressure, and that it was meant absolute and not gauge")


def state_ph(p, h) -> State:
    """Wet or superheated state at ``p`` [Pa, absolute] and ``h`` [J/kg], broadcast together.

    Returns T [K], x, h, s [J/(kg K)], v [m³/kg] and a status: WET, SUPERHEATED, or LIQUID (h below
    that of saturated liquid), OUT_OF_RANGE, MISSING with NaN values. Scalar calls raise InputError.

    >>> state = state_ph(1e5, 2.6e6)
    >>> round(state.x, 4), state.status.name
    (0.9669, 'WET')
    """
    return _state("h", p, h, 1, if97.vapour_h_cp, lambda cp, T: cp)


def state_ps(p, s) -> State:
    """Wet or superheated state at ``p`` [Pa, absolute] and ``s`` [J/(kg K)]; otherwise as ``state_ph``.

    >>> round(state_ps(1e5, 7000.0).x, 4)
    0.9408
    """
    return _state("s", p, s, 3, if97.vapour_s_cp, lambda cp, T: cp / T)


def search_T(p: np.ndarray, target: np.ndarray, T: np.ndarray, kernel: Callable, slope: Callable) -> np.ndarray:
    """Newton search for the vapour temperature at which ``kernel`` gives ``target`` (1-d, from T upwards).

    h and s rise with T and the slope falls, so from saturation every step stays short of the answer
    and the search cannot overshoot. Elements that would need more than ``T_MAX`` stop there.
    """
    T = T.copy()
    for _ in range(60):
        value, cp = kernel(p, T)
        step = (target - value) / slope(cp, T)
        T = np.minimum(T + step, T_MAX + 1.0)
        if not (np.abs(step) > 1e-10 * T).any() or (T > T_MAX).all():
            break
    return T


def search_T_ph(p: np.ndarray, h: np.ndarray, T: np.ndarray) -> np.ndarray:
    """Vapour temperature at which the enthalpy is ``h`` (1-d arrays), searched upwards from ``T``."""
    return search_T(p, h, T, if97.vapour_h_cp, lambda cp, T: cp)


def state_kernel(p: np.ndarray, target: np.ndarray, column: int, kernel: Callable, slope: Callable):
    """T, x, h, s, v over 1-d arrays in range; T > T_MAX and x < 0 mark elements without a state."""
    sat = saturated_kernel(p)
    f, g = sat[column], sat[column + 1]
    x = (target - f) / (g - f)
    T = sat[0].copy()
    h, s, v = (sat[k] + x * (sat[k + 1] - sat[k]) for k in (1, 3, 5))
    hot = x > 1.0
    if hot.any():
        T[hot] = search_T(p[hot], target[hot], T[hot], kernel, slope)
        h[hot], s[hot], v[hot] = if97.vapour_hsv(p[hot], T[hot])
        x[hot] = 1.0
    return T, x, h, s, v, hot.astype(float)


def _state(name: str, p, value, column: int, kernel: Callable, slope: Callable) -> State:
    (p, value), scalar = at_the_door(**{"p": p, name: value})
    p_ok, finite = p_in_range(p), np.isfinite(value)
    safe = p_ok & finite
    T, x, h, s, v, hot = in_blocks(lambda a, b: state_kernel(a, b, column, kernel, slope), 6,
                                   np.where(safe, p, 1e5), np.where(safe, value, (2e6, 5e3)[name == "s"]))
    liquid, beyond = safe & (x < 0), T > T_MAX
    if scalar and not (safe & ~liquid & ~beyond).all():
        raise InputError(*(refuse_p(p) + refuse_outside(name, value, finite & ~liquid & ~beyond,
                                                        f"a value between saturated liquid and {T_MAX} K",
                                                        why="only wet and superheated steam are covered")))
    if scalar:
        status = SteamStatus.SUPERHEATED if hot else SteamStatus.WET
        return State(*(float(a) for a in (T, x, h, s, v)), status)
    status = np.select([np.isnan(p) | np.isnan(value), ~safe | beyond, liquid, hot > 0],
                       [SteamStatus.MISSING, SteamStatus.OUT_OF_RANGE, SteamStatus.LIQUID, SteamStatus.SUPERHEATED],
                       SteamStatus.WET)
    usable = status <= SteamStatus.SUPERHEATED
    return State(*(np.where(usable, a, np.nan) for a in (T, x, h, s, v)), status)
