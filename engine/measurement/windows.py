"""Settled windows of a log: found by sliding, or judged where a hand has placed one.

A settled interval is a longest stretch in which every window tried passes every test of every
channel. That says nothing of the interval as a whole: a creep too slow for one window can add up
over many, so judge the interval itself once more with ``judge_window`` before it is used.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np

from engine.measurement.given import number, shown, whole
from engine.measurement.steadiness import (
    Reason,
    SteadyLimits,
    Trend,
    Unsettled,
    checked_log,
    failed_tests,
    measured,
    window_trends,
)
from engine.steam.errors import Fault, InputError

_ROWS = 4096  # of a stretch of the log, at least; long against a short window, short against a log
_FINENESS = 20  # windows tried within one window's length
_GAP = 0.25  # a pause longer than this part of the window leaves it without evidence


class Interval(NamedTuple):
    """Rows ``first`` to ``stop`` (not included), seconds ``begin`` to ``end``, and the windows tried
    that it is made of, first and last (not included)."""

    first: int
    stop: int
    begin: float
    end: float
    windows: tuple[int, int]


class Judgement(NamedTuple):
    """One window: is it settled, why not, and the fit of each channel (NaN where it is TOO_FEW)."""

    settled: bool
    reasons: tuple[Reason, ...]
    trends: dict[str, Trend]


@dataclass(frozen=True, eq=False)
class SettledWindows:
    """All windows tried. The log is referred to, not copied.

    Attributes:
        first, stop: rows of each window, shape (windows,)
        flags: by channel, the ``Unsettled`` tests that each window fails, as uint8
        settled: longest intervals in which every window is settled; they can overlap
        unsettled: the runs of windows between them; ask ``why``
    """

    first: np.ndarray
    stop: np.ndarray
    flags: dict[str, np.ndarray]
    settled: tuple[Interval, ...]
    unsettled: tuple[Interval, ...]
    _log: _Log = field(repr=False)

    @property
    def longest(self) -> Interval | None:
        """The longest settled interval, the latest of equals; None without one."""
        return max(self.settled, key=lambda i: (i.end - i.begin, i.begin), default=None)

    def why(self, windows: tuple[int, int]) -> tuple[Reason, ...]:
        """The tests failed within a range of windows (as ``Interval.windows``), each by its worst window."""
        begin, end = windows
        worst: dict[tuple[str, Unsettled], Reason] = {}
        for part, rows in _stretches(self.first[begin:end], self.stop[begin:end]):
            first, stop = (a[begin:end][part] - rows.start for a in (self.first, self.stop))
            for reason in self._log.part(rows).reasons(first, stop):
                key = reason.channel, reason.test
                worst[key] = _worse(worst[key], reason) if key in worst else reason
        return tuple(worst.values())


def judge_window(time, channels: Mapping[str, object], limits: Mapping[str, SteadyLimits], *,
                 least: int = 5) -> Judgement:
    """Test the rows given as one window. Channels without limits are not tested.

    ``time`` [s] and each channel have shape (n,). Raises InputError for a log that does not fit
    together, or has no rows, and for a limit on a channel that is not there.

    >>> time = np.arange(0.0, 600.0, 60.0)
    >>> got = judge_window(time, {"T_exhaust": 394.0 + time / 600}, {"T_exhaust": SteadyLimits(change=0.5)})
    >>> [(r.channel, r.test.name, round(r.value, 3), r.limit) for r in got.reasons]
    [('T_exhaust', 'DRIFT', 0.9, 0.5), ('T_exhaust', 'SIGNIFICANT', 0.9, 0.25)]
    """
    log = _checked(time, channels, limits, None, least)
    first, stop = np.array([0]), np.array([len(log.time)])
    reasons = log.reasons(first, stop)
    trends = {name: Trend(*(float(a[0]) for a in log.tested(name, first, stop)[0])) for name in limits}
    return Judgement(not reasons, tuple(reasons), trends)


def settled_windows(time, channels: Mapping[str, object], limits: Mapping[str, SteadyLimits], length: float, *,
                    step: int | None = None, least: int = 5,
                    progress: Callable[[float], None] | None = None) -> SettledWindows:
    """Slide a window of ``length`` seconds over a log and find where it is settled.

    ``time`` [s] runs forward, in steps of any size; each channel has shape (n,) with NaN for missing
    readings. A window starts every ``step`` rows (by default a twentieth of a window) and needs
    ``least`` readings of each channel, without a pause longer than a quarter of it. ``progress`` is
    called with the fraction done.

    Raises InputError for a log that does not fit together, for a limit on a channel that is not
    there, and for a window that is longer than the log.

    >>> time = np.arange(0.0, 3600.0, 10.0)
    >>> T = np.where(time < 1200, 380 + time / 100, 392.0)  # warms up for 20 minutes
    >>> found = settled_windows(time, {"T_exhaust": T}, {"T_exhaust": SteadyLimits(change=0.5)}, 600)
    >>> round(found.longest.begin), [r.test.name for r in found.why(found.unsettled[0].windows)]
    (1110, ['DRIFT', 'SIGNIFICANT'])
    """
    log = _checked(time, channels, limits, length, least)
    if step is not None and not (whole(step) and step >= 1):
        raise InputError(Fault("step", shown(step), "", "1 or more, a whole number",
                               why="it is the number of rows from window to window"))
    first, stop = _windows(log.time, length, step)
    flags = {name: np.empty(len(first), dtype=np.uint8) for name in limits}
    for part, rows in _stretches(first, stop):
        stretch = log.part(rows)
        for name, its in flags.items():
            its[part] = stretch.tested(name, first[part] - rows.start, stop[part] - rows.start)[1]
        if progress:
            progress(part.stop / len(first))
    bad = np.zeros(len(first), dtype=bool)
    for its in flags.values():
        bad |= its > 0
    runs = [(bool(bad[begin]), Interval(int(first[begin]), int(stop[end - 1]), float(log.time[first[begin]]),
                                        float(log.time[stop[end - 1] - 1]), (begin, end)))
            for begin, end in _runs(bad)]
    return SettledWindows(first, stop, flags, tuple(i for failed, i in runs if not failed),
                          tuple(i for failed, i in runs if failed), log)


class _Log(NamedTuple):
    """What is tested: a log or a stretch of it, with the limits; ``length`` None when all is one window."""

    time: np.ndarray
    columns: dict[str, np.ndarray]
    limits: dict[str, SteadyLimits]
    length: float | None
    least: int

    def part(self, rows: slice) -> _Log:
        return self._replace(time=self.time[rows], columns={name: a[rows] for name, a in self.columns.items()})

    def tested(self, name: str, first: np.ndarray, stop: np.ndarray) -> tuple[Trend, np.ndarray]:
        """Fit and ``Unsettled`` flags of each window of one channel."""
        fit = window_trends(self.time, self.columns[name], first, stop)
        pause, longest = self.pauses(name, first, stop)
        return fit, failed_tests(fit, self.limits[name], self.least) | np.where(pause > longest, int(Unsettled.GAP), 0)

    def pauses(self, name: str, first: np.ndarray, stop: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Longest time without a reading in each window, and the longest allowed."""
        begin = self.time[first]
        end = self.time[stop - 1] if self.length is None else begin + self.length
        rows = np.flatnonzero(np.isfinite(self.columns[name]))
        if not len(rows):
            return end - begin, _GAP * (end - begin)
        read = self.time[rows]
        low, high = np.searchsorted(rows, first), np.searchsorted(rows, stop) - 1  # first and last read in the window
        some = low <= high
        ahead = np.where(some, read[np.minimum(low, len(read) - 1)] - begin, end - begin)
        behind = np.where(some, end - read[high], 0.0)
        between = _longest_step(np.diff(read), low, np.maximum(high, low))
        return np.maximum(np.maximum(ahead, behind), between), _GAP * (end - begin)

    def reasons(self, first: np.ndarray, stop: np.ndarray) -> list[Reason]:
        """The failed tests of these windows, each by its worst window."""
        found = []
        for name, limits in self.limits.items():
            fit, flags = self.tested(name, first, stop)
            for test in Unsettled:
                failed = (flags & test) > 0
                if failed.any():
                    value, limit = (self.pauses(name, first, stop) if test is Unsettled.GAP
                                    else measured(fit, limits, test, self.least))
                    values = value[failed]
                    worst = int(values.argmin() if test is Unsettled.TOO_FEW else values.argmax())
                    found.append(Reason(name, test, float(values[worst]), float(limit[failed][worst])))
        return found


