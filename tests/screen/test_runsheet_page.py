"""The Run sheet page without a browser: steps, hold points, ticks, readings, refusals, units."""

import re
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.job.case import faults_of
from engine.job.case.casefile import to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import EXAMPLES, HEATED, HEATING_STEAM
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.job.rehearsal import begin
from engine.job.rehearsal.link import to_link as to_rehearsal
from engine.job.rehearsal.scenario import Scenario
from engine.job.result.heated import reduce_heated
from engine.job.runsheet import headline, run_sheet, tick, ticks_of
from engine.job.runsheet.readings import with_reading
from engine.screen.style import escaped
from engine.steam.units import SI, US

ROOT = Path(__file__).parents[2]
PAGE = "engine/screen/pages/runsheet.py"


def held(case):
    """The case with every hold point ticked."""
    for step in run_sheet(case).held:
        case = tick(case, step.key, "2025-03-04 08:15", "AB")
    return case


READY = held(DEMO)


def opened(case):
    app = AppTest.from_file(ROOT / "app.py", default_timeout=60)
    app.query_params["case"] = to_link(case)
    app.run()
    app.switch_page(PAGE).run()
    assert not app.exception
    return app


@pytest.fixture(scope="module")
def shared():
    return opened(DEMO)


@pytest.fixture
def at(shared):
    """Show a case on one page kept for many tests; gives the page."""
    def show(case=DEMO, units="SI", part="hold", initials=""):
        state = shared.session_state
        state["case"], state["units"], state["notice"] = case, units, None
        state["past"], state["future"], state["pinned"] = [], [], []
        state["hand"], state["refused"], state["part"], state["run"] = initials, None, part, "1"
        return ran(shared)
    return show


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def words(app):
    return "\n".join(e.value for kind in (app.markdown, app.caption, app.success, app.warning, app.error) for e in kind)


def case_of(app):
    return app.session_state["case"]


def keyed(app, start):
    return [b.key for b in app.button if b.key and b.key.startswith(start)]


def write(app, run="1", table="readings", **typed):
    """Type a set of readings and press the button; names are headings of the columns."""
    count = len(case_of(app)[table])
    for name, value in typed.items():
        app.number_input(key=f"set {run} {count} {name}").set_value(value)
    return ran(app.button(key="write set").click())


@pytest.mark.parametrize("title", EXAMPLES)
def test_the_page_says_of_every_example_what_its_sheet_says(at, title):
    app, sheet, units = at(EXAMPLES[title]), run_sheet(EXAMPLES[title]), SI
    assert f"### {escaped(headline(sheet, units))}" in [m.value for m in app.markdown]
    for step in sheet.sections[0].steps:
        assert escaped(step.said.text(units)) in words(app)
    assert f"0 of {len(sheet.steps)} steps ticked." in words(app)
    assert "never permission to open a valve" in words(app)


@pytest.mark.parametrize("units", [SI, US])
def test_numbers_of_the_steps_stand_on_the_page(at, units):
    app = at(READY, units.name, "warm")
    for key in ("warm.wet", "warm.wait", "warm.flow"):
        assert escaped(run_sheet(DEMO).step(key).said.text(units)) in words(app)


@pytest.mark.parametrize("units", [SI, US])
def test_every_gauge_stands_on_the_page(at, units):
    tables = [t.value for t in at(DEMO, units.name).table]
    gauges = next(t for t in tables if "Settled" in t.columns)
    sheet = run_sheet(DEMO)
    assert list(gauges["Settled"]) == [escaped(g.settled.text(units)) for g in sheet.gauges]
    assert list(gauges["From"]) == [escaped(g.low.text(units)) for g in sheet.gauges]
    deviations = next(t for t in tables if "What to do" in t.columns)
    assert list(deviations["What to do"]) == [escaped(d.do.text(units)) for d in sheet.deviations]


