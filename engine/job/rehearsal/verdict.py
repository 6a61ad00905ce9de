"""The end of a rehearsal: the truth beside what was stated, what the faults cost, and what was missed."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from engine.job.rehearsal.cost import Cost, costs
from engine.job.rehearsal.heat_course import settled_superheat
from engine.job.rehearsal.looks import Look
from engine.job.rehearsal.readings import Way, reckoned
from engine.job.rehearsal.rehearsal import Finding, Kind, Rehearsal
from engine.job.rehearsal.scenario import HiddenFault
from engine.job.rehearsal.valves import DEED_WORDS, refusal, valves_after
from engine.job.said import Said
from engine.steam import saturated, vapour
from engine.steam.errors import Fault, InputError

COMMON_U = 0.002  # of the quality, where the case does not state its instruments (common practice)
EARLY = 0.3  # K by which the body may still be short of its end
FEW = 10  # sets of readings, below which their scatter says little
_SAMPLING = "sampling representativeness"


@dataclass(frozen=True)
class Verdict:
    """What a rehearsal comes to.

    finding     what there was to be found, with ``x`` and ``line_superheat`` [K] of the line
    superheat   left at the exhaust of the warm rig [K], below 0 where it stays wet
    error       quality stated minus the truth; None where none was stated, or there is none
    U           expanded uncertainty of the instruments, against which the error is held; ``U_common``: readings or
                case do not give one, so it is a common one
    right       the finding is the right one, and a quality within U of the truth
    found, missed, imagined   faults hidden and named, hidden and not named, named and not hidden
    costs       what each hidden fault does to the answer of someone who does not notice it
    lessons     what was missed or done out of order
    """

    finding: Finding
    x: float
    line_superheat: float
    superheat: float
    error: float | None
    U: float
    U_common: bool
    right: bool
    found: frozenset[HiddenFault]
    missed: frozenset[HiddenFault]
    imagined: frozenset[HiddenFault]
    costs: tuple[Cost, ...]
    lessons: tuple[Said, ...]

    @property
    def all_named(self) -> bool:
        """Whether every fault was named, and no other."""
        return not self.missed and not self.imagined


def verdict_of(r: Rehearsal, way: Way | None = None) -> Verdict:
    """The verdict on a rehearsal in which something was stated.

    ``way`` is how the trainee turned readings into a result. Raises InputError where nothing was stated.
    """
    if r.stated is None:
        raise InputError(Fault("rehearsal", "nothing stated", "", "a quality stated, or why there is none"))
    rig, stated, superheat = r.rig, r.stated, settled_superheat(r.rig)
    finding = (Finding.SUPERHEATED if rig.line_superheat > 0.0 else
               Finding.CANNOT if superheat < rig.point.si["least_superheat"] else Finding.QUALITY)
    U, common = _uncertainty(r, way or Way())
    comparable = finding is Finding.QUALITY and stated.finding is Finding.QUALITY
    error = stated.x - rig.x if comparable else None
    right = _answered(r, finding) and (error is None or abs(error) <= U)
    hidden = r.scenario.faults
    return Verdict(finding, rig.x, rig.line_superheat, superheat, error, U, common, right, hidden & stated.suspected,
                   hidden - stated.suspected, stated.suspected - hidden, costs(r.scenario), tuple(_lessons(r)))


def _answered(r: Rehearsal, finding: Finding) -> bool:
    """Whether the finding stated can stand; readings spoilt by slugs may well be given up, if that is why."""
    given_up = HiddenFault.WATER_SLUGS in r.scenario.faults & r.stated.suspected
    return r.stated.finding is finding or (r.stated.finding is Finding.CANNOT and given_up)


def _uncertainty(r: Rehearsal, way: Way) -> tuple[float, bool]:
    """U of the instruments by the program's own budget, or a common one where the case leaves it open."""
    try:
        result = reckoned(r, way)
    except InputError:
        return COMMON_U, True
    if result.instruments is None or set(result.missing) - {_SAMPLING}:
        return COMMON_U, True
    return float(result.instruments.U), False


def _lessons(r: Rehearsal) -> Iterator[Said]:
    yield from _refused(r)
    yield from _valves(r)
    yield from _readings(r)
    for fault in HiddenFault:
        if r.scenario.has(fault) and fault not in r.stated.suspected:
            yield _overlooked(r, fault)
    if r.valves.stop > 0.0:
        yield Said("The stop valve was left open. A test ends with the tapping isolated, vented and drained.")


