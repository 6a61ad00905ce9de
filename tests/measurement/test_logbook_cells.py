"""Numbers, times and headings, one cell at a time."""

import math

import numpy as np
import pytest

from engine.measurement.logbook.numbers import Signs, number_signs, read_number
from engine.measurement.logbook.time import (
    REASONS,
    count_unit,
    date_order,
    from_objects,
    read_times,
    text_unit,
)
from engine.measurement.logbook.words import recognise, unit_of


@pytest.mark.parametrize(("cell", "decimal", "thousands", "value"), [
    ("9.017", ".", "", 9.017), (" 9.017 ", ".", "", 9.017), ("9,017", ",", "", 9.017), ("-0.02", ".", "", -0.02),
    ("−0.02", ".", "", -0.02), ("+5", ".", "", 5.0), (".5", ".", "", 0.5), ("5.", ".", "", 5.0),
    ("1e-3", ".", "", 1e-3),
    ("1.5E+02", ".", "", 150.0), ("1,5E2", ",", "", 150.0), ("1,013.25", ".", ",", 1013.25),
    ("1.013,25", ",", ".", 1013.25),
    ("1 013,25", ",", "", 1013.25), ("1\u00a0013,25", ",", "", 1013.25), ("1\u202f013", ".", "", 1013.0),
    ("1'013.25", ".", "", 1013.25), ("1 234 567", ".", "", 1234567.0), ("007", ".", "", 7.0), ("0", ".", "", 0.0),
])
def test_numbers_as_people_write_them(cell, decimal, thousands, value):
    assert read_number(cell, decimal, thousands) == (value, "")


@pytest.mark.parametrize(("cell", "decimal", "thousands", "reason"), [
    ("1,23,456", ".", ",", "thousands sign in a place where none can stand"),
    ("12,34", ".", ",", "thousands sign in a place where none can stand"),
    ("1 23", ".", "", "thousands sign in a place where none can stand"),
    ("12,5", ".", "", "not written with this file's decimal sign"),
    ("1.013", ",", "", "not written with this file's decimal sign"),
    ("#WERT!", ".", "", "an error value of the spreadsheet"),
    ("∞", ".", "", "not a finite number"), ("-inf", ".", "", "not a finite number"),
    ("1e400", ".", "", "not a finite number"),
    ("-", ".", "", "the instrument says that it has no value"),
    ("OVER", ".", "", "the instrument says that it has no value"),
    ("+SUM(A1)", ".", "", "a formula without a stored value; nothing is computed here"),
    ("9\x07", ".", "", "control characters in the cell"),
    ("9.0 psi", ".", "", "a unit in the cell that is not the column's"),
    ("9.0 or so", ".", "", "not a number"), ("1e", ".", "", "not a number"), ("1_000", ".", "", "not a number"),
    ("٣", ".", "", "not a number"), ("1/2", ".", "", "not a number"),
    (".", ".", "", "the instrument says that it has no value"),
])
def test_what_is_no_number_and_why(cell, decimal, thousands, reason):
    value, why = read_number(cell, decimal, thousands)
    assert math.isnan(value)
    assert why == reason


def test_an_empty_cell_is_missing_not_wrong():
    for cell in ("", "  ", "\u00a0"):
        value, why = read_number(cell)
        assert math.isnan(value)
        assert why == ""


def test_the_column_s_own_unit_may_stand_in_the_cell():
    assert read_number("121,3 °C", ",", "", lambda unit: unit_of(unit)[1] == "°C") == (121.3, "")


@pytest.mark.parametrize(("cells", "signs"), [
    (["9.01", "121.3"], Signs(".", "")), (["9,01", "121,3"], Signs(",", "")), (["9", "121"], Signs(".", "")),
    (["1,013.2", "121.3"], Signs(".", ",")), (["1.013,2", "121,3"], Signs(",", ".")),
    (["0,021", "1,013"], Signs(",", "")), (["1,234,567"], Signs(".", ",")), (["1.234.567"], Signs(",", ".")),
    (["1234,567"], Signs(",", "")), (["1,013", "121.5"], Signs(".", ",")), (["9,1 bar", "n/a", ""], Signs(",", "")),
    (["1,013", "1,014"], Signs(",", "", False)), (["9,1", "9.1"], Signs(".", "", False)),
])
def test_the_decimal_sign_is_decided_by_the_cells_or_left_open(cells, signs):
    assert number_signs(cells) == signs


