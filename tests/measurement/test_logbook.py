"""Reading logs in every dialect, with the mapping proposed, confirmed, remembered and laid on other files."""

import io
import tracemalloc
from functools import partial

import numpy as np
import pytest

from engine.measurement.logbook import absolute, propose_mapping, read_log
from engine.measurement.logbook import reading as logbook
from engine.measurement.logbook.mapping import Column, Mapping
from engine.measurement.logbook.rows import LISTED_PER_REASON
from engine.measurement.logbook.table import MOST_WORDS, Words
from engine.measurement.logbook.text import text_blocks
from engine.steam import InputError

P_LINE = [9.01e5, 9.02e5, 9.03e5]
T_EXHAUST = [394.45, 394.55, 394.65]


def table(delimiter=";", decimal=",", head="time [s];p1 [bar g];T2 [°C]", end="\n"):
    rows = [head.split(";")] + [[str(5 * k), f"9{decimal}0{k + 1}", f"121{decimal}{k + 3}"] for k in range(3)]
    quote = decimal == "," and delimiter == ","
    return "".join(delimiter.join(f'"{c}"' if quote and decimal in c else c for c in row) + end for row in rows)


def assert_usual(log):
    np.testing.assert_allclose(log.channels["p_line"], P_LINE, rtol=1e-14)
    np.testing.assert_allclose(log.channels["T_exhaust"], T_EXHAUST, rtol=1e-14)
    np.testing.assert_array_equal(log.time, [0, 5, 10])
    assert log.basis == {"p_line": "gauge"}
    assert log.rejected == ()
    assert log.rows_read == 3


@pytest.mark.parametrize("delimiter", [",", ";", "\t", "|"])
@pytest.mark.parametrize("decimal", [".", ","])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32", "cp1252"])
def test_delimiters_decimal_signs_and_encodings(delimiter, decimal, encoding):
    log = read_log(table(delimiter, decimal).encode(encoding))
    assert_usual(log)
    assert (log.mapping.delimiter, log.mapping.decimal) == (delimiter, decimal)
    assert log.rows.tolist() == [2, 3, 4]


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_line_ends(end):
    assert_usual(read_log(table(end=end).encode()))


def test_without_a_last_line_end():
    assert_usual(read_log(table().rstrip("\n").encode()))


def test_a_delimiter_at_the_end_of_every_line():
    assert_usual(read_log(table(end=";\n").encode()))


def test_the_delimiter_told_in_the_first_line():
    log = read_log(("sep=;\n" + table()).encode())
    assert_usual(log)
    assert log.rows.tolist() == [3, 4, 5]


def test_a_preamble_before_the_heading_and_blank_lines_within():
    lines = table().splitlines()
    text = "\n".join(["# logger 7", "Serial;12345", "Interval;5 s", "", *lines[:2], "", ";;", *lines[2:], "", ""])
    log = read_log(text.encode())
    assert_usual(log)
    assert (log.mapping.header_line, log.mapping.first_line) == (5, 6)
    assert log.rows.tolist() == [6, 9, 10]
    assert log.blank_rows == 3


def test_a_commented_heading():
    assert_usual(read_log(("# " + table()).encode()))


def test_a_row_of_units_below_the_heading():
    text = table(head="time;Line pressure;Exhaust temp").replace("Exhaust temp\n", "Exhaust temp\n[s];[bar g];[°C]\n")
    log = read_log(text.encode())
    assert_usual(log)
    assert log.rows.tolist() == [3, 4, 5]


def test_quoted_cells_with_delimiters_quotes_and_line_ends():
    log = read_log(b'time [s],p1 [bar g],remark\n0,"9.01","a, b ""c"""\n5,9.02,"two\nlines"\n10,9.03,plain\n')
    assert [r.text for r in log.remarks] == ['a, b "c"', "two\nlines", "plain"]
    assert [r.time for r in log.remarks] == [0.0, 5.0, 10.0]
    assert log.rows.tolist() == [2, 3, 5]  # line numbers as an editor shows them


