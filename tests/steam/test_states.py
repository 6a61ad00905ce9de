"""Vapour and (p, h), (p, s) states: phase, inverses, directions, and the words of every refusal."""

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from engine.steam import (
    P_SAT_MAX,
    P_TRIPLE,
    T_MAX,
    InputError,
    SteamStatus,
    saturated,
    saturation_temperature,
    state_ph,
    state_ps,
    vapour,
)
from engine.steam.states import search_T, search_T_ph

PRESSURE = st.floats(P_TRIPLE, P_SAT_MAX)
SHARE = st.floats(0.0, 1.0)
INVERSES = pytest.mark.parametrize("inverse", [state_ph, state_ps])


def between(low, high, share):
    return min(max(low + (high - low) * share, low), high)


# --- inverses ------------------------------------------------------------------------------------


@INVERSES
@given(p=PRESSURE, share=SHARE)
def test_vapour_is_found_again(inverse, p, share):
    T = between(saturation_temperature(p), T_MAX, share)
    hot = vapour(p, T)
    state = inverse(p, hot.h if inverse is state_ph else hot.s)
    assert state.x == pytest.approx(1.0, rel=1e-9)
    assert abs(state.T - T) <= 1e-9 * T
    assert (state.h, state.s, state.v) == pytest.approx((hot.h, hot.s, hot.v), rel=1e-8)


@INVERSES
@given(p=PRESSURE, x=SHARE)
def test_wet_steam_is_found_again(inverse, p, x):
    sat = saturated(p)
    h, s, v = (f + x * (g - f) for f, g in ((sat.h_f, sat.h_g), (sat.s_f, sat.s_g), (sat.v_f, sat.v_g)))
    state = inverse(p, h if inverse is state_ph else s)
    assert abs(state.T - sat.T) <= 1e-12 * sat.T
    assert state.x == pytest.approx(x, abs=1e-11)
    assert (state.h, state.s, state.v) == pytest.approx((h, s, v), rel=1e-9, abs=1e-5)


@INVERSES
def test_every_superheated_state_is_found_at_once(inverse):
    """The whole region in one array, T_MAX included: a slow neighbour must not spoil the others."""
    p = np.exp(np.linspace(np.log(P_TRIPLE), np.log(P_SAT_MAX), 120))[:, None]
    low = saturation_temperature(p)
    T = np.minimum(low + (T_MAX - low) * np.linspace(0, 1, 150) ** 2, T_MAX)
    hot = vapour(p, T)
    state = inverse(p, hot.h if inverse is state_ph else hot.s)
    np.testing.assert_allclose(state.T, T, rtol=1e-9)
    assert (state.status <= SteamStatus.SUPERHEATED).all()


@INVERSES
@pytest.mark.parametrize("p", [P_TRIPLE, 1e3, 1e5, 1e6, P_SAT_MAX])
@pytest.mark.parametrize("below", [0.0, 1e-6, 0.5, 2.0, 30.0])
def test_a_first_step_beyond_the_region_comes_back(inverse, p, below):
    """In thin hot steam cp rises with T, so the first step from saturation lands above T_MAX."""
    hot = vapour(p, T_MAX - below)
    state = inverse(p, hot.h if inverse is state_ph else hot.s)
    assert state.status is SteamStatus.SUPERHEATED
    assert abs(state.T - (T_MAX - below)) < 1e-6


@INVERSES
def test_a_state_beyond_the_region_does_not_hold_up_its_neighbours(inverse):
    hot = vapour(1e5, 500.0)
    target = hot.h if inverse is state_ph else hot.s
    state = inverse(1e5, [target, 1e9, target])
    assert state.status.tolist() == [SteamStatus.SUPERHEATED, SteamStatus.OUT_OF_RANGE, SteamStatus.SUPERHEATED]
    np.testing.assert_allclose(state.T[[0, 2]], 500.0, rtol=1e-9)


def test_the_search_stops_for_what_cannot_be_reached():
    calls = []

    def counted(p, T):
        calls.append(1)
        return vapour(p, np.minimum(T, T_MAX)).h, np.full(p.size, 2e3)

    T = search_T(np.array([1e5]), np.array([1e9]), np.array([400.0]), counted, lambda cp, T: cp)
    assert T[0] > T_MAX and len(calls) <= 3


def test_the_search_leaves_its_starting_values_alone():
    start = np.array([400.0, 400.0])
    found = search_T_ph(np.full(2, 1e5), vapour(np.full(2, 1e5), np.array([450.0, 500.0])).h, start)
    np.testing.assert_allclose(found, [450.0, 500.0], rtol=1e-9)
    np.testing.assert_array_equal(start, 400.0)


