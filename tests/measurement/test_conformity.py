"""Decisions: three outcomes, their edges, with and without sampling."""

from math import inf, nan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.measurement import (
    SAMPLING,
    Input,
    Limits,
    Outcome,
    Rule,
    conformance_probability,
    decide,
    decide_both,
    normal,
    uncertainty_budget,
)
from engine.steam import InputError

DRY_ENOUGH = Limits(lower=0.970)
SIMPLE, RISK, BY_U = Rule("simple"), Rule("guarded by risk", 0.05), Rule("guarded by U")


@pytest.mark.parametrize(("value", "simple", "risk", "by_u"), [
    (0.980, "accept", "accept", "accept"),
    (0.9752, "accept", "accept", "undecided"),
    (0.9720, "accept", "undecided", "undecided"),
    (0.9690, "reject", "undecided", "undecided"),
    (0.9648, "reject", "reject", "undecided"),
    (0.960, "reject", "reject", "reject"),
])
def test_three_rules_on_a_lower_limit(value, simple, risk, by_u):
    """u = 0.003: guard bands 0, 0.0049 and 0.006."""
    outcomes = [decide(value, 0.003, DRY_ENOUGH, rule, U=0.006).outcome for rule in (SIMPLE, RISK, BY_U)]
    assert [o.value for o in outcomes] == [simple, risk, by_u]


def test_upper_limit_mirrors_the_lower_one():
    for value in (0.960, 0.9648, 0.969, 0.972, 0.98):
        below, above = decide(value, 0.003, DRY_ENOUGH, RISK), decide(-value, 0.003, Limits(upper=-0.970), RISK)
        assert below.outcome is above.outcome
        assert below.probability == pytest.approx(above.probability)


def test_edges_belong_to_acceptance():
    assert decide(0.970, 0.003, DRY_ENOUGH, SIMPLE).outcome is Outcome.ACCEPT
    edge = decide(0.5, 0.003, DRY_ENOUGH, RISK).accept_from
    assert decide(edge, 0.003, DRY_ENOUGH, RISK).outcome is Outcome.ACCEPT
    assert decide(np.nextafter(edge, 0), 0.003, DRY_ENOUGH, RISK).outcome is Outcome.UNDECIDED
    assert decide(0.970, 0.0, DRY_ENOUGH, RISK).outcome is Outcome.ACCEPT


@given(st.floats(0.9, 1.0), st.floats(1e-6, 0.05), st.floats(0.001, 0.4))
def test_guarded_decisions_are_seldom_wrong(value, u, risk):
    verdict = decide(value, u, DRY_ENOUGH, Rule("guarded by risk", risk))
    if verdict.outcome is not Outcome.UNDECIDED:
        assert verdict.chance_wrong <= risk + 1e-9
    else:
        assert verdict.chance_wrong >= risk - 1e-9


def test_limits_closer_than_two_guard_bands_accept_nothing():
    verdict = decide(0.975, 0.003, Limits(0.973, 0.977), RISK)
    assert verdict.accept_from > verdict.accept_to
    assert verdict.outcome is Outcome.UNDECIDED


def test_probability_rises_with_dryness_and_is_certain_without_uncertainty():
    x = np.linspace(0.94, 1.0, 200)
    assert (np.diff(conformance_probability(x, 0.004, DRY_ENOUGH)) > 0).all()
    assert conformance_probability([0.969, 0.970, 0.971], 0.0, DRY_ENOUGH).tolist() == [0.0, 1.0, 1.0]
    assert conformance_probability(0.5, 0.0, Limits(0.4, 0.5)) == 1.0


def test_scalar_array_and_empty():
    assert isinstance(conformance_probability(0.97, 0.003, DRY_ENOUGH), float)
    assert conformance_probability(np.full((2, 3), 0.97), [0.001, 0.002, 0.003], DRY_ENOUGH).shape == (2, 3)
    assert conformance_probability(np.zeros(0), np.zeros(0), DRY_ENOUGH).shape == (0,)


def test_fewer_degrees_of_freedom_make_less_sure():
    assert conformance_probability(0.975, 0.003, DRY_ENOUGH, dof=3) < conformance_probability(0.975, 0.003, DRY_ENOUGH)


def test_sampling_can_turn_acceptance_into_doubt():
    """A reading good to 0.04 %pt of itself, and a sample that may be off by 0.29 %pt."""
    budget = uncertainty_budget(lambda x: x, [Input("x", 0.9720, (normal("instruments", 0.0004),))],
                                on_result=[normal("representativeness", 0.0029, group=SAMPLING)])
    got = decide_both(budget, DRY_ENOUGH, RISK)
    assert got.without_sampling.outcome is Outcome.ACCEPT
    assert got.with_sampling.outcome is Outcome.UNDECIDED
    assert got.with_sampling.probability == pytest.approx(0.75, abs=0.006)
    assert got.with_sampling.accept_from == pytest.approx(0.9748, abs=1e-4)


@pytest.mark.parametrize(("call", "message"), [
    (lambda: Limits(), "needs at least one limit"),
    (lambda: Limits(1.0, 0.9), "the lower below the upper"),
    (lambda: Limits(lower=nan), "limits: got nan to inf"),
    (lambda: Rule("lenient"), "decision rule: got lenient, needs one of: simple, guarded by risk, guarded by U"),
    (lambda: Rule(risk=0.5), "needs a number above 0 and below 0.5"),
    (lambda: decide(0.97, 0.003, DRY_ENOUGH, BY_U), "expanded uncertainty: got None"),
    (lambda: decide(nan, 0.003, DRY_ENOUGH, RISK), "what could not be read cannot be judged"),
    (lambda: decide(inf, 0.003, DRY_ENOUGH, RISK), "result: got not a finite number"),
    (lambda: conformance_probability(0.97, [-0.1, 0.1], DRY_ENOUGH), "standard uncertainty: got -0.1"),
    (lambda: conformance_probability(0.97, 0.1, DRY_ENOUGH, dof=0), "degrees of freedom: got 0"),
])
def test_refusals(call, message):
    with pytest.raises(InputError, match=message):
        call()
