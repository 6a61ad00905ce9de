"""Tables of a case: states, velocities, comparison; and as CSV, that a spreadsheet takes for data only."""

import csv
import io

import pytest

from engine.job.assessment import assess
from engine.job.assessment.tables import ABSENT, as_csv, comparison_rows, state_rows, velocity_rows
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import EXPECTED, NONE
from engine.job.case.rows import Entry
from engine.steam.units import SI, US

DRY = DEMO.with_(question=EXPECTED, wetness=Entry(0.0, "%"), title="Dry")
WET = DEMO.with_(T_exhaust=Entry(99.0, "°C"))
HOT = DEMO.with_(T_exhaust=Entry(180.0, "°C"))
STILL = DEMO.with_(sample_flow=None, line_velocity=None, heat_loss_method=NONE)


def by_label(rows):
    return {label: tuple(cells.values()) for label, *_ in [tuple(row.values())[:1] for row in rows]
            for cells in [{k: v for k, v in row.items() if k} for row in rows if row[""] == label]}


def compared(*cases, units=SI, **more):
    names = ("open", "A", "B", "C")
    return by_label(comparison_rows([(n, assess(c)) for n, c in zip(names, cases, strict=False)], units, **more))


# ---- states


def test_states_in_si():
    rows = state_rows(assess(DEMO), SI)
    assert list(rows[0]) == ["State", "p, bar abs", "T, °C", "x", "h, kJ/kg", "s, kJ/(kg K)", "v, m³/kg", "c, m/s"]
    line, dry, exhaust, bore = rows
    assert line["State"] == "Line" and line["p, bar abs"] == pytest.approx(9.92969, abs=1e-5)
    assert line["x"] == pytest.approx(0.9720, abs=5e-5) and line["T, °C"] == pytest.approx(179.58, abs=0.01)
    assert dry["x"] == pytest.approx(1.0) and dry["c, m/s"] is None
    assert exhaust["x"] is None and exhaust["p, bar abs"] == pytest.approx(1.021)
    assert exhaust["h, kJ/kg"] == pytest.approx(line["h, kJ/kg"], rel=1e-9)
    assert bore["c, m/s"] > exhaust["c, m/s"] > line["c, m/s"]


def test_states_in_us_units():
    rows = state_rows(assess(DEMO), US)
    assert list(rows[0]) == ["State", "p, psi abs", "T, °F", "x", "h, Btu/lb", "s, Btu/(lb °F)", "v, ft³/lb", "c, ft/s"]
    assert rows[0]["p, psi abs"] == pytest.approx(144.018, abs=1e-3)
    assert rows[0]["T, °F"] == pytest.approx(355.24, abs=0.02)
    assert rows[0]["h, Btu/lb"] == pytest.approx(state_rows(assess(DEMO), SI)[0]["h, kJ/kg"] / 2.326, rel=1e-12)


# ---- CSV


def test_csv_has_every_digit_and_reads_back():
    rows = state_rows(assess(DEMO), SI)
    again = list(csv.DictReader(io.StringIO(as_csv(rows))))
    assert [row["State"] for row in again] == [row["State"] for row in rows]
    for row, text in zip(rows, again, strict=True):
        for name, value in row.items():
            assert text[name] == ("" if value is None else str(value))
    assert float(again[0]["h, kJ/kg"]) == rows[0]["h, kJ/kg"]


def test_csv_without_rows():
    assert as_csv([]) == "\n"


@pytest.mark.parametrize("text", ["=1+1", "+1", "-1", "@SUM(A1)", "\t=1", "\r=1", "\n=1", "  =HYPERLINK(\"x\")"])
def test_text_is_never_a_formula(text):
    cell = list(csv.reader(io.StringIO(as_csv([{"name": text, "x": -0.5}]), newline="")))[1]
    assert cell == ["'" + text.replace("\r", "\n"), "-0.5"]


def test_commas_quotes_and_lines_stay_in_their_cell():
    text = 'a, "b"\nc; d'
    assert list(csv.reader(io.StringIO(as_csv([{"name": text}]), newline="")))[1] == [text]


# ---- velocities


