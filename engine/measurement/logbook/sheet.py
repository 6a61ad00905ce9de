"""A workbook (XLSX) as a log: guarded against what a small file can unpack to, values only.

Formulas are never computed: a formula cell gives the value that was stored with it, or is listed when
none was. Before anything is unpacked the sizes that the archive states are checked, and a document type
declaration, with which a few bytes of XML can grow without end, is refused.
"""

from __future__ import annotations

import datetime as dt
import itertools
import zipfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager

import numpy as np

from engine.measurement.logbook.mapping import Mapping
from engine.measurement.logbook.propose import Layout, Proposal, Row, propose
from engine.measurement.logbook.sheet_rows import Formats, sheet_rows
from engine.measurement.logbook.table import TOO_MANY_CELLS, Block
from engine.measurement.logbook.text import HEAD_BYTES, Source, refuse
from engine.steam.errors import InputError

MOST_UNPACKED = 1 << 30  # bytes, all parts together
MOST_STRINGS = 128 << 20  # bytes of the shared texts, which are held in memory
MOST_RATIO = 300  # unpacked over packed; honest sheets stay below about 60
MOST_PARTS = 5_000
MOST_COLUMNS = 256
SPARE_COLUMNS = 4  # beyond the heading, where cells too many are looked for
_SPARE = [None] * SPARE_COLUMNS
ROWS_AT_ONCE = 20_000
SAMPLE_ROWS = 400
ZIP_MAGIC = b"PK\x03\x04"


def is_workbook(source: Source) -> bool:
    """Whether the bytes are a ZIP archive; anything in it but a workbook is refused."""
    return source.read(0, 4) == ZIP_MAGIC


@contextmanager
def _guarded(source: Source, what: str) -> Iterator[None]:
    """Whatever the unpacking and the parsing of a hostile file raise becomes one refusal."""
    try:
        yield
    except InputError:
        raise
    except Exception as error:
        raise refuse(source.name, f"{what} ({type(error).__name__}: {error})",
                     hint="open it in the spreadsheet program and save it again, unlocked, or as CSV") from None


def check_archive(source: Source) -> None:
    """Refuse archives that are no workbook or unpack to more than a log can be."""
    with _guarded(source, "a damaged or locked archive"), source.open() as file, zipfile.ZipFile(file) as archive:
        parts = archive.infolist()
        _check_sizes(source, parts)
        for part in parts:
            if part.filename.lower().endswith((".xml", ".rels")):
                with archive.open(part) as content:
                    if b"<!DOCTYPE" in content.read(HEAD_BYTES).replace(b"\0", b"").upper():
                        raise refuse(source.name, f"a document type declaration in {part.filename}",
                                     "no spreadsheet program writes one", "save the readings again as XLSX or CSV")


def _check_sizes(source: Source, parts: list[zipfile.ZipInfo]) -> None:
    names = {p.filename for p in parts}
    if "xl/workbook.xml" not in names:
        what = "a text document or another workbook format" if "mimetype" in names else "a ZIP archive"
        raise refuse(source.name, what, "there is no XLSX workbook in it", "unpack it, or save as XLSX or CSV")
    if len(parts) > MOST_PARTS:
        raise refuse(source.name, f"a workbook of {len(parts)} parts", hint="save the readings as CSV",
                     needs=f"at most {MOST_PARTS} parts")
    total = sum(p.file_size for p in parts)
    worst = max(parts, key=lambda p: p.file_size / max(p.compress_size, 1))
    ratio = worst.file_size / max(worst.compress_size, 1)
    strings = sum(p.file_size for p in parts if p.filename.lower().endswith("sharedstrings.xml"))
    if total > MOST_UNPACKED or (ratio > MOST_RATIO and worst.file_size > 10 << 20) or strings > MOST_STRINGS:
        got = f"a workbook that unpacks to {total / 2**20:.0f} MiB, one part {ratio:.0f}-fold"
        raise refuse(source.name, got, "it would fill the memory", "save the readings alone, or as CSV",
                     f"at most {MOST_UNPACKED >> 20} MiB unpacked, {MOST_STRINGS >> 20} MiB of it texts, "
                     f"no part more than {MOST_RATIO}-fold")


