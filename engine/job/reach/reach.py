"""Before the test: can the wetness that is expected be read at all, and with what margin?

Each end of the expected range is assessed as the Path page would, with the thermometer's uncertainty
on top of the superheat asked for. So the reach follows the method of the case, its losses and its
velocities, and cannot say anything else than the answer of that wetness does.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

from engine.calorimeter import (
    READABILITY,
    Readability,
    combined_quality,
    exhaust_temperature,
    heater_reading,
    least_electric_quality,
    least_quality,
)
from engine.job.assessment import Assessment, Verdict, assess
from engine.job.assessment.terms import Terms, terms_at
from engine.job.case import Case, Resolved, describe, resolve
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import ELECTRIC
from engine.job.case.fields_path import EXPECTED
from engine.job.case.rows import Entry
from engine.job.uncertainty.instruments import thermometer_doubts
from engine.steam import saturation_temperature
from engine.steam.errors import Fault, InputError

AS_ENTERED, BY_INSTRUMENT, NOT_STATED = "as entered", "by the class of the thermometer", "not stated"
_MOST = 1.999  # a throttled quality this far above 1 only says that nothing can be read


@dataclass(frozen=True)
class End:
    """One end of the expected range, SI.

    ``steps`` tell where the superheat goes: (cause, superheat left [K] or None where the steam is wet there).
    ``margin`` is what is left of it after the thermometer's uncertainty.
    """

    wetness: float
    T: float
    superheat: float
    margin: float
    verdict: Verdict
    assessment: Assessment
    steps: tuple[tuple[str, float | None], ...]

    @property
    def x(self) -> float:
        return 1.0 - self.wetness


@dataclass(frozen=True)
class ReachAssessment:
    """What can be read of the expected range, SI.

    ``wetness_most`` is the greatest wetness that can be read, negative where not even dry steam can;
    ``wetness_comfortable`` the same with the comfortable superheat; ``terms`` are the losses and velocities at
    that limit; ``least`` and ``comfortable`` include the uncertainty ``U`` of the thermometer.
    """

    case: Case
    si: Resolved
    verdict: Readability
    dry: End
    wet: End
    wetness_most: float
    wetness_comfortable: float
    least: float
    comfortable: float
    U: float
    U_from: str
    terms: Terms

    @property
    def sentence(self) -> str:
        return READABILITY[self.verdict]

    @property
    def indistinct(self) -> bool:
        """Whether the driest steam expected differs from dry steam by no more than the quality's uncertainty."""
        return self.dry.wetness <= self.si["U_quality"]

    @cached_property
    def dry_superheat(self) -> float:
        """What dry steam would show [K]."""
        return assess(_planned(self.case, self.dry.assessment.si, 0.0, self.U)).superheat


def assess_reach(case: Case) -> ReachAssessment:
    """Assess the reach of a case. Raises InputError, with every fault at once, where an entry cannot be used.

    >>> from engine.job.case.demo import DEMO
    >>> plan = assess_reach(DEMO)
    >>> plan.verdict.name, round(plan.wetness_most, 4), round(plan.wet.margin, 1)
    ('WHOLE', 0.0438, 18.5)
    """
    si = resolve(case.with_(question=EXPECTED))
    _check_range(case, si)
    U, U_from = thermometer_U(case, si)
    wet = assess(_planned(case, si, si["wetness_high"], U))
    if case["mode"] == ELECTRIC and si["power"] is None:  # the same power for the whole range: that of the wet end
        case = case.with_(power=Entry(wet.heating.power, "W"))
    dry = assess(_planned(case, si, si["wetness_low"], U))
    least, comfortable = si["least_superheat"] + U, si["comfortable_superheat"] + U
    terms, x_least = _limit(case, wet, least)
    _, x_comfortable = _limit(case, wet, comfortable)
    return ReachAssessment(case, si, _verdict(dry, wet), _end(dry, si["wetness_low"], U),
                           _end(wet, si["wetness_high"], U), 1.0 - x_least, 1.0 - x_comfortable, least, comfortable, U,
                           U_from, terms)


def thermometer_U(case: Case, si: Resolved) -> tuple[float, str]:
    """Expanded uncertainty of the deciding thermometer [K], k = 2, and where it comes from."""
    if si["U_thermometer"] is not None:
        return si["U_thermometer"], AS_ENTERED
    p = si["p_exhaust"] if case["mode"] != ELECTRIC else si["p_heater"] or si["p_line"]
    doubts = thermometer_doubts(case, si, saturation_temperature(p) + si["comfortable_superheat"])
    if doubts.missing:
        return 0.0, NOT_STATED
    return 2.0 * math.hypot(*(component.u for component in doubts.components)), BY_INSTRUMENT


