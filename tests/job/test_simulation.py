"""The simulated rig: its steady end is the engine's own, its course is that of the heat balance, its chance is fair."""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from engine.calorimeter import exhaust_temperature, immersion_error, lag_error, time_to_within, velocity, warm_up
from engine.job.assessment import assess
from engine.job.case import BLANK
from engine.job.case.demo import DEMO
from engine.job.case.examples import BOILER_OUTLET, HIGH_SITE, WET_LINE, WET_LINE_READ
from engine.job.case.fields_path import EXPECTED
from engine.job.case.rows import Entry
from engine.job.rehearsal.cost import cost_of
from engine.job.rehearsal.faults import rig_of
from engine.job.rehearsal.lag import coloured, lagged
from engine.job.rehearsal.scenario import HiddenFault, Load, Scenario, surprise
from engine.job.rehearsal.simulation import FALL, STEP, by_the_sheet, simulate
from engine.job.rehearsal.valves import CRACKED, Deed
from engine.steam import saturated, saturation_temperature, vapour
from engine.steam.errors import InputError

LATE = 9000.0  # s, when every rig here is warm


def ideal(case=DEMO, faults=(), *, x=0.972, seed=1, **more):
    return rig_of(Scenario(case, frozenset(faults), seed, x, ideal=True, **more))


def seen(case=DEMO, faults=(), *, x=0.972, seed=1, **more):
    return rig_of(Scenario(case, frozenset(faults), seed, x, **more))


# ---- the steady end


@pytest.mark.parametrize(("case", "x"), [(DEMO, 0.972), (DEMO, 0.999), (BOILER_OUTLET, 0.9925), (HIGH_SITE, 0.965),
                                         (BLANK, 0.98)])
def test_a_warm_rig_shows_what_the_inverse_of_the_reduction_says(case, x):
    rig = ideal(case, x=x)
    course = simulate(rig, by_the_sheet(), LATE)
    p2, flow, T = course.p_exhaust[-1], course.flow[-1], course.T_exhaust[-1]
    must = exhaust_temperature(rig.p_line, x, p2, heat_loss=rig.body.conductance * (T - rig.T_ambient) / flow,
                               line_velocity=rig.line_velocity, recovery=rig.recovery,
                               exhaust_velocity=velocity(flow, rig.exhaust_bore, vapour(p2, T).v))
    assert must.T_exhaust == pytest.approx(T, abs=1e-4)


def test_it_shows_what_the_assessment_of_the_case_expects():
    course = simulate(ideal(x=0.972), by_the_sheet(), LATE)
    expected = assess(DEMO.with_(question=EXPECTED, wetness=Entry(2.8, "%"),
                                 p_exhaust=Entry(float(course.p_exhaust[-1]), "Pa", "absolute"),
                                 sample_flow=Entry(float(course.flow[-1]), "kg/s")))
    assert course.T_exhaust[-1] == pytest.approx(expected.T_exhaust, abs=1e-3)
    probe = course.rig.probe  # 60 mm immersed: the head still takes a little off
    assert 0 < probe.head_share < 0.002
    shown = expected.T_exhaust - probe.head_share * (expected.T_exhaust - probe.T_head)
    assert course.shown["exhaust thermometer"][-1] == pytest.approx(shown, abs=1e-3)


def test_a_wet_exhaust_sits_at_saturation_of_its_own_pressure():
    course = simulate(ideal(WET_LINE, x=0.88), by_the_sheet(), LATE)
    assert course.wet[-1]
    assert course.T_exhaust[-1] == pytest.approx(saturation_temperature(float(course.p_exhaust[-1])), abs=1e-9)
    assert course.T_body[-1] == pytest.approx(course.T_exhaust[-1], abs=1e-6)


# ---- over time


def parameters(rig, course):
    """Stream, effectiveness and wall conductance of the dry stage, written out anew."""
    flow, p2, T = course.flow[-1], course.p_exhaust[-1], course.T_exhaust[-1]
    UA = rig.body.conductance
    T_in = T + UA * (T - rig.T_ambient) / (flow * vapour(p2, T).cp)
    m_cp = flow * vapour(p2, T_in).cp
    dry = m_cp * (1 - np.exp(-rig.body.film * rig.body.area / m_cp))
    wall = 1 / (1 / UA - (1 / dry - 1 / m_cp))
    return T_in, m_cp, dry, wall