class Workbook:
    """An open workbook; use as a context manager."""

    def __init__(self, source: Source):
        self._source = source

    def __enter__(self):
        # only when a workbook is read: who reads none need not wait for it
        from openpyxl.reader.excel import ExcelReader
        from openpyxl.styles.stylesheet import apply_stylesheet

        self._file = self._source.open()
        try:
            with _guarded(self._source, "a workbook that cannot be opened"):
                book = ExcelReader(self._file, read_only=True, data_only=True, keep_links=False)
                book.read_manifest()
                book.read_strings()
                book.read_workbook()
                apply_stylesheet(book.archive, book.wb)
                self._archive = book.archive
                self._parts = {sheet.name: rel.target for sheet, rel in book.parser.find_sheets()
                               if rel.target in book.valid_files and "chartsheet" not in rel.Type}
                self._formats = Formats(book.shared_strings, frozenset(book.wb._date_formats),
                                        frozenset(book.wb._timedelta_formats), book.wb.epoch)
        except InputError:
            self._file.close()
            raise
        return self

    def __exit__(self, *_):
        self._archive.close()
        self._file.close()

    @property
    def sheets(self) -> list[str]:
        return list(self._parts)

    def rows(self, sheet: str, first: int = 1, columns: int = MOST_COLUMNS,
             seen: Callable[[float], object] = lambda done: None) -> Iterator[tuple[int, list]]:
        """(row number, values of that many columns) of a sheet's rows; ``seen`` is told the part read, 0 to 1."""
        if sheet not in self._parts:
            raise refuse(self._source.name, f"no sheet {sheet!r}", hint="choose one of the workbook's sheets",
                         needs="one of: " + ", ".join(self.sheets))
        with _guarded(self._source, f"a damaged sheet {sheet!r}"), self._archive.open(self._parts[sheet]) as part:
            size = max(self._archive.getinfo(self._parts[sheet]).file_size, 1)
            for number, values in sheet_rows(part, self._formats, first, columns):
                if number % ROWS_AT_ONCE == 0:
                    seen(min(part.tell() / size, 1.0))
                yield number, values


def cell_text(value: object) -> str:
    """A cell's value as a person would have written it."""
    if value is None:
        return ""
    if isinstance(value, dt.datetime):
        at_midnight = (value.hour, value.minute, value.second, value.microsecond) == (0, 0, 0, 0)
        return value.date().isoformat() if at_midnight else value.isoformat(sep=" ")
    if isinstance(value, (dt.date, dt.time)):
        return value.isoformat()
    if isinstance(value, dt.timedelta):
        seconds = value / dt.timedelta(seconds=1)
        return f"{int(seconds // 3600):02d}:{int(seconds // 60 % 60):02d}:{int(seconds % 60):02d}"
    if isinstance(value, float):
        return f"{value:.15g}"
    return str(value)


def propose_sheet(source: Source, layout: Layout) -> Proposal:
    """The proposal of the sheet told, or of the one in which most channels are recognised, the first of equals."""
    best: Proposal | None = None
    faults: list[InputError] = []
    with Workbook(source) as book:
        sheets = book.sheets
        for sheet in [layout.sheet] if layout.sheet else sheets:
            rows: list[Row] = []
            typed: list[str] = []
            for number, values in itertools.islice(book.rows(sheet), SAMPLE_ROWS):
                cells = [cell_text(v) for v in values]
                while cells and not cells[-1]:
                    cells.pop()
                rows.append((number, cells))
                typed += [v for v in values if isinstance(v, str)]
            if not any(cells for _, cells in rows):
                continue
            try:
                found = propose(rows, [], source.name, layout._replace(sheet=sheet, delimiter="", encoding=""), typed)
            except InputError as error:
                faults.append(error)
                continue
            if best is None or len(found.mapping.used) > len(best.mapping.used):
                best = found
    if best is None:
        raise faults[0] if faults else refuse(source.name, "a workbook of empty sheets", hint="save the readings again")
    others = [s for s in sheets if s != best.mapping.sheet]
    note = (f"read from sheet {best.mapping.sheet!r}; not read: {', '.join(others)}",) if others else ()
    return best._replace(notes=(*best.notes, *note))


def sheet_table(source: Source, mapping: Mapping) -> Iterator[Block]:
    """The rows of a workbook's sheet below its heading."""
    done = 0.0

    def seen(part: float) -> None:
        nonlocal done
        done = part

    with Workbook(source) as book:
        rows = book.rows(mapping.sheet, mapping.first_line, len(mapping.columns) + SPARE_COLUMNS, seen)
        while chunk := list(itertools.islice(rows, ROWS_AT_ONCE)):
            yield _block(chunk, mapping, done)


def _block(chunk: list[tuple[int, list]], mapping: Mapping, fraction: float) -> Block:
    rows = np.array([number for number, _ in chunk], dtype=np.int64)
    width = len(mapping.columns)
    cells = {}
    for column in mapping.used.values():
        values = np.empty(len(chunk), dtype=object)
        values[:] = [v[column.position] for _, v in chunk]
        cells[column.position] = values
    spoiled = [(i, cell_text(next(v for v in values[width:] if v is not None)), TOO_MANY_CELLS)
               for i, (_, values) in enumerate(chunk) if values[width:] != _SPARE]

    def content(index: int, position: int | None) -> str:
        values = chunk[index][1]
        if position is None:
            return " | ".join(map(cell_text, values)).rstrip(" |")
        return cell_text(values[position])

    return Block(rows, 0, cells, spoiled, content, fraction)
