"""How sure is the quality? The case's doubts as inputs of the budget, and the forecast before the test.

The same machinery serves a case (forecast) and a set of readings with its own scatter (result).
Quantities enter by name into ``balance.Balance``; causes that reach two of them (the barometer in
both pressures, one thermometer in the reading and in the normal reading) are one cause.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import NamedTuple

from engine.calorimeter import Path, leg_density
from engine.job.assessment import Assessment, Verdict, assess
from engine.job.assessment.balance import Balance, balance_of
from engine.job.case import T_LEG, Case, Resolved
from engine.job.case.fields_instruments import AT_LEAST, HALF_WIDTH
from engine.job.case.fields_modes import NOT_STATED
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_NORMAL, BY_TWO_FLOWS, NONE, UNDECIDED
from engine.job.uncertainty.band import band_of
from engine.job.uncertainty.instruments import (
    Doubts,
    flow_doubts,
    pressure_doubts,
    rests_on_barometer,
    thermometer_doubts,
    tolerance_doubts,
)
from engine.job.uncertainty.method_doubts import heated_model, separated_model
from engine.measurement import (
    SAMPLING,
    Budget,
    Comparison,
    Component,
    Input,
    Limits,
    MonteCarlo,
    Rule,
    Verdicts,
    compare,
    decide_both,
    monte_carlo,
    normal,
    rectangular,
    uncertainty_budget,
)
from engine.steam.errors import InputError
from engine.steam.units import G_STANDARD

HEAT_LOSS, RECOVERY, READINGS = "heat loss", "recovery factor", "readings"
DOMINATES = 0.5  # of the variance


class Reading(NamedTuple):
    """One set of readings in SI: pressures absolute and ``p_line`` at the tapping; ``shown`` what the two
    gauges show [Pa], by the names of the pressures; ``on_barometer`` which of them rest on the barometer."""

    p_line: float
    p_exhaust: float
    T_exhaust: float
    sample_flow: float | None
    T_ambient: float | None
    shown: Mapping[str, float]
    on_barometer: Mapping[str, bool]


@dataclass(frozen=True)
class Measurement:
    """All that the budget and Monte Carlo take: a model, its inputs, and causes that act on the result.

    ``missing`` names in words what was not stated, so that the budget is not complete without it;
    ``cautions`` are remarks on the instruments.
    """

    model: Callable
    inputs: tuple[Input, ...]
    on_result: tuple[Component, ...]
    coverage: float
    missing: tuple[str, ...]
    cautions: tuple[str, ...]

    def budget(self) -> Budget:
        """The GUM budget; InputError where the reading sits at an edge without a slope."""
        return uncertainty_budget(self.model, self.inputs, on_result=self.on_result, coverage=self.coverage)


class Check(NamedTuple):
    """Monte Carlo beside a budget, with sampling and by instruments alone (the same where it was not stated).

    ``superheated`` is the part of the draws by instruments whose line is superheated.
    """

    drawn: MonteCarlo
    comparison: Comparison
    instruments: MonteCarlo
    comparison_instruments: Comparison
    superheated: float


class Term(NamedTuple):
    """One line of a budget in words: ``u`` [SI] is of ``kind`` (a key of ``units.UNITS``), ``contribution``
    is in quality."""

    group: str
    cause: str
    u: float
    kind: str
    contribution: float
    share: float


class Better(NamedTuple):
    """What a better instrument would do to U of the quality, sampling left out: half the doubt, and none."""

    group: str
    U_halved: float
    U_removed: float


@dataclass(frozen=True, eq=False)
class Forecast:
    """The uncertainty to be expected of the quality, before anyone climbs a ladder.

    assessment   the case assessed
    unable       why there is no forecast, in words; "" where there is one
    budget       with sampling, where it was stated; None where ``unable``
    instruments  the same without sampling
    terms        the budget line by line
    better       what to improve, the most helpful first
    missing      what is not stated yet, so that the true uncertainty is larger
    verdicts     the decision this quality would get; None without a limit
    """

    assessment: Assessment
    unable: str = ""
    budget: Budget | None = None
    instruments: Budget | None = None
    missing: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()
    verdicts: Verdicts | None = None

    @cached_property
    def terms(self) -> tuple[Term, ...]:
        return terms_of(self.budget) if self.budget else ()

    @cached_property
    def better(self) -> tuple[Better, ...]:
        return improvements(self.instruments) if self.instruments else ()

    @cached_property
    def sampling_share(self) -> float:
        """Part of the variance that sampling makes up, 0 to 1."""
        return sum(row.share for row in self.budget.rows if row.group == SAMPLING) if self.budget else 0.0

    @cached_property
    def band(self) -> tuple[Path, Path] | None:
        """The paths of a quality smaller and larger by U, as far as there can be such: None where U is none."""
        return band_of(self.assessment, self.budget.U) if self.budget and self.budget.U > 0 else None

    @property
    def sampling_dominates(self) -> bool:
        """Whether no better instrument can help much."""
        return self.sampling_share > DOMINATES

    @property
    def best(self) -> Better | None:
        """The single instrument or correction whose improvement would help most."""
        return self.better[0] if self.better else None


def forecast(case: Case, assessment: Assessment | None = None) -> Forecast:
    """What U the quality will have with the instruments chosen, term by term, with and without sampling.

    Of a case with a reading it is the uncertainty of that reading without scatter; of an expected
    wetness, that of the reading it would give. ``assessment`` saves computing it again. Raises
    InputError where an entry cannot be used.

    >>> from engine.job.case.demo import DEMO
    >>> expected = forecast(DEMO)
    >>> f"{100 * expected.instruments.U:.2f} %pt by instruments, {100 * expected.budget.U:.2f} %pt with sampling"
    '0.08 %pt by instruments, 0.58 %pt with sampling'
    """
    a = assessment or assess(case)
    if a.verdict not in (Verdict.READS, Verdict.THIN):
        return Forecast(a, _UNABLE[a.verdict])
    measurement = measurement_of(a)
    try:
        budget = measurement.budget()
    except InputError as error:
        return Forecast(a, error.faults[0].why, missing=measurement.missing, cautions=measurement.cautions)
    instruments = budget.without(SAMPLING)
    return Forecast(a, "", budget, instruments, measurement.missing, measurement.cautions,
                    verdicts(case, a.si, budget))


def forecast_or_why(case: Case, assessment: Assessment) -> Forecast:
    """The forecast beside an answer that stands without it: an instrument that does not fit is its reason, no error.

    >>> from engine.job.case.demo import DEMO
    >>> from engine.job.case.rows import Entry
    >>> high = DEMO.with_(p_line=Entry(18.0, "bar", "gauge"))
    >>> forecast_or_why(high, assess(high)).unable
    'Line gauge: scale to: got 16 bar, needs a scale that holds the reading, 18 bar.'
    """
    try:
        return forecast(case, assessment)
    except InputError as error:
        return Forecast(assessment, "; ".join(str(fault).partition("\n")[0] for fault in error.faults) + ".")


_UNABLE = {
    Verdict.CANNOT: "A reading that cannot be told from wet exhaust steam has no uncertainty: it has no value.",
    Verdict.SUPERHEATED: "The line is superheated, so there is no quality that could be uncertain.",
    Verdict.CONTRADICTS: "The readings contradict each other, so there is no quality that could be uncertain.",
}


def reading_of(case: Case, si: Resolved, T_exhaust: float) -> Reading:
    """The case's own reading, with the exhaust at ``T_exhaust`` [K]."""
    on_barometer = {name: rests_on_barometer(case, name) for name in ("p_line", "p_exhaust")}
    at_gauge = {"p_line": si["p_line"] + leg_pressure(si), "p_exhaust": si["p_exhaust"]}
    shown = {name: p - si.p_barometer if on_barometer[name] else p for name, p in at_gauge.items()}
    return Reading(si["p_line"], si["p_exhaust"], T_exhaust, si["sample_flow"], si["T_ambient"], shown, on_barometer)