def test_the_body_warms_as_its_heat_balance_says():
    rig = ideal()
    course = simulate(rig, by_the_sheet(), LATE)
    T_in, _, dry, wall = parameters(rig, course)
    k = course.at(900.0)  # long after the last condensation
    C = rig.body.heat_capacity
    answer = solve_ivp(lambda t, T: (dry * (T_in - T) - wall * (T - rig.T_ambient)) / C, (course.time[k], LATE),
                       [course.T_body[k]], t_eval=course.time[k:], rtol=1e-9, atol=1e-9)
    np.testing.assert_allclose(course.T_body[k:], answer.y[0], atol=0.02)


def test_the_reading_comes_home_when_the_warm_up_of_the_engine_does():
    rig = ideal()
    course = simulate(rig, [(0, Deed.OPEN_STOP)], LATE)
    T_in, _, _, wall = parameters(rig, course)
    run = warm_up(rig.body.heat_capacity, rig.body.area, course.flow[-1], course.p_exhaust[-1], T_in, rig.T_ambient,
                  rig.T_ambient, film=rig.body.film, conductance=wall)
    home = course.time[(course.flow > 0) & (np.abs(course.short) < 0.1)][0]
    assert home == pytest.approx(time_to_within(run, 0.1), abs=2 * STEP)
    wet = (course.time > 0) & (course.time < run.time_condensing - STEP)
    np.testing.assert_allclose(course.T_exhaust[wet], saturation_temperature(float(course.p_exhaust[-1])), atol=1e-6)


def test_the_body_follows_swings_late_and_takes_its_part_of_them():
    rig = seen(load=Load.SWINGING)
    course = simulate(rig, by_the_sheet(), LATE)
    _, m_cp, dry, wall = parameters(rig, course)
    # the metal of a warm body is below the exhaust by what the film inside takes
    below = rig.body.conductance * (1 / dry - 1 / m_cp)
    steady = course.T_due - below * (course.T_due - rig.T_ambient)
    k, later = course.at(1500.0), course.at(3000.0)
    rate = (dry + wall) / rig.body.heat_capacity
    answer = solve_ivp(lambda t, T: rate * (np.interp(t, course.time, steady) - T), (course.time[k], LATE),
                       [course.T_body[k]], t_eval=course.time[k:], max_step=20.0, rtol=1e-7)
    assert np.ptp(course.T_due[later:]) > 1.0  # there is something to follow
    np.testing.assert_allclose(course.T_body[later:], answer.y[0][later - k:], atol=0.05)
    short = -(dry / m_cp) * (steady - course.T_body)
    np.testing.assert_allclose(course.short[later:], short[later:], atol=0.02)


def test_the_thermometer_lags_as_a_first_order_instrument():
    time = np.arange(0.0, 600.0, 5.0)
    step = lagged(np.full(time.size, 10.0), 0.0, 5.0, 40.0)
    np.testing.assert_allclose(step - 10.0, lag_error(time, 40.0, step=10.0), atol=1e-12)
    ramp = lagged(0.01 * time, 0.0, 5.0, 40.0)
    np.testing.assert_allclose(ramp - 0.01 * time, lag_error(time, 40.0, rate=0.01), atol=1e-12)


def test_lag_and_coloured_noise_do_not_depend_on_what_follows():
    values = np.random.default_rng(3).standard_normal(700)
    for n in (1, 127, 128, 129, 500):
        assert np.array_equal(lagged(values, 1.0, 5.0, 60.0)[:n], lagged(values[:n], 1.0, 5.0, 60.0))
        assert np.array_equal(coloured(values, 5.0, 60.0)[:n], coloured(values[:n], 5.0, 60.0))
    assert lagged(np.empty(0), 1.0, 5.0, 60.0).size == 0


def test_without_steam_the_body_cools_and_the_flow_is_none():
    deeds = (*by_the_sheet(), (5400, Deed.CLOSE_STOP))
    course = simulate(ideal(), deeds, LATE)
    after = course.time > 5400
    assert not course.flow[after].any() and course.flow[course.at(5395)] > 0
    assert np.all(np.diff(course.T_body[after]) < 0)
    assert course.p_exhaust[-1] == course.rig.p_discharge