def test_spaces_after_the_delimiter():
    log = read_log(b'time [s], p1 [bar g], T2 [degC]\n0, 9.01, "121.3"\n5, 9.02,  121.4\n')
    assert log.channels["T_exhaust"] == pytest.approx([394.45, 394.55])


def test_thousands_signs():
    log = read_log("time [s];p1 [kPa a];T2 [°C]\n0;1.013,2;121,3\n5;1 014,2;121,4\n10;1'015,2;121,5\n".encode())
    np.testing.assert_allclose(log.channels["p_line"], [1013200, 1014200, 1015200], rtol=1e-14)


def test_units_written_in_the_cells():
    log = read_log("time;p1;T2\n10:00;9,01 bar g;121,3 °C\n10:01;9,02 bar g;121,4 °C\n".encode())
    assert log.basis == {"p_line": "gauge"}
    np.testing.assert_allclose(log.channels["T_exhaust"], [394.45, 394.55])


@pytest.mark.parametrize(("heading", "cells", "start", "seconds"), [
    ("time", ["2024-05-06T07:08:00Z", "2024-05-06T07:08:10Z"], "2024-05-06T07:08:00+00:00", 10),
    ("time", ["2024-05-06T09:08:00+02:00", "2024-05-06T08:08:10+01:00"], "2024-05-06T07:08:00+00:00", 10),
    ("Zeit", ["16.05.2024 07:08", "16.05.2024 07:09"], "2024-05-16T07:08:00", 60),
    ("Time", ["5/16/2024 11:59:59 AM", "5/16/2024 12:00:00 PM"], "2024-05-16T11:59:59", 1),
    ("time", ["23:59:58", "00:00:03"], "23:59:58", 5), ("time", ["07:08:09.5", "07:08:11"], "07:08:09.5", 1.5),
    ("time [s]", ["0.5", "1.75"], "", 1.25), ("time [min]", ["1", "2.5"], "", 90),
   
    ("elapsed [h]", ["0", "0.5"], "", 1800),
    ("time (mm:ss)", ["00:10", "75:10"], "", 4500), ("time", ["45418.25", "45418.5"], "", None),
    ("time [unix]", ["1714979289", "1714979299"], "2024-05-06T07:08:09", 10),
    ("time", ["1714979289", "1714979299"], "2024-05-06T07:08:09", 10),
    ("Date", ["2024-05-06 07:08", "2024-05-06 07:09"], "2024-05-06T07:08:00", 60),
    ("time [ms]", ["0", "250"], "", 0.25),
])
def test_ways_to_write_time(heading, cells, start, seconds):
    data = f"{heading};p1 [bar g]\n" + "".join(f"{c};9.0\n" for c in cells)
    if seconds is None:  # serial days six hours apart: their steps do not tell, so it is asked
        with pytest.raises(InputError, match="unit time"):
            read_log(data.encode())
        log = read_log(data.encode(), propose_mapping(data.encode()).mapping.answer(unit={"time": "excel"}))
        start, seconds = "2024-05-06T06:00:00", 21600
    else:
        log = read_log(data.encode())
    assert log.start == start
    assert log.time[1] - log.time[0] == pytest.approx(seconds, abs=1e-9)


def test_elapsed_time_with_a_decimal_comma():
    log = read_log(b"time [s];p1 [bar g]\n0,5;9,0\n1,75;9,1\n")
    assert log.time.tolist() == [0.5, 1.75]


def test_date_and_time_in_two_columns():
    log = read_log(b"Date;Time;p1 [bar g]\n16.05.2024;23:59:50;9\n17.05.2024;00:00:10;9\n32.05.2024;00:00:10;9\n")
    assert log.start == "2024-05-16T23:59:50"
    assert log.time.tolist() == [0, 20]
    assert log.rejected[0].reason.startswith("no such date")


