"""The answer in words: each verdict in both unit systems, reasons, remedies, assumptions."""

import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.job.assessment import assess
from engine.job.assessment.answer import SHAPES, answer, percent_points, quality_text
from engine.job.assessment.methods_said import in_short
from engine.job.assessment.verdict import Verdict
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import BY_KG, BY_NORMAL, EXPECTED, NONE, UNDECIDED
from engine.job.case.rows import Entry
from engine.steam.errors import InputError
from engine.steam.units import SI, US

READS = DEMO
THIN = DEMO.with_(T_exhaust=Entry(107.0, "°C"))
LITTLE = DEMO.with_(T_exhaust=Entry(103.0, "°C"))
WET = DEMO.with_(T_exhaust=Entry(99.0, "°C"))
HOT = DEMO.with_(T_exhaust=Entry(165.0, "°C"))
NO_BOUND = WET.with_(p_line=Entry(0.3, "bar", "gauge"))
FAST = DEMO.with_(sample_flow=Entry(100.0, "kg/h"), exhaust_bore=Entry(15.0, "mm"), T_exhaust=Entry(112.0, "°C"))
SEEN = DEMO.with_(question=EXPECTED)
UNSEEN = SEEN.with_(wetness=Entry(6.0, "%"))
UNSEEN_THIN = SEEN.with_(wetness=Entry(4.6, "%"))
CASES = {"reads": READS, "thin": THIN, "little": LITTLE, "wet": WET, "hot": HOT, "no bound": NO_BOUND, "fast": FAST,
         "seen": SEEN, "unseen": UNSEEN, "unseen, thin": UNSEEN_THIN}


def said(case, units=SI):
    return answer(assess(case), units)


@pytest.mark.parametrize(("name", "shape", "in_si", "in_us"), [
    ("reads", "●", "Quality in the line 0.9720, wetness 2.80 %.", "Quality in the line 0.9720, wetness 2.80 %."),
    ("thin", "◐", "Quality in the line 0.9576, wetness 4.24 %.", "Quality in the line 0.9576, wetness 4.24 %."),
    ("little", "○", "No quality can be given: it is below 0.9558.", "No quality can be given: it is below 0.9558."),
    ("wet", "○", "No quality can be given: it is below 0.9558.", "No quality can be given: it is below 0.9558."),
    ("hot", "△", "The line is superheated by 12.4 K: there is no wetness to measure.",
     "The line is superheated by 22.3 °F: there is no wetness to measure."),
    ("no bound", "○", "No quality can be given, nor a bound of it.", "No quality can be given, nor a bound of it."),
    ("fast", "○", "No quality can be given: it is below 0.9682.", "No quality can be given: it is below 0.9682."),
    ("seen", "●", "For a wetness of 2.80 % the exhaust thermometer must show 121.1 °C.",
     "For a wetness of 2.80 % the exhaust thermometer must show 249.9 °F."),
    ("unseen", "○", "A wetness of 6.00 % cannot be read here.", "A wetness of 6.00 % cannot be read here."),
    ("unseen, thin", "○", "A wetness of 4.60 % cannot be read here.", "A wetness of 4.60 % cannot be read here."),
])
def test_the_headline(name, shape, in_si, in_us):
    for units, headline in ((SI, in_si), (US, in_us)):
        words = said(CASES[name], units)
        assert (words.headline, words.shape) == (headline, shape)
        assert words.verdict == assess(CASES[name]).verdict.value


def test_every_verdict_has_a_shape_of_its_own():
    assert set(SHAPES) == set(Verdict) and len(set(SHAPES.values())) == len(Verdict)


# ---- reasons and remedies


