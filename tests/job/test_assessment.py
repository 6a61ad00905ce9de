"""One call from a case to everything shown: verdicts, bounds, inverses, heat loss, velocities, states and paths."""

from dataclasses import fields, is_dataclass
from math import isfinite, isnan, pi

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.calorimeter import Status, least_quality, quality
from engine.job.assessment import Verdict, assess
from engine.job.case import BLANK
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS, EXPECTED, NONE, UNDECIDED
from engine.job.case.rows import Entry
from engine.steam import saturated, saturation_temperature, state_ph, vapour
from engine.steam.errors import InputError
from engine.steam.status import SteamStatus

BARE = BLANK.with_(p_line=Entry(10.0, "bar", "absolute"), p_exhaust=Entry(101.325, "kPa", "absolute"),
                   heat_loss_method=NONE)
T_SAT = saturation_temperature(101_325.0)


def kelvin(value):
    return Entry(float(value), "K")


def reading(superheat, case=BARE):
    """The case with a thermometer so far above saturation at 101.325 kPa."""
    return case.with_(T_exhaust=kelvin(T_SAT + superheat))


def expecting(wetness, case=BARE):
    return case.with_(question=EXPECTED, wetness=Entry(float(wetness), "1"))


def faults(case):
    with pytest.raises(InputError) as caught:
        assess(case)
    return {fault.name: str(fault) for fault in caught.value.faults}


# ---- the demo case


def test_the_demo_case():
    a = assess(DEMO)
    assert (a.verdict, a.status, a.expected, a.heat_loss_undecided) == (Verdict.READS, Status.OK, False, False)
    assert a.x == pytest.approx(0.9720, abs=5e-5)
    assert a.x_as_read == pytest.approx(0.9711, abs=5e-5)
    assert a.superheat == pytest.approx(20.9, abs=0.05)
    assert a.margin == pytest.approx(15.9, abs=0.05)
    assert a.x_least == pytest.approx(0.9558, abs=5e-5)
    assert a.T_exhaust == 394.25
    assert a.T_saturation == pytest.approx(373.34, abs=0.01)
    assert (a.x_below, a.line_superheat, a.x_exhaust) == (None, 0.0, 1.0)
    assert [s.name for s in a.states] == ["Line", "Dries out", "Exhaust", "Constant bore, exhaust"]


# ---- verdicts


@pytest.mark.parametrize(("superheat", "verdict"), [
    (-40.0, Verdict.CANNOT), (-1e-6, Verdict.CANNOT), (0.0, Verdict.CANNOT), (1e-6, Verdict.CANNOT),
    (4.999, Verdict.CANNOT), (5.001, Verdict.THIN), (9.999, Verdict.THIN), (10.001, Verdict.READS),
    (50.2, Verdict.READS), (50.4, Verdict.SUPERHEATED), (300.0, Verdict.SUPERHEATED),
])
def test_the_verdict_by_the_superheat(superheat, verdict):
    """With a line at 10 bar and an exhaust at 101.325 kPa dry steam arrives with 50.3 K of superheat."""
    a = assess(reading(superheat))
    assert a.verdict is verdict
    assert a.superheat == pytest.approx(superheat, abs=1e-9)
    assert a.margin == pytest.approx(superheat - 5.0, abs=1e-9)
    assert (a.x is not None) == (verdict in (Verdict.READS, Verdict.THIN))
    assert (a.x_below is not None) == (verdict is Verdict.CANNOT)
    assert (a.line_superheat > 0) == (verdict is Verdict.SUPERHEATED)
    assert (a.read_state is not None) == (superheat > 0)


def test_the_limits_are_those_asked_for():
    wide = BARE.with_(least_superheat=kelvin(20), comfortable_superheat=kelvin(30))
    assert [assess(reading(dT, wide)).verdict for dT in (19.9, 20.1, 29.9, 30.1)] == [
        Verdict.CANNOT, Verdict.THIN, Verdict.THIN, Verdict.READS]
    assert assess(reading(10, wide)).x_least == pytest.approx(least_quality(10e5, 101_325.0, 20.0), abs=1e-12)


def test_too_little_superheat_gives_the_bound_of_the_reach():
    for superheat in (-40.0, 0.0, 4.0):
        a = assess(reading(superheat))
        assert a.x is None and a.x_below == a.x_least == pytest.approx(0.9547, abs=5e-5)


