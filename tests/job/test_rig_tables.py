"""The rig in words and rows, what it offers to take over, and the forecast's words."""

from __future__ import annotations

import re
from functools import cache

import pytest

from engine.job.case import BLANK
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_NORMAL, BY_TWO_FLOWS, NONE
from engine.job.case.fields_rig import COMPUTED
from engine.job.case.rows import Entry
from engine.job.rig import assess_rig
from engine.job.rig import tables as rig_tables
from engine.job.rig.offers import offers
from engine.job.rig.tables import LEFT, TAKEN, headline, left_words, points
from engine.job.uncertainty import forecast
from engine.job.uncertainty.forecast_words import budget_rows, forecast_advice, forecast_headline
from engine.steam.units import SI, US

rig_of = cache(assess_rig)
WET = DEMO.with_(lagging_state="wet")
TABLES = [getattr(rig_tables, n) for n in ("flow_rows", "exhaust_rows", "nozzle_rows", "loss_rows", "thermometer_rows",
                                           "warming_rows", "gauge_rows", "effect_rows")]
CASES = {"demo": DEMO, "blank": BLANK, "superheated": DEMO.with_(T_exhaust=Entry(180.0, "°C")),
         "wet": DEMO.with_(T_exhaust=Entry(90.0, "°C")), "no flow": DEMO.with_(sample_flow=None),
         "hose": DEMO.with_(exhaust_bore=Entry(13.0, "mm"), exhaust_length=Entry(10.0, "m"))}


def test_the_headline_names_the_largest_effect_and_whether_it_is_taken_out():
    assert headline(rig_of(DEMO)) == ("What matters most here: heat loss, 0.098 %pt, already taken out of the answer.")
    assert headline(rig_of(WET)) == ("What matters most here: heat loss beyond the correction, 0.20 %pt, still in the "
                                     "answer: the steam reads wetter than it is.")
    assert headline(rig_of(BLANK)).startswith("Nothing can be sized yet")


def test_what_is_left_is_summed():
    rig = rig_of(DEMO)
    total = sum(e.size for e in rig.sized if not e.corrected)
    assert f"together makes the steam read {points(total)} wetter than it is" in left_words(rig)
    assert left_words(rig).startswith("Of what is left in the answer, the largest is nozzle entry: 0.048 %pt")
    assert "either way: sample flow not weighed" in left_words(rig_of(DEMO.with_(flow_source=COMPUTED)))
    assert left_words(rig_of(BLANK)) == ""


@pytest.mark.parametrize(("size", "text"), [
    (0.000984, "0.098 %pt"), (-0.00104, "0.10 %pt"), (0.02, "2.00 %pt"), (0.0, "under 0.001 %pt")])
def test_points_have_the_digits_they_deserve(size, text):
    assert points(size) == text


@pytest.mark.parametrize("units", [SI, US], ids=["SI", "US"])
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_every_table_reads_well_whatever_the_case(case, units):
    for table in TABLES:
        for row in table(rig_of(case), units):
            text = " ".join(row.values() if isinstance(row, dict) else row)
            assert not re.search(r"\bnan\b|\binf\b|None|\{|Entry\(", text), (table.__name__, text)


def test_us_units_reach_every_part():
    rig = rig_of(DEMO)
    text = " ".join(str(table(rig, US)) for table in TABLES)
    for unit in ("lb/h", "ft/s", "psi", "Btu/lb", "°F", "in²", "inHg"):
        assert unit in text
    assert not re.search(r"kg/h|kJ/kg|\bbar\b|°C| m/s", text)


def test_effects_say_what_is_left_in_and_what_is_taken_out():
    rows = {row["Effect"]: row for row in rig_tables.effect_rows(rig_of(DEMO), SI)}
    assert rows["Heat loss"]["Now"] == TAKEN and rows["Nozzle entry"]["Now"] == LEFT
    assert rows["Heat loss"]["In its own unit"] == "0.98 K" and rows["Heat loss"]["Left out, it reads"] == "wetter"
    assert rows["Water on the wall"]["Now"] == "○ not sized" and "Enter" in rows["Water on the wall"]["From"]


def test_flow_words_judge_the_orifice():
    def words(**entries):
        return rig_tables.flow_words(rig_of(DEMO.with_(**entries)), SI)

    assert "agrees" in words()
    assert "clogging" in words(sample_flow=Entry(20.0, "kg/h"))
    assert "worn" in words(sample_flow=Entry(36.0, "kg/h"))
    assert "cannot be" in words(sample_flow=Entry(45.0, "kg/h"))
    assert words(sample_flow=None).startswith("Weigh the condensate")
    assert "the orifice now passes 55.87 kg/h" in words(flow_source=COMPUTED, bore=Entry(4.0, "mm"))


def test_exhaust_and_nozzle_words():
    hose = rig_tables.exhaust_words(rig_of(CASES["hose"]), SI)
    assert "too narrow" in hose and "superheat the case counts on" in hose
    assert rig_tables.exhaust_words(rig_of(DEMO), SI) == "Velocity and back pressure are small here."
    slow, fast = (rig_tables.nozzle_words(rig_of(DEMO.with_(port_bore=Entry(d, "mm"))), SI) for d in (5.0, 3.0))
    assert "slower" in slow and "wetter" in slow and "faster" in fast and "drier" in fast


