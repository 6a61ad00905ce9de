"""The Path page without a browser: numbers on screen, every input, every kind of refusal, and the case's tools."""

import json
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from engine.job.assessment import assess
from engine.job.case import BLANK
from engine.job.case.casefile import to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import BY_NORMAL, EXPECTED, NONE
from engine.job.case.rows import Entry
from engine.job.uncertainty import forecast_or_why
from engine.job.uncertainty.answer_with import answer_with
from engine.screen.style import escaped
from engine.steam.units import SI, US

APP = Path(__file__).parents[2] / "app.py"
HOSTILE = "**bold** <script>alert(1)</script> [a](http://b.example) ![i](http://c.example/d.png) $x^2$ :smile: `code` #"


def opened(case=None, word=None):
    """The page as a first visit, or a link, shows it."""
    app = AppTest.from_file(APP, default_timeout=60)
    app.session_state["assumed"] = True
    if case is not None or word is not None:
        app.query_params["case"] = word if word is not None else to_link(case)
    app.run()
    assert not app.exception
    return app


@pytest.fixture
def app():
    return opened()


@pytest.fixture(scope="module")
def first():
    """A first visit, only looked at."""
    return opened()


@pytest.fixture(scope="module")
def shared():
    return opened()


@pytest.fixture
def at_hand(shared):
    """One page for many tests, with the demo case set anew but not yet drawn: their next step draws it."""
    shared.session_state["case"], shared.session_state["units"], shared.session_state["notice"] = DEMO, "SI", None
    shared.session_state["last good"] = assess(DEMO)
    shared.session_state["past"], shared.session_state["future"], shared.session_state["pinned"] = [], [], []
    return shared


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def bar(app):
    return app.markdown[0].value


def headline(app):
    return next(m.value for m in app.markdown if m.value.startswith("### ")).removeprefix("### ")


def says(app, case, units=SI):
    """Whether bar and answer are those of the case."""
    words = answer_with(forecast_or_why(case, assess(case)), units)
    return headline(app) == f"{words.shape} {words.headline}" and words.verdict in bar(app)


def open_case(app):
    return app.session_state["case"]


def captions(app):
    return " ".join(caption.value for caption in app.caption)


def diagrams(app):
    """The live diagrams on the page, by key: what moves, and the label for those who cannot see them."""
    payloads = [json.loads(element.proto.json) for element in app.get("bidi_component")
                if element.proto.component_name == "live-diagrams"]
    return {d["key"]: d for payload in payloads for d in json.loads(payload)["diagrams"]}


def table(app, first):
    """The table whose first cell is this."""
    return next(t.value for t in app.table if t.value.iat[0, 0] == first)


def everything(app):
    """All words on the page."""
    kinds = ("markdown", "caption", "error", "success", "subheader")
    words = [element.value for kind in kinds for element in app.get(kind)]
    return " ".join([*words, *(str(cell) for t in app.table for cell in t.value.to_numpy().ravel())])


# ---- first visit


def test_a_first_visit_shows_an_invented_case_and_says_so(first):
    assert "This is an invented demo case." in captions(first)
    assert bar(first) == ("**Factory main at 10 bar** · line 9 bar gauge · exhaust 1.021 bar absolute · "
                        "reading 121.1 °C · **● reads 0.9720**")
    assert headline(first) == "● Quality in the line 0.9720 ± 0.0058, wetness 2.80 ± 0.58 %."
    reasons = first.markdown[2].value
    assert reasons == ("Expanded uncertainty 0.58 %pt (k = 2.00, coverage 95.45 %), by the instruments alone "
                       "0.077 %pt; the scatter of readings comes on top. Against the limit of at least 0.97: "
                       "◇ undecided, the chance that it is met 76 % (by the instruments alone ✓ accept). "
                       "The exhaust is 20.9 K superheated, 15.9 K above the least readable superheat of 5 K. "
                       "Between these pressures the least readable quality is 0.9558.")
    assert "Heat loss 2.0 kJ/kg of sample, by conductance, +0.10 %pt." in captions(first)


