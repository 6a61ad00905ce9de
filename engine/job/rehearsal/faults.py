"""What a scenario hides in a rig: each fault changes one thing, by a size drawn within what the trade sees.

The truth about the steam and the sizes of the faults each come from a chance of their own, so that the
same seed gives the same steam whatever is hidden.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from engine.calorimeter import exhaust_pipe, least_quality
from engine.job.case import resolve
from engine.job.case.fields_modes import THROTTLING
from engine.job.rehearsal.model import FLOW, Pipe, Rig, conductance_of, sound_rig
from engine.job.rehearsal.scenario import HiddenFault, Scenario
from engine.job.rig.point import Point, point_of
from engine.steam import saturation_temperature
from engine.steam.errors import Fault, InputError
from engine.steam.units import P_STANDARD

SOAKED = 4.0  # soaked lagging loses about four times as much (0.63 W/K for 0.16 W/K, half a metre of DN25)
CLOGGED_TO, CLOGGING = 0.25, 1800.0  # part of the orifice left open at the end; s over which it closes
CLOG_ONSET = (300.0, 900.0)  # s after steam first flows
HEAD_SHARE = (0.08, 0.15)  # of the difference to the head, missing where the thermometer is pulled out
PULLED_TO = (0.25, 0.4)  # of its immersion
OFFSET = (1.5, 4.0)  # K
LINE_SUPERHEAT = (6.0, 15.0)  # K
TOO_WET = (0.004, 0.015)  # below the quality that arrives just dry
TOO_HIGH = (11e3, 25e3)  # Pa that the barometer is below the one believed: 1000 to 2300 m
HIGH_SITE = 95e3  # Pa; below it the case itself knows that the site is high
HOSE, HOSE_BORE = (4.0, 9.0), 0.5  # m; part of the exhaust bore
SLUG_GAP, SLUG_LENGTH, SLUG_QUALITY = (480.0, 900.0), (15.0, 40.0), (0.6, 0.8)  # s, s
SLUGS = 120


def rig_of(scenario: Scenario) -> Rig:
    """The rig of a scenario. InputError where its case cannot be used or is not throttled.

    >>> from engine.job.case.demo import DEMO
    >>> rig_of(Scenario(DEMO, seed=1)).x == rig_of(Scenario(DEMO, {"wet lagging"}, seed=1)).x
    True
    """
    case = scenario.case
    if case["mode"] != THROTTLING:
        raise InputError(Fault("Method", case["mode"], "", f"{THROTTLING} alone for a rehearsal",
                               "no other rig is simulated", "choose it on the Path page", "mode"))
    resolve(case)  # refuses every entry that cannot be used: a link could not carry them
    point = point_of(case)
    rig = sound_rig(scenario, point, _quality(scenario, point))
    for fault, change in _CHANGES.items():
        if scenario.has(fault):
            rig = change(rig, scenario.random(fault))
    return rig


def _quality(scenario: Scenario, point: Point) -> float:
    """The quality of the line: as told, else out of the range expected, as far as the sound rig reads it well."""
    if scenario.x is not None:
        return float(scenario.x)
    si, r = point.si, point.reading
    flow = point.flow or FLOW
    low, high = sorted((1.0 - si["wetness_low"], 1.0 - si["wetness_high"]))
    lost = conductance_of(point, flow) * max(saturation_temperature(r.p_exhaust) - si["T_ambient"], 0.0) / flow
    least = least_quality(si["p_line"], r.p_exhaust, si["least_superheat"] + 1.0, heat_loss=lost)
    return float(scenario.random("quality").uniform(max(low, least) if least < high else low, high))


Change = Callable[[Rig, np.random.Generator], Rig]


def _too_wet(rig: Rig, chance: np.random.Generator) -> Rig:
    just_dry = least_quality(rig.p_line, float(rig.pipe(rig.sheet.sample_flow)), 0.0)
    return replace(rig, x=min(rig.x, just_dry - float(chance.uniform(*TOO_WET))))


def _superheated(rig: Rig, chance: np.random.Generator) -> Rig:
    return replace(rig, x=1.0, line_superheat=float(chance.uniform(*LINE_SUPERHEAT)))


def _with_hose(rig: Rig, chance: np.random.Generator) -> Rig:
    """A hose on the end of the exhaust, so long at most that it takes half of the fall from the line."""
    bore, length, flows = HOSE_BORE * rig.exhaust_bore, float(chance.uniform(*HOSE)), rig.pipe.flow[1:]
    most = rig.p_discharge + 0.5 * (rig.p_line - rig.p_discharge)
    while True:
        end = exhaust_pipe(flows, bore, length, rig.p_discharge, rig.point.reading.T_exhaust).p_exhaust
        if end[-1] < most:
            break
        length, bore = 0.8 * length, 1.05 * bore
    own = rig.pipe.pressure[1:] - rig.p_discharge
    return replace(rig, hose=length, pipe=Pipe(rig.pipe.flow, np.r_[rig.p_discharge, end + own]))


def _soaked(rig: Rig, chance: np.random.Generator) -> Rig:
    return replace(rig, body=replace(rig.body, conductance=SOAKED * rig.body.conductance))


def _pulled_out(rig: Rig, chance: np.random.Generator) -> Rig:
    share, left = float(chance.uniform(*HEAD_SHARE)), float(chance.uniform(*PULLED_TO))
    probe = replace(rig.probe, head_share=max(share, rig.probe.head_share), immersion=left * rig.probe.immersion)
    return replace(rig, probe=probe)


def _clogging(rig: Rig, chance: np.random.Generator) -> Rig:
    return replace(rig, clog_onset=float(chance.uniform(*CLOG_ONSET)))


def _slugs(rig: Rig, chance: np.random.Generator) -> Rig:
    begin = np.cumsum(chance.uniform(*SLUG_GAP, size=SLUGS))
    slugs = np.column_stack([begin, begin + chance.uniform(*SLUG_LENGTH, size=SLUGS)])
    return replace(rig, slugs=slugs, slug_quality=float(chance.uniform(*SLUG_QUALITY)))


def _assumed_barometer(rig: Rig, chance: np.random.Generator) -> Rig:
    """The site is higher than the sheet believes. Gauges show what they show, so every pressure is lower.

    A line gauge that shows absolute pressure would not mind, so it is exchanged for one that does.
    """
    true, believed = rig.p_barometer - float(chance.uniform(*TOO_HIGH)), rig.sheet.p_barometer
    if rig.p_barometer < HIGH_SITE:  # the case knows that it is high up, the sheet does not
        true, believed = rig.p_barometer, P_STANDARD
    drop = rig.p_barometer - true
    outside = rig.p_discharge == rig.p_barometer
    pipe = replace(rig.pipe, pressure=rig.pipe.pressure - drop) if outside else rig.pipe
    gauges = {**rig.gauges, "line": replace(rig.gauges["line"], on_barometer=True)}
    sheet = replace(rig.sheet, p_barometer=believed, barometer_read=False, line_gauge_absolute=False)
    return replace(rig, p_line=rig.p_line - drop, p_barometer=true, p_discharge=true if outside else rig.p_discharge,
                   pipe=pipe, gauges=gauges, sheet=sheet)


def _as_absolute(rig: Rig, chance: np.random.Generator) -> Rig:
    gauges = {**rig.gauges, "line": replace(rig.gauges["line"], on_barometer=True)}
    return replace(rig, gauges=gauges, sheet=replace(rig.sheet, line_gauge_absolute=True))


def _offset(rig: Rig, chance: np.random.Generator) -> Rig:
    gauge = rig.gauges["exhaust thermometer"]
    shift = float(chance.choice([-1.0, 1.0]) * chance.uniform(*OFFSET))
    return replace(rig, gauges={**rig.gauges, "exhaust thermometer": replace(gauge, error=gauge.error + shift)})


# in the order in which they are put in: the barometer moves the pressures that others start from
_CHANGES: dict[HiddenFault, Change] = {
    HiddenFault.BAROMETER_ASSUMED: _assumed_barometer,
    HiddenFault.GAUGE_AS_ABSOLUTE: _as_absolute,
    HiddenFault.BACK_PRESSURE: _with_hose,
    HiddenFault.WET_EXHAUST: _too_wet,
    HiddenFault.SUPERHEATED_LINE: _superheated,
    HiddenFault.WET_LAGGING: _soaked,
    HiddenFault.SHALLOW_THERMOMETER: _pulled_out,
    HiddenFault.CLOGGED_ORIFICE: _clogging,
    HiddenFault.WATER_SLUGS: _slugs,
    HiddenFault.THERMOMETER_OFFSET: _offset,
}
