"""The cells of a log, block by block: a fast path for clean blocks, a careful one for the rest.

A clean block is parsed by the C reader of pandas, all columns at once. A column of a block in which
a cell is no plain number comes back as text and is read cell by cell; what stands there instead of
numbers is learnt, and from then on the C reader knows it as missing. A block whose lines and rows do
not agree (line ends within quotes, null characters) is split row by row. So a million rows, clean or
with a logger's usual words in them, cost what parsing costs.
"""

from __future__ import annotations

import io
from collections.abc import Callable, Iterable
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from engine.measurement.logbook.mapping import Mapping, is_text
from engine.measurement.logbook.text import TextBlock, split_rows

if TYPE_CHECKING:
    import pandas as pd

MOST_WORDS = 200
FEW_HOLES = 0.05  # missing cells per row, below which it is quicker to look at each
LONGEST_STAMP = 40  # bytes; a longer time cell is read, and refused, cell by cell

TOO_MANY_CELLS = "more cells than the heading has columns"
OPEN_QUOTE = "a quote is opened here and never closed"
CUT_OFF = "the file ends within this row"


class Block(NamedTuple):
    """``cells`` by column position: float64 (NaN where empty), "S" bytes (times) or text objects.

    ``rows`` are line numbers counted from the block's first line, of which the block has ``lines``.
    ``spoiled`` are rows that cannot be used as rows: (index, content, reason).
    ``content(index, position)`` is the text of one cell as it stands in the file, with None of the row.
    ``unread`` has by position the texts by row of cells in which a known word stands for a number.
    """

    rows: np.ndarray
    lines: int
    cells: dict[int, np.ndarray]
    spoiled: list[tuple[int, str, str]]
    content: Callable[[int, int | None], str]
    fraction: float
    undecoded: int = 0
    unread: dict[int, dict[int, str]] = {}


class Words:
    """What this log writes where a number is missing ("---"): learnt as it comes up, so that blocks stay fast.

    Threads share it; ``known`` is never changed, only replaced.
    """

    def __init__(self, known: Iterable[str] = ()):
        self.known: frozenset[str] = frozenset()
        self.learn(known)

    def learn(self, cells: Iterable[str]) -> None:
        """Take up cells that are no numbers; those that Python could take for one are never words."""
        new = [c for c in cells if c.strip() and c not in self.known and not _like_a_number(c)]
        self.known |= frozenset(new[:max(MOST_WORDS - len(self.known), 0)])


def _like_a_number(cell: str) -> bool:
    try:
        return not np.isnan(float(cell))
    except ValueError:
        return False


def parse(block: TextBlock, mapping: Mapping, words: Words) -> Block:
    """The rows and cells of one block of text."""
    return _fast(block, mapping, words.known) or _careful(block, mapping)


def _fast(block: TextBlock, mapping: Mapping, words: frozenset[str] = frozenset()) -> Block | None:
    """One pass of the C reader; None when its rows are not the lines of the block."""
    # Null characters, and carriage returns within a line, are matters for the careful way.
    if b"\0" in block.data or (b"\r" in block.data and block.data.count(b"\r") != block.data.count(b"\r\n")):
        return None
    lines = int(np.count_nonzero(np.frombuffer(block.data, np.uint8) == 10)) + (not block.data.endswith(b"\n"))
    stamps = {c.position for ch, c in mapping.used.items() if ch in ("time", "date") and is_text(c.unit)}
    texts = {c.position for ch, c in mapping.used.items() if ch == "remark"}
    numbers = {c.position for c in mapping.used.values()} - texts - stamps
    first = _first_row(block.data, mapping.delimiter)
    usual = max((len(first[k].encode()) for k in stamps if k < len(first)), default=0) + 2
    for stamp_width in (min(usual, LONGEST_STAMP), LONGEST_STAMP):
        kinds = {**dict.fromkeys(texts, str), **dict.fromkeys(stamps, f"S{stamp_width}")}
        frame = _parse(block.data, mapping, len(first), numbers, kinds, words)
        if frame is None or len(frame) != lines:
            return None
        cells = {k: np.ascontiguousarray(frame[k].to_numpy()) for k in stamps}
        if not any(_last_bytes(c).any() for c in cells.values()):
            break  # no cell filled its bytes, so none was cut
    dirty = {k for k in numbers if frame[k].dtype.kind not in "fiu"}
    again = _parse(block.data, mapping, len(first), set(), dict.fromkeys(dirty, str)) if dirty else frame
    if again is None or len(again) != lines:
        return None
    cells.update({k: frame[k].to_numpy(dtype=float) for k in numbers - dirty})
    cells.update({k: _texts(again[k]) for k in dirty})
    cells.update({k: _texts(frame[k]) for k in texts})
    content = _content(block.data, mapping.delimiter)
    spoiled = _over_wide(frame, mapping, content) + _cut_off(block, lines - 1, content, mapping)
    holes = {k: np.flatnonzero(np.isnan(cells[k])) for k in numbers - dirty} if words else {}
    if sum(map(len, holes.values())) >= lines * FEW_HOLES:  # most are empty: only those that are not get looked at
        marks = _parse(block.data, mapping, len(first), set(), {})
        holes = {k: rows[_bytes(marks[k])[rows] != 0] for k, rows in holes.items()}
    unread = {k: {i: text for i in rows.tolist() if (text := content(i, k))} for k, rows in holes.items()}
    return Block(np.arange(lines, dtype=np.int64), lines, cells, spoiled, content, block.fraction, block.spoiled,
                 unread)


