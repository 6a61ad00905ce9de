"""The record: the engine's numbers, every reason and remark, reopened and recomputed to the same bytes, harmless."""

import hashlib
import io
import json
import re
import xml.etree.ElementTree as tree
import zipfile
from dataclasses import replace

import numpy as np
import pytest
from documents import HOSTILE, harmless

from engine.job.assessment import assess
from engine.job.assessment.answer import quality_text
from engine.job.case.casefile import from_json, from_record, to_json
from engine.job.case.demo import DEMO
from engine.job.case.examples import EXAMPLES, HEATED, HEATING_STEAM, REDUCING_VALVE, WET_LINE_READ
from engine.job.case.fields import FIELDS
from engine.job.case.fields_instruments import HALF_WIDTH
from engine.job.case.fields_path import EXPECTED, READING, UNDECIDED
from engine.job.case.rows import Entry
from engine.job.record import facts_of, reading_as_run, reasons_against, record_html, record_zip
from engine.job.record.data import MOST_CELLS, reopened
from engine.job.record.figures import diagrams_svg
from engine.job.rehearsal.demo_log import demo_log
from engine.job.result import reduce
from engine.job.result.heated import reduce_heated
from engine.job.result.intake import read
from engine.job.result.runs import run_of_log, runs_typed
from engine.job.result.said import chance, correction_rows, figures, rule_text, told, verdict_lines
from engine.job.rig.tables import points
from engine.job.runsheet import tick
from engine.job.runsheet.readings import with_reading
from engine.job.uncertainty import forecast
from engine.measurement.logbook.suspicion import Suspicion
from engine.steam.errors import InputError
from engine.steam.units import SI, US

TAGS = {"html", "head", "meta", "title", "style", "body", "h1", "h2", "h3", "p", "div", "table", "thead", "tbody", "tr",
        "wbr", "th", "td", "br", "ul", "li", "script", "figure", "figcaption", "svg", "defs", "clippath", "rect", "g",
        "polyline", "circle", "text", "path"}
MADE = "2025-03-04 14:20"
STATED = {"sampling_kind": HALF_WIDTH, "sampling": Entry(0.5, "%pt")}


def typed_case(sets=12, runs="12"):
    """Two runs typed by hand, with a remark, and one set left out with a reason."""
    chance_, case = np.random.default_rng(5), DEMO
    for run in runs:
        for k in range(sets):
            case = with_reading(case, run=run, time=Entry(float(k), "min"),
                                p_line=Entry(round(9 + 0.01 * chance_.standard_normal(), 2), "bar", "gauge"),
                                p_exhaust=Entry(round(1.3 + 0.05 * chance_.standard_normal(), 2), "kPa", "gauge"),
                                T_exhaust=Entry(round(121.1 + 0.15 * chance_.standard_normal(), 1), "°C"),
                                sample_flow=Entry(31.7, "kg/h") if k == 5 else None,
                                remark="valve touched" if k == 3 else "")
    removed = FIELDS["removed"].row(log="run 1", row=Entry(4.0, "1"), reason="valve was touched")
    return case.with_(removed=(removed,), deviations="Rain from half past two.")


@pytest.fixture(scope="module")
def case():
    return tick(typed_case(), "hold.permit", "2025-03-04 08:15", "AB", "at the gate")


@pytest.fixture(scope="module")
def result(case):
    return reduce(case, runs_typed(case))


@pytest.fixture(scope="module")
def html(case, result):
    return record_html(case, result, SI, "A4", made=MADE)


@pytest.fixture(scope="module")
def page(html):
    return harmless(html, TAGS)


@pytest.fixture(scope="module")
def log():
    """A log of the simulated rig, one of its cells broken, and a channel suspected."""
    file = io.BytesIO()
    demo_log(file, DEMO, seed=4, x=0.972, duration=4800.0, every=20.0)
    lines = file.getvalue().decode().split("\n")
    lines[100] = lines[100].replace(",", ",about ", 1)
    file = io.BytesIO("\n".join(lines).encode())
    file.name = "header <b>.csv"
    doubt = Suspicion("stuck channel", "p_line", "the line pressure stands still", ((7, 52),), 46, "see the sensor")
    return replace(read(DEMO, file), suspicions=(doubt,))


