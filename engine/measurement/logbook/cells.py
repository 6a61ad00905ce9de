"""From the cells of one block to SI values and times, with a reason for every cell that gives none.

Everything here depends on one block alone, so blocks can be worked at side by side.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import numpy as np

from engine.measurement.logbook.mapping import Column, Mapping, is_dated, is_text
from engine.measurement.logbook.numbers import (
    FORMULA,
    NO_VALUE,
    NO_VALUE_CODES,
    NOT_A_NUMBER,
    NOT_FINITE,
    plain_numbers,
    read_number,
)
from engine.measurement.logbook.sheet_rows import UncomputedFormula
from engine.measurement.logbook.table import Block, Words
from engine.measurement.logbook.time import (
    COUNTS,
    EMPTY_TIME,
    REASONS,
    SERIAL_ZERO_DAYS,
    Times,
    from_objects,
    read_times,
)
from engine.measurement.logbook.words import CHANNELS, MEASURED, VACUUM_GAUGE, unit_of
from engine.steam.units import to_si

IMPOSSIBLE = "outside what this channel can be"
HEADING_AGAIN = "the heading again"
COMMENT = "a comment line"
NO_READING = "no reading in this row"
_PLAIN = frozenset((float, int, type(None)))  # a truth value is no number
_APOSTROPHE = re.compile(r"^'(?=[=+\-@])")  # written in front of text that must not become a formula


@dataclass(eq=False)
class Worked:
    """A block worked at: ``alive`` rows can be kept; ``faults`` are (index, column, reason, content), the last or
    the column None where there is nothing to add."""

    block: Block
    alive: np.ndarray
    blank: np.ndarray
    remarks: dict[int, str]
    words: Words | None = None
    times: np.ndarray | None = None
    zoned: np.ndarray | None = None
    values: dict[str, np.ndarray] = field(default_factory=dict)
    faults: list[tuple[int, Column | None, str, str | None]] = field(default_factory=list)


def work(block: Block, mapping: Mapping, words: Words | None = None) -> Worked:
    """SI values (gauge stays gauge) and times of a block; rows without time or reading are not alive.

    ``words`` learns what stands in this block in place of numbers.
    """
    used = mapping.used
    done = Worked(block, np.ones(block.rows.size, dtype=bool), _blank_rows(block, used), _remarks(block, used), words)
    done.blank[list(done.remarks)] = False
    for i, content, reason in block.spoiled:
        done.alive[i] = done.blank[i] = False
        done.faults.append((i, None, reason, content))
    done.alive &= ~done.blank
    if "time" in used:
        _work_times(done, mapping)
    empty = np.ones(block.rows.size, dtype=bool)
    for name in MEASURED:
        if name in used:
            done.values[name] = _si_values(done, used[name], mapping)
            empty &= np.isnan(done.values[name])
    without = done.alive & empty
    if without.any():
        faulty = {fault[0] for fault in done.faults} | set(done.remarks)
        done.faults += [(int(i), None, NO_READING, None) for i in np.flatnonzero(without) if i not in faulty]
        done.alive &= ~empty
    return done


def _blank_rows(block: Block, used: dict[str, Column]) -> np.ndarray:
    blank = np.ones(block.rows.size, dtype=bool)
    for channel, column in used.items():
        if channel == "remark" or not blank.any():
            continue
        cells = block.cells[column.position]
        if cells.dtype.kind == "f":
            blank &= np.isnan(cells)
        elif cells.dtype.kind == "S":
            blank &= cells.view(np.uint8).reshape(cells.size, -1)[:, 0] == 0
        else:
            blank &= np.array([c is None or (isinstance(c, str) and not c.strip()) for c in cells], dtype=bool)
    return blank


def _remarks(block: Block, used: dict[str, Column]) -> dict[int, str]:
    if "remark" not in used:
        return {}
    cells = block.cells[used["remark"].position]
    return {i: _APOSTROPHE.sub("", text) for i, c in enumerate(cells) if c is not None and (text := str(c).strip())}


def _work_times(done: Worked, mapping: Mapping) -> None:
    """Whole microseconds (dated, clock) or seconds (elapsed) per row; rows without a usable time die."""
    column, block = mapping.used["time"], done.block
    if not is_text(column.unit):
        _counted_times(done, column, mapping)
        return
    times = _text_times(column, block, mapping)
    if "date" in mapping.used:
        dates = _text_times(mapping.used["date"], block, mapping)
        times = Times(times.micros + dates.micros, np.where(dates.reason != 0, dates.reason, times.reason), times.zoned)
    done.times, done.zoned = times.micros, times.zoned
    bad = (times.reason != 0) & done.alive
    if bad.any():
        for i in map(int, np.flatnonzero(bad)):
            _refuse_time(done, i, column, REASONS[times.reason[i]])
        done.alive &= ~bad


def _text_times(column: Column, block: Block, mapping: Mapping) -> Times:
    cells = block.cells[column.position]
    if mapping.delimiter:
        return read_times(cells, column.unit, mapping.date_order or "ymd")
    return from_objects(cells, column.unit, mapping.date_order or "ymd")


def _refuse_time(done: Worked, i: int, column: Column, reason: str) -> None:
    cell = done.block.cells[column.position][i]
    text = (cell.decode("utf-8", "replace") if isinstance(cell, bytes) else str(cell or "")).strip()
    if isinstance(cell, UncomputedFormula):
        reason = FORMULA
    if text.startswith(("#", "//", "%")):
        done.faults.append((i, None, COMMENT, None))
    else:
        done.faults.append((i, column, HEADING_AGAIN if text and text == column.name.strip() else reason, None))


def _counted_times(done: Worked, column: Column, mapping: Mapping) -> None:
    numbers = _numbers(done, column, mapping)
    missing = np.isnan(numbers) & done.alive
    if missing.any():
        faulty = {fault[0] for fault in done.faults}
        done.faults += [(int(i), column, EMPTY_TIME, None) for i in np.flatnonzero(missing) if i not in faulty]
        done.alive &= ~missing
    seconds = np.where(done.alive, numbers, 0.0) * COUNTS[column.unit]
    if column.unit == "excel":
        seconds = seconds - SERIAL_ZERO_DAYS * COUNTS["excel"]
    if is_dated(column.unit):
        # A double holds a serial day to some microseconds: milliseconds are what was written.
        seconds = np.rint(np.clip(seconds, -1e11, 1e11) * 1e3).astype(np.int64) * 1000
    done.times = seconds


def _si_values(done: Worked, column: Column, mapping: Mapping) -> np.ndarray:
    """SI values of a channel, NaN where missing or refused."""
    channel = CHANNELS[column.channel]
    values = to_si(_numbers(done, column, mapping), column.unit, channel.kind)
    low, high = channel.possible
    if column.basis == "gauge":
        low = VACUUM_GAUGE
    if values.size and not (np.fmin.reduce(values) >= low and np.fmax.reduce(values) <= high):
        bad = ~((values >= low) & (values <= high)) & ~np.isnan(values)
        done.faults += [(int(i), column, IMPOSSIBLE, None) for i in np.flatnonzero(bad & done.alive)]
        values[bad] = np.nan
    return values


def _numbers(done: Worked, column: Column, mapping: Mapping) -> np.ndarray:
    """The cells of a column as numbers in its own unit, NaN where there is none."""
    cells = done.block.cells[column.position]
    if cells.dtype.kind != "f":
        return _careful_numbers(done, column, mapping, cells)
    if unread := done.block.unread.get(column.position):
        cells, known = cells.copy(), {}
        for i, text in unread.items():
            if not done.alive[i]:
                continue
            if text not in known:  # a logger has few words, and writes them often
                known[text] = _read(text, column, mapping)
            cells[i], reason = known[text]
            if reason:
                done.faults.append((i, column, reason, text))
    if not cells.size or (np.fmin.reduce(cells) > max(NO_VALUE_CODES) and np.fmax.reduce(cells) < np.inf):
        return cells
    strange = np.isinf(cells) | np.isin(cells, NO_VALUE_CODES)
    done.faults += [(int(i), column, NOT_FINITE if np.isinf(cells[i]) else NO_VALUE, None)
                    for i in np.flatnonzero(strange & done.alive)]
    return np.where(strange, np.nan, cells)


def _careful_numbers(done: Worked, column: Column, mapping: Mapping, cells: np.ndarray) -> np.ndarray:
    """Together where no doubt is possible, the rest cell by cell."""
    if mapping.delimiter:
        plain = plain_numbers(cells.tolist(), mapping.decimal)
    else:  # of a sheet: numbers as they are; numpy takes None for NaN
        plain = cells.tolist() if _PLAIN.issuperset(map(type, cells)) else None
    numbers = np.full(cells.size, np.nan) if plain is None else np.array(plain, dtype=float)
    numbers[np.isin(numbers, NO_VALUE_CODES)] = np.nan
    for i in map(int, np.flatnonzero(np.isnan(numbers) & done.alive)):
        if cells[i] is None or cells[i] == "":
            continue
        numbers[i], reason = _read(cells[i], column, mapping)
        if reason:
            done.faults.append((i, column, reason, None))
            if done.words is not None and isinstance(cells[i], str):
                done.words.learn([cells[i]])
    return numbers


def _read(cell: object, column: Column, mapping: Mapping) -> tuple[float, str]:
    """One cell, of a text file or of a workbook: its number, or NaN and the reason."""
    kind = CHANNELS[column.channel].kind
    if isinstance(cell, UncomputedFormula):
        return np.nan, FORMULA
    if isinstance(cell, str):
        value, reason = read_number(cell, mapping.decimal, mapping.thousands,
                                    lambda text: unit_of(text, kind)[1] == column.unit)
    elif isinstance(cell, (int, float)) and not isinstance(cell, bool):
        value, reason = float(cell), ""
    else:
        return np.nan, NOT_A_NUMBER
    return (np.nan, NO_VALUE) if value in NO_VALUE_CODES else (value, reason)
