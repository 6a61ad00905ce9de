"""Wet steam in the line: saturated liquid and vapour in the proportion of the quality."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.calorimeter.rig_inputs import admit
from engine.steam import saturated
from engine.steam.arrays import give_back


class WetSteam(NamedTuple):
    """Specific enthalpy [J/kg], entropy [J/(kg K)] and volume [m³/kg] of wet steam."""

    h: float | np.ndarray
    s: float | np.ndarray
    v: float | np.ndarray


def wet_steam(p_line, x) -> WetSteam:
    """Wet steam at ``p_line`` [Pa, absolute] with quality ``x`` [1]: each property is f + x (g - f).

    Scalars or arrays that broadcast. The volume is the homogeneous one, without slip between the
    phases. Raises InputError for either input out of range.

    >>> wet_steam(1e6, 0.98).v
    0.1905
    """
    (p, x), scalar = admit(p_line=p_line, x=x)
    sat = saturated(p)
    pairs = (sat.h_f, sat.h_g), (sat.s_f, sat.s_g), (sat.v_f, sat.v_g)
    return WetSteam(*(give_back(np.asarray(f + x * (g - f)), scalar) for f, g in pairs))
