"""The uncertainty of a quality: directions, budget against Monte Carlo, and how often the truth is held."""

import numpy as np
import pytest

from engine.calorimeter import Status, exhaust_temperature, quality
from engine.measurement import (
    SAMPLING,
    Input,
    Instrument,
    certificate,
    compare,
    effective_number,
    monte_carlo,
    normal,
    rectangular,
    resolution,
    type_a,
    uncertainty_budget,
)

P_EXHAUST, LOSS = 101_325.0, 2000.0
BAROMETER = Instrument("certificate", extra=(certificate(100.0), resolution(100.0)))
THERMOMETER = Instrument("IEC 60751", "A", extra=(resolution(0.1),))


def model(p_line, p_exhaust, T_exhaust, heat_loss):
    got = quality(p_line, p_exhaust, T_exhaust, heat_loss=heat_loss)
    return got.x, got.status


def reading(p_line, T_exhaust, scatter=(), p_exhaust=P_EXHAUST):
    gauge = Instrument("EN 837-1", "1", (0.0, 2 * p_line))
    barometer = BAROMETER.components(P_EXHAUST, shared="barometer", read_once=True)
    return [
        Input("p_line", p_line, gauge.components(p_line - P_EXHAUST, group="line gauge") + barometer),
        Input("p_exhaust", p_exhaust, (rectangular("back pressure", 300.0), *barometer)),
        Input("T_exhaust", T_exhaust, THERMOMETER.components(T_exhaust, group="thermometer") + tuple(scatter)),
        Input("heat_loss", LOSS, (rectangular("conductance", 800.0),)),
    ]


def seen(p_line, x):
    return exhaust_temperature(p_line, x, P_EXHAUST, heat_loss=LOSS).T_exhaust


@pytest.mark.parametrize(("p_line", "per_kelvin", "per_kPa", "per_bar"), [
    (4e5, 0.096, -0.0056, -0.56), (7e5, 0.098, -0.0049, -0.31), (10e5, 0.100, -0.0045, -0.20),
    (20e5, 0.105, -0.0042, -0.066), (40e5, 0.116, -0.0045, 0.019), (60e5, 0.127, -0.0053, 0.061),
])
def test_sensitivities_in_percent_points(p_line, per_kelvin, per_kPa, per_bar):
    """Against values worked out with IAPWS-95 for x = 0.98: the line gauge hardly matters near 35 bar."""
    T = exhaust_temperature(p_line, 0.98, P_EXHAUST).T_exhaust
    inputs = [Input("p_line", p_line), Input("p_exhaust", P_EXHAUST), Input("T_exhaust", T), Input("heat_loss", 0.0)]
    got = uncertainty_budget(model, inputs).sensitivity
    assert got["T_exhaust"] * 100 == pytest.approx(per_kelvin, abs=6e-4)
    assert got["p_exhaust"] * 1e5 == pytest.approx(per_kPa, abs=1e-4)
    assert got["p_line"] * 1e7 == pytest.approx(per_bar, abs=6e-3)
    assert got["heat_loss"] > 0  # heat lost on the way was in the line: more of it, drier steam


@pytest.mark.parametrize("p_line", [3e5, 10e5, 40e5, 80e5])
@pytest.mark.parametrize("x", [0.985, 0.992])
def test_budget_against_monte_carlo(p_line, x):
    """Away from both edges the two agree: u within 1 %, ends within 5 % of U (flat limits make it narrower)."""
    inputs = reading(p_line, seen(p_line, x))
    budget, drawn = uncertainty_budget(model, inputs), monte_carlo(model, inputs, draws=50_000)
    assert budget.value == pytest.approx(x, abs=1e-8)
    assert drawn.value == pytest.approx(x, abs=5 * budget.u / 200)
    assert drawn.u == pytest.approx(budget.u, rel=0.012)
    assert drawn.symmetric == pytest.approx((x - budget.U, x + budget.U), abs=0.08 * budget.U)


def test_near_saturation_some_draws_cannot_be_read_and_it_is_said():
    inputs = reading(10e5, 373.124 + 0.4)  # Tsat(101.325 kPa) = 373.124 K; class A allows 0.35 K
    drawn = monte_carlo(model, inputs, draws=50_000)
    assert 0 < drawn.unusable < 0.2
    assert set(drawn.unusable_by_status) == {Status.NOT_SUPERHEATED}
    comparison = compare(uncertainty_budget(model, inputs), drawn)
    assert comparison.reasons[0].code == "unusable"


def test_shared_barometer_is_one_row_and_weighs_more_than_apart():
    """Both pressures err upwards together and both lower x (below 30 bar): the two parts add."""
    budget = uncertainty_budget(model, reading(4e5, seen(4e5, 0.99)))
    rows = [row for row in budget.rows if row.source == "barometer: certificate"]
    assert len(rows) == 1 and rows[0].quantities == ("p_line", "p_exhaust")
    parts = [budget.sensitivity[n] * 50.0 for n in ("p_line", "p_exhaust")]
    assert abs(rows[0].contribution) == pytest.approx(abs(sum(parts)))
    assert abs(sum(parts)) > np.hypot(*parts)


def test_sampling_dominates_and_says_so():
    line = normal("representativeness", 0.0025, group=SAMPLING)
    budget = uncertainty_budget(model, reading(10e5, seen(10e5, 0.972)), on_result=[line])
    assert budget.improvements()[0].group == SAMPLING
    assert budget.u > 5 * budget.without(SAMPLING).u


@pytest.mark.slow
def test_two_thousand_tests_hold_the_truth_as_often_as_they_claim():
    """Instruments wrong within their classes, 30 readings that follow one another, one known truth.

    Expected: 95 % with a standard error of 0.5 %. A little above, because limits are flat and the
    interval supposes a normal distribution; never below.
    """
    runs, n, rho, rng = 2000, 30, 0.5, np.random.default_rng(20)
    p_line, x = 10e5, 0.975
    T = seen(p_line, x)
    nominal = reading(p_line, T)
    wrong = {i.name: sum(_drawn(c, runs, rng) for c in i.components if not c.source) for i in nominal}
    barometer = sum(_drawn(c, runs, rng) for c in nominal[0].components if c.source)
    noise = np.empty((n, runs))
    noise[0] = rng.standard_normal(runs)
    for i in range(1, n):
        noise[i] = rho * noise[i - 1] + np.sqrt(1 - rho**2) * rng.standard_normal(runs)
    held = 0
    for run in range(runs):
        readings = T + wrong["T_exhaust"][run] + 0.6 * noise[:, run]
        scatter = type_a("scatter", readings.std(ddof=1), n, effective_number(readings).n_eff)
        inputs = reading(p_line + wrong["p_line"][run] + barometer[run], float(readings.mean()), (scatter,),
                         P_EXHAUST + wrong["p_exhaust"][run] + barometer[run])
        heat = Input("heat_loss", LOSS + wrong["heat_loss"][run], inputs[3].components)
        budget = uncertainty_budget(model, [*inputs[:3], heat])
        held += abs(budget.value - x) <= budget.U
    assert 0.94 <= held / runs <= 0.975


def _drawn(component, runs, rng):
    if component.distribution == "rectangular":
        return component.u * np.sqrt(3) * rng.uniform(-1, 1, runs)
    return component.u * rng.standard_normal(runs)
