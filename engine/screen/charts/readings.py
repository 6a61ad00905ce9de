"""The channels of a run over time, one under the other: readings, settled stretches, the window used, the quality."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from engine.job.result import Result
from engine.job.result.reduction import RunResult
from engine.job.result.said import LABELS, upper_first
from engine.screen.charts.diagram import Diagram
from engine.steam import saturation_temperature
from engine.steam.units import UnitSystem

MOST = 1600  # points drawn of a channel; more than a screen is wide
MARKED = 60  # readings marked in a channel
_GAP = 0.05  # between panels, of the height
PANELS = ("T_exhaust", "p_line", "p_exhaust")


class Panel(NamedTuple):
    """One channel: what is drawn in it, and ``floor``, a second line that it must stay above."""

    name: str
    title: str
    values: np.ndarray
    floor: np.ndarray | None = None


def decimated(x: np.ndarray, y: np.ndarray, most: int = MOST) -> tuple[np.ndarray, np.ndarray]:
    """At most ``most`` points of a line that look the same: of each stretch its lowest and its highest.

    A spike of one reading in a million stays; missing readings (NaN) leave a gap where all of a stretch misses.

    >>> x, y = decimated(np.arange(10_000), np.where(np.arange(10_000) == 4321, 9.0, 0.0), 100)
    >>> len(x) <= 100, float(y.max())
    (True, 9.0)
    """
    if x.size <= most:
        return x, y
    stretches = most // 2
    edges = np.linspace(0, x.size, stretches + 1).astype(int)
    places = np.empty(2 * stretches, dtype=int)
    for k, (begin, end) in enumerate(zip(edges[:-1], edges[1:], strict=True)):
        part = y[begin:end]
        if np.isnan(part).all():
            places[2 * k:2 * k + 2] = begin
            continue
        low, high = begin + int(np.nanargmin(part)), begin + int(np.nanargmax(part))
        places[2 * k:2 * k + 2] = min(low, high), max(low, high)
    return x[places], y[places]


def run_diagram(run: RunResult, result: Result, units: UnitSystem, *, window: bool = False) -> Diagram:
    """One run: its channels corrected, pressures absolute, and the quality of every row.

    All of the run, or with ``window`` what is used of it and a little on either side.
    """
    x, title = _clock(run)
    near = _near(run, x) if window else np.ones(x.size, dtype=bool)
    panels = _panels(run, units)
    top = 1.0
    height = (1.0 - _GAP * (len(panels) - 1)) / len(panels)
    data: list[dict[str, Any]] = []
    layout: dict[str, Any] = {
        "margin": {"l": 70, "r": 12, "t": 26, "b": 44}, "showlegend": False, "hovermode": "closest",
        "font": {"size": 14},
        "xaxis": {**_AXIS, "title": {"text": title, "standoff": 4}, "nticks": 10, "range": _x_range(x[near]),
                  "anchor": "y" if len(panels) == 1 else f"y{len(panels)}"},
        "shapes": _shapes(run, x), "annotations": _annotations(run, x)}
    for k, panel in enumerate(panels, 1):
        axis = "y" if k == 1 else f"y{k}"
        data += _traces(panel, axis, x, run, result, units)
        layout["yaxis" if k == 1 else f"yaxis{k}"] = {
            **_AXIS, "domain": [max(top - height, 0.0), top], "title": {"text": panel.title, "standoff": 4},
            "nticks": 5, "range": _y_range(panel, run, near), "fixedrange": True, "anchor": "x"}
        top -= height + _GAP
    label = f"Channels of {run.run.name} over time with {len(run.settling.found)} settled stretches. " + (
        f"Quality by this run {run.quality:.4f}." if run.quality is not None else run.unable)
    return Diagram("channels", "Readings and quality of every row", {"data": data, "layout": layout},
                   tuple(range(len(data))), label)


_AXIS = {"gridcolor": "var:grid", "zeroline": False, "linecolor": "var:muted", "ticks": "outside",
         "tickcolor": "var:muted"}


def _clock(run: RunResult) -> tuple[np.ndarray, str]:
    if run.run.time is None:
        return run.run.rows.astype(float), "row"
    return run.run.time / 60.0, "min from the start"


def _panels(run: RunResult, units: UnitSystem) -> list[Panel]:
    found = []
    for name in PANELS:
        if name not in run.run.channels:
            continue
        kind = "temperature" if name == "T_exhaust" else "pressure"
        values = np.broadcast_to(getattr(run.rows_corrected, name), len(run.run))
        unit = units.unit(kind) + (" abs" if kind == "pressure" else "")
        floor = _saturation(run, units) if name == "T_exhaust" else None
        found.append(Panel(name, f"{_SYMBOLS[name]}, {unit}", np.asarray(units.value(values, kind)), floor))
    if np.isfinite(run.x).any():
        found.append(Panel("x", "x", run.x))
    return found


def _saturation(run: RunResult, units: UnitSystem) -> np.ndarray | None:
    """Saturation at the exhaust, row by row: below it there is no reading."""
    p = np.broadcast_to(run.rows_corrected.p_exhaust, len(run.run)).astype(float)
    known = (p > 1e3) & (p < 60e5)
    if not known.any():
        return None
    T = np.full(p.size, np.nan)
    T[known] = saturation_temperature(p[known])
    return np.asarray(units.value(T, "temperature"))


_SYMBOLS = {"T_exhaust": "T₂", "p_line": "p₁", "p_exhaust": "p₂"}


def _traces(panel: Panel, axis: str, x: np.ndarray, run: RunResult, result: Result,
            units: UnitSystem) -> list[dict[str, Any]]:
    told = "quality" if panel.name == "x" else LABELS[panel.name]
    px, py = decimated(x, panel.values)
    colour = "var:vermilion" if panel.name == "x" else "var:text"
    traces = [_line(told, axis, px, py, {"color": colour, "width": 1.4})]
    if panel.floor is not None:
        traces.append(_line("saturation at the exhaust", axis, *decimated(x, panel.floor, MOST // 4),
                            {"color": "var:muted", "width": 1.6, "dash": "dot"}))
    if panel.name == "x" and run.quality is not None and run.used.any():
        ends = [float(x[run.used].min()), float(x[run.used].max())]
        U = result.instruments.U if result.instruments is not None else 0.0
        traces += [_line("± U by the instruments", axis, [*ends, *ends[::-1]],
                         [run.quality - U] * 2 + [run.quality + U] * 2, {"width": 0},
                         fill="toself", fillcolor="var:blue/0.18"),
                   _line("quality of the means", axis, ends, [run.quality] * 2, {"color": "var:blue", "width": 3})]
    traces.append(_apart(panel, axis, x, run))
    return traces


def _line(name: str, axis: str, x, y, line: dict[str, Any], **more: Any) -> dict[str, Any]:
    return {"type": "scatter", "mode": "lines", "name": name, "yaxis": axis, "x": _plain(x), "y": _plain(y),
            "line": line, "hovertemplate": f"{upper_first(name)}<br>%{{x:.2f}}, %{{y:.6g}}<extra></extra>", **more}


def _plain(values) -> list[float | None]:
    return [v if v == v else None for v in np.asarray(values, float).tolist()]


def _apart(panel: Panel, axis: str, x: np.ndarray, run: RunResult) -> dict[str, Any]:
    """Readings that lie apart: a cross where flagged and kept, a circle where left out; the same trace when none."""
    at, marks, words = [], [], []
    tests = run.outliers.get(panel.name)
    places = np.flatnonzero(run.window)
    flagged = np.array([], int)
    if tests is not None:
        marked = np.flatnonzero(tests.by_grubbs | tests.by_tau)
        flagged = places[marked[np.argsort(-tests.distance[marked])[:MARKED]]]  # the farthest
    gone = [k for k in np.flatnonzero(np.isin(run.run.rows, list(run.removed))) if run.removed[int(run.run.rows[k])]]
    for k in sorted({*flagged.tolist(), *map(int, gone)}):
        row, out = int(run.run.rows[k]), k in gone
        at.append(k)
        marks.append("circle-open" if out else "x-thin-open")
        words.append(f"row {row}: " + (f"left out, {run.removed[row]}" if out else "lies apart, kept"))
    return {"type": "scatter", "mode": "markers", "name": "apart", "yaxis": axis, "x": _plain(x[at]),
            "y": _plain(panel.values[at]), "text": words, "hovertemplate": "%{text}<extra></extra>",
            "marker": {"size": 10, "symbol": marks or "x-thin-open", "color": "var:pink",
                       "line": {"width": 2, "color": "var:pink"}}}


def _x_range(x: np.ndarray) -> list[float]:
    low, high = (float(x.min()), float(x.max())) if x.size else (0.0, 1.0)
    pad = 0.01 * (high - low) or 0.5
    return [low - pad, high + pad]


def _near(run: RunResult, x: np.ndarray) -> np.ndarray:
    """The window used and a twentieth of it on either side; all of the run where nothing is used."""
    span = _span(run, x)
    if span is None:
        return np.ones(x.size, dtype=bool)
    pad = 0.05 * (span[1] - span[0])
    return (x >= span[0] - pad) & (x <= span[1] + pad)


def _y_range(panel: Panel, run: RunResult, near: np.ndarray) -> list[float]:
    """What a channel does where it is looked at. The temperature from a little below saturation: cold metal says
    nothing. Of the quality the neighbourhood of the window used, since warm-up leads far away."""
    if panel.name == "x" and run.used.any():
        inside = panel.values[run.used & np.isfinite(panel.values)]
        if inside.size:
            middle, reach = float(np.median(inside)), max(0.75 * float(np.ptp(inside)), 0.0025)
            return [middle - reach, middle + reach]
    shown = panel.values[near]
    if panel.floor is not None and near.all() and np.isfinite(panel.floor).any():
        shown = np.append(np.maximum(shown, np.nanmin(panel.floor) - 4.0), panel.floor)
    shown = shown[np.isfinite(shown)]
    if not shown.size:
        return [0.0, 1.0]
    low, high = float(shown.min()), float(shown.max())
    pad = 0.08 * (high - low) or 0.01 * abs(high) or 0.1
    return [low - pad, high + pad]


def _span(run: RunResult, x: np.ndarray) -> tuple[float, float] | None:
    if not run.settling.used.any():
        return None
    inside = x[run.settling.used]
    return float(inside.min()), float(inside.max())


def _shapes(run: RunResult, x: np.ndarray) -> list[dict[str, Any]]:
    """Settled stretches shaded, the window used framed."""
    shaded = [{"type": "rect", "xref": "x", "yref": "paper", "x0": i.begin / 60, "x1": i.end / 60, "y0": 0, "y1": 1,
               "fillcolor": "var:green/0.12", "line": {"width": 0}, "layer": "below"}
              for i in run.settling.found[:60]]
    span = _span(run, x)
    if span is None:
        return shaded
    return [*shaded, {"type": "rect", "xref": "x", "yref": "paper", "x0": span[0], "x1": span[1], "y0": 0, "y1": 1,
                      "line": {"color": "var:blue", "width": 2, "dash": "dash" if run.settling.by_hand else "solid"}}]


def _annotations(run: RunResult, x: np.ndarray) -> list[dict[str, Any]]:
    span = _span(run, x)
    if span is None:
        return []
    words = "used, chosen by hand" if run.settling.by_hand else (
        "used: the longest settled window" if run.run.time is not None else "used")
    return [{"xref": "x", "yref": "paper", "x": 0.5 * (span[0] + span[1]), "y": 1.0, "yanchor": "bottom",
             "text": words, "showarrow": False, "font": {"size": 13, "color": "var:text"}}]
