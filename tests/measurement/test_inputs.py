"""Components and inputs: what they accept, and what they say when they do not."""

from dataclasses import FrozenInstanceError
from math import inf, nan, sqrt

import numpy as np
import pytest

from engine.measurement import (
    Component,
    Input,
    correlations_from_matrix,
    expanded,
    normal,
    rectangular,
    triangular,
    type_a,
)
from engine.measurement.sources import gather
from engine.steam import InputError


def test_records_are_frozen():
    with pytest.raises(FrozenInstanceError):
        normal("gauge", 1.0).u = 2.0


@pytest.mark.parametrize(("fields", "message"), [
    ({"u": nan}, "standard uncertainty of 'gauge': got nan, needs a finite number, zero or more"),
    ({"u": -1.0}, "got -1, needs a finite number, zero or more"),
    ({"u": inf}, "needs a finite number, zero or more"),
    ({"u": "much"}, "got much, needs a finite number"),
    ({"u": 1.0, "dof": 0}, "degrees of freedom of 'gauge': got 0, needs a number above 0"),
    ({"u": 1.0, "distribution": "flat"}, "needs one of: normal, rectangular, triangular, t"),
    ({"u": 1.0, "sign": 0}, "sign of 'gauge': got 0, needs 1 or -1"),
])
def test_component_refuses(fields, message):
    with pytest.raises(InputError, match=message):
        Component("gauge", **fields)


def test_all_faults_at_once():
    with pytest.raises(InputError) as caught:
        Component("gauge", u=nan, dof=-1, distribution="flat", sign=2)
    assert len(caught.value.faults) == 4


def test_input_refuses_what_is_no_number_and_two_causes_of_one_name():
    with pytest.raises(InputError, match="value of 'p_line': got nan, needs a finite number"):
        Input("p_line", nan)
    with pytest.raises(InputError, match="component of 'p_line': got gauge, needs a name used once"):
        Input("p_line", 1e6, (normal("gauge", 1.0), normal("gauge", 2.0)))


def test_input_adds_causes_in_squares_and_a_shared_cause_in_line():
    assert Input("p", 1.0, (normal("a", 3.0), normal("b", 4.0))).u == pytest.approx(5.0)
    assert Input("p", 1.0, (normal("a", 3.0, source="s"), normal("b", 4.0, source="s"))).u == pytest.approx(7.0)
    assert Input("p", 1.0).u == 0.0


def test_limits_and_certificates_become_standard_uncertainties():
    """JCGM 100, 4.3.7 and 4.3.9: a/√3 and a/√6; 4.3.3: U/k."""
    assert rectangular("class", 0.6).u == pytest.approx(0.6 / 3**0.5)
    assert triangular("class", 0.6).u == pytest.approx(0.6 / 6**0.5)
    assert [expanded("certificate", 0.6, k).u for k in (1.0, 2.0, 3.0)] == pytest.approx([0.6, 0.3, 0.2])


def test_expanded_needs_a_coverage_factor():
    with pytest.raises(InputError, match="coverage factor of 'certificate': got 0, needs a number above 0"):
        expanded("certificate", 1.0, 0)


def test_type_a_of_dependent_readings_is_larger_and_surer_of_nothing():
    independent, dependent = type_a("scatter", 1.0, 30), type_a("scatter", 1.0, 30, n_eff=10.0)
    assert independent.u == pytest.approx(1 / sqrt(30))
    assert dependent.u == pytest.approx(sqrt(29 / (30 * 9)))
    assert dependent.u > 1 / sqrt(10) > independent.u
    assert (independent.dof, dependent.dof) == (29, 9)


def test_type_a_of_hardly_independent_readings_is_that_of_one_reading():
    for n_eff in (1.0, 1.5, 2.0):
        got = type_a("scatter", 1.0, 30, n_eff=n_eff)
        assert (got.u, got.dof) == (pytest.approx(sqrt(29 / 30)), 1.0)
    assert type_a("scatter", 0.0, 30, n_eff=1.0).u == 0.0  # a gauge that was never seen to move


