"""JCGM 106:2012, worked values; from memory of the document unless derived beside them."""

import numpy as np
import pytest
from scipy.special import ndtr

from engine.measurement import Limits, Outcome, Rule, conformance_probability, decide


def test_7_3_breakdown_voltage_of_a_diode():
    """Upper limit -5.40 V, result -5.47 V with u = 0.05 V: conforming with 92 %."""
    assert conformance_probability(-5.47, 0.05, Limits(upper=-5.40)) == pytest.approx(0.92, abs=0.005)


def test_probability_follows_the_normal_distribution():
    one = conformance_probability(0.9720, 0.0029, Limits(lower=0.970))
    assert one == pytest.approx(ndtr(0.002 / 0.0029), abs=1e-12)
    both = conformance_probability(1.0, 0.5, Limits(0.5, 2.0))
    assert both == pytest.approx(ndtr(2.0) - ndtr(-1.0), abs=1e-12)


@pytest.mark.parametrize(("risk", "factor"), [(0.05, 1.645), (0.025, 1.960), (0.01, 2.326)])
def test_guard_band_for_a_risk_is_the_one_sided_normal_quantile(risk, factor):
    """JCGM 106, 8.3: a guard band of 1.645 u keeps the specific consumer's risk at 5 %."""
    assert Rule("guarded by risk", risk).guard(1.0, 2.0) == pytest.approx(factor, abs=5e-4)


def test_guard_band_U_leaves_a_risk_of_less_than_two_and_a_half_percent():
    """ISO 14253-1, ILAC-G8: guard band U = 2 u gives at most 2.3 % for one limit."""
    at_the_edge = decide(0.970 + 2 * 0.003, 0.003, Limits(lower=0.970), Rule("guarded by U"), U=0.006)
    assert at_the_edge.outcome is Outcome.ACCEPT
    assert at_the_edge.chance_wrong == pytest.approx(0.0228, abs=5e-5)


def test_few_degrees_of_freedom_widen_the_guard_band():
    """Student's t, one-sided 5 % at 10 degrees of freedom: 1.812 (any t table)."""
    assert Rule("guarded by risk", 0.05).guard(1.0, 2.0, dof=10) == pytest.approx(1.812, abs=5e-4)


def test_an_array_of_results():
    values = np.array([-5.50, -5.40, -5.30])
    got = conformance_probability(values, 0.05, Limits(upper=-5.40))
    assert got == pytest.approx(ndtr([2.0, 0.0, -2.0]), abs=1e-9)
