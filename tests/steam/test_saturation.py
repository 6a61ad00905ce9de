"""Saturation: ends, directions, inverses, the laws that hold along it, and the dome of the diagrams."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.steam import (
    P_SAT_MAX,
    P_TRIPLE,
    InputError,
    SteamStatus,
    dome,
    saturated,
    saturation_pressure,
    saturation_temperature,
)
from engine.steam.saturation import P_CRITICAL, T_CRITICAL, T_SAT_MAX, T_TRIPLE

PRESSURE = st.floats(P_TRIPLE, P_SAT_MAX)
TEMPERATURE = st.floats(T_TRIPLE, T_SAT_MAX)
P = np.exp(np.linspace(np.log(P_TRIPLE), np.log(P_SAT_MAX), 4000))
P[0], P[-1] = P_TRIPLE, P_SAT_MAX


@given(PRESSURE)
def test_pressure_to_temperature_and_back(p):
    """One ulp of T is up to 1e-15 of p times T dp/dT / p, at most 20."""
    assert saturation_pressure(saturation_temperature(p)) == pytest.approx(p, rel=1e-12)


@given(TEMPERATURE)
def test_temperature_to_pressure_and_back(T):
    assert saturation_temperature(saturation_pressure(T)) == pytest.approx(T, rel=1e-12)


@given(PRESSURE, PRESSURE)
def test_a_higher_pressure_boils_hotter(a, b):
    lower, higher = sorted((a, b))
    if higher - lower > 1e-9 * higher:
        assert saturation_temperature(lower) < saturation_temperature(higher)


def test_directions_along_saturation():
    sat = saturated(P)
    for rising in (sat.T, sat.h_f, sat.s_f):
        assert (np.diff(rising) > 0).all()
    for falling in (sat.s_g, sat.v_g, sat.h_g - sat.h_f, sat.v_g - sat.v_f):
        assert (np.diff(falling) < 0).all()
    summit = P[sat.h_g.argmax()]
    assert summit == pytest.approx(30.8e5, rel=0.02)  # h_g rises to 2803 kJ/kg there and falls again (computed)


def test_water_takes_least_room_at_4_degrees():
    """From memory: 277.13 K, 1000 kg/m³ (999.97 at one atmosphere)."""
    T = np.linspace(T_TRIPLE, 290.0, 3000)
    sat = saturated(saturation_pressure(T))
    assert T[sat.v_f.argmin()] == pytest.approx(277.13, abs=0.1)
    assert sat.v_f.min() == pytest.approx(1 / 999.93, rel=1e-5)


def test_the_phases_are_in_equilibrium():
    """Equal Gibbs energies, h_fg = T s_fg: R7-97(2012) keeps them within 0.2 kJ/kg (section 10, from memory)."""
    sat = saturated(P)
    assert np.abs(sat.h_g - sat.h_f - sat.T * (sat.s_g - sat.s_f)).max() < 200.0


def test_clapeyron():
    """dp/dT = h_fg / (T v_fg), with the slope of eq. (30) by central differences; within 0.05 % plus 0.05 %."""
    T = np.linspace(274.0, 622.0, 500)
    step = 1e-3
    slope = (saturation_pressure(T + step) - saturation_pressure(T - step)) / (2 * step)
    sat = saturated(saturation_pressure(T))
    np.testing.assert_allclose(slope, (sat.h_g - sat.h_f) / (T * (sat.v_g - sat.v_f)), rtol=1e-3)


def test_the_triple_point_is_where_liquid_has_no_energy_and_no_entropy():
    """R7-97(2012): u' and s' are zero by definition; the equations give h' = 0.611783 J/kg (section 5, from memory)."""
    sat = saturated(P_TRIPLE)
    assert sat.h_f == pytest.approx(0.611783, abs=1e-3)
    assert sat.h_f - P_TRIPLE * sat.v_f == pytest.approx(0.0, abs=1e-3)
    assert sat.s_f == pytest.approx(0.0, abs=1e-4)  # 1e-7 kJ/(kg K); two other IF97 libraries give the same -6e-5


