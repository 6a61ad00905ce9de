"""The budget: adds up, follows analytic slopes, shares causes, leaves groups out, says what would help."""

from math import inf, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.measurement import (
    SAMPLING,
    Input,
    coverage_factor,
    decimals_of,
    normal,
    numerical_tolerance,
    rectangular,
    result_correlation,
    type_a,
    uncertainty_budget,
)
from engine.steam import InputError


def product(a, b):
    return a * b


INPUTS = (Input("a", 2.0, (normal("gauge", 0.1, group="gauge"), rectangular("class", 0.2, group="gauge"))),
          Input("b", 5.0, (type_a("scatter", 0.3, 9),)))
LINE = normal("representativeness", 0.4, group=SAMPLING)


def test_rows_add_up_to_the_variance():
    budget = uncertainty_budget(product, INPUTS, on_result=[LINE])
    assert sum(row.share for row in budget.rows) == pytest.approx(1.0, abs=1e-14)
    assert sqrt(sum(row.contribution**2 for row in budget.rows)) == pytest.approx(budget.u, rel=1e-14)
    assert pytest.approx(budget.k * budget.u) == budget.U
    for row in budget.rows:
        assert row.c * row.u == pytest.approx(row.contribution)


def test_rows_add_up_with_correlations_too():
    budget = uncertainty_budget(product, INPUTS, correlations={("a: gauge", "b: scatter"): -0.8})
    assert sum(row.share for row in budget.rows) == pytest.approx(1.0, abs=1e-14)
    assert budget.u < uncertainty_budget(product, INPUTS).u


@settings(max_examples=60, deadline=None)
@given(st.lists(st.tuples(st.floats(0.5, 50), st.floats(1e-4, 0.05)), min_size=3, max_size=3))
def test_slopes_against_analytic_ones(drawn):
    """f = a ln b / √c has its derivatives in closed form; relative uncertainties up to 5 %."""
    (a, ua), (b, ub), (c, uc) = drawn
    b += 1.0
    inputs = [Input(n, v, (normal("u", v * u),)) for n, v, u in (("a", a, ua), ("b", b, ub), ("c", c, uc))]
    got = uncertainty_budget(lambda a, b, c: a * np.log(b) / np.sqrt(c), inputs).sensitivity
    scale = abs(a / np.sqrt(c))
    assert got["a"] == pytest.approx(np.log(b) / np.sqrt(c), rel=1e-7, abs=1e-9)
    assert got["b"] == pytest.approx(a / b / np.sqrt(c), rel=1e-7, abs=1e-9 * scale)
    assert got["c"] == pytest.approx(-0.5 * a * np.log(b) / c**1.5, rel=1e-7, abs=1e-9 * scale)


def test_slopes_at_zero_and_without_uncertainty():
    got = uncertainty_budget(lambda v, w: 3.0 * v + w * w, [Input("v", 0.0), Input("w", 4.0)])
    assert got.sensitivity == pytest.approx({"v": 3.0, "w": 8.0}, rel=1e-9)
    assert (got.value, got.u, got.U, got.dof) == (16.0, 0.0, 0.0, inf)


def test_a_row_without_uncertainty_still_shows_its_sensitivity():
    got = uncertainty_budget(product, [Input("a", 2.0, (normal("gauge", 0.0),)), Input("b", 5.0)])
    assert got.rows[0].c == pytest.approx(5.0)
    assert got.rows[0].share == 0.0


def test_shared_cause_cancels_in_a_difference_and_doubles_in_a_sum():
    shared = normal("barometer", 3.0, source="barometer")
    inputs = [Input("a", 10.0, (shared,)), Input("b", 4.0, (shared,))]
    assert uncertainty_budget(lambda a, b: a - b, inputs).u == pytest.approx(0, abs=1e-9)
    assert uncertainty_budget(lambda a, b: a + b, inputs).u == pytest.approx(6.0)


def test_shared_cause_of_opposite_sign():
    inputs = [Input("a", 10.0, (normal("leg", 3.0, source="leg"),)),
              Input("b", 4.0, (normal("leg", 3.0, source="leg", sign=-1),))]
    assert uncertainty_budget(lambda a, b: a + b, inputs).u == pytest.approx(0, abs=1e-9)


def test_shared_cause_is_the_same_as_full_correlation():
    apart = [Input("a", 2.0, (normal("u", 0.1),)), Input("b", 5.0, (normal("u", 0.3),))]
    shared = [Input("a", 2.0, (normal("u", 0.1, source="s"),)), Input("b", 5.0, (normal("u", 0.3, source="s"),))]
    full = uncertainty_budget(product, apart, correlations={("a", "b"): 1.0})
    assert uncertainty_budget(product, shared).u == pytest.approx(full.u, rel=1e-12)


def test_with_and_without_sampling():
    whole = uncertainty_budget(product, INPUTS, on_result=[LINE])
    without = whole.without(SAMPLING)
    alone = uncertainty_budget(product, INPUTS)
    assert whole.value == without.value == alone.value
    assert without.u == pytest.approx(alone.u, rel=1e-14) and alone.u < whole.u
    assert without.dof == pytest.approx(alone.dof) and pytest.approx(alone.U) == without.U
    assert SAMPLING in whole.groups and SAMPLING not in without.groups
    assert sum(row.share for row in without.rows) == pytest.approx(1.0)


