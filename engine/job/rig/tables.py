"""The rig in words and rows, for screens and files: what matters most, then the numbers of each part."""

from __future__ import annotations

from collections.abc import Sequence

from engine.calorimeter import WEATHER_HALF_WIDTH
from engine.job.case.fields_path import BY_ALTITUDE, BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS
from engine.job.case.fields_rig import WEIGHED
from engine.job.rig.effects import Effect
from engine.job.rig.heat import BY_GEOMETRY
from engine.job.rig.rig import RigAssessment
from engine.steam.units import UnitSystem, from_si

Row = tuple[str, str]
LEFT, TAKEN = "● left in the answer", "◇ taken out of the answer"
_METHODS = {BY_GEOMETRY: "Dimensions and lagging", BY_CONDUCTANCE: "Conductance UA as entered",
            BY_TWO_FLOWS: "Two flows", BY_NORMAL: "Normal reading on dry steam", BY_KG: "Per kg as entered"}


def points(size: float, *, signed: bool = False) -> str:
    """A size in percentage points, in the digits it deserves.

    >>> points(-0.000985), points(0.0000102), points(1e-9), points(-0.0021, signed=True)
    ('0.099 %pt', '0.001 %pt', 'under 0.001 %pt', '-0.21 %pt')
    """
    value = 100.0 * size
    if abs(value) < 0.0005:
        return "under 0.001 %pt"
    return f"{value if signed else abs(value):{'+' if signed else ''}.{2 if abs(value) >= 0.1 else 3}f} %pt"


def headline(rig: RigAssessment) -> str:
    """What matters most, in one sentence."""
    if not rig.sized:
        return "Nothing can be sized yet: describe the orifice and the exhaust pipe first."
    first = rig.sized[0]
    where = "already taken out of the answer" if first.corrected else f"still in the answer: {_reads(first)}"
    return f"What matters most here: {_small(first.name)}, {points(first.size)}, {where}."


def left_words(rig: RigAssessment) -> str:
    """What the answer still has in it: the largest such effect, and all of them together."""
    left = [e for e in rig.sized if not e.corrected]
    if not left:
        return "Nothing else is left in the answer." if rig.sized else ""
    words = [f"Of what is left in the answer, the largest is {_small(left[0].name)}: {points(left[0].size)}, "
             f"{_reads(left[0])}."] if rig.sized[0].corrected else []
    known = [e.size for e in left if not e.either_way]
    if len(known) > 1:
        total = sum(known)
        reads = "wetter" if total < 0 else "drier"
        words.append(f"All that is left together makes the steam read {points(total)} {reads} than it is, if every "
                     "entry is right.")
    if either := [e.name for e in left if e.either_way]:
        words.append(f"Not in that sum, since it may go either way: {', '.join(map(_small, either))}.")
    return " ".join(words)


def _small(name: str) -> str:
    return name[0].lower() + name[1:]


def _reads(e: Effect) -> str:
    if e.either_way:
        return "one way or the other"
    return f"the steam reads {e.direction} than it is" if e.direction else "which is nothing"


def effect_rows(rig: RigAssessment, units: UnitSystem) -> list[dict[str, str]]:
    """Every effect: its size on the quality and in its own unit, whether it is taken out, what it comes from."""
    rows = []
    for e in rig.effects:
        if e.size is None:
            rows.append({"Effect": e.name, "Quality": "–", "Left out, it reads": "–", "In its own unit": "–",
                         "Now": "○ not sized", "From": e.trouble})
        else:
            rows.append({"Effect": e.name, "Quality": points(e.size), "Left out, it reads": e.direction or "the same",
                         "In its own unit": e.in_its_own_unit(units), "Now": TAKEN if e.corrected else LEFT,
                         "From": e.words(units)})
    return rows


def flow_rows(rig: RigAssessment, units: UnitSystem) -> list[Row]:
    """The sample flow by every formula, the coefficient, the bore for a wanted flow."""
    f = rig.flow.value
    if f is None:
        return []

    def flow(si: float) -> str:
        return units.text(si, "mass flow", 2)

    o, rows = f.orifice, []
    if f.implied is not None:
        source = "weighed" if rig.case["flow_source"] == WEIGHED else "as taken over earlier"
        rows += [(f"Sample flow, {source}", flow(o.sample_flow)),
                 ("Discharge coefficient behind it", f"{f.implied:.3f}")]
    rows += [("Computed, homogeneous equilibrium", flow(o.computed)), ("Napier", flow(o.napier))]
    if o.choked:
        rows += [("Grashof", flow(o.grashof)), ("Rateau", flow(o.rateau))]
    rows.append(("Orifice", "choked" if o.choked else "not choked: the flow follows the exhaust pressure"))
    if f.bore_wanted:
        rows.append((f"Bore for {flow(rig.point.si['wanted_flow'])}", _bore(f.bore_wanted.value, units)))
    return rows


