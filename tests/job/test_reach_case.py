"""Planning: the verdict over a range, where the superheat goes, maps, ways out that hold, the chart to take along."""

import time
from html.parser import HTMLParser

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from engine.calorimeter import Readability, WayKind, exhaust_pressure_for, least_quality
from engine.job.assessment import Verdict, assess
from engine.job.case import BLANK, describe
from engine.job.case.demo import DEMO
from engine.job.case.examples import (
    BOILER_OUTLET,
    EXAMPLES,
    HEATED,
    HEATING_STEAM,
    HEATING_STEAM_DRY,
    HIGH_SITE,
    WET_LINE,
    WET_LINE_READ,
)
from engine.job.case.fields_modes import ELECTRIC, SEPARATING, THROTTLING
from engine.job.case.fields_path import EXPECTED, NONE, READING
from engine.job.case.rows import Entry
from engine.job.reach import AS_ENTERED, BY_INSTRUMENT, NOT_STATED, assess_reach
from engine.job.reach.instrument_chart import ROWS, instrument_chart
from engine.job.reach.map import edge_of, map_key, sections, wetness_map
from engine.job.reach.printable import chart_page, chart_rows
from engine.job.reach.said import ladder_rows, said, way_change, way_title
from engine.job.reach.ways import ways
from engine.steam import saturation_temperature
from engine.steam.errors import InputError
from engine.steam.units import SI, US

BARE = BLANK.with_(p_line=Entry(10.0, "bar", "absolute"), p_exhaust=Entry(101.325, "kPa", "absolute"),
                   heat_loss_method=NONE, U_thermometer=Entry(0.0, "K"))


def over(low, high, case=BARE, **changes):
    """The case with a range of expected wetness in per cent."""
    return case.with_(wetness_low=Entry(float(low), "%"), wetness_high=Entry(float(high), "%"), **changes)


def by_kind(case):
    return {way.kind: way for way in ways(assess_reach(case))}


# ---- verdict

@pytest.mark.parametrize(("low", "high", "verdict"), [
    (0.5, 4.0, Readability.WHOLE), (0.5, 4.3, Readability.THIN), (0.5, 6.0, Readability.PART),
    (5.0, 6.0, Readability.NONE), (3.0, 3.0, Readability.WHOLE)])
def test_the_verdict_covers_the_whole_range(low, high, verdict):
    # 10 bar to the atmosphere: 4.53 % is readable with 5 K, 4.02 % with 10 K of superheat (IAPWS-95)
    plan = assess_reach(over(low, high))
    assert plan.verdict is verdict
    assert 100 * plan.wetness_most == pytest.approx(4.53, abs=0.01)
    assert 100 * plan.wetness_comfortable == pytest.approx(4.02, abs=0.01)


def test_the_reach_is_the_engines_and_the_ends_are_the_path_pages():
    plan = assess_reach(over(1.0, 4.0))
    assert 1 - plan.wetness_most == pytest.approx(least_quality(10e5, 101_325.0, 5.0), abs=1e-12)
    for end in (plan.dry, plan.wet):
        a = assess(BARE.with_(question=EXPECTED, wetness=Entry(100 * end.wetness, "%")))
        assert (end.T, end.superheat) == (pytest.approx(a.T_exhaust), pytest.approx(a.superheat))


def test_the_thermometers_uncertainty_comes_off_the_margin():
    exact, unsure = assess_reach(over(1.0, 4.0)), assess_reach(over(1.0, 4.0, U_thermometer=Entry(2.0, "K")))
    assert unsure.wet.margin == pytest.approx(exact.wet.margin - 2.0)
    assert unsure.wetness_most < exact.wetness_most
    assert 1 - unsure.wetness_most == pytest.approx(least_quality(10e5, 101_325.0, 7.0), abs=1e-12)
    assert (exact.verdict, unsure.verdict) == (Readability.WHOLE, Readability.THIN)


def test_where_the_thermometers_uncertainty_comes_from():
    stated = assess_reach(DEMO)
    assert stated.U_from == BY_INSTRUMENT and 0.3 < stated.U < 0.6  # a Pt100 of class A near 110 °C: ±0.37 K
    assert assess_reach(BARE).U_from == AS_ENTERED
    unknown = assess_reach(BARE.with_(U_thermometer=None))
    assert (unknown.U, unknown.U_from) == (0.0, NOT_STATED)
    assert "not stated: nothing was taken off the margin" in " ".join(said(unknown, SI).assumed)


