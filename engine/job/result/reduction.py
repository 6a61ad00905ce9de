"""One run of readings reduced: every step kept, none of them silent.

The window that counts, rows left out by a person, corrections one by one, the means of the channels
reduced, and every row reduced for its drift. What keeps the run from giving a quality is said in words.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np

from engine.calorimeter import Status
from engine.job.assessment import Assessment, Verdict, assess
from engine.job.case import GAUGE, Case, Resolved
from engine.job.case.fields_path import UNDECIDED
from engine.job.result.corrections import (
    Corrected,
    Correction,
    Shown,
    case_of,
    corrected,
    model_without,
    one_by_one,
    reduced,
    shown_of,
    switched_off,
)
from engine.job.result.runs import Run
from engine.job.result.settling import Settling, settle
from engine.job.uncertainty import (
    READINGS,
)
from engine.measurement import (
    Component,
    Independence,
    Outliers,
    Trend,
    effective_number,
    flag_outliers,
    trend,
    type_a,
)
from engine.steam import saturation_temperature

WET_ROWS = 0.1  # part of the rows in the window that may be unreadable before the run is
_NEEDED = ("p_line", "p_exhaust", "T_exhaust")
_OTHERS = ("p_barometer", "sample_flow", "T_ambient")


class Mean(NamedTuple):
    """A channel over the rows used, as shown [SI]: mean, standard deviation, readings, independent readings."""

    mean: float
    s: float
    n: int
    n_eff: float


@dataclass(frozen=True, eq=False)
class Scatter:
    """The quality of every row used: how it scatters and drifts, and what its mean is worth.

    ``without`` is the mean before rows were left out by hand, None where none was.
    """

    mean: float
    s: float
    independence: Independence | None
    drift: Trend | None
    without: float | None
    component: Component | None


@dataclass(frozen=True, eq=False)
class RunResult:
    """One run, reduced.

    settling    the window
    window      complete rows of the window, before any was left out: the rows of ``outliers``
    used        rows that count: those that were not left out
    removed     row number -> reason, of rows that a person left out
    outliers    by channel, the tests of the rows in the window before anything was left out
    means       by channel; a channel that was not recorded is taken from the case and not in here
    shown, corrected  the means as shown and corrected, absolute
    corrections one by one, at the means
    assessment  of the means: the verdict, and the quality where there is one
    rows_corrected  every row of the run, corrected
    x, status   of every row of the run (x not cut off at 1)
    scatter     of the rows used; None with fewer than two
    unable      why the run gives no quality, in words; "" where it does
    cautions    what was noticed
    """

    run: Run
    settling: Settling
    window: np.ndarray
    used: np.ndarray
    removed: dict[int, str]
    outliers: dict[str, Outliers]
    means: dict[str, Mean]
    shown: Shown | None
    corrected: Corrected | None
    corrections: tuple[Correction, ...]
    assessment: Assessment | None
    rows_corrected: Corrected
    x: np.ndarray
    status: np.ndarray
    scatter: Scatter | None
    unable: str
    cautions: tuple[str, ...]

    @property
    def quality(self) -> float | None:
        """The quality by the means; None where the run cannot be read."""
        return None if self.unable or self.assessment is None else self.assessment.x


HEAT_LOSS_OPEN = ("The heat loss has not been decided. It always makes the steam look wetter than it is, so there is "
                  "no result until one of the ways to account for it is chosen, “none” among them.")


def reduce_run(case: Case, si: Resolved, run: Run, *, progress: Callable[[float], None] | None = None) -> RunResult:
    """One run by itself; ``si`` is the case resolved."""
    off = switched_off(case)
    true = corrected(case, si, _shown(case, si, run, run.channels), off)
    absolute = {"T_exhaust": true.T_exhaust, "p_line": true.p_line, "p_exhaust": true.p_exhaust}
    settling = settle(case, si, run, absolute, progress=progress)
    run, notes = _with_weighed_flow(run, settling.used)
    rows = corrected(case, si, _shown(case, si, run, run.channels), off)
    x, status = (np.broadcast_to(a, len(run)) for a in reduced(model_without(case, si, off), si, rows))
    window = settling.used & _complete(run)
    removed = {int(row["row"].value): row["reason"].strip() for row in case["removed"] if row["log"] == run.name}
    used = window & ~np.isin(run.rows, [number for number, reason in removed.items() if reason])
    common = (run, settling, window, used, removed, _outliers(run, window))
    if unable := _nothing_used(run, settling, window, used):
        return RunResult(*common, {}, None, None, (), None, rows, x, status, None, unable,
                         run.notes + _wet_throughout(run, status))
    means = {name: _mean(values[used]) for name, values in run.channels.items() if np.isfinite(values[used]).any()}
    shown = _shown(case, si, run, {name: m.mean for name, m in means.items()})
    true = corrected(case, si, shown, off)
    assessment = assess(case_of(case, si, true, off))
    wet = float(np.mean(status[used] == Status.NOT_SUPERHEATED))
    return RunResult(*common, means, shown, true, one_by_one(case, si, shown), assessment, rows, x, status,
                     _scatter(run, x, window, used), _unreadable(case, assessment, wet),
                     run.notes + notes + _cautions(run, settling, means, true, wet))


def _shown(case: Case, si: Resolved, run: Run, channels) -> Shown:
    """Readings as shown, those that were not recorded from the case."""
    p_line, p_exhaust = ((channels[n], run.basis[n]) if n in channels else shown_of(case, n) for n in _NEEDED[:2])
    others = (channels.get(n, si.p_barometer if n == "p_barometer" else si[n]) for n in _OTHERS)
    air, flow, ambient = map(_filled, others)
    return Shown(p_line[0], p_exhaust[0], channels.get("T_exhaust", np.nan), air, flow, ambient,
                 {"p_line": p_line[1], "p_exhaust": p_exhaust[1]})


def _filled(values):
    """A side channel that is read now and then: between two readings interpolated by row."""
    if not isinstance(values, np.ndarray) or values.ndim == 0:
        return values
    known = np.flatnonzero(np.isfinite(values))
    return np.interp(np.arange(values.size), known, values[known]) if known.size else values


def _with_weighed_flow(run: Run, used: np.ndarray) -> tuple[Run, tuple[str, ...]]:
    """The run with its sample flow from the condensate weighed, where that is all there is."""
    if "condensate" not in run.channels or "sample_flow" in run.channels or run.time is None:
        return run, ()
    good = used & np.isfinite(run.channels["condensate"])
    mass = run.channels["condensate"][good]
    if mass.size < 3:
        return run, ()
    rise = np.ptp(mass)
    if not rise > 0 or (np.diff(mass) < -0.01 * rise).any():
        return run, ("the condensate mass falls within the window, so no sample flow follows from it",)
    flow = np.full(len(run), trend(run.time[good], mass).slope)
    return replace(run, channels={**run.channels, "sample_flow": flow}), (
        "the sample flow is the slope of the condensate mass over the window",)


def _complete(run: Run) -> np.ndarray:
    """Rows that have a reading of every needed channel that was recorded at all."""
    recorded = [np.isfinite(run.channels[name]) for name in _NEEDED if name in run.channels]
    return np.logical_and.reduce(recorded) if recorded else np.zeros(len(run), dtype=bool)


def _outliers(run: Run, window: np.ndarray) -> dict[str, Outliers]:
    """Both tests for each channel over the window, whatever was left out of it since: one pass, always the same."""
    if window.sum() < 3:
        return {}
    return {name: flag_outliers(run.channels[name][window]) for name in _NEEDED if name in run.channels}


def _nothing_used(run: Run, settling: Settling, window: np.ndarray, used: np.ndarray) -> str:
    if "T_exhaust" not in run.channels:
        return "The exhaust temperature was not recorded."
    if used.any():
        return ""
    if window.any():
        return "Every row of the window was left out."
    if not settling.used.any():
        return ("No stretch of this run is settled." if not settling.unable else
                f"No settled stretch could be looked for: {settling.unable}.")
    return "No row of the window has all of its readings."


def _mean(values: np.ndarray) -> Mean:
    values = values[np.isfinite(values)]
    n, mean = values.size, float(values.mean())
    s = float(values.std(ddof=1)) if n > 1 else 0.0
    if s <= 1e-12 * abs(mean):  # all equal but for rounding
        s = 0.0
    return Mean(mean, s, n, effective_number(values).n_eff if n > 2 else float(n))


def _scatter(run: Run, x: np.ndarray, window: np.ndarray, used: np.ndarray) -> Scatter | None:
    good = used & np.isfinite(x)
    values = x[good]
    if values.size < 2:
        return None
    s = float(values.std(ddof=1))
    worth = effective_number(values) if values.size > 2 else None
    drift = trend(run.time[good], values) if run.time is not None and values.size > 2 else None
    all_rows = x[window & np.isfinite(x)]
    without = float(all_rows.mean()) if all_rows.size > values.size else None
    component = type_a("scatter of the readings", s, values.size, worth.n_eff if worth else None, group=READINGS)
    return Scatter(float(values.mean()), s, worth, drift, without, component)


def _unreadable(case: Case, a: Assessment, wet: float) -> str:
    if a.verdict is Verdict.SUPERHEATED:
        return f"The line is superheated by {a.line_superheat:.1f} K: there is no wetness to measure."
    if a.verdict is Verdict.CONTRADICTS:
        return "What was drained and what the throttled steam shows contradict each other."
    if a.verdict is Verdict.CANNOT:
        return (f"The exhaust is not superheated enough: the quality is below {a.x_below:.4f}, and no value can be "
                "given." if a.x_below < 1 else "The exhaust is not superheated enough for any quality to be told.")
    if wet > WET_ROWS:
        return (f"In {wet:.0%} of the readings the exhaust was not superheated: their mean would be that of "
                "two different things.")
    return HEAT_LOSS_OPEN if case["heat_loss_method"] == UNDECIDED else ""


def _cautions(run: Run, settling: Settling, means: dict[str, Mean], true: Corrected, wet: float) -> tuple[str, ...]:
    said = []
    taken = [label for name, label in (("p_line", "line pressure"), ("p_exhaust", "exhaust pressure"))
             if name not in means]
    if GAUGE in run.basis.values() and "p_barometer" not in means:
        taken.append("barometer")
    if taken:
        said.append(f"not recorded, taken from the case: {', '.join(taken)}")
    if settling.by_hand and not settling.settled:
        said.append("the window was chosen by hand and is not settled" if settling.whole else
                    "the window was chosen by hand and could not be tested")
    elif not settling.by_hand and settling.whole is None:
        said.append("whether it was settled could not be tested: " + (settling.unable or "too few readings"))
    if wet:
        said.append(f"in {wet:.1%} of the readings used the exhaust was not superheated")
    return tuple(said) + _by_line_temperature(means, true)


def _wet_throughout(run: Run, status: np.ndarray) -> tuple[str, ...]:
    """What can still be said of a run of which nothing is used."""
    read = _complete(run)
    wet = float(np.mean(status[read] == Status.NOT_SUPERHEATED)) if read.any() else 0.0
    return (f"in {wet:.0%} of all its readings the exhaust was not superheated",) if wet > WET_ROWS else ()


def _by_line_temperature(means: dict[str, Mean], true: Corrected) -> tuple[str, ...]:
    """What a thermometer in the line says about its pressure."""
    if "T_line" not in means:
        return ()
    apart = means["T_line"].mean - saturation_temperature(float(true.p_line))
    if apart > 1.0:
        return (f"the line is {apart:.1f} K hotter than saturated: it may be superheated, or the gauge reads low",)
    if apart < -1.0:
        return (f"the line is {-apart:.1f} K colder than saturated: gas in the steam, or the gauge reads high",)
    return ()
