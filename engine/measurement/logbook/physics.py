"""Suspicions that come from holding the channels against one another and against saturation.

The line carries wet or nearly dry steam, so its temperature belongs to its pressure; the exhaust is
colder and at a lower pressure than the line, and near the atmosphere's; a unit or a basis that is
not the one meant breaks these ties in a way that can be recognised. All comparisons use medians over
a thinned sample, so that a million rows cost what five thousand do.
"""

from __future__ import annotations

import numpy as np

from engine.measurement.logbook.mapping import Column
from engine.measurement.logbook.suspicion import Suspicion, ranges
from engine.measurement.logbook.words import CHANNELS
from engine.steam import P_SAT_MAX, P_TRIPLE, saturation_temperature
from engine.steam.units import P_STANDARD, UNITS, from_si, to_si

SAMPLE = 5_000
EXHAUST_GAUGE_BAND = 0.3e5  # Pa; within it an exhaust pressure is a gauge reading near the atmosphere's
EXHAUST_ABSOLUTE_BAND = (0.55e5, 1.15e5)  # Pa; a gauge reading there looks like the atmosphere itself
SATURATION_FIT = 1.0  # K; line temperature and pressure agree so well when both are meant as read
LEAST_MISFIT = 1.5  # K; below it gauge and absolute cannot be told apart
MISFIT_OF_UNIT, FIT_OF_UNIT = 8.0, 3.0  # K between line temperature and saturation: wrong unit, right unit
JUMP = 30.0  # K from one row to the next: no steam does that, a change of unit does
COLD = 2.0  # K below saturation: flowing steam cannot be that cold

Channels = dict[str, np.ndarray]
Columns = dict[str, Column]


