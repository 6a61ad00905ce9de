"""The run sheet: every number is the engine's, every case has one, ticks and readings stay, the print is harmless."""

import re
from dataclasses import replace

import numpy as np
import pytest
from documents import HOSTILE, harmless

from engine.calorimeter import (
    WEATHER_HALF_WIDTH,
    body_heat_capacity,
    exhaust_temperature,
    time_to_within,
    warm_up,
)
from engine.job.assessment import assess
from engine.job.case import Case
from engine.job.case.casefile import from_json, from_link, to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import BOILER_OUTLET, EXAMPLES, HEATED, HEATING_STEAM, HIGH_SITE, WET_LINE_READ
from engine.job.case.fields import FIELDS
from engine.job.case.fields_path import BY_NORMAL, BY_TWO_FLOWS, EXPECTED, UNDECIDED
from engine.job.case.fields_rig import VESSEL
from engine.job.case.fields_runsheet import GAS_NOTED
from engine.job.case.rows import Entry
from engine.job.reach import assess_reach
from engine.job.rig import assess_rig
from engine.job.runsheet import headline, notices, run_sheet, tick, ticks_of, untick
from engine.job.runsheet.plan import FLOW_ALARM, MOST_SETS, plan_of
from engine.job.runsheet.print import runsheet_html
from engine.job.runsheet.readings import columns_of, readings_outside, runs_of, with_reading
from engine.job.said import Said
from engine.steam import saturation_temperature
from engine.steam.errors import InputError
from engine.steam.units import SI, US, to_si

TAGS = {"html", "head", "meta", "title", "style", "body", "h1", "h2", "h3", "p", "div", "table", "thead", "tbody", "tr",
        "wbr", "th", "td", "br", "ul", "li"}
ASKED = DEMO.with_(question=EXPECTED)


def numbers(said):
    return [value for value, *_ in said.facts]


def gauge(sheet, key):
    return next(g for g in sheet.gauges if g.key == key)


def deviation(sheet, key):
    return next(d for d in sheet.deviations if d.key == key)


def keys(sheet):
    return [step.key for step in sheet.steps]


@pytest.fixture(scope="module")
def sheet():
    return run_sheet(DEMO)


@pytest.fixture(scope="module")
def rig():
    return assess_rig(ASKED)


@pytest.fixture(scope="module")
def a():
    return assess(ASKED)


# ---- the numbers


def test_no_number_is_typed_into_a_sentence():
    """Digits come from facts alone: the sentences themselves have none but in their places."""
    for case in EXAMPLES.values():
        sheet = run_sheet(case)
        said = [step.said for step in sheet.steps]
        said += [s for g in sheet.gauges for s in g if isinstance(s, Said)]
        said += [s for d in sheet.deviations for s in d if isinstance(s, Said)]
        for one in said:
            typed = re.sub(r"\{\d\}", "", one.sentence).replace("0 W", "")  # of a heater that is off
            assert not re.search(r"\d", typed), one.sentence
            places = {int(k) for k in re.findall(r"\{(\d)\}", one.sentence)}
            assert places == set(range(len(one.facts))), one.sentence


