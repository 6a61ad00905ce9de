"""The rig's charts: pure, in the reader's units, told apart by shape and word, drawn from the assessment alone."""

from __future__ import annotations

import copy
import json
from functools import cache

import numpy as np
import pytest

from engine.job.case import BLANK
from engine.job.case.demo import DEMO
from engine.job.case.fields_rig import COMPUTED
from engine.job.case.rows import Entry
from engine.job.rig import assess_rig
from engine.job.rig.tables import headline
from engine.job.uncertainty import forecast
from engine.screen.charts import wire
from engine.screen.charts.forecast import budget_diagram
from engine.screen.charts.ranking import ranking_diagram
from engine.screen.charts.rig_curves import flow_diagram, sampling_diagram, warm_up_diagram
from engine.steam.units import SI, US

rig_of = cache(assess_rig)
CURVES = [flow_diagram, sampling_diagram, warm_up_diagram]
BOTH = pytest.mark.parametrize("units", [SI, US], ids=["SI", "US"])


def trace(diagram, name):
    return next(t for t in diagram.figure["data"] if t.get("name") == name)


def bars(diagram):
    return [t for t in diagram.figure["data"] if t["type"] == "bar"]


@BOTH
@pytest.mark.parametrize("draw", [ranking_diagram, *CURVES])
def test_figures_are_plain_coloured_by_meaning_and_labelled(draw, units):
    diagram = draw(rig_of(DEMO), units)
    text = json.dumps(diagram.figure, allow_nan=False)
    assert "#" not in text and "var:" in text and diagram.label.endswith(".")
    for theme in ("light", "dark"):
        assert "var:" not in json.dumps(diagram.painted(theme))
    assert wire.message([diagram], key="k", height=300, columns=1, enlarged=None).moving


def test_drawing_changes_nothing_and_is_the_same_twice():
    rig = rig_of(DEMO)
    before = copy.deepcopy(rig.nozzle.value.drops), rig.effects
    first = ranking_diagram(rig, SI).figure, sampling_diagram(rig, SI).figure
    assert first == (ranking_diagram(rig, SI).figure, sampling_diagram(rig, SI).figure)
    assert np.array_equal(before[0], rig.nozzle.value.drops) and before[1] is rig.effects


def test_the_ranking_has_a_bar_for_every_size_longest_first():
    rig, diagram = rig_of(DEMO), ranking_diagram(rig_of(DEMO), SI)
    drawn = sorted((y, x) for t in bars(diagram) for y, x in zip(t["y"], t["x"], strict=True))
    assert [x for _, x in drawn] == pytest.approx([abs(e.size_pt) for e in rig.sized])
    assert diagram.figure["layout"]["xaxis"]["range"][1] > drawn[0][1]
    names, sizes = (t for t in diagram.figure["data"] if t["type"] == "scatter")
    assert [e.name in name for e, name in zip(rig.sized, names["text"], strict=True)] == [True] * len(rig.sized)
    assert sizes["text"][0] == "0.098 %pt wetter"


def test_left_in_and_taken_out_differ_by_shape_and_word_as_well():
    left, taken = bars(ranking_diagram(rig_of(DEMO), SI))
    assert "pattern" not in left["marker"] and taken["marker"]["pattern"]["shape"] == "/"
    assert left["name"].startswith("●") and taken["name"].startswith("◇")
    names = next(t for t in ranking_diagram(rig_of(DEMO), SI).figure["data"] if t["type"] == "scatter")["text"]
    assert {name[0] for name in names} == {"●", "◇"}


def test_the_ranking_says_its_headline_to_those_who_cannot_see_it():
    diagram = ranking_diagram(rig_of(DEMO), SI)
    assert headline(rig_of(DEMO)) in diagram.label and "Nozzle entry 0.048 %pt wetter, left in" in diagram.label


def test_an_effect_either_way_is_marked_so():
    texts = ranking_diagram(rig_of(DEMO.with_(flow_source=COMPUTED)), SI).figure["data"][3]["text"]
    assert any(text.startswith("±") and text.endswith("either way") for text in texts)


def test_hovering_gives_the_cause_in_the_readers_units():
    hover = " ".join(bars(ranking_diagram(rig_of(DEMO), US))[1]["hovertext"])
    assert "Btu/lb" in hover and "<br>" in hover and "kJ/kg" not in hover


@BOTH
def test_the_flow_curve_passes_through_the_rig(units):
    rig, diagram = rig_of(DEMO), flow_diagram(rig_of(DEMO), units)
    curve, mark = trace(diagram, "computed"), trace(diagram, "this rig")
    assert mark["x"][0] == pytest.approx(units.value(3e-3, "length"))
    assert np.interp(mark["x"][0], curve["x"], curve["y"]) == pytest.approx(mark["y"][0])
    assert mark["y"][1] == pytest.approx(units.value(rig.point.flow, "mass flow"))
    assert units.unit("mass flow") in diagram.figure["layout"]["yaxis"]["title"]["text"]


def test_the_sampling_curve_passes_through_the_drops_and_vanishes_for_fine_ones():
    rig, diagram = rig_of(DEMO), sampling_diagram(rig_of(DEMO), SI)
    curve, mark = trace(diagram, "as it stands"), trace(diagram, "drops entered")
    assert np.interp(10.0, curve["x"], curve["y"]) == pytest.approx(100 * rig.nozzle.value.entry.value.error, abs=1e-3)
    assert mark["x"] == pytest.approx([10.0]) and abs(curve["y"][0]) < 0.1 * abs(curve["y"][-1])


def test_the_warm_up_is_marked_where_it_is_ready():
    rig, diagram = rig_of(DEMO), warm_up_diagram(rig_of(DEMO), SI)
    mark, end = trace(diagram, "within 0.10 K"), trace(diagram, "its end")
    assert mark["x"] == pytest.approx([rig.warming.value.ready / 60])
    assert end["y"][0] - mark["y"][0] == pytest.approx(0.1, abs=0.02)


def test_nothing_is_drawn_of_what_is_not_known():
    empty = rig_of(BLANK)
    assert [draw(empty, SI) for draw in CURVES] == [None, None, None]
    assert budget_diagram(forecast(DEMO.with_(T_exhaust=Entry(95.0, "°C")))) is None
    assert [t["x"] for t in bars(ranking_diagram(empty, SI))] == [[], []]
    assert sampling_diagram(rig_of(DEMO.with_(drop_diameter=None)), SI).figure["data"][-1]["x"] == []


def test_the_budget_has_its_largest_cause_on_top_and_sampling_hatched():
    f = forecast(DEMO)
    diagram = budget_diagram(f)
    instruments, sampling = bars(diagram)
    assert sampling["y"] == [0] and sampling["x"][0] == pytest.approx(100 * 0.005 / 3**0.5)
    assert sampling["marker"]["pattern"]["shape"] == "/"
    assert instruments["x"] == sorted(instruments["x"], reverse=True)
    assert "Expect U = 0.58 %pt" in diagram.label
