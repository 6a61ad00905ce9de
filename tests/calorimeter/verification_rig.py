"""The rig against published values and independent computations; the source stands beside each number."""

import CoolProp.CoolProp as CP
import fluids
import numpy as np
import pytest
from scipy.integrate import solve_bvp, solve_ivp

from engine.calorimeter import (
    bore_for_flow,
    cross_flow_film,
    discharge_from_flow,
    drained_mass,
    electric_quality,
    exhaust_pipe,
    fittings_loss,
    friction_factor,
    geopotential_altitude,
    grashof_mass_flux,
    heater_reading,
    ideal_normal,
    immersion_error,
    moving_stream_error,
    napier_mass_flux,
    normal_reading,
    orifice_mass_flux,
    power_needed,
    radiation_error,
    rateau_mass_flux,
    separated_quality,
    standard_pressure,
    steam_viscosity,
    stem_error,
    warm_up,
    wetness_by_normal_reading,
    wetness_sampled,
)
from engine.calorimeter.orifice import NAPIER
from engine.calorimeter.thermometer import STEFAN_BOLTZMANN
from engine.calorimeter.warmup import body_temperature
from engine.steam.units import to_si


def bar(p):
    return p * 1e5


def psi(p):
    return to_si(p, "psi", "pressure")


def fahrenheit(T):
    return to_si(T, "°F", "temperature")


# --- atmosphere -------------------------------------------------------------------------------------

# ISO 2533:1975, table of pressures over geopotential altitude, printed to 0.1 Pa (1 Pa where marked)
ISO_2533 = [(500, 95_460.8, 0.05), (1500, 84_556.0, 0.05), (2000, 79_495.2, 0.05), (5000, 54_019.9, 0.05),
            # from memory, in hPa to three decimals
            (1000, 89_874.6, 0.1), (3000, 70_108.5, 0.1), (4000, 61_640.2, 0.1), (10_000, 26_436.3, 0.1),
            (11_000, 22_632.0, 0.1)]


@pytest.mark.parametrize(("altitude", "printed", "half_digit"), ISO_2533)
def test_standard_atmosphere(altitude, printed, half_digit):
    assert standard_pressure(altitude, geopotential=True) == pytest.approx(printed, abs=half_digit + 1e-9)


def test_geopotential_altitude():
    # ISO 2533: at a geometric altitude of 10 000 m the geopotential one is 9984 m (from memory)
    assert geopotential_altitude(10_000.0) == pytest.approx(9984.3, abs=0.05)


# --- thermometer ------------------------------------------------------------------------------------

def test_stem_correction_of_the_1919_handbook():
    # Steam: Its Generation and Use, 35th ed. 1919: T = 400, n = 200, t = 85 °F, k = 8.5e-5 per °F; prints 5.3
    error = stem_error(fahrenheit(400.0), fahrenheit(85.0), 200 / 1.8, stem_coefficient=8.5e-5 * 1.8)
    assert -error * 1.8 == pytest.approx(5.3, abs=0.06)


def test_film_on_a_cylinder():
    # Incropera & DeWitt, ex. 7.4 (from memory): air at 10 m/s, 12.7 mm, Re 6071, Churchill-Bernstein Nu 40.6, 96 W/m²K
    nu, k, Pr = 20.92e-6, 0.030, 0.700
    film = cross_flow_film(10.0, 0.0127, nu, k, Pr)  # unit density: flux = velocity, viscosity = kinematic
    assert film * 0.0127 / k == pytest.approx(40.6, abs=0.1)
    assert film == pytest.approx(96.0, abs=0.2)


@pytest.mark.parametrize("depth", [0.005, 0.03, 0.05, 0.1])
def test_immersion_error_against_a_boundary_value_solution(depth):
    # the fin equation solved numerically: T'' = m² (T - T_stream), T(0) = T_head, T'(L) = 0
    film, k, D, d, T_stream, T_head = 100.0, 16.0, 0.006, 0.004, 400.0, 330.0
    m2 = film * np.pi * D / (k * np.pi / 4 * (D**2 - d**2))
    z = np.linspace(0, depth, 200)
    solution = solve_bvp(lambda z, T: np.vstack([T[1], m2 * (T[0] - T_stream)]),
                         lambda a, b: np.array([a[0] - T_head, b[1]]), z,
                         np.vstack([np.full(z.size, T_head), np.zeros(z.size)]), tol=1e-8)
    error = immersion_error(T_stream, T_head, depth, D, d, film, conductivity=k)
    assert error == pytest.approx(solution.sol(depth)[0] - T_stream, abs=1e-4)


