"""Process paths: what stays constant on them, where they dry out, where they choke, and their shapes."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.calorimeter import constant_bore_path, exhaust_temperature, isenthalpic_path, isenthalpic_path_at
from engine.calorimeter.paths import P_PEAK, dry_out_pressure
from engine.steam import P_SAT_MAX, P_TRIPLE, T_MAX, InputError, SteamStatus, saturated, state_ph, vapour
from engine.steam.if97 import enthalpy_2, saturation_T

P1, X, P2, C1 = 10e5, 0.98, 1e5, 20.0
LINES = np.geomspace(1.2e5, 165e5, 60)[:, None, None]
QUALITIES = np.array([0.0, 0.5, 0.9, 0.97, 0.995, 1.0])[:, None]
EXHAUSTS = np.array([1e3, 20e3, 1e5])
CALLS = [(isenthalpic_path, (P1, X, P2)), (isenthalpic_path_at, (P1, 2.74e6, P2)),
         (constant_bore_path, (P1, X, P2, C1))]
every = pytest.mark.parametrize(("path", "inputs"), CALLS, ids=["isenthalpic", "isenthalpic_at", "constant_bore"])
STATE = ("p", "T", "x", "h", "s", "v", "velocity", "status")
CASE = ("p_dry", "p_choke", "mass_flux")


# --- the contract ----------------------------------------------------------------------------------------

@every
def test_scalars_give_points_and_floats(path, inputs):
    one = path(*inputs)
    assert {getattr(one, name).shape for name in STATE} == {(33,)}
    assert {type(getattr(one, name)) for name in CASE} == {float}
    assert path(*inputs, points=7).T.shape == (7,)
    assert one.status.dtype == np.int8
    assert not np.isnan([getattr(one, name) for name in STATE]).any()


@every
def test_arrays_give_what_scalars_give(path, inputs):
    p2 = np.array([[2e3, 2e4, 1e5, 5e5]])
    p1 = np.array([[6e5], [50e5]])
    many = path(p1, inputs[1], p2, *inputs[3:])
    assert {getattr(many, name).shape for name in STATE} == {(2, 4, 33)}
    assert {getattr(many, name).shape for name in CASE} == {(2, 4)}
    for i in range(2):
        for k in range(4):
            one = path(p1[i, 0], inputs[1], p2[0, k], *inputs[3:])
            for name in STATE + CASE:
                np.testing.assert_allclose(getattr(many, name)[i, k], getattr(one, name), rtol=1e-8, err_msg=name)
            assert many.chokes[i, k] == one.chokes and many.dries_out[i, k] == one.dries_out


@every
def test_empty_arrays_and_untouched_inputs(path, inputs):
    assert path(np.array([]), *inputs[1:]).T.shape == (0, 33)
    arrays = [np.full(2, v) for v in inputs]
    for a in arrays:
        a.setflags(write=False)
    assert path(*arrays).T.shape == (2, 33)


@every
def test_bad_inputs_are_refused_all_at_once(path, inputs):
    with pytest.raises(InputError) as caught:
        path(np.nan, -5.0, 1e9, *([-1.0] if len(inputs) > 3 else []))
    assert len(caught.value.faults) == len(inputs)
    assert str(caught.value).startswith("line pressure: got nan Pa, needs 611.657 Pa to 16.529 MPa absolute\n")
    with pytest.raises(InputError, match=r"exhaust pressure at position 1: got 1000000 Pa, .* less than the line"):
        path(inputs[0], inputs[1], np.array([1e5, 10e5]), *inputs[3:])


@every
@pytest.mark.parametrize("points", [4, 100_001, 33.0, "33", None])
def test_the_number_of_points_is_checked(path, inputs, points):
    with pytest.raises(InputError, match=f"points: got {points!r}, needs a whole number from 5 to 100 000"):
        path(*inputs, points=points)


def test_an_enthalpy_that_no_steam_has_is_refused():
    low, high = saturated(P1).h_f, vapour(P1, T_MAX).h
    for h in (2700.0, low - 1.0, high + 1.0):  # the first in kJ/kg by mistake
        with pytest.raises(InputError) as caught:
            isenthalpic_path_at(P1, h, P2)
        assert str(caught.value) == (
            f"specific enthalpy in the line: got {h:.7g} J/kg, needs that of wet or superheated steam\n"
            "  - the path starts between saturated water and vapour of 1073.15 K\n"
            "  - check the unit, and the line pressure")
    with pytest.raises(InputError, match="at position 1: got 2700 J/kg"):
        isenthalpic_path_at([P1, P1], [2.7e6, 2700.0], P2)
    assert isenthalpic_path_at(P1, low, P2).x[0] == 0
    assert isenthalpic_path_at(P1, high, P2).T[0] == pytest.approx(T_MAX, abs=1e-6)


# --- isenthalpic -----------------------------------------------------------------------------------------

GRID = isenthalpic_path(LINES, QUALITIES, EXHAUSTS)


def test_isenthalpic_ends_and_order():
    np.testing.assert_array_equal(GRID.p[..., 0], np.broadcast_to(LINES, GRID.p.shape[:-1]))
    np.testing.assert_array_equal(GRID.p[..., -1], np.broadcast_to(EXHAUSTS, GRID.p.shape[:-1]))
    assert (np.diff(GRID.p) < 0).all()
    assert (np.diff(isenthalpic_path(LINES, QUALITIES, EXHAUSTS, points=34).p) < 0).all()


def test_the_enthalpy_stays():
    h = GRID.h / GRID.h[..., :1] - 1
    wet = GRID.status == SteamStatus.WET
    assert np.abs(h[wet]).max() < 1e-11
    assert np.abs(h).max() < 1e-9  # where superheated, the last step of the search for T leaves 5e-7 K
    assert (GRID.velocity == 0).all() and (GRID.mass_flux == 0).all()
    assert not GRID.chokes.any()


def test_the_states_are_states_of_steam():
    wet = GRID.status == SteamStatus.WET
    assert set(np.unique(GRID.status)) == {SteamStatus.WET, SteamStatus.SUPERHEATED}
    sat = saturated(GRID.p[wet])
    for f, g, got in ((sat.h_f, sat.h_g, GRID.h), (sat.s_f, sat.s_g, GRID.s), (sat.v_f, sat.v_g, GRID.v)):
        np.testing.assert_allclose(got[wet], f + GRID.x[wet] * (g - f), rtol=1e-11)
    np.testing.assert_allclose(GRID.T[wet], sat.T, rtol=1e-14)
    hot = vapour(GRID.p[~wet], GRID.T[~wet])
    for want, got in ((hot.h, GRID.h), (hot.s, GRID.s), (hot.v, GRID.v)):
        np.testing.assert_allclose(got[~wet], want, rtol=1e-11)
    assert (GRID.x[~wet] == 1).all()
    assert ((GRID.x >= 0) & (GRID.x <= 1)).all()


def test_throttling_makes_entropy_and_volume():
    assert (np.diff(GRID.s) > 0).all()
    assert (np.diff(GRID.v) > 0).all()
    assert (np.diff(GRID.T) < 0).all()  # steam cools when throttled, wet or not


def test_the_path_meets_the_saturation_line_where_it_dries_out():
    rows = np.argwhere(GRID.dries_out & (GRID.p_dry < LINES * (1 - 1e-9)))
    assert len(rows) > 300
    for row in map(tuple, rows[::7]):
        k = np.flatnonzero(GRID.p[row] == GRID.p_dry[row])
        assert k.size == 1
        k = k[0]
        assert GRID.x[row][k] == pytest.approx(1.0, abs=1e-10)
        assert GRID.T[row][k] == pytest.approx(saturated(GRID.p_dry[row]).T, rel=1e-13)
        assert GRID.h[row][k] == pytest.approx(saturated(GRID.p_dry[row]).h_g, rel=1e-11)
        assert (GRID.status[row][:k] == SteamStatus.WET).all()
        assert (GRID.status[row][k + 1:] == SteamStatus.SUPERHEATED).all()


def test_paths_that_never_leave_the_dome():
    inside = (GRID.status == SteamStatus.WET).all(axis=-1)
    assert np.isnan(GRID.p_dry[inside]).all() and inside.sum() > 300
    assert not GRID.dries_out[inside].any()
    assert not isenthalpic_path(160e5, 0.9, 1e5).dries_out
    assert isenthalpic_path(P_SAT_MAX, 0.0, P_TRIPLE).x[-1] < 0.7


def test_the_end_of_the_path_is_what_the_thermometer_reads():
    for x in (0.90, 0.96, 1.0):
        path = isenthalpic_path(LINES.ravel(), x, 1e5)
        seen = exhaust_temperature(LINES.ravel(), x, 1e5)
        np.testing.assert_allclose(path.T[:, -1], seen.T_exhaust, rtol=1e-11)
        np.testing.assert_array_equal(path.status[:, -1] == SteamStatus.SUPERHEATED, seen.superheat > 0)


def test_dry_steam_leaves_the_dome_at_the_line_below_30_bar_and_later_above():
    """Above 30.8 bar throttled dry steam first becomes wet: h_g still rises as the pressure falls."""
    p = np.geomspace(1.2e5, P_PEAK, 200)
    low = isenthalpic_path(p, 1.0, 1e5)
    np.testing.assert_array_equal(low.p_dry, p)
    assert (low.status[:, 1:] == SteamStatus.SUPERHEATED).all()
    high = isenthalpic_path(np.geomspace(P_PEAK * 1.001, 120e5, 50), 1.0, 1e5)
    assert high.dries_out.all() and (high.p_dry < P_PEAK).all()
    assert (high.status[:, 1] == SteamStatus.WET).all()


def test_the_greatest_enthalpy_of_dry_steam():
    p = P_PEAK * np.array([0.999, 1.0, 1.001])
    h = enthalpy_2(p, saturation_T(p))
    assert h.argmax() == 1 and h[0] == pytest.approx(h[2], abs=1e-3)  # J/kg: a parabola about it


def test_dry_out_pressure_up_to_the_very_top():
    """Near 30.8 bar the enthalpy of dry steam hardly tells one pressure from another, and still does."""
    p = np.concatenate([np.geomspace(P_TRIPLE * 1.001, P_PEAK, 2000), P_PEAK * (1 - np.geomspace(1e-3, 0.1, 200))])
    h = enthalpy_2(p, saturation_T(p))
    found = dry_out_pressure(h, np.full(p.shape, 100e5))
    assert np.abs(enthalpy_2(found, saturation_T(found)) / h - 1).max() < 1e-13
    assert np.abs(found / p - 1).max() < 1e-6
    np.testing.assert_array_equal(dry_out_pressure(h, p), p)
    none = dry_out_pressure(np.array([2.4e6, 2.9e6, 2.7e6]), np.array([1e6, 100e5, 1e5]))
    assert np.isnan(none).all()  # wet at the triple pressure, hotter than any dry steam, superheated already


def test_a_superheated_line():
    path = isenthalpic_path_at(P1, vapour(P1, 500.0).h, P2)
    assert (path.status == SteamStatus.SUPERHEATED).all()
    assert not path.dries_out
    assert path.T[0] == pytest.approx(500.0, abs=1e-6)


def test_superheated_steam_of_high_pressure_becomes_wet_and_dry_again():
    path = isenthalpic_path_at(100e5, vapour(100e5, 590.0).h, P2, points=200)
    assert path.status[0] == SteamStatus.SUPERHEATED and path.status[-1] == SteamStatus.SUPERHEATED
    assert (path.status == SteamStatus.WET).sum() > 10
    assert path.dries_out and path.p_dry < P_PEAK
    at = np.flatnonzero(path.p == path.p_dry)[0]
    assert path.x[at] == pytest.approx(1.0, abs=1e-10) and (path.status[at + 1:] == SteamStatus.SUPERHEATED).all()
    np.testing.assert_allclose(path.h, path.h[0], rtol=1e-9)


def test_from_an_enthalpy_as_from_a_quality():
    a, b = isenthalpic_path(P1, X, P2), isenthalpic_path_at(P1, isenthalpic_path(P1, X, P2).h[0], P2)
    for name in STATE + ("p_dry",):
        np.testing.assert_allclose(getattr(a, name), getattr(b, name), rtol=1e-13)


# --- constant bore ---------------------------------------------------------------------------------------

def brute_force(path, p_line, p_exhaust, c, n=4001):
    """Entropy over pressure by plain bisection on h, state by state, without the path's own search."""
    h0 = path.h[0] + 0.5 * c * c
    p = np.geomspace(p_line, p_exhaust, n)
    low, high = np.full(n, saturated(p_exhaust).h_f), np.full(n, h0)
    for _ in range(60):
        h = 0.5 * (low + high)
        state = state_ph(p, h)
        over = ~(h + 0.5 * (path.mass_flux * state.v) ** 2 <= h0)  # liquid has no volume here: too low
        over = over & (state.status <= SteamStatus.SUPERHEATED)
        low, high = np.where(over, low, h), np.where(over, h, high)
    return p, state_ph(p, high).s


