"""How long a cold calorimeter spoils its own reading, and how much steam the wait and the test take.

One lumped body between the steam and the surroundings, in three stages with closed solutions:

1. starved: the cold metal would condense more than arrives, so it takes all the heat of the sample;
2. condensing: still below saturation, but the condensate film limits the heat;
3. dry: above saturation only superheated vapour heats the body, through a film fifty times poorer.
   This stage decides the wait: the body nears its steady temperature as exp(-t/tau).

The vapour gives the body m cp eff (T_in - T), with eff = 1 - exp(-film area/(m cp)): a heat exchanger
with one side at rest (any text on heat transfer), so that the film sets the heat at a large flow and
the flow itself at a small one. The heat the body takes beyond its steady loss cools the steam on its
way to the thermometer, and that is the error of the reading: negative while the body warms.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from engine.calorimeter.rig_inputs import admit, require, require_error
from engine.steam import saturated, vapour
from engine.steam.arrays import at_the_door, give_back

STEEL_SPECIFIC_HEAT = 490.0  # J/(kg K), carbon and stainless steel near 100 °C
CONDENSING_FILM = 5000.0  # W/(m² K), film condensation on a small surface, order of magnitude (common practice)


class Stage(NamedTuple):
    """From ``start`` [s] the body leaves ``T`` [K] at ``slope`` [K/s], which decays at ``rate`` [1/s]."""

    start: float
    T: float
    slope: float
    rate: float


class SteamUsed(NamedTuple):
    """Steam drawn through the rig [kg]."""

    warming: float
    testing: float
    total: float


@dataclass(frozen=True)
class WarmUp:
    """One warm-up, or an array of them; made by ``warm_up``."""

    T_saturation: float  # K, at the exhaust pressure: end of condensation
    T_steady: float  # K, where the body ends, below the steam by its heat loss
    T_final: float  # K, what the thermometer shows in the end
    time_condensing: float  # s, until the exhaust is superheated at all
    time_constant: float  # s, of the dry stage
    effectiveness: float  # K of reading per K by which the body is short of steady
    condensate: float  # kg, formed while the body warms to saturation
    sample_flow: float  # kg/s
    cp: float  # J/(kg K), of the steam that enters
    stages: tuple[Stage, Stage, Stage]


def body_heat_capacity(mass, *, cp=STEEL_SPECIFIC_HEAT):
    """Heat capacity [J/K] of a metal ``mass`` [kg]; lagging adds little but lags much longer.

    >>> body_heat_capacity(3.0)
    1470.0
    """
    (M, cp), scalar = admit(mass=mass, cp=cp)
    return give_back(M * cp, scalar)


def warm_up(heat_capacity, area, sample_flow, p_exhaust, T_exhaust, T_start, T_ambient, *, film=100.0,
            conductance=0.0, condensing_film=CONDENSING_FILM) -> WarmUp:
    """A warm-up from start to end, for ``body_temperature``, ``reading_error`` and ``time_to_within``.

    ``heat_capacity`` [J/K] and steam-side ``area`` [m²] of the body, ``sample_flow`` [kg/s],
    ``p_exhaust`` [Pa], ``T_exhaust`` of the steam as it enters the body [K], ``T_start`` of the body
    and ``T_ambient`` [K], ``film`` of superheated steam and ``condensing_film`` [W/(m² K)],
    ``conductance`` to the surroundings [W/K]: scalars or arrays that broadcast. Raises InputError,
    also for steam that is not superheated and for a loss that would keep the body wet.

    3 kg of steel with 0.04 m² inside, 25 kg/h at 150 °C, started at 20 °C:

    >>> run = warm_up(1470.0, 0.04, 25 / 3600, 101_325.0, 423.15, 293.15, 293.15)
    >>> run.time_constant / 60, run.time_condensing
    (7.06, 32.9)
    """
    (C, A, m, p, T_in, T_0, T_a, a, UA, a_c), scalar = admit(
        heat_capacity=heat_capacity, area=area, sample_flow=sample_flow, p_exhaust=p_exhaust, T_exhaust=T_exhaust,
        T_start=T_start, T_ambient=T_ambient, film=film, conductance=conductance, condensing_film=condensing_film)
    sat = saturated(p)
    T_s = np.asarray(sat.T)
    require("T_exhaust", T_in, T_in > T_s, "more than the saturation temperature at the exhaust pressure",
            why="wet steam warms the body only to saturation, and the reading stays useless")
    steam = vapour(p, T_in)
    m_cp = m * np.asarray(steam.cp)
    effectiveness = -np.expm1(-a * A / m_cp)
    dry = effectiveness * m_cp
    steady = (dry * T_in + UA * T_a) / (dry + UA)
    require("conductance", UA, steady > T_s, "a heat loss that leaves the body above saturation",
            hint="lag the body, or draw a larger sample flow")

    supply, wet = m * np.asarray(steam.h - sat.h_f), a_c * A
    T_1 = np.maximum(T_0, np.minimum((wet * T_s + dry * T_in - supply) / (wet + dry), T_s))
    T_2 = np.maximum(T_1, T_s)
    starved = Stage(np.zeros_like(T_0), T_0, (supply - UA * (T_0 - T_a)) / C, UA / C)
    t_1 = _duration(starved, T_1)
    condensing = Stage(t_1, T_1, (wet * (T_s - T_1) + dry * (T_in - T_1) - UA * (T_1 - T_a)) / C, (wet + dry + UA) / C)
    t_2 = t_1 + _duration(condensing, T_2)
    rate = (dry + UA) / C
    stages = (starved, condensing, Stage(t_2, T_2, (steady - T_2) * rate, rate))
    condensate = C * (T_2 - T_0) / np.asarray(sat.h_g - sat.h_f)
    final = T_in - effectiveness * (T_in - steady)
    fields = (T_s, steady, final, t_2, 1 / rate, effectiveness, condensate, m, m_cp / m)
    return WarmUp(*(give_back(f, scalar) for f in fields),
                  tuple(Stage(*(give_back(f, scalar) for f in stage)) for stage in stages))


def body_temperature(run: WarmUp, time):
    """Temperature of the body [K] at ``time`` [s] from the start; broadcasts with the run's shape.

    >>> run = warm_up(1470.0, 0.04, 25 / 3600, 101_325.0, 423.15, 293.15, 293.15)
    >>> import numpy as np
    >>> (body_temperature(run, np.array([0.0, 10.0, 600.0, 3600.0])) - 273.15).tolist()
    [20.0, 80.6, 136.9, 149.99]
    """
    (time, _), scalar = _with_run(run, time)
    T = np.zeros_like(time)
    for stage in run.stages:
        since = np.maximum(time - stage.start, 0.0)
        T = np.where(time >= stage.start, stage.T + stage.slope * since * _decayed(stage.rate * since), T)
    return give_back(T, scalar)


def reading_error(run: WarmUp, time):
    """Error of the exhaust reading [K] at ``time`` [s], against what it will show in the end.

    Negative while the body warms. Until condensation ends the exhaust is wet and the thermometer
    shows saturation; afterwards the error is the effectiveness times what the body lacks.
    """
    (time, T_steady), scalar = _with_run(run, time)
    dry = -run.effectiveness * (T_steady - np.asarray(body_temperature(run, time)))
    return give_back(np.where(time < run.time_condensing, run.T_saturation - run.T_final, dry), scalar)


def storage_heat(run: WarmUp, time):
    """Heat that the body still stores, per kg of sample [J/kg], at ``time`` [s]: a heat loss that fades.

    It stands for the reading error of the dry stage as an enthalpy; before, there is nothing to read.

    >>> run = warm_up(1470.0, 0.04, 25 / 3600, 101_325.0, 423.15, 293.15, 293.15)
    >>> storage_heat(run, 1800.0)
    385.
    """
    error = np.asarray(reading_error(run, time))
    return give_back(-run.cp * error, error.ndim == 0)


def time_to_within(run: WarmUp, temperature_error):
    """Time [s] until the reading stays within ``temperature_error`` [K] of its final value.

    At the earliest the end of condensation: before it there is no superheated exhaust to read.

    >>> run = warm_up(1470.0, 0.04, 25 / 3600, 101_325.0, 423.15, 293.15, 293.15)
    >>> time_to_within(run, 0.1) / 60
    34.7
    """
    (error, T_steady), scalar = _with_run(run, temperature_error, name="temperature_error")
    require_error(error)
    short = np.abs(run.effectiveness * (T_steady - run.stages[2].T))
    return give_back(run.time_condensing + run.time_constant * np.log(np.maximum(short / error, 1.0)), scalar)


def steam_used(sample_flow, time, duration) -> SteamUsed:
    """Steam [kg] drawn by a warm-up of ``time`` [s] and a test of ``duration`` [s] at ``sample_flow`` [kg/s].

    >>> steam_used(25 / 3600, 2400.0, 3600.0)
    SteamUsed(warming=16.7, testing=25.0, total=41.7)
    """
    (m, t, d), scalar = admit(sample_flow=sample_flow, time=time, duration=duration)
    return SteamUsed(*(give_back(mass, scalar) for mass in (m * t, m * d, m * (t + d))))


def _with_run(run, value, name="time"):
    """``value`` checked and broadcast with the shape of the run."""
    (value,), one = admit(**{name: value})
    arrays, scalar = at_the_door(**{name: value, "T": run.T_steady})
    return arrays, one and scalar


def _decayed(z):
    """(1 - exp(-z))/z, 1 at z = 0."""
    return np.divide(-np.expm1(-z), z, out=np.ones_like(z), where=z != 0)


def _duration(stage: Stage, T_end):
    """Time [s] a stage takes to reach ``T_end`` [K]; 0 where it is there already."""
    direct = np.divide(T_end - stage.T, stage.slope, out=np.zeros_like(T_end), where=T_end > stage.T)
    z = stage.rate * direct
    return direct * np.divide(-np.log1p(-z), z, out=np.ones_like(z), where=z != 0)
