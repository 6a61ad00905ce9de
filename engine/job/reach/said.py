"""The reach in words: what can be read of the expected range, by how much, and what would help."""

from __future__ import annotations

from dataclasses import dataclass

from engine.calorimeter import Readability, WayKind
from engine.job.assessment.answer import assumptions, quality_text
from engine.job.assessment.methods_said import power, share, thermometer
from engine.job.case import describe
from engine.job.case.fields_modes import ELECTRIC, SEPARATING, THROTTLING
from engine.job.reach.reach import AS_ENTERED, NOT_STATED, End, ReachAssessment
from engine.job.reach.ways import Way
from engine.steam.units import UnitSystem

SHAPES = {Readability.WHOLE: "●", Readability.THIN: "◐", Readability.PART: "◔", Readability.NONE: "○"}
VERDICTS = {Readability.WHOLE: "reads", Readability.THIN: "thin", Readability.PART: "reads in part",
            Readability.NONE: "cannot read"}
_WHERE = {THROTTLING: "on this line", SEPARATING: "behind this separator", ELECTRIC: "with this power"}


@dataclass(frozen=True)
class ReachSaid:
    """``headline`` with its ``shape``, the ``reasons`` behind it, and what it ``assumed``."""

    shape: str
    headline: str
    reasons: tuple[str, ...]
    assumed: tuple[str, ...]


def percent(wetness: float) -> str:
    """Wetness in per cent of the mass."""
    return f"{100 * wetness:.2f} %"


def said(plan: ReachAssessment, units: UnitSystem) -> ReachSaid:
    """The answer of the Reach page for a reader who uses ``units``."""
    low, high = plan.dry.wetness, plan.wet.wetness
    expected = f"{100 * low:.2f} to {percent(high)} wetness" if low < high else f"{percent(high)} wetness"
    most = percent(plan.wetness_most)
    where = _WHERE[plan.case["mode"]]
    headline = {
        Readability.WHOLE: f"All that is expected, {expected}, can be read {where}.",
        Readability.THIN: f"All that is expected, {expected}, can be read {where}, but thinly where it is wettest.",
        Readability.PART: f"Only a part can be read {where}: up to {most} of the {expected} expected.",
        Readability.NONE: f"Nothing of the expected {expected} can be read {where}.",
    }[plan.verdict]
    return ReachSaid(SHAPES[plan.verdict], headline, _reasons(plan, units), _assumed(plan, units))


def _reasons(plan: ReachAssessment, units: UnitSystem) -> tuple[str, ...]:
    dry = units.text(plan.dry_superheat, "difference")
    least = units.text(plan.si["least_superheat"], "difference", 0)
    if plan.wetness_most < 0:
        limit = f"Even dry steam would show only {dry} of superheat, and {_after_U(plan, units)}{least} are needed."
    else:
        limit = (f"The least readable quality {_after_U(plan, units)}is {quality_text(1 - plan.wetness_most)}, "
                 f"{percent(plan.wetness_most)} wetness; dry steam shows {dry} of superheat.")
    ends = (plan.dry,) if plan.dry.wetness == plan.wet.wetness else (plan.dry, plan.wet)
    lines = [*(_end(end, plan, units) for end in ends), limit]
    if plan.indistinct:
        lines.append(f"The driest steam expected differs from dry steam by no more than the quality's own uncertainty, "
                     f"{100 * plan.si['U_quality']:.2f} %pt: there a number says little.")
    return tuple(lines)


def _after_U(plan: ReachAssessment, units: UnitSystem) -> str:
    return f"after {units.text(plan.U, 'difference')} for the thermometer " if plan.U else ""


def _end(end: End, plan: ReachAssessment, units: UnitSystem) -> str:
    told = f"At {percent(end.wetness)} the {thermometer(end.assessment)} "
    if not end.superheat > 0:
        return f"{told}would sit at saturation, {units.text(end.T, 'temperature')}: the steam there is still wet."
    needed = f"where {units.text(plan.si['least_superheat'], 'difference', 0)} are needed."
    left = f", {units.text(end.margin, 'difference')} after the thermometer's own uncertainty, " if plan.U else ", "
    return (f"{told}must show {units.text(end.T, 'temperature')}, {units.text(end.superheat, 'difference')} above "
            f"saturation{left}{needed}")


