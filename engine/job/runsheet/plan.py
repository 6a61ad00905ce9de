"""The numbers of a run sheet: everything that it tells to look for, worked out for the open case."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import TypeVar

from engine.calorimeter import exhaust_pressure_for, exhaust_temperature
from engine.job.assessment import Assessment, Verdict, assess
from engine.job.case import Case
from engine.job.case.fields_modes import ELECTRIC, SEPARATING
from engine.job.case.fields_path import EXPECTED
from engine.job.case.fields_rig import VESSEL
from engine.job.reach import ReachAssessment, assess_reach, stage_pressure
from engine.job.rig import RigAssessment, assess_rig
from engine.job.rig.heat import WarmingUp, heater_warming
from engine.job.rig.point import Part, shares
from engine.job.uncertainty import Forecast, forecast, reading_of
from engine.steam import saturated, saturation_pressure
from engine.steam.errors import InputError

FLOW_ALARM = 0.1  # part by which the sample flow may fall before something is wrong with the orifice (common practice)
BLOW_FROM, BLOW_TO = 60.0, 120.0  # s, how long a tapping is blown before the rig gets its steam (common practice)
WITHIN = 5.0  # s, in which all gauges of a set are read (common practice)
MOST_SETS = 200  # rows of a table that still is a table
Found = TypeVar("Found")


@dataclass(frozen=True)
class Plan:
    """The case as a question of what must be seen, and what each floor says of it. Pressures absolute, SI.

    ``rig``, ``reach`` and ``forecast`` hold what they found, or what keeps it from being found.
    """

    case: Case
    a: Assessment
    rig: Part[RigAssessment]
    reach: Part[ReachAssessment]
    forecast: Part[Forecast]

    @property
    def electric(self) -> bool:
        return self.case["mode"] == ELECTRIC

    @property
    def separating(self) -> bool:
        return self.case["mode"] == SEPARATING

    @property
    def to_vessel(self) -> bool:
        """Whether the exhaust goes to a vessel or condenser instead of the open air."""
        return not self.electric and self.case["exhaust_to"] == VESSEL

    @property
    def readable(self) -> bool:
        """Whether the wetness expected would give a quality."""
        return self.a.verdict in (Verdict.READS, Verdict.THIN)

    def of_rig(self, name: str) -> Part:
        """A part of the rig, or why there is none; for a heater nothing of a throttling rig holds."""
        if self.electric:
            return Part(None)
        if not self.rig:
            return Part(None, self.rig.trouble)
        found = getattr(self.rig.value, name)
        return found if isinstance(found, Part) else Part(found)

    # ---- the exhaust thermometer, or that after the heater

    @property
    def T_expected(self) -> float:
        """What it must show for the wetness expected [K]; saturation where the steam stays wet."""
        return self.a.T_exhaust

    @property
    def U_thermometer(self) -> float:
        """Its expanded uncertainty [K], 0 where none is stated."""
        return self.reach.value.U if self.reach else 0.0

    @cached_property
    def T_dry(self) -> float | None:
        """What dry steam would show [K]; more means a superheated line."""
        return self.a.T_saturation + self.reach.value.dry_superheat if self.reach else None

    @cached_property
    def band(self) -> tuple[float, float] | None:
        """Lowest and highest reading that agree with the range of wetness expected, the thermometer's
        uncertainty beyond both ends [K]; never below saturation."""
        if not self.reach:
            return None
        ends = [self.reach.value.wet.T, self.T_expected, self.reach.value.dry.T]
        return max(min(ends) - self.U_thermometer, self.a.T_saturation), max(ends) + self.U_thermometer

    @property
    def T_least(self) -> float:
        """The least that can be read at all [K]."""
        return self.a.T_saturation + self.a.least_readable

    @property
    def T_comfortable(self) -> float:
        """From here on the margin is comfortable [K]."""
        return self.a.T_saturation + self.a.si["comfortable_superheat"]

    # ---- pressures

    @cached_property
    def shown(self) -> dict[str, float]:
        """What the line gauge and the exhaust gauge show [Pa]."""
        return dict(reading_of(self.case, self.a.si, self.T_expected).shown)

    @cached_property
    def basis(self) -> dict[str, str]:
        """Whether they show "gauge" or "absolute" pressure."""
        rests = reading_of(self.case, self.a.si, self.T_expected).on_barometer
        return {name: "gauge" if on else "absolute" for name, on in rests.items()}

    def play(self, name: str) -> float:
        """By how much a pressure may swing about its mean and still count as settled [Pa]."""
        return self.a.si[f"steady_{name}"] * self.a.si[name]

    @cached_property
    def p_exhaust_most(self) -> float | None:
        """Highest exhaust pressure at which the wettest steam expected can still be read; None if at none."""
        if self.electric or not self.reach:
            return None
        end = self.reach.value.wet.assessment
        x = end.separation.x_throttled if end.separation else end.x
        if not 0 <= x <= 1:
            return None
        found = _known(lambda: exhaust_pressure_for(stage_pressure(end), x, end.si["least_superheat"],
                                                    **end.terms.arguments()))
        return None if not found or math.isnan(found.value.p_exhaust) else found.value.p_exhaust

    @cached_property
    def p_exhaust_piped(self) -> float | None:
        """Exhaust pressure that the pipe as described makes."""
        exhaust = self.of_rig("exhaust")
        pipe = exhaust.value.pipe if exhaust else None
        return pipe.value.p_exhaust if pipe else None

    def moved_by_line(self, share: float) -> float | None:
        """What the reading does when the line pressure moves up by a ``share`` of itself, the wetness unchanged [K]."""
        if self.electric or not self.readable:
            return None
        a = self.a
        x = a.separation.x_throttled if a.separation else a.x
        seen = _known(lambda: exhaust_temperature(stage_pressure(a) * (1 + share), x, a.si["p_exhaust"],
                                                  **a.terms.arguments()))
        return seen.value.T_exhaust - a.T_exhaust if seen else None

    # ---- the flow

    @property
    def flow(self) -> float | None:
        """Sample flow through orifice or heater [kg/s], as entered or by the orifice."""
        if self.a.si["sample_flow"]:
            return self.a.si["sample_flow"]
        point = self.of_rig("point")
        return point.value.flow if point else None

    @property
    def drawn(self) -> float | None:
        """What is drawn from the line for it [kg/s]; more than ``flow`` behind a separator."""
        return None if self.flow is None else self.flow / (1.0 - self.drained)

    @property
    def drained(self) -> float:
        """Part of the sample that the separator drains."""
        return self.a.separation.drain_fraction if self.a.separation else 0.0

    @cached_property
    def error_at_alarm(self) -> float | None:
        """What the quality is wrong by when the flow has fallen by FLOW_ALARM and nobody saw it."""
        point = self.of_rig("point").value
        if point is None or point.flow is None:
            return None
        fallen = _known(lambda: point.variant(sample_flow=(1.0 - FLOW_ALARM) * point.flow))
        if not fallen:
            return None
        taken, true = shares([point.reading, fallen.value])
        return float(point.kept * (taken - true))

    @property
    def heat_out(self) -> float | None:
        """Heat that leaves with the exhaust, down to water at the temperature of the surroundings [W]."""
        if self.flow is None:
            return None
        water = saturated(saturation_pressure(self.a.si["T_ambient"]))
        return self.flow * (float(self.a.path.h[-1]) - water.h_f)

    # ---- time

    @cached_property
    def warming(self) -> Part[WarmingUp]:
        """The warm-up of the rig."""
        if self.electric:
            return heater_warming(self.a.si, self.a.heating.p, self.a.T_exhaust)
        return self.of_rig("warming")

    @property
    def back_to_settled(self) -> float | None:
        """Time after which a drop to saturation no longer shows [s]."""
        w = self.warming.value
        return None if w is None else w.ready - w.run.time_condensing

    @property
    def runs(self) -> int:
        return max(1, round(self.a.si["runs_planned"]))

    @property
    def sets(self) -> int:
        """Sets of readings in a run."""
        return min(max(1, round(self.a.si["duration"] / self.runs / self.a.si["read_every"])), MOST_SETS)

    @property
    def run_length(self) -> float:
        """Duration of a run [s]."""
        return self.sets * self.a.si["read_every"]


def plan_of(case: Case) -> Plan:
    """The plan of a case. InputError, with every fault at once, where an entry cannot be used."""
    asked = case.with_(question=EXPECTED)
    a = assess(asked)
    return Plan(asked, a, _known(lambda: assess_rig(asked)), _known(lambda: assess_reach(asked)),
                _known(lambda: forecast(asked, a)))


def _known(compute: Callable[[], Found]) -> Part[Found]:
    try:
        return Part(compute())
    except InputError as error:
        return Part(None, " ".join(str(error.faults[0]).replace("\n  - ", "; ").split()))
