"""How far a method reaches over two pressures, or over pressure and power: map, sections and the edges of both."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter import (
    Status,
    arriving_quality,
    combined_quality,
    exhaust_pressure_for,
    least_electric_quality,
    power_needed,
    reach_map,
)
from engine.job.assessment.terms import Terms
from engine.job.case.fields_modes import ELECTRIC, SEPARATING
from engine.job.reach.reach import ReachAssessment

SIZE = 300  # points along each axis
P_LINE = (1.2e5, 160e5)  # Pa
P_EXHAUST = (0.05e5, 4e5)
POWER = 5.0e5  # J per kg of sample at the top of the axis of power: more than the wetness of any line here takes


@dataclass(frozen=True)
class MapKey:
    """Everything a map depends on, SI: maps of equal keys are the same, however the cases differ otherwise.

    ``water_share`` and ``vessel_loss`` belong to a separator, ``sample_flow``, ``power_loss`` and ``p_heater``
    (None: the line's) to a heater.
    """

    mode: str
    superheat: float
    terms: Terms
    water_share: float = 0.0
    vessel_loss: float = 0.0
    sample_flow: float = 0.0
    power_loss: float = 0.0
    p_heater: float | None = None


@dataclass(frozen=True)
class WetnessMap:
    """The greatest readable wetness, shape (ordinates, line pressures); NaN where nothing can be read.

    The ordinate is the exhaust pressure [Pa], or the power [W] with a heater. ``dry_edge`` is, along the line
    pressures, the ordinate at which dry steam is just readable: nothing reads beyond it (with a heater below it).
    """

    key: MapKey
    p_line: np.ndarray
    ordinate: np.ndarray
    wetness: np.ndarray
    dry_edge: np.ndarray

    @property
    def by_power(self) -> bool:
        return self.key.mode == ELECTRIC


@dataclass(frozen=True)
class Section:
    """The greatest readable wetness along one axis: readable and, below it, comfortable; NaN where nothing reads."""

    along: np.ndarray
    readable: np.ndarray
    comfortable: np.ndarray


def map_key(plan: ReachAssessment) -> MapKey:
    """What the map of a case depends on."""
    si, mode = plan.si, plan.case["mode"]
    if mode == ELECTRIC:
        return MapKey(mode, plan.least, plan.terms, sample_flow=si["sample_flow"],
                      power_loss=si["power_loss"] or 0.0, p_heater=si["p_heater"])
    if mode == SEPARATING:
        return MapKey(mode, plan.least, plan.terms, si["water_share"], si["vessel_loss"] or 0.0)
    return MapKey(mode, plan.least, plan.terms)


def wetness_map(key: MapKey, size: int = SIZE) -> WetnessMap:
    """The map for a key, a separator standing at line pressure."""
    p_line = np.geomspace(*P_LINE, size)
    if key.mode == ELECTRIC:
        return _power_map(key, p_line, size)
    p_exhaust = np.geomspace(*P_EXHAUST, size)
    edge = exhaust_pressure_for(p_line, 1.0, key.superheat, **key.terms.arguments())
    none = np.where(edge.status == Status.OK, edge.p_exhaust, 0.0)
    return WetnessMap(key, p_line, p_exhaust, _throttled(key, p_line, p_exhaust, key.superheat), none)


def _throttled(key: MapKey, p_line, p_exhaust, superheat: float) -> np.ndarray:
    found = reach_map(p_line, p_exhaust, superheat, **key.terms.arguments())
    wetness = np.where(found.status == Status.OK, found.wetness, np.nan)
    if key.mode != SEPARATING:
        return wetness
    reads = np.isfinite(wetness)
    arriving = arriving_quality(np.where(reads, 1.0 - wetness, 1.0), water_share=key.water_share)
    # at each line pressure the quality of the line is a straight function of that which arrives
    water, steam = (combined_quality(found.p_line, x, water_share=key.water_share, vessel_loss=key.vessel_loss)
                    for x in (0.0, 1.0))
    return np.where(reads, 1.0 - (water + arriving * (steam - water)), np.nan)


def _power_map(key: MapKey, p_line: np.ndarray, size: int) -> WetnessMap:
    p_heater = p_line if key.p_heater is None else np.minimum(p_line, key.p_heater)
    power = key.power_loss + key.sample_flow * np.linspace(POWER / size, POWER, size)
    edge = power_needed(p_line, 1.0, p_heater, key.sample_flow, key.superheat, power_loss=key.power_loss)
    return WetnessMap(key, p_line, power, _heated(key, p_line, p_heater, power[:, None], key.superheat), edge)


def _heated(key: MapKey, p_line, p_heater, power, superheat: float) -> np.ndarray:
    """At each line pressure the least quality is a straight function of the power: two powers give all of them."""
    ends = key.power_loss + key.sample_flow * np.array([0.1 * POWER, POWER])
    first, last = (least_electric_quality(p_line, p_heater, end, key.sample_flow, superheat,
                                          power_loss=key.power_loss) for end in ends)
    x = first + (power - ends[0]) / (ends[1] - ends[0]) * (last - first)
    return np.where(x <= 1.0, np.minimum(1.0 - x, 1.0), np.nan)


def edge_of(found: WetnessMap, wetness: float) -> np.ndarray:
    """Along the line pressures, the ordinate at which ``wetness`` is just readable; NaN where it never is."""
    log = np.log(found.ordinate)
    reads = np.nan_to_num(found.wetness, nan=-1.0) >= wetness
    edge = np.full(found.p_line.size, np.nan)
    for k in np.flatnonzero(reads.any(axis=0) & ~reads.all(axis=0)):
        # a wetness that can be read is read at all lower exhaust pressures, or all higher powers
        last = reads[:, k].argmax() if found.by_power else found.ordinate.size - 1 - reads[::-1, k].argmax()
        other = last - 1 if found.by_power else last + 1
        ends = np.array([last, other])
        y = np.nan_to_num(found.wetness[ends, k], nan=0.0)
        share = 0.0 if y[0] == y[1] else (y[0] - wetness) / (y[0] - y[1])
        edge[k] = np.exp(log[last] + share * (log[other] - log[last]))
    return edge


def sections(plan: ReachAssessment, size: int = SIZE) -> tuple[Section, Section]:
    """Along the line pressure at the exhaust (or power) of the case, and along the other axis at its line pressure."""
    key, si = map_key(plan), plan.si
    levels = (plan.least, plan.comfortable)
    p_line = np.geomspace(*P_LINE, size)
    if key.mode == ELECTRIC:
        h = plan.wet.assessment.heating
        power = key.power_loss + key.sample_flow * np.linspace(POWER / size, POWER, size)
        p_heater = p_line if key.p_heater is None else np.minimum(p_line, key.p_heater)
        return (Section(p_line, *(_heated(key, p_line, p_heater, h.power, level) for level in levels)),
                Section(power, *(_heated(key, si["p_line"], h.p, power, level) for level in levels)))
    p_exhaust = np.geomspace(*P_EXHAUST, size)
    return (Section(p_line, *(_throttled(key, p_line, si["p_exhaust"], level)[0] for level in levels)),
            Section(p_exhaust, *(_throttled(key, si["p_line"], p_exhaust, level)[:, 0] for level in levels)))
