"""Properties over generated logs: any dialect is read back the same, and the fast way agrees with the careful one."""

import datetime as dt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.measurement.logbook import read_log
from engine.measurement.logbook import table as logbook_table
from engine.measurement.logbook.cells import work
from engine.measurement.logbook.mapping import Column, Mapping
from engine.measurement.logbook.text import TextBlock
from engine.steam import InputError

HEADINGS = {
    "p_line": [("p1 [bar g]", 1e5), ("Leitungsdruck barg", 1e5), ("Line pressure (kPa gauge)", 1e3)],
    "T_exhaust": [("T2 [K]", 1.0), ("Exhaust temp (K)", 1.0), ("Abdampftemperatur / K", 1.0)],
}
NOISE = ["", "# logger", "Serial;7", "sep", "Readings of the day"]


@st.composite
def dialects(draw):
    return {
        "delimiter": draw(st.sampled_from(",;\t|")), "decimal": draw(st.sampled_from(".,")),
        "encoding": draw(st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "utf-16-be", "cp1252"])),
        "end": draw(st.sampled_from(["\n", "\r\n"])), "last_end": draw(st.booleans()), "quoted": draw(st.booleans()),
        "preamble": draw(st.lists(st.sampled_from(NOISE), max_size=3)), "blanks": draw(st.booleans()),
        "time": draw(st.sampled_from(["s", "iso", "dmy", "clock"])), "extra": draw(st.booleans()),
        "p": draw(st.integers(0, 2)), "T": draw(st.integers(0, 2))}


def as_text(dialect, seconds, p, T) -> bytes:
    """Write a log in the dialect; p in Pa and T in K are whole numbers of their least digit."""
    start = dt.datetime(2024, 5, 26, 0, 0, 1)
    stamp = {"s": lambda s: str(s), "iso": lambda s: (start + dt.timedelta(seconds=s)).isoformat(),
             "dmy": lambda s: f"{start + dt.timedelta(seconds=s):%d/%m/%Y %H:%M:%S}",
             "clock": lambda s: f"{start + dt.timedelta(seconds=s):%H:%M:%S}"}[dialect["time"]]
    p_head, p_unit = HEADINGS["p_line"][dialect["p"]]
    T_head, _ = HEADINGS["T_exhaust"][dialect["T"]]
    rows = [["time [s]" if dialect["time"] == "s" else "Time", p_head, T_head] + ["other"] * dialect["extra"]]
    for k, s in enumerate(map(int, seconds)):
        numbers = [f"{p[k] / p_unit:.5f}", f"{T[k]:.2f}"]
        rows.append([stamp(s)] + [n.replace(".", dialect["decimal"]) for n in numbers] + ["x"] * dialect["extra"])
    clash = dialect["delimiter"] == "," and dialect["decimal"] == ","

    def cell(text: str) -> str:
        return f'"{text}"' if dialect["quoted"] or (clash and "," in text) else text

    lines = list(dialect["preamble"])
    for k, row in enumerate(rows):
        lines.append(dialect["delimiter"].join(map(cell, row)))
        lines += [""] * (dialect["blanks"] and k == 1)
    text = dialect["end"].join(lines) + dialect["end"] * dialect["last_end"]
    return text.encode(dialect["encoding"])


@settings(max_examples=60, deadline=None)
@given(dialects(), st.lists(st.integers(1, 300), min_size=2, max_size=30), st.data())
def test_a_log_in_any_dialect_is_read_back(dialect, steps, data):
    seconds = np.cumsum(steps)
    count = len(seconds)
    p = np.array(data.draw(st.lists(st.integers(2_000_00, 40_000_00), min_size=count, max_size=count)), dtype=float)
    T = np.array(data.draw(st.lists(st.integers(370_00, 440_00), min_size=count, max_size=count))) / 100
    log = read_log(as_text(dialect, seconds, p, T))
    np.testing.assert_allclose(log.channels["p_line"], p, rtol=1e-12)
    np.testing.assert_allclose(log.channels["T_exhaust"], T, rtol=1e-12)
    np.testing.assert_allclose(log.time - log.time[0], seconds - seconds[0], atol=1e-9)
    assert log.basis == {"p_line": "gauge"}
    assert log.rejected == ()
    assert log.rows_read == count


MAPPING = Mapping((Column(0, "t", "time", "s"), Column(1, "p", "p_line", "Pa", "gauge"), Column(2, "r", "remark")))
CELLS = st.one_of(
    st.sampled_from(["9.01", "-0.5", "1e5", "1E+05", " 7", "7 ", "", "nan", "inf", "-9999", "n/a", "0x1", "1_0", "1e",
                     ".", "5-", "+5", "--5", "1 000", "TRUE", "#N/A", "=1", "1e999", "007", "5 Pa", '"5"', "- 5",
                     "1.5.2", "\u0661"]),
    st.text("0123456789.eE+- x", max_size=8), st.floats(-1e5, 1e8, allow_nan=False).map(repr))


@settings(max_examples=100, deadline=None)
@given(st.lists(CELLS, min_size=1, max_size=20))
def test_the_fast_way_and_the_careful_way_agree(cells):
    lines = "".join(f"{k},{cell},\n" for k, cell in enumerate(cells) if "," not in cell)
    block = TextBlock(lines.encode(), 1.0, 0, True)
    if not lines:
        return
    words = logbook_table.Words()
    careful = work(logbook_table._careful(block, MAPPING), MAPPING, words)
    for known in (frozenset(), words.known):  # the second time the words of this log are known
        fast = logbook_table._fast(block, MAPPING, known)
        assert fast is not None
        done = work(fast, MAPPING)
        np.testing.assert_array_equal(done.values["p_line"], careful.values["p_line"])
        np.testing.assert_array_equal(done.alive, careful.alive)
        assert sorted(f[:3:2] for f in done.faults) == sorted(f[:3:2] for f in careful.faults)


@settings(max_examples=150, deadline=None)
@given(st.one_of(st.binary(max_size=300), st.text(max_size=200).map(str.encode),
                 st.lists(st.sampled_from(["time [s]", "p1 [bar g]", ",", ";", "\n", "1", "2,5", '"', "\t", "\0", "é",
                                           "2024-05-06"]), max_size=40).map(lambda parts: "".join(parts).encode())))
def test_any_bytes_are_read_or_refused_never_anything_else(data):
    try:
        log = read_log(data)
    except InputError as error:
        assert error.faults
        assert str(error)
        return
    assert len(log) > 0
    assert len(log) <= log.rows_read
    for values in log.channels.values():
        assert values.dtype == np.float64
        assert values.shape == log.rows.shape


@pytest.mark.parametrize("cell", ["9.01", "0.1", "123456.789", "1e-7", "2.2250738585072014e-308", "179.99999999999997"])
def test_numbers_are_read_to_the_last_bit(cell):
    log = read_log(f"p1 [Pa g],T2 [K]\n{cell},{cell}\n5,5\n".encode())
    assert log.channels["p_line"][0] == float(cell)
