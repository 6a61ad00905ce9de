"""A rehearsal: one frozen record of a scenario and of what was done, looked at, read and stated, minute by minute.

Only times and deeds are recorded. What was seen follows from them, since the simulated rig answers the
same deeds with the same digits; so a rehearsal fits in a link, and whoever opens it sees it all again.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import StrEnum
from functools import lru_cache
from math import ceil

from engine.job.rehearsal.faults import rig_of
from engine.job.rehearsal.looks import DEED_SIGHTS, LOOKING, TAKES, Look, seen
from engine.job.rehearsal.model import Rig
from engine.job.rehearsal.scenario import HiddenFault, Scenario
from engine.job.rehearsal.simulation import LONGEST, STEP, Course, simulate
from engine.job.rehearsal.valves import DEED_WORDS, DONE_WORDS, Deed, Valves, refusal, valves_after
from engine.job.said import Said
from engine.steam.errors import Fault, InputError

DOING = 10  # s that a deed takes


class Kind(StrEnum):
    """What an event is."""

    DEED = "d"
    REFUSED = "x"
    LOOK = "l"
    READING = "r"


@dataclass(frozen=True)
class Event:
    """Something at ``time`` [s]: ``what`` is a ``Deed`` or a ``Look``, None for a set of readings."""

    time: int
    kind: Kind
    what: Deed | Look | None = None


class Finding(StrEnum):
    """What a trainee can state."""

    QUALITY = "quality"
    CANNOT = "cannot be read"
    SUPERHEATED = "line superheated"


@dataclass(frozen=True)
class Statement:
    """The trainee's own answer: a quality, or why there is none, and the faults suspected."""

    finding: Finding
    x: float | None = None
    suspected: frozenset[HiddenFault] = frozenset()

    def __post_init__(self):
        if self.finding is Finding.QUALITY and not (self.x is not None and 0.0 < self.x <= 1.0):
            got = "nothing" if self.x is None else self.x
            raise InputError(Fault("Quality stated", got, "", "more than 0, up to 1",
                                   "it is the mass of vapour over the whole mass",
                                   "state it, or say that it cannot be read", "x"))


@dataclass(frozen=True)
class Rehearsal:
    """A rehearsal as far as it has come; ``now`` [s] counts from the first look at the cold rig."""

    scenario: Scenario
    now: int = 0
    events: tuple[Event, ...] = ()
    stated: Statement | None = None

    @property
    def deeds(self) -> tuple[tuple[int, Deed], ...]:
        """What was done and not refused, with its time."""
        return tuple((e.time, e.what) for e in self.events if e.kind is Kind.DEED)

    @property
    def valves(self) -> Valves:
        """How everything stands now."""
        return valves_after(self.deeds)

    @property
    def readings(self) -> tuple[int, ...]:
        """The times [s] of the sets of readings."""
        return tuple(e.time for e in self.events if e.kind is Kind.READING)

    def of(self, kind: Kind) -> tuple[Event, ...]:
        """The events of one kind."""
        return tuple(e for e in self.events if e.kind is kind)

    def looked(self, look: Look) -> int | None:
        """The time [s] of the last such look; None without one."""
        return max((e.time for e in self.events if e.what is look), default=None)

    @property
    def rig(self) -> Rig:
        """The rig, with the truth in it."""
        return known_rig(self.scenario)

    @property
    def course(self) -> Course:
        """The rig from the start until now."""
        return _course(self.scenario, self.deeds, self.now)


@lru_cache(maxsize=32)
def known_rig(scenario: Scenario) -> Rig:
    """The rig of a scenario; the same one is not built twice."""
    return rig_of(scenario)


@lru_cache(maxsize=32)
def _course(scenario: Scenario, deeds: tuple[tuple[int, Deed], ...], until: int) -> Course:
    return simulate(known_rig(scenario), deeds, until)


def begin(scenario: Scenario) -> Rehearsal:
    """A rehearsal at a cold rig. InputError where the case of the scenario cannot be rehearsed."""
    known_rig(scenario)
    return Rehearsal(scenario)


def advance(r: Rehearsal, seconds: float) -> Rehearsal:
    """Let time pass, in whole steps of the simulation. InputError beyond the longest rehearsal."""
    now = r.now + int(STEP * round(seconds / STEP))
    if not r.now <= now <= LONGEST:
        raise InputError(Fault("time of the rehearsal", now / 3600, "h", f"0 to {LONGEST / 3600:g} h",
                               hint="state what you found, or begin anew", name="time"))
    return r if now == r.now else replace(r, now=now)


def act(r: Rehearsal, deed: Deed) -> Rehearsal:
    """Do something, or have it refused: then only the attempt is recorded, and ``last_words`` says why."""
    if refusal(r.valves, r.now, deed):
        return replace(r, events=(*r.events, Event(r.now, Kind.REFUSED, deed)))
    return advance(replace(r, events=(*r.events, Event(r.now, Kind.DEED, deed))), DOING)


def look(r: Rehearsal, where: Look) -> Rehearsal:
    """Look closer; it takes its time."""
    later = advance(r, TAKES.get(where, LOOKING))
    return replace(later, events=(*r.events, Event(later.now, Kind.LOOK, where)))


def take_reading(r: Rehearsal) -> Rehearsal:
    """One set of readings now; a second one at the same moment adds nothing."""
    if r.readings and r.readings[-1] == r.now:
        return r
    return replace(r, events=(*r.events, Event(r.now, Kind.READING)))


def take_readings(r: Rehearsal, number: int, every: float) -> Rehearsal:
    """So many sets of readings, one ``every`` so many seconds, the first of them after that time."""
    for _ in range(number):
        r = take_reading(advance(r, every))
    return r


def stretch(r: Rehearsal) -> tuple[int, float]:
    """How many sets at the interval of the case make a stretch that can be called settled, and the interval [s].

    >>> from engine.job.case.demo import DEMO
    >>> stretch(begin(Scenario(DEMO)))  # the first and the last of them are ten minutes apart
    (11, 60.0)
    """
    si = r.rig.point.si
    return max(10, ceil(si["steady_window"] / si["read_every"] - 1e-9) + 1), si["read_every"]


def state(r: Rehearsal, statement: Statement) -> Rehearsal:
    """End the rehearsal with what the trainee found."""
    return replace(r, stated=statement)


def sight_of(r: Rehearsal, event: Event) -> Said | None:
    """What an event showed, or why it was refused; None for readings."""
    if event.kind is Kind.REFUSED:
        before = valves_after((e.time, e.what) for e in r.events[:r.events.index(event)] if e.kind is Kind.DEED)
        return Said(f"Refused: {DEED_WORDS[event.what].lower()}. {refusal(before, event.time, event.what)}")
    if event.kind is Kind.LOOK:
        return seen(r.course, event.what, event.time)
    if event.kind is Kind.DEED:
        show = DEED_SIGHTS.get(event.what)
        return show(r.course, event.time) if show else Said(DONE_WORDS[event.what])
    return None


def last_sight(r: Rehearsal) -> tuple[Event, Said] | None:
    """The last thing that was done, seen or refused; None before any."""
    for event in reversed(r.events):
        sight = sight_of(r, event)
        if sight is not None:
            return event, sight
    return None
