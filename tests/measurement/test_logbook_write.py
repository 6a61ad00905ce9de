"""Logs written in the documented layout, and read back without a question."""

import io

import numpy as np
import pytest

from engine.measurement.logbook import read_log
from engine.measurement.logbook.write import write_log
from engine.steam import InputError

ALL = {"p_line": ("gauge", 9.01e5), "p_exhaust": ("absolute", 1.021e5), "T_exhaust": ("", 394.25),
       "T_line": ("", 453.15), "p_barometer": ("absolute", 1.008e5), "T_ambient": ("", 297.15),
       "sample_flow": ("", 31.7 / 3600), "condensate": ("", 1.25)}
CHANNELS = {name: value * (1 + 1e-3 * np.arange(5)) for name, (_, value) in ALL.items()}
BASIS = {name: basis for name, (basis, _) in ALL.items() if basis}
TIME = np.array([0.0, 5.0, 10.25, 20.0, 3600.5])


def written(*args, **kwargs) -> bytes:
    target = io.BytesIO()
    write_log(target, *args, **kwargs)
    return target.getvalue()


@pytest.mark.parametrize("start", ["", "2024-05-06T07:08:09", "2024-05-06T07:08:09.5+00:00", "07:08:09"])
@pytest.mark.parametrize("units", [{}, {"pressure": "kPa", "temperature": "°F", "mass flow": "lb/h", "mass": "lb"},
                                   {"pressure": "Pa", "temperature": "K", "mass flow": "kg/s"}])
def test_every_channel_comes_back(start, units):
    log = read_log(written(CHANNELS, time=TIME, start=start, basis=BASIS, units=units))
    assert log.start == start
    assert log.basis == BASIS
    np.testing.assert_allclose(log.time, TIME, atol=1e-9)
    for name, values in CHANNELS.items():
        np.testing.assert_allclose(log.channels[name], values, rtol=1e-15 if units.get("pressure") == "Pa" else 4e-15)
    assert log.rejected == ()
    assert log.notes == ()


def test_values_in_the_engine_s_units_come_back_the_same_to_the_last_bit():
    values = {"p_line": np.pi * 10.0 ** np.arange(-5, 9), "sample_flow": np.exp(np.arange(-7.0, 7))}
    log = read_log(written(values, units={"pressure": "Pa", "mass flow": "kg/s"}))
    for name in values:
        np.testing.assert_array_equal(log.channels[name], values[name])


def test_missing_readings_are_empty_cells_and_come_back_missing():
    values = {"T_exhaust": [394.25, np.nan, 394.45], "p_exhaust": [1e5, 1e5, np.inf]}
    log = read_log(written(values, time=[0, 5, 10]))
    assert log.missing == {"T_exhaust": 1, "p_exhaust": 1}
    assert log.rejected == ()


def test_reduced_readings_stand_beside_the_channels_and_are_not_taken_for_readings():
    log = read_log(written({"T_exhaust": [394.25], "x": [0.9712], "superheat": [20.9], "line_superheat": [0.1],
                            "wetness": [0.0288]}, texts={"status": ["good"]}))
    assert list(log.channels) == ["T_exhaust"]
    assert "quality [1]" in log.notes[0]


def test_texts_that_a_spreadsheet_would_compute_are_made_harmless_and_come_back():
    remarks = ["=1+1", "+cmd", "-5", "@x", "plain, with \"quotes\" and\nlines", "'already", "", "<b>"]
    data = written({"T_exhaust": np.full(8, 394.25)}, time=np.arange(8), texts={"remark": remarks})
    assert b"\n=" not in data
    assert b",=" not in data
    assert [r.text for r in read_log(data).remarks] == [r for r in remarks if r]


def test_a_log_written_is_the_log_read():
    first = read_log(b"time,p1 [bar g],T2 [degC],remark\n2024-05-06T07:08:09Z,9.01,121.3,\n"
                     b"2024-05-06T07:08:14Z,9.02,,note\n"
                     b"2024-05-06T07:08:19Z,,,lost otherwise\n2024-05-06T07:08:24Z,9.02,121.4,\n")
    again = read_log(written(first))
    assert again.start == first.start == "2024-05-06T07:08:09+00:00"
    np.testing.assert_array_equal(again.time, first.time)
    for name, values in first.channels.items():
        np.testing.assert_allclose(again.channels[name], values, rtol=1e-15)
    assert [r.text for r in again.remarks] == ["note", "lost otherwise"]


def test_paths_and_text_files(tmp_path):
    write_log(tmp_path / "a.csv", CHANNELS, time=TIME, basis=BASIS)
    target = io.StringIO()
    write_log(target, CHANNELS, time=TIME, basis=BASIS)
    assert (tmp_path / "a.csv").read_text(encoding="utf-8") == target.getvalue()
    assert len(read_log(tmp_path / "a.csv")) == 5


@pytest.mark.parametrize(("args", "kwargs", "words"), [
    (({"p3": [1.0]},), {}, "quantity: got p3"),
    (({"p_line": [1.0]},), {"basis": {"p_line": "over"}}, "basis of p_line"),
    (({"p_line": [1.0]},), {"units": {"pressure": "ell"}}, "unit of a pressure"),
    (({"p_line": [1.0]},), {"units": {"colour": "red"}}, "no such kind"),
    (({"p_line": [1.0], "T_line": [1.0, 2.0]},), {}, "columns of one length"),
    (({"p_line": [1.0]},), {"time": [0.0, 1.0]}, "columns of one length"),
    (({"p_line": [1.0]},), {"texts": {"remark": []}}, "columns of one length"),
    (({"p_line": [1.0]},), {"time": [np.nan]}, "a finite time"), (({"p_line": ["a"]},), {}, "line pressure"),
    (({"p_line": [1.0]},), {"time": [0.0], "start": "yesterday"}, "an ISO stamp"),
])
def test_what_cannot_be_written_is_refused(args, kwargs, words):
    with pytest.raises(InputError, match=words):
        write_log(io.StringIO(), *args, **kwargs)
