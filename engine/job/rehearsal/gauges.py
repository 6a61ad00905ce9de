"""The instruments of a simulated rig, as good as their class, and the sheet on which they are read."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from engine.calorimeter import water_leg
from engine.job.case import T_LEG
from engine.job.rehearsal.scenario import Scenario
from engine.job.rig.point import Point
from engine.job.uncertainty.instruments import (
    Doubts,
    barometer_doubts,
    flow_doubts,
    pressure_doubts,
    rests_on_barometer,
    thermometer_doubts,
)
from engine.steam import saturation_temperature
from engine.steam.errors import InputError
from engine.steam.units import ZERO_CELSIUS

# what a person reads off where the case does not say, and how a needle or a display trembles (common practice)
STEPS = {"exhaust": 100.0, "exhaust thermometer": 0.1, "line thermometer": 0.1}  # Pa, K, K
TREMBLE = {"line": 1.5e-3, "exhaust": 60.0, "exhaust thermometer": 0.04, "line thermometer": 0.1}  # line: of pressure
BAROMETER_STEP = 10.0  # Pa
LINE_THERMOMETER = 0.3  # K, half width of what it may be off
_NICE = (1.0, 2.0, 5.0, 10.0)


@dataclass(frozen=True)
class Gauge:
    """One instrument; SI. ``on_barometer``: it shows what is above the atmosphere. ``step`` is what is read off,
    counted from ``zero``; ``error`` what it is off, ``tremble`` the standard deviation of its pointer; ``low`` and
    ``high`` are the ends of its scale."""

    on_barometer: bool
    step: float
    error: float
    tremble: float
    low: float
    high: float
    zero: float = 0.0

    def standing(self, true: np.ndarray) -> np.ndarray:
        """Where the pointer stands on the whole."""
        return np.clip(true + self.error, self.low, self.high)

    def shown(self, true: np.ndarray, noise: np.ndarray) -> np.ndarray:
        """What a person reads where ``true`` stands before it, with ``noise`` of unit variance."""
        value = np.clip(true + self.error + self.tremble * noise, self.low, self.high)
        return self.zero + self.step * np.rint((value - self.zero) / self.step) if self.step else value


@dataclass(frozen=True)
class Sheet:
    """What the sheet has people believe; SI.

    ``line_gauge_absolute``: the line gauge is entered as it is; ``p_barometer`` what is added to gauges;
    ``barometer_read``: it was read at the site today; ``sample_flow`` and ``p_exhaust`` as planned.
    """

    line_gauge_absolute: bool
    exhaust_gauge_absolute: bool
    p_barometer: float
    barometer_read: bool
    sample_flow: float
    p_exhaust: float


def gauges_of(scenario: Scenario, point: Point) -> dict[str, Gauge]:
    """The four instruments: "line" and "exhaust" gauge, "exhaust thermometer", "line thermometer"."""
    case, si, r = point.case, point.line, point.reading
    shown = {"line": si["p_line"] + water_leg(si["leg_height"] or 0.0, T_LEG), "exhaust": r.p_exhaust}
    gauges = {}
    for name, entry in (("line", "p_line"), ("exhaust", "p_exhaust")):
        on_barometer = rests_on_barometer(case, entry)
        at = shown[name] - si.p_barometer if on_barometer else shown[name]
        tremble = TREMBLE[name] * at if name == "line" else TREMBLE[name]
        step = si[f"{name}_gauge_resolution"] or (nice_below(0.01 * at) if name == "line" else STEPS[name])
        error = drawn(scenario, f"{name} gauge", lambda n=entry, a=at: pressure_doubts(case, si, n, a, False))
        error -= si[f"{name}_gauge_correction"] or 0.0  # known, and to be put right by whoever reads
        low, high = _scale(si, name, on_barometer, at)
        gauges[name] = Gauge(on_barometer, step, error, tremble, low, high)
    off = drawn(scenario, "thermometer", lambda: thermometer_doubts(case, si, r.T_exhaust))
    off -= si["thermometer_correction"] or 0.0
    gauges["exhaust thermometer"] = Gauge(False, si["thermometer_resolution"] or STEPS["exhaust thermometer"], off,
                                          TREMBLE["exhaust thermometer"], 233.15, 773.15, ZERO_CELSIUS)
    off = 0.0 if scenario.ideal else LINE_THERMOMETER * scenario.random("line thermometer").uniform(-1.0, 1.0)
    gauges["line thermometer"] = Gauge(False, STEPS["line thermometer"], off, TREMBLE["line thermometer"], 233.15,
                                       saturation_temperature(si["p_line"]) + 100.0, ZERO_CELSIUS)
    if scenario.ideal:
        return {name: replace(gauge, step=0.0, tremble=0.0) for name, gauge in gauges.items()}
    return gauges


def _scale(si, name: str, on_barometer: bool, at: float) -> tuple[float, float]:
    """The scale of the case where there is one; else one that the reading fills by a half."""
    low = -1e5 if on_barometer else 0.0
    high = si[f"{name}_gauge_high"]
    if name == "exhaust":
        return low, max(high or 0.0, 2.5e5 if on_barometer else 4e5)
    return min(low, si["line_gauge_low"] or 0.0), high if high and high > at else 2.0 * at


def sheet_of(scenario: Scenario, point: Point, flow: float) -> Sheet:
    """The sheet as a careful person keeps it: barometer read today, gauges entered as what they are."""
    case, si = point.case, point.line
    off = drawn(scenario, "barometer", lambda: barometer_doubts(case, si)) - (si["barometer_correction"] or 0.0)
    shown = si.p_barometer + off
    if not scenario.ideal:
        shown = BAROMETER_STEP * round(shown / BAROMETER_STEP)
    return Sheet(not rests_on_barometer(case, "p_line"), not rests_on_barometer(case, "p_exhaust"), shown, True, flow,
                 point.reading.p_exhaust)


def weighing_error(scenario: Scenario, point: Point, flow: float) -> float:
    """A factor on every weighed sample flow."""
    off = drawn(scenario, "weighing", lambda: flow_doubts(point.case, point.line, flow))
    return 1.0 + off / flow


def drawn(scenario: Scenario, purpose: str, doubts: Callable[[], Doubts]) -> float:
    """An error within the doubts stated in the case [SI]; 0 where none is, or none can be told.

    What is lost in reading off is left out: the steps of the scale do that by themselves.
    """
    if scenario.ideal:
        return 0.0
    try:
        components = doubts().components
    except InputError:  # an instrument not fully described: as good as one not stated
        return 0.0
    chance = scenario.random(purpose)
    drawn_by = {"rectangular": lambda u: u * np.sqrt(3.0) * chance.uniform(-1.0, 1.0)}
    return float(sum(drawn_by.get(c.distribution, lambda u: u * chance.standard_normal())(c.u)
                     for c in components if "resolution" not in c.name))


def drawn_factor(scenario: Scenario, half_width: float | None, purpose: str) -> float:
    """1, give or take ``half_width``; 1 where none is stated."""
    if scenario.ideal or not half_width:
        return 1.0
    return 1.0 + half_width * scenario.random(purpose).uniform(-1.0, 1.0)


def nice_below(value: float) -> float:
    """The largest of 1, 2, 5 times a power of ten that is not above ``value``.

    >>> nice_below(9000.0)
    5000.0
    """
    power = 10.0 ** np.floor(np.log10(value))
    return float(max(n * power for n in _NICE if n * power <= value * (1 + 1e-9)))
