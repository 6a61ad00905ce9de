"""Throttling, paths, velocities and choked flow against published examples and against IAPWS-95.

Where a table is marked "computed", it was computed with IAPWS-95 when this test was written, and the
test computes it again with CoolProp's IAPWS-95. Over the range of the instrument the two formulations
part by less than 1e-4 in quality.
"""

import CoolProp
import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

from engine.calorimeter import (
    bore_ratio_keeping_velocity,
    constant_bore_path,
    critical_flow,
    exhaust_temperature,
    isenthalpic_path,
    isenthalpic_path_at,
    kinetic_quality,
    kinetic_superheat,
    least_exhaust_bore,
    least_quality,
    quality,
    velocity,
)
from engine.steam import saturated, saturation_temperature, vapour
from engine.steam.units import P_STANDARD, ZERO_CELSIUS, from_si, to_si

FORMULATIONS = 1e-4  # quality, between IF97 and IAPWS-95 over the range of the instrument
water = CoolProp.AbstractState("HEOS", "Water")


def bar(p):
    return p * 1e5


def at(pair, *values):
    """IAPWS-95 state at a pair of inputs, e.g. at("PQ", p, x)."""
    water.update(getattr(CoolProp, {"PQ": "PQ_INPUTS", "PT": "PT_INPUTS", "PH": "HmassP_INPUTS",
                                    "PS": "PSmass_INPUTS"}[pair]), *(values[::-1] if pair == "PH" else values))
    return water


def h_saturated(p):
    return at("PQ", p, 0).hmass(), at("PQ", p, 1).hmass()


def quality_95(p_line, p_exhaust, T_exhaust):
    h_f, h_g = h_saturated(p_line)
    return (at("PT", p_exhaust, T_exhaust).hmass() - h_f) / (h_g - h_f)


def least_quality_95(p_line, p_exhaust, superheat):
    h_f, h_g = h_saturated(p_line)
    dry = at("PQ", p_exhaust, 1)
    h = at("PT", p_exhaust, dry.T() + superheat).hmass() if superheat else dry.hmass()
    return (h - h_f) / (h_g - h_f)


# --- textbooks and an old handbook -----------------------------------------------------------------------

# p1 bar, p2 bar, t2 °C, printed x, with the source; a printed three-digit answer is good to its last digit
TEXTBOOKS = [
    (15, 0.5, 100, 0.944),  # Y. A. Cengel, M. A. Boles, Thermodynamics, 8th ed., problem 5-63
    (12, 1.0, 140, 0.986),  # T. D. Eastop, A. McConkey, problem on the throttling calorimeter (number from memory)
    (11, 1.0133, 105, 0.953),  # J. M. Smith, H. C. Van Ness, M. M. Abbott, ch. 6 problem (answer from memory)
]


@pytest.mark.parametrize(("p1", "p2", "t2", "printed"), TEXTBOOKS)
def test_textbook_examples(p1, p2, t2, printed):
    assert quality(bar(p1), bar(p2), t2 + ZERO_CELSIUS).x == pytest.approx(printed, abs=1e-3)


# Steam: Its Generation and Use, 35th ed. 1919, on the tables of Marks and Davis
OLD_LINE, OLD_EXHAUST = to_si(194.7, "psi", "pressure"), to_si(14.7, "psi", "pressure")  # 180 psi gauge


def test_the_old_handbooks_enthalpies():
    line, exhaust = saturated(OLD_LINE), saturated(OLD_EXHAUST)
    assert from_si(line.h_g, "Btu/lb", "enthalpy") == pytest.approx(1197.7, abs=1.0)
    assert from_si(line.h_g - line.h_f, "Btu/lb", "enthalpy") == pytest.approx(845.0, abs=0.5)
    assert from_si(exhaust.h_g, "Btu/lb", "enthalpy") == pytest.approx(1150.4, abs=0.2)


def test_the_old_handbooks_dry_reading():
    # eq. 5 with a specific heat of 0.47: 313 °F for dry steam without losses
    T = exhaust_temperature(OLD_LINE, 1.0, OLD_EXHAUST).T_exhaust
    assert from_si(T, "°F", "temperature") == pytest.approx(313.0, abs=1.1)


def test_the_old_handbooks_chart():
    # fig. 15: 295 °F is 1.0 % of moisture, read from a chart
    reading = quality(OLD_LINE, OLD_EXHAUST, to_si(295.0, "°F", "temperature"))
    assert reading.wetness * 100 == pytest.approx(1.0, abs=0.06)


