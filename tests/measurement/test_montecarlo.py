"""Monte Carlo: repeatable, fair to every distribution, honest about draws without a result."""

from math import sqrt

import numpy as np
import pytest

from engine.measurement import (
    SAMPLING,
    Component,
    Input,
    compare,
    monte_carlo,
    normal,
    rectangular,
    triangular,
    type_a,
    uncertainty_budget,
)
from engine.measurement.montecarlo import BLOCK
from engine.steam import InputError

DRAWS = 100_000  # standard error of u: 0.22 %; of a mean: 0.32 % of u


def one(component, value=0.0):
    return [Input("a", value, (component,))]


def same(a):
    return a


def test_one_seed_one_answer():
    first, again, other = (monte_carlo(same, one(normal("u", 1.0)), draws=5000, seed=s) for s in (4, 4, 5))
    assert (first.value, first.u, first.shortest) == (again.value, again.u, again.shortest)
    assert np.array_equal(first.quantiles, again.quantiles)
    assert first.value != other.value


def test_global_random_state_is_left_alone():
    state = np.random.get_state()[1].copy()  # noqa: NPY002 - the old global state is what must not move
    monte_carlo(same, one(normal("u", 1.0)), draws=1000, coverage=0.9)
    assert np.array_equal(np.random.get_state()[1], state)  # noqa: NPY002


@pytest.mark.parametrize(("component", "u", "kurtosis"), [
    (normal("x", 2.0), 2.0, 3.0),
    (rectangular("x", 2.0), 2 / sqrt(3), 1.8),
    (triangular("x", 2.0), 2 / sqrt(6), 2.4),
    (Component("x", 2.0, "t", dof=10), 2 * sqrt(10 / 8), 4.0),  # variance ν/(ν - 2), kurtosis 3 + 6/(ν - 4)
])
def test_distributions_have_their_moments(component, u, kurtosis):
    got = monte_carlo(same, one(component, 7.0), draws=400_000)
    assert got.value == pytest.approx(7.0, abs=4 * u / sqrt(400_000))
    assert got.u == pytest.approx(u, rel=0.006)
    assert got.kurtosis == pytest.approx(kurtosis, rel=0.05)
    assert abs(got.skewness) < 0.05


def test_limits_are_never_passed():
    got = monte_carlo(same, one(rectangular("x", 2.0)), draws=DRAWS)
    assert -2.0 <= got.quantiles[0] < -1.99 and 1.99 < got.quantiles[-1] <= 2.0


def test_shared_cause_is_drawn_once():
    shared = rectangular("barometer", 3.0, source="barometer")
    inputs = [Input("a", 10.0, (shared,)), Input("b", 4.0, (shared,))]
    assert monte_carlo(lambda a, b: a - b, inputs, draws=2000, coverage=0.9).u == pytest.approx(0, abs=1e-12)
    assert monte_carlo(lambda a, b: a + b, inputs, draws=DRAWS).u == pytest.approx(6 / sqrt(3), rel=0.01)


@pytest.mark.parametrize("r", [-1.0, -0.6, 0.9, 1.0])
def test_correlated_draws(r):
    inputs = [Input("a", 0.0, (normal("x", 3.0),)), Input("b", 0.0, (normal("x", 4.0),))]
    got = monte_carlo(lambda a, b: a + b, inputs, correlations={("a", "b"): r}, draws=DRAWS)
    assert got.u == pytest.approx(sqrt(25 + 24 * r), rel=0.01)


def test_correlated_readings_share_their_tails():
    """Means of the same five sets follow one Student's t: kurtosis grows as for a single one."""
    inputs = [Input(n, 0.0, (Component("readings", 1.0, "t", dof=9),)) for n in "ab"]
    got = monte_carlo(lambda a, b: a + b, inputs, correlations={("a", "b"): 0.5}, draws=400_000)
    assert got.u == pytest.approx(sqrt(3 * 9 / 7), rel=0.01)
    assert got.kurtosis == pytest.approx(3 + 6 / 5, rel=0.06)


def test_agrees_with_the_budget_over_a_grid_of_cases():
    """Mildly bent models and mixed distributions: u within 1 %, intervals within 3 % of U."""
    for a, ua in ((1.0, 0.01), (10.0, 0.2)):
        for b, ub in ((0.5, 0.004), (5.0, 0.02)):
            inputs = [Input("a", a, (normal("x", ua), rectangular("y", ua))), Input("b", b, (normal("x", ub),))]
            budget = uncertainty_budget(lambda a, b: a * np.exp(-b), inputs)
            got = monte_carlo(lambda a, b: a * np.exp(-b), inputs, draws=DRAWS)
            assert got.u == pytest.approx(budget.u, rel=0.01)
            assert got.symmetric == pytest.approx((budget.value - budget.U, budget.value + budget.U),
                                                  abs=0.03 * budget.U)


def test_with_and_without_sampling_from_one_run():
    line = normal("representativeness", 0.4, group=SAMPLING)
    whole = monte_carlo(same, one(normal("x", 0.3)), on_result=[line], draws=DRAWS)
    alone = monte_carlo(same, one(normal("x", 0.3)), draws=DRAWS)
    assert whole.u == pytest.approx(0.5, rel=0.01)
    assert whole.without_sampling.u == alone.u and whole.without_sampling.shortest == alone.shortest
    assert alone.without_sampling is None


