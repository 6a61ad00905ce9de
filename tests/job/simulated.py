"""Logs made from a known truth: warm-up, noise, a lagging thermometer, a swinging line, instruments in error."""

import io

import numpy as np

from engine.calorimeter import exhaust_temperature
from engine.job.assessment.balance import balance_of
from engine.job.case import resolve
from engine.job.uncertainty import leg_pressure, prepare, reading_of
from engine.measurement.logbook import read_log
from engine.measurement.logbook.write import write_log
from engine.steam import saturation_temperature


def steady_temperature(case, x, p_line, p_exhaust):
    """What the thermometer reads once all is warm, for a true quality: loss and velocity follow from it."""
    si = resolve(case)
    balance, T = balance_of(case, si), saturation_temperature(p_exhaust) + 20.0
    for _ in range(8):
        q, c2 = balance.terms(p_line, p_exhaust, T, sample_flow=si["sample_flow"], recovery=si["recovery"])
        T = exhaust_temperature(p_line, x, p_exhaust, heat_loss=q, line_velocity=balance.line_velocity,
                                exhaust_velocity=c2, recovery=si["recovery"]).T_exhaust
    return T


def noise(n, s, rho, rng):
    """First-order noise of standard deviation ``s`` whose neighbours are correlated by ``rho``."""
    z, steps = np.empty(n), rng.standard_normal(n)
    z[0] = steps[0]
    for k in range(1, n):
        z[k] = rho * z[k - 1] + np.sqrt(1 - rho * rho) * steps[k]
    return s * z


def lagged(values, time, tau):
    """A first-order thermometer."""
    if not tau:
        return values
    out, keep = values.copy(), np.exp(-np.diff(time) / tau)
    for k in range(1, len(values)):
        out[k] = values[k] + (out[k - 1] - values[k]) * keep[k - 1]
    return out


def instrument_errors(case, rng):
    """One draw of what each reading is wrong by, from the case's own instruments: name -> error in SI."""
    si = resolve(case)
    reading = reading_of(case, si, si["T_exhaust"])
    shared, errors = {}, {}
    for i in prepare(case, si, reading).inputs:
        total = 0.0
        for c in i.components:
            flat = c.distribution == "rectangular"
            z = shared.setdefault(c.source or f"{i.name} {c.name}",
                                  rng.uniform(-1, 1) * np.sqrt(3) if flat else rng.standard_normal())
            total += c.sign * c.u * z
        errors[i.name] = total
    return errors


def channels_of(case, x, *, minutes=60.0, step=10.0, warm_up=0.0, tau=360.0, lag=0.0, swing=0.0, period=240.0,
                ramp=0.0, ramp_minutes=0.0, noise_T=0.0, noise_p=0.0, rho=0.0, errors=None, seed=0):
    """(time, channels as shown, basis) of a rig that samples steam of quality ``x``.

    ``warm_up`` [K] is how far the reading starts below its steady value, ``swing`` [Pa] the amplitude of the
    line pressure, ``ramp`` [Pa] what it gains over the first ``ramp_minutes`` before it stays.
    """
    rng, si, errors = np.random.default_rng(seed), resolve(case), errors or {}
    time = np.arange(0.0, 60 * minutes + step / 2, step)
    p_line = si["p_line"] + swing * np.sin(2 * np.pi * time / period)
    if ramp:
        p_line += ramp * np.minimum(time / (60 * ramp_minutes), 1.0)
    p_exhaust = np.full(time.size, si["p_exhaust"])
    T = steady_temperature(case, x, p_line, p_exhaust)
    if warm_up:
        T = np.maximum(T - warm_up * np.exp(-time / tau), saturation_temperature(p_exhaust))
    T = lagged(T, time, lag) + noise(time.size, noise_T, rho, rng) + errors.get("T_exhaust", 0.0)
    shown = {"p_line": p_line + leg_pressure(si) - si.p_barometer + errors.get("p_line", 0.0)
             + noise(time.size, noise_p, rho, rng),
             "p_exhaust": p_exhaust - si.p_barometer + errors.get("p_exhaust", 0.0), "T_exhaust": T}
    return time, shown, {"p_line": "gauge", "p_exhaust": "gauge"}


def log_of(case, x, **how):
    """The same written as a file and read back."""
    return log_from(*channels_of(case, x, **how))


def log_from(time, shown, basis):
    """Channels written as a file and read back."""
    target = io.BytesIO()
    write_log(target, shown, time=time, basis=basis)
    return read_log(target.getvalue())