def test_the_bound_is_never_above_dry():
    not_even_dry = BARE.with_(p_line=Entry(1.2, "bar", "absolute"))
    a = assess(reading(0.0, not_even_dry))
    assert a.x_least > 1 and a.x_below == 1.0 and a.verdict is Verdict.CANNOT
    assert a.path.x[0] <= 1.0
    assert assess(expecting(0.0, not_even_dry)).verdict is Verdict.CANNOT


def test_a_loss_too_great_for_wet_exhaust_leaves_the_path_at_dry_steam():
    """The bound is then above 1; the path shown is that of dry saturated steam, not of superheated."""
    a = assess(reading(-1.0, BARE.with_(heat_loss_method=BY_KG, heat_loss=Entry(300.0, "kJ/kg"))))
    assert (a.verdict, a.x_below) == (Verdict.CANNOT, 1.0)
    assert a.path.h[0] == pytest.approx(saturated(10e5).h_g, rel=1e-12)


def test_a_superheated_line_has_a_superheat_and_no_quality():
    hot = vapour(10e5, saturation_temperature(10e5) + 10.0)
    a = assess(BARE.with_(T_exhaust=kelvin(state_ph(101_325.0, hot.h).T)))
    assert a.verdict is Verdict.SUPERHEATED
    assert a.line_superheat == pytest.approx(10.0, abs=1e-6)
    assert a.x is a.x_below is None
    assert [s.name for s in a.states] == ["Line", "Exhaust"]
    assert (a.states[0].x, a.states[0].T) == (None, pytest.approx(saturation_temperature(10e5) + 10.0))
    assert a.bore_path is None


def test_an_expected_wetness_that_stays_wet():
    a = assess(expecting(0.20))
    assert (a.verdict, a.superheat, a.x, a.x_below) == (Verdict.CANNOT, 0.0, pytest.approx(0.80), None)
    assert a.T_exhaust == pytest.approx(T_SAT)
    exhaust = saturated(101_325.0)
    h = saturated(10e5).h_f + 0.80 * (saturated(10e5).h_g - saturated(10e5).h_f)
    assert a.x_exhaust == pytest.approx((h - exhaust.h_f) / (exhaust.h_g - exhaust.h_f), rel=1e-9)
    assert a.states[-1].x == pytest.approx(a.x_exhaust, rel=1e-9)


@pytest.mark.parametrize("bar", [1.2, 1.6, 3.0, 7.0, 20.0, 50.0, 111.0, 164.0])
def test_a_line_full_of_water_is_the_end_of_the_range(bar):
    a = assess(expecting(1.0, BARE.with_(p_line=Entry(bar, "bar", "absolute"))))
    assert (a.x, a.verdict) == (0.0, Verdict.CANNOT)
    assert a.path.x[0] == pytest.approx(0.0, abs=1e-9)


def test_an_expected_dry_line_reads_fifty_kelvin():
    a = assess(expecting(0.0))
    assert a.superheat == pytest.approx(50.3, abs=0.05)
    assert (a.x, a.verdict, a.line_superheat) == (1.0, Verdict.READS, 0.0)


# ---- what must be seen is the inverse of what is reduced


LOSSES = {
    NONE: {},
    UNDECIDED: {},
    BY_KG: {"heat_loss": Entry(3.0, "kJ/kg")},
    BY_CONDUCTANCE: {"conductance": Entry(0.3, "W/K"), "T_ambient": Entry(15.0, "°C")},
    BY_NORMAL: {"T_normal": Entry(141.0, "°C")},
}


@pytest.mark.parametrize("method", LOSSES)
@settings(max_examples=10, deadline=None)
@given(p_line=st.floats(3.0, 160.0), p_exhaust=st.floats(0.1, 1.5), superheat=st.floats(6.0, 60.0),
       flow=st.floats(10.0, 60.0))
