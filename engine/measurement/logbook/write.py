"""Write readings as a log in one documented layout, which ``read_log`` reads back without a question.

The layout: CSV in UTF-8 with a byte-order mark (so that spreadsheet programs show °C), comma between
the cells, decimal point, one heading line, one line per row.

* ``time``: ISO stamps when a start is given, else ``time [s]``, elapsed;
* ``line pressure [bar gauge]``, ``exhaust temperature [°C]`` and so on: the quantity's label, and in
  brackets its unit and, for a pressure, gauge or absolute;
* numbers with as many digits as they need to be read back the same; an empty cell where there is none;
* text columns last. Text that a spreadsheet program would take for a formula gets an apostrophe in
  front, so that it stays text.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from pathlib import Path

import numpy as np

from engine.measurement.logbook.reading import Log
from engine.measurement.logbook.words import BASES
from engine.steam.arrays import at_the_door
from engine.steam.errors import Fault, InputError
from engine.steam.quantities import QUANTITIES
from engine.steam.units import UNITS, from_si

WRITTEN_UNITS = {"pressure": "bar", "temperature": "°C", "mass flow": "kg/h"}
ROWS_AT_ONCE = 20_000
MOST_SECONDS = 1e11  # some 3000 years


def write_log(target, channels, *, time=None, start: str = "", basis: dict[str, str] | None = None,
              units: dict[str, str] | None = None, texts: dict[str, Sequence[str]] | None = None) -> None:
    """Write columns of SI values as a log.

    ``target`` is a path or a file opened for writing (text or binary). ``channels`` is a ``Log``, or
    a dict from a quantity's name (a logged channel, or any other such as "x") to its SI values, shape
    (rows,). ``time`` [s] counts from ``start``, an ISO stamp, a time of day or "". ``basis`` is
    "gauge" or "absolute" per pressure, absolute where it is not told. ``units`` gives the unit
    written, by kind of quantity ({"pressure": "kPa"}). ``texts`` are further columns by heading.
    Raises InputError for unknown names, units and bases, and for columns of unequal length.

    >>> target = io.StringIO()
    >>> write_log(target, {"p_line": [9.01e5], "T_exhaust": [394.25]}, time=[0.0], basis={"p_line": "gauge"})
    >>> print(target.getvalue().lstrip("\\ufeff").strip())
    time [s],line pressure [bar gauge],exhaust temperature [°C]
    0.0,9.01,121.1
    """
    texts = dict(texts or {})
    if isinstance(channels, Log):
        log, channels = channels, channels.channels
        time, start, basis = log.time, log.start, log.basis
        if log.remarks:
            texts.setdefault("remark", _remarks_by_row(log))
    columns = _columns(channels, time, basis or {}, {**WRITTEN_UNITS, **(units or {})}, texts)
    stamps = _stamps(time, start) if time is not None else []
    headings = ["time" if start else "time [s]"] * bool(stamps) + [heading for heading, _ in columns] + list(texts)
    rows = max((len(c) for c in [*stamps, *(v for _, v in columns), *texts.values()]), default=0)
    if hasattr(target, "write"):
        _write(target, headings, stamps, columns, texts, rows)
    else:
        with Path(target).open("wb") as file:
            _write(file, headings, stamps, columns, texts, rows)


def _columns(channels, time, basis, units, texts) -> list[tuple[str, np.ndarray]]:
    """Heading and values in the unit written, of each channel; all that cannot be written at once."""
    faults = [Fault("quantity", name, "", "a name of the table of quantities", name="channels")
              for name in channels if name not in QUANTITIES]
    faults += [Fault(f"basis of {name}", value, "", "one of: " + ", ".join(BASES), name="basis")
               for name, value in basis.items() if value not in BASES]
    faults += [Fault(f"unit of a {kind}", unit, "", "one of: " + (", ".join(UNITS.get(kind, ())) or "no such kind"),
                     name="units") for kind, unit in units.items() if unit not in UNITS.get(kind, ())]
    if faults:
        raise InputError(*faults)
    columns = []
    for name, values in channels.items():
        (values,), _ = at_the_door(**{name: values})
        if values.ndim > 1:
            raise InputError(Fault(f"column of the {QUANTITIES[name].label}", f"shape {values.shape}", "",
                                   "one value for each row", name="channels"))
        quantity = QUANTITIES[name]
        unit = units.get(quantity.kind, quantity.unit)
        said = f" {basis.get(name, 'absolute')}" if quantity.kind == "pressure" else ""
        columns.append((f"{quantity.label} [{unit}{said}]", np.atleast_1d(from_si(values, unit, quantity.kind))))
    lengths = {heading: len(v) for heading, v in [*columns, *texts.items()]}
    if time is not None:
        lengths["time"] = np.size(time)
    if len(set(lengths.values())) > 1:
        raise InputError(Fault("columns of a log", ", ".join(f"{h} {n}" for h, n in lengths.items()), "rows",
                               "columns of one length", name="channels"))
    return columns


def _stamps(time, start: str) -> list[np.ndarray]:
    """The time column as text: stamps from the start, or elapsed seconds."""
    (time,), _ = at_the_door(time=time)
    time = np.atleast_1d(time)
    if time.ndim > 1 or not (np.abs(time) <= MOST_SECONDS).all():
        raise InputError(Fault("time", "not finite, or beyond all calendars", "s", "a finite time for every row",
                               name="time"))
    if not start:
        return [np.array([repr(t) for t in time.tolist()], dtype=object)]
    clock, zone = (start[:-6], "Z") if start.endswith("+00:00") else (start, "")
    dated = "T" in clock
    try:
        first = np.datetime64(clock if dated else f"1970-01-01T{clock}", "us")
    except ValueError:
        raise InputError(Fault("start", repr(start), "", "an ISO stamp, a time of day, or nothing",
                               name="start")) from None
    micros = np.rint(time * 1e6).astype(np.int64)
    unit = "s" if not (micros % 1_000_000).any() and first == first.astype("M8[s]") else "us"
    stamps = np.datetime_as_string(first + micros.astype("m8[us]"), unit=unit)
    return [np.array([(s if dated else s.split("T")[1]) + zone for s in stamps.tolist()], dtype=object)]


def _remarks_by_row(log: Log) -> list[str]:
    """The remarks beside the rows kept; one made in a row that was not kept stands in the next that was."""
    said = [""] * log.rows.size
    for remark in log.remarks:
        at = min(int(np.searchsorted(log.rows, remark.row)), log.rows.size - 1)
        said[at] = f"{said[at]}; {remark.text}" if said[at] else remark.text
    return said


def _write(file, headings, stamps, columns, texts, rows: int) -> None:
    _emit(file, "\ufeff" + _lines([headings]))
    for start in range(0, rows, ROWS_AT_ONCE):
        part = slice(start, start + ROWS_AT_ONCE)
        cells = [s[part].tolist() for s in stamps]
        cells += [[repr(v) if v - v == 0 else "" for v in values[part].tolist()] for _, values in columns]
        cells += [[_harmless(str(t)) for t in text[part]] for text in texts.values()]
        _emit(file, _lines(zip(*cells, strict=True)))


def _lines(rows) -> str:
    text = io.StringIO()
    csv.writer(text, lineterminator="\n").writerows(rows)
    return text.getvalue()


def _emit(file, text: str) -> None:
    try:
        file.write(text)
    except TypeError:  # a binary file
        file.write(text.encode("utf-8"))


def _harmless(text: str) -> str:
    """Text that no spreadsheet program computes."""
    return "'" + text if text[:1] in ("=", "+", "-", "@", "\t", "\r") else text
