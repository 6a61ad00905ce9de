"""The rig in one call: the engine's own numbers, sizes by reducing twice, directions, and what missing entries do."""

from __future__ import annotations

import math
from functools import cache

import numpy as np
import pytest

from engine.calorimeter import (
    LAGGING_CONDUCTIVITY,
    exhaust_pipe,
    immersion_error,
    isokinetic_port_area,
    least_quality,
    orifice_flow,
    pipe_conductance,
    quality,
    radiation_error,
    reading_error,
    stem_error,
    wetness_in_line,
    wetness_sampled,
)
from engine.calorimeter.warmup import CONDENSING_FILM
from engine.job.assessment import assess
from engine.job.case import BLANK
from engine.job.case.demo import DEMO
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import ELECTRIC, SEPARATING
from engine.job.case.fields_path import (
    BY_ALTITUDE,
    BY_CONDUCTANCE,
    BY_KG,
    BY_NORMAL,
    BY_TWO_FLOWS,
    EXPECTED,
    NONE,
    UNDECIDED,
)
from engine.job.case.fields_rig import BARE, COMPUTED, DRY, MERCURY, RIG_FIELDS, VESSEL, WET
from engine.job.case.rows import Entry
from engine.job.rig import assess_rig
from engine.job.rig.heat import BY_GEOMETRY, GOOD_IMMERSION
from engine.steam import saturated, saturation_temperature, vapour
from engine.steam.errors import InputError

KG_H = 1 / 3600


def mm(value):
    return Entry(float(value), "mm")


def celsius(value):
    return Entry(float(value), "°C")


def kg_h(value):
    return Entry(float(value), "kg/h")


rig_of = cache(assess_rig)


@pytest.fixture(scope="module")
def rig():
    return rig_of(DEMO)


def effect(rig, name):
    return next(e for e in rig.effects if e.name == name)


def size(case, name):
    return effect(rig_of(case), name).size_pt


@cache
def x_of(case):
    return assess(case).x


# ---- the parts are the engine's own numbers


def test_the_point_is_the_case_as_assessed(rig):
    a = assess(DEMO)
    assert rig.point.x == pytest.approx(a.x, abs=1e-12)
    assert rig.point.terms() == a.terms
    assert not rig.point.at_reach and not rig.notes and not rig.point.aside


def test_orifice_flow_is_the_engines(rig):
    flow, si = rig.flow.value, rig.point.si
    expected = orifice_flow(si["p_line"], rig.point.x, si["p_exhaust"], 3e-3, 0.85, weighed=31.7 * KG_H)
    assert flow.orifice == expected
    assert flow.implied == expected.discharge == pytest.approx(0.857, abs=5e-4)
    assert flow.orifice.choked


def test_the_curves_of_the_flow_pass_through_this_orifice(rig):
    flow = rig.flow.value
    assert np.interp(3e-3, flow.bores, flow.computed) == pytest.approx(flow.orifice.computed)
    assert np.interp(3e-3, flow.bores, flow.napier) == pytest.approx(flow.orifice.napier)
    assert np.all(flow.least <= flow.computed) and np.all(flow.computed <= flow.most)


def test_the_bore_for_a_wanted_flow_gives_that_flow():
    bore = assess_rig(DEMO.with_(wanted_flow=kg_h(60))).flow.value.bore_wanted.value
    again = assess_rig(DEMO.with_(bore=Entry(bore, "m"))).flow.value
    assert again.orifice.computed * 3600 == pytest.approx(60.0, rel=1e-9)


def test_exhaust_pipe_is_the_engines(rig):
    si = rig.point.si
    pipe = exhaust_pipe(si["sample_flow"], 0.0266, 1.5, si.p_barometer, si["T_exhaust"], loss_coefficient=2.8,
                        fittings={"elbow 90°, threaded": 2})
    found = rig.exhaust.value.pipe.value
    assert (found.p_exhaust, found.resistance) == pytest.approx((pipe.p_exhaust, pipe.resistance), rel=1e-12)


