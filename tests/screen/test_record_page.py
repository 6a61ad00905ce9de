"""The Record page without a browser: what it will say, what keeps it back, readings of all kinds, records reopened."""

import io
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.job.case.casefile import to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import HEATED, HEATING_STEAM, REDUCING_VALVE
from engine.job.case.fields_instruments import HALF_WIDTH
from engine.job.case.fields_path import EXPECTED, READING, UNDECIDED
from engine.job.case.rows import Entry
from engine.job.paper import usual_paper
from engine.job.record import facts_of, headline, record_html, summary
from engine.job.rehearsal.demo_log import demo_log
from engine.job.result import reduce
from engine.job.result.intake import read
from engine.job.result.runs import run_of_log, runs_typed
from engine.job.runsheet import tick
from engine.job.runsheet.readings import with_reading
from engine.screen.style import escaped
from engine.steam.units import SI, US

ROOT = Path(__file__).parents[2]
STATED = {"sampling_kind": HALF_WIDTH, "sampling": Entry(0.5, "%pt")}


def opened(case=DEMO, page="record"):
    app = AppTest.from_file(ROOT / "app.py", default_timeout=60)
    app.query_params["case"] = to_link(case)
    app.run()
    app.switch_page(f"engine/screen/pages/{page}.py").run()
    assert not app.exception
    return app


@pytest.fixture(scope="module")
def shared():
    return opened()


@pytest.fixture
def at(shared):
    """Show a case on one page kept for many tests; gives the page."""
    def show(case=DEMO, units="SI"):
        state = shared.session_state
        state["case"], state["units"], state["notice"] = case, units, None
        state["past"], state["future"], state["pinned"], state["logs"] = [], [], [], {}
        return ran(shared)
    return show


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def answer(app):
    return next(m.value for m in app.markdown if m.value.startswith("### "))


def told(app):
    table = next(t for t in (e.value for e in app.table) if "In the record" in t.columns)
    return dict(zip(table["What"], table["In the record"], strict=True))


def expected(case, result=None, units=SI, logs=()):
    facts = facts_of(case, result, units, logs)
    shape, sentence, _ = headline(facts)
    return f"### {shape} {escaped(sentence)}", {name: escaped(text) for name, text in summary(facts)}


def downloads(app):
    return [block.label for block in app.get("download_button") if "record" in block.label]


@pytest.fixture(scope="module")
def log():
    target = io.BytesIO()
    demo_log(target, DEMO, seed=4, x=0.972, duration=4500.0, every=30.0)
    file = io.BytesIO(target.getvalue())
    file.name = "run1.csv"
    return read(DEMO, file)


@pytest.mark.parametrize("units", [SI, US])
def test_a_single_reading_is_told_with_its_doubts(at, units):
    app = at(DEMO, units.name)
    assert (answer(app), told(app)) == expected(DEMO, units=units)
    assert "Exploration, not a result" in " ".join(m.value for m in app.markdown)
    assert told(app)["Made from"] == "the single reading in the case"
    assert downloads(app) == [f"Save the record on {usual_paper(units)}", "Save record and data"]


def test_typed_readings_go_into_the_record(at):
    case = tick(DEMO, "hold.permit", "08:15", "AB")
    for T in (121.0, 121.2, 121.1, 121.1, 121.3, 121.0):
        case = with_reading(case, run="1", T_exhaust=Entry(T, "°C"))
    app = at(case)
    assert (answer(app), told(app)) == expected(case, reduce(case, runs_typed(case)))
    assert told(app)["Made from"] == "run 1\\: 6 of 6 sets" and told(app)["Run sheet"] == "1 of 50 steps ticked"
    assert "Exploration" not in " ".join(m.value for m in app.markdown)


@pytest.mark.parametrize(("case", "words"), [
    (DEMO.with_(heat_loss_method=UNDECIDED), "heat loss: got not decided"),
    (DEMO.with_(sampling=None), "sampling representativeness: got not stated"),
    (DEMO.with_(question=EXPECTED), "an expectation is no test"),
    (DEMO.with_(p_exhaust=Entry(12.0, "bar", "absolute")), "Exhaust pressure: got 12"),
])
def test_what_keeps_the_record_back_is_said_with_what_to_do(at, case, words):
    app = at(case)
    assert words in app.error[0].value.replace("\\", "") and not downloads(app)
    assert ("○ No record yet" in answer(app)) if "Exhaust" not in words else True
    assert at(DEMO) and downloads(at(DEMO))  # and is gone with its cause


@pytest.mark.parametrize("case", [REDUCING_VALVE.with_(**STATED), HEATED.with_(**STATED),
                                  HEATING_STEAM.with_(question=READING, **STATED)])
def test_no_quality_and_other_methods_can_be_recorded(at, case):
    app = at(case)
    assert (answer(app), told(app)) == expected(case)
    assert downloads(app)


def test_remarks_and_people_go_into_the_case(at):
    app = at()
    app = ran(app.text_area(key="words deviations").set_value("Rain from *two* on."))
    app = ran(app.text_input(key="words tested_by").set_value("A. B."))
    case = app.session_state["case"]
    assert (case["deviations"], case["tested_by"]) == ("Rain from *two* on.", "A. B.")


def test_a_record_opened_again_brings_its_case_and_its_logs(at, log):
    case = DEMO.with_(title="From a record")
    result = reduce(case, (run_of_log(log),))
    data = record_html(case, result, SI, "A4", made="2025-03-04 14:20", logs=[log]).encode()
    app = ran(at().file_uploader(key="open").upload("record.html", data))
    assert app.session_state["case"] == case and app.success[0].value.startswith("Opened record")
    assert (answer(app), told(app)) == expected(case, result, logs=[log])
    app.switch_page("engine/screen/pages/readings.py")
    app = ran(app)
    assert any("run1" in m.value for m in app.markdown)
    app.switch_page("engine/screen/pages/record.py")
    ran(app)


@pytest.mark.parametrize(("name", "data"), [("record.html", b"<html></html>"), ("record.htm", b"\xff"),
                                            ("case.json", b"{}")])
def test_what_is_no_record_changes_nothing(at, name, data):
    case = DEMO.with_(title="Stays")
    app = ran(at(case).file_uploader(key="open").upload(name, data, "text/html"))
    assert app.session_state["case"] == case and "was not opened" in app.error[0].value


def test_a_case_file_still_opens(at):
    app = ran(at().file_uploader(key="open").upload("case.json", to_json(HEATED).encode()))
    assert app.session_state["case"] == HEATED


def test_what_users_write_does_nothing(at):
    bad = "<script>alert(1)</script> [a](http://x)"
    app = at(DEMO.with_(title=bad, place=bad, deviations=bad, tested_by=bad))
    for text in [m.value for m in (*app.markdown, *app.caption)]:
        assert "<script>" not in text and "](http" not in text