def test_losses_and_back_pressure_shorten_the_reach():
    free = assess_reach(over(1.0, 4.0))
    for worse in ({"heat_loss_method": "per kg", "heat_loss": Entry(6.0, "kJ/kg")},
                  {"p_exhaust": Entry(120.0, "kPa", "absolute")}):
        assert assess_reach(over(1.0, 4.0, **worse)).wetness_most < free.wetness_most


def test_the_superheat_is_followed_down_to_the_margin():
    case = over(1.0, 3.0, p_exhaust=Entry(110.0, "kPa", "absolute"), heat_loss_method="per kg",
                heat_loss=Entry(4.0, "kJ/kg"), sample_flow=Entry(40.0, "kg/h"), exhaust_bore=Entry(15.7, "mm"),
                U_thermometer=Entry(0.5, "K"))
    plan = assess_reach(case)
    for end in (plan.dry, plan.wet):
        causes, left = zip(*end.steps, strict=True)
        assert causes == ("without losses, into the open air", "with the back pressure", "with the heat loss",
                          "with the velocities")
        assert left[0] > left[1] > left[2] > left[3] == pytest.approx(end.superheat)
        assert end.margin == pytest.approx(end.superheat - 0.5)
    rows = ladder_rows(plan, SI)
    assert [row["Superheat left"] for row in rows][-2:] == ["less the thermometer's uncertainty",
                                                           "needed: readable / comfortable"]
    assert rows[-2]["at 3.00 % wetness"] == f"{plan.wet.margin:.1f} K"
    assert {row["at 10.00 % wetness"] for row in ladder_rows(assess_reach(WET_LINE), SI)[:-1]} == {"wet"}


def test_wetness_beyond_the_uncertainty_only():
    assert assess_reach(HEATING_STEAM_DRY).indistinct and not assess_reach(HEATING_STEAM).indistinct


def test_a_range_upside_down_is_refused():
    with pytest.raises(InputError, match=r"Expected wetness, wettest: got 1 %, needs at least the driest, 2 %"):
        assess_reach(over(2.0, 1.0))
    with pytest.raises(InputError, match="Exhaust pressure"):
        assess_reach(BARE.with_(p_exhaust=Entry(11.0, "bar", "absolute")))


def test_a_plan_needs_no_readings():
    assert assess_reach(BARE.with_(mode=SEPARATING)).verdict is Readability.WHOLE
    plan = assess_reach(over(1.0, 4.0, mode=ELECTRIC, sample_flow=Entry(20.0, "kg/h")))
    # no power chosen: what the wettest steam takes, for the whole range
    assert plan.dry.assessment.heating.power == pytest.approx(plan.wet.assessment.heating.power)
    assert plan.dry.superheat > plan.wet.superheat == pytest.approx(10.01, abs=1e-3)


# ---- in words

def test_what_is_said():
    told = said(assess_reach(DEMO), SI)
    assert (told.shape, told.headline) == (
        "●", "All that is expected, 0.50 to 3.00 % wetness, can be read on this line.")
    assert "must show 119.1 °C, 18.9 K above saturation" in " ".join(told.reasons)
    none = said(assess_reach(HEATING_STEAM), SI)
    assert none.headline == "Nothing of the expected 1.00 to 3.00 % wetness can be read on this line."
    assert "dry steam shows 7.1 K of superheat" in none.reasons[-1]
    assert said(assess_reach(HIGH_SITE), US).headline.endswith("but thinly where it is wettest.")
    part = said(assess_reach(HEATING_STEAM_DRY), SI)
    assert part.headline == "Only a part can be read on this line: up to 0.15 % of the 0.05 to 0.20 % wetness expected."
    assert "no more than the quality's own uncertainty, 0.10 %pt" in " ".join(part.reasons)
    hopeless = said(assess_reach(HEATING_STEAM.with_(p_exhaust=Entry(1.3, "bar", "absolute"))), SI)
    assert "Even dry steam would show only" in hopeless.reasons[-1]
    assert "behind this separator" in said(assess_reach(WET_LINE_READ), SI).headline


# ---- ways out

def test_nothing_to_do_where_it_reads():
    assert ways(assess_reach(DEMO)) == () == ways(assess_reach(BOILER_OUTLET))


@pytest.mark.parametrize("case", [HEATING_STEAM, HEATING_STEAM_DRY, HIGH_SITE, WET_LINE,
                                  over(1, 5, DEMO), WET_LINE_READ.with_(water_share=Entry(60.0, "%")),
                                  HEATED.with_(power=Entry(700.0, "W"))], ids=lambda case: describe(case["p_line"]))
