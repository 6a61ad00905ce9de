"""The worked examples of JCGM 100:2008 (GUM). All figures are typed in from memory of the document."""

import numpy as np
import pytest

from engine.measurement import (
    Input,
    correlations_from_matrix,
    coverage_factor,
    expanded,
    monte_carlo,
    normal,
    rectangular,
    result_correlation,
    trend,
    triangular,
    type_a,
    uncertainty_budget,
)

# --- 4.4.3: twenty temperatures, °C ----------------------------------------------------------
TEMPERATURES = np.array([96.90, 98.18, 98.25, 98.61, 99.03, 99.49, 99.56, 99.74, 99.89, 100.07,
                         100.33, 100.42, 100.68, 100.95, 101.11, 101.20, 101.57, 101.84, 102.36, 102.72])


def test_4_4_3_repeated_readings():
    s = TEMPERATURES.std(ddof=1)
    assert TEMPERATURES.mean() == pytest.approx(100.145, abs=1e-3)
    assert s == pytest.approx(1.489, abs=1e-3)
    assert type_a("scatter", s, 20).u == pytest.approx(0.333, abs=1e-3)
    assert type_a("scatter", s, 20).dof == 19


def test_4_4_5_rectangular_limits():
    """Limits of 96 °C and 104 °C: u = 4/√3 = 2.3 °C; 4.4.6 with a triangle: 4/√6 = 1.6 °C."""
    assert rectangular("limits", 4.0).u == pytest.approx(2.3, abs=0.05)
    assert triangular("limits", 4.0).u == pytest.approx(1.6, abs=0.05)


# --- table G.2 ---------------------------------------------------------------------------------
@pytest.mark.parametrize(("dof", "coverage", "k"), [
    (1, 0.95, 12.71), (2, 0.95, 4.30), (5, 0.95, 2.57), (10, 0.95, 2.23), (16, 0.95, 2.12), (20, 0.95, 2.09),
    (16, 0.99, 2.92), (5, 0.99, 4.03), (np.inf, 0.95, 1.960), (np.inf, 0.99, 2.576), (np.inf, 0.9545, 2.000),
])
def test_table_g2(dof, coverage, k):
    assert coverage_factor(coverage, dof) == pytest.approx(k, abs=0.005)


# --- H.1: end-gauge calibration, lengths in nm ---------------------------------------------------
END_GAUGE = (
    Input("l_S", 50_000_623.0, (expanded("calibration of the standard", 75.0, 3.0, dof=18),)),
    Input("d", 215.0, (normal("repeated observations", 5.8, dof=24), normal("random effects", 3.9, dof=5),
                       normal("systematic effects", 6.7, dof=8))),
    Input("alpha_S", 11.5e-6, (rectangular("thermal expansion", 2e-6),)),
    Input("theta", -0.1, (normal("mean temperature of the bed", 0.2), normal("cyclic variation", 0.35))),
    Input("d_alpha", 0.0, (rectangular("difference in expansion", 1e-6, dof=50),)),
    Input("d_theta", 0.0, (rectangular("difference in temperature", 0.05, dof=2),)),
)


def end_gauge(l_S, d, alpha_S, theta, d_alpha, d_theta):
    return l_S + d - l_S * (d_alpha * theta + alpha_S * d_theta)


def test_h1_value_uncertainty_and_degrees_of_freedom():
    budget = uncertainty_budget(end_gauge, END_GAUGE, coverage=0.99)
    assert budget.value == pytest.approx(50_000_838, abs=0.5)
    assert budget.u == pytest.approx(32, abs=0.5)
    assert int(budget.dof) == 16
    assert pytest.approx(93, abs=1.5) == budget.U  # the document rounds u to 32 and the degrees of freedom to 16


def test_h1_expanded_uncertainty_as_the_document_rounds_it():
    assert 32 * coverage_factor(0.99, 16) == pytest.approx(93, abs=0.6)


def test_h1_every_line_of_table_h1():
    budget = uncertainty_budget(end_gauge, END_GAUGE)
    contribution = {row.source: abs(row.contribution) for row in budget.rows}
    printed = {"l_S: calibration of the standard": 25, "d: repeated observations": 5.8, "d: random effects": 3.9,
               "d: systematic effects": 6.7, "alpha_S: thermal expansion": 0, "theta: cyclic variation": 0,
               "theta: mean temperature of the bed": 0, "d_alpha: difference in expansion": 2.9,
               "d_theta: difference in temperature": 16.6}
    assert contribution == {source: pytest.approx(value, abs=0.05) for source, value in printed.items()}
    assert END_GAUGE[1].u == pytest.approx(9.7, abs=0.05)
    assert END_GAUGE[3].u == pytest.approx(0.41, abs=0.01)


def test_h1_7_second_order_shows_in_monte_carlo():
    """Products of two uncertain factors put u at 34 nm, where first order gives 32 nm."""
    got = monte_carlo(end_gauge, END_GAUGE, coverage=0.99)
    assert got.value == pytest.approx(50_000_838, abs=0.5)
    assert got.u == pytest.approx(34, abs=0.5)