def _bore(si: float, units: UnitSystem) -> str:
    """A bore that is to be drilled, to a hundredth of a millimetre."""
    return units.text(si, "length", {"SI": 2, "US": 4}[units.name])


def flow_words(rig: RigAssessment, units: UnitSystem) -> str:
    """What the weighed flow says about the orifice, or that it should be weighed."""
    f = rig.flow.value
    if f is None:
        return ""
    if f.implied is None or rig.case["flow_source"] != WEIGHED:
        moved = f.implied is not None and abs(f.orifice.computed / f.orifice.sample_flow - 1.0) > 2e-3
        return ("Weigh the condensate: a coefficient out of a table is what is known least." if not moved else
                f"The flow in the case was taken over earlier; the orifice now passes "
                f"{units.text(f.orifice.computed, 'mass flow', 2)}.")
    share = f.implied / rig.point.si["discharge"]
    if f.implied > 1.05:
        return "A coefficient well above 1 cannot be: check the bore, the line pressure and the weighing."
    if share < 0.9:
        return "The orifice passes clearly less than its coefficient says: it may be clogging."
    if share > 1.1:
        return "The orifice passes clearly more than its coefficient says: it may be worn, or rounder than taken."
    return "The weighed flow agrees with the orifice."


def exhaust_rows(rig: RigAssessment, units: UnitSystem) -> list[Row]:
    """Velocity and kinetic energy at the thermometer, the pipe, and what its pressure does to the reach."""
    e = rig.exhaust.value
    if e is None:
        return []
    si = rig.point.si
    rows = [("Velocity at the thermometer", f"{units.text(e.velocity, 'velocity')}, Mach {e.mach:.3f}"),
            ("Its kinetic energy", f"{units.text(e.kinetic_energy, 'enthalpy', 2)}, "
                                   f"{units.text(e.kinetic_superheat, 'difference', 2)}, {points(e.kinetic_quality)}"),
            (f"Least bore for {points(si['kinetic_error'])} of it",
             f"{units.text(e.least_bore, 'length')}; it is {units.text(si['exhaust_bore'], 'length')}")]
    if not e.pipe:
        return rows
    p = e.pipe.value
    rows += [("Back pressure of the pipe", units.text(p.back_pressure, "pressure difference")),
             ("Pressure it makes at the thermometer", f"{units.text(p.p_exhaust, 'pressure', 4)} abs"),
             ("Exhaust pressure of the case", f"{units.text(si['p_exhaust'], 'pressure', 4)} abs"),
             ("At the open end", f"{units.text(p.exit_velocity, 'velocity')}, Mach {p.exit_mach:.3f}"
                                 + (", choked" if p.choked else "")),
             ("Flow resistance f L/D + K", f"{p.resistance:.2f}, of which the wall f = {p.friction_factor:.4f}"),
             ("Least readable quality", _both(_reach(e.x_least), _reach(e.x_least_piped)))]
    if e.superheat is not None:
        piped = None if e.superheat_piped is None else units.text(e.superheat_piped, "difference")
        rows.append(("Superheat of the same steam", _both(units.text(e.superheat, "difference"), piped)))
    return rows


def _both(here: str, piped: str | None) -> str:
    return here if piped in (None, here) else f"{here} as entered, {piped} with this pipe"


def _reach(x: float | None) -> str | None:
    return None if x is None else f"{x:.4f}" if x <= 1 else "none"


