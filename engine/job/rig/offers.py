"""What the rig's assessment offers the case to take over, each with one click and only then."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from engine.job.case import Value, as_entered
from engine.job.case.fields import FIELDS
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_NORMAL, BY_TWO_FLOWS
from engine.job.case.fields_rig import COMPUTED, WEIGHED
from engine.job.case.rows import Entry
from engine.job.rig.effects import SAME_PRESSURE
from engine.job.rig.rig import RigAssessment
from engine.steam.units import UnitSystem

_LEAST_DIFFERENCE = 2e-3  # of a value, below which it is no news


@dataclass(frozen=True)
class Offer:
    """A number found here that the case can take over with one click: ``changes`` are the entries it writes."""

    key: str
    section: str
    label: str
    changes: Mapping[str, Value]


def offers(rig: RigAssessment, units: UnitSystem) -> tuple[Offer, ...]:
    """What can be taken over, by the part of the rig it belongs to. What is offered is what the label says."""
    case = rig.case
    made: list[Offer] = []

    def offer(key: str, section: str, words: str, name: str, value: float, digits: int = 4, **more) -> None:
        entry = _entry(rig, name, value, digits, units)
        if case[name] != entry and _differs(rig, name, value) or any(case[n] != v for n, v in more.items()):
            basis = " abs" if entry.basis == "absolute" else " gauge" if entry.basis else ""
            unit = "" if entry.unit == "1" else f" {entry.unit}"
            label = f"{words}, {entry.value:g}{unit}{basis}"
            made.append(Offer(key, section, label, {name: entry, **more}))

    if flow := rig.flow.value:
        offer("flow", "orifice", "Use the computed flow", "sample_flow", flow.orifice.computed, flow_source=COMPUTED)
        if flow.implied is not None and case["flow_source"] == WEIGHED and flow.implied <= FIELDS["discharge"].high:
            offer("discharge", "orifice", "Use the coefficient behind the weighed flow", "discharge", flow.implied, 3)
        if flow.bore_wanted:
            offer("bore", "orifice", "Use the bore for the wanted flow", "bore", flow.bore_wanted.value, 3)
    if (exhaust := rig.exhaust.value) and exhaust.pipe:
        offer("exhaust", "exhaust", "Use the computed exhaust pressure", "p_exhaust", exhaust.pipe.value.p_exhaust, 5)
    if nozzle := rig.nozzle.value:
        offer("line velocity", "nozzle", "Use the line velocity", "line_velocity", nozzle.line_velocity, 3)
        if nozzle.isokinetic_bore:
            offer("ports", "nozzle", "Use ports for equal velocities", "port_bore", nozzle.isokinetic_bore.value, 3)
    if geometry := rig.geometry.value:
        offer("conductance", "heat", "Use the conductance from dimensions and lagging", "conductance", geometry.whole,
              3, heat_loss_method=BY_CONDUCTANCE)
    for method, words in ((BY_TWO_FLOWS, "Take the heat loss by two flows"),
                          (BY_NORMAL, "Take the heat loss by the normal reading")):
        if rig.losses[method] and case["heat_loss_method"] != method and case["sample_flow"] is not None:
            made.append(Offer(method, "heat", words, {"heat_loss_method": method}))
    return tuple(made)


def _entry(rig: RigAssessment, name: str, value: float, digits: int, units: UnitSystem) -> Entry:
    """A value as one would type it: in the unit and on the basis of the entry that stands there."""
    field, there = FIELDS[name], rig.case[name]
    exact = as_entered(field, value, there or Entry(0.0, units.unit(field.kind)), rig.point.si.p_barometer)
    return replace(exact, value=float(f"{exact.value:.{digits}g}"))


def _differs(rig: RigAssessment, name: str, value: float) -> bool:
    now = rig.point.si[name]
    if rig.case[name] is None or now is None:
        return True
    if name == "p_exhaust":
        return abs(value - now) > SAME_PRESSURE
    return abs(value - now) > _LEAST_DIFFERENCE * abs(value)
