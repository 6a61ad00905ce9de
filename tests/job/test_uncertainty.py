"""The uncertainty forecast: what it counts, what it refuses, in which direction it moves."""

import numpy as np
import pytest
from scenarios import BOILER, FACTORY, GEOTHERMAL, HIGH_SITE

from engine.calorimeter import Status
from engine.job.assessment import assess
from engine.job.assessment.balance import balance_of
from engine.job.case import resolve
from engine.job.case.fields_instruments import CERTIFICATE, STANDARD
from engine.job.case.fields_modes import NOT_STATED
from engine.job.case.fields_path import (
    BY_ALTITUDE,
    BY_CONDUCTANCE,
    BY_KG,
    BY_NORMAL,
    BY_TWO_FLOWS,
    EXPECTED,
    NONE,
    UNDECIDED,
)
from engine.job.case.rows import Entry
from engine.job.uncertainty import forecast, prepare, reading_of
from engine.job.uncertainty.instruments import grade_of, rests_on_barometer
from engine.measurement import SAMPLING, monte_carlo
from engine.steam import saturated, saturation_temperature
from engine.steam.errors import InputError

METHODS = {
    UNDECIDED: {}, NONE: {}, BY_CONDUCTANCE: {}, BY_KG: {"heat_loss": Entry(2.0, "kJ/kg")},
    BY_NORMAL: {"T_normal": Entry(149.0, "°C")},
    BY_TWO_FLOWS: {"second_flow": Entry(16.0, "kg/h"), "T_second": Entry(120.2, "°C")},
}


def term(case, group, cause=None):
    found = [t for t in forecast(case).terms if t.group == group and cause in (None, t.cause)]
    assert found, group
    return found[0]


@pytest.mark.parametrize("method", METHODS)
def test_the_balance_over_arrays_is_that_of_the_assessment(method):
    case = FACTORY.with_(heat_loss_method=method, **METHODS[method])
    si = resolve(case)
    x, status = balance_of(case, si)(*(np.full(3, si[n]) for n in ("p_line", "p_exhaust", "T_exhaust")),
                                     sample_flow=si["sample_flow"], recovery=si["recovery"], T_normal=si["T_normal"])
    assert x == pytest.approx(assess(case).x, abs=1e-12)
    assert (status == Status.OK).all()


def test_a_surrounding_read_with_the_rest_counts_before_that_of_the_case():
    """Colder surroundings take more heat, so the same reading means drier steam."""
    si = resolve(FACTORY)
    readings = (si["p_line"], si["p_exhaust"], np.full(2, si["T_exhaust"]))
    x, _ = balance_of(FACTORY, si)(*readings, sample_flow=si["sample_flow"], recovery=0.7,
                                   T_ambient=np.array([si["T_ambient"], si["T_ambient"] - 20.0]))
    own, _ = balance_of(FACTORY, si)(*readings, sample_flow=si["sample_flow"], recovery=0.7)
    h_fg = saturated(si["p_line"]).h_g - saturated(si["p_line"]).h_f
    assert x[0] == own[0]
    assert x[1] - x[0] == pytest.approx(si["conductance"] * 20.0 / si["sample_flow"] / h_fg)


def test_quality_above_one_keeps_its_distribution_and_its_status():
    si = resolve(FACTORY)
    T = np.array([400.0, 423.0, 425.0, 430.0])
    x, status = balance_of(FACTORY, si)(si["p_line"], si["p_exhaust"], T, sample_flow=si["sample_flow"], recovery=0.7)
    steps = np.diff(x) / np.diff(T)
    assert x[-1] > 1 and status[-1] == Status.LINE_SUPERHEATED
    assert steps == pytest.approx(steps.mean(), rel=0.03)  # no kink at 1


def test_near_dry_steam_monte_carlo_is_not_piled_up_at_one():
    case = GEOTHERMAL.with_(question=EXPECTED, wetness=Entry(0.0, "%"))
    a = assess(case)
    m = prepare(case, a.si, reading_of(case, a.si, a.T_exhaust))
    drawn = monte_carlo(m.model, m.inputs, on_result=m.on_result, coverage=m.coverage, draws=50_000)
    assert drawn.value == pytest.approx(1.0, abs=1e-5) and abs(drawn.skewness) < 0.05
    assert drawn.probability(lower=1.0) == pytest.approx(0.5, abs=0.01)


