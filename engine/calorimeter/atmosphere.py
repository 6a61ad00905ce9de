"""Barometric pressure from altitude, and the water leg between a tapping and its gauge.

The standard atmosphere is ISO 2533:1975: a lowest layer whose temperature falls by 6.5 K per
geopotential kilometre from 288.15 K and 101 325 Pa. It is a fallback: weather moves the real
pressure by 1 to 2 kPa either way (common practice), so a barometer at the place is the rule, and
``WEATHER_HALF_WIDTH`` is what to put in an uncertainty budget where there is none.
"""

from __future__ import annotations

import numpy as np

from engine.calorimeter.rig_inputs import admit, limits_of, require
from engine.steam import saturated, saturation_pressure
from engine.steam.arrays import give_back
from engine.steam.units import G_STANDARD, P_STANDARD

EARTH_RADIUS = 6_356_766.0  # m, nominal radius of ISO 2533 for the geopotential
T_SEA_LEVEL = 288.15  # K, ISO 2533
LAPSE_RATE = 0.0065  # K per geopotential metre, ISO 2533
R_AIR = 287.05287  # J/(kg K), ISO 2533
EXPONENT = G_STANDARD / (R_AIR * LAPSE_RATE)  # 5.25588
WEATHER_HALF_WIDTH = 2000.0  # Pa, rectangular limits about the standard pressure (common practice)


def geopotential_altitude(altitude):
    """Geometric altitude [m] -> geopotential altitude [m] (ISO 2533, 2.3): r z / (r + z).

    >>> geopotential_altitude(2600.0)
    2598.94
    """
    (z,), scalar = admit(altitude=altitude)
    return give_back(EARTH_RADIUS * z / (EARTH_RADIUS + z), scalar)


def standard_pressure(altitude, *, geopotential=False):
    """Pressure of the standard atmosphere [Pa] at a geometric altitude [m] (ISO 2533:1975).

    ``altitude``: scalar or array, -2000 to 11 000 m; ``geopotential=True`` when it is one already.
    Returns the shape given. Raises InputError outside the layer.

    >>> standard_pressure(2000.0, geopotential=True)
    79495.2
    >>> standard_pressure(2600.0)
    73758.8
    """
    (z,), scalar = admit(altitude=altitude)
    H = z if geopotential else EARTH_RADIUS * z / (EARTH_RADIUS + z)
    return give_back(P_STANDARD * (1 - LAPSE_RATE * H / T_SEA_LEVEL) ** EXPONENT, scalar)


def altitude_of_pressure(p_barometer, *, geopotential=False):
    """Altitude [m] at which the standard atmosphere has this pressure [Pa]: a check on a barometer.

    Raises InputError where it falls outside -2000 to 11 000 m.

    >>> altitude_of_pressure(79495.2, geopotential=True)
    2000.0
    """
    (p,), scalar = admit(p_barometer=p_barometer)
    H = T_SEA_LEVEL / LAPSE_RATE * (1 - (p / P_STANDARD) ** (1 / EXPONENT))
    z = H if geopotential else EARTH_RADIUS * H / (EARTH_RADIUS - H)
    layer = limits_of("altitude")
    require("p_barometer", p, (z > layer.low - 1e-6) & (z < layer.high + 1e-6), "a pressure found in the lowest layer",
            why=f"it ends at {layer.low:g} and {layer.high:g} m", hint="give the barometer in pascal")
    return give_back(z, scalar)


def station_pressure(p_sea_level, altitude):
    """Pressure at the place [Pa] from a weather report, which is reduced to sea level [Pa].

    The report is the pressure a standard atmosphere shifted to fit would have at altitude 0; it is
    undone with the same atmosphere (the altimeter setting of aviation meteorology). Taking a
    reported 1020 hPa for the local barometer is an error of 9 kPa at 800 m.

    ``p_sea_level`` [Pa], geometric ``altitude`` [m]: scalars or arrays that broadcast.

    >>> station_pressure(101_325.0, 2600.0)
    73758.8
    """
    (p0, z), scalar = admit(p_sea_level=p_sea_level, altitude=altitude)
    H = EARTH_RADIUS * z / (EARTH_RADIUS + z)
    relative = (p0 / P_STANDARD) ** (1 / EXPONENT) - LAPSE_RATE * H / T_SEA_LEVEL
    return give_back(P_STANDARD * relative**EXPONENT, scalar)


def leg_density(T_leg):
    """Density of the water in a leg [kg/m³] at its temperature [K]: saturated liquid (IAPWS-IF97).

    The pressure of the leg is left out: 10 bar raise the density of cold water by 0.05 %.

    >>> leg_density(343.15)
    977.7
    """
    (T,), scalar = admit(T_leg=T_leg)
    return give_back(1 / np.asarray(saturated(saturation_pressure(T)).v_f), scalar)


def water_leg(leg_height, T_leg):
    """What a full water leg adds to the gauge [Pa]: rho g z, positive when the gauge is below.

    ``leg_height`` [m]: tapping above gauge (negative for a gauge above it); ``T_leg`` [K].

    >>> water_leg(1.0, 293.15)
    9788.6
    """
    (z, T), scalar = admit(leg_height=leg_height, T_leg=T_leg)
    return give_back(np.asarray(leg_density(T)) * G_STANDARD * z, scalar)


def tapping_pressure(p_reading, leg_height, T_leg):
    """Pressure at the tapping [Pa] from the gauge's absolute reading [Pa]: reading minus leg.

    A gauge below its tapping reads high by the leg, so the correction is negative there.
    Raises InputError for a leg that would leave no pressure at the tapping.

    >>> tapping_pressure(1_000_000.0, 1.0, 293.15)
    990211.4
    """
    (p, z, T), scalar = admit(p_reading=p_reading, leg_height=leg_height, T_leg=T_leg)
    p_tapping = p - np.asarray(water_leg(z, T))
    require("p_reading", p, p_tapping > 0, "more than the water leg itself",
            hint="check the sign and the length of the leg, and that it is full")
    return give_back(p_tapping, scalar)
