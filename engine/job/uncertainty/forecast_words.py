"""The uncertainty to expect, in words and rows: how large, what it is made of, what would help most."""

from __future__ import annotations

from engine.job.result import Result
from engine.job.rig.tables import points
from engine.job.uncertainty.method_doubts import SHARES
from engine.job.uncertainty.uncertainty import HEAT_LOSS, READINGS, Forecast, Term
from engine.measurement import SAMPLING
from engine.steam.units import UnitSystem, uncertainty_from_si

_GAIN = 0.005  # of U, below which an improvement is none


def forecast_headline(f: Forecast) -> str:
    """U with sampling and by the instruments alone, in one sentence."""
    if f.unable:
        return f.unable
    whole, alone = f.budget, f.instruments
    if f.missing and points(whole.U) == points(0.0):
        return "Nothing can be forecast yet: say first what instruments there are and how well the nozzle samples."
    least = "at least " if f.missing else "= "
    return (f"Expect U {least}{points(whole.U)} of quality, {points(alone.U)} by the instruments alone "
            f"(coverage {100 * whole.coverage:.4g} %, k = {whole.k:.2f}).")


def forecast_advice(f: Forecast) -> tuple[str, ...]:
    """What dominates, what single improvement helps most, what was not stated, what to mind."""
    lines = []
    if not f.unable:
        if f.sampling_dominates:
            lines.append(f"Sampling makes up {100 * f.sampling_share:.0f} % of the variance: no better instrument "
                         "helps much, a better nozzle or tapping would.")
        best = f.best
        if best is not None and best.U_halved < (1.0 - _GAIN) * f.instruments.U:
            lines.append(f"Of all else, the {best.group} is worth improving first: half its doubt brings what the "
                         f"instruments make from {points(f.instruments.U)} to {points(best.U_halved)}, none of it to "
                         f"{points(best.U_removed)}.")
    if f.missing:
        lines.append(f"Not stated yet, so that the true uncertainty is larger: {', '.join(f.missing)}.")
    return (*lines, *(f"{line[0].upper()}{line[1:].rstrip('.')}." for line in f.cautions if line))


def budget_rows(f: Forecast | Result, units: UnitSystem, *, with_sampling: bool = True) -> list[dict[str, str]]:
    """The budget of a forecast or of a result line by line, largest first; shares are of what is listed."""
    terms = [t for t in largest_first(f) if with_sampling or t.group != SAMPLING]
    whole = sum(t.share for t in terms) or 1.0
    return [{"From": t.group, "Cause": t.cause, "Standard uncertainty": _u(t, units),
             "In the quality": points(abs(t.contribution)), "Share of the variance": f"{100 * t.share / whole:.1f} %"}
            for t in terms]


def largest_first(f: Forecast | Result) -> tuple[Term, ...]:
    """The terms of the budget, the one that contributes most first."""
    return tuple(sorted(f.terms, key=lambda t: -abs(t.contribution)))


def _u(t: Term, units: UnitSystem) -> str:
    if t.group in (SAMPLING, READINGS):
        return points(t.u)
    if t.group in (HEAT_LOSS, *SHARES):  # a part of the correction, of a mass, of the power
        return f"{100 * t.u:.2g} %"
    unit = units.unit(t.kind)
    number = f"{uncertainty_from_si(t.u, unit, t.kind):.2g}"
    return number if unit == "1" else f"{number} {unit}"
