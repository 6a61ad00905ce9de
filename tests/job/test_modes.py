"""Separator and heater as methods of a case: what they need, say, reach, and when they contradict themselves."""

import numpy as np
import pytest

from engine.calorimeter import MassBasis, electric_quality, separated_quality, separated_reading
from engine.job.assessment import Verdict, assess
from engine.job.assessment.answer import SHAPES, answer
from engine.job.assessment.methods_said import in_short
from engine.job.assessment.tables import comparison_rows, state_rows, velocity_rows
from engine.job.case import BLANK
from engine.job.case.casefile import from_json, from_link, to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import HEATED, HEATING_STEAM, WET_LINE_READ
from engine.job.case.fields_modes import BY_VOLUME, ELECTRIC, MODE_FIELDS, SEPARATING, THROTTLING
from engine.job.case.fields_path import BY_KG, EXPECTED, READING
from engine.job.case.rows import Entry
from engine.steam.errors import InputError
from engine.steam.units import SI, US

WET, HOT = WET_LINE_READ, HEATED


def expecting(case, wetness, **changes):
    return case.with_(question=EXPECTED, wetness=Entry(float(wetness), "1"), **changes)


def celsius(value):
    return Entry(float(value), "°C")


def faults(case):
    with pytest.raises(InputError) as caught:
        assess(case)
    return {fault.name: str(fault) for fault in caught.value.faults}


def words(case, units=SI):
    said = answer(assess(case), units)
    return " ".join((said.headline, *said.reasons, *said.remedies, *said.assumed))


# ---- what a method needs

def test_a_separator_needs_both_masses_and_their_basis():
    missing = faults(WET.with_(water_mass=None, weighed_mass=None, weighed_basis="not stated"))
    assert set(missing) == {"water_mass", "weighed_mass", "weighed_basis"}
    assert "needs “throttled steam condensed” or “total collected”" in missing["weighed_basis"]
    assert "it moves the quality by several tenths of a %pt" in missing["weighed_basis"]
    by_volume = faults(WET.with_(water_by=BY_VOLUME))
    assert set(by_volume) == {"water_volume", "T_water"}


def test_a_heater_needs_flow_power_and_temperature():
    assert set(faults(HOT.with_(sample_flow=None, power=None, power_loss=None, T_heater=None))) == {
        "sample_flow", "power", "T_heater"}
    assert set(faults(expecting(HOT, 0.1, sample_flow=None))) == {"sample_flow"}


def test_an_expected_wetness_needs_no_readings():
    bare = BLANK.with_(p_line=Entry(8.0, "bar", "absolute"))
    assert assess(expecting(bare, 0.12, mode=SEPARATING)).verdict is Verdict.READS
    assert assess(expecting(bare, 0.12, mode=ELECTRIC, sample_flow=Entry(12.0, "kg/h"))).verdict is Verdict.READS


def test_pressures_between_line_and_exhaust():
    above = faults(WET.with_(p_separator=Entry(8.2, "bar", "absolute")))
    assert "needs at most the line pressure, 8 bar absolute" in above["p_separator"]
    below = faults(WET.with_(p_separator=Entry(1.06, "bar", "absolute"), p_exhaust=Entry(1.1, "bar", "absolute")))
    assert "needs more than the exhaust pressure, 1.1 bar absolute" in below["p_separator"]
    assert "at most the line pressure" in faults(HOT.with_(p_heater=Entry(5.2, "bar", "gauge")))["p_heater"]
    assert assess(HOT.with_(p_exhaust=Entry(7.0, "bar", "absolute"), p_line=Entry(7.1, "bar", "absolute"))).x
    assert "less than the power, 860 W" in faults(HOT.with_(power_loss=Entry(900.0, "W")))["power_loss"]
    assert "more than the drained water that is in it, 0.9 kg" in faults(
        WET.with_(weighed_basis=MassBasis.TOTAL, weighed_mass=Entry(0.8, "kg")))["weighed_mass"]


