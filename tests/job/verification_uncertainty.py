"""The forecast against independent computations: sensitivities by IAPWS-95, and invented cases with stated answers."""

import CoolProp.CoolProp as CP
import numpy as np
import pytest
from scenarios import BOILER, FACTORY, GEOTHERMAL, HIGH_SITE

from engine.job.assessment.balance import Balance
from engine.job.case.fields_path import BY_NORMAL, NONE
from engine.job.case.rows import Entry
from engine.job.uncertainty import forecast
from engine.measurement import Input, uncertainty_budget

P_EXHAUST, X = 101_325.0, 0.98
# %pt/K, %pt/kPa, %pt/bar at x = 0.98 with the exhaust at 101.325 kPa, worked out with IAPWS-95 beforehand
SENSITIVITIES = {4e5: (0.096, -0.0056, -0.56), 7e5: (0.098, -0.0049, -0.31), 10e5: (0.100, -0.0045, -0.20),
                 20e5: (0.105, -0.0042, -0.066), 40e5: (0.116, -0.0045, 0.019), 60e5: (0.127, -0.0053, 0.061)}
BARE = Balance(NONE, 0.0, 0.0, 293.15, 0.0, 0.0)


def analytic(p_line):
    """(T_exhaust, dx/dT, dx/dp_exhaust, dx/dp_line) by IAPWS-95: cp/h_fg, (dh/dp)_T/h_fg, -(h_f' + x h_fg')/h_fg."""
    def sat(q, p=p_line):
        return CP.PropsSI("H", "P", p, "Q", q, "Water")

    h_f, h_fg = sat(0), sat(1) - sat(0)
    T = CP.PropsSI("T", "P", P_EXHAUST, "H", h_f + X * h_fg, "Water")
    cp = CP.PropsSI("d(H)/d(T)|P", "P", P_EXHAUST, "T", T, "Water")
    dh_dp = CP.PropsSI("d(H)/d(P)|T", "P", P_EXHAUST, "T", T, "Water")
    step = 1e-4 * p_line
    df, dg = ((sat(q, p_line + step) - sat(q, p_line - step)) / (2 * step) for q in (0, 1))
    return T, cp / h_fg, dh_dp / h_fg, -(df + X * (dg - df)) / h_fg


@pytest.mark.parametrize("p_line", SENSITIVITIES)
def test_numerical_against_analytic_sensitivities(p_line):
    T, per_K, per_Pa2, per_Pa1 = analytic(p_line)
    budget = uncertainty_budget(BARE, [Input("p_line", p_line), Input("p_exhaust", P_EXHAUST), Input("T_exhaust", T)])
    assert budget.value == pytest.approx(X, abs=8e-5)  # the two formulations
    c = budget.sensitivity
    assert c["T_exhaust"] == pytest.approx(per_K, rel=2e-3)
    assert c["p_exhaust"] == pytest.approx(per_Pa2, rel=0.02)
    assert c["p_line"] == pytest.approx(per_Pa1, abs=4e-4 * 1e-5)  # 0.04 %pt/bar of up to 0.56
    printed = SENSITIVITIES[p_line]
    assert 100 * c["T_exhaust"] == pytest.approx(printed[0], abs=6e-4)
    assert 1e5 * c["p_exhaust"] == pytest.approx(printed[1], abs=1e-4)
    assert 1e7 * c["p_line"] == pytest.approx(printed[2], abs=6e-3)


def test_the_line_gauge_hardly_matters_where_its_sensitivity_changes_sign():
    """At 39.7/36.5/33.5/30.8 bar for x = 0.94/0.96/0.98/1.00 (the last: where h_g is greatest)."""
    for p_line, x in ((39.7e5, 0.94), (36.5e5, 0.96), (33.5e5, 0.98)):
        T = _exhaust_temperature(p_line, x)
        around = p_line + np.array([-1e5, 1e5])
        low, high = (uncertainty_budget(BARE, [Input("p_line", p), Input("p_exhaust", P_EXHAUST),
                                               Input("T_exhaust", T)]).sensitivity["p_line"] for p in around)
        assert low < 0 < high


def _exhaust_temperature(p_line, x):
    h = CP.PropsSI("H", "P", p_line, "Q", x, "Water")
    return CP.PropsSI("T", "P", P_EXHAUST, "H", h, "Water")


# quality, U by instruments and with sampling [%pt], decision by instruments and with sampling; k = 2
STATED = [
    (FACTORY, 0.9720, 0.08, 0.58, "accept", "undecided"),
    (BOILER, 0.9925, 0.07, 0.24, "reject", "reject"),
    (GEOTHERMAL, 0.9985, 0.09, 0.09, "undecided", "undecided"),
    (HIGH_SITE, 0.9650, 0.14, 0.48, "accept", "undecided"),
]


@pytest.mark.parametrize(("case", "x", "U", "U_all", "alone", "with_sampling"), STATED,
                         ids=[row[0]["title"] for row in STATED])
def test_stated_answers(case, x, U, U_all, alone, with_sampling):
    f = forecast(case)
    assert f.budget.value == pytest.approx(x, abs=1e-4)
    in_percent_points = (100 * f.instruments.U, 100 * f.budget.U)
    assert in_percent_points == pytest.approx((U, U_all), abs=0.006)
    assert f.verdicts.without_sampling.outcome == alone
    assert f.verdicts.with_sampling.outcome == with_sampling


def test_factory_main_is_undecided_by_its_sampling():
    f = forecast(FACTORY)
    assert f.verdicts.with_sampling.probability == pytest.approx(0.75, abs=0.01)
    assert f.verdicts.with_sampling.accept_from == pytest.approx(0.9748, abs=5e-5)
    assert f.sampling_dominates and f.best.group == "thermometer"


def test_boiler_line_gauge_contributes_next_to_nothing():
    gauge = [t for t in forecast(BOILER).terms if t.group == "line gauge"]
    assert 100 * np.hypot.reduce([t.contribution for t in gauge]) < 0.003
    assert 100 * next(t for t in forecast(BOILER).terms if t.group == "recovery factor").contribution < 0.006


def test_a_measured_heat_loss_decides_the_geothermal_case():
    """Loss known to 10 % by a normal reading: the doubt falls from 0.09 to 0.06 %pt and less, and it just accepts."""
    normal = GEOTHERMAL.with_(heat_loss_method=BY_NORMAL, T_normal=Entry(137.38, "°C"),
                              heat_loss_tolerance=Entry(10.0, "%"))
    f = forecast(normal)
    assert f.budget.value == pytest.approx(0.9985, abs=1e-4)
    assert 100 * f.instruments.U <= 0.06
    assert f.verdicts.without_sampling.outcome == "accept"


def test_the_barometer_decides_at_2600_metres():
    """With 101.3 kPa assumed for the gauge and the exhaust, the superheat looks 6.3 K and the verdict flips."""
    assumed = HIGH_SITE.with_(p_barometer=Entry(101.3, "kPa", "absolute"), p_exhaust=Entry(102.35, "kPa", "absolute"))
    f = forecast(assumed)
    assert f.assessment.superheat == pytest.approx(6.3, abs=0.15)
    assert f.budget.value == pytest.approx(0.9626, abs=3e-4)
    assert f.verdicts.without_sampling.outcome != "accept"