def table(page, heading):
    return next(t for t in page.tables if t and heading in t[0])


# ---- the numbers


def test_the_answer_is_that_of_the_reduction(page, result, case):
    x, U = figures(result.budget)
    assert f"● Quality {x} ± {U}" in page.text and "(result)" in page.text
    for line in (*verdict_lines(result), *told(result).reasons, rule_text(case)):
        assert line in page.text


def test_the_decision_with_and_without_sampling(page, result):
    rows = table(page, "Chance that the limit is met")[1:]
    both = result.verdicts
    assert [row[1] for row in rows] == ["◇ undecided", "✓ accept"]
    assert [row[2] for row in rows] == [chance(v.probability) for v in both]
    assert [row[3] for row in rows] == [chance(v.chance_wrong) for v in both]
    assert [row[4] for row in rows] == [points(v.guard) for v in both]
    assert [float(row[5].split()[0]) for row in rows] == pytest.approx([v.accept_from for v in both], abs=5e-6)


def test_the_budget_adds_up_to_what_is_said(page, result):
    budget = next(t for t in page.tables if t[0][:2] == ["From", "Cause"])
    assert len(budget) - 1 == len(result.terms)
    shares = [float(row[-1].split()[0]) for row in budget[1:]]
    assert sum(shares) == pytest.approx(100.0, abs=0.05 * len(shares))
    sums = table(page, "Coverage factor")[1:]
    for row, b in zip(sums, (result.budget, result.instruments), strict=True):
        assert row[1:3] == [f"{b.value:.5f}", points(b.u)] and row[-1] == points(b.U)


def test_every_correction_with_its_size(page, result):
    for run in result.runs:
        for row in correction_rows(run, SI):
            assert any(cells == list(row.values()) for t in page.tables for cells in t)


def test_readings_stand_as_they_were_typed(page, case, result):
    tables = [t for t in page.tables if t[0][0] == "Row" and t[0][-1] == "Remark"]
    assert tables[0][0] == ["Row", "t, min", "p₁, bar gauge", "p₂, kPa gauge", "T₂, °C", "ṁ, kg/h", "x", "Remark"]
    first, row = tables[0][1], case["readings"][0]
    assert first[2:5] == [f"{row[n].value:g}" for n in ("p_line", "p_exhaust", "T_exhaust")]
    assert first[6] == f"{result.runs[0].x[0]:.5f}"
    assert tables[0][4][-1] == "left out: valve was touched; valve touched"
    assert [len(t) - 1 for t in tables] == [12, 12]


def test_the_states_are_those_of_the_assessment(page, result):
    states = next(t for t in page.tables if "State" in t[0])
    a = result.runs[0].assessment
    assert [row[1] for row in states[1:]] == [s.name for s in a.states]
    for row, state in zip(states[1:], a.states, strict=True):
        assert float(row[2]) == pytest.approx(state.p / 1e5, abs=5e-5)
        assert float(row[3]) == pytest.approx(state.T - 273.15, abs=5e-3)
        assert float(row[5]) == pytest.approx(state.h / 1e3, abs=5e-3)


def test_steps_not_ticked_are_deviations(page):
    assert "1 of 50 steps of the run sheet were ticked." in page.text
    assert "Set-up of this rig: none of its 9 steps" in page.text
    assert "Anyone may stop the test." in page.text and "AB: at the gate" in page.text
    assert "Rain from half past two." in page.text


def test_formulation_version_and_digest_are_named(page, result, case):
    data = zipfile.ZipFile(io.BytesIO(record_zip(case, result, SI, "A4", made=MADE))).read("readings.csv")
    assert f"SHA-256 of readings.csv: {hashlib.sha256(data).hexdigest()}" in page.text
    assert "IAPWS-IF97 (R7-97, 2012)" in page.text and "Program version" in page.text and f"Made {MADE}." in page.text


def test_everything_entered_is_told_as_entered(page):
    for text in ("9 bar gauge", "100.8 kPa absolute", "0.18 W/K", "IEC 60751", "guarded by risk", "33.7 mm"):
        assert any(text in row for t in page.tables for row in t), text


