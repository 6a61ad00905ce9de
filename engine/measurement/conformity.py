"""Does the result meet its limit, by the rule agreed before the test (JCGM 106:2012)?

Three answers: accept, reject, undecided. A guarded rule accepts only when the result lies inside
the limit by the guard band, and rejects only when it lies outside by as much; between the two the
measurement cannot tell. The simple rule always decides, and leaves the doubt to chance.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from math import inf, isfinite
from typing import NamedTuple

import numpy as np
from scipy.special import stdtr, stdtrit

from engine.measurement.budget import Budget
from engine.measurement.given import finite, number, series, shown, size
from engine.measurement.inputs import SAMPLING
from engine.steam.arrays import give_back
from engine.steam.errors import Fault, InputError


class Outcome(StrEnum):
    ACCEPT = "accept"
    REJECT = "reject"
    UNDECIDED = "undecided"


@dataclass(frozen=True)
class Limits:
    """What is allowed: at least ``lower`` and at most ``upper``; one of them can be left open."""

    lower: float = -inf
    upper: float = inf

    def __post_init__(self):
        lower, upper = number(self.lower), number(self.upper)
        if not lower < upper or not (isfinite(lower) or isfinite(upper)):
            raise InputError(Fault("limits", f"{shown(self.lower)} to {shown(self.upper)}", "",
                                   "at least one limit, the lower below the upper",
                                   hint="leave the limit that does not exist out"))


_UNREAD = "what could not be read cannot be judged"
RULES = ("simple", "guarded by risk", "guarded by U")


@dataclass(frozen=True)
class Rule:
    """A decision rule, agreed beforehand.

    Attributes:
        kind: "simple" (no guard band); "guarded by risk" (the guard band keeps the chance of a wrong
            acceptance, and of a wrong rejection, to ``risk`` or less at each limit); "guarded by U"
            (the guard band is the expanded uncertainty)
        risk: for "guarded by risk" only
    """

    kind: str = "guarded by risk"
    risk: float = 0.05

    def __post_init__(self):
        faults = []
        if not isinstance(self.kind, str) or self.kind not in RULES:
            faults.append(Fault("decision rule", shown(self.kind), "", "one of: " + ", ".join(RULES)))
        if not 1e-12 <= number(self.risk) < 0.5:
            faults.append(Fault("risk of a wrong decision", shown(self.risk), "",
                                "a number above 0 and below 0.5, 1e-12 at least",
                                why="at one half the guard band is gone: that is the simple rule"))
        if faults:
            raise InputError(*faults)

    def guard(self, u: float, U: float, dof: float = inf) -> float:
        """Width of the guard band, in the unit of the result.

        >>> round(Rule("guarded by risk", 0.05).guard(1.0, 2.0), 3)
        1.645
        """
        if self.kind == "simple":
            return 0.0
        if self.kind == "guarded by U":
            return U
        return -float(stdtrit(dof, self.risk)) * u


class Verdict(NamedTuple):
    """The decision and all that is needed to follow it.

    ``probability`` is that of conformance. Results from ``accept_from`` to ``accept_to`` are
    accepted (no result is, when the first exceeds the second: the limits lie closer than two guard
    bands). ``chance_wrong`` is the probability that the decision is wrong: after an acceptance
    that the limit is not met, after a rejection that it is; for "undecided" the smaller of the two,
    were it decided after all.
    """

    outcome: Outcome
    probability: float
    chance_wrong: float
    guard: float
    accept_from: float
    accept_to: float
    value: float
    u: float


class Verdicts(NamedTuple):
    """The same decision with sampling representativeness in the uncertainty, and without it."""

    with_sampling: Verdict
    without_sampling: Verdict


def conformance_probability(value, u, limits: Limits, dof: float = inf):
    """Probability that the true value lies within the limits, given a result (JCGM 106, 7).

    ``value`` and ``u`` are scalars or arrays that broadcast; ``dof`` the degrees of freedom of u.
    With u = 0 it is 0 or 1. Raises InputError for results that are not finite.

    >>> round(conformance_probability(-5.47, 0.05, Limits(upper=-5.40)), 2)  # JCGM 106, 7.3.3
    0.92
    """
    faults = []
    try:
        value = finite("result", value, why=_UNREAD)
    except InputError as error:
        faults += error.faults
    try:
        u = series("standard uncertainty", u)
        if not (np.isfinite(u) & (u >= 0)).all():
            faults.append(Fault("standard uncertainty", float(np.min(u)), "", "finite numbers, zero or more"))
    except InputError as error:
        faults += error.faults
    if not number(dof) > 0:
        faults.append(Fault("degrees of freedom", shown(dof), "", "a number above 0"))
    if faults:
        raise InputError(*faults)
    if not _go_together(value, u):
        raise InputError(Fault("shapes", f"{value.shape} and {u.shape}", "", "shapes that broadcast together"))
    chance = _up_to(limits.upper, value, u, dof) - _below(limits.lower, value, u, dof)
    return give_back(np.maximum(chance, 0.0), chance.ndim == 0)


def decide(value: float, u: float, limits: Limits, rule: Rule, *, U: float | None = None, dof: float = inf) -> Verdict:
    """Apply ``rule`` to one result.

    ``U`` is the expanded uncertainty, needed by the rule "guarded by U".

    >>> verdict = decide(0.9720, 0.0029, Limits(lower=0.970), Rule("guarded by risk", 0.05))
    >>> verdict.outcome.value, round(verdict.probability, 2), round(verdict.accept_from, 4)
    ('undecided', 0.75, 0.9748)
    """
    value = float(finite("result", number(value), why=_UNREAD))
    u = size("standard uncertainty", u)
    if U is not None or rule.kind == "guarded by U":
        U = _guard_band(U)
    probability = float(conformance_probability(value, u, limits, dof))
    guard = rule.guard(u, U or 0.0, dof)
    accept_from, accept_to = limits.lower + guard, limits.upper - guard
    if accept_from <= value <= accept_to:
        outcome, wrong = Outcome.ACCEPT, 1 - probability
    elif value < limits.lower - guard or value > limits.upper + guard:
        outcome, wrong = Outcome.REJECT, probability
    else:
        outcome, wrong = Outcome.UNDECIDED, min(probability, 1 - probability)
    return Verdict(outcome, probability, wrong, guard, accept_from, accept_to, float(value), float(u))


def decide_both(budget: Budget, limits: Limits, rule: Rule) -> Verdicts:
    """Apply ``rule`` to a result with all its uncertainty, and with its sampling line left out."""
    return Verdicts(*(decide(b.value, b.u, limits, rule, U=b.U, dof=b.dof)
                      for b in (budget, budget.without(SAMPLING))))


def _guard_band(U: float | None) -> float:
    if not 0 <= number(U) < inf:
        raise InputError(Fault("expanded uncertainty", shown(U), "", "a number, zero or more",
                               why="the rule's guard band is U"))
    return number(U)


def _go_together(*arrays: np.ndarray) -> bool:
    try:
        np.broadcast_shapes(*(a.shape for a in arrays))
    except ValueError:
        return False
    return True


def _up_to(limit: float, value: np.ndarray, u: np.ndarray, dof: float) -> np.ndarray:
    """Probability of a true value at or below the limit."""
    return np.where(u > 0, stdtr(dof, _scaled(limit, value, u)), (value <= limit).astype(float))


def _below(limit: float, value: np.ndarray, u: np.ndarray, dof: float) -> np.ndarray:
    """Probability of a true value below the limit."""
    return np.where(u > 0, stdtr(dof, _scaled(limit, value, u)), (value < limit).astype(float))


def _scaled(limit: float, value: np.ndarray, u: np.ndarray) -> np.ndarray:
    with np.errstate(over="ignore"):  # infinitely far away is meant so
        return (limit - value) / np.where(u > 0, u, 1.0)
