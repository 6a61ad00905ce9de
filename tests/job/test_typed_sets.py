"""Typed readings as a grid: what a cell says is what the case holds; what it cannot hold is refused by its place."""

import pytest
from scenarios import FACTORY

from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.job.result.typed_sets import Edits, as_number, edited, grid, grid_columns, with_room
from engine.steam.units import SI, US

ROW = FIELDS["readings"].row
COLUMNS = grid_columns(FACTORY, SI)
SET = ROW(run="1", time=Entry(2.0, "min"), p_line=Entry(9.0, "bar", "gauge"), T_exhaust=Entry(121.1, "°C"))


def put(base, changed=None, added=(), deleted=(), columns=COLUMNS):
    return edited(FACTORY, columns, base, Edits(changed or {}, added, deleted))


def test_the_columns_are_those_of_the_table_with_units_and_bases():
    assert [c.name for c in COLUMNS] == [column.name for column in FIELDS["readings"].columns]
    headings = {c.name: c.heading for c in COLUMNS}
    assert headings["p_line"] == "Line pressure, bar gauge" and headings["T_exhaust"] == "Temperature, °C"
    assert headings["p_barometer"] == "Barometer, kPa absolute" and headings["run"] == "Run"
    assert {c.name: c.heading for c in grid_columns(FACTORY, US)}["p_line"] == "Line pressure, psi gauge"
    absolute = grid_columns(FACTORY.with_(p_line=Entry(10.0, "bar", "absolute")), SI)
    assert next(c.heading for c in absolute if c.name == "p_line") == "Line pressure, bar absolute"


def test_a_grid_shows_what_was_entered_and_converts_the_rest():
    case = FACTORY.with_(readings=(SET, SET.with_(p_line=Entry(147.0, "psi", "absolute"), time=None)))
    first, second = grid(case, COLUMNS)
    assert (first["p_line"], first["T_exhaust"], first["time"], first["p_exhaust"]) == ("9", "121.1", "2", "")
    assert float(second["p_line"]) == pytest.approx((147.0 * 6894.757 - 100_800) / 1e5, abs=1e-5)
    assert second["time"] == ""


def test_what_is_not_touched_stays_as_entered():
    psi = SET.with_(p_line=Entry(130.5, "psi", "gauge"))
    rows, faults = put((psi,), {0: {"T_exhaust": "121,4"}})
    assert rows == (psi.with_(T_exhaust=Entry(121.4, "°C")),) and not faults


def test_rows_are_added_changed_and_taken_out():
    rows, faults = put((SET, SET.with_(run="2")), {1: {"remark": "wind"}},
                       [{"run": "3", "p_line": "9.01", "T_exhaust": 121.2}, {}], [0])
    assert not faults and [row["run"] for row in rows] == ["2", "3"]
    assert rows[0]["remark"] == "wind" and rows[1]["p_line"] == Entry(9.01, "bar", "gauge")
    rows, _ = put((SET,), {0: {"T_exhaust": None, "run": None}})
    assert rows[0]["T_exhaust"] is None and rows[0]["run"] == ""


@pytest.mark.parametrize(("cells", "message"), [
    ({"T_exhaust": "warm"}, "Readings typed, row 1, measured temperature: got warm, needs a number, in °C"),
    ({"T_exhaust": "-5"}, "Readings typed, row 1, measured temperature: got -5 °C, needs 0 to 500 °C"),
    ({"p_line": "9 bar"}, "Readings typed, row 1, line pressure: got 9 bar, needs a number, in bar gauge"),
    ({"p_line": "1e9"}, "Readings typed, row 1, line pressure: got 1e+09 bar gauge, needs"),
    ({"sample_flow": "1.013,5"}, "got 1.013,5, needs a number"),
    ({"p_line": "9,017"}, "got 9,017, needs a number, in bar gauge\n  - the comma may be a decimal one"),
    ({"time": "nan"}, "got nan, needs a number, in min"),
])
def test_a_cell_that_cannot_be_is_refused_and_stays_empty(cells, message):
    rows, faults = put((SET,), {0: cells})
    assert message in str(faults[0]) and rows[0][next(iter(cells))] is None


def test_there_is_room_to_type_and_what_was_not_used_is_no_row():
    room = with_room((SET,))
    assert len(room) == 10 and room[0] == SET and len(with_room((SET,) * 9)) == 12
    assert len(with_room((SET,) * 400)) == 400
    assert put(room) == ((SET,), [])
    rows, _ = put(room, {3: {"T_exhaust": "121"}})
    assert len(rows) == 4 and rows[1] == ROW()  # an empty row between others stays, so that numbers do not move


def test_a_full_table_says_so():
    rows, faults = put((SET,) * 400, added=[{"run": "one more"}])
    assert len(rows) == 400 and "at most 400" in str(faults[0])


def test_unknown_columns_are_passed_over():
    assert put((SET,), {0: {"nonsense": "1"}}) == ((SET,), [])


@pytest.mark.parametrize(("text", "value"), [("9,01", 9.01), ("−3", -3.0), ("1e3", 1000.0), (" 7 ", 7.0), ("", None),
                                             ("1_000", None), ("inf", None), ("٣", None), ("1,2,3", None)])
def test_numbers_as_people_type_them(text, value):
    assert as_number(text) == value