def test_exhaust_goes_to_the_vessel_where_there_is_one():
    case = DEMO.with_(exhaust_to=VESSEL, p_discharge=Entry(0.95, "bar", "absolute"))
    pipe = assess_rig(case).exhaust.value.pipe.value
    assert pipe.p_exhaust - pipe.back_pressure == pytest.approx(95e3)


def test_reach_at_the_pressure_of_the_pipe_is_the_engines():
    rig = assess_rig(DEMO.with_(exhaust_bore=mm(13), exhaust_length=Entry(10.0, "m")))
    e, si = rig.exhaust.value, rig.point.si
    p = e.pipe.value.p_exhaust
    assert e.x_least_piped == least_quality(si["p_line"], p, 5.0, **rig.point.terms().arguments())
    assert e.x_least_piped > e.x_least and e.superheat_piped < e.superheat


def test_isokinetic_area_is_the_engines(rig):
    area = isokinetic_port_area(31.7 * KG_H, 8000 * KG_H, 0.154)
    nozzle = rig.nozzle.value
    assert nozzle.isokinetic_area.value == area
    assert 6 * math.pi / 4 * nozzle.isokinetic_bore.value**2 == pytest.approx(area)
    assert nozzle.entry.value.velocity_ratio == pytest.approx(nozzle.port_area.value / area)


def test_conductance_by_geometry_adds_the_sampling_line_by_its_own_difference(rig):
    g, si = rig.geometry.value, rig.point.si
    dry = LAGGING_CONDUCTIVITY[DRY]
    body = pipe_conductance(0.4, 0.0337, 0.0272, lagging=0.025, conductivity=dry)
    sampling = pipe_conductance(0.1, 0.0213, 0.0157, lagging=0.025, conductivity=dry, film=CONDENSING_FILM)
    assert (g.body, g.sampling) == (body, sampling)
    T_line, T_a = saturation_temperature(si["p_line"]), si["T_ambient"]
    lost = body * (si["T_exhaust"] - T_a) + sampling * (T_line - T_a)
    assert g.whole * (si["T_exhaust"] - T_a) == pytest.approx(lost)


def test_heat_loss_by_every_method(rig):
    case = DEMO.with_(second_flow=kg_h(60), T_second=celsius(121.6), T_normal=celsius(149.5),
                      heat_loss=Entry(2.2, "kJ/kg"))
    losses = assess_rig(case).losses
    assert losses[BY_CONDUCTANCE].value.heat_loss == pytest.approx(assess(DEMO).terms.heat_loss)
    assert losses[BY_KG].value.heat_loss == pytest.approx(2200.0)
    for method in (BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS):
        chosen = assess(case.with_(heat_loss_method=method))
        assert losses[method].value.heat_loss == pytest.approx(chosen.terms.heat_loss, rel=1e-12)
        assert losses[method].value.quality == pytest.approx(
            chosen.x - x_of(case.with_(heat_loss_method=NONE)), abs=1e-12)
    assert losses[BY_GEOMETRY].value.conductance == rig.geometry.value.whole


def test_two_flows_answer_with_the_enthalpy_at_an_infinite_flow():
    """h is linear in 1/flow: two readings of known loss give back the loss-free enthalpy and the conductance."""
    p, T_a, UA, h_free = 102_100.0, 297.15, 0.4, 2_720e3
    readings = []
    for flow in (20 * KG_H, 40 * KG_H):
        T = 390.0
        for _ in range(60):  # the loss follows from the temperature it lowers
            T -= (vapour(p, T).h + UA * (T - T_a) / flow - h_free) / (vapour(p, T).cp + UA / flow)
        readings.append(T)
    case = DEMO.with_(heat_loss_method=BY_TWO_FLOWS, p_exhaust=Entry(p, "Pa", "absolute"), sample_flow=kg_h(20),
                      T_exhaust=Entry(readings[0], "K"), second_flow=kg_h(40), T_second=Entry(readings[1], "K"),
                      exhaust_bore=None, line_velocity=None)
    loss = assess_rig(case).losses[BY_TWO_FLOWS].value
    assert loss.conductance == pytest.approx(UA, rel=1e-9)
    line = saturated(assess(case).si["p_line"])
    assert assess(case).x == pytest.approx((h_free - line.h_f) / (line.h_g - line.h_f), abs=1e-9)


