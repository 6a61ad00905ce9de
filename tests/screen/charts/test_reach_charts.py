"""The pictures of the reach: right places, both systems of units, both themes, and nothing that JSON cannot carry."""

import copy
import json
import math
from functools import cache

import numpy as np
import pytest

from engine.job.case.demo import DEMO
from engine.job.case.examples import EXAMPLES, HEATED, HEATING_STEAM, WET_LINE, WET_LINE_READ
from engine.job.case.rows import Entry
from engine.job.reach import assess_reach
from engine.job.reach.instrument_chart import instrument_chart
from engine.job.reach.map import map_key, sections
from engine.screen.charts import wire
from engine.screen.charts.diagram import COLOURS
from engine.screen.charts.reach import (
    found_map,
    instrument_diagram,
    map_background,
    reach_map_diagram,
    section_diagrams,
)
from engine.steam.units import SI, US

BOTH = pytest.mark.parametrize("units", [SI, US], ids=["SI", "US"])
planned = cache(assess_reach)


def all_diagrams(case, units):
    plan = planned(case)
    return (reach_map_diagram(plan, units), *section_diagrams(plan, sections(plan), units),
            instrument_diagram(plan, instrument_chart(plan, units), units))


def trace(diagram, **wanted):
    return next(t for t in diagram.figure["data"] if all(t.get(k) == v for k, v in wanted.items()))


@BOTH
@pytest.mark.parametrize("case", EXAMPLES.values(), ids=EXAMPLES)
def test_every_example_is_drawn_and_sent(case, units):
    for diagram in all_diagrams(case, units):
        sent = wire.message([diagram], key="k", height=1, columns=1, enlarged=None)
        json.loads(sent.background), json.loads(sent.moving)
        assert diagram.label.endswith(".") and diagram.title
        for theme in ("light", "dark"):
            assert "var:" not in json.dumps(diagram.painted(theme), default=str)


def test_the_map_goes_to_the_browser_once_and_small():
    before, after = (reach_map_diagram(planned(DEMO.with_(wetness_high=Entry(y, "%"))), SI) for y in (3.0, 3.5))
    texts = [wire.message([d], key="k", height=1, columns=1, enlarged=None) for d in (before, after)]
    assert texts[0].background == texts[1].background and texts[0].moving != texts[1].moving
    assert len(texts[0].background) < 120_000 and len(texts[0].moving) < 20_000
    assert before.figure["data"][0] is after.figure["data"][0]


@BOTH
def test_the_case_and_its_pinned_fellows_stand_at_their_pressures(units):
    plan, other = planned(DEMO), planned(WET_LINE)
    diagram = reach_map_diagram(plan, units, [("A", other), ("B", planned(HEATED))])
    here, = (t for t in diagram.figure["data"] if t.get("text") == ["<b>this case</b>"])
    assert here["x"] == [pytest.approx(units.value(plan.si["p_line"], "pressure"))]
    assert here["y"] == [pytest.approx(units.value(plan.si["p_exhaust"], "pressure"))]
    pinned = trace(diagram, text=["<b>A</b>"])  # B has a power, and no place over an exhaust pressure
    assert pinned["x"] == [pytest.approx(units.value(8e5, "pressure"))]
    assert units.unit("pressure") in diagram.figure["layout"]["xaxis"]["title"]["text"]


def test_the_contours_are_the_map():
    contour, hatch = map_background(map_key(planned(DEMO)), "SI")
    found = found_map(map_key(planned(DEMO)))
    z = np.array(contour["z"], dtype=float)
    assert z.shape == (100, 100) and contour["contours"]["showlabels"]
    assert z == pytest.approx(100 * found.wetness[::3, ::3], abs=0.006, nan_ok=True)
    assert contour["contours"]["size"] == 2.0  # a dozen labelled steps at most
    assert hatch["fillpattern"]["shape"] == "/"


