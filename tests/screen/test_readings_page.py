"""The Readings page without a browser: logs brought in, columns confirmed, decisions with reasons, numbers."""

from __future__ import annotations

import io
import json
import re
from pathlib import Path

import numpy as np
import pytest
from streamlit.testing.v1 import AppTest

from engine.job.case import BLANK
from engine.job.case.casefile import to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import NOT_STATED
from engine.job.case.fields_path import UNDECIDED
from engine.job.case.rows import Entry
from engine.job.commands import main
from engine.job.result import reduce
from engine.job.result.data import as_json
from engine.job.result.intake import read
from engine.job.result.runs import run_of_log
from engine.job.result.said import check_lines, headline
from engine.measurement.logbook.write import write_log
from engine.screen import logs
from engine.screen.style import escaped

APP = Path(__file__).parents[2] / "app.py"
PAGE = "engine/screen/pages/readings.py"
TEN = (121.0, 121.3, 121.1, 120.9, 121.2, 121.1, 121.0, 121.2, 121.1, 121.1)


@pytest.fixture(autouse=True)
def few_draws(monkeypatch):
    """A million draws at every step would be a minute of nothing else."""
    monkeypatch.setattr(logs, "DRAWS", 20_000)


def a_log(minutes=40.0, warm_up=20.0, spike=None, swing=0.0):
    """A clean log of the demo case: settles near 121.1 °C, so the quality is 0.972."""
    time = np.arange(0.0, 60 * minutes + 1, 10.0)
    rng = np.random.default_rng(5)
    T = 394.25 - warm_up * np.exp(-time / 240.0) + 0.05 * rng.standard_normal(time.size)
    if spike is not None:
        T[spike] += 3.0
    p = 9e5 + 300 * rng.standard_normal(time.size) + swing * np.sin(time / 60)
    target = io.BytesIO()
    write_log(target, {"p_line": p, "p_exhaust": np.full(time.size, 1300.0) + 20 * rng.standard_normal(time.size),
                       "T_exhaust": T}, time=time, basis={"p_line": "gauge", "p_exhaust": "gauge"})
    return target.getvalue()


def sets(*temperatures):
    row = FIELDS["readings"].row
    return tuple(row(p_line=Entry(9.0, "bar", "gauge"), T_exhaust=Entry(T, "°C")) for T in temperatures)


def opened(case=DEMO):
    app = AppTest.from_file(APP, default_timeout=90)
    app.query_params["case"] = to_link(case)
    app.run()
    return ran(app.switch_page(PAGE))


def ran(element):
    app = element.run()
    assert not app.exception
    return app


def told(app):
    """All that is said in Markdown, captions and boxes."""
    kinds = ("markdown", "caption", "warning", "error", "info")
    return "\n".join(element.value for kind in kinds for element in getattr(app, kind))


def answer(app):
    return next(m.value for m in app.markdown if m.value.startswith("### "))


def bring(app, *files):
    uploader = next(u for u in app.file_uploader if u.key.startswith("uploader"))
    return ran(uploader.set_value([(name, data, "text/csv") for name, data in files]))


def confirm(app, name):
    return ran(app.button(key=f"confirm {name}").click())


def case_of(app):
    return app.session_state["case"]


def test_a_first_visit_says_what_is_missing_and_offers_an_invented_log():
    app = opened()
    assert answer(app) == "### ○ " + escaped("No quality can be given yet.")
    assert "There are no readings yet" in told(app)
    app = ran(app.button(key="demo log").click())
    assert "columns to be confirmed" in told(app)
    app = confirm(app, "invented log.csv")
    assert answer(app).startswith("### ● Quality")


