"""The case as a file and as a link: what is saved comes back; what cannot be used is refused with its reason."""

import base64
import json
import zlib

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from engine.job.case import BLANK, Case, faults_of
from engine.job.case.casefile import FORMAT, LISTED, MAX_BYTES, MAX_TEXT, SCHEMA, from_json, from_link, to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.steam.errors import InputError
from engine.steam.units import UNITS
from tests.job.any_case import CASES

SAVED = "open the file as it was saved, or save the case once more"


def document(**values):
    """The demo case as a document, with some of its values replaced."""
    whole = json.loads(to_json(DEMO))
    whole["values"].update(values)
    return whole


def refused(data, read=from_json):
    """The lines of the refusal."""
    with pytest.raises(InputError) as caught:
        read(data if isinstance(data, str | bytes) else json.dumps(data))
    return str(caught.value).splitlines()


def word_of(thing):
    """Any JSON value packed as a link is."""
    return base64.urlsafe_b64encode(zlib.compress(json.dumps(thing).encode())).decode().rstrip("=")


# ---- there and back


@settings(max_examples=15, deadline=None)
@given(CASES)
def test_a_usable_case_comes_back_from_file_and_link(values):
    case = DEMO.with_(**values)
    assume(not faults_of(case))
    assert from_json(to_json(case)) == case
    assert from_json(to_json(case).encode()) == case
    assert from_link(to_link(case)) == case


@pytest.mark.parametrize("case", [BLANK, DEMO], ids=["blank", "demo"])
def test_what_a_first_visit_shows_comes_back(case):
    assert from_json(to_json(case)) == from_link(to_link(case)) == case


def test_the_file_names_its_format_schema_and_program():
    whole = json.loads(to_json(DEMO))
    assert (whole["format"], whole["schema"]) == ("steam quality case", 1)
    assert whole["program"].count(".") >= 1
    assert whole["values"]["p_line"] == {"value": 9.0, "unit": "bar", "basis": "gauge"}
    assert set(whole["values"]) == set(FIELDS)


def test_a_file_may_leave_out_entries_and_come_from_another_program_version():
    short = {"format": FORMAT, "schema": SCHEMA, "values": {"title": "only this"}}
    assert from_json(json.dumps(short)) == BLANK.with_(title="only this")
    assert from_json(json.dumps(document() | {"program": "99.0", "made": "by hand"})) == DEMO


def test_words_of_other_scripts_come_back():
    case = DEMO.with_(title="蒸気 – Dampf ≥ 97 % 🙂", note='line one\n"line two"\t\\ \x00 </script>')
    assert from_json(to_json(case)) == from_link(to_link(case)) == case


def test_usual_spellings_of_units_are_understood():
    values = {"T_exhaust": {"value": 250, "unit": "degF"}, "p_line": {"value": 150, "unit": "psig", "basis": "gauge"}}
    case = from_json(json.dumps(document(**values)))
    assert (case["T_exhaust"], case["p_line"]) == (Entry(250.0, "°F"), Entry(150.0, "psi", "gauge"))


def test_a_byte_order_mark_does_no_harm():
    assert from_json(b"\xef\xbb\xbf" + to_json(DEMO).encode()) == DEMO
    assert from_json("\ufeff" + to_json(DEMO)) == DEMO


def test_a_link_is_one_short_word_for_an_address():
    assert set(to_link(DEMO)) <= set("ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789-_")
    assert len(to_link(DEMO)) < 2500
    assert len(to_link(BLANK)) < 30


# ---- not a case at all


