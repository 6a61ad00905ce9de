"""The reach: which wetness can be read at all, at which pressures, and with what margin.

Everything turns on one enthalpy, the least with which the exhaust still reads enough superheat. A line
can be read when its own enthalpy, less what is lost on the way, is no lower. The reach is not monotonic
in the line pressure: the enthalpy of wet steam rises to 30 or 40 bar and falls beyond, so that a wetness
is readable between two line pressures, if it is readable at all.

Readable means here that a number can be measured. It says nothing about whether a valve may be opened.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum
from typing import NamedTuple

import numpy as np

from engine.calorimeter.checks import Named, door, refuse, with_status
from engine.calorimeter.rig_inputs import gather
from engine.calorimeter.roots import bracketed_root
from engine.calorimeter.status import Status
from engine.calorimeter.throttle import balance_terms, exhaust_kernel, least_enthalpy, saturation_enthalpies
from engine.steam import P_SAT_MAX, P_TRIPLE
from engine.steam.arrays import in_blocks
from engine.steam.errors import Fault, InputError
from engine.steam.saturation import dome


class Readability(IntEnum):
    """What a rig makes of a range of quality. Up to PART something can be read."""

    WHOLE = 0
    THIN = 1
    PART = 2
    NONE = 3
    OUT_OF_RANGE = 4
    MISSING = 5


READABILITY: dict[Readability, str] = {
    Readability.WHOLE: "The whole range can be read, with a comfortable margin at its wet end.",
    Readability.THIN: "The whole range can be read, but the margin at its wet end is thin.",
    Readability.PART: "Only the drier part of the range can be read; wetter steam would leave the exhaust wet, or "
                      "too close to it.",
    Readability.NONE: "No part of the range can be read: the exhaust would be wet, or too close to it.",
    Readability.OUT_OF_RANGE: "An input is outside the range in which the properties or the equations hold.",
    Readability.MISSING: "An input is missing, so nothing was computed.",
}


class Reach(NamedTuple):
    """What can be read of a range of quality; ask ``verdict`` first.

    x_least     quality from which the margin is readable (above 1: not even dry steam)
    x_comfortable   quality from which the margin is comfortable
    x_from      the part of the range that can be read starts here; NaN where NONE
    superheat_low, superheat_high   superheat to be seen at the two ends of the range [K], 0 where wet
    margin_low, margin_high         the same less the uncertainty of the thermometer [K]
    """

    x_least: float | np.ndarray
    x_comfortable: float | np.ndarray
    x_from: float | np.ndarray
    superheat_low: float | np.ndarray
    superheat_high: float | np.ndarray
    margin_low: float | np.ndarray
    margin_high: float | np.ndarray
    verdict: Readability | np.ndarray


class ExhaustPressure(NamedTuple):
    """The highest exhaust pressure at which a quality can be read [Pa]; NaN where NOT_SUPERHEATED."""

    p_exhaust: float | np.ndarray
    status: Status | np.ndarray


class LineWindow(NamedTuple):
    """The line pressures between which a quality can be read [Pa]; NaN where NOT_SUPERHEATED.

    ``p_best`` is where the reach is greatest, ``x_least`` the least readable quality there: known in any case.
    """

    p_low: float | np.ndarray
    p_high: float | np.ndarray
    p_best: float | np.ndarray
    x_least: float | np.ndarray
    status: Status | np.ndarray


@dataclass(frozen=True)
class ReachMap:
    """The greatest readable wetness over two axes, shape (exhaust pressures, line pressures).

    ``wetness`` is 0 where nothing can be read: NOT_SUPERHEATED where not even dry steam can,
    OUT_OF_RANGE where the exhaust pressure is not below the line pressure.
    """

    p_line: np.ndarray
    p_exhaust: np.ndarray
    wetness: np.ndarray
    status: np.ndarray


def _needed(a: Named) -> np.ndarray:
    """Enthalpy that the line must have [J/kg] so that the exhaust reads the least superheat."""
    return least_enthalpy(a) + balance_terms(a)


def _exhaust_pressure(a: Named, usable, missing):
    _, h_f, h_g = saturation_enthalpies(a["p_line"])
    h = h_f + a["x"] * (h_g - h_f)

    def lacking(log_p):
        return _needed(a | {"p_exhaust": np.exp(log_p)}) - h

    # What is needed rises with the exhaust pressure and may fall again towards the line pressure. Between a
    # lowest pressure that will do and a highest that will not there is one root, on the rising side.
    low, high = np.full(h.shape, np.log(P_TRIPLE)), np.log(a["p_line"])
    any_will_do = lacking(high) <= 0
    none_will_do = ~any_will_do & ~(lacking(low) <= 0)
    p = np.where(any_will_do, a["p_line"], np.exp(bracketed_root(lacking, low, high)))
    status = np.select([missing, ~usable, none_will_do],
                       [Status.MISSING, Status.OUT_OF_RANGE, Status.NOT_SUPERHEATED], Status.OK)
    return np.where(status == Status.OK, p, np.nan), status


def exhaust_pressure_for(p_line, x, superheat=5.0, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0,
                         recovery=1.0) -> ExhaustPressure:
    """The highest exhaust pressure at which quality ``x`` still reads ``superheat`` [K] above saturation.

    Line pressure [Pa, absolute], x between 0 and 1, other arguments as for ``quality``; any shapes that
    broadcast. NOT_SUPERHEATED where the triple pressure would not be low enough; the line pressure itself
    where any exhaust pressure below it will do. Scalar calls raise InputError for inputs out of range.

    >>> round(exhaust_pressure_for(10e5, 0.94).p_exhaust / 1e3, 1)  # kPa
    51.2
    """
    (p,), status = with_status(
        _exhaust_pressure, 2, p_line=p_line, x=x, least_superheat=superheat, heat_loss=heat_loss,
        line_velocity=line_velocity, exhaust_velocity=exhaust_velocity, recovery=recovery)
    return ExhaustPressure(p, status)


def _best_line(needed: np.ndarray, p_exhaust: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The line pressure of the greatest reach, and the least quality there: a table, a finer grid, a parabola."""
    table = dome()
    p, h_f, h_g = (column[table.p <= P_SAT_MAX] for column in (table.p, table.h_f, table.h_g))
    x = np.where(p > p_exhaust[:, None], (needed[:, None] - h_f) / (h_g - h_f), np.inf)
    middle = x.argmin(axis=1)
    lower = np.log(np.maximum(p[np.maximum(middle - 1, 0)], p_exhaust))
    upper = np.log(p[np.minimum(middle + 1, p.size - 1)])

    rows, share = np.arange(needed.size), np.linspace(0.0, 1.0, 9)
    log_p = lower[:, None] + (upper - lower)[:, None] * share
    x = _least(np.exp(log_p).ravel(), np.repeat(needed, share.size)).reshape(log_p.shape)
    middle = np.clip(x.argmin(axis=1), 1, share.size - 2)
    a, b, c = (x[rows, middle + k] for k in (-1, 0, 1))
    curve = a - 2 * b + c
    shift = np.where(curve > 0, 0.5 * (a - c) / np.where(curve > 0, curve, 1.0), 0.0)
    p = np.exp(log_p[rows, middle] + np.clip(shift, -1.0, 1.0) * (upper - lower) / (share.size - 1))
    return p, _least(p, needed)