BORES = [(1.2e5, 0.995, 1e5, 10.0), (3e5, 0.98, 1e5, 40.0), (10e5, 0.98, 1e5, 20.0), (10e5, 0.98, 1e5, 60.0),
         (10e5, 0.90, 1e5, 60.0), (10e5, 1.0, 1e4, 30.0), (40e5, 0.95, 2e4, 10.0), (100e5, 1.0, 1e5, 10.0),
         (165e5, 0.9, 1e5, 3.0), (5e5, 0.995, 2e3, 125.0), (10e5, 0.98, 1e5, 300.0), (10e5, 0.98, 5e5, 460.0)]


@pytest.mark.parametrize("case", BORES)
def test_constant_bore_against_a_brute_force(case):
    p1, x, p2, c = case
    path = constant_bore_path(p1, x, p2, c)
    p, s = brute_force(path, p1, p2, c)
    np.testing.assert_allclose(np.interp(-np.log(path.p), -np.log(p), s), path.s, rtol=2e-6)
    top = int(s.argmax())
    assert path.chokes == (top < len(p) - 1)
    if path.chokes:
        step = np.log(p1 / p2) / (len(p) - 1)
        assert abs(np.log(path.p_choke / p[top])) < 1.5 * step
        assert path.p[-1] == path.p_choke > p2
    else:
        assert path.p[-1] == p2 and np.isnan(path.p_choke)


