"""What a person sees who looks closer: at lagging, immersion, the end of the exhaust, faces, scales."""

from __future__ import annotations

from enum import StrEnum

import numpy as np

from engine.job.case.fields_rig import ELECTRIC_PROBE
from engine.job.rehearsal.model import Rig
from engine.job.rehearsal.scenario import HiddenFault
from engine.job.rehearsal.simulation import Course
from engine.job.rehearsal.valves import Deed
from engine.job.said import Said

WEIGHING = 300  # s
SECOND_THERMOMETER = 0.1  # K, half width of what it may be off
RECENT = 900.0  # s, over which the end of the exhaust is remembered
_DEEP_ENOUGH = 15  # diameters


class Look(StrEnum):
    """Where to look; the value stands in links."""

    LAGGING = "lagging"
    IMMERSION = "immersion"
    EXHAUST_END = "end"
    GAUGE_FACE = "face"
    BAROMETER = "barometer"
    SECOND = "second"
    WEIGH = "weigh"


LOOK_WORDS = {
    Look.LAGGING: "Look at the lagging",
    Look.IMMERSION: "Look at the immersion",
    Look.EXHAUST_END: "Look at the exhaust's end",
    Look.GAUGE_FACE: "Read the line gauge's face",
    Look.BAROMETER: "Read the barometer",
    Look.SECOND: "Read a second thermometer",
    Look.WEIGH: "Weigh the condensate, 5 min",
}
TAKES = {Look.WEIGH: WEIGHING}  # s; the others take LOOKING
LOOKING = 30


def seen(course: Course, look: Look, time: float) -> Said:
    """What a look at ``time`` [s] shows."""
    return _SEEN[look](course, course.at(time))


def weighed(course: Course, time: float) -> float | None:
    """Sample flow [kg/s] by the condensate of the last five minutes; None where steam did not flow all along."""
    rows = (course.time > time - WEIGHING) & (course.time <= time)
    flow = course.flow[rows]
    return float(flow.mean() * course.rig.weighing) if flow.size and flow.min() > 0.0 else None


def second_thermometer(course: Course, time: float) -> float:
    """What a good thermometer in a pocket of its own shows [K]."""
    off = 0.0 if course.rig.scenario.ideal else SECOND_THERMOMETER * course.rig.scenario.random("second").uniform(-1, 1)
    k = course.at(time)
    return float(np.mean(course.T_exhaust[max(k - 5, 0):k + 1]) + off)


def orifice_seen(course: Course, time: float) -> Said:
    """What the orifice looks like when the body is opened."""
    flowing = course.flow[:course.at(time) + 1]
    if course.rig.clog_onset is None or not (flowing > 0).any():
        return Said("The orifice is clean and its edge is whole.")
    left = float(flowing[flowing > 0][-1] / course.rig.flow(np.array([course.rig.p_line]), 1.0)[0])
    if left > 0.9:
        return Said("There is a little scale at the orifice; it is still open.")
    return Said("Scale has grown into the orifice: about {0} of its area is left.",
                ((round(left, 2), "percent"),))


def planned_immersion(rig: Rig) -> float:
    """How deep the thermometer should be [m]."""
    si = rig.point.si
    return si["immersion"] or _DEEP_ENOUGH * (si["probe_outer_diameter"] or 0.006)


def _lagging(course: Course, k: int) -> Said:
    if course.rig.scenario.has(HiddenFault.WET_LAGGING):
        return Said("The lagging is dark and heavy, and water drips from its lower edge.")
    return Said("The lagging is dry and closed all round.")


def _immersion(course: Course, k: int) -> Said:
    return Said("It is {0} deep in the flow; it should be {1}.",
                 ((course.rig.probe.immersion, "length", 1), (planned_immersion(course.rig), "length", 1)))


def _exhaust_end(course: Course, k: int) -> Said:
    hose = course.rig.hose
    tail = " A hose of about {0} hangs on it." if hose else ""
    facts = ((float(round(hose)), "height"),) if hose else ()
    if course.flow[k] == 0.0:
        return Said("Nothing comes out of it." + tail, facts)
    recent = course.wet[(course.time > course.time[k] - RECENT) & (course.flow > 0) & (course.time <= course.time[k])]
    if course.wet[k] and recent.mean() > 0.5:
        return Said("White from the lip on, and drops in it: what comes out is wet." + tail, facts)
    if recent.any() and course.rig.slugs.size:
        return Said("A clear gap at the lip, then white; but now and then it spits water." + tail, facts)
    return Said("A clear gap at the lip, then white: what comes out is dry." + tail, facts)


def _face(course: Course, k: int) -> Said:
    gauge, sheet = course.rig.gauges["line"], course.rig.sheet
    face = "above the atmosphere (gauge)" if gauge.on_barometer else "absolute"
    entered = "absolute" if sheet.line_gauge_absolute else "gauge"
    return Said(f"The face says: pressure {face}. The sheet enters it as {entered}.")


def _barometer(course: Course, k: int) -> Said:
    return Said("The barometer shows {0}; on the sheet stands {1}.",
                 ((read_barometer(course.rig), "barometer"), (course.rig.sheet.p_barometer, "barometer")))


def read_barometer(rig: Rig) -> float:
    """The barometer as read at the site [Pa]."""
    return rig.sheet.p_barometer if rig.sheet.barometer_read else rig.p_barometer


def _second(course: Course, k: int) -> Said:
    kind = "electric" if course.rig.point.case["thermometer"] == ELECTRIC_PROBE else "glass"
    return Said(f"A second {kind} thermometer, in a pocket of its own, shows {{0}}; the first shows {{1}}.",
                 ((second_thermometer(course, course.time[k]), "temperature"),
                  (float(course.shown["exhaust thermometer"][k]), "temperature")))


def _weigh(course: Course, k: int) -> Said:
    flow, planned = weighed(course, course.time[k]), course.rig.sheet.sample_flow
    if flow is None:
        return Said("Steam did not flow all the while, so the weighing says nothing.")
    return Said("{0} of condensate in 5 min: {1}. Planned was {2}.",
                 ((flow * WEIGHING, "mass"), (flow, "mass flow"), (planned, "mass flow")))


_SEEN = {Look.LAGGING: _lagging, Look.IMMERSION: _immersion, Look.EXHAUST_END: _exhaust_end, Look.GAUGE_FACE: _face,
         Look.BAROMETER: _barometer, Look.SECOND: _second, Look.WEIGH: _weigh}

# where each deed that shows something is looked up
DEED_SIGHTS = {Deed.OPEN_BODY: orifice_seen}