def test_a_cracked_valve_passes_little_and_the_little_cools_more():
    full = simulate(ideal(), by_the_sheet(), LATE)
    cracked = simulate(ideal(), by_the_sheet()[:4], LATE)
    assert cracked.flow[-1] == pytest.approx(CRACKED * full.flow[-1], rel=0.01)
    rig, T = full.rig, full.T_exhaust[-1]
    lost = rig.body.conductance * (T - rig.T_ambient) / full.flow[-1] / vapour(full.p_exhaust[-1], T).cp  # K
    assert T - cracked.T_exhaust[-1] == pytest.approx((1 / CRACKED - 1) * lost, rel=0.1)


def test_a_slug_of_water_dips_to_saturation_and_is_felt_long_after():
    rig = ideal(faults={"water slugs"})
    course = simulate(rig, by_the_sheet(), LATE)
    begin, end = next(s for s in rig.slugs if s[0] > 2000.0)
    inside = (course.time >= begin) & (course.time < end)
    assert course.wet[inside].all()
    before, just_after = (course.short[course.at(t)] for t in (begin - STEP, end + 60.0))
    assert just_after < before - 0.5  # the body has been cooled by evaporating water
    assert course.shown["exhaust thermometer"][course.at(end)] < course.T_due[course.at(begin - STEP)] - 3.0


def test_a_falling_line_falls_by_as_much_as_said_and_stays_there():
    course = simulate(ideal(load=Load.FALLING), by_the_sheet(), LATE)
    assert course.p_line[0] == course.rig.p_line
    assert course.p_line[-1] == pytest.approx((1 - FALL) * course.rig.p_line)


# ---- gauges and chance


def test_readings_stand_on_the_steps_of_their_scales():
    course = simulate(seen(), by_the_sheet(), 3600.0)
    for name, zero in (("line", 0.0), ("exhaust", 0.0), ("exhaust thermometer", 273.15)):
        steps = (course.shown[name] - zero) / course.rig.gauges[name].step
        np.testing.assert_allclose(steps, np.rint(steps), atol=1e-6)


def test_gauges_tremble_about_what_stands_before_them_by_as_much_as_said():
    rig = seen()
    gauge = replace(rig.gauges["exhaust thermometer"], error=0.3, tremble=0.2, step=0.1)
    noise = np.random.default_rng(1).standard_normal(20_000)
    shown = gauge.shown(np.full(noise.size, 394.2), noise)
    assert shown.mean() - 394.2 == pytest.approx(0.3, abs=5 * 0.2 / np.sqrt(noise.size))
    assert shown.std() == pytest.approx(np.hypot(0.2, 0.1 / np.sqrt(12)), rel=0.02)  # rounding to a step adds step/√12


def test_a_pointer_stays_on_its_scale():
    gauge = replace(seen().gauges["line"], step=0.0, tremble=0.0, error=0.0)
    assert gauge.shown(np.array([-5e5, 9e5, 9e7]), np.zeros(3)).tolist() == [gauge.low, 9e5, gauge.high]


def test_errors_of_the_instruments_are_as_wide_as_their_limits_and_no_wider():
    errors = np.array([rig.gauges["exhaust thermometer"].error for rig in (seen(seed=s) for s in range(24))])
    limit = 0.15 + 0.002 * 121.1  # class A of IEC 60751 at the reading
    assert np.abs(errors).max() <= limit and errors.std() > 0.3 * limit


def test_the_same_seed_gives_the_same_digits_however_long_it_runs():
    short, long = (simulate(seen(faults={"water slugs"}, seed=5), by_the_sheet(), t) for t in (2400.0, 5000.0))
    for name, values in short.shown.items():
        assert np.array_equal(values, long.shown[name][:values.size])
    other = simulate(seen(faults={"water slugs"}, seed=6), by_the_sheet(), 2400.0)
    assert not np.array_equal(short.shown["exhaust thermometer"], other.shown["exhaust thermometer"])


def test_the_line_pressure_wanders_within_one_per_cent_when_steady():
    course = simulate(seen(), by_the_sheet(), LATE)
    share = course.p_line / course.rig.p_line - 1.0
    assert np.abs(share).max() < 0.01 and share.std() > 2e-4
    assert np.abs(simulate(seen(load=Load.SWINGING), by_the_sheet(), LATE).p_line / course.rig.p_line - 1).max() > 0.01


# ---- the faults: each by the size that follows from its own physics