def _least(p_line: np.ndarray, needed: np.ndarray) -> np.ndarray:
    """Quality at which a line has the enthalpy needed (1-d)."""
    _, h_f, h_g = saturation_enthalpies(p_line)
    return (needed - h_f) / (h_g - h_f)


def _window(a: Named, usable, missing):
    needed = _needed(a)
    p_best, x_least = _best_line(needed, a["p_exhaust"])

    def lacking(log_p):
        _, h_f, h_g = saturation_enthalpies(np.exp(log_p))
        return needed - h_f - a["x"] * (h_g - h_f)

    def edge(p_end):
        end = np.log(p_end)
        return np.where(lacking(end) <= 0, p_end, np.exp(bracketed_root(lacking, np.log(p_best), end)))

    status = np.select([missing, ~usable, a["x"] < x_least],
                       [Status.MISSING, Status.OUT_OF_RANGE, Status.NOT_SUPERHEATED], Status.OK)
    readable, known = status == Status.OK, status <= Status.NOT_SUPERHEATED
    return (*(np.where(readable, edge(end), np.nan) for end in (a["p_exhaust"], a["p_line"])),
            *(np.where(known, v, np.nan) for v in (p_best, x_least)), status)


def line_pressure_window(x, p_exhaust, superheat=5.0, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0,
                         recovery=1.0) -> LineWindow:
    """The line pressures between which quality ``x`` reads ``superheat`` [K] or more above saturation.

    x between 0 and 1, exhaust pressure [Pa, absolute], other arguments as for ``quality``; any shapes that
    broadcast. A side without an end is given the end of the range: the exhaust pressure, or 16.529 MPa.
    NOT_SUPERHEATED where no line pressure will do. Scalar calls raise InputError for inputs out of range.

    >>> window = line_pressure_window(0.95, 101_325.0)
    >>> [round(p / 1e5, 1) for p in (window.p_low, window.p_high, window.p_best)]  # bar
    [12.4, 80.6, 40.8]
    """
    # the highest line pressure stands in for the line's, so that only the exhaust's own range counts
    values, status = with_status(
        _window, 5, p_line=P_SAT_MAX, x=x, p_exhaust=p_exhaust, least_superheat=superheat, heat_loss=heat_loss,
        line_velocity=line_velocity, exhaust_velocity=exhaust_velocity, recovery=recovery)
    return LineWindow(*values, status)