def exhaust_words(rig: RigAssessment, units: UnitSystem) -> str:
    """What is wrong with the exhaust, if anything."""
    e = rig.exhaust.value
    if e is None:
        return ""
    words = []
    if e.kinetic_quality > rig.point.si["kinetic_error"]:
        words.append(f"The exhaust is too narrow for this flow: its kinetic energy is worth "
                     f"{points(e.kinetic_quality)}. A bore of {units.text(e.least_bore, 'length')} would do.")
    if e.pipe and e.pipe.value.choked:
        words.append("The open end is choked: the pipe is far too narrow.")
    if e.superheat is not None and e.superheat_piped is not None and e.superheat - e.superheat_piped > 1.0:
        words.append(f"By its back pressure the pipe costs {units.text(e.superheat - e.superheat_piped, 'difference')} "
                     "of the superheat the case counts on.")
    return " ".join(words) or "Velocity and back pressure are small here."


def nozzle_words(rig: RigAssessment, units: UnitSystem) -> str:
    """What the ports do to the sample."""
    n = rig.nozzle.value
    if n is None or not n.entry:
        return ""
    e = n.entry.value
    if abs(e.velocity_ratio - 1.0) < 0.02:
        return "The ports draw at the velocity of the line."
    more, reads = ("more", "wetter") if e.velocity_ratio > 1.0 else ("fewer", "drier")
    return (f"The ports draw {'slower' if e.velocity_ratio > 1.0 else 'faster'} than the line flows: they collect "
            f"{more} drops than belong to the sample, and the steam reads {reads} than it is.")


def nozzle_rows(rig: RigAssessment, units: UnitSystem) -> list[Row]:
    """Line velocity, the ports wanted and the ports there are."""
    n = rig.nozzle.value
    if n is None:
        return []
    rows = [("Line velocity by flow and bore", units.text(n.line_velocity, "velocity"))]
    if n.isokinetic_area:
        rows.append(("Port area for equal velocities", units.text(n.isokinetic_area.value, "area")))
    if n.isokinetic_bore:
        rows.append((f"That is, for {rig.point.si['ports']:g} ports, a bore of",
                     _bore(n.isokinetic_bore.value, units)))
    if n.port_area:
        rows.append(("Port area there is", units.text(n.port_area.value, "area")))
    if n.entry:
        e = n.entry.value
        rows += [("Velocity in the ports", units.text(e.port_velocity, "velocity")),
                 ("Line velocity over port velocity", f"{e.velocity_ratio:.3f}"),
                 ("Stokes number of the drops", f"{e.stokes:.2g}"),
                 ("Drops caught over drops in their way", f"{e.aspiration:.3f}"),
                 ("The quality is wrong by", points(e.error, signed=True))]
    return rows


def loss_rows(rig: RigAssessment, units: UnitSystem) -> list[dict[str, str]]:
    """The heat loss by every method, side by side; ● is the one in the answer."""
    rows = []
    for method, words in _METHODS.items():
        loss, chosen = rig.losses[method], rig.case["heat_loss_method"] == method
        if method == BY_KG and not chosen:  # nothing but what someone else found
            continue
        mark = "● " if chosen else ""
        if not loss:
            rows.append({"Method": mark + words, "Heat loss": loss.trouble, "In reading and quality": "–", "UA": "–"})
            continue
        v = loss.value
        rows.append({"Method": mark + words, "Heat loss": units.text(v.heat_loss, "enthalpy", 2),
                     "In reading and quality": f"{units.text(v.kelvin, 'difference', 2)}, {points(v.quality)}",
                     "UA": "–" if v.conductance is None else units.text(v.conductance, "conductance")})
    return rows


def loss_words(rig: RigAssessment) -> str:
    """Which of the methods is in the answer."""
    if rig.case["heat_loss_method"] in _METHODS:
        return "● marks the one in the answer."
    return "None of them is in the answer."


def geometry_words(rig: RigAssessment, units: UnitSystem) -> str:
    """What the conductance by dimensions and lagging is made of."""
    g = rig.geometry.value
    if g is None:
        return ""
    parts = f"By dimensions and lagging the body has UA = {units.text(g.body, 'conductance')}"
    if g.sampling is not None:
        parts += (f" and the sampling line {units.text(g.sampling, 'conductance')}; as the line's steam is hotter, "
                  f"both count as {units.text(g.whole, 'conductance')}")
    return f"{parts}. The wall inside the body stands at {units.text(g.T_wall, 'temperature')}."