def test_leaving_out_keeps_the_correlations_of_the_rest():
    whole = uncertainty_budget(product, INPUTS, on_result=[LINE], correlations={("a: class", "b: scatter"): 0.6})
    alone = uncertainty_budget(product, INPUTS, correlations={("a: class", "b: scatter"): 0.6})
    assert whole.without(SAMPLING).u == pytest.approx(alone.u, rel=1e-14)


def test_a_better_instrument_helps_as_much_as_said():
    whole = uncertainty_budget(product, INPUTS, on_result=[LINE])
    best = whole.improvements()[0]
    halved = (Input("a", 2.0, (normal("gauge", 0.05), rectangular("class", 0.1))), INPUTS[1])
    assert best.group == "gauge"
    assert best.u_halved == pytest.approx(uncertainty_budget(product, halved, on_result=[LINE]).u, rel=1e-9)
    assert best.u_removed < best.u_halved < whole.u
    assert [i.u_halved for i in whole.improvements()] == sorted(i.u_halved for i in whole.improvements())
    assert {i.group for i in whole.improvements()} == {"gauge", "b", SAMPLING}


def test_more_uncertainty_never_makes_the_result_surer():
    before = uncertainty_budget(product, INPUTS)
    assert before.improved("gauge", 2.0).u > before.u


def test_welch_satterthwaite():
    """JCGM 100, G.4.1: equal contributions with 4 degrees of freedom each have 8 together."""
    inputs = [Input(n, 1.0, (normal("readings", 1.0, dof=4),)) for n in "ab"]
    assert uncertainty_budget(lambda a, b: a + b, inputs).dof == pytest.approx(8.0)
    assert uncertainty_budget(lambda a, b: a + 0 * b, inputs).dof == pytest.approx(4.0)


def test_correlated_causes_are_no_surer_than_the_one_known_least():
    inputs = [Input(n, 1.0, (normal("readings", 1.0, dof=dof),)) for n, dof in (("a", 4.0), ("b", 50.0))]
    tied = uncertainty_budget(lambda a, b: a + b, inputs, correlations={("a", "b"): 0.5})
    assert tied.dof == pytest.approx(4.0)


def test_coverage_widens_the_interval():
    assert [round(uncertainty_budget(product, INPUTS, coverage=c).k, 1) for c in (0.6827, 0.95, 0.9973)] == sorted(
        round(uncertainty_budget(product, INPUTS, coverage=c).k, 1) for c in (0.6827, 0.95, 0.9973))
    assert coverage_factor(0.95) == pytest.approx(1.959964, abs=1e-6)


def test_correlation_of_results():
    total = uncertainty_budget(lambda a, b: a + b, INPUTS)
    difference = uncertainty_budget(lambda a, b: -a - b, INPUTS)
    assert result_correlation(total, difference) == pytest.approx(-1.0)
    with pytest.raises(InputError, match="two results of the same inputs"):
        result_correlation(total, total.without("gauge"))


def test_the_model_is_called_once():
    calls = []

    def model(a, b):
        calls.append(a.shape)
        return a * b

    uncertainty_budget(model, INPUTS)
    assert calls == [(9,)]


def test_no_result_at_the_readings_or_beside_them():
    with pytest.raises(InputError, match="result: got nan, needs readings the model has a result for"):
        uncertainty_budget(lambda a, b: a * np.nan, INPUTS)
    with pytest.raises(InputError, match="sensitivity to 'a': got no result") as caught:
        uncertainty_budget(lambda a, b: np.where(a < 2.0001, a, np.nan), INPUTS)
    assert "Monte Carlo" in str(caught.value)


def test_a_model_may_give_a_status_beside_its_values():
    assert uncertainty_budget(lambda a, b: (a * b, np.zeros(a.shape, dtype=int)), INPUTS).value == 10.0


def test_refusals():
    with pytest.raises(InputError, match="coverage probability: got 95, needs a number between 0 and 1"):
        uncertainty_budget(product, INPUTS, coverage=95)
    with pytest.raises(InputError, match="model result: got shape"):
        uncertainty_budget(lambda a, b: 1.0, INPUTS)
    budget = uncertainty_budget(product, INPUTS)
    with pytest.raises(InputError, match="group: got thermometer, needs one of: gauge, b"):
        budget.improved("thermometer")
    with pytest.raises(InputError, match="factor: got -1"):
        budget.improved("gauge", -1)


@pytest.mark.parametrize(("u", "decimals", "tolerance"), [
    (0.0029, 4, 5e-5), (0.00994, 4, 5e-5), (0.00996, 3, 5e-4), (32.0, 0, 0.5), (320.0, -1, 5.0), (1.0, 1, 0.05),
])
def test_digits_follow_the_uncertainty(u, decimals, tolerance):
    assert decimals_of(u) == decimals
    assert numerical_tolerance(u) == pytest.approx(tolerance)


def test_digits_without_uncertainty():
    assert (decimals_of(0.0), numerical_tolerance(0.0)) == (0, 0.0)