def test_every_way_that_can_be_applied_reads_the_whole_range(case):
    plan = assess_reach(case)
    offered = [way for way in ways(plan) if way.case is not None]
    assert offered
    for way in offered:
        after = assess_reach(way.case)
        assert after.verdict is (Readability.THIN if way.thin else Readability.WHOLE)
        assert way.feasible and way.price and way_change(way, plan)
        assert way.case["question"] == EXPECTED
        assert way_title(way, plan, SI) and way_title(way, plan, US)
    for way in ways(plan):
        assert way.price and (way.feasible or way.why_not)


def test_heating_steam_wants_a_condenser_first():
    first = ways(assess_reach(HEATING_STEAM))[0]
    assert first.kind is WayKind.EXHAUST
    assert first.numbers["p_exhaust"] == pytest.approx(0.172e5, rel=0.01)
    assert describe(first.case["p_exhaust"]) == "0.17 bar absolute"
    assert way_title(first, assess_reach(HEATING_STEAM), SI) == "Lower the exhaust pressure to 0.172 bar abs or less"
    none = by_kind(HEATING_STEAM.with_(p_exhaust_lowest=Entry(0.3, "bar", "absolute")))[WayKind.EXHAUST]
    assert not none.feasible and "lower than can be had" in none.why_not


def test_a_wet_line_wants_a_separator_first():
    plan = assess_reach(WET_LINE)
    first, *others = ways(plan)
    assert first.kind is WayKind.SEPARATOR and first.case["mode"] == SEPARATING
    assert first.numbers["water_share"] == pytest.approx(0.786, abs=0.001)
    assert [way.kind for way in others][:1] == [WayKind.HEATER]
    assert {way.kind for way in others if not way.feasible} == {WayKind.EXHAUST, WayKind.LINE}


def test_steam_within_its_own_uncertainty_wants_another_method_first():
    assert ways(assess_reach(HEATING_STEAM_DRY))[0].kind is WayKind.OTHER
    only = ways(assess_reach(over(0.05, 1.0)))
    assert [way.kind for way in only] == [WayKind.OTHER] and only[0].case is None and only[0].price


def test_back_pressure_needs_no_condenser():
    case = over(1.0, 4.0, p_exhaust=Entry(190.0, "kPa", "absolute"))
    way = by_kind(case)[WayKind.EXHAUST]
    assert way.numbers["p_exhaust"] > 101_325 and "shorter or wider exhaust" in way.price


def test_a_fast_stream_asks_for_a_lower_pressure_still():
    wide, narrow = (by_kind(over(1, 5, DEMO, exhaust_bore=Entry(bore, "mm")))[WayKind.EXHAUST] for bore in (40.0, 16.0))
    assert narrow.numbers["p_exhaust"] < wide.numbers["p_exhaust"]
    tiny = by_kind(HEATING_STEAM.with_(exhaust_bore=Entry(15.0, "mm")))[WayKind.EXHAUST]
    assert not tiny.feasible and "too fast for this exhaust bore" in tiny.why_not


def test_a_far_tapping_comes_after_the_instruments():
    kinds = [way.kind for way in ways(assess_reach(HEATING_STEAM)) if way.feasible]
    assert kinds.index(WayKind.LINE) == len(kinds) - 1
    near = [way.kind for way in ways(assess_reach(HIGH_SITE)) if way.feasible]
    assert near.index(WayKind.LINE) == 1


def test_without_a_sample_flow_the_power_is_told_but_not_applied():
    way = by_kind(WET_LINE.with_(sample_flow=None, heat_loss_method=NONE))[WayKind.HEATER]
    assert way.case is None and "Give the sample flow" in way.why_not and way.numbers["power"] > 0


# ---- maps and sections

@pytest.mark.parametrize("case", [DEMO, WET_LINE_READ, HEATED], ids=lambda case: case["title"])
def test_the_map_says_what_the_plan_says(case):
    plan = assess_reach(case)
    found = wetness_map(map_key(plan))
    assert found.wetness.shape == (300, 300)
    ordinate = plan.wet.assessment.heating.power if found.by_power else plan.si["p_exhaust"]
    row, column = (np.abs(np.log(axis / value)).argmin() for axis, value in (
        (found.ordinate, ordinate), (found.p_line, plan.si["p_line"])))
    assert found.wetness[row, column] == pytest.approx(plan.wetness_most, rel=0.02)
    along_line, along_other = sections(plan)
    for section, here in ((along_line, plan.si["p_line"]), (along_other, ordinate)):
        assert np.interp(here, section.along, section.readable) == pytest.approx(plan.wetness_most, abs=5e-4)
        both = np.isfinite(section.readable) & np.isfinite(section.comfortable)
        assert (section.comfortable[both] < section.readable[both]).all()


