"""What keeps a thermometer in the exhaust from showing the temperature of the steam.

Sign convention, the same in every function here: **error = reading minus truth**, in kelvin,
negative when the thermometer reads low; the correction to add to a reading is minus the error.
Truth is the stagnation (total) temperature of the stream unless the function says otherwise.

The errors are small and are taken one at a time; their interplay (a probe cooled by its head also
radiates less) is of second order. ``corrected_temperature`` undoes them together.

Sources: emergent stem, the common liquid-in-glass formula k n (T - t), as in "Steam: Its Generation
and Use", 35th ed. 1919; fin and radiation balance, any text on heat transfer (Incropera & DeWitt,
Fundamentals of Heat and Mass Transfer, ch. 3 and 13); film on a cylinder, Churchill & Bernstein,
J. Heat Transfer 99 (1977) 300; recovery factors, Moffat, "Gas temperature measurement" (1962),
from memory.
"""

from __future__ import annotations

from collections.abc import Callable
from enum import StrEnum
from typing import NamedTuple

import numpy as np

from engine.calorimeter.rig_inputs import admit, choose, require, require_error
from engine.steam.arrays import give_back

STEFAN_BOLTZMANN = 5.670374419e-8  # W/(m² K⁴), CODATA 2018 (exact in the SI since 2019)
STEEL_CONDUCTIVITY = 16.0  # W/(m K), austenitic stainless steel near 400 K


class StemLiquid(StrEnum):
    """The liquid in the column of a liquid-in-glass thermometer."""

    MERCURY = "mercury"
    ORGANIC = "organic"


# 1/K, apparent expansion in glass: mercury NBS Monograph 150; organic liquids about 1e-3 (from memory)
STEM_COEFFICIENTS = {StemLiquid.MERCURY: 1.6e-4, StemLiquid.ORGANIC: 1.0e-3}


class Recovery(NamedTuple):
    """A recovery factor and the half width within which it is known."""

    value: float
    half_width: float


RECOVERY_FACTORS: dict[str, Recovery] = {
    "wire or probe across the flow": Recovery(0.68, 0.07),  # Moffat, from memory
    "wire or probe along the flow": Recovery(0.86, 0.09),  # Moffat, from memory
    "bare pocket": Recovery(0.65, 0.05),  # 0.6 to 0.7, common practice
}


class MovingStreamError(NamedTuple):
    """Errors [K] of a thermometer in a moving stream, and the whole rise from static to total."""

    of_static: float
    of_total: float
    rise: float


def stem_error(T_reading, T_stem, exposed, *, liquid=StemLiquid.MERCURY, stem_coefficient=None):
    """Error of the emergent stem [K]: -k n (T - t), negative when the stem is cooler than the bulb.

    ``T_reading`` [K], mean ``T_stem`` of the exposed column [K], ``exposed`` length of the column in
    kelvin of scale; ``stem_coefficient`` [1/K] replaces that of the ``liquid``. Scalars or arrays.

    The published case 400 °F, 200 °F exposed, stem at 85 °F, k = 8.5e-5 per °F is a 5.3 °F correction:

    >>> stem_error(477.59, 302.59, 200 / 1.8, stem_coefficient=8.5e-5 * 1.8) * 1.8
    -5.355
    """
    k = STEM_COEFFICIENTS[choose("stem liquid", liquid, StemLiquid)] if stem_coefficient is None else stem_coefficient
    (T, t, n, k), scalar = admit(T_reading=T_reading, T_stem=T_stem, exposed=exposed, stem_coefficient=k)
    return give_back(-k * n * (T - t), scalar)