def test_the_states_and_velocities_are_on_screen(first):
    states = table(first, "Line")
    assert list(states.columns) == ["State", "p, bar abs", "T, °C", "x", "h, kJ/kg", "s, kJ/(kg K)", "v, m³/kg",
                                    "c, m/s"]
    assert list(states["State"]) == ["Line", "Dries out", "Exhaust", "Constant bore, exhaust"]
    assert list(states.loc[0])[:4] == ["Line", "9.9297", "179.58", "0.9720"]
    assert (states.at[2, "x"], states.at[1, "c, m/s"]) == ("superheated", "–")
    velocities = dict(table(first, "Line velocity").to_numpy())
    assert velocities["Exhaust velocity"] == "28.0 m/s"
    assert velocities["… in quality"] == "0.019 %pt"


def test_three_diagrams_and_the_velocities_are_drawn(first):
    drawn = diagrams(first)
    assert list(drawn) == ["Ts", "hs", "Ph", "velocity"]
    assert drawn["Ts"]["label"] == "T–s diagram. Quality in the line 0.9720 ± 0.0058, wetness 2.80 ± 0.58 %."
    assert all(trace["x"] for trace in drawn["Ph"]["traces"] if trace["name"] in ("constant enthalpy", "states"))


def test_cautions_have_their_place(first):
    assert "never permission to open a valve" in captions(first)
    assert "Live steam and its condensate scald at once" in everything(first)


def test_nothing_on_the_page_says_nan_or_none(first):
    assert not {"nan", "None", "none", "inf"} & set(everything(first).replace(".", " ").replace(",", " ").split())


def test_what_the_answer_takes_for_granted_is_drawn_once_it_is_opened():
    app = AppTest.from_file(APP, default_timeout=60).run()
    assert not [n for n in app.number_input if "leg_height" in n.key]
    app.session_state["assumed"] = True
    assert app.run().number_input(key="exact leg_height m").value == 0.8


# ---- inputs


@pytest.mark.parametrize(("key", "value", "changes"), [
    ("slide p_line bar", 12.0, {"p_line": Entry(12.0, "bar", "gauge")}),
    ("slide p_exhaust bar", 1.2, {"p_exhaust": Entry(1.2, "bar", "absolute")}),
    ("slide T_exhaust °C", 104.0, {"T_exhaust": Entry(104.0, "°C")}),
    ("slide T_exhaust °C", 170.0, {"T_exhaust": Entry(170.0, "°C")}),
])
def test_a_slider_moves_answer_bar_diagrams_and_exact_entry(at_hand, key, value, changes):
    app = ran(at_hand.slider(key=key).set_value(value))
    case = DEMO.with_(**changes)
    assert open_case(app) == case and says(app, case)
    assert app.number_input(key=key.replace("slide", "exact")).value == value
    assert answer_with(forecast_or_why(case, assess(case)), SI).headline in diagrams(app)["hs"]["label"]
    assert "demo case" not in captions(app)


def test_the_numbers_after_a_step_of_the_slider(app):
    ran(app.slider(key="slide T_exhaust °C").set_value(122.1))
    assert headline(app) == "● Quality in the line 0.9730 ± 0.0058, wetness 2.70 ± 0.58 %."  # 0.1 %pt per kelvin
    assert table(app, "Line").at[0, "x"] == "0.9730"


@pytest.mark.parametrize(("key", "value", "name", "entry"), [
    ("exact p_line bar", 9.123, "p_line", Entry(9.123, "bar", "gauge")),
    ("exact T_exhaust °C", 119.87, "T_exhaust", Entry(119.87, "°C")),
    ("exact p_barometer kPa", 99.3, "p_barometer", Entry(99.3, "kPa", "absolute")),
    ("exact leg_height m", -1.5, "leg_height", Entry(-1.5, "m")),
    ("exact conductance W/K", 0.4, "conductance", Entry(0.4, "W/K")),
    ("exact recovery 1", 0.9, "recovery", Entry(0.9, "1")),
])
def test_an_exact_entry_is_kept_as_typed(at_hand, key, value, name, entry):
    app = ran(at_hand.number_input(key=key).set_value(value))
    assert open_case(app) == DEMO.with_(**{name: entry})
    assert says(app, open_case(app))