def test_rows_without_a_value_say_why():
    si = resolve(FACTORY)
    x, status = balance_of(FACTORY, si)(
        np.array([si["p_line"]] * 3), np.array([si["p_exhaust"], np.nan, 2 * si["p_line"]]),
        np.array([360.0, 390.0, 390.0]), sample_flow=si["sample_flow"])
    assert np.isnan(x).all()
    assert list(status) == [Status.NOT_SUPERHEATED, Status.MISSING, Status.OUT_OF_RANGE]


@pytest.mark.parametrize("case", [FACTORY, BOILER, GEOTHERMAL, HIGH_SITE], ids=lambda c: c["title"])
def test_the_terms_add_up(case):
    f = forecast(case)
    assert sum(t.share for t in f.terms) == pytest.approx(1.0)
    assert np.hypot.reduce([t.contribution for t in f.terms]) == pytest.approx(f.budget.u, rel=1e-9)
    assert f.budget.value == pytest.approx(f.assessment.x, abs=1e-12)
    assert f.missing == ()


def test_an_expected_wetness_gets_the_forecast_of_the_reading_it_would_give():
    seen = assess(FACTORY.with_(question=EXPECTED, wetness=Entry(2.8, "%")))
    expected = forecast(seen.case)
    reading = forecast(FACTORY.with_(T_exhaust=Entry(seen.T_exhaust, "K")))
    assert expected.budget.value == pytest.approx(0.972, abs=1e-6)
    assert abs(expected.instruments.U - reading.instruments.U) < 1e-9


def test_what_is_not_stated_is_named_and_left_out():
    f = forecast(FACTORY.with_(sampling_kind=NOT_STATED, thermometer_kind=NOT_STATED, heat_loss_tolerance=None))
    assert f.missing == ("the uncertainty of the thermometer", "the uncertainty of the heat loss",
                         "sampling representativeness")
    assert f.budget.U < forecast(FACTORY).instruments.U
    assert f.sampling_share == 0.0 and not f.sampling_dominates


def test_what_a_case_does_not_use_is_not_asked_for():
    bare = FACTORY.with_(heat_loss_method=NONE, exhaust_bore=None, flow_meter_kind=NOT_STATED, heat_loss_tolerance=None)
    assert forecast(bare).missing == ()
    assert {t.group for t in forecast(bare).terms} == {"line gauge", "barometer", "exhaust gauge", "thermometer",
                                                       SAMPLING}


def test_half_width_and_standard_uncertainty_are_told_apart():
    u = term(FACTORY, SAMPLING).u
    assert u == pytest.approx(0.005 / np.sqrt(3))
    assert term(FACTORY.with_(sampling_kind=STANDARD), SAMPLING).u == pytest.approx(0.005)


def test_certificate_and_limit_are_told_apart():
    case = FACTORY.with_(thermometer_kind=CERTIFICATE, thermometer_U=Entry(0.2, "K"))
    assert term(case, "thermometer", "certificate").u == pytest.approx(0.1)
    in_us = case.with_(thermometer_U=Entry(0.36, "°F"))
    assert term(in_us, "thermometer", "certificate").u == pytest.approx(0.1)
    assert term(case.with_(thermometer_k=Entry(1.0, "1")), "thermometer", "certificate").u == pytest.approx(0.2)


def test_one_barometer_is_one_cause_in_both_pressures():
    lone = FACTORY.with_(exhaust_gauge_shows="absolute")
    assert rests_on_barometer(FACTORY, "p_exhaust") and not rests_on_barometer(lone, "p_exhaust")
    assert not rests_on_barometer(FACTORY, "p_line", {"p_line": "absolute"})  # what a log says goes first
    both = next(r for r in forecast(FACTORY).budget.rows if r.group == "barometer")
    one = next(r for r in forecast(lone).budget.rows if r.group == "barometer")
    assert both.quantities == ("p_line", "p_exhaust") and one.quantities == ("p_line",)
    assert abs(both.contribution) > abs(one.contribution)  # at 10 bar both pull the same way


def test_a_barometer_by_altitude_has_the_weather_in_it():
    case = FACTORY.with_(barometer_source=BY_ALTITUDE, altitude=Entry(100.0, "m"))
    assert term(case, "barometer", "weather").u == pytest.approx(2000 / np.sqrt(3))


