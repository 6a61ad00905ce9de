"""Diagrams of an invented fluid, as heavy as real property diagrams; nothing here is physics."""

from functools import lru_cache

import numpy as np

from engine.screen.charts.diagram import Diagram


def curve(colour, x, y, **more):
    return {"type": "scatter", "mode": "lines", "x": x, "y": y, "line": {"color": colour, "width": 1}, **more}


@lru_cache
def background(diagram):
    """A dome and two families of lines, 1500 points: what a property diagram is made of."""
    s = np.linspace(0, 9, 300)
    top = 300 + 40 * diagram
    dome = curve("var:text", s, top * np.sin(np.pi * s / 9), name="dome", hoverinfo="skip")
    inside = [np.append(s * share, np.nan) for share in np.linspace(0.1, 0.9, 9)]
    heights = [np.append(top * np.sin(np.pi * s / 9) * share, np.nan) for share in np.linspace(0.1, 0.9, 9)]
    lines = curve("var:grid", np.concatenate(inside), np.concatenate(heights), name="lines", hoverinfo="skip")
    return [dome, lines]


def diagram(number, name, line, exhaust, temperature, *, further=False, follow=False, free=False):
    x = np.linspace(2 + line / 50, 6 + exhaust / 10, 40)
    y = 100 + temperature / 2 + 10 * np.sin(x)
    low = 50 + (temperature - 120) / 2 * follow
    moving = [
        curve("var:green", [0, 9], [y[-1], y[-1]], name="limit", line={"color": "var:green", "dash": "dash"}),
        curve("var:vermilion", x, y, name="path", line={"color": "var:vermilion", "width": 3}),
        {
            **{"type": "scatter", "mode": "markers+text", "name": "ends", "marker": {"color": "var:blue"}},
            **{"x": x[[0, -1]], "y": y[[0, -1]], "text": ["1", "2"], "textposition": "top center"},
        },
    ]
    if further:
        moving.append(curve("var:pink", x, y + 20, name="further"))
    axis = {"gridcolor": "var:grid", "zeroline": False}
    layout = {
        "showlegend": False,
        "margin": {"l": 50, "r": 10, "t": 10, "b": 45},
        "xaxis": {"title": {"text": "entropy"}, **axis},
        "yaxis": {"title": {"text": "height"}, **axis},
        "meta": {
            "process": {"xaxis.range": [1, 8], "yaxis.range": [low, low + 200]},
            "whole": {"xaxis.range": [0, 9], "yaxis.range": [0, 420]},
        },
    }
    if free:  # axes that follow the data, as Plotly does where no range is given
        del layout["meta"]
    data = [*([] if free else background(number)), *moving]
    return Diagram(
        key=name,
        title=f"Diagram {name}",
        figure={"data": data, "layout": layout},
        moving=tuple(range(len(data) - len(moving), len(data))),
        label=f"Path {name} ends at {y[-1]:.4f}",
    )
