"""Choked flow through a short opening: the mass flux of homogeneous equilibrium."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.calorimeter.checks import door, refuse
from engine.steam import P_TRIPLE
from engine.steam.arrays import give_back, in_blocks, refuse_outside
from engine.steam.errors import InputError
from engine.steam.saturation import saturated_kernel

P_LEAST = 1100.0  # Pa: 0.585 of it, the greatest ratio of dry steam, is still above the triple pressure


class CriticalFlow(NamedTuple):
    """Choked flow: mass flux [kg/(m² s)] and pressure at the throat over line pressure [1]."""

    mass_flux: float | np.ndarray
    pressure_ratio: float | np.ndarray


def critical_flow(p_line, x) -> CriticalFlow:
    """Choked flow of wet or dry saturated steam by homogeneous equilibrium.

    The greatest rho sqrt(2 (h0 - h)) along the isentrope from (p_line, x); the steam stays in
    equilibrium and both phases move together. ``p_line`` [Pa, absolute], at least 1100 Pa so that the
    throat is above the triple pressure; ``x`` 0..1; any shapes. Raises InputError for any input out of range.

    >>> flow = critical_flow(10e5, 1.0)
    >>> round(flow.mass_flux), round(flow.pressure_ratio, 3)
    (1444, 0.577)
    """
    named, scalar = door(p_line=p_line, x=x)
    refuse(named)
    if faults := refuse_outside("p_line", named["p_line"], named["p_line"] >= P_LEAST, f"at least {P_LEAST:g} Pa",
                                why="the throat would be below the triple pressure, where ice forms",
                                hint="check the unit, and that the pressure was meant absolute"):
        raise InputError(*faults)
    flux, ratio = in_blocks(_critical, 2, *named.values())
    return CriticalFlow(give_back(flux, scalar), give_back(ratio, scalar))


def critical_mass_flux(p_line, x):
    """Mass flux of choked steam [kg/(m² s)]; see ``critical_flow``.

    >>> round(critical_mass_flux(10e5, 0.98), 1)
    1457.5
    """
    return critical_flow(p_line, x).mass_flux


def _critical(p_line: np.ndarray, x: np.ndarray):
    """Zoom in on the greatest flux: three grids, then the vertex of a parabola."""
    sat = saturated_kernel(p_line)
    h0, s0 = (sat[k] + x * (sat[k + 1] - sat[k]) for k in (1, 3))
    low, high = np.full(p_line.shape, 0.3), np.full(p_line.shape, 0.9999)
    share = np.linspace(0.0, 1.0, 13)
    rows = np.arange(p_line.size)
    for _ in range(3):
        ratio = low[:, None] + (high - low)[:, None] * share
        flux = _isentropic_flux(p_line, ratio, h0, s0)
        top = np.clip(flux.argmax(axis=1), 1, share.size - 2)
        low, high = ratio[rows, top - 1], ratio[rows, top + 1]
    a, b, c = (flux[rows, top + k] for k in (-1, 0, 1))
    curve = a - 2 * b + c
    shift = np.where(curve < 0, 0.5 * (a - c) / np.where(curve < 0, curve, 1.0), 0.0)
    return b - 0.25 * (a - c) * shift, ratio[rows, top] + shift * 0.5 * (high - low)


def _isentropic_flux(p_line, ratio, h0, s0):
    n = ratio.shape[1]
    T, h_f, h_g, s_f, s_g, v_f, v_g = (a.reshape(ratio.shape) for a in
                                       saturated_kernel(np.maximum(p_line[:, None] * ratio, P_TRIPLE).ravel()))
    x = (np.broadcast_to(s0[:, None], (s0.size, n)) - s_f) / (s_g - s_f)
    h, v = h_f + x * (h_g - h_f), v_f + x * (v_g - v_f)
    return np.sqrt(np.maximum(2.0 * (h0[:, None] - h), 0.0)) / v