def share_per_kelvin(rig, course):
    """dx/dT2 = cp/h_fg."""
    line = saturated(rig.p_line)
    return vapour(course.p_exhaust[-1], course.T_exhaust[-1]).cp / (line.h_g - line.h_f)


@pytest.fixture(scope="module")
def sound():
    rig = ideal()
    return rig, simulate(rig, by_the_sheet(), LATE)


def loss(sound):
    """The heat loss as a share of quality: UA (T - T_a)/(m h_fg)."""
    rig, course = sound
    line = saturated(rig.p_line)
    q = rig.body.conductance * (course.T_exhaust[-1] - rig.T_ambient) / course.flow[-1]
    return q / (line.h_g - line.h_f)


@cache
def size(fault, seed=1, x=0.972, case=DEMO):
    return cost_of(Scenario(case, frozenset({fault}), seed, x), HiddenFault(fault)).size


def test_wet_lagging_costs_three_more_losses(sound):
    assert size("wet lagging") == pytest.approx(-3 * loss(sound), rel=0.1)
    assert -0.004 < size("wet lagging") < -0.002  # about 0.3 %pt at 30 kg/h


def test_a_clogged_orifice_costs_three_more_losses_at_a_quarter_of_the_flow(sound):
    assert size("clogged orifice") == pytest.approx(-3 * loss(sound), rel=0.15)


def test_a_thermometer_pulled_out_reads_low_by_its_share_of_the_difference_to_its_head(sound):
    rig, course = sound
    probe = ideal(faults={"thermometer not immersed"}).probe
    expected = -probe.head_share * (course.T_exhaust[-1] - probe.T_head) * share_per_kelvin(*sound)
    assert size("thermometer not immersed") == pytest.approx(expected, rel=0.05)
    # such a share is that of a 6 mm pocket of 4 mm bore, 20 to 40 mm deep, in a film of 100 W/(m² K)
    deep = -immersion_error(400.0, 300.0, np.array([0.02, 0.04]), 0.006, 0.004, 100.0) / 100.0
    assert deep[1] < probe.head_share < deep[0]


def test_a_thermometer_that_is_off_costs_a_tenth_of_a_point_per_kelvin(sound):
    for seed in (1, 2, 3):
        shift = ideal(faults={"thermometer offset"}, seed=seed).gauges["exhaust thermometer"].error
        assert size("thermometer offset", seed) == pytest.approx(shift * share_per_kelvin(*sound), rel=0.02)
        assert 1.5 <= abs(shift) <= 4.0
    assert share_per_kelvin(*sound) == pytest.approx(0.00100, rel=0.03)


@pytest.mark.parametrize(("gauge", "expected"), [(2.0, 0.0089), (7.0, 0.0029), (10.0, 0.0019), (40.0, -0.0002)])
def test_a_gauge_taken_for_absolute_costs_less_the_higher_the_pressure(gauge, expected):
    """dx/dp1 (p_a), worked out with IAPWS-IF97 at x = 0.98 and an exhaust to air."""
    case = BLANK.with_(p_line=Entry(gauge, "bar", "gauge"), heat_loss_method="none", sample_flow=Entry(30.0, "kg/h"))
    assert size("gauge read as absolute", x=0.985, case=case) == pytest.approx(expected, abs=0.0004)


def test_an_assumed_barometer_costs_a_tenth_to_two_tenths(sound):
    """At 7 bar gauge 1000 m cost 0.09 %pt and 2600 m 0.21 %pt; at 9 bar a little less."""
    for seed in (1, 2, 3):
        rig = ideal(faults={"barometer assumed"}, seed=seed)
        drop = rig.sheet.p_barometer - rig.p_barometer
        assert 11e3 <= drop <= 25e3
        assert size("barometer assumed", seed) == pytest.approx(-0.0009 * drop / 11.4e3, rel=0.3)


def test_an_unnoticed_back_pressure_costs_a_twentieth_per_ten_kilopascals():
    """dx/dp2 is about -0.0045 %pt per kPa at 10 bar, so that an exhaust pressure taken too low reads too dry."""
    for seed in (1, 2, 3):
        rig = ideal(faults={"back pressure"}, seed=seed)
        p2, planned = float(rig.pipe(rig.sheet.sample_flow)), rig.sheet.p_exhaust
        assert p2 - planned > 15e3
        line, T = saturated(rig.p_line), simulate(rig, by_the_sheet(), LATE).T_exhaust[-1]
        expected = (vapour(planned, T).h - vapour(p2, T).h) / (line.h_g - line.h_f)
        assert size("back pressure", seed) == pytest.approx(expected, rel=0.05)
        assert 3.5e-5 < expected / (p2 - planned) * 1e3 < 6e-5


