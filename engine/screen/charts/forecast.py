"""The uncertainty budget as bars: what each cause adds to the uncertainty of the quality, the largest first."""

from __future__ import annotations

from engine.job.result import Result
from engine.job.result.said import told
from engine.job.rig.tables import points
from engine.job.uncertainty import Forecast
from engine.job.uncertainty.forecast_words import forecast_headline, largest_first
from engine.measurement import SAMPLING
from engine.screen.charts.diagram import Diagram
from engine.screen.charts.ranking import words_above

SHOWN = 9  # bars; smaller causes stand in the table


def budget_diagram(f: Forecast | Result, *, with_sampling: bool = True) -> Diagram | None:
    """Standard uncertainty that each cause gives the quality, in %pt; sampling hatched; None without a budget."""
    terms = [t for t in largest_first(f) if with_sampling or t.group != SAMPLING][:SHOWN]
    said = forecast_headline(f) if isinstance(f, Forecast) else told(f).headline
    if not terms:
        return None
    sizes = [100.0 * abs(t.contribution) for t in terms]
    longest = max(sizes) or 0.01
    sampling = [t.group == SAMPLING for t in terms]

    def bars(name: str, wanted: bool, marker: dict) -> dict:
        rows = [i for i, is_sampling in enumerate(sampling) if is_sampling == wanted]
        return {"type": "bar", "orientation": "h", "name": name, "width": 0.36, "marker": marker, "y": rows,
                "x": [sizes[i] for i in rows], "hoverinfo": "skip", "showlegend": bool(rows)}

    names = [f"{'◇' if s else '●'} <b>{t.group}</b>" + ("" if t.cause.startswith(t.group) else f", {t.cause}")
             for s, t in zip(sampling, terms, strict=True)]
    data = [bars("● instruments and corrections", False, {"color": "var:vermilion"}),
            bars("◇ sampling", True, {"color": "var:blue/0.25", "line": {"color": "var:blue", "width": 1.5},
                                      "pattern": {"shape": "/", "fgcolor": "var:blue", "size": 7, "solidity": 0.3}}),
            words_above(names, 0.0, "middle right"),
            words_above([points(s / 100.0) for s in sizes], 1.04 * longest, "middle left")]
    layout = {"margin": {"l": 8, "r": 8, "t": 8, "b": 46}, "font": {"size": 15}, "bargap": 0, "barmode": "overlay",
              "showlegend": True,
              "legend": {"orientation": "h", "x": 0, "y": -0.12, "yanchor": "top", "bgcolor": "rgba(0,0,0,0)"},
              "xaxis": {"range": [0, 1.04 * longest], "fixedrange": True, "nticks": 6, "gridcolor": "var:grid",
                        "zeroline": True, "zerolinecolor": "var:muted",
                        "title": {"text": "standard uncertainty of the quality, %pt", "standoff": 2}},
              "yaxis": {"range": [len(terms) - 0.4, -0.75], "visible": False, "fixedrange": True}}
    return Diagram("budget", "Uncertainty budget", {"data": data, "layout": layout}, (0, 1, 2, 3),
                   f"Uncertainty budget, largest first. {said}")