def test_the_numbers_of_the_steps_are_those_of_the_engine(sheet, a, rig):
    si, warming = a.si, rig.warming.value
    expected = {
        "hold.rated": [si["p_line"], saturation_temperature(si["p_line"])],
        "hold.agreed": [2, 30, 0.970, 0.05],
        "setup.nozzle": [6, 4e-3, rig.nozzle.value.entry.value.velocity_ratio,
                         rig.nozzle.value.isokinetic_area.value],
        "setup.orifice": [3e-3, rig.flow.value.orifice.computed],
        "setup.exhaust": [26.6e-3, 1.5, rig.exhaust.value.pipe.value.p_exhaust],
        "setup.thermometer": [60e-3, rig.thermometer.immersion_good.value],
        "checks.barometer": [100.8e3],
        "warm.wet": [saturation_temperature(102.1e3), warming.run.time_condensing],
        "warm.wait": [warming.ready, 0.1, warming.run.time_constant],
        "warm.flow": [600.0, 31.7 / 3600 * 600, 31.7 / 3600],
        "settle.rate": [600.0, 0.05 / 60, 1.5],
        "settle.line": [0.01 * si["p_line"]],
        "settle.pressure": [0.02 * 102.1e3],
        "settle.superheat": [a.T_saturation + 5, 5.0, a.T_saturation + 10],
        "read.run2": [2, 30, 1800.0],
        "normal.read": [a.T_saturation + assess_reach(DEMO).dry_superheat],
    }
    for key, values in expected.items():
        assert numbers(sheet.step(key).said) == pytest.approx(values, rel=1e-9), key


def test_the_water_leg_is_what_the_line_pressure_lost(sheet, a):
    height, head = numbers(sheet.step("setup.leg").said)
    assert height == 0.8
    assert head == pytest.approx(9.0e5 + 100.8e3 - a.si["p_line"], rel=1e-9)


def test_the_heat_of_the_exhaust_is_that_of_its_steam_above_the_surroundings(sheet):
    flow, heat = numbers(sheet.step("hold.exhaust").said)
    assert flow == pytest.approx(31.7 / 3600)
    # h of the exhaust 2720 kJ/kg (isenthalpic from the line) less h_f 100.6 kJ/kg at 24 °C (IAPWS-95)
    assert heat == pytest.approx(flow * (2720.3e3 - 100.6e3), rel=1e-3)


def test_the_thermometer_must_show_what_the_expected_wetness_gives(sheet, a):
    shown = gauge(sheet, "T_exhaust")
    plan = assess_reach(DEMO)
    assert numbers(shown.settled) == [a.T_exhaust]
    assert numbers(shown.low) == [plan.wet.T - plan.U] and numbers(shown.high) == [plan.dry.T + plan.U]
    assert numbers(shown.note) == [plan.U] and plan.U > 0
    assert plan.wet.T < a.T_exhaust < plan.dry.T


def test_a_wetness_outside_its_range_is_still_within_the_band():
    sheet = run_sheet(DEMO.with_(wetness=Entry(4.0, "%")))
    shown = gauge(sheet, "T_exhaust")
    assert numbers(shown.low)[0] < numbers(shown.settled)[0] < numbers(shown.high)[0]


def test_gauges_show_what_their_scale_shows(sheet, a):
    line, exhaust = gauge(sheet, "p_line"), gauge(sheet, "p_exhaust")
    assert line.settled.text(SI) == "9.000 bar gauge" and exhaust.settled.text(SI) == "0.013 bar gauge"
    assert numbers(exhaust.before) == [0.0]
    assert numbers(line.low) == pytest.approx([9e5 - 0.01 * a.si["p_line"]])
    assert numbers(exhaust.high) == pytest.approx([1300 + 0.02 * 102.1e3])
    absolute = run_sheet(DEMO.with_(exhaust_gauge_shows="absolute"))
    assert gauge(absolute, "p_exhaust").settled.text(SI) == "1.021 bar absolute"
    assert numbers(gauge(absolute, "p_exhaust").before) == [100.8e3]


def test_the_sample_flow_may_fall_by_the_alarm(sheet):
    flow = 31.7 / 3600
    shown = gauge(sheet, "sample_flow")
    assert [numbers(s)[0] for s in (shown.settled, shown.low, shown.high)] == pytest.approx(
        [flow, (1 - FLOW_ALARM) * flow, (1 + FLOW_ALARM) * flow])
    assert numbers(deviation(sheet, "flow").seen) == pytest.approx([(1 - FLOW_ALARM) * flow])


