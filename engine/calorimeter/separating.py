"""Separating and throttling: drain the water first, throttle what is left, put both together.

    h_line (M_s + M_w) = M_s h_throttled + M_w h_f(p_separator) + Q

With the separator at line pressure and Q = 0 this is the textbook's x = x_t M_s/(M_s + M_w). Three
things are asked and never assumed: which mass was weighed beside the water (books differ, and the
answer moves by several tenths of a %pt), how the drained water was measured, and the heat the vessel
lost: it condensed steam that was then drained as if it had been water in the line.

Sources: first law; any text on engineering thermodynamics for the combined calorimeter.
"""

from __future__ import annotations

from enum import StrEnum
from typing import NamedTuple

import numpy as np

from engine.calorimeter.rig_inputs import admit, choose, gather, limits_of, require
from engine.calorimeter.status import Status
from engine.calorimeter.throttle import exhaust_temperature, least_quality, quality
from engine.calorimeter.wet import wet_steam
from engine.steam import saturated, saturation_pressure, state_ph
from engine.steam.arrays import at_the_door, give_back

_ROUNDING = 1e-9  # a quality this little above 1 is rounding


class MassBasis(StrEnum):
    """What was weighed beside the drained water."""

    THROTTLED = "throttled steam condensed"  # only what went through the orifice
    TOTAL = "total collected"  # that and the drained water together


class Separated(NamedTuple):
    """What a combined reading says about the line; ask ``status`` first. Fields as for ``Quality``.

    ``x_throttled`` above 1 beside drained water means that the readings contradict each other.
    """

    x: float | np.ndarray
    h_line: float | np.ndarray
    superheat: float | np.ndarray
    line_superheat: float | np.ndarray
    x_bound: float | np.ndarray
    x_throttled: float | np.ndarray
    drain_fraction: float | np.ndarray
    status: Status | np.ndarray


class SeparatedReading(NamedTuple):
    """What a combined calorimeter shows for a known line; ask ``status`` first."""

    x_throttled: float | np.ndarray
    T_exhaust: float | np.ndarray
    superheat: float | np.ndarray
    status: Status | np.ndarray


class DrainNeeded(NamedTuple):
    """How much of the sample must be drained before the rest can be read; ask ``status`` first."""

    drain_fraction: float | np.ndarray  # of the whole sample; 0 where throttling alone can read it
    water_share: float | np.ndarray  # the same as a share of the water there, 1 at most
    x_throttled: float | np.ndarray  # quality then left to the throttle
    status: Status | np.ndarray


def drained_mass(water_volume, T_water):
    """Mass [kg] of a measured volume of water [m³] at its temperature [K] (saturated liquid, IAPWS-IF97).

    >>> drained_mass(0.150e-3, 343.15)
    0.1467
    """
    (V, T), scalar = admit(water_volume=water_volume, T_water=T_water)
    return give_back(V / np.asarray(saturated(saturation_pressure(T)).v_f), scalar)


def flash_fraction(p_separator, p_drain):
    """Part of the drained water [1] that leaves as steam when it flashes from p_separator to p_drain [Pa].

    An open drain weighs too little by this part: cool and close it, or divide by 1 - flash.

    >>> flash_fraction(1e6, 101_325.0)
    0.152
    """
    (p, p_d), scalar = admit(p_separator=p_separator, p_drain=p_drain)
    require("p_drain", p_d, p_d <= p, "at most the separator pressure")
    low = saturated(p_d)
    return give_back(np.asarray((saturated(p).h_f - low.h_f) / (low.h_g - low.h_f)), scalar)