def test_without_ticks_there_is_no_list_of_steps():
    html = record_html(DEMO, None, SI, "A4", made=MADE)
    assert "No step of a run sheet was ticked" in html and "none of its" not in html


# ---- from a single reading, from logs, from other methods


def test_a_single_reading_gives_what_the_path_page_says():
    page = harmless(record_html(DEMO, None, SI, "A4", made=MADE), TAGS)
    (x, U) = figures(reduce(DEMO, (reading_as_run(DEMO),)).budget)
    assert f"◐ Quality {x} ± {U}" in page.text and "(exploration)" in page.text
    assert quality_text(assess(DEMO).x) == x
    assert "the scatter of the readings, of which there is only one" in page.text
    states = next(t for t in page.tables if "State" in t[0])
    assert states[1][4] == quality_text(assess(DEMO).x)


def test_a_single_reading_is_reduced_to_the_digits_of_its_assessment():
    found = facts_of(DEMO, None, SI).result
    assert found.x == pytest.approx(assess(DEMO).x, abs=1e-12)


def test_a_log_stands_in_the_record_with_what_could_not_be_read(log):
    result = reduce(DEMO, (run_of_log(log),))
    html = record_html(DEMO, result, SI, "A4", made=MADE, logs=[log])
    page = harmless(html, TAGS)
    assert log.rejected[0].content in page.text and "not a number" in page.text
    assert "Permit in hand" in page.text and str(log.suspicions[0]) in page.text
    assert "settled window" in page.text and "The logs as read are in this page too." in page.text
    back = reopened(html)
    assert back.case == DEMO and back.logs[0].name == log.name
    for name, values in log.channels.items():
        np.testing.assert_array_equal(back.logs[0].channels[name], values)
    again = reduce(back.case, back.runs)
    assert again.x == result.x
    assert record_html(back.case, again, SI, "A4", made=MADE, logs=back.logs) == html


def test_a_long_log_is_thinned_on_paper_but_not_in_the_data(log):
    result = reduce(DEMO, (run_of_log(log),))
    page = harmless(record_html(DEMO, result, SI, "A4", made=MADE, logs=[log]), TAGS)
    rows = next(t for t in page.tables if t[0][0] == "Row" and t[0][-1] == "Remark")
    assert len(log) / 2 <= len(rows) - 1 < len(log)
    for remark in log.remarks:  # and what was remarked is not lost to it
        assert any(remark.text in row[-1] for row in rows)
    data = zipfile.ZipFile(io.BytesIO(record_zip(DEMO, result, SI, "A4", made=MADE, logs=[log]))).read("readings.csv")
    assert data.decode().count("\n") == len(log) + 1


def test_logs_too_long_for_the_page_are_named_instead(log, monkeypatch):
    monkeypatch.setattr("engine.job.record.data.MOST_CELLS", 100)
    assert MOST_CELLS > 100
    html = record_html(DEMO, reduce(DEMO, (run_of_log(log),)), SI, "A4", made=MADE, logs=[log])
    assert "too long for this page" in html and reopened(html).logs == ()


def test_a_log_that_no_run_came_from_is_left_out(log):
    assert reopened(record_html(DEMO, None, SI, "A4", made=MADE, logs=[log])).logs == ()


def test_behind_a_separator_sets_of_readings_give_the_quality_of_the_line():
    case = WET_LINE_READ.with_(**STATED)
    for T in (112.2, 112.4, 112.3):
        case = with_reading(case, run="1", T_exhaust=Entry(T, "°C"))
    result = reduce(case, runs_typed(case))
    page = harmless(record_html(case, result, SI, "A4", made=MADE), TAGS)
    x, U = figures(result.budget)
    assert f"Quality {x} ± {U}" in page.text and "drained water put back" in page.text
    assert result.x == pytest.approx(assess(case).x, abs=1e-6)


def test_with_a_heater_the_means_are_those_of_the_case(result):
    case = HEATED.with_(**STATED)
    page = harmless(record_html(case, None, SI, "A4", made=MADE), TAGS)
    found = forecast(case)
    assert f"Quality in the line {quality_text(assess(case).x)}" in page.text and "P_lost" in page.text
    assert f"Quality {' ± '.join(figures(found.budget))}" in page.text and found.missing
    assert "Not a result yet, because not stated" in page.text
    assert record_html(case, result, SI, "A4", made=MADE) == record_html(case, None, SI, "A4", made=MADE)