def test_velocities_in_words():
    rows = dict(velocity_rows(assess(DEMO), SI))
    assert rows["Line velocity"] == "22.5 m/s"
    assert rows["Sample velocity before the orifice"] == "8.7 m/s"
    assert rows["Exhaust velocity"] == "28.0 m/s"
    assert rows["Kinetic energy at the exhaust"] == "0.391 kJ/kg"
    assert rows["… in superheat"] == "0.19 K"
    assert rows["… in quality"] == "0.019 %pt"
    assert rows["Quality without"].startswith("0.972") and rows["Quality without"].endswith("%pt)")
    assert rows["In one constant bore the sample"].startswith("reaches the exhaust at 8")
    in_us = dict(velocity_rows(assess(DEMO), US))
    assert (in_us["Line velocity"], in_us["… in superheat"]) == ("73.8 ft/s", "0.35 °F")


def test_a_choking_bore_is_told():
    rows = dict(velocity_rows(assess(DEMO.with_(line_bore=Entry(5.0, "mm"))), SI))
    assert rows["In one constant bore the sample"].startswith("chokes at ")
    assert " bar abs, " in rows["In one constant bore the sample"]


def test_without_flow_only_what_is_known():
    assert list(dict(velocity_rows(assess(STILL), SI))) == [
        "Exhaust velocity over sample velocity", "Bore ratio that keeps the velocity"]


def test_no_quality_no_effect_on_it():
    assert "Quality with kinetic energy" not in dict(velocity_rows(assess(WET), SI))


# ---- side by side


def test_a_comparison_shows_what_was_found_and_what_differs_only():
    rows = compared(DEMO, DRY)
    assert rows["Verdict"] == ("● reads", "● reads")
    assert rows["Quality"] == ("0.9720", "1.0000")
    assert rows["Wetness, %"] == ("2.80", "0.00")
    assert rows["Superheat"][0] == "20.9 K"
    assert rows["Least readable quality"] == ("0.9558", "0.9558")
    assert list(rows)[9:] == ["Title", "Question", "Expected wetness"]
    assert rows["Title"] == ("Factory main at 10 bar", "Dry")
    assert rows["Expected wetness"] == ("2.8 %", "0 %")


def test_like_cases_differ_in_nothing():
    rows = compared(DEMO, DEMO)
    assert len(rows) == 9 and all(a == b for a, b in rows.values())


def test_verdicts_without_a_quality():
    rows = compared(WET, HOT, STILL, DEMO.with_(p_line=Entry(0.3, "bar", "gauge"), T_exhaust=Entry(99.0, "°C")))
    assert rows["Verdict"] == ("○ cannot read", "△ line superheated", "● reads", "○ cannot read")
    assert rows["Quality"] == ("below 0.9558", "line superheated", "0.9711", "not told")
    assert rows["Wetness, %"][:2] == (ABSENT, ABSENT)
    assert rows["Exhaust velocity"][2] == rows["Kinetic energy, %pt"][2] == rows["Sample flow"][2] == ABSENT
    assert rows["Least readable quality"][3] == "above dry"


def test_a_comparison_in_us_units_keeps_entries_as_entered():
    rows = compared(DEMO, DEMO.with_(p_line=Entry(150.0, "psi", "gauge")), units=US)
    assert rows["Superheat"] == ("37.6 °F", "37.6 °F")
    assert rows["Line pressure"] == ("9 bar gauge", "150 psi gauge")


def test_what_people_wrote_goes_through_the_given_words():
    rows = compared(DEMO, DEMO.with_(title="<b>", note=""), words=lambda text: f"[{text}]")
    assert rows["Title"] == ("[Factory main at 10 bar]", "[<b>]")
    assert rows["Note"] == ("[An invented example.]", "[]")
    assert rows["Quality"] == ("0.9720", "0.9720")


@pytest.mark.parametrize("units", [SI, US], ids=["SI", "US"])
def test_no_cell_says_nan_or_none(units):
    for case in (DEMO, DRY, WET, HOT, STILL):
        cells = [cell for row in comparison_rows([("open", assess(case)), ("A", assess(STILL))], units)
                 for cell in row.values()] + [cell for row in velocity_rows(assess(case), units) for cell in row]
        assert all(isinstance(cell, str) for cell in cells)
        # "none" is also a way to account for the heat loss
        assert not [cell for cell in cells if {"nan", "none"} & set(cell.lower().split()) and cell != NONE]
