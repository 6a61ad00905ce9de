"""Orifice, exhaust pipe and sampling: limits, directions, round trips and refusals."""

import numpy as np
import pytest

from engine.calorimeter import (
    DISCHARGES,
    Status,
    aspiration_efficiency,
    bore_for_flow,
    discharge_from_flow,
    exhaust_pipe,
    exhaust_temperature,
    exhaust_velocity,
    fittings_loss,
    flux_at,
    high_pressure_factor,
    isokinetic_port_area,
    isokinetic_sample_flow,
    napier_mass_flux,
    orifice_flow,
    orifice_mass_flux,
    pipe_area,
    pipe_velocity,
    sample_bias,
    stokes_number,
    weighed_flow,
    wetness_in_line,
    wetness_sampled,
)
from engine.calorimeter.friction import FITTINGS, over_distinct
from engine.steam.errors import InputError

# --- orifice ----------------------------------------------------------------------------------------

def test_discharge_coefficients_for_want_of_a_weighed_flow():
    """Common practice: the sharper the edge, the narrower the jet behind it."""
    assert list(DISCHARGES.values()) == [0.60, 0.85, 0.97]


def test_napier_joins_at_six_tenths():
    low, high = napier_mass_flux(1e6, 0.6e6 - 1e-3), napier_mass_flux(1e6, 0.6e6 + 1e-3)
    assert low == pytest.approx(high, rel=1e-8)
    assert napier_mass_flux(1e6, 0.55e6) == napier_mass_flux(1e6, 1e5) == pytest.approx(low)  # choked up to there
    assert napier_mass_flux(1e6, 0.9e6) < low
    assert napier_mass_flux(1e6, 1e6 - 1e-3) < 1.0


def test_flux_falls_to_nothing_without_a_pressure_difference_and_joins_at_choking():
    ratios = np.array([0.3, 0.5, 0.577, 0.7, 0.9, 0.99, 0.999999])
    flux, choked = orifice_mass_flux(1e6, 1.0, ratios * 1e6)
    assert list(choked) == [True, True, False, False, False, False, False]
    assert flux[0] == flux[1] and (np.diff(flux) <= 0).all()
    assert flux[2] == pytest.approx(flux[1], rel=1e-5)
    assert flux[-1] < 0.01 * flux[0]


def test_the_critical_pressure_gives_the_largest_flux():
    choked = orifice_mass_flux(2e6, 0.97, 1e5)[0]
    throats = np.linspace(0.4e6, 1.9e6, 60)
    assert (flux_at(2e6, 0.97, throats) <= choked * (1 + 1e-7)).all()


def test_wetter_steam_flows_more_and_higher_pressure_too():
    assert (np.diff(orifice_mass_flux(1e6, np.array([1.0, 0.98, 0.95, 0.9]), 1e5)[0]) > 0).all()
    assert (np.diff(orifice_mass_flux(np.array([2e5, 4e5, 1e6, 4e6, 1e7]), 0.98, 1e5)[0]) > 0).all()


def test_flow_goes_with_the_area_and_the_coefficient():
    one = orifice_flow(1e6, 0.98, 1e5, 0.003, 0.6)
    assert orifice_flow(1e6, 0.98, 1e5, 0.006, 0.6).computed == pytest.approx(4 * one.computed)
    assert orifice_flow(1e6, 0.98, 1e5, 0.003, 0.9).napier == pytest.approx(1.5 * one.napier)
    assert one.sample_flow == one.computed and one.discharge == 0.6 and one.choked is True


def test_a_weighed_flow_overrides_and_yields_the_coefficient():
    flow = weighed_flow(5.0, 600.0)
    result = orifice_flow(1e6, 0.98, 1e5, 0.003, 0.6, weighed=flow)
    assert result.sample_flow == flow != result.computed
    assert result.discharge == pytest.approx(discharge_from_flow(flow, 1e6, 0.98, 1e5, 0.003))
    assert orifice_flow(1e6, 0.98, 1e5, 0.003, result.discharge).computed == pytest.approx(flow)


def test_bore_and_flow_are_inverse():
    bore = bore_for_flow(np.array([10, 30, 60]) / 3600, 1e6, 0.98, 1e5, 0.85)
    assert orifice_flow(1e6, 0.98, 1e5, bore, 0.85).computed * 3600 == pytest.approx(np.array([10, 30, 60]))
    assert (np.diff(bore) > 0).all()


def test_high_pressure_factor_is_one_in_the_usual_range():
    assert high_pressure_factor(10e6) == 1 and high_pressure_factor(15e6) > high_pressure_factor(11e6)


def test_an_exhaust_above_the_line_is_refused():
    for call in (lambda: napier_mass_flux(1e5, 2e5), lambda: orifice_mass_flux(1e5, 0.98, 1e5),
                 lambda: orifice_flow(1e5, 0.98, 2e5, 0.003, 0.6)):
        with pytest.raises(InputError, match="less than the line pressure"):
            call()
    with pytest.raises(InputError, match="discharge coefficient: got 97.*, needs more than 0 and at most 1.5"):
        orifice_flow(1e6, 0.98, 1e5, 0.003, 97.0)


