"""A rehearsal: one frozen record of a scenario and of what was done, looked at, read and stated, minute by minute."""

from engine.job.rehearsal.rehearsal import (
    Event,
    Finding,
    Kind,
    Rehearsal,
    Statement,
    act,
    advance,
    begin,
    last_sight,
    look,
    sight_of,
    state,
    take_reading,
    take_readings,
)

__all__ = [
    "act",
    "advance",
    "begin",
    "Event",
    "Finding",
    "Kind",
    "last_sight",
    "look",
    "Rehearsal",
    "sight_of",
    "state",
    "Statement",
    "take_reading",
    "take_readings",
]
