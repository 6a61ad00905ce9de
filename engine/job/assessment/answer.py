"""The answer in words: what can be said, by how much, why, and what it assumes."""

from __future__ import annotations

from dataclasses import dataclass

from engine.job.assessment import methods_said as said
from engine.job.assessment.assessed import Assessment
from engine.job.assessment.terms import HOW
from engine.job.assessment.verdict import Verdict
from engine.job.case import T_LEG, describe
from engine.job.case.fields_path import BY_ALTITUDE, BY_KG, NONE, UNDECIDED
from engine.steam.units import UnitSystem, from_si

# A shape beside the word, so that a verdict never hangs on colour alone
SHAPES = {Verdict.READS: "●", Verdict.THIN: "◐", Verdict.CANNOT: "○", Verdict.SUPERHEATED: "△",
          Verdict.CONTRADICTS: "≠"}


@dataclass(frozen=True)
class Answer:
    """``headline`` says what is known, ``reasons`` why and by how much, ``remedies`` what would change it,
    ``assumed`` what was taken for granted; ``verdict`` in a word with its ``shape``."""

    verdict: str
    shape: str
    headline: str
    reasons: tuple[str, ...]
    remedies: tuple[str, ...]
    assumed: tuple[str, ...]


def percent_points(share: float) -> str:
    """A share of quality in percentage points, with its sign.

    >>> percent_points(0.00123)
    '+0.12 %pt'
    """
    return f"{100 * share:+.2f} %pt"


def quality_text(x: float) -> str:
    """Quality to four decimals, the most that any reading supports."""
    return f"{x:.4f}"


def answer(a: Assessment, units: UnitSystem) -> Answer:
    """The answer for a reader who uses ``units``."""
    headline, reasons, remedies = _BY_VERDICT[a.verdict](a, units)
    return Answer(a.verdict.value, SHAPES[a.verdict], headline, reasons, remedies, assumptions(a, units))


def _superheat(a: Assessment, units: UnitSystem) -> str:
    return units.text(a.superheat, "difference")


def _pressure(si: float, units: UnitSystem) -> str:
    return f"{units.text(si, 'pressure')} abs"


def _margin(a: Assessment, units: UnitSystem) -> str:
    return (f"The {said.place(a)} {'must be' if a.expected else 'is'} {_superheat(a, units)} superheated, "
            f"{units.text(a.margin, 'difference')} above the least readable superheat of "
            f"{_limit(a.least_readable, units)}.")


def _limit(superheat: float, units: UnitSystem) -> str:
    """A limit of the superheat, in no more digits than it has: ``5 K``, ``2.5 K``."""
    return f"{units.value(superheat, 'difference'):.3g} {units.unit('difference')}"


def _reads(a: Assessment, units: UnitSystem):
    if a.expected:
        headline = (f"For a wetness of {100 * (1 - a.x):.2f} %{said.under_which(a)} the {said.thermometer(a)} "
                    f"must show {units.text(a.T_exhaust, 'temperature')}.")
    else:
        headline = f"Quality in the line {quality_text(a.x)}, wetness {100 * (1 - a.x):.2f} %."
    reasons, remedies = (*said.method(a, units), _margin(a, units), said.reach(a)), ()
    if a.verdict is Verdict.THIN:
        comfortable = _limit(a.si["comfortable_superheat"], units)
        reasons += (f"The margin is thin: below {comfortable} of superheat a small error of the thermometer or of the "
                    "pressure beside it can hide wet steam.",)
        remedies = ("Put in more power, or use a better thermometer, and check it before relying on it." if a.heating
                    else "Lower the exhaust pressure or use a better thermometer, and check both before relying on "
                    "it.",)
    return headline, reasons, remedies