def wettest(case: Case) -> Assessment:
    """The wettest steam expected, with the thermometer's uncertainty on top of both limits. Raises InputError."""
    si = resolve(case.with_(question=EXPECTED))
    return assess(_planned(case, si, si["wetness_high"], thermometer_U(case, si)[0]))


def _check_range(case: Case, si: Resolved) -> None:
    if not si["wetness_low"] <= si["wetness_high"]:
        entry = case["wetness_high"]
        raise InputError(Fault(FIELDS["wetness_high"].label, entry.value, entry.unit,
                               f"at least the driest, {describe(case['wetness_low'])}",
                               hint="exchange the two", name="wetness_high"))


def _planned(case: Case, si: Resolved, wetness: float, U: float) -> Case:
    """The case as a question of what must be seen, with the thermometer's uncertainty on top of both limits."""
    return case.with_(question=EXPECTED, wetness=Entry(wetness, "1"),
                      least_superheat=Entry(si["least_superheat"] + U, "K"),
                      comfortable_superheat=Entry(si["comfortable_superheat"] + U, "K"))


def _verdict(dry: Assessment, wet: Assessment) -> Readability:
    if dry.verdict is Verdict.CANNOT:
        return Readability.NONE
    if wet.verdict is Verdict.CANNOT:
        return Readability.PART
    return Readability.THIN if wet.verdict is Verdict.THIN else Readability.WHOLE


def stage_pressure(a: Assessment) -> float:
    """Pressure before the orifice [Pa]."""
    return a.separation.p if a.separation else a.si["p_line"]


def in_line(a: Assessment, x_stage):
    """Quality of the line from that before the orifice, with the separator as planned."""
    if not a.separation:
        return x_stage
    return combined_quality(a.si["p_line"], x_stage, water_share=a.si["water_share"], p_separator=a.separation.p,
                            vessel_loss=a.separation.vessel_loss)


def _limit(case: Case, a: Assessment, superheat: float) -> tuple[Terms, float]:
    """Losses and velocities where the superheat is just that, and the quality in the line there."""
    if a.heating:
        h = a.heating
        return a.terms, least_electric_quality(a.si["p_line"], h.p, h.power, a.si["sample_flow"], superheat,
                                               power_loss=h.power_loss)
    p2 = a.si["p_exhaust"]
    terms = terms_at(case, a.si, saturation_temperature(p2) + superheat)
    x = least_quality(stage_pressure(a), p2, superheat, **terms.arguments())
    return terms, in_line(a, min(x, _MOST))


def _end(a: Assessment, wetness: float, U: float) -> End:
    steps = _heater_steps(a) if a.heating else _throttle_steps(a)
    return End(wetness, a.T_exhaust, a.superheat, a.superheat - U, a.verdict, a, steps)


def _shown(superheat: float) -> float | None:
    return superheat if superheat > 0 else None


def _throttle_steps(a: Assessment) -> tuple[tuple[str, float | None], ...]:
    """Superheat without any loss into the open air, then with what the rig takes off it."""
    p, p2, free = stage_pressure(a), a.si["p_exhaust"], a.si.p_barometer
    x = a.separation.x_throttled if a.separation else a.x
    t = a.terms

    def superheat(p_exhaust, **terms):
        return _shown(exhaust_temperature(p, x, p_exhaust, **terms).superheat)

    steps = [("without losses, at the exhaust pressure", superheat(p2))]
    if free * 1.0005 < p2 < p and free < p:  # a back pressure; a few pascal are the gauge's last digit
        steps = [("without losses, into the open air", superheat(free)), ("with the back pressure", superheat(p2))]
    steps.append(("with the heat loss", superheat(p2, heat_loss=t.heat_loss)))
    if t.exhaust_velocity or t.line_velocity:
        steps.append(("with the velocities", superheat(p2, **t.arguments())))
    return tuple(steps)


def _heater_steps(a: Assessment) -> tuple[tuple[str, float | None], ...]:
    h = a.heating
    bare = heater_reading(a.si["p_line"], a.x, h.p, h.power, a.si["sample_flow"])
    return (("without losses", _shown(bare.superheat)), ("with the heater's loss", _shown(a.superheat)))