def test_a_reading_with_its_margin():
    assert said(READS).reasons == (
        "The exhaust is 20.9 K superheated, 15.9 K above the least readable superheat of 5 K.",
        "Between these pressures the least readable quality is 0.9558.")
    assert said(READS, US).reasons[0] == (
        "The exhaust is 37.6 °F superheated, 28.6 °F above the least readable superheat of 9 °F.")
    assert said(READS).remedies == ()
    assert said(SEEN).reasons[0].startswith("The exhaust must be 20.9 K superheated, 15.9 K above ")


def test_a_thin_margin_says_what_it_risks_and_what_to_do():
    words = said(THIN)
    assert words.reasons[-1] == ("The margin is thin: below 10 K of superheat a small error of the thermometer or of "
                                 "the pressure beside it can hide wet steam.")
    assert words.remedies == ("Lower the exhaust pressure or use a better thermometer, and check both before relying "
                              "on it.",)
    assert "below 18 °F of superheat" in said(THIN, US).reasons[-1]


def test_limits_keep_the_digits_they_were_given():
    words = said(THIN.with_(least_superheat=Entry(2.5, "K"), comfortable_superheat=Entry(7.25, "K")))
    assert "above the least readable superheat of 2.5 K." in words.reasons[0]
    assert "below 7.25 K of superheat" in words.reasons[-1]


def test_too_little_superheat():
    assert said(LITTLE).reasons == (
        "The exhaust thermometer shows 103.0 °C, only 2.8 K above saturation there, 100.2 °C: below 5 K wet steam may "
        "pass for superheated.",
        "Between these pressures the least readable quality is 0.9558.")
    assert said(LITTLE).remedies == (
        "A lower exhaust pressure, a separator ahead of the orifice, or electric superheating would extend the reach; "
        "check first that both pressures are right, gauge or absolute.",)


def test_no_superheat():
    assert said(WET, US).reasons[0] == (
        "The exhaust thermometer shows 210.2 °F, not above saturation there, 212.3 °F: wet steam has no enthalpy that "
        "pressure and temperature could tell.")


def test_not_even_dry_steam():
    assert said(NO_BOUND).reasons[-1] == (
        "Between these pressures not even dry steam arrives superheated enough to be read.")


def test_a_fast_stream_is_named_as_the_reason():
    assert said(FAST).reasons[0] == (
        "The exhaust thermometer shows 112.0 °C, only 11.8 K above saturation there, 100.2 °C: below 12.4 K in a "
        "stream of 274.6 m/s, which the thermometer slows down and so heats, wet steam can show that.")
    assert "in a stream of 901.0 ft/s," in said(FAST, US).reasons[0]


def test_a_wetness_that_leaves_the_exhaust_wet():
    assert said(UNSEEN).reasons[0] == (
        "The exhaust thermometer would show 100.2 °C; saturation there is 100.2 °C. The exhaust would be wet, quality "
        "0.9904.")
    assert said(UNSEEN_THIN).reasons[0] == "The exhaust thermometer would show 103.5 °C; saturation there is 100.2 °C."


def test_a_superheated_line_asks_whether_it_should_be_wet():
    words = said(HOT)
    assert words.reasons == ("The enthalpy found is above that of dry saturated steam at 9.930 bar abs.",)
    assert words.remedies == ("If the line should be wet, check the exhaust thermometer, and whether the line pressure "
                              "was meant gauge or absolute.",)
    assert "at 144.02 psi abs." in said(HOT, US).reasons[0]


# ---- what was taken for granted


def test_assumptions_of_the_demo_case():
    assert said(READS).assumed == (
        "Barometer 100.80 kPa, as entered.",
        "Water leg of 0.8 m taken off the line gauge, water at 20 °C.",
        "Heat loss 2.0 kJ/kg of sample, by conductance, +0.10 %pt.",
        "Exhaust velocity 28.0 m/s, recovery factor 0.7: kinetic energy -0.01 %pt.",
        "Steam properties: IAPWS-IF97.")
    assert said(READS, US).assumed[:4] == (
        "Barometer 29.77 inHg, as entered.",
        "Water leg of 0.8 m taken off the line gauge, water at 68 °F.",
        "Heat loss 0.9 Btu/lb of sample, by conductance, +0.10 %pt.",
        "Exhaust velocity 91.8 ft/s, recovery factor 0.7: kinetic energy -0.01 %pt.")


