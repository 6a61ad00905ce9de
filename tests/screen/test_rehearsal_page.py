"""The rehearsal without a browser: from cold to the verdict, wrong orders, instructors, links, units, refusals."""

from __future__ import annotations

from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.job.case.casefile import to_link as case_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import WET_LINE_READ
from engine.job.commands.rehearse import by_the_book
from engine.job.rehearsal import Finding, Statement, advance, begin, look, state
from engine.job.rehearsal.link import from_link, to_link
from engine.job.rehearsal.looks import Look
from engine.job.rehearsal.readings import Way, reckoned
from engine.job.rehearsal.said import headline, truth
from engine.job.rehearsal.scenario import HiddenFault, Load, Scenario
from engine.job.rehearsal.simulation import LONGEST
from engine.job.rehearsal.valves import Deed
from engine.job.rehearsal.verdict import verdict_of
from engine.job.runsheet import tick
from engine.screen.style import escaped
from engine.steam.units import SI, US

APP = Path(__file__).parent / "rehearsal_app.py"


def opened(rehearsal=None, case=None):
    app = AppTest.from_file(APP, default_timeout=60)
    if rehearsal is not None:
        app.query_params["rehearsal"] = rehearsal if isinstance(rehearsal, str) else to_link(rehearsal)
    if case is not None:
        app.query_params["case"] = case_link(case)
    return ran(app)


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def press(app, *keys):
    for key in keys:
        app = ran(app.button(key=key).click())
    return app


def under_way(app):
    return app.session_state["rehearsal"]


def words(app):
    return " ".join(m.value for m in app.markdown)


def faces(app):
    return next(h.proto.body for h in app.get("html") if 'class="faces"' in h.proto.body)


def hidden(*faults, seed=3, **more):
    return begin(Scenario(DEMO, frozenset(HiddenFault(f) for f in faults), seed, **more))


def test_a_rehearsal_from_cold_to_the_verdict():
    app = opened(hidden("thermometer offset"))
    for deed, wait in ((Deed.PERMIT, "60"), (Deed.WALK_EXHAUST, "60"), (Deed.OPEN_DRAIN, "300"),
                       (Deed.CRACK_STOP, "60"), (Deed.CLOSE_DRAIN, "30"), (Deed.OPEN_STOP, "900")):
        app = press(app, f"do {deed}", f"advance {wait}")
    app = press(app, "advance 900", "advance 900", "take many", "take many", f"look {Look.SECOND}")
    assert "A second electric thermometer" in words(app)
    app = ran(app.toggle(key="way shown").set_value(True))
    app = ran(app.selectbox(key="way second").set_value("second"))
    x = reckoned(under_way(app), Way(second_read=True)).x
    assert f"Quality **{x:.4f}**" in words(app)
    app = press(app, "take over")
    assert app.number_input(key="stated x").value == round(x, 4)
    app = press(app, f"do {Deed.CLOSE_STOP}", f"do {Deed.OPEN_DRAIN}")
    app = ran(app.multiselect(key="stated faults").set_value([HiddenFault.THERMOMETER_OFFSET]))
    app = press(app, "state it")
    r = under_way(app)
    verdict = verdict_of(r, Way(second_read=True))
    assert verdict.right and verdict.all_named
    assert f"### {escaped(headline(verdict))}" in words(app)
    assert escaped(truth(verdict).text(SI)) in words(app)
    assert "What the hidden faults cost" in words(app) and "What was missed" not in words(app)


def test_a_wrong_order_is_stopped_with_the_reason_and_changes_nothing():
    app = press(opened(hidden()), f"do {Deed.CRACK_STOP}")
    assert "Refused" in words(app) and "No valve is touched without" in words(app)
    assert under_way(app).now == 0 and under_way(app).valves.stop == 0.0
    app = press(app, f"do {Deed.PERMIT}", f"do {Deed.WALK_EXHAUST}", f"do {Deed.CRACK_STOP}")
    assert "cold water may stand in it" in words(app)


def test_the_faces_show_what_the_gauges_show_in_either_system():
    app = opened(by_the_book(Scenario(DEMO, seed=2)))
    r = under_way(app)
    T = float(r.course.shown["exhaust thermometer"][-1])
    assert f"{T - 273.15:.1f} °C" in faces(app) and "bar gauge" in faces(app)
    app = ran(app.segmented_control(key="units choice").set_value("US"))
    assert US.text(T, "temperature") in faces(app) and "psi gauge" in faces(app)
    read = float(r.course.shown["exhaust thermometer"][r.course.at(r.readings[-1])])
    assert any(f"{(read - 273.15) * 1.8 + 32:.1f}" in t.value.to_string() for t in app.table)


def test_a_surprise_and_a_sound_rig_can_be_started():
    assert len(under_way(press(opened(), "begin surprise")).scenario.faults) <= 1
    app = press(opened(), "begin sound")
    assert under_way(app).scenario.faults == frozenset()
    assert under_way(app).scenario.case == Scenario(DEMO).case


