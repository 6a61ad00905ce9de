"""Separating and electric modes: they invert, agree with plain throttling, and say when they cannot."""

import numpy as np
import pytest

from engine.calorimeter import (
    MassBasis,
    Status,
    combined_quality,
    drain_needed,
    drained_fraction,
    drained_mass,
    electric_quality,
    exhaust_temperature,
    flash_fraction,
    heater_reading,
    least_electric_quality,
    least_quality,
    power_needed,
    quality,
    separated_quality,
    separated_reading,
)
from engine.steam.errors import InputError

STEAM, TOTAL = MassBasis.THROTTLED, MassBasis.TOTAL
P, P2 = 8e5, 101_325.0


# --- separating -------------------------------------------------------------------------------------

def test_nothing_drained_is_plain_throttling():
    plain, combined = quality(P, P2, 385.0), separated_quality(P, P2, 385.0, 0.0, 3.0, STEAM)
    assert combined.x == pytest.approx(plain.x, abs=1e-14)
    assert (combined.drain_fraction, combined.status) == (0.0, Status.OK)
    assert separated_reading(P, plain.x, P2, 0.0).T_exhaust == pytest.approx(385.0, abs=1e-6)


def test_reading_and_quality_are_inverse():
    x, z = np.array([0.70, 0.88, 0.93]), np.array([0.28, 0.09, 0.05])
    seen = separated_reading(P, x, P2, z, heat_loss=4000.0)
    back = separated_quality(P, P2, seen.T_exhaust, z * 10.0, 10.0, TOTAL, heat_loss=4000.0)
    assert (seen.status == Status.OK).all()
    assert back.x == pytest.approx(x, abs=1e-9)
    assert back.x_throttled == pytest.approx(seen.x_throttled)
    assert separated_quality(P, P2, seen.T_exhaust, z * 10.0, (1 - z) * 10.0, STEAM, heat_loss=4000.0).x \
        == pytest.approx(x, abs=1e-9)


def test_the_textbook_formula():
    result = separated_quality(P, P2, 385.0, 0.3, 3.0, STEAM)
    assert result.x == pytest.approx(quality(P, P2, 385.0).x * 3.0 / 3.3, rel=1e-12)
    assert separated_quality(P, P2, 385.0, 0.3, 3.0, TOTAL).x == pytest.approx(quality(P, P2, 385.0).x * 2.7 / 3.0)


def test_the_basis_is_asked_and_never_assumed():
    for basis in (None, "condensate"):
        with pytest.raises(InputError, match="basis of the weighed mass: .* needs one of 'throttled steam condensed'"):
            separated_quality(P, P2, 385.0, 0.3, 3.0, basis)
    assert separated_quality(P, P2, 385.0, 0.3, 3.0, TOTAL).x < separated_quality(P, P2, 385.0, 0.3, 3.0, STEAM).x


def test_heat_lost_by_the_vessel_was_not_water_in_the_line():
    with_loss = separated_quality(P, P2, 385.0, 0.3, 3.0, STEAM, vessel_loss=5000.0)
    without = separated_quality(P, P2, 385.0, 0.3, 3.0, STEAM)
    assert with_loss.x - without.x == pytest.approx(5000.0 / 2.0477e6, rel=1e-3)  # h_fg at 8 bar


def test_a_separator_below_line_pressure_keeps_the_energy_balance():
    seen = separated_reading(P, 0.88, P2, 0.09, p_separator=6e5)
    back = separated_quality(P, P2, seen.T_exhaust, 0.09, 1.0, TOTAL, p_separator=6e5)
    assert back.x == pytest.approx(0.88, abs=1e-9)
    # the water flashes a little on the way, so less of it is left for the throttle
    assert seen.x_throttled > separated_reading(P, 0.88, P2, 0.09).x_throttled


def test_wet_exhaust_gives_a_bound_not_a_number():
    result = separated_quality(P, P2, 373.0, 0.3, 3.0, TOTAL)
    assert result.status == Status.NOT_SUPERHEATED and np.isnan(result.x)
    assert result.x_bound == pytest.approx(0.9 * least_quality(P, P2, 0.0), abs=1e-6)


