"""Faces of gauges as HTML: a pointer over a scale, the figure below it; drawn with styles alone, so nothing is loaded.

Everything but the pointer and the expected band has the colour of the page's text, so light and dark
follow. What a face shows is in its label as well.
"""

from __future__ import annotations

import html
import math
from collections.abc import Sequence
from dataclasses import dataclass

SWEEP, BEGIN = 264.0, -132.0  # degrees of the scale, clockwise from straight up
_TICKS = 6  # numbered ones, about

STYLE = """
<style>
.faces {display: grid; grid-template-columns: repeat(2, minmax(0, 1fr)); gap: .6rem .8rem;}
.face {text-align: center; min-width: 0;}
.face .disc {position: relative; width: min(100%, 11.5rem); aspect-ratio: 1; margin: 0 auto; border-radius: 50%;
  --rim: color-mix(in srgb, currentColor 35%, transparent); --shade: color-mix(in srgb, currentColor 6%, transparent);
  box-shadow: inset 0 0 0 2px var(--rim), inset 0 0 0 .4rem var(--shade), inset 0 0 0 calc(.4rem + 1px) var(--rim);
  container-type: inline-size;}
.face .disc > * {position: absolute; left: 50%; top: 50%;}
.face .tick {width: 1.2cqw; height: 4.5cqw; margin: -2.25cqw 0 0 -.6cqw; background: currentColor; opacity: .55;
  transform: rotate(var(--at)) translateY(-40.5cqw);}
.face .tick.long {width: 1.6cqw; margin-left: -.8cqw; height: 7cqw; margin-top: -3.5cqw; opacity: .95;}
.face .number {transform: translate(-50%, -50%) translate(calc(31.5cqw * sin(var(--at))),
  calc(-31.5cqw * cos(var(--at)))); font-size: 7.4cqw; line-height: 1;}
.face .disc .band {inset: 0; left: 0; top: 0; border-radius: 50%; opacity: .85;
  background: conic-gradient(from var(--from), #009e73 0 var(--span), transparent 0);
  -webkit-mask: radial-gradient(circle, transparent 0 62.5%, #000 63% 69.5%, transparent 70%);
  mask: radial-gradient(circle, transparent 0 62.5%, #000 63% 69.5%, transparent 70%);}
.face .pointer {width: 2.2cqw; height: 44cqw; margin: -36cqw 0 0 -1.1cqw; transform-origin: 50% 36cqw;
  transform: rotate(var(--at)); background: linear-gradient(#d55e00 82%, currentColor 82%);
  clip-path: polygon(50% 0, 100% 22%, 78% 100%, 22% 100%, 0 22%);}
.face .hub {width: 9cqw; height: 9cqw; margin: -4.5cqw 0 0 -4.5cqw; border-radius: 50%;
  background: currentColor;}
.face .unit {transform: translate(-50%, 20cqw); font-size: 7cqw; opacity: .8; white-space: nowrap;}
.face .name {font-weight: 600; line-height: 1.2;}
.face .figure {font-size: 1.45rem; font-weight: 700; font-variant-numeric: tabular-nums; line-height: 1.35;}
.face .under {font-size: .84rem; opacity: .8; line-height: 1.25; min-height: 2.1rem;}
</style>
"""


@dataclass(frozen=True)
class Face:
    """One instrument, in the reader's units. ``band``, where there is one, is marked at the rim: what is expected.

    ``under`` is a line of words below the figure.
    """

    name: str
    value: float
    unit: str
    decimals: int
    low: float
    high: float
    band: tuple[float, float] | None = None
    under: str = ""

    @property
    def figure(self) -> str:
        """The value with its unit; never minus nothing."""
        return f"{round(self.value, self.decimals) + 0.0:.{self.decimals}f} {self.unit}"


def angle(face: Face, value: float) -> float:
    """Where a value stands, in degrees clockwise from straight up; a little beyond the ends of the scale at most.

    >>> angle(Face("p", 0.0, "bar", 1, 0.0, 10.0), 5.0)
    0.0
    """
    share = (value - face.low) / (face.high - face.low)
    return BEGIN + SWEEP * min(max(share, -0.02), 1.02)


def ticks(low: float, high: float) -> tuple[list[float], list[float]]:
    """Numbered marks of a scale, and those between them.

    >>> ticks(0.0, 16.0)[0], ticks(0.0, 2.0)[1][:4]
    ([0.0, 2.0, 4.0, 6.0, 8.0, 10.0, 12.0, 14.0, 16.0], [0.1, 0.2, 0.3, 0.4])
    """
    rough = (high - low) / _TICKS
    power = 10.0 ** math.floor(math.log10(rough))
    step = min((n * power for n in (1, 2, 5, 10)), key=lambda s: abs(math.log(s / rough)))
    fine = step / (5 if f"{step:.0e}"[0] in "15" else 4)
    number = range(math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9) + 1)
    between = range(math.ceil(low / fine - 1e-9), math.floor(high / fine + 1e-9) + 1)
    long = [k * step for k in number]
    return long, [k * fine for k in between if min(abs(k * fine - t) for t in long) > 1e-6 * step]


def faces_html(faces: Sequence[Face]) -> str:
    """All the faces, two in a row."""
    return f'{STYLE}<div class="faces">{"".join(map(_face, faces))}</div>'


def _face(face: Face) -> str:
    long, short = ticks(face.low, face.high)
    parts = [_band(face)] if face.band else []
    parts += [f'<i class="tick" style="{_at(face, t)}"></i>' for t in short]
    parts += [f'<i class="tick long" style="{_at(face, t)}"></i>' for t in long]
    parts += [f'<span class="number" style="{_at(face, t)}">{t:g}</span>' for t in long]
    parts += [f'<span class="unit">{html.escape(face.unit)}</span>',
              f'<i class="pointer" style="{_at(face, face.value)}"></i>', '<i class="hub"></i>']
    label = html.escape(f"{face.name}: {face.figure}. {face.under}", quote=True)
    return (f'<div class="face"><div class="name">{html.escape(face.name)}</div>'
            f'<div class="disc" role="img" aria-label="{label}">{"".join(parts)}</div>'
            f'<div class="figure">{html.escape(face.figure)}</div>'
            f'<div class="under">{html.escape(face.under)}</div></div>')


def _band(face: Face) -> str:
    """The expected stretch of the scale, at least wide enough to be seen."""
    begin, end = (angle(face, v) for v in face.band)
    missing = max(4.0 - (end - begin), 0.0)
    return f'<i class="band" style="--from:{begin - missing / 2:.2f}deg;--span:{end - begin + missing:.2f}deg"></i>'


def _at(face: Face, value: float) -> str:
    return f"--at:{angle(face, value):.2f}deg"


def nice_end(value: float) -> float:
    """The end of a scale that holds a value and reads well.

    >>> nice_end(13.5), nice_end(131.0)
    (16.0, 160.0)
    """
    power = 10.0 ** math.floor(math.log10(value))
    return next(n * power for n in (1, 1.6, 2, 2.5, 4, 6, 10) if n * power >= value * (1 - 1e-9))
