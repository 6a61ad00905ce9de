"""What does not move on the process diagrams: dome, quality lines, isobars, isotherms. Built once per unit system."""

from __future__ import annotations

from functools import lru_cache
from typing import Any, NamedTuple

import numpy as np

from engine.steam import P_SAT_MAX, dome, saturated, saturation_temperature, vapour
from engine.steam.units import SYSTEMS, UnitSystem, to_si

QUALITIES = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.85, 0.9, 0.92, 0.94, 0.96, 0.98)
ISOBARS = {"SI": (0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0, 160.0),
           "US": (1.0, 2.0, 5.0, 14.7, 30.0, 75.0, 150.0, 300.0, 750.0, 1500.0)}
ISOTHERMS = {"SI": (50.0, 100.0, 120.0, 140.0, 160.0, 200.0, 250.0, 300.0, 400.0, 500.0),
             "US": (120.0, 210.0, 250.0, 290.0, 330.0, 400.0, 500.0, 600.0, 750.0, 900.0)}
_DOTTED = {"color": "var:muted/0.55", "width": 1, "dash": "dot"}
T_TOP = 823.15  # K: the superheated lines end there


class Axes(NamedTuple):
    """One diagram: the state property on each axis, its kind of unit, symbol and whether it is logarithmic."""

    key: str
    title: str
    x: str
    y: str
    x_kind: str
    y_kind: str
    log_y: bool = False


TS = Axes("Ts", "T–s", "s", "T", "entropy", "temperature")
HS = Axes("hs", "h–s", "s", "h", "entropy", "enthalpy")
PH = Axes("Ph", "P–h", "h", "p", "enthalpy", "pressure", True)
AXES = (TS, HS, PH)

_SYMBOLS = {"s": "s", "T": "T", "h": "h", "p": "p"}


def axis_title(name: str, kind: str, units: UnitSystem) -> str:
    """``p, bar abs``."""
    return f"{_SYMBOLS[name]}, {units.unit(kind)}{' abs' if name == 'p' else ''}"


def shown(axes: Axes, units: UnitSystem, states: dict[str, np.ndarray]) -> tuple[np.ndarray, np.ndarray]:
    """Both coordinates of states in the reader's units."""
    return units.value(states[axes.x], axes.x_kind), units.value(states[axes.y], axes.y_kind)


def line(axes: Axes, units: UnitSystem, pieces: list[dict[str, np.ndarray]], style: dict[str, Any],
         **more: Any) -> dict[str, Any]:
    """One trace from several pieces of line, with gaps between them."""
    xs, ys = [], []
    for piece in pieces:
        x, y = shown(axes, units, piece)
        xs += [*np.asarray(x, float).ravel().tolist(), None]
        ys += [*np.asarray(y, float).ravel().tolist(), None]
    return {"type": "scatter", "mode": "lines", "x": xs[:-1], "y": ys[:-1], "line": style, "hoverinfo": "skip",
            "showlegend": False, **more}


def labels(axes: Axes, units: UnitSystem, states: dict[str, np.ndarray], words: list[str], colour: str,
           position: str = "top center") -> dict[str, Any]:
    """Words at states: the names of lines."""
    x, y = shown(axes, units, states)
    return {"type": "scatter", "mode": "text", "x": x.tolist(), "y": y.tolist(), "text": words, "cliponaxis": True,
            "textposition": position, "textfont": {"size": 11, "color": colour}, "hoverinfo": "skip",
            "showlegend": False}


@lru_cache(maxsize=1)
def _dome_states() -> dict[str, np.ndarray]:
    d = dome()
    def loop(liquid, vap):
        return np.concatenate([liquid, vap[::-1]])
    return {"p": loop(d.p, d.p), "T": loop(d.T, d.T), "h": loop(d.h_f, d.h_g), "s": loop(d.s_f, d.s_g)}


def _quality_states(x: float) -> dict[str, np.ndarray]:
    d = dome()
    return {"p": d.p, "T": d.T, "h": d.h_f + x * (d.h_g - d.h_f), "s": d.s_f + x * (d.s_g - d.s_f)}


def _isobar_states(p: float) -> dict[str, np.ndarray]:
    sat = saturated(p)
    T = np.concatenate([[sat.T], np.linspace(sat.T, T_TOP, 40)[1:]])
    hot = vapour(np.full(T.size, p), T)
    return {"p": np.full(T.size + 1, p), "T": np.append(sat.T, T), "h": np.append(sat.h_f, hot.h),
            "s": np.append(sat.s_f, hot.s)}


def _isotherm_states(T: float) -> dict[str, np.ndarray]:
    highest = float(P_SAT_MAX if T > 620 else np.exp(_ln_saturation(T)))
    p = np.geomspace(2e3, highest * (1 - 1e-9), 40)
    hot = vapour(p, np.full(p.size, T))
    return {"p": p, "T": np.full(p.size, T), "h": hot.h, "s": hot.s}


def _ln_saturation(T: float) -> float:
    d = dome()
    p = np.exp(np.interp(T, d.T, np.log(d.p)))
    return float(np.log(min(p, P_SAT_MAX))) - 1e-4


@lru_cache(maxsize=8)
def background(key: str, system: str) -> tuple[dict[str, Any], ...]:
    """The traces behind the process on one diagram, the same objects at every call."""
    axes, units = {a.key: a for a in AXES}[key], SYSTEMS[system]
    isobars = [_isobar_states(to_si(v, units.unit("pressure"), "pressure")) for v in ISOBARS[system]]
    qualities = [_quality_states(x) for x in QUALITIES]
    traces = [line(axes, units, qualities, {"color": "var:muted/0.35", "width": 1}, name="quality"),
              line(axes, units, [_dome_states()], {"color": "var:text", "width": 1.8}, name="saturation")]
    traces += [_quality_labels(axes, units, qualities)]
    if axes is PH:
        isotherms = [_isotherm_states(to_si(v, units.unit("temperature"), "temperature")) for v in ISOTHERMS[system]]
        traces += [line(axes, units, isotherms, _DOTTED, name="isotherm"),
                   labels(axes, units, _at(isotherms, [5, 22]), [f"{v:g} {units.unit('temperature')}"
                          for v in ISOTHERMS[system] for _ in range(2)], "var:muted", "middle right")]
    else:
        traces += [line(axes, units, isobars, _DOTTED, name="isobar"),
                   labels(axes, units, _at(isobars, [5, 20]), [f"{v:g} {units.unit('pressure')}"
                          for v in ISOBARS[system] for _ in range(2)], "var:muted", "middle left")]
    return tuple(traces)


def _quality_labels(axes: Axes, units: UnitSystem, qualities: list[dict[str, np.ndarray]]) -> dict[str, Any]:
    """Names of the quality lines, where they can be told apart."""
    chosen = [k for k, x in enumerate(QUALITIES) if axes is not TS or x <= 0.8 or x in (0.9, 0.94, 0.98)]
    places = [int(np.argmin(np.abs(dome().T - T))) for T in (333.15, 393.15, 453.15, 523.15)]
    return labels(axes, units, _at([qualities[k] for k in chosen], places),
                  [f"{QUALITIES[k]:g}" for k in chosen for _ in places], "var:muted", "middle center")


def _at(pieces: list[dict[str, np.ndarray]], places: list[int]) -> dict[str, np.ndarray]:
    return {name: np.array([piece[name][k] for piece in pieces for k in places]) for name in ("p", "T", "h", "s")}


def saturation_T(p: float) -> float:
    """Saturation temperature [K] for the windows of the diagrams."""
    return saturation_temperature(min(max(p, 700.0), 16.5e6))