ISO = "2024-05-06T07:08:09"


@pytest.mark.parametrize(("cell", "order", "iso"), [
    ("2024-05-06T07:08:09", "ymd", ISO), ("2024-05-06 07:08:09", "ymd", ISO), ("2024/05/06 07:08:09", "dmy", ISO),
    ("2024-05-06T07:08:09Z", "ymd", ISO), ("2024-05-06T09:08:09+02:00", "ymd", ISO),
    ("2024-05-06T02:38:09-0430", "ymd", ISO),
    ("2024-05-06 07:08:09.25", "ymd", ISO + ".25"), ("2024-05-06 07:08:09,250", "ymd", ISO + ".25"),
    ("2024-05-06 07:08:09.123456789", "ymd", ISO + ".123456"),
    ("06.05.2024 07:08:09", "dmy", ISO), ("6.5.2024 7:08:09", "dmy", ISO), ("06.05.24 07:08:09", "dmy", ISO),
    ("05/06/2024 07:08:09", "mdy", ISO), ("5/6/2024 7:08:09 AM", "mdy", ISO), ("5/6/24, 7:08:09 a.m.", "mdy", ISO),
    ("24-05-06 07:08:09", "ymd", ISO), ("06-May-2024 07:08:09", "ymd", ISO), ("6 mai 2024 07:08:09", "ymd", ISO),
    ("6. Mai 2024, 07:08:09", "ymd", ISO), ("May 6, 2024 07:08:09", "ymd", ISO),
    ("Mon, 6 May 2024 07:08:09 GMT", "ymd", ISO),
    ("20240506T070809", "ymd", ISO), ("20240506 07:08:09", "ymd", ISO),
    ("06/05/2024 12:08:09 AM", "dmy", "2024-05-06T00:08:09"),
    ("06/05/2024 12:08:09 PM", "dmy", "2024-05-06T12:08:09"), ("2024-02-29 00:00", "ymd", "2024-02-29T00:00"),
    ("01.01.1969 00:00", "dmy", "1969-01-01T00:00"), ("6 févr. 2024 00:00", "ymd", "2024-02-06T00:00"),
    ("6 juil. 2024 00:00", "ymd", "2024-07-06T00:00"),
])
def test_stamps_as_logs_write_them(cell, order, iso):
    times = read_times(np.array([cell], dtype=object), "stamp", order)
    assert REASONS[times.reason[0]] == ""
    assert times.micros[0].astype("M8[us]") == np.datetime64(iso, "us")


@pytest.mark.parametrize(("cell", "order", "reason"), [
    ("2023-02-29 00:00", "ymd", "no such date"), ("31.04.2024 00:00", "dmy", "no such date"),
    ("13/13/2024", "mdy", "no such date"),
    ("05/06/2024", "ymd", "no such date"), ("2024-00-10", "ymd", "no such date"),
    ("2024-05-06 24:00", "ymd", "no such time"),
    ("2024-05-06 07:60", "ymd", "no such time"), ("2024-05-06 07:08:60", "ymd", "no such time"),
    ("2024-05-06 13:08 PM", "ymd", "no such time"), ("6 Foo 2024", "ymd", "not a time"),
    ("2024-05-06 later", "ymd", "not a time"),
    ("12.5", "ymd", "not a time"), ("", "ymd", "no time in this row"), ("   ", "ymd", "no time in this row"),
    ("٢٠٢٤-٠٥-٠٦", "ymd", "not a time"),
])
def test_stamps_that_are_none(cell, order, reason):
    times = read_times(np.array([cell], dtype=object), "stamp", order)
    assert REASONS[times.reason[0]].startswith(reason)


