"""The uncertainty budget: GUM propagation with shared causes and correlations (JCGM 100:2008).

The model is any function of named arrays. Its sensitivities are taken by five-point central
differences in a single call. One row of the budget is one cause, not one quantity: the barometer
that enters two absolute pressures is one row, and the rows add up to u_c² without cross terms.
Sampling representativeness is a row (group ``SAMPLING``) that can be left out again with
``Budget.without``, at no cost.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import floor, inf, isfinite, log10, sqrt
from typing import NamedTuple

import numpy as np
from scipy.special import stdtrit

from engine.measurement.given import number, shown, size, whole
from engine.measurement.inputs import Component, Input
from engine.measurement.sources import Correlations, Model, evaluate, gather, linked
from engine.steam.errors import Fault, InputError

# The step of the differences: a hundredth of the uncertainty, so that the slope is the one at the
# estimate, but never so small against the value that rounding shows.
_STEP_OF_U, _STEP_OF_VALUE, _LEAST_STEP = 1e-2, 1e-5, 1e-5
MOST_COVERAGE = 1 - 1e-12  # beyond it no interval is wide enough to be known
_STENCIL = np.array([1.0, -1.0, 2.0, -2.0])
_WEIGHTS = np.array([8.0, -8.0, -1.0, 1.0]) / 12.0


class BudgetRow(NamedTuple):
    """One cause in the budget.

    ``u`` is in the unit of the quantity (of the first, if it reaches several), ``c`` the result's
    change per that unit through all of them, ``contribution`` = c u with its sign, in the unit of
    the result. ``share`` is its part of u_c²; the shares add to 1 and one can be negative, where a
    correlated cause takes away from the others.
    """

    source: str
    group: str
    quantities: tuple[str, ...]
    distribution: str
    dof: float
    u: float
    c: float
    contribution: float
    share: float


class Improvement(NamedTuple):
    """What a better instrument would do: u_c with the causes of ``group`` halved, and removed."""

    group: str
    u_halved: float
    u_removed: float


@dataclass(frozen=True, eq=False)
class Budget:
    """A result with its uncertainty, and where it comes from.

    Attributes:
        value: the result at the estimates
        u: combined standard uncertainty u_c
        dof: effective degrees of freedom (Welch-Satterthwaite)
        coverage: probability that ``value`` ± ``U`` is meant to cover
        k: coverage factor, from Student's t at ``dof``
        U: expanded uncertainty k u_c
        rows: the causes, in the order of the inputs
        sensitivity: by input name, the derivative of the result at the estimates
        correlation: coefficients between the rows, shape (rows, rows)
    """

    value: float
    u: float
    dof: float
    coverage: float
    k: float
    U: float
    rows: tuple[BudgetRow, ...]
    sensitivity: dict[str, float]
    correlation: np.ndarray

    def without(self, *groups: str) -> Budget:
        """The same result with the causes of these groups left out (for instance ``SAMPLING``)."""
        return self._scaled(groups, 0.0, drop=True)

    def improved(self, group: str, factor: float = 0.5) -> Budget:
        """The same result with every cause of the group multiplied by ``factor``."""
        if not 0 <= number(factor) < inf:
            raise InputError(Fault("factor", shown(factor), "", "a finite number, zero or more"))
        if group not in self.groups:
            raise InputError(Fault("group", group, "", "one of: " + ", ".join(self.groups)))
        return self._scaled((group,), factor)

    def improvements(self) -> tuple[Improvement, ...]:
        """For each group what halving or removing it would leave, the most helpful first."""
        found = [Improvement(g, self.improved(g, 0.5).u, self.improved(g, 0.0).u) for g in self.groups]
        return tuple(sorted(found, key=lambda i: i.u_halved))

    @property
    def groups(self) -> tuple[str, ...]:
        return tuple(dict.fromkeys(row.group for row in self.rows))

    def _scaled(self, groups: Sequence[str], factor: float, *, drop: bool = False) -> Budget:
        keep = [i for i, row in enumerate(self.rows) if not (drop and row.group in groups)]
        rows = [self.rows[i] for i in keep]
        rows = [row._replace(u=row.u * factor, contribution=row.contribution * factor) if row.group in groups else row
                for row in rows]
        return _combine(self.value, rows, self.correlation[np.ix_(keep, keep)], self.coverage, self.sensitivity)


def uncertainty_budget(model: Model, inputs: Sequence[Input], *, on_result: Sequence[Component] = (),
                       correlations: Correlations | None = None, coverage: float = 0.95) -> Budget:
    """Propagate the inputs' uncertainties through ``model`` to first order (JCGM 100, 5.1 and 5.2).

    ``model`` takes the inputs by name as 1-D arrays and returns an array (or a pair values, status).
    ``on_result`` are causes that act on the result itself, such as sampling representativeness.
    ``correlations`` maps pairs of causes (as named in the rows; or of inputs that have one cause
    only) to coefficients. Causes that are correlated should stem from the same readings: together
    they count with the smallest of their degrees of freedom.

    Raises InputError when the model has no result at, or right beside, the estimates.

    >>> from engine.measurement.inputs import Input, normal, rectangular
    >>> barometer = normal("barometer", 50.0, source="barometer")
    >>> got = uncertainty_budget(lambda p_line, p_exhaust: p_line - p_exhaust, [
    ...     Input("p_line", 1.0e6, (rectangular("class 1", 16e3), barometer)),
    ...     Input("p_exhaust", 1.0e5, (normal("gauge", 300.0), barometer))])
    >>> [f"{row.source} {row.share:.3f}" for row in got.rows]  # the barometer drops out
    ['p_line: class 1 0.999', 'barometer 0.000', 'p_exhaust: gauge 0.001']
    >>> f"{got.value:.0f} ± {got.U:.0f}, k = {got.k:.2f}"
    '900000 ± 18115, k = 1.96'
    """
    _check_coverage(coverage)
    sources = gather(inputs, on_result, correlations)
    value, slopes = _differences(model, inputs, np.sqrt((sources.spread[:-1] ** 2).sum(axis=1)))
    contribution = np.append(slopes, 1.0) @ sources.spread
    sensitivity = {i.name: float(c) for i, c in zip(inputs, slopes, strict=True)}
    size = np.abs(sources.spread).max(axis=0, initial=0.0)
    per_unit = np.array([sensitivity.get(q[0], 1.0) for q in sources.quantities])  # stands where u is zero
    np.divide(contribution, size, out=per_unit, where=size > 0)
    rows = [BudgetRow(label, group, quantities, c.distribution, c.dof, float(u), float(slope), float(part), 0.0)
            for label, group, quantities, c, u, slope, part in zip(
                sources.labels, sources.groups, sources.quantities, sources.components, size, per_unit, contribution,
                strict=True)]
    return _combine(value, rows, sources.correlation, coverage, sensitivity)


def result_correlation(first: Budget, second: Budget) -> float:
    """Correlation of two results of the same inputs (JCGM 100, H.2.3): zero if either has no doubt."""
    if [r.source for r in first.rows] != [r.source for r in second.rows]:
        raise InputError(Fault("budgets", "different causes", "", "two results of the same inputs"))
    a, b = (np.array([row.contribution for row in budget.rows]) for budget in (first, second))
    if not (first.u and second.u):
        return 0.0
    return float(a @ first.correlation @ b) / (first.u * second.u)


def coverage_factor(coverage: float, dof: float = inf) -> float:
    """k for a two-sided interval: Student's t at ``dof``, the normal value when it is infinite.

    >>> round(coverage_factor(0.95, 10), 2)  # JCGM 100, table G.2
    2.23
    """
    _check_coverage(coverage)
    if not number(dof) >= 1e-3:
        raise InputError(Fault("degrees of freedom", shown(dof), "", "a number from 0.001"))
    return float(stdtrit(number(dof), (1 + coverage) / 2))


def numerical_tolerance(u: float, digits: int = 2) -> float:
    """Half of the last place of ``u`` when it is given with so many digits (JCGM 101, 7.9.2).

    >>> numerical_tolerance(0.00291)
    5e-05
    """
    decimals = decimals_of(u, digits)
    return 0.5 * 10.0 ** -decimals if u > 0 else 0.0


def decimals_of(u: float, digits: int = 2) -> int:
    """Decimal places that show ``u`` with so many digits; negative for tens and above.

    >>> decimals_of(0.0029), decimals_of(31.7)
    (4, 0)
    """
    u = size("uncertainty", u)
    if not (whole(digits) and 1 <= digits <= 15):
        raise InputError(Fault("digits", shown(digits), "", "a whole number from 1 to 15"))
    return digits - 1 - floor(log10(float(f"{u:.{digits - 1}e}"))) if u > 0 else 0


def _differences(model: Model, inputs: Sequence[Input], u: np.ndarray) -> tuple[float, np.ndarray]:
    """Value and slopes at the estimates from one call of 1 + 4n points."""
    values = np.array([i.value for i in inputs], dtype=float)
    step = np.maximum(_STEP_OF_U * u, _STEP_OF_VALUE * np.abs(values))
    step[step == 0] = _LEAST_STEP  # an exact zero gives no scale of its own
    points = np.tile(values, (1 + 4 * len(inputs), 1))
    for i, h in enumerate(step):
        points[1 + 4 * i: 5 + 4 * i, i] += h * _STENCIL
    y, _ = evaluate(model, {i.name: points[:, n] for n, i in enumerate(inputs)})
    if not np.isfinite(y[0]):
        raise InputError(Fault("result", float(y[0]), "", "readings the model has a result for",
                               why="there is no value to give an uncertainty to"))
    around = y[1:].reshape(len(inputs), 4)
    faults = [Fault(f"sensitivity to '{i.name}'", "no result", "", f"a result within ± {2 * h:.2g} of {i.value:.7g}",
                    why="the reading sits at the edge of what can be evaluated, where no slope exists",
                    hint="use the Monte Carlo run: it says how often there is no result")
              for i, h, row in zip(inputs, step, around, strict=True) if not np.isfinite(row).all()]
    if faults:
        raise InputError(*faults)
    return float(y[0]), (around - y[0]) @ _WEIGHTS / step


def _combine(value: float, rows: Sequence[BudgetRow], correlation: np.ndarray, coverage: float,
             sensitivity: dict[str, float]) -> Budget:
    part = np.array([row.contribution for row in rows], dtype=float)
    largest = float(np.abs(part).max(initial=0.0))
    if not isfinite(largest * sqrt(len(part))):
        raise InputError(Fault("uncertainty of the result", largest, "", "a finite number",
                               hint="check the uncertainties of the inputs, and their units"))
    part = part / (largest or 1.0)  # so that no square runs out of the numbers
    variances = part * (correlation @ part)
    variance = max(float(variances.sum()), 0.0)
    shares = variances / variance if variance > 0 else np.zeros_like(variances)
    dof = _effective_dof(variances, np.array([row.dof for row in rows], dtype=float), linked(correlation))
    u, k = largest * sqrt(variance), coverage_factor(coverage, dof)
    rows = tuple(row._replace(share=float(s)) for row, s in zip(rows, shares, strict=True))
    correlation = correlation.copy()
    correlation.flags.writeable = False
    return Budget(value, u, dof, coverage, k, k * u, rows, dict(sensitivity), correlation)


def _effective_dof(variances: np.ndarray, dof: np.ndarray, leader: np.ndarray) -> float:
    """Welch-Satterthwaite (JCGM 100, G.4.1); correlated causes count as one (as in H.2, second approach)."""
    weighed = 0.0
    for group in np.unique(leader):
        inside = leader == group
        weighed += max(variances[inside].sum(), 0.0) ** 2 / dof[inside].min()
    return float(variances.sum()) ** 2 / weighed if weighed > 0 else inf


def _check_coverage(coverage: float) -> None:
    if not 0 < number(coverage) <= MOST_COVERAGE:
        raise InputError(Fault("coverage probability", shown(coverage), "",
                               "a number between 0 and 1, such as 0.95; at most 1 - 1e-12"))