def test_some_of_them_choke_and_some_do_not():
    chokes = [constant_bore_path(*case).chokes for case in BORES]
    assert 3 <= sum(chokes) <= len(BORES) - 3


@settings(max_examples=60, deadline=None)
@given(st.floats(np.log(1.2e5), np.log(165e5)), st.floats(0.8, 1.0), st.floats(0.02, 1.0), st.floats(0.0, np.log(440)))
def test_on_a_constant_bore(log_p1, x, share, log_c):
    p1, c = float(np.exp(log_p1)), float(np.exp(log_c))
    p2 = float(np.exp(log_p1 + share * (np.log(1e3) - log_p1)))
    path = constant_bore_path(p1, x, p2, c)
    energy = path.h + 0.5 * path.velocity**2
    assert np.abs(energy / energy[0] - 1).max() < 1e-9
    np.testing.assert_allclose(path.velocity / path.v, path.mass_flux, rtol=1e-13)
    assert path.velocity[0] == pytest.approx(c, rel=1e-11)
    assert (np.diff(path.p) < 0).all() and (np.diff(path.velocity) > 0).all()
    assert (np.diff(path.s) > -1e-6).all()  # J/(kg K): entropy never falls
    if path.dries_out and path.p_dry < p1 * (1 - 1e-9):
        k = np.flatnonzero(path.p == path.p_dry)[0]
        # the search for p_dry stops at 1e-8 of its logarithm
        assert path.x[k] == pytest.approx(1.0, abs=1e-6)
        assert path.T[k] == pytest.approx(saturated(path.p_dry).T, abs=1e-5)