def test_other_causes_on_the_result_are_not_sampling():
    repeat = normal("repeatability", 0.4, group="runs")
    got = monte_carlo(same, one(normal("x", 0.3)), on_result=[repeat], draws=DRAWS)
    assert got.u == pytest.approx(0.5, rel=0.01) and got.without_sampling is None


def edge(a):
    """No result below zero, as when an exhaust is no longer superheated."""
    return np.where(a >= 0, a, np.nan), np.where(a >= 0, 0, 2)


def test_draws_without_a_result_are_counted_by_status():
    got = monte_carlo(edge, one(normal("x", 1.0), 1.0), draws=DRAWS)
    assert got.unusable == pytest.approx(0.158655, abs=0.005)  # Φ(-1)
    assert got.unusable_by_status == {2: pytest.approx(got.unusable)}
    assert got.quantiles[0] >= 0
    comparison = compare(uncertainty_budget(edge, one(normal("x", 1.0), 1.0)), got)
    assert not comparison.agree
    assert comparison.reasons[0].code == "unusable"
    assert comparison.reasons[0].size == got.unusable
    assert "of the draws have no result" in comparison.sentence


def test_a_few_draws_without_a_result_are_said_even_when_the_intervals_agree():
    inputs = one(normal("x", 1.0), 3.5)
    comparison = compare(uncertainty_budget(edge, inputs), monte_carlo(edge, inputs, draws=400_000))
    assert comparison.agree
    assert comparison.sentence.startswith("The budget and Monte Carlo give the same interval, but 0.02% of the draws")


def test_infinite_results_are_no_results():
    got = monte_carlo(lambda a: np.where(a > 0, np.inf, a), one(normal("x", 1.0)), draws=DRAWS)
    assert got.unusable == pytest.approx(0.5, abs=0.01) and got.unusable_by_status == {}


def test_too_few_results_for_an_interval():
    with pytest.raises(InputError, match="draws with a result: got 0, needs at least 2000 of 5000"):
        monte_carlo(lambda a: a * np.nan, one(normal("x", 1.0)), draws=5000)


def test_few_readings_explain_a_difference():
    inputs = one(type_a("scatter", 1.0, 4))
    comparison = compare(uncertainty_budget(lambda a: a + 0, inputs), monte_carlo(same, inputs, draws=DRAWS))
    codes = [r.code for r in comparison.reasons]
    assert comparison.agree or "tails" in codes


def test_a_difference_always_has_a_reason():
    inputs = one(normal("x", 1.0))
    comparison = compare(uncertainty_budget(same, inputs), monte_carlo(same, one(normal("x", 1.2)), draws=DRAWS))
    assert [r.code for r in comparison.reasons] == ["spread"]
    assert comparison.reasons[0].size == pytest.approx(0.2, abs=0.01)
    assert "the standard uncertainties differ by +" in comparison.sentence
    assert comparison.off_lower > comparison.tolerance == 0.05


def test_probability_between_limits():
    got = monte_carlo(same, one(normal("x", 1.0)), draws=400_000)
    assert got.probability(lower=-1.0) == pytest.approx(0.841345, abs=0.003)
    assert got.probability(-1.0, 1.0) == pytest.approx(0.682689, abs=0.003)
    assert (got.probability(upper=-100.0), got.probability()) == (0.0, 1.0)


def test_no_uncertainty_at_all():
    got = monte_carlo(same, [Input("a", 2.0)], draws=2000, coverage=0.9)
    assert (got.value, got.u, got.symmetric, got.skewness, got.kurtosis) == (2.0, 0.0, (2.0, 2.0), 0.0, 3.0)


def test_blocks_are_bounded_and_progress_is_told():
    sizes, told = [], []

    def model(a):
        sizes.append(len(a))
        return a

    monte_carlo(model, one(normal("x", 1.0)), draws=3 * BLOCK + 5, progress=told.append)
    assert sizes == [BLOCK] * 3 + [5]
    assert told == sorted(told) and told[-1] == 1.0


@pytest.mark.parametrize(("arguments", "message"), [
    ({"draws": 10}, "number of draws: got 10, needs a whole number from 2000 to"),
    ({"draws": 1e6}, "number of draws"),
    ({"seed": -1}, "seed: got -1, needs a whole number, zero or more"),
    ({"coverage": 1.0}, "coverage probability"),
])
def test_refusals(arguments, message):
    with pytest.raises(InputError, match=message):
        monte_carlo(same, one(normal("x", 1.0)), **arguments)


def test_coefficients_between_rectangular_causes_are_refused():
    inputs = [Input(n, 0.0, (rectangular("x", 1.0),)) for n in "ab"]
    with pytest.raises(InputError, match="correlated cause 'a: x': got rectangular, needs a normal distribution"):
        monte_carlo(lambda a, b: a + b, inputs, correlations={("a", "b"): 0.5}, draws=2000)


def test_long_tails_are_not_taken_for_a_bend():
    """One degree of freedom: mean and third moment of the draws are those of the farthest few."""
    inputs = [Input("a", 1.0, (normal("gauge", 1.0), Component("runs", 0.3, "t", 1.0)))]
    for seed in range(4):
        drawn = monte_carlo(lambda a: a, inputs, draws=100_000, seed=seed)
        codes = {r.code for r in compare(uncertainty_budget(lambda a: a, inputs), drawn).reasons}
        assert "tails" in codes and "curved" not in codes
    def bends(a):
        return np.exp(np.minimum(a, 10.0))

    drawn = monte_carlo(bends, inputs, draws=100_000)
    assert "curved" in {r.code for r in compare(uncertainty_budget(bends, inputs), drawn).reasons}