def test_sets_with_a_heater_stand_in_the_record_and_give_its_quality():
    case = HEATED.with_(**STATED)
    for run, power in (("1", 860.0), ("2", 875.0)):
        for k in range(6):
            case = with_reading(case, run=run, time=Entry(float(k), "min"), T_heater=Entry(178.6 + 0.1 * (k % 3), "°C"),
                                power=Entry(power, "W"), remark="fed" if k == 2 else "")
    found, html = reduce_heated(case), record_html(case, None, SI, "A4", made=MADE)
    page = harmless(html, TAGS)
    assert f"Quality {' ± '.join(figures(found.forecast.budget))}" in page.text
    assert all(f"{x:.5f}" in page.text for run in found.runs for x in run.x) and "fed" in page.text
    assert "The runs differ by more than their own scatter explains" in page.text
    assert record_html(reopened(html).case, None, SI, "A4", made=MADE) == html


def test_a_superheated_line_and_a_wet_exhaust_are_told_as_such():
    page = harmless(record_html(REDUCING_VALVE.with_(**STATED), None, SI, "A4", made=MADE), TAGS)
    assert "No quality can be given from these readings." in page.text
    assert "The line is superheated by 10.1 K" in page.text and "There is no budget" in page.text
    wet = HEATING_STEAM.with_(question=READING, **STATED)
    page = harmless(record_html(wet, None, SI, "A4", made=MADE), TAGS)
    assert f"the quality is below {assess(wet).x_below:.4f}" in page.text


@pytest.mark.parametrize("title", EXAMPLES)
@pytest.mark.parametrize(("units", "paper"), [(SI, "A4"), (US, "Letter")])
def test_every_example_can_be_recorded_or_says_why_not(title, units, paper):
    case = EXAMPLES[title].with_(question=READING, **STATED)
    harmless(record_html(case, None, units, paper, made=MADE), TAGS)


# ---- refusals


@pytest.mark.parametrize(("changes", "words"), [
    ({"heat_loss_method": UNDECIDED}, "heat loss: got not decided"),
    ({"sampling": None}, "sampling representativeness: got not stated"),
    ({"sampling_kind": "not stated"}, "sampling representativeness: got not stated"),
    ({"question": EXPECTED}, "an expectation is no test"),
])
def test_what_is_undecided_keeps_the_record_from_being_made(changes, words):
    case = DEMO.with_(**changes)
    with pytest.raises(InputError, match=words):
        record_html(case, None, SI, "A4", made=MADE)
    with pytest.raises(InputError, match=words):
        record_zip(case, None, SI, "A4", made=MADE)
    assert len(reasons_against(case, None)) == 1


def test_all_reasons_are_told_at_once():
    case = DEMO.with_(heat_loss_method=UNDECIDED, sampling=None, question=EXPECTED)
    assert [f.name for f in reasons_against(case, None)] == ["heat_loss_method", "sampling", "question"]


def test_a_heater_needs_its_loss_stated_not_that_of_a_throttle():
    case = HEATED.with_(heat_loss_method=UNDECIDED, **STATED)
    assert not reasons_against(case, None)
    assert [f.name for f in reasons_against(case.with_(power_loss=None), None)] == ["power_loss"]


def test_no_readings_are_no_record():
    assert [f.name for f in reasons_against(DEMO, reduce(DEMO, ()))] == ["readings"]


def test_an_unusable_case_and_an_unknown_paper_are_refused():
    with pytest.raises(InputError, match="Exhaust pressure: got 12"):
        record_html(DEMO.with_(p_exhaust=Entry(12.0, "bar", "absolute")), None, SI, "A4", made=MADE)
    with pytest.raises(InputError, match="paper: got A3"):
        record_html(DEMO, None, SI, "A3", made=MADE)


# ---- there and back


@pytest.mark.parametrize(("units", "paper"), [(SI, "A4"), (US, "Letter")])
def test_a_record_reopened_makes_the_same_record(case, result, units, paper):
    html = record_html(case, result, units, paper, made=MADE)
    back = reopened(html.encode())
    assert back.case == case == from_record(html)
    assert record_html(back.case, reduce(back.case, back.runs), units, paper, made=MADE) == html


