"""What every gauge must show, before steam and when settled, and what it means when one does not."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from engine.calorimeter import WEATHER_HALF_WIDTH
from engine.job.case.fields_path import BY_ALTITUDE
from engine.job.runsheet.plan import FLOW_ALARM, Plan
from engine.job.said import Said

NOTHING, SILENT = Said("–"), Said("")


class Gauge(NamedTuple):
    """A gauge: what it shows before steam and when settled, and between which values all is well then."""

    key: str
    name: str
    before: Said
    settled: Said
    low: Said
    high: Said
    note: Said = SILENT


class Mark(NamedTuple):
    """A temperature on the scale of the deciding thermometer [K], and what a reading there says."""

    key: str
    T: float
    says: str


class Deviation(NamedTuple):
    """What may be seen instead, what it means, and what to do."""

    key: str
    name: str
    seen: Said
    means: Said
    do: Said


def gauges_of(plan: Plan) -> tuple[Gauge, ...]:
    """Every gauge of the rig."""
    return tuple(_gauges(plan))


def _gauges(plan: Plan) -> Iterator[Gauge]:
    si, a = plan.a.si, plan.a
    yield _pressure(plan, "p_line", "Line gauge", before=None, note=Said(
        "before steam the line pressure if it sits on the main, nothing if it sits behind the valve"))
    if not plan.electric:
        at_rest = si.p_barometer if plan.basis["p_exhaust"] == "absolute" else 0.0
        yield _pressure(plan, "p_exhaust", "Exhaust gauge", before=at_rest)
    if plan.separating:
        yield Gauge("p_separator", "Separator gauge", NOTHING, _abs(a.separation.p), NOTHING, _abs(si["p_line"]))
    if plan.electric:
        yield Gauge("p_heater", "Pressure after the heater", NOTHING, _abs(a.heating.p), NOTHING, _abs(si["p_line"]))
        yield Gauge("power", "Power meter", Said("0 W"), Said("{0}", ((a.heating.power, "electric power"),)), NOTHING,
                    NOTHING, Said("steady; it is never on without flow"))
    yield _thermometer(plan)
    yield Gauge("superheat", "… above saturation", NOTHING, _kelvin(a.superheat), _kelvin(a.least_readable),
                _kelvin(plan.T_dry - a.T_saturation) if plan.T_dry is not None else NOTHING,
                Said("from the least that can be read up to dry steam"))
    yield Gauge("T_line", "Thermometer in the line, if there is one", NOTHING, _degrees(a.line.T), NOTHING, NOTHING,
                Said("saturation at the line pressure; hotter is superheated, colder is gas or a wrong gauge"))
    yield _barometer(plan)
    yield Gauge("T_ambient", "Air beside the rig", _degrees(si["T_ambient"]), _degrees(si["T_ambient"]), NOTHING,
                NOTHING)
    if plan.flow is not None:
        yield from _flows(plan)


def _pressure(plan: Plan, name: str, label: str, before: float | None, note: Said = SILENT) -> Gauge:
    shown, basis, play = plan.shown[name], plan.basis[name], plan.play(name)

    def said(value: float) -> Said:
        return Said(f"{{0}} {basis}", ((value, "pressure"),))

    return Gauge(name, label, NOTHING if before is None else said(before), said(shown), said(shown - play),
                 said(shown + play), note)


def _thermometer(plan: Plan) -> Gauge:
    low, high = plan.band or (None, None)
    name = "Thermometer after the heater" if plan.electric else "Exhaust thermometer"
    ends = "from the wettest to the driest steam expected, "
    note = (Said(ends + "and {0} for the thermometer", ((plan.U_thermometer, "difference", 2),)) if plan.U_thermometer
            else Said(ends + "nothing for the thermometer, whose uncertainty is not stated"))
    return Gauge("T_heater" if plan.electric else "T_exhaust", name, _degrees(plan.a.si["T_ambient"]),
                 _degrees(plan.T_expected), NOTHING if low is None else _degrees(low),
                 NOTHING if high is None else _degrees(high), note)


def _barometer(plan: Plan) -> Gauge:
    p = plan.a.si.p_barometer
    said = Said("{0}", ((p, "barometer"),))
    if plan.case["barometer_source"] != BY_ALTITUDE:
        return Gauge("p_barometer", "Barometer", said, said, NOTHING, NOTHING, Said("as entered; read it again"))
    low, high = (Said("{0}", ((p + way * WEATHER_HALF_WIDTH, "barometer"),)) for way in (-1, 1))
    return Gauge("p_barometer", "Barometer", said, said, low, high, Said("from the altitude, weather either way"))


def _flows(plan: Plan) -> Iterator[Gauge]:
    def said(value: float) -> Said:
        return Said("{0}", ((value, "mass flow"),))

    low, high = ((1 + way * FLOW_ALARM) * plan.flow for way in (-1, 1))
    name = "Throttled steam, weighed" if plan.separating else "Sample flow, weighed"
    yield Gauge("sample_flow", name, said(0.0), said(plan.flow), said(low), said(high))
    if plan.separating:
        yield Gauge("drained", "Drained water, weighed", said(0.0), said(plan.drawn - plan.flow), NOTHING, NOTHING)


def _abs(p: float) -> Said:
    return Said("{0} abs", ((p, "pressure"),))


def _degrees(T: float) -> Said:
    return Said("{0}", ((T, "temperature"),))


def _kelvin(difference: float) -> Said:
    return Said("{0}", ((difference, "difference"),))


def marks_of(plan: Plan) -> tuple[Mark, ...]:
    """The scale of the deciding thermometer from wet to dry, rising."""
    marks = [Mark("saturation", plan.a.T_saturation, "saturation: wet, nothing can be told"),
             Mark("least", plan.T_least, "the least that can be read"),
             Mark("comfortable", plan.T_comfortable, "from here on the margin is comfortable")]
    if plan.readable:
        marks.append(Mark("expected", plan.T_expected, "the wetness expected"))
    if plan.reach:
        ends = (("wettest", plan.reach.value.wet), ("driest", plan.reach.value.dry))
        marks += [Mark(key, end.T, f"the {key} steam expected") for key, end in ends if end.superheat > 0]
    if plan.T_dry is not None:
        marks.append(Mark("dry", plan.T_dry, "dry steam: above it the line is superheated"))
    return tuple(sorted(marks, key=lambda mark: mark.T))


def deviations_of(plan: Plan) -> tuple[Deviation, ...]:
    """What else may be seen, in the order of how much it spoils."""
    found = (_saturated(plan), _thin(plan), _back_pressure(plan), _flow(plan), _line_superheated(plan), _slug(plan),
             _swings(plan), *_of_separator(plan), *_of_heater(plan))
    return tuple(d for d in found if d is not None)


def _saturated(plan: Plan) -> Deviation:
    what = "steam after the heater" if plan.electric else "exhaust"
    do = ("More power or less flow; until then there is nothing to write down." if plan.electric else
          "Check both pressures and the warm-up. If it stays, this steam is too wet for the throttle: only “below {0}” "
          "can be reported.")
    bound = plan.a.x_least
    facts = () if plan.electric or bound > 1 else ((bound, "fraction"),)
    if not plan.electric and bound > 1:
        do = "Check both pressures and the warm-up. If it stays, nothing can be reported with this rig."
    return Deviation("saturated", f"The {what} stays at saturation",
                     Said("The thermometer sits at {0} and does not follow the steam.",
                          ((plan.a.T_saturation, "temperature"),)),
                     Said(f"The {what} is wet. Its temperature says the pressure, not the quality."), Said(do, facts))


def _thin(plan: Plan) -> Deviation:
    return Deviation("thin", "Too little superheat",
                     Said("The thermometer stays below {0}, or below {1} for comfort.",
                          ((plan.T_least, "temperature"), (plan.T_comfortable, "temperature"))),
                     Said("Less than {0} above saturation wet steam may pass for superheated.",
                          ((plan.a.least_readable, "difference"),)),
                     Said("More power, or a smaller flow." if plan.electric else
                          "Free the exhaust and lower its pressure; see that the lagging is dry; wait for the warm-up. "
                          "Then a separator, or another method."))


def _back_pressure(plan: Plan) -> Deviation | None:
    if plan.electric:
        return None
    basis, shown, play = plan.basis["p_exhaust"], plan.shown["p_exhaust"], plan.play("p_exhaust")
    most, p2 = plan.p_exhaust_most, plan.a.si["p_exhaust"]
    means = Said("The exhaust is held back: hose, bend, water in it.")
    if most is not None and most > p2:
        means = Said(means.sentence + f" From {{0}} {basis} on the wettest steam expected can no longer be read.",
                     ((shown + most - p2, "pressure"),))
    return Deviation("back_pressure", "Back pressure",
                     Said(f"The exhaust gauge shows more than {{0}} {basis}.", ((shown + play, "pressure"),)),
                     means, Said("Shorten or widen the exhaust, drain it, straighten it. Never read without the "
                                 "exhaust pressure at the thermometer."))


def _flow(plan: Plan) -> Deviation:
    creeps = f"and the temperature creeps {'up' if plan.electric else 'down'}."
    seen = Said(f"The sample weighs less from run to run, {creeps}")
    if plan.flow is not None:
        seen = Said(f"The sample weighs less than {{0}}, {creeps}", (((1 - FLOW_ALARM) * plan.flow, "mass flow"),))
    means = Said("The orifice or the nozzle is clogging, or a valve has moved." if not plan.electric else
                 "The sampling line is clogging, or a valve has moved.")
    error = plan.error_at_alarm
    if error is not None:
        means = Said(means.sentence + " Each kilogram then loses more heat: unnoticed, {0} less flow makes the quality "
                     "{1} wrong.", ((FLOW_ALARM, "percent"), (error, "signed points")))
    return Deviation("flow", "Falling sample flow", seen, means,
                     Said("Weigh again. If it is so, end the run; isolate, and clean the orifice before the next." if
                          not plan.electric else "Power off, then weigh again. Find the cause before the next run."))


def _line_superheated(plan: Plan) -> Deviation:
    seen = Said("The thermometer shows more than dry steam would.") if plan.T_dry is None else Said(
        "The thermometer shows more than {0}, and one in the line more than {1}.",
        ((plan.T_dry, "temperature"), (plan.a.line.T, "temperature")))
    return Deviation("superheated", "Line superheated", seen,
                     Said("There is no wetness to measure, or a pressure was meant otherwise: gauge for absolute."),
                     Said("Check both pressures and the thermometer. If they are right, report the superheat."))


def _slug(plan: Plan) -> Deviation:
    wait = ("and wait until all is settled again." if plan.back_to_settled is None else
            "and wait {0} from the last one before the next set.")
    facts = () if plan.back_to_settled is None else ((plan.back_to_settled, "time", 0),)
    return Deviation("slug", "Slug of water",
                     Said("The temperature falls to {0} at once and comes back slowly.",
                          ((plan.a.T_saturation, "temperature"),)),
                     Said("Water had gathered ahead of the nozzle. What was read then is not the line's quality."),
                     Said(f"Stand clear: slugs hammer. Mark the sets, {wait} If it comes again, the tapping is in the "
                          "wrong place.", facts))


def _swings(plan: Plan) -> Deviation:
    share = plan.a.si["steady_p_line"]
    moved = plan.moved_by_line(share)
    means = Said("The load swings. The body lags behind the steam, so the two are not of one moment.")
    if moved is not None:
        means = Said("The load swings. A line pressure {0} higher moves the thermometer by {1} at the same quality, "
                     "and the body makes it late.",
                     ((plan.play("p_line"), "pressure difference"), (moved, "difference", 2)))
    return Deviation("swings", "Pressure swings",
                     Said("The line pressure leaves ± {0} about its mean.",
                          ((plan.play("p_line"), "pressure difference"),)),
                     means, Said("Look at gauge and unit first. Then ask for a steady load; take more sets, and "
                                 "whole swings; do not pick the calm moments."))


def _of_separator(plan: Plan) -> Iterator[Deviation]:
    if plan.separating:
        yield Deviation("level", "Separator full or blown through",
                        Said("Its level is out of the glass, or no water comes where {0} of the sample is expected.",
                             ((plan.drained, "percent"),)),
                        Said("Water goes on to the orifice, or steam out of the drain: both masses are wrong."),
                        Said("Regulate the drain, wait, and weigh both anew over the same time."))


def _of_heater(plan: Plan) -> Iterator[Deviation]:
    if plan.electric:
        yield Deviation("no_flow", "Flow stops with the power on",
                        Said("The thermometer climbs past {0} without end.",
                             ((plan.T_dry if plan.T_dry is not None else plan.T_expected, "temperature"),)),
                        Said("The heater is running dry."), Said("Power off at once. Do not admit steam to it until it "
                                                                 "has cooled."))