def test_the_map_is_not_monotonic_in_line_pressure():
    found = wetness_map(map_key(assess_reach(BARE)))
    row = found.wetness[np.abs(found.ordinate - 101_325.0).argmin()]
    best = found.p_line[np.nanargmax(row)]
    assert 38e5 < best < 43e5  # the enthalpy of wet steam is greatest near 40 bar
    assert row[-1] != row[-1] or row[-1] < np.nanmax(row)
    assert (np.diff(found.wetness[:, 150][np.isfinite(found.wetness[:, 150])]) < 0).all()


def test_nothing_reads_above_the_edge_for_dry_steam():
    found = wetness_map(map_key(assess_reach(BARE)))
    above = found.ordinate[:, None] > found.dry_edge * 1.001
    assert np.isnan(found.wetness[above]).all()
    below = found.ordinate[:, None] < found.dry_edge * 0.999
    assert np.isfinite(found.wetness[below]).all()


def test_the_edge_of_a_wetness_is_the_engines():
    plan = assess_reach(over(1.0, 4.0))
    found = wetness_map(map_key(plan))
    edge = edge_of(found, 0.04)
    known = np.isfinite(edge)
    engine = exhaust_pressure_for(found.p_line[known], 0.96, 5.0).p_exhaust
    assert known.sum() > 200 and np.allclose(edge[known], engine, rtol=2e-3)


def test_a_map_takes_no_longer_than_a_blink():
    key = map_key(assess_reach(DEMO))
    times = []
    for _ in range(5):
        start = time.perf_counter()
        wetness_map(key)
        times.append(time.perf_counter() - start)
    assert min(times) < 0.2  # 90 000 points; about 10 ms on a machine that does nothing else


def test_equal_plans_share_a_map():
    plan = assess_reach(DEMO)
    again = assess_reach(DEMO.with_(title="other", p_line=Entry(12.0, "bar", "gauge")))
    assert map_key(plan) == map_key(again)  # the line pressure is an axis
    assert map_key(plan) != map_key(assess_reach(DEMO.with_(least_superheat=Entry(6.0, "K"))))


# ---- the chart for the instrument

