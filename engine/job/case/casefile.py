"""The case as a file and as a link: written in full, read with suspicion."""

from __future__ import annotations

import base64
import json
import math
import zlib
from collections import Counter

from engine import __version__
from engine.job.case.case import BLANK, Case, Value, entry_faults, faults_of
from engine.job.case.fields import FIELDS
from engine.job.case.rows import QUANTITY, TABLE, Entry, Field, Row
from engine.steam.arrays import shortened
from engine.steam.errors import Fault, InputError
from engine.steam.units import ALIASES

FORMAT, SCHEMA = "steam quality case", 1
MAX_BYTES, MAX_RECORD = 5_000_000, 20_000_000
MAX_TEXT = 4_000
LISTED = 20  # faults spelled out
_LINK_BYTES = 200_000


def _refusal(what: str, got: object, needs: str, hint: str = "", why: str = "") -> InputError:
    return InputError(Fault(what, got[:120] if isinstance(got, str) else shortened(got), "", needs, why, hint))


def _as_json(value: Value):
    if isinstance(value, Entry):
        row = {"value": value.value, "unit": value.unit}
        return {**row, "basis": value.basis} if value.basis else row
    if isinstance(value, tuple):  # a table; empty cells are left out
        return [{name: _as_json(cell) for name, cell in row.cells if cell not in (None, "")} for row in value]
    return value


def to_json(case: Case) -> str:
    """The whole case as JSON text, with format, schema and program version."""
    document = {"format": FORMAT, "schema": SCHEMA, "program": __version__,
                "values": {name: _as_json(value) for name, value in case.values.items()}}
    return json.dumps(document, ensure_ascii=False, indent=1, allow_nan=False) + "\n"


def from_json(data: bytes | str) -> Case:
    """Read a case file. InputError with the reason for anything that is not a case this program can use."""
    if len(data) > MAX_BYTES:
        raise _refusal("case file", f"{len(data)} bytes", f"at most {MAX_BYTES} bytes", _SAVED)
    try:
        text = data.decode() if isinstance(data, bytes) else data
        document = _parsed(text.removeprefix("\ufeff"))
    except UnicodeDecodeError as error:
        kind, hint = _kind_of(data)
        raise _refusal("case file", kind or "bytes that are not text", "a JSON file in UTF-8", hint) from error
    except (ValueError, RecursionError) as error:
        kind, hint = _kind_of(data)
        raise _refusal("case file", kind or _first_line(error), "a JSON file as saved by this program",
                       hint) from error
    return _from_document(document, "case file")


_SAVED = "open the file as it was saved, or save the case once more"
_KINDS = {  # first bytes of what is taken for a case now and then
    b"PK\x03\x04": ("a ZIP archive or a workbook", "unpack it, and open the case or the record in it; logs go to the "
                    "Readings page"),
    b"\x1f\x8b": ("a gzip archive", "unpack it, and open the case in it"),
    b"\xff\xfe": ("text in UTF-16", "save it as UTF-8"), b"\xfe\xff": ("text in UTF-16", "save it as UTF-8"),
    b"%PDF": ("a PDF document", "open the case file or the HTML record instead"),
    b"<": ("a web page", "if it is a record of this program, its name must end in .html"),
}


def _kind_of(data: bytes | str) -> tuple[str, str]:
    """What a file that is no case looks like, and what to do with it."""
    start = data[:64].encode(errors="replace") if isinstance(data, str) else data[:64]
    return next((told for first, told in _KINDS.items() if start.lstrip().startswith(first)), ("", _SAVED))


def _parsed(text: str):
    """JSON in which every name stands once, and every number is one."""
    return json.loads(text, parse_constant=_no_constant, object_pairs_hook=_once)


def _once(pairs: list[tuple[str, object]]) -> dict[str, object]:
    read = dict(pairs)
    if len(read) < len(pairs):
        twice = Counter(name for name, _ in pairs).most_common(1)[0][0]
        raise ValueError(f"“{twice[:40]}” twice in one place")
    return read


BLOCK = '<script type="application/json" id="{}">'  # of a record; a browser neither shows nor runs it


def from_record(data: bytes | str) -> Case:
    """The case that a record holds. InputError with the reason where the page holds none that can be used."""
    return from_json(block_of(data, "case"))


def block_of(data: bytes | str, name: str) -> str:
    """The text of a named block of data in a record. InputError where there is none."""
    if len(data) > MAX_RECORD:
        raise _refusal("record", f"{len(data)} bytes", f"at most {MAX_RECORD} bytes", _RECORDED)
    try:
        text = data.decode() if isinstance(data, bytes) else data
    except UnicodeDecodeError as error:
        raise _refusal("record", "bytes that are not text", "a record in UTF-8, as saved by this program",
                       _RECORDED) from error
    _, found, rest = text.partition(BLOCK.format(name))
    block, closed, _ = rest.partition("</script>")
    if not (found and closed):
        raise _refusal("record", "a page of another kind", f"a record as saved by this program, with its {name} in it",
                       _RECORDED)
    return block


_RECORDED = "open the record as it was saved: one printed, or saved by a browser, has lost its data"


def as_block(name: str, text: str) -> str:
    r"""JSON text as a block of data in a page, in which nothing can end it early or pass for markup.

    >>> as_block("case", '{"title": "</script>"}')
    '<script type="application/json" id="case">{"title": "\\u003c/script\\u003e"}</script>'
    """
    harmless = {letter: f"\\u{ord(letter):04x}" for letter in "<>&\u2028\u2029"}
    return BLOCK.format(name) + "".join(harmless.get(letter, letter) for letter in text) + "</script>"


