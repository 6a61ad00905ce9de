"""The entries that readings need: what counts as settled, corrections, and what a person decided about them.

Typed readings, the columns of a log, windows chosen by hand, rows left out and corrections switched
off are tables. A log itself is not in the case: it is the reader's file, known here by its name.
"""

from __future__ import annotations

from dataclasses import replace

from engine.job.case.fields_modes import MODE_FIELDS
from engine.job.case.fields_path import PATH_FIELDS
from engine.job.case.rows import Entry, Field, choice, quantity, table, text

LINE_CERTIFICATE, EXHAUST_CERTIFICATE, BAROMETER_CERTIFICATE, THERMOMETER_CERTIFICATE = (
    "line gauge certificate", "exhaust gauge certificate", "barometer certificate", "thermometer certificate")
STEM, BAROMETER, LEG, HEAT_LOSS, KINETIC = (
    "emergent stem", "barometer", "water leg", "heat loss", "kinetic energy")
CORRECTIONS = (LINE_CERTIFICATE, EXHAUST_CERTIFICATE, BAROMETER_CERTIFICATE, THERMOMETER_CERTIFICATE, STEM,
               BAROMETER, LEG, HEAT_LOSS, KINETIC)
"""In the order in which they are applied."""

_ENTRIES = {field.name: field for field in (*PATH_FIELDS, *MODE_FIELDS)}


def _as_column(name: str) -> Field:
    """An entry of the case as a column: the same rules, and it may stay empty."""
    return replace(_ENTRIES[name], blank=None)


def _offset(stem: str, label: str, kind: str, most: float) -> Field:
    return quantity(f"{stem}_correction", f"{label}: correction by certificate or check", "corrections", -most, most,
                    kind=kind, why="a larger one means a faulty instrument",
                    hint="what is to be added to what it shows; negative where it reads high")


READINGS = table("readings", "Readings typed", "readings", (
    text("run", "Run", "readings"),
    quantity("time", "Time from the start", "readings", 0.0, 1e7),
    *map(_as_column, ("p_line", "p_exhaust", "T_exhaust", "p_barometer", "sample_flow", "T_ambient")),
    text("remark", "Remark", "readings"),
), 400, "one set a row, all gauges read within a few seconds")

HEATER_READINGS = table("heater_readings", "Readings typed, with a heater", "readings", (
    text("run", "Run", "readings"),
    quantity("time", "Time from the start", "readings", 0.0, 1e7),
    *map(_as_column, ("p_line", "p_heater", "T_heater", "power", "sample_flow")),
    text("remark", "Remark", "readings"),
), 400, "one set a row, all gauges read within a few seconds")

MAPPINGS = table("mappings", "Columns of logs", "readings", (
    text("log", "Log", "readings"),
    text("columns", "What its columns are", "readings"),
), 24)

WINDOWS = table("windows", "Windows chosen by hand", "readings", (
    text("log", "Log or run", "readings"),
    quantity("begin", "From", "readings", -1e9, 1e10, Entry(0.0, "min"), kind="time"),
    quantity("end", "To", "readings", -1e9, 1e10, Entry(0.0, "min"), kind="time"),
    text("reason", "Reason", "readings"),
), 24)

REMOVED = table("removed", "Rows left out", "readings", (
    text("log", "Log or run", "readings"),
    quantity("row", "Row", "readings", 0.0, 1e9, Entry(0.0, "1"), kind="number"),
    text("reason", "Reason", "readings"),
), 200)

OFF = table("switched_off", "Corrections switched off", "corrections", (
    choice("correction", "Correction", "corrections", CORRECTIONS),
    text("reason", "Reason", "corrections"),
), len(CORRECTIONS))

READING_FIELDS = (
    quantity("steady_window", "Settled over at least", "steadiness", 30.0, 86400.0, Entry(10.0, "min"), kind="time",
             why="a shorter stretch shows no trend, a longer one is a day's work"),
    quantity("steady_rate", "Exhaust temperature changes by less than", "steadiness", 1e-6, 1.0,
             Entry(0.05, "K/min"), kind="rate", hint="0.05 K/min is common practice"),
    quantity("steady_scatter", "Exhaust temperature scatters by less than", "steadiness", 1e-3, 50.0,
             Entry(1.5, "K"), kind="difference", hint="the standard deviation about the mean"),
    quantity("steady_p_line", "Line pressure within ± of its mean", "steadiness", 1e-5, 0.5, Entry(1.0, "%"),
             kind="fraction", hint="both its change and its scatter; 1 % is common practice"),
    quantity("steady_p_exhaust", "Exhaust pressure within ± of its mean", "steadiness", 1e-5, 0.5, Entry(2.0, "%"),
             kind="fraction", hint="both its change and its scatter"),
    _offset("line_gauge", "Line gauge", "pressure difference", 5e6),
    _offset("exhaust_gauge", "Exhaust gauge", "pressure difference", 1e5),
    _offset("barometer", "Barometer", "pressure difference", 1e4),
    _offset("thermometer", "Exhaust thermometer", "difference", 20.0),
    READINGS, HEATER_READINGS, MAPPINGS, WINDOWS, REMOVED, OFF,
)
