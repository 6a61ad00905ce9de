"""Tables in the case: rows as entered, passed on whole, each cell under the rules of its column."""

import json

import pytest

from engine.job.case import Case, faults_of
from engine.job.case.casefile import from_json, from_link, to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry, Row
from engine.steam.errors import InputError

READINGS = FIELDS["readings"]
SET = READINGS.row(run="1", p_line=Entry(9.0, "bar", "gauge"), T_exhaust=Entry(121.1, "°C"), remark="wind rises")
CASE = DEMO.with_(readings=(SET, SET.with_(T_exhaust=Entry(250.0, "°F"))))


def refusal(rows, name="readings"):
    document = json.loads(to_json(DEMO))
    document["values"][name] = rows
    with pytest.raises(InputError) as caught:
        from_json(json.dumps(document))
    return str(caught.value)


def test_a_row_holds_every_column_and_cannot_be_changed():
    assert SET["p_exhaust"] is None and SET["remark"] == "wind rises" and SET["time"] is None
    assert SET.with_(remark="") != SET and SET["remark"] == "wind rises"
    assert hash(CASE) != hash(DEMO) and Case(dict(CASE.values)) == CASE
    with pytest.raises(InputError, match="columns of readings typed: got pressure, needs one of: run, time"):
        READINGS.row(pressure=3)


def test_tables_come_back_from_file_and_link_without_their_empty_cells():
    assert from_json(to_json(CASE)) == CASE and from_link(to_link(CASE)) == CASE
    assert "null" not in to_json(CASE.with_(readings=(SET,))).split('"readings"')[1].split("]")[0]


def test_thirty_sets_fit_into_a_link():
    many = DEMO.with_(readings=tuple(SET.with_(time=Entry(2.0 * k, "min"), T_exhaust=Entry(121 + k % 7 / 10, "°C"))
                                     for k in range(30)))
    assert from_link(to_link(many)) == many
    assert len(to_link(many)) < 4000


def test_a_cell_is_refused_by_its_place():
    cold = CASE.with_(readings=(SET, SET.with_(T_exhaust=Entry(-5.0, "°C"))))
    assert [str(f).splitlines()[0] for f in faults_of(cold)] == [
        "Readings typed, row 2, measured temperature: got -5 °C, needs 0 to 500 °C"]
    assert faults_of(cold)[0].name == "readings[2].T_exhaust"


@pytest.mark.parametrize(("value", "limit"), [("", "got nothing"), ((3,), "got (3,)"), ([], "got []"),
                                              ((Row((("run", "1"),)),), "got (Row(")])
def test_what_is_no_table_is_refused(value, limit):
    fault = faults_of(Case({**DEMO.values, "readings": value}))[0]
    assert str(fault).startswith(f"Readings typed: {limit}") and "a table of at most 400 rows" in str(fault)


@pytest.mark.parametrize(("rows", "message"), [
    ("a few", "Readings typed: got a few, needs a list of at most 400 rows"),
    ([{}] * 401, "Readings typed: got 401 rows, needs a list of at most 400 rows"),
    ([[1, 2]], "Readings typed, row 1: got [1, 2], needs cells by name: run, time, p_line"),
    ([{"x": 1}], "Readings typed, row 1: got {'x': 1}, needs cells by name"),
    ([{}, {"p_line": 9}], 'Readings typed, row 2, line pressure: got 9, needs an object with "value" and "unit"'),
    ([{"p_line": {"value": 9, "unit": "furlong"}}], "unit of readings typed, row 1, line pressure: got furlong"),
    ([{"p_line": {"value": 9, "unit": "bar"}}], "basis of readings typed, row 1, line pressure: got nothing"),
    ([{"run": 3}], "Readings typed, row 1, run: got 3, needs text"),
    ([{"run": "a" * 5000}], "Readings typed, row 1, run: got 5000 characters"),
])
def test_a_file_with_a_broken_table_is_refused_with_the_place(rows, message):
    assert refusal(rows).splitlines()[0].startswith(message)


def test_a_choice_in_a_table_is_checked():
    assert "one of: line gauge certificate" in refusal([{"correction": "luck"}], "switched_off")
