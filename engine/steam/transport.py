"""Viscosity and thermal conductivity, from ``iapws``: needed once per rig, never in a hot loop."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from iapws._iapws import _ThCond, _Viscosity

from engine.steam.arrays import at_the_door, give_back, refuse_outside
from engine.steam.errors import InputError


def _element_by_element(function: Callable[[float, float], float], density, T):
    (density, T), scalar = at_the_door(density=density, T=T)
    faults = refuse_outside("density", density, (density > 0) & (density < 1200), "more than 0 and below 1200 kg/m³")
    faults += refuse_outside("T", T, (T >= 273.16) & (T <= 1173.15), "273.16 to 1173.15 K")
    if faults:
        raise InputError(*faults)
    values = [function(*pair) for pair in zip(density.ravel().tolist(), T.ravel().tolist(), strict=True)]
    return give_back(np.array(values, dtype=float).reshape(T.shape), scalar)


def viscosity(density, T):
    """Dynamic viscosity [Pa s] at ``density`` [kg/m³] and ``T`` [K], broadcast together. IAPWS R12-08.

    The industrial form, without the enhancement around the critical point. Raises InputError for any
    element outside 0 .. 1200 kg/m³ (0 excluded) and 273.16 .. 1173.15 K. One state at a time inside.

    >>> viscosity(998.0, 298.15) * 1e6  # IAPWS R12-08 Table 4: 889.735100
    889.735100
    """
    return _element_by_element(_Viscosity, density, T)


def conductivity(density, T):
    """Thermal conductivity [W/(m K)] at ``density`` [kg/m³] and ``T`` [K], broadcast. IAPWS R15-11.

    Without the enhancement around the critical point; otherwise as ``viscosity``.

    >>> conductivity(998.0, 298.15) * 1e3  # IAPWS R15-11 Table 4, without critical enhancement: 607.712868
    607.712868
    """
    return _element_by_element(_ThCond, density, T)