def test_thermometer_errors_are_the_engines_at_the_true_temperature():
    case = DEMO.with_(thermometer=MERCURY, exposed=Entry(80.0, "K"), T_stem=celsius(40), T_wall=celsius(110))
    t, T_read = assess_rig(case).thermometer, 394.25
    film = t.film.value
    T = T_read - t.immersion.value
    assert t.immersion.value == pytest.approx(immersion_error(T, 333.15, 0.06, 0.006, 0.004, film))
    T = T_read - t.radiation.value
    assert t.radiation.value == pytest.approx(radiation_error(T, 383.15, film))
    assert t.stem.value == stem_error(T_read, 313.15, 80.0)
    deep = assess_rig(case.with_(immersion=Entry(t.immersion_good.value, "m"))).thermometer
    assert deep.immersion.value == pytest.approx(-GOOD_IMMERSION, rel=0.02)


def test_the_wall_follows_from_the_heat_loss_unless_it_was_measured(rig):
    assert rig.thermometer.wall_computed and rig.thermometer.T_wall == rig.geometry.value.T_wall
    measured = assess_rig(DEMO.with_(T_wall=celsius(100))).thermometer
    assert not measured.wall_computed and measured.T_wall == 373.15


def test_warm_up_course_and_steam(rig):
    w = rig.warming.value
    assert abs(reading_error(w.run, w.ready)) == pytest.approx(0.1)
    assert w.reading[-1] == pytest.approx(w.run.T_final, abs=0.1)
    assert w.used.testing == pytest.approx(31.7)  # kg/h for an hour
    assert w.used.total == pytest.approx(w.used.warming + w.used.testing)
    errors = [kelvin for _, kelvin, _ in w.early]
    assert errors == sorted(errors) and all(e < 0 for e in errors)


# ---- every size is the difference of two reductions


def test_heat_loss_is_sized_by_leaving_it_out(rig):
    e = effect(rig, "Heat loss")
    assert e.size == pytest.approx(x_of(DEMO.with_(heat_loss_method=NONE)) - x_of(DEMO), abs=1e-12)
    assert e.corrected and e.direction == "wetter"


def test_kinetic_energy_is_sized_by_leaving_it_out(rig):
    e = effect(rig, "Velocity at the thermometer")
    assert e.size == pytest.approx(x_of(DEMO.with_(exhaust_bore=None)) - x_of(DEMO), abs=1e-12)
    c, line = rig.point.reading.exhaust_velocity, saturated(rig.point.si["p_line"])
    assert e.size == pytest.approx(-0.3 * c * c / 2 / (line.h_g - line.h_f), rel=1e-9)


def test_line_velocity_water_leg_and_barometer_are_sized_by_leaving_them_out(rig):
    x = x_of(DEMO)
    assert effect(rig, "Velocity in the line").size == pytest.approx(x_of(DEMO.with_(line_velocity=None)) - x)
    assert effect(rig, "Water leg of the gauge").size == pytest.approx(x_of(DEMO.with_(leg_height=Entry(0.0, "m"))) - x)
    sea_level = DEMO.with_(p_barometer=Entry(101_325.0, "Pa", "absolute"))
    assert effect(rig, "Barometer").size == pytest.approx(x_of(sea_level) - x)


def test_a_thermometer_error_is_sized_by_undoing_it(rig):
    for name, error in (("Immersion of the thermometer", rig.thermometer.immersion.value),
                        ("Radiation to the wall", rig.thermometer.radiation.value)):
        true = DEMO.with_(T_exhaust=Entry(394.25 - error, "K"))
        assert effect(rig, name).size == pytest.approx(x_of(DEMO) - x_of(true), abs=1e-12)
        assert not effect(rig, name).corrected


