"""The instrument chart as one self-contained page to print: inline drawing, table, escaped words, no script."""

from __future__ import annotations

import math
from html import escape

import numpy as np

from engine import __version__
from engine.job.assessment.cautions import SHORT
from engine.job.assessment.methods_said import thermometer
from engine.job.reach.instrument_chart import LINE, InstrumentChart
from engine.job.reach.reach import ReachAssessment
from engine.job.reach.said import said
from engine.steam.units import UnitSystem, from_si

_WIDTH, _HEIGHT, _LEFT, _RIGHT, _TOP, _BOTTOM = 720.0, 400.0, 62.0, 14.0, 12.0, 46.0
_COLUMNS = 4  # blocks of the table side by side

_STYLE = """
@page { size: %s; margin: 14mm; }
* { box-sizing: border-box; }
body { font: 10pt/1.3 system-ui, sans-serif; color: #111; background: #fff; margin: 0 auto; max-width: 182mm; }
@media screen { body { padding: 10mm 4mm; } }
h1 { font-size: 15pt; margin: 0 0 1mm; overflow-wrap: anywhere; }
p { margin: 0 0 2mm; }
svg { width: 100%%; height: auto; display: block; margin: 3mm 0; }
.tables { display: flex; gap: 4mm; align-items: flex-start; }
table { border-collapse: collapse; flex: 1; font-variant-numeric: tabular-nums; }
th, td { border: 0.2mm solid #999; padding: 0.3mm 1.2mm; text-align: right; font-size: 9pt; white-space: nowrap; }
th { background: #eee; font-weight: 600; }
tr.thin td:first-child::before { content: "◐ "; }
.small { font-size: 8.5pt; color: #333; }
.blank { display: inline-block; min-width: 34mm; border-bottom: 0.2mm solid #111; }
"""


def chart_page(plan: ReachAssessment, chart: InstrumentChart, units: UnitSystem) -> str:
    """The page as HTML, A4 for SI units and Letter for US ones."""
    title = str(plan.case["title"]).strip() or "Untitled case"
    paper = "A4" if units.name == "SI" else "letter"
    told = said(plan, units)
    body = "\n".join((
        f"<h1>{escape(title)}: quality by the {escape(thermometer(plan.wet.assessment))}</h1>",
        f"<p>{escape(conditions(plan, units))}</p>",
        chart_svg(chart, plan, units) if chart.T.size else _no_chart(plan, units),
        _tables(chart) if chart.T.size else "",
        f'<p class="small" style="margin-top:3mm">{escape(_notes(chart, plan, units))}</p>',
        f'<p class="small">{escape(" ".join(told.assumed))}</p>',
        f'<p class="small">{escape(SHORT)}</p>',
        '<p class="small">Instrument <span class="blank"></span> Date <span class="blank"></span> '
        f'Name <span class="blank"></span> Program version {escape(__version__)}</p>',
    ))
    return ("<!DOCTYPE html>\n<html lang=\"en\"><head><meta charset=\"utf-8\">"
            f"<title>{escape(title)}: instrument chart</title><style>{_STYLE % paper}</style></head>\n"
            f"<body>\n{body}\n</body></html>\n")


def conditions(plan: ReachAssessment, units: UnitSystem) -> str:
    """What the chart holds for, in a sentence."""
    a, si = plan.wet.assessment, plan.si
    line = f"Line {units.text(si['p_line'], 'pressure')} abs at the tapping"
    if a.heating:
        return (f"{line}, {a.heating.power:.0f} W into {units.text(si['sample_flow'], 'mass flow')} of sample, "
                f"{units.text(a.heating.p, 'pressure')} abs after the heater.")
    separator = f", separator at {units.text(a.separation.p, 'pressure')} abs" if a.separation else ""
    return f"{line}{separator}, exhaust {units.text(si['p_exhaust'], 'pressure')} abs at the thermometer."