def _first_line(error: Exception) -> str:
    if isinstance(error, RecursionError):
        return "brackets nested too deeply"
    return (str(error).splitlines() or [type(error).__name__])[0]


def _no_constant(name: str):
    raise ValueError(f"{name} in place of a number")


def _from_document(document: object, source: str) -> Case:
    if not isinstance(document, dict) or document.get("format") != FORMAT:
        raise _refusal(source, "a JSON document of another kind", f'a document with "format": "{FORMAT}"', _SAVED)
    schema = document.get("schema")
    if not isinstance(schema, int) or isinstance(schema, bool) or schema < 1:
        raise _refusal(f"schema of the {source}", schema, f"a whole number from 1 to {SCHEMA}", _SAVED)
    if schema > SCHEMA:
        raise _refusal(f"schema of the {source}", schema, f"at most {SCHEMA}", "open it with the version that saved it",
                       "it was saved by a newer version of this program")
    values = document.get("values")
    if not isinstance(values, dict):
        raise _refusal(f"values of the {source}", type(values).__name__, "a JSON object of entries", _SAVED)
    faults, read = [], {}
    for name, raw in values.items():
        try:
            read[name] = _value(name, raw)
        except InputError as error:
            faults += error.faults
    case = Case(read)
    if faults := [*faults, *entry_faults(case)] or faults_of(case):
        raise InputError(*_shortened(faults))
    return case


def _shortened(faults: list[Fault]) -> list[Fault]:
    """The first of a great many faults, and the number of the others."""
    others = len(faults) - LISTED
    if others <= 0:
        return faults
    return [*faults[:LISTED], Fault("case", f"{others} more entries like these", "", "none",
                                    hint="mend those above first")]


def _value(name: str, raw: object) -> Value:
    field = FIELDS.get(name)
    if field is None:
        raise _refusal("entry of the case", name, "an entry that this version knows",
                       "open it with the version that saved it, or take the entry out")
    return _table(field, raw) if field.form == TABLE else _single(field, raw)


def _table(field: Field, raw: object) -> tuple[Row, ...]:
    if not isinstance(raw, list) or len(raw) > field.most:
        got = f"{len(raw)} rows" if isinstance(raw, list) else raw
        raise _refusal(field.label, got, f"a list of at most {field.most} rows")
    columns, rows, faults = {column.name: column for column in field.columns}, [], []
    for number, cells in enumerate(raw, 1):
        if not isinstance(cells, dict) or not set(cells) <= set(columns):
            faults += _refusal(f"{field.label}, row {number}", cells, "cells by name: " + ", ".join(columns)).faults
            continue
        read = {}
        for name, cell in cells.items():
            try:
                read[name] = _single(field.cell(number, columns[name]), cell)
            except InputError as error:
                faults += error.faults
        rows.append(field.row(**read))
    if faults:
        raise InputError(*faults)
    return tuple(rows)


def _single(field: Field, raw: object) -> Value:
    if field.form == QUANTITY:
        return _entry(field, raw)
    if not isinstance(raw, str):
        raise _refusal(field.label, raw, "text")
    if len(raw) > MAX_TEXT:
        raise _refusal(field.label, f"{len(raw)} characters", f"at most {MAX_TEXT} characters")
    if any("\ud800" <= letter <= "\udfff" for letter in raw):
        raise _refusal(field.label, "half of a character", "whole characters")
    return raw


def _entry(field: Field, raw: object) -> Entry | None:
    """The entry as it stands in the file; whether it can be used, the case says."""
    if raw is None and field.blank is None:
        return None
    if not isinstance(raw, dict) or not set(raw) <= {"value", "unit", "basis"}:
        raise _refusal(field.label, raw, 'an object with "value" and "unit"')
    value, unit = raw.get("value"), raw.get("unit")
    try:
        number = float(value) if isinstance(value, int | float) and not isinstance(value, bool) else math.nan
    except OverflowError:
        number = math.inf
    if not math.isfinite(number):
        raise _refusal(field.label, value, "a finite number")
    return Entry(number, ALIASES.get(unit, unit) if isinstance(unit, str) else unit, raw.get("basis", ""))


def to_link(case: Case) -> str:
    """The case as one word for an address: what differs from a blank case, packed."""
    changed = {n: _as_json(v) for n, v in case.values.items() if v != BLANK[n]}
    packed = zlib.compress(json.dumps([SCHEMA, changed], ensure_ascii=False, separators=(",", ":")).encode(), 9)
    return base64.urlsafe_b64encode(packed).decode().rstrip("=")


def from_link(word: str) -> Case:
    """Read a case from an address. InputError with the reason where the word holds none."""
    try:
        packed = base64.b64decode(word + "=" * (-len(word) % 4), altchars=b"-_", validate=True)
        unpacker = zlib.decompressobj()
        text = unpacker.decompress(packed, _LINK_BYTES)
        if unpacker.unconsumed_tail or not unpacker.eof:
            raise ValueError("too long or cut off")
        schema, values = _parsed(text)
    except (ValueError, TypeError, zlib.error, RecursionError) as error:
        raise _refusal("case in the link", f"“{word[:40]}”", "a link made by this program, copied whole",
                       "copy it once more from where it came, from the first to the last letter") from error
    return _from_document({"format": FORMAT, "schema": schema, "values": values}, "link")
