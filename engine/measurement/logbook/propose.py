"""From the first rows of a log, and some from all over it, to a proposed mapping.

The heading row is the one that names most channels; a row of units may follow it. What the headings
leave open is taken from the cells where they decide it (the form of the times, the decimal sign, a
unit written in the cells); what they do not decide is left open in the mapping, to be asked.
"""

from __future__ import annotations

import math
import re
from collections import Counter
from typing import NamedTuple

import numpy as np

from engine.measurement.logbook.mapping import Column, Mapping
from engine.measurement.logbook.numbers import Signs, number_signs, plain_numbers, read_number
from engine.measurement.logbook.text import refuse
from engine.measurement.logbook.time import STAMPS, count_unit, date_order, text_unit
from engine.measurement.logbook.words import CHANNELS, MEASURED, Found, recognise, unit_of

HEADER_ROWS = 250  # how far down a heading is looked for
LONGEST_HEADING = 80
_COMMENT = re.compile(r"^\s*(#|//|%|;|')+\s*")
_NUMBER = re.compile(r"[+\-−]?[\d.,'’\s]*\d[\d.,'’\s]*([eE][+-]?\d+)?\s*[°%]?\s*[\w/²()]{0,8}", re.ASCII)

Row = tuple[int, list[str]]  # line number from 1, cells


class Proposal(NamedTuple):
    """``notes`` say what was decided from the data and what was left out; ``preview`` the first data rows.

    ``words`` are texts seen where numbers are expected ("---").
    """

    mapping: Mapping
    notes: tuple[str, ...]
    preview: tuple[Row, ...]
    words: frozenset[str] = frozenset()


def is_value(cell: str) -> bool:
    """Whether a cell looks like a reading: a number, perhaps with a unit, or a time."""
    cell = cell.strip()
    return bool(re.match(r"[+\-−.,]?\d", cell)) and (bool(_NUMBER.fullmatch(cell)) or bool(text_unit([cell])))


class Layout(NamedTuple):
    """What is told beforehand about a file, "" or None where nothing is; ``names`` are remembered headings."""

    delimiter: str = ""
    encoding: str = ""
    sheet: str = ""
    header_line: int | None = None
    first_line: int | None = None
    names: tuple[tuple[int, str], ...] = ()


def propose(rows: list[Row], spots: list[list[str]], source: str, layout: Layout,
            text_numbers: list[str] | None = None) -> Proposal:
    """The proposed mapping. ``text_numbers`` are a workbook's numbers that were stored as text."""
    table = _table(rows, spots, source, layout)
    found, times, notes = _choose(list(map(recognise, table.names, table.units)), table.cells, table.names)
    numeric = [c for f, column in zip(found, table.cells, strict=True) for c in column
               if f.channel != "remark" and f.unit not in STAMPS]
    signs = number_signs(numeric if text_numbers is None else text_numbers)
    found = [_unit_from_cells(f, column, signs) for f, column in zip(found, table.cells, strict=True)]
    if not any(f.channel for f in found):
        _refuse_prose(table.data, source)
    columns = tuple(Column(k, table.names[k], f.channel, f.unit, f.basis) for k, f in enumerate(found))
    mapping = Mapping(columns, signs.decimal if signs.settled else "", signs.thousands,
                      date_order(times) if times else "ymd", layout.delimiter, layout.encoding, table.header_line,
                      table.data[0][0], layout.sheet)
    left_out = [c.label for c in columns if not c.channel and any(v.strip() for v in table.cells[c.position])]
    if left_out:
        notes.append("not recognised and left out: " + ", ".join(left_out))
    words = {cell for c in columns if c.channel in MEASURED for cell in _words(table.cells[c.position], signs)}
    return Proposal(mapping, tuple(notes), tuple(table.data[:20]), frozenset(words))


class _Table(NamedTuple):
    """The sample cut into heading and columns: ``data`` are the first rows, ``cells`` the columns of the sample."""

    header_line: int
    names: list[str]
    units: list[str]
    data: list[Row]
    cells: list[list[str]]


