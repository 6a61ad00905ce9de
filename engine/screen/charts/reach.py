"""The reach as pictures: a map over two axes, sections along both, and the chart for the instrument."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import lru_cache
from typing import Any

import numpy as np

from engine.job.assessment.methods_said import thermometer
from engine.job.reach import ReachAssessment
from engine.job.reach.instrument_chart import InstrumentChart
from engine.job.reach.map import MapKey, Section, WetnessMap, edge_of, map_key, wetness_map
from engine.job.reach.printable import nice_step
from engine.job.reach.said import percent, said
from engine.screen.charts.diagram import Diagram
from engine.steam.units import SYSTEMS, UnitSystem, from_si

_EVERY = 3  # of the map's points on each axis go to the browser: the eye sees no difference in the contours
_SINGLE_HUE = [[0.0, "var:blue/0.06"], [1.0, "var:blue/0.62"]]  # by opacity, so that it serves light and dark
_AXIS = {"gridcolor": "var:grid", "zeroline": False, "linecolor": "var:muted", "ticks": "outside",
         "tickcolor": "var:muted"}
_TICKS = [d * 10.0**e for e in range(-3, 5) for d in (1, 2, 5)]


def _log_axis(title: str, low: float, high: float) -> dict[str, Any]:
    return {**_AXIS, "type": "log", "tickvals": _TICKS, "ticktext": [f"{t:g}" for t in _TICKS],
            "range": [math.log10(low), math.log10(high)], "title": {"text": title, "standoff": 4}}


def _layout(x: dict[str, Any], y: dict[str, Any], left: int = 62, **more: Any) -> dict[str, Any]:
    return {"margin": {"l": left, "r": 12, "t": 8, "b": 46}, "showlegend": False, "hovermode": "closest",
            "font": {"size": 14}, "xaxis": x, "yaxis": y, **more}


def _line(x, y, colour: str, width: float = 2.5, dash: str = "solid", **more: Any) -> dict[str, Any]:
    return {"type": "scatter", "mode": "lines", "x": _list(x), "y": _list(y), "hoverinfo": "skip",
            "line": {"color": colour, "width": width, "dash": dash}, **more}


def _list(values) -> list:
    return [None if not math.isfinite(v) else v for v in np.asarray(values, float).tolist()]


# --- map --------------------------------------------------------------------------------------------

@lru_cache(maxsize=24)
def found_map(key: MapKey) -> WetnessMap:
    """The map for a key; the same is not computed twice."""
    return wetness_map(key)


def _ordinate(found_or_key: WetnessMap | MapKey, units: UnitSystem) -> tuple[str, str, str]:
    """Kind, unit and title of the other axis."""
    if (found_or_key if isinstance(found_or_key, WetnessMap) else found_map(found_or_key)).by_power:
        return "power", "W", "power, W"
    return "pressure", units.unit("pressure"), f"exhaust pressure, {units.unit('pressure')} abs"


@lru_cache(maxsize=24)
def map_background(key: MapKey, system: str) -> tuple[dict[str, Any], ...]:
    """Contours, and where nothing reads: hatched, edged and lettered. The same objects at every call."""
    found, units = found_map(key), SYSTEMS[system]
    kind, unit, _ = _ordinate(found, units)
    thin = slice(None, None, _EVERY)
    x, y = units.value(found.p_line, "pressure"), from_si(found.ordinate, unit, kind)
    z = 100.0 * found.wetness[thin, thin]
    top = float(np.nanmax(z)) if np.isfinite(z).any() else 1.0
    step = max(nice_step(top, 12), 1.0)
    hover = (f"line %{{x:.3g}} {units.unit('pressure')} abs<br>{'power' if found.by_power else 'exhaust'} %{{y:.3g}} "
             f"{unit}{'' if found.by_power else ' abs'}<br><b>reads up to %{{z:.1f}} % wetness</b><extra></extra>")
    contour = {"type": "contour", "x": _list(x[thin]), "y": _list(y[thin]), "z": [_list(row) for row in np.round(z, 2)],
               "colorscale": _SINGLE_HUE, "showscale": False, "connectgaps": False, "hovertemplate": hover,
               "line": {"color": "var:text/0.75", "width": 1, "smoothing": 0.8},
               "contours": {"start": step, "end": step * math.floor(top / step), "size": step, "showlabels": True,
                            "labelfont": {"size": 13, "color": "var:text"}}}
    edge = np.clip(found.dry_edge, found.ordinate[0], found.ordinate[-1])
    edge = from_si(edge, unit, kind)
    side = y[0] if found.by_power else y[-1]
    hatch = {"type": "scatter", "mode": "lines", "x": [*x.tolist(), x[-1], x[0]], "y": [*edge.tolist(), side, side],
             "fill": "toself", "fillcolor": "var:background", "hoverinfo": "skip",
             "fillpattern": {"shape": "/", "fgcolor": "var:muted/0.75", "bgcolor": "var:background", "size": 9,
                             "solidity": 0.22},
             "line": {"color": "var:muted", "width": 1.5}}
    return contour, hatch


def reach_map_diagram(plan: ReachAssessment, units: UnitSystem,
                      pinned: Sequence[tuple[str, ReachAssessment]] = ()) -> Diagram:
    """The greatest readable wetness over line pressure and exhaust pressure (or power), with the cases on it."""
    key = map_key(plan)
    found = found_map(key)
    kind, unit, title = _ordinate(found, units)
    still = list(map_background(key, units.name))
    edge = from_si(edge_of(found, plan.wet.wetness), unit, kind)
    x = units.value(found.p_line, "pressure")
    moving = [_line(x, edge, "var:vermilion", 2.5, "dash"), _places(pinned, plan, units, "var:green"),
              _places([("this case", plan)], plan, units, "var:vermilion")]
    y_axis = ({**_AXIS, "title": {"text": title, "standoff": 4},
               "range": [float(v) for v in from_si(found.ordinate[[0, -1]], unit, kind)]}
              if found.by_power else _log_axis(title, *from_si(found.ordinate[[0, -1]], unit, kind)))
    layout = _layout(_log_axis(f"line pressure, {units.unit('pressure')} abs", x[0], x[-1]), y_axis,
                     annotations=[_nothing_reads(found, units)])
    label = (f"Map of the greatest readable wetness over line pressure and {'power' if found.by_power else 'exhaust'}. "
             f"{said(plan, units).headline} This case reads up to {percent(max(plan.wetness_most, 0.0))} wetness.")
    return Diagram("reach-map", "Greatest readable wetness, % of the mass", {"data": still + moving, "layout": layout},
                   tuple(range(len(still), len(still) + len(moving))), label)


def _nothing_reads(found: WetnessMap, units: UnitSystem) -> dict[str, Any]:
    """The words in the hatched field, where it is widest: at low line pressures."""
    kind, unit, _ = _ordinate(found, units)
    ends = from_si(found.ordinate[[0, -1]], unit, kind)
    place = {"xref": "paper", "x": 0.02, "xanchor": "left", "align": "left", "showarrow": False,
             "font": {"size": 13, "color": "var:text"}, "bgcolor": "var:background", "borderpad": 3}
    if found.by_power:
        return {**place, "yref": "paper", "y": 0.02, "yanchor": "bottom", "text": "not even dry steam reads"}
    return {**place, "y": math.log10(ends[1]) - 0.04, "yanchor": "top", "text": "not even dry<br>steam reads"}


def _ordinate_of(plan: ReachAssessment) -> float:
    h = plan.wet.assessment.heating
    return h.power if h else plan.si["p_exhaust"]


def _places(named: Sequence[tuple[str, ReachAssessment]], plan: ReachAssessment, units: UnitSystem,
            colour: str) -> dict[str, Any]:
    """Where cases stand on the map, those that have the same two axes."""
    found = found_map(map_key(plan))
    kind, unit, _ = _ordinate(found, units)
    same = [(name, p) for name, p in named if bool(p.wet.assessment.heating) == found.by_power]
    return {"type": "scatter", "mode": "markers+text",
            "x": [units.value(p.si["p_line"], "pressure") for _, p in same],
            "y": [from_si(_ordinate_of(p), unit, kind) for _, p in same],
            "text": [f"<b>{name}</b>" for name, _ in same], "textposition": "middle right",
            "textfont": {"size": 15, "color": "var:text"},
            "hovertext": [f"{name}: reads up to {percent(max(p.wetness_most, 0.0))}" for name, p in same],
            "hovertemplate": "%{hovertext}<extra></extra>",
            "marker": {"size": 15, "color": colour, "line": {"color": "var:background", "width": 2}}}


# --- sections ---------------------------------------------------------------------------------------

def section_diagrams(plan: ReachAssessment, both: tuple[Section, Section], units: UnitSystem) -> tuple[Diagram, ...]:
    """The greatest readable wetness along the line pressure, and along the exhaust pressure (or power)."""
    kind, unit, title = _ordinate(map_key(plan), units)
    pressure = units.unit("pressure")
    other = "power" if kind == "power" else "exhaust pressure"
    held = f"{_ordinate_of(plan):.0f} W" if kind == "power" else (
        f"an exhaust of {units.text(_ordinate_of(plan), 'pressure')} abs")
    line = units.text(plan.si["p_line"], "pressure")
    return (_section("section-line", f"Along the line pressure, at {held}", plan, both[0],
                     units.value(both[0].along, "pressure"), units.value(plan.si["p_line"], "pressure"),
                     f"line pressure, {pressure} abs", True, "top left"),
            _section("section-other", f"Along the {other}, at a line of {line} abs", plan, both[1],
                     from_si(both[1].along, unit, kind), from_si(_ordinate_of(plan), unit, kind), title,
                     kind == "pressure", "top right" if kind == "pressure" else "top left"))


def _beside(x: np.ndarray, here: float, wanted: str) -> str:
    """The side that is free of the curve, unless the words would leave the picture there."""
    place = float(np.searchsorted(x, here)) / x.size  # the points are as evenly spaced as the axis
    return "top right" if place < 0.2 else "top left" if place > 0.8 else wanted


def _section(key: str, title: str, plan: ReachAssessment, section: Section, x: np.ndarray, here: float,
             x_title: str, log: bool, beside: str) -> Diagram:
    readable, comfortable = 100 * section.readable, 100 * section.comfortable
    tops = [v for v in (np.nanmax(np.append(readable, 0.0)), 100 * plan.wet.wetness) if math.isfinite(v)]
    top = 1.12 * max(max(tops), 0.5)
    low, high = 100 * plan.dry.wetness, 100 * plan.wet.wetness
    band = {"type": "scatter", "mode": "lines", "x": [x[0], x[-1], x[-1], x[0]], "y": [low, low, high, high],
            "fill": "toself", "fillcolor": "var:vermilion/0.16", "line": {"color": "var:vermilion", "width": 1},
            "hoverinfo": "skip"}
    hover = "%{x:.3g}: reads up to %{y:.2f} %<extra></extra>"
    most = max(100 * plan.wetness_most, 0.0)
    moving = [band, _line([here, here], [0.0, top], "var:muted", 1.5, "dot"),
              _line(x, comfortable, "var:blue", 2, "dash"),
              {**_line(x, readable, "var:blue", 3.5), "hoverinfo": "all", "hovertemplate": hover},
              {"type": "scatter", "mode": "markers+text", "x": [here], "y": [most], "text": [f"<b>{most:.2f} %</b>"],
               "textposition": _beside(x, here, beside), "hoverinfo": "skip",
               "textfont": {"size": 14, "color": "var:text"},
               "marker": {"size": 13, "color": "var:vermilion", "line": {"color": "var:background", "width": 2}}}]
    axis = _log_axis(x_title, x[0], x[-1]) if log else {
        **_AXIS, "title": {"text": x_title, "standoff": 4}, "range": [float(x[0]), float(x[-1])]}
    y_axis = {**_AXIS, "title": {"text": "readable wetness, %", "standoff": 4}}
    layout = _layout(axis, y_axis, meta={"process": {"yaxis.range": [0.0, top]}})
    label = f"{title}: the greatest readable wetness; here {most:.2f} %, expected {low:.2f} to {high:.2f} %."
    return Diagram(key, title, {"data": moving, "layout": layout}, tuple(range(len(moving))), label)


# --- the chart for the instrument -------------------------------------------------------------------

def instrument_diagram(plan: ReachAssessment, chart: InstrumentChart, units: UnitSystem) -> Diagram:
    """Quality over the temperature at the instrument, with the expected range and what must not be read."""
    def shown(T):
        return from_si(T, chart.unit, "temperature")

    t0, t1 = shown(chart.T_saturation), shown(max(chart.T_dry, chart.T_least))
    pad = 0.04 * (t1 - t0)
    x_low = min(chart.x_least if math.isfinite(chart.x_least) else 1.0, 1.0)
    y0, y1 = x_low - 0.08 * (1.0 - x_low + 1e-4), 1.0 + 0.08 * (1.0 - x_low + 1e-4)
    forbidden = {"type": "scatter", "mode": "lines", "hoverinfo": "skip", "fill": "toself",
                 "x": [t0 - pad, shown(chart.T_least), shown(chart.T_least), t0 - pad], "y": [y0, y0, y1, y1],
                 "fillcolor": "var:background", "line": {"color": "var:muted", "width": 1},
                 "fillpattern": {"shape": "/", "fgcolor": "var:muted/0.75", "bgcolor": "var:background", "size": 9,
                                 "solidity": 0.22}}
    drawn = chart.T.size > 0
    T = np.concatenate([[chart.T_least], chart.T, [chart.T_dry]]) if drawn else np.array([])
    x = np.concatenate([[chart.x_least], chart.x, [1.0]]) if drawn else np.array([])
    curve = {**_line(shown(T), x, "var:blue", 3.5), "hoverinfo": "all",
             "hovertemplate": f"%{{x:.1f}} {chart.unit}: quality %{{y:.4f}}<extra></extra>"}
    ends = [end for end in (plan.wet, plan.dry) if end.superheat >= plan.si["least_superheat"]]
    x_of = [np.interp(end.T, T, x) if drawn else math.nan for end in ends]
    marks = {"type": "scatter", "mode": "markers+text", "x": [shown(end.T) for end in ends], "y": _list(x_of),
             "text": [f"{percent(end.wetness)}  " for end in ends], "textposition": "middle left",
             "textfont": {"size": 13, "color": "var:text"}, "hoverinfo": "skip",
             "marker": {"size": 12, "color": "var:vermilion", "line": {"color": "var:background", "width": 2}}}
    words = {"x": 0.5 * (t0 - pad + shown(chart.T_least)), "y": 0.5 * (y0 + y1), "text": "do not read here",
             "textangle": -90, "showarrow": False, "bgcolor": "var:background",
             "font": {"size": 13, "color": "var:text"}}
    fine = {"showgrid": True, "gridcolor": "var:grid", "griddash": "solid", "ticklen": 3}
    layout = _layout({**_AXIS, "title": {"text": f"{thermometer(plan.wet.assessment)}, {chart.unit}", "standoff": 4},
                      "minor": fine, "gridcolor": "var:muted/0.45"},
                     {**_AXIS, "title": {"text": f"quality of the {chart.quality_of}", "standoff": 4}, "minor": fine,
                      "gridcolor": "var:muted/0.45", "tickformat": ".3f" if 1 - x_low > 0.008 else ".4f"}, 78,
                     annotations=[words],
                     meta={"process": {"xaxis.range": [t0 - pad, t1 + pad], "yaxis.range": [y0, y1]}})
    label = (f"Quality over temperature, from {chart.x_least:.4f} at {shown(chart.T_least):.1f} to 1 at {t1:.1f} "
             f"{chart.unit}." if drawn else "Not even dry steam can be read: there is no curve.")
    moving = [forbidden, curve, marks]
    return Diagram("instrument", "From the temperature to the quality", {"data": moving, "layout": layout},
                   tuple(range(len(moving))), label)
