"""The reach over pressures against IAPWS-95, recomputed with CoolProp, and against tables computed with it before."""

import CoolProp
import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

from engine.calorimeter import (
    exhaust_pressure_for,
    least_quality,
    line_pressure_window,
    reach,
    reach_map,
    reading_chart,
    ways_out,
)
from engine.steam.units import P_STANDARD, ZERO_CELSIUS

water = CoolProp.AbstractState("HEOS", "Water")


def saturated_95(p, Q):
    water.update(CoolProp.PQ_INPUTS, p, Q)
    return water.T(), water.hmass()


def needed_95(p_exhaust, superheat):
    T, h = saturated_95(p_exhaust, 1)
    if superheat:
        water.update(CoolProp.PT_INPUTS, p_exhaust, T + superheat)
        h = water.hmass()
    return h


def least_95(p_line, p_exhaust, superheat=5.0, loss=0.0):
    h_f, h_g = saturated_95(p_line, 0)[1], saturated_95(p_line, 1)[1]
    return (needed_95(p_exhaust, superheat) + loss - h_f) / (h_g - h_f)


# exhaust to a condenser at 0.2 bar, 5 K: line pressure bar, least quality; computed
CONDENSER = [(1.5, 0.967), (2, 0.960), (5, 0.939), (10, 0.921), (40, 0.894)]
# line at 10 bar, 5 K: exhaust pressure kPa, least quality; computed
BACK_PRESSURE = [(75, 0.948), (101, 0.955), (110, 0.957), (120, 0.959), (150, 0.964), (200, 0.970)]


def test_condenser_and_back_pressure_tables():
    lines, printed = np.array(CONDENSER).T
    wetness = reach_map(lines * 1e5, 20e3).wetness[0]
    assert 1 - wetness == pytest.approx(printed, abs=5.5e-4)
    assert 1 - wetness == pytest.approx(np.array([least_95(p * 1e5, 20e3) for p in lines]), abs=1e-4)
    exhausts, printed = np.array(BACK_PRESSURE).T
    wetness = reach_map(10e5, exhausts * 1e3).wetness[:, 0]
    assert 1 - wetness == pytest.approx(printed, abs=5.5e-4)
    assert 1 - wetness == pytest.approx(np.array([least_95(10e5, p * 1e3) for p in exhausts]), abs=1e-4)


# heat loss of 4 kJ/kg and 0.4 K for the thermometer, beside the plain case
@pytest.mark.parametrize(("loss", "U"), [(0.0, 0.0), (4e3, 0.4)])
@pytest.mark.parametrize(("p1", "p2"), [(1.5e5, 101e3), (10e5, 101e3), (10e5, 200e3), (40e5, 20e3), (100e5, 101e3)])
def test_superheat_at_both_ends_against_iapws_95(p1, p2, loss, U):
    found = reach(p1, p2, 0.96, 1.0, heat_loss=loss, U_thermometer=U)
    assert found.x_least == pytest.approx(least_95(p1, p2, 5.0 + U, loss), abs=1e-4)
    assert found.x_comfortable == pytest.approx(least_95(p1, p2, 10.0 + U, loss), abs=1e-4)
    T_sat = saturated_95(p2, 1)[0]
    for x, superheat in ((0.96, found.superheat_low), (1.0, found.superheat_high)):
        h_f, h_g = saturated_95(p1, 0)[1], saturated_95(p1, 1)[1]
        water.update(CoolProp.HmassP_INPUTS, h_f + x * (h_g - h_f) - loss, p2)
        assert superheat == pytest.approx(water.T() - T_sat, abs=0.1)


@pytest.mark.parametrize(("p1", "x"), [(1.51e5, 0.97), (6e5, 0.94), (10e5, 0.97), (40e5, 0.90), (90e5, 0.96)])
def test_exhaust_pressure_against_iapws_95(p1, x):
    found = exhaust_pressure_for(p1, x)
    reference = brentq(lambda p: least_95(p1, p) - x, 700.0, 0.9 * p1)
    # 1e-4 of quality, at 4 to 20 %pt per factor e of the exhaust pressure
    assert np.log(found.p_exhaust / reference) == pytest.approx(0.0, abs=4e-3)
    assert least_95(p1, found.p_exhaust) == pytest.approx(x, abs=1e-4)


@pytest.mark.parametrize(("p2", "near"), [(20e3, 48e5), (P_STANDARD, 41e5)])  # computed
def test_the_best_line_pressure_against_iapws_95(p2, near):
    found = line_pressure_window(0.95, p2)
    top = minimize_scalar(lambda p: least_95(p, p2), bounds=(20e5, 80e5), method="bounded", options={"xatol": 10.0})
    assert found.p_best == pytest.approx(top.x, rel=0.01)  # flat: 1 % of it is 1e-6 of quality
    assert found.x_least == pytest.approx(top.fun, abs=1e-4)
    assert found.p_best == pytest.approx(near, rel=0.02)


@pytest.mark.parametrize(("x", "p2"), [(0.94, P_STANDARD), (0.97, P_STANDARD), (0.999, P_STANDARD), (0.91, 20e3)])
def test_the_window_of_line_pressures_against_iapws_95(x, p2):
    found = line_pressure_window(x, p2)
    low = brentq(lambda p: least_95(p, p2) - x, 1.05 * p2, 35e5)
    high = brentq(lambda p: least_95(p, p2) - x, 45e5, 160e5)
    assert found.p_low == pytest.approx(low, rel=0.01)
    assert found.p_high == pytest.approx(high, rel=0.01)
    assert least_95(found.p_low, p2) == pytest.approx(x, abs=1e-4)
    # above 100 bar the formulations part by a little more
    assert least_95(found.p_high, p2) == pytest.approx(x, abs=1e-4 if found.p_high < 100e5 else 2e-4)


def test_a_printed_chart_against_iapws_95():
    chart = reading_chart(10e5, P_STANDARD)
    h_f, h_g = saturated_95(10e5, 0)[1], saturated_95(10e5, 1)[1]
    for T, x in zip(chart.T_exhaust, chart.x, strict=True):
        water.update(CoolProp.PT_INPUTS, P_STANDARD, T)
        assert x == pytest.approx((water.hmass() - h_f) / (h_g - h_f), abs=1e-4)
    assert chart.T_dry - ZERO_CELSIUS == pytest.approx(150.3, abs=0.06)  # computed
    assert chart.x_least == pytest.approx(0.9547, abs=1e-4)  # computed


def test_a_very_wet_line_at_8_bar():
    """8 bar, x = 0.88: throttling reads down to 0.960 at best; drained of 9 %, what is left is 0.967 (computed)."""
    assert least_quality(8e5, P_STANDARD) == pytest.approx(0.960, abs=1e-3)
    ways = {way.kind.name: way for way in ways_out(8e5, P_STANDARD, 0.88, sample_flow=30 / 3600)}
    numbers = ways["SEPARATOR"].numbers
    assert numbers["drain_fraction"] == pytest.approx(1 - 0.88 / least_95(8e5, P_STANDARD), abs=1e-4)
    assert numbers["drain_fraction"] < 0.09 and numbers["x_throttled"] < 0.967
    h_f, h_g = saturated_95(8e5, 0)[1], saturated_95(8e5, 1)[1]
    watts = 30 / 3600 * (needed_95(P_STANDARD, 5.0) - h_f - 0.88 * (h_g - h_f))
    assert ways["HEATER"].numbers["power"] == pytest.approx(watts, rel=2e-3)
