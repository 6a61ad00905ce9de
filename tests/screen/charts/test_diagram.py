"""A diagram as data: its colours by meaning, its views, and what it refuses."""

import re

import pytest

from engine.screen.charts.diagram import COLOURS, FONT, LAYOUT, Diagram, dressed, replaced


def figure(**layout):
    trace = {"type": "scatter", "x": [1.0, 2.0], "y": [3.0, 4.0], "line": {"color": "var:pink"}}
    return {"data": [trace], "layout": layout}


def contrast(one: str, other: str) -> float:
    """WCAG 2.1: the ratio of relative luminances."""

    def luminance(colour):
        channels = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
        linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    low, high = sorted([luminance(one), luminance(other)])
    return (high + 0.05) / (low + 0.05)


@pytest.mark.parametrize("theme", ["light", "dark"])
@pytest.mark.parametrize(
    ("name", "least"), [("text", 7), ("muted", 4.5), ("vermilion", 3), ("green", 3), ("pink", 3), ("blue", 3)]
)
def test_colours_stand_out_on_the_page(name, least, theme):
    # WCAG 2.1: 4.5 for text (1.4.3), 3 for lines and marks (1.4.11)
    assert contrast(getattr(COLOURS[name], theme), getattr(COLOURS["background"], theme)) >= least


@pytest.mark.parametrize("moving", [(1,), (0, 5), (-1,)])
def test_a_moving_trace_that_is_not_there_is_refused(moving):
    with pytest.raises(ValueError, match=re.escape(f"diagram 'Ts': moving is {moving}, but the figure has 1 traces")):
        Diagram("Ts", "T–s", figure(), moving)


@pytest.mark.parametrize("theme", ["light", "dark"])
def test_painted_leaves_no_token(theme):
    painted = Diagram("Ts", "T–s", figure(xaxis={"gridcolor": "var:grid/0.5"})).painted(theme)
    assert "var:" not in repr(painted)
    assert painted["layout"]["font"]["color"] == getattr(COLOURS["text"], theme)
    assert painted["layout"]["font"]["family"] == getattr(FONT, theme)
    assert painted["layout"]["xaxis"]["gridcolor"].endswith(", 0.5)")


def test_painted_shows_the_view_asked_for_and_changes_nothing():
    views = {"process": {"xaxis.range": [6.0, 8.0], "yaxis.range": [2.0, 3.0]}, "whole": {"xaxis.range": [0.0, 9.0]}}
    given = figure(meta=views, xaxis={"title": {"text": "s"}})
    diagram = Diagram("Ts", "T–s", given)
    assert diagram.painted()["layout"]["xaxis"] == {"title": {"text": "s"}, "range": [6.0, 8.0]}
    assert diagram.painted()["layout"]["yaxis"] == {"range": [2.0, 3.0]}
    assert diagram.painted(view="whole")["layout"]["xaxis"]["range"] == [0.0, 9.0]
    assert "yaxis" not in diagram.painted(view="whole")["layout"]
    assert given == figure(meta=views, xaxis={"title": {"text": "s"}})


def test_a_name_that_is_no_colour_is_an_error():
    with pytest.raises(KeyError, match="mauve"):
        Diagram("Ts", "T–s", {"data": [{"line": {"color": "var:mauve"}}], "layout": {}}).painted()


def test_a_layout_of_its_own_goes_over_the_common_one():
    layout = dressed({"font": {"size": 14}, "paper_bgcolor": "var:grid"})
    assert layout["font"] == {**LAYOUT["font"], "size": 14}
    assert layout["paper_bgcolor"] == "var:grid"
    assert layout["plot_bgcolor"] == LAYOUT["plot_bgcolor"]
    assert "size" not in LAYOUT["font"]


def test_arrays_of_numbers_are_shared_not_copied():
    numbers = [1.0, 2.0]
    copy = replaced({"x": numbers, "marker": {"color": ["var:text", "#fff"]}}, str.upper)
    assert copy["x"] is numbers
    assert copy["marker"]["color"] == ["TEXT", "#fff"]