# --- H.2: resistance, reactance and impedance measured together ----------------------------------
VOLTS = np.array([5.007, 4.994, 5.005, 4.990, 4.999])
AMPERES = np.array([19.663, 19.639, 19.640, 19.685, 19.678]) * 1e-3
RADIANS = np.array([1.0456, 1.0438, 1.0468, 1.0428, 1.0433])


def impedance_budgets():
    columns = {"V": VOLTS, "i": AMPERES, "phi": RADIANS}
    inputs = [Input(n, float(a.mean()), (type_a("readings", float(a.std(ddof=1)), 5),)) for n, a in columns.items()]
    pairs = correlations_from_matrix(list(columns), np.corrcoef(list(columns.values())))
    models = {"R": lambda V, i, phi: V / i * np.cos(phi), "X": lambda V, i, phi: V / i * np.sin(phi),
              "Z": lambda V, i, phi: V / i}
    return {name: uncertainty_budget(f, inputs, correlations=pairs) for name, f in models.items()}


def test_h2_input_data():
    assert [VOLTS.mean(), AMPERES.mean() * 1e3, RADIANS.mean()] == pytest.approx([4.9990, 19.6610, 1.04446], abs=5e-6)
    u = [a.std(ddof=1) / np.sqrt(5) for a in (VOLTS, AMPERES * 1e3, RADIANS)]
    assert u == pytest.approx([0.0032, 0.0095, 0.00075], abs=5e-5)
    r = np.corrcoef([VOLTS, AMPERES, RADIANS])
    assert [r[0, 1], r[0, 2], r[1, 2]] == pytest.approx([-0.36, 0.86, -0.65], abs=0.005)


@pytest.mark.parametrize(("name", "value", "u"), [("R", 127.732, 0.071), ("X", 219.847, 0.295), ("Z", 254.260, 0.236)])
def test_h2_results(name, value, u):
    budget = impedance_budgets()[name]
    assert budget.value == pytest.approx(value, abs=1e-3)
    assert budget.u == pytest.approx(u, abs=1e-3)


@pytest.mark.parametrize(("first", "second", "r"), [("R", "X", -0.588), ("R", "Z", -0.485), ("X", "Z", 0.993)])
def test_h2_correlation_of_the_results(first, second, r):
    budgets = impedance_budgets()
    assert result_correlation(budgets[first], budgets[second]) == pytest.approx(r, abs=1e-3)


def test_h2_second_approach_gives_the_same():
    """H.2.4: each set reduced by itself, then averaged."""
    R = VOLTS / AMPERES * np.cos(RADIANS)
    budget = impedance_budgets()["R"]
    assert budget.value == pytest.approx(R.mean(), abs=2e-3)
    assert budget.u == pytest.approx(R.std(ddof=1) / np.sqrt(5), abs=1e-3)
    assert budget.dof == pytest.approx(4)  # five sets taken together have four degrees of freedom


# --- H.3: calibration line of a thermometer ------------------------------------------------------
READING = np.array([21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511])  # °C
CORRECTION = np.array([-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160])  # °C


def calibration_line():
    """Correction at 20 °C and slope, with the uncertainties and the correlation, from one trend."""
    fit = trend(READING, CORRECTION)
    away = READING.mean() - 20
    at_20 = fit.mean - fit.slope * away
    spread = fit.u_slope * np.sqrt(((READING - READING.mean()) ** 2).sum())  # s of the fit
    u_mean = spread / np.sqrt(len(READING))
    u_20 = np.hypot(u_mean, fit.u_slope * away)
    return at_20, u_20, fit.slope, fit.u_slope, -fit.u_slope * away / u_20, spread


def test_h3_line():
    y1, u1, y2, u2, r, s = calibration_line()
    assert y1 == pytest.approx(-0.1712, abs=1e-4)
    assert u1 == pytest.approx(0.0029, abs=5e-5)
    assert y2 == pytest.approx(0.00218, abs=1e-5)
    assert u2 == pytest.approx(0.00067, abs=5e-6)
    assert r == pytest.approx(-0.930, abs=1e-3)
    assert s == pytest.approx(0.0035, abs=5e-5)


@pytest.mark.parametrize(("row", "printed"), [  # table H.6: predicted correction at each reading
    (0, -0.1679), (1, -0.1668), (2, -0.1657), (3, -0.1646), (4, -0.1635), (5, -0.1625), (6, -0.1614), (7, -0.1603),
    (8, -0.1592), (9, -0.1581), (10, -0.1570),
])
def test_h3_temperature_table(row, printed):
    y1, _, y2, *_ = calibration_line()
    assert y1 + y2 * (READING[row] - 20) == pytest.approx(printed, abs=1e-4)


def test_h3_prediction_with_its_correlation():
    y1, u1, y2, u2, r, _ = calibration_line()
    inputs = [Input("y1", y1, (normal("fit", u1, dof=9),)), Input("y2", y2, (normal("fit", u2, dof=9),))]
    budget = uncertainty_budget(lambda y1, y2: y1 + y2 * (30 - 20), inputs, correlations={("y1", "y2"): r})
    assert budget.value == pytest.approx(-0.1494, abs=1e-4)
    assert budget.u == pytest.approx(0.0041, abs=1e-4)
    assert budget.dof == pytest.approx(9)