def _cannot(a: Assessment, units: UnitSystem):
    saturation = units.text(a.T_saturation, "temperature")
    if a.expected:
        wet = "" if a.superheat > 0 else f" The {said.place(a)} would be wet, quality {quality_text(a.x_exhaust)}."
        headline = f"A wetness of {100 * (1 - a.x):.2f} %{said.under_which(a)} cannot be read here."
        reasons = (f"The {said.thermometer(a)} would show {units.text(a.T_exhaust, 'temperature')}; saturation there "
                   f"is {saturation}.{wet}",)
    else:
        headline = (f"No quality can be given: it is below {quality_text(a.x_below)}." if a.x_below < 1 else
                    "No quality can be given, nor a bound of it.")
        shown = f"The {said.thermometer(a)} shows {units.text(a.T_exhaust, 'temperature')}, "
        if a.superheat > 0:
            fast = a.least_readable > a.si["least_superheat"]
            stream = units.text(a.velocities.exhaust, "velocity")
            why = (f"in a stream of {stream}, which the thermometer slows down and so heats, wet steam can show that"
                   if fast else "wet steam may pass for superheated")
            reasons = (f"{shown}only {_superheat(a, units)} above saturation there, {saturation}: below "
                       f"{_limit(a.least_readable, units)} {why}.",)
        else:
            reasons = (f"{shown}not above saturation there, {saturation}: wet steam has no enthalpy that "
                       "pressure and temperature could tell.",)
    return headline, (*reasons, *said.method(a, units), said.reach(a)), (said.remedy(a),)


def _superheated(a: Assessment, units: UnitSystem):
    by = units.text(a.line_superheat, "difference")
    headline = f"The line is superheated by {by}: there is no wetness to measure."
    reasons = (f"The enthalpy found is above that of dry saturated steam at {_pressure(a.si['p_line'], units)}.",)
    remedies = (f"If the line should be wet, check the {said.thermometer(a)}, and whether the line pressure was meant "
                "gauge or absolute.",)
    return headline, reasons, remedies


_BY_VERDICT = {Verdict.READS: _reads, Verdict.THIN: _reads, Verdict.CANNOT: _cannot,
               Verdict.SUPERHEATED: _superheated, Verdict.CONTRADICTS: said.contradiction}


def assumptions(a: Assessment, units: UnitSystem) -> tuple[str, ...]:
    """What the answer takes for granted, with the size of each correction where it has one."""
    case, si = a.case, a.si
    source = "standard atmosphere at the altitude" if case["barometer_source"] == BY_ALTITUDE else "as entered"
    unit = {"SI": "kPa", "US": "inHg"}[units.name]
    lines = [f"Barometer {from_si(si.p_barometer, unit, 'pressure'):.2f} {unit}, {source}."]
    if case["leg_height"] and case["leg_height"].value:
        lines.append(f"Water leg of {describe(case['leg_height'])} taken off the line gauge, water at "
                     f"{units.text(T_LEG, 'temperature', 0)}.")
    if not a.heating:
        lines += [_heat_loss(a, units), _kinetic_energy(a, units)]
    lines += said.assumed(a, units)
    return (*lines, "Steam properties: IAPWS-IF97.")


_HOW = {**HOW, BY_KG: "as entered"}


def _heat_loss(a: Assessment, units: UnitSystem) -> str:
    method = a.case["heat_loss_method"]
    if method == UNDECIDED:
        return "Heat loss not decided: taken as nothing, so the steam may be drier than shown."
    if method == NONE:
        return "Heat loss knowingly taken as nothing."
    return (f"Heat loss {units.text(a.terms.heat_loss, 'enthalpy')} of sample, {_HOW[method]}, "
            f"{percent_points(a.in_quality(a.terms.heat_loss))}.")


def _kinetic_energy(a: Assessment, units: UnitSystem) -> str:
    if not a.velocities.exhaust:
        return "Kinetic energy left out: no sample flow and exhaust bore given."
    effect = 0.5 * (1 - a.terms.recovery) * a.terms.exhaust_velocity**2 - 0.5 * a.terms.line_velocity**2
    return (f"Exhaust velocity {units.text(a.velocities.exhaust, 'velocity')}, recovery factor "
            f"{a.terms.recovery:g}: kinetic energy {percent_points(a.in_quality(effect))}.")
