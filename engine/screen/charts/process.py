"""The process diagrams T–s, h–s and P–h: paths and states of a case over the dome."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np

from engine.calorimeter import Path
from engine.job.assessment import Assessment, StatePoint, Verdict
from engine.job.assessment.answer import answer
from engine.job.uncertainty import Forecast
from engine.job.uncertainty.answer_with import answer_with
from engine.screen.charts.background import AXES, HS, PH, TS, Axes, axis_title, background, shown
from engine.screen.charts.diagram import Diagram
from engine.steam.units import UnitSystem

_MARKS = {"Line": "circle", "Throttled steam": "circle-open", "Drained water": "triangle-down",
          "Dries out": "diamond", "Exhaust": "square", "After the heater": "square"}


def process_diagrams(a: Assessment, units: UnitSystem, pinned: Sequence[tuple[str, Assessment]] = (),
                     expected: Forecast | None = None) -> tuple[Diagram, ...]:
    """T–s, h–s and P–h of one case, with pinned cases as further paths and the band of the uncertainty expected."""
    label = (answer_with(expected, units) if expected else answer(a, units)).headline
    band = expected.band if expected else None
    return tuple(_diagram(axes, a, units, pinned, band, label) for axes in AXES)


def _diagram(axes: Axes, a: Assessment, units: UnitSystem, pinned, band, label: str) -> Diagram:
    still = list(background(axes.key, units.name))
    moving = [_band(axes, band, units), _reach(axes, a, units), _pinned(axes, pinned, units), _bore(axes, a, units),
              _path(axes, a, units), _reading(axes, a, units), _points(axes, a, units)]
    figure = {"data": still + moving, "layout": _layout(axes, a, units, pinned)}
    name = f"{axes.title} diagram"
    return Diagram(axes.key, axes.title, figure, tuple(range(len(still), len(still) + len(moving))), f"{name}. {label}")


def _columns(path: Path) -> dict[str, np.ndarray]:
    return {"p": path.p, "T": path.T, "h": path.h, "s": path.s}


def _trace(axes: Axes, units: UnitSystem, columns: dict[str, np.ndarray], **more: Any) -> dict[str, Any]:
    x, y = shown(axes, units, columns)
    return {"type": "scatter", "mode": "lines", "x": np.asarray(x).tolist(), "y": np.asarray(y).tolist(),
            "hoverinfo": "skip", **more}


def _nothing(name: str, **more: Any) -> dict[str, Any]:
    return {"type": "scatter", "mode": "lines", "x": [], "y": [], "name": name, **more}


def _band(axes: Axes, band: tuple[Path, Path] | None, units: UnitSystem) -> dict[str, Any]:
    """Between the paths of the wetter and of the drier steam."""
    fill = {"fill": "toself", "fillcolor": "var:vermilion/0.22", "line": {"width": 0}}
    if band is None:
        return _nothing("uncertainty", **fill)
    there, back = (_columns(path) for path in band)
    around = {n: np.concatenate([there[n], back[n][::-1]]) for n in there}
    return _trace(axes, units, around, name="uncertainty", **fill)


def _path(axes: Axes, a: Assessment, units: UnitSystem) -> dict[str, Any]:
    dash = "solid" if a.verdict in (Verdict.READS, Verdict.THIN) else "dash"
    return _trace(axes, units, _columns(a.path), name="heating" if a.heating else "constant enthalpy",
                  line={"color": "var:vermilion", "width": 4, "dash": dash})


def _reach(axes: Axes, a: Assessment, units: UnitSystem) -> dict[str, Any]:
    style = {"color": "var:text", "width": 1.6, "dash": "dash"}
    if a.reach_path is None:
        return _nothing("reach limit", line=style)
    return _trace(axes, units, _columns(a.reach_path), name="reach limit", line=style)


def _bore(axes: Axes, a: Assessment, units: UnitSystem) -> dict[str, Any]:
    style = {"color": "var:blue", "width": 3, "dash": "dashdot"}
    if a.bore_path is None:
        return _nothing("constant bore", line=style)
    return _trace(axes, units, _columns(a.bore_path), name="constant bore", line=style)


def _pinned(axes: Axes, pinned, units: UnitSystem) -> dict[str, Any]:
    xs, ys, words = [], [], []
    for name, other in pinned:
        x, y = (np.asarray(v).tolist() for v in shown(axes, units, _columns(other.path)))
        xs, ys, words = xs + [*x, None], ys + [*y, None], words + [name, *[""] * (len(x) - 2), name, ""]
    return {"type": "scatter", "mode": "lines+text", "x": xs, "y": ys, "text": words, "textposition": "top center",
            "textfont": {"color": "var:green", "size": 13}, "name": "pinned", "hoverinfo": "skip",
            "line": {"color": "var:green", "width": 2.5}}


def _points(axes: Axes, a: Assessment, units: UnitSystem) -> dict[str, Any]:
    states = [s for s in a.states if s.name in _MARKS]
    x, y = shown(axes, units, {n: np.array([getattr(s, n) for s in states]) for n in ("p", "T", "h", "s")})
    return {"type": "scatter", "mode": "markers", "x": x.tolist(), "y": y.tolist(), "name": "states",
            "marker": {"size": 12, "color": "var:vermilion", "symbol": [_MARKS[s.name] for s in states],
                       "line": {"color": "var:background", "width": 1.5}},
            "text": [_hover(s, units) for s in states], "hovertemplate": "%{text}<extra></extra>"}


def _reading(axes: Axes, a: Assessment, units: UnitSystem) -> dict[str, Any]:
    """The exhaust as read: it lies a little below the path by the heat lost and the kinetic energy."""
    mark = {"size": 15, "color": "var:blue", "symbol": "cross-thin", "line": {"color": "var:blue", "width": 3}}
    trace = {"type": "scatter", "mode": "markers", "name": "reading", "marker": mark}
    if a.read_state is None:
        return {**trace, "x": [], "y": []}
    x, y = shown(axes, units, {n: np.array([getattr(a.read_state, n)]) for n in ("p", "T", "h", "s")})
    return {**trace, "x": x.tolist(), "y": y.tolist(), "text": [_hover(a.read_state, units)],
            "hovertemplate": "%{text}<extra></extra>"}


def _hover(s: StatePoint, units: UnitSystem) -> str:
    rows = [f"<b>{s.name}</b>", f"p {units.text(s.p, 'pressure')} abs", f"T {units.text(s.T, 'temperature')}",
            "superheated" if s.x is None else f"x {s.x:.4f}", f"h {units.text(s.h, 'enthalpy')}",
            f"s {units.text(s.s, 'entropy')}", f"v {units.text(s.v, 'specific volume')}"]
    return "<br>".join(rows + ([f"c {units.text(s.velocity, 'velocity')}"] if s.velocity else []))


def _layout(axes: Axes, a: Assessment, units: UnitSystem, pinned) -> dict[str, Any]:
    def axis(name: str, kind: str, log: bool) -> dict[str, Any]:
        common = {"title": {"text": axis_title(name, kind, units), "standoff": 4}, "gridcolor": "var:grid",
                  "zeroline": False, "linecolor": "var:muted", "ticks": "outside", "tickcolor": "var:muted",
                  "nticks": 7}
        if log:
            ticks = [d * 10.0**e for e in range(-3, 5) for d in (1, 2, 5)]
            common |= {"type": "log", "tickvals": ticks, "ticktext": [f"{t:g}" for t in ticks]}
        return common

    return {"margin": {"l": 62, "r": 10, "t": 8, "b": 46}, "showlegend": False, "hovermode": "closest",
            "font": {"size": 14}, "xaxis": axis(axes.x, axes.x_kind, False),
            "yaxis": axis(axes.y, axes.y_kind, axes.log_y),
            "meta": {"process": _window(axes, a, units, pinned), "whole": _whole(axes, units)}}


def _whole(axes: Axes, units: UnitSystem) -> dict[str, Any]:
    limits = {"s": (0.0, 9.5e3), "T": (273.15, 823.15), "h": (0.0, 3.6e6), "p": (1e3, 3e7)}
    return _ranges(axes, units, limits)


def _ranges(axes: Axes, units: UnitSystem, limits: dict[str, tuple[float, float]]) -> dict[str, Any]:
    x = [units.value(v, axes.x_kind) for v in limits[axes.x]]
    y = [units.value(v, axes.y_kind) for v in limits[axes.y]]
    return {"xaxis.range": x, "yaxis.range": [math.log10(v) for v in y] if axes.log_y else y}


def _window(axes: Axes, a: Assessment, units: UnitSystem, pinned) -> dict[str, Any]:
    """Where the processes happen, rounded outward so that it stands still while a slider moves a little."""
    line = a.states[0]  # behind a separator it lies beside the path
    parts = (line, a.path, a.reach_path, a.bore_path, a.read_state, *(other.path for _, other in pinned))
    drawn = [part for part in parts if part is not None]

    def span(name: str, step: float, pad: float) -> tuple[float, float]:
        values = np.hstack([getattr(part, name) for part in drawn])
        low, high = float(values.min()) - pad, float(values.max()) + pad
        return step * math.floor(low / step), step * math.ceil(high / step)

    def factors(low: float, high: float) -> tuple[float, float]:
        half = math.log(10.0) / 3
        return (math.exp(half * math.floor(math.log(low * 0.6) / half)),
                math.exp(half * math.ceil(math.log(high * 1.7) / half)))

    p = np.hstack([part.p for part in drawn])
    limits = {"s": span("s", 250.0, 150.0), "T": span("T", 25.0, 12.0), "h": span("h", 100e3, 60e3),
              "p": factors(float(p.min()), float(p.max()))}
    return _ranges(axes, units, limits)


__all__ = ["HS", "PH", "TS", "process_diagrams"]