def _last_bytes(stamps: np.ndarray) -> np.ndarray:
    return stamps.view(np.uint8).reshape(stamps.size, -1)[:, -1]


def _bytes(column: pd.Series) -> np.ndarray:
    """A column of first bytes: 0 where the cell is empty."""
    return np.ascontiguousarray(column.to_numpy()).view(np.uint8)


def _over_wide(frame: pd.DataFrame, mapping: Mapping, content) -> list[tuple[int, str, str]]:
    width = len(mapping.columns)
    if width not in frame:
        return []
    over = np.flatnonzero(_bytes(frame[width]))
    return [(int(i), content(i, None), TOO_MANY_CELLS) for i in over]


def _first_row(data: bytes, delimiter: str) -> list[str]:
    end = data.find(b"\n")
    line = data[:end if end >= 0 else len(data)].decode("utf-8", "replace")
    return next(split_rows([line], delimiter))[1] or []


def _parse(data: bytes, mapping: Mapping, first_width: int, numbers: set[int],
           kinds: dict[int, str | type], words: frozenset[str] = frozenset()) -> pd.DataFrame | None:
    """The table, of columns neither in ``numbers`` nor in ``kinds`` the first byte only; ``words`` are no numbers.

    Where rows are wider than the heading, one column more is read to find them. None where that is
    too narrow as well (a first row that is wider would be cut without an error), or a quote stays open.
    """
    import pandas as pd  # only when a log is read: who reads none need not wait for it

    spaced = mapping.delimiter.encode() + b" " in data  # the reader is slower when it must look for them
    missing = ["", *words]
    for width in (len(mapping.columns), len(mapping.columns) + 1):
        if first_width > width:
            continue
        try:
            return pd.read_csv(
                io.BytesIO(data), sep=mapping.delimiter, decimal=mapping.decimal, header=None, engine="c",
                names=list(range(width)), dtype={k: kinds.get(k, "S1") for k in range(width) if k not in numbers},
                index_col=False, low_memory=False, keep_default_na=False, na_values=dict.fromkeys(numbers, missing),
                skip_blank_lines=False, skipinitialspace=spaced)
        except (pd.errors.ParserError, pd.errors.EmptyDataError, ValueError, OverflowError):
            continue
    return None


def _texts(column: pd.Series) -> np.ndarray:
    texts = column.to_numpy(dtype=object, copy=True)
    texts[column.isna().to_numpy()] = ""
    return texts


def _content(data: bytes, delimiter: str) -> Callable[[int, int | None], str]:
    """Look up the text of a cell (or, with None, of the row); where lines end is only looked for when asked."""
    ends = None

    def content(index: int, position: int | None) -> str:
        nonlocal ends
        if ends is None:
            ends = np.append(np.flatnonzero(np.frombuffer(data, np.uint8) == 10), len(data))
        start = int(ends[index - 1]) + 1 if index else 0
        line = data[start:int(ends[index])].decode("utf-8", "replace").rstrip("\r")
        if position is None:
            return line
        cells = line.split(delimiter) if '"' not in line else next(split_rows([line], delimiter))[1] or [line]
        return cells[position].strip() if position < len(cells) else ""

    return content


def _cut_off(block: TextBlock, index: int, content, mapping: Mapping) -> list[tuple[int, str, str]]:
    """The last row of a file that was cut in the middle of a write: too few cells and no line end."""
    if not block.last or block.data.endswith(b"\n"):
        return []
    line = content(index, None)
    needed = max(c.position for ch, c in mapping.used.items() if ch != "remark")
    before = content(index - 1, None).count(mapping.delimiter) if index else needed
    if not line.strip() or line.count(mapping.delimiter) >= min(needed, before):
        return []
    return [(index, line, CUT_OFF)]


def _careful(block: TextBlock, mapping: Mapping) -> Block:
    """Row by row, for the blocks that the fast way cannot be trusted with."""
    text = block.data.decode("utf-8", "replace")
    lines = text.split("\n")
    if lines[-1] == "":
        lines.pop()
    starts, table = [], []
    for start, cells in split_rows([line.removesuffix("\r") for line in lines], mapping.delimiter):
        starts.append(start)
        table.append(cells)
    width = len(mapping.columns)
    spoiled = []
    for i, cells in enumerate(table):
        if cells is None:
            spoiled.append((i, lines[starts[i]], OPEN_QUOTE))
            table[i] = []
        elif any(c.strip() for c in cells[width:]):
            spoiled.append((i, mapping.delimiter.join(cells), TOO_MANY_CELLS))

    def content(index: int, position: int | None) -> str:
        cells = table[index]
        if position is None:
            return mapping.delimiter.join(cells)
        return cells[position].strip() if position < len(cells) else ""

    if table and not any(i == len(table) - 1 for i, _, _ in spoiled):
        spoiled += _cut_off(block, len(table) - 1, content, mapping)
    columns = {}
    for column in mapping.used.values():
        k = column.position
        columns[k] = np.array([c[k] if k < len(c) else "" for c in table], dtype=object)
    return Block(np.array(starts, dtype=np.int64), len(lines), columns, spoiled, content, block.fraction, block.spoiled)