def test_statuses_of_an_array():
    T = np.array([373.0, 376.0, 385.0, 480.0, np.nan, 5000.0])
    result = separated_quality(P, P2, T, 0.003, 3.0, STEAM, least_superheat=5.0)
    assert [Status(s).name for s in result.status] == [
        "NOT_SUPERHEATED", "THIN_MARGIN", "OK", "LINE_SUPERHEATED", "MISSING", "OUT_OF_RANGE"]
    assert result.line_superheat[3] > 0 == result.line_superheat[2]
    assert np.isnan(result.x[[0, 3, 4, 5]]).all() and np.isfinite(result.x[[1, 2]]).all()


def test_all_faults_of_a_combined_reading_at_once():
    with pytest.raises(InputError) as caught:
        separated_quality(P, 9e5, 5000.0, 4.0, 3.0, TOTAL)
    assert {f.name for f in caught.value.faults} == {"p_exhaust", "T_exhaust", "weighed_mass"}
    with pytest.raises(InputError, match="needs at most the line pressure"):
        separated_quality(P, P2, 385.0, 0.3, 3.0, STEAM, p_separator=9e5)
    with pytest.raises(InputError, match="no more than the water there is"):
        separated_reading(P, 0.95, P2, 0.2)


def test_drained_volume_and_flash():
    assert drained_mass(1e-3, 343.15) < drained_mass(1e-3, 293.15) < 1.0
    assert flash_fraction(P, P) == 0
    assert (np.diff(flash_fraction(np.array([2e5, 8e5, 2e6]), P2)) > 0).all()
    with pytest.raises(InputError, match="cooled well below boiling"):
        drained_mass(1e-3, 400.0)


def test_draining_what_is_needed_just_makes_it_readable():
    need = drain_needed(P, np.array([0.70, 0.88, 0.94]), P2, 5.0, heat_loss=3000.0)
    seen = separated_reading(P, np.array([0.70, 0.88, 0.94]), P2, need.drain_fraction, heat_loss=3000.0)
    assert seen.superheat == pytest.approx([5.0] * 3, abs=1e-6)
    assert (need.water_share < 1).all() and (np.diff(need.drain_fraction) < 0).all()
    assert need.water_share == pytest.approx(need.drain_fraction / np.array([0.30, 0.12, 0.06]))


def test_nothing_needs_draining_where_throttling_reads_it():
    need = drain_needed(P, 0.98, P2)
    assert (need.drain_fraction, need.water_share, need.status) == (0.0, 0.0, Status.OK)
    assert need.x_throttled == pytest.approx(0.98)


def test_no_draining_helps_a_line_at_low_pressure():
    need = drain_needed(1.2e5, 0.9, P2, 5.0)
    assert need.status == Status.NOT_SUPERHEATED and np.isnan(need.drain_fraction)


def test_a_losing_vessel_needs_more_drained():
    assert drain_needed(P, 0.9, P2, vessel_loss=5000.0).drain_fraction > drain_needed(P, 0.9, P2).drain_fraction


def test_a_loss_beyond_all_steam_is_refused():
    with pytest.raises(InputError, match="a loss that leaves the line wet or superheated"):
        separated_quality(P, P2, 385.0, 0.3, 3.0, STEAM, vessel_loss=-3e6)


def test_what_was_drained_puts_the_quality_together_again():
    seen = separated_reading(P, 0.88, P2, 0.09, p_separator=6e5, vessel_loss=3000.0)
    assert combined_quality(P, seen.x_throttled, drain_fraction=0.09, p_separator=6e5, vessel_loss=3000.0) \
        == pytest.approx(0.88, abs=1e-12)
    share = 0.09 / ((1 - seen.x_throttled) * 0.91 + 0.09)
    assert drained_fraction(P, 0.88, share, p_separator=6e5, vessel_loss=3000.0) == pytest.approx(0.09, abs=1e-12)
    assert combined_quality(P, seen.x_throttled, water_share=share, p_separator=6e5, vessel_loss=3000.0) \
        == pytest.approx(0.88, abs=1e-12)