def test_throttling_is_untouched_by_what_the_other_methods_were_given():
    filled = {name: WET[name] for name in ("water_mass", "weighed_mass", "weighed_basis")} | {
        name: HOT[name] for name in ("T_heater", "power", "power_loss")}
    plain, other = assess(DEMO), assess(DEMO.with_(**filled))
    assert (other.x, other.x_least, other.T_exhaust) == (plain.x, plain.x_least, plain.T_exhaust)
    assert other.separation is None and other.heating is None


# ---- separator: a reading

def test_the_reading_behind_a_separator_is_the_engines():
    case = WET.with_(heat_loss_method=BY_KG, heat_loss=Entry(4.0, "kJ/kg"), vessel_loss=Entry(3.0, "kJ/kg"),
                     p_separator=Entry(7.5, "bar", "absolute"))
    a = assess(case)
    engine = separated_quality(8e5, 101_325.0, 385.45, 0.9, 9.1, MassBasis.THROTTLED, p_separator=7.5e5,
                               vessel_loss=3e3, heat_loss=4e3)
    assert a.x == pytest.approx(engine.x, abs=1e-12)
    assert a.separation.x_throttled == pytest.approx(engine.x_throttled, abs=1e-12)
    assert a.separation.drain_fraction == pytest.approx(engine.drain_fraction) == pytest.approx(0.09)
    assert a.superheat == pytest.approx(engine.superheat)
    assert a.x_as_read < a.x  # the loss of the rig was not water in the line


def test_both_qualities_are_said():
    text = words(WET)
    assert "Quality in the line 0.8800, wetness 12.00 %." in text
    assert "9.0 % of the sample was drained as water, 75.0 % of the water there" in text
    assert "what was left had a quality of 0.9671 before the throttle" in text
    assert "Weighed beside the water: throttled steam condensed." in text
    assert "not stated: taken as nothing, so the steam may be drier than shown" in words(WET.with_(vessel_loss=None))
    assert "12.00 %" in words(WET, US)


def test_states_from_line_to_exhaust():
    a = assess(WET)
    assert [s.name for s in a.states] == ["Line", "Drained water", "Throttled steam", "Dries out", "Exhaust"]
    line, water, steam = a.states[:3]
    assert line.x == pytest.approx(a.x) and water.x == 0.0 and steam.x == pytest.approx(a.separation.x_throttled)
    z = a.separation.drain_fraction
    assert line.h == pytest.approx(z * water.h + (1 - z) * steam.h, rel=1e-12)
    assert a.path.p[0] == pytest.approx(8e5) and a.path.h[0] == pytest.approx(steam.h)
    assert len(state_rows(a, SI)) == 5 and velocity_rows(a, SI)


def test_water_and_superheated_steam_from_one_vessel_contradict_each_other():
    a = assess(WET.with_(T_exhaust=celsius(160.0)))
    assert a.verdict is Verdict.CONTRADICTS and a.x is None and a.x_below is None
    said = answer(a, SI)
    assert said.shape == SHAPES[Verdict.CONTRADICTS] == "≠"
    assert "contradict each other" in said.headline and "1.0137" in said.reasons[0]
    assert comparison_rows([("A", a)], SI)[1]["A"] == "not told"


def test_dry_within_the_uncertainty_is_no_contradiction():
    just = WET.with_(T_exhaust=celsius(146.2))
    a = assess(just)
    assert 1.0 < a.separation.x_throttled < 1.001
    assert a.verdict is Verdict.READS and a.x == pytest.approx(0.91 * a.separation.x_throttled, abs=1e-9)
    assert "dry within the uncertainty" in words(just)
    assert assess(just.with_(U_quality=Entry(0.0, "%pt"))).verdict is Verdict.CONTRADICTS


def test_a_superheated_line_drains_nothing():
    a = assess(WET.with_(T_exhaust=celsius(160.0), water_mass=Entry(0.0, "kg")))
    assert a.verdict is Verdict.SUPERHEATED and a.line_superheat > 5


