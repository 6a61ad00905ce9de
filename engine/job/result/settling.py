"""Which stretch of a run counts: the settled windows found, or the one that a person chose."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from engine.job.case import Case, Resolved
from engine.job.case.rows import Row
from engine.job.result.runs import Run
from engine.measurement import Interval, Judgement, Reason, SettledWindows, SteadyLimits, judge_window, settled_windows
from engine.steam.errors import Fault, InputError
from engine.steam.units import to_si

LEAST_READINGS = 5
TESTED = ("T_exhaust", "p_line", "p_exhaust")
_CLOSE = 1e-6  # s: a window kept in minutes still ends at its last reading
_SHORTER = 0.85  # by how much an interval that is not settled as a whole gives way at a time


@dataclass(frozen=True, eq=False)
class Settling:
    """What is settled in a run, and what is used of it.

    used      rows of the run in the window, as a boolean array
    begin, end  its ends [s]; None without a time column
    by_hand   whether a person chose it, for ``reason``
    search    the windows tried; None where none could be, for the cause in ``unable``
    whole     the window used, tested as one; None where it could not be tested
    found     the settled intervals
    """

    used: np.ndarray
    begin: float | None
    end: float | None
    by_hand: bool = False
    reason: str = ""
    search: SettledWindows | None = None
    whole: Judgement | None = None
    unable: str = ""

    @property
    def found(self) -> tuple[Interval, ...]:
        return self.search.settled if self.search else ()

    @property
    def settled(self) -> bool:
        """Whether the window used passes all its tests as a whole."""
        return self.whole is not None and self.whole.settled

    def why_not(self) -> tuple[Reason, ...]:
        """The tests that fail in what is not settled: in the window used, else in all of the run."""
        if self.whole is not None and self.whole.reasons:
            return self.whole.reasons
        worst: dict[tuple, Reason] = {}
        for interval in self.search.unsettled if self.search and not self.search.settled else ():
            for reason in self.search.why(interval.windows):
                worst.setdefault((reason.channel, reason.test), reason)
        return tuple(worst.values())


def limits_of(si: Resolved, channels: Mapping[str, np.ndarray]) -> dict[str, SteadyLimits]:
    """What counts as settled for the channels that are tested (absolute pressures), by the entries of the case."""
    limits = {}
    for name in (n for n in TESTED if n in channels):
        if name == "T_exhaust":
            limits[name] = SteadyLimits(slope=si["steady_rate"], scatter=si["steady_scatter"])
            continue
        middle = float(np.nanmedian(channels[name]))
        share = si["steady_p_line" if name == "p_line" else "steady_p_exhaust"] * middle
        limits[name] = SteadyLimits(change=share, scatter=share, risk=None)
    return limits


def settle(case: Case, si: Resolved, run: Run, channels: Mapping[str, np.ndarray], *,
           progress: Callable[[float], None] | None = None) -> Settling:
    """The window of a run: by hand where the case has one for it, else the longest settled one.

    ``channels`` are those of the run with pressures absolute, by name; only those with readings are
    tested. Without a settled window, and without one by hand, nothing is used. Raises InputError
    for a window by hand that holds no readings.
    """
    channels = {n: v for n, v in channels.items() if n in run.channels and np.isfinite(v[run.usable]).any()}
    chosen = next((row for row in case["windows"] if row["log"] == run.name), None)
    search, unable = _search(si, run, channels, progress)
    if chosen is not None:
        return _by_hand(run, channels, limits_of(si, channels), chosen, search, unable)
    if run.time is None:
        return Settling(run.usable.copy(), None, None, False, "", None, None, unable)
    if search is None or search.longest is None:
        return Settling(np.zeros(len(run), dtype=bool), None, None, False, "", search, None, unable)
    return _longest(si, run, channels, search)


def _search(si: Resolved, run: Run, channels, progress) -> tuple[SettledWindows | None, str]:
    if run.time is None:
        return None, "no time was recorded, so nothing can be said of a trend"
    if not channels:
        return None, "none of the channels that are tested has a reading"
    time, window = run.time[run.usable], si["steady_window"]
    if time[-1] - time[0] < window * (1 - 1e-9):
        return None, (f"the readings last {(time[-1] - time[0]) / 60:.3g} min, and a settled stretch must last "
                      f"{window / 60:.3g} min")
    return settled_windows(time, {n: v[run.usable] for n, v in channels.items()}, limits_of(si, channels), window,
                           least=LEAST_READINGS, progress=progress), ""


def _longest(si: Resolved, run: Run, channels, search: SettledWindows) -> Settling:
    """The longest settled interval, from its front shortened until it is settled as a whole.

    Each of its windows is settled, but a creep too slow for one of them can add up over many.
    """
    interval, limits = search.longest, limits_of(si, channels)
    begin = interval.begin
    while True:
        used = run.usable & (run.time >= begin) & (run.time <= interval.end)
        whole = _judge(run, channels, limits, used)
        shorter = interval.end - max(_SHORTER * (interval.end - begin), si["steady_window"])
        if whole is None or whole.settled or not shorter > begin:
            return Settling(used, float(begin), float(interval.end), search=search, whole=whole)
        begin = shorter


def _by_hand(run: Run, channels, limits, chosen: Row, search, unable: str) -> Settling:
    begin, end = (to_si(chosen[n].value, chosen[n].unit, "time") for n in ("begin", "end"))
    if run.time is None:  # without a clock, from which reading to which
        raise InputError(Fault("Windows chosen by hand", run.name, "", "a run with a time in every row",
                               hint="type the times, or leave out rows one by one with a reason", name="windows"))
    used = run.usable & (run.time >= begin - _CLOSE) & (run.time <= end + _CLOSE)
    if not used.any():
        first, last = run.time[0] / 60, run.time[-1] / 60
        raise InputError(Fault(f"Window chosen by hand in {run.name}", f"{begin / 60:g} to {end / 60:g}", "min",
                               f"a window with readings; the run has them from {first:g} to {last:g} min",
                               hint="move it, or let the longest settled window be taken", name="windows"))
    return Settling(used, begin, end, True, chosen["reason"].strip(), search, _judge(run, channels, limits, used),
                    unable)


def _judge(run: Run, channels, limits, used: np.ndarray) -> Judgement | None:
    if used.sum() < LEAST_READINGS or not channels:
        return None
    return judge_window(run.time[used], {n: v[used] for n, v in channels.items()}, limits, least=LEAST_READINGS)
