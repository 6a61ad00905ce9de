"""Electric superheating: dry and superheat the sample with a measured power instead of a throttle.

    h_line = h(p_heater, T_heater) - (P - P_loss)/sample_flow

First law (the principle of Callendar's electric calorimeter). It works at any pressure, so it reads
lines too low or too wet for throttling; in return the sample flow enters the result in full: 1 % of
the power per kilogram is 0.12 %pt of a line at 6 bar and 10 % wetness.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.calorimeter.rig_inputs import admit, gather, limits_of, require
from engine.calorimeter.status import Status
from engine.calorimeter.throttle import Quality
from engine.calorimeter.verdict import verdict
from engine.calorimeter.wet import wet_steam
from engine.steam import saturated, saturation_temperature, state_ph, vapour
from engine.steam.arrays import at_the_door, give_back, in_blocks

_WORDS = {"p_heater": "at most the line pressure", "power_loss": "less than the power"}


class HeaterReading(NamedTuple):
    """What the thermometer after the heater shows; ask ``status`` first."""

    T_heater: float | np.ndarray
    superheat: float | np.ndarray
    x_heater: float | np.ndarray  # quality after the heater, 1 where superheated
    status: Status | np.ndarray


def electric_quality(p_line, p_heater, T_heater, power, sample_flow, *, power_loss=0.0,
                     least_superheat=0.0) -> Quality:
    """Quality in the line from the state after the heater, its power and the sample flow.

    ``p_line``, ``p_heater`` [Pa], ``T_heater`` [K], ``power`` and ``power_loss`` to the surroundings
    [W], ``sample_flow`` [kg/s], ``least_superheat`` [K]: all broadcast together. A ``Quality``; its
    superheat is that after the heater. A scalar call raises InputError naming every unusable input.

    >>> result = electric_quality(6e5, 6e5, 451.98, 852.6, 12 / 3600)
    >>> round(result.x, 4), result.status.name
    (0.9, 'OK')
    """
    named = {"p_line": p_line, "p_heater": p_heater, "T_heater": T_heater, "power": power,
             "sample_flow": sample_flow, "power_loss": power_loss, "least_superheat": least_superheat}
    arrays, scalar = at_the_door(**named)
    if scalar:
        p, p3, _, P, _, lost, _ = arrays
        gather(lambda: admit(**named),
               lambda: require("p_heater", p3, p3 <= p, _WORDS["p_heater"]),
               lambda: require("power_loss", lost, lost < P, _WORDS["power_loss"]))
    *columns, status = in_blocks(lambda *block: _electric(dict(zip(named, block, strict=True))), 6, *arrays)
    if scalar:
        require("power", P, status < Status.OUT_OF_RANGE, "a power that fits the sample flow",
                why="the energy balance leaves the line colder than saturated water, or hotter than steam is covered",
                hint="check the power and the sample flow")
        return Quality(*map(float, columns), Status(int(status)))
    return Quality(*columns, status.astype(np.int8))


def _electric(a):
    """The columns of ``Quality`` over 1-d arrays by name."""
    inside = np.logical_and.reduce([limits_of(name).hold(values) for name, values in a.items()])
    inside &= (a["p_heater"] <= a["p_line"]) & (a["power_loss"] < a["power"])
    missing = np.logical_or.reduce([np.isnan(values) for values in a.values()])
    p, p3, T3, P, m, lost, least = (np.where(inside, values, harmless) for values, harmless in zip(
        a.values(), (1e6, 1e6, 500.0, 1.0, 1.0, 0.0, 0.0), strict=True))
    T_sat = saturation_temperature(p3)
    h3 = vapour(p3, np.maximum(T3, T_sat)).h
    return verdict(p, h3 - (P - lost) / m, ~(T_sat < T3), T3 - T_sat, least, missing, inside)


def power_needed(p_line, x, p_heater, sample_flow, superheat=5.0, *, power_loss=0.0):
    """Electric power [W] that brings the sample ``superheat`` [K] above saturation; 0 if it is there anyway.

    ``p_line``, ``p_heater`` [Pa], ``x`` [1], ``sample_flow`` [kg/s], ``power_loss`` [W]: scalars or
    arrays that broadcast. Raises InputError.

    >>> power_needed(6e5, 0.90, 6e5, 12 / 3600, 20.0)
    852.6
    """
    (p, x, p3, m, dT, lost), scalar = _line_inputs(p_line, x, p_heater, sample_flow, superheat=superheat,
                                                   power_loss=power_loss)
    after = saturated(p3)
    heat = m * (np.asarray(vapour(p3, after.T + dT).h) - np.asarray(wet_steam(p, x).h)) + lost
    return give_back(np.maximum(heat, 0.0), scalar)


def least_electric_quality(p_line, p_heater, power, sample_flow, superheat=5.0, *, power_loss=0.0):
    """The reach: the quality in the line that this power just brings ``superheat`` [K] above saturation.

    Arguments as for ``power_needed``, with the ``power`` [W]; arrays broadcast. Below 0 where the power
    would superheat even water at the boil, above 1 where it would not do for dry steam. Raises InputError.

    >>> round(least_electric_quality(6e5, 6e5, 852.6, 12 / 3600, 20.0), 4)
    0.9
    """
    (p, P, p3, m, dT, lost), scalar = admit(p_line=p_line, power=power, p_heater=p_heater, sample_flow=sample_flow,
                                            superheat=superheat, power_loss=power_loss)
    require("p_heater", p3, p3 <= p, _WORDS["p_heater"])
    require("power_loss", lost, lost < P, _WORDS["power_loss"])
    line, after = saturated(p), saturated(p3)
    h = np.asarray(vapour(p3, after.T + dT).h) - (P - lost) / m
    return give_back(np.asarray((h - line.h_f) / (line.h_g - line.h_f)), scalar)


def heater_reading(p_line, x, p_heater, power, sample_flow, *, power_loss=0.0, least_superheat=0.0) -> HeaterReading:
    """What the thermometer after the heater must show; the inverse of ``electric_quality``.

    Arguments as there, with ``x`` of the line. NOT_SUPERHEATED where the power only dries.

    >>> round(heater_reading(6e5, 0.90, 6e5, 852.6, 12 / 3600).T_heater - 273.15, 2)
    178.82
    """
    (p, x, p3, m, P, lost, least), scalar = _line_inputs(
        p_line, x, p_heater, sample_flow, power=power, power_loss=power_loss, least_superheat=least_superheat)
    require("power_loss", lost, lost < P, _WORDS["power_loss"])
    h3 = np.asarray(wet_steam(p, x).h) + (P - lost) / m
    after, state = saturated(p3), state_ph(*np.atleast_1d(p3, h3))
    state = state._replace(T=state.T.reshape(h3.shape), x=state.x.reshape(h3.shape))
    require("power", P, np.isfinite(state.T), "less: the steam would pass 1073.15 K",
            hint="check the power and the sample flow")
    superheat = np.asarray(state.T) - after.T
    status = np.select([~(h3 > after.h_g), superheat < least], [Status.NOT_SUPERHEATED, Status.THIN_MARGIN],
                       Status.OK).astype(np.int8)
    return HeaterReading(*(give_back(np.asarray(c), scalar) for c in (state.T, superheat, state.x)),
                         Status(int(status)) if scalar else status)


def _line_inputs(p_line, x, p_heater, sample_flow, **others):
    arrays, scalar = admit(p_line=p_line, x=x, p_heater=p_heater, sample_flow=sample_flow, **others)
    require("p_heater", arrays[2], arrays[2] <= arrays[0], _WORDS["p_heater"])
    return arrays, scalar
