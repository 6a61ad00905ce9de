"""What each part of the rig does to the quality: one list, largest first.

The size of an effect is **what the quality is wrong by where it is left out**, negative when the steam then
reads wetter than it is. Each is found by reducing the reading twice, with the effect and without.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from engine.calorimeter import WEATHER_HALF_WIDTH, water_leg
from engine.job.case import GAUGE, T_LEG
from engine.job.case.fields import FIELDS
from engine.job.case.fields_path import BY_ALTITUDE, BY_CONDUCTANCE, BY_KG, BY_NORMAL, NONE, UNDECIDED
from engine.job.rig.flow import Exhaust, Flow, Nozzle, sampling_error
from engine.job.rig.heat import BY_GEOMETRY, Loss, Thermometer, WarmingUp
from engine.job.rig.point import Part, Point, Reading, shares
from engine.steam.units import P_STANDARD, UnitSystem, from_si

DISCHARGE_DOUBT = 0.05  # by so much a discharge coefficient out of a table may be off (common practice)
SAME_PRESSURE = 100.0  # Pa: exhaust pressures closer than this, or than a tenth of the back pressure, agree
Fact = tuple[float, str] | tuple[float, str, int]


@dataclass(frozen=True)
class Effect:
    """One effect on the quality.

    size        what the quality is wrong by where it is left out, a part of 1; None where it cannot be told
    own         the same in the effect's own unit: (SI value, kind of unit); None where it has none
    corrected   whether the answer of the case already has it taken out
    either_way  the sign is not known: ``size`` is a half width
    sentence    what it comes from, with places for ``facts``: (SI value, kind, decimals)
    trouble     what is missing, where there is no size
    """

    name: str
    size: float | None
    own: Fact | None = None
    corrected: bool = False
    sentence: str = ""
    facts: tuple[Fact, ...] = ()
    either_way: bool = False
    trouble: str = ""

    @property
    def size_pt(self) -> float | None:
        """The size in percentage points of quality."""
        return None if self.size is None else 100.0 * self.size

    @property
    def direction(self) -> str:
        """How the steam reads where the effect is left out."""
        if self.size is None or self.size == 0.0:
            return ""
        return "either way" if self.either_way else "wetter" if self.size < 0 else "drier"

    def in_its_own_unit(self, units: UnitSystem) -> str:
        """The size in the effect's own unit, for a reader who uses ``units``."""
        return told(self.own, units) if self.own else ""

    def words(self, units: UnitSystem) -> str:
        """The sentence with its numbers."""
        return self.sentence.format(*(told(fact, units) for fact in self.facts))


def told(fact: Fact, units: UnitSystem) -> str:
    """A fact as text: value and unit."""
    value, kind, *decimals = fact
    if kind == "drop":
        return f"{from_si(value, 'µm', 'length'):.3g} µm"
    return units.text(value, kind, *decimals)


@dataclass(frozen=True)
class _Pair:
    """An effect to be sized: the reading with it left out, and the reading with it taken in."""

    effect: Effect
    wrong: Reading
    right: Reading


Found = Iterator[Effect | _Pair]


def effects_of(point: Point, flow: Part[Flow], exhaust: Part[Exhaust], nozzle: Part[Nozzle],
               losses: dict[str, Part[Loss]], thermometer: Thermometer,
               warming: Part[WarmingUp]) -> tuple[Effect, ...]:
    """Every effect, largest first; those without a size last."""
    found = [*_heat(point, losses), *_kinetic(point, exhaust, nozzle), *_back_pressure(point, exhaust),
             *_thermometer(point, thermometer), *_sampling(point, nozzle), *_gauges(point),
             *_warm_up(point, warming), *_flow(point, flow)]
    pairs = [f for f in found if isinstance(f, _Pair)]
    sizes = iter(point.kept * np.reshape(shares([r for pair in pairs for r in (pair.wrong, pair.right)]), (-1, 2)))
    effects = [_sized(f.effect, next(sizes)) if isinstance(f, _Pair) else f for f in found]
    return tuple(sorted(effects, key=lambda e: -1.0 if e.size is None else abs(e.size), reverse=True))


def _sized(effect: Effect, pair: np.ndarray) -> Effect:
    wrong, right = (float(x) for x in pair)
    if np.isnan(wrong - right):
        return replace(effect, trouble="With it the exhaust would not be superheated: nothing could be read.")
    return replace(effect, size=abs(wrong - right) if effect.either_way else wrong - right)


