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
from engine.calorimeter.verdict import verdict
from engine.calorimeter.wet import wet_steam
from engine.steam import saturated, saturation_pressure
from engine.steam.arrays import at_the_door, give_back, in_blocks
from engine.steam.errors import Fault, InputError

_ROUNDING = 1e-9  # of a quality of 1


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
    own = {"p_line": p_line, "p_separator": p_line if p_separator is None else p_separator, "water_mass": water_mass,
           "weighed_mass": weighed_mass, "vessel_loss": vessel_loss}
    named = own | {"p_exhaust": p_exhaust, "T_exhaust": T_exhaust, "least_superheat": 0.0} | terms
    arrays, scalar = at_the_door(**named)
    if scalar:
        _refuse(dict(zip(named, map(float, arrays), strict=True)), own, basis)
    *columns, status = in_blocks(
        lambda *block: _separated(dict(zip(named, block, strict=True)), own, basis), 8, *arrays)
    if scalar:
        require("vessel_loss", arrays[4], status < Status.OUT_OF_RANGE,
                "a loss that leaves the line wet or superheated",
                why="the energy balance leads outside the steam that is covered")
        return Separated(*map(float, columns), Status(int(status)))
    return Separated(*columns, status.astype(np.int8))


def _separated(a, own, basis):
    """The columns of ``Separated`` over 1-d arrays by name; ``own`` names those not handed to the throttle."""
    inside = _weighed_enough(a, basis) & (a["p_separator"] <= a["p_line"])
    inside &= np.logical_and.reduce([limits_of(name).hold(a[name]) for name in own])
    missing = np.logical_or.reduce([np.isnan(a[name]) for name in own])
    p, p_s, M_w, M, q_s = (np.where(inside, a[name], harmless)
                           for name, harmless in zip(own, (1e6, 1e6, 0.0, 1.0, 0.0), strict=True))

    stage = quality(p_s, **{name: values for name, values in a.items() if name not in own})
    wet = stage.status == Status.NOT_SUPERHEATED
    sep = saturated(p_s)
    h_throttled = np.where(wet, sep.h_f + stage.x_bound * (sep.h_g - sep.h_f), stage.h_line)
    z = M_w / (M if basis is MassBasis.TOTAL else M + M_w)
    *columns, status = verdict(
        p, (1 - z) * h_throttled + z * sep.h_f + q_s, wet, stage.superheat, a["least_superheat"],
        missing | (stage.status == Status.MISSING), inside & (stage.status < Status.OUT_OF_RANGE))
    x_throttled = (h_throttled - sep.h_f) / (sep.h_g - sep.h_f)
    answered = status < Status.OUT_OF_RANGE
    return (*columns, np.where(answered, x_throttled, np.nan), np.where(answered, z, np.nan), status)


def _weighed_enough(a, basis):
    return a["weighed_mass"] > (a["water_mass"] if basis is MassBasis.TOTAL else 0.0)


def _refuse(a, own, basis):
    """InputError for every unusable input of a scalar call, those of the throttled stage among them."""
    least = a["water_mass"] if basis is MassBasis.TOTAL else 0.0
    gather(lambda: admit(**{name: a[name] for name in own}),
           lambda: require("p_separator", np.array(a["p_separator"]), np.array(a["p_separator"] <= a["p_line"]),
                           "at most the line pressure"),
           lambda: require("weighed_mass", np.array(a["weighed_mass"]), np.array(_weighed_enough(a, basis)),
                           f"more than {least:g} kg", why="some steam went through the throttle",
                           hint="check which mass was weighed"),
           lambda: quality(a["p_separator"], **{name: value for name, value in a.items() if name not in own}))


def arriving_quality(x_throttled, *, drain_fraction=None, water_share=None):
    """Quality of what enters a separator [1], from that left to the throttle and what was drained.

    Give either ``drain_fraction``, the part of all that enters, or ``water_share``, the part of the water in
    it. ``x_throttled`` may be above 1, as a reach may. All broadcast together. Raises InputError.

    >>> round(arriving_quality(0.967, drain_fraction=0.09), 3), round(arriving_quality(0.967, water_share=0.75), 3)
    (0.88, 0.88)
    """
    drained = _one_of(drain_fraction, water_share)
    (x_t, part), scalar = admit(x_throttled=x_throttled, **drained)
    # a part of the water grows with the wetness, and of dry steam there is nothing to take a share of
    x = x_t * (1 - part) if water_share is None else np.where(
        x_t < 1, x_t * (1 - part) / (1 - part * np.minimum(x_t, 1.0)), x_t)
    return give_back(np.asarray(x), scalar)


def _one_of(drain_fraction, water_share) -> dict:
    if (drain_fraction is None) == (water_share is None):
        raise InputError(Fault("drained water", "both a part of the sample and of the water" if water_share is not None
                               else "nothing", "", "one of drain_fraction and water_share"))
    return {"drain_fraction": drain_fraction} if water_share is None else {"water_share": water_share}