# --- the reach -------------------------------------------------------------------------------------------

# exhaust to 101.325 kPa; p1 bar, least quality at 0, 5, 5.56 and 10 K, reading of dry steam °C and K of superheat
REACH = [
    (1.5, 0.9921, 0.9968, 0.9973, None, 108.5, 8.5), (2, 0.9861, 0.9908, 0.9913, 0.9954, 114.9, 15.0),
    (3, 0.9772, 0.9820, 0.9825, 0.9867, 124.2, 24.2), (5, 0.9656, 0.9705, 0.9710, 0.9753, 135.7, 35.8),
    (7, 0.9578, 0.9628, 0.9633, 0.9677, 143.1, 43.1), (10, 0.9496, 0.9547, 0.9553, 0.9598, 150.3, 50.3),
    (15, 0.9407, 0.9460, 0.9466, 0.9513, 157.3, 57.3), (20, 0.9350, 0.9405, 0.9411, 0.9459, 161.0, 61.0),
    (31.6, 0.9283, 0.9342, 0.9348, 0.9399, 163.5, 63.5), (40, 0.9269, 0.9329, 0.9336, 0.9389, 162.3, 62.3),
    (60, 0.9306, 0.9372, 0.9379, 0.9437, 154.1, 54.1), (80, 0.9423, 0.9495, 0.9503, 0.9566, 141.0, 41.1),
    (100, 0.9621, 0.9699, 0.9708, 0.9777, 124.5, 24.5),
]  # computed
SUPERHEATS = (0.0, 5.0, 5.56, 10.0)


@pytest.mark.parametrize("row", REACH, ids=lambda row: f"{row[0]} bar")
def test_reach(row):
    p = bar(row[0])
    for superheat, printed in zip(SUPERHEATS, row[1:5], strict=True):
        ours = least_quality(p, P_STANDARD, superheat)
        assert ours == pytest.approx(least_quality_95(p, P_STANDARD, superheat), abs=FORMULATIONS)
        assert ours == pytest.approx(printed, abs=FORMULATIONS + 5e-5) if printed else ours > 1
    dry = exhaust_temperature(p, 1.0, P_STANDARD)
    assert dry.T_exhaust - ZERO_CELSIUS == pytest.approx(row[5], abs=0.1)
    assert dry.superheat == pytest.approx(row[6], abs=0.1)
    assert dry.T_exhaust == pytest.approx(at("PH", P_STANDARD, h_saturated(p)[1]).T(), abs=0.06)


@pytest.mark.parametrize(("p1", "p2"), [(1.2, 1.0), (1.5, 0.05), (4, 2), (10, 1.2), (40, 0.2), (90, 1), (160, 0.05)])
def test_quality_against_iapws_95(p1, p2):
    """Lines from 1.2 to 160 bar, exhausts to air, to a condenser and against back pressure, 0.5 to 120 K."""
    T_sat = at("PQ", bar(p2), 1).T()
    for superheat in (0.5, 5.0, 30.0, 120.0):
        reading = quality([bar(p1)], bar(p2), T_sat + superheat)
        x = quality_95(bar(p1), bar(p2), T_sat + superheat)
        if x > 1:
            assert reading.h_line[0] == pytest.approx(at("PT", bar(p2), T_sat + superheat).hmass(), rel=2e-4)
            T_line = at("PH", bar(p1), at("PT", bar(p2), T_sat + superheat).hmass()).T()
            assert saturation_temperature(bar(p1)) + reading.line_superheat[0] == pytest.approx(T_line, abs=0.15)
        else:
            assert reading.x[0] == pytest.approx(x, abs=3e-4 if p1 > 100 else FORMULATIONS)


# --- sensitivities ---------------------------------------------------------------------------------------

# exhaust 101.3 kPa, x = 0.98: %pt/K, %pt/kPa, %pt/bar, %pt for 1 % of p1; computed
SENSITIVITIES = [(4, "0.096", "-0.0056", "-0.56", "-0.022"), (7, "0.098", "-0.0049", "-0.31", "-0.022"),
                 (10, "0.100", "-0.0045", "-0.20", "-0.020"), (20, "0.105", "-0.0042", "-0.066", "-0.013"),
                 (40, "0.116", "-0.0045", "0.019", "0.008"), (60, "0.127", "-0.0053", "0.061", "0.036")]