def thermometer_rows(rig: RigAssessment, units: UnitSystem) -> list[dict[str, str]]:
    """The thermometer's errors: reading minus truth."""
    t = rig.thermometer
    sizes = {e.name: e for e in rig.effects}
    rows = []
    for name, error in (("Immersion of the thermometer", t.immersion), ("Radiation to the wall", t.radiation),
                        ("Emergent stem", t.stem)):
        if error is None:
            continue
        size = sizes[name].size
        rows.append({"Error": name, "Reading − truth": units.text(error.value, "difference", 2) if error else "–",
                     "In the quality": "–" if size is None else points(size, signed=True),
                     "Note": error.trouble or sizes[name].words(units)})
    e = sizes["Velocity at the thermometer"]
    rows.append({"Error": "Recovery in the moving steam",
                 "Reading − truth": units.text(t.stream.value.of_total, "difference", 2) if t.stream else "–",
                 "In the quality": "–" if e.size is None else points(e.size, signed=True),
                 "Note": t.stream.trouble or (TAKEN if e.corrected else LEFT)})
    return rows


def thermometer_words(rig: RigAssessment, units: UnitSystem) -> str:
    """How deep it should stand."""
    good, si = rig.thermometer.immersion_good, rig.point.si
    if not good:
        return ""
    deep = units.text(good.value, "length", 0 if units.name == "SI" else 1)
    fifteen = units.text(15 * si["probe_outer_diameter"], "length", 0 if units.name == "SI" else 1)
    return (f"At {deep} of immersion heat along the stem costs no more than {units.text(0.1, 'difference')}; common "
            f"practice asks for 15 diameters, {fifteen}.")


def warming_rows(rig: RigAssessment, units: UnitSystem) -> list[Row]:
    """The warm-up: its stages, its wait, and what an earlier reading is wrong by."""
    w = rig.warming.value
    if w is None:
        return []
    allowed = units.text(rig.point.si["warmup_error"], "difference", 2)
    rows = [("Exhaust superheated at all after", f"{w.run.time_condensing:.0f} s"),
            ("Time constant from there", units.text(w.run.time_constant, "time")),
            (f"Within {allowed} after", units.text(w.ready, "time", 0))]
    for time, kelvin, size in w.early:
        told = "nothing to read yet" if size is None else (
            f"{units.text(kelvin, 'difference', 2)}, {points(size, signed=True)}")
        rows.append((f"Read after {units.text(time, 'time', 0)}", told))
    return [*rows, ("Steam to warm up", units.text(w.used.warming, "mass", 1)),
            ("Steam for the test", units.text(w.used.testing, "mass", 1)),
            ("Condensate while it warms", units.text(w.run.condensate, "mass", 2))]


def gauge_rows(rig: RigAssessment, units: UnitSystem) -> list[Row]:
    """Barometer, altitude and water leg."""
    p, case = rig.point.si.p_barometer, rig.point.case
    unit = {"SI": "kPa", "US": "inHg"}[units.name]

    def barometer(si: float) -> str:
        return f"{from_si(si, unit, 'pressure'):.2f} {unit}"

    by_altitude = case["barometer_source"] == BY_ALTITUDE
    rows = [("Barometer", f"{barometer(p)}, {'standard atmosphere at the altitude' if by_altitude else 'as entered'}")]
    if by_altitude:
        rows.append(("Weather, either way", barometer(WEATHER_HALF_WIDTH)))
    elif rig.altitude:
        length = {"SI": "m", "US": "ft"}[units.name]
        height = from_si(rig.altitude.value, length, "length")
        rows.append(("Standard altitude of that pressure", f"{height:.0f} {length}"))
    leg = [e.in_its_own_unit(units) for e in rig.effects if e.name == "Water leg of the gauge"]
    return [*rows, ("Water leg of the line gauge", leg[0] if leg else "none")]


def comparison_rows(named: Sequence[tuple[str, RigAssessment]], units: UnitSystem) -> list[dict[str, str]]:
    """The effects of several rigs side by side, in the order of the first."""
    names = dict.fromkeys(e.name for _, rig in named for e in rig.effects)
    found = [(title, {e.name: e for e in rig.effects}) for title, rig in named]
    flow = {title: units.text(rig.point.flow, "mass flow", 2) for title, rig in named}
    return [{"": "Sample flow", **flow}, *({"": name, **{title: _cell(of.get(name)) for title, of in found}}
                                           for name in names)]


def _cell(e: Effect | None) -> str:
    if e is None or e.size is None:
        return "–"
    return f"{points(e.size)} {e.direction} {(TAKEN if e.corrected else LEFT)[0]}"