def test_the_method_in_the_answer_is_marked():
    rows = rig_tables.loss_rows(rig_of(DEMO), SI)
    assert [row["Method"] for row in rows if row["Method"].startswith("●")] == ["● Conductance UA as entered"]
    assert next(r for r in rows if r["Method"] == "Two flows")["Heat loss"].startswith("Enter second sample flow")


# ---- offers


def offer(case, key, units=SI):
    return next((o for o in offers(rig_of(case), units) if o.key == key), None)


def test_the_computed_flow_is_offered_and_never_taken_silently():
    case = DEMO.with_(sample_flow=None)
    found = offer(case, "flow")
    assert found.label == "Use the computed flow, 31.43 kg/h"
    assert found.changes == {"sample_flow": Entry(31.43, "kg/h"), "flow_source": COMPUTED}
    assert rig_of(case).case["sample_flow"] is None
    assert offer(case.with_(**found.changes), "flow") is None


def test_the_computed_exhaust_pressure_is_offered_on_the_basis_that_stands_there():
    case = DEMO.with_(p_exhaust=Entry(0.0, "bar", "gauge"))
    found = offer(case, "exhaust")
    assert found.changes["p_exhaust"].basis == "gauge"
    taken = rig_of(case.with_(**found.changes))
    assert taken.point.si["p_exhaust"] == pytest.approx(taken.exhaust.value.pipe.value.p_exhaust, abs=30.0)
    assert next(e for e in taken.effects if e.name.startswith("Back pressure")).corrected
    assert offer(DEMO, "exhaust") is None  # it agrees already


def test_the_conductance_from_dimensions_brings_its_method():
    found = offer(DEMO.with_(heat_loss_method=NONE), "conductance")
    assert found.changes == {"conductance": Entry(0.168, "W/K"), "heat_loss_method": BY_CONDUCTANCE}


def test_bore_ports_line_velocity_and_coefficient_are_offered():
    case = DEMO.with_(wanted_flow=Entry(60.0, "kg/h"), line_velocity=None)
    assert offer(case, "bore").changes == {"bore": Entry(4.15, "mm")}
    assert offer(case, "ports").changes == {"port_bore": Entry(3.96, "mm")}
    assert offer(case, "line velocity").changes == {"line_velocity": Entry(22.7, "m/s")}
    assert offer(case, "discharge").changes == {"discharge": Entry(0.857, "1")}
    assert offer(case, "line velocity", US).changes["line_velocity"].unit == "ft/s"


def test_measured_losses_are_offered_once_they_are_there():
    case = DEMO.with_(second_flow=Entry(60.0, "kg/h"), T_second=Entry(121.6, "°C"), T_normal=Entry(149.0, "°C"))
    for method in (BY_TWO_FLOWS, BY_NORMAL):
        assert offer(DEMO, method) is None
        assert offer(case, method).changes == {"heat_loss_method": method}
        assert offer(case.with_(heat_loss_method=method), method) is None


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_whatever_is_offered_can_be_taken(case):
    for o in offers(rig_of(case), SI):
        assert assess_rig(case.with_(**o.changes)).point.aside == ()


# ---- the forecast's words


def test_the_forecast_says_u_the_best_improvement_and_that_sampling_dominates():
    f = forecast(DEMO)
    assert forecast_headline(f) == ("Expect U = 0.58 %pt of quality, 0.077 %pt by the instruments alone "
                                    "(coverage 95.45 %, k = 2.00).")
    dominates, best = forecast_advice(f)
    assert "98 % of the variance" in dominates
    assert f"the {f.best.group} is worth improving first" in best and points(f.best.U_halved) in best


def test_the_forecast_names_what_was_not_stated_and_what_cannot_be():
    assert forecast_headline(forecast(BLANK)).startswith("Nothing can be forecast yet")
    assert "sampling representativeness" in forecast_advice(forecast(BLANK))[-1]
    half = forecast(DEMO.with_(sampling=None))
    assert half.missing and forecast_headline(half).startswith("Expect U at least 0.077 %pt")
    unable = forecast(DEMO.with_(T_exhaust=Entry(95.0, "°C")))
    assert forecast_headline(unable) == unable.unable != "" and budget_rows(unable, SI) == []


def test_budget_rows_run_from_the_largest_and_add_up():
    rows = budget_rows(forecast(DEMO), SI)
    shares = [float(row["Share of the variance"].split()[0]) for row in rows]
    assert shares == sorted(shares, reverse=True) and sum(shares) == pytest.approx(100.0, abs=0.5)
    assert rows[0]["From"] == "sampling"
    alone = budget_rows(forecast(DEMO), SI, with_sampling=False)
    assert [row["From"] for row in alone] == [row["From"] for row in rows[1:]]
    assert sum(float(row["Share of the variance"].split()[0]) for row in alone) == pytest.approx(100.0, abs=0.5)
