"""What a recorder draws during a rehearsal: the exhaust temperature on the whole and finely, and the line pressure."""

from __future__ import annotations

from typing import Any

import numpy as np

from engine.job.rehearsal import Rehearsal
from engine.screen.charts.diagram import Diagram
from engine.steam import saturation_temperature
from engine.steam.units import UnitSystem

FINELY = 900.0  # s that the fine strips show
WHOLE = 7200.0  # s that the other one shows
LEAST = 600.0  # s of paper from the beginning on
LEAST_SPAN = 1.0  # K across a fine strip, so that noise does not look like drift
LEAST_SWING = 0.01  # of the line pressure, likewise
POINTS = 360


def recorder(r: Rehearsal, units: UnitSystem) -> tuple[Diagram, Diagram, Diagram]:
    """The three strips up to now; sets of readings are marked."""
    return _whole(r, units), _finely(r, units), _line_gauge(r, units)


def _rows(r: Rehearsal, back: float) -> tuple[np.ndarray, np.ndarray]:
    """Steps to draw, and those of the sets of readings, of the last ``back`` seconds."""
    course = r.course
    rows = np.flatnonzero(course.time >= r.now - back)
    taken = course.at(np.array([t for t in r.readings if t >= r.now - back], dtype=float))
    return rows[::max(1, rows.size // POINTS)], taken


def _whole(r: Rehearsal, units: UnitSystem) -> Diagram:
    course, rig, unit = r.course, r.rig, units.unit("temperature")
    rows, taken = _rows(r, WHOLE)
    air = rig.sheet.p_barometer if rig.gauges["exhaust"].on_barometer else 0.0
    T = units.value(course.standing["exhaust thermometer"], "temperature")
    saturation = units.value(saturation_temperature(course.standing["exhaust"][rows] + air), "temperature")
    read = units.value(course.shown["exhaust thermometer"][taken], "temperature")
    label = f"now {T[-1]:.1f} {unit}, saturation {saturation[-1]:.1f} {unit}."
    return _strip("whole", "Exhaust thermometer, as recorded", f"T₂, {unit}",
                  [_line(course.time[rows], T[rows], "var:vermilion", "exhaust thermometer"),
                   _line(course.time[rows], saturation, "var:blue", "saturation at the exhaust gauge", "dash"),
                   _marks(course.time[taken], read), _room([0.0, max(LEAST, r.now)], [T[0]] * 2)], label)


def _finely(r: Rehearsal, units: UnitSystem) -> Diagram:
    course, unit = r.course, units.unit("temperature")
    rows, taken = _rows(r, FINELY)
    T = units.value(course.standing["exhaust thermometer"][rows], "temperature")
    read = units.value(course.shown["exhaust thermometer"][taken], "temperature")
    span = LEAST_SPAN if unit != "°F" else 1.8 * LEAST_SPAN
    middle = float(T[-1])
    label = f"the last {FINELY / 60:.0f} minutes, between {T.min():.2f} and {T.max():.2f} {unit}."
    return _strip("finely", f"The last {FINELY / 60:.0f} min, finely", f"T₂, {unit}",
                  [_line(course.time[rows], T, "var:vermilion", "exhaust thermometer"),
                   _marks(course.time[taken], read),
                   _room(_paper(r), [middle - span / 2, middle + span / 2])], label, legend=False)


def _line_gauge(r: Rehearsal, units: UnitSystem) -> Diagram:
    course, unit = r.course, units.unit("pressure")
    rows, taken = _rows(r, FINELY)
    p = units.value(course.standing["line"][rows], "pressure")
    read = units.value(course.shown["line"][taken], "pressure")
    middle = float(p.mean())
    label = f"line gauge, the last {FINELY / 60:.0f} minutes, between {p.min():.3f} and {p.max():.3f} {unit}."
    return _strip("line", "Line gauge, as recorded", f"p₁, {unit}",
                  [_line(course.time[rows], p, "var:green", "line gauge"), _marks(course.time[taken], read),
                   _room(_paper(r), [middle * (1 - LEAST_SWING), middle * (1 + LEAST_SWING)])], label, legend=False)


def _paper(r: Rehearsal) -> list[float]:
    """Ends of the paper of a fine strip [s]."""
    return [max(0.0, r.now - FINELY), max(r.now, LEAST)]


def _strip(key: str, title: str, axis: str, traces: list[dict[str, Any]], label: str, legend: bool = True) -> Diagram:
    common = {"gridcolor": "var:grid", "zeroline": False, "linecolor": "var:muted", "ticks": "outside"}
    layout = {"margin": {"l": 74, "r": 12, "t": 8, "b": 44}, "font": {"size": 14}, "hovermode": "closest",
              "showlegend": legend, "legend": {"x": 0.99, "y": 0.04, "xanchor": "right", "yanchor": "bottom",
                                               "bgcolor": "rgba(0,0,0,0)"},
              "xaxis": {**common, "title": {"text": "min from the start", "standoff": 4}},
              "yaxis": {**common, "title": {"text": axis, "standoff": 4}}}
    return Diagram(key, title, {"data": traces, "layout": layout}, tuple(range(len(traces))), label)


def _line(time, y, colour: str, name: str, dash: str = "solid") -> dict[str, Any]:
    return {"type": "scatter", "mode": "lines", "name": name, "x": (time / 60.0).tolist(), "y": y.tolist(),
            "line": {"color": colour, "width": 2.5, "dash": dash}, "hovertemplate": "%{x:.1f} min: %{y:.2f}"}


def _marks(time, y) -> dict[str, Any]:
    return {"type": "scatter", "mode": "markers", "name": "set of readings", "x": (time / 60.0).tolist(),
            "y": y.tolist(), "marker": {"color": "var:text", "size": 7, "symbol": "circle-open"},
            "hovertemplate": "%{x:.1f} min: %{y}"}


def _room(time: list[float], y: list[float]) -> dict[str, Any]:
    """Points that nobody sees, so that the axes reach so far."""
    return {"type": "scatter", "mode": "markers", "x": [float(t) / 60.0 for t in time], "y": [float(v) for v in y],
            "opacity": 0, "showlegend": False, "hoverinfo": "skip"}
