"""The throttling calorimeter: what a reading says about the line, and what the rig does to the reading."""

from engine.calorimeter.atmosphere import (
    WEATHER_HALF_WIDTH,
    altitude_of_pressure,
    geopotential_altitude,
    leg_density,
    standard_pressure,
    station_pressure,
    tapping_pressure,
    water_leg,
)
from engine.calorimeter.electric import (
    HeaterReading,
    electric_quality,
    heater_reading,
    least_electric_quality,
    power_needed,
)
from engine.calorimeter.exhaust import ExhaustPipe, exhaust_pipe, exhaust_velocity
from engine.calorimeter.flux import CriticalFlow, critical_flow, critical_mass_flux
from engine.calorimeter.friction import FITTINGS, STEEL_ROUGHNESS, fittings_loss, friction_factor, steam_viscosity
from engine.calorimeter.heatloss import (
    LAGGING_CONDUCTIVITY,
    OUTER_FILMS,
    Lagging,
    LossMethod,
    NormalReading,
    TwoFlowFit,
    chosen_heat_loss,
    conductance_of,
    fit_two_flows,
    heat_loss_per_kg,
    ideal_normal,
    normal_reading,
    pipe_conductance,
    wetness_by_normal_reading,
)
from engine.calorimeter.orifice import (
    DISCHARGES,
    OrificeFlow,
    bore_for_flow,
    discharge_from_flow,
    flux_at,
    grashof_mass_flux,
    high_pressure_factor,
    napier_mass_flux,
    orifice_flow,
    orifice_mass_flux,
    rateau_mass_flux,
    weighed_flow,
)
from engine.calorimeter.paths import Path, constant_bore_path, isenthalpic_path, isenthalpic_path_at
from engine.calorimeter.reach import (
    READABILITY,
    ExhaustPressure,
    LineWindow,
    Reach,
    ReachMap,
    Readability,
    exhaust_pressure_for,
    line_pressure_window,
    reach,
    reach_map,
)
from engine.calorimeter.reading_chart import ReadingChart, reading_chart
from engine.calorimeter.sampling import (
    SampleBias,
    aspiration_efficiency,
    isokinetic_port_area,
    isokinetic_sample_flow,
    pipe_area,
    pipe_velocity,
    sample_bias,
    stokes_number,
    wetness_in_line,
    wetness_sampled,
)
from engine.calorimeter.separating import (
    DrainNeeded,
    MassBasis,
    Separated,
    SeparatedReading,
    arriving_quality,
    combined_quality,
    drain_needed,
    drained_fraction,
    drained_mass,
    flash_fraction,
    separated_quality,
    separated_reading,
)
from engine.calorimeter.status import SENTENCES, Status, reasons
from engine.calorimeter.thermometer import (
    RECOVERY_FACTORS,
    STEM_COEFFICIENTS,
    MovingStreamError,
    Recovery,
    StemLiquid,
    corrected_temperature,
    cross_flow_film,
    immersion_error,
    immersion_for,
    lag_error,
    moving_stream_error,
    probe_time_constant,
    radiation_error,
    settling_time,
    stem_error,
)
from engine.calorimeter.throttle import Exhaust, Quality, exhaust_temperature, least_quality, quality
from engine.calorimeter.velocity import (
    bore_ratio_keeping_velocity,
    kinetic_energy,
    kinetic_quality,
    kinetic_superheat,
    least_exhaust_bore,
    velocity,
    velocity_ratio,
)
from engine.calorimeter.warmup import (
    Stage,
    SteamUsed,
    WarmUp,
    body_heat_capacity,
    body_temperature,
    reading_error,
    steam_used,
    storage_heat,
    time_to_within,
    warm_up,
)
from engine.calorimeter.ways_out import PRICES, WayKind, WayOut, ways_out
from engine.calorimeter.wet import WetSteam, wet_steam

__all__ = [  # the rig
    "DISCHARGES", "DrainNeeded", "ExhaustPipe", "FITTINGS", "HeaterReading", "LAGGING_CONDUCTIVITY", "Lagging",
    "LossMethod", "MassBasis", "MovingStreamError", "NormalReading", "OUTER_FILMS", "OrificeFlow", "RECOVERY_FACTORS",
    "Recovery", "STEEL_ROUGHNESS", "STEM_COEFFICIENTS", "SampleBias", "Separated", "SeparatedReading", "Stage",
    "SteamUsed", "StemLiquid", "TwoFlowFit", "WEATHER_HALF_WIDTH", "WarmUp", "WetSteam", "altitude_of_pressure",
    "arriving_quality", "aspiration_efficiency", "body_heat_capacity", "body_temperature", "bore_for_flow",
    "chosen_heat_loss", "combined_quality", "conductance_of", "corrected_temperature", "cross_flow_film",
    "discharge_from_flow", "drain_needed", "drained_fraction", "drained_mass", "electric_quality", "exhaust_pipe",
    "exhaust_velocity", "fit_two_flows", "fittings_loss", "flash_fraction", "flux_at", "friction_factor",
    "geopotential_altitude", "grashof_mass_flux", "heat_loss_per_kg", "heater_reading", "high_pressure_factor",
    "ideal_normal", "immersion_error", "immersion_for", "isokinetic_port_area", "isokinetic_sample_flow", "lag_error",
    "least_electric_quality", "leg_density", "moving_stream_error", "napier_mass_flux", "normal_reading",
    "orifice_flow", "orifice_mass_flux", "pipe_area", "pipe_conductance", "pipe_velocity", "power_needed",
    "probe_time_constant", "radiation_error", "rateau_mass_flux", "reading_error", "sample_bias", "separated_quality",
    "separated_reading", "settling_time", "standard_pressure", "station_pressure", "steam_used", "steam_viscosity",
    "stem_error", "stokes_number", "storage_heat", "tapping_pressure", "time_to_within", "warm_up", "water_leg",
    "weighed_flow", "wet_steam", "wetness_by_normal_reading", "wetness_in_line", "wetness_sampled",
]
__all__ += [  # throttling
    "CriticalFlow", "Exhaust", "Path", "Quality", "SENTENCES", "Status", "bore_ratio_keeping_velocity",
    "constant_bore_path", "critical_flow", "critical_mass_flux", "exhaust_temperature", "isenthalpic_path",
    "isenthalpic_path_at",
    "kinetic_energy", "kinetic_quality", "kinetic_superheat", "least_exhaust_bore", "least_quality", "quality",
    "reasons", "velocity", "velocity_ratio",
]
__all__ += [  # the reach
    "ExhaustPressure", "LineWindow", "PRICES", "READABILITY", "Reach", "ReachMap", "Readability", "ReadingChart",
    "WayKind", "WayOut", "exhaust_pressure_for", "line_pressure_window", "reach", "reach_map", "reading_chart",
    "ways_out",
]
