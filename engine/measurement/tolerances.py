"""What the standards allow instruments of a class to be wrong by: tables, and half-widths from them.

Sources of the figures: IEC 60751:2022 (platinum thermometers), IEC 60584-1:2013 (thermocouples),
EN 837-1:1996 and ASME B40.100-2013 (dial gauges). Classes AA, A and B and the EN 837-1 classes are
printed in public extracts of the standards; the other figures are from memory of them.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.measurement.given import is_span, number, shown
from engine.steam.arrays import at_the_door, give_back, refuse_outside
from engine.steam.errors import Fault, InputError
from engine.steam.units import ZERO_CELSIUS


class PtClass(NamedTuple):
    """Tolerance ± (fixed + slope |t|) K with t in °C, and where it holds, °C: wire-wound and film."""

    fixed: float
    slope: float
    wire: tuple[float, float]
    film: tuple[float, float]


IEC_60751 = {
    "AA": PtClass(0.1, 0.0017, (-50, 250), (0, 150)),
    "A": PtClass(0.15, 0.002, (-100, 450), (-30, 300)),
    "B": PtClass(0.3, 0.005, (-196, 600), (-50, 500)),
    "C": PtClass(0.6, 0.01, (-196, 600), (-50, 600)),
}
# R(t)/R0 = 1 + A t + B t² + C (t - 100) t³, the last below 0 °C only; t in °C, -200 to 850
_PT_A, _PT_B, _PT_C = 3.9083e-3, -5.775e-7, -4.183e-12


class ThermocoupleClass(NamedTuple):
    """Tolerance ± the larger of (fixed, slope |t|) K with t in °C, and where it holds, °C."""

    fixed: float
    slope: float
    holds: tuple[float, float]


IEC_60584 = {
    "T1": ThermocoupleClass(0.5, 0.004, (-40, 350)), "T2": ThermocoupleClass(1.0, 0.0075, (-40, 350)),
    "K1": ThermocoupleClass(1.5, 0.004, (-40, 1000)), "K2": ThermocoupleClass(2.5, 0.0075, (-40, 1200)),
    "N1": ThermocoupleClass(1.5, 0.004, (-40, 1000)), "N2": ThermocoupleClass(2.5, 0.0075, (-40, 1200)),
    "J1": ThermocoupleClass(1.5, 0.004, (-40, 750)), "J2": ThermocoupleClass(2.5, 0.0075, (-40, 750)),
}

EN_837_1 = {grade: float(grade) for grade in ("0.1", "0.25", "0.6", "1", "1.6", "2.5", "4")}  # ± % of span
EN_837_AMBIENT = 0.04  # ± % of span for each kelvin away from 20 °C
GAUGE_REFERENCE = 20 + ZERO_CELSIUS

# ± % of span in the lowest quarter, the middle half and the highest quarter of the scale
ASME_B40_100 = {
    "4A": (0.1, 0.1, 0.1), "3A": (0.25, 0.25, 0.25), "2A": (0.5, 0.5, 0.5), "1A": (1.0, 1.0, 1.0),
    "A": (2.0, 1.0, 2.0), "B": (3.0, 2.0, 3.0), "C": (4.0, 3.0, 4.0), "D": (5.0, 4.0, 5.0),
}


def pt100_resistance(T, R0: float = 100.0):
    """Resistance [Ω] of a platinum thermometer at ``T`` [K], -200 to 850 °C (IEC 60751, clause 4).

    >>> pt100_resistance(373.15)
    138.5055
    """
    (T,), scalar = at_the_door(T=T)
    if not 0 < number(R0) <= 1e6:
        raise InputError(Fault("resistance at 0 °C", shown(R0), "Ω", "a number above 0, up to 1e6"))
    t = T - ZERO_CELSIUS
    _refuse_temperature(T, t, (-200, 850), "the resistance formula")
    return give_back(R0 * (1 + t * (_PT_A + t * _PT_B) + _PT_C * (t - 100) * np.minimum(t, 0.0) ** 3), scalar)


def pt100_tolerance(T, grade: str, *, film: bool = False):
    """Half-width [K] of the tolerance of a Pt100 of class ``grade`` at ``T`` [K] (IEC 60751).

    >>> pt100_tolerance(373.15, "A")
    0.35
    """
    row = row_of(IEC_60751, grade, "class of platinum thermometer")
    (T,), scalar = at_the_door(T=T)
    t = T - ZERO_CELSIUS
    _refuse_temperature(T, t, row.film if film else row.wire, f"class {grade}, {'film' if film else 'wire-wound'}")
    return give_back(row.fixed + row.slope * np.abs(t), scalar)


def thermocouple_tolerance(T, grade: str):
    """Half-width [K] of the tolerance of a thermocouple at ``T`` [K]; ``grade`` is type and class, as "T1".

    >>> thermocouple_tolerance(423.15, "T1")
    0.6
    """
    row = row_of(IEC_60584, grade, "type and class of thermocouple")
    (T,), scalar = at_the_door(T=T)
    t = T - ZERO_CELSIUS
    _refuse_temperature(T, t, row.holds, f"type {grade[0]}, class {grade[1]}")
    return give_back(np.maximum(row.fixed, row.slope * np.abs(t)), scalar)


def gauge_tolerance(reading, grade: str, span: tuple[float, float]):
    """Half-width [Pa] of an EN 837-1 gauge of class ``grade`` with the scale ``span`` [Pa].

    >>> gauge_tolerance(9e5, "1.6", (0, 16e5))
    25600.0
    """
    percent = row_of(EN_837_1, grade, "class of pressure gauge")
    reading, scalar = _on_the_scale(reading, span)
    return give_back(np.full_like(reading, percent / 100 * (span[1] - span[0])), scalar)


def zoned_gauge_tolerance(reading, grade: str, span: tuple[float, float]):
    """Half-width [Pa] of an ASME B40.100 gauge; on the border of two zones the wider one counts.

    >>> zoned_gauge_tolerance(np.array([1e5, 8e5]), "B", (0, 16e5))
    array([48000., 32000.])
    """
    zones = row_of(ASME_B40_100, grade, "grade of pressure gauge")
    reading, scalar = _on_the_scale(reading, span)
    part = (reading - span[0]) / (span[1] - span[0])
    middle = (part > 0.25) & (part < 0.75)
    percent = np.where(middle, zones[1], np.where(part <= 0.25, zones[0], zones[2]))
    return give_back(percent / 100 * (span[1] - span[0]), scalar)


def transmitter_tolerance(reading, percent: float, span: tuple[float, float]):
    """Half-width of a transmitter that is good to ± ``percent`` of the span it is set to [Pa].

    >>> transmitter_tolerance(9e5, 0.1, (0, 16e5))
    1600.0
    """
    if not 0 < number(percent) < np.inf:
        raise InputError(Fault("accuracy of the transmitter", shown(percent), "% of span", "a number above 0"))
    reading, scalar = _on_the_scale(reading, span)
    return give_back(np.full_like(reading, percent / 100 * (span[1] - span[0])), scalar)


def row_of(table: dict, key: str, what: str):
    """The row of a table, or an InputError that lists what there is."""
    if not isinstance(key, str) or key not in table:
        raise InputError(Fault(what, shown(key), "", "one of: " + ", ".join(table)))
    return table[key]


def _on_the_scale(reading, span) -> tuple[np.ndarray, bool]:
    if not is_span(span):
        raise InputError(Fault("span", shown(span), "", "two finite numbers, low then high"))
    (p,), scalar = at_the_door(p=reading)
    faults = refuse_outside("p", p, (p >= span[0]) & (p <= span[1]), f"{span[0]:g} to {span[1]:g} Pa, the scale",
                            why="an instrument says nothing beyond its scale",
                            hint="check the scale, and that the reading is what the instrument itself shows")
    if faults:
        raise InputError(*faults)
    return p, scalar


def _refuse_temperature(T: np.ndarray, t: np.ndarray, holds: tuple[float, float], what: str) -> None:
    inside = (t >= holds[0] - 1e-9) & (t <= holds[1] + 1e-9)  # the conversion rounds at the limits
    faults = refuse_outside("T", T, inside, f"{holds[0] + ZERO_CELSIUS:g} to {holds[1] + ZERO_CELSIUS:g} K",
                            why=f"{what} holds from {holds[0]} to {holds[1]} °C",
                            hint="choose another class, or use a certificate; temperatures are in kelvin here")
    if faults:
        raise InputError(*faults)
