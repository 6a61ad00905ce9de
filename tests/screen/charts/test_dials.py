"""Faces of gauges, and the recorder's strips of a rehearsal: every number is the simulation's."""

from __future__ import annotations

import math
import re
from html.parser import HTMLParser

import numpy as np
import pytest

from engine.job.case.demo import DEMO
from engine.job.commands.rehearse import by_the_book
from engine.job.rehearsal import advance, begin, take_readings
from engine.job.rehearsal.scenario import HiddenFault, Scenario
from engine.job.runsheet.plan import plan_of
from engine.screen.charts.dials import BEGIN, SWEEP, Face, angle, faces_html, nice_end, ticks
from engine.screen.charts.rehearsal import FINELY, recorder
from engine.screen.rehearsal_faces import decimals_of, faces_of
from engine.steam import saturation_temperature
from engine.steam.units import SI, US, from_si

FACE = Face("Line gauge", 9.0, "bar", 1, 0.0, 16.0, (8.9, 9.1), "planned 9.0")


@pytest.fixture(scope="module")
def played():
    return by_the_book(Scenario(DEMO, seed=2))


def test_the_pointer_runs_over_the_scale_and_stops_just_beyond_its_ends():
    assert angle(FACE, 0.0) == BEGIN and angle(FACE, 16.0) == BEGIN + SWEEP
    assert angle(FACE, 8.0) == pytest.approx(0.0)
    assert BEGIN - 0.03 * SWEEP < angle(FACE, -100.0) < BEGIN
    assert BEGIN + SWEEP < angle(FACE, 1e6) < BEGIN + 1.03 * SWEEP


@pytest.mark.parametrize(("low", "high"), [(0, 1), (0, 1.6), (0, 10), (0, 16), (0, 200), (0, 400), (-1, 1), (0, 250)])
def test_scales_carry_a_handful_of_numbers_and_marks_between_them(low, high):
    long, short = ticks(low, high)
    assert 4 <= len(long) <= 10
    assert long[0] >= low - 1e-9 and long[-1] <= high + 1e-9
    steps = np.diff(sorted([*long, *short]))
    np.testing.assert_allclose(steps, steps[0], rtol=1e-6)


def test_ends_of_scales_hold_what_is_on_them():
    for value in np.geomspace(1e-3, 1e4, 60):
        assert value <= nice_end(value) * (1 + 1e-9) <= 2.6 * value


def test_a_face_says_its_figure_to_those_who_cannot_see_it():
    labels = re.findall(r'aria-label="([^"]+)"', faces_html([FACE]))
    assert labels == ["Line gauge: 9.0 bar. planned 9.0"]
    assert Face("p", -0.0001, "bar", 3, 0.0, 1.0).figure == "0.000 bar"  # never minus nothing


def test_words_on_a_face_mean_nothing_to_the_browser():
    hostile = Face("<script>alert(1)</script>", 1.0, '"><img src=x>', 1, 0.0, 2.0, None, "<b>under</b>")
    seen = []

    class Reader(HTMLParser):
        def handle_starttag(self, tag, attrs):
            seen.append(tag)

    Reader().feed(faces_html([hostile]))
    assert set(seen) <= {"style", "div", "i", "span"}


def test_nothing_is_loaded_for_a_face():
    assert not re.search(r"url\(|https?:|<img|<script|<link", faces_html([FACE]))


@pytest.mark.parametrize("units", [SI, US])
def test_the_faces_of_a_rehearsal_are_its_gauges(played, units):
    line, exhaust, T, T_line = faces_of(played, plan_of(DEMO), units)
    shown = {name: float(values[-1]) for name, values in played.course.shown.items()}
    for face, name, kind in ((line, "line", "pressure"), (exhaust, "exhaust", "pressure"),
                             (T, "exhaust thermometer", "temperature"), (T_line, "line thermometer", "temperature")):
        assert face.value == pytest.approx(from_si(shown[name], units.unit(kind), kind))
        assert face.low <= face.value <= face.high or name == "exhaust"
    band = plan_of(DEMO).band
    assert T.band == pytest.approx(tuple(units.value(t, "temperature") for t in band))
    assert line.band[0] < float(line.under.removeprefix("planned ")) < line.band[1]
    p2 = shown["exhaust"] + played.rig.sheet.p_barometer
    assert T.under.endswith(units.text(saturation_temperature(p2), "temperature"))


def test_the_line_gauge_does_not_say_what_it_is_before_someone_looks():
    hidden = begin(Scenario(DEMO, frozenset({HiddenFault.GAUGE_AS_ABSOLUTE})))
    for r in (hidden, begin(Scenario(DEMO))):
        face = faces_of(r, None, SI)[0]
        assert face.unit == "bar" and "gauge" not in face.under and "abs" not in face.under


def test_decimals_show_the_steps_of_a_scale():
    for step in (1.0, 0.5, 0.2, 0.1, 0.05, 0.01, 0.001):
        assert round(step, decimals_of(step)) == pytest.approx(step)


# ---- the recorder


def test_the_strips_draw_what_the_pointers_did(played):
    whole, finely, line = recorder(played, SI)
    course = played.course
    x, y = (np.array(whole.figure["data"][0][c]) for c in "xy")
    np.testing.assert_allclose(y, np.interp(60 * x, course.time, course.standing["exhaust thermometer"]) - 273.15)
    saturation = np.array(whole.figure["data"][1]["y"])
    assert saturation.min() > 99 and saturation.max() < 101
    assert len(whole.figure["data"][2]["x"]) == len(played.readings)
    assert min(finely.figure["data"][0]["x"]) >= (played.now - FINELY) / 60
    p = np.array(line.figure["data"][0]["y"])
    assert p.mean() == pytest.approx(course.standing["line"][-p.size:].mean() / 1e5, rel=1e-3)


def test_the_strips_stay_small_and_finite_over_the_longest_rehearsal(played):
    for r in (begin(Scenario(DEMO)), advance(played, 30_000), take_readings(begin(Scenario(DEMO)), 3, 5.0)):
        for strip in recorder(r, US):
            for trace in strip.figure["data"]:
                assert len(trace["x"]) == len(trace["y"]) <= 900
                assert all(math.isfinite(v) for v in (*trace["x"], *trace["y"]))
            assert strip.label.endswith(".")