@pytest.mark.parametrize(("data", "got"), [
    (b"", "Expecting value: line 1 column 1 (char 0)"),
    (b"p1;p2;T2\n9;1;121\n", "Expecting value: line 1 column 1 (char 0)"),
    (to_json(DEMO)[:200], "Unterminated string"),
    (to_json(DEMO)[:-3].encode(), "Expecting ',' delimiter"),
    (to_json(DEMO) + "}", "Extra data"),
    ("[" * 100_000, "brackets nested too deeply"),
    (to_json(DEMO).replace("121.1", "NaN"), "NaN in place of a number"),
    (to_json(DEMO).replace("121.1", "-Infinity"), "-Infinity in place of a number"),
    (to_json(DEMO).replace("121.1", "9" * 5000), "Exceeds the limit"),
], ids=["empty", "CSV", "cut off", "cut off, bytes", "something after it", "deep", "NaN", "infinity", "5000 digits"])
def test_a_file_that_is_not_json(data, got):
    lines = refused(data)
    assert lines[0].startswith(f"case file: got {got}")
    assert lines[0].endswith(", needs a JSON file as saved by this program")
    assert lines[1:] == [f"  - {SAVED}"]


@pytest.mark.parametrize(("data", "got", "hint"), [
    (b"\xff\xfe\x00\x01", "text in UTF-16", "save it as UTF-8"),
    (b"\x89\x80", "bytes that are not text", SAVED),
    (b"PK\x03\x04\x80\x81", "a ZIP archive or a workbook",
     "unpack it, and open the case or the record in it; logs go to the Readings page"),
], ids=["UTF-16", "bytes", "zip"])
def test_a_file_that_is_not_text(data, got, hint):
    assert refused(data) == [f"case file: got {got}, needs a JSON file in UTF-8", f"  - {hint}"]


@pytest.mark.parametrize("thing", [None, 3, "case", [], {}, [DEMO["title"]], document() | {"format": "other"},
                                   document() | {"format": None}], ids=repr)
def test_json_of_another_kind(thing):
    assert refused(json.dumps(thing)) == ["case file: got a JSON document of another kind, needs a document with "
                                          '"format": "steam quality case"', f"  - {SAVED}"]


@pytest.mark.parametrize("schema", [0, -1, 1.0, "1", True, None, [1]], ids=repr)
def test_a_schema_that_is_none(schema):
    lines = refused(document() | {"schema": schema})
    assert lines[0].startswith("schema of the case file: got ")
    assert lines[0].endswith(", needs a whole number from 1 to 1")


def test_a_newer_schema_is_refused_with_the_reason():
    assert refused(document() | {"schema": 2}) == [
        "schema of the case file: got 2, needs at most 1",
        "  - it was saved by a newer version of this program",
        "  - open it with the version that saved it"]


@pytest.mark.parametrize("values", [None, [], "x", 5], ids=repr)
def test_values_that_are_no_object(values):
    lines = refused(document() | {"values": values})
    assert lines[0] == f"values of the case file: got {type(values).__name__}, needs a JSON object of entries"


@pytest.mark.parametrize("size", [MAX_BYTES + 1, 3 * MAX_BYTES])
def test_a_file_too_large_is_not_even_read(size):
    assert refused(b"[" * size) == [f"case file: got {size} bytes, needs at most 5000000 bytes", f"  - {SAVED}"]


# ---- nonsense inside a case