def as_printed(text):
    """A printed number, good to half its last digit (and a twentieth, for the other formulation)."""
    return pytest.approx(float(text), abs=0.55 * 10.0 ** -len(text.partition(".")[2]))


@pytest.mark.parametrize("row", SENSITIVITIES, ids=lambda row: f"{row[0]} bar")
def test_sensitivities(row):
    p1, of_T, of_p2, of_p1, of_percent = row
    base = np.array([bar(p1), 101.3e3, exhaust_temperature(bar(p1), 0.98, 101.3e3).T_exhaust])

    def slope(f, k, step):
        low, high = base.copy(), base.copy()
        low[k], high[k] = base[k] - step, base[k] + step
        return (f(*high) - f(*low)) / (2 * step) * 100

    def ours(*reading):
        return quality(*reading).x

    for k, step, scale, printed in ((2, 0.01, 1.0, of_T), (1, 10.0, 1e3, of_p2), (0, 100.0, 1e5, of_p1),
                                    (0, 100.0, bar(p1) * 0.01, of_percent)):
        found = slope(ours, k, step) * scale
        assert found == pytest.approx(slope(quality_95, k, step) * scale, rel=0.02, abs=2e-4)
        assert found == as_printed(printed)


@pytest.mark.parametrize(("x", "p"), [(0.94, 39.7), (0.96, 36.5), (0.98, 33.5), (1.0, 30.8)])
def test_where_the_line_gauge_does_not_matter(x, p):
    """The enthalpy of a line of constant quality is greatest there (computed)."""
    def enthalpy(p):
        h_f, h_g = h_saturated(bar(p))
        return -(h_f + x * (h_g - h_f))

    top = minimize_scalar(enthalpy, bounds=(20, 60), method="bounded", options={"xatol": 1e-4}).x
    assert top == pytest.approx(p, abs=0.06)
    T = exhaust_temperature(bar(top), x, P_STANDARD).T_exhaust
    around = quality(np.array([bar(top) * 0.99, bar(top) * 1.01]), P_STANDARD, T)
    assert abs(around.h_line[1] - around.h_line[0]) == 0  # the same reading
    found = exhaust_temperature(bar(np.array([top - 2, top, top + 2])), x, P_STANDARD).T_exhaust
    assert found.argmax() == 1


# --- choked flow -----------------------------------------------------------------------------------------

# p1 bar, homogeneous equilibrium flux kg/(m² s) at x = 1, 0.98, 0.95, critical pressure ratio at x = 1; computed
CRITICAL = [(2, 302.3, 305.2, 309.8, 0.5775), (4, 592.3, 597.9, 606.8, 0.5768), (10, 1444.0, 1457.5, 1478.6, 0.5766),
            (20, 2845.8, 2872.0, 2912.6, 0.5777), (40, 5656, 5706, 5784, 0.5808), (100, 14508, 14624, 14803, 0.5924)]


def critical_95(p, x):
    state = at("PQ", p, x)
    h0, s0 = state.hmass(), state.smass()

    def flux(ratio):
        state = at("PS", ratio * p, s0)
        return -state.rhomass() * np.sqrt(max(2 * (h0 - state.hmass()), 0.0))

    lowest = max(0.3, 612.0 / p)  # above the triple pressure
    best = minimize_scalar(flux, bounds=(lowest, 0.9999), method="bounded", options={"xatol": 1e-7})
    return -best.fun, best.x


@pytest.mark.parametrize("row", CRITICAL, ids=lambda row: f"{row[0]} bar")
def test_critical_flux(row):
    p, dry = bar(row[0]), critical_flow(bar(row[0]), 1.0)
    assert critical_flow(p, np.array([1.0, 0.98, 0.95])).mass_flux == pytest.approx(np.array(row[1:4]), rel=2e-4)
    assert dry.pressure_ratio == pytest.approx(row[4], abs=2e-4)


@pytest.mark.parametrize("p", [1.2e3, 1e4, 1.2e5, 1e6, 5e6, 16e6])
@pytest.mark.parametrize("x", [0.2, 0.6, 0.9, 1.0])
def test_critical_flow_against_iapws_95(p, x):
    flux, ratio = critical_95(p, x)
    ours = critical_flow(p, x)
    assert ours.mass_flux == pytest.approx(flux, rel=3e-4)
    assert ours.pressure_ratio == pytest.approx(ratio, abs=2e-4)