def test_a_fallen_flow_makes_the_steam_look_wetter_by_what_the_reduction_says(sheet, a):
    """With the flow thought unchanged: the loss per kg is taken too small by a ninth of itself."""
    share, error = numbers(deviation(sheet, "flow").means)
    assert share == FLOW_ALARM
    T = a.T_exhaust
    taken = assess(DEMO.with_(T_exhaust=Entry(T, "K"))).x
    true = assess(DEMO.with_(T_exhaust=Entry(T, "K"), sample_flow=Entry(31.7 * (1 - FLOW_ALARM), "kg/h"))).x
    assert error == pytest.approx(taken - true, abs=1e-9) and error < 0


def test_the_highest_exhaust_pressure_just_reads_the_wettest_steam(sheet):
    (most,) = numbers(deviation(sheet, "back_pressure").means)
    p2 = most + 100.8e3  # the gauge shows gauge pressure
    end = assess_reach(DEMO).wet.assessment
    seen = exhaust_temperature(end.si["p_line"], end.x, p2, **end.terms.arguments())
    assert seen.superheat == pytest.approx(end.si["least_superheat"], abs=1e-6)


def test_line_pressure_moves_the_thermometer_as_the_balance_says(sheet, a):
    _, moved = numbers(deviation(sheet, "swings").means)
    p = a.si["p_line"]
    higher = exhaust_temperature(1.01 * p, a.x, 102.1e3, **a.terms.arguments()).T_exhaust
    assert moved == pytest.approx(higher - a.T_exhaust, abs=1e-9) and moved > 0


def test_after_a_slug_the_body_needs_what_its_warm_up_needs_from_saturation(sheet, rig):
    w = rig.warming.value
    assert numbers(deviation(sheet, "slug").do) == [w.ready - w.run.time_condensing]
    assert deviation(sheet, "slug").do.text(SI).startswith("Stand clear")


def test_more_superheat_than_dry_steam_is_a_superheated_line(sheet, a):
    dry = numbers(deviation(sheet, "superheated").seen)[0]
    assert assess(DEMO.with_(T_exhaust=Entry(dry + 0.01, "K"))).verdict.value == "line superheated"
    assert assess(DEMO.with_(T_exhaust=Entry(dry - 0.01, "K"))).x == pytest.approx(1.0, abs=2e-5)


def test_the_scale_of_the_thermometer_rises_from_wet_to_dry(sheet, a):
    marks = {m.key: m.T for m in sheet.marks}
    assert [m.T for m in sheet.marks] == sorted(marks.values())
    assert marks["saturation"] == a.T_saturation and marks["expected"] == a.T_exhaust
    assert marks["least"] == a.T_saturation + 5 and marks["comfortable"] == a.T_saturation + 10
    assert marks["saturation"] < marks["least"] < marks["wettest"] < marks["driest"] < marks["dry"]


def test_sets_follow_from_duration_runs_and_interval():
    plan = plan_of(DEMO.with_(duration=Entry(90.0, "min"), runs_planned=Entry(3.0, "1"), read_every=Entry(2.0, "min")))
    assert (plan.runs, plan.sets, plan.run_length) == (3, 15, 1800.0)
    assert plan_of(DEMO.with_(read_every=Entry(1.0, "s"))).sets == MOST_SETS
    assert plan_of(DEMO.with_(duration=Entry(1.0, "s"))).sets == 1


# ---- the procedure for the case


@pytest.mark.parametrize("title", EXAMPLES)
@pytest.mark.parametrize("units", [SI, US])
def test_every_example_has_a_sheet_that_can_be_read(title, units):
    sheet = run_sheet(EXAMPLES[title])
    assert len(set(keys(sheet))) == len(sheet.steps) > 30
    assert sheet.sections[0].hold and not any(s.hold for s in sheet.sections[1:])
    said = [step.said.text(units) for step in sheet.steps]
    said += [s.text(units) for g in sheet.gauges for s in g if isinstance(s, Said)]
    said += [s.text(units) for d in sheet.deviations for s in d if isinstance(s, Said)]
    said += [headline(sheet, units), *notices(sheet, units)]
    assert not any(word in text for text in said for word in ("{", "}", "none ", "nan", "inf "))
    foreign = {"SI": ("°F", "psi", "lb"), "US": ("°C", "bar ", "kg")}[units.name]
    assert not any(word in text for text in said for word in foreign)