def test_heat_loss_beyond_the_correction_is_what_the_geometry_would_change(rig):
    e = effect(rig, "Heat loss beyond the correction")
    geometry = DEMO.with_(conductance=Entry(rig.geometry.value.whole, "W/K"))
    assert e.size == pytest.approx(x_of(DEMO) - x_of(geometry), abs=1e-12)


def test_back_pressure_left_out_is_sized_by_the_pressure_of_the_pipe():
    case = DEMO.with_(p_exhaust=Entry(100.8, "kPa", "absolute"))
    rig = assess_rig(case)
    e, p = effect(rig, "Back pressure of the exhaust"), rig.exhaust.value.pipe.value.p_exhaust
    assert not e.corrected and e.direction == "drier"
    assert e.size == pytest.approx(x_of(case) - x_of(case.with_(p_exhaust=Entry(p, "Pa", "absolute"))), abs=1e-12)


def test_back_pressure_counts_as_taken_out_where_the_case_has_it(rig):
    e = effect(rig, "Back pressure of the exhaust")
    assert e.corrected and e.own[0] == pytest.approx(rig.exhaust.value.pipe.value.back_pressure)


def test_sampling_is_sized_from_the_wetness_read_and_from_the_wetness_expected():
    case = DEMO.with_(port_bore=mm(5))
    read, planned = assess_rig(case), assess_rig(case.with_(question=EXPECTED))
    for rig, error in ((read, lambda y, A: wetness_in_line(y, A) - y),
                       (planned, lambda y, A: y - wetness_sampled(y, A))):
        A = rig.nozzle.value.entry.value.aspiration
        assert effect(rig, "Nozzle entry").size == pytest.approx(error(rig.point.wetness, A))
        assert A > 1 and effect(rig, "Nozzle entry").direction == "wetter"


def test_water_on_the_wall_and_drained_ahead_make_the_steam_read_drier():
    rig = assess_rig(DEMO.with_(wall_film=Entry(50.0, "%"), drip_flow=kg_h(80)))
    y = rig.point.wetness
    assert effect(rig, "Water on the wall").size == pytest.approx(wetness_in_line(y, 1.0, wall_film=0.5) - y)
    drained = effect(rig, "Water drained ahead")
    # of 8080 kg/h before the drain, 80 kg/h were water that the calorimeter never saw
    assert (1 - y) - drained.size == pytest.approx((1 - y) * 8000 / 8080)


def test_an_altitude_for_a_barometer_brings_the_weather_either_way():
    e = effect(assess_rig(DEMO.with_(barometer_source=BY_ALTITUDE)), "Weather")
    assert e.either_way and e.size > 0 and e.direction == "either way"


def test_pressures_entered_absolute_need_no_barometer():
    absolute = DEMO.with_(p_line=Entry(10.0, "bar", "absolute"))
    assert "Barometer" not in [e.name for e in assess_rig(absolute).effects]


def test_a_computed_flow_is_doubtful_and_a_weighed_one_is_not(rig):
    assert "Sample flow not weighed" not in [e.name for e in rig.effects]
    e = effect(assess_rig(DEMO.with_(flow_source=COMPUTED)), "Sample flow not weighed")
    assert e.either_way and not e.corrected and 0 < e.size_pt < 0.02


def test_the_warm_up_costs_the_error_that_was_allowed(rig):
    warmer = DEMO.with_(T_exhaust=Entry(394.35, "K"))
    with_loss_held = x_of(warmer) - (assess(warmer).terms.heat_loss - assess(DEMO).terms.heat_loss) / (
        assess(DEMO).line.h_g - assess(DEMO).line.h_f)
    assert effect(rig, "Warm-up").size == pytest.approx(x_of(DEMO) - with_loss_held, abs=1e-7)