def leg_pressure(si: Resolved) -> float:
    """What the water leg adds at the line gauge [Pa]; negative where the gauge stands above the tapping."""
    return leg_density(T_LEG) * G_STANDARD * si["leg_height"] if si["leg_height"] else 0.0


def prepare(case: Case, si: Resolved, reading: Reading, scatter: Sequence[Component] = ()) -> Measurement:
    """A reading with all its doubts, ready for the budget and for Monte Carlo.

    ``scatter`` are causes found in the readings themselves (type A); they act on the result.
    """
    method, balance = case["heat_loss_method"], balance_of(case, si)
    needed = _needed(balance, reading)
    doubts = {name: pressure_doubts(case, si, name, reading.shown[name], reading.on_barometer[name])
              for name in ("p_line", "p_exhaust")}
    doubts["T_exhaust"] = thermometer_doubts(case, si, reading.T_exhaust)
    values = {"p_line": reading.p_line, "p_exhaust": reading.p_exhaust, "T_exhaust": reading.T_exhaust}
    if "sample_flow" in needed:
        values["sample_flow"] = reading.sample_flow
        doubts["sample_flow"] = flow_doubts(case, si, reading.sample_flow)
    if "recovery" in needed:
        values["recovery"] = 1.0 if si["recovery"] is None else si["recovery"]
        doubts["recovery"] = tolerance_doubts(si["recovery_tolerance"], RECOVERY, "recovery factor")
    if method == BY_NORMAL:
        values["T_normal"] = si["T_normal"]
        doubts["T_normal"] = thermometer_doubts(case, si, si["T_normal"])
    if method not in (UNDECIDED, NONE):
        values["loss"] = 1.0
        doubts["loss"] = tolerance_doubts(si["heat_loss_tolerance"], HEAT_LOSS, "heat loss correction")
    return _measurement(case, si, balance, {name: (value, doubts[name]) for name, value in values.items()}, scatter)


