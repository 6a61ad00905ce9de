"""The pressure a real exhaust pipe leaves at the thermometer: friction, fittings, velocity, choking.

Compressible flow at constant temperature through a round pipe (any text on gas flow):

    p_a² = p_b² + G² p v (f L/D + K + 2 ln(p_a/p_b))

from the thermometer (a) to the open end (b), with p v of real steam in place of R T, f by Colebrook
and K the fittings between the two. The open end itself is not a loss: the jet leaves at the pressure
outside and spends its energy there. At constant temperature the flow can speed up only until
G² p v = p_b² (Mach 1/sqrt(kappa), 0.88 for steam); past that the end chokes and its pressure rises above
the surroundings. A real pipe chokes a little later, at Mach 1, so this errs towards warning early.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter.friction import STEEL_ROUGHNESS, fittings_loss, friction_factor, steam_viscosity
from engine.calorimeter.rig_inputs import admit, require
from engine.calorimeter.status import Status
from engine.steam import P_SAT_MAX, saturation_temperature, vapour
from engine.steam.arrays import give_back
from engine.steam.errors import Fault, InputError


@dataclass(frozen=True)
class ExhaustPipe:
    """One exhaust pipe, or an array of them. Velocities and Mach numbers are by static states."""

    p_exhaust: float  # Pa, at the thermometer
    T_exhaust: float  # K, as supplied, at that pressure
    back_pressure: float  # Pa, p_exhaust above the discharge
    velocity: float  # m/s at the thermometer
    exit_velocity: float  # m/s at the open end
    mach: float  # at the thermometer
    exit_mach: float
    reynolds: float
    friction_factor: float  # Darcy
    resistance: float  # f L/D + K
    choked: bool | np.ndarray  # the open end runs at its own pressure, above the discharge
    status: Status | np.ndarray  # NOT_SUPERHEATED: saturated vapour was taken for the volume


def exhaust_pipe(sample_flow, exhaust_bore, length, p_discharge, T_exhaust, *, roughness=STEEL_ROUGHNESS,
                 loss_coefficient=0.0, fittings=None) -> ExhaustPipe:
    """The exhaust pressure at the thermometer, and what the steam does on its way out.

    ``sample_flow`` [kg/s], ``exhaust_bore`` and ``length`` from the thermometer to the open end [m],
    ``p_discharge`` around the open end [Pa], ``T_exhaust`` [K]: scalars or arrays that broadcast.
    ``T_exhaust`` may be a function of the exhaust pressure, since a back pressure also moves the
    temperature; the two are then solved together. ``roughness`` [m]; ``loss_coefficient`` [1] is
    added to that of ``fittings``, a ``{name: number}`` of ``friction.FITTINGS``.

    Raises InputError; also for a pipe so narrow that the pressure would leave the range of the
    steam properties. Steam not superheated is answered, with the volume of saturated vapour.

    40 kg/h through 3 m of 26.6 mm pipe with fittings of K = 4, steam at 130 °C to the atmosphere:

    >>> pipe = exhaust_pipe(40 / 3600, 0.0266, 3.0, 101_325.0, 403.15, loss_coefficient=4.0)
    >>> pipe.back_pressure / 1000, pipe.exit_velocity, pipe.choked
    (2.5, 36., False)
    """
    constant = {} if callable(T_exhaust) else {"T_exhaust": T_exhaust}
    (m, D, L, p_d, rough, K, *T), scalar = admit(
        sample_flow=sample_flow, exhaust_bore=exhaust_bore, length=length, p_discharge=p_discharge,
        roughness=roughness, loss_coefficient=loss_coefficient, **constant)

    def temperature(p):
        return T[0] if constant else admit(T_exhaust=T_exhaust(p), p_exhaust=p)[0][0]

    G = m / (np.pi / 4 * D * D)
    T_a = temperature(p_d)
    reynolds = G * D / np.asarray(steam_viscosity(1 / _volume(p_d, T_a)[1], T_a))
    f = np.asarray(friction_factor(reynolds, rough / D))
    resistance = f * L / D + K + (np.asarray(fittings_loss(fittings, reynolds, D)) if fittings else 0.0)

    p_a, p_b = p_d, p_d
    for _ in range(40):  # p v and T hardly move with pressure: a few rounds
        middle = (p_a + p_b) / 2
        pv = middle * _volume(middle, T_a)[1]
        own = G * np.sqrt(p_b * _volume(p_b, T_a)[1])
        p_b = np.maximum(p_d, own)
        before, p_a = p_a, _upstream(p_b, G * G * pv, resistance)
        require("exhaust_bore", D, p_a <= P_SAT_MAX, "a bore wide enough for this flow",
                why="the exhaust pressure would pass the range of the steam properties")
        T_a = temperature(p_a)
        if np.all(np.abs(p_a - before) <= 1e-11 * p_a):
            break
    else:
        raise InputError(Fault("exhaust temperature as a function of pressure", "no steady answer", "",
                               "a temperature that changes little with pressure", name="T_exhaust"))

    above, v_a, sound = _volume(p_a, T_a)
    _, v_b, exit_sound = _volume(p_b, T_a)
    fields = (p_a, T_a, p_a - p_d, G * v_a, G * v_b, G * v_a / sound, G * v_b / exit_sound, reynolds, f, resistance)
    choked, status = p_b > p_d, np.where(above, Status.OK, Status.NOT_SUPERHEATED).astype(np.int8)
    if scalar:
        return ExhaustPipe(*(float(a) for a in fields), bool(choked), Status(int(status)))
    return ExhaustPipe(*(np.array(a, dtype=float) for a in fields), choked, status)


def exhaust_velocity(sample_flow, exhaust_bore, p_exhaust, T_exhaust):
    """Velocity of the exhaust steam [m/s]: flow times specific volume over area.

    ``sample_flow`` [kg/s], ``exhaust_bore`` [m], ``p_exhaust`` [Pa], ``T_exhaust`` [K]: scalars or
    arrays. Raises InputError where the steam is not superheated.

    >>> exhaust_velocity(40 / 3600, 0.0157, 101_325.0, 403.15)
    104.
    """
    (m, D, p, T), scalar = admit(sample_flow=sample_flow, exhaust_bore=exhaust_bore, p_exhaust=p_exhaust,
                                 T_exhaust=T_exhaust)
    require("T_exhaust", T, np.asarray(saturation_temperature(p)) <= T, "at least saturation at the exhaust pressure",
            why="the volume of wet steam does not follow from pressure and temperature")
    return give_back(m * np.asarray(vapour(p, T).v) / (np.pi / 4 * D * D), scalar)


def _volume(p, T):
    """Whether superheated, specific volume and sound speed; saturated vapour stands in for wet steam."""
    T_sat = np.asarray(saturation_temperature(p))
    steam = vapour(p, np.maximum(T, T_sat))
    return T_sat < T, np.asarray(steam.v), np.asarray(steam.sound_speed)


def _upstream(p_b, momentum, resistance):
    """p_a of p_a² = p_b² + momentum (resistance + 2 ln(p_a/p_b)), momentum = G² p v <= p_b².

    Newton from above on a function that is convex there, so every step stays above the answer.
    """
    p_a = np.sqrt(p_b * p_b + momentum * resistance) + 2 * np.sqrt(momentum)
    for _ in range(60):
        excess = p_a * p_a - p_b * p_b - momentum * (resistance + 2 * np.log(p_a / p_b))
        slope = 2 * (p_a - momentum / p_a)
        step = np.divide(excess, slope, out=np.zeros_like(p_a), where=(excess > 0) & (slope > 0))
        p_a = np.maximum(p_a - step, p_b)
        if np.all(step <= 1e-13 * p_a):
            break
    return p_a
