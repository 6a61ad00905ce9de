"""A scenario or a whole rehearsal as one word for an address, packed so that nothing is read at a glance."""

from __future__ import annotations

import base64
import binascii
import json
import zlib

from engine.job.case import casefile
from engine.job.rehearsal.looks import Look
from engine.job.rehearsal.rehearsal import Event, Finding, Kind, Rehearsal, Statement, begin
from engine.job.rehearsal.scenario import HiddenFault, Load, Scenario
from engine.job.rehearsal.simulation import LONGEST, STEP
from engine.job.rehearsal.valves import Deed, Valves, refusal
from engine.steam.errors import Fault, InputError

SCHEMA = 1
MOST_EVENTS = 2000
_BYTES = 300_000
_FAULTS, _LOADS, _FINDINGS = list(HiddenFault), list(Load), list(Finding)  # by their place: new ones go at the end


def to_link(r: Rehearsal) -> str:
    """The rehearsal as far as it has come; of one just begun, that is the scenario alone."""
    s = r.scenario
    scenario = [casefile.to_link(s.case), sorted(_FAULTS.index(f) for f in s.faults), s.seed, s.x, _LOADS.index(s.load),
                s.ideal]
    stated = r.stated and [_FINDINGS.index(r.stated.finding), r.stated.x,
                           sorted(_FAULTS.index(f) for f in r.stated.suspected)]
    events = [[e.time, e.kind, e.what] for e in r.events]
    text = json.dumps([SCHEMA, scenario, r.now, events, stated], separators=(",", ":"), allow_nan=False)
    return base64.urlsafe_b64encode(zlib.compress(text.encode(), 9)).decode().rstrip("=")


def from_link(word: str) -> Rehearsal:
    """Read a rehearsal from an address. InputError with the reason where the word holds none that can be played."""
    try:
        schema, scenario, now, events, stated = _unpacked(word)
        if schema != SCHEMA:
            raise ValueError(f"made by another version of this program: {str(schema)[:20]}")
        case, faults, seed, x, load, ideal = scenario
    except (ValueError, TypeError, binascii.Error, zlib.error, RecursionError) as error:
        raise _refused(str(error).splitlines()[0] if str(error) else type(error).__name__) from error
    case = casefile.from_link(case if isinstance(case, str) else "")
    try:
        hidden = frozenset(_FAULTS[_index(f)] for f in faults)
        made = Scenario(case, hidden, seed, x, _LOADS[_index(load)], ideal is True)
        done, statement = _events(events, now), _statement(stated)
    except (ValueError, TypeError, IndexError, KeyError) as error:
        if isinstance(error, InputError):
            raise
        raise _refused("entries that this version does not know") from error
    begin(made)
    return Rehearsal(made, now, done, statement)


def _unpacked(word: str) -> list:
    packed = base64.b64decode(word + "=" * (-len(word) % 4), altchars=b"-_", validate=True)
    unpacker = zlib.decompressobj()
    text = unpacker.decompress(packed, _BYTES)
    if unpacker.unconsumed_tail or not unpacker.eof:
        raise ValueError("too long or cut off")
    document = json.loads(text)
    if not isinstance(document, list) or len(document) != 5:
        raise ValueError("another kind of link")
    return document


def _index(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool) or value < 0:
        raise ValueError("not a place in a list")
    return value


def _events(rows: list, now: object) -> tuple[Event, ...]:
    """Events in order, on steps of the simulation, none after now, and no deed that would have been refused."""
    if len(rows) > MOST_EVENTS:
        raise ValueError("too many events")
    by_kind = {Kind.DEED: Deed, Kind.REFUSED: Deed, Kind.LOOK: Look}
    events, valves = [], Valves()
    for time, kind, what in rows:
        kind = Kind(kind)
        event = Event(_time(time), kind, by_kind[kind](what) if kind in by_kind else None)
        if kind in (Kind.DEED, Kind.REFUSED):
            if bool(refusal(valves, event.time, event.what)) is not (kind is Kind.REFUSED):
                raise ValueError("a deed out of order")
            valves = valves.after(event.time, event.what) if kind is Kind.DEED else valves
        events.append(event)
    times = [0, *(e.time for e in events), _time(now)]
    if times != sorted(times):
        raise ValueError("events out of order")
    return tuple(events)


def _time(value: object) -> int:
    if _index(value) > LONGEST or value % STEP:
        raise ValueError("not a time of a rehearsal")
    return value


def _statement(row: list | None) -> Statement | None:
    if row is None:
        return None
    finding, x, suspected = row
    return Statement(_FINDINGS[_index(finding)], x, frozenset(_FAULTS[_index(f)] for f in suspected))


def _refused(got: str) -> InputError:
    return InputError(Fault("rehearsal in the link", got[:120], "", "a link made by this program, copied whole",
                            hint="ask for the link again"))
