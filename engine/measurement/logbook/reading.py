"""The logbook's door: read what a logger or a clipboard gave, and say what could not be read.

    proposal = propose_mapping("run1.csv")           what the columns seem to be, and what is open
    mapping = proposal.mapping.answer(basis="gauge") a person answers and confirms
    log = read_log("run1.csv", mapping)              SI columns, refusals and suspicions
    readings = absolute(log, p_barometer=100_800.0)  gauge pressures made absolute
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace

import numpy as np

from engine.measurement.given import whole
from engine.measurement.logbook.cells import Worked, work
from engine.measurement.logbook.checks import Checked, suspicions
from engine.measurement.logbook.mapping import Mapping, is_dated, refuse_open
from engine.measurement.logbook.propose import Layout, Proposal, named_channels, propose
from engine.measurement.logbook.rows import Collector, Rejected, Remark, Rows, in_order
from engine.measurement.logbook.sheet import check_archive, is_workbook, propose_sheet, sheet_table
from engine.measurement.logbook.suspicion import Suspicion, ranges
from engine.measurement.logbook.table import Words, parse
from engine.measurement.logbook.text import (
    DELIMITERS,
    ENCODINGS,
    Source,
    find_delimiters,
    find_encoding,
    refuse,
    sample_lines,
    source_of,
    split_rows,
    text_blocks,
)
from engine.measurement.logbook.words import CHANNELS, PRESSURES
from engine.steam.arrays import at_the_door, refuse_outside, shortened
from engine.steam.errors import Fault, InputError
from engine.steam.units import absolute_from_gauge

HALF_A_DAY = 43_200_000_000  # µs
A_DAY = 2 * HALF_A_DAY
REFUSALS_SHOWN = 5


@dataclass(frozen=True, eq=False)
class Log:
    """A log as read. Arrays have one element per kept row and cannot be written to.

    ``channels``: float64 in SI by name; NaN where the row has no usable reading, see ``present``.
    ``basis``: "gauge" or "absolute" for each pressure; gauge stays gauge until ``absolute``.
    ``time``: s since ``start``, None when the log has no time column. ``start``: the first stamp in ISO
    form (UTC when the log carries time zones), a time of day, or "" where ``time`` is as written.
    ``rows``: line or row number in the file. ``rejected`` lists refusals up to a cap per column and
    reason, ``rejected_counts`` counts all of them.
    """

    name: str
    mapping: Mapping
    start: str
    time: np.ndarray | None
    channels: dict[str, np.ndarray]
    basis: dict[str, str]
    rows: np.ndarray
    remarks: tuple[Remark, ...] = ()
    rejected: tuple[Rejected, ...] = ()
    rejected_counts: dict[str, int] = field(default_factory=dict)
    suspicions: tuple[Suspicion, ...] = ()
    rows_read: int = 0
    blank_rows: int = 0
    notes: tuple[str, ...] = ()

    def __len__(self) -> int:
        return self.rows.size

    @property
    def missing(self) -> dict[str, int]:
        """Channel -> number of kept rows without a usable reading of it."""
        return {name: int(np.isnan(values).sum()) for name, values in self.channels.items()}


def propose_mapping(path_or_bytes, *, delimiter: str = "", encoding: str = "", sheet: str = "",
                    header_line: int | None = None) -> Proposal:
    """What the columns of a log seem to be: ``mapping`` to be confirmed, ``notes``, ``preview``.

    ``path_or_bytes`` is a path, the bytes of a file, or a file opened in binary mode. ``delimiter``,
    ``encoding``, ``sheet`` and ``header_line`` (0: there is none) are found when not told. Raises
    InputError for what is no table. The mapping's ``questions`` are what only a person can tell.

    >>> propose_mapping(b"time [s];p1 [bar g];T2 [degC]\\n0;9,01;121,3\\n5;9,02;121,4\\n").mapping.used["p_line"].basis
    'gauge'
    """
    for name, value, allowed in (("delimiter", delimiter, ("", *DELIMITERS)), ("encoding", encoding, ("", *ENCODINGS))):
        if not isinstance(value, str) or value not in allowed:
            raise InputError(Fault(f"{name} of a log", shortened(value), "", "one of: " + ", ".join(map(repr, allowed)),
                                   name=name))
    if not isinstance(sheet, str):
        raise InputError(Fault("sheet of a log", shortened(sheet), "", "the name of a sheet", name="sheet"))
    if header_line is not None and not (whole(header_line) and header_line >= 0):
        raise InputError(Fault("heading line of a log", shortened(header_line), "", "a line number, or 0 for none",
                               name="header_line"))
    return _propose(source_of(path_or_bytes), Layout(delimiter, encoding, sheet, header_line))


def read_log(path_or_bytes, mapping: Mapping | None = None, *,
             progress: Callable[[float], object] | None = None) -> Log:
    """Read a log of readings into SI columns, with everything refused and everything suspected.

    ``mapping`` None proposes one and reads on only if it leaves nothing to ask. ``progress`` is
    called with the fraction read, 0 to 1. Raises InputError when the file is no table, when a
    question is open, when a mapped column is not there, or when no row can be used.

    >>> log = read_log(b"time [s],p1 [bar g],T2 [degC]\\n0,9.01,121.3\\n5,n/a,121.4\\n10,9.02,121.4\\n")
    >>> [round(float(p)) for p in log.channels["p_line"][[0, 2]]], log.basis["p_line"]
    ([901000, 902000], 'gauge')
    >>> log.rejected
    (Rejected(row=3, column='p1 [bar g]', content='n/a', reason='the instrument says that it has no value'),)
    """
    source = source_of(path_or_bytes)
    proposal = _propose(source, Layout()) if mapping is None else _fitted(mapping, source)
    refuse_open(proposal.mapping, source.name)
    collector = Collector(proposal.mapping)
    for done in _worked(source, proposal.mapping, Words(proposal.words)):
        collector.take(done)
        if progress:
            progress(0.98 * done.block.fraction)
    log = _log(source.name, proposal.mapping, collector.finish(), proposal.notes if mapping is None else ())
    if progress:
        progress(1.0)
    return log


def absolute(log: Log, p_barometer=None) -> Log:
    """The log with every gauge pressure made absolute.

    ``p_barometer`` [Pa]: one value, or one per row; None takes the log's own barometer channel, with
    readings between two of them interpolated by row. Raises InputError when there is none to take,
    and outside 30 000 .. 120 000 Pa.

    >>> log = read_log(b"p1 [bar g],T2 [degC]\\n9,121.3\\n")
    >>> float(absolute(log, 100_000.0).channels["p_line"][0])
    1000000.0
    """
    gauge = [name for name in PRESSURES if log.basis.get(name) == "gauge"]
    if not gauge:
        return log
    if p_barometer is None:
        p_barometer = _own_barometer(log)
    (p_air,), _ = at_the_door(p_barometer=p_barometer)
    faults = refuse_outside("p_barometer", p_air, (p_air >= 30e3) & (p_air <= 120e3), "30 to 120 kPa",
                            why="no place where steam is used has another", hint="check the unit of the barometer")
    if p_air.ndim and p_air.shape != log.rows.shape:
        faults.append(Fault("barometric pressure", f"shape {p_air.shape}", "", f"one value or shape {log.rows.shape}",
                            name="p_barometer"))
    if faults:
        raise InputError(*faults)
    channels = {name: _locked(absolute_from_gauge(values, p_air)) if name in gauge else values
                for name, values in log.channels.items()}
    return replace(log, channels=channels, basis={**log.basis, **dict.fromkeys(gauge, "absolute")})


def fit_mapping(mapping: Mapping, path_or_bytes) -> Mapping:
    """A remembered mapping laid on a file: columns by their headings, lines where this file has them.

    What was decided (channels, units, bases, decimal sign, date order) stays as decided. The layout
    remembered is tried first, then the one this file shows. Raises InputError for a column that is
    in neither.
    """
    return _fitted(mapping, source_of(path_or_bytes)).mapping


def _fitted(mapping: Mapping, source: Source) -> Proposal:
    names = tuple((c.position, c.name.strip()) for c in mapping.used.values())
    told = Layout(mapping.delimiter, mapping.encoding, mapping.sheet, 0 if mapping.header_line == 0 else None,
                  mapping.first_line if mapping.header_line == 0 else None, names)
    try:
        return _laid_on(mapping, _propose(source, told), source.name)
    except InputError:
        found = _propose(source, Layout(header_line=told.header_line, first_line=told.first_line, names=names))
        return _laid_on(mapping, found, source.name)


def _laid_on(mapping: Mapping, proposal: Proposal, name: str) -> Proposal:
    found = proposal.mapping
    here = {c.name: c.position for c in reversed(found.columns) if c.name}
    faults, columns = [], [replace(c, channel="", unit="", basis="") for c in found.columns]
    for column in mapping.used.values():
        same = column.position < len(columns) and columns[column.position].name == column.name
        at = column.position if same else here.get(column.name)
        if at is None:
            label = CHANNELS[column.channel].label
            faults.append(Fault(f"log {name}, column of the {label}", f"no {column.label!r}", "",
                                "one of: " + ", ".join(c.label for c in found.columns),
                                "the mapping was made for another layout", "map the columns anew", name="mapping"))
        else:
            columns[at] = replace(columns[at], channel=column.channel, unit=column.unit, basis=column.basis)
    if faults:
        raise InputError(*faults)
    return proposal._replace(mapping=replace(found, columns=tuple(columns), decimal=mapping.decimal,
                                             thousands=mapping.thousands, date_order=mapping.date_order))


def _propose(source: Source, layout: Layout) -> Proposal:
    if is_workbook(source):
        check_archive(source)
        return propose_sheet(source, layout)
    found = find_encoding(source)
    by_mark = found in ("utf-8-sig", "utf-16", "utf-32")
    encoding = found if by_mark or not layout.encoding else layout.encoding
    lines, spots = sample_lines(source, encoding)
    possible = [layout.delimiter] if layout.delimiter else find_delimiters(lines, source.name)
    tables = {d: [(k + 1, cells) for k, cells in split_rows(lines, d) if cells is not None] for d in possible}
    # The heading decides, where lines before it or decimal commas leave more than one delimiter possible.
    delimiter = max(possible, key=lambda d: named_channels(tables[d])) if len(possible) > 1 else possible[0]
    rows = tables[delimiter]
    spots = [cells for _, cells in split_rows(spots, delimiter) if cells is not None]
    return propose(rows, spots, source.name, layout._replace(delimiter=delimiter, encoding=encoding))


def _worked(source: Source, mapping: Mapping, words: Words) -> Iterator[Worked]:
    """The blocks of a log, parsed and worked at, in their order."""
    if mapping.delimiter:
        blocks = text_blocks(source, mapping.encoding, mapping.delimiter, mapping.first_line)
        return in_order(lambda block: work(parse(block, mapping, words), mapping, words), blocks)
    return (work(block, mapping) for block in sheet_table(source, mapping))


def _log(name: str, mapping: Mapping, kept: Rows, notes: tuple[str, ...]) -> Log:
    if kept.rows.size == 0:
        raise _no_row(name, kept)
    start, time, found = _elapsed(mapping, kept)
    remarks = tuple(Remark(row, _remark_time(at, kept), text) for row, at, text in kept.remarks)
    columns = mapping.used
    dated = "time" in columns and is_dated(columns["time"].unit) or "date" in columns
    found += suspicions(Checked(time, kept.rows, kept.channels, columns, dated))
    if kept.undecoded:
        found += (Suspicion("encoding", "", f"{kept.undecoded} bytes are no characters in {mapping.encoding}", (),
                            kept.undecoded, "export the log as UTF-8 if names or remarks look broken"),)
    lost = kept.rows_read - kept.rows.size
    if lost > 0.2 * kept.rows_read:
        found += (Suspicion("many rows refused", "", f"{lost} of {kept.rows_read} rows could not be used", (), lost,
                            "see the list of refusals, and whether the mapping is the right one"),)
    channels = {n: _locked(v) for n, v in kept.channels.items()}
    basis = {n: columns[n].basis for n in PRESSURES if n in columns}
    return Log(name, mapping, start, None if time is None else _locked(time), channels, basis, _locked(kept.rows),
               remarks, kept.rejected, kept.counts, found, kept.rows_read, kept.blank_rows, notes)


def _locked(array: np.ndarray) -> np.ndarray:
    array.setflags(write=False)
    return array


def _no_row(name: str, kept: Rows) -> InputError:
    """No row could be used: the commonest reasons, each with its first place."""
    if not kept.counts:
        return refuse(name, "a heading without a reading below it", hint="check that the logger had finished writing",
                      needs="at least one row with a reading")
    faults = []
    for reason, count in sorted(kept.counts.items(), key=lambda item: -item[1])[:REFUSALS_SHOWN]:
        first = next(r for r in kept.rejected if r.reason == reason)
        place = f"row {first.row}" + (f", {first.column}" if first.column else "")
        faults.append(Fault(f"log {name}, {place}", repr(first.content), "", "at least one row that can be used",
                            f"{reason} ({count} times)",
                            "see whether units, decimal sign and date order are the right ones", name="log"))
    return InputError(*faults)


def _elapsed(mapping: Mapping, kept: Rows) -> tuple[str, np.ndarray | None, tuple[Suspicion, ...]]:
    """(start, seconds since then, what was noticed): stamps counted from the first, elapsed times as written."""
    if kept.micros is None:
        return "", kept.seconds, ()
    micros, found = kept.micros, ()
    unit = mapping.used["time"].unit
    dated = is_dated(unit) or "date" in mapping.used
    if unit == "clock" and not dated:
        falls = np.diff(micros, prepend=micros[0]) < -HALF_A_DAY
        if falls.any():
            micros = micros + A_DAY * np.cumsum(falls)
            found = (Suspicion("midnight", "time", "the time of day starts again: taken as midnight",
                               *ranges(kept.rows, falls), "log dates with the times if that is not so"),)
    if unit == "mm:ss":
        return "", micros / 1e6, found
    first = micros[0].astype("M8[us]")
    start = np.datetime_as_string(first, unit="us").rstrip("0").rstrip(".")
    start = start.split("T")[1] if not dated else start + "+00:00" * kept.zoned
    return start, (micros - micros[0]) / 1e6, found


def _remark_time(at, kept: Rows) -> float | None:
    if at is None:
        return None
    return float((at - kept.micros[0]) / 1e6) if kept.micros is not None else float(at)


def _own_barometer(log: Log) -> np.ndarray:
    values = log.channels.get("p_barometer")
    known = np.empty(0, np.intp) if values is None else np.flatnonzero(~np.isnan(values))
    if not known.size:
        raise InputError(Fault("barometric pressure", "none", "Pa", "a value for this log",
                               "the log has gauge pressures and no barometer", "give p_barometer", name="p_barometer"))
    return np.interp(np.arange(values.size), known, values[known])
