"""The heat of a simulated rig: what its exhaust comes to, and how the metal of its body gets there.

The steady reading is the energy balance of the calorimeter. The body warms by ``calorimeter.warm_up``
from wherever it stands and follows swings of the steam with the same time constant. In wet steam it
goes to saturation, as fast as the film or the steam allows; there only the order of magnitude is sure.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter import body_temperature, warm_up
from engine.calorimeter.warmup import CONDENSING_FILM
from engine.job.rehearsal.lag import lagged
from engine.job.rehearsal.model import Rig
from engine.steam import saturated, state_ph, vapour

_ROUNDS = 3  # the heat loss depends on the temperature it changes, by a hundredth


@dataclass(frozen=True)
class Due:
    """What the exhaust comes to with a warm body, 1-d: temperature as read [K], whether wet; its saturation."""

    T: np.ndarray
    wet: np.ndarray
    T_saturation: np.ndarray


def due_of(rig: Rig, p, x, flow, p2) -> Due:
    """The steady exhaust at line pressures, qualities, flows and exhaust pressures (1-d arrays, flow above 0).

    h_line + c1²/2 = h(p2, T) + (1 - r) c2²/2 + UA (T - T_ambient)/flow, saturation where the stream is wet.
    """
    sat = saturated(p2)
    T = np.maximum(rig.point.reading.T_exhaust, sat.T)
    available = rig.enthalpy(p, x) + 0.5 * rig.line_velocity**2
    area = np.pi / 4 * rig.exhaust_bore**2
    for _ in range(_ROUNDS):
        c2 = flow * np.asarray(vapour(p2, T).v) / area
        stagnant = available - rig.body.conductance * (T - rig.T_ambient) / flow
        h_read = np.maximum(stagnant - 0.5 * (1.0 - rig.recovery) * c2**2, sat.h_f)
        T = np.maximum(np.asarray(state_ph(p2, h_read).T), sat.T)
    wet = stagnant - 0.5 * c2**2 < sat.h_g
    return Due(np.where(wet, sat.T, T), wet, np.asarray(sat.T))


@dataclass(frozen=True)
class Middles:
    """What the heat of the body over time rests on, one element per piece: the rig at its mean line pressure.

    ``T_in`` [K] of the steam as it enters the body; ``wall`` [W/K] from metal to surroundings; ``follows`` kelvin
    by which a warm body moves with one of its exhaust; ``warms`` where it gets above saturation at all.
    """

    flow: np.ndarray
    p2: np.ndarray
    T: np.ndarray
    T_in: np.ndarray
    wall: np.ndarray
    follows: np.ndarray
    warms: np.ndarray
    x: np.ndarray


def middles_of(rig: Rig, flow, p2, x, due: Due) -> Middles:
    """The middles of pieces with these flows, exhaust pressures, qualities and steady readings (1-d arrays)."""
    h_in = np.asarray(vapour(p2, due.T).h) + rig.body.conductance * (due.T - rig.T_ambient) / flow
    T_in = np.asarray(state_ph(p2, h_in).T)
    m_cp = flow * np.asarray(vapour(p2, np.maximum(T_in, due.T)).cp)
    dry = -np.expm1(-rig.body.film * rig.body.area / m_cp) * m_cp
    # the case's conductance is that from steam to surroundings; the metal's own lacks the film inside
    film = np.minimum(rig.body.conductance * (1.0 / dry - 1.0 / m_cp), 0.9)
    wall = rig.body.conductance / (1.0 - film)
    steady = (dry * T_in + wall * rig.T_ambient) / (dry + wall)
    return Middles(flow, p2, due.T, T_in, wall, 1.0 - film, ~due.wet & (film < 0.9) & (steady > due.T_saturation), x)


@dataclass(frozen=True)
class Followed:
    """Body and exhaust over one piece, and the body at its end [K]."""

    T_body: np.ndarray
    T_exhaust: np.ndarray
    end: float


def followed(rig: Rig, middles: Middles, k: int, due: Due, step: float, T_body: float) -> Followed:
    """Piece ``k``, entered with the body at ``T_body`` [K]; ``due`` holds at its times, ``step`` [s] apart."""
    since = step * np.arange(due.T.size + 1)
    if not middles.warms[k]:
        body = _wetted(rig, middles, k, since, T_body)
        return Followed(body[:-1], due.T, float(body[-1]))
    run = warm_up(rig.body.heat_capacity, rig.body.area, middles.flow[k], middles.p2[k], middles.T_in[k], T_body,
                  rig.T_ambient, film=rig.body.film, conductance=middles.wall[k])
    away = middles.follows[k] * (due.T - middles.T[k])  # swings about the middle: the body follows them late
    late = lagged(away, 0.0, step, run.time_constant)
    body = np.asarray(body_temperature(run, since)) + np.r_[late, late[-1]]
    short = run.effectiveness * (body[:-1] - run.T_steady - away)
    warm = np.where(since[:-1] < run.time_condensing, due.T_saturation, np.maximum(due.T + short, due.T_saturation))
    return Followed(body[:-1], np.where(due.wet, due.T_saturation, warm), float(body[-1]))


def cooled(rig: Rig, n: int, step: float, T_body: float) -> Followed:
    """``n`` steps without steam: the body cools, and the steam that stands in it with the body."""
    since = step * np.arange(n + 1)
    body = rig.T_ambient + (T_body - rig.T_ambient) * np.exp(-rig.body.conductance / rig.body.heat_capacity * since)
    return Followed(body[:-1], body[:-1], float(body[-1]))


def _wetted(rig: Rig, middles: Middles, k: int, since: np.ndarray, T_body: float) -> np.ndarray:
    """The body on its way to saturation in wet steam."""
    sat = saturated(float(middles.p2[k]))
    apart = T_body - sat.T
    if not apart:
        return np.full(since.size, T_body)
    share = 1.0 if apart < 0 else max(1.0 - float(middles.x[k]), 0.02)  # steam to condense, or water to boil off
    most = float(middles.flow[k]) * share * (sat.h_g - sat.h_f) / abs(apart)
    return sat.T + apart * np.exp(-min(CONDENSING_FILM * rig.body.area, most) / rig.body.heat_capacity * since)


def settled_superheat(rig: Rig) -> float:
    """What is left at the exhaust of a warm rig with its orifice and its valve open [K]; below 0, and by how many
    kelvin of enthalpy, where the exhaust stays wet."""
    p, x = np.array([rig.p_line]), np.array([rig.x])
    flow = rig.flow(p, 1.0)
    p2 = rig.pipe(flow)
    due = due_of(rig, p, x, flow, p2)
    if not due.wet[0]:
        return float(due.T[0] - due.T_saturation[0])
    sat = saturated(float(p2[0]))
    stream = float((rig.enthalpy(p, x) - rig.body.conductance * (sat.T - rig.T_ambient) / flow)[0])
    return min((stream - sat.h_g) / vapour(float(p2[0]), sat.T).cp, 0.0)