def test_radiation_closes_the_heat_balance():
    T, T_w, film, e = 400.0, np.array([300.0, 390.0, 400.0, 500.0]), 80.0, 0.9
    probe = T + radiation_error(T, T_w, film, emissivity=e)
    assert film * (T - probe) == pytest.approx(e * STEFAN_BOLTZMANN * (probe**4 - T_w**4), abs=1e-8)


@pytest.mark.parametrize(("speed", "rise", "missed"), [(50, 0.62, 0.19), (100, 2.5, 0.75)])
def test_moving_stream(speed, rise, missed):
    # c²/(2 cp) and (1 - r) c²/(2 cp) with cp of steam at 130 °C, 1 atm and r = 0.7
    cp = CP.PropsSI("C", "T", 403.15, "P", 101_325.0, "Water")
    result = moving_stream_error(speed, cp, 0.7)
    assert result.rise == pytest.approx(rise, abs=0.02)
    assert -result.of_total == pytest.approx(missed, abs=0.01)


# --- orifice ----------------------------------------------------------------------------------------

def test_napier_pair_of_the_pressure_vessel_code():
    # ASME BPVC VIII-1, appendix 11 (from memory): 51.5 lb/h per in² psi and 5.25 kg/h per mm² MPa
    pair = to_si(51.5, "lb/h", "mass flow") / to_si(1.0, "in²", "area") / psi(1.0)
    assert pair * 3600 * 1e-6 * 1e6 == pytest.approx(5.25, abs=0.005)
    assert pytest.approx(pair, rel=1.5e-3) == NAPIER  # the code rounds 3600/70 = 51.43 up


# Computed from the formulas in lb/s, psi and in² (Napier; Grashof and Rateau as in Marks), kg/(m² s)
FORMULAS = [(2, 291.3, 307.2, 305.2), (4, 582.7, 601.8, 598.5), (10, 1456.7, 1463.8, 1457.4),
            (20, 2913.5, 2867.4, 2855.8), (40, 5827, 5617, 5594), (100, 14567, 13661, 13595)]


@pytest.mark.parametrize(("p", "napier", "grashof", "rateau"), FORMULAS)
def test_engineering_formulas(p, napier, grashof, rateau):
    assert napier_mass_flux(bar(p), 1e5) == pytest.approx(napier, rel=2e-4)
    assert grashof_mass_flux(bar(p)) == pytest.approx(grashof, rel=2e-4)
    assert rateau_mass_flux(bar(p)) == pytest.approx(rateau, rel=2e-4)


@pytest.mark.parametrize(("p2", "x"), [(0.9, 1.0), (0.7, 0.98), (0.6, 0.95)])
def test_flux_below_choking_against_iapws_95(p2, x):
    # rho sqrt(2 (h0 - h)) along the isentrope, evaluated with CoolProp (IAPWS-95)
    p = 1e6
    h0, s0 = (CP.PropsSI(q, "P", p, "Q", x, "Water") for q in "HS")
    h, rho = (CP.PropsSI(q, "P", p2 * p, "S", s0, "Water") for q in "HD")
    flux, choked = orifice_mass_flux(p, x, p2 * p)
    assert flux == pytest.approx(rho * np.sqrt(2 * (h0 - h)), rel=5e-4)
    assert not choked


def test_choking_sets_in_at_the_critical_ratio():
    # 0.577 for dry saturated steam (trade handbooks, from memory)
    assert orifice_mass_flux(1e6, 1.0, 0.575e6)[1]
    assert not orifice_mass_flux(1e6, 1.0, 0.579e6)[1]


def test_sharp_orifice_implied_by_a_published_chart():
    # public chart for sharp orifices: 1/4 in, 50 psi gauge, 98 lb/h; discharge coefficient 0.60
    flow = to_si(98.0, "lb/h", "mass flow")
    p, d = psi(50.0 + 14.696), to_si(0.25, "in", "length")
    assert discharge_from_flow(flow, p, 1.0, 101_325.0, d) == pytest.approx(0.60, abs=0.02)
    assert bore_for_flow(flow, p, 1.0, 101_325.0, 0.60) == pytest.approx(d, rel=0.02)


# --- exhaust pipe -----------------------------------------------------------------------------------