def _table(rows: list[Row], spots: list[list[str]], source: str, layout: Layout) -> _Table:
    at, skip = _told_heading(rows, layout, source)
    if at is None:
        at, skip = find_heading(rows)
    heading = [_COMMENT.sub("", c) if k == 0 else c for k, c in enumerate(rows[at][1])] if at >= 0 else []
    units = rows[at + 1][1] if skip > 1 else []
    start = at + skip if at >= 0 else next((k for k, r in enumerate(rows) if r[0] >= (layout.first_line or 0)), 0)
    data = [r for r in rows[start:] if any(c.strip() for c in r[1])]
    if not data:
        raise refuse(source, "a heading without any row below it" if at >= 0 else "no rows",
                     hint="check that the logger had finished writing")
    _refuse_comma_clash(heading, data, layout.delimiter, source)
    width = max(len(heading), Counter(len(r[1]) for r in data).most_common(1)[0][0])
    names, units = ([*(c.strip() for c in row), *[""] * (width - len(row))][:width] for row in (heading, units))
    while width > 1 and not names[width - 1] and not any(len(r[1]) >= width and r[1][width - 1].strip() for r in data):
        width -= 1  # a delimiter at the end of every line
    sample = [*(row[1] for row in data), *spots]
    cells = [[row[k] if k < len(row) else "" for row in sample] for k in range(width)]
    return _Table(rows[at][0] if at >= 0 else 0, names[:width], units[:width], data, cells)


def _words(cells: list[str], signs: Signs) -> set[str]:
    """Cells that are no numbers, whatever the unit."""
    numbers = plain_numbers(cells, signs.decimal) or [math.nan] * len(cells)
    doubtful = {cell for cell, number in zip(cells, numbers, strict=True) if math.isnan(number) and cell.strip()}
    return {c for c in doubtful if math.isnan(read_number(c, signs.decimal, signs.thousands, lambda unit: True)[0])}


def _told_heading(rows: list[Row], layout: Layout, source: str) -> tuple[int | None, int]:
    """The heading by its line number or by the headings remembered; (None, 0) when neither tells."""
    if layout.names:
        for k, (_, cells) in enumerate(rows[:HEADER_ROWS]):
            plain = [_COMMENT.sub("", c).strip() if j == 0 else c.strip() for j, c in enumerate(cells)]
            if all(name in plain for _, name in layout.names if name) and any(name for _, name in layout.names):
                return k, 2 if k + 1 < len(rows) and _is_unit_row(rows[k + 1][1]) else 1
    if layout.header_line is None:
        return None, 0
    if layout.header_line == 0:
        return -1, 0
    at = next((k for k, r in enumerate(rows) if r[0] == layout.header_line), None)
    if at is None:
        raise refuse(source, f"heading in line {layout.header_line}", hint="0 means that there is none",
                     needs=f"a line from 1 to {rows[-1][0] if rows else 1}")
    return at, 2 if at + 1 < len(rows) and _is_unit_row(rows[at + 1][1]) else 1


def find_heading(rows: list[Row]) -> tuple[int, int]:
    """(index of the heading row, rows it takes with its row of units); (-1, 0) when there is none."""
    named, at = max(((_named(cells), -k) for k, (_, cells) in enumerate(rows[:HEADER_ROWS])), default=(0, 0))
    at = -at if named else -1
    if at < 0:
        at = _row_above_the_values(rows)
        if at < 0:
            return -1, 0
    return at, 2 if at + 1 < len(rows) and _is_unit_row(rows[at + 1][1]) else 1


def named_channels(rows: list[Row]) -> int:
    """How many channels the row names that names most."""
    return max((_named(cells) for _, cells in rows[:HEADER_ROWS]), default=0)


def _named(cells: list[str]) -> int:
    """How many channels a row names, 0 if it looks like readings or like prose."""
    filled = [c for c in cells if c.strip()]
    if not filled or sum(map(is_value, filled)) > 0.3 * len(filled) or max(map(len, filled)) > LONGEST_HEADING:
        return 0
    return len({recognise(_COMMENT.sub("", c)).channel for c in filled} - {""})


def _row_above_the_values(rows: list[Row]) -> int:
    """A heading that names nothing known is still a heading when values stand under it."""
    for k in range(min(len(rows) - 1, HEADER_ROWS)):
        here, below = ([c for c in rows[j][1] if c.strip()] for j in (k, k + 1))
        if len(here) >= 2 and not any(map(is_value, here)) and sum(map(is_value, below)) >= max(2, len(below) / 2):
            return k
    return -1


def _is_unit_row(cells: list[str]) -> bool:
    filled = [c for c in cells if c.strip()]
    units = sum(bool(unit_of(c)[1]) for c in filled)
    return bool(filled) and not any(map(is_value, filled)) and 2 * units >= len(filled)


def _refuse_comma_clash(heading: list[str], data: list[Row], delimiter: str, source: str) -> None:
    """Commas that part the cells and mark the decimals at once cannot be told from one another."""
    if delimiter != "," or not heading:
        return
    width = len(heading)
    wide = [r for r in data if sum(bool(c.strip()) for c in r[1]) > width]
    if len(wide) > 0.5 * len(data):
        line, cells = wide[0]
        raise refuse(source, f"{width} headings over {len(cells)} cells (line {line}: {','.join(cells)[:60]})",
                     "the comma parts the cells and is the decimal sign as well",
                     "export with semicolons or tabs between the cells, or with a decimal point")