def test_the_expected_temperature_is_the_one_read(method, p_line, p_exhaust, superheat, flow):
    case = DEMO.with_(
        p_line=Entry(p_line, "bar", "absolute"), p_exhaust=Entry(p_exhaust, "bar", "absolute"),
        T_exhaust=kelvin(saturation_temperature(p_exhaust * 1e5) + superheat), sample_flow=Entry(flow, "kg/h"),
        exhaust_bore=Entry(60.0, "mm"), heat_loss_method=method, **LOSSES[method])
    read = assess(case)
    if read.x is None:
        assert read.verdict is not Verdict.READS
        return
    seen = assess(case.with_(question=EXPECTED, wetness=Entry(1.0 - read.x, "1")))
    assert seen.T_exhaust == pytest.approx(case["T_exhaust"].value, abs=1e-5)
    assert seen.x == pytest.approx(read.x, abs=1e-12)
    if abs(superheat - 10.0) > 1e-6:  # at a limit itself rounding decides
        assert seen.verdict is read.verdict
    assert seen.x_least == pytest.approx(read.x_least, abs=1e-9)
    assert seen.terms.heat_loss == pytest.approx(read.terms.heat_loss, abs=1e-2)


@pytest.mark.parametrize("wetness", [0.0, 0.005, 0.028, 0.042])
def test_the_reading_of_an_expected_temperature_is_the_wetness(wetness):
    seen = assess(expecting(wetness, DEMO))
    read = assess(DEMO.with_(T_exhaust=kelvin(seen.T_exhaust)))
    assert 1 - read.x == pytest.approx(wetness, abs=1e-9)


def test_a_reading_at_the_limit_has_the_least_quality():
    """In still and in fast steam, with a loss that depends on the temperature."""
    for flow, conductance in ((31.7, 0.18), (31.7, 2.0), (90.0, 0.18)):
        case = DEMO.with_(sample_flow=Entry(flow, "kg/h"), conductance=Entry(conductance, "W/K"))
        a = assess(case)
        at_limit = assess(case.with_(T_exhaust=kelvin(a.T_saturation + a.least_readable + 1e-9)))
        assert at_limit.x == pytest.approx(a.x_least, abs=1e-5)


def test_the_reach_does_not_depend_on_the_reading():
    lossy = DEMO.with_(conductance=Entry(2.0, "W/K"))
    reaches = {round(assess(lossy.with_(T_exhaust=Entry(T, "°C"))).x_least, 12) for T in (90.0, 104.0, 112.0)}
    assert len(reaches) == 1


# ---- heat loss


def test_a_loss_not_decided_counts_as_none_and_is_marked():
    undecided, none = assess(reading(20, BARE.with_(heat_loss_method=UNDECIDED))), assess(reading(20))
    assert undecided.x == none.x == none.x_as_read
    assert (undecided.heat_loss_undecided, none.heat_loss_undecided) == (True, False)


def test_a_loss_per_kilogram_adds_its_share():
    a = assess(reading(20, BARE.with_(heat_loss_method=BY_KG, heat_loss=Entry(2.0146, "kJ/kg"))))
    assert a.x - a.x_as_read == pytest.approx(0.001, rel=1e-3)  # h_fg at 10 bar: 2014.6 kJ/kg, IAPWS-IF97


def test_a_loss_by_conductance():
    case = BARE.with_(heat_loss_method=BY_CONDUCTANCE, conductance=Entry(0.25, "W/K"), T_ambient=Entry(20.0, "°C"),
                      sample_flow=Entry(18.0, "kg/h"), T_exhaust=Entry(120.0, "°C"))
    assert assess(case).terms.heat_loss == pytest.approx(0.25 * 100 / 0.005)
    wet = assess(case.with_(T_exhaust=Entry(60.0, "°C")))
    assert wet.terms.heat_loss == pytest.approx(0.25 * (T_SAT - 293.15) / 0.005)  # the steam is at saturation


def test_a_normal_reading_makes_its_own_temperature_dry():
    """Whatever it is made of, loss and thermometer error together: a reading like it means dry steam."""
    case = DEMO.with_(heat_loss_method=BY_NORMAL, T_normal=Entry(144.0, "°C"))
    assert assess(case.with_(T_exhaust=Entry(144.0, "°C"))).x == pytest.approx(1.0, abs=1e-12)
    lower = assess(case.with_(T_exhaust=Entry(124.0, "°C"), sample_flow=None))
    h = vapour(102_100.0, np.array([417.15, 397.15])).h
    h_fg = lower.line.h_g - lower.line.h_f
    assert 1 - lower.x == pytest.approx((h[0] - h[1]) / h_fg, rel=1e-9)  # the line's kinetic energy cancels


