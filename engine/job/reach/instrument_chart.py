"""The chart to take along: from the temperature at the instrument to the quality, for one case as it is planned."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from engine.calorimeter import electric_quality
from engine.calorimeter.reading_chart import STEPS
from engine.job.assessment.balance import balance_of
from engine.job.reach.reach import ReachAssessment, stage_pressure
from engine.steam.units import UnitSystem, from_si, to_si

LINE, THROTTLED = "line", "throttled steam"
ROWS = 48  # what fits under the drawing on one page


@dataclass(frozen=True)
class InstrumentChart:
    """Rows at round temperatures of the reader's unit, SI, rising; empty where not even dry steam can be read.

    ``x`` is the quality of the line, or behind a separator that of the throttled steam (``quality_of`` says
    which), losses and velocities taken off row by row; ``thin`` where the superheat is below the comfortable one.
    ``slopes`` tell what the quality does in the middle of the chart when another reading differs from what the
    chart was made for: dx over one per cent of it, by name.
    """

    T: np.ndarray
    superheat: np.ndarray
    x: np.ndarray
    thin: np.ndarray
    step: float  # in ``unit``
    unit: str
    T_saturation: float
    T_least: float
    T_dry: float
    x_least: float
    quality_of: str
    slopes: Mapping[str, float]

    @property
    def wetness(self) -> np.ndarray:
        return 1.0 - self.x


def instrument_chart(plan: ReachAssessment, units: UnitSystem) -> InstrumentChart:
    """The chart for a case as planned, with at most ``ROWS`` rows.

    >>> from engine.job.case.demo import DEMO
    >>> from engine.job.reach.reach import assess_reach
    >>> from engine.steam.units import SI
    >>> chart = instrument_chart(assess_reach(DEMO), SI)
    >>> round(chart.T[-1] - 273.15), round(float(chart.x[-1]), 4)
    (148, 0.999)
    """
    a, si, unit = plan.wet.assessment, plan.si, units.unit("temperature")
    T_sat = a.T_saturation

    def reduced(T):
        return _reduced(plan, T)

    T_dry = T_sat + plan.dry_superheat
    T_least = _first_dry(reduced, T_sat + si["least_superheat"], T_dry)
    low, high = (from_si(T, unit, "temperature") for T in (T_least, T_dry))
    step = next((step for step in STEPS if high - low < step * (ROWS - 1)), STEPS[-1])
    shown = step * np.arange(math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9) + 1)
    T = np.asarray(to_si(shown, unit, "temperature"))
    x = reduced(T) if T.size else np.array([])
    fits = (x >= 0) & (x <= 1)
    x_least = float(reduced(np.array([T_least]))[0]) if T_dry > T_least else math.nan
    return InstrumentChart(T[fits], T[fits] - T_sat, x[fits], T[fits] - T_sat < si["comfortable_superheat"], step, unit,
                           T_sat, T_least, T_dry, x_least, THROTTLED if a.separation else LINE,
                           _slopes(plan, 0.5 * (T_least + T_dry)))


def _first_dry(reduced: Callable[[np.ndarray], np.ndarray], low: float, high: float) -> float:
    """The least temperature that says something: a fast stream may still be wet itself where it reads superheat."""
    ends = np.array([low, high])
    if not low < high or np.isfinite(reduced(ends)[0]):
        return low
    for _ in range(40):
        middle = ends.mean()
        ends[int(np.isfinite(reduced(np.array([middle]))[0]))] = middle
    return float(ends[1])


def _reduced(plan: ReachAssessment, T: np.ndarray, **scaled: float) -> np.ndarray:
    """Qualities at temperatures [K] above saturation; ``scaled`` are factors on other readings, by name."""
    a, si = plan.wet.assessment, plan.si

    def at(name: str, value: float | None) -> float | None:
        return None if value is None else value * scaled.get(name, 1.0)

    if a.heating:
        h = a.heating
        return electric_quality(at("p_line", si["p_line"]), h.p, T, at("power", h.power),
                                at("sample_flow", si["sample_flow"]), power_loss=h.power_loss).x
    p, p2 = (np.full(T.shape, at(name, value)) for name, value in (
        ("p_line", stage_pressure(a)), ("p_exhaust", si["p_exhaust"])))
    return balance_of(plan.case, si)(p, p2, T, sample_flow=at("sample_flow", si["sample_flow"]),
                                     T_normal=si["T_normal"],
                                     recovery=1.0 if si["recovery"] is None else si["recovery"])[0]


def _slopes(plan: ReachAssessment, T: float) -> dict[str, float]:
    names = ("power", "sample_flow") if plan.wet.assessment.heating else ("p_line", "p_exhaust")
    at = np.array([T])
    return {name: float((_reduced(plan, at, **{name: 1.01}) - _reduced(plan, at, **{name: 0.99}))[0] / 2)
            for name in names}
