"""The simulated rig as it should be: made from a case, with what is usual where the case says nothing.

What a scenario hides is put into it by ``faults``.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import lru_cache

import numpy as np

from engine.calorimeter import (
    StemLiquid,
    cross_flow_film,
    exhaust_pipe,
    immersion_for,
    orifice_mass_flux,
    probe_time_constant,
    steam_viscosity,
    stem_error,
)
from engine.calorimeter.thermometer import STEEL_CONDUCTIVITY
from engine.calorimeter.warmup import STEEL_SPECIFIC_HEAT
from engine.job.case.fields_path import NONE, UNDECIDED
from engine.job.case.fields_rig import ELECTRIC_PROBE, MERCURY
from engine.job.rehearsal.gauges import Gauge, Sheet, drawn_factor, gauges_of, sheet_of, weighing_error
from engine.job.rehearsal.scenario import Scenario
from engine.job.rig.heat import FILM, geometry_of
from engine.job.rig.point import Point
from engine.steam import conductivity, saturated, saturation_temperature, vapour
from engine.steam.units import ZERO_CELSIUS

# what a rig is where the case does not say (common practice)
FLOW = 30.0 / 3600.0  # kg/s
EXHAUST_SPEED = 25.0  # m/s, in a bore that makes no trouble
CONDUCTANCE = 0.18  # W/K, 0.4 m of lagged body with its fittings
BODY_MASS, BODY_LENGTH, BODY_BORE = 3.0, 0.4, 0.0272  # kg, m, m
PROBE, TUBE = 0.006, 0.004  # m
HEAD_ABOVE_AMBIENT = 40.0  # K
WELL_IMMERSED = 0.01  # K of error
GLASS_LAG = 90.0  # s, a glass thermometer in an oil pocket, 1 to 3 min


@dataclass(frozen=True)
class Pipe:
    """Exhaust pressure [Pa] at the thermometer over sample flow [kg/s], as two columns."""

    flow: np.ndarray
    pressure: np.ndarray

    def __call__(self, flow):
        return np.interp(flow, self.flow, self.pressure)


@dataclass(frozen=True)
class Body:
    """Metal from orifice to thermometer: heat capacity [J/K], area inside [m²], film inside [W/(m² K)],
    conductance from steam to surroundings [W/K], temperature it starts from [K]."""

    heat_capacity: float
    area: float
    film: float
    conductance: float
    T_start: float


@dataclass(frozen=True)
class Probe:
    """The exhaust thermometer in its place: lag [s], immersion [m], the share of the difference to its head
    ``T_head`` [K] that is missing, and the error of an emergent stem per kelvin above ``T_stem`` [K]."""

    time_constant: float
    immersion: float
    head_share: float
    T_head: float
    stem: float
    T_stem: float


@dataclass(frozen=True, eq=False)
class Rig:
    """The truth about a rig; SI, absolute.

    p_line, x, line_superheat   of the line steam; a superheated line has quality 1
    area            of the orifice times its discharge coefficient [m²]
    gauges          "line", "exhaust", "exhaust thermometer", "line thermometer"
    weighing        factor on every weighed flow
    sheet           what people believe
    hose            on the end of the exhaust [m]
    slugs           beginnings and ends of slugs of water [s from the start], of quality ``slug_quality``
    clog_onset      [s after steam first flows] until the orifice begins to close; None where it does not
    """

    scenario: Scenario
    point: Point
    p_line: float
    p_barometer: float
    p_discharge: float
    x: float
    line_velocity: float
    area: float
    pipe: Pipe
    exhaust_bore: float
    recovery: float
    T_ambient: float
    body: Body
    probe: Probe
    leg_height: float
    gauges: dict[str, Gauge]
    weighing: float
    sheet: Sheet
    line_superheat: float = 0.0
    hose: float = 0.0
    slugs: np.ndarray = field(default_factory=lambda: np.empty((0, 2)))
    slug_quality: float = 1.0
    clog_onset: float | None = None

    def flow(self, p: np.ndarray, opening) -> np.ndarray:
        """Sample flow [kg/s] at line pressures [Pa], with the part ``opening`` of its way open."""
        at, flux = _flux(self.p_line, self.x, float(self.pipe(self.sheet.sample_flow)))
        return opening * self.area * np.interp(p, at, flux)

    def enthalpy(self, p: np.ndarray, x: np.ndarray) -> np.ndarray:
        """Specific enthalpy of the line steam [J/kg] at pressures and qualities."""
        if self.line_superheat > 0.0:
            return vapour(p, saturation_temperature(p) + self.line_superheat).h
        line = saturated(p)
        return line.h_f + x * (line.h_g - line.h_f)


@lru_cache(maxsize=64)
def _flux(p_line: float, x: float, p_exhaust: float) -> tuple[np.ndarray, np.ndarray]:
    """Mass flux through the orifice [kg/(m² s)] over line pressures as far as they swing."""
    p = p_line * np.linspace(0.88, 1.06, 7)
    p = p[p > p_exhaust * 1.0001]
    return p, np.asarray(orifice_mass_flux(p, x, p_exhaust)[0])


def sound_rig(scenario: Scenario, point: Point, x: float) -> Rig:
    """The rig of a case without faults, its instruments as good as their class, fed with steam of quality ``x``."""
    si, r = point.si, point.reading
    flow, T = point.flow or FLOW, r.T_exhaust
    steam = vapour(r.p_exhaust, T)
    bore = si["exhaust_bore"] or float(np.sqrt(4 * flow * steam.v / (np.pi * EXHAUST_SPEED)))
    recovery = r.recovery - 1.0 + drawn_factor(scenario, si["recovery_tolerance"], "recovery")
    return Rig(
        scenario, point, p_line=si["p_line"], p_barometer=si.p_barometer, p_discharge=point.p_discharge, x=x,
        line_velocity=r.line_velocity, area=flow / orifice_mass_flux(si["p_line"], point.x_wet, r.p_exhaust)[0],
        pipe=_pipe(point, flow, bore), exhaust_bore=bore, recovery=float(np.clip(recovery, 0.0, 1.0)),
        T_ambient=si["T_ambient"], body=_body(scenario, point, flow), probe=_probe(point, flow, bore),
        leg_height=si["leg_height"] or 0.0, gauges=gauges_of(scenario, point),
        weighing=weighing_error(scenario, point, flow), sheet=sheet_of(scenario, point, flow))


def _body(scenario: Scenario, point: Point, flow: float) -> Body:
    si = point.si
    inside = np.pi * (si["body_inner_diameter"] or BODY_BORE) * (si["body_length"] or BODY_LENGTH)
    lost = conductance_of(point, flow) * drawn_factor(scenario, si["heat_loss_tolerance"], "heat loss")
    return Body((si["body_mass"] or BODY_MASS) * STEEL_SPECIFIC_HEAT, float(inside), FILM, lost,
                si["T_ambient"] if si["T_start"] is None else si["T_start"])


def conductance_of(point: Point, flow: float) -> float:
    """What the rig of a case loses [W/K]: as the case accounts for it, else by its geometry, else as usual."""
    r, T_a = point.reading, point.si["T_ambient"]
    if point.case["heat_loss_method"] not in (NONE, UNDECIDED) and T_a < r.T_exhaust:
        return max(r.heat_loss, 0.0) * flow / (r.T_exhaust - T_a)
    geometry = geometry_of(point)
    return geometry.value.whole if geometry else CONDUCTANCE


def _probe(point: Point, flow: float, bore: float) -> Probe:
    si, T = point.si, point.reading.T_exhaust
    steam = vapour(point.reading.p_exhaust, T)
    mu, k = steam_viscosity(1 / steam.v, T), conductivity(1 / steam.v, T)
    outer = si["probe_outer_diameter"] or PROBE
    inner = si["probe_inner_diameter"] or (TUBE if outer == PROBE else 0.0)
    film = cross_flow_film(flow / (np.pi / 4 * bore**2), outer, mu, k, steam.cp * mu / k)
    T_head = si["T_ambient"] + HEAD_ABOVE_AMBIENT if si["T_head"] is None else si["T_head"]
    immersion = si["immersion"]
    if immersion is None:
        immersion = immersion_for(WELL_IMMERSED, T, T_head, outer, inner, film)
    decay = np.sqrt(4 * film * outer / (STEEL_CONDUCTIVITY * (outer**2 - inner**2))) * immersion
    electric = point.case["thermometer"] == ELECTRIC_PROBE
    return Probe(probe_time_constant(outer, film) if electric else GLASS_LAG, immersion,
                 float(1.0 / np.cosh(min(decay, 50.0))), T_head, *_stem(point))


def _stem(point: Point) -> tuple[float, float]:
    """Of a glass thermometer whose exposed column the case describes: its error per kelvin, and its temperature."""
    si, kind = point.si, point.case["thermometer"]
    if kind == ELECTRIC_PROBE or si["exposed"] is None or si["T_stem"] is None:
        return 0.0, ZERO_CELSIUS
    liquid = StemLiquid.MERCURY if kind == MERCURY else StemLiquid.ORGANIC
    return stem_error(si["T_stem"] + 1.0, si["T_stem"], si["exposed"], liquid=liquid), si["T_stem"]


def _pipe(point: Point, flow: float, bore: float) -> Pipe:
    """As described; without a description, one that makes the exhaust pressure of the case."""
    si, outside = point.si, point.p_discharge
    flows = flow * np.linspace(0.0, 1.4, 15)
    if si["exhaust_length"] is None:
        back = max(point.reading.p_exhaust - outside, 0.0)
        return Pipe(flows, outside + back * (flows / flow) ** 2)
    found = exhaust_pipe(flows[1:], bore, si["exhaust_length"], outside, point.reading.T_exhaust,
                         roughness=si["roughness"], loss_coefficient=si["loss_coefficient"],
                         fittings={"elbow 90°, threaded": si["elbows"], "tee, turning": si["tees"]})
    return Pipe(flows, np.r_[outside, found.p_exhaust])