def test_two_flows_find_the_conductance_they_were_made_with():
    case = DEMO.with_(line_velocity=None, exhaust_bore=None)
    first = assess(expecting(0.02, case))
    second = assess(expecting(0.02, case.with_(sample_flow=Entry(15.0, "kg/h"))))
    found = assess(case.with_(
        heat_loss_method=BY_TWO_FLOWS, T_exhaust=kelvin(first.T_exhaust), second_flow=Entry(15.0, "kg/h"),
        T_second=kelvin(second.T_exhaust), conductance=Entry(9.0, "W/K")))
    assert found.terms.heat_loss == pytest.approx(first.terms.heat_loss, rel=1e-3)
    assert found.x == pytest.approx(0.98, abs=1e-5)


@pytest.mark.parametrize(("method", "missing", "how"), [
    (BY_CONDUCTANCE, ("sample_flow",), "by conductance"),
    (BY_NORMAL, ("T_normal",), "by a normal reading"),
    (BY_TWO_FLOWS, ("sample_flow", "second_flow", "T_second"), "by two flows"),
])
def test_a_method_that_lacks_an_entry_is_refused_in_words(method, missing, how):
    texts = faults(DEMO.with_(heat_loss_method=method, **dict.fromkeys(missing)))
    assert tuple(texts) == missing
    for text in texts.values():
        assert text.endswith(f": got nothing, needs a value, since the heat loss is taken {how}\n"
                             "  - enter it, or choose another way to account for the heat loss")


def test_a_normal_reading_that_was_wet_is_refused():
    text = faults(DEMO.with_(heat_loss_method=BY_NORMAL, T_normal=Entry(95.0, "°C")))["T_normal"]
    assert text.startswith("Normal reading, dry steam: got 95 °C, needs more than 100.188 °C, saturation at the "
                           "exhaust pressure\n")


# ---- velocities


def test_velocities_by_hand():
    """31.7 kg/h through 15.7 and 26.6 mm: c = m v / A, ratio (v2/v1)(d1/d2)²."""
    a = assess(DEMO)
    v1, v2, m = a.path.v[0], a.path.v[-1], 31.7 / 3600
    v = a.velocities
    assert v.line == 22.5
    assert v.sample == pytest.approx(m * v1 / (pi / 4 * 0.0157**2))
    assert v.exhaust == pytest.approx(m * v2 / (pi / 4 * 0.0266**2))
    assert v.ratio == pytest.approx(v2 / v1 * (15.7 / 26.6) ** 2)
    assert v.keeping_bore_ratio == pytest.approx((v2 / v1) ** 0.5)
    assert v.kinetic_energy == pytest.approx(v.exhaust**2 / 2)
    assert v.kinetic_quality == pytest.approx(v.kinetic_energy / (a.line.h_g - a.line.h_f))
    assert v.kinetic_superheat == pytest.approx(v.kinetic_energy / vapour(a.path.p[-1], a.path.T[-1]).cp)


def test_without_a_flow_only_the_ratio_is_known():
    v = assess(DEMO.with_(sample_flow=None, heat_loss_method=NONE)).velocities
    assert (v.sample, v.exhaust, v.kinetic_energy, v.kinetic_superheat, v.kinetic_quality) == (None,) * 5
    assert v.ratio == pytest.approx(1.76 / 0.190 * (15.7 / 26.6) ** 2, rel=0.01)  # m³/kg at 122 and 180 °C
    nothing = assess(reading(20)).velocities
    assert (nothing.line, nothing.ratio) == (None, None)
    assert nothing.keeping_bore_ratio > 1


def test_the_kinetic_energy_is_counted_once_by_recovery():
    fast = DEMO.with_(sample_flow=Entry(80.0, "kg/h"), line_velocity=None, heat_loss_method=NONE)
    all_taken_up, none_taken_up = (assess(fast.with_(recovery=Entry(r, "1"))) for r in (1.0, 0.0))
    assert all_taken_up.x == pytest.approx(all_taken_up.x_as_read, abs=1e-12)
    assert none_taken_up.x - none_taken_up.x_as_read == pytest.approx(
        none_taken_up.terms.exhaust_velocity**2 / 2 / (none_taken_up.line.h_g - none_taken_up.line.h_f), rel=1e-9)