def test_a_tick_needs_initials_and_then_goes_into_the_case(at):
    app = ran(at().button(key="tick hold.permit").click())
    assert "initials" in app.error[0].value and not case_of(app)["ticks"]
    app = ran(app.text_input(key="initials").set_value("AB"))
    assert not app.error
    app = ran(app.button(key="tick hold.permit").click())
    found = ticks_of(case_of(app))["hold.permit"]
    assert found.initials == "AB" and re.fullmatch(r"20\d\d-\d\d-\d\d \d\d:\d\d", found.time)
    assert "1 of 50 steps ticked." in words(app) and "8 hold points open" in words(app)


def test_a_tick_can_be_corrected_undone_and_taken_back(at):
    app = at(tick(DEMO, "hold.permit", "2025-03-04 08:15", "AB"))
    app = ran(app.text_input(key="remark of hold.permit").set_value("at the *gate*"))
    assert ticks_of(case_of(app))["hold.permit"].remark == "at the *gate*"
    assert "at the \\*gate\\*" in words(app)
    app = ran(app.text_input(key="initials of hold.permit").set_value(""))
    assert "initials" in app.error[0].value and ticks_of(case_of(app))["hold.permit"].initials == "AB"
    app = ran(app.button(key="untick hold.permit").click())
    assert not case_of(app)["ticks"]
    app = ran(app.button(key="undo").click())
    assert ticks_of(case_of(app))["hold.permit"].initials == "AB"


def test_nothing_starts_before_the_hold_points_are_ticked(at):
    app = at(DEMO, part="warm")
    assert all(app.button(key=key).disabled for key in keyed(app, "tick "))
    assert "Nothing here starts before all of them are ticked" in words(app)
    app = at(READY, part="warm")
    assert not any(app.button(key=key).disabled for key in keyed(app, "tick "))


def test_the_page_opens_where_something_is_left_to_do_with_the_initials_of_the_last_tick():
    app = opened(READY)
    assert keyed(app, "tick ")[0] == "tick setup.tapping"
    assert app.text_input(key="initials").value == "AB"


def test_a_set_of_readings_goes_into_the_case(at):
    app = write(at(READY), **{"p_line bar": 9.0, "T_exhaust °C": 121.1, "p_barometer kPa": 100.8})
    (row,) = case_of(app)["readings"]
    assert (row["run"], row["time"], row["T_exhaust"]) == ("1", Entry(0.0, "min"), Entry(121.1, "°C"))
    assert row["p_line"] == Entry(9.0, "bar", "gauge") and row["p_barometer"] == Entry(100.8, "kPa", "absolute")
    assert row["p_exhaust"] is None and not app.warning
    assert "Set 2 of 30, run 1" in words(app)
    app = write(app, **{"T_exhaust °C": 121.2})
    assert case_of(app)["readings"][1]["time"] == Entry(1.0, "min")  # the interval of the case later


def test_readings_are_typed_in_the_units_of_the_page(at):
    app = write(at(READY, "US"), **{"T_exhaust °F": 250.0, "p_line psi": 130.0})
    (row,) = case_of(app)["readings"]
    assert row["T_exhaust"] == Entry(250.0, "°F") and row["p_line"] == Entry(130.0, "psi", "gauge")


@pytest.mark.parametrize(("typed", "said"), [
    ({"T_exhaust °C": 100.4}, "stays at saturation"), ({"T_exhaust °C": 103.0}, "Too little superheat"),
    ({"T_exhaust °C": 150.5}, "Line superheated"), ({"sample_flow kg/h": 20.0}, "Falling sample flow"),
    ({"p_exhaust bar": 0.08}, "Back pressure"), ({"p_line bar": 8.5}, "Pressure swings"),
])
def test_what_a_set_shows_that_it_should_not_is_said_at_once(at, typed, said):
    assert said in write(at(READY), **typed).warning[0].value


@pytest.mark.parametrize(("typed", "said"), [
    ({}, "set of readings"), ({"T_exhaust °C": 1211.0}, "Readings typed, row 1, measured temperature"),
    ({"p_line bar": 900.0}, "line pressure"), ({"sample_flow kg/h": -3.0}, "sample flow"),
])
def test_a_set_that_cannot_be_is_refused_and_stays_typed(at, typed, said):
    app = write(at(READY), **typed)
    assert said in app.error[0].value.replace("\\", "") and not case_of(app)["readings"]
    for name, value in typed.items():
        assert app.number_input(key=f"set 1 0 {name}").value == value


