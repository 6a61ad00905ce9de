"""Several runs together: one quality, its uncertainty, its repeatability, the decision; or why there is none."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from engine.job.assessment import assess
from engine.job.assessment.modes import check_mode
from engine.job.case import GAUGE, Case, Resolved, resolve
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import ELECTRIC
from engine.job.result.corrections import balance_without, case_of, switched_off
from engine.job.result.reduction import RunResult, reduce_run
from engine.job.result.repeatability import Repeatability, repeatability
from engine.job.result.runs import Run
from engine.job.uncertainty import Better, Measurement, Reading, Term, improvements, measurement_of, terms_of, verdicts
from engine.job.uncertainty.instruments import rests_on_barometer
from engine.measurement import SAMPLING, Budget, Verdicts
from engine.steam.errors import InputError


@dataclass(frozen=True, eq=False)
class Result:
    """What the readings say.

    x           the quality; None where there is none, for the causes in ``unable``
    missing     what was not stated: with any of it the figures are an exploration, not a result
    measurement what the budget was made from; Monte Carlo takes the same
    budget, instruments   with sampling, and without it
    repeatability   how the runs go together; None with a single one
    verdicts    the decision with and without sampling; None without a limit
    """

    case: Case
    si: Resolved
    runs: tuple[RunResult, ...]
    unable: tuple[str, ...]
    missing: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()
    x: float | None = None
    measurement: Measurement | None = None
    budget: Budget | None = None
    instruments: Budget | None = None
    terms: tuple[Term, ...] = ()
    better: tuple[Better, ...] = ()
    repeatability: Repeatability | None = None
    verdicts: Verdicts | None = None

    @property
    def final(self) -> bool:
        """Whether the figures are a result that can be reported."""
        return self.x is not None and not self.missing

    @property
    def read(self) -> tuple[RunResult, ...]:
        """The runs that gave a quality."""
        return tuple(run for run in self.runs if run.quality is not None)


WITH_A_HEATER = ("With a heater the readings are not reduced from a log: write the sets down on the Run sheet page, or "
                 "enter the means of line pressure, power, sample flow and temperature on the Path page.")


def reduce(case: Case, runs: Sequence[Run], *, known: Result | None = None,
           progress: Callable[[float], None] | None = None) -> Result:
    """Reduce runs of readings by a case.

    ``known`` is an earlier result: a run in it is not worked out again where only the doubts, the limit
    or words have changed since. ``progress`` is called with the fraction done. Raises InputError, with
    every fault at once, where an entry of the case cannot be used, or the case and the readings do not
    go together.

    >>> from engine.job.case.demo import DEMO
    >>> from engine.job.case.fields import FIELDS
    >>> from engine.job.case.rows import Entry
    >>> from engine.job.result.runs import runs_typed
    >>> sets = [FIELDS["readings"].row(p_line=Entry(9.0, "bar", "gauge"), T_exhaust=Entry(T, "°C"))
    ...         for T in (121.0, 121.3, 121.1, 120.9, 121.2, 121.1)]
    >>> case = DEMO.with_(readings=tuple(sets))
    >>> result = reduce(case, runs_typed(case))
    >>> f"{result.x:.4f} ± {result.budget.U:.4f}", result.final
    ('0.9720 ± 0.0058', True)
    """
    si = resolve(case)
    check_mode(case, si)
    if case["mode"] == ELECTRIC:
        return Result(case, si, (), (WITH_A_HEATER,))
    balance_without(case, si, switched_off(case))  # refuses a heat-loss method that lacks an entry, before any work
    earlier = known.runs if known is not None and _readings_of(known.case) == _readings_of(case) else ()
    results = []
    for number, run in enumerate(runs):
        def part(done: float, before: int = number) -> None:
            if progress:
                progress((before + done) / len(runs))
        same = next((r for r in earlier if r.run.rows is run.rows and r.run.name == run.name), None)
        results.append(_with_doubts_of(case, si, same) if same else reduce_run(case, si, run, progress=part))
    return combine(case, si, tuple(results))


# groups of entries, and entries, that no single reading rests on
_ASIDE = ("instruments", "uncertainty", "decision", "identity", "reach", "run sheet")
_ASIDE_TOO = ("x_limit",)


def _readings_of(case: Case) -> Case:
    """The case without all that changes nothing in a run: how sure it is, what is decided, words."""
    return case.with_(**{name: field.blank for name, field in FIELDS.items()
                         if field.group in _ASIDE or name in _ASIDE_TOO})


def _with_doubts_of(case: Case, si: Resolved, run: RunResult) -> RunResult:
    """A run worked out before, with its means as the reading of this case."""
    if run.corrected is None:
        return run
    return replace(run, assessment=assess(case_of(case, si, run.corrected, switched_off(case))))


class MeanOfRuns:
    """The mean quality of several runs as a model of common readings: what is wrong with an instrument is
    wrong by the same amount in all of them."""

    def __init__(self, balances, apart: list[dict[str, float]]):
        self.balances, self.apart = balances, apart

    def __call__(self, **values):
        total, worst = 0.0, None
        for balance, apart in zip(self.balances, self.apart, strict=True):
            x, status = balance(**{name: value + apart.get(name, 0.0) for name, value in values.items()})
            total = total + x
            worst = status if worst is None else np.maximum(worst, status)
        return total / len(self.balances), worst


def combine(case: Case, si: Resolved, runs: tuple[RunResult, ...]) -> Result:
    """Runs reduced one by one, taken together."""
    read = [run for run in runs if run.quality is not None]
    unable = tuple(f"{run.run.name}: {run.unable}" for run in runs if run.unable)
    if not read:
        return Result(case, si, runs, unable or ("There are no readings yet.",))
    together = repeatability([(r.quality, r.scatter.component if r.scatter else None) for r in read])
    measurement = _measurement(case, si, read, together)
    cautions = tuple(dict.fromkeys(measurement.cautions))
    missing = measurement.missing + _without_reason(case, read)
    if together is None and read[0].scatter is None:
        missing += ("the scatter of the readings, of which there is only one",)
    try:
        budget = measurement.budget()
    except InputError as error:
        return Result(case, si, runs, (*unable, error.faults[0].why.capitalize() + "."), missing, cautions)
    alone = budget.without(SAMPLING)
    return Result(case, si, runs, unable, missing, cautions, budget.value, measurement, budget, alone,
                  terms_of(budget), improvements(alone), together, verdicts(case, si, budget))


def _without_reason(case: Case, read: list[RunResult]) -> tuple[str, ...]:
    """Decisions of a person that lack the reason which would let others follow them."""
    found = [f"the reason for switching off the correction for {name}"
             for name, reason in switched_off(case).items() if not reason]
    found += [f"the reason for the window chosen by hand in {run.run.name}"
              for run in read if run.settling.by_hand and not run.settling.reason]
    found += [f"the reason for leaving out row {number} of {run.run.name}"
              for run in read for number, reason in run.removed.items() if not reason]
    return tuple(found)


def _measurement(case: Case, si: Resolved, read: list[RunResult], together: Repeatability | None) -> Measurement:
    parts = []
    for run in read:
        true = run.corrected
        on_barometer = {name: rests_on_barometer(case, name, run.run.basis) for name in ("p_line", "p_exhaust")}
        reading = Reading(float(true.p_line), float(true.p_exhaust), float(true.T_exhaust), true.sample_flow,
                          true.T_ambient, {name: _on_scale(run, name, on) for name, on in on_barometer.items()},
                          on_barometer)
        scatter = [together.component] if together else [c for c in [run.scatter and run.scatter.component] if c]
        parts.append(measurement_of(run.assessment, reading, scatter))
    return joined(parts)


def joined(parts: Sequence[Measurement]) -> Measurement:
    """Runs measured one by one as one measurement of their mean; the causes on the result are those of the first."""
    if len(parts) == 1:
        return parts[0]
    means = {i.name: float(np.mean([_value(p, i.name) for p in parts])) for i in parts[0].inputs}
    apart = [{name: _value(p, name) - mean for name, mean in means.items()} for p in parts]
    inputs = tuple(replace(i, value=means[i.name]) for i in parts[0].inputs)
    return Measurement(MeanOfRuns([p.model for p in parts], apart), inputs, parts[0].on_result, parts[0].coverage,
                       tuple(dict.fromkeys(m for p in parts for m in p.missing)),
                       tuple(dict.fromkeys(c for p in parts for c in p.cautions)))


def _on_scale(run: RunResult, name: str, on_barometer: bool) -> float:
    """What the gauge of a pressure showed [Pa]; one typed on the other basis is turned round."""
    shown, gauge = float(getattr(run.shown, name)), run.shown.basis[name] == GAUGE
    return shown + (gauge - on_barometer) * float(run.shown.p_barometer)


def _value(part: Measurement, name: str) -> float:
    return next(i.value for i in part.inputs if i.name == name)
