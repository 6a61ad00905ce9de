"""A table to print and take along: exhaust temperature to quality, for one line and one exhaust pressure."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter.checks import door, refuse
from engine.calorimeter.status import Status
from engine.calorimeter.throttle import exhaust_temperature, least_quality, quality
from engine.steam import saturation_temperature
from engine.steam.arrays import at_the_door
from engine.steam.errors import Fault, InputError
from engine.steam.units import from_si, to_si

STEPS = (0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0)  # distances that a reader can interpolate in his head
ROWS = 40  # what fits on a page
MOST_ROWS = 1000


@dataclass(frozen=True)
class ReadingChart:
    """Rows at round temperatures, and the three temperatures between which they lie.

    ``status`` per row is OK, or THIN_MARGIN below the comfortable superheat. Without rows where nothing can
    be read (``x_least`` above 1).
    """

    T_exhaust: np.ndarray
    superheat: np.ndarray
    x: np.ndarray
    status: np.ndarray
    T_saturation: float  # K, at the exhaust pressure: at or below it nothing can be told
    T_least: float  # K, the least that can be read; the quality is then x_least
    T_dry: float  # K, what dry steam shows (T_saturation where it would stay wet)
    x_least: float
    step: float  # distance of the rows in ``unit``
    unit: str


def reading_chart(p_line, p_exhaust, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0, recovery=1.0,
                  least_superheat=5.0, comfortable_superheat=10.0, unit="°C", step=None) -> ReadingChart:
    """Quality over exhaust temperature from the least readable superheat up to dry steam.

    Single values: pressures [Pa, absolute], superheats [K], other arguments as for ``quality``. The rows
    stand at whole multiples of ``step`` in the temperature ``unit``; without a step, the smallest round one
    that keeps to 40 rows. Raises InputError for inputs out of range or missing.

    >>> chart = reading_chart(10e5, 101_325.0)
    >>> (chart.T_exhaust[:3] - 273.15).round(2).tolist(), chart.x[:3].round(4).tolist()
    ([106.0, 108.0, 110.0], [0.9557, 0.9578, 0.9598])
    """
    terms = {"heat_loss": heat_loss, "line_velocity": line_velocity, "exhaust_velocity": exhaust_velocity,
             "recovery": recovery}
    named, scalar = door(p_line=p_line, p_exhaust=p_exhaust, **terms, least_superheat=least_superheat,
                         comfortable_superheat=comfortable_superheat)
    if not scalar:
        raise InputError(Fault("reading chart", "arrays", "", "single values", "it is made for one line and one "
                               "exhaust pressure", "call it once for each"))
    refuse(named)
    x_least = least_quality(p_line, p_exhaust, least_superheat, **terms)
    T_saturation = saturation_temperature(p_exhaust)
    T_dry = exhaust_temperature(p_line, 1.0, p_exhaust, **terms).T_exhaust
    T_least = T_saturation + least_superheat
    if exhaust_velocity and 0 <= x_least < 1:  # a fast stream may be dry only above that
        T_least = max(T_least, exhaust_temperature(p_line, x_least + 1e-9, p_exhaust, **terms).T_exhaust)
    low, high = from_si(T_least, unit, "temperature"), from_si(T_dry, unit, "temperature")
    step = _step(high - low) if step is None else _checked(step, high - low, unit)
    T = to_si(step * np.arange(np.ceil(low / step - 1e-9), np.floor(high / step + 1e-9) + 1), unit, "temperature")
    rows = quality(p_line, p_exhaust, T, **terms, least_superheat=comfortable_superheat)
    told = rows.status <= Status.THIN_MARGIN
    return ReadingChart(T[told], rows.superheat[told], rows.x[told], rows.status[told], T_saturation, T_least, T_dry,
                        x_least, step, unit)


def _step(span: float) -> float:
    return next((step for step in STEPS if span / step < ROWS), STEPS[-1])


def _checked(step, span: float, unit: str) -> float:
    (value,), scalar = at_the_door(step=step)
    if not (scalar and value > 0 and np.isfinite(value) and span / value < MOST_ROWS):
        raise InputError(Fault("step of the reading chart", step, unit, f"more than 0, and at most {MOST_ROWS} rows",
                               hint="leave it out for a table of one page", name="step"))
    return float(value)