def test_one_hue_growing_stronger_is_legible_without_colour():
    (contour, _), scale = map_background(map_key(planned(DEMO)), "SI"), []
    for _, colour in contour["colorscale"]:
        name, opacity = colour.removeprefix("var:").split("/")
        assert name == "blue" and name in COLOURS
        scale.append(float(opacity))
    assert scale == sorted(scale) and contour["line"]["color"].startswith("var:text")


def test_what_the_wettest_steam_needs_is_drawn_through_the_map():
    plan = planned(DEMO)
    diagram = reach_map_diagram(plan, SI)
    line = diagram.figure["data"][diagram.moving[0]]
    assert line["line"]["dash"] == "dash" and line["line"]["color"] == "var:vermilion"
    y = np.array([np.nan if v is None else v for v in line["y"]])
    here = np.interp(plan.si["p_line"] / 1e5, line["x"], y)
    assert here > plan.si["p_exhaust"] / 1e5  # the case reads, so it lies below


def test_a_heater_has_its_power_over_the_line_pressure():
    diagram = reach_map_diagram(planned(HEATED), SI)
    assert diagram.figure["layout"]["yaxis"]["title"]["text"] == "power, W"
    here = trace(diagram, text=["<b>this case</b>"])
    assert here["y"] == [pytest.approx(860.0)]
    assert "not even dry steam reads" in diagram.figure["layout"]["annotations"][0]["text"]


@BOTH
@pytest.mark.parametrize("case", [DEMO, WET_LINE_READ, HEATED], ids=lambda case: case["title"])
def test_sections_pass_through_the_case(case, units):
    plan = planned(case)
    for diagram in section_diagrams(plan, sections(plan), units):
        mark = next(t for t in diagram.figure["data"] if "marker" in t)
        curve = next(t for t in diagram.figure["data"] if t.get("hoverinfo") == "all")
        y = np.array([np.nan if v is None else v for v in curve["y"]])
        assert np.interp(mark["x"][0], curve["x"], y) == pytest.approx(mark["y"][0], abs=0.06)
        assert mark["y"][0] == pytest.approx(100 * plan.wetness_most)
        low, high = diagram.figure["layout"]["meta"]["process"]["yaxis.range"]
        assert low == 0 and high > max(100 * plan.wet.wetness, np.nanmax(y))


@BOTH
def test_the_instruments_curve_runs_from_the_least_to_dry_steam(units):
    plan = planned(DEMO)
    chart = instrument_chart(plan, units)
    diagram = instrument_diagram(plan, chart, units)
    curve = next(t for t in diagram.figure["data"] if t.get("hoverinfo") == "all")
    assert curve["x"][0] == pytest.approx(units.value(chart.T_least, "temperature"))
    assert (curve["x"][-1], curve["y"][-1]) == (pytest.approx(units.value(chart.T_dry, "temperature")), 1.0)
    marks = diagram.figure["data"][-1]
    assert [w.strip() for w in marks["text"]] == ["3.00 %", "0.50 %"]
    assert marks["y"] == pytest.approx([0.97, 0.995], abs=1e-4)


def test_ends_that_cannot_be_read_have_no_place_on_the_chart():
    plan = planned(HEATING_STEAM)
    assert instrument_diagram(plan, instrument_chart(plan, SI), SI).figure["data"][-1]["x"] == []
    hopeless = planned(HEATING_STEAM.with_(p_exhaust=Entry(1.3, "bar", "absolute")))
    diagram = instrument_diagram(hopeless, instrument_chart(hopeless, SI), SI)
    assert "Not even dry steam" in diagram.label and diagram.figure["data"][1]["x"] == []
    assert all(math.isfinite(v) for v in diagram.figure["layout"]["meta"]["process"]["yaxis.range"])


def test_drawing_changes_nothing_that_was_given():
    plan = planned(DEMO)
    before = copy.deepcopy(map_background(map_key(plan), "SI"))
    all_diagrams(DEMO, SI)
    assert map_background(map_key(plan), "SI") == before
