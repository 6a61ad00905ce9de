"""Viscosity and thermal conductivity, from ``iapws``: needed once per rig, never in a hot loop."""

from __future__ import annotations

from iapws._iapws import _ThCond, _Viscosity

from engine.steam.arrays import at_the_door, refuse_outside
from engine.steam.errors import InputError


def _check(density, T):
    (density, T), _ = at_the_door(density=density, T=T)
    faults = refuse_outside("density", density, (density > 0) & (density < 1200), "more than 0 and below 1200 kg/m³")
    faults += refuse_outside("T", T, (T >= 273.16) & (T <= 1173.15), "273.16 to 1173.15 K")
    if faults:
        raise InputError(*faults)
    return float(density), float(T)


def viscosity(density: float, T: float) -> float:
    """Dynamic viscosity [Pa s] at ``density`` [kg/m³] and ``T`` [K], scalars. IAPWS R12-08.

    >>> viscosity(998.0, 298.15) * 1e6  # IAPWS R12-08 Table 4: 889.735100
    889.735100
    """
    return float(_Viscosity(*_check(density, T)))


def conductivity(density: float, T: float) -> float:
    """Thermal conductivity [W/(m K)] at ``density`` [kg/m³] and ``T`` [K], scalars. IAPWS R15-11.

    >>> conductivity(998.0, 298.15) * 1e3  # IAPWS R15-11 Table 4, without critical enhancement: 607.712868
    607.712868
    """
    return float(_ThCond(*_check(density, T)))
