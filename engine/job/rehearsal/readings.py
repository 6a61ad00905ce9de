"""The readings of a rehearsal as a run of the program itself, by whatever way the trainee turns them into pressures."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.job.case import ABSOLUTE, GAUGE, Case
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.job.rehearsal.looks import Look, read_barometer, second_thermometer, weighed
from engine.job.rehearsal.model import Rig
from engine.job.rehearsal.rehearsal import Rehearsal
from engine.job.rehearsal.simulation import Course
from engine.job.result import Result, reduce
from engine.job.result.runs import Run
from engine.steam.units import from_si

NAME = "rehearsal"


@dataclass(frozen=True)
class Way:
    """How readings are turned into a result: what was read, or what the sheet has people believe.

    line_absolute   take the line gauge for an absolute one; None does as the sheet says
    exhaust_read    take the exhaust pressure as its gauge shows, else as planned
    barometer_read  take the barometer as it was read at the site, else as it stands on the sheet
    flow_weighed    take the sample flow as it was weighed, else as planned
    second_read     take the second thermometer for the right one
    settled_only    use the longest settled stretch, else every set
    """

    line_absolute: bool | None = None
    exhaust_read: bool = True
    barometer_read: bool = False
    flow_weighed: bool = False
    second_read: bool = False
    settled_only: bool = True


def channels_of(course: Course, times: np.ndarray, p_barometer: float, T_shift: float = 0.0) -> dict[str, np.ndarray]:
    """What the gauges showed at ``times`` [s], by channel, SI; pressures as shown."""
    k = course.at(times)
    shown = {name: values[k] for name, values in course.shown.items()}
    return {"p_line": shown["line"], "p_exhaust": shown["exhaust"],
            "T_exhaust": shown["exhaust thermometer"] + T_shift, "T_line": shown["line thermometer"],
            "p_barometer": np.full(k.size, p_barometer), "T_ambient": np.full(k.size, course.rig.T_ambient)}


def basis_of(rig: Rig, line_absolute: bool | None = None) -> dict[str, str]:
    """Gauge or absolute, as the sheet has it, or as told for the line."""
    absolute = rig.sheet.line_gauge_absolute if line_absolute is None else line_absolute
    return {"p_line": ABSOLUTE if absolute else GAUGE,
            "p_exhaust": ABSOLUTE if rig.sheet.exhaust_gauge_absolute else GAUGE}


def run_of(r: Rehearsal, way: Way) -> Run:
    """The readings taken so far as a run."""
    course, rig = r.course, r.rig
    times = np.array(r.readings, dtype=float)
    shift = second_shift(r) if way.second_read else None
    read = way.barometer_read and r.looked(Look.BAROMETER) is not None
    p_air = read_barometer(rig) if read else rig.sheet.p_barometer
    channels = channels_of(course, times, p_air, shift or 0.0)
    basis = basis_of(rig, way.line_absolute)
    if not way.exhaust_read:
        del channels["p_exhaust"], basis["p_exhaust"]
    flow = weighed_flow(r) if way.flow_weighed else None
    if flow is not None:
        channels["sample_flow"] = np.full(times.size, flow)
    return Run(NAME, np.arange(1, times.size + 1), times, channels, basis, np.ones(times.size, dtype=bool))


def weighed_flow(r: Rehearsal) -> float | None:
    """The last sample flow weighed [kg/s]; None where none was."""
    time = r.looked(Look.WEIGH)
    return None if time is None else weighed(r.course, time)


def second_shift(r: Rehearsal) -> float | None:
    """What the second thermometer showed above the first when it was last read [K]; None where it was not."""
    time = r.looked(Look.SECOND)
    if time is None:
        return None
    course = r.course
    return second_thermometer(course, time) - float(course.shown["exhaust thermometer"][course.at(time)])


def case_for(r: Rehearsal, way: Way) -> Case:
    """The case by which the readings are reduced."""
    case = r.rig.point.case
    if way.settled_only or not r.readings:
        return case
    ends = (Entry(t / 60.0, "min") for t in (r.readings[0], r.readings[-1]))
    window = FIELDS["windows"].row(log=NAME, begin=next(ends), end=next(ends), reason="every set of readings taken")
    return case.with_(windows=(window,))


def reckoned(r: Rehearsal, way: Way) -> Result:
    """The readings reduced, as the program reduces any run. InputError where way and case do not go together."""
    return reduce(case_for(r, way), [run_of(r, way)])


def typed(r: Rehearsal) -> Case:
    """The case of the rehearsal with its readings typed in, for the pages that work on those."""
    course, rig = r.course, r.rig
    channels = channels_of(course, np.array(r.readings, dtype=float), rig.sheet.p_barometer)
    basis, rows = basis_of(rig), []
    for k, time in enumerate(r.readings):
        def entry(name: str, unit: str, kind: str, k: int = k) -> Entry:
            return Entry(float(round(from_si(float(channels[name][k]), unit, kind), 6)), unit, basis.get(name, ""))
        rows.append(FIELDS["readings"].row(
            run=NAME, time=Entry(time / 60.0, "min"), p_line=entry("p_line", "bar", "pressure"),
            p_exhaust=entry("p_exhaust", "bar", "pressure"), T_exhaust=entry("T_exhaust", "°C", "temperature"),
            p_barometer=Entry(round(rig.sheet.p_barometer / 1e3, 3), "kPa", ABSOLUTE)))
    return rig.point.case.with_(readings=tuple(rows[:FIELDS["readings"].most]))
