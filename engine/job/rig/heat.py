"""What is lost and what is misread: heat, the thermometer's own errors, the warm-up."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from engine.calorimeter import (
    LAGGING_CONDUCTIVITY,
    OUTER_FILMS,
    MovingStreamError,
    SteamUsed,
    StemLiquid,
    WarmUp,
    body_heat_capacity,
    corrected_temperature,
    cross_flow_film,
    heat_loss_per_kg,
    immersion_error,
    immersion_for,
    moving_stream_error,
    pipe_conductance,
    radiation_error,
    reading_error,
    steam_used,
    steam_viscosity,
    stem_error,
    time_to_within,
    warm_up,
)
from engine.calorimeter.warmup import CONDENSING_FILM
from engine.job.assessment.terms import two_flow_conductance
from engine.job.case import Case, Resolved, describe
from engine.job.case.fields import FIELDS
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS
from engine.job.case.fields_rig import BARE, ELECTRIC_PROBE, MERCURY
from engine.job.rig.point import Part, Point, part, shares
from engine.steam import conductivity, saturation_temperature, state_ph, vapour
from engine.steam.errors import Fault, InputError

BY_GEOMETRY = "geometry and lagging"
GOOD_IMMERSION = 0.1  # K, an immersion error that no budget sees
EARLY = (300.0, 600.0, 1200.0, 1800.0)  # s after the start, when one may be tempted to read
FILM = 100.0  # W/(m² K), superheated steam along the wall of the body (common practice)
_BODY = ("body_mass", "body_length", "body_inner_diameter", "T_ambient")  # what a warm-up needs to know of it
_METHODS = {BY_CONDUCTANCE: ("sample_flow", "conductance", "T_ambient"), BY_KG: ("heat_loss",),
            BY_TWO_FLOWS: ("sample_flow", "second_flow", "T_second", "T_ambient"), BY_NORMAL: ("T_normal",)}


@dataclass(frozen=True)
class Geometry:
    """Conductances [W/K] from dimensions and lagging, and the wall temperature [K] they leave inside the body.

    ``sampling`` is that of the line ahead of the orifice, None where none was described; the ``whole`` counts
    it by the larger temperature difference that drives it, so that it can stand in the place of UA.
    """

    body: float
    sampling: float | None
    whole: float
    T_wall: float


@dataclass(frozen=True)
class Loss:
    """A heat loss by one method, SI: per kg, in kelvin of reading, as a part of the quality."""

    heat_loss: float
    kelvin: float
    quality: float
    conductance: float | None


@dataclass(frozen=True)
class Thermometer:
    """Errors [K] of the thermometer, reading minus truth; ``film`` [W/(m² K)] around it.

    ``stem`` is None for an electric probe; ``T_wall`` [K] is the wall it sees, ``wall_computed`` where it
    follows from the body's heat loss; ``immersion_good`` [m] would leave GOOD_IMMERSION.
    """

    film: Part[float]
    immersion: Part[float]
    immersion_good: Part[float]
    radiation: Part[float]
    T_wall: float | None
    wall_computed: bool
    stream: Part[MovingStreamError]
    stem: Part[float] | None


@dataclass(frozen=True)
class WarmingUp:
    """The warm-up, SI: ``ready`` when the reading stays within the error allowed; its temperatures over ``time``.

    ``reading`` is what the thermometer shows; ``used`` the steam drawn until the test ends; ``early`` what a
    reading too soon is wrong by: (time, kelvin, part of the quality, None while the exhaust is wet).
    """

    run: WarmUp
    ready: float
    used: SteamUsed
    time: np.ndarray
    reading: np.ndarray
    early: tuple[tuple[float, float, float | None], ...]


def geometry_of(point: Point) -> Part[Geometry]:
    """Conductance of the body, and of the sampling line where it is described."""
    case, si = point.case, point.si
    needed = ["body_length", "body_outer_diameter", "body_inner_diameter", "T_ambient"]
    if case["lagging_state"] != BARE:
        needed.append("lagging")
    return part(si, needed, lambda: _geometry(point))


def _geometry(point: Point) -> Geometry:
    si = point.si
    T_line, T, T_a = saturation_temperature(si["p_line"]), point.reading.T_exhaust, si["T_ambient"]
    body = _conductance(point, "lagging_state", "body_length", "body_outer_diameter", "body_inner_diameter", FILM)
    inside = np.pi * si["body_inner_diameter"] * si["body_length"]
    sampling, whole = None, body
    if si["sampling_length"]:
        for name in ("sampling_outer_diameter", "line_bore"):
            if si[name] is None:
                raise InputError(Fault(FIELDS[name].label, "nothing", "", "a value, since a sampling line is given"))
        sampling = _conductance(point, "sampling_lagging", "sampling_length", "sampling_outer_diameter", "line_bore",
                                CONDENSING_FILM)
        whole += sampling * (T_line - T_a) / (T - T_a) if T_a < T else sampling
    return Geometry(body, sampling, whole, T - body * (T - T_a) / (FILM * inside))


def _conductance(point: Point, state: str, length: str, outer: str, inner: str, film: float) -> float:
    case, si = point.case, point.si
    _inside(case, inner, outer, si)
    if case[state] != BARE and si["lagging"] is None:
        raise InputError(Fault(FIELDS["lagging"].label, "nothing", "", "a thickness, or none of it: bare"))
    outer_film = OUTER_FILMS[case["outer_air"]]
    if case[state] == BARE:
        return pipe_conductance(si[length], si[outer], si[inner], film=film, outer_film=outer_film)
    return pipe_conductance(si[length], si[outer], si[inner], film=film, outer_film=outer_film, lagging=si["lagging"],
                            conductivity=LAGGING_CONDUCTIVITY[case[state]])


def _inside(case: Case, inner: str, outer: str, si) -> None:
    """InputError, in the units entered, where an inner diameter leaves no metal."""
    if not si[inner] < si[outer]:
        entry = case[inner]
        raise InputError(Fault(FIELDS[inner].label, entry.value, entry.unit,
                               f"less than that around it, {describe(case[outer])}", name=inner))


def losses_of(point: Point, geometry: Part[Geometry]) -> dict[str, Part[Loss]]:
    """The heat loss by every method that the entries allow, side by side."""
    found = {BY_GEOMETRY: _by_geometry(point, geometry)}
    for method, needed in _METHODS.items():
        found[method] = part(point.si, needed, lambda method=method: _by_method(point, method))
    return found


def _by_geometry(point: Point, geometry: Part[Geometry]) -> Part[Loss]:
    if not geometry:
        return Part(None, geometry.trouble)
    return part(point.si, ("sample_flow",), lambda: sized_loss(point, heat_loss_per_kg(
        geometry.value.whole, point.reading.T_exhaust, point.si["T_ambient"], point.flow), geometry.value.whole))


def _by_method(point: Point, method: str) -> Loss:
    UA = point.si["conductance"] if method == BY_CONDUCTANCE else None
    if method == BY_TWO_FLOWS:
        UA = two_flow_conductance(point.case, point.si)
    return sized_loss(point, point.variant(method=method).heat_loss, UA)


def sized_loss(point: Point, heat_loss: float, conductance: float | None) -> Loss:
    """A loss per kg in kelvin of the reading and as a part of the quality."""
    r = point.reading
    h = vapour(r.p_exhaust, r.T_exhaust).h
    without, with_it = shares([replace(r, heat_loss=0.0), replace(r, heat_loss=heat_loss)])
    kelvin = state_ph(r.p_exhaust, h + heat_loss).T - r.T_exhaust if heat_loss else 0.0
    return Loss(heat_loss, kelvin, float(point.kept * (with_it - without)), conductance)


def thermometer_of(point: Point, geometry: Part[Geometry]) -> Thermometer:
    """The errors of the thermometer, each where its entries are there."""
    si, T = point.si, point.reading.T_exhaust
    film = part(si, ("sample_flow", "exhaust_bore", "probe_outer_diameter"), lambda: _film(point))

    def behind_film(needed, compute) -> Part[float]:
        return part(si, needed, compute) if film else Part(None, film.trouble)

    probe = ("immersion", "probe_outer_diameter", "probe_inner_diameter", "T_head")
    rod = (si["probe_outer_diameter"], si["probe_inner_diameter"])
    immersion = behind_film(probe, lambda: _true_error(point, lambda T: immersion_error(
        T, si["T_head"], si["immersion"], *_tube(point), film.value)))
    good = behind_film(probe[1:], lambda: immersion_for(GOOD_IMMERSION, T, si["T_head"], *rod, film.value))
    computed = si["T_wall"] is None and bool(geometry)
    T_wall = geometry.value.T_wall if computed else si["T_wall"]
    radiation = behind_film(() if computed else ("T_wall",), lambda: _true_error(
        point, lambda T: radiation_error(T, T_wall, film.value)))
    cp = vapour(si["p_exhaust"], T).cp
    stream = part(si, ("sample_flow", "exhaust_bore", "recovery"),
                  lambda: moving_stream_error(point.reading.exhaust_velocity, cp, si["recovery"]))
    return Thermometer(film, immersion, good, radiation, T_wall, computed, stream, _stem(point))


def _tube(point: Point) -> tuple[float, float]:
    _inside(point.case, "probe_inner_diameter", "probe_outer_diameter", point.si)
    return point.si["probe_outer_diameter"], point.si["probe_inner_diameter"]


def _stem(point: Point) -> Part[float] | None:
    kind = point.case["thermometer"]
    if kind == ELECTRIC_PROBE:
        return None
    liquid = StemLiquid.MERCURY if kind == MERCURY else StemLiquid.ORGANIC
    si, T = point.si, point.reading.T_exhaust
    return part(si, ("exposed", "T_stem"), lambda: stem_error(T, si["T_stem"], si["exposed"], liquid=liquid))


def _true_error(point: Point, error) -> float:
    """The error at the true temperature behind the reading."""
    T_read = point.reading.T_exhaust
    return T_read - corrected_temperature(T_read, error)


def _film(point: Point) -> float:
    """Film coefficient around the thermometer, from the exhaust stream across it."""
    si, T = point.si, point.reading.T_exhaust
    steam = vapour(si["p_exhaust"], T)
    mu, k = steam_viscosity(1 / steam.v, T), conductivity(1 / steam.v, T)
    flux = si["sample_flow"] / (np.pi / 4 * si["exhaust_bore"] ** 2)
    return cross_flow_film(flux, si["probe_outer_diameter"], mu, k, steam.cp * mu / k)


def warming_of(point: Point, loss: Loss | None) -> Part[WarmingUp]:
    """The warm-up from the start to the end of the test; ``loss`` is the heat loss thought to be real."""
    return part(point.si, ("sample_flow", *_BODY), lambda: _warming(point, loss))


def heater_warming(si: Resolved, p: float, T: float) -> Part[WarmingUp]:
    """The warm-up behind a heater: the body between it and the thermometer, in steam at ``p`` [Pa] and ``T`` [K].

    What the body itself loses is not known apart from the loss of the heater, and is left out.
    """
    def compute() -> WarmingUp:
        return _course(si, si["sample_flow"], _run(si, si["sample_flow"], p, T, 0.0), ())

    return part(si, ("sample_flow", *_BODY), compute)


def _warming(point: Point, loss: Loss | None) -> WarmingUp:
    si, r = point.si, point.reading
    lost = 0.0 if loss is None else max(loss.heat_loss, 0.0)
    UA = lost * point.flow / max(r.T_exhaust - si["T_ambient"], 1.0)
    enters = state_ph(r.p_exhaust, vapour(r.p_exhaust, r.T_exhaust).h + lost).T
    run = _run(si, point.flow, r.p_exhaust, enters, UA)
    return _course(si, point.flow, run, _early(point, run))


def _run(si: Resolved, flow: float, p: float, T: float, conductance: float) -> WarmUp:
    start = si["T_ambient"] if si["T_start"] is None else si["T_start"]
    return warm_up(body_heat_capacity(si["body_mass"]), np.pi * si["body_inner_diameter"] * si["body_length"], flow,
                   p, T, start, si["T_ambient"], film=FILM, conductance=conductance)


def _course(si: Resolved, flow: float, run: WarmUp, early: tuple) -> WarmingUp:
    ready = time_to_within(run, si["warmup_error"])
    # closer where it changes fast: the reading jumps when condensation ends
    time = np.unique(np.r_[np.linspace(0.0, max(1.4 * ready, 600.0), 121), run.time_condensing])
    return WarmingUp(run, ready, steam_used(flow, ready, si["duration"]), time,
                     run.T_final + np.asarray(reading_error(run, time)), early)


def _early(point: Point, run: WarmUp) -> tuple[tuple[float, float, float | None], ...]:
    r, times = point.reading, EARLY
    errors = [reading_error(run, t) for t in times]
    x = shares([r, *(replace(r, T_exhaust=r.T_exhaust + e) for e in errors)])
    wet = [t < run.time_condensing or np.isnan(read) for t, read in zip(times, x[1:], strict=True)]
    return tuple((t, e, None if w else float(point.kept * (read - x[0])))
                 for t, e, w, read in zip(times, errors, wet, x[1:], strict=True))
