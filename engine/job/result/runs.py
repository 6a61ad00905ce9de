"""Runs of readings, whether a logger wrote them or a hand: arrays in SI, as the instruments showed them."""

from __future__ import annotations

import json
from dataclasses import dataclass, replace

import numpy as np

from engine.job.case import ABSOLUTE, GAUGE, Case
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry, Row
from engine.measurement.logbook import Log
from engine.measurement.logbook.mapping import Column, Mapping
from engine.steam.errors import Fault, InputError
from engine.steam.units import to_si

CHANNELS = ("p_line", "p_exhaust", "T_exhaust", "p_barometer", "sample_flow", "T_ambient", "T_line", "condensate")
TYPED = tuple(name for name in CHANNELS if name not in ("T_line", "condensate"))
HEATED = ("p_line", "p_heater", "T_heater", "power", "sample_flow")


@dataclass(frozen=True, eq=False)
class Run:
    """One run. Arrays have one element per set of readings.

    ``channels`` by name, NaN where there is no reading; ``basis`` is "gauge" or "absolute" for each
    pressure; ``time`` [s], None where none was recorded; ``usable`` is False for rows whose time does
    not run forward, which no window can hold; ``rows`` are numbers in the file or the table.
    """

    name: str
    rows: np.ndarray
    time: np.ndarray | None
    channels: dict[str, np.ndarray]
    basis: dict[str, str]
    usable: np.ndarray
    start: str = ""
    notes: tuple[str, ...] = ()

    def __len__(self) -> int:
        return self.rows.size


def run_of_log(log: Log) -> Run:
    """A log as a run; what could not be used is in its notes."""
    lost = sum(log.rejected_counts.values())
    notes = (f"{lost} refusals while reading the log; they are listed with it",) if lost else ()
    usable, said = _forward(log.time, log.rows)
    channels = {name: values for name, values in log.channels.items() if name in CHANNELS}
    return Run(log.name, log.rows, log.time, channels, log.basis, usable, log.start, notes + said)


def runs_typed(case: Case) -> tuple[Run, ...]:
    """The readings typed into the case, run by run, in the order in which the runs first appear.

    Raises InputError for a run of which only some rows have a time.
    """
    return _typed(case["readings"], TYPED)


def runs_heated(case: Case) -> tuple[Run, ...]:
    """The same for the readings with a heater, which have channels of their own: ``HEATED``."""
    return _typed(case["heater_readings"], HEATED)


def _typed(rows: tuple[Row, ...], channels: tuple[str, ...]) -> tuple[Run, ...]:
    runs: dict[str, list[tuple[int, Row]]] = {}
    for number, row in enumerate(rows, 1):
        if any(row[name] is not None for name in channels):
            runs.setdefault(row["run"].strip(), []).append((number, row))
    return tuple(_typed_run(name, numbered, channels) for name, numbered in runs.items())


def _typed_run(name: str, numbered: list[tuple[int, Row]], names: tuple[str, ...]) -> Run:
    numbers, rows = np.array([n for n, _ in numbered]), [row for _, row in numbered]
    label = f"run {name}" if name else "typed readings"
    channels, basis = {}, {}
    for channel in names:
        entries = [row[channel] for row in rows]
        if any(entry is not None for entry in entries):
            if FIELDS[channel].kind == "pressure":
                basis[channel] = _one_basis(label, channel, numbered)
            channels[channel] = np.array([_si(channel, entry) for entry in entries])
    time = _times(label, numbered)
    usable, notes = _forward(time, numbers)
    return Run(label, numbers, time, channels, basis, usable, "", notes)


def _si(channel: str, entry: Entry | None) -> float:
    return np.nan if entry is None else to_si(entry.value, entry.unit, FIELDS[channel].kind)


def _one_basis(label: str, channel: str, numbered: list[tuple[int, Row]]) -> str:
    found = {row[channel].basis: number for number, row in reversed(numbered) if row[channel] is not None}
    if len(found) > 1:
        raise InputError(Fault(f"{FIELDS[channel].label}, {label}",
                               f"gauge in row {found[GAUGE]}, absolute in row {found[ABSOLUTE]}", "",
                               "one of the two throughout a run", "a gauge does not change what it shows",
                               "correct the rows that are meant otherwise", channel))
    return next(iter(found))


def _times(label: str, numbered: list[tuple[int, Row]]) -> np.ndarray | None:
    missing = [number for number, row in numbered if row["time"] is None]
    if len(missing) == len(numbered):
        return None
    if missing:
        raise InputError(Fault(f"Time, {label}", "nothing in row " + ", ".join(map(str, missing[:10])), "",
                               "a time in every row of a run, or in none", name="readings"))
    return np.array([to_si(row["time"].value, row["time"].unit, "time") for _, row in numbered])


def _forward(time: np.ndarray | None, rows: np.ndarray) -> tuple[np.ndarray, tuple[str, ...]]:
    """Which rows have a time after all before them, and what is to be said of the others."""
    if time is None or time.size == 0:
        return np.ones(rows.size, dtype=bool), ()
    usable = np.ones(time.size, dtype=bool)
    usable[1:] = time[1:] > np.maximum.accumulate(time)[:-1]
    count = int((~usable).sum())
    if not count:
        return usable, ()
    first = int(rows[~usable][0])
    return usable, (f"the time does not run forward in {count} row{'s' if count > 1 else ''}, the first of them "
                    f"{first}: they stand in no window",)


def remembered(case: Case, log: str, mapping: Mapping) -> Case:
    """The case with what the columns of a log are; an older answer for the same log gives way."""
    column = FIELDS["mappings"]
    kept = tuple(row for row in case["mappings"] if row["log"] != log)[-(column.most - 1):]
    return case.with_(mappings=(*kept, column.row(log=log, columns=_brief(mapping))))


def told_of(case: Case, log: str) -> str:
    """What a case remembers of the columns of this very log, as it stands there; "" for nothing."""
    return next((row["columns"] for row in case["mappings"] if row["log"] == log), "")


def recalled(case: Case, log: str) -> Mapping | None:
    """What the case says the columns of a log are: by its name, else as in the log mapped last; None without any.

    It still has to be laid on the file, whose headings may be others.
    """
    rows = case["mappings"]
    row = next((r for r in reversed(rows) if r["log"] == log), rows[-1] if rows else None)
    return None if row is None else _whole(row["columns"])


def _brief(mapping: Mapping) -> str:
    """A mapping without the columns that are not read: short enough for a case and its link."""
    whole = mapping.to_dict()
    whole["columns"] = [[c.position, c.name, c.channel, c.unit, c.basis] for c in mapping.used.values()]
    return json.dumps(whole, ensure_ascii=False, separators=(",", ":"))


def _whole(text: str) -> Mapping:
    """The mapping back, with nameless columns where others stood; InputError for what is none."""
    try:
        data = json.loads(text)
        used = {row[0]: Column(*row) for row in data["columns"]}
        last = max(used, default=-1)
        if not all(isinstance(k, int) and 0 <= k < 20_000 for k in used):
            raise ValueError("positions of columns")
        columns = tuple(used.get(k, Column(k, "")) for k in range(last + 1))
        rest = Mapping.from_dict({**data, "columns": []})
    except (ValueError, TypeError, KeyError, IndexError, RecursionError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError(Fault("columns of a log", text[:60], "", "what this program remembered of a mapping",
                               hint="map the columns anew", name="mappings")) from None
    return replace(rest, columns=columns)