def immersion_error(T_exhaust, T_head, immersion, outer_diameter, inner_diameter, film,
                    *, conductivity=STEEL_CONDUCTIVITY):
    """Error of conduction along a probe or pocket [K]: a fin with an adiabatic tip.

    (T_head - T) / cosh(m L) with m = sqrt(film P / (conductivity A)), P the outer perimeter and A
    the metal's cross-section; ``inner_diameter`` [m] is 0 for a solid rod.

    ``T_exhaust`` true stream temperature and ``T_head`` [K], ``immersion`` [m], diameters [m],
    ``film`` [W/(m² K)], ``conductivity`` [W/(m K)]: scalars or arrays that broadcast.
    Raises InputError, also for an inner diameter that leaves no metal.

    A 6/4 mm stainless pocket, film 100 W/(m² K), head 70 K cooler: 30, 50 and 100 mm deep

    >>> import numpy as np
    >>> immersion_error(400.0, 330.0, np.array([0.03, 0.05, 0.10]), 0.006, 0.004, 100.0)
    array([-10.36,  -1.84,  -0.02])
    """
    (T, T_h, L, D, d, a, k), scalar = admit(
        T_exhaust=T_exhaust, T_head=T_head, immersion=immersion, outer_diameter=outer_diameter,
        inner_diameter=inner_diameter, film=film, conductivity=conductivity)
    require("inner_diameter", d, d < D, "less than the outer diameter", hint="0 for a solid rod")
    mL = L * np.sqrt(4 * a * D / (k * (D * D - d * d)))
    # 1/cosh written so that a very long fin gives 0 and not an overflow
    return give_back((T_h - T) * 2 * np.exp(-mL) / (1 + np.exp(-2 * mL)), scalar)


def immersion_for(temperature_error, T_exhaust, T_head, outer_diameter, inner_diameter, film,
                  *, conductivity=STEEL_CONDUCTIVITY):
    """Immersion [m] at which the size of the conduction error has fallen to ``temperature_error`` [K].

    0 where even no immersion is good enough. Arguments as in ``immersion_error``.

    >>> immersion_for(0.1, 400.0, 330.0, 0.006, 0.004, 100.0)
    0.0836
    """
    (e, T, T_h, D, d, a, k), scalar = admit(
        temperature_error=temperature_error, T_exhaust=T_exhaust, T_head=T_head, outer_diameter=outer_diameter,
        inner_diameter=inner_diameter, film=film, conductivity=conductivity)
    require_error(e)
    require("inner_diameter", d, d < D, "less than the outer diameter", hint="0 for a solid rod")
    ratio = np.maximum(np.abs(T - T_h) / e, 1.0)
    return give_back(np.arccosh(ratio) / np.sqrt(4 * a * D / (k * (D * D - d * d))), scalar)


def radiation_error(T_exhaust, T_wall, film, *, emissivity=0.85):
    """Error of radiation between the probe and the wall around it [K], negative for a cooler wall.

    Solves film (T - T_probe) = emissivity sigma (T_probe^4 - T_wall^4); a small probe in a large
    enclosure, steam taken as transparent. ``emissivity`` 0.85 is oxidised steel.

    ``T_exhaust`` true stream temperature [K], ``T_wall`` [K], ``film`` [W/(m² K)].

    >>> radiation_error(400.0, 390.0, 100.0)
    -1.06
    """
    (T, T_w, a, e), scalar = admit(T_exhaust=T_exhaust, T_wall=T_wall, film=film, emissivity=emissivity)
    b = e * STEFAN_BOLTZMANN / a
    probe = np.maximum(T, T_w)
    for _ in range(8):  # Newton down from the warmer side of a rising convex function: it cannot overshoot
        probe = probe - (probe - T + b * (probe**4 - T_w**4)) / (1 + 4 * b * probe**3)
    return give_back(probe - T, scalar)


def moving_stream_error(velocity, cp, recovery):
    """Errors of a thermometer in a moving stream (of_static, of_total, rise), in kelvin.

    It shows T_static + r c²/(2 cp): above the static temperature, below the total one. What an
    energy balance misses is (1 - r) c²/2 when it takes the reading for the total temperature.

    ``velocity`` [m/s], ``cp`` of the steam [J/(kg K)], ``recovery`` [1]: scalars or arrays.

    >>> moving_stream_error(50.0, 2010.0, 0.7)
    MovingStreamError(of_static=0.435, of_total=-0.187, rise=0.622)
    """
    (c, cp, r), scalar = admit(velocity=velocity, cp=cp, recovery=recovery)
    rise = c * c / (2 * cp)
    return MovingStreamError(*(give_back(e, scalar) for e in (r * rise, -(1 - r) * rise, rise)))


