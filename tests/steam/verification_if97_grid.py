"""The whole valid domain against other libraries, over dense random grids with a fixed seed.

IF97 against IF97 (CoolProp's IF97 backend, and ``iapws``): 1e-9 relative; what is found is rounding,
about 1e-14. IF97 against IAPWS-95 (CoolProp's
HEOS backend): within the tolerances of the formulation, stated at ``TOLERANCE_95``.
"""

import CoolProp.CoolProp as CP
import numpy as np
import pytest
from iapws import IAPWS97

from engine.steam import (
    P_SAT_MAX,
    P_TRIPLE,
    T_MAX,
    SteamStatus,
    if97,
    saturated,
    saturation_pressure,
    saturation_temperature,
    state_ph,
    state_ps,
    vapour,
)

IF97, IAPWS_95 = "IF97::Water", "HEOS::Water"
CODES = {"h": "H", "s": "S", "v": "D", "cp": "C", "sound_speed": "A", "T": "T"}
# The other implementation refuses pressures within 3.3e-5 of saturation, up to 2 mK here.
BESIDE = 5e-3  # K


def reference(name: str, backend: str, *inputs) -> np.ndarray:
    values = CP.PropsSI(CODES[name], *inputs, backend)
    assert np.isfinite(values).all()
    return 1 / values if name == "v" else values