def test_slow_flow_is_isenthalpic():
    slow, still = constant_bore_path(P1, X, P2, 1e-3), isenthalpic_path(P1, X, P2)
    assert slow.p_dry == pytest.approx(still.p_dry, rel=1e-7)
    assert slow.T[-1] == pytest.approx(still.T[-1], abs=1e-5)
    at_rest = constant_bore_path(P1, X, P2, 0.0)
    assert (at_rest.velocity == 0).all() and at_rest.mass_flux == 0
    assert at_rest.T[-1] == pytest.approx(still.T[-1], abs=1e-6)


def test_faster_is_colder_and_chokes_earlier():
    path = constant_bore_path(P1, X, P2, np.array([1.0, 10.0, 20.0, 40.0, 80.0, 160.0, 320.0]))
    assert (np.diff(path.T[:3, -1]) < 0).all()
    assert list(path.chokes) == [False] * 4 + [True] * 3
    assert (np.diff(path.p_choke[4:]) > 0).all()


def test_at_choking_the_velocity_is_the_sound_velocity():
    """Dry exhaust: the greatest entropy on the path is at Mach 1."""
    path = constant_bore_path(5e5, 1.0, 1e3, 40.0)
    assert path.chokes and path.status[-1] == SteamStatus.SUPERHEATED
    assert path.velocity[-1] == pytest.approx(vapour(path.p[-1], path.T[-1]).sound_speed, rel=2e-3)


def test_a_line_faster_than_sound_is_choked_where_it_stands():
    path = constant_bore_path(P1, X, P2, 800.0)
    assert path.chokes and path.p_choke == pytest.approx(P1, rel=2e-9)
    assert path.velocity == pytest.approx(np.full(33, 800.0), rel=1e-6)