def test_serial_days_in_steps_of_seconds_need_no_question():
    rows = "".join(f"{45418.297326 + k / 86400!r};9\n" for k in range(4))
    log = read_log(f"Time;p1 [bar g]\n{rows}".encode())
    assert log.start.startswith("2024-05-06T07:08:")
    assert log.time.tolist() == [0, 1, 2, 3]


def test_a_log_without_time():
    log = read_log(b"p1 [bar g],T2 [degC]\n9.01,121.3\n9.02,121.4\n")
    assert log.time is None
    assert log.start == ""
    assert len(log) == 2


def test_only_the_time_and_value_of_kept_rows_count_but_remarks_stay():
    log = read_log(b"time [s],p1 [bar g],remark\n0,9,\n5,,valve touched\n,,no time\n10,9,\n")
    assert log.rows.tolist() == [2, 5]
    assert [(r.row, r.time, r.text) for r in log.remarks] == [(3, None, "valve touched"), (4, None, "no time")]


def test_a_sparse_channel_keeps_its_rows():
    log = read_log(b"time [s],p1 [bar g],pa [kPa]\n0,9,100.8\n5,9,\n10,9,\n15,9,100.6\n")
    assert log.missing == {"p_line": 0, "p_barometer": 2}
    assert log.rejected == ()
    np.testing.assert_allclose(absolute(log).channels["p_line"], 9e5 + 100.8e3 - np.array([0, 200, 400, 600]) / 3)


def test_absolute_takes_one_barometer_or_one_per_row():
    log = read_log(table().encode())
    made = absolute(log, 1e5)
    np.testing.assert_allclose(made.channels["p_line"], np.add(P_LINE, 1e5))
    assert made.basis == {"p_line": "absolute"}
    assert log.basis == {"p_line": "gauge"}
    np.testing.assert_allclose(absolute(log, np.array([9e4, 1e5, 1.1e5])).channels["p_line"][2], P_LINE[2] + 1.1e5)
    assert absolute(made, None) is made  # nothing left to do, no barometer needed
    for bad, words in ((None, "no barometer"), (1013.25, "30 to 120 kPa"), (np.full(2, 1e5), "one value or shape"),
                       (np.nan, "30 to 120 kPa")):
        with pytest.raises(InputError, match=words):
            absolute(log, bad)


def test_results_cannot_be_written_to():
    log = read_log(table().encode())
    for array in (log.time, log.rows, *log.channels.values()):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 1


def test_paths_bytes_and_binary_files(tmp_path):
    path = tmp_path / "run 1.csv"
    path.write_bytes(table().encode())
    for given in (path, str(path), table().encode(), bytearray(table().encode()), memoryview(table().encode()),
                  io.BytesIO(table().encode())):
        assert_usual(read_log(given))
    assert read_log(path).name == "run 1.csv"
    with path.open("rb") as file:
        file.read(7)  # wherever it stands
        assert read_log(file).name == "run 1.csv"


@pytest.mark.parametrize(("given", "words"), [
    ("no/such/log.csv", "no such file"), (".", "a folder or device"), ("/dev/zero", "a folder or device"),
    ("a\0b", "log"),
    (io.StringIO("x"), "opened in binary mode"), (12, "a path, bytes or a binary file"), (None, "a path, bytes"),
])
def test_sources_that_are_none(given, words):
    with pytest.raises(InputError, match=words):
        read_log(given)


def test_a_mapping_is_remembered_as_json_and_applied_exactly():
    data = table(head="clock;A;B").encode()
    mapping = propose_mapping(data).mapping
    assert mapping.questions[0].item == "channel"
    mapping = mapping.answer(channel={"clock": "time", "A": "p_line", "column 3": "T_exhaust"})
    assert [q.item for q in mapping.questions] == ["unit", "unit", "basis", "unit"]
    mapping = mapping.answer(unit={"time": "s", "p_line": "bar", "T_exhaust": "°C"}, basis="gauge")
    remembered = Mapping.from_json(mapping.to_json())
    assert remembered == mapping
    assert_usual(read_log(data, remembered))


