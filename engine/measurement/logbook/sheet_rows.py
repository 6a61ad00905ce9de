"""The rows of a workbook's sheet, streamed: a small reader of the sheet's XML.

What openpyxl knows of a workbook (sheets, shared texts, which styles are dates) is taken from it; the
cells themselves are read here, in one pass and at a quarter of the cost, since a log of a million
rows has five million of them. A cell is None, a number, a text, a truth value, a date, time or
duration, or an ``UncomputedFormula`` where a formula was stored without its value.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator
from math import isfinite
from typing import BinaryIO, NamedTuple
from xml.parsers import expat

MOST_ROWS = 1 << 20  # of a sheet, by the format itself
_CHUNK = 1 << 18  # bytes of XML at a time
_NAMESPACES = ("http://schemas.openxmlformats.org/spreadsheetml/2006/main", "http://purl.oclc.org/ooxml/spreadsheetml/main")
_KNOWN = {f"{space} {tag}": tag for space in _NAMESPACES for tag in ("row", "c", "v", "f", "t", "rPh")}
_LONGEST_WHOLE = 15  # digits that a double holds; longer ones are read as the double they were stored as


class UncomputedFormula(str):
    """The text of a formula cell that carries no stored value."""

    __slots__ = ()


class Formats(NamedTuple):
    """What the cells of a sheet refer to: shared texts, the styles that are dates and durations, the day 0."""

    strings: list[str]
    dates: frozenset[int]
    durations: frozenset[int]
    epoch: dt.datetime


def sheet_rows(part: BinaryIO, formats: Formats, first: int, columns: int) -> Iterator[tuple[int, list]]:
    """(row number, values of that many columns) of the rows from ``first`` on, those without cells among them.

    Raises ValueError or expat's error for what is no sheet.
    """
    reader = _Reader(formats, columns)
    due = first
    while True:
        chunk = part.read(_CHUNK)
        reader.parse(chunk)
        for number, values in reader.take():
            if number < first:
                continue
            for missing in range(due, number):
                yield missing, [None] * columns
            yield number, values
            due = number + 1
        if not chunk:
            return


class _Reader:
    """Handlers for expat; the rows finished so far wait in ``rows``."""

    def __init__(self, formats: Formats, columns: int):
        self._formats, self._columns = formats, columns
        self._rows: list[tuple[int, list]] = []
        self._row = 0
        self._values: list | None = None
        self._column = -1
        self._places: dict[str, int] = {}
        self._kind, self._style = "n", "0"
        self._dates = frozenset(map(str, formats.dates))
        self._text: list[str] = []
        self._open = ""  # the element whose text is being taken
        self._value: str | None = None
        self._formula: str | None = None
        self._reading_aid = False  # the pronunciation of an inline text
        parser = expat.ParserCreate(namespace_separator=" ")
        parser.buffer_text = True
        parser.StartElementHandler, parser.EndElementHandler = self._start, self._end
        parser.CharacterDataHandler = self._characters
        parser.StartDoctypeDeclHandler = self._doctype
        self._parser = parser

    def parse(self, chunk: bytes) -> None:
        self._parser.Parse(chunk, not chunk)

    def take(self) -> list[tuple[int, list]]:
        rows, self._rows = self._rows, []
        return rows

    def _doctype(self, *_) -> None:
        raise ValueError("a document type declaration")

    def _characters(self, text: str) -> None:
        if self._open:
            self._text.append(text)

    def _start(self, name: str, attributes: dict[str, str]) -> None:
        tag = _KNOWN.get(name)
        if tag == "c":
            self._kind, self._style = attributes.get("t", "n"), attributes.get("s", "0")
            self._column = self._place(attributes["r"]) if "r" in attributes else self._column + 1
            self._value = self._formula = None
        elif tag in ("v", "f", "t"):
            self._open, self._text = ("" if self._reading_aid else tag), []
        elif tag == "row":
            number = int(float(attributes["r"])) if "r" in attributes else self._row + 1
            if not self._row < number <= MOST_ROWS:
                raise ValueError(f"row {number} after row {self._row}")
            self._row, self._values, self._column = number, [None] * self._columns, -1
        elif tag == "rPh":
            self._reading_aid = True

    def _end(self, name: str) -> None:
        tag = _KNOWN.get(name)
        if tag == "c":
            if self._values is not None and 0 <= self._column < self._columns:
                self._values[self._column] = self._cell()
        elif tag == "v":
            self._value, self._open = "".join(self._text), ""
        elif tag == "row":
            self._rows.append((self._row, self._values))
            self._values = None
        elif tag == "t":
            if self._open:
                self._value = (self._value or "") + "".join(self._text)
            self._open = ""
        elif tag == "f":
            self._formula, self._open = "=" + "".join(self._text), ""
        elif tag == "rPh":
            self._reading_aid = False

    def _place(self, reference: str) -> int:
        """Column of a cell, from 0, by its reference: "B7" is in column 1."""
        letters = reference.rstrip("0123456789")
        place = self._places.get(letters)
        if place is None:
            if not (letters.isascii() and letters.isalpha() and len(letters) <= 3):
                raise ValueError(f"a cell {reference!r}")
            place = 0
            for letter in letters.upper():
                place = 26 * place + ord(letter) - 64
            self._places[letters] = place = place - 1
        return place

    def _cell(self) -> object:
        text, kind = self._value, self._kind
        if not text:  # a formula whose value is an empty text has one
            without = self._formula is not None and not (kind == "str" and text == "")
            return UncomputedFormula(self._formula) if without else None
        if kind == "n":
            return self._number(text)
        if kind == "s":
            return self._formats.strings[int(text)]
        if kind == "b":
            return text.strip() not in ("0", "false")
        if kind == "d":
            from openpyxl.utils.datetime import from_ISO8601  # rare: most programs store numbers
            return from_ISO8601(text)
        return text  # "str", "inlineStr", and the words of errors

    def _number(self, text: str) -> object:
        if self._style in self._dates:
            from openpyxl.utils.datetime import from_excel
            try:
                return from_excel(float(text), self._formats.epoch,
                                  timedelta=int(self._style) in self._formats.durations)
            except (OverflowError, ValueError):
                return "#VALUE!"  # as the spreadsheet program shows a date that there is not
        if len(text) <= _LONGEST_WHOLE and text.isdecimal():
            return int(text)
        value = float(text)
        return value if isfinite(value) else text