def test_a_better_separator_reaches_further_and_dry_steam_has_nothing_to_drain():
    reach = combined_quality(P, 0.96, water_share=np.array([0.0, 0.5, 0.9]))
    assert reach[0] == pytest.approx(0.96) and (np.diff(reach) < 0).all()
    assert combined_quality(P, np.array([1.0, 1.02]), water_share=0.9) == pytest.approx([1.0, 1.02])
    with pytest.raises(InputError, match="needs one of drain_fraction and water_share"):
        combined_quality(P, 0.96)


# --- electric ---------------------------------------------------------------------------------------

M = 12 / 3600


def test_electric_reading_and_quality_are_inverse():
    x = np.array([0.5, 0.9, 0.99])
    power = power_needed(6e5, x, 5.9e5, M, 20.0, power_loss=15.0)
    seen = heater_reading(6e5, x, 5.9e5, power, M, power_loss=15.0)
    assert seen.superheat == pytest.approx([20.0] * 3, abs=1e-6)
    assert electric_quality(6e5, 5.9e5, seen.T_heater, power, M, power_loss=15.0).x == pytest.approx(x, abs=1e-9)


def test_one_per_cent_of_power_is_0_12_points():
    seen = heater_reading(6e5, 0.90, 6e5, 853.0, M)
    off = electric_quality(6e5, 6e5, seen.T_heater, 853.0 * 1.01, M).x
    assert (off - 0.90) * 100 == pytest.approx(-0.12, abs=0.005)


def test_overlooked_heater_loss_makes_the_line_look_wetter():
    seen = heater_reading(6e5, 0.90, 6e5, 853.0, M, power_loss=20.0)
    assert electric_quality(6e5, 6e5, seen.T_heater, 853.0, M).x < 0.90


def test_a_little_power_is_a_thermometer_away_from_throttling():
    T = exhaust_temperature(1e6, 0.98, P2).T_exhaust
    assert electric_quality(1e6, P2, T, 1e-9, M).x == pytest.approx(quality(1e6, P2, T).x, abs=1e-9)


def test_electric_statuses():
    T = np.array([430.0, 435.0, 470.0, 600.0, np.nan, 1.0])
    result = electric_quality(6e5, 6e5, T, 400.0, M, least_superheat=5.0)
    assert [Status(s).name for s in result.status] == [
        "NOT_SUPERHEATED", "THIN_MARGIN", "OK", "LINE_SUPERHEATED", "MISSING", "OUT_OF_RANGE"]
    assert result.x_bound[0] == pytest.approx(1 - 400.0 / M / 2.0857e6, abs=1e-4)
    assert result.line_superheat[3] > 0


def test_too_little_power_only_dries():
    seen = heater_reading(6e5, 0.90, 6e5, 300.0, M)
    assert seen.status == Status.NOT_SUPERHEATED and seen.superheat == pytest.approx(0, abs=1e-9)
    assert 0.90 < seen.x_heater < 1
    assert power_needed(1e6, 1.0, P2, M, 5.0) == 0.0  # the throttle does it alone


def test_electric_refusals():
    with pytest.raises(InputError) as caught:
        electric_quality(6e5, 7e5, 440.0, 100.0, -1.0, power_loss=200.0)
    assert {f.name for f in caught.value.faults} == {"p_heater", "sample_flow", "power_loss"}
    with pytest.raises(InputError, match="the steam would pass 1073.15 K"):
        heater_reading(6e5, 0.9, 6e5, 1e5, M)
    with pytest.raises(InputError, match="electric power: .* needs a power that fits the sample flow"):
        electric_quality(6e5, 6e5, 440.0, 1e5, M)


def test_the_electric_reach_is_what_the_power_just_superheats():
    power = np.array([500.0, 852.6, 1200.0])
    least = least_electric_quality(6e5, 5.9e5, power, M, 5.0, power_loss=15.0)
    assert heater_reading(6e5, least, 5.9e5, power, M, power_loss=15.0).superheat == pytest.approx([5.0] * 3, abs=1e-6)
    assert (np.diff(least) < 0).all()
    with pytest.raises(InputError, match="less than the power"):
        least_electric_quality(6e5, 5.9e5, 10.0, M, power_loss=15.0)