def test_back_pressure_eats_superheat():
    cost = cost_of(Scenario(DEMO, frozenset({"back pressure"}), 1, 0.972), HiddenFault.BACK_PRESSURE)
    assert cost.superheat < cost.sound - 5.0


def test_a_superheated_line_reads_above_one():
    """10 K of superheat at 10 bar read as 1.013."""
    for seed in (1, 2, 3):
        rig = ideal(faults={"superheated line"}, seed=seed)
        assert size("superheated line", seed) == pytest.approx(0.013 * rig.line_superheat / 10.0, rel=0.06)


def test_slugs_make_the_mean_read_wetter():
    assert -0.01 < size("water slugs") < -0.0005


def test_wet_exhaust_leaves_no_quality_but_a_bound():
    cost = cost_of(Scenario(DEMO, frozenset({"wet exhaust"}), 1), HiddenFault.WET_EXHAUST)
    rig = rig_of(Scenario(DEMO, frozenset({"wet exhaust"}), 1))
    assert cost.size is None and cost.superheat == 0.0
    assert cost.x > rig.x + 0.003


def test_a_fault_changes_one_thing_only():
    truth = rig_of(Scenario(DEMO, seed=9))
    for fault in HiddenFault:
        rig = rig_of(Scenario(DEMO, frozenset({fault}), 9))
        if fault not in (HiddenFault.WET_EXHAUST, HiddenFault.SUPERHEATED_LINE):
            assert rig.x == truth.x, fault
        assert rig.gauges["exhaust"].error == truth.gauges["exhaust"].error
        assert (rig.body.conductance == truth.body.conductance) is (fault is not HiddenFault.WET_LAGGING)
        assert (rig.line_superheat == 0.0) is (fault is not HiddenFault.SUPERHEATED_LINE)


def test_all_faults_that_go_together_make_a_rig():
    rig = seen(faults=set(HiddenFault) - {HiddenFault.WET_EXHAUST})
    course = simulate(rig, by_the_sheet(), 3600.0)
    assert all(np.isfinite(values).all() for values in course.shown.values())


# ---- the scenario


def test_the_truth_is_drawn_from_the_expected_range_as_far_as_it_can_be_read():
    drawn = [rig_of(Scenario(DEMO, seed=s)).x for s in range(30)]
    assert 0.97 <= min(drawn) < 0.975 and 0.985 < max(drawn) <= 0.995


def test_a_surprise_hides_at_most_one_fault_and_sometimes_none():
    hidden = [surprise(DEMO, seed).faults for seed in range(60)]
    assert {len(f) for f in hidden} == {0, 1}
    assert len(set().union(*hidden)) >= 8
    assert surprise(DEMO, 7) == surprise(DEMO, 7)


def test_what_cannot_be_rehearsed_is_refused_with_the_reason():
    with pytest.raises(InputError, match="Method: got separating and throttling, needs throttling alone"):
        rig_of(Scenario(WET_LINE_READ))
    with pytest.raises(InputError, match="Part of the water the separator drains: got 180 %"):
        rig_of(Scenario(DEMO.with_(water_share=Entry(180.0, "%"))))
    with pytest.raises(InputError, match="seed: got -1, needs a whole number"):
        Scenario(DEMO, seed=-1)
    with pytest.raises(InputError, match="quality of the line: got 1.2, needs 0.5 to 1"):
        Scenario(DEMO, x=1.2)
    with pytest.raises(InputError, match="needs one of the two"):
        Scenario(DEMO, frozenset({"wet exhaust", "superheated line"}))
    with pytest.raises(InputError, match="hidden fault: got gremlins, needs one of: wet exhaust, back pressure"):
        Scenario(DEMO, frozenset({"gremlins"}))
    with pytest.raises(InputError, match="load: got wild, needs one of: steady, swinging, falling"):
        Scenario(DEMO, load="wild")


def test_a_scenario_leaves_the_tables_of_its_case_behind():
    row = DEMO.with_(ticks=())
    assert Scenario(DEMO) == Scenario(row)
    assert Scenario(DEMO).case["readings"] == ()