def test_a_value_beyond_the_slider_is_kept_and_the_slider_stands_at_its_end(app):
    ran(app.number_input(key="exact T_exhaust °C").set_value(300.0))
    assert open_case(app)["T_exhaust"] == Entry(300.0, "°C")
    assert app.slider(key="slide T_exhaust °C").value == 220.0
    assert "line superheated" in bar(app)


def test_an_entry_that_may_be_missing_can_be_emptied(app):
    ran(app.number_input(key="exact line_bore mm").set_value(None))
    assert open_case(app)["line_bore"] is None
    assert "Sample velocity before the orifice" not in dict(table(app, "Line velocity").to_numpy())
    assert [s["State"] for _, s in table(app, "Line").iterrows()] == ["Line", "Dries out", "Exhaust"]


def test_gauge_or_absolute_keeps_the_number_and_changes_its_meaning(app):
    ran(app.segmented_control(key="basis p_line").set_value("absolute"))
    case = DEMO.with_(p_line=Entry(9.0, "bar", "absolute"))
    assert open_case(app) == case and says(app, case)
    assert "line 9 bar absolute" in bar(app)
    assert app.number_input(key="exact p_line bar").value == 9.0


def test_the_other_question(app):
    ran(app.segmented_control(key="choice question").set_value(EXPECTED))
    assert headline(app) == "● For a wetness of 2.80 % the exhaust thermometer must show 121.1 °C."
    assert "expected wetness 2.8 %" in bar(app)
    assert {"slide T_exhaust °C", "slide wetness %"} & {s.key for s in app.slider} == {"slide wetness %"}
    ran(app.slider(key="slide wetness %").set_value(6.0))
    assert headline(app) == "○ A wetness of 6.00 % cannot be read here."
    assert "cannot read" in bar(app) and "0.94" not in bar(app)
    ran(app.segmented_control(key="choice question").set_value("reading"))
    assert headline(app) == "● Quality in the line 0.9720 ± 0.0058, wetness 2.80 ± 0.58 %."


def test_the_barometer_from_the_altitude(app):
    ran(app.selectbox(key="choice barometer_source").set_value("altitude"))
    assert "exact p_barometer kPa" not in {n.key for n in app.number_input}
    ran(app.number_input(key="exact altitude m").set_value(2000.0))
    assert "Barometer 79.50 kPa, standard atmosphere at the altitude." in captions(app)


@pytest.mark.parametrize(("method", "entries"), [
    ("not decided", set()), (NONE, set()), ("conductance", {"conductance W/K", "T_ambient °C"}),
    ("per kg", {"heat_loss kJ/kg"}), (BY_NORMAL, {"T_normal °C"}),
    ("two flows", {"second_flow kg/h", "T_second °C", "T_ambient °C"}),
])
def test_each_way_to_account_for_the_heat_loss_asks_for_its_entries(at_hand, method, entries):
    app = ran(at_hand.selectbox(key="choice heat_loss_method").set_value(method))
    asked = {n.key.removeprefix("exact ") for n in app.number_input}
    of_losses = {"conductance W/K", "T_ambient °C", "heat_loss kJ/kg", "T_normal °C", "second_flow kg/h",
                 "T_second °C"}
    assert asked & of_losses == entries
    options = app.selectbox(key="choice heat_loss_method").options
    assert not set(options) & {"not decided", "none", "per kg"}  # in words, not as the file has them


# ---- units


def test_us_units_everywhere_at_once(app):
    ran(app.segmented_control(key="units choice").set_value("US"))
    assert open_case(app) == DEMO  # what was entered stays as entered
    assert says(app, DEMO, US)
    assert app.number_input(key="exact T_exhaust °F").value == pytest.approx(249.98)
    assert app.slider(key="slide p_line psi").value == pytest.approx(130.534, abs=1e-3)
    assert app.number_input(key="exact p_barometer inHg").value == pytest.approx(29.766, abs=1e-3)
    assert list(table(app, "Line").columns)[1:3] == ["p, psi abs", "T, °F"]
    assert table(app, "Line").at[0, "T, °F"] == "355.24"
    assert dict(table(app, "Line velocity").to_numpy())["Exhaust velocity"] == "91.8 ft/s"
    assert "Barometer 29.77 inHg, as entered." in captions(app)
    foreign = (" bar abs", " °C", " K ", "kJ/kg", " m/s", "kPa")
    shown = everything(app).replace(bar(app), "").replace("Water leg of 0.8 m", "")
    assert not [unit for unit in foreign if unit in shown]


