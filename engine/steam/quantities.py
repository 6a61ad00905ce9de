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
    ("comfortable_superheat", "ΔT_c", "difference", "K", "comfortable superheat"),
    ("x_limit", "x_L", "fraction", "1", "quality limit"),
    ("h", "h", "enthalpy", "J/kg", "specific enthalpy"),
    ("h_line", "h₁", "enthalpy", "J/kg", "specific enthalpy in the line"),
    ("s", "s", "entropy", "J/(kg K)", "specific entropy"),
    ("v", "v", "specific volume", "m³/kg", "specific volume"),
    ("v_line", "v₁", "specific volume", "m³/kg", "specific volume in the line"),
    ("v_exhaust", "v₂", "specific volume", "m³/kg", "specific volume at the exhaust"),
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
    ("kinetic_error", "δx_k", "fraction", "1", "kinetic error of the quality"),
    ("recovery", "r", "fraction", "1", "recovery factor"),
    # the rig: pressure and temperature readings
    ("altitude", "z", "length", "m", "altitude"),
    ("p_sea_level", "p₀", "pressure", "Pa", "pressure reduced to sea level"),
    ("p_reading", "p_r", "pressure", "Pa", "gauge reading, absolute"),
    ("leg_height", "z_leg", "length", "m", "height of the tapping above the gauge"),
    ("T_leg", "T_leg", "temperature", "K", "water leg temperature"),
    ("T_reading", "T_r", "temperature", "K", "thermometer reading"),
    ("T_stem", "T_s", "temperature", "K", "mean temperature of the emergent stem"),
    ("T_head", "T_h", "temperature", "K", "thermometer head temperature"),
    ("T_wall", "T_w", "temperature", "K", "wall temperature"),
    ("T_mean", "T_m", "temperature", "K", "mean steam temperature along the rig"),
    ("T_start", "T_0", "temperature", "K", "starting temperature of the body"),
    ("exposed", "n", "difference", "K", "length of the emergent stem in degrees"),
    ("stem_coefficient", "k", "expansion", "1/K", "apparent expansion of the thermometer liquid"),
    ("immersion", "L", "length", "m", "immersion length"),
    ("outer_diameter", "D", "length", "m", "outer diameter"),
    ("inner_diameter", "d", "length", "m", "inner diameter"),
    ("emissivity", "ε", "fraction", "1", "emissivity"),
    ("film", "α", "film coefficient", "W/(m² K)", "film coefficient"),
    ("condensing_film", "α_c", "film coefficient", "W/(m² K)", "film coefficient of condensation"),
    ("outer_film", "α_o", "film coefficient", "W/(m² K)", "outer film coefficient"),
    ("conductivity", "λ", "conductivity", "W/(m K)", "thermal conductivity"),
    ("viscosity", "µ", "viscosity", "Pa s", "viscosity"),
    ("density", "ρ", "density", "kg/m³", "density"),
    ("reynolds", "Re", "number", "1", "Reynolds number"),
    ("prandtl", "Pr", "number", "1", "Prandtl number"),
    ("mach", "M", "number", "1", "Mach number"),
    ("time", "t", "time", "s", "time"),
    ("time_constant", "τ", "time", "s", "time constant"),
    ("duration", "t_test", "time", "s", "duration of the test"),
    ("step", "ΔT_0", "difference", "K", "temperature step"),
    ("rate", "dT/dt", "rate", "K/s", "rate of change of temperature"),
    ("temperature_error", "δT", "difference", "K", "temperature error"),
    # the rig: flows, pipes, sampling
    ("bore", "d_o", "length", "m", "orifice bore"),
    ("discharge", "C_d", "fraction", "1", "discharge coefficient"),
    ("mass", "M", "mass", "kg", "mass"),
    ("weighed", "ṁ_w", "mass flow", "kg/s", "weighed sample flow"),
    ("p_throat", "p_t", "pressure", "Pa", "throat pressure"),
    ("length", "L", "length", "m", "length"),
    ("roughness", "ε", "length", "m", "wall roughness"),
    ("loss_coefficient", "K", "number", "1", "loss coefficient of the fittings"),
    ("relative_roughness", "ε/D", "number", "1", "relative roughness"),
    ("friction_factor", "f", "number", "1", "Darcy friction factor"),
    ("p_discharge", "p_b", "pressure", "Pa", "pressure where the exhaust discharges"),
    ("back_pressure", "Δp", "pressure", "Pa", "back pressure"),
    ("line_flow", "ṁ_1", "mass flow", "kg/s", "line flow"),
    ("pipe_bore", "D_1", "length", "m", "line bore"),
    ("port_area", "A_p", "area", "m²", "total port area of the sampling nozzle"),
    ("port_bore", "D_p", "length", "m", "bore of one port"),
    ("port_velocity", "c_p", "velocity", "m/s", "velocity in the ports"),
    ("velocity_ratio", "R", "number", "1", "line velocity over port velocity"),
    ("drop_diameter", "d_d", "length", "m", "drop diameter"),
    ("stokes", "Stk", "number", "1", "Stokes number"),
    ("aspiration", "A", "number", "1", "aspiration efficiency"),
    ("wall_film", "f_w", "fraction", "1", "part of the water running on the wall"),
    ("wetness_read", "y_r", "fraction", "1", "wetness as sampled"),
    # the log of readings
    ("condensate", "M_c", "mass", "kg", "condensate mass"),
    # the rig: heat
    ("conductance", "UA", "conductance", "W/K", "heat loss conductance"),
    ("lagging", "s", "length", "m", "lagging thickness"),
    ("heat_flow", "Q", "power", "W", "heat flow"),
    ("heat_capacity", "C", "heat capacity", "J/K", "heat capacity of the body"),
    ("area", "A", "area", "m²", "area"),
    ("T_normal", "T_N", "temperature", "K", "normal reading, the exhaust temperature with dry steam"),
    # separating and electric modes
    ("p_separator", "p_s", "pressure", "Pa", "separator pressure"),
    ("water_mass", "M_w", "mass", "kg", "mass of drained water"),
    ("weighed_mass", "M", "mass", "kg", "mass weighed"),
    ("water_volume", "V_w", "volume", "m³", "volume of drained water"),
    ("T_water", "T_w", "temperature", "K", "temperature of the measured water"),
    ("p_drain", "p_d", "pressure", "Pa", "pressure the drain flashes to"),
    ("vessel_loss", "q_s", "enthalpy", "J/kg", "vessel heat loss per kg of the whole sample"),
    ("drain_fraction", "z", "fraction", "1", "part of the sample drained as water"),
    ("x_throttled", "x_t", "fraction", "1", "quality after the separator"),
    ("water_share", "η", "fraction", "1", "part of the water drained"),
    ("p_heater", "p₃", "pressure", "Pa", "pressure after the heater"),
    ("T_heater", "T₃", "temperature", "K", "temperature after the heater"),
    ("power", "P", "power", "W", "electric power"),
    ("power_loss", "P_l", "power", "W", "heat lost by the heater"),
    # planning
    ("wetness_low", "y_low", "fraction", "1", "driest expected wetness"),
    ("wetness_high", "y_high", "fraction", "1", "wettest expected wetness"),
    ("x_low", "x_l", "fraction", "1", "wet end of the range"),
    ("x_high", "x_h", "fraction", "1", "dry end of the range"),
    ("U_thermometer", "U(T₂)", "difference", "K", "expanded uncertainty of the thermometer"),
    ("U_quality", "U(x)", "fraction", "1", "expanded uncertainty of the quality"),
    ("p_exhaust_lowest", "p₂,min", "pressure", "Pa", "lowest exhaust pressure to be had"),
    # the rig as entered
    ("wanted_flow", "ṁ*", "mass flow", "kg/s", "wanted sample flow"),
    ("exhaust_length", "L_e", "length", "m", "length of the exhaust pipe"),
    ("elbows", "n_e", "number", "1", "number of elbows in the exhaust pipe"),
    ("tees", "n_t", "number", "1", "number of tees turned in the exhaust pipe"),
    ("ports", "n_p", "number", "1", "number of ports of the sampling nozzle"),
    ("drip_flow", "ṁ_d", "mass flow", "kg/s", "water drained ahead of the nozzle"),
    ("body_length", "L_b", "length", "m", "length of the body"),
    ("body_outer_diameter", "D_b", "length", "m", "outer diameter of the body"),
    ("body_inner_diameter", "d_b", "length", "m", "inner diameter of the body"),
    ("sampling_length", "L_s", "length", "m", "length of the sampling line"),
    ("sampling_outer_diameter", "D_s", "length", "m", "outer diameter of the sampling line"),
    ("second_flow", "ṁ_2", "mass flow", "kg/s", "second sample flow"),
    ("T_second", "T₂,₂", "temperature", "K", "exhaust temperature at the second flow"),
    ("p_second", "p₂,₂", "pressure", "Pa", "exhaust pressure at the second flow"),
    ("probe_outer_diameter", "D_t", "length", "m", "outer diameter of the thermometer"),
    ("probe_inner_diameter", "d_t", "length", "m", "inner diameter of the thermometer's tube"),
    ("body_mass", "M_b", "mass", "kg", "mass of the body"),
    ("warmup_error", "δT_w", "difference", "K", "error of the warm-up allowed"),
)

QUANTITIES: dict[str, Quantity] = {row[0]: Quantity(*row) for row in _ROWS}