def test_wet_exhaust_gives_a_bound_for_the_line():
    a = assess(WET.with_(T_exhaust=celsius(99.0)))
    assert a.verdict is Verdict.CANNOT and a.x is None
    assert a.x_below == pytest.approx(a.x_least) == pytest.approx(0.91 * 0.9598, abs=1e-3)
    assert f"below {a.x_below:.4f}" in words(WET.with_(T_exhaust=celsius(99.0)))


# ---- separator: an expected wetness

@pytest.mark.parametrize("wetness", [0.05, 0.12, 0.30])
def test_what_must_be_seen_gives_the_wetness_back(wetness):
    seen = assess(expecting(WET, wetness, water_share=Entry(95.0, "%")))
    z = seen.separation.drain_fraction
    assert seen.separation.water_share == pytest.approx(0.95)
    assert seen.T_exhaust == pytest.approx(separated_reading(8e5, 1 - wetness, 101_325.0, z).T_exhaust, abs=1e-6)
    back = assess(WET.with_(T_exhaust=Entry(seen.T_exhaust, "K"), water_mass=Entry(z, "kg"),
                            weighed_mass=Entry(1 - z, "kg")))
    assert back.x == pytest.approx(1 - wetness, abs=1e-9)


def test_the_least_that_must_be_drained_is_just_readable():
    least = assess(expecting(WET, 0.12)).separation.drain_least
    just = assess(expecting(WET, 0.12, water_share=Entry(100 * least / 0.12, "%")))
    assert just.margin == pytest.approx(0.0, abs=1e-6)
    too_little = expecting(WET, 0.12, water_share=Entry(50.0, "%"))
    assert assess(too_little).verdict is Verdict.CANNOT
    assert "with 6.0 % of the sample drained as water cannot be read" in words(too_little)
    assert "At least 8.3 % of the sample must be drained" in words(too_little)
    assert assess(expecting(WET, 0.01)).separation.drain_least == 0.0


def test_the_reach_of_a_separator_is_where_the_margin_ends():
    a = assess(expecting(WET, 0.12, water_share=Entry(80.0, "%")))
    at_the_limit = assess(expecting(WET, 1 - a.x_least, water_share=Entry(80.0, "%")))
    assert at_the_limit.margin == pytest.approx(0.0, abs=1e-6)


# ---- heater

def test_the_reading_behind_a_heater_is_the_engines():
    a = assess(HOT)
    engine = electric_quality(6e5, 6e5, 451.95, 860.0, 12 / 3600, power_loss=7.4)
    assert a.x == pytest.approx(engine.x, abs=1e-12) and a.superheat == pytest.approx(engine.superheat)
    assert a.x_as_read < a.x  # heat that was lost did not go into the steam
    assert a.in_quality(7.4 * 300) == pytest.approx(a.x - a.x_as_read, rel=1e-6)
    text = words(HOT)
    assert "853 W in 12.0 kg/h of sample is 255.8 kJ/kg" in text and "Heater loss 7 W, +0.11 %pt." in text
    assert "Heat lost by the heater not stated" in words(HOT.with_(power_loss=None))
    assert assess(HOT.with_(power_loss=None)).heat_loss_undecided


def test_the_path_is_heating_at_constant_pressure():
    a = assess(HOT)
    assert (a.path.p == 6e5).all() and (np.diff(a.path.h) >= 0).all()
    assert [s.name for s in a.states] == ["Line", "Dries out", "After the heater"]
    dry, after = a.states[1:]
    assert dry.x == 1.0
    temperatures = [state.T for state in (dry, after)]
    assert temperatures == pytest.approx([a.T_saturation, a.T_exhaust], abs=1e-6)
    throttled = assess(HOT.with_(p_heater=Entry(1.0, "bar", "absolute"), T_heater=celsius(130.0)))
    assert throttled.path.p[0] == 6e5 and (throttled.path.p[1:] == 1e5).all()
    assert throttled.path.h[0] == throttled.path.h[1]


