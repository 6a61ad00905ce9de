"""From an exhaust reading to the quality in the line, and back: the energy balance of the calorimeter.

    h_line + c1²/2 = h(p_exhaust, T_exhaust) + (1 - r) c2²/2 + q

Steady flow without work (first law). ``T_exhaust`` is what the thermometer reads: a probe in a
stream of velocity c2 takes up the share r (recovery factor) of the kinetic energy, so that only
the rest is to be added; with r = 1 it reads the total temperature. q is the heat lost per kg of
sample between the line and the thermometer.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.calorimeter.checks import door, refuse, with_status
from engine.calorimeter.status import Status
from engine.steam import T_MAX, if97
from engine.steam.arrays import give_back, in_blocks
from engine.steam.states import search_T_ph

_ROUNDING = 1e-9  # a quality this little above 1 is the rounding of a dry line, not superheat


class Quality(NamedTuple):
    """What one reading says about the line; ask ``status`` first.

    x           quality, NaN unless OK or THIN_MARGIN
    h_line      specific enthalpy in the line [J/kg], NaN where nothing is known of it
    superheat   reading above saturation at the exhaust [K]
    line_superheat  superheat of the line [K], 0 for a wet line
    x_bound     where NOT_SUPERHEATED: the quality is below this; NaN otherwise
    """

    x: float | np.ndarray
    h_line: float | np.ndarray
    superheat: float | np.ndarray
    line_superheat: float | np.ndarray
    x_bound: float | np.ndarray
    status: Status | np.ndarray

    @property
    def wetness(self):
        """1 - x."""
        return 1.0 - self.x


class Exhaust(NamedTuple):
    """What the exhaust must show for a quality in the line; ask ``status`` first.

    T_exhaust   what the thermometer reads [K]; where NOT_SUPERHEATED, the saturation temperature
    superheat   reading above saturation [K]
    x_exhaust   quality at the exhaust, 1 where superheated
    h_exhaust   specific enthalpy of the exhaust stream [J/kg]
    """

    T_exhaust: float | np.ndarray
    superheat: float | np.ndarray
    x_exhaust: float | np.ndarray
    h_exhaust: float | np.ndarray
    status: Status | np.ndarray


def saturation_enthalpies(p: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """T, h_f, h_g over 1-d pressures in range."""
    T = if97.saturation_T(p)
    return T, if97.enthalpy_1(p, T), if97.enthalpy_2(p, T)


def balance_terms(a: dict[str, np.ndarray]) -> np.ndarray:
    """What is to be added to the exhaust enthalpy as read to get that of the line [J/kg]."""
    return (a["heat_loss"] + 0.5 * (1.0 - a["recovery"]) * a["exhaust_velocity"] ** 2
            - 0.5 * a["line_velocity"] ** 2)


def taken_up(a: dict[str, np.ndarray]) -> np.ndarray:
    """Kinetic energy that the probe takes up: by so much the stream is below what it reads [J/kg]."""
    return 0.5 * a["recovery"] * a["exhaust_velocity"] ** 2


def least_enthalpy(a: dict[str, np.ndarray]) -> np.ndarray:
    """Exhaust enthalpy as read [J/kg] that shows ``least_superheat``, and leaves the stream itself dry."""
    p = a["p_exhaust"]
    T_sat, superheat = if97.saturation_T(p), a["least_superheat"]
    h_read = if97.enthalpy_2(p, T_sat + superheat)
    if a["exhaust_velocity"].any():
        h_read = np.maximum(h_read, if97.enthalpy_2(p, T_sat) + taken_up(a))
    return h_read


def _quality(a, usable, missing):
    p_line, p_exhaust, T_exhaust = a["p_line"], a["p_exhaust"], a["T_exhaust"]
    T_line, h_f, h_g = saturation_enthalpies(p_line)
    T_sat = if97.saturation_T(p_exhaust)
    superheat = T_exhaust - T_sat
    wet = ~(superheat > 0)
    # at or below saturation the vapour equation is asked at saturation: that is the bound
    h_read = if97.enthalpy_2(p_exhaust, np.where(wet, T_sat, T_exhaust))
    if a["exhaust_velocity"].any():
        # the stream is colder than the probe: it may be wet while the probe reads superheat
        h_driest_wet = if97.enthalpy_2(p_exhaust, T_sat) + taken_up(a)
        wet = wet | (h_read < h_driest_wet)
        h_read = np.where(wet, h_driest_wet, h_read)
    h_line = h_read + balance_terms(a)
    x = (h_line - h_f) / (h_g - h_f)
    hot = usable & ~wet & (x > 1 + _ROUNDING)
    T_hot = np.zeros(x.shape)
    if hot.any():
        T_hot[hot] = search_T_ph(p_line[hot], h_line[hot], T_line[hot])
    status = np.select(
        [missing, ~usable | (T_hot > T_MAX) | (x < 0), wet, hot, superheat < a["least_superheat"]],
        [Status.MISSING, Status.OUT_OF_RANGE, Status.NOT_SUPERHEATED, Status.LINE_SUPERHEATED, Status.THIN_MARGIN],
        Status.OK)
    answered, within = status <= Status.THIN_MARGIN, status < Status.OUT_OF_RANGE
    return (np.where(answered, np.minimum(x, 1.0), np.nan), np.where(answered | hot & within, h_line, np.nan),
            np.where(within, superheat, np.nan), np.where(within, np.where(hot, T_hot - T_line, 0.0), np.nan),
            np.where(status == Status.NOT_SUPERHEATED, x, np.nan), status)


def quality(p_line, p_exhaust, T_exhaust, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0, recovery=1.0,
            least_superheat=0.0) -> Quality:
    """Quality in the line from an exhaust reading.

    p_line, p_exhaust   absolute pressures [Pa]
    T_exhaust           what the thermometer reads [K]
    heat_loss           q, heat lost per kg of sample [J/kg]
    line_velocity, exhaust_velocity   c1, c2 [m/s]
    recovery            r, recovery factor of the probe [1]
    least_superheat     below this superheat [K] the status is THIN_MARGIN

    All broadcast together; a ``Quality`` of arrays with a status per element, or of floats. A scalar
    call raises InputError for inputs out of range or missing, naming all of them.

    >>> result = quality(12e5, 1e5, 140 + 273.15)  # T. D. Eastop, A. McConkey: 0.986
    >>> round(result.x, 3), round(result.superheat, 1), result.status.name
    (0.986, 40.4, 'OK')
    """
    values, status = with_status(
        _quality, 6, p_line=p_line, p_exhaust=p_exhaust, T_exhaust=T_exhaust, heat_loss=heat_loss,
        line_velocity=line_velocity, exhaust_velocity=exhaust_velocity, recovery=recovery,
        least_superheat=least_superheat)
    return Quality(*values, status)


def exhaust_kernel(a, usable, missing):
    _, h_f, h_g = saturation_enthalpies(a["p_line"])
    T_sat, h_f2, h_g2 = saturation_enthalpies(a["p_exhaust"])
    h_read = h_f + a["x"] * (h_g - h_f) - balance_terms(a)
    h_stream = h_read - taken_up(a)
    x_exhaust = (h_stream - h_f2) / (h_g2 - h_f2)
    hot = x_exhaust > 1.0
    T = T_sat.copy()
    if hot.any():
        T[hot] = search_T_ph(a["p_exhaust"][hot], h_read[hot], T_sat[hot])
    superheat = T - T_sat
    status = np.select(
        [missing, ~usable | (x_exhaust < 0) | (T > T_MAX), ~hot, superheat < a["least_superheat"]],
        [Status.MISSING, Status.OUT_OF_RANGE, Status.NOT_SUPERHEATED, Status.THIN_MARGIN], Status.OK)
    known = status <= Status.NOT_SUPERHEATED
    return *(np.where(known, v, np.nan) for v in (T, superheat, np.minimum(x_exhaust, 1.0), h_stream)), status


def exhaust_temperature(p_line, x, p_exhaust, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0,
                        recovery=1.0, least_superheat=0.0) -> Exhaust:
    """What the exhaust thermometer must show for a quality ``x`` in the line: the inverse of ``quality``.

    Arguments as for ``quality``, with x between 0 and 1. Where the exhaust stays wet the status is
    NOT_SUPERHEATED and the thermometer sits at the saturation temperature. Scalar calls raise
    InputError for inputs out of range or missing.

    >>> round(exhaust_temperature(10e5, 1.0, 101_325.0).T_exhaust - 273.15, 1)  # °C, dry steam
    150.3
    """
    values, status = with_status(
        exhaust_kernel, 5, p_line=p_line, x=x, p_exhaust=p_exhaust, heat_loss=heat_loss, line_velocity=line_velocity,
        exhaust_velocity=exhaust_velocity, recovery=recovery, least_superheat=least_superheat)
    return Exhaust(*values, status)


def least_quality(p_line, p_exhaust, superheat=5.0, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0,
                  recovery=1.0):
    """The reach: the quality at which the exhaust reads just ``superheat`` [K] above saturation.

    In a stream so fast that its own steam would still be wet then, the quality at which it is dry.
    Pressures absolute [Pa]; any shapes; other arguments as for ``quality``. Above 1 means that not
    even dry steam can be read there. Raises InputError if any element is out of range or missing.

    >>> round(least_quality(10e5, 101_325.0), 4)
    0.9547
    """
    named, scalar = door(p_line=p_line, p_exhaust=p_exhaust, least_superheat=superheat, heat_loss=heat_loss,
                         line_velocity=line_velocity, exhaust_velocity=exhaust_velocity, recovery=recovery)
    refuse(named)

    def kernel(*values):
        a = dict(zip(named, values, strict=True))
        _, h_f, h_g = saturation_enthalpies(a["p_line"])
        return ((least_enthalpy(a) + balance_terms(a) - h_f) / (h_g - h_f),)

    return give_back(in_blocks(kernel, 1, *named.values())[0], scalar)