def _reach(a: Named, usable, missing):
    def least(superheat):
        return _least(a["p_line"], _needed(a | {"least_superheat": a[superheat] + a["U_thermometer"]}))

    x_least, x_comfortable = least("least_superheat"), least("comfortable_superheat")
    (_, low, _, _, status_low), (_, high, _, _, status_high) = (
        exhaust_kernel(a | {"x": a[end]}, usable, missing) for end in ("x_low", "x_high"))
    stateless = (status_low >= Status.OUT_OF_RANGE) | (status_high >= Status.OUT_OF_RANGE)
    verdict = np.select(
        [missing, stateless, a["x_low"] >= np.maximum(x_comfortable, x_least), a["x_low"] >= x_least,
         a["x_high"] >= x_least],
        [Readability.MISSING, Readability.OUT_OF_RANGE, Readability.WHOLE, Readability.THIN, Readability.PART],
        Readability.NONE)
    known = verdict <= Readability.NONE
    x_from = np.where(verdict <= Readability.PART, np.maximum(x_least, a["x_low"]), np.nan)
    U = a["U_thermometer"]
    values = (x_least, x_comfortable, x_from, low, high, low - U, high - U)
    return *(np.where(known, v, np.nan) for v in values), verdict


def reach(p_line, p_exhaust, x_low, x_high, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0, recovery=1.0,
          U_thermometer=0.0, least_superheat=5.0, comfortable_superheat=10.0) -> Reach:
    """How much of the range of quality ``x_low`` to ``x_high`` can be read on this line with this exhaust.

    Pressures absolute [Pa], that of the exhaust at the thermometer; ``U_thermometer``, its expanded
    uncertainty [K], comes off the superheat to be seen. A margin below ``least_superheat`` [K] cannot be
    read, one below ``comfortable_superheat`` [K] is thin. Other arguments as for ``quality``; any shapes that
    broadcast. Scalar calls raise InputError for inputs out of range or missing.

    >>> plan = reach(10e5, 102.1e3, 0.95, 0.99, heat_loss=4e3, U_thermometer=0.4)
    >>> plan.verdict.name, round(plan.x_from, 4), round(plan.superheat_high, 1), round(plan.margin_high, 1)
    ('PART', 0.9573, 38.0, 37.6)
    """
    values, verdict = with_status(
        _reach, 8, Readability, p_line=p_line, p_exhaust=p_exhaust, x_low=x_low, x_high=x_high, heat_loss=heat_loss,
        line_velocity=line_velocity, exhaust_velocity=exhaust_velocity, recovery=recovery,
        U_thermometer=U_thermometer, least_superheat=least_superheat, comfortable_superheat=comfortable_superheat)
    return Reach(*values, verdict)