def test_a_clean_log_from_upload_to_result():
    data = a_log()
    app = bring(opened(), ("run1.csv", data))
    assert "columns to be confirmed" in told(app) and answer(app).startswith("### ○")
    app = confirm(app, "run1.csv")
    file = io.BytesIO(data)
    file.name = "run1.csv"
    expected = reduce(DEMO, [run_of_log(read(DEMO, file))])
    assert answer(app) == f"### ● {escaped(headline(expected))}"
    said = told(app)
    assert "##### ◇ undecided with sampling" in said and "##### ✓ accept by the instruments alone" in said
    assert "241 of 241 rows read" in said and "the rule accepts from 0\\.9748" in said
    assert "20 000 draws" in said and "The budget and Monte Carlo give" in said
    assert len(case_of(app)["mappings"]) == 1 and not app.error


def test_the_case_remembers_the_columns_and_the_log_stays_with_the_session():
    app = confirm(bring(opened(), ("run1.csv", a_log())), "run1.csv")
    app = bring(app, ("run2.csv", a_log(minutes=50.0)))
    said = told(app)  # the second is read at once: its columns are those of the first
    assert "301 of 301 rows read" in said and "Mean of 2 runs" in said
    app = ran(ran(app.switch_page("engine/screen/pages/path.py")).switch_page(PAGE))
    assert "Mean of 2 runs" in told(app)
    app = ran(app.button(key="drop run2.csv").click())
    assert "Mean of 2 runs" not in told(app) and answer(app).startswith("### ● Quality 0\\.97")


def test_logs_of_one_layout_are_confirmed_together():
    app = bring(opened(), ("a.csv", a_log()), ("b.csv", a_log(minutes=50.0)), ("c.csv", b"t [s],T2 [K]\n0,390\n"))
    app = confirm(app, "a.csv")
    said = told(app)
    assert "241 of 241 rows read" in said and "301 of 301 rows read" in said and "columns to be confirmed" in said


def test_open_questions_are_asked_before_anything_is_read():
    rows = [f"{10 * k},{9.0 + 0.001 * (k % 3)},{121.1 + 0.01 * (k % 5):.2f}" for k in range(130)]
    app = bring(opened(), ("mute.csv", ("t [s],line pressure,T2\n" + "\n".join(rows)).encode()))
    said = told(app)
    assert "In which unit is the line pressure" in said and "gauge or absolute?" in said
    assert app.button(key="confirm mute.csv").disabled
    for key, value in (("unit of p_line in mute.csv", "bar"), ("unit of T_exhaust in mute.csv", "°C")):
        app = ran(app.selectbox(key=key).set_value(value))
    app = ran(app.segmented_control(key="basis of p_line in mute.csv").set_value("gauge"))
    assert not app.button(key="confirm mute.csv").disabled
    app = confirm(app, "mute.csv")
    assert answer(app).startswith("### ● Quality 0\\.972")
    app = ran(app.segmented_control(key="basis of p_line in mute.csv").set_value("absolute"))
    assert answer(app).startswith("### ○")  # changed columns are to be confirmed anew


def test_a_column_given_to_another_channel_is_taken_from_the_first():
    app = bring(opened(), ("run1.csv", a_log()))
    app = ran(app.selectbox(key="column of T_line in run1.csv").set_value(3))
    assert app.selectbox(key="column of T_exhaust in run1.csv").value is None
    app = ran(app.selectbox(key="column of T_exhaust in run1.csv").set_value(3))
    assert app.selectbox(key="unit of T_exhaust in run1.csv").value == "°C"


def test_a_messy_log_is_read_and_everything_refused_or_suspected_is_said():
    lines = ["t [s];p1 [bar g];p2 [kPa g];T2 [°C]"]
    lines += [f"{10 * k};9,0{k % 7};1,3;121,{k % 4}" for k in range(200)]
    lines[20], lines[30], lines[40] = "190;9,01;1,3;n/a", "290;9,01;1,3;1e99", "390;Störung;1,3;121,1"
    lines[60:62] = [lines[61], lines[60]]
    app = confirm(bring(opened(), ("messy.csv", "\n".join(lines).encode("cp1252"))), "messy.csv")
    said = told(app)
    assert "3 refusals" in said and "The time runs backwards at 1 row" in said
    assert any("What was refused, 3 in all" in e.label for e in app.expander)
    frames = [f.value for f in app.dataframe]
    refused = next(f for f in frames if "Content" in f.columns)
    assert {"n/a", "1e99", "Störung"} <= set(refused["Content"]) and set(refused["Row"]) == {21, 31, 41}
    assert answer(app).startswith("### ● Quality 0\\.97")


