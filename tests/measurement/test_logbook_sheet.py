"""Workbooks: values as stored, nothing computed, sizes checked before anything is unpacked."""

import datetime as dt
import io
import zipfile

import numpy as np
import openpyxl
import pytest

from engine.measurement.logbook import propose_mapping, read_log
from engine.measurement.logbook import sheet as logbook_sheet
from engine.steam import InputError

HEAD = ["Time", "p1 [bar g]", "T2 [°C]", "Remark"]
START = dt.datetime(2024, 5, 6, 7, 8, 9)


def book(*rows, **sheets) -> bytes:
    workbook = openpyxl.Workbook()
    for name, content in ({"Sheet": rows} if rows else {} | sheets).items():
        sheet = workbook.active if name == "Sheet" else workbook.create_sheet(name)
        for row in content:
            sheet.append(row)
    file = io.BytesIO()
    workbook.save(file)
    return file.getvalue()


def usual(count=4):
    return [[START + dt.timedelta(seconds=5 * k), 9.01 + k / 100, 121.3 + k / 10, None] for k in range(count)]


def test_a_sheet_with_preamble_and_dates():
    log = read_log(book(["Logger 7"], [], HEAD, *usual()))
    assert log.start == "2024-05-06T07:08:09"
    assert log.time.tolist() == [0, 5, 10, 15]
    np.testing.assert_allclose(log.channels["p_line"], 9.01e5 + 1e3 * np.arange(4))
    assert log.rows.tolist() == [4, 5, 6, 7]  # as the spreadsheet program numbers them
    assert log.rejected == ()


def test_every_cell_that_is_no_reading_is_listed():
    at = START + dt.timedelta(hours=1)
    log = read_log(book(HEAD, *usual(), [at, True, "#N/A", None], [None, 9.1, 121.0, None], [at, "=A1", "n/a", "gauge"],
                        [at, "9.2", at, None], [at, -5, 121.0, None], ["=NOW()", 9.0, 121.0, None], [None] * 4,
                        [at, 9.1, 121.0, None, "x"], ["later", 9.1, 121.0, None]))
    assert [(r.row, r.column, r.content, r.reason.split(";")[0]) for r in log.rejected] == [
        (6, "T2 [°C]", "#N/A", "an error value of the spreadsheet"), (6, "p1 [bar g]", "True", "not a number"),
        (7, "Time", "", "no time in this row"), (8, "T2 [°C]", "n/a", "the instrument says that it has no value"),
        (8, "p1 [bar g]", "=A1", "a formula without a stored value"),
        (9, "T2 [°C]", "2024-05-06 08:08:09", "not a number"),
        (10, "p1 [bar g]", "-5", "outside what this channel can be"),
        (11, "Time", "=NOW()", "a formula without a stored value"),
        (13, "", "x", "more cells than the heading has columns"),
        (14, "Time", "later", "not a time in a form known here")]
    assert log.channels["p_line"][log.rows == 9] == pytest.approx(9.2e5)  # a number kept as text is a number
    assert log.blank_rows == 1
    assert log.remarks[0].text == "gauge"


def test_a_formula_gives_the_value_that_was_stored_with_it():
    plain = book(HEAD[:3], [START, 9.0, 121.0])
    changed = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(plain)) as old, zipfile.ZipFile(changed, "w") as new:
        for part in old.namelist():
            text = old.read(part)
            if part.endswith("sheet1.xml"):
                text = text.replace(b"<v>121</v>", b"<f>120+1</f><v>121.5</v>")
            new.writestr(part, text)
    log = read_log(changed.getvalue())
    assert log.channels["T_exhaust"][0] == pytest.approx(394.65)  # not computed: 120 + 1 is another number


def test_date_and_time_of_day_in_two_columns():
    rows = [[dt.date(2024, 5, 6), dt.time(7, 8, k), 9.0] for k in range(3)]
    log = read_log(book(["Date", "Time", "p1 [bar g]"], *rows))
    assert (log.start, log.time.tolist()) == ("2024-05-06T07:08:00", [0, 1, 2])