def test_a_normal_reading_cancels_the_thermometers_own_error():
    normal = FACTORY.with_(heat_loss_method=BY_NORMAL, T_normal=Entry(149.0, "°C"))
    assert abs(term(normal, "thermometer", "class A").contribution) < 0.2 * abs(
        term(FACTORY, "thermometer", "class A").contribution)
    assert forecast(normal).budget.value == pytest.approx(assess(normal).x, abs=1e-12)


def test_a_better_instrument_makes_it_better():
    U = forecast(FACTORY).instruments.U
    for change in ({"thermometer_grade": "AA"}, {"line_gauge_grade": "0.6"}, {"line_gauge_high": Entry(12.0, "bar")},
                   {"heat_loss_tolerance": Entry(20.0, "%")}, {"sample_flow": Entry(40.0, "kg/h")}):
        assert forecast(FACTORY.with_(**change)).instruments.U < U, change
    better = forecast(FACTORY).better
    assert [b.U_halved for b in better] == sorted(b.U_halved for b in better)
    assert all(b.U_removed <= b.U_halved <= U for b in better)


def test_coverage_and_rule_come_from_the_case():
    f = forecast(FACTORY.with_(coverage=Entry(95.0, "%"), decision_rule="guarded by U"))
    assert f.budget.k == pytest.approx(1.96, abs=0.005)
    assert f.verdicts.with_sampling.guard == f.budget.U
    assert forecast(FACTORY.with_(decision_rule="simple")).verdicts.with_sampling.outcome == "accept"
    assert forecast(FACTORY.with_(x_limit=None)).verdicts is None
    most = forecast(FACTORY.with_(limit_side="at most")).verdicts.with_sampling
    assert most.probability == pytest.approx(1 - forecast(FACTORY).verdicts.with_sampling.probability)
    stricter = forecast(FACTORY.with_(decision_risk=Entry(1.0, "%"))).verdicts.with_sampling
    assert stricter.accept_from > f.verdicts.with_sampling.accept_from - f.budget.U


def test_no_forecast_where_there_is_no_value():
    assert "wet exhaust" in forecast(FACTORY.with_(T_exhaust=Entry(100.0, "°C"))).unable
    assert "superheated" in forecast(FACTORY.with_(T_exhaust=Entry(170.0, "°C"))).unable
    just_superheated = saturation_temperature(1.021e5) + 1e-3
    at_the_edge = FACTORY.with_(T_exhaust=Entry(just_superheated, "K"), least_superheat=Entry(0.0, "K"),
                                exhaust_bore=None)
    assert "edge" in forecast(at_the_edge).unable


def test_cautions_of_the_gauges_come_along():
    assert any("line gauge" in c and "scale" in c for c in forecast(
        FACTORY.with_(line_gauge_high=Entry(60.0, "bar"))).cautions)


@pytest.mark.parametrize(("typed", "kind", "known"), [
    ("1,6", "EN 837-1", "1.6"), ("1.0", "EN 837-1", "1"), (" aa ", "IEC 60751", "AA"), ("t1", "IEC 60584-1", "T1"),
    ("0.1 %", "transmitter", "0.1"), ("3a", "ASME B40.100", "3A")])
def test_classes_are_known_as_people_write_them(typed, kind, known):
    assert grade_of(kind, typed) == known


@pytest.mark.parametrize(("changes", "message"), [
    ({"thermometer_grade": ""}, "class by IEC 60751: got"),
    ({"line_gauge_grade": "7"}, "class by EN 837-1: got 7, needs one of"),
    ({"line_gauge_high": None}, "Line gauge: scale to: got nothing, needs a value"),
    ({"line_gauge_high": Entry(6.0, "bar")}, r"got 6 bar, needs a scale that holds the reading, 9 bar"),
    ({"line_gauge_high": Entry(-0.5, "bar")}, "needs more than the other end, 0 bar"),
    ({"exhaust_gauge_U": None}, "Exhaust gauge: U of the certificate, or ± limit: got nothing"),
    ({"line_gauge_kind": "transmitter", "line_gauge_grade": "good"}, "accuracy of the transmitter: got GOOD"),
    ({"sampling": Entry(60.0, "%pt")}, "Sampling representativeness ±: got 60 %pt, needs 0 to 50 %pt"),
    ({"coverage": Entry(100.0, "%")}, "Coverage probability: got 100 %, needs 50 to 99.9 %"),
])
def test_an_instrument_that_cannot_be_is_refused_in_words(changes, message):
    with pytest.raises(InputError, match=message):
        forecast(FACTORY.with_(**changes))
