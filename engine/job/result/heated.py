"""Sets of readings with a heater: each reduced for its scatter, the means of each run for its quality.

Unlike a throttling test there is no log and no window: every complete set counts. A channel that nobody wrote
down is taken from the case, and that is said.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter import electric_quality
from engine.job.assessment import Assessment, Verdict, assess
from engine.job.case import GAUGE, Case, as_entered, resolve
from engine.job.case.fields import FIELDS
from engine.job.case.fields_path import READING
from engine.job.case.rows import Entry
from engine.job.result.repeatability import Repeatability, repeatability
from engine.job.result.result import joined
from engine.job.result.runs import HEATED, Run, runs_heated
from engine.job.uncertainty import (
    READINGS,
    Forecast,
    forecast,
    leg_pressure,
    measurement_of,
    verdicts,
)
from engine.measurement import SAMPLING, Component, Trend, effective_number, trend, type_a
from engine.steam.errors import InputError
from engine.steam.units import from_si

_UNITS = {"p_line": "bar", "p_heater": "bar", "T_heater": "°C", "power": "W", "sample_flow": "kg/h"}


@dataclass(frozen=True, eq=False)
class HeatedRun:
    """One run with a heater.

    case        the case with the means of the run as its reading; ``assessment`` is that of it
    used        sets that count: those with a temperature
    x           quality of every set; NaN where it has none
    component   what its scatter adds to the doubt of the mean; None with a single set
    drift       of the quality over the time, where there is one
    cautions    what was noticed
    """

    run: Run
    case: Case
    assessment: Assessment
    used: np.ndarray
    x: np.ndarray
    component: Component | None
    drift: Trend | None
    cautions: tuple[str, ...]

    @property
    def s(self) -> float:
        """Standard deviation of the quality from set to set; 0 with a single one."""
        known = self.x[np.isfinite(self.x)]
        return float(known.std(ddof=1)) if known.size > 1 else 0.0


@dataclass(frozen=True, eq=False)
class HeatedResult:
    """What the sets say together: ``forecast`` has the budget with their scatter in it, of the ``assessment`` of the
    means of all runs."""

    runs: tuple[HeatedRun, ...]
    assessment: Assessment
    forecast: Forecast
    repeatability: Repeatability | None


def reduce_heated(case: Case) -> HeatedResult | None:
    """The sets with a heater, reduced; None where none has been written down.

    Raises InputError, with every fault at once, where an entry of the case cannot be used.

    >>> from engine.job.case.examples import HEATED as EXAMPLE
    >>> sets = [FIELDS["heater_readings"].row(run="1", T_heater=Entry(T, "°C")) for T in (178.6, 178.9, 178.8)]
    >>> found = reduce_heated(EXAMPLE.with_(heater_readings=tuple(sets)))
    >>> f"{found.assessment.x:.4f}", [f"{x:.4f}" for x in found.runs[0].x]
    ('0.8999', ['0.8998', '0.9001', '0.9000'])
    """
    resolve(case)
    runs = tuple(_reduced(case, run) for run in runs_heated(case) if "T_heater" in run.channels)
    if not runs:
        return None
    a = assess(_of_all(case, runs))
    read = [run for run in runs if run.assessment.verdict in (Verdict.READS, Verdict.THIN)]
    together = repeatability([(run.assessment.x, run.component) for run in read]) if read else None
    return HeatedResult(runs, a, _sure(case, a, read, together) if len(read) == len(runs) else forecast(case, a),
                        together)


def _reduced(case: Case, run: Run) -> HeatedRun:
    used = np.isfinite(run.channels["T_heater"])
    shown = {name: _filled(values) for name, values in run.channels.items()}
    mean_case = _with_means(case, run, {name: float(values[used].mean()) for name, values in shown.items()})
    a = assess(mean_case)
    x = np.where(used, _of_sets(a, run, shown), np.nan)
    known = x[np.isfinite(x)]
    component = None
    if known.size > 1:
        worth = effective_number(known).n_eff if known.size > 2 else None
        component = type_a("scatter of the readings", float(known.std(ddof=1)), known.size, worth, group=READINGS)
    good = np.isfinite(x) & run.usable
    drift = trend(run.time[good], x[good]) if run.time is not None and good.sum() > 2 else None
    taken = [FIELDS[name].label.lower() for name in HEATED if name not in shown and case[name] is not None]
    said = (f"not written down, taken from the case: {', '.join(taken)}",) if taken else ()
    left = int((~used).sum())
    said += (f"{left} of the sets have no temperature and do not count",) if left else ()
    return HeatedRun(run, mean_case, a, used, x, component, drift, run.notes + said)


def _filled(values: np.ndarray) -> np.ndarray:
    """A channel that is read now and then: between two readings interpolated by row."""
    known = np.flatnonzero(np.isfinite(values))
    return np.interp(np.arange(values.size), known, values[known])


def _with_means(case: Case, run: Run, means: dict[str, float]) -> Case:
    """The case with means, as the gauges showed them, for its reading."""
    def entry(name: str, value: float) -> Entry:
        return Entry(from_si(value, _UNITS[name], FIELDS[name].kind), _UNITS[name], run.basis.get(name, ""))

    return case.with_(question=READING, **{name: entry(name, value) for name, value in means.items()})


def _of_all(case: Case, runs: tuple[HeatedRun, ...]) -> Case:
    """The case with the means of the runs for its reading, each as the first run has it."""
    first = runs[0].case

    def mean(name: str) -> Entry:
        values = [run.assessment.si[name] for run in runs if run.assessment.si[name] is not None]
        leg = leg_pressure(runs[0].assessment.si) if name == "p_line" else 0.0
        return as_entered(FIELDS[name], float(np.mean(values)) + leg, first[name], runs[0].assessment.si.p_barometer)

    return case.with_(question=READING, **{name: mean(name) for name in HEATED if first[name] is not None})


def _of_sets(a: Assessment, run: Run, shown: dict[str, np.ndarray]) -> np.ndarray:
    """Quality of every set, by what was written down of it and by the means for the rest."""
    si = a.si

    def true(name: str, otherwise: float) -> np.ndarray | float:
        if name not in shown:
            return otherwise
        return shown[name] + (si.p_barometer if run.basis.get(name) == GAUGE else 0.0)

    p = true("p_line", si["p_line"] + leg_pressure(si)) - leg_pressure(si)
    p_heater = np.minimum(true("p_heater", a.heating.p), p)
    p, p_heater = (np.broadcast_to(np.asarray(values, float), len(run)) for values in (p, p_heater))
    return electric_quality(p, p_heater, shown["T_heater"], true("power", a.heating.power),
                            true("sample_flow", si["sample_flow"]), power_loss=a.heating.power_loss).x


def _sure(case: Case, a: Assessment, read: list[HeatedRun], together: Repeatability | None) -> Forecast:
    """The budget of the mean of the runs, their scatter in it."""
    parts = []
    for run in read:
        scatter = [together.component] if together else [c for c in (run.component,) if c]
        parts.append(measurement_of(run.assessment, None, scatter))
    measurement = joined(parts)
    missing = measurement.missing
    if together is None and read[0].component is None:
        missing += ("the scatter of the readings, of which there is only one",)
    try:
        budget = measurement.budget()
    except InputError as error:
        return Forecast(a, error.faults[0].why, missing=missing, cautions=measurement.cautions)
    return Forecast(a, "", budget, budget.without(SAMPLING), missing, measurement.cautions,
                    verdicts(case, a.si, budget))