def pressures(count: int, seed: int) -> np.ndarray:
    """From the triple point to the end of saturation in region 2: half spread over the decades, half over the top."""
    rng = np.random.default_rng(seed)
    decades = np.exp(rng.uniform(np.log(P_TRIPLE), np.log(P_SAT_MAX), count // 2))
    return np.concatenate([[P_TRIPLE, P_SAT_MAX], decades, rng.uniform(P_TRIPLE, P_SAT_MAX, count - count // 2 - 2)])


def superheated(count: int, seed: int) -> tuple[np.ndarray, np.ndarray]:
    """p and T over all of region 2 up to P_SAT_MAX, denser towards saturation, both ends included."""
    p = pressures(count, seed)
    lowest = saturation_temperature(p) + BESIDE
    share = np.random.default_rng(seed + 1).uniform(0, 1, count) ** 2
    share[::50], share[1::50] = 0.0, 1.0
    return p, np.where(share == 1, T_MAX, lowest + (T_MAX - lowest) * share)


@pytest.mark.parametrize("name", ["h", "s", "v", "cp", "sound_speed"])
def test_superheated_steam_against_another_if97(name):
    p, T = superheated(20_000, seed=1)
    result = vapour(p, T)
    assert (result.status == SteamStatus.SUPERHEATED).all()
    np.testing.assert_allclose(getattr(result, name), reference(name, IF97, "P", p, "T", T), rtol=1e-9)


@pytest.mark.parametrize("place", ["f", "g"])
@pytest.mark.parametrize("name", ["h", "s", "v"])
def test_saturated_states_against_another_if97(name, place):
    """h_f and s_f pass through zero at the triple point: there 1e-9 of the vaporization stands in for 1e-9 of them."""
    p = pressures(4000, seed=2)
    computed = getattr(saturated(p), f"{name}_{place}")
    atol = {"h": 1e-9 * 2.5e6, "s": 1e-9 * 9e3, "v": 0.0}[name]
    expected = reference(name, IF97, "P", p, "Q", np.full(p.size, float(place == "g")))
    np.testing.assert_allclose(computed, expected, rtol=1e-9, atol=atol)


def test_saturation_both_ways_against_another_if97():
    p = pressures(4000, seed=3)
    np.testing.assert_allclose(saturation_temperature(p), reference("T", IF97, "P", p, "Q", np.ones(p.size)), rtol=1e-9)
    T = np.random.default_rng(4).uniform(273.16, 623.15, 4000)
    expected = CP.PropsSI("P", "T", T, "Q", np.ones(T.size), IF97)
    np.testing.assert_allclose(saturation_pressure(T), expected, rtol=1e-9)


def test_wet_states_against_another_if97():
    p = pressures(4000, seed=5)
    x = np.random.default_rng(6).uniform(0, 1, p.size)
    h = reference("h", IF97, "P", p, "Q", x)
    state = state_ph(p, h)
    # x is not compared by ratio: h carries its own rounding, and x may be next to nothing
    np.testing.assert_allclose(state.x, x, rtol=0, atol=1e-9)
    np.testing.assert_allclose(state.s, reference("s", IF97, "P", p, "Q", x), rtol=1e-9, atol=1e-5)
    np.testing.assert_allclose(state.v, reference("v", IF97, "P", p, "Q", x), rtol=1e-9)


def test_compressed_water_against_another_if97():
    """Region 1 is asked for at saturation only; its kernel is right over the whole region all the same."""
    rng = np.random.default_rng(7)
    T = rng.uniform(273.16, 623.0, 10_000)
    p = saturation_pressure(T) * 1.001 + rng.uniform(0, 1, T.size) * 80e6
    computed = dict(zip(("h", "s", "v", "cp", "sound_speed"), if97.liquid_properties(p, T), strict=True))
    for name, values in computed.items():
        atol = {"h": 1e-3, "s": 1e-5}.get(name, 0.0)  # zero at the triple point
        np.testing.assert_allclose(values, reference(name, IF97, "P", p, "T", T), rtol=1e-9, atol=atol)


def test_superheated_steam_against_a_third_if97():
    p, T = superheated(1500, seed=8)
    states = [IAPWS97(P=pressure / 1e6, T=temperature) for pressure, temperature in zip(p, T, strict=True)]
    assert {state.region for state in states} == {2}
    result = vapour(p, T)
    for name, theirs in (("h", "h"), ("s", "s"), ("cp", "cp")):
        np.testing.assert_allclose(getattr(result, name) / 1e3, [getattr(s, theirs) for s in states], rtol=1e-9)
    np.testing.assert_allclose(result.v, [s.v for s in states], rtol=1e-9)
    np.testing.assert_allclose(result.sound_speed, [s.w for s in states], rtol=1e-9)


def test_saturated_states_against_a_third_if97():
    p = pressures(200, seed=9)[2:]  # without the two ends, where the other library's own limits cut in
    sat = saturated(p)
    for x, h, s, v in ((0, sat.h_f, sat.s_f, sat.v_f), (1, sat.h_g, sat.s_g, sat.v_g)):
        states = [IAPWS97(P=pressure / 1e6, x=x) for pressure in p]
        np.testing.assert_allclose(h / 1e3, [state.h for state in states], rtol=1e-9)
        np.testing.assert_allclose(s / 1e3, [state.s for state in states], rtol=1e-9)
        np.testing.assert_allclose(v, [state.v for state in states], rtol=1e-9)
        np.testing.assert_allclose(sat.T, [state.T for state in states], rtol=1e-9)


# --- against IAPWS-95 ---------------------------------------------------------------------------
#
# R7-97(2012) says that its equations represent IAPWS-95 within the tolerances asked for when they
# were made. As those we take the "Prague values" of its section 10 (from memory), agreed for the
# seams between regions: v 0.05 %, h 0.2 kJ/kg, cp 1 %, w 1 %, p_s 0.05 %, T_s 0.02 %. v, cp, w, p_s
# and T_s keep them as they are (found: 0.037 %, 0.54 %, 0.06 %, 0.018 %, 0.0017 %). h may be twice
# as far apart, one such step for either formulation (found: 0.376 kJ/kg in single-phase steam at
# 16.5 MPa and 981 K, 0.231 in saturated water, 0.239 in saturated steam); s follows from h by
# dh = T ds at one pressure.
TOLERANCE_95 = {"v": 5e-4, "cp": 1e-2, "sound_speed": 1e-2, "p": 5e-4, "T": 2e-4}  # relative
H_95 = 400.0  # J/kg


def check_against_95(name, computed, expected, T):
    if name in TOLERANCE_95:
        np.testing.assert_allclose(computed, expected, rtol=TOLERANCE_95[name])
    else:
        assert np.max(np.abs(computed - expected) * (1.0 if name == "h" else T)) <= H_95


@pytest.mark.parametrize("name", ["h", "s", "v", "cp", "sound_speed"])
def test_superheated_steam_against_iapws_95(name):
    p, T = superheated(20_000, seed=10)
    T = np.maximum(T, saturation_temperature(p) + 0.05)  # its saturation lies up to 8 mK elsewhere
    check_against_95(name, getattr(vapour(p, T), name), reference(name, IAPWS_95, "P", p, "T", T), T)


@pytest.mark.parametrize("place", ["f", "g"])
@pytest.mark.parametrize("name", ["h", "s", "v"])
def test_saturated_states_against_iapws_95(name, place):
    p = pressures(2000, seed=11)
    sat = saturated(p)
    expected = reference(name, IAPWS_95, "P", p, "Q", np.full(p.size, float(place == "g")))
    check_against_95(name, getattr(sat, f"{name}_{place}"), expected, sat.T)


def test_saturation_both_ways_against_iapws_95():
    p = pressures(2000, seed=12)
    check_against_95("T", saturation_temperature(p), reference("T", IAPWS_95, "P", p, "Q", np.ones(p.size)), None)
    T = np.random.default_rng(13).uniform(273.16, 623.15, 2000)
    check_against_95("p", saturation_pressure(T), CP.PropsSI("P", "T", T, "Q", np.ones(T.size), IAPWS_95), T)


def test_a_throttling_reading_means_the_same_in_iapws_95():
    """2 to 100 bar throttled to 0.7 to 1.5 bar with 2 to 50 K of superheat: qualities within 1e-4 (found 8e-5)."""
    rng = np.random.default_rng(14)
    p_line, p_exhaust = np.exp(rng.uniform(np.log(2e5), np.log(1e7), 5000)), rng.uniform(0.7e5, 1.5e5, 5000)
    T = saturation_temperature(p_exhaust) + rng.uniform(2, 50, 5000)
    line = saturated(p_line)
    x = (vapour(p_exhaust, T).h - line.h_f) / (line.h_g - line.h_f)
    h_f, h_g = (reference("h", IAPWS_95, "P", p_line, "Q", np.full(5000, q)) for q in (0.0, 1.0))
    x_95 = (reference("h", IAPWS_95, "P", p_exhaust, "T", T) - h_f) / (h_g - h_f)
    assert np.max(np.abs(x - x_95)) < 1e-4


# --- edges, and saturation itself -----------------------------------------------------------------

EDGES = np.array([P_TRIPLE, np.nextafter(P_TRIPLE, np.inf), 101_325.0, 1e6, np.nextafter(P_SAT_MAX, 0), P_SAT_MAX])


@pytest.mark.parametrize("p", EDGES)
def test_vapour_at_saturation_is_saturated_vapour(p):
    T = saturation_temperature(p)
    g_h, g_s = (reference(name, IF97, "P", np.array([p]), "Q", np.ones(1))[0] for name in ("h", "s"))
    for temperature in (np.nextafter(T, 0), T, np.nextafter(T, np.inf)):
        state = vapour(p, temperature)
        assert state.h == pytest.approx(g_h, rel=1e-9)
        assert state.s == pytest.approx(g_s, rel=1e-9)
        assert state.status is SteamStatus.SUPERHEATED


@pytest.mark.parametrize("p", EDGES)
@pytest.mark.parametrize("function", [state_ph, state_ps])
def test_the_ends_of_the_wet_region(p, function):
    sat, name = saturated(p), function.__name__[-1]
    f, g = getattr(sat, f"{name}_f"), getattr(sat, f"{name}_g")
    liquid, dry = function(p, f), function(p, g)
    assert (liquid.x, liquid.status) == (0.0, SteamStatus.WET) and (dry.x, dry.status) == (1.0, SteamStatus.WET)
    assert liquid.v == pytest.approx(sat.v_f, rel=1e-12) and dry.v == pytest.approx(sat.v_g, rel=1e-12)
    beyond = function(p, g + 1e-6 * abs(g))
    assert beyond.status is SteamStatus.SUPERHEATED and beyond.x == 1.0 and 0 < beyond.T - sat.T < 1e-2
    within = function(p, g - 1e-6 * abs(g))
    assert within.status is SteamStatus.WET and 1 - 1e-4 < within.x < 1 and within.T == sat.T


@pytest.mark.parametrize("p", EDGES)
def test_the_hottest_vapour_is_still_a_state(p):
    hottest = vapour(p, T_MAX)
    assert hottest.h == pytest.approx(reference("h", IF97, "P", np.array([p]), "T", np.array([T_MAX]))[0], rel=1e-9)
    for state in (state_ph(p, hottest.h), state_ps(p, hottest.s)):
        assert state.status is SteamStatus.SUPERHEATED and abs(state.T - T_MAX) < 1e-9 * T_MAX


def test_saturation_meets_its_ends():
    """IF97 puts 273.16 K at 611.657 Pa (R7-97(2012) eq. 9) and 623.15 K at its highest pressure here."""
    assert saturation_pressure(273.16) == pytest.approx(611.657, abs=5e-4)
    assert saturation_temperature(P_TRIPLE) == pytest.approx(273.16, abs=1e-9)
    assert saturation_temperature(P_SAT_MAX) == pytest.approx(623.15, abs=1e-9)
    assert saturation_temperature(saturation_pressure(273.16)) == pytest.approx(273.16, abs=1e-9)
    assert saturation_temperature(saturation_pressure(623.15)) == pytest.approx(623.15, abs=1e-9)
