"""Behind a separator: the throttled steam is a case of its own, and what was drained is then put back."""

from __future__ import annotations

from dataclasses import replace
from types import MappingProxyType

from engine.calorimeter import (
    MassBasis,
    Status,
    combined_quality,
    drain_needed,
    drained_fraction,
    drained_mass,
    separated_reading,
    wet_steam,
)
from engine.job.assessment.assessed import Assessment, Separation, StatePoint
from engine.job.assessment.verdict import Verdict
from engine.job.case import Case, Resolved
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import BY_VOLUME
from engine.job.case.fields_path import EXPECTED
from engine.steam import saturated
from engine.steam.errors import Fault, InputError

_MOST = 1.999  # a throttled quality this far above 1 only says that nothing can be read


def stage_of(case: Case, si: Resolved) -> tuple[Resolved, Separation]:
    """The throttled steam as a case of its own, and what was, or would be, drained before it."""
    p = si["p_line"] if si["p_separator"] is None else min(si["p_separator"], si["p_line"])
    loss = si["vessel_loss"] or 0.0
    stage = {**si.si, "p_line": p}
    if case["question"] == EXPECTED:
        x, share = 1.0 - si["wetness"], si["water_share"]
        at = {"p_separator": p, "vessel_loss": loss}
        separation = Separation(p, loss, drained_fraction(si["p_line"], x, share, **at), share)
        left = separated_reading(si["p_line"], x, si["p_exhaust"], separation.drain_fraction, **at).x_throttled
        stage["wetness"] = 1.0 - left
    else:
        separation = Separation(p, loss, _drained(case, si))
    return Resolved(MappingProxyType(stage), si.p_barometer), separation


def _drained(case: Case, si: Resolved) -> float:
    """Part of the whole sample that was drained, from the two masses."""
    by_volume = case["water_by"] == BY_VOLUME
    water = drained_mass(si["water_volume"], si["T_water"]) if by_volume else si["water_mass"]
    weighed = si["weighed_mass"]
    if case["weighed_basis"] == MassBasis.THROTTLED:
        return water / (weighed + water)
    if not weighed > water:
        entry = case["weighed_mass"]
        raise InputError(Fault(FIELDS["weighed_mass"].label, entry.value, entry.unit,
                               f"more than the drained water that is in it, {water:.4g} kg",
                               "some steam went through the throttle", "check which mass was weighed", "weighed_mass"))
    return water / weighed


def separated(stage: Assessment, si: Resolved, separation: Separation) -> Assessment:
    """The assessment of the throttled ``stage`` brought back to the line by what was drained."""
    p, sep = si["p_line"], saturated(separation.p)
    at = {"p_separator": separation.p, "vessel_loss": separation.vessel_loss}
    drained = separation.drain_fraction

    def in_line(x: float | None) -> float | None:
        return None if x is None else combined_quality(p, x, drain_fraction=drained, **at)

    x_throttled = float((stage.path.h[0] - sep.h_f) / (sep.h_g - sep.h_f))
    told, verdict, superheated = in_line(x_throttled), stage.verdict, 0.0
    if verdict is Verdict.SUPERHEATED and drained > 0:
        # water and superheated steam cannot leave the same vessel; dry steam, read a little too high, can
        verdict = Verdict.CONTRADICTS if x_throttled > 1.0 + si["U_quality"] else Verdict.READS
    elif verdict is Verdict.SUPERHEATED:
        superheated = stage.line_superheat
    known = stage.expected or verdict in (Verdict.READS, Verdict.THIN)
    # a reach that is planned is that of the separator, one behind a reading that of what it drained then
    held = {"water_share": separation.water_share} if stage.expected else {"drain_fraction": drained}
    found = replace(separation, x_throttled=x_throttled, water_share=_share(drained, x_throttled),
                    drain_least=_least_drained(si, told, at, stage.terms.arguments()))
    return replace(
        stage, si=si, verdict=verdict, x=told if known else None,
        x_below=None if stage.x_below is None else min(in_line(stage.x_below), 1.0),
        x_as_read=in_line(stage.x_as_read), x_without_kinetic=in_line(stage.x_without_kinetic),
        x_least=combined_quality(p, min(stage.x_least, _MOST), **held, **at), line_superheat=superheated,
        line=saturated(p), separation=found, states=_states(stage, p, told, separation.p))


def _share(drained: float, x_throttled: float) -> float | None:
    """What was drained as a part of the water that arrived."""
    water = 1.0 - (1.0 - drained) * x_throttled
    return drained / water if drained <= water and water > 0 else None


def _least_drained(si: Resolved, x: float, at: dict[str, float], terms: dict[str, float]) -> float | None:
    if not 0 <= x <= 1:
        return None
    need = drain_needed(si["p_line"], x, si["p_exhaust"], si["least_superheat"], **at, **terms)
    return need.drain_fraction if need.status == Status.OK else None


def _states(stage: Assessment, p: float, x: float, p_separator: float) -> tuple[StatePoint, ...]:
    """Line and drained water before the states of the throttled steam."""
    first, *others = stage.states
    if not 0 <= x <= 1:
        return stage.states
    steam, sep, line = wet_steam(p, x), saturated(p_separator), saturated(p)
    return (replace(first, name="Line", p=p, T=line.T, x=x, h=steam.h, s=steam.s, v=steam.v,
                    velocity=stage.velocities.line),
            replace(first, name="Drained water", T=sep.T, x=0.0, h=sep.h_f, s=sep.s_f, v=sep.v_f, velocity=None),
            replace(first, name="Throttled steam", velocity=stage.velocities.sample), *others)