def separated_quality(p_line, p_exhaust, T_exhaust, water_mass, weighed_mass, basis, *, p_separator=None,
                      vessel_loss=0.0, **terms) -> Separated:
    """Quality in the line from a combined reading.

    ``p_line``, ``p_exhaust`` [Pa], ``T_exhaust`` [K]; ``water_mass`` drained and ``weighed_mass`` [kg],
    the latter as said by ``basis`` (a MassBasis or its text, never guessed); ``p_separator`` [Pa]
    where it is not the line's; ``vessel_loss`` [J] per kg of the whole sample; ``terms`` are the
    keywords of ``throttle.quality`` for the throttled steam (heat_loss, least_superheat, ...).
    All broadcast together. A scalar call raises InputError naming every unusable input; arrays carry
    a status per element.

    0.150 l drained at 70 °C, 3.24 kg condensed after the throttle:

    >>> water = drained_mass(0.150e-3, 343.15)
    >>> round(separated_quality(1.5e6, 1e5, 383.15, water, 3.24, "throttled steam condensed").x, 4)
    0.9101
    """
    basis = choose("basis of the weighed mass", basis, MassBasis)
    p_separator = p_line if p_separator is None else p_separator
    names = tuple(terms)
    (p, p2, T, M_w, M, p_s, q_s, *more), scalar = at_the_door(
        p_line=p_line, p_exhaust=p_exhaust, T_exhaust=T_exhaust, water_mass=water_mass, weighed_mass=weighed_mass,
        p_separator=p_separator, vessel_loss=vessel_loss, **terms)
    terms = dict(zip(names, more, strict=True))
    own = {"p_line": p, "p_separator": p_s, "water_mass": M_w, "weighed_mass": M, "vessel_loss": q_s}
    floor = M_w if basis is MassBasis.TOTAL else np.zeros_like(M)
    enough = floor < M
    if scalar:
        gather(lambda: admit(**own),
               lambda: require("p_separator", p_s, p_s <= p, "at most the line pressure"),
               lambda: require("weighed_mass", M, enough, f"more than {float(floor):g} kg",
                               why="some steam went through the throttle", hint="check which mass was weighed"),
               lambda: quality(float(p_s), float(p2), float(T), **_floats(terms)))
    inside = enough & (p_s <= p) & np.logical_and.reduce([limits_of(name).hold(v) for name, v in own.items()])
    missing = np.logical_or.reduce([np.isnan(v) for v in own.values()])
    p, p_s, M_w, M, q_s = (np.where(inside, v, w) for v, w in ((p, 1e6), (p_s, 1e6), (M_w, 0.0), (M, 1.0), (q_s, 0.0)))

    stage = quality(*_one_up(p_s, p2, T), **dict(zip(names, _one_up(*more), strict=True)))
    stage = stage._replace(**{k: np.reshape(v, p.shape) for k, v in stage._asdict().items()})
    line, sep = saturated(p), saturated(p_s)
    whole = M if basis is MassBasis.TOTAL else M + M_w
    z = M_w / whole
    h_throttled = np.where(stage.status == Status.NOT_SUPERHEATED,
                           sep.h_f + stage.x_bound * (sep.h_g - sep.h_f), stage.h_line)
    h = (1 - z) * h_throttled + z * sep.h_f + q_s
    x = (h - line.h_f) / (line.h_g - line.h_f)

    thin = terms.get("least_superheat", 0.0)
    status = np.select(
        [missing | (stage.status == Status.MISSING), ~inside | (stage.status == Status.OUT_OF_RANGE) | (x < 0),
         stage.status == Status.NOT_SUPERHEATED, x > 1 + _ROUNDING, stage.superheat < thin],
        [Status.MISSING, Status.OUT_OF_RANGE, Status.NOT_SUPERHEATED, Status.LINE_SUPERHEATED, Status.THIN_MARGIN],
        Status.OK).astype(np.int8)
    hot = status == Status.LINE_SUPERHEATED
    T_hot = np.asarray(state_ph(*_one_up(p, np.where(hot, h, line.h_g))).T).reshape(p.shape)
    answered, within = status <= Status.THIN_MARGIN, status < Status.OUT_OF_RANGE
    x_t = (h_throttled - sep.h_f) / (sep.h_g - sep.h_f)
    columns = (np.where(answered, x, np.nan), np.where(answered | hot, h, np.nan), stage.superheat,
               np.where(within, np.where(hot, T_hot - line.T, 0.0), np.nan),
               np.where(status == Status.NOT_SUPERHEATED, x, np.nan), np.where(within, x_t, np.nan),
               np.where(inside, z, np.nan))
    if scalar and status >= Status.OUT_OF_RANGE:
        require("vessel_loss", q_s, x >= 0, "terms that leave the line between water and steam")
    return Separated(*(give_back(c, scalar) for c in columns), Status(int(status)) if scalar else status)


