"""The result in words: what the readings say, how sure, by which rule, and what keeps it from being more."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from engine.job.assessment.answer import percent_points
from engine.job.case import Case
from engine.job.case.fields_instruments import AT_LEAST
from engine.job.result.reduction import RunResult
from engine.job.result.result import Result
from engine.job.rig.tables import points
from engine.job.uncertainty import Check
from engine.job.uncertainty.figures import figures, wetness_figures
from engine.measurement import Interval, Outcome, Reason, Unsettled, Verdict
from engine.steam.units import UnitSystem, uncertainty_from_si

# A shape beside the word, so that a verdict never hangs on colour alone
OUTCOME_SHAPES = {Outcome.ACCEPT: "✓", Outcome.REJECT: "✕", Outcome.UNDECIDED: "◇"}
LABELS = {"p_line": "line pressure", "p_exhaust": "exhaust pressure", "T_exhaust": "exhaust temperature",
          "p_barometer": "barometer", "sample_flow": "sample flow", "T_ambient": "ambient temperature",
          "T_line": "line temperature", "condensate": "condensate mass", "h_line": "enthalpy"}


@dataclass(frozen=True)
class Told:
    """``word`` says what it is (result, exploration, no result) with its ``shape``; ``headline`` the figure;
    ``verdicts`` the decision with and without sampling; ``reasons`` and ``open_points`` what stands behind and
    what is missing."""

    word: str
    shape: str
    headline: str
    verdicts: tuple[str, ...]
    reasons: tuple[str, ...]
    open_points: tuple[str, ...]


def told(result: Result) -> Told:
    """The result for a reader, in no unit but quality itself."""
    if result.x is None:
        return Told("no result", "○", "No quality can be given yet." if not result.runs else
                    "No quality can be given from these readings.", (), (), result.unable)
    word, shape = ("result", "●") if result.final else ("exploration", "◐")
    missing = (f"Not a result yet, because not stated: {', '.join(result.missing)}.",) if result.missing else ()
    return Told(word, shape, headline(result), verdict_lines(result), _reasons(result), (*missing, *result.unable))


def headline(result: Result) -> str:
    """``Quality 0.9720 ± 0.0058, wetness 2.80 ± 0.58 %.``"""
    x, U = figures(result.budget)
    return f"Quality {x} ± {U}, wetness {wetness_figures(result.budget)} %."


def _reasons(result: Result) -> tuple[str, ...]:
    whole, alone = result.budget, result.instruments
    lines = [f"Expanded uncertainty with k = {whole.k:.2f} (coverage {100 * whole.coverage:.4g} %)."]
    if whole.U > alone.U:
        x, U = figures(alone)
        lines.append(f"By the instruments and the scatter alone {x} ± {U}; the rest is sampling.")
    runs = result.read
    if len(runs) == 1:
        lines.append(f"{counted(int(runs[0].used.sum()), 'set')} of readings{_window(runs[0])}{_worth(runs[0])}.")
    else:
        together = result.repeatability
        lines.append(f"Mean of {together.runs} runs, which " +
                     (f"differ by more than their scatter explains: their spread, {points(together.spread)}, stands "
                      "for the repeatability." if together.differ else
                      f"agree within their scatter (spread {points(together.spread)})."))
    return tuple(lines)


def _window(run: RunResult) -> str:
    s = run.settling
    if s.begin is None:
        return ""
    kind = "the window chosen by hand" if s.by_hand else "the settled window"
    return f" from {kind}, {s.begin / 60:.1f} to {s.end / 60:.1f} min"


def _worth(run: RunResult) -> str:
    if run.scatter is None or run.scatter.independence is None:
        return ""
    return f", worth {run.scatter.independence.n_eff:.0f} independent ones"


def verdict_lines(result: Result) -> tuple[str, ...]:
    """The decision with sampling and without it, each in a sentence with its shape and word."""
    if result.verdicts is None:
        return ()
    both = result.verdicts
    return (f"With sampling {_decision(both.with_sampling, result.case)}.",
            f"By the instruments alone {_decision(both.without_sampling, result.case)}.")


def decision_words(result: Result) -> tuple[tuple[str, str], ...]:
    """The decision with sampling and without it, each as (shape and word, what it rests on)."""
    if result.verdicts is None:
        return ()
    both = zip(("with sampling", "by the instruments alone"), result.verdicts, strict=True)
    return tuple((f"{verdict_word(v)} {name}", f"{upper_first(decision_reason(v, result.case))}.") for name, v in both)


def verdict_word(verdict: Verdict) -> str:
    """``◇ undecided``."""
    return f"{OUTCOME_SHAPES[verdict.outcome]} {verdict.outcome.value}"


def _decision(verdict: Verdict, case: Case) -> str:
    return f"{verdict_word(verdict)}: {decision_reason(verdict, case)}"


def decision_reason(verdict: Verdict, case: Case) -> str:
    """What the decision rests on."""
    least = case["limit_side"] == AT_LEAST
    edge, side = (verdict.accept_from, "from") if least else (verdict.accept_to, "up to")
    return (f"the chance that the limit is met is {chance(verdict.probability)}; the rule accepts {side} {edge:.4f}")


def chance(p: float) -> str:
    """A probability, never rounded to a certainty.

    >>> chance(0.7563), chance(0.99996), chance(0.0)
    ('76 %', 'over 99.9 %', 'under 0.1 %')
    """
    if p > 0.999:
        return "over 99.9 %"
    if p < 0.001:
        return "under 0.1 %"
    return f"{100 * p:.1f} %" if not 0.1 <= p <= 0.9 else f"{100 * p:.0f} %"


def rule_text(case: Case) -> str:
    """The rule agreed beforehand, in words."""
    limit = case["x_limit"]
    if limit is None:
        return "No limit was given, so nothing is decided."
    rule = {"simple": "a simple comparison, which leaves the doubt to chance",
            "guarded by U": "accept or reject only when the limit lies further away than U",
            "guarded by risk": f"accept or reject only when the chance of being wrong is "
                               f"{case['decision_risk'].value:g} {case['decision_risk'].unit} or less"}
    value = limit.value if limit.unit == "1" else f"{limit.value:g} {limit.unit}"
    return f"Limit: quality {case['limit_side']} {value}. Rule: {rule[case['decision_rule']]}."


# ---- why a stretch is not settled

_FAILED = {
    Unsettled.TOO_FEW: "has too few readings ({value:.0f}, at least {limit:.0f} needed)",
    Unsettled.GAP: "has a pause of {value:.0f} s, longer than {limit:.0f} s",
}


def reason_text(reason: Reason, units: UnitSystem) -> str:
    """One failed test: ``the exhaust temperature drifts by 0.092 K/min, more than 0.050 K/min``."""
    label = f"the {LABELS[reason.channel]}"
    if reason.test in _FAILED:
        return f"{label} {_FAILED[reason.test].format(value=reason.value, limit=reason.limit)}"
    kind = "difference" if reason.channel.startswith("T_") else "pressure difference"
    if reason.test is Unsettled.SLOPE:
        unit = units.unit("rate")
        value, limit = (uncertainty_from_si(v, unit, "rate") for v in (reason.value, reason.limit))
        return f"{label} drifts by {value:.3f} {unit}, more than {limit:.3g} {unit}"
    value, limit = (amount(v, kind, units) for v in (reason.value, reason.limit))
    verb = {Unsettled.DRIFT: "changes by", Unsettled.SCATTER: "scatters by",
            Unsettled.SIGNIFICANT: "has a trend beyond chance,"}[reason.test]
    return f"{label} {verb} {value}, more than {limit}"


def amount(si: float, kind: str, units: UnitSystem) -> str:
    """A size with its unit, in three digits."""
    unit = units.unit(kind)
    number = f"{uncertainty_from_si(si, unit, kind):.3g}"
    return number if unit == "1" else f"{number} {unit}"


def unsettled_lines(run: RunResult, units: UnitSystem, most: int = 6) -> tuple[str, ...]:
    """Why the rest of a run is not settled, stretch by stretch."""
    search = run.settling.search
    if search is None:
        return (upper_first(f"{run.settling.unable}."),) if run.settling.unable else ()
    lines = []
    stretches = [(begin, end, interval) for interval in search.unsettled
                 for begin, end in (_alone(interval, search.settled),) if begin < end]
    for begin, end, interval in stretches[:most]:
        why = "; ".join(reason_text(r, units) for r in _worst(search.why(interval.windows)))
        lines.append(f"{begin / 60:.1f} to {end / 60:.1f} min: {why}.")
    left = len(stretches) - most
    return (*lines, f"{left} more stretches like these.") if left > 0 else tuple(lines)


def _worst(reasons: Sequence[Reason]) -> list[Reason]:
    """Of each channel the test that fails by most."""
    def excess(reason: Reason) -> float:
        return reason.value / reason.limit if reason.limit and reason.test not in _FAILED else np.inf

    found: dict[str, Reason] = {}
    for reason in reasons:
        if reason.channel not in found or excess(reason) > excess(found[reason.channel]):
            found[reason.channel] = reason
    return list(found.values())


def _alone(interval: Interval, settled: Sequence[Interval]) -> tuple[float, float]:
    """The part of an unsettled stretch that lies in no settled one: windows overlap where they change over."""
    begin = max((s.end for s in settled if s.begin < interval.begin), default=interval.begin)
    end = min((s.begin for s in settled if s.begin > interval.begin), default=interval.end)
    return max(begin, interval.begin), min(end, interval.end)


def counted(number: int, thing: str) -> str:
    """``1 refusal``, ``12 refusals``."""
    return f"{number} {thing}{'' if number == 1 else 's'}"


def upper_first(sentence: str) -> str:
    """The sentence with a capital at its start."""
    return sentence[0].upper() + sentence[1:]


# ---- rows of tables

def correction_rows(run: RunResult, units: UnitSystem) -> list[dict[str, str]]:
    """Corrections one by one."""
    return [{"Correction": c.name, "": "on" if c.on else "off", "Adds to the reading": _size(c, units),
             "Adds to the quality": "not readable without it" if c.effect is None else points(c.effect, signed=True),
             "Reason": c.reason} for c in run.corrections]


def _size(c, units: UnitSystem) -> str:
    unit = units.unit(c.kind)
    value = uncertainty_from_si(c.size, unit, c.kind)
    return f"{LABELS[c.quantity]} {value:+.4g} {unit}"


def channel_rows(run: RunResult, units: UnitSystem) -> list[dict[str, str]]:
    """Means of the channels over the rows used, as shown and corrected."""
    rows = []
    for name, m in run.means.items():
        kind = _kind(name)
        basis = f" {run.run.basis[name]}" if name in run.run.basis else ""
        true = getattr(run.corrected, name, None)
        absolute = " absolute" if kind == "pressure" else ""
        rows.append({"Channel": LABELS[name], "Mean as shown": units.text(m.mean, kind) + basis,
                     "Scatter s": amount(m.s, _spread(kind), units), "Readings": f"{m.n}",
                     "Independent": f"{m.n_eff:.0f}" if m.s else "",
                     "Corrected": "" if true is None else units.text(float(true), kind) + absolute})
    return rows


def _kind(name: str) -> str:
    if name.startswith("p_"):
        return "pressure"
    return "temperature" if name.startswith("T_") else {"sample_flow": "mass flow", "condensate": "mass"}[name]


def _spread(kind: str) -> str:
    return {"pressure": "pressure difference", "temperature": "difference"}.get(kind, kind)


@dataclass(frozen=True)
class Flagged:
    """One reading that lies apart: ``row`` in the file, its ``text``, and what the tests say."""

    row: int
    channel: str
    text: str
    distance: float
    by: str


def flagged(run: RunResult, units: UnitSystem, most: int = 50) -> tuple[tuple[Flagged, ...], int]:
    """Readings flagged by either test, the farthest first, and how many there are in all."""
    names = list(run.outliers)
    marked = [np.flatnonzero(tests.by_tau | tests.by_grubbs) for tests in run.outliers.values()]
    channel = np.repeat(np.arange(len(names)), [places.size for places in marked])
    place = np.concatenate(marked) if marked else np.array([], int)
    distance = np.array([run.outliers[names[c]].distance[k] for c, k in zip(channel, place, strict=True)])
    where = np.flatnonzero(run.window)
    found = []
    for i in np.argsort(-distance, kind="stable")[:most]:
        name, k = names[channel[i]], place[i]
        tests, row = run.outliers[name], where[k]
        by = " and ".join(word for word, marks in (("Grubbs", tests.by_grubbs), ("tau", tests.by_tau)) if marks[k])
        found.append(Flagged(int(run.run.rows[row]), name, units.text(float(run.run.channels[name][row]), _kind(name)),
                             float(distance[i]), by))
    return tuple(found), place.size


def outlier_rows(run: RunResult, units: UnitSystem) -> list[dict[str, str]]:
    """The same as a table."""
    rows = [{"Row": str(f.row), "Channel": LABELS[f.channel], "Reading": f.text, "Apart by": f"{f.distance:.2f} s",
             "Flagged by": f.by, "Decided": _decided(run, f.row)} for f in flagged(run, units)[0]]
    listed = {row["Row"] for row in rows}
    return rows + [{"Row": str(number), "Channel": "", "Reading": "", "Apart by": "", "Flagged by": "",
                    "Decided": _decided(run, number)} for number in run.removed if str(number) not in listed]


def _decided(run: RunResult, row: int) -> str:
    if row not in run.removed:
        return "kept"
    return f"left out: {run.removed[row]}" if run.removed[row] else "kept until a reason is given"


def run_rows(result: Result, units: UnitSystem) -> list[dict[str, str]]:
    """One row for each run."""
    return [{"Run": r.run.name, "Readings": f"{r.used.sum()} of {len(r.run)}",
             "Window": _window(r).removeprefix(" from "),
             "Quality": "none" if r.quality is None else f"{r.quality:.5f}",
             "Superheat": "" if r.assessment is None else units.text(r.assessment.superheat, "difference"),
             "Scatter of one reading": "" if r.scatter is None else points(r.scatter.s),
             "Remark": r.unable} for r in result.runs]


def drift_text(run: RunResult) -> str:
    """How the quality moved over the window used."""
    d = run.scatter.drift if run.scatter else None
    if d is None:
        return ""
    told = f"Over the window the quality moves by {percent_points(d.slope * d.duration)}"
    if d.p_value < 0.05:
        return told + ", more than chance explains."
    return told + "; the scatter does not show that this is more than chance."


def check_lines(check: Check) -> tuple[str, ...]:
    """What Monte Carlo says beside the budget."""
    low, high = check.drawn.symmetric
    draws = f"{check.drawn.draws:,}".replace(",", " ")
    lines = [f"{draws} draws: mean {check.drawn.value:.5f}, u = {points(check.drawn.u)}, "
             f"{100 * check.drawn.coverage:.4g} % from {low:.5f} to {high:.5f}.", check.comparison.sentence]
    if check.instruments is not check.drawn:
        low, high = check.instruments.symmetric
        lines.append(f"By the instruments alone from {low:.5f} to {high:.5f}: "
                     f"{_lower_first(check.comparison_instruments.sentence)}")
    if check.superheated > 0:
        lines.append(f"In {check.superheated:.2%} of the draws the line is superheated.")
    if check.drawn.unusable > 0:
        lines.append(f"In {check.drawn.unusable:.2%} of the draws the exhaust could not be read.")
    return tuple(lines)


def _lower_first(sentence: str) -> str:
    return sentence[0].lower() + sentence[1:]