def test_the_order_is_that_of_the_work(sheet):
    assert [s.key for s in sheet.sections] == ["hold", "setup", "checks", "blow", "warm", "settle", "read", "normal",
                                               "close"]
    first = keys(sheet)
    assert first.index("blow.drain") < first.index("blow.tapping") < first.index("warm.open")
    assert first.index("close.shut") < first.index("close.dead")


def test_the_keys_of_the_steps_do_not_change(sheet):
    """Ticks in saved cases refer to them."""
    assert " ".join(keys(sheet)) == (
        "hold.permit hold.risks hold.authorised hold.second hold.isolated hold.rated hold.exhaust hold.clothing "
        "hold.agreed setup.tapping setup.nozzle setup.sampling setup.orifice setup.exhaust setup.lagging "
        "setup.thermometer setup.leg setup.weigh checks.certificates checks.ice checks.zero checks.barometer "
        "checks.clocks blow.drain blow.tapping blow.rig warm.open warm.wet warm.wait warm.flow settle.gauges "
        "settle.rate settle.line settle.pressure settle.superheat settle.dry read.sets read.remarks read.run1 "
        "read.flow1 read.between1 read.run2 read.flow2 normal.read close.shut close.dead close.orifice close.after "
        "close.saved close.site")


def test_behind_a_heater_the_warm_up_is_that_of_its_body():
    bare = run_sheet(HEATED)
    assert "mass of the body" in bare.step("warm.wait").missing
    case = HEATED.with_(body_mass=Entry(3.0, "kg"), body_length=Entry(400.0, "mm"), T_ambient=Entry(20.0, "°C"),
                        body_inner_diameter=Entry(26.6, "mm"))
    sheet = run_sheet(case)
    a, si = sheet.plan.a, sheet.plan.a.si
    run = warm_up(body_heat_capacity(3.0), np.pi * 0.0266 * 0.4, si["sample_flow"], a.heating.p, a.T_exhaust, 293.15,
                  293.15, film=100.0)
    said = sheet.step("warm.wait").said.text(SI)
    assert said.startswith(f"Wait {time_to_within(run, si['warmup_error']) / 60:.0f} min.")
    assert f"time constant of {run.time_constant / 60:.1f} min" in said and not sheet.step("warm.wait").missing


def test_a_heater_is_never_on_without_flow():
    sheet = run_sheet(HEATED)
    order = keys(sheet)
    assert order.index("hold.electric") < order.index("blow.rig") < order.index("blow.power")
    assert order.index("close.power") < order.index("close.shut")
    assert not any(key in order for key in ("setup.orifice", "normal.read", "checks.zero"))
    assert numbers(gauge(sheet, "power").settled) == [860.0]
    assert deviation(sheet, "no_flow").do.text(SI).startswith("Power off at once")


def test_a_separator_is_weighed_by_the_basis_of_the_case():
    sheet = run_sheet(WET_LINE_READ)
    a = assess(WET_LINE_READ.with_(question=EXPECTED))
    assert numbers(sheet.step("setup.separator").said) == [a.separation.drain_fraction, a.separation.drain_least]
    assert "throttled steam, condensed" in sheet.step("setup.weigh").said.text(SI)
    assert "agree now which" in run_sheet(WET_LINE_READ.with_(
        question=EXPECTED, weighed_basis="not stated")).step("setup.weigh").said.text(SI)
    with_flow = run_sheet(WET_LINE_READ.with_(sample_flow=Entry(20.0, "kg/h")))
    drained = a.separation.drain_fraction
    assert numbers(gauge(with_flow, "drained").settled) == pytest.approx([20 / 3600 * drained / (1 - drained)])


