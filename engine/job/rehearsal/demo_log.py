"""Logs of the simulated rig, with a known truth: to show the Readings page, and to test it from end to end."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from engine.job.case import Case
from engine.job.rehearsal.faults import rig_of
from engine.job.rehearsal.looks import WEIGHING, weighed
from engine.job.rehearsal.readings import basis_of, channels_of
from engine.job.rehearsal.scenario import HiddenFault, Load, Scenario
from engine.job.rehearsal.simulation import STEP, by_the_sheet, simulate
from engine.job.rehearsal.valves import DEED_WORDS
from engine.measurement.logbook.write import write_log
from engine.steam.errors import Fault, InputError

WEIGHED_EVERY = 600.0  # s
_LONG = re.compile(r"-?\d+\.\d{7,}")
MOST_ROWS = 2_000_000


@dataclass(frozen=True)
class Truth:
    """What a simulated log hides: quality and superheat [K] of the line, sample flow [kg/s] at its end."""

    x: float
    line_superheat: float
    sample_flow: float
    faults: frozenset[HiddenFault]


def demo_log(target, case: Case, faults: Iterable[HiddenFault | str] = (), seed: int = 1, duration: float = 7200.0, *,
             x: float | None = None, load: Load = Load.STEADY, every: float = 10.0, skip: float = 0.0,
             start: str = "2025-03-04T08:00:00", deeds=None, ideal: bool = False) -> Truth:
    """Write a log of a simulated test of ``case``, and return the truth behind it.

    ``target`` is a path or an open file. ``duration`` [s] from the first valve on, a row ``every`` so
    many seconds; the first ``skip`` seconds are left out. ``x`` is the quality of the line, None has it
    drawn from the expected range of the case. ``deeds`` (time, deed) replace the start-up in good order.
    The columns are the gauges as they show, barometer, ambient temperature, the sample flow where it was
    weighed, and remarks. Raises InputError where the case cannot be simulated, or for more than two
    million rows.

    >>> import io
    >>> from engine.job.case.demo import DEMO
    >>> target = io.StringIO()
    >>> demo_log(target, DEMO, seed=4, x=0.972, duration=600.0).x
    0.972
    >>> target.getvalue().splitlines()[0].lstrip("\\ufeff")[:47]
    'time,line pressure [bar gauge],exhaust pressure'
    """
    scenario = Scenario(case, frozenset(faults), seed, x, load, ideal)
    if not (every > 0 and duration >= every and duration / min(every, STEP) <= MOST_ROWS and 0 <= skip < duration):
        raise InputError(Fault("rows of the log", f"{duration:g} s, a row every {every:g} s, {skip:g} s left out", "",
                               f"times above 0, some rows left, and at most {MOST_ROWS} steps", name="duration"))
    rig, deeds = rig_of(scenario), by_the_sheet() if deeds is None else deeds
    finer = int(np.ceil(every / STEP))
    course = simulate(rig, deeds, duration, every / finer)
    times = course.time[::finer][course.time[::finer] >= skip]
    channels = channels_of(course, times, rig.sheet.p_barometer)
    channels["sample_flow"] = _weighings(course, times)
    columns = {"time": times - times[0], "start": start, "basis": basis_of(rig),
               "texts": {"remark": _remarks(deeds, times)}}
    if hasattr(target, "write"):
        write_log(_AsRead(target), channels, **columns)
    else:
        with Path(target).open("wb") as file:
            write_log(_AsRead(file), channels, **columns)
    flowing = course.flow[course.flow > 0]
    return Truth(rig.x, rig.line_superheat, float(flowing[-1]) if flowing.size else 0.0, scenario.faults)


class _AsRead:
    """A file into which numbers go with the digits that a person reads; a conversion of units leaves many more."""

    def __init__(self, file):
        self.file = file

    def write(self, text: str) -> None:
        text = _LONG.sub(lambda number: f"{float(number[0]):.7g}", text)
        try:
            self.file.write(text)
        except TypeError:  # a binary file
            self.file.write(text.encode("utf-8"))


def _weighings(course, times: np.ndarray) -> np.ndarray:
    """The sample flow beside the rows at which a weighing ended; empty elsewhere."""
    flow = np.full(times.size, np.nan)
    for due in np.arange(times[0] + WEIGHING, times[-1] + 1e-9, WEIGHED_EVERY):
        found = weighed(course, due)
        if found is not None:
            flow[min(int(np.searchsorted(times, due)), times.size - 1)] = found
    return flow


def _remarks(deeds, times: np.ndarray) -> list[str]:
    """What was done, beside the first row after it."""
    said = [""] * times.size
    for time, deed in deeds:
        if times[0] <= time <= times[-1]:
            k = int(np.searchsorted(times, time))
            said[k] = f"{said[k]}; {DEED_WORDS[deed]}" if said[k] else DEED_WORDS[deed]
    return said