@pytest.mark.parametrize(("n", "n_eff", "message"), [
    (1, None, "number of readings of 'scatter': got 1, needs 2 or more"),
    (nan, None, "number of readings of 'scatter': got nan"),
    (30, 0.5, "number of independent readings of 'scatter': got 0.5, needs 1 to 30, the readings"),
    (30, 31.0, "got 31, needs 1 to 30"),
    (30, nan, "got nan, needs 1 to 30"),
])
def test_type_a_refuses(n, n_eff, message):
    with pytest.raises(InputError, match=message):
        type_a("scatter", 1.0, n, n_eff=n_eff)


def test_type_a_spread_is_unbiased_for_readings_that_follow_one_another():
    """Mean of u² over 4000 simulated first-order series against the true variance of their mean."""
    rng, n, rho, runs = np.random.default_rng(3), 40, 0.6, 4000
    y = np.empty((n, runs))
    y[0] = rng.standard_normal(runs) / sqrt(1 - rho**2)
    for i in range(1, n):
        y[i] = rho * y[i - 1] + rng.standard_normal(runs)
    lags = np.arange(1, n)
    n_eff = n / (1 + 2 * ((1 - lags / n) * rho**lags).sum())
    said = np.mean([type_a("scatter", s, n, n_eff).u ** 2 for s in y.std(axis=0, ddof=1)])
    assert said == pytest.approx(y.mean(axis=0).var(), rel=0.07)


def test_one_cause_in_two_inputs_is_one_column():
    barometer = normal("barometer", 50.0, source="barometer")
    inputs = [Input("p_line", 1e6, (rectangular("class", 1e4), barometer)), Input("p_exhaust", 1e5, (barometer,))]
    got = gather(inputs, [normal("sampling", 0.002)])
    assert got.labels == ("p_line: class", "barometer", "sampling")
    assert got.quantities == (("p_line",), ("p_line", "p_exhaust"), ("result",))
    assert got.spread[:, 1].tolist() == [50.0, 50.0, 0.0]


@pytest.mark.parametrize(("correlations", "message"), [
    ({("a", "c"): 0.5}, "correlation: got a and c, needs two different causes of the budget\n.*are: a: x, b: x"),
    ({("a", "a"): 0.5}, "needs two different causes"),
    ({("a", "b"): 1.5}, "correlation of a and b: got 1.5, needs a number from -1 to 1"),
    ({("a", "b"): nan}, "needs a number from -1 to 1"),
])
def test_correlations_that_cannot_be(correlations, message):
    with pytest.raises(InputError, match=message):
        gather([Input("a", 0.0, (normal("x", 1.0),)), Input("b", 0.0, (normal("x", 1.0),))], (), correlations)


def test_correlations_that_cannot_be_together():
    inputs = [Input(n, 0.0, (normal("x", 1.0),)) for n in "abc"]
    with pytest.raises(InputError, match="needs a positive semi-definite matrix"):
        gather(inputs, (), {("a", "b"): 0.9, ("b", "c"): 0.9, ("a", "c"): -0.9})


def test_an_input_with_two_causes_is_not_named_for_one():
    inputs = [Input("a", 0.0, (normal("x", 1.0), normal("y", 1.0))), Input("b", 0.0, (normal("x", 1.0),))]
    with pytest.raises(InputError, match="two different causes"):
        gather(inputs, (), {("a", "b"): 0.5})
    assert gather(inputs, (), {("a: y", "b"): 0.5}).correlation[1, 2] == 0.5


def test_shared_cause_must_be_described_alike_and_inputs_named_apart():
    one, other = normal("x", 1.0, source="s"), rectangular("x", 1.0, source="s")
    with pytest.raises(InputError, match="shared cause 's'"):
        gather([Input("a", 0.0, (one,)), Input("b", 0.0, (other,))])
    with pytest.raises(InputError, match="input: got a, needs a name used once"):
        gather([Input("a", 0.0), Input("a", 1.0)])


def test_matrix_must_be_one_of_correlations():
    with pytest.raises(InputError, match="a symmetric 2 by 2 matrix"):
        correlations_from_matrix(["a", "b"], [[1, 0.5], [0.4, 1]])
