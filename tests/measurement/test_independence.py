"""Effective number of independent readings, on series of known correlation."""

import numpy as np
import pytest

from engine.measurement import effective_number
from engine.steam import InputError


def first_order(n, rho, rng):
    y = np.empty(n)
    y[0] = rng.standard_normal() / np.sqrt(1 - rho**2)
    for i in range(1, n):
        y[i] = rho * y[i - 1] + rng.standard_normal()
    return y


@pytest.mark.parametrize(("n", "rho"), [(30, 0.0), (30, 0.5), (100, 0.5), (100, 0.8), (1000, 0.8), (1000, 0.95)])
def test_first_order_series(n, rho):
    """Median of 200 runs against n (1 - ρ)/(1 + ρ), within 15 %."""
    rng = np.random.default_rng(2)
    found = np.median([effective_number(first_order(n, rho, rng)).n_eff for _ in range(200)])
    assert found == pytest.approx(n * (1 - rho) / (1 + rho), rel=0.15)


def test_the_known_case():
    """30 readings with r1 = 0.5 are worth 10: n (1 - r1)/(1 + r1)."""
    rng = np.random.default_rng(9)
    found = np.mean([effective_number(first_order(30, 0.5, rng)).r1 for _ in range(500)])
    assert found == pytest.approx(0.5, abs=0.03)
    assert 30 * (1 - 0.5) / (1 + 0.5) == 10


def test_slow_swings_under_noise_are_seen_by_the_sum_alone():
    rng = np.random.default_rng(4)
    slow = first_order(2000, 0.98, rng)
    y = slow / slow.std() + 2 * rng.standard_normal(2000)
    got = effective_number(y)
    assert got.by_sum < 0.5 * got.by_first and got.n_eff == got.by_sum


def test_logging_faster_adds_nothing():
    rng = np.random.default_rng(8)
    fast = first_order(4000, 0.99, rng)
    assert effective_number(fast).n_eff == pytest.approx(effective_number(fast[::10]).n_eff, rel=0.4)


def test_bounds():
    assert effective_number(np.tile([1.0, -1.0], 20)).n_eff == 40  # alternating: not better than independent
    assert effective_number(np.full(40, 400.0)).n_eff == 1.0  # never changing: read once
    assert 1.0 <= effective_number(np.arange(40.0)).n_eff < 5  # a ramp


def test_missing_readings_units_and_origin_do_not_matter():
    y = first_order(60, 0.5, np.random.default_rng(1))
    want = effective_number(y).n_eff
    assert effective_number(np.append(y, np.nan)).n_eff == want
    assert effective_number(1.8 * y + 459.67).n_eff == pytest.approx(want)


def test_fewer_than_three_are_refused():
    with pytest.raises(InputError, match="number of readings: got 2, needs 3 or more"):
        effective_number([1.0, np.nan, 2.0])
