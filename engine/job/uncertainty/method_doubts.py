"""What a separator or a heater adds to the doubts of a quality: their models over arrays, and their own inputs.

Masses, power and losses enter as factors around one, so that a tolerance in per cent is their whole doubt,
whether they were read or are only planned.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from engine.calorimeter import MassBasis, Status, electric_quality
from engine.job.assessment import Assessment
from engine.job.case import GAUGE
from engine.job.uncertainty.instruments import (
    Doubts,
    flow_doubts,
    pressure_doubts,
    thermometer_doubts,
    tolerance_doubts,
)
from engine.steam import saturated

DRAINED, WEIGHED, VESSEL = "drained water", "mass weighed", "vessel heat loss"
POWER, HEATER_LOSS = "electric power", "heater loss"
SHARES = (DRAINED, WEIGHED, VESSEL, POWER, HEATER_LOSS)  # groups whose doubt is a part of the quantity

Valued = Mapping[str, tuple[float, Doubts]]


@dataclass(frozen=True)
class SeparatedBalance:
    """A throttling balance behind a separator; call it with readings and factors to get (x, status) of the line.

    ``ratio`` is the separator's pressure over the line's. ``water`` and ``weighed`` are masses in kg, the
    second with the water in it where ``whole``; ``vessel_loss`` is in J/kg of the whole sample.
    """

    throttled: Callable
    ratio: float
    water: float
    weighed: float
    whole: bool
    vessel_loss: float

    def __call__(self, p_line, p_exhaust, T_exhaust, *, water_factor=1.0, weighed_factor=1.0, vessel_factor=1.0,
                 **stage) -> tuple[np.ndarray, np.ndarray]:
        p_separator = np.asarray(p_line) * self.ratio
        x, status = self.throttled(p_separator, p_exhaust, T_exhaust, **stage)
        water, weighed = self.water * water_factor, self.weighed * weighed_factor
        drained = water / (weighed if self.whole else water + weighed)
        line, sep = saturated(np.broadcast_to(p_line, x.shape)), saturated(np.broadcast_to(p_separator, x.shape))
        h = sep.h_f + (1.0 - drained) * x * (sep.h_g - sep.h_f) + self.vessel_loss * vessel_factor
        x = (h - line.h_f) / (line.h_g - line.h_f)
        told = status <= Status.LINE_SUPERHEATED
        read = np.where(x > 1.0, Status.LINE_SUPERHEATED, Status.OK)
        return x, np.where(told & (status != Status.NOT_SUPERHEATED), read, status)


@dataclass(frozen=True)
class HeatedBalance:
    """The balance of a heater; call it with readings and factors to get (x, status) of the line.

    ``ratio`` is the pressure after the heater over that of the line, where it follows the line; None where it
    is read by itself. x is not cut off at 1: what is above says that the line is superheated.
    """

    ratio: float | None
    power: float
    power_loss: float

    def __call__(self, p_line, T_heater, sample_flow, *, p_heater=None, power_factor=1.0,
                 loss_factor=1.0) -> tuple[np.ndarray, np.ndarray]:
        p3 = np.asarray(p_line) * self.ratio if p_heater is None else p_heater
        found = electric_quality(p_line, p3, T_heater, self.power * np.asarray(power_factor), sample_flow,
                                 power_loss=self.power_loss * np.asarray(loss_factor))
        x, hot = found.x.copy(), found.status == Status.LINE_SUPERHEATED
        if hot.any():
            line = saturated(np.broadcast_to(p_line, x.shape)[hot])
            x[hot] = (found.h_line[hot] - line.h_f) / (line.h_g - line.h_f)
        return x, found.status


def separated_model(a: Assessment, throttled: Callable) -> tuple[SeparatedBalance, Valued]:
    """The model of a case behind a separator around that of its throttle, and the inputs that come in addition."""
    case, si, s = a.case, a.si, a.separation
    whole = case["weighed_basis"] == MassBasis.TOTAL
    # a kilogram of sample: the tolerances are shares, so the size of the sample does not matter
    water, weighed = s.drain_fraction, 1.0 if whole else 1.0 - s.drain_fraction
    model = SeparatedBalance(throttled, s.p / si["p_line"], water, weighed, whole, s.vessel_loss)
    inputs = {"water_factor": (1.0, tolerance_doubts(si["water_tolerance"], DRAINED)),
              "weighed_factor": (1.0, tolerance_doubts(si["weighed_tolerance"], WEIGHED))}
    if s.vessel_loss:
        inputs["vessel_factor"] = (1.0, tolerance_doubts(si["vessel_loss_tolerance"], VESSEL))
    return model, inputs


def heated_model(a: Assessment, line: Doubts) -> tuple[HeatedBalance, Valued]:
    """The model of a case with a heater and all its inputs; ``line`` are the doubts of the line pressure."""
    case, si, h = a.case, a.si, a.heating
    inputs = {"p_line": (si["p_line"], line), "T_heater": (a.T_exhaust, thermometer_doubts(case, si, a.T_exhaust)),
              "sample_flow": (si["sample_flow"], flow_doubts(case, si, si["sample_flow"])),
              "power_factor": (1.0, tolerance_doubts(si["power_tolerance"], POWER))}
    ratio = 1.0
    if h.p < si["p_line"] * (1 - 1e-3):  # a pressure of its own, read with the exhaust gauge
        gauge = case["p_heater"].basis == GAUGE
        shown = h.p - si.p_barometer if gauge else h.p
        inputs["p_heater"], ratio = (h.p, pressure_doubts(case, si, "p_exhaust", shown, gauge)), None
    if h.power_loss:
        inputs["loss_factor"] = (1.0, tolerance_doubts(si["power_loss_tolerance"], HEATER_LOSS))
    return HeatedBalance(ratio, h.power, h.power_loss), inputs
