"""The Reach page without a browser: the verdict, the range, ways out applied and undone, refusals, downloads."""

from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.calorimeter import WayKind
from engine.job.case.casefile import to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import EXAMPLES, HEATED, HEATING_STEAM, WET_LINE, WET_LINE_READ
from engine.job.case.fields_modes import ELECTRIC, SEPARATING
from engine.job.case.rows import Entry
from engine.job.reach import assess_reach
from engine.job.reach.instrument_chart import instrument_chart
from engine.job.reach.said import said
from engine.steam.units import SI, US

ROOT = Path(__file__).parents[2]


def opened(case=DEMO):
    app = AppTest.from_file(ROOT / "app.py", default_timeout=60)
    app.query_params["case"] = to_link(case)
    app.run()
    app.switch_page("engine/screen/pages/reach.py").run()
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
        state["past"], state["future"], state["pinned"] = [], [], []
        return ran(shared)
    return show


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def headline(app):
    return next(m.value for m in app.markdown if m.value.startswith("### "))


def says(app, case, units=SI):
    told = said(assess_reach(case), units)
    return headline(app) == f"### {told.shape} {told.headline}"


def words(app):
    return " ".join(e.value for kind in (app.markdown, app.caption, app.success, app.error) for e in kind)


def open_case(app):
    return app.session_state["case"]


def entry(app, name, unit):
    return app.number_input(key=f"exact {name} {unit}")


@pytest.mark.parametrize("title", EXAMPLES)
@pytest.mark.parametrize("units", ["SI", "US"])
def test_the_verdict_of_every_example(at, title, units):
    app = at(EXAMPLES[title], units)
    assert says(app, EXAMPLES[title], {"SI": SI, "US": US}[units])
    assert "never permission to open a valve" in words(app)


def test_a_wider_range_asks_more(at):
    app = at()
    app = ran(entry(app, "wetness_high", "%").set_value(6.0))
    assert open_case(app)["wetness_high"] == Entry(6.0, "%")
    assert "Only a part can be read on this line: up to 4.38 % of the 0.50 to 6.00 % wetness expected." in headline(app)
    assert "Ways out, the least effort first" in [h.value for h in app.subheader]
    app = ran(app.button(key="undo").click())
    assert says(app, DEMO)


def test_a_way_out_is_applied_with_one_click_and_undone(at):
    app = at(HEATING_STEAM)
    assert "Nothing of the expected 1.00 to 3.00 % wetness can be read on this line." in headline(app)
    assert "**1. Lower the exhaust pressure to 0.172 bar abs or less.**" in words(app)
    app = ran(app.button(key=f"apply {WayKind.EXHAUST}").click())
    assert open_case(app)["p_exhaust"] == Entry(0.17, "bar", "absolute")
    assert "All that is expected" in headline(app)
    assert "Exhaust 0\\.17 bar absolute\\. Undo takes it back\\." in app.success[0].value
    app = ran(app.button(key="undo").click())
    assert open_case(app) == HEATING_STEAM and "Nothing of the expected" in headline(app)
    assert not app.success


def test_a_separator_is_applied_and_what_it_needs_appears(at):
    app = at(WET_LINE)
    assert not [n for n in app.number_input if "separator drains" in n.label]
    app = ran(app.button(key=f"apply {WayKind.SEPARATOR}").click())
    assert open_case(app)["mode"] == SEPARATING and "behind this separator" in headline(app)
    app = ran(entry(app, "water_share", "%").set_value(50.0))
    assert "Nothing of the expected" in headline(app)
    assert "Drain more: at least" in words(app)


def test_a_heater_is_applied_and_its_power_can_be_changed(at):
    app = ran(at(WET_LINE).button(key=f"apply {WayKind.HEATER}").click())
    assert open_case(app)["mode"] == ELECTRIC and "with this power" in headline(app)
    app = ran(entry(app, "power", "W").set_value(700.0))
    assert "Nothing of the expected" in headline(app) and "More power: at least" in words(app)


def test_what_does_not_help_is_told_with_its_reason(at):
    text = words(at(WET_LINE))
    assert "Not even the triple pressure of water would be low enough." in text
    assert "With this exhaust it cannot be read at any line pressure." in text


def test_price_of_every_way(at):
    app = at(HEATING_STEAM)
    prices = [c.value for c in app.caption if c.value.startswith("Price: ")]
    assert len(prices) == 4 and "condenser" in prices[0]


def test_the_methods_can_be_chosen_here(at):
    app = at()
    app = ran(app.button_group(key="choice mode").set_value(SEPARATING))
    assert open_case(app)["mode"] == SEPARATING and says(app, open_case(app))
    app = ran(app.button_group(key="choice mode").set_value(ELECTRIC))
    assert says(app, open_case(app))


def test_where_the_superheat_goes(at):
    app = at()
    plan = assess_reach(DEMO)
    cells = app.table[0].value.to_numpy().ravel().tolist()
    assert f"{plan.wet.margin:.1f} K" in cells and "with the heat loss" in cells
    assert "Where the superheat goes" not in [h.value for h in at(WET_LINE).subheader]


def test_the_table_for_the_instrument(at):
    app = at(WET_LINE_READ)
    chart = instrument_chart(assess_reach(WET_LINE_READ), SI)
    table = app.table[-1].value
    assert table["quality of the throttled steam"].tolist() == [f"{x:.4f}" for x in chart.x]
    app = at(HEATING_STEAM.with_(p_exhaust=Entry(1.3, "bar", "absolute")))
    assert "no temperature to read a quality from" in words(app)


def test_pinned_cases_stand_side_by_side(at):
    app = at(WET_LINE)
    app = ran(app.button(key="pin").click())
    app.session_state["case"] = HEATED
    app = ran(app)
    table = app.table[-1].value
    assert table["Case"].tolist() == ["open", "A"]
    assert table["Verdict"].tolist() == ["● reads", "○ cannot read"]
    app.session_state["pinned"] = [("A", WET_LINE.with_(p_exhaust=Entry(9.0, "bar", "absolute")))]
    assert "✕ an entry cannot be used" in ran(app).table[-1].value["Verdict"].tolist()


@pytest.mark.parametrize(("name", "unit", "value", "told"), [
    ("wetness_high", "%", 0.1, "at least the driest"),
    ("wetness_low", "%", -1.0, "Expected wetness, driest"),
    ("p_exhaust", "bar", 12.0, "less than the line pressure"),
    ("p_line", "bar", 400.0, "Line pressure"),
    ("U_thermometer", "K", 900.0, "expanded uncertainty"),
    ("p_exhaust_lowest", "bar", 0.0001, "Lowest exhaust pressure"),
])
def test_what_cannot_be_used_is_refused_and_nothing_is_lost(at, name, unit, value, told):
    app = ran(entry(at(), name, unit).set_value(value))
    assert told in app.error[0].value.replace("\\", "")
    assert "Nothing is lost" in words(app) and len(app.table) > 0
    assert says(ran(app.button(key="undo").click()), DEMO)


def test_a_first_visit_with_nothing_usable(at):
    bad = DEMO.with_(wetness_low=Entry(9.0, "%"))
    app = opened(bad)
    assert "at least the driest" in app.error[0].value.replace("\\", "")


def test_examples_are_opened_from_the_case_bar(at):
    app = at()
    app = ran(app.selectbox(key="example").set_value("Wet line at 8 bar"))
    assert open_case(app) == WET_LINE and says(app, WET_LINE)
    assert "invented demo case" in words(app)
    assert app.selectbox(key="example").value is None
    assert open_case(ran(app.button(key="undo").click())) == DEMO
