"""Heat loss and warm-up: limits, directions, recovery of a known truth, refusals."""

import numpy as np
import pytest

from engine.calorimeter import (
    LAGGING_CONDUCTIVITY,
    OUTER_FILMS,
    Lagging,
    LossMethod,
    body_temperature,
    chosen_heat_loss,
    conductance_of,
    exhaust_temperature,
    fit_two_flows,
    heat_loss_per_kg,
    ideal_normal,
    normal_reading,
    pipe_conductance,
    quality,
    reading_error,
    storage_heat,
    time_to_within,
    warm_up,
    wetness_by_normal_reading,
)
from engine.steam.errors import InputError

DN25 = {"length": 0.5, "outer_diameter": 0.0337, "inner_diameter": 0.0272}
P, P2, FLOW = 1e6, 101_325.0, 25 / 3600


# --- conductance ------------------------------------------------------------------------------------

def test_wet_lagging_loses_about_four_times_what_dry_lagging_does():
    dry = pipe_conductance(**DN25, lagging=0.025, conductivity=LAGGING_CONDUCTIVITY[Lagging.DRY])
    wet = pipe_conductance(**DN25, lagging=0.025, conductivity=LAGGING_CONDUCTIVITY[Lagging.WET])
    assert (dry, wet) == (pytest.approx(0.16, abs=0.01), pytest.approx(0.63, abs=0.02))
    assert pipe_conductance(**DN25) > dry


def test_more_lagging_less_wind_shorter_pipe_lose_less():
    assert (np.diff(pipe_conductance(**DN25, lagging=np.linspace(0, 0.1, 20))) < 0).all()
    assert (np.diff([pipe_conductance(**DN25, lagging=0.025, outer_film=f) for f in OUTER_FILMS.values()]) > 0).all()
    assert pipe_conductance(**(DN25 | {"length": 1.0})) == pytest.approx(2 * pipe_conductance(**DN25))


def test_half_a_metre_of_bare_sample_line():
    # 0.3 m of bare DN15 at 180 °C in 24 °C still air loses about 37 W (computed with 11.5 W/(m² K) outside)
    UA = pipe_conductance(0.3, 0.0213, 0.0161, film=5000.0, outer_film=11.5)
    loss = UA * 156.0
    assert loss == pytest.approx(36, abs=1)


def test_loss_per_kg_goes_against_the_flow_and_back():
    q = heat_loss_per_kg(0.25, 400.0, 295.0, np.array([10, 20, 40]) / 3600)
    assert q[0] == pytest.approx(2 * q[1]) == pytest.approx(4 * q[2])
    assert conductance_of(q, 400.0, 295.0, np.array([10, 20, 40]) / 3600) == pytest.approx([0.25] * 3)
    assert heat_loss_per_kg(0.25, 290.0, 295.0, 0.01) < 0
    with pytest.raises(InputError, match="more than the ambient temperature"):
        conductance_of(100.0, 290.0, 295.0, 0.01)


def test_more_heat_loss_never_makes_the_steam_look_drier():
    losses = heat_loss_per_kg(np.linspace(0, 1.5, 12), 410.0, 295.0, FLOW)
    read = exhaust_temperature(P, 0.985, P2, heat_loss=losses).T_exhaust
    naive = quality(P, P2, read).x
    assert (np.diff(naive) < 0).all()
    assert naive[0] == pytest.approx(0.985)
    assert quality(P, P2, read, heat_loss=losses).x == pytest.approx(np.full(12, 0.985), abs=1e-9)


# --- two flows --------------------------------------------------------------------------------------

def readings(flows, UA=0.3, x=0.985, T_mean=425.0, T_ambient=297.0):
    q = heat_loss_per_kg(UA, T_mean, T_ambient, flows)
    return exhaust_temperature(P, x, P2, heat_loss=q).T_exhaust