def test_ranked_by_size_with_the_unsized_last(rig):
    sizes = [abs(e.size) for e in rig.sized]
    assert sizes == sorted(sizes, reverse=True)
    assert [e.name for e in rig.unsized] == ["Water on the wall"]
    assert rig.effects == (*rig.sized, *rig.unsized)


# ---- directions and limits


@pytest.mark.parametrize("state", [WET, BARE])
def test_worse_lagging_leads_the_ranking(rig, state):
    worse = assess_rig(DEMO.with_(lagging_state=state))
    assert worse.effects[0].name == "Heat loss beyond the correction" != rig.effects[0].name
    assert worse.geometry.value.whole > 2 * rig.geometry.value.whole
    assert worse.thermometer.T_wall < rig.thermometer.T_wall


def test_more_heat_loss_never_makes_the_steam_look_drier():
    sizes = [size(DEMO.with_(conductance=Entry(UA, "W/K")), "Heat loss") for UA in (0.0, 0.1, 0.2, 0.5, 2.0)]
    assert sizes[0] == 0.0 and sizes == sorted(sizes, reverse=True)


@pytest.mark.parametrize(("name", "entry", "worse", "direction"), [
    ("Immersion of the thermometer", "immersion", [mm(v) for v in (90, 60, 40, 30)], -1),
    ("Velocity at the thermometer", "exhaust_bore", [mm(v) for v in (40, 26.6, 20, 15)], -1),
    ("Radiation to the wall", "T_wall", [celsius(v) for v in (121, 118, 110, 90)], -1),
    ("Water leg of the gauge", "leg_height", [Entry(v, "m") for v in (0.2, 0.8, 2.0)], -1),
    ("Nozzle entry", "port_bore", [mm(v) for v in (4, 4.5, 5, 6)], -1),
    ("Nozzle entry", "port_bore", [mm(v) for v in (3.9, 3.5, 3, 2)], +1),
    ("Warm-up", "warmup_error", [Entry(v, "K") for v in (0.05, 0.1, 0.5)], -1),
])
def test_the_worse_the_rig_the_larger_its_effect(name, entry, worse, direction):
    sizes = [direction * size(DEMO.with_(**{entry: value}), name) for value in worse]
    assert all(s > -1e-12 for s in sizes) and sizes == sorted(sizes)


def test_nothing_is_wrong_in_a_perfect_rig():
    """Equal velocities, a wall as hot as the steam, a head as hot, no stream past the probe: no effect is left."""
    wanted = assess_rig(DEMO).nozzle.value.isokinetic_bore.value
    perfect = assess_rig(DEMO.with_(port_bore=Entry(wanted, "m"), T_wall=celsius(121.1), T_head=celsius(121.1),
                                    recovery=Entry(1.0, "1"), wall_film=Entry(0.0, "%")))
    for name in ("Nozzle entry", "Radiation to the wall", "Immersion of the thermometer", "Velocity at the thermometer",
                 "Water on the wall"):
        assert effect(perfect, name).size_pt == pytest.approx(0.0, abs=1e-6), name


def test_a_normal_reading_has_the_thermometers_own_error_in_it(rig):
    case = DEMO.with_(heat_loss_method=BY_NORMAL, T_normal=celsius(149.5))
    for name in ("Immersion of the thermometer", "Radiation to the wall"):
        assert abs(size(case, name)) < 0.02 * abs(effect(rig, name).size_pt)


def test_a_larger_flow_buries_the_heat_loss():
    small, large = (size(DEMO.with_(sample_flow=kg_h(flow)), "Heat loss") for flow in (16, 64))
    assert small == pytest.approx(4 * large)