# --- directions, and the laws that hold between properties -----------------------------------------


@given(p=PRESSURE, a=SHARE, b=SHARE)
def test_hotter_vapour_has_more_enthalpy_and_entropy(p, a, b):
    low = saturation_temperature(p)
    cold, hot = sorted(between(low, T_MAX, share) for share in (a, b))
    assume(hot - cold > 1e-6)
    colder, hotter = vapour(p, cold), vapour(p, hot)
    assert colder.h < hotter.h and colder.s < hotter.s and colder.v < hotter.v


@given(p=PRESSURE, share=st.floats(0.001, 0.999))
def test_cp_is_the_slope_of_the_enthalpy_and_s_follows(p, share):
    T = between(saturation_temperature(p), T_MAX, share)
    step = min(1e-2, 0.4 * (T - saturation_temperature(p)), 0.4 * (T_MAX - T))
    above, below, here = vapour(p, T + step), vapour(p, T - step), vapour(p, T)
    # central difference: a third derivative of cp, at most 0.01 of cp per K², and the rounding of h
    tolerance = 1e-2 * step**2 * here.cp + 4e-9 * abs(here.h) * 1e-6 / step
    assert (above.h - below.h) / (2 * step) == pytest.approx(here.cp, abs=tolerance + 1e-6 * here.cp)
    assert (above.s - below.s) * T / (2 * step) == pytest.approx(here.cp, abs=tolerance + 1e-6 * here.cp)


@given(p=st.floats(1e3, P_SAT_MAX / 1.01), share=st.floats(0.05, 1.0))
def test_v_is_the_slope_of_h_along_an_isentrope(p, share):
    """dh = v dp at constant s: joins h, s and v of three evaluations."""
    step = 1e-5 * p
    T = between(saturation_temperature(1.01 * p), T_MAX - 1.0, share)
    here = vapour(p, T)
    above, below = state_ps(p + step, here.s), state_ps(p - step, here.s)
    assert (above.h - below.h) / (2 * step) == pytest.approx(here.v, rel=1e-5)


@given(p=st.floats(1e3, P_SAT_MAX / 1.01), share=st.floats(0.05, 1.0))
def test_the_sound_speed_is_that_of_an_isentropic_change(p, share):
    """w² = -v² (dp/dv)_s."""
    step = 1e-4 * p
    T = between(saturation_temperature(1.01 * p), T_MAX - 1.0, share)
    here = vapour(p, T)
    above, below = state_ps(p + step, here.s), state_ps(p - step, here.s)
    assert -here.v**2 * 2 * step / (above.v - below.v) == pytest.approx(here.sound_speed**2, rel=1e-4)


def test_thin_hot_steam_is_an_ideal_gas():
    """p v = R T with R = 461.526 J/(kg K), R7-97(2012) eq. (1)."""
    hot = vapour(P_TRIPLE, T_MAX)
    assert P_TRIPLE * hot.v == pytest.approx(461.526 * T_MAX, rel=1e-5)  # the second virial coefficient takes 1e-6
    cv = hot.cp - 461.526
    assert hot.sound_speed**2 == pytest.approx(hot.cp / cv * 461.526 * T_MAX, rel=1e-5)


@given(p=PRESSURE, a=st.floats(0.0, 1.5), b=st.floats(0.0, 1.5))
def test_more_enthalpy_never_means_colder_or_drier_by_less(p, a, b):
    sat = saturated(p)
    low, high = sorted((a, b))
    first, second = (state_ph(p, sat.h_f + y * (sat.h_g - sat.h_f)) for y in (low, high))
    assert first.T <= second.T and first.x <= second.x and first.s <= second.s and first.v <= second.v


# --- phase -----------------------------------------------------------------------------------------


@given(p=PRESSURE, below=st.floats(1e-6, 200.0))
def test_vapour_never_answers_below_saturation(p, below):
    """A microkelvin below saturation the enthalpy would be that of water, 2257 kJ/kg less at one atmosphere."""
    T = saturation_temperature(p) - below
    assume(T > 0)
    with pytest.raises(InputError, match="the saturation temperature"):
        vapour(p, T)
    result = vapour([p], T)
    assert result.status.tolist() == [SteamStatus.LIQUID]
    assert all(np.isnan(value).all() for value in result[:-1])


@given(PRESSURE)
def test_vapour_answers_at_saturation_and_one_ulp_beside_it(p):
    T = saturation_temperature(p)
    answers = vapour(p, [np.nextafter(T, 0), T, np.nextafter(T, np.inf)])
    assert (answers.status == SteamStatus.SUPERHEATED).all()
    np.testing.assert_allclose(answers.h, saturated(p).h_g, rtol=1e-11)