def test_two_flows_find_the_loss_and_the_quality():
    flows = np.array([15, 45]) / 3600
    fit = fit_two_flows(flows, P2, readings(flows), 425.0, 297.0)
    assert fit.conductance == pytest.approx(0.3, rel=1e-6)
    assert quality(P, P2, readings(flows), heat_loss=fit.heat_loss).x == pytest.approx([0.985, 0.985], abs=1e-9)
    assert fit.h_loss_free == pytest.approx(quality(P, P2, readings(flows), heat_loss=fit.heat_loss).h_line[0])
    assert fit.residuals == pytest.approx([0, 0], abs=1e-6)
    assert (fit.degrees_of_freedom, fit.flow_ratio) == (0, pytest.approx(3.0))


def test_several_flows_average_out_and_leave_residuals():
    flows = np.array([15, 20, 30, 45]) / 3600
    noise = np.array([0.05, -0.1, 0.1, -0.05])
    fit = fit_two_flows(flows, P2, readings(flows) + noise, 425.0, 297.0)
    assert fit.conductance == pytest.approx(0.3, rel=0.05)
    assert fit.degrees_of_freedom == 2
    assert fit.residuals.sum() == pytest.approx(0, abs=1e-5)
    assert np.abs(fit.residuals).max() > 50


@pytest.mark.parametrize("flows", [[0.01], [0.01, 0.01], [[0.01, 0.02], [0.01, 0.02]]])
def test_fewer_than_two_flows_are_refused(flows):
    with pytest.raises(InputError, match="one row of at least two different flows"):
        fit_two_flows(flows, P2, 400.0, 425.0, 297.0)


def test_wet_and_useless_readings_are_refused():
    with pytest.raises(InputError, match="exhaust temperature at position 1: got 372 K, needs more than the satur"):
        fit_two_flows([0.01, 0.02], P2, [400.0, 372.0], 425.0, 297.0)
    with pytest.raises(InputError, match="that do not undo the change of flow"):
        fit_two_flows([0.01, 0.02], P2, [400.0, 401.0], [398.0, 498.0], 298.0)


# --- normal reading ---------------------------------------------------------------------------------

def test_a_normal_reading_cancels_loss_and_thermometer_error():
    q = heat_loss_per_kg(0.3, 425.0, 297.0, FLOW)
    wrong = 0.4  # the thermometer reads this much low, in both runs
    normal = exhaust_temperature(P, 1.0, P2, heat_loss=q).T_exhaust - wrong
    read = exhaust_temperature(P, 0.98, P2, heat_loss=q).T_exhaust - wrong
    assert wetness_by_normal_reading(P, P2, read, normal) == pytest.approx(0.02, abs=5e-6)
    assert 1 - quality(P, P2, read).x > 0.023  # uncorrected
    result = normal_reading(P, P2, normal)
    assert result.T_ideal == pytest.approx(exhaust_temperature(P, 1.0, P2).T_exhaust)
    assert result.heat_loss == pytest.approx(q + 2030 * wrong, rel=0.02)
    assert result.correction == pytest.approx(result.T_ideal - normal)


def test_a_wet_normal_reading_makes_every_result_too_dry():
    q = heat_loss_per_kg(0.3, 425.0, 297.0, FLOW)
    wet_normal = exhaust_temperature(P, 0.995, P2, heat_loss=q).T_exhaust
    read = exhaust_temperature(P, 0.98, P2, heat_loss=q).T_exhaust
    assert wetness_by_normal_reading(P, P2, read, wet_normal) == pytest.approx(0.015, abs=1e-5)


def test_a_normal_reading_above_the_ideal_shows_as_a_negative_loss():
    assert normal_reading(P, P2, ideal_normal(P, P2) + 1.0).heat_loss < 0


def test_normal_reading_refusals():
    with pytest.raises(InputError) as caught:
        wetness_by_normal_reading(P, P2, 370.0, 371.0)
    assert {f.name for f in caught.value.faults} == {"T_exhaust", "T_normal"}
    with pytest.raises(InputError, match="a pressure at which dry steam arrives superheated"):
        ideal_normal(16e6, 1e6)


# --- the choice -------------------------------------------------------------------------------------

def test_no_result_until_a_method_is_chosen():
    with pytest.raises(InputError, match="method for the heat loss: got nothing, needs one of 'conductance'"):
        chosen_heat_loss(None)
    with pytest.raises(InputError, match="no value with the method 'none'"):
        chosen_heat_loss("none", 100.0)
    with pytest.raises(InputError, match="a value found by 'two flows'"):
        chosen_heat_loss("two flows")
    assert chosen_heat_loss(LossMethod.NONE) == 0
    assert chosen_heat_loss(LossMethod.CONDUCTANCE, np.array([1.0, 2.0])).tolist() == [1.0, 2.0]