def _no_chart(plan: ReachAssessment, units: UnitSystem) -> str:
    return f"<p>{escape(said(plan, units).headline)} There is no temperature to read a quality from.</p>"


def _notes(chart: InstrumentChart, plan: ReachAssessment, units: UnitSystem) -> str:
    parts = [f"Saturation there is {units.text(chart.T_saturation, 'temperature')}: at or near it the steam is wet and "
             f"nothing can be read. Below {units.text(chart.T_least, 'temperature')} do not read; ◐ marks a thin "
             f"margin. Dry steam shows {units.text(chart.T_dry, 'temperature')}; more means a superheated line.",
             *slopes_said(chart)]
    if chart.quality_of != LINE:
        parts.append("The quality is that of the throttled steam: times condensed steam over condensed steam and "
                     "drained water, both by mass, it is that of the line.")
    return " ".join(parts)


def slopes_said(chart: InstrumentChart) -> tuple[str, ...]:
    """How the quality moves where another reading differs from what the chart was made for."""
    names = {"p_line": "line pressure", "p_exhaust": "exhaust pressure", "power": "power", "sample_flow": "sample flow"}
    moves = [f"{100 * dx:+.3f} %pt for 1 % more {names[name]}" for name, dx in chart.slopes.items()]
    return (f"Where other readings differ: {' and '.join(moves)}.",)


# --- table ------------------------------------------------------------------------------------------

def chart_rows(chart: InstrumentChart) -> list[dict[str, str]]:
    """The rows of the table as text: temperature, superheat, quality, wetness."""
    scale = {"K": 1.0, "°C": 1.0, "°F": 1.8}[chart.unit]
    degree = "°F" if chart.unit == "°F" else "K"
    return [{f"T, {chart.unit}": temperature_text(T, chart), f"superheat, {degree}": f"{superheat * scale:.1f}",
             f"quality of the {chart.quality_of}": f"{x:.4f}", "wetness, %": f"{100 * (1 - x):.2f}",
             "margin": "thin" if thin else "comfortable"}
            for T, superheat, x, thin in zip(chart.T, chart.superheat, chart.x, chart.thin, strict=True)]


def temperature_text(T: float, chart: InstrumentChart) -> str:
    """A row's temperature with the digits of its step."""
    return f"{from_si(T, chart.unit, 'temperature'):.{1 if chart.step < 1 else 0}f}"


def _tables(chart: InstrumentChart) -> str:
    rows = list(zip(chart.T, chart.x, chart.thin, strict=True))
    size = max(1, math.ceil(len(rows) / _COLUMNS))
    return f'<div class="tables">{"".join(_table(chart, rows[k:k + size]) for k in range(0, len(rows), size))}</div>'


def _table(chart: InstrumentChart, rows: list) -> str:
    cells = "".join(f'<tr{" class=thin" if thin else ""}><td>{temperature_text(T, chart)}</td><td>{x:.4f}</td>'
                    f"<td>{100 * (1 - x):.2f}</td></tr>" for T, x, thin in rows)
    return f"<table><tr><th>T, {chart.unit}</th><th>quality</th><th>wet %</th></tr>{cells}</table>"


# --- drawing ----------------------------------------------------------------------------------------

def nice_step(span: float, most: int) -> float:
    """The smallest of 1, 2, 5 times a power of ten that divides ``span`` into at most ``most`` parts.

    >>> nice_step(43.8, 50), nice_step(0.0442, 12)
    (1.0, 0.005)
    """
    power = 10.0 ** math.floor(math.log10(span / most))
    return next(round(m * power, 12) for m in (1, 2, 5, 10) if span <= most * m * power * (1 + 1e-9))


def _ticks(low: float, high: float, most: int) -> tuple[np.ndarray, float]:
    step = nice_step(high - low, most)
    return step * np.arange(math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9) + 1), step


