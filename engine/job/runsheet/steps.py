"""The procedure as steps to tick, from the hold points to the close-down, each with the numbers of this rig.

A step's ``key`` never changes: ticks in a case refer to it. What a number needs and does not have is
said beside the step instead of being guessed.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from engine.calorimeter import MassBasis
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import NOT_STATED
from engine.job.case.fields_path import BY_ALTITUDE, BY_NORMAL, BY_TWO_FLOWS
from engine.job.case.fields_rig import BARE
from engine.job.case.fields_runsheet import GAS_NOTED
from engine.job.runsheet.plan import BLOW_FROM, BLOW_TO, FLOW_ALARM, WITHIN, Plan
from engine.job.said import Said
from engine.job.uncertainty import leg_pressure


@dataclass(frozen=True)
class Step:
    """One thing to do. ``missing`` says which number it lacks, and what to enter for it."""

    key: str
    said: Said
    missing: str = ""


@dataclass(frozen=True)
class Section:
    """A part of the procedure. ``hold``: nothing after it starts before all of it is ticked."""

    key: str
    title: str
    steps: tuple[Step, ...]
    hold: bool = False


def sections_of(plan: Plan) -> tuple[Section, ...]:
    """The whole procedure in the order in which it is done."""
    parts = (("hold", "Hold points: before anything is touched", _hold),
             ("setup", "Set-up of this rig", _setup), ("checks", "Checks before steam", _checks),
             ("blow", "Drain and blow down", _blow), ("warm", "Warm up", _warm), ("settle", "Settled?", _settle),
             ("read", "Readings", _read), ("normal", "Normal reading", _normal), ("close", "Close down", _close))
    made = (Section(key, title, tuple(_keyed(key, steps(plan))), key == "hold") for key, title, steps in parts)
    return tuple(section for section in made if section.steps)


Found = Iterator[tuple[str, Said] | tuple[str, Said, str]]


def _keyed(section: str, found: Found) -> Iterator[Step]:
    for name, *rest in found:
        yield Step(f"{section}.{name}", *rest)


def _hold(plan: Plan) -> Found:
    a = plan.a
    yield "permit", Said("The site's permit for this work is issued, and its limits are known to everyone here. "
                         "This sheet gives no permission; where permit, site rules or local code say otherwise, they "
                         "hold.")
    yield "risks", Said("The risks of this tapping have been gone through on the spot: access, footing, escape, who is "
                        "below, weather, light.")
    yield "authorised", Said("The person authorised for this steam system is here and opens and closes every valve; "
                             "nobody else does.")
    yield "second", Said("A second person is present. Anyone may stop the test. The emergency isolation is known and "
                         "can be reached without passing the plume.")
    yield "isolated", Said("Until the rig stands: tapping isolated, vented, drained, proved dead, locked and tagged. "
                           "If a valve passes, the work ends here.")
    yield "rated", Said("Tapping, nozzle, valve and sampling line have the ratings of the line, never less "
                        "than {0} abs and {1}, and are inspected; nothing on them is improvised.",
                        ((a.si["p_line"], "pressure"), (a.line.T, "temperature")))
    yield "exhaust", _leaves(plan)
    yield "clothing", Said("Face shield over goggles, heat-resistant gauntlets, long sleeves, boots that hold no "
                           "water, helmet, hearing protection: the jet cannot be seen, and the orifice is loud.")
    if plan.case["gas_hazard"] == GAS_NOTED:
        yield "gas", Said("Gas: personal monitors on and tested, work from the upwind side, rules for breathing air "
                          "known, nobody alone. An alarm ends the test.")
    if plan.electric:
        yield "electric", Said("The heater is earthed, on a residual-current device, and switched off by its own "
                               "cut-out when the sample stops flowing.")
    yield "agreed", _agreed(plan)


def _leaves(plan: Plan) -> Said:
    said = (_TO_VESSEL if plan.to_vessel else
            "The exhaust leads to a safe place, away from people, walkways, cables and air intakes; it is restrained, "
            "drained at its low point, and has neither valve nor cap. The plume is fenced off.")
    if plan.heat_out is None:
        return Said(said)
    return Said(said + " {0} of sample carry {1} of heat with them.",
                ((plan.flow, "mass flow"), (plan.heat_out, "heat")))


_TO_VESSEL = ("The vessel that takes the exhaust has its cooling on, its drain open and a relief of its own; the body "
              "is rated for whatever pressure can build up if cooling fails. Nothing between the two can be shut.")


def _agreed(plan: Plan) -> Said:
    si = plan.a.si
    readings = "{0} runs of {1} sets, and what makes a reading be left out"
    facts = ((plan.runs, "count"), (plan.sets, "count"))
    if si["x_limit"] is None:
        return Said(f"Agreed in writing before the first reading: {readings}. No limit is set for the quality.", facts)
    rule = plan.case["decision_rule"]
    risk = " at {3}" if rule == "guarded by risk" else ""
    return Said(f"Agreed in writing before the first reading: the quality must be {plan.case['limit_side']} {{2}}, "
                f"decided by the rule “{rule}”{risk}; {readings}.",
                (*facts, (si["x_limit"], "fraction"), (si["decision_risk"], "percent")))


def _setup(plan: Plan) -> Found:
    si, nozzle = plan.a.si, plan.of_rig("nozzle")
    yield "tapping", Said("The tapping is where the steam is to be judged, in a vertical run if there is one, not "
                          "behind a bend, in a pocket or at the low end of a long run.")
    entry = nozzle.value.entry if nozzle else nozzle
    if entry:
        yield "nozzle", Said("Nozzle across the pipe, its {0} ports of {1} facing the flow. The line passes them at "
                             "{2} times the velocity in them; equal velocities would take {3} of port area.",
                             ((si["ports"], "count"), (si["port_bore"], "bore"),
                              (entry.value.velocity_ratio, "number", 2), (nozzle.value.isokinetic_area.value, "area")))
    else:
        yield "nozzle", Said("Nozzle across the pipe, its ports facing the flow."), entry.trouble
    yield "sampling", (Said("Sampling line {0} to the orifice, without pockets, lagged; its valve of full bore.",
                            ((si["sampling_length"], "dimension"),)) if si["sampling_length"] else
                       Said("Sampling line as short as it can be, without pockets, lagged; its valve of full bore."))
    if plan.electric:
        yield "heater", Said("Heater and power meter connected; nothing is throttled on the way to it.")
    else:
        yield "orifice", *_orifice(plan)
        yield "exhaust", *_exhaust(plan)
    if plan.separating:
        yield "separator", _separator(plan)
    yield "lagging", _lagging(plan)
    yield "thermometer", *_thermometer(plan)
    if si["leg_height"]:
        yield "leg", Said("Line gauge {0} below its tapping, its leg full of cold water: that adds {1} to it.",
                          ((si["leg_height"], "height"), (leg_pressure(si), "pressure difference")))
    yield "weigh", _weighing(plan)


def _orifice(plan: Plan) -> tuple[Said, str]:
    flow = plan.of_rig("flow")
    if not flow:
        return Said("Orifice clean, its bore measured, its edge as drawn."), flow.trouble
    return Said("Orifice of {0} clean, its edge as drawn. By its bore it passes {1}.",
                ((plan.a.si["bore"], "bore"), (flow.value.orifice.computed, "mass flow"))), ""


def _exhaust(plan: Plan) -> tuple[Said, str]:
    si, piped = plan.a.si, plan.p_exhaust_piped
    free = ("Exhaust pipe to the vessel tight, no valve in it, draining" if plan.to_vessel else
            "Exhaust pipe free to its end, no valve in it, draining")
    if piped is None:
        exhaust = plan.of_rig("exhaust")
        return Said(f"{free}."), exhaust.value.pipe.trouble if exhaust else exhaust.trouble
    return Said(free + ": {0} bore, {1} after the thermometer. It makes {2} abs at the thermometer.",
                ((si["exhaust_bore"], "length"), (si["exhaust_length"], "height"), (piped, "pressure"))), ""


def _separator(plan: Plan) -> Said:
    s = plan.a.separation
    least = "" if s.drain_least is None else " At least {1} have to be, so that the rest can be read."
    facts = ((s.drain_fraction, "percent"),) + (() if s.drain_least is None else ((s.drain_least, "percent"),))
    return Said("Separator ahead of the orifice, lagged, its drain cooled and closed by a level: expect {0} of the "
                "sample to be drained as water." + least, facts)


def _lagging(plan: Plan) -> Said:
    si, state = plan.a.si, plan.case["lagging_state"]
    where = "body, sampling line and head of the thermometer"
    if state == BARE:
        return Said(f"The rig is planned without lagging: {where} bare. Lagging it would spare most of the heat loss.")
    if si["lagging"]:
        return Said(f"Lagging of {{0}} on {where}, dry: wet lagging loses several times as much.",
                    ((si["lagging"], "dimension"),))
    return Said(f"Lagging on {where}, dry: wet lagging loses several times as much.")


def _thermometer(plan: Plan) -> tuple[Said, str]:
    si, plain = plan.a.si, "Thermometer in the middle of the stream, its pocket clean, its head lagged."
    if si["immersion"] is None:
        return Said(plain), f"Enter {FIELDS['immersion'].label.lower()}."
    thermometer = plan.of_rig("thermometer")
    good = thermometer.value.immersion_good if thermometer else thermometer
    if not good:
        return Said("Thermometer immersed {0} in the stream, its pocket clean, its head lagged.",
                    ((si["immersion"], "dimension"),)), good.trouble
    return Said("Thermometer immersed {0} in the stream, where {1} are enough against heat along its stem; pocket "
                "clean, head lagged.", ((si["immersion"], "dimension"), (good.value, "dimension"))), ""


def _weighing(plan: Plan) -> Said:
    if not plan.separating:
        return Said("Cooled bucket with a lid, scales and stopwatch ready to weigh the condensed sample; the end of "
                    "the hose tied down.")
    basis = plan.case["weighed_basis"]
    weighed = {MassBasis.THROTTLED: "the throttled steam, condensed, by itself",
               MassBasis.TOTAL: "all that is collected, with the drained water in it",
               NOT_STATED: "— agree now which: the throttled steam by itself, or all together —"}[basis]
    return Said(f"Two cooled buckets with lids, scales and stopwatch ready: drained water by its "
                f"{plan.case['water_by']}, and beside it {weighed}, over the same time.")


def _checks(plan: Plan) -> Found:
    si = plan.a.si
    yield "certificates", Said("Certificates in date; numbers of the instruments written down.")
    yield "ice", Said("Thermometer checked at the ice point, and at the steam point if it can be; differences noted.")
    if not plan.electric:
        zero = ("zero" if plan.basis["p_exhaust"] == "gauge" else "the barometer, {0} abs,")
        facts = () if plan.basis["p_exhaust"] == "gauge" else ((si.p_barometer, "barometer"),)
        yield "zero", Said(f"Exhaust gauge vented: it shows {zero} or its difference is noted.", facts)
    if plan.case["barometer_source"] == BY_ALTITUDE:
        yield "barometer", Said("Barometer read on the spot, not reduced to sea level. Without one, the standard "
                                "atmosphere at {0} is {1}.",
                                ((si["altitude"], "height"), (si.p_barometer, "barometer")))
    else:
        yield "barometer", Said("Barometer read on the spot, not reduced to sea level: the case has {0}.",
                                ((si.p_barometer, "barometer"),))
    yield "clocks", Said("Clocks of loggers and of people agree. Control room told: load and feed steady, changes "
                         "announced.")


def _blow(plan: Plan) -> Found:
    yield "drain", Said("Tapping and sampling line drained first. Steam never goes onto standing water: open slowly, "
                        "listen; if it bangs, shut, stand back, and find out why.")
    span = ((BLOW_FROM, "time", 0), (BLOW_TO, "time", 0))
    yield "tapping", Said("Tapping and nozzle blown to the safe place for {0} to {1}, until they run clear.", span)
    yield "rig", Said("Steam through the whole rig, exhaust free, valve opened little by little.")
    if plan.electric:
        yield "power", Said("Power on only now that the sample flows, and raised to {0} in steps.",
                            ((plan.a.heating.power, "electric power"),))


def _warm(plan: Plan) -> Found:
    yield "open", Said("Sampling valve fully open; nobody touches it from here to the end of the runs.")
    w = plan.warming
    if w:
        si, run = plan.a.si, w.value.run
        yield "wet", Said("At first the metal condenses the steam: the thermometer stays at {0} for about {1}.",
                          ((plan.a.T_saturation, "temperature"), (run.time_condensing, "seconds")))
        yield "wait", Said("Wait {0}. Read earlier, the body still takes more than {1} off the reading; it nears its "
                           "end with a time constant of {2}.",
                           ((w.value.ready, "time", 0), (si["warmup_error"], "difference", 2),
                            (run.time_constant, "time")))
    else:
        yield "wait", Said("Wait until the thermometer has stopped rising, and then as long again."), w.trouble
    if plan.flow is None:
        yield "flow", Said("Weigh the sample flow."), f"Enter {FIELDS['sample_flow'].label.lower()}, or the orifice."
    else:
        length = plan.a.si["steady_window"]
        yield "flow", Said("Weigh the sample: over {0} expect {1}, which is {2}.",
                           ((length, "time", 0), (plan.flow * length, "mass", 2), (plan.flow, "mass flow")))


def _settle(plan: Plan) -> Found:
    si, a = plan.a.si, plan.a
    yield "gauges", Said("Every gauge shows what the table of gauges asks of it when settled, within its band.")
    yield "rate", Said("Over the last {0} the temperature moved by less than {1} and scattered by less than {2}.",
                       ((si["steady_window"], "time", 0), (si["steady_rate"], "rate"),
                        (si["steady_scatter"], "difference")))
    yield "line", Said("Line pressure within ± {0} of its mean.", ((plan.play("p_line"), "pressure difference"),))
    if not plan.electric:
        yield "pressure", Said("Exhaust pressure within ± {0} of its mean.",
                               ((plan.play("p_exhaust"), "pressure difference"),))
    yield "superheat", Said("Temperature above {0}, that is {1} over saturation; better above {2}.",
                            ((plan.T_least, "temperature"), (a.least_readable, "difference"),
                             (plan.T_comfortable, "temperature")))
    if plan.electric:
        yield "power", Said("Power and sample flow have not moved either.")
    elif not plan.to_vessel:
        yield "dry", Said("Seen from the side and from a distance: no water at the mouth of the exhaust, and the jet "
                          "clear for a hand's breadth before it turns white.")


def _read(plan: Plan) -> Found:
    yield "sets", Said("A set every {0}: all gauges within {1}, the thermometer first and last.",
                       ((plan.a.si["read_every"], "interval"), (WITHIN, "seconds")))
    yield "remarks", Said("Beside each set: load, level, feed, wind and rain, every touch of a valve.")
    for number in range(1, plan.runs + 1):
        yield f"run{number}", Said("Run {0}: {1} sets, over {2}.",
                                   ((number, "count"), (plan.sets, "count"), (plan.run_length, "time", 0)))
        if plan.separating:
            yield f"masses{number}", Said("Run {0}: drained water and condensed steam weighed over the same time; "
                                          "level in the separator the same at both ends.", ((number, "count"),))
        else:
            yield f"flow{number}", Said("Run {0}: sample weighed again, with the time it took.", ((number, "count"),))
        if number < plan.runs:
            yield f"between{number}", Said("Between the runs change what can hide an error: exchange the thermometers, "
                                           "or ask for another load and wait until all is settled again.")
    if plan.case["heat_loss_method"] == BY_TWO_FLOWS:
        yield "second", Said("Same steam at the second sample flow, right after: settled again, temperature, exhaust "
                             "pressure and flow read.")


def _normal(plan: Plan) -> Found:
    if plan.electric:
        return
    needed = plan.case["heat_loss_method"] == BY_NORMAL
    why = "needed, since the heat loss is taken from it" if needed else "where dry steam can be had: it checks the rig"
    if plan.T_dry is None:
        yield "read", Said(f"Normal reading, {why}: line pressure the same, steam at rest, nozzle facing up."), \
            plan.reach.trouble
        return
    yield "read", Said(f"Normal reading, {why}: line pressure the same, steam at rest, nozzle facing up. Expect {{0}} "
                       "with the losses of this rig. Steam that is not dry makes the rig look worse than it is.",
                       ((plan.T_dry, "temperature"),))


def _close(plan: Plan) -> Found:
    if plan.electric:
        yield "power", Said("Power off first; the sample flows on until the heater has cooled.")
    yield "shut", Said("Tapping shut by the authorised person, rig left to vent, exhaust left open.")
    yield "dead", Said("Isolated, drained, proved dead, locked; the body and the buckets stay hot for long.")
    if not plan.electric:
        yield "orifice", Said("Orifice looked at: clean, edge as before? A flow that fell by {0} or more says it was "
                              "not.", ((FLOW_ALARM, "percent"),))
    yield "after", Said("Ice point, zeros and barometer once more; differences noted.")
    yield "saved", Said("Readings saved, sheet signed, photographs of the set-up taken.")
    yield "site", Said("Site as it was found, permit handed back.")
