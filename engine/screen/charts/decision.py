"""The decision as a picture: the result with its uncertainty, with sampling and without, against the limit."""

from __future__ import annotations

from typing import Any

import numpy as np

from engine.job.case.fields_instruments import AT_LEAST
from engine.job.result import Result
from engine.job.result.said import verdict_lines, verdict_word
from engine.job.uncertainty import Check
from engine.screen.charts.diagram import Diagram

_ROWS = ("with sampling", "by the instruments alone")


def decision_diagram(result: Result) -> Diagram | None:
    """Both intervals, the limit, and from where the rule accepts; None without a limit or a quality."""
    if result.verdicts is None:
        return None
    budgets = (result.budget, result.instruments)
    limit, least = result.si["x_limit"], result.case["limit_side"] == AT_LEAST
    edges = [v.accept_from if least else v.accept_to for v in result.verdicts]
    words = [f"{verdict_word(v)}  {name}" for v, name in zip(result.verdicts, _ROWS, strict=True)]
    ys = [0.0, 1.0]
    traces = [
        {"type": "scatter", "mode": "markers", "name": "quality ± U", "x": [b.value for b in budgets], "y": ys,
         "error_x": {"type": "data", "array": [b.U for b in budgets], "thickness": 3, "width": 9,
                     "color": "var:vermilion"},
         "marker": {"size": 12, "color": "var:vermilion"},
         "hovertemplate": "%{x:.4f} ± %{error_x.array:.4f}<extra></extra>"},
        {"type": "scatter", "mode": "markers", "name": "the rule accepts from here on" if least else
         "the rule accepts up to here", "x": edges, "y": ys,
         "marker": {"size": 17, "symbol": "triangle-right" if least else "triangle-left", "color": "var:blue"},
         "hovertemplate": "%{x:.4f}<extra></extra>"},
        {"type": "scatter", "mode": "text", "x": [b.value for b in budgets], "y": [-0.3, 0.7], "text": words,
         "textposition": "middle center", "textfont": {"size": 15, "color": "var:text"}, "hoverinfo": "skip",
         "showlegend": False}]
    points = [limit, *edges, *(b.value + s * b.U for b in budgets for s in (-1, 1))]
    pad = 0.12 * (max(points) - min(points)) or 0.001
    layout = {"margin": {"l": 12, "r": 12, "t": 24, "b": 44}, "font": {"size": 14}, "hovermode": "closest",
              "showlegend": True, "legend": {"orientation": "h", "x": 0, "y": -0.22, "yanchor": "top",
                                             "bgcolor": "rgba(0,0,0,0)"},
              "xaxis": {"range": [min(points) - pad, max(points) + pad], "gridcolor": "var:grid", "zeroline": False,
                        "ticks": "outside", "nticks": 7, "title": {"text": "x", "standoff": 2}},
              "yaxis": {"range": [1.5, -0.7], "visible": False, "fixedrange": True},
              "shapes": [{"type": "line", "xref": "x", "yref": "y", "x0": limit, "x1": limit, "y0": y0, "y1": y1,
                          "line": {"color": "var:text", "width": 2.5, "dash": "dash"}}
                         for y0, y1 in ((-0.7, -0.5), (-0.12, 0.5), (0.88, 1.5))],  # not through the words
              "annotations": [{"xref": "x", "yref": "paper", "x": limit, "y": 1.0, "yanchor": "bottom",
                               "text": f"limit {limit:g}", "showarrow": False, "font": {"color": "var:text"}}]}
    return Diagram("decision", "The decision", {"data": traces, "layout": layout}, (0, 1, 2),
                   "Result against the limit. " + " ".join(verdict_lines(result)))


def draws_diagram(check: Check, result: Result) -> Diagram:
    """How often each quality was drawn, with sampling and without, beside the budget's normal curves."""
    pairs = [("with sampling", check.drawn, result.budget, "var:vermilion")]
    if check.instruments is not check.drawn:
        pairs.append(("by the instruments alone", check.instruments, result.instruments, "var:blue"))
    traces: list[dict[str, Any]] = []
    for name, drawn, budget, colour in pairs:
        x, density = _density(drawn.quantiles)
        curve = np.linspace(x[0], x[-1], 121)
        normal = np.exp(-0.5 * ((curve - budget.value) / budget.u) ** 2) / (budget.u * np.sqrt(2 * np.pi))
        scale = normal.max()
        traces += [_curve(f"drawn, {name}", x, density / scale, {"color": colour, "width": 2.5}),
                   _curve(f"budget, {name}", curve, normal / scale, {"color": colour, "width": 1.8, "dash": "dot"})]
    axis = {"gridcolor": "var:grid", "zeroline": False, "ticks": "outside"}
    layout = {"margin": {"l": 46, "r": 12, "t": 8, "b": 44}, "font": {"size": 14}, "hovermode": "closest",
              "showlegend": True, "legend": {"orientation": "h", "x": 0, "y": -0.2, "yanchor": "top",
                                             "bgcolor": "rgba(0,0,0,0)"},
              "xaxis": {**axis, "title": {"text": "x", "standoff": 2}, "nticks": 7},
              "yaxis": {**axis, "rangemode": "tozero", "nticks": 4,
                        "title": {"text": "density, budget's top = 1", "standoff": 4}}}
    return Diagram("draws", "Monte Carlo beside the budget", {"data": traces, "layout": layout},
                   tuple(range(len(traces))), "Distribution of the quality. " + check.comparison.sentence)


def _density(quantiles: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Density from equally spaced quantiles: how many of them lie in each of thirty equal steps."""
    low, high = quantiles[5], quantiles[-6]  # the very ends are single draws
    counts, edges = np.histogram(quantiles, bins=30, range=(low, high), density=True)
    return 0.5 * (edges[1:] + edges[:-1]), counts


def _curve(name: str, x: np.ndarray, y: np.ndarray, line: dict[str, Any]) -> dict[str, Any]:
    return {"type": "scatter", "mode": "lines", "name": name, "x": x.tolist(), "y": y.tolist(), "line": line,
            "hoverinfo": "skip"}