def test_the_last_set_can_be_taken_out(at):
    case = with_reading(with_reading(READY, run="1", T_exhaust=Entry(121.0, "°C")), run="2", T_exhaust=Entry(1e2, "°C"))
    app = ran(at(case).button(key="drop set").click())
    assert [row["run"] for row in case_of(app)["readings"]] == ["2"]


def test_a_full_table_says_so(at):
    full = DEMO.with_(readings=(FIELDS["readings"].row(run="1", T_exhaust=Entry(121.0, "°C")),) * 400)
    app = write(at(full), **{"T_exhaust °C": 121.0})
    assert "at most 400 rows" in app.error[0].value.replace("\\", "")


def test_a_heater_has_sets_of_its_own(at):
    app = write(at(HEATED), **{"T_heater °C": 178.8, "power W": 861.0}, table="heater_readings")
    (row,) = case_of(app)["heater_readings"]
    assert row["T_heater"] == Entry(178.8, "°C") and row["power"] == Entry(861.0, "W") and row["run"] == "1"
    found = reduce_heated(case_of(app))
    assert f"By these sets: ● Quality in the line {found.assessment.x:.4f}" in words(app).replace("\\", "")
    app = ran(app.button(key="take means").click())
    assert case_of(app)["power"] == Entry(861.0, "W") and not keyed(app, "take means")
    app = ran(app.button(key="drop set").click())
    assert case_of(app)["heater_readings"] == ()


def test_a_plan_that_leads_nowhere_says_so(at):
    assert "As planned the wetness expected cannot be read" in words(at(HEATING_STEAM))


def test_an_entry_that_cannot_be_used_is_refused_and_nothing_is_lost(at):
    bad = DEMO.with_(p_exhaust=Entry(12.0, "bar", "absolute"))
    assert faults_of(bad)
    app = at(bad)
    assert "Exhaust pressure" in app.error[0].value and not keyed(app, "tick ") and not keyed(app, "write")
    assert keyed(at(DEMO), "tick ")


def test_the_rehearsal_stands_beside_the_sheet(at):
    app = ran(at().segmented_control(key="sheet or rehearsal").set_value("Rehearsal"))
    assert "Practise the test without steam" in words(app) and not keyed(app, "tick ")
    app = ran(app.segmented_control(key="sheet or rehearsal").set_value("Run sheet"))
    assert keyed(app, "tick ")


def test_a_link_to_a_rehearsal_leads_here_from_another_page():
    r = begin(Scenario(DEMO.with_(title="Another rig"), seed=5))
    app = AppTest.from_file(ROOT / "app.py", default_timeout=60)
    app.query_params["rehearsal"] = to_rehearsal(r)
    assert "The rig is cold" in words(ran(app)) and case_of(app)["title"] == "Another rig"


def test_what_is_shown_stays_when_the_reader_comes_back_from_another_page():
    app = opened(DEMO)
    ran(app.segmented_control(key="sheet or rehearsal").set_value("Rehearsal"))
    ran(app.button(key="begin sound").click())
    ran(app.segmented_control(key="sheet or rehearsal").set_value("Run sheet"))
    app = ran(ran(app.switch_page("engine/screen/pages/record.py")).switch_page(PAGE))
    assert keyed(app, "tick ")
    ran(app.segmented_control(key="sheet or rehearsal").set_value("Rehearsal"))
    assert "The rig is cold" in words(ran(ran(app.switch_page("engine/screen/pages/record.py")).switch_page(PAGE)))


def test_what_users_write_does_nothing(at):
    bad = "<script>alert(1)</script> **bold** [a](http://x) $x$"
    case = tick(DEMO.with_(title=bad, place=bad), "hold.permit", "08:15", "AB", bad)
    case = with_reading(case, run=bad, remark=bad, T_exhaust=Entry(121.0, "°C"))
    app = at(case)
    for text in [m.value for m in (*app.markdown, *app.caption)]:
        assert "<script>" not in text and "](http" not in text and "**bold**" not in text
    assert not any("<script>" in str(t.value.to_numpy()) for t in app.table)