def test_behind_a_separator_the_sizes_count_for_what_was_not_drained():
    case = DEMO.with_(mode=SEPARATING, question=EXPECTED, wetness=Entry(8.0, "%"))
    rig = assess_rig(case)
    without = x_of(case.with_(heat_loss_method=NONE, wetness=Entry(8.0, "%")))
    assert rig.point.kept < 1 and without == pytest.approx(0.92)
    line = saturated(rig.point.si["p_line"])
    q = rig.losses[BY_CONDUCTANCE].value.heat_loss
    assert effect(rig, "Heat loss").size == pytest.approx(-rig.point.kept * q / (line.h_g - line.h_f), rel=1e-9)
    assert rig.point.wetness == pytest.approx(0.08, abs=1e-3)


# ---- missing, contradicting and unusable entries


def test_an_empty_case_says_what_every_effect_lacks():
    rig = assess_rig(BLANK)
    assert not rig.sized and not rig.flow and not rig.exhaust and not rig.nozzle and not rig.warming
    assert all(e.trouble.startswith("Enter ") for e in rig.unsized)
    assert rig.flow.trouble == "Enter orifice bore and discharge coefficient."


OPTIONAL = [*(f.name for f in RIG_FIELDS if f.blank is None), "sample_flow", "exhaust_bore", "line_velocity",
            "line_bore"]
FULL = DEMO.with_(wanted_flow=kg_h(40), wall_film=Entry(10.0, "%"), drip_flow=kg_h(1), second_flow=kg_h(60),
                  T_second=celsius(121.6), p_second=Entry(1.03, "bar", "absolute"), T_wall=celsius(118),
                  thermometer=MERCURY, exposed=Entry(50.0, "K"), T_stem=celsius(40), T_start=celsius(10),
                  T_normal=celsius(149))


@pytest.mark.parametrize("name", OPTIONAL)
def test_one_missing_entry_leaves_the_others_computed(name):
    full, less = rig_of(FULL), rig_of(FULL.with_(**{name: None}))
    assert not full.unsized
    assert len(less.sized) >= len(full.sized) - 6
    assert all(math.isfinite(e.size) for e in less.sized)
    label = FIELDS[name].label.lower()
    lost = {e.name for e in full.sized} - {e.name for e in less.sized}
    told = " ".join([*(e.trouble for e in less.unsized), *less.notes]).lower()
    assert not (lost - {"Water drained ahead"}) or label in told or "orifice" in told


RANGED = [f.name for f in RIG_FIELDS if f.form == "quantity"]


def out_of_range(name):
    entry = FULL[name]
    return Entry(-1e9, entry.unit, entry.basis)


def test_entries_out_of_range_are_all_named_and_put_aside():
    rig = rig_of(FULL.with_(**{name: out_of_range(name) for name in RANGED}))
    assert {fault.name for fault in rig.point.aside} == set(RANGED)
    assert effect(rig, "Heat loss").size is not None  # by the conductance that still stands


@pytest.mark.parametrize("name", ["bore", "drop_diameter", "lagging", "T_second", "p_second", "duration"])
def test_an_entry_out_of_range_leaves_the_others_computed(name):
    rig = rig_of(FULL.with_(**{name: out_of_range(name)}))
    assert [fault.name for fault in rig.point.aside] == [name]
    assert len(rig.sized) >= 8


def test_pressures_that_cannot_be_are_refused_with_everything_else_that_is_wrong():
    with pytest.raises(InputError) as caught:
        assess_rig(DEMO.with_(p_line=Entry(-5.0, "bar", "absolute"), bore=mm(-3)))
    assert {fault.name for fault in caught.value.faults} == {"p_line", "bore"}


def test_diameters_that_leave_no_metal_are_named_in_the_unit_entered():
    rig = assess_rig(DEMO.with_(body_inner_diameter=mm(50), probe_inner_diameter=mm(8)))
    assert rig.geometry.trouble == ("Body inner diameter: got 50 mm, needs less than that around it, 33.7 mm")
    assert "8 mm" in effect(rig, "Immersion of the thermometer").trouble
    assert effect(rig, "Heat loss").size is not None


