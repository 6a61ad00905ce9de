"""Propagation of distributions (JCGM 101:2008): the check on the budget, and the answer near an edge.

The same inputs as for the budget are drawn, each independent cause once, and put through the
model in blocks that stay in the cache. A draw for which the model has no result (an exhaust that
is no longer superheated, say) is counted by its status and never replaced. One seed gives one
answer, on any machine with the same NumPy.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np

from engine.measurement.budget import Budget, _check_coverage, numerical_tolerance
from engine.measurement.inputs import SAMPLING, Component, Input
from engine.measurement.sources import Correlations, Model, Sources, evaluate, gather, linked
from engine.steam.errors import Fault, InputError

BLOCK = 16_384  # draws; a dozen arrays of a block stay within a core's second-level cache
_LEAST_DRAWS, _MOST_DRAWS = 1_000, 20_000_000
_QUANTILES = 2001  # kept of the sorted draws: for pictures and for probabilities
_FEW = 5  # degrees of freedom whose Student's t has no fourth moment: a single one lengthens the tails of all
_SURE_DOF = 1e6  # from here on Student's t is drawn as normal


@dataclass(frozen=True, eq=False)
class MonteCarlo:
    """The distribution of a result. Everything but ``unusable`` is over the usable draws.

    Attributes:
        value, u: mean and standard deviation
        coverage: probability that the intervals hold
        symmetric: interval with equal probability beyond either end
        shortest: the shortest interval; better when the distribution leans (JCGM 101, 5.3.4)
        skewness, kurtosis: 0 and 3 for a normal distribution, 1.8 for a rectangular one
        draws, seed: how many were drawn, and from which seed
        unusable: fraction of the draws without a result
        unusable_by_status: that fraction by the model's status, where it gives one
        quantiles: 2001 equally spaced quantiles, the smallest draw first and the largest last
        without_sampling: the same run without the causes of group ``SAMPLING`` on the result, or None
    """

    value: float
    u: float
    coverage: float
    symmetric: tuple[float, float]
    shortest: tuple[float, float]
    skewness: float
    kurtosis: float
    draws: int
    seed: int
    unusable: float
    unusable_by_status: dict[object, float]
    quantiles: np.ndarray = field(repr=False)
    without_sampling: MonteCarlo | None = field(default=None, repr=False)

    def probability(self, lower: float = -np.inf, upper: float = np.inf) -> float:
        """Fraction of the usable draws from ``lower`` to ``upper`` (interpolated between the quantiles)."""
        levels = np.linspace(0.0, 1.0, _QUANTILES)
        below, up_to = np.interp([lower, upper], self.quantiles, levels, left=0.0, right=1.0)
        return float(max(up_to - below, 0.0))


class Difference(NamedTuple):
    """Why the two methods part: a ``code``, how much (its meaning depends on the code), and a sentence."""

    code: str
    size: float
    sentence: str


class Comparison(NamedTuple):
    """Budget against Monte Carlo (JCGM 101, clause 8).

    ``off_lower`` and ``off_upper`` are the distances between the ends of value ± U and of the
    symmetric interval; the methods ``agree`` when neither exceeds ``tolerance``, half of the last
    place of the uncertainty as it is given. ``reasons`` is never empty when they do not agree.
    """

    agree: bool
    off_lower: float
    off_upper: float
    tolerance: float
    reasons: tuple[Difference, ...]

    @property
    def sentence(self) -> str:
        if self.agree and not self.reasons:
            return "The budget and Monte Carlo give the same interval."
        start = "The budget and Monte Carlo give the same interval, but " if self.agree else \
            "The budget and Monte Carlo give different intervals: "
        return start + "; ".join(r.sentence for r in self.reasons) + "."


def monte_carlo(model: Model, inputs: Sequence[Input], *, on_result: Sequence[Component] = (),
                correlations: Correlations | None = None, coverage: float = 0.95, draws: int = 1_000_000,
                seed: int = 1, progress: Callable[[float], None] | None = None) -> MonteCarlo:
    """Draw the inputs ``draws`` times and put them through ``model``.

    Arguments are those of ``uncertainty_budget``. Correlated causes must be "normal" or "t" (together
    they are drawn with the smallest of their degrees of freedom); a shared cause can have any
    distribution. ``progress`` is called with the fraction done. Memory: up to 40 bytes a draw, and
    a few blocks.

    Raises InputError for what cannot be drawn, and when too few draws have a result for the
    interval asked (fewer than 100/(1 - coverage)).

    >>> from engine.measurement.inputs import Input, normal
    >>> inputs = [Input("a", 1.0, (normal("gauge", 3.0),)), Input("b", 2.0, (normal("gauge", 4.0),))]
    >>> got = monte_carlo(lambda a, b: a + b, inputs)
    >>> f"{got.value:.2f} {got.u:.2f} {got.shortest[1] - got.shortest[0]:.1f}"
    '3.00 5.00 19.6'
    """
    _check_coverage(coverage)
    sources = gather(inputs, on_result, correlations)
    _check_draws(sources, draws, seed, coverage)
    instruments, sampling = _split(sources)
    y = np.empty(draws)
    shift = np.empty(draws) if sampling.labels else None
    tally: Counter = Counter()
    rng, rng_sampling = map(np.random.default_rng, np.random.SeedSequence(seed).spawn(2))
    plan, plan_sampling = _plan(instruments), _plan(sampling)
    values, names = np.array([i.value for i in inputs] + [0.0]), [i.name for i in inputs]
    for start in range(0, draws, BLOCK):
        part = slice(start, min(start + BLOCK, draws))
        moved = _draw(rng, plan, values, part.stop - start)
        result, status = evaluate(model, dict(zip(names, moved, strict=False)))
        np.add(result, moved[-1], out=y[part])
        if shift is not None:
            shift[part] = _draw(rng_sampling, plan_sampling, np.zeros(len(values)), part.stop - start)[-1]
        _count(tally, y[part], status)
        if progress:
            progress(part.stop / draws)
    alone = _summary(y, tally, coverage, draws, seed)
    if shift is None:
        return alone
    y += shift  # y is sorted by now, which does no harm: the shifts do not know of it
    return _summary(y, tally, coverage, draws, seed, without_sampling=alone)


def compare(budget: Budget, drawn: MonteCarlo, *, digits: int = 2) -> Comparison:
    """Do the two agree to the last of ``digits`` places of the uncertainty, and if not, why?

    Causes of difference are looked for in the draws themselves: results missing (``unusable``), the
    model bending within the uncertainties (``curved``), a flat-topped distribution (``flat``) or
    long tails from few degrees of freedom (``tails``), else a difference of the spread alone
    (``spread``).
    """
    tolerance = numerical_tolerance(budget.u or drawn.u, digits)
    low, high = (abs(a - b) for a, b in zip((budget.value - budget.U, budget.value + budget.U), drawn.symmetric,
                                            strict=True))
    agree = low <= tolerance and high <= tolerance
    reasons = list(_reasons(budget, drawn, agree))
    if not agree and not reasons:
        change = drawn.u / budget.u - 1 if budget.u else np.inf
        reasons.append(Difference("spread", change, f"the standard uncertainties differ by {change:+.1%}"))
    return Comparison(agree, low, high, tolerance, tuple(reasons))


def _reasons(budget: Budget, drawn: MonteCarlo, agree: bool):
    if drawn.unusable > 0:
        yield Difference("unusable", drawn.unusable,
                     f"{drawn.unusable:.2%} of the draws have no result, so the reading lies near an edge that the "
                     "budget does not see")
    if agree:
        return
    tails = drawn.kurtosis > 3.2 and (budget.dof < 100 or any(row.dof < _FEW for row in budget.rows if row.share > 0))
    moved, skewness, noise = _bend_of_the_middle(budget, drawn) if tails else (
        (drawn.value - budget.value) / drawn.u if drawn.u else 0.0, drawn.skewness, 0.0)
    if abs(moved) > 0.02 + noise or abs(skewness) > 0.1 + 9 * noise:
        yield Difference("curved", moved, "the result does not change in proportion to the inputs within their "
                     f"uncertainties (mean moved by {moved:+.2f} u, skewness {skewness:+.2f}), which Monte Carlo "
                     "follows and the budget does not")
    elif drawn.kurtosis < 2.85:
        yield Difference("flat", drawn.kurtosis, "limits without a known distribution dominate, so the true "
                     f"interval is narrower than k u (kurtosis {drawn.kurtosis:.2f}, normal 3)")
    if tails:
        yield Difference("tails", budget.dof, f"few readings stand behind the uncertainty ({budget.dof:.0f} effective "
                     "degrees of freedom), which draws treat as long tails and the budget as a larger k")


def _bend_of_the_middle(budget: Budget, drawn: MonteCarlo) -> tuple[float, float, float]:
    """How far the median has moved, in u of the budget, a skewness from the quartiles, and their noise in u.

    With long tails the mean and the third moment are those of a few draws, and say nothing. The quartiles
    lean by about skewness/9 of their distance (Cornish and Fisher, first order).
    """
    low, median, high = np.interp([0.25, 0.5, 0.75], np.linspace(0.0, 1.0, _QUANTILES), drawn.quantiles)
    lean = (high + low - 2 * median) / (high - low) if high > low else 0.0
    moved = (float(median) - budget.value) / budget.u if budget.u else 0.0
    return moved, float(9 * lean), 4 / drawn.draws**0.5


def _split(sources: Sources) -> tuple[Sources, Sources]:
    """Causes that reach the model, and those of group SAMPLING that act on the result alone."""
    apart = np.array([group == SAMPLING and reached == ("result",)
                      for group, reached in zip(sources.groups, sources.quantities, strict=True)], dtype=bool)
    apart &= (sources.correlation != 0).sum(axis=0) == 1
    return _pick(sources, ~apart), _pick(sources, apart)


def _pick(sources: Sources, keep: np.ndarray) -> Sources:
    texts = [tuple(x for x, k in zip(column, keep, strict=True) if k) for column in sources[:4]]
    return Sources(*texts, sources.spread[:, keep], sources.correlation[np.ix_(keep, keep)])


class _Stream(NamedTuple):
    """Standard draws and what they move: one tuple of (row, how far) for each independent draw.

    With finite ``dof`` all draws of the stream share one scale of Student's t.
    """

    distribution: str
    dof: float
    moves: tuple[tuple[tuple[int, float], ...], ...]


def _plan(sources: Sources) -> list[_Stream]:
    """The fewest streams that give the same distribution.

    Normal causes of one quantity alone merge into one. Correlated causes become as many independent
    ones (by the eigenvectors of their matrix, which also serve a singular one).
    """
    plan, merged = [], np.zeros(len(sources.spread))
    dof = np.array([c.dof if c.distribution == "t" else np.inf for c in sources.components])
    leader = linked(sources.correlation)
    for first in np.unique(leader):
        group = np.flatnonzero(leader == first)
        c, spread = sources.components[first], sources.spread[:, group]
        if len(group) > 1:
            size, vectors = np.linalg.eigh(sources.correlation[np.ix_(group, group)])
            turned = spread @ (vectors * np.sqrt(np.maximum(size, 0.0)))
            plan.append(_Stream("normal", float(dof[group].min()), tuple(map(_moves, turned.T))))
        elif c.distribution == "normal" and np.count_nonzero(spread) == 1:
            merged += spread[:, 0] ** 2
        else:
            plan.append(_Stream(c.distribution, float(dof[first]), (_moves(spread[:, 0]),)))
    return plan + [_Stream("normal", np.inf, (((int(r), float(np.sqrt(merged[r]))),),)) for r in np.flatnonzero(merged)]


def _moves(column: np.ndarray) -> tuple[tuple[int, float], ...]:
    return tuple((int(row), float(column[row])) for row in np.flatnonzero(column))


def _draw(rng: np.random.Generator, plan: list[_Stream], values: np.ndarray, count: int) -> np.ndarray:
    """Values of all inputs (and the shift of the result, last) for one block, shape (rows, count)."""
    moved = np.empty((len(values), count))
    moved[:] = values[:, None]
    z, spare, scale = np.empty((3, count))
    for stream in plan:
        tails = stream.dof < _SURE_DOF
        if tails:  # a normal draw over the root of a chi-square one: Student's t
            rng.standard_gamma(stream.dof / 2, out=scale)
            scale *= 2 / stream.dof
            np.sqrt(scale, out=scale)
        for moves in stream.moves:
            _standard(rng, stream.distribution, z, spare)
            if tails:
                z /= scale
            for row, u in moves:
                moved[row] += np.multiply(z, u, out=spare)
    return moved


def _standard(rng: np.random.Generator, distribution: str, z: np.ndarray, spare: np.ndarray) -> None:
    """Fill ``z`` with draws of mean 0 and standard deviation 1 (JCGM 101, 6.4)."""
    if distribution == "rectangular":
        rng.random(out=z)
        z -= 0.5
        z *= np.sqrt(12.0)
    elif distribution == "triangular":
        rng.random(out=z)
        z -= rng.random(out=spare)
        z *= np.sqrt(6.0)
    else:
        rng.standard_normal(out=z)


def _count(tally: Counter, y: np.ndarray, status: np.ndarray | None) -> None:
    """Mark every draw without a finite result as NaN and count them by status."""
    missing = ~np.isfinite(y)
    if missing.any():
        y[missing] = np.nan
        if status is not None:
            tally.update(np.broadcast_to(status, y.shape)[missing].tolist())


def _summary(y: np.ndarray, tally: Counter, coverage: float, draws: int, seed: int,
             without_sampling: MonteCarlo | None = None) -> MonteCarlo:
    """Describe the draws. Sorts ``y`` in place (NaN last), so that no copy is needed."""
    y.sort()
    usable = y[:len(y) - np.count_nonzero(np.isnan(y))]
    if len(usable) < _needed(coverage):
        raise InputError(Fault("draws with a result", len(usable), "", f"at least {_needed(coverage)} of {draws}",
                               why="too few are left to say where the result lies",
                               hint="the reading cannot be evaluated: see what its status says"))
    mean, deviation = usable.mean(), usable - usable.mean()
    square = deviation * deviation
    variance = square.mean()
    third, fourth = (square * deviation).mean(), np.dot(square, square) / len(usable)
    shape = (third / variance**1.5, fourth / variance**2) if variance > 0 else (0.0, 3.0)
    symmetric, shortest = _intervals(usable, coverage)
    quantiles = usable[np.linspace(0, len(usable) - 1, _QUANTILES).round().astype(int)]
    quantiles.flags.writeable = False
    by_status = {status: count / draws for status, count in sorted(tally.items())}
    return MonteCarlo(float(mean), float(np.sqrt(variance)), coverage, symmetric, shortest, float(shape[0]),
                      float(shape[1]), draws, seed, 1 - len(usable) / draws, by_status, quantiles, without_sampling)


def _intervals(ordered: np.ndarray, coverage: float) -> tuple[tuple[float, float], tuple[float, float]]:
    """Symmetric and shortest coverage intervals of sorted draws (JCGM 101, 7.7)."""
    last = len(ordered) - 1
    span = min(round(coverage * len(ordered)), last)
    first = (last - span + 1) // 2
    least = int(np.argmin(ordered[span:] - ordered[:last + 1 - span]))
    return ((float(ordered[first]), float(ordered[first + span])),
            (float(ordered[least]), float(ordered[least + span])))


def _needed(coverage: float) -> int:
    """Results without which an end of the interval would hang on a few draws (100 lie beyond the two ends)."""
    return round(100 / (1 - coverage))


def _check_draws(sources: Sources, draws: int, seed: int, coverage: float) -> None:
    faults = []
    least = max(_LEAST_DRAWS, _needed(coverage))
    if not isinstance(draws, int | np.integer) or not least <= draws <= _MOST_DRAWS:
        faults.append(Fault("number of draws", draws, "", f"a whole number from {least} to {_MOST_DRAWS}",
                            why=f"an interval for {coverage:g} needs draws beyond its ends"))
    if not isinstance(seed, int | np.integer) or seed < 0:
        faults.append(Fault("seed", seed, "", "a whole number, zero or more"))
    tied = (sources.correlation != 0).sum(axis=0) > 1
    faults += [Fault(f"correlated cause '{label}'", c.distribution, "", "a normal distribution",
                     why="coefficients alone do not say how other distributions go together",
                     hint="name a shared source instead, or describe it as normal")
               for label, c, t in zip(sources.labels, sources.components, tied, strict=True)
               if t and c.distribution not in ("normal", "t")]
    if faults:
        raise InputError(*faults)