def test_critical_ratio_of_dry_steam():
    # 0.577 for dry saturated steam (trade handbooks, from memory); also 2/(k + 1) to the k/(k - 1) for k = 1.135
    assert critical_flow(1e6, 1.0).pressure_ratio == pytest.approx(0.577, abs=0.002)


# --- paths -----------------------------------------------------------------------------------------------

LINES = [(1.2, 0.995, 1.0), (3, 0.97, 0.05), (10, 0.98, 1.01325), (10, 0.90, 1.0), (40, 0.95, 0.2), (80, 1.0, 1.0),
         (160, 0.93, 0.1)]


@pytest.mark.parametrize(("p1", "x", "p2"), LINES)
def test_isenthalpic_path_against_iapws_95(p1, x, p2):
    path = isenthalpic_path(bar(p1), x, bar(p2), points=12)
    h = at("PQ", bar(p1), x).hmass()
    assert path.h[0] == pytest.approx(h, abs=600)
    for k, p in enumerate(path.p):
        state = at("PH", p, path.h[k])
        assert path.T[k] == pytest.approx(state.T(), abs=0.12)
        assert path.s[k] == pytest.approx(state.smass(), abs=1.5)
        assert path.v[k] == pytest.approx(1 / state.rhomass(), rel=1e-3)
        assert path.x[k] == pytest.approx(state.Q() if 0 <= state.Q() <= 1 else 1.0, abs=5e-4)


def test_dry_out_pressure_against_iapws_95():
    path = isenthalpic_path(bar(10), 0.98, bar(1))
    assert path.p_dry == pytest.approx(brentq(lambda p: h_saturated(p)[1] - path.h[0], 1e5, 9e5), rel=2e-3)


def test_a_superheated_line_against_iapws_95():
    # 10 bar at 190 °C: 10.1 K of superheat, exhaust to air at 163.6 °C, as if the quality were 1.013 (computed)
    h = at("PT", 1e6, 190 + ZERO_CELSIUS).hmass()
    path = isenthalpic_path_at(1e6, h, P_STANDARD)
    assert path.T[0] - ZERO_CELSIUS == pytest.approx(190, abs=0.05)
    assert path.T[-1] == pytest.approx(at("PH", P_STANDARD, h).T(), abs=0.05)
    assert path.T[-1] - ZERO_CELSIUS == pytest.approx(163.6, abs=0.06)
    reading = quality(1e6, P_STANDARD, path.T[-1])
    assert reading.line_superheat == pytest.approx(10.1, abs=0.06)
    assert (reading.h_line - saturated(1e6).h_f) / (saturated(1e6).h_g - saturated(1e6).h_f) == pytest.approx(
        1.013, abs=5e-4)


# 10 bar, exhaust 101.325 kPa with a total temperature of 129.69 °C (a line of 0.98 or so);
# flow kg/h, bore mm; velocity m/s, static °C, K below total, %pt; computed
FANNO = [(40, 15.7, 103.5, 127.02, "2.67", "0.27"), (40, 26.6, None, None, "0.33", "0.033"),
         (80, 15.7, None, None, "10.2", "1.0")]


@pytest.mark.parametrize(("flow", "bore", "speed", "static", "below", "points"), FANNO)
def test_constant_bore_exhaust(flow, bore, speed, static, below, points):
    p1, total, G = 1e6, 129.69 + ZERO_CELSIUS, flow / 3600 / (np.pi / 4 * (bore * 1e-3) ** 2)
    x = quality(p1, P_STANDARD, total).x
    line = saturated(p1)
    h0, v1 = line.h_f + x * (line.h_g - line.h_f), line.v_f + x * (line.v_g - line.v_f)
    # the table takes the sample from rest: the line's own kinetic energy comes off its enthalpy here
    path = constant_bore_path(p1, x - 0.5 * (G * v1) ** 2 / (line.h_g - line.h_f), P_STANDARD, G * v1)
    h = brentq(lambda h: h + 0.5 * (G / at("PH", P_STANDARD, h).rhomass()) ** 2 - h0, h0 - 1e5, h0)
    T_95, v_95 = at("PH", P_STANDARD, h).T(), 1 / at("PH", P_STANDARD, h).rhomass()
    assert path.T[-1] == pytest.approx(T_95, abs=0.06)
    assert path.velocity[-1] == pytest.approx(G * v_95, rel=3e-4)
    assert total - path.T[-1] == as_printed(below)
    assert kinetic_quality(path.velocity[-1], p1) * 100 == as_printed(points)
    if speed:
        assert path.velocity[-1] == pytest.approx(speed, abs=0.06)
        assert path.T[-1] - ZERO_CELSIUS == pytest.approx(static, abs=0.06)
        assert pytest.approx(57.4, abs=0.05) == G


