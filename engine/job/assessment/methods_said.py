"""What a separator or a heater adds to the answer, in words."""

from __future__ import annotations

from engine.job.assessment.assessed import Assessment
from engine.job.case import Case, describe
from engine.job.case.fields_modes import ELECTRIC, SEPARATING, THROTTLING
from engine.job.case.fields_path import EXPECTED
from engine.job.case.rows import Entry
from engine.steam.units import UnitSystem

METHODS = {THROTTLING: "Throttling alone", SEPARATING: "Separator first", ELECTRIC: "Electric superheating"}


def in_short(case: Case) -> tuple[str, ...]:
    """What was entered, in a few words: line, method, where it ends, what is asked."""
    def told(name: str) -> str:
        entry = case[name]
        return describe(entry) if isinstance(entry, Entry) else "not given"

    electric = case["mode"] == ELECTRIC
    method = {THROTTLING: (), SEPARATING: ("separator first",), ELECTRIC: (f"heater {told('power')}",)}[case["mode"]]
    end = () if electric else (f"exhaust {told('p_exhaust')}",)
    asked = (f"expected wetness {told('wetness')}" if case["question"] == EXPECTED
             else f"reading {told('T_heater' if electric else 'T_exhaust')}")
    return (f"line {told('p_line')}", *method, *end, asked)


def thermometer(a: Assessment) -> str:
    """Where the deciding temperature is taken."""
    return "thermometer after the heater" if a.heating else "exhaust thermometer"


def place(a: Assessment) -> str:
    """The steam that must be superheated."""
    return "steam after the heater" if a.heating else "exhaust"


def share(part: float) -> str:
    """A part in per cent: ``9.0 %``."""
    return f"{100 * part:.1f} %"


def power(si: float) -> str:
    """Electric power is given in watts everywhere."""
    return f"{si:.0f} W"


def reach(a: Assessment) -> str:
    """How far the method reaches, as it stands."""
    if a.heating:
        held = f"With {power(a.heating.power)} at this sample flow"
        dry = "not even dry steam is superheated enough to be read"
    elif a.separation:
        held = ("With this separator" if a.expected else "With what was drained") + " and between these pressures"
        dry = "not even dry steam arrives superheated enough to be read"
    else:
        held, dry = "Between these pressures", "not even dry steam arrives superheated enough to be read"
    if a.x_least > 1:
        return f"{held} {dry}."
    if a.x_least <= 0:
        return f"{held} any wetness can be read."
    return f"{held} the least readable quality is {a.x_least:.4f}."


def under_which(a: Assessment) -> str:
    """The condition under which an expected wetness is read: what is drained, what is put in."""
    if a.separation:
        return f" with {share(a.separation.drain_fraction)} of the sample drained as water"
    if a.heating:
        return f" with {power(a.heating.power)}"
    return ""


def method(a: Assessment, units: UnitSystem) -> tuple[str, ...]:
    """What was, or must be, drained or put in."""
    if a.separation:
        return _separator(a)
    if a.heating:
        return _heater(a, units)
    return ()


def _separator(a: Assessment) -> tuple[str, ...]:
    s = a.separation
    if a.expected:
        if s.drain_least is None:
            return ("At this separator pressure no draining makes the rest readable.",)
        if s.drain_least == 0:
            return ("The throttle alone would read it: nothing has to be drained.",)
        return (f"At least {share(s.drain_least)} of the sample must be drained, so that the rest can be read; a "
                f"separator that takes {share(s.water_share or 0.0)} of the water leaves a quality of "
                f"{s.x_throttled:.4f} to the throttle.",)
    of_water = f", {share(s.water_share)} of the water there" if s.water_share is not None and s.drain_fraction else ""
    said = f"{share(s.drain_fraction)} of the sample was drained as water{of_water}"
    if a.x is None:
        return (f"{said}.",)
    if s.x_throttled > 1:
        return (f"{said}; what was throttled is dry within the uncertainty of the quality ({s.x_throttled:.4f}).",)
    return (f"{said}; what was left had a quality of {s.x_throttled:.4f} before the throttle.",)


def _heater(a: Assessment, units: UnitSystem) -> tuple[str, ...]:
    h = a.heating
    flow = units.text(a.si["sample_flow"], "mass flow")
    kept = f"{power(h.power - h.power_loss)} in {flow} of sample is {units.text(h.per_kg, 'enthalpy')}."
    if not a.expected:
        return (kept,)
    least = f"At least {power(h.power_least)} are needed."
    return (least, kept) if h.chosen else (f"{least} No power was chosen: this is what the comfortable superheat "
                                           "takes.", kept)


def contradiction(a: Assessment, units: UnitSystem) -> tuple[str, tuple[str, ...], tuple[str, ...]]:
    """Headline, reasons and remedies where drained water and superheated steam stand side by side."""
    s = a.separation
    headline = "The readings contradict each other: water was drained, yet what was throttled would be superheated."
    reasons = (f"The exhaust says a quality of {s.x_throttled:.4f} behind the separator, but "
               f"{share(s.drain_fraction)} of the sample left it as water, and the two cannot leave one vessel.",)
    remedies = ("Check the exhaust thermometer, both pressures, gauge or absolute, and whether the water was drained "
                "in the same time as the steam was weighed, and none was left in the vessel before.",)
    return headline, reasons, remedies


def remedy(a: Assessment) -> str:
    """What would extend the reach of the method."""
    if a.heating:
        return ("More power, or a smaller sample flow, would extend the reach; check first the power, the flow, and "
                "that the pressure after the heater is right, gauge or absolute.")
    if a.separation:
        return ("A better separator, a lower exhaust pressure, or electric superheating would extend the reach; check "
                "first that the pressures are right, gauge or absolute.")
    return ("A lower exhaust pressure, a separator ahead of the orifice, or electric superheating would extend "
            "the reach; check first that both pressures are right, gauge or absolute.")


def assumed(a: Assessment, units: UnitSystem) -> tuple[str, ...]:
    """What the method takes for granted."""
    if a.heating:
        loss = a.case["power_loss"]
        if loss is None:
            return ("Heat lost by the heater not stated: taken as nothing, so the steam may be drier than shown.",)
        worth = a.in_quality(a.heating.power_loss / a.si["sample_flow"])
        return (f"Heater loss {power(a.heating.power_loss)}, {100 * worth:+.2f} %pt.",)
    if not a.separation:
        return ()
    s = a.separation
    where = "line pressure" if a.case["p_separator"] is None else f"{units.text(s.p, 'pressure')} abs"
    lines = [f"Separator at {where}."]
    if a.case["vessel_loss"] is None:
        lines.append("Heat loss of the vessel not stated: taken as nothing, so the steam may be drier than shown.")
    else:
        lines.append(f"Heat loss of the vessel {100 * s.vessel_loss / (a.line.h_g - a.line.h_f):+.2f} %pt.")
    if a.expected:
        lines.append(f"The separator drains {share(a.si['water_share'])} of the water there.")
    else:
        lines.append(f"Weighed beside the water: {a.case['weighed_basis']}.")
    return tuple(lines)