def lag_error(time, time_constant, *, step=0.0, rate=0.0):
    """Error of a first-order lag [K] a ``time`` [s] after a step [K] and the start of a ramp [K/s].

    -step exp(-t/tau) - rate tau (1 - exp(-t/tau)): a thermometer trails a steady ramp by rate x tau.

    >>> lag_error(600.0, 60.0, rate=-0.06 / 60)
    0.06
    """
    (t, tau, step, rate), scalar = admit(time=time, time_constant=time_constant, step=step, rate=rate)
    left = np.exp(-t / tau)
    return give_back(-step * left - rate * tau * (1 - left), scalar)


def settling_time(step, temperature_error, time_constant):
    """Time [s] for a first-order thermometer to come within ``temperature_error`` [K] of a step [K].

    >>> settling_time(110.0, 0.1, 60.0) / 60.0
    7.0
    """
    (step, e, tau), scalar = admit(step=step, temperature_error=temperature_error, time_constant=time_constant)
    require_error(e)
    return give_back(tau * np.log(np.maximum(np.abs(step) / e, 1.0)), scalar)


def probe_time_constant(outer_diameter, film, *, density=7900.0, cp=480.0):
    """Time constant [s] of a solid rod across the flow: density cp D / (4 film); defaults are steel.

    >>> probe_time_constant(0.003, 180.0)
    15.8
    """
    (D, a, rho, c), scalar = admit(outer_diameter=outer_diameter, film=film, density=density, cp=cp)
    return give_back(rho * c * D / (4 * a), scalar)


def cross_flow_film(mass_flux, outer_diameter, viscosity, conductivity, prandtl):
    """Film coefficient [W/(m² K)] on a cylinder across a stream (Churchill & Bernstein 1977).

    ``mass_flux`` [kg/(m² s)], ``outer_diameter`` [m], and of the steam at film temperature:
    ``viscosity`` [Pa s], ``conductivity`` [W/(m K)], ``prandtl`` [1]. The authors give 20 % for
    Re Pr > 0.2; below that the value still stands but is less sure.

    20 m/s of steam at 130 °C over a 6 mm probe:

    >>> cross_flow_film(11.0, 0.006, 1.33e-5, 0.0281, 0.97)
    194.
    """
    (G, D, mu, k, Pr), scalar = admit(mass_flux=mass_flux, outer_diameter=outer_diameter, viscosity=viscosity,
                                      conductivity=conductivity, prandtl=prandtl)
    Re = G * D / mu
    nusselt = 0.3 + (0.62 * np.sqrt(Re) * np.cbrt(Pr) / (1 + (0.4 / Pr) ** (2 / 3)) ** 0.25
                     * (1 + (Re / 282_000) ** 0.625) ** 0.8)
    return give_back(nusselt * k / D, scalar)


def corrected_temperature(T_reading, *errors: Callable):
    """The true temperature [K] behind a reading [K]: solves T + sum of errors(T) = reading.

    Each of ``errors`` takes the true temperature(s) and returns an error by this module's sign, for
    instance ``lambda T: immersion_error(T, 330.0, 0.05, 0.006, 0.004, 100.0)``. The error of an
    emergent stem is a function of the reading: pass ``lambda T: stem_error(T_reading, ...)``.
    Raises InputError when an error grows as fast as the temperature itself (a probe hardly immersed).

    >>> corrected_temperature(398.16, lambda T: immersion_error(T, 330.0, 0.05, 0.006, 0.004, 100.0))
    400.00
    """
    (reading,), scalar = admit(T_reading=T_reading)

    def excess(T):
        return T + sum((np.asarray(error(T)) for error in errors), np.zeros_like(T)) - reading

    before, T = reading, reading - excess(reading)
    f_before, f = excess(before), excess(T)
    for _ in range(30):
        moved = T - before
        slope = np.divide(f - f_before, moved, out=np.ones_like(T), where=moved != 0)
        require("T_reading", reading, slope > 0.05, "a thermometer that follows the steam",
                why="its error grows as fast as the temperature itself", hint="immerse the probe deeper")
        step = f / slope
        before, f_before, T = T, f, T - step
        if np.all(np.abs(step) < 1e-9):
            break
        f = excess(T)
    return give_back(T, scalar)