@pytest.mark.parametrize(("name", "data", "why"), [
    ("empty.csv", b"", "an empty file"),
    ("picture.csv", bytes(range(256)) * 40, "picture.csv"),
    ("words.csv", b"dear sir\nplease find\n", "words.csv"),
])
def test_a_hopeless_file_is_refused_in_words_and_the_rest_stays(name, data, why):
    app = confirm(bring(opened(), ("run1.csv", a_log())), "run1.csv")
    before = answer(app)
    app = bring(app, (name, data))
    assert any(why in e.value.replace("\\", "") for e in app.error) or "columns to be confirmed" in told(app)
    assert answer(app) == before
    app = ran(app.button(key=f"drop {name}").click())
    assert not app.error


def test_a_log_that_never_settles_says_why_and_a_hand_may_choose_with_a_reason():
    app = confirm(bring(opened(), ("wild.csv", a_log(swing=4e4, warm_up=0.0))), "wild.csv")
    said = told(app)
    assert answer(app).startswith("### ○ No quality") and "No stretch of this run is settled" in said
    assert "the line pressure scatters by" in said
    app = ran(app.segmented_control(key="window of wild.csv").set_value("By hand"))
    assert "Exploration, not a result" in answer(app) and "the reason for the window chosen by hand" in told(app)
    app = ran(app.number_input(key="begin of the window of wild.csv").set_value(20.0))
    app = ran(app.text_input(key="reason of the window of wild.csv").set_value("agreed with the control room"))
    assert answer(app).startswith("### ● Quality") and "20\\.0 to 40\\.0 min" in told(app)
    assert case_of(app)["windows"][0]["reason"] == "agreed with the control room"
    app = ran(app.segmented_control(key="window of wild.csv").set_value("The longest settled window"))
    assert case_of(app)["windows"] == () and answer(app).startswith("### ○")


def test_a_settled_stretch_is_taken_with_one_click_and_keeps_all_its_readings():
    app = confirm(bring(opened(), ("run1.csv", a_log())), "run1.csv")
    longest = app.session_state["reduced"][2].runs[0]
    app = ran(app.segmented_control(key="window of run1.csv").set_value("By hand"))
    app = ran(app.number_input(key="begin of the window of run1.csv").set_value(30.0))
    assert app.session_state["reduced"][2].runs[0].used.sum() < longest.used.sum()
    app = ran(app.button(key="stretch 0 of run1.csv").click())
    taken = app.session_state["reduced"][2].runs[0]
    assert taken.settling.by_hand and taken.used.sum() == longest.used.sum()
    assert app.session_state["reduced"][2].x == pytest.approx(longest.quality, abs=1e-12)


def test_a_column_in_another_unit_is_mended_with_one_click_and_undone():
    time = np.arange(0, 1801, 10)
    rows = [f"{t};9,0{t % 7};1,3;{250.0 + 0.1 * (t % 3):.1f}".replace(".", ",") for t in time]
    app = bring(opened(), ("us.csv", ("t [s];p1 [bar g];p2 [kPa g];T2 [°C]\n" + "\n".join(rows)).encode()))
    assert "us\\.csv waits for its columns to be confirmed" in told(app)
    app = confirm(app, "us.csv")
    assert answer(app).startswith("### ○") and "a unit, or gauge and absolute, looks wrong" in told(app)
    mend = next(b for b in app.button if b.label == "Read the exhaust temperature as °F")
    app = ran(mend.click())
    assert answer(app).startswith("### ● Quality 0\\.97") and "looks wrong" not in told(app)
    app = ran(app.button(key="undo").click())
    assert answer(app).startswith("### ○") and "looks wrong" in told(app)
    app = ran(app.button(key="redo").click())
    assert answer(app).startswith("### ● Quality 0\\.97")