def test_there_and_back_changes_nothing(app):
    for units in ("US", "SI"):
        ran(app.segmented_control(key="units choice").set_value(units))
    assert open_case(app) == DEMO and says(app, DEMO)
    assert not app.session_state["past"]


def test_an_entry_in_us_units_is_kept_as_typed(app):
    ran(app.segmented_control(key="units choice").set_value("US"))
    ran(app.number_input(key="exact p_line psi").set_value(150.0))
    ran(app.segmented_control(key="units choice").set_value("SI"))
    assert open_case(app)["p_line"] == Entry(150.0, "psi", "gauge")
    assert "line 150 psi gauge" in bar(app)
    assert app.number_input(key="exact p_line bar").value == pytest.approx(10.342, abs=1e-3)


# ---- refusals


@pytest.mark.parametrize(("changes", "sentence"), [
    ({"p_line": Entry(900.0, "bar", "gauge")}, "Line pressure: got 900 bar gauge, needs 0.042 to 163.99 bar gauge"),
    ({"T_exhaust": Entry(1211.0, "°C")}, "Measured temperature: got 1211 °C, needs 0 to 500 °C"),
    ({"x_limit": Entry(97.0, "1")}, "Quality limit: got 97, needs 0 to 1"),
    ({"p_exhaust": Entry(12.0, "bar", "absolute")},
     "Exhaust pressure: got 12 bar absolute, needs less than the line pressure at the tapping, 9.92969 bar absolute"),
    ({"leg_height": Entry(95.0, "m")}, "Gauge below tapping: got 95 m, needs a water leg that leaves 0.042 bar gauge"),
    ({"comfortable_superheat": Entry(1.0, "K")},
     "Comfortable superheat: got 1 K, needs at least the least readable superheat, 5 K"),
    ({"heat_loss_method": BY_NORMAL},
     "Normal reading, dry steam: got nothing, needs a value, since the heat loss is taken by a normal reading"),
    ({"heat_loss_method": BY_NORMAL, "T_normal": Entry(95.0, "°C")},
     "Normal reading, dry steam: got 95 °C, needs more than 100.188 °C, saturation at the exhaust pressure"),
    ({"sample_flow": None}, "Sample flow: got nothing, needs a value, since the heat loss is taken by conductance"),
    ({"exhaust_bore": Entry(2.0, "mm")},
     "Exhaust bore: got 2 mm, needs about 6.37 mm at least for a sample flow of 31.7 kg/h"),
    ({"heat_loss_method": "per kg", "heat_loss": Entry(400.0, "kJ/kg"), "wetness": Entry(100.0, "%"),
      "question": EXPECTED, "p_line": Entry(0.6, "bar", "gauge")},
     "energy balance: got neither wet nor superheated steam, needs an enthalpy steam can have"),
], ids=lambda value: "" if isinstance(value, str) else " ".join(value))
def test_one_bad_input_of_each_kind(at_hand, changes, sentence):
    at_hand.session_state["case"] = DEMO.with_(**changes)
    app = ran(at_hand)
    error = app.error[0].value
    assert escaped(sentence) in error.replace("  \n", " ")
    assert "✕ an entry cannot be used" in bar(app)
    assert "Nothing is lost" in captions(app) and "last usable case" in captions(app)
    assert list(diagrams(app)) == ["Ts", "hs", "Ph", "velocity"]
    assert table(app, "Line").at[0, "x"] == "0.9720"
    assert app.button(key="pin").disabled
    assert "can be saved once every entry can be used" in captions(app)


def test_all_refusals_at_once_each_on_its_line(app):
    app.session_state["case"] = DEMO.with_(p_line=Entry(900.0, "bar", "gauge"), T_exhaust=Entry(1211.0, "°C"))
    ran(app)
    lines = app.error[0].value.split("  \n")
    assert [line.split("\\:")[0] for line in lines if not line.startswith("\\-")] == ["Line pressure",
                                                                                    "Measured temperature"]