@pytest.mark.parametrize(("name", "raw", "line"), [
    ("p_line", {"value": "9", "unit": "bar", "basis": "gauge"}, "Line pressure: got 9, needs a finite number"),
    ("p_line", {"value": True, "unit": "bar", "basis": "gauge"}, "Line pressure: got True, needs a finite number"),
    ("p_line", {"value": None, "unit": "bar", "basis": "gauge"}, "Line pressure: got None, needs a finite number"),
    ("p_line", {"unit": "bar", "basis": "gauge"}, "Line pressure: got None, needs a finite number"),
    ("p_line", {"value": 10**400, "unit": "bar", "basis": "gauge"},
     "Line pressure: got 100000000000000000...0000000000000000000, needs a finite number"),
    ("p_line", {"value": 1e308, "unit": "bar", "basis": "gauge"},
     "Line pressure: got 1e+308 bar gauge, needs 0.042 to 163.99 bar gauge"),
    ("p_line", {"value": -1e308, "unit": "MPa", "basis": "gauge"},
     "Line pressure: got -1e+308 MPa gauge, needs 0.0042 to 16.399 MPa gauge"),
    ("p_line", {"value": 9, "unit": "furlong", "basis": "gauge"}, "unit of line pressure: got furlong, needs one of: "
     + ", ".join(UNITS["pressure"])),
    ("p_line", {"value": 9, "unit": "°C", "basis": "gauge"}, "unit of line pressure: got °C, needs one of: "
     + ", ".join(UNITS["pressure"])),
    ("p_line", {"value": 9, "unit": ["bar"], "basis": "gauge"}, "unit of line pressure: got ['bar'], needs one of: "
     + ", ".join(UNITS["pressure"])),
    ("p_line", {"value": 9, "basis": "gauge"}, "unit of line pressure: got nothing, needs one of: "
     + ", ".join(UNITS["pressure"])),
    ("p_line", {"value": 9, "unit": "bar"}, "basis of line pressure: got nothing, needs gauge or absolute"),
    ("p_line", {"value": 9, "unit": "bar", "basis": "vacuum"},
     "basis of line pressure: got vacuum, needs gauge or absolute"),
    ("p_line", {"value": 9, "unit": "bar", "basis": {}}, "basis of line pressure: got {}, needs gauge or absolute"),
    ("p_line", {"value": 9, "unit": "bar", "basis": "gauge", "colour": "red"},
     "Line pressure: got {'basis': 'gauge', 'colour': 'red', 'unit': 'bar', 'value': 9}, "
     'needs an object with "value" and "unit"'),
    ("p_line", 9, 'Line pressure: got 9, needs an object with "value" and "unit"'),
    ("p_line", [9, "bar"], """Line pressure: got [9, 'bar'], needs an object with "value" and "unit\""""),
    ("p_line", None, 'Line pressure: got None, needs an object with "value" and "unit"'),
    ("T_exhaust", {"value": 121, "unit": "°C", "basis": "gauge"},
     "basis of measured temperature: got gauge, needs none"),
    ("T_exhaust", {"value": 1211, "unit": "°C"}, "Measured temperature: got 1211 °C, needs 0 to 500 °C"),
    ("question", "why", "Question: got why, needs one of: reading, expected"),
    ("question", 1, "Question: got 1, needs text"),
    ("question", None, "Question: got None, needs text"),
    ("title", ["a"], "Title: got ['a'], needs text"),
    ("title", "x" * (MAX_TEXT + 1), "Title: got 4001 characters, needs at most 4000 characters"),
    ("title", "half \ud83d", "Title: got half of a character, needs whole characters"),
    ("colour", "red", "entry of the case: got colour, needs an entry that this version knows"),
    ("x" * 500, "red", f"entry of the case: got {'x' * 120}, needs an entry that this version knows"),
], ids=lambda value: str(value)[:40])
def test_nonsense_in_an_entry(name, raw, line):
    assert refused(document(**{name: raw}))[0] == line
    assert refused(word_of([SCHEMA, {name: raw}]), from_link)[0] == line.replace("0.042 to 163.99", "0.03675 to 163.99"
                                                                                ).replace("0.0042 to 16.399",
                                                                                          "0.003675 to 16.399")


def test_an_entry_nested_deeply_is_refused_shortly():
    text = json.dumps(document(p_line="here")).replace('"here"', "[" * 900 + "]" * 900)
    assert refused(text)[0].startswith("Line pressure: got [[[[")
    assert len(refused(text)[0]) < 120