def test_a_mapping_finds_its_columns_in_another_file():
    mapping = read_log(table().encode()).mapping
    moved = "logger 8\n\nT2 [°C],extra,time [s],p1 [bar g]\n121.3,x,0,9.01\n121.4,x,5,9.02\n121.5,x,10,9.03\n"
    log = read_log(moved.encode("utf-16"), mapping.answer(decimal="."))
    assert_usual(log)
    with pytest.raises(InputError, match=r"column of the exhaust temperature: got no 'T2 \[°C\]'.*one of: time"):
        read_log(b"time [s];p1 [bar g];T3 [degC]\n0;9,01;121,3\n", mapping)


def test_a_mapping_made_by_hand_reads_a_log_without_heading():
    columns = (Column(0, "", "time", "s"), Column(1, "", "p_line", "bar", "gauge"), Column(2, "", "T_exhaust", "°C"))
    mapping = Mapping(columns, decimal=",", delimiter=";", header_line=0, first_line=1)
    assert_usual(read_log(table().split("\n", 1)[1].encode(), mapping))


def test_the_mapping_decides_not_the_proposal():
    data = b"time [s],p1 [bar],T2 [degC]\n0,9.01,121.3\n5,9.02,121.4\n"
    mapping = propose_mapping(data).mapping
    assert read_log(data, mapping.answer(basis="absolute")).basis == {"p_line": "absolute"}
    log = read_log(data, mapping.answer(basis="gauge", unit={"p_line": "psi"}, channel={"T2 [degC]": "T_line"},
                                        ).answer(unit={"T_line": "°F"}))
    assert log.channels["p_line"][0] == pytest.approx(9.01 * 6894.757, rel=1e-6)
    assert log.channels["T_line"][0] == pytest.approx((121.3 - 32) / 1.8 + 273.15)


def test_what_is_told_beforehand():
    text = "a,b;c\np1 [bar g];T2 [degC]\n9,01;121,3\n9,02;121,4\n"
    proposal = propose_mapping(text.encode(), delimiter=";", header_line=2)
    assert proposal.mapping.header_line == 2
    assert [row for row, _ in proposal.preview] == [3, 4]
    with pytest.raises(InputError, match="delimiter of a log"):
        propose_mapping(text.encode(), delimiter="x")
    with pytest.raises(InputError, match="heading in line 99"):
        propose_mapping(text.encode(), header_line=99)


def test_an_ambiguous_decimal_sign_is_asked_and_both_answers_work():
    data = b"time [s];p1 [kPa a];T2 [degC]\n0;1,013;121\n5;1,014;122\n"
    mapping = propose_mapping(data).mapping
    assert read_log(data, mapping.answer(decimal=",")).channels["p_line"].tolist() == pytest.approx([1013, 1014])
    assert read_log(data, mapping.answer(decimal=".")).channels["p_line"].tolist() == pytest.approx([1013e3, 1014e3])


def test_two_columns_for_one_channel_are_said():
    proposal = propose_mapping(b"time [s],T2 [degC],T2 exhaust,p1 [bar g]\n0,121,122,9\n5,121,122,9\n")
    assert proposal.mapping.used["T_exhaust"].position == 1
    assert any("'T2 exhaust' names the exhaust temperature" in note for note in proposal.notes)


