"""A log's bytes: where they come from, which characters they are, where lines and cells part.

Whatever the encoding, lines are handed on as UTF-8 in blocks of a few megabytes, so that a file of
any size is read in bounded memory. Nothing is decoded in silence: bytes that are no characters in
the encoding found are replaced by the sign U+FFFD, which no number and no time contains, and the
reader is told.
"""

from __future__ import annotations

import codecs
import csv
import io
import os
import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO, NamedTuple

from engine.steam.errors import Fault, InputError

BLOCK_BYTES = 4 << 20
HEAD_BYTES = 256 << 10
MOST_BYTES = 2 << 30
LONGEST_LINE = 1 << 20
LEAST_SHARE = 0.2  # of the lines that a delimiter must cut into one number of cells
QUOTE_LINES = 20  # a quoted cell may run over so many lines; beyond that the quote was never closed
HEAD_LINES = 300  # of the head; decisions need no more
SPOTS, SPOT_BYTES = 16, 1 << 10
DELIMITERS = "\t;|,"
ENCODINGS = ("utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32", "cp1252")
ALLOWED = "a table as text (CSV, TSV, semicolons or bars between the cells) or an XLSX workbook"

_BOMS = ((codecs.BOM_UTF8, "utf-8-sig"), (codecs.BOM_UTF32_LE, "utf-32"), (codecs.BOM_UTF32_BE, "utf-32"),
         (codecs.BOM_UTF16_LE, "utf-16"), (codecs.BOM_UTF16_BE, "utf-16"))
# Beginnings of files that are no text, and what to do with each.
_MAGIC = ((b"\xd0\xcf\x11\xe0", "an old binary workbook (XLS)", "save it as XLSX or CSV"),
          (b"%PDF", "a PDF document", "export the table itself as CSV or XLSX"),
          (b"\x1f\x8b", "a gzip archive", "unpack it first"), (b"7z\xbc\xaf", "a 7z archive", "unpack it first"),
          (b"Rar!", "a RAR archive", "unpack it first"), (b"BZh", "a bzip2 archive", "unpack it first"),
          (b"\xfd7zXZ", "an xz archive", "unpack it first"), (b"PAR1", "a Parquet file", "export it as CSV"),
          (b"\x89PNG", "a picture", "type the readings, or export them from the logger"),
          (b"\xff\xd8\xff", "a picture", "type the readings, or export them from the logger"),
          (b"SQLite format", "a database", "export the table as CSV"))


def refuse(source: str, got: object, why: str = "", hint: str = "", needs: str = ALLOWED) -> InputError:
    """The error for a log that cannot be read at all."""
    return InputError(Fault(f"log {source}", got, "", needs, why, hint, name="log"))


@dataclass(frozen=True)
class Source:
    """A log file or its bytes: named, of known size, opened as often as needed."""

    name: str
    size: int
    _path: Path | None = None
    _data: bytes | None = None

    def open(self) -> BinaryIO:
        return self._path.open("rb") if self._path else io.BytesIO(self._data)

    def read(self, start: int, count: int) -> bytes:
        with self.open() as file:
            file.seek(start)
            return file.read(count)


def source_of(path_or_bytes) -> Source:
    """A path (str or Path), bytes, or a binary file object -> Source; refuses what is none or is empty."""
    given = path_or_bytes
    if isinstance(given, Source):
        return given
    if isinstance(given, (str, os.PathLike)):
        source = _from_path(Path(given))
    elif isinstance(given, (bytes, bytearray, memoryview)):
        source = Source("from memory", len(bytes(given)), _data=bytes(given))
    elif hasattr(given, "read") and hasattr(given, "seek"):
        given.seek(0)
        data = given.read(MOST_BYTES + 1)
        if not isinstance(data, bytes):
            raise refuse("given", type(given).__name__, "a text stream has lost its encoding",
                         "open the file in binary mode", "a file opened in binary mode")
        source = Source(Path(str(getattr(given, "name", "from memory"))).name, len(data), _data=data)
    else:
        raise refuse("given", type(given).__name__, needs="a path, bytes or a binary file")
    if source.size == 0:
        raise refuse(source.name, "an empty file", hint="check that the logger had finished writing")
    if source.size > MOST_BYTES:
        raise refuse(source.name, f"{source.size / 2**30:.1f} GiB", hint="split the file by days",
                     needs=f"at most {MOST_BYTES / 2**30:.0f} GiB")
    return source


def _from_path(path: Path) -> Source:
    try:
        if not path.is_file():
            raise refuse(str(path), "no such file" if not path.exists() else "a folder or device",
                         hint="check the path", needs="the path of a file")
        with path.open("rb"):
            return Source(path.name, path.stat().st_size, _path=path)
    except (OSError, ValueError) as error:  # ValueError: a null character in the path
        if isinstance(error, InputError):
            raise
        raise refuse(repr(str(path)), getattr(error, "strerror", None) or str(error), hint="check path and permissions",
                     needs="a readable file") from None