def _assumed(plan: ReachAssessment, units: UnitSystem) -> tuple[str, ...]:
    U = {NOT_STATED: "The thermometer's uncertainty is not stated: nothing was taken off the margin for it.",
         AS_ENTERED: f"Thermometer's uncertainty {units.text(plan.U, 'difference', 2)}, as entered."}.get(
             plan.U_from, f"Thermometer's uncertainty {units.text(plan.U, 'difference', 2)} (k = 2), {plan.U_from}.")
    common = [line for line in assumptions(plan.wet.assessment, units) if "uncertainty" not in line]
    return (U, "Losses as at the wet end:", *common)


# --- ways out ---------------------------------------------------------------------------------------

def way_title(way: Way, plan: ReachAssessment, units: UnitSystem) -> str:
    """The way with its number, as an instruction."""
    return _TITLES[way.kind](way, plan, units)


def _p(si: float, units: UnitSystem) -> str:
    return f"{units.text(si, 'pressure')} abs"


def _exhaust(way: Way, plan: ReachAssessment, units: UnitSystem) -> str:
    if "p_exhaust" not in way.numbers:
        return "Lower the exhaust pressure"
    return f"Lower the exhaust pressure to {_p(way.numbers['p_exhaust'], units)} or less"


def _line(way: Way, plan: ReachAssessment, units: UnitSystem) -> str:
    n = {name: units.text(p, "pressure", 1) for name, p in way.numbers.items() if name.startswith("p_")}
    if "p_low" not in n:
        return (f"Tap the steam at another pressure: at best, {n['p_best']} abs, up to "
                f"{percent(1 - way.numbers['x_least'])} could be read")
    return f"Tap the steam where its pressure is {n['p_low']} to {n['p_high']} abs"


def _separator(way: Way, plan: ReachAssessment, units: UnitSystem) -> str:
    if "drain_fraction" not in way.numbers:
        return "Drain the water in a separator first"
    more = "Drain more" if plan.case["mode"] == SEPARATING else "Drain the water in a separator first"
    return (f"{more}: at least {share(way.numbers['drain_fraction'])} of the sample, "
            f"{share(way.numbers['water_share'])} of its water")


def _heater(way: Way, plan: ReachAssessment, units: UnitSystem) -> str:
    flow = units.text(plan.si["sample_flow"] or 1 / 3600, "mass flow")
    more = "More power" if plan.case["mode"] == ELECTRIC else "Superheat electrically behind the throttle"
    return f"{more}: at least {power(way.numbers['power'])} for {flow} of sample"


def _other(way: Way, plan: ReachAssessment, units: UnitSystem) -> str:
    return "Use another method: a tracer, or the conductivity of the condensate"


_TITLES = {WayKind.EXHAUST: _exhaust, WayKind.LINE: _line, WayKind.SEPARATOR: _separator, WayKind.HEATER: _heater,
           WayKind.OTHER: _other}


def way_change(way: Way, plan: ReachAssessment) -> str:
    """What one click enters, in the units of the case."""
    new = way.case
    if new is None:
        return ""
    return {
        WayKind.EXHAUST: lambda: f"Exhaust {describe(new['p_exhaust'])}",
        WayKind.LINE: lambda: f"Line {describe(new['p_line'])}",
        WayKind.SEPARATOR: lambda: f"Separator, {describe(new['water_share'])} of the water",
        WayKind.HEATER: lambda: f"Heater, {describe(new['power'])}",
    }[way.kind]()


def ladder_rows(plan: ReachAssessment, units: UnitSystem) -> list[dict[str, str]]:
    """Where the superheat goes, at both ends of the range: one row a cause, with what is left."""
    ends = {f"at {percent(end.wetness)} wetness": end for end in (plan.wet, plan.dry)}

    def left(superheat: float | None) -> str:
        return "wet" if superheat is None or superheat <= 0 else units.text(superheat, "difference")

    rows = [{"Superheat left": cause, **{name: left(end.steps[k][1]) for name, end in ends.items()}}
            for k, (cause, _) in enumerate(plan.wet.steps)]
    rows.append({"Superheat left": "less the thermometer's uncertainty",
                 **{name: left(end.margin if end.superheat > 0 else None) for name, end in ends.items()}})
    least, comfortable = (units.text(plan.si[n], "difference", 0) for n in ("least_superheat", "comfortable_superheat"))
    rows.append({"Superheat left": "needed: readable / comfortable", **dict.fromkeys(ends, f"{least} / {comfortable}")})
    return rows
