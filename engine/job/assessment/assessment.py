"""One call from a case to everything that the Path page, and whatever follows it, shows."""

from __future__ import annotations

import numpy as np

from engine.calorimeter import (
    Path,
    Quality,
    Status,
    bore_ratio_keeping_velocity,
    constant_bore_path,
    exhaust_temperature,
    isenthalpic_path_at,
    kinetic_energy,
    kinetic_superheat,
    least_quality,
    quality,
    velocity,
    velocity_ratio,
)
from engine.job.assessment.assessed import Assessment, StatePoint, Velocities
from engine.job.assessment.heating import heat, heating_path
from engine.job.assessment.modes import check_mode
from engine.job.assessment.separation import separated, stage_of
from engine.job.assessment.terms import Terms, check_method, refuse_supersonic, terms_at
from engine.job.assessment.verdict import Verdict, verdict_of
from engine.job.case import Case, Resolved, as_entered, describe, resolve
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import ELECTRIC, SEPARATING
from engine.job.case.fields_path import BY_NORMAL, EXPECTED
from engine.steam import Saturated, saturated, saturation_temperature, state_ph, vapour
from engine.steam.errors import Fault, InputError

_LEAST_CP = 1800.0  # J/(kg K): no vapour heats up with less
POINTS = 25  # along a path: the eye sees no corner, and the page stays quick
_FAST = 300.0  # m/s: slower than sound in any dry saturated steam


def assess(case: Case) -> Assessment:
    """Assess a case. Raises InputError, with every fault at once, where an entry cannot be used.

    >>> from engine.job.case.demo import DEMO
    >>> result = assess(DEMO)
    >>> result.verdict.value, round(result.x, 4), round(result.superheat, 1)
    ('reads', 0.972, 20.9)
    """
    si = resolve(case)
    check_mode(case, si)
    if case["mode"] == ELECTRIC:
        return _heated(case, si)
    check_method(case)
    if case["mode"] == SEPARATING:
        stage, separation = stage_of(case, si)
        return separated(_throttled(case, stage), si, separation)
    return _throttled(case, si)


def _throttled(case: Case, si: Resolved) -> Assessment:
    """The sample through the orifice alone."""
    _check_normal(case, si)
    p1, p2 = si["p_line"], si["p_exhaust"]
    T_sat, line = saturation_temperature(p2), saturated(p1)
    if case["question"] == EXPECTED:
        x = 1.0 - si["wetness"]
        T, superheat, x_exhaust, terms, status = _expected(case, si, x)
        h_line, x_bound, line_superheat = line.h_f + x * (line.h_g - line.h_f), None, 0.0
        as_read = without_kinetic = None
    else:
        T = si["T_exhaust"]
        terms = terms_at(case, si, T)
        result, as_read, without_kinetic = _read(p1, p2, T, terms)
        x, x_bound, h_line, superheat, line_superheat, status = (
            _known(result.x), _known(result.x_bound), result.h_line, result.superheat, result.line_superheat,
            Status(result.status))
        x_exhaust = 1.0
    least, comfortable = si["least_superheat"], si["comfortable_superheat"]
    least_readable = max(least, _superheat_of_dry_stream(terms, p2, T_sat, least))
    # at the temperature of the limit, not of the reading: how far the rig reaches does not depend on what it read
    x_least = least_quality(p1, p2, least, **terms_at(case, si, T_sat + least_readable).arguments())
    if status == Status.LINE_SUPERHEATED:
        verdict, x_below = Verdict.SUPERHEATED, None
    elif status == Status.NOT_SUPERHEATED or superheat < least:
        verdict = Verdict.CANNOT
        x_below = None if case["question"] == EXPECTED else min(x_least, 1.0)
        x = x if case["question"] == EXPECTED else None
    else:
        verdict, x_below = (Verdict.THIN if superheat < comfortable else Verdict.READS), None
    if np.isnan(h_line):  # only a bound is known: the path of the driest steam that could read so
        h_line = line.h_f + min(x_bound, 1.0) * (line.h_g - line.h_f)
    h_least = line.h_f + x_least * (line.h_g - line.h_f)
    both = isenthalpic_path_at(p1, np.array([h_line, h_least]), p2, points=POINTS)
    path, reach_path = both.row(0), both.row(1)
    velocities = _velocities(case, si, path, line)
    bore_path = None
    if velocities.sample and line_superheat == 0.0 and path.x[0] <= 1.0:
        bore_path = constant_bore_path(p1, float(path.x[0]), p2, velocities.sample, points=POINTS)
    return Assessment(case, si, verdict, status, x, x_below, as_read, without_kinetic, T, T_sat, superheat, x_exhaust,
                      x_least, least_readable, superheat - least_readable, line_superheat, terms, line, velocities,
                      path, reach_path, bore_path, _states(path, bore_path, velocities),
                      _read_state(p2, T, superheat, velocities))


def _heated(case: Case, si: Resolved) -> Assessment:
    """The sample through a heater instead of an orifice."""
    found, heating, x_least = heat(case, si)
    least, line = si["least_superheat"], saturated(si["p_line"])
    verdict = (Verdict.SUPERHEATED if found.status == Status.LINE_SUPERHEATED else
               verdict_of(found.superheat, least, si["comfortable_superheat"],
                          wet=found.status == Status.NOT_SUPERHEATED))
    expected = case["question"] == EXPECTED
    known = expected or verdict in (Verdict.READS, Verdict.THIN)
    path = heating_path(si["p_line"], found.h_line, heating)
    h_least = line.h_f + max(x_least, 0.0) * (line.h_g - line.h_f)
    velocities = Velocities(si["line_velocity"], None, None, None,
                            bore_ratio_keeping_velocity(float(path.v[0]), float(path.v[-1])), None, None, None)
    return Assessment(
        case, si, verdict, found.status, found.x if known else None,
        None if expected or verdict is not Verdict.CANNOT else min(max(x_least, 0.0), 1.0), found.x_without_loss, None,
        found.T, saturation_temperature(heating.p), found.superheat, found.x_after, x_least, least,
        found.superheat - least, found.line_superheat, Terms(0.0, 0.0, 0.0, 1.0), line, velocities, path,
        heating_path(si["p_line"], h_least, heating) if x_least <= 1.0 else None, None,
        _states(path, None, velocities, end="After the heater"), None, heating=heating)