def reach_map(p_line, p_exhaust, superheat=5.0, *, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0,
              recovery=1.0) -> ReachMap:
    """The greatest readable wetness over an axis of line pressures and one of exhaust pressures [Pa, absolute].

    Axes of one dimension, or single values for a section along the other; the result has the shape
    (exhaust pressures, line pressures), to which other arguments broadcast. They are those of
    ``least_quality``. Steam properties are needed along the axes alone, so a large map is quick. Raises
    InputError for values out of range or missing.

    >>> chart = reach_map([5e5, 10e5, 40e5], [20e3, 101_325.0])
    >>> (chart.wetness * 100).round(1).tolist()  # % of the mass
    [[6.1, 7.9, 10.6], [3.0, 4.5, 6.7]]
    """
    (line, _), (exhaust, _) = door(p_line=p_line), door(p_exhaust=p_exhaust)
    if faults := [Fault(f"axis of {label}", f"{a.ndim} dimensions", "", "one dimension, or a single value",
                        hint="give the two axes; the map is made from them", name=name)
                  for name, label, a in (("p_line", "line pressures", line["p_line"]),
                                         ("p_exhaust", "exhaust pressures", exhaust["p_exhaust"])) if a.ndim > 1]:
        raise InputError(*faults)
    line, p_exhaust = {"p_line": np.atleast_1d(line["p_line"])}, np.atleast_1d(exhaust["p_exhaust"])
    rows, _ = door(p_line=P_SAT_MAX, p_exhaust=p_exhaust[:, None], least_superheat=superheat, heat_loss=heat_loss,
                   line_velocity=line_velocity, exhaust_velocity=exhaust_velocity, recovery=recovery)
    gather(lambda: refuse(line), lambda: refuse(rows))
    shape, others = (p_exhaust.size, line["p_line"].size), rows["p_exhaust"].shape
    if not _fits(others, shape):
        raise InputError(Fault("array shapes", f"{others} of all arguments but the line pressures", "",
                               f"{shape} of the two axes, or what broadcasts to it"))

    needed, = in_blocks(lambda *values: (_needed(dict(zip(rows, values, strict=True))),), 1, *rows.values())
    _, h_f, h_g = in_blocks(saturation_enthalpies, 3, line["p_line"])
    x_least = (needed - h_f) / (h_g - h_f)
    flows = p_exhaust[:, None] < line["p_line"]
    status = np.select([~flows, x_least > 1.0], [Status.OUT_OF_RANGE, Status.NOT_SUPERHEATED],
                       Status.OK).astype(np.int8)
    wetness = np.where(status == Status.OK, np.clip(1.0 - x_least, 0.0, 1.0), 0.0)
    return ReachMap(line["p_line"].copy(), p_exhaust.copy(), wetness, status)


def _fits(shape: tuple[int, ...], whole: tuple[int, ...]) -> bool:
    """Whether an array of one shape broadcasts to another."""
    try:
        return np.broadcast_shapes(shape, whole) == whole
    except ValueError:
        return False
