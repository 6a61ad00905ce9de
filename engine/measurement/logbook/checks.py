"""What looks wrong in a log that could be read: said out loud, never mended in silence.

Each check looks at numbers that parse well and yet cannot be meant: clocks that run backwards,
channels that stand still, units and bases that contradict the other channels. A suspicion changes
nothing in the log; it names the rows and what to do. Limits are common practice, chosen wide enough
that a sound log raises none.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.measurement.logbook.mapping import Column
from engine.measurement.logbook.physics import physics_suspicions
from engine.measurement.logbook.suspicion import Suspicion, ranges
from engine.measurement.logbook.words import CHANNELS

LEAST_STUCK = 30  # rows; fewer equal readings in a row are no news with a coarse gauge
STUCK_FACTOR = 20  # times as long as the channel's usual run of equal readings
GAP_FACTOR = 10  # times the usual interval
FALL_BACK = 3600.0  # s, the hour that is written twice when summer time ends


def _thin(values: np.ndarray) -> np.ndarray:
    """Some values from all over where there are very many: enough for a median."""
    return values[::max(1, values.size // 50_000)]


class Checked(NamedTuple):
    """What the checks look at: elapsed ``time`` [s] or None, row numbers, SI channels, their columns."""

    time: np.ndarray | None
    rows: np.ndarray
    channels: dict[str, np.ndarray]
    columns: dict[str, Column]
    dated: bool = False


def suspicions(log: Checked) -> tuple[Suspicion, ...]:
    """Everything that looks wrong, the clock first."""
    found = [] if log.time is None else _clock(log)
    for name, values in log.channels.items():
        found += _stuck(name, values, log.rows)
    found += physics_suspicions(log.rows, log.channels, log.columns)
    return tuple(found)


def _clock(log: Checked) -> list[Suspicion]:
    if log.time.size < 2:
        return []
    steps, rows = np.diff(log.time), log.rows[1:]
    forward = _thin(steps)
    forward = forward[forward > 0]
    usual = float(np.median(forward)) if forward.size else 0.0
    if steps.min() > 0 and steps.max() <= GAP_FACTOR * usual:
        return []
    found = []
    back = steps < 0
    if back.any():
        falls = -steps[back]
        hour = log.dated and back.sum() == 1 and abs(falls[0] - FALL_BACK) <= max(2 * usual, 60.0)
        found.append(Suspicion(
            "time backwards", "time", f"the time runs backwards at {_times(back.sum())}, by up to {falls.max():.6g} s",
            *ranges(rows, back),
            "the hour written twice when summer time ends? Then add an hour to the rows after it, or log in UTC" if hour
            else "see whether the log is two logs joined, sorted otherwise, or the logger's clock was set"))
    same = steps == 0
    if same.any():
        verb = "carries" if same.sum() == 1 else "carry"
        found.append(Suspicion(
            "duplicated stamps", "time", f"{_times(same.sum())} {verb} the same time as the row before",
            *ranges(rows, same), "see whether rows were logged twice, or the stamps are too coarse: repeated readings "
            "are not independent ones"))
    if forward.size >= 10:
        gap = steps > GAP_FACTOR * usual
        if gap.any():
            found.append(Suspicion(
                "gap", "time", f"after {_times(gap.sum())} there is a gap of up to {steps[gap].max():.6g} s, "
                f"where rows usually follow every {usual:.6g} s", *ranges(rows, gap),
                "a settled window must not reach across a gap"))
    return found


def _times(count: int) -> str:
    return "1 row" if count == 1 else f"{count} rows"


def _stuck(name: str, values: np.ndarray, rows: np.ndarray) -> list[Suspicion]:
    """A channel that moved and then holds exactly one value, or one that never moves at all."""
    if values.size < LEAST_STUCK or CHANNELS[name].kind == "mass":
        return []
    if not _holds_somewhere(values):
        return []
    change = np.empty(values.size, dtype=bool)
    change[0] = True
    np.not_equal(values[1:], values[:-1], out=change[1:])  # NaN differs from itself: a gap ends a run
    starts = np.flatnonzero(change)
    lengths = np.diff(starts, append=values.size)
    label = CHANNELS[name].label
    if starts.size == 1:
        if name in ("p_barometer", "T_ambient"):
            return []
        return [Suspicion("stuck channel", name, f"the {label} is the same in all {values.size} rows",
                          ((int(rows[0]), int(rows[-1])),), values.size,
                          "see whether it was read at all, or typed once and copied down")]
    longest = max(LEAST_STUCK, STUCK_FACTOR * float(np.median(_thin(lengths))))
    if name in ("p_barometer", "T_ambient"):  # slow by nature
        return []
    held = lengths >= longest
    if not held.any():
        return []
    mask = np.repeat(held, lengths)
    return [Suspicion("stuck channel", name, f"the {label} stands still for up to {int(lengths[held].max())} rows, "
                      f"where it usually changes after {float(np.median(_thin(lengths))):.4g}", *ranges(rows, mask),
                      "see whether the sensor, its cable or the logger's channel was at fault in these rows")]


def _holds_somewhere(values: np.ndarray) -> bool:
    """Whether a run of ``LEAST_STUCK`` equal readings is possible: a quick look at every fifth one."""
    fifth = values[::5]
    equal = fifth[1:] == fifth[:-1]
    needed = LEAST_STUCK // 5 - 1  # so many equal neighbours in a row, if there is such a run
    if equal.size < needed:
        return True
    together = equal[:equal.size - needed + 1].copy()
    for shift in range(1, needed):
        together &= equal[shift:equal.size - needed + 1 + shift]
    return bool(together.any())
