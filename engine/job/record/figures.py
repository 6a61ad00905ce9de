"""The three process diagrams of a record as inline drawings: dome, path, reach limit, states; nothing else."""

from __future__ import annotations

import math
from collections.abc import Callable
from html import escape
from typing import NamedTuple

import numpy as np

from engine.calorimeter import Path
from engine.job.assessment import Assessment
from engine.job.reach.printable import nice_step
from engine.steam import dome
from engine.steam.units import UnitSystem

_WIDTH, _HEIGHT, _LEFT, _RIGHT, _TOP, _BOTTOM = 430.0, 270.0, 62.0, 12.0, 10.0, 42.0
_MARGIN = 0.08  # of the window, around what is drawn


class Axis(NamedTuple):
    """A property along one side of a diagram: its kind of unit, and whether its scale is logarithmic."""

    name: str
    kind: str
    log: bool = False


DIAGRAMS: dict[str, tuple[Axis, Axis]] = {
    "T–s": (Axis("s", "entropy"), Axis("T", "temperature")),
    "h–s": (Axis("s", "entropy"), Axis("h", "enthalpy")),
    "p–h": (Axis("h", "enthalpy"), Axis("p", "pressure", True)),
}
Points = dict[str, np.ndarray]


def diagrams_svg(a: Assessment, units: UnitSystem) -> tuple[tuple[str, str], ...]:
    """Title and drawing of each diagram, numbered states on it as in the table of states."""
    return tuple((f"{title} diagram", _drawing(title, x, y, a, units)) for title, (x, y) in DIAGRAMS.items())


class _Scale(NamedTuple):
    """From a property in SI to a place on the drawing, and the ticks on the way."""

    of: Callable[[np.ndarray], np.ndarray]
    ticks: tuple[tuple[float, str], ...]
    title: str


def _scale(axis: Axis, units: UnitSystem, low: float, high: float, begin: float, end: float) -> _Scale:
    """A window from ``low`` to ``high`` in the reader's units, laid between two places."""
    def bent(value):
        return np.log10(value) if axis.log else np.asarray(value, float)

    first, last = bent(low), bent(high)

    def place(shown):
        return begin + (end - begin) * (bent(shown) - first) / (last - first)

    ticks = _decades(low, high) if axis.log else _steps(low, high)
    absolute = " abs" if axis.name == "p" else ""
    return _Scale(lambda si: place(units.value(si, axis.kind)),
                  tuple((float(place(t)), f"{t:.6g}") for t in ticks),
                  f"{axis.name}, {units.unit(axis.kind)}{absolute}")


def _steps(low: float, high: float) -> list[float]:
    step = nice_step(high - low, 6)
    return [round(step * k, 12) for k in range(math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9) + 1)]


def _decades(low: float, high: float) -> list[float]:
    powers = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    found = [m * 10.0**k for k in powers for m in (1, 2, 5) if low <= m * 10.0**k <= high]
    return found if len(found) > 2 else _steps(low, high)  # a short stretch of the scale has other round numbers