# 3 m, K = 4, steam at 130 °C to 101.3 kPa, commercial steel: exit velocity m/s and back pressure kPa, computed
BORES = (0.0157, 0.0209, 0.0266, 0.0409)
BACK_PRESSURE = [(10, (26, 15, 9, 4), (1.9, 0.5, 0.2, 0.03)), (20, (52, 29, 18, 8), (7.1, 2.0, 0.7, 0.1)),
                 (40, (104, 59, 36, 15), (26, 7.4, 2.5, 0.4)), (80, (209, 118, 73, 31), (87, 27, 9.7, 1.5))]


@pytest.mark.parametrize(("flow", "speeds", "pressures"), BACK_PRESSURE)
def test_back_pressure_table(flow, speeds, pressures):
    pipe = exhaust_pipe(flow / 3600, np.array(BORES), 3.0, 101_325.0, 403.15, loss_coefficient=4.0)
    assert pipe.exit_velocity == pytest.approx(np.array(speeds), abs=0.5)
    assert pipe.back_pressure / 1000 == pytest.approx(np.array(pressures), rel=0.04, abs=0.05)


@pytest.mark.parametrize(("flow", "bore", "length"), [(20, 0.0157, 3.0), (40, 0.0157, 10.0), (80, 0.0266, 6.0)])
def test_pipe_against_the_fluids_library(flow, bore, length):
    pipe = exhaust_pipe(flow / 3600, bore, length, 101_325.0, 403.15)
    middle = (pipe.p_exhaust + 101_325.0) / 2
    pv = middle / CP.PropsSI("D", "P", middle, "T", 403.15, "Water")
    m = fluids.isothermal_gas(rho=pipe.p_exhaust / pv, fd=pipe.friction_factor, P1=pipe.p_exhaust, P2=101_325.0,
                              L=length, D=bore)
    assert m * 3600 == pytest.approx(flow, rel=2e-4)


@pytest.mark.parametrize("Re", [3e3, 1e4, 1e5, 1e6])
@pytest.mark.parametrize("roughness", [0.0, 1e-4, 5e-3])
def test_friction_factor_solves_the_colebrook_equation(Re, roughness):
    f = friction_factor(Re, roughness)
    assert 1 / np.sqrt(f) == pytest.approx(-2 * np.log10(roughness / 3.7 + 2.51 / (Re * np.sqrt(f))), rel=1e-4)


def test_laminar_friction():
    assert friction_factor(1000.0, 1e-3) == pytest.approx(0.064)  # Hagen-Poiseuille: 64/Re


def test_elbow_against_the_fluids_library_at_its_nominal_size():
    # Darby3K wants the nominal size in inches; ours takes the bore, 26.6 mm for a nominal inch
    ours = fittings_loss({"elbow 90°, threaded": 1}, 5e4, 0.0266)
    theirs = fluids.Darby3K(NPS=1.0, Re=5e4, name="Elbow, 90°, threaded, standard, (r/D = 1)")
    assert ours == pytest.approx(theirs, rel=0.015)


def test_viscosity_of_the_release():
    # IAPWS R12-08 table 4: 873.15 K, 1 kg/m³
    assert steam_viscosity(np.array([1.0, 1.0]), 873.15) * 1e6 == pytest.approx(np.full(2, 32.619287), abs=1e-6)


# --- sampling ---------------------------------------------------------------------------------------

@pytest.mark.parametrize(("ratio", "read"), [(0.5, 1.0), (0.8, 1.6), (1.25, 2.5), (2.0, 3.9)])
def test_coarse_drops_at_a_mismatched_port(ratio, read):
    # limit of coarse drops, aspiration = velocity ratio; 2 % wetness, computed
    assert wetness_sampled(0.02, ratio) * 100 == pytest.approx(read, abs=0.05)


# --- heat loss --------------------------------------------------------------------------------------

def test_normal_reading_of_the_1919_handbook():
    # Steam: Its Generation and Use, 35th ed. 1919, eq. 5 and 6: 180 psi gauge (194.7 abs), exhaust 14.7
    p, p2 = psi(194.7), psi(14.7)
    ideal = (ideal_normal(p, p2) - 273.15) * 1.8 + 32
    assert ideal == pytest.approx(313.0, abs=1.1)  # the handbook: constant specific heat 0.47
    # normal reading 303 °F: correction 10 °F, and 295 °F read then means 0.47 (303 - 295)/845.0 of moisture
    correction = normal_reading(p, p2, fahrenheit(303.0)).correction * 1.8
    assert correction == pytest.approx(10.0, abs=1.1)
    wetness = wetness_by_normal_reading(p, p2, fahrenheit(295.0), fahrenheit(303.0))
    assert wetness == pytest.approx(0.47 * 8 / 845.0, abs=0.0002)