@pytest.mark.parametrize(("case", "key"), [
    (DEMO.with_(gas_hazard=GAS_NOTED), "hold.gas"),
    (DEMO.with_(heat_loss_method=BY_TWO_FLOWS, second_flow=Entry(15.0, "kg/h"), T_second=Entry(118.0, "°C")),
     "read.second"),
])
def test_what_a_case_notes_becomes_a_step(case, key):
    assert key not in keys(run_sheet(DEMO))
    assert key in keys(run_sheet(case))


def test_a_normal_reading_is_needed_where_the_loss_rests_on_it():
    case = DEMO.with_(heat_loss_method=BY_NORMAL, T_normal=Entry(147.0, "°C"))
    assert "needed, since" in run_sheet(case).step("normal.read").said.text(SI)


def test_an_exhaust_to_a_vessel_has_no_plume():
    sheet = run_sheet(DEMO.with_(exhaust_to=VESSEL, p_discharge=Entry(0.9, "bar", "absolute")))
    assert "relief" in sheet.step("hold.exhaust").said.text(SI)
    assert "settle.dry" not in keys(sheet)


def test_an_altitude_gives_the_barometer_its_weather():
    shown = gauge(run_sheet(HIGH_SITE), "p_barometer")
    p = plan_of(HIGH_SITE).a.si.p_barometer
    assert [numbers(s)[0] for s in (shown.low, shown.settled, shown.high)] == pytest.approx(
        [p - WEATHER_HALF_WIDTH, p, p + WEATHER_HALF_WIDTH])


def test_what_a_number_lacks_is_said_beside_its_step():
    sheet = run_sheet(BOILER_OUTLET)
    assert sheet.step("setup.orifice").missing == "Enter orifice bore and discharge coefficient."
    assert "mass of the body" in sheet.step("warm.wait").missing
    assert "Wait until" in sheet.step("warm.wait").said.text(SI)


def test_a_plan_that_cannot_be_read_says_so_first():
    sheet = run_sheet(HEATING_STEAM)
    assert notices(sheet, SI)[0].startswith("As planned the wetness expected cannot be read.")
    assert headline(sheet, SI).startswith("Nothing of the expected")


def test_runs_too_short_to_settle_are_told():
    assert not any("too short" in line for line in notices(run_sheet(DEMO), SI))
    short = run_sheet(DEMO.with_(duration=Entry(20.0, "min")))
    assert short.plan.sets == 10 and any("Runs of 10 sets are too short" in line and "10.0 min" in line
                                         for line in notices(short, SI))


def test_what_no_result_can_do_without_is_named():
    said = " ".join(notices(run_sheet(DEMO.with_(heat_loss_method=UNDECIDED, sampling=None)), SI))
    assert "how the heat loss is accounted for" in said and "sampling representativeness" in said
    assert "no result without it" in said


def test_an_entry_that_cannot_be_used_is_refused():
    with pytest.raises(InputError, match="Exhaust pressure: got 12"):
        run_sheet(DEMO.with_(p_exhaust=Entry(12.0, "bar", "absolute")))


def test_the_plan_of_the_same_case_can_be_used_again():
    plan = plan_of(DEMO)
    assert run_sheet(tick(DEMO, "hold.permit", "08:15", "AB"), plan).plan is plan


# ---- ticks and readings


def test_ticks_survive_file_and_link():
    case = tick(tick(DEMO, "hold.permit", "2025-03-04 08:15", "AB", "at the gate"), "hold.risks", "08:20", "AB")
    for back in (from_json(to_json(case)), from_link(to_link(case))):
        assert ticks_of(back) == ticks_of(case)
        assert ticks_of(back)["hold.permit"].remark == "at the gate"


