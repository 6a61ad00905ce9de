"""How sure a quality is behind a separator or with a heater: models equal to the answer, terms of the right size."""

from math import sqrt

import numpy as np
import pytest

from engine.calorimeter import MassBasis, Status
from engine.job.assessment import assess
from engine.job.case.examples import HEATED, WET_LINE_READ
from engine.job.case.fields_instruments import HALF_WIDTH, LIMIT
from engine.job.case.fields_path import BY_CONDUCTANCE, EXPECTED
from engine.job.case.rows import Entry
from engine.job.uncertainty import check, forecast, measurement_of
from engine.job.uncertainty.forecast_words import budget_rows
from engine.steam.units import SI

STATED = {
    "line_gauge_kind": LIMIT, "line_gauge_U": Entry(0.02, "bar"), "exhaust_gauge_kind": LIMIT,
    "exhaust_gauge_U": Entry(0.5, "kPa"), "thermometer_kind": LIMIT, "thermometer_U": Entry(0.4, "K"),
    "barometer_kind": LIMIT, "barometer_U": Entry(0.2, "kPa"), "flow_meter_kind": LIMIT,
    "flow_meter_U": Entry(1.0, "%"), "sampling_kind": HALF_WIDTH, "sampling": Entry(0.5, "%pt"),
    "water_tolerance": Entry(1.0, "%"), "weighed_tolerance": Entry(1.0, "%"),
    "vessel_loss_tolerance": Entry(40.0, "%"), "power_tolerance": Entry(1.0, "%"),
    "power_loss_tolerance": Entry(30.0, "%")}
WET, HOT = WET_LINE_READ.with_(**STATED), HEATED.with_(**STATED)
LOSING = WET.with_(vessel_loss=Entry(5.0, "kJ/kg"), p_separator=Entry(7.6, "bar", "absolute"),
                   heat_loss_method=BY_CONDUCTANCE, conductance=Entry(0.2, "W/K"), T_ambient=Entry(20.0, "°C"),
                   sample_flow=Entry(25.0, "kg/h"), exhaust_bore=Entry(20.0, "mm"),
                   heat_loss_tolerance=Entry(40.0, "%"))
THROTTLED_HEATER = HOT.with_(p_heater=Entry(1.0, "bar", "absolute"), T_heater=Entry(130.0, "°C"))
CASES = {"separator": WET, "losing separator": LOSING, "total": WET.with_(weighed_basis=MassBasis.TOTAL),
         "heater": HOT, "heater behind a throttle": THROTTLED_HEATER,
         "planned separator": WET.with_(question=EXPECTED), "planned heater": HOT.with_(question=EXPECTED)}
ALL = pytest.mark.parametrize("case", CASES.values(), ids=CASES)


def contributions(case):
    """In %pt, by group."""
    found = {}
    for t in forecast(case).terms:
        found[t.group] = sqrt(found.get(t.group, 0.0) ** 2 + (100 * t.contribution) ** 2)
    return found


@ALL
def test_the_model_at_the_estimates_is_the_answer(case):
    a = assess(case)
    m = measurement_of(a)
    x, status = m.model(**{i.name: np.array([i.value]) for i in m.inputs})
    assert x[0] == pytest.approx(a.x, abs=1e-9) and status[0] <= Status.THIN_MARGIN
    f = forecast(case)
    assert (f.unable, f.missing) == ("", ()) and f.budget.value == pytest.approx(a.x, abs=1e-9)
    assert f.instruments.U < f.budget.U and f.verdicts is None


def test_one_per_cent_of_the_power_is_0_12_points():
    # half width of a rectangle: u = a/√3; 1 % of the heat per kg at 6 bar and 10 % wetness is 0.12 %pt
    found = contributions(HOT)
    assert found["electric power"] * sqrt(3) == pytest.approx(0.1237, abs=5e-4)
    assert found["sample flow"] * sqrt(3) == pytest.approx(0.1226, abs=5e-4)  # the heat that stays in the steam
    assert found["heater loss"] * sqrt(3) == pytest.approx(30 * 7.4 / 860 * 0.1237, rel=0.01)


def test_masses_count_by_what_was_drained():
    # x = x_t (1 - z): one per cent of either mass moves z by z (1 - z) per cent, where both are weighed apart
    found, z, x_t = contributions(WET), 0.09, assess(WET).separation.x_throttled
    assert found["drained water"] * sqrt(3) == pytest.approx(z * (1 - z) * x_t, rel=2e-3)
    assert found["mass weighed"] == pytest.approx(found["drained water"], rel=2e-3)
    whole = WET.with_(weighed_basis=MassBasis.TOTAL)
    z, x_t = assess(whole).separation.drain_fraction, assess(whole).separation.x_throttled
    assert contributions(whole)["drained water"] * sqrt(3) == pytest.approx(z * x_t, rel=2e-3)


def test_the_exhaust_counts_by_what_was_throttled():
    share = contributions(WET)["thermometer"] / contributions(WET.with_(water_mass=Entry(1e-6, "kg"),
                                                                       T_exhaust=Entry(112.3, "°C")))["thermometer"]
    assert share == pytest.approx(0.91, abs=1e-3)


def test_the_vessels_loss_is_a_term_where_there_is_one():
    assert "vessel heat loss" not in contributions(WET)
    # 40 % of 5 kJ/kg over h_fg at 8 bar, 2047 kJ/kg
    assert contributions(LOSING)["vessel heat loss"] * sqrt(3) == pytest.approx(100 * 2.0 / 2047.5, rel=1e-3)


def test_what_is_not_stated_is_named():
    missing = forecast(WET.with_(water_tolerance=None, weighed_tolerance=None)).missing
    assert missing == ("the uncertainty of the drained water", "the uncertainty of the mass weighed")
    missing = forecast(HOT.with_(power_tolerance=None, power_loss_tolerance=None)).missing
    assert missing == ("the uncertainty of the electric power", "the uncertainty of the heater loss")


def test_a_pressure_after_the_heater_has_its_gauge():
    assert "exhaust gauge" not in contributions(HOT)
    assert contributions(THROTTLED_HEATER)["exhaust gauge"] > 0
    gauge = THROTTLED_HEATER.with_(p_heater=Entry(0.0, "bar", "gauge"))
    assert "barometer" in contributions(gauge)


@ALL
def test_monte_carlo_agrees(case):
    a = assess(case)
    m = measurement_of(a)
    found = check(m, m.budget(), draws=20_000)
    assert found.instruments.u == pytest.approx(forecast(case).instruments.u, rel=0.03)
    assert found.instruments.value == pytest.approx(a.x, abs=1e-4)
    assert found.drawn.unusable == 0.0


def test_contradicting_readings_have_no_uncertainty():
    f = forecast(WET.with_(T_exhaust=Entry(160.0, "°C")))
    assert f.budget is None and "contradict each other" in f.unable


def test_draws_beyond_dry_keep_their_distance():
    dry = HOT.with_(T_heater=Entry(275.9, "°C"))
    m = measurement_of(assess(dry))
    found = check(m, m.budget(), draws=20_000)
    assert found.superheated == pytest.approx(0.5, abs=0.05)


def test_rows_say_parts_as_per_cent():
    rows = {row["From"]: row for row in budget_rows(forecast(HOT), SI)}
    assert rows["electric power"]["Standard uncertainty"] == "0.58 %" and rows["electric power"]["Cause"] == "tolerance"
    assert rows["thermometer"]["Standard uncertainty"] == "0.23 K"