def test_an_instructor_prepares_a_link_that_hides_what_it_brings():
    app = opened()
    ran(app.multiselect(key="prepare faults").set_value([HiddenFault.WET_LAGGING, HiddenFault.BACK_PRESSURE]))
    ran(app.number_input(key="prepare seed").set_value(77))
    ran(app.number_input(key="prepare quality").set_value(0.981))
    app = ran(app.selectbox(key="prepare load").set_value(Load.SWINGING))
    link = next(c.value for c in app.code if "?rehearsal=" in c.value)
    wanted = Scenario(DEMO, frozenset({"wet lagging", "back pressure"}), 77, 0.981, Load.SWINGING)
    assert from_link(link.partition("?rehearsal=")[2]).scenario == wanted
    app = press(app, "begin prepared")
    assert under_way(app).scenario == wanted
    app = opened(link.partition("?rehearsal=")[2])
    assert under_way(app).scenario == wanted and "wet lagging" not in words(app)


def test_an_instructor_s_impossible_wish_is_refused_in_place():
    app = opened()
    app = ran(app.multiselect(key="prepare faults").set_value([HiddenFault.WET_EXHAUST, HiddenFault.SUPERHEATED_LINE]))
    assert "superheated steam does not arrive wet" in app.error[0].value.replace("\\", "")
    app = ran(app.multiselect(key="prepare faults").set_value([]))
    app = ran(app.number_input(key="prepare quality").set_value(97.2))
    assert "quality of the line" in app.error[0].value.replace("\\", "")
    assert app.session_state["rehearsal"] is None if "rehearsal" in app.session_state else True


def test_a_link_that_is_none_is_said_and_leaves_the_beginning():
    app = opened("nonsense")
    assert "could not be opened" in app.error[0].value
    assert app.button(key="begin surprise")


def test_a_link_brings_its_case_and_a_finished_rehearsal_its_verdict():
    case = DEMO.with_(title="Another rig")
    r = begin(Scenario(case))
    assert app_case(opened(r))["title"] == "Another rig"
    done = by_the_book(Scenario(DEMO, seed=1))
    app = opened(state(done, Statement(Finding.CANNOT)))
    assert "### ○ The answer is wrong" in words(app)


def test_a_reload_keeps_the_open_case_beside_its_rehearsal():
    case = tick(DEMO.with_(title="Ticked at the line"), "hold.permit", "08:15", "AB")
    app = opened(begin(Scenario(DEMO, seed=3)), case)
    assert app_case(app) == case and under_way(app).scenario == Scenario(DEMO, seed=3)


def app_case(app):
    return app.session_state["case"]


def test_a_rig_that_is_not_simulated_says_so():
    app = opened(case=WET_LINE_READ)
    assert "no other rig is simulated" in " ".join(e.value for e in app.error)
    app = press(app, "begin sound")
    assert "needs throttling alone for a rehearsal" in " ".join(e.value for e in app.error).replace("\\", "")


def test_a_statement_without_a_quality_is_refused_and_nothing_is_lost():
    app = press(opened(by_the_book(Scenario(DEMO, seed=1))), "state it")
    assert "Quality stated" in app.error[0].value
    assert under_way(app).stated is None and len(under_way(app).readings) == 25
    app = ran(app.segmented_control(key="stated finding").set_value(Finding.CANNOT))
    assert under_way(press(app, "state it")).stated.finding is Finding.CANNOT


def test_time_cannot_run_beyond_its_end():
    r = hidden()
    app = opened(advance(r, LONGEST - 120))
    assert app.button(key="advance 300").disabled and not app.button(key="advance 60").disabled
    assert app.button(key="take many").disabled


def test_readings_go_into_the_case_and_come_back_out_by_undo():
    done = state(by_the_book(Scenario(DEMO, seed=1)), Statement(Finding.QUALITY, 0.98))
    app = press(opened(done), "rehearsal into case")
    assert len(app_case(app)["readings"]) == 25
    app = press(app, "undo")
    assert app_case(app)["readings"] == ()


def test_another_rehearsal_begins_anew_and_the_same_rig_again_is_cold():
    done = state(by_the_book(Scenario(DEMO, seed=1)), Statement(Finding.QUALITY, 0.98))
    app = press(opened(done), "same rig again")
    assert under_way(app) == begin(Scenario(DEMO, seed=1))
    app = press(opened(done), "another rehearsal")
    assert app.session_state["rehearsal"] is None and app.button(key="begin sound")
    app = press(opened(done), "go on rehearsing")
    assert under_way(app).stated is None and len(under_way(app).readings) == 25


@pytest.mark.parametrize("looked", [False, True])
def test_only_what_was_looked_at_can_be_reckoned_with(looked):
    r = by_the_book(Scenario(DEMO, seed=1))
    if looked:
        r = look(look(r, Look.BAROMETER), Look.SECOND)
    app = ran(opened(r).toggle(key="way shown").set_value(True))
    offered = {s.key for s in app.selectbox}
    assert ("way barometer" in offered) is looked and ("way second" in offered) is looked
