"""Broken case files, links and records, each with what must be said about it. Every one was made up for this purpose.

A refusal names what it is about and what is needed; ``says`` are further words of it. What can be opened although it
looks wicked is in ``HARMLESS``: it is text, and stays text.
"""

from __future__ import annotations

import base64
import bz2
import gzip
import io
import json
import pickle
import zipfile
import zlib
from typing import NamedTuple

from engine.job.case.casefile import FORMAT, MAX_BYTES, as_block, to_json, to_link
from engine.job.case.demo import DEMO

SAVED = to_json(DEMO)
BYTES = SAVED.encode()


class Broken(NamedTuple):
    """``name`` of the file as uploaded, its bytes, and words of the refusal."""

    name: str
    file: str
    data: bytes
    says: tuple[str, ...]


class Trap:
    """An object that leaves a mark where it is unpickled."""

    def __reduce__(self):
        return (open, ("executed", "w"))


def document(**values) -> bytes:
    """The demo case with some of its values replaced."""
    whole = json.loads(SAVED)
    whole["values"].update(values)
    return json.dumps(whole).encode()


def whole(**changes) -> bytes:
    return json.dumps(json.loads(SAVED) | changes).encode()


def raw(name: str, text: str) -> bytes:
    """The demo case with the value of one entry replaced by raw JSON text."""
    return document(**{name: "HERE"}).replace(b'"HERE"', text.encode())


