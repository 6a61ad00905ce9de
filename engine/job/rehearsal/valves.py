"""Valves and deeds of a rehearsal, and which of them are refused because they would hurt someone.

The tapping is under line pressure up to two valves: the drain, which blows to a safe place, and the
stop valve of the sample, behind which come orifice, body, thermometer and open exhaust. This is the
order of practice in a simulation. It permits nothing at a real rig.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from enum import StrEnum

CRACKED = 0.3  # part of the sample that a cracked stop valve passes
BLOW_DOWN = 60  # s, the least that clears a tapping; one to two minutes are common practice
LISTEN = 30  # s between cracking a valve and opening it
COLD_AGAIN = 600  # s after which a closed branch may hold water again


class Deed(StrEnum):
    """What can be done; the value stands in links."""

    PERMIT = "permit"
    WALK_EXHAUST = "walk"
    OPEN_DRAIN = "drain"
    CLOSE_DRAIN = "undrain"
    CRACK_STOP = "crack"
    OPEN_STOP = "open"
    CLOSE_STOP = "close"
    BLANK_EXHAUST = "blank"
    OPEN_BODY = "body"


DEED_WORDS = {
    Deed.PERMIT: "Permit in hand",
    Deed.WALK_EXHAUST: "Walk the exhaust",
    Deed.OPEN_DRAIN: "Open the drain",
    Deed.CLOSE_DRAIN: "Close the drain",
    Deed.CRACK_STOP: "Crack the stop valve",
    Deed.OPEN_STOP: "Open the stop valve fully",
    Deed.CLOSE_STOP: "Close the stop valve",
    Deed.BLANK_EXHAUST: "Blank the exhaust",
    Deed.OPEN_BODY: "Open the body",
}
DONE_WORDS = {
    Deed.PERMIT: "The permit is in hand and the control room knows of the test.",
    Deed.WALK_EXHAUST: "The exhaust is free, restrained and fenced off; the blank is off.",
    Deed.OPEN_DRAIN: "The drain blows: first water, then steam.",
    Deed.CLOSE_DRAIN: "The drain is closed.",
    Deed.CRACK_STOP: "The stop valve is cracked. No knocking; steam comes through the body.",
    Deed.OPEN_STOP: "The stop valve is fully open: only the orifice throttles now.",
    Deed.CLOSE_STOP: "The stop valve is closed.",
    Deed.BLANK_EXHAUST: "The blank is on.",
    Deed.OPEN_BODY: "The body is open.",
}


@dataclass(frozen=True)
class Valves:
    """How everything stands at one time. ``stop`` is the part of the way open; times [s] are those of the last
    change, None before any. ``blown`` [s]: how long the tapping has blown through the drain."""

    permit: bool = False
    exhaust_free: bool = False
    drain: bool = False
    stop: float = 0.0
    body_open: bool = False
    blown: int = 0
    drain_changed: int | None = None
    stop_changed: int | None = None

    def after(self, time: int, deed: Deed) -> Valves:
        """The valves after a deed at ``time``."""
        if deed is Deed.PERMIT:
            return replace(self, permit=True)
        if deed in (Deed.WALK_EXHAUST, Deed.BLANK_EXHAUST):
            return replace(self, exhaust_free=deed is Deed.WALK_EXHAUST)
        if deed is Deed.OPEN_BODY:
            return replace(self, body_open=True)
        if deed is Deed.OPEN_DRAIN:
            return self if self.drain else replace(self, drain=True, drain_changed=time,
                                                   blown=0 if self.stood_closed(time) else self.blown)
        if deed is Deed.CLOSE_DRAIN:
            return replace(self, drain=False, blown=self.blown_by(time), drain_changed=time)
        opened = {Deed.CRACK_STOP: CRACKED, Deed.OPEN_STOP: 1.0, Deed.CLOSE_STOP: 0.0}[deed]
        return replace(self, stop=opened, stop_changed=time)

    def blown_by(self, time: int) -> int:
        """How long the tapping has blown until ``time`` [s]."""
        return self.blown + (time - self.drain_changed if self.drain else 0)

    def stood_closed(self, time: int) -> bool:
        """Whether the branch has stood closed long enough to hold water again."""
        changed = [t for t in (self.drain_changed, self.stop_changed) if t is not None]
        return not self.drain and self.stop == 0.0 and bool(changed) and time - max(changed) > COLD_AGAIN


def valves_after(deeds: Iterable[tuple[int, Deed]]) -> Valves:
    """How everything stands after deeds (time, deed) in order."""
    valves = Valves()
    for time, deed in deeds:
        valves = valves.after(time, deed)
    return valves


def refusal(valves: Valves, time: int, deed: Deed) -> str:
    """Why a deed is refused at ``time``; "" where nothing stands against it.

    >>> refusal(Valves(permit=True, exhaust_free=True), 60, Deed.CRACK_STOP)[:62]
    'The tapping has not been blown down: cold water may stand in i'
    """
    if deed in (Deed.PERMIT, Deed.CLOSE_DRAIN, Deed.CLOSE_STOP):
        return ""
    return next((why for stands, why in _AGAINST[deed](valves, time) if stands), "")


def _against_walking(v: Valves, time: int):
    yield v.stop > 0.0 and not v.exhaust_free, _LIVE_EXHAUST


def _against_blank(v: Valves, time: int):
    yield v.stop > 0.0, _BLANKED


def _against_opening_body(v: Valves, time: int):
    yield not v.permit, _NO_PERMIT
    yield v.stop > 0.0, _LIVE_BODY
    yield v.drain, _LIVE_DRAIN
    yield not v.exhaust_free, _BLANK_ON


def _against_drain(v: Valves, time: int):
    yield not v.permit, _NO_PERMIT
    yield not v.exhaust_free, _NO_WALK


def _against_steam(v: Valves, time: int):
    yield not v.permit, _NO_PERMIT
    yield not v.exhaust_free, _NO_EXHAUST
    yield v.body_open, _BODY_OPEN
    if v.stop == 0.0:
        yield v.blown_by(time) == 0 or v.stood_closed(time), _NOT_BLOWN
        yield v.blown_by(time) < BLOW_DOWN, _BLOWN_TOO_SHORT


def _against_full_steam(v: Valves, time: int):
    yield from _against_steam(v, time)
    yield v.stop == 0.0, _NOT_CRACKED
    yield v.stop == CRACKED and time - (v.stop_changed or 0) < LISTEN, _TOO_FAST


_AGAINST = {Deed.WALK_EXHAUST: _against_walking, Deed.BLANK_EXHAUST: _against_blank,
            Deed.OPEN_BODY: _against_opening_body, Deed.OPEN_DRAIN: _against_drain, Deed.CRACK_STOP: _against_steam,
            Deed.OPEN_STOP: _against_full_steam}

_LIVE_BODY = ("The body is full of live steam. Nothing is loosened before the tapping is isolated, vented, drained, "
              "proved dead and locked off.")
_LIVE_DRAIN = "The drain still blows: the tapping is under line pressure, so nothing is proved dead."
_BLANK_ON = "With the blank on, pressure may stand in the body. Walk the exhaust and take the blank off first."
_NO_PERMIT = ("No valve is touched without the site's permit in hand and the control room told: it belongs to the "
              "person authorised for this steam system.")
_NO_WALK = ("Nobody has walked the exhaust and the drain yet: someone may stand in front of the end, and the blank "
            "may still be on.")
_NO_EXHAUST = ("The exhaust is not known to be free. Behind a closed exhaust the body fills up to line pressure, which "
               "it may not stand. Walk the exhaust first: blank off, free, restrained, fenced off.")
_NOT_BLOWN = ("The tapping has not been blown down: cold water may stand in it, and steam behind cold water hammers. "
              "Open the drain first and let it blow for one to two minutes.")
_BLOWN_TOO_SHORT = "The tapping has blown for less than a minute: water may still stand in it. Let it blow longer."
_NOT_CRACKED = ("A valve onto a cold body is never thrown open: the first condensate would hammer. Crack it, listen, "
                "then open it slowly.")
_TOO_FAST = "The valve has just been cracked. Listen for half a minute; if it bangs, shut it and walk away."
_BLANKED = ("With steam on, a blank on the exhaust puts the body under line pressure, which it may not stand, and "
            "scalds whoever holds it. Close the stop valve first.")
_LIVE_EXHAUST = "Steam is on: close the stop valve before anyone goes to the end of the exhaust."
_BODY_OPEN = "The body is open. It would have to be closed up and leak-tested before any steam."
