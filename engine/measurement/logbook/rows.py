"""Rows put together: the worked blocks become columns of the rows kept and a list of what was refused.

What stays in memory are float64 columns of the rows kept and a capped list of refusals; the totals
per reason are complete, whatever the cap.
"""

from __future__ import annotations

from collections import Counter, deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import Future, ThreadPoolExecutor
from typing import NamedTuple, TypeVar

import numpy as np

from engine.measurement.logbook.cells import Worked
from engine.measurement.logbook.mapping import Column, Mapping
from engine.measurement.logbook.table import Block
from engine.measurement.logbook.time import OTHER_ZONE
from engine.measurement.logbook.words import MEASURED

LISTED_PER_REASON = 200  # per column and reason; the totals go on
LONGEST_CONTENT = 80
LONGEST_REMARK = 500
MOST_REMARKS = 10_000
WORKERS = 2

Item, Result = TypeVar("Item"), TypeVar("Result")


class Rejected(NamedTuple):
    """One refusal: ``row`` is the line or row number in the file, ``column`` the heading ("" for a whole row)."""

    row: int
    column: str
    content: str
    reason: str


class Remark(NamedTuple):
    """A remark as written: ``time`` in s as in the log's ``time``, None where its row has none."""

    row: int
    time: float | None
    text: str


class Rows(NamedTuple):
    """What was kept: ``micros`` (dated and clock times) or ``seconds`` (elapsed), both None without a time column."""

    rows: np.ndarray
    micros: np.ndarray | None
    seconds: np.ndarray | None
    zoned: bool
    channels: dict[str, np.ndarray]
    remarks: list[tuple[int, float | None, str]]
    rejected: tuple[Rejected, ...]
    counts: dict[str, int]
    rows_read: int
    blank_rows: int
    undecoded: int


def in_order(job: Callable[[Item], Result], items: Iterable[Item]) -> Iterator[Result]:
    """``map`` on a few threads, a few items ahead: order and memory stay bounded.

    The C reader and NumPy leave the interpreter free while they work, so two blocks can be worked at
    at once.

    >>> list(in_order(abs, [-1, 2, -3]))
    [1, 2, 3]
    """
    with ThreadPoolExecutor(WORKERS) as pool:
        ahead: deque[Future] = deque()
        for item in items:
            ahead.append(pool.submit(job, item))
            if len(ahead) > WORKERS:
                yield ahead.popleft().result()
        while ahead:
            yield ahead.popleft().result()


class Collector:
    """Takes worked blocks in their order and keeps their rows."""

    def __init__(self, mapping: Mapping):
        self._names = [n for n in MEASURED if n in mapping.used]
        self._kept: dict[str, list[np.ndarray]] = {n: [] for n in [*self._names, "row", "time"]}
        self._time_column = mapping.used.get("time")
        self._line = mapping.first_line if mapping.delimiter else 0  # a workbook's rows carry their numbers
        self._rejected: list[Rejected] = []
        self._listed, self._counts = Counter(), Counter()
        self._zoned: bool | None = None
        self._remarks: list[tuple[int, float | None, str]] = []
        self._read = self._blank = self._undecoded = 0

    def take(self, done: Worked) -> None:
        """Keep a block's good rows, list the rest."""
        block, blank = done.block, int(done.blank.sum())
        rows = block.rows + self._line
        self._line += block.lines
        self._blank += blank
        self._read += rows.size - blank
        self._undecoded += block.undecoded
        self._agree_on_zone(done)
        for index, column, reason, content in done.faults:
            self._refuse(block, int(rows[index]), index, column, reason, content)
        for i, text in done.remarks.items():
            if len(self._remarks) < MOST_REMARKS:
                time = done.times[i] if done.times is not None and done.alive[i] else None
                self._remarks.append((int(rows[i]), time, text[:LONGEST_REMARK]))
        whole = done.alive.all()
        for name, values in {**done.values, "row": rows, "time": done.times}.items():
            if values is not None:
                self._kept[name].append(values if whole else values[done.alive])

    def finish(self) -> Rows:
        """All blocks put together; frees the pieces as it goes."""
        def join(name: str) -> np.ndarray:
            pieces = self._kept.pop(name)
            return np.concatenate(pieces) if pieces else np.empty(0)

        time = join("time") if self._kept["time"] else None
        whole = time is not None and time.dtype.kind == "i"
        counts = {reason: self._counts[reason] for reason in sorted(self._counts)}
        channels = dict(zip(self._names, in_order(join, self._names), strict=True))
        return Rows(join("row").astype(np.int64, copy=False), time if whole else None, None if whole else time,
                    bool(self._zoned), channels, self._remarks,
                    tuple(sorted(self._rejected)), counts, self._read, self._blank, self._undecoded)

    def _agree_on_zone(self, done: Worked) -> None:
        """Stamps with and without a time zone cannot stand in one column: the first row decides."""
        if done.zoned is None or not done.alive.any():
            return
        if self._zoned is None:
            self._zoned = bool(done.zoned[done.alive][0])
        other = (done.zoned != self._zoned) & done.alive
        if other.any():
            done.faults += [(int(i), self._time_column, OTHER_ZONE, None) for i in np.flatnonzero(other)]
            done.alive &= ~other

    def _refuse(self, block: Block, row: int, index: int, column: Column | None, reason: str, content: str | None):
        """Count a refusal and, while there is room, list it with the cell as it stands in the file."""
        label = column.label if column else ""
        self._counts[reason] += 1
        self._listed[label, reason] += 1
        if self._listed[label, reason] > LISTED_PER_REASON:
            return
        if content is None:
            content = block.content(index, column.position if column else None)
        short = content if len(content) <= LONGEST_CONTENT else content[:LONGEST_CONTENT - 1] + "…"
        self._rejected.append(Rejected(row, label, short, reason))
