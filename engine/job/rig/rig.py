"""One call from a case to everything about its rig: flows, losses, misreadings, and what each does to the quality."""

from __future__ import annotations

from dataclasses import dataclass

from engine.calorimeter import altitude_of_pressure
from engine.job.case import Case
from engine.job.case.fields_modes import ELECTRIC
from engine.job.rig.effects import Effect, effects_of
from engine.job.rig.flow import Exhaust, Flow, Nozzle, exhaust_of, flow_of, nozzle_of
from engine.job.rig.heat import (
    BY_GEOMETRY,
    Geometry,
    Loss,
    Thermometer,
    WarmingUp,
    geometry_of,
    losses_of,
    thermometer_of,
    warming_of,
)
from engine.job.rig.point import Part, Point, part, point_of


@dataclass(frozen=True)
class RigAssessment:
    """The rig of a case. A ``Part`` holds its value, or what keeps it from being computed.

    point       the steam and the reading by which everything is sized
    flow, exhaust, nozzle, geometry, losses, thermometer, warming   the parts of the rig
    altitude    of the standard atmosphere with the barometer of the case [m]
    effects     what each does to the quality, largest first; those that lack an entry last
    notes       what the reader has to know before the sizes
    """

    point: Point
    flow: Part[Flow]
    exhaust: Part[Exhaust]
    nozzle: Part[Nozzle]
    geometry: Part[Geometry]
    losses: dict[str, Part[Loss]]
    thermometer: Thermometer
    warming: Part[WarmingUp]
    altitude: Part[float]
    effects: tuple[Effect, ...]
    notes: tuple[str, ...]

    @property
    def case(self) -> Case:
        """The case as entered."""
        return self.point.entered

    @property
    def sized(self) -> tuple[Effect, ...]:
        """The effects that have a size, largest first."""
        return tuple(e for e in self.effects if e.size is not None)

    @property
    def unsized(self) -> tuple[Effect, ...]:
        """The effects that lack something."""
        return tuple(e for e in self.effects if e.size is None)


def assess_rig(case: Case) -> RigAssessment:
    """Assess the rig of a case. InputError only where its pressures, its reading or its limits cannot be used.

    >>> from engine.job.case.demo import DEMO
    >>> rig = assess_rig(DEMO)
    >>> rig.effects[0].name, rig.effects[0].corrected, rig.effects[0].size_pt
    ('Heat loss', True, -0.10)
    """
    point = point_of(case)
    flow, exhaust, nozzle, geometry = flow_of(point), exhaust_of(point), nozzle_of(point), geometry_of(point)
    losses, thermometer = losses_of(point, geometry), thermometer_of(point, geometry)
    real = losses[BY_GEOMETRY] or losses.get(point.case["heat_loss_method"]) or Part(None)
    warming = warming_of(point, real.value)
    effects = effects_of(point, flow, exhaust, nozzle, losses, thermometer, warming)
    altitude = part(point.si, (), lambda: altitude_of_pressure(point.si.p_barometer))
    return RigAssessment(point, flow, exhaust, nozzle, geometry, losses, thermometer, warming, altitude, effects,
                         _notes(point))


def _notes(point: Point) -> tuple[str, ...]:
    notes = list(point.troubles)
    if point.case["mode"] == ELECTRIC:
        notes.append("With electric superheating nothing is throttled: what follows is for a throttling rig.")
    if point.at_reach:
        notes.append("As it stands the exhaust would be too little superheated to be read. The sizes below are those "
                     "at the reach limit, the wettest steam still readable.")
    if point.x > 1.0:
        notes.append("The line is superheated: its steam is taken for dry here, and there are no drops to miss.")
    if point.flow_computed:
        notes.append("No sample flow is entered: the sizes below rest on the flow computed from the orifice.")
    return tuple(notes)
