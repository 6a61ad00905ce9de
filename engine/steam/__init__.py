"""Water and steam: IAPWS-IF97 over arrays, units, and the one error family."""

from engine.steam.errors import Fault, InputError
from engine.steam.saturation import (
    P_SAT_MAX,
    P_TRIPLE,
    Dome,
    Saturated,
    dome,
    saturated,
    saturation_pressure,
    saturation_temperature,
)
from engine.steam.states import T_MAX, State, Vapour, state_ph, state_ps, vapour
from engine.steam.status import SteamStatus
from engine.steam.transport import conductivity, viscosity

__all__ = ["P_SAT_MAX", "P_TRIPLE", "T_MAX", "Dome", "Fault", "InputError", "Saturated", "State", "SteamStatus",
           "Vapour", "conductivity", "dome", "saturated", "saturation_pressure", "saturation_temperature",
           "state_ph", "state_ps", "vapour", "viscosity"]
