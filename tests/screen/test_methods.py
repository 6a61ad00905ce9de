"""The choice of the method on the Path page: the entries it brings, the answer it changes, the refusals it makes."""

from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.calorimeter import MassBasis
from engine.job.case.casefile import to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import HEATED, WET_LINE_READ
from engine.job.case.fields_modes import BY_VOLUME, ELECTRIC, SEPARATING, THROTTLING
from engine.job.case.fields_path import EXPECTED
from engine.job.case.rows import Entry

APP = Path(__file__).parents[2] / "app.py"


@pytest.fixture
def opened():
    def go(case=DEMO):
        app = AppTest.from_file(APP, default_timeout=60)
        app.query_params["case"] = to_link(case)
        return ran(app)
    return go


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def headline(app):
    return next(m.value for m in app.markdown if m.value.startswith("### "))


def labels(app):
    return {n.label for n in app.number_input}


def number(app, name, unit):
    return app.number_input(key=f"exact {name} {unit}")


def open_case(app):
    return app.session_state["case"]


def test_entries_come_and_go_with_the_method(opened):
    app = opened()
    assert "Mass weighed, kg" not in labels(app) and "Heat lost by the heater, W" not in labels(app)
    app = ran(app.button_group(key="choice mode").set_value(SEPARATING))
    assert {"Drained water, mass, kg", "Mass weighed, kg", "Separator pressure, bar"} <= labels(app)
    app = ran(app.button_group(key="choice mode").set_value(ELECTRIC))
    assert "Heat lost by the heater, W" in labels(app) and "Recovery factor" not in labels(app)
    assert {s.label for s in app.slider} == {"Line pressure, bar gauge", "Electric power, W",
                                             "Temperature after the heater, °C"}
    app = ran(app.button_group(key="choice mode").set_value(THROTTLING))
    assert open_case(app) == DEMO


def test_a_separator_is_read_step_by_step(opened):
    bare = WET_LINE_READ.with_(mode=THROTTLING, water_mass=None, weighed_mass=None, weighed_basis="not stated")
    app = ran(opened(bare).button_group(key="choice mode").set_value(SEPARATING))
    told = app.error[0].value.replace("\\", "")
    assert "Drained water, mass: got nothing" in told and "Weighed beside it: got not stated" in told
    app = ran(number(app, "water_mass", "kg").set_value(0.9))
    app = ran(number(app, "weighed_mass", "kg").set_value(9.1))
    app = ran(app.selectbox(key="choice weighed_basis").set_value(MassBasis.THROTTLED))
    assert headline(app) == "### ● Quality in the line 0.8800, wetness 12.00 %."
    app = ran(app.selectbox(key="choice weighed_basis").set_value(MassBasis.TOTAL))
    assert headline(app) == "### ● Quality in the line 0.8714, wetness 12.86 %."
    app = ran(app.selectbox(key="choice water_by").set_value(BY_VOLUME))
    assert "Temperature of the drained water, °C" in labels(app)


def test_a_typed_separator_pressure_is_meant_like_the_lines(opened):
    app = ran(number(opened(WET_LINE_READ), "p_separator", "bar").set_value(7.5))
    assert open_case(app)["p_separator"] == Entry(7.5, "bar", "absolute")
    app = ran(app.button_group(key="basis p_separator").set_value("gauge"))
    assert "at most the line pressure" in app.error[0].value
    assert open_case(app)["p_separator"] == Entry(7.5, "bar", "gauge")


def test_readings_that_contradict_each_other_are_said_to(opened):
    app = ran(number(opened(WET_LINE_READ), "T_exhaust", "°C").set_value(160.0))
    assert headline(app).startswith("### ≠ The readings contradict each other")
    assert "≠ readings contradict" in app.markdown[0].value


def test_a_heater_without_a_power_is_planned(opened):
    app = opened(HEATED.with_(question=EXPECTED, power=None))
    assert headline(app).startswith("### ● For a wetness of 10.00 % with ")
    app = ran(app.slider(key="slide power W").set_value(700.0))
    assert open_case(app)["power"] == Entry(700.0, "W") and "cannot be read" in headline(app)


def test_states_of_each_method(opened):
    assert "Drained water" in opened(WET_LINE_READ).table[-1].value["State"].tolist()
    app = opened(HEATED)
    assert "After the heater" in app.table[-1].value["State"].tolist()
    assert "Velocities" not in [h.value for h in app.subheader]