def test_moisture_chart_of_the_1919_handbook():
    # the same book, fig. 15: 295 °F without correction is 1.0 % of moisture (chart, ± 0.06); against no loss
    p, p2 = psi(194.7), psi(14.7)
    assert wetness_by_normal_reading(p, p2, fahrenheit(295.0), ideal_normal(p, p2)) == pytest.approx(0.010, abs=6e-4)


# --- warm-up ----------------------------------------------------------------------------------------

def test_warm_up_against_a_numerical_solution():
    C, A, m, p, film, UA, wet = 1470.0, 0.04, 25 / 3600, 101_325.0, 100.0, 0.2, 5e3
    T_in, T_0, T_a = 423.15, 293.15, 293.15
    run = warm_up(C, A, m, p, T_in, T_0, T_a, film=film, conductance=UA, condensing_film=wet)
    cp, h = (CP.PropsSI(q, "P", p, "T", T_in, "Water") for q in "CH")
    h_f, T_s = (CP.PropsSI(q, "P", p, "Q", 0, "Water") for q in "HT")
    exchange = m * cp * (1 - np.exp(-film * A / (m * cp)))

    def slope(_, T):
        condensing = wet * A * np.maximum(T_s - T, 0.0)
        heat = np.minimum(condensing + exchange * (T_in - T), m * (h - h_f))
        return (heat - UA * (T - T_a)) / C

    times = np.array([3.0, 8.0, 20.0, 60.0, 600.0, 2400.0])
    solution = solve_ivp(slope, (0, 2400), [T_0], t_eval=times, rtol=1e-9, atol=1e-9, max_step=1.0)
    assert body_temperature(run, times) == pytest.approx(solution.y[0], abs=0.05)


# --- separating and electric modes ------------------------------------------------------------------

THROTTLED = "throttled steam condensed"


def test_density_of_the_drained_water():
    # 977.8 kg/m³ at 70 °C (steam tables): 0.150 l are 0.1467 kg
    assert drained_mass(0.150e-3, 343.15) == pytest.approx(0.1467, abs=5e-5)


# p bar, p2 bar, t2 °C, water kg, throttled steam kg, printed x, tolerance
COMBINED = [
    # P. K. Nag, Engineering Thermodynamics, ex. 9.10: 0.150 l at 70 °C; 0.910 from the book's own constants
    (15, 1, 110, 0.1467, 3.24, 0.910, 0.002),
    # problem sheet on the combined calorimeter, printed answer seen in a public source
    (8, 2, 150, 0.04, 1.76, 0.9778, 0.001),
    # R. K. Rajput, Thermal Engineering, example on the combined calorimeter (from memory), printed to two digits
    (12, 1.02, 110, 2.0, 20.5, 0.87, 0.005),
]


@pytest.mark.parametrize(("p", "p2", "t2", "water", "steam", "printed", "tolerance"), COMBINED)
def test_combined_calorimeter_examples(p, p2, t2, water, steam, printed, tolerance):
    by_steam = separated_quality(bar(p), bar(p2), t2 + 273.15, water, steam, THROTTLED)
    by_total = separated_quality(bar(p), bar(p2), t2 + 273.15, water, steam + water, "total collected")
    assert by_steam.x == pytest.approx(printed, abs=tolerance)
    assert by_total.x == pytest.approx(by_steam.x, abs=1e-12)


def test_electric_mode_against_iapws_95():
    # constructed: 6 bar, x = 0.90, 12 kg/h, 20 K of superheat at 6 bar; 852.6 W and 178.83 °C by IAPWS-95
    p, m = 6e5, 12 / 3600
    T3 = CP.PropsSI("T", "P", p, "Q", 1, "Water") + 20.0
    power = m * (CP.PropsSI("H", "P", p, "T", T3, "Water") - CP.PropsSI("H", "P", p, "Q", 0.9, "Water"))
    assert power == pytest.approx(852.6, abs=0.1)
    t3 = T3 - 273.15
    assert t3 == pytest.approx(178.83, abs=0.005)
    assert power_needed(p, 0.90, p, m, 20.0) == pytest.approx(power, abs=0.1)
    assert electric_quality(p, p, T3, power, m).x == pytest.approx(0.90, abs=8e-5)
    assert heater_reading(p, 0.90, p, power, m).T_heater == pytest.approx(T3, abs=0.02)