@pytest.mark.parametrize(("cells", "start", "time"), [
    ([dt.time(7, 8), dt.time(7, 9)], "07:08:00", [0, 60]),
    ([dt.timedelta(hours=25), dt.timedelta(hours=26)], "", None),
    ([45418.297326, 45418.297326 + 1 / 86400], "2024-05-06T07:08:08.966", [0, 1]),
    (["06.05.2024 07:08", "06.05.2024 07:09"], "2024-05-06T07:08:00", [0, 60]),
])
def test_other_ways_a_sheet_holds_time(cells, start, time):
    log = read_log(book(["Time", "p1 [bar g]"], *([c, 9.0] for c in cells)))
    if time is None:
        assert log.time[1] - log.time[0] == 3600
    else:
        assert (log.start, log.time.tolist()) == (start, time)


def test_the_sheet_with_the_readings_is_found_and_another_can_be_told():
    data = book(Cover=[["a report"]], Log=[["time [s]", "p1 [bar g]", "T2 [°C]"], [0, 9, 121], [5, 9.1, 122]],
                Other=[["time [s]", "p1 [bar g]"], [0, 5], [1, 6]])
    proposal = propose_mapping(data)
    assert proposal.mapping.sheet == "Log"
    assert "not read: Sheet, Cover, Other" in proposal.notes[-1]
    assert read_log(data).channels["p_line"].tolist() == [9e5, 9.1e5]
    other = propose_mapping(data, sheet="Other").mapping
    assert read_log(data, other).channels["p_line"].tolist() == [5e5, 6e5]
    with pytest.raises(InputError, match="no sheet 'Nope'.*Cover, Log, Other"):
        propose_mapping(data, sheet="Nope")


def test_a_mapping_from_a_workbook_reads_the_same_table_as_text():
    mapping = read_log(book(["time [s]", "p1 [bar g]"], [0, 9.0], [5, 9.1])).mapping
    log = read_log(b"time [s];p1 [bar g]\n0;9.0\n5;9.1\n", mapping)
    assert log.channels["p_line"].tolist() == [9e5, 9.1e5]


def test_rows_come_in_blocks_with_progress(monkeypatch):
    monkeypatch.setattr(logbook_sheet, "ROWS_AT_ONCE", 100)
    seen = []
    log = read_log(book(["time [s]", "p1 [bar g]"], *([k, 9 + k / 1000] for k in range(450))), progress=seen.append)
    assert len(log) == 450
    assert log.rows.tolist() == list(range(2, 452))
    assert len(seen) == 6
    assert seen == sorted(seen)


def test_empty_sheets_and_damaged_parts_are_refused():
    with pytest.raises(InputError, match="a workbook of empty sheets"):
        read_log(book([None]))
    data = book(HEAD, *usual())
    changed = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(changed, "w") as new:
        for part in old.namelist():
            new.writestr(part, old.read(part)[:300] if part.endswith("sheet1.xml") else old.read(part))
    with pytest.raises(InputError, match="a damaged sheet"):
        read_log(changed.getvalue())


@pytest.mark.parametrize(("limit", "value", "words"), [
    ("MOST_UNPACKED", 1000, "unpacks to"), ("MOST_STRINGS", 10, "unpacks to"), ("MOST_PARTS", 3, "parts")])
def test_limits_of_what_a_workbook_may_hold(monkeypatch, limit, value, words):
    file = io.BytesIO(book(HEAD, *usual()))
    with zipfile.ZipFile(file, "a") as archive:  # the texts that sheets share; this one shares none
        archive.writestr("xl/sharedStrings.xml", "<sst></sst>")
    data = file.getvalue()
    assert len(read_log(data)) == 4
    monkeypatch.setattr(logbook_sheet, limit, value)
    with pytest.raises(InputError, match=words):
        read_log(data)
