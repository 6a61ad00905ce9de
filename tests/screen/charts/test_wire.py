"""Diagrams as text for the browser."""

import json
from dataclasses import replace

import numpy as np
import pytest

from engine.screen.charts import wire
from engine.screen.charts.diagram import COLOURS, Diagram

S = np.linspace(0, 9, 500)
DOME = {"type": "scatter", "x": S, "y": np.sin(S), "line": {"color": "var:text"}}


def diagram(end=1.0, **layout):
    path = {"type": "scatter", "x": [0.0, end], "y": np.array([1.0, np.nan])}
    return Diagram("Ts", "T–s", {"data": [DOME, path], "layout": layout}, (1,), f"ends at {end}")


def parts(*diagrams, **settings):
    return tuple(map(json.loads, wire.message(diagrams, **settings)))


def test_the_background_does_not_know_of_what_moves():
    one, other = wire.message([diagram(1.0)]), wire.message([diagram(2.0, meta={"process": {"xaxis.range": [0, 3]}})])
    assert one.background == other.background
    assert one.moving != other.moving
    assert len(other.moving) < 400


@pytest.mark.parametrize("layout", [{"margin": {"l": 9}}, {"xaxis": {"title": {"text": "s, Btu/(lb °F)"}}}])
def test_another_layout_is_another_background(layout):
    (old, _), (new, moving) = parts(diagram()), parts(diagram(**layout))
    assert new["name"] != old["name"]
    assert moving["background"] == new["name"]


@pytest.mark.parametrize("name", ["annotations", "shapes", "meta"])
def test_annotations_shapes_and_views_move(name):
    background, moving = parts(diagram(**{name: [1]}))
    assert moving["diagrams"][0]["layout"] == {name: [1]}
    assert name not in background["ground"]["diagrams"]["Ts"]["layout"]


def test_what_the_browser_reads():
    background, moving = parts(diagram(), key="row", height=400)
    ground = background["ground"]
    assert set(ground["tokens"]) == {*COLOURS, "font"}
    assert ground["tokens"]["text"] == COLOURS["text"]._asdict()
    assert ground["diagrams"]["Ts"]["data"][1] is None  # its place is kept for the path
    assert ground["diagrams"]["Ts"]["moving"] == [1]
    assert ground["diagrams"]["Ts"]["data"][0]["x"] == pytest.approx(DOME["x"], rel=1e-5)
    assert moving["settings"] == {"key": "row", "height": 400}
    path = {"type": "scatter", "x": [0, 1], "y": [1, None]}  # no number is a gap
    assert moving["diagrams"] == [
        {"key": "Ts", "title": "T–s", "label": "ends at 1.0", "traces": [path], "layout": {}},
    ]


def test_digits_are_few_and_enough():
    numbers = [1234567.891, 0.00012345678, -3.0, 1e300, np.inf, -np.inf, np.nan]
    trace = {"x": numbers, "y": np.array(numbers), "width": np.float64(2.5), "n": np.int64(7)}
    _, moving = wire.message([Diagram("a", "A", {"data": [trace], "layout": {}}, (0,))])
    sent = json.loads(moving)["diagrams"][0]["traces"][0]
    assert sent["x"] == sent["y"] == [1234570, 0.000123457, -3, 1e300, None, None, None]
    assert (sent["width"], sent["n"]) == (2.5, 7)


def test_text_of_any_kind_arrives_as_it_is():
    odd = 'a"b\\c</script>\u2028 é ≤'
    _, moving = parts(replace(diagram(), label=odd, title=odd))
    assert (moving["diagrams"][0]["label"], moving["diagrams"][0]["title"]) == (odd, odd)


def test_equal_backgrounds_in_other_objects_are_the_same_message():
    copied = diagram()
    copied.figure["data"][0] = {name: value.copy() if name in "xy" else value for name, value in DOME.items()}
    assert wire.message([copied]).background == wire.message([diagram()]).background


def test_nothing_handed_in_is_changed():
    given = diagram(meta={"process": {}})
    before = json.dumps(given.figure, default=lambda array: array.tolist())
    wire.message([given])
    assert json.dumps(given.figure, default=lambda array: array.tolist()) == before
