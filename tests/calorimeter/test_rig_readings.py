"""Gauge, barometer and thermometer: limits, directions, round trips and refusals."""

import numpy as np
import pytest

from engine.calorimeter import (
    RECOVERY_FACTORS,
    altitude_of_pressure,
    corrected_temperature,
    geopotential_altitude,
    immersion_error,
    immersion_for,
    lag_error,
    moving_stream_error,
    radiation_error,
    settling_time,
    standard_pressure,
    station_pressure,
    stem_error,
    tapping_pressure,
    water_leg,
)
from engine.steam.errors import InputError

POCKET = {"outer_diameter": 0.006, "inner_diameter": 0.004, "film": 100.0}


# --- atmosphere and water leg -----------------------------------------------------------------------

def test_pressure_falls_with_altitude_and_comes_back():
    z = np.linspace(-2000, 10_900, 60)
    p = standard_pressure(z)
    assert (np.diff(p) < 0).all()
    assert altitude_of_pressure(p) == pytest.approx(z, abs=1e-6)
    p = standard_pressure(z, geopotential=True)
    assert altitude_of_pressure(p, geopotential=True) == pytest.approx(z, abs=1e-6)


def test_geometric_and_geopotential_altitude_differ_by_ten_pascal_at_2600_m():
    assert geopotential_altitude(2600.0) < 2600.0
    assert standard_pressure(2600.0) - standard_pressure(2600.0, geopotential=True) == pytest.approx(10, abs=1)


def test_a_weather_report_is_not_the_pressure_at_the_place():
    assert station_pressure(102_000.0, 0.0) == pytest.approx(102_000.0, rel=1e-12)
    assert station_pressure(101_325.0, 800.0) == pytest.approx(standard_pressure(800.0), rel=1e-12)
    assert 102_000.0 - station_pressure(102_000.0, 800.0) == pytest.approx(9_300, abs=200)
    with pytest.raises(InputError, match="pressure reduced to sea level: got 1013 Pa, needs at least 80000 Pa"):
        station_pressure(1013.0, 800.0)


def test_a_gauge_below_its_tapping_reads_high():
    assert tapping_pressure(1e6, 2.0, 293.15) < 1e6 < tapping_pressure(1e6, -2.0, 293.15)
    assert tapping_pressure(1e6, 0.0, 293.15) == 1e6
    assert water_leg(1.0, 293.15) == pytest.approx(9790, abs=5)


def test_a_hot_leg_weighs_less():
    assert (np.diff(water_leg(1.0, np.array([275.0, 280.0, 320.0, 400.0, 450.0]))) < 1.0).all()
    assert water_leg(1.0, 420.0) < water_leg(1.0, 300.0)


@pytest.mark.parametrize(("call", "words"), [
    (lambda: standard_pressure(12_000.0), r"altitude: got 12000 m, needs at least -2000 m and at most 11000 m"),
    (lambda: tapping_pressure(5000.0, 1.0, 293.15), "needs more than the water leg itself"),
    (lambda: water_leg(1.0, 20.0), "water leg temperature: got 20 K, needs at least 273.16 K"),
    (lambda: altitude_of_pressure(1013.25), "give the barometer in pascal"),
])
def test_refusals_say_what_to_do(call, words):
    with pytest.raises(InputError, match=words):
        call()


# --- thermometer ------------------------------------------------------------------------------------

def test_stem_error_has_the_sign_of_a_cold_stem():
    assert stem_error(420.0, 310.0, 80.0) < 0 < stem_error(300.0, 340.0, 80.0)
    assert stem_error(420.0, 310.0, 0.0) == 0
    assert stem_error(420.0, 420.0, 80.0) == 0
    assert stem_error(420.0, 310.0, 80.0, liquid="organic") < stem_error(420.0, 310.0, 80.0, liquid="mercury")


def test_an_unknown_stem_liquid_is_refused():
    with pytest.raises(InputError, match="stem liquid: got 'gallium', needs one of 'mercury', 'organic'"):
        stem_error(420.0, 310.0, 80.0, liquid="gallium")