def physics_suspicions(rows: np.ndarray, channels: Channels, columns: Columns) -> list[Suspicion]:
    """All suspicions about units, bases and interchanged channels."""
    step = max(1, rows.size // SAMPLE)
    thin = {name: values[::step] for name, values in channels.items()}
    middle = {name: float(np.nanmedian(v)) for name, v in thin.items() if not np.isnan(v).all()}
    p_air = middle.get("p_barometer", P_STANDARD)
    if not CHANNELS["p_barometer"].usual[0] <= p_air <= CHANNELS["p_barometer"].usual[1]:
        p_air = P_STANDARD
    absolute = {name: thin[name] + (p_air if columns[name].basis == "gauge" else 0.0)
                for name in ("p_line", "p_exhaust") if name in middle}
    everywhere = ((int(rows[0]), int(rows[-1])),) if rows.size else ()

    def suspect(kind: str, channel: str, sentence: str, remedy: str, *mend: str) -> Suspicion:
        return Suspicion(kind, channel, sentence, everywhere, rows.size, remedy, mend)

    found = _basis(thin, middle, absolute, columns, p_air, suspect)
    found += _swapped(middle, absolute, suspect)
    suspected = {s.channel for s in found}
    for name in middle:
        if name not in suspected and CHANNELS[name].kind in ("pressure", "mass flow"):
            found += _unit(name, middle, absolute, columns[name], suspect)
    if "T_line" in middle and "p_line" in absolute and "p_line" not in {s.channel for s in found}:
        found += _unit_by_temperature(middle, absolute, columns["p_line"], suspect)
    suspected = {s.channel for s in found}
    trusted = {name: values for name, values in absolute.items() if name not in suspected}
    for name in ("T_line", "T_exhaust", "T_ambient"):
        if name in middle:
            found += _temperature_unit(name, channels[name], rows, trusted, columns[name])
    suspected = {s.channel for s in found}
    if not suspected & {"T_exhaust", "p_exhaust", "p_line"}:
        found += _too_cold(thin, absolute, rows, suspect)
    return found


def _saturation(p: np.ndarray) -> np.ndarray:
    """Saturation temperature [K], NaN where there is none."""
    inside = (p >= P_TRIPLE) & (p <= P_SAT_MAX)
    return np.where(inside, saturation_temperature(np.where(inside, p, P_STANDARD)), np.nan)


def _median(values: np.ndarray) -> float:
    values = values[np.isfinite(values)]
    return float(np.median(values)) if values.size else float("nan")


def _digits(value: float) -> str:
    """Four significant digits, never with an exponent."""
    return np.format_float_positional(value, precision=4, fractional=False, trim="-")


def _shown(value: float, column: Column) -> str:
    return f"{_digits(from_si(value, column.unit, CHANNELS[column.channel].kind))} {column.unit}"


def _basis(thin: Channels, middle, absolute: Channels, columns: Columns, p_air: float, suspect) -> list[Suspicion]:
    """Gauge taken for absolute, or the other way round."""
    found = []
    if "p_exhaust" in middle:
        value, column = middle["p_exhaust"], columns["p_exhaust"]
        if column.basis == "absolute" and abs(value) <= EXHAUST_GAUGE_BAND and not _vacuum_fits(thin, value):
            found.append(suspect(
                "gauge taken for absolute", "p_exhaust", f"the exhaust pressure is said to be absolute, but stands at "
                f"{_shown(value, column)}: an exhaust to air reads about this on a gauge",
                "say that the exhaust pressure is gauge, unless it discharges into a vacuum", "basis", "gauge"))
        low, high = EXHAUST_ABSOLUTE_BAND
        if column.basis == "gauge" and low <= value <= high:
            found.append(suspect(
                "absolute taken for gauge", "p_exhaust", f"the exhaust pressure is said to be gauge, but stands at "
                f"{_shown(value, column)}, which is what the atmosphere itself measures",
                "say that the exhaust pressure is absolute, unless there really is such a back pressure",
                "basis", "absolute"))
    if "p_line" in absolute and "T_line" in middle:
        column = columns["p_line"]
        said = _median(_saturation(absolute["p_line"]) - thin["T_line"])
        other = _median(_saturation(absolute["p_line"] + (p_air if column.basis == "absolute" else -p_air))
                        - thin["T_line"])
        if abs(other) <= SATURATION_FIT and abs(said) >= max(LEAST_MISFIT, 3 * abs(other)):
            wrong, right = column.basis, "gauge" if column.basis == "absolute" else "absolute"
            side = "below" if said < 0 else "above"
            found.append(suspect(
                f"{right} taken for {wrong}", "p_line", f"taken as {wrong}, the line pressure saturates "
                f"{abs(said):.1f} K {side} the line temperature; taken as {right}, it agrees within "
                f"{max(abs(other), 0.1):.1f} K",
                f"say that the line pressure is {right}, unless the line is superheated or its thermometer is wrong",
                "basis", right))
    return found


def _vacuum_fits(thin: Channels, value: float) -> bool:
    """Whether the exhaust temperature is that of a condenser rather than of an exhaust to air."""
    if "T_exhaust" not in thin or value < P_TRIPLE:
        return False
    return _median(thin["T_exhaust"]) < saturation_temperature(P_STANDARD) - 10.0


def _swapped(middle, absolute: Channels, suspect) -> list[Suspicion]:
    """Exhaust and line interchanged."""
    found = []
    if {"p_line", "p_exhaust"} <= set(absolute):
        line, exhaust = _median(absolute["p_line"]), _median(absolute["p_exhaust"])
        if exhaust > 1.05 * line and exhaust > CHANNELS["p_line"].usual[0] and line < CHANNELS["p_exhaust"].usual[1]:
            found.append(suspect(
                "swapped", "p_exhaust", "the exhaust pressure is higher than the line pressure",
                "see whether the two pressure columns are interchanged"))
    if {"T_line", "T_exhaust"} <= set(middle) and "p_line" in absolute:
        at_saturation = _median(_saturation(absolute["p_line"]))
        if middle["T_exhaust"] > middle["T_line"] + 2.0 and abs(middle["T_exhaust"] - at_saturation) < 5.0:
            found.append(suspect(
                "swapped", "T_exhaust", "the exhaust is hotter than the line and as hot as the line's saturation",
                "see whether the two temperature columns are interchanged"))
    return found


def _unit(name: str, middle, absolute: Channels, column: Column, suspect) -> list[Suspicion]:
    """A pressure or flow that no such channel has in the unit said, but has in another."""
    channel = CHANNELS[name]
    offset = _median(absolute[name]) - middle[name] if name in absolute else 0.0
    value = middle[name]
    low, high = channel.usual
    if low <= value + offset <= high or value == 0:
        return []
    written = from_si(value, column.unit, channel.kind)
    fitting = [unit for unit in UNITS[channel.kind]
               if unit != column.unit and low <= to_si(written, unit, channel.kind) + offset <= high]
    usual = " to ".join(_digits(from_si(x, column.unit, channel.kind)) for x in channel.usual)
    fits = f"; in {' or '.join(fitting)} it would be an ordinary one" if fitting else ""
    return [suspect("unit", name, f"the {channel.label} stands at {_digits(written)} {column.unit}, where {usual} is "
                    f"usual{fits}", "check the unit of this column", *_only(fitting))]


def _unit_by_temperature(middle, absolute: Channels, column: Column, suspect) -> list[Suspicion]:
    """A line pressure that contradicts the line temperature in the unit said, and agrees in another."""
    p, T = _median(absolute["p_line"]), middle["T_line"]
    boiling = float(_saturation(np.array([p]))[0])
    if abs(boiling - T) < MISFIT_OF_UNIT:
        return []
    offset, written = p - middle["p_line"], from_si(middle["p_line"], column.unit, "pressure")
    units = [u for u in UNITS["pressure"] if u != column.unit]
    others = _saturation(np.array([to_si(written, u, "pressure") + offset for u in units]))
    fitting = [u for u, other in zip(units, others, strict=True) if abs(other - T) < FIT_OF_UNIT]
    if not fitting:
        return []
    return [suspect("unit", "p_line", f"the line pressure of {_digits(written)} {column.unit} does not belong to the "
                    f"line temperature; in {' or '.join(fitting)} it would", "check the unit of this column",
                    *_only(fitting))]


def _only(fitting: list[str]) -> tuple[str, ...]:
    """The mend, where one unit alone fits."""
    return ("unit", fitting[0]) if len(fitting) == 1 else ()


def _temperature_unit(name: str, values: np.ndarray, rows: np.ndarray, absolute: Channels,
                      column: Column) -> list[Suspicion]:
    """Temperatures written in another unit than said, throughout or from a row on."""
    low, high = _expected(name, absolute)
    if np.fmin.reduce(values) >= low and np.fmax.reduce(values) <= high:
        return []
    best, best_unit = None, ""
    outside = ~((values >= low) & (values <= high)) & ~np.isnan(values)
    if not outside.any():
        return []
    for unit in UNITS["temperature"]:
        if unit == column.unit:
            continue
        meant = to_si(from_si(values, column.unit, "temperature"), unit, "temperature")
        mask = outside & (meant >= low) & (meant <= high)
        if best is None or mask.sum() > best.sum():
            best, best_unit = mask, unit
    if best.sum() <= 0.5 * values.size:
        best = _entered_by_a_jump(best, values)
    if not best.any():
        return []
    where, count = ranges(rows, best)
    whole = count > 0.5 * values.size
    part = "" if whole else " in these rows"
    return [Suspicion(
        f"{best_unit} in a {column.unit} column", name, f"the {CHANNELS[name].label}, about "
        f"{_shown(_median(values[best]), column)}, does not fit the rest of the log{part}; read as {best_unit} it does",
        where, count, f"check whether the unit of this column is {best_unit} rather than {column.unit}",
        ("unit", best_unit) if whole else ())]


def _expected(name: str, absolute: Channels) -> tuple[float, float]:
    """Between which temperatures [K] a channel can stand, given the pressures of the log."""
    if name == "T_ambient":
        return CHANNELS[name].usual
    pressure = absolute.get("p_line" if name == "T_line" else "p_exhaust")
    boiling = _median(_saturation(pressure)) if pressure is not None else float("nan")
    if name == "T_line":
        low, high = CHANNELS[name].usual
        return (low, high) if np.isnan(boiling) else (boiling - 8.0, boiling + 150.0)
    if np.isnan(boiling):
        boiling = saturation_temperature(P_STANDARD)
    return boiling - 10.0, boiling + 90.0


def _entered_by_a_jump(mask: np.ndarray, values: np.ndarray) -> np.ndarray:
    """Those runs of the mask that begin or end with a jump no temperature makes by itself."""
    edges = np.flatnonzero(np.diff(np.concatenate([[False], mask, [False]]).astype(np.int8))).reshape(-1, 2)
    kept = np.zeros_like(mask)
    for start, stop in edges:
        jump_in = start > 0 and abs(values[start] - values[start - 1]) > JUMP
        jump_out = stop < values.size and abs(values[stop] - values[stop - 1]) > JUMP
        if (jump_in or start == 0) and (jump_out or stop == values.size):
            kept[start:stop] = True
    return kept


def _too_cold(thin: Channels, absolute: Channels, rows: np.ndarray, suspect) -> list[Suspicion]:
    """An exhaust below saturation in most of the rows: no flowing steam is that cold."""
    if "T_exhaust" not in thin or "p_exhaust" not in absolute:
        return []
    below = _saturation(absolute["p_exhaust"]) - thin["T_exhaust"]
    if not (below > COLD).sum() > 0.5 * below.size:
        return []
    return [suspect("below saturation", "T_exhaust", f"in most rows the exhaust is colder than saturation at its own "
                    f"pressure, by {_median(below):.1f} K", "check basis and unit of the exhaust pressure, how deep "
                    "the thermometer stands in the flow, and whether steam was flowing at all")]