@INVERSES
@given(p=PRESSURE)
def test_saturated_liquid_and_vapour_are_states_however_they_were_computed(inverse, p):
    """One value at a time or in an array: their last digit may differ, the phase may not fall outside."""
    name = inverse.__name__[-1]
    alone, many = saturated(p), saturated(np.full(60, p))
    for end, x in (("f", 0.0), ("g", 1.0)):
        for value in (getattr(alone, f"{name}_{end}"), getattr(many, f"{name}_{end}")[-1]):
            one, some = inverse(p, value), inverse(np.full(60, p), value)
            assert one.x == pytest.approx(x, abs=1e-11) and np.allclose(some.x, x, rtol=0, atol=1e-11)
            assert (some.status <= SteamStatus.SUPERHEATED).all()


@INVERSES
def test_liquid_is_named_as_liquid(inverse):
    sat, name = saturated(1e6), inverse.__name__[-1]
    result = inverse(1e6, np.array([0.0, 0.999 * getattr(sat, f"{name}_f"), getattr(sat, f"{name}_g")]))
    assert result.status.tolist() == [SteamStatus.LIQUID, SteamStatus.LIQUID, SteamStatus.WET]
    assert np.isnan(result.T[:2]).all() and result.T[2] == pytest.approx(sat.T)


# --- the words of every refusal ----------------------------------------------------------------------

P_TEXT = """pressure: got {} Pa, needs 611.657 Pa to 16.529 MPa absolute
  - the saturation properties used here end there
  - check the unit, and that the pressure was meant absolute and not gauge"""
T_TEXT = """temperature: got {} K, needs more than 0 and at most 1073.15 K
  - the vapour equations end there
  - check the unit: °C or °F"""
BELOW_TEXT = """temperature: got 372 K, needs at least 372.7559 K, the saturation temperature
  - below it there is liquid, and vapour properties do not exist
  - check the pressure, and that it was meant absolute and not gauge"""
H_TEXT = """specific enthalpy: got {} J/kg, needs 417436.5 to 4160212 J/kg at this pressure
  - only wet and superheated steam are covered, up to 1073.15 K
  - check the unit and the pressure"""
S_TEXT = """specific entropy: got {} J/(kg K), needs 1302.56 to 9568.101 J/(kg K) at this pressure
  - only wet and superheated steam are covered, up to 1073.15 K
  - check the unit and the pressure"""


@pytest.mark.parametrize(("function", "arguments", "text"), [
    (vapour, (100.0, 400.0), P_TEXT.format("100")),
    (vapour, (20e6, 900.0), P_TEXT.format("2e+07")),
    (vapour, (np.nan, 400.0), P_TEXT.format("nan")),
    (vapour, (1e5, 1073.16), T_TEXT.format("1073.16")),
    (vapour, (1e5, np.inf), T_TEXT.format("inf")),
    (vapour, (1e5, np.nan), T_TEXT.format("nan")),
    (vapour, (1e5, -20.0), T_TEXT.format("-20")),
    (vapour, (0.0, 2000.0), P_TEXT.format("0") + "\n" + T_TEXT.format("2000")),
    (vapour, (1e5, 372.0), BELOW_TEXT),
    (state_ph, (1e5, 4e5), H_TEXT.format("400000")),
    (state_ph, (1e5, 5e6), H_TEXT.format("5000000")),
    (state_ph, (1e5, np.nan), H_TEXT.format("nan")),
    (state_ps, (1e5, 1000.0), S_TEXT.format("1000")),
    (state_ps, (1e5, np.inf), S_TEXT.format("inf")),
    (state_ph, (1.0, 2.6e6), P_TEXT.format("1")),
    (state_ph, (np.nan, np.nan), P_TEXT.format("nan") + "\nspecific enthalpy: got nan J/kg, needs a number"),
], ids=str)
def test_refusals_word_by_word(function, arguments, text):
    with pytest.raises(InputError) as caught:
        function(*arguments)
    assert str(caught.value) == text


@INVERSES
@pytest.mark.parametrize("p", [P_TRIPLE, 1e5, P_SAT_MAX])
def test_the_limits_named_in_a_refusal_are_themselves_accepted(inverse, p):
    with pytest.raises(InputError) as caught:
        inverse(p, -1e9)
    low, _, high, *_ = caught.value.faults[0].limit.split()
    sat, name = saturated(p), inverse.__name__[-1]
    assert float(low) == pytest.approx(getattr(sat, f"{name}_f"), rel=1e-6, abs=1e-9)
    assert float(high) == pytest.approx(getattr(vapour(p, T_MAX), name), rel=1e-6)