def chart_svg(chart: InstrumentChart, plan: ReachAssessment, units: UnitSystem) -> str:
    """The curve over a fine grid, as an inline drawing."""
    low, high = (from_si(T, chart.unit, "temperature") for T in (chart.T_saturation, chart.T_dry))
    coarse = nice_step(high - low, 12)
    t0, t1 = coarse * math.floor(low / coarse), coarse * math.ceil(high / coarse)
    y_step = nice_step(1.0 - chart.x_least, 8)
    digits = 4 if y_step < 1e-3 else 3
    y0 = y_step * math.floor(chart.x_least / y_step - 1e-9)

    def x_of(T):
        return _LEFT + (_WIDTH - _LEFT - _RIGHT) * (T - t0) / (t1 - t0)

    def y_of(x):
        return _HEIGHT - _BOTTOM - (_HEIGHT - _TOP - _BOTTOM) * (x - y0) / (1.0 - y0)

    top, floor, right = y_of(1.0), y_of(y0), x_of(t1)
    lines = [f'<svg viewBox="0 0 {_WIDTH:g} {_HEIGHT:g}" role="img" aria-label="Quality over temperature">',
             '<defs><pattern id="no" width="7" height="7" patternUnits="userSpaceOnUse" '
             'patternTransform="rotate(45)"><path d="M0 0V7" stroke="#888" stroke-width="1.2"/></pattern></defs>']
    for most, colour, width in ((60, "#ddd", 0.5), (12, "#999", 0.8)):
        for T in _ticks(t0, t1, most)[0]:
            lines.append(_stroke(f"M{x_of(T):.1f} {top:.1f}V{floor:.1f}", colour, width))
        for x in _ticks(y0, 1.0, most * 8 // 12)[0]:
            lines.append(_stroke(f"M{_LEFT:g} {y_of(x):.1f}H{right:.1f}", colour, width))
    least = x_of(from_si(chart.T_least, chart.unit, "temperature"))
    lines.append(f'<rect x="{_LEFT:g}" y="{top:.1f}" width="{least - _LEFT:.1f}" height="{floor - top:.1f}" '
                 'fill="url(#no)" fill-opacity=".55" stroke="#555" stroke-width=".6"/>')
    if least - _LEFT > 24:
        across = 0.5 * (_LEFT + least)
        lines.append(_words(across, 0.5 * (top + floor), "do not read: wet, or too near", turn=True))
    points = [(chart.T_least, chart.x_least), *zip(chart.T, chart.x, strict=True), (chart.T_dry, 1.0)]
    path = " ".join(f"{x_of(from_si(T, chart.unit, 'temperature')):.2f},{y_of(x):.2f}" for T, x in points)
    lines.append(f'<polyline points="{path}" fill="none" stroke="#000" stroke-width="2.2" stroke-linejoin="round"/>')
    for T in _ticks(t0, t1, 12)[0]:
        lines.append(_words(x_of(T), floor + 16, f"{T:g}"))
    for x in _ticks(y0, 1.0, 8)[0]:
        lines.append(_words(_LEFT - 6, y_of(x) + 4, f"{x:.{digits}f}", anchor="end"))
    lines += [_words(0.5 * (_LEFT + right), _HEIGHT - 8, f"{thermometer(plan.wet.assessment)}, {chart.unit}"),
              _words(15, 0.5 * (top + floor), f"quality of the {chart.quality_of}", turn=True), "</svg>"]
    return "\n".join(lines)


def _stroke(d: str, colour: str, width: float) -> str:
    return f'<path d="{d}" stroke="{colour}" stroke-width="{width}" fill="none"/>'


def _words(x: float, y: float, text: str, *, anchor: str = "middle", turn: bool = False) -> str:
    turned = f' transform="rotate(-90 {x:.1f} {y:.1f})"' if turn else ""
    halo = ' stroke="#fff" stroke-width="4" paint-order="stroke"' if turn else ""
    return (f'<text x="{x:.1f}" y="{y:.1f}" font-size="12" font-family="sans-serif" text-anchor="{anchor}"'
            f'{halo}{turned}>{escape(text)}</text>')
