"""Where the rig is judged: the steam, the flow and the reading of a case, with what cannot be used set aside."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields
from types import MappingProxyType
from typing import Generic, TypeVar

import numpy as np

from engine.calorimeter import Status, exhaust_temperature, orifice_flow, quality, velocity
from engine.job.assessment.modes import check_mode
from engine.job.assessment.separation import stage_of
from engine.job.assessment.terms import Terms, check_method, terms_at
from engine.job.case import Case, Resolved, faults_of, resolve
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import SEPARATING
from engine.job.case.fields_path import EXPECTED, UNDECIDED
from engine.job.case.rows import Entry
from engine.steam import saturated, saturation_temperature, state_ph, vapour
from engine.steam.errors import Fault, InputError

_CORE = {"question", "barometer_source", "p_barometer", "altitude", "leg_height", "p_line", "p_exhaust",
         "least_superheat", "comfortable_superheat"}
_LEAST = 0.1  # K above saturation at which a size can still be told
Found = TypeVar("Found")


@dataclass(frozen=True)
class Part(Generic[Found]):
    """A part of the result, or what keeps it from being computed."""

    value: Found | None
    trouble: str = ""

    def __bool__(self) -> bool:
        return self.value is not None


def part(si: Resolved, needed: Sequence[str], compute: Callable[[], Found]) -> Part[Found]:
    """``compute()``, unless an entry it needs is missing or contradicts another."""
    missing = [FIELDS[name].label.lower() for name in needed if si[name] is None]
    if missing:
        return Part(None, f"Enter {_listed(missing)}.")
    try:
        return Part(compute())
    except InputError as error:
        return Part(None, "; ".join(_sentence(fault) for fault in error.faults))


def _listed(words: Sequence[str]) -> str:
    *first, last = words
    return f"{', '.join(first)} and {last}" if first else last


def _sentence(fault: Fault) -> str:
    return " ".join(str(fault).replace("\n  - ", "; ").split())


@dataclass(frozen=True)
class Reading:
    """One reading with its terms, as ``quality`` takes it; SI."""

    p_line: float
    p_exhaust: float
    T_exhaust: float
    heat_loss: float
    line_velocity: float
    exhaust_velocity: float
    recovery: float


def shares(readings: Sequence[Reading]) -> np.ndarray:
    """Quality of each reading, all in one call; above 1 where the line is superheated, NaN where the exhaust is wet."""
    columns = {f.name: np.array([getattr(r, f.name) for r in readings]) for f in fields(Reading)}
    result, line = quality(**columns), saturated(columns["p_line"])
    return (result.h_line - line.h_f) / (line.h_g - line.h_f)


@dataclass(frozen=True)
class Point:
    """The steam and the reading by which every effect is sized, SI.

    case        as entered, but without what cannot be used, and with the computed flow where none was entered
    entered     as entered
    si          the case in SI; behind a separator its line pressure is that of the separator
    line        the line itself
    reading     what the thermometer shows or must show, with the terms of the case
    x           quality at the orifice; above 1 for a superheated line
    kept        part of the sample that reaches the orifice
    at_reach    the exhaust would be too little superheated, so the reach limit stands in for it
    aside       entries that cannot be used and were left out
    troubles    sentences on what else had to be left out
    """

    case: Case
    entered: Case
    si: Resolved
    line: Resolved
    reading: Reading
    x: float
    kept: float
    at_reach: bool
    aside: tuple[Fault, ...]
    troubles: tuple[str, ...]

    @property
    def flow(self) -> float | None:
        return self.si["sample_flow"]

    @property
    def flow_computed(self) -> bool:
        """Whether the flow follows from the orifice, since none was entered."""
        return self.entered["sample_flow"] is None and self.flow is not None

    @property
    def x_wet(self) -> float:
        """Quality at the orifice, 1 where the line is superheated."""
        return min(max(self.x, 0.0), 1.0)

    @property
    def wetness(self) -> float:
        """Wetness of the line itself, 0 where it is superheated."""
        return max(1.0 - self.kept * self.x_wet, 0.0)

    @property
    def p_discharge(self) -> float:
        """Pressure where the exhaust goes [Pa]."""
        return self.si["p_discharge"] if self.case["exhaust_to"] != "open air" else self.si.p_barometer

    def terms(self) -> Terms:
        r = self.reading
        return Terms(r.heat_loss, r.line_velocity, r.exhaust_velocity, r.recovery)

    def variant(self, *, shift: float = 0.0, method: str | None = None, **entries: float | None) -> Reading:
        """The reading with other entries (SI), every term found anew.

        ``shift`` [K] is added to all that the exhaust thermometer read: the reading, and the second or the
        normal one that a heat loss may rest on. ``method``: another one for the heat loss.
        """
        si = {**self.si.si, **entries}
        for name in ("T_exhaust", "T_second", "T_normal"):
            si[name] = None if si[name] is None else si[name] + shift
        case = self.case if method is None else self.case.with_(heat_loss_method=method)
        return _reading(case, Resolved(MappingProxyType(si), self.si.p_barometer), self.reading.T_exhaust + shift)


def _reading(case: Case, si: Resolved, T_exhaust: float) -> Reading:
    terms = terms_at(case, si, T_exhaust)
    return Reading(si["p_line"], si["p_exhaust"], T_exhaust, **terms.arguments())


def point_of(case: Case) -> Point:
    """The point of a case. InputError only where pressures, reading or limits themselves cannot be used."""
    usable, aside = _usable(case)
    point = _judged(usable, case, aside)
    if usable["sample_flow"] is None and None not in (point.si["bore"], point.si["discharge"]):
        for _ in range(2):  # the flow follows from the quality, and the quality a little from the flow
            flow = Entry(_orifice(point), "kg/s")
            point = _judged(usable.with_(sample_flow=flow), case, aside)
    return point


def _orifice(point: Point) -> float:
    si = point.si
    return orifice_flow(si["p_line"], point.x_wet, si["p_exhaust"], si["bore"], si["discharge"]).computed


def _usable(case: Case) -> tuple[Case, tuple[Fault, ...]]:
    aside: list[Fault] = []
    core = _CORE | {"wetness" if case["question"] == EXPECTED else "T_exhaust"}
    while faults := faults_of(case):
        if any(f.name in core or f.name not in FIELDS for f in faults) or len(aside) > len(FIELDS):
            raise InputError(*faults, *aside)
        aside += faults
        case = case.with_(**{f.name: FIELDS[f.name].blank for f in faults})
    return case, tuple(aside)


def _judged(case: Case, entered: Case, aside: tuple[Fault, ...]) -> Point:
    line, troubles = resolve(case), []
    si, kept = line, 1.0
    if case["mode"] == SEPARATING:
        try:
            check_mode(case, line)
            si, separation = stage_of(case, line)
            kept = 1.0 - separation.drain_fraction
        except InputError as error:
            troubles.append("The separator is left out: " + _sentence(error.faults[0]))
    if faster := _faster_than_sound(si):
        troubles.append("The exhaust bore is left out: " + faster)
        case, si = case.with_(exhaust_bore=None), Resolved(MappingProxyType({**si.si, "exhaust_bore": None}),
                                                           si.p_barometer)
    try:
        check_method(case)
        reading, at_reach, x = _where(case, si)
    except InputError as error:
        troubles.append("The heat loss of the case is left out: " + _sentence(error.faults[0]))
        case = case.with_(heat_loss_method=UNDECIDED)
        reading, at_reach, x = _where(case, si)
    return Point(case, entered, si, line, reading, x, kept, at_reach, aside, tuple(troubles))


def _faster_than_sound(si: Resolved) -> str:
    """In words, where the flow cannot pass the exhaust bore at the exhaust pressure."""
    if not (si["sample_flow"] and si["exhaust_bore"]):
        return ""
    p = si["p_exhaust"]
    steam = vapour(p, max(si["T_exhaust"], saturation_temperature(p)))
    c = velocity(si["sample_flow"], si["exhaust_bore"], steam.v)
    return "" if c <= steam.sound_speed else "the sample flow would have to pass it faster than sound."


def _where(case: Case, si: Resolved) -> tuple[Reading, bool, float]:
    """The reading of the case; where its exhaust would be too wet to read, the least that can be read; its quality."""
    T_sat = saturation_temperature(si["p_exhaust"])
    T_read = _must_show(case, si, T_sat) if case["question"] == EXPECTED else si["T_exhaust"]
    reading = _reading(case, si, T_read)
    if T_read - T_sat >= max(si["least_superheat"], _LEAST) and np.isfinite(x := float(shares([reading])[0])):
        return reading, False, x
    T_least = T_sat + max(si["least_superheat"], _LEAST)
    for _ in range(4):  # a fast stream is colder than the probe, and has to be dry itself
        reading = _reading(case, si, T_least)
        dry = saturated(si["p_exhaust"]).h_g + 0.5 * reading.recovery * reading.exhaust_velocity**2
        T_least = max(T_least, state_ph(si["p_exhaust"], dry).T + _LEAST)
    reading = _reading(case, si, T_least)
    if not np.isfinite(x := float(shares([reading])[0])):
        raise InputError(Fault("energy balance", "neither wet nor superheated steam", "", "an enthalpy steam can have",
                               "each entry is possible, but not all of them together",
                               "check heat loss, flow and velocities", "h"))
    return reading, True, x


def _must_show(case: Case, si: Resolved, T_sat: float) -> float:
    T_read = T_sat
    for _ in range(8):  # heat loss and velocity follow from the temperature they change
        seen = exhaust_temperature(si["p_line"], 1.0 - si["wetness"], si["p_exhaust"],
                                   **terms_at(case, si, T_read).arguments())
        moved, T_read = abs(seen.T_exhaust - T_read), seen.T_exhaust
        if moved < 1e-6:
            break
    return T_sat if seen.status == Status.NOT_SUPERHEATED else T_read
