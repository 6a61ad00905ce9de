"""One name per quantity: symbol, kind of unit, engine unit and label.

Docstrings, error texts, page labels and file headers take their words from here; a test keeps
public functions to these names.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Quantity:
    """``kind`` is a key of ``units.UNITS``; ``unit`` is the engine's (SI base) unit of that kind."""

    name: str
    symbol: str
    kind: str
    unit: str
    label: str


_ROWS = (
    ("p", "p", "pressure", "Pa", "pressure"),
    ("T", "T", "temperature", "K", "temperature"),
    ("p_line", "p₁", "pressure", "Pa", "line pressure"),
    ("T_line", "T₁", "temperature", "K", "line temperature"),
    ("p_exhaust", "p₂", "pressure", "Pa", "exhaust pressure"),
    ("T_exhaust", "T₂", "temperature", "K", "exhaust temperature"),
    ("p_barometer", "pₐ", "pressure", "Pa", "barometric pressure"),
    ("T_ambient", "Tₐ", "temperature", "K", "ambient temperature"),
    ("x", "x", "fraction", "1", "quality"),
    ("wetness", "y", "fraction", "1", "wetness"),
    ("x_bound", "x_b", "fraction", "1", "quality bound"),
    ("superheat", "ΔT", "difference", "K", "superheat"),
    ("line_superheat", "ΔT₁", "difference", "K", "line superheat"),
    ("least_superheat", "ΔT_min", "difference", "K", "least superheat"),
    ("h", "h", "enthalpy", "J/kg", "specific enthalpy"),
    ("h_line", "h₁", "enthalpy", "J/kg", "specific enthalpy in the line"),
    ("s", "s", "entropy", "J/(kg K)", "specific entropy"),
    ("v", "v", "specific volume", "m³/kg", "specific volume"),
    ("cp", "c_p", "entropy", "J/(kg K)", "specific heat capacity"),
    ("sound_speed", "w", "velocity", "m/s", "sound speed"),
    ("velocity", "c", "velocity", "m/s", "velocity"),
    ("line_velocity", "c₁", "velocity", "m/s", "line velocity"),
    ("exhaust_velocity", "c₂", "velocity", "m/s", "exhaust velocity"),
    ("line_bore", "d₁", "length", "m", "sample bore before the orifice"),
    ("exhaust_bore", "d₂", "length", "m", "exhaust bore"),
    ("sample_flow", "ṁ", "mass flow", "kg/s", "sample flow"),
    ("mass_flux", "G", "mass flux", "kg/(m² s)", "mass flux"),
    ("heat_loss", "q", "enthalpy", "J/kg", "heat loss per kg of sample"),
    ("kinetic_energy", "c²/2", "enthalpy", "J/kg", "kinetic energy"),
    ("recovery", "r", "fraction", "1", "recovery factor"),
)

QUANTITIES: dict[str, Quantity] = {row[0]: Quantity(*row) for row in _ROWS}
