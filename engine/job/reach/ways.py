"""Ways out where the expected wetness cannot be read: each with its numbers, its price, and the case that it makes.

The engine ranks them for the wettest steam expected. What a click would apply is rounded to the safe side
and then assessed in its turn, so that no way is offered that would not read the range after all: a lower
exhaust pressure makes the stream faster, another tapping changes the losses.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace

from engine.calorimeter import (
    PRICES,
    Readability,
    Status,
    WayKind,
    drain_needed,
    exhaust_pressure_for,
    power_needed,
    ways_out,
)
from engine.job.assessment import Assessment, Verdict
from engine.job.case import Case, as_entered
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import ELECTRIC, SEPARATING, THROTTLING
from engine.job.case.fields_path import EXPECTED
from engine.job.case.rows import Entry
from engine.job.reach.reach import ReachAssessment, stage_pressure, wettest
from engine.steam.errors import InputError
from engine.steam.units import from_si

_MOST_SHARE = 0.98  # of the water: no separator of this size takes more (common practice)
_NEAR = 2.0  # a tapping at more than twice the pressure, or less than half, is hardly the same steam
_TRIES = 6


@dataclass(frozen=True)
class Way:
    """One way out: SI ``numbers`` by quantity name, its price, and what keeps it from being taken here.

    ``case`` is what one click applies, None where nothing can be applied; ``thin`` says that even then the
    margin stays below the comfortable one.
    """

    kind: WayKind
    numbers: Mapping[str, float]
    case: Case | None = None
    thin: bool = False
    why_not: str = ""
    price: str = ""

    @property
    def feasible(self) -> bool:
        return not self.why_not


def ways(plan: ReachAssessment) -> tuple[Way, ...]:
    """The ways out for a case, what can be done first; empty where the whole range reads comfortably."""
    if plan.verdict is Readability.WHOLE:
        other = _other(plan)
        return (replace(other, price=_price(plan, other)),) if plan.indistinct else ()
    found = {}
    for superheat in (plan.comfortable, plan.least):
        for way in _BY_METHOD[plan.case["mode"]](plan, superheat):
            way = _tried(plan, way, superheat)
            if way.kind not in found or (way.feasible and not found[way.kind].feasible):
                found[way.kind] = way
    found[WayKind.OTHER] = _other(plan)
    priced = (replace(way, price=_price(plan, way)) for way in found.values())
    return tuple(sorted(priced, key=lambda way: _rank(plan, way)))


def _price(plan: ReachAssessment, way: Way) -> str:
    """What it costs, in words; an exhaust into the open air needs no condenser."""
    if way.kind is WayKind.EXHAUST and way.numbers.get("p_exhaust", 0.0) >= plan.si.p_barometer:
        return "A shorter or wider exhaust, which makes less back pressure."
    return PRICES[way.kind]


def _rank(plan: ReachAssessment, way: Way) -> tuple:
    """What can be done first, by effort; where wetness drowns in the uncertainty, another method before all."""
    if way.kind is WayKind.OTHER and plan.indistinct:
        return (-1,)
    far, p = False, plan.si["p_line"]
    if way.kind is WayKind.LINE and way.feasible:
        edge = way.numbers["p_low"] if p < way.numbers["p_low"] else way.numbers["p_high"]
        far = max(edge / p, p / edge) > _NEAR
    return (not way.feasible, far, list(WayKind).index(way.kind))


def _other(plan: ReachAssessment) -> Way:
    return Way(WayKind.OTHER, {"wetness": plan.dry.wetness, "U_quality": plan.si["U_quality"]})


# --- by method --------------------------------------------------------------------------------------

def _throttling(plan: ReachAssessment, superheat: float) -> list[Way]:
    si, flow = plan.si, plan.si["sample_flow"]
    found = ways_out(si["p_line"], si["p_exhaust"], plan.wet.x, superheat=superheat, sample_flow=flow or 1 / 3600,
                     U_quality=si["U_quality"], p_exhaust_lowest=si["p_exhaust_lowest"],
                     water_share=si["water_share"], **plan.terms.arguments())
    ways = [Way(way.kind, way.numbers, _changed(plan, way.kind, way.changes), why_not=way.why_not) for way in found]
    return [way if flow or way.kind is not WayKind.HEATER else replace(
        way, case=None, why_not="Give the sample flow: this is the power for each kg/h of it.") for way in ways]


def _separating(plan: ReachAssessment, superheat: float) -> list[Way]:
    """A better separator, or a lower exhaust pressure behind it."""
    a, si, terms = plan.wet.assessment, plan.si, plan.terms.arguments()
    p, x_stage = stage_pressure(a), a.separation.x_throttled
    need = drain_needed(si["p_line"], plan.wet.x, si["p_exhaust"], superheat, p_separator=p,
                        vessel_loss=a.separation.vessel_loss, **terms)
    if need.status != Status.OK:
        more = Way(WayKind.SEPARATOR, {}, why_not="With this exhaust not even dry steam could be read.")
    elif need.water_share > _MOST_SHARE:
        more = Way(WayKind.SEPARATOR, {"drain_fraction": need.drain_fraction, "water_share": need.water_share},
                   why_not="It is more of the water than a separator takes.")
    else:
        more = Way(WayKind.SEPARATOR, {"drain_fraction": need.drain_fraction, "water_share": need.water_share},
                   _changed(plan, WayKind.SEPARATOR, {"water_share": need.water_share}))
    found = exhaust_pressure_for(p, x_stage, superheat, **terms)
    if found.status != Status.OK or found.p_exhaust < si["p_exhaust_lowest"]:
        lower = Way(WayKind.EXHAUST, {"p_exhaust": found.p_exhaust} if found.status == Status.OK else {},
                    why_not="It is lower than can be had at the exhaust.")
    else:
        lower = Way(WayKind.EXHAUST, {"p_exhaust": found.p_exhaust},
                    _changed(plan, WayKind.EXHAUST, {"p_exhaust": found.p_exhaust}))
    return [more, lower]


def _heating(plan: ReachAssessment, superheat: float) -> list[Way]:
    """More power, which at a given flow is all that a heater can do."""
    h, si = plan.wet.assessment.heating, plan.si
    power = power_needed(si["p_line"], plan.wet.x, h.p, si["sample_flow"], superheat, power_loss=h.power_loss)
    return [Way(WayKind.HEATER, {"power": power}, _changed(plan, WayKind.HEATER, {"power": power}))]


_BY_METHOD = {THROTTLING: _throttling, SEPARATING: _separating, ELECTRIC: _heating}


# --- what a click applies ---------------------------------------------------------------------------

def _changed(plan: ReachAssessment, kind: WayKind, changes: Mapping[str, float]) -> Case | None:
    """The case with the engine's changes, as a person would enter them: round, and on the safe side."""
    if not changes:
        return None
    case = plan.case.with_(question=EXPECTED)
    if kind is WayKind.EXHAUST:
        return case.with_(p_exhaust=_round_pressure(plan, "p_exhaust", changes["p_exhaust"], up=False))
    if kind is WayKind.LINE:
        up = changes["p_line"] > plan.si["p_line"]
        return case.with_(p_line=_round_pressure(plan, "p_line", changes["p_line"], up=up), leg_height=Entry(0.0, "m"))
    if kind is WayKind.SEPARATOR:
        share = Entry(math.ceil(1000 * changes["water_share"] - 1e-6) / 10, "%")
        return case.with_(mode=SEPARATING, water_share=share)
    power = Entry(10.0 * math.ceil(changes["power"] / 10 + 1e-9), "W")
    heater = {"mode": ELECTRIC, "power": power}
    if plan.case["mode"] != ELECTRIC:  # it stands behind the throttle, and makes up for the loss of the rig
        loss = changes.get("power_loss")
        heater |= {"p_heater": plan.case["p_exhaust"], "power_loss": loss and Entry(round(loss, 1), "W")}
    return case.with_(**heater)