def test_a_step_is_ticked_once_and_can_be_unticked():
    case = tick(tick(DEMO, "hold.permit", "08:15", "AB"), "hold.permit", "08:16", "CD")
    assert len(case["ticks"]) == 1 and ticks_of(case)["hold.permit"].initials == "CD"
    assert untick(case, "hold.permit") == DEMO
    assert untick(DEMO, "hold.permit") == DEMO


@pytest.mark.parametrize("initials", ["", "  "])
def test_a_tick_needs_initials(initials):
    with pytest.raises(InputError, match="initials: got nothing"):
        tick(DEMO, "hold.permit", "08:15", initials)


def test_ticks_are_not_without_end():
    rows = tuple(FIELDS["ticks"].row(step=f"s{k}", initials="A") for k in range(FIELDS["ticks"].most))
    with pytest.raises(InputError, match="steps ticked: got 201"):
        tick(DEMO.with_(ticks=rows), "hold.permit", "08:15", "AB")


def test_hold_points_are_open_until_all_are_ticked(sheet):
    case = DEMO
    for step in sheet.sections[0].steps:
        assert run_sheet(case, sheet.plan).held
        case = tick(case, step.key, "08:15", "AB")
    done = run_sheet(case, sheet.plan)
    assert not done.held and len(done.unticked) == len(done.steps) - len(sheet.sections[0].steps)


def test_ticks_of_another_method_are_kept_and_named():
    case = tick(HEATED, "setup.orifice", "08:15", "AB")
    assert run_sheet(case).strange == ("setup.orifice",)


def test_readings_survive_file_and_link():
    case = with_reading(DEMO, run="1", time=Entry(0.0, "min"), T_exhaust=Entry(121.1, "°C"), remark="valve touched")
    for back in (from_json(to_json(case)), from_link(to_link(case))):
        assert back == case and runs_of(back)["1"][0]["remark"] == "valve touched"


def test_a_full_table_of_readings_refuses_the_next():
    full = DEMO.with_(readings=(FIELDS["readings"].row(T_exhaust=Entry(121.0, "°C")),) * FIELDS["readings"].most)
    with pytest.raises(InputError, match="at most 400 rows"):
        with_reading(full, T_exhaust=Entry(121.0, "°C"))


@pytest.mark.parametrize(("cells", "found"), [
    ({}, ()),
    ({"T_exhaust": Entry(121.1, "°C"), "p_line": Entry(9.0, "bar", "gauge")}, ()),
    ({"T_exhaust": Entry(249.9, "°F"), "p_line": Entry(10.008, "bar", "absolute")}, ()),
    ({"T_exhaust": Entry(100.3, "°C")}, ("saturated",)),
    ({"T_exhaust": Entry(103.0, "°C")}, ("thin",)),
    ({"T_exhaust": Entry(150.0, "°C")}, ("superheated",)),
    ({"T_exhaust": Entry(111.5, "°C"), "p_exhaust": Entry(1.5, "bar", "absolute")}, ("saturated", "back_pressure")),
    ({"p_exhaust": Entry(4.0, "kPa", "gauge")}, ("back_pressure",)),
    ({"sample_flow": Entry(28.0, "kg/h")}, ("flow",)),
    ({"p_line": Entry(8.8, "bar", "gauge")}, ("swings",)),
    ({"p_line": Entry(9.0, "bar", "gauge"), "p_barometer": Entry(80.0, "kPa", "absolute")}, ("swings",)),
])
def test_a_set_outside_its_bands_is_noticed(sheet, cells, found):
    row = FIELDS["readings"].row(**cells)
    assert readings_outside(row, sheet.plan, 100.8e3) == found
    assert set(found) <= {d.key for d in sheet.deviations}


def test_columns_carry_unit_and_basis(sheet):
    assert [c.heading for c in columns_of(sheet.plan, SI)] == [
        "Line, bar gauge", "Exhaust, bar gauge", "Thermometer, °C", "Barometer, kPa absolute", "Air, °C",
        "Sample, kg/h"]
    assert columns_of(sheet.plan, US)[3].heading == "Barometer, inHg absolute"