@pytest.mark.parametrize("title", EXAMPLES)
def test_the_chart_agrees_with_the_answer_at_every_row(title):
    case = EXAMPLES[title]
    plan = assess_reach(case)
    chart = instrument_chart(plan, SI)
    assert 0 < chart.T.size <= ROWS and (np.diff(chart.x) > 0).all()
    entry = "T_heater" if case["mode"] == ELECTRIC else "T_exhaust"
    for k in (0, chart.T.size // 2, chart.T.size - 1):
        a = assess(case.with_(question=READING, **{entry: Entry(float(chart.T[k]), "K")}))
        assert (a.separation.x_throttled if a.separation else a.x) == pytest.approx(chart.x[k], abs=1e-9)
        assert chart.thin[k] == (a.verdict is Verdict.THIN)
    assert chart.T_dry == pytest.approx(chart.T_saturation + plan.dry_superheat)


def test_rows_stand_at_round_temperatures_of_the_reader():
    for units, kelvin in ((SI, 1.0), (US, 1 / 1.8)):
        chart = instrument_chart(assess_reach(DEMO), units)
        assert np.diff(chart.T) == pytest.approx(chart.step * kelvin)
        shown = [float(row[f"T, {chart.unit}"]) for row in chart_rows(chart)]
        assert all(value % chart.step == pytest.approx(0, abs=1e-6) for value in shown)


def test_the_slopes_are_those_of_the_quality():
    # at 10 bar, worked out with IAPWS-95: 1 % of the line pressure is -0.020 %pt, 1 kPa at the exhaust -0.0045 %pt
    slopes = instrument_chart(assess_reach(over(1.0, 4.0)), SI).slopes
    assert 100 * slopes["p_line"] == pytest.approx(-0.020, abs=0.001)
    assert 100 * slopes["p_exhaust"] == pytest.approx(-0.0046, abs=3e-4)
    # 1 % of the power per kg is 0.12 %pt of a line at 6 bar
    assert 100 * instrument_chart(assess_reach(HEATED), SI).slopes["power"] == pytest.approx(-0.124, abs=0.003)


def test_no_chart_where_not_even_dry_steam_reads():
    plan = assess_reach(HEATING_STEAM.with_(p_exhaust=Entry(1.3, "bar", "absolute")))
    chart = instrument_chart(plan, SI)
    assert chart.T.size == 0 and chart_rows(chart) == []
    page = chart_page(plan, chart, SI)
    assert "no temperature to read a quality from" in page and "<svg" not in page


class Page(HTMLParser):
    """Counts elements and keeps the words."""

    def __init__(self, text):
        super().__init__()
        self.found, self.words, self.open = {}, [], []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.found[tag] = self.found.get(tag, 0) + 1
        assert not any(name.startswith("on") or name in ("src", "href") for name, _ in attrs)

    def handle_data(self, data):
        self.words.append(data)


@pytest.mark.parametrize(("units", "paper"), [(SI, "A4"), (US, "letter")])
def test_the_page_to_print_stands_alone(units, paper):
    hostile = DEMO.with_(title="<script>alert(1)</script> & \"quotes\"")
    plan = assess_reach(hostile)
    chart = instrument_chart(plan, units)
    text = chart_page(plan, chart, units)
    page = Page(text)
    assert "script" not in page.found and page.found["svg"] == 1 and page.found["table"] == 4
    assert f"size: {paper}" in text and "http" not in text
    words = " ".join(page.words)
    assert '<script>alert(1)</script> & "quotes"' in words
    assert f"{chart.x[3]:.4f}" in words and "never permission to open a valve" in words
    assert page.found["td"] == 3 * chart.T.size


def test_a_fast_stream_is_read_from_where_it_is_dry_itself():
    case = BOILER_OUTLET.with_(sample_flow=Entry(400.0, "kg/h"))
    chart = instrument_chart(assess_reach(case), SI)
    assert chart.T_least > chart.T_saturation + 20 and np.isfinite(chart.x_least)
    below = assess(case.with_(question=READING, T_exhaust=Entry(chart.T_least - 0.01, "K")))
    above = assess(case.with_(question=READING, T_exhaust=Entry(chart.T_least + 0.01, "K")))
    assert below.x is None and above.x == pytest.approx(chart.x_least, abs=1e-4)


def test_saturation_is_hatched_on_the_page():
    plan = assess_reach(DEMO)
    chart = instrument_chart(plan, SI)
    assert chart.T_saturation == pytest.approx(saturation_temperature(102.1e3))
    assert "do not read: wet, or too near" in chart_page(plan, chart, SI)


# ---- any plan at all

def entries(low, high, unit, basis=""):
    return st.floats(low, high).map(lambda value: Entry(value, unit, basis))


PLANS = st.fixed_dictionaries({
    "mode": st.sampled_from([THROTTLING, SEPARATING, ELECTRIC]), "p_line": entries(1.2, 160.0, "bar", "absolute"),
    "p_exhaust": entries(0.02, 5.0, "bar", "absolute"), "wetness_low": entries(0.0, 3.0, "%"),
    "wetness_high": entries(2.0, 100.0, "%"), "sample_flow": st.none() | entries(0.5, 400.0, "kg/h"),
    "exhaust_bore": st.none() | entries(5.0, 100.0, "mm"), "conductance": entries(0.0, 2.0, "W/K"),
    "water_share": entries(0.0, 99.9, "%"), "vessel_loss": st.none() | entries(0.0, 200.0, "kJ/kg"),
    "power": st.none() | entries(1.0, 20_000.0, "W"), "power_loss": st.none() | entries(0.0, 500.0, "W"),
    "U_thermometer": st.none() | entries(0.0, 10.0, "K"),
})


@settings(max_examples=40, deadline=None, derandomize=True)
@given(PLANS)
@example(changes={"mode": SEPARATING, "heat_loss_method": "per kg", "heat_loss": Entry(225.0, "kJ/kg")})
def test_any_plan_is_answered_or_refused(changes):
    try:
        plan = assess_reach(WET_LINE.with_(**changes))
    except InputError as error:
        assert error.faults
        return
    assert (plan.verdict is Readability.NONE) == (plan.dry.verdict is Verdict.CANNOT)
    assert plan.wetness_comfortable <= plan.wetness_most + 1e-12
    for units in (SI, US):
        assert said(plan, units).headline and ladder_rows(plan, units)
        assert "<html" in chart_page(plan, instrument_chart(plan, units), units)
    for way in ways(plan):
        assert way_title(way, plan, SI) and (way.feasible or way.why_not)
    assert all(section.readable.size == 40 for section in sections(plan, 40))


# ---- examples

def test_the_examples_are_invented_and_say_so():
    for title, case in EXAMPLES.items():
        assert case["title"] == title and "invented example" in case["note"]
        assert assess_reach(case) and assess(case)
    assert assess(WET_LINE).verdict is Verdict.CANNOT and assess_reach(WET_LINE).verdict is Readability.NONE
    assert assess(WET_LINE_READ).x == pytest.approx(0.880, abs=5e-4)