def measurement_of(a: Assessment, reading: Reading | None = None, scatter: Sequence[Component] = ()) -> Measurement:
    """A reading with all its doubts, by whichever method it is taken; the case's own unless another is given."""
    case, si = a.case, a.si
    reading = reading_of(case, si, a.T_exhaust) if reading is None else reading
    if a.heating is not None:
        line = pressure_doubts(case, si, "p_line", reading.shown["p_line"], reading.on_barometer["p_line"])
        return _measurement(case, si, *heated_model(a, line), scatter)
    throttled = prepare(case, si, reading, scatter)
    if a.separation is None:
        return throttled
    model, more = separated_model(a, throttled.model)
    extra = _measurement(case, si, model, more)
    return replace(throttled, model=model, inputs=throttled.inputs + extra.inputs,
                   missing=tuple(dict.fromkeys(throttled.missing + extra.missing)))


def _measurement(case: Case, si: Resolved, model: Callable, valued: Mapping[str, tuple[float, Doubts]],
                 scatter: Sequence[Component] = ()) -> Measurement:
    """A model with its inputs, and with what acts on every result."""
    sampling = _sampling(case, si)
    everything = sum((*(doubts for _, doubts in valued.values()), sampling), Doubts())
    return Measurement(model, tuple(Input(name, value, doubts.components) for name, (value, doubts) in valued.items()),
                       (*scatter, *sampling.components), si["coverage"],
                       tuple(dict.fromkeys(everything.missing)), tuple(dict.fromkeys(everything.cautions)))


def _needed(balance: Balance, reading: Reading) -> set[str]:
    """Of the inputs that not every case has: those that move this balance."""
    moving = bool(balance.exhaust_bore and reading.sample_flow)
    flow = moving or balance.method in (BY_CONDUCTANCE, BY_TWO_FLOWS)
    return ({"sample_flow"} if flow else set()) | ({"recovery"} if moving else set())


def _sampling(case: Case, si: Resolved) -> Doubts:
    """Sampling representativeness, a line of its own whatever the instruments."""
    if case["sampling_kind"] == NOT_STATED or si["sampling"] is None:
        return Doubts(missing=("sampling representativeness",))
    make = rectangular if case["sampling_kind"] == HALF_WIDTH else normal
    return Doubts((make("sampling representativeness", si["sampling"], group=SAMPLING),))


def verdicts(case: Case, si: Resolved, budget: Budget) -> Verdicts | None:
    """The decision by the rule of the case, with and without sampling; None without a limit."""
    if si["x_limit"] is None:
        return None
    limit = si["x_limit"]
    limits = Limits(lower=limit) if case["limit_side"] == AT_LEAST else Limits(upper=limit)
    return decide_both(budget, limits, Rule(case["decision_rule"], si["decision_risk"]))


_KINDS = {"p_line": "pressure difference", "p_exhaust": "pressure difference", "p_heater": "pressure difference",
          "T_exhaust": "difference", "T_heater": "difference", "T_normal": "difference", "sample_flow": "mass flow"}


def terms_of(budget: Budget) -> tuple[Term, ...]:
    """The budget line by line, in words, in its own order."""
    return tuple(Term(row.group, row.source.partition(": ")[2] or row.source, row.u,
                      _KINDS.get(row.quantities[0], "fraction"), row.contribution, row.share) for row in budget.rows)


def improvements(budget: Budget) -> tuple[Better, ...]:
    """What half the doubt and none would leave of U, the most helpful first; readings cannot be bought."""
    found = [Better(g, budget.improved(g, 0.5).U, budget.improved(g, 0.0).U) for g in budget.groups if g != READINGS]
    return tuple(sorted(found, key=lambda b: b.U_halved))


def check(measurement: Measurement, budget: Budget, *, draws: int = 1_000_000, seed: int = 1,
          progress: Callable[[float], None] | None = None) -> Check:
    """The same doubts propagated as distributions (JCGM 101), compared with the budget.

    One seed gives one answer. ``progress`` is called with the fraction done. Raises InputError where
    too few of the draws have a quality.
    """
    drawn = monte_carlo(measurement.model, measurement.inputs, on_result=measurement.on_result,
                        coverage=measurement.coverage, draws=draws, seed=seed, progress=progress)
    alone = drawn.without_sampling or drawn
    return Check(drawn, compare(budget, drawn), alone, compare(budget.without(SAMPLING), alone),
                 alone.probability(lower=1.0))