def test_a_fast_stream_can_be_wet_while_the_thermometer_shows_superheat():
    case = DEMO.with_(sample_flow=Entry(100.0, "kg/h"), exhaust_bore=Entry(15.0, "mm"), T_exhaust=Entry(112.0, "°C"))
    a = assess(case)
    assert a.superheat == pytest.approx(11.8, abs=0.05)  # more than the 5 K asked for
    assert (a.verdict, a.status, a.x) == (Verdict.CANNOT, Status.NOT_SUPERHEATED, None)
    # what the probe takes up of c²/2, over cp at saturation: 0.7 * 274² / 2 / 2070
    assert a.least_readable == pytest.approx(0.7 * a.terms.exhaust_velocity**2 / 2 / 2070, rel=0.02)
    assert a.margin == pytest.approx(a.superheat - a.least_readable) and a.margin < 0
    assert a.x_below == a.x_least > least_quality(a.si["p_line"], a.si["p_exhaust"], 5.0)


@pytest.mark.parametrize(("name", "changes", "text"), [
    ("exhaust_bore", {"sample_flow": Entry(1000.0, "kg/h")},
     "Exhaust bore: got 26.6 mm, needs about 35.8 mm at least for a sample flow of 1000 kg/h"),
    ("exhaust_bore", {"exhaust_bore": Entry(0.1, "in")},
     "Exhaust bore: got 0.1 in, needs about 0.251 in at least for a sample flow of 31.7 kg/h"),
    ("line_bore", {"line_bore": Entry(2.0, "mm")},
     "Sample bore before the orifice: got 2 mm, needs about 2.06 mm at least for a sample flow of 31.7 kg/h"),
])
def test_a_bore_too_small_for_the_flow_is_refused(name, changes, text):
    assert faults(DEMO.with_(**changes))[name].splitlines() == [
        text, "  - in a smaller bore the steam would have to be faster than sound",
        "  - check the sample flow and the bore, and their units"]


# ---- states and paths


def test_the_states_of_the_demo_case():
    a = assess(DEMO)
    line, dry, exhaust, bore = a.states
    p1, p2 = a.si["p_line"], a.si["p_exhaust"]
    assert (line.p, exhaust.p) == (pytest.approx(p1), pytest.approx(p2))
    assert (line.x, line.T) == (pytest.approx(a.x, abs=1e-9), pytest.approx(saturation_temperature(p1)))
    assert dry.x == pytest.approx(1.0)
    assert dry.h == pytest.approx(saturated(dry.p).h_g, rel=1e-9)
    assert [dry.h, exhaust.h] == pytest.approx([line.h, line.h], rel=1e-12)
    assert (exhaust.x, exhaust.T) == (None, pytest.approx(state_ph(p2, line.h).T))
    assert (line.velocity, exhaust.velocity) == (a.velocities.sample, a.velocities.exhaust)
    assert dry.velocity is None
    assert bore.velocity == pytest.approx(a.bore_path.velocity[-1]) and bore.h < exhaust.h
    assert line.s < dry.s < exhaust.s


def test_the_reading_lies_below_the_path_by_what_was_lost():
    a = assess(DEMO)
    t = a.terms
    lost = t.heat_loss + 0.15 * t.exhaust_velocity**2 - 0.5 * t.line_velocity**2
    assert a.states[2].h - a.read_state.h == pytest.approx(lost, rel=1e-6)
    assert (a.read_state.T, a.read_state.p) == (a.T_exhaust, a.si["p_exhaust"])


def test_paths_begin_at_the_line_and_end_at_the_exhaust():
    a = assess(DEMO)
    for path in (a.path, a.reach_path, a.bore_path):
        assert path.p[0] == pytest.approx(a.si["p_line"]) and path.p[-1] == pytest.approx(a.si["p_exhaust"])
        assert (np.diff(path.p) < 0).all()
    assert np.ptp(a.path.h) <= 1e-9 * a.path.h[0]
    assert a.reach_path.T[-1] - a.T_saturation == pytest.approx(5.0, abs=1.1)  # with its loss, 1 K above what is read
    assert a.bore_path.velocity[0] == pytest.approx(a.velocities.sample)


