"""The only module that knows bar, psi, °C, °F and gauge. Inside, everything is SI and absolute.

Three conversions that must not be confused:

* a **value** (``to_si``): temperatures move by scale and offset;
* a **difference** (kind "difference"): temperature differences move by scale only;
* an **uncertainty** (``uncertainty_to_si``): scale only, whatever the quantity.

Factors: exact definitions of the international yard and pound, the standard atmosphere, the
standard acceleration of gravity (9.806 65 m/s²) and the International Table Btu and calorie
(NIST SP 811, appendix B).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.steam.arrays import NUMBERS, as_floats, at_the_door, give_back, shortened
from engine.steam.errors import Fault, InputError

G_STANDARD = 9.80665  # m/s², standard acceleration of gravity (exact by convention)
P_STANDARD = 101_325.0  # Pa, standard atmosphere (exact by convention)
ZERO_CELSIUS = 273.15  # K

_LB, _FT, _IN = 0.45359237, 0.3048, 0.0254
_PSI = _LB * G_STANDARD / _IN**2
_BTU = 1055.05585262  # J, International Table

_PRESSURES = {"Pa": (1, 0), "kPa": (1e3, 0), "mbar": (100, 0), "bar": (1e5, 0), "MPa": (1e6, 0),
              "psi": (_PSI, 0), "inHg": (3386.389, 0), "mmHg": (133.322387415, 0), "kgf/cm²": (98066.5, 0),
              "mmH2O": (G_STANDARD, 0), "inH2O": (249.0889, 0)}  # conventional columns of water, SP 811

# kind -> unit -> (scale, offset): SI value = value * scale + offset. The first is the engine's own.
UNITS: dict[str, dict[str, tuple[float, float]]] = {
    "pressure": _PRESSURES,
    "temperature": {"K": (1, 0), "°C": (1, ZERO_CELSIUS), "°F": (1 / 1.8, ZERO_CELSIUS - 32 / 1.8)},
    "difference": {"K": (1, 0), "°C": (1, 0), "°F": (1 / 1.8, 0)},
    "pressure difference": _PRESSURES,  # neither gauge nor absolute
    "fraction": {"1": (1, 0), "%": (0.01, 0), "%pt": (0.01, 0)},
    "enthalpy": {"J/kg": (1, 0), "kJ/kg": (1e3, 0), "Btu/lb": (_BTU / _LB, 0)},
    "entropy": {"J/(kg K)": (1, 0), "kJ/(kg K)": (1e3, 0), "Btu/(lb °F)": (_BTU / _LB * 1.8, 0)},
    "specific volume": {"m³/kg": (1, 0), "ft³/lb": (_FT**3 / _LB, 0)},
    "velocity": {"m/s": (1, 0), "ft/s": (_FT, 0)},
    "length": {"m": (1, 0), "mm": (1e-3, 0), "µm": (1e-6, 0), "in": (_IN, 0), "ft": (_FT, 0)},
    "area": {"m²": (1, 0), "mm²": (1e-6, 0), "in²": (_IN**2, 0)},
    "mass": {"kg": (1, 0), "g": (1e-3, 0), "lb": (_LB, 0)},
    "mass flow": {"kg/s": (1, 0), "kg/h": (1 / 3600, 0), "t/h": (1000 / 3600, 0), "lb/h": (_LB / 3600, 0),
                  "kg/min": (1 / 60, 0), "g/s": (1e-3, 0)},
    "mass flux": {"kg/(m² s)": (1, 0), "lb/(ft² s)": (_LB / _FT**2, 0)},
    "power": {"W": (1, 0), "kW": (1e3, 0), "Btu/h": (_BTU / 3600, 0)},
    "conductance": {"W/K": (1, 0), "Btu/(h °F)": (_BTU / 3600 * 1.8, 0)},
    "conductivity": {"W/(m K)": (1, 0), "Btu in/(h ft² °F)": (_BTU / 3600 * 1.8 * _IN / _FT**2, 0)},
    "film coefficient": {"W/(m² K)": (1, 0), "Btu/(h ft² °F)": (_BTU / 3600 * 1.8 / _FT**2, 0)},
    "time": {"s": (1, 0), "min": (60, 0), "h": (3600, 0)},
    "rate": {"K/s": (1, 0), "K/min": (1 / 60, 0), "°F/min": (1 / 108, 0)},
    "density": {"kg/m³": (1, 0), "lb/ft³": (_LB / _FT**3, 0)},
    "volume": {"m³": (1, 0), "L": (1e-3, 0), "in³": (_IN**3, 0), "ft³": (_FT**3, 0)},
    "viscosity": {"Pa s": (1, 0), "µPa s": (1e-6, 0), "lb/(ft h)": (_LB / _FT / 3600, 0)},
    "expansion": {"1/K": (1, 0), "1/°F": (1.8, 0)},
    "heat capacity": {"J/K": (1, 0), "kJ/K": (1e3, 0), "Btu/°F": (_BTU * 1.8, 0)},
    "number": {"1": (1, 0)},
}

ALIASES = {"C": "°C", "degC": "°C", "F": "°F", "degF": "°F", "psia": "psi", "psig": "psi", "barg": "bar",
           "bara": "bar", "hPa": "mbar", "um": "µm", "kg/cm2": "kgf/cm²", "m3/kg": "m³/kg"}


def _row(unit: str, kind: str) -> tuple[float, float]:
    if kind not in UNITS:
        raise InputError(Fault("kind of quantity", shortened(kind), "", "one of: " + ", ".join(UNITS)))
    found = UNITS[kind].get(ALIASES.get(unit, unit)) if isinstance(unit, str) else None
    if found is None:
        known = "one of: " + ", ".join(UNITS[kind])
        raise InputError(Fault(f"unit of a {kind}", shortened(unit), "", known, name="unit"))
    return found


def _convert(value, unit: str, kind: str, formula):
    """``formula(values, scale, offset)``: a Python float for a single number, else a float64 array."""
    scale, offset = _row(unit, kind)
    if type(value) is float:  # plain arithmetic: quick, and what is too great becomes infinite without a warning
        return formula(value, scale, offset)
    try:
        values = as_floats(value)
    except (TypeError, ValueError):
        raise InputError(Fault(kind, shortened(value), unit, NUMBERS, name="value")) from None
    return give_back(formula(values, scale, offset), values.ndim == 0)


def to_si(value, unit: str, kind: str):
    """A value in ``unit`` -> the engine's SI unit of that kind. Any shape; gauge stays gauge.

    >>> to_si(212.0, "°F", "temperature")
    373.15
    >>> to_si(9.0, "°F", "difference")
    5.0
    """
    return _convert(value, unit, kind, lambda v, scale, offset: v * scale + offset)


def from_si(value, unit: str, kind: str):
    """The engine's SI value -> ``unit``.

    >>> round(from_si(101_325.0, "psi", "pressure"), 4)
    14.6959
    """
    return _convert(value, unit, kind, lambda v, scale, offset: (v - offset) / scale)


def uncertainty_to_si(value, unit: str, kind: str):
    """An uncertainty in ``unit`` -> SI, by scale alone: 1.8 °F of uncertainty is 1 K.

    >>> round(uncertainty_to_si(1.8, "°F", "temperature"), 12)
    1.0
    """
    return _convert(value, unit, kind, lambda v, scale, offset: v * scale)


def uncertainty_from_si(value, unit: str, kind: str):
    """An uncertainty in SI -> ``unit``, by scale alone."""
    return _convert(value, unit, kind, lambda v, scale, offset: v / scale)


def absolute_from_gauge(p_gauge, p_barometer):
    """Gauge pressure [Pa] + barometric pressure [Pa] -> absolute pressure [Pa], broadcast together."""
    (p_gauge, p_barometer), scalar = at_the_door(p=p_gauge, p_barometer=p_barometer)
    return give_back(p_gauge + p_barometer, scalar)


def gauge_from_absolute(p, p_barometer):
    """Absolute pressure [Pa] - barometric pressure [Pa] -> gauge pressure [Pa], broadcast together."""
    (p, p_barometer), scalar = at_the_door(p=p, p_barometer=p_barometer)
    return give_back(p - p_barometer, scalar)


@dataclass(frozen=True)
class UnitSystem:
    """What is shown: a unit and a number of decimals for each kind."""

    name: str
    shown: dict[str, tuple[str, int]]

    def unit(self, kind: str) -> str:
        return self.shown[kind][0]

    def decimals(self, kind: str) -> int:
        return self.shown[kind][1]

    def value(self, si_value, kind: str):
        return from_si(si_value, self.unit(kind), kind)

    def text(self, si_value: float, kind: str, decimals: int | None = None) -> str:
        """``9.008 bar``: value and unit for a reader; "none" for what is missing."""
        if si_value is None or not np.isfinite(si_value):
            return "none"
        unit, places = self.shown[kind]
        number = f"{from_si(si_value, unit, kind):.{places if decimals is None else decimals}f}"
        return number if unit == "1" else f"{number} {unit}"


_SI = {"pressure": ("bar", 3), "temperature": ("°C", 1), "difference": ("K", 1),
       "pressure difference": ("bar", 4), "fraction": ("1", 4),
       "enthalpy": ("kJ/kg", 1), "entropy": ("kJ/(kg K)", 4), "specific volume": ("m³/kg", 4),
       "velocity": ("m/s", 1), "length": ("mm", 1), "area": ("mm²", 1), "mass": ("kg", 3),
       "mass flow": ("kg/h", 1), "mass flux": ("kg/(m² s)", 1), "power": ("W", 0), "conductance": ("W/K", 3),
       "conductivity": ("W/(m K)", 3), "film coefficient": ("W/(m² K)", 1), "time": ("min", 1),
       "rate": ("K/min", 3), "density": ("kg/m³", 2), "volume": ("L", 3), "viscosity": ("µPa s", 2),
       "expansion": ("1/K", 6), "heat capacity": ("kJ/K", 2), "number": ("1", 3)}
_US = {"pressure": ("psi", 2), "temperature": ("°F", 1), "difference": ("°F", 1),
       "pressure difference": ("psi", 3), "fraction": ("1", 4),
       "enthalpy": ("Btu/lb", 1), "entropy": ("Btu/(lb °F)", 4), "specific volume": ("ft³/lb", 3),
       "velocity": ("ft/s", 1), "length": ("in", 3), "area": ("in²", 4), "mass": ("lb", 3),
       "mass flow": ("lb/h", 1), "mass flux": ("lb/(ft² s)", 2), "power": ("Btu/h", 0),
       "conductance": ("Btu/(h °F)", 3), "conductivity": ("Btu in/(h ft² °F)", 3),
       "film coefficient": ("Btu/(h ft² °F)", 2), "time": ("min", 1), "rate": ("°F/min", 3),
       "density": ("lb/ft³", 3), "volume": ("in³", 1), "viscosity": ("lb/(ft h)", 4),
       "expansion": ("1/°F", 7), "heat capacity": ("Btu/°F", 3), "number": ("1", 3)}

SI = UnitSystem("SI", _SI)
US = UnitSystem("US", _US)
SYSTEMS = {"SI": SI, "US": US}