def test_every_entry_that_cannot_be_used_is_named_at_once():
    lines = refused(document(p_line={"value": 9, "unit": "furlong", "basis": "gauge"}, colour="red",
                             T_exhaust={"value": "hot", "unit": "°C"}, question="why",
                             wetness={"value": 120, "unit": "%"}))
    got = [line.split(":")[0] for line in lines if not line.startswith("  -")]
    assert sorted(got) == ["Expected wetness", "Measured temperature", "Question", "entry of the case",
                           "unit of line pressure"]


def test_entries_that_do_not_go_together_are_refused():
    lines = refused(document(p_exhaust={"value": 12, "unit": "bar", "basis": "absolute"}))
    assert lines[0] == ("Exhaust pressure: got 12 bar absolute, needs less than the line pressure at the tapping, "
                        "9.92969 bar absolute")


def test_a_great_many_faults_are_counted_not_listed():
    lines = refused(document(**{f"z{k}": k for k in range(2000)}))
    said = [line for line in lines if not line.startswith("  -")]
    assert len(said) == LISTED + 1
    assert said[-1] == f"case: got {2000 - LISTED} more entries like these, needs none"


# ---- links


def test_a_link_holds_the_case_only():
    assert from_link(word_of([1, {"title": "from a link"}])) == BLANK.with_(title="from a link")


@pytest.mark.parametrize("word", [
    "nonsense", "", "%%%", "é", "A", to_link(DEMO)[:-10], to_link(DEMO)[5:], to_link(DEMO)[:40] + "AAAA",
    "x" + to_link(DEMO), word_of(3), word_of([1]), word_of([1, {}, 2]), word_of("ab c"), word_of(None),
    base64.urlsafe_b64encode(b"no deflate").decode(), base64.urlsafe_b64encode(zlib.compress(b"{")).decode(),
    base64.urlsafe_b64encode(zlib.compress(b"\xff\xff")).decode(),
    base64.urlsafe_b64encode(zlib.compress(b"[" * 90_000)).decode(),
], ids=range(18))
def test_a_link_that_holds_no_case(word):
    assert refused(word, from_link) == [
        f"case in the link: got “{word[:40]}”, needs a link made by this program, copied whole",
        "  - copy it once more from where it came, from the first to the last letter"]


def test_a_bomb_in_a_link_is_not_unpacked():
    import tracemalloc

    bomb = base64.urlsafe_b64encode(zlib.compress(b" " * 20_000_000, 9)).decode()
    tracemalloc.start()
    lines = refused(bomb, from_link)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert lines[0].startswith("case in the link: got “eN")
    assert peak < 5_000_000


@pytest.mark.parametrize(("thing", "line"), [
    ([2, {}], "schema of the link: got 2, needs at most 1"),
    (["1", {}], "schema of the link: got 1, needs a whole number from 1 to 1"),
    ([1, []], "values of the link: got list, needs a JSON object of entries"),
], ids=str)
def test_a_link_of_another_kind(thing, line):
    assert refused(word_of(thing), from_link)[0] == line


@settings(max_examples=40, deadline=None)
@given(st.integers(0, len(to_link(DEMO)) - 1), st.characters(codec="utf-8"))
def test_a_letter_changed_on_the_way_is_refused_or_still_a_usable_case(place, letter):
    word = to_link(DEMO)
    try:
        case = from_link(word[:place] + letter + word[place + 1:])
    except InputError:
        return
    assert isinstance(case, Case) and not faults_of(case)


@settings(max_examples=40, deadline=None)
@given(st.recursive(st.none() | st.booleans() | st.floats() | st.integers() | st.text(max_size=5),
                    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(
                        st.sampled_from(["value", "unit", "basis"]), inner, max_size=3), max_leaves=6),
       st.sampled_from(list(FIELDS)))
def test_any_json_in_an_entry_is_taken_or_refused_in_words(raw, name):
    text = json.dumps(document(**{name: raw}))
    try:
        case = from_json(text)
    except InputError as error:
        assert all(fault.limit for fault in error.faults)
    else:
        assert not faults_of(case) and from_json(to_json(case)) == case
