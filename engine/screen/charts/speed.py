"""Velocities along the sample's way: what the bores make of its growing volume."""

from __future__ import annotations

from typing import Any

import numpy as np

from engine.job.assessment import Assessment
from engine.screen.charts.diagram import Diagram
from engine.steam.units import UnitSystem


def velocity_diagram(a: Assessment, units: UnitSystem) -> Diagram | None:
    """Velocity over pressure: in the exhaust bore at constant enthalpy, and in one constant bore; None without flow."""
    flow, d1, d2 = (a.si[n] for n in ("sample_flow", "line_bore", "exhaust_bore"))
    if not flow or not (d1 or d2):
        return None
    traces = [_bore_trace("sample bore", a, flow, d1, units, "var:muted", "dot"),
              _bore_trace("exhaust bore", a, flow, d2, units, "var:vermilion"),
              _trace("constant bore, speeding up", a.bore_path.p, a.bore_path.velocity, units, "var:blue", "dashdot")
              if a.bore_path is not None else _empty("constant bore")]
    ticks = [d * 10.0**e for e in range(-2, 5) for d in (1, 2, 5)]
    common = {"gridcolor": "var:grid", "zeroline": False, "linecolor": "var:muted", "ticks": "outside"}
    layout = {"margin": {"l": 62, "r": 10, "t": 8, "b": 46}, "hovermode": "closest", "font": {"size": 14},
              "showlegend": True, "legend": {"x": 0.02, "y": 0.98, "xanchor": "left", "bgcolor": "rgba(0,0,0,0)"},
              "xaxis": {**common, "type": "log", "autorange": "reversed", "tickvals": ticks,
                        "ticktext": [f"{t:g}" for t in ticks],
                        "title": {"text": f"p, {units.unit('pressure')} abs (line → exhaust)", "standoff": 4}},
              "yaxis": {**common, "rangemode": "tozero",
                        "title": {"text": f"c, {units.unit('velocity')}", "standoff": 4}}}
    label = "Velocity of the sample over pressure from line to exhaust."
    return Diagram("velocity", "Velocity along the path", {"data": traces, "layout": layout}, (0, 1, 2), label)


def _bore_trace(name: str, a: Assessment, flow: float, bore: float | None, units: UnitSystem, colour: str,
                dash: str = "solid") -> dict[str, Any]:
    if not bore:
        return _empty(name)
    speed = flow * a.path.v / (0.25 * np.pi * bore**2)
    return _trace(f"{name} {units.text(bore, 'length')}", a.path.p, speed, units, colour, dash)


def _trace(name: str, p, speed, units: UnitSystem, colour: str, dash: str = "solid") -> dict[str, Any]:
    x, y = units.value(p, "pressure"), units.value(speed, "velocity")
    return {"type": "scatter", "mode": "lines", "name": name, "x": np.asarray(x).tolist(),
            "y": np.asarray(y).tolist(), "line": {"color": colour, "width": 3, "dash": dash},
            "hovertemplate": f"%{{x:.3g}} {units.unit('pressure')} abs<br>%{{y:.1f}} {units.unit('velocity')}"}


def _empty(name: str) -> dict[str, Any]:
    return {"type": "scatter", "mode": "lines", "x": [], "y": [], "name": name, "showlegend": False}