def test_the_archive_holds_what_it_says_and_is_the_same_every_time(case, result, html):
    data = record_zip(case, result, SI, "A4", made=MADE)
    assert data == record_zip(case, result, SI, "A4", made=MADE)
    archive = zipfile.ZipFile(io.BytesIO(data))
    assert archive.namelist() == ["record.html", "case.json", "readings.csv"] and archive.testzip() is None
    assert archive.read("record.html").decode() == html
    assert from_json(archive.read("case.json")) == case
    rows = archive.read("readings.csv").decode("utf-8-sig").splitlines()
    assert len(rows) == 25 and rows[0].startswith("time [s],line pressure [bar absolute]")


@pytest.mark.parametrize(("data", "words"), [
    (b"", "a page of another kind"),
    (b"<html></html>", "a page of another kind"),
    (b"\xff\xfe", "bytes that are not text"),
    (b'<script type="application/json" id="case">{}', "a page of another kind"),
    (b'<script type="application/json" id="case">{}</script>', "a JSON document of another kind"),
    (b"x" * 20_000_001, "at most 20000000 bytes"),
])
def test_what_is_no_record_is_refused(data, words):
    with pytest.raises(InputError, match=words):
        from_record(data)


@pytest.mark.parametrize("readings", ["", "[]", "{}", '{"logs": 3}', '{"logs": [{}]}', '{"logs": [null]}',
                                      "[" * 100_000, '{"logs": [{"name": "a", "rows": [1, 2]}]}'])
def test_readings_changed_by_hand_are_refused(readings):
    block = f'<script type="application/json" id="readings">{readings}</script>'
    with pytest.raises(InputError, match="readings in the record"):
        reopened(f'<script type="application/json" id="case">{to_json(DEMO)}</script>{block}')


@pytest.mark.parametrize(("name", "value"), [("time", [0.0]), ("time", [None, 1.0]), ("rows", ["x", "y"]),
                                             ("channels", {"T_exhaust": [1.0]}), ("mapping", {}),
                                             ("channels", {"T_exhaust": ["a", "b"]}), ("suspicions", [[1]]),
                                             ("remarks", [["a"]])])
def test_columns_that_do_not_fit_are_refused(log, name, value):
    html = record_html(DEMO, reduce(DEMO, (run_of_log(log),)), SI, "A4", made=MADE, logs=[log])
    block = re.search(r'id="readings">(.*?)</script>', html)[1]
    data = json.loads(block)
    data["logs"][0] |= {"rows": [1, 2], "time": [0.0, 1.0], "channels": {}, "remarks": [], "rejected": []}
    data["logs"][0][name] = value
    with pytest.raises(InputError):
        reopened(html.replace(block, json.dumps(data)))


# ---- harmless


def test_nothing_written_by_a_user_does_anything():
    texts = {name: HOSTILE for name, field in FIELDS.items() if field.form == "text" and "grade" not in name}
    case = tick(typed_case(4, "1"), "hold.permit", HOSTILE, HOSTILE, HOSTILE)
    case = tick(case, HOSTILE, "", "AB")
    rows = tuple(row.with_(run=HOSTILE, remark=HOSTILE) for row in case["readings"])
    name = f"run {HOSTILE.strip()}"
    case = case.with_(
        **texts, readings=rows,
        removed=(FIELDS["removed"].row(log=name, row=Entry(4.0, "1"), reason=HOSTILE),),
        windows=(FIELDS["windows"].row(log=name, begin=Entry(0.0, "min"), end=Entry(9.0, "min"), reason=HOSTILE),),
        switched_off=(FIELDS["switched_off"].row(correction="water leg", reason=HOSTILE),))
    html = record_html(case, reduce(case, runs_typed(case)), SI, "A4", made=HOSTILE)
    page = harmless(html, TAGS)
    assert [a.get("id") for t, a in page.tags if t == "script"] == ["case", "readings"]
    assert page.text.count("<script>alert(1)</script>") > 8  # shown as typed
    assert json.loads(page.blocks["case"])["values"]["title"] == HOSTILE
    assert from_record(html) == case