def _refuse_prose(data: list[Row], source: str) -> None:
    """Text that names no channel and holds hardly a value is no table of readings."""
    filled = [c for _, cells in data for c in cells if c.strip()]
    if sum(map(is_value, filled)) < 0.3 * len(filled):
        raise refuse(source, f"text without readings, such as {' '.join(data[0][1])[:60]!r}",
                     "no heading names a known channel and hardly a cell holds a number",
                     "give the table alone, with headings such as: time [s], p1 [bar g], T2 [°C]")


def _choose(found: list[Found], cells: list[list[str]], names: list[str]) -> tuple[list[Found], list[str], list[str]]:
    """One column per channel; the dated cells; what was decided on the way."""
    notes: list[str] = []
    found = [_settle_time(f, column) for f, column in zip(found, cells, strict=True)]
    if not any(f.channel in ("time", "date") for f in found):
        stamped = next((k for k, column in enumerate(cells) if text_unit(column[:50]) in ("stamp", "clock")), None)
        if stamped is not None and not found[stamped].channel:
            found[stamped] = Found("time", text_unit(cells[stamped]))
    found = _pair_date_with_clock(found)
    for channel in CHANNELS:
        rivals = sorted((k for k, f in enumerate(found) if f.channel == channel), key=lambda k: -found[k].score)
        for k in rivals[1:]:
            notes.append(f"{names[k]!r} names the {CHANNELS[channel].label}, as {names[rivals[0]]!r} does: left out")
            found[k] = Found()
    times = [c for f, column in zip(found, cells, strict=True) if f.channel in ("time", "date")
             and f.unit in ("stamp", "date") for c in column]
    return found, times, notes


def _settle_time(found: Found, cells: list[str]) -> Found:
    """A time column's unit from its cells: their form first, then the heading, then the size of the numbers."""
    if found.channel not in ("time", "date"):
        return found
    filled = [c for c in cells if c.strip()]
    if found.unit in ("mm:ss", "clock"):
        return found._replace(channel="time")
    numbers = np.array(_numbers(filled[:200]))
    if filled and np.isfinite(numbers).mean() > 0.5:
        as_text = text_unit(filled) if not found.unit else ""  # 20240506 is a date and a number
        if as_text and all(len(re.sub(r"\D", "", c)) in (8, 14) for c in filled[:50]):
            return found._replace(channel="time" if as_text == "stamp" else found.channel, unit=as_text)
        return found._replace(channel="time", unit=found.unit or count_unit(numbers))
    unit = text_unit(filled)
    if unit == "clock" and all(c.count(":") == 1 for c in filled) and any(int(c.split(":")[0]) > 23 for c in filled
                                                                        if c.split(":")[0].strip().isdigit()):
        unit = ""  # 75:30 is no time of day: hours or minutes?
    if found.channel == "date" and unit not in ("date", "stamp"):
        return Found()
    score = found.score + (unit == "stamp")
    return found._replace(channel="date" if unit == "date" else "time", unit=unit, score=score)


def _numbers(cells: list[str]) -> list[float]:
    """Cells as numbers with either decimal sign, NaN for what is none."""
    together = plain_numbers(cells, "," if any("," in c for c in cells) else ".")
    return together if together is not None else [read_number(c, "," if "," in c else ".")[0] for c in cells]


def _pair_date_with_clock(found: list[Found]) -> list[Found]:
    clock = any(f.channel == "time" and f.unit == "clock" for f in found)
    stamp = any(f.channel == "time" and f.unit not in ("clock", "") for f in found)
    out = []
    for f in found:
        if f.channel == "date" and not (clock and not stamp):
            f = f._replace(channel="" if stamp else "time")
        out.append(f if f.channel else Found())
    return out


def _unit_from_cells(found: Found, cells: list[str], signs) -> Found:
    """A unit that the heading lacks but the cells carry: 121.3 °C."""
    if not found.channel or found.unit or CHANNELS[found.channel].kind in ("text", "time"):
        return found
    tails = Counter()
    for cell in [c for c in cells if c.strip()][:50]:
        tail = re.sub(r"^[+\-−]?[\d.,'\s]*\d[.,]?", "", cell.strip()).strip()
        if tail and not math.isnan(read_number(cell, signs.decimal, signs.thousands, lambda text: True)[0]):
            tails[unit_of(tail, CHANNELS[found.channel].kind)[1:]] += 1
    if len(tails) != 1:
        return found
    (unit, basis), _ = tails.popitem()
    return found._replace(unit=unit, basis=found.basis or basis)
