"""Broken logs, each with what must be said about it: refused as a whole, or read with a listed refusal.

Every log was made up for this purpose.
"""

from __future__ import annotations

import gzip
import io
import zipfile
from typing import NamedTuple


class Refused(NamedTuple):
    """The whole log is refused; ``says`` are words of the message."""

    name: str
    data: bytes
    says: tuple[str, ...]


class Reported(NamedTuple):
    """The log is read, and this refusal is in its list."""

    name: str
    data: bytes
    row: int
    column: str
    content: str
    reason: str


def _zip(**parts: str | bytes) -> bytes:
    file = io.BytesIO()
    with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in parts.items():
            archive.writestr(name, content)
    return file.getvalue()


HEAD = "time [s],p1 [bar g],T2 [degC]\n"
GOOD = HEAD + "0,9.01,121.3\n5,9.02,121.4\n"
STAMPED = "Time;p1 [bar g];T2 [degC]\n16.05.2024 07:08:00;9,01;121,3\n16.05.2024 07:08:10;9,02;121,4\n"

REFUSED = [
    Refused("empty", b"", ("an empty file", "finished writing")),
    Refused("blank lines", b"\n\n\n\n", ("blank lines",)),
    Refused("spaces", b"   \n  \n", ("blank lines",)),
    Refused("one word", b"hello", ("without a common delimiter",)),
    Refused("letter", b"Dear all,\nthe log follows, as agreed,\nwith regards\n",
            ("text without readings", "headings such as")),
    Refused("heading alone", HEAD.encode(), ("heading without any row",)),
    Refused("heading and blank lines", HEAD.encode() + b"\n\n\n", ("heading without any row",)),
    Refused("binary", bytes(range(256)) * 4, ("a binary file", "control characters")),
    Refused("null bytes", b"\0" * 500, ("a binary file",)),
    Refused("old workbook", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + b"\0" * 600, ("XLS", "save it as XLSX or CSV")),
    Refused("document", b"%PDF-1.7\n%\xe2\xe3\n1 0 obj", ("a PDF document",)),
    Refused("picture", b"\x89PNG\r\n\x1a\n" + bytes(50), ("a picture",)),
    Refused("gzip", gzip.compress(GOOD.encode()), ("gzip", "unpack")),
    Refused("zip without workbook", _zip(**{"log.csv": GOOD}), ("no XLSX workbook in it",)),
    Refused("other workbook", _zip(mimetype="application/x-sheet", **{"content.xml": "<a/>"}),
            ("another workbook format",)),
    Refused("zip bomb", _zip(**{"xl/workbook.xml": "<a/>", "xl/worksheets/sheet1.xml": b"0" * (40 << 20)}),
            ("unpacks to 40 MiB", "fill the memory")),
    Refused("path tricks in an archive", _zip(**{"../../xl/workbook.xml": "<a/>", "/etc/passwd": "x"}),
            ("a ZIP archive", "no XLSX workbook in it")),
    Refused("path tricks beside a workbook", _zip(**{"xl/workbook.xml": "<a/>", "../../escaped.xml": "<a/>"}),
            ("a workbook that cannot be opened", "save it again")),
    Refused("bomb of a thousand parts", _zip(**{"xl/workbook.xml": "<a/>", **{f"xl/{k}.xml": "" for k in range(5001)}}),
            ("a workbook of 5002 parts", "CSV")),
    Refused("bomb in a bomb", _zip(**{"xl/workbook.xml": "<a/>", "xl/media.zip": _zip(a=b"0" * (40 << 20)) * 300}),
            ("a workbook that", "save")),
    Refused("script as a log", b"<script>alert(1)</script>\n", ("delimiter", "export")),
    Refused("formulas alone", b"time [s],p1 [bar g]\n0,=B1\n5,=B2\n", ("a formula without a stored value",)),
    Refused("pickle", b"\x80\x04\x95\x1a\x00\x00\x00\x00\x00\x00\x00\x8c\x08builtins", ("binary",)),
    Refused("entity bomb", _zip(**{"xl/workbook.xml": '<!DOCTYPE a [<!ENTITY b "c">]><a>&b;</a>'}), ("document type",)),
    Refused("hidden entity bomb", _zip(**{"xl/workbook.xml": "<!--" + " " * 9000 + "--><!DOCTYPE a><a/>"}),
            ("document type",)),
    Refused("truncated workbook", _zip(**{"xl/workbook.xml": "<a/>"})[:60], ("damaged or locked archive",)),
    Refused("hollow workbook", _zip(**{"xl/workbook.xml": "<a/>"}), ("a workbook that cannot be opened",)),
    Refused("comma for everything", b"time [s],p1 [bar g],T2 [degC]\n0,9,01,121,3\n5,9,02,121,4\n",
            ("comma parts the cells and is the decimal sign", "0,9,01,121,3")),
    Refused("unknown headings", b"alpha,beta,gamma\n1,2,3\n4,5,6\n",
            ("no column was recognised", "alpha, beta, gamma")),
    Refused("no heading", b"0,9.01,121.3\n5,9.02,121.4\n", ("no column was recognised", "column 1")),
    Refused("unit missing", b"time [s],p1 [bar g],T2\n0,9.01,121.3\n", ("unit T_exhaust", "K, °C, °F")),
    Refused("basis missing", b"time [s],p1 [bar],T2 [degC]\n0,9.01,121.3\n", ("basis p_line", "gauge or absolute")),
    Refused("date order open", b"time,p1 [bar g]\n05/06/2024 07:08,9.01\n05/06/2024 07:09,9.02\n",
            ("date_order", "more than one order")),
    Refused("decimal sign open", b"time [s];p1 [kPa a];T2 [degC]\n0;1,013;121\n5;1,014;122\n",
            ("decimal", "1,013 may be 1.013 or 1013")),
    Refused("time unit open", b"time,p1 [bar g]\n0,9.01\n10,9.02\n", ("unit time", "In which unit is the time")),
    Refused("hours or minutes", b"time,p1 [bar g]\n58:10,9.01\n75:10,9.02\n", ("unit time",)),
    Refused("all words", b"time [s],p1 [bar g]\n0,high\n5,low\n10,high\n",
            ("row 2, p1 [bar g]", "not a number (3 times)")),
    Refused("all impossible", b"time [s],T2 [degC]\n0,-300\n5,-301\n", ("outside what this channel can be (2 times)",)),
    Refused("no usable time", b"time [hh:mm:ss],p1 [bar g]\nnoon,9.0\nlater,9.1\n",
            ("not a time in a form known here",)),
    Refused("dates of no calendar", b"time,p1 [bar g]\n2024-02-30 07:08,9.0\n2024-02-31 07:08,9.1\n",
            ("no such date",)),
    Refused("endless line", b"time [s],p1 [bar g]\n0,9.0\n" + b"x" * (6 << 20), ("a line of more than",)),
    Refused("web page", b"<html><head><title>Log</title></head>\n<body><table><tr><td>9</td></tr></table></html>\n",
            ("delimiter",)),
    Refused("JSON", b'{"time": 0, "p1": 9.0}\n', ("log from memory",)),
    Refused("remarks alone", b"time [s],remark\n0,valve opened\n5,valve shut\n", ("no column was recognised",)),
    Refused("setpoints alone", b"time [s],p1 setpoint [bar g]\n0,9\n5,9\n", ("no column was recognised",)),
]