def separated_reading(p_line, x, p_exhaust, drain_fraction, *, p_separator=None, vessel_loss=0.0,
                      **terms) -> SeparatedReading:
    """What must be seen behind a separator that drains ``drain_fraction`` of the sample [1].

    ``drain_fraction`` = M_w/(M_s + M_w). Arguments otherwise as for ``separated_quality``. Raises
    InputError also for draining more water than there is.

    >>> round(separated_reading(8e5, 0.88, 101_325.0, 0.09).x_throttled, 3)
    0.967
    """
    (p, x, p2, z, p_s, q_s), scalar = _line_inputs(p_line, x, p_exhaust, p_separator, vessel_loss,
                                                   drain_fraction=drain_fraction)
    h, sep = np.asarray(wet_steam(p, x).h) - q_s, saturated(p_s)
    x_t = ((h - z * sep.h_f) / (1 - z) - sep.h_f) / (sep.h_g - sep.h_f)
    require("drain_fraction", z, (x_t <= 1 + _ROUNDING) & (x_t >= 0), "no more than the water there is",
            hint="1 - x, and what the vessel condenses by its heat loss")
    x_t = np.minimum(x_t, 1.0)
    seen = exhaust_temperature(*((float(p_s), float(x_t), float(p2)) if scalar else (p_s, x_t, p2)), **terms)
    return SeparatedReading(give_back(x_t, scalar), seen.T_exhaust, seen.superheat, seen.status)


def drain_needed(p_line, x, p_exhaust, superheat=5.0, *, p_separator=None, vessel_loss=0.0, **terms) -> DrainNeeded:
    """The least part of the sample to drain [1] so that the rest arrives ``superheat`` [K] above saturation.

    Status NOT_SUPERHEATED, and no number, where not even dry steam could be read at that separator
    pressure. ``terms`` as for ``throttle.least_quality`` (heat_loss, velocities, recovery).

    >>> round(drain_needed(8e5, 0.88, 101_325.0).drain_fraction, 4)
    0.0831
    """
    (p, x, p2, wanted, p_s, q_s), scalar = _line_inputs(p_line, x, p_exhaust, p_separator, vessel_loss,
                                                        superheat=superheat)
    x_t = np.asarray(least_quality(p_s, p2, wanted, **terms))
    h, sep = np.asarray(wet_steam(p, x).h) - q_s, saturated(p_s)
    arriving = (h - sep.h_f) / (sep.h_g - sep.h_f)  # quality in the separator, after the vessel's loss
    z = np.maximum(1 - arriving / x_t, 0.0)
    possible = x_t <= 1
    share = np.divide(z, 1 - arriving, out=np.zeros_like(z), where=z > 0)
    status = np.where(possible, Status.OK, Status.NOT_SUPERHEATED).astype(np.int8)
    columns = (np.where(possible, c, np.nan) for c in (z, share, np.maximum(x_t, arriving)))
    return DrainNeeded(*(give_back(c, scalar) for c in columns), Status(int(status)) if scalar else status)


def _line_inputs(p_line, x, p_exhaust, p_separator, vessel_loss, **other):
    arrays, scalar = admit(p_line=p_line, x=x, p_exhaust=p_exhaust, **other,
                           p_separator=p_line if p_separator is None else p_separator, vessel_loss=vessel_loss)
    require("p_separator", arrays[-2], arrays[-2] <= arrays[0], "at most the line pressure")
    return arrays, scalar


def _one_up(*arrays):
    """At least one dimension, so that the functions below answer with a status and do not raise."""
    return [np.atleast_1d(a) for a in arrays]


def _floats(named):
    return {name: float(value) for name, value in named.items()}
