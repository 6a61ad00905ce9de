"""What flows: through the orifice, out of the exhaust pipe, into the nozzle."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter import (
    DISCHARGES,
    ExhaustPipe,
    OrificeFlow,
    SampleBias,
    bore_for_flow,
    exhaust_pipe,
    exhaust_temperature,
    isokinetic_port_area,
    kinetic_energy,
    kinetic_quality,
    kinetic_superheat,
    least_exhaust_bore,
    least_quality,
    orifice_flow,
    pipe_velocity,
    sample_bias,
    velocity,
    wetness_in_line,
    wetness_sampled,
)
from engine.job.case.fields_path import EXPECTED
from engine.job.rig.point import Part, Point, part
from engine.steam import vapour

RATIOS = (0.5, 0.8, 1.25, 2.0)  # line velocity over port velocity, to compare with
_EDGES = (min(DISCHARGES.values()), max(DISCHARGES.values()))


@dataclass(frozen=True)
class Flow:
    """The sample flow, SI: from the orifice, as weighed, and what either says of the other.

    ``implied`` is the discharge coefficient behind the flow entered. The curves run over ``bores``: the
    computed flow, Napier's, and the flows of a sharp edge and of a rounded inlet.
    """

    orifice: OrificeFlow
    implied: float | None
    bore_wanted: Part[float]
    bores: np.ndarray
    computed: np.ndarray
    napier: np.ndarray
    least: np.ndarray
    most: np.ndarray


@dataclass(frozen=True)
class Exhaust:
    """The exhaust stream, SI.

    velocity, mach      at the thermometer
    kinetic_energy, kinetic_superheat, kinetic_quality   all of c²/2, as energy, in kelvin and as a part of quality
    least_bore          that keeps it within the allowed kinetic error
    pipe                pressures along the exhaust pipe
    x_least, x_least_piped      reach at the exhaust pressure of the case, and at that of the pipe
    superheat, superheat_piped  what the same steam shows at either; None where the line is superheated
    """

    velocity: float
    mach: float
    kinetic_energy: float
    kinetic_superheat: float
    kinetic_quality: float
    least_bore: float
    pipe: Part[ExhaustPipe]
    x_least: float
    x_least_piped: float | None
    superheat: float | None
    superheat_piped: float | None


@dataclass(frozen=True)
class Entry:
    """What ports of the size there are do to the sample, SI: ``error`` of the quality, line over port velocity,
    drops caught over drops in their way."""

    port_velocity: float
    velocity_ratio: float
    stokes: float
    aspiration: float
    error: float


@dataclass(frozen=True)
class Nozzle:
    """Line and ports, SI. ``port_area`` wanted for equal velocities, ``port_bore`` of one port then.

    ``entry`` as the nozzle stands. Over ``drops`` runs the error of the quality: ``errors`` as it stands,
    ``compared`` for the velocity ratios of ``RATIOS``.
    """

    line_velocity: float
    isokinetic_area: Part[float]
    isokinetic_bore: Part[float]
    port_area: Part[float]
    entry: Part[Entry]
    drops: np.ndarray
    errors: np.ndarray | None
    compared: tuple[np.ndarray, ...]


def flow_of(point: Point) -> Part[Flow]:
    """The sample flow by the orifice, beside the one entered."""
    return part(point.si, ("bore", "discharge"), lambda: _flow(point))


def _flow(point: Point) -> Flow:
    si, p, p2, x = point.si, point.si["p_line"], point.si["p_exhaust"], point.x_wet
    entered = None if point.flow_computed else point.flow
    orifice = orifice_flow(p, x, p2, si["bore"], si["discharge"], weighed=entered)
    wanted = part(si, ("wanted_flow",), lambda: bore_for_flow(si["wanted_flow"], p, x, p2, si["discharge"]))
    bores = si["bore"] * np.linspace(0.0, 2.0, 41)
    grown = (bores / si["bore"]) ** 2  # the flux does not depend on the bore
    computed = orifice.computed * grown
    least, most = (computed * edge / si["discharge"] for edge in _EDGES)
    return Flow(orifice, None if entered is None else orifice.discharge, wanted, bores, computed,
                orifice.napier * grown, least, most)


def exhaust_of(point: Point) -> Part[Exhaust]:
    """The exhaust stream and what the pipe behind it does to the pressure."""
    return part(point.si, ("sample_flow", "exhaust_bore"), lambda: _exhaust(point))


def _exhaust(point: Point) -> Exhaust:
    si, terms = point.si, point.terms().arguments()
    p, p2, T = si["p_line"], si["p_exhaust"], point.reading.T_exhaust
    steam = vapour(p2, T)
    c = velocity(si["sample_flow"], si["exhaust_bore"], steam.v)
    pipe = part(si, ("exhaust_length",), lambda: exhaust_pipe(
        si["sample_flow"], si["exhaust_bore"], si["exhaust_length"], point.p_discharge, T, roughness=si["roughness"],
        loss_coefficient=si["loss_coefficient"],
        fittings={"elbow 90°, threaded": si["elbows"], "tee, turning": si["tees"]}))
    piped = pipe.value.p_exhaust if pipe and pipe.value.p_exhaust < p else None
    wet = point.x <= 1.0

    def reach(p_exhaust: float | None) -> float | None:
        return None if p_exhaust is None else least_quality(p, p_exhaust, si["least_superheat"], **terms)

    def shown(p_exhaust: float | None) -> float | None:
        return exhaust_temperature(p, point.x_wet, p_exhaust, **terms).superheat if wet and p_exhaust else None

    return Exhaust(c, c / steam.sound_speed, kinetic_energy(c), kinetic_superheat(c, p2, T), kinetic_quality(c, p),
                   least_exhaust_bore(si["sample_flow"], steam.v, p, si["kinetic_error"]), pipe,
                   reach(p2), reach(piped), shown(p2), shown(piped))


def nozzle_of(point: Point) -> Part[Nozzle]:
    """Line velocity, isokinetic ports, and what ports of another size do to the sample."""
    return part(point.si, ("line_flow", "pipe_bore"), lambda: _nozzle(point))


def _nozzle(point: Point) -> Nozzle:
    si, line, x = point.si, point.line, 1.0 - point.wetness
    drawn = None if point.flow is None else point.flow / point.kept  # what the separator drains came through the ports
    rig = {"wetness": 1.0 - x, "p_line": line["p_line"], "line_flow": si["line_flow"], "pipe_bore": si["pipe_bore"]}
    area = part(si, ("sample_flow",), lambda: isokinetic_port_area(drawn, si["line_flow"], si["pipe_bore"]))
    wanted = area and part(si, ("ports",), lambda: float(np.sqrt(4 * area.value / (np.pi * si["ports"]))))
    ports = part(si, ("ports", "port_bore"), lambda: si["ports"] * np.pi / 4 * si["port_bore"] ** 2)
    drops = np.geomspace(0.3e-6, 300e-6, 61)

    def through(port_area, drop) -> SampleBias:
        return sample_bias(sample_flow=drawn, port_area=port_area, port_bore=si["port_bore"], drop_diameter=drop, **rig)

    def entry() -> Entry:
        b = through(ports.value, si["drop_diameter"])
        error = float(sampling_error(point, b.aspiration))
        return Entry(b.port_velocity, b.velocity_ratio, b.stokes, b.aspiration, error)

    curve, compared = None, []
    if ports and area:
        areas = np.array([ports.value, *(ratio * area.value for ratio in RATIOS)])
        curve, *compared = sampling_error(point, through(areas[:, np.newaxis], drops).aspiration)
    entered = part(si, ("sample_flow", "ports", "port_bore", "drop_diameter"), entry)
    return Nozzle(pipe_velocity(si["line_flow"], si["pipe_bore"], line["p_line"], x), area, wanted,
                  ports, entered, drops, curve, tuple(compared))


def sampling_error(point: Point, aspiration, wall_film: float = 0.0):
    """What the quality is wrong by when drops are caught by ``aspiration`` and ``wall_film`` not at all.

    The wetness of the case is that of the sample where it was read, that of the line where it is expected.
    """
    y = point.wetness
    if point.case["question"] == EXPECTED:
        return y - np.asarray(wetness_sampled(y, aspiration, wall_film=wall_film))
    return np.asarray(wetness_in_line(y, aspiration, wall_film=wall_film)) - y
