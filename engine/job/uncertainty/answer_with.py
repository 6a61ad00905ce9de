"""The answer with its uncertainty, where the case tells enough for one."""

from __future__ import annotations

from dataclasses import replace

from engine.job.assessment import Verdict
from engine.job.assessment.answer import Answer, answer
from engine.job.case.fields_instruments import AT_LEAST
from engine.job.result.said import chance, verdict_word
from engine.job.rig.tables import points
from engine.job.uncertainty.figures import figures, wetness_figures
from engine.job.uncertainty.uncertainty import Forecast
from engine.steam.units import UnitSystem


def answer_with(f: Forecast, units: UnitSystem) -> Answer:
    """The answer, its first reason being how sure it is; U stands in the headline once all behind it is stated.

    >>> from engine.job.case.demo import DEMO
    >>> from engine.job.uncertainty import forecast
    >>> from engine.steam.units import SI
    >>> answer_with(forecast(DEMO), SI).headline
    'Quality in the line 0.9720 ± 0.0058, wetness 2.80 ± 0.58 %.'
    """
    said = answer(f.assessment, units)
    if f.assessment.verdict not in (Verdict.READS, Verdict.THIN):
        return said
    said = replace(said, reasons=(how_sure(f), *_against_limit(f), *said.reasons))
    if f.assessment.expected or f.missing or not f.budget or not f.budget.U > 0:
        return said
    x, U = figures(f.budget)
    return replace(said, headline=f"Quality in the line {x} ± {U}, wetness {wetness_figures(f.budget)} %.")


def how_sure(f: Forecast) -> str:
    """How sure the quality is, or what has to be stated before that can be said."""
    if f.unable:
        return f"No uncertainty can be given. {f.unable}"
    whole, alone = f.budget, f.instruments
    if f.missing and points(whole.U) == points(0.0):
        return "Uncertainty not known yet: state the instruments and the sampling."
    of_what = "Expanded uncertainty" + (" of the quality from that reading" if f.assessment.expected else "")
    if f.missing:
        return f"{of_what} at least {points(whole.U)}; not stated yet: {', '.join(f.missing)}."
    return (f"{of_what} {points(whole.U)} (k = {whole.k:.2f}, coverage {100 * whole.coverage:.4g} %), by the "
            f"instruments alone {points(alone.U)}; the scatter of readings comes on top.")


def _against_limit(f: Forecast) -> tuple[str, ...]:
    """What the decision rule of the case would say, in one sentence; nothing without a limit."""
    if f.verdicts is None:
        return ()
    both, least = f.verdicts, f.assessment.case["limit_side"] == AT_LEAST
    alone = verdict_word(both.without_sampling)
    return (f"Against the limit of {'at least' if least else 'at most'} {f.assessment.si['x_limit']:.4g}: "
            f"{verdict_word(both.with_sampling)}, the chance that it is met {chance(both.with_sampling.probability)}"
            f"{f' (by the instruments alone {alone})' if f.instruments.U < f.budget.U else ''}.",)
