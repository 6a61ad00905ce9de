"""The bracketed root search: roots, ends, and how many steps it takes."""

import numpy as np
import pytest
from scipy.optimize import brentq

from engine.calorimeter.roots import bracketed_root

FUNCTIONS = [lambda x: x - 0.3, lambda x: x**3 - 0.2, lambda x: np.exp(-8 * x) - 0.1, lambda x: np.cos(x) - x,
             lambda x: x**9 - 1e-4, lambda x: np.arctan(40 * (x - 0.77)), lambda x: 1 - 2 * x**0.5]


@pytest.mark.parametrize("f", FUNCTIONS)
def test_roots_against_another_search(f):
    low, high = np.zeros(5), np.linspace(0.95, 1.3, 5)
    found = bracketed_root(f, low, high)
    np.testing.assert_allclose(found, [brentq(f, 0.0, h, xtol=1e-14) for h in high], rtol=1e-10)
    np.testing.assert_allclose(bracketed_root(f, high, low), found, rtol=1e-10)  # either way round


def test_each_element_has_its_own_root_and_few_steps():
    target, calls = np.linspace(0.01, 0.99, 300), []

    def f(x):
        calls.append(x)
        assert ((x >= 0) & (x <= 1)).all()  # never outside the bracket
        return x**3 - target

    np.testing.assert_allclose(bracketed_root(f, np.zeros(300), np.ones(300)), np.cbrt(target), rtol=1e-10)
    assert len(calls) < 25


def test_a_root_at_an_end_and_none_at_all():
    def f(x):
        return x - np.array([0.0, 1.0, -1.0, 2.0])

    found = bracketed_root(f, np.zeros(4), np.ones(4))
    np.testing.assert_array_equal(found, [0.0, 1.0, 0.0, 1.0])  # without a root: the end nearer to it


def test_a_coarse_tolerance_takes_fewer_steps():
    def count(tolerance):
        calls = []
        bracketed_root(lambda x: calls.append(1) or np.exp(x) - 2.0, np.zeros(1), np.ones(1), tolerance)
        return len(calls)

    assert count(1e-2) < count(1e-11)


def test_empty_arrays_and_untouched_inputs():
    assert bracketed_root(lambda x: x, np.array([]), np.array([])).shape == (0,)
    low, high = np.zeros(3), np.ones(3)
    low.setflags(write=False)
    high.setflags(write=False)
    assert bracketed_root(lambda x: x - 0.5, low, high) == pytest.approx(np.full(3, 0.5))