def test_changed_columns_go_back_to_what_they_were_and_a_log_taken_out_comes_back():
    app = confirm(bring(opened(), ("run1.csv", a_log())), "run1.csv")
    before = answer(app)
    app = ran(app.selectbox(key="unit of T_exhaust in run1.csv").set_value("°F"))
    assert answer(app).startswith("### ○")
    app = ran(app.button(key="as before run1.csv").click())
    assert answer(app) == before and app.selectbox(key="unit of T_exhaust in run1.csv").value == "°C"
    app = ran(app.button(key="drop run1.csv").click())
    assert answer(app).startswith("### ○")
    app = ran(app.button(key="bring back").click())
    assert answer(app) == before and not any(b.key == "bring back" for b in app.button)


def test_screen_and_command_give_the_same_digits(tmp_path):
    """The whole result as JSON, to the last digit, and the sentences, from one log and the case of the screen."""
    app = confirm(bring(opened(), ("run1.csv", a_log(spike=200))), "run1.csv")
    (tmp_path / "case.json").write_text(to_json(case_of(app)), encoding="utf-8")
    (tmp_path / "run1.csv").write_bytes(a_log(spike=200))
    words = ["reduce", str(tmp_path / "run1.csv"), "--case", str(tmp_path / "case.json"), "--draws", "20000"]
    by_command, text = io.StringIO(), io.StringIO()
    assert main([*words, "--json", "-"], by_command, io.StringIO()) == 0
    on_screen = as_json(app.session_state["reduced"][2], app.session_state["checked"][1])
    assert json.loads(by_command.getvalue()) == json.loads(on_screen)
    assert main(words, text, io.StringIO()) == 0
    assert answer(app).removeprefix("### ") == escaped(text.getvalue().splitlines()[0].removesuffix(" (result)"))
    for line in check_lines(app.session_state["checked"][1]):
        assert line in text.getvalue() and escaped(line) in told(app)


def test_an_outlier_is_left_out_only_once_it_has_a_reason():
    app = confirm(bring(opened(), ("run1.csv", a_log(spike=200))), "run1.csv")
    with_it = app.session_state["reduced"][2].x
    assert any(t.value.to_dict("records")[0].get("Row") == "202" for t in app.table if len(t.value) and
               "Row" in t.value.columns)
    app = ran(app.multiselect(key="rows left out of run1.csv").set_value([202]))
    assert app.session_state["reduced"][2].x == with_it and "Exploration" in answer(app)
    app = ran(app.text_input(key="reason for row 202 of run1.csv").set_value("slug of water heard"))
    assert app.session_state["reduced"][2].x < with_it and answer(app).startswith("### ● Quality")
    assert case_of(app)["removed"][0]["reason"] == "slug of water heard" and "left out it was" in told(app)
    app = ran(app.multiselect(key="rows left out of run1.csv").set_value([]))
    assert app.session_state["reduced"][2].x == with_it and case_of(app)["removed"] == ()


def test_a_correction_is_switched_off_with_its_reason_and_on_again():
    app = opened(DEMO.with_(readings=sets(*TEN)))
    x = app.session_state["reduced"][2].x
    app = ran(app.toggle(key="switch heat loss").set_value(False))
    assert "Exploration" in answer(app) and "reason for switching off the correction for heat loss" in told(app)
    app = ran(app.text_input(key="why heat loss is off").set_value("normal reading agreed"))
    assert answer(app).startswith("### ● ") and app.session_state["reduced"][2].x < x - 0.0009
    app = ran(app.toggle(key="switch heat loss").set_value(True))
    assert app.session_state["reduced"][2].x == x


def test_no_result_before_the_heat_loss_is_decided():
    app = opened(DEMO.with_(readings=sets(*TEN), heat_loss_method=UNDECIDED))
    assert answer(app).startswith("### ○") and "heat loss has not been decided" in told(app)
    app = ran(app.selectbox(key="choice heat_loss_method").set_value("none"))
    assert answer(app).startswith("### ● Quality 0\\.971")