@pytest.mark.parametrize(("change", "words"), [
    ({"columns": 3}, "list of columns"), ({"schema": 99}, "another version"), ({"spam": 1}, "entry of a mapping"),
    ({"decimal": ";"}, "decimal of a log"), ({"thousands": ","}, "another sign than the decimal one"),
    ({"date_order": "ydm"}, "date_order"), ({"first_line": "x"}, "whole number"), ({"encoding": "ebcdic"}, "encoding"),
    ({"columns": [{"position": 0}]}, "position, name"), ({"columns": [{"position": 5, "name": "a"}]}, "left to right"),
    ({"columns": [{"position": 0, "name": "a", "channel": "p3"}]}, "channel of column a"),
    ({"columns": [{"position": 0, "name": "a", "channel": []}]}, "channel of column a"),
    ({"columns": [{"position": 0, "name": "a", "channel": "p_line", "unit": "K"}]}, "unit of column a"),
    ({"columns": [{"position": 0, "name": "a", "channel": "T_line", "basis": "gauge"}]}, "basis of column a"),
    ({"columns": [{"position": k, "name": "a", "channel": "p_line"} for k in (0, 1)]}, "a channel of its own"),
    ({"columns": [{"position": 0, "name": "a", "channel": "date"}]}, "a time column"),
])
def test_a_mapping_that_is_none_is_refused(change, words):
    data = {**propose_mapping(table().encode()).mapping.to_dict(), **change}
    with pytest.raises(InputError, match=words):
        Mapping.from_dict(data)


@pytest.mark.parametrize("text", ["", "[]", "{", "null", '"x"', "[" * 5000])
def test_json_that_is_no_mapping_is_refused(text):
    with pytest.raises(InputError, match="mapping of a log"):
        Mapping.from_json(text)


def test_answers_to_nothing_are_refused():
    mapping = propose_mapping(table().encode()).mapping
    with pytest.raises(InputError) as error:
        mapping.answer(unit={"T_line": "K"}, channel={"nope": "p_line"}, colour="red")
    assert len(error.value.faults) == 3


def test_refusals_are_listed_up_to_a_cap_and_counted_beyond():
    bad = LISTED_PER_REASON + 50
    log = read_log(("time [s],p1 [bar g],T2 [degC]\n0,9,121\n" + "5,wrong,121\n" * bad + "9,9,---\n").encode())
    assert log.rejected_counts == {"not a number": bad, "the instrument says that it has no value": 1}
    assert len(log.rejected) == LISTED_PER_REASON + 1
    assert log.rejected[-1].row == bad + 3  # one reason does not crowd out another
    assert len(log) == bad + 2  # the other channel of these rows is kept


def test_progress_rises_to_one(monkeypatch):
    monkeypatch.setattr(logbook, "text_blocks", partial(text_blocks, size=2000))
    rows = "".join(f"{k},9.{k % 100:02d},121\n" for k in range(2000))
    seen = []
    read_log(b"time [s],p1 [bar g],T2 [degC]\n" + rows.encode(), progress=seen.append)
    assert seen == sorted(seen)
    assert len(seen) > 5
    assert 0 < seen[0] < 0.5
    assert seen[-1] == 1.0


def messy(*, quoted_lines: bool) -> str:
    """A log with what keeps a row or a block from being read the fast way: line ends in quotes, or stray quotes."""
    text = "time [s];p1 [bar g];T2 [°C];remark\n"
    for k in range(400):
        p = f"9,0{k % 10}" if k % 7 else "n/a"
        text += f"{k};{p};{121 + k % 3},5;" + ('"a;\nb"' if quoted_lines and k % 11 == 0 else "") + "\n"
        text += "\n" * (k % 13 == 0) + "1;2;3;4;5\n" * (k % 19 == 0)
        text += '5;9;"121;x\n' * (not quoted_lines and k % 17 == 0) + '6;9;121;2" pipe\n' * (k % 23 == 0)
    return text