def _refused(r: Rehearsal) -> Iterator[Said]:
    told = set()
    for k, event in enumerate(r.events):
        if event.kind is Kind.REFUSED and event.what not in told:
            told.add(event.what)
            before = valves_after((e.time, e.what) for e in r.events[:k] if e.kind is Kind.DEED)
            yield Said(f"Stopped: {DEED_WORDS[event.what].lower()}. {refusal(before, event.time, event.what)}")


def _valves(r: Rehearsal) -> Iterator[Said]:
    half = drained = 0
    for time in r.readings:
        valves = valves_after(deed for deed in r.deeds if deed[0] < time)  # felt from the next step on
        half += 0.0 < valves.stop < 1.0
        drained += valves.drain
    if half:
        yield Said("{0} of {1} sets were read with the stop valve not fully open: it throttles beside the orifice, and "
                   "the small flow loses more heat per kilogram.", ((half, "count"), (len(r.readings), "count")))
    if drained:
        yield Said("{0} of {1} sets were read with the drain open.", ((drained, "count"), (len(r.readings), "count")))


def _readings(r: Rehearsal) -> Iterator[Said]:
    sets, course = len(r.readings), r.course
    if r.stated.finding is not Finding.QUALITY and sets == 0:
        return
    if sets < FEW:
        yield Said("Only {0} sets of readings: 20 to 30 over half an hour show drift and scatter.", ((sets, "count"),))
    rows = course.at(np.array(r.readings, dtype=float))
    cold = rows[course.flow[rows] == 0.0]
    if cold.size:
        yield Said("{0} of {1} sets were read without steam.", ((cold.size, "count"), (sets, "count")))
    early = rows[(course.flow[rows] > 0.0) & (course.short[rows] < -EARLY)]
    if early.size:
        k = int(early[np.argmin(course.short[early])])
        short, line = float(-course.short[k]), saturated(r.rig.p_line)
        cp = vapour(float(course.p_exhaust[k]), float(course.T_due[k])).cp
        yield Said("{0} of {1} sets were read while the body still took heat: up to {2} off the reading, {3} of "
                   "quality.", ((early.size, "count"), (sets, "count"), (short, "difference"),
                                (-cp * short / (line.h_g - line.h_f), "signed points")))


def _overlooked(r: Rehearsal, fault: HiddenFault) -> Said:
    sign, where = SIGNS[fault]
    looked = where is not None and r.looked(where) is not None
    ending = " You looked, and did not name it." if looked else ""
    return Said(f"Overlooked: {fault}. {sign}{ending}")


# how each fault shows, and where one has to look for it
SIGNS: dict[HiddenFault, tuple[str, Look | None]] = {
    HiddenFault.WET_EXHAUST: ("The thermometer sat at saturation of the exhaust pressure and did not rise; the end of "
                              "the exhaust was white from the lip on.", Look.EXHAUST_END),
    HiddenFault.BACK_PRESSURE: ("The exhaust gauge stood far above what was planned, and a hose hung on the exhaust.",
                                Look.EXHAUST_END),
    HiddenFault.WET_LAGGING: ("The lagging dripped; soaked, it loses about four times as much.", Look.LAGGING),
    HiddenFault.SHALLOW_THERMOMETER: ("The thermometer stood far out of its pocket, and a second one showed more.",
                                      Look.IMMERSION),
    HiddenFault.CLOGGED_ORIFICE: ("The reading crept down and the weighed flow was far below the one planned.",
                                  Look.WEIGH),
    HiddenFault.SUPERHEATED_LINE: ("The line thermometer stood above saturation at the line pressure, and the quality "
                                   "came out above 1.", None),
    HiddenFault.WATER_SLUGS: ("The reading dipped to saturation now and then and came back slowly; the exhaust spat "
                              "water.", Look.EXHAUST_END),
    HiddenFault.GAUGE_AS_ABSOLUTE: ("The face of the line gauge says gauge, the sheet absolute; and the line "
                                    "thermometer stood above saturation at the pressure as entered.", Look.GAUGE_FACE),
    HiddenFault.BAROMETER_ASSUMED: ("The barometer on the sheet was not read at the site.", Look.BAROMETER),
    HiddenFault.THERMOMETER_OFFSET: ("A second thermometer showed another temperature, however deep the first was.",
                                     Look.SECOND),
}
