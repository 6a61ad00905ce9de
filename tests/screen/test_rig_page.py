"""The Rig page without a browser: numbers on screen, offers and their undoing, nonsense, units, an empty case."""

from __future__ import annotations

from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.job.case import BLANK
from engine.job.case.casefile import to_link
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import BY_CONDUCTANCE
from engine.job.case.fields_rig import COMPUTED
from engine.job.case.rows import Entry
from engine.job.rig import assess_rig
from engine.job.rig.tables import headline
from engine.job.uncertainty import forecast
from engine.job.uncertainty.forecast_words import forecast_headline
from engine.screen.style import escaped

APP = Path(__file__).parents[2] / "app.py"
PAGE = "engine/screen/pages/rig.py"


def opened(case=None):
    app = AppTest.from_file(APP, default_timeout=60)
    if case is not None:
        app.query_params["case"] = to_link(case)
    app.run()
    app.switch_page(PAGE).run()
    assert not app.exception
    return app


@pytest.fixture(scope="module")
def shared():
    return opened()


@pytest.fixture
def app(shared):
    """One page for many tests, each with the demo case set anew."""
    state = shared.session_state
    state["case"], state["units"], state["notice"] = DEMO, "SI", None
    state["past"], state["future"], state["pinned"] = [], [], []
    return ran(shared)


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def case_of(app):
    return app.session_state["case"]


def told(app):
    return next(m.value for m in app.markdown if m.value.startswith("### ")).removeprefix("### ")


def table(app, first):
    """The table whose first column is headed ``first``, as text."""
    return "\n".join(t.value.to_string() for t in app.table if t.value.columns[0] == first)


def test_the_page_says_what_matters_most(app):
    assert told(app) == escaped(headline(assess_rig(DEMO)))


def test_numbers_on_screen_are_those_of_the_rig(app):
    rig, text = assess_rig(DEMO), table(app, "Quantity")
    assert f"{rig.flow.value.orifice.computed * 3600:.2f} kg/h" in text
    assert f"{rig.exhaust.value.pipe.value.p_exhaust / 1e5:.4f} bar abs" in text
    assert f"{rig.nozzle.value.isokinetic_area.value * 1e6:.1f} mm²" in text
    assert f"{rig.warming.value.ready / 60:.0f} min" in text
    assert "0.98 K, 0.098 %pt" in table(app, "Method")
    assert "-0.19 K" in table(app, "Error")
    assert escaped(forecast_headline(forecast(DEMO))) in " ".join(m.value for m in app.markdown)


def test_wet_lagging_changes_the_ranking(app):
    app = ran(app.selectbox(key="choice lagging_state").set_value("wet"))
    assert case_of(app)["lagging_state"] == "wet"
    assert "heat loss beyond the correction" in told(app)


def test_the_computed_flow_is_taken_by_a_click_and_given_back_by_undo(app):
    app = ran(app.number_input(key="exact sample_flow kg/h").set_value(None))
    assert case_of(app)["sample_flow"] is None and any("computed from the orifice" in w.value for w in app.warning)
    app = ran(app.button(key="offer flow").click())
    assert case_of(app)["sample_flow"] == Entry(31.43, "kg/h") and case_of(app)["flow_source"] == COMPUTED
    assert not app.warning
    app = ran(app.button(key="undo").click())
    assert case_of(app)["sample_flow"] is None


def test_the_computed_exhaust_pressure_and_the_conductance_are_taken_by_a_click(app):
    app = ran(app.number_input(key="exact exhaust_bore mm").set_value(16.0))
    app = ran(app.button(key="offer exhaust").click())
    assert case_of(app)["p_exhaust"].value > 1.04 and "offer exhaust" not in [b.key for b in app.button]
    app = ran(app.button(key="offer conductance").click())
    assert case_of(app)["heat_loss_method"] == BY_CONDUCTANCE and case_of(app)["conductance"].value < 0.18
    app = ran(ran(app.button(key="undo").click()).button(key="undo").click())
    assert case_of(app) == DEMO.with_(exhaust_bore=Entry(16.0, "mm"))


def test_an_offer_is_written_beside_what_was_typed_meanwhile(app):
    app.number_input(key="exact immersion mm").set_value(80.0)
    app = ran(app.button(key="offer flow").click())
    assert case_of(app)["immersion"] == Entry(80.0, "mm") and case_of(app)["flow_source"] == COMPUTED


def test_nonsense_is_named_and_the_rest_stands(app):
    app = ran(app.number_input(key="exact bore mm").set_value(-3.0))
    app = ran(app.number_input(key="exact drop_diameter µm").set_value(1e9))
    assert escaped("Orifice bore: got -3 mm, needs 0.2 to 50 mm") in app.error[0].value
    assert "Drop size" in app.error[0].value
    assert "heat loss" in told(app)
    assert case_of(app)["bore"] == Entry(-3.0, "mm")  # nothing is lost or changed in silence
    assert "Method" in [t.value.columns[0] for t in app.table]


def test_pressures_that_cannot_be_leave_the_last_rig_on_screen(app):
    app.session_state["case"] = DEMO.with_(p_line=Entry(-5.0, "bar", "absolute"))
    app = ran(app)
    assert "Line pressure" in app.error[0].value and "Method" in [t.value.columns[0] for t in app.table]


def test_units_change_everywhere_at_once(app):
    app.session_state["units"] = "US"
    app = ran(app)
    text = table(app, "Quantity")
    assert "lb/h" in text and "psi" in text and "kg/h" not in text
    assert app.number_input(key="exact bore in").value == pytest.approx(0.11811, abs=1e-5)
    assert case_of(app) == DEMO  # showing is not changing


def test_entries_that_a_choice_asks_for_appear_with_it(app):
    keys = [n.key for n in app.number_input]
    assert "exact exposed K" not in keys and "exact p_discharge bar" not in keys
    app = ran(app.selectbox(key="choice thermometer").set_value("mercury in glass"))
    app = ran(app.selectbox(key="choice exhaust_to").set_value("vessel or condenser"))
    keys = [n.key for n in app.number_input]
    assert "exact exposed K" in keys and "exact p_discharge bar" in keys
    assert any("Emergent stem" in m.value for m in app.markdown)


def test_an_optional_pressure_gets_a_basis_once_it_is_typed(app):
    app = ran(app.number_input(key="exact p_second bar").set_value(0.03))
    entry = case_of(app)["p_second"]
    assert entry.basis in ("gauge", "absolute") and any(b.key == "basis p_second" for b in app.segmented_control)


def test_an_empty_case_asks_for_what_it_needs():
    app = opened(BLANK)
    assert "Nothing can be sized yet" in told(app)
    assert any("**Nozzle entry**" in m.value and "Enter line flow" in m.value for m in app.markdown)
    assert not app.error


def test_pinned_rigs_stand_side_by_side(app):
    app.session_state["pinned"] = [("A", DEMO.with_(lagging_state="wet"))]
    app = ran(app)
    rows = next(t.value for t in app.table if "A" in t.value.columns)
    assert "0.20 %pt wetter ●" in rows["A"].to_string() and "0.098 %pt wetter ◇" in rows["open"].to_string()


def test_hostile_words_and_effects_are_shown_as_text(app):
    app.session_state["case"] = DEMO.with_(title="**x** <b>", note="=1+1")
    app = ran(app)
    assert "\\*\\*x\\*\\*" in app.markdown[0].value