# --- warm-up ----------------------------------------------------------------------------------------

COLD = {"heat_capacity": 1470.0, "area": 0.04, "sample_flow": FLOW, "p_exhaust": P2, "T_exhaust": 423.15,
        "T_start": 293.15, "T_ambient": 293.15}


def test_the_body_warms_without_turning_back_to_its_steady_temperature():
    run = warm_up(**COLD, conductance=0.2)
    t = np.linspace(0, 6 * 3600, 500)
    T = body_temperature(run, t)
    assert T[0] == 293.15
    assert (np.diff(T) >= 0).all()
    assert T[-1] == pytest.approx(run.T_steady, abs=1e-6)
    assert run.T_saturation < run.T_steady < run.T_final < 423.15
    assert body_temperature(run, run.time_condensing) == pytest.approx(run.T_saturation)


def test_the_reading_is_wet_first_then_low_then_right():
    run = warm_up(**COLD)
    error = reading_error(run, np.array([1.0, run.time_condensing + 1e-9, 600.0, 1e5]))
    assert (np.diff(error) > 0).all() and error[-1] == pytest.approx(0, abs=1e-9)
    assert error[0] == pytest.approx(run.T_saturation - run.T_final)


def test_time_to_within_is_when_the_error_is_that():
    run = warm_up(**COLD, conductance=0.2)
    for error in (5.0, 0.5, 0.1):
        assert reading_error(run, time_to_within(run, error)) == pytest.approx(-error, rel=1e-9)
    assert time_to_within(run, 1000.0) == run.time_condensing


def test_heavier_slower_and_smaller_flow_slower():
    runs = warm_up(**(COLD | {"heat_capacity": np.array([980.0, 1470.0, 2450.0])}))
    assert (np.diff(time_to_within(runs, 0.1)) > 0).all()
    runs = warm_up(**(COLD | {"sample_flow": np.array([10, 25, 60]) / 3600}))
    assert (np.diff(time_to_within(runs, 0.1)) < 0).all()
    assert 30 < time_to_within(warm_up(**COLD), 0.1) / 60 < 45  # half an hour to three quarters, not five minutes


def test_at_a_large_flow_the_film_alone_sets_the_time_constant():
    run = warm_up(**(COLD | {"sample_flow": 100.0}))
    assert run.time_constant == pytest.approx(1470.0 / (100.0 * 0.04), rel=1e-3)


def test_a_warm_start_skips_the_condensing_stage():
    run = warm_up(**(COLD | {"T_start": 390.0}))
    assert run.time_condensing == 0 and run.condensate == 0
    assert body_temperature(run, 0.0) == 390.0
    hot = warm_up(**(COLD | {"T_start": 480.0}))
    assert (np.diff(body_temperature(hot, np.linspace(0, 3600, 50))) < 0).all()
    assert reading_error(hot, 60.0) > 0


def test_condensate_carries_the_heat_that_warmed_the_body():
    assert warm_up(**COLD).condensate == pytest.approx(1470.0 * 80 / 2.2565e6, rel=2e-3)


def test_stored_heat_looks_like_a_loss():
    run = warm_up(**COLD)
    T = body_temperature(run, np.array([599.0, 601.0]))
    stored = 1470.0 * np.diff(T)[0] / 2 / FLOW  # what warms the body, per kg of steam
    assert storage_heat(run, 600.0) == pytest.approx(stored, rel=1e-4)


def test_steam_that_cannot_dry_the_body_is_refused():
    with pytest.raises(InputError, match="wet steam warms the body only to saturation"):
        warm_up(**(COLD | {"T_exhaust": 370.0}))
    with pytest.raises(InputError, match="lag the body, or draw a larger sample flow"):
        warm_up(**COLD, conductance=50.0)
    with pytest.raises(InputError, match="give the size of the error"):
        time_to_within(warm_up(**COLD), -0.1)