def find_encoding(source: Source) -> str:
    """The encoding by byte-order mark, by the pattern of null bytes, or by what decodes."""
    head = source.read(0, HEAD_BYTES)
    for bom, encoding in _BOMS:
        if head.startswith(bom):
            return encoding
    for magic, what, hint in _MAGIC:
        if head.startswith(magic):
            raise refuse(source.name, what, hint=hint)
    if b"\0" in head:
        even, odd = head[0::2].count(0), head[1::2].count(0)
        if max(even, odd) > 0.35 * len(head) / 2 and min(even, odd) < 0.05 * max(even, odd):
            return "utf-16-le" if odd > even else "utf-16-be"
    controls = len(head) - len(head.translate(None, bytes(set(range(32)) - set(b"\t\n\r\f"))))
    if controls > max(3, 0.01 * len(head)):
        raise refuse(source.name, "a binary file", f"{controls} of its first {len(head)} bytes are control characters",
                     "export the readings from the logger's program as CSV or XLSX")
    return "utf-8" if _is_utf8(head) else "cp1252"


def _is_utf8(raw: bytes) -> bool:
    """Whether bytes read as UTF-8; a stray byte among good characters does not make them another code."""
    text = codecs.getincrementaldecoder("utf-8")("replace").decode(raw)  # not final: the last one may be cut
    wrong = text.count("\ufffd")
    return wrong == 0 or wrong <= sum(not c.isascii() for c in text) - wrong


class TextBlock(NamedTuple):
    """Whole lines as UTF-8 bytes, each ended by a line feed but perhaps the file's last."""

    data: bytes
    fraction: float
    spoiled: int  # bytes that are no characters
    last: bool


def text_blocks(source: Source, encoding: str, delimiter: str, first_line: int = 1,
                size: int = BLOCK_BYTES) -> Iterator[TextBlock]:
    """The log from ``first_line`` (from 1) on, as UTF-8 in blocks of whole rows."""
    decoder = _Recoder(encoding)
    rest, done, skip = b"", 0, first_line - 1
    whole_lines = encoding in ("utf-8", "utf-8-sig", "cp1252")  # a line feed is one byte there
    with source.open() as file:
        while True:
            raw = file.read(size)
            raw += file.readline(LONGEST_LINE) if whole_lines and raw else b""
            done += len(raw)
            last = done >= source.size or not raw
            text = decoder.recode(raw, last)
            text = rest + text if rest else text
            cut = len(text) if last else _end_of_rows(text, delimiter)
            rest, text = text[cut:], text[:cut]
            if len(rest) > max(size, LONGEST_LINE):
                raise refuse(source.name, f"a line of more than {len(rest) >> 20} MiB",
                             "a table has a line end after every row", "export the log again as CSV")
            if skip and text:
                skip, text = _without_lines(text, skip)
            if text:
                yield TextBlock(text, min(done / source.size, 1.0), decoder.take_spoiled(), last)
            if last:
                return


def _without_lines(text: bytes, count: int) -> tuple[int, bytes]:
    """Lines still to be skipped, and the text after those that were."""
    at = 0
    while count and at < len(text):
        at = text.find(b"\n", at) + 1 or len(text)
        count -= 1
    return count, text[at:]


def _end_of_rows(text: bytes, delimiter: str) -> int:
    """End of the last whole line, moved back to before a row whose quoted cell is still open there.

    Where rows start is not known in the middle of a text, but a few lines on they are in step again.
    """
    cut = text.rfind(b"\n") + 1
    start = cut
    for _ in range(2 * QUOTE_LINES):
        start = text.rfind(b"\n", 0, max(start - 1, 0)) + 1
    if text.find(b'"', start, cut) < 0:
        return cut
    lines = text[start:cut].decode("utf-8", "replace").split("\n")[:-1]
    i = 0
    while i < len(lines):
        _, count, is_open = _row_at(lines, i, delimiter)
        if is_open and count < QUOTE_LINES:
            return start + len("\n".join(lines[:i]).encode()) + (i > 0)
        i += 1 if is_open else count
    return cut


class _Recoder:
    """Bytes in the file's encoding -> UTF-8 with line feeds, counting what could not be decoded."""

    def __init__(self, encoding: str):
        self.encoding, self.spoiled, self._ascii, self._return = encoding, 0, True, False
        self._wide = codecs.getincrementaldecoder(encoding)("replace") if encoding.startswith("utf-") else None

    def recode(self, raw: bytes, last: bool) -> bytes:
        return self._line_feeds(self._utf8(raw, last), last)

    def _utf8(self, raw: bytes, last: bool) -> bytes:
        if self.encoding == "utf-8" and raw.isascii() and not self._wide.getstate()[0]:
            return raw
        if self.encoding == "utf-8" and self._ascii:
            if not _is_utf8(raw):  # plain ASCII until here: so it was the old single-byte code all along
                self.encoding, self._wide = "cp1252", None
            self._ascii = False
        text = self._wide.decode(raw, last) if self._wide else raw.decode("cp1252", "replace")
        self.spoiled += text.count("\ufffd")
        return text.encode("utf-8", "replace")

    def _line_feeds(self, data: bytes, last: bool) -> bytes:
        """Lines that end with a carriage return alone, as old machines write them."""
        if self._return or (b"\r" in data and b"\n" not in data and len(data) > 1):
            self._return = True
            return data.replace(b"\r\n", b"\n").replace(b"\r", b"\n")
        return data

    def take_spoiled(self) -> int:
        count, self.spoiled = self.spoiled, 0
        return count


