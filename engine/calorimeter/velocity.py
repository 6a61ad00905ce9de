"""Velocities in the sample: what they are, what kinetic energy they carry, and what that does to the quality."""

from __future__ import annotations

import numpy as np

from engine.calorimeter.rig_inputs import LEAST, MOST
from engine.calorimeter.throttle import saturation_enthalpies
from engine.steam import T_MAX, if97
from engine.steam.arrays import at_the_door, give_back, in_blocks, refuse_outside
from engine.steam.errors import InputError
from engine.steam.saturation import refuse_p


def _positive(*optional: str, **named):
    """Arrays of positive numbers (0 allowed for the ``optional`` ones)."""
    arrays, scalar = at_the_door(**named)
    faults = []
    for name, values in zip(named, arrays, strict=True):
        zero = name in optional
        inside = (values <= MOST) & ((values >= 0) if zero else (values >= LEAST))
        limit = f"{'0 or more' if zero else 'more than 0'}, and finite"
        if (np.isfinite(values) & (values > 0) & ~inside).any():
            limit += f", of a size from {LEAST:g} to {MOST:g}"
        faults += refuse_outside(name, values, inside, limit,
                                 why="it is the size of something that is there", hint="check the value and its unit")
    if faults:
        raise InputError(*faults)
    return arrays, scalar


def velocity(sample_flow, bore, v):
    """Velocity [m/s] of ``sample_flow`` [kg/s] in a round ``bore`` [m] at specific volume ``v`` [m³/kg].

    Continuity. Any shapes; raises InputError for what is not positive (the flow may be 0).

    >>> velocity(40 / 3600, 0.0157, 1.791)  # 40 kg/h of exhaust steam in a 15.7 mm bore
    102.79
    """
    (flow, bore, v), scalar = _positive("sample_flow", sample_flow=sample_flow, bore=bore, v=v)
    return give_back(flow * v / (0.25 * np.pi * bore**2), scalar)


def velocity_ratio(v_line, v_exhaust, line_bore, exhaust_bore):
    """Exhaust velocity over line velocity for one mass flow through two round bores [1].

    c2/c1 = (v2/v1) (d1/d2)², volumes [m³/kg], bores [m]; any shapes.

    >>> velocity_ratio(0.19, 1.79, 0.015, 0.015)
    9.42105
    """
    (v1, v2, d1, d2), scalar = _positive(v_line=v_line, v_exhaust=v_exhaust, line_bore=line_bore,
                                         exhaust_bore=exhaust_bore)
    return give_back(v2 / v1 * (d1 / d2) ** 2, scalar)


def bore_ratio_keeping_velocity(v_line, v_exhaust):
    """Exhaust bore over line bore that leaves the velocity as it was: sqrt(v2/v1) [1]; any shapes.

    >>> bore_ratio_keeping_velocity(0.19, 1.71)
    3.0
    """
    (v1, v2), scalar = _positive(v_line=v_line, v_exhaust=v_exhaust)
    return give_back(np.sqrt(v2 / v1), scalar)


def kinetic_energy(velocity):
    """c²/2 [J/kg] at ``velocity`` [m/s]; any shape.

    >>> kinetic_energy(100.0)
    5000.0
    """
    (c,), scalar = _positive("velocity", velocity=velocity)
    return give_back(0.5 * c * c, scalar)


def kinetic_superheat(velocity, p, T):
    """Kinetic energy in kelvin of superheat: c²/(2 cp) at ``p`` [Pa, absolute] and ``T`` [K]; any shapes.

    cp is that of the vapour at (p, T), taken at saturation where T lies below it.

    >>> kinetic_superheat(100.0, 101_325.0, 403.15)
    2.49
    """
    (c, p, T), scalar = _positive("velocity", velocity=velocity, p=p, T=T)
    faults = refuse_p(p) + refuse_outside("T", T, T <= T_MAX, f"at most {T_MAX} K",
                                          why="the vapour equations end there", hint="check the unit: °C or °F")
    if faults:
        raise InputError(*faults)
    cp = in_blocks(lambda a, b: (if97.vapour_h_cp(a, np.maximum(b, if97.saturation_T(a)))[1],), 1, p, T)[0]
    return give_back(0.5 * c * c / cp, scalar)


def kinetic_quality(velocity, p_line):
    """Kinetic energy as a share of quality: c²/2 over h_fg at ``p_line`` [Pa, absolute] [1]; any shapes.

    >>> kinetic_quality(100.0, 10e5) * 100  # %pt
    0.248
    """
    (c, p), scalar = _positive("velocity", velocity=velocity, p_line=p_line)
    return give_back(0.5 * c * c / _latent(p), scalar)


def least_exhaust_bore(sample_flow, v_exhaust, p_line, kinetic_error):
    """Least exhaust bore [m] that keeps the kinetic error of the quality within ``kinetic_error`` [1].

    From c²/2 = kinetic_error * h_fg(p_line) and continuity; flow [kg/s], volume [m³/kg], pressure
    [Pa, absolute]; any shapes.

    >>> least_exhaust_bore(40 / 3600, 1.791, 10e5, 0.001) * 1e3  # mm for 0.1 %pt
    19.98
    """
    (flow, v, p, error), scalar = _positive(sample_flow=sample_flow, v_exhaust=v_exhaust, p_line=p_line,
                                            kinetic_error=kinetic_error)
    return give_back(np.sqrt(4.0 * flow * v / (np.pi * np.sqrt(2.0 * error * _latent(p)))), scalar)


def _latent(p_line: np.ndarray) -> np.ndarray:
    """h_fg [J/kg]; refuses pressures without saturation."""
    if faults := refuse_p(p_line, "p_line"):
        raise InputError(*faults)

    def latent(p):
        _, h_f, h_g = saturation_enthalpies(p)
        return (h_g - h_f,)

    return in_blocks(latent, 1, p_line)[0]