@pytest.mark.parametrize("encoding", ["utf-8", "utf-16", "cp1252"])
@pytest.mark.parametrize("size", [60, 501, 4096])
@pytest.mark.parametrize("text", [messy(quoted_lines=True), messy(quoted_lines=False)], ids=["lines", "strays"])
def test_blocks_of_any_size_give_the_same_log(monkeypatch, encoding, size, text):
    whole = read_log(text.encode(encoding))
    monkeypatch.setattr(logbook, "text_blocks", partial(text_blocks, size=size))
    parts = read_log(text.encode(encoding))
    assert parts.rows.tolist() == whole.rows.tolist()
    assert parts.rejected == whole.rejected
    assert parts.rejected_counts == whole.rejected_counts
    assert parts.remarks == whole.remarks
    for name, values in whole.channels.items():
        np.testing.assert_array_equal(parts.channels[name], values)
    lines = text.split("\n")
    for row, time in zip(whole.rows, whole.time, strict=True):
        assert lines[row - 1].startswith(f"{time:.0f};")  # row numbers are line numbers


def test_a_byte_of_another_code_late_in_a_long_log_changes_nothing_before(monkeypatch):
    monkeypatch.setattr(logbook, "text_blocks", partial(text_blocks, size=3000))
    rows = "".join(f"{k},9.0,121,\n" for k in range(1000))
    log = read_log(b"time [s],p1 [bar g],T2 [degC],remark\n" + rows.encode() * 30 + b"0,9.0,121,k\xe4lter\n")
    assert log.remarks[-1].text == "kälter"
    assert len(log) == 30_001


@pytest.mark.parametrize("count", [300, 3000, 30_000])
def test_the_date_order_may_be_decided_far_down_a_log(count):
    days = [f"{1 + 25 * k // count:02d}/05/2024 {k * 7 % 24:02d}:00" for k in range(count)]
    mapping = propose_mapping(("time,p1 [bar g]\n" + "".join(f"{d},9.0\n" for d in days)).encode()).mapping
    assert mapping.date_order == "dmy"


def peak_over_result(data: bytes) -> float:
    tracemalloc.start()
    try:
        log = read_log(data)
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()
    return peak - sum(a.nbytes for a in (log.rows, log.time, *log.channels.values()))


def test_memory_grows_with_the_result_and_not_with_the_text(monkeypatch):
    monkeypatch.setattr(logbook, "text_blocks", partial(text_blocks, size=10_000))
    head = b"time [s],p1 [bar g],T2 [degC]\n"
    rows = [f"{k},9.{k % 97:02d},121.{k % 10}\n".encode() for k in range(24_000)]
    read_log(head + rows[0])  # whatever is loaded once
    little, much = (peak_over_result(head + b"".join(rows[:count])) for count in (6_000, 24_000))
    # One or two more columns while the pieces are put together and looked at: less than the result itself.
    assert much - little < 18_000 * 8 * 4


def test_a_log_s_words_are_learnt_and_never_numbers():
    words = Words(["---", "n/a", " ", "", "9.01", "1_0", "inf", "nan", "9,01"])
    assert words.known == {"---", "n/a", "nan", "9,01"}
    words.learn(["OVER", "---"])
    assert words.known == {"---", "n/a", "nan", "9,01", "OVER"}
    words.learn(f"w{k}" for k in range(1000))
    assert len(words.known) == MOST_WORDS


@pytest.mark.parametrize("sparse", [False, True])
def test_words_known_and_unknown_are_all_listed(monkeypatch, sparse):
    monkeypatch.setattr(logbook, "text_blocks", partial(text_blocks, size=2000))
    cells = [("---" if k % 50 == 7 else "OVER" if k > 1500 and k % 60 == 1 else "" if sparse and k % 3 else "9.01")
             for k in range(3000)]
    rows = "".join(f"{k},{c},121\n" for k, c in enumerate(cells))
    log = read_log(f"time [s],p1 [bar g],T2 [degC]\n{rows}".encode())
    refused = [(k + 2, c) for k, c in enumerate(cells) if c in ("---", "OVER")]
    assert log.rejected_counts == {"the instrument says that it has no value": len(refused)}
    assert [(r.row, r.content) for r in log.rejected] == refused
    assert log.missing["p_line"] == sum(c != "9.01" for c in cells)