def sample_lines(source: Source, encoding: str) -> tuple[list[str], list[str]]:
    """The head of the log, and lines from spots all over it, down to its end."""
    head = source.read(0, HEAD_BYTES)
    if source.size <= HEAD_BYTES:
        lines = _recoded(head, encoding, whole=True)
        rest = lines[HEAD_LINES:]
        return lines[:HEAD_LINES], rest[len(rest) - 1::-max(1, len(rest) // HEAD_LINES)][::-1]
    lines = _recoded(head, encoding, whole=False, most=HEAD_LINES)
    spots = []
    if not encoding.startswith(("utf-16", "utf-32")):  # there a spot could begin within a character
        for place in range(SPOTS + 1):
            start = max(0, HEAD_BYTES - SPOT_BYTES + (source.size - HEAD_BYTES) * place // SPOTS)
            spots += _recoded(source.read(start, SPOT_BYTES), encoding.replace("-sig", ""), whole=False)[1:-1]
    return lines, spots


def _recoded(raw: bytes, encoding: str, *, whole: bool, most: int = -1) -> list[str]:
    """The lines of some bytes, without the last one where it may be cut."""
    lines = _Recoder(encoding).recode(raw, whole).decode("utf-8", "replace").split("\n", most)
    return [line.rstrip("\r") for line in (lines if whole else lines[:-1])]


def split_rows(lines: list[str], delimiter: str) -> Iterator[tuple[int, list[str] | None]]:
    """(index of its first line, cells) of each row; cells None where a quote is opened and never closed.

    >>> list(split_rows(['a;"b', 'c";d', 'e;f'], ";"))
    [(0, ['a', 'b\\nc', 'd']), (2, ['e', 'f'])]
    """
    i = 0
    while i < len(lines):
        cells, count, is_open = _row_at(lines, i, delimiter)
        yield i, None if is_open else cells
        i += 1 if is_open else count


def _row_at(lines: list[str], i: int, delimiter: str) -> tuple[list[str], int, bool]:
    """(cells, lines it takes, whether its quote is still open after them) of the row that starts at ``lines[i]``."""
    line = lines[i]
    if '"' not in line:
        return line.split(delimiter), 1, False
    for count in range(1, min(QUOTE_LINES, len(lines) - i) + 1):
        cells, is_open = _quoted("\n".join(lines[i:i + count]), delimiter)
        if not is_open:
            break
    if cells is None and count == 1 and not is_open:
        cells = line.split(delimiter)  # quotes that are inch signs or the like: they quote nothing
    return cells or [], count, cells is None


def _quoted(text: str, delimiter: str) -> tuple[list[str] | None, bool]:
    """(cells, whether a quote is still open); cells None where the quotes make no sense."""
    try:
        rows = list(csv.reader([text], delimiter=delimiter, skipinitialspace=True, strict=True))
    except csv.Error as error:
        return None, "unexpected end" in str(error)
    return (rows[0] if len(rows) == 1 else None), False


def find_delimiters(lines: list[str], source: str) -> list[str]:
    """The signs that may stand between the cells, the one that cuts most lines alike first.

    Between equals a tab is believed before a semicolon, a bar and a comma, because the commas of a
    semicolon file may be decimal signs.
    """
    told = re.fullmatch(r'"?sep=(.)"?', lines[0].strip("\ufeff \r")) if lines else None
    if told and told[1] in DELIMITERS:
        return [told[1]]
    lines = [line for line in lines if line.strip()][-200:]
    shares = {}
    for delimiter in DELIMITERS:
        counts = Counter(len(cells) for _, cells in split_rows(lines, delimiter) if cells is not None)
        shares[delimiter] = max((n / len(lines) for width, n in counts.items() if width > 1), default=0.0)
    possible = [d for d in sorted(DELIMITERS, key=lambda d: -round(shares[d], 1)) if shares[d] >= LEAST_SHARE]
    if not possible:
        got = f"lines without a common delimiter, such as {lines[-1][:60]!r}" if lines else "blank lines"
        raise refuse(source, got, "no tab, semicolon, bar or comma parts enough lines into the same number of cells",
                     "export the log with one of these between the cells")
    return possible
