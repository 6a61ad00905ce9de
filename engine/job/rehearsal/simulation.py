"""The simulated rig over time: what the steam does, what the body and the thermometer make of it, what gauges show.

Steam, flow and exhaust pressure follow the line pressure at once, in one array call; the body's course
is found piece by piece between two changes of a valve; the thermometer follows the steam with its own
lag. Chance is drawn by seed and purpose, so that the same deeds give the same digits, however time was
advanced.

What is simplified: steam has no storage of its own; a slug wets the body at once; a stop valve that
is cracked passes a fixed part; superheated line steam flows like dry steam.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from engine.calorimeter import water_leg
from engine.job.case import T_LEG
from engine.job.rehearsal.faults import CLOGGED_TO, CLOGGING
from engine.job.rehearsal.heat_course import Due, cooled, due_of, followed, middles_of
from engine.job.rehearsal.lag import coloured, lagged
from engine.job.rehearsal.model import Rig
from engine.job.rehearsal.scenario import Load
from engine.job.rehearsal.valves import Deed, Valves
from engine.steam import saturation_temperature

STEP = 5.0  # s, between two times of a simulation
LONGEST = 12 * 3600.0  # s, of a rehearsal; a log may be longer
PIECE = 300.0  # s, after which a clogging rig is looked at anew
FALL, FALL_BEGINS, FALL_LASTS = 0.05, 3000.0, 1200.0  # of the line pressure; s from the start, s
_SWING = {Load.STEADY: (0.001, 0.001), Load.SWINGING: (0.006, 0.012), Load.FALLING: (0.001, 0.0)}
_WET_SWING = {Load.STEADY: 1.5e-4, Load.SWINGING: 6e-4, Load.FALLING: 1.5e-4}
_MIXING, _LOAD = 45.0, 120.0  # s, over which wetness and line pressure forget themselves


@dataclass(frozen=True, eq=False)
class Course:
    """The rig over time, SI and absolute; one element per step.

    flow, p_line, x, p_exhaust   of the steam; flow 0 with the stop valve closed
    T_due       what the exhaust would read with a warm body
    T_exhaust   the exhaust steam as a perfect thermometer reads it
    T_body      of the metal
    wet         the exhaust is not superheated
    standing    where the pointers stand on the whole, by the names of the gauges; pressures as the gauge shows them
    shown       what a person reads: the same with its trembling, in steps of the scale
    """

    rig: Rig
    time: np.ndarray
    p_line: np.ndarray
    x: np.ndarray
    flow: np.ndarray
    p_exhaust: np.ndarray
    T_due: np.ndarray
    T_exhaust: np.ndarray
    T_body: np.ndarray
    wet: np.ndarray
    standing: dict[str, np.ndarray]
    shown: dict[str, np.ndarray]

    def at(self, time):
        """The step that holds at ``time`` [s], or the steps at several."""
        steps = np.clip(np.searchsorted(self.time, time, side="right") - 1, 0, self.time.size - 1)
        return steps if np.ndim(time) else int(steps)

    @property
    def short(self) -> np.ndarray:
        """How far the exhaust is from what a warm body would let it be [K], negative below."""
        return self.T_exhaust - self.T_due


def simulate(rig: Rig, deeds: Sequence[tuple[int, Deed]] = (), until: float = 3600.0, dt: float = STEP) -> Course:
    """The rig from a cold start to ``until`` [s], in steps of ``dt`` [s], with ``deeds`` (time, what was done).

    The first steps do not depend on how many follow.

    >>> from engine.job.case.demo import DEMO
    >>> from engine.job.rehearsal.faults import rig_of
    >>> from engine.job.rehearsal.scenario import Scenario
    >>> course = simulate(rig_of(Scenario(DEMO, x=0.972, ideal=True)), by_the_sheet(), 5400.0)
    >>> float(course.T_exhaust[-1] - 273.15)
    121.1
    """
    time = dt * np.arange(int(round(until / dt)) + 1)
    chance = _Chance(rig, time.size, dt)
    p_line, x = chance.p_line(time), chance.quality()
    pieces = list(_pieces(rig, deeds, time))
    steam = _steam(rig, pieces, p_line, x)
    T_exhaust, T_body = _heat(rig, pieces, steam, dt)
    before = _before_the_gauges(rig, p_line, steam.p_exhaust, T_exhaust, dt)
    standing = {name: rig.gauges[name].standing(value) for name, value in before.items()}
    shown = {name: rig.gauges[name].shown(value, chance.white(f"{name} shown")) for name, value in before.items()}
    T_due = np.where(steam.flow > 0, steam.T_due, T_exhaust)
    return Course(rig, time, p_line, steam.x, steam.flow, steam.p_exhaust, T_due, T_exhaust, T_body, steam.wet,
                  standing, shown)


def by_the_sheet(start: int = 0) -> tuple[tuple[int, Deed], ...]:
    """A start-up in good order, from ``start`` [s] on; steam comes 5 min later, the valve is open after 6."""
    order = ((0, Deed.PERMIT), (60, Deed.WALK_EXHAUST), (120, Deed.OPEN_DRAIN), (300, Deed.CRACK_STOP),
             (330, Deed.CLOSE_DRAIN), (360, Deed.OPEN_STOP))
    return tuple((start + at, deed) for at, deed in order)


@dataclass(frozen=True)
class _Piece:
    """Steps ``first`` to before ``stop`` in which nothing is switched; ``opening`` of the way of the sample."""

    first: int
    stop: int
    opening: float
    slug: bool


def _pieces(rig: Rig, deeds: Iterable[tuple[int, Deed]], time: np.ndarray) -> Iterator[_Piece]:
    """The stretches between changes of the stop valve, slugs of water, and looks at a clogging orifice."""
    n = time.size
    stops, valves = [(0, 0.0)], Valves()
    for at, deed in deeds:
        valves = valves.after(at, deed)
        if valves.stop != stops[-1][1]:
            stops.append((int(np.searchsorted(time, at, side="right")), valves.stop))  # felt from the next step on
    began = None
    for (first, opening), (stop, _) in zip(stops, [*stops[1:], (n, 0.0)], strict=True):
        if not opening or first >= stop:
            if first < stop:
                yield _Piece(first, stop, 0.0, False)
            continue
        began = time[min(first, n - 1)] if began is None else began
        edges = {first, stop}
        slugs = np.searchsorted(time, rig.slugs) if rig.slugs.size else np.empty((0, 2), dtype=int)
        edges.update(int(e) for e in slugs.ravel() if first < e < stop)
        if rig.clog_onset is not None:
            edges.update(int(e) for e in np.searchsorted(time, np.arange(began, time[-1], PIECE)) if first < e < stop)
        ordered = sorted(edges)
        for a, b in zip(ordered[:-1], ordered[1:], strict=True):
            left = 1.0 if rig.clog_onset is None else _left_open(time[a] - began - rig.clog_onset)
            yield _Piece(a, b, opening * left, bool(np.any((slugs[:, 0] <= a) & (a < slugs[:, 1]))))


def _left_open(since: float) -> float:
    """Part of the orifice that is open ``since`` [s] it began to close."""
    return 1.0 - (1.0 - CLOGGED_TO) * float(np.clip(since / CLOGGING, 0.0, 1.0))


class _Chance:
    """Everything that chance brings, each stream by itself."""

    def __init__(self, rig: Rig, n: int, dt: float):
        self.rig, self.n, self.dt = rig, n, dt

    def white(self, purpose: str) -> np.ndarray:
        return self.rig.scenario.random(purpose).standard_normal(self.n)

    def p_line(self, time: np.ndarray) -> np.ndarray:
        scenario, share = self.rig.scenario, np.zeros(self.n)
        if not scenario.ideal:
            wander, wave = _SWING[scenario.load]
            chance = scenario.random("load")
            period, phase = chance.uniform(420.0, 900.0), chance.uniform(0.0, 2 * np.pi)
            share = wander * np.clip(coloured(self.white("line pressure"), self.dt, _LOAD), -3, 3)
            share = share + wave * np.sin(2 * np.pi * time / period + phase)
        if scenario.load is Load.FALLING:
            share = share - FALL * np.clip((time - FALL_BEGINS) / FALL_LASTS, 0.0, 1.0)
        return self.rig.p_line * (1.0 + share)

    def quality(self) -> np.ndarray:
        scenario = self.rig.scenario
        if scenario.ideal or self.rig.line_superheat > 0.0:
            return np.full(self.n, self.rig.x)
        swing = _WET_SWING[scenario.load] * coloured(self.white("wetness"), self.dt, _MIXING)
        return np.minimum(self.rig.x + swing, 1.0)


@dataclass(frozen=True)
class _Steam:
    """The steam at every step, and behind them at the middle of every piece with steam (``middle`` rows)."""

    x: np.ndarray
    flow: np.ndarray
    p_exhaust: np.ndarray
    T_due: np.ndarray
    wet: np.ndarray
    T_saturation: np.ndarray
    middle: tuple[np.ndarray, np.ndarray, np.ndarray, Due] | None


def _steam(rig: Rig, pieces: Sequence[_Piece], p_line: np.ndarray, x: np.ndarray) -> _Steam:
    """Flow, exhaust pressure and steady exhaust, all in one call."""
    n, on = p_line.size, [piece for piece in pieces if piece.opening]
    x, flow, p2 = x.copy(), np.zeros(n), np.full(n, rig.p_discharge)
    T, wet, T_sat = np.full(n, rig.body.T_start), np.zeros(n, dtype=bool), np.zeros(n)
    if not on:
        return _Steam(x, flow, p2, T, wet, T_sat, None)
    steps = np.concatenate([np.arange(piece.first, piece.stop) for piece in on])
    opening = np.concatenate([np.full(piece.stop - piece.first, piece.opening) for piece in on])
    for piece in on:
        if piece.slug:
            x[piece.first:piece.stop] = rig.slug_quality
    all_p = np.r_[p_line[steps], np.full(len(on), rig.p_line)]
    all_x = np.r_[x[steps], [rig.slug_quality if piece.slug else rig.x for piece in on]]
    all_flow = rig.flow(all_p, np.r_[opening, [piece.opening for piece in on]])
    all_p2 = rig.pipe(all_flow)
    due, m = due_of(rig, all_p, all_x, all_flow, all_p2), steps.size
    flow[steps], p2[steps], T[steps], wet[steps], T_sat[steps] = (
        all_flow[:m], all_p2[:m], due.T[:m], due.wet[:m], due.T_saturation[:m])
    middle = (all_flow[m:], all_p2[m:], all_x[m:], Due(due.T[m:], due.wet[m:], due.T_saturation[m:]))
    return _Steam(x, flow, p2, T, wet, T_sat, middle)


def _heat(rig: Rig, pieces: Sequence[_Piece], steam: _Steam, dt: float) -> tuple[np.ndarray, np.ndarray]:
    """Exhaust and body over all pieces, each entered as the one before was left."""
    T_exhaust, T_body = np.empty(steam.flow.size), np.empty(steam.flow.size)
    middles = middles_of(rig, *steam.middle) if steam.middle else None
    k, now = 0, rig.body.T_start
    for piece in pieces:
        rows = slice(piece.first, piece.stop)
        if piece.opening:
            due = Due(steam.T_due[rows], steam.wet[rows], steam.T_saturation[rows])
            part, k = followed(rig, middles, k, due, dt, now), k + 1
        else:
            part = cooled(rig, piece.stop - piece.first, dt, now)
        T_exhaust[rows], T_body[rows], now = part.T_exhaust, part.T_body, part.end
    return T_exhaust, T_body


def _before_the_gauges(rig: Rig, p_line, p_exhaust, T_exhaust, dt: float) -> dict[str, np.ndarray]:
    """What each of the four instruments has to show."""
    leg = water_leg(rig.leg_height, T_LEG) if rig.leg_height else 0.0
    air = {name: rig.p_barometer if rig.gauges[name].on_barometer else 0.0 for name in ("line", "exhaust")}
    return {"line": p_line + leg - air["line"], "exhaust": p_exhaust - air["exhaust"],
            "exhaust thermometer": at_the_probe(rig, T_exhaust, dt),
            "line thermometer": np.asarray(saturation_temperature(p_line)) + rig.line_superheat}


def at_the_probe(rig: Rig, T_exhaust: np.ndarray, dt: float) -> np.ndarray:
    """What the exhaust thermometer itself comes to [K]: late, cooled by its head, its stem in the open."""
    probe = rig.probe
    T = lagged(T_exhaust, rig.body.T_start, dt, probe.time_constant)
    T = T - probe.head_share * np.maximum(T - probe.T_head, 0.0)
    return (T - probe.stem * probe.T_stem) / (1.0 - probe.stem)  # the stem's error goes by the reading itself
