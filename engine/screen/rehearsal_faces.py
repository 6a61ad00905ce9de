"""The instruments of a rehearsal as faces, in the reader's units."""

from __future__ import annotations

import math

from engine.job.rehearsal import Rehearsal
from engine.job.runsheet.plan import Plan
from engine.job.uncertainty import leg_pressure
from engine.screen.charts.dials import Face, nice_end
from engine.steam import saturation_temperature
from engine.steam.units import UnitSystem, from_si

EXHAUST_SCALE = 1e5  # Pa, above the atmosphere
_EXHAUST_TEMPERATURES = {"°C": (0.0, 200.0), "°F": (0.0, 400.0)}
_LINE_TEMPERATURES = {"°C": (0.0, 400.0), "°F": (0.0, 800.0)}


def faces_of(r: Rehearsal, plan: Plan | None, units: UnitSystem) -> tuple[Face, ...]:
    """The four instruments as they stand now. ``plan`` is that of the run sheet, its bands are marked."""
    shown = {name: float(values[-1]) for name, values in r.course.shown.items()}
    return (_line_gauge(r, shown["line"], plan, units), _exhaust_gauge(r, shown["exhaust"], units),
            _exhaust_thermometer(r, shown, plan, units), _line_thermometer(shown["line thermometer"], units))


def _line_gauge(r: Rehearsal, value: float, plan: Plan | None, units: UnitSystem) -> Face:
    gauge, unit = r.rig.gauges["line"], units.unit("pressure")

    def shown(p: float) -> float:
        return from_si(p, unit, "pressure")

    si = r.rig.point.line
    planned = si["p_line"] + leg_pressure(si) - (si.p_barometer if gauge.on_barometer else 0.0)
    decimals = decimals_of(shown(gauge.step))
    play = plan.play("p_line") if plan else 0.0
    return Face("Line gauge", shown(value), unit, decimals, 0.0, nice_end(shown(min(gauge.high, 2.0 * planned))),
                (shown(planned - play), shown(planned + play)), f"planned {shown(planned):.{decimals}f}")


def _exhaust_gauge(r: Rehearsal, value: float, units: UnitSystem) -> Face:
    gauge, unit, point = r.rig.gauges["exhaust"], units.unit("pressure"), r.rig.point
    planned = point.reading.p_exhaust - (point.line.p_barometer if gauge.on_barometer else 0.0)
    ends = (0.0, EXHAUST_SCALE) if gauge.on_barometer else (0.0, 2.0 * EXHAUST_SCALE)
    if planned < -2e3:
        ends = (-EXHAUST_SCALE, EXHAUST_SCALE)
    low, high, at, now = (from_si(p, unit, "pressure") for p in (*ends, planned, value))
    decimals = decimals_of(from_si(gauge.step, unit, "pressure"))
    return Face("Exhaust gauge", now, f"{unit} {'gauge' if gauge.on_barometer else 'abs'}", decimals,
                low if low == 0.0 else -nice_end(-low), nice_end(high), (at, at), f"planned {at:.{decimals}f}")


def _exhaust_thermometer(r: Rehearsal, shown: dict[str, float], plan: Plan | None, units: UnitSystem) -> Face:
    unit, air = units.unit("temperature"), r.rig.sheet.p_barometer
    p = max(shown["exhaust"] + (air if r.rig.gauges["exhaust"].on_barometer else 0.0), 1e3)
    band = None
    if plan is not None and plan.band is not None:
        band = tuple(units.value(T, "temperature") for T in plan.band)
    return Face("Exhaust thermometer", units.value(shown["exhaust thermometer"], "temperature"), unit, 1,
                *_EXHAUST_TEMPERATURES[unit], band,
                f"saturation at that exhaust pressure {units.text(saturation_temperature(p), 'temperature')}")


def _line_thermometer(T: float, units: UnitSystem) -> Face:
    unit = units.unit("temperature")
    return Face("Line thermometer", units.value(T, "temperature"), unit, 1, *_LINE_TEMPERATURES[unit])


def decimals_of(step: float) -> int:
    """Decimals that show a step of a scale.

    >>> [decimals_of(s) for s in (0.1, 0.05, 0.001, 1.45, 0.0)]
    [1, 2, 3, 0, 3]
    """
    return 3 if step <= 0 else max(0, math.ceil(-math.log10(step) - 1e-9))