@pytest.mark.parametrize("p", [P_TRIPLE, P_SAT_MAX, P_TRIPLE * (1 - 1e-13), P_SAT_MAX * (1 + 1e-13)])
def test_the_ends_belong_to_it_and_so_does_their_rounding(p):
    assert saturated(p).status is SteamStatus.WET
    assert T_TRIPLE - 1e-9 < saturation_temperature(p) < T_SAT_MAX + 1e-9


@pytest.mark.parametrize("p", [P_TRIPLE * (1 - 1e-9), P_SAT_MAX * (1 + 1e-9), 0.0, -1e5, np.inf, -np.inf, np.nan])
@pytest.mark.parametrize("function", [saturated, saturation_temperature])
def test_other_pressures_are_refused(function, p):
    with pytest.raises(InputError) as caught:
        function(p)
    (fault,) = caught.value.faults
    assert fault.name == "p" and fault.limit == "611.657 Pa to 16.529 MPa absolute" and fault.index is None
    assert str(caught.value).splitlines()[1:] == [
        "  - the saturation properties used here end there",
        "  - check the unit, and that the pressure was meant absolute and not gauge"]


@pytest.mark.parametrize("T", [T_TRIPLE - 1e-6, T_SAT_MAX + 1e-6, 0.0, -10.0, np.inf, np.nan])
def test_other_temperatures_are_refused(T):
    with pytest.raises(InputError, match=r"^temperature: got \S+ K, needs 273.16 to 623.15 K\n"):
        saturation_pressure(T)


def test_each_bad_element_is_named_by_its_place():
    with pytest.raises(InputError) as caught:
        saturation_temperature([[1e5, np.nan], [2e5, 1e9]])
    assert [fault.index for fault in caught.value.faults] == [(0, 1), (1, 1)]
    assert "pressure at position 1, 1: got 1e+09 Pa" in str(caught.value)


def test_an_array_keeps_its_good_elements():
    sat = saturated([1e5, np.nan, 1e9])
    assert sat.status.tolist() == [SteamStatus.WET, SteamStatus.MISSING, SteamStatus.OUT_OF_RANGE]
    assert sat.h_g[0] == saturated([1e5]).h_g[0]
    assert all(np.isnan(value[1:]).all() for value in sat[:-1])


def test_the_dome_is_whole_and_closes_at_the_critical_point():
    """T_c, p_c: R7-97(2012) eqs. (2), (3); h_c = 2084.3 kJ/kg at 322 kg/m³ (from memory, to its last digits)."""
    curve = dome()
    assert (curve.p[0], curve.T[0]) == pytest.approx((P_TRIPLE, T_TRIPLE), rel=1e-9)
    assert (curve.p[-1], curve.T[-1]) == (P_CRITICAL, T_CRITICAL)
    assert curve.h_f[-1] == curve.h_g[-1] == pytest.approx(2084.3e3, rel=5e-3)
    assert curve.v_f[-1] == curve.v_g[-1] == pytest.approx(1 / 322, rel=0.02)
    for rising in (curve.p, curve.T, curve.h_f, curve.s_f, -curve.s_g, -curve.v_g):
        assert (np.diff(rising) > 0).all()
    assert np.isfinite(np.array(curve)).all()


def test_the_dome_has_no_step_where_it_changes_hands():
    """Below 623.15 K our own equations, above it region 3: within the 0.2 kJ/kg of R7-97(2012) section 10."""
    curve = dome()
    last = int(np.searchsorted(curve.T, T_SAT_MAX, side="right")) - 1
    for h in (curve.h_f, curve.h_g):
        # the slope across the seam lies between those on both sides
        slopes = np.diff(h[last - 1:last + 3]) / np.diff(curve.T[last - 1:last + 3])
        assert min(slopes[0], slopes[2]) < slopes[1] < max(slopes[0], slopes[2])


def test_the_dome_is_shared_and_cannot_be_written_to():
    assert dome() is dome()
    with pytest.raises(ValueError, match="read-only"):
        dome().p[0] = 0.0