# --- exhaust pipe -----------------------------------------------------------------------------------

BASE = {"sample_flow": 30 / 3600, "exhaust_bore": 0.0209, "length": 3.0, "p_discharge": 101_325.0, "T_exhaust": 400.0}


def test_more_of_anything_that_resists_means_more_back_pressure():
    base = exhaust_pipe(**BASE).back_pressure
    for worse in ({"sample_flow": 40 / 3600}, {"exhaust_bore": 0.0157}, {"length": 6.0}, {"T_exhaust": 450.0}):
        assert exhaust_pipe(**(BASE | worse)).back_pressure > base
    assert exhaust_pipe(**BASE, roughness=2e-4).back_pressure > base
    assert exhaust_pipe(**BASE, loss_coefficient=4.0).back_pressure > base
    assert exhaust_pipe(**BASE, fittings={"elbow 90°, threaded": 2}).back_pressure > base
    # to a condenser the same flow is much faster
    assert exhaust_pipe(**(BASE | {"p_discharge": 2e4})).exit_velocity > exhaust_pipe(**BASE).exit_velocity


def test_no_pipe_no_back_pressure():
    pipe = exhaust_pipe(**(BASE | {"length": 0.0}))
    assert pipe.back_pressure == pytest.approx(0, abs=1e-6)
    assert pipe.velocity == pytest.approx(pipe.exit_velocity)
    assert pipe.resistance == 0


def test_low_flow_is_darcys_incompressible_pressure_drop():
    pipe = exhaust_pipe(**(BASE | {"sample_flow": 2 / 3600}))
    G = 2 / 3600 / (np.pi / 4 * 0.0209**2)
    darcy = pipe.friction_factor * 3.0 / 0.0209 * G * pipe.exit_velocity / 2
    assert pipe.back_pressure == pytest.approx(darcy, rel=1e-3)


def test_choking_sets_in_gradually_and_is_recognised():
    pipe = exhaust_pipe(**(BASE | {"sample_flow": np.linspace(10, 500, 60) / 3600}))
    assert not pipe.choked[0] and pipe.choked[-1]
    assert (np.diff(pipe.choked.astype(int)) >= 0).all()
    assert (np.diff(pipe.p_exhaust) > 0).all()
    assert (pipe.exit_mach < 0.9).all()  # 1/sqrt(kappa)
    assert pipe.exit_mach[pipe.choked] == pytest.approx(0.873, abs=0.01)
    # once choked, the pressure grows in proportion to the flow, whatever is outside
    choked = BASE | {"sample_flow": 500 / 3600}
    assert exhaust_pipe(**choked).p_exhaust == pytest.approx(
        exhaust_pipe(**(choked | {"p_discharge": 9e4})).p_exhaust, rel=1e-3)


def test_wet_exhaust_is_said_to_be_wet():
    pipe = exhaust_pipe(**(BASE | {"T_exhaust": np.array([373.0, 373.5, 400.0])}))
    assert list(pipe.status) == [Status.NOT_SUPERHEATED, Status.NOT_SUPERHEATED, Status.OK]
    assert np.isfinite(pipe.p_exhaust).all()


def test_pressure_and_temperature_are_solved_together():
    def throttled(p):
        return exhaust_temperature(1e6, 0.98, p).T_exhaust

    pipe = exhaust_pipe(32 / 3600, 0.0157, 5.0, 101_325.0, throttled)
    assert pipe.T_exhaust == pytest.approx(throttled(pipe.p_exhaust), abs=1e-9)
    assert exhaust_pipe(32 / 3600, 0.0157, 5.0, 101_325.0, pipe.T_exhaust).p_exhaust == pytest.approx(
        pipe.p_exhaust, rel=1e-4)
    bores = np.array([0.0157, 0.0266])
    assert exhaust_pipe(32 / 3600, bores, 5.0, 101_325.0, throttled).p_exhaust[0] == pytest.approx(pipe.p_exhaust)


def test_a_needle_for_an_exhaust_is_refused():
    with pytest.raises(InputError, match="a bore wide enough for this flow"):
        exhaust_pipe(**(BASE | {"exhaust_bore": 0.001, "length": 30.0}))


def test_exhaust_velocity_agrees_with_the_pipe():
    pipe = exhaust_pipe(**BASE)
    assert exhaust_velocity(BASE["sample_flow"], BASE["exhaust_bore"], pipe.p_exhaust, 400.0) == pytest.approx(
        pipe.velocity)
    with pytest.raises(InputError, match="volume of wet steam"):
        exhaust_velocity(0.01, 0.02, 101_325.0, 370.0)