def _longest_step(steps: np.ndarray, low: np.ndarray, high: np.ndarray) -> np.ndarray:
    """Largest of steps[low:high] for each window, by a table of largest values over powers of two."""
    count = high - low
    longest = np.zeros(len(low))
    table, width = steps, 1
    while width <= count.max(initial=0):
        now = (count >= width) & (count < 2 * width)
        longest[now] = np.maximum(table[low[now]], table[high[now] - width])
        table, width = np.maximum(table[:-width], table[width:]), 2 * width
    return longest


def _worse(one: Reason, other: Reason) -> Reason:
    return min(one, other, key=lambda r: r.value if r.test is Unsettled.TOO_FEW else -r.value)


def _windows(time: np.ndarray, length: float, step: int | None) -> tuple[np.ndarray, np.ndarray]:
    """First rows and ends of the windows that fit into the log, the very last one included."""
    if step is None:
        step = max(1, int(len(time) * length / (time[-1] - time[0]) / _FINENESS))
    reach = length * (1 + 1e-9)  # times are seldom exact in binary
    last = max(int(np.searchsorted(time, time[-1] - (2 * length - reach), side="right")) - 1, 0)
    first = np.unique(np.append(np.arange(0, last + 1, step), last))
    return first, np.searchsorted(time, time[first] + reach, side="right")


