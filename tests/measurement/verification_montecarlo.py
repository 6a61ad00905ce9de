"""The examples of JCGM 101:2008, clause 9, figures from memory of the document unless derived beside them."""

from math import sqrt

import numpy as np
import pytest

from engine.measurement import Input, compare, monte_carlo, normal, rectangular, uncertainty_budget


def added(X1, X2, X3, X4):
    return X1 + X2 + X3 + X4


def four(*components):
    return [Input(f"X{i}", 0.0, (c,)) for i, c in enumerate(components, 1)]


NORMAL, FLAT, WIDE = normal("x", 1.0), rectangular("x", sqrt(3)), rectangular("x", 10 * sqrt(3))


@pytest.mark.parametrize(("inputs", "u", "half_width", "u_tolerance", "tolerance"), [
    (four(NORMAL, NORMAL, NORMAL, NORMAL), 2.00, 3.92, 0.005, 0.02),  # 9.2.2
    (four(FLAT, FLAT, FLAT, FLAT), 2.00, 3.88, 0.005, 0.02),  # 9.2.3; 3.88 also analytically
    (four(FLAT, FLAT, FLAT, WIDE), 10.1, 17.0, 0.06, 0.1),  # 9.2.4
])
def test_additive_model(inputs, u, half_width, u_tolerance, tolerance):
    """Tolerances: the printed digits, or four standard errors of an end from 10⁶ draws where that is more."""
    got = monte_carlo(added, inputs)
    assert got.value == pytest.approx(0, abs=4 * got.u / 1000)
    assert got.u == pytest.approx(u, abs=u_tolerance)
    for low, high in (got.symmetric, got.shortest):
        assert (high - low) / 2 == pytest.approx(half_width, abs=tolerance)
    assert got.symmetric == pytest.approx((-half_width, half_width), abs=1.5 * tolerance)


def test_9_2_2_agrees_with_the_budget_and_9_2_4_does_not():
    inputs = four(NORMAL, NORMAL, NORMAL, NORMAL)
    assert compare(uncertainty_budget(added, inputs), monte_carlo(added, inputs)).agree
    inputs = four(FLAT, FLAT, FLAT, WIDE)
    budget = uncertainty_budget(added, inputs)
    assert pytest.approx(19.9, abs=0.05) == budget.U  # the document: ± 19.9 against ± 17.0
    comparison = compare(budget, monte_carlo(added, inputs))
    assert not comparison.agree
    assert [r.code for r in comparison.reasons] == ["flat"]


def loss(X1, X2):
    return X1**2 + X2**2


def loss_inputs(x1):
    return [Input("X1", x1, (normal("x", 0.005),)), Input("X2", 0.0, (normal("x", 0.005),))]


# 9.4, in 1e-6: x1, r, mean, u, shortest 95 % interval. Exact: mean = x1² + 2 σ² and
# u² = 4 x1² σ² + 4 σ⁴ (1 + r²), for any correlation r.
@pytest.mark.parametrize(("x1", "r", "mean", "u", "shortest"), [
    (0.000, 0.0, 50, 50, (0, 150)),
    (0.010, 0.0, 150, 112, (0, 367)),
    (0.050, 0.0, 2551, 502, (1590, 3543)),
    (0.000, 0.9, 50, 67, (0, 185)),
    (0.010, 0.9, 150, 121, (13, 398)),
    (0.050, 0.9, 2551, 505, (1628, 3555)),
])
def test_9_4_comparison_loss(x1, r, mean, u, shortest):
    correlations = {("X1", "X2"): r} if r else None
    got = monte_carlo(loss, loss_inputs(x1), correlations=correlations)
    assert got.value * 1e6 == pytest.approx(x1**2 * 1e6 + 50, abs=4 * got.u * 1e3)
    assert got.u * 1e6 == pytest.approx(1e6 * sqrt(4 * x1**2 * 25e-6 + 4 * 625e-12 * (1 + r**2)), rel=0.005)
    assert got.value * 1e6 == pytest.approx(mean, abs=max(0.3, 4 * got.u * 1e3))
    assert got.u * 1e6 == pytest.approx(u, rel=0.01)
    # ends of a shortest interval are shallow minima of a noisy width
    assert np.array(got.shortest) * 1e6 == pytest.approx(shortest, abs=max(2, 0.05 * u))


@pytest.mark.parametrize(("x1", "y", "u"), [(0.0, 0, 0), (0.010, 100, 100), (0.050, 2500, 500)])
def test_9_4_what_the_budget_says_instead(x1, y, u):
    budget = uncertainty_budget(loss, loss_inputs(x1))
    assert (budget.value * 1e6, budget.u * 1e6) == pytest.approx((y, u), abs=1e-6)
    comparison = compare(budget, monte_carlo(loss, loss_inputs(x1), draws=100_000))
    assert not comparison.agree
    assert "curved" in [r.code for r in comparison.reasons]