def test_without_a_weighed_flow_the_computed_one_is_used_and_said():
    rig = assess_rig(DEMO.with_(sample_flow=None))
    assert rig.point.flow_computed and rig.case["sample_flow"] is None
    assert rig.point.flow == pytest.approx(rig.flow.value.orifice.computed, rel=1e-6)
    assert any("computed from the orifice" in note for note in rig.notes)
    assert not effect(rig, "Heat loss").corrected and not effect(rig, "Velocity at the thermometer").corrected
    assert rig.flow.value.implied is None


def test_an_exhaust_too_wet_to_read_is_judged_at_the_reach_limit():
    rig = assess_rig(DEMO.with_(T_exhaust=celsius(95)))
    assert rig.point.at_reach and any("reach limit" in note for note in rig.notes)
    assert rig.point.x == pytest.approx(least_quality(rig.point.si["p_line"], 102_100.0, 5.0,
                                                      **rig.point.terms().arguments()), abs=1e-6)
    assert len(rig.sized) >= 10


def test_a_superheated_line_has_no_drops_to_miss():
    rig = assess_rig(DEMO.with_(T_exhaust=celsius(180)))
    assert rig.point.x > 1 and any("superheated" in note for note in rig.notes)
    assert effect(rig, "Nozzle entry").size == 0.0 and effect(rig, "Heat loss").size < 0


def test_an_exhaust_faster_than_sound_is_left_out_and_said():
    rig = assess_rig(DEMO.with_(exhaust_bore=mm(3)))
    assert any("faster than sound" in note for note in rig.notes)
    assert effect(rig, "Heat loss").size is not None and not rig.exhaust


def test_a_heat_loss_method_that_lacks_an_entry_leaves_the_rest():
    rig = assess_rig(DEMO.with_(heat_loss_method=BY_NORMAL))
    assert any("heat loss of the case is left out" in note for note in rig.notes)
    e = effect(rig, "Heat loss")
    assert not e.corrected and e.size == pytest.approx(-rig.losses[BY_GEOMETRY].value.quality)


def test_a_loss_beyond_all_steam_leaves_the_rest():
    rig = assess_rig(DEMO.with_(conductance=Entry(100.0, "W/K"), sample_flow=kg_h(1), exhaust_bore=mm(10)))
    assert math.isfinite(rig.point.x) and rig.notes


def test_two_readings_that_gain_heat_are_refused_in_words():
    gained = DEMO.with_(heat_loss_method=BY_TWO_FLOWS, second_flow=kg_h(60), T_second=celsius(120.0))
    with pytest.raises(InputError, match="Temperature at the second flow: got 120 °C") as caught:
        assess(gained)
    assert "gain heat" in str(caught.value)
    with pytest.raises(InputError, match="above saturation"):
        assess(gained.with_(T_second=celsius(95.0)))
    with pytest.raises(InputError) as missing:
        assess(DEMO.with_(heat_loss_method=BY_TWO_FLOWS))
    assert {f.name for f in missing.value.faults} == {"second_flow", "T_second"}


def test_undecided_and_knowingly_none_leave_the_loss_in_the_answer():
    for method, words in ((UNDECIDED, "not decided"), (NONE, "knowingly")):
        e = effect(assess_rig(DEMO.with_(heat_loss_method=method)), "Heat loss")
        assert not e.corrected and e.size < 0 and words in e.sentence


def test_electric_superheating_is_named():
    assert any("electric" in note.lower() for note in assess_rig(DEMO.with_(mode=ELECTRIC)).notes)


def test_the_case_is_left_as_it_was():
    before = dict(DEMO.values)
    rig = assess_rig(DEMO.with_(sample_flow=None))
    assert dict(DEMO.values) == before and rig.case["sample_flow"] is None


def test_quality_is_reduced_in_one_array_call_like_one_by_one(rig):
    r = rig.point.reading
    full = quality(r.p_line, r.p_exhaust, r.T_exhaust, **rig.point.terms().arguments()).x
    assert full == pytest.approx(rig.point.x, abs=1e-12)
