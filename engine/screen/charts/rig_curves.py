"""Curves of the rig: the sample flow over the bore, the sampling error over the drop size, the warm-up over time."""

from __future__ import annotations

from typing import Any

import numpy as np

from engine.job.rig import RigAssessment
from engine.job.rig.flow import RATIOS
from engine.job.rig.tables import points
from engine.screen.charts.diagram import Diagram
from engine.steam.units import UnitSystem, from_si


def flow_diagram(rig: RigAssessment, units: UnitSystem) -> Diagram | None:
    """Sample flow over bore: computed, Napier, and from a sharp edge to a rounded inlet; None without orifice."""
    f = rig.flow.value
    if f is None:
        return None
    x = units.value(f.bores, "length")

    def flow(si) -> list[float]:
        return np.asarray(units.value(si, "mass flow")).tolist()

    bore, now = (units.value(v, k) for v, k in ((rig.point.si["bore"], "length"), (f.orifice.computed, "mass flow")))
    points_x, points_y, words = [bore], [now], ["computed"]
    if f.implied is not None:
        points_x, points_y, words = [bore] * 2, [now, units.value(f.orifice.sample_flow, "mass flow")], [
            "computed", "in the case"]
    data = [_line("sharp edge", x, flow(f.least), "var:muted/0.5", width=1, showlegend=False),
            _line("from sharp edge to rounded inlet", x, flow(f.most), "var:muted/0.5", width=1, fill="tonexty",
                  fillcolor="var:muted/0.18"),
            _line("Napier", x, flow(f.napier), "var:blue", dash="dash"),
            _line("computed", x, flow(f.computed), "var:vermilion", width=3),
            {"type": "scatter", "mode": "markers", "name": "this rig", "x": points_x, "y": points_y, "text": words,
             "marker": {"size": 13, "color": "var:vermilion", "symbol": ["circle", "cross-thin"][:len(words)],
                        "line": {"color": "var:text", "width": 2.5}},
             "hovertemplate": "%{text}: %{y:.2f}<extra></extra>", "showlegend": False}]
    layout = _layout(f"orifice bore, {units.unit('length')}", f"sample flow, {units.unit('mass flow')}")
    layout["yaxis"]["rangemode"] = layout["xaxis"]["rangemode"] = "tozero"
    told = units.text(f.orifice.computed, "mass flow")
    return Diagram("flow", "Sample flow over bore", {"data": data, "layout": layout}, tuple(range(len(data))),
                   f"Sample flow over orifice bore; this orifice passes {told}.")


def sampling_diagram(rig: RigAssessment, units: UnitSystem) -> Diagram | None:
    """Error of the quality over drop size, for these ports and for other velocity ratios; None without ports."""
    n = rig.nozzle.value
    if n is None or n.errors is None:
        return None
    drops = from_si(n.drops, "µm", "length")
    data = []
    for ratio, errors in zip(RATIOS, n.compared, strict=True):
        first = ratio == RATIOS[0]
        data.append(_line("line velocity over port velocity", drops, _percent(errors), "var:muted", width=1.5,
                          dash="dot", showlegend=first,
                          mode="lines+text", text=[""] * (len(drops) - 1) + [f"\u2002{ratio:g}×"],
                          textposition="middle right", textfont={"color": "var:muted", "size": 13}, cliponaxis=False))
    data.append(_line("as it stands", drops, _percent(n.errors), "var:vermilion", width=3))
    mark: dict[str, Any] = {"type": "scatter", "mode": "markers", "name": "drops entered", "x": [], "y": [],
                            "marker": {"size": 12, "color": "var:vermilion", "line": {"color": "var:text", "width": 2}},
                            "hovertemplate": "%{x:.3g} µm: %{y:+.3f} %pt<extra></extra>"}
    label = "Error of the quality over drop size"
    if n.entry:
        drop = from_si(rig.point.si["drop_diameter"], "µm", "length")
        mark |= {"x": [drop], "y": [100.0 * n.entry.value.error]}
        label += f"; at {drop:.3g} µm it is {points(n.entry.value.error, signed=True)}"
    ticks = [1, 3, 10, 30, 100, 300]
    layout = _layout("drop size, µm", "error of the quality, %pt")
    layout["xaxis"] |= {"type": "log", "tickvals": ticks, "ticktext": [f"{t:g}" for t in ticks]}
    layout["yaxis"]["zeroline"] = True
    layout["margin"] = {**layout["margin"], "r": 48}
    return Diagram("sampling", "Sampling error over drop size", {"data": [*data, mark], "layout": layout},
                   tuple(range(len(data) + 1)), label + ".")


def warm_up_diagram(rig: RigAssessment, units: UnitSystem) -> Diagram | None:
    """What the exhaust thermometer shows over the warm-up; None where there is nothing to draw."""
    w = rig.warming.value
    if w is None:
        return None
    minutes, unit = from_si(w.time, "min", "time"), units.unit("temperature")
    T = units.value(w.reading, "temperature")
    ready, allowed = from_si(w.ready, "min", "time"), units.text(rig.point.si["warmup_error"], "difference", 2)
    at_ready = units.value(float(np.interp(w.ready, w.time, w.reading)), "temperature")
    ends = [0.0, float(minutes[-1])]
    data = [_line("saturation at the exhaust", ends, [units.value(w.run.T_saturation, "temperature")] * 2, "var:blue",
                  dash="dash", width=1.5),
            _line("its end", ends, [units.value(w.run.T_final, "temperature")] * 2, "var:muted", dash="dot", width=2),
            _line("reading", minutes, T, "var:vermilion", width=3.5),
            {"type": "scatter", "mode": "markers+text", "x": [ready], "y": [at_ready], "text": [f"{ready:.0f} min"],
             "textposition": "bottom center", "textfont": {"color": "var:text", "size": 15},
             "name": f"within {allowed}", "hoverinfo": "skip", "cliponaxis": False,
             "marker": {"size": 14, "symbol": "diamond", "color": "var:vermilion",
                        "line": {"color": "var:text", "width": 2}}}]
    layout = _layout("time from opening, min", f"exhaust thermometer, {unit}")
    layout["xaxis"]["range"] = ends
    return Diagram("warmup", "Warm-up", {"data": data, "layout": layout}, tuple(range(len(data))),
                   f"Exhaust temperature over the warm-up; within {allowed} of its end after {ready:.0f} min.")


def _percent(shares) -> list[float]:
    return (100.0 * np.asarray(shares)).tolist()


def _line(name: str, x, y, colour: str, *, width: float = 2, dash: str = "solid", **more: Any) -> dict[str, Any]:
    return {"type": "scatter", "mode": "lines", "name": name, "x": np.asarray(x).tolist(), "y": np.asarray(y).tolist(),
            "line": {"color": colour, "width": width, "dash": dash}, "hovertemplate": "%{x:.3g}: %{y:.4g}", **more}


def _layout(x: str, y: str) -> dict[str, Any]:
    axis = {"gridcolor": "var:grid", "zeroline": False, "zerolinecolor": "var:muted", "linecolor": "var:muted",
            "ticks": "outside", "tickcolor": "var:muted"}
    return {"margin": {"l": 66, "r": 14, "t": 8, "b": 46}, "hovermode": "closest", "font": {"size": 14},
            "showlegend": True,
            "legend": {"orientation": "h", "x": 0, "y": 1.0, "yanchor": "bottom", "bgcolor": "rgba(0,0,0,0)"},
            "xaxis": {**axis, "title": {"text": x, "standoff": 4}},
            "yaxis": {**axis, "title": {"text": y, "standoff": 4}}}