NOT_A_NUMBER = "not a number"
NO_VALUE = "the instrument says that it has no value"


def _with(row: str) -> bytes:
    return (GOOD + row + "\n10,9.03,121.5\n").encode()


def _stamped(row: str) -> bytes:
    return (STAMPED + row + "\n16.05.2024 07:09:00;9,03;121,5\n").encode()


REPORTED = [
    Reported("word", _with("7,open a bit,121.3"), 4, "p1 [bar g]", "open a bit", NOT_A_NUMBER),
    Reported("n/a", _with("7,9.01,n/a"), 4, "T2 [degC]", "n/a", NO_VALUE),
    Reported("dashes", _with("7,9.01,----"), 4, "T2 [degC]", "----", NO_VALUE),
    Reported("nan", _with("7,nan,121.3"), 4, "p1 [bar g]", "nan", NO_VALUE),
    Reported("NaN in a column of its own", _with("7,NaN,"), 4, "p1 [bar g]", "NaN", NO_VALUE),
    Reported("infinite", _with("7,inf,121.3"), 4, "p1 [bar g]", "inf", "not a finite number"),
    Reported("too large for a number", _with("7,1e999,121.3"), 4, "p1 [bar g]", "1e999", "not a finite number"),
    Reported("code for no value", _with("7,9.01,-9999"), 4, "T2 [degC]", "-9999", NO_VALUE),
    Reported("sheet error", _with("7,#DIV/0!,121.3"), 4, "p1 [bar g]", "#DIV/0!", "an error value of the spreadsheet"),
    Reported("formula", _with("7,=1+8,121.3"), 4, "p1 [bar g]", "=1+8",
             "a formula without a stored value; nothing is computed here"),
    Reported("command", _with("7,@SUM(A1),121.3"), 4, "p1 [bar g]", "@SUM(A1)",
             "a formula without a stored value; nothing is computed here"),
    Reported("script", _with("7,9.01,<script>alert(1)</script>"), 4, "T2 [degC]", "<script>alert(1)</script>",
             NOT_A_NUMBER),
    Reported("two points", _with("7,9.0.1,121.3"), 4, "p1 [bar g]", "9.0.1", NOT_A_NUMBER),
    Reported("two signs", _with("7,--9.01,121.3"), 4, "p1 [bar g]", "--9.01", NOT_A_NUMBER),
    Reported("letter O", _with("7,9.O1,121.3"), 4, "p1 [bar g]", "9.O1", NOT_A_NUMBER),
    Reported("hexadecimal", _with("7,0x10,121.3"), 4, "p1 [bar g]", "0x10", NOT_A_NUMBER),
    Reported("underscores", _with("7,1_0,121.3"), 4, "p1 [bar g]", "1_0", NOT_A_NUMBER),
    Reported("foreign digits", _with("7,\u0669,121.3"), 4, "p1 [bar g]", "\u0669", NOT_A_NUMBER),
    Reported("bound", _with("7,>9,121.3"), 4, "p1 [bar g]", ">9", NOT_A_NUMBER),
    Reported("truth value", _with("7,TRUE,121.3"), 4, "p1 [bar g]", "TRUE", NOT_A_NUMBER),
    Reported("other unit in the cell", _with("7,9.01,250 °F"), 4, "T2 [degC]", "250 °F",
             "a unit in the cell that is not the column's"),
    Reported("decimal comma among points", _with('7,"9,01",121.3'), 4, "p1 [bar g]", "9,01",
             "not written with this file's decimal sign"),
    Reported("decimal point among commas", _stamped("16.05.2024 07:08:20;9.01;121,3"), 4, "p1 [bar g]", "9.01",
             "not written with this file's decimal sign"),
    Reported("groups of two", _with("7,9 01,121.3"), 4, "p1 [bar g]", "9 01",
             "thousands sign in a place where none can stand"),
    Reported("below absolute zero", _with("7,9.01,-280"), 4, "T2 [degC]", "-280", "outside what this channel can be"),
    Reported("below vacuum", _with("7,-1.5,121.3"), 4, "p1 [bar g]", "-1.5", "outside what this channel can be"),
    Reported("null character", _with("7,9\x00,121.3"), 4, "p1 [bar g]", "9\x00", "control characters in the cell"),
    Reported("too many cells", _with("7,9.01,121.3,hello"), 4, "", "7,9.01,121.3,hello",
             "more cells than the heading has columns"),
    Reported("far too many cells", _with("7,9.01,121.3,,,,5"), 4, "", "7,9.01,121.3,,,,5",
             "more cells than the heading has columns"),
    Reported("open quote", _with('7,"9.01,121.3'), 4, "", '7,"9.01,121.3', "a quote is opened here and never closed"),
    Reported("nothing but a time", _with("7,,"), 4, "", "7,,", "no reading in this row"),
    Reported("no time", _with(",9.01,121.3"), 4, "time [s]", "", "no time in this row"),
    Reported("time in words", _with("soon,9.01,121.3"), 4, "time [s]", "soon", NOT_A_NUMBER),
    Reported("heading again", _stamped("Time;p1 [bar g];T2 [degC]"), 4, "Time", "Time", "the heading again"),
    Reported("comment", _stamped("# gauge tapped;;"), 4, "", "# gauge tapped;;", "a comment line"),
    Reported("no such day", _stamped("31.06.2024 07:08:20;9,01;121,3"), 4, "Time", "31.06.2024 07:08:20",
             "no such date in the day and month order of this file"),
    Reported("month thirteen", _stamped("16.13.2024 07:08:20;9,01;121,3"), 4, "Time", "16.13.2024 07:08:20",
             "no such date in the day and month order of this file"),
    Reported("hour 25", _stamped("16.05.2024 25:08:20;9,01;121,3"), 4, "Time", "16.05.2024 25:08:20",
             "no such time of day"),
    Reported("minute 61", _stamped("16.05.2024 07:61:20;9,01;121,3"), 4, "Time", "16.05.2024 07:61:20",
             "no such time of day"),
    Reported("garbage after the stamp", _stamped("16.05.2024 07:08:20 or so;9,01;121,3"), 4, "Time",
             "16.05.2024 07:08:20 or so", "not a time in a form known here"),
    Reported("very long stamp", _stamped("16.05.2024 07:08:20" + "0" * 100 + ";9,01;121,3"), 4, "Time",
             ("16.05.2024 07:08:20" + "0" * 100)[:79] + "…", "not a time in a form known here"),
    Reported("time zone in one row", _stamped("16.05.2024 07:08:20Z;9,01;121,3"), 4, "Time", "16.05.2024 07:08:20Z",
             "time zone given here but not in the first rows, or the other way round"),
    Reported("bytes of another encoding", STAMPED.replace("degC", "°C").encode() + b"16.05.2024 07:08:20;9\xb0;121,3\n",
             4, "p1 [bar g]", "9\ufffd", NOT_A_NUMBER),
    Reported("cut in the last row", (GOOD + "10,9.0").encode(), 4, "", "10,9.0", "the file ends within this row"),
]

# Wicked, but a log: words are words, and the readings are read.
WICKED = ("<script>alert(1)</script>", "=cmd|' /C calc'!A0", "../../../etc/passwd", "{{7*7}} ${7*7} %s %n",
          "@SUM(A1)", "\u202etxt.exe", "javascript:alert(1)")
HARMLESS = [(f"{kind}: {text}", data) for text in WICKED for kind, data in (
    ("remark", f'time [s],p1 [bar g],T2 [degC],remark\n0,9.01,121.3,"{text}"\n5,9.02,121.4,\n'.encode()),
    ("heading", f'time [s],p1 [bar g],T2 [degC],"{text}"\n0,9.01,121.3,1\n5,9.02,121.4,2\n'.encode()),
    ("preamble", f'"{text}"\n\n{GOOD}'.encode()),
)]