def test_deeper_immersion_means_less_error():
    error = immersion_error(400.0, 330.0, np.linspace(0, 0.2, 40), **POCKET)
    assert error[0] == -70.0  # not immersed: it shows the head
    assert (np.diff(error) > 0).all()
    assert abs(error[-1]) < 1e-5


def test_a_very_long_pocket_shows_the_stream_without_overflow():
    assert immersion_error(400.0, 330.0, 100.0, **POCKET) == 0


def test_more_film_less_metal_less_error():
    at = {"T_exhaust": 400.0, "T_head": 330.0, "immersion": 0.05}
    thin = immersion_error(**at, **POCKET)
    assert immersion_error(**at, **(POCKET | {"film": 200.0})) > thin
    assert immersion_error(**at, **(POCKET | {"inner_diameter": 0.0})) < thin
    assert immersion_error(400.0, 400.0, 0.05, **POCKET) == 0


def test_immersion_for_is_the_inverse():
    depth = immersion_for(0.1, 400.0, 330.0, **POCKET)
    assert immersion_error(400.0, 330.0, depth, **POCKET) == pytest.approx(-0.1, rel=1e-9)
    assert immersion_for(80.0, 400.0, 330.0, **POCKET) == 0


def test_a_pocket_without_metal_is_refused():
    with pytest.raises(InputError, match="inner diameter: got 0.006 m, needs less than the outer diameter"):
        immersion_error(400.0, 330.0, 0.05, 0.006, 0.006, 100.0)


def test_radiation_pulls_towards_the_wall():
    walls = np.array([300.0, 350.0, 399.0, 400.0, 450.0])
    error = radiation_error(400.0, walls, 100.0)
    assert (np.diff(error) > 0).all()
    assert error[3] == pytest.approx(0, abs=1e-12) and error[4] > 0
    assert (np.abs(error) < np.abs(walls - 400.0) + 1e-12).all()
    assert abs(radiation_error(400.0, 300.0, 1e7)) < 1e-2


def test_lagging_the_wall_saves_most_of_the_radiation_error():
    assert radiation_error(400.0, 398.0, 100.0) / radiation_error(400.0, 390.0, 100.0) == pytest.approx(0.2, abs=0.01)


def test_a_probe_reads_between_static_and_total():
    result = moving_stream_error(80.0, 2010.0, np.array([0.0, 0.7, 1.0]))
    assert result.of_static == pytest.approx(result.rise + result.of_total)
    assert result.of_static[0] == 0 and result.of_total[2] == 0
    assert (result.of_static >= 0).all() and (result.of_total <= 0).all()
    assert all(0 <= r.value - r.half_width <= r.value + r.half_width <= 1 for r in RECOVERY_FACTORS.values())


def test_a_thermometer_trails_a_ramp_by_rate_times_time_constant():
    assert lag_error(1e6, 60.0, rate=0.01) == pytest.approx(-0.6)
    assert lag_error(0.0, 60.0, step=10.0) == -10.0
    assert lag_error(settling_time(10.0, 0.1, 60.0), 60.0, step=10.0) == pytest.approx(-0.1)
    assert settling_time(0.05, 0.1, 60.0) == 0


def test_corrections_undo_the_errors_together():
    T = np.array([380.0, 400.0, 450.0])

    def fin(T):
        return immersion_error(T, 330.0, 0.05, **POCKET)

    def wall(T):
        return radiation_error(T, 375.0, 100.0)

    reading = T + fin(T) + wall(T)
    assert corrected_temperature(reading, fin, wall) == pytest.approx(T, abs=1e-7)
    assert corrected_temperature(400.0) == 400.0


def test_a_shallow_probe_cannot_be_corrected():
    with pytest.raises(InputError, match="immerse the probe deeper"):
        corrected_temperature(331.0, lambda T: immersion_error(T, 330.0, 0.001, **POCKET))