def _superheat_of_dry_stream(terms: Terms, p: float, T_sat: float, least: float) -> float:
    """What the probe shows above saturation [K] where the stream it stands in is just dry; 0 where below ``least``."""
    stopped = 0.5 * terms.recovery * terms.exhaust_velocity**2
    if stopped < _LEAST_CP * least:
        return 0.0
    return state_ph(p, vapour(p, T_sat).h + stopped).T - T_sat


def _check_normal(case: Case, si: Resolved) -> None:
    T_sat = saturation_temperature(si["p_exhaust"])
    if case["heat_loss_method"] == BY_NORMAL and not si["T_normal"] > T_sat:
        entry = case["T_normal"]
        limit = describe(as_entered(FIELDS["T_normal"], T_sat, entry, 0.0))
        raise InputError(Fault(FIELDS["T_normal"].label, entry.value, entry.unit,
                               f"more than {limit}, saturation at the exhaust pressure",
                               "dry steam must arrive superheated, or it says nothing of the heat loss",
                               "check it, or account for the heat loss in another way", "T_normal"))


def _known(value: float) -> float | None:
    return None if np.isnan(value) else value


def _read(p1: float, p2: float, T: float, terms: Terms) -> tuple[Quality, float | None, float | None]:
    """The reading reduced three ways in one call: in full, as read, and with the heat loss alone."""
    q, c = terms.heat_loss, terms.exhaust_velocity
    three = quality(p1, p2, T, heat_loss=np.array([q, 0.0, q]), recovery=terms.recovery,
                    line_velocity=np.array([terms.line_velocity, 0.0, 0.0]), exhaust_velocity=np.array([c, 0.0, 0.0]))
    full = Quality(*(float(column[0]) for column in three[:-1]), Status(int(three.status[0])))
    if full.status >= Status.OUT_OF_RANGE:  # the scalar call names what is wrong
        quality(p1, p2, T, **terms.arguments())
    return full, _known(float(three.x[1])), _known(float(three.x[2]))


def _expected(case: Case, si: Resolved, x: float):
    """What must be seen: heat loss and velocity follow from the temperature they change, so a few rounds."""
    T = saturation_temperature(si["p_exhaust"])
    for _ in range(8):
        terms = terms_at(case, si, T)
        seen = exhaust_temperature(si["p_line"], x, si["p_exhaust"], **terms.arguments())
        moved, T = abs(seen.T_exhaust - T), seen.T_exhaust
        if moved < 1e-6:
            break
    return T, seen.superheat, seen.x_exhaust, terms, seen.status


def _velocities(case: Case, si: Resolved, path: Path, line: Saturated) -> Velocities:
    v1, v2 = float(path.v[0]), float(path.v[-1])
    flow, d1, d2 = si["sample_flow"], si["line_bore"], si["exhaust_bore"]
    sample = velocity(flow, d1, v1) if flow and d1 else None
    if sample and sample > _FAST:
        refuse_supersonic(case, "line_bore", sample, vapour(si["p_line"], line.T).sound_speed)
    exhaust = velocity(flow, d2, v2) if flow and d2 else None
    ratio = exhaust / sample if sample and exhaust else None
    if ratio is None and d1 and d2:
        ratio = velocity_ratio(v1, v2, d1, d2)
    energy = kinetic_energy(exhaust) if exhaust else None
    return Velocities(
        si["line_velocity"], sample, exhaust, ratio, bore_ratio_keeping_velocity(v1, v2), energy,
        kinetic_superheat(exhaust, si["p_exhaust"], float(path.T[-1])) if exhaust else None,
        energy / (line.h_g - line.h_f) if exhaust else None)


def _read_state(p: float, T: float, superheat: float, velocities: Velocities) -> StatePoint | None:
    if not superheat > 0:
        return None
    steam = vapour(p, T)
    return StatePoint("Exhaust as read", p, T, None, steam.h, steam.s, steam.v, velocities.exhaust)


def _states(path: Path, bore_path: Path | None, velocities: Velocities,
            end: str = "Exhaust") -> tuple[StatePoint, ...]:
    def point(name: str, of: Path, k: int, speed: float | None) -> StatePoint:
        superheated = of.status[k] == 1
        return StatePoint(name, *(float(column[k]) for column in (of.p, of.T)), None if superheated else
                          float(of.x[k]), *(float(column[k]) for column in (of.h, of.s, of.v)), speed)

    rows = [point("Line", path, 0, velocities.sample or velocities.line)]
    dry = int(np.argmax(path.x >= 1.0 - 1e-9))  # the first dry point is the one where it dries out
    if path.dries_out and dry < path.x.size - 1:
        rows.append(point("Dries out", path, dry, None))
    rows.append(point(end, path, -1, velocities.exhaust))
    if bore_path is not None:
        name = "Constant bore, chokes" if bore_path.chokes else "Constant bore, exhaust"
        rows.append(point(name, bore_path, -1, float(bore_path.velocity[-1])))
    return tuple(rows)