def test_no_word_turns_a_figure_round_or_runs_off_the_paper():
    turn, long = "\u202e", "W" * 200
    case = DEMO.with_(title=f"{turn}{long}", deviations=long)
    case = with_reading(case, run=f"{turn}1", T_exhaust=Entry(121.1, "°C"))
    case = with_reading(case, run=f"{turn}1", T_exhaust=Entry(121.2, "°C"), remark=long)
    html = record_html(case, reduce(case, runs_typed(case)), SI, "A4", made=MADE)
    printed = html[:html.index("<script")]
    assert turn not in printed and turn in from_record(html)["title"]
    body = re.sub(r"<(style|title|h1|svg).*?</\1>|<meta[^>]*>", "", printed, flags=re.DOTALL)
    assert not re.search(r"[^\s<>]{60}", body)


def test_units_of_a_log_stay_in_what_was_read(log):
    page = harmless(record_html(DEMO, reduce(DEMO, (run_of_log(log),)), US, "Letter", made=MADE, logs=[log]), TAGS)
    headings = next(table[0] for table in page.tables if table[0][:1] == ["Row"])
    assert any(heading.startswith("p₁, bar") for heading in headings) and any("°C" in h for h in headings)


def test_only_what_the_method_asks_for_is_listed(case):
    page = harmless(record_html(HEATED.with_(**STATED), None, SI, "A4", made=MADE), TAGS)
    assert "Electric power" in page.text and "Exhaust pressure" not in page.text and "Orifice" not in page.text
    page = harmless(record_html(case, reduce(case, runs_typed(case)), SI, "A4", made=MADE), TAGS)
    assert "Drained water" not in page.text and "Electric power" not in page.text and "Orifice bore" in page.text


def test_a_hostile_log_stays_text(log):
    bad = [replace(log, name=HOSTILE, remarks=tuple(r._replace(text=HOSTILE) for r in log.remarks[:1]),
                   rejected=tuple(r._replace(content=HOSTILE, column=HOSTILE) for r in log.rejected))]
    html = record_html(DEMO, reduce(DEMO, (run_of_log(bad[0]),)), SI, "A4", made=MADE, logs=bad)
    page = harmless(html, TAGS)
    assert [a.get("id") for t, a in page.tags if t == "script"] == ["case", "readings"]
    assert reopened(html).logs[0].name == HOSTILE


# ---- diagrams


@pytest.mark.parametrize("title", EXAMPLES)
@pytest.mark.parametrize("units", [SI, US])
def test_the_diagrams_are_whole_drawings_inside_their_frame(title, units):
    a = assess(EXAMPLES[title])
    drawn = diagrams_svg(a, units)
    assert [name for name, _ in drawn] == ["T–s diagram", "h–s diagram", "p–h diagram"]
    for _, svg in drawn:
        root = tree.fromstring(svg)
        _, _, width, height = map(float, root.get("viewBox").split())
        marks = [m for m in root.iter() if m.tag.endswith("circle")]
        assert len(marks) == len(a.states)
        assert all(0 < float(m.get("cx")) < width and 0 < float(m.get("cy")) < height for m in marks)
        labels = [t.text for t in root.iter() if t.tag.endswith("text")]
        assert {str(k) for k in range(1, len(a.states) + 1)} <= set(labels) and len(labels) > len(a.states) + 5
        assert "nan" not in svg and "inf" not in svg.replace("info", "")


def test_the_diagrams_carry_the_path_of_the_sample():
    a = assess(DEMO)
    (_, svg), *_ = diagrams_svg(a, SI)
    path = next(p for p in tree.fromstring(svg).iter() if p.tag.endswith("polyline") and p.get("stroke") == "#d55e00")
    points_ = np.array([list(map(float, pair.split(","))) for pair in path.get("points").split()])
    assert len(points_) == a.path.T.size
    # straight scales: the place follows the temperature and the entropy
    for column, values in ((0, a.path.s), (1, a.path.T)):
        fit = np.polyfit(values, points_[:, column], 1)
        assert np.abs(np.polyval(fit, values) - points_[:, column]).max() < 0.11