@pytest.mark.parametrize(("changes", "line"), [
    ({"heat_loss_method": UNDECIDED}, "Heat loss not decided: taken as nothing, so the steam may be drier than shown."),
    ({"heat_loss_method": NONE}, "Heat loss knowingly taken as nothing."),
    ({"heat_loss_method": BY_KG, "heat_loss": Entry(3.0, "kJ/kg")},
     "Heat loss 3.0 kJ/kg of sample, as entered, +0.15 %pt."),
    ({"heat_loss_method": BY_NORMAL, "T_normal": Entry(144.0, "°C")},
     "Heat loss 12.5 kJ/kg of sample, by a normal reading, +0.62 %pt."),
    ({"sample_flow": None, "heat_loss_method": NONE},
     "Kinetic energy left out: no sample flow and exhaust bore given."),
    ({"barometer_source": "altitude", "altitude": Entry(500.0, "m")},
     "Barometer 95.46 kPa, standard atmosphere at the altitude."),
], ids=lambda value: "" if isinstance(value, str) else " ".join(value))
def test_other_assumptions(changes, line):
    assert line in said(DEMO.with_(**changes)).assumed


def test_no_leg_no_word_of_it():
    assert not [line for line in said(DEMO.with_(leg_height=Entry(0.0, "m"))).assumed if "leg" in line]


def test_small_numbers_in_words():
    assert percent_points(-0.00004) == "-0.00 %pt"
    assert quality_text(1.0) == "1.0000"


# ---- whatever the case


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
@pytest.mark.parametrize("units", [SI, US], ids=["SI", "US"])
def test_sentences_are_whole_and_in_the_units_asked_for(case, units):
    words = said(case, units)
    lines = (words.headline, *words.reasons, *words.remedies, *words.assumed)
    assert all(re.fullmatch(r"[A-Z].*[.]", line) for line in lines)
    assert not [line for line in lines if re.search(r"\b(nan|none|inf)\b", line, re.IGNORECASE)]
    foreign = r" (K|bar|kPa|m/s|kJ/kg|°C)\b" if units is US else r" (psi|°F|inHg|ft/s|Btu/lb)\b"
    assert not [line for line in lines if re.search(foreign, line)]


ANY = {"p_line": st.floats(1.05, 165.0), "p_exhaust": st.floats(0.01, 40.0), "T_exhaust": st.floats(0.0, 500.0),
       "wetness": st.floats(0.0, 100.0), "sample_flow": st.floats(0.1, 2000.0), "heat_loss": st.floats(-100.0, 500.0),
       "least_superheat": st.floats(0.0, 50.0)}


@settings(max_examples=30, deadline=None)
@given(st.fixed_dictionaries(ANY), st.sampled_from(["reading", EXPECTED]), st.sampled_from([SI, US]))
def test_neither_bar_nor_answer_ever_say_nan_or_none(values, question, units):
    units_of = {"p_line": ("bar", "absolute"), "p_exhaust": ("bar", "absolute"), "T_exhaust": ("°C",),
                "wetness": ("%",), "sample_flow": ("kg/h",), "heat_loss": ("kJ/kg",), "least_superheat": ("K",)}
    entries = {name: Entry(value, *units_of[name]) for name, value in values.items()}
    case = DEMO.with_(question=question, heat_loss_method=BY_KG, comfortable_superheat=Entry(60.0, "K"), **entries)
    try:
        words = said(case, units)
    except InputError:
        return
    for line in (*in_short(case), words.headline, *words.reasons, *words.remedies, *words.assumed):
        assert not re.search(r"\b(nan|none|inf)\b", line, re.IGNORECASE), line