def combined_quality(p_line, x_throttled, *, drain_fraction=None, water_share=None, p_separator=None,
                     vessel_loss=0.0):
    """Quality in the line [1] from that left to the throttle and what was drained.

    ``drain_fraction`` or ``water_share`` as for ``arriving_quality``, the first of them of the whole sample.
    Pressures [Pa], ``vessel_loss`` [J/kg of the whole sample]; all broadcast together. Raises InputError.

    >>> round(combined_quality(8e5, 0.967, drain_fraction=0.09), 3)
    0.88
    """
    drained = _one_of(drain_fraction, water_share)
    (p, x_t, p_s, q_s, part), scalar = admit(
        p_line=p_line, x_throttled=x_throttled, p_separator=p_line if p_separator is None else p_separator,
        vessel_loss=vessel_loss, **drained)
    require("p_separator", p_s, p_s <= p, "at most the line pressure")
    arriving = np.asarray(arriving_quality(x_t, **dict.fromkeys(drained, part)))
    line, sep = saturated(p), saturated(p_s)
    x = (np.asarray(sep.h_f + arriving * (sep.h_g - sep.h_f)) + q_s - line.h_f) / (line.h_g - line.h_f)
    return give_back(np.asarray(x), scalar)


def drained_fraction(p_line, x, water_share, *, p_separator=None, vessel_loss=0.0):
    """Part of the whole sample [1] that a separator drains when it takes ``water_share`` of the water there.

    Arguments as for ``combined_quality``, with the quality ``x`` in the line. Raises InputError.

    >>> round(drained_fraction(8e5, 0.88, 0.75), 4)
    0.09
    """
    arrays, scalar = admit(p_line=p_line, x=x, water_share=water_share, vessel_loss=vessel_loss,
                           p_separator=p_line if p_separator is None else p_separator)
    p, x, share, q_s, p_s = arrays
    require("p_separator", p_s, p_s <= p, "at most the line pressure")
    sep = saturated(p_s)
    arriving = (np.asarray(wet_steam(p, x).h) - q_s - sep.h_f) / (sep.h_g - sep.h_f)
    return give_back(np.asarray(share * np.maximum(1 - arriving, 0.0)), scalar)


def separated_reading(p_line, x, p_exhaust, drain_fraction, *, p_separator=None, vessel_loss=0.0,
                      **terms) -> SeparatedReading:
    """What must be seen behind a separator that drains ``drain_fraction`` of the sample [1].

    ``drain_fraction`` = M_w/(M_s + M_w). Arguments otherwise as for ``separated_quality``. Raises
    InputError also for draining more water than there is.

    >>> round(separated_reading(8e5, 0.88, 101_325.0, 0.09).x_throttled, 3)
    0.967
    """
    (p, x, p2, z, p_s, q_s), terms, scalar = _line_inputs(p_line, x, p_exhaust, p_separator, vessel_loss, terms,
                                                          drain_fraction=drain_fraction)
    h, sep = np.asarray(wet_steam(p, x).h) - q_s, saturated(p_s)
    x_t = ((h - z * sep.h_f) / (1 - z) - sep.h_f) / (sep.h_g - sep.h_f)
    require("drain_fraction", z, (x_t <= 1 + _ROUNDING) & (x_t >= -_ROUNDING), "no more than the water there is",
            hint="1 - x, and what the vessel condenses by its heat loss")
    x_t = np.clip(x_t, 0.0, 1.0)
    seen = exhaust_temperature(*((float(p_s), float(x_t), float(p2)) if scalar else (p_s, x_t, p2)), **terms)
    return SeparatedReading(give_back(x_t, scalar), seen.T_exhaust, seen.superheat, seen.status)


def drain_needed(p_line, x, p_exhaust, superheat=5.0, *, p_separator=None, vessel_loss=0.0, **terms) -> DrainNeeded:
    """The least part of the sample to drain [1] so that the rest arrives ``superheat`` [K] above saturation.

    Status NOT_SUPERHEATED, and no number, where not even dry steam could be read at that separator
    pressure. ``terms`` as for ``throttle.least_quality`` (heat_loss, velocities, recovery).

    >>> round(drain_needed(8e5, 0.88, 101_325.0).drain_fraction, 4)
    0.0831
    """
    (p, x, p2, wanted, p_s, q_s), terms, scalar = _line_inputs(p_line, x, p_exhaust, p_separator, vessel_loss, terms,
                                                               superheat=superheat)
    x_t = np.asarray(least_quality(p_s, p2, wanted, **terms))
    h, sep = np.asarray(wet_steam(p, x).h) - q_s, saturated(p_s)
    arriving = (h - sep.h_f) / (sep.h_g - sep.h_f)  # quality in the separator, after the vessel's loss
    possible = x_t <= 1
    z = 1 - np.divide(arriving, x_t, out=np.ones_like(x_t), where=possible & (arriving < x_t))
    share = np.divide(z, 1 - arriving, out=np.zeros_like(z), where=z > 0)
    status = np.where(possible, Status.OK, Status.NOT_SUPERHEATED).astype(np.int8)
    columns = (np.where(possible, c, np.nan) for c in (z, share, np.maximum(x_t, arriving)))
    return DrainNeeded(*(give_back(c, scalar) for c in columns), Status(int(status)) if scalar else status)


def _line_inputs(p_line, x, p_exhaust, p_separator, vessel_loss, terms, **other):
    """Inputs and ``terms`` of one shape; the throttle itself looks at the values of the terms."""
    named = {"p_line": p_line, "x": x, "p_exhaust": p_exhaust, **other,
             "p_separator": p_line if p_separator is None else p_separator, "vessel_loss": vessel_loss}
    whole, scalar = at_the_door(**named, **terms)
    arrays, _ = admit(**dict(zip(named, whole, strict=False)))
    require("p_separator", arrays[-2], arrays[-2] <= arrays[0], "at most the line pressure")
    shaped = dict(zip(terms, whole[len(named):], strict=True))
    return arrays, {name: float(a) for name, a in shaped.items()} if scalar else shaped, scalar