def test_fittings():
    assert fittings_loss({}, 3e4, 0.0266) == 0
    one = {name: fittings_loss({name: 1}, 3e4, 0.0266) for name in FITTINGS}
    assert all(0 < K < 5 for K in one.values())
    assert one["elbow 90°, long radius"] < one["elbow 90°, threaded"] < one["tee, turning"]
    assert fittings_loss(dict.fromkeys(FITTINGS, 2), 3e4, 0.0266) == pytest.approx(2 * sum(one.values()))
    with pytest.raises(InputError, match="fitting: got 'hose', needs one of"):
        fittings_loss({"hose": 1, "tee, turning": -1}, 3e4, 0.0266)


def test_each_distinct_state_is_asked_for_once():
    asked = []
    result = over_distinct(lambda a: asked.append(a) or 2 * a, np.array([[1.0, 2.0], [2.0, 1.0]]))
    assert asked == [1.0, 2.0]
    assert result.tolist() == [[2.0, 4.0], [4.0, 2.0]]


# --- sampling ---------------------------------------------------------------------------------------

def test_isokinetic_area_and_flow_are_inverse_and_equalise_velocities():
    area = isokinetic_port_area(25 / 3600, 8000 / 3600, 0.154)
    assert isokinetic_sample_flow(area, 8000 / 3600, 0.154) * 3600 == pytest.approx(25)
    bias = sample_bias(0.02, 1e6, 8000 / 3600, 0.154, 25 / 3600, area, 0.004, np.array([1e-6, 1e-5, 1e-3]))
    assert bias.line_velocity == pytest.approx(pipe_velocity(8000 / 3600, 0.154, 1e6, 0.98))
    assert bias.velocity_ratio == pytest.approx(1.0)
    assert bias.bias == pytest.approx(0, abs=1e-12)  # equal velocities: no bias, whatever the drops


def test_fine_drops_follow_coarse_drops_fly_straight():
    assert aspiration_efficiency(2.0, 1.0) == pytest.approx(1 + (1 - 1 / 3.3085))  # k = 2 + 0.617/2
    assert aspiration_efficiency(0.5, 0.5) == pytest.approx(1 - 0.5 * (1 - 1 / 2.617))  # k = 2 + 0.617/0.5
    assert aspiration_efficiency(2.0, 0.0) == 1
    assert aspiration_efficiency(0.5, 0.0) == 1
    assert aspiration_efficiency(np.array([0.5, 2.0]), 1e9) == pytest.approx([0.5, 2.0])
    assert (np.diff(aspiration_efficiency(2.0, np.logspace(-3, 3, 30))) > 0).all()
    assert (np.diff(aspiration_efficiency(0.5, np.logspace(-3, 3, 30))) < 0).all()


def test_a_slow_port_reads_wet_a_fast_one_dry():
    area = isokinetic_port_area(25 / 3600, 8000 / 3600, 0.154)
    bias = sample_bias(0.02, 1e6, 8000 / 3600, 0.154, 25 / 3600, area * np.array([0.5, 1.0, 2.0]), 0.004, 2e-5)
    assert bias.bias[0] < -0.005 < bias.bias[1] < 0.005 < bias.bias[2]
    assert bias.port_velocity == pytest.approx(bias.line_velocity / bias.velocity_ratio)


def test_water_on_the_wall_makes_the_sample_drier():
    read = wetness_sampled(0.02, 1.0, wall_film=np.array([0.0, 0.25, 0.5, 0.9]))
    assert read[0] == pytest.approx(0.02)
    assert (np.diff(read) < 0).all()
    assert read[2] == pytest.approx(0.0101, abs=1e-4)


def test_what_was_sampled_leads_back_to_the_line():
    y = np.array([0.0, 0.005, 0.02, 0.1])
    for A, film in [(1.0, 0.0), (0.5, 0.0), (2.0, 0.3)]:
        assert wetness_in_line(wetness_sampled(y, A, wall_film=film), A, wall_film=film) == pytest.approx(y, abs=1e-14)


def test_stokes_number_goes_with_the_square_of_the_drop():
    assert stokes_number(2e-5, 25.0, 0.004, 1e6) == pytest.approx(4 * stokes_number(1e-5, 25.0, 0.004, 1e6))
    # 10 bar, 25 m/s, 4 mm port, computed: 0.02, 0.5, 2.1, 51 for 1, 5, 10, 50 µm
    assert stokes_number(np.array([1, 5, 10, 50]) * 1e-6, 25.0, 0.004, 1e6) == pytest.approx(
        [0.02, 0.5, 2.1, 51], rel=0.04)


def test_sampling_refusals():
    with pytest.raises(InputError, match="needs less than the line flow"):
        isokinetic_port_area(3.0, 2.0, 0.15)
    with pytest.raises(InputError, match="areas inside are in square metres"):
        isokinetic_sample_flow(60.0, 2.0, 0.15)
    with pytest.raises(InputError, match="wetness: got 2.*, needs at least 0 and less than 1\n.*not a percentage"):
        wetness_sampled(2.0, 1.0)
    assert pipe_area(0.2) == pytest.approx(np.pi / 100)