def test_a_refused_entry_is_corrected_or_undone(app):
    ran(app.number_input(key="exact T_exhaust °C").set_value(1211.0))
    assert app.error and app.number_input(key="exact T_exhaust °C").value == 1211.0
    ran(app.number_input(key="exact T_exhaust °C").set_value(121.1))
    assert not app.error and says(app, DEMO)
    ran(app.number_input(key="exact T_exhaust °C").set_value(-5000.0))
    ran(app.button(key="undo").click())
    assert not app.error and says(app, DEMO)


@pytest.mark.parametrize("value", [1e308, 1e-300])
def test_absurd_numbers_break_nothing(at_hand, value):
    app = ran(at_hand.number_input(key="exact p_line bar").set_value(value))
    ran(app.segmented_control(key="units choice").set_value("US"))
    assert "Line pressure" in app.error[0].value
    ran(app.button(key="undo").click())
    assert open_case(app) == DEMO and says(app, DEMO, US)
    ran(app.segmented_control(key="units choice").set_value("SI"))


# ---- undo, redo, pins, demo, blank


def test_undo_and_redo_step_by_step(app):
    assert app.button(key="undo").disabled and app.button(key="redo").disabled
    for T in (122.0, 123.0):
        ran(app.slider(key="slide T_exhaust °C").set_value(T))
    ran(app.button(key="undo").click())
    assert open_case(app)["T_exhaust"] == Entry(122.0, "°C") == Entry(app.slider(key="slide T_exhaust °C").value, "°C")
    ran(app.button(key="undo").click())
    assert open_case(app) == DEMO and app.button(key="undo").disabled
    ran(app.button(key="redo").click())
    ran(app.button(key="redo").click())
    assert open_case(app)["T_exhaust"] == Entry(123.0, "°C") and app.button(key="redo").disabled
    ran(app.button(key="undo").click())
    ran(app.slider(key="slide p_line bar").set_value(11.0))
    assert app.button(key="redo").disabled
    assert open_case(app) == DEMO.with_(T_exhaust=Entry(122.0, "°C"), p_line=Entry(11.0, "bar", "gauge"))


def test_pinned_cases_stand_side_by_side_and_can_be_opened(app):
    ran(app.button(key="pin").click())
    ran(app.slider(key="slide p_line bar").set_value(20.0))
    compared = table(app, "Verdict")
    assert list(compared.columns) == ["", "open", "A"]
    by_label = {row[0]: row[1:] for row in compared.to_numpy().tolist()}
    assert by_label["Quality"][1] == "0.9720" and by_label["Quality"][0] != "0.9720"
    assert by_label["Line pressure"] == ["20 bar gauge", "9 bar gauge"]
    assert "Measured temperature" not in by_label
    pinned = next(t for t in diagrams(app)["Ts"]["traces"] if t["name"] == "pinned")
    assert [word for word in pinned["text"] if word] == ["A", "A"]
    ran(app.button(key="open pinned A").click())
    assert open_case(app) == DEMO
    ran(app.button(key="unpin A").click())
    assert "Side by side" not in [s.value for s in app.subheader]
    assert not [t for t in app.table if t.value.iat[0, 0] == "Verdict"]


def test_the_last_four_pins_are_kept(app):
    for T in (111.0, 112.0, 113.0, 114.0, 115.0):
        app.session_state["case"] = DEMO.with_(T_exhaust=Entry(T, "°C"))
        ran(app.button(key="pin").click())
    assert list(table(app, "Verdict").columns) == ["", "open", "B", "C", "D", "E"]
    assert "The last 4 are kept." in app.button(key="pin").help


def test_empty_and_demo_case(app):
    ran(app.button(key="blank").click())
    assert open_case(app) == BLANK and says(app, BLANK)
    assert bar(app).startswith("**Untitled case** · line 10 bar absolute · ")
    assert "Heat loss not decided" in captions(app)
    assert "Give the sample flow and a bore" in captions(app)
    assert "demo case" not in captions(app)
    ran(app.button(key="demo").click())
    assert open_case(app) == DEMO and "This is an invented demo case." in captions(app)
    ran(app.button(key="undo").click())
    assert open_case(app) == BLANK


# ---- words of users