def _heat(point: Point, losses: dict[str, Part[Loss]]) -> Found:
    method, name = point.entered["heat_loss_method"], "Heat loss"
    chosen = losses.get(point.case["heat_loss_method"])
    if not chosen or method != point.case["heat_loss_method"]:
        best = losses[BY_GEOMETRY] or losses[BY_CONDUCTANCE]
        if not best:
            yield Effect(name, None, trouble=losses[BY_GEOMETRY].trouble)
            return
        by = BY_GEOMETRY if losses[BY_GEOMETRY] else "the conductance entered"
        why = ("it is left out knowingly" if method == NONE else
               "how to account for it is not decided" if method == UNDECIDED else "the way chosen lacks something")
        yield _loss(name, best.value, False, f"The sample loses {{0}} by {by}; {why}.")
        return
    corrected = not (point.flow_computed and method == BY_CONDUCTANCE)  # the case itself has no flow for it yet
    yield _loss(name, chosen.value, corrected, f"The sample loses {{0}}, by {_SAID.get(method, method)}.")
    if method in (BY_CONDUCTANCE, BY_KG):
        yield _beyond(point, losses[BY_GEOMETRY], chosen.value)


def _beyond(point: Point, geometry: Part[Loss], taken: Loss) -> Effect | _Pair:
    """What dimensions and lagging say beyond the loss that is taken off."""
    name = "Heat loss beyond the correction"
    if not geometry:
        return Effect(name, None, trouble=geometry.trouble)
    said, r = geometry.value.heat_loss, point.reading
    return _Pair(Effect(name, None, (said - taken.heat_loss, "enthalpy", 2), False,
                        "Dimensions and lagging say {0}, where {1} is taken off.",
                        ((said, "enthalpy", 2), (taken.heat_loss, "enthalpy", 2))),
                 r, replace(r, heat_loss=r.heat_loss + said - taken.heat_loss))


_SAID = {BY_CONDUCTANCE: "the conductance UA", BY_KG: "the value per kg", BY_NORMAL: "a normal reading"}


def _loss(name: str, loss: Loss, corrected: bool, sentence: str) -> Effect:
    own, lost = (loss.kelvin, "difference", 2), (loss.heat_loss, "enthalpy")
    return Effect(name, -loss.quality, own, corrected, sentence, (lost,))


def _kinetic(point: Point, exhaust: Part[Exhaust], nozzle: Part[Nozzle]) -> Found:
    name = "Velocity at the thermometer"
    if exhaust:
        c = point.reading.exhaust_velocity
        yield _Pair(Effect(name, None, (c, "velocity"), not point.flow_computed,
                           "The exhaust passes the thermometer at {0}; it takes up the share {1} of that energy, the "
                           "recovery factor.", ((c, "velocity"), (point.reading.recovery, "number", 2))),
                    point.variant(exhaust_bore=None), point.reading)
    else:
        yield Effect(name, None, trouble=exhaust.trouble)
    name, entered = "Velocity in the line", point.si["line_velocity"]
    known = entered if entered is not None else nozzle.value.line_velocity if nozzle else None
    if known is None:
        yield Effect(name, None, trouble=nozzle.trouble.replace("Enter ", "Enter the line velocity, or ", 1))
        return
    yield _Pair(Effect(name, None, (known, "velocity"), entered is not None,
                       "The line steam brings its own kinetic energy, at {0}.", ((known, "velocity"),)),
                point.variant(line_velocity=None), point.variant(line_velocity=known))


def _back_pressure(point: Point, exhaust: Part[Exhaust]) -> Found:
    name = "Back pressure of the exhaust"
    pipe = exhaust.value.pipe if exhaust else exhaust
    if not pipe:
        yield Effect(name, None, trouble=pipe.trouble)
        return
    here, piped, outside = point.si["p_exhaust"], pipe.value.p_exhaust, point.p_discharge
    if not piped < point.si["p_line"]:
        yield Effect(name, None, trouble="The pipe as described would hold back line pressure: check bore and flow.")
        return
    own = (piped - outside, "pressure difference")
    right = point.variant(p_exhaust=piped)
    if abs(here - piped) <= max(SAME_PRESSURE, 0.1 * (piped - outside)):
        yield _Pair(Effect(name, None, own, True, "The pipe holds back {0}, and the case has that pressure.", (own,)),
                    point.variant(p_exhaust=outside), right)
    else:
        yield _Pair(Effect(name, None, (here - piped, "pressure difference"), False,
                           "The pipe as described makes {0} abs at the thermometer; the case has {1} abs.",
                           ((piped, "pressure", 4), (here, "pressure", 4))), point.reading, right)


def _thermometer(point: Point, t: Thermometer) -> Found:
    wall = (t.T_wall, "temperature")
    computed = ", found from the heat loss of the body" if t.wall_computed else ""
    rows = [("Immersion of the thermometer", t.immersion, "Heat runs along the stem to its head, at {0}.",
             ((point.si["T_head"], "temperature"),)),
            ("Radiation to the wall", t.radiation, f"The probe sees a wall at {{0}}{computed}.", (wall,))]
    if t.stem is not None:
        rows.append(("Emergent stem", t.stem, "{0} of the column stand out at {1}.",
                     ((point.si["exposed"], "difference", 0), (point.si["T_stem"], "temperature"))))
    normal = point.case["heat_loss_method"] == BY_NORMAL
    for name, error, sentence, facts in rows:
        if not error:
            yield Effect(name, None, trouble=error.trouble)
            continue
        cancels = " The normal reading has the same error in it, so it cancels." if normal else ""
        yield _Pair(Effect(name, None, (error.value, "difference", 2), False, sentence + cancels, facts),
                    point.reading, point.variant(shift=-error.value))


