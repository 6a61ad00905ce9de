"""Steam states: vapour from (p, T), wet or superheated steam from (p, h) and from (p, s).

The phase is always decided by comparing with the saturated states of the forward equations; the
temperature of superheated steam is then searched on those same equations, so that a state found
from (p, h) gives back that h.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np

from engine.steam import if97
from engine.steam.arrays import at_the_door, fault, in_blocks, refuse_outside
from engine.steam.errors import InputError
from engine.steam.quantities import QUANTITIES
from engine.steam.saturation import p_in_range, refuse_p, saturated, saturated_kernel
from engine.steam.status import SteamStatus

T_MAX = 1073.15  # K, upper limit of region 2
# A reading typed as the saturation temperature itself must count as saturated: one part in 1e12 is
# the rounding of eq. (31), far below anything a thermometer can tell.
_ROUNDING = 1e-12
LAST_STEP = 3e-3  # K
_T_CEILING = T_MAX + 1e-9  # the same, with room for the rounding of a temperature that was searched


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
    *values, status = in_blocks(_vapour_block, 6, p, T)
    if not scalar:
        return Vapour(*values, status.astype(np.int8))
    if status > SteamStatus.SUPERHEATED:
        faults = refuse_p(p) + refuse_outside("T", T, _T_in_range(T), f"more than 0 and at most {T_MAX} K",
                                              why="the vapour equations end there", hint="check the unit: °C or °F")
        raise InputError(*faults or [_below_saturation(float(T), float(if97.saturation_T(p)))])
    return Vapour(*map(float, values), SteamStatus(int(status)))


def _T_in_range(T: np.ndarray) -> np.ndarray:
    return (T > 0) & (T <= _T_CEILING)


def _vapour_block(p: np.ndarray, T: np.ndarray) -> tuple[np.ndarray, ...]:
    """The properties over a 1-d block, NaN where there is no vapour, and the status."""
    inside = p_in_range(p) & _T_in_range(T)
    p_safe = np.where(inside, p, 1e5)
    usable = inside & (if97.saturation_T(p_safe) * (1 - _ROUNDING) <= T)
    values = if97.vapour_properties(p_safe, np.where(usable, T, T_MAX))
    status = np.select([usable, inside, np.isnan(p) | np.isnan(T)],
                       [SteamStatus.SUPERHEATED, SteamStatus.LIQUID, SteamStatus.MISSING], SteamStatus.OUT_OF_RANGE)
    return *(np.where(usable, v, np.nan) for v in values), status


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

    h and s rise with T everywhere. Near saturation their slope falls, so that steps stay short of the
    answer; far above it the slope rises and a step may go a little beyond, from where the next ones
    come back. The error after a step is at most 0.05 of its square (per kelvin), so a step below
    ``LAST_STEP`` leaves less than 5e-7 K. Elements that would need more than ``T_MAX`` stop a kelvin
    above it.
    """
    T, ceiling = T.copy(), T_MAX + 1.0
    for _ in range(60):
        value, cp = kernel(p, T)
        step = (target - value) / slope(cp, T)
        pending = (np.abs(step) > LAST_STEP) & ((ceiling > T) | (step < 0))  # at the ceiling only the way down is left
        T = np.minimum(T + step, ceiling)
        if not pending.any():
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
    x[np.abs(x) <= _ROUNDING] = 0.0
    T = sat[0].copy()
    h, s, v = (sat[k] + x * (sat[k + 1] - sat[k]) for k in (1, 3, 5))
    hot = x > 1.0
    if hot.any():
        T[hot] = search_T(p[hot], target[hot], T[hot], kernel, slope)
        h[hot], s[hot], v[hot] = if97.vapour_hsv(p[hot], T[hot])
        x[hot] = 1.0
    return T, x, h, s, v, hot


def _state(name: str, p, value, column: int, kernel: Callable, slope: Callable) -> State:
    def block(p: np.ndarray, value: np.ndarray):
        inside = p_in_range(p) & np.isfinite(value)
        # the stand-in is liquid, which costs no search
        *values, hot = state_kernel(np.where(inside, p, 1e5), np.where(inside, value, 0.0), column, kernel, slope)
        T, x = values[:2]
        status = np.select(
            [np.isnan(p) | np.isnan(value), ~inside | (T > _T_CEILING), x < 0, hot],
            [SteamStatus.MISSING, SteamStatus.OUT_OF_RANGE, SteamStatus.LIQUID, SteamStatus.SUPERHEATED],
            SteamStatus.WET)
        return *(np.where(status <= SteamStatus.SUPERHEATED, v, np.nan) for v in values), status

    (p, value), scalar = at_the_door(**{"p": p, name: value})
    *values, status = in_blocks(block, 6, p, value)
    if not scalar:
        return State(*values, status.astype(np.int8))
    if status > SteamStatus.SUPERHEATED:
        faults = refuse_p(p)
        if not faults:
            faults = [fault(name, float(value), _allowed(name, float(p)),
                            why=f"only wet and superheated steam are covered, up to {T_MAX} K",
                            hint="check the unit and the pressure")]
        elif not np.isfinite(value):
            faults.append(fault(name, float(value), "a number"))
        raise InputError(*faults)
    return State(*map(float, values), SteamStatus(int(status)))


def _allowed(name: str, p: float) -> str:
    """h or s from saturated liquid to the hottest vapour at a pressure in range, in words."""
    lowest, highest = getattr(saturated(p), f"{name}_f"), getattr(vapour(p, T_MAX), name)
    return f"{lowest:.7g} to {highest:.7g} {QUANTITIES[name].unit} at this pressure"