def _round_pressure(plan: ReachAssessment, name: str, p: float, *, up: bool) -> Entry:
    like = plan.case[name]
    step = 10.0 ** (math.floor(math.log10(from_si(p, like.unit, "pressure"))) - 1)
    shown = as_entered(FIELDS[name], p, like, plan.si.p_barometer).value
    rounded = (math.ceil if up else math.floor)(shown / step) * step
    return Entry(float(f"{rounded:.6g}"), like.unit, like.basis)


def _tried(plan: ReachAssessment, way: Way, superheat: float) -> Way:
    """The way once its case was assessed; the exhaust is lowered further while its faster stream asks for it."""
    if way.case is None:
        return way
    for _ in range(_TRIES if way.kind is WayKind.EXHAUST else 1):
        try:
            after = wettest(way.case)
        except InputError:
            return replace(way, case=None, why_not="With this change another entry could no longer be used.")
        if after.verdict is Verdict.READS or (after.verdict is Verdict.THIN and superheat < plan.comfortable):
            return replace(way, thin=after.verdict is Verdict.THIN)
        if way.kind is WayKind.EXHAUST:
            p = _lower(after, superheat)
            if p is None or p < plan.si["p_exhaust_lowest"]:
                break
            way = replace(way, numbers={"p_exhaust": p}, case=_changed(plan, way.kind, {"p_exhaust": p}))
    return replace(way, case=None, why_not=_TOO_FAST if way.kind is WayKind.EXHAUST else _NOT_ENOUGH)


_TOO_FAST = "At so low a pressure the stream is too fast for this exhaust bore: a wider one comes first."
_NOT_ENOUGH = "It would not be enough here."


def _lower(after: Assessment, superheat: float) -> float | None:
    """The exhaust pressure that the wettest steam needs with the stream as it is now; None where there is none."""
    x = after.separation.x_throttled if after.separation else after.x
    found = exhaust_pressure_for(stage_pressure(after), x, superheat, **after.terms.arguments())
    return found.p_exhaust if found.status == Status.OK and found.p_exhaust < after.si["p_exhaust"] else None