@pytest.mark.parametrize(("cell", "unit", "seconds"), [
    ("07:08", "clock", 25680), ("07:08:09", "clock", 25689), ("7:08:09.5", "clock", 25689.5),
    ("25:00:00", "clock", 90000),
    ("07:08:09 PM", "clock", 68889), ("75:30", "mm:ss", 4530), ("00:05.25", "mm:ss", 5.25),
])
def test_times_of_day_and_elapsed_clocks(cell, unit, seconds):
    times = read_times(np.array([cell.encode()]), unit)
    assert times.reason[0] == 0
    assert times.micros[0] == seconds * 1e6


def test_many_forms_in_one_column_are_each_read():
    cells = [f"{d}/{m}/2024 {h}:{s:02d}" for d in (1, 12) for m in (2, 11) for h in (3, 14) for s in (0, 59)] * 3
    cells += [f"{k} Unfug {'x' * k}" for k in range(100)]  # more forms than are read together
    cells += ["3/4/2024 5:06"]
    times = read_times(np.array(cells, dtype=object), "stamp", "dmy")
    assert (times.reason[:48] == 0).all()
    assert (times.reason[48:148] == REASONS.index("not a time in a form known here")).all()
    assert times.micros[-1].astype("M8[us]") == np.datetime64("2024-04-03T05:06")
    alone = [read_times(np.array([c], dtype=object), "stamp", "dmy").micros[0] for c in cells]
    assert (times.micros == alone).all()


def test_no_cells_give_no_times():
    assert read_times(np.empty(0, dtype="S19"), "stamp").micros.shape == (0,)
    assert from_objects([], "stamp", "ymd").micros.shape == (0,)


@pytest.mark.parametrize(("cells", "order"), [
    (["13/05/2024", "14/05/2024"], "dmy"), (["05/13/2024", "05/14/2024"], "mdy"),
    (["05/06/2024", "05/06/2024 01:00"], ""),
    (["05.06.2024", "06.06.2024"], "dmy"), (["05.13.2024"], "mdy"), (["2024-05-06"], "ymd"), (["31-05-06"], ""),
    (["01/06/2024 23:59:50", "02/06/2024 00:00:10"], "dmy"), (["06/01/2024 23:59:50", "06/02/2024 00:00:10"], "mdy"),
    (["24-12-30", "24-12-31"], "ymd"), (["6 May 2024"], "ymd"), ([], "ymd"),
])
def test_the_date_order_is_decided_by_the_data_or_left_open(cells, order):
    assert date_order(cells) == order


def test_the_form_of_time_cells_tells_their_unit():
    assert text_unit(["2024-05-06 07:08"] * 3) == "stamp"
    assert text_unit(["06.05.2024", "07.05.2024"]) == "date"
    assert text_unit(["07:08:09", ""]) == "clock"
    assert text_unit(["0.5", "1.0"]) == text_unit(["", "a"]) == text_unit([]) == ""


def test_the_size_of_numbers_tells_serial_days_and_epochs():
    assert count_unit(45418 + np.arange(5) / 8640) == "excel"
    assert count_unit(1.7e9 + np.arange(5)) == "unix"
    assert count_unit(1.7e12 + np.arange(5)) == "unix ms"
    assert count_unit(np.arange(5.0)) == count_unit(30_000 + np.arange(5.0)) == count_unit(np.empty(0)) == ""