def test_without_sampling_there_is_an_exploration():
    app = opened(DEMO.with_(readings=sets(*TEN), sampling_kind=NOT_STATED))
    assert "Exploration, not a result" in answer(app)
    assert "Not a result yet, because not stated\\: sampling representativeness" in told(app)
    app = ran(app.selectbox(key="choice sampling_kind").set_value("half width"))
    assert "\\± 0\\.0058" in answer(app) or "± 0\\.0058" in answer(app)


def test_the_means_become_the_reading_of_the_case():
    app = confirm(bring(opened(), ("run1.csv", a_log())), "run1.csv")
    app = ran(app.button(key="take means").click())
    case = case_of(app)
    assert case["T_exhaust"].value == pytest.approx(121.1, abs=0.05) and case["p_line"].basis == "absolute"
    app = ran(app.switch_page("engine/screen/pages/path.py"))
    assert "Quality in the line 0\\.97" in told(app) or "0.97" in told(app)


def test_an_entry_that_cannot_be_used_is_refused_and_nothing_is_lost():
    app = confirm(bring(opened(), ("run1.csv", a_log())), "run1.csv")
    app = ran(app.number_input(key="exact coverage %").set_value(200.0))
    assert any("Coverage probability" in e.value for e in app.error) and "Nothing is lost" in told(app)
    app = ran(app.button(key="undo").click())
    assert answer(app).startswith("### ● Quality")


def test_an_instrument_that_cannot_be_is_refused():
    app = opened(DEMO.with_(readings=sets(*TEN)))
    app = ran(app.text_input(key="words line_gauge_grade").set_value("nonsense"))
    assert any("class by EN 837" in e.value for e in app.error)


def test_units_change_everywhere_and_the_result_stays():
    app = confirm(bring(opened(), ("run1.csv", a_log())), "run1.csv")
    before = answer(app)
    app = ran(app.segmented_control(key="units choice").set_value("US"))
    assert answer(app) == before
    cells = [cell for t in app.table for row in t.value.to_dict("records") for cell in row.values()]
    assert any("psi" in str(c) for c in cells) and not any(" bar" in str(c) for c in cells)


def test_the_case_decides_the_limit_and_the_rule():
    app = opened(DEMO.with_(readings=sets(*TEN)))
    app = ran(app.number_input(key="exact x_limit 1").set_value(0.96))
    assert "##### ✓ accept with sampling" in told(app)
    app = ran(app.selectbox(key="choice limit_side").set_value("at most"))
    assert "##### ✕ reject with sampling" in told(app)
    app = ran(app.number_input(key="exact x_limit 1").set_value(None))
    assert "No limit was given" in told(app) and "#####" not in told(app)


def test_hostile_names_mean_nothing():
    name = "<img src=x onerror=alert(1)>**x**.csv"
    app = confirm(bring(opened(), (name, a_log())), name)
    assert answer(app).startswith("### ● Quality")
    assert not re.search(r"(?<!\\)<img|(?<!\\)\*x", told(app))


def test_an_empty_case_with_a_log_lists_all_that_is_not_stated():
    app = confirm(bring(opened(BLANK), ("run1.csv", a_log())), "run1.csv")
    assert "heat loss has not been decided" in told(app)
    app = ran(app.selectbox(key="choice heat_loss_method").set_value("none"))
    said = told(app)
    for what in ("line gauge", "exhaust gauge", "thermometer", "barometer"):
        assert f"the uncertainty of the {what}" in said
    assert "sampling representativeness" in said


def test_what_is_saved_is_the_result_on_screen():
    app = opened(DEMO.with_(readings=sets(*TEN)))
    keys = {b.proto.id.split("-")[-1] if hasattr(b, "proto") else "" for b in app.get("download_button")}
    assert {"result json", "runs csv", "rows csv"} <= keys
    data = json.loads(as_json(app.session_state["reduced"][2], app.session_state["checked"][1]))
    assert f"{data['x']:.4f}" in answer(app).replace("\\", "") and data["monte_carlo"]["draws"] == 20_000