# ---- on paper


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_the_print_holds_every_step_gauge_and_deviation(paper, sheet):
    page = harmless(runsheet_html(DEMO, SI, paper), TAGS)
    for said in (*(s.said for s in sheet.steps), *(g.settled for g in sheet.gauges),
                 *(d.do for d in sheet.deviations)):
        assert said.text(SI) in page.text
    assert f"size: {paper};" in runsheet_html(DEMO, SI, paper)
    assert "never permission to open a valve" in page.text


def test_the_print_has_a_line_for_every_set(sheet):
    page = harmless(runsheet_html(DEMO, SI, "A4"), TAGS)
    tables = [t for t in page.tables if t[0][:2] == ["", "Time, min"]]
    assert [len(t) - 1 for t in tables] == [sheet.plan.sets] * sheet.plan.runs


def test_what_was_typed_and_ticked_is_printed():
    case = tick(DEMO, "hold.permit", "2025-03-04 08:15", "AB", "at the gate")
    case = with_reading(case, run="1", time=Entry(2.0, "min"), T_exhaust=Entry(250.0, "°F"),
                        p_line=Entry(9.01, "bar", "gauge"), p_exhaust=Entry(1.02, "bar", "absolute"), remark="rain")
    case = with_reading(case, run="extra", T_exhaust=Entry(121.0, "°C"))
    page = harmless(runsheet_html(case, SI, "A4"), TAGS)
    assert [page.tables[1][1][k] for k in (0, 2, 3)] == ["☑", "2025-03-04 08:15", "AB"]
    assert "Remark: at the gate" in page.text and "Readings, run extra" in page.text
    row = next(t for t in page.tables if t[0][:2] == ["", "Time, min"])[1]
    assert row == ["1", "2", "9.01", "1.02 bar absolute", "121.1111", "", "", "", "rain"]
    assert to_si(121.1111, "°C", "temperature") == pytest.approx(to_si(250.0, "°F", "temperature"), abs=1e-4)


def test_nothing_written_by_a_user_does_anything():
    case = tick(DEMO, "hold.permit", HOSTILE, HOSTILE, HOSTILE)
    case = with_reading(case, run=HOSTILE, remark=HOSTILE, T_exhaust=Entry(121.0, "°C"))
    texts = {name: HOSTILE for name, field in FIELDS.items() if field.form == "text" and "grade" not in name}
    page = harmless(runsheet_html(case.with_(**texts), SI, "A4"), TAGS)
    assert page.text.count("<script>alert(1)</script>") > 5  # shown as typed


def test_the_same_case_prints_the_same():
    assert runsheet_html(DEMO, SI, "A4") == runsheet_html(DEMO, SI, "A4")
    assert runsheet_html(DEMO, SI, "A4") != runsheet_html(DEMO, US, "A4")


@pytest.mark.parametrize("title", EXAMPLES)
def test_every_example_prints(title):
    harmless(runsheet_html(EXAMPLES[title], US, "Letter"), TAGS)


def test_another_paper_is_refused():
    with pytest.raises(InputError, match="paper: got A3, needs one of: A4, Letter"):
        runsheet_html(DEMO, SI, "A3")


def test_a_blank_case_has_a_sheet_too():
    assert run_sheet(Case({})).held
    assert harmless(runsheet_html(Case({}), SI, "A4"), TAGS).text.startswith("Run sheet: Untitled case")


def test_a_plan_without_reach_says_why():
    sheet = run_sheet(DEMO)
    bare = replace(sheet, plan=replace(sheet.plan, reach=type(sheet.plan.reach)(None, "No range.")))
    assert headline(bare, SI) == "No range." and bare.plan.band is None and bare.plan.T_dry is None
