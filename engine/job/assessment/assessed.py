"""What an assessment holds: states, velocities, and everything that a case says."""

from __future__ import annotations

from dataclasses import dataclass

from engine.calorimeter import Path, Status
from engine.job.assessment.heating import Heating
from engine.job.assessment.terms import Terms
from engine.job.assessment.verdict import Verdict
from engine.job.case import Case, Resolved
from engine.job.case.fields_path import EXPECTED, UNDECIDED
from engine.steam import Saturated


@dataclass(frozen=True)
class StatePoint:
    """One named state on the way, SI; ``velocity`` is None where none is known."""

    name: str
    p: float
    T: float
    x: float | None
    h: float
    s: float
    v: float
    velocity: float | None


@dataclass(frozen=True)
class Velocities:
    """What the bores make of the sample flow; None where the case does not say."""

    line: float | None
    sample: float | None
    exhaust: float | None
    ratio: float | None
    keeping_bore_ratio: float
    kinetic_energy: float | None
    kinetic_superheat: float | None
    kinetic_quality: float | None


@dataclass(frozen=True)
class Separation:
    """What the separator does to the sample, SI.

    ``drain_fraction`` of the whole sample is drained at pressure ``p``, which is ``water_share`` of the water
    there (None where that cannot be told); ``drain_least`` of the sample would have to be, so that the rest
    can be read (None where no draining helps); ``x_throttled`` is the quality left to the throttle.
    """

    p: float
    vessel_loss: float
    drain_fraction: float
    water_share: float | None = None
    x_throttled: float | None = None
    drain_least: float | None = None


@dataclass(frozen=True)
class Assessment:
    """Everything the case says, SI.

    x           quality in the line: reduced from the reading, or as expected; None where it cannot be told
    x_below     where the exhaust is too little superheated: the quality is below this; None otherwise
    x_as_read   the same reading without heat loss and kinetic energy
    x_without_kinetic   with the heat loss alone
    T_exhaust, superheat   what the thermometer reads, or must read for the expected wetness
    x_least     least readable quality, at the least superheat asked for
    least_readable      superheat from which the exhaust can be read [K]: the least asked for, or more in a fast
        stream, which is still wet while a probe that stops it shows superheat
    margin      superheat above the least readable one [K]
    line_superheat      [K], 0 for a wet line
    read_state  the exhaust steam as the thermometer reads it; None where that is not superheated
    separation, heating   what a separator or a heater did before; None where there is none. Behind a separator
        the path is that of the throttled steam; with a heater it is the heating, "exhaust" is the steam after
        it, and ``x_as_read`` leaves out the heat that the heater lost
    """

    case: Case
    si: Resolved
    verdict: Verdict
    status: Status
    x: float | None
    x_below: float | None
    x_as_read: float | None
    x_without_kinetic: float | None
    T_exhaust: float
    T_saturation: float
    superheat: float
    x_exhaust: float
    x_least: float
    least_readable: float
    margin: float
    line_superheat: float
    terms: Terms
    line: Saturated
    velocities: Velocities
    path: Path
    reach_path: Path | None
    bore_path: Path | None
    states: tuple[StatePoint, ...]
    read_state: StatePoint | None
    separation: Separation | None = None
    heating: Heating | None = None

    @property
    def expected(self) -> bool:
        """Whether the case asks what must be seen, rather than what was read."""
        return self.case["question"] == EXPECTED

    @property
    def heat_loss_undecided(self) -> bool:
        if self.heating is not None:
            return self.case["power_loss"] is None
        return self.case["heat_loss_method"] == UNDECIDED

    def in_quality(self, energy: float) -> float:
        """What an energy [J/kg of the steam at the thermometer] is worth in the quality of the line."""
        kept = 1.0 - self.separation.drain_fraction if self.separation is not None else 1.0
        return kept * energy / (self.line.h_g - self.line.h_f)
