"""What each part of the rig does to the quality: bars, the longest first, told apart by shape and word as by colour."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from typing import Any

from engine.job.rig import RigAssessment
from engine.job.rig.effects import Effect
from engine.job.rig.tables import LEFT, TAKEN, headline, points
from engine.screen.charts.diagram import Diagram
from engine.steam.units import UnitSystem

_ABOVE = 0.36  # of a row: the words stand above their bar, so that they fit on a phone too


def ranking_diagram(rig: RigAssessment, units: UnitSystem) -> Diagram:
    """The effects that have a size, as bars in %pt of quality; solid what is left in, hatched what is taken out."""
    effects = rig.sized
    longest = max((abs(e.size_pt) for e in effects), default=0.0) or 0.01
    left = _bars(effects, False, units, LEFT, {"color": "var:vermilion"})
    taken = _bars(effects, True, units, TAKEN, {
        "color": "var:blue/0.25", "line": {"color": "var:blue", "width": 1.5},
        "pattern": {"shape": "/", "fgcolor": "var:blue", "size": 7, "solidity": 0.3}})
    names = words_above([f"{_mark(e)} <b>{e.name}</b>" for e in effects], 0.0, "middle right")
    sizes = words_above([_size(e) for e in effects], 1.04 * longest, "middle left")
    layout = {"margin": {"l": 8, "r": 8, "t": 8, "b": 46}, "font": {"size": 15}, "bargap": 0, "barmode": "overlay",
              "hovermode": "closest", "showlegend": True,
              "legend": {"orientation": "h", "x": 0, "y": -0.1, "yanchor": "top", "bgcolor": "rgba(0,0,0,0)"},
              "xaxis": {"range": [0, 1.04 * longest], "fixedrange": True, "nticks": 6, "gridcolor": "var:grid",
                        "zeroline": True, "zerolinecolor": "var:muted",
                        "title": {"text": "%pt of quality", "standoff": 2}},
              "yaxis": {"range": [max(len(effects), 1) - 0.4, -0.75], "visible": False, "fixedrange": True}}
    listed = "; ".join(f"{e.name} {_size(e)}, {'taken out' if e.corrected else 'left in'}" for e in effects)
    return Diagram("ranking", "Effects on the quality", {"data": [left, taken, names, sizes], "layout": layout},
                   (0, 1, 2, 3), f"Effects on the quality, largest first. {headline(rig)} {listed}.")


def _mark(e: Effect) -> str:
    return (TAKEN if e.corrected else LEFT)[0]


def _size(e: Effect) -> str:
    sign = "±" if e.either_way else ""
    return f"{sign}{points(e.size)} {e.direction}".rstrip()


def _bars(effects: Sequence[Effect], corrected: bool, units: UnitSystem, name: str, marker: dict[str, Any]) -> dict:
    rows = [(i, e) for i, e in enumerate(effects) if e.corrected == corrected]
    return {"type": "bar", "orientation": "h", "name": name, "width": 0.36, "marker": marker,
            "x": [abs(e.size_pt) for _, e in rows], "y": [i for i, _ in rows],
            "hovertext": [_hover(e, units) for _, e in rows], "hovertemplate": "%{hovertext}<extra></extra>"}


def _hover(e: Effect, units: UnitSystem) -> str:
    own = f" ({e.in_its_own_unit(units)})" if e.own else ""
    return "<br>".join([f"<b>{e.name}</b>", f"{_size(e)}{own}", *textwrap.wrap(e.words(units), 60)])


def words_above(texts: Sequence[str], x: float, position: str) -> dict[str, Any]:
    """A trace of words above the bars of rows 0, 1, 2 …, from ``x`` on or up to it."""
    return {"type": "scatter", "mode": "text", "x": [x] * len(texts), "y": [i - _ABOVE for i in range(len(texts))],
            "text": list(texts), "textposition": position, "textfont": {"color": "var:text", "size": 14},
            "hoverinfo": "skip", "showlegend": False, "cliponaxis": False}