def _sampling(point: Point, nozzle: Part[Nozzle]) -> Found:
    entry = nozzle.value.entry if nozzle else nozzle
    name = "Nozzle entry"
    if entry:
        e = entry.value
        ratio = (e.velocity_ratio, "number", 2)
        yield Effect(name, e.error, ratio, False,
                     "The line passes the ports at {0} times the velocity in them; of the drops of {1} in their way "
                     "they catch {2} times as many.",
                     (ratio, (point.si["drop_diameter"], "drop"), (e.aspiration, "number", 2)))
    else:
        yield Effect(name, None, trouble=entry.trouble)
    name, film, y = "Water on the wall", point.si["wall_film"], point.wetness
    if film is None:
        yield Effect(name, None, trouble=f"Enter {FIELDS['wall_film'].label.lower()}.")
    else:
        yield Effect(name, float(sampling_error(point, 1.0, film)), (film, "fraction", 2), False,
                     "The part {0} of the water runs on the wall and is not sampled.", ((film, "fraction", 2),))
    drained, line_flow = point.si["drip_flow"], point.si["line_flow"]
    if drained and line_flow:
        share = drained / (line_flow + drained)
        yield Effect("Water drained ahead", (1.0 - y) * share, (drained, "mass flow"), False,
                     "{0} of water leave the line ahead of the nozzle, {1} of its flow.",
                     ((drained, "mass flow"), (share, "fraction", 5)))
    elif drained:
        yield Effect("Water drained ahead", None, trouble=f"Enter {FIELDS['line_flow'].label.lower()}.")


def _gauges(point: Point) -> Found:
    si, leg = point.si, point.si["leg_height"]
    if leg:
        head = water_leg(leg, T_LEG)
        yield _Pair(Effect("Water leg of the gauge", None, (head, "pressure difference"), True,
                           "Water in the leg of the line gauge adds {0} to it.", ((head, "pressure difference"),)),
                    point.variant(p_line=si["p_line"] + head), point.reading)
    if GAUGE not in (point.case["p_line"].basis, point.case["p_exhaust"].basis):
        return
    if point.case["barometer_source"] == BY_ALTITUDE:
        own = (WEATHER_HALF_WIDTH, "pressure difference")
        yield _Pair(Effect("Weather", None, own, False, "The barometer is that of the altitude; weather moves the real "
                           "one by {0} either way.", (own,), True),
                    _other_barometer(point, WEATHER_HALF_WIDTH), point.reading)
    else:
        own = (P_STANDARD - si.p_barometer, "pressure difference")
        yield _Pair(Effect("Barometer", None, own, True, "From the standard atmosphere at sea level the barometer "
                           "differs by {0}.", (own,)), _other_barometer(point, own[0]), point.reading)


def _other_barometer(point: Point, off: float) -> Reading:
    """The reading with a barometer that differs by ``off`` [Pa]: it moves what was entered as gauge."""
    gauge = {name: off if point.case[name].basis == GAUGE else 0.0 for name in ("p_line", "p_exhaust")}
    return point.variant(**{name: point.si[name] + moved for name, moved in gauge.items()})


def _warm_up(point: Point, warming: Part[WarmingUp]) -> Found:
    name = "Warm-up"
    if not warming:
        yield Effect(name, None, trouble=warming.trouble)
        return
    error = point.si["warmup_error"]
    yield _Pair(Effect(name, None, (-error, "difference", 2), False,
                       "Read from {0} after the start on, the body still takes {1} off the reading.",
                       ((warming.value.ready, "time", 0), (error, "difference", 2))),
                point.reading, replace(point.reading, T_exhaust=point.reading.T_exhaust + error))


def _flow(point: Point, flow: Part[Flow]) -> Found:
    """A flow out of bore and coefficient is doubtful; it acts through heat loss and velocity."""
    if not flow or not (point.flow_computed or point.case["flow_source"] != "weighed"):
        return
    doubt = 1.0 + DISCHARGE_DOUBT / point.si["discharge"]
    yield _Pair(Effect("Sample flow not weighed", None, (point.flow * (doubt - 1.0), "mass flow"), False,
                       "A coefficient off by {0} moves the computed flow by {1}, and with it heat loss and velocity.",
                       ((DISCHARGE_DOUBT, "number", 2), (point.flow * (doubt - 1.0), "mass flow")), True),
                point.variant(sample_flow=point.flow * doubt), point.reading)