def test_a_hostile_title_is_shown_as_typed_and_means_nothing(app):
    ran(app.button(key="pin").click())
    ran(app.text_input(key="words title").set_value(HOSTILE))
    assert open_case(app)["title"] == HOSTILE
    assert bar(app).startswith(f"**{escaped(HOSTILE)[:60]}")
    titles = table(app, "Verdict").set_index("").loc["Title"]
    assert list(titles) == [escaped(HOSTILE), "Factory main at 10 bar"]
    assert not [m for m in app.markdown if "<script>" in m.value or "![" in m.value]


def test_a_long_title_keeps_the_bar_short():
    app = opened(DEMO.with_(title="long " * 700))
    assert len(bar(app)) < 250 and " …**" in bar(app)


def test_title_and_note_are_part_of_the_case(app):
    ran(app.text_input(key="words title").set_value("Boiler 3"))
    ran(app.text_area(key="words note").set_value("first\nsecond"))
    assert open_case(app) == DEMO.with_(title="Boiler 3", note="first\nsecond")
    assert bar(app).startswith("**Boiler 3**")


# ---- links and files


def test_a_link_opens_its_case():
    case = DEMO.with_(title="From a link", p_line=Entry(20.0, "bar", "gauge"), question=EXPECTED)
    app = opened(case)
    assert open_case(app) == case and says(app, case)
    assert not app.error and not app.session_state["past"]
    assert app.code[0].value == f"?case={to_link(case)}"


def test_a_link_is_read_once(app):
    app = opened(DEMO.with_(title="From a link"))
    ran(app.slider(key="slide p_line bar").set_value(15.0))
    assert open_case(app)["p_line"] == Entry(15.0, "bar", "gauge")


@pytest.mark.parametrize("word", ["nonsense", to_link(DEMO)[:-7], "é%00", "A" * 5000])
def test_a_link_that_is_none_is_refused_and_the_demo_shown(word):
    app = opened(word=word)
    assert open_case(app) == DEMO and says(app, DEMO)
    assert "could not be opened; the demo case is shown" in app.error[0].value
    assert "a link made by this program, copied whole" in app.error[0].value


def test_a_link_to_a_case_that_cannot_be_assessed_says_why():
    app = opened(DEMO.with_(heat_loss_method=BY_NORMAL))
    assert "Normal reading, dry steam" in app.error[0].value
    ran(app.selectbox(key="choice heat_loss_method").set_value(NONE))
    assert not app.error and says(app, DEMO.with_(heat_loss_method=NONE))


def test_the_address_follows_the_case(app):
    ran(app.slider(key="slide p_line bar").set_value(15.0))
    sent = next(json.loads(element.proto.json) for element in app.get("bidi_component")
                if element.proto.component_name == "address-address")
    assert sent["query"]["case"] == to_link(open_case(app)) and sent["page"] == ""


def test_a_case_file_is_opened(app):
    case = DEMO.with_(title="From a file", T_exhaust=Entry(118.0, "°C"))
    ran(app.file_uploader(key="open").set_value(("mine.json", to_json(case).encode(), "application/json")))
    assert open_case(app) == case and says(app, case)
    assert app.success[0].value == "Opened mine\\.json\\."
    ran(app.button(key="undo").click())
    assert open_case(app) == DEMO


@pytest.mark.parametrize(("data", "reason"), [
    (b"p1;p2\n9;1\n", "a JSON file as saved by this program"),
    (to_json(DEMO).replace('"schema": 1', '"schema": 2').encode(), "newer version of this program"),
    (to_json(DEMO).replace('"unit": "bar"', '"unit": "furlong"').encode(), "unit of line pressure"),
    (to_json(DEMO).replace("121.1", "1211").encode(), "Measured temperature"),
], ids=["CSV", "newer", "unit", "range"])
def test_a_file_that_is_none_is_refused_and_the_open_case_stays(app, data, reason):
    ran(app.slider(key="slide p_line bar").set_value(15.0))
    before = open_case(app)
    ran(app.file_uploader(key="open").set_value(("<b>bad</b>.json", data, "application/json")))
    assert open_case(app) == before and says(app, before)
    assert escaped(reason) in app.error[0].value
    assert app.error[0].value.startswith("\\<b\\>bad\\</b\\>\\.json was not opened; the open case is unchanged\\.")
    ran(app.slider(key="slide p_line bar").set_value(16.0))
    assert not app.error