def test_power_and_temperature_give_the_wetness_back():
    seen = assess(expecting(HOT, 0.08))
    back = assess(HOT.with_(T_heater=Entry(seen.T_exhaust, "K")))
    assert back.x == pytest.approx(0.92, abs=1e-9)


def test_without_a_power_the_comfortable_superheat_sets_it():
    a = assess(expecting(HOT, 0.1, power=None))
    assert a.verdict is Verdict.READS and not a.heating.chosen
    assert a.superheat == pytest.approx(10.01, abs=1e-6) and a.heating.power > a.heating.power_least
    assert "No power was chosen" in words(expecting(HOT, 0.1, power=None))


@pytest.mark.parametrize(("superheat", "verdict"), [
    (4.99, Verdict.CANNOT), (5.01, Verdict.THIN), (9.99, Verdict.THIN), (10.01, Verdict.READS)])
def test_the_verdict_behind_a_heater_follows_the_superheat(superheat, verdict):
    T_saturation = assess(HOT).T_saturation
    a = assess(HOT.with_(T_heater=Entry(T_saturation + superheat, "K")))
    assert a.verdict is verdict and a.superheat == pytest.approx(superheat)


def test_too_little_power_cannot_read():
    case = expecting(HOT, 0.12)
    a = assess(case)
    assert a.verdict is Verdict.CANNOT and a.heating.power_least > a.heating.power
    assert f"At least {a.heating.power_least:.0f} W are needed." in words(case)
    wet = assess(HOT.with_(T_heater=celsius(158.5)))
    assert wet.verdict is Verdict.CANNOT and wet.x_below == pytest.approx(wet.x_least)
    assert assess(HOT.with_(T_heater=celsius(350.0))).verdict is Verdict.SUPERHEATED


def test_so_much_power_reads_any_wetness():
    case = expecting(HOT, 0.9, power=Entry(8000.0, "W"))
    assert assess(case).x_least < 0 and "any wetness can be read" in words(case)


# ---- all methods

@pytest.mark.parametrize("base", [DEMO, HEATING_STEAM, HEATED], ids=lambda case: case["title"])
@pytest.mark.parametrize("mode", [THROTTLING, SEPARATING, ELECTRIC])
@pytest.mark.parametrize("wetness", [0.0, 0.004, 0.4, 0.95])  # all water cannot also lose heat
def test_any_expected_wetness_is_assessed_in_any_method(base, mode, wetness):
    case = expecting(base, wetness, mode=mode, sample_flow=Entry(20.0, "kg/h"), power=None)
    a = assess(case)
    assert a.x == pytest.approx(1 - wetness) and a.case["mode"] == mode
    assert (a.margin >= 0) == (a.verdict is not Verdict.CANNOT)
    assert words(case) and words(case, US)


def test_wetter_steam_shows_less_superheat_in_every_method():
    for mode in (SEPARATING, ELECTRIC):
        seen = [assess(expecting(HOT, w, mode=mode, power=Entry(900.0, "W"))).superheat for w in (0.02, 0.06, 0.1)]
        assert (np.diff(seen) < 0).all()


def test_the_entries_travel_in_file_and_link():
    for case in (WET, HOT):
        assert from_json(to_json(case)) == case and from_link(to_link(case)) == case
        assert {field.name for field in MODE_FIELDS} <= set(case.values)


def test_the_case_in_short():
    assert in_short(WET) == ("line 8 bar absolute", "separator first", "exhaust 1.01325 bar absolute",
                             "reading 112.3 °C")
    assert in_short(HOT) == ("line 6 bar absolute", "heater 860 W", "reading 178.8 °C")
    assert in_short(HOT.with_(T_heater=None))[-1] == "reading not given"
    assert HOT["question"] == READING