def _stretches(first: np.ndarray, stop: np.ndarray) -> Iterator[tuple[slice, slice]]:
    """Windows in groups, with the rows of each group."""
    rows = max(_ROWS, 4 * int((stop - first).max(initial=0)))
    begin = 0
    while begin < len(first):
        end = int(np.searchsorted(first, first[begin] + rows))
        yield slice(begin, end), slice(int(first[begin]), int(stop[end - 1]))
        begin = end


def _runs(bad: np.ndarray) -> list[tuple[int, int]]:
    """Ranges of equal neighbours."""
    edges = np.flatnonzero(np.diff(bad)) + 1
    bounds = [0, *edges.tolist(), len(bad)]
    return list(zip(bounds[:-1], bounds[1:], strict=True))


def _checked(time, channels: Mapping[str, object], limits: Mapping[str, SteadyLimits], length: float | None,
             least: int) -> _Log:
    time, columns = checked_log(time, channels)
    faults = [Fault("limits", name, "", "a channel of the log", hint="its channels are: " + ", ".join(columns))
              for name in limits if name not in columns]
    if not limits:
        faults.append(Fault("limits", "none", "", "at least one channel to test"))
    if not number(least) >= 3:
        faults.append(Fault("least number of readings in a window", shown(least), "", "3 or more"))
    if not len(time):
        faults.append(Fault("log", "no rows", "", "at least one reading"))
    elif length is not None:
        if not 0 < number(length) < np.inf:
            faults.append(Fault("length of the window", shown(length), "s", "a time above 0"))
        elif length > (lasts := float(time[-1] - time[0])) * (1 + 1e-9):
            faults.append(Fault("length of the window", float(length), "s", f"no more than {lasts:g} s, the whole log",
                                hint="log for longer, or judge with a shorter window"))
    if faults:
        raise InputError(*faults)
    return _Log(time, columns, dict(limits), length, least)
