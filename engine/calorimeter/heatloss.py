"""Heat lost between the tapping and the exhaust thermometer: found four ways, never passed over.

Heat lost per kilogram is q = UA (T_mean - T_ambient) / sample flow, positive when the steam loses
it; added back, it always makes the steam look drier than the bare reading did. The four ways:

* **conductance**: UA computed from the geometry, the lagging and the films;
* **two flows**: the enthalpies read at different sample flows lie on a line in 1/flow, and its
  intercept is the reading without loss;
* **normal reading**: the same instrument on steam known to be dry ("Steam: Its Generation and Use",
  35th ed. 1919, eq. 6, after the ASME power test committee). Steam that was in truth wet makes every
  result from it too dry, so this error has one sign only;
* **none**: no correction, chosen knowingly.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import NamedTuple

import numpy as np

from engine.calorimeter.rig_inputs import admit, choose, require
from engine.steam import saturated, saturation_temperature, state_ph, vapour
from engine.steam.arrays import give_back
from engine.steam.errors import Fault, InputError


class LossMethod(StrEnum):
    """How the heat loss was found."""

    CONDUCTANCE = "conductance"
    TWO_FLOWS = "two flows"
    NORMAL_READING = "normal reading"
    NONE = "none"


class Lagging(StrEnum):
    """The state of the insulation."""

    DRY = "dry"
    WET = "wet"


# W/(m K): mineral wool near 100 °C mean temperature; soaked, near the conductivity of water (common practice)
LAGGING_CONDUCTIVITY = {Lagging.DRY: 0.055, Lagging.WET: 0.5}

# W/(m² K), convection and radiation together from a surface below about 100 °C (common practice)
OUTER_FILMS = {"still air": 10.0, "light wind": 20.0, "wind and rain": 40.0}


class NormalReading(NamedTuple):
    """What a reading on dry steam says about the instrument."""

    T_ideal: float  # K, what dry steam would show without loss and error
    correction: float  # K, T_ideal - T_normal, to be added to every reading
    heat_loss: float  # J/kg at the sample flow of the normal reading; negative points to a fault


@dataclass(frozen=True)
class TwoFlowFit:
    """Loss-free enthalpy and conductance from readings at different sample flows."""

    h_loss_free: float  # J/kg
    conductance: float  # W/K
    heat_loss: np.ndarray  # J/kg at each of the readings
    residuals: np.ndarray  # J/kg, read minus fitted; exactly two readings leave none
    degrees_of_freedom: int
    flow_ratio: float  # largest over smallest flow: below about 1.5 the fit rests on little


def pipe_conductance(length, outer_diameter, inner_diameter, *, film=100.0, lagging=0.0,
                     conductivity=LAGGING_CONDUCTIVITY[Lagging.DRY], outer_film=OUTER_FILMS["still air"]):
    """Heat loss conductance UA [W/K] of a round body or pipe of ``length`` [m].

    1/UA = 1/(film pi d L) + ln((D + 2 s)/D)/(2 pi conductivity L) + 1/(outer_film pi (D + 2 s) L)
    (textbook series of resistances); the metal wall's own resistance is left out, it is thousands
    of times smaller. ``lagging`` [m] is 0 for a bare body; ``film`` inside and ``outer_film``
    [W/(m² K)]. Conductances of several parts add. Scalars or arrays that broadcast.

    Half a metre of DN25 with 25 mm of lagging, dry and soaked:

    >>> pipe_conductance(0.5, 0.0337, 0.0272, lagging=0.025)
    0.16
    >>> pipe_conductance(0.5, 0.0337, 0.0272, lagging=0.025, conductivity=LAGGING_CONDUCTIVITY[Lagging.WET])
    0.63
    """
    (L, D, d, a, s, k, a_o), scalar = admit(
        length=length, outer_diameter=outer_diameter, inner_diameter=inner_diameter, film=film, lagging=lagging,
        conductivity=conductivity, outer_film=outer_film)
    require("inner_diameter", d, (d > 0) & (d < D), "more than 0 and less than the outer diameter")
    surface = D + 2 * s
    per_metre = 1 / (a * np.pi * d) + np.log(surface / D) / (2 * np.pi * k) + 1 / (a_o * np.pi * surface)
    return give_back(L / per_metre, scalar)


def heat_loss_per_kg(conductance, T_mean, T_ambient, sample_flow):
    """Heat lost per kilogram of sample [J/kg]: UA (T_mean - T_ambient) / sample_flow.

    ``conductance`` [W/K], ``T_mean`` of the steam along the rig and ``T_ambient`` [K],
    ``sample_flow`` [kg/s]. Negative, a gain, where the surroundings are hotter.

    >>> heat_loss_per_kg(0.25, 400.0, 295.0, 20 / 3600)
    4725.
    """
    (UA, T, T_a, m), scalar = admit(conductance=conductance, T_mean=T_mean, T_ambient=T_ambient,
                                    sample_flow=sample_flow)
    return give_back(UA * (T - T_a) / m, scalar)


def conductance_of(heat_loss, T_mean, T_ambient, sample_flow):
    """Conductance [W/K] behind a heat loss per kilogram [J/kg]; carries a known loss to another flow.

    >>> conductance_of(4725.0, 400.0, 295.0, 20 / 3600)
    0.25
    """
    (q, T, T_a, m), scalar = admit(heat_loss=heat_loss, T_mean=T_mean, T_ambient=T_ambient, sample_flow=sample_flow)
    require("T_mean", T, T_a < T, "more than the ambient temperature")
    return give_back(q * m / (T - T_a), scalar)


def fit_two_flows(sample_flow, p_exhaust, T_exhaust, T_mean, T_ambient) -> TwoFlowFit:
    """Loss-free enthalpy and conductance from the same steam read at two or more sample flows.

    Least squares of h(p_exhaust, T_exhaust) = h_loss_free - UA (T_mean - T_ambient)/sample_flow: in
    enthalpy and not temperature, since a larger flow also raises the exhaust pressure.

    ``sample_flow`` [kg/s], ``p_exhaust`` [Pa], ``T_exhaust`` [K]: 1-d arrays of two or more readings
    (one pressure for all will do); ``T_mean``, ``T_ambient`` [K]: single values or one per reading.
    Raises InputError for fewer than two flows, equal flows and exhaust steam not superheated. A
    negative conductance, more heat lost at the larger flow, means that something else changed.

    >>> fit = fit_two_flows([20 / 3600, 40 / 3600], 101_325.0, [392.45, 394.85], 425.0, 297.0)
    >>> fit.conductance, fit.h_loss_free / 1000
    (0.42, 2725.)
    """
    (m, p, T, T_m, T_a), _ = admit(sample_flow=sample_flow, p_exhaust=p_exhaust, T_exhaust=T_exhaust,
                                   T_mean=T_mean, T_ambient=T_ambient)
    if m.ndim != 1 or m.size < 2 or np.ptp(m) <= 1e-6 * m.max():
        raise InputError(Fault("sample flows", np.array2string(m, precision=6), "kg/s",
                               "one row of at least two different flows",
                               "the loss shows only in how the reading changes with flow", name="sample_flow"))
    h = _superheated_enthalpy("T_exhaust", p, T)
    lever = -(T_m - T_a) / m
    if np.ptp(lever) <= 1e-9 * np.abs(lever).max():
        raise InputError(Fault("mean steam temperature", np.array2string(T_m, precision=6), "K",
                               "values above the ambient temperature that do not undo the change of flow",
                               name="T_mean"))
    lever_mean, h_mean = lever.mean(), h.mean()
    UA = float(((lever - lever_mean) @ (h - h_mean)) / ((lever - lever_mean) @ (lever - lever_mean)))
    h0 = float(h_mean - UA * lever_mean)
    return TwoFlowFit(h0, UA, -UA * lever, h - (h0 + UA * lever), m.size - 2, float(m.max() / m.min()))


def ideal_normal(p_line, p_exhaust):
    """Exhaust temperature [K] of dry saturated line steam throttled without loss.

    ``p_line``, ``p_exhaust`` [Pa]: scalars or arrays. Raises InputError where even dry steam would
    arrive wet (line pressures near the critical).

    >>> ideal_normal(1e6, 101_325.0) - 273.15
    150.3
    """
    (p, p2), scalar = admit(p_line=p_line, p_exhaust=p_exhaust)
    h_g = np.asarray(saturated(p).h_g)
    require("p_line", p, h_g >= np.asarray(saturated(p2).h_g), "a pressure at which dry steam arrives superheated",
            hint="lower the exhaust pressure")
    return give_back(np.asarray(state_ph(p2, h_g).T), scalar)


def normal_reading(p_line, p_exhaust, T_normal) -> NormalReading:
    """Correction in kelvin and heat loss from a reading on dry steam (T_ideal, correction, heat_loss).

    ``p_line``, ``p_exhaust`` [Pa] and ``T_normal`` [K] of the normal run: scalars or arrays. The
    correction in kelvin holds the thermometer's own error too and may be carried to other pressures.
    A negative loss means a reading above what dry steam can give: superheated steam or a wrong gauge.
    Raises InputError where the exhaust of the normal run was not superheated.

    303 °F read on dry steam at 180 psi gauge (the handbook, with a constant specific heat, has 10 °F):

    >>> normal_reading(1.34243e6, 101_353.0, 423.71).correction * 1.8
    9.0
    """
    (p, p2, T_N), scalar = admit(p_line=p_line, p_exhaust=p_exhaust, T_normal=T_normal)
    h_N = _superheated_enthalpy("T_normal", p2, T_N)
    T_ideal = np.asarray(ideal_normal(p, p2))
    loss = np.asarray(saturated(p).h_g) - h_N
    return NormalReading(*(give_back(a, scalar) for a in (T_ideal, T_ideal - T_N, loss)))


def wetness_by_normal_reading(p_line, p_exhaust, T_exhaust, T_normal):
    """Wetness [1] from a reading and the normal reading at the same pressures and flow.

    y = (h(p2, T_normal) - h(p2, T_exhaust)) / h_fg(p_line): heat loss and thermometer error cancel,
    and the line is as dry as the "dry" steam was taken to be. Negative where the reading is above
    the normal one. Scalars or arrays; InputError where either exhaust was not superheated.

    180 psi gauge, 295 °F read against a normal reading of 303 °F:

    >>> wetness_by_normal_reading(1.34243e6, 101_353.0, 419.26, 423.71) * 100
    0.45
    """
    (p, p2, T, T_N), scalar = admit(p_line=p_line, p_exhaust=p_exhaust, T_exhaust=T_exhaust, T_normal=T_normal)
    _require_superheat(p2, T_exhaust=T, T_normal=T_N)
    sat = saturated(p)
    drop = np.asarray(vapour(p2, T_N).h) - np.asarray(vapour(p2, T).h)
    return give_back(drop / np.asarray(sat.h_g - sat.h_f), scalar)


def chosen_heat_loss(method, heat_loss=None):
    """The heat loss [J/kg] to be used, refused until a method has been chosen.

    ``method``: LossMethod or its text; ``None`` is refused, not read as "none". With "none" the
    loss is 0 and giving one is an error; with any other method it must be given.

    >>> chosen_heat_loss("none"), chosen_heat_loss("two flows", 4700.0)
    (0.0, 4700.0)
    """
    method = choose("method for the heat loss", method, LossMethod)
    if method is LossMethod.NONE:
        if heat_loss is not None:
            raise InputError(Fault("heat loss per kg of sample", heat_loss, "J/kg", "no value with the method 'none'",
                                   hint="choose the method by which it was found", name="heat_loss"))
        return 0.0
    if heat_loss is None:
        raise InputError(Fault("heat loss per kg of sample", "nothing", "", f"a value found by '{method}'",
                               hint="or choose 'none' knowingly", name="heat_loss"))
    (q,), scalar = admit(heat_loss=heat_loss)
    return give_back(q, scalar)


def _require_superheat(p, **temperatures):
    """InputError that names every temperature [K] not above saturation at ``p`` [Pa]."""
    T_sat = np.asarray(saturation_temperature(p))
    faults = []
    for name, T in temperatures.items():
        try:
            require(name, T, T_sat < T, "more than the saturation temperature at the exhaust pressure",
                    why="wet exhaust steam has no enthalpy that pressure and temperature could tell")
        except InputError as error:
            faults += error.faults
    if faults:
        raise InputError(*faults)


def _superheated_enthalpy(name, p, T):
    _require_superheat(p, **{name: T})
    return np.asarray(vapour(p, T).h)