def packed(**files: bytes) -> bytes:
    target = io.BytesIO()
    with zipfile.ZipFile(target, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, data in files.items():
            archive.writestr(name.replace("__", "/"), data)
    return target.getvalue()


def pressure(value: str) -> bytes:
    return raw("p_line", f'{{"value": {value}, "unit": "bar", "basis": "gauge"}}')


def bomb(size: int = 20_000_000) -> bytes:
    return zlib.compress(b" " * size, 9)


NOT_TEXT, NO_JSON = "bytes that are not text", "a JSON file as saved by this program"
OTHER = "a JSON document of another kind"
FINITE, OBJECT = "needs a finite number", 'needs an object with "value" and "unit"'
LOG = b"time [s],p1 [bar g],T2 [degC]\n0,9.01,121.3\n5,9.02,121.4\n"
DEEP = "[" * 100_000

CASES = [Broken(name, "case.json", data, says) for name, data, says in (
    ("empty", b"", ("Expecting value", NO_JSON)),
    ("blank lines", b"\n\n\n", ("Expecting value",)),
    ("null bytes", b"\0" * 500, ("Expecting value",)),
    ("first half", BYTES[:len(BYTES) // 2], (NO_JSON, "save the case once more")),
    ("last bracket gone", BYTES.rstrip()[:-1], ("delimiter", NO_JSON)),
    ("cut within a letter", to_json(DEMO.with_(title="°°°°")).encode().split("°".encode())[0] + b"\xc2", (NOT_TEXT,)),
    ("twice in one file", BYTES + BYTES, ("Extra data",)),
    ("something behind it", BYTES + b"<script>alert(1)</script>", ("Extra data",)),
    ("single quotes", str(json.loads(SAVED)).encode(), ("Expecting property name",)),
    ("trailing comma", BYTES.replace(b"\n}", b",\n}"), ("case file: got ", NO_JSON)),
    ("comment", b"// saved by hand\n" + BYTES, ("Expecting value",)),
    ("UTF-16 with mark", SAVED.encode("utf-16"), ("text in UTF-16", "save it as UTF-8")),
    ("UTF-16, big end first", b"\xfe\xff" + SAVED.encode("utf-16-be"), ("text in UTF-16", "save it as UTF-8")),
    ("UTF-16 without mark", SAVED.encode("utf-16-le"), ("case file: got ",)),
    ("UTF-32", SAVED.encode("utf-32"), ("case file: got ",)),
    ("Latin letters", to_json(DEMO.with_(title="Prüfung 5 °C")).encode("latin-1"), (NOT_TEXT, "UTF-8")),
    ("two marks", b"\xef\xbb\xbf\xef\xbb\xbf" + BYTES, ("BOM",)),
    ("log", LOG, ("Expecting value", NO_JSON)),
    ("picture", b"\x89PNG\r\n\x1a\n" + bytes(50), (NOT_TEXT,)),
    ("PDF", b"%PDF-1.7\n%\xe2\xe3\n1 0 obj", ("a PDF document", "HTML record")),
    ("gzip", gzip.compress(BYTES), ("a gzip archive", "unpack it")),
    ("bzip2", bz2.compress(BYTES), (NOT_TEXT,)),
    ("zip with a case", packed(**{"case.json": BYTES}), ("a ZIP archive", "unpack it")),
    ("zip bomb", packed(**{"case.json": b" " * 40_000_000}), ("a ZIP archive",)),
    ("zip with path tricks", packed(**{"..__..__etc__passwd": BYTES}), ("a ZIP archive",)),
    ("workbook", packed(**{"xl__workbook.xml": b"<a/>"}), ("a workbook", "Readings page")),
    ("web page", b"<!DOCTYPE html><script>alert(1)</script>", ("a web page", "must end in .html")),
    ("entity bomb", b'<?xml version="1.0"?><!DOCTYPE a [<!ENTITY b "&c;&c;">]><a>&b;</a>', ("a web page",)),
    ("pickle", pickle.dumps(Trap()), (NOT_TEXT,)),
    ("pickle as text", pickle.dumps(Trap(), protocol=0), ("Expecting value",)),
    ("YAML that calls", b"!!python/object/apply:os.system ['touch executed']", ("Expecting value",)),
    ("Python that calls", b"__import__('os').system('touch executed')", ("Expecting value",)),
    ("deep list", DEEP.encode(), ("nested too deeply",)),
    ("deep object", b'{"a":' * 100_000, ("nested too deeply",)),
    ("too large", b" " * (MAX_BYTES + 1), ("at most 5000000 bytes",)),
    ("null", b"null", (OTHER, f'"format": "{FORMAT}"')),
    ("number", b"5", (OTHER,)),
    ("list of cases", b"[" + BYTES + b"]", (OTHER,)),
    ("without format", json.dumps({"schema": 1, "values": {}}).encode(), (OTHER,)),
    ("other format", whole(format="some other case"), (OTHER,)),
    ("schema as text", whole(schema="1"), ("schema of the case file", "whole number")),
    ("schema true", whole(schema=True), ("schema of the case file", "whole number")),
    ("schema of tomorrow", whole(schema=2), ("needs at most 1", "newer version", "version that saved it")),
    ("schema far away", whole(schema=10**30), ("needs at most 1", "newer version")),
    ("values as list", whole(values=[]), ("values of the case file", "JSON object of entries")),
    ("key twice", BYTES.replace(b'"values"', b'"schema": 1, "values"'), ("“schema” twice in one place",)),
    ("entry twice", BYTES.replace(b'"title"', b'"title": "another", "title"', 1), ("“title” twice",)),
    ("value twice", pressure('9, "value": 8'), ("“value” twice",)),
    ("NaN", pressure("NaN"), ("NaN in place of a number",)),
    ("infinity", pressure("-Infinity"), ("-Infinity in place of a number",)),
    ("beyond all numbers", pressure("1e999"), ("Line pressure", FINITE)),
    ("integer of 400 digits", pressure("9" * 400), ("Line pressure", FINITE)),
    ("integer of 5000 digits", pressure("9" * 5000), ("Exceeds the limit",)),
    ("huge", pressure("1e308"), ("Line pressure: got 1e+308 bar gauge", "163.99 bar gauge", "check")),
    ("far below vacuum", pressure("-1e308"), ("Line pressure: got -1e+308", "needs 0.0")),
    ("number as text", pressure('"9"'), ("Line pressure", FINITE)),
    ("decimal comma", pressure('"9,0"'), ("Line pressure", FINITE)),
    ("truth value", pressure("true"), ("Line pressure", FINITE)),
    ("list in place of a number", pressure("[9]"), ("Line pressure", FINITE)),
    ("deep entry", pressure("[" * 900 + "]" * 900), ("Line pressure", FINITE)),
    ("entry as number", raw("p_line", "9"), ("Line pressure: got 9", OBJECT)),
    ("entry as text", raw("T_exhaust", '"121.1 °C"'), ("Measured temperature", OBJECT)),
    ("no unit", raw("T_exhaust", '{"value": 121.1}'), ("unit of measured temperature: got nothing", "°C")),
    ("unknown unit", raw("T_exhaust", '{"value": 121.1, "unit": "°X"}'), ("unit of measured temp", "got °X")),
    ("unit of another kind", raw("T_exhaust", '{"value": 121.1, "unit": "bar"}'), ("unit of measured temp", "°C")),
    ("unit as object", raw("T_exhaust", '{"value": 1, "unit": {"a": 1}}'), ("unit of measured temp", "one of")),
    ("no basis", raw("p_line", '{"value": 9, "unit": "bar"}'), ("basis of line pressure", "gauge or absolute")),
    ("basis of its own", raw("p_line", '{"value": 9, "unit": "bar", "basis": "vacuum"}'), ("gauge or absolute",)),
    ("formula", pressure('"=1+8"'), ("Line pressure: got =1+8", FINITE)),
    ("script as number", pressure('"<script>alert(1)</script>"'), ("Line pressure", FINITE)),
    ("unknown entry", document(colour="red"), ("entry of the case: got colour", "version that saved it")),
    ("entry by a wicked name", document(**{"__class__": {"__init__": 1}}), ("entry of the case: got __class__",)),
    ("2000 unknown entries", document(**{f"z{k}": k for k in range(2000)}), ("1980 more entries like these",)),
    ("unknown choice", document(question="why"), ("Question: got why", "one of: reading, expected")),
    ("choice as number", document(question=1), ("Question: got 1", "needs text")),
    ("title as list", document(title=["a"]), ("Title", "needs text")),
    ("endless title", document(title="x" * 100_000), ("Title: got 100000 characters", "at most 4000")),
    ("half a character", document(title="\ud83d"), ("Title: got half of a character",)),
    ("table as text", document(readings="9.01;121.3"), ("Readings", "a list of at most")),
    ("table of lists", document(readings=[[9.01, 121.3]]), ("Readings typed, row 1", "cells by name")),
    ("table too long", document(readings=[{}] * 100_000), ("100000 rows", "a list of at most")),
    ("cell of a table", document(readings=[{}, {"T_exhaust": {"value": "hot", "unit": "°C"}}]),
     ("Readings typed, row 2", FINITE)),
    ("unknown column", document(readings=[{"colour": "red"}]), ("Readings typed, row 1", "cells by name")),
    ("exhaust above the line", raw("p_exhaust", '{"value": 12, "unit": "bar", "basis": "absolute"}'),
     ("Exhaust pressure: got 12 bar absolute", "less than the line pressure", "check the unit")),
    ("temperature in kelvin as °C", raw("T_exhaust", '{"value": 3941, "unit": "°C"}'), ("needs 0 to 500 °C",)),
)]

CASE_BLOCK, READINGS = as_block("case", SAVED), as_block("readings", '{"logs": []}')
RECORDS = [Broken(name, "record.html", data, says) for name, data, says in (
    ("empty record", b"", ("a page of another kind", "as it was saved")),
    ("a case named as a record", BYTES, ("a page of another kind",)),
    ("other page", b"<html><script>alert(1)</script></html>", ("a page of another kind",)),
    ("record without its case", READINGS.encode(), ("with its case in it",)),
    ("record cut off", CASE_BLOCK[:-9].encode(), ("a page of another kind",)),
    ("record without its readings", CASE_BLOCK.encode(), ("with its readings in it",)),
    ("record in UTF-16", (CASE_BLOCK + READINGS).encode("utf-16"), (NOT_TEXT, "UTF-8")),
    ("record too large", b"x" * 20_000_001, ("at most 20000000 bytes",)),
    ("record with a broken case", (as_block("case", "{}") + READINGS).encode(), (OTHER,)),
    ("record with a case of tomorrow", (as_block("case", whole(schema=9).decode()) + READINGS).encode(),
     ("newer version",)),
    ("readings that are none", (CASE_BLOCK + as_block("readings", "[1, 2]")).encode(),
     ("readings in the record", "changed after it was made")),
    ("readings nested deeply", (CASE_BLOCK + as_block("readings", DEEP)).encode(), ("readings in the record",)),
    ("readings of a wicked log", (CASE_BLOCK + as_block("readings", '{"logs": [{"name": "../x"}]}')).encode(),
     ("readings in the record", "use the files beside it")),
)]

COPY = "copy it once more from where it came"
WORD = to_link(DEMO)


def word(data: bytes) -> bytes:
    return base64.urlsafe_b64encode(data).rstrip(b"=")


LINKS = [Broken(name, "", data, says) for name, data, says in (
    ("empty link", b"", (COPY,)),
    ("link cut off", WORD[:-20].encode(), (COPY,)),
    ("link without its beginning", WORD[9:].encode(), (COPY,)),
    ("link with a space in it", (WORD[:50] + " " + WORD[50:]).encode(), (COPY,)),
    ("link to a page", b"https://example.org/?case=abc", (COPY,)),
    ("script in a link", b"<script>alert(1)</script>", (COPY,)),
    ("path in a link", b"../../../../etc/passwd", (COPY,)),
    ("bomb in a link", word(bomb()), (COPY,)),
    ("pickle in a link", word(zlib.compress(pickle.dumps(Trap()))), (COPY,)),
    ("deep link", word(zlib.compress(b"[" * 90_000)), (COPY,)),
    ("case file in a link", word(zlib.compress(BYTES)), (COPY,)),
    ("entry twice in a link", word(zlib.compress(b'[1, {"title": "a", "title": "b"}]')), (COPY,)),
    ("link of tomorrow", word(zlib.compress(b"[2, {}]")), ("newer version",)),
    ("nonsense in a link", word(zlib.compress(b'[1, {"p_line": 9}]')), ("Line pressure: got 9",)),
)]

WICKED = ("<script>alert(1)</script>", "=cmd|' /C calc'!A0", "../../../etc/passwd", "{{7*7}} ${7*7} %s %n",
          "'; DROP TABLE cases; --", "\u202etxt.exe", "a\x00b", "![x](javascript:alert(1))", "</textarea><img src=x>")
HARMLESS = [Broken(f"wicked words {k}", "../../case.json", document(title=text, place=text, note=text), ())
            for k, text in enumerate(WICKED)]
