"""What the browser says late must not undo what was entered since: the echoes of moved widgets."""

from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.job.case.demo import DEMO
from engine.job.case.rows import Entry

SLIDER, EXACT = "slide T_exhaust °C", "exact T_exhaust °C"


@pytest.fixture
def app():
    return AppTest.from_file(Path(__file__).parents[2] / "app.py", default_timeout=60).run()


def sent(app, **widgets):
    """One message of a browser: the widgets named stand there, whatever the last run has put into them."""
    for name, value in widgets.items():
        {"slider": app.slider(key=SLIDER), "exact": app.number_input(key=EXACT)}[name].set_value(value)
    app.run()
    assert not app.exception
    return app.session_state["case"]["T_exhaust"].value


def test_an_exact_entry_that_lags_behind_its_slider_takes_nothing_back(app):
    assert sent(app, slider=121.2) == 121.2
    assert sent(app, slider=121.3, exact=121.1) == 121.3  # not yet heard of the first step
    assert sent(app, slider=121.4, exact=121.2) == 121.4  # heard of it only now
    assert sent(app, slider=121.5, exact=121.2) == 121.5
    assert sent(app, slider=121.4, exact=121.4) == 121.4  # and back
    assert app.number_input(key=EXACT).value == 121.4
    assert [case["T_exhaust"].value for case in app.session_state["past"]] == [121.1, 121.2, 121.3, 121.4, 121.5]


def test_a_slider_that_lags_behind_its_exact_entry_takes_nothing_back(app):
    assert sent(app, exact=130.0) == 130.0
    assert sent(app, exact=131.0, slider=121.1) == 131.0
    assert app.slider(key=SLIDER).value == 131.0


def test_a_value_typed_again_is_no_echo(app):
    assert sent(app, slider=125.0) == 125.0
    assert sent(app, exact=121.1) == 121.1
    assert sent(app, slider=125.0) == 125.0


def test_an_echo_beside_a_button_is_left_out(app):
    assert sent(app, slider=121.2) == 121.2
    assert sent(app, slider=121.3) == 121.3
    app.number_input(key=EXACT).set_value(121.2)
    app.button(key="undo").click().run()
    assert app.session_state["case"]["T_exhaust"] == Entry(121.2, "°C")
    app.number_input(key=EXACT).set_value(121.3)
    app.segmented_control(key="units choice").set_value("US").run()
    assert app.session_state["case"]["T_exhaust"] == Entry(121.2, "°C")


def test_an_echo_that_comes_before_its_button_is_taken_back(app):
    app.button(key="pin").click().run()
    assert sent(app, slider=121.2) == 121.2
    assert sent(app, slider=121.3) == 121.3
    app.number_input(key=EXACT).set_value(121.2)
    app.button(key="open pinned A").click().run()  # stands below the entry on the page
    assert app.session_state["case"] == DEMO
    assert [case["T_exhaust"].value for case in app.session_state["past"]] == [121.1, 121.2, 121.3]


def test_what_was_typed_just_before_a_button_counts(app):
    """The browser sends what was typed before the button; here that is the order on the page."""
    app.button(key="pin").click().run()
    app.number_input(key=EXACT).set_value(118.0).run()
    app.number_input(key=EXACT).set_value(117.0)
    app.button(key="unpin A").click().run()
    assert app.session_state["case"] == DEMO.with_(T_exhaust=Entry(117.0, "°C"))
    assert app.session_state["pinned"] == []
    app.number_input(key=EXACT).set_value(116.0)
    app.button(key="undo").click().run()
    assert app.session_state["case"]["T_exhaust"] == Entry(116.0, "°C")  # undone, then entered


def test_two_entries_at_once_both_count(app):
    app.slider(key=SLIDER).set_value(125.0)
    app.slider(key="slide p_line bar").set_value(12.0).run()
    case = app.session_state["case"]
    assert (case["T_exhaust"].value, case["p_line"].value) == (125.0, 12.0)
