"""A rehearsal in words: the verdict, what the faults cost, what was done when."""

from __future__ import annotations

from engine.job.rehearsal.cost import Cost
from engine.job.rehearsal.looks import LOOK_WORDS
from engine.job.rehearsal.rehearsal import Finding, Kind, Rehearsal, sight_of
from engine.job.rehearsal.scenario import HiddenFault
from engine.job.rehearsal.valves import DEED_WORDS
from engine.job.rehearsal.verdict import Verdict
from engine.job.said import Said
from engine.steam.units import UnitSystem

RIGHT, PARTLY, WRONG = "●", "◐", "○"  # a shape beside the word


def clock(seconds: float) -> str:
    """``1 h 05 min``, or ``7 min 30 s`` within the first hour.

    >>> clock(3900), clock(450)
    ('1 h 05 min', '7 min 30 s')
    """
    minutes, s = divmod(int(seconds), 60)
    hours, minutes = divmod(minutes, 60)
    return f"{hours} h {minutes:02d} min" if hours else f"{minutes} min {s:02d} s"


def headline(v: Verdict) -> str:
    """The verdict in one sentence, with its shape."""
    shape = RIGHT if v.right and v.all_named else PARTLY if v.right or v.found else WRONG
    answer = "The answer is right" if v.right else "The answer is wrong"
    if not v.missed and not v.imagined:
        faults = "and every hidden fault was named" if v.found else "and nothing was hidden"
        joint = " " if v.right else ", "
        return f"{shape} {answer}{joint}{faults}."
    parts = [f"overlooked: {_listed(v.missed)}"] if v.missed else []
    parts += [f"not there: {_listed(v.imagined)}"] if v.imagined else []
    return f"{shape} {answer}; {'; '.join(parts)}."


def truth(v: Verdict) -> Said:
    """What there was to be found."""
    if v.finding is Finding.SUPERHEATED:
        return Said("The line was superheated by {0}: there was no wetness to measure.",
                    ((v.line_superheat, "difference"),))
    if v.finding is Finding.CANNOT:
        how = ("The exhaust stayed wet" if v.superheat <= 0 else "The exhaust was too little superheated, {1}")
        return Said("The quality of the line was {0}. " + how + ", so no value could be read, only “below”.",
                    ((v.x, "fraction"), (max(v.superheat, 0.0), "difference")))
    return Said("The quality of the line was {0}, wetness {1}; the warm exhaust has {2} of superheat.",
                ((v.x, "fraction"), (1.0 - v.x, "wetness"), (v.superheat, "difference")))


def judged(v: Verdict, r: Rehearsal) -> Said:
    """The statement beside the truth."""
    stated = r.stated
    if v.error is None:
        if stated.finding is v.finding:
            return Said(f"You stated: {stated.finding}. So it was.")
        if stated.finding is Finding.QUALITY:
            return Said("You stated a quality of {0}, where there was none to be read.", ((stated.x, "fraction"),))
        if v.right:
            return Said(f"You stated: {stated.finding}. With water coming through time and again that stands.")
        return Said(f"You stated: {stated.finding}. So it was not.")
    whose = "that of a careful test" if v.U_common else "that of these instruments"
    return Said(f"You stated {{0}}: {{1}} from the truth. The uncertainty U is {{2}}, {whose}.",
                ((stated.x, "fraction"), (v.error, "signed points"), (v.U, "points")))


def cost(c: Cost) -> Said:
    """What one fault does to the answer of someone who does not notice it."""
    name = str(c.fault).capitalize()
    if c.fault is HiddenFault.SUPERHEATED_LINE:
        return Said(f"{name}: taken for wet steam, the quality would come out as {{0}}, which is no quality.",
                    ((c.x, "fraction"),))
    if c.x is None:
        return Said(f"{name}: the pressures contradict each other, so nothing comes out.")
    if c.size is None:
        return Said(f"{name}: nothing can be read; whoever takes saturation for a reading states {{0}} or more.",
                    ((c.x, "fraction"),))
    if c.fault is HiddenFault.BACK_PRESSURE:
        return Said(f"{name}: {{0}} where the exhaust pressure is taken as planned. Read, it costs nothing but margin: "
                    "{1} of superheat are left of {2}.",
                    ((c.size, "signed points"), (c.superheat, "difference"), (c.sound, "difference")))
    return Said(f"{name}, unnoticed: {{0}}.", ((c.size, "signed points"),))


def journal(r: Rehearsal, units: UnitSystem) -> list[tuple[str, str, str]]:
    """Everything done, seen and refused: time, what, and what it showed; readings counted together."""
    rows: list[tuple[str, str, str]] = []
    sets = 0
    for k, event in enumerate(r.events):
        if event.kind is Kind.READING:
            sets += 1
            following = r.events[k + 1].kind if k + 1 < len(r.events) else None
            if following is not Kind.READING:
                rows.append((clock(event.time), f"{sets} set{'s' if sets > 1 else ''} of readings", ""))
                sets = 0
            continue
        words = LOOK_WORDS[event.what] if event.kind is Kind.LOOK else DEED_WORDS[event.what]
        rows.append((clock(event.time), words, sight_of(r, event).text(units)))
    return rows


def _listed(faults: frozenset[HiddenFault]) -> str:
    return ", ".join(f for f in HiddenFault if f in faults)