def _drawing(title: str, x: Axis, y: Axis, a: Assessment, units: UnitSystem) -> str:
    lines = [_points(a.path)] + ([] if a.reach_path is None else [_points(a.reach_path)])
    states = {n: np.array([getattr(s, n) for s in a.states]) for n in ("p", "T", "h", "s")}
    windows = [_window(axis, units, [*lines, states]) for axis in (x, y)]
    right, floor = _WIDTH - _RIGHT, _HEIGHT - _BOTTOM
    across = _scale(x, units, *windows[0], _LEFT, right)
    up = _scale(y, units, *windows[1], floor, _TOP)
    clip = f"window-{x.name}{y.name}"
    parts = [f'<svg viewBox="0 0 {_WIDTH:g} {_HEIGHT:g}" role="img" aria-label="{escape(title)} diagram: the path of '
             f'the sample through {len(a.states)} states" xmlns="http://www.w3.org/2000/svg">',
             f'<defs><clipPath id="{clip}"><rect x="{_LEFT:g}" y="{_TOP:g}" width="{right - _LEFT:g}" '
             f'height="{floor - _TOP:g}"/></clipPath></defs>',
             *(_line(f"M{at:.1f} {_TOP:g}V{floor:g}", "#ddd", 0.6) for at, _ in across.ticks),
             *(_line(f"M{_LEFT:g} {at:.1f}H{right:g}", "#ddd", 0.6) for at, _ in up.ticks),
             f'<g clip-path="url(#{clip})">', _curve(_dome(), x, y, across, up, "#111", 1.4)]
    if a.reach_path is not None:
        parts.append(_curve(_points(a.reach_path), x, y, across, up, "#111", 1.2, "6 4"))
    parts += [_curve(_points(a.path), x, y, across, up, "#d55e00", 2.6), "</g>",
              f'<rect x="{_LEFT:g}" y="{_TOP:g}" width="{right - _LEFT:g}" height="{floor - _TOP:g}" fill="none" '
              'stroke="#111" stroke-width="1"/>',
              *_marks(across.of(states[x.name]), up.of(states[y.name])),
              *(_words(at, floor + 15, text) for at, text in across.ticks),
              *(_words(_LEFT - 6, at + 4, text, "end") for at, text in up.ticks),
              _words(0.5 * (_LEFT + right), _HEIGHT - 8, across.title),
              _words(14, 0.5 * (_TOP + floor), up.title, turn=True), "</svg>"]
    return "\n".join(parts)


def _points(path: Path) -> Points:
    return {"p": path.p, "T": path.T, "h": path.h, "s": path.s}


def _dome() -> Points:
    d = dome()
    both = ((d.p, d.p), (d.T, d.T), (d.h_f, d.h_g), (d.s_f, d.s_g))
    return {n: np.concatenate([f, g[::-1]]) for n, (f, g) in zip(("p", "T", "h", "s"), both, strict=True)}


def _window(axis: Axis, units: UnitSystem, drawn: list[Points]) -> tuple[float, float]:
    """What is drawn, with some room around it."""
    values = units.value(np.concatenate([points[axis.name] for points in drawn]), axis.kind)
    low, high = float(values.min()), float(values.max())
    if axis.log:
        room = max((high / low) ** _MARGIN, 1.0 + _MARGIN)
        return low / room, high * room
    room = _MARGIN * (high - low) or _MARGIN * abs(high) or 1.0
    return low - room, high + room


def _curve(points: Points, x: Axis, y: Axis, across: _Scale, up: _Scale, colour: str, width: float,
           dash: str = "") -> str:
    places = zip(across.of(points[x.name]), up.of(points[y.name]), strict=True)
    path = " ".join(f"{px:.1f},{py:.1f}" for px, py in places)
    dashed = f' stroke-dasharray="{dash}"' if dash else ""
    return (f'<polyline points="{path}" fill="none" stroke="{colour}" stroke-width="{width}" '
            f'stroke-linejoin="round"{dashed}/>')


def _line(d: str, colour: str, width: float) -> str:
    return f'<path d="{d}" stroke="{colour}" stroke-width="{width}" fill="none"/>'


def _marks(across: np.ndarray, up: np.ndarray) -> list[str]:
    """Numbered discs at the states; the number of one right beside another stands on its other side."""
    marks, side = [], 1
    for k, (px, py) in enumerate(zip(across, up, strict=True), 1):
        near = any(math.hypot(px - qx, py - qy) < 22 for qx, qy in zip(across[:k - 1], up[:k - 1], strict=True))
        side = -side if near else 1
        marks.append(f'<circle cx="{px:.1f}" cy="{py:.1f}" r="4" fill="#d55e00" stroke="#fff" stroke-width="1"/>')
        marks.append(_words(px + 9 * side, py - 8 * side + (4 if side < 0 else 0), str(k),
                            "start" if side > 0 else "end", bold=True))
    return marks


def _words(x: float, y: float, text: str, anchor: str = "middle", *, turn: bool = False, bold: bool = False) -> str:
    turned = f' transform="rotate(-90 {x:.1f} {y:.1f})"' if turn else ""
    heavy = ' font-weight="700" stroke="#fff" stroke-width="3" paint-order="stroke"' if bold else ""
    return (f'<text x="{x:.1f}" y="{y:.1f}" font-size="12" font-family="sans-serif" text-anchor="{anchor}"{heavy}'
            f"{turned}>{escape(text)}</text>")