@pytest.mark.parametrize(("p1", "x", "p2", "c1"), [(1.2, 0.99, 1.0, 25), (10, 0.98, 1.0, 20), (10, 0.98, 0.1, 60),
                                                  (40, 0.95, 1.0, 5), (160, 0.9, 1.0, 8)])
def test_constant_bore_path_against_iapws_95(p1, x, p2, c1):
    path = constant_bore_path(bar(p1), x, bar(p2), c1, points=12)
    h0 = path.h[0] + 0.5 * c1**2
    for k in range(1, 12):
        def excess(h, p=path.p[k]):
            return h + 0.5 * (path.mass_flux / at("PH", p, h).rhomass()) ** 2 - h0

        h = brentq(excess, h0 - 4e5, h0, xtol=1e-3)
        state = at("PH", path.p[k], h)
        assert path.h[k] == pytest.approx(h, abs=150)
        assert path.T[k] == pytest.approx(state.T(), abs=0.12)
        assert path.velocity[k] == pytest.approx(path.mass_flux / state.rhomass(), rel=1e-3)
    if path.chokes:  # entropy is greatest there, and it is the same pressure
        def entropy(log_p):
            p = np.exp(log_p)
            h = brentq(lambda h: h + 0.5 * (path.mass_flux / at("PH", p, h).rhomass()) ** 2 - h0, h0 - 6e5, h0,
                       xtol=1e-6)
            return -at("PH", p, h).smass()

        top = minimize_scalar(entropy, bounds=np.log(bar(np.array([p2, p1]))), method="bounded",
                              options={"xatol": 1e-6})
        assert path.p_choke == pytest.approx(np.exp(top.x), rel=3e-3)


# --- velocities ------------------------------------------------------------------------------------------

@pytest.mark.parametrize(("c", "points"), [(30, "0.02"), (50, "0.06"), (100, "0.25"), (200, "1.0")])
def test_kinetic_energy_in_points_of_quality(c, points):
    """c²/2 over h_fg at 10 bar (computed)."""
    h_f, h_g = h_saturated(1e6)
    assert kinetic_quality(c, 1e6) == pytest.approx(0.5 * c * c / (h_g - h_f), rel=2e-4)
    assert kinetic_quality(c, 1e6) * 100 == as_printed(points)


@pytest.mark.parametrize(("c", "rise"), [(50, 0.62), (100, 2.5)])
def test_kinetic_energy_in_kelvin(c, rise):
    T = 130 + ZERO_CELSIUS
    found = kinetic_superheat(c, P_STANDARD, T)
    assert found == pytest.approx(0.5 * c * c / at("PT", P_STANDARD, T).cpmass(), rel=2e-3)
    assert found == pytest.approx(rise, abs=0.02)


def test_velocities_and_bores_against_iapws_95():
    v = 1 / at("PT", P_STANDARD, 129.69 + ZERO_CELSIUS).rhomass()
    v1 = 1 / at("PQ", 1e6, 0.98).rhomass()
    ours = vapour(P_STANDARD, 129.69 + ZERO_CELSIUS).v
    assert velocity(40 / 3600, 0.0157, ours) == pytest.approx(4 * 40 / 3600 * v / np.pi / 0.0157**2, rel=2e-4)
    assert bore_ratio_keeping_velocity(v1, v) == pytest.approx(np.sqrt(v / v1), rel=1e-12)
    # the least bore for 0.25 %pt carries 100 m/s or so: c = sqrt(2 * 0.0025 * h_fg)
    h_f, h_g = h_saturated(1e6)
    speed = np.sqrt(2 * 0.0025 * (h_g - h_f))
    bore = least_exhaust_bore(40 / 3600, v, 1e6, 0.0025)
    assert 40 / 3600 * v / (np.pi / 4 * bore**2) == pytest.approx(speed, rel=2e-4)