@pytest.mark.parametrize(("heading", "channel", "unit", "basis"), [
    ("T2 [°C]", "T_exhaust", "°C", ""), ("Exhaust temp (degF)", "T_exhaust", "°F", ""),
    ("p1 / bar g", "p_line", "bar", "gauge"),
    ("Leitungsdruck;barg", "p_line", "bar", "gauge"), ("p1 [bar(g)]", "p_line", "bar", "gauge"),
    ("P2 (psia)", "p_exhaust", "psi", "absolute"), ("pa [kPa]", "p_barometer", "kPa", "absolute"),
    ("p_a / mbar", "p_barometer", "mbar", "absolute"), ("Barometer (inHg)", "p_barometer", "inHg", "absolute"),
    ("Luftdruck [hPa]", "p_barometer", "mbar", "absolute"), ("Timestamp", "time", "", ""),
    ("Datum/Uhrzeit", "time", "", ""),
    ("t [s]", "time", "s", ""), ("Elapsed (min)", "time", "min", ""), ("Time (mm:ss)", "time", "mm:ss", ""),
    ("Exhaust pressure, mbar g", "p_exhaust", "mbar", "gauge"), ("ExhaustTemp_F", "T_exhaust", "°F", ""),
    ("ExhaustPressure_kPa", "p_exhaust", "kPa", ""), ("p2_g_kPa", "p_exhaust", "kPa", "gauge"),
    ("Abdampftemperatur °C", "T_exhaust", "°C", ""), ("Abdampfdruck (bar abs)", "p_exhaust", "bar", "absolute"),
    ("Umgebungstemperatur", "T_ambient", "", ""), ("Ta / °C", "T_ambient", "°C", ""), ("Line T/°C", "T_line", "°C", ""),
    ("Température échappement (°C)", "T_exhaust", "°C", ""), ("Pression conduite (bar rel.)", "p_line", "bar", "gauge"),
    ("Presión línea [bar]", "p_line", "bar", ""), ("Presión atmosférica", "p_barometer", "", "absolute"),
    ("Caudal muestra kg/h", "sample_flow", "kg/h", ""), ("Temperatura scarico", "T_exhaust", "", ""),
    ("Pressione linea bar(a)", "p_line", "bar", "absolute"), ("Leidingdruk barg", "p_line", "bar", "gauge"),
    ("Condensate kg", "condensate", "kg", ""), ("Kondensat [g]", "condensate", "g", ""),
    ("Bemerkung", "remark", "", ""),
    ("Line press. kgf/cm2 g", "p_line", "kgf/cm²", "gauge"), ("Leitungsdruck barü", "p_line", "bar", "gauge"),
    ("p2 mmH2O", "p_exhaust", "mmH2O", ""), ("p₂ [bar]", "p_exhaust", "bar", ""),
    ("Exhaust Temp. (Deg. C)", "T_exhaust", "°C", ""),
    ("ambient pressure kPa", "p_barometer", "kPa", "absolute"), ("line pressure [bar gauge]", "p_line", "bar", "gauge"),
    ("Fecha", "date", "", ""), ("hora", "time", "", ""), ("tempo [s]", "time", "s", ""),
    # named, but not readings of a known channel
    ("Temp 3", "", "", ""), ("Pressure", "", "", ""), ("Exhaust temperature setpoint", "", "", ""),
    ("line superheat [K]", "", "", ""),
    ("quality [1]", "", "", ""), ("T", "", "", ""), ("", "", "", ""), ("airflow", "", "", ""),
    ("line to exhaust pressure", "", "", ""),
])
def test_headings_in_several_styles_and_languages(heading, channel, unit, basis):
    assert recognise(heading)[:3] == (channel, unit, basis)


def test_a_row_of_units_below_the_heading_is_used():
    assert recognise("Line pressure", "bar(g)")[:3] == ("p_line", "bar", "gauge")
    assert recognise("Exhaust temperature", "[°F]")[:3] == ("T_exhaust", "°F", "")


@pytest.mark.parametrize(("text", "found"), [
    ("Pa", ("pressure", "Pa", "")), ("PSIG", ("pressure", "psi", "gauge")),
    ("bar abs.", ("pressure", "bar", "absolute")),
    ("kg/cm²", ("pressure", "kgf/cm²", "")), ("°C", ("temperature", "°C", "")), ("ºC", ("temperature", "°C", "")),
    ("lb/hr", ("mass flow", "lb/h", "")), ("kPa(a)", ("pressure", "kPa", "absolute")), ("furlong", ("", "", "")),
    ("", ("", "", "")),
])
def test_units_by_their_spellings(text, found):
    assert unit_of(text) == found