def test_the_reach_without_losses_ends_at_the_least_superheat():
    a = assess(reading(20))
    assert a.reach_path.T[-1] - T_SAT == pytest.approx(5.0, abs=1e-6)
    assert a.reach_path.x[0] == pytest.approx(a.x_least)


def test_a_constant_bore_that_chokes_ends_early_and_says_so():
    a = assess(DEMO.with_(line_bore=Entry(5.0, "mm")))
    assert a.bore_path.chokes and a.bore_path.p[-1] > 1.1 * a.si["p_exhaust"]
    assert a.states[-1].name == "Constant bore, chokes"
    assert a.states[-1].p == pytest.approx(a.bore_path.p_choke)


def test_no_bore_no_constant_bore_path():
    assert assess(DEMO.with_(line_bore=None)).bore_path is None
    assert assess(DEMO.with_(sample_flow=None, heat_loss_method=NONE)).bore_path is None


def test_a_path_that_never_leaves_the_dome_does_not_dry_out():
    a = assess(expecting(0.3))
    assert [s.name for s in a.states] == ["Line", "Exhaust"]
    assert not a.path.dries_out and (a.path.status == SteamStatus.WET).all()


def test_the_same_numbers_as_the_calorimeter_floor():
    a = assess(DEMO)
    direct = quality(a.si["p_line"], a.si["p_exhaust"], a.T_exhaust, **a.terms.arguments())
    assert a.x == direct.x and a.superheat == direct.superheat


# ---- anything goes


def numbers(thing):
    """Every float in a result, but for the paths, whose NaN have a meaning."""
    if isinstance(thing, float):
        yield thing
    elif isinstance(thing, tuple):
        for part in thing:
            yield from numbers(part)
    elif is_dataclass(thing) and not hasattr(thing, "p_dry"):
        for field in fields(thing):
            yield from numbers(getattr(thing, field.name))


@settings(max_examples=50, deadline=None)
@given(p_line=st.floats(1.05, 165.0), p_exhaust=st.floats(0.01, 40.0), T=st.floats(0.0, 500.0),
       wetness=st.floats(0.0, 100.0), question=st.sampled_from(["reading", EXPECTED]),
       method=st.sampled_from(list(LOSSES)), flow=st.none() | st.floats(0.04, 3600.0),
       bores=st.tuples(st.none() | st.floats(1.0, 200.0), st.none() | st.floats(1.0, 500.0)),
       recovery=st.floats(0.0, 1.0), c1=st.none() | st.floats(0.0, 200.0), leg=st.floats(-100.0, 100.0))
def test_any_case_is_assessed_or_refused_in_words(p_line, p_exhaust, T, wetness, question, method, flow, bores,
                                                  recovery, c1, leg):
    case = DEMO.with_(
        p_line=Entry(p_line, "bar", "absolute"), p_exhaust=Entry(p_exhaust, "bar", "absolute"), question=question,
        T_exhaust=Entry(T, "°C"), wetness=Entry(wetness, "%"), heat_loss_method=method, leg_height=Entry(leg, "m"),
        sample_flow=None if flow is None else Entry(flow, "kg/h"), recovery=Entry(recovery, "1"),
        line_velocity=None if c1 is None else Entry(c1, "m/s"),
        line_bore=None if bores[0] is None else Entry(bores[0], "mm"),
        exhaust_bore=None if bores[1] is None else Entry(bores[1], "mm"), **LOSSES[method])
    try:
        a = assess(case)
    except InputError as error:
        assert all(fault.quantity and fault.limit for fault in error.faults)
        return
    assert all(isfinite(value) for value in numbers(a))
    assert a.x is None or 0 <= a.x <= 1
    assert a.x_below is None or 0 <= a.x_below <= 1
    assert (a.x_below is not None) == (a.verdict is Verdict.CANNOT and not a.expected)
    assert (a.margin >= 0) == (a.verdict is not Verdict.CANNOT) or abs(a.margin) < 1e-6
    for path in (a.path, a.reach_path, a.bore_path):
        if path is not None:
            assert all(np.isfinite(getattr(path, name)).all() for name in ("p", "T", "x", "h", "s", "v", "velocity"))
            assert path.p[-1] == pytest.approx(a.si["p_exhaust"]) or not isnan(path.p_choke)
